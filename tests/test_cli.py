"""The command line from outside: what it prints, where, and with which exit code."""

import json
import os
import subprocess
import sys
from pathlib import Path

import pytest
from click.testing import CliRunner

import envcorr
from envcorr import cli as command
from envcorr.jobs import room as room_job

EXAMPLE = Path(envcorr.__file__).parent / "examples" / "powder_station.toml"
FAST = ("--draws", "16384")

# An invented case: a light foam, 21.4 °C, 42 %, 400 ppm of CO2, 943.10 hPa; its air by CIPM-2007 (Picard et al.,
# Metrologia 45 (2008) 149) in an independent computation is 1.111 01 kg/m³
FOAM_AIR = 1.11101
FOAM = """
title = "Light foam (invented)"
[target]
resolution = "1 mg"
[air]
temperature = "21.4 °C"
humidity = "42 %"
co2 = "400 ppm"
pressure = "943.10 hPa"
altitude = "620 m"
[adjusted]
when = "just before"
[load]
mass = "1.29478 g"
density = "32 kg/m³"
density_kind = "envelope"
open_cell_fraction = 0
[balance]
repeatability = "6 µg"
scale_interval = "10 µg"
adjusting_weight_density = "8000 kg/m³"
sensitivity_temperature_coefficient = "1 ppm/K"
"""
FOAM_AIR_OPTIONS = (
    *("--temperature", "21.4 °C", "--humidity", "42 %"),
    *("--co2", "400 ppm", "--pressure", "943.10 hPa"),
)


@pytest.fixture
def foam(tmp_path):
    path = tmp_path / "foam.toml"
    path.write_text(FOAM, encoding="utf-8")
    return str(path)


def run(*args, **environment):
    return CliRunner().invoke(command.cli, [str(arg) for arg in args], prog_name="envcorr", env=environment)


def outside(*args, **environment):
    """Run it as a program of its own."""
    return subprocess.run(
        [sys.executable, "-m", "envcorr", *map(str, args)],
        capture_output=True,
        text=True,
        encoding="utf-8",
        timeout=120,
        env={**os.environ, "PYTHONIOENCODING": "utf-8", **environment},
    )


def parsed(result):
    """Return the JSON of a result that knows no NaN and no infinity."""

    def refuse(word):
        raise AssertionError(f"{word} in JSON")

    assert result.exit_code == 0, result.stderr
    return json.loads(result.stdout, parse_constant=refuse)


# air ---------------------------------------------------------------------------------------------------------------


def test_air_of_the_foam():
    found = parsed(run("air", *FOAM_AIR_OPTIONS, "--json"))["result"]
    assert found["air_density"]["value"] == pytest.approx(FOAM_AIR, abs=5e-6)
    assert found["air_density"]["unit"] == "kg/m³"
    # the formula's own relative standard uncertainty, 22e-6 (Picard et al., table 2)
    assert found["air_density"]["u"] == pytest.approx(22e-6 * FOAM_AIR, rel=1e-3)
    assert found["formula"] == "CIPM-2007"
    page = run("air", *FOAM_AIR_OPTIONS).stdout
    assert "1.11101" in page
    assert "kg/m³" in page


def test_air_with_an_uncertainty_in_a_table():
    options = ("--temperature", "20 °C", "--humidity", "50 %", "--co2", "400 ppm")
    found = parsed(run("air", *options, "--pressure", '{value = "1013.25 hPa", u = "1 hPa"}', "--json"))["result"]
    pressure = next(row for row in found["budget"] if row["name"] == "air.pressure")
    # relative sensitivity to pressure: 1e-5 per Pa (Picard et al., Metrologia 45 (2008) 149, table 2, rounded)
    relative = pressure["contribution"]["value"] / found["air_density"]["value"]
    assert relative == pytest.approx(100 * 1e-5, rel=0.02)
    assert found["air_density"]["u"] > pressure["contribution"]["value"]


def test_air_reads_options_set_and_file_alike(foam):
    options = parsed(run("air", *FOAM_AIR_OPTIONS, "--json"))["result"]
    names = ("temperature=21.4 °C", "humidity=42 %", "co2=400 ppm", "pressure=943.10 hPa")
    by_set = run("air", *(part for name in names for part in ("--set", f"air.{name}")), "--json")
    assert parsed(by_set)["result"] == options
    assert parsed(run("air", "--setup", foam, "--json"))["result"]["air_density"] == options["air_density"]
    other = parsed(run("air", "--setup", foam, "--temperature", "25 °C", "--json"))["result"]
    assert other["air_density"]["value"] < options["air_density"]["value"]


