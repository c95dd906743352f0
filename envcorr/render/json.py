"""Results as plain dictionaries for JSON: full precision, every number with its unit, never NaN or infinity.

A number with a unit is a figure, ``{"value": 1.2, "unit": "kg/m³"}``, with ``u``, ``U``, ``k``, ``dof``,
``coverage_interval`` and ``coverage_probability`` as far as it has them, in the same unit; shares and probabilities
are bare numbers. Errors are in mg. What is infinite or not known is null.
"""

from __future__ import annotations

import json
import math
from collections.abc import Mapping, Sequence
from typing import Any

import envcorr
from envcorr import units
from envcorr.errors import Notice
from envcorr.estimate import Estimate
from envcorr.jobs.air import AirResult
from envcorr.jobs.minimum_weight import Least, MinimumWeight
from envcorr.jobs.room import SCOPES, EffectRow, FirstOrder, QuantityRow, RoomResult, Total
from envcorr.jobs.verdict import Figures
from envcorr.jobs.weighings import STATES
from envcorr.plan import Assumption
from envcorr.setup import Setup

__all__ = ["air", "dumps", "envelope", "estimate", "figure", "room"]

ERRORS_IN = "mg"


def dumps(document: Mapping[str, Any], *, encoding: str = "utf-8") -> str:
    """Return the document as JSON text, with escapes where the encoding lacks a sign."""
    text = json.dumps(_finite(document), indent=2, ensure_ascii=False, allow_nan=False)
    try:
        text.encode(encoding)
    except (UnicodeEncodeError, LookupError):
        text = json.dumps(_finite(document), indent=2, allow_nan=False)
    return text


def _finite(thing: Any) -> Any:
    """Return the thing with plain numbers and lists, and None for what is not finite."""
    if isinstance(thing, Mapping):
        return {key: _finite(value) for key, value in thing.items()}
    if isinstance(thing, tuple | list):
        return [_finite(value) for value in thing]
    if isinstance(thing, float):
        return float(thing) if math.isfinite(thing) else None
    return thing


def envelope(
    command: str,
    result: Mapping[str, Any],
    *,
    inputs: Mapping[str, Any] | None = None,
    assumed: Sequence[Assumption] = (),
    unused: Sequence[str] = (),
    notices: Sequence[Notice] = (),
) -> dict[str, Any]:
    """Return what every answer is wrapped in."""
    return {
        "envcorr": envcorr.__version__,
        "command": command,
        "inputs": dict(inputs or {}),
        "assumed": [_assumed(one) for one in assumed],
        "unused": list(unused),
        "result": dict(result),
        "notices": [
            {"level": n.level, "where": n.where, "sentence": n.sentence, "source": n.source, "share": n.share}
            for n in notices
        ],
    }


def _size(value: float, kind: str, unit: str) -> float:
    return float(units.to_unit(value, kind, unit))


def figure(value: float | Sequence[float] | None, kind: str, unit: str = "", **more: Any) -> dict[str, Any]:
    """Return a figure from SI values of a kind; ``u``, ``U`` and ``coverage_interval`` in ``more`` are SI, too."""
    unit = unit or units.KINDS[kind].shown
    spread, spread_unit = units.spread_kind(kind), "K" if kind == "temperature" else unit

    def shown(size: Any) -> Any:
        if isinstance(size, Sequence):
            return [shown(one) for one in size]
        return size if size is None else _size(size, kind, unit)

    found: dict[str, Any] = {"value": shown(value), "unit": unit}
    for key, size in more.items():
        if key in ("u", "U", "standard_error") and size is not None:
            found[key] = _size(size, spread, spread_unit)
        else:
            found[key] = shown(size) if key == "coverage_interval" else size
    return found


def estimate(found: Estimate, kind: str, *, sensor: bool = False) -> dict[str, Any]:
    """Return an estimate as a figure with its distribution; the error of a sensor is a difference."""
    kind = units.spread_kind(kind) if sensor else kind
    low, high = (float(bound) for bound in found.bounds)
    more: dict[str, Any] = {} if found.is_exact else {"u": float(found.u), "distribution": found.shape}
    if math.isfinite(found.dof):
        more["dof"] = found.dof
    result = figure(float(found.centre), kind, **more)
    if not found.is_exact and math.isfinite(low):
        result["bounds"] = [_size(bound, kind, result["unit"]) for bound in (low, high)]
    return result


def _assumed(one: Assumption) -> dict[str, Any]:
    taken: dict[str, Any] = estimate(one.estimate, one.kind) if one.estimate else {"word": one.word}
    return {"name": one.name, "label": one.label, **taken, "source": one.source}


def _inputs(setup: Setup, kinds: Mapping[str, tuple[str, bool]]) -> dict[str, Any]:
    """Return what was given, by dotted name: as it was written, and as it was read."""
    found: dict[str, Any] = {"title": setup.title} if setup.title else {}
    for name, given in setup.estimates.items():
        kind, sensor = kinds[name]
        found[name] = {**estimate(given, kind, sensor=sensor), "written": setup.written.get(name)}
    found.update(setup.choices)
    if setup.waived:
        found["target.waived"] = sorted(setup.waived)
    if setup.improvable:
        found["target.improvable"] = list(setup.improvable)
    if setup.correlations:
        found["correlation"] = [
            {"between": [one.first, one.second], "coefficient": one.coefficient} for one in setup.correlations
        ]
    return found


def _kinds(result: AirResult | RoomResult) -> dict[str, tuple[str, bool]]:
    places = {name: result.plan.catalogue.find(name) for name in result.setup.estimates}
    return {name: (place.quantity.kind, place.sensor) for name, place in places.items() if place}


