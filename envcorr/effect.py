"""The records that describe what the model is made of: Way, Check, Answer, Effect.

Their functions take quantities as keyword parameters (``air_temperature``, ``tare_air_density``,
``adjusted_bench_tilt_x``) and return SI floats or arrays; the model reads the signatures and supplies them.
"""

from __future__ import annotations

import inspect
from collections.abc import Callable, Mapping
from dataclasses import dataclass
from functools import cache
from typing import Any

from envcorr.vocabulary import Choice, Quantity

__all__ = ["Answer", "Check", "Effect", "Function", "OnlyIf", "Way", "parameters"]

Function = Callable[..., Any]
OnlyIf = Callable[[Mapping[str, Any]], bool]


@cache
def parameters(function: Function) -> tuple[str, ...]:
    """Return the names of the function's keyword parameters."""
    return tuple(inspect.signature(function).parameters)


@dataclass(frozen=True, slots=True)
class Check:
    """A condition beside its law or effect that deserves a word.

    ``function`` takes quantities and returns True where there is something to say; ``sentence`` may name those
    quantities in braces, ``{air_temperature}`` being printed with its unit. On draws the notice carries a share.
    ``only_if`` sees the best estimates that were given (name to SI value) and may decline; ``unless_chosen`` names a
    choice that, where it was made, leaves nothing to say.
    """

    function: Function
    sentence: str
    source: str = ""
    level: str = "warning"
    only_if: OnlyIf | None = None
    unless_chosen: str = ""


@dataclass(frozen=True, slots=True)
class Way:
    """One way to find a quantity from others.

    ``gives`` is the quantity's name, with ``tare.`` or ``adjusted.`` in front where the way serves that moment only.
    ``when`` maps the names of choices to the words for which the way may be used. The parameters listed in
    ``at_best`` are supplied at their best estimates, never drawn. ``only_if`` sees the best estimates that were
    given (name to SI value) and may decline. ``slopes`` returns the partial derivatives of ``function`` in its
    parameters, in order, from the same arguments; without it they are found by differences. ``band``: what it gives is
    a band only, so that an effect which rests on it is not corrected for.
    """

    gives: str
    function: Function
    label: str
    source: str = ""
    when: Mapping[str, tuple[str, ...]] | None = None
    only_if: OnlyIf | None = None
    at_best: tuple[str, ...] = ()
    checks: tuple[Check, ...] = ()
    slopes: Function | None = None
    band: bool = False


@dataclass(frozen=True, slots=True)
class Answer:
    """A figure of its own that an effect can give (the largest tolerable charge), of a kind of unit.

    ``function`` takes quantities at their best estimates; where one is lacking, or nothing finite comes of them,
    the answer is left out.
    """

    label: str
    kind: str
    function: Function


@dataclass(frozen=True, slots=True)
class Effect:
    """One thing that the surroundings, or the balance itself, do to the reading.

    ``load`` returns the pull that is added to the net load, in kg (loaded reading less tare reading); ``gain`` the
    relative change of the gain at one reading: the model evaluates it at the loaded and at the tare reading. An
    effect has one of the two, or both (buoyancy acts on the load and, through the adjusting weight, on the gain).

    ``own``: the balance's own part, not the surroundings'. ``correctable``: a correction can be computed (but
    where it rests on a way that gives a band).
    ``treatment``: what removes the effect, and ``leaves`` what remains then. ``needed``: "always", or the name of a
    choice that makes the effect indispensable when it is "yes". ``when`` guards the whole effect by choices; where it
    does not apply it is not listed. ``dof`` returns the degrees of freedom of its size, where they are known.
    ``replaced_by`` names quantities that measure what the effect models: where all are given, and the choices are as
    ``replaced_when`` says, the measurement stands in its place.
    ``definition``: the difference between mass and measurand, where the measurand is not the mass, is shown with this
    effect.
    """

    name: str
    title: str
    help: str
    source: str
    load: Function | None = None
    gain: Function | None = None
    quantities: tuple[Quantity, ...] = ()
    choices: tuple[Choice, ...] = ()
    ways: tuple[Way, ...] = ()
    checks: tuple[Check, ...] = ()
    answers: tuple[Answer, ...] = ()
    dof: Function | None = None
    when: Mapping[str, tuple[str, ...]] | None = None
    replaced_by: tuple[str, ...] = ()
    replaced_when: Mapping[str, tuple[str, ...]] | None = None
    own: bool = False
    correctable: bool = False
    treatment: str = ""
    leaves: str = ""
    needed: str = ""
    test: str = ""
    caution: str = ""
    definition: bool = False
