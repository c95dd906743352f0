"""The engine against published examples: JCGM 101:2008, JCGM 100:2008, JCGM 106:2012, EA-4/02 M:2013."""

import math

import numpy as np
import pytest
from scipy import stats

from envcorr import propagation
from envcorr.errors import InputError
from envcorr.estimate import Estimate
from envcorr.propagation import first_order, monte_carlo, numerical_tolerance

# JCGM 101:2008, clause 9.3: calibration of a 100 g weight; masses in mg, densities in kg/m³ --------------------------


def weight_calibration(reference, difference, air, tested, weight):
    """Return the deviation from nominal; JCGM 101:2008, formula (30)."""
    return (reference + difference) * (1 + (air - 1.2) * (1 / tested - 1 / weight)) - 100_000


WEIGHT = (
    Estimate(100_000.0, "normal", 0.050),
    Estimate(1.234, "normal", 0.020),
    Estimate.between(1.10, 1.30),
    Estimate.between(7000.0, 9000.0),
    Estimate.between(7950.0, 8050.0),
)  # JCGM 101:2008, table 5


def weight_calibration_u():
    """Return the exact standard deviation [mg] from the second moments of the inputs.

    With A the sum of the masses, B = rho - 1.2 of mean zero and D = 1/rho_W - 1/rho_R, all independent, the variance
    is u(A)² + E(A²) E(B²) E(D²). For a rectangular density from a to b, E(1/rho) = ln(b/a)/(b - a) and
    E(1/rho²) = 1/(a b).
    """
    masses = 0.050**2 + 0.020**2
    mean = [math.log(b / a) / (b - a) for a, b in ((7000, 9000), (7950, 8050))]
    square = 1 / (7000 * 9000) + 1 / (7950 * 8050) - 2 * mean[0] * mean[1]
    return math.sqrt(masses + (100_001.234**2 + masses) * (0.1**2 / 3) * square)


def test_weight_calibration_to_first_order():
    """JCGM 101:2008, table 8, row GUF1 (printed to 1e-4 mg)."""
    found = first_order(weight_calibration, WEIGHT)
    assert found.value == pytest.approx(1.2340, abs=5e-5)
    assert found.u == pytest.approx(0.0539, abs=5e-5)
    assert found.interval == pytest.approx((1.1285, 1.3395), abs=6e-5)


def test_weight_calibration_by_monte_carlo():
    """JCGM 101:2008, table 8, row MCM: 1.2341 mg, 0.0754 mg, shortest interval 1.0834 to 1.3825 mg."""
    found = monte_carlo(weight_calibration, WEIGHT, batches=256)
    assert weight_calibration_u() == pytest.approx(0.0754797, abs=5e-8)
    assert found.u == pytest.approx(weight_calibration_u(), rel=2e-4)
    assert found.mean == pytest.approx(1.2341, abs=2e-4)
    # the width is steady; the ends of the shortest interval move by 1.2e-3 mg (standard deviation) from run to run
    assert found.shortest[1] - found.shortest[0] == pytest.approx(0.2991, abs=5e-4)
    assert found.shortest == pytest.approx((1.0834, 1.3825), abs=4e-3)
    # the probabilistically symmetric interval, from 40 runs of 7.2e5 pseudo-random draws
    assert found.interval == pytest.approx((1.0844, 1.3836), abs=7e-4)


def test_weight_calibration_first_order_is_told_from_monte_carlo():
    """JCGM 101:2008, table 8: d_low 0.0451 mg and d_high 0.0430 mg are far above the tolerance 0.005 mg."""
    first, drawn = first_order(weight_calibration, WEIGHT), monte_carlo(weight_calibration, WEIGHT, batches=64)
    assert abs(first.interval[0] - drawn.shortest[0]) == pytest.approx(0.0451, abs=4e-3)
    assert abs(first.interval[1] - drawn.shortest[1]) == pytest.approx(0.0430, abs=4e-3)
    assert numerical_tolerance(first.u, 1) == pytest.approx(0.005, rel=1e-12)


# JCGM 101:2008, clause 9.2: the sum of four quantities ---------------------------------------------------------------


def total(*values):
    return sum(values)


def rectangular(sd):
    return Estimate(0.0, "rectangular", sd * math.sqrt(3))


