"""The form: every quantity as a text with its unit, read by the same reader as a set-up file."""

from __future__ import annotations

import base64
import binascii
import zlib
from dataclasses import dataclass

from envcorr.catalogue import CATALOGUE
from envcorr.document.explain import example
from envcorr.document.wording import capital, estimate_text
from envcorr.errors import InputError
from envcorr.intake.set_up_text import entries_of, to_toml
from envcorr.intake.setup_file import parse_setup
from envcorr.intake.toml_file import with_changes
from envcorr.page import show
from envcorr.setup import Setup

__all__ = ["Form", "from_link", "link", "names_to_add", "titled"]

LONGEST_LINK = 8000
"""Characters of a shared set-up (judgement: a browser's address bar takes about that)."""


def names_to_add(entries: dict[str, str]) -> list[str]:
    """Return every quantity and choice that may still be given."""
    every = [q.name for q in CATALOGUE.quantities.values() if not q.internal] + list(CATALOGUE.choices)
    return sorted(name for name in every if name not in entries)


def link(entries: dict[str, str]) -> str:
    """Return a set-up as a short text for an address."""
    return base64.urlsafe_b64encode(zlib.compress(to_toml(entries).encode(), 9)).decode()


def from_link(text: str) -> dict[str, str]:
    """Return the entries of a shared address, none where it is damaged or too long."""
    import tomllib

    if len(text) > LONGEST_LINK:
        return {}
    try:
        unpacked = zlib.decompressobj().decompress(base64.urlsafe_b64decode(text.encode()), 2**18)
        return entries_of(tomllib.loads(unpacked.decode()))
    except (ValueError, binascii.Error, zlib.error):
        return {}


@dataclass(frozen=True)
class Form:
    """The entries of one page in one session, under a name of its own."""

    name: str
    shown: tuple[str, ...] = ()
    require: tuple[str, ...] = ()

    @property
    def entries(self) -> dict[str, str]:
        """The texts by their dotted names, as typed."""
        import streamlit as st

        found: dict[str, str] = st.session_state.setdefault(f"entries {self.name}", {})
        return found

    def load(self, entries: dict[str, str]) -> None:
        """Begin anew with other entries."""
        import streamlit as st

        for key in [key for key in st.session_state if str(key).startswith(f"{self.name}|")]:
            del st.session_state[key]
        st.session_state[f"entries {self.name}"] = dict(entries)

    def read(self) -> tuple[Setup | None, InputError | None]:
        """Return the set-up that the entries make, or what is wrong with them."""
        given = {name: text for name, text in self.entries.items() if text.strip()}
        try:
            changes = [f"{name}={text}" for name, text in given.items()]
            return parse_setup(with_changes({}, changes), require=self.require, what=""), None
        except InputError as error:
            return None, error

    def draw(self, error: InputError | None, setup: Setup | None) -> None:
        """Draw the fields, section by section, each with what was understood or what is wrong."""
        import streamlit as st

        faults = show.faults_by_name(error)
        names = list(dict.fromkeys([*self.shown, *self.entries]))
        sections: dict[str, list[str]] = {}
        for name in names:
            sections.setdefault(name.partition(".")[0] if "." in name else "general", []).append(name)
        for section, inside in sections.items():
            wrong = any(name in faults for name in inside)
            with st.expander(capital(section), expanded=wrong or section in ("target", "load", "air", "general")):
                for name in inside:
                    self._field(name, setup)
                    for fault in faults.pop(name, ()):
                        show.line(f"{fault.problem} {fault.remedy}".strip(), "bad")
        for rest in faults.values():
            for fault in rest:
                show.line(str(fault), "bad")
        self._add()

    def _field(self, name: str, setup: Setup | None) -> None:
        import streamlit as st

        key = f"{self.name}|{name}"
        st.session_state.setdefault(key, self.entries.get(name, ""))
        place, choice = CATALOGUE.find(name), CATALOGUE.choices.get(name)
        if choice is not None:
            options = ["", *choice.options]
            if st.session_state[key] not in options:
                options.append(st.session_state[key])
            st.selectbox(
                f"{capital(choice.label)} · {name}",
                options,
                key=key,
                format_func=lambda word: word or "not said",
                on_change=self._keep,
                args=(name,),
            )
            return
        label = capital(place.label) if place else name
        hint = f"such as {example(place.quantity)}" if place else ""
        st.text_input(f"{label} · {name}", key=key, placeholder=hint, on_change=self._keep, args=(name,), max_chars=300)
        estimate = setup.estimates.get(name) if setup and place else None
        if estimate is not None and place is not None:
            show.line(f"understood as {estimate_text(estimate, place.kind)}", "quiet")

    def _keep(self, name: str) -> None:
        import streamlit as st

        text = st.session_state[f"{self.name}|{name}"]
        if text.strip():
            self.entries[name] = text
        else:
            self.entries.pop(name, None)

    def _add(self) -> None:
        import streamlit as st

        def add() -> None:
            name = st.session_state[f"add {self.name}"]
            if name:
                self.entries.setdefault(name, "")
                st.session_state[f"add {self.name}"] = None

        st.selectbox(
            "Add a quantity",
            names_to_add(self.entries),
            index=None,
            key=f"add {self.name}",
            format_func=titled,
            on_change=add,
            placeholder="type to search",
        )

    def toml(self) -> str:
        """Return the set-up file that the entries make."""
        return to_toml({name: text for name, text in self.entries.items() if text.strip()}, "written by envcorr page")


def titled(name: str) -> str:
    """Return a quantity's or choice's name with its label."""
    place, choice = CATALOGUE.find(name), CATALOGUE.choices.get(name)
    label = place.label if place else choice.label if choice else ""
    return f"{name} · {label}"
