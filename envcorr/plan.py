"""The Plan: what will be computed for one set-up, as a list of nodes, and how to run it on arrays."""

from __future__ import annotations

from collections.abc import Collection, Mapping, Sequence
from dataclasses import dataclass, field, replace
from functools import cached_property
from typing import Any

from envcorr.catalogue import Catalogue, Place
from envcorr.effect import Answer, Check, Effect, Function, OnlyIf
from envcorr.estimate import Estimate, Value
from envcorr.setup import Setup
from envcorr.vocabulary import Varies

__all__ = [
    "NOTHING",
    "Assumption",
    "Leaf",
    "Node",
    "NotAssessed",
    "Parts",
    "Plan",
    "PlannedCheck",
    "PlannedEffect",
    "Pull",
    "is_zero",
]


@dataclass(frozen=True, slots=True)
class Leaf:
    """A quantity that is drawn: its place, its distribution, and whether it was given, assumed or is internal."""

    place: Place
    estimate: Estimate
    origin: str
    node: int

    @property
    def name(self) -> str:
        """The dotted name."""
        return self.place.name

    def taken_from(self, given: Mapping[str, Estimate]) -> Estimate:
        """Return the estimate that some given ones have for it: its own, that of its quantity, or as it was."""
        if self.origin != "given":
            return self.estimate
        return given.get(self.name) or given.get(self.place.quantity.name) or self.estimate

    @property
    def varies(self) -> Varies:
        """Whether a repeat draws it anew; the error of a sensor stays."""
        return "never" if self.place.sensor else self.place.quantity.varies


@dataclass(frozen=True, slots=True)
class Node:
    """A call of ``function`` on earlier nodes, a leaf, or a constant; ``centre`` is its value at the best estimates.

    ``slopes`` returns the partial derivatives of the function in its inputs, where it has them; ``best_of`` is the node
    whose best estimate a constant holds.
    """

    function: Function | None
    inputs: tuple[int, ...]
    centre: Any
    leaf: int = -1
    slopes: Function | None = None
    best_of: int = -1


@dataclass(frozen=True, slots=True)
class Assumption:
    """Something that was taken because nothing was said."""

    name: str
    label: str
    source: str
    estimate: Estimate | None = None
    kind: str = ""
    word: str = ""


@dataclass(frozen=True, slots=True)
class NotAssessed:
    """An effect that could not be computed, and what would let it be."""

    effect: Effect
    lacks: tuple[str, ...]


@dataclass(frozen=True, slots=True)
class Pull:
    """The nodes of one effect in one world; None where it does not act there."""

    load: int | None
    gain: int | None
    gain_at_tare: int | None


NOTHING = Pull(None, None, None)


@dataclass(frozen=True, slots=True)
class PlannedEffect:
    """An effect with its nodes, true and (where it can be corrected for) known, and the ways its inputs took."""

    effect: Effect
    true: Pull
    known: Pull | None
    ways: tuple[str, ...]
    answers: tuple[tuple[Answer, tuple[int, ...]], ...] = ()
    dof: tuple[int, ...] | None = None

    @property
    def correctable(self) -> bool:
        """Whether a correction takes it out."""
        return self.known is not None


@dataclass(frozen=True, slots=True)
class PlannedCheck:
    """A check with the nodes of its parameters."""

    check: Check
    where: str
    names: tuple[str, ...]
    inputs: tuple[int, ...]
    kinds: tuple[str, ...]


def is_zero(value: Value) -> bool:
    """Return whether a value is exactly nothing, for all rows or draws at once."""
    return isinstance(value, float) and value == 0.0


def _sum(values: Sequence[Value]) -> Value:
    """Return the sum; what is exactly nothing costs nothing."""
    total: Value = 0.0
    for value in values:
        if not is_zero(value):
            total = value if is_zero(total) else total + value
    return total


