"""The effects, one file each, in the order in which outputs name them."""

from __future__ import annotations

from importlib import import_module

from envcorr.effect import Effect

__all__ = ["EFFECTS", "NAMES"]

NAMES = (
    "buoyancy",
    "stratification",
    "trapped_air",
    "convection",
    "operator_heat",
    "sensitivity_temperature",
    "zero_temperature",
    "hygroscopic_uptake",
    "water_film",
    "condensation",
    "fingerprint",
    "evaporation",
    "headspace_vapour",
    "magnetism",
    "static_charge",
    "tilt",
    "tilt_zero",
    "gravity",
    "draught",
    "pressure_pulse",
    "vibration",
    "disturbance",
    "repeatability",
    "nonlinearity",
    "eccentric_loading",
    "adjusting_weight",
)
"""One line an effect: the name of its file."""

EFFECTS: tuple[Effect, ...] = tuple(import_module(f"{__name__}.{name}").EFFECT for name in NAMES)
