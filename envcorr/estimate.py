"""Estimate: a value, or a column of values, with a distribution.

Every number is a float in SI units or an array of them; shapes broadcast. The distributions are those of
JCGM 101:2008, clause 6.4: rectangular 6.4.2, triangular 6.4.5, arc sine (U-shaped) 6.4.6, Gaussian 6.4.7,
scaled and shifted t 6.4.9; the log-uniform is the rectangular of the logarithm.
"""

from __future__ import annotations

import math
from dataclasses import dataclass, replace
from typing import Any, Literal, TypeAlias

import numpy as np
from numpy.typing import NDArray

__all__ = ["SHAPES", "Estimate", "Shape", "Value", "standard_score"]

Value: TypeAlias = float | NDArray[np.float64]
"""A float or an array of floats, in SI units; functions of Values broadcast."""

Shape = Literal["fixed", "normal", "rectangular", "triangular", "arcsine", "log-uniform"]
SHAPES: tuple[Shape, ...] = ("fixed", "normal", "rectangular", "triangular", "arcsine", "log-uniform")


@dataclass(frozen=True, slots=True)
class Estimate:
    """A best estimate and how the quantity may lie about it.

    ``centre``: the best estimate [SI]: the expectation of a symmetric distribution, the median of a log-uniform.
    ``spread`` [SI]: the standard uncertainty of a normal, the half-width of a rectangular, triangular or arc-sine,
    half the logarithm of high/low of a log-uniform (a bare number).
    ``dof``: degrees of freedom of ``spread``; a normal with few of them is drawn as Student's t.
    """

    centre: Value
    shape: Shape = "fixed"
    spread: Value = 0.0
    dof: float = math.inf

    @classmethod
    def between(cls, low: Value, high: Value, shape: Shape = "rectangular") -> Estimate:
        """Return the distribution of the given shape from ``low`` to ``high`` [SI]."""
        if shape == "log-uniform":
            return cls(np.sqrt(low * high), shape, np.log(high / low) / 2)
        return cls((low + high) / 2, shape, (high - low) / 2)

    @property
    def is_exact(self) -> bool:
        """Whether there is no spread at all."""
        if self.shape == "fixed":
            return True
        return not np.any(self.spread) if isinstance(self.spread, np.ndarray) else not self.spread

    @property
    def mean(self) -> Value:
        """The expectation [SI]."""
        if self.shape == "log-uniform" and not self.is_exact:
            return self.centre * np.sinh(self.spread) / self.spread
        return self.centre

    @property
    def u(self) -> Value:
        """The standard uncertainty [SI], as first order uses it (that of a t is its scale, JCGM 100 G.3)."""
        match self.shape:
            case "normal":
                return self.spread
            case "rectangular":
                return self.spread / math.sqrt(3)
            case "triangular":
                return self.spread / math.sqrt(6)
            case "arcsine":
                return self.spread / math.sqrt(2)
            case "log-uniform":
                if self.is_exact:
                    return 0.0
                # variance of exp(R), R rectangular: E(X^2) - E(X)^2
                ratio = np.sinh(2 * self.spread) / (2 * self.spread) - (np.sinh(self.spread) / self.spread) ** 2
                return self.centre * np.sqrt(ratio)
            case "fixed":
                return 0.0

    @property
    def bounds(self) -> tuple[Value, Value]:
        """The smallest and largest value it can take [SI]; infinite for a normal."""
        if self.is_exact:
            return self.centre, self.centre
        if self.shape == "normal":
            return -math.inf, math.inf
        if self.shape == "log-uniform":
            return self.centre * np.exp(-self.spread), self.centre * np.exp(self.spread)
        return self.centre - self.spread, self.centre + self.spread

    def quantile(self, uniform: NDArray[np.float64]) -> NDArray[np.float64]:
        """Return the value below which the share ``uniform`` (inside 0..1) of the distribution lies [SI]."""
        return self.place(standard_score(self.shape, self.dof, uniform))

    def place(self, score: NDArray[np.float64]) -> NDArray[np.float64]:
        """Return centre and spread applied to standard scores (see :func:`standard_score`)."""
        result: NDArray[np.float64]
        if self.shape == "log-uniform":
            result = self.centre * np.exp(self.spread * score)
        else:
            result = self.centre + self.spread * score
        return result

    def scaled(self, factor: float) -> Estimate:
        """Return the same estimate with its spread multiplied by ``factor``."""
        return replace(self, spread=self.spread * factor)

    def about(self, centre: Value) -> Estimate:
        """Return the same spread about another centre."""
        return replace(self, centre=centre)


def standard_score(shape: Shape, dof: float, uniform: NDArray[np.float64]) -> NDArray[np.float64]:
    """Return the quantile of the shape with centre 0 and spread 1 at ``uniform``, which lies inside 0..1."""
    result: Any
    match shape:
        case "normal":
            from scipy import special

            result = special.ndtri(uniform) if math.isinf(dof) else special.stdtrit(dof, uniform)
        case "rectangular" | "log-uniform":
            result = 2 * uniform - 1
        case "triangular":
            tail = np.minimum(uniform, 1 - uniform)
            result = np.copysign(1 - np.sqrt(2 * tail), uniform - 0.5)
        case "arcsine":
            result = np.sin(np.pi * (uniform - 0.5))
        case "fixed":
            result = np.zeros_like(uniform)
    return np.asarray(result, dtype=np.float64)