def test_air_from_sea_level_pressure_dew_point_and_formula():
    # ISO 2533: at 620 m the standard atmosphere has 940.9 hPa, at sea level 1013.25 hPa (0.9286 of it, printed tables)
    options = ("--temperature", "21.4 °C", "--dew-point", "8 °C", "--co2", "400 ppm")
    station = parsed(run("air", *options, "--pressure", "940.9 hPa", "--json"))["result"]["air_density"]["value"]
    reduced = ("--sea-level-pressure", "1013.25 hPa", "--altitude", "620 m")
    assert parsed(run("air", *options, *reduced, "--json"))["result"]["air_density"]["value"] == pytest.approx(
        station, rel=2e-4
    )
    oiml = parsed(run("air", *FOAM_AIR_OPTIONS, "--formula", "OIML R 111-1", "--json"))["result"]
    # OIML R 111-1:2004, (E.3-1), evaluated by hand
    by_hand = (0.34848 * 943.10 - 0.009 * 42 * 2.718281828459045 ** (0.061 * 21.4)) / (273.15 + 21.4)
    assert oiml["air_density"]["value"] == pytest.approx(by_hand, rel=1e-9)
    assert oiml["formula"] == "OIML R 111-1"


def test_air_of_a_given_density():
    found = parsed(run("air", "--density", '{value = "1.2 kg/m³", u = "0.01 kg/m³"}', "--json"))["result"]
    assert found["air_density"]["value"] == pytest.approx(1.2)
    assert found["air_density"]["u"] == pytest.approx(0.01)
    assert found["relative_humidity"] is None
    assert "exact" in run("air", "--density", "1.2 kg/m³").stdout


@pytest.mark.parametrize(
    ("args", "says"),
    [
        (["air"], ["air.temperature", "air.pressure", "air.humidity"]),
        (["air", "--temperature", "1013 hPa"], ["air.temperature", "a temperature is wanted", "is a pressure"]),
        (["air", "--set", "air.humdity=45 %"], ["Did you mean air.humidity"]),
        (["air", "--set", "air.humidity"], ["has no value"]),
        (["air", *FOAM_AIR_OPTIONS, "--dew-point", "5 °C"], ["air.dew_point", "Keep one"]),
        (["air", "--setup", "not there.toml"], ["is not there"]),
        (["room", "not there.toml"], ["is not there"]),
        (["room"], ["SETUP.toml"]),
        (["room", str(EXAMPLE), "--draws", "0"], ["--draws"]),
        (["room", str(EXAMPLE), "--seed", "x"], ["--seed"]),
        (["room", str(EXAMPLE), "--set", "load.mass=-5 g"], ["load.mass", "below"]),
        (["room", str(EXAMPLE), "--set", "load.density_kind=bulk"], ["bulk", "gas-displacement density"]),
        (["explain", "load.densty"], ["load.densty", "Did you mean load.density"]),
        (["explain", "bouyancy"], ["Did you mean buoyancy"]),
        (["explain", "temperature"], ["Did you mean air.temperature"]),
        (["explain", "qqqqqqq"], ["envcorr explain, without a name"]),
        (["weigh"], ["weigh"]),
    ],
)
def test_unusable_input_exits_2_with_nothing_on_standard_output(args, says):
    result = run(*args)
    assert result.exit_code == 2
    assert result.stdout == ""
    for words in says:
        assert words in result.stderr
    assert "Traceback" not in result.stderr


def test_every_fault_is_named_at_once(tmp_path):
    path = tmp_path / "many.toml"
    path.write_text('[air]\ntemperature = "20 hPa"\nhumidty = "45 %"\n', encoding="utf-8")
    result = run("room", path)
    assert result.exit_code == 2
    for name in ("air.temperature", "air.humidty", "load.mass", "target.resolution"):
        assert name in result.stderr


def test_a_message_holds_nothing_that_a_terminal_would_obey(tmp_path):
    path = tmp_path / "escape.toml"
    path.write_text('["a\\u001b[31mb"]\nx = 1\n', encoding="utf-8")
    result = run("room", path)
    assert result.exit_code == 2
    assert "\x1b" not in result.stderr


# room --------------------------------------------------------------------------------------------------------------


