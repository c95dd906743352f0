"""The set-up file: TOML to a Setup, every fault of it in one message.

Sections and keys are the vocabulary's names; ``[tare.air]`` and ``[adjusted.air]`` are the air at those moments,
``[sensors]`` how well the air is known (``[sensors.load]`` and the like for other quantities).
"""

from __future__ import annotations

import tomllib
from collections.abc import Iterator, Mapping, Sequence
from pathlib import Path
from typing import Any

import numpy as np

from envcorr.catalogue import CATALOGUE, Place, nearest
from envcorr.errors import Fault, InputError
from envcorr.estimate import Estimate
from envcorr.intake.entry import KEYS, EntryError, read_estimate
from envcorr.numerals import UnitError, quoted
from envcorr.propagation import correlation_root
from envcorr.setup import Correlation, Setup
from envcorr.vocabulary import MOMENTS, Choice

__all__ = ["LARGEST_FILE", "REQUIRED", "parse_setup", "read_mapping", "read_setup", "with_changes"]

LARGEST_FILE = 2**20
"""Bytes of a set-up file (judgement: a rich one has a few thousand)."""
REQUIRED = {"target.resolution": '[target] resolution = "0.1 mg"', "load.mass": '[load] mass = "5 g"'}
"""What a room check cannot do without, and how to write it."""
_HUMIDITIES = ("humidity", "dew_point", "wet_bulb")
_YES_NO = {True: "yes", False: "no"}


def read_setup(path: str | Path, *, changes: Sequence[str] = (), require: Sequence[str] = tuple(REQUIRED)) -> Setup:
    """Read a set-up file; ``changes`` are texts like ``air.temperature=20 °C`` that replace entries of it.

    Raises :class:`InputError` with every fault of the file.
    """
    return parse_setup(read_mapping(path), changes=changes, require=require, what=str(path))


def read_mapping(path: str | Path) -> dict[str, Any]:
    """Return the tables of a TOML file as they are written. Raises :class:`InputError` where it is none."""
    path = Path(path)
    name = quoted(str(path))

    def fault(problem: str, remedy: str) -> InputError:
        return InputError([Fault(name, problem, remedy)])

    try:
        if path.is_dir():
            raise fault("is a folder.", "Name the set-up file in it.")
        size = path.stat().st_size
        if size > LARGEST_FILE:
            raise fault(f"has {size} bytes.", "A set-up file is text of a few kilobytes; is this another file?")
        data = path.read_bytes()
    except FileNotFoundError:
        raise fault("is not there.", "Check the name and the folder.") from None
    except PermissionError:
        raise fault("may not be read.", "Check its permissions.") from None
    except (OSError, ValueError) as error:
        reason = getattr(error, "strerror", None) or "its name cannot be used"
        raise fault(f"cannot be read: {reason}.", "Check the name.") from None
    if b"\0" in data:
        raise fault("is not text.", "A set-up file is TOML, plain text in UTF-8.")
    try:
        text = data.decode("utf-8-sig")
    except UnicodeDecodeError as error:
        line = data[: error.start].count(b"\n") + 1
        raise fault(f"is not UTF-8 (line {line}).", "Save it as UTF-8.") from None
    if not text.strip():
        raise fault("is empty.", "See the examples for what a set-up file holds.")
    try:
        return tomllib.loads(text)
    except (tomllib.TOMLDecodeError, RecursionError) as error:
        problem = str(error) or "it is nested too deeply"
        raise fault(
            f"is not TOML: {problem}.", 'Texts stand in quotes, as in temperature = "20 °C"; sections as [air].'
        ) from None


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
        title=reader.title,
        written=reader.written,
    )


def with_changes(mapping: Mapping[str, Any], changes: Sequence[str]) -> dict[str, Any]:
    """Return a copy of the mapping with changes like ``air.temperature=20 °C`` or ``air.humidity.u=2 %`` made."""
    result = _copied(mapping)
    faults = []
    for change in changes:
        name, sign, text = change.partition("=")
        name = name.strip()
        if not sign or not name or not text.strip():
            faults.append(Fault(f"--set {quoted(change)}", "has no value.", 'Write --set air.temperature="20 °C".'))
            continue
        try:
            _put(result, name.split("."), _toml_value(text.strip()))
        except EntryError as error:
            faults.append(Fault(f"--set {name}", error.problem, error.remedy))
    if faults:
        raise InputError(faults)
    return result


def _copied(mapping: Mapping[str, Any]) -> dict[str, Any]:
    return {key: _copied(value) if isinstance(value, Mapping) else value for key, value in mapping.items()}


def _toml_value(text: str) -> Any:
    """Return a quoted text, a table, a list, a truth value or a number as TOML reads it; anything else as text."""
    if text[0] in "\"'{[" or text in ("true", "false"):
        try:
            return tomllib.loads(f"it = {text}")["it"]
        except tomllib.TOMLDecodeError:
            raise EntryError(f"{quoted(text)} is not a value of TOML.", "Check its quotes and braces.") from None
    return text


