"""Blocks as a tagged PDF (PDF/UA-1), typeset by typst: nothing is fetched, the same bytes for the same blocks."""

from __future__ import annotations

import dataclasses
import json
from collections.abc import Sequence
from importlib.resources import files
from typing import Any

from envcorr.document.blocks import Block, Drawing, Heading
from envcorr.render.html import drawn

__all__ = ["render"]


def render(blocks: Sequence[Block]) -> bytes:
    """Return the blocks as a PDF file. Texts go in as data, so that nothing in them is markup."""
    import typst

    blocks = [drawn(block) for block in blocks]
    title = next((block.text for block in blocks if isinstance(block, Heading)), "envcorr")
    drawings = [block for block in blocks if isinstance(block, Drawing)]
    told: list[dict[str, Any]] = []
    for block in blocks:
        entry = {"kind": type(block).__name__.lower(), **dataclasses.asdict(block)}
        if isinstance(block, Drawing):
            entry["svg"] = f"drawing{drawings.index(block)}.svg"
        told.append(entry)
    sources: Any = {
        "main.typ": files("envcorr").joinpath("data/report.typ").read_bytes(),
        "data.json": json.dumps({"title": title, "blocks": told}).encode(),
        **{f"drawing{i}.svg": drawing.svg.encode() for i, drawing in enumerate(drawings)},
    }
    made = typst.compile(sources, format="pdf", pdf_standards="ua-1", ignore_system_fonts=True, timestamp=0)
    assert isinstance(made, bytes)
    return made
