"""From a set-up to numbers: against published budgets, against other libraries, and by properties that must hold."""

import math
from itertools import pairwise

import GTC
import numpy as np
import pytest
from uncertainties import ufloat, umath

from envcorr.estimate import Estimate
from envcorr.jobs.room import check_room
from envcorr.model import make_plan
from envcorr.propagation import draws
from tests.scene import (
    AIR,
    AIR_DENSITY,
    BALANCE,
    HPA,
    JUST_BEFORE,
    K0,
    MG,
    ROOM,
    STEEL,
    UG,
    about,
    cipm_2007,
    foam,
    normal,
    row,
    setup,
)

# JCGM 101:2008, clause 9.3, as a weighing of 100 g in this program's own words: error = conventional mass as read less
# that of the load, so the published deviation 1.234 mg less it; the masses' uncertainties are those of the table 5.
CLAUSE_9_3 = {
    "load_mass": 0.1,
    "load_density": Estimate.between(7000.0, 9000.0),
    "load_density_kind": "solid",
    "air_density": Estimate.between(1.10, 1.30),
    "adjusted_when": "just before",
    "balance_adjusting_weight_density": Estimate.between(7950.0, 8050.0),
    "balance_adjusting_weight_error": normal(0.0, 0.050 / 100_000),
    "balance_repeatability": 0.020 * MG,
    "balance_scale_interval": 0.010 * MG,
    "target_measurand": "conventional mass",
    "target_resolution": 1 * MG,
}


def test_clause_9_3_through_the_model():
    """JCGM 101:2008, table 8, and the exact second moment 0.0754797 mg (see test_propagation)."""
    result = check_room(setup(CLAUSE_9_3), draws=2**18, as_read=True)
    found = result.as_read.whole.summary
    assert found.u / MG == pytest.approx(0.0754797, rel=2e-3)
    assert found.mean / MG == pytest.approx(0.0, abs=2e-4)
    assert (found.shortest[1] - found.shortest[0]) / MG == pytest.approx(0.2991, abs=7e-4)
    # 1.0844 to 1.3836 mg about 1.234 mg, the other way round
    assert np.array(found.interval) / MG == pytest.approx([1.234 - 1.3836, 1.234 - 1.0844], abs=1e-3)
    # to first order the buoyancy vanishes: air of 1.2 kg/m³, equal densities
    first = result.first_order
    assert first.budget.u / MG == pytest.approx(0.0539, abs=1e-4)
    assert first.budget.expanded / MG == pytest.approx((1.3395 - 1.1285) / 2, abs=6e-5)
    assert not first.agrees
    assert first.blind_to == ("buoyancy",)
    # d_low and d_high of table 8 belong to the shortest interval; the symmetric one lies 0.0441 mg out on either side
    assert np.array(first.difference) / MG == pytest.approx([0.0441, 0.0441], abs=1e-3)


# Full budgets by other libraries -------------------------------------------------------------------------------------

BUDGET = {
    "air_temperature": Estimate(K0 + 21.3, "normal", 0.2, dof=7),
    "air_pressure": Estimate(98_750.0, "normal", 60.0, dof=9),
    "air_humidity": normal(0.41, 0.03),
    "air_co2": normal(6e-4, 1e-4),
    "load_mass": 0.020,
    "load_density": Estimate(1130.0, "normal", 4.0, dof=4),
    "load_density_kind": "gas-displacement",
    "adjusted_when": "just before",
    "balance_adjusting_weight_density": normal(7950.0, 30.0),
    "balance_repeatability": 9 * UG,
    "balance_scale_interval": 10 * UG,
    "balance_nonlinearity": about(0.0, 20 * UG),
    "balance_adjusting_weight_error": normal(0.0, 1e-6),
    "target_resolution": 0.1 * MG,
}


