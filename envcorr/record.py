"""The record of an answer: all that it was computed from and by, so that anyone can compute it again and compare.

A JSON file. What was given, how, by which version and constants, and the answer in full precision stand under a seal
(a SHA-256 of it all); the notes and the acceptance are room for people and may be filled in later. It holds what
ISO/IEC 17025:2017, clauses 7.5, 7.8 and 7.11, ask of a record of this kind (from memory).
"""

from __future__ import annotations

import dataclasses
import hashlib
import json
import platform
import sys
import tempfile
from collections.abc import Callable, Mapping, Sequence
from dataclasses import dataclass
from datetime import UTC, datetime
from importlib.metadata import version
from pathlib import Path
from typing import Any

from envcorr import constants
from envcorr.catalogue import nearest
from envcorr.errors import Fault, InputError
from envcorr.intake.setup_file import parse_setup
from envcorr.jobs.mass import find_mass
from envcorr.jobs.mass_file import convert
from envcorr.jobs.room import check_room
from envcorr.jobs.verification import Verification, compare
from envcorr.numerals import quoted
from envcorr.render import json as json_room
from envcorr.render import json_mass
from envcorr.whole_file import check_target, whole_file

__all__ = ["ACCEPTANCE", "NOTES", "Order", "check_record", "read_notes", "verify", "write_record"]

FORMAT = 1
NOTES = (
    "when",
    "where",
    "item",
    "vessel",
    "balance",
    "sensors",
    "adjustment",
    "density_source",
    "operator",
    "remark",
)
"""What a record has room for beside the numbers: free texts."""
ACCEPTANCE = ("accepted_by", "accepted_on", "accepted_because")
"""Who took the notices upon themselves, and why; may be filled in after the record was sealed."""
RULES = {
    "mass": "None was applied: the mass is reported with its expanded uncertainty. A statement of conformity needs a "
    "rule of its own (JCGM 106:2012).",
    "room": "A total passes where the error stays within the stated part of the target resolution for the "
    "surroundings, and within the resolution for the whole weighing, each with the stated probability.",
}
RULES["table"] = RULES["mass"]


@dataclass(frozen=True, slots=True)
class Order:
    """What was asked: ``kind`` (a key of :data:`JOBS`), the tables of the set-up file, the changes to them, and how.

    ``table`` and ``target`` are the paths of a table of readings and of its answer.
    """

    kind: str
    set_up: Mapping[str, Any]
    changes: Sequence[str]
    how: Mapping[str, Any]
    table: Path | None = None
    target: Path | None = None


def _mass(order: Order) -> dict[str, Any]:
    setup = parse_setup(order.set_up, changes=order.changes, require=(), what="the record")
    return json_mass.mass(find_mass(setup, **order.how))


def _room(order: Order) -> dict[str, Any]:
    return json_room.room(check_room(parse_setup(order.set_up, changes=order.changes, what="the record"), **order.how))


def _table(order: Order) -> dict[str, Any]:
    assert order.table is not None
    setup = parse_setup(order.set_up, changes=order.changes, require=(), what="the record")
    with tempfile.TemporaryDirectory() as folder:
        target = Path(folder) / (order.target or order.table).name
        answer = json_mass.table(convert(order.table, target, setup, **order.how))
        return _without_paths(answer) | {"answer_sha256": _digest(target)}


JOBS: dict[str, Callable[[Order], dict[str, Any]]] = {"mass": _mass, "room": _room, "table": _table}
"""What can be recorded, and how it is computed again."""


def _without_paths(answer: Mapping[str, Any]) -> dict[str, Any]:
    """Return the answer of a table without where it lay: a record is read elsewhere."""
    result = {key: value for key, value in answer["result"].items() if key not in ("source", "written")}
    return {**answer, "result": result}


def read_notes(texts: Sequence[str]) -> dict[str, str]:
    """Return notes from texts like ``item=foam 7``. Raises :class:`InputError` with every fault."""
    found: dict[str, str] = {}
    faults = []
    for text in texts:
        name, sign, note = text.partition("=")
        name = name.strip()
        if not sign or not note.strip():
            faults.append(Fault(f"--note {quoted(text)}", "has no text.", 'Write --note item="foam 7".'))
        elif name not in (*NOTES, *ACCEPTANCE):
            near = nearest(name, (*NOTES, *ACCEPTANCE))
            known = f"Did you mean {near}?" if near else f"Known are {', '.join((*NOTES, *ACCEPTANCE))}."
            faults.append(Fault(f"--note {quoted(text)}", f"{quoted(name)} is no note.", known))
        else:
            found[name] = note.strip()
    if faults:
        raise InputError(faults)
    return found


def check_record(path: Path, *, force: bool, inputs: Sequence[Path] = ()) -> None:
    """Refuse a record that could not be written. Raises :class:`InputError`."""
    check_target(path, endings=(".json",), force=force, inputs=inputs)


