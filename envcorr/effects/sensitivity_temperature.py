"""Temperature coefficient of the sensitivity: the gain follows the air temperature since the adjustment."""

from __future__ import annotations

from typing import Any

import numpy as np

from envcorr.effect import Check, Effect
from envcorr.estimate import Value
from envcorr.vocabulary import Quantity

__all__ = ["EFFECT", "gain"]


def gain(
    balance_sensitivity_temperature_coefficient: Value, air_temperature: Value, adjusted_air_temperature: Value
) -> Value:
    """Return kappa (T - T_adj), the relative change of the gain; kappa [1/K], temperatures [K].

    Taken at the loaded and at the tare reading, it makes kappa [(T - T_adj) m + (T - T_tare) m_container] of the net.
    """
    return balance_sensitivity_temperature_coefficient * (air_temperature - adjusted_air_temperature)


def _heavy(
    container_mass: Value,
    load_mass: Value,
    balance_sensitivity_temperature_coefficient: Value,
    cycle_temperature_change: Value,
    target_resolution: Value,
    target_within: Value,
) -> Any:
    """Return where a container heavier than the load takes half of what the surroundings may."""
    shift = np.abs(balance_sensitivity_temperature_coefficient * cycle_temperature_change * container_mass)
    excess: Any = np.minimum(container_mass / load_mass, shift / (0.5 * target_within * target_resolution))
    return excess > 1


EFFECT = Effect(
    name="sensitivity_temperature",
    title="temperature coefficient of the sensitivity",
    help="The gain follows the temperature, and a heavy container feels what changed since taring.",
    source="EURAMET cg-18 v4.0, 7.1.2 (from memory)",
    gain=gain,
    correctable=True,
    needed="always",
    quantities=(
        Quantity(
            "balance.sensitivity_temperature_coefficient",
            "relative per temperature",
            "temperature coefficient of the sensitivity",
            "From the data sheet, often in ppm/K; a bound, read as ±.",
            low=-1e-3,
            high=1e-3,
            varies="never",
            limit=True,
        ),
    ),
    test="Weigh a steel weight at two room temperatures without adjusting in between.",
    checks=(
        Check(
            _heavy,
            "The container ({container_mass}) is heavier than the net load ({load_mass}): its weight times the "
            "temperature "
            "coefficient times the change since taring takes a good part of the target. Use a lighter container, or "
            "weigh sooner after taring.",
            source="half of what the surroundings may take (judgement)",
        ),
        Check(
            lambda container_mass, load_mass: container_mass > load_mass,
            "The temperature was taken as the same at tare and load; the container ({container_mass}) would feel a "
            "change. "
            "Give cycle.temperature_change.",
            source="1 ppm/K and 0.1 K on 100 g are 10 µg (computed)",
            level="info",
            only_if=lambda given: not {"cycle.temperature_change", "tare.air.temperature"} & set(given),
        ),
    ),
)
