"""Gravity, magnetism, draught, pulse and vibration in a room check, by hand and by their traps."""

from __future__ import annotations

import json
import math
import tomllib
from pathlib import Path

import pytest
from click.testing import CliRunner

from envcorr.catalogue import CATALOGUE
from envcorr.cli import cli
from envcorr.errors import InputError
from envcorr.estimate import Estimate
from envcorr.intake.setup_file import parse_setup, read_setup
from envcorr.jobs.room import check_room
from envcorr.laws.gravity import normal_gravity
from tests.scene import MG, ROOM, UG, row, setup
from tests.test_mutations import RICH

ELSEWHERE = {"adjusted_when": None, "air_density": 1.2, "adjusted_air_density": 1.2}
FLOORS = {"air_altitude": 424.0, "adjusted_air_altitude": 410.0}


def room(*more, **said):
    return check_room(setup(ROOM, *more, said), draws=2**14)


def sentences(result):
    return " ".join(notice.sentence for notice in result.notices)


# Gravity -----------------------------------------------------------------------------------------------------------


def test_four_floors():
    """14 m x 3.086e-6 1/s² over 9.807 m/s²: -4.41 ppm, -0.88 mg of 200 g; trap 25."""
    found = room(ELSEWHERE, FLOORS, load_mass=0.2, site_latitude=math.radians(47.5), site_tide_change=0.0)
    shift = row(found, "gravity")
    assert shift.mean_error / MG == pytest.approx(-0.881, abs=0.002)
    assert shift.u < 1e-3 * MG  # the anomaly is that of the site at both heights
    assert "Adjust it again" in sentences(found)
    anywhere = room(ELSEWHERE, FLOORS, load_mass=0.2, site_tide_change=0.0)
    assert row(anywhere, "gravity").mean_error == pytest.approx(shift.mean_error, rel=2e-3)


def test_another_place():
    """From the equator to 60° north: 9.780327 (1 + 0.0053024 sin² - 0.0000058 sin² 2phi) (Moritz 2000, series)."""
    found = room(
        ELSEWHERE,
        air_altitude=0.0,
        site_latitude=math.radians(60.0),
        adjusted_site_latitude=0.0,
        load_mass=0.1,
        site_tide_change=0.0,
    )
    there = 9.780327 * (1 + 0.0053024 * 0.75 - 0.0000058 * 0.75)
    assert normal_gravity(math.radians(60.0)) == pytest.approx(there, abs=2e-6)
    assert row(found, "gravity").mean_error == pytest.approx(0.1 * (there / 9.780327 - 1), rel=1e-3)
    # two anomalies, each u 3e-4 m/s² (judgement): sqrt(2) x 3e-4/9.8 = 43.3 ppm of 100 g
    assert row(found, "gravity").u / MG == pytest.approx(4.33, rel=0.02)


def test_adjusted_here_and_now():
    assert row(room(air_altitude=410.0, site_latitude=0.8), "gravity").u == 0.0


def test_the_tide_is_a_bound():
    """±0.25 ppm, rectangular: 0.144 ppm of 200 g is 28.9 µg."""
    found = room(ELSEWHERE, air_altitude=410.0, site_latitude=0.8, load_mass=0.2)
    assert row(found, "gravity").u / UG == pytest.approx(28.9, rel=0.01)


def test_the_air_of_the_adjustment_follows_its_height():
    """84 m lower the pressure is 1 % higher (ISO 2533): 1.2 %/100 m near the sea."""
    said = setup({**ROOM, "adjusted_when": None}, air_altitude=84.3, adjusted_air_altitude=0.0, load_density=2000.0)
    said = said.with_estimates(
        adjusted_pressure_change=Estimate(0.0),
        adjusted_temperature_change=Estimate(0.0),
        air_pressure=Estimate(100_325.0),
    )
    lower = check_room(said, draws=2**14)
    level = check_room(said.with_estimates(adjusted_air_altitude=Estimate(84.3)), draws=2**14)
    change = row(lower, "buoyancy").mean_error - row(level, "buoyancy").mean_error
    # K takes the air of the adjustment: d/m = d rho/8000 = 0.01 x 1.187/8000 (by hand)
    assert change == pytest.approx(5e-3 * 0.01 * 1.187 / 8000, rel=0.02)


# Magnetism ---------------------------------------------------------------------------------------------------------


