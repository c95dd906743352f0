"""Moist air: CIPM-2007 to its digits, and against CoolProp, IAPWS and the OIML approximation."""

from __future__ import annotations

import math

import GTC
import numpy as np
import pytest
from CoolProp.CoolProp import HAPropsSI, PropsSI
from hypothesis import given, settings
from hypothesis import strategies as st
from iapws.humidAir import HumidAir

from envcorr.laws import air, atmosphere
from tests.scene import cipm_2007

K0 = 273.15


def cipm(t, p, h, x=4e-4):
    return air.density_cipm(K0 + t, p, air.vapour_fraction_from_humidity(K0 + t, p, h), x)


@pytest.mark.parametrize(
    ("t", "p", "h", "expected"),
    # Picard et al., Metrologia 45 (2008) 149, with the paper's constants in 40-digit arithmetic
    [
        (20, 101_325, 0.5, 1.1993138955),
        (27, 101_325, 0.5, 1.1685781149),
        (20, 100_000, 0.5, 1.1835566087),
    ],
)
def test_cipm_points(t, p, h, expected):
    assert cipm(t, p, h) == pytest.approx(expected, abs=1e-9)


def test_cipm_parts():
    """The same source: psv, enhancement factor, compressibility and vapour content at 20 °C, 101 325 Pa, 50 %."""
    fraction = air.vapour_fraction_from_humidity(K0 + 20, 101_325.0, 0.5)
    assert air.saturation_vapour_pressure(K0 + 20) == pytest.approx(2339.1632, abs=1e-3)
    assert air.enhancement_factor(K0 + 20, 101_325.0) == pytest.approx(1.0040256, abs=1e-7)
    assert air.compressibility(K0 + 20, 101_325.0, fraction) == pytest.approx(0.99961477, abs=1e-8)
    assert fraction == pytest.approx(0.011589340, abs=1e-9)


def test_cipm_simplified_form():
    """rho = (3.483740 + 1.4446 (x - 0.0004)) p/(Z T) (1 - 0.3780 xv) g/m³, as the paper prints it (from memory)."""
    for x in (4e-4, 8e-4):
        fraction = air.vapour_fraction_from_humidity(K0 + 21, 99_000.0, 0.4)
        z = air.compressibility(K0 + 21, 99_000.0, fraction)
        printed = (3.483740 + 1.4446 * (x - 4e-4)) * 1e-3 * 99_000 / (z * (K0 + 21)) * (1 - 0.3780 * fraction)
        assert air.density_cipm(K0 + 21, 99_000.0, fraction, x) == pytest.approx(printed, rel=2e-6)


def test_sensitivities():
    """OIML R 111-1, C.6.3.6 prints 1e-5 per Pa, -3.4e-3 per K (at constant dew point); CIPM-2007 +0.4 of CO2."""
    rho = cipm(20, 101_325, 0.5)
    assert (cipm(20, 101_425, 0.5) - cipm(20, 101_225, 0.5)) / 200 / rho == pytest.approx(9.916e-6, rel=2e-4)
    assert (cipm(20.1, 101_325, 0.5) - cipm(19.9, 101_325, 0.5)) / 0.2 / rho == pytest.approx(-3.6918e-3, rel=2e-4)
    assert (cipm(20, 101_325, 0.5, 5e-4) - rho) / 1e-4 / rho == pytest.approx(0.41166, rel=2e-4)
    fraction = air.vapour_fraction_from_dew_point(101_325.0, K0 + 9.275908)
    warm, cold = (air.density_cipm(K0 + t, 101_325.0, fraction, 4e-4) for t in (20.1, 19.9))
    assert (warm - cold) / 0.2 / rho == pytest.approx(-3.4213e-3, rel=2e-4)


