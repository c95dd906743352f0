"""Moisture through the room check: uptake, film, condensation, fingers."""

import math
import tomllib

import numpy as np
import pytest
from CoolProp.CoolProp import HAPropsSI

from envcorr.catalogue import CATALOGUE
from envcorr.estimate import Estimate
from envcorr.intake.setup_file import parse_setup, read_setup
from envcorr.jobs.room import check_room
from envcorr.laws import moisture
from tests.scene import K0, MG, ROOM, UG, about, normal, row, setup

OURS = ("hygroscopic_uptake", "water_film", "condensation", "fingerprint")

FULL = """
title = "Invented: a cold, hygroscopic tablet in a weighing glass, put down by hand"

[target]
resolution = "0.1 mg"

[air]
temperature = "22 °C"
pressure = "1005 hPa"
humidity = { value = "50 %", u = "2 %" }
co2 = "500 ppm"

[adjusted]
when = "just before"

[cycle]
duration = "2 min"
temperature_change = "0.1 K"
humidity_change = "1 %"

[balance]
scale_interval = "10 µg"
repeatability = "20 µg"
adjusting_weight_density = "8000 kg/m³"
sensitivity_temperature_coefficient = "1 ppm/K"

[load]
mass = "500 mg"
density = "1500 kg/m³"
density_kind = "solid"
warmer_by = "-18 K"
isotherm_slope = { value = 0.05, u = 0.005 }
uptake_time = "15 min"
uptake_factor = { low = 0.7, high = 1.5, shape = "log-uniform" }
kept_at_humidity = "10 %"
handled_by = "bare fingers"
touches = 3
touch_residue = { low = "10 µg", high = "60 µg" }

[container]
mass = "20 g"
density = "2500 kg/m³"
height = "40 mm"
diameter = "30 mm"
warmer_by = "0 K"

[film]
area = "100 cm²"
surface = "glass"
humidity_change = "3 %"

[condensation]
area = "5 cm²"
factor = { low = 0.5, high = 1.5 }
"""
"""Every quantity of these effects that goes with the others (the rates and residues that replace them are below)."""


def check(**said):
    return check_room(setup(ROOM, said), draws=2**14)


def effect(name, **said):
    return row(check(**said), name)


def told(result, *words):
    return [n.sentence for n in result.notices if all(word in n.sentence for word in words)]


def lacks(result, name):
    return next(missing.lacks for missing in result.not_assessed if missing.effect.name == name)


# All of it -----------------------------------------------------------------------------------------------------------


def amended(section, **changes):
    full = tomllib.loads(FULL)
    entries = {key: value for key, value in {**full[section], **changes}.items() if value is not None}
    return check_room(parse_setup({**full, section: entries}), draws=2**14)


def test_a_set_up_that_states_all_of_it(tmp_path):
    """Signs by hand: it takes up water, gathers dew and grease, so all of it reads heavy."""
    path = tmp_path / "tablet.toml"
    path.write_text(FULL, "utf-8")
    result = check_room(read_setup(path), draws=2**14)
    assert not {missing.effect.name for missing in result.not_assessed} & set(OURS)
    assert not [name for name in result.unused if name.startswith(("load.", "film.", "condensation.", "cycle."))]
    for name in ("hygroscopic_uptake", "condensation", "fingerprint"):
        assert row(result, name).mean_error > 0
    assert row(result, "water_film").u > 0
    assert told(result, "below the dew point", "4 °C")
    assert result.verdict.answer == "reached once treated"
    # 500 mg x 0.05 x 40 % x (1 - exp(-2/15)) = 1.25 mg (by hand), the factor's mean being 1.05 (integral by hand)
    mean = (1.5 - 0.7) / math.log(1.5 / 0.7)
    expected = 0.5e-3 * 0.05 * 0.4 * (1 - math.exp(-2 / 15)) * mean
    assert row(result, "hygroscopic_uptake").mean_error == pytest.approx(expected, rel=5e-3)
    assert row(result, "fingerprint").mean_error == pytest.approx(3 * 35 * UG, rel=5e-3)


