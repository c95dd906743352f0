"""The examples are what they say: invented, complete, and each with its own verdict."""

from __future__ import annotations

import tomllib
from pathlib import Path

import pytest

import envcorr
from envcorr.intake.setup_file import read_setup
from envcorr.jobs.room import check_room
from envcorr.setup import Setup

FOLDER = Path(envcorr.__file__).parent / "examples"
VERDICTS = {
    "milligram_bench": "reached",
    "filter_room": "reached once corrected",
    "powder_station": "reached once treated",
    "volatile_liquid": "reached once treated",
    "upstairs_move": "reached once corrected",
    "hood_over_balance": "reached once treated",
}


def test_every_example_is_listed():
    assert {path.stem for path in FOLDER.glob("*.toml")} == set(VERDICTS)


@pytest.mark.parametrize("name", VERDICTS)
def test_example(name):
    path = FOLDER / f"{name}.toml"
    text = path.read_text(encoding="utf-8")
    assert "invented" in text.splitlines()[0].lower() or "Invented" in text
    assert "invented" in tomllib.loads(text)["title"]
    result = check_room(read_setup(path), draws=2**14)
    assert result.verdict.answer == VERDICTS[name]
    assert result.unused == ()


def test_a_band_alone_stands_in_the_way_of_the_powder():
    """The verdict names the treatment and the one measurement that would narrow the band."""
    result = check_room(read_setup(FOLDER / "powder_station.toml"), draws=2**14)
    assert result.verdict.treat == ("static_charge",)
    assert "neutralise it" in result.verdict.reason
    assert "To tell how large it is" in result.verdict.reason
    static = next(row for row in result.effects if row.name == "static_charge")
    assert static.passes_without is True
    assert static.u > 10 * static.first_order_u
    assert "static_charge" in result.first_order.blind_to


def test_the_readings_are_those_of_the_script(tmp_path):
    """The table is what its seeded script makes, and its masses come back from it within their uncertainty."""
    from envcorr.examples import make_readings
    from envcorr.jobs.mass_file import convert

    source = FOLDER / "readings.csv"
    header, *lines = source.read_text(encoding="utf-8").splitlines()
    rows = make_readings.rows()
    assert header.split(",") == list(rows[0])
    assert lines == [",".join(row.values()) for row in rows]
    summary = convert(source, tmp_path / "masses.csv", Setup(choices={"adjusted.when": "just before"}))
    assert (summary.rows, summary.failed) == (40, 0)
