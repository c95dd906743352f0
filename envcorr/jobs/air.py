"""What is the density of this air, and how well is it known?"""

from __future__ import annotations

from dataclasses import dataclass

from envcorr.errors import Fault, InputError, Notice
from envcorr.jobs.common import Contribution, correlation_matrix, notices, usual_range_notices
from envcorr.model import plan_quantities
from envcorr.plan import Assumption, Plan
from envcorr.propagation import Budget, budget, perturbed
from envcorr.setup import Setup

__all__ = ["AirResult", "air_density"]


@dataclass(frozen=True)
class AirResult:
    """Air density [kg/m³] with its uncertainty, by first order (the formula is nearly linear over any room)."""

    setup: Setup
    plan: Plan
    density: float
    u: float
    budget: Budget
    rows: tuple[Contribution, ...]
    formula: str
    vapour_fraction: float | None
    relative_humidity: float | None
    notices: tuple[Notice, ...]
    assumed: tuple[Assumption, ...]
    unused: tuple[str, ...]


def air_density(setup: Setup, *, probability: float = 0.95) -> AirResult:
    """Return the density of the air of a set-up, with the uncertainty of its inputs and of the formula itself.

    Raises :class:`InputError` where temperature, pressure or a measure of humidity is lacking.
    """
    direct = "air.density" in setup.estimates
    formula = "as given" if direct else setup.choices.get("air.formula", "CIPM-2007")
    names = ["air.density"] if direct else ["air.density", "air.vapour_fraction", "air.relative_humidity"]
    if formula == "CIPM-2007":
        names.append("air.formula_ratio")
    try:
        plan = plan_quantities(setup, names)
    except InputError as error:
        raise InputError(_shortened(error)) from None
    estimates = [leaf.estimate for leaf in plan.leaves]
    inputs, spread = perturbed(estimates)
    node = plan.targets["air.density"]
    found = budget(
        plan.evaluate(inputs)[node],
        estimates,
        spread,
        probability=probability,
        correlation=correlation_matrix(plan),
    )
    centres = plan.centres()
    ratio = float(centres[plan.targets["air.formula_ratio"]]) if "air.formula_ratio" in plan.targets else 1.0
    rows = tuple(
        Contribution(
            leaf.name,
            leaf.place.label,
            leaf.place.kind,
            leaf.estimate,
            leaf.origin,
            float(found.contributions[i]),
        )
        for i, leaf in enumerate(plan.leaves)
        if node in plan.reach(i)
    )
    return AirResult(
        setup=setup,
        plan=plan,
        density=found.value,
        u=found.u,
        budget=found,
        rows=tuple(sorted(rows, key=lambda row: -abs(row.contribution))),
        formula=formula if ratio == 1.0 else f"{formula} scaled to CoolProp's humid air",
        vapour_fraction=None if direct else float(centres[plan.targets["air.vapour_fraction"]]),
        relative_humidity=None if direct else float(centres[plan.targets["air.relative_humidity"]]),
        notices=(*usual_range_notices(plan), *notices(plan, centres)),
        assumed=plan.assumed,
        unused=plan.unused,
    )


def _shortened(error: InputError) -> list[Fault]:
    """Keep what is wrong with the density itself; the rest follows from it."""
    return [fault for fault in error.faults if fault.where == "air.density"] or list(error.faults)
