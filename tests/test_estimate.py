"""Each distribution against SciPy's, and against the clauses of JCGM 101:2008 that name it."""

import math

import numpy as np
import pytest
from scipy import stats

from envcorr.estimate import SHAPES, Estimate
from envcorr.propagation import draws, summary

LOW, HIGH = 2.0, 5.0  # any positive range
DISTRIBUTIONS = {
    "normal": (Estimate(3.0, "normal", 0.4), stats.norm(3.0, 0.4)),
    "rectangular": (Estimate.between(LOW, HIGH), stats.uniform(LOW, HIGH - LOW)),
    "triangular": (Estimate.between(LOW, HIGH, "triangular"), stats.triang(0.5, LOW, HIGH - LOW)),
    "arcsine": (Estimate.between(LOW, HIGH, "arcsine"), stats.arcsine(LOW, HIGH - LOW)),
    "log-uniform": (Estimate.between(LOW, HIGH, "log-uniform"), stats.loguniform(LOW, HIGH)),
}
each_shape = pytest.mark.parametrize("shape", DISTRIBUTIONS)
PROBABILITIES = np.array([1e-9, 1e-4, 0.025, 0.2, 0.5, 0.77, 0.975, 0.9999, 1 - 1e-9])


def test_every_shape_is_compared():
    assert set(SHAPES) == {*DISTRIBUTIONS, "fixed"}


@each_shape
def test_moments(shape):
    """SciPy's mean and standard deviation."""
    estimate, expected = DISTRIBUTIONS[shape]
    assert estimate.mean == pytest.approx(expected.mean(), rel=1e-12)
    assert estimate.u == pytest.approx(expected.std(), rel=1e-10)


@each_shape
def test_quantiles(shape):
    """SciPy's inverse distribution function, far into the tails."""
    estimate, expected = DISTRIBUTIONS[shape]
    assert estimate.quantile(PROBABILITIES) == pytest.approx(expected.ppf(PROBABILITIES), rel=1e-9)
    if shape != "normal":
        assert estimate.bounds == pytest.approx(expected.support(), rel=1e-12)


@each_shape
def test_draws_follow_the_distribution(shape):
    """Mean and standard deviation of the draws are SciPy's; so is the whole distribution (Kolmogorov distance)."""
    estimate, expected = DISTRIBUTIONS[shape]
    drawn = draws(3).place(2, estimate)
    found = summary(drawn, drawn.size, 0.95)
    assert found.mean == pytest.approx(expected.mean(), rel=1e-4)
    assert found.u == pytest.approx(expected.std(), rel=2e-3)
    assert found.interval == pytest.approx(expected.ppf([0.025, 0.975]), rel=2e-3)
    assert stats.kstest(drawn, expected.cdf).statistic < 1.1e-3


def test_divisors_of_the_guide():
    """JCGM 101:2008: half-width over sqrt(3) (6.4.2), sqrt(6) (6.4.5) and sqrt(2) (6.4.6)."""
    for shape, divisor in (("rectangular", 3), ("triangular", 6), ("arcsine", 2)):
        assert Estimate(0.0, shape, 1.0).u == pytest.approx(1 / math.sqrt(divisor), rel=1e-12)


@pytest.mark.parametrize("dof", [1.0, 3.0, 9.5])
def test_few_degrees_of_freedom_make_a_students_t(dof):
    """JCGM 101:2008, 6.4.9: a scaled and shifted t; first order uses its scale (JCGM 100, G.3)."""
    estimate = Estimate(10.0, "normal", 0.5, dof)
    assert estimate.quantile(PROBABILITIES) == pytest.approx(stats.t(dof, 10.0, 0.5).ppf(PROBABILITIES), rel=1e-7)
    assert estimate.u == 0.5


def test_the_spread_of_a_students_t_is_wider():
    """JCGM 101:2008, 6.4.9.4: the variance is that of the scale times dof/(dof - 2)."""
    drawn = draws(1, 64).place(0, Estimate(0.0, "normal", 1.0, dof=9.0))
    assert np.std(drawn) == pytest.approx(math.sqrt(9 / 7), rel=3e-3)


@each_shape
def test_without_spread_it_is_exact(shape):
    estimate = Estimate(4.0, shape, 0.0)
    assert estimate.is_exact
    assert (estimate.mean, estimate.u, estimate.bounds) == (4.0, 0.0, (4.0, 4.0))
    assert draws(1).place(0, estimate) == 4.0


def test_a_fixed_value_is_exact():
    estimate = Estimate(7.0)
    assert estimate.is_exact
    assert np.array_equal(estimate.quantile(np.array([0.1, 0.9])), [7.0, 7.0])


@each_shape
def test_columns_are_as_their_rows(shape):
    """A column of estimates gives what its rows give one by one."""
    estimate, _ = DISTRIBUTIONS[shape]
    factors = np.array([0.5, 1.0, 1.7])
    column = Estimate(estimate.centre * factors, shape, estimate.spread * factors)
    for row, factor in enumerate(factors):
        single = Estimate(estimate.centre * factor, shape, estimate.spread * factor)
        assert column.mean[row] == pytest.approx(single.mean, rel=1e-12)
        assert column.u[row] == pytest.approx(single.u, rel=1e-12)
        assert column.quantile(np.array(0.3))[row] == pytest.approx(single.quantile(np.array(0.3)), rel=1e-12)


@each_shape
def test_scaled_and_moved(shape):
    """A spread twice as wide is twice as far from the centre (a log-uniform's: the ratio squared)."""
    estimate, _ = DISTRIBUTIONS[shape]
    wider, moved = estimate.scaled(2.0), estimate.about(20.0)
    p = np.array([0.1, 0.6])
    if shape == "log-uniform":
        expected = estimate.centre * (estimate.quantile(p) / estimate.centre) ** 2
        shifted = 20.0 * estimate.quantile(p) / estimate.centre
    else:
        expected = estimate.centre + 2 * (estimate.quantile(p) - estimate.centre)
        shifted = 20.0 + estimate.quantile(p) - estimate.centre
    assert wider.quantile(p) == pytest.approx(expected, rel=1e-12)
    assert moved.quantile(p) == pytest.approx(shifted, rel=1e-12)
