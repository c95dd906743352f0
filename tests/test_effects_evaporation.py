"""Evaporation and the vapour in the headspace in a room check, by hand and by their traps; scenes are invented."""

from __future__ import annotations

import math
from dataclasses import replace

import pytest
from click.testing import CliRunner
from CoolProp.CoolProp import PropsSI

from envcorr import liquids
from envcorr.cli import cli
from envcorr.errors import NotComputedError
from envcorr.intake.setup_file import read_setup
from envcorr.jobs.limits import find_limits
from envcorr.jobs.mass import find_mass
from envcorr.jobs.room import check_room
from tests.scene import K0, MG, ROOM, about, row, setup
from tests.test_examples import FOLDER

R = 8.314462618
MEASURED = {"evaporation_rate": 0.4 * MG / 60, "evaporation_open_time": 30.0}
VIAL = {
    "load_mass": 1e-3,
    "load_density": 790.0,
    "load_density_kind": "liquid",
    "evaporation_liquid": "acetone",
    "evaporation_opening": 10e-3,
    "evaporation_depth": 35e-3,
    "evaporation_open_time": 60.0,
    "evaporation_factor": 1.0,
    "evaporation_cooling": 0.0,
}
FLASK = {"container_inner_volume": 100e-6, "container_mass": 50e-3, "container_density": 2230.0}


def room(*more, **said):
    return check_room(setup(ROOM, *more, said), draws=2**14)


def loss(*more, **said):
    """Return what evaporates [mg]."""
    return -row(room(*more, **said), "evaporation").mean_error / MG


def found_mass(*more):
    """Return the mass [kg] behind a reading of 5 g."""
    return find_mass(setup(ROOM, *more, {"load_mass": None, "reading": 5e-3})).mass.value


def sentences(result):
    return " ".join(notice.sentence for notice in result.notices)


def answers(result):
    return {one.label: one.value for one in row(result, "evaporation").answers}


def lacks(result, name):
    return next(found.lacks for found in result.not_assessed if found.effect.name == name)


def isothermal(name, t, opening, depth, share_far=0.0):
    """Return the rate [mg/min] by hand: Fuller's diffusivity, Stefan's flow, L + pi a/4, CoolProp's vapour pressure."""
    liquid = liquids.every()[name]
    molar = 1e3 * liquid.molar_mass
    size = math.sqrt(2 / (1 / molar + 1 / 28.97)) * (liquid.volume ** (1 / 3) + 19.7 ** (1 / 3)) ** 2
    d = 1e-4 * 0.00143 * t**1.75 / (1.01325 * size)
    share = PropsSI("P", "T", t, "Q", 1, liquid.coolprop) / 101_325
    drive = math.log((1 - share_far) / (1 - share))
    flux = d * 101_325 * liquid.molar_mass / (R * t * (depth + math.pi / 8 * opening)) * drive
    return flux * math.pi / 4 * opening**2 * 60 / MG


# A measured rate -----------------------------------------------------------------------------------------------------


def test_a_measured_rate():
    """0.4 mg/min for 30 s: -0.2 mg, and corrected for; 0.05 mg of the target are gone in 7.5 s."""
    found = room(MEASURED)
    shift = row(found, "evaporation")
    assert shift.mean_error / MG == pytest.approx(-0.2, rel=1e-9)
    assert shift.correction / MG == pytest.approx(0.2, rel=1e-9)
    assert answers(found)["longest time to stand open for this target"] == pytest.approx(7.5)
    assert "t = 0" in sentences(found)
    assert "no ignition source" in row(found, "evaporation").caution


def test_the_mass_at_the_pouring():
    """What has left is added back to a reading: 0.2 mg, as by the line through the readings."""
    plain, poured = (found_mass(more) for more in ({}, MEASURED))
    assert (poured - plain) / MG == pytest.approx(0.2, rel=1e-3)  # and the air's buoyancy on it


def test_the_time_of_the_weighing_where_no_other_is_said():
    said = {"evaporation_rate": 0.4 * MG / 60, "cycle_duration": 90.0}
    assert loss(said) == pytest.approx(0.6, rel=1e-9)
    assert loss(said, evaporation_open_time=30.0) == pytest.approx(0.2, rel=1e-9)


