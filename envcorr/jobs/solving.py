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
from envcorr.plan import Parts, Plan, is_zero
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
    "secants",
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


def plan_reading(setup: Setup, reading: Value, like: Plan | None = None) -> Plan:
    """Return the plan of the effects on a reading [kg]. What a sensor reads is uncertain by the sensor's error.

    ``like`` is an earlier one that may serve again with other numbers. Raises :class:`InputError` where the buoyancy
    cannot be computed and is not waived.
    """
    estimates = {**setup.estimates, "load.mass": Estimate(np.abs(reading))}
    choices = {**setup.choices, "target.measurand": "mass"}
    setup = replace(setup, estimates=estimates, choices=choices)
    plan = (like.renewed(setup) if like else None) or make_plan(setup, read=True)
    for missing in plan.not_assessed:
        if missing.effect.definition and missing.effect.name not in setup.waived:
            names = ", ".join(missing.lacks)
            remedy = f"Give {names}; or waive it by name: target.waived = {missing.effect.name}."
            raise InputError([Fault(missing.effect.title, f"cannot be corrected for: lacks {names}.", remedy)])
    return plan


def correctable(plan: Plan) -> list[int]:
    """Return which of the plan's effects a correction takes out."""
    return [i for i, planned in enumerate(plan.effects) if planned.correctable]


def mass_row(plan: Plan) -> int:
    """Return the leaf of the load's mass."""
    return next(row for row, leaf in enumerate(plan.leaves) if leaf.name == "load.mass")


def solve(plan: Plan, reading: Value, *, by_effect: bool = False, bands: Sequence[int] = ()) -> Solution:
    """Return the mass for which mass plus the correctable effects gives the reading [kg].

    The contributions are central differences at the solved mass, through the implicit function. ``bands`` lists effects
    that cannot be corrected but whose first-order contributions are wanted too (``effects`` of the result).
    """
    leaf_values = [leaf.estimate.centre for leaf in plan.leaves]
    mass, slope, values = secants(plan, reading, leaf_values, plan.centres())
    leaf_values[mass_row(plan)] = mass
    return _contributions(plan, mass, 1 / (1 + slope), values, leaf_values, by_effect, bands)


def secants(
    plan: Plan, reading: Value, leaf_values: list[Value], base: Sequence[Any]
) -> tuple[Value, Value, list[Any]]:
    """Return the mass [kg] behind a reading, d(added)/d(mass) there, and the values of the nodes.

    ``base`` holds the values of the nodes for ``leaf_values`` but for the mass. The effects are all but linear in the
    mass, so two steps do for most; the residual is then a few roundings.
    """
    chosen = correctable(plan)
    row = mass_row(plan)
    leaf_values = list(leaf_values)
    size = np.abs(reading)
    leaf_values[row] = reading
    values = plan.evaluate(leaf_values, base=base, changed=row)
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
    return mass, slope, values


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
    backwards = _Backwards(plan, values, leaf_values)
    parts = plan.parts(values)
    total = backwards.leaves(_seeds_of_total(plan, parts, chosen))
    contributions = _spread(plan, total, -per)
    effects: dict[int, list[Value]] = {}
    for i in [*(chosen if by_effect else ()), *bands]:
        slopes = backwards.leaves(_seeds_of_total(plan, parts, [i]))
        effects[i] = _spread(plan, slopes, per)
    targets: dict[str, tuple[Value, list[Value]]] = {}
    for name in [name for name in TARGETS if name in plan.targets] if by_effect else ():
        node = plan.targets[name]
        slopes = backwards.leaves({node: 1.0})
        direct = _spread(plan, slopes, 1.0)
        found = [own + slopes[row] * through for own, through in zip(direct, contributions, strict=True)]
        targets[name] = (values[node], found)
    return Solution(mass, per, values, contributions, effects, targets)


def _spread(plan: Plan, slopes: Sequence[Value], factor: Value) -> list[Value]:
    """Return factor times slope times u of every leaf; nothing for the mass, which is solved for, not given."""
    row = mass_row(plan)
    return [
        0.0 if j == row or leaf.estimate.is_exact or is_zero(slope) else factor * slope * leaf.estimate.u
        for j, (slope, leaf) in enumerate(zip(slopes, plan.leaves, strict=True))
    ]


def _seeds_of_total(plan: Plan, parts: Parts, chosen: Sequence[int]) -> dict[int, Value]:
    """Return the slopes of the chosen effects' total in the nodes that make it up (the product rule on Parts.total)."""
    load: Value = sum((parts.loads[i] for i in chosen), 0.0)
    gain: Value = sum((parts.gains[i] for i in chosen), 0.0)
    change: Value = sum((parts.gain_changes[i] for i in chosen), 0.0)
    seeds: dict[int, Value] = {}

    def add(node: int | None, slope: Value) -> None:
        if node is not None:
            seeds[node] = seeds.get(node, 0.0) + slope

    for i in chosen:
        pull = plan.effects[i].true
        add(pull.load, 1.0 + gain)
        add(pull.gain, parts.mass + load)
        if pull.gain != pull.gain_at_tare:
            add(pull.gain, parts.tare_load)
            add(pull.gain_at_tare, -parts.tare_load)
    add(plan.targets["mass"], gain)
    add(plan.targets["tare"], change)
    return seeds


class _Backwards:
    """Slopes of a result in every leaf, node by node from the result back (reverse accumulation).

    A law's own slopes are its derivatives where it gives them, else central differences in one input at a time; worked
    out once however many results ask.
    """

    def __init__(self, plan: Plan, values: list[Any], leaf_values: Sequence[Value]) -> None:
        self.plan, self.values = plan, values
        row = mass_row(plan)
        uncertain = [j for j, leaf in enumerate(plan.leaves) if j == row or not leaf.estimate.is_exact]
        self.active: set[int] = set().union(*(plan.reach(j) for j in uncertain))
        self.step = {plan.leaves[j].node: plan.leaves[j].estimate.u for j in uncertain if j != row}
        self.slopes: dict[int, list[Value]] = {}

    def leaves(self, seeds: dict[int, Value]) -> list[Value]:
        """Return the slope of the result in each leaf, from its slopes in some nodes."""
        held: dict[int, Value] = dict(seeds)
        for i in range(max(seeds, default=-1), -1, -1):
            node = self.plan.nodes[i]
            if i not in held or i not in self.active or node.function is None:
                continue
            for j, slope in zip(node.inputs, self._own(i), strict=True):
                if j in self.active:
                    held[j] = held.get(j, 0.0) + held[i] * slope
        return [held.get(leaf.node, 0.0) for leaf in self.plan.leaves]

    def _own(self, i: int) -> list[Value]:
        if i not in self.slopes:
            node = self.plan.nodes[i]
            assert node.function is not None
            inputs = [self.values[j] for j in node.inputs]
            if node.slopes is not None:
                self.slopes[i] = list(node.slopes(*inputs))
                return self.slopes[i]
            found: list[Value] = []
            for k, j in enumerate(node.inputs):
                if j not in self.active:
                    found.append(0.0)
                    continue
                step = self.step.get(j)
                if step is None:  # relative, and so small that no law bends within it
                    step = np.where(np.equal(inputs[k], 0.0), 1e-9, np.abs(inputs[k]) * 1e-5)[()]
                ends = [node.function(*inputs[:k], inputs[k] + s * step, *inputs[k + 1 :]) for s in (1.0, -1.0)]
                found.append((ends[0] - ends[1]) / (2 * step))
            self.slopes[i] = found
        return self.slopes[i]


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
