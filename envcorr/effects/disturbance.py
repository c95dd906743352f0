"""A disturbance whose scatter was measured with its source switched on and off."""

from __future__ import annotations

import numpy as np

from envcorr.effect import Check, Effect, Way
from envcorr.estimate import Estimate, Value
from envcorr.vocabulary import Assumed, Choice, Quantity

__all__ = ["EFFECT", "load"]


def load(balance_disturbance: Value, balance_disturbance_noise: Value) -> Value:
    """Return the error that the disturbance adds to one net weighing [kg]."""
    return balance_disturbance * balance_disturbance_noise


def _extra(balance_scatter_on: Value, balance_scatter_off: Value) -> Value:
    """Return the standard deviation that the source adds [kg]: independent variances add (JCGM 100, 5.1.2)."""
    return np.sqrt(np.maximum(np.square(balance_scatter_on) - np.square(balance_scatter_off), 0.0))


EFFECT = Effect(
    name="disturbance",
    title="measured disturbance",
    help="The scatter that a source in the room adds, from a test with the source on and off.",
    source="JCGM 100:2008, 5.1.2: independent variances add",
    load=load,
    # where the repeatability was found with the room as it is, the disturbance is already in it
    when={"balance.repeatability_from": ("elsewhere",)},
    quantities=(
        Quantity(
            "balance.disturbance",
            "mass",
            "scatter that the disturbance adds",
            "Square root of the difference of the squared scatters with the source on and off.",
            low=0.0,
            varies="never",
            internal=True,
        ),
        Quantity(
            "balance.disturbance_noise",
            "number",
            "noise of the disturbance",
            "One draw of the disturbance, in units of its standard deviation.",
            default=Assumed(Estimate(0.0, "normal", 1.0), "a standard normal draw"),
            internal=True,
        ),
    ),
    ways=(
        Way(
            "balance.disturbance",
            _extra,
            "from the scatter with the source on and off",
            checks=(
                Check(
                    lambda balance_scatter_on, balance_scatter_off: balance_scatter_on < balance_scatter_off,
                    "The scatter with the source on ({balance_scatter_on}) is smaller than with it off "
                    "({balance_scatter_off}): nothing is added. More readings would tell whether it does anything.",
                    source="a variance cannot be negative",
                ),
            ),
        ),
    ),
    choices=(
        Choice(
            "balance.scatter_source",
            "what was switched on and off",
            {
                "draught": "a stream of air: the model of the draught is left out",
                "vibration": "what shakes the bench: the model of the vibration is left out",
                "both": "a source of both, or not known: both models are left out",
                "neither": "something else: both models count beside it",
            },
            default="both",
            source="what is measured beats a model, and nothing counts twice",
        ),
    ),
    treatment="switch off or shield the source",
    leaves="the scatter with the source off",
    test="Take ten net weighings with the source on and ten with it off.",
    caution="Never turn off a ventilated enclosure that protects from powder or vapour to steady a reading.",
)
