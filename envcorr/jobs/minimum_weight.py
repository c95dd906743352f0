"""The smallest net mass that can be weighed with a demanded relative accuracy."""

from __future__ import annotations

from collections.abc import Callable, Sequence
from dataclasses import dataclass, replace
from typing import Any

import numpy as np

from envcorr.effects.repeatability import ROUNDING_FLOOR
from envcorr.errors import Notice
from envcorr.estimate import Estimate, Value
from envcorr.model import make_plan
from envcorr.plan import Plan
from envcorr.propagation import largest_with, partial_quantile

__all__ = ["Least", "MinimumWeight", "minimum_weight"]

COVERAGE_FACTOR = 2.0
"""USP <41>, from memory: twice the standard deviation."""
_WITHOUT_CAPACITY = 1e4  # times the load: the largest mass looked at where no capacity is given (judgement)
_SPAN = 1e9  # masses looked at reach this far below the largest (judgement)
_STEP = 1e-3  # relative width to which the mass is found (judgement)


@dataclass(frozen=True, slots=True)
class Least:
    """A minimum weight [kg], or None and the reason why there is none."""

    mass: float | None
    reason: str = ""


@dataclass(frozen=True, slots=True)
class MinimumWeight:
    """Minimum net weights: from repeatability alone (USP <41>), and from the whole error, as read and corrected."""

    accuracy: float
    repeatability: Least
    as_read: Least
    corrected: Least
    notices: tuple[Notice, ...] = ()


def minimum_weight(
    plan: Plan, leaf_values: Sequence[Value], base: Sequence[Any], *, probability: float, accuracy: float
) -> MinimumWeight:
    """Return the smallest net masses for which the error stays within ``accuracy`` (a number) of the mass.

    The whole error is computed anew at each mass looked at, on the same draws; a volume that was given directly grows
    with the mass.
    """
    from_repeatability = _from_repeatability(plan, accuracy)
    rows = [row for row, leaf in enumerate(plan.leaves) if leaf.name in ("load.mass", "load.volume")]
    centre = float(plan.centres()[plan.targets["mass"]])
    capacity = plan.setup.estimates.get("balance.max_capacity")
    container = plan.setup.estimates.get("container.mass")
    tare = float(container.centre) if container else 0.0
    largest = max(float(capacity.centre) - tare, centre) if capacity else _WITHOUT_CAPACITY * centre
    whole = range(len(plan.effects))

    def values_at(mass: float) -> list[Any]:
        moved = list(leaf_values)
        for row in rows:
            by_mass = plan.leaves[row].name == "load.mass"
            moved[row] = mass if by_mass else leaf_values[row] * (mass / centre)
        if len(rows) == 1:
            return plan.evaluate(moved, base=base, changed=rows[0])
        # what is known of a given volume stands fixed in the plan, so another mass needs another one
        scaled = {leaf.name: _scaled(leaf.estimate, mass / centre) for leaf in (plan.leaves[row] for row in rows)}
        setup = replace(plan.setup, estimates={**plan.setup.estimates, **scaled})
        return make_plan(setup, catalogue=plan.catalogue).evaluate(moved)

    def as_read(mass: float) -> Value:
        return plan.parts(values_at(mass)).total(whole)

    def corrected(mass: float) -> Value:
        values = values_at(mass)
        error = plan.parts(values).total(whole) - plan.parts(values, known=True).total(whole)
        return plan.per_correction * error

    def culprit(mass: float, *, known: bool) -> str:
        values = values_at(mass)
        parts, taken = plan.parts(values), plan.parts(values, known=True)

        def left(i: int) -> float:
            defines = plan.effects[i].effect.definition
            error = parts.effect(i, defines=defines) - (taken.effect(i, defines=defines) if known else 0.0)
            return largest_with(error, probability)

        return plan.effects[max(whole, key=left)].effect.title

    lacking = [n.effect for n in plan.not_assessed if n.effect.needed == "always"]
    missing = [effect.title for effect in lacking if effect.name not in plan.setup.waived]
    if centre <= 0 or missing or not plan.effects:
        why = Least(None, f"not computed: {' and '.join(missing) or 'the load'} could not be assessed")
        return MinimumWeight(accuracy, from_repeatability, why, why)
    found = []
    for error, known in ((as_read, False), (corrected, True)):
        mass = _solve(error, largest, probability, accuracy)
        found.append(Least(mass) if mass else Least(None, f"none: {culprit(largest, known=known)}"))
    return MinimumWeight(
        accuracy,
        from_repeatability,
        found[0],
        found[1],
        _against_gross(plan, from_repeatability, centre, container),
    )


