"""Acclimatisation: how a body's difference from the air's temperature dies away.

Temperatures and differences in kelvin, times in seconds, masses in kg; floats or arrays that broadcast. The
difference counts as positive: a cold body warms as a warm one cools.
"""

from __future__ import annotations

import numpy as np

from envcorr.constants import DRY_AIR_GAS_CONSTANT, STEFAN_BOLTZMANN
from envcorr.estimate import Value
from envcorr.laws.heat import grashof_number, viscosity

__all__ = [
    "cooling_time",
    "cooling_time_compact",
    "difference_compact",
    "heat_transfer_coefficient",
    "nusselt_wall",
    "thermal_conductivity",
]

# EURAMET cg-18 v4.0, appendix F, table F1.1: a fit to its entries, within 0.05 min (the entries from memory)
_STILL, _STEADY = 0.0036132 / 60, 0.0064512 / 60  # 1/(s K^(1/4)) and 1/s, of a weight of 1 kg

_SPECIFIC_HEAT = 3.5 * DRY_AIR_GAS_CONSTANT.value  # J/(kg K), at constant pressure: kappa 1.4, ISO 2533, 2.11


def thermal_conductivity(temperature: Value) -> Value:
    """Return the thermal conductivity of air [W/(m K)] at ``temperature`` [K]; ISO 2533:1975, 2.14."""
    return 2.648151e-3 * temperature**1.5 / (temperature + 245.4 * 10 ** (-12 / temperature))


def nusselt_wall(rayleigh: Value, prandtl: Value) -> Value:
    """Return the mean Nusselt number of an upright wall in natural convection, laminar or turbulent.

    Churchill and Chu (1975), as equation (9.26) of Incropera and DeWitt, Fundamentals of Heat and Mass
    Transfer.
    """
    medium = (1 + (0.492 / prandtl) ** (9 / 16)) ** (8 / 27)
    return (0.825 + 0.387 * rayleigh ** (1 / 6) / medium) ** 2  # (9.26)


def heat_transfer_coefficient(
    height: Value, temperature_difference: Value, temperature: Value, pressure: Value, emissivity: Value
) -> Value:
    """Return the heat transfer coefficient [W/(m² K)] of a body of ``height`` [m] in air at [K] and [Pa].

    Natural convection of an upright wall and radiation to surroundings at the air's temperature, 4 eps sigma
    T³ at the mean of body and air.
    """
    film = temperature + np.abs(temperature_difference) / 2
    conductivity = thermal_conductivity(film)
    prandtl = viscosity(film) * _SPECIFIC_HEAT / conductivity
    rayleigh = grashof_number(height, temperature_difference, film, pressure) * prandtl
    radiation = 4 * emissivity * STEFAN_BOLTZMANN.value * film**3
    return nusselt_wall(rayleigh, prandtl) * conductivity / height + radiation


def cooling_time(
    heat_capacity: Value,
    area: Value,
    height: Value,
    emissivity: Value,
    temperature: Value,
    pressure: Value,
    *,
    from_difference: Value,
    to_difference: Value,
) -> Value:
    """Return the time [s] in which a body's difference from the air's temperature falls to another.

    C d(dT)/dt = -A h(dT) dT with ``heat_capacity`` C [J/K] and ``area`` A [m²], the body being of one
    temperature. So t = (C/A) times the integral of 1/h over ln dT, which is smooth: Gauss-Legendre, 20
    points, to 1e-9.
    """
    nodes, weights = np.polynomial.legendre.leggauss(20)
    high, low = np.log(np.asarray(from_difference)), np.log(np.asarray(to_difference))
    time: Value = 0.0
    for node, weight in zip(nodes, weights, strict=True):
        difference = np.exp((high + low) / 2 + (high - low) / 2 * node)
        h = heat_transfer_coefficient(height, difference, temperature, pressure, emissivity)
        time = time + weight * (high - low) / 2 / h
    return heat_capacity / area * time


def cooling_time_compact(mass: Value, *, from_difference: Value, to_difference: Value) -> Value:
    """Return the time [s] in which a steel weight of ``mass`` [kg] comes from one difference to another.

    d(dT)/dt = -(a dT^(5/4) + b dT), a = 0.0036132 m^(-5/12), b = 0.0064512 m^(-2/3) per minute (kg, K):
    EURAMET cg-18 v4.0, appendix F, from 10 g to 50 kg and 20 K to 1 K. With u = dT^(1/4) it integrates to
    (4/b) ln((a + b/u_to)/(a + b/u_from)).
    """
    a, b = _STILL * mass ** (-5 / 12), _STEADY * mass ** (-2 / 3)
    return 4 / b * np.log((a + b * to_difference**-0.25) / (a + b * from_difference**-0.25))


def difference_compact(mass: Value, from_difference: Value, time: Value) -> Value:
    """Return the difference [K] that a compact steel weight has left after ``time`` [s].

    The inverse of :func:`cooling_time_compact`.
    """
    a, b = _STILL * mass ** (-5 / 12), _STEADY * mass ** (-2 / 3)
    return (b / ((a + b * from_difference**-0.25) * np.exp(b * time / 4) - a)) ** 4
