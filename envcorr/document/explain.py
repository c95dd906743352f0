"""What a quantity, a choice or an effect is, from its record."""

from __future__ import annotations

import inspect
import math
from collections.abc import Mapping
from typing import TypeAlias

from envcorr import units
from envcorr.catalogue import CATALOGUE, Catalogue, Place, nearest
from envcorr.document.blocks import (
    Block,
    Column,
    Figure,
    Figures,
    Group,
    Heading,
    Item,
    Listing,
    Note,
    Notices,
    Table,
    Text,
)
from envcorr.document.wording import capital, estimate_text, joined
from envcorr.effect import Effect, Way, parameters
from envcorr.errors import Fault, InputError
from envcorr.intake.setup_file import REQUIRED
from envcorr.vocabulary import Choice, Quantity

__all__ = [
    "Subject",
    "acts_on",
    "condition",
    "document",
    "example",
    "look_up",
    "needs",
    "overview",
    "rests_on",
    "used_by",
]

Subject: TypeAlias = Place | Choice | Effect

VARIES = {
    "each reading": "drawn anew at each reading, the tare's too",
    "each weighing": "drawn anew at each weighing, the same at both of its readings",
    "never": "the same in every repeat, so that averaging does not lessen it",
}
MOMENTS = {
    "tare": "This is the value at the tare reading; where it is not given, that of the loaded reading counts.",
    "adjusted": "This is the value when the balance was adjusted (see adjusted.when).",
}
SENSOR = (
    "How well it is known when a correction is computed: the error of what measures it, as u, U with k, or half_width."
)


def look_up(name: str, catalogue: Catalogue = CATALOGUE) -> Subject:
    """Return what a name stands for: a quantity (at its moment), a choice or an effect.

    Raises :class:`InputError`, which offers the nearest name.
    """
    for candidate in (name, name.replace("-", "_")):
        found = catalogue.effects.get(candidate) or catalogue.choices.get(candidate) or catalogue.find(candidate)
        if found is not None:
            return found
    every = [*catalogue.words(), *catalogue.quantities, *catalogue.effects]
    ends = {word.rpartition(".")[2]: word for word in reversed(every)}
    last = name.rpartition(".")[2]
    near = nearest(name, every) or ends.get(last, "") or ends.get(nearest(last, ends), "")
    hint = f"Did you mean {near}?" if near else "envcorr explain, without a name, lists all of them."
    raise InputError([Fault(name, "is not the name of a quantity, a choice or an effect.", hint)])


def document(subject: Subject, catalogue: Catalogue = CATALOGUE) -> list[Block]:
    """Return the page about a quantity, a choice or an effect."""
    if isinstance(subject, Effect):
        return _effect(subject, catalogue)
    if isinstance(subject, Choice):
        return _choice(subject, catalogue)
    return _quantity(subject, catalogue)


def overview(catalogue: Catalogue = CATALOGUE) -> list[Block]:
    """Return the page that lists every name."""
    sections: dict[str, list[tuple[str, ...]]] = {}
    for quantity in catalogue.quantities.values():
        if not quantity.internal:
            row = (quantity.name, quantity.label, example(quantity))
            sections.setdefault(quantity.name.partition(".")[0], []).append(row)
    quantities = tuple(Group(tuple(rows), section) for section, rows in sections.items())
    choices = tuple((c.name, c.label, joined(c.options, "or")) for c in catalogue.choices.values())
    effects = tuple((e.name, e.title, "balance" if e.own else "room") for e in catalogue.effects.values())
    return [
        Heading("What envcorr knows", level=1),
        Text('Each of these names can be explained: "envcorr explain NAME".'),
        Heading("Effects"),
        Table((Column("Name"), Column("what it is"), Column("of the")), (Group(effects),)),
        Heading("Quantities"),
        Table((Column("Name"), Column("what it is"), Column("such as")), quantities),
        Heading("Choices"),
        Table((Column("Name"), Column("what it is"), Column("words")), (Group(choices),)),
    ]


def example(quantity: Quantity) -> str:
    """Return a value that may be given: its default, an example of its kind inside the usual range, or one computed."""
    kind = quantity.kind
    if quantity.default is not None:
        taken = quantity.default.estimate
        size = float(taken.centre) or float(taken.spread)
        if size:
            return units.show(size, kind)
    if quantity.example:
        return quantity.example
    low, high = max(quantity.low, quantity.usual[0]), min(quantity.high, quantity.usual[1])
    for text in units.KINDS[kind].examples:
        if low <= units.parse(text, kind) <= high:
            return text
    return units.show((low + high) / 2 or high / 100, kind)


