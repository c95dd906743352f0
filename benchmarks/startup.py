"""How long the command line takes to say what it can do, against importing numpy."""

from __future__ import annotations

import subprocess
import sys
from collections.abc import Iterator

from benchmarks.side_by_side import Outcome, compare

__all__ = ["outcomes"]


def outcomes() -> Iterator[Outcome]:
    """Yield the ratio of start-up times."""

    def run(*arguments: str) -> None:
        subprocess.run([sys.executable, *arguments], check=True, stdout=subprocess.DEVNULL)

    yield compare(
        "envcorr --help / importing numpy",
        lambda: run("-m", "envcorr", "--help"),
        lambda: run("-c", "import numpy"),
        3.0,
        rounds=10,
    )
