"""Blocks on a terminal: plain text that reads well from 80 columns on, with a little colour where there is any."""

from __future__ import annotations

import codecs
import io
import os
import re
import sys
from collections.abc import Iterable, Sequence
from typing import TYPE_CHECKING, Any, Literal, TextIO

from envcorr.document.blocks import (
    Band,
    Block,
    Column,
    Drawing,
    Figures,
    Group,
    Heading,
    Listing,
    Notices,
    Region,
    Scale,
    Signature,
    Table,
    Text,
    Tone,
    Verdict,
)
from envcorr.numerals import FROM_RAISED

if TYPE_CHECKING:
    from rich.table import Table as RichTable

__all__ = ["render", "render_for"]

WIDEST = 120
"""Columns; longer lines are hard to follow (judgement)."""
NARROWEST = 60
INDENT, GAP, NARROWEST_COLUMN = 2, 2, 8
_WIDE = 100  # from here on there is room for long bars
_FIELD_ROWS = 24
"""Lines of a map (judgement: as many as a small terminal has)."""
_BAR = {False: 8, True: 20}
_EIGHTHS = " ▏▎▍▌▋▊▉"

_TONES: dict[Tone, str] = {"good": "bold green", "caution": "bold yellow", "bad": "bold red", "open": "bold cyan"}
_LEVELS = {"warning": ("!", "yellow"), "info": ("·", ""), "caution": ("!", "bold red")}
_LEVEL_WORDS = {"warning": "Warning: ", "info": "", "caution": "Caution: "}

# what an encoding that lacks the sign can print instead, so that the line still says the same
_PLAIN = {
    "°C": "degC",
    "°F": "degF",
    "°": "deg",
    "µ": "u",
    "−": "-",
    "–": "-",
    "·": "*",
    "×": "x",
    "±": "+-",
    "≈": "~",
    "∞": "infinity",
    "Ω": "ohm",
    "§": "clause ",
}


def render_for(blocks: Iterable[Block], stream: TextIO | None = None) -> str:
    """Return the blocks as text that suits the stream (standard output): its width, colour and encoding."""
    import shutil

    stream = stream or sys.stdout
    terminal = stream.isatty()
    colour = terminal and not os.environ.get("NO_COLOR") and os.environ.get("TERM") != "dumb"
    width = shutil.get_terminal_size((80, 24)).columns  # heeds COLUMNS
    return render(blocks, width=width, colour=colour, encoding=stream.encoding or "ascii")


def render(blocks: Iterable[Block], *, width: int = 80, colour: bool = False, encoding: str = "utf-8") -> str:
    """Return the blocks as text, no line of it longer than ``width`` columns (60 at least, 120 at most)."""
    return _Page(min(max(width, NARROWEST), WIDEST), colour, encoding).text(blocks)


