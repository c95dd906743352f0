"""Masses by Monte Carlo (JCGM 101:2008): for one reading, or for each of many, with draws as a leading axis."""

from __future__ import annotations

import math
from collections.abc import Iterator, Sequence
from dataclasses import dataclass, replace
from typing import Any

import numpy as np
from numpy.typing import NDArray

from envcorr.estimate import Estimate, Value
from envcorr.jobs.common import correlation_matrix
from envcorr.jobs.solving import Solution, correctable, secants
from envcorr.jobs.weighings import inside_physics
from envcorr.plan import Plan
from envcorr.propagation import BATCH, Draws, draws

__all__ = ["MassDraws", "apart", "drawn_rows", "lessened", "masses_by_draws"]

_AT_A_TIME = 2**19
"""Draws times rows in work at a time."""
Floats = NDArray[np.float64]


@dataclass(frozen=True, slots=True)
class MassDraws:
    """Standard uncertainty and probabilistically symmetric coverage interval (JCGM 101:2008, 7.7), one a row [kg]."""

    u: Floats
    low: Floats
    high: Floats
    size: int


def lessened(plan: Plan) -> list[float]:
    """Return by what the mean of the repeats lessens each leaf's part: random noise only."""
    repeats = plan.setup.estimates.get("cycle.repeats", Estimate(1.0))
    factor = 1 / math.sqrt(float(np.max(repeats.centre)))
    return [factor if leaf.origin == "internal" and leaf.varies != "never" else 1.0 for leaf in plan.leaves]


def drawn_rows(
    plan: Plan, mass: Value, drawn: Draws, some: slice, factors: Sequence[float], size: int
) -> Iterator[tuple[slice, Plan, list[Any]]]:
    """Yield, for some of ``size`` rows at a time, which they are, their plan, and its leaves as draws times rows."""
    at_a_time = max(1, _AT_A_TIME // (some.stop - some.start))
    for start in range(0, size, at_a_time):
        part = slice(start, min(start + at_a_time, size))

        def of_rows(value: Any, part: slice = part) -> Any:
            return value[part] if np.ndim(value) else value

        leaves = tuple(
            replace(
                leaf,
                estimate=replace(
                    leaf.estimate, centre=of_rows(leaf.estimate.centre), spread=of_rows(leaf.estimate.spread)
                ),
            )
            for leaf in plan.leaves
        )
        cut = replace(plan, leaves=leaves, nodes=tuple(replace(n, centre=of_rows(n.centre)) for n in plan.nodes))
        values: list[Any] = []
        for j, (leaf, factor) in enumerate(zip(leaves, factors, strict=True)):
            if leaf.name == "load.mass":
                values.append(of_rows(mass))
            elif leaf.estimate.is_exact:
                values.append(leaf.estimate.centre)
            else:
                score = drawn.score(j, leaf.estimate.shape, leaf.estimate.dof)[some, np.newaxis]
                values.append(inside_physics(leaf.estimate.place(factor * score), leaf))
        yield part, cut, values


def masses_by_draws(
    plan: Plan,
    solved: Solution,
    reading: Estimate,
    size: int,
    *,
    count: int,
    probability: float,
    seed: int,
    names: Sequence[str] = ("load.mass",),
) -> dict[str, MassDraws]:
    """Return the masses of ``size`` readings by ``count`` draws each (at least 1024), and what else ``names`` has.

    Each draw solves the reading for the mass. What cannot be corrected never moves the value: it enters with either
    sign alike, so that its mean square about zero is what it adds.
    """
    batches = max(1, -(-count // BATCH))
    bands = [i for i in range(len(plan.effects)) if i not in correctable(plan)]
    first = len(plan.leaves)
    drawn = draws(first + 1 + len(bands), batches, seed).tied(correlation_matrix(plan))
    noise = drawn.score(first, reading.shape, reading.dof)[:, np.newaxis]
    signs = [np.sign(drawn.score(first + 1 + i, "rectangular", math.inf))[:, np.newaxis] for i in range(len(bands))]
    found = {name: MassDraws(np.empty(size), np.empty(size), np.empty(size), drawn.size) for name in names}
    tail = (1 - probability) / 2
    for part, cut, leaf_values in drawn_rows(plan, solved.mass, drawn, slice(0, drawn.size), lessened(plan), size):
        values = cut.evaluate(leaf_values)
        parts = cut.parts(values)
        shown, spread = (x[part] if isinstance(x, np.ndarray) else x for x in (reading.centre, reading.spread))
        left = shown - spread * noise
        for band, sign in zip(bands, signs, strict=True):
            left = left - sign * parts.effect(band)
        mass, _, values = secants(cut, left, leaf_values, values)
        for name, of_rows in found.items():
            value = mass if name == "load.mass" else values[plan.targets[name]]
            ordered = np.sort(np.broadcast_to(value, (drawn.size, part.stop - part.start)), axis=0)
            of_rows.u[part] = np.std(ordered, axis=0, ddof=1)
            of_rows.low[part], of_rows.high[part] = np.quantile(ordered, [tail, 1 - tail], axis=0)
    return found


def apart(mass: Value, half: Value, found: MassDraws) -> NDArray[np.bool_]:
    """Return where first order, mass ± half, is not validated to the first significant digit of u.

    JCGM 101:2008, 8.1.3: an end point further off than half a unit in that digit, u being the smaller of the two (a
    heavy tail makes that of the draws large).
    """
    with np.errstate(divide="ignore"):
        tolerance = 0.5 * 10.0 ** np.floor(np.log10(np.minimum(found.u, half / 2)))
    return np.maximum(np.abs(mass - half - found.low), np.abs(mass + half - found.high)) > tolerance
