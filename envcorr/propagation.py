"""Draws, Monte Carlo figures and first order. Knows quantities by number only, and no effect.

Monte Carlo after JCGM 101:2008 on a randomised low-discrepancy sequence: batches of 2^10 points of one scrambled Sobol
sequence, each batch with a random digital shift (XOR) and a random order of the rows of its own, so that the batches
are independent and unbiased and their scatter is an honest standard error (Owen, ACM Trans. Model. Comput. Simul. 13
(2003) 363, from memory).
First order after JCGM 100:2008, clauses 5.1 and 5.2 and annex G.
"""

from __future__ import annotations

import math
from collections.abc import Callable, Sequence
from dataclasses import dataclass, field
from functools import lru_cache
from typing import Any

import numpy as np
from numpy.typing import NDArray

from envcorr.errors import Fault, InputError
from envcorr.estimate import Estimate, Shape, Value, standard_score

__all__ = [
    "BATCH",
    "FIRST_BATCHES",
    "Budget",
    "Draws",
    "Summary",
    "batches_to_settle",
    "budget",
    "combine",
    "correlation_root",
    "coverage_factor",
    "draws",
    "first_order",
    "interval_with",
    "largest_with",
    "monte_carlo",
    "numerical_tolerance",
    "partial_quantile",
    "perturbed",
    "share_within",
    "summary",
]

Floats = NDArray[np.float64]

BATCH = 1024
"""Points in a batch (2^10)."""
FIRST_BATCHES = 16
MOST_BATCHES = 256
_BITS = 32


@lru_cache(maxsize=4)
def _sobol(dimensions: int, seed: int) -> NDArray[np.uint64]:
    """Return one batch of the scrambled sequence as integers of 32 bits, one row a dimension."""
    from scipy.stats import qmc

    engine = qmc.Sobol(dimensions, scramble=True, bits=_BITS, rng=np.random.default_rng([seed, 0]))
    points = engine.random_base2(BATCH.bit_length() - 1)
    return np.ascontiguousarray((points * 2.0**_BITS).astype(np.uint64).T)


@dataclass(frozen=True)
class Draws:
    """Uniform draws: one row a quantity, in batches; scores of each shape are worked out once and kept."""

    uniform: Floats
    seed: int
    _scores: dict[tuple[int, Shape, float], Floats] = field(default_factory=dict, repr=False)

    @property
    def size(self) -> int:
        """The number of draws."""
        return int(self.uniform.shape[1])

    def place(self, row: int, estimate: Estimate) -> Value:
        """Return the draws of the estimate [SI]; a float where it is exact."""
        if estimate.is_exact:
            return estimate.centre
        return estimate.place(self.score(row, estimate.shape, estimate.dof))

    def score(self, row: int, shape: Shape, dof: float) -> Floats:
        """Return the standard scores of a shape from the row's uniform draws."""
        shape = "rectangular" if shape == "log-uniform" else shape
        key = (row, shape, dof)
        if key not in self._scores:
            self._scores[key] = standard_score(shape, dof, self.uniform[row])
        return self._scores[key]

    def place_all(self, estimates: Sequence[Estimate], correlation: Floats | None = None) -> list[Value]:
        """Return the draws of all estimates; ``correlation`` is the matrix of their coefficients, if any is stated.

        A coefficient is that of the normal scores (Gaussian copula), equal to the ordinary one for normals.
        """
        tied = self.tied(correlation)
        return [tied.place(row, estimate) for row, estimate in enumerate(estimates)]

    def tied(self, correlation: Floats | None) -> Draws:
        """Return draws with the coefficients of a matrix over the first rows, see :meth:`place_all`."""
        if correlation is None or not np.any(correlation - np.eye(len(correlation))):
            return self
        from scipy import special

        rows = np.flatnonzero(np.any(correlation - np.eye(len(correlation)), axis=1))
        root = correlation_root(correlation[np.ix_(rows, rows)])
        scores = root @ np.array([self.score(int(row), "normal", math.inf) for row in rows])
        uniform = self.uniform.copy()
        uniform[rows] = np.clip(special.ndtr(scores), 1e-300, 1 - 2**-53)
        return Draws(uniform, self.seed)

    def shuffled(self, number: int) -> NDArray[np.intp]:
        """Return the ``number``-th random order of the draws, for a second independent set of the same quantities."""
        return np.random.default_rng([self.seed, 2, number]).permutation(self.size)


