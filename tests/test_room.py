"""The room check: worked cases with figures found by hand or by another computation, and the rules of the verdict."""

import math

import numpy as np
import pytest
from scipy import stats

from envcorr.errors import InputError
from envcorr.jobs.room import check_room
from envcorr.setup import Correlation, Setup
from tests.scene import AIR, AIR_DENSITY, HPA, K0, MG, ROOM, UG, about, foam, normal, row, setup

# Foam ----------------------------------------------------------------------------------------------------------------


@pytest.mark.parametrize(
    ("kind", "mass", "density", "more", "error"),
    [
        pytest.param("envelope", 1.29478e-3, 32.0, {"load_open_cell_fraction": 0.0}, -44.78, id="all cells closed"),
        pytest.param(
            "envelope",
            1.29028e-3,
            32.0,
            {"load_open_cell_fraction": 0.10, "load_solid_density": 1050.0},
            -40.28,
            id="one cell in ten open",
        ),
        pytest.param("gas-displacement", 1.25115e-3, 1050.0, {}, -1.15, id="gas displacement"),
    ],
)
def test_foam(kind, mass, density, more, error):
    """What 1.250 00 g of foam reads too little [mg], in air of 1.111 01 kg/m³ (worked by another program)."""
    result = check_room(foam(mass, kind, density, **more))
    assert result.as_read.whole.summary.mean / MG == pytest.approx(error, abs=0.01)
    assert row(result, "buoyancy").mean_error / MG == pytest.approx(error, abs=0.01)
    assert row(result, "buoyancy").correction / MG == pytest.approx(-error, abs=0.01)
    assert result.corrected.whole.summary.mean / MG == pytest.approx(0.0, abs=1e-3)


def test_foam_uncertainty():
    """All cells closed: u of 0.5 kg/m³ of the density and of 0.215 % of the air make U = 1.47 mg, k = 2.

    By hand: the air carries 1.29478 g x 1.11101/32 = 44.95 mg, of which u(density) is 1.5625 % and u(air) 0.215 %; the
    mass is K R/(1 - 1.11101/32), so the correction's own error carries on by K/(1 - 1.11101/32) = 1.0358.
    """
    air = normal(1.11101, 0.00215 * 1.11101)
    said = {**dict.fromkeys(AIR), "air_density": air, "load_open_cell_fraction": 0.0}
    result = check_room(foam(1.29478e-3, "envelope", normal(32.0, 0.5), **said))
    expected = 2 * 44.95 * math.hypot(0.015625, 0.00215) * (1 - 1.11101 / 8000) / (1 - 1.11101 / 32)
    assert 2 * result.corrected.surroundings.summary.u / MG == pytest.approx(expected, rel=2e-3)
    assert result.quantities[0].name == "load.density"


# The air of a week ---------------------------------------------------------------------------------------------------

WEATHER = {
    "load_density": 1050.0,
    "load_density_kind": "gas-displacement",
    "air_pressure": about(101_325.0, 20 * HPA),
    "adjusted_when": "unknown",
    "adjusted_air_density": AIR_DENSITY,
}


def test_weather_uncorrected():
    """5 g at 1050 kg/m³ under ±20 hPa: ±0.11 mg.

    By hand: rho = 1.19931 kg/m³ changes by 9.916e-6 per Pa (CIPM-2007), so by 0.02378 kg/m³ for 20 hPa; the volume is
    5 g/1050 kg/m³ = 4.762 cm³; their product 0.1133 mg. Of a rectangular distribution 95 % lie within 0.95 of that.
    """
    found = check_room(setup(ROOM, WEATHER)).as_read.surroundings.summary
    middle = -5e-3 * (AIR_DENSITY / 1050 - AIR_DENSITY / 8000)  # adjusted in the mean air, with 8000 kg/m³
    assert found.mean == pytest.approx(middle, rel=2e-4)
    low, high = found.interval
    assert (high - low) / 2 / MG == pytest.approx(0.95 * 0.1133, abs=5e-4)
    assert found.u / MG == pytest.approx(0.1133 / math.sqrt(3), abs=3e-4)


