"""The air's density, vapour and pressure, from whatever of them was stated: their ways in order of preference."""

from __future__ import annotations

from collections.abc import Mapping
from typing import Any

import numpy as np

from envcorr.constants import CIPM_RELATIVE_U, COOLPROP_AIR_RELATIVE_U, OIML_AIR_RELATIVE_DEPARTURE
from envcorr.effect import Check, Way, parameters
from envcorr.estimate import Estimate, Value
from envcorr.laws import air, atmosphere
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
)

_CIPM = "Picard et al., Metrologia 45 (2008) 149"

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


def _less(value: Value, change: Value) -> tuple[float, float]:
    """Return the slopes of a value less a change."""
    return 1.0, -1.0


def _more(value: Value, change: Value) -> tuple[float, float]:
    """Return the slopes of a value plus a change."""
    return 1.0, 1.0


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
        slopes=_less,
    ),
    Way(
        "tare.air.temperature",
        lambda air_temperature, cycle_temperature_change: air_temperature - cycle_temperature_change,
        "the present one less the change within the weighing",
        slopes=_less,
    ),
    Way(
        "tare.air.humidity",
        lambda air_humidity, cycle_humidity_change: air_humidity - cycle_humidity_change,
        "the present one less the change within the weighing",
        slopes=_less,
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
        slopes=_more,
        at_best=("air_pressure",),
    ),
    Way(
        "adjusted.air.temperature",
        lambda air_temperature, adjusted_temperature_change: air_temperature + adjusted_temperature_change,
        "about the present one",
        slopes=_more,
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
)
