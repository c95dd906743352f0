"""A map or a curve as a plain dictionary for JSON, and as rows for CSV."""

from __future__ import annotations

from typing import Any

import numpy as np

from envcorr import units
from envcorr.jobs.map import Axis, Curve, Grid
from envcorr.render.json import envelope, figure

__all__ = ["curve", "curve_rows", "grid", "grid_rows"]


def _axis(axis: Axis) -> dict[str, Any]:
    unit = units.fitting_unit(float(axis.values[-1]), axis.kind)
    return {
        "name": axis.name,
        "label": axis.label,
        "varied": axis.varied,
        "values": figure([float(v) for v in axis.values], axis.kind, unit),
        "now": figure(axis.now, axis.kind, unit),
        "logarithmic": axis.logarithmic,
    }


def _rest(result: Grid | Curve) -> dict[str, Any]:
    return {
        "state": result.state,
        "demanded_probability": result.target.probability,
        "not_assessed": list(result.missing),
        "draws": result.draws,
        "seed": result.seed,
    }


def grid(result: Grid) -> dict[str, Any]:
    """Return the answer of ``envcorr map`` over two quantities; rows of the probability go along y."""
    found = {
        "x": _axis(result.x),
        "y": _axis(result.y),
        "probability": result.probability.tolist(),
        "reached": result.reached.tolist(),
        **_rest(result),
    }
    return envelope("map", found, inputs={"title": result.setup.title, **result.setup.written})


def curve(result: Curve) -> dict[str, Any]:
    """Return the answer of ``envcorr map`` over one quantity; errors in mg."""
    found = {
        "x": _axis(result.x),
        "scope": result.scope,
        "mean_error": figure([float(v) for v in result.mean], "mass", "mg"),
        "low": figure([float(v) for v in result.low], "mass", "mg"),
        "high": figure([float(v) for v in result.high], "mass", "mg"),
        "probability": result.probability.tolist(),
        "allowed": figure(result.allowed, "mass", "mg"),
        **_rest(result),
    }
    return envelope("map", found, inputs={"title": result.setup.title, **result.setup.written})


def _header(axis: Axis) -> str:
    unit = units.fitting_unit(float(axis.values[-1]), axis.kind)
    name = axis.name if axis.varied == "value" else f"{axis.name} spread"
    return f"{name} [{unit}]" if unit else name


def _column(axis: Axis) -> list[float]:
    unit = units.fitting_unit(float(axis.values[-1]), axis.kind)
    return [float(units.to_unit(v, axis.kind, unit)) for v in axis.values]


def grid_rows(result: Grid) -> tuple[tuple[str, ...], list[tuple[Any, ...]]]:
    """Return headers, and a row for each point."""
    x, y = _column(result.x), _column(result.y)
    rows = [
        (x[j], y[i], None if np.isnan(p) else float(p), "not computed" if np.isnan(p) else "yes" if r else "no")
        for i, (row, marks) in enumerate(zip(result.probability, result.reached, strict=True))
        for j, (p, r) in enumerate(zip(row, marks, strict=True))
    ]
    return (_header(result.x), _header(result.y), "conformance probability", "reached"), rows


def curve_rows(result: Curve) -> tuple[tuple[str, ...], list[tuple[Any, ...]]]:
    """Return headers, and a row for each point; errors in mg."""
    columns = [
        [None if np.isnan(v) else float(units.to_unit(v, "mass", "mg")) for v in values]
        for values in (result.mean, result.low, result.high)
    ]
    chance = [None if np.isnan(p) else float(p) for p in result.probability]
    headers = (_header(result.x), "mean error [mg]", "from [mg]", "to [mg]", "conformance probability")
    return headers, list(zip(_column(result.x), *columns, chance, strict=True))
