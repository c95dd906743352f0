"""The report to file: a page, and what an auditor wants beside it."""

from __future__ import annotations

from collections.abc import Sequence

import envcorr
from envcorr.document.blocks import Block, Column, Group, Heading, Item, Listing, Signature, Table, Text
from envcorr.document.wording import capital, estimate_text
from envcorr.plan import Plan

__all__ = ["report"]

LINES = ("Computed by, date", "Notices accepted by, date", "because")


def report(page: Sequence[Block], plan: Plan) -> list[Block]:
    """Return a page with the inputs as understood, methods with references, version, hash, and room for signatures."""
    return [*page, *_given(plan), *_methods(plan), *_identity(plan)]


def _given(plan: Plan) -> list[Block]:
    rows = []
    for name, text in plan.setup.written.items():
        place = plan.catalogue.find(name)
        estimate = plan.setup.estimates.get(name)
        if place is None or estimate is None:
            choice = plan.catalogue.choices.get(name)
            rows.append((name, choice.label if choice else "", text, ""))
            continue
        rows.append((name, place.label, text, estimate_text(estimate, place.kind)))
    if not rows:
        return []
    columns = (Column("Name"), Column("what it is"), Column("as given"), Column("understood as"))
    return [Heading("What was given, and how it was understood"), Table(columns, (Group(tuple(rows)),))]


def _methods(plan: Plan) -> list[Block]:
    items = []
    for planned in plan.effects:
        ways = "; ".join(planned.ways)
        items.append(Item(capital(planned.effect.title), f"{planned.effect.source}{f' ({ways})' if ways else ''}."))
    general = (
        "Uncertainty: JCGM 100:2008 and JCGM 101:2008. Every formula and constant has its source in the program: "
        "envcorr explain NAME."
    )
    return [Heading("Methods and references"), Listing(tuple(items)), Text(general)]


def _identity(plan: Plan) -> list[Block]:
    told = f"envcorr {envcorr.__version__}; SHA-256 of what was given: {plan.setup.digest}."
    return [Heading("Signed"), Signature(LINES), Text(told, quiet=True)]
