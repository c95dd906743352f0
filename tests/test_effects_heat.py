"""Heat through the room check: convection, trapped air, layers, temperature coefficients."""

from __future__ import annotations

import math

import pytest
from CoolProp.CoolProp import HAPropsSI

from envcorr.estimate import Estimate
from envcorr.jobs.room import check_room
from tests.scene import AIR_DENSITY, K0, MG, ROOM, UG, about, normal, row, setup

STEEL_VOLUME = 1 / 8000
VESSEL = {
    "container_mass": 0.03,
    "container_density": 2500.0,
    "container_inner_volume": 1e-4,
    "container_outer_volume": 1.12e-4,
}


def check(**said):
    return check_room(setup(ROOM, said), draws=2**14)


def effect(name, **said):
    return row(check(**said), name)


# Convection ------------------------------------------------------------------------------------------------


@pytest.mark.parametrize(
    ("mass", "warmer", "expected"),
    [(1.0, 5.0, 1.09), (1.0, 20.0, 3.53), (1.0, 1.0, 0.29), (10.0, 20.0, 26.43), (0.05, 5.0, 0.09)],
)
def test_convection_of_steel_weights(mass, warmer, expected):
    """EURAMET cg-18 v4.0, table F2.1 (from memory): mg that a warm weight reads light; printed to 0.01 mg."""
    found = effect("convection", load_mass=mass, load_warmer_by=warmer, load_convection_factor=1.0)
    assert -found.mean_error / MG == pytest.approx(expected, abs=0.0051)


def test_convection_is_odd_and_follows_the_volume():
    """A cold load reads heavy; a load of a tenth of the density has ten times the volume and feels more."""
    warm = effect("convection", load_warmer_by=3.0, load_convection_factor=1.0).mean_error
    cold = effect("convection", load_warmer_by=-3.0, load_convection_factor=1.0).mean_error
    light = effect("convection", load_warmer_by=3.0, load_convection_factor=1.0, load_density=800.0).mean_error
    assert warm < 0
    assert cold == -warm
    assert 10**0.75 < light / warm < 10
    assert effect("convection", load_warmer_by=0.0).mean_error == 0.0


def test_model_factor_is_a_band():
    """Log-uniform from 0.5 to 2 has the mean 1.5/ln 4 = 1.0820 (integral by hand)."""
    exact = effect("convection", load_warmer_by=3.0, load_convection_factor=1.0).mean_error
    banded = effect("convection", load_warmer_by=3.0)
    assert banded.mean_error / exact == pytest.approx(1.5 / math.log(4), rel=2e-3)
    assert banded.correction is None


def test_only_the_outermost_body_feels_it():
    """With a container of 112 cm³, as warm as a steel body of 0.896 kg would be (cg-18's formula by hand)."""
    x = 8000 * 1.12e-4 * 2.0
    expected = -(0.215 * x**0.75 + 0.075 * x) * MG
    found = effect(
        "convection",
        **VESSEL,
        container_warmer_by=2.0,
        tare_container_warmer_by=0.0,
        load_warmer_by=50.0,
        load_convection_factor=1.0,
    )
    assert found.mean_error == pytest.approx(expected, rel=1e-6)


def test_equally_warm_at_the_tare_cancels_and_is_said():
    result = check(**VESSEL, container_warmer_by=2.0)
    assert row(result, "convection").mean_error == 0.0
    assert any("equally warm at the tare" in n.sentence for n in result.notices)
    told = check(**VESSEL, container_warmer_by=2.0, tare_container_warmer_by=0.0)
    assert not any("equally warm at the tare" in n.sentence for n in told.notices)


def test_an_upright_cylinder():
    """A steel weight as high as wide: the shear rule must come near cg-18's compact body (1 kg, 5 K: 1.09 mg)."""
    side = (4 * STEEL_VOLUME / math.pi) ** (1 / 3)
    found = effect(
        "convection",
        load_mass=1.0,
        load_warmer_by=5.0,
        load_height=side,
        load_diameter=side,
        load_convection_factor=1.0,
    )
    assert -found.mean_error / MG == pytest.approx(1.09, rel=0.05)


# Trapped air -----------------------------------------------------------------------------------------------


@pytest.mark.parametrize("warmer", [-3.0, 2.0, 8.0])
def test_trapped_air(warmer):
    """CoolProp's humid air at the same water content; both formulas drift alike, so the difference agrees to 0.1 %."""
    w = HAPropsSI("W", "T", K0 + 20, "P", 101325, "R", 0.5)
    warm, cool = (1 / HAPropsSI("Vha", "T", K0 + 20 + d, "P", 101325, "W", w) for d in (warmer, 0.0))
    said = {"container_warmer_by": warmer, "tare_container_warmer_by": 0.0, "load_volume": 1e-5}
    found = effect("trapped_air", **VESSEL, **said)
    assert found.mean_error == pytest.approx((1e-4 - 1e-5) * (warm - cool), rel=1e-3)
    assert found.correction == pytest.approx(-found.mean_error, rel=1e-9)


def test_trapped_air_of_an_open_vessel_only():
    warm = {**VESSEL, "container_warmer_by": 2.0, "tare_container_warmer_by": 0.0}
    assert "trapped_air" in [e.name for e in check(**warm).effects]
    for closed in ("each time", "kept shut"):
        assert "trapped_air" not in [e.name for e in check(**warm, container_closed=closed).effects]
    all_of_it = effect("trapped_air", **warm).mean_error
    assert effect("trapped_air", **warm, container_air_mixed=0.6).mean_error == pytest.approx(0.4 * all_of_it)


