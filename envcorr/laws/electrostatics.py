"""Electrostatics: pulls between a charged body and earthed metal.

Charges in coulomb, surface charges in C/m², lengths in metres, forces in newton, pressures in pascal; floats
or arrays that broadcast. Every pull is an attraction and grows with the square of the charge, whatever its
sign.
"""

from __future__ import annotations

import numpy as np
from numpy.typing import NDArray

from envcorr.constants import AIR_BREAKDOWN_FIELD, VACUUM_PERMITTIVITY
from envcorr.estimate import Value

__all__ = [
    "breakdown_surface_charge",
    "decay_time",
    "field_above_sheet",
    "field_pressure",
    "point_charge_for_force",
    "point_charge_force",
    "relaxation_time",
    "sheet_pressure",
    "sheet_under_roof_force",
    "sphere_capacitance",
    "sphere_force_at_potential",
    "sphere_force_with_charge",
]

_EPS0 = VACUUM_PERMITTIVITY.value


def point_charge_force(charge: Value, distance: Value) -> Value:
    """Return the pull [N] between a point charge [C] and an earthed plane at ``distance`` [m].

    q²/(16 pi eps0 d²), that of the image charge -q at 2 d; Jackson, Classical Electrodynamics, 2.1.
    """
    return charge**2 / (16 * np.pi * _EPS0 * distance**2)


def point_charge_for_force(force: Value, distance: Value) -> Value:
    """Return the charge [C] that an earthed plane at ``distance`` [m] pulls with ``force`` [N]."""
    return np.sqrt(16 * np.pi * _EPS0 * force) * distance


def sheet_pressure(surface_charge: Value) -> Value:
    """Return the pull per area [Pa] of a sheet with all its field on one side: sigma²/(2 eps0)."""
    return surface_charge**2 / (2 * _EPS0)


def field_pressure(field: Value) -> Value:
    """Return the pull per area [Pa] of a field [V/m] at a conductor: eps0 E²/2 (Maxwell's stress)."""
    return _EPS0 * field**2 / 2


def field_above_sheet(surface_charge: Value, distance: Value, roof_height: Value) -> Value:
    """Return the field [V/m] between a charged sheet and an earthed roof, over an earthed pan.

    The sheet lies ``distance`` [m] above the pan, the roof at ``roof_height`` [m] above it. Both gaps have
    the same voltage and their fields add to sigma/eps0, so the upper one is sigma d/(eps0 H).
    """
    return surface_charge * distance / (_EPS0 * roof_height)


def sheet_under_roof_force(surface_charge: Value, area: Value, distance: Value, roof_height: Value) -> Value:
    """Return the pull up [N] of the roof on a charged sheet over an earthed pan: sigma² d² A/(2 eps0 H²).

    The pull between sheet and pan is internal. See :func:`field_above_sheet`; ``area`` [m²] is wide against
    the gaps.
    """
    return field_pressure(field_above_sheet(surface_charge, distance, roof_height)) * area


def sphere_capacitance(radius: Value, gap: Value) -> Value:
    """Return the capacitance [F] of a sphere of ``radius`` [m] with ``gap`` [m] to an earthed plane.

    4 pi eps0 a sinh(alpha) sum 1/sinh(n alpha), cosh(alpha) = 1 + s/a; Smythe, Static and Dynamic
    Electricity, 5.08 (from memory). Exact; the number of terms grows as sqrt(a/s).
    """
    alpha, n_alpha, _ = _images(radius, gap)
    series: Value = np.sum(_csch(n_alpha), axis=-1)
    return 4 * np.pi * _EPS0 * radius * np.sinh(alpha[..., 0]) * series


def sphere_force_at_potential(radius: Value, gap: Value, potential: Value) -> Value:
    """Return the pull [N] of an earthed plane on a conducting sphere held at ``potential`` [V].

    2 pi eps0 V² sum (n coth(n alpha) - coth(alpha))/sinh(n alpha): half V² times the derivative of
    :func:`sphere_capacitance` by the gap.
    """
    alpha, n_alpha, n = _images(radius, gap)
    series: Value = np.sum((n / np.tanh(n_alpha) - 1 / np.tanh(alpha)) * _csch(n_alpha), axis=-1)
    return 2 * np.pi * _EPS0 * potential**2 * series


def sphere_force_with_charge(radius: Value, gap: Value, charge: Value) -> Value:
    """Return the pull [N] of an earthed plane on an insulated conducting sphere with ``charge`` [C]."""
    return sphere_force_at_potential(radius, gap, charge / sphere_capacitance(radius, gap))


def _images(radius: Value, gap: Value) -> tuple[NDArray[np.float64], NDArray[np.float64], NDArray[np.float64]]:
    """Return alpha, n alpha and n, the images along the last axis, as many as change the sum."""
    alpha = 2 * np.arcsinh(np.sqrt(np.asarray(gap / radius)[..., None] / 2))  # cosh(alpha) = 1 + s/a
    n = np.arange(1.0, np.ceil(45 / np.min(alpha)) + 2)  # exp(-45) is 3e-20
    return alpha, n * alpha, n


def _csch(x: NDArray[np.float64]) -> NDArray[np.float64]:
    """Return 1/sinh(x) of x > 0 without overflow."""
    return 2 * np.exp(-x) / -np.expm1(-2 * x)


def breakdown_surface_charge(sides: int) -> float:
    """Return the largest surface charge [C/m²] that air holds: eps0 E on one side, 2 eps0 E on a free sheet.

    With E = 3 MV/m (:data:`envcorr.constants.AIR_BREAKDOWN_FIELD`). No bound for gaps or radii under 1 cm.
    """
    return sides * _EPS0 * AIR_BREAKDOWN_FIELD.value


def relaxation_time(relative_permittivity: Value, resistivity: Value) -> Value:
    """Return the time constant [s] of a charge that leaks through a material [ohm m]: eps_r eps0 rho."""
    return relative_permittivity * _EPS0 * resistivity


def decay_time(force_ratio: Value, relaxation_time: Value) -> Value:
    """Return the time [s] until a pull has fallen by ``force_ratio``, the charge decaying as exp(-t/tau).

    The pull goes with the square of the charge: t = (tau/2) ln(ratio), none where it is small enough already.
    """
    return relaxation_time / 2 * np.log(np.maximum(force_ratio, 1.0))
