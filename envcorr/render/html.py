"""Blocks as one self-contained HTML file: no script, nothing fetched, the same bytes for the same blocks."""

from __future__ import annotations

from collections.abc import Iterable, Sequence
from functools import cache
from importlib.resources import files
from typing import TYPE_CHECKING

from envcorr.document.blocks import Band, Block, Drawing, Heading, Region

if TYPE_CHECKING:
    from jinja2 import Template

__all__ = ["drawn", "fragment", "render"]


def drawn(block: Block) -> Block:
    """Return a chart as a drawing, and any other block as it is."""
    if not isinstance(block, Region | Band):
        return block
    from envcorr.render.figure import render as figure

    svg = figure(block).decode()
    return Drawing(svg[svg.index("<svg") :], block.alt)


def render(blocks: Sequence[Block]) -> str:
    """Return the blocks as HTML. All text is escaped; drawings are the program's own."""
    title = next((block.text for block in blocks if isinstance(block, Heading)), "envcorr")
    return _template("report.html.jinja").render(title=title, blocks=_named(map(drawn, blocks)))


def fragment(blocks: Sequence[Block]) -> str:
    """Return the blocks as a piece of HTML with its style, for a page that has its own frame."""
    inner = _template("blocks.html.jinja").render(blocks=_named(map(drawn, blocks)))
    return f'<style>{_file("fragment.css")}{_file("blocks.css")}</style><div class="envcorr">{inner}</div>'


def _named(blocks: Iterable[Block]) -> list[tuple[str, Block]]:
    return [(type(block).__name__.lower(), block) for block in blocks]


def _file(name: str) -> str:
    return files("envcorr").joinpath(f"data/{name}").read_text(encoding="utf-8")


@cache
def _template(name: str) -> Template:
    from jinja2 import Environment, FunctionLoader

    environment = Environment(
        loader=FunctionLoader(_file), autoescape=True, trim_blocks=True, lstrip_blocks=True, keep_trailing_newline=True
    )
    return environment.get_template(name)
