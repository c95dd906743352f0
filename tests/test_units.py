"""Numbers with their units, as people write them, and back.

Expected values come from the SI brochure (9th edition) and, for units outside the SI, from NIST SP 811 (2008 edition),
appendix B.8, which prints seven digits.
"""

import math
from fractions import Fraction

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from envcorr import units
from envcorr.numerals import LONGEST, number, plain, split

NO_BREAK, THIN, NARROW, FIGURE, MINUS = "\u00a0", "\u2009", "\u202f", "\u2007", "\u2212"
MICRO_SIGN, GREEK_MU = "\u00b5", "\u03bc"

READINGS = [
    # temperature: SI brochure 2.3.1 (t/°C = T/K - 273.15); NIST SP 811 B.8: t/°C = (t/°F - 32)/1.8
    ("20.3 °C", "temperature", 293.45),
    ("20.3 degC", "temperature", 293.45),
    ("20.3 deg C", "temperature", 293.45),
    ("20.3 ° C", "temperature", 293.45),
    ("20.3 º C", "temperature", 293.45),  # the ordinal sign of a Spanish keyboard
    ("20.3 ℃", "temperature", 293.45),
    ("20.3 C", "temperature", 293.45),
    ("20.3C", "temperature", 293.45),
    ("20,3 °C", "temperature", 293.45),
    ("+20.3 °C", "temperature", 293.45),
    ("-5 °C", "temperature", 268.15),
    (f"{MINUS}5 °C", "temperature", 268.15),
    (f"{MINUS} 5 °C", "temperature", 268.15),
    ("68 °F", "temperature", 293.15),
    ("68F", "temperature", 293.15),
    ("68 ℉", "temperature", 293.15),
    ("32 °F", "temperature", 273.15),
    ("-40 °F", "temperature", 233.15),  # where the two scales meet
    ("293 K", "temperature", 293.0),
    ("293000 mK", "temperature", 293.0),
    # pressure
    ("1013.25 hPa", "pressure", 101325.0),
    ("1013,25 hPa", "pressure", 101325.0),
    ("1 013.25 hPa", "pressure", 101325.0),
    ("1 013,25 hPa", "pressure", 101325.0),
    (f"1{NO_BREAK}013.25{NO_BREAK}hPa", "pressure", 101325.0),
    ("101.325 kPa", "pressure", 101325.0),
    ("1013.25 mbar", "pressure", 101325.0),
    ("1.01325 bar", "pressure", 101325.0),
    ("1 atm", "pressure", 101325.0),
    ("1 mmHg", "pressure", 133.3224),
    ("1 mmHg", "pressure", 13595.1 * 9.80665 * 1e-3),  # conventional density of mercury x standard gravity
    ("760 Torr", "pressure", 101325.0),
    ("1 inHg", "pressure", 3386.389),
    ("1 psi", "pressure", 6894.757),
    # fraction
    ("45 %", "fraction", 0.45),
    ("45%", "fraction", 0.45),
    ("45 % RH", "fraction", 0.45),
    ("45 %rh", "fraction", 0.45),
    ("0.45", "fraction", 0.45),
    ("0,45", "fraction", 0.45),
    ("2 ‰", "fraction", 0.002),
    ("600 ppm", "fraction", 6e-4),
    ("3 ppb", "fraction", 3e-9),
    ("600 µmol/mol", "fraction", 6e-4),
    ("3", "number", 3.0),
    # mass
    ("1.250 00 g", "mass", 1.25e-3),
    (f"1.250{NO_BREAK}00{NO_BREAK}g", "mass", 1.25e-3),
    (f"1.250{THIN}00{THIN}g", "mass", 1.25e-3),
    (f"1.250{NARROW}00{NARROW}g", "mass", 1.25e-3),
    (f"1.250{FIGURE}00 g", "mass", 1.25e-3),
    ("1 234 567.5 mg", "mass", 1.2345675),
    ("1,25 g", "mass", 1.25e-3),
    ("0,125 g", "mass", 1.25e-4),  # nobody parts thousands after a zero
    ("1,2500 g", "mass", 1.25e-3),
    (".5 g", "mass", 5e-4),
    ("5. g", "mass", 5e-3),
    ("  5   g ", "mass", 5e-3),
    ("5e-6 kg", "mass", 5e-6),
    ("5E-6 kg", "mass", 5e-6),
    (f"5e{MINUS}6 kg", "mass", 5e-6),
    ("5 × 10⁻⁶ kg", "mass", 5e-6),
    ("5 x 10^-6 kg", "mass", 5e-6),
    ("5·10**-6 kg", "mass", 5e-6),
    (f"20 {MICRO_SIGN}g", "mass", 2e-8),
    (f"20 {GREEK_MU}g", "mass", 2e-8),
    ("20 ug", "mass", 2e-8),
    ("20 ng", "mass", 2e-11),
    ("1 t", "mass", 1000.0),
    ("1 ct", "mass", 2e-4),
    ("1 lb", "mass", 0.4535924),
    ("1 oz", "mass", 0.02834952),
    ("1 gr", "mass", 6.479891e-5),
    # density: kg/m³ in every spelling
    ("1050 kg/m³", "density", 1050.0),
    ("1050 kg/m3", "density", 1050.0),
    ("1050 kg/m^3", "density", 1050.0),
    ("1050 kg/m**3", "density", 1050.0),
    ("1050 kg m-3", "density", 1050.0),
    ("1050 kg·m⁻³", "density", 1050.0),
    ("1.05 g/cm3", "density", 1050.0),
    ("1.05 g/cm³", "density", 1050.0),
    ("1.05 g/cc", "density", 1050.0),
    ("1.05 g/mL", "density", 1050.0),
    ("1.05 g/ml", "density", 1050.0),
    ("1.05 kg/L", "density", 1050.0),
    ("1.05 kg per L", "density", 1050.0),
    ("1.2 mg/cm³", "density", 1.2),
    # lengths, areas, volumes, times
    ("4 cm", "length", 0.04),
    ("1 in", "length", 0.0254),
    ("1 ft", "length", 0.3048),
    ("620 m", "length", 620.0),
    ("20 cm²", "area", 2e-3),
    ("100 mL", "volume", 1e-4),
    ("100 cm³", "volume", 1e-4),
    ("0.1 l", "volume", 1e-4),
    ("8 min", "time", 480.0),
    ("0.5 h", "time", 1800.0),
    ("2 d", "time", 172800.0),
    # angles: SI brochure, table 8, and slopes, which are tangents
    ("2 arcmin", "angle", 2 * math.pi / 10800),
    ("2′", "angle", 2 * math.pi / 10800),
    ("1 arcmin", "angle", 2.908882e-4),
    ("1 arcsec", "angle", 4.848137e-6),
    ("1 °", "angle", 1.745329e-2),
    ("1°", "angle", 1.745329e-2),
    ("1 deg", "angle", 1.745329e-2),
    ("0.5 mrad", "angle", 5e-4),
    ("0.6 mm/m", "angle", math.atan(6e-4)),
    ("100 %", "angle", math.pi / 4),
    # relative per temperature, and more of what a certificate states
    ("3 ppm/K", "relative per temperature", 3e-6),
    ("3 ppm/°C", "relative per temperature", 3e-6),
    ("3 ppm/C", "relative per temperature", 3e-6),
    ("3 ppm per K", "relative per temperature", 3e-6),
    ("9 ppm/°F", "relative per temperature", 9e-6 * 1.8),  # one °F is 5/9 K
    ("3e-6 /K", "relative per temperature", 3e-6),
    ("3e-6 1/K", "relative per temperature", 3e-6),
    ("3e-6 K⁻¹", "relative per temperature", 3e-6),
    ("5 µg/°C", "mass per temperature", 5e-9),
    ("5 µg/arcmin", "mass per angle", 5e-9 * 10800 / math.pi),
    ("20 µg/min", "mass rate", 2e-8 / 60),
    ("5 µg/(cm² min)", "mass flux", 5e-9 / 1e-4 / 60),
    ("1 g/(m² h)", "mass flux", 1e-3 / 3600),
    ("5 nC", "charge", 5e-9),
    ("0.1 nC/cm²", "surface charge", 1e-6),
    ("1 kV/cm", "electric field", 1e5),
    ("1 ft/min", "speed", 5.08e-3),
    ("1 Gal", "acceleration", 1e-2),
    ("0.84 J/(g K)", "specific heat", 840.0),
    ("0.5 G", "magnetic field", 5e-5),
    ("1e14 Ω cm", "resistivity", 1e12),
    ("1e14 \u2126 cm", "resistivity", 1e12),  # the ohm sign beside the Greek letter
]


