"""The density of water, and the volume that a weighing of it stands for.

Temperatures in kelvin (ITS-90), pressures in pascal, densities in kg/m³; floats or arrays that broadcast.
Tanaka, Girard, Davis, Peuto, Bignell, Metrologia 38 (2001) 301-309, from 0 to 40 °C.
"""

from __future__ import annotations

import numpy as np
from numpy.typing import NDArray

from envcorr.constants import STANDARD_PRESSURE, ZERO_CELSIUS
from envcorr.estimate import Value

__all__ = [
    "air_free_density",
    "density",
    "density_uncertainty",
    "dissolved_air_change",
    "outside_range",
    "pressure_factor",
    "z_factor",
]


def air_free_density(temperature: Value) -> Value:
    """Return the density of air-free water (VSMOW) at 101 325 Pa; Tanaka et al. (2001), equation (1)."""
    t = temperature - ZERO_CELSIUS.value
    return 999.97495 * (1 - (t - 3.983035) ** 2 * (t + 301.797) / (522528.9 * (t + 69.34881)))


def dissolved_air_change(temperature: Value) -> Value:
    """Return what saturation with air adds to the density of water [kg/m³], negative; Tanaka et al. (2001).

    Stated for 0 to 25 °C (from memory); -2.5e-6 of the density at 20 °C.
    """
    return -4.612e-3 + 0.106e-3 * (temperature - ZERO_CELSIUS.value)


def pressure_factor(temperature: Value, pressure: Value) -> Value:
    """Return the density of water at ``pressure`` [Pa] over that at 101 325 Pa; Tanaka et al. (2001)."""
    t = temperature - ZERO_CELSIUS.value
    compressibility = 50.74e-11 + t * (-0.326e-11 + 0.00416e-11 * t)  # 1/Pa
    return 1 + compressibility * (pressure - STANDARD_PRESSURE.value)


def density(temperature: Value, pressure: Value) -> Value:
    """Return the density [kg/m³] of air-saturated water at [K] and [Pa], as it stands in a laboratory."""
    at_reference = air_free_density(temperature) + dissolved_air_change(temperature)
    return at_reference * pressure_factor(temperature, pressure)


def density_uncertainty(temperature: Value) -> Value:
    """Return the standard uncertainty [kg/m³] of :func:`air_free_density`.

    Half the expanded uncertainty (k = 2) that Tanaka et al. (2001) print (from memory). It does not hold the
    isotopic composition nor the share of dissolved air of the user's water.
    """
    t = temperature - ZERO_CELSIUS.value
    expanded = 8.394e-4 + t * (-1.28e-6 + t * (1.10e-7 + t * (-6.09e-9 + t * 1.16e-10)))
    return expanded / 2


def outside_range(temperature: Value) -> NDArray[np.bool_]:
    """Return where the formula is not claimed: outside 0 to 40 °C."""
    t = np.asarray(temperature) - ZERO_CELSIUS.value
    return np.asarray((t < -1e-9) | (t > 40 + 1e-9))


def z_factor(liquid_density: Value, air_density: Value, weight_density: Value) -> Value:
    """Return Z [m³/kg], volume over reading of a liquid; ISO 8655-6:2002, annex A, and ISO 4787.

    (1 - rho_a/rho_b)/(rho_w - rho_a). As printed it takes the balance as adjusted in the air of the weighing,
    with a weight of true density rho_b.
    """
    return (1 - air_density / weight_density) / (liquid_density - air_density)
