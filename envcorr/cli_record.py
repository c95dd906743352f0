"""The commands around a record of an answer."""

from __future__ import annotations

from pathlib import Path

import click

from envcorr.cli_tools import emit_blocks, emit_json, json_option

__all__ = ["record"]


@click.group()
def record() -> None:
    """Records of answers (written by --record)."""


@record.command()
@click.argument("file", metavar="FILE.json")
@click.option("--table", metavar="TABLE", help="The table of readings, where it does not lie beside its record.")
@json_option
@click.pass_context
def verify(ctx: click.Context, file: str, table: str | None, as_json: bool) -> None:
    """Compute the answer of a record again, and compare.

    Exit code 3 where it is not found again, or the record was changed.
    """
    from envcorr import record as records

    found = records.verify(Path(file), table=Path(table) if table else None)
    if as_json:
        from envcorr.render import json_record

        emit_json(json_record.verification(found))
    else:
        from envcorr.document import record as page

        emit_blocks(page.document(found))
    if not found.holds:
        ctx.exit(3)
