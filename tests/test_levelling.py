"""Levelling: planes fitted by hand, the cosine in closed form, and which foot to turn."""

from __future__ import annotations

import math

import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st

from envcorr.errors import InputError
from envcorr.intake.level_entry import read_feet, read_sides, read_vial
from envcorr.jobs.level import Base, Observed, Task, find_level
from envcorr.laws import levelling, tilt

MG, MM = 1e-6, 1e-3
ARCMIN = math.pi / 10_800
THREE = Base(("back left", "back right", "front"), (-0.08, 0.08, 0.0), (0.06, 0.06, -0.08), 0.8 * MM)
FOUR = Base(
    ("front left", "front right", "back left", "back right"), (-0.07, 0.07, -0.07, 0.07), (-0.1, -0.1, 0.1, 0.1), 1 * MM
)


def test_plane_through_three_feet():
    """z = a x + b y + c by hand: back feet at 0.06 with 0.32 and 0 mm give a = -0.32/160 = -2e-3; their mean 0.16 mm
    against 0.44 mm in front gives b = (0.16 - 0.44)/140 = -2e-3."""
    a, b, above = levelling.plane(THREE.x, THREE.y, (0.32 * MM, 0.0, 0.44 * MM))
    assert (a, b) == pytest.approx((-2e-3, -2e-3), rel=1e-12)
    assert np.max(np.abs(above)) < 1e-15


def test_plane_of_four_feet():
    """A rectangle: a = (mean right - mean left)/140 mm, b = (mean back - mean front)/200 mm; a foot off leaves h/4."""
    heights = np.array([0.2, 0.6, 0.0, 0.4]) * MM
    a, b, above = levelling.plane(FOUR.x, FOUR.y, heights)
    assert (a, b) == pytest.approx((0.4 / 140, -0.2 / 200), rel=1e-12)
    assert np.max(np.abs(above)) < 1e-15
    _, _, above = levelling.plane(FOUR.x, FOUR.y, heights + np.array([0.2, 0.0, 0.0, 0.0]) * MM)
    assert above == pytest.approx(np.array([0.05, -0.05, -0.05, 0.05]) * MM)


def test_arms():
    """The front foot stands 140 mm from the line of the back feet; a back foot h = 2 A/|side|: by Heron's triangle."""
    sides = 0.16, math.hypot(0.08, 0.14), math.hypot(0.08, 0.14)
    area = 0.5 * 0.16 * 0.14
    assert levelling.arms(THREE.x, THREE.y) == pytest.approx([2 * area / sides[1], 2 * area / sides[2], 0.14])


def test_the_dropped_foot():
    """0.7 mm over 140 mm: 17.2 arcmin, 12.5 ppm, -2.50 mg at 200 g (cosine, by hand: (0.005)^2/2 = 12.5e-6)."""
    found = find_level(Task(0.2, 0.05 * MG), base=THREE, heights=(0.0, 0.0, -0.7 * MM))
    assert found.tilt / ARCMIN == pytest.approx(17.19, abs=0.01)
    assert found.error / MG == pytest.approx(-2.50, abs=0.005)
    assert found.largest_tilt / ARCMIN == pytest.approx(2.43, abs=0.005)
    assert math.tan(found.largest_tilt) * 1e3 == pytest.approx(0.707, abs=0.0005)  # sqrt(2 * 0.05 mg/200 g), mm/m
    assert dict(found.heights)["front"] / MM == pytest.approx(0.099, abs=0.0005)
    assert found.verdict == "not level enough"
    (turn,) = (one for one in found.turns if one.raised)
    assert (turn.name, turn.turns, turn.clockwise) == ("front", pytest.approx(0.7 / 0.8), True)


@pytest.mark.parametrize(
    ("degrees", "ppm"),
    # 1 - cos by series in 30 digits: 1 arcmin 0.0423, 5 arcmin 1.0577, 0.1° 1.5231, 0.25° 9.5193
    [(1 / 60, 0.0423), (5 / 60, 1.0577), (0.1, 1.5231), (0.25, 9.5193)],
)
def test_errors_of_common_tilts(degrees, ppm):
    found = find_level(Task(1.0, MG), observed=Observed(math.radians(degrees), 0.0))
    assert -found.error * 1e6 == pytest.approx(ppm, abs=5e-5)