@lru_cache(maxsize=4)
def draws(dimensions: int, batches: int = FIRST_BATCHES, seed: int = 0) -> Draws:
    """Return ``batches`` x 1024 draws of ``dimensions`` quantities; the same arguments give the same draws.

    More batches leave the first ones as they are. The draws lie inside 0..1, both ends excluded.
    """
    base = _sobol(max(dimensions, 1), seed)
    shape = (batches, base.shape[0])
    shifts = np.random.default_rng([seed, 1]).integers(0, 2**_BITS, size=shape, dtype=np.uint64)
    # two rows of the sequence may fit badly (a shift leaves that as it is): each batch deals the rows out anew
    orders = np.argsort(np.random.default_rng([seed, 3]).random(shape), axis=1)
    shifted = base[orders.T] ^ shifts.T[:, :, np.newaxis]
    uniform = (shifted.reshape(base.shape[0], -1).astype(np.float64) + 0.5) / 2.0**_BITS
    uniform.flags.writeable = False
    return Draws(uniform, seed)


def correlation_root(matrix: Floats) -> Floats:
    """Return a root R of a correlation matrix, R R^T being the matrix.

    Raises :class:`InputError` where it is none: not symmetric, no unit diagonal, or a negative eigenvalue.
    """
    matrix = np.asarray(matrix, dtype=np.float64)
    values, vectors = np.linalg.eigh(matrix)
    symmetric = np.allclose(matrix, matrix.T) and np.allclose(np.diag(matrix), 1)
    if not symmetric or values[0] < -1e-10 * len(values):
        fault = Fault(
            "correlation",
            f"the coefficients do not make a correlation matrix (smallest eigenvalue {values[0]:.3g}).",
            "Two quantities that both follow a third must follow each other; lessen a coefficient.",
        )
        raise InputError([fault])
    root: Floats = vectors * np.sqrt(np.maximum(values, 0.0))
    return root


@dataclass(frozen=True, slots=True)
class Summary:
    """What the draws of one result say; the standard errors come from the scatter of the batches."""

    mean: float
    u: float
    interval: tuple[float, float]
    """Probabilistically symmetric coverage interval (JCGM 101:2008, 7.7)."""
    shortest: tuple[float, float]
    """Shortest coverage interval (JCGM 101:2008, 7.7.4)."""
    probability: float
    interval_error: tuple[float, float]
    """Standard errors of the end points of ``interval``."""
    largest: float
    """The ``probability`` quantile of the absolute value."""
    largest_error: float


def _rank(p: float, n: int) -> tuple[int, int, float]:
    """Return the ranks between which the p-quantile of n values lies, and how far: linear between mid-steps."""
    at = min(max(p * n - 0.5, 0.0), n - 1.0)
    low = int(at)
    return low, min(low + 1, n - 1), at - low


def _quantile(ordered: Floats, p: float) -> Floats:
    """Return the p-quantile of values that are sorted along the last axis."""
    low, high, part = _rank(p, ordered.shape[-1])
    result: Floats = ordered[..., low] + part * (ordered[..., high] - ordered[..., low])
    return result


def partial_quantile(values: Floats, p: float) -> Floats:
    """Return the p-quantile along the last axis of values in any order, without sorting them all."""
    low, _, part = _rank(p, values.shape[-1])
    split = np.partition(values, low, axis=-1)
    below = split[..., low]
    above = split[..., low + 1 :].min(axis=-1) if part else below
    result: Floats = below + part * (above - below)
    return result


def _standard_error(batches: Floats) -> float:
    return float(np.std(batches, ddof=1) / math.sqrt(batches.size)) if batches.size > 1 else math.inf


