"""One set-up's weighings on common draws: the error of any effects together, as read, corrected or treated."""

from __future__ import annotations

import copy
from collections.abc import Callable, Iterator, Sequence
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
    Draws,
    batches_to_settle,
    draws,
    largest_with,
    summary,
)

__all__ = [
    "FEW_BATCHES",
    "STATES",
    "Run",
    "Scope",
    "State",
    "Weighings",
    "few",
    "inside_physics",
    "run_weighings",
    "scope_of",
]

State = Literal["as_read", "corrected", "treated"]
Scope = Literal["surroundings", "whole"]
STATES: tuple[State, ...] = ("as_read", "corrected", "treated")
CACHED = ("first", "some", "result", "again", "some_again", "some_result", "_some_redrawn", "_some_bases")
"""What a run works out when it is first asked for."""
FEW_BATCHES = 4
"""Batches of draws on which effects and quantities are ranked, and the minimum weight is found."""


@dataclass(frozen=True)
class Weighings:
    """The nodes' values for the net weighings of one result: one set, or as many as are averaged.

    For a difference, ``less`` holds those of the second result, which is taken away.
    """

    plan: Plan
    sets: tuple[list[Any], ...]
    less: Weighings | None = None

    @cached_property
    def parts(self) -> list[tuple[Parts, Parts]]:
        """The true and the known parts of each weighing."""
        return [(self.plan.parts(v), self.plan.parts(v, known=True)) for v in self.sets]

    def mean(self, of: Callable[[Parts, Parts], Value]) -> Value:
        """Return the mean over the weighings of something computed from the true and the known parts."""
        mean = self._mean(of)
        return mean - self.less.mean(of) if self.less else mean

    def _mean(self, of: Callable[[Parts, Parts], Value]) -> Value:
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
        per = self.plan.per_correction
        return self.mean(lambda true, known: per * (true.total(chosen) - known.total(chosen)))

    def effect(self, state: State, index: int) -> Value:
        """Return the error of one effect alone [kg]."""
        defines = self.plan.effects[index].effect.definition
        if state == "as_read":
            return self.mean(lambda true, known: true.effect(index, defines=defines))
        if state == "treated" and self.plan.effects[index].effect.treatment:
            return 0.0
        per = self.plan.per_correction
        return self.mean(
            lambda true, known: per * (true.effect(index, defines=defines) - known.effect(index, defines=defines))
        )


