"""What a technician writes about a level: offsets with their sides, a vial, feet with their places and heights."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass

from envcorr import units
from envcorr.catalogue import nearest
from envcorr.errors import Fault, InputError
from envcorr.numerals import UnitError, quoted

__all__ = ["Foot", "Vial", "read_feet", "read_sides", "read_vial"]

SIDES = {"right": (1, 0), "left": (-1, 0), "back": (0, 1), "front": (0, -1)}
FEWEST, MOST = 3, 4
_VIAL = 'Write "0.3 mm/arcmin", "radius 1 m" or "10 arcmin per graduation".'


@dataclass(frozen=True, slots=True)
class Foot:
    """A foot of the base: its name and where it stands [m], right and back of any common point."""

    name: str
    x: float
    y: float


@dataclass(frozen=True, slots=True)
class Vial:
    """A vial: how far its bubble moves per angle [m/rad], or the angle of one graduation [rad]."""

    per_angle: float | None = None
    graduation: float | None = None


def read_sides(text: str, kind: str, where: str) -> tuple[float, float, bool]:
    """Return right and back of a text like "1.2 mm right, 0.5 mm back" [SI], and whether its sides are known.

    ``kind`` is that of each part. A single part without a side is a size in an unknown direction. Raises
    :class:`InputError`.
    """
    right = back = 0.0
    parts = [part.strip() for part in text.split(",") if part.strip()]
    if not parts:
        raise InputError([Fault(where, "nothing was written.", 'Write "1.2 mm right, 0.5 mm back".')])
    seen: list[str] = []
    for part in parts:
        words = part.split()
        side = words[-1].lower() if words else ""
        if side not in SIDES:
            if (len(parts) == 1 and not words[-1].isalpha()) or (len(parts) == 1 and _is_unit(words[-1], kind)):
                return _parse(part, kind, where), 0.0, False
            hint = nearest(side, SIDES)
            remedy = f'Did you mean "{hint}"?' if hint else "Say which side is higher: right, left, back or front."
            raise InputError([Fault(where, f"{quoted(part)} names no side.", remedy)])
        axis = "across" if SIDES[side][0] else "along"
        if axis in seen:
            raise InputError([Fault(where, f"{quoted(text)} says the same axis twice.", "Give one of each.")])
        seen.append(axis)
        size = _parse(" ".join(words[:-1]), kind, where)
        right += size * SIDES[side][0]
        back += size * SIDES[side][1]
    return right, back, True


def _is_unit(word: str, kind: str) -> bool:
    try:
        units.from_unit(0.0, kind, word)
    except UnitError:
        return False
    return True


def _parse(text: str, kind: str, where: str) -> float:
    try:
        return units.parse(text, kind)
    except UnitError as error:
        raise InputError([Fault(where, error.problem, error.remedy)]) from None


def read_vial(text: str, where: str = "--vial") -> Vial:
    """Return a vial from its sensitivity, the radius of its curvature, or its graduation. Raises InputError."""
    line = " ".join(text.split())
    try:
        if line.lower().startswith("radius "):
            vial = Vial(per_angle=units.parse(line[7:], "length"))
        elif "graduation" in line.lower():
            size = line.lower().replace("/ graduation", "per graduation").replace("/graduation", " per graduation")
            head, _, rest = size.partition(" per graduation")
            if rest.strip():
                raise UnitError(f"{quoted(text)} is not understood.")
            vial = Vial(graduation=units.parse(head, "angle"))
        else:
            vial = Vial(per_angle=units.parse(line, "length per angle"))
    except UnitError as error:
        raise InputError([Fault(where, error.problem, _VIAL)]) from None
    size_of = vial.per_angle if vial.per_angle is not None else vial.graduation
    if size_of is None or size_of <= 0:
        raise InputError([Fault(where, f"{quoted(text)} is not above zero.", _VIAL)])
    return vial


def read_feet(places: Sequence[str], heights: Sequence[str]) -> tuple[tuple[Foot, ...], tuple[float, ...] | None]:
    """Return feet from texts like "front left=-70 mm, -60 mm", and their heights from "front left=0.7 mm" [m].

    A foot whose height is not given has none; without any height the second is None. Raises :class:`InputError` with
    every fault.
    """
    feet: list[Foot] = []
    faults: list[Fault] = []
    for text in places:
        name, sign, place = text.partition("=")
        parts = [part.strip() for part in place.split(",")]
        where = f"--foot {quoted(text)}"
        if not sign or len(parts) != 2:
            faults.append(Fault(where, "does not say where it stands.", 'Write --foot "front left=-70 mm, -60 mm".'))
            continue
        if any(name.strip() == foot.name for foot in feet):
            faults.append(Fault(where, f"{quoted(name.strip())} is there twice.", "Name every foot once."))
            continue
        try:
            feet.append(Foot(name.strip(), *(_parse(part, "length", where) for part in parts)))
        except InputError as error:
            faults += error.faults
    known = {foot.name: i for i, foot in enumerate(feet)}
    found = [0.0] * len(feet)
    for text in heights:
        name, sign, height = (part.strip() for part in text.partition("="))
        where = f"--height {quoted(text)}"
        if name not in known:
            near = nearest(name, known)
            faults.append(Fault(where, "names no foot.", f"Did you mean {near}?" if near else "Give it by --foot."))
            continue
        try:
            found[known[name]] = _parse(height, "length", where)
        except InputError as error:
            faults += error.faults
    if not faults and feet and not FEWEST <= len(feet) <= MOST:
        faults.append(Fault("--foot", f"there are {len(feet)} feet.", "A base stands on three or four: give them all."))
    if faults:
        raise InputError(faults)
    return tuple(feet), tuple(found) if heights else None
