"""Static charge through the room check: a band in a direction, never subtracted."""

from __future__ import annotations

import math

import numpy as np
import pytest
from scipy import constants

from envcorr.effects.static_charge import handling_voltage
from envcorr.estimate import Estimate
from envcorr.jobs.room import check_room
from tests.scene import MG, ROOM, normal, row, setup

EPS0, G = constants.epsilon_0, constants.g


def check(**said):
    return check_room(setup(ROOM, {"load_insulating": "yes"}, said), draws=2**14)


def static(**said):
    return row(check(**said), "static_charge")


POINT = {"static_charge": 5e-9, "static_distance": 0.04, "static_direction": "floor"}


def test_point_charge():
    """5 nC at 40 mm over an earthed plate: q²/(16 pi eps0 d²) = 35.1 µN, 3.58 mg (image charge, Jackson 2.1)."""
    expected = (5e-9) ** 2 / (16 * math.pi * EPS0 * 0.04**2) / G
    found = static(**POINT)
    assert expected / MG == pytest.approx(3.58, abs=0.005)
    assert found.mean_error == pytest.approx(expected, rel=1e-6)
    assert found.correction is None


def test_largest_charge():
    """For 0.05 mg at 40 mm: q = d sqrt(16 pi eps0 m g) = 0.59 nC (the same formula solved for q)."""
    answers = {a.label: a.value for a in static(**POINT, target_resolution=0.1 * MG).answers}
    found = next(value for label, value in answers.items() if label.startswith("largest charge"))
    assert found == pytest.approx(0.04 * math.sqrt(16 * math.pi * EPS0 * 0.05e-6 * G), rel=1e-6)
    assert found * 1e9 == pytest.approx(0.59, abs=0.005)


def test_sheet_under_a_roof():
    """10 µC/m² on 20 cm², 40 mm over the pan, roof at 200 mm: eps0 E²/2 A up, 46 mg (by hand)."""
    field = 1e-5 * 0.04 / (EPS0 * 0.2)
    found = static(
        static_surface_charge=1e-5,
        static_area=20e-4,
        static_distance=0.04,
        static_roof_height=0.2,
        static_direction="roof",
    )
    assert found.mean_error == pytest.approx(-EPS0 * field**2 / 2 * 20e-4 / G, rel=1e-6)
    assert found.mean_error / MG == pytest.approx(-46.1, abs=0.1)


@pytest.mark.parametrize(
    ("said", "pull"),
    [
        ({"static_field": 1e5, "static_area": 1e-3}, EPS0 * 1e10 / 2 * 1e-3),
        ({"static_surface_charge": 1e-6, "static_area": 1e-3}, 1e-12 / (2 * EPS0) * 1e-3),
        # parallel plates: eps0 A V²/(2 d²), 1 kV across 1 cm on 100 cm² is 45.14 mg (textbook)
        ({"static_potential": 1e3, "static_area": 1e-2, "static_distance": 0.01}, 45.1438e-6 * G),
    ],
    ids=["field", "sheet", "plates"],
)
def test_maxwells_stress(said, pull):
    """eps0 E²/2 over the area, the field of a one-sided sheet being sigma/eps0 (Maxwell's stress)."""
    assert static(**said, static_direction="floor").mean_error == pytest.approx(pull / G, rel=1e-5)


def test_ball_far_from_the_plate_is_a_point():
    """A ball of 1 mm at 100 mm: the image series tends to the image charge at the centre's distance (Smythe)."""
    ball = static(static_charge=1e-9, static_radius=1e-3, static_distance=0.1, static_direction="floor")
    point = (1e-9) ** 2 / (16 * math.pi * EPS0 * 0.101**2) / G
    assert ball.mean_error == pytest.approx(point, rel=1e-3)


def test_direction_and_screen():
    down = static(**POINT)
    up = static(**{**POINT, "static_direction": "roof"})
    either = static(**{**POINT, "static_direction": "unknown"})
    assert up.mean_error == -down.mean_error
    assert either.mean_error == pytest.approx(0.0, abs=0.02 * down.mean_error)
    assert either.u == pytest.approx(down.mean_error, rel=0.01)
    assert static(**POINT, static_screening=0.75).mean_error == pytest.approx(down.mean_error / 4, rel=1e-9)
    assert static(**POINT, static_screening=1.0).mean_error == 0.0


