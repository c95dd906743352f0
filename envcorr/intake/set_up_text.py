"""A set-up as texts by name, and back to the TOML file that says the same."""

from __future__ import annotations

import json
import tomllib
from collections.abc import Mapping
from typing import Any

from envcorr.intake.setup_file import flat

__all__ = ["entries_of", "in_toml", "to_toml"]


def entries_of(mapping: Mapping[str, Any]) -> dict[str, str]:
    """Return the text of every entry of a set-up's tables by its dotted name.

    A plain text stands as it is, anything else as TOML has it: ``{ value = "45 %", u = "3 %" }``.
    """
    return {name: value if isinstance(value, str) else in_toml(value) for name, value in flat(mapping).items()}


def in_toml(value: Any) -> str:
    """Return a value as TOML writes it inline."""
    if isinstance(value, Mapping):
        inner = ", ".join(f"{key} = {in_toml(one)}" for key, one in value.items())
        return f"{{ {inner} }}"
    if isinstance(value, list):
        return f"[{', '.join(in_toml(one) for one in value)}]"
    if isinstance(value, bool):
        return str(value).lower()
    return repr(value) if isinstance(value, int | float) else json.dumps(str(value), ensure_ascii=False)


def to_toml(entries: Mapping[str, str], comment: str = "") -> str:
    """Return the file that :func:`entries_of` gives the same entries for, section after section."""
    sections: dict[str, list[str]] = {"": []}
    for name, text in entries.items():
        section, _, key = name.rpartition(".")
        if not section and any(other.startswith(f"{name}.") for other in entries):  # the tare's reading, and its air
            inside = tomllib.loads(f"it = {text}")["it"] if text[:1] == "{" else {"value": text}
            sections.setdefault(name, []).extend(f"{one} = {in_toml(size)}" for one, size in inside.items())
            continue
        value = text if text[:1] in ("{", "[", '"', "'") or text in ("true", "false") else in_toml(text)
        sections.setdefault(section, []).append(f"{key} = {value}")
    lines = [f"# {line}" for line in comment.splitlines()]
    for section, inside in sections.items():
        if inside:
            lines += ([""] if lines else []) + ([f"[{section}]"] if section else []) + inside
    return "\n".join(lines) + "\n"
