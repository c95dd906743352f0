"""Flow, vibration, magnetism and evaporation against textbooks, reference libraries and independent computations."""

from __future__ import annotations

import math

import fluids
import numpy as np
import pytest
from CoolProp.CoolProp import PropsSI
from scipy import integrate, optimize, signal

from envcorr import liquids
from envcorr.laws import evaporation, flow, magnetism, vibration

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


# Evaporation ------------------------------------------------------------------------------------------------


@pytest.mark.parametrize(
    ("name", "t", "measured", "within"),
    # cm²/s in air at 1 atm; handbook values as in Poling et al., table 11-2, and Perry (from memory)
    [
        ("water", 40.0, 0.288, 0.06),
        ("ethanol", 25.0, 0.119, 0.05),
        ("toluene", 25.9, 0.086, 0.09),
        ("acetone", 0.0, 0.109, 0.18),  # the rule's worst here
    ],
)
def test_diffusivities(name, t, measured, within):
    liquid = liquids.every()[name]
    found = evaporation.fuller(K0 + t, 101_325.0, liquid.molar_mass, liquid.volume) * 1e4
    assert found == pytest.approx(measured, rel=within)


def test_stefan_tube():
    """Bird, Stewart, Lightfoot, 18.2: CCl4 in O2, 17.1 cm, 755 and 33 mmHg, 0.82 cm², 0.0208 cm³ in 10 h: 0.0628 cm²/s.

    With a density of 1590 kg/m³, 0 °C; the flux of that diffusivity is what was lost.
    """
    mmhg = 133.322
    lost = 0.0208e-6 * 1590 / 36_000 / 0.82e-4
    flux = evaporation.stefan_flux(0.0628e-4, 0.171, K0, 755 * mmhg, 33 * mmhg, 0.0, 0.15382)
    assert flux == pytest.approx(lost, rel=5e-3)


def test_a_brimful_dish():
    """Water at 20 °C and 50 %, 20 mm across, 1 mm below the rim: 460 µg/min of an isothermal surface, not 4070."""
    liquid = liquids.every()["water"]
    p = liquids.vapour_pressure(liquid, K0 + 20)
    d = evaporation.fuller(K0 + 20, 101_325.0, liquid.molar_mass, liquid.volume)
    area = math.pi * 0.01**2
    through, straight = (
        evaporation.stefan_flux(d, path, K0 + 20, 101_325.0, p, p / 2, liquid.molar_mass) * area * 60e9
        for path in (evaporation.diffusion_path(1e-3, 20e-3), 1e-3)
    )
    assert through == pytest.approx(460, rel=0.02)
    assert straight == pytest.approx(4070, rel=0.02)


@pytest.mark.parametrize(("name", "low", "high"), [("dichloromethane", 0.1, 3.0), ("acetone", 0.05, 2.0)])
def test_a_very_volatile_solvent_loses_milligrams_within_seconds(name, low, high):
    """Common practice, no source: an open dish of 5 cm loses about a milligram every second or few."""
    liquid = liquids.every()[name]
    t, p = K0 + 22, 101_325.0
    path = evaporation.diffusion_path(2e-3, 0.05)
    d = evaporation.fuller(t, p, liquid.molar_mass, liquid.volume)
    pv, heat = liquids.vapour_pressure(liquid, t), liquids.heat_of_vaporisation(liquid, t)
    surface = evaporation.surface_temperature(t, p, path, d, pv, heat, 0.0, liquid.molar_mass)
    at = evaporation.clausius_clapeyron(pv, heat, surface, t)
    rate = evaporation.stefan_flux(d, path, t, p, at, 0.0, liquid.molar_mass) * math.pi * 0.025**2
    assert low < rate * 1e6 < high  # mg/s


@pytest.mark.parametrize(
    ("name", "constants"),
    # Antoine's equation, log10(p/mmHg) = A - B/(C + t/°C): Lange's Handbook of Chemistry (from memory)
    [
        ("water", (8.07131, 1730.63, 233.426)),
        ("acetone", (7.11714, 1210.595, 229.664)),
        ("toluene", (6.95464, 1344.8, 219.48)),
        ("methanol", (8.08097, 1582.27, 239.7)),
    ],
)
def test_vapour_pressures_against_antoine(name, constants):
    a, b, c = constants
    for t in (15.0, 25.0):
        antoine = 133.322 * 10 ** (a - b / (c + t))
        assert liquids.vapour_pressure(liquids.every()[name], K0 + t) == pytest.approx(antoine, rel=0.02)


def test_liquids_without_an_equation_of_state():
    """At 20 °C: 2-propanol 4.3 kPa, dichloromethane 47 kPa (CRC Handbook, from memory)."""
    assert liquids.vapour_pressure(liquids.every()["isopropanol"], K0 + 20) == pytest.approx(4.3e3, rel=0.04)
    assert liquids.vapour_pressure(liquids.every()["dichloromethane"], K0 + 20) == pytest.approx(47e3, rel=0.02)


@pytest.mark.parametrize("name", [name for name, one in liquids.every().items() if one.coolprop])
def test_clausius_clapeyron_near_the_anchor(name):
    """Ten kelvin down from the anchor it is within 2 % of CoolProp."""
    liquid = liquids.every()[name]
    pressure, heat = liquids.vapour_pressure(liquid, K0 + 21), liquids.heat_of_vaporisation(liquid, K0 + 21)
    found = evaporation.clausius_clapeyron(pressure, heat, K0 + 11, K0 + 21)
    assert found == pytest.approx(PropsSI("P", "T", K0 + 11, "Q", 1, liquid.coolprop), rel=0.02)


@pytest.mark.parametrize(("name", "far"), [("ethanol", 0.0), ("water", 900.0), ("acetone", 0.0)])
def test_the_cooled_surface_against_a_diffusion_tube(name, far):
    """A tube of 200 cells: the mole fraction falls from the surface, N = -c D/(1 - x) dx/dz in each; the heat meets it.

    The outer equation, heat of the vapour = conduction and radiation, is solved by bisection (scipy's brentq).
    """
    liquid = liquids.every()[name]
    t, p, path = K0 + 20, 101_325.0, 0.012
    d = evaporation.fuller(t, p, liquid.molar_mass, liquid.volume)
    pv, heat = liquids.vapour_pressure(liquid, t), liquids.heat_of_vaporisation(liquid, t)
    c, cells = p / (8.314462618 * t), 200

    def molar_flux(surface):
        x = pv / p * math.exp(heat / 8.314462618 * (1 / t - 1 / surface))

        def end(flux):
            at = x
            for _ in range(cells):  # midpoint rule through the tube
                half = at - flux * (1 - at) / (c * d) * path / cells / 2
                at -= flux * (1 - half) / (c * d) * path / cells
            return at - far / p

        return optimize.brentq(end, -1.0, 1.0, xtol=1e-14)

    conductivity = PropsSI("L", "T", t, "P", p, "Air")
    transfer = conductivity / path + 4 * 0.95 * 5.670374419e-8 * t**3
    balance = optimize.brentq(lambda s: heat * molar_flux(s) - transfer * (t - s), 230.0, t)
    found = evaporation.surface_temperature(t, p, path, d, pv, heat, far, liquid.molar_mass)
    assert found == pytest.approx(balance, abs=0.03)  # the conductivities of air differ by 0.5 %
    at = evaporation.clausius_clapeyron(pv, heat, found, t)
    flux = evaporation.stefan_flux(d, path, t, p, at, far, liquid.molar_mass)
    assert flux / liquid.molar_mass == pytest.approx(molar_flux(balance), rel=3e-3)
