"""Tilt: the share of its weight that a balance out of level feels.

Angles in radians, the inclinations of two axes at right angles against the horizontal (below 90°); floats or
arrays that broadcast. The axis of measurement leans by theta with tan² theta = tan² a + tan² b, and the
balance feels cos theta. No formula here takes a difference of nearly equal cosines.
"""

from __future__ import annotations

import numpy as np

from envcorr.estimate import Value

__all__ = ["angle_of_loss", "combined_angle", "cosine", "loss", "relative_shift", "steepness"]


def steepness(a: Value, b: Value) -> Value:
    """Return tan² theta = tan² a + tan² b, the square of the gradient of the tilted base."""
    squares: Value = np.tan(a) ** 2 + np.tan(b) ** 2
    return squares


def combined_angle(a: Value, b: Value) -> Value:
    """Return the angle [rad] between the axis of measurement and the vertical."""
    return np.arctan(np.sqrt(steepness(a, b)))


def cosine(a: Value, b: Value) -> Value:
    """Return cos theta = 1/sqrt(1 + tan² a + tan² b), the share of the weight that acts along the axis."""
    return 1 / np.sqrt(1 + steepness(a, b))


def loss(theta: Value) -> Value:
    """Return 1 - cos theta = 2 sin²(theta/2), the share of the weight that is lost at an angle [rad]."""
    return 2 * np.sin(theta / 2) ** 2


def angle_of_loss(loss: Value) -> Value:
    """Return the angle [rad] at which the share ``loss`` of the weight is lost."""
    return 2 * np.arcsin(np.sqrt(loss / 2))


def relative_shift(adjusted_a: Value, adjusted_b: Value, a: Value, b: Value) -> Value:
    """Return cos B/cos A - 1: the relative change of the reading, adjusted at tilt A and used at tilt B.

    With the steepness s of each, the ratio q = sqrt((1 + s_A)/(1 + s_B)) less one is
    (s_A - s_B)/((1 + s_B)(1 + q)), and s_A - s_B is taken as sums times differences.
    """
    a_x, a_y, b_x, b_y = np.tan(adjusted_a), np.tan(adjusted_b), np.tan(a), np.tan(b)
    difference = (a_x - b_x) * (a_x + b_x) + (a_y - b_y) * (a_y + b_y)
    after = 1 + steepness(a, b)
    ratio = np.sqrt((1 + steepness(adjusted_a, adjusted_b)) / after)
    shift: Value = difference / (after * (1 + ratio))
    return shift
