"""Can this room reach the target resolution, and what spoils it?

The error is the measured result less the measurand, on Monte Carlo draws; three totals of it are looked at: *as read*,
*corrected* (less what a correction with the stated sensors would take out, solved for the mass) and *treated*
(corrected, with every effect that names a treatment set to zero), each for the surroundings alone and for the whole
weighing.
"""

from __future__ import annotations

import math
from collections.abc import Sequence
from dataclasses import dataclass, replace
from typing import Any

import numpy as np

from envcorr.errors import Notice
from envcorr.estimate import Estimate, Value
from envcorr.jobs.common import correlation_matrix, notices, usual_range_notices
from envcorr.jobs.minimum_weight import MinimumWeight, minimum_weight
from envcorr.jobs.verdict import Figures, Target, Total, Verdict, figures, give_verdict, judge, target_of
from envcorr.jobs.weighings import STATES, Run, Scope, State, Weighings, run_weighings, scope_of
from envcorr.model import make_plan
from envcorr.plan import Assumption, NotAssessed, Plan, PlannedEffect
from envcorr.propagation import (
    Budget,
    Summary,
    budget,
    combine,
    interval_with,
    largest_with,
    numerical_tolerance,
    perturbed,
)
from envcorr.setup import Setup

__all__ = [
    "SCOPES",
    "AnswerRow",
    "EffectRow",
    "Figures",
    "FirstOrder",
    "QuantityRow",
    "RoomResult",
    "Total",
    "Verdict",
    "check_room",
]

SCOPES: tuple[Scope, ...] = ("surroundings", "whole")


@dataclass(frozen=True, slots=True)
class AnswerRow:
    """A figure that an effect gives of its own: ``value`` in SI units of ``kind``."""

    label: str
    kind: str
    value: float


@dataclass(frozen=True, slots=True)
class EffectRow:
    """One effect on one weighing: errors in kg, shares of the mean squared error of the basis total."""

    name: str
    title: str
    own: bool
    mean_error: float
    u: float
    scatter: float
    interval: tuple[float, float]
    share: dict[Scope, float]
    e95_without: float
    correction: float | None
    treatment: str
    leaves: str
    ways: tuple[str, ...]
    first_order_u: float
    answers: tuple[AnswerRow, ...]
    passes_without: bool | None
    """Whether the corrected totals pass with this effect treated; None where too near, or not treatable."""
    test: str
    caution: str
    source: str


@dataclass(frozen=True, slots=True)
class QuantityRow:
    """One quantity: what it was taken as, and the e95 [kg] of the decisive total were it at its best estimate."""

    name: str
    label: str
    kind: str
    estimate: Estimate
    origin: str
    varies: str
    sensor: bool
    share: float
    e95_without: float
    together_with: tuple[str, ...] = ()


@dataclass(frozen=True, slots=True)
class FirstOrder:
    """First order (JCGM 100) beside Monte Carlo for the whole basis total, compared after JCGM 101:2008, clause 8."""

    budget: Budget
    difference: tuple[float, float]
    tolerance: float
    agrees: bool
    blind_to: tuple[str, ...]
    """Effects that have a spread which first order reads as less than half of it."""


@dataclass(frozen=True)
class RoomResult:
    """Everything that a room check found. Masses and errors in kg."""

    setup: Setup
    plan: Plan
    resolution: float
    within: float
    probability: float
    measurand: str
    verdict: Verdict
    basis: State
    decisive: Scope
    as_read: Total
    corrected: Total
    treated: Total
    difference_resolution: dict[State, float]
    """The resolution supported for the difference of two weighings of one load [kg], by the whole error."""
    effects: tuple[EffectRow, ...]
    quantities: tuple[QuantityRow, ...]
    correction: float
    """What to add to the reading for all correctable effects together, at the best estimates [kg]."""
    interaction: float
    interaction_share: dict[Scope, float]
    first_order: FirstOrder
    not_assessed: tuple[NotAssessed, ...]
    assumed: tuple[Assumption, ...]
    unused: tuple[str, ...]
    minimum_weight: MinimumWeight
    notices: tuple[Notice, ...]
    draws: int
    seed: int

    def total(self, state: State) -> Total:
        """Return one of the three totals."""
        found: Total = getattr(self, state)
        return found


