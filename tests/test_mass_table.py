"""Tables of readings: what is understood, what is kept, and that each row is what one reading gives."""

from __future__ import annotations

import json
import os
import signal
import subprocess
import sys

import numpy as np
import polars as pl
import pytest
from click.testing import CliRunner

from envcorr.cli import cli
from envcorr.errors import InputError
from envcorr.intake.setup_file import parse_setup
from envcorr.intake.table import Column
from envcorr.jobs.mass import find_mass
from envcorr.jobs.mass_file import convert
from envcorr.jobs.mass_table import DIFFER, RowSolver

AIR = {"temperature": "21.4 °C", "humidity": "42 %", "pressure": "943.10 hPa", "co2": "400 ppm"}
SETUP = {"air": AIR, "adjusted": {"when": "just before"}}
FOAM = """no;reading [g];load.density [kg/m³];load.density.u [kg/m³];load.density_kind;load.open_cell_fraction;remark
A1;1,25000;32;0,5;envelope;0;first
A2;1,25000;1050;5;gas-displacement;;=1+1
A3;;1050;5;gas-displacement;;empty
A4;x;1050;5;gas-displacement;;text
A5;2,0;-3;5;gas-displacement;;negative
A6;2,0;1050;5;bulk;;kind
A7;3,0;;;solid;;no density
"""


def masses(said, columns, words, size, **how):
    return RowSolver(said, **how).solve(columns, words, size)


def setup(**more):
    return parse_setup({**SETUP, **more}, require=())


def write(tmp_path, text, name="in.csv"):
    path = tmp_path / name
    path.write_text(text, encoding="utf-8")
    return path


@pytest.fixture
def foam(tmp_path):
    return write(tmp_path, FOAM)


@pytest.mark.parametrize("suffix", [".csv", ".xlsx", ".parquet"])
def test_rows_of_every_kind(tmp_path, foam, suffix):
    """The invented foam: +44.78 mg and u 0.728 mg of its envelope density, +1.15 mg of a gas displacement (by hand)."""
    target = tmp_path / f"out{suffix}"
    summary = convert(foam, target, setup())
    assert (summary.rows, summary.failed) == (7, 5)
    if suffix == ".csv":
        found = pl.read_csv(target, separator=";", decimal_comma=True)
    else:
        found = pl.read_excel(target) if suffix == ".xlsx" else pl.read_parquet(target)
    assert found["no"].to_list() == [f"A{i}" for i in range(1, 8)]  # the order of the rows
    assert found["remark"].to_list()[1] == "=1+1"  # a text that looks like a formula
    assert found["correction [g]"][0] * 1e3 == pytest.approx(44.78, abs=0.005)
    assert found["standard uncertainty [g]"][0] * 1e3 == pytest.approx(0.728, abs=0.001)
    assert found["correction [g]"][1] * 1e3 == pytest.approx(1.150, abs=0.001)
    assert found["mass [g]"].to_list()[2:] == [None] * 5
    notes = found["notices"].to_list()
    for i, words in enumerate(
        ["reading: is not given", '"x" is not a number', "outside what is possible", "bulk", "lacks load.density"],
        start=2,
    ):
        assert notes[i].startswith("not computed: ")
        assert words in notes[i]


def test_a_row_is_what_one_reading_gives():
    """Bands by first order, by draws of each row, and given once: the row is the single reading's mass and u."""
    said = {
        "container": {"mass": "12 g", "density": {"value": "2500 kg/m³", "u": "25 kg/m³"}},
        "cycle": {"pressure_change": {"value": "0 hPa", "u": "0.1 hPa"}},
        "balance": {"repeatability": "20 µg", "scale_interval": "10 µg", "nonlinearity": "20 µg"},
        "load": {"warmer_by": {"value": "0 K", "half_width": "0.5 K"}},
        "static": {"charge": {"value": "0 nC", "u": "0.2 nC"}, "distance": "40 mm"},
    }
    density = np.array([950.0, 1050.0, 1200.0, 32.0])
    reading = np.array([1e-3, 5e-3, 2e-3, 1.25e-3])
    columns = {"reading": Column(reading), "load.density": Column(density, np.full(4, 3.0), "normal")}
    rows = masses(setup(**said), columns, {}, 4)
    assert list(rows.faults) == [""] * 4
    for i in range(4):
        load = {**said["load"], "density": {"value": f"{density[i]} kg/m³", "u": "3 kg/m³"}}
        one = find_mass(
            parse_setup({**SETUP, **said, "load": load, "reading": f"{float(reading[i]) * 1e3!r} g"}, require=())
        )
        assert rows.mass[i] == pytest.approx(one.mass.value, rel=1e-14)
        assert rows.u[i] == pytest.approx(one.mass.u, rel=0.02)  # 256 draws a row against 16 384
        assert rows.air_density[i] == pytest.approx(one.air_density.value, rel=1e-14)


