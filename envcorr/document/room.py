"""The room check in words: the answer first, then what spoils it, then everything it rests on."""

from __future__ import annotations

import envcorr
from envcorr import units
from envcorr.document.blocks import Block, Cell, Column, Group, Heading, Item, Listing, Table, Text, Tone, Verdict
from envcorr.document.room_basis import (
    VISIBLE,
    any_treatment,
    decisive,
    e_word,
    first_order,
    minimum_weight,
    not_assessed,
    quantities,
    total_words,
    totals,
)
from envcorr.document.scene import scene
from envcorr.document.wording import MassScale, assumed, capital, notices, percent, share, unused
from envcorr.jobs.room import EffectRow, RoomResult
from envcorr.jobs.weighings import STATES

__all__ = ["document"]

TONES: dict[str, Tone] = {
    "reached": "good",
    "reached once corrected": "good",
    "reached once treated": "caution",
    "undecided": "open",
    "not reached": "bad",
}
MATTERS = 0.05
"""Of the mean squared error, or of e95: what changes less is not dwelt on (judgement)."""


def document(result: RoomResult) -> list[Block]:
    """Return the page of a room check."""
    scale = MassScale.fitting(result.resolution, (result.total(state).whole.summary.largest for state in STATES))
    return [
        *scene(result.plan, result.resolution, "Room check"),
        _verdict(result, scale),
        *_first_to_improve(result, scale),
        *_corrections(result, scale),
        *_effects(result, scale),
        *_remedies(result),
        *totals(result, scale),
        *quantities(result, scale),
        *not_assessed(result),
        *assumed(result.assumed),
        *unused(result.unused),
        *minimum_weight(result),
        *first_order(result),
        *notices(result.notices, (row.caution for row in _ranked(result) if row.caution and _matters(result, row))),
        Text(f"{result.draws} draws (JCGM 101:2008), seed {result.seed}; envcorr {envcorr.__version__}.", quiet=True),
    ]


# What is asked, and the answer -----------------------------------------------------------------------------


def _verdict(result: RoomResult, scale: MassScale) -> Verdict:
    verdict = result.verdict
    total = result.total(verdict.state)
    bounds = scale.brief(total.surroundings.bound, 4), scale.brief(total.whole.bound, 4)
    p = [percent(total.surroundings.conformance_probability), percent(total.whole.conformance_probability)]
    state = {"as_read": "As read", "corrected": "Once corrected", "treated": "Corrected and treated"}[verdict.state]
    if verdict.state == "treated" and not any_treatment(result):
        state = "Corrected as far as can be"
    rule = (
        f"{state}, the error from the surroundings alone stays within ±{bounds[0]} ({100 * result.within:g} % of the "
        f"target) with a probability of {p[0]}, that of the whole weighing within ±{bounds[1]} with {p[1]}; both must "
        f"reach {100 * result.probability:g} %."
    )
    sentences = [verdict.reason, rule]
    if warnings := sum(notice.level == "warning" for notice in result.notices):
        sentences.append(f"Mind the {'warning' if warnings == 1 else f'{warnings} warnings'} further down.")
    return Verdict(capital(verdict.answer), TONES[verdict.answer], tuple(sentences))


def _first_to_improve(result: RoomResult, scale: MassScale) -> list[Block]:
    by_name = {row.name: row for row in result.effects}
    first = by_name.get(result.verdict.first_to_improve)
    now = decisive(result)
    if first is None or first.e95_without >= now.summary.largest * (1 - VISIBLE):
        return []
    e = e_word(result)
    text = (
        f"{capital(first.title)}: without it the {e} of the {total_words(result)} would be "
        f"{scale.brief(first.e95_without)}, not {scale.brief(now.summary.largest)} "
        f"(allowed: {scale.brief(now.bound, 4)})."
    )
    quantity = next((row for row in result.quantities if row.origin != "internal"), None)
    if quantity and quantity.e95_without < now.summary.largest * (1 - VISIBLE):
        text += (
            f" The quantity to know better first is the {quantity.label} ({quantity.name}): known exactly, it would "
            f"leave {scale.brief(quantity.e95_without)}."
        )
    more = ", should more be wanted" if result.verdict.answer.startswith("reached") else ""
    return [Heading(f"First to improve{more}"), Text(text)]