@pytest.mark.parametrize(
    ("inputs", "half_width", "tolerance"),
    [
        pytest.param([Estimate(0.0, "normal", 1.0)] * 4, 3.92, 0.02, id="9.2.2 four normals"),
        # the exact quantile of the sum of four uniforms (Irwin-Hall) is 3.8794
        pytest.param([rectangular(1.0)] * 4, 3.88, 0.02, id="9.2.3 four rectangulars"),
        pytest.param([rectangular(1.0)] * 3 + [rectangular(10.0)], 17.0, 0.06, id="9.2.4 one dominates"),
    ],
)
def test_sum_of_four(inputs, half_width, tolerance):
    """JCGM 101:2008, clauses 9.2.2 to 9.2.4: the interval is ± the half-width."""
    found = monte_carlo(total, inputs, batches=256)
    assert found.interval == pytest.approx((-half_width, half_width), abs=tolerance)
    assert found.largest == pytest.approx(half_width, abs=tolerance)


def test_sum_of_four_to_first_order():
    """JCGM 101:2008, 9.2.2 and 9.2.4: GUM gives ±3.92 and ±19.9."""
    assert first_order(total, [rectangular(1.0)] * 4).expanded == pytest.approx(3.92, abs=0.005)
    dominated = [rectangular(1.0)] * 3 + [rectangular(10.0)]
    assert first_order(total, dominated).expanded == pytest.approx(19.9, abs=0.05)


def test_ten_kilogram_weight():
    """EA-4/02 M:2013, example S2: 10 000.025 g, u 29.3 mg, U 59 mg."""
    inputs = [
        Estimate(10_000.005, "normal", 0.045 / 2),  # certificate, k = 2
        Estimate(0.0, "rectangular", 0.015),  # drift of the reference
        Estimate(0.020, "normal", 0.025 / math.sqrt(3)),  # three readings, pooled deviation 25 mg
        Estimate(0.0, "rectangular", 0.010),  # eccentric loading and magnetism
        Estimate(0.0, "rectangular", 0.010),  # air buoyancy
    ]
    first, drawn = first_order(total, inputs, probability=0.9545), monte_carlo(total, inputs)
    for found in (first.value, drawn.mean):
        assert found == pytest.approx(10_000.025, abs=1e-4)
    for u in (first.u, drawn.u):
        assert u == pytest.approx(0.0293, abs=1e-4)
    assert first.expanded == pytest.approx(0.059, abs=6e-4)


# JCGM 100:2008 -------------------------------------------------------------------------------------------------------

VOLTS = [5.007, 4.994, 5.005, 4.990, 4.999]
AMPERES = [19.663e-3, 19.639e-3, 19.640e-3, 19.685e-3, 19.678e-3]
RADIANS = [1.0456, 1.0438, 1.0468, 1.0428, 1.0433]


@pytest.mark.parametrize(
    ("function", "value", "u"),
    [
        pytest.param(lambda v, i, phi: v / i * np.cos(phi), 127.732, 0.071, id="R"),
        pytest.param(lambda v, i, phi: v / i * np.sin(phi), 219.847, 0.295, id="X"),
        pytest.param(lambda v, i, phi: v / i + 0 * phi, 254.260, 0.236, id="Z"),
    ],
)
def test_resistance_and_reactance(function, value, u):
    """JCGM 100:2008, H.2, tables H.2 to H.4 [ohm]: three quantities that were measured together."""
    data = np.array([VOLTS, AMPERES, RADIANS])
    inputs = [Estimate(float(row.mean()), "normal", float(row.std(ddof=1) / math.sqrt(5))) for row in data]
    correlation = np.corrcoef(data)
    # table H.2 prints -0.36, 0.86 and -0.65
    assert correlation[[0, 0, 1], [1, 2, 2]] == pytest.approx([-0.36, 0.86, -0.65], abs=0.006)
    first = first_order(function, inputs, correlation=correlation)
    assert first.value == pytest.approx(value, abs=6e-4)
    assert first.u == pytest.approx(u, abs=6e-4)
    drawn = monte_carlo(function, inputs, correlation=correlation, batches=64)
    assert drawn.mean == pytest.approx(value, abs=2e-3)
    assert drawn.u == pytest.approx(u, abs=1.5e-3)


def test_effective_degrees_of_freedom_of_a_product():
    """JCGM 100:2008, G.4.1: relative u of 1.03 %, 19.0 degrees of freedom, U_95 of 2.2 %."""
    inputs = [Estimate(1.0, "normal", u, dof) for u, dof in ((0.0025, 9), (0.0057, 4), (0.0082, 14))]
    found = first_order(lambda a, b, c: a * b * c, inputs)
    assert found.u == pytest.approx(0.0103, abs=5e-5)
    assert found.dof == pytest.approx(19.0, abs=0.05)
    assert found.expanded == pytest.approx(0.022, abs=5e-4)