def test_long_columns_are_what_short_ones_are():
    random = np.random.default_rng(5)
    size = 3000
    columns = {
        "reading": Column(random.uniform(1e-3, 5e-3, size)),
        "load.density": Column(random.uniform(500, 8000, size)),
        "air.temperature": Column(random.uniform(292, 297, size)),
    }
    every = masses(setup(), columns, {}, size)
    for i in (0, 1234, 2999):
        single = {name: Column(column.values[i : i + 1]) for name, column in columns.items()}
        one = masses(setup(), single, {}, 1)
        assert every.mass[i] == pytest.approx(one.mass[0], rel=1e-15)
        assert every.u[i] == pytest.approx(one.u[0], rel=1e-12)


def test_draws_of_each_row():
    """Each row's own interval is that of the reading given once, by as many draws of the same seed."""
    density = np.array([950.0, 32.0])
    reading = np.array([1e-3, 1.25e-3])
    columns = {"reading": Column(reading), "load.density": Column(density, np.array([3.0, 3.0]), "normal")}
    rows = masses(setup(), columns, {}, 2, count=4096)
    for i in range(2):
        load = {"density": {"value": f"{density[i]} kg/m³", "u": "3 kg/m³"}}
        said = {**SETUP, "load": load, "reading": f"{float(reading[i]) * 1e3!r} g"}
        one = find_mass(parse_setup(said, require=()), count=4096).by_draws["load.mass"]
        assert [drawn[i] for drawn in rows.drawn] == pytest.approx([one.u, one.low, one.high], rel=1e-12)
        assert rows.drawn[0][i] == pytest.approx(rows.u[i], rel=0.05)
    wide = {**columns, "load.density": Column(density, np.array([3.0, 12.0]), "normal")}  # 1/32 ± 12 is skewed
    assert list(masses(setup(), wide, {}, 2, count=4096).notices[DIFFER]) == [False, True]


def test_stated_correlations_count_in_tables():
    correlation = {"between": ["air.temperature", "air.pressure"], "coefficient": 1.0}
    air = {
        **AIR,
        "temperature": {"value": "21.4 °C", "u": "0.5 K"},
        "pressure": {"value": "943.1 hPa", "u": "1 hPa"},
    }
    columns = {"reading": Column(np.array([5e-3])), "load.density": Column(np.array([100.0]))}
    free, tied = (masses(setup(air=air, **more), columns, {}, 1) for more in ({}, {"correlation": [correlation]}))
    said = {**SETUP, "air": air, "load": {"density": "100 kg/m³"}, "reading": "5 g", "correlation": [correlation]}
    assert tied.u[0] == pytest.approx(find_mass(parse_setup(said, require=())).mass.u, rel=1e-9)
    assert tied.u[0] < 0.6 * free.u[0]  # warmer and higher: -1.9e-3 and +1.1e-3 of the density offset each other
    drawn = masses(setup(air=air, correlation=[correlation]), columns, {}, 1, count=4096).drawn
    assert drawn[0][0] == pytest.approx(tied.u[0], rel=0.03)


def test_materials_and_what_is_told_beside(tmp_path):
    """Water at each row's temperature: 998.2067 and 997.0470 kg/m³ air-free (Tanaka 2001), 2.5 and 2.0 g/m³ less."""
    text = "reading [g],load.material,air.temperature [°C]\n10,water,20\n10,water,25\n10,unobtainium,20\n10,,20\n"
    path = write(tmp_path, text)
    summary = convert(path, tmp_path / "out.csv", setup(), beside=["conventional mass", "volume"])
    found = pl.read_csv(tmp_path / "out.csv")
    assert summary.failed == 2
    air = found["density of the air [kg/m³]"][0]
    assert found["volume [mL]"][0] == pytest.approx(10 * (1 - air / 8000) / (0.9982042 - air / 1000), rel=2e-6)
    assert (found["mass [g]"] / found["volume [mL]"]).to_list()[:2] == pytest.approx([0.9982042, 0.9970450], rel=1e-7)
    ratio = found["conventional mass [g]"][0] / found["mass [g]"][0]
    assert ratio == pytest.approx((1 - 1.2 / 998.2042) / (1 - 1.2 / 8000), rel=1e-9)  # OIML D 28:2004, clause 5
    assert found["standard uncertainty of the volume [mL]"][0] > 0
    assert "unobtainium" in found["notices"][2]
    assert "lacks" in found["notices"][3]


