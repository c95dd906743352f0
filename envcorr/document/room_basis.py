"""The lower half of the room check's page: the totals, and everything that they rest on."""

from __future__ import annotations

from envcorr import units
from envcorr.document.blocks import Block, Column, Figure, Figures, Group, Heading, Item, Listing, Table, Text
from envcorr.document.wording import MassScale, capital, estimate_text, joined, mass, percent
from envcorr.jobs.minimum_weight import Least
from envcorr.jobs.room import SCOPES, QuantityRow, RoomResult
from envcorr.jobs.room import Figures as Found
from envcorr.jobs.verdict import is_needed
from envcorr.jobs.weighings import STATES, Scope, State

__all__ = [
    "LISTED",
    "STATE_WORDS",
    "VISIBLE",
    "any_treatment",
    "decisive",
    "e_word",
    "first_order",
    "minimum_weight",
    "not_assessed",
    "quantities",
    "total_words",
    "totals",
]

STATE_WORDS: dict[State, str] = {"as_read": "as read", "corrected": "corrected", "treated": "treated"}
SCOPE_WORDS: dict[Scope, str] = {"surroundings": "surroundings alone", "whole": "whole weighing"}
VISIBLE = 0.005
"""Of e95: what changes it less is counted, not listed (judgement)."""
LISTED = 5
"""Quantities that are listed even if they change next to nothing (judgement)."""


def e_word(result: RoomResult) -> str:
    """Return the name of the quantile of the absolute error: e95, or as the demanded probability has it."""
    return f"e{100 * result.probability:g}"


def decisive(result: RoomResult) -> Found:
    """Return the figures of the total on which shares and remedies are based."""
    found: Found = getattr(result.total(result.basis), result.decisive)
    return found


def total_words(result: RoomResult) -> str:
    """Return the name of the total that shares and remedies are about."""
    scope = "surroundings" if result.decisive == "surroundings" else "whole weighing"
    return f"{scope} as read" if result.basis == "as_read" else f"{STATE_WORDS[result.basis]} {scope}"


def any_treatment(result: RoomResult) -> bool:
    """Return whether any effect can be removed by a treatment."""
    return any(row.treatment for row in result.effects)


# The totals, and what each quantity would gain ------------------------------------------------------------


def totals(result: RoomResult, scale: MassScale) -> list[Block]:
    """Return the table of the totals, for the surroundings and for the whole weighing."""
    e = e_word(result)
    states = [state for state in STATES if state != "treated" or any_treatment(result)]
    groups = []
    for scope in SCOPES:
        rows = []
        for state in states:
            found: Found = getattr(result.total(state), scope)
            answer = {True: "passes", False: "fails", None: "too near to tell"}[found.passes]
            rows.append(
                (
                    capital(STATE_WORDS[state]),
                    scale.text(found.summary.mean, signed=True),
                    scale.text(found.summary.u),
                    scale.text(found.summary.largest),
                    scale.text(found.supported_resolution),
                    percent(found.conformance_probability),
                    answer,
                )
            )
        bound = scale.brief(getattr(result.as_read, scope).bound, 4)
        groups.append(Group(tuple(rows), f"{capital(SCOPE_WORDS[scope])}, allowed ±{bound}"))
    columns = (
        Column("Total"),
        *(Column(title, "right") for title in ("mean error", "u", e, "supports", "probability")),
        Column("", "left"),
    )
    differences = [f"{scale.brief(result.difference_resolution[s])} {STATE_WORDS[s]}" for s in states]
    caption = (
        "Supports: the smallest target resolution that would pass. Between two weighings of one load, differences can "
        f"be told from {joined(differences)}."
    )
    if len(states) < len(STATES):
        caption += " No effect here can be treated away."
    return [Heading(f"The totals, in {scale.unit}"), Table(columns, tuple(groups), caption)]


