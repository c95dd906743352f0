"""How a page begins and what it hands out: an example, a file or a link in; a file, a link, a report out."""

from __future__ import annotations

import tomllib
from collections.abc import Sequence
from importlib.resources import files
from typing import TYPE_CHECKING

from envcorr.document.blocks import Block
from envcorr.errors import InputError
from envcorr.intake.set_up_text import entries_of
from envcorr.intake.toml_file import LARGEST_FILE, unusable
from envcorr.page import show
from envcorr.page.form import Form, from_link, link

if TYPE_CHECKING:
    from envcorr.plan import Plan

__all__ = ["begin", "examples", "hand_out", "reports"]

NOTHING = "nothing"


def examples() -> dict[str, str]:
    """Return the invented set-ups that the package brings, by what is said of them."""
    found = {}
    for path in sorted(files("envcorr").joinpath("examples").iterdir(), key=lambda path: path.name):
        if path.name.endswith(".toml"):
            text = path.read_text(encoding="utf-8")
            found[tomllib.loads(text)["title"]] = text
    return found


def begin(form: Form) -> None:
    """Let a person begin with an example, a file, or nothing; a shared address goes before."""
    import streamlit as st

    shared = st.query_params.get("s", "")
    if shared and st.session_state.get(f"came by {form.name}") != shared:
        st.session_state[f"came by {form.name}"] = shared
        entries = from_link(shared)
        if entries:
            form.load(entries)
        else:
            show.line("The address holds no set-up that can be read; begin with an example or a file.", "bad")
    known = examples()

    def chosen() -> None:
        title = st.session_state[f"begin {form.name}"]
        form.load(entries_of(tomllib.loads(known[title])) if title in known else {})

    left, right = st.columns(2)
    with left:
        options = [NOTHING, *known]
        key = f"begin {form.name}"
        st.selectbox("Begin with", options, key=key, on_change=chosen, help="The examples are invented.")
    with right:
        upload = st.file_uploader("or a set-up file (TOML)", type=["toml"], key=f"file {form.name}")
    if upload is not None and st.session_state.get(f"took {form.name}") != upload.file_id:
        st.session_state[f"took {form.name}"] = upload.file_id
        try:
            form.load(_entries_of(upload.getvalue()))
        except InputError as error:
            show.refusal(error)
        else:
            st.rerun()


def _entries_of(data: bytes) -> dict[str, str]:
    from envcorr.errors import Fault

    if len(data) > LARGEST_FILE:
        raise InputError([Fault("the file", "is too large.", "A set-up is text of a few kilobytes.")])
    try:
        mapping = tomllib.loads(data.decode("utf-8-sig"))
    except (UnicodeDecodeError, ValueError, RecursionError) as error:
        reason = " ".join(str(error).split())[:120]
        raise InputError([Fault("the file", f"is not TOML: {reason}.", "Take one that envcorr wrote.")]) from None
    fault = unusable(mapping)
    if fault:
        raise InputError([fault])
    return entries_of(mapping)


def hand_out(form: Form) -> None:
    """Offer the set-up as a file and as a link."""
    import streamlit as st

    if not form.entries:
        return
    st.download_button(
        "Set-up as a file", form.toml(), "setup.toml", "application/toml", key=f"save {form.name}", on_click="ignore"
    )
    with st.expander("Set-up as a link"):
        st.code(f"?s={link(form.entries)}", language=None, wrap_lines=True)
        show.line("Put it behind the address of this page: it holds all entries, and nothing else.", "quiet")


def reports(name: str, page: Sequence[Block], plan: Plan) -> None:
    """Offer the page as a report: prepared first, so that it is the one that is shown."""
    import streamlit as st

    from envcorr.document.report import report
    from envcorr.render import html, pdf

    with st.expander("Report to file"):
        if st.button("Prepare the report", key=f"prepare {name}"):
            blocks = report(page, plan)
            st.download_button("PDF", pdf.render(blocks), f"{name}.pdf", "application/pdf", key=f"pdf {name}")
            st.download_button("HTML", html.render(blocks), f"{name}.html", "text/html", key=f"html {name}")
