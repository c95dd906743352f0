"""What became of verifying a record, in words."""

from __future__ import annotations

import envcorr
from envcorr.document.blocks import Block, Heading, Item, Listing, Text, Verdict
from envcorr.jobs.verification import Verification

__all__ = ["document"]

KINDS = {"mass": "the mass of one sample", "table": "the masses of a table", "room": "a room check"}
MOST = 20
"""Departures that are listed."""


def document(found: Verification) -> list[Block]:
    """Return the page of a verified record."""
    if not found.unchanged:
        answer = Verdict("changed since it was written", "bad", ("The seal does not fit what the record holds.",))
    elif found.departures:
        answer = Verdict("not found again", "bad", ("What was computed now is not what the record says.",))
    elif found.largest:
        sentence = f"The same printed digits; the largest relative departure is {found.largest:.1e}."
        answer = Verdict("verified", "good", (sentence,))
    else:
        answer = Verdict("verified", "good", ("The same to the last digit.",))
    blocks: list[Block] = [Heading(f"Record of {KINDS[found.kind]}", level=1), answer]
    if found.departures:
        blocks += [Heading("What differs"), Listing(tuple(Item("", text) for text in found.departures[:MOST]))]
        if len(found.departures) > MOST:
            blocks.append(Text(f"And {len(found.departures) - MOST} more.", quiet=True))
    notes = [Item(name.replace("_", " "), text) for name, text in found.notes.items() if text]
    if notes:
        blocks += [Heading("Notes"), Listing(tuple(notes))]
    made = ", ".join(f"{name} {text}" for name, text in found.made_on.items())
    blocks.append(
        Text(f"Written by envcorr {found.made_by} ({made}); computed again by {envcorr.__version__}.", quiet=True)
    )
    return blocks
