"""What a finger leaves on the load or its container between the tare and the loaded reading."""

from __future__ import annotations

from envcorr.effect import Effect, Way
from envcorr.estimate import Estimate, Value
from envcorr.vocabulary import Assumed, Choice, Quantity

__all__ = ["EFFECT", "load"]


def load(load_finger_residue: Value) -> Value:
    """Return the mass of the residue on the pan at the loaded reading, less at the tare [kg]."""
    return load_finger_residue


EFFECT = Effect(
    name="fingerprint",
    title="residue of fingers",
    help="Sweat and grease of a bare finger stay on what it touches, and are weighed.",
    source="tens of micrograms for each touch (common practice, no source)",
    load=load,
    treatment="wipe it, and handle it with tweezers",
    leaves="what the wipe and the tweezers leave",
    choices=(
        Choice(
            "load.handled_by",
            "what touches load and container after the tare reading",
            {
                "bare fingers": "they leave sweat and grease",
                "gloves": "clean and free of powder: taken as leaving nothing",
                "tweezers": "clean, or tongs: taken as leaving nothing",
            },
        ),
    ),
    quantities=(
        Quantity(
            "load.finger_residue",
            "mass",
            "residue of fingers",
            "What fingers leave on load and container after the tare reading, where it was measured; else say "
            "load.handled_by.",
            low=0.0,
            high=0.01,
            example="30 µg",
        ),
        Quantity(
            "load.touch_residue",
            "mass",
            "residue of one touch of a bare finger",
            "Sweat and grease that stay when the finger is taken away.",
            low=0.0,
            high=0.001,
            default=Assumed(
                Estimate.between(10e-9, 100e-9, "log-uniform"), "10 to 100 µg (common practice, no source)"
            ),
        ),
        Quantity(
            "load.touches",
            "number",
            "number of touches",
            "How many finger tips touch load and container after the tare reading.",
            low=0.0,
            high=1000.0,
            varies="never",
            default=Assumed(Estimate(2.0), "a thumb and a finger (judgement)"),
            example="2",
        ),
    ),
    ways=(
        Way(
            "load.finger_residue",
            lambda load_touches, load_touch_residue: load_touches * load_touch_residue,
            "bare fingers",
            when={"load.handled_by": ("bare fingers",)},
        ),
        Way(
            "load.finger_residue",
            lambda: 0.0,
            "nothing that counts: clean gloves or tweezers",
            source="common practice, no source",
            when={"load.handled_by": ("gloves", "tweezers")},
        ),
    ),
    test="Weigh a clean weight, touch it, weigh it again; wipe it and see whether the first reading comes back.",
)