def reading_error(exp, t, p, h, x, formula, rho_load, rho_weight, noise, bend, weight):
    """Return the error of the reading [kg]: m (1 - rho/rho_s)/K - m and the balance's own part; OIML D 28:2004."""
    mass = BUDGET["load_mass"]
    air = cipm_2007(t, p, h, x, exp) * (1 + 22e-6 * formula)
    factor = (1 - 1.2 / 8000) / (1 - 1.2 / rho_weight) * (1 - air / rho_weight)
    pull = mass - mass * air / rho_load
    return (1 / factor - 1 + weight) * (pull + noise + bend) + pull - mass + noise + bend


LEAVES = {
    "air.temperature": "air_temperature",
    "air.pressure": "air_pressure",
    "air.humidity": "air_humidity",
    "air.co2": "air_co2",
    "air.formula_error": Estimate(0.0, "normal", 1.0),
    "load.density": "load_density",
    "balance.adjusting_weight_density": "balance_adjusting_weight_density",
    "balance.noise": Estimate(0.0, "normal", 9 * UG),
    "balance.nonlinearity": "balance_nonlinearity",
    "balance.adjusting_weight_error": "balance_adjusting_weight_error",
}


def estimate_of(name):
    entry = LEAVES[name]
    return BUDGET[entry] if isinstance(entry, str) else entry


def test_first_order_is_that_of_uncertainties():
    """The budget of the whole error, quantity by quantity, by automatic differentiation (uncertainties 3.2)."""
    numbers = {name: ufloat(estimate_of(name).centre, estimate_of(name).u) for name in LEAVES}
    expected = reading_error(umath.exp, *numbers.values())
    found = check_room(setup(BUDGET), as_read=True)
    budget = found.first_order.budget
    assert budget.value == pytest.approx(expected.nominal_value, rel=1e-7)
    assert budget.u == pytest.approx(expected.std_dev, rel=1e-5)
    parts = {leaf.name: part for leaf, part in zip(found.plan.leaves, budget.contributions, strict=True) if part}
    assert set(parts) == set(LEAVES)
    for name, number in numbers.items():
        component = expected.derivatives[number] * number.std_dev
        assert parts[name] == pytest.approx(component, rel=1e-4), name


def test_first_order_is_that_of_gtc():
    """u and the effective degrees of freedom of the whole error (GTC 1.5)."""
    numbers = [GTC.ureal(estimate_of(n).centre, estimate_of(n).u, estimate_of(n).dof) for n in LEAVES]
    expected = reading_error(GTC.exp, *numbers)
    budget = check_room(setup(BUDGET), as_read=True).first_order.budget
    assert budget.u == pytest.approx(expected.u, rel=1e-5)
    assert budget.dof == pytest.approx(expected.df, rel=1e-4)
    assert budget.k == pytest.approx(GTC.reporting.k_factor(expected.df, 95), rel=1e-5)


# The plan on arrays --------------------------------------------------------------------------------------------------

RICH = {
    **BUDGET,
    "container_mass": 0.030,
    "container_density": normal(2230.0, 130.0),
    "cycle_pressure_change": about(0.0, 0.3 * HPA),
    "cycle_temperature_change": about(0.0, 0.2),
    "sensors_air_pressure": normal(0.0, 40.0),
    "sensors_air_temperature": normal(0.0, 0.1),
    "balance_scatter_on": 14 * UG,
    "balance_scatter_off": 9 * UG,
    "balance_eccentric_loading": about(0.0, 50 * UG),
    "balance_eccentric_test_load": 0.1,
    "adjusted_when": None,
}


def test_arrays_equal_scalars():
    plan = make_plan(setup(RICH))
    drawn = draws(len(plan.leaves)).place_all([leaf.estimate for leaf in plan.leaves])
    together = plan.evaluate(drawn)
    for column in (0, 1, 777, 16_383):
        alone = plan.evaluate([float(v[column]) if np.ndim(v) else v for v in drawn])
        for known in (False, True):
            one, many = plan.parts(alone, known=known), plan.parts(together, known=known)
            everything = range(len(plan.effects))
            expected = np.broadcast_to(many.total(everything), (16_384,))[column]
            assert one.total(everything) == pytest.approx(expected, rel=1e-12)
            for i in everything:
                expected = np.broadcast_to(many.effect(i), (16_384,))[column]
                assert one.effect(i) == pytest.approx(expected, rel=1e-12, abs=1e-24)


