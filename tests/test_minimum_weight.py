"""Minimum weights against closed forms."""

import math

import pytest
from scipy import optimize, stats

from envcorr.jobs.room import check_room
from tests.scene import MG, ROOM, UG, about, normal, row, setup

# a small bench: an invented room with figures from another computation; d 10 µg, s 6 µg, a sample of 15 mg
BENCH = {
    **ROOM,
    "load_mass": 15 * MG,
    "balance_scale_interval": 10 * UG,
    "balance_repeatability": 6 * UG,
    "target_resolution": 50 * UG,
}
Z = stats.norm.ppf(0.975)
SLACK = 0.02  # the mass is found to 0.1 %, the quantile of 4096 draws of the error to 1 %


def least(*parts, **said):
    return check_room(setup(BENCH, *parts, said)).minimum_weight


def test_bench():
    """2 s/0.10 % (USP <41>, from memory): 12 mg."""
    found = least()
    assert found.accuracy == 0.001
    assert found.repeatability.mass / MG == pytest.approx(12.0, rel=1e-9)


def test_bench_in_a_draught():
    """A draught that adds 7 µg: s of sqrt(6² + 7²) = 9.22 µg makes it 18.4 mg, and 15 mg are too little."""
    scatter = {"balance_scatter_on": math.sqrt(8**2 + 7**2) * UG, "balance_scatter_off": 8 * UG}
    found = least(scatter)
    assert found.repeatability.mass / MG == pytest.approx(18.4, abs=0.05)
    assert found.repeatability.mass / MG == pytest.approx(2 * math.hypot(6, 7), rel=1e-9)
    assert found.repeatability.mass > 15 * MG
    # where the repeatability was found in the draught, the draught is in it already
    assert least(scatter, balance_repeatability_from="here").repeatability.mass / MG == pytest.approx(12.0, rel=1e-9)


@pytest.mark.parametrize("s", [0.0, 4.0])
def test_never_below_the_rounding(s):
    """2 x 0.41 d/0.0010 = 820 d (USP <41>): 8.2 mg at d = 0.01 mg."""
    assert least(balance_repeatability=s * UG).repeatability.mass / MG == pytest.approx(8.2, rel=1e-9)


@pytest.mark.parametrize("accuracy", [0.0005, 0.002])
def test_other_accuracies(accuracy):
    found = least(target_relative_accuracy=accuracy)
    assert found.repeatability.mass == pytest.approx(12 * UG / accuracy, rel=1e-9)
    assert found.as_read.mass == pytest.approx(Z * 6 * UG / accuracy, rel=SLACK)


def test_scatter_alone():
    """Steel against steel: the error is that of the balance, within 1.96 s with 95 %."""
    found = least()
    for whole in (found.as_read, found.corrected):
        assert whole.mass == pytest.approx(Z * 6 * UG / 0.001, rel=SLACK)


def test_rounding_alone():
    """s = 0: the rounding of two readings lies within d (1 - sqrt(0.05)) with 95 %."""
    found = least(balance_repeatability=0.0)
    assert found.as_read.mass == pytest.approx(10 * UG * (1 - math.sqrt(0.05)) / 0.001, rel=SLACK)


@pytest.mark.parametrize("mass", [1.5 * MG, 15 * MG, 200e-3])
def test_whichever_load_is_on_the_pan(mass):
    """The minimum weight belongs to the balance, not to the load of the set-up."""
    found = least(load_mass=mass)
    assert found.as_read.mass == pytest.approx(Z * 6 * UG / 0.001, rel=SLACK)


def test_uncorrected_water():
    """In air of 1.2 kg/m³ water reads 0.105 % too little at any mass, more than 0.10 %: none, for buoyancy.

    -(1.2/998.2 - 1.2/8000) = -0.10522 %; corrected, the scatter is left.
    """
    water = {"load_density": 998.2, "load_density_kind": "liquid"}
    found = least(water)
    assert found.as_read.mass is None
    assert found.as_read.reason == "none: air buoyancy"
    assert found.corrected.mass == pytest.approx(Z * 6 * UG / 0.001, rel=SLACK)
    # 0.11 % leave 0.0048 % to the scatter, one-sided: 1.645 x 6 µg/0.0048 % = 206 mg, if the balance takes as much
    looser = {**water, "target_relative_accuracy": 0.0011}
    bias = 1.1993139 * (1 / 998.2 - 1 / 8000) / (1 - 1.1993139 / 8000)
    assert least(looser).as_read.mass == pytest.approx(1.645 * 6 * UG / (0.0011 - bias), rel=SLACK)
    assert least(looser, balance_max_capacity=100 * MG).as_read.mass is None
    assert least(looser, balance_max_capacity=300 * MG).as_read.mass is not None


