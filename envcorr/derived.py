"""Shared quantities that follow from others, each with its ways in order of preference."""

from __future__ import annotations

from collections.abc import Mapping
from typing import Any

import numpy as np

from envcorr import derived_air
from envcorr.effect import Check, Way
from envcorr.estimate import Value
from envcorr.laws import buoyancy
from envcorr.vocabulary import Quantity

__all__ = ["QUANTITIES", "WAYS"]

QUANTITIES: tuple[Quantity, ...] = (
    *derived_air.QUANTITIES,
    Quantity(
        "load.true_density",
        "density",
        "density of what displaces air",
        "The load's corrected density, at the temperature that it has.",
        varies="never",
        internal=True,
    ),
    Quantity(
        "load.corrected_density",
        "density",
        "density as it was found, corrected",
        "The load's density, corrected for the buoyancy under which it was found.",
        varies="never",
        internal=True,
    ),
    Quantity(
        "load.displaced_volume",
        "volume",
        "volume of air that the load displaces",
        "The load's volume as far as it displaces the air around it at the loaded reading.",
        varies="never",
        internal=True,
    ),
    Quantity(
        "container.displaced_volume",
        "volume",
        "volume of air that the container displaces at both readings",
        "The walls of an open container, the outer volume of one kept shut.",
        varies="never",
        internal=True,
    ),
    Quantity(
        "adjusted.factor",
        "number",
        "adjustment factor K",
        "True pull of the adjusting weight in the air of the adjustment, over what the display was set to.",
        varies="never",
        internal=True,
    ),
    Quantity(
        "load.conventional_mass",
        "mass",
        "conventional mass of the load",
        "OIML D 28:2004, clause 5.",
        varies="never",
        internal=True,
    ),
)

# What displaces it -------------------------------------------------------------------------------------------


def _all_cells_closed(given: Mapping[str, Any]) -> bool:
    return "load.solid_density" not in given and not np.any(given.get("load.open_cell_fraction", 1.0))


def _expands(given: Mapping[str, Any]) -> bool:
    return "load.expansion" in given


def _expanded(density: Value, expansion: Value, temperature: Value, at: Value) -> Value:
    return density / (1 + expansion * (temperature - at))


def _no_container(given: Mapping[str, Any]) -> bool:
    return not any(name.startswith("container.") for name in given)


def _same_air(given: Mapping[str, Any]) -> bool:
    return not any(name.startswith(("tare.", "cycle.")) and name != "cycle.repeats" for name in given)


_VOLUME_AND_DENSITY = Check(
    lambda load_mass, load_volume, load_density: abs(load_mass / load_volume / load_density - 1) > 0.05,
    "load.mass over load.volume is not load.density ({load_density}): the volume ({load_volume}) was used. A foam "
    "with "
    "closed cells displaces air with its cells too, so the density of its polymer would be the wrong one.",
    source="a difference of 5 % (judgement)",
    only_if=lambda given: "load.volume" in given,
)
_FOAM_LIKE = Check(
    lambda load_density: load_density < 300,
    "A density of {load_density} looks like a foam's or a powder's, and load.density_kind does not say so: if it "
    'counts pores that are open to the air, use "envelope" with load.open_cell_fraction.',
    source="compact polymers lie above 800 kg/m³ (common handbook knowledge, from memory); 300 is a judgement",
)
_UNCORRECTED = Check(
    lambda load_density: load_density > 0,
    "The density {load_density} came from a weighing that was not corrected for buoyancy: the air's "
    "part was added back.",
    source="OIML R 111-1:2004, B.7; the true density is K times the apparent one plus that of the air",
    level="info",
)

_SAME_AIR = Check(
    lambda load_mass: load_mass > 0,
    "The tare's air was taken as that of the loaded reading, so the air on the container cancels. If the air may "
    "change within a weighing, give cycle.temperature_change and cycle.pressure_change (or [tare.air]).",
    source="the air on a container of 100 cm³ changes by 0.12 mg per hPa of pressure (CIPM-2007)",
    level="info",
    only_if=_same_air,
)

_COMPACT = ("gas-displacement", "solid", "liquid")


