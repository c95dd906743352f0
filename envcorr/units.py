"""Units: text with a unit to SI floats and back. The only place that knows a unit.

A *kind* of quantity says which units are accepted, and which are shown to people. A number needs its unit
unless its kind has none. A temperature and a temperature difference are two kinds: only the first moves the zero.

The unit algebra is pint's, over the short list of units below. In pint's own list of a thousand an angle is a
bare number, so that a tilt could pass for a fraction. Factors are exact fractions, rounded once. The list is
read in about 10 ms, so nothing is kept on disk.
"""

from __future__ import annotations

import difflib
import math
import re
from dataclasses import dataclass
from fractions import Fraction
from functools import lru_cache
from typing import TYPE_CHECKING, Any

import numpy as np

from envcorr.estimate import Value
from envcorr.numerals import FROM_RAISED, UnitError, plain, quoted, split

if TYPE_CHECKING:
    import pint

__all__ = [
    "KINDS",
    "Kind",
    "UnitError",
    "fitting_unit",
    "from_unit",
    "parse",
    "parse_spread",
    "rounded_down",
    "show",
    "spread_kind",
    "to_unit",
]

# Units of the SI and those accepted beside it: SI brochure, 9th edition, tables 2 to 8. Factors of the others:
# NIST SP 811 (2008), appendix B; the carat: 4th CGPM (1907).
_DEFINITIONS = """
pico- = 1e-12 = p-
nano- = 1e-9 = n-
micro- = 1e-6 = u-
milli- = 1e-3 = m-
centi- = 1e-2 = c-
deci- = 1e-1 = d-
hecto- = 100 = h-
kilo- = 1000 = k-
mega- = 1e6 = M-
giga- = 1e9 = G-
meter = [length] = m = metre
gram = [mass] = g
second = [time] = s = sec
ampere = [current] = A
kelvin = [temperature]; offset: 0 = K
mole = [substance] = mol
radian = [angle] = rad
pi = 3.14159265358979323846264338328
degree = pi / 180 * radian = deg
arcminute = degree / 60 = arcmin
arcsecond = degree / 3600 = arcsec
degree_Celsius = kelvin; offset: 273.15 = degC
degree_Fahrenheit = 5 / 9 * kelvin; offset: 459.67 * 5 / 9 = degF
percent = 0.01
permille = 0.001
ppm = 1e-6
ppb = 1e-9
minute = 60 * second = min
hour = 3600 * second = h = hr
day = 86400 * second = d
liter = 0.001 * meter ** 3 = L = l = litre
cubic_centimeter = 1e-6 * meter ** 3 = cc
tonne = 1e6 * gram = t
hertz = 1 / second = Hz
newton = kilogram * meter / second ** 2 = N
pascal = newton / meter ** 2 = Pa
joule = newton * meter = J
watt = joule / second = W
coulomb = ampere * second = C
volt = watt / ampere = V
ohm = volt / ampere
tesla = volt * second / meter ** 2 = T
bar = 1e5 * pascal
atmosphere = 101325 * pascal = atm
torr = 101325 / 760 * pascal = Torr
mmHg = 133.322387415 * pascal
inHg = 25.4 * mmHg
psi = 0.45359237 * 9.80665 / 0.0254 ** 2 * pascal
inch = 0.0254 * meter = in
foot = 0.3048 * meter = ft
pound = 453.59237 * gram = lb
ounce = pound / 16 = oz
grain = pound / 7000 = gr
carat = 0.2 * gram = ct
gauss = 1e-4 * tesla = G
galileo = 0.01 * meter / second ** 2 = Gal
"""


@dataclass(frozen=True, slots=True)
class Kind:
    """A kind of quantity: the SI unit inside, the unit shown, and texts that are accepted.

    ``ladder`` holds the units to choose from when shown, small to large, each with the number from which it is
    taken. ``only`` lists the units where a right dimension is not enough. ``label`` names the kind in words.
    """

    name: str
    si_unit: str
    shown: str
    examples: tuple[str, ...]
    ladder: tuple[str, ...] = ()
    only: tuple[str, ...] = ()
    label: str = ""

    @property
    def with_article(self) -> str:
        """The kind in words: ``a pressure``, ``an angle``."""
        label = self.label or self.name
        return f"{'an' if label[0] in 'aeiou' else 'a'} {label}"

    @property
    def wanted(self) -> str:
        """The request for it: ``a pressure is wanted, such as "1013 hPa"``."""
        return f'{self.with_article} is wanted, such as "{self.examples[0]}"'


_RATIOS = ("percent", "permille", "ppm", "ppb", "mol/mol", "mmol/mol", "umol/mol", "nmol/mol")
_PER_KELVIN = "relative change per temperature"

