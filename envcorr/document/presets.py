"""The usual disturbances that can be named instead of a figure, in words."""

from __future__ import annotations

from envcorr import presets, units
from envcorr.catalogue import CATALOGUE
from envcorr.document.blocks import Block, Heading, Item, Listing, Text
from envcorr.document.wording import capital

__all__ = ["CHOICES", "document"]

CHOICES = {"draught": "draught.preset", "vibration": "vibration.criterion"}
"""What is written in a set-up file to name a preset of a subject."""


def document() -> list[Block]:
    """Return the page that lists every preset with its figure and source."""
    blocks: list[Block] = [
        Heading("Usual disturbances by name", level=1),
        Text("Each stands for a figure that was not measured. A measurement at the bench beats every one."),
    ]
    for subject, choice in CHOICES.items():
        items = [
            Item(one.name, f"{units.show(one.value, one.kind)}: {one.text}. {one.source}.")
            for one in presets.of(subject).values()
        ]
        blocks += [Heading(capital(subject)), Text(f'Write {choice} = "{items[0].term}".'), Listing(tuple(items))]
    handling = CATALOGUE.choices["static.handling"]
    items = [Item(word, f"{text}.") for word, text in handling.options.items()]
    return [
        *blocks,
        Heading("Handling voltages"),
        Text(f'Write static.handling = "{items[0].term}". {handling.source}'.rstrip()),
        Listing(tuple(items)),
    ]
