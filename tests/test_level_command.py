"""The technician's command: from a bubble to turns in one line."""

from __future__ import annotations

import json
import math
from pathlib import Path
from xml.etree import ElementTree

import pytest
from click.testing import CliRunner

from envcorr.cli import cli

LOAD = ["level", "--load=200 g", "--allowed=0.05 mg"]
FEET = ["--foot=left=-80 mm, 60 mm", "--foot=right=80 mm, 60 mm", "--foot=front=0 mm, -80 mm"]
BUBBLE = ["--bubble=1.2 mm right, 0.4 mm back", "--vial=0.3 mm/arcmin"]


def run(*arguments, code=0):
    done = CliRunner().invoke(cli, [str(a) for a in arguments])
    assert done.exit_code == code, done.output
    return done


def test_from_bubble_to_turns(tmp_path):
    """4 arcmin right and 4/3 arcmin back: 1.164e-3 x 160 mm is 0.186 mm between the back feet (by hand)."""
    page = run(*LOAD, *FEET, *BUBBLE, "--pitch=0.8 mm", "--u=0.1 mm").stdout
    assert "NOT LEVEL ENOUGH" in page
    assert "anticlockwise" in page
    answer = json.loads(run(*LOAD, *FEET, *BUBBLE, "--pitch=0.8 mm", "--json").stdout)["result"]
    turns = {turn["foot"]: turn for turn in answer["turns"]}
    between = turns["left"]["raise"]["value"] - turns["right"]["raise"]["value"]
    assert between == pytest.approx(160 * math.tan(4 / 60 * math.pi / 180), rel=1e-6)
    assert turns["left"]["turns"] == pytest.approx(turns["left"]["raise"]["value"] / 0.8)
    assert answer["tilt"]["value"] == pytest.approx(math.hypot(4, 4 / 3), rel=1e-5)
    run(*LOAD, *BUBBLE, "--strict", code=3)
    run(*LOAD, "--tilt=1 arcmin", "--strict")


def test_a_diagram_and_a_report(tmp_path):
    drawing = tmp_path / "feet.svg"
    run(*LOAD, *FEET, *BUBBLE, "--pitch=0.8 mm", f"--diagram={drawing}", f"--report={tmp_path / 'a.pdf'}")
    root = ElementTree.fromstring(drawing.read_text(encoding="utf-8"))
    texts = ["".join(node.itertext()) for node in root.iter("{http://www.w3.org/2000/svg}text")]
    assert {"left", "right", "front", "back"} <= set(texts)
    assert any("anticlockwise" in text for text in texts)
    assert (tmp_path / "a.pdf").read_bytes()[:5] == b"%PDF-"
    run(*LOAD, *FEET, *BUBBLE, f"--diagram={drawing}", code=2)  # it is already there
    run(*LOAD, f"--diagram={tmp_path / 'b.svg'}", code=2)  # nothing to draw


def test_hostile_names_stay_text(tmp_path):
    drawing = tmp_path / "feet.svg"
    feet = ["--foot=<script>=-80 mm, 60 mm", *FEET[1:]]
    run(*LOAD, *feet, *BUBBLE, f"--diagram={drawing}")
    assert "<script>" not in drawing.read_text(encoding="utf-8")


def test_from_a_set_up():
    """The tilts, the load and the target of a room file: (0.2 mg/2)/40 g allows 2.236 mrad, by hand."""
    example = Path("envcorr/examples/milligram_bench.toml")
    answer = json.loads(run("level", f"--setup={example}", "--resolution=0.2 mg", "--json").stdout)["result"]
    assert answer["largest_tilt"]["value"] == pytest.approx(math.degrees(math.sqrt(2 * 0.1e-6 / 40e-3)) * 60, rel=1e-4)
    assert answer["tilt"]["u"] == pytest.approx(2.0, rel=1e-9)


@pytest.mark.parametrize(
    ("arguments", "words"),
    [
        (["level"], "load: is not given"),
        (["level", "--load=200 g"], "allowed error: is not given"),
        ([*LOAD, "--bubble=1 mm right"], "needs --vial"),
        ([*LOAD, "--bubble=1 mm right", "--vial=0.3"], "has no unit"),
        ([*LOAD, "--tilt=11 deg right"], "more than 10°"),
        ([*LOAD, "--tilt=1 arcmin right", *BUBBLE], "give one"),
        ([*LOAD, "--pitch=1 mm"], "needs the feet"),
        ([*LOAD, *FEET, "--pitch=0 mm"], "pitch: is not above zero"),
        ([*LOAD, *FEET[:2], "--foot=front=0 mm, 60 mm"], "in one line"),
        ([*LOAD, *FEET, "--keep=middle"], "is no foot"),
    ],
)
def test_what_is_refused(arguments, words):
    assert words in run(*arguments, code=2).stderr


def test_what_cannot_be_told_is_said():
    page = run(*LOAD, *FEET, "--tilt=5 arcmin").stdout
    assert "say which side is higher" in page
    assert "taken as exact" in page