# Relations -------------------------------------------------------------------------------------------------


def acts_on(effect: Effect) -> dict[str, str]:
    """Return what the effect's functions compute, in the words of their docstrings."""
    found = {}
    for where, function in (("load", effect.load), ("gain", effect.gain)):
        if function is not None:
            text = " ".join((inspect.getdoc(function) or "").split())
            found[where] = capital(text.removeprefix("Return "))
    return found


def needs(effect: Effect, catalogue: Catalogue = CATALOGUE) -> tuple[str, ...]:
    """Return the dotted names of what the effect's functions ask for."""
    functions = [function for function in (effect.load, effect.gain) if function]
    return tuple(dict.fromkeys(catalogue.place(name).name for f in functions for name in parameters(f)))


def rests_on(effect: Effect, catalogue: Catalogue = CATALOGUE) -> tuple[str, ...]:
    """Return every quantity, without its moment, that may enter the effect, by whatever way."""
    pending = [catalogue.find(name) for name in needs(effect, catalogue)]
    found: dict[str, None] = {}
    while pending:
        place = pending.pop(0)
        if place is None or place.quantity.name in found:
            continue
        found[place.quantity.name] = None
        heads = [place.quantity.name, *(f"{moment}.{place.quantity.name}" for moment in ("tare", "adjusted"))]
        ways = [way for head in heads for way in catalogue.ways.get(head, ())]
        pending += [catalogue.place(name) for way in ways for name in parameters(way.function)]
    return tuple(found)


def used_by(quantity: Quantity, catalogue: Catalogue = CATALOGUE) -> tuple[str, ...]:
    """Return the names of the effects that the quantity may enter."""
    return tuple(e.name for e in catalogue.effects.values() if quantity.name in rests_on(e, catalogue))


def condition(when: Mapping[str, tuple[str, ...]] | None) -> str:
    """Return the words of choices on which something depends, as a phrase."""
    return " and ".join(f"{name} is {joined(map(_in_quotes, words), 'or')}" for name, words in (when or {}).items())


def _in_quotes(word: str) -> str:
    return f'"{word}"'


# Pages -----------------------------------------------------------------------------------------------------


def _quantity(place: Place, catalogue: Catalogue) -> list[Block]:
    quantity = place.quantity
    ways = catalogue.ways.get(place.name) or catalogue.ways.get(quantity.name, ())
    kind = units.KINDS[units.spread_kind(quantity.kind) if place.sensor else quantity.kind]
    text = quantity.help
    if place.moment:
        text += f" {MOMENTS[place.moment]}"
    if place.sensor:
        text += f" {SENSOR}"
    figures = [Figure("Kind", kind.name, f"such as {joined(kind.examples, 'or')}")]
    if quantity.internal:
        figures.append(Figure("Given", "no, it is worked out"))
    else:
        written = f'{{ u = "{kind.examples[0]}" }}' if place.sensor else f'"{example(quantity)}"'
        section, _, key = place.name.rpartition(".")
        figures.append(Figure("In a set-up file", f"[{section}]  {key} = {written}"))
        figures.append(Figure("Read bare", _bare(place)))
    if not place.sensor:
        figures.append(Figure("Accepted", _bounds(quantity, (quantity.low, quantity.high))))
        if any(map(math.isfinite, quantity.usual)):
            figures.append(Figure("Usual", _bounds(quantity, quantity.usual)))
        if quantity.default is not None:
            taken = estimate_text(quantity.default.estimate, quantity.kind)
            figures.append(Figure("If not given", taken, quantity.default.source))
        elif not quantity.internal:
            figures.append(Figure("If not given", _lack(place, bool(ways))))
    figures.append(Figure("Varies", VARIES["never" if place.sensor else quantity.varies]))
    effects = [catalogue.effects[name] for name in used_by(quantity, catalogue)]
    if effects:
        figures.append(Figure("Enters", joined(effect.title for effect in effects)))
    blocks: list[Block] = [Heading(f"{place.name}: {place.label}", level=1), Text(text), Figures(tuple(figures))]
    return blocks + _ways({place.name: ways}, catalogue, "Where it is not given, it is found")