def test_pull_is_even_in_the_charge_and_grows_with_its_square():
    single, reverse = static(**POINT), static(**{**POINT, "static_charge": -5e-9})
    double = static(**{**POINT, "static_charge": 10e-9})
    assert reverse.mean_error == single.mean_error
    assert double.mean_error == pytest.approx(4 * single.mean_error, rel=1e-9)


def test_nominally_no_charge():
    """q normal about zero with u: E(q²) = u², so the mean pull is that of u; first order sees nothing there."""
    result = check(static_charge=normal(0.0, 1e-9), static_distance=0.04, static_direction="floor")
    found = row(result, "static_charge")
    assert found.mean_error == pytest.approx(1e-18 / (16 * math.pi * EPS0 * 0.04**2) / G, rel=0.02)
    assert found.u > 0
    assert found.first_order_u == 0.0
    assert "static_charge" in result.first_order.blind_to


def test_never_subtracted_and_gone_once_neutralised():
    result = check(**POINT, target_resolution=0.1 * MG)
    assert result.corrected.whole.summary.mean == pytest.approx(3.58 * MG, abs=0.05 * MG)
    assert result.verdict.answer == "reached once treated"
    assert result.verdict.treat == ("static_charge",)
    assert row(result, "static_charge").passes_without is True
    assert "eutralise" in result.verdict.reason


def test_unknown_vial_is_assumed_and_said():
    result = check(static_area=2e-3)
    assert "static.unknown_surface_charge" in [a.name for a in result.assumed]
    # log-uniform sigma: E(sigma²) = (b² - a²)/(2 ln(b/a)) (integral by hand)
    a, b = 1e-7, 1e-5
    square = (b**2 - a**2) / (2 * math.log(b / a))
    spread = row(result, "static_charge").interval[1]
    assert spread > square / (2 * EPS0) * 2e-3 / G
    metal = check(static_area=2e-3, load_insulating="no")
    assert "static_charge" in [n.effect.name for n in metal.not_assessed]


def test_insulating_load_without_a_word_on_charge_is_undecided():
    result = check()
    assert result.verdict.answer == "undecided"
    assert "static charge" in result.verdict.reason
    waived = check_room(setup(ROOM, {"load_insulating": "yes"}, waived=("static_charge",)), draws=2**14)
    assert waived.verdict.answer != "undecided"


@pytest.mark.parametrize(
    ("activity", "dry", "humid"),
    [
        # DOD-HDBK-263 (1980), typical voltages at 10 to 20 % and at 65 to 90 % (from memory)
        ("walking on carpet", 35_000, 1_500),
        ("bench work", 6_000, 100),
        ("lifting a plastic bag", 20_000, 1_200),
    ],
)
def test_handling_voltages(activity, dry, humid):
    assert handling_voltage(activity, 0.15) == pytest.approx(dry)
    assert handling_voltage(activity, 0.80) == pytest.approx(humid)
    between = handling_voltage(activity, np.array([0.3, 0.5]))
    assert np.all((between < dry) & (between > humid))
    found = static(static_handling=activity, static_area=1e-3, static_distance=0.1, air_humidity=0.15)
    # at most the whole voltage across the gap (Maxwell's stress)
    assert 0 < found.interval[1] <= EPS0 * (dry / 0.1) ** 2 / 2 * 1e-3 / G


@pytest.mark.parametrize(
    ("said", "sentence"),
    [
        # 3 MV/m: eps0 E is 26.6 µC/m² on one side, 53.1 µC/m² on a free sheet (handbook)
        ({"static_surface_charge": 60e-6, "static_area": 1e-3}, "53 µC/m²"),
        ({"static_field": 3.5e6, "static_area": 1e-3}, "3 MV/m"),
        # field at the plate q/(2 pi eps0 d²): 1 µC at 40 mm is 11 MV/m (image charge)
        ({"static_charge": 1e-6, "static_distance": 0.04}, "3 MV/m at the plate"),
    ],
    ids=["sheet", "field", "point"],
)
def test_breakdown_is_said(said, sentence):
    assert any(sentence in n.sentence for n in check(**said).notices)
    small = {
        name: value * 0.01 if name not in ("static_area", "static_distance") else value for name, value in said.items()
    }
    assert not any(sentence in n.sentence for n in check(**small).notices)


def test_band_above_the_target_is_said():
    loud = check(**POINT, target_resolution=0.1 * MG)
    assert any("neutralise and weigh again" in n.sentence for n in loud.notices)
    quiet = check(**{**POINT, "static_charge": Estimate(0.1e-9)}, target_resolution=0.1 * MG)
    assert not any("neutralise and weigh again" in n.sentence for n in quiet.notices)
