"""The traps of the bench: each is said in one sentence where it is stepped into, and not a word where all is well."""

import re

import pytest
from CoolProp.CoolProp import HAPropsSI

from envcorr.errors import InputError
from envcorr.intake.setup_file import parse_setup
from envcorr.jobs.air import air_density
from envcorr.jobs.room import check_room
from tests.scene import row

# an invented station at 620 m, with nothing amiss
AIR = {"temperature": "21.4 °C", "pressure": "943.10 hPa", "humidity": "42 %", "co2": "400 ppm", "altitude": "620 m"}
WELL = {
    "target": {"resolution": "0.1 mg"},
    "air": AIR,
    "adjusted": {"when": "just before"},
    "balance": {
        "scale_interval": "10 µg",
        "repeatability": "15 µg",
        "adjusting_weight_density": "8000 kg/m³",
        "sensitivity_temperature_coefficient": "0 ppm/K",
    },
    "load": {"mass": "5 g", "density": "8000 kg/m³", "density_kind": "solid"},
}
STANDARD_AIR = {"temperature": "20 °C", "pressure": "1013.25 hPa", "humidity": "50 %", "co2": "400 ppm"}


def amended(changes):
    """Return the set-up with some entries changed, or taken away where the new value is None."""
    result = {section: dict(table) for section, table in WELL.items()}
    for section, table in changes.items():
        result[section] = {**result.get(section, {}), **table}
        result[section] = {key: value for key, value in result[section].items() if value is not None}
    return result


def result_of(changes):
    return check_room(parse_setup(amended(changes)), draws=2**14)


def buoyancy(changes):
    """Return the row of the buoyancy."""
    return row(result_of(changes), "buoyancy")


def told(changes):
    """Return the sentences that a room check has to say."""
    return [notice.sentence for notice in result_of(changes).notices]


def faults(changes):
    """Return what is wrong with a set-up, as text; empty where nothing is."""
    try:
        parse_setup(amended(changes))
    except InputError as error:
        return [str(fault) for fault in error.faults]
    return []


def said(sentences, *words):
    """Return the one sentence that has all the words in it."""
    found = [sentence for sentence in sentences if all(word in sentence for word in words)]
    assert len(found) == 1, sentences
    return found[0]


def unsaid(sentences, word):
    assert not [sentence for sentence in sentences if word in sentence]


def test_all_is_well():
    """But for the air of 620 m, which is said to have been used."""
    (only,) = told({})
    assert "adjusted in air of 1.111 kg/m³" in only
    assert told({"air": {**STANDARD_AIR, "altitude": "10 m"}}) == []


# 1: a pressure reduced to sea level as the station's -----------------------------------------------------------------


def test_sea_level_pressure_given_as_station_pressure():
    """620 m: the weather service's 1015.20 hPa makes the air 7.68 % too dense (worked by another program)."""
    sentence = said(told({"air": {"pressure": "1015.20 hPa"}}), "does not belong to an altitude")
    assert "1015 hPa" in sentence
    assert "620 m" in sentence
    assert "air.sea_level_pressure" in sentence
    unsaid(told({}), "altitude")
    unsaid(told({"air": {"pressure": "1015.20 hPa", "altitude": "10 m"}}), "altitude")
    right, wrong = (air_density(parse_setup(amended(c))).density for c in ({}, {"air": {"pressure": "1015.20 hPa"}}))
    assert wrong / right == pytest.approx(1.0768, abs=1e-4)
    assert right == pytest.approx(1.11101, abs=1e-5)


def test_sea_level_pressure_said_to_be_one():
    """ISO 2533: at 620 m the pressure is 0.928 635 of that at sea level, so 1015.20 hPa becomes 942.75 hPa."""
    given = {"air": {"pressure": None, "sea_level_pressure": "1015.20 hPa"}}
    unsaid(told(given), "does not belong")
    ratio = (1 - 0.0065 * (6_356_766 * 620 / (6_356_766 + 620)) / 288.15) ** (9.80665 / (287.05287 * 0.0065))
    here = air_density(parse_setup(amended({"air": {"pressure": f"{1015.20 * ratio} hPa"}}))).density
    assert air_density(parse_setup(amended(given))).density == pytest.approx(here, rel=1e-9)


