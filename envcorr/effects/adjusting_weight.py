"""Error of the adjusting weight, and the drift of the sensitivity since the adjustment."""

from __future__ import annotations

from envcorr.effect import Effect
from envcorr.estimate import Estimate, Value
from envcorr.vocabulary import Assumed, Quantity

__all__ = ["EFFECT", "gain"]


def gain(balance_adjusting_weight_error: Value, balance_sensitivity_drift: Value) -> Value:
    """Return the relative error of the gain that the adjustment left (both numbers, added)."""
    return balance_adjusting_weight_error + balance_sensitivity_drift


EFFECT = Effect(
    name="adjusting_weight",
    title="adjusting weight and drift",
    help="The display can be no better than the weight it was adjusted with, and drifts from then on.",
    source="EURAMET cg-18 v4.0, 7.1.2 and 7.4.3 (from memory)",
    gain=gain,
    quantities=(
        Quantity(
            "balance.adjusting_weight_error",
            "fraction",
            "relative error of the adjusting weight",
            "Relative error of its conventional mass, or of a certificate's correction; a bound, read as ±.",
            low=-0.01,
            high=0.01,
            varies="never",
            limit=True,
        ),
        Quantity(
            "balance.sensitivity_drift",
            "fraction",
            "drift of the sensitivity",
            "Relative change of the sensitivity since the adjustment; a bound, read as ±.",
            low=-0.01,
            high=0.01,
            varies="never",
            limit=True,
            default=Assumed(Estimate(0.0), "no drift since the adjustment, or held by the certificate's U"),
        ),
    ),
    own=True,
    test="Put a calibrated weight near the load's mass on the pan.",
)
