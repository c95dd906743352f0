"""The commands of the analyst: the true mass behind a reading."""

from __future__ import annotations

from collections.abc import Sequence
from typing import TYPE_CHECKING, Any

import click

from envcorr.cli_tools import (
    emit_blocks,
    emit_json,
    json_option,
    progress_bar,
    record_options,
    recorder,
    report_option,
    reporter,
    set_option,
)

if TYPE_CHECKING:
    from pathlib import Path

    from envcorr.jobs.mass_file import TableSummary
    from envcorr.setup import Setup

__all__ = ["mass"]

ALSO = {"conventional-mass": "conventional mass", "volume": "volume"}
OPTIONS = {
    "reading": ("reading", "What the display shows of the load alone."),
    "gross": ("gross", "What it shows of load and container; needs --tare."),
    "tare": ("tare", "What it shows of the container alone."),
    "density": ("load.density", "Density of the sample."),
    "density_kind": ("load.density_kind", "gas-displacement, envelope, solid or liquid."),
    "volume": ("load.volume", "Volume of the sample, instead of its density."),
    "material": ("load.material", "A material by name, instead of the density."),
    "temperature": ("air.temperature", "Air temperature."),
    "pressure": ("air.pressure", "Air pressure at the balance (station pressure)."),
    "sea_level_pressure": ("air.sea_level_pressure", "Air pressure reduced to sea level; needs --altitude."),
    "altitude": ("air.altitude", "Height of the balance above sea level."),
    "humidity": ("air.humidity", "Relative humidity."),
    "dew_point": ("air.dew_point", "Dew point, instead of the humidity."),
    "wet_bulb": ("air.wet_bulb", "Wet-bulb temperature, instead of the humidity."),
    "co2": ("air.co2", "CO2 content; not given, an occupied room is assumed."),
    "adjusted": ("adjusted.when", '"just before" or "unknown".'),
}


@click.command()
@click.argument("table", required=False, metavar="[TABLE]")
@click.option("--out", metavar="FILE", help="Where the table goes with the masses added: CSV, XLSX or Parquet.")
@click.option("--column", "mapped", multiple=True, metavar="NAME=HEADER", help="Say which column is which quantity.")
@click.option("--force", is_flag=True, help="Replace FILE where it is already there.")
@click.option("--setup", metavar="FILE", help="A set-up file for all that the options do not say.")
@set_option
@click.option("--probability", metavar="TEXT", default="95 %", show_default=True, help="Of the expanded uncertainty.")
@click.option(
    "--monte-carlo", is_flag=True, help="A coverage interval by draws too (JCGM 101), of each row of a table."
)
@click.option("--draws", type=click.IntRange(2**10, 2**20), help="How many for that: 16384, of a row 4096.")
@click.option("--also", multiple=True, type=click.Choice(tuple(ALSO)), help="Tell that of each row too, as columns.")
@click.option("--seed", type=click.IntRange(min=0), default=0, show_default=True, help="Of the draws.")
@record_options
@report_option
@json_option
def mass(
    table: str | None,
    out: str | None,
    mapped: Sequence[str],
    force: bool,
    setup: str | None,
    changes: Sequence[str],
    probability: str,
    monte_carlo: bool,
    draws: int | None,
    also: Sequence[str],
    seed: int,
    record_file: str | None,
    notes: Sequence[str],
    report_file: str | None,
    as_json: bool,
    **given: str | None,
) -> None:
    """The true mass of a sample, from a reading of it, or from each reading of a TABLE.

    For example: envcorr mass --reading "1.25000 g" --density "1050 kg/m³" --temperature "21.4 °C"
    --pressure "943.1 hPa" --humidity "42 %" --adjusted "just before"
    """
    from pathlib import Path

    from envcorr.intake.options import coverage_probability
    from envcorr.intake.setup_file import parse_setup
    from envcorr.intake.toml_file import read_mapping
    from envcorr.jobs.mass import find_mass
    from envcorr.render import json_mass

    if draws is not None and not monte_carlo:
        raise click.UsageError("--draws needs --monte-carlo.")
    if table is None and (out or mapped or also):
        raise click.UsageError("--out, --column and --also are for a TABLE.")
    if table is not None and report_file is not None:
        raise click.UsageError("--report is for one reading; a table is its own report.")
    if table is not None and out is None:
        raise click.UsageError("A table needs --out FILE.")
    every = [*(f"{OPTIONS[name][0]}={text}" for name, text in given.items() if text is not None), *changes]
    written = {} if setup is None else read_mapping(setup)
    read = parse_setup(written, changes=every, require=(), what=setup or "the options")
    count = (draws or (2**14 if table is None else 2**12)) if monte_carlo else 0
    how: dict[str, Any] = {"probability": coverage_probability(probability), "count": count, "seed": seed}
    keep = recorder(record_file, notes, force=force, set_up=written, changes=every)
    report = reporter(report_file, force=force, inputs=[setup] if setup else ())
    if table is None or out is None:
        from envcorr.document import mass as page

        result = find_mass(read, **how)
        answer, blocks = json_mass.mass(result), page.document(result)
        keep("mass", how, answer)
        report(blocks, result.plan)
        if as_json:
            emit_json(answer)
        else:
            emit_blocks(blocks)
        return
    how |= {"mapped": list(mapped), "beside": [ALSO[word] for word in also]}
    summary = _with_progress(Path(table), Path(out), read, force=force, **how)
    answer = json_mass.table(summary)
    keep("table", how, answer, Path(table), Path(out))
    if as_json:
        emit_json(answer)
    else:
        from envcorr.document import mass_table as page_of_table

        emit_blocks(page_of_table.document(summary))


def _with_progress(table: Path, out: Path, setup: Setup, **how: Any) -> TableSummary:
    from envcorr.jobs.mass_file import convert

    with progress_bar("rows") as progress:
        return convert(table, out, setup, progress=progress, **how)


for _name, (_quantity, _text) in reversed(OPTIONS.items()):
    mass = click.option(f"--{_name.replace('_', '-')}", _name, metavar="TEXT", help=_text)(mass)