@pytest.mark.parametrize(("text", "kind", "expected"), READINGS)
def test_reading(text, kind, expected):
    """To the seven digits of NIST SP 811 at least."""
    assert units.parse(text, kind) == pytest.approx(expected, rel=2e-7)


def test_exact_factors_are_rounded_once():
    """A decimal fraction comes out as the float nearest to it."""
    for text, kind, nearest in (
        ("0.1 mg", "mass", 1e-7),
        ("943.10 hPa", "pressure", 94310.0),
        ("45 %", "fraction", 0.45),
        ("600 ppm", "fraction", 6e-4),
        ("20.1 °C", "temperature", 293.25),
        ("1.05 g/cm³", "density", 1050.0),
        ("0.3 mm", "length", 3e-4),
        ("9 °F", "temperature difference", 5.0),
    ):
        assert units.parse(text, kind) == nearest


# Temperature against temperature difference --------------------------------------------------------------------


@pytest.mark.parametrize(
    ("text", "kelvin"), [("3 °C", 3.0), ("3 K", 3.0), ("9 °F", 5.0), ("-3 °C", -3.0), ("0 °C", 0.0)]
)
def test_a_temperature_difference_has_no_zero_of_its_own(text, kelvin):
    """One °C is one K, one °F is 5/9 K (NIST SP 811 B.8)."""
    assert units.parse(text, "temperature difference") == kelvin
    assert units.parse_spread(text, "temperature") == kelvin