# name, SI unit, shown; examples; ladder
_KINDS = (
    Kind("temperature", "K", "°C", ("20.3 °C", "68 °F", "293.15 K")),
    Kind("temperature difference", "K", "K", ("0.3 K", "0.3 °C", "0.5 °F")),
    Kind("pressure", "Pa", "hPa", ("1013 hPa", "760 mmHg", "29.92 inHg", "101.3 kPa"), ("0 Pa", "0.1 hPa")),
    Kind("fraction", "1", "%", ("45 %", "0.45", "600 ppm"), ("0 ppb", "1 ppm", "0.1 %"), ("", *_RATIOS)),
    Kind("number", "1", "", ("3",), only=("",)),
    Kind("mass", "kg", "mg", ("0.1 mg", "5 g", "20 µg", "5e-6 kg"), ("0 ng", "0.1 µg", "0.1 mg", "1 g", "1 kg")),
    Kind("density", "kg/m³", "kg/m³", ("1050 kg/m³", "1.05 g/cm³", "1.05 g/mL")),
    Kind("length", "m", "mm", ("40 mm", "4 cm", "0.04 m"), ("0 µm", "0.1 mm", "1 m")),
    Kind("area", "m²", "cm²", ("20 cm²", "2000 mm²", "0.002 m²"), ("0 mm²", "1 cm²", "1 m²")),
    Kind("volume", "m³", "mL", ("100 mL", "100 cm³", "0.1 L"), ("0 µL", "0.1 mL", "1 L")),
    Kind("time", "s", "min", ("8 min", "480 s", "0.5 h"), ("0 ms", "1 s", "2 min", "2 h", "2 d")),
    Kind("angle", "rad", "arcmin", ("2 arcmin", "0.6 mm/m", "0.03 deg"), ("0 arcsec", "0.1 arcmin", "1 °")),
    Kind("relative per temperature", "1/K", "ppm/K", ("3 ppm/K", "3e-6 /K"), label=_PER_KELVIN),
    Kind("mass per temperature", "kg/K", "µg/K", ("5 µg/K", "5 µg/°C"), ("0 ng/K", "0.1 µg/K", "0.1 mg/K")),
    Kind("mass per angle", "kg/rad", "µg/arcmin", ("5 µg/arcmin", "2 mg/deg"), ("0 µg/arcmin", "0.1 mg/arcmin")),
    Kind("length per angle", "m/rad", "mm/arcmin", ("0.1 mm/arcmin", "2 mm/deg", "0.3 m/rad")),
    Kind(
        "mass per area",
        "kg/m²",
        "µg/cm²",
        ("0.1 µg/cm²", "1 mg/m²"),
        ("0 ng/cm²", "0.1 µg/cm²", "0.1 mg/cm²"),
    ),
    Kind("mass rate", "kg/s", "µg/min", ("20 µg/min", "1 mg/h"), ("0 ng/min", "0.1 µg/min", "0.1 mg/min")),
    Kind("mass flux", "kg/(m² s)", "µg/(cm² min)", ("5 µg/(cm² min)", "1 g/(m² h)")),
    Kind("charge", "C", "nC", ("5 nC", "300 pC"), ("0 pC", "0.1 nC", "0.1 µC")),
    Kind("surface charge", "C/m²", "µC/m²", ("1 µC/m²", "0.1 nC/cm²"), ("0 nC/m²", "0.1 µC/m²")),
    Kind("electric field", "V/m", "kV/m", ("100 kV/m", "1 kV/cm"), ("0 V/m", "1 kV/m")),
    Kind("potential", "V", "V", ("500 V", "6 kV"), ("0 V", "1 kV")),
    Kind("speed", "m/s", "m/s", ("0.15 m/s", "50 µm/s", "30 ft/min"), ("0 µm/s", "0.1 mm/s", "0.1 m/s")),
    Kind("acceleration", "m/s²", "m/s²", ("9.81 m/s²", "5 mm/s²"), ("0 µm/s²", "0.1 mm/s²", "0.1 m/s²")),
    Kind("frequency", "Hz", "Hz", ("8 Hz", "1.5 kHz")),
    Kind("power", "W", "W", ("5 W", "200 mW"), ("0 mW", "1 W")),
    Kind("specific heat", "J/(kg K)", "J/(kg K)", ("840 J/(kg K)", "0.84 J/(g K)")),
    Kind("diffusivity", "m²/s", "cm²/s", ("0.1 cm²/s", "1e-5 m²/s")),
    Kind("molar mass", "kg/mol", "g/mol", ("18.0 g/mol", "0.018 kg/mol")),
    Kind("magnetic field", "T", "mT", ("0.05 mT", "0.5 G"), ("0 µT", "1 mT", "1 T")),
    Kind("magnetic field gradient", "T/m", "mT/m", ("5 mT/m", "0.5 G/cm"), ("0 µT/m", "1 mT/m", "1 T/m")),
    Kind("resistivity", "Ω m", "Ω m", ("1e12 Ω m", "1e14 Ω cm")),
)
KINDS: dict[str, Kind] = {kind.name: kind for kind in _KINDS}
"""Every kind by name."""


