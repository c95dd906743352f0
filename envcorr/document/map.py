"""Where the target is reached, as charts and in words."""

from __future__ import annotations

import math

import numpy as np
from numpy.typing import NDArray

import envcorr
from envcorr import units
from envcorr.document.blocks import Band, Block, Region, Scale, Text
from envcorr.document.scene import scene
from envcorr.document.wording import joined, mass, percent
from envcorr.jobs.map import Axis, Curve, Grid

Floats = NDArray[np.float64]

__all__ = ["STATES", "curve", "grid"]

STATES = {"as_read": "as it is read", "corrected": "corrected", "treated": "corrected and treated"}


def grid(result: Grid) -> list[Block]:
    """Return the page of a map over two quantities."""
    x, y = _scale(result.x), _scale(result.y)
    share = float(np.mean(result.reached))
    here = "" if not _inside(result.x) or not _inside(result.y) else " The circle is the present point."
    unknown = float(np.mean(np.isnan(result.probability)))
    alt = (
        f"The target is reached in {percent(share)} of the field of {result.x.caption} from {_end(result.x, 0)} to "
        f"{_end(result.x, -1)} and {result.y.caption} from {_end(result.y, 0)} to {_end(result.y, -1)}.{here}"
    )
    if unknown:
        alt += f" {percent(unknown)} of it could not be computed."
    rows = tuple(tuple(float(p) for p in row) for row in result.probability)
    title = f"Where {mass(result.target.resolution)} is reached, {STATES[result.state]}"
    return [
        *scene(result.plan, result.target.resolution, "Map"),
        Region(title, x, y, rows, result.target.probability, alt),
        Text(alt),
        *_small_print(result),
    ]


def curve(result: Curve) -> list[Block]:
    """Return the page of a curve against one quantity."""
    reached = result.probability >= result.target.probability
    within = _runs(result.x, reached)
    told = (
        f"The target is reached for {result.x.caption} {within}." if within else "The target is reached nowhere on it."
    )
    scope = "surroundings" if result.scope == "surroundings" else "whole weighing"
    unit = "mg" if result.allowed >= 1e-7 else "µg"
    mean, low, high = (_in(values, unit) for values in (result.mean, result.low, result.high))
    title = f"Error of the {scope}, {STATES[result.state]}"
    return [
        *scene(result.plan, result.target.resolution, "Curve"),
        Band(
            title=title,
            x=_scale(result.x),
            caption=f"error [{unit}]",
            mean=mean,
            low=low,
            high=high,
            allowed=float(units.to_unit(result.allowed, "mass", unit)),
            alt=f"{title}, from {_end(result.x, 0)} to {_end(result.x, -1)} of {result.x.caption}. {told}",
        ),
        Text(told),
        *_small_print(result),
    ]


def _in(masses: Floats, unit: str) -> tuple[float, ...]:
    return tuple(float(size) for size in np.asarray(units.to_unit(masses, "mass", unit)))


def _small_print(result: Grid | Curve) -> list[Block]:
    blocks: list[Block] = []
    axes = [result.x] if isinstance(result, Curve) else [result.x, result.y]
    blocks += [Text(f"The spread of the {axis.label} grows with it.") for axis in axes if axis.in_proportion]
    if result.missing:
        blocks.append(
            Text(f"Not assessed, though this load needs it: {joined(result.missing)}. The chart does not count it.")
        )
    blocks.append(
        Text(
            f"Each point is a room check on the same {result.draws} draws (seed {result.seed}), the other quantities "
            f"as they are; envcorr {envcorr.__version__}.",
            quiet=True,
        )
    )
    return blocks


def _scale(axis: Axis) -> Scale:
    unit = _unit(axis)
    values = tuple(float(units.to_unit(v, axis.kind, unit)) for v in axis.values)
    caption = f"{axis.caption} [{unit}]" if unit else axis.caption
    return Scale(caption, values, float(units.to_unit(axis.now, axis.kind, unit)), axis.logarithmic)


def _unit(axis: Axis) -> str:
    """Return the unit that fits the larger end."""
    return units.fitting_unit(float(axis.values[-1]), axis.kind)


def _end(axis: Axis, which: int) -> str:
    return units.show(float(axis.values[which]), axis.kind, 4)


def _inside(axis: Axis) -> bool:
    return bool(axis.values[0] <= axis.now <= axis.values[-1])


def _runs(axis: Axis, reached: NDArray[np.bool_]) -> str:
    """Return the ranges in which it is reached: ``from 5 K to 7 K``."""
    edges = np.flatnonzero(np.diff(np.concatenate([[False], reached, [False]]).astype(int)))
    parts = []
    for start, stop in zip(edges[::2], edges[1::2], strict=True):
        low, high = axis.values[start], axis.values[stop - 1]
        parts.append(f"from {units.show(float(low), axis.kind, 3)} to {units.show(float(high), axis.kind, 3)}")
    return joined(parts) if parts and not math.isnan(float(axis.values[0])) else ""
