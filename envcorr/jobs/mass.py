"""What is the true mass of a sample, from a reading of it, and with which uncertainty?

The reading is the mass plus what the effects add to it. The correctable effects are taken out at their best estimates
by solving that for the mass; the others cannot move the value, they widen it: their root mean square about zero enters
u.
"""

from __future__ import annotations

import math
from collections.abc import Mapping, Sequence
from dataclasses import dataclass, field
from typing import Any

import numpy as np

from envcorr.errors import Notice
from envcorr.estimate import Estimate, Value
from envcorr.jobs.common import Contribution, correlation_matrix, notices, usual_range_notices
from envcorr.jobs.mass_draws import apart, masses_by_draws
from envcorr.jobs.solving import Solution, bands_by_draws, correctable, plan_reading, reading_of, solve
from envcorr.plan import Assumption, NotAssessed, Plan
from envcorr.propagation import coverage_factor
from envcorr.setup import Setup

__all__ = ["DrawnMass", "MassEffect", "MassResult", "Told", "find_mass"]


@dataclass(frozen=True, slots=True)
class MassEffect:
    """One effect's part: the correction made [kg] (None for a band), and its contribution to u [kg]."""

    name: str
    title: str
    correction: float | None
    u: float
    ways: tuple[str, ...]
    source: str
    test: str
    caution: str


@dataclass(frozen=True, slots=True)
class Told:
    """A value with its standard uncertainty, in SI units."""

    value: float
    u: float


@dataclass(frozen=True, slots=True)
class DrawnMass:
    """Standard uncertainty and coverage interval by ``size`` draws; ``agrees`` where first order is validated by them.

    JCGM 101:2008, 7.7 and clause 8, to the first significant digit of u.
    """

    u: float
    low: float
    high: float
    size: int
    agrees: bool


@dataclass(frozen=True)
class MassResult:
    """The mass of one sample [kg], and what goes with it."""

    setup: Setup
    plan: Plan
    reading: Told
    mass: Told
    dof: float
    k: float
    probability: float
    correction: float
    conventional_mass: Told | None
    volume: Told | None
    air_density: Told | None
    quantities: tuple[Contribution, ...]
    effects: tuple[MassEffect, ...]
    not_assessed: tuple[NotAssessed, ...]
    assumed: tuple[Assumption, ...]
    unused: tuple[str, ...]
    notices: tuple[Notice, ...]
    seed: int
    by_draws: Mapping[str, DrawnMass] = field(default_factory=dict)
    """What Monte Carlo says of ``load.mass`` and ``load.conventional_mass``, where it was asked for."""

    @property
    def expanded(self) -> float:
        """The expanded uncertainty U = k u [kg]."""
        return self.k * self.mass.u


