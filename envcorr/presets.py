"""Presets: usual sizes of a disturbance by name, each with its source; a measurement beats every one."""

from __future__ import annotations

import tomllib
from collections.abc import Callable
from dataclasses import dataclass
from functools import lru_cache
from importlib.resources import files
from typing import Any

from envcorr import units

__all__ = ["Preset", "every", "of"]


@dataclass(frozen=True, slots=True)
class Preset:
    """A usual size: what it is for, its name, a value [SI] of a kind, what it means, and whose word it is."""

    subject: str
    name: str
    kind: str
    value: float
    text: str
    source: str

    def supply(self) -> Callable[[], Any]:
        """Return a function without parameters that gives the value, as a way wants it."""
        value = self.value
        return lambda: value


@lru_cache(maxsize=1)
def every() -> tuple[Preset, ...]:
    """Return all presets in the order of the file."""
    table = tomllib.loads(files("envcorr").joinpath("data/presets.toml").read_text(encoding="utf-8"))
    return tuple(
        Preset(subject, name, entry["kind"], units.parse(entry["value"], entry["kind"]), entry["text"], entry["source"])
        for subject, entries in table.items()
        for name, entry in entries.items()
    )


def of(subject: str) -> dict[str, Preset]:
    """Return the presets of one subject by name."""
    return {preset.name: preset for preset in every() if preset.subject == subject}
