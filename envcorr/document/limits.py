"""How good each quantity must become, in words."""

from __future__ import annotations

from dataclasses import replace

import envcorr
from envcorr import units
from envcorr.document.blocks import Block, Column, Figure, Figures, Group, Heading, Table, Text, Verdict
from envcorr.document.scene import scene
from envcorr.document.wording import MassScale, capital, estimate_text, joined, mass, percent
from envcorr.estimate import Estimate
from envcorr.jobs.limits import Limit, LimitsResult

__all__ = ["document", "size_text"]

STATES = {"as_read": "as it is read", "corrected": "once corrected", "treated": "once corrected and treated"}
ORDER = ("must become", "two effects cancel here", "already better")
TITLES = {
    "must become": "Must become better: each alone would do",
    "two effects cancel here": "Less of it is not always better: two effects cancel here",
    "already better": "Already better than they must be",
}
SHOWN = 8
"""Quantities that are listed as worth improving or measuring."""


def document(result: LimitsResult) -> list[Block]:
    """Return the page of the limits."""
    scale = MassScale.fitting(result.target.resolution, [result.e95])
    return [
        *scene(result.plan, result.target.resolution, "Limits"),
        _verdict(result),
        *_limits(result),
        *_joint(result, scale),
        *_worth(result, scale),
        *_masses(result),
        Text(
            f"Every limit lies between a run that passes and one that fails, a thousandth apart, on the same "
            f"{result.draws} draws (seed {result.seed}); printed rounded to the safe side. envcorr "
            f"{envcorr.__version__}.",
            quiet=True,
        ),
    ]


def _verdict(result: LimitsResult) -> Verdict:
    sentences = []
    if result.broken_by_balance is not None:
        sentences.append(
            f"The balance's own repeatability and rounding alone keep the error only within "
            f"{mass(result.broken_by_balance, 3)}, more than the target allows: with this balance no room will do. "
            "Average more weighings (cycle.repeats), or take a better balance or a wider target."
        )
    if result.missing:
        sentences.append(f"Not assessed, though this load needs it: {joined(result.missing)}. No limit counts it.")
    surroundings, whole = (percent(result.now.probability[scope]) for scope in ("surroundings", "whole"))
    target = result.target
    sentences.append(
        f"{capital(STATES[result.state])}, the error from the surroundings alone stays within "
        f"±{mass(target.bound('surroundings'))} with a probability of {surroundings}, that of the whole weighing "
        f"within ±{mass(target.bound('whole'))} with {whole}; both must reach {100 * target.probability:g} %."
    )
    if result.now.passes and not result.missing:
        return Verdict("the target is reached as it is", "good", tuple(sentences))
    answer = "undecided" if result.now.passes else "the target is not reached as it is"
    return Verdict(answer, "open" if result.now.passes else "bad", tuple(sentences))


def _limits(result: LimitsResult) -> list[Block]:
    groups = []
    for answer in ORDER:
        rows = tuple(_row(limit) for limit in result.limits if limit.answer == answer)
        if rows:
            groups.append(Group(rows, TITLES[answer]))
    blocks: list[Block] = [Heading("How good must each quantity be")]
    if groups:
        columns = (Column("Quantity"), Column("now"), Column("at most, or within"), Column("that is"))
        blocks.append(Table(columns, tuple(groups), "One at a time, all others as they are."))
    hopeless = [limit.name for limit in result.limits if limit.answer == "cannot be reached by this alone"]
    if hopeless:
        blocks.append(Text(f"However good, by none of these alone is the target reached: {joined(hopeless)}."))
    free = [limit.name for limit in result.limits if limit.answer == "no limit found"]
    if free:
        blocks.append(Text(f"No limit was found, up to a hundred times what is given, for {joined(free)}.", quiet=True))
    return blocks


def _row(limit: Limit) -> tuple[str, str, str, str]:
    comment = ""
    if limit.factor is not None:
        better = limit.answer == "already better"
        comment = f"{limit.factor:.3g} times as much" if better else f"{100 * limit.factor:.3g} % of now"
    return capital(limit.label), size_text(limit.now, limit), _required(limit), comment