def test_the_order_of_rows_does_not_matter():
    """A kind of row is planned once for the table; what only some of its rows have is not lost on the others."""
    fraction = np.array([0.0, 0.1])
    columns = {
        "reading": Column(np.array([1.25e-3, 1.25e-3])),
        "load.density": Column(np.array([32.0, 32.0])),
        "load.open_cell_fraction": Column(fraction),
    }
    said = setup(load={"density_kind": "envelope", "solid_density": "1050 kg/m³"})
    both = masses(said, columns, {}, 2)
    solver = RowSolver(said)
    for i in (0, 1):  # block after block: the first one has no open cells, the next has
        one = solver.solve({name: Column(c.values[i : i + 1]) for name, c in columns.items()}, {}, 1)
        assert one.mass[0] == both.mass[i]


def test_columns_are_mapped(tmp_path):
    path = write(tmp_path, "Mass (g),rho\n1.25,1050\n")
    with pytest.raises(InputError, match="no reading was found"):
        convert(path, tmp_path / "out.csv", setup())
    summary = convert(path, tmp_path / "out.csv", setup(), mapped=["reading=Mass (g)", "load.density [kg/m³]=rho"])
    assert summary.failed == 0
    with pytest.raises(InputError, match="there is no column"):
        convert(path, tmp_path / "other.csv", setup(), mapped=["reading=Mas (g)"])


@pytest.mark.parametrize(
    ("text", "words"),
    [
        ("", "is empty"),
        ("reading [g],load.density [kg/m³]\n", "no rows"),
        ("reading [g],reading [g]\n1,2\n", "twice"),
        ("reading [hPa],load.density [kg/m³]\n1,1050\n", "a mass is wanted"),
        ("reading,load.density [kg/m³]\n1,1050\n", "has no unit"),
        ("sample,mass\nA,1\n", "no reading was found"),
        ("reading [g];load.density [kg/m³]\n1,25;1050\n1.25;1050.5\n", "decimal commas and points"),
        ("reading [g],load.density.U [kg/m³]\n1,2\n", "does not say its k"),
        ("reading [g],load.density.u [kg/m³]\n1,2\n", "there is no column of load.density"),
        ("reading [g],mass [g]\n1,2\n", "already has a column"),
        (",".join(["reading [g]", *(f"c{i}" for i in range(1200))]) + "\n1\n", "1201 columns"),
    ],
)
def test_tables_that_cannot_be_used(tmp_path, text, words):
    path = write(tmp_path, text)
    with pytest.raises(InputError, match=words):
        convert(path, tmp_path / "out.csv", setup())
    assert sorted(p.name for p in tmp_path.iterdir()) == ["in.csv"]


def test_files_that_cannot_be_used(tmp_path, foam):
    (tmp_path / "binary.csv").write_bytes(b"\0\1\2" * 50)
    (tmp_path / "broken.parquet").write_bytes(b"PAR1 nothing")
    (tmp_path / "latin.csv").write_bytes("reading [g],température\n1,2\n".encode("latin-1"))
    for name, words in (
        ("nowhere.csv", "is not there"),
        ("binary.csv", "is not text"),
        ("broken.parquet", "cannot be read as a table"),
        ("latin.csv", "is not UTF-8"),
        ("in.doc", "Known are"),
    ):
        with pytest.raises(InputError, match=words):
            convert(tmp_path / name, tmp_path / "out.csv", setup())
    for target, words in (
        (foam, "is the input itself"),
        (tmp_path / "no" / "out.csv", "folder is not there"),
        (tmp_path / "out.doc", "Known are"),
    ):
        with pytest.raises(InputError, match=words):
            convert(foam, target, setup(), force=True)


