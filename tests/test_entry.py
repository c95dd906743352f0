"""Every form in which a value can be written, and every fault of one, with its place."""

import math
import tomllib

import pytest

from envcorr.catalogue import CATALOGUE
from envcorr.errors import InputError
from envcorr.estimate import Estimate
from envcorr.intake.setup_file import parse_setup, place_of

UNKNOWN_SPREAD = (
    "Say which it is: u (standard uncertainty), U with k (expanded, from a certificate), or half_width (a limit ±)."
)
SHAPES = "Known are normal, rectangular, triangular, arcsine, log-uniform."


def read(text):
    """Return the set-up of a text, of which nothing is required."""
    return parse_setup(tomllib.loads(text), require=())


def approx(estimate):
    """Return an estimate to compare with: the same shape, numbers to a few roundings."""
    centre, spread = (pytest.approx(number, rel=1e-14, abs=1e-30) for number in (estimate.centre, estimate.spread))
    return (centre, estimate.shape, spread, estimate.dof)


def parts(estimate):
    return (estimate.centre, estimate.shape, estimate.spread, estimate.dof)


# Every form of a value ---------------------------------------------------------------------------------------------

ENTRIES = [
    ("air.temperature", '"20 °C"', Estimate(293.15)),
    ("air.temperature", '{ value = "20 °C" }', Estimate(293.15)),
    ("air.humidity", "0.45", Estimate(0.45)),
    ("air.humidity", "1", Estimate(1.0)),
    ("air.humidity", '"45 %"', Estimate(0.45)),
    ("air.humidity", "{ value = 0.45, u = 0.03 }", Estimate(0.45, "normal", 0.03)),
    ("air.temperature", '{ value = "20 °C", u = "0.3 °C" }', Estimate(293.15, "normal", 0.3)),
    ("air.temperature", '{ value = "68 °F", u = "0.9 °F" }', Estimate(293.15, "normal", 0.5)),
    ("air.temperature", '{ value = "20 °C", u = "0 K" }', Estimate(293.15)),
    # a certificate: U over k (JCGM 100:2008, 4.3.3)
    ("air.pressure", '{ value = "1000 hPa", U = "1 hPa", k = 2 }', Estimate(1e5, "normal", 50.0)),
    ("air.pressure", '{ value = "1000 hPa", U = "1 hPa", k = "2,5" }', Estimate(1e5, "normal", 40.0)),
    ("air.pressure", '{ value = "1000 hPa", U = "1 hPa", k = 2, dof = 9 }', Estimate(1e5, "normal", 50.0, 9.0)),
    ("air.pressure", '{ value = "1000 hPa", u = "1 hPa", dof = 4.5 }', Estimate(1e5, "normal", 100.0, 4.5)),
    ("air.pressure", '{ value = "1000 hPa", u = "1 hPa", shape = "normal" }', Estimate(1e5, "normal", 100.0)),
    ("air.pressure", '{ value = "1000 hPa", half_width = "3 hPa" }', Estimate(1e5, "rectangular", 300.0)),
    *(
        (
            "air.pressure",
            f'{{ value = "1000 hPa", half_width = "3 hPa", shape = "{shape}" }}',
            Estimate(1e5, shape, 300.0),
        )
        for shape in ("rectangular", "triangular", "arcsine")
    ),
    ("air.temperature", '{ low = "21 °C", high = "23 °C" }', Estimate(295.15, "rectangular", 1.0)),
    ("air.temperature", '{ low = "21 °C", high = "23 °C", shape = "arcsine" }', Estimate(295.15, "arcsine", 1.0)),
    ("air.temperature", '{ low = "21 °C", high = "21 °C" }', Estimate(294.15)),
    ("air.co2", '{ low = "400 ppm", high = "1600 ppm", shape = "triangular" }', Estimate(1e-3, "triangular", 6e-4)),
    # log-uniform: its median is the geometric mean of the ends
    (
        "air.co2",
        '{ low = "400 ppm", high = "1600 ppm", shape = "log-uniform" }',
        Estimate(8e-4, "log-uniform", math.log(2)),
    ),
    # a bound ±: a bare value has no sign, a table states more
    ("cycle.temperature_change", '"0.3 K"', Estimate(0.0, "rectangular", 0.3)),
    ("cycle.temperature_change", '"-0.3 °C"', Estimate(0.0, "rectangular", 0.3)),
    ("cycle.temperature_change", '{ value = "0.3 K" }', Estimate(0.0, "rectangular", 0.3)),
    ("cycle.temperature_change", '"0 K"', Estimate(0.0)),
    ("cycle.temperature_change", '{ half_width = "0.3 K" }', Estimate(0.0, "rectangular", 0.3)),
    ("cycle.temperature_change", '{ u = "0.3 K" }', Estimate(0.0, "normal", 0.3)),
    ("cycle.temperature_change", '{ value = "-0.2 K", u = "0.1 K" }', Estimate(-0.2, "normal", 0.1)),
    ("cycle.temperature_change", '{ low = "-0.1 K", high = "0.3 K" }', Estimate(0.1, "rectangular", 0.2)),
    # other moments
    ("tare.air.temperature", '"19 °C"', Estimate(292.15)),
    ("adjusted.air.pressure", '{ value = "1000 hPa", u = "1 hPa" }', Estimate(1e5, "normal", 100.0)),
    # what a sensor adds: an error about zero, or about its known offset
    ("sensors.air.pressure", '{ u = "0.5 hPa" }', Estimate(0.0, "normal", 50.0)),
    ("sensors.air.temperature", '{ U = "0.4 °C", k = 2 }', Estimate(0.0, "normal", 0.2)),
    ("sensors.air.temperature", '{ half_width = "0.9 °F" }', Estimate(0.0, "rectangular", 0.5)),
    ("sensors.air.temperature", '{ value = "0.1 °C", u = "0.2 K" }', Estimate(0.1, "normal", 0.2)),
    ("sensors.air.temperature", '{ low = "-0.1 °C", high = "0.3 °C" }', Estimate(0.1, "rectangular", 0.2)),
    ("tare.sensors.air.pressure", '{ u = "0.5 hPa" }', Estimate(0.0, "normal", 50.0)),
    ("sensors.load.density", '{ u = "2 kg/m³" }', Estimate(0.0, "normal", 2.0)),
]


