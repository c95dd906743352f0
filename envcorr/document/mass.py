"""The mass of a sample in words."""

from __future__ import annotations

import math

import envcorr
from envcorr import units
from envcorr.document.blocks import Block, Column, Figure, Figures, Group, Heading, Item, Listing, Table, Text
from envcorr.document.wording import assumed, capital, estimate_text, joined, notices, share, unused
from envcorr.jobs.mass import MassResult, Told

__all__ = ["document", "with_u"]


def with_u(value: float, u: float, kind: str, unit: str, digits: int = 2) -> tuple[str, str]:
    """Return a value and its uncertainty in a unit, both to the place of the uncertainty's ``digits``-th digit."""
    size, spread = (float(units.to_unit(x, kind, unit)) for x in (value, u))
    places = min(max(digits - 1 - math.floor(math.log10(spread)), 0), 12) if spread > 0 else 6
    return f"{size:.{places}f} {unit}", f"{spread:.{places}f} {unit}"


def document(result: MassResult) -> list[Block]:
    """Return the page of one mass."""
    unit = "g" if abs(result.mass.value) >= 1e-4 else "mg"
    value, expanded = with_u(result.mass.value, result.expanded, "mass", unit)
    small = "mg" if abs(result.correction) >= 1e-8 else "µg"
    correction, u = with_u(result.correction, result.mass.u, "mass", small)
    dof = "" if math.isinf(result.dof) else f", {result.dof:.3g} effective degrees of freedom"
    sign = "" if correction.startswith("-") else "+"
    figures = [
        Figure("Mass", value),
        Figure("Expanded uncertainty U", expanded, f"k = {result.k:.2f}, {100 * result.probability:g} %{dof}"),
        Figure("Standard uncertainty u", u),
        Figure("Net reading", units.show(result.reading.value, "mass", 9)),
        Figure("Correction", f"{sign}{correction}".replace("-", "−"), "mass less reading"),
    ]
    figures += _beside("Conventional mass", result.conventional_mass, "mass", unit)
    figures += _beside("Volume that displaces air", result.volume, "volume", "mL")
    figures += _beside("Air density", result.air_density, "density", "kg/m³")
    for name, one in result.by_draws.items():
        low, high = (with_u(end, one.u, "mass", unit)[0].removesuffix(f" {unit}") for end in (one.low, one.high))
        verdict = "first order agrees" if one.agrees else "first order does not agree: take this interval"
        label = "Mass by draws" if name == "load.mass" else "Conventional mass by draws"
        figures.append(
            Figure(label, f"{low} to {high} {unit}", f"u {with_u(one.u, one.u, 'mass', small)[0]}, {verdict}")
        )
    seen = [row for row in result.effects if row.u or row.correction]
    return [
        Heading(result.setup.title or "Mass of the sample", level=1),
        Figures(tuple(figures)),
        *_by_quantity(result, small),
        *_by_effect(result, small),
        *_not_assessed(result),
        *assumed(result.assumed),
        *unused(result.unused),
        *notices(result.notices, [row.caution for row in seen if row.caution]),
        Text(
            "First order (JCGM 100:2008); what cannot be corrected widens u by its root mean square about zero "
            f"({16 * 1024} draws, JCGM 101:2008, seed {result.seed}) and never moves the value; envcorr "
            f"{envcorr.__version__}.",
            quiet=True,
        ),
    ]


def _beside(label: str, told: Told | None, kind: str, unit: str) -> list[Figure]:
    if told is None:
        return []
    value, u = with_u(told.value, told.u, kind, unit)
    return [Figure(label, value, f"u {u}" if told.u else "taken as exact")]


def _by_quantity(result: MassResult, unit: str) -> list[Block]:
    total = result.mass.u**2
    rows = []
    for row in result.quantities:
        part = row.contribution**2 / total if total else 0.0
        taken = "as modelled" if row.origin == "internal" else estimate_text(row.estimate, row.kind)
        size = abs(float(units.to_unit(row.contribution, "mass", unit)))
        rows.append((capital(row.label), taken, f"{size:.3g}", share(part), part))
    bands = math.sqrt(sum(row.u**2 for row in result.effects if row.correction is None))
    if bands:
        part = bands**2 / total
        size = float(units.to_unit(bands, "mass", unit))
        rows.append(("What cannot be corrected", "see below", f"{size:.3g}", share(part), part))
    if not rows:
        return []
    columns = (
        Column("Quantity"),
        Column("taken as"),
        Column(f"u [{unit}]", "right"),
        Column("share", "right"),
        Column("", "bar"),
    )
    caption = "u: what the spread of the quantity adds to that of the mass. Share: of its variance."
    return [Heading("Where the uncertainty comes from"), Table(columns, (Group(tuple(rows)),), caption)]


def _by_effect(result: MassResult, unit: str) -> list[Block]:
    rows = []
    for row in result.effects:
        correction = "none" if row.correction is None else f"{float(units.to_unit(row.correction, 'mass', unit)):+.4g}"
        rows.append(
            (capital(row.title), correction.replace("-", "−"), f"{float(units.to_unit(row.u, 'mass', unit)):.3g}")
        )
    columns = (Column("Effect"), Column(f"correction [{unit}]", "right"), Column(f"u [{unit}]", "right"))
    caption = "An effect without a correction is a band: it widens the uncertainty and leaves the value alone."
    return [Heading("What each effect does"), Table(columns, (Group(tuple(rows)),), caption)]


def _not_assessed(result: MassResult) -> list[Block]:
    items = [Item(capital(n.effect.title), f"lacks {joined(n.lacks)}.") for n in result.not_assessed]
    return [Heading("Not assessed"), Listing(tuple(items))] if items else []
