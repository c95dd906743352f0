"""Is the balance level enough for a load, and which foot must be turned by how much?"""

from __future__ import annotations

import math
from collections.abc import Sequence
from dataclasses import dataclass
from typing import Literal

import numpy as np

from envcorr.errors import Fault, InputError, Notice
from envcorr.laws import levelling, tilt
from envcorr.numerals import quoted

__all__ = ["Base", "LevelResult", "Observed", "Task", "Turn", "Verdict", "find_level"]

Verdict = Literal["level enough", "not level enough", "too near to tell", ""]

STEEPEST = math.radians(10)
"""A balance leaning more is not standing (judgement)."""
GUARD = 1.6449
"""One-sided factor of a guard band for 95 % (JCGM 106:2012, 8.3; the quantile of a normal)."""
DRAWS = 2**14
LOOSE = 20e-6
"""Metres by which a foot of four may hang before it is said (judgement: a sheet of paper is 0.1 mm)."""


@dataclass(frozen=True, slots=True)
class Task:
    """What is weighed and what is allowed: masses in kg.

    ``adjusted`` is the tilt at the adjustment and ``change`` that within a weighing, in any direction [rad].
    """

    mass: float
    allowed: float
    tare: float = 0.0
    adjusted: float = 0.0
    change: float = 0.0


@dataclass(frozen=True, slots=True)
class Observed:
    """How the balance stands: inclinations along x and y [rad], their standard uncertainty; sides known or not."""

    x: float
    y: float
    u: float = 0.0
    sides_known: bool = True


@dataclass(frozen=True, slots=True)
class Base:
    """The feet: names and places [m]; pitch of the thread [m] (None where not known), and which foot stays."""

    names: tuple[str, ...]
    x: tuple[float, ...]
    y: tuple[float, ...]
    pitch: float | None = None
    right_hand: bool = True
    kept: str = ""


@dataclass(frozen=True, slots=True)
class Turn:
    """What to do with one foot: raise it by so much [m], by so many turns (None without a pitch)."""

    name: str
    raised: float
    turns: float | None
    clockwise: bool
    """Seen from above."""


@dataclass(frozen=True)
class LevelResult:
    """Everything that was found; angles in rad, masses in kg, lengths in m.

    ``largest_tilt`` is the largest that the load allows, ``smallest_tilt`` the smallest (above zero only where the
    balance was adjusted out of level), ``largest_change`` the largest change within a weighing. ``error`` is what the
    tilt adds to the reading, ``error_of_change`` what the stated change does at most. ``acceptance`` holds the tilts
    that the guard band leaves.
    """

    task: Task
    largest_tilt: float
    smallest_tilt: float
    largest_change: float
    observed: Observed | None
    tilt: float | None
    error: float | None
    error_of_change: float
    probability: float | None
    acceptance: tuple[float, float] | None
    verdict: Verdict
    base: Base | None
    turns: tuple[Turn, ...]
    heights: tuple[tuple[str, float], ...]
    """By how much a foot, or the feet of a side, may be off [m]."""
    notices: tuple[Notice, ...]


def find_level(
    task: Task,
    *,
    observed: Observed | None = None,
    base: Base | None = None,
    heights: Sequence[float] | None = None,
    u_height: float = 0.0,
    seed: int = 0,
) -> LevelResult:
    """Return the levelling tolerance of a load, and what is to be done about a balance that stands as observed.

    ``heights`` of the feet [m] stand for ``observed``. Raises :class:`InputError` where the base or the task makes no
    sense.
    """
    _check(task, base)
    notices: list[Notice] = []
    if heights is not None and base is not None:
        observed, loose = _of_heights(base, heights, u_height)
        notices += loose
    smallest, largest = levelling.tolerated_angles(task.adjusted, task.allowed / task.mass)
    gross = task.mass + task.tare
    found = error = probability = acceptance = None
    verdict: Verdict = ""
    at = task.adjusted
    if observed is not None:
        found = float(tilt.combined_angle(observed.x, observed.y))
        if found > STEEPEST:
            problem = f"the balance leans by {math.degrees(found):.1f}°, more than 10°."
            raise InputError([Fault("tilt", problem, "Check the unit, and set it upright first.")])
        at = found
        error = task.mass * float(tilt.relative_shift(task.adjusted, 0.0, observed.x, observed.y))
        probability = _probability(task, observed, seed)
        low, high = (smallest + GUARD * observed.u if smallest else 0.0), largest - GUARD * observed.u
        acceptance = low, high
        verdict = _verdict(found, observed.u, smallest, largest)
    if task.adjusted:
        notices.append(
            Notice(
                "adjusted tilt",
                "The balance was adjusted out of level: its reading changes in proportion to every further tilt. "
                "Level it and adjust it again.",
                "d(cos B/cos A) = -tan A dB",
            )
        )
    share = task.allowed / gross * float(tilt.cosine(task.adjusted, 0.0) / tilt.cosine(at, 0.0))
    return LevelResult(
        task=task,
        largest_tilt=largest,
        smallest_tilt=smallest,
        largest_change=levelling.tolerated_angles(at, share)[1] - at,
        observed=observed,
        tilt=found,
        error=error,
        error_of_change=_of_change(task, at, task.change),
        probability=probability,
        acceptance=acceptance,
        verdict=verdict,
        base=base,
        turns=_turns(base, observed) if base and observed and observed.sides_known else (),
        heights=_heights(base, largest) if base else (),
        notices=tuple(notices),
    )


