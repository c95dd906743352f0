"""The materials that can be named instead of a density, in words."""

from __future__ import annotations

from envcorr import materials
from envcorr.document.blocks import Block, Heading, Item, Listing, Text

__all__ = ["document"]


def document() -> list[Block]:
    """Return the page that lists every material with its density at 20 °C, its u and its source."""
    items = []
    for name in materials.names():
        material = materials.find(name)
        found, slope = materials.density(material), materials.expansion(material)
        expansion = "" if slope is None else f", expansion {1e6 * slope:.0f} ppm/K"
        items.append(Item(name, f"{found.centre:.1f} kg/m³, u {found.u:.3g} kg/m³{expansion}. {material.source}"))
    return [
        Heading("Materials by name", level=1),
        Text('Write load.material = "polypropylene" (or container.material) instead of a density. At 20 °C:'),
        Listing(tuple(items)),
        Text("A measured density of the sample at hand beats every entry.", quiet=True),
    ]