def test_what_replaces_the_rest_is_used_too():
    rate = amended("load", uptake_rate="30 µg/min", finger_residue="20 µg", uptake_factor=None)
    assert row(rate, "hygroscopic_uptake").mean_error == pytest.approx(60 * UG, rel=1e-9)
    assert row(rate, "fingerprint").mean_error == pytest.approx(20 * UG, rel=1e-9)
    film = amended("film", slope="0.2 µg/cm²", humidity_change={"low": "2 %", "high": "4 %"})
    assert row(film, "water_film").mean_error == pytest.approx(0.6 * UG, rel=1e-3)


def test_every_quantity_of_these_effects_is_stated():
    """None of them is forgotten above."""
    stated = {
        f"{section}.{key}" for section, entries in tomllib.loads(FULL).items() if section != "title" for key in entries
    }
    elsewhere = {"load.uptake_rate", "load.finger_residue", "film.slope"}
    for name in OURS:
        every = CATALOGUE.effects[name]
        wanted = {q.name for q in every.quantities if not q.internal} | {c.name for c in every.choices}
        assert wanted <= stated | elsewhere


@pytest.mark.parametrize(
    ("name", "lacking"),
    [
        ("hygroscopic_uptake", ("load.uptake_rate",)),
        ("water_film", ("film.area",)),
        ("fingerprint", ("load.finger_residue",)),
    ],
)
def test_what_is_not_said_is_not_assessed(name, lacking):
    found = lacks(check(cycle_duration=120.0), name)
    assert set(lacking) <= set(found), found


# Uptake --------------------------------------------------------------------------------------------------------------

POWDER = {
    "load_density": 1500.0,
    "load_isotherm_slope": 0.05,
    "load_uptake_time": 1800.0,
    "load_uptake_factor": 1.0,
    "cycle_duration": 120.0,
}


@pytest.mark.parametrize(("kept", "expected"), [(0.15, 5.64), (0.85, -5.64), (0.5, 0.0)])
def test_uptake_by_isotherm(kept, expected):
    """5 g x 0.05 x 35 % x (1 - exp(-1/15)) = 5.64 mg (by hand); what was kept moister loses."""
    found = effect("hygroscopic_uptake", **POWDER, load_kept_at_humidity=kept)
    assert found.mean_error / MG == pytest.approx(expected, abs=0.005)
    assert found.correction == pytest.approx(-found.mean_error, abs=1e-15)


def test_uptake_by_a_change_within_the_weighing():
    """5 g x 0.05 x 2 % x 0.0645 = 0.32 mg (by hand), however the change was said."""
    by_change = effect("hygroscopic_uptake", **POWDER, cycle_humidity_change=Estimate(0.02))
    by_tare = effect("hygroscopic_uptake", **POWDER, tare_air_humidity=0.48)
    assert by_change.mean_error / MG == pytest.approx(0.322, abs=0.001)
    assert by_tare.mean_error == pytest.approx(by_change.mean_error, rel=1e-9)
    either = effect("hygroscopic_uptake", **POWDER, cycle_humidity_change=about(0.0, 0.02))
    assert either.mean_error == pytest.approx(0.0, abs=1e-3 * either.u)
    assert either.u == pytest.approx(by_change.mean_error / math.sqrt(3), rel=0.01)


def test_a_measured_rate_comes_first():
    """20 µg/min for 2 min, gained or lost (by hand)."""
    for sign in (1, -1):
        found = effect("hygroscopic_uptake", **POWDER, load_kept_at_humidity=0.1, load_uptake_rate=sign * 20 * UG / 60)
        assert found.mean_error == pytest.approx(sign * 40 * UG, rel=1e-9)


def test_only_what_was_measured_can_be_corrected_for():
    """The model's factor stays in what is left: u of a log-uniform from 0.5 to 2 is 0.426 (by hand)."""
    given = {**POWDER, "load_uptake_factor": None, "load_kept_at_humidity": 0.15}
    modelled, measured = check(**given), check(**given, load_uptake_rate=20 * UG / 60)
    spread = math.sqrt((2**2 - 0.5**2) / (2 * math.log(4)) - ((2 - 0.5) / math.log(4)) ** 2)
    size = 5e-3 * 0.05 * 0.35 * -math.expm1(-1 / 15)
    assert modelled.corrected.surroundings.summary.u == pytest.approx(spread * size, rel=0.02)
    assert measured.corrected.surroundings.summary.u < 1 * UG