def write_record(
    path: Path, order: Order, answer: Mapping[str, Any], notes: Mapping[str, str], *, force: bool = False
) -> None:
    """Write the record of an answer (as its JSON has it). Raises :class:`InputError` where the file cannot be."""
    check_record(path, force=force, inputs=[order.table] if order.table else ())
    given: dict[str, Any] = {"set_up": order.set_up, "changes": list(order.changes), "how": dict(order.how)}
    if order.table is not None:
        given["table"] = {"name": order.table.name, "sha256": _digest(order.table)}
    if order.target is not None:
        given["answer"] = {"name": order.target.name}
        answer = _without_paths(answer) | {"answer_sha256": _digest(order.target)}
    sealed = {
        "record": FORMAT,
        "kind": order.kind,
        "written": datetime.now(UTC).isoformat(timespec="seconds"),
        "given": given,
        "given_sha256": _sha256(_canonical(given)),
        "decision_rule": RULES[order.kind],
        "constants": {
            name: dataclasses.asdict(getattr(constants, name))
            for name in constants.__all__
            if isinstance(getattr(constants, name), constants.Constant)
        },
        "computed_with": {
            "python": platform.python_version(),
            "machine": platform.machine(),
            **{name: version(name) for name in ("numpy", "scipy", "CoolProp", "polars")},
        },
        "notes": {name: notes.get(name, "") for name in NOTES},
        "answer": json.loads(json_room.dumps(answer)),
    }
    document = {
        **sealed,
        "seal": _sha256(_canonical(sealed)),
        "acceptance": {name: notes.get(name, "") for name in ACCEPTANCE},
    }
    with whole_file(path) as part:
        part.write_text(json_room.dumps(document) + "\n", encoding="utf-8")


def verify(path: Path, *, table: Path | None = None) -> Verification:
    """Compute the answer of a record again and compare. The table of a table's record lies beside it, or is named.

    Raises :class:`InputError` where the file is no record, or its table is not there or another one.
    """
    document = _read(path)
    answer, order = document["answer"], _order(document, path, table)
    sealed = {key: value for key, value in document.items() if key not in ("seal", "acceptance")}
    again = json.loads(json_room.dumps(JOBS[order.kind](order)))
    departures: list[str] = []
    apart = ("envcorr", "answer_sha256")
    then, now = ({key: value for key, value in one.items() if key not in apart} for one in (answer, again))
    largest = compare(then, now, departures)
    if again.get("answer_sha256") != answer.get("answer_sha256"):
        largest = max(largest, sys.float_info.epsilon)  # the sums agree, the last digits of some row do not
    if order.target is not None and order.target.exists() and _digest(order.target) != answer["answer_sha256"]:
        departures.append(f"{order.target.name} is not the table of masses that was written then.")
    return Verification(
        kind=order.kind,
        unchanged=_sha256(_canonical(sealed)) == document["seal"],
        departures=tuple(departures),
        largest=largest,
        made_by=str(answer.get("envcorr", "")),
        made_on=document["computed_with"],
        notes={**document["notes"], **document["acceptance"]},
    )


def _order(document: Mapping[str, Any], path: Path, table: Path | None) -> Order:
    given = document["given"]
    source = target = None
    if "table" in given:
        source = table or path.parent / given["table"]["name"]
        if not source.exists():
            problem, remedy = "is not there.", "Put the table beside its record, or name it: --table FILE."
            raise InputError([Fault(quoted(str(source)), problem, remedy)])
        if _digest(source) != given["table"]["sha256"]:
            problem = "is not the table that was recorded: its SHA-256 is another."
            raise InputError([Fault(quoted(str(source)), problem, "Find the table as it was.")])
        target = source.parent / given["answer"]["name"]
    return Order(document["kind"], given["set_up"], given["changes"], given["how"], source, target)


def _read(path: Path) -> dict[str, Any]:
    name = quoted(str(path))
    wanted = ("record", "kind", "given", "answer", "seal", "acceptance", "notes", "computed_with")
    try:
        document = json.loads(path.read_text(encoding="utf-8"))
    except OSError as error:
        fault = Fault(name, f"cannot be read: {error.strerror}.", "Check the name and the folder.")
        raise InputError([fault]) from None
    except (UnicodeDecodeError, ValueError, RecursionError):
        raise InputError([Fault(name, "is not JSON.", "Name a record that --record wrote.")]) from None
    if not isinstance(document, dict) or any(key not in document for key in wanted):
        raise InputError([Fault(name, "is no record.", "Name a record that --record wrote.")])
    if document["record"] != FORMAT or document["kind"] not in JOBS:
        problem = f"is a record of another kind ({document['record']}, {quoted(str(document['kind']))})."
        raise InputError([Fault(name, problem, "Verify it with the version that wrote it.")])
    return document


def _canonical(thing: Any) -> bytes:
    return json.dumps(thing, sort_keys=True, separators=(",", ":"), ensure_ascii=True).encode()


def _sha256(data: bytes) -> str:
    return hashlib.sha256(data).hexdigest()


def _digest(path: Path) -> str:
    with path.open("rb") as file:
        return hashlib.file_digest(file, "sha256").hexdigest()
