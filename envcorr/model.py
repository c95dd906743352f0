"""From a Setup to a Plan: which quantity comes from where, what is lacking, assumed or unused.

The plan is a list of nodes, each made once however many effects ask for it: a *leaf* (something given or assumed, with
its distribution), a constant, or a call of a law. The same law with the same inputs is the same node, so that the
air at the tare reading *is* the air at the loaded reading where nothing differs, and its error cancels exactly.

There are two worlds on one list: what is true (the draws) and what is known (what a correction would use: the true
value plus the error of a sensor where there is one, else the best estimate).
"""

from __future__ import annotations

from collections.abc import Callable, Mapping, Sequence
from typing import Any

from envcorr.catalogue import CATALOGUE, Catalogue, Place
from envcorr.effect import Check, Effect, Function, Way, parameters
from envcorr.errors import Fault, InputError
from envcorr.estimate import Estimate, Value
from envcorr.plan import Assumption, Leaf, Node, NotAssessed, Plan, PlannedCheck, PlannedEffect, Pull
from envcorr.setup import Setup
from envcorr.vocabulary import PRESENT, Moment

__all__ = ["make_plan", "plan_quantities"]


class _LacksError(Exception):
    """Some quantities are lacking; ``near`` says that others of the same way are there."""

    def __init__(self, *names: str, near: bool = False) -> None:
        self.names = names
        self.near = near


def _add(value: Value, error: Value) -> Value:
    return value + error


def _difference(first: Value, second: Value) -> Value:
    return first - second


class _Planner:
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
        self.memo: dict[tuple[str, bool], int | _LacksError] = {}
        self.stack: list[str] = []
        self.ways_used: dict[str, list[tuple[Way, Place, int]]] = {}
        self.assumed: dict[str, Assumption] = {}

    # nodes -----------------------------------------------------------------------------------------------------

    def call(self, function: Function, inputs: tuple[int, ...]) -> int:
        key = (id(function), inputs)
        if key not in self.keys:
            centre = function(*[self.nodes[i].centre for i in inputs])
            self.keys[key] = self.append(Node(function, inputs, centre))
        return self.keys[key]

    def constant(self, value: Any) -> int:
        return self.append(Node(None, (), value))

    def leaf(self, place: Place, estimate: Estimate, origin: str) -> int:
        key = ("leaf", place.name)
        if key not in self.keys:
            node = self.append(Node(None, (), estimate.centre, len(self.leaves)))
            self.leaves.append(Leaf(place, estimate, origin, node))
            self.keys[key] = node
        return self.keys[key]

    def append(self, node: Node) -> int:
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
        return all(self.word(name) in options for name, options in (when or {}).items())

    # quantities ------------------------------------------------------------------------------------------------

    def resolve(self, place: Place, *, known: bool = False) -> int:
        """Return the node of a quantity at a moment, as it is or as it is known; raises _LacksError."""
        key = (place.name, known)
        if key not in self.memo:
            if place.name in self.stack:
                raise _LacksError(place.name)
            self.stack.append(place.name)
            try:
                self.memo[key] = self._resolve(place, known)
            except _LacksError as lack:
                if len(self.stack) == 1:  # deeper, a circle may be what is lacking
                    self.memo[key] = lack
                raise
            finally:
                self.stack.pop()
        found = self.memo[key]
        if isinstance(found, _LacksError):
            raise found
        return found

    def _resolve(self, place: Place, known: bool) -> int:
        if known:
            sensor = self._sensor(place)
            if sensor is not None:
                return self.call(_add, (self.resolve(place), sensor))
        estimate = self.given.get(place.name)
        if estimate is not None:
            node = self._leaf(place, estimate, "given", known)
            sensor = self._sensor(place) if self.read and estimate.is_exact and not known else None
            return node if sensor is None else self.call(_add, (node, sensor))
        if place.moment:
            return self._resolve_moment(place, known)
        return self._resolve_present(place, known)

    def _resolve_present(self, place: Place, known: bool) -> int:
        quantity = place.quantity
        lacking: list[_LacksError] = []
        for way in self.catalogue.ways.get(quantity.name, ()):
            try:
                return self._by_way(way, place, known)
            except _LacksError as lack:
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
            raise _LacksError(*dict.fromkeys(best.names), near=best.near)
        raise _LacksError(quantity.name)

    def _resolve_moment(self, place: Place, known: bool) -> int:
        quantity = place.quantity
        present = Place(PRESENT, quantity)
        together = place.moment == "adjusted" and self.word("adjusted.when") == "just before"
        if not together:
            for way in self.catalogue.ways.get(place.name, ()):
                try:
                    return self._by_way(way, present, known)
                except _LacksError:
                    continue
            if place.moment == "tare" and quantity.varies == "each reading":
                estimate = self.given.get(quantity.name) or (quantity.default and quantity.default.estimate)
                if estimate:
                    return self._leaf(place, estimate, "internal" if quantity.internal else "given", known)
        if self._differs(quantity.name, place.moment, known, set()):
            for way in self.catalogue.ways.get(quantity.name, ()):
                try:
                    return self._by_way(way, place, known)
                except _LacksError:
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
                except _LacksError:
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
        if (way.only_if and not way.only_if(self.centres_given)) or not self.applies(way.when):
            raise _LacksError()
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
            except _LacksError as lack:
                lacks.extend(lack.names)
        if lacks:
            raise _LacksError(*lacks, near=bool(inputs))
        node = self.call(way.function, tuple(inputs))
        if not known:
            used = self.ways_used.setdefault(way.gives, [])
            if (way, place, node) not in used:
                used.append((way, place, node))
        return node

    def best(self, place: Place) -> int:
        """Return a constant node: the quantity at its best estimate."""
        key = ("best", place.name)
        if key not in self.keys:
            self.keys[key] = self.constant(self.nodes[self.resolve(place)].centre)
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
                except _LacksError as lack:
                    names.update(dict.fromkeys(lack.names))
        return tuple(names)

    def ways_of(self, node_roots: Sequence[int]) -> tuple[str, ...]:
        """Return the labels of the ways on which the nodes rest."""
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
        labels: dict[str, None] = {}
        for used in self.ways_used.values():
            for way, place, _ in used:
                if id(way.function) in functions:
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
            except _LacksError:
                self.assumed = before
                return None
        return tuple(found)

    def optional(self, name: str) -> int | None:
        """Return the node of a quantity, or None where it is lacking; nothing is assumed for it."""
        before = dict(self.assumed)
        try:
            return self.resolve(Place(PRESENT, self.catalogue.quantities[name]))
        except _LacksError:
            self.assumed = before
            return None

    def check(self, check: Check, where: str, moment: Moment = PRESENT) -> PlannedCheck | None:
        if check.only_if and not check.only_if(self.centres_given):
            return None
        inputs = self.inputs(check.function, moment)
        if inputs is None:
            return None
        names = parameters(check.function)
        kinds = tuple(self.catalogue.place(name).quantity.kind for name in names)
        return PlannedCheck(check, where, names, inputs, kinds)


