"""A table of readings in, the same table with masses out: whole, or not at all."""

from __future__ import annotations

import os
import threading
from collections.abc import Callable, Sequence
from dataclasses import dataclass, field
from pathlib import Path
from typing import TYPE_CHECKING, Any

import numpy as np

from envcorr import units
from envcorr.errors import Fault, InputError
from envcorr.intake.table import FORMATS, Layout, layout_of, read_columns, scan
from envcorr.jobs.mass_table import BLOCK, masses
from envcorr.numerals import quoted
from envcorr.propagation import coverage_factor
from envcorr.setup import Setup

if TYPE_CHECKING:
    import polars as pl

__all__ = ["TableSummary", "added_headers", "convert"]

MOST_XLSX_ROWS = 1_048_575
"""Rows of a sheet less the headers (ECMA-376)."""


@dataclass
class TableSummary:
    """What became of a table: how many rows, which could not be computed and why, and what to mind."""

    source: str
    written: str
    layout: Layout
    rows: int = 0
    failed: int = 0
    faults: dict[str, int] = field(default_factory=dict)
    """A sentence, and how many rows it concerns."""
    notices: dict[str, int] = field(default_factory=dict)
    assumed: dict[str, Any] = field(default_factory=dict)
    k: float = 2.0
    probability: float = 0.95


def added_headers(unit: str) -> tuple[str, ...]:
    """Return the headers of the columns that are added."""
    return (
        f"mass [{unit}]",
        f"standard uncertainty [{unit}]",
        f"expanded uncertainty [{unit}]",
        f"correction [{unit}]",
        "density of the air [kg/m³]",
        "notices",
    )


def convert(
    source: Path,
    target: Path,
    setup: Setup,
    *,
    mapped: Sequence[str] = (),
    force: bool = False,
    probability: float = 0.95,
    seed: int = 0,
    progress: Callable[[int, int], None] | None = None,
) -> TableSummary:
    """Write ``source`` with the masses of its readings added to ``target``; CSV, XLSX or Parquet by their endings.

    The target appears whole or not at all, and never replaces the source; an existing one needs ``force``. Rows that
    cannot be computed are kept, marked and counted. ``progress`` is told the rows done and in all. Raises
    :class:`InputError` where the table or the target cannot be used.
    """
    import polars as pl

    _check_target(source, target, force)
    frame, separator = scan(source)
    headers = frame.collect_schema().names()
    layout = layout_of(frame, headers, mapped)
    added = added_headers(layout.reading_unit)
    for header in added:
        if header in headers:
            fault = Fault(
                "the table", f"already has a column {quoted(header)}.", "Rename it: the answer needs the name."
            )
            raise InputError([fault])
    total = int(frame.select(pl.len()).collect(engine="streaming").item())
    if total == 0:
        raise InputError([Fault("the table", "has headers and no rows.", "Add a line a reading.")])
    summary = TableSummary(str(source), str(target), layout, k=coverage_factor(probability, float("inf")))
    summary.probability = probability
    lock = threading.Lock()

    def answer(batch: pl.DataFrame) -> pl.DataFrame:
        pieces = [_answer(piece, layout, setup, added, summary, lock, seed) for piece in batch.iter_slices(BLOCK)]
        if progress is not None:
            progress(summary.rows, total)
        return pl.concat(pieces) if pieces else _answer(batch, layout, setup, added, summary, lock, seed)

    schema = dict(frame.collect_schema()) | dict.fromkeys(added[:-1], pl.Float64()) | {added[-1]: pl.String()}
    answered = frame.map_batches(answer, schema=schema, streamable=True)
    part = target.with_name(f".{target.name}.{os.getpid()}.part")
    try:
        _write(answered, part, target.suffix.lower(), separator or ",", layout.comma, total)
        os.replace(part, target)
    except OSError as error:
        reason = error.strerror or str(error)
        raise InputError(
            [Fault(quoted(str(target)), f"could not be written: {reason}.", "Nothing was written.")]
        ) from None
    finally:
        part.unlink(missing_ok=True)
    return summary


