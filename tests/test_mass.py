"""The mass behind a reading: published cases, a reference library, and the way there and back."""

from __future__ import annotations

import json
import math

import GTC
import pytest
from click.testing import CliRunner
from hypothesis import given, settings
from hypothesis import strategies as st

from envcorr.cli import cli
from envcorr.errors import InputError
from envcorr.estimate import Estimate
from envcorr.jobs.mass import find_mass
from envcorr.jobs.solving import correctable, plan_reading
from envcorr.setup import Setup
from tests.scene import AIR, HPA, JUST_BEFORE, K0, MG, UG, about, cipm_2007, normal, setup

FOAM_AIR = {"air_temperature": K0 + 21.4, "air_humidity": 0.42, "air_pressure": 943.10 * HPA, "air_co2": 4e-4}


def mass(**said):
    return find_mass(setup(JUST_BEFORE, said))


@pytest.mark.parametrize(
    ("said", "correction"),
    [
        ({"load_density": 32.0, "load_density_kind": "envelope", "load_open_cell_fraction": 0.0}, 44.78),
        (
            {
                "load_density": 32.0,
                "load_density_kind": "envelope",
                "load_open_cell_fraction": 0.1,
                "load_solid_density": 1050.0,
            },
            40.28,
        ),
        ({"load_density": 1050.0, "load_density_kind": "gas-displacement"}, 1.15),
    ],
    ids=["closed cells", "a tenth open", "gas displacement"],
)
def test_foam(said, correction):
    """m (1 - rho/rho_s) = K R in air of 1.111 01 kg/m³, by hand; an invented sample read as 1.250 00 g."""
    found = mass(reading=1.25e-3, **FOAM_AIR, **said)
    assert found.correction / MG == pytest.approx(correction, abs=0.005)
    assert found.air_density.value == pytest.approx(1.11101, abs=5e-6)


def test_foam_uncertainty():
    """u(density) 0.5 kg/m³ and u(air) 0.215 %: U = 2 u = 1.47 mg, the density dominating (first order by hand)."""
    air = 1.11101
    found = mass(
        reading=1.25e-3,
        air_density=normal(air, 0.00215 * air),
        load_density=normal(32.0, 0.5),
        load_density_kind="envelope",
        load_open_cell_fraction=0.0,
    )
    # m = K R/(1 - rho/s), K = 1 - rho/8000 just before
    m = (1 - air / 8000) * 1.25e-3 / (1 - air / 32)
    by_density = m * (air / 32**2) / (1 - air / 32) * 0.5
    by_air = (m / 32 / (1 - air / 32) - m / 8000 / (1 - air / 8000)) * 0.00215 * air
    assert found.mass.u == pytest.approx(math.hypot(by_density, by_air), rel=5e-4)  # differences over ±u
    assert 2 * found.mass.u / MG == pytest.approx(1.47, abs=0.005)
    assert found.quantities[0].name == "load.density"
    assert found.k == pytest.approx(1.95996, abs=1e-5)  # JCGM 100:2008, table G.2, infinite degrees of freedom


def test_clause_9_3_of_jcgm_101():
    """JCGM 101:2008, 9.3: a weight of 100 g against a reference; conventional mass, u 0.0539 mg to first order."""
    found = mass(
        reading=Estimate(0.100001234, "normal", 0.020 * MG),
        air_density=about(1.20, 0.10),
        load_density=about(8000.0, 1000.0),
        load_density_kind="solid",
        balance_adjusting_weight_density=about(8000.0, 50.0),
        balance_adjusting_weight_error=normal(0.0, 0.050 * MG / 0.1),
    )
    assert (found.conventional_mass.value - 0.1) / MG == pytest.approx(1.234, abs=5e-5)
    assert found.conventional_mass.u / MG == pytest.approx(0.0539, abs=6e-5)  # the last half from the draws


