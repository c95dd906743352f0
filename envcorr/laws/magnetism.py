"""Magnetism: the vertical pull of a stray field on a body, along the vertical axis z.

SI units: fields in tesla, gradients in tesla per metre, volumes in m³, polarisation (mu0 M) in tesla; floats or arrays.
"""

from __future__ import annotations

from envcorr.constants import VACUUM_PERMEABILITY
from envcorr.estimate import Value

__all__ = ["CLASSES", "induced_force", "permanent_force"]

CLASSES: dict[str, tuple[float, float]] = {
    "E1": (0.02, 2.5e-6),
    "E2": (0.07, 8e-6),
    "F1": (0.2, 25e-6),
    "F2": (0.8, 80e-6),
}
"""Largest susceptibility (a number) and polarisation [T] of a weight of a class; OIML R 111-1:2004, tables 3 and 4
(from memory)."""


def induced_force(susceptibility: Value, volume: Value, field: Value, gradient: Value) -> Value:
    """Return the pull [N] on a weakly magnetic body, chi V B (dB/dz)/mu0; the energy is -chi V B²/(2 mu0) (physics).

    For susceptibilities small against one; demagnetisation lessens the pull of stronger ones.
    """
    return susceptibility * volume * field * gradient / VACUUM_PERMEABILITY.value


def permanent_force(polarisation: Value, volume: Value, gradient: Value) -> Value:
    """Return the pull [N] on a body with a polarisation mu0 M along z: M V dB/dz (a dipole in a gradient)."""
    return polarisation * volume * gradient / VACUUM_PERMEABILITY.value