def test_weather_with_a_barometer():
    """With a barometer of u = 0.5 hPa 0.003 mg is left: 1.19931 kg/m³ x 9.916e-6 per Pa x 50 Pa x 4.762 cm³."""
    result = check_room(setup(ROOM, WEATHER, sensors_air_pressure=normal(0.0, 0.5 * HPA)))
    found = result.corrected.surroundings.summary
    assert found.u / MG == pytest.approx(0.00283, abs=3e-5)
    assert found.mean / MG == pytest.approx(0.0, abs=1e-4)
    assert result.as_read.surroundings.summary.u / MG == pytest.approx(0.0654, abs=3e-4)
    without = check_room(setup(ROOM, WEATHER)).corrected.surroundings.summary
    assert without.u / MG == pytest.approx(0.0654, abs=3e-4)  # the correction at the mean air follows no weather


@pytest.mark.parametrize(
    ("tare_sensor", "u"), [(normal(0.0, 0.5 * HPA), 0.0841), (None, 0.0)], ids=["independent", "common"]
)
def test_flask_kept_shut(tare_sensor, u):
    """A flask of 100 cm³ kept shut, read with a barometer of u = 0.5 hPa: 0.084 mg, or nothing.

    By hand: 1.19931 kg/m³ x 9.916e-6 per Pa x 50 Pa x 1e-4 m³ = 0.0595 mg at each reading; sqrt(2) times that where the
    two errors are independent. What is common to both readings cancels.
    """
    flask = {
        "container_mass": 0.06,
        "container_outer_volume": 1e-4,
        "container_closed": "kept shut",
        "tare_air_pressure": about(101_325.0, 3 * HPA),
        "sensors_air_pressure": normal(0.0, 0.5 * HPA),
        "tare_sensors_air_pressure": tare_sensor,
        "adjusted_when": "unknown",
        "adjusted_air_density": AIR_DENSITY,
    }
    result = check_room(setup(ROOM, flask))
    assert result.corrected.surroundings.summary.u / MG == pytest.approx(u, abs=5e-4)
    # uncorrected: ±3 hPa x 0.1189 mg per hPa
    assert result.as_read.surroundings.summary.u / MG == pytest.approx(3 * 0.1189 / math.sqrt(3), abs=2e-3)


# Repeats -------------------------------------------------------------------------------------------------------------

QUIET = {"balance_scale_interval": 10 * UG, "balance_repeatability": 0.0}


@pytest.mark.parametrize("repeats", [1, 10])
def test_rounding_is_not_divided_by_repeats(repeats):
    """s = 0: two independent roundings of ±d/2 differ by a triangular ±d, u = d/sqrt(6) (JCGM 101:2008, 6.4.5)."""
    result = check_room(setup(ROOM, QUIET, cycle_repeats=float(repeats)), draws=2**16)
    found = result.as_read.whole.summary
    assert found.u / (10 * UG) == pytest.approx(1 / math.sqrt(6), rel=3e-3)
    # 95 % of a triangular distribution lie within 1 - sqrt(0.05) of its half-width
    assert found.largest / (10 * UG) == pytest.approx(1 - math.sqrt(0.05), rel=3e-3)


@pytest.mark.parametrize("repeats", [1, 4, 10])
def test_repeats_divide_the_variance_of_the_scatter(repeats):
    """JCGM 100:2008, 4.2.3: the standard deviation of a mean of n is s/sqrt(n); one effect's row stays one weighing."""
    result = check_room(setup(ROOM, cycle_repeats=float(repeats)))
    assert result.as_read.whole.summary.u == pytest.approx(15 * UG / math.sqrt(repeats), rel=1e-2)
    assert row(result, "repeatability").u == pytest.approx(15 * UG, rel=3e-3)
    assert row(result, "repeatability").scatter == pytest.approx(15 * UG, rel=3e-2)


def test_what_never_varies_is_not_divided():
    said = {"balance_nonlinearity": about(0.0, 60 * UG), "load_density": normal(1000.0, 20.0)}
    one, many = (check_room(setup(ROOM, said, cycle_repeats=n)) for n in (1.0, 25.0))
    fixed = math.hypot(60 * UG / math.sqrt(3), 5e-3 * AIR_DENSITY * 20 / 1000**2)
    assert many.as_read.whole.summary.u == pytest.approx(math.hypot(fixed, 15 * UG / 5), rel=1e-2)
    assert one.as_read.whole.summary.u == pytest.approx(math.hypot(fixed, 15 * UG), rel=1e-2)
    assert row(one, "nonlinearity").scatter == 0.0
    assert row(one, "buoyancy").scatter == pytest.approx(0.0, abs=1e-12)


