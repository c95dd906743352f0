"""Tables of readings: which column is which quantity, in which unit, and its cells as numbers.

A header is a quantity's name with its unit, ``reading [g]`` or ``air.humidity (%)``; with ``.u`` or ``.half_width``
behind the name it is that row's own spread. A choice's name, and ``load.material``, stand alone. Everything else
passes through untouched.
"""

from __future__ import annotations

import csv
import re
from collections.abc import Sequence
from dataclasses import dataclass
from pathlib import Path
from typing import TYPE_CHECKING, Any, TypeAlias

import numpy as np
from numpy.typing import NDArray

from envcorr import materials, units
from envcorr.catalogue import CATALOGUE, nearest
from envcorr.errors import Fault, InputError
from envcorr.estimate import Shape
from envcorr.numerals import UnitError, quoted

if TYPE_CHECKING:
    import polars as pl

__all__ = [
    "FORMATS",
    "MOST_COLUMNS",
    "Column",
    "Field",
    "Layout",
    "Source",
    "layout_of",
    "read_columns",
    "scan",
    "with_numbers",
]

FORMATS = (".csv", ".tsv", ".txt", ".xlsx", ".parquet")
MOST_COLUMNS = 1000
"""Columns of a table of readings (judgement: more is another kind of file)."""
Floats: TypeAlias = NDArray[np.float64]
SEPARATORS = (";", "\t", ",")
_BESIDE = "\0"  # behind a header: no header of a file has it
_HEADER = re.compile(r"^\s*(?P<name>[^\[\]()]+?)\s*(?:[\[(](?P<unit>[^\[\]()]*)[\])])?\s*$")
_SPREADS: dict[str, Shape] = {".u": "normal", ".half_width": "rectangular"}
_COMMA, _POINT = r"^\s*[+\-−]?\d+,\d+\s*$", r"^\s*[+\-−]?\d*\.\d+(?:[eE][+-]?\d+)?\s*$"


@dataclass(frozen=True, slots=True)
class Column:
    """Values of one quantity [SI], one a row, NaN where a cell is empty; with spreads where rows have their own."""

    values: Floats
    spread: Floats | None = None
    shape: Shape = "fixed"


@dataclass(frozen=True, slots=True)
class Field:
    """A column that was recognised: its header, the quantity or choice, the unit, and which spread it holds."""

    header: str
    name: str
    kind: str = ""
    unit: str = ""
    spread: Shape | None = None


@dataclass(frozen=True, slots=True)
class Layout:
    """What the columns of a table are; ``comma`` where its decimal mark is a comma."""

    fields: tuple[Field, ...]
    headers: tuple[str, ...]
    reading_unit: str
    comma: bool = False

    @property
    def quantities(self) -> tuple[Field, ...]:
        """The columns of numbers."""
        return tuple(one for one in self.fields if one.kind)

    @property
    def choices(self) -> tuple[Field, ...]:
        """The columns of words."""
        return tuple(one for one in self.fields if not one.kind)


@dataclass(frozen=True, slots=True)
class Source:
    """A table as a lazy frame, texts as they stand; ``separator`` is that of a CSV (else "").

    ``commas``: whether there may be commas inside its cells.
    """

    frame: pl.LazyFrame
    headers: tuple[str, ...]
    separator: str = ""
    commas: bool = True


def scan(path: Path) -> Source:
    """Return the table of a file.

    Raises :class:`InputError` where it is none.
    """
    import polars as pl

    name = quoted(str(path))
    suffix = path.suffix.lower()
    if suffix not in FORMATS:
        raise _fault(name, f"ends in {quoted(suffix)}.", f"Known are {', '.join(FORMATS)}.")
    if path.is_dir():
        raise _fault(name, "is a folder.", "Name the table in it.")
    if not path.exists():
        raise _fault(name, "is not there.", "Check the name and the folder.")
    separator, commas = "", True
    try:
        if suffix == ".parquet":
            frame = pl.scan_parquet(path)
            headers = frame.collect_schema().names()
        elif suffix == ".xlsx":
            frame = pl.read_excel(path, infer_schema_length=None).lazy()
            headers = frame.collect_schema().names()
        else:
            headers, separator = _csv_headers(path)
            commas = _contains(path, b'"' if separator == "," else b",")
            frame = pl.scan_csv(path, separator=separator, infer_schema=False, quote_char='"')
    except InputError:
        raise
    except PermissionError:
        raise _fault(name, "may not be read.", "Check its permissions.") from None
    except Exception as error:
        reason = " ".join(str(error).split())[:160]
        raise _fault(name, f"cannot be read as a table: {reason}.", "Check the file.") from None
    twice = sorted({header for header in headers if headers.count(header) > 1})
    if twice:
        raise _fault(name, f"has the header {quoted(twice[0])} twice.", "Give every column a name of its own.")
    if len(headers) > MOST_COLUMNS:
        raise _fault(name, f"has {len(headers)} columns.", f"At most {MOST_COLUMNS} are read; is this another file?")
    return Source(frame, tuple(headers), separator, commas)


