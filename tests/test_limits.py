"""Limits: closed forms, forward checks on both sides of each, a brute-force scan, and what is said where none is."""

from __future__ import annotations

import csv
import json
import math
from dataclasses import replace
from pathlib import Path

import pytest
from click.testing import CliRunner
from hypothesis import given, settings
from hypothesis import strategies as st

from envcorr.cli import cli
from envcorr.document import limits as page
from envcorr.errors import InputError
from envcorr.estimate import Estimate
from envcorr.intake.setup_file import parse_setup, read_setup
from envcorr.jobs.limits import find_limits
from envcorr.jobs.room import check_room
from tests.scene import MG, ROOM, UG, about, normal, setup

EXAMPLES = Path("envcorr/examples")
EXACT = 0.004
"""Of a 95 % quantile on 2^14 draws, and of the bracket (relative)."""
LEVEL_BEFORE = {
    "adjusted_when": None,
    "air_density": 1.2,
    "adjusted_air_density": 1.2,
    "adjusted_air_temperature": 293.15,
    "adjusted_air_pressure": 101_325.0,
}
"""Adjusted level, in known air, and then left alone."""


def limit(result, name):
    return next(one for one in result.limits if one.name == name)


def conformance(said, result, name, estimate):
    """Return the smaller conformance probability of a full room check, on as many draws."""
    changed = replace(said, estimates={**said.estimates, name: estimate})
    total = check_room(changed, draws=result.draws).total(result.state)
    return min(total.surroundings.conformance_probability, total.whole.conformance_probability)


# Closed forms ----------------------------------------------------------------------------------------------------


def test_a_proportional_effect():
    """kappa (T - T_adj) m, rectangular in T: P(|E| <= b) = b/(kappa m w), so w = b/(0.95 kappa m) (by hand)."""
    said = setup(
        ROOM,
        LEVEL_BEFORE,
        load_mass=50e-3,
        balance_sensitivity_temperature_coefficient=Estimate(2e-6),
        air_temperature=about(293.15, 1.0),
        target_resolution=0.2 * MG,
    )
    found = limit(find_limits(said), "air.temperature")
    assert found.required.spread == pytest.approx(0.1 * MG / (0.95 * 2e-6 * 50e-3), rel=EXACT)
    assert found.answer == "already better"
    assert found.factor == pytest.approx(found.required.spread, rel=1e-12)  # now ±1 K


def test_repeatability():
    """A normal error of the whole weighing: 1.95996 s = r (JCGM 100:2008, table G.2)."""
    said = setup(ROOM, balance_repeatability=15 * UG, balance_scale_interval=1 * UG)
    found = limit(find_limits(said), "balance.repeatability")
    assert found.required.centre == pytest.approx(0.1 * MG / 1.95996, rel=EXACT)
    assert found.mode == "size"


def test_a_charge():
    """q^2/(16 pi eps0 d^2 g) = 0.05 mg at 40 mm: 0.59 nC (image charge, by hand)."""
    said = setup(ROOM, static_charge=0.1e-9, static_distance=40e-3, static_direction="floor", static_screening=0.0)
    found = limit(find_limits(said), "static.charge")
    charge = 40e-3 * math.sqrt(16 * math.pi * 8.8541878128e-12 * 9.80665 * 0.05 * MG)
    assert found.required.centre == pytest.approx(charge, rel=2e-3)
    assert charge == pytest.approx(0.59e-9, rel=5e-3)


def test_a_charge_that_is_given_as_nothing():
    """From zero on there is nothing to scale: the largest tolerable value is found all the same."""
    said = setup(ROOM, static_charge=0.0, static_distance=40e-3, static_direction="floor", static_screening=0.0)
    found = limit(find_limits(said), "static.charge")
    assert found.factor is None
    assert found.required.centre == pytest.approx(0.59e-9, rel=5e-3)


def test_tilt():
    """A balance adjusted level and used tilted by an exact angle: 1 - cos = b/m, 2.43 arcmin for 0.05 mg at 200 g."""
    said = setup(
        ROOM,
        LEVEL_BEFORE,
        load_mass=200e-3,
        bench_tilt_x=1e-4,
        bench_tilt_y=0.0,
        balance_repeatability=1 * UG,
    )
    found = limit(find_limits(said, state="as_read"), "bench.tilt_x")
    assert math.degrees(found.required.centre) * 60 == pytest.approx(2.43, abs=0.005)