@pytest.mark.parametrize(("name", "text", "expected"), ENTRIES)
def test_entry(name, text, expected):
    section, _, key = name.rpartition(".")
    assert parts(read(f"[{section}]\n{key} = {text}\n").estimates[name]) == approx(expected)


@pytest.mark.parametrize("section", ["sensors", "tare.sensors", "adjusted.sensors"])
def test_the_short_form_of_a_sensor_is_that_of_the_air(section):
    entry = 'pressure = { u = "0.5 hPa" }'
    short, full = read(f"[{section}]\n{entry}"), read(f"[{section}.air]\n{entry}")
    assert short.estimates == full.estimates == {f"{section}.air.pressure": Estimate(0.0, "normal", 50.0)}


def test_a_name_in_short_form_finds_its_place():
    for name in ("sensors.pressure", "sensors.air.pressure", "tare.sensors.pressure"):
        place = place_of(name)
        assert place is not None
        assert (place.quantity.name, place.sensor) == ("air.pressure", True)
    assert place_of("air.presure") is None


def test_a_table_of_its_own_is_an_entry_too():
    inline = read('[air]\ntemperature = { value = "20 °C", u = "0.3 K" }')
    assert read('[air.temperature]\nvalue = "20 °C"\nu = "0.3 K"').estimates == inline.estimates
    assert read('[air]\ntemperature.value = "20 °C"\ntemperature.u = "0.3 K"').estimates == inline.estimates


# Faults of an entry, each with its place -----------------------------------------------------------------------------

