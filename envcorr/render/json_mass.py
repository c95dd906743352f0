"""A mass as a plain dictionary for JSON."""

from __future__ import annotations

from typing import Any

from envcorr.jobs.mass import MassResult, Told
from envcorr.render.json import envelope, estimate, figure

__all__ = ["mass"]


def mass(result: MassResult) -> dict[str, Any]:
    """Return the answer of ``envcorr mass`` for one reading; masses in g, corrections and contributions in mg."""
    low, high = result.mass.value - result.expanded, result.mass.value + result.expanded
    found = {
        "mass": figure(
            result.mass.value,
            "mass",
            "g",
            u=result.mass.u,
            U=result.expanded,
            k=result.k,
            dof=result.dof,
            coverage_interval=[low, high],
            coverage_probability=result.probability,
        ),
        "conventional_mass": _told(result.conventional_mass, "mass", "g"),
        "volume": _told(result.volume, "volume", "mL"),
        "reading": _told(result.reading, "mass", "g"),
        "correction": figure(result.correction, "mass", "mg", u=result.mass.u),
        "air_density": _told(result.air_density, "density", "kg/m³"),
        "budget": {
            "quantities": [
                {
                    "name": row.name,
                    "label": row.label,
                    "taken_as": estimate(row.estimate, row.kind),
                    "origin": row.origin,
                    "contribution": figure(row.contribution, "mass", "mg"),
                }
                for row in result.quantities
            ],
            "effects": [
                {
                    "name": row.name,
                    "title": row.title,
                    "correction": None if row.correction is None else figure(row.correction, "mass", "mg"),
                    "u": figure(row.u, "mass", "mg"),
                    "way": list(row.ways),
                    "source": row.source,
                }
                for row in result.effects
            ],
        },
        "not_assessed": [{"name": n.effect.name, "lacks": list(n.lacks)} for n in result.not_assessed],
        "seed": result.seed,
    }
    setup = result.setup
    inputs = {"title": setup.title, **setup.written}
    return envelope("mass", found, inputs=inputs, assumed=result.assumed, unused=result.unused, notices=result.notices)


def _told(told: Told | None, kind: str, unit: str) -> dict[str, Any] | None:
    return None if told is None else figure(told.value, kind, unit, u=told.u)
