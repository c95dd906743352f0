"""A table of readings in, the same table with masses out: whole, or not at all."""

from __future__ import annotations

from collections.abc import Callable, Iterator, Sequence
from concurrent.futures import ThreadPoolExecutor
from dataclasses import dataclass, field
from pathlib import Path
from typing import TYPE_CHECKING, Any

import numpy as np
from numpy.typing import NDArray

from envcorr import units
from envcorr.catalogue import CATALOGUE
from envcorr.errors import Fault, InputError
from envcorr.intake.table import FORMATS, Layout, layout_of, read_columns, scan, with_numbers
from envcorr.jobs.mass_table import BESIDE, BLOCK, Rows, RowSolver
from envcorr.numerals import quoted
from envcorr.propagation import coverage_factor
from envcorr.setup import Setup
from envcorr.whole_file import check_target, whole_file

if TYPE_CHECKING:
    import polars as pl

__all__ = ["TableSummary", "added_headers", "convert"]

MOST_XLSX_ROWS = 1_048_575
"""Rows of a sheet less the headers (ECMA-376)."""
HELD_WHOLE = 2**27
"""Bytes of a file of text that is read at one go (judgement: a few million rows)."""
READ_AHEAD = 8
"""Blocks that are read at a time."""
FEW_WHERE_DRAWN = 1024
"""Rows at a time where each is drawn, so that the progress shows."""
_KINDS = {name: CATALOGUE.quantities[quantity].kind for name, quantity in BESIDE.items()}


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
    sums: dict[str, float] = field(default_factory=dict)
    """Control totals: the sum of each column of numbers that was added, in the order of the rows."""
    k: float = 2.0
    probability: float = 0.95


def added_headers(unit: str, beside: Sequence[str] = (), *, drawn: bool = False) -> tuple[str, ...]:
    """Return the headers of the columns that are added; the last one holds text."""
    headers = [
        f"mass [{unit}]",
        f"standard uncertainty [{unit}]",
        f"expanded uncertainty [{unit}]",
        f"correction [{unit}]",
        "density of the air [kg/m³]",
    ]
    for name in beside:
        own = unit if _KINDS[name] == "mass" else "mL"
        headers += [f"{name} [{own}]", f"standard uncertainty of the {name} [{own}]"]
    if drawn:
        headers += [f"standard uncertainty by draws [{unit}]", f"interval from [{unit}]", f"interval to [{unit}]"]
    return (*headers, "notices")


def convert(
    source: Path,
    target: Path,
    setup: Setup,
    *,
    mapped: Sequence[str] = (),
    force: bool = False,
    probability: float = 0.95,
    beside: Sequence[str] = (),
    count: int = 0,
    seed: int = 0,
    most: int | None = None,
    progress: Callable[[int, int], None] | None = None,
) -> TableSummary:
    """Write ``source`` with the masses of its readings added to ``target``; CSV, XLSX or Parquet by their endings.

    The target appears whole or not at all, and never replaces the source; an existing one needs ``force``. Rows that
    cannot be computed are kept, marked and counted. ``beside`` names what to tell beside the mass ("conventional mass",
    "volume"); ``count`` draws a row give a coverage interval by Monte Carlo too (none if 0). ``progress`` is told the
    rows done and in all, from another thread; a table of more than ``most`` rows is refused. Raises :class:`InputError`
    where the table or the target cannot be used.
    """
    import polars as pl
    from polars.io.plugins import register_io_source

    check_target(target, endings=FORMATS, force=force, inputs=(source,))
    table = scan(source)
    frame, layout = table.frame, layout_of(table, mapped)
    added = added_headers(layout.reading_unit, beside, drawn=count > 0)
    for header in added:
        if header in table.headers:
            fault = Fault(
                "the table", f"already has a column {quoted(header)}.", "Rename it: the answer needs the name."
            )
            raise InputError([fault])
    total = int(frame.select(pl.len()).collect(engine="streaming").item())
    if total == 0:
        raise InputError([Fault("the table", "has headers and no rows.", "Add a line a reading.")])
    if most is not None and total > most:
        raise InputError([Fault("the table", f"has {total} rows, more than {most}.", "Cut it, or use envcorr mass.")])
    summary = TableSummary(str(source), str(target), layout, k=coverage_factor(probability, float("inf")))
    summary.probability = probability
    solver = RowSolver(setup, beside=beside, count=count, probability=probability, seed=seed)
    block = max(1, min(BLOCK, FEW_WHERE_DRAWN)) if count else BLOCK

    def blocks(*_: Any) -> Iterator[pl.DataFrame]:
        small = source.suffix.lower() != ".parquet" and source.stat().st_size <= HELD_WHOLE
        for batch in _blocks(with_numbers(frame, layout), total, block, small=small):
            yield _answer(batch, layout, solver, added, summary)
            if progress is not None:
                progress(summary.rows, total)

    schema = dict(frame.collect_schema()) | dict.fromkeys(added[:-1], pl.Float64()) | {added[-1]: pl.String()}
    answered = register_io_source(blocks, schema=schema, is_pure=True)
    with whole_file(target) as part:
        _write(answered, part, target.suffix.lower(), table.separator or ",", layout.comma, total)
    return summary


