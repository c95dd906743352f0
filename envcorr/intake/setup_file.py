"""The set-up: tables, as TOML gives them, to a Setup; every fault of them in one message.

Sections and keys are the vocabulary's names; ``[tare.air]`` and ``[adjusted.air]`` are the air at those moments,
``[sensors]`` how well the air is known (``[sensors.load]`` and the like for other quantities).
"""

from __future__ import annotations

from collections.abc import Iterator, Mapping, Sequence
from functools import cache
from pathlib import Path
from typing import Any

import numpy as np

from envcorr import materials
from envcorr.catalogue import CATALOGUE, Place, nearest
from envcorr.errors import Fault, InputError
from envcorr.estimate import Estimate
from envcorr.intake.entry import KEYS, EntryError, read_estimate, shown
from envcorr.intake.toml_file import read_mapping, unusable, with_changes
from envcorr.numerals import UnitError, quoted
from envcorr.propagation import correlation_root
from envcorr.setup import Correlation, Setup
from envcorr.vocabulary import MOMENTS, Choice

__all__ = ["REQUIRED", "flat", "full_name", "parse_setup", "place_of", "read_setup"]

REQUIRED = {"target.resolution": '[target] resolution = "0.1 mg"', "load.mass": '[load] mass = "5 g"'}
"""What a room check cannot do without, and how to write it."""
_HUMIDITIES = ("humidity", "dew_point", "wet_bulb")
_HEADS = [f"{moment}{sensor}" for moment in ("tare.", "adjusted.", "") for sensor in ("sensors.", "")]
_YES_NO = {True: "yes", False: "no"}


def read_setup(path: str | Path, *, changes: Sequence[str] = (), require: Sequence[str] = tuple(REQUIRED)) -> Setup:
    """Read a set-up file; ``changes`` are texts like ``air.temperature=20 °C`` that replace entries of it.

    Raises :class:`InputError` with every fault of the file.
    """
    return parse_setup(read_mapping(path), changes=changes, require=require, what=str(path))


def parse_setup(
    mapping: Mapping[str, Any],
    *,
    changes: Sequence[str] = (),
    require: Sequence[str] = tuple(REQUIRED),
    what: str = "set-up",
) -> Setup:
    """Return the Setup of a mapping of sections, as TOML gives it. Raises :class:`InputError` with every fault."""
    reader = _Reader()
    try:
        mapping = with_changes(mapping, changes)
    except InputError as error:
        reader.faults.extend(error.faults)
    if fault := unusable(mapping):
        raise InputError([*reader.faults, fault], what=what)
    reader.read(mapping)
    reader.check_together()
    for name in require:
        if name not in reader.estimates and name not in reader.faulty:
            reader.fault(name, "is not given.", f"Write, for example, {REQUIRED.get(name, name)}.")
    if reader.faults:
        raise InputError(reader.faults, what=what)
    return Setup(
        estimates=reader.estimates,
        choices=reader.choices,
        correlations=tuple(reader.correlations),
        waived=frozenset(reader.waived),
        improvable=tuple(dict.fromkeys(reader.improvable)),
        title=reader.title,
        written=reader.written,
    )


def flat(mapping: Mapping[str, Any]) -> dict[str, Any]:
    """Return every entry of the tables by its dotted name, as it was written; title and correlations by theirs."""
    found: dict[str, Any] = {}
    for key, value in mapping.items():
        entry, sections = _apart(value) if key in CATALOGUE.quantities else (None, value)
        if entry is not None:
            found[key] = entry
        if isinstance(sections, Mapping):
            found.update(_entries(key, sections))
        else:
            found[key] = sections
    return found


