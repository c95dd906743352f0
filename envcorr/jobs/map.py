"""Where is the target reached: the room check over one or two quantities, on common draws."""

from __future__ import annotations

import math
from collections.abc import Callable, Sequence
from dataclasses import dataclass, replace
from typing import Literal

import numpy as np
from numpy.typing import NDArray

from envcorr import units
from envcorr.errors import Fault, InputError, NotComputedError
from envcorr.estimate import Estimate
from envcorr.jobs.scan import Scan
from envcorr.jobs.verdict import Target
from envcorr.jobs.weighings import Scope, State
from envcorr.plan import Leaf, Plan
from envcorr.propagation import interval_with
from envcorr.setup import Setup

__all__ = ["Axis", "AxisRequest", "Curve", "Grid", "Varied", "axis_of", "make_curve", "make_grid"]

Varied = Literal["value", "spread"]
Floats = NDArray[np.float64]

_WIDE = 10.0
"""Times and part of the present value or spread that are looked at where nothing is said (judgement)."""
_ABOUT = {"temperature": 5.0, "temperature difference": 5.0}
"""Of values that may be nothing: how far about the present one to look [SI] (judgement)."""
_DENSITIES = (5.0, 8000.0)
"""kg/m³: from a light foam to steel."""
FEWEST, MOST = 2, 400
"""Steps of an axis (judgement: more than 400 no eye can tell apart)."""


@dataclass(frozen=True, slots=True)
class AxisRequest:
    """What is asked of an axis: the quantity, its value or its spread, from where to where [SI], evenly or by ratio.

    None leaves it to what was given.
    """

    name: str
    varied: Varied | None = None
    ends: tuple[float, float] | None = None
    logarithmic: bool | None = None


@dataclass(frozen=True, slots=True)
class Axis:
    """A quantity along an axis: ``values`` and the present one in SI units of ``kind``."""

    name: str
    label: str
    kind: str
    varied: Varied
    values: Floats
    now: float
    logarithmic: bool
    shape: str

    @property
    def in_proportion(self) -> bool:
        """Whether the spread grows with the value: along an axis that goes by ratio it is the share that is kept."""
        return self.varied == "value" and self.logarithmic and self.shape not in ("fixed", "log-uniform")

    @property
    def caption(self) -> str:
        """What stands along the axis, in words."""
        if self.varied == "value":
            return self.label
        spreads = {"normal": "standard uncertainty", "log-uniform": "logarithmic half-width"}
        spread = spreads.get(self.shape, "half-width")
        return f"{spread} of the {self.label}"


@dataclass(frozen=True)
class Grid:
    """The conformance probability (rows along y, columns along x) and where it is enough; NaN where not computed."""

    setup: Setup
    plan: Plan
    target: Target
    state: State
    x: Axis
    y: Axis
    probability: Floats
    missing: tuple[str, ...]
    draws: int
    seed: int

    @property
    def reached(self) -> NDArray[np.bool_]:
        """Where the target is reached."""
        return np.asarray(self.probability >= self.target.probability)


@dataclass(frozen=True)
class Curve:
    """The error against one quantity [kg]: mean and coverage interval of one total, and what is allowed."""

    setup: Setup
    plan: Plan
    target: Target
    state: State
    scope: Scope
    x: Axis
    mean: Floats
    low: Floats
    high: Floats
    probability: Floats
    allowed: float
    missing: tuple[str, ...]
    draws: int
    seed: int


def make_grid(
    setup: Setup,
    x: AxisRequest,
    y: AxisRequest,
    *,
    steps: int = 40,
    state: State = "corrected",
    count: int | None = None,
    seed: int = 0,
    progress: Callable[[int, int], None] | None = None,
) -> Grid:
    """Return where the target is reached over two quantities, ``steps`` values of each.

    Raises :class:`InputError` where one is not given, both are the same, or a range is impossible.
    """
    if x.name == y.name:
        raise InputError([Fault("--y", f"is {x.name} too.", "Name two quantities.")])
    scan = Scan(setup, state=state, count=count, seed=seed)
    across, along = _axes(scan, (x, y), steps)
    probability = np.empty((steps, steps))
    for row, value in enumerate(along.values):
        if progress is not None:
            progress(row, steps)
        try:
            held = scan.held({along.name: _with(scan, along, value)})
        except NotComputedError:
            probability[row] = math.nan
            continue
        for column, other in enumerate(across.values):
            probability[row, column] = held.probability({across.name: _with(scan, across, other)})
    if progress is not None:
        progress(steps, steps)
    return Grid(setup, scan.plan, scan.target, state, across, along, probability, scan.missing, scan.size, seed)


