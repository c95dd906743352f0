"""Heat and electrostatics against published tables and independent numerical solutions."""

from __future__ import annotations

import math

import numpy as np
import pytest
from CoolProp.CoolProp import PropsSI
from scipy import constants, integrate, optimize

from envcorr.laws import electrostatics, heat

EPS0 = constants.epsilon_0


@pytest.mark.parametrize(
    ("mass", "expected"),
    # EURAMET cg-18 v4.0, table F2.1 (from memory), mg at 20, 15, 10, 7, 5, 3, 2, 1 K, printed to 0.01 mg
    [
        (10.0, [26.43, 20.47, 14.30, 10.45, 7.79, 5.01, 3.53, 1.96]),
        (1.0, [3.53, 2.76, 1.96, 1.45, 1.09, 0.72, 0.51, 0.29]),
        (0.5, [1.96, 1.54, 1.09, 0.81, 0.61, 0.40, 0.29, 0.17]),
        (0.1, [0.51, 0.40, 0.29, 0.22, 0.17, 0.11, 0.08, 0.05]),
        (0.05, [0.29, 0.23, 0.17, 0.12, 0.09, 0.06, 0.05, 0.03]),
        (0.02, [0.14, 0.11, 0.08, 0.06, 0.05, 0.03, 0.02, 0.01]),
    ],
)
def test_convection_table(mass, expected):
    found = heat.convection_compact(mass / 8000, np.array([20.0, 15, 10, 7, 5, 3, 2, 1]))
    assert -found * 1e6 == pytest.approx(expected, abs=0.0051)


def test_boundary_layer_re_solved():
    """Ostrach's equations at Pr 0.72, f''' + 3 f f'' - 2 f'² + H = 0, H'' + 3 Pr f H' = 0: f''(0) is 0.676 (his table).

    Shooting on f''(0) and H'(0) with scipy; then the law's shear must be sqrt(2) f''(0) mu nu Gr^(3/4)/x².
    """
    prandtl = 0.72

    def far(guess):
        def slopes(_, y):
            f, f1, f2, h, h1 = y
            return [f1, f2, -3 * f * f2 + 2 * f1**2 - h, h1, -3 * prandtl * f * h1]

        solution = integrate.solve_ivp(slopes, (0, 12), [0, 0, guess[0], 1, guess[1]], rtol=1e-9, atol=1e-11)
        return [solution.y[1, -1], solution.y[3, -1]]

    wall = optimize.fsolve(far, [0.676, -0.505], xtol=1e-10)
    assert wall[0] == pytest.approx(0.676, abs=2e-3)
    assert wall[1] == pytest.approx(-0.5046, abs=2e-3)
    height, warmer, t, p = 0.05, 5.0, 293.15, 101_325.0
    film = t + warmer / 2
    mu, nu = heat.viscosity(film), heat.kinematic_viscosity(film, p)
    grashof = heat.grashof_number(height, warmer, film, p)
    shear = math.sqrt(2) * wall[0] * mu * nu * grashof**0.75 / height**2
    force = math.pi * 0.04 * 0.8 * height * shear
    assert heat.wall_shear_force(height, 0.04, warmer, t, p) == pytest.approx(force, rel=5e-3)


def test_air_properties():
    """Sutherland's formula of ISO 2533 at 293.15 K (1.8134e-5 Pa s), within 1 % of CoolProp's air."""
    assert heat.viscosity(293.15) == pytest.approx(1.8134e-5, rel=2e-3)
    assert heat.viscosity(293.15) == pytest.approx(PropsSI("V", "T", 293.15, "P", 101325, "Air"), rel=0.01)
    nu = PropsSI("V", "T", 293.15, "P", 101325, "Air") / PropsSI("D", "T", 293.15, "P", 101325, "Air")
    assert heat.kinematic_viscosity(293.15, 101_325.0) == pytest.approx(nu, rel=0.01)


def test_convection_grows_with_size_and_warmth():
    warm = np.linspace(0.1, 20, 50)
    assert np.all(np.diff(np.abs(heat.convection_compact(1e-4, warm))) > 0)
    assert np.all(np.diff(np.abs(heat.convection_cylinder(0.05, 0.03, warm, 293.15, 101_325.0))) > 0)
    assert heat.convection_compact(1e-4, 0.0) == 0.0
    cold, hot = (heat.convection_cylinder(0.05, 0.03, d, 293.15, 1e5) for d in (-2.0, 2.0))
    assert cold > 0 > hot