@pytest.mark.parametrize(
    ("t", "p", "h"), [(20, 101_325, 0.5), (15, 101_325, 0.5), (27, 101_325, 0.5), (20, 110_000, 0.5)]
)
def test_against_coolprop(t, p, h):
    """CoolProp's humid air lies 3.8e-5 above: molar mass 28.966 for 28.96546 g/mol (+1.9e-5), second virial (+2e-5)."""
    assert air.density_coolprop(K0 + t, p, humidity=h) / cipm(t, p, h) - 1 == pytest.approx(3.8e-5, abs=6e-6)
    assert air.density_coolprop(K0 + t, p, humidity=h) == pytest.approx(
        1 / HAPropsSI("Vha", "T", K0 + t, "P", p, "R", h)
    )


@pytest.mark.parametrize(
    ("t", "p", "fraction", "expected"),
    [(20, 101_325, 0.01158934, 1.58e-5), (15, 60_000, 0.005700517, 0.72e-5), (27, 110_000, 0.026064947, 1.93e-5)],
)
def test_against_iapws(t, p, fraction, expected):
    """IAPWS humid air (SEA-Air, G8-10) at the same vapour content: within the formula's own u of 2.2e-5."""
    reference = HumidAir(T=K0 + t, P=p / 1e6, xw=fraction).rho
    ours = air.density_cipm(K0 + t, float(p), fraction, 4e-4)
    assert reference / ours - 1 == pytest.approx(expected, abs=1e-6)


def test_slopes():
    """The derivatives against GTC's, of the formula as typed from the paper (automatic differentiation)."""
    inputs = {"temperature": K0 + 22.3, "pressure": 97_200.0, "humidity": 0.43, "co2": 6e-4}
    uncertain = [GTC.ureal(value, 1.0) for value in inputs.values()]
    whole = cipm_2007(*uncertain, GTC.exp)
    t, p, h, x = inputs.values()
    fraction = air.vapour_fraction_from_humidity(t, p, h)
    by_t, by_p, by_x, by_co2 = air.density_cipm_slopes(t, p, fraction, x)
    x_t, x_p, x_h = air.vapour_fraction_slopes(t, p, h)
    for one, slope in zip(uncertain, (by_t + by_x * x_t, by_p + by_x * x_p, by_x * x_h, by_co2), strict=True):
        assert slope == pytest.approx(GTC.reporting.sensitivity(whole, one), rel=1e-10)


def test_saturation_against_iapws95():
    """CIPM's psv at 27 °C lies 4.9e-5 below IAPWS-95 (CoolProp's water)."""
    assert air.saturation_vapour_pressure(K0 + 27) / PropsSI("P", "T", K0 + 27, "Q", 0, "Water") - 1 == pytest.approx(
        -4.89e-5, abs=1e-6
    )


@pytest.mark.parametrize(
    ("p", "t", "h", "expected"),
    # OIML R 111-1:2004, (E.3-1), in exact arithmetic
    [(95_000, 22.5, 0.45, 1.114352083), (110_000, 27, 0.80, 1.264668348)],
)
def test_oiml_points(p, t, h, expected):
    assert air.density_oiml(K0 + t, p, h) == pytest.approx(expected, abs=1e-8)


def test_oiml_departure():
    """Over its range it departs from CIPM-2007 by 2.9e-4 at most (OIML states 2e-4 against CIPM-81/91)."""
    p, t, h = np.meshgrid(np.linspace(9e4, 11e4, 21), np.linspace(10, 30, 21), np.linspace(0, 0.8, 17))
    departure = air.density_oiml(K0 + t, p, h) / cipm(t, p, h) - 1
    assert np.max(np.abs(departure)) == pytest.approx(2.9e-4, abs=3e-6)


@pytest.mark.parametrize(("t", "depression", "p"), [(20, 5, 101_325), (25, 8, 95_000), (18, 2, 85_000)])
def test_wet_bulb_against_coolprop(t, depression, p):
    """The psychrometric equation holds for an aspirated wet bulb; the thermodynamic one lies within 1 % RH of it."""
    fraction = air.vapour_fraction_from_wet_bulb(K0 + t, float(p), K0 + t - depression)
    humidity = air.humidity_from_vapour_fraction(K0 + t, float(p), fraction)
    assert humidity == pytest.approx(HAPropsSI("R", "T", K0 + t, "P", p, "B", K0 + t - depression), abs=0.01)


