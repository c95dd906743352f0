"""A mass as a plain dictionary for JSON."""

from __future__ import annotations

from typing import Any

from envcorr.jobs.mass import MassResult, Told
from envcorr.jobs.mass_file import TableSummary
from envcorr.render.json import envelope, estimate, figure

__all__ = ["mass", "table"]


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
        "by_draws": {
            name.removeprefix("load."): {
                "u": figure(one.u, "mass", "mg"),
                "coverage_interval": [figure(one.low, "mass", "g"), figure(one.high, "mass", "g")],
                "coverage_probability": result.probability,
                "draws": one.size,
                "first_order_agrees": one.agrees,
            }
            for name, one in result.by_draws.items()
        }
        or None,
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


def table(summary: TableSummary) -> dict[str, Any]:
    """Return the answer of ``envcorr mass`` for a table: what was understood, and what became of its rows."""
    found = {
        "source": summary.source,
        "written": summary.written,
        "columns": [
            {"header": one.header, "name": one.name, "unit": one.unit, "spread": one.spread}
            for one in summary.layout.fields
        ],
        "decimal_mark": "," if summary.layout.comma else ".",
        "rows": summary.rows,
        "computed": summary.rows - summary.failed,
        "not_computed": summary.failed,
        "reasons": summary.faults,
        "row_notices": summary.notices,
        "sums": summary.sums,
        "k": summary.k,
        "coverage_probability": summary.probability,
    }
    return envelope("mass", found, assumed=list(summary.assumed.values()))
