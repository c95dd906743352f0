"""Set-up files as accidents make them: a rich valid one, mutilated with seeded dice, is answered or refused.

Warnings are errors (pyproject.toml), so that nothing is computed from numbers that are none.
"""

import json
import math
import random
import re
import tomllib
from collections.abc import Callable
from dataclasses import replace

import pytest

from envcorr import cli
from envcorr.catalogue import CATALOGUE
from envcorr.errors import InputError
from envcorr.estimate import Estimate
from envcorr.intake.setup_file import parse_setup, read_setup
from envcorr.jobs.room import check_room

RICH = """# invented
title = "Bay 3, west wall"

[target]
resolution = "0.1 mg"
probability = "95 %"
within = 0.5
relative_accuracy = "0.1 %"
measurand = "mass"
waived = ["buoyancy"]

[air]
temperature = { low = "21 °C", high = "23 °C" }
pressure = { value = "1008 hPa", half_width = "3 hPa", shape = "arcsine" }
humidity = { value = "45 %", u = "3 %" }
co2 = { value = "600 ppm", U = "100 ppm", k = 2, dof = 9 }
altitude = "95 m"
warmer_at_load = "0.1 K"
formula = "CIPM-2007"

[sensors]
temperature = { U = "0.4 K", k = 2 }
pressure = { value = "0.1 hPa", u = "0.5 hPa" }
humidity = { half_width = "2 %" }

[tare.air]
temperature = "21.5 °C"

[adjusted]
when = "unknown"
tilt = "2 arcmin"

[adjusted.air]
pressure = { low = "990 hPa", high = "1020 hPa" }

[cycle]
duration = "2 min"
repeats = 3
temperature_change = "0.2 K"
pressure_change = { u = "0.1 hPa" }
humidity_change = "1 %"
chamber_warming = "0.1 K"
tilt_change = "0.5 arcmin"

[balance]
max_capacity = "220 g"
scale_interval = "0.01 mg"
repeatability = "0.02 mg"
repeatability_from = "elsewhere"
repeatability_readings = 10
scatter_on = "0.035 mg"
scatter_off = "0.02 mg"
scatter_source = "neither"
nonlinearity = "0.03 mg"
eccentric_loading = "0.1 mg"
eccentric_test_load = "100 g"
adjusting_weight_density = "8000 kg/m³"
adjusting_weight_error = "2 ppm"
sensitivity_drift = "2 ppm"
sensitivity_temperature_coefficient = "1 ppm/K"
zero_temperature_coefficient = "5 µg/K"
zero_tilt_coefficient = "2 µg/arcmin"
shaft_area = "0.2 cm²"
moving_mass = "60 g"
filter_corner = "0.3 Hz"
integration_time = "2 s"
warmed_up = "no"

[bench]
magnetic_field = "50 µT"
magnetic_gradient = { value = "1 mT/m", u = "0.5 mT/m" }
tilt_x = { value = "1 arcmin", u = "1 arcmin" }
tilt_y = "0.6 mm/m"

[load]
mass = "5 g"
density = { value = "32 kg/m³", u = "0.5 kg/m³", dof = 5 }
density_kind = "envelope"
density_from = "uncorrected weighing"
open_cell_fraction = { low = 0.1, high = 0.4, shape = "triangular" }
solid_density = "1050 kg/m³"
warmer_by = { value = "1 K", half_width = "0.5 K" }
height = "40 mm"
diameter = "3 cm"
insulating = true
kept_at_humidity = "30 %"
isotherm_slope = { value = 0.02, u = 0.005 }
uptake_time = "10 min"
handled_by = "bare fingers"
touches = 2
magnetic = true
magnetic_susceptibility = 0.01
polarisation = "2 µT"

[site]
latitude = { value = "47.5 °", u = "0.1 °" }

[adjusted.site]
latitude = "47.4 °"

[draught]
preset = "air conditioning"
shield_factor = "10 %"
area = "6 cm²"
pan_area = "50 cm²"
direction = "down"

[pulse]
pressure = "0.2 Pa"

[vibration]
velocity_rms = { value = "50 µm/s", half_width = "20 µm/s" }
frequency = "12 Hz"

[evaporation]
liquid = "ethanol"
opening = "10 mm"
depth = "30 mm"
open_time = { value = "20 s", half_width = "5 s" }

[headspace]
saturation = { low = 0.2, high = 0.9 }

[film]
area = "80 cm²"
surface = "glass"
humidity_change = "2 %"

[container]
mass = "8 g"
density = "2.7 g/cm³"
inner_volume = "20 mL"
outer_volume = { low = "23 mL", high = "24 mL", shape = "log-uniform" }
closed = "never"
warmer_by = "0.2 K"

[static]
charge = { value = "0 nC", u = "1 nC" }
distance = "40 mm"
direction = "unknown"

[[correlation]]
between = ["air.temperature", "air.humidity"]
coefficient = -0.5

[[correlation]]
between = ["sensors.temperature", "sensors.pressure"]
coefficient = 0.3
"""
"""Nearly every section, form of a value and kind of effect (an invented scene)."""

