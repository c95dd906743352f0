"""How good must each quantity become for the target, alone and together; the room check solved backwards.

Every figure comes from runs on common draws: a limit lies between a run that passes and one that fails, a thousandth
apart.
"""

from __future__ import annotations

import math
from collections.abc import Callable, Iterator, Sequence
from dataclasses import dataclass, replace
from typing import Literal

from envcorr import units
from envcorr.errors import Fault, InputError
from envcorr.estimate import Estimate
from envcorr.intake.setup_file import full_name
from envcorr.jobs.scan import Outcome, Scan
from envcorr.jobs.verdict import Target
from envcorr.jobs.weighings import Scope, State
from envcorr.plan import Leaf, Plan
from envcorr.setup import Setup

__all__ = ["Answer", "Joint", "Limit", "LimitsResult", "Masses", "Step", "Worth", "find_limits"]

Answer = Literal[
    "already better",
    "must become",
    "cannot be reached by this alone",
    "two effects cancel here",
    "no limit found",
]
Mode = Literal["spread", "size", "value"]

PRECISION = 1e-3
"""Relative distance between the run that passes and the one that fails (judgement)."""
_FACTORS = (0.0, *(10 ** (k / 4) for k in range(-8, 9)))
"""Multiples of what is given that are looked at, in order (judgement: a hundredth to a hundredfold)."""
_DOUBLINGS = 10
"""How often a value is doubled or halved in search of where it fails (judgement: a thousandfold)."""
_LINEAR = {"temperature": 0.25, "fraction": 0.01}
"""Kinds whose values are looked at in steps that double, and the first step (judgement)."""
MOST_STEPS = 24
"""Halvings that are proposed one after the other (judgement)."""


@dataclass(frozen=True, slots=True)
class Limit:
    """One quantity: what it is now, and what would do.

    ``mode``: "spread" about the same centre, "size" (centre and spread in proportion, nothing being best) or "value".
    ``factor`` is the multiple of what is given up to which every smaller one passes; ``low`` and ``high`` [SI] the
    values between which the target is reached, in mode "value" (None where no end was found). ``inside`` and
    ``outside`` are the smaller conformance probabilities just before and just beyond the limit.
    """

    name: str
    label: str
    kind: str
    mode: Mode
    now: Estimate
    answer: Answer
    factor: float | None = None
    required: Estimate | None = None
    low: float | None = None
    high: float | None = None
    inside: float | None = None
    outside: float | None = None


@dataclass(frozen=True, slots=True)
class Worth:
    """What e95 [kg] would be left were a quantity held exactly, and were it measured exactly and corrected for."""

    name: str
    label: str
    held: float
    measured: float | None
    """None where no correction follows it."""


@dataclass(frozen=True, slots=True)
class Step:
    """One step on the way: which quantity is halved next, what it is then, and the e95 [kg] it leaves."""

    name: str
    kind: str
    estimate: Estimate
    e95: float


@dataclass(frozen=True, slots=True)
class Joint:
    """All improvable quantities together: the largest common factor that passes, and the best order of halvings.

    ``factor`` is above 1 where all could be worse, None where even none at all of them would not do.
    """

    names: tuple[str, ...]
    factor: float | None
    steps: tuple[Step, ...]
    reached: bool


@dataclass(frozen=True, slots=True)
class Masses:
    """The net masses about the given one for which the target is reached [kg]; None where no end was found."""

    smallest: float | None
    largest: float | None
    works: bool


@dataclass(frozen=True)
class LimitsResult:
    """Everything that was found. Errors in kg."""

    setup: Setup
    plan: Plan
    target: Target
    state: State
    scope: Scope
    now: Outcome
    e95: float
    limits: tuple[Limit, ...]
    joint: Joint
    worth: tuple[Worth, ...]
    masses: Masses
    broken_by_balance: float | None
    """The e95 of the balance's repeatability and rounding alone [kg], where that already breaks the target."""
    missing: tuple[str, ...]
    draws: int
    seed: int

    @property
    def allowed(self) -> float:
        """The largest error allowed of the decisive scope [kg]."""
        return self.target.bound(self.scope)


