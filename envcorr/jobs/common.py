"""What several questions share: notices from checks, and the plan's leaves as draws."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass
from typing import Any

import numpy as np
from numpy.typing import NDArray

from envcorr import units
from envcorr.errors import Fault, InputError, Notice
from envcorr.estimate import Estimate
from envcorr.plan import Plan

__all__ = ["Contribution", "correlation_matrix", "notices", "usual_range_notices"]


@dataclass(frozen=True, slots=True)
class Contribution:
    """One quantity's part in u: what it was taken as, and sensitivity times standard uncertainty, signed [SI]."""

    name: str
    label: str
    kind: str
    estimate: Estimate
    origin: str
    contribution: float


def notices(plan: Plan, values: Sequence[Any]) -> tuple[Notice, ...]:
    """Return what the plan's checks have to say about the nodes' values (floats, or arrays over the draws)."""
    found: dict[str, Notice] = {}
    for name, word in plan.setup.choices.items():
        note = (plan.catalogue.choices[name].notes or {}).get(word)
        if note:
            found[note] = Notice(name, note)
    best = plan.centres()
    for planned in plan.checks:
        # a remark concerns the best estimate, a warning every draw
        at = best if planned.check.level == "info" else values
        mask = planned.check.function(*[at[i] for i in planned.inputs])
        share = float(np.mean(mask))
        if share == 0.0:
            continue
        texts = {
            name: units.show(float(np.mean(plan.nodes[i].centre)), kind)
            for name, i, kind in zip(planned.names, planned.inputs, planned.kinds, strict=True)
        }
        sentence = planned.check.sentence.format(**texts)
        level: Any = planned.check.level
        whole = share == 1.0 or np.ndim(mask) == 0
        found.setdefault(
            sentence, Notice(planned.where, sentence, planned.check.source, level, None if whole else share)
        )
    return tuple(found.values())


def usual_range_notices(plan: Plan) -> tuple[Notice, ...]:
    """Return a notice for every given value that lies outside what is usual, with what may have been meant."""
    found = []
    for leaf in plan.leaves:
        quantity = leaf.place.quantity
        low, high = quantity.usual
        centre = float(np.mean(leaf.estimate.centre))
        if leaf.origin == "given" and not leaf.place.sensor and not low <= centre <= high:
            read = units.show(centre, quantity.kind)
            usual = f"{units.show(low, quantity.kind)} to {units.show(high, quantity.kind)}"
            sentence = f"{leaf.name} was read as {read}; usual is {usual}. {quantity.hint}".rstrip()
            found.append(Notice(leaf.name, sentence, "usual ranges are a judgement"))
    return tuple(found)


def correlation_matrix(plan: Plan) -> NDArray[np.float64] | None:
    """Return the matrix of the stated coefficients over the plan's leaves, or None where none is stated.

    Raises :class:`InputError` where a coefficient names something that does not enter the plan.
    """
    if not plan.setup.correlations:
        return None
    rows = {leaf.name: i for i, leaf in enumerate(plan.leaves)}
    matrix = np.eye(len(rows))
    faults = []
    for stated in plan.setup.correlations:
        missing = [name for name in (stated.first, stated.second) if name not in rows]
        if missing:
            problem = f"{' and '.join(missing)} is not drawn in this set-up."
            faults.append(Fault("correlation", problem, "Give the quantity with a spread, or leave the entry out."))
            continue
        i, j = rows[stated.first], rows[stated.second]
        matrix[i, j] = matrix[j, i] = stated.coefficient
    if faults:
        raise InputError(faults)
    return matrix
