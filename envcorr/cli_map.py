"""The command that draws where the target is reached."""

from __future__ import annotations

from collections.abc import Sequence
from typing import TYPE_CHECKING, Any

import click

from envcorr.cli_tools import emit_blocks, emit_json, json_option, progress_bar, set_option

if TYPE_CHECKING:
    from envcorr.jobs.map import AxisRequest, Varied
    from envcorr.setup import Setup

__all__ = ["map_command"]

ENDINGS = (".svg", ".png", ".csv")


@click.command("map")
@click.argument("setup", metavar="SETUP.toml")
@click.option("--x", "x", required=True, metavar="NAME", help="The quantity across.")
@click.option("--y", "y", metavar="NAME", help="The quantity upwards; without it, a curve of the error against x.")
@click.option("--x-range", metavar="TEXT", help='From where to where, as in "18 °C .. 26 °C".')
@click.option("--y-range", metavar="TEXT", help="The same of y.")
@click.option("--x-of", type=click.Choice(["value", "spread"]), help="Vary its value or its spread (u, half-width).")
@click.option("--y-of", type=click.Choice(["value", "spread"]), help="The same of y.")
@click.option("--steps", type=int, default=40, show_default=True, help="Points along an axis.")
@click.option("--whole", is_flag=True, help="Of a curve: the whole weighing, not the surroundings alone.")
@click.option("--out", metavar="FILE", help="The chart as SVG or PNG, or its points as CSV, by the ending.")
@set_option
@click.option("--as-read", is_flag=True, help="The reading as it is, not the corrected one.")
@click.option("--treated", is_flag=True, help="With every effect treated that can be.")
@click.option("--draws", type=click.IntRange(1, 2**18), help="Number of Monte Carlo draws (16384 if not said).")
@click.option("--seed", type=click.IntRange(min=0), default=0, show_default=True, help="Of the draws.")
@click.option("--force", is_flag=True, help="Replace FILE where it is already there.")
@json_option
def map_command(
    setup: str,
    x: str,
    y: str | None,
    steps: int,
    whole: bool,
    out: str | None,
    changes: Sequence[str],
    as_read: bool,
    treated: bool,
    draws: int | None,
    seed: int,
    force: bool,
    as_json: bool,
    **axes: Any,
) -> None:
    """Where is the target reached?

    Over two quantities a map of where it is reached; over one a curve of the error with its band. For example: envcorr
    map bench.toml --x load.density --out density.svg
    """
    from pathlib import Path

    from envcorr.document import map as page
    from envcorr.intake.setup_file import full_name, read_setup
    from envcorr.jobs.map import make_curve, make_grid
    from envcorr.render import json_map
    from envcorr.whole_file import check_target

    if as_read and treated:
        raise click.UsageError("--as-read and --treated are two different totals: choose one.")
    if out is not None:
        check_target(Path(out), endings=ENDINGS, force=force, inputs=[Path(setup)])
    read = read_setup(setup, changes=changes)
    how: dict[str, Any] = {
        "steps": steps,
        "state": "as_read" if as_read else "treated" if treated else "corrected",
        "count": draws,
        "seed": seed,
    }
    if y is None and axes["x_of"] is None and not x.startswith("sensors."):
        axes["x_of"] = "value"
    x, y = full_name(x), None if y is None else full_name(y)
    across = _request(read, "x", x, axes)
    with progress_bar("points") as progress:
        if y is not None:
            field = make_grid(read, across, _request(read, "y", y, axes), progress=progress, **how)
            blocks, answer, rows = page.grid(field), json_map.grid(field), json_map.grid_rows(field)
        else:
            line = make_curve(read, across, scope="whole" if whole else "surroundings", progress=progress, **how)
            blocks, answer, rows = page.curve(line), json_map.curve(line), json_map.curve_rows(line)
    if out is not None:
        _write(Path(out), blocks, rows)
    if as_json:
        emit_json(answer)
    else:
        emit_blocks(blocks)


def _write(path: Any, blocks: Sequence[Any], rows: tuple[tuple[str, ...], list[tuple[Any, ...]]]) -> None:
    from envcorr.document.blocks import Band, Region
    from envcorr.render.figure import render
    from envcorr.whole_file import whole_file, write_csv

    ending = path.suffix.lower()
    if ending == ".csv":
        write_csv(path, *rows)
        return
    chart = next(block for block in blocks if isinstance(block, Region | Band))
    with whole_file(path) as part:
        part.write_bytes(render(chart, ending.removeprefix(".")))


def _request(setup: Setup, letter: str, name: str, axes: dict[str, Any]) -> AxisRequest:
    from envcorr import units
    from envcorr.catalogue import CATALOGUE
    from envcorr.errors import Fault, InputError
    from envcorr.jobs.map import AxisRequest
    from envcorr.numerals import UnitError

    varied: Varied | None = axes[f"{letter}_of"]
    text = axes[f"{letter}_range"]
    place = CATALOGUE.find(name)
    if text is None or place is None:
        return AxisRequest(name, varied)
    where = f"--{letter}-range"
    parts = text.split("..") if ".." in text else text.split(" to ")
    if len(parts) != 2:
        raise InputError([Fault(where, "is no range.", 'Write "18 °C .. 26 °C".')])
    given = setup.estimates.get(name)
    spread = varied == "spread" or (varied is None and given is not None and not given.is_exact)
    kind = units.spread_kind(place.kind) if spread else place.kind
    try:
        low, high = (units.parse(part.strip(), kind) for part in parts)
    except UnitError as error:
        raise InputError([Fault(where, error.problem, error.remedy)]) from None
    return AxisRequest(name, varied, (low, high))