def test_effective_degrees_of_freedom_of_an_end_gauge():
    """JCGM 100:2008, H.1 [nm]: u 32, effective degrees of freedom 16.7."""
    parts = ((25.0, 18), (9.7, 25.6), (2.9, 50), (16.6, 2))
    found = first_order(total, [Estimate(0.0, "normal", u, dof) for u, dof in parts])
    assert found.u == pytest.approx(32, abs=0.5)
    assert found.dof == pytest.approx(16.7, abs=0.1)


@pytest.mark.parametrize(
    ("probability", "dof", "factor"),
    [
        *((0.95, dof, t) for dof, t in enumerate([12.71, 4.30, 3.18, 2.78, 2.57, 2.45, 2.36, 2.31, 2.26, 2.23], 1)),
        *((0.9545, dof, t) for dof, t in ((25, 2.11), (30, 2.09), (50, 2.05), (100, 2.025), (math.inf, 2.000))),
        (0.99, 10, 3.17),
        (0.6827, 1, 1.84),
    ],
)
def test_coverage_factor(probability, dof, factor):
    """JCGM 100:2008, table G.2."""
    assert propagation.coverage_factor(probability, dof) == pytest.approx(factor, abs=0.0055)


# JCGM 106:2012 -------------------------------------------------------------------------------------------------------


def test_conformance_probability():
    """JCGM 106:2012, clause 7.3: 509.7 measured with u 8.6 against a lower limit of 490 conforms with 99 %."""
    drawn = propagation.draws(1)
    value = drawn.place(0, Estimate(509.7, "normal", 8.6))
    upper = 1e4  # so far away that only the lower limit counts
    middle, half = (490 + upper) / 2, (upper - 490) / 2
    probability, error = propagation.share_within(value - middle, half, drawn.size)
    assert probability == pytest.approx(0.99, abs=0.005)
    assert probability == pytest.approx(stats.norm.cdf((509.7 - 490) / 8.6), abs=1e-3)
    assert 0 < error < 1e-3


# The numbers behind the numbers --------------------------------------------------------------------------------------


@pytest.mark.parametrize(
    ("u", "digits", "tolerance"),
    [
        pytest.param(0.00035, 2, 5e-6, id="example 1: 0.000 35 g"),
        pytest.param(0.00035, 1, 5e-5, id="example 2: one digit"),
        pytest.param(2.0, 1, 0.5, id="example 3: 2 K"),
        pytest.param(0.0539, 1, 0.005, id="9.3.2"),
        pytest.param(0.0996, 2, 0.005, id="rounds up to 0.10"),
        pytest.param(0.0, 2, 0.0, id="nothing"),
    ],
)
def test_numerical_tolerance(u, digits, tolerance):
    """JCGM 101:2008, 7.9.2 and its examples."""
    assert numerical_tolerance(u, digits) == pytest.approx(tolerance, rel=1e-12)


@pytest.mark.parametrize("skew", [False, True], ids=["9.3 of JCGM 101", "skewed"])
def test_standard_errors_are_those_of_repeated_runs(skew):
    """The scatter of the end points over 40 seeds is what a single run states, within a factor of 1.5."""

    def function(*x):
        return np.exp(8 * weight_calibration(*x)) if skew else weight_calibration(*x)

    runs = [monte_carlo(function, WEIGHT, batches=16, seed=seed) for seed in range(40)]
    for end in (0, 1):
        scatter = np.std([run.interval[end] for run in runs], ddof=1)
        stated = math.sqrt(np.mean([run.interval_error[end] ** 2 for run in runs]))
        assert 1 / 1.5 < scatter / stated < 1.5
    scatter = np.std([run.largest for run in runs], ddof=1)
    stated = math.sqrt(np.mean([run.largest_error**2 for run in runs]))
    assert 1 / 1.5 < scatter / stated < 1.5