def test_nothing_evaporates():
    """A rate of zero leaves no longest time, and no remark on a falling reading."""
    found = room(evaporation_rate=0.0, evaporation_open_time=30.0)
    assert row(found, "evaporation").mean_error == 0.0
    assert "longest time to stand open for this target" not in answers(found)
    assert "t = 0" not in sentences(found)


# By diffusion ---------------------------------------------------------------------------------------------------------


@pytest.mark.parametrize("name", ["acetone", "ethanol", "hexane"])
def test_just_poured(name):
    """Before the surface cools: Stefan's flow by hand."""
    assert loss(VIAL, evaporation_liquid=name) == pytest.approx(isothermal(name, K0 + 20, 10e-3, 35e-3), rel=1e-4)


def test_water_meets_the_humidity_of_the_room():
    """By hand at 50 % (in water vapour of moist air some 0.5 % more than of pure vapour); none into saturated air."""
    said = {**VIAL, "evaporation_liquid": "water"}
    half = 0.5 * PropsSI("P", "T", K0 + 20, "Q", 1, "Water") / 101_325
    found = room(said)
    expected = isothermal("water", K0 + 20, 10e-3, 35e-3, half)
    assert -row(found, "evaporation").mean_error / MG == pytest.approx(expected, rel=0.01)
    assert "the humidity of the room: 50 %" in sentences(found)
    assert abs(loss(said, air_humidity=0.999)) < 0.01 * expected
    dry = room(said, air_humidity=None, air_density=1.2)
    assert "air.humidity" in lacks(dry, "evaporation")


def test_vapour_in_the_room():
    """1 % of the vapour in the air, 24.3 % at the surface: ln(0.99/0.757) of ln(1/0.757), by hand."""
    share = PropsSI("P", "T", K0 + 20, "Q", 1, "Acetone") / 101_325
    less = math.log(0.99 / (1 - share)) / math.log(1 / (1 - share))
    assert loss(VIAL, evaporation_room_vapour=0.01) / loss(VIAL) == pytest.approx(less, rel=1e-9)
    assert "evaporation.room_vapour" in [one.name for one in room(VIAL).assumed]


def test_cooling_takes_a_part():
    """The shorter the path, the colder the surface at last, and the more of the loss that saves."""
    deep, brimful = ({**VIAL, "evaporation_depth": depth} for depth in (35e-3, 1e-3))
    saved = [1 - loss(said, evaporation_cooling=1.0) / loss(said) for said in (deep, brimful)]
    assert 0.3 < saved[0] < saved[1] < 0.8
    label = "how much colder than the air its surface may become"
    assert 5 < answers(room(deep))[label] < answers(room(brimful))[label] < 30
    unknown = row(room(brimful, evaporation_cooling=None), "evaporation")
    assert unknown.u > 0.1 * -unknown.mean_error


def test_the_room_s_temperature_is_drawn():
    """About 5 % a kelvin: the slope of the isothermal rate by hand; the vapour taken as ideal, it is 2 % less."""
    found = row(room(VIAL, air_temperature=about(K0 + 20, 1.0)), "evaporation")
    slope = math.log(isothermal("acetone", K0 + 20.5, 1e-2, 0.035) / isothermal("acetone", K0 + 19.5, 1e-2, 0.035))
    assert found.u / -found.mean_error == pytest.approx(slope / math.sqrt(3), rel=0.03)


def test_a_computed_rate_is_a_band():
    """It is never corrected for, and neither is what a reading stands for."""
    found = room(VIAL, evaporation_factor=None)
    shift = row(found, "evaporation")
    assert shift.correction is None
    assert shift.mean_error / row(room(VIAL), "evaporation").mean_error == pytest.approx(1.5 / math.log(4), rel=5e-3)
    buoyancy = row(found, "buoyancy").mean_error
    assert found.corrected.surroundings.summary.mean == pytest.approx(shift.mean_error, abs=0.01 * MG)
    assert found.as_read.surroundings.summary.mean == pytest.approx(shift.mean_error + buoyancy, abs=0.01 * MG)
    assert found_mass(VIAL) == pytest.approx(found_mass(VIAL, {"evaporation_open_time": 1.0}), rel=1e-12)
    measured = row(room(VIAL, MEASURED), "evaporation")
    assert measured.correction == pytest.approx(0.2 * MG)
    page = " ".join(CliRunner().invoke(cli, ["explain", "evaporation"]).stdout.split())
    assert "yes, but only bounded by diffusion" in page