@pytest.mark.parametrize(
    ("changes", "mass", "volume"),
    [
        ([], 1.29478, 1.29478 / 0.032),
        # a tenth of the cells open: their gas, and only that, is not displaced; walls of 1050 kg/m³
        (
            ["load.mass=1.29028 g", "load.open_cell_fraction=10 %", "load.solid_density=1050 kg/m³"],
            1.29028,
            1.29028 / 0.032 - 0.1 * (1.29028 / 0.032 - 1.29028 / 1.050),
        ),
        (
            ["load.mass=1.25115 g", "load.density=1050 kg/m³", "load.density_kind=gas-displacement"],
            1.25115,
            1.25115 / 1.050,
        ),
    ],
)
def test_errors_of_the_foam(foam, changes, mass, volume):
    """The reading less the mass, in closed form (OIML D 28; OIML R 111-1, C.5), masses in g, volumes in mL."""
    density = FOAM_AIR * 1e-3
    factor = (1 - density / 8.000) / (1 - 0.0012 / 8.000) * (1 - 0.0012 / 8.000)
    expected = 1e3 * ((mass - density * volume) / factor - mass)
    options = [part for change in changes for part in ("--set", change)]
    if "gas-displacement" in " ".join(changes):
        text = FOAM.replace("open_cell_fraction = 0\n", "")
        Path(foam).write_text(text, encoding="utf-8")
    found = parsed(run("room", foam, *options, *FAST, "--json"))["result"]
    assert found["as_read"]["whole"]["mean_error"]["value"] == pytest.approx(expected, abs=2e-3)
    assert found["effects"][0]["correction"]["value"] == pytest.approx(-expected, abs=2e-3)


def test_errors_of_the_foam_are_those_of_an_independent_computation(foam):
    found = parsed(run("room", foam, *FAST, "--json"))["result"]
    assert found["as_read"]["whole"]["mean_error"]["value"] == pytest.approx(-44.78, abs=5e-3)
    page = run("room", foam, *FAST).stdout
    assert "add +44.78" in page
    assert "REACHED ONCE CORRECTED" in page


def test_the_example_ends_in_a_verdict():
    result = run("room", EXAMPLE, *FAST)
    assert result.exit_code == 0
    assert result.stderr == ""
    assert "(invented)" in result.stdout
    assert "REACHED ONCE TREATED" in result.stdout
    assert "Given and not used" not in result.stdout


UNCHARGED = ("--set", "static.surface_charge=1 nC/m²")


def test_a_treatment_that_decides_is_said_to():
    words = "Without it, the corrected weighing would reach the target."
    assert words in " ".join(run("room", EXAMPLE, *FAST).stdout.split())
    # a beaker with next to no charge reaches it anyhow
    easy = run("room", EXAMPLE, *FAST, *UNCHARGED).stdout
    assert "REACHED ONCE CORRECTED" in easy
    assert words not in " ".join(easy.split())


def test_the_page_answers_first():
    page = run("room", EXAMPLE, *FAST).stdout
    order = [
        "Powder station",
        "REACHED",
        "both must reach 95 %",
        "First to improve",
        "Correction",
        "What each effect does",
        "What to do about it",
        "The totals",
        "What a quantity known exactly would leave",
        "Assumed, because nothing was said",
        "Smallest net mass",
        "Monte Carlo and first order",
        "Mind this",
        "seed 0",
    ]
    places = [page.index(words) for words in order]
    assert places == sorted(places)


def test_what_is_lacking_assumed_and_unused_is_listed(foam):
    page = run("room", foam, *FAST, "--set", "cycle.duration=2 min").stdout
    assert "Not assessed" in page
    assert "lacks balance.nonlinearity" in page
    assert "Given and not used\n  cycle.duration." in page
    assert "air.formula" in page  # its default counts, so it is assumed


def test_a_warning_is_announced_beside_the_verdict(foam):
    page = run("room", foam, *FAST, "--set", "balance.repeatability=10 µg").stdout
    assert page.index("Mind the warning further down.") < page.index("First to improve")
    assert "! Warning: The repeatability equals the scale interval" in page


@pytest.mark.parametrize("columns", [80, 120])
@pytest.mark.parametrize("args", [["room", str(EXAMPLE), *FAST], ["air", *FOAM_AIR_OPTIONS], ["explain", "buoyancy"]])
def test_no_line_is_wider_than_the_terminal(args, columns):
    lines = run(*args, COLUMNS=str(columns)).stdout.splitlines()
    longest = max(map(len, lines))
    assert columns - 40 < longest <= columns
    assert not any(line.endswith(" ") for line in lines)


@pytest.mark.parametrize(("answer", "strict", "code"), [("not reached", True, 3), ("not reached", False, 0)])
def test_strict_on_a_target_out_of_reach(foam, answer, strict, code):
    args = ["room", foam, *FAST, "--set", "target.resolution=1 µg", "--json", *(["--strict"] if strict else [])]
    result = run(*args)
    assert result.exit_code == code
    assert json.loads(result.stdout)["result"]["verdict"] == answer


