"""The masses behind a table of readings: the same expression as for one reading, on columns.

Rows that differ in a choice, or in which of their cells are filled, are planned apart. What cannot be corrected widens
u by first order where that agrees with draws at a representative row, else by draws of each row.
"""

from __future__ import annotations

import math
from collections.abc import Mapping, Sequence
from dataclasses import dataclass, field, replace
from typing import Any

import numpy as np
from numpy.typing import NDArray

from envcorr import units
from envcorr.catalogue import CATALOGUE
from envcorr.errors import InputError
from envcorr.estimate import Estimate, Value
from envcorr.intake.table import Column
from envcorr.jobs.solving import (
    ALIKE,
    Solution,
    bands_by_draws,
    correctable,
    mass_row,
    plan_reading,
    reading_of,
    solve,
)
from envcorr.plan import Plan
from envcorr.propagation import BATCH, draws
from envcorr.setup import Setup

__all__ = ["BLOCK", "Rows", "masses"]

BLOCK = 32_768
"""Rows that are planned and solved at a time: their columns stay in the cache."""
ROW_DRAWS = 256
"""Draws of each row for a band that first order does not see."""
_AT_A_TIME = 2_048  # rows of those

Floats = NDArray[np.float64]


@dataclass
class Rows:
    """What was found, one a row [SI]; NaN and a sentence in ``faults`` where a row could not be computed.

    ``notices`` maps a sentence to the rows (a mask) that it concerns; ``assumed`` is what was taken in any of them.
    """

    mass: Floats
    u: Floats
    correction: Floats
    air_density: Floats
    faults: NDArray[np.object_]
    notices: dict[str, NDArray[np.bool_]] = field(default_factory=dict)
    assumed: dict[str, Any] = field(default_factory=dict)

    @classmethod
    def empty(cls, size: int) -> Rows:
        """Return rows that are not computed yet."""
        mass, u, correction, air_density = (np.full(size, np.nan) for _ in range(4))
        return cls(mass, u, correction, air_density, np.full(size, "", dtype=object))


def masses(
    setup: Setup, columns: Mapping[str, Column], choices: Mapping[str, Sequence[str]], size: int, *, seed: int = 0
) -> Rows:
    """Return the masses of ``size`` rows: what the columns hold, and for the rest what the set-up says.

    A row with a value outside what physics allows, or without what it needs, is marked and explained.
    """
    rows = Rows.empty(size)
    usable = np.ones(size, dtype=bool)
    for name, column in columns.items():
        usable &= _inside(name, column, rows)
    for members in _groups(columns, choices, usable):
        _solve_group(setup, columns, choices, members, rows, seed)
    return rows


def _inside(name: str, column: Column, rows: Rows) -> NDArray[np.bool_]:
    place = CATALOGUE.find(name)
    assert place is not None
    quantity = place.quantity
    bad = (column.values < quantity.low) | (column.values > quantity.high)
    for i in np.flatnonzero(bad):
        read = units.show(float(column.values[i]), quantity.kind)
        rows.faults[i] = f"{name}: {read} is outside what is possible. {quantity.hint}".rstrip()
    result: NDArray[np.bool_] = ~bad
    return result


def _groups(
    columns: Mapping[str, Column], choices: Mapping[str, Sequence[str]], usable: NDArray[np.bool_]
) -> list[NDArray[np.intp]]:
    """Return the rows that can be planned together."""
    keys = np.zeros(usable.size, dtype=np.int64)
    for column in columns.values():
        keys = keys * 2 + np.isnan(column.values)
        if column.spread is not None:
            keys = keys * 2 + np.isnan(column.spread)
    for words in choices.values():
        _, codes = np.unique(np.asarray(words, dtype=str), return_inverse=True)
        keys = keys * (int(codes.max(initial=0)) + 1) + codes
    rows = np.flatnonzero(usable)
    if rows.size == 0:
        return []
    order = rows[np.argsort(keys[rows], kind="stable")]
    cuts = np.flatnonzero(np.diff(keys[order])) + 1
    return list(np.split(order, cuts))


def _solve_group(
    setup: Setup,
    columns: Mapping[str, Column],
    choices: Mapping[str, Sequence[str]],
    members: NDArray[np.intp],
    rows: Rows,
    seed: int,
) -> None:
    whole = _setup_of(setup, columns, choices, members)
    try:
        reading = reading_of(whole)
        plan = plan_reading(whole, reading.centre)
    except InputError as error:
        rows.faults[members] = "; ".join(str(fault) for fault in error.faults)
        return
    size = members.size

    def column(value: Value) -> Floats:
        return np.broadcast_to(np.asarray(value, dtype=np.float64), (size,))

    bands = [i for i in range(len(plan.effects)) if i not in correctable(plan)]
    linear, steady, rest = _sort_bands(_setup_of(setup, columns, choices, members[:1]), bands, seed)
    solved = solve(plan, column(reading.centre), bands=linear)
    variance = np.square(column(reading.u * solved.per))
    for contribution in solved.contributions:
        if np.ndim(contribution) or contribution:
            variance = variance + np.square(contribution)
    factors = _repeats(plan)
    parts = plan.parts(solved.values)
    for i in linear:
        variance = variance + np.square(parts.effect(i) * solved.per)
        for contribution, factor in zip(solved.effects[i], factors, strict=True):
            if np.ndim(contribution) or contribution:
                variance = variance + np.square(contribution * factor)
    for band in steady.values():
        variance = variance + np.square(band * solved.per)
    if rest:
        variance = variance + np.square(column(solved.per)) * _by_row(plan, solved, rest, size, seed)
    rows.mass[members] = column(solved.mass)
    rows.u[members] = np.sqrt(variance)
    rows.correction[members] = column(solved.mass - reading.centre)
    if "air.density" in plan.targets:
        rows.air_density[members] = column(solved.values[plan.targets["air.density"]])
    for assumption in plan.assumed:
        rows.assumed.setdefault(assumption.name, assumption)
    _note(plan, solved, members, rows)


