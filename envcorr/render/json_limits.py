"""The limits as a plain dictionary for JSON, and as rows for CSV."""

from __future__ import annotations

from typing import Any

from envcorr.estimate import Estimate
from envcorr.jobs.limits import Limit, LimitsResult, Masses
from envcorr.render.json import envelope, estimate, figure

__all__ = ["HEADERS", "limits", "rows"]

HEADERS = ("name", "label", "mode", "now", "answer", "factor", "required", "low", "high", "unit", "inside", "outside")


def limits(result: LimitsResult) -> dict[str, Any]:
    """Return the answer of ``envcorr limits``; errors in mg."""
    found = {
        "state": result.state,
        "reached": result.now.passes,
        "probability": dict(result.now.probability),
        "decisive": result.scope,
        "e95": figure(result.e95, "mass", "mg"),
        "allowed": figure(result.allowed, "mass", "mg"),
        "broken_by_balance": None
        if result.broken_by_balance is None
        else figure(result.broken_by_balance, "mass", "mg"),
        "not_assessed": list(result.missing),
        "limits": [_limit(limit) for limit in result.limits],
        "joint": {
            "names": list(result.joint.names),
            "factor": result.joint.factor,
            "reached_by_halving": result.joint.reached,
            "steps": [
                {"name": s.name, "estimate": estimate(s.estimate, s.kind), "e95": figure(s.e95, "mass", "mg")}
                for s in result.joint.steps
            ],
        },
        "worth": [
            {
                "name": one.name,
                "e95_held": figure(one.held, "mass", "mg"),
                "e95_measured": None if one.measured is None else figure(one.measured, "mass", "mg"),
            }
            for one in result.worth
        ],
        "net_mass": _masses(result.masses),
        "draws": result.draws,
        "seed": result.seed,
    }
    setup = result.setup
    return envelope(
        "limits",
        found,
        inputs={"title": setup.title, **setup.written},
        assumed=result.plan.assumed,
        unused=result.plan.unused,
    )


def _limit(limit: Limit) -> dict[str, Any]:
    return {
        "name": limit.name,
        "label": limit.label,
        "mode": limit.mode,
        "now": estimate(limit.now, limit.kind),
        "answer": limit.answer,
        "factor": limit.factor,
        "required": None if limit.required is None else estimate(limit.required, limit.kind),
        "low": None if limit.low is None else figure(limit.low, limit.kind),
        "high": None if limit.high is None else figure(limit.high, limit.kind),
        "probability_inside": limit.inside,
        "probability_outside": limit.outside,
    }


def _masses(found: Masses) -> dict[str, Any]:
    ends = {"smallest": found.smallest, "largest": found.largest}
    return {"works": found.works, **{k: None if v is None else figure(v, "mass", "g") for k, v in ends.items()}}


def rows(result: LimitsResult) -> list[tuple[Any, ...]]:
    """Return a row a quantity under :data:`HEADERS`; ``now`` and ``required`` are spreads, sizes or values."""
    found = []
    for limit in result.limits:
        kind = limit.kind
        if limit.mode == "spread":
            from envcorr import units

            kind = units.spread_kind(kind)
        ends = [None if x is None else figure(x, kind)["value"] for x in (limit.low, limit.high)]
        sizes = [None if x is None else figure(_size(x, limit), kind)["value"] for x in (limit.now, limit.required)]
        found.append(
            (
                limit.name,
                limit.label,
                limit.mode,
                sizes[0],
                limit.answer,
                limit.factor,
                sizes[1],
                *ends,
                figure(0.0, kind)["unit"],
                limit.inside,
                limit.outside,
            )
        )
    return found


def _size(one: Estimate, limit: Limit) -> float:
    """Return the one number that the limit is about [SI]."""
    return float(one.centre if limit.mode == "value" or one.is_exact else one.spread)