def _put(result: dict[str, Any], path: Sequence[str], value: Any) -> None:
    table = result
    for key in path[:-1]:
        inner = table.get(key)
        if inner is None:
            inner = table[key] = {}
        elif not isinstance(inner, dict):
            # a plain value becomes a table when one of its keys is changed
            if path[-1] not in KEYS:
                raise EntryError(f"{key} is no section.", "Check the name.")
            inner = table[key] = {"value": inner}
        table = inner
    if path[-1] in ("u", "U", "half_width"):
        for other in ("u", "U", "half_width", "k", "shape"):
            table.pop(other, None)
    table[path[-1]] = value


class _Reader:
    """Collects what was given, and every fault."""

    def __init__(self) -> None:
        self.faults: list[Fault] = []
        self.faulty: set[str] = set()
        self.estimates: dict[str, Estimate] = {}
        self.choices: dict[str, str] = {}
        self.correlations: list[Correlation] = []
        self.waived: list[str] = []
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
                    self.fault("title", f"{quoted(str(value))} is not a text.", 'Write title = "Bay 3".')
            elif key == "correlation":
                self._correlations(value)
            elif isinstance(value, Mapping):
                for name, raw in _entries(key, value):
                    self._entry(name, raw)
            else:
                self._unknown(key)

    def _entry(self, name: str, raw: Any) -> None:
        if name == "target.waived":
            self._waived(raw)
            return
        name = _full_name(name)
        choice = CATALOGUE.choices.get(name)
        if choice is not None:
            self._choice(choice, raw)
            return
        place = CATALOGUE.find(name)
        if place is None:
            self._unknown(name)
            return
        if place.quantity.internal:
            self.fault(name, "is worked out, not given.", "Leave it out.")
            return
        try:
            self.estimates[name] = read_estimate(raw, place.quantity, sensor=place.sensor)
            self.written[name] = _as_written(raw)
        except (EntryError, UnitError) as error:
            read = "" if isinstance(raw, Mapping) or quoted(str(raw)) in error.problem else f"read {quoted(str(raw))}: "
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
        self.fault(choice.name, f"{quoted(str(raw))} is not one of its words.", f"{hint}Known are {known}.")

    def _waived(self, raw: Any) -> None:
        names = raw if isinstance(raw, list) else [raw]
        for name in names:
            if isinstance(name, str) and name in CATALOGUE.effects:
                self.waived.append(name)
                continue
            near = nearest(str(name), CATALOGUE.effects)
            hint = f"Did you mean {near}?" if near else f"Known are {', '.join(CATALOGUE.effects)}."
            self.fault("target.waived", f"{quoted(str(name))} is not an effect.", hint)

    def _unknown(self, name: str) -> None:
        words = [*CATALOGUE.words(), "target.waived", "title", "correlation"]
        last = name.rpartition(".")[2]
        near = nearest(name, words) or next((word for word in words if word.rpartition(".")[2] == last), "")
        near = near or nearest(last, [word.rpartition(".")[2] for word in words])
        self.fault(name, "is not known.", f"Did you mean {near}?" if near else "See envcorr explain for every name.")

    def _correlations(self, raw: Any) -> None:
        for entry in raw if isinstance(raw, list) else [raw]:
            between = entry.get("between") if isinstance(entry, Mapping) else None
            if not isinstance(between, list) or len(between) != 2 or set(entry) != {"between", "coefficient"}:
                example = 'between = ["air.temperature", "air.humidity"], coefficient = -0.5'
                self.fault("correlation", "needs two quantities and a coefficient.", f"Write {example}.")
                continue
            names = [_full_name(str(name)) for name in between]
            unknown = [name for name in names if CATALOGUE.find(name) is None]
            coefficient = entry["coefficient"]
            if unknown:
                for name in unknown:
                    self._unknown(name)
            elif names[0] == names[1]:
                self.fault("correlation", f"{names[0]} is named twice.", "Name two quantities.")
            elif isinstance(coefficient, bool) or not isinstance(coefficient, int | float) or not abs(coefficient) <= 1:
                self.fault("correlation", f"the coefficient {quoted(str(coefficient))} is not from -1 to 1.")
            else:
                self.correlations.append(Correlation(names[0], names[1], float(coefficient)))

    def check_together(self) -> None:
        """Find what is wrong only with several entries at once."""
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
        temperature = self.estimates.get(f"{head}air.temperature") or self.estimates.get("air.temperature")
        for name, label in (("dew_point", "dew point"), ("wet_bulb", "wet-bulb temperature")):
            wet = self.estimates.get(f"{head}air.{name}")
            if wet and temperature and float(wet.centre) > float(temperature.centre):
                self.fault(
                    f"{head}air.{name}",
                    f"the {label} {quoted(self.written[f'{head}air.{name}'])} is above the air temperature.",
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
    full = _full_name(name)
    if CATALOGUE.find(full) is not None or full in CATALOGUE.choices:
        return True
    sections = {word.rpartition(".")[0] for word in CATALOGUE.words()}
    known = {*sections, *(f"{head}{s}" for s in sections for head in ("tare.", "adjusted.", "sensors."))}
    known |= {"sensors", "tare.sensors", "adjusted.sensors"}
    known |= {f"{head}sensors.{s}" for s in sections for head in ("tare.", "adjusted.")}
    return name not in known


def _full_name(name: str) -> str:
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
    return CATALOGUE.find(_full_name(name))