def test_strict_on_what_is_undecided_and_on_what_is_reached(foam):
    assert run("room", foam, *FAST, "--strict").exit_code == 0
    Path(foam).write_text(FOAM.replace('repeatability = "6 µg"\n', ""), encoding="utf-8")
    result = run("room", foam, *FAST, "--strict")
    assert result.exit_code == 3
    assert "UNDECIDED" in result.stdout
    waived = run("room", foam, *FAST, "--strict", "--set", 'target.waived=["repeatability"]')
    assert waived.exit_code == 0
    assert "Waived in the set-up" in " ".join(waived.stdout.split())


def test_json_of_a_room_check_is_complete():
    document = parsed(run("room", EXAMPLE, *FAST, "--json"))
    assert list(document) == ["envcorr", "command", "inputs", "assumed", "unused", "result", "notices"]
    assert document["command"] == "room"
    assert document["inputs"]["load.mass"] == {"value": 5000.0, "unit": "mg", "written": "5 g"}
    assert document["inputs"]["sensors.air.temperature"]["u"] == pytest.approx(0.2)  # U = 0.4 K, k = 2
    found = document["result"]
    assert found["verdict"] == "reached once treated"
    for state in ("as_read", "corrected", "treated"):
        for scope, allowed in (("surroundings", 0.05), ("whole", 0.1)):
            total = found[state][scope]
            low, high = total["coverage_interval"]["value"]
            assert low < total["mean_error"]["value"] < high
            assert total["allowed"]["value"] == pytest.approx(allowed)
            assert total["passes"] is (total["e95"]["value"] < allowed)
    for scope in ("surroundings", "whole"):
        shares = [effect["share"][scope] or 0.0 for effect in found["effects"]]
        assert sum(shares) + found["interaction"]["share"][scope] == pytest.approx(1.0)
    for effect in found["effects"]:
        assert effect["mean_error"]["unit"] == "mg"
        assert (effect["share"]["surroundings"] is None) is effect["own"]
    assessed = {effect["name"] for effect in found["effects"]}
    assert {"buoyancy", "disturbance", "repeatability", "nonlinearity", "eccentric_loading"} <= assessed
    assert not assessed & {one["name"] for one in found["not_assessed"]}
    assert found["minimum_weight"]["repeatability"]["value"] == pytest.approx(
        2 * 22e-3 / 1e-3
    )  # USP <41>: 2 s / 0.10 %, s being 20 µg and the hood's sqrt(22² - 20²) µg
    assert found["minimum_weight"]["relative_accuracy"] == pytest.approx(0.001)
    assert found["first_order"]["error"]["dof"] is None  # infinite
    assert found["draws"] == 16384


def test_json_says_why_there_is_no_minimum_weight(foam):
    found = parsed(run("room", foam, *FAST, "--json"))["result"]["minimum_weight"]
    assert found["as_read"] is None
    assert "air buoyancy" in found["as_read_reason"]
    # USP <41>, from memory: 2 s / 0.10 %
    assert found["repeatability"]["value"] == pytest.approx(12.0)


def test_json_lists_what_is_lacking_and_assumed(foam):
    document = parsed(run("room", foam, *FAST, "--json", "--set", "cycle.duration=2 min"))
    lacking = {one["name"]: one["lacks"] for one in document["result"]["not_assessed"]}
    assert lacking["nonlinearity"] == ["balance.nonlinearity"]
    assert document["unused"] == ["cycle.duration"]
    within = next(one for one in document["assumed"] if one["name"] == "target.within")
    assert within["value"] == 50.0
    assert within["unit"] == "%"
    assert within["source"]


def test_the_same_seed_gives_the_same_bytes_and_another_one_does_not(foam):
    args = ("room", foam, *FAST, "--json", "--set", 'air.pressure={value = "943.1 hPa", u = "1 hPa"}')
    first, second, other = run(*args), run(*args), run(*args, "--seed", "7")
    assert first.stdout_bytes == second.stdout_bytes
    u = [parsed(result)["result"]["as_read"]["whole"]["u"]["value"] for result in (first, other)]
    assert u[0] != u[1]
    assert u[0] == pytest.approx(u[1], rel=0.02)


def test_as_read_ranks_what_spoils_the_reading_itself():
    corrected, as_read = (
        parsed(run("room", EXAMPLE, *FAST, *UNCHARGED, "--json", *more))["result"] for more in ([], ["--as-read"])
    )
    assert corrected["basis"] == "corrected"
    assert as_read["basis"] == "as_read"
    assert as_read["first_to_improve"] == "buoyancy"  # -4.8 mg uncorrected
    assert corrected["first_to_improve"] == "repeatability"  # 20 µg, the largest that is left
    assert "surroundings as read" in run("room", EXAMPLE, *FAST, "--as-read").stdout


