"""The reading solved for the mass, with first-order contributions: for one reading, or for columns of them at once."""

from __future__ import annotations

import math
from collections.abc import Sequence
from dataclasses import dataclass, field, replace
from typing import Any

import numpy as np

from envcorr.errors import Fault, InputError
from envcorr.estimate import Estimate, Value
from envcorr.jobs.weighings import Run
from envcorr.model import make_plan
from envcorr.plan import Plan
from envcorr.propagation import FIRST_BATCHES, draws
from envcorr.setup import Setup

__all__ = [
    "ALIKE",
    "TARGETS",
    "Solution",
    "bands_by_draws",
    "correctable",
    "mass_row",
    "plan_reading",
    "reading_of",
    "solve",
]

TARGETS = ("load.conventional_mass", "load.volume", "air.density")
"""What is told beside the mass."""
CLOSE = 1e-15
"""Relative residual at which the mass is solved (a few roundings)."""
ALIKE = 0.02
"""How far first order and draws may lie apart for a band to be taken by first order (judgement)."""


@dataclass(frozen=True)
class Solution:
    """A solved mass [kg]; floats, or columns. ``contributions`` holds sensitivity times u of every leaf [kg], signed.

    ``effects`` holds the same for the correction of each effect, where it was asked for; ``targets`` value and
    contributions of what is told beside the mass.
    """

    mass: Value
    per: Value
    """Change of the mass with the reading (a number)."""
    values: list[Any]
    contributions: list[Value]
    effects: dict[int, list[Value]] = field(default_factory=dict)
    targets: dict[str, tuple[Value, list[Value]]] = field(default_factory=dict)


def reading_of(setup: Setup) -> Estimate:
    """Return the net reading [kg]: as given, or gross less tare with both uncertainties.

    Raises :class:`InputError` where there is none.
    """
    given = setup.estimates
    if "reading" in given:
        return given["reading"]
    if "gross" in given and "tare" in given:
        gross, tare = given["gross"], given["tare"]
        u = np.hypot(gross.u, tare.u)
        return Estimate(gross.centre - tare.centre, "normal" if np.any(u) else "fixed", u)
    fault = Fault("reading", "is not given.", 'Give the net reading, such as "1.25000 g", or gross and tare.')
    raise InputError([fault])


def plan_reading(setup: Setup, reading: Value) -> Plan:
    """Return the plan of the effects on a reading [kg]. What a sensor reads is uncertain by the sensor's error.

    Raises :class:`InputError` where the buoyancy cannot be computed and is not waived.
    """
    estimates = {**setup.estimates, "load.mass": Estimate(np.abs(reading))}
    choices = {**setup.choices, "target.measurand": "mass"}
    plan = make_plan(replace(setup, estimates=estimates, choices=choices), read=True)
    for missing in plan.not_assessed:
        if missing.effect.definition and missing.effect.name not in setup.waived:
            names = ", ".join(missing.lacks)
            remedy = f"Give {names}; or waive it by name: target.waived = {missing.effect.name}."
            raise InputError([Fault(missing.effect.title, f"cannot be corrected for: lacks {names}.", remedy)])
    return plan


def correctable(plan: Plan) -> list[int]:
    """Return which of the plan's effects a correction takes out."""
    return [i for i, planned in enumerate(plan.effects) if planned.effect.correctable]


def mass_row(plan: Plan) -> int:
    """Return the leaf of the load's mass."""
    return next(row for row, leaf in enumerate(plan.leaves) if leaf.name == "load.mass")


