"""Sorption kinetics, films and condensation against integrations, handbooks and the balance of a wet bulb."""

import numpy as np
import pytest
from CoolProp.CoolProp import HAPropsSI, PropsSI
from scipy.integrate import solve_ivp
from scipy.optimize import brentq

from envcorr.laws import air, moisture
from tests.scene import K0

P = 101325.0


# Uptake --------------------------------------------------------------------------------------------------------------


@pytest.mark.parametrize(("kept", "room"), [(0.10, 0.45), (0.60, 0.45), (0.45, 0.45)])
@pytest.mark.parametrize("time", [30.0, 120.0, 3600.0, 1e5])
def test_sorption_kinetics(kept, room, time):
    """dw/dt = (S (h - h0) - w)/tau integrated by Runge-Kutta: 5 g, 0.05 kg/kg, 30 min."""
    mass, slope, tau = 5e-3, 0.05, 1800.0
    path = solve_ivp(
        lambda _, w: (mass * slope * (room - kept) - w) / tau,
        (0.0, time),
        [0.0],
        rtol=1e-10,
        atol=1e-18,
        method="DOP853",
    )
    assert moisture.sorbed_mass(mass, slope, room - kept, time, tau) == pytest.approx(
        path.y[0, -1], rel=1e-7, abs=1e-16
    )


def test_sorption_by_hand():
    """5 g x 0.05 x 35 % = 87.5 mg in the end; of it 1 - exp(-1/15) = 6.45 % after 2 of 30 min: 5.64 mg (by hand)."""
    assert moisture.sorbed_mass(5e-3, 0.05, 0.35, 120.0, 1800.0) * 1e6 == pytest.approx(5.64, abs=0.005)
    assert moisture.sorbed_mass(5e-3, 0.05, -0.35, 120.0, 1800.0) < 0
    assert moisture.sorbed_mass(5e-3, 0.05, 0.35, np.array([0.0, 1e9]), 1800.0) == pytest.approx([0.0, 87.5e-6])


def slab(cells=400):
    """Return times and uptake (0..1) of a slab of half-thickness 1 and diffusivity 1, in finite volumes."""
    width = 1 / cells
    matrix = np.zeros((cells, cells))
    for i in range(cells - 1):
        matrix[i, i] -= 1
        matrix[i + 1, i + 1] -= 1
        matrix[i, i + 1] = matrix[i + 1, i] = 1
    matrix[-1, -1] -= 2  # the surface, half a cell away, is at the new humidity
    rates, shapes = np.linalg.eigh(matrix / width**2)
    start = shapes.T @ -np.ones(cells)
    times = np.linspace(1e-4, 1.0, 20001)
    return times, 1 + (shapes.sum(axis=0) * start / cells) @ np.exp(np.outer(rates, times))


def test_one_time_constant_against_diffusion():
    """A slab that diffusion fills, of the same 63 % time: more than twice as fast below a tenth of it, as is said."""
    times, uptake = slab()
    # Crank, The Mathematics of Diffusion, (4.18): 1 - sum of 8/((2n+1)² pi²) exp(-(2n+1)² pi² t/4)
    odd = 2 * np.arange(60) + 1
    crank = 1 - (8 / (odd**2 * np.pi**2) * np.exp(-(odd**2) * np.pi**2 * 0.1 / 4)).sum()
    assert np.interp(0.1, times, uptake) == pytest.approx(crank, abs=1e-4)
    tau = np.interp(1 - np.exp(-1), uptake, times)

    def ratio(share):
        return np.interp(share * tau, times, uptake) / moisture.sorbed_mass(1.0, 1.0, 1.0, share, 1.0)

    assert 2.0 < ratio(0.1) < 2.2
    assert ratio(0.15) < 2.0 < ratio(0.05)
    assert all(0.9 < ratio(share) < 2 for share in (0.2, 0.5, 1.0, 2.0, 5.0))


def test_film():
    """100 cm² x 0.1 µg/cm² x 10 % = 1 µg (by hand)."""
    assert moisture.film_change(100e-4, 1e-6, 0.1) == pytest.approx(1e-9)


# Vapour and its transfer ---------------------------------------------------------------------------------------------


def test_vapour_density():
    """Saturated at 20 °C: 17.31 g/m³ (steam tables); CoolProp's humid air at 50 % gives water per volume."""
    saturated = air.vapour_density(K0 + 20, P, air.saturation_vapour_pressure(K0 + 20) / P)
    assert saturated * 1e3 == pytest.approx(PropsSI("D", "T", K0 + 20, "Q", 1, "Water") * 1e3, rel=2e-3)
    w, volume = (HAPropsSI(name, "T", K0 + 20, "P", P, "R", 0.5) for name in ("W", "Vda"))
    moist = air.vapour_density(K0 + 20, P, air.vapour_fraction_from_humidity(K0 + 20, P, 0.5))
    assert moist == pytest.approx(w / volume, rel=2e-3)


def fuller(temperature, pressure):
    """Return the diffusivity [m²/s] of water in air, after Fuller, Schettler and Giddings.

    Poling, Prausnitz, O'Connell, 5th ed., (11-4.4), diffusion volumes 13.1 and 19.7 (from memory).
    """
    molar = 2 / (1 / 18.015 + 1 / 28.96)
    return 1.43e-7 * temperature**1.75 / (pressure / 1e5 * molar**0.5 * (13.1 ** (1 / 3) + 19.7 ** (1 / 3)) ** 2)