def summary(error: Value, size: int, probability: float) -> Summary:
    """Summarise one result over its draws (a float is a result without spread)."""
    if np.ndim(error) == 0:
        fixed = float(error)
        end = (fixed, fixed)
        return Summary(fixed, 0.0, end, end, probability, (0.0, 0.0), abs(fixed), 0.0)
    values = np.broadcast_to(error, (size,))
    batches = np.sort(values.reshape(-1, BATCH), axis=1)
    ordered = np.sort(values)
    tail = (1 - probability) / 2
    ends = float(_quantile(ordered, tail)), float(_quantile(ordered, 1 - tail))
    errors = _standard_error(_quantile(batches, tail)), _standard_error(_quantile(batches, 1 - tail))
    held = math.ceil(probability * size)
    widths = ordered[held - 1 :] - ordered[: size - held + 1]
    start = int(np.argmin(widths))
    absolute = np.abs(values)
    largest_error = _standard_error(partial_quantile(absolute.reshape(-1, BATCH), probability))
    return Summary(
        mean=float(np.mean(values)),
        u=float(np.std(values, ddof=1)),
        interval=ends,
        shortest=(float(ordered[start]), float(ordered[start + held - 1])),
        probability=probability,
        interval_error=errors,
        largest=float(partial_quantile(absolute, probability)),
        largest_error=largest_error,
    )


def largest_with(error: Value, probability: float) -> float:
    """Return the quantile of the absolute value alone; quicker than a whole summary."""
    if np.ndim(error) == 0:
        return abs(float(error))
    return float(partial_quantile(np.abs(error), probability))


def interval_with(error: Value, probability: float) -> tuple[float, float]:
    """Return the probabilistically symmetric coverage interval alone."""
    if np.ndim(error) == 0:
        return float(error), float(error)
    tail = (1 - probability) / 2
    values = np.asarray(error)
    return float(partial_quantile(values, tail)), float(partial_quantile(values, 1 - tail))


def share_within(error: Value, bound: float, size: int) -> tuple[float, float]:
    """Return the share of the draws whose absolute value is within the bound, and its standard error."""
    if np.ndim(error) == 0:
        return float(abs(float(error)) <= bound), 0.0
    inside = np.mean((np.abs(np.broadcast_to(error, (size,))) <= bound).reshape(-1, BATCH), axis=1)
    return float(np.mean(inside)), _standard_error(inside)


def numerical_tolerance(u: float, digits: int) -> float:
    """Return half a unit of the last of ``digits`` significant digits of u (JCGM 101:2008, 7.9.2)."""
    if u <= 0 or not math.isfinite(u):
        return 0.0
    # 7.9.2: u = c x 10^l with c an integer of ``digits`` digits, tolerance = 10^l / 2
    exponent = math.floor(math.log10(u)) - (digits - 1)
    if round(u / 10.0**exponent) >= 10**digits:  # 0.0996 to two digits is 0.10
        exponent += 1
    return 0.5 * 10.0**exponent


def monte_carlo(
    function: Callable[..., Value],
    estimates: Sequence[Estimate],
    *,
    probability: float = 0.95,
    correlation: Floats | None = None,
    batches: int | None = None,
    seed: int = 0,
    digits: int = 2,
) -> Summary:
    """Propagate the distributions of ``estimates`` through ``function(x1, x2, ...)`` (JCGM 101:2008, clause 7).

    Without ``batches`` their number grows until twice the standard error of both end points is within the numerical
    tolerance of u to ``digits`` digits (clause 7.9), or 2^18 draws are reached.
    """
    count = batches or FIRST_BATCHES
    while True:
        drawn = draws(len(estimates), count, seed)
        result = summary(function(*drawn.place_all(estimates, correlation)), drawn.size, probability)
        more = batches_to_settle(result, count, digits)
        if batches or more <= count:
            return result
        count = more


def batches_to_settle(result: Summary, batches: int, digits: int) -> int:
    """Return how many batches it takes for twice the standard errors of the end points to be within the tolerance.

    The numerical tolerance is that of JCGM 101:2008, 7.9; the errors fall with the root of the number of batches. The
    answer is a power of two times ``batches``, at most 256.
    """
    allowed = numerical_tolerance(result.u, digits)
    excess = 2 * max(result.interval_error) / allowed if allowed else 0.0
    count = batches
    while count < MOST_BATCHES and excess > math.sqrt(count / batches):
        count *= 2
    return count


