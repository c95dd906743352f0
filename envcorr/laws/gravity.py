"""Normal gravity by latitude and height.

GRS80: Moritz, Geodetic Reference System 1980, J. Geodesy 74 (2000) 128. Angles in radians, heights in metres
above the ellipsoid (above sea level is within 110 m of it, 35e-6 of g); floats or arrays that broadcast.
"""

from __future__ import annotations

import numpy as np

from envcorr.estimate import Value

__all__ = ["normal_gravity"]

# Moritz (2000): gravity at the equator, k and e² of Somigliana's formula; semi-major axis, flattening f and
# m = omega² a² b/GM
_GRAVITY_AT_EQUATOR = 9.7803267715  # m/s²
_K = 0.001931851353
_E2 = 0.0066943800229
_SEMI_MAJOR_AXIS = 6_378_137.0  # m
_F = 1 / 298.257222101
_M = 0.00344978600308


def normal_gravity(latitude: Value, height: Value = 0.0) -> Value:
    """Return the normal gravity [m/s²] at ``latitude`` [rad] and ``height`` [m].

    Somigliana's closed formula on the ellipsoid; above it the free-air formula to the second order in height.
    """
    sin2 = np.sin(latitude) ** 2
    surface = _GRAVITY_AT_EQUATOR * (1 + _K * sin2) / np.sqrt(1 - _E2 * sin2)
    relative = height / _SEMI_MAJOR_AXIS
    return surface * (1 - 2 * (1 + _F + _M - 2 * _F * sin2) * relative + 3 * relative**2)
