"""The catalogue: every quantity, choice, way and effect by name, checked against each other when it is made."""

from __future__ import annotations

import difflib
from collections import defaultdict
from collections.abc import Iterable, Mapping
from dataclasses import dataclass, field

from envcorr import units
from envcorr.choices import CHOICES
from envcorr.derived import QUANTITIES as DERIVED
from envcorr.derived import WAYS
from envcorr.effect import Check, Effect, Function, Way, parameters
from envcorr.effects import EFFECTS
from envcorr.errors import CatalogueError
from envcorr.vocabulary import MOMENTS, PRESENT, QUANTITIES, TARGET, Choice, Moment, Quantity

__all__ = ["CATALOGUE", "Catalogue", "Place", "nearest"]

SENSORS = "sensors."


@dataclass(frozen=True, slots=True)
class Place:
    """A quantity at a moment; for a sensor's error, ``sensor`` is true and ``quantity`` is what it measures."""

    moment: Moment
    quantity: Quantity
    sensor: bool = False

    @property
    def kind(self) -> str:
        """The kind of its units; the error of a sensor is a difference."""
        return units.spread_kind(self.quantity.kind) if self.sensor else self.quantity.kind

    @property
    def name(self) -> str:
        """The dotted name: ``tare.air.pressure``, ``sensors.air.pressure``."""
        moment = f"{self.moment}." if self.moment else ""
        return f"{moment}{SENSORS if self.sensor else ''}{self.quantity.name}"

    @property
    def label(self) -> str:
        """The quantity in words, with its moment."""
        label = f"{self.quantity.label}, as the sensor reads it" if self.sensor else self.quantity.label
        return {"": label, "tare": f"{label}, at the tare", "adjusted": f"{label}, at the adjustment"}[self.moment]


def nearest(name: str, known: Iterable[str]) -> str:
    """Return the known name that looks most like ``name``, or an empty string."""
    found = difflib.get_close_matches(name, list(known), n=1, cutoff=0.6)
    return found[0] if found else ""


@dataclass(frozen=True)
class Catalogue:
    """What the program knows, by name. Raises :class:`CatalogueError` where its parts do not fit together."""

    quantities: dict[str, Quantity]
    choices: dict[str, Choice]
    ways: dict[str, tuple[Way, ...]]
    effects: dict[str, Effect]
    _parameters: dict[str, Place] = field(repr=False)

    @classmethod
    def build(
        cls,
        quantities: Iterable[Quantity],
        choices: Iterable[Choice],
        ways: Iterable[Way],
        effects: Iterable[Effect],
    ) -> Catalogue:
        """Put the parts together; an effect's own quantities, choices and ways join the shared ones."""
        effects = list(effects)
        every = [*quantities, *(q for effect in effects for q in effect.quantities)]
        chosen = [*choices, *(c for effect in effects for c in effect.choices)]
        by_target: dict[str, list[Way]] = defaultdict(list)
        for way in [*ways, *(w for effect in effects for w in effect.ways)]:
            by_target[way.gives].append(way)
        named: dict[str, Place] = {}
        for quantity in every:
            for moment in MOMENTS:
                place = Place(moment, quantity)
                key = place.name.replace(".", "_")
                if key in named:
                    raise CatalogueError(f"two quantities share the Python name {key}")
                named[key] = place
        result = cls(
            {q.name: q for q in every},
            {c.name: c for c in chosen},
            {name: tuple(found) for name, found in by_target.items()},
            {effect.name: effect for effect in effects},
            named,
        )
        if len(result.effects) != len(effects):
            raise CatalogueError("two effects share a name")
        result._verify()
        return result

    def place(self, parameter: str) -> Place:
        """Return the quantity and moment of a Python parameter name (``tare_air_density``)."""
        return self._parameters[parameter]

    def find(self, name: str) -> Place | None:
        """Return the place of a dotted name (``tare.sensors.air.pressure``), or None."""
        moment: Moment = PRESENT
        for candidate in MOMENTS[1:]:
            if name.startswith(f"{candidate}.") and name not in self.quantities:
                moment, name = candidate, name.removeprefix(f"{candidate}.")
        sensor = name.startswith(SENSORS)
        quantity = self.quantities.get(name.removeprefix(SENSORS))
        return None if quantity is None else Place(moment, quantity, sensor)

    def dotted(self, parameter: str) -> str:
        """Return the dotted name of a Python name of a quantity, a sensor's included."""
        for moment in ("", "tare_", "adjusted_"):
            head = f"{moment}sensors_"
            if parameter.startswith(head):
                place = self.place(moment + parameter.removeprefix(head))
                return Place(place.moment, place.quantity, sensor=True).name
        if parameter not in self._parameters:
            near = nearest(parameter, self._parameters)
            raise KeyError(f"no quantity {parameter}" + (f"; did you mean {near}?" if near else ""))
        return self.place(parameter).name

    def dotted_choice(self, parameter: str) -> str:
        """Return the dotted name of a Python name of a choice."""
        named = {name.replace(".", "_"): name for name in self.choices}
        return named[parameter]

    def words(self) -> list[str]:
        """Return every name that a set-up may use: quantities and choices."""
        return [q.name for q in self.quantities.values() if not q.internal] + list(self.choices)

    def _verify(self) -> None:
        for effect in self.effects.values():
            if effect.load is None and effect.gain is None:
                raise CatalogueError(f"effect {effect.name} acts on nothing")
            for function in filter(None, (effect.load, effect.gain)):
                self._verify_function(f"effect {effect.name}", function)
            self._verify_checks(f"effect {effect.name}", effect.checks)
            self._verify_when(f"effect {effect.name}", effect.when or {})
            for answer in effect.answers:
                self._verify_function(f"an answer of effect {effect.name}", answer.function)
            if effect.needed not in ("", "always") and effect.needed not in self.choices:
                raise CatalogueError(f"effect {effect.name} is needed by an unknown choice {effect.needed}")
        for target, ways in self.ways.items():
            if self.find(target) is None:
                near = nearest(target, self.quantities)
                raise CatalogueError(f"a way gives {target}, which no vocabulary names (nearest: {near})")
            for way in ways:
                self._verify_function(f"the way {way.label}", way.function)
                self._verify_checks(f"the way {way.label}", way.checks)
                self._verify_when(f"the way {way.label}", way.when or {})
                if unknown := set(way.at_best) - set(parameters(way.function)):
                    raise CatalogueError(f"the way {way.label} has no parameter {sorted(unknown)}")

    def _verify_function(self, where: str, function: Function) -> None:
        for name in parameters(function):
            if name not in self._parameters:
                near = nearest(name, self._parameters)
                raise CatalogueError(f"{where}: no quantity can supply the parameter {name} (nearest: {near})")
            place = self.place(name)
            quantity = place.quantity
            suppliable = not quantity.internal or quantity.default or place.quantity.name in self.ways
            if not (suppliable or place.name in self.ways):
                raise CatalogueError(f"{where}: nothing can supply {name}")

    def _verify_checks(self, where: str, checks: Iterable[Check]) -> None:
        for check in checks:
            self._verify_function(f"a check of {where}", check.function)

    def _verify_when(self, where: str, when: Mapping[str, tuple[str, ...]]) -> None:
        for name, options in when.items():
            choice = self.choices.get(name)
            if choice is None or set(options) - set(choice.options):
                raise CatalogueError(f"{where} is guarded by an unknown choice {name}: {options}")


CATALOGUE = Catalogue.build([*QUANTITIES, *TARGET, *DERIVED], CHOICES, WAYS, EFFECTS)