def test_the_tolerance_is_where_the_error_is_what_is_allowed():
    for adjusted in (0.0, 10 * ARCMIN, 40 * ARCMIN):
        found = find_level(Task(0.2, 0.05 * MG, adjusted=adjusted))
        for angle in {found.largest_tilt, found.smallest_tilt} - {0.0}:
            shift = 0.2 * float(tilt.relative_shift(adjusted, 0.0, angle, 0.0))
            assert abs(shift) == pytest.approx(0.05 * MG, rel=1e-9)


def test_adjusted_out_of_level():
    """Linear: m tan A dB = 0.05 mg; at 10 arcmin and 200 g dB is 0.2955 arcmin either way (to 1.5 %, the square)."""
    found = find_level(Task(0.2, 0.05 * MG, adjusted=10 * ARCMIN))
    linear = 0.05 * MG / 0.2 / math.tan(10 * ARCMIN) / ARCMIN
    assert linear == pytest.approx(0.2955, abs=1e-4)
    assert found.largest_tilt / ARCMIN - 10 == pytest.approx(linear, rel=0.016)
    assert 10 - found.smallest_tilt / ARCMIN == pytest.approx(linear, rel=0.016)
    assert "out of level" in found.notices[0].sentence
    level = find_level(Task(0.2, 0.05 * MG, adjusted=10 * ARCMIN), observed=Observed(0.0, 0.0))
    assert level.error / MG == pytest.approx(200e3 * (1 / math.cos(10 * ARCMIN) - 1), rel=1e-6)
    assert level.verdict == "not level enough"


def test_a_change_within_a_weighing_acts_on_the_gross():
    """(m + m_t) (cos(B + d) - cos B): 200 g net on 100 g, from 5 arcmin by 0.2: tan B d of 300 g = 25.4 µg, by hand."""
    task = Task(0.2, 0.05 * MG, tare=0.1, change=0.2 * ARCMIN)
    found = find_level(task, observed=Observed(3 * ARCMIN, 4 * ARCMIN))
    by_hand = 0.3 * (math.cos(5 * ARCMIN) - math.cos(5.2 * ARCMIN))
    assert found.error_of_change == pytest.approx(by_hand, rel=1e-6)
    assert by_hand / MG == pytest.approx(0.0259, abs=1e-4)
    d = found.largest_change
    assert 0.3 * (math.cos(5 * ARCMIN) - math.cos(5 * ARCMIN + d)) == pytest.approx(0.05 * MG, rel=1e-6)


def test_guard_band():
    """Accepted up to tolerance less 1.64 u, rejected from tolerance plus 1.64 u on (JCGM 106:2012, 8.3)."""
    task, u = Task(0.2, 0.05 * MG), 0.3 * ARCMIN
    edge = find_level(task).largest_tilt
    for angle, verdict, chance in (
        (edge - 1.7 * u, "level enough", (0.9, 1.0)),
        (edge, "too near to tell", (0.4, 0.55)),
        (edge + 1.7 * u, "not level enough", (0.0, 0.1)),
    ):
        found = find_level(task, observed=Observed(angle, 0.0, u))
        assert found.verdict == verdict
        assert chance[0] <= found.probability <= chance[1]


@given(
    st.floats(-20, 20),
    st.floats(-20, 20),
    st.sampled_from([THREE, FOUR]),
    st.sampled_from([None, 0, 1, 2]),
    st.booleans(),
)
def test_after_the_turns_it_is_level(x, y, base, kept, right_hand):
    """Raised as told, turned back into heights, the feet lie in a level plane; the kept one is not touched."""
    base = Base(base.names, base.x, base.y, base.pitch, right_hand, "" if kept is None else base.names[kept])
    found = find_level(Task(0.2, 0.05 * MG), observed=Observed(x * ARCMIN, y * ARCMIN), base=base)
    before = math.tan(x * ARCMIN) * np.array(base.x) + math.tan(y * ARCMIN) * np.array(base.y)
    raised = [turn.turns * base.pitch * (1 if turn.clockwise == right_hand else -1) for turn in found.turns]
    after = levelling.plane(base.x, base.y, before + np.array(raised))
    assert math.hypot(*after[:2]) < 1e-15
    assert min(abs(turn.raised) for turn in found.turns) == 0.0
    if kept is not None:
        assert found.turns[kept].raised == 0.0