def find_limits(
    setup: Setup,
    *,
    state: State = "corrected",
    improvable: Sequence[str] = (),
    count: int | None = None,
    seed: int = 0,
    progress: Callable[[int, int], None] | None = None,
) -> LimitsResult:
    """Return how good each given quantity must be for the target, one at a time and jointly.

    ``improvable`` names the quantities to be bettered together; without them it is those that the set-up marks, and
    without a mark every given one that a room can better. ``state`` says which total must pass, ``count`` the number of
    draws; ``progress`` is told what is done of how much. Raises :class:`InputError` where the target or the mass is not
    given, or a name is not.
    """
    scan = Scan(setup, state=state, count=count, seed=seed)
    marked = _improvable(scan, improvable or setup.improvable)
    now = scan.outcome()
    bound = scan.target.bound
    scope: Scope = max(now.errors, key=lambda scope: scan.e95(now, scope) / bound(scope))
    leaves = list(_given(scan))
    total = len(leaves) + 3
    limits = []
    for done, leaf in enumerate(leaves):
        if progress is not None:
            progress(done, total)
        limits.append(_limit(scan, leaf, now.passes))
    masses = _masses(scan, now.passes)
    if progress is not None:
        progress(total - 2, total)
    worth = tuple(sorted((_worth(scan, leaf, scope) for leaf in leaves if _spreads(leaf)), key=_best))
    joint = _joint(scan, marked, now, scope)
    if progress is not None:
        progress(total, total)
    return LimitsResult(
        setup=setup,
        plan=scan.plan,
        target=scan.target,
        state=state,
        scope=scope,
        now=now,
        e95=scan.e95(now, scope),
        limits=tuple(limits),
        joint=joint,
        worth=worth,
        masses=masses,
        broken_by_balance=_broken_by_balance(scan),
        missing=scan.missing,
        draws=scan.size,
        seed=seed,
    )


def _given(scan: Scan) -> Iterator[Leaf]:
    """Yield the given quantities that reach an effect, each once."""
    for row, leaf in enumerate(scan.plan.leaves):
        if leaf.name not in scan.setup.estimates or leaf.name in ("load.mass", "cycle.repeats"):
            continue
        if any(scan.plan.reaches(row, effect) for effect in scan.plan.effects):
            yield leaf


def _improvable(scan: Scan, names: Sequence[str]) -> tuple[Leaf, ...]:
    rows = {leaf.name: leaf for leaf in _given(scan)}
    faults: list[Fault] = []
    names = [full_name(name) for name in names]
    for name in names:
        try:
            scan.given(name)
        except InputError as error:
            faults += error.faults
            continue
        if name not in rows or _mode(rows[name]) == "value":
            faults.append(Fault(name, "has no spread and cannot be made smaller.", "Mark one that can be bettered."))
    if faults:
        raise InputError(faults)
    if names:
        return tuple(rows[name] for name in dict.fromkeys(names))
    # what is put on the pan is what it is
    return tuple(leaf for leaf in rows.values() if _mode(leaf) != "value" and not leaf.name.startswith("load."))


def _mode(leaf: Leaf) -> Mode:
    if leaf.place.sensor:
        return "spread"
    if leaf.place.quantity.harmless_at_zero:
        return "size"
    return "value" if leaf.estimate.is_exact else "spread"


def _spreads(leaf: Leaf) -> bool:
    return not leaf.estimate.is_exact and leaf.place.quantity.ranked


def _limit(scan: Scan, leaf: Leaf, passes_now: bool) -> Limit:
    mode = _mode(leaf)
    blank = Limit(leaf.name, leaf.place.label, leaf.place.kind, mode, leaf.estimate, "no limit found")
    return _by_value(scan, leaf, blank, passes_now) if mode == "value" else _by_factor(scan, leaf, blank, passes_now)


def _scaled(leaf: Leaf, factor: float) -> Estimate:
    """Return what a quantity becomes by a factor: its spread, or all of it where nothing at all is best."""
    estimate = leaf.estimate
    if _mode(leaf) == "spread":
        return estimate.scaled(factor)
    if not estimate.is_exact or estimate.centre:
        spread = estimate.spread if estimate.shape == "log-uniform" else estimate.spread * factor
        return replace(estimate, centre=estimate.centre * factor, spread=spread)
    # given as nothing at all: multiples of a usual size
    return estimate.about(
        factor * units.parse(units.KINDS[leaf.place.quantity.kind].examples[0], leaf.place.quantity.kind)
    )


def _possible(leaf: Leaf, estimate: Estimate) -> bool:
    """Return whether physics allows what a quantity would become."""
    if leaf.place.sensor:
        return True
    low, high = (
        estimate.bounds if estimate.shape != "normal" else (estimate.centre - estimate.u, estimate.centre + estimate.u)
    )
    return bool(leaf.place.quantity.low <= low and high <= leaf.place.quantity.high)


