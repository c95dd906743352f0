"""One set-up's weighings on common draws: the error of any effects together, as read, corrected or treated."""

from __future__ import annotations

from collections.abc import Callable, Sequence
from dataclasses import dataclass
from functools import cached_property
from typing import Any, Literal

import numpy as np

from envcorr.estimate import Value
from envcorr.memory import keep_freed_memory
from envcorr.plan import Leaf, Parts, Plan
from envcorr.propagation import (
    BATCH,
    FIRST_BATCHES,
    MOST_BATCHES,
    Draws,
    draws,
    is_settled,
    largest_with,
    summary,
)

__all__ = ["FEW_BATCHES", "STATES", "Run", "Scope", "State", "Weighings", "few", "run_weighings", "scope_of"]

State = Literal["as_read", "corrected", "treated"]
Scope = Literal["surroundings", "whole"]
STATES: tuple[State, ...] = ("as_read", "corrected", "treated")
FEW_BATCHES = 4
"""Batches of draws on which effects and quantities are ranked, and the minimum weight is found."""


@dataclass(frozen=True)
class Weighings:
    """The nodes' values for some net weighings of one result: one set, or as many as are averaged."""

    plan: Plan
    sets: tuple[list[Any], ...]

    @cached_property
    def parts(self) -> list[tuple[Parts, Parts]]:
        """The true and the known parts of each weighing."""
        return [(self.plan.parts(v), self.plan.parts(v, known=True)) for v in self.sets]

    def mean(self, of: Callable[[Parts, Parts], Value]) -> Value:
        """Return the mean over the weighings of something computed from the true and the known parts."""
        if len(self.parts) == 1:
            return of(*self.parts[0])
        total: Value = 0.0
        for true, known in self.parts:
            total = total + of(true, known)
        return total / len(self.parts)

    def error(self, state: State, chosen: Sequence[int]) -> Value:
        """Return the error of the chosen effects together [kg]."""
        if state == "as_read":
            return self.mean(lambda true, known: true.total(chosen))
        if state == "treated":
            chosen = [i for i in chosen if not self.plan.effects[i].effect.treatment]
        return self.mean(lambda true, known: true.total(chosen) - known.total(chosen))

    def effect(self, state: State, index: int) -> Value:
        """Return the error of one effect alone [kg]."""
        defines = self.plan.effects[index].effect.definition
        if state == "as_read":
            return self.mean(lambda true, known: true.effect(index, defines=defines))
        if state == "treated" and self.plan.effects[index].effect.treatment:
            return 0.0
        return self.mean(lambda true, known: true.effect(index, defines=defines) - known.effect(index, defines=defines))


class Run:
    """The weighings of one plan on one set of draws."""

    def __init__(self, plan: Plan, drawn: Draws, correlation: Any, repeats: int) -> None:
        keep_freed_memory()
        self.plan, self.drawn, self.repeats = plan, drawn, repeats
        self.leaf_values = [
            inside_physics(value, leaf)
            for value, leaf in zip(
                drawn.place_all([leaf.estimate for leaf in plan.leaves], correlation),
                plan.leaves,
                strict=True,
            )
        ]
        self.base = plan.evaluate(self.leaf_values)
        self.first = Weighings(plan, (self.base, *(self._redrawn(k) for k in range(1, repeats))))
        # the same on a few of the draws: enough to rank what spoils them, at a quarter of the time
        self.some_leaves = [few(self.leaf_values), *(few(self._redraw(k)) for k in range(1, repeats))]
        self.some = Weighings(plan, tuple(few(values) for values in self.first.sets))

    @cached_property
    def again(self) -> Weighings:
        """Another result of the same load: all drawn anew that varies."""
        return Weighings(self.plan, tuple(self._redrawn(k) for k in range(self.repeats, 2 * self.repeats)))

    @cached_property
    def some_again(self) -> Weighings:
        """The same on a few of the draws."""
        numbers = range(self.repeats, 2 * self.repeats)
        return Weighings(self.plan, tuple(self.plan.evaluate(few(self._redraw(k))) for k in numbers))

    def _redrawn(self, number: int) -> list[Any]:
        return self.plan.evaluate(self._redraw(number))

    def _redraw(self, number: int) -> list[Value]:
        """Return the leaves in another order where they vary, so that they are independent of the first."""
        order = self.drawn.shuffled(number)
        return [
            value[order] if isinstance(value, np.ndarray) and leaf.varies != "never" else value
            for value, leaf in zip(self.leaf_values, self.plan.leaves, strict=True)
        ]

    def ratio(self, state: State, chosen: Sequence[int], probability: float) -> float:
        """Return the e95 of all draws over that of a few: on common draws it is steadier than either."""
        part = largest_with(self.some.error(state, chosen), probability)
        return largest_with(self.first.error(state, chosen), probability) / part if part else 1.0

    def with_fixed(self, rows: Sequence[int]) -> Weighings:
        """Return :attr:`some` with some quantities at their best estimates."""
        sets = []
        for leaves, base in zip(self.some_leaves, self.some.sets, strict=True):
            leaf_values, values = list(leaves), base
            for row in rows:
                leaf_values[row] = self.plan.leaves[row].estimate.centre
                values = self.plan.evaluate(leaf_values, base=values, changed=row)
            sets.append(values)
        return Weighings(self.plan, tuple(sets))

    def error(self, state: State, chosen: Sequence[int], measurand: str) -> Value:
        """Return the error of the chosen effects [kg]; for a difference, of the first weighing less the second."""
        error = self.first.error(state, chosen)
        return error - self.again.error(state, chosen) if measurand == "difference" else error


def few(values: Sequence[Any]) -> list[Any]:
    """Return the first few batches of values that have draws."""
    count = FEW_BATCHES * BATCH
    return [value[:count] if isinstance(value, np.ndarray) and value.ndim else value for value in values]


def inside_physics(value: Value, leaf: Leaf) -> Value:
    """Keep draws of an unbounded distribution inside what physics allows."""
    quantity = leaf.place.quantity
    if leaf.place.sensor or not isinstance(value, np.ndarray) or leaf.estimate.shape != "normal":
        return value
    if quantity.low == -np.inf and quantity.high == np.inf:
        return value
    return np.clip(value, quantity.low, quantity.high)


def scope_of(plan: Plan, scope: Scope) -> list[int]:
    """Return which of the plan's effects a scope counts: all, or all but the balance's own part."""
    return [i for i, planned in enumerate(plan.effects) if scope == "whole" or not planned.effect.own]


def run_weighings(
    plan: Plan,
    correlation: Any,
    repeats: int,
    wanted: int | None,
    seed: int,
    probability: float,
    measurand: str,
) -> Run:
    """Draw the weighings of a plan: ``wanted`` draws, or as many as the figures of the whole error need to settle."""
    batches = FIRST_BATCHES if wanted is None else max(FIRST_BATCHES, -(-wanted // BATCH))
    while True:
        run = Run(plan, draws(len(plan.leaves), batches, seed), correlation, repeats)
        if wanted is not None or batches >= MOST_BATCHES:
            return run
        looked_at: tuple[State, ...] = ("as_read", "corrected")
        if all(
            is_settled(summary(run.error(state, scope_of(plan, "whole"), measurand), run.drawn.size, probability), 2)
            for state in looked_at
        ):
            return run
        batches *= 2