def solve(plan: Plan, reading: Value, *, by_effect: bool = False, bands: Sequence[int] = ()) -> Solution:
    """Return the mass for which mass plus the correctable effects gives the reading [kg], by secants.

    The effects are all but linear in the mass, so two steps do for most; the residual is then a few roundings. The
    contributions are central differences at the solved mass, through the implicit function. ``bands`` lists effects
    that cannot be corrected but whose first-order contributions are wanted too (``effects`` of the result).
    """
    chosen = correctable(plan)
    row = mass_row(plan)
    leaf_values = [leaf.estimate.centre for leaf in plan.leaves]
    size = np.abs(reading)
    leaf_values[row] = reading
    values = plan.evaluate(leaf_values)
    added = plan.parts(values).total(chosen)
    before: Value = reading
    mass: Value = reading - added
    slope: Value = 0.0
    for _ in range(12):
        leaf_values[row] = mass
        values = plan.evaluate(leaf_values, base=values, changed=row)
        added, last = plan.parts(values).total(chosen), added
        step = mass - before
        with np.errstate(divide="ignore", invalid="ignore"):
            change = np.divide(added - last, step)
        slope = np.where(np.abs(step) > 1e-9 * size, change, slope)[()]
        residual = mass + added - reading
        if np.all(np.abs(residual) <= CLOSE * size):
            break
        before, mass = mass, mass - residual / (1 + slope)
    return _contributions(plan, mass, 1 / (1 + slope), values, leaf_values, by_effect, bands)


def _contributions(
    plan: Plan,
    mass: Value,
    per: Value,
    values: list[Any],
    leaf_values: list[Value],
    by_effect: bool,
    bands: Sequence[int],
) -> Solution:
    chosen = correctable(plan)
    row = mass_row(plan)
    several = [*(chosen if by_effect else ()), *bands]
    names = [name for name in TARGETS if name in plan.targets] if by_effect else []
    contributions: list[Value] = []
    effects: dict[int, list[Value]] = {i: [] for i in several}
    targets: dict[str, tuple[Value, list[Value]]] = {name: (values[plan.targets[name]], []) for name in names}
    slopes = _slopes_in_mass(plan, row, mass, values, leaf_values, names)
    for j, leaf in enumerate(plan.leaves):
        if leaf.estimate.is_exact or not plan.reach(j):
            contributions.append(0.0)
            for found in (*effects.values(), *(pair[1] for pair in targets.values())):
                found.append(0.0)
            continue
        ends, at = [], []
        for sign in (0.5, -0.5):
            moved = list(leaf_values)
            moved[j] = leaf.estimate.centre + 2 * sign * leaf.estimate.u
            there = plan.evaluate(moved, base=values, changed=j)
            parts = plan.parts(there)
            ends.append((sign, parts))
            at.append((sign, there))
        moved_by = -per * _sum(sign * parts.total(chosen) for sign, parts in ends)
        contributions.append(moved_by)
        for i in several:
            effects[i].append(per * _sum(sign * parts.effect(i) for sign, parts in ends))
        for name in names:
            direct = _sum(sign * there[plan.targets[name]] for sign, there in at)
            targets[name][1].append(direct + slopes[name] * moved_by)
    return Solution(mass, per, values, contributions, effects, targets)


def _sum(terms: Any) -> Value:
    total: Value = 0.0
    for term in terms:
        total = total + term
    return total


def _slopes_in_mass(
    plan: Plan, row: int, mass: Value, values: list[Any], leaf_values: list[Value], names: Sequence[str]
) -> dict[str, Value]:
    """Return the change of each target with the mass; all are linear in it."""
    if not names:
        return {}
    moved = list(leaf_values)
    moved[row] = mass * 1.5
    there = plan.evaluate(moved, base=values, changed=row)
    with np.errstate(divide="ignore", invalid="ignore"):
        found = {n: np.nan_to_num((there[plan.targets[n]] - values[plan.targets[n]]) / (mass * 0.5)) for n in names}
    return found


def bands_by_draws(plan: Plan, mass: float, *, seed: int = 0, repeats: int = 1) -> dict[int, float]:
    """Return the root mean square about zero [kg] of every effect that cannot be corrected, for a load of ``mass``."""
    row = mass_row(plan)
    leaves = list(plan.leaves)
    leaves[row] = replace(leaves[row], estimate=Estimate(mass))
    fixed = replace(plan, leaves=tuple(leaves))
    able = correctable(plan)
    run = Run(fixed, draws(len(leaves), FIRST_BATCHES, seed), None, repeats)
    rest = [i for i in range(len(plan.effects)) if i not in able]
    return {i: math.sqrt(float(np.mean(np.square(run.result.effect("as_read", i))))) for i in rest}