def test_sea_level_pressure_without_the_altitude_is_not_used():
    result = result_of({"air": {"pressure": None, "sea_level_pressure": "1015.20 hPa", "altitude": None}})
    lacks = {missing.effect.name: missing.lacks for missing in result.not_assessed}
    assert lacks["buoyancy"] == ("air.pressure",)


# 2: a dew point above the air temperature ----------------------------------------------------------------------------


@pytest.mark.parametrize("name", ["dew_point", "wet_bulb"])
def test_dew_point_above_the_air_temperature(name):
    (fault,) = faults({"air": {"humidity": None, name: "23 °C"}})
    assert fault.startswith(f"air.{name}: ")
    assert '"23 °C" is above' in fault
    assert faults({"air": {"humidity": None, name: "14 °C"}}) == []


def test_dew_point_beside_a_humidity():
    (fault,) = faults({"air": {"dew_point": "8 °C"}})
    assert "air.dew_point: is given beside air.humidity" in fault


# 3: the unit that was meant ------------------------------------------------------------------------------------------


def test_humidity_as_fraction_or_percent():
    """0.45 and 45 % are the same; 45 without a sign is refused, 0.45 % is questioned."""
    written = ["45 %", "0.45", 0.45]
    found = [parse_setup(amended({"air": {"humidity": text}})).estimates["air.humidity"].centre for text in written]
    assert found == pytest.approx([0.45] * 3, rel=1e-15)
    (fault,) = faults({"air": {"humidity": "45"}})
    assert fault.startswith("air.humidity: ")
    sentence = said(told({"air": {"humidity": "0.45 %"}}), "air.humidity was read as")
    assert "0.45 without the percent sign is 45 %" in sentence
    unsaid(told({"air": {"humidity": "0.45"}}), "air.humidity")


def test_fahrenheit_for_celsius():
    sentence = said(told({"air": {"temperature": "68 °C"}}), "air.temperature was read as 68 °C")
    assert "68 °F is 20 °C" in sentence
    unsaid(told({"air": {"temperature": "68 °F"}}), "air.temperature")


@pytest.mark.parametrize(("wrong", "right"), [("101.3 hPa", "101.3 kPa"), ("760 hPa", "760 mmHg")])
def test_kilopascal_for_hectopascal(wrong, right):
    """760 hPa is a pressure of 2300 m: without the altitude it could be true, with it it is told."""
    changes = {"air": {"pressure": wrong, "altitude": "50 m"}}
    sentences = [s for s in told(changes) if "Was it written in kPa" in s or "does not belong to an altitude" in s]
    assert sentences
    quiet = {"air": {"pressure": right, "altitude": "50 m"}}
    unsaid(told(quiet), "air.pressure was read as")
    unsaid(told(quiet), "altitude")


# 4: outside the range of CIPM-2007 -----------------------------------------------------------------------------------


@pytest.mark.parametrize(
    "air",
    [
        pytest.param({"temperature": "28 °C"}, id="warm"),
        pytest.param({"temperature": "14 °C"}, id="cold"),
        pytest.param({"pressure": "590 hPa", "altitude": "4300 m"}, id="high up"),
    ],
)
def test_outside_the_range_of_the_formula(air):
    """Picard et al. (2008), section 3: 600 to 1100 hPa, 15 to 27 °C; beyond it 22e-6 is not claimed."""
    sentence = said(told({"air": air}), "outside the range of CIPM-2007")
    assert "600 to 1100 hPa, 15 to 27 °C" in sentence
    outside = air_density(parse_setup(amended({"air": air})))
    assert outside.u / outside.density == pytest.approx(2e-4, rel=1e-6)


@pytest.mark.parametrize("temperature", ["15 °C", "27 °C"])
def test_inside_the_range_of_the_formula(temperature):
    unsaid(told({"air": {"temperature": temperature}}), "CIPM-2007")
    inside = air_density(parse_setup(amended({"air": {"temperature": temperature}})))
    assert inside.u / inside.density == pytest.approx(22e-6, rel=1e-6)


