"""Maps and curves: each point is a room check, drawn the same again, and what cannot be drawn is said."""

from __future__ import annotations

import csv
import json
from dataclasses import replace
from pathlib import Path
from xml.etree import ElementTree

import numpy as np
import pytest
from click.testing import CliRunner

from envcorr.cli import cli
from envcorr.document import map as page
from envcorr.document.blocks import Band, Region
from envcorr.errors import InputError
from envcorr.intake.setup_file import read_setup
from envcorr.jobs.map import AxisRequest, make_curve, make_grid
from envcorr.jobs.room import check_room
from envcorr.render import figure, html, pdf, terminal
from tests.scene import MG, ROOM, UG, about, normal, setup

BENCH = Path("envcorr/examples/milligram_bench.toml")
STATION = Path("envcorr/examples/powder_station.toml")


def check(said, estimates, draws, state="corrected"):
    total = check_room(replace(said, estimates={**said.estimates, **estimates}), draws=draws).total(state)
    return total, min(total.surroundings.conformance_probability, total.whole.conformance_probability)


def test_every_point_of_a_map_is_a_room_check():
    said = read_setup(BENCH, changes=['target.resolution="0.5 mg"'])
    found = make_grid(said, AxisRequest("air.temperature"), AxisRequest("load.mass", ends=(5e-3, 100e-3)), steps=7)
    assert (found.x.varied, found.y.varied) == ("spread", "value")
    for i, j in ((0, 0), (3, 2), (6, 6), (1, 5)):
        changed = {
            "air.temperature": replace(said.estimates["air.temperature"], spread=float(found.x.values[j])),
            "load.mass": said.estimates["load.mass"].about(float(found.y.values[i])),
        }
        assert found.probability[i, j] == check(said, changed, found.draws)[1]
    assert found.reached[0].all()
    assert not found.reached[-1].any()


def test_every_point_of_a_curve_is_a_room_check():
    """The mean, the interval and the probability; along an axis by ratio the relative spread is kept."""
    said = read_setup(STATION)
    found = make_curve(said, AxisRequest("load.density"), steps=6, state="treated")
    assert found.x.logarithmic
    assert (found.x.values[0], found.x.values[-1]) == pytest.approx((5.0, 8000.0))
    known = said.estimates["load.density"]
    for i in (0, 3, 5):
        value = float(found.x.values[i])
        total, chance = check(
            said, {"load.density": normal(value, float(known.u) * value / known.centre)}, found.draws, "treated"
        )
        assert found.mean[i] == pytest.approx(total.surroundings.summary.mean, rel=1e-9, abs=1e-15)
        assert (found.low[i], found.high[i]) == pytest.approx(total.surroundings.summary.interval, rel=1e-9)
        assert found.probability[i] == chance


def test_the_boundary_is_where_a_closed_form_has_it():
    """kappa dT m = b/0.95 for a rectangular dT: the boundary is the hyperbola m w = b/(0.95 kappa) (by hand)."""
    said = setup(
        ROOM,
        air_density=1.2,
        adjusted_when=None,
        adjusted_air_density=1.2,
        adjusted_air_temperature=293.15,
        adjusted_air_pressure=101_325.0,
        air_temperature=about(293.15, 1.0),
        balance_sensitivity_temperature_coefficient=2e-6,
        balance_repeatability=1 * UG,
    )
    found = make_grid(
        said, AxisRequest("air.temperature", ends=(0.1, 3.0)), AxisRequest("load.mass", ends=(5e-3, 60e-3)), steps=15
    )
    product = found.x.values[np.newaxis, :] * found.y.values[:, np.newaxis]
    edge = 0.05 * MG / (0.95 * 2e-6)
    clear = np.abs(product / edge - 1) > 0.01
    assert clear.sum() > 200
    assert np.array_equal(found.reached[clear], (product < edge)[clear])


def test_what_the_model_cannot_answer_is_marked():
    """A wet bulb far below the air would need less than no vapour, for which CoolProp has no density: never a pass."""
    wet = {"air_humidity": None, "air_wet_bulb": 290.0, "load_density": 1000.0, "target_resolution": 1 * MG}
    found = make_curve(setup(ROOM, wet), AxisRequest("air.temperature", "value", (292.0, 370.0)), steps=8)
    unknown = np.isnan(found.probability)
    assert list(unknown) == [False] * 3 + [True] * 5
    assert np.isnan(found.mean[unknown]).all()
    field = make_grid(
        setup(ROOM, wet),
        AxisRequest("load.mass"),
        AxisRequest("air.temperature", "value", (292.0, 370.0)),
        steps=8,
    )
    assert not field.reached[3:].any()
    blocks = page.grid(field)
    assert "could not be computed" in next(block.alt for block in blocks if isinstance(block, Region))
    assert "?" * 16 in terminal.render(blocks)
    assert b"<svg" in figure.render(next(block for block in blocks if isinstance(block, Region)))