def test_magnetism():
    """chi V B B' / mu0 and J V B' / mu0 (by hand): 0.05, 0.6 cm³, 50 µT, 10 mT/m; 10 µT: 1.2 and 4.9 µg."""
    found = room(
        load_mass=5e-3,
        load_density=8000.0,
        load_magnetic="yes",
        load_magnetic_susceptibility=0.05,
        load_polarisation=10e-6,
        bench_magnetic_field=50e-6,
        bench_magnetic_gradient=10e-3,
    )
    volume = 5e-3 / 8000
    by_hand = (0.05 * 50e-6 + 10e-6) * volume * 10e-3 / (4e-7 * math.pi) / 9.80665
    assert row(found, "magnetism").mean_error == pytest.approx(by_hand, rel=1e-6)
    assert by_hand / UG == pytest.approx(6.34, abs=0.01)
    assert "stirring bar" in sentences(found)  # trap 23
    assert "class E2" in sentences(found)
    assert "class F2" not in sentences(found)


def test_a_magnetic_load_without_figures_is_not_passed():
    found = room(load_magnetic="yes")
    assert found.verdict.answer == "undecided"
    assert "magnetism" in found.verdict.reason


# Air -----------------------------------------------------------------------------------------------------------------


DRAUGHT = {
    "draught_speed": 0.2,
    "draught_shield_factor": 1.0,
    "draught_area": 50e-4,
    "draught_pan_area": 0.0,
    "draught_drag_coefficient": 1.2,
    "draught_turbulence": 0.0,
    "air_density": 1.2,
}


@pytest.mark.parametrize(("side", "sign"), [("down", 1.0), ("up", -1.0)])
def test_draught(side, sign):
    """0.144 mN: 14.7 mg (by hand)."""
    found = row(room(DRAUGHT, draught_direction=side), "draught")
    assert found.mean_error / MG == pytest.approx(sign * 14.68, abs=0.01)
    assert found.u == pytest.approx(0.0, abs=1e-12)


def test_fluctuations_and_their_averaging():
    """2 x 0.3 x 14.68 mg of a force that hardly changes while it is read; over a hundred eddies a seventh is left."""
    said = {**DRAUGHT, "draught_turbulence": 0.3, "draught_direction": "down", "draught_eddy": 20.0}
    slow = row(room(said, balance_integration_time=0.1), "draught")
    assert slow.u / MG == pytest.approx(8.81, rel=0.01)
    fast = row(room({**said, "draught_eddy": 0.02}, balance_integration_time=10.0), "draught")
    assert fast.u / slow.u == pytest.approx(math.sqrt(2 * 0.1 / 10), rel=0.02)


def test_the_room_is_not_counted_twice():
    """Where the repeatability was found here, draught, pulse and vibration are in it already."""
    here = room(DRAUGHT, balance_repeatability_from="here", vibration_criterion="VC-A", pulse_pressure=1.0)
    assert not {"draught", "vibration", "pressure_pulse"} & {found.name for found in here.effects}


def test_a_measurement_stands_in_the_place_of_the_models():
    """A scatter with the source on and off: 35 and 20 µg leave 28.7 µg (by hand), and nothing counts twice."""
    said = {**DRAUGHT, **LINE, "vibration_velocity_rms": 5e-5, "load_mass": 5e-3}
    measured = {"balance_scatter_on": 35 * UG, "balance_scatter_off": 20 * UG}
    for source, left in (
        (None, set()),
        ("draught", {"vibration"}),
        ("vibration", {"draught"}),
        ("neither", {"draught", "vibration"}),
    ):
        found = room(said, measured, balance_scatter_source=source)
        assert {"draught", "vibration"} & {one.name for one in found.effects} == left
        assert row(found, "disturbance").u / UG == pytest.approx(28.72, rel=5e-3)
        assert ("draught.speed" in found.unused) is ("draught" not in left)


def test_presets_of_draught():
    said = {name: value for name, value in DRAUGHT.items() if name != "draught_speed"}
    found = room(said, draught_preset="fume hood", draught_direction="down")
    assert row(found, "draught").mean_error / MG == pytest.approx(14.68 * (0.5 / 0.2) ** 2, rel=1e-3)
    assert "more than 0.2 m/s" in sentences(found)


def test_pressure_pulse():
    """1 Pa on 0.2 cm²: 2.04 mg."""
    found = row(room(pulse_pressure=1.0, balance_shaft_area=0.2e-4), "pressure_pulse")
    assert found.mean_error / MG == pytest.approx(2.039, abs=0.001)


# Vibration -----------------------------------------------------------------------------------------------------------


LINE = {
    "vibration_frequency": 5.0,
    "balance_filter_corner": 0.5,
    "balance_filter_order": 2.0,
    "balance_moving_mass": 0.0,
    "load_mass": 0.1,
}