VALUES = (
    *('"0 K"', '"0 g"', '"1e30 g"', '"-5 g"', '"1e-30 kg"', '"nan"', '"inf K"', '"20 °C"', '"68 °F"', '"3 %"', '"5 g"'),
    *('"0 m"', '"1 hPa"', '"99999 hPa"', '"1 m³"', '"1e59 V/m"', '"89°"', '"1e40 C"', '"23000 kg/m³"', '"0.5 kg/m³"'),
    *("0", "1", "-1", "1e-300", "1e300", "9" * 30, "0x" + "f" * 2000, "1" * 5000, "nan", "-inf", "true", "false"),
    *("[]", "{}", '""', "1979-05-27", "07:32:00", '["5 g"]', '{ value = "1 K" }', '{ u = "1e50 K" }', "[[[[[1]]]]]"),
    *('{ low = "0 K", high = "1e9 K" }', '{ value = "5 g", u = "100 g" }', "{ value = 0.5, u = 1e9, dof = 3 }"),
    *('{ value = "1 m", u = "1e6 m", dof = 3 }', '{ low = 1e-9, high = 1, shape = "log-uniform" }', "[" * 3000),
    *('"yes"', '"solid"', '"kept shut"', '"just before"', '"difference"', '"conventional mass"', '"OIML R 111-1"'),
)
NUMBERS = (
    "0",
    "-1",
    "1e9",
    "1e-9",
    "1e58",
    "1e-58",
    "1e61",
    "-0",
    "+7",
    "1,5",
    "1.2.3",
    "1,250",
    "½",
    "٣",
    "1 000",
    "",
)
POWERS = ("e-6", "e-3", "e-2", "e-1", "e1", "e2", "e3", "e6")
UNITS = (
    ("g", "mg", "µg", "kg", "lb"),
    ("K", "°C", "°F", "mK"),
    ("hPa", "Pa", "kPa", "mmHg"),
    ("kg/m³", "g/cm³", "mg/mL"),
    ("m", "mm", "cm", "ft"),
    ("mL", "L", "m³"),
    ("arcmin", "°", "mm/m", "rad"),
    ("%", "ppm", ""),
    ("nC", "µC", "C"),
)
WORDS = (
    ("yes", "no"),
    ("mass", "conventional mass", "difference"),
    ("never", "each time", "kept shut"),
    ("gas-displacement", "envelope", "solid", "liquid", "bulk"),
    ("here", "elsewhere"),
    ("just before", "unknown"),
    ("CIPM-2007", "OIML R 111-1"),
    ("corrected", "uncorrected weighing"),
    ("floor", "roof", "unknown"),
    ("arcsine", "triangular", "rectangular", "log-uniform", "normal"),
)
SIGNS = "\"'[]{}=#,.-+e±°µ%\n\t\\\r\x00\x1b\u202e\u00a0\ufeff𝟗é٣"
VALUE = re.compile(r"(?<== )[^\n{}]+$", re.MULTILINE)
QUOTED = re.compile(r'"[^"\n]*"')
NUMBER = re.compile(r"(?<![\w.])[0-9][0-9.]*")
END = re.compile(r"(?<=[0-9])(?=[ \",\n])")
KEY = re.compile(r"^[a-z_0-9]+(?= = )|(?<=[{,] )[a-zA-Z_]+(?= = )", re.MULTILINE)
SECTION = re.compile(r"^\[.*\]$", re.MULTILINE)