def test_outside_the_range_of_the_approximation():
    """OIML R 111-1:2004, E.3: 900 to 1100 hPa, 10 to 30 °C, below 80 %."""
    said(told({"air": {"formula": "OIML R 111-1", "humidity": "85 %", "co2": None}}), "outside the range of the OIML")
    unsaid(told({"air": {"formula": "OIML R 111-1", "co2": None}}), "outside the range")


# 5: bulk density -----------------------------------------------------------------------------------------------------


def test_bulk_density_is_refused():
    (fault,) = faults({"load": {"density": "600 kg/m³", "density_kind": "bulk"}})
    assert fault.startswith("load.density_kind: ")
    assert "counts the air between the grains" in fault
    assert "gas-displacement density" in fault
    assert faults({"load": {"density": "1300 kg/m³", "density_kind": "gas-displacement"}}) == []


def test_a_density_like_that_of_a_powder_is_questioned():
    light, compact = ({"density": text, "density_kind": "gas-displacement"} for text in ("180 kg/m³", "920 kg/m³"))
    sentence = said(told({"load": light}), "foam's or a powder's")
    assert "load.open_cell_fraction" in sentence
    unsaid(told({"load": compact}), "foam's or a powder's")
    envelope = {"density": "180 kg/m³", "density_kind": "envelope", "open_cell_fraction": "0 %"}
    unsaid(told({"load": envelope}), "foam's or a powder's")


# 6: the density of a foam's polymer ----------------------------------------------------------------------------------

FOAM = {"mass": "1.294 78 g", "volume": "40.46 cm³", "density_kind": "gas-displacement"}


def test_polymer_density_of_a_closed_cell_foam():
    """1.294 78 g in 40.46 cm³ is 32 kg/m³, not the polymer's 1050 kg/m³."""
    sentence = said(told({"load": {**FOAM, "density": "1050 kg/m³"}}), "load.volume", "load.density")
    assert "polymer" in sentence
    assert "1050 kg/m³" in sentence
    unsaid(told({"load": {**FOAM, "density": "32 kg/m³"}}), "polymer")
    unsaid(told({"load": {**FOAM, "density": None, "density_kind": None}}), "polymer")


@pytest.mark.parametrize("open_cells", ["0 %", "10 %", "100 %"])
def test_a_foam_that_is_said_to_be_one(open_cells):
    """A volume that was worked out from the envelope density cannot contradict it."""
    load = {"mass": "1.29 g", "density": "32 kg/m³", "density_kind": "envelope", "open_cell_fraction": open_cells}
    unsaid(told({"load": {**load, "solid_density": "1050 kg/m³"}}), "polymer")


# 8: a sealed vessel --------------------------------------------------------------------------------------------------

FLASK = {"mass": "60 g", "density": "2230 kg/m³", "outer_volume": "130 cm³"}
CHANGE = {"pressure_change": {"value": "1 hPa", "u": "0.1 hPa"}}


def test_a_vessel_kept_shut_displaces_air_with_its_outer_volume():
    """1 hPa on 130 cm³ is 0.154 mg: 0.118 93 mg per hPa and 100 cm³ at 20 °C (CIPM-2007), so 0.1184 mg at 21.4 °C."""
    shut = {"container": {**FLASK, "closed": "kept shut"}}
    change = buoyancy({**shut, "cycle": CHANGE}).mean_error - buoyancy(shut).mean_error
    assert change == pytest.approx(-1.30 * 0.11836e-6, rel=1e-3)
    assert any("the outer volume of a container kept shut" in way for way in buoyancy({**shut, "cycle": CHANGE}).ways)
    # what is inside displaces nothing
    foam = buoyancy({**shut, "load": {"density": "100 kg/m³"}}).mean_error
    assert foam == pytest.approx(buoyancy(shut).mean_error, rel=1e-12)
    assert "container.density" in result_of(shut).unused


@pytest.mark.parametrize("closed", ["never", "each time"])
def test_an_open_vessel_displaces_air_with_its_walls(closed):
    glass, still = 60e-3 / 2230, {"container": {**FLASK, "closed": closed}}
    changing = buoyancy({**still, "cycle": CHANGE})
    change = changing.mean_error - buoyancy(still).mean_error
    assert change == pytest.approx(-glass / 1e-4 * 0.11836e-6, rel=1e-3)
    assert any("the walls" in way for way in changing.ways)