def test_a_bias_beside_the_scatter():
    """Density 2000 kg/m³: P(|b m + s z| <= a m) = 0.95, solved by SciPy."""
    said = {"load_density": 2000.0}
    bias = row(check_room(setup(BENCH, said)), "buoyancy").mean_error / (15 * MG)
    assert bias == pytest.approx(-1.19931 * (1 / 2000 - 1 / 8000), rel=1e-3)

    def missing(mass):
        inside = stats.norm.cdf((0.001 - bias) * mass / (6 * UG)) - stats.norm.cdf((-0.001 - bias) * mass / (6 * UG))
        return inside - 0.95

    expected = optimize.brentq(missing, 1 * MG, 1000 * MG)
    assert least(said).as_read.mass == pytest.approx(expected, rel=SLACK)


def test_scatter_and_a_relative_error():
    """Both normal: 1.96 sqrt(s² + (b m)²) = a m, so m = 1.96 s/sqrt(a² - (1.96 b)²)."""
    share = 3e-4
    found = least(balance_adjusting_weight_error=normal(0.0, share))
    expected = Z * 6 * UG / math.sqrt(0.001**2 - (Z * share) ** 2)
    assert found.corrected.mass == pytest.approx(expected, rel=SLACK)
    assert found.repeatability.mass / MG == pytest.approx(12.0, rel=1e-9)
    too_much = least(balance_adjusting_weight_error=normal(0.0, 6e-4))
    assert too_much.corrected.reason == "none: adjusting weight and drift"


def test_a_constant_error():
    """A rectangular ±c alone: 95 % lie within 0.95 c."""
    quiet = {"balance_repeatability": 0.0, "balance_scale_interval": 1e-12}
    found = least(quiet, balance_nonlinearity=about(0.0, 40 * UG))
    assert found.as_read.mass == pytest.approx(0.95 * 40 * UG / 0.001, rel=SLACK)


def test_a_volume_grows_with_the_mass():
    """A volume given directly belongs to the load's mass: the density stays the same."""
    by_density = least(load_density=2000.0)
    by_volume = least(load_density=None, load_volume=15 * MG / 2000)
    assert by_volume.as_read.mass == pytest.approx(by_density.as_read.mass, rel=1e-6)
    # and so it does where a correction is made
    assert by_volume.corrected.mass == pytest.approx(by_density.corrected.mass, rel=1e-3)
    uncertain = least(load_density=None, load_volume=normal(15 * MG / 2000, 15 * MG / 2000 * 1e-3))
    assert uncertain.corrected.mass == pytest.approx(Z * 6 * UG / 0.001, rel=SLACK)


def test_applies_to_the_net_mass():
    """18 of the usual traps: a heavy container does not help a small sample."""
    heavy = {"container_mass": 0.120, "container_density": 8000.0}
    small = least(heavy, load_mass=5 * MG)
    assert len(small.notices) == 1
    assert "applies to the net mass (5 mg)" in small.notices[0].sentence
    assert "12 mg" in small.notices[0].sentence
    assert least(heavy, load_mass=15 * MG).notices == ()
    assert least(load_mass=5 * MG).notices == ()  # no container: nothing to confuse


def test_what_is_not_assessed_is_said():
    found = least(load_density=None)
    assert (found.as_read.mass, found.corrected.mass) == (None, None)
    assert found.as_read.reason == "not computed: air buoyancy could not be assessed"
    assert found.repeatability.mass / MG == pytest.approx(12.0, rel=1e-9)
    found = least(balance_repeatability=None)
    assert found.repeatability.reason == "not computed: lacks balance.repeatability"