def test_the_error_of_a_sensor_is_not_divided():
    """A barometer reads as wrong at every repeat; the weather it follows is averaged."""
    barometer = {"sensors_air_pressure": normal(0.0, 0.5 * HPA), "cycle_repeats": 25.0}
    result = check_room(setup(ROOM, WEATHER, barometer))
    # 2.83 µg and 0.0654 mg for one weighing, above
    assert result.corrected.surroundings.summary.u / MG == pytest.approx(0.00283, rel=0.02)
    assert result.as_read.surroundings.summary.u / MG == pytest.approx(0.0654 / 5, rel=0.02)


def test_scatter_tells_what_a_repeat_would_change():
    """Weather varies, the density does not: the scatter of buoyancy is that of the weather alone (0.0654 mg, above)."""
    result = check_room(setup(ROOM, WEATHER, load_density=normal(1050.0, 100.0)))
    assert row(result, "buoyancy").scatter / MG == pytest.approx(0.0654, rel=0.03)
    assert row(result, "buoyancy").u / MG > 0.4


# A difference of two weighings ---------------------------------------------------------------------------------------


def test_a_difference_has_no_mean_and_twice_the_variance():
    """JCGM 100:2008, (11a): the variances of two independent weighings add; what never varies cancels."""
    said = {
        "target_measurand": "difference",
        "load_density": normal(1050.0, 50.0),
        "balance_nonlinearity": about(0, UG),
    }
    result = check_room(setup(ROOM, said), draws=2**16)
    found = result.as_read.whole.summary
    assert found.mean == pytest.approx(0.0, abs=0.01 * 15 * UG)
    assert found.u == pytest.approx(math.sqrt(2) * 15 * UG, rel=1e-2)
    assert result.as_read.surroundings.summary.largest < 1e-15
    assert result.first_order.budget.u == pytest.approx(math.sqrt(2) * 15 * UG, rel=1e-2)


def test_the_resolution_of_a_difference():
    """1.96 sqrt(2) s, whichever the measurand is."""
    for measurand in ("mass", "difference"):
        said = {"target_measurand": measurand, "load_density": normal(1050.0, 50.0)}
        result = check_room(setup(ROOM, said), draws=2**16)
        expected = stats.norm.ppf(0.975) * math.sqrt(2) * 15 * UG
        assert result.difference_resolution["as_read"] == pytest.approx(expected, rel=0.04)


# Shares and figures --------------------------------------------------------------------------------------------------


def test_shares_are_the_shares_of_the_variance():
    """Independent errors of mean zero: each has its variance's share of the whole, and they add to one."""
    said = {
        "balance_nonlinearity": about(0.0, 30 * UG),
        "balance_eccentric_loading": about(0.0, 20 * UG),
        "balance_adjusting_weight_error": normal(0.0, 2e-6),
    }
    result = check_room(setup(ROOM, said), draws=2**16)
    variances = {
        "repeatability": (15 * UG) ** 2,
        "nonlinearity": (30 * UG) ** 2 / 3,
        "eccentric_loading": (20 * UG) ** 2 / 3,
        "adjusting_weight": (2e-6 * 5e-3) ** 2,
    }
    whole = sum(variances.values())
    for name, variance in variances.items():
        assert row(result, name).share["whole"] == pytest.approx(variance / whole, abs=5e-3)
    # What is left: the gain of 1/K - 1 = b/(1 - b) acts on the pulls, that of the weight on what the air took, -b m.
    air = AIR_DENSITY / 8000
    interaction = air / (1 - air) * (whole - variances["adjusting_weight"]) - air * variances["adjusting_weight"]
    shares = [found.share["whole"] for found in result.effects]
    assert 1 - sum(shares) == pytest.approx(interaction / whole, rel=0.02)
    assert result.interaction_share["whole"] == pytest.approx(interaction / whole, rel=0.02)


def test_an_offsetting_effect_has_a_negative_share():
    """E = A + B with B = -A/2: mean(B E)/mean(E²) is (-1/2)(1/2)/(1/4) = -1, and that of A 2."""
    share = 0.5 * AIR_DENSITY * (1 / 1050 - 1 / 8000) / (1 - AIR_DENSITY / 8000)
    said = {**dict.fromkeys(AIR), "air_density": AIR_DENSITY, "load_density": 1050.0}
    balance = {"balance_repeatability": 1e-15, "balance_scale_interval": 1e-15}
    result = check_room(setup(ROOM, said, balance, balance_adjusting_weight_error=share), as_read=True)
    assert row(result, "adjusting_weight").share["whole"] == pytest.approx(-1.0, rel=4e-3)
    assert row(result, "buoyancy").share["whole"] == pytest.approx(2.0, rel=4e-3)