@pytest.mark.parametrize("rows", [(13, 11, 6, 1, 7), (0, 8, 13, 2, 3), (4, 14, 9, 10, 12)])
def test_end_points_beat_pseudo_random_ones(rows):
    """Whichever rows of a long list the inputs take, the ends are steadier than by as many pseudo-random draws.

    Those scatter by 0.0016 mg at 2^14 draws (60 runs of NumPy's generator); a pair of rows that fit badly, if it were
    kept in every batch, would scatter more.
    """
    errors = []
    for seed in range(8):
        drawn = propagation.draws(15, 64, seed)
        values = weight_calibration(*[drawn.place(row, x) for row, x in zip(rows, WEIGHT, strict=True)])
        errors.append(propagation.summary(values, drawn.size, 0.95).interval_error)
    assert math.sqrt(np.mean(np.square(errors))) * math.sqrt(64 / 16) < 0.0014


def test_the_same_seed_gives_the_same_bytes():
    first, second = propagation.draws.__wrapped__(7, 16, 3), propagation.draws.__wrapped__(7, 16, 3)
    assert first.uniform.tobytes() == second.uniform.tobytes()
    assert first.uniform.tobytes() != propagation.draws(7, 16, 4).uniform.tobytes()
    assert monte_carlo(total, WEIGHT, batches=16) == monte_carlo(total, WEIGHT, batches=16)


def test_more_batches_leave_the_first_as_they_are():
    few, many = propagation.draws(5, 16, 1).uniform, propagation.draws(5, 64, 1).uniform
    assert np.array_equal(many[:, : few.shape[1]], few)


def test_draws_lie_inside_and_fill_evenly():
    """Each of the 1024 equal steps holds exactly one point of a batch (a digital net in one dimension)."""
    uniform = propagation.draws(12, 16, 5).uniform
    assert uniform.min() > 0
    assert uniform.max() < 1
    for batch in uniform.reshape(12, 16, 1024).reshape(-1, 1024):
        assert np.array_equal(np.sort((batch * 1024).astype(int)), np.arange(1024))


def test_batches_are_independent():
    """The means of two batches of a product, which no row alone makes even, do not go together."""
    uniform = propagation.draws(2, 256, 0).uniform
    products = np.mean(np.prod(uniform - 0.5, axis=0).reshape(256, 1024), axis=1)
    coefficient = np.corrcoef(products[::2], products[1::2])[0, 1]
    assert abs(coefficient) < 0.35  # four standard errors of 128 pairs


def test_draws_grow_until_the_end_points_settle():
    """JCGM 101:2008, 7.9.4: twice the standard deviation of the end points is within the numerical tolerance."""
    sizes = []

    def function(*values):
        sizes.append(np.size(values[0]))
        return total(*values)

    parts = [Estimate(0.0, "normal", 18.0)] * 4
    found = monte_carlo(function, parts)
    assert found.u == pytest.approx(36.0, rel=1e-2)
    assert sizes[0] == 16 * 1024
    assert sizes == sorted(set(sizes))
    assert 1 < len(sizes) < 4
    assert sizes[-1] < 2**18
    assert 2 * max(found.interval_error) <= 0.5  # half a unit of the second digit of 36
    assert 2 * max(monte_carlo(total, parts, batches=16).interval_error) > 0.5


def test_draws_do_not_grow_without_need():
    sizes = []

    def function(*values):
        sizes.append(np.size(values[0]))
        return total(*values)

    monte_carlo(function, [Estimate(0.0, "normal", 0.6)] * 4)  # u = 1.2: half a unit of the second digit is 0.05
    assert sizes == [16 * 1024]


def test_draws_stop_growing_at_the_limit():
    sizes = []

    def function(*values):
        sizes.append(np.size(values[0]))
        return total(*values)

    monte_carlo(function, [Estimate(0.0, "normal", 18.0)] * 4, digits=4)  # nobody can have four digits
    assert sizes[-1] == 2**18


# Correlation ---------------------------------------------------------------------------------------------------------


@pytest.mark.parametrize("coefficient", [-1.0, -0.6, 0.3, 0.9, 1.0])
def test_copula_gives_the_stated_coefficient_of_normals(coefficient):
    matrix = np.array([[1.0, coefficient], [coefficient, 1.0]])
    drawn = propagation.draws(2, 64)
    x, y = drawn.place_all([Estimate(5.0, "normal", 2.0), Estimate(-1.0, "normal", 0.1)], matrix)
    assert np.corrcoef(x, y)[0, 1] == pytest.approx(coefficient, abs=2e-3)
    assert (np.mean(x), np.std(x)) == pytest.approx((5.0, 2.0), abs=5e-3)
    assert (np.mean(y), np.std(y)) == pytest.approx((-1.0, 0.1), abs=5e-4)


