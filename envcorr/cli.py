"""The command line: parse, call a job, render, set the exit code.

Exit codes: 0 answered; 1 a fault of the program; 2 the input could not be used, and nothing was written; 3 answered
"not reached" or "undecided" where ``--strict`` was asked for; 130 interrupted.
"""

from __future__ import annotations

import os
import sys
from collections.abc import Sequence
from typing import Any

import click

import envcorr
from envcorr.cli_level import level
from envcorr.cli_limits import limits
from envcorr.cli_map import map_command
from envcorr.cli_mass import mass
from envcorr.cli_page import page
from envcorr.cli_record import record
from envcorr.cli_tools import (
    air_options,
    emit_blocks,
    emit_json,
    json_option,
    record_options,
    recorder,
    report_option,
    reporter,
    set_option,
)

__all__ = ["cli", "main"]

STRICT_ANSWERS = ("not reached", "undecided")


class _Fault(click.ClickException):
    """The end of a command with a message to stderr; a fault of the program."""

    exit_code = 1

    def show(self, file: Any = None) -> None:
        # nothing that a terminal would obey, whatever the file held
        text = "".join(s if s.isprintable() or s == "\n" else "\N{REPLACEMENT CHARACTER}" for s in self.message)
        click.echo(f"envcorr: {text}", file=file, err=file is None)


class _Unusable(_Fault):
    """The input could not be used."""

    exit_code = 2


class _Group(click.Group):
    """Turns exceptions into a message and an exit code."""

    def invoke(self, ctx: click.Context) -> Any:
        try:
            return super().invoke(ctx)
        except (click.ClickException, click.Abort, click.exceptions.Exit):
            raise
        except Exception as error:
            raise _stop(error) from error


def _stop(error: Exception) -> Exception:
    from envcorr.errors import InputError, NotComputedError

    if isinstance(error, InputError | NotComputedError):
        return _Unusable(str(error))
    if os.environ.get("ENVCORR_DEBUG"):
        return error
    reason = " ".join(str(error).split())[:200]
    return _Fault(
        f"a fault of the program, not of the input: {type(error).__name__}: {reason}\n"
        "Nothing was written. With ENVCORR_DEBUG=1 set it tells where."
    )


@click.group(cls=_Group, context_settings={"help_option_names": ["-h", "--help"], "max_content_width": 100})
@click.version_option(envcorr.__version__, prog_name="envcorr", message="%(prog)s %(version)s")
def cli() -> None:
    """What the surroundings do to a high-resolution weighing.

    Values are texts with a unit ("20.3 °C", "1013 hPa", "45 %"), or tables with their uncertainty:
    '{value = "20.3 °C", u = "0.1 K"}'.
    """


@cli.command()
@air_options
@click.option("--setup", metavar="FILE", help="A set-up file whose air is meant; the options change it.")
@set_option
@json_option
def air(setup: str | None, changes: Sequence[str], as_json: bool, **given: str | None) -> None:
    """Air density and its uncertainty."""
    from envcorr.intake.setup_file import parse_setup, read_setup
    from envcorr.jobs.air import air_density

    every = [*(f"air.{name}={text}" for name, text in given.items() if text is not None), *changes]
    if setup is None:
        read = parse_setup({}, changes=every, require=(), what="the options")
    else:
        read = read_setup(setup, changes=every, require=())
    result = air_density(read)
    if as_json:
        from envcorr.render import json

        emit_json(json.air(result))
    else:
        from envcorr.document import air as page

        emit_blocks(page.document(result))


@cli.command()
@click.argument("setup", metavar="SETUP.toml")
@set_option
@click.option("--strict", is_flag=True, help='Exit with 3 on "not reached" and "undecided".')
@click.option("--as-read", is_flag=True, help="Rank what spoils it by the reading as it is, not as corrected.")
@click.option("--draws", type=click.IntRange(1, 2**20), help="Number of Monte Carlo draws (at least 16384).")
@click.option("--seed", type=click.IntRange(min=0), default=0, show_default=True, help="Of the draws.")
@record_options
@report_option
@click.option("--force", is_flag=True, help="Replace the record or the report where it is already there.")
@json_option
@click.pass_context
def room(
    ctx: click.Context,
    setup: str,
    changes: Sequence[str],
    strict: bool,
    as_read: bool,
    draws: int | None,
    seed: int,
    record_file: str | None,
    notes: Sequence[str],
    report_file: str | None,
    force: bool,
    as_json: bool,
) -> None:
    """Can this room reach the target, and what spoils it?"""
    from envcorr.intake.setup_file import parse_setup
    from envcorr.intake.toml_file import read_mapping
    from envcorr.jobs.room import check_room
    from envcorr.render import json

    written = read_mapping(setup)
    read = parse_setup(written, changes=changes, what=setup)
    keep = recorder(record_file, notes, force=force, set_up=written, changes=changes)
    report = reporter(report_file, force=force, inputs=[setup])
    how: dict[str, Any] = {"draws": draws, "seed": seed, "as_read": as_read}
    result = check_room(read, **how)
    answer = json.room(result)
    from envcorr.document import room as page

    blocks = page.document(result)
    keep("room", how, answer)
    report(blocks, result.plan)
    if as_json:
        emit_json(answer)
    else:
        emit_blocks(blocks)
    if strict and result.verdict.answer in STRICT_ANSWERS:
        ctx.exit(3)


@cli.command()
@click.argument("name", required=False)
@json_option
def explain(name: str | None, as_json: bool) -> None:
    """Explain a quantity, a choice or an effect.

    Without a name, all of them are listed; "materials" lists the densities that are known by name, "presets" usual
    disturbances.
    """
    from envcorr import materials
    from envcorr.document import explain as page

    if name in ("materials", *materials.NAMED_BY):
        from envcorr.document import materials as page_of_materials
        from envcorr.render import json_explain

        if as_json:
            emit_json(json_explain.list_of_materials())
        else:
            emit_blocks(page_of_materials.document())
        return
    if name == "presets":
        from envcorr.document import presets as page_of_presets
        from envcorr.render import json_explain

        if as_json:
            emit_json(json_explain.list_of_presets())
        else:
            emit_blocks(page_of_presets.document())
        return
    subject = None if name is None else page.look_up(name)
    if as_json:
        from envcorr.render import json_explain

        emit_json(json_explain.explain(subject))
    else:
        emit_blocks(page.overview() if subject is None else page.document(subject))


cli.add_command(level)
cli.add_command(limits)
cli.add_command(map_command)
cli.add_command(mass)
cli.add_command(record)
cli.add_command(page)


def main(args: Sequence[str] | None = None) -> None:
    """Run the command line and exit."""
    try:
        code = cli.main(args, prog_name="envcorr", standalone_mode=False)
    except click.ClickException as error:
        error.show()
        code = error.exit_code
    except click.Abort:
        code = 130
    sys.exit(code if isinstance(code, int) else 0)