def _replaced(text: str, pattern: re.Pattern[str], dice: random.Random, *, by: str | None = None) -> str:
    """Put ``by``, or another find of the same pattern, in the place of one find."""
    found = list(pattern.finditer(text))
    if not found:
        return text
    one = dice.choice(found)
    new = dice.choice(found)[0] if by is None else by
    return text[: one.start()] + new + text[one.end() :]


def _without_some(text: str, dice: random.Random) -> str:
    start = dice.randrange(len(text) + 1)
    return text[:start] + text[start + dice.choice((1, 1, 1, 2, 5, 40, 400)) :]


def _with_signs(text: str, dice: random.Random) -> str:
    start = dice.randrange(len(text) + 1)
    return text[:start] + "".join(dice.choices(SIGNS, k=dice.choice((1, 1, 3, 20)))) + text[start:]


def _lines(text: str, dice: random.Random) -> str:
    """Delete, double or move a line."""
    lines = text.split("\n")
    line = dice.randrange(len(lines))
    taken = lines[line] if dice.random() < 0.3 else lines.pop(line)
    if dice.random() < 0.5:
        lines.insert(dice.randrange(len(lines) + 1), taken)
    return "\n".join(lines)


def _section(text: str, dice: random.Random) -> str:
    """Delete a whole section."""
    parts = re.split(r"(?m)^(?=\[)", text)
    parts.pop(dice.randrange(len(parts)))
    return "".join(parts)


def _nested(text: str, dice: random.Random) -> str:
    depth = dice.choice((2, 30, 3000))
    deep = dice.choice(("x = " + "[" * depth + "]" * depth, "x" + ".a" * depth + " = 1", "[air" + ".a" * depth + "]"))
    return f"{text}\n{deep}\n"


def _other_of(groups: tuple[tuple[str, ...], ...], text: str, dice: random.Random) -> str:
    """Put another unit or word of the same group in the place of one."""
    found = [
        (m, group)
        for group in groups
        for m in re.finditer(rf"(?<=[ \"])(?:{'|'.join(filter(None, group))})(?=\")", text)
    ]
    if not found:
        return text
    one, group = dice.choice(found)
    return text[: one.start()] + dice.choice(group) + text[one.end() :]


def _spread(text: str, dice: random.Random) -> str:
    """Give a plain value a spread as large as itself."""
    spread = dice.choice(("u = {0}", "u = {0}, dof = 2.1", "half_width = {0}", 'half_width = {0}, shape = "arcsine"'))
    found = list(re.finditer(r'(?<= = )"[0-9][^"\n]*"$', text, re.MULTILINE))
    one = dice.choice(found) if found else None
    return f"{text[: one.start()]}{{ value = {one[0]}, {spread.format(one[0])} }}{text[one.end() :]}" if one else text


def _entry(text: str, dice: random.Random) -> str:
    """Delete an entry."""
    found = list(re.finditer(r"^.* = .*\n", text, re.MULTILINE))
    one = dice.choice(found) if found else None
    return text[: one.start()] + text[one.end() :] if one else text


def _times(text: str, dice: random.Random) -> str:
    """Move the decimal point of a number."""
    return _replaced(text, END, dice, by=dice.choice(POWERS))


MUTATIONS: tuple[Callable[[str, random.Random], str], ...] = (
    # what may still be read
    *(_times, _entry, _spread) * 4,
    *(lambda text, dice: _other_of(UNITS, text, dice),) * 5,
    *(lambda text, dice: _other_of(WORDS, text, dice),) * 5,
    *(lambda text, dice: _replaced(text, NUMBER, dice),) * 3,
    *(lambda text, dice: _replaced(text, NUMBER, dice, by=dice.choice(NUMBERS)),) * 4,
    # what hardly can
    *(lambda text, dice: _replaced(text, VALUE, dice, by=dice.choice(VALUES)),) * 3,
    *(lambda text, dice: _replaced(text, QUOTED, dice, by=dice.choice(VALUES)),) * 3,
    lambda text, dice: _replaced(text, QUOTED, dice),
    lambda text, dice: _replaced(text, KEY, dice),
    lambda text, dice: _replaced(text, SECTION, dice),
    *(_lines, _section, _without_some, _with_signs, _nested),
)


