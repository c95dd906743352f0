"""Draught: moving air drags at the load and at the pan."""

from __future__ import annotations

import numpy as np

from envcorr import presets
from envcorr.constants import STANDARD_GRAVITY
from envcorr.effect import Check, Effect, Way
from envcorr.estimate import Estimate, Value
from envcorr.laws.flow import averaged_share, drag
from envcorr.vocabulary import Assumed, Choice, Quantity

__all__ = ["EFFECT", "load"]


def load(
    draught_speed: Value,
    draught_shield_factor: Value,
    draught_area: Value,
    draught_pan_area: Value,
    draught_drag_coefficient: Value,
    draught_side: Value,
    draught_turbulence: Value,
    draught_eddy: Value,
    draught_noise: Value,
    balance_integration_time: Value,
    air_density: Value,
) -> Value:
    """Return the mean drag on what the load adds to the pan, and the scatter of that on both, as apparent mass [kg].

    The mean drag on the empty pan is in the tare reading too and cancels; its fluctuations are not. A fluctuation of
    the speed by a share I changes the force by 2 I; the mean over the integration time keeps some of it, the eddies
    passing in the time L/v.
    """
    speed = draught_speed * draught_shield_factor
    mean = draught_side * drag(speed, draught_area, draught_drag_coefficient, air_density)
    gross, pan = (
        drag(speed, area, draught_drag_coefficient, air_density)
        for area in (draught_area + draught_pan_area, draught_pan_area)
    )
    passing = draught_eddy / np.maximum(np.abs(speed), 1e-6)  # s; in still air nothing passes
    kept = averaged_share(balance_integration_time, passing)
    scatter = 2 * draught_turbulence * kept * np.hypot(gross, pan)
    return (mean + scatter * draught_noise) / STANDARD_GRAVITY.value


def _side(word: str, value: float) -> Way:
    return Way("draught.side", lambda: value, word, when={"draught.direction": (word,)})


EFFECT = Effect(
    name="draught",
    title="draught",
    help="Air that moves over the pan pushes the load up or down, and never steadily.",
    source="drag of a body, rho v² Cd A / 2 (definition); averaging of fluctuations: Tennekes and Lumley, A First "
    "Course in Turbulence, 6.4 (from memory)",
    load=load,
    # where the repeatability was found with the room as it is, the draught is already in it
    when={"balance.repeatability_from": ("elsewhere",)},
    replaced_by=("balance.scatter_on", "balance.scatter_off"),
    replaced_when={"balance.scatter_source": ("draught", "both")},
    treatment="close the shield, move the balance out of the stream, or weigh between its gusts",
    leaves="what passes the shield",
    choices=(
        Choice(
            "draught.direction",
            "where the draught blows",
            {"down": "onto the load: reads heavy", "up": "from below: reads light", "unknown": "either way"},
            default="unknown",
            source="the cautious of the three",
        ),
        Choice(
            "draught.preset",
            "a usual stream of air",
            {name: preset.text for name, preset in presets.of("draught").items()},
        ),
    ),
    quantities=(
        Quantity(
            "draught.speed",
            "speed",
            "speed of the draught",
            "Of the air where the balance stands, outside its shield; its vertical part, or all of it if unknown.",
            low=0.0,
            high=20.0,
            lessens_to_zero=True,
            computed=True,
            example="0.15 m/s",
        ),
        Quantity(
            "draught.shield_factor",
            "fraction",
            "share of the speed that passes the shield",
            "1 without a shield; measured with an anemometer, or from a test with the shield open and closed.",
            low=0.0,
            high=1.0,
            example="5 %",
        ),
        Quantity(
            "draught.area",
            "area",
            "area that the load adds to the pan",
            "As seen along the draught: what stands out beyond the pan, or rises above it.",
            low=0.0,
            high=1.0,
            varies="never",
            example="20 cm²",
        ),
        Quantity(
            "draught.pan_area",
            "area",
            "area of the pan",
            "Its mean drag cancels between tare and load; its fluctuations do not.",
            low=0.0,
            high=1.0,
            varies="never",
            example="60 cm²",
        ),
        Quantity(
            "draught.drag_coefficient",
            "number",
            "drag coefficient",
            "Force over that of the stagnation pressure on the area.",
            low=0.01,
            high=10.0,
            varies="never",
            default=Assumed(
                Estimate(1.2, "rectangular", 0.4),
                "plates 1.17, short cylinders 0.7 to 1.2 (White, Fluid Mechanics, table 7.3, from memory); a little "
                "more where it is slow",
            ),
        ),
        Quantity(
            "draught.turbulence",
            "fraction",
            "turbulence of the draught",
            "Standard deviation of the speed over its mean.",
            low=0.0,
            high=2.0,
            varies="never",
            default=Assumed(
                Estimate(0.35, "rectangular", 0.15), "20 to 50 % in rooms (ISO 7730: 40 % usual; from memory)"
            ),
        ),
        Quantity(
            "draught.eddy",
            "length",
            "size of the eddies",
            "Integral length of the turbulence: about that of the opening or obstacle it comes from.",
            low=1e-3,
            high=10.0,
            varies="never",
            default=Assumed(Estimate.between(0.05, 0.5, "log-uniform"), "5 to 50 cm in rooms (judgement)"),
        ),
        Quantity(
            "balance.integration_time",
            "time",
            "integration time of the balance",
            "Over which one reading is averaged; see the filter setting.",
            low=1e-3,
            high=600.0,
            varies="never",
            default=Assumed(Estimate.between(1.0, 4.0, "log-uniform"), "1 to 4 s (common practice, no source)"),
        ),
        Quantity(
            "draught.side",
            "number",
            "sense of the draught",
            "1 downwards, -1 upwards.",
            default=Assumed(Estimate(0.0, "rectangular", 1.0), "anywhere between straight down and straight up"),
            internal=True,
            ranked=False,
        ),
        Quantity(
            "draught.noise",
            "number",
            "noise of the draught",
            "One draw of its fluctuations, in units of their standard deviation.",
            default=Assumed(Estimate(0.0, "normal", 1.0), "a standard normal draw"),
            internal=True,
        ),
    ),
    ways=(
        _side("down", 1.0),
        _side("up", -1.0),
        *(
            Way("draught.speed", preset.supply(), preset.text, source=preset.source, when={"draught.preset": (name,)})
            for name, preset in presets.of("draught").items()
        ),
    ),
    checks=(
        Check(
            lambda draught_speed, draught_shield_factor: draught_speed * draught_shield_factor > 0.2,
            "At the pan the air moves at more than 0.2 m/s ({draught_speed} outside, of which {draught_shield_factor} "
            "pass the shield): nobody weighs milligrams in that.",
            source="common practice, no source",
        ),
    ),
    test="Take ten net weighings with its source on and ten with it off: that measured scatter (balance.scatter_on, "
    "scatter_off) beats this model.",
    caution="Never turn off, block or reduce a fume hood, ventilated enclosure or safety cabinet to steady a reading; "
    "ask who is responsible for it, and follow local codes.",
)
