"""The commands that solve the room check backwards."""

from __future__ import annotations

from collections.abc import Sequence

import click

from envcorr.cli_tools import emit_blocks, emit_json, json_option, progress_bar, report_option, reporter, set_option

__all__ = ["limits"]


@click.command()
@click.argument("setup", metavar="SETUP.toml")
@set_option
@click.option("--improve", multiple=True, metavar="NAME", help="A quantity to better together with others; may repeat.")
@click.option("--as-read", is_flag=True, help="The reading as it is must do, not the corrected one.")
@click.option("--treated", is_flag=True, help="With every effect treated that can be (neutralised, acclimatised ...).")
@click.option("--draws", type=click.IntRange(1, 2**18), help="Number of Monte Carlo draws (16384 if not said).")
@click.option("--seed", type=click.IntRange(min=0), default=0, show_default=True, help="Of the draws.")
@click.option("--out", metavar="FILE.csv", help="Write the limits as a table, too.")
@report_option
@click.option("--force", is_flag=True, help="Replace a file where it is already there.")
@json_option
def limits(
    setup: str,
    changes: Sequence[str],
    improve: Sequence[str],
    as_read: bool,
    treated: bool,
    draws: int | None,
    seed: int,
    out: str | None,
    report_file: str | None,
    force: bool,
    as_json: bool,
) -> None:
    """How good must each quantity become?

    The room check solved backwards: for each given quantity the largest spread or value for which the target is still
    reached, what all of them must become together, and what is worth holding or measuring.
    """
    from pathlib import Path

    from envcorr.intake.setup_file import read_setup
    from envcorr.jobs.limits import find_limits
    from envcorr.whole_file import check_target

    if as_read and treated:
        raise click.UsageError("--as-read and --treated are two different totals: choose one.")
    if out is not None:
        check_target(Path(out), endings=(".csv",), force=force, inputs=[Path(setup)])
    report = reporter(report_file, force=force, inputs=[setup])
    read = read_setup(setup, changes=changes)
    with progress_bar("limits") as progress:
        result = find_limits(
            read,
            state="as_read" if as_read else "treated" if treated else "corrected",
            improvable=improve,
            count=draws,
            seed=seed,
            progress=progress,
        )
    from envcorr.document import limits as page
    from envcorr.render import json_limits

    blocks = page.document(result)
    report(blocks, result.plan)
    if out is not None:
        from envcorr.whole_file import write_csv

        write_csv(Path(out), json_limits.HEADERS, json_limits.rows(result))
    if as_json:
        emit_json(json_limits.limits(result))
    else:
        emit_blocks(blocks)
