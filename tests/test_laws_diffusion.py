"""Diffusion and evaporation against textbooks, handbooks, CoolProp and a tube of finite volumes."""

from __future__ import annotations

import math

import numpy as np
import pytest
from CoolProp.CoolProp import PropsSI
from scipy import optimize

from envcorr import liquids
from envcorr.errors import NotComputedError
from envcorr.laws import evaporation
from envcorr.laws.cooling import thermal_conductivity

K0, ATM = 273.15, 101_325.0
MMHG = 133.322
R, SIGMA = 8.314462618, 5.670374419e-8
KNOWN = liquids.every()
IN_COOLPROP = [name for name, one in KNOWN.items() if one.coolprop]


def diffusivity(name, t, p=ATM):
    return evaporation.fuller(t, p, KNOWN[name].molar_mass, KNOWN[name].volume)


def cooled(name, t, p, path, far=0.0):
    """Return the temperature [K] that the surface comes to, and the flux [mol/(m² s)] that leaves it then."""
    pv, heat = liquids.vapour_pressure(KNOWN[name], t), liquids.heat_of_vaporisation(KNOWN[name], t)
    d = diffusivity(name, t, p)
    surface = evaporation.surface_temperature(t, p, path, d, pv, heat, far)
    at = evaporation.clausius_clapeyron(pv, heat, surface, t)
    return surface, evaporation.stefan_flux(d, path, t, p, at, far, 1.0)


# Diffusivity -------------------------------------------------------------------------------------------------


@pytest.mark.parametrize(
    ("name", "t", "measured", "within"),
    # cm²/s in air at 1 atm; handbook values as in Poling et al., table 11-2, and Perry (from memory)
    [
        ("water", 40.0, 0.288, 0.06),
        ("ethanol", 0.0, 0.102, 0.05),
        ("ethanol", 25.0, 0.119, 0.05),
        ("toluene", 25.9, 0.086, 0.09),
        ("acetone", 0.0, 0.109, 0.18),  # the rule's worst here
    ],
)
def test_diffusivities(name, t, measured, within):
    assert diffusivity(name, K0 + t) * 1e4 == pytest.approx(measured, rel=within)


# atoms of each liquid (chemistry), and the increments of Poling et al., 5th ed., table 11-1 (from memory)
INCREMENTS = {"C": 15.9, "H": 2.31, "N": 4.54, "O": 6.11, "Cl": 21.0, "ring": -18.3}
ATOMIC_MASSES = {"C": 12.011, "H": 1.008, "N": 14.007, "O": 15.999, "Cl": 35.45, "ring": 0.0}  # IUPAC 2021, abridged
FORMULAS = {
    "ethanol": {"C": 2, "H": 6, "O": 1},
    "methanol": {"C": 1, "H": 4, "O": 1},
    "isopropanol": {"C": 3, "H": 8, "O": 1},
    "acetone": {"C": 3, "H": 6, "O": 1},
    "ethyl-acetate": {"C": 4, "H": 8, "O": 2},
    "diethyl-ether": {"C": 4, "H": 10, "O": 1},
    "tetrahydrofuran": {"C": 4, "H": 8, "O": 1, "ring": 1},
    "pentane": {"C": 5, "H": 12},
    "hexane": {"C": 6, "H": 14},
    "heptane": {"C": 7, "H": 16},
    "cyclohexane": {"C": 6, "H": 12},
    "toluene": {"C": 7, "H": 8, "ring": 1},
    "dichloromethane": {"C": 1, "H": 2, "Cl": 2},
    "chloroform": {"C": 1, "H": 1, "Cl": 3},
}


def test_constants_follow_from_the_formulas():
    assert set(FORMULAS) == set(KNOWN) - {"water"}
    for name, atoms in FORMULAS.items():
        volume, mass = (sum(n * table[atom] for atom, n in atoms.items()) for table in (INCREMENTS, ATOMIC_MASSES))
        assert KNOWN[name].volume == pytest.approx(volume, abs=1e-9), name
        assert KNOWN[name].molar_mass * 1e3 == pytest.approx(mass, rel=1e-4), name


# Stefan's flow ---------------------------------------------------------------------------------------------


def test_stefan_tube():
    """Bird, Stewart, Lightfoot, 18.2: CCl4 in O2, 17.1 cm, 755 and 33 mmHg, 0.82 cm², 0.0208 cm³ in 10 h: 0.0628 cm²/s.

    With a density of 1590 kg/m³, 0 °C; the flux of that diffusivity is what was lost.
    """
    lost = 0.0208e-6 * 1590 / 36_000 / 0.82e-4
    flux = evaporation.stefan_flux(0.0628e-4, 0.171, K0, 755 * MMHG, 33 * MMHG, 0.0, 0.15382)
    assert flux == pytest.approx(lost, rel=5e-3)


def test_little_vapour_is_plain_diffusion():
    """D M dp/(R T L), Fick's law: at 1e-9 of the pressure the logarithm's first order is exact to 1e-9."""
    flux = evaporation.stefan_flux(2e-5, 0.01, 300.0, ATM, 1e-9 * ATM, 0.0, 0.02)
    assert flux == pytest.approx(2e-5 * 0.02 * 1e-9 * ATM / (R * 300 * 0.01), rel=2e-9)


