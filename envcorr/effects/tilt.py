"""Tilt: a balance out of level feels the cosine of its inclination."""

from __future__ import annotations

import numpy as np

from envcorr.effect import Answer, Check, Effect, Way
from envcorr.estimate import Estimate, Value
from envcorr.laws.tilt import relative_shift
from envcorr.vocabulary import Assumed, Quantity

__all__ = ["EFFECT", "gain"]

_LEVEL = Assumed(Estimate(0.0), "a balance is levelled before it is adjusted (common practice, no source)")
_RIGHT = 1.5  # rad; a balance on its side is no balance (judgement)
_NOTED = np.pi / 10800  # 1 arcmin: a smaller change is not worth a word (judgement)


def gain(bench_tilt_x: Value, bench_tilt_y: Value, adjusted_bench_tilt_x: Value, adjusted_bench_tilt_y: Value) -> Value:
    """Return cos B/cos A - 1, the balance having been adjusted at tilt A and standing at tilt B (angles in rad)."""
    return relative_shift(adjusted_bench_tilt_x, adjusted_bench_tilt_y, bench_tilt_x, bench_tilt_y)


def _slope(bench_tilt_x: Value, bench_tilt_y: Value) -> Value:
    return np.hypot(np.tan(bench_tilt_x), np.tan(bench_tilt_y))


def _angle(name: str, label: str, text: str, *, limit: bool = False, default: Assumed | None = None) -> Quantity:
    return Quantity(name, "angle", label, text, low=-_RIGHT, high=_RIGHT, limit=limit, default=default)


EFFECT = Effect(
    name="tilt",
    title="tilt",
    help="Only the part of the weight along the balance's axis is felt: the cosine of its inclination.",
    source="cosine of the inclination, two axes composed by their tangents (geometry)",
    gain=gain,
    correctable=True,
    treatment="level it and adjust it again",
    leaves="the level's own reading error",
    quantities=(
        _angle("bench.tilt_x", "tilt about one axis", "Inclination of the balance along its x axis (left-right)."),
        _angle(
            "bench.tilt_y", "tilt about the other axis", "Inclination of the balance along its y axis (front-back)."
        ),
        _angle("adjusted.tilt", "tilt at the adjustment", "Where [adjusted.bench] says nothing.", default=_LEVEL),
        _angle(
            "cycle.tilt_change",
            "change of tilt within a weighing",
            "Inclination along x at the loaded reading less that at the tare reading (a person steps up); read as ±.",
            limit=True,
        ),
    ),
    ways=(
        Way("adjusted.bench.tilt_x", lambda adjusted_tilt: adjusted_tilt, "level, unless stated"),
        Way("adjusted.bench.tilt_y", lambda adjusted_tilt: adjusted_tilt, "level, unless stated"),
        Way(
            "tare.bench.tilt_x",
            lambda bench_tilt_x, cycle_tilt_change: bench_tilt_x - cycle_tilt_change,
            "the present one less the change within the weighing",
        ),
    ),
    test="Weigh one object, turn a foot by a known part of a turn, and weigh it again.",
    answers=(
        Answer(
            "shift for each further arcminute along the tilt it was adjusted at",
            "fraction",
            # d(cos B/cos A) = -tan A dB at B = A; one arcminute is pi/10800 rad
            lambda adjusted_bench_tilt_x, adjusted_bench_tilt_y: (
                -_slope(adjusted_bench_tilt_x, adjusted_bench_tilt_y) * np.pi / 10800
            ),
        ),
        Answer(
            "largest tilt for this load, adjusted level",
            "angle",
            # 1 - cos theta = 2 sin²(theta/2) = allowed error over the mass
            lambda load_mass, target_resolution, target_within: (
                2 * np.arcsin(np.sqrt(np.minimum(target_within * target_resolution / load_mass, 1.0) / 2))
            ),
        ),
    ),
    checks=(
        Check(
            lambda bench_tilt_x, bench_tilt_y, adjusted_bench_tilt_x, adjusted_bench_tilt_y: (
                (np.hypot(adjusted_bench_tilt_x, adjusted_bench_tilt_y) > _NOTED)
                & (np.hypot(bench_tilt_x - adjusted_bench_tilt_x, bench_tilt_y - adjusted_bench_tilt_y) > _NOTED)
            ),
            "The balance was adjusted out of level ({adjusted_bench_tilt_x} and {adjusted_bench_tilt_y}) and has "
            "been "
            "levelled or moved since ({bench_tilt_x} and {bench_tilt_y}): the shift is linear in that change. Adjust "
            "it "
            "again where it stands.",
            source="cos B/cos A; 1 arcmin is a judgement",
        ),
    ),
)
