"""Pressure pulse: a door or a hood presses on the shaft that carries the pan."""

from __future__ import annotations

from envcorr.constants import STANDARD_GRAVITY
from envcorr.effect import Effect
from envcorr.estimate import Value
from envcorr.vocabulary import Quantity

__all__ = ["EFFECT", "load"]


def load(pulse_pressure: Value, balance_shaft_area: Value) -> Value:
    """Return what a difference of pressure across the shaft's opening weighs [kg]: dp A / g."""
    return pulse_pressure * balance_shaft_area / STANDARD_GRAVITY.value


EFFECT = Effect(
    name="pressure_pulse",
    title="pressure pulse",
    help="A slammed door or a hood lifts or presses the shaft of the pan for as long as inside and outside differ.",
    source="pressure times area (definition)",
    load=load,
    when={"balance.repeatability_from": ("elsewhere",)},
    treatment="keep doors shut, and read between pulses",
    leaves="slow changes, which the housing follows",
    quantities=(
        Quantity(
            "pulse.pressure",
            "pressure",
            "pressure pulse",
            "Difference of pressure between the chamber and the inside of the housing while it is read; a bound, read "
            "as ±.",
            low=-10_000.0,
            high=10_000.0,
            varies="each weighing",
            limit=True,
            example="0.5 Pa",
        ),
        Quantity(
            "balance.shaft_area",
            "area",
            "area of the pan's shaft",
            "Cross-section on which the pressure acts where the shaft enters the housing.",
            low=1e-8,
            high=0.01,
            varies="never",
            example="0.2 cm²",
        ),
    ),
    test="Watch the display while somebody opens and shuts the door.",
    caution="Never turn off a ventilated enclosure that protects from powder or vapour to steady a reading.",
)