@dataclass(frozen=True, slots=True)
class Budget:
    """A first-order result: value, combined standard uncertainty, effective degrees of freedom, coverage."""

    value: float
    u: float
    dof: float
    k: float
    probability: float
    contributions: Floats
    """Sensitivity times standard uncertainty, one an input, signed."""

    @property
    def expanded(self) -> float:
        """The expanded uncertainty U = k u."""
        return self.k * self.u

    @property
    def interval(self) -> tuple[float, float]:
        """The coverage interval, value - U to value + U."""
        return self.value - self.expanded, self.value + self.expanded


def perturbed(estimates: Sequence[Estimate]) -> tuple[list[Value], list[int]]:
    """Return the inputs of all central differences in one call, and which estimates have a spread.

    Each input becomes an array of 2n + 1 values: the best estimates, then each of n inputs one u up, then each one u
    down (JCGM 100:2008, 5.1.3, note 2); a log-uniform moves by the u of its logarithm, which keeps its sign.
    """
    spread = [i for i, estimate in enumerate(estimates) if not estimate.is_exact]
    n = len(spread)
    values: list[Value] = [estimate.centre for estimate in estimates]
    for k, i in enumerate(spread):
        estimate = estimates[i]
        column = np.full(2 * n + 1, float(estimate.centre))
        if estimate.shape == "log-uniform":
            column[1 + k] *= math.exp(float(estimate.spread) / math.sqrt(3))
            column[1 + n + k] /= math.exp(float(estimate.spread) / math.sqrt(3))
        else:
            column[1 + k] += float(estimate.u)
            column[1 + n + k] -= float(estimate.u)
        values[i] = column
    return values, spread


def budget(
    outcome: Value,
    estimates: Sequence[Estimate],
    spread: Sequence[int],
    *,
    probability: float = 0.95,
    correlation: Floats | None = None,
) -> Budget:
    """Return the first-order result from the outcome of :func:`perturbed` inputs (JCGM 100:2008, (10), (13), G.2b)."""
    n = len(spread)
    results = np.broadcast_to(np.asarray(outcome, dtype=np.float64), (2 * n + 1,))
    contributions = np.zeros(len(estimates))
    contributions[list(spread)] = (results[1 : n + 1] - results[n + 1 :]) / 2
    return combine(float(results[0]), contributions, estimates, probability, correlation)


def combine(
    value: float,
    contributions: Floats,
    estimates: Sequence[Estimate],
    probability: float = 0.95,
    correlation: Floats | None = None,
) -> Budget:
    """Return the budget of contributions (sensitivity times u, signed): JCGM 100:2008, (13), and (G.2b) for the dof."""
    if correlation is None:
        u = math.sqrt(float(contributions @ contributions))
    else:
        u = math.sqrt(max(float(contributions @ correlation @ contributions), 0.0))
    weights = sum(c**4 / e.dof for c, e in zip(contributions, estimates, strict=True) if math.isfinite(e.dof))
    dof = u**4 / weights if weights > 0 else math.inf  # Welch-Satterthwaite
    return Budget(value, u, dof, coverage_factor(probability, dof), probability, contributions)


def first_order(
    function: Callable[..., Value],
    estimates: Sequence[Estimate],
    *,
    probability: float = 0.95,
    correlation: Floats | None = None,
) -> Budget:
    """Propagate u to first order through ``function(x1, x2, ...)`` by central differences (JCGM 100:2008, clause 5)."""
    values, spread = perturbed(estimates)
    return budget(function(*values), estimates, spread, probability=probability, correlation=correlation)


@lru_cache(maxsize=256)
def coverage_factor(probability: float, dof: float) -> float:
    """Return t_p of JCGM 100:2008, table G.2 (that of the normal where the degrees of freedom are infinite)."""
    from scipy import special

    p: Any = (1 + probability) / 2
    return float(special.ndtri(p) if math.isinf(dof) else special.stdtrit(dof, p))