def test_supported_resolution_and_probability():
    """A normal error of s = 15 µg: 95 % within 1.96 s; within r = 0.03 mg lie erf(2/sqrt(2)) = 95.45 %."""
    result = check_room(setup(ROOM, target_resolution=30 * UG), draws=2**16)
    whole = result.as_read.whole
    assert whole.supported_resolution == pytest.approx(1.95996 * 15 * UG, rel=3e-3)
    assert whole.conformance_probability == pytest.approx(0.9545, abs=1e-3)
    assert whole.summary.largest == whole.supported_resolution


def test_the_surroundings_have_half_the_resolution():
    """The bound of the surroundings is target.within of the resolution, so they support twice their e95."""
    result = check_room(setup(ROOM, WEATHER))
    surroundings = result.as_read.surroundings
    assert surroundings.bound == pytest.approx(0.05 * MG, rel=1e-12)
    assert surroundings.supported_resolution == pytest.approx(2 * surroundings.summary.largest, rel=1e-12)
    stricter = check_room(setup(ROOM, WEATHER, target_within=0.2)).as_read.surroundings
    assert stricter.supported_resolution == pytest.approx(5 * stricter.summary.largest, rel=1e-12)


def test_other_probabilities():
    """99 % of a normal lie within 2.576 s."""
    result = check_room(setup(ROOM, target_probability=0.99), draws=2**16)
    assert result.as_read.whole.summary.largest == pytest.approx(2.5758 * 15 * UG, rel=5e-3)
    assert result.first_order.budget.k == pytest.approx(2.5758, abs=1e-3)


def test_first_order_agrees_where_all_is_normal():
    """JCGM 101:2008, clause 8: validated."""
    result = check_room(setup(ROOM))
    assert result.first_order.agrees
    assert result.first_order.blind_to == ()


def test_correlated_inputs_add_or_cancel():
    """JCGM 100:2008, 5.2.2, note 1: with r = +1 contributions add, with r = -1 they cancel.

    At 20 °C 1 hPa and 0.2688 K change the air density alike: 0.09916 % per hPa, -0.3692 % per K (CIPM-2007).
    """
    air = {"air_pressure": normal(101_325.0, 100.0), "air_temperature": normal(K0 + 20, 0.09916 / 0.36918)}
    air |= {"load_density": 100.0, "adjusted_when": "unknown", "adjusted_air_density": AIR_DENSITY}
    one = 5e-3 / 100 * AIR_DENSITY * 0.0009916
    formula = 5e-3 / 100 * AIR_DENSITY * 22e-6  # of CIPM-2007 itself
    for r, air_u in ((1.0, 0.0), (-1.0, 2 * one), (0.0, math.sqrt(2) * one)):
        expected = math.hypot(air_u, formula)
        said = setup(ROOM, air)
        tied = Setup(said.estimates, said.choices, (Correlation("air.temperature", "air.pressure", r),))
        result = check_room(tied)
        assert result.as_read.surroundings.summary.u == pytest.approx(expected, rel=1e-2)
        names = {found.name: found.together_with for found in result.quantities}
        assert names["air.pressure"] == (("air.temperature",) if r else ())


def test_a_correlation_with_what_is_not_drawn_is_refused():
    said = setup(ROOM)
    tied = Setup(said.estimates, said.choices, (Correlation("air.temperature", "air.dew_point", 0.5),))
    with pytest.raises(InputError, match=r"air\.dew_point is not drawn"):
        check_room(tied)


# The verdict ---------------------------------------------------------------------------------------------------------


def test_reached():
    result = check_room(setup(ROOM))
    assert result.verdict.answer == "reached"
    assert result.verdict.state == "as_read"


def test_reached_once_corrected():
    """The foam is 44.78 mg off as read, and known within far less than the target of 10 mg."""
    result = check_room(foam(1.29478e-3, "envelope", 32.0, load_open_cell_fraction=0.0))
    assert result.as_read.passes is False
    assert result.verdict.answer == "reached once corrected"
    assert "air buoyancy" in result.verdict.reason


HOOD = {"balance_scatter_on": 70 * UG, "balance_scatter_off": 20 * UG}


