"""The masses behind a table of readings: the same expression as for one reading, on columns.

Rows that differ in a choice, or in which of their cells are filled, are of different kinds and planned apart. What
cannot be corrected widens u by first order where that agrees with draws at the first row of the kind, else by draws of
each row.
"""

from __future__ import annotations

import math
from collections.abc import Mapping, Sequence
from dataclasses import dataclass, field, replace
from typing import Any

import numpy as np
from numpy.typing import NDArray

from envcorr import materials, units
from envcorr.catalogue import CATALOGUE
from envcorr.errors import Fault, InputError
from envcorr.estimate import Estimate, Value
from envcorr.intake.table import Column
from envcorr.jobs.common import correlation_matrix
from envcorr.jobs.mass_draws import apart, drawn_rows, lessened, masses_by_draws
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
from envcorr.propagation import BATCH, coverage_factor, draws
from envcorr.setup import Setup

__all__ = ["BESIDE", "BLOCK", "DIFFER", "RowSolver", "Rows"]

BLOCK = 32_768
"""Rows that are solved at a time: their columns stay in the cache."""
BESIDE = {"conventional mass": "load.conventional_mass", "volume": "load.volume"}
"""What can be told of each row beside the mass, where it is asked for."""
DIFFER = "First order and draws disagree (JCGM 101:2008, clause 8): take the coverage interval by draws."
ROW_DRAWS = 256
"""Draws of each row for a band that first order does not see."""

Floats = NDArray[np.float64]


@dataclass
class Rows:
    """What was found, one a row [SI]; NaN and a sentence in ``faults`` where a row could not be computed.

    ``beside`` holds value and standard uncertainty of what was asked for beside the mass; ``drawn`` the standard
    uncertainty and the coverage interval by draws, where those were. ``notices`` maps a sentence to the rows (a mask)
    that it concerns; ``assumed`` is what was taken in any of them.
    """

    mass: Floats
    u: Floats
    correction: Floats
    air_density: Floats
    faults: NDArray[np.object_]
    beside: dict[str, tuple[Floats, Floats]] = field(default_factory=dict)
    drawn: tuple[Floats, Floats, Floats] | None = None
    notices: dict[str, NDArray[np.bool_]] = field(default_factory=dict)
    assumed: dict[str, Any] = field(default_factory=dict)


@dataclass(frozen=True, slots=True)
class _Kind:
    """What rows of one kind share: their plan, and how each band is taken (see :func:`_sort_bands`)."""

    plan: Plan
    linear: Sequence[int]
    steady: Mapping[int, float]
    rest: Sequence[int]