@pytest.mark.parametrize(
    "amplitude",
    [
        {"vibration_acceleration_rms": 1e-3},
        {"vibration_acceleration_peak": 1e-3 * math.sqrt(2)},
        {"vibration_velocity_rms": 1e-3 / (2 * math.pi * 5)},
        {"vibration_velocity_peak": 1e-3 * math.sqrt(2) / (2 * math.pi * 5)},
        {"vibration_displacement_rms": 1e-3 / (2 * math.pi * 5) ** 2},
        {"vibration_displacement_peak": 1e-3 * math.sqrt(2) / (2 * math.pi * 5) ** 2},
    ],
)
def test_a_line_by_any_amplitude(amplitude):
    """1 mm/s² rms at ten times the corner, second order: 1e-2 is left; 1e-5/9.80665 of 100 g is 0.102 mg; trap 26."""
    found = row(room(LINE, amplitude), "vibration")
    assert found.u / MG == pytest.approx(0.10197, rel=5e-3)


def test_peak_or_rms_must_be_said():
    """Trap 26: neither a bare displacement nor a bare velocity is a name; the nearest ones say which they are."""
    for name in ("velocity", "displacement"):
        with pytest.raises(
            InputError, match=rf"vibration\.{name}: is not known\. Did you mean vibration\.{name}_(rms|peak)"
        ):
            parse_setup({"target": {"resolution": "1 mg"}, "load": {"mass": "5 g"}, "vibration": {name: "1 mm/s"}})


def test_octaves_and_moving_parts():
    """Two bands add by squares; the moving parts feel it at both readings: sqrt(2) of them beside the load."""
    said = {**LINE, "vibration_frequency": None, "vibration_octave_1hz": 3e-6, "vibration_octave_2hz": 4e-6}
    found = row(room(said, balance_filter_corner=100.0), "vibration")
    assert found.u == pytest.approx(0.1 * 5e-6 / 9.80665, rel=5e-3)
    both = row(room(said, balance_filter_corner=100.0, balance_moving_mass=0.05), "vibration")
    assert both.u / found.u == pytest.approx(math.hypot(0.15, 0.05) / 0.1, rel=0.01)
    names = {one.name for one in room(said).assumed}
    assert "vibration.octave_4hz" in names  # no figure for it: said, not silently nothing


def test_a_criterion():
    """VC-C, 12.7 µm/s in each one-third octave from 1 to 80 Hz: the sum of its filtered accelerations, band by band."""
    said = {**LINE, "vibration_frequency": None}
    found = row(room(said, vibration_criterion="VC-C"), "vibration")
    bands = [10 ** (k / 10) for k in range(20)]
    squares = sum((2 * math.pi * f * 12.7e-6) ** 2 / (1 + (f / 0.5) ** 4) for f in bands)
    assert found.u == pytest.approx(0.1 * math.sqrt(squares) / 9.80665, rel=5e-3)


# All of it -----------------------------------------------------------------------------------------------------------


def test_warm_up_and_creep_are_said():
    found = room(balance_warmed_up="no", cycle_long_on_pan="yes")
    assert "drifts for hours" in sentences(found)
    assert "creeps" in sentences(found)
    assert found.unused == ()
    assert room(balance_warmed_up="yes").unused == ()


def test_every_effect_is_assessed_and_explained():
    """The set-up that states all of it: see also the one that is mutilated in test_mutations."""
    result = check_room(parse_setup(tomllib.loads(RICH)), draws=2**14)
    assert result.not_assessed == ()
    assert {found.name for found in result.effects} == set(CATALOGUE.effects)
    for name in CATALOGUE.effects:
        assert CliRunner().invoke(cli, ["explain", name]).exit_code == 0


def test_presets_are_listed():
    page = CliRunner().invoke(cli, ["explain", "presets"]).stdout
    for word in ("VC-A", "fume hood", "walking on carpet", "50.8 µm/s", "from memory"):
        assert word in page
    listed = json.loads(CliRunner().invoke(cli, ["explain", "presets", "--json"]).stdout)["result"]["presets"]
    figures = {one["name"]: one["figure"] for one in listed}
    # IEST-RP-CC012 (from memory): 2000 microinches per second, and half of it for each letter on
    for i, letter in enumerate("ABCDE"):
        assert figures[f"VC-{letter}"]["value"] == pytest.approx(2000 * 25.4e-9 / 2**i, rel=1e-9)
    assert all(one["source"] for one in listed)


@pytest.mark.parametrize(
    ("name", "effect", "words"),
    [
        ("volatile_liquid", "headspace_vapour", "burns"),
        ("upstairs_move", "gravity", "Adjust it again"),
        ("hood_over_balance", "draught", ""),
    ],
)
def test_the_examples_tell_their_story(name, effect, words):
    result = check_room(read_setup(Path("envcorr/examples") / f"{name}.toml"), draws=2**14)
    surroundings = [found for found in result.effects if not found.own]
    assert words in sentences(result)
    if name == "upstairs_move":
        assert max(surroundings, key=lambda found: abs(found.mean_error)).name == effect
    else:
        assert min(surroundings, key=lambda found: found.e95_without).name == effect
