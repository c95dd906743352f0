"""From a Setup to a Plan: which quantity comes from where, what is lacking, assumed or unused.

The plan is a list of nodes, each made once however many effects ask for it: a *leaf* (something given or assumed, with
its distribution), a constant, or a call of a law. The same law with the same inputs is the same node, so that the
air at the tare reading *is* the air at the loaded reading where nothing differs, and its error cancels exactly.
"""

from __future__ import annotations

from collections.abc import Callable, Sequence

from envcorr.catalogue import CATALOGUE, Catalogue
from envcorr.effect import Effect
from envcorr.errors import Fault, InputError
from envcorr.estimate import Value
from envcorr.plan import NotAssessed, Plan, PlannedCheck, PlannedEffect
from envcorr.planner import LacksError, Planner
from envcorr.setup import Setup

__all__ = ["make_plan", "plan_quantities"]


def _difference(first: Value, second: Value) -> Value:
    return first - second


def plan_quantities(setup: Setup, names: Sequence[str], *, catalogue: Catalogue = CATALOGUE) -> Plan:
    """Work out how to compute some quantities (dotted names) alone, without any effect; they become ``targets``.

    Raises :class:`InputError` naming what is lacking.
    """
    planner = Planner(setup, catalogue)
    targets: dict[str, int] = {}
    faults = []
    for name in names:
        place = catalogue.find(name)
        if place is None:
            raise KeyError(name)
        try:
            targets[name] = planner.resolve(place)
        except LacksError as lack:
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
    planner = Planner(setup, catalogue, read=read)
    place = catalogue.place
    try:
        mass = planner.resolve(place("load_mass"))
    except LacksError:
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
            except LacksError as lack:
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
        except LacksError:
            targets[f"{head}tare"] = planner.constant(0.0)
    for name in ("load.volume", "load.conventional_mass", "air.density") if read else ():
        node = planner.optional(name)
        if node is not None:
            targets[name] = node
    demanded = ("resolution", "within", "probability", "relative_accuracy")
    for name in () if read else (f"target.{word}" for word in demanded):
        try:
            targets[name] = planner.resolve(catalogue.place(name.replace(".", "_")))
        except LacksError:
            continue
    effects: list[PlannedEffect] = []
    missing: list[NotAssessed] = []
    checks: list[PlannedCheck] = []
    for effect in catalogue.effects.values():
        if (only and not only(effect)) or not planner.applies(effect.when) or _is_replaced(effect, planner):
            continue
        try:
            true = planner.pull(effect)
            roots = [i for i in (true.load, true.gain, true.gain_at_tare) if i is not None]
            correctable = effect.correctable and not planner.rests_on_band(roots)
            known = planner.pull(effect, known=True) if correctable else None
        except LacksError:
            missing.append(NotAssessed(effect, planner.lacks(effect)))
            continue
        answers = [(answer, planner.inputs(answer.function)) for answer in effect.answers]
        found = tuple((answer, inputs) for answer, inputs in answers if inputs is not None)
        dof = planner.inputs(effect.dof) if effect.dof else None
        effects.append(PlannedEffect(effect, true, known, planner.ways_of(roots), found, dof))
        for check in effect.checks:
            planned = planner.check(check, effect.name)
            if planned:
                checks.append(planned)
    return _finish(planner, targets, effects, missing, checks + planner.way_checks())


def _words_that_matter(planner: Planner, needed: set[int], effects: Sequence[PlannedEffect]) -> set[str]:
    """Return the choices on which what will be computed depends."""
    taken = [way.when for used in planner.ways_used.values() for way, _, node in used if node in needed]
    missing = {n.name for n in planner.catalogue.effects.values()} - {e.effect.name for e in effects}
    ruled = [e.effect.when for e in effects]
    ruled += [e.when for e in planner.catalogue.effects.values() if e.name in missing and not planner.applies(e.when)]
    names = {"target.measurand", "adjusted.when", *(e.needed for e in planner.catalogue.effects.values())}
    return names.union(*(when or {} for when in (*taken, *ruled)))


def _is_replaced(effect: Effect, planner: Planner) -> bool:
    """Return whether a measurement stands in the place of an effect's model."""
    measured = bool(effect.replaced_by) and all(name in planner.given for name in effect.replaced_by)
    return measured and planner.applies(effect.replaced_when)


def _told_only(planner: Planner) -> set[str]:
    """Return the choices on which nothing depends: what they have to say is said."""
    effects = planner.catalogue.effects.values()
    depended = {name for several in planner.catalogue.ways.values() for way in several for name in way.when or {}}
    depended |= {name for e in effects for name in (e.needed, *(e.when or {}), *(e.replaced_when or {}))}
    return {name for name, choice in planner.catalogue.choices.items() if choice.notes and name not in depended}


def _finish(
    planner: Planner,
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
    guards = {name for e in planner.catalogue.effects.values() for name in (*(e.when or {}), *(e.replaced_when or {}))}
    unused += [name for name in setup.choices if name not in words | guards | _told_only(planner)]
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
        read=planner.read,
        decisions=tuple(planner.decisions.items()),
        _order=tuple(order),
        _reach=tuple(frozenset(r) for r in reach),
    )
