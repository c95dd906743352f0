"""Set-ups that several tests share, built from Python names; all of them invented unless a source is named."""

from __future__ import annotations

from collections.abc import Callable
from typing import Any

from envcorr.catalogue import CATALOGUE
from envcorr.estimate import Estimate
from envcorr.jobs.room import EffectRow, RoomResult
from envcorr.setup import Setup

MG, UG, HPA = 1e-6, 1e-9, 100.0
K0 = 273.15

Said = Estimate | float | str | None


def setup(*bases: dict[str, Said], waived: tuple[str, ...] = (), **said: Said) -> Setup:
    """Return a set-up from Python names (``load_density``): floats are exact, words are choices, None takes away."""
    merged: dict[str, Said] = {}
    for part in (*bases, said):
        merged.update(part)
    estimates = {
        CATALOGUE.dotted(name): value if isinstance(value, Estimate) else Estimate(float(value))
        for name, value in merged.items()
        if value is not None and not isinstance(value, str)
    }
    choices = {CATALOGUE.dotted_choice(name): word for name, word in merged.items() if isinstance(word, str)}
    return Setup(estimates=estimates, choices=choices, waived=frozenset(waived))


def normal(centre: float, u: float) -> Estimate:
    return Estimate(centre, "normal", u)


def about(centre: float, half_width: float) -> Estimate:
    return Estimate(centre, "rectangular", half_width)


AIR: dict[str, Said] = {
    "air_temperature": K0 + 20,
    "air_pressure": 101_325.0,
    "air_humidity": 0.5,
    "air_co2": 4e-4,
}
"""CIPM-2007 gives 1.199 31 kg/m³ (Picard et al., Metrologia 45 (2008) 149, in 40-digit arithmetic)."""
AIR_DENSITY = 1.1993138955

BALANCE: dict[str, Said] = {
    "balance_scale_interval": 10 * UG,
    "balance_repeatability": 15 * UG,
    "balance_sensitivity_temperature_coefficient": 0.0,
}
JUST_BEFORE: dict[str, Said] = {"adjusted_when": "just before", "balance_adjusting_weight_density": 8000.0}
STEEL: dict[str, Said] = {"load_mass": 5e-3, "load_density": 8000.0, "load_density_kind": "solid"}

ROOM: dict[str, Said] = {**AIR, **BALANCE, **JUST_BEFORE, **STEEL, "target_resolution": 0.1 * MG}
"""A steel weight of 5 g in known air: nothing but the balance's own scatter is left."""


FOAM: dict[str, Said] = {
    **BALANCE,
    **JUST_BEFORE,
    "air_temperature": K0 + 21.4,
    "air_humidity": 0.42,
    "air_pressure": 943.10 * HPA,
    "air_co2": 4e-4,
    "target_resolution": 10 * MG,
}
"""The air of a light foam: 1.111 01 kg/m³."""


def foam(mass: float, kind: str, density: float | Estimate, **said: Said) -> Setup:
    """Return a light foam, of a mass [kg] and a density [kg/m³] of some kind."""
    return setup(FOAM, {"load_mass": mass, "load_density_kind": kind, "load_density": density}, said)


def row(result: RoomResult, name: str) -> EffectRow:
    """Return the row of one effect."""
    return next(found for found in result.effects if found.name == name)


def cipm_2007(temperature: Any, pressure: Any, humidity: Any, co2: Any, exp: Callable[[Any], Any]) -> Any:
    """Return the density of moist air [kg/m³], typed from the paper (appendix 1) for numbers of any library.

    Picard, Davis, Gläser, Fujii, Metrologia 45 (2008) 149.
    """
    t = temperature - K0
    saturation = exp(
        1.2378847e-5 * temperature * temperature - 1.9121316e-2 * temperature + 33.93711047 - 6.3431645e3 / temperature
    )
    vapour = humidity * (1.00062 + 3.14e-8 * pressure + 5.6e-7 * t * t) * saturation / pressure
    ratio = pressure / temperature
    compressibility = (
        1
        - ratio
        * (
            1.58123e-6
            - 2.9331e-8 * t
            + 1.1043e-10 * t * t
            + (5.707e-6 - 2.051e-8 * t) * vapour
            + (1.9898e-4 - 2.376e-6 * t) * vapour * vapour
        )
        + ratio * ratio * (1.83e-11 - 0.765e-8 * vapour * vapour)
    )
    dry = (28.96546 + 12.011 * (co2 - 0.0004)) * 1e-3
    return ratio * dry / (compressibility * 8.314472) * (1 - vapour * (1 - 18.01528e-3 / dry))
