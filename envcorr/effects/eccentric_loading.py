"""Error of a load that does not stand in the middle of the pan."""

from __future__ import annotations

from envcorr.effect import Effect, Way
from envcorr.estimate import Value
from envcorr.vocabulary import Quantity

__all__ = ["EFFECT", "load"]


def load(balance_eccentric_loading: Value, balance_eccentric_share: Value) -> Value:
    """Return the error of the load's position on the pan [kg]: that of the test, times the net load's share of it.

    The container does not move between tare and load, so the net load counts.
    """
    return balance_eccentric_loading * balance_eccentric_share


EFFECT = Effect(
    name="eccentric_loading",
    title="eccentric loading",
    help="The reading changes a little with the place of the load on the pan.",
    source="EURAMET cg-18 v4.0, 7.1.1.4 (from memory): proportional to the load",
    load=load,
    quantities=(
        Quantity(
            "balance.eccentric_loading",
            "mass",
            "eccentric loading error",
            "Largest change of the reading off the centre, from the certificate; a bound, read as ±.",
            low=-1.0,
            high=1.0,
            limit=True,
        ),
        Quantity(
            "balance.eccentric_test_load",
            "mass",
            "load of the eccentricity test",
            "The weight with which the eccentric loading was tested, often a third or half of the capacity.",
            low=1e-6,
            varies="never",
        ),
        Quantity(
            "balance.eccentric_share",
            "number",
            "net load over the load of the eccentricity test",
            "1 where the load of the test is not stated.",
            varies="never",
            internal=True,
        ),
    ),
    ways=(
        Way(
            "balance.eccentric_share",
            lambda load_mass, balance_eccentric_test_load: load_mass / balance_eccentric_test_load,
            "in proportion to the net load",
            source="EURAMET cg-18 v4.0, 7.1.1.4 (from memory)",
        ),
        Way("balance.eccentric_share", lambda: 1.0, "as tested, the load of the test not being stated"),
    ),
    own=True,
    test="Place one weight in the middle, then half-way to the rim in four directions.",
)