def test_a_vessel_kept_shut_asks_for_its_outer_volume():
    result = result_of({"container": {**FLASK, "outer_volume": None, "closed": "kept shut"}, "cycle": CHANGE})
    lacks = {missing.effect.name: missing.lacks for missing in result.not_assessed}
    assert lacks["buoyancy"] == ("container.outer_volume",)


# 9: mass and conventional mass ---------------------------------------------------------------------------------------


def test_mass_against_conventional_mass():
    """Water of 5 g: 5 g (1.2/998.2 - 1.2/8000)/(1 - 1.2/8000) = 5.26 mg apart (OIML D 28, clause 5)."""
    water = {"load": {"density": "998.2 kg/m³", "density_kind": "liquid"}}
    sentence = said(told(water), "conventional mass", "target.measurand")
    assert "5 g and 4.995 g" in sentence
    unsaid(told({}), "onventional mass of this load")
    unsaid(told({"load": {"density": "7950 kg/m³"}}), "onventional mass of this load")


# 11: another adjusting weight, another air ---------------------------------------------------------------------------


def test_an_adjusting_weight_of_another_density():
    sentence = said(told({"balance": {"adjusting_weight_density": "7700 kg/m³"}}), "adjusting weight has 7700 kg/m³")
    assert "conventional mass" in sentence
    unsaid(told({}), "The adjusting weight has")


def test_adjusted_in_other_air():
    """Adjusted at 943.1 hPa in air of 1.111 kg/m³: 11 µg/g against 1.2 kg/m³."""
    said(told({}), "adjusted in air of 1.111 kg/m³", "not 1.2 kg/m³")
    unsaid(told({"air": {**STANDARD_AIR, "altitude": "10 m"}}), "adjusted in air")


def test_the_air_of_the_adjustment_is_not_taken_as_known():
    assumed = {assumption.name for assumption in result_of({"adjusted": {"when": None}}).assumed}
    assert {"adjusted.temperature_change", "adjusted.pressure_change"} <= assumed
    known = {assumption.name for assumption in result_of({}).assumed}
    assert not {name for name in known if name.startswith("adjusted.")}


def test_what_is_said_of_the_air_at_the_adjustment_is_true():
    """Unknown air about 1.199 kg/m³: a sentence that it was not 1.2 kg/m³ would be about draws, not about the room."""
    unknown = {"air": {**STANDARD_AIR, "altitude": "10 m"}, "adjusted": {"when": None}}
    unsaid(told(unknown), "adjusted in air of 1.199 kg/m³")


# 12: tare taken in other air -----------------------------------------------------------------------------------------


@pytest.mark.parametrize("density", [None, "2230 kg/m³"], ids=["density unknown", "density known"])
def test_tare_taken_in_the_same_air_is_said(density):
    sentence = said(told({"container": {"mass": "60 g", "density": density}}), "tare's air was taken as that of the")
    assert "cycle.pressure_change" in sentence


@pytest.mark.parametrize(
    "change",
    [
        pytest.param({"cycle": CHANGE}, id="change within the weighing"),
        pytest.param({"tare": {"air": {"pressure": "942 hPa"}}}, id="the tare's air"),
    ],
)
def test_tare_taken_in_other_air(change):
    with_tare = {"container": FLASK, **change}
    unsaid(told(with_tare), "tare's air was taken")
    assert abs(buoyancy(with_tare).mean_error) > 0.02e-6  # 1 hPa on 27 cm³ of glass


def test_without_a_container_there_is_no_tare():
    unsaid(told({}), "tare")


# 16: an expanded uncertainty as a standard one -----------------------------------------------------------------------