def test_all_together():
    """kappa and T - T_adj in proportion: e95 goes with the square, so the factor is the root of allowed over now."""
    said = setup(
        ROOM,
        LEVEL_BEFORE,
        load_mass=50e-3,
        balance_sensitivity_temperature_coefficient=about(0.0, 4e-6),
        air_temperature=about(293.15, 2.0),
        balance_repeatability=1 * UG,
    )
    marked = ("air.temperature", "balance.sensitivity_temperature_coefficient")
    found = find_limits(said, improvable=marked)
    assert found.joint.names == marked
    assert found.joint.factor == pytest.approx(math.sqrt(found.allowed / found.e95), rel=2e-3)
    assert [step.e95 for step in found.joint.steps] == pytest.approx(
        [found.e95 / 2 ** (i + 1) for i in range(len(found.joint.steps))], rel=1e-9
    )
    assert len(found.joint.steps) == math.ceil(math.log2(found.e95 / found.allowed))
    assert found.joint.reached


def test_net_masses():
    """A relative error of the adjusting weight, rectangular ±a: 0.95 a m = r gives the largest mass (by hand)."""
    said = setup(ROOM, balance_adjusting_weight_error=about(0.0, 10e-6), balance_repeatability=1 * UG)
    found = find_limits(said).masses
    assert found.works
    assert found.smallest is None
    assert found.largest == pytest.approx(0.1 * MG / (0.95 * 10e-6), rel=EXACT)
    assert find_limits(said.with_estimates(balance_max_capacity=Estimate(8e-3))).masses.largest == pytest.approx(
        8e-3, rel=1e-3
    )
    too_heavy = find_limits(said.with_estimates(load_mass=Estimate(50e-3)))
    assert not too_heavy.now.passes
    assert too_heavy.masses.largest == pytest.approx(found.largest, rel=2e-3)


def test_held_and_measured():
    """Buoyancy of foam: a barometer lets it be corrected for, while a charge is the same whoever knows it."""
    said = setup(
        ROOM,
        load_density=50.0,
        air_pressure=about(101_325.0, 1000.0),
        static_charge=normal(0.0, 0.1e-9),
        static_distance=40e-3,
        static_direction="floor",
        static_screening=0.0,
        balance_repeatability=1 * UG,
    )
    found = {one.name: one for one in find_limits(said).worth}
    assert found["air.pressure"].measured == pytest.approx(found["air.pressure"].held, rel=0.05)
    assert found["static.charge"].measured is None


# Both sides, and by brute force -------------------------------------------------------------------------------------


@pytest.mark.parametrize(("name", "state"), [("milligram_bench", "corrected"), ("powder_station", "treated")])
def test_just_inside_passes_and_just_outside_fails(name, state):
    """Full room checks with the quantity at the limit, and a five-hundredth beyond it."""
    said = read_setup(EXAMPLES / f"{name}.toml")
    found = find_limits(said, state=state)
    looked_at = [one for one in found.limits if one.required is not None]
    assert len(looked_at) >= 5
    for one in looked_at:
        beyond = find_estimate(one, 1.002)
        assert one.outside < 0.95 <= one.inside
        assert conformance(said, found, one.name, one.required) == one.inside >= 0.95
        assert conformance(said, found, one.name, beyond) < 0.95


def find_estimate(one, factor):
    if one.mode == "spread":
        return one.required.scaled(factor)
    return replace(one.required, centre=one.required.centre * factor, spread=one.required.spread * factor)


@settings(max_examples=8, deadline=None)
@given(st.floats(0.05, 1.0), st.floats(0.2, 8.0), st.sampled_from(["air.temperature", "air.pressure", "load.density"]))
def test_against_a_scan(resolution, spread, name):
    """The limit divides what passes from what fails in a scan of full room checks, where one is found at all."""
    said = setup(
        ROOM,
        load_density=normal(300.0, 3.0),
        air_temperature=about(293.15, spread),
        air_pressure=about(101_325.0, 300 * spread),
        target_resolution=resolution * MG,
    )
    found = find_limits(said)
    one = limit(found, name)
    now = said.estimates[name]
    seen = {
        factor: conformance(said, found, name, now.scaled(factor)) >= 0.95 for factor in (0.02, 0.3, 1.0, 3.0, 30.0)
    }
    if one.answer == "cannot be reached by this alone":
        assert not any(seen.values())
    elif one.answer == "no limit found":
        assert all(seen.values())
    else:
        assert seen == {factor: factor <= one.factor for factor in seen}
        assert (one.answer == "already better") is found.now.passes