WAYS: tuple[Way, ...] = (
    *derived_air.WAYS,
    # load
    Way(
        "load.true_density",
        lambda load_corrected_density, load_expansion, load_density_temperature, air_temperature, load_warmer_by: (
            _expanded(
                load_corrected_density, load_expansion, air_temperature + load_warmer_by, load_density_temperature
            )
        ),
        "at the load's own temperature",
        only_if=_expands,
    ),
    Way(
        "load.true_density",
        lambda load_corrected_density, load_expansion, load_density_temperature, air_temperature: _expanded(
            load_corrected_density, load_expansion, air_temperature, load_density_temperature
        ),
        "at the temperature of the air",
        only_if=_expands,
    ),
    Way("load.true_density", lambda load_corrected_density: load_corrected_density, "as found"),
    Way(
        "load.corrected_density",
        lambda load_density, adjusted_factor, air_density: buoyancy.density_from_uncorrected(
            load_density, air_density, adjusted_factor
        ),
        "from an uncorrected weighing",
        when={"load.density_from": ("uncorrected weighing",)},
        checks=(_UNCORRECTED,),
    ),
    Way(
        "load.corrected_density",
        lambda load_density: load_density,
        "as given",
        when={"load.density_from": ("corrected",)},
    ),
    Way(
        "load.volume",
        lambda load_mass, load_true_density: load_mass / load_true_density,
        "mass over density",
        when={"load.density_kind": _COMPACT},
        checks=(_FOAM_LIKE,),
    ),
    Way(
        "load.volume",
        lambda load_mass, load_true_density, load_open_cell_fraction: load_mass / load_true_density,
        "mass over envelope density, all cells closed",
        when={"load.density_kind": ("envelope",)},
        only_if=_all_cells_closed,
    ),
    Way(
        "load.volume",
        lambda load_mass, load_true_density, load_open_cell_fraction, load_solid_density: (
            buoyancy.displaced_volume_of_foam(load_mass, load_true_density, load_open_cell_fraction, load_solid_density)
        ),
        "envelope volume less its open cells",
        source="ISO 4590 (from memory): the open share there is of the geometric volume; here of the gas volume",
        when={"load.density_kind": ("envelope",)},
    ),
    Way(
        "load.displaced_volume",
        lambda load_volume: load_volume,
        "the volume of the load",
        only_if=_no_container,
        checks=(_VOLUME_AND_DENSITY,),
    ),
    Way(
        "load.displaced_volume",
        lambda: 0.0,
        "inside a container kept shut",
        when={"container.closed": ("kept shut",)},
    ),
    Way(
        "load.displaced_volume",
        lambda load_volume: load_volume,
        "the volume of the load",
        checks=(_VOLUME_AND_DENSITY,),
    ),
    Way(
        "load.conventional_mass",
        lambda load_mass, load_volume: buoyancy.conventional_mass(load_mass, load_volume),
        "OIML D 28:2004",
    ),
    # container
    Way("container.displaced_volume", lambda: 0.0, "no container", only_if=_no_container),
    Way(
        "container.displaced_volume",
        lambda container_outer_volume: container_outer_volume,
        "the outer volume of a container kept shut",
        when={"container.closed": ("kept shut",)},
        checks=(_SAME_AIR,),
    ),
    Way(
        "container.displaced_volume",
        lambda container_mass, container_density: container_mass / container_density,
        "the walls: mass over density",
        when={"container.closed": ("never", "each time")},
        checks=(_SAME_AIR,),
    ),
    Way(
        "container.displaced_volume",
        lambda container_outer_volume, container_inner_volume: container_outer_volume - container_inner_volume,
        "the walls: outer less inner volume",
        when={"container.closed": ("never", "each time")},
        checks=(_SAME_AIR,),
    ),
    Way(
        "container.displaced_volume",
        lambda: 0.0,
        "nothing differs between tare and load",
        only_if=_same_air,
        checks=(_SAME_AIR,),
    ),
    # adjustment
    Way(
        "adjusted.factor",
        lambda balance_adjusting_weight_density, adjusted_air_density: buoyancy.adjustment_factor(
            balance_adjusting_weight_density, adjusted_air_density
        ),
        "from the adjusting weight and the air at the adjustment",
        source="OIML D 28:2004; OIML R 111-1:2004, C.5",
    ),
)