# faults, interruptions, streams --------------------------------------------------------------------------------


def broken(*args, **kwargs):
    raise ZeroDivisionError("division by zero\nin two lines")


def test_an_internal_fault_is_one_short_sentence(foam, monkeypatch):
    monkeypatch.setattr(room_job, "check_room", broken)
    result = run("room", foam)
    assert result.exit_code == 1
    assert result.stdout == ""
    assert "a fault of the program" in result.stderr
    assert "ZeroDivisionError: division by zero in two lines" in result.stderr
    assert "Traceback" not in result.stderr


def test_an_internal_fault_shows_where_when_asked(foam, monkeypatch):
    monkeypatch.setattr(room_job, "check_room", broken)
    result = run("room", foam, ENVCORR_DEBUG="1")
    assert isinstance(result.exception, ZeroDivisionError)


def test_an_interruption_exits_130(foam, monkeypatch, capsys):
    def interrupted(*args, **kwargs):
        raise KeyboardInterrupt

    monkeypatch.setattr(room_job, "check_room", interrupted)
    with pytest.raises(SystemExit) as stopped:
        command.main(["room", foam])
    assert stopped.value.code == 130
    assert capsys.readouterr().out == ""


@pytest.mark.parametrize(
    ("args", "code"),
    [(["--version"], 0), (["explain", "buoyancy"], 0), (["explain", "nothing.like.it"], 2), (["room"], 2)],
)
def test_exit_codes_of_the_program(args, code):
    result = outside(*args)
    assert result.returncode == code
    assert (result.stdout == "") is (code != 0)
    assert (result.stderr == "") is (code == 0)


def test_strict_exit_code_of_the_program(foam):
    result = outside("room", foam, *FAST, "--strict", "--set", "target.resolution=1 µg")
    assert result.returncode == 3
    assert "NOT REACHED" in result.stdout
    assert result.stderr == ""


def test_version():
    assert run("--version").stdout == f"envcorr {envcorr.__version__}\n"


def test_a_reader_that_stops_early_is_no_fault():
    program = [sys.executable, "-m", "envcorr", "explain"]
    with subprocess.Popen(program, stdout=subprocess.PIPE, stderr=subprocess.PIPE) as process:
        process.stdout.close()
        assert process.stderr.read() == b""
        assert process.wait(60) == 0


def test_an_encoding_without_the_signs_gets_others():
    page = outside("explain", "air.temperature", PYTHONIOENCODING="ascii")
    assert page.returncode == 0
    assert page.stdout.isascii()
    assert "20.3 degC" in page.stdout
    document = outside("air", "--density", "1.2 kg/m³", "--json", PYTHONIOENCODING="ascii")
    assert document.stdout.isascii()
    assert json.loads(document.stdout)["result"]["air_density"]["unit"] == "kg/m³"


@pytest.mark.parametrize("environment", [{}, {"NO_COLOR": "1"}, {"FORCE_COLOR": "1"}])
def test_no_colour_where_the_output_is_no_terminal(environment):
    assert "\x1b" not in outside("explain", "buoyancy", **environment).stdout


def test_help_loads_nothing_heavy():
    """Only the command-line library; not even numpy, so that --help stays quick."""
    program = "import sys, envcorr.cli; print(*sorted({name.partition('.')[0] for name in sys.modules}))"
    loaded = subprocess.run([sys.executable, "-c", program], capture_output=True, text=True, check=True).stdout.split()
    assert "click" in loaded
    assert not {"numpy", "scipy", "pint", "rich", "CoolProp"} & set(loaded)


@pytest.mark.parametrize("args", [[], ["air"], ["room"], ["explain"]])
def test_help(args):
    result = run(*args, "--help")
    assert result.exit_code == 0
    assert "Usage: envcorr" in result.stdout


def test_air_outside_the_formulas_range_says_whose_density_it_is():
    hot = run("air", "--temperature=40 °C", "--pressure=1000 hPa", "--humidity=40 %").stdout
    assert "CIPM-2007 scaled to CoolProp's humid air" in hot
    assert "2.2e-5" in " ".join(hot.split())  # whose uncertainty is no longer claimed
    room = run("air", "--temperature=21 °C", "--pressure=1000 hPa", "--humidity=40 %").stdout
    assert "CoolProp" not in room