def make_curve(
    setup: Setup,
    x: AxisRequest,
    *,
    steps: int = 60,
    state: State = "corrected",
    scope: Scope = "surroundings",
    count: int | None = None,
    seed: int = 0,
    progress: Callable[[int, int], None] | None = None,
) -> Curve:
    """Return the error of a total against one quantity, its value where nothing is said.

    Raises as :func:`make_grid` does.
    """
    scan = Scan(setup, state=state, count=count, seed=seed)
    varied = x.varied or ("spread" if x.name.startswith("sensors.") else "value")
    (axis,) = _axes(scan, (replace(x, varied=varied),), steps)
    mean, low, high, probability = (np.full(steps, np.nan) for _ in range(4))
    for i, value in enumerate(axis.values):
        if progress is not None:
            progress(i, steps)
        try:
            found = scan.outcome({axis.name: _with(scan, axis, value)})
        except NotComputedError:
            continue
        error = found.errors[scope]
        mean[i] = float(np.mean(error))
        low[i], high[i] = interval_with(error, scan.target.probability)
        probability[i] = math.nan if np.isnan(mean[i]) else min(found.probability.values())
    if progress is not None:
        progress(steps, steps)
    return Curve(
        setup,
        scan.plan,
        scan.target,
        state,
        scope,
        axis,
        mean,
        low,
        high,
        probability,
        scan.target.bound(scope),
        scan.missing,
        scan.size,
        seed,
    )


def _axes(scan: Scan, requests: Sequence[AxisRequest], steps: int) -> list[Axis]:
    faults: list[Fault] = []
    if not FEWEST <= steps <= MOST:
        faults.append(Fault("--steps", f"{steps} is not from {FEWEST} to {MOST}.", "40 are usual."))
    axes: list[Axis] = []
    for request in requests:
        try:
            axes.append(axis_of(scan, request, max(steps, FEWEST)))
        except InputError as error:
            faults += error.faults
    if faults:
        raise InputError(faults)
    return axes


def axis_of(scan: Scan, request: AxisRequest, steps: int) -> Axis:
    """Return the axis of a request. Raises :class:`InputError` where it is impossible."""
    estimate = scan.given(request.name)
    leaf = next(leaf for leaf in scan.plan.leaves if leaf.name == request.name)
    varied: Varied = request.varied or ("value" if estimate.is_exact else "spread")
    if leaf.place.sensor and varied == "value":
        raise InputError([Fault(request.name, "has no value of its own.", "Vary its spread.")])
    if varied == "spread" and estimate.shape == "fixed":
        raise InputError([Fault(request.name, "was given without a spread.", "Vary its value, or give it a spread.")])
    kind = leaf.place.kind if varied == "value" else units.spread_kind(leaf.place.kind)
    now = float(estimate.centre if varied == "value" else estimate.spread)
    low, high = _ends(leaf, now, varied) if request.ends is None else request.ends
    _check(leaf, request.name, low, high, varied, kind)
    by_ratio = low > 0 and high / low >= 30 if request.logarithmic is None else request.logarithmic
    if by_ratio and low <= 0:
        raise InputError([Fault(request.name, "cannot be drawn by ratio from nothing on.", "Begin above zero.")])
    values = np.geomspace(low, high, steps) if by_ratio else np.linspace(low, high, steps)
    return Axis(request.name, leaf.place.label, kind, varied, values, now, by_ratio, estimate.shape)


def _ends(leaf: Leaf, now: float, varied: Varied) -> tuple[float, float]:
    """Return from where to where to look where nothing was said."""
    quantity = leaf.place.quantity
    if varied == "spread":
        return 0.0, 4 * now if now else 1.0
    if quantity.name == "load.density":
        return _DENSITIES
    about = _ABOUT.get(quantity.kind)
    if about is None and quantity.kind == "fraction" and quantity.low >= 0:
        return quantity.low, quantity.high
    if about is None and now:
        about = abs(now) if quantity.low < 0 else 0.0
    if about:
        return max(now - about, quantity.low), min(now + about, quantity.high)
    if not now:
        about = units.parse(units.KINDS[quantity.kind].examples[0], quantity.kind)
        return max(-about, quantity.low), min(about, quantity.high)
    return max(now / _WIDE, quantity.low), min(now * _WIDE, quantity.high)


def _check(leaf: Leaf, name: str, low: float, high: float, varied: Varied, kind: str) -> None:
    quantity = leaf.place.quantity
    if not low < high:
        raise InputError([Fault(name, "ends where it begins, or before.", 'Write "18 °C .. 26 °C".')])
    least, most = (0.0, math.inf) if varied == "spread" else (quantity.low, quantity.high)
    if low < least or high > most:
        ends = " to ".join(units.show(end, kind) for end in (least, most))
        raise InputError([Fault(name, f"may only lie within {ends}.", "Give a range inside that.")])


def _with(scan: Scan, axis: Axis, value: float) -> Estimate:
    estimate = scan.setup.estimates[axis.name]
    if axis.varied == "spread":
        return replace(estimate, spread=float(value))
    if axis.in_proportion:
        return replace(estimate, centre=float(value), spread=estimate.spread * (value / axis.now))
    return estimate.about(float(value))
