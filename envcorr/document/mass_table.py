"""What became of a table of readings, in words."""

from __future__ import annotations

from envcorr.document.blocks import Block, Column, Figure, Figures, Group, Heading, Item, Listing, Table
from envcorr.document.wording import assumed
from envcorr.jobs.mass_file import TableSummary

__all__ = ["document"]


def document(summary: TableSummary) -> list[Block]:
    """Return the page of a converted table."""
    computed = summary.rows - summary.failed
    figures = (
        Figure("Rows", str(summary.rows)),
        Figure("Computed", str(computed)),
        Figure("Not computed", str(summary.failed), "kept, marked and explained" if summary.failed else ""),
        Figure("Coverage factor", f"k = {summary.k:.2f}", f"{100 * summary.probability:g} %"),
        Figure("Written to", summary.written),
    )
    fields = {one.header: one for one in summary.layout.fields}
    rows = []
    for header in summary.layout.headers:
        one = fields.get(header)
        if one is None:
            rows.append((header, "passes through", ""))
        else:
            rows.append((header, f"{one.name}, its spread" if one.spread else one.name, one.unit))
    columns = (Column("Column"), Column("understood as"), Column("unit"))
    caption = "The decimal mark is a comma." if summary.layout.comma else ""
    return [
        Heading("Masses of a table", level=1),
        Figures(figures),
        Heading("What was understood"),
        Table(columns, (Group(tuple(rows)),), caption),
        *_counted("Why rows were not computed", summary.faults),
        *_counted("Mind this", summary.notices),
        *assumed(tuple(summary.assumed.values())),
    ]


def _counted(title: str, sentences: dict[str, int]) -> list[Block]:
    if not sentences:
        return []
    order = sorted(sentences, key=lambda sentence: -sentences[sentence])
    items = tuple(Item(f"{sentences[s]} row{'s' if sentences[s] > 1 else ''}", s) for s in order)
    return [Heading(title), Listing(items)]