def test_what_one_quantity_reaches_is_all_that_changes():
    """Running again only what a leaf reaches gives the same as running everything."""
    plan = make_plan(setup(RICH))
    centres = [leaf.estimate.centre for leaf in plan.leaves]
    base = plan.evaluate(centres)
    for i, leaf in enumerate(plan.leaves):
        moved = list(centres)
        moved[i] = leaf.estimate.centre + (leaf.estimate.u or 0.01 * leaf.estimate.centre)
        assert plan.evaluate(moved, base=base, changed=i) == plan.evaluate(moved), leaf.name


def test_best_estimates_are_the_centres():
    plan = make_plan(setup(RICH))
    values = plan.evaluate([leaf.estimate.centre for leaf in plan.leaves])
    for value, node in zip(values, plan.nodes, strict=True):
        assert value is None or value == pytest.approx(node.centre, rel=1e-15)


# Properties ----------------------------------------------------------------------------------------------------------


@pytest.mark.parametrize("density", [0.9, 1.2, 3.0])
def test_no_cause_no_error(density):
    """A weight like the adjusting weight, in the air of the adjustment: whatever the air, nothing is left."""
    air = about(density, 0.1)
    result = check_room(setup(BALANCE, JUST_BEFORE, STEEL, air_density=air, target_resolution=0.1 * MG))
    found = result.as_read.surroundings.summary
    assert found.largest <= 1e-15 * 5e-3


@pytest.mark.parametrize("load_density", [20.0, 1000.0, 21_500.0])
def test_conventional_mass_is_what_is_read_in_conventional_air(load_density):
    """OIML D 28:2004, clause 5: in air of 1.2 kg/m³ a balance adjusted there shows the conventional mass."""
    said = {"air_density": 1.2, "load_density": load_density, "target_measurand": "conventional mass"}
    result = check_room(setup(ROOM, said, {name: None for name in AIR}))
    assert abs(row(result, "buoyancy").mean_error) <= 1e-15 * 5e-3


def test_mass_less_conventional_mass():
    """Water of 998.2067 kg/m³: a mass of 1000 g has the conventional mass 998.947 686 3 g (40-digit arithmetic)."""
    said = {"load_mass": 1.0, "load_density": 998.2067, "load_density_kind": "liquid", "air_density": 1.2}
    air = {name: None for name in AIR}
    as_mass = row(check_room(setup(ROOM, air, said)), "buoyancy").mean_error
    assert as_mass == pytest.approx(0.998_947_686_3 - 1, abs=1e-10)


@pytest.mark.parametrize("name", ["buoyancy", "adjusting_weight"])
def test_twice_the_load_has_twice_a_proportional_error(name):
    single, double = (check_room(setup(RICH, load_mass=mass), draws=2**14) for mass in (0.010, 0.020))
    assert row(double, name).u == pytest.approx(2 * row(single, name).u, rel=1e-2 if name == "buoyancy" else 1e-9)
    plain, twice = (check_room(foam(m, "gas-displacement", 1050.0)) for m in (1e-3, 2e-3))
    assert row(twice, "buoyancy").mean_error == pytest.approx(2 * row(plain, "buoyancy").mean_error, rel=1e-9)


def test_what_is_not_proportional_stays():
    single, double = (check_room(setup(RICH, load_mass=mass), draws=2**14) for mass in (0.010, 0.020))
    for name in ("repeatability", "nonlinearity", "disturbance"):
        assert row(double, name).u == pytest.approx(row(single, name).u, rel=1e-12)


def spread_names():
    leaves = make_plan(setup(RICH)).leaves
    return [leaf.name for leaf in leaves if leaf.origin == "given" and not leaf.estimate.is_exact]