class _Page:
    """One rendering; ``say`` makes text safe for the terminal and its encoding."""

    def __init__(self, width: int, colour: bool, encoding: str) -> None:
        from rich.console import Console

        try:
            self.encoding = codecs.lookup(encoding).name
        except LookupError:
            self.encoding = "ascii"
        self.width, self.colour = width, colour
        self.bars = self.can("█▏▎▍▌▋▊▉░─")
        system: Literal["standard"] | None = "standard" if colour else None
        self.out = io.StringIO()
        self.console = Console(
            file=self.out,
            width=width,
            force_terminal=colour,
            color_system=system,
            markup=False,
            highlight=False,
            emoji=False,
            legacy_windows=False,
            _environ={},
        )

    def can(self, text: str) -> bool:
        """Return whether the encoding has the signs."""
        try:
            text.encode(self.encoding)
        except UnicodeEncodeError:
            return False
        return True

    def say(self, text: str) -> str:
        """Return the text with nothing in it that a terminal would obey or its encoding lacks."""
        text = "".join(sign if sign.isprintable() else " " for sign in text)
        if self.can(text):
            return text
        text = re.sub("10(?=[⁰¹²³⁴-⁹⁻])", "10^", text)  # 10⁻⁶ is 10^-6, but m³ is m3
        for sign, instead in _PLAIN.items():
            if not self.can(sign):
                text = text.replace(sign, instead)
        if not self.can("⁻"):
            text = text.translate(FROM_RAISED)
        return text.encode(self.encoding, "replace").decode(self.encoding)

    def text(self, blocks: Iterable[Block]) -> str:
        for block in blocks:
            getattr(self, f"_{type(block).__name__.lower()}")(block)
        lines = self.out.getvalue().split("\n")
        if not self.colour:
            lines = [line.rstrip() for line in lines]
        return "\n".join(lines).strip("\n") + "\n"

    def line(self, text: str = "", style: str = "", indent: int = 0) -> None:
        from rich.padding import Padding
        from rich.text import Text as RichText

        self.console.print(Padding(RichText(self.say(text), style=style), (0, 0, 0, indent)))

    # blocks ----------------------------------------------------------------------------------------------------

    def _heading(self, block: Heading) -> None:
        self.console.print()
        self.line(block.text, "bold")
        if block.level == 1:
            from rich.cells import cell_len

            rule = "─" if self.bars else "="
            self.line(rule * min(cell_len(self.say(block.text)), self.width), "dim")

    def _text(self, block: Text) -> None:
        if block.quiet:
            self.console.print()
        self.line(block.text, "dim" if block.quiet else "", 0 if block.quiet else 2)

    def _verdict(self, block: Verdict) -> None:
        self.console.print()
        self.line(block.answer.upper(), _TONES[block.tone])
        for sentence in block.sentences:
            self.line(sentence, indent=2)

    def _figures(self, block: Figures) -> None:
        from rich.cells import cell_len

        rows = [(one.label, one.value, one.note) for one in block.figures]
        widths = [max(cell_len(self.say(row[i])) for row in rows) for i in range(3)] if rows else [0]
        if sum(widths) + 2 * GAP + INDENT <= self.width:
            self.grid(rows if widths[2] else [row[:2] for row in rows])
        else:
            self.grid([(label, f"{value} ({note})" if note else value) for label, value, note in rows])

    def _listing(self, block: Listing) -> None:
        self.grid([(item.term, item.text) for item in block.items])

    def _notices(self, block: Notices) -> None:
        for note in block.notes:
            sign, style = _LEVELS[note.level]
            source = f" [{note.source}]" if note.source else ""
            grid = self.bare(1)
            grid.add_column(width=1, style=style)
            grid.add_column(overflow="fold")
            grid.add_row(self.rich(sign), self.rich(_LEVEL_WORDS[note.level] + note.sentence + source))
            self.indented(grid)

    def _drawing(self, block: Drawing) -> None:
        for line in block.lines:
            self.line(line, indent=INDENT)
        self.line(block.alt, "dim", INDENT)

    def _region(self, block: Region) -> None:
        """Draw the field in letters, y upwards: where it is reached, where not, and the present point."""
        signs = {True: "█" if self.bars else "#", False: "·" if self.can("·") else "."}
        rows = [[("?" if p != p else signs[p >= block.demanded]) for p in row] for row in block.probability]
        column, row = (_nearest(scale) for scale in (block.x, block.y))
        if all(scale.values[0] <= scale.now <= scale.values[-1] for scale in (block.x, block.y)):
            rows[row][column] = "O"
        self.console.print()
        self.line(block.title, "bold")
        step = max(1, -(-len(rows) // _FIELD_ROWS))
        twice = 2 if 2 * len(block.x.values) + INDENT <= self.width else 1
        kept = sorted({*range(0, len(rows), step), row}, reverse=True)
        for i in kept:
            self.line("".join(sign * twice for sign in rows[i][: self.width // twice]), indent=INDENT)
        ends = f"{block.x.values[0]:.4g} to {block.x.values[-1]:.4g}"
        self.line(f"across: {block.x.caption}, {ends}", "dim", INDENT)
        ends = f"{block.y.values[0]:.4g} to {block.y.values[-1]:.4g}"
        self.line(f"upwards: {block.y.caption}, {ends}", "dim", INDENT)
        self.line(f"{signs[True]} reached, {signs[False]} not reached, O now, ? not computed", "dim", INDENT)

    def _band(self, block: Band) -> None:
        picked = sorted({round(i * (len(block.mean) - 1) / 11) for i in range(12)})
        columns = (
            Column("value", "right"),
            Column("mean error", "right"),
            Column("from", "right"),
            Column("to", "right"),
            Column("", "left"),
        )
        rows = []
        for i in picked:
            ends = (block.low[i], block.high[i])
            inside = "within" if all(abs(end) <= block.allowed for end in ends) else "beyond"
            rows.append((f"{block.x.values[i]:.4g}", *(f"{v:+.3g}" for v in (block.mean[i], *ends)), inside))
        self.console.print()
        self.line(block.title, "bold")
        told = f"Value: {block.x.caption}. The others: {block.caption}; from and to: the coverage interval."
        self._table(Table(columns, (Group(tuple(rows)),), f"{told} Allowed are ±{block.allowed:.3g}."))

    def _signature(self, block: Signature) -> None:
        for line in block.lines:
            self.line(f"{line}: {'_' * 24}", indent=INDENT)

    def _table(self, block: Table) -> None:
        from rich.padding import Padding

        widths = self.widths(block)
        self.rows(block, widths, [[self.rich(column.title, "bold") for column in block.columns]])
        self.line(("─" if self.bars else "-") * (sum(widths) + GAP * (len(widths) - 1)), "dim", INDENT)
        for group in block.groups:
            rows = [
                [self.rich(cell if isinstance(cell, str) else self.bar(cell)) for cell in row] for row in group.rows
            ]
            if group.title:
                self.line(group.title, "italic", INDENT)
                rows = [[Padding(row[0], (0, 0, 0, INDENT)), *row[1:]] for row in rows]
            self.rows(block, widths, rows)
        if block.caption:
            self.line(block.caption, "dim", INDENT)

    def rows(self, block: Table, widths: Sequence[int], rows: Sequence[Sequence[Any]]) -> None:
        """Print some rows of a table."""
        table = self.bare(GAP)
        for column, width in zip(block.columns, widths, strict=True):
            justify: Literal["left", "right"] = "right" if column.align == "right" else "left"
            table.add_column(justify=justify, width=width, overflow="fold", vertical="top")
        for row in rows:
            table.add_row(*row)
        self.indented(table)

    def widths(self, block: Table) -> list[int]:
        """Return the width of every column; the widest columns of words give way where the page is too narrow."""
        from rich.cells import cell_len

        wide = self.width >= _WIDE
        found, longest = [], {}
        for i, column in enumerate(block.columns):
            cells = [row[i] for group in block.groups for row in group.rows]
            texts = [column.title, *(cell for cell in cells if isinstance(cell, str))]
            longest[i] = max(cell_len(self.say(word)) for text in texts for word in text.split() or [""])
            found.append(_BAR[wide] if column.align == "bar" else max(cell_len(self.say(text)) for text in texts))
        if any(group.title for group in block.groups):
            found[0], longest[0] = found[0] + INDENT, longest[0] + INDENT
        room = self.width - INDENT - GAP * (len(found) - 1)
        words = [i for i, column in enumerate(block.columns) if column.align == "left"]
        for least in (longest, dict.fromkeys(words, NARROWEST_COLUMN)):  # break no word where it can be helped
            while sum(found) > room:
                able = [i for i in words if found[i] > max(least[i], NARROWEST_COLUMN)]
                if not able:
                    break
                found[max(able, key=lambda i: found[i])] -= 1
        return found

    # pieces ----------------------------------------------------------------------------------------------------

    def rich(self, text: str, style: str = "") -> Any:
        from rich.text import Text as RichText

        return RichText(self.say(text), style=style)

    def bar(self, length: float | None) -> str:
        """Return a bar of up to the column's width; hatched where it takes away, a hair where it is very short."""
        if length is None:
            return ""
        full = _BAR[self.width >= _WIDE]
        size = min(abs(length), 1.0) * full
        if not self.bars:
            return ("-" if length < 0 else "#") * round(size)
        if length < 0:
            return "░" * round(size)
        whole = int(size)
        return "█" * whole + _EIGHTHS[int((size - whole) * 8)].strip()

    def grid(self, rows: Sequence[tuple[str, ...]]) -> None:
        """Print terms and texts side by side; where a term is long, the text goes below it."""
        from rich.cells import cell_len

        terms = [cell_len(self.say(row[0])) for row in rows]
        room = 2 * self.width // 5
        grid = self.bare(2)
        grid.add_column(width=min(max(terms, default=0), room), overflow="fold")
        for _ in range(max((len(row) for row in rows), default=1) - 1):
            grid.add_column(overflow="fold")
        for row in rows:
            grid.add_row(*[self.rich(text) for text in row])
        self.indented(grid)

    def bare(self, gap: int) -> RichTable:
        from rich.table import Table as RichTable

        return RichTable(box=None, show_header=False, pad_edge=False, padding=(0, gap, 0, 0))

    def indented(self, table: RichTable) -> None:
        from rich.padding import Padding

        self.console.print(Padding(table, (0, 0, 0, INDENT)))


def _nearest(scale: Scale) -> int:
    """Return which number of a scale lies next to the present one."""
    return min(range(len(scale.values)), key=lambda i: abs(scale.values[i] - scale.now))