def mutant(seed: int) -> bytes:
    """Return the bytes of the set-up file after one to four mutations; the same for the same seed."""
    dice = random.Random(seed)
    text = RICH
    for _ in range(dice.choice((1, 1, 1, 2, 2, 4))):
        text = dice.choice(MUTATIONS)(text, dice)
    data = text.encode()
    if dice.random() < 0.05:
        start = dice.randrange(len(data) + 1)
        data = data[:start] + dice.randbytes(dice.choice((1, 4, 100))) + data[start:]
    return data


SEEDS = range(200)


def outcome(data: bytes, tmp_path, capsys, *options: str) -> tuple[int, str, str]:
    """Return exit code, output and messages of a room check of a file with these bytes."""
    path = tmp_path / "station.toml"
    path.write_bytes(data)
    with pytest.raises(SystemExit) as stopped:
        cli.main(["room", str(path), "--draws", "16384", *options])
    assert [found.name for found in tmp_path.iterdir()] == ["station.toml"]  # nothing was written
    assert path.read_bytes() == data
    return stopped.value.code, *capsys.readouterr()


def readable(data: bytes, tmp_path) -> bool:
    path = tmp_path / "readable.toml"
    path.write_bytes(data)
    try:
        read_setup(path)
    except InputError:
        return False
    finally:
        path.unlink()
    return True


def not_a_number(text: str) -> None:
    raise AssertionError(f"{text} in JSON")


@pytest.mark.parametrize("seed", SEEDS)
def test_a_mutilated_file_is_answered_or_refused(seed, tmp_path, capsys, monkeypatch):
    monkeypatch.delenv("ENVCORR_DEBUG", raising=False)
    monkeypatch.chdir(tmp_path)
    data = mutant(seed)
    can_be_read = readable(data, tmp_path)
    as_json = seed % 2 == 1
    code, page, messages = outcome(data, tmp_path, capsys, *(["--json"] if as_json else []))
    assert code in ((0, 2) if can_be_read else (2,)), messages
    assert "Traceback" not in messages
    if code == 2:
        assert page == ""
        assert messages.startswith("envcorr: ")
        assert messages.replace("\n", "").isprintable()
    else:
        assert messages == ""
        assert json.loads(page, parse_constant=not_a_number) if as_json else "16384 draws" in page


@pytest.mark.parametrize("name", sorted(parse_setup(tomllib.loads(RICH)).estimates))
def test_the_smallest_that_is_accepted_is_answered(name):
    """Zero, where it is allowed, and the lower bound of physics: nothing is divided by either."""
    setup, place = parse_setup(tomllib.loads(RICH)), CATALOGUE.find(name)
    assert place is not None
    low = 0.0 if place.sensor or math.isinf(place.quantity.low) else place.quantity.low
    for value in {low, max(low, 0.0)}:
        result = check_room(replace(setup, estimates={**setup.estimates, name: Estimate(value)}), draws=2**14)
        assert math.isfinite(result.as_read.whole.supported_resolution)


def test_the_dice_are_fair(tmp_path):
    """A good part of the mutilated files can still be read, a good part cannot, and hardly two are the same."""
    assert mutant(7) == mutant(7)
    assert len({mutant(seed) for seed in SEEDS}) > 0.9 * len(SEEDS)
    share = sum(readable(mutant(seed), tmp_path) for seed in SEEDS) / len(SEEDS)
    assert 0.25 < share < 0.75


def test_the_file_itself_is_answered(tmp_path, capsys):
    code, page, messages = outcome(RICH.encode(), tmp_path, capsys, "--json")
    assert (code, messages) == (0, "")
    result = json.loads(page)["result"]
    assert len(result["effects"]) >= 12
    assert [entry["name"] for entry in result["not_assessed"]] == []
