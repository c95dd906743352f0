"""Liquids that evaporate, by name: vapour pressure, heat of vaporisation, and what diffusion in air needs."""

from __future__ import annotations

import tomllib
from dataclasses import dataclass
from functools import lru_cache
from importlib.resources import files

from envcorr.constants import ZERO_CELSIUS
from envcorr.errors import NotComputedError

__all__ = ["Liquid", "every", "heat_of_vaporisation", "vapour_pressure"]

_MMHG = 133.322387415  # Pa; NIST SP 811 (2008), appendix B.8
_COOLPROP = "CoolProp, equation of state"


@dataclass(frozen=True, slots=True)
class Liquid:
    """A liquid: molar mass [kg/mol], diffusion volume (a number), flash point [K] or None where none is listed.

    Its vapour pressure is CoolProp's, or that of the constants of Antoine's equation; ``heat`` [J/mol] goes with these.
    """

    name: str
    molar_mass: float
    volume: float
    source: str
    coolprop: str = ""
    antoine: tuple[float, float, float] | None = None
    heat: float = 0.0
    flash: float | None = None


@lru_cache(maxsize=1)
def every() -> dict[str, Liquid]:
    """Return all liquids by name."""
    table = tomllib.loads(files("envcorr").joinpath("data/liquids.toml").read_text(encoding="utf-8"))
    return {
        name: Liquid(
            name,
            entry["molar_mass"] / 1000,
            entry["volume"],
            entry.get("source", _COOLPROP),
            entry.get("coolprop", ""),
            tuple(entry["antoine"]) if "antoine" in entry else None,
            1000 * entry.get("heat", 0.0),
            entry["flash"] + ZERO_CELSIUS.value if "flash" in entry else None,
        )
        for name, entry in table.items()
    }


def vapour_pressure(liquid: Liquid, temperature: float) -> float:
    """Return the vapour pressure [Pa] at a temperature [K]: slow where it is CoolProp's, so not for draws.

    Raises NotComputedError where CoolProp has no answer.
    """
    if liquid.antoine is not None:
        a, b, c = liquid.antoine
        return float(_MMHG * 10 ** (a - b / (c + temperature - ZERO_CELSIUS.value)))
    return _saturated(liquid, "P", temperature, 1)


def heat_of_vaporisation(liquid: Liquid, temperature: float) -> float:
    """Return the heat of vaporisation [J/mol] at a temperature [K]. Raises NotComputedError as above."""
    if liquid.antoine is not None:
        return liquid.heat
    return _saturated(liquid, "Hmolar", temperature, 1) - _saturated(liquid, "Hmolar", temperature, 0)


def _saturated(liquid: Liquid, what: str, temperature: float, vapour: int) -> float:
    from CoolProp.CoolProp import PropsSI

    try:
        return float(PropsSI(what, "T", temperature, "Q", vapour, liquid.coolprop))
    except ValueError as error:
        raise NotComputedError(
            f"CoolProp has no vapour pressure of {liquid.name} at {temperature - ZERO_CELSIUS.value:.3g} °C: {error}. "
            "Check the temperature, or give a measured rate instead of the liquid."
        ) from error