def test_what_burns_is_said():
    found = room(VIAL)
    assert "acetone burns (flash point −20 °C)" in sentences(found)
    assert "high-voltage ionisers included" in sentences(found)
    assert "local codes" in sentences(found)
    assert "burns" not in sentences(room(VIAL, evaporation_liquid="water"))
    assert "burns" not in sentences(room(VIAL, evaporation_liquid="dichloromethane"))


def test_a_wide_dish_is_said():
    assert "hardly stays still" in sentences(room(VIAL, evaporation_opening=0.08))
    assert "hardly stays still" not in sentences(room(VIAL, evaporation_opening=0.03))


def test_kept_shut_nothing_leaves():
    names = [one.name for one in room(VIAL, FLASK, container_closed="kept shut").effects]
    assert not {"evaporation", "headspace_vapour"} & set(names)


# Where it boils ---------------------------------------------------------------------------------------------------


def test_what_boils_is_refused():
    """Acetone boils at 56 °C (CRC Handbook, from memory)."""
    with pytest.raises(NotComputedError, match="In such air acetone boils"):
        room(VIAL, air_temperature=K0 + 57, air_pressure=101_325.0)
    room(VIAL, air_temperature=K0 + 55)


def test_what_may_boil_is_said():
    assert "the liquid boils" in sentences(room(VIAL, air_temperature=about(K0 + 53, 6.0)))
    assert "the liquid boils" not in sentences(room(VIAL, air_temperature=about(K0 + 50, 4.0)))


def test_limits_pass_over_what_boils():
    """A pressure is searched down to where acetone boils: that is not reached, and no end of the search."""
    found = find_limits(setup(ROOM, VIAL, target_resolution=20 * MG))
    assert found.limits
    pressure = next(one for one in found.limits if one.name == "air.pressure")
    assert pressure.low is None or pressure.low > PropsSI("P", "T", K0 + 20, "Q", 1, "Acetone")


# The headspace -----------------------------------------------------------------------------------------------------


def test_vapour_in_the_headspace():
    """Acetone at 20 °C, 24.66 kPa of 101.3: 0.2434 x 1.2 x (100 - 1.27) mL: -28.84 mg (by hand)."""
    found = room(VIAL, FLASK, headspace_saturation=1.0, air_density=1.2)
    shift = row(found, "headspace_vapour")
    assert shift.mean_error / MG == pytest.approx(-28.84, abs=0.02)
    assert shift.correction is None
    half = room(VIAL, FLASK, headspace_saturation=0.5, air_density=1.2)
    assert row(half, "headspace_vapour").mean_error == pytest.approx(shift.mean_error / 2, rel=1e-12)


def test_of_water_the_air_brings_a_part_along():
    """0.02309 less 0.01159 of 50 % over 1 - 0.01159, times 1.2 x (100 - 1.27) mL: -1.38 mg (by hand)."""
    found = room(VIAL, FLASK, evaporation_liquid="water", headspace_saturation=1.0, air_density=1.2)
    assert row(found, "headspace_vapour").mean_error / MG == pytest.approx(-1.38, abs=0.02)


# The example -------------------------------------------------------------------------------------------------------


def test_a_stopper_and_a_trace_of_acetone_save_the_vial():
    """Neither band is subtracted; with a measured rate what leaves the mouth is, and the headspace is left."""
    vial = read_setup(FOLDER / "volatile_liquid.toml")
    found = check_room(vial, draws=2**14)
    assert set(found.verdict.treat) == {"evaporation", "headspace_vapour"}
    assert "close it, or read at once" in found.verdict.reason
    longest = answers(found)["longest time to stand open for this target"]
    assert 15 < longest < 60
    rate = setup(evaporation_rate=0.7 * MG / 60).estimates
    measured = check_room(replace(vial, estimates={**vial.estimates, **rate}), draws=2**14)
    assert row(measured, "evaporation").correction == pytest.approx(0.35 * MG)
    assert measured.verdict.treat == ("headspace_vapour",)
