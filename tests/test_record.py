"""Records: what they hold, that they are found again, and that a change is seen."""

from __future__ import annotations

import hashlib
import json
from pathlib import Path

import pytest
from click.testing import CliRunner

from envcorr.cli import cli
from envcorr.errors import InputError
from envcorr.record import verify

READING = [
    "mass",
    "--reading=1.25 g",
    "--density={value = '1050 kg/m³', u = '5 kg/m³'}",
    "--temperature=21.4 °C",
    "--pressure=943.1 hPa",
    "--humidity=42 %",
    "--adjusted=just before",
]
TABLE = "sample,reading [g],load.density [kg/m³]\nfoam,1.25,32\nplastic,1.25,1050\nnone,,1050\n"
ROOM = """
target = { resolution = "1 mg" }
load = { mass = "5 g", density = "1050 kg/m³" }
air = { temperature = "21 °C", pressure = "990 hPa", humidity = { value = "45 %", u = "3 %" } }
balance = { scale_interval = "0.1 mg", repeatability = "0.1 mg", sensitivity_temperature_coefficient = "2 ppm/K" }
"""


def run(*arguments, code=0):
    done = CliRunner().invoke(cli, [str(a) for a in arguments])
    assert done.exit_code == code, done.output
    return done


@pytest.fixture(params=["mass", "mass by draws", "table", "room"])
def record(request, tmp_path):
    """A record of each kind."""
    path = tmp_path / "record.json"
    options = [f"--record={path}", "--note=item=foam 7", "--note=when=2026-11-30 09:12"]
    if request.param.startswith("mass"):
        run(*READING, *(["--monte-carlo"] if "draws" in request.param else []), *options)
    elif request.param == "table":
        (tmp_path / "readings.csv").write_text(TABLE, encoding="utf-8")
        run("mass", tmp_path / "readings.csv", f"--out={tmp_path / 'masses.csv'}", *READING[3:], *options)
    else:
        (tmp_path / "room.toml").write_text(ROOM, encoding="utf-8")
        run("room", tmp_path / "room.toml", *options)
    return path


def read(path: Path):
    return json.loads(path.read_text(encoding="utf-8"))


def sealed(document):
    """Seal a document: SHA-256 of the sorted, compact JSON of all but seal and acceptance."""
    held = {key: value for key, value in document.items() if key not in ("seal", "acceptance")}
    text = json.dumps(held, sort_keys=True, separators=(",", ":"))
    return {**document, "seal": hashlib.sha256(text.encode()).hexdigest()}


def write(path: Path, document):
    path.write_text(json.dumps(document), encoding="utf-8")


def test_found_again_to_the_last_digit(record):
    found = verify(record)
    assert found.holds
    assert (found.departures, found.largest) == ((), 0.0)
    assert "The same to the last digit" in run("record", "verify", record).stdout
    answer = json.loads(run("record", "verify", record, "--json").stdout)["result"]
    assert answer["verified"] is True
    assert answer["notes"]["item"] == "foam 7"


def test_what_it_holds(record):
    document = read(record)
    assert document == sealed(document)
    assert document["notes"]["when"] == "2026-11-30 09:12"
    assert set(document["acceptance"]) == {"accepted_by", "accepted_on", "accepted_because"}
    assert document["constants"]["CONVENTIONAL_AIR_DENSITY"]["value"] == 1.2  # OIML D 28:2004, clause 5
    assert all(entry["source"] for entry in document["constants"].values())
    assert document["decision_rule"]
    assert document["answer"]["envcorr"]
    assert {"python", "numpy", "CoolProp"} <= set(document["computed_with"])
    assert len(document["given_sha256"]) == 64


def test_a_mass_holds_its_budget(tmp_path):
    run(*READING, f"--record={tmp_path / 'one.json'}")
    answer = read(tmp_path / "one.json")["answer"]
    assert answer["inputs"]["reading"] == "1.25 g"
    assert answer["result"]["correction"]["value"] == pytest.approx(1.150, abs=1e-3)  # mg, by hand: +0.920 mg/g
    assert {"u", "U", "k", "dof"} <= set(answer["result"]["mass"])
    assert answer["result"]["budget"]["effects"][0]["name"] == "buoyancy"