def _contains(path: Path, mark: bytes) -> bool:
    with path.open("rb") as file:
        return any(mark in piece for piece in iter(lambda: file.read(2**20), b""))


def _csv_headers(path: Path) -> tuple[list[str], str]:
    with path.open("rb") as file:
        head = file.read(2**20)
    name = quoted(str(path))
    if not head.strip():
        raise _fault(name, "is empty.", "A table has a line of headers and a line a reading.")
    if b"\0" in head:
        raise _fault(name, "is not text.", "Save the table as CSV in UTF-8, as XLSX or as Parquet.")
    try:
        text = head.decode("utf-8-sig", errors="strict" if len(head) < 2**20 else "ignore")
    except UnicodeDecodeError as error:
        line = head[: error.start].count(b"\n") + 1
        raise _fault(name, f"is not UTF-8 (line {line}).", "Save it as UTF-8.") from None
    first = text.splitlines()[0]
    separator = max(SEPARATORS, key=lambda mark: (first.count(mark), -SEPARATORS.index(mark)))
    return next(csv.reader([first], delimiter=separator)), separator


def layout_of(source: Source, mapped: Sequence[str] = ()) -> Layout:
    """Return which column is which, from the headers and from ``mapped`` texts like ``reading=Mass (g)``.

    Raises :class:`InputError` where there is no reading, a name or a unit is not known, or decimal marks are mixed.
    """
    faults: list[Fault] = []
    headers = source.headers
    given = _mapping(mapped, headers, faults)
    fields: list[Field] = []
    for header in headers:
        try:
            field = _field(header, given.get(header))
        except (UnitError, InputError) as error:
            faults.extend(Fault(f"column {quoted(header)}", f.problem, f.remedy) for f in error.faults)
            continue
        if field is not None:
            fields.append(field)
    names = [(one.name, one.spread) for one in fields]
    for one in fields:
        if names.count((one.name, one.spread)) > 1:
            faults.append(Fault(f"column {quoted(one.header)}", f"{one.name} is there twice.", "Keep one."))
        if one.spread and (one.name, None) not in names:
            faults.append(Fault(f"column {quoted(one.header)}", f"there is no column of {one.name}.", "Add it."))
    values = {one.name: one for one in fields if one.spread is None}
    if not faults and "reading" not in values and not {"gross", "tare"} <= set(values):
        near = nearest("reading", headers)
        hint = f' If it is {quoted(near)}: --column "reading={near}".' if near else ""
        found = ", ".join(quoted(h) for h in headers[:8]) + (" ..." if len(headers) > 8 else "")
        faults.append(
            Fault(
                "columns",
                f"no reading was found among {found}.",
                f"Name a column reading [g], or gross and tare.{hint}",
            )
        )
    if faults:
        raise InputError(faults, what="the table")
    unit = values["reading" if "reading" in values else "gross"].unit
    comma = source.commas and _decimal_comma(source.frame, [f for f in fields if f.kind])
    return Layout(tuple(fields), headers, unit, comma)


def _mapping(mapped: Sequence[str], headers: Sequence[str], faults: list[Fault]) -> dict[str, str]:
    given = {}
    for text in mapped:
        name, sign, header = text.partition("=")
        if not sign or header not in headers:
            near = nearest(header, headers)
            hint = f"Did you mean {quoted(near)}?" if near else 'Write --column "reading=Mass (g)".'
            faults.append(Fault(f"--column {quoted(text)}", f"there is no column {quoted(header)}.", hint))
        else:
            given[header] = name.strip()
    return given


def _field(header: str, given: str | None) -> Field | None:
    found = _HEADER.match(header)
    name, unit = (found["name"], found["unit"]) if found else (header, None)
    if given is not None:  # a unit in the given name goes before that of the header
        stated = _HEADER.match(given)
        name, unit = (stated["name"], stated["unit"] or unit) if stated else (given, unit)
    spread = None
    for ending, shape in _SPREADS.items():
        if name.endswith(ending):
            name, spread = name.removesuffix(ending), shape
    if name.endswith(".U"):
        raise InputError([Fault("", "U does not say its k.", "Give .u, the standard uncertainty U/k.")])
    if name in CATALOGUE.choices or name in materials.NAMED_BY:
        return Field(header, name)
    place = CATALOGUE.find(name)
    if place is None or place.quantity.internal:
        if given is None:
            return None
        near = nearest(name, CATALOGUE.words())
        raise InputError([Fault("", f"{quoted(name)} is no quantity.", f"Did you mean {near}?" if near else "")])
    kind = units.spread_kind(place.quantity.kind) if spread else place.quantity.kind
    unit = (unit or "").strip()
    units.from_unit(0.0, kind, unit)  # refuses a unit of another kind, and none where one is needed
    return Field(header, name, kind, unit, spread)


