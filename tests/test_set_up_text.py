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


@pytest.mark.parametrize(
    "value", ['a "b" \\ c', 1, 0.5, True, [1, "x"], {"value": "45 %", "u": "3 %"}, {"low": 0.1, "k": 2}, "µ°³"]
)
def test_values(value):
    assert tomllib.loads(f"it = {in_toml(value)}")["it"] == value
