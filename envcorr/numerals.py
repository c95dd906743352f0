"""Numerals: a number as people write it, to an exact fraction and back. Knows no unit.

What could be read in two ways is refused with a sentence that says what would do.
"""

from __future__ import annotations

import math
import re
from fractions import Fraction

from envcorr.errors import Fault, InputError

__all__ = ["FROM_RAISED", "UnitError", "number", "plain", "quoted", "split"]

LONGEST = 100
"""Characters of a number with its unit (judgement)."""
LARGEST_POWER = 60
"""Of ten, either way: no quantity here comes near it, and an exact fraction must end (judgement)."""

_DIGITS = "0123456789+-"
_RAISED = "⁰¹²³⁴⁵⁶⁷⁸⁹⁺⁻"
TO_RAISED = str.maketrans(_DIGITS, _RAISED)
FROM_RAISED = str.maketrans(_RAISED, _DIGITS)

_NUMBER = re.compile(
    r"(?P<mantissa>[+-]? ?[0-9., ]*[0-9]\.?)"
    r"(?:[eE](?P<e>[+-]?[0-9]+)"
    r"| ?[×x*·] ?10(?:(?:\^|\*\*)(?P<power>[+-]?[0-9]+)|(?P<raised>[⁺⁻]?[⁰¹²³⁴-⁹]+)))?"
)
_GROUPED = re.compile(
    r"[+-]?(?:(?:[0-9]+|[0-9]{1,3}(?: [0-9]{3})+)(?:\.(?:[0-9]*|(?:[0-9]{3} )+[0-9]{1,3}))?|\.[0-9]+)"
)
_SPREAD = re.compile(r"±|\+ ?/ ?-|\+-|[0-9]\([0-9]+\)")
_RANGE = re.compile(r"(?:-|–|—|\.\.+|…|to ).*[0-9]")


class UnitError(InputError, ValueError):
    """A text that is not a number with the unit wanted: ``problem`` says why, ``remedy`` what would do."""

    def __init__(self, problem: str, remedy: str = "") -> None:
        """Keep both sentences."""
        self.problem = problem
        self.remedy = remedy
        super().__init__([Fault("", problem, remedy)])


def quoted(text: str) -> str:
    """Return ``text`` in quotes for a message: shortened, with nothing in it that a terminal would obey."""
    signs = (
        sign if sign.isprintable() else " " if sign.isspace() else "\N{REPLACEMENT CHARACTER}" for sign in text[:60]
    )
    return f'"{"".join(signs)}..."' if len(text) > 60 else f'"{"".join(signs)}"'


def number(text: str, *, decimal_comma: bool = False) -> float:
    """Return the number written in ``text``, which has no unit.

    Spaces may part groups of three digits. A comma is a decimal comma; one that could also part thousands, as
    in ``1,250``, is refused unless ``decimal_comma`` says what it is. Raises :class:`UnitError`.
    """
    value, unit = split(text, decimal_comma=decimal_comma)
    if unit:
        raise UnitError(f"{quoted(text)} is not a number.")
    return float(value)


def split(text: str, *, decimal_comma: bool = False) -> tuple[Fraction, str]:
    """Return the number that ``text`` begins with, exactly, and what follows. Raises :class:`UnitError`."""
    # str.split knows the no-break, thin and figure spaces too; the 1 of "3 1/K" belongs to the unit
    line = re.sub(r"(?<=[0-9]) 1 ?/", " /", " ".join(text.replace("−", "-").split()))
    if not line:
        raise UnitError("Nothing was written.")
    if len(line) > LONGEST:
        raise UnitError(f"{quoted(text)} is too long for a number with a unit.")
    if _SPREAD.search(line):
        raise UnitError(
            f"{quoted(text)} holds a spread and does not say of which kind.",
            "Write { value = ..., u = ... } for a standard uncertainty, { value = ..., U = ..., k = 2 } for "
            "an expanded one, { value = ..., half_width = ... } for bounds.",
        )
    match = _NUMBER.match(line)
    if match is None:
        raise UnitError(f"{quoted(text)} does not begin with a number.")
    rest = line[match.end() :].strip()
    if _RANGE.match(rest):
        raise UnitError(f"{quoted(text)} is a range.", "Write { low = ..., high = ... }.")
    power = int((match["e"] or match["power"] or match["raised"] or "0").translate(FROM_RAISED))
    if abs(power) > LARGEST_POWER:
        raise UnitError(f"{quoted(text)} is far outside what can be meant.")
    return _mantissa(text, match["mantissa"].rstrip(), decimal_comma) * Fraction(10) ** power, rest


def _mantissa(text: str, mantissa: str, decimal_comma: bool) -> Fraction:
    dots, commas = mantissa.count("."), mantissa.count(",")
    if dots and commas:
        raise UnitError(
            f"{quoted(text)} has both a comma and a dot.",
            "Write one decimal mark, and a space or nothing between thousands.",
        )
    if dots + commas > 1:
        mark = "dot" if dots else "comma"
        raise UnitError(f"{quoted(text)} has more than one {mark}.", "Write one decimal mark.")
    if commas and not decimal_comma and re.fullmatch(r"[+-]? ?[1-9][0-9]{0,2},[0-9]{3}", mantissa):
        raise UnitError(
            f"The comma in {quoted(text)} may be a decimal comma or part thousands.",
            f'Write "{mantissa.replace(",", ".")}" or "{mantissa.replace(",", " ")}", whichever is meant.',
        )
    digits = re.sub(r"^([+-]) ", r"\1", mantissa.replace(",", "."))
    if not _GROUPED.fullmatch(digits):
        raise UnitError(f"{quoted(text)} is not a number.", "Spaces may only part groups of three digits.")
    return Fraction(digits.replace(" ", ""))


def plain(value: float, digits: int) -> str:
    """Return a number for people, with a power of ten only where the digits would be long.

    ``digits`` counts significant digits; trailing zeros are dropped, digits before the decimal point kept.
    """
    if not math.isfinite(value):
        return "unknown" if math.isnan(value) else "∞" if value > 0 else "−∞"
    mantissa, _, exponent = f"{value:.{digits - 1}e}".partition("e")
    power = int(exponent)
    if value and not -5 < power < 7:
        text = f"{_trimmed(mantissa)} × 10{str(power).translate(TO_RAISED)}"
    else:
        text = _trimmed(f"{value:.{max(0, digits - 1 - power)}f}")
    return text.replace("-", "−")


def _trimmed(text: str) -> str:
    text = text.rstrip("0").rstrip(".") if "." in text else text
    return "0" if text == "-0" else text
