"""Evaporation: an open liquid loses weight while it is weighed."""

from __future__ import annotations

from typing import Any

import numpy as np

from envcorr import liquids
from envcorr.effect import Answer, Check, Effect, Way
from envcorr.estimate import Estimate, Value
from envcorr.laws import evaporation
from envcorr.vocabulary import Assumed, Choice, Quantity

__all__ = ["EFFECT", "load"]

_BURNS = tuple(name for name, liquid in liquids.every().items() if liquid.flash is not None)


def load(evaporation_loss_rate: Value, evaporation_open_time: Value) -> Value:
    """Return what has left by the loaded reading [kg]: rate times the time that it stood open, negative."""
    return -evaporation_loss_rate * evaporation_open_time


def _properties(name: str) -> tuple[Way, ...]:
    """Return the ways to a liquid's properties at the air's best temperature, and to its rate on the draws."""
    liquid = liquids.every()[name]
    when = {"evaporation.liquid": (name,)}

    def rate(
        evaporation_opening: Value,
        evaporation_depth: Value,
        evaporation_vapour_pressure: Value,
        evaporation_heat: Value,
        evaporation_reference_temperature: Value,
        evaporation_far_pressure: Value,
        evaporation_factor: Value,
        air_temperature: Value,
        air_pressure: Value,
    ) -> Value:
        path = evaporation.diffusion_path(evaporation_depth, evaporation_opening)
        diffusivity = evaporation.fuller(air_temperature, air_pressure, liquid.molar_mass, liquid.volume)
        at_air = evaporation.clausius_clapeyron(
            evaporation_vapour_pressure, evaporation_heat, air_temperature, evaporation_reference_temperature
        )
        surface = evaporation.surface_temperature(
            air_temperature,
            air_pressure,
            path,
            diffusivity,
            at_air,
            evaporation_heat,
            evaporation_far_pressure,
            liquid.molar_mass,
        )
        at_surface = evaporation.clausius_clapeyron(at_air, evaporation_heat, surface, air_temperature)
        flux = evaporation.stefan_flux(
            diffusivity, path, air_temperature, air_pressure, at_surface, evaporation_far_pressure, liquid.molar_mass
        )
        return evaporation_factor * flux * np.pi / 4 * evaporation_opening**2

    return (
        Way(
            "evaporation.vapour_pressure",
            lambda air_temperature: liquids.vapour_pressure(liquid, float(np.mean(air_temperature))),
            f"of {name}",
            source=liquid.source,
            when=when,
            at_best=("air_temperature",),
        ),
        Way(
            "evaporation.heat",
            lambda air_temperature: liquids.heat_of_vaporisation(liquid, float(np.mean(air_temperature))),
            f"of {name}",
            source=liquid.source,
            when=when,
            at_best=("air_temperature",),
        ),
        Way(
            "evaporation.loss_rate",
            rate,
            f"diffusion of {name} through the opening, its surface cooled by it",
            source="Stefan's flow: Bird, Stewart, Lightfoot, 18.2; diffusivity: Fuller, Schettler, Giddings",
            when=when,
        ),
    )


def _internal(name: str, kind: str, label: str, text: str, **more: Any) -> Quantity:
    return Quantity(name, kind, label, text, internal=True, **more)