def _decimal_comma(frame: pl.LazyFrame, fields: Sequence[Field]) -> bool:
    import polars as pl

    texts = [f.header for f in fields if frame.collect_schema()[f.header] == pl.String]
    if not texts:
        return False
    marks = frame.select(
        *(pl.col(h).str.contains(_COMMA).any().alias(f"comma {h}") for h in texts),
        *(pl.col(h).str.contains(_POINT).any().alias(f"point {h}") for h in texts),
    ).collect(engine="streaming")
    with_comma = [h for h in texts if marks[f"comma {h}"][0]]
    with_point = [h for h in texts if marks[f"point {h}"][0]]
    if with_comma and with_point:
        columns = f"{quoted(with_comma[0])} and {quoted(with_point[0])}"
        raise _fault("the table", f"has decimal commas and points ({columns}).", "Use one decimal mark throughout.")
    return bool(with_comma)


def with_numbers(frame: pl.LazyFrame, layout: Layout) -> pl.LazyFrame:
    """Return the table with the numbers of each quantity beside its cells, read by many hands at once."""
    import polars as pl

    schema = frame.collect_schema()
    cells = [
        pl.col(field.header).str.replace(",", ".", literal=True)
        if layout.comma and schema[field.header] == pl.String
        else pl.col(field.header)
        for field in layout.quantities
    ]
    headers = [field.header + _BESIDE for field in layout.quantities]
    return frame.with_columns(
        cell.cast(pl.Float64, strict=False).alias(header) for cell, header in zip(cells, headers, strict=True)
    )


def read_columns(batch: pl.DataFrame, layout: Layout) -> tuple[dict[str, Column], dict[str, list[str]], NDArray[Any]]:
    """Return the columns of a batch of :func:`with_numbers` [SI], its words, and a sentence for each unreadable row."""
    faults = np.full(batch.height, "", dtype=object)
    values: dict[str, NDArray[Any]] = {}
    spreads: dict[str, tuple[NDArray[Any], Shape]] = {}
    for field in layout.quantities:
        numbers, bad = _numbers(batch[field.header], batch[field.header + _BESIDE], layout.comma)
        for i in bad:
            text = quoted(str(batch[field.header][int(i)]))
            faults[i] = f"{field.header}: {text} is not a number."
        converted = np.asarray(units.from_unit(numbers, field.kind, field.unit), dtype=np.float64)
        if field.spread is None:
            values[field.name] = converted
        else:
            for row in np.flatnonzero(converted < 0):
                faults[row] = f"{field.header}: a spread has no sign."
            spreads[field.name] = (converted, field.spread)
    columns = {}
    for name, column in values.items():
        columns[name] = Column(column, *spreads[name]) if name in spreads else Column(column)
    words = {}
    for field in layout.choices:
        words[field.name] = [_word(text) for text in batch[field.header].to_list()]
        if field.name in materials.NAMED_BY:
            continue  # found, or not, when the rows are solved
        options = CATALOGUE.choices[field.name]
        for i, word in enumerate(words[field.name]):
            if word and word not in options.options:
                reason = (options.refused or {}).get(word, f"Known are {', '.join(options.options)}.")
                faults[i] = f"{field.header}: {quoted(word)} cannot be used. {reason}"
    return columns, words, faults


def _word(text: Any) -> str:
    return "" if text is None else str(text).strip()


def _numbers(column: pl.Series, cast: pl.Series, comma: bool) -> tuple[Floats, list[int]]:
    """Return the numbers of a column, NaN where a cell is empty, and the rows whose text is no number."""
    import polars as pl

    if column.dtype == pl.String and cast.null_count() > column.null_count():  # blanks, another minus, or no number
        text = column.str.replace(",", ".", literal=True) if comma else column
        text = text.str.strip_chars().str.replace("−", "-", literal=True)
        cast = text.cast(pl.Float64, strict=False)
        empty = (text.fill_null("") == "").to_numpy()
    else:
        empty = column.is_null().to_numpy() if column.null_count() else np.zeros(len(column), dtype=bool)
    numbers = np.array(cast.to_numpy(), dtype=np.float64)
    return numbers, [int(i) for i in np.flatnonzero(~empty & ~np.isfinite(numbers))]


def _fault(where: str, problem: str, remedy: str) -> InputError:
    return InputError([Fault(where, problem, remedy)])
