"""The command that explains every name."""

import pytest

from envcorr.catalogue import CATALOGUE
from tests.test_cli import parsed, run


@pytest.mark.parametrize("name", [*CATALOGUE.quantities, *CATALOGUE.choices, *CATALOGUE.effects])
def test_every_name_can_be_explained(name):
    result = run("explain", name)
    assert result.exit_code == 0, result.stderr
    assert result.stdout.startswith(f"{name}: ")
    assert max(map(len, result.stdout.splitlines())) <= 80
    found = parsed(run("explain", name, "--json"))["result"]
    assert found["name"] == name


def test_explain_a_quantity():
    page = run("explain", "load.density").stdout
    for words in ("1050 kg/m³", "0.5 kg/m³ to 23000 kg/m³", "[load]", "the same in every repeat", "air buoyancy"):
        assert words in page
    assumed = run("explain", "air.co2").stdout
    assert "400 ppm to 800 ppm" in assumed
    assert "occupied room" in assumed
    assert "refused" in run("explain", "sensors.air.pressure").stdout
    assert "unsigned bound" in run("explain", "balance.nonlinearity").stdout
    assert "at the tare" in run("explain", "tare.air.pressure").stdout


def test_explain_a_choice_and_an_effect():
    choice = run("explain", "load.density_kind").stdout
    assert "bulk (refused)" in choice
    assert "gas pycnometer" in choice
    effect = run("explain", "disturbance").stdout
    for words in ("JCGM 100:2008", "switch off or shield the source", "Caution", "balance.scatter_on", "The test"):
        assert words in effect


def test_explain_without_a_name_lists_everything():
    page = run("explain").stdout
    listed = [name for name in CATALOGUE.words() if name in page]
    assert listed == CATALOGUE.words()
    assert all(name in page for name in CATALOGUE.effects)
    document = parsed(run("explain", "--json"))["result"]
    assert {one["name"] for one in document["effects"]} == set(CATALOGUE.effects)
