"""Air that an open container holds at its own temperature."""

from __future__ import annotations

from envcorr.effect import Effect
from envcorr.estimate import Estimate, Value
from envcorr.laws import heat
from envcorr.vocabulary import Assumed, Quantity

__all__ = ["EFFECT", "load"]


def load(
    container_inner_volume: Value,
    load_volume: Value,
    container_warmer_by: Value,
    tare_container_warmer_by: Value,
    air_temperature: Value,
    tare_air_temperature: Value,
    air_pressure: Value,
    tare_air_pressure: Value,
    air_vapour_fraction: Value,
    tare_air_vapour_fraction: Value,
    air_co2: Value,
    container_air_mixed: Value,
) -> Value:
    """Return what the air in an open container of another temperature adds to the net reading [kg].

    At each reading the free volume times the difference of density at the same vapour content, less the share that has
    mixed with the room's air.
    """
    now = heat.trapped_air(
        container_inner_volume - load_volume,
        air_temperature + container_warmer_by,
        air_temperature,
        air_pressure,
        air_vapour_fraction,
        air_co2,
    )
    then = heat.trapped_air(
        container_inner_volume,
        tare_air_temperature + tare_container_warmer_by,
        tare_air_temperature,
        tare_air_pressure,
        tare_air_vapour_fraction,
        air_co2,
    )
    return (1 - container_air_mixed) * (now - then)


EFFECT = Effect(
    name="trapped_air",
    title="warm air in the container",
    help="A warm open container holds lighter air than the room's, and reads light.",
    source="ideal mixing at the room's pressure and vapour content, CIPM-2007",
    load=load,
    correctable=True,
    when={"container.closed": ("never",)},
    treatment="let it come to the temperature of the balance",
    leaves="what the last tenths of a kelvin do",
    quantities=(
        Quantity(
            "container.air_mixed",
            "fraction",
            "share of the container's air that has mixed with the room's",
            "0 for a narrow neck, towards 1 for a wide dish.",
            low=0.0,
            high=1.0,
            default=Assumed(Estimate(0.0), "none has mixed: the largest effect (judgement)"),
        ),
    ),
    test="Swing the container's air out with a slow fan, wait for calm, and weigh again.",
)
