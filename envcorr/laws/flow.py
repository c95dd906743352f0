"""Air in motion: the drag on what stands in it, and how averaging lessens its fluctuations.

SI units; floats or arrays that broadcast.
"""

from __future__ import annotations

import numpy as np

from envcorr.estimate import Value

__all__ = ["averaged_share", "drag"]


def drag(speed: Value, area: Value, coefficient: Value, density: Value) -> Value:
    """Return the force [N] of air of ``density`` [kg/m³] at ``speed`` [m/s] on ``area`` [m²]: rho v |v| Cd A / 2.

    Signed as the speed. The definition of the drag coefficient; White, Fluid Mechanics, 7.6 (the section from memory).
    """
    return density * speed * np.abs(speed) * coefficient * area / 2


def averaged_share(duration: Value, integral_time: Value) -> Value:
    """Return the share of a fluctuation's standard deviation that its mean over ``duration`` [s] keeps (a number).

    For fluctuations with the correlation exp(-t/tau): the variance of the mean is 2 tau/T (1 - tau/T (1 - exp(-T/tau)))
    of that of the fluctuations; Tennekes and Lumley, A First Course in Turbulence, 6.4 (the section from memory).
    """
    ratio = np.asarray(duration) / integral_time
    safe = np.where(ratio > 1e-4, ratio, 1.0)
    variance = np.where(ratio > 1e-4, 2 / safe * (1 + np.expm1(-safe) / safe), 1 - ratio / 3)
    return np.sqrt(variance)[()]