def _scaled(estimate: Estimate, factor: float) -> Estimate:
    spread = estimate.spread if estimate.shape == "log-uniform" else estimate.spread * factor
    return replace(estimate, centre=estimate.centre * factor, spread=spread)


def _from_repeatability(plan: Plan, accuracy: float) -> Least:
    """Return 2 max(s, 0.41 d) / accuracy (USP <41>, from memory), s with a measured disturbance added."""
    given = {name: float(np.mean(estimate.centre)) for name, estimate in plan.setup.estimates.items()}
    lacks = [n for n in ("balance.repeatability", "balance.scale_interval") if n not in given]
    if lacks:
        return Least(None, f"not computed: lacks {' and '.join(lacks)}")
    variance = given["balance.repeatability"] ** 2
    if any(planned.effect.name == "disturbance" for planned in plan.effects):
        variance += max(given["balance.scatter_on"] ** 2 - given["balance.scatter_off"] ** 2, 0.0)
    return Least(COVERAGE_FACTOR * max(variance**0.5, ROUNDING_FLOOR * given["balance.scale_interval"]) / accuracy)


def _solve(error: Callable[[float], Value], largest: float, probability: float, accuracy: float) -> float | None:
    """Return the smallest mass from which on the error is within the accuracy, or None where ``largest`` fails.

    On every draw the error is nearly A + B m, so two runs give the mass beyond which that draw is within, and the
    quantile over the draws gives a guess; runs there narrow it down until one just passes and one just fails.
    """

    def passes(mass: float) -> bool:
        return largest_with(error(mass), probability) <= accuracy * mass

    if not passes(largest):
        return None
    low, high = largest / _SPAN, largest  # fails or unknown, passes
    for _ in range(60):
        guess = _guess(error, low, high, probability, accuracy)
        above, below = min(guess * (1 + _STEP), high), max(guess * (1 - _STEP), low)
        if passes(below):
            high = below
        elif passes(above):
            return above
        else:
            low = above
        if high / low < 1 + _STEP:
            return high
    return high


def _guess(error: Callable[[float], Value], low: float, high: float, probability: float, accuracy: float) -> float:
    at_low, at_high = error(low), error(high)
    slope = (at_high - at_low) / (high - low)
    offset = at_low - slope * low
    # |A/m + B| <= accuracy: the sign of A says at which bound; a draw that never gets within counts as none
    room = accuracy - np.sign(offset) * slope
    size = np.abs(np.atleast_1d(offset))
    most = np.divide(np.maximum(room, 0.0), size, out=np.full_like(size, np.inf), where=size > 0)
    inverse = float(partial_quantile(np.broadcast_to(most, (max(most.size, 2),)), 1 - probability))
    linear = 1 / inverse if inverse > 0 else high
    return linear if low < linear < high else float(np.sqrt(low * high))


def _against_gross(plan: Plan, least: Least, net: float, container: Any) -> tuple[Notice, ...]:
    if least.mass is None or container is None:
        return ()
    gross = net + float(container.centre)
    if net < least.mass <= gross:
        from envcorr import units

        limit, own, both = (units.show(mass, "mass") for mass in (least.mass, net, gross))
        sentence = (
            f"The minimum weight {limit} applies to the net mass ({own}), which is below it; the gross load ({both}) "
            "does not count."
        )
        return (Notice("minimum weight", sentence, "USP <41>, from memory"),)
    return ()