def test_early_uptake_is_said():
    late = check(**{**POWDER, "cycle_duration": 200.0}, load_kept_at_humidity=0.15)
    early = check(**POWDER, load_kept_at_humidity=0.15)
    assert told(early, "2 min is less than a tenth", "30 min", "load.uptake_rate")
    assert not told(late, "less than a tenth")
    assert told(early, "may be more than the target allows")
    assert not told(check(**POWDER, load_kept_at_humidity=0.5), "may be more than the target allows")


# Film ----------------------------------------------------------------------------------------------------------------


def test_film_on_a_weight():
    """A steel kilogram, 150 cm², 10 %: 0.3 to 3 µg; mean of the log-uniform 1.17 µg (by hand)."""
    found = effect("water_film", film_area=150e-4, film_surface="steel", film_humidity_change=Estimate(0.1))
    low, high = 0.3 * UG, 3 * UG
    assert found.mean_error == pytest.approx((high - low) / math.log(high / low), rel=5e-3)
    assert low < found.interval[0] < found.interval[1] < high
    assert found.correction is None


@pytest.mark.parametrize("surface", ["steel", "platinum-iridium", "glass"])
def test_an_unknown_surface_may_be_any(surface):
    said = {"film_area": 1e-4, "film_humidity_change": Estimate(0.1)}
    (low, high), (least, most) = (effect("water_film", **said, **s).interval for s in ({"film_surface": surface}, {}))
    assert least < 1.1 * low < high < 1.1 * most


def test_film_on_silica():
    """4 to 5 layers from 0 to 75 % (Verdaguer et al., Langmuir 23 (2007) 9699) lie inside the band for glass.

    A layer is 0.31 nm, the cube root of a molecule's volume in liquid water: 0.12 to 0.16 µg/cm².
    """
    layer = 1000 * (0.018015 / 6.02214e23 / 1000) ** (1 / 3)  # kg/m²
    said = {"film_area": 1e-4, "film_surface": "glass", "film_humidity_change": Estimate(0.75)}
    low, high = effect("water_film", **said).interval
    assert low < 4 * layer * 1e-4 < 5 * layer * 1e-4 < high
    # less than one up to 90 % on a surface that water does not wet (Chen et al., J. Phys. Chem. C 122 (2018) 11385)
    assert low / 0.75 < 1.1 * layer * 1e-4 / 0.9


@pytest.mark.parametrize(
    ("said", "change"),
    [
        ({"load_kept_at_humidity": 0.1}, 0.4),
        ({"load_kept_at_humidity": 0.8}, -0.3),
        ({"cycle_humidity_change": Estimate(0.02)}, 0.02),
        ({"tare_air_humidity": 0.55}, -0.05),
        ({"load_kept_at_humidity": 0.1, "film_humidity_change": Estimate(0.02)}, 0.02),
    ],
)
def test_what_the_film_has_met(said, change):
    found = effect("water_film", film_area=100e-4, film_slope=1e-6, **said)
    assert found.mean_error == pytest.approx(10 * UG * change, rel=1e-9)


def test_film_in_moist_air_is_said():
    film = {"film_area": 100e-4, "cycle_humidity_change": Estimate(0.02)}
    assert told(check(**film, air_humidity=0.85), "85 %", "drier air")
    assert not told(check(**film), "drier air")


# Condensation --------------------------------------------------------------------------------------------------------

COLD = {"load_warmer_by": -18.0, "cycle_duration": 60.0, "air_temperature": K0 + 22, "condensation_factor": 1.0}


def test_condensation_on_a_cold_load():
    """40 mm high, 30 mm wide: 51.8 cm² at 2.1 µg/(cm² s), the law's own test, is 6.6 mg a minute (by hand)."""
    found = effect("condensation", **COLD, load_height=0.04, load_diameter=0.03)
    assert found.mean_error / MG == pytest.approx(6.6, rel=0.02)
    assert found.correction is None


