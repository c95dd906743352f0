"""A full room check against its own effects on drawn arrays, and against the ``uncertainties`` library."""

from __future__ import annotations

from collections.abc import Iterator

from benchmarks.by_library import density
from benchmarks.rich_setup import rich_setup
from benchmarks.side_by_side import Outcome, compare
from envcorr.jobs.room import check_room
from envcorr.jobs.weighings import run_weighings

__all__ = ["outcomes"]

DRAWS = 2**14
SETUPS = 2**10


def outcomes() -> Iterator[Outcome]:
    """Yield the ratios of a room check."""
    setup = rich_setup()
    plan = check_room(setup, draws=DRAWS).plan
    run = run_weighings(plan, None, 1, DRAWS, 0, 0.95, "mass")
    every = range(len(plan.effects))

    def effects_once() -> None:
        parts = plan.parts(plan.evaluate(run.leaf_values))
        for i in every:
            parts.effect(i)
        parts.total(every)

    def check() -> None:
        check_room(setup, draws=DRAWS)

    yield compare("full room check / its effects once on drawn arrays", check, effects_once, 10.0, rounds=40)

    from uncertainties import ufloat

    inputs = {
        "t": (295.15, 0.58), "p": (96000.0, 577.0), "h": (0.42, 0.05), "x": (6e-4, 1.15e-4), "e": (0.0, 1.0),
        "dt": (0.0, 0.115), "dp": (0.0, 11.5), "ta": (295.15, 1.73), "pa": (96000.0, 1443.0), "rho": (1050.0, 5.0),
        "rho_c": (2500.0, 30.0), "st": (0.0, 0.1), "sp": (0.0, 50.0), "sh": (0.0, 0.02), "noise": (0.0, 2e-8),
        "more": (0.0, 2.2e-8), "line": (0.0, 1.15e-8), "ecc": (0.0, 1.15e-8), "adj": (0.0, 1.15e-6),
    }  # fmt: skip

    def budgets_by_library() -> None:
        for _ in range(SETUPS):
            v = {name: ufloat(*pair) for name, pair in inputs.items()}
            now = density(v["t"], v["p"], v["h"], v["x"], v["e"])
            then = density(v["t"] - v["dt"], v["p"] - v["dp"], v["h"], v["x"], v["e"])
            adjusted = density(v["ta"], v["pa"], v["h"], v["x"], v["e"])
            read = density(v["t"] + v["st"], v["p"] + v["sp"], v["h"] + v["sh"], v["x"], 0.0)
            k = 1 - adjusted / 8000.0
            error = (
                -now * 5e-3 / v["rho"]
                - (now - then) * 50e-3 / v["rho_c"]
                + (1 - k) / k * 5e-3
                + read * 5e-3 / 1050.0
                + v["noise"]
                + v["more"]
                + v["line"]
                + v["ecc"]
                + 5e-3 * v["adj"]
            )
            assert error.std_dev > 0

    yield compare(
        "full room check / first-order budgets of 1024 set-ups by the uncertainties library",
        check,
        budgets_by_library,
        0.1,
        rounds=3,
    )
