"""Air buoyancy of the load, of its container and of the adjusting weight."""

from __future__ import annotations

from envcorr.constants import CONVENTIONAL_AIR_DENSITY, CONVENTIONAL_WEIGHT_DENSITY
from envcorr.effect import Check, Effect
from envcorr.estimate import Value

__all__ = ["EFFECT", "gain", "load"]

_RHO_0 = CONVENTIONAL_AIR_DENSITY.value
_RHO_C = CONVENTIONAL_WEIGHT_DENSITY.value


def load(
    air_density: Value,
    tare_air_density: Value,
    load_displaced_volume: Value,
    container_displaced_volume: Value,
) -> Value:
    """Return what the air takes off the net load [kg]: off the load itself, and off the container by its change.

    Archimedes' principle at the loaded and at the tare reading; densities [kg/m³] and volumes [m³] broadcast.
    """
    return -air_density * load_displaced_volume - (air_density - tare_air_density) * container_displaced_volume


def gain(adjusted_factor: Value) -> Value:
    """Return the relative change of the gain that the adjustment in air has set: 1/K - 1 (OIML D 28:2004)."""
    return (1 - adjusted_factor) / adjusted_factor


EFFECT = Effect(
    name="buoyancy",
    title="air buoyancy",
    help="The air carries a part of the load, and carried a part of the adjusting weight.",
    source="OIML D 28:2004; OIML R 111-1:2004, clause 10 and C.5",
    load=load,
    gain=gain,
    correctable=True,
    when={"balance.corrects_buoyancy": ("no",)},  # what is corrected already is not corrected twice
    needed="always",
    definition=True,
    test="Weigh the sample beside a steel weight of like mass on two days of different pressure.",
    checks=(
        Check(
            lambda balance_adjusting_weight_density: abs(balance_adjusting_weight_density - _RHO_C) > 10,
            "The adjusting weight has {balance_adjusting_weight_density}, not 8000 kg/m³: the display is set to its "
            "conventional mass, and the air's part in that was allowed for.",
            source="OIML D 28:2004, clause 5",
            level="info",
        ),
        Check(
            lambda adjusted_air_density: abs(adjusted_air_density / _RHO_0 - 1) > 0.03,
            "The balance was adjusted in air of {adjusted_air_density}, not 1.2 kg/m³: what it was "
            "adjusted in was used.",
            source="OIML D 28:2004, clause 5; 3 % is 4.5 µg per gram (computed)",
            level="info",
        ),
        Check(
            lambda load_mass, load_conventional_mass, target_resolution: (
                abs(load_mass - load_conventional_mass) > target_resolution
            ),
            "Mass and conventional mass of this load ({load_mass} and {load_conventional_mass}) differ by more than "
            "the target resolution: make sure which one is asked for (target.measurand).",
            source="OIML D 28:2004, clause 5",
            level="info",
            unless_chosen="target.measurand",
        ),
    ),
)
