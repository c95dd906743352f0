"""What a quantity, a choice or an effect is, as plain dictionaries for JSON."""

from __future__ import annotations

import math
from typing import Any

from envcorr import materials, presets, units
from envcorr.catalogue import CATALOGUE, Catalogue, Place
from envcorr.document.explain import Subject, acts_on, condition, needs, rests_on, used_by
from envcorr.effect import Effect, Way, parameters
from envcorr.render.json import envelope, estimate, figure
from envcorr.vocabulary import Choice

__all__ = ["explain", "list_of_materials", "list_of_presets"]


def explain(subject: Subject | None, catalogue: Catalogue = CATALOGUE) -> dict[str, Any]:
    """Return one subject, or everything there is where it is None."""
    if subject is not None:
        return envelope("explain", _subject(subject, catalogue))
    quantities = [Place("", q) for q in catalogue.quantities.values() if not q.internal]
    return envelope(
        "explain",
        {
            "effects": [_subject(effect, catalogue) for effect in catalogue.effects.values()],
            "quantities": [_subject(place, catalogue) for place in quantities],
            "choices": [_subject(choice, catalogue) for choice in catalogue.choices.values()],
        },
    )


def list_of_materials() -> dict[str, Any]:
    """Return the materials by name, each with its density at 20 °C and its source."""
    found = []
    for name in materials.names():
        one = materials.find(name)
        slope = materials.expansion(one)
        found.append(
            {
                "name": name,
                "density": estimate(materials.density(one), "density"),
                "expansion": figure(None if slope is None else float(slope), "relative per temperature"),
                "density_kind": one.kind,
                "source": one.source,
            }
        )
    return envelope("explain", {"materials": found})


def list_of_presets() -> dict[str, Any]:
    """Return the usual disturbances by name, each with its figure and its source."""
    found = [
        {
            "subject": one.subject,
            "name": one.name,
            "figure": figure(one.value, one.kind),
            "text": one.text,
            "source": one.source,
        }
        for one in presets.every()
    ]
    return envelope("explain", {"presets": found})


def _subject(subject: Subject, catalogue: Catalogue) -> dict[str, Any]:
    if isinstance(subject, Effect):
        return _effect(subject, catalogue)
    if isinstance(subject, Choice):
        return _choice(subject)
    return _quantity(subject, catalogue)


def _ways(ways: tuple[Way, ...], catalogue: Catalogue) -> list[dict[str, Any]]:
    return [
        {
            "label": way.label,
            "from": [catalogue.place(name).name for name in parameters(way.function)],
            "when": condition(way.when) or None,
            "source": way.source or None,
        }
        for way in ways
    ]


def _quantity(place: Place, catalogue: Catalogue) -> dict[str, Any]:
    quantity = place.quantity

    def ends(low: float, high: float) -> list[dict[str, Any] | None]:
        return [figure(end, quantity.kind) if math.isfinite(end) else None for end in (low, high)]

    default = quantity.default
    return {
        "subject": "quantity",
        "name": place.name,
        "label": place.label,
        "help": quantity.help,
        "kind": quantity.kind,
        "examples": list(units.KINDS[quantity.kind].examples),
        "accepted": ends(quantity.low, quantity.high),
        "usual": ends(*quantity.usual),
        "varies": "never" if place.sensor else quantity.varies,
        "limit": quantity.limit,
        "given": not quantity.internal,
        "default": {**estimate(default.estimate, quantity.kind), "source": default.source} if default else None,
        "ways": _ways(catalogue.ways.get(place.name) or catalogue.ways.get(quantity.name, ()), catalogue),
        "used_by": list(used_by(quantity, catalogue)),
    }


def _choice(choice: Choice) -> dict[str, Any]:
    return {
        "subject": "choice",
        "name": choice.name,
        "label": choice.label,
        "options": choice.options,
        "default": choice.default or None,
        "source": choice.source or None,
        "refused": choice.refused or {},
    }


def _effect(effect: Effect, catalogue: Catalogue) -> dict[str, Any]:
    names = rests_on(effect, catalogue)
    return {
        "subject": "effect",
        "name": effect.name,
        "title": effect.title,
        "help": effect.help,
        "acts_on": acts_on(effect),
        "source": effect.source,
        "own": effect.own,
        "correctable": effect.correctable,
        "treatment": effect.treatment or None,
        "leaves": effect.leaves or None,
        "test": effect.test or None,
        "caution": effect.caution or None,
        "needed": effect.needed or None,
        "when": condition(effect.when) or None,
        "asks_for": list(needs(effect, catalogue)),
        "found_from": [name for name in names if not catalogue.quantities[name].internal],
        "ways": {name: _ways(catalogue.ways[name], catalogue) for name in names if name in catalogue.ways},
    }
