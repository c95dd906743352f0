"""Non-linearity of the balance over its range."""

from __future__ import annotations

from envcorr.effect import Effect
from envcorr.estimate import Value
from envcorr.vocabulary import Quantity

__all__ = ["EFFECT", "load"]


def load(balance_nonlinearity: Value) -> Value:
    """Return the departure of the balance's characteristic from a straight line at this load [kg]."""
    return balance_nonlinearity


EFFECT = Effect(
    name="nonlinearity",
    title="non-linearity",
    help="The departure of the display from a straight line through zero and the adjusting weight.",
    source="EURAMET cg-18 v4.0, 7.1.1 (from memory)",
    load=load,
    quantities=(
        Quantity(
            "balance.nonlinearity",
            "mass",
            "non-linearity",
            "Largest departure from linearity, from the data sheet or the certificate; a bound, read as ±.",
            low=-1.0,
            high=1.0,
            varies="never",
            limit=True,
        ),
    ),
    own=True,
    test="Weigh a small weight alone, then on top of tares that step through the range.",
)
