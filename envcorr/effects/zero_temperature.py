"""Temperature coefficient of the zero: the empty balance's zero follows the temperature within a weighing."""

from __future__ import annotations

from envcorr.effect import Effect, Way
from envcorr.estimate import Value
from envcorr.vocabulary import Quantity

__all__ = ["EFFECT", "load"]


def load(balance_zero_temperature_coefficient: Value, cycle_temperature_rise: Value) -> Value:
    """Return the shift of zero between the readings [kg]: coefficient [kg/K] times the rise of temperature [K]."""
    return balance_zero_temperature_coefficient * cycle_temperature_rise


EFFECT = Effect(
    name="zero_temperature",
    title="zero shift with temperature",
    help="The zero follows the temperature, so what changed between tare and load is weighed too.",
    source="EURAMET cg-18 v4.0, 7.1.2 (from memory)",
    load=load,
    correctable=True,
    quantities=(
        Quantity(
            "balance.zero_temperature_coefficient",
            "mass per temperature",
            "temperature coefficient of the zero",
            "Shift of the zero for each kelvin; a bound, read as ±.",
            varies="never",
            limit=True,
        ),
        Quantity(
            "cycle.temperature_rise",
            "temperature difference",
            "rise of temperature within a weighing",
            "From what was said of the tare's air or of the change within a weighing.",
            internal=True,
        ),
    ),
    ways=(
        Way(
            "cycle.temperature_rise",
            lambda cycle_temperature_change: cycle_temperature_change,
            "the change within a weighing",
        ),
        Way(
            "cycle.temperature_rise",
            lambda air_temperature, tare_air_temperature: air_temperature - tare_air_temperature,
            "loaded less tare reading",
            only_if=lambda given: "tare.air.temperature" in given,
        ),
    ),
    test="Read the empty balance every few minutes while the room warms.",
)