def _lack(place: Place, ways: bool) -> str:
    if place.name in REQUIRED:
        return "a room check is refused"
    return "it is found from others, if they are given" if ways else "what rests on it is not assessed"


def _bare(place: Place) -> str:
    if place.sensor:
        return "refused: say whether it is u, U or half_width"
    return "an unsigned bound, ±" if place.quantity.limit else "exact"


def _bounds(quantity: Quantity, ends: tuple[float, float]) -> str:
    low, high = ends
    texts = [units.show(end, quantity.kind) for end in ends]
    if math.isinf(low):
        return "any value" if math.isinf(high) else f"up to {texts[1]}"
    return f"from {texts[0]}" if math.isinf(high) else f"{texts[0]} to {texts[1]}"


def _ways(ways: Mapping[str, tuple[Way, ...]], catalogue: Catalogue, heading: str) -> list[Block]:
    groups = []
    for name, found in ways.items():
        rows = []
        for way in found:
            uses = joined(catalogue.place(parameter).name for parameter in parameters(way.function)) or "nothing"
            if when := condition(way.when):
                uses += f"; if {when}"
            rows.append((f"{way.label} [{way.source}]" if way.source else way.label, uses))
        if rows:
            groups.append(Group(tuple(rows), name if len(ways) > 1 else ""))
    if not groups:
        return []
    caption = "The first way that can be gone is taken." if any(len(group.rows) > 1 for group in groups) else ""
    return [Heading(heading), Table((Column("How"), Column("from")), tuple(groups), caption)]


def _choice(choice: Choice, catalogue: Catalogue) -> list[Block]:
    items = [Item(word, meaning) for word, meaning in choice.options.items()]
    items += [Item(f"{word} (refused)", reason) for word, reason in (choice.refused or {}).items()]
    section, _, key = choice.name.rpartition(".")
    first = next(iter(choice.options))
    figures = [
        Figure("In a set-up file", f'[{section}]  {key} = "{first}"'),
        Figure("If not given", choice.default or "nothing is taken for it", choice.source),
    ]
    return [
        Heading(f"{choice.name}: {choice.label}", level=1),
        Figures(tuple(figures)),
        Heading("Its words"),
        Listing(tuple(items)),
    ]


def _effect(effect: Effect, catalogue: Catalogue) -> list[Block]:
    found = acts_on(effect)
    words = {"load": "Adds to the load", "gain": "Changes the gain"}
    figures = [Figure(words[where], text) for where, text in found.items()]
    figures.append(Figure("Source", effect.source))
    figures.append(Figure("Counts as", "the balance's own part" if effect.own else "surroundings"))
    bands = [f"but only bounded by {way.label}" for way in effect.ways if way.band]
    able = ", ".join(["yes", *bands]) if effect.correctable else "no, only bounded"
    figures.append(Figure("Can be corrected for", able))
    if effect.treatment:
        leaves = f"; leaves {effect.leaves}" if effect.leaves else ""
        figures.append(Figure("Can be removed", f"{effect.treatment}{leaves}"))
    if effect.test:
        figures.append(Figure("The test", effect.test))
    if effect.needed:
        needed = "for every load" if effect.needed == "always" else f'where {effect.needed} is "yes"'
        figures.append(Figure("Must be assessed", f"{needed}, or waived in target.waived"))
    if effect.when:
        figures.append(Figure("Applies", f"if {condition(effect.when)}"))
    blocks: list[Block] = [Heading(f"{effect.name}: {effect.title}", level=1), Text(effect.help)]
    blocks.append(Figures(tuple(figures)))
    names = rests_on(effect, catalogue)
    given = [catalogue.quantities[name] for name in names if not catalogue.quantities[name].internal]
    rows = tuple((q.name, q.label, "has a default" if q.default else "") for q in given)
    if rows:
        columns = (Column("Name"), Column("what it is"), Column(""))
        caption = "Which of them are needed depends on the way that is gone; envcorr room says what is lacking."
        blocks += [Heading("What it can be found from"), Table(columns, (Group(rows),), caption)]
    ways = {name: catalogue.ways[name] for name in names if name in catalogue.ways}
    blocks += _ways(ways, catalogue, "How the rest is worked out")
    if effect.caution:
        blocks += [Heading("Mind this"), Notices((Note(effect.caution, level="caution"),))]
    return blocks