def check_room(
    setup: Setup,
    *,
    draws: int | None = None,
    seed: int = 0,
    as_read: bool = False,
) -> RoomResult:
    """Check whether the room lets a weighing reach its target (JCGM 101:2008; see the module's text).

    ``draws`` fixes their number (rounded up to a multiple of 1024, at least 16 x 1024); without it their number grows
    until twice the standard error of the coverage interval's end points is within the numerical tolerance of u to two
    digits (JCGM 101:2008, 7.9). ``as_read`` bases shares and the first thing to improve on the total as read.
    Raises :class:`InputError` where the mass or the target resolution is not given.
    """
    plan = make_plan(setup)
    target, accuracy = target_of(plan)
    repeats = setup.estimates.get("cycle.repeats", Estimate(1.0))
    correlation = correlation_matrix(plan)
    run = run_weighings(
        plan, correlation, round(float(repeats.centre)), draws, seed, target.probability, target.measurand
    )
    totals = _totals(run, target)
    basis: State = "as_read" if as_read else "corrected"
    decisive: Scope = "whole" if totals[basis].surroundings.passes else "surroundings"
    effects = _effect_rows(run, target, basis, decisive)
    single, first = _first_order(run, basis, totals[basis].whole.summary, correlation)
    effects = tuple(replace(row, first_order_u=u) for row, u in zip(effects, single, strict=True))
    improve = min(effects, key=lambda row: row.e95_without).name if effects else ""
    whole = scope_of(plan, "whole")
    least = minimum_weight(plan, run.some_leaves, run.some.sets[0], probability=target.probability, accuracy=accuracy)
    together = run.first.error("as_read", whole)
    explained = sum(float(np.mean(run.first.effect("as_read", i))) for i in whole)
    one, other = (run.result, None) if run.difference else (run.some_result, run.some_again)
    return RoomResult(
        setup=setup,
        plan=plan,
        resolution=target.resolution,
        within=target.within,
        probability=target.probability,
        measurand=target.measurand,
        verdict=give_verdict(run, target, totals, improve),
        basis=basis,
        decisive=decisive,
        as_read=totals["as_read"],
        corrected=totals["corrected"],
        treated=totals["treated"],
        difference_resolution={
            state: largest_with(
                one.error(state, whole) - (other.error(state, whole) if other else 0.0), target.probability
            )
            for state in STATES
        },
        effects=effects,
        quantities=_quantity_rows(run, target, basis, decisive, correlation),
        correction=-float(plan.parts(plan.centres(), known=True).total(whole)),
        interaction=float(np.mean(together)) - explained,
        interaction_share={
            scope: 1.0 - sum(row.share[scope] for row in effects if scope in row.share) for scope in SCOPES
        },
        first_order=replace(first, blind_to=_blind_to(effects)),
        not_assessed=plan.not_assessed,
        assumed=plan.assumed,
        unused=plan.unused,
        minimum_weight=least,
        notices=(*usual_range_notices(plan), *notices(plan, run.base), *least.notices),
        draws=run.drawn.size,
        seed=seed,
    )


def _totals(run: Run, target: Target) -> dict[State, Total]:
    def total(state: State) -> Total:
        errors = {scope: run.result.error(state, scope_of(run.plan, scope)) for scope in SCOPES}
        surroundings, whole = (figures(errors[s], run.drawn.size, target, s) for s in SCOPES)
        return Total(surroundings, whole)

    found = {state: total(state) for state in STATES[:2]}
    able = any(planned.effect.treatment for planned in run.plan.effects)
    return {**found, "treated": total("treated") if able else found["corrected"]}


def _mean_product(first: Value, second: Value) -> float:
    if np.ndim(first) and np.ndim(second):
        return float(np.einsum("i,i", first, second)) / np.size(first)  # no threads, no temporary
    return float(np.mean(np.multiply(first, second)))


def _mean_square(error: Value) -> float:
    return _mean_product(error, error)


def _effect_rows(run: Run, target: Target, basis: State, decisive: Scope) -> tuple[EffectRow, ...]:
    plan, probability = run.plan, target.probability
    totals = {scope: run.result.error(basis, scope_of(plan, scope)) for scope in SCOPES}
    squares = {scope: _mean_square(total) for scope, total in totals.items()}
    known = plan.parts(plan.centres(), known=True)
    another = Weighings(plan, run.some_again.sets[:1])
    chosen = scope_of(plan, decisive)
    ratio = run.ratio(basis, chosen, probability)
    rows = []
    for i, planned in enumerate(plan.effects):
        effect = planned.effect
        left = run.result.effect(basis, i)
        one = run.first.effect("as_read", i)  # an effect's own figures describe one weighing
        others = [j for j in chosen if j != i]
        change = run.some.effect("as_read", i) - another.effect("as_read", i)
        rows.append(
            EffectRow(
                name=effect.name,
                title=effect.title,
                own=effect.own,
                mean_error=float(np.mean(one)),
                u=float(np.std(one)),
                scatter=float(np.sqrt(_mean_square(change) / 2)),
                interval=interval_with(one, probability),
                share={
                    scope: _mean_product(left, totals[scope]) / squares[scope] if squares[scope] else 0.0
                    for scope in SCOPES
                    if scope == "whole" or not effect.own
                },
                e95_without=ratio * largest_with(run.some_result.error(basis, others), probability),
                correction=-float(known.effect(i, defines=effect.definition)) if planned.correctable else None,
                treatment=effect.treatment,
                leaves=effect.leaves,
                ways=planned.ways,
                first_order_u=0.0,
                answers=_answers(plan, planned),
                passes_without=judge(run, target, "corrected", [i]) if effect.treatment else None,
                test=effect.test,
                caution=effect.caution,
                source=effect.source,
            )
        )
    return tuple(rows)