def _required(limit: Limit) -> str:
    if limit.mode == "value" and (limit.low is not None or limit.high is not None):
        low, high = (None if end is None else units.show(end, limit.kind, 4) for end in (limit.low, limit.high))
        if low and high:
            return f"{low} to {high}"
        return f"from {low} on" if low else f"up to {high}"
    if limit.required is None:
        return "–"
    return size_text(_rounded(limit.required, limit), limit)


def _rounded(estimate: Estimate, limit: Limit) -> Estimate:
    """Return an estimate whose size is rounded down to what is printed."""
    spread = units.spread_kind(limit.kind) if limit.mode == "spread" else limit.kind
    if estimate.is_exact:
        return estimate.about(units.rounded_down(float(estimate.centre), limit.kind))
    if estimate.shape == "log-uniform" or (limit.mode == "size" and estimate.centre):
        return estimate
    return replace(estimate, spread=units.rounded_down(float(estimate.spread), spread))


def size_text(estimate: Estimate, limit: Limit) -> str:
    """Return what of a quantity the limit is about: its spread, its size, or its value."""
    if limit.mode != "spread" or estimate.shape == "log-uniform":
        return estimate_text(estimate, limit.kind, 4).removesuffix(", exact")
    shape = {"rectangular": "", "normal": " (u)", "arcsine": ", cycling"}.get(estimate.shape, f", {estimate.shape}")
    return f"±{units.show(float(estimate.spread), units.spread_kind(limit.kind), 3)}{shape}"


def _joint(result: LimitsResult, scale: MassScale) -> list[Block]:
    joint = result.joint
    if not joint.names:
        return []
    blocks: list[Block] = [Heading("All together")]
    if joint.factor is None:
        told = "Even with nothing left of all of them the target would not be reached."
    elif joint.factor < 1:
        told = f"The target is reached with all of them at {100 * joint.factor:.3g} % of what they are."
    elif joint.factor == 1:
        told = "As they are they just do."
    else:
        told = f"All of them at once may be {joint.factor:.3g} times what they are."
    blocks.append(Text(f"{told} Counted: {joined(joint.names)}."))
    if joint.steps:
        rows = tuple(
            (
                str(i),
                step.name,
                f"half: {estimate_text(step.estimate, step.kind, 3).removesuffix(', exact')}",
                scale.text(step.e95),
            )
            for i, step in enumerate(joint.steps, start=1)
        )
        columns = (Column("Step"), Column("Halve"), Column("to"), Column(f"e95 then [{scale.unit}]", "right"))
        end = "then the target is reached" if joint.reached else "and that is as far as halving helps"
        blocks.append(Table(columns, (Group(rows),), f"Each step takes what lessens e95 most; {end}."))
    return blocks


def _worth(result: LimitsResult, scale: MassScale) -> list[Block]:
    rows = []
    for one in result.worth[:SHOWN]:
        if min(one.held, one.held if one.measured is None else one.measured) > 0.99 * result.e95:
            continue  # less than a hundredth is not worth a line
        measured = "no correction" if one.measured is None else scale.text(one.measured)
        rows.append((capital(one.label), scale.text(one.held), measured))
    if not rows:
        return []
    columns = (
        Column("Quantity"),
        Column(f"held exactly [{scale.unit}]", "right"),
        Column(f"measured exactly [{scale.unit}]", "right"),
    )
    caption = (
        f"The e95 that would be left; it is {scale.with_unit(result.e95)} now, allowed are "
        f"{scale.with_unit(result.allowed)}. What is measured is corrected for; what is held need not be."
    )
    return [Heading("Worth holding, worth measuring"), Table(columns, (Group(tuple(rows)),), caption)]


def _masses(result: LimitsResult) -> list[Block]:
    found = result.masses
    if not found.works:
        return [Heading("Net mass"), Text("No net mass was found that works, from a thousandth to a thousand times.")]
    low = "no smallest was found" if found.smallest is None else mass(found.smallest)
    high = "no largest was found" if found.largest is None else mass(found.largest)
    return [Heading("Net mass"), Figures((Figure("Smallest that works", low), Figure("Largest that works", high)))]
