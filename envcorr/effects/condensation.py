"""Water that condenses on a load colder than the dew point of the room's air."""

from __future__ import annotations

from collections.abc import Mapping
from typing import Any

import numpy as np

from envcorr.effect import Check, Effect, Way
from envcorr.estimate import Estimate, Value
from envcorr.laws import moisture
from envcorr.laws.air import dew_point_from_vapour_fraction
from envcorr.vocabulary import Assumed, Quantity

__all__ = ["EFFECT", "load"]


def load(
    condensation_area: Value,
    condensation_height: Value,
    condensation_warmer_by: Value,
    air_temperature: Value,
    air_pressure: Value,
    air_vapour_fraction: Value,
    cycle_duration: Value,
    condensation_factor: Value,
) -> Value:
    """Return the water that has condensed from the tare to the loaded reading [kg]; a dry surface has none to lose."""
    flux = moisture.condensation_flux(
        condensation_height, condensation_warmer_by, air_temperature, air_pressure, air_vapour_fraction
    )
    return condensation_factor * flux * condensation_area * cycle_duration


def _container(given: Mapping[str, Any]) -> bool:
    return any(name.startswith("container.") for name in given)


def _no_container(given: Mapping[str, Any]) -> bool:
    return not _container(given)


def _surface(height: Value, diameter: Value) -> Value:
    """Return the surface of a cylinder [m²], its ends included."""
    return np.pi * diameter * (height + diameter / 2)


def _side(volume: Value) -> Value:
    """Return the side [m] of the cylinder as high as wide that has this volume [m³]."""
    return np.cbrt(4 / np.pi * volume)


_BELOW_DEW_POINT = Check(
    lambda condensation_surface_temperature, air_dew_temperature: (
        condensation_surface_temperature < air_dew_temperature
    ),
    "The load or its container is at {condensation_surface_temperature}, below the dew point of the room's air, "
    "{air_dew_temperature}: water condenses on it. Let it warm up closed, and dry it, before it is weighed.",
    source="water condenses on what is colder than the dew point",
)

EFFECT = Effect(
    name="condensation",
    title="water condensing on a cold load",
    help="A load from the refrigerator gathers water from the air as long as it is colder than the dew point.",
    source="natural convection with the analogy of heat and mass transfer (Lewis relation); Incropera and DeWitt, "
    "Fundamentals of Heat and Mass Transfer, 6.7 (the section from memory)",
    load=load,
    treatment="acclimatise it closed, and dry it",
    leaves="what was not dried off",
    quantities=(
        Quantity(
            "condensation.area",
            "area",
            "area on which water can condense",
            "Cold surface that the room's air reaches.",
            low=0.0,
            high=10.0,
            varies="never",
            computed=True,
            example="60 cm²",
        ),
        Quantity(
            "condensation.factor",
            "number",
            "model factor of condensation",
            "How far the true mass may lie from the model's: other shapes, a draught, a surface that warms up.",
            low=0.01,
            high=100.0,
            varies="never",
            default=Assumed(Estimate.between(0.5, 2.0, "log-uniform"), "a factor of 2 either way (judgement)"),
        ),
        Quantity(
            "condensation.height",
            "length",
            "height of the cold surface",
            "Of the container where there is one, else of the load.",
            varies="never",
            internal=True,
        ),
        Quantity(
            "condensation.side",
            "length",
            "side of the cylinder as high as wide",
            "Of the same volume as the container where there is one, else as the load.",
            varies="never",
            internal=True,
        ),
        Quantity(
            "condensation.warmer_by",
            "temperature difference",
            "how much warmer the surface is than the air",
            "The colder of load and container.",
            internal=True,
        ),
        Quantity(
            "condensation.surface_temperature",
            "temperature",
            "temperature of the surface",
            "The colder of load and container.",
            internal=True,
        ),
        Quantity(
            "air.dew_temperature",
            "temperature",
            "dew point of the room's air",
            "However the humidity was given.",
            internal=True,
        ),
    ),
    ways=(
        Way(
            "air.dew_temperature",
            lambda air_pressure, air_vapour_fraction: dew_point_from_vapour_fraction(air_pressure, air_vapour_fraction),
            "from the water vapour content",
            source="CIPM-2007, (A1.3)",
        ),
        Way(
            "condensation.warmer_by",
            lambda load_warmer_by, container_warmer_by: np.minimum(load_warmer_by, container_warmer_by),
            "the colder of load and container",
            checks=(_BELOW_DEW_POINT,),
        ),
        Way(
            "condensation.warmer_by",
            lambda load_warmer_by: load_warmer_by,
            "the load's",
            checks=(_BELOW_DEW_POINT,),
        ),
        Way(
            "condensation.warmer_by",
            lambda container_warmer_by: container_warmer_by,
            "the container's",
            checks=(_BELOW_DEW_POINT,),
        ),
        Way(
            "condensation.surface_temperature",
            lambda air_temperature, condensation_warmer_by: air_temperature + condensation_warmer_by,
            "the air's and the difference from it",
        ),
        Way("condensation.height", lambda container_height: container_height, "the container's", only_if=_container),
        Way("condensation.height", lambda load_height: load_height, "the load's", only_if=_no_container),
        Way(
            "condensation.area",
            lambda container_height, container_diameter: _surface(container_height, container_diameter),
            "the container as an upright cylinder",
            only_if=_container,
        ),
        Way(
            "condensation.area",
            lambda load_height, load_diameter: _surface(load_height, load_diameter),
            "the load as an upright cylinder",
            only_if=_no_container,
        ),
        Way(
            "condensation.side",
            lambda container_outer_volume: _side(container_outer_volume),
            "the container as a cylinder as high as wide",
            only_if=_container,
        ),
        Way(
            "condensation.side",
            lambda load_volume: _side(load_volume),
            "the load as a cylinder as high as wide",
            only_if=_no_container,
        ),
        Way(
            "condensation.height",
            lambda condensation_side: np.maximum(condensation_side, 1e-4),  # as small as a height may be given
            "from the volume",
        ),
        Way(
            "condensation.area",
            lambda condensation_side: _surface(condensation_side, condensation_side),
            "from the volume",
        ),
    ),
    test="Look at it sideways against the light, wipe it and weigh it again: a mist that comes back is the air's.",
    caution=(
        "Very cold loads burn, liquefied gases push the air out of a small room, and a closed cold vessel can burst "
        "as it warms: vent it, wear eye protection, follow local codes and licensed practice. Keep what reacts with "
        "water closed until it is warm."
    ),
)