def find_mass(setup: Setup, *, probability: float = 0.95, count: int = 0, seed: int = 0) -> MassResult:
    """Return the mass behind ``reading`` (or ``gross`` less ``tare``) of the set-up.

    First order with effective degrees of freedom (JCGM 100:2008, clause 5 and annex G); the bands by Monte Carlo.
    ``count`` draws give a coverage interval by Monte Carlo too (none if 0).
    Raises :class:`InputError` where there is no reading, or nothing by which to correct it for the air.
    """
    reading = reading_of(setup)
    plan = plan_reading(setup, reading.centre)
    solved = solve(plan, reading.centre, by_effect=True)
    mass, per = float(solved.mass), float(solved.per)
    correlation = correlation_matrix(plan)
    repeats = setup.estimates.get("cycle.repeats", Estimate(1.0))
    bands = bands_by_draws(plan, mass, seed=seed, repeats=round(float(repeats.centre)))
    bands = {i: band * per for i, band in bands.items()}
    own = float(reading.u) * per
    widening = own**2 + sum(band**2 for band in bands.values())
    u = math.sqrt(_square(solved.contributions, correlation) + widening)
    dof = _dof(plan, solved, reading, own, bands, u)

    def told(name: str, *, with_mass: bool) -> Told | None:
        if name not in solved.targets:
            return None
        value, contributions = solved.targets[name]
        # what widens the mass widens what is proportional to it
        rest = widening * (float(value) / mass) ** 2 if with_mass and mass else 0.0
        return Told(float(value), math.sqrt(_square(contributions, correlation) + rest))

    k = coverage_factor(probability, dof)
    conventional = told("load.conventional_mass", with_mass=True)
    sizes = {"load.mass": Told(mass, u)} | ({"load.conventional_mass": conventional} if conventional else {})
    drawn = {}
    if count:
        how: dict[str, Any] = {"count": count, "probability": probability, "seed": seed, "names": tuple(sizes)}
        for name, found in masses_by_draws(plan, solved, reading, 1, **how).items():
            one = sizes[name]
            agrees = not apart(one.value, k * one.u, found)[0]
            drawn[name] = DrawnMass(
                float(found.u[0]), float(found.low[0]), float(found.high[0]), found.size, bool(agrees)
            )
    return MassResult(
        setup=setup,
        plan=plan,
        reading=Told(float(reading.centre), float(reading.u)),
        mass=Told(mass, u),
        dof=dof,
        k=k,
        probability=probability,
        correction=mass - float(reading.centre),
        conventional_mass=conventional,
        volume=told("load.volume", with_mass="load.volume" not in setup.estimates),
        air_density=told("air.density", with_mass=False),
        quantities=_quantity_rows(plan, solved, reading, own),
        effects=_effect_rows(plan, solved, bands, correlation),
        not_assessed=plan.not_assessed,
        assumed=plan.assumed,
        unused=tuple(name for name in plan.unused if name not in ("reading", "gross", "tare")),
        notices=(*usual_range_notices(plan), *notices(plan, solved.values)),
        seed=seed,
        by_draws=drawn,
    )


def _square(contributions: Sequence[Value], correlation: Any) -> float:
    column = np.array([float(c) for c in contributions])
    if correlation is None:
        return float(column @ column)
    return max(float(column @ correlation @ column), 0.0)


def _dof(plan: Plan, solved: Solution, reading: Estimate, own: float, bands: dict[int, float], u: float) -> float:
    """Return the effective degrees of freedom: Welch-Satterthwaite, JCGM 100:2008, (G.2b)."""
    centres = plan.centres()
    parts = [(float(c), leaf.estimate.dof) for c, leaf in zip(solved.contributions, plan.leaves, strict=True)]
    parts.append((own, reading.dof))
    for i, band in bands.items():
        effect, inputs = plan.effects[i].effect, plan.effects[i].dof
        if effect.dof is not None and inputs is not None:
            parts.append((band, float(effect.dof(*[centres[j] for j in inputs]))))
    weights = sum(c**4 / dof for c, dof in parts if math.isfinite(dof))
    return u**4 / weights if weights > 0 else math.inf


def _quantity_rows(plan: Plan, solved: Solution, reading: Estimate, own: float) -> tuple[Contribution, ...]:
    rows = [
        Contribution(leaf.name, leaf.place.label, leaf.place.kind, leaf.estimate, leaf.origin, float(c))
        for leaf, c in zip(plan.leaves, solved.contributions, strict=True)
        if c
    ]
    if own:
        rows.append(Contribution("reading", "reading", "mass", reading, "given", own))
    return tuple(sorted(rows, key=lambda row: -abs(row.contribution)))


def _effect_rows(plan: Plan, solved: Solution, bands: dict[int, float], correlation: Any) -> tuple[MassEffect, ...]:
    parts = plan.parts(solved.values)
    able = correctable(plan)
    rows = [
        MassEffect(
            name=planned.effect.name,
            title=planned.effect.title,
            correction=-float(parts.effect(i)) if i in able else None,
            u=math.sqrt(_square(solved.effects[i], correlation)) if i in able else bands[i],
            ways=planned.ways,
            source=planned.effect.source,
            test=planned.effect.test,
            caution=planned.effect.caution,
        )
        for i, planned in enumerate(plan.effects)
    ]
    return tuple(sorted(rows, key=lambda row: -max(abs(row.correction or 0.0), row.u)))