def _wrap(command: str, result: AirResult | RoomResult, found: Mapping[str, Any]) -> dict[str, Any]:
    return envelope(
        command,
        found,
        inputs=_inputs(result.setup, _kinds(result)),
        assumed=result.assumed,
        unused=result.unused,
        notices=result.notices,
    )


# One function a job ----------------------------------------------------------------------------------------


def air(result: AirResult) -> dict[str, Any]:
    """Return an air density."""
    found = result.budget
    density = figure(
        result.density,
        "density",
        u=result.u,
        U=found.expanded,
        k=found.k,
        dof=found.dof,
        coverage_interval=found.interval,
        coverage_probability=found.probability,
    )
    humidity, vapour = result.relative_humidity, result.vapour_fraction
    budget = [
        {
            "name": row.name,
            "label": row.label,
            "origin": row.origin,
            "estimate": estimate(row.estimate, row.kind),
            "contribution": figure(row.contribution, "density"),
            "share": row.contribution**2 / result.u**2 if result.u else 0.0,
        }
        for row in result.rows
    ]
    return _wrap(
        "air",
        result,
        {
            "air_density": density,
            "formula": result.formula,
            "relative_humidity": None if humidity is None else figure(humidity, "fraction"),
            "vapour_fraction": None if vapour is None else figure(vapour, "fraction"),
            "budget": budget,
        },
    )


def room(result: RoomResult) -> dict[str, Any]:
    """Return a room check."""
    verdict = result.verdict
    found: dict[str, Any] = {
        "verdict": verdict.answer,
        "verdict_reason": verdict.reason,
        "limited_by_balance": verdict.limited_by_balance,
        "treat": list(verdict.treat),
        "first_to_improve": verdict.first_to_improve,
        "target": {
            "resolution": _error(result.resolution),
            "within": result.within,
            "probability": result.probability,
            "measurand": result.measurand,
        },
        "basis": result.basis,
        "decisive": result.decisive,
    }
    for state in STATES:
        found[state] = _total(result.total(state))
    found["effects"] = [_effect(row, result.probability) for row in result.effects]
    found["interaction"] = {"mean_error": _error(result.interaction), "share": dict(result.interaction_share)}
    found["quantities"] = [_quantity(row) for row in result.quantities]
    found["not_assessed"] = [
        {"name": one.effect.name, "title": one.effect.title, "lacks": list(one.lacks)} for one in result.not_assessed
    ]
    found["first_order"] = _first_order(result.first_order)
    found["minimum_weight"] = _minimum_weight(result.minimum_weight)
    found["difference_resolution"] = {s: _error(result.difference_resolution[s]) for s in STATES}
    found["draws"], found["seed"] = result.draws, result.seed
    return _wrap("room", result, found)


def _error(value: float | Sequence[float] | None, **more: Any) -> dict[str, Any]:
    return figure(value, "mass", ERRORS_IN, **more)


def _total(total: Total) -> dict[str, Any]:
    return {scope: _figures(getattr(total, scope)) for scope in SCOPES}


def _figures(found: Figures) -> dict[str, Any]:
    one = found.summary
    return {
        "mean_error": _error(one.mean),
        "u": _error(one.u),
        "coverage_interval": _error(one.interval, coverage_probability=one.probability),
        "coverage_interval_standard_error": _error(one.interval_error),
        "shortest_coverage_interval": _error(one.shortest, coverage_probability=one.probability),
        "e95": _error(one.largest, standard_error=one.largest_error),
        "supported_resolution": _error(found.supported_resolution),
        "conformance_probability": found.conformance_probability,
        "conformance_probability_standard_error": found.probability_error,
        "allowed": _error(found.bound),
        "passes": found.passes,
    }


def _effect(row: EffectRow, probability: float) -> dict[str, Any]:
    return {
        "name": row.name,
        "title": row.title,
        "own": row.own,
        "mean_error": _error(row.mean_error),
        "u": _error(row.u),
        "scatter": _error(row.scatter),
        "coverage_interval": _error(row.interval, coverage_probability=probability),
        "share": {scope: row.share.get(scope) for scope in SCOPES},
        "e95_without": _error(row.e95_without),
        "correction": None if row.correction is None else _error(row.correction),
        "treatment": row.treatment or None,
        "leaves": row.leaves or None,
        "passes_without": row.passes_without,
        "way": list(row.ways),
        "first_order_u": _error(row.first_order_u),
        "answers": [{"label": one.label, **figure(one.value, one.kind)} for one in row.answers],
        "test": row.test or None,
        "caution": row.caution or None,
        "source": row.source,
    }


def _quantity(row: QuantityRow) -> dict[str, Any]:
    return {
        "name": row.name,
        "label": row.label,
        "origin": row.origin,
        "varies": row.varies,
        "sensor": row.sensor,
        "estimate": estimate(row.estimate, row.kind, sensor=row.sensor),
        "share": row.share,
        "e95_without": _error(row.e95_without),
        "together_with": list(row.together_with),
    }


def _first_order(first: FirstOrder) -> dict[str, Any]:
    found = first.budget
    return {
        "error": _error(
            found.value,
            u=found.u,
            U=found.expanded,
            k=found.k,
            dof=found.dof,
            coverage_interval=found.interval,
            coverage_probability=found.probability,
        ),
        "difference": _error(first.difference),
        "tolerance": _error(first.tolerance),
        "agrees": first.agrees,
        "blind_to": list(first.blind_to),
    }


def _minimum_weight(found: MinimumWeight) -> dict[str, Any]:
    result: dict[str, Any] = {"relative_accuracy": found.accuracy}
    for name in ("repeatability", "as_read", "corrected"):
        least: Least = getattr(found, name)
        result[name] = None if least.mass is None else _error(least.mass)
        if least.mass is None:
            result[f"{name}_reason"] = least.reason
    return result