def plan_quantities(setup: Setup, names: Sequence[str], *, catalogue: Catalogue = CATALOGUE) -> Plan:
    """Work out how to compute some quantities (dotted names) alone, without any effect; they become ``targets``.

    Raises :class:`InputError` naming what is lacking.
    """
    planner = _Planner(setup, catalogue)
    targets: dict[str, int] = {}
    faults = []
    for name in names:
        place = catalogue.find(name)
        if place is None:
            raise KeyError(name)
        try:
            targets[name] = planner.resolve(place)
        except _LacksError as lack:
            wanted = " and ".join(lack.names)
            faults.append(Fault(name, f"cannot be computed: lacks {wanted}.", f"Give {wanted}."))
    if faults:
        raise InputError(faults)
    return _finish(planner, targets, [], [], planner.way_checks())


def make_plan(
    setup: Setup,
    *,
    catalogue: Catalogue = CATALOGUE,
    only: Callable[[Effect], bool] | None = None,
    read: bool = False,
) -> Plan:
    """Work out what can be computed for the set-up, and from what.

    ``only`` restricts the effects. With ``read``, a value that was given bare is what the sensor read: it is uncertain
    by the sensor's error, where one is stated; and volume, conventional mass and air density become targets too.
    Raises :class:`InputError` where there is no mass, or a measurand lacks what defines it.
    """
    planner = _Planner(setup, catalogue, read=read)
    place = catalogue.place
    try:
        mass = planner.resolve(place("load_mass"))
    except _LacksError:
        fault = Fault("load.mass", "is not given.", 'Write, for example, [load] mass = "5 g".')
        raise InputError([fault]) from None
    targets: dict[str, int] = {"mass": mass}
    measurand = planner.word("target.measurand")
    for world in (False, True):
        head = "known " if world else ""
        targets[f"{head}definition"] = planner.constant(0.0)
        if measurand == "conventional mass":
            try:
                conventional = planner.resolve(place("load_conventional_mass"), known=world)
            except _LacksError as lack:
                names = " and ".join(lack.names)
                fault = Fault(
                    "target.measurand",
                    f'"conventional mass" cannot be told without {names}.',
                    f"Give {names}.",
                )
                raise InputError([fault]) from None
            targets[f"{head}definition"] = planner.call(_difference, (mass, conventional))
        try:
            targets[f"{head}tare"] = planner.resolve(place("container_mass"), known=world)
        except _LacksError:
            targets[f"{head}tare"] = planner.constant(0.0)
    for name in ("load.volume", "load.conventional_mass", "air.density") if read else ():
        node = planner.optional(name)
        if node is not None:
            targets[name] = node
    demanded = ("resolution", "within", "probability", "relative_accuracy")
    for name in () if read else (f"target.{word}" for word in demanded):
        try:
            targets[name] = planner.resolve(catalogue.place(name.replace(".", "_")))
        except _LacksError:
            continue
    effects: list[PlannedEffect] = []
    missing: list[NotAssessed] = []
    checks: list[PlannedCheck] = []
    for effect in catalogue.effects.values():
        if (only and not only(effect)) or not planner.applies(effect.when):
            continue
        try:
            true = planner.pull(effect)
            known = planner.pull(effect, known=True) if effect.correctable else None
        except _LacksError:
            missing.append(NotAssessed(effect, planner.lacks(effect)))
            continue
        roots = [i for i in (true.load, true.gain, true.gain_at_tare) if i is not None]
        answers = [(answer, planner.inputs(answer.function)) for answer in effect.answers]
        found = tuple((answer, inputs) for answer, inputs in answers if inputs is not None)
        dof = planner.inputs(effect.dof) if effect.dof else None
        effects.append(PlannedEffect(effect, true, known, planner.ways_of(roots), found, dof))
        for check in effect.checks:
            planned = planner.check(check, effect.name)
            if planned:
                checks.append(planned)
    return _finish(planner, targets, effects, missing, checks + planner.way_checks())


