"""The film of water that every surface holds, thicker in moister air."""

from __future__ import annotations

from envcorr.effect import Check, Effect, Way
from envcorr.estimate import Estimate, Value
from envcorr.laws import moisture
from envcorr.vocabulary import Assumed, Choice, Quantity

__all__ = ["EFFECT", "load"]

# kg/m² over the whole range of humidity: the least and the most that a smooth, clean surface takes
_STEEL_SOURCE = (
    "order of magnitude for polished mass standards: Kochsiek, Metrologia 18 (1982) 153; "
    "Schwartz, Metrologia 31 (1994) 117; Davidson, Metrologia 40 (2003) 324 (all from memory)"
)
_GLASS_SOURCE = (
    "Verdaguer et al., Langmuir 23 (2007) 9699: 4 to 5 layers from 0 to 75 % on silica, of 31 ng/cm² (density of "
    "water); less than one up to 90 % where water does not wet (Chen et al., J. Phys. Chem. C 122 (2018) 11385)"
)
_BANDS = {
    "steel": (0.2e-6, 2e-6, _STEEL_SOURCE),
    "platinum-iridium": (0.2e-6, 2e-6, _STEEL_SOURCE),
    "glass": (0.3e-6, 3e-6, _GLASS_SOURCE),
    "unknown": (0.2e-6, 3e-6, "the widest of the others"),
}


def load(film_area: Value, film_slope: Value, film_humidity_change: Value) -> Value:
    """Return how much heavier the film has become [kg]."""
    return moisture.film_change(film_area, film_slope, film_humidity_change)


def _of(surface: str) -> Way:
    low, high, source = _BANDS[surface]
    return Way(
        "film.slope",
        lambda film_cleanness: low * (high / low) ** film_cleanness,
        f"between published values, surface {surface}",
        source=source,
        when={"film.surface": (surface,)},
    )


EFFECT = Effect(
    name="water_film",
    title="film of water on surfaces",
    help="Glass and metal hold a film of water that follows the humidity within minutes.",
    source=f"{_STEEL_SOURCE}; {_GLASS_SOURCE}",
    load=load,
    treatment="let load and container stand in the air of the balance before the tare",
    leaves="what the humidity does within a weighing",
    choices=(
        Choice(
            "film.surface",
            "what the film of water lies on",
            {
                "steel": "stainless, polished and clean",
                "platinum-iridium": "polished and clean",
                "glass": "or fused silica",
                "unknown": "smooth and clean",
            },
            default="unknown",
            source="published values for steel, platinum-iridium and glass (some from memory)",
        ),
    ),
    quantities=(
        Quantity(
            "film.area",
            "area",
            "area of the film of water",
            "Surface of load and container that has met the change of humidity. Rough, ground or porous surfaces have "
            "far more than their outline.",
            low=0.0,
            high=1e4,
            varies="never",
            example="120 cm²",
        ),
        Quantity(
            "film.slope",
            "mass per area",
            "film of water over the whole range of humidity",
            "How much more water the surface holds at 100 than at 0 % of humidity, as the middle of the range has it.",
            low=0.0,
            high=1.0,
            varies="never",
            computed=True,
            example="0.1 µg/cm²",
        ),
        Quantity(
            "film.humidity_change",
            "fraction",
            "change of humidity that the film has met",
            "Where it is not the load's: relative humidity at the loaded reading less that to which the surface had "
            "settled at the tare, or where it was conditioned; a bound, read as ±.",
            low=-1.0,
            high=1.0,
            limit=True,
            computed=True,
            example="5 %",
        ),
        Quantity(
            "film.cleanness",
            "number",
            "place between the published values of the film",
            "0 for the least, 1 for the most.",
            varies="never",
            default=Assumed(Estimate(0.5, "rectangular", 0.5), "anywhere between"),
            internal=True,
        ),
    ),
    ways=(
        *(_of(surface) for surface in _BANDS),
        Way("film.humidity_change", lambda load_humidity_step: load_humidity_step, "the same as the load's"),
    ),
    checks=(
        Check(
            lambda air_relative_humidity, film_area: (air_relative_humidity > 0.75) & (film_area > 0),
            "At {air_relative_humidity} the film of water grows far more with the humidity than was taken here: "
            "weigh in drier air.",
            source="Verdaguer et al., Langmuir 23 (2007) 9699: it grows fast above 75 %",
        ),
    ),
    test="Weigh a second piece of twice the surface and the same mass beside it while the humidity changes.",
)
