"""Densities by name: solids from a table, water by Tanaka's formula, other liquids by CoolProp; each has a source."""

from __future__ import annotations

import difflib
import tomllib
from dataclasses import dataclass
from functools import lru_cache
from importlib.resources import files

from envcorr.constants import STANDARD_PRESSURE, ZERO_CELSIUS
from envcorr.errors import Fault, InputError
from envcorr.estimate import Estimate, Value
from envcorr.laws import water

__all__ = ["NAMED_BY", "REFERENCE_TEMPERATURE", "Material", "density", "entries", "expansion", "find", "names"]

NAMED_BY = ("load.material", "container.material")
"""Entries that name a material, whose density they give."""

REFERENCE_TEMPERATURE = ZERO_CELSIUS.value + 20
"""At which the table holds [K] (OIML R 111-1:2004, B.7)."""
# names of CoolProp's fluids; its equations of state for them claim 0.1 to 0.2 % in the liquid (from memory)
_LIQUIDS = {
    "acetone": "Acetone",
    "cyclohexane": "CycloHexane",
    "ethanol": "Ethanol",
    "heptane": "n-Heptane",
    "hexane": "n-Hexane",
    "methanol": "Methanol",
    "toluene": "Toluene",
}
_LIQUID_RELATIVE_U = 1e-3


@dataclass(frozen=True, slots=True)
class Material:
    """A material by name: ``density`` at 20 °C and its ``u`` [kg/m³], ``expansion`` (cubic) [1/K] or None.

    For water and the liquids that CoolProp knows the density follows the temperature by a formula instead.
    """

    name: str
    source: str
    kind: str
    density: float | None = None
    u: float | None = None
    expansion: float | None = None


@lru_cache(maxsize=1)
def _table() -> dict[str, Material]:
    text = files("envcorr").joinpath("data/materials.toml").read_text(encoding="utf-8")
    found = {
        name: Material(
            name, entry["source"], "solid", float(entry["density"]), float(entry["u"]), entry.get("expansion")
        )
        for name, entry in tomllib.loads(text).items()
    }
    found["water"] = Material("water", "Tanaka et al., Metrologia 38 (2001) 301, air-saturated", "liquid")
    for name in _LIQUIDS:
        found[name] = Material(name, "CoolProp, equation of state; u 0.1 % (from memory)", "liquid")
    return dict(sorted(found.items()))


def names() -> tuple[str, ...]:
    """Return the names of all materials."""
    return tuple(_table())


def find(name: str) -> Material:
    """Return a material by its name; spaces and capitals do not matter. Raises :class:`InputError`."""
    key = "-".join(name.strip().lower().replace("_", " ").split())
    found = _table().get(key)
    if found is None:
        near = difflib.get_close_matches(key, names(), n=1, cutoff=0.5)
        hint = f"Did you mean {near[0]}?" if near else f"Known are {', '.join(names())}."
        raise InputError([Fault("material", f'"{name[:60]}" is not in the table.', hint)])
    return found


def density(material: Material, temperature: Value = REFERENCE_TEMPERATURE) -> Estimate:
    """Return the density of a material [kg/m³] at a temperature [K] (or a column), with its standard uncertainty.

    A solid follows its expansion from 20 °C, rho/(1 + beta (T - 293.15 K)), where the table knows it.
    """
    if material.name == "water":
        at = water.density(temperature, STANDARD_PRESSURE.value)
        return Estimate(at, "normal", water.density_uncertainty(temperature))
    if material.name in _LIQUIDS:
        from CoolProp.CoolProp import PropsSI

        value = PropsSI("D", "T", temperature, "P", STANDARD_PRESSURE.value, _LIQUIDS[material.name])
        return Estimate(value, "normal", value * _LIQUID_RELATIVE_U)
    assert material.density is not None
    assert material.u is not None
    stretch = 1 + (material.expansion or 0.0) * (temperature - REFERENCE_TEMPERATURE)
    return Estimate(material.density / stretch, "normal", material.u / stretch)


def expansion(material: Material, temperature: Value = REFERENCE_TEMPERATURE) -> Value | None:
    """Return the cubic expansion coefficient [1/K] at a temperature [K], or None where the table does not know it.

    That of a liquid is the slope of its formula.
    """
    if material.density is not None:
        return material.expansion
    warm, cold = (density(material, temperature + step).centre for step in (0.5, -0.5))
    return 2 * (cold - warm) / (cold + warm)


def entries(name: str, material: Material, temperature: Value | None) -> dict[str, Estimate]:
    """Return what naming a material gives: its density at a temperature [K], and for a load how it goes on from there.

    ``name`` is one of :data:`NAMED_BY`; without a temperature the density is that at 20 °C.
    """
    body = name.partition(".")[0]
    found = {f"{body}.density": density(material, REFERENCE_TEMPERATURE if temperature is None else temperature)}
    if body == "load" and temperature is not None:
        slope = expansion(material, temperature)
        if slope is not None:
            found["load.expansion"] = Estimate(slope)
            found["load.density_temperature"] = Estimate(temperature)
    return found