@dataclass(frozen=True, slots=True)
class Parts:
    """What the effects contribute, side by side: loads [kg], gains and their change since the tare (numbers)."""

    mass: Value
    definition: Value
    tare_load: Value
    loads: tuple[Value, ...]
    gains: tuple[Value, ...]
    gain_changes: tuple[Value, ...]

    def effect(self, index: int, *, defines: bool = False) -> Value:
        """Return what the effect alone adds to the net reading [kg]."""
        load, gain, change = self.loads[index], self.gains[index], self.gain_changes[index]
        error = load if is_zero(gain) else load + gain * (self.mass + load)
        return _sum([error, 0.0 if is_zero(change) else change * self.tare_load, self.definition * defines])

    def total(self, chosen: Sequence[int]) -> Value:
        """Return what the chosen effects together add to the net reading [kg], over the measurand.

        (1 + sum of gains) (m + sum of loads) - m, written without the cancellation; a gain that changed since the
        tare reading acts on the container too.
        """
        load = _sum([self.loads[i] for i in chosen])
        gain = _sum([self.gains[i] for i in chosen])
        change = _sum([self.gain_changes[i] for i in chosen])
        error = load if is_zero(gain) else load + gain * (self.mass + load)
        return _sum([error, 0.0 if is_zero(change) else change * self.tare_load, self.definition])