def test_a_temperature_moves_the_zero():
    assert units.parse("3 °C", "temperature") == 276.15
    assert units.parse("9 °F", "temperature") == pytest.approx((9 - 32) / 1.8 + 273.15, rel=1e-15)


def test_a_spread_of_anything_else_is_of_its_own_kind():
    assert units.spread_kind("temperature") == "temperature difference"
    for kind in units.KINDS:
        assert kind == "temperature" or units.spread_kind(kind) == kind
    assert units.parse_spread("3 hPa", "pressure") == 300.0
    assert units.parse_spread("3 %", "fraction") == 0.03


def test_a_spread_as_a_share_is_refused():
    with pytest.raises(units.UnitError) as raised:
        units.parse_spread("1 %", "pressure")
    assert 'a pressure is wanted, such as "1013 hPa"; "1 %" is a fraction.' in raised.value.problem
    assert raised.value.remedy == "A spread is written in the unit of the quantity, not as a share of it."


# Refusals, each with its sentence ------------------------------------------------------------------------------

TWO_MARKS = "Write one decimal mark, and a space or nothing between thousands."
WHICH_SPREAD = "Write { value = ..., u = ... } for a standard uncertainty"
REFUSALS = [
    ("", "mass", "Nothing was written.", ""),
    ("   ", "mass", "Nothing was written.", ""),
    ("1.250,00 g", "mass", '"1.250,00 g" has both a comma and a dot.', TWO_MARKS),
    ("1,234.5 hPa", "pressure", '"1,234.5 hPa" has both a comma and a dot.', TWO_MARKS),
    ("1.2.3 g", "mass", '"1.2.3 g" has more than one dot.', "Write one decimal mark."),
    ("1,2,3 g", "mass", '"1,2,3 g" has more than one comma.', "Write one decimal mark."),
    (
        "1,250 g",
        "mass",
        'The comma in "1,250 g" may be a decimal comma or part thousands.',
        'Write "1.250" or "1 250", whichever is meant.',
    ),
    ("12 34 g", "mass", '"12 34 g" is not a number.', "Spaces may only part groups of three digits."),
    ("1 0000 g", "mass", '"1 0000 g" is not a number.', "Spaces may only part groups of three digits."),
    ("20 ± 0.3 °C", "temperature", '"20 ± 0.3 °C" holds a spread and does not say of which kind.', WHICH_SPREAD),
    ("20 +/- 0.3 °C", "temperature", "holds a spread and does not say of which kind.", WHICH_SPREAD),
    ("20.3(2) °C", "temperature", "holds a spread and does not say of which kind.", WHICH_SPREAD),
    ("20-22 °C", "temperature", '"20-22 °C" is a range.', "Write { low = ..., high = ... }."),
    ("20 – 22 °C", "temperature", "is a range.", "Write { low = ..., high = ... }."),
    ("20 °C to 22 °C", "temperature", "is not a unit that is known here.", "A temperature is wanted"),
    ("20", "temperature", '"20" has no unit.', 'A temperature is wanted, such as "20.3 °C".'),
    ("5", "mass", '"5" has no unit.', 'A mass is wanted, such as "0.1 mg".'),
    ("0.1", "angle", '"0.1" has no unit.', 'An angle is wanted, such as "2 arcmin".'),
    ("20 °", "temperature", '"20 °" does not say which degree.', "Write °C, °F or K."),
    ("3 deg", "temperature difference", '"3 deg" does not say which degree.', "Write °C, °F or K."),
    ("20 hPa", "temperature", 'a temperature is wanted, such as "20.3 °C"; "20 hPa" is a pressure.', ""),
    ("20 °C", "pressure", 'a pressure is wanted, such as "1013 hPa"; "20 °C" is a temperature.', ""),
    ("5 m", "mass", 'a mass is wanted, such as "0.1 mg"; "5 m" is a length.', ""),
    ("3 arcmin", "fraction", 'a fraction is wanted, such as "45 %"; "3 arcmin" is an angle.', ""),
    ("45 mm/m", "fraction", 'a fraction is wanted, such as "45 %"; "45 mm/m" is of another kind.', ""),
    ("3 %", "number", 'a number is wanted, such as "3"; "3 %" is a fraction.', ""),
    ("5 MG", "mass", 'a mass is wanted, such as "0.1 mg"; "5 MG" is a magnetic field.', ""),
    ("1.2 kg", "density", 'a density is wanted, such as "1050 kg/m³"; "1.2 kg" is a mass.', ""),
    ("5 hPA", "pressure", '"hPA" is not a unit that is known here.', 'Did you mean "hPa"?'),
    ("5 mgg", "mass", '"mgg" is not a unit that is known here.', 'Did you mean "mg"?'),
    ("5 parsec", "length", '"parsec" is not a unit that is known here.', 'A length is wanted, such as "40 mm".'),
    ("5 kg**9", "mass", '"kg**9" is not a unit that is known here.', "A mass is wanted"),
    ("5 __import__", "mass", "is not a unit that is known here.", "A mass is wanted"),
    ("5 (((", "mass", "is not a unit that is known here.", "A mass is wanted"),
    ("5 /", "mass", "is not a unit that is known here.", "A mass is wanted"),
    ("nan °C", "temperature", '"nan °C" does not begin with a number.', ""),
    ("inf g", "mass", '"inf g" does not begin with a number.', ""),
    ("-inf g", "mass", '"-inf g" does not begin with a number.', ""),
    ("about 5 g", "mass", '"about 5 g" does not begin with a number.', ""),
    ("٣ g", "mass", "does not begin with a number.", ""),
    ("1e61 g", "mass", '"1e61 g" is far outside what can be meant.', ""),
    ("1e999999999 g", "mass", "is far outside what can be meant.", ""),
    ("1" * (LONGEST + 1), "number", "is too long for a number with a unit.", ""),
    (True, "mass", "true is not a number.", 'A mass is wanted, such as "0.1 mg".'),
    (math.nan, "fraction", "the number is not finite, or far outside what can be meant.", ""),
    (math.inf, "fraction", "the number is not finite, or far outside what can be meant.", ""),
    (10**400, "fraction", "the number is not finite, or far outside what can be meant.", ""),
    (5, "mass", '"5" has no unit.', 'A mass is wanted, such as "0.1 mg".'),
]


