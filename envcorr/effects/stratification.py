"""Air at the load of another temperature than at the sensor: layers, or a cabinet warmer than the room."""

from __future__ import annotations

import numpy as np

from envcorr.effect import Check, Effect
from envcorr.estimate import Value
from envcorr.vocabulary import Quantity

__all__ = ["EFFECT", "load"]


def load(
    air_density: Value,
    tare_air_density: Value,
    air_temperature: Value,
    tare_air_temperature: Value,
    air_warmer_at_load: Value,
    tare_air_warmer_at_load: Value,
    load_displaced_volume: Value,
    container_displaced_volume: Value,
) -> Value:
    """Return what warmer, so lighter, air at the load than at the sensor adds to the net reading [kg].

    d rho/rho = -dT/(T + dT) at the same pressure and vapour content (ideal gas); the container's part cancels unless it
    changes.
    """
    now = air_density * air_warmer_at_load / (air_temperature + air_warmer_at_load)
    then = tare_air_density * tare_air_warmer_at_load / (tare_air_temperature + tare_air_warmer_at_load)
    return now * load_displaced_volume + (now - then) * container_displaced_volume


EFFECT = Effect(
    name="stratification",
    title="other air at the load than at the sensor",
    help="The sensor hangs elsewhere: the air around the load is warmer or colder than what it reads.",
    source="ideal gas at constant pressure and vapour content",
    load=load,
    correctable=True,
    quantities=(
        Quantity(
            "air.warmer_at_load",
            "temperature difference",
            "air temperature at the load less that at the sensor",
            "Layers of air, or a cabinet warmer than the room; a bound, read as ±.",
            low=-50.0,
            high=50.0,
            limit=True,
        ),
    ),
    test="Hang a second sensor inside the draught shield for a day.",
    checks=(
        Check(
            lambda air_warmer_at_load: np.abs(air_warmer_at_load) > 1.0,
            "The sensor's temperature and the load's may differ by more than 1 K: the same vapour content was kept, "
            "not the "
            "same relative humidity. A sensor inside the draught shield would do better.",
            source="1 K is 0.34 % of the air density (computed from CIPM-2007); 1 K is a judgement",
        ),
    ),
)
