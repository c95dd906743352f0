"""The effects, one file each, in the order in which outputs name them."""

from __future__ import annotations

from envcorr.effect import Effect
from envcorr.effects import (
    adjusting_weight,
    buoyancy,
    disturbance,
    eccentric_loading,
    nonlinearity,
    repeatability,
)

__all__ = ["EFFECTS"]

EFFECTS: tuple[Effect, ...] = (
    buoyancy.EFFECT,
    disturbance.EFFECT,
    repeatability.EFFECT,
    nonlinearity.EFFECT,
    eccentric_loading.EFFECT,
    adjusting_weight.EFFECT,
)