def test_a_brimful_dish():
    """Water at 20 °C and 50 %, 20 mm across, 1 mm below the rim: 460 µg/min of an isothermal surface, not 4070."""
    pv = liquids.vapour_pressure(KNOWN["water"], K0 + 20)
    through, straight = (
        evaporation.stefan_flux(diffusivity("water", K0 + 20), path, K0 + 20, ATM, pv, pv / 2, 0.018015)
        * math.pi
        * 0.01**2
        * 60e9
        for path in (evaporation.diffusion_path(1e-3, 20e-3), 1e-3)
    )
    assert through == pytest.approx(460, rel=0.02)
    assert straight == pytest.approx(4070, rel=0.02)


@pytest.mark.parametrize("pressure", [np.array([2e4, ATM]), ATM])
def test_what_boils_is_refused(pressure):
    with pytest.raises(NotComputedError, match="boils"):
        evaporation.stefan_flux(1e-5, 0.01, 300.0, pressure, ATM, 0.0, 0.05)


@pytest.mark.parametrize(
    ("name", "low", "high"),
    [("diethyl-ether", 0.1, 3.0), ("pentane", 0.1, 3.0), ("dichloromethane", 0.1, 3.0), ("acetone", 0.05, 2.0)],
)
def test_a_very_volatile_solvent_loses_milligrams_within_seconds(name, low, high):
    """Common practice, no source: a gram or so in an open dish of 5 cm loses about a milligram every second or few."""
    t, path = K0 + 22, evaporation.diffusion_path(2e-3, 0.05)
    pv = liquids.vapour_pressure(KNOWN[name], t)
    poured = evaporation.stefan_flux(diffusivity(name, t), path, t, ATM, pv, 0.0, 1.0)
    for flux in (poured, cooled(name, t, ATM, path)[1]):
        assert low < flux * KNOWN[name].molar_mass * math.pi * 0.025**2 * 1e6 < high  # mg/s


# Vapour pressures --------------------------------------------------------------------------------------------

# log10(p/mmHg) = A - B/(C + t/°C), from constants for bar and kelvin: Poling, Prausnitz, O'Connell, The Properties of
# Gases and Liquids, 5th ed., appendix A
ANTOINE = {
    "water": (7.99074, 1687.537, 230.17),
    "ethanol": (8.21185, 1648.22, 230.918),
    "methanol": (8.07787, 1580.08, 239.5),
    "acetone": (7.0935, 1197.01, 228.06),
    "diethyl-ether": (6.98472, 1090.64, 231.2),
    "pentane": (6.85296, 1064.84, 232.014),
    "hexane": (6.87649, 1170.875, 224.317),
    "heptane": (6.89533, 1263.909, 216.432),
    "cyclohexane": (6.80512, 1182.774, 220.618),
    "toluene": (6.92553, 1327.62, 217.625),
}


@pytest.mark.parametrize("name", IN_COOLPROP)
@pytest.mark.parametrize("t", [15.0, 20.0, 25.0, 30.0])
def test_vapour_pressures_against_antoine(name, t):
    a, b, c = ANTOINE[name]
    assert liquids.vapour_pressure(KNOWN[name], K0 + t) == pytest.approx(MMHG * 10 ** (a - b / (c + t)), rel=0.01)


@pytest.mark.parametrize(
    ("name", "kpa"),
    # at 20 °C, kPa: common safety data sheets (from memory)
    [
        ("isopropanol", 4.4),
        ("dichloromethane", 47.4),
        ("ethyl-acetate", 9.8),
        ("tetrahydrofuran", 17.3),
        ("chloroform", 21.1),
    ],
)
def test_liquids_without_an_equation_of_state(name, kpa):
    assert liquids.vapour_pressure(KNOWN[name], K0 + 20) == pytest.approx(1e3 * kpa, rel=0.03)


@pytest.mark.parametrize("name", KNOWN)
def test_heat_of_vaporisation_against_the_slope(name):
    """Clausius and Clapeyron: heat = R T² d ln p/dT for an ideal vapour, which lies within 6 % here."""
    t, step = K0 + 25, 0.1
    high, low = (liquids.vapour_pressure(KNOWN[name], t + d) for d in (step, -step))
    slope = R * t**2 * math.log(high / low) / (2 * step)
    assert liquids.heat_of_vaporisation(KNOWN[name], t) == pytest.approx(slope, rel=0.06)


@pytest.mark.parametrize("name", IN_COOLPROP)
def test_clausius_clapeyron_near_the_anchor(name):
    """Ten kelvin down from the anchor it is within 2 % of CoolProp."""
    pressure, heat = liquids.vapour_pressure(KNOWN[name], K0 + 21), liquids.heat_of_vaporisation(KNOWN[name], K0 + 21)
    found = evaporation.clausius_clapeyron(pressure, heat, K0 + 11, K0 + 21)
    assert found == pytest.approx(PropsSI("P", "T", K0 + 11, "Q", 1, KNOWN[name].coolprop), rel=0.02)


