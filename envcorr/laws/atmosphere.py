"""The standard atmosphere: air pressure and density by altitude.

Altitudes are heights above sea level in metres, as a map gives them (geometric); ISO 2533 works with the
geopotential altitude, which is 0.016 % less per kilometre.
"""

from __future__ import annotations

import numpy as np

from envcorr.constants import (
    CONVENTIONAL_AIR_DENSITY,
    DRY_AIR_GAS_CONSTANT,
    STANDARD_GRAVITY,
    STANDARD_PRESSURE,
)
from envcorr.estimate import Value

__all__ = [
    "altitude_at_pressure",
    "density_at_altitude",
    "geopotential_altitude",
    "pressure_at_altitude",
    "pressure_ratio",
    "sea_level_pressure",
    "station_pressure",
]

# ISO 2533:1975, table 1 and clause 2
_EARTH_RADIUS = 6_356_766.0  # m, nominal
_SEA_LEVEL_TEMPERATURE = 288.15  # K
_LAPSE = 0.0065  # K/m, from -2 to 11 km
_EXPONENT = STANDARD_GRAVITY.value / (DRY_AIR_GAS_CONSTANT.value * _LAPSE)


def geopotential_altitude(altitude: Value) -> Value:
    """Return the geopotential altitude [m'] of a geometric altitude [m]; ISO 2533, 2.3."""
    return _EARTH_RADIUS * altitude / (_EARTH_RADIUS + altitude)


def pressure_ratio(altitude: Value) -> Value:
    """Return the pressure at ``altitude`` [m] over that at sea level, in the standard atmosphere up to 11 km.

    ISO 2533, 2.6: a temperature of 15 °C at sea level that falls by 6.5 K per km.
    """
    return (1 - _LAPSE * geopotential_altitude(altitude) / _SEA_LEVEL_TEMPERATURE) ** _EXPONENT


def pressure_at_altitude(altitude: Value) -> Value:
    """Return the pressure [Pa] of the standard atmosphere (ISO 2533) at ``altitude`` [m]."""
    return STANDARD_PRESSURE.value * pressure_ratio(altitude)


def altitude_at_pressure(pressure: Value) -> Value:
    """Return the geometric altitude [m] at which the standard atmosphere (ISO 2533) has ``pressure`` [Pa]."""
    cooling = 1 - (pressure / STANDARD_PRESSURE.value) ** (1 / _EXPONENT)  # share of the sea-level temperature
    geopotential = cooling * _SEA_LEVEL_TEMPERATURE / _LAPSE
    return _EARTH_RADIUS * geopotential / (_EARTH_RADIUS - geopotential)


def station_pressure(sea_level_pressure: Value, altitude: Value) -> Value:
    """Return the pressure at the station [Pa] from one reduced to sea level [Pa]; ISO 2533.

    The temperatures are those of the standard atmosphere. Air that is warmer by dT makes the pressure higher
    by the share (g H/R T) dT/T: 10 K at 600 m are 0.25 %.
    """
    return sea_level_pressure * pressure_ratio(altitude)


def sea_level_pressure(pressure: Value, altitude: Value) -> Value:
    """Return the pressure reduced to sea level [Pa] from that at the station [Pa]; ISO 2533."""
    return pressure / pressure_ratio(altitude)


def density_at_altitude(altitude: Value) -> Value:
    """Return the mean density of air [kg/m³] at ``altitude`` [m]; OIML R 111-1:2004, 10.2.1.

    rho0 exp(-rho0 g h/p0) with 1.2 kg/m³, 9.81 m/s² and 1013.25 hPa.
    """
    rho = CONVENTIONAL_AIR_DENSITY.value
    return rho * np.exp(-rho * 9.81 * altitude / STANDARD_PRESSURE.value)