class Run:
    """The weighings of one plan on one set of draws.

    ``first`` is a single weighing; ``result`` what is reported (the mean of the repeats, less that of the second result
    where a difference is asked for); ``some`` and ``some_result`` are the same on a few of the draws, enough to rank
    what spoils them at a quarter of the time.
    """

    def __init__(
        self, plan: Plan, drawn: Draws, correlation: Any, repeats: int = 1, *, difference: bool = False
    ) -> None:
        keep_freed_memory()
        self.plan, self.drawn, self.repeats, self.difference = plan, drawn, repeats, difference
        self.tied = drawn.tied(correlation)
        # what nothing rests on need not be drawn
        self.leaf_values = [
            self.place(row, leaf) if plan.reach(row) else leaf.estimate.centre for row, leaf in enumerate(plan.leaves)
        ]
        self.base = plan.evaluate(self.leaf_values)
        self._orders: dict[int, Any] = {}
        self._drawn_again: dict[int, tuple[list[Value], list[Any]]] = {}

    def place(self, row: int, leaf: Leaf) -> Value:
        """Return the draws of a leaf by a row of the uniform ones."""
        return inside_physics(self.tied.place(row, leaf.estimate), leaf)

    def moved(self, plan: Plan) -> Run:
        """Return the weighings of the same plan with other estimates (:meth:`Plan.renewed`), on the same draws."""
        other = copy.copy(self)
        for name in CACHED:
            other.__dict__.pop(name, None)
        rows = [j for j, leaf in enumerate(plan.leaves) if leaf.estimate is not self.plan.leaves[j].estimate]
        other.plan, other.leaf_values = plan, list(self.leaf_values)
        for row in rows:
            other.leaf_values[row] = self.place(row, plan.leaves[row])
        other.base = plan.evaluate_moved(other.leaf_values, base=self.base, moved=rows)
        numbers = range(1, 2 * self.repeats if self.difference else self.repeats)
        other._drawn_again = {k: other._moved_again(self._again_by(k), k, rows) for k in numbers}
        return other

    def _moved_again(
        self, before: tuple[list[Value], list[Any]], number: int, rows: Sequence[int]
    ) -> tuple[list[Value], list[Any]]:
        leaf_values, base = list(before[0]), before[1]
        for row in rows:
            leaf_values[row] = self._reordered(row, number)
        return leaf_values, self.plan.evaluate_moved(leaf_values, base=base, moved=rows)

    @cached_property
    def first(self) -> Weighings:
        """A single weighing, on all draws."""
        return Weighings(self.plan, (self.base,))

    @cached_property
    def some(self) -> Weighings:
        """The same on a few of the draws."""
        return Weighings(self.plan, (few(self.base),))

    @cached_property
    def result(self) -> Weighings:
        """What is reported, on all draws."""
        sets = tuple(self._redrawn(k) for k in range(self.repeats))
        return Weighings(self.plan, sets, self.again if self.difference else None)

    @cached_property
    def again(self) -> Weighings:
        """A second result of the same load: all drawn anew that varies."""
        return Weighings(self.plan, tuple(self._redrawn(k) for k in range(self.repeats, 2 * self.repeats)))

    @cached_property
    def some_again(self) -> Weighings:
        """The same on a few of the draws."""
        return Weighings(self.plan, tuple(self._some_sets(range(self.repeats, 2 * self.repeats), ())))

    @cached_property
    def some_result(self) -> Weighings:
        """What is reported, on a few of the draws."""
        return self.with_fixed(())

    def with_fixed(self, rows: Sequence[int]) -> Weighings:
        """Return :attr:`some_result` with some quantities at their best estimates."""
        sets = tuple(self._some_sets(range(self.repeats), rows))
        again = range(self.repeats, 2 * self.repeats)
        less = Weighings(self.plan, tuple(self._some_sets(again, rows))) if self.difference else None
        return Weighings(self.plan, sets, less)

    @cached_property
    def _some_redrawn(self) -> dict[int, list[Any]]:
        return {k: few(self._redraw(k)) for k in range(2 * self.repeats)}

    @cached_property
    def _some_bases(self) -> dict[int, list[Any]]:
        found = {k: self.plan.evaluate(leaves) for k, leaves in self._some_redrawn.items() if k}
        return {0: self.some.sets[0], **found}

    def _some_sets(self, numbers: Sequence[int], rows: Sequence[int]) -> Iterator[list[Any]]:
        for k in numbers:
            leaf_values, values = list(self._some_redrawn[k]), self._some_bases[k]
            for row in rows:
                leaf_values[row] = self.plan.leaves[row].estimate.centre
                values = self.plan.evaluate(leaf_values, base=values, changed=row)
            yield values

    @property
    def some_leaves(self) -> list[Value]:
        """The leaves of :attr:`some`."""
        return self._some_redrawn[0]

    def _redrawn(self, number: int) -> list[Any]:
        return self._again_by(number)[1] if number else self.base

    def _again_by(self, number: int) -> tuple[list[Value], list[Any]]:
        """Return the leaves and the nodes of another weighing, worked out once."""
        if number not in self._drawn_again:
            leaf_values = self._redraw(number)
            self._drawn_again[number] = leaf_values, self.plan.evaluate(leaf_values)
        return self._drawn_again[number]

    def _redraw(self, number: int) -> list[Value]:
        """Return the leaves in another order where they vary, so that they are independent of the first."""
        return [self._reordered(row, number) for row in range(len(self.plan.leaves))] if number else self.leaf_values

    def _reordered(self, row: int, number: int) -> Value:
        value = self.leaf_values[row]
        if isinstance(value, np.ndarray) and self.plan.leaves[row].varies != "never":
            return value[self._order(number)]
        return value

    def _order(self, number: int) -> Any:
        if number not in self._orders:
            self._orders[number] = self.drawn.shuffled(number)
        return self._orders[number]

    def ratio(self, state: State, chosen: Sequence[int], probability: float) -> float:
        """Return the e95 of all draws over that of a few: on common draws it is steadier than either."""
        part = largest_with(self.some_result.error(state, chosen), probability)
        return largest_with(self.result.error(state, chosen), probability) / part if part else 1.0


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
        drawn = draws(len(plan.leaves), batches, seed)
        run = Run(plan, drawn, correlation, repeats, difference=measurand == "difference")
        if wanted is not None:
            return run
        whole = scope_of(plan, "whole")
        looked_at: tuple[State, ...] = ("as_read", "corrected")
        figures = (summary(run.result.error(state, whole), drawn.size, probability) for state in looked_at)
        more = max(batches_to_settle(found, batches, 2) for found in figures)
        if more <= batches:
            return run
        batches = more
