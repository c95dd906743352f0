"""Tilt through the room check: cosines, two axes, adjusted out of level, a tilt that changes."""

from __future__ import annotations

import math

import pytest

from envcorr.estimate import Estimate
from envcorr.jobs.room import check_room
from tests.scene import MG, ROOM, UG, about, normal, row, setup

ARCMIN = math.pi / 10800
LEVEL = {"bench_tilt_x": 0.0, "bench_tilt_y": 0.0, "adjusted_bench_tilt_x": 0.0, "adjusted_bench_tilt_y": 0.0}


def check(**said):
    return check_room(setup(ROOM, LEVEL, said), draws=2**14)


def test_a_foot_that_dropped():
    """0.7 mm over 140 mm is 17.2 arcmin; 200 g (1 - cos) = 200 g x 12.5e-6 = 2.50 mg lighter (geometry)."""
    tilt = math.atan(0.7 / 140)
    assert tilt / ARCMIN == pytest.approx(17.19, abs=0.01)
    found = row(check(load_mass=0.2, bench_tilt_x=tilt), "tilt")
    assert found.mean_error == pytest.approx(-0.2 * (1 - math.cos(tilt)), rel=1e-9)
    assert found.mean_error / MG == pytest.approx(-2.50, abs=0.005)
    assert found.correction == pytest.approx(-found.mean_error, rel=1e-9)


def test_the_largest_tilt():
    """For 0.05 mg at 200 g: theta²/2 = 2.5e-7, theta = 7.07e-4 rad = 2.43 arcmin (small-angle cosine)."""
    result = check(load_mass=0.2, target_resolution=0.1 * MG)
    answers = {answer.label: answer.value for answer in row(result, "tilt").answers}
    found = next(value for label, value in answers.items() if label.startswith("largest tilt"))
    assert found / ARCMIN == pytest.approx(2.431, abs=0.001)


@pytest.mark.parametrize(
    ("x", "y"), [(0.003, 0.004), (0.02, -0.05), (-0.1, 0.07)], ids=["small", "mixed signs", "large"]
)
def test_two_axes(x, y):
    """A plane whose gradients are tan x and tan y has the normal (-tan x, -tan y, 1): cos = 1/|normal| (geometry)."""
    normal_length = math.sqrt(math.tan(x) ** 2 + math.tan(y) ** 2 + 1)
    found = row(check(load_mass=0.1, bench_tilt_x=x, bench_tilt_y=y), "tilt")
    assert found.mean_error == pytest.approx(0.1 * (1 / normal_length - 1), rel=1e-9)
    assert row(check(load_mass=0.1, bench_tilt_x=-x, bench_tilt_y=-y), "tilt").mean_error == found.mean_error


def test_level_within_a_spread_reads_light():
    """1 - cos = (a² + b²)/2: with two normals of u = 2 arcmin its mean is u², its u is u² (chi-square, 2 degrees)."""
    u = 2 * ARCMIN
    result = check(load_mass=0.2, bench_tilt_x=normal(0.0, u), bench_tilt_y=normal(0.0, u))
    found = row(result, "tilt")
    assert found.mean_error == pytest.approx(-0.2 * u**2, rel=0.02)
    assert found.u == pytest.approx(0.2 * u**2, rel=0.05)
    assert found.first_order_u == 0.0
    assert "tilt" in result.first_order.blind_to


def test_adjusted_out_of_level_is_linear():
    """cos B/cos A - 1 with B = A + dB is -tan A dB to first order: both signs of dB, and steeper the larger A is."""
    tilt, change = 60 * ARCMIN, 0.1 * ARCMIN
    up, down = (
        row(check(load_mass=0.2, bench_tilt_x=tilt + d, adjusted_bench_tilt_x=tilt), "tilt").mean_error
        for d in (change, -change)
    )
    assert up == pytest.approx(-0.2 * math.tan(tilt) * change, rel=2e-3)
    assert down == pytest.approx(-up, rel=4e-3)
    result = check(load_mass=0.2, bench_tilt_x=tilt, adjusted_bench_tilt_x=tilt)
    shift = next(a.value for a in row(result, "tilt").answers if a.label.startswith("shift for each"))
    assert shift == pytest.approx(-math.tan(tilt) * ARCMIN, rel=1e-9)


def test_a_tilt_that_changes_acts_on_the_gross():
    """Out of level by A at both readings but for dB more at the load: the container's weight feels -tan A dB too."""
    tilt, change = 30 * ARCMIN, 0.5 * ARCMIN
    said = {
        "bench_tilt_x": tilt,
        "adjusted_bench_tilt_x": tilt,
        "cycle_tilt_change": Estimate(change),
        "container_density": 2500.0,
    }
    bare = row(check(load_mass=0.01, container_mass=0.0, **said), "tilt").mean_error
    loaded = row(check(load_mass=0.01, container_mass=0.1, **said), "tilt").mean_error
    assert abs(bare) < 1e-15  # the loaded reading stands as it was adjusted
    # the tare reading stood at A - dB: it felt more than now, so the net reads light by the container's part
    assert loaded == pytest.approx(-0.1 * math.tan(tilt) * change, rel=1e-2)


def test_zero_coefficient():
    """5 µg per arcmin and 0.4 arcmin more at the load: 2 µg (by hand)."""
    said = {"balance_zero_tilt_coefficient": Estimate(5 * UG / ARCMIN), "cycle_tilt_change": Estimate(0.4 * ARCMIN)}
    found = row(check(**said), "tilt_zero")
    assert found.mean_error == pytest.approx(2 * UG, rel=1e-9)
    bound = row(check(balance_zero_tilt_coefficient=about(0.0, 5 * UG / ARCMIN), cycle_tilt_change=0.0), "tilt_zero")
    assert bound.u == 0.0


def test_levelled_after_the_adjustment_is_said():
    quiet = check(bench_tilt_x=0.0, adjusted_bench_tilt_x=0.0)
    assert not [n for n in quiet.notices if n.where == "tilt"]
    moved = check(bench_tilt_x=0.0, adjusted_bench_tilt_x=20 * ARCMIN)
    (notice,) = [n for n in moved.notices if n.where == "tilt"]
    assert "levelled or moved since" in notice.sentence
    assert "Adjust it again" in notice.sentence
