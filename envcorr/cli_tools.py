"""What the commands share: their common options, and how an answer is written to standard output."""

from __future__ import annotations

import os
import sys
from collections.abc import Callable, Iterator, Mapping, Sequence
from contextlib import contextmanager
from typing import TYPE_CHECKING, Any, TypeVar

import click

if TYPE_CHECKING:
    from envcorr.document.blocks import Block
    from envcorr.plan import Plan

__all__ = [
    "AIR_OPTIONS",
    "air_options",
    "emit_blocks",
    "emit_json",
    "json_option",
    "progress_bar",
    "record_options",
    "recorder",
    "report_option",
    "reporter",
    "set_option",
]

Command = TypeVar("Command", bound=Callable[..., Any])

AIR_OPTIONS = {
    "temperature": "Air temperature.",
    "pressure": "Air pressure at the balance (station pressure).",
    "sea_level_pressure": "Air pressure reduced to sea level; needs --altitude.",
    "altitude": "Height of the balance above sea level.",
    "humidity": "Relative humidity.",
    "dew_point": "Dew point, instead of the humidity.",
    "wet_bulb": "Wet-bulb temperature, instead of the humidity.",
    "co2": "CO2 content; not given, an occupied room is assumed.",
    "density": "Air density, where it is known directly.",
    "formula": '"CIPM-2007" (if not said) or "OIML R 111-1".',
}


def json_option(function: Command) -> Command:
    """Add --json."""
    return click.option("--json", "as_json", is_flag=True, help="Print JSON, in full precision.")(function)


def set_option(function: Command) -> Command:
    """Add --set, as often as wanted."""
    return click.option(
        "--set",
        "changes",
        multiple=True,
        metavar="NAME=VALUE",
        help='Give or change a quantity, as in --set air.temperature="22 °C"; may be repeated.',
    )(function)


def record_options(function: Command) -> Command:
    """Add --record and --note."""
    function = click.option(
        "--note",
        "notes",
        multiple=True,
        metavar="NAME=TEXT",
        help='A note for the record, as in --note item="foam 7"; may be repeated.',
    )(function)
    return click.option(
        "--record", "record_file", metavar="FILE.json", help="Write down all that the answer was computed from and by."
    )(function)


def report_option(function: Command) -> Command:
    """Add --report."""
    text = "Write the page as a report to file, HTML or PDF by its ending, with inputs, methods and room to sign."
    return click.option("--report", "report_file", metavar="FILE", help=text)(function)


def reporter(file: str | None, *, force: bool, inputs: Sequence[str] = ()) -> Callable[[Sequence[Block], Plan], None]:
    """Return what writes a page as a report; the file's name is looked at before anything is computed."""
    from pathlib import Path

    if file is None:
        return lambda page, plan: None
    from envcorr.whole_file import check_target, whole_file

    path = Path(file)
    check_target(path, endings=(".html", ".pdf"), force=force, inputs=[Path(one) for one in inputs])

    def write(page: Sequence[Block], plan: Plan) -> None:
        from envcorr.document.report import report
        from envcorr.render import html, pdf

        blocks = report(page, plan)
        data = pdf.render(blocks) if path.suffix.lower() == ".pdf" else html.render(blocks).encode()
        with whole_file(path) as part:
            part.write_bytes(data)

    return write


def recorder(
    file: str | None, notes: Sequence[str], *, force: bool, set_up: Mapping[str, Any], changes: Sequence[str]
) -> Callable[..., None]:
    """Return what keeps an answer as a record: called with its kind, how it was computed, the answer, and any tables.

    Notes and the file's name are looked at before anything is computed; without a file nothing is kept.
    """
    from pathlib import Path

    if file is None:
        if notes:
            raise click.UsageError("--note needs --record FILE.json.")
        return lambda *_: None
    from envcorr.record import Order, check_record, read_notes, write_record

    said, path = read_notes(notes), Path(file)
    check_record(path, force=force)

    def keep(
        kind: str,
        how: Mapping[str, Any],
        answer: Mapping[str, Any],
        table: Path | None = None,
        target: Path | None = None,
    ) -> None:
        write_record(path, Order(kind, set_up, changes, how, table, target), answer, said, force=force)

    return keep


def air_options(function: Command) -> Command:
    """Add an option for each quantity of the air."""
    for name, text in reversed(AIR_OPTIONS.items()):
        function = click.option(f"--{name.replace('_', '-')}", name, metavar="TEXT", help=text)(function)
    return function


@contextmanager
def progress_bar(what: str) -> Iterator[Callable[[int, int], None]]:
    """Show a bar on the terminal's standard error while something long runs; told what is done, of how much."""
    from rich.console import Console
    from rich.progress import BarColumn, MofNCompleteColumn, Progress, TimeRemainingColumn

    columns = (what, BarColumn(), MofNCompleteColumn(), TimeRemainingColumn())
    with Progress(*columns, console=Console(stderr=True), transient=True) as bar:
        task = bar.add_task(what, total=None)
        yield lambda done, total: bar.update(task, completed=done, total=total)


def emit_blocks(blocks: Sequence[Block]) -> None:
    """Print a document to standard output."""
    from envcorr.render.terminal import render_for

    _emit(render_for(blocks, sys.stdout))


def emit_json(document: dict[str, Any]) -> None:
    """Print a result as JSON to standard output."""
    from envcorr.render.json import dumps

    _emit(dumps(document, encoding=sys.stdout.encoding or "ascii") + "\n")


def _emit(text: str) -> None:
    """Write to standard output; whoever reads it may stop early."""
    try:
        sys.stdout.write(text)
        sys.stdout.flush()
    except BrokenPipeError:
        # else the interpreter would complain when it flushes at its end
        os.dup2(os.open(os.devnull, os.O_WRONLY), sys.stdout.fileno())
