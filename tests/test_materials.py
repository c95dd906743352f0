"""Densities by name against handbooks and reference equations."""

from __future__ import annotations

import json

import pytest
from click.testing import CliRunner
from iapws import IAPWS95

from envcorr import materials
from envcorr.cli import cli
from envcorr.errors import InputError
from envcorr.intake.setup_file import parse_setup

K0 = 273.15
REST = {"target": {"resolution": "0.1 mg"}, "load": {"mass": "5 g"}}


@pytest.mark.parametrize("name", materials.names())
def test_every_entry_is_complete(name):
    material = materials.find(name)
    assert len(material.source) > 10
    found = materials.density(material)
    assert 500 < found.centre < 23_000
    assert 0 < found.u < 0.1 * found.centre


@pytest.mark.parametrize(
    ("name", "value", "expanded"),
    # OIML R 111-1:2004, table B.7 (from memory): density and U (k = 2)
    [("platinum", 21_400, 150), ("nickel silver", 8600, 170), ("carbon steel", 7700, 200), ("aluminium", 2700, 130)],
)
def test_metals(name, value, expanded):
    found = materials.density(materials.find(name))
    assert (found.centre, 2 * found.u) == (value, expanded)


@pytest.mark.parametrize("t", [4.0, 20.0, 30.0])
def test_water(t):
    """IAPWS-95 at 101 325 Pa; dissolved air takes 2.5e-6 to 4.2e-6 off (Tanaka 2001)."""
    found = materials.density(materials.find("water"), K0 + t)
    assert found.centre / IAPWS95(T=K0 + t, P=0.101325).rho - 1 == pytest.approx(-3e-6, abs=3e-6)


@pytest.mark.parametrize(
    ("name", "expected"),
    # at 20 °C, CRC Handbook of Chemistry and Physics (from memory), kg/m³
    [("ethanol", 789.3), ("methanol", 791.4), ("acetone", 789.9), ("toluene", 866.8), ("hexane", 659.3)],
)
def test_liquids(name, expected):
    assert materials.density(materials.find(name)).centre == pytest.approx(expected, rel=2e-3)


def test_expansion():
    """Brass of 8390.9 kg/m³ at 20 °C is 8400 at 0 °C with 54e-6 per K (NIST IR 6969, SOP 2, from memory)."""
    brass = materials.find("brass")
    cold, warm = (materials.density(brass, K0 + t).centre for t in (0.0, 20.0))
    assert cold / warm == pytest.approx(8400 / 8390.9, abs=6e-6)  # printed to 0.1


def test_a_name_in_a_set_up():
    setup = parse_setup({**REST, "load": {"mass": "5 g", "material": "Polypropylene"}})
    assert setup.estimates["load.density"] == materials.density(materials.find("polypropylene"))
    assert setup.choices["load.density_kind"] == "solid"
    assert "handbook" in setup.written["load.material"]
    warm = parse_setup({**REST, "air": {"temperature": "30 °C"}, "container": {"material": "brass"}})
    assert warm.estimates["container.density"].centre < 8400


@pytest.mark.parametrize(
    ("load", "words"),
    [
        ({"material": "polypropilene"}, "Did you mean polypropylene"),
        ({"material": "unobtainium"}, "is not in the table"),
        ({"material": 7}, "is not a name"),
        ({"material": "brass", "density": "8400 kg/m³"}, "is given beside load.density"),
        ({"material": "brass", "volume": "1 mL"}, "is given beside load.volume"),
    ],
)
def test_refused(load, words):
    with pytest.raises(InputError, match=words):
        parse_setup({**REST, "load": {"mass": "5 g", **load}})


@pytest.mark.parametrize("word", ["materials", "load.material"])
def test_listed_with_their_sources(word):
    page = CliRunner().invoke(cli, ["explain", word]).stdout
    broken = {"ptfe-membrane-filter-with-supported-ring"}  # too long for its column
    assert all(f"  {name} " in page for name in set(materials.names()) - broken)
    listed = json.loads(CliRunner().invoke(cli, ["explain", word, "--json"]).stdout)["result"]["materials"]
    water = next(one for one in listed if one["name"] == "water")
    assert water["density"]["value"] == pytest.approx(998.2042, abs=2e-4)  # Tanaka 2001 less the dissolved air
    assert water["expansion"]["value"] == pytest.approx(207, abs=2)  # ppm/K at 20 °C, CRC handbook (from memory)
    assert all(one["source"] for one in listed)