class _Reader:
    """Collects what was given, and every fault."""

    def __init__(self) -> None:
        self.faults: list[Fault] = []
        self.faulty: set[str] = set()
        self.estimates: dict[str, Estimate] = {}
        self.choices: dict[str, str] = {}
        self.correlations: list[Correlation] = []
        self.waived: list[str] = []
        self.improvable: list[str] = []
        self.materials: dict[str, Any] = {}
        self.written: dict[str, str] = {}
        self.title = ""

    def fault(self, where: str, problem: str, remedy: str = "") -> None:
        self.faulty.add(where)
        self.faults.append(Fault(where, problem, remedy))

    def read(self, mapping: Mapping[str, Any]) -> None:
        for key, value in mapping.items():
            if key == "title":
                self.title = value if isinstance(value, str) else ""
                if not isinstance(value, str):
                    self.fault("title", f"{shown(value)} is not a text.", 'Write title = "Bay 3".')
            elif key == "correlation":
                self._correlations(value)
            elif key in CATALOGUE.quantities:  # a reading, which has no section; that of the tare shares its name
                entry, sections = _apart(value)
                if entry is not None:
                    self._entry(key, entry)
                for name, raw in _entries(key, sections):
                    self._entry(name, raw)
            elif isinstance(value, Mapping):
                for name, raw in _entries(key, value):
                    self._entry(name, raw)
            else:
                self._no_entry(key, value)

    def _entry(self, name: str, raw: Any) -> None:
        if name in ("target.waived", "target.improvable"):
            self._names(name, raw)
            return
        if name in materials.NAMED_BY:
            self.materials[name] = raw
            return
        name = full_name(name)
        choice = CATALOGUE.choices.get(name)
        if choice is not None:
            self._choice(choice, raw)
            return
        place = CATALOGUE.find(name)
        if place is None:
            self._no_entry(name, raw)
            return
        if place.quantity.internal:
            self.fault(name, "is worked out, not given.", "Leave it out.")
            return
        try:
            self.estimates[name] = read_estimate(raw, place.quantity, sensor=place.sensor)
            self.written[name] = _as_written(raw)
        except (EntryError, UnitError) as error:
            read = "" if isinstance(raw, Mapping) or shown(raw) in error.problem else f"read {shown(raw)}: "
            self.fault(name, f"{read}{error.problem}", error.remedy)

    def _choice(self, choice: Choice, raw: Any) -> None:
        word = _YES_NO.get(raw, "") if isinstance(raw, bool) and "yes" in choice.options else raw
        if isinstance(word, str) and word in choice.options:
            self.choices[choice.name] = word
            self.written[choice.name] = word
            return
        if isinstance(word, str) and word in (choice.refused or {}):
            self.fault(choice.name, f"{quoted(word)} cannot be used.", (choice.refused or {})[word])
            return
        near = nearest(str(word), choice.options)
        known = ", ".join(f'"{option}"' for option in choice.options)
        hint = f'Did you mean "{near}"? ' if near else ""
        self.fault(choice.name, f"{shown(raw)} is not one of its words.", f"{hint}Known are {known}.")

    def _names(self, where: str, raw: Any) -> None:
        """Read the effects that are waived, or the quantities that the room can better."""
        effects = where == "target.waived"
        known = list(CATALOGUE.effects) if effects else CATALOGUE.words()
        for name in raw if isinstance(raw, list) else [raw]:
            if isinstance(name, str) and (name in known or (not effects and CATALOGUE.find(full_name(name)))):
                (self.waived if effects else self.improvable).append(name if effects else full_name(name))
                continue
            near = nearest(str(name), known)
            hint = f"Did you mean {near}?" if near else f"Known are {', '.join(known)}."
            self.fault(where, f"{shown(name)} is not {'an effect' if effects else 'a quantity'}.", hint)

    def _no_entry(self, name: str, raw: Any) -> None:
        if name in _sections():
            self.fault(name, f"{shown(raw)} is not a section.", f"Write [{name}] and its entries below.")
        else:
            self._unknown(name)

    def _unknown(self, name: str) -> None:
        head = next((head for head in _HEADS if head and name.startswith(head)), "")
        rest = name.removeprefix(head)
        words = [*CATALOGUE.words(), "target.waived", "target.improvable", "title", "correlation"]
        keys = {word.rpartition(".")[2]: word for word in reversed(words)}
        last = rest.rpartition(".")[2]
        near = nearest(rest, words) or keys.get(last) or keys.get(nearest(last, keys), "")
        if near in CATALOGUE.quantities and not near.startswith("target."):
            near = f"{head}{near}"
        self.fault(name, "is not known.", f"Did you mean {near}?" if near else "See envcorr explain for every name.")

    def _correlations(self, raw: Any) -> None:
        for entry in raw if isinstance(raw, list) else [raw]:
            between = entry.get("between") if isinstance(entry, Mapping) else None
            if not isinstance(between, list) or len(between) != 2 or set(entry) != {"between", "coefficient"}:
                example = 'between = ["air.temperature", "air.humidity"], coefficient = -0.5'
                self.fault("correlation", "needs two quantities and a coefficient.", f"Write {example}.")
                continue
            names = [full_name(str(name)) for name in between]
            unknown = [name for name in names if CATALOGUE.find(name) is None]
            coefficient = entry["coefficient"]
            if unknown:
                for name in unknown:
                    self._unknown(name)
            elif names[0] == names[1]:
                self.fault("correlation", f"{names[0]} is named twice.", "Name two quantities.")
            elif any({c.first, c.second} == set(names) for c in self.correlations):
                self.fault("correlation", f"{' and '.join(names)} are correlated twice.", "Keep one entry.")
            elif isinstance(coefficient, bool) or not isinstance(coefficient, int | float) or not abs(coefficient) <= 1:
                self.fault("correlation", f"the coefficient {shown(coefficient)} is not from -1 to 1.")
            else:
                self.correlations.append(Correlation(names[0], names[1], float(coefficient)))

    def _material(self, name: str, raw: Any) -> None:
        """Put a material's density in the place of a given one, at the air's temperature."""
        section = name.partition(".")[0]
        given = [f"{section}.density"] + (["load.volume", "load.expansion"] if section == "load" else [])
        beside = [one for one in given if one in self.estimates]
        if beside:
            self.fault(name, f"is given beside {' and '.join(beside)}.", "Keep one.")
            return
        if not isinstance(raw, str):
            self.fault(name, f"{shown(raw)} is not a name.", 'Write material = "polypropylene".')
            return
        try:
            material = materials.find(raw)
        except InputError as error:
            self.faults.extend(Fault(name, fault.problem, fault.remedy) for fault in error.faults)
            return
        air = self.estimates.get("air.temperature")
        self.estimates |= materials.entries(name, material, float(air.centre) if air else None)
        self.written[name] = f"{material.name} ({material.source})"
        if section == "load":
            self.choices.setdefault("load.density_kind", material.kind)

    def check_together(self) -> None:
        """Find what is wrong only with several entries at once."""
        for name, raw in self.materials.items():
            self._material(name, raw)
        for moment in MOMENTS:
            head = f"{moment}." if moment else ""
            self._one_humidity(head)
            self._dew_point(head)
        self._correlation_matrix()
        for name, estimate in self.estimates.items():
            if name.startswith("target.") and not estimate.is_exact:
                self.fault(name, "has a spread.", "What is demanded is one value.")
        repeats = self.estimates.get("cycle.repeats")
        if repeats and not (repeats.is_exact and float(repeats.centre).is_integer()):
            self.fault("cycle.repeats", "is not a whole number.", "Write how many weighings are averaged.")

    def _one_humidity(self, head: str) -> None:
        given = [f"{head}air.{name}" for name in _HUMIDITIES if f"{head}air.{name}" in self.estimates]
        if len(given) > 1:
            self.fault(given[-1], f"is given beside {' and '.join(given[:-1])}.", "Keep one measure of humidity.")

    def _dew_point(self, head: str) -> None:
        """Compare the wet temperature that holds at a moment with the air temperature that does."""
        own = any(f"{head}air.{name}" in self.estimates for name in _HUMIDITIES)
        temperature = f"{head}air.temperature" if f"{head}air.temperature" in self.estimates else "air.temperature"
        for name, label in (("dew_point", "dew point"), ("wet_bulb", "wet-bulb temperature")):
            where = f"{head if own else ''}air.{name}"
            if head and not own and temperature == "air.temperature":
                continue  # said once, of the air at the loaded reading
            if where in self.estimates and temperature in self.estimates:
                wet, dry = (float(self.estimates[found].centre) for found in (where, temperature))
                if wet > dry:
                    self.fault(
                        where,
                        f"the {label} {quoted(self.written[where])} is above {temperature}, "
                        f"{quoted(self.written[temperature])}.",
                        "Air cannot hold that much water: check which of the two it is.",
                    )

    def _correlation_matrix(self) -> None:
        names = sorted({name for c in self.correlations for name in (c.first, c.second)})
        if not names:
            return
        for name in names:
            if name not in self.estimates and name not in self.faulty:
                self.fault("correlation", f"{name} is not given.", "Correlate quantities that have an entry.")
        matrix = np.eye(len(names))
        for c in self.correlations:
            i, j = names.index(c.first), names.index(c.second)
            matrix[i, j] = matrix[j, i] = c.coefficient
        try:
            correlation_root(matrix)
        except InputError as error:
            self.faults.extend(error.faults)