def spread_kind(kind: str) -> str:
    """Return the kind of a spread of ``kind``: a temperature difference for a temperature, else the same."""
    return "temperature difference" if kind == "temperature" else kind


# Reading and showing -----------------------------------------------------------------------------------------


def parse(text: str | float, kind: str, *, decimal_comma: bool = False) -> float:
    """Return the SI value of a number with its unit; a bare number only where the kind has no unit.

    ``decimal_comma``: see :func:`envcorr.numerals.number`. Raises :class:`UnitError`, a sentence for people.
    """
    if isinstance(text, str):
        value, unit = split(text, decimal_comma=decimal_comma)
    elif isinstance(text, bool):
        raise UnitError(f"{str(text).lower()} is not a number.", _sentence(KINDS[kind].wanted))
    elif -1e60 < text < 1e60:
        value, unit, text = Fraction(text), "", str(text)
    else:
        raise UnitError("the number is not finite, or far outside what can be meant.")
    scale = _find_scale(kind, unit, text)
    result = float(value * scale.factor + scale.offset)
    return math.atan(result) if scale.slope else result


def parse_spread(text: str | float, kind: str, *, decimal_comma: bool = False) -> float:
    """Return the SI value of a spread (an uncertainty, a half-width) of a quantity of this kind.

    A spread of a temperature is a temperature difference: the zero of °C and °F plays no part. Raises
    :class:`UnitError`.
    """
    try:
        return parse(text, spread_kind(kind), decimal_comma=decimal_comma)
    except UnitError as error:
        if isinstance(text, str) and "" not in KINDS[kind].only and text.rstrip().endswith(("%", "ppm", "ppb")):
            remedy = "A spread is written in the unit of the quantity, not as a share of it."
            raise UnitError(error.problem, remedy) from None
        raise


def from_unit(value: Value, kind: str, unit: str) -> Value:
    """Return the SI values of numbers, a float or an array, in ``unit``. Raises :class:`UnitError`."""
    scale = _find_scale(kind, unit, unit)
    result = _times(value, scale.factor) + float(scale.offset)
    return np.arctan(result) if scale.slope else result


def to_unit(value: Value, kind: str, unit: str) -> Value:
    """Return the numbers that SI values, a float or an array, have in ``unit``. Raises :class:`UnitError`."""
    scale = _find_scale(kind, unit, unit)
    size = np.tan(value) if scale.slope else value
    return _times(size - float(scale.offset), 1 / scale.factor)


def _times(value: Value, factor: Fraction) -> Value:
    """Return ``value`` times ``factor``; below one, over its reciprocal (1000 is a float, 0.001 is not quite)."""
    return value * float(factor) if factor >= 1 else value / float(1 / factor)


def show(value: float, kind: str, digits: int = 4, *, unit: str = "") -> str:
    """Return an SI value as people read it: ``20.3 °C``, ``943.1 hPa``, ``45 %``; in ``unit``, or a fitting one.

    ``digits`` counts significant digits; see :func:`envcorr.numerals.plain`.
    """
    unit = unit or _fitting_unit(value, KINDS[kind], digits)
    text = plain(float(to_unit(value, kind, unit)), digits)
    return f"{text}{unit}" if unit == "°" else f"{text} {unit}".rstrip()


def rounded_down(value: float, kind: str, digits: int = 3) -> float:
    """Return the SI value of a size rounded towards nothing to some significant digits of the unit it is shown in."""
    unit = _fitting_unit(value, KINDS[kind], digits)
    size = float(to_unit(value, kind, unit))
    if not size or not math.isfinite(size):
        return value
    step = Fraction(10) ** (math.floor(math.log10(abs(size))) - digits + 1)
    return float(from_unit(float(math.floor(Fraction(abs(size)) / step) * step), kind, unit)) * math.copysign(1, size)


def fitting_unit(value: float, kind: str, digits: int = 3) -> str:
    """Return the unit in which an SI value is shown."""
    return _fitting_unit(value, KINDS[kind], digits)


def _fitting_unit(value: float, kind: Kind, digits: int) -> str:
    if not value or not math.isfinite(value):
        return kind.shown
    for least, _, unit in (step.partition(" ") for step in reversed(kind.ladder)):
        size = abs(float(to_unit(value, kind.name, unit)))
        if float(f"{size:.{digits - 1}e}") >= float(least):  # as it will be rounded
            return unit
    return kind.shown


# What a unit is ----------------------------------------------------------------------------------------------


@dataclass(frozen=True, slots=True)
class _Scale:
    """SI value = factor x number + offset; of a slope its arc tangent."""

    factor: Fraction
    offset: Fraction = Fraction(0)
    slope: bool = False