def _words_that_matter(planner: _Planner, needed: set[int], effects: Sequence[PlannedEffect]) -> set[str]:
    """Return the choices on which what will be computed depends."""
    taken = [way.when for used in planner.ways_used.values() for way, _, node in used if node in needed]
    missing = {n.name for n in planner.catalogue.effects.values()} - {e.effect.name for e in effects}
    ruled = [e.effect.when for e in effects]
    ruled += [e.when for e in planner.catalogue.effects.values() if e.name in missing and not planner.applies(e.when)]
    names = {"target.measurand", "adjusted.when", *(e.needed for e in planner.catalogue.effects.values())}
    return names.union(*(when or {} for when in (*taken, *ruled)))


def _finish(
    planner: _Planner,
    targets: dict[str, int],
    effects: list[PlannedEffect],
    missing: list[NotAssessed],
    checks: list[PlannedCheck],
) -> Plan:
    outputs = set(targets.values())
    for effect in effects:
        for pull in (effect.true, effect.known):
            if pull:
                outputs.update(i for i in (pull.load, pull.gain, pull.gain_at_tare) if i is not None)
    for check in checks:
        outputs.update(check.inputs)
    needed: set[int] = set()
    reach: list[set[int]] = [set() for _ in planner.leaves]
    pending = list(outputs)
    while pending:
        i = pending.pop()
        if i not in needed:
            needed.add(i)
            pending.extend(planner.nodes[i].inputs)
    order = sorted(needed)
    below: dict[int, set[int]] = {}  # node -> leaves that it rests on
    for i in order:
        node = planner.nodes[i]
        rests = {node.leaf} if node.leaf >= 0 else set().union(*(below[j] for j in node.inputs))
        below[i] = rests
        for leaf in rests:
            reach[leaf].add(i)
    setup = planner.setup
    used = {leaf.name for leaf, nodes in zip(planner.leaves, reach, strict=True) if nodes}
    words = _words_that_matter(planner, needed, effects)
    unused = [name for name in setup.estimates if name not in used]
    guards = {name for effect in planner.catalogue.effects.values() for name in effect.when or {}}
    unused += [name for name in setup.choices if name not in words | guards]
    assumed = [a for a in planner.assumed.values() if a.name in (words if a.word else used)]
    return Plan(
        setup=setup,
        catalogue=planner.catalogue,
        nodes=tuple(planner.nodes),
        leaves=tuple(planner.leaves),
        effects=tuple(effects),
        not_assessed=tuple(missing),
        assumed=tuple(assumed),
        unused=tuple(unused),
        checks=tuple(checks),
        targets=targets,
        _order=tuple(order),
        _reach=tuple(frozenset(r) for r in reach),
    )