def _answers(plan: Plan, planned: PlannedEffect) -> tuple[AnswerRow, ...]:
    centres = plan.centres()
    found = [(answer, float(answer.function(*[centres[i] for i in inputs]))) for answer, inputs in planned.answers]
    return tuple(AnswerRow(answer.label, answer.kind, value) for answer, value in found if math.isfinite(value))


def _quantity_rows(
    run: Run, target: Target, basis: State, decisive: Scope, correlation: Any
) -> tuple[QuantityRow, ...]:
    plan, probability = run.plan, target.probability
    chosen = scope_of(plan, decisive)
    before = run.some_result.error(basis, chosen)
    square = _mean_square(before)
    ratio = run.ratio(basis, chosen, probability)
    rows = []
    for row, leaf in enumerate(plan.leaves):
        if leaf.estimate.is_exact or not leaf.place.quantity.ranked:
            continue
        if not any(plan.reaches(row, effect) for effect in plan.effects):
            continue
        tied = [row] if correlation is None else _tied(correlation, row)
        error = run.with_fixed(tied).error(basis, chosen)
        rows.append(
            QuantityRow(
                name=leaf.name,
                label=leaf.place.label,
                kind=leaf.place.quantity.kind,
                estimate=leaf.estimate,
                origin=leaf.origin,
                varies=leaf.varies,
                sensor=leaf.place.sensor,
                share=1 - _mean_square(error) / square if square else 0.0,
                e95_without=ratio * largest_with(error, probability),
                together_with=tuple(plan.leaves[j].name for j in tied if j != row),
            )
        )
    return tuple(sorted(rows, key=lambda found: found.e95_without))


def _tied(correlation: Any, row: int) -> list[int]:
    """Return the quantities that are correlated with this one, directly or through others."""
    found, pending = {row}, [row]
    while pending:
        for other in np.flatnonzero(correlation[pending.pop()]):
            if int(other) not in found:
                found.add(int(other))
                pending.append(int(other))
    return sorted(found)


def _first_order(run: Run, basis: State, whole: Summary, correlation: Any) -> tuple[list[float], FirstOrder]:
    """Return each effect's u to first order, and the whole basis total's comparison with Monte Carlo."""
    plan = run.plan
    estimates = [leaf.estimate for leaf in plan.leaves]
    inputs, spread = perturbed(estimates)
    weighing = Weighings(plan, (plan.evaluate(inputs),))

    def found(outcome: Value) -> Budget:
        return budget(outcome, estimates, spread, probability=whole.probability, correlation=correlation)

    total = found(weighing.error(basis, scope_of(plan, "whole")))
    if run.difference or run.repeats > 1:
        total = _of_result(total, run, estimates, correlation)
    single = [found(weighing.effect("as_read", i)).u for i in range(len(plan.effects))]
    low, high = total.interval
    difference = abs(low - whole.interval[0]), abs(high - whole.interval[1])
    tolerance = numerical_tolerance(total.u, 1)
    return single, FirstOrder(total, difference, tolerance, max(difference) <= tolerance, ())


def _blind_to(effects: Sequence[EffectRow]) -> tuple[str, ...]:
    """Return the effects of whose spread first order reads less than half; rounding of the arithmetic is no spread."""
    least = 0.01 * max((row.u for row in effects), default=0.0)  # of the largest (judgement)
    return tuple(row.name for row in effects if row.u > least and row.first_order_u < 0.5 * row.u)


def _of_result(single: Budget, run: Run, estimates: Sequence[Estimate], correlation: Any) -> Budget:
    """Return the first-order budget of a mean of repeats, or of the difference of two results.

    What never varies stays in a mean and cancels in a difference; the rest falls with the root of the repeats.
    """
    never = 0.0 if run.difference else 1.0
    rest = math.sqrt((2.0 if run.difference else 1.0) / run.repeats)
    factors = np.array([never if leaf.varies == "never" else rest for leaf in run.plan.leaves])
    value = 0.0 if run.difference else single.value
    return combine(value, single.contributions * factors, estimates, single.probability, correlation)
