"""Repeatability of the balance, and the rounding of its display."""

from __future__ import annotations

import numpy as np

from envcorr.effect import Check, Effect
from envcorr.estimate import Estimate, Value
from envcorr.vocabulary import Assumed, Quantity

__all__ = ["EFFECT", "ROUNDING_FLOOR", "load"]

ROUNDING_FLOOR = 0.41
"""Of a scale interval: a repeatability below it is hidden by rounding (USP <41>, from memory; 1/sqrt(6))."""


def load(
    balance_repeatability: Value,
    balance_scale_interval: Value,
    balance_noise: Value,
    balance_rounding: Value,
) -> Value:
    """Return the random error of one net weighing [kg].

    With s of at least 0.41 d, the scatter of displayed net weighings already holds their rounding; with less, the two
    roundings are what is left: the sum of two rectangular ones, triangular from -d to +d (JCGM 101:2008, 6.4.5).
    """
    seen = balance_repeatability >= ROUNDING_FLOOR * balance_scale_interval
    return np.where(seen, balance_repeatability * balance_noise, balance_scale_interval * balance_rounding)


EFFECT = Effect(
    name="repeatability",
    title="repeatability and rounding",
    help="Scatter of repeated net weighings, or the rounding of the display where that is larger.",
    source="USP <41> (from memory); JCGM 101:2008, 6.4.5",
    load=load,
    quantities=(
        Quantity(
            "balance.repeatability_readings",
            "number",
            "number of readings behind the repeatability",
            "How many net weighings the repeatability was found from; one more than its degrees of freedom.",
            low=2.0,
            varies="never",
        ),
        Quantity(
            "balance.noise",
            "number",
            "noise of the balance",
            "One draw of the scatter, in units of the repeatability.",
            default=Assumed(Estimate(0.0, "normal", 1.0), "a standard normal draw"),
            internal=True,
        ),
        Quantity(
            "balance.rounding",
            "number",
            "rounding of the display",
            "Rounding of the loaded less that of the tare reading, in scale intervals; repeats do not lessen it.",
            varies="never",
            default=Assumed(Estimate(0.0, "triangular", 1.0), "two roundings of half a step each"),
            internal=True,
        ),
    ),
    own=True,
    needed="always",
    dof=lambda balance_repeatability_readings: balance_repeatability_readings - 1,
    test="Weigh one steady object of like mass ten times, taring in between, and take the standard deviation.",
    checks=(
        Check(
            lambda balance_repeatability, balance_scale_interval: (
                np.abs(balance_repeatability / balance_scale_interval - 1) < 1e-9
            ),
            "The repeatability equals the scale interval ({balance_scale_interval}): a readability is not a "
            "repeatability. Take the standard deviation of ten net weighings at this load.",
            source="OIML R 76-1:2006, T.3.2 and T.4 define them apart (from memory)",
        ),
        Check(
            lambda load_mass, balance_max_capacity: load_mass > balance_max_capacity,
            "The net load ({load_mass}) is more than the balance takes ({balance_max_capacity}).",
            source="OIML R 76-1:2006, T.3.1.1 (from memory)",
        ),
        Check(
            lambda load_mass, container_mass, balance_max_capacity: load_mass + container_mass > balance_max_capacity,
            "Load and container together ({load_mass} and {container_mass}) are more than the balance takes "
            "({balance_max_capacity}).",
            source="OIML R 76-1:2006, T.3.1.1 (from memory)",
        ),
    ),
)