def test_the_area_of_the_outermost_body():
    """A cylinder of the same volume and as high as wide has 1.5 pi D²; the container's counts where there is one."""
    volume = math.pi / 4 * 0.03**3
    shaped = effect("condensation", **COLD, load_height=0.03, load_diameter=0.03).mean_error
    assert effect("condensation", **COLD, load_volume=volume).mean_error == pytest.approx(shaped, rel=1e-9)
    area = 1.5 * math.pi * 0.03**2
    doubled = effect("condensation", **COLD, load_volume=volume, condensation_area=2 * area).mean_error
    assert doubled == pytest.approx(2 * shaped, rel=1e-9)
    container = {"container_mass": 0.02, "container_density": 2500.0, "container_outer_volume": volume}
    cold = {**COLD, "load_warmer_by": 0.0, "container_warmer_by": -18.0}
    assert effect("condensation", **cold, **container).mean_error == pytest.approx(shaped, rel=1e-9)
    inside = {**COLD, "container_warmer_by": 0.0}
    assert effect("condensation", **inside, **container).mean_error == pytest.approx(shaped, rel=1e-9)


def test_nothing_condenses_above_the_dew_point():
    dew_point = HAPropsSI("D", "T", K0 + 22, "P", 101325, "R", 0.5)
    for above in (0.1, 10.0, 100.0):
        result = check(**{**COLD, "load_warmer_by": dew_point + above - (K0 + 22)})
        assert row(result, "condensation").mean_error == 0.0
        assert not told(result, "dew point")
    result = check(**{**COLD, "load_warmer_by": dew_point - 0.1 - (K0 + 22)})
    assert row(result, "condensation").mean_error > 0.0
    assert told(result, "dew point")


@pytest.mark.parametrize("humidity", [{"air_dew_point": K0 + 11.1}, {"air_wet_bulb": K0 + 15.4}])
def test_however_the_humidity_was_given(humidity):
    """22 °C and 50 %: dew point 11.1 °C, wet bulb 15.4 °C (CoolProp's humid air)."""
    assert HAPropsSI("D", "T", K0 + 22, "P", 101325, "R", 0.5) == pytest.approx(K0 + 11.1, abs=0.05)
    assert HAPropsSI("B", "T", K0 + 22, "P", 101325, "R", 0.5) == pytest.approx(K0 + 15.4, abs=0.05)
    by_humidity = effect("condensation", **COLD).mean_error
    assert effect("condensation", **COLD, air_humidity=None, **humidity).mean_error == pytest.approx(
        by_humidity, rel=0.1
    )


def test_a_wide_spread_of_the_temperature():
    """The mean over draws against the law on a grid of the same normal; some draws lie above the dew point."""
    found = effect(
        "condensation", **{**COLD, "load_warmer_by": normal(-11.0, 4.0)}, load_height=0.03, load_diameter=0.03
    )
    score = np.linspace(-6, 6, 20001)
    weight = np.exp(-(score**2) / 2)
    fraction = HAPropsSI("Y", "T", K0 + 22, "P", 101325, "R", 0.5)
    flux = moisture.condensation_flux(0.03, -11.0 + 4.0 * score, K0 + 22, 101325.0, fraction)
    mean = (flux * weight).sum() / weight.sum()
    assert found.mean_error == pytest.approx(mean * 1.5 * math.pi * 0.03**2 * 60, rel=5e-3)


# Fingers -------------------------------------------------------------------------------------------------------------


@pytest.mark.parametrize("word", ["gloves", "tweezers"])
def test_tools_leave_nothing(word):
    assert effect("fingerprint", load_handled_by=word).mean_error == 0.0


def test_bare_fingers():
    """Two touches of 10 to 100 µg, log-uniform: mean 2 x 90/ln 10 = 78 µg (by hand)."""
    result = check(load_handled_by="bare fingers")
    found = row(result, "fingerprint")
    assert found.mean_error == pytest.approx(2 * 90 * UG / math.log(10), rel=5e-3)
    assert found.correction is None
    assert {"load.touch_residue", "load.touches"} <= {assumed.name for assumed in result.assumed}


# Cautions ------------------------------------------------------------------------------------------------------------


def test_cautions():
    assert "react with water" in CATALOGUE.effects["hygroscopic_uptake"].caution
    for word in ("burst", "licensed practice", "water"):
        assert word in CATALOGUE.effects["condensation"].caution