@pytest.mark.parametrize(("text", "kind", "problem", "remedy"), REFUSALS)
def test_refusal(text, kind, problem, remedy):
    with pytest.raises(units.UnitError) as raised:
        units.parse(text, kind)
    assert problem in raised.value.problem
    assert remedy in raised.value.remedy
    assert (raised.value.remedy == "") == (remedy == "")
    assert str(raised.value) == f"{raised.value.problem} {raised.value.remedy}".rstrip()


def test_a_message_holds_nothing_that_a_terminal_would_obey():
    with pytest.raises(units.UnitError) as raised:
        units.parse("5 g\x1b[31m\u202e", "mass")
    assert str(raised.value).isprintable()


def test_a_bare_number_where_the_kind_has_no_unit():
    assert units.parse(0.45, "fraction") == 0.45
    assert units.parse(3, "number") == 3.0


NEARLY = st.text("0123456789.,+-−±eE×x·*^/()%‰ °′CFKGghmPalsu³²⁻µΩ\u00a0\u2009", max_size=20)


@settings(derandomize=True, database=None, max_examples=1000)
@given(st.text(max_size=120) | NEARLY | NEARLY.map("5 {}".format), st.sampled_from(sorted(units.KINDS)))
def test_any_text_is_read_or_refused(text, kind):
    outcome: float | str
    try:
        outcome = units.parse(text, kind)
    except units.UnitError as error:
        outcome = str(error)
    assert outcome.isprintable() if isinstance(outcome, str) else math.isfinite(outcome)
    assert outcome != ""


