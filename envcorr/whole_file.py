"""Files that appear whole or not at all, and never take the place of what they were made from."""

from __future__ import annotations

import csv
import os
from collections.abc import Iterable, Iterator, Sequence
from contextlib import contextmanager
from pathlib import Path
from typing import Any

from envcorr.errors import Fault, InputError
from envcorr.numerals import quoted

__all__ = ["check_target", "whole_file", "write_csv"]


def check_target(target: Path, *, endings: Sequence[str], force: bool, inputs: Sequence[Path] = ()) -> None:
    """Refuse a file that cannot be written: an unknown ending, no folder, an input, or one that is there already.

    Raises :class:`InputError`.
    """

    def fault(problem: str, remedy: str) -> InputError:
        return InputError([Fault(quoted(str(target)), problem, remedy)])

    if target.suffix.lower() not in endings:
        raise fault(f"ends in {quoted(target.suffix)}.", f"Known are {', '.join(endings)}.")
    if not target.parent.is_dir():
        raise fault("its folder is not there.", "Make the folder first.")
    if target.is_dir():
        raise fault("is a folder.", "Name a file in it.")
    for source in inputs:
        if target.exists() and source.exists() and target.samefile(source):
            raise fault("is the input itself.", "Give another name: the input is never replaced.")
    if target.exists() and not force:
        raise fault("is already there.", "Give another name, or --force to replace it.")


def write_csv(target: Path, headers: Sequence[str], rows: Iterable[Sequence[Any]]) -> None:
    """Write a table whole, a comma between its cells (RFC 4180); None is an empty cell."""
    with whole_file(target) as part, part.open("w", encoding="utf-8", newline="") as file:
        writer = csv.writer(file)
        writer.writerow(headers)
        writer.writerows(rows)


@contextmanager
def whole_file(target: Path) -> Iterator[Path]:
    """Yield the path of a file beside the target that takes its place once all is written.

    Whatever goes wrong before, the target is as it was, and what could not be written is said by an
    :class:`InputError`.
    """
    part = target.with_name(f".{target.name}.{os.getpid()}.part")
    try:
        yield part
        os.replace(part, target)
    except OSError as error:
        reason = error.strerror or str(error)
        fault = Fault(quoted(str(target)), f"could not be written: {reason}.", "Nothing was written.")
        raise InputError([fault]) from None
    finally:
        part.unlink(missing_ok=True)