@pytest.mark.parametrize("name", spread_names())
def test_a_wider_spread_never_lowers_the_variance(name):
    """But for what finite draws leave of a product of independent quantities (5e-4)."""
    plain = setup(RICH)
    spreads = {"as_read": [], "corrected": []}
    for factor in (0, 1, 2, 5):
        wide = plain.with_estimates(**{name.replace(".", "_"): plain.estimates[name].scaled(factor)})
        result = check_room(wide, draws=2**14)
        for state, found in spreads.items():
            found.append(result.total(state).whole.summary.u)
    for found in spreads.values():
        assert all(wider >= narrower * (1 - 5e-4) for narrower, wider in pairwise(found))
    assert any(found[-1] > found[0] for found in spreads.values())


def test_common_air_cancels_in_a_tared_container():
    """However large the container and however uncertain the air: it takes off the same at tare and load."""
    air = {"air_pressure": about(1000 * HPA, 20 * HPA), "load_density": 1500.0}
    without = row(check_room(setup(ROOM, air)), "buoyancy")
    flask = {"container_mass": 0.05, "container_density": 2230.0}
    tared = row(check_room(setup(ROOM, air, flask)), "buoyancy")
    assert (tared.mean_error, tared.u) == pytest.approx((without.mean_error, without.u), rel=1e-3)
    plan = make_plan(setup(ROOM, air, flask))
    at_tare = plan.targets["tare"]
    assert plan.centres()[at_tare] == 0.05


def test_tare_in_other_air():
    """100 cm³ kept shut: 1 hPa more at the loaded reading takes off 0.1189 mg.

    By hand: 1.19931 kg/m³ x 9.916e-6 per Pa (CIPM-2007) x 100 Pa x 1e-4 m³ = 0.1189 mg.
    """
    flask = {"container_mass": 0.05, "container_outer_volume": 1e-4, "container_closed": "kept shut"}
    result = check_room(setup(ROOM, flask, tare_air_pressure=101_325.0 - HPA))
    inside = 5e-3 * (AIR_DENSITY / 8000)  # the load is inside: its own buoyancy is not felt, the weight's was
    assert (row(result, "buoyancy").mean_error - inside) / MG == pytest.approx(-0.1189, abs=2e-4)


def test_interaction_of_buoyancy_and_gain():
    """A gain of 3e-4 acts on what the air leaves: of a load of 7.5 kg/m³ in air of 3 kg/m³, 3e-4 x 3/7.5 = 120 ppm."""
    said = {"air_density": 3.0, "load_density": 7.5, "balance_adjusting_weight_error": 3e-4}
    result = check_room(setup(ROOM, said, {name: None for name in AIR}, target_resolution=1.0), as_read=True)
    assert result.interaction / 5e-3 == pytest.approx(-120e-6, rel=1e-6)
    # By hand, of the mass: adjusted in air of 3 kg/m³, 1/K = 1/(1 - 3/8000), the load keeps 1 - 0.4 of its pull
    gain = 1 / (1 - 3 / 8000) * (1 - 1.2 / 8000) / (1 - 1.2 / 8000) - 1
    total = (1 + gain + 3e-4) * 0.6 - 1
    assert result.as_read.whole.summary.mean / 5e-3 == pytest.approx(total, rel=1e-6)
    assert result.interaction_share["whole"] == pytest.approx(-120e-6 / total, rel=1e-3)


# Lacks, assumed, unused ----------------------------------------------------------------------------------------------


@pytest.mark.parametrize(
    ("taken_away", "effect", "lacks"),
    [
        ("load_density", "buoyancy", ("load.density",)),
        ("air_temperature", "buoyancy", ("air.temperature",)),
        ("balance_repeatability", "repeatability", ("balance.repeatability",)),
        ("balance_scale_interval", "repeatability", ("balance.scale_interval",)),
    ],
)
def test_not_assessed_names_what_is_lacking(taken_away, effect, lacks):
    plan = make_plan(setup(ROOM, {taken_away: None}))
    found = {missing.effect.name: missing.lacks for missing in plan.not_assessed}
    assert found[effect] == lacks
    assert effect not in [planned.effect.name for planned in plan.effects]


