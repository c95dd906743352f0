"""Vibration of the bench: the balance cannot tell an acceleration from gravity."""

from __future__ import annotations

import math
from collections.abc import Mapping
from typing import Any

from envcorr import presets
from envcorr.constants import STANDARD_GRAVITY
from envcorr.effect import Check, Effect, Way
from envcorr.estimate import Estimate, Value
from envcorr.laws.vibration import (
    BANDS,
    acceleration,
    criterion_velocity,
    low_pass,
    root_sum_square,
    third_octaves,
)
from envcorr.vocabulary import Assumed, Choice, Quantity

__all__ = ["EFFECT", "load"]

_FINE = ("VC-C", "VC-D", "VC-E")  # constant velocity down to 1 Hz, the coarser only to 8 Hz; IEST-RP-CC012, from memory
_AMPLITUDES = {
    "displacement": ("length", "2 µm"),
    "velocity": ("speed", "50 µm/s"),
    "acceleration": ("acceleration", "5 mm/s²"),
}
_STATED = {"rms": "rms", "peak": "peak, not peak to peak"}
_OF_PEAK = 1 / math.sqrt(2)
"""The rms of a sine over its peak."""


def load(
    vibration_filtered_acceleration: Value,
    load_mass: Value,
    balance_moving_mass: Value,
    vibration_noise: Value,
    vibration_noise_at_tare: Value,
) -> Value:
    """Return the apparent mass [kg] of the acceleration that passes the balance's filter, at the load less at the tare.

    The moving parts feel it at both readings, the load at one of them.
    """
    share = vibration_filtered_acceleration / STANDARD_GRAVITY.value
    return share * ((load_mass + balance_moving_mass) * vibration_noise - balance_moving_mass * vibration_noise_at_tare)


def _octaves(
    vibration_octave_1hz: Value,
    vibration_octave_2hz: Value,
    vibration_octave_4hz: Value,
    vibration_octave_8hz: Value,
    vibration_octave_16hz: Value,
    vibration_octave_31hz: Value,
    vibration_octave_63hz: Value,
    balance_filter_corner: Value,
    balance_filter_order: Value,
) -> Value:
    found = (
        vibration_octave_1hz,
        vibration_octave_2hz,
        vibration_octave_4hz,
        vibration_octave_8hz,
        vibration_octave_16hz,
        vibration_octave_31hz,
        vibration_octave_63hz,
    )
    passed = (
        rms * low_pass(f, balance_filter_corner, balance_filter_order) for f, rms in zip(BANDS, found, strict=True)
    )
    return root_sum_square(passed)


def _criterion(preset: presets.Preset) -> Any:
    bands = [
        (f, acceleration(criterion_velocity(preset.value, f, constant_below_8_hz=preset.name in _FINE), f, "velocity"))
        for f in third_octaves()
    ]

    def filtered(balance_filter_corner: Value, balance_filter_order: Value) -> Value:
        return root_sum_square(rms * low_pass(f, balance_filter_corner, balance_filter_order) for f, rms in bands)

    return filtered


def _any_octave(given: Mapping[str, Any]) -> bool:
    return any(name.startswith("vibration.octave_") for name in given)


# one line: each amplitude by its name, to the rms of its acceleration
_LINES = (
    (
        "rms velocity",
        lambda vibration_velocity_rms, vibration_frequency: acceleration(
            vibration_velocity_rms, vibration_frequency, "velocity"
        ),
    ),
    (
        "peak velocity",
        lambda vibration_velocity_peak, vibration_frequency: (
            _OF_PEAK * acceleration(vibration_velocity_peak, vibration_frequency, "velocity")
        ),
    ),
    ("rms acceleration", lambda vibration_acceleration_rms: vibration_acceleration_rms),
    ("peak acceleration", lambda vibration_acceleration_peak: _OF_PEAK * vibration_acceleration_peak),
    (
        "rms displacement",
        lambda vibration_displacement_rms, vibration_frequency: acceleration(
            vibration_displacement_rms, vibration_frequency, "displacement"
        ),
    ),
    (
        "peak displacement",
        lambda vibration_displacement_peak, vibration_frequency: (
            _OF_PEAK * acceleration(vibration_displacement_peak, vibration_frequency, "displacement")
        ),
    ),
)