@pytest.fixture(scope="module")
def drawn():
    said = read_setup(BENCH, changes=['target.resolution="0.5 mg"'])
    grid = make_grid(said, AxisRequest("air.temperature"), AxisRequest("load.mass", ends=(5e-3, 100e-3)), steps=8)
    curve = make_curve(said, AxisRequest("load.mass", ends=(5e-3, 100e-3)), steps=8)
    return page.grid(grid), page.curve(curve)


def test_pictures_are_the_same_again_and_readable_in_grey(drawn):
    for blocks in drawn:
        chart = next(block for block in blocks if isinstance(block, Region | Band))
        svg = figure.render(chart)
        assert figure.render(chart) == svg
        assert figure.render(chart, "png")[:8] == b"\x89PNG\r\n\x1a\n"
        ElementTree.fromstring(svg.decode())
        text = svg.decode()
        assert "202" not in text[:600]  # no date
        if isinstance(chart, Region):
            assert "<pattern" in text  # hatched where it is not reached
        colours = {part[:7] for part in text.split("fill: ")[1:] if part.startswith("#")}
        channels = [[int(colour[i : i + 2], 16) for i in (1, 3, 5)] for colour in colours]
        assert all(max(channel) - min(channel) < 24 for channel in channels)


def test_charts_in_every_format(drawn):
    for blocks in drawn:
        assert "<svg" in html.render(blocks)
        assert pdf.render(blocks)[:5] == b"%PDF-"
        assert "reached" in terminal.render(blocks)
    assert "O" in terminal.render(drawn[0])


@pytest.mark.parametrize(
    ("x", "y", "words"),
    [
        (AxisRequest("air.temperature"), AxisRequest("air.temperature"), "Name two quantities"),
        (AxisRequest("air.temprature"), AxisRequest("load.mass"), "Did you mean air.temperature"),
        (AxisRequest("static.charge"), AxisRequest("load.mass"), "not given by the set-up"),
        (AxisRequest("load.mass", "spread"), AxisRequest("air.pressure"), "without a spread"),
        (AxisRequest("load.mass", "value", (5e-3, 5e-3)), AxisRequest("air.pressure"), "ends where it begins"),
        (AxisRequest("load.mass", "value", (-1.0, 1.0)), AxisRequest("air.pressure"), "may only lie within"),
        (AxisRequest("air.temperature", "value", (293.0, 500.0)), AxisRequest("load.mass"), "may only lie within"),
    ],
)
def test_what_cannot_be_drawn(x, y, words):
    with pytest.raises(InputError, match=words):
        make_grid(read_setup(BENCH), x, y, steps=3)
    with pytest.raises(InputError, match="is not from 2 to 400"):
        make_grid(read_setup(BENCH), AxisRequest("air.pressure"), AxisRequest("load.mass"), steps=1)


def run(*arguments, code=0):
    done = CliRunner().invoke(cli, [str(a) for a in arguments])
    assert done.exit_code == code, done.output
    return done


def test_command(tmp_path):
    command = ["map", BENCH, "--x=air.temperature", "--y=load.mass", "--y-range=5 g .. 60 g", "--steps=6"]
    shown = run(*command, f"--out={tmp_path / 'a.csv'}").stdout
    assert "across: half-width of the air temperature [K]" in shown
    with (tmp_path / "a.csv").open(encoding="utf-8", newline="") as file:
        rows = list(csv.DictReader(file))
    assert len(rows) == 36
    assert set(rows[0]) == {"air.temperature spread [K]", "load.mass [g]", "conformance probability", "reached"}
    answer = json.loads(run(*command, "--json").stdout)["result"]
    assert np.ravel(answer["probability"]).tolist() == [float(row["conformance probability"]) for row in rows]
    run(*command, f"--out={tmp_path / 'a.svg'}")
    first = (tmp_path / "a.svg").read_bytes()
    run(*command, f"--out={tmp_path / 'a.svg'}", code=2)  # already there
    run(*command, f"--out={tmp_path / 'a.svg'}", "--force")
    assert (tmp_path / "a.svg").read_bytes() == first
    run(*command, f"--out={tmp_path / 'a.jpg'}", code=2)
    run(*command, f"--out={tmp_path / 'no' / 'a.svg'}", code=2)
    assert "no range" in run("map", BENCH, "--x=load.mass", "--x-range=5 g", code=2).stderr
    assert "no unit" in run("map", BENCH, "--x=load.mass", "--x-range=5 .. 6", code=2).stderr
    curve = json.loads(run("map", BENCH, "--x=load.mass", "--steps=5", "--json").stdout)["result"]
    assert len(curve["mean_error"]["value"]) == 5