class RowSolver:
    """Solves the rows of one table, block by block and in order; what it found for a kind of row serves again.

    ``beside`` names what is wanted beside the mass (keys of :data:`BESIDE`); ``count`` draws a row, 0 for none.
    """

    def __init__(
        self,
        setup: Setup,
        *,
        beside: Sequence[str] = (),
        count: int = 0,
        probability: float = 0.95,
        seed: int = 0,
    ) -> None:
        self.setup, self.beside = setup, tuple(beside)
        self.count, self.probability, self.seed = count, probability, seed
        self.kinds: dict[Any, _Kind] = {}

    def solve(self, columns: Mapping[str, Column], words: Mapping[str, Sequence[str]], size: int) -> Rows:
        """Return the masses of ``size`` rows: what the columns hold, and for the rest what the set-up says.

        A row with a value outside what physics allows, or without what it needs, is marked and explained.
        """
        rows = self._empty(size)
        usable = np.ones(size, dtype=bool)
        for name, column in columns.items():
            usable &= _inside(name, column, rows)
        for kind, members in _groups(columns, words, usable):
            self._solve_kind(kind, columns, words, members, rows)
        return rows

    def _empty(self, size: int) -> Rows:
        def column() -> Floats:
            return np.full(size, np.nan)

        return Rows(
            column(),
            column(),
            column(),
            column(),
            np.full(size, "", dtype=object),
            {name: (column(), column()) for name in self.beside},
            (column(), column(), column()) if self.count else None,
        )

    def _solve_kind(
        self,
        kind: Any,
        columns: Mapping[str, Column],
        words: Mapping[str, Sequence[str]],
        members: NDArray[np.intp],
        rows: Rows,
    ) -> None:
        try:
            whole = _setup_of(self.setup, columns, words, members)
            reading = reading_of(whole)
            if kind not in self.kinds:
                first = _setup_of(self.setup, columns, words, members[:1])
                self.kinds[kind] = _kind(first, self.seed)
            alike = self.kinds[kind]
            plan = plan_reading(whole, reading.centre, alike.plan)
        except InputError as error:
            rows.faults[members] = "; ".join(str(fault) for fault in error.faults)
            return
        size = members.size

        def column(value: Value) -> Floats:
            return np.broadcast_to(np.asarray(value, dtype=np.float64), (size,))

        solved = solve(plan, column(reading.centre), by_effect=bool(self.beside), bands=alike.linear)
        matrix = correlation_matrix(plan)
        widening = _widening(plan, solved, alike, size, self.seed) + np.square(column(reading.u * solved.per))
        rows.mass[members] = solved.mass
        rows.u[members] = np.sqrt(_squares(solved.contributions, matrix) + widening)
        rows.correction[members] = column(solved.mass - reading.centre)
        if "air.density" in plan.targets:
            rows.air_density[members] = column(solved.values[plan.targets["air.density"]])
        for name in self.beside:
            target = BESIDE[name]
            if target not in solved.targets:
                continue
            value, contributions = solved.targets[target]
            # what widens the mass widens what is proportional to it
            per_mass = 0.0 if target in whole.estimates else np.divide(value, solved.mass)
            of_rows = rows.beside[name]
            of_rows[0][members] = column(value)
            of_rows[1][members] = np.sqrt(_squares(contributions, matrix) + widening * np.square(per_mass))
        if rows.drawn is not None:
            found = masses_by_draws(
                plan, solved, reading, size, count=self.count, probability=self.probability, seed=self.seed
            )["load.mass"]
            for one, values in zip(rows.drawn, (found.u, found.low, found.high), strict=True):
                one[members] = values
            half = coverage_factor(self.probability, math.inf) * rows.u[members]
            differ = apart(rows.mass[members], half, found)
            if np.any(differ):
                rows.notices.setdefault(DIFFER, np.zeros(rows.mass.size, dtype=bool))[members] |= differ
        for assumption in plan.assumed:
            rows.assumed.setdefault(assumption.name, assumption)
        _note(plan, solved, members, rows)


def _squares(contributions: Sequence[Value], correlation: Floats | None = None) -> Value:
    """Return the variance that contributions add up to, correlated where a matrix over them says so."""
    total: Value = 0.0
    for contribution in contributions:
        if np.ndim(contribution) or contribution:
            total = total + np.square(contribution)
    if correlation is not None:
        for i, j in np.argwhere(np.triu(correlation, 1)):
            total = total + 2 * correlation[i, j] * contributions[i] * contributions[j]
        total = np.maximum(total, 0.0)
    return total


def _noise(contributions: Sequence[Value], factors: Sequence[float]) -> Value:
    """Return the variance of contributions that the mean of repeats lessens."""
    return _squares([c * factor for c, factor in zip(contributions, factors, strict=True)])


def _widening(plan: Plan, solved: Solution, alike: _Kind, size: int, seed: int) -> Value:
    """Return what the bands add to the variance of the mass [kg²]."""
    total: Value = 0.0
    parts, factors = plan.parts(solved.values), lessened(plan)
    for i in alike.linear:
        total = total + np.square(parts.effect(i) * solved.per) + _noise(solved.effects[i], factors)
    for band in alike.steady.values():
        total = total + np.square(band * solved.per)
    if alike.rest:
        total = total + np.square(solved.per) * _by_row(plan, solved, alike.rest, size, seed)
    return total


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
    columns: Mapping[str, Column], words: Mapping[str, Sequence[str]], usable: NDArray[np.bool_]
) -> list[tuple[Any, NDArray[np.intp]]]:
    """Return the rows that can be planned together, each with what tells their kind from others."""
    filled = [~np.isnan(column.values) for column in columns.values()]
    filled += [~np.isnan(column.spread) for column in columns.values() if column.spread is not None]
    keys = np.zeros(usable.size, dtype=np.int64)
    for mask in filled:
        keys = keys * 2 + mask
    for chosen in words.values():
        _, codes = np.unique(np.asarray(chosen, dtype=str), return_inverse=True)
        keys = keys * (int(codes.max(initial=0)) + 1) + codes
    rows = np.flatnonzero(usable)
    if rows.size == 0:
        return []
    order = rows[np.argsort(keys[rows], kind="stable")]
    found = []
    for members in np.split(order, np.flatnonzero(np.diff(keys[order])) + 1):
        first = int(members[0])
        kind = (*(bool(mask[first]) for mask in filled), *(chosen[first] for chosen in words.values()))
        found.append((kind, members))
    return found


