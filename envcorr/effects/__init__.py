"""The effects, one file each, in the order in which outputs name them."""

from __future__ import annotations

from envcorr.effect import Effect
from envcorr.effects import (
    adjusting_weight,
    buoyancy,
    convection,
    disturbance,
    eccentric_loading,
    nonlinearity,
    operator_heat,
    repeatability,
    sensitivity_temperature,
    static_charge,
    stratification,
    tilt,
    tilt_zero,
    trapped_air,
    zero_temperature,
)

__all__ = ["EFFECTS"]

EFFECTS: tuple[Effect, ...] = (
    buoyancy.EFFECT,
    stratification.EFFECT,
    trapped_air.EFFECT,
    convection.EFFECT,
    operator_heat.EFFECT,
    sensitivity_temperature.EFFECT,
    zero_temperature.EFFECT,
    static_charge.EFFECT,
    tilt.EFFECT,
    tilt_zero.EFFECT,
    disturbance.EFFECT,
    repeatability.EFFECT,
    nonlinearity.EFFECT,
    eccentric_loading.EFFECT,
    adjusting_weight.EFFECT,
)
