"""What is written: a TOML file, and changes to it from the command line, as plain tables. Knows no quantity."""

from __future__ import annotations

import tomllib
from collections.abc import Mapping, Sequence
from pathlib import Path
from typing import Any

from envcorr.errors import Fault, InputError
from envcorr.intake.entry import KEYS, SPREADS, EntryError
from envcorr.numerals import quoted
from envcorr.vocabulary import MOMENTS

__all__ = ["LARGEST_FILE", "read_mapping", "unusable", "with_changes"]

LARGEST_FILE = 2**20
"""Bytes of a set-up file (judgement: a rich one has a few thousand)."""
DEEPEST = 20
"""Tables and lists inside each other (judgement: a set-up needs five)."""
TOO_DEEP, FLAT = "is nested too deeply.", "Write each entry in its section, as temperature in [air]."
TOO_LONG, SHORT = (
    "holds an integer beyond 64 bits.",
    'Write a value as text with its unit, as "5 g".',
)  # TOML 1.0.0, Integer


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
    except RecursionError:
        raise fault(TOO_DEEP, FLAT) from None
    except tomllib.TOMLDecodeError as error:
        raise fault(
            f"is not TOML: {error}.", 'Texts stand in quotes, as in temperature = "20 °C"; sections as [air].'
        ) from None
    except ValueError:  # Python reads no decimal integer of more than 4300 digits
        raise fault(TOO_LONG, SHORT) from None


def with_changes(mapping: Mapping[str, Any], changes: Sequence[str]) -> dict[str, Any]:
    """Return a copy of the mapping with changes like ``air.temperature=20 °C`` or ``air.humidity.u=2 %`` made."""
    result = dict(mapping)
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


def _toml_value(text: str) -> Any:
    """Return a quoted text, a table, a list, a truth value or a number as TOML reads it; anything else as text."""
    if text[0] in "\"'{[" or text in ("true", "false"):
        try:
            return tomllib.loads(f"it = {text}")["it"]
        except (ValueError, RecursionError):
            raise EntryError(f"{quoted(text)} is not a value of TOML.", "Check its quotes and braces.") from None
    return text


def _put(table: dict[str, Any], path: Sequence[str], value: Any) -> None:
    """Put a value at its place; the tables on the way there are copied, the rest is shared."""
    for key in path[:-1]:
        inner = table.get(key, {})
        if not isinstance(inner, Mapping):
            # a plain value becomes a table when one of its keys is changed
            if path[-1] not in KEYS and key not in MOMENTS:  # the tare's reading shares its name with its sections
                raise EntryError(f"{key} is no section.", "Check the name.")
            inner = {"value": inner}
        copy = dict(inner)
        table[key] = copy
        table = copy
    if path[-1] in SPREADS and path[-1] not in table:
        for other in (*SPREADS, "k", "shape", "dof"):
            table.pop(other, None)
    there = table.get(path[-1])
    if path[-1] in MOMENTS and isinstance(there, Mapping):  # its sections stay
        kept = {key: one for key, one in there.items() if key not in KEYS}
        value = {**kept, **(value if isinstance(value, Mapping) else {"value": value})}
    table[path[-1]] = value


def unusable(mapping: Mapping[str, Any]) -> Fault | None:
    """Return what makes tables unfit for any reader: too deep, or an integer that TOML does not allow."""
    level: list[Any] = [mapping]
    for _ in range(DEEPEST):
        level = [
            inner
            for outer in level
            if isinstance(outer, Mapping | list)
            for inner in (outer.values() if isinstance(outer, Mapping) else outer)
        ]
        if any(isinstance(inner, int) and not -(2**63) <= inner < 2**63 for inner in level):
            return Fault("", TOO_LONG, SHORT)
    return Fault("", TOO_DEEP, FLAT) if level else None
