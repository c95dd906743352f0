"""All limits of a set-up, and a map, against one room check at the same draws."""

from __future__ import annotations

from collections.abc import Iterator

from benchmarks.rich_setup import rich_setup
from benchmarks.side_by_side import Outcome, compare
from envcorr.jobs.limits import find_limits
from envcorr.jobs.map import AxisRequest, make_grid
from envcorr.jobs.room import check_room

__all__ = ["outcomes"]

DRAWS = 2**14


def outcomes() -> Iterator[Outcome]:
    """Yield the ratios of all limits, and of a map."""
    setup = rich_setup()
    found = find_limits(setup)

    def limits() -> None:
        find_limits(setup)

    def check() -> None:
        check_room(setup, draws=DRAWS)

    yield compare(f"limits of {len(found.limits)} quantities / one room check", limits, check, 60.0, rounds=8)

    def field() -> None:
        make_grid(setup, AxisRequest("air.temperature"), AxisRequest("load.density"), steps=40)

    yield compare("a map of 40 x 40 points / one room check", field, check, 300.0, rounds=3)
