"""Shift of the zero with tilt, where the tilt changes within a weighing."""

from __future__ import annotations

from envcorr.effect import Effect
from envcorr.estimate import Value
from envcorr.vocabulary import Quantity

__all__ = ["EFFECT", "load"]


def load(balance_zero_tilt_coefficient: Value, cycle_tilt_change: Value) -> Value:
    """Return the shift of zero between the two readings [kg]: coefficient [kg/rad] times the change of tilt [rad]."""
    return balance_zero_tilt_coefficient * cycle_tilt_change


EFFECT = Effect(
    name="tilt_zero",
    title="zero shift with tilt",
    help="The empty balance's zero moves with its inclination.",
    source="first-order coefficient from a test (definition)",
    load=load,
    correctable=True,
    quantities=(
        Quantity(
            "balance.zero_tilt_coefficient",
            "mass per angle",
            "zero coefficient of tilt",
            "Shift of the zero for a change of tilt along x; a bound, read as ±.",
            varies="never",
            limit=True,
        ),
    ),
    test="Zero the empty balance, turn a foot by a known part of a turn, and read.",
)
