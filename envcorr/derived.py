"""Shared quantities that follow from others, each with its ways in order of preference."""

from __future__ import annotations

from collections.abc import Mapping
from typing import Any

import numpy as np

from envcorr.constants import CIPM_RELATIVE_U, COOLPROP_AIR_RELATIVE_U, OIML_AIR_RELATIVE_DEPARTURE
from envcorr.effect import Check, Way, parameters
from envcorr.estimate import Estimate, Value
from envcorr.laws import air, atmosphere, buoyancy
from envcorr.vocabulary import Assumed, Quantity

__all__ = ["QUANTITIES", "WAYS"]

QUANTITIES: tuple[Quantity, ...] = (
    Quantity(
        "air.vapour_fraction",
        "fraction",
        "water vapour content",
        "Mole fraction of water vapour in the air.",
        internal=True,
    ),
    Quantity(
        "air.expected_pressure",
        "pressure",
        "air pressure to be expected",
        "That of the standard atmosphere at the stated altitude.",
        internal=True,
    ),
    Quantity(
        "air.relative_humidity",
        "fraction",
        "relative humidity",
        "Relative humidity, however the humidity was given.",
        internal=True,
    ),
    Quantity(
        "air.formula_density",
        "density",
        "air density by the formula",
        "CIPM-2007 as it stands, without the formula's own error.",
        internal=True,
    ),
    Quantity(
        "air.formula_ratio",
        "fraction",
        "ratio of CoolProp's air density to that of CIPM-2007",
        "1 inside the range of CIPM-2007; outside it the formula is scaled to CoolProp's humid air.",
        internal=True,
    ),
    Quantity(
        "air.formula_u",
        "fraction",
        "relative standard uncertainty of the air density formula",
        "Of the formula itself, apart from its inputs.",
        internal=True,
    ),
    Quantity(
        "air.formula_error",
        "number",
        "error of the air density formula",
        "In units of its standard uncertainty; the same at every moment.",
        varies="never",
        default=Assumed(Estimate(0.0, "normal", 1.0), "a standard normal draw"),
        internal=True,
    ),
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


# the departure is a bound, taken as rectangular (JCGM 101:2008, 6.4.2)
_OIML_U = OIML_AIR_RELATIVE_DEPARTURE.value / np.sqrt(3)
_COOLPROP_CO2 = 0.0004  # of CIPM-2007's reference air; CoolProp's humid air has no CO2 input


# What the air is ---------------------------------------------------------------------------------------------


def _density(
    air_formula_density: Value, air_formula_ratio: Value, air_formula_u: Value, air_formula_error: Value
) -> Value:
    return air_formula_density * (air_formula_ratio * (1 + air_formula_u * air_formula_error))


def _density_slopes(formula_density: Value, ratio: Value, u: Value, error: Value) -> tuple[Value, ...]:
    factor = 1 + u * error
    return ratio * factor, formula_density * factor, formula_density * ratio * error, formula_density * ratio * u


def _cipm(air_temperature: Value, air_pressure: Value, air_vapour_fraction: Value, air_co2: Value) -> Value:
    return air.density_cipm(air_temperature, air_pressure, air_vapour_fraction, air_co2)


def _density_oiml(
    air_temperature: Value,
    air_pressure: Value,
    air_relative_humidity: Value,
    air_formula_error: Value,
) -> Value:
    density = air.density_oiml(air_temperature, air_pressure, air_relative_humidity)
    return density * (1 + _OIML_U * air_formula_error)


def _ratio(humidity: str) -> Any:
    """Return the function that compares CoolProp with CIPM-2007 for one way to state the humidity."""

    def compare(temperature: Value, pressure: Value, fraction: Value, stated: Value) -> Value:
        outside = air.outside_cipm_range(temperature, pressure)
        if not np.any(outside):
            return 1.0
        reference = air.density_coolprop(temperature, pressure, **{humidity: stated})
        ratio = reference / air.density_cipm(temperature, pressure, fraction, _COOLPROP_CO2)
        return np.where(outside, ratio, 1.0)[()]

    return compare


def _ratio_humidity(
    air_temperature: Value, air_pressure: Value, air_vapour_fraction: Value, air_humidity: Value
) -> Value:
    return _ratio("humidity")(air_temperature, air_pressure, air_vapour_fraction, air_humidity)


def _ratio_dew_point(
    air_temperature: Value, air_pressure: Value, air_vapour_fraction: Value, air_dew_point: Value
) -> Value:
    return _ratio("dew_point")(air_temperature, air_pressure, air_vapour_fraction, air_dew_point)


def _ratio_wet_bulb(
    air_temperature: Value, air_pressure: Value, air_vapour_fraction: Value, air_wet_bulb: Value
) -> Value:
    return _ratio("wet_bulb")(air_temperature, air_pressure, air_vapour_fraction, air_wet_bulb)


def _formula_u(air_temperature: Value, air_pressure: Value) -> Value:
    outside = air.outside_cipm_range(air_temperature, air_pressure)
    return np.where(outside, COOLPROP_AIR_RELATIVE_U.value, CIPM_RELATIVE_U.value)[()]


def _density_at_adjustment(
    air_density: Value, adjusted_temperature_change: Value, adjusted_pressure_change: Value
) -> Value:
    # ideal gas about 20 °C and 101 325 Pa; the temperature enters at constant relative humidity
    share = (1 + adjusted_pressure_change / 101325.0) / (1 + adjusted_temperature_change / 293.15)
    return air_density * share


def _density_is_given(given: Mapping[str, Any]) -> bool:
    return "air.density" in given and not any(name.startswith("adjusted.air.") for name in given)


def _not_the_station(pressure: Value, altitude: Value) -> Any:
    reduced = atmosphere.sea_level_pressure(pressure, altitude)
    return (reduced < 95000.0) | (reduced > 105000.0)


_STATION_PRESSURE = Check(
    lambda air_pressure, air_altitude, air_expected_pressure: _not_the_station(air_pressure, air_altitude),
    "The air pressure {air_pressure} does not belong to an altitude of {air_altitude}, where about "
    "{air_expected_pressure} is to be expected: reduced to sea level it would be outside 950 to 1050 hPa. Was it a "
    "weather service's pressure, already reduced to sea level? Then give it as air.sea_level_pressure.",
    source="ISO 2533:1975; ordinary weather lies within 950 to 1050 hPa at sea level (judgement)",
)
_OUTSIDE_CIPM = Check(
    lambda air_temperature, air_pressure: air.outside_cipm_range(air_temperature, air_pressure),
    "{air_temperature} and {air_pressure} lie outside the range of CIPM-2007 (600 to 1100 hPa, 15 to 27 °C): the "
    "density is scaled to CoolProp's humid air and the formula's uncertainty is taken as 2e-4, not 2.2e-5.",
    source="Picard et al., Metrologia 45 (2008) 149, section 3",
)
_OUTSIDE_OIML = Check(
    lambda air_temperature, air_pressure, air_relative_humidity: air.outside_oiml_range(
        air_temperature, air_pressure, air_relative_humidity
    ),
    "{air_temperature}, {air_pressure} and {air_relative_humidity} lie outside the range of the OIML approximation "
    "(900 to 1100 hPa, 10 to 30 °C, below 80 %): its stated uncertainty does not hold there; use air.formula = "
    '"CIPM-2007".',
    source="OIML R 111-1:2004, E.3",
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

_CIPM = "Picard et al., Metrologia 45 (2008) 149"
_COMPACT = ("gas-displacement", "solid", "liquid")


# Vapour, from whatever was stated ------------------------------------------------------------------------------


def _vapour_from_humidity(air_temperature: Value, air_pressure: Value, air_humidity: Value) -> Value:
    return air.vapour_fraction_from_humidity(air_temperature, air_pressure, air_humidity)


def _vapour_from_dew_point(air_pressure: Value, air_dew_point: Value) -> Value:
    return air.vapour_fraction_from_dew_point(air_pressure, air_dew_point)


def _vapour_from_wet_bulb(air_temperature: Value, air_pressure: Value, air_wet_bulb: Value) -> Value:
    return air.vapour_fraction_from_wet_bulb(air_temperature, air_pressure, air_wet_bulb)


def _humidity_from_vapour(air_temperature: Value, air_pressure: Value, air_vapour_fraction: Value) -> Value:
    return air.humidity_from_vapour_fraction(air_temperature, air_pressure, air_vapour_fraction)


WAYS: tuple[Way, ...] = (
    # air
    Way(
        "air.pressure",
        lambda air_sea_level_pressure, air_altitude: atmosphere.station_pressure(air_sea_level_pressure, air_altitude),
        "from the pressure reduced to sea level, and the altitude",
        source="ISO 2533:1975, standard atmosphere",
    ),
    Way(
        "air.expected_pressure",
        lambda air_altitude: atmosphere.pressure_at_altitude(air_altitude),
        "that of the standard atmosphere",
        source="ISO 2533:1975, standard atmosphere",
    ),
    Way(
        "tare.air.pressure",
        lambda air_pressure, cycle_pressure_change: air_pressure - cycle_pressure_change,
        "the present one less the change within the weighing",
    ),
    Way(
        "tare.air.temperature",
        lambda air_temperature, cycle_temperature_change: air_temperature - cycle_temperature_change,
        "the present one less the change within the weighing",
    ),
    Way(
        "tare.air.humidity",
        lambda air_humidity, cycle_humidity_change: air_humidity - cycle_humidity_change,
        "the present one less the change within the weighing",
    ),
    Way(
        "adjusted.air.pressure",
        lambda air_pressure, air_altitude, adjusted_air_altitude, adjusted_pressure_change: (
            air_pressure
            * (atmosphere.pressure_at_altitude(adjusted_air_altitude) / atmosphere.pressure_at_altitude(air_altitude))
            + adjusted_pressure_change
        ),
        "about the present one, at the height of the adjustment",
        source="ISO 2533:1975, standard atmosphere",
        only_if=lambda given: "adjusted.air.altitude" in given,
        at_best=("air_pressure", "air_altitude", "adjusted_air_altitude"),
    ),
    Way(
        "adjusted.air.pressure",
        lambda air_pressure, adjusted_pressure_change: air_pressure + adjusted_pressure_change,
        "about the present one",
        at_best=("air_pressure",),
    ),
    Way(
        "adjusted.air.temperature",
        lambda air_temperature, adjusted_temperature_change: air_temperature + adjusted_temperature_change,
        "about the present one",
        at_best=("air_temperature",),
    ),
    Way(
        "air.vapour_fraction",
        _vapour_from_humidity,
        "from the relative humidity",
        source=_CIPM,
        slopes=air.vapour_fraction_slopes,
    ),
    Way("air.vapour_fraction", _vapour_from_dew_point, "from the dew point", source=_CIPM),
    Way(
        "air.vapour_fraction",
        _vapour_from_wet_bulb,
        "from the wet-bulb temperature",
        source="WMO-No. 8, annex 4.B (from memory)",
    ),
    Way("air.relative_humidity", lambda air_humidity: air_humidity, "as given"),
    Way("air.relative_humidity", _humidity_from_vapour, "from the water vapour content", source=_CIPM),
    Way(
        "air.formula_u",
        _formula_u,
        "by the range of the formula",
        at_best=("air_temperature", "air_pressure"),
    ),
    *(
        Way("air.formula_ratio", function, "1 inside the range of CIPM-2007", at_best=parameters(function))
        for function in (_ratio_humidity, _ratio_dew_point, _ratio_wet_bulb)
    ),
    Way(
        "adjusted.air.density",
        _density_at_adjustment,
        "about the present one",
        only_if=_density_is_given,
        at_best=("air_density",),
    ),
    Way("air.formula_density", _cipm, "CIPM-2007", source=_CIPM, slopes=air.density_cipm_slopes),
    Way(
        "air.density",
        _density,
        "CIPM-2007",
        source=_CIPM,
        when={"air.formula": ("CIPM-2007",)},
        checks=(_OUTSIDE_CIPM, _STATION_PRESSURE),
        slopes=_density_slopes,
    ),
    Way(
        "air.density",
        _density_oiml,
        "OIML R 111-1, approximation (E.3-1)",
        source="OIML R 111-1:2004, (E.3-1)",
        when={"air.formula": ("OIML R 111-1",)},
        checks=(_OUTSIDE_OIML, _STATION_PRESSURE),
    ),
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
