"""Air density of long columns against memory bandwidth, and against CoolProp."""

from __future__ import annotations

import tracemalloc
from collections.abc import Iterator

import numpy as np

from benchmarks.side_by_side import Outcome, best_of_both, compare
from envcorr.laws.air import density_cipm_column, density_coolprop

__all__ = ["outcomes"]

ROWS = 10_000_000
FEW = 2_000


def outcomes() -> Iterator[Outcome]:
    """Yield the ratios of the air density kernel."""
    random = np.random.default_rng(1)
    temperature = 293.15 + random.uniform(-3, 3, ROWS)
    pressure = 1e5 + random.uniform(-3e3, 3e3, ROWS)
    humidity = random.uniform(0.3, 0.6, ROWS)

    def column() -> None:
        density_cipm_column(temperature, pressure, humidity, 4e-4)

    def read_and_write() -> None:  # what no formula can beat: every input read, a new column written
        out = temperature + pressure
        out += humidity

    yield compare("air density of 1e7 rows / reading and writing them", column, read_and_write, 10.0, rounds=5)

    tracemalloc.start()
    column()
    peak = tracemalloc.get_traced_memory()[1]
    tracemalloc.stop()
    yield Outcome("peak memory of it / the result's column", peak / (8 * ROWS), 1.2, f"{peak / 2**20:.0f} MiB")

    def by_coolprop() -> None:
        density_coolprop(temperature[:FEW], pressure[:FEW], humidity=humidity[:FEW])

    ours, theirs = best_of_both(column, by_coolprop, 3)
    ratio = (ours / ROWS) / (theirs / FEW)
    detail = f"{ours / ROWS * 1e9:.3g} ns against {theirs / FEW * 1e9:.3g} ns a row"
    yield Outcome("air density a row / CoolProp's humid air", ratio, 0.01, detail)