def _blocks(frame: pl.LazyFrame, total: int, block: int, *, small: bool) -> Iterator[pl.DataFrame]:
    """Yield the rows in order and in blocks of one size, so that the same table gives the same bytes.

    A ``small`` table may be held whole; of another a few blocks are read ahead.
    """
    if small:
        yield from frame.collect_batches(chunk_size=block, maintain_order=True)
        return
    step = READ_AHEAD * block

    def read(start: int) -> pl.DataFrame:
        return frame.slice(start, step).collect(engine="streaming")

    with ThreadPoolExecutor(1) as reader:
        ahead = reader.submit(read, 0)
        for start in range(0, total, step):
            rows = ahead.result()
            if start + step < total:
                ahead = reader.submit(read, start + step)
            yield from rows.iter_slices(block)


def _answer(
    batch: pl.DataFrame, layout: Layout, solver: RowSolver, added: Sequence[str], summary: TableSummary
) -> pl.DataFrame:
    """Return a batch of rows with the columns of the answer, and count what became of them."""
    import polars as pl

    columns, words, faults = read_columns(batch, layout)
    unreadable = np.flatnonzero(faults)
    for column in columns.values():
        column.values[unreadable] = np.nan
    found = solver.solve(columns, words, batch.height)
    found.faults[unreadable] = faults[unreadable]
    found.mass[unreadable] = np.nan  # whatever the set-up would have put in the place of what cannot be read
    failed = np.isnan(found.mass)
    sizes = _numbers(found, layout, summary, failed)
    for header, values in zip(added, sizes, strict=False):
        summary.sums[header] = summary.sums.get(header, 0.0) + float(np.nansum(values))
    numbers = [pl.Series(values, dtype=pl.Float64, nan_to_null=True) for values in sizes]
    notes = pl.Series(_notes(found, failed, summary), dtype=pl.String)
    summary.rows += batch.height
    summary.assumed.update(found.assumed)
    answered = batch.select(layout.headers)
    return answered.with_columns(
        *(series.alias(header) for header, series in zip(added, [*numbers, notes], strict=True))
    )


def _numbers(found: Rows, layout: Layout, summary: TableSummary, failed: NDArray[np.bool_]) -> list[Any]:
    """Return the numbers of the answer in the table's units, in the order of :func:`added_headers`."""

    def in_unit(values: Any, kind: str = "mass") -> Any:
        size = np.asarray(units.to_unit(values, kind, layout.reading_unit if kind == "mass" else "mL"), dtype=float)
        return np.where(failed, np.nan, size)

    numbers = [in_unit(values) for values in (found.mass, found.u, summary.k * found.u, found.correction)]
    numbers.append(np.where(failed, np.nan, found.air_density))
    for name, both in found.beside.items():
        numbers += [in_unit(values, _KINDS[name]) for values in both]
    numbers += [in_unit(values) for values in found.drawn or ()]
    return numbers


def _notes(found: Rows, failed: NDArray[np.bool_], summary: TableSummary) -> list[str | None]:
    """Return a sentence or none for each row, and count them."""
    notes: list[str | None] = [None] * failed.size
    for i in np.flatnonzero(failed):
        sentence = found.faults[i] or "the reading is missing."
        notes[i] = f"not computed: {sentence}"
        summary.failed += 1
        kind = sentence if len(summary.faults) < 20 or sentence in summary.faults else "other reasons"
        summary.faults[kind] = summary.faults.get(kind, 0) + 1
    for sentence, concerned in found.notices.items():
        rows = np.flatnonzero(concerned & ~failed)
        if rows.size:
            summary.notices[sentence] = summary.notices.get(sentence, 0) + rows.size
            for i in rows:
                notes[i] = f"{notes[i]} {sentence}" if notes[i] else sentence
    return notes


def _write(answered: pl.LazyFrame, part: Path, suffix: str, separator: str, comma: bool, total: int) -> None:
    import polars as pl

    if suffix == ".parquet":
        try:
            answered.sink_parquet(part)
        except pl.exceptions.ComputeError as error:
            if "IO error" in str(error):
                raise OSError(str(error).rpartition("IO error: ")[2]) from error
            raise
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
    from xlsxwriter.exceptions import FileCreateError

    options = {"strings_to_formulas": False, "strings_to_urls": False, "strings_to_numbers": False}
    try:
        with xlsxwriter.Workbook(str(part), options) as book:
            frame.write_excel(book, autofit=False)
    except FileCreateError as error:
        raise OSError(str(error)) from error