# Numerals without a unit ---------------------------------------------------------------------------------------


def test_numbers_without_a_unit():
    assert number("1 013,25") == 1013.25
    assert number("1,250", decimal_comma=True) == 1.25
    assert units.parse("1,250 g", "mass", decimal_comma=True) == 1.25e-3
    assert units.parse_spread("1,250 g", "mass", decimal_comma=True) == 1.25e-3
    with pytest.raises(units.UnitError, match='"5 g" is not a number'):
        number("5 g")


def test_split_is_exact():
    assert split("0.1 mg") == (Fraction(1, 10), "mg")
    assert split("3 1/K") == (Fraction(3), "/K")


@pytest.mark.parametrize(
    ("value", "digits", "text"),
    [
        (20.300000000000011, 4, "20.3"),
        (943.1, 4, "943.1"),
        (1013.25, 3, "1013"),  # digits before the decimal point stay
        (0.00012344, 4, "0.0001234"),
        (-44.78, 4, "−44.78"),
        (1.5e-9, 4, "1.5 × 10⁻⁹"),
        (2e12, 4, "2 × 10¹²"),
        (0.0, 4, "0"),
        (-0.0, 4, "0"),
        (9.9996, 4, "10"),
        (math.nan, 4, "unknown"),
        (math.inf, 4, "∞"),
        (-math.inf, 4, "−∞"),
    ],
)
def test_plain(value, digits, text):
    assert plain(value, digits) == text


# Showing, and back again ---------------------------------------------------------------------------------------


@pytest.mark.parametrize(
    ("value", "kind", "text"),
    [
        (293.45, "temperature", "20.3 °C"),
        (94310.0, "pressure", "943.1 hPa"),
        (5.0, "pressure", "5 Pa"),
        (0.45, "fraction", "45 %"),
        (6e-4, "fraction", "600 ppm"),
        (3e-9, "fraction", "3 ppb"),
        (1e-7, "mass", "0.1 mg"),
        (2e-8, "mass", "20 µg"),
        (-4.478e-5, "mass", "−44.78 mg"),
        (5e-3, "mass", "5 g"),
        (9.99996e-8, "mass", "0.1 mg"),  # the unit fits the number as it is rounded
        (0.0, "mass", "0 mg"),
        (1050.0, "density", "1050 kg/m³"),
        (math.pi / 60, "angle", "3°"),
        (math.pi / 5400, "angle", "2 arcmin"),
        (3e-6, "relative per temperature", "3 ppm/K"),
        (3.0, "number", "3"),
        (math.nan, "mass", "unknown mg"),
    ],
)
def test_show(value, kind, text):
    assert units.show(value, kind) == text