def _check(task: Task, base: Base | None) -> None:
    faults = []
    if not task.mass > 0:
        faults.append(Fault("load", "is not above zero.", 'Write --load "200 g".'))
    if not task.allowed > 0:
        faults.append(Fault("allowed error", "is not above zero.", 'Write --allowed "0.05 mg".'))
    if not 0 <= task.adjusted <= STEEPEST:
        faults.append(Fault("tilt at the adjustment", "is more than 10°.", "Check the unit."))
    if base is not None:
        if levelling.collinear(base.x, base.y):
            faults.append(Fault("feet", "stand in one line.", "Give their places, right and back of one point."))
        if base.pitch is not None and not base.pitch > 0:
            faults.append(Fault("pitch", "is not above zero.", 'Write --pitch "0.8 mm": the rise of one turn.'))
        if base.kept and base.kept not in base.names:
            faults.append(Fault("--keep", f"{quoted(base.kept)} is no foot.", f"Known are {', '.join(base.names)}."))
    if faults:
        raise InputError(faults)


def _of_heights(base: Base, heights: Sequence[float], u: float) -> tuple[Observed, list[Notice]]:
    slope_x, slope_y, above = levelling.plane(base.x, base.y, heights)
    # u of a slope: that of a straight line through points with independent errors, in the steeper of two axes
    spans = [float(np.sqrt(np.sum((np.array(axis) - np.mean(axis)) ** 2))) for axis in (base.x, base.y)]
    observed = Observed(math.atan(slope_x), math.atan(slope_y), u / min(spans))
    if len(base.names) == 3 or np.max(np.abs(above)) <= LOOSE:
        return observed, []
    low = " or ".join(name for name, rest in zip(base.names, above, strict=True) if rest < 0)
    sentence = (
        f"The four feet do not lie in one plane: {low} hangs by {4e3 * float(np.max(np.abs(above))):.2f} mm, so that "
        "the balance rocks. Bring that foot to the bench first."
    )
    return observed, [Notice("feet", sentence, "plane of least squares")]


def _shift(task: Task, angle: float) -> float:
    return float(tilt.relative_shift(task.adjusted, 0.0, angle, 0.0))


def _of_change(task: Task, at: float, change: float) -> float:
    """Return the largest error of a change of tilt between tare and load [kg], whichever way: it acts on the gross."""
    ends = at + change, max(at - change, 0.0)
    return (task.mass + task.tare) * max(abs(_shift(task, end) - _shift(task, at)) for end in ends)


def _probability(task: Task, observed: Observed, seed: int) -> float:
    """Return how surely the error stays within what is allowed, given how well the tilt was read."""
    from scipy.stats import qmc

    points = qmc.Sobol(3, scramble=True, rng=np.random.default_rng(seed)).random(DRAWS)
    from scipy import special

    x, y = (special.ndtri(np.clip(points[:, i], 1e-12, 1 - 1e-12)) * observed.u for i in (0, 1))
    x, y = observed.x + x, observed.y + y
    error = task.mass * tilt.relative_shift(task.adjusted, 0.0, x, y)
    if task.change:
        along = (2 * points[:, 2] - 1) * task.change
        angle = tilt.combined_angle(x, y)
        moved = tilt.relative_shift(task.adjusted, 0.0, np.abs(angle - along), 0.0)
        still = tilt.relative_shift(task.adjusted, 0.0, angle, 0.0)
        error = error + (task.mass + task.tare) * (still - moved)
    return float(np.mean(np.abs(error) <= task.allowed))


def _verdict(found: float, u: float, smallest: float, largest: float) -> Verdict:
    """Return whether a measured tilt is within its tolerance beyond doubt (guard band, JCGM 106:2012, 8.3)."""
    guard = GUARD * u
    if found + guard <= largest and (not smallest or found - guard >= smallest):
        return "level enough"
    if found - guard > largest or (smallest and found + guard < smallest):
        return "not level enough"
    return "too near to tell"


def _turns(base: Base, observed: Observed) -> tuple[Turn, ...]:
    slopes = math.tan(observed.x), math.tan(observed.y)
    choices = range(len(base.names)) if not base.kept else [base.names.index(base.kept)]
    ways = [levelling.changes_to_level(base.x, base.y, *slopes, kept) for kept in choices]
    raised = min(ways, key=lambda way: float(np.sum(np.abs(way))))
    return tuple(
        Turn(
            name,
            float(rise),
            None if base.pitch is None else float(abs(rise) / base.pitch),
            clockwise=(rise > 0) == base.right_hand,
        )
        for name, rise in zip(base.names, raised, strict=True)
    )


def _heights(base: Base, largest: float) -> tuple[tuple[str, float], ...]:
    slope = math.tan(largest)
    if len(base.names) == 3:
        return tuple(zip(base.names, (float(slope * arm) for arm in levelling.arms(base.x, base.y)), strict=True))
    spans = max(base.x) - min(base.x), max(base.y) - min(base.y)
    return (
        ("both feet of the left or right side", slope * spans[0]),
        ("both feet of the front or back", slope * spans[1]),
    )