def _check_target(source: Path, target: Path, force: bool) -> None:
    name = quoted(str(target))
    if target.suffix.lower() not in FORMATS:
        raise InputError([Fault(name, f"ends in {quoted(target.suffix)}.", f"Known are {', '.join(FORMATS)}.")])
    if not target.parent.is_dir():
        raise InputError([Fault(name, "its folder is not there.", "Make the folder first.")])
    if target.is_dir():
        raise InputError([Fault(name, "is a folder.", "Name a file in it.")])
    if target.exists() and source.exists() and target.samefile(source):
        raise InputError([Fault(name, "is the table itself.", "Give another name: the input is never replaced.")])
    if target.exists() and not force:
        raise InputError([Fault(name, "is already there.", "Give another name, or --force to replace it.")])


def _answer(
    batch: pl.DataFrame,
    layout: Layout,
    setup: Setup,
    added: Sequence[str],
    summary: TableSummary,
    lock: Any,
    seed: int,
) -> pl.DataFrame:
    """Return a batch of rows with the columns of the answer, and count what became of them."""
    import polars as pl

    columns, words, faults = read_columns(batch, layout)
    readable = faults == ""
    for column in columns.values():
        column.values[~readable] = np.nan
    found = masses(setup, columns, words, batch.height, seed=seed)
    sentences = np.where(readable, found.faults, faults)
    failed = (sentences != "") | np.isnan(found.mass)
    sentences[failed & (sentences == "")] = "the reading is missing."
    unit = layout.reading_unit
    numbers = []
    for values in (found.mass, found.u, summary.k * found.u, found.correction):
        size = np.asarray(units.to_unit(values, "mass", unit), dtype=np.float64)
        numbers.append(np.where(failed, np.nan, size))
    numbers.append(np.where(failed, np.nan, found.air_density))
    notes = np.where(failed, np.char.add("not computed: ", sentences.astype(str)), "").astype(object)
    with lock:
        summary.rows += batch.height
        summary.failed += int(np.count_nonzero(failed))
        for sentence in sentences[failed]:
            kind = sentence if len(summary.faults) < 20 or sentence in summary.faults else "other reasons"
            summary.faults[kind] = summary.faults.get(kind, 0) + 1
        for sentence, concerned in found.notices.items():
            mask = concerned & ~failed
            if np.any(mask):
                summary.notices[sentence] = summary.notices.get(sentence, 0) + int(np.count_nonzero(mask))
                notes[mask] = [f"{note} {sentence}".strip() for note in notes[mask]]
        summary.assumed.update(found.assumed)
    new = [
        pl.Series(header, values, dtype=pl.Float64).fill_nan(None)
        for header, values in zip(added, numbers, strict=False)
    ]
    return batch.with_columns(*new, pl.Series(added[-1], [note or None for note in notes], dtype=pl.String))


def _write(answered: pl.LazyFrame, part: Path, suffix: str, separator: str, comma: bool, total: int) -> None:
    if suffix == ".parquet":
        answered.sink_parquet(part)
    elif suffix == ".xlsx":
        if total > MOST_XLSX_ROWS:
            raise InputError(
                [Fault("the table", f"has {total} rows, more than a sheet takes.", "Write CSV or Parquet.")]
            )
        _write_sheet(answered.collect(), part)
    else:
        mark = {".tsv": "\t"}.get(suffix, separator if separator != "," or not comma else ";")
        answered.sink_csv(part, separator=mark, decimal_comma=comma)


def _write_sheet(frame: pl.DataFrame, part: Path) -> None:
    """Write a sheet in which texts stay texts: nothing is read as a formula or a link."""
    import xlsxwriter

    options = {"strings_to_formulas": False, "strings_to_urls": False, "strings_to_numbers": False}
    with xlsxwriter.Workbook(str(part), options) as book:
        frame.write_excel(book, autofit=False)