def _setup_of(
    setup: Setup, columns: Mapping[str, Column], words: Mapping[str, Sequence[str]], members: NDArray[np.intp]
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
    first = int(members[0])
    chosen = {name: cells[first] for name, cells in words.items() if cells[first]}
    named = {name: chosen.pop(name) for name in materials.NAMED_BY if name in chosen}
    made = replace(setup, estimates=estimates, choices={**setup.choices, **chosen})
    return _with_materials(made, named)


def _with_materials(setup: Setup, named: Mapping[str, str]) -> Setup:
    """Return the set-up with the densities of the named materials, at each row's own air temperature.

    Raises :class:`InputError` where one is not known, or stands beside a density or a volume.
    """
    estimates, choices = dict(setup.estimates), dict(setup.choices)
    for name, word in named.items():
        body = name.partition(".")[0]
        beside = [one for one in (f"{body}.density", f"{body}.volume") if one in estimates]
        if beside:
            raise InputError([Fault(name, f"is given beside {' and '.join(beside)}.", "Keep one.")])
        material = materials.find(word)
        air = estimates.get("air.temperature")
        estimates |= materials.entries(name, material, None if air is None else air.centre)
        if body == "load":
            choices.setdefault("load.density_kind", material.kind)
    return replace(setup, estimates=estimates, choices=choices)


def _kind(first: Setup, seed: int) -> _Kind:
    """Return what rows like the first one share."""
    reading = reading_of(first)
    plan = plan_reading(first, float(reading.centre))
    bands = [i for i in range(len(plan.effects)) if i not in correctable(plan)]
    return _Kind(plan, *_sort_bands(plan, float(reading.centre), bands, seed))


def _sort_bands(
    plan: Plan, reading: float, bands: Sequence[int], seed: int
) -> tuple[list[int], dict[int, float], list[int]]:
    """Return which bands first order gives, which are the same [kg] for every row, and which want draws of each row."""
    linear: list[int] = []
    steady: dict[int, float] = {}
    rest: list[int] = []
    if not bands:
        return linear, steady, rest
    repeats = plan.setup.estimates.get("cycle.repeats", Estimate(1.0))
    solved = solve(plan, reading, bands=bands)
    drawn = bands_by_draws(plan, float(solved.mass), seed=seed, repeats=round(float(repeats.centre)))
    parts, factors, per = plan.parts(solved.values), lessened(plan), float(solved.per)
    for i in bands:
        first = math.sqrt(float(_noise(solved.effects[i], factors)) + (float(parts.effect(i)) * per) ** 2)
        if abs(first - drawn[i] * per) <= ALIKE * drawn[i] * per:
            linear.append(i)
        elif plan.reaches(mass_row(plan), plan.effects[i]) or any(
            plan.reaches(j, plan.effects[i]) for j, leaf in enumerate(plan.leaves) if leaf.origin == "given"
        ):
            rest.append(i)
        else:
            steady[i] = drawn[i]
    return linear, steady, rest


def _by_row(plan: Plan, solved: Solution, bands: Sequence[int], size: int, seed: int) -> Floats:
    """Return the mean square about zero [kg²] of some bands in each row."""
    drawn = draws(len(plan.leaves), max(1, ROW_DRAWS // BATCH), seed)
    found = np.zeros(size)
    for part, cut, leaf_values in drawn_rows(plan, solved.mass, drawn, slice(0, ROW_DRAWS), lessened(plan), size):
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