EFFECT = Effect(
    name="evaporation",
    title="evaporation",
    help="An open liquid loses vapour from the moment it is poured; the reading falls as long as it stands open.",
    source="Stefan diffusion through an opening, the surface cooled by it; or a measured rate",
    load=load,
    correctable=True,
    # a vessel kept shut loses nothing
    when={"container.closed": ("never", "each time")},
    treatment="close it, or read at once",
    leaves="what leaves before it is closed",
    choices=(
        Choice(
            "evaporation.liquid",
            "the liquid that evaporates",
            {
                name: f"vapour pressure: {one.source}" + ("" if one.flash is None else "; flammable")
                for name, one in liquids.every().items()
            },
            notes={
                name: f"The vapour of {name} burns: no ignition source near it, high-voltage ionisers included; "
                "ventilate, and follow local codes and licensed practice."
                for name in _BURNS
            },
        ),
    ),
    quantities=(
        Quantity(
            "evaporation.rate",
            "mass rate",
            "measured rate of evaporation",
            "Loss per time, from readings of the open vessel; positive for a loss.",
            low=-1e-3,
            high=1e-3,
            example="0.4 mg/min",
        ),
        Quantity(
            "evaporation.open_time",
            "time",
            "time that the liquid has stood open",
            "From pouring or opening to the loaded reading.",
            low=0.0,
            high=1e7,
            lessens_to_zero=True,
            example="40 s",
        ),
        Quantity(
            "evaporation.opening",
            "length",
            "diameter of the opening",
            "Of the mouth through which the vapour leaves.",
            low=1e-5,
            high=1.0,
            varies="never",
            lessens_to_zero=True,
            example="20 mm",
        ),
        Quantity(
            "evaporation.depth",
            "length",
            "depth of the liquid below the rim",
            "Still air that the vapour has to cross; nothing where it is filled to the brim.",
            low=0.0,
            high=2.0,
            varies="never",
            example="30 mm",
        ),
        Quantity(
            "evaporation.factor",
            "number",
            "model factor of evaporation",
            "How far the true rate may lie from the model's: a draught, a vessel that warms the liquid, a wet wall.",
            low=0.01,
            high=100.0,
            varies="never",
            default=Assumed(Estimate.between(0.5, 2.0, "log-uniform"), "a factor of 2 either way (judgement)"),
        ),
        _internal("evaporation.loss_rate", "mass rate", "rate of evaporation", "However it was found."),
        _internal(
            "evaporation.vapour_pressure",
            "pressure",
            "vapour pressure of the liquid",
            "At the air's temperature.",
            low=0.0,
        ),
        _internal("evaporation.heat", "number", "heat of vaporisation in J/mol", "At the air's temperature."),
        _internal(
            "evaporation.reference_temperature",
            "temperature",
            "temperature of the vapour pressure",
            "The air's, at its best.",
        ),
        _internal("evaporation.far_pressure", "pressure", "vapour of the liquid in the room", "Water only."),
    ),
    ways=(
        Way("evaporation.loss_rate", lambda evaporation_rate: evaporation_rate, "as measured"),
        Way(
            "evaporation.reference_temperature",
            lambda air_temperature: air_temperature,
            "the air's",
            at_best=("air_temperature",),
        ),
        Way(
            "evaporation.far_pressure",
            lambda air_vapour_fraction, air_pressure: air_vapour_fraction * air_pressure,
            "the room's humidity",
            when={"evaporation.liquid": ("water",)},
        ),
        Way("evaporation.far_pressure", lambda: 0.0, "none in the room"),
        *(way for name in liquids.every() for way in _properties(name)),
    ),
    answers=(
        Answer("rate of evaporation", "mass rate", lambda evaporation_loss_rate: evaporation_loss_rate),
        Answer(
            "longest time to stand open for this target",
            "time",
            lambda evaporation_loss_rate, target_resolution, target_within: (
                target_within * target_resolution / np.maximum(np.abs(evaporation_loss_rate), 1e-30)
            ),
        ),
    ),
    checks=(
        Check(
            lambda evaporation_vapour_pressure, air_pressure: evaporation.boiled(
                evaporation_vapour_pressure, air_pressure
            ),
            "The liquid's vapour pressure ({evaporation_vapour_pressure}) is that of the air ({air_pressure}): it "
            "boils, and loses far more than diffusion tells.",
            source="boiling (definition)",
        ),
        Check(
            lambda evaporation_loss_rate, evaporation_open_time: abs(evaporation_loss_rate * evaporation_open_time) > 0,
            "The reading falls at {evaporation_loss_rate}: note the time of pouring and of a few readings, and extend "
            "the line back to the moment of pouring (t = 0).",
            source="linear loss at a steady rate",
            level="info",
        ),
    ),
    test="Read the open vessel every half minute for a few minutes: a steady fall is evaporation, its slope the rate.",
    caution="Vapour of solvents can burn and harm: use the enclosure meant for it, no ignition source, and follow "
    "local codes and licensed practice.",
)
