"""The density of the air in words."""

from __future__ import annotations

import math

import envcorr
from envcorr import units
from envcorr.document.blocks import Block, Column, Figure, Figures, Group, Heading, Table, Text
from envcorr.document.wording import assumed, capital, estimate_text, notices, share, unused
from envcorr.jobs.air import AirResult

__all__ = ["document"]


def document(result: AirResult) -> list[Block]:
    """Return the page of an air density."""
    found = result.budget
    decimals = _decimals(result.u)
    unit = units.KINDS["density"].shown
    low, high = found.interval
    p = f"{100 * found.probability:g} %"
    dof = "" if math.isinf(found.dof) else f", {found.dof:.3g} effective degrees of freedom"
    figures = [Figure("Air density", f"{result.density:.{decimals}f} {unit}", "" if result.u else "taken as exact")]
    if result.u:
        figures += [
            Figure("Standard uncertainty u", f"{result.u:.{decimals}f} {unit}", f"{_relative(result)} of the density"),
            Figure("Expanded uncertainty U", f"{found.expanded:.{decimals}f} {unit}", f"k = {found.k:.2f}, {p}{dof}"),
            Figure("Coverage interval", f"{low:.{decimals}f} to {high:.{decimals}f} {unit}", p),
        ]
    figures.append(Figure("Formula", result.formula))
    if result.relative_humidity is not None:
        figures.append(Figure("Relative humidity", units.show(result.relative_humidity, "fraction")))
    if result.vapour_fraction is not None:
        figures.append(Figure("Water vapour content", f"{units.show(result.vapour_fraction, 'fraction')} of the moles"))
    return [
        Heading(result.setup.title or "Air density", level=1),
        Figures(tuple(figures)),
        *_budget(result),
        *assumed(result.assumed),
        *unused(result.unused),
        *notices(result.notices),
        Text(f"First order (JCGM 100:2008); envcorr {envcorr.__version__}.", quiet=True),
    ]


def _decimals(u: float) -> int:
    """Return how many decimals show u with two digits; at least four and at most eight."""
    return min(max(4, 1 - math.floor(math.log10(u))), 8) if u > 0 else 6


def _relative(result: AirResult) -> str:
    return units.show(result.u / result.density, "fraction", 2)


def _budget(result: AirResult) -> list[Block]:
    if not result.u:
        return []
    rows = []
    for row in result.rows:
        part = (row.contribution / result.u) ** 2
        taken = "as modelled" if row.origin == "internal" else estimate_text(row.estimate, row.kind)
        rows.append((capital(row.label), taken, f"{1e3 * abs(row.contribution):.3f}", share(part), part))
    columns = (
        Column("Quantity"),
        Column("taken as"),
        Column("u [g/m³]", "right"),
        Column("share", "right"),
        Column("", "bar"),
    )
    caption = "u: what the spread of the quantity adds to that of the density. Share: of its variance."
    return [Heading("Where the uncertainty comes from"), Table(columns, (Group(tuple(rows)),), caption)]
