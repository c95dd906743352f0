"""Blocks as one self-contained HTML file: no script, nothing fetched, the same bytes for the same blocks."""

from __future__ import annotations

from collections.abc import Sequence
from importlib.resources import files

from envcorr.document.blocks import Band, Block, Drawing, Heading, Region

__all__ = ["drawn", "render"]


def drawn(block: Block) -> Block:
    """Return a chart as a drawing, and any other block as it is."""
    if not isinstance(block, Region | Band):
        return block
    from envcorr.render.figure import render as figure

    svg = figure(block).decode()
    return Drawing(svg[svg.index("<svg") :], block.alt)


def render(blocks: Sequence[Block]) -> str:
    """Return the blocks as HTML. All text is escaped; drawings are the program's own."""
    from jinja2 import Environment

    template = files("envcorr").joinpath("data/report.html.jinja").read_text(encoding="utf-8")
    environment = Environment(autoescape=True, trim_blocks=True, lstrip_blocks=True, keep_trailing_newline=True)
    title = next((block.text for block in blocks if isinstance(block, Heading)), "envcorr")
    named = [(type(block).__name__.lower(), block) for block in map(drawn, blocks)]
    return environment.from_string(template).render(title=title, blocks=named)