EFFECT = Effect(
    name="vibration",
    title="vibration",
    help="A bench that shakes accelerates load and pan; the balance's filter leaves some of it as scatter.",
    source="mass times acceleration over g; Butterworth low pass; criteria: IEST-RP-CC012 (from memory)",
    load=load,
    # where the repeatability was found with the room as it is, the vibration is already in it
    when={"balance.repeatability_from": ("elsewhere",)},
    replaced_by=("balance.scatter_on", "balance.scatter_off"),
    replaced_when={"balance.scatter_source": ("vibration", "both")},
    treatment="set it on a stone table on a wall or a heavy floor, and choose a slower filter",
    leaves="what the floor itself does below a few hertz",
    choices=(
        Choice(
            "vibration.criterion",
            "criterion that the bench just meets",
            {name: preset.text for name, preset in presets.of("vibration").items()},
        ),
    ),
    quantities=(
        *(
            Quantity(
                f"vibration.{kind}_{stated}",
                unit,
                f"{stated} {kind} of the vibration",
                f"Of a single line at vibration.frequency; {meaning}.",
                low=0.0,
                lessens_to_zero=True,
                example=example,
            )
            for kind, (unit, example) in _AMPLITUDES.items()
            for stated, meaning in _STATED.items()
        ),
        Quantity(
            "vibration.frequency",
            "frequency",
            "frequency of the vibration",
            "Of the line: a motor, a pump, the floor's own.",
            low=0.01,
            high=1e4,
            varies="never",
            example="25 Hz",
        ),
        *(
            Quantity(
                f"vibration.octave_{int(f)}hz",
                "acceleration",
                f"acceleration in the octave about {f:g} Hz",
                "Rms in that octave, from a vibration meter.",
                low=0.0,
                lessens_to_zero=True,
                default=Assumed(Estimate(0.0), "no figure was given for this octave"),
                example="0.5 mm/s²",
            )
            for f in BANDS
        ),
        Quantity(
            "balance.filter_corner",
            "frequency",
            "corner frequency of the balance's filter",
            "Above it vibration is averaged away; about 0.35 over the settling time.",
            low=1e-3,
            high=100.0,
            varies="never",
            default=Assumed(Estimate.between(0.1, 0.5, "log-uniform"), "0.1 to 0.5 Hz (judgement)"),
        ),
        Quantity(
            "balance.filter_order",
            "number",
            "order of the balance's filter",
            "How steeply it falls: 1 for 6 dB an octave, 2 for 12 dB.",
            low=1.0,
            high=8.0,
            varies="never",
            default=Assumed(Estimate(2.0), "2 (judgement)"),
            example="2",
        ),
        Quantity(
            "balance.moving_mass",
            "mass",
            "mass of the balance's moving parts",
            "Pan, carrier, lever and coil, as felt at the pan.",
            low=0.0,
            high=10.0,
            varies="never",
            default=Assumed(Estimate.between(0.02, 0.2, "log-uniform"), "20 to 200 g (judgement)"),
            example="60 g",
        ),
        Quantity(
            "vibration.line",
            "acceleration",
            "rms acceleration of the line",
            "However the line's amplitude was given.",
            low=0.0,
            internal=True,
        ),
        Quantity(
            "vibration.filtered_acceleration",
            "acceleration",
            "acceleration behind the balance's filter",
            "What is left of all bands together, rms.",
            low=0.0,
            varies="never",
            internal=True,
        ),
        *(
            Quantity(
                name,
                "number",
                f"noise of the vibration {where}",
                "One draw of it, in units of its rms.",
                default=Assumed(Estimate(0.0, "normal", 1.0), "a standard normal draw"),
                internal=True,
            )
            for name, where in (
                ("vibration.noise", "at the loaded reading"),
                ("vibration.noise_at_tare", "at the tare reading"),
            )
        ),
    ),
    ways=(
        Way("vibration.filtered_acceleration", _octaves, "from octave bands", only_if=_any_octave),
        Way(
            "vibration.filtered_acceleration",
            lambda vibration_line, vibration_frequency, balance_filter_corner, balance_filter_order: (
                vibration_line * low_pass(vibration_frequency, balance_filter_corner, balance_filter_order)
            ),
            "from one line",
        ),
        *(Way("vibration.line", function, f"its {label}") for label, function in _LINES),
        *(
            Way(
                "vibration.filtered_acceleration",
                _criterion(preset),
                f"the bench just meets {name}",
                source=preset.source,
                when={"vibration.criterion": (name,)},
            )
            for name, preset in presets.of("vibration").items()
        ),
    ),
    checks=(
        Check(
            lambda vibration_frequency, balance_filter_corner: vibration_frequency < balance_filter_corner,
            "The vibration of {vibration_frequency} lies below the filter's corner ({balance_filter_corner}): it is "
            "not averaged away but seen as a reading that wanders.",
            source="low pass (definition)",
        ),
    ),
    test="Take ten net weighings with its source on and ten with it off: that measured scatter (balance.scatter_on, "
    "scatter_off) beats this model.",
)