def test_reached_once_treated():
    """A hood adds sqrt(70² - 20²) = 67 µg, more than half of 0.1 mg in one of two weighings; without it all is well."""
    result = check_room(setup(ROOM, HOOD))
    assert row(result, "disturbance").u == pytest.approx(math.sqrt(70**2 - 20**2) * UG, rel=3e-3)
    assert result.verdict.answer == "reached once treated"
    assert result.verdict.treat == ("disturbance",)
    assert result.verdict.first_to_improve == "disturbance"
    assert "switch off or shield the source" in result.verdict.reason
    assert row(result, "disturbance").passes_without is True


def test_not_reached_for_the_surroundings():
    result = check_room(setup(ROOM, WEATHER, target_resolution=0.02 * MG, balance_repeatability=1 * UG))
    assert result.verdict.answer == "not reached"
    assert not result.verdict.limited_by_balance
    assert result.verdict.first_to_improve == "buoyancy"
    assert result.quantities[0].name == "air.pressure"


def test_limited_by_the_balance():
    """s = 60 µg: 1.96 s is more than 0.1 mg, whatever the room."""
    result = check_room(setup(ROOM, balance_repeatability=60 * UG))
    assert result.verdict.answer == "not reached"
    assert result.verdict.limited_by_balance
    assert "limited by the balance" in result.verdict.reason
    assert result.decisive == "whole"
    assert result.verdict.first_to_improve == "repeatability"


def test_undecided_where_the_probability_is_too_near():
    """The target is the very resolution that is supported: P is the demanded probability."""
    supported = check_room(setup(ROOM)).as_read.whole.supported_resolution
    result = check_room(setup(ROOM, target_resolution=supported), draws=2**14)
    assert result.verdict.answer == "undecided"
    assert "too near" in result.verdict.reason
    for factor, answer in ((1.05, "reached"), (0.95, "not reached")):
        assert check_room(setup(ROOM, target_resolution=factor * supported)).verdict.answer == answer


def test_undecided_where_buoyancy_is_not_assessed():
    unknown = {"load_density": None}
    result = check_room(setup(ROOM, unknown))
    assert result.verdict.answer == "undecided"
    assert "air buoyancy" in result.verdict.reason
    lacking = {missing.effect.name: missing.lacks for missing in result.not_assessed}
    assert lacking["buoyancy"] == ("load.density",)
    waived = check_room(setup(ROOM, unknown, waived=("buoyancy",)))
    assert waived.verdict.answer == "reached"
    assert "buoyancy" in [missing.effect.name for missing in waived.not_assessed]


def test_a_failure_is_a_failure_though_something_is_missing():
    result = check_room(setup(ROOM, load_density=None, balance_repeatability=60 * UG))
    assert result.verdict.answer == "not reached"


def test_repeatability_found_here_already_holds_the_disturbance():
    result = check_room(setup(ROOM, HOOD, balance_repeatability_from="here"))
    assert "disturbance" not in [found.name for found in result.effects]
    assert result.verdict.answer == "reached"


@pytest.mark.parametrize("name", ["target_resolution", "load_mass"])
def test_what_cannot_be_missing(name):
    with pytest.raises(InputError, match="is not given"):
        check_room(setup(ROOM, {name: None}))


# Sameness ------------------------------------------------------------------------------------------------------------


def numbers(result):
    return [
        (result.total(state).surroundings, result.total(state).whole) for state in ("as_read", "corrected", "treated")
    ] + [(found.name, found.share, found.e95_without, found.interval) for found in result.effects]


def test_the_same_seed_gives_the_same_figures():
    said = {**WEATHER, **HOOD, "cycle_repeats": 3.0}
    first, second = check_room(setup(ROOM, said)), check_room(setup(ROOM, said))
    assert repr(numbers(first)) == repr(numbers(second))
    other = check_room(setup(ROOM, said), seed=1)
    assert repr(numbers(first)) != repr(numbers(other))
    for state in ("as_read", "corrected"):
        one, two = first.total(state).whole, other.total(state).whole
        error = np.hypot(one.summary.largest_error, two.summary.largest_error)
        assert abs(one.summary.largest - two.summary.largest) < 5 * error


def test_draws_are_as_asked():
    assert check_room(setup(ROOM), draws=20_000).draws == 20 * 1024
    assert check_room(setup(ROOM), draws=10).draws == 16 * 1024