def test_clause_9_3_of_jcgm_101_by_draws():
    """JCGM 101:2008, table 8: u 0.0754 mg (exact 0.07548), shortest interval as wide as the symmetric, 0.2991 mg."""
    found = find_mass(
        setup(
            JUST_BEFORE,
            reading=Estimate(0.100001234, "normal", 0.020 * MG),
            air_density=about(1.20, 0.10),
            load_density=about(8000.0, 1000.0),
            load_density_kind="solid",
            balance_adjusting_weight_density=about(8000.0, 50.0),
            balance_adjusting_weight_error=normal(0.0, 0.050 * MG / 0.1),
        ),
        count=2**17,
    ).by_draws["load.conventional_mass"]
    assert found.u / MG == pytest.approx(0.07548, abs=2e-4)
    assert (found.high - found.low) / MG == pytest.approx(0.2991, abs=1.5e-3)
    assert (found.low - 0.1) / MG == pytest.approx(1.0844, abs=1.5e-3)
    assert not found.agrees  # clause 9.3.2.6: the difference of densities is of second order in the air's own


def test_draws_agree_where_all_is_linear():
    """Two normals: the interval of a normal, mass ± 1.96 u."""
    said = {"air_density": 1.2, "load_density": normal(1000.0, 1.0), "reading": normal(5e-3, 10 * UG)}
    found = find_mass(setup(JUST_BEFORE, said), count=2**14)
    drawn = found.by_draws["load.mass"]
    assert drawn.agrees
    assert drawn.u == pytest.approx(found.mass.u, rel=5e-3)
    assert (drawn.low + drawn.high) / 2 == pytest.approx(found.mass.value, abs=0.02 * found.mass.u)
    assert (drawn.high - drawn.low) / found.mass.u == pytest.approx(2 * 1.96, rel=0.01)


def test_expansion_of_a_given_density():
    """Water's own: a density found at 20 °C with 207e-6 per K serves at 25 °C as Tanaka's at 25 °C (CRC handbook)."""
    said = {"air_temperature": K0 + 25.0, "air_pressure": 101_325.0, "air_humidity": 0.5, "reading": 10e-3}
    warm = mass(**said, load_density=997.05, load_density_kind="liquid")  # 25 °C
    grown = mass(
        **said,
        load_density=998.21,
        load_density_kind="liquid",
        load_expansion=2.33e-4,
        load_density_temperature=K0 + 20,
    )
    stiff = mass(**said, load_density=998.21, load_density_kind="liquid")
    assert grown.volume.value == pytest.approx(warm.volume.value, rel=5e-6)
    assert stiff.volume.value / warm.volume.value - 1 == pytest.approx(-1.163e-3, rel=0.01)
    hot = mass(
        **{**said, "load_warmer_by": 5.0, "air_temperature": K0 + 20.0},
        load_density=998.21,
        load_density_kind="liquid",
        load_expansion=2.33e-4,
        load_density_temperature=K0 + 20,
    )
    assert hot.volume.value == pytest.approx(warm.volume.value, rel=1e-4)  # its own temperature, not the air's


@pytest.mark.parametrize(
    ("density", "conventional"),
    # OIML D 28:2004, clause 5, in exact arithmetic: m (1 - 1.2/rho)/(1 - 1.2/8000) of 1 kg
    [(21500.0, 1.0000942002), (998.2067, 0.9989476863)],
    ids=["platinum-iridium", "water at 20 °C"],
)
def test_conventional_mass(density, conventional):
    found = mass(reading=1.0, air_density=1.2, load_density=density)
    assert found.conventional_mass.value / found.mass.value == pytest.approx(conventional, rel=1e-10)
    assert found.conventional_mass.value == pytest.approx(1.0, rel=1e-12)  # in air of 1.2 that is what it shows


def test_water_in_air():
    """m/W - 1 of water at 20 °C in air of 1.2 kg/m³ is 1053.4 mg/kg (OIML D 28, in exact arithmetic)."""
    found = mass(reading=1.0, air_density=1.2, load_density=998.2067, load_density_kind="liquid")
    assert found.correction / MG == pytest.approx(1053.422, abs=0.001)