FAULTS = [
    ("[air]\ntemperature = 20", 'air.temperature: "20" has no unit. A temperature is wanted, such as "20.3 °C".'),
    (
        '[air]\ntemperature = "20 hPa"',
        'air.temperature: a temperature is wanted, such as "20.3 °C"; "20 hPa" is a pressure.',
    ),
    ("[air]\ntemperature = true", 'air.temperature: "true" is not a value. Write "20.3 °C".'),
    ('[air]\ntemperature = ["20 °C"]', 'air.temperature: "[\'20 °C\']" is not a value. Write "20.3 °C".'),
    ("[air]\ntemperature = 1979-05-27", 'air.temperature: "1979-05-27" is not a value. Write "20.3 °C".'),
    ("[air]\ntemperature = {}", 'air.temperature: holds nothing. Write value = "20.3 °C" in it.'),
    (
        '[air]\ntemperature = { value = "20 °C", uu = "1 K" }',
        'air.temperature: "uu" is not known in an entry. Did you mean u?',
    ),
    (
        '[air]\ntemperature = { value = "20 °C", sigma = "1 K" }',
        'air.temperature: "sigma" is not known in an entry. '
        "Known are value, u, U, k, half_width, low, high, shape, dof.",
    ),
    (
        '[air]\ntemperature = { value = "20 °C", u = "1 %" }',
        'air.temperature: u: a temperature difference is wanted, such as "0.3 K"; "1 %" is a fraction. '
        "A spread is written in the unit of the quantity, not as a share of it.",
    ),
    (
        '[air]\ntemperature = { value = "20 °C", u = "1 K", U = "2 K", k = 2 }',
        f"air.temperature: u and U are given at once. Keep one. {UNKNOWN_SPREAD}",
    ),
    (
        '[air]\ntemperature = { value = "20 °C", U = "2 K" }',
        "air.temperature: U is given without k. Add the coverage factor of the certificate, usually k = 2.",
    ),
    (
        '[air]\ntemperature = { value = "20 °C", u = "2 K", k = 2 }',
        f"air.temperature: k goes with U, not with u. {UNKNOWN_SPREAD}",
    ),
    (
        '[air]\ntemperature = { value = "20 °C", U = "2 K", k = 20 }',
        "air.temperature: k = 20 is no coverage factor. It is usually 2.",
    ),
    (
        '[air]\ntemperature = { value = "20 °C", U = "2 K", k = [2] }',
        'air.temperature: k "[2]" is not a value. Write k = 2.',
    ),
    ('[air]\ntemperature = { u = "1 K" }', 'air.temperature: has a spread but no value. Add value = "20.3 °C".'),
    (
        '[air]\ntemperature = { value = "20 °C", u = "-1 K" }',
        'air.temperature: u ("-1 K") is negative. A spread has no sign.',
    ),
    (
        '[air]\ntemperature = { value = "20 °C", u = false }',
        'air.temperature: u "false" is not a value. Write u = "0.3 K".',
    ),
    (
        '[air]\ntemperature = { value = ["20 °C"], u = "1 K" }',
        'air.temperature: value "[\'20 °C\']" is not a value. Write value = "20.3 °C".',
    ),
    (
        '[air]\ntemperature = { value = { value = "20 °C" } }',
        "air.temperature: value \"{'value': '20 °C'}\" is not a value. Write value = \"20.3 °C\".",
    ),
    (
        '[air]\ntemperature = { value = "20 °C", dof = 5 }',
        f"air.temperature: has no spread. {UNKNOWN_SPREAD}",
    ),
    (
        '[air]\ntemperature = { value = "20 °C", u = "1 K", dof = 2 }',  # JCGM 101:2008, 6.4.9.4
        "air.temperature: dof = 2 is too few for a spread to have any bound. Degrees of freedom are readings less one: "
        "take four readings, or the u of longer experience.",
    ),
    (
        '[air]\ntemperature = { value = "20 °C", half_width = "1 K", dof = 9 }',
        "air.temperature: dof belongs to u or U. Leave it out.",
    ),
    (
        '[air]\ntemperature = { value = "20 °C", u = "1 K", shape = "triangel" }',
        'air.temperature: shape "triangel" is not known. Did you mean triangular?',
    ),
    (
        '[air]\ntemperature = { value = "20 °C", u = "1 K", shape = "gauss" }',
        f'air.temperature: shape "gauss" is not known. {SHAPES}',
    ),
    (
        '[air]\ntemperature = { value = "20 °C", u = "1 K", shape = "arcsine" }',
        'air.temperature: u belongs to a normal distribution, not "arcsine". Use half_width for that shape.',
    ),
    (
        '[air]\ntemperature = { value = "20 °C", half_width = "1 K", shape = "normal" }',
        'air.temperature: a half_width cannot be "normal". Use shape = "rectangular", "triangular" or "arcsine".',
    ),
    ('[air]\ntemperature = { low = "20 °C" }', "air.temperature: low is given without the other end. Give low and"),
    ('[air]\ntemperature = { high = "20 °C" }', "air.temperature: high is given without the other end. Give low and"),
    (
        '[air]\ntemperature = { low = "20 °C", high = "22 °C", value = "21 °C" }',
        "air.temperature: low and high cannot go with value or a spread. Give low and high alone.",
    ),
    (
        '[air]\ntemperature = { low = "20 °C", high = "22 °C", dof = 9 }',
        "air.temperature: low and high cannot go with k or dof. Leave those out.",
    ),
    (
        '[air]\ntemperature = { low = "23 °C", high = "22 °C" }',
        'air.temperature: low ("23 °C") is above high ("22 °C"). Swap them.',
    ),
    (
        '[air]\ntemperature = { low = "20 °C", high = "22 hPa" }',
        'air.temperature: high: a temperature is wanted, such as "20.3 °C"; "22 hPa" is a pressure.',
    ),
    (
        '[air]\ntemperature = { low = "20 °C", high = "22 °C", shape = "normal" }',
        'air.temperature: low and high do not make a "normal" distribution. '
        'Use shape = "rectangular", "triangular", "arcsine" or "log-uniform".',
    ),
    (
        '[cycle]\ntemperature_change = { low = "-1 K", high = "2 K", shape = "log-uniform" }',
        "cycle.temperature_change: a log-uniform distribution needs low above zero. Give a positive low.",
    ),
    # outside physics
    ('[air]\ntemperature = "-300 °C"', 'air.temperature: read "-300 °C": −300 °C is below −60 °C, the smallest that'),
    (
        "[air]\nhumidity = 1.4",
        'air.humidity: read "1.4": 140 % is above 100 %, the largest that is accepted. '
        "Was it a fraction? 0.45 without the percent sign is 45 %.",
    ),
    ('[load]\nmass = "-5 g"', 'load.mass: read "-5 g": −5 g is below 1 ng, the smallest that is accepted.'),
    (
        '[air]\nhumidity = { value = "45 %", half_width = "60 %" }',
        "air.humidity: −15 % is below 0 %, the smallest that is accepted.",
    ),
    ("[air]\nhumidity = nan", 'air.humidity: read "nan": the number is not finite, or far outside what can be meant.'),
    ("[air]\nhumidity = -inf", 'air.humidity: read "-inf": the number is not finite, or far outside what can be'),
    (
        "[air]\nhumidity = { value = 0.4, u = inf }",
        "air.humidity: u: the number is not finite, or far outside what can be meant.",
    ),
    (
        '[cycle]\ntemperature_change = "60 K"',
        'cycle.temperature_change: read "60 K": −60 K is below −50 K, the smallest that is accepted.',
    ),
    # a normal whose u alone reaches what cannot be: one draw in six would lie there
    (
        '[load]\ndensity = { value = "32 kg/m³", u = "32 kg/m³" }',
        "load.density: one u from the value, 0 kg/m³ is below 0.5 kg/m³, the smallest that is accepted. "
        "Give low and high, as far as they are possible.",
    ),
    (
        '[load]\nmass = { value = "5 g", u = "5 g" }',
        "load.mass: one u from the value, 0 mg is below 1 ng, the smallest that is accepted. Give low and high",
    ),
    (
        '[air]\nhumidity = { value = "99 %", U = "4 %", k = 2 }',
        "air.humidity: one u from the value, 101 % is above 100 %, the largest that is accepted. Give low and high",
    ),
    (
        '[air]\nhumidity = { value = "101 %", u = "2 %" }',
        "air.humidity: 101 % is above 100 %, the largest that is accepted. Was it a fraction?",
    ),
    # sensors
    (
        '[sensors]\ntemperature = { U = "400 K", k = 2 }',
        "sensors.air.temperature: an error of 200 K is over half of the range that is accepted. "
        "Check its unit and its decimal point.",
    ),
    (
        '[sensors]\nhumidity = { value = "-30 %", half_width = "50 %" }',
        "sensors.air.humidity: an error of 58.87 % is over half of the range that is accepted.",  # 30 + 50/sqrt(3)
    ),
    (
        '[sensors]\npressure = "0.5 hPa"',
        f'sensors.air.pressure: "0.5 hPa" does not say what it is. {UNKNOWN_SPREAD} For example {{ u = "0.5 hPa" }}.',
    ),
    ('[sensors]\npressure = { value = "0.2 hPa" }', f"sensors.air.pressure: has no spread. {UNKNOWN_SPREAD}"),
    ('[sensors]\npresure = { u = "1 hPa" }', "sensors.presure: is not known. Did you mean sensors.air.pressure?"),
    ('[tare]\ntemperature = "20 °C"', "tare.temperature: is not known. Did you mean tare.air.temperature?"),
    (
        '[tare.sensors]\npresure = { u = "1 hPa" }',
        "tare.sensors.presure: is not known. Did you mean tare.sensors.air.pr",
    ),
    ('[tare]\nresolution = "1 mg"', "tare.resolution: is not known. Did you mean target.resolution?"),
]


@pytest.mark.parametrize(("text", "message"), FAULTS)
def test_fault(text, message):
    """One fault, with section and key, what was read and what would do."""
    with pytest.raises(InputError) as raised:
        read(text)
    assert len(raised.value.faults) == 1
    assert str(raised.value.faults[0]).startswith(message)
    assert str(raised.value).isprintable()


@pytest.mark.parametrize("quantity", [q for q in CATALOGUE.quantities.values() if q.example], ids=lambda q: q.name)
def test_the_example_of_a_quantity_can_be_read(quantity):
    """The text that a message offers is one that the file accepts."""
    section, _, key = f"tare.{quantity.name}".rpartition(".")
    estimate = read(f'[{section}]\n{key} = "{quantity.example}"').estimates[f"tare.{quantity.name}"]
    assert estimate.shape == ("rectangular" if quantity.limit else "fixed")
