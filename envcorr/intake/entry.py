"""One entry: text, number or table to an Estimate, checked against its quantity."""

from __future__ import annotations

import math
from collections.abc import Mapping
from typing import Any

from envcorr import units
from envcorr.catalogue import nearest
from envcorr.errors import Fault, InputError
from envcorr.estimate import SHAPES, Estimate, Shape
from envcorr.numerals import quoted
from envcorr.vocabulary import Quantity

__all__ = ["KEYS", "SPREADS", "EntryError", "read_estimate", "shown"]

KEYS = ("value", "u", "U", "k", "half_width", "low", "high", "shape", "dof")
SPREADS = ("u", "U", "half_width")
SPREAD_EXAMPLES = {"pressure": "0.5 hPa", "fraction": "2 %", "density": "5 kg/m³", "mass": "10 µg"}
TEACH = "Say which it is: u (standard uncertainty), U with k (expanded, from a certificate), or half_width (a limit ±)."


class EntryError(InputError, ValueError):
    """An entry that cannot be used."""

    def __init__(self, problem: str, remedy: str = "") -> None:
        self.problem, self.remedy = problem, remedy
        super().__init__([Fault("", problem, remedy)])


def read_estimate(raw: Any, quantity: Quantity, *, sensor: bool = False) -> Estimate:
    """Return the estimate [SI] of a quantity from a text, a bare number or a table; of its sensor's error if so said.

    A bare value is exact, but that of a limit is an unsigned bound: rectangular about zero. Raises
    :class:`EntryError` or :class:`UnitError`, a sentence each.
    """
    if isinstance(raw, Mapping):
        return _table(raw, quantity, sensor)
    if isinstance(raw, bool) or not isinstance(raw, str | int | float):
        raise EntryError(f"{shown(raw)} is not a value.", f"Write {_example(quantity)}.")
    if sensor:
        raise EntryError(
            f"{shown(raw)} does not say what it is.",
            f"{TEACH} For example {{ u = {_spread_example(quantity)} }}.",
        )
    value = units.parse(raw, quantity.kind)
    if quantity.limit:
        estimate = Estimate(0.0, "rectangular", abs(value)) if value else Estimate(0.0)
    else:
        estimate = Estimate(value)
    return _inside(estimate, quantity)


def _table(raw: Mapping[str, Any], quantity: Quantity, sensor: bool) -> Estimate:
    for key in raw:
        if key not in KEYS:
            near = nearest(key, KEYS)
            hint = f"Did you mean {near}?" if near else f"Known are {', '.join(KEYS)}."
            raise EntryError(f"{quoted(str(key))} is not known in an entry.", hint)
    stated = [key for key in SPREADS if key in raw]
    if len(stated) > 1:
        raise EntryError(f"{' and '.join(stated)} are given at once.", "Keep one. " + TEACH)
    ends = [key for key in ("low", "high") if key in raw]
    if ends and (stated or "value" in raw):
        raise EntryError(f"{' and '.join(ends)} cannot go with value or a spread.", "Give low and high alone.")
    if len(ends) == 1:
        raise EntryError(f"{ends[0]} is given without the other end.", "Give low and high.")
    shape = _shape(raw, "rectangular" if ends or "half_width" in raw else "normal")
    dof = _dof(raw)
    if ends:
        if "k" in raw or "dof" in raw:
            raise EntryError("low and high cannot go with k or dof.", "Leave those out.")
        return _inside(_between(raw, quantity, sensor, shape), quantity, sensor=sensor)
    if not stated:
        if sensor or "shape" in raw or "dof" in raw or "k" in raw:
            raise EntryError("has no spread.", TEACH)
        if "value" not in raw:
            raise EntryError("holds nothing.", f"Write value = {_example(quantity)} in it.")
        return read_estimate(_plain(raw, "value", _example(quantity)), quantity)
    centre = _centre(raw, quantity, sensor)
    key = stated[0]
    spread = _parse(raw, key, quantity, as_spread=True)
    if spread < 0:
        raise EntryError(f"{key} ({shown(raw[key])}) is negative.", "A spread has no sign.")
    if key == "U":
        spread /= _k(raw)
    elif "k" in raw:
        raise EntryError(f"k goes with U, not with {key}.", TEACH)
    if key == "half_width":
        if shape in ("normal", "log-uniform", "fixed"):
            remedy = 'Use shape = "rectangular", "triangular" or "arcsine".'
            raise EntryError(f"a half_width cannot be {quoted(shape)}.", remedy)
    elif shape != "normal":
        raise EntryError(
            f"{key} belongs to a normal distribution, not {quoted(shape)}.", "Use half_width for that shape."
        )
    if dof < math.inf and shape != "normal":
        raise EntryError("dof belongs to u or U.", "Leave it out.")
    return _inside(Estimate(centre, shape, spread, dof) if spread else Estimate(centre), quantity, sensor=sensor)