def test_textbook_example():
    """Harris, Quantitative Chemical Analysis, chapter 2 (from memory): 100.00 g of tris (1.33 g/mL) are 100.08 g."""
    found = mass(reading=0.1, air_density=1.2, load_density=1330.0)
    assert found.mass.value * 1e3 == pytest.approx(100.08, abs=0.006)


def test_budget_against_gtc():
    """The whole budget of a reading in an open vessel, by the GUM Tree Calculator: value, u, effective dof."""
    t, p, h = (GTC.ureal(K0 + 21, 0.1), GTC.ureal(98_000.0, 30.0), GTC.ureal(0.45, 0.02))
    x, e = GTC.ureal(5e-4, 5e-5), GTC.ureal(0.0, 1.0)
    dt, dp = GTC.ureal(0.0, 0.1), GTC.ureal(0.0, 10.0)
    s, c, w = GTC.ureal(1050.0, 4.0, 8), GTC.ureal(2500.0, 20.0), GTC.ureal(8000.0, 30.0)
    r = GTC.ureal(5e-3, 20e-9, 9)

    def rho(temperature, pressure):
        return cipm_2007(temperature, pressure, h, x, GTC.exp) * (1 + 22e-6 * e)

    now, then = rho(t, p), rho(t - dt, p - dp)
    k = (1 - 1.2 / 8000) / (1 - 1.2 / w) * (1 - now / w)
    m = (k * r + (now - then) * 0.03 / c) / (1 - now / s)
    found = mass(
        reading=Estimate(5e-3, "normal", 20e-9, 9),
        air_temperature=normal(K0 + 21, 0.1),
        air_pressure=normal(98_000.0, 30.0),
        air_humidity=normal(0.45, 0.02),
        air_co2=normal(5e-4, 5e-5),
        cycle_temperature_change=normal(0.0, 0.1),
        cycle_pressure_change=normal(0.0, 10.0),
        load_density=Estimate(1050.0, "normal", 4.0, 8),
        container_mass=0.03,
        container_density=normal(2500.0, 20.0),
        balance_adjusting_weight_density=normal(8000.0, 30.0),
    )
    assert found.mass.value == pytest.approx(m.x, rel=1e-12)
    assert found.mass.u == pytest.approx(m.u, rel=1e-6)
    assert found.dof == pytest.approx(m.df, rel=1e-4)


def test_bands_widen_and_never_move():
    """A static band of a fixed pull a: rms about zero is a, whatever its direction (by hand)."""
    plain = mass(reading=5e-3, load_density=1050.0, **AIR)
    charged = mass(
        reading=5e-3,
        load_density=1050.0,
        static_charge=1e-9,
        static_distance=0.04,
        static_direction="floor",
        balance_repeatability=20 * UG,
        balance_scale_interval=10 * UG,
        **AIR,
    )
    assert charged.mass.value == plain.mass.value
    pull = next(row.u for row in charged.effects if row.name == "static_charge")
    # image charge, Jackson 2.1: 0.143 mg; over the buoyancy factor 1 - rho/rho_s + ... of the reading
    assert pull == pytest.approx(0.143 * MG, rel=5e-3)
    noise = next(row.u for row in charged.effects if row.name == "repeatability")
    assert noise == pytest.approx(20 * UG, rel=5e-3)
    assert charged.mass.u == pytest.approx(math.sqrt(plain.mass.u**2 + pull**2 + noise**2), rel=1e-6)


def test_repeats_lessen_the_noise():
    said = {"reading": 5e-3, "load_density": 8000.0, **AIR}
    noise = {"balance_repeatability": 20 * UG, "balance_scale_interval": 10 * UG}
    found = mass(**said, **noise, cycle_repeats=4.0)
    assert next(row.u for row in found.effects if row.name == "repeatability") == pytest.approx(10 * UG, rel=0.02)


