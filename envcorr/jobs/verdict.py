"""Whether the error stays within what the target allows: the decision rule, and its answer in words.

A total passes if the surroundings alone stay within the share ``within`` of the target resolution, and the whole
weighing within the target resolution, each with the demanded probability. The first of the totals as read, corrected
and treated that passes names the verdict.
"""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass
from typing import Literal

from envcorr.errors import Fault, InputError
from envcorr.estimate import Value
from envcorr.jobs.weighings import STATES, Run, Scope, State, scope_of
from envcorr.plan import Plan
from envcorr.propagation import Summary, largest_with, share_within, summary
from envcorr.setup import Setup

__all__ = [
    "Answer",
    "Figures",
    "Target",
    "Total",
    "Verdict",
    "figures",
    "give_verdict",
    "is_needed",
    "judge",
    "target_of",
    "treatments",
]

Answer = Literal["reached", "reached once corrected", "reached once treated", "undecided", "not reached"]
ANSWERS: dict[State, Answer] = {
    "as_read": "reached",
    "corrected": "reached once corrected",
    "treated": "reached once treated",
}
UNDECIDED_WITHIN = 2.3
"""Standard errors of the conformance probability within which no verdict is given (99 % one-sided, normal)."""


@dataclass(frozen=True, slots=True)
class Target:
    """What is demanded: resolution [kg], the surroundings' share of it, the probability, and of which measurand."""

    resolution: float
    within: float
    probability: float
    measurand: str

    def bound(self, scope: Scope) -> float:
        """Return the largest error allowed [kg]."""
        return self.resolution * (self.within if scope == "surroundings" else 1.0)


@dataclass(frozen=True, slots=True)
class Figures:
    """The figures of one total: errors in kg."""

    summary: Summary
    bound: float
    """The largest error allowed [kg]."""
    supported_resolution: float
    """The smallest target resolution that this total would let pass [kg]."""
    conformance_probability: float
    probability_error: float
    """Standard error of the conformance probability."""
    passes: bool | None
    """None where the probability is too near the demanded one to tell."""


@dataclass(frozen=True, slots=True)
class Total:
    """One of the three totals, for the surroundings alone and for the whole weighing."""

    surroundings: Figures
    whole: Figures

    @property
    def passes(self) -> bool | None:
        """Whether both pass; None where one is too near to tell and none fails."""
        return _both(self.surroundings.passes, self.whole.passes)


@dataclass(frozen=True, slots=True)
class Verdict:
    """The answer, on which total, and why in a sentence or two."""

    answer: Answer
    state: State
    reason: str
    first_to_improve: str
    limited_by_balance: bool = False
    treat: tuple[str, ...] = ()
    """The effects to be treated, the largest first, for the total to pass."""


def target_of(plan: Plan) -> tuple[Target, float]:
    """Return what is demanded, and the demanded relative accuracy."""
    if "target.resolution" not in plan.targets:
        remedy = 'Write, for example, [target] resolution = "0.1 mg".'
        raise InputError([Fault("target.resolution", "is not given.", remedy)])
    centres = plan.centres()
    resolution, within, probability, accuracy = (
        float(centres[plan.targets[f"target.{name}"]])
        for name in ("resolution", "within", "probability", "relative_accuracy")
    )
    measurand = plan.setup.choices.get("target.measurand", "mass")
    return Target(resolution, within, probability, measurand), accuracy


def _both(first: bool | None, second: bool | None) -> bool | None:
    return False if False in (first, second) else None if None in (first, second) else True


def figures(error: Value, size: int, target: Target, scope: Scope) -> Figures:
    """Return the figures of a total from its error on ``size`` draws [kg]."""
    bound = target.bound(scope)
    found = summary(error, size, target.probability)
    inside, inside_error = share_within(error, bound, size)
    return Figures(
        summary=found,
        bound=bound,
        supported_resolution=found.largest / (bound / target.resolution),
        conformance_probability=inside,
        probability_error=inside_error,
        passes=_passes(inside, inside_error, target),
    )


def _passes(inside: float, inside_error: float, target: Target) -> bool | None:
    near = abs(inside - target.probability) < UNDECIDED_WITHIN * inside_error
    return None if near else inside >= target.probability