def test_a_foot_that_hangs():
    found = find_level(Task(0.2, 0.05 * MG), base=FOUR, heights=(0.0, 0.0, 0.0, -0.2 * MM))
    assert "back right hangs by 0.20 mm" in found.notices[0].sentence


# What is written ---------------------------------------------------------------------------------------------------


def test_sides():
    assert read_sides("1.2 mm right, 0.5 mm back", "length", "x") == (pytest.approx(1.2e-3), pytest.approx(5e-4), True)
    assert read_sides("2 arcmin front", "angle", "x") == (0.0, pytest.approx(-2 * ARCMIN), True)
    assert read_sides("2 arcmin", "angle", "x") == (pytest.approx(2 * ARCMIN), 0.0, False)
    assert read_sides("1.5 left", "number", "x") == (-1.5, 0.0, True)
    for text, words in (
        ("1 mm rigth", 'Did you mean "right"'),
        ("1 mm up", "names no side"),
        ("1 mm left, 2 mm right", "same axis twice"),
        ("", "nothing was written"),
        ("1 left", "no unit"),
    ):
        with pytest.raises(InputError, match=words):
            read_sides(text, "length", "--bubble")


def test_vials():
    """0.3 mm per arcmin is a radius of 0.3 mm/(2.909e-4) = 1.031 m (by hand)."""
    assert read_vial("0.3 mm/arcmin").per_angle == pytest.approx(1.0313, abs=1e-4)
    assert read_vial("radius 1.0313 m").per_angle == pytest.approx(1.0313)
    assert read_vial("10 arcmin per graduation").graduation == pytest.approx(10 * ARCMIN)
    for text in ("0.3", "radius 0 m", "10 arcmin per division", "-1 mm/arcmin", "2 mm"):
        with pytest.raises(InputError, match="per graduation"):
            read_vial(text)


def test_feet():
    feet, heights = read_feet(["a=0 mm, 0 mm", "b=1 cm, 0 mm", "c=0 mm, 2 cm"], ["b=0.5 mm"])
    assert [foot.x for foot in feet] == pytest.approx([0.0, 0.01, 0.0])
    assert heights == pytest.approx((0.0, 5e-4, 0.0))
    for places, tall, words in (
        (["a=0 mm, 0 mm"], [], "three or four"),
        (["a=0 mm", "b=1 mm, 1 mm"], [], "where it stands"),
        (["a=0 mm, 0 mm", "a=1 mm, 1 mm", "b=0 mm, 1 mm"], [], "there twice"),
        (["ab=0 mm, 0 mm", "b=1 cm, 0 mm", "c=0 mm, 2 cm"], ["ac=1 mm"], "names no foot"),
        (["a=0, 0 mm", "b=1 cm, 0 mm", "c=0 mm, 2 cm"], [], "no unit"),
    ):
        with pytest.raises(InputError, match=words):
            read_feet(places, tall)


@pytest.mark.parametrize(
    ("said", "words"),
    [
        ({"base": Base(("a", "b", "c"), (0.0, 0.1, 0.2), (0.0, 0.1, 0.2))}, "in one line"),
        ({"base": Base(THREE.names, THREE.x, THREE.y, 0.0)}, "pitch: is not above zero"),
        ({"base": Base(THREE.names, THREE.x, THREE.y, 1e-3, True, "middle")}, "is no foot"),
        ({"observed": Observed(math.radians(11), 0.0)}, "more than 10°"),
    ],
)
def test_what_makes_no_sense(said, words):
    with pytest.raises(InputError, match=words):
        find_level(Task(0.2, 0.05 * MG), **said)
    for task in (Task(0.0, MG), Task(0.2, 0.0), Task(0.2, MG, adjusted=1.0)):
        with pytest.raises(InputError):
            find_level(task)
