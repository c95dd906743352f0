"""One set-up's totals with some of its quantities otherwise: the same draws each time, so that only they differ."""

from __future__ import annotations

import copy
import math
from collections.abc import Mapping
from dataclasses import dataclass, replace
from functools import cached_property

import numpy as np

from envcorr.errors import Fault, InputError, NotComputedError
from envcorr.estimate import Estimate, Value
from envcorr.jobs.common import correlation_matrix
from envcorr.jobs.verdict import is_needed, target_of
from envcorr.jobs.weighings import Run, Scope, State, run_weighings, scope_of
from envcorr.model import make_plan
from envcorr.plan import Plan
from envcorr.propagation import BATCH, FIRST_BATCHES, Draws, draws, largest_with, share_within
from envcorr.setup import Setup

__all__ = ["SCOPES", "Outcome", "Scan"]

SCOPES: tuple[Scope, ...] = ("surroundings", "whole")


@dataclass(frozen=True, slots=True)
class Outcome:
    """The errors of one total [kg] on the draws, and how surely they stay within what is allowed."""

    errors: Mapping[Scope, Value]
    probability: Mapping[Scope, float]
    passes: bool


class Scan:
    """The totals of one set-up with some of its quantities otherwise, on common draws.

    ``state`` says which total counts: "as_read", "corrected" or "treated". A total passes if both of its conformance
    probabilities are at least the demanded one; on common draws that needs no margin. Raises :class:`InputError` where
    the mass or the target is not given.
    """

    def __init__(self, setup: Setup, *, state: State = "corrected", count: int | None = None, seed: int = 0) -> None:
        self.setup, self.state = setup, state
        self.plan = make_plan(setup)
        self.target, _ = target_of(self.plan)
        self.missing = tuple(
            lacking.effect.title
            for lacking in self.plan.not_assessed
            if is_needed(lacking.effect.needed, setup) and lacking.effect.name not in setup.waived
        )
        """Effects that this load needs and that could not be assessed: no verdict can be a yes."""
        self.count, self.seed = count or FIRST_BATCHES * BATCH, seed
        self.scopes = {scope: scope_of(self.plan, scope) for scope in SCOPES}

    @cached_property
    def run(self) -> Run:
        """The weighings as they are, drawn when they are first asked for."""
        repeats = self.setup.estimates.get("cycle.repeats", Estimate(1.0))
        return run_weighings(
            self.plan,
            correlation_matrix(self.plan),
            round(float(repeats.centre)),
            self.count,
            self.seed,
            self.target.probability,
            self.target.measurand,
        )

    @property
    def size(self) -> int:
        """The number of draws."""
        return self.run.drawn.size

    def outcome(self, changes: Mapping[str, Estimate] | None = None) -> Outcome:
        """Return what becomes of the total with some quantities (dotted names) otherwise."""
        run = self.run if not changes else self._changed(changes)
        errors = {scope: run.result.error(self.state, chosen) for scope, chosen in self.scopes_of(run.plan).items()}
        inside = {scope: share_within(error, self.target.bound(scope), self.size)[0] for scope, error in errors.items()}
        return Outcome(errors, inside, all(share >= self.target.probability for share in inside.values()))

    def passes(self, changes: Mapping[str, Estimate]) -> bool:
        """Return whether the total passes with some quantities otherwise; where the model has no answer it does not.

        Less work than :meth:`outcome`.
        """
        try:
            run = self._changed(changes)
        except NotComputedError:
            return False
        for scope, chosen in self.scopes_of(run.plan).items():
            error = run.result.error(self.state, chosen)
            inside = np.count_nonzero(np.abs(np.broadcast_to(error, (self.size,))) <= self.target.bound(scope))
            if inside < self.target.probability * self.size:
                return False
        return True

    def probability(self, changes: Mapping[str, Estimate]) -> float:
        """Return the smaller of the two conformance probabilities, NaN where the model has no answer."""
        try:
            run = self._changed(changes)
        except NotComputedError:
            return math.nan
        least = 1.0
        for scope, chosen in self.scopes_of(run.plan).items():
            error = np.broadcast_to(run.result.error(self.state, chosen), (self.size,))
            if np.isnan(error).any():
                return math.nan
            least = min(least, float(np.mean(np.abs(error) <= self.target.bound(scope))))
        return least

    def held(self, changes: Mapping[str, Estimate]) -> Scan:
        """Return the same with some quantities otherwise, to vary others from there on the same draws."""
        other = copy.copy(self)
        other.run = self._changed(changes)
        other.setup, other.plan = other.run.plan.setup, other.run.plan
        other.scopes = {scope: scope_of(other.plan, scope) for scope in SCOPES}
        return other

    def e95(self, outcome: Outcome, scope: Scope) -> float:
        """Return the quantile of the absolute error [kg] at the demanded probability."""
        return largest_with(outcome.errors[scope], self.target.probability)

    def scopes_of(self, plan: Plan) -> Mapping[Scope, list[int]]:
        """Return which effects each scope counts."""
        return self.scopes if plan.effects is self.plan.effects else {scope: scope_of(plan, scope) for scope in SCOPES}

    def _changed(self, changes: Mapping[str, Estimate]) -> Run:
        setup = replace(self.setup, estimates={**self.setup.estimates, **changes})
        plan = self.plan.renewed(setup)
        return self.run.moved(plan) if plan is not None else self._planned_anew(setup)

    def _planned_anew(self, setup: Setup) -> Run:
        """Return the weighings of a set-up that is planned otherwise; what both plans draw is drawn alike."""
        plan = make_plan(setup)
        drawn = self.run.drawn
        rows = {leaf.name: drawn.uniform[row] for row, leaf in enumerate(self.plan.leaves)}
        new = [leaf.name for leaf in plan.leaves if leaf.name not in rows]
        rows |= zip(new, draws(len(new), self.size // BATCH, drawn.seed + 1).uniform, strict=False)
        uniform = np.array([rows[leaf.name] for leaf in plan.leaves])
        return Run(
            plan,
            Draws(uniform, drawn.seed),
            correlation_matrix(plan),
            self.run.repeats,
            difference=self.run.difference,
        )

    def given(self, name: str) -> Estimate:
        """Return what the set-up gives for a quantity.

        Raises :class:`InputError` where it does not, or nothing rests on it.
        """
        from envcorr.catalogue import CATALOGUE, nearest

        estimate = self.setup.estimates.get(name)
        if estimate is None:
            if CATALOGUE.find(name) is None:
                near = nearest(name, [*self.setup.estimates, *CATALOGUE.words()])
                hint = f"Did you mean {near}?" if near else "See envcorr explain for every name."
                raise InputError([Fault(name, "is not known.", hint)])
            raise InputError([Fault(name, "is not given by the set-up.", f'Give it first: --set {name}="...".')])
        if name in self.plan.unused:
            raise InputError([Fault(name, "is given and not used: nothing follows from it.", "Choose another.")])
        return estimate
