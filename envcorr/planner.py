"""The planner: resolves each quantity, at a moment and in a world, to a node of the plan's list.

There are two worlds on one list: what is true (the draws) and what is known (what a correction would use: the true
value plus the error of a sensor where there is one, else the best estimate).
"""

from __future__ import annotations

from collections.abc import Mapping, Sequence
from typing import Any

from envcorr.catalogue import Catalogue, Place
from envcorr.effect import Check, Effect, Function, OnlyIf, Way, parameters
from envcorr.estimate import Estimate, Value
from envcorr.plan import Assumption, Leaf, Node, PlannedCheck, Pull
from envcorr.setup import Setup
from envcorr.vocabulary import PRESENT, Moment

__all__ = ["LacksError", "Planner"]


class LacksError(Exception):
    """Some quantities are lacking; ``near`` says that others of the same way are there."""

    def __init__(self, *names: str, near: bool = False) -> None:
        self.names = names
        self.near = near


def _add(value: Value, error: Value) -> Value:
    return value + error


def _add_slopes(value: Value, error: Value) -> tuple[float, float]:
    return 1.0, 1.0


class Planner:
    """Builds the node list of one plan; every quantity is resolved once a world."""

    def __init__(self, setup: Setup, catalogue: Catalogue, *, read: bool = False) -> None:
        self.setup = setup
        self.read = read
        self.catalogue = catalogue
        self.given = setup.estimates
        self.centres_given = {name: estimate.centre for name, estimate in setup.estimates.items()}
        self.nodes: list[Node] = []
        self.leaves: list[Leaf] = []
        self.keys: dict[Any, int] = {}
        self.memo: dict[tuple[str, bool], int | LacksError] = {}
        self.stack: list[str] = []
        self.ways_used: dict[str, list[tuple[Way, Place, int]]] = {}
        self.assumed: dict[str, Assumption] = {}
        self.decisions: dict[OnlyIf, bool] = {}

    # nodes -----------------------------------------------------------------------------------------------------

    def call(self, function: Function, inputs: tuple[int, ...], slopes: Function | None = None) -> int:
        """Return the node of a function of earlier nodes, made once."""
        key = (id(function), inputs)
        if key not in self.keys:
            centre = function(*[self.nodes[i].centre for i in inputs])
            self.keys[key] = self.append(Node(function, inputs, centre, slopes=slopes))
        return self.keys[key]

    def constant(self, value: Any) -> int:
        """Return a node that holds a value."""
        return self.append(Node(None, (), value))

    def leaf(self, place: Place, estimate: Estimate, origin: str) -> int:
        """Return the node of something drawn, made once."""
        key = ("leaf", place.name)
        if key not in self.keys:
            node = self.append(Node(None, (), estimate.centre, len(self.leaves)))
            self.leaves.append(Leaf(place, estimate, origin, node))
            self.keys[key] = node
        return self.keys[key]

    def append(self, node: Node) -> int:
        """Add a node and return its number."""
        self.nodes.append(node)
        return len(self.nodes) - 1

    # choices ---------------------------------------------------------------------------------------------------

    def word(self, name: str) -> str:
        """Return what was chosen; a default that counts is listed as assumed."""
        choice = self.catalogue.choices[name]
        if name not in self.setup.choices and choice.default:
            self.assumed.setdefault(name, Assumption(name, choice.label, choice.source, word=choice.default))
        return self.setup.choices.get(name, choice.default)

    def applies(self, when: Mapping[str, tuple[str, ...]] | None) -> bool:
        """Return whether the choices are among the words that a guard allows."""
        return all(self.word(name) in options for name, options in (when or {}).items())

    def allows(self, only_if: OnlyIf | None) -> bool:
        """Return whether the best estimates that were given satisfy a way or a check."""
        if only_if is None:
            return True
        if only_if not in self.decisions:
            self.decisions[only_if] = only_if(self.centres_given)
        return self.decisions[only_if]

    # quantities ------------------------------------------------------------------------------------------------

    def resolve(self, place: Place, *, known: bool = False) -> int:
        """Return the node of a quantity at a moment, as it is or as it is known; raises LacksError."""
        key = (place.name, known)
        if key not in self.memo:
            if place.name in self.stack:
                raise LacksError(place.name)
            self.stack.append(place.name)
            try:
                self.memo[key] = self._resolve(place, known)
            except LacksError as lack:
                if len(self.stack) == 1:  # deeper, a circle may be what is lacking
                    self.memo[key] = lack
                raise
            finally:
                self.stack.pop()
        found = self.memo[key]
        if isinstance(found, LacksError):
            raise found.with_traceback(None)  # else it would grow with every lookup
        return found

    def _resolve(self, place: Place, known: bool) -> int:
        if known:
            sensor = self._sensor(place)
            if sensor is not None:
                return self.call(_add, (self.resolve(place), sensor), _add_slopes)
        estimate = self.given.get(place.name)
        if estimate is not None:
            node = self._leaf(place, estimate, "given", known)
            sensor = self._sensor(place) if self.read and estimate.is_exact and not known else None
            return node if sensor is None else self.call(_add, (node, sensor), _add_slopes)
        if place.moment:
            return self._resolve_moment(place, known)
        return self._resolve_present(place, known)

    def _resolve_present(self, place: Place, known: bool) -> int:
        quantity = place.quantity
        lacking: list[LacksError] = []
        for way in self.catalogue.ways.get(quantity.name, ()):
            try:
                return self._by_way(way, place, known)
            except LacksError as lack:
                if lack.names:
                    lacking.append(lack)
        if quantity.default is not None:
            if not quantity.internal:
                self.assumed.setdefault(
                    quantity.name,
                    Assumption(
                        quantity.name,
                        quantity.label,
                        quantity.default.source,
                        quantity.default.estimate,
                        quantity.kind,
                    ),
                )
            return self._leaf(place, quantity.default.estimate, "internal" if quantity.internal else "assumed", known)
        if lacking and (quantity.internal or quantity.computed):
            best = min(lacking, key=lambda lack: (not lack.near, len(lack.names) if lack.near else 0))
            raise LacksError(*dict.fromkeys(best.names), near=best.near)
        raise LacksError(quantity.name)

    def _resolve_moment(self, place: Place, known: bool) -> int:
        quantity = place.quantity
        present = Place(PRESENT, quantity)
        together = place.moment == "adjusted" and self.word("adjusted.when") == "just before"
        if not together:
            for way in self.catalogue.ways.get(place.name, ()):
                try:
                    return self._by_way(way, present, known)
                except LacksError:
                    continue
            if place.moment == "tare" and quantity.varies == "each reading":
                estimate = self.given.get(quantity.name) or (quantity.default and quantity.default.estimate)
                if estimate:
                    return self._leaf(place, estimate, "internal" if quantity.internal else "given", known)
        if self._differs(quantity.name, place.moment, known, set()):
            for way in self.catalogue.ways.get(quantity.name, ()):
                try:
                    return self._by_way(way, place, known)
                except LacksError:
                    continue
        return self.resolve(present, known=known)

    def _differs(self, name: str, moment: str, known: bool, seen: set[str]) -> bool:
        """Return whether anything that the quantity follows from was said to be otherwise at the moment."""
        if name in seen:
            return False
        seen.add(name)
        if f"{moment}.{name}" in self.given or (known and f"{moment}.sensors.{name}" in self.given):
            return True
        together = moment == "adjusted" and self.word("adjusted.when") == "just before"
        if not together:
            for way in self.catalogue.ways.get(f"{moment}.{name}", ()):
                try:
                    self._by_way(way, Place(PRESENT, self.catalogue.quantities[name]), known)
                except LacksError:
                    continue
                return True
        quantity = self.catalogue.quantities[name]
        if moment == "tare" and quantity.varies == "each reading":
            return True
        if name in self.given:
            return False
        for way in self.catalogue.ways.get(name, ()):
            if not self.applies(way.when):
                continue
            for parameter in parameters(way.function):
                inner = self.catalogue.place(parameter)
                if inner.moment == PRESENT and self._differs(inner.quantity.name, moment, known, seen):
                    return True
        return False

    def _by_way(self, way: Way, place: Place, known: bool) -> int:
        if not self.allows(way.only_if) or not self.applies(way.when):
            raise LacksError()
        inputs = []
        lacks: list[str] = []
        for parameter in parameters(way.function):
            inner = self.catalogue.place(parameter)
            if place.moment and inner.moment == PRESENT:
                inner = Place(place.moment, inner.quantity)
            try:
                if parameter in way.at_best:
                    inputs.append(self.best(inner))
                else:
                    inputs.append(self.resolve(inner, known=known))
            except LacksError as lack:
                lacks.extend(lack.names)
        if lacks:
            raise LacksError(*lacks, near=bool(inputs))
        node = self.call(way.function, tuple(inputs), way.slopes)
        if not known:
            used = self.ways_used.setdefault(way.gives, [])
            if (way, place, node) not in used:
                used.append((way, place, node))
        return node

    def best(self, place: Place) -> int:
        """Return a constant node: the quantity at its best estimate."""
        key = ("best", place.name)
        if key not in self.keys:
            node = self.resolve(place)
            self.keys[key] = self.append(Node(None, (), self.nodes[node].centre, best_of=node))
        return self.keys[key]

    def _sensor(self, place: Place) -> int | None:
        """Return the leaf of the error of the sensor that reads this quantity at this moment, if there is one."""
        own = Place(place.moment, place.quantity, sensor=True)
        present = Place(PRESENT, place.quantity, sensor=True)
        if own.name in self.given:
            return self.leaf(own, self.given[own.name], "given")
        if present.name not in self.given:
            return None
        # the air at the adjustment was read only if it is the air of the weighing
        if place.moment == "adjusted" and self.resolve(place) != self.resolve(Place(PRESENT, place.quantity)):
            return None
        return self.leaf(present, self.given[present.name], "given")

    def _leaf(self, place: Place, estimate: Estimate, origin: str, known: bool) -> int:
        node = self.leaf(place, estimate, origin)
        if not known or place.quantity.name == "load.mass":  # the reading itself tells the mass
            return node
        return self.best(place)

    # effects ---------------------------------------------------------------------------------------------------

    def function(self, function: Function, moment: str = PRESENT, *, known: bool = False) -> int:
        """Return the node of an effect's function, its present quantities taken at the moment."""
        inputs = []
        for parameter in parameters(function):
            place = self.catalogue.place(parameter)
            if moment == "tare" and place.moment == PRESENT:
                place = Place("tare", place.quantity)
            inputs.append(self.resolve(place, known=known))
        return self.call(function, tuple(inputs))

    def pull(self, effect: Effect, *, known: bool = False) -> Pull:
        """Return the nodes of an effect's functions, in one world; raises LacksError."""
        return Pull(
            self.function(effect.load, known=known) if effect.load else None,
            self.function(effect.gain, known=known) if effect.gain else None,
            self.function(effect.gain, "tare", known=known) if effect.gain else None,
        )

    def lacks(self, effect: Effect) -> tuple[str, ...]:
        """Return everything that the effect lacks, each named once."""
        names: dict[str, None] = {}
        for function in filter(None, (effect.load, effect.gain)):
            for parameter in parameters(function):
                try:
                    self.resolve(self.catalogue.place(parameter))
                except LacksError as lack:
                    names.update(dict.fromkeys(lack.names))
        return tuple(names)

    def _ways_under(self, node_roots: Sequence[int]) -> list[tuple[Way, Place]]:
        """Return the ways on which the nodes rest, with the places that they gave."""
        functions: set[int] = set()
        pending = list(node_roots)
        seen: set[int] = set()
        while pending:
            i = pending.pop()
            if i in seen:
                continue
            seen.add(i)
            node = self.nodes[i]
            if node.function is not None:
                functions.add(id(node.function))
            pending.extend(node.inputs)
        used = [(way, place) for found in self.ways_used.values() for way, place, _ in found]
        return [(way, place) for way, place in used if id(way.function) in functions]

    def rests_on_band(self, node_roots: Sequence[int]) -> bool:
        """Return whether something on which the nodes rest is known as a band only."""
        return any(way.band for way, _ in self._ways_under(node_roots))

    def ways_of(self, node_roots: Sequence[int]) -> tuple[str, ...]:
        """Return the labels of the ways on which the nodes rest."""
        labels: dict[str, None] = {}
        for way, place in self._ways_under(node_roots):
            quantity = self.catalogue.find(way.gives)
            name = quantity.label if quantity else way.gives
            if place.moment and quantity:
                name = Place(place.moment, quantity.quantity).label
            labels[f"{name}: {way.label}"] = None
        return tuple(labels)

    def way_checks(self) -> list[PlannedCheck]:
        """Return the checks of every way that was taken, at the moments at which it was taken."""
        used = [pair for pairs in self.ways_used.values() for pair in pairs]
        found = [self.check(check, way.gives, at.moment) for way, at, _ in used for check in way.checks]
        return [planned for planned in found if planned]

    def inputs(self, function: Function, moment: Moment = PRESENT) -> tuple[int, ...] | None:
        """Return the nodes of a function's parameters, or None where one is lacking; nothing is assumed for it."""
        before = dict(self.assumed)
        found = []
        for name in parameters(function):
            place = self.catalogue.place(name)
            if moment and place.moment == PRESENT:
                place = Place(moment, place.quantity)
            try:
                found.append(self.resolve(place))
            except LacksError:
                self.assumed = before
                return None
        return tuple(found)

    def optional(self, name: str) -> int | None:
        """Return the node of a quantity, or None where it is lacking; nothing is assumed for it."""
        before = dict(self.assumed)
        try:
            return self.resolve(Place(PRESENT, self.catalogue.quantities[name]))
        except LacksError:
            self.assumed = before
            return None

    def check(self, check: Check, where: str, moment: Moment = PRESENT) -> PlannedCheck | None:
        """Return the check with the nodes of its parameters, or None where one is lacking."""
        if not self.allows(check.only_if) or check.unless_chosen in self.setup.choices:
            return None
        inputs = self.inputs(check.function, moment)
        if inputs is None:
            return None
        names = parameters(check.function)
        kinds = tuple(self.catalogue.place(name).quantity.kind for name in names)
        return PlannedCheck(check, where, names, inputs, kinds)
