"""Heat of the operator's hand: the air in the weighing chamber warms between the tare and the loaded reading."""

from __future__ import annotations

from envcorr.effect import Effect
from envcorr.estimate import Value
from envcorr.vocabulary import Quantity

__all__ = ["EFFECT", "load"]


def load(
    air_density: Value,
    air_temperature: Value,
    cycle_chamber_warming: Value,
    load_displaced_volume: Value,
    container_displaced_volume: Value,
) -> Value:
    """Return what air that has become warmer since the tare adds to the net reading [kg].

    Ideal gas at the same vapour content: rho dT/(T + dT) times all that displaces air at the loaded reading.
    """
    lighter = air_density * cycle_chamber_warming / (air_temperature + cycle_chamber_warming)
    return lighter * (load_displaced_volume + container_displaced_volume)


EFFECT = Effect(
    name="operator_heat",
    title="operator's heat in the chamber",
    help="A hand in the draught shield warms its air after the tare reading.",
    source="ideal gas at constant pressure and vapour content",
    load=load,
    treatment="use tongs and wait before reading",
    leaves="what the closed chamber does by itself",
    quantities=(
        Quantity(
            "cycle.chamber_warming",
            "temperature difference",
            "warming of the chamber's air within a weighing",
            "Air in the draught shield at the loaded reading less at the tare reading, beyond the room's change; "
            "read as ±.",
            low=-20.0,
            high=20.0,
            limit=True,
        ),
    ),
    test="Put a small sensor on the pan and load the balance by hand.",
)
