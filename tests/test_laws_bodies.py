"""Buoyancy, water, tilt and gravity against published values."""

from __future__ import annotations

import math

import numpy as np
import pytest
from CoolProp.CoolProp import PropsSI
from iapws import IAPWS95

from envcorr.laws import buoyancy, gravity, tilt, water

K0 = 273.15


def test_adjustment_factor():
    """A weight of 8000 kg/m³ adjusted in air of 1.2 kg/m³: K = 1 - 1.2/8000 (OIML D 28:2004)."""
    assert buoyancy.adjustment_factor(8000.0, 1.2) == pytest.approx(1 - 1.2 / 8000, rel=1e-15)
    # another density keeps the conventional mass: in 1.2 kg/m³ nothing changes
    assert buoyancy.adjustment_factor(7950.0, 1.2) == pytest.approx(1 - 1.2 / 8000, rel=1e-15)


@pytest.mark.parametrize(
    ("density", "expected"),
    [(21_500.0, 1000.0942002), (998.2067, 998.9476863)],  # OIML D 28, of 1000 g, in exact arithmetic
)
def test_conventional_mass(density, expected):
    found = buoyancy.conventional_mass(1.0, 1.0 / density)
    assert found * 1e3 == pytest.approx(expected, abs=1e-7)
    assert buoyancy.mass_from_conventional(found, 1.0 / density) == pytest.approx(1.0, rel=1e-14)


@pytest.mark.parametrize(
    ("test", "expected"),
    # OIML R 111-1:2004, 10.2.1-1: (rho_a - 1.2)(1/rho_t - 1/rho_r) at 1.1 kg/m³ against 8000
    [(7950.0, -7.86164e-8), (8400.0, 5.952381e-7)],
)
def test_comparison(test, expected):
    assert buoyancy.comparison_correction(1.1, test, 8000.0) == pytest.approx(expected, rel=1e-5)


@pytest.mark.parametrize(
    ("error", "low", "high"),
    # OIML R 111-1:2004, table 5 (100 g and more; from memory), rounded there: E1, E2, F1, F2; and M2's lower limit
    [(5e-7, 7934, 8067), (1.5e-6, 7810, 8210), (5e-6, 7390, 8730), (1.5e-5, 6400, 10_700), (1.5e-4, 2300, None)],
    ids=["E1", "E2", "F1", "F2", "M2"],
)
def test_density_limits(error, low, high):
    """Air 10 % off 1.2 kg/m³ may take a quarter of the maximum permissible error: solved for the density."""
    ends = []
    for bound in (low, high):
        if bound is None:
            continue
        found = abs(buoyancy.comparison_correction(1.2 * 1.1, float(bound), 8000.0))
        ends.append(found / (error / 4))
    assert ends == pytest.approx([1.0] * len(ends), rel=0.07)


def test_foam():
    """All closed: the envelope; all open: the solid; between: linear (volumes by hand)."""
    envelope, solid = 1e-3 / 32, 1e-3 / 1050
    for share in (0.0, 0.1, 1.0):
        found = buoyancy.displaced_volume_of_foam(1e-3, 32.0, share, 1050.0)
        assert found == pytest.approx(envelope - share * (envelope - solid), rel=1e-14)
    # ISO 4590 counts the open share of the geometric volume: 9.695 % of it is 10 % of the gas
    gas_share = 1 - 32 / 1050
    assert buoyancy.open_share_of_gas(0.1 * gas_share, 32.0, 1050.0) == pytest.approx(0.1, rel=1e-12)


def test_density_from_an_uncorrected_weighing():
    """A body of true density 100 weighed in air of 1.2: reads m (1 - 1.2/100)/K; K rho' + 1.2 is 100 again."""
    k = 1 - 1.2 / 8000
    apparent = 100 * (1 - 1.2 / 100) / k
    assert buoyancy.density_from_uncorrected(apparent, 1.2, k) == pytest.approx(100.0, rel=1e-14)


@pytest.mark.parametrize(
    ("t", "expected"),
    # Tanaka et al., Metrologia 38 (2001) 301, table (from memory); 18 °C from the formula in exact arithmetic
    [(4, 999.9749), (5, 999.9668), (20, 998.2067), (35, 994.0326), (40, 992.2152), (18, 998.59836)],
)
def test_tanaka(t, expected):
    assert water.air_free_density(K0 + t) == pytest.approx(expected, abs=1e-4)


def test_tanaka_maximum():
    """The same: largest density 999.97495 kg/m³ at 3.983035 °C."""
    t = np.linspace(3.9, 4.1, 20_001)
    assert t[np.argmax(water.air_free_density(K0 + t))] == pytest.approx(3.983035, abs=2e-4)
    assert np.max(water.air_free_density(K0 + t)) == pytest.approx(999.97495, abs=1e-6)