@dataclass(frozen=True)
class Plan:
    """What will be computed for one set-up, in order. Made by :func:`make_plan`."""

    setup: Setup
    catalogue: Catalogue
    nodes: tuple[Node, ...]
    leaves: tuple[Leaf, ...]
    effects: tuple[PlannedEffect, ...]
    not_assessed: tuple[NotAssessed, ...]
    assumed: tuple[Assumption, ...]
    unused: tuple[str, ...]
    checks: tuple[PlannedCheck, ...]
    targets: Mapping[str, int]
    read: bool
    decisions: tuple[tuple[OnlyIf, bool], ...]
    _order: tuple[int, ...] = field(repr=False)
    _reach: tuple[frozenset[int], ...] = field(repr=False)

    def evaluate(
        self, leaf_values: Sequence[Value], *, base: Sequence[Any] | None = None, changed: int | None = None
    ) -> list[Any]:
        """Return the value of every node for the given values of the leaves (floats or broadcasting arrays).

        With ``base`` (an earlier result) and ``changed`` (a leaf), only what that leaf reaches is run again.
        """
        values: list[Any] = [None] * len(self.nodes) if base is None else list(base)
        order: Sequence[int] = self._order
        if base is not None and changed is not None:
            order = sorted(self._reach[changed])
        for i in order:
            node = self.nodes[i]
            if node.leaf >= 0:
                values[i] = leaf_values[node.leaf]
            elif node.function is None:
                values[i] = node.centre
            else:
                values[i] = node.function(*[values[j] for j in node.inputs])
        return values

    def evaluate_moved(self, leaf_values: Sequence[Value], *, base: Sequence[Any], moved: Collection[int]) -> list[Any]:
        """Return the value of every node where some leaves are not as in ``base`` (an earlier result).

        Best estimates that differ from those of ``base`` count too, see :meth:`renewed`; only what rests on either is
        run again.
        """
        values = list(base)
        stale: set[int] = set()
        for i in self._order:
            node = self.nodes[i]
            if node.leaf >= 0:
                if node.leaf not in moved:
                    continue
                values[i] = leaf_values[node.leaf]
            elif node.function is None:
                if node.best_of < 0 or values[i] == node.centre:
                    continue
                values[i] = node.centre
            elif stale.isdisjoint(node.inputs):
                continue
            else:
                values[i] = node.function(*[values[j] for j in node.inputs])
            stale.add(i)
        return values

    def renewed(self, setup: Setup) -> Plan | None:
        """Return the same plan for a set-up that gives the same entries with other numbers, without planning anew.

        None where it would be planned otherwise.
        """
        before, now = self.setup, setup.estimates
        if setup.choices != before.choices or now.keys() != before.estimates.keys():
            return None
        if self.read and any(now[name].is_exact != known.is_exact for name, known in before.estimates.items()):
            return None
        centres = {name: estimate.centre for name, estimate in now.items()}
        if any(only_if(centres) != answer for only_if, answer in self.decisions):
            return None
        leaves = tuple(replace(leaf, estimate=leaf.taken_from(now)) for leaf in self.leaves)
        nodes: list[Node] = []
        counted = self._counted
        for i, node in enumerate(self.nodes):
            if i not in counted:
                nodes.append(node)
                continue
            if node.leaf >= 0:
                centre = leaves[node.leaf].estimate.centre
            elif node.best_of >= 0:
                centre = nodes[node.best_of].centre
            elif node.function is None:
                centre = node.centre
            else:
                centre = node.function(*[nodes[j].centre for j in node.inputs])
            nodes.append(Node(node.function, node.inputs, centre, node.leaf, node.slopes, node.best_of))
        return replace(self, setup=setup, nodes=tuple(nodes), leaves=leaves)

    @cached_property
    def _counted(self) -> frozenset[int]:
        """The nodes that are run, and those whose best estimates they hold."""
        found: set[int] = set()
        pending = list(self._order)
        while pending:
            i = pending.pop()
            if i not in found:
                found.add(i)
                pending.extend(self.nodes[i].inputs)
                if self.nodes[i].best_of >= 0:
                    pending.append(self.nodes[i].best_of)
        return frozenset(found)

    @cached_property
    def per_correction(self) -> float:
        """How much of an error is left in the mass when the correction is solved for the mass itself: 1/(1 + dS/dm).

        A correction in proportion to the mass is computed with the mass that it gives; at the best estimates. It is 1
        but for light samples: 1.036 at 32 kg/m³.
        """
        row = next((j for j, leaf in enumerate(self.leaves) if leaf.name == "load.mass"), None)
        if row is None or not self.nodes[self.targets["mass"]].centre:
            return 1.0
        every = range(len(self.effects))
        step = 1e-3  # the correction is all but linear in the mass, so the size does not matter
        values = [leaf.estimate.centre for leaf in self.leaves]
        before = self.centres()
        values[row] = values[row] * (1 + step)
        after = self.evaluate(values, base=before, changed=row)
        change = self.parts(after, known=True).total(every) - self.parts(before, known=True).total(every)
        return 1 / (1 + float(change) / (step * float(self.leaves[row].estimate.centre)))

    def centres(self) -> list[Any]:
        """Return the value of every node at the best estimates."""
        return [node.centre for node in self.nodes]

    def reach(self, leaf: int) -> frozenset[int]:
        """Return the nodes that rest on the leaf."""
        return self._reach[leaf]

    def reaches(self, leaf: int, effect: PlannedEffect) -> bool:
        """Return whether the leaf enters the effect, as truth or as knowledge."""
        reach = self._reach[leaf]
        pulls = [effect.true] + ([effect.known] if effect.known else [])
        return any(node in reach for p in pulls for node in (p.load, p.gain, p.gain_at_tare) if node is not None)

    def parts(self, values: Sequence[Any], *, known: bool = False) -> Parts:
        """Collect the effects' contributions from the nodes' values, as they are or as they are known."""

        def value(node: int | None) -> Value:
            found: Value = 0.0 if node is None else values[node]
            return found

        pulls = [(e.known or NOTHING) if known else e.true for e in self.effects]
        return Parts(
            mass=value(self.targets["mass"]),
            definition=value(self.targets["known definition" if known else "definition"]),
            tare_load=value(self.targets["known tare" if known else "tare"]),
            loads=tuple(value(p.load) for p in pulls),
            gains=tuple(value(p.gain) for p in pulls),
            gain_changes=tuple(
                0.0 if p.gain == p.gain_at_tare else value(p.gain) - value(p.gain_at_tare) for p in pulls
            ),
        )