def test_copula_keeps_each_distribution():
    """The rank coefficient of a Gaussian copula is 6/pi asin(r/2) (Kruskal 1958, from memory)."""
    matrix = np.array([[1.0, 0.7], [0.7, 1.0]])
    inputs = [Estimate.between(2.0, 4.0), Estimate.between(0.0, 1.0, "arcsine")]
    x, y = propagation.draws(2, 16).place_all(inputs, matrix)
    assert stats.kstest(x, stats.uniform(2, 2).cdf).statistic < 2e-3
    assert stats.kstest(y, stats.arcsine().cdf).statistic < 2e-3
    assert stats.spearmanr(x, y).statistic == pytest.approx(6 / math.pi * math.asin(0.35), abs=3e-3)


@pytest.mark.parametrize("edge", [0.5 / 2**32, 1 - 0.5 / 2**32])
def test_copula_stays_finite_at_the_outermost_draws(edge):
    """Two outermost scores of 6.34 add up to 8.66, beyond which a probability of doubles is 1: kept below it."""
    drawn = propagation.Draws(np.full((2, 4), edge), 0)
    matrix = np.array([[1.0, 0.5], [0.5, 1.0]])
    inputs = [Estimate(0.0, "normal", 1.0), Estimate.between(3.0, 4.0, "triangular")]
    first, second = drawn.place_all(inputs, matrix)
    assert np.all(np.isfinite(first))
    assert np.all((second >= 3.0) & (second <= 4.0))
    assert np.max(np.abs([first, drawn.place_all(inputs[:1] * 2, matrix)[1]])) > 8


def test_copula_leaves_the_others_alone():
    matrix = np.eye(3)
    matrix[0, 2] = matrix[2, 0] = 0.5
    inputs = [Estimate(0.0, "normal", 1.0)] * 3
    drawn = propagation.draws(3)
    assert np.array_equal(drawn.place_all(inputs, matrix)[1], drawn.place_all(inputs)[1])


def test_coefficients_of_zero_change_nothing():
    inputs = [Estimate(0.0, "normal", 1.0), Estimate(0.0, "arcsine", 1.0)]
    drawn = propagation.draws(2)
    for one, other in zip(drawn.place_all(inputs, np.eye(2)), drawn.place_all(inputs), strict=True):
        assert np.array_equal(one, other)


@pytest.mark.parametrize(
    "matrix",
    [
        pytest.param([[1, 0.9, -0.9], [0.9, 1, 0.9], [-0.9, 0.9, 1]], id="three that cannot be"),
        pytest.param([[1, 0.5], [0.2, 1]], id="not symmetric"),
        pytest.param([[2, 0.5], [0.5, 1]], id="no unit diagonal"),
        pytest.param([[1, 1.2], [1.2, 1]], id="above one"),
    ],
)
def test_what_is_no_correlation_matrix_is_refused(matrix):
    with pytest.raises(InputError, match="do not make a correlation matrix"):
        propagation.correlation_root(np.array(matrix, dtype=float))


def test_root_of_a_singular_matrix():
    ones = np.ones((4, 4))
    root = propagation.correlation_root(ones)
    assert root @ root.T == pytest.approx(ones, abs=1e-12)


# Quantiles -----------------------------------------------------------------------------------------------------------


@pytest.mark.parametrize("p", [0.0001, 0.025, 0.31, 0.5, 0.95, 0.9999])
def test_partial_quantile_is_numpys(p):
    """NumPy's method "hazen" is the same piecewise linear function of the ranks."""
    values = np.random.default_rng(4).normal(size=(3, 1024))
    expected = np.quantile(values, p, axis=1, method="hazen")
    assert propagation.partial_quantile(values, p) == pytest.approx(expected, rel=1e-12)


def test_summary_of_something_exact():
    found = propagation.summary(-3.0, 1024, 0.95)
    assert (found.mean, found.u, found.interval, found.largest) == (-3.0, 0.0, (-3.0, -3.0), 3.0)
    assert propagation.share_within(-3.0, 2.9, 1024) == (0.0, 0.0)
    assert propagation.share_within(-3.0, 3.0, 1024) == (1.0, 0.0)
    assert propagation.interval_with(-3.0, 0.95) == (-3.0, -3.0)
    assert propagation.largest_with(-3.0, 0.95) == 3.0