def quantities(result: RoomResult, scale: MassScale) -> list[Block]:
    """Return what each quantity, known exactly, would leave; sensors apart."""
    now = decisive(result).summary.largest
    helps = [row for row in result.quantities if row.e95_without < (1 - VISIBLE) * now]
    first = [row for row in result.quantities if row.origin != "internal"][:LISTED]
    listed = [row for row in result.quantities if row in helps or row in first]

    def cells(row: QuantityRow) -> tuple[str, str, str]:
        label = row.label
        if row.together_with:
            label += f" (together with {joined(row.together_with)})"
        kind = units.spread_kind(row.kind) if row.sensor else row.kind
        taken = "as modelled" if row.origin == "internal" else estimate_text(row.estimate, kind)
        return capital(label), taken, scale.text(row.e95_without)

    groups = [
        Group(tuple(cells(row) for row in listed if not row.sensor), "What the room, the load and the balance do"),
        Group(tuple(cells(row) for row in listed if row.sensor), "How well the sensors tell it"),
    ]
    heading = Heading("What a quantity known exactly would leave")
    caption = f"Of the {total_words(result)}: now {scale.brief(now)}."
    if rest := len(result.quantities) - len(listed):
        caption += f" {rest} more {'quantity changes' if rest == 1 else 'quantities change'} it by less than 1 %."
    columns = (Column("Quantity"), Column("taken as"), Column(f"{e_word(result)} [{scale.unit}]", "right"))
    shown = tuple(group for group in groups if group.rows)
    if not shown:
        return [heading, Text(caption)] if result.quantities else []
    return [heading, Table(columns, shown, caption)]


# What it rests on ------------------------------------------------------------------------------------------


def not_assessed(result: RoomResult) -> list[Block]:
    """Return the effects that could not be assessed, and what each lacks."""
    items = []
    for one in result.not_assessed:
        text = f"lacks {joined(one.lacks)}."
        if one.effect.name in result.setup.waived:
            text += " Waived in the set-up."
        elif is_needed(one.effect.needed, result.setup):
            text += " This load needs it."
        items.append(Item(capital(one.effect.title), text))
    return [Heading("Not assessed"), Listing(tuple(items))] if items else []


def minimum_weight(result: RoomResult) -> list[Block]:
    """Return the smallest net masses, or why there is none."""
    found = result.minimum_weight

    def text(least: Least) -> str:
        return least.reason if least.mass is None else mass(least.mass)

    accuracy = units.show(found.accuracy, "fraction")
    figures = (
        Figure("From the repeatability alone", text(found.repeatability)),
        Figure("Whole weighing, as read", text(found.as_read)),
        Figure("Whole weighing, corrected", text(found.corrected)),
    )
    return [Heading(f"Smallest net mass for an accuracy of {accuracy}"), Figures(figures)]


def first_order(result: RoomResult) -> list[Block]:
    """Return how first order compares with Monte Carlo, and what it does not see."""
    first = result.first_order
    whole = result.total(result.basis).whole.summary
    difference, tolerance = mass(max(first.difference), 2), mass(first.tolerance, 2)
    text = (
        f"First order (JCGM 100:2008) gives u = {mass(first.budget.u, 2)} for the whole weighing, "
        f"{STATE_WORDS[result.basis]}, Monte Carlo {mass(whole.u, 2)}; the ends of their coverage intervals lie up to "
        f"{difference} apart, "
    )
    if first.agrees:
        text += f"within the {tolerance} that JCGM 101:2008, clause 8, allows: they agree."
    else:
        text += (
            f"more than the {tolerance} that JCGM 101:2008, clause 8, allows: they disagree, and the Monte Carlo "
            "figures count."
        )
    if first.blind_to:
        titles = {row.name: row.title for row in result.effects}
        names = joined(titles.get(name, name) for name in first.blind_to)
        text += (
            f" First order does not see {names}: at the nominal values the slope is zero or has no single value there, "
            "so the spread of the inputs does not show."
        )
    return [Heading("Monte Carlo and first order"), Text(text)]