def test_no_vapour_pressure_is_said():
    with pytest.raises(NotComputedError, match="no vapour pressure of water at -63"):
        liquids.vapour_pressure(KNOWN["water"], 210.0)


# The surface that cools ----------------------------------------------------------------------------------------


def tube(name, t, p, path, far, cells=60):
    """Return the surface's temperature [K] and the flux [mol/(m² s)] of a tube of finite volumes.

    Mole fraction and temperature in each cell, all properties at their own place: diffusivity (Fuller, typed anew),
    conductivity, vapour pressure and heat of vaporisation (CoolProp), the heat that the vapour takes up on its way, and
    radiation as the difference of fourth powers.
    """
    fluid, molar = KNOWN[name].coolprop, 1e3 * KNOWN[name].molar_mass
    size = math.sqrt(2 / (1 / molar + 1 / 28.97)) * (KNOWN[name].volume ** (1 / 3) + 19.7 ** (1 / 3)) ** 2
    capacity = PropsSI("Cp0molar", "T", t, "P", 1e3, fluid)
    known = [t - 60, t - 30, t]
    conductivity = np.polyfit(known, [PropsSI("L", "T", at, "P", p, "Air") for at in known], 2)
    step = path / cells

    def residuals(unknown):
        surface, flux = unknown[0], unknown[1] * 1e-3
        heat = PropsSI("Hmolar", "T", surface, "Q", 1, fluid) - PropsSI("Hmolar", "T", surface, "Q", 0, fluid)
        at_surface = PropsSI("P", "T", surface, "Q", 1, fluid) / p
        fraction = np.concatenate([[at_surface], unknown[2 : cells + 1], [far / p]])
        temperature = np.concatenate([[surface], unknown[cells + 1 :], [t]])
        x, warmth = (fraction[1:] + fraction[:-1]) / 2, (temperature[1:] + temperature[:-1]) / 2
        spread = 1e-4 * 0.00143 * warmth**1.75 / (p / 1e5 * size)
        through = -p / (R * warmth) * spread / (1 - x) * np.diff(fraction) / step
        conducted = np.polyval(conductivity, warmth) * np.diff(temperature) / step - flux * capacity * (
            warmth - surface
        )
        wanted = heat * flux - 0.95 * SIGMA * (t**4 - surface**4)
        return np.concatenate([(through - flux) * 1e3, (conducted - wanted) / 100])

    inner = slice(1, -1)
    start = [[t - 10.0, 1.0], np.linspace(0.1, far / p, cells + 1)[inner], np.linspace(t - 10, t, cells + 1)[inner]]
    found = optimize.root(residuals, np.concatenate(start), tol=1e-10)
    assert found.success
    return found.x[0], found.x[1] * 1e-3


@pytest.mark.parametrize("path", [0.005, 0.02, 0.1])
@pytest.mark.parametrize(
    ("name", "far", "within"),
    [
        ("water", 1170.0, 0.02),
        ("toluene", 0.0, 0.02),
        ("ethanol", 0.0, 0.05),
        ("acetone", 0.0, 0.13),
        ("diethyl-ether", 0.0, 0.23),
        ("pentane", 0.0, 0.21),
    ],
)
def test_the_cooled_surface_against_a_diffusion_tube(name, far, within, path):
    """The cooling is within 5 %; the flux, with all properties at the air's temperature, is never below the tube's."""
    t = K0 + 20
    surface, flux = cooled(name, t, ATM, path, far)
    expected, leaves = tube(name, t, ATM, path, far)
    assert t - surface == pytest.approx(t - expected, rel=0.05)
    assert leaves < flux < (1 + within) * leaves


@pytest.mark.parametrize("part", [1e-4, 0.3, 0.99, 0.999])
@pytest.mark.parametrize("path", [1e-4, 0.01, 1.0])
def test_the_steps_come_to_the_balance(part, path):
    """Brent's method on the same balance, from hardly any vapour to all but boiling, and in one array."""
    t, heat, d = 293.15, 3e4, 1e-5
    transfer = thermal_conductivity(t) / path + 4 * 0.95 * SIGMA * t**3

    def balance(surface):
        at = part * ATM * math.exp(heat / R * (1 / t - 1 / surface))
        return heat * d * ATM / (R * t * path) * math.log(ATM / (ATM - at)) - transfer * (t - surface)

    expected = optimize.brentq(balance, 150.0, t, xtol=1e-11)
    found = evaporation.surface_temperature(np.array([t, t + 1]), ATM, path, d, part * ATM, heat, 0.0)
    assert found[0] == pytest.approx(expected, abs=1e-9)
    alone = evaporation.surface_temperature(t + 1, ATM, path, d, part * ATM, heat, 0.0)
    assert found[1] == pytest.approx(alone, rel=1e-15)


def test_vapour_drives_air_out():
    """Dalton by hand: 30 of 100 parts vapour where the room's air has 10: 70/90 of that air is left."""
    assert evaporation.driven_out(30.0, 10.0, 100.0) == pytest.approx(1 - 70 / 90, rel=1e-15)
