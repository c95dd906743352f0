"""Evaporation: an open liquid loses weight while it is weighed."""

from __future__ import annotations

import numpy as np

from envcorr import liquids, units
from envcorr.effect import Answer, Check, Effect, Function, Way
from envcorr.errors import NotComputedError
from envcorr.estimate import Estimate, Value
from envcorr.laws import evaporation
from envcorr.vocabulary import Assumed, Choice, Quantity

__all__ = ["EFFECT", "load"]

_LIQUIDS = liquids.every()
_NOT_WATER = tuple(name for name in _LIQUIDS if name != "water")


def load(evaporation_loss_rate: Value, evaporation_open_time: Value) -> Value:
    """Return what has left by the loaded reading [kg]: rate times the time that it stood open, negative."""
    return -evaporation_loss_rate * evaporation_open_time


def _properties(name: str) -> tuple[Way, ...]:
    """Return the ways to a liquid's constants, and to its properties at the air's best temperature."""
    liquid = _LIQUIDS[name]

    def vapour_pressure(air_temperature: Value, air_pressure: Value) -> float:
        found, of_air = liquids.vapour_pressure(liquid, float(np.mean(air_temperature))), float(np.mean(air_pressure))
        if found >= of_air:
            raise NotComputedError(
                f"In such air {name} boils: its vapour pressure is {units.show(found, 'pressure')}, that of the air "
                f"{units.show(of_air, 'pressure')}. Check air.temperature and air.pressure, or give "
                "evaporation.rate, as measured, without evaporation.liquid."
            )
        return found

    def way(what: str, function: Function, at_best: tuple[str, ...] = ()) -> Way:
        when = {"evaporation.liquid": (name,)}
        return Way(f"evaporation.{what}", function, f"of {name}", source=liquid.source, when=when, at_best=at_best)

    return (
        way("vapour_pressure", vapour_pressure, ("air_temperature", "air_pressure")),
        way(
            "heat",
            lambda air_temperature: liquids.heat_of_vaporisation(liquid, float(np.mean(air_temperature))),
            ("air_temperature",),
        ),
        way("molar_mass", lambda: liquid.molar_mass),
        way("diffusion_volume", lambda: liquid.volume),
    )


def _drawn_pressure(
    evaporation_vapour_pressure: Value,
    evaporation_heat: Value,
    evaporation_reference_temperature: Value,
    air_temperature: Value,
    air_pressure: Value,
) -> Value:
    found = evaporation.clausius_clapeyron(
        evaporation_vapour_pressure, evaporation_heat, air_temperature, evaporation_reference_temperature
    )
    return evaporation.held_below_boiling(found, air_pressure)


def _surface_at_last(
    air_temperature: Value,
    air_pressure: Value,
    evaporation_path: Value,
    evaporation_diffusivity: Value,
    evaporation_drawn_pressure: Value,
    evaporation_heat: Value,
    evaporation_far_pressure: Value,
) -> Value:
    return evaporation.surface_temperature(
        air_temperature,
        air_pressure,
        evaporation_path,
        evaporation_diffusivity,
        evaporation_drawn_pressure,
        evaporation_heat,
        evaporation_far_pressure,
    )


def _diffused(
    evaporation_opening: Value,
    evaporation_path: Value,
    evaporation_diffusivity: Value,
    evaporation_drawn_pressure: Value,
    evaporation_heat: Value,
    evaporation_far_pressure: Value,
    evaporation_molar_mass: Value,
    evaporation_surface_at_last: Value,
    evaporation_cooling: Value,
    evaporation_factor: Value,
    air_temperature: Value,
    air_pressure: Value,
) -> Value:
    surface = air_temperature - evaporation_cooling * (air_temperature - evaporation_surface_at_last)
    flux = evaporation.stefan_flux(
        evaporation_diffusivity,
        evaporation_path,
        air_temperature,
        air_pressure,
        evaporation.clausius_clapeyron(evaporation_drawn_pressure, evaporation_heat, surface, air_temperature),
        evaporation_far_pressure,
        evaporation_molar_mass,
    )
    return evaporation_factor * flux * np.pi / 4 * evaporation_opening**2


def _longest(evaporation_loss_rate: Value, target_resolution: Value, target_within: Value) -> Value:
    with np.errstate(divide="ignore"):
        return np.divide(target_within * target_resolution, np.abs(evaporation_loss_rate))


def _internal(name: str, kind: str, label: str, text: str) -> Quantity:
    return Quantity(f"evaporation.{name}", kind, label, text, internal=True)


