"""How numbers, estimates and lists are put into words, the same in every document."""

from __future__ import annotations

import math
from collections.abc import Iterable, Sequence
from dataclasses import dataclass

from envcorr import units
from envcorr.document.blocks import Block, Column, Group, Heading, Note, Notices, Table, Text
from envcorr.errors import Notice
from envcorr.estimate import Estimate
from envcorr.plan import Assumption

__all__ = [
    "MassScale",
    "assumed",
    "capital",
    "estimate_text",
    "joined",
    "mass",
    "notices",
    "percent",
    "share",
    "unused",
]

MINUS = "−"
_MASS_UNITS = ("ng", "µg", "mg", "g")


def mass(value: float, digits: int = 4) -> str:
    """Return a mass [kg] in a fitting unit."""
    return units.show(value, "mass", digits)


def percent(value: float) -> str:
    """Return a probability (0 to 1) in percent; never 0 % or 100 % where it only rounds to it."""
    if 0.0 < value < 0.001:
        return "under 0.1 %"
    if 0.999 < value < 1.0:
        return "over 99.9 %"
    return f"{100 * value:.4g} %" if value in (0.0, 1.0) else f"{100 * value:.1f} %"


def share(value: float) -> str:
    """Return a share in whole percent."""
    if value == 0.0:
        return "0 %"
    if abs(value) < 0.005:
        return "≈0 %"
    return f"{100 * value:.0f} %".replace("-", MINUS)


def capital(text: str) -> str:
    """Return the text with its first letter in upper case."""
    return text[:1].upper() + text[1:]


def joined(words: Iterable[str], last: str = "and") -> str:
    """Return the words as one phrase: ``a, b and c``."""
    *head, tail = list(words) or [""]
    return f"{', '.join(head)} {last} {tail}" if head else tail


def _size(value: float, unit: str) -> float:
    return float(units.to_unit(value, "mass", unit))


@dataclass(frozen=True, slots=True)
class MassScale:
    """One unit and one number of decimals for masses that stand under each other, so that they can be compared."""

    unit: str
    decimals: int

    @classmethod
    def fitting(cls, resolution: float, totals: Iterable[float]) -> MassScale:
        """Return the unit that fits the resolution [kg], and decimals for about a hundredth of it.

        Where one of the ``totals`` [kg] is smaller, the decimals are for a hundredth of that.
        """
        unit = next((u for u in reversed(_MASS_UNITS) if _size(resolution, u) >= 0.0999), _MASS_UNITS[0])
        smallest = min((abs(total) for total in totals if total), default=resolution)
        hundredth = _size(min(resolution, smallest), unit) / 100
        return cls(unit, min(max(0, math.ceil(-math.log10(hundredth) - 0.3)), 6))

    def text(self, value: float, *, signed: bool = False) -> str:
        """Return the number, without its unit; what the decimals cannot show is said to be about zero."""
        number = _size(value, self.unit)
        if number == 0.0:
            return "0"
        if abs(number) < 0.5 * 10.0**-self.decimals:
            return "≈0"
        return f"{number:{'+' if signed else ''}.{self.decimals}f}".replace("-", MINUS)

    def brief(self, value: float, digits: int = 3) -> str:
        """Return the number with its unit for a sentence: some significant digits, trailing zeros dropped."""
        return units.show(value, "mass", digits, unit=self.unit)

    def with_unit(self, value: float, *, signed: bool = False) -> str:
        """Return the number with its decimals and its unit."""
        return f"{self.text(value, signed=signed)} {self.unit}"


def estimate_text(estimate: Estimate, kind: str, digits: int = 6) -> str:
    """Return a quantity as it was taken: ``21.4 °C, u 0.2 K``, ``1005 hPa to 1011 hPa``, ``±3 K``."""
    centre, spread = float(estimate.centre), float(estimate.spread)
    shown = units.show(centre, kind, digits)
    if estimate.is_exact:
        return f"{shown}, exact"
    if estimate.shape == "normal":
        u = units.show(spread, units.spread_kind(kind))
        dof = "" if math.isinf(estimate.dof) else f", {estimate.dof:g} degrees of freedom"
        return f"±{u} (u{dof})" if centre == 0.0 and kind != "temperature" else f"{shown}, u {u}{dof}"
    shape = {"rectangular": "", "arcsine": ", cycling"}.get(estimate.shape, f", {estimate.shape}")
    if centre == 0.0 and kind != "temperature":
        return f"±{units.show(spread, kind)}{shape}"
    low, high = (float(bound) for bound in estimate.bounds)
    return f"{units.show(low, kind, digits)} to {units.show(high, kind, digits)}{shape}"


def assumed(found: Sequence[Assumption]) -> list[Block]:
    """Return what was taken because nothing was said, each with its source."""
    if not found:
        return []
    rows = []
    for one in found:
        taken = one.word or (estimate_text(one.estimate, one.kind) if one.estimate else "")
        rows.append((one.name, taken.removesuffix(", exact"), one.source))
    columns = (Column("Name"), Column("taken as"), Column("on whose word"))
    return [Heading("Assumed, because nothing was said"), Table(columns, (Group(tuple(rows)),))]


def unused(names: Sequence[str]) -> list[Block]:
    """Return what was given and not used."""
    if not names:
        return []
    return [Heading("Given and not used"), Text(f"{', '.join(names)}.")]


def notices(found: Sequence[Notice], cautions: Iterable[str] = ()) -> list[Block]:
    """Return the notices, warnings first, and the cautions after them."""
    notes = []
    for level in ("warning", "info", "caution"):
        for one in found:
            if one.level == level:
                part = "" if one.share is None else f" (In {percent(one.share)} of the draws.)"
                notes.append(Note(one.sentence + part, one.source, one.level))
    notes += [Note(sentence, "", "caution") for sentence in dict.fromkeys(cautions)]
    return [Heading("Mind this"), Notices(tuple(notes))] if notes else []