def test_show_in_a_unit_of_choice():
    assert units.show(101325.0, "pressure", 6, unit="kPa") == "101.325 kPa"


@settings(derandomize=True, database=None, max_examples=500)
@given(
    st.floats(1e-12, 1e9) | st.floats(-1e9, -1e-12) | st.just(0.0),
    st.sampled_from(sorted(units.KINDS)),
    st.integers(3, 17),
)
def test_what_is_shown_can_be_read(value, kind, digits):
    """Half a digit of the number shown at most is lost; the zero of °C takes part in that of a temperature."""
    shown = units.show(value, kind, digits)
    offset = 273.15 if kind == "temperature" else 0.0
    lost = 0.5 * 10 ** (1 - digits) * abs(value - offset)
    assert abs(units.parse(shown, kind) - value) <= 1.001 * lost + 1e-14 * (abs(value) + offset)


UNITS = sorted(
    {
        (kind.name, split(text)[1])
        for kind in units.KINDS.values()
        for text in (f"1 {kind.shown}", f"1 {kind.si_unit}".removesuffix(" 1"), *kind.ladder, *kind.examples)
    }
)


@pytest.mark.parametrize(("kind", "unit"), UNITS)
def test_to_a_unit_and_back(kind, unit):
    values = np.array([-0.7, 0.0, 1e-6, 0.3, 1.2])
    back = units.from_unit(units.to_unit(values, kind, unit), kind, unit)
    assert back == pytest.approx(values, rel=1e-14, abs=1e-13 if kind == "temperature" else 1e-18)
    assert units.from_unit(5.0, kind, unit) == pytest.approx(units.parse(f"5 {unit}", kind), rel=1e-15)


def test_a_foreign_unit_is_refused_both_ways():
    for convert in (units.to_unit, units.from_unit):
        with pytest.raises(units.UnitError, match='"hPa" is a pressure'):
            convert(1.0, "mass", "hPa")


def test_columns():
    """NIST SP 811 B.8: 68 °F is 20 °C."""
    assert units.from_unit(np.array([68.0, 32.0]), "temperature", "°F") == pytest.approx([293.15, 273.15], rel=1e-15)
    assert units.to_unit(np.array([293.15, 273.15]), "temperature", "°F") == pytest.approx([68.0, 32.0], rel=1e-13)


# The kinds themselves ------------------------------------------------------------------------------------------


each_kind = pytest.mark.parametrize("kind", units.KINDS.values(), ids=units.KINDS)


@each_kind
def test_a_kind_accepts_what_it_offers(kind):
    for text in (*kind.examples, f"1 {kind.shown}"):
        assert math.isfinite(units.parse(text, kind.name))
    assert units.parse(f"1 {kind.si_unit}".removesuffix(" 1"), kind.name) == 1.0


@each_kind
def test_a_ladder_climbs(kind):
    """Each step begins where it is larger than the one before, and a number there is shown in its unit."""
    steps = [units.parse(step, kind.name) for step in kind.ladder]
    assert steps == sorted(steps)
    for step, size in zip(kind.ladder[1:], steps[1:], strict=True):
        assert units.show(size, kind.name) == step.replace(" °", "°")


@each_kind
def test_a_kind_refuses_the_units_of_others(kind):
    """Save that both temperatures share their units, a number can be a fraction, and a percentage a slope."""
    shared = {"temperature": "temperature difference", "temperature difference": "temperature"}
    shared |= {"fraction": "number", "angle": "fraction"}
    for other in units.KINDS.values():
        if other is kind or other.name == shared.get(kind.name):
            continue
        with pytest.raises(units.UnitError):
            units.parse(other.examples[0], kind.name)