def _by_factor(scan: Scan, leaf: Leaf, blank: Limit, passes_now: bool) -> Limit:
    def passes(factor: float) -> bool:
        return passes_now if factor == 1.0 else scan.passes({leaf.name: _scaled(leaf, factor)})

    from_nothing = leaf.estimate.is_exact and not leaf.estimate.centre
    factors = [f for f in _FACTORS if _possible(leaf, _scaled(leaf, f))]
    found = [passes_now if from_nothing and f == 0.0 else passes(f) for f in factors]
    if not any(found):
        return replace(blank, answer="cannot be reached by this alone")
    if not found[0]:  # less of it is worse: another effect offsets it
        return replace(blank, answer="two effects cancel here")
    if all(found):
        return blank
    fails = found.index(False)
    inner, outer = _bisect(passes, factors[fails - 1], factors[fails])
    if inner == 0.0:
        return replace(blank, answer="cannot be reached by this alone")
    again = any(found[fails:])
    answer: Answer = "two effects cancel here" if again else "already better" if passes_now else "must become"
    return replace(
        blank,
        answer=answer,
        factor=None if from_nothing else inner,
        required=_scaled(leaf, inner),
        inside=_probability(scan, leaf, _scaled(leaf, inner)),
        outside=_probability(scan, leaf, _scaled(leaf, outer)),
    )


def _probability(scan: Scan, leaf: Leaf, estimate: Estimate) -> float:
    """Return the smaller of the conformance probabilities with a quantity otherwise."""
    return min(scan.outcome({leaf.name: estimate}).probability.values())


def _bisect(passes: Callable[[float], bool], inside: float, outside: float) -> tuple[float, float]:
    """Return two numbers, closer than :data:`PRECISION`, of which the first passes and the second does not.

    From nothing upwards it is looked for by factors of ten first.
    """
    if inside == 0.0:
        while outside > 1e-9:
            if passes(outside / 10):
                inside = outside / 10
                break
            outside /= 10
        else:
            return 0.0, outside
    while abs(outside - inside) > PRECISION * abs(inside):
        middle = math.copysign(math.sqrt(inside * outside), inside) if inside * outside > 0 else (inside + outside) / 2
        if passes(middle):
            inside = middle
        else:
            outside = middle
    return inside, outside


def _by_value(scan: Scan, leaf: Leaf, blank: Limit, passes_now: bool) -> Limit:
    def passes(value: float) -> bool:
        return scan.passes({leaf.name: leaf.estimate.about(value)})

    low, high, works = _range(passes, float(leaf.estimate.centre), leaf, passes_now)
    if not works:
        return replace(blank, answer="cannot be reached by this alone")
    if low is None and high is None:
        return blank
    return replace(blank, answer="already better" if passes_now else "must become", low=low, high=high)


def _values(value: float, leaf: Leaf, direction: int) -> Iterator[float]:
    """Yield values further and further from one, as far as physics allows."""
    quantity = leaf.place.quantity
    step = _LINEAR.get(quantity.kind)
    for k in range(_DOUBLINGS):
        if step is not None:
            other = value + direction * step * 2**k
        elif value > 0:
            other = value * 2.0 ** (direction * (k + 1))
        else:
            return
        if not quantity.low <= other <= quantity.high:
            return
        yield other


def _range(
    passes: Callable[[float], bool], value: float, leaf: Leaf, passes_now: bool
) -> tuple[float | None, float | None, bool]:
    """Return the ends of the range about a value in which the target is reached, and whether there is one.

    Where the value itself fails, it is the nearest range that was found; an end is None where none was found.
    """
    if passes_now:
        return _end(passes, value, leaf, -1), _end(passes, value, leaf, +1), True
    tries = [
        (abs(k), direction, before, other)
        for direction in (-1, 1)
        for k, (before, other) in enumerate(_pairs(value, leaf, direction))
    ]
    for _, direction, before, other in sorted(tries):
        if passes(other):
            near, _ = _bisect(passes, other, before)
            far = _end(passes, other, leaf, direction)
            return (far, near, True) if direction < 0 else (near, far, True)
    return None, None, False


def _pairs(value: float, leaf: Leaf, direction: int) -> Iterator[tuple[float, float]]:
    before = value
    for other in _values(value, leaf, direction):
        yield before, other
        before = other


def _end(passes: Callable[[float], bool], value: float, leaf: Leaf, direction: int) -> float | None:
    """Return the last value in a direction up to which the target is reached, or None where it always is."""
    for before, other in _pairs(value, leaf, direction):
        if not passes(other):
            return _bisect(passes, before, other)[0]
    return None


