"""The report to file: a page, and what an auditor wants beside it."""

from __future__ import annotations

import hashlib
import json
from collections.abc import Mapping, Sequence

import envcorr
from envcorr.document.blocks import Block, Column, Group, Heading, Item, Listing, Signature, Table, Text
from envcorr.document.wording import capital, estimate_text
from envcorr.plan import Plan

__all__ = ["report", "short_report"]

LINES = ("Computed by, date", "Notices accepted by, date", "because")


def report(page: Sequence[Block], plan: Plan) -> list[Block]:
    """Return a page with the inputs as understood, methods with references, version, hash, and room for signatures."""
    return [*page, *_given(plan), *_methods(plan), *_signed(plan.setup.digest)]


def short_report(page: Sequence[Block], inputs: Mapping[str, str], methods: Sequence[str]) -> list[Block]:
    """Return a page that has no set-up behind it with its inputs as typed, methods, version, hash, and signatures."""
    rows = tuple((name, text) for name, text in inputs.items())
    digest = hashlib.sha256(json.dumps(sorted(inputs.items())).encode()).hexdigest()
    return [
        *page,
        Heading("What was given"),
        Table((Column("Name"), Column("as given")), (Group(rows),)),
        Heading("Methods and references"),
        *(Text(method) for method in methods),
        *_signed(digest),
    ]


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


def _signed(digest: str) -> list[Block]:
    told = f"envcorr {envcorr.__version__}; SHA-256 of what was given: {digest}."
    return [Heading("Signed"), Signature(LINES), Text(told, quiet=True)]