def judge(run: Run, target: Target, state: State, without: Sequence[int] = ()) -> bool | None:
    """Return whether both totals pass with some effects (their indices) left out; None where too near to tell."""

    def passes(scope: Scope) -> bool | None:
        chosen = [i for i in scope_of(run.plan, scope) if i not in without]
        error = run.result.error(state, chosen)
        return _passes(*share_within(error, target.bound(scope), run.drawn.size), target)

    return _both(passes("surroundings"), passes("whole"))


def treatments(run: Run, target: Target) -> tuple[int, ...]:
    """Return the fewest treatable effects that must be treated, the largest first, for the corrected total to pass."""
    able = [i for i, planned in enumerate(run.plan.effects) if planned.effect.treatment]
    size = {i: largest_with(run.result.effect("corrected", i), target.probability) for i in able}
    chosen: list[int] = []
    for i in sorted(able, key=lambda i: -size[i]):
        chosen.append(i)
        if judge(run, target, "corrected", chosen):
            break
    return tuple(chosen)


def is_needed(needed: str, setup: Setup) -> bool:
    """Return whether an effect may not be missing for this load."""
    return needed == "always" or (bool(needed) and setup.choices.get(needed) == "yes")


def give_verdict(run: Run, target: Target, totals: dict[State, Total], first_to_improve: str) -> Verdict:
    """Return the verdict on the three totals."""
    setup = run.plan.setup
    missing = [
        lacking.effect.title
        for lacking in run.plan.not_assessed
        if is_needed(lacking.effect.needed, setup) and lacking.effect.name not in setup.waived
    ]
    for state in STATES:
        total = totals[state]
        if total.passes is False:
            continue
        if total.passes is None:
            near = total.surroundings if total.surroundings.passes is None else total.whole
            reason = (
                f"The conformance probability of {near.conformance_probability:.2%} is too near the demanded one "
                "to tell; more draws (--draws) may decide."
            )
            return Verdict("undecided", state, reason, first_to_improve)
        treat = treatments(run, target) if state == "treated" else ()
        names = tuple(run.plan.effects[i].effect.name for i in treat)
        if missing:
            reason = (
                f"What was assessed would pass, but not assessed: {' and '.join(missing)}. Give what is lacking, or "
                "waive it by name in target.waived."
            )
            return Verdict("undecided", state, reason, first_to_improve, treat=names)
        return Verdict(ANSWERS[state], state, _reason(run, target, state, treat), first_to_improve, treat=names)
    last = totals["treated"]
    limited = bool(last.surroundings.passes) and not last.whole.passes
    reason = (
        "The surroundings would pass, but the whole weighing does not: it is limited by the balance itself."
        if limited
        else "Even corrected and treated, the surroundings keep the error out of its bound."
    )
    return Verdict("not reached", "treated", reason, first_to_improve, limited)


def _reason(run: Run, target: Target, state: State, treat: Sequence[int]) -> str:
    if state == "as_read":
        return "The display may be taken as it is."
    effects = run.plan.effects
    left = [i for i in range(len(effects)) if effects[i].known and i not in treat]
    small = 0.05 * target.bound("surroundings")  # a correction below it is not worth naming (judgement)
    known = run.plan.parts(run.plan.centres(), known=True)
    corrected = [effects[i].effect.title for i in left if abs(float(known.effect(i))) > small]
    seen = [i for i in left if effects[i].effect.title not in corrected]
    # an effect with no correction at its best estimate may still be followed by a sensor
    corrected += [effects[i].effect.title for i in seen if _followed(run, i, small)]
    parts = [f"Corrected for {_listed(corrected)}"] if corrected else ["As it is read"]
    parts += [f"with {effects[i].effect.title} treated ({effects[i].effect.treatment})" for i in treat]
    tests = [(effects[i].effect.title, effects[i].effect.test) for i in treat if effects[i].effect.test]
    told = [test if len(tests) == 1 else f"{title}: {test}" for title, test in tests]
    narrower = f" To tell how large it is: {' '.join(told)}" if told else ""
    return f"{' and '.join(parts)}, the target is reached.{narrower}"


def _followed(run: Run, index: int, small: float) -> bool:
    read = largest_with(run.result.effect("as_read", index), 0.95)
    left = largest_with(run.result.effect("corrected", index), 0.95)
    return read - left > small


def _listed(names: Sequence[str]) -> str:
    return names[0] if len(names) == 1 else f"{', '.join(names[:-1])} and {names[-1]}"
