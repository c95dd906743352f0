"""Gravity: a balance that was adjusted elsewhere, a few floors away included."""

from __future__ import annotations

import math
from collections.abc import Mapping
from typing import Any

from envcorr.constants import EARTH_TIDE, LOCAL_GRAVITY_U
from envcorr.effect import Answer, Check, Effect, Way
from envcorr.estimate import Estimate, Value
from envcorr.laws.gravity import normal_gravity
from envcorr.vocabulary import Assumed, Quantity

__all__ = ["EFFECT", "gain"]

_GRS80 = "GRS80: Moritz, J. Geodesy 74 (2000) 128"
_FLOOR = 3.0  # m; a usual storey (common practice, no source)


def gain(site_gravity: Value, adjusted_site_gravity: Value, site_tide: Value) -> Value:
    """Return g/g_adj - 1, the gravities [m/s²] here and where the balance was adjusted, with the tide since then."""
    return site_gravity / adjusted_site_gravity - 1 + site_tide


def _another_site(given: Mapping[str, Any]) -> bool:
    return "adjusted.site.latitude" in given


def _one_site(given: Mapping[str, Any]) -> bool:
    return "adjusted.air.altitude" in given and not _another_site(given)


EFFECT = Effect(
    name="gravity",
    title="gravity since the adjustment",
    help="A balance weighs force: carried to another height or place it shows other masses until it is adjusted again.",
    source=f"g/g_adj; {_GRS80}, with the free-air formula to the second order in height",
    gain=gain,
    correctable=True,
    treatment="adjust it again where it stands",
    leaves="the tide until the next adjustment",
    quantities=(
        Quantity(
            "site.latitude",
            "angle",
            "latitude",
            "Geographic latitude of the balance; adjusted.site.latitude where it was adjusted at another place.",
            low=-math.pi / 2,
            high=math.pi / 2,
            varies="never",
            computed=True,
            example="47.5 °",
        ),
        Quantity(
            "site.gravity",
            "acceleration",
            "acceleration of gravity",
            "Where it was measured; else it follows from latitude and height (air.altitude).",
            low=9.6,
            high=9.9,
            varies="never",
            computed=True,
            example="9.8081 m/s²",
        ),
        Quantity(
            "site.gravity_anomaly",
            "acceleration",
            "local departure from normal gravity",
            "What hills and rock add; the same at every height of one site, so that it cancels there.",
            low=-0.01,
            high=0.01,
            varies="never",
            default=Assumed(Estimate(0.0, "normal", LOCAL_GRAVITY_U.value), LOCAL_GRAVITY_U.source),
            example="0.2 mm/s²",
        ),
        Quantity(
            "site.other_anomaly",
            "acceleration",
            "local departure from normal gravity at the other place",
            "Where the balance was adjusted, if that was another place.",
            varies="never",
            default=Assumed(Estimate(0.0, "normal", LOCAL_GRAVITY_U.value), LOCAL_GRAVITY_U.source),
            internal=True,
        ),
        Quantity(
            "site.tide",
            "fraction",
            "change of gravity by the tide since the adjustment",
            "By the moon and the sun; nothing where the balance was adjusted just before.",
            varies="never",
            internal=True,
        ),
        Quantity(
            "site.tide_change",
            "fraction",
            "largest change of gravity by the tide",
            "As a share of gravity; a bound, read as ±.",
            low=-1e-6,
            high=1e-6,
            varies="never",
            limit=True,
            default=Assumed(Estimate(0.0, "rectangular", EARTH_TIDE.value), EARTH_TIDE.source),
            example="0.25 ppm",
        ),
    ),
    ways=(
        Way(
            "site.gravity",
            lambda site_latitude, air_altitude, site_gravity_anomaly: (
                normal_gravity(site_latitude, air_altitude) + site_gravity_anomaly
            ),
            "normal gravity at latitude and height, with the site's anomaly",
            source=_GRS80,
        ),
        Way(
            "site.latitude",
            lambda: math.pi / 4,
            "45°: between two heights of one site it is of no matter",
            only_if=_one_site,
            source=f"{_GRS80}: the change with height differs by 0.1 % from pole to equator (computed)",
        ),
        Way(
            "adjusted.site.gravity_anomaly",
            lambda site_other_anomaly: site_other_anomaly,
            "that of another place",
            only_if=_another_site,
        ),
        Way("site.tide", lambda: 0.0, "adjusted just before", when={"adjusted.when": ("just before",)}),
        Way("site.tide", lambda site_tide_change: site_tide_change, "a bound"),
    ),
    answers=(
        Answer(
            "change of the reading of this load a floor higher",
            "mass",
            lambda load_mass, site_gravity: load_mass * _FLOOR * -3.086e-6 / site_gravity,
        ),
    ),
    checks=(
        Check(
            lambda site_gravity, adjusted_site_gravity: abs(site_gravity / adjusted_site_gravity - 1) > 1e-7,
            "The balance was adjusted where gravity is {adjusted_site_gravity}; here it is {site_gravity}. Adjust it "
            "again where it stands before anything else: four floors are 4 µg per gram.",
            source="free-air gradient 3.1e-6 1/s² (GRS80, computed); 0.1 ppm is a judgement",
        ),
    ),
    test="Weigh one weight before the move and after it, without adjusting in between.",
)
