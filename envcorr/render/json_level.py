"""A levelling tolerance, and what to turn, as a plain dictionary for JSON."""

from __future__ import annotations

from typing import Any

from envcorr.jobs.level import LevelResult
from envcorr.render.json import envelope, figure

__all__ = ["level"]


def level(result: LevelResult) -> dict[str, Any]:
    """Return the answer of ``envcorr level``; angles in arcmin, errors in mg, heights in mm."""
    task = result.task
    observed = result.observed

    def angle(size: float | None, **more: Any) -> dict[str, Any] | None:
        return None if size is None else figure(size, "angle", "arcmin", **more)

    found = {
        "largest_tilt": angle(result.largest_tilt),
        "smallest_tilt": angle(result.smallest_tilt),
        "largest_change": angle(result.largest_change),
        "tilt": angle(result.tilt, **({"u": observed.u} if observed and observed.u else {})),
        "tilt_x": angle(observed.x if observed and observed.sides_known else None),
        "tilt_y": angle(observed.y if observed and observed.sides_known else None),
        "error": None if result.error is None else figure(result.error, "mass", "mg"),
        "error_of_change": figure(result.error_of_change, "mass", "mg"),
        "probability": result.probability,
        "acceptance": None if result.acceptance is None else [angle(end) for end in result.acceptance],
        "verdict": result.verdict or None,
        "turns": [
            {
                "foot": turn.name,
                "raise": figure(turn.raised, "length", "mm"),
                "turns": turn.turns,
                "direction": None if not turn.raised else "clockwise" if turn.clockwise else "anticlockwise",
            }
            for turn in result.turns
        ],
        "heights": {name: figure(height, "length", "mm") for name, height in result.heights},
    }
    inputs = {
        "load": figure(task.mass, "mass", "g"),
        "container": figure(task.tare, "mass", "g"),
        "allowed": figure(task.allowed, "mass", "mg"),
        "adjusted_tilt": angle(task.adjusted),
        "change": angle(task.change),
    }
    return envelope("level", found, inputs=inputs, notices=result.notices)
