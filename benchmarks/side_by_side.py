"""Measure two things in turn and compare them."""

from __future__ import annotations

import time
from collections.abc import Callable
from dataclasses import dataclass

__all__ = ["Outcome", "best_of_both", "compare"]


@dataclass(frozen=True, slots=True)
class Outcome:
    """A measured ratio against the largest that is accepted."""

    what: str
    ratio: float
    bound: float
    detail: str = ""

    @property
    def held(self) -> bool:
        """Whether the ratio is within its bound."""
        return self.ratio <= self.bound


def best_of_both(first: Callable[[], object], second: Callable[[], object], rounds: int) -> tuple[float, float]:
    """Return the shortest time of each [s], run in turn so that both see the same machine."""
    first(), second()
    best = [float("inf"), float("inf")]
    for _ in range(rounds):
        for k, function in enumerate((first, second)):
            began = time.perf_counter()
            function()
            best[k] = min(best[k], time.perf_counter() - began)
    return best[0], best[1]


def compare(
    what: str, first: Callable[[], object], second: Callable[[], object], bound: float, rounds: int = 15
) -> Outcome:
    """Return the time of ``first`` over that of ``second``."""
    one, two = best_of_both(first, second, rounds)
    return Outcome(what, one / two, bound, f"{one * 1e3:.3g} ms against {two * 1e3:.3g} ms")