# Other air at the load -------------------------------------------------------------------------------------


def test_warmer_air_at_the_load():
    """rho dT/(T + dT) times the volume (ideal gas): 10 cm³ of steel-grey nothing in air 2 K warmer reads heavy."""
    expected = AIR_DENSITY * 2.0 / (K0 + 22) * 1e-5
    found = effect("stratification", air_warmer_at_load=Estimate(2.0), load_volume=1e-5)
    assert found.mean_error == pytest.approx(expected, rel=1e-6)
    container = effect("stratification", air_warmer_at_load=Estimate(2.0), load_volume=1e-5, **VESSEL)
    assert container.mean_error == pytest.approx(expected, rel=1e-6)  # what does not change cancels
    bound = effect("stratification", air_warmer_at_load=about(0.0, 2.0), load_volume=1e-5)
    assert bound.correction == pytest.approx(0.0, abs=1e-15)
    assert bound.u == pytest.approx(expected / math.sqrt(3), rel=0.02)


def test_sensor_elsewhere_is_said():
    loud = check(air_warmer_at_load=Estimate(2.0))
    assert any("same vapour content" in n.sentence for n in loud.notices)
    quiet = check(air_warmer_at_load=Estimate(0.2))
    assert not any("same vapour content" in n.sentence for n in quiet.notices)


def test_operators_heat():
    """0.5 K in the chamber since the tare, on 10 cm³ of load and 12 cm³ of walls (ideal gas by hand)."""
    said = {"cycle_chamber_warming": Estimate(0.5), "load_volume": 1e-5, **VESSEL}
    expected = AIR_DENSITY * 0.5 / (K0 + 20.5) * (1e-5 + 0.03 / 2500)
    found = effect("operator_heat", **said)
    assert found.mean_error == pytest.approx(expected, rel=1e-6)
    assert found.correction is None


# Temperature coefficients ------------------------------------------------------------------------------------


@pytest.mark.parametrize(("container", "expected"), [(0.12, 54.0), (0.008, 3.6)])
def test_heavy_tare(container, expected):
    """1.5 ppm/K x 0.3 K since taring x the container: 54 µg at 120 g, 3.6 µg at 8 g (by hand; invented scene)."""
    said = {
        "load_mass": 15 * MG,
        "container_mass": container,
        "container_density": 8000.0,
        "cycle_temperature_change": Estimate(0.3),
        "balance_sensitivity_temperature_coefficient": Estimate(1.5e-6),
    }
    found = effect("sensitivity_temperature", **said)
    assert found.mean_error / UG == pytest.approx(expected, rel=1e-6)


def test_since_the_adjustment():
    """kappa (T - T_adj) m: 2 ppm/K, 4 K, 50 g are 0.4 mg (by hand)."""
    said = {"load_mass": 0.05, "balance_sensitivity_temperature_coefficient": Estimate(2e-6)}
    other = {"adjusted_when": None, "adjusted_air_temperature": K0 + 16, "adjusted_air_pressure": 101325.0}
    assert effect("sensitivity_temperature", **said, **other).mean_error == pytest.approx(0.4 * MG, rel=1e-6)
    assert effect("sensitivity_temperature", **said).mean_error == 0.0


def test_a_coefficient_of_unknown_sign_is_a_band():
    """Product of two rectangulars about zero: u = a b m/3; first order sees nothing of it (by hand)."""
    said = {
        "load_mass": 0.05,
        "balance_sensitivity_temperature_coefficient": about(0.0, 2e-6),
        "adjusted_when": None,
        "adjusted_air_temperature": about(K0 + 20, 3.0),
        "adjusted_air_pressure": 101325.0,
    }
    result = check(**said)
    found = row(result, "sensitivity_temperature")
    assert found.u == pytest.approx(2e-6 * 3.0 * 0.05 / 3, rel=0.02)
    assert found.first_order_u == 0.0
    assert "sensitivity_temperature" in result.first_order.blind_to


def test_zero_coefficient():
    """8 µg/K and 0.25 K within the weighing: 2 µg (by hand), from the change or from the tare's own air."""
    coefficient = {"balance_zero_temperature_coefficient": Estimate(8 * UG)}
    change = effect("zero_temperature", **coefficient, cycle_temperature_change=Estimate(0.25))
    assert change.mean_error == pytest.approx(2 * UG, rel=1e-9)
    tare = effect("zero_temperature", **coefficient, tare_air_temperature=K0 + 19.75)
    assert tare.mean_error == pytest.approx(2 * UG, rel=1e-6)
    assert "zero_temperature" in [n.effect.name for n in check(**coefficient).not_assessed]


def test_heavy_container_is_said():
    said = {
        "load_mass": 15 * MG,
        "container_density": 8000.0,
        "cycle_temperature_change": about(0.0, 0.3),
        "balance_sensitivity_temperature_coefficient": about(0.0, 1.5e-6),
        "target_resolution": 20 * UG,
    }
    assert any("lighter container" in n.sentence for n in check(**said, container_mass=0.12).notices)
    assert not any("lighter container" in n.sentence for n in check(**said, container_mass=0.001).notices)


def test_first_order_misses_what_monte_carlo_sees_of_warmth():
    result = check(load_warmer_by=normal(0.0, 1.0), load_convection_factor=1.0)
    assert row(result, "convection").u > 0
    assert row(result, "convection").mean_error == pytest.approx(0.0, abs=1e-3 * row(result, "convection").u)