_FACTOR = r"[A-Za-z_]+(?:\*\*-?[1-4])?"
_PRODUCT = rf"{_FACTOR}(?:[ *]{_FACTOR})*"
_UNIT = re.compile(rf"(?:1|{_PRODUCT})(?:/(?:{_FACTOR}|\({_PRODUCT}\)))*")

_SIGNS = str.maketrans(
    {
        "º": "°",
        "˚": "°",
        "μ": "u",
        "µ": "u",
        "Ω": "ohm",
        "\u2126": "ohm",
        "·": "*",
        "⋅": "*",
        "−": "-",
        "^": "**",
    }
    | {"℃": "degC", "℉": "degF", "%": "percent", "‰": "permille", "′": "arcmin", "″": "arcsec"}
)


def _ascii(unit: str) -> str:
    """Return a unit in the plain spelling that pint reads."""
    text = " ".join(unit.split())
    text = re.sub(r"^% ?(?:RH|rH|rh|r\.h\.|r\.H\.)$", "%", text)  # relative humidity
    text = re.sub(r"[⁻⁰¹²³⁴-⁹]+", lambda found: "**" + found[0].translate(FROM_RAISED), text.translate(_SIGNS))
    text = re.sub(r"(?:°|\bdeg\.?) ?([CF])\b", r"deg\1", text).replace("°", "deg").replace(" per ", "/")
    text = re.sub(r"(?<=[A-Za-z])(-?[0-9])", r"**\1", text)  # m2, m-3
    text = re.sub(r" ?([/*()]+) ?", r"\1", text)
    return f"1{text}" if text.startswith("/") else text


@lru_cache(maxsize=1)
def _registry() -> pint.UnitRegistry[Any]:
    import pint

    return pint.UnitRegistry(_DEFINITIONS.splitlines(), non_int_type=Fraction, on_redefinition="raise")


def _root(unit: str) -> tuple[Fraction, Fraction, Any]:
    """Return the factor and the zero of a unit in pint's root units, and its dimension. Raises KeyError."""
    from pint.errors import PintError

    registry = _registry()
    try:
        parsed = registry.parse_units(unit)
    except PintError:
        raise KeyError(unit) from None
    zero, one = (registry.Quantity(Fraction(size), parsed).to_root_units().magnitude for size in (0, 1))
    return one - zero, zero, parsed.dimensionality


@lru_cache(maxsize=4096)
def _scale(kind: str, unit: str) -> _Scale | None:
    """Return how ``unit`` counts as ``kind``; None where it is a unit of something else. Raises KeyError."""
    text, only = _ascii(unit), KINDS[kind].only
    si_factor, _, wanted = _root(_ascii(KINDS[kind].si_unit))
    if "[temperature]" in wanted:  # nobody writes a temperature in coulomb
        text = re.sub(r"\b([CF])\b", r"deg\1", text)
    if text and not _UNIT.fullmatch(text):
        raise KeyError(unit)
    factor, zero, dimension = _root(text)
    if kind == "angle" and text and not dimension:
        return _Scale(factor, slope=True)
    if dimension != wanted or (text not in only if only else not text):
        return None
    return _Scale(factor / si_factor, zero if kind == "temperature" else Fraction(0))


def _find_scale(kind: str, unit: str, text: str) -> _Scale:
    """Return the scale, or raise the :class:`UnitError` that tells why there is none."""
    wanted = KINDS[kind].wanted
    try:
        scale = _scale(kind, unit)
    except KeyError:
        near = _nearest_unit(KINDS[kind], unit)
        hint = f' Did you mean "{near}"?' if near else ""
        raise UnitError(f"{quoted(unit)} is not a unit that is known here.", _sentence(wanted) + hint) from None
    if scale is not None:
        return scale
    if not unit:
        raise UnitError(f"{quoted(text)} has no unit.", _sentence(wanted))
    if _ascii(unit) == "deg" and "temperature" in kind:
        raise UnitError(f"{quoted(text)} does not say which degree.", "Write °C, °F or K.")
    other = next((known.with_article for known in _KINDS if _is_of(known.name, unit)), "of another kind")
    raise UnitError(f"{wanted}; {quoted(text)} is {other}.")


def _sentence(clause: str) -> str:
    return f"{clause[0].upper()}{clause[1:]}."


def _is_of(kind: str, unit: str) -> bool:
    try:
        scale = _scale(kind, unit)
    except KeyError:
        return False
    return scale is not None and not scale.slope


def _nearest_unit(kind: Kind, unit: str) -> str:
    known = [kind.shown, *(split(text)[1] for text in (*kind.ladder, *kind.examples))]
    same = [name for name in known if name.casefold() == unit.casefold()]
    return (same or difflib.get_close_matches(unit, known, n=1) or [""])[0]