@settings(max_examples=50, deadline=None)
@given(t=st.floats(10, 30), p=st.floats(7e4, 1.1e5), h=st.floats(0.02, 1.0))
def test_dew_point_there_and_back(t, p, h):
    fraction = air.vapour_fraction_from_humidity(K0 + t, p, h)
    dew_point = air.dew_point_from_vapour_fraction(p, fraction)
    assert air.vapour_fraction_from_dew_point(p, dew_point) == pytest.approx(fraction, rel=1e-10)
    assert dew_point <= K0 + t + 1e-6
    assert air.humidity_from_vapour_fraction(K0 + t, p, fraction) == pytest.approx(h, rel=1e-12)


def test_columns_equal_scalars():
    random = np.random.default_rng(3)
    t, p, h = K0 + random.uniform(15, 27, 1000), random.uniform(8e4, 1.1e5, 1000), random.uniform(0.1, 0.9, 1000)
    column = air.density_cipm_column(t, p, h, 4e-4, block=64)
    for i in (0, 63, 64, 999):
        one = air.density_cipm(t[i], p[i], air.vapour_fraction_from_humidity(t[i], p[i], h[i]), 4e-4)
        assert column[i] == pytest.approx(one, rel=1e-15)


def test_ranges():
    """CIPM-2007, section 3: 600 to 1100 hPa, 15 to 27 °C; OIML R 111-1, E.3: 900 to 1100 hPa, 10 to 30 °C, 80 %."""
    assert not air.outside_cipm_range(K0 + 15, 60_000.0)
    assert air.outside_cipm_range(K0 + 14.9, 60_000.0)
    assert air.outside_cipm_range(K0 + 20, 111_000.0)
    assert not air.outside_oiml_range(K0 + 30, 90_000.0, 0.8)
    assert air.outside_oiml_range(K0 + 30, 90_000.0, 0.81)


@pytest.mark.parametrize(("height", "expected"), [(500, 95_461), (1000, 89_874.6), (5000, 54_019.9)])
def test_standard_atmosphere(height, expected):
    """ISO 2533:1975, table: pressure at a geopotential altitude."""
    radius = 6_356_766.0  # m, ISO 2533, 2.3
    assert atmosphere.pressure_at_altitude(radius * height / (radius - height)) == pytest.approx(expected, abs=0.6)


@pytest.mark.parametrize(("hpa", "height"), [(800, 1949), (700, 3012), (600, 4206)])
def test_altitude_of_a_pressure(hpa, height):
    """ICAO standard atmosphere (1964), rounded to a metre of geopotential altitude."""
    found = atmosphere.geopotential_altitude(atmosphere.altitude_at_pressure(hpa * 100.0))
    assert found == pytest.approx(height, abs=0.6)


def test_reduction_there_and_back():
    station = atmosphere.station_pressure(101_520.0, 620.0)
    assert station / 101_520 == pytest.approx(0.92865, abs=2e-4)  # ISO 2533: (1 - 0.0065 h/288.15)^5.2559
    assert atmosphere.sea_level_pressure(station, 620.0) == pytest.approx(101_520.0, rel=1e-12)


@pytest.mark.parametrize(("height", "expected"), [(330, 1.154863), (1000, 1.068377)])
def test_mean_density(height, expected):
    """OIML R 111-1:2004, 10.2.1: 1.2 exp(-1.2 x 9.81 h/101325)."""
    assert atmosphere.density_at_altitude(height) == pytest.approx(expected, abs=2e-6)
    assert expected == pytest.approx(1.2 * math.exp(-1.2 * 9.81 * height / 101_325), abs=1e-6)