def _apart(value: Any) -> tuple[Any, Mapping[str, Any]]:
    """Return the entry and the sections that one key holds: ``[tare]`` has a reading, ``[tare.air]`` the air at it."""
    if not isinstance(value, Mapping):
        return value, {}
    entry = {key: one for key, one in value.items() if key in KEYS}
    sections = {key: one for key, one in value.items() if key not in KEYS}
    if set(entry) == {"value"}:
        return entry["value"], sections
    return entry or None, sections


def _entries(section: str, table: Mapping[str, Any]) -> Iterator[tuple[str, Any]]:
    """Yield the dotted name and the raw value of every entry of a section, its inner sections included."""
    for key, value in table.items():
        name = f"{section}.{key}"
        if isinstance(value, Mapping) and not _is_entry(name):
            yield from _entries(name, value)
        else:
            yield name, value


def _is_entry(name: str) -> bool:
    """Return whether a table of this name is an entry with value and spread, rather than a section."""
    full = full_name(name)
    if CATALOGUE.find(full) is not None or full in CATALOGUE.choices:
        return True
    return name not in _sections()


@cache
def _sections() -> frozenset[str]:
    """Return the dotted name of every section that a file may have."""
    sections = {word.rpartition(".")[0] for word in CATALOGUE.words()} - {""}
    heads = (head.rstrip(".") for head in _HEADS if head)
    return frozenset((*heads, *(f"{head}{section}" for head in _HEADS for section in sections)))


def full_name(name: str) -> str:
    """Return the full name of a sensor's shorthand: ``sensors.pressure`` is ``sensors.air.pressure``."""
    head, found, key = name.rpartition("sensors.")
    if found and "." not in key and CATALOGUE.find(f"air.{key}"):
        return f"{head}sensors.air.{key}"
    return name


def _as_written(raw: Any) -> str:
    if isinstance(raw, Mapping):
        return "{ " + ", ".join(f"{key} = {value}" for key, value in raw.items()) + " }"
    return str(raw)


def place_of(name: str) -> Place | None:
    """Return the place of a name as people write it, shorthand included."""
    return CATALOGUE.find(full_name(name))
