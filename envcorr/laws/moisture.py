"""Water from the air: taken up by a hygroscopic body, held as a film on a surface, condensed on a cold one.

Temperatures in kelvin, pressures in pascal, lengths in metres, times in seconds, relative humidity and mole
fractions as numbers from 0 to 1; floats or arrays that broadcast. A mass in kg is positive where water comes.
"""

from __future__ import annotations

import numpy as np

from envcorr.constants import STANDARD_PRESSURE, ZERO_CELSIUS
from envcorr.estimate import Value
from envcorr.laws.air import vapour_density, vapour_fraction_from_dew_point
from envcorr.laws.cooling import heat_transfer_coefficient, thermal_conductivity

__all__ = [
    "condensation_flux",
    "film_change",
    "lewis_number",
    "mass_transfer_coefficient",
    "sorbed_mass",
    "vapour_diffusivity",
]

_FREEZING_NITROGEN = 63.15  # K, triple point (CoolProp, after Span et al. 2000): air is a gas above it only


def sorbed_mass(mass: Value, isotherm_slope: Value, humidity_step: Value, time: Value, time_constant: Value) -> Value:
    """Return the water [kg] that a body of ``mass`` [kg] has taken up ``time`` after a step of the humidity.

    dw/dt = (S dh - w)/tau, from w = 0: m S dh (1 - exp(-t/tau)), the linear driving force of Glueckauf, Trans.
    Faraday Soc. 51 (1955) 1540. ``isotherm_slope`` S is in kg of water per kg of the body over the whole range of
    humidity, 0 to 1; ``time_constant`` tau the time to 63 % (1 - 1/e) of the way. Negative where it dries.
    """
    return -mass * isotherm_slope * humidity_step * np.expm1(-time / time_constant)


def film_change(area: Value, film_slope: Value, humidity_step: Value) -> Value:
    """Return how much heavier [kg] the film of water on ``area`` [m²] becomes by a step of the humidity.

    ``film_slope`` is in kg/m² over the whole range of humidity; the film is taken as following at once.
    """
    return area * film_slope * humidity_step


def vapour_diffusivity(temperature: Value, pressure: Value) -> Value:
    """Return the diffusivity of water vapour in air [m²/s].

    Pruppacher and Klett, Microphysics of Clouds and Precipitation, 2nd ed., (13-3) (from memory), for -40 to
    40 °C; up to 6 % below the rule of Fuller, Schettler and Giddings there.
    """
    return 0.211e-4 * (temperature / ZERO_CELSIUS.value) ** 1.94 * STANDARD_PRESSURE.value / pressure


def _heat_capacity(temperature: Value, pressure: Value) -> Value:
    """Return the heat capacity of air by volume [J/(m³ K)]: rho cp = 7/2 p/T of an ideal diatomic gas."""
    return 3.5 * pressure / temperature


def lewis_number(temperature: Value, pressure: Value) -> Value:
    """Return the Lewis number of water vapour in air, thermal diffusivity over diffusivity (a number)."""
    thermal = thermal_conductivity(temperature) / _heat_capacity(temperature, pressure)
    return thermal / vapour_diffusivity(temperature, pressure)


def mass_transfer_coefficient(heat_transfer: Value, temperature: Value, pressure: Value) -> Value:
    """Return the mass transfer coefficient [m/s] of vapour where that of heat is ``heat_transfer`` [W/(m² K)].

    h/(rho cp) Le^(-2/3): the analogy of heat and mass transfer, Incropera and DeWitt, Fundamentals of Heat and
    Mass Transfer, (6.60) (the equation's number from memory). ``temperature`` is the mean of surface and air.
    """
    still = heat_transfer / _heat_capacity(temperature, pressure)
    return still * lewis_number(temperature, pressure) ** (-2 / 3)


def condensation_flux(
    height: Value, temperature_difference: Value, temperature: Value, pressure: Value, vapour_fraction: Value
) -> Value:
    """Return the water that condenses on a body [kg/(m² s)], zero where its surface lies above the dew point.

    ``height`` [m] of the body, its surface warmer than the air by ``temperature_difference`` [K] (negative where
    it is cold), air at ``temperature`` and ``pressure`` with a mole fraction ``vapour_fraction`` of water. Still
    air: natural convection on an upright wall. The vapour pressure at the surface is that of liquid water; ice
    has up to 27 Pa less, 3 % of what drives frost out of air of 22 °C and 50 % (computed). A surface
    colder than nitrogen's freezing point counts as being at it.
    """
    surface = np.maximum(temperature + temperature_difference, _FREEZING_NITROGEN)
    difference = surface - temperature
    mean = temperature + difference / 2
    # natural convection takes its properties half the difference above the temperature that it is given
    heat = heat_transfer_coefficient(height, difference, mean - np.abs(difference) / 2, pressure, 0.0)
    # both at the mean temperature: what drives is the difference of fractions, which vanishes at the dew point
    excess = np.maximum(vapour_fraction - vapour_fraction_from_dew_point(pressure, surface), 0.0)
    return mass_transfer_coefficient(heat, mean, pressure) * vapour_density(mean, pressure, excess)