@pytest.mark.parametrize(
    ("entry", "problem"),
    [
        pytest.param("0.5 hPa", "does not say what it is", id="bare"),
        pytest.param({"U": "0.5 hPa"}, "U is given without k", id="U without k"),
        pytest.param({"u": "0.5 hPa", "k": 2}, "k goes with U, not with u", id="u with k"),
        pytest.param({"u": "0.5 hPa", "half_width": "1 hPa"}, "are given at once", id="two"),
    ],
)
def test_what_a_spread_is_must_be_said(entry, problem):
    (fault,) = faults({"sensors": {"pressure": entry}})
    assert fault.startswith("sensors.air.pressure: ")
    assert problem in fault


@pytest.mark.parametrize(
    ("entry", "u"),
    [
        ({"u": "0.5 hPa"}, 50.0),
        ({"U": "0.5 hPa", "k": 2}, 25.0),
        ({"half_width": "0.5 hPa"}, 50 / 3**0.5),  # JCGM 100:2008, (7)
    ],
)
def test_the_three_ways_to_say_a_spread(entry, u):
    estimate = parse_setup(amended({"sensors": {"pressure": entry}})).estimates["sensors.air.pressure"]
    assert estimate.u == pytest.approx(u, rel=1e-12)


# 17: readability as repeatability; s from elsewhere ------------------------------------------------------------------


def test_readability_is_not_repeatability():
    sentence = said(told({"balance": {"repeatability": "10 µg"}}), "repeatability equals the scale interval")
    assert "ten net weighings" in sentence
    unsaid(told({}), "readability")


def test_where_the_repeatability_was_found():
    """Nothing said, it is taken as found elsewhere, so that a measured disturbance comes on top, and listed so."""
    scatter = {"scatter_on": "15 µg", "scatter_off": "9 µg"}
    elsewhere = result_of({"balance": scatter})
    assumed = {assumption.name: assumption.word for assumption in elsewhere.assumed}
    assert assumed["balance.repeatability_from"] == "elsewhere"
    assert row(elsewhere, "disturbance").u == pytest.approx(12e-9, rel=3e-3)  # sqrt(15² - 9²)
    here = result_of({"balance": {**scatter, "repeatability_from": "here"}})
    assert "balance.repeatability_from" not in {assumption.name for assumption in here.assumed}
    assert "disturbance" not in {found.name for found in here.effects}


# 18: the smallest mass is a net one ----------------------------------------------------------------------------------


def test_minimum_weight_applies_to_the_net_mass():
    """USP <41>: 2 x 15 µg/0.0010 = 30 mg; 20 mg in a flask of 60 g is below it."""
    sentence = said(told({"container": FLASK, "load": {"mass": "20 mg"}}), "minimum weight 30 mg")
    assert "net mass (20 mg)" in sentence
    assert "gross load" in sentence
    unsaid(told({"container": FLASK, "load": {"mass": "40 mg"}}), "minimum weight")


# 20: a cold load below the dew point ---------------------------------------------------------------------------------


def test_a_cold_load_below_the_dew_point():
    """21.4 °C and 42 %: the dew point is 8.0 °C (CoolProp's humid air at 943.1 hPa); a load at 4.4 °C gathers water."""
    cold = {"load": {"warmer_by": "-17 K"}}
    sentence = said(told(cold), "below the dew point")
    assert "4.4 °C" in sentence
    dew_point = HAPropsSI("D", "T", 273.15 + 21.4, "P", 94310, "R", 0.42) - 273.15
    assert float(re.search(r"dew point .*?([0-9.]+) °C", sentence)[1]) == pytest.approx(dew_point, abs=0.02)
    assert "Let it warm up closed" in sentence
    said(told({**cold, "cycle": {"duration": "1 min"}}), "below the dew point")  # once, assessed or not
    unsaid(told({"load": {"warmer_by": "-12 K"}}), "dew point")
    unsaid(told({"load": {"warmer_by": "17 K"}}), "dew point")
    unsaid(told({"air": {"humidity": "20 %"}, "load": {"warmer_by": "-17 K"}}), "dew point")


def test_the_container_is_cold():
    vessel = {"mass": "20 g", "density": "2500 kg/m³", "warmer_by": "-17 K"}
    said(told({"container": vessel}), "below the dew point", "4.4 °C")
    unsaid(told({"container": {**vessel, "warmer_by": "0 K"}}), "dew point")