@pytest.mark.parametrize(
    ("t", "departure"), [(4, -8e-8), (10, -2.3e-7), (20, 4.1e-7), (25, 6.2e-7), (30, 6.6e-7), (40, 1.15e-6)]
)
def test_tanaka_against_iapws95(t, departure):
    """IAPWS-95 by two libraries; Tanaka's own u is 0.8e-6 to 0.9e-6."""
    ours = water.air_free_density(K0 + t)
    assert IAPWS95(T=K0 + t, P=0.101325).rho / ours - 1 == pytest.approx(departure, abs=5e-8)
    assert PropsSI("D", "T", K0 + t, "P", 101325, "Water") / ours - 1 == pytest.approx(departure, abs=5e-8)


def test_dissolved_air():
    """Tanaka 2001: -4.612e-3 + 0.106e-3 t kg/m³ for air-saturated water; -2.49e-3 at 20 °C (from memory)."""
    assert water.dissolved_air_change(K0 + 20) == pytest.approx(-0.002492, abs=1e-6)


@pytest.mark.parametrize(
    ("t", "p", "expected"),
    # ISO 8655-6:2002, table A.1, printed to 1e-4 µL/mg (12 of its 186 cells are one digit off the formula)
    [(15, 1013, 1.0020), (20, 1013, 1.0029), (20, 1067, 1.0029), (22, 1013, 1.0033), (25, 800, 1.0038)],
)
def test_z_factor(t, p, expected):
    from envcorr.laws import air

    fraction = air.vapour_fraction_from_humidity(K0 + t, p * 100.0, 0.5)
    rho = air.density_cipm(K0 + t, p * 100.0, fraction, 4e-4)
    assert water.z_factor(water.air_free_density(K0 + t), rho, 8000.0) * 1e3 == pytest.approx(expected, abs=6e-5)


@pytest.mark.parametrize(("theta", "loss"), [(math.radians(0.1), 1.52308671e-6), (5 * math.pi / 10800, 1.05769919e-6)])
def test_cosine(theta, loss):
    """1 - cos by its series in exact arithmetic: 0.1° and 5 arcmin."""
    assert tilt.loss(theta) == pytest.approx(loss, rel=1e-8)
    assert 1 - tilt.cosine(theta, 0.0) == pytest.approx(loss, rel=1e-8)
    assert tilt.angle_of_loss(tilt.loss(theta)) == pytest.approx(theta, rel=1e-12)


def test_two_axes_against_rotations():
    """The axis turned about x, then the base read by two levels along x and y: cos from the rotation matrix."""
    a, b = 0.02, -0.035
    # the plane z = x tan a + y tan b has the unit normal n; cos theta is its vertical part
    n = np.cross([1, 0, math.tan(a)], [0, 1, math.tan(b)])
    n = n / np.linalg.norm(n)
    assert tilt.cosine(a, b) == pytest.approx(n[2], rel=1e-14)
    assert tilt.combined_angle(a, b) == pytest.approx(math.acos(n[2]), rel=1e-10)


def test_relative_shift_without_cancellation():
    """cos B/cos A - 1 = -2 sin((B+A)/2) sin((B-A)/2)/cos A (trigonometric identity), for shifts down to 1e-17."""
    for first, second in ((0.0, 1e-8), (0.01, 0.0100001), (0.005, -0.005), (0.3, 0.31)):
        identity = -2 * math.sin((second + first) / 2) * math.sin((second - first) / 2) / math.cos(first)
        assert tilt.relative_shift(first, 0.0, second, 0.0) == pytest.approx(identity, rel=1e-9, abs=1e-24)


@pytest.mark.parametrize(
    ("latitude", "expected"),
    # Moritz, J. Geodesy 74 (2000) 128: GRS80
    [(0, 9.7803267715), (45, 9.8061992025), (90, 9.8321863685)],
)
def test_normal_gravity(latitude, expected):
    assert gravity.normal_gravity(math.radians(latitude)) == pytest.approx(expected, abs=5e-10)


@pytest.mark.parametrize(
    ("latitude", "height", "expected", "tolerance"),
    [
        (39.133, 130, 9.801018, 6e-4),  # NBS Gaithersburg, Tate 1966
        (52.295, 79, 9.81252, 4e-4),  # Braunschweig, published site value (from memory)
        (40, 1638, 9.796, 1.2e-3),  # Denver, handbook table of whole degrees
    ],
)
def test_gravity_of_places(latitude, height, expected, tolerance):
    assert gravity.normal_gravity(math.radians(latitude), height) == pytest.approx(expected, abs=tolerance)
