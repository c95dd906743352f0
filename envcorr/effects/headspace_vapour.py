"""Vapour in the headspace: what evaporates into a vessel's empty part drives air out of it."""

from __future__ import annotations

from envcorr import liquids
from envcorr.effect import Effect
from envcorr.estimate import Estimate, Value
from envcorr.laws import evaporation
from envcorr.vocabulary import Assumed, Quantity

__all__ = ["EFFECT", "load"]


def load(
    headspace_saturation: Value,
    evaporation_drawn_pressure: Value,
    evaporation_far_pressure: Value,
    air_pressure: Value,
    air_density: Value,
    container_inner_volume: Value,
    load_volume: Value,
) -> Value:
    """Return the weight of the air that the vapour has driven out [kg], negative.

    The vapour itself is part of the liquid that was poured; it takes the place of as much air, by its share of the
    pressure, in what the liquid leaves empty. Of water the room's air brings a part along.
    """
    full = evaporation.driven_out(evaporation_drawn_pressure, evaporation_far_pressure, air_pressure)
    return -headspace_saturation * full * air_density * (container_inner_volume - load_volume)


EFFECT = Effect(
    name="headspace_vapour",
    title="vapour in the headspace",
    help="A vessel that was tared full of air and then holds a volatile liquid loses air that its vapour drives out.",
    source="ideal gases at one pressure (Dalton)",
    load=load,
    # a vessel kept shut loses nothing
    when={"container.closed": ("never", "each time"), "evaporation.liquid": tuple(liquids.every())},
    treatment="tare the vessel with a trace of the liquid in it, and close it",
    leaves="what differs between the two",
    quantities=(
        Quantity(
            "headspace.saturation",
            "fraction",
            "saturation of the headspace",
            "Partial pressure of the vapour there over its vapour pressure, more than when the vessel was tared.",
            low=0.0,
            high=1.0,
            default=Assumed(Estimate(0.5, "rectangular", 0.5), "anywhere between none and all (judgement)"),
            lessens_to_zero=True,
        ),
    ),
    test="Weigh the closed vessel with the liquid, open it for a minute and close it, and weigh again.",
    caution="Vapour of solvents can burn and harm: follow local codes and licensed practice.",
)