def test_acceptance_may_be_filled_in_later(record):
    document = read(record)
    document["acceptance"] = {"accepted_by": "head of the laboratory", "accepted_because": "order of magnitude only"}
    write(record, document)
    assert verify(record).holds


def test_a_changed_answer_is_seen(record):
    document = read(record)
    document["answer"]["result"]["seed" if "seed" in document["answer"]["result"] else "rows"] = 99
    write(record, document)
    found = verify(record)
    assert not found.unchanged
    assert "99 in the record" in found.departures[0]
    assert "CHANGED" in run("record", "verify", record, code=3).stdout
    write(record, sealed(document))  # who seals it anew is found out by the computation
    assert "NOT FOUND AGAIN" in run("record", "verify", record, code=3).stdout


@pytest.mark.parametrize(("factor", "holds"), [(1 + 1e-13, True), (1 + 1e-11, False)])
def test_other_machines_may_differ_in_the_last_digits(tmp_path, factor, holds):
    path = tmp_path / "one.json"
    run(*READING, f"--record={path}")
    document = read(path)
    document["answer"]["result"]["mass"]["value"] *= factor
    write(path, sealed(document))
    found = verify(path)
    assert found.holds is holds
    if holds:
        assert found.largest == pytest.approx(1e-13, rel=0.01)
        assert "same printed digits" in run("record", "verify", path).stdout


def test_the_table_of_a_record(tmp_path):
    table, out, path = tmp_path / "readings.csv", tmp_path / "masses.csv", tmp_path / "record.json"
    table.write_text(TABLE, encoding="utf-8")
    run("mass", table, f"--out={out}", *READING[3:], f"--record={path}")
    assert str(tmp_path) not in path.read_text(encoding="utf-8")  # it is read elsewhere
    document = read(path)
    assert document["given"]["table"]["sha256"] == hashlib.sha256(table.read_bytes()).hexdigest()
    assert document["answer"]["answer_sha256"] == hashlib.sha256(out.read_bytes()).hexdigest()
    masses = [float(line.split(",")[3]) for line in out.read_text().splitlines()[1:3]]
    assert document["answer"]["result"]["sums"]["mass [g]"] == pytest.approx(sum(masses), rel=1e-15)
    out.write_text(out.read_text().replace("foam", "form"))
    assert "not the table of masses" in verify(path).departures[0]
    out.unlink()
    assert verify(path).holds
    moved = table.rename(tmp_path / "elsewhere.csv")
    with pytest.raises(InputError, match="beside its record"):
        verify(path)
    assert verify(path, table=moved).holds
    moved.write_text(TABLE.replace("1.25", "1.26"), encoding="utf-8")
    with pytest.raises(InputError, match="not the table that was recorded"):
        verify(path, table=moved)


def test_what_cannot_be_recorded_or_read(tmp_path):
    path = tmp_path / "one.json"
    assert "no note" in run(*READING, f"--record={path}", "--note=itm=foam", code=2).stderr
    assert "Did you mean item?" in run(*READING, f"--record={path}", "--note=itm=foam", code=2).stderr
    assert "has no text" in run(*READING, f"--record={path}", "--note=item", code=2).stderr
    assert "needs --record" in run(*READING, "--note=item=foam", code=2).stderr
    assert "Known are .json" in run(*READING, f"--record={tmp_path / 'one.txt'}", code=2).stderr
    assert "folder is not there" in run(*READING, f"--record={tmp_path / 'no' / 'one.json'}", code=2).stderr
    path.write_text("mine", encoding="utf-8")
    assert "already there" in run(*READING, f"--record={path}", code=2).stderr
    assert path.read_text() == "mine"
    for text, words in (("mine", "is not JSON"), ("{}", "is no record"), ("[1]", "is no record")):
        path.write_text(text, encoding="utf-8")
        assert words in run("record", "verify", path, code=2).stderr
    assert "cannot be read" in run("record", "verify", tmp_path / "nowhere.json", code=2).stderr
    run(*READING, f"--record={path}", "--force")
    assert verify(path).holds
    document = read(path)
    write(path, {**document, "record": 99})
    assert "another kind" in run("record", "verify", path, code=2).stderr