def _centre(raw: Mapping[str, Any], quantity: Quantity, sensor: bool) -> float:
    if "value" not in raw:
        if sensor or quantity.limit:
            return 0.0
        raise EntryError("has a spread but no value.", f"Add value = {_example(quantity)}.")
    return _parse(raw, "value", quantity, as_spread=sensor)  # a known offset of the sensor


def _between(raw: Mapping[str, Any], quantity: Quantity, sensor: bool, shape: Shape) -> Estimate:
    low, high = (_parse(raw, key, quantity, as_spread=sensor) for key in ("low", "high"))
    if low > high:
        raise EntryError(f"low ({shown(raw['low'])}) is above high ({shown(raw['high'])}).", "Swap them.")
    if low == high:
        return Estimate(low)
    if shape in ("normal", "fixed"):
        raise EntryError(
            f"low and high do not make a {quoted(shape)} distribution.",
            'Use shape = "rectangular", "triangular", "arcsine" or "log-uniform".',
        )
    if shape == "log-uniform" and low <= 0:
        raise EntryError("a log-uniform distribution needs low above zero.", "Give a positive low.")
    return Estimate.between(low, high, shape)


def _shape(raw: Mapping[str, Any], default: Shape) -> Shape:
    word = raw.get("shape", default)
    for shape in SHAPES:
        if word == shape and shape != "fixed":
            return shape
    near = nearest(str(word), SHAPES)
    known = ", ".join(s for s in SHAPES if s != "fixed")
    raise EntryError(f"shape {shown(word)} is not known.", f"Did you mean {near}?" if near else f"Known are {known}.")


def _dof(raw: Mapping[str, Any]) -> float:
    if "dof" not in raw:
        return math.inf
    dof = units.parse(_plain(raw, "dof", "9"), "number")
    if dof <= 2:  # with fewer the standard deviation does not exist: JCGM 101:2008, 6.4.9.4
        remedy = "Degrees of freedom are readings less one: take four readings, or the u of longer experience."
        raise EntryError(f"dof = {dof:g} is too few for a spread to have any bound.", remedy)
    return dof


def _k(raw: Mapping[str, Any]) -> float:
    if "k" not in raw:
        raise EntryError("U is given without k.", "Add the coverage factor of the certificate, usually k = 2.")
    k = units.parse(_plain(raw, "k", "2"), "number")
    if not 0.5 <= k <= 10:  # coverage factors of any use lie between (judgement)
        raise EntryError(f"k = {k:g} is no coverage factor.", "It is usually 2.")
    return k


def _parse(raw: Mapping[str, Any], key: str, quantity: Quantity, *, as_spread: bool) -> float:
    """Return the SI value of a key of an entry; its name stands before what is wrong with it."""
    text = _plain(raw, key, (_spread_example if as_spread else _example)(quantity))
    try:
        return (units.parse_spread if as_spread else units.parse)(text, quantity.kind)
    except units.UnitError as error:
        raise EntryError(f"{key}: {error.problem}", error.remedy) from None


def _plain(raw: Mapping[str, Any], key: str, example: str) -> str | float:
    value = raw[key]
    if isinstance(value, bool) or not isinstance(value, str | int | float):
        raise EntryError(f"{key} {shown(value)} is not a value.", f"Write {key} = {example}.")
    return value


def _inside(estimate: Estimate, quantity: Quantity, *, sensor: bool = False) -> Estimate:
    """Refuse what physics does not allow: the best estimate, the ends of a bounded distribution, u from the centre."""
    centre, u, kind = float(estimate.centre), float(estimate.u), quantity.kind
    if sensor:
        if abs(centre) + u > (quantity.high - quantity.low) / 2:
            error = units.show(abs(centre) + u, units.spread_kind(kind))
            remedy = "Check its unit and its decimal point."
            raise EntryError(f"an error of {error} is over half of the range that is accepted.", remedy)
        return estimate
    low, high = (units.show(bound, kind) for bound in (quantity.low, quantity.high))
    ends = (centre - u, centre + u) if estimate.shape == "normal" else estimate.bounds
    for value in (centre, *(float(end) for end in ends)):
        if value < quantity.low:
            problem = f"{units.show(value, kind)} is below {low}, the smallest that is accepted."
        elif value > quantity.high:
            problem = f"{units.show(value, kind)} is above {high}, the largest that is accepted."
        else:
            continue
        if estimate.shape == "normal" and quantity.low <= centre <= quantity.high:
            raise EntryError(f"one u from the value, {problem}", "Give low and high, as far as they are possible.")
        raise EntryError(problem, quantity.hint)
    return estimate


def _example(quantity: Quantity) -> str:
    return f'"{quantity.example or units.KINDS[quantity.kind].examples[0]}"'


def _spread_example(quantity: Quantity) -> str:
    kind = units.spread_kind(quantity.kind)
    return f'"{SPREAD_EXAMPLES.get(kind, units.KINDS[kind].examples[0])}"'


def shown(raw: Any) -> str:
    """Return what was written, in quotes for a message; a truth value as TOML writes it."""
    return quoted(str(raw).lower() if isinstance(raw, bool) else str(raw))