# Where there is none --------------------------------------------------------------------------------------------------


def test_two_effects_cancel():
    """A warm load reads light, a charge heavy: less of the one lets the other show."""
    said = setup(
        ROOM,
        load_density=8000.0,
        load_mass=50e-3,
        load_warmer_by=5.0,
        load_convection_factor=1.0,
        static_charge=0.8e-9,
        static_distance=40e-3,
        static_direction="floor",
        static_screening=0.0,
        target_resolution=0.05 * MG,
        balance_repeatability=1 * UG,
    )
    found = find_limits(said)
    assert found.now.passes
    assert limit(found, "load.warmer_by").answer == "two effects cancel here"
    assert limit(found, "static.charge").answer == "two effects cancel here"


def test_the_balance_alone_breaks_it():
    said = setup(ROOM, balance_repeatability=80 * UG)
    found = find_limits(said)
    assert found.broken_by_balance == pytest.approx(1.96 * 80 * UG, rel=EXACT)
    verdict = page.document(found)[2]
    assert "no room will do" in verdict.sentences[0]


def test_what_cannot_be_asked():
    said = setup(ROOM, air_temperature=about(293.15, 1.0))
    for names, words in (
        (("air.temperatur",), "Did you mean air.temperature?"),
        (("static.charge",), "is not given by the set-up"),
        (("load.density",), "cannot be made smaller"),
    ):
        with pytest.raises(InputError, match=words):
            find_limits(said, improvable=names)
    with pytest.raises(InputError, match=r"target\.resolution: is not given"):
        find_limits(setup({**ROOM, "target_resolution": None}))


def test_what_the_set_up_marks():
    text = {
        "target": {"resolution": "0.1 mg", "improvable": ["air.temperature", "sensors.pressure"]},
        "air": {"temperature": {"low": "19 °C", "high": "21 °C"}, "pressure": "1013 hPa", "humidity": "50 %"},
        "sensors": {"pressure": {"u": "1 hPa"}},
        "load": {"mass": "5 g", "density": "1000 kg/m³"},
        "balance": {"repeatability": "10 µg", "scale_interval": "10 µg"},
    }
    assert find_limits(parse_setup(text)).joint.names == ("air.temperature", "sensors.air.pressure")
    text["target"]["improvable"] = "air.temprature"
    with pytest.raises(
        InputError, match=r"target\.improvable: \"air.temprature\" is not a quantity. Did you mean air.t"
    ):
        parse_setup(text)


def test_what_this_load_needs_is_said():
    said = setup({**ROOM, "balance_sensitivity_temperature_coefficient": None})
    found = find_limits(said)
    assert found.missing
    assert page.document(found)[2].answer == "undecided"


# The command -------------------------------------------------------------------------------------------------------


def test_command(tmp_path):
    arguments = ["limits", str(EXAMPLES / "milligram_bench.toml"), '--set=target.resolution="0.5 mg"']
    shown = CliRunner().invoke(cli, arguments)
    assert shown.exit_code == 0, shown.stderr
    assert "NOT REACHED" in shown.stdout
    assert "% of now" in shown.stdout
    answer = json.loads(CliRunner().invoke(cli, [*arguments, "--json", f"--out={tmp_path / 'a.csv'}"]).stdout)["result"]
    by_name = {one["name"]: one for one in answer["limits"]}
    coefficient = by_name["balance.sensitivity_temperature_coefficient"]
    assert coefficient["answer"] == "must become"
    assert coefficient["factor"] == pytest.approx(0.42, abs=0.02)  # as other runs of the room check find it
    assert coefficient["probability_outside"] < 0.95 <= coefficient["probability_inside"]
    with (tmp_path / "a.csv").open(encoding="utf-8", newline="") as file:
        rows = {row["name"]: row for row in csv.DictReader(file)}
    row = rows["balance.sensitivity_temperature_coefficient"]
    assert float(row["required"]) == pytest.approx(float(row["now"]) * coefficient["factor"], rel=1e-9)
    assert row["unit"] == "ppm/K"
    assert CliRunner().invoke(cli, arguments).stdout == shown.stdout  # the same draws
    assert CliRunner().invoke(cli, [*arguments, f"--out={tmp_path / 'a.csv'}"]).exit_code == 2  # is already there
    assert CliRunner().invoke(cli, [*arguments, "--as-read", "--treated"]).exit_code == 2