def _setup_of(
    setup: Setup, columns: Mapping[str, Column], choices: Mapping[str, Sequence[str]], members: NDArray[np.intp]
) -> Setup:
    """Return the set-up of some rows of one kind, their cells as columns."""
    estimates = dict(setup.estimates)
    for name, column in columns.items():
        values = column.values[members]
        if np.isnan(values[0]):
            continue  # the cell is empty in all of them: the set-up's own value counts
        single = members.size == 1
        centre: Value = float(values[0]) if single else values
        if column.spread is None or np.isnan(column.spread[members[0]]):
            known = setup.estimates.get(name)
            estimates[name] = Estimate(centre) if known is None or known.is_exact else known.about(centre)
        else:
            spread = column.spread[members]
            estimates[name] = Estimate(centre, column.shape, float(spread[0]) if single else spread)
    words = {name: words[int(members[0])] for name, words in choices.items() if words[int(members[0])]}
    return replace(setup, estimates=estimates, choices={**setup.choices, **words})


def _sort_bands(setup: Setup, bands: Sequence[int], seed: int) -> tuple[list[int], dict[int, float], list[int]]:
    """Return which bands first order gives, which are the same [kg] for every row, and which want draws of each row."""
    if not bands:
        return [], {}, []
    reading = reading_of(setup)
    plan = plan_reading(setup, float(reading.centre))
    repeats = setup.estimates.get("cycle.repeats", Estimate(1.0))
    solved = solve(plan, float(reading.centre), bands=bands)
    drawn = bands_by_draws(plan, float(solved.mass), seed=seed, repeats=round(float(repeats.centre)))
    parts, factors, per = plan.parts(solved.values), _repeats(plan), float(solved.per)
    linear: list[int] = []
    steady: dict[int, float] = {}
    rest: list[int] = []
    for i in bands:
        contributions = [float(c) * f for c, f in zip(solved.effects[i], factors, strict=True)]
        first = math.sqrt(sum(c**2 for c in contributions) + (float(parts.effect(i)) * per) ** 2)
        if abs(first - drawn[i] * per) <= ALIKE * drawn[i] * per:
            linear.append(i)
        elif plan.reaches(mass_row(plan), plan.effects[i]) or any(
            plan.reaches(j, plan.effects[i]) for j, leaf in enumerate(plan.leaves) if leaf.origin == "given"
        ):
            rest.append(i)
        else:
            steady[i] = drawn[i]
    return linear, steady, rest


def _repeats(plan: Plan) -> list[float]:
    """Return by what the mean of the repeats lessens each leaf's part: random noise only."""
    repeats = plan.setup.estimates.get("cycle.repeats", Estimate(1.0))
    lessened = 1 / math.sqrt(float(np.max(repeats.centre)))
    return [lessened if leaf.origin == "internal" and leaf.varies != "never" else 1.0 for leaf in plan.leaves]


def _by_row(plan: Plan, solved: Solution, bands: Sequence[int], size: int, seed: int) -> Floats:
    """Return the mean square about zero [kg²] of some bands in each row, on draws as a leading axis."""
    drawn = draws(len(plan.leaves), max(1, ROW_DRAWS // BATCH), seed)
    some = slice(0, ROW_DRAWS)
    found = np.zeros(size)
    for start in range(0, size, _AT_A_TIME):
        part = slice(start, min(start + _AT_A_TIME, size))

        def rows_of(value: Any, part: slice = part) -> Any:
            return value[part] if np.ndim(value) else value

        leaf_values: list[Any] = []
        for j, leaf in enumerate(plan.leaves):
            estimate = replace(
                leaf.estimate, centre=rows_of(leaf.estimate.centre), spread=rows_of(leaf.estimate.spread)
            )
            if leaf.name == "load.mass":
                leaf_values.append(rows_of(solved.mass))
            elif estimate.is_exact:
                leaf_values.append(estimate.centre)
            else:
                score = drawn.score(j, estimate.shape, estimate.dof)[some, np.newaxis]
                leaf_values.append(estimate.place(score))
        cut = replace(plan, nodes=tuple(replace(n, centre=rows_of(n.centre)) for n in plan.nodes))
        parts = cut.parts(cut.evaluate(leaf_values))
        for i in bands:
            square = np.mean(np.square(np.atleast_2d(parts.effect(i))), axis=0)
            found[part] += np.broadcast_to(square, (part.stop - part.start,))
    return found


def _note(plan: Plan, solved: Solution, members: NDArray[np.intp], rows: Rows) -> None:
    """Keep the warnings of the plan's checks with the rows that they concern; quantities are named, not printed."""
    for planned in plan.checks:
        if planned.check.level == "info":
            continue
        mask = planned.check.function(*[solved.values[i] for i in planned.inputs])
        if not np.any(mask):
            continue
        labels = {name: f"the {CATALOGUE.place(name).label}" for name in planned.names}
        sentence = planned.check.sentence.format(**labels)
        sentence = sentence[:1].upper() + sentence[1:]
        concerned = rows.notices.setdefault(sentence, np.zeros(rows.mass.size, dtype=bool))
        concerned[members] |= np.broadcast_to(mask, members.shape)
