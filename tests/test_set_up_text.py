"""A set-up as texts by name says the same as the file it came from."""

from __future__ import annotations

import tomllib
from pathlib import Path

import pytest

from envcorr.intake.set_up_text import entries_of, in_toml, to_toml
from envcorr.intake.setup_file import parse_setup
from envcorr.intake.toml_file import with_changes
from tests.test_mutations import RICH

EXAMPLES = sorted(Path("envcorr/examples").glob("*.toml"))


@pytest.mark.parametrize("text", [RICH, *(path.read_text(encoding="utf-8") for path in EXAMPLES)])
def test_there_and_back(text):
    mapping = tomllib.loads(text)
    entries = entries_of(mapping)
    again = tomllib.loads(to_toml(entries, "made by a test"))
    first, second = parse_setup(mapping), parse_setup(again)
    assert second.estimates == first.estimates
    assert (second.choices, second.correlations, second.waived, second.title) == (
        first.choices,
        first.correlations,
        first.waived,
        first.title,
    )
    changes = [f"{name}={text}" for name, text in entries.items()]
    assert parse_setup(with_changes({}, changes)).estimates == first.estimates


@pytest.mark.parametrize("tare", ['"30 g"', '{ value = "30 g", u = "0.1 mg" }'])
def test_the_reading_of_the_tare_and_its_air(tare):
    """One name for two things: the reading, and the moment at which the air was another."""
    changes = ["gross=31.25 g", f"tare={tare}", "tare.air.pressure=940 hPa", "load.density=1050 kg/m³"]
    mapping = with_changes({}, changes)
    first = parse_setup(mapping, require=())
    assert first.estimates["tare"].centre == pytest.approx(0.03)
    assert first.estimates["tare.air.pressure"].centre == pytest.approx(94_000.0)
    assert parse_setup(with_changes({}, reversed(changes)), require=()).estimates == first.estimates
    again = tomllib.loads(to_toml(entries_of(mapping)))
    assert parse_setup(again, require=()).estimates == first.estimates


@pytest.mark.parametrize(
    "value", ['a "b" \\ c', 1, 0.5, True, [1, "x"], {"value": "45 %", "u": "3 %"}, {"low": 0.1, "k": 2}, "µ°³"]
)
def test_values(value):
    assert tomllib.loads(f"it = {in_toml(value)}")["it"] == value
