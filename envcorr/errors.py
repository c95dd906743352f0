"""The exception tree, and the record of what was computed with a reservation.

::

    EnvcorrError
    ├── InputError       what was given cannot be used; carries every Fault found   (exit code 2)
    ├── NotComputedError a question cannot be answered: says what is lacking        (exit code 2)
    └── CatalogueError   the program's own parts do not fit together (a bug)        (exit code 1)
"""

from __future__ import annotations

from collections.abc import Iterable
from dataclasses import dataclass
from typing import Literal

__all__ = ["CatalogueError", "EnvcorrError", "Fault", "InputError", "NotComputedError", "Notice"]

Level = Literal["warning", "info", "caution"]


@dataclass(frozen=True, slots=True)
class Fault:
    """One thing that is wrong with what was given: where, what was read, and what would do."""

    where: str
    problem: str
    remedy: str = ""

    def __str__(self) -> str:
        text = f"{self.where}: {self.problem}" if self.where else self.problem
        return f"{text} {self.remedy}".rstrip()


@dataclass(frozen=True, slots=True)
class Notice:
    """Computed, but mind this.

    ``share`` is the share of the draws (or rows) that it concerns, where it does not concern all.
    """

    where: str
    sentence: str
    source: str = ""
    level: Level = "warning"
    share: float | None = None


class EnvcorrError(Exception):
    """The root of every exception that this package raises on purpose."""


class InputError(EnvcorrError):
    """What was given cannot be used. ``faults`` lists everything that was found wrong, in order."""

    def __init__(self, faults: Iterable[Fault], *, what: str = "") -> None:
        self.faults = tuple(faults)
        self.what = what
        lines = [str(fault) for fault in self.faults]
        if what and len(lines) > 1:
            text = f"{what}: {len(lines)} things are wrong\n" + "\n".join(f"  - {line}" for line in lines)
        elif what:
            text = f"{what}: {lines[0]}"
        else:
            text = "\n".join(lines)
        super().__init__(text)


class NotComputedError(EnvcorrError):
    """A question that cannot be answered from what was given."""


class CatalogueError(EnvcorrError):
    """An effect, a way or a check names a quantity that nothing can supply."""
