"""Blocks and sentences on the screen; whatever a file or a person wrote stays text."""

from __future__ import annotations

from collections.abc import Sequence
from html import escape
from typing import Literal

from envcorr.document.blocks import Band, Block, Drawing, Region
from envcorr.errors import Fault, InputError

__all__ = ["blocks", "faults_by_name", "line", "refusal"]


def blocks(several: Sequence[Block]) -> None:
    """Show blocks; charts and drawings as pictures with their words."""
    import streamlit as st

    from envcorr.render.figure import render as figure
    from envcorr.render.html import fragment

    waiting: list[Block] = []

    def flush() -> None:
        if waiting:
            st.html(fragment(waiting))
            waiting.clear()

    for block in several:
        if isinstance(block, Region | Band | Drawing):
            flush()
            svg = block.svg if isinstance(block, Drawing) else figure(block).decode()
            width: Literal["stretch", "content"] = "content" if isinstance(block, Drawing) else "stretch"
            st.image(svg[svg.index("<svg") :], width=width, alt=block.alt)
            line(block.alt, "quiet")
        else:
            waiting.append(block)
    flush()


def line(text: str, tone: str = "") -> None:
    """Show one line of plain text: "quiet", "bad" or plain."""
    import streamlit as st

    colour = {"quiet": "#56636a", "bad": "#8f2d2d"}.get(tone, "#1d2529")
    mark = "✗ " if tone == "bad" else ""
    st.html(f'<p style="margin:0 0 .3rem;font-size:.86rem;color:{colour}">{mark}{escape(text)}</p>')


def refusal(error: InputError) -> None:
    """Show why something could not be used, each fault a line."""
    for fault in error.faults:
        line(str(fault), "bad")


def faults_by_name(error: InputError | None) -> dict[str, list[Fault]]:
    """Return the faults by the entry that they are about."""
    found: dict[str, list[Fault]] = {}
    for fault in error.faults if error else ():
        found.setdefault(fault.where.removeprefix("--set ").strip('"'), []).append(fault)
    return found
