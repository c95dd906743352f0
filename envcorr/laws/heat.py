"""Heat: the drag of the air that a warm or cold load sets in motion, and the air that a vessel warms.

Temperatures in kelvin, lengths in metres; floats or arrays that broadcast. A result in kg is what the effect
adds to the reading: a load warmer than the air is dragged up and reads light, so it is negative there.
"""

from __future__ import annotations

import numpy as np

from envcorr.constants import DRY_AIR_GAS_CONSTANT, STANDARD_GRAVITY
from envcorr.estimate import Value
from envcorr.laws.air import density_cipm

__all__ = [
    "convection_compact",
    "convection_cylinder",
    "grashof_number",
    "kinematic_viscosity",
    "trapped_air",
    "viscosity",
    "wall_shear_force",
]

_G = STANDARD_GRAVITY.value

# EURAMET cg-18 v4.0, appendix F, table F2.1 (after Gläser): a fit to its entries, all of which it gives to
# the printed digit (the entries from memory)
_PLUME, _FACES = 0.2150e-6, 0.0750e-6  # kg/(kg K)^0.75, kg/(kg K)
_STEEL = 8000.0  # kg/m³: the table's loads are steel weights, and what the drag sees is their volume

_WALL_SHEAR = 0.676  # f''(0) at a Prandtl number of 0.72; Ostrach, NACA Report 1111 (1953)
_SHEAR_TO_DRAG = 1.70  # brings the shear alone to the table of cg-18 for steel weights (computed; judgement)


def viscosity(temperature: Value) -> Value:
    """Return the dynamic viscosity of air [Pa s] at ``temperature`` [K]; Sutherland, ISO 2533, 2.12."""
    return 1.458e-6 * temperature**1.5 / (temperature + 110.4)


def grashof_number(height: Value, temperature_difference: Value, film_temperature: Value, pressure: Value) -> Value:
    """Return the Grashof number g beta |dT| H³/nu² of a wall of ``height`` [m] in air, with beta = 1/T.

    ``film_temperature`` [K], where nu is taken, is the mean of wall and air. Ostrach, NACA Report 1111
    (1953).
    """
    nu = kinematic_viscosity(film_temperature, pressure)
    return _G * np.abs(temperature_difference) / film_temperature * height**3 / nu**2


def kinematic_viscosity(temperature: Value, pressure: Value) -> Value:
    """Return the kinematic viscosity [m²/s] of dry air, an ideal gas, at [K] and [Pa]; ISO 2533, 2.13."""
    return viscosity(temperature) * DRY_AIR_GAS_CONSTANT.value * temperature / pressure


def convection_compact(volume: Value, temperature_difference: Value) -> Value:
    """Return what convection adds to the reading [kg] of a compact body of ``volume`` [m³], warmer by [K].

    EURAMET cg-18 v4.0, appendix F: 0.2150 x^0.75 + 0.0750 x mg with x = 8000 kg/m³ V |dT| in kg K, for steel
    weights from 10 g to 50 kg and differences from 1 to 20 K. A band rather than a correction.
    """
    x = _STEEL * volume * np.abs(temperature_difference)
    return -np.sign(temperature_difference) * (_PLUME * x**0.75 + _FACES * x)


def convection_cylinder(
    height: Value, diameter: Value, temperature_difference: Value, temperature: Value, pressure: Value
) -> Value:
    """Return what convection adds to the reading [kg] of an upright cylinder, warmer by [K] than the air.

    The laminar shear on the wall, times 1.70 for the plume, and the end faces as those of a compact body: for
    a steel weight as high as wide this is within 2 % of :func:`convection_compact`. A model factor from 0.5
    to 2 (judgement) stands for other shapes.
    """
    volume = np.pi / 4 * diameter**2 * height
    faces = _FACES * _STEEL * volume * np.abs(temperature_difference)
    shear = wall_shear_force(height, diameter, temperature_difference, temperature, pressure)
    return -np.sign(temperature_difference) * (_SHEAR_TO_DRAG * shear / _G + faces)


def wall_shear_force(
    height: Value, diameter: Value, temperature_difference: Value, temperature: Value, pressure: Value
) -> Value:
    """Return the shear force [N] of laminar natural convection on the wall of an upright cylinder; no sign.

    tau(x) = sqrt(2) f''(0) mu nu Gr_x^(3/4)/x² on a flat wall (Ostrach 1953) rises as x^(1/4), so that the
    force is pi D (4/5) H tau(H). Air properties at the mean of wall and air.
    """
    film = temperature + temperature_difference / 2
    momentum = viscosity(film) * kinematic_viscosity(film, pressure)
    grashof = grashof_number(height, temperature_difference, film, pressure)
    tau = np.sqrt(2) * _WALL_SHEAR * momentum * grashof**0.75 / height**2
    force: Value = np.pi * diameter * 0.8 * height * tau
    return force


def trapped_air(
    free_volume: Value,
    vessel_temperature: Value,
    temperature: Value,
    pressure: Value,
    vapour_fraction: Value,
    co2: Value,
) -> Value:
    """Return what the air in an open vessel of another temperature adds to the reading [kg].

    ``free_volume`` [m³] is the inner volume less the sample. The air inside has the room's pressure and
    vapour content but the vessel's temperature: V (rho(T_vessel) - rho(T_air)).
    """
    inside = density_cipm(vessel_temperature, pressure, vapour_fraction, co2)
    return free_volume * (inside - density_cipm(temperature, pressure, vapour_fraction, co2))