def _corrections(result: RoomResult, scale: MassScale) -> list[Block]:
    rows = [row for row in result.effects if row.correction]
    if not rows:
        return []
    needless = result.verdict.answer == "reached"
    items = [
        Item(capital(row.title), f"add {scale.with_unit(row.correction or 0.0, signed=True)} to the reading")
        for row in rows
    ]
    if len(rows) > 1:
        total = sum(row.correction or 0.0 for row in rows)
        items.append(Item("Together", f"add {scale.with_unit(total, signed=True)} to the reading"))
    heading = "Correction" if len(rows) == 1 else "Corrections"
    return [Heading(f"{heading}, not needed for this target" if needless else heading), Listing(tuple(items))]


# What spoils it --------------------------------------------------------------------------------------------


def _ranked(result: RoomResult) -> list[EffectRow]:
    """Return the effects, the one whose absence would help most first."""
    return sorted(result.effects, key=lambda row: (row.e95_without, -abs(row.mean_error) - 2 * row.u))


def _effects(result: RoomResult, scale: MassScale) -> list[Block]:
    e, scope = e_word(result), result.decisive
    rooms: list[tuple[Cell, ...]] = []
    own: list[tuple[Cell, ...]] = []
    for row in _ranked(result):
        counts = scope in row.share
        part = row.share.get(scope, 0.0)
        cells = (
            capital(row.title),
            scale.text(row.mean_error, signed=True),
            scale.text(row.u),
            scale.text(row.e95_without) if counts else "–",
            share(part) if counts else "–",
            part if counts else None,
        )
        (own if row.own else rooms).append(cells)
    remainder = result.interaction_share[scope]
    if abs(remainder) >= VISIBLE:
        text = scale.text(result.interaction, signed=True)
        rooms.append(("Interaction of the effects", text, "", "", share(remainder), remainder))
    groups = [Group(tuple(rooms), "What the room does"), Group(tuple(own), "The balance's own part")]
    caption = (
        f"{e}: {100 * result.probability:g} % of the errors stay within it. Share: of the mean squared error of the "
        f"{total_words(result)}; a negative one offsets others."
    )
    if scope == "surroundings" and own:
        caption += " The surroundings alone decide here, so the balance's part has no share."
    columns = (
        Column("Effect"),
        Column("mean error", "right"),
        Column("u", "right"),
        Column(f"{e} without", "right"),
        Column("share", "right"),
        Column("", "bar"),
    )
    heading = Heading(f"What each effect does to one weighing, in {scale.unit}")
    return [heading, Table(columns, tuple(group for group in groups if group.rows), caption)]


def _matters(result: RoomResult, row: EffectRow) -> bool:
    if row.name in result.verdict.treat:
        return True
    now = decisive(result).summary.largest
    return abs(row.share.get(result.decisive, 0.0)) >= MATTERS or row.e95_without < (1 - MATTERS) * now


def _remedies(result: RoomResult) -> list[Block]:
    items = []
    for row in _ranked(result):
        if not _matters(result, row):
            continue
        sentences = []
        if row.treatment:
            leaves = f"; what is left then: {row.leaves}" if row.leaves else ""
            sentences.append(f"To remove it: {row.treatment}{leaves}.")
            if row.passes_without and result.corrected.passes is False:
                sentences.append("Without it, the corrected weighing would reach the target.")
        if row.test:
            sentences.append(f"To see it: {row.test[:1].lower()}{row.test[1:]}")
        sentences += [f"{capital(one.label)}: {units.show(one.value, one.kind)}." for one in row.answers]
        if sentences:
            items.append(Item(capital(row.title), " ".join(sentences)))
    return [Heading("What to do about it"), Listing(tuple(items))] if items else []