def test_image_charge():
    """1 nC at 10 mm: q²/(16 pi eps0 d²) = 22.469 µN (textbook)."""
    assert electrostatics.point_charge_force(1e-9, 0.01) == pytest.approx(2.246888e-5, rel=1e-6)
    assert electrostatics.point_charge_for_force(2.246888e-5, 0.01) == pytest.approx(1e-9, rel=1e-6)


def test_maxwell_stress():
    """sigma²/(2 eps0) of 26.5 µC/m² is 39.656 Pa; eps0 E²/2 with E = sigma/eps0 is the same (textbook)."""
    assert electrostatics.sheet_pressure(2.65e-5) == pytest.approx(39.656, rel=1e-4)
    assert electrostatics.field_pressure(2.65e-5 / EPS0) == pytest.approx(39.656, rel=1e-4)


@pytest.mark.parametrize(
    ("gap", "force"),
    # sum (n coth n alpha - coth alpha)/sinh n alpha, cosh alpha = 1 + s/a (Smythe), in units of 2 pi eps0 V²
    [
        (0.01, 48.98106095446),
        (0.05, 9.251323991762),
        (0.2, 1.984902106082),
        (2.0, 0.08172990209715),
        (10.0, 0.004536897583754),
    ],
)
def test_sphere_above_a_plane(gap, force):
    a, volts = 0.01, 1000.0
    found = electrostatics.sphere_force_at_potential(a, gap * a, volts)
    assert found == pytest.approx(force * 2 * math.pi * EPS0 * volts**2, rel=1e-8)


@pytest.mark.parametrize(
    ("gap", "capacitance"), [(0.05, 2.467482913461), (5.0, 1.090966955337), (10.0, 1.047623743295)]
)
def test_sphere_capacitance(gap, capacitance):
    """The same series; and image charges iterated one by one: q' = q a/(2h - d), d' = a²/(2h - d)."""
    a = 0.02
    found = electrostatics.sphere_capacitance(a, gap * a) / (4 * math.pi * EPS0 * a)
    assert found == pytest.approx(capacitance, rel=1e-9)
    charge, place, total, h = 1.0, 0.0, 1.0, 1.0 + gap
    for _ in range(500):
        charge, place = charge / (2 * h - place), 1 / (2 * h - place)
        total += charge
    assert found == pytest.approx(total, rel=1e-9)


def test_sphere_with_a_charge():
    """Force at fixed charge: 0.02832387508 in units of Q²/(4 pi eps0 a²) at a gap of two radii (the same series)."""
    found = electrostatics.sphere_force_with_charge(0.01, 0.02, 1e-9)
    assert found == pytest.approx(0.02832387508 * 1e-18 / (4 * math.pi * EPS0 * 0.01**2), rel=1e-8)


def test_sheet_between_plates_by_finite_differences():
    """Laplace's equation on a line: earthed at 0 and H, a sheet of charge at d; field above it by differences."""
    sigma, d, height, cells = 1e-5, 0.04, 0.2, 1000
    step = height / cells
    sheet = round(d / step)
    matrix = np.diag(np.full(cells - 1, -2.0)) + np.diag(np.ones(cells - 2), 1) + np.diag(np.ones(cells - 2), -1)
    source = np.zeros(cells - 1)
    source[sheet - 1] = -sigma / EPS0 * step  # the jump of the field across the sheet
    potential = np.concatenate([[0.0], np.linalg.solve(matrix, source), [0.0]])
    above = (potential[sheet] - potential[-1]) / (height - d)
    assert electrostatics.field_above_sheet(sigma, d, height) == pytest.approx(above, rel=1e-9)
    pull = electrostatics.sheet_under_roof_force(sigma, 20e-4, d, height)
    assert pull == pytest.approx(EPS0 * above**2 / 2 * 20e-4, rel=1e-8)


def test_breakdown():
    """eps0 x 3 MV/m = 26.6 µC/m² on one side, 53.1 on a free sheet (handbook value of the field)."""
    assert electrostatics.breakdown_surface_charge(1) * 1e6 == pytest.approx(26.56, abs=0.01)
    assert electrostatics.breakdown_surface_charge(2) * 1e6 == pytest.approx(53.12, abs=0.02)


def test_decay():
    """tau = eps_r eps0 rho: 3 and 1e12 ohm m are 26.5626 s; a tenth of the charge takes tau ln 10."""
    tau = electrostatics.relaxation_time(3.0, 1e12)
    assert tau == pytest.approx(26.5626, rel=1e-5)
    assert electrostatics.decay_time(100.0, tau) == pytest.approx(61.1627, rel=1e-5)