def test_what_is_assumed_is_listed_with_its_source():
    plan = make_plan(setup(ROOM, air_co2=None, adjusted_when=None, balance_adjusting_weight_density=None))
    assumed = {assumption.name: assumption for assumption in plan.assumed}
    expected = {
        "air.co2",
        "adjusted.temperature_change",
        "adjusted.pressure_change",
        "balance.adjusting_weight_density",
    }
    assert expected <= set(assumed)
    assert all(assumption.source for assumption in assumed.values())
    told = {assumption.name for assumption in make_plan(setup(ROOM)).assumed}
    assert not expected & told


def test_what_is_given_and_not_used_is_listed():
    plan = make_plan(setup(ROOM, load_open_cell_fraction=0.3, air_altitude=100.0, container_inner_volume=1e-5))
    assert "load.open_cell_fraction" in plan.unused
    assert "container.inner_volume" in plan.unused
    assert "load.density" not in plan.unused
    assert make_plan(setup(ROOM)).unused == ()


def test_air_at_the_adjustment():
    """Adjusted just before, the air of the adjustment is the air; unknown, an independent draw about it."""
    same = make_plan(setup(ROOM, air_pressure=about(1000 * HPA, 20 * HPA)))
    names = [leaf.name for leaf in same.leaves]
    assert not [name for name in names if name.startswith("adjusted.")]
    unknown = make_plan(setup(ROOM, air_pressure=about(1000 * HPA, 20 * HPA), adjusted_when="unknown"))
    spread = {leaf.name: leaf.estimate for leaf in unknown.leaves if leaf.name.startswith("adjusted.")}
    assert spread["adjusted.pressure_change"].bounds == (-25 * HPA, 25 * HPA)
    assert spread["adjusted.temperature_change"].bounds == (-3.0, 3.0)
    # by hand, of the gain: u(rho)/rho is 25/1000/sqrt(3) from the pressure and 3 x 3.7e-3/sqrt(3) from the temperature
    result = check_room(setup(ROOM, air_pressure=1000 * HPA, adjusted_when="unknown"))
    relative = math.hypot(25 / 1000, 3 * 3.7e-3) / math.sqrt(3)
    expected = 5e-3 * 1.1836 / 8000 * relative  # CIPM-2007 at 20 °C, 1000 hPa, 50 %: 1.1836 kg/m³
    assert row(result, "buoyancy").u == pytest.approx(expected, rel=0.02)


def test_what_is_said_of_the_temperature_at_the_tare():
    """A heavy container whose change of temperature was given is not told to give it, though the change may be nil."""

    def told(**more):
        flask = {"container_mass": 0.05, "container_density": 2230.0}
        result = check_room(setup(ROOM, flask, more), draws=2**14)
        return [notice.sentence for notice in result.notices if "would feel a change" in notice.sentence]

    assert told()
    assert not told(cycle_temperature_change=about(0.0, 0.2))
    assert not told(tare_air_temperature=K0 + 20.0)


@pytest.mark.parametrize(("tare", "shift"), [(0.120, 54.0), (0.008, 3.6)])
def test_a_gain_that_changed_since_the_tare_acts_on_the_container(tare, shift):
    """a small bench: 1.5 ppm/K x 0.3 K x 120 g = 54 µg, of 8 g 3.6 µg; in the effect's row and in the total."""
    said = {
        "container_mass": tare,
        "container_density": 8000.0,
        "balance_sensitivity_temperature_coefficient": 1.5e-6,
        "cycle_temperature_change": 0.3,
    }
    result = check_room(setup(ROOM, said))
    assert row(result, "sensitivity_temperature").mean_error / UG == pytest.approx(shift, rel=1e-6)
    rest = check_room(setup(ROOM, said, balance_sensitivity_temperature_coefficient=0.0))
    change = result.as_read.surroundings.summary.mean - rest.as_read.surroundings.summary.mean
    assert change / UG == pytest.approx(shift, rel=1e-3)
