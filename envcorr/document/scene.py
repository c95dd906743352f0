"""What a set-up is about, in a heading and a sentence."""

from __future__ import annotations

from envcorr import units
from envcorr.document.blocks import Block, Heading, Text
from envcorr.document.wording import mass
from envcorr.plan import Plan

__all__ = ["scene"]


def scene(plan: Plan, resolution: float, untitled: str) -> list[Block]:
    """Return title, load, air and target (resolution in kg) of a set-up; ``untitled`` where it has no title."""
    given = plan.setup.estimates
    named = plan.catalogue.quantities

    def said(*names: str) -> str:
        found = (name for name in names if name in given)
        return ", ".join(units.show(float(given[n].centre), named[n].kind, 6) for n in found)

    air = said("air.temperature", "air.pressure", "air.humidity", "air.density")
    parts = [f"Load {said('load.mass', 'load.density', 'load.volume')}"]
    if container := said("container.mass"):
        parts.append(f"container {container}")
    if air:
        parts.append(f"air {air}")
    if (repeats := said("cycle.repeats")) not in ("", "1"):
        parts.append(f"the result is the mean of {repeats} weighings")
    measurand = plan.setup.choices.get("target.measurand", "mass")
    meaning = plan.catalogue.choices["target.measurand"].options[measurand]
    return [
        Heading(plan.setup.title or untitled, level=1),
        Text(f"{'; '.join(parts)}. Target: {mass(resolution)} in {meaning}."),
    ]
