"""Levelling: from a bubble, or the heights of the feet, to a tilt, and to the turns that take it away.

The x axis points to the right, y to the back, z up; a slope is dz/dx or dz/dy of the base (a number, the tangent of the
inclination), positive where the right or the back is higher. Lengths in metres, angles in radians.
"""

from __future__ import annotations

import numpy as np
from numpy.typing import ArrayLike, NDArray

from envcorr.estimate import Value
from envcorr.laws import tilt

__all__ = ["angle_of_bubble", "arms", "changes_to_level", "collinear", "plane", "tolerated_angles"]

Floats = NDArray[np.float64]

_FLAT = 1e-3
"""Height of a triangle of feet over its base below which they stand in one line (judgement)."""


def angle_of_bubble(offset: Value, per_angle: float) -> Value:
    """Return the inclination [rad] that moves a bubble by ``offset`` [m] towards the higher side.

    ``per_angle`` [m/rad] is the vial's sensitivity; it is the radius of its curvature (geometry of a circle).
    """
    return offset / per_angle


def plane(x: ArrayLike, y: ArrayLike, heights: ArrayLike) -> tuple[float, float, Floats]:
    """Return the slopes (dz/dx, dz/dy) of the plane through points, and how far each lies above it [m].

    Three points lie on it; of more it is the plane of least squares.
    """
    x, y, z = (np.asarray(values, dtype=np.float64) for values in (x, y, heights))
    matrix = np.column_stack([x - x.mean(), y - y.mean(), np.ones_like(x)])
    found, *_ = np.linalg.lstsq(matrix, z, rcond=None)
    return float(found[0]), float(found[1]), z - matrix @ found


def collinear(x: ArrayLike, y: ArrayLike) -> bool:
    """Return whether points stand (nearly) in one line, so that nothing tells how they lean across it."""
    points = np.column_stack([np.asarray(x, dtype=np.float64), np.asarray(y, dtype=np.float64)])
    centred = points - points.mean(axis=0)
    singular = np.linalg.svd(centred, compute_uv=False)
    return bool(singular[-1] <= _FLAT * singular[0])


def arms(x: ArrayLike, y: ArrayLike) -> Floats:
    """Return how far each of three feet stands from the line through the other two [m]."""
    points = np.column_stack([np.asarray(x, dtype=np.float64), np.asarray(y, dtype=np.float64)])
    found = []
    for i in range(3):
        first, second = points[(i + 1) % 3], points[(i + 2) % 3]
        along, across = second - first, points[i] - first
        found.append(abs(along[0] * across[1] - along[1] * across[0]) / np.hypot(*along))
    return np.array(found)


def changes_to_level(x: ArrayLike, y: ArrayLike, slope_x: float, slope_y: float, kept: int) -> Floats:
    """Return by how much each foot must be raised [m] to make the base level while foot ``kept`` stays as it is."""
    above = slope_x * np.asarray(x, dtype=np.float64) + slope_y * np.asarray(y, dtype=np.float64)
    return np.asarray(above[kept] - above)


def tolerated_angles(adjusted: float, share: float) -> tuple[float, float]:
    """Return between which tilts [rad] a balance adjusted at a tilt [rad] errs by no more than a share of the load.

    cos B lies within cos A (1 ± share); with losses 1 - cos written as 2 sin²(angle/2), so that nothing cancels.
    """
    lost = float(tilt.loss(adjusted))
    step = share * (1 - lost)
    return float(tilt.angle_of_loss(max(lost - step, 0.0))), float(tilt.angle_of_loss(min(lost + step, 2.0)))
