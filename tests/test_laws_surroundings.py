"""Flow, vibration and magnetism against textbooks, reference libraries and independent computations."""

from __future__ import annotations

import math

import fluids
import numpy as np
import pytest
from scipy import integrate, signal

from envcorr.laws import flow, magnetism, vibration

K0 = 273.15


# Air movement -----------------------------------------------------------------------------------------------


def test_drag_of_a_falling_sphere():
    """At its terminal velocity (the fluids library) a sphere's drag is its weight less its buoyancy."""
    diameter, density, air, viscosity = 2e-3, 50.0, 1.2, 1.8e-5
    speed = fluids.v_terminal(D=diameter, rhop=density, rho=air, mu=viscosity)
    coefficient = fluids.drag_sphere(fluids.Reynolds(V=speed, D=diameter, rho=air, mu=viscosity))
    weight = (density - air) * math.pi / 6 * diameter**3 * 9.80665
    assert flow.drag(speed, math.pi / 4 * diameter**2, coefficient, air) == pytest.approx(weight, rel=1e-3)


def test_drag_has_the_sign_of_the_speed():
    """0.2 m/s on 50 cm², Cd 1.2: 0.6 x 1.2 x 0.04 x 0.005 = 0.144 mN or 14.7 mg (by hand)."""
    force = flow.drag(np.array([0.2, -0.2]), 50e-4, 1.2, 1.2)
    assert force == pytest.approx([0.144e-3, -0.144e-3], rel=1e-12)


@pytest.mark.parametrize("ratio", [0.01, 0.5, 3.0, 40.0])
def test_averaging_of_fluctuations(ratio):
    """The double integral of exp(-|t - u|/tau) over the time of averaging, by quadrature."""
    found, _ = integrate.quad(lambda t: 2 * (ratio - t) * math.exp(-t), 0, ratio)
    assert flow.averaged_share(ratio, 1.0) == pytest.approx(math.sqrt(found) / ratio, rel=1e-9)


# Vibration --------------------------------------------------------------------------------------------------


def test_amplitudes_of_a_sine():
    """50.8 µm/s at 8 Hz is 1.01 µm and 2.553 mm/s² (2 pi f = 50.27 1/s, by hand)."""
    velocity = vibration.acceleration(50.8e-6, 8.0, "velocity")
    assert velocity == pytest.approx(2.5535e-3, rel=1e-4)
    assert vibration.acceleration(50.8e-6 / (2 * math.pi * 8), 8.0, "displacement") == pytest.approx(velocity)
    assert vibration.acceleration(1.0, 8.0, "acceleration") == 1.0


@pytest.mark.parametrize("order", [1, 2, 4])
def test_low_pass_is_a_butterworth(order):
    """Against scipy.signal's analogue prototype."""
    b, a = signal.butter(order, 2 * math.pi * 0.3, analog=True)
    frequencies = np.array([0.01, 0.3, 2.0, 25.0])
    _, response = signal.freqs(b, a, worN=2 * math.pi * frequencies)
    assert vibration.low_pass(frequencies, 0.3, order) == pytest.approx(np.abs(response), rel=1e-9)


def test_a_filtered_sine_in_time():
    """The rms of a 3 Hz sine through the filter, computed sample by sample."""
    step, corner = 1e-3, 0.5
    time = np.arange(0, 200, step)
    b, a = signal.butter(2, corner, fs=1 / step)
    passed = signal.lfilter(b, a, np.sin(2 * math.pi * 3 * time))[len(time) // 2 :]
    assert np.sqrt(np.mean(passed**2)) == pytest.approx(vibration.low_pass(3.0, corner, 2) / math.sqrt(2), rel=2e-3)


def test_criterion_curves():
    """VC-A is 50.8 µm/s from 8 Hz on and falls to 25.4 at 4 Hz; VC-C stays (IEST-RP-CC012, from memory)."""
    assert vibration.criterion_velocity(50.8e-6, 31.5, constant_below_8_hz=False) == 50.8e-6
    assert vibration.criterion_velocity(50.8e-6, 4.0, constant_below_8_hz=False) == pytest.approx(25.4e-6)
    assert vibration.criterion_velocity(12.7e-6, 2.0, constant_below_8_hz=True) == 12.7e-6
    bands = vibration.third_octaves()
    assert len(bands) == 20  # 1 to 80 Hz (IEC 61260-1)
    assert (bands[0], bands[-1]) == pytest.approx((1.0, 79.433), rel=1e-4)


# Magnetism --------------------------------------------------------------------------------------------------


def test_induced_force_is_the_slope_of_the_energy():
    """F = d/dz (chi V B²/(2 mu0)) of a field that falls as a dipole's, by differences."""
    mu0, chi, volume = 4e-7 * math.pi, 0.01, 2.5e-6

    def field(z):
        return 2e-9 / z**3

    def energy(z):
        return chi * volume * field(z) ** 2 / (2 * mu0)

    z, h = 0.02, 1e-6
    slope = (energy(z + h) - energy(z - h)) / (2 * h)
    gradient = (field(z + h) - field(z - h)) / (2 * h)
    assert magnetism.induced_force(chi, volume, field(z), gradient) == pytest.approx(slope, rel=1e-5)


def test_permanent_force():
    """A polarisation of 10 µT in 2.5 cm³ is 19.9 µA m²; in 1 mT/m it is pulled by 19.9 nN, 2.03 µg (by hand)."""
    force = magnetism.permanent_force(10e-6, 2.5e-6, 1e-3)
    assert force / 9.80665 == pytest.approx(2.029e-9, rel=1e-3)