@pytest.mark.parametrize("t", [-40, 0, 25, 40])
def test_diffusivity(t):
    assert moisture.vapour_diffusivity(K0 + t, P) == pytest.approx(fuller(K0 + t, P), rel=0.08)


def test_diffusivity_of_a_handbook():
    """0.26 cm²/s at 298 K and 1 atm: Incropera and DeWitt, table A.8 (from memory); two digits."""
    assert moisture.vapour_diffusivity(298.0, P) == pytest.approx(0.26e-4, rel=0.05)
    assert moisture.vapour_diffusivity(298.0, P / 2) == pytest.approx(2 * moisture.vapour_diffusivity(298.0, P))


@pytest.mark.parametrize("t", [0, 20, 40])
def test_lewis_number(t):
    """Conductivity and heat capacity of dry air from CoolProp, the diffusivity by Fuller."""
    conductivity, heat, density = (PropsSI(name, "T", K0 + t, "P", P, "Air") for name in ("L", "C", "D"))
    expected = conductivity / (density * heat) / fuller(K0 + t, P)
    assert moisture.lewis_number(K0 + t, P) == pytest.approx(expected, rel=0.06)
    assert 0.8 < moisture.lewis_number(K0 + t, P) < 1.0


@pytest.mark.parametrize(("t", "humidity"), [(20, 0.2), (20, 0.5), (20, 0.9), (25, 0.4), (30, 0.6)])
def test_balance_of_a_wet_bulb(t, humidity):
    """The heat that flows to a wet surface evaporates its water; CoolProp's wet bulb, within 8 % of the depression.

    CoolProp's is that of adiabatic saturation, where Le^(2/3) stands for 1; here it is 0.92.
    """
    state = ("T", K0 + t, "P", P, "R", humidity)
    fraction = air.vapour_fraction_from_humidity(K0 + t, P, humidity)
    heat = 20.0  # W/(m² K): drops out, as the psychrometer needs

    def surplus(surface):
        latent = PropsSI("H", "T", surface, "Q", 1, "Water") - PropsSI("H", "T", surface, "Q", 0, "Water")
        mean = (surface + K0 + t) / 2
        excess = air.vapour_density(mean, P, air.vapour_fraction_from_dew_point(P, surface) - fraction)
        return heat * (K0 + t - surface) - latent * moisture.mass_transfer_coefficient(heat, mean, P) * excess

    bulb = brentq(surplus, K0 - 10, K0 + t)
    assert K0 + t - bulb == pytest.approx(K0 + t - HAPropsSI("Twb", *state), rel=0.08)


# Condensation --------------------------------------------------------------------------------------------------------


def flux(t, humidity, warmer, height=0.04):
    fraction = air.vapour_fraction_from_humidity(K0 + t, P, humidity)
    return moisture.condensation_flux(height, warmer, K0 + t, P, fraction)


def test_condensation_by_hand():
    """A wall of 40 mm at 4 °C in air of 22 °C and 50 %: about 2 µg/cm² in a second.

    Laminar wall, Nu = 0.59 Ra^(1/4) (Incropera and DeWitt, (9.24), a rougher rule than Churchill's): Ra = g dT/T
    H³/(nu alpha), 9.81 x 18/286 x 6.4e-5/(1.44e-5 x 2.03e-5) = 1.35e5, Nu = 11.3, h = 11.3 x 0.0253/0.04 = 7.2;
    7.2/(1.23 x 1006) x 0.87^(-2/3) = 6.4 mm/s. Vapour pressures 13.2 and 8.1 hPa at 13 °C are 10.0 and
    6.2 g/m³ (ideal gas), so that 2.4 µg/(cm² s) condense.
    """
    assert flux(22, 0.5, -18.0) * 1e5 == pytest.approx(2.4, rel=0.15)


def test_condensation_begins_at_the_dew_point():
    dew_point = HAPropsSI("D", "T", K0 + 22, "P", P, "R", 0.5)
    assert flux(22, 0.5, dew_point - (K0 + 22) + 0.01) == 0.0
    assert flux(22, 0.5, dew_point - (K0 + 22) - 0.01) > 0.0
    assert flux(22, 0.5, np.array([0.0, 5.0, 300.0])) == pytest.approx([0.0, 0.0, 0.0], abs=0)
    assert flux(22, 0.0, -10.0) == 0.0


def test_colder_gathers_more():
    found = flux(22, 0.5, -np.array([11.0, 18.0, 40.0, 100.0, 218.0]))
    assert np.all(np.diff(found) > 0)
    assert np.isfinite(flux(22, 0.5, np.array([-290.0, -400.0]))).all()  # far draws of a wide spread


def test_against_convection_at_the_whole_range_of_heights():
    """Per degree of difference the flux follows h, so from 0.4 to 40 mm it falls by less than 100^(1/2)."""
    small, large = flux(22, 0.5, -18.0, height=4e-4), flux(22, 0.5, -18.0, height=0.04)
    assert 100**0.25 < small / large < 100**0.75