def test_degrees_of_freedom_of_the_repeatability():
    """Ten readings behind s alone: nine degrees of freedom, k = t_0.95(9) = 2.26 (JCGM 100:2008, table G.2)."""
    found = mass(
        reading=5e-3,
        load_density=8000.0,
        air_density=1.2,
        balance_repeatability=20 * UG,
        balance_scale_interval=10 * UG,
        balance_repeatability_readings=10.0,
    )
    assert found.dof == pytest.approx(9.0, rel=1e-6)
    assert found.k == pytest.approx(2.26, abs=0.0055)


def test_gross_and_tare():
    """Both uncertainties of the readings add in quadrature (JCGM 100:2008, (10))."""
    said = {"load_density": 8000.0, "air_density": 1.2}
    found = mass(gross=normal(35e-3, 3 * UG), tare=normal(30e-3, 4 * UG), **said)
    assert found.reading.value == pytest.approx(5e-3, rel=1e-15)
    assert found.mass.u == pytest.approx(5 * UG, rel=1e-3)


def test_a_sensor_makes_a_bare_value_uncertain():
    bare = mass(reading=1e-3, load_density=1050.0, **AIR)
    sensed = find_mass(
        Setup(estimates={**bare.setup.estimates, "sensors.air.pressure": normal(0.0, 50.0)}, choices=bare.setup.choices)
    )
    assert sensed.mass.value == bare.mass.value
    # d m/m = d rho (1/s - 1/8000), d rho/rho = 9.916e-6 per Pa (CIPM-2007; OIML R 111-1, C.6.3.6 prints 1e-5)
    expected = bare.mass.value * 1.1993 * 50 * 9.916e-6 * (1 / (1050 - 1.1993) - 1 / (8000 - 1.1993))
    assert math.sqrt(sensed.mass.u**2 - bare.mass.u**2) == pytest.approx(expected, rel=2e-3)


def test_the_error_of_a_sensor_is_a_difference():
    """On the page and in JSON it has no zero of degrees Celsius in it."""
    found = mass(
        **FOAM_AIR,
        reading=1.25e-3,
        load_density=1050.0,
        sensors_air_temperature=normal(0.0, 0.2),
        load_density_kind="solid",
    )
    row = next(row for row in found.quantities if row.name == "sensors.air.temperature")
    assert row.kind == "temperature difference"


def test_what_is_lacking_is_said():
    with pytest.raises(InputError, match=r"reading: is not given\. Give the net reading"):
        mass(load_density=8000.0, **AIR)
    with pytest.raises(InputError, match=r"air buoyancy: cannot be corrected for: lacks load\.density"):
        mass(reading=1e-3, **AIR)


def test_density_from_an_uncorrected_weighing_is_mended_and_said():
    """rho = K rho' + rho_air (two weighings in one air, by hand), and the notice says so."""
    found = mass(reading=1e-3, load_density=100.0, load_density_from="uncorrected weighing", air_density=1.2)
    true = (1 - 1.2 / 8000) * 100 + 1.2
    assert found.mass.value / found.volume.value == pytest.approx(true, rel=1e-9)
    assert any("not corrected for buoyancy" in n.sentence for n in found.notices)


@settings(max_examples=60, deadline=None)
@given(
    mass=st.floats(1e-6, 0.2),
    density=st.floats(3.0, 22_000.0),
    closed=st.sampled_from(["never", "each time", "kept shut"]),
    container=st.floats(1e-3, 0.1),
    tare_pressure=st.floats(95_000.0, 105_000.0),
    tilt=st.floats(-0.02, 0.02),
)
def test_there_and_back(mass, density, closed, container, tare_pressure, tilt):
    """A mass through the model of the room gives a reading, and the reading gives the mass back."""
    said = {
        **AIR,
        **JUST_BEFORE,
        "load_density": density,
        "container_mass": container,
        "container_density": 2500.0,
        "container_outer_volume": 1.2e-4,
        "container_closed": closed,
        "tare_air_pressure": tare_pressure,
        "bench_tilt_x": tilt,
        "bench_tilt_y": 0.0,
        "adjusted_bench_tilt_x": 0.0,
        "adjusted_bench_tilt_y": 0.0,
    }
    plan = plan_reading(setup(said), mass)
    reading = mass + float(plan.parts(plan.centres()).total(correctable(plan)))
    found = find_mass(setup(said, reading=reading))
    scale = max(mass, abs(reading))
    assert abs(found.mass.value - mass) <= 1e-12 * scale


