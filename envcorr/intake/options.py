"""Options of the command line that are no quantities of the vocabulary."""

from __future__ import annotations

from envcorr import units
from envcorr.errors import Fault, InputError
from envcorr.numerals import UnitError

__all__ = ["coverage_probability"]


def coverage_probability(text: str) -> float:
    """Return a coverage probability (0.5 to 0.9999) from a text such as "95 %". Raises :class:`InputError`."""
    try:
        value = units.parse(text, "fraction")
    except UnitError as error:
        raise InputError([Fault("--probability", error.problem, error.remedy)]) from None
    if not 0.5 <= value <= 0.9999:
        raise InputError([Fault("--probability", f"{text} is not from 50 % to 99.99 %.", "95 % is usual.")])
    return value