def _masses(scan: Scan, passes_now: bool) -> Masses:
    """Return the range of net masses; a volume that was given grows with the mass."""
    leaf = next(leaf for leaf in scan.plan.leaves if leaf.name == "load.mass")
    centre = float(leaf.estimate.centre)
    volume = scan.setup.estimates.get("load.volume")
    capacity = scan.setup.estimates.get("balance.max_capacity")
    container = scan.setup.estimates.get("container.mass")
    most = float(capacity.centre) - (float(container.centre) if container else 0.0) if capacity else math.inf

    def passes(mass: float) -> bool:
        changes = {"load.mass": leaf.estimate.about(mass)}
        if volume is not None:
            changes["load.volume"] = replace(
                volume, centre=volume.centre * (mass / centre), spread=volume.spread * (mass / centre)
            )
        return mass <= most and scan.passes(changes)

    low, high, works = _range(passes, centre, leaf, passes_now)
    return Masses(low, high, works)


def _worth(scan: Scan, leaf: Leaf, scope: Scope) -> Worth:
    held = scan.e95(scan.outcome({leaf.name: replace(leaf.estimate, shape="fixed", spread=0.0)}), scope)
    sensor = f"sensors.{leaf.name}"
    measured = None
    if not leaf.place.sensor and not leaf.place.moment and scan.state != "as_read":
        known = scan.outcome({sensor: Estimate(0.0)})
        e95 = scan.e95(known, scope)
        measured = e95 if e95 < scan.e95(scan.outcome(), scope) * (1 - PRECISION) else None
    return Worth(leaf.name, leaf.place.label, held, measured)


def _best(worth: Worth) -> float:
    return min(worth.held, worth.held if worth.measured is None else worth.measured)


def _joint(scan: Scan, leaves: Sequence[Leaf], now: Outcome, scope: Scope) -> Joint:
    names = tuple(leaf.name for leaf in leaves)

    def passes(factor: float) -> bool:
        made = {leaf.name: _scaled(leaf, factor) for leaf in leaves if _grows(leaf)}
        return scan.passes({name: one for name, one in made.items()})

    able = [f for f in _FACTORS if all(_possible(leaf, _scaled(leaf, f)) for leaf in leaves if _grows(leaf))]
    found = [passes(f) for f in able] if leaves else []
    factor = None
    if found and found[0]:
        fails = found.index(False) if False in found else len(found)
        factor = able[-1] if fails == len(found) else _bisect(passes, able[fails - 1], able[fails])[0] or None
    steps, reached = _steps(scan, [leaf for leaf in leaves if _grows(leaf)], now, scope)
    return Joint(names, factor, steps, reached)


def _grows(leaf: Leaf) -> bool:
    """Return whether there is something of a quantity that a factor changes."""
    return not leaf.estimate.is_exact or bool(leaf.estimate.centre)


def _steps(scan: Scan, leaves: Sequence[Leaf], now: Outcome, scope: Scope) -> tuple[tuple[Step, ...], bool]:
    """Return the halvings that lessen e95 most, one after the other, until the target is reached or nothing helps."""
    factors = {leaf.name: 1.0 for leaf in leaves}
    steps: list[Step] = []
    outcome, e95 = now, scan.e95(now, scope)
    while not outcome.passes and len(steps) < MOST_STEPS:
        tried = []
        for leaf in leaves:
            made = {one.name: _scaled(one, factors[one.name] / (2 if one is leaf else 1)) for one in leaves}
            other = scan.outcome(made)
            tried.append((scan.e95(other, scope), leaf, other))
        if not tried:
            break
        least, leaf, other = min(tried, key=lambda one: one[0])
        if least > e95 * (1 - PRECISION):
            break
        factors[leaf.name] /= 2
        outcome, e95 = other, least
        steps.append(Step(leaf.name, leaf.place.kind, _scaled(leaf, factors[leaf.name]), e95))
    return tuple(steps), outcome.passes


def _broken_by_balance(scan: Scan) -> float | None:
    """Return the e95 of repeatability and rounding alone where they break the target by themselves [kg]."""
    alone = [i for i, planned in enumerate(scan.plan.effects) if planned.effect.name == "repeatability"]
    if not alone:
        return None
    error = scan.run.result.error(scan.state, alone)
    from envcorr.propagation import largest_with

    e95 = largest_with(error, scan.target.probability)
    return e95 if e95 > scan.target.bound("whole") else None
