"""Vibration: what a shaking bench does to a reading, through the balance's low pass.

Frequencies in Hz, accelerations in m/s² rms; floats or arrays that broadcast.
"""

from __future__ import annotations

import math
from collections.abc import Iterable

import numpy as np

from envcorr.estimate import Value

__all__ = ["BANDS", "acceleration", "criterion_velocity", "low_pass", "root_sum_square", "third_octaves"]

BANDS = (1.0, 2.0, 4.0, 8.0, 16.0, 31.5, 63.0)
"""Mid-band frequencies of octaves [Hz] (IEC 61260-1:2014, nominal)."""


def acceleration(amplitude: Value, frequency: Value, kind: str) -> Value:
    """Return the acceleration of a harmonic motion from its displacement [m], velocity [m/s] or acceleration [m/s²].

    Peak stays peak and rms stays rms: each derivative multiplies by 2 pi f.
    """
    order = {"displacement": 2, "velocity": 1, "acceleration": 0}[kind]
    return amplitude * (2 * math.pi * frequency) ** order


def low_pass(frequency: Value, corner: Value, order: Value) -> Value:
    """Return the gain of a Butterworth low pass, 1/sqrt(1 + (f/fc)^(2n)) (a number)."""
    return 1 / np.sqrt(1 + (frequency / corner) ** (2 * order))


def third_octaves(first: float = 1.0, last: float = 80.0) -> tuple[float, ...]:
    """Return exact mid-band frequencies of one-third octaves [Hz]: 1000 x 10^(k/10) (IEC 61260-1:2014, 5.3)."""
    low, high = (round(10 * math.log10(f / 1000)) for f in (first, last))
    return tuple(1000 * 10 ** (k / 10) for k in range(low, high + 1))


def criterion_velocity(largest: float, frequency: float, *, constant_below_8_hz: bool) -> float:
    """Return what a criterion curve allows in a one-third octave [m/s rms]: constant velocity.

    Below 8 Hz the coarse curves turn to constant acceleration, falling with the frequency; IEST-RP-CC012 (from memory).
    """
    return largest if constant_below_8_hz or frequency >= 8 else largest * frequency / 8


def root_sum_square(parts: Iterable[Value]) -> Value:
    """Return the rms of independent bands together."""
    squares: Value = 0.0
    for part in parts:
        squares = squares + np.square(part)
    return np.sqrt(squares)