def test_what_cannot_be_read_is_never_replaced_by_the_set_up(tmp_path):
    """The set-up gives a reading and a density for rows without one; a row with a text there is no such row."""
    path = write(tmp_path, "reading [g],load.density [kg/m³]\n1.25,1050\nx,1050\n1.25,y\n,1050\n")
    summary = convert(path, tmp_path / "out.csv", setup(reading="2 g", load={"density": "1050 kg/m³"}))
    found = pl.read_csv(tmp_path / "out.csv")
    assert summary.failed == 2
    assert found["mass [g]"].is_null().to_list() == [False, True, True, False]
    assert found["mass [g]"][3] == pytest.approx(2.0018, abs=1e-4)


def test_a_table_of_too_many_rows_is_refused_where_that_is_asked(tmp_path, foam):
    with pytest.raises(InputError, match="has 7 rows, more than 5"):
        convert(foam, tmp_path / "out.csv", setup(), most=5)


def test_an_existing_file_is_kept_unless_forced(tmp_path, foam):
    target = write(tmp_path, "mine\n", "out.csv")
    with pytest.raises(InputError, match="already there"):
        convert(foam, target, setup())
    assert target.read_text(encoding="utf-8") == "mine\n"
    convert(foam, target, setup(), force=True)
    assert "correction" in target.read_text(encoding="utf-8")


def test_killed_in_mid_write_leaves_no_answer(tmp_path):
    """A process killed while it computes: no file of the answer's name, and the input as it was."""
    rows = "\n".join(f"{1 + i % 7 / 10:.1f},{900 + i % 400}" for i in range(400_000))
    path = write(tmp_path, f"reading [g],load.density [kg/m³]\n{rows}\n")
    before = path.stat().st_size
    code = (
        "import os, pathlib, signal; from envcorr.jobs.mass_file import convert;"
        "from tests.test_mass_table import setup;"
        f"folder = pathlib.Path({str(tmp_path)!r});"
        "kill = lambda done, total: done > 200_000 and os.kill(os.getpid(), signal.SIGKILL);"
        "convert(folder / 'in.csv', folder / 'out.csv', setup(), progress=kill)"
    )
    done = subprocess.run([sys.executable, "-c", code], cwd=os.getcwd(), check=False)
    assert done.returncode == -signal.SIGKILL
    assert any(path.name.endswith(".part") for path in tmp_path.iterdir())  # it was writing
    assert not (tmp_path / "out.csv").exists()
    assert path.stat().st_size == before


@pytest.mark.parametrize("suffix", [".csv", ".xlsx", ".parquet"])
def test_a_full_disk_leaves_no_answer(tmp_path, suffix):
    """No file may grow over 20 kB, as on a full disk: a sentence, and nothing half-written."""
    rows = "\n".join(f"{1 + i % 7 / 10:.1f},{900 + i % 400}" for i in range(3000))
    path = write(tmp_path, f"reading [g],load.density [kg/m³]\n{rows}\n")
    code = (
        "import pathlib, resource, signal; from envcorr.jobs.mass_file import convert;"
        "from tests.test_mass_table import setup;"
        "signal.signal(signal.SIGXFSZ, signal.SIG_IGN); resource.setrlimit(resource.RLIMIT_FSIZE, (20_000, 20_000));"
        f"folder = pathlib.Path({str(tmp_path)!r}); convert(folder / 'in.csv', folder / 'out{suffix}', setup())"
    )
    done = subprocess.run([sys.executable, "-c", code], cwd=os.getcwd(), check=False, capture_output=True, text=True)
    assert done.returncode == 1
    assert "InputError" in done.stderr
    assert "could not be written" in done.stderr.splitlines()[-1]
    assert [file.name for file in tmp_path.iterdir()] == [path.name]


def test_command_line(tmp_path, foam):
    target = tmp_path / "out.csv"
    options = [f"--{name}={value}" for name, value in AIR.items()]
    arguments = ["mass", str(foam), f"--out={target}", "--adjusted=just before", *options]
    answer = CliRunner().invoke(cli, arguments)
    assert answer.exit_code == 0, answer.stderr
    assert "Not computed" in answer.stdout
    assert "passes through" in answer.stdout
    found = json.loads(CliRunner().invoke(cli, [*arguments, "--force", "--json"]).stdout)["result"]
    assert (found["rows"], found["not_computed"]) == (7, 5)
    assert sum(found["reasons"].values()) == 5
    refused = CliRunner().invoke(cli, arguments)
    assert refused.exit_code == 2
    assert "already there" in refused.stderr
    assert CliRunner().invoke(cli, ["mass", str(foam)]).exit_code == 2
