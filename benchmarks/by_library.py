"""Air density written for the ``uncertainties`` library, which knows no arrays: the other side of a comparison."""

from __future__ import annotations

from typing import Any

__all__ = ["density"]


def density(t: Any, p: Any, h: Any, x: Any, e: Any) -> Any:
    """Return CIPM-2007 [kg/m³] (Picard et al., Metrologia 45 (2008) 149); e is the formula's own error over its u."""
    from uncertainties import umath

    c = t - 273.15
    psv = umath.exp(1.2378847e-5 * t * t - 1.9121316e-2 * t + 33.93711047 - 6.3431645e3 / t)
    xv = h * (1.00062 + 3.14e-8 * p + 5.6e-7 * c * c) * psv / p
    moist = (5.707e-6 - 2.051e-8 * c) * xv + (1.9898e-4 - 2.376e-6 * c) * xv * xv
    z = 1 - p / t * (1.58123e-6 - 2.9331e-8 * c + 1.1043e-10 * c * c + moist)
    z = z + p * p / (t * t) * (1.83e-11 - 0.765e-8 * xv * xv)
    mass = 28.96546e-3 + 12.011e-3 * (x - 0.0004)
    return p * mass / (z * 8.314472 * t) * (1 - xv * (1 - 18.01528e-3 / mass)) * (1 + 22e-6 * e)