def run(*arguments):
    return CliRunner().invoke(cli, ["mass", *arguments])


FOAM = (
    "--reading=1.25000 g",
    "--density=32 kg/m³",
    "--density-kind=envelope",
    "--set=load.open_cell_fraction=0",
    "--temperature=21.4 °C",
    "--humidity=42 %",
    "--pressure=943.10 hPa",
    "--co2=400 ppm",
    "--adjusted=just before",
)


def test_command_line():
    answer = run(*FOAM)
    assert answer.exit_code == 0
    assert "+44.7800 mg" in answer.stdout or "+44.78" in answer.stdout
    assert max(len(line) for line in answer.stdout.splitlines()) <= 80
    found = json.loads(run(*FOAM, "--json").stdout)
    assert found["result"]["correction"]["value"] == pytest.approx(44.78, abs=0.005)
    assert found["result"]["mass"]["unit"] == "g"
    assert {"mass", "conventional_mass", "correction", "air_density", "budget"} <= set(found["result"])


def test_command_line_refuses():
    for arguments, words in (
        ((), "reading: is not given"),
        (("--reading=1 g",), "air buoyancy: cannot be corrected for"),
        ((*FOAM, "--probability=2 %"), "--probability"),
        ((*FOAM, "--density-kind=bulk"), "bulk"),
    ):
        answer = run(*arguments)
        assert answer.exit_code == 2
        assert words in answer.stderr
        assert answer.stdout == ""


def test_a_set_up_file_supplies_the_rest(tmp_path):
    file = tmp_path / "bench.toml"
    file.write_text('[air]\ntemperature = "21 °C"\npressure = "980 hPa"\nhumidity = "40 %"\n', encoding="utf-8")
    answer = run(f"--setup={file}", "--reading=1 g", "--density=1050 kg/m³")
    assert answer.exit_code == 0, answer.stderr
    assert "Conventional mass" in answer.stdout


def test_the_room_check_and_the_mass_agree():
    """What a room check says will be left after the correction is the uncertainty that the mass then has."""
    from envcorr.jobs.room import check_room

    said = {
        **FOAM_AIR,
        **JUST_BEFORE,
        "load_density": normal(32.0, 0.2),
        "load_density_kind": "envelope",
        "load_open_cell_fraction": 0.0,
        "balance_repeatability": 20 * UG,
        "balance_scale_interval": 10 * UG,
    }
    one = find_mass(setup(said, reading=1.25e-3))
    room = check_room(setup(said, load_mass=one.mass.value, target_resolution=1 * MG), draws=2**14)
    assert room.corrected.whole.summary.u == pytest.approx(one.mass.u, rel=5e-3)


def test_a_corrected_reading_is_not_corrected_twice():
    """Where the balance corrects for the air itself, the reading is the mass, and that is said."""
    once = mass(reading=1e-3, load_density=1050.0, **AIR)
    kept = mass(reading=1e-3, load_density=1050.0, balance_corrects_buoyancy="yes", **AIR)
    assert kept.mass.value == 1e-3
    assert once.correction > 0.9 * 1e-6  # 1.05 mg per gram less 0.15 mg, by hand
    assert any("not corrected again" in n.sentence for n in kept.notices)
    assert not any("not corrected again" in n.sentence for n in once.notices)
