"""What a document is made of. A block says what is to be told, never how a face shows it.

All text is plain text, without markup of any kind; every number in it is rounded and has its unit.
"""

from __future__ import annotations

from dataclasses import dataclass
from typing import Literal, TypeAlias

__all__ = [
    "Align",
    "Band",
    "Block",
    "Cell",
    "Column",
    "Drawing",
    "Figure",
    "Figures",
    "Group",
    "Heading",
    "Item",
    "Listing",
    "Note",
    "Notices",
    "Region",
    "Scale",
    "Signature",
    "Table",
    "Text",
    "Tone",
    "Verdict",
]

Tone = Literal["good", "caution", "bad", "open"]
Align = Literal["left", "right", "bar"]
Cell: TypeAlias = str | float | None
"""A text; in a column of bars a length from -1 to 1, or None for no bar. A negative bar takes away."""


@dataclass(frozen=True, slots=True)
class Heading:
    """A heading; level 1 is the title of the document."""

    text: str
    level: int = 2


@dataclass(frozen=True, slots=True)
class Text:
    """A paragraph; ``quiet`` where it may be passed over."""

    text: str
    quiet: bool = False


@dataclass(frozen=True, slots=True)
class Verdict:
    """The answer in a few words, its tone, and the sentences that belong to it."""

    answer: str
    tone: Tone
    sentences: tuple[str, ...] = ()


@dataclass(frozen=True, slots=True)
class Figure:
    """One figure with its unit, and what must be known to read it."""

    label: str
    value: str
    note: str = ""


@dataclass(frozen=True, slots=True)
class Figures:
    """A few figures, one under the other."""

    figures: tuple[Figure, ...]


@dataclass(frozen=True, slots=True)
class Column:
    """A column of a table. The numbers of a right-aligned column have equally many decimals."""

    title: str
    align: Align = "left"


@dataclass(frozen=True, slots=True)
class Group:
    """Rows of a table that belong together, under a title of their own (or none)."""

    rows: tuple[tuple[Cell, ...], ...]
    title: str = ""


@dataclass(frozen=True, slots=True)
class Table:
    """A table; ``caption`` tells how to read it."""

    columns: tuple[Column, ...]
    groups: tuple[Group, ...]
    caption: str = ""


@dataclass(frozen=True, slots=True)
class Item:
    """A term and what is to be said about it."""

    term: str
    text: str


@dataclass(frozen=True, slots=True)
class Listing:
    """Terms with their texts."""

    items: tuple[Item, ...]


@dataclass(frozen=True, slots=True)
class Note:
    """One notice: the sentence, and where it comes from."""

    sentence: str
    source: str = ""
    level: Literal["warning", "info", "caution"] = "warning"


@dataclass(frozen=True, slots=True)
class Notices:
    """What was computed with a reservation, and what to take care of."""

    notes: tuple[Note, ...]


@dataclass(frozen=True, slots=True)
class Drawing:
    """A picture as SVG text; ``alt`` says in words what it shows, ``lines`` draws it for a terminal."""

    svg: str
    alt: str
    lines: tuple[str, ...] = ()


@dataclass(frozen=True, slots=True)
class Scale:
    """An axis of a chart: its caption with the unit, its numbers, the present one, and whether it goes by ratio."""

    caption: str
    values: tuple[float, ...]
    now: float
    logarithmic: bool = False


@dataclass(frozen=True, slots=True)
class Region:
    """A map: how probably the target is reached over two quantities (rows along y), against ``demanded``.

    NaN where it is not known. ``alt`` says in words what it shows.
    """

    title: str
    x: Scale
    y: Scale
    probability: tuple[tuple[float, ...], ...]
    demanded: float
    alt: str


@dataclass(frozen=True, slots=True)
class Band:
    """A curve with its coverage band over one quantity, and the bounds ``allowed`` either way."""

    title: str
    x: Scale
    caption: str
    mean: tuple[float, ...]
    low: tuple[float, ...]
    high: tuple[float, ...]
    allowed: float
    alt: str


@dataclass(frozen=True, slots=True)
class Signature:
    """Lines to be filled in by hand, each with what belongs on it."""

    lines: tuple[str, ...]


Block: TypeAlias = Heading | Text | Verdict | Figures | Table | Listing | Notices | Drawing | Region | Band | Signature