_HUMID = Check(
    lambda air_relative_humidity: air_relative_humidity >= 0,
    "How fast water leaves depends on the humidity of the room: {air_relative_humidity} was taken.",
    source="Stefan's flow: the vapour far away counts",
    level="info",
)
_WIDE = Check(
    lambda evaporation_opening: evaporation_opening > 0.05,
    "The opening is {evaporation_opening} wide: above it the air hardly stays still, and more may leave than diffusion "
    "tells. Measure the rate (evaporation.rate), or widen evaporation.factor.",
    source="5 cm: there vapour that rises or sinks carries as much as diffusion does (estimate, judgement)",
)


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
                for name, one in _LIQUIDS.items()
            },
            notes={
                name: f"The vapour of {name} burns (flash point {units.show(one.flash, 'temperature')}): no ignition "
                "source near it, high-voltage ionisers included; ventilate, and follow local codes and licensed "
                "practice."
                for name, one in _LIQUIDS.items()
                if one.flash is not None
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
            "How far the true rate may lie from the model's: a draught, vapour that sinks or rises, a wet wall.",
            low=0.01,
            high=100.0,
            varies="never",
            default=Assumed(Estimate.between(0.5, 2.0, "log-uniform"), "a factor of 2 either way (judgement)"),
        ),
        Quantity(
            "evaporation.cooling",
            "fraction",
            "how far the surface has cooled",
            "Of the cooling by evaporation that it comes to in the end: nothing just after pouring or where the vessel "
            "feeds heat, all of it after minutes in a vessel that feeds none.",
            low=0.0,
            high=1.0,
            default=Assumed(Estimate(0.5, "rectangular", 0.5), "anywhere between none and all (judgement)"),
        ),
        Quantity(
            "evaporation.room_vapour",
            "fraction",
            "vapour of the liquid in the room's air",
            "Mole fraction away from the opening; of water it follows from the humidity.",
            low=0.0,
            high=0.1,  # beyond what anybody may breathe (judgement)
            default=Assumed(Estimate(0.0), "none, in a ventilated room (common practice, no source)"),
            example="500 ppm",
        ),
        _internal("loss_rate", "mass rate", "rate of evaporation", "However it was found."),
        _internal("vapour_pressure", "pressure", "vapour pressure of the liquid", "At the air's best temperature."),
        _internal("heat", "number", "heat of vaporisation in J/mol", "At the air's best temperature."),
        _internal("molar_mass", "molar mass", "molar mass of the liquid", "Of the vapour, too."),
        _internal("diffusion_volume", "number", "diffusion volume", "After Fuller, Schettler and Giddings."),
        _internal(
            "reference_temperature", "temperature", "temperature of the vapour pressure", "The air's, at its best."
        ),
        _internal("drawn_pressure", "pressure", "vapour pressure", "Of the liquid, at the air's temperature."),
        _internal("far_pressure", "pressure", "vapour pressure in the room", "Of the liquid's vapour, in the air."),
        _internal("path", "length", "diffusion path", "Still air from the surface to the open room."),
        _internal("diffusivity", "diffusivity", "diffusivity of the vapour", "In air."),
        _internal("surface_at_last", "temperature", "temperature of the surface at last", "Fed by the air alone."),
    ),
    ways=(
        Way("evaporation.open_time", lambda cycle_duration: cycle_duration, "the duration of the weighing"),
        Way("evaporation.loss_rate", lambda evaporation_rate: evaporation_rate, "as measured"),
        Way(
            "evaporation.loss_rate",
            _diffused,
            "diffusion through the opening",
            source="Stefan's flow: Bird, Stewart, Lightfoot, 18.2; diffusivity: Fuller, Schettler, Giddings",
            band=True,
            checks=(_WIDE,),
        ),
        Way(
            "evaporation.reference_temperature",
            lambda air_temperature: air_temperature,
            "the air's",
            at_best=("air_temperature",),
        ),
        Way(
            "evaporation.drawn_pressure",
            _drawn_pressure,
            "by Clausius and Clapeyron",
        ),
        Way(
            "evaporation.far_pressure",
            lambda air_vapour_fraction, air_pressure: air_vapour_fraction * air_pressure,
            "the room's humidity",
            when={"evaporation.liquid": ("water",)},
            checks=(_HUMID,),
        ),
        Way(
            "evaporation.far_pressure",
            lambda evaporation_room_vapour, air_pressure: evaporation_room_vapour * air_pressure,
            "as stated of the room's air",
            when={"evaporation.liquid": _NOT_WATER},
        ),
        Way(
            "evaporation.path",
            lambda evaporation_depth, evaporation_opening: evaporation.diffusion_path(
                evaporation_depth, evaporation_opening
            ),
            "depth and opening",
        ),
        Way(
            "evaporation.diffusivity",
            lambda air_temperature, air_pressure, evaporation_molar_mass, evaporation_diffusion_volume: (
                evaporation.fuller(air_temperature, air_pressure, evaporation_molar_mass, evaporation_diffusion_volume)
            ),
            "Fuller, Schettler, Giddings",
        ),
        Way("evaporation.surface_at_last", _surface_at_last, "heat from the air alone"),
        *(way for name in _LIQUIDS for way in _properties(name)),
    ),
    answers=(
        Answer("rate of evaporation", "mass rate", lambda evaporation_loss_rate: evaporation_loss_rate),
        Answer("longest time to stand open for this target", "time", _longest),
        Answer(
            "how much colder than the air its surface may become",
            "temperature difference",
            lambda air_temperature, evaporation_surface_at_last: air_temperature - evaporation_surface_at_last,
        ),
    ),
    checks=(
        Check(
            lambda evaporation_drawn_pressure, air_pressure: evaporation.boiled(
                evaporation_drawn_pressure, air_pressure
            ),
            "In air as it may become the liquid boils, and loses far more than diffusion tells: its vapour pressure "
            "was held at that of the air ({air_pressure}).",
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
