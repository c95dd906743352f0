"""A table of a million readings with its uncertainty a row, against writing the same table."""

from __future__ import annotations

import os
import subprocess
import sys
import tempfile
from collections.abc import Iterator
from pathlib import Path

from benchmarks.by_library import density
from benchmarks.side_by_side import Outcome, best_of_both, compare

__all__ = ["outcomes"]

ROWS = 1_000_000
OPTIONS = {
    "air": {"co2": {"value": "500 ppm", "u": "50 ppm"}},
    "sensors": {"temperature": {"u": "0.1 K"}, "pressure": {"u": "0.3 hPa"}, "humidity": {"u": "2 %"}},
    "adjusted": {"temperature_change": "2 K", "pressure_change": "10 hPa"},
    "container": {"mass": "12 g", "density": {"value": "2500 kg/m³", "u": "25 kg/m³"}},
    "cycle": {
        "temperature_change": {"value": "0 K", "u": "0.1 K"},
        "pressure_change": {"value": "0 hPa", "u": "0.1 hPa"},
    },
    "balance": {
        "repeatability": "20 µg",
        "scale_interval": "10 µg",
        "nonlinearity": "20 µg",
        "eccentric_loading": "20 µg",
        "adjusting_weight_error": "2 ppm",
    },
}
"""With the load's density 14 uncertain quantities a row: an invented bench."""


def make(path: Path, rows: int) -> None:
    """Write a table of readings, invented by a seeded generator."""
    import numpy as np
    import polars as pl

    random = np.random.default_rng(7)
    frame = pl.DataFrame(
        {
            "sample": [f"S{i:07d}" for i in range(rows)],
            "reading [g]": random.uniform(1, 5, rows).round(5),
            "load.density [kg/m³]": random.uniform(900, 1400, rows).round(1),
            "load.density.u [kg/m³]": random.uniform(1, 5, rows).round(2),
            "air.temperature [°C]": random.uniform(20, 23, rows).round(2),
            "air.pressure [hPa]": random.uniform(960, 1000, rows).round(2),
            "air.humidity [%]": random.uniform(35, 55, rows).round(1),
        }
    )
    frame.write_parquet(path) if path.suffix == ".parquet" else frame.write_csv(path)


def convert_once(source: Path, target: Path) -> None:
    """Convert the table."""
    from envcorr.intake.setup_file import parse_setup
    from envcorr.jobs.mass_file import convert

    convert(source, target, parse_setup(OPTIONS, require=()), force=True)


def outcomes() -> Iterator[Outcome]:
    """Yield the ratios of a converted table."""
    import polars as pl

    with tempfile.TemporaryDirectory() as folder:
        for suffix, bound in ((".csv", 2.5), (".parquet", 5.0)):
            source, target = Path(folder) / f"in{suffix}", Path(folder) / f"out{suffix}"
            copy = target.with_stem("copy")
            make(source, ROWS)
            convert_once(source, target)

            def read(path: Path) -> pl.LazyFrame:
                return pl.scan_parquet(path) if path.suffix == ".parquet" else pl.scan_csv(path, infer_schema=False)

            extra = read(target).select(pl.nth(-6, -5, -4, -3, -2, -1)).collect()
            numbers = [pl.col(name).cast(pl.Float64) for name in extra.columns[:-1]]
            extra = extra.with_columns(numbers)

            def plain(source: Path = source, copy: Path = copy, extra: pl.DataFrame = extra) -> None:
                frame = pl.concat([read(source).collect(), extra], how="horizontal")
                frame.write_parquet(copy) if copy.suffix == ".parquet" else frame.write_csv(copy)

            def ours(source: Path = source, target: Path = target) -> None:
                convert_once(source, target)

            what = f"masses of 1e6 rows of {suffix[1:].upper()} / writing the same table"
            yield compare(what, ours, plain, bound, rounds=3)
        peaks = [_peak(Path(folder), rows) for rows in (ROWS // 2, 3 * ROWS)]
        detail = f"{peaks[1] / 1024:.0f} MiB against {peaks[0] / 1024:.0f} MiB"
        yield Outcome("peak memory for 6 times the rows of Parquet", peaks[1] / peaks[0], 1.3, detail)
        yield _against_library()


def _peak(folder: Path, rows: int) -> float:
    """Return the peak memory of a process that converts ``rows`` rows [KiB]."""
    source, target = folder / f"many{rows}.parquet", folder / "many_out.parquet"
    make(source, rows)
    code = (
        "import resource, pathlib, benchmarks.mass as m;"
        f"m.convert_once(pathlib.Path({str(source)!r}), pathlib.Path({str(target)!r}));"
        "print(resource.getrusage(resource.RUSAGE_SELF).ru_maxrss)"
    )
    done = subprocess.run([sys.executable, "-c", code], check=True, capture_output=True, text=True, env=os.environ)
    os.remove(source)

    return float(done.stdout)


def _against_library() -> Outcome:
    """Compare the computation alone with the ``uncertainties`` library, per row."""
    import numpy as np
    from uncertainties import ufloat

    from envcorr.intake.setup_file import parse_setup
    from envcorr.intake.table import Column
    from envcorr.jobs.mass_table import RowSolver

    rows, few = 65_536, 200
    random = np.random.default_rng(3)
    columns = {
        "reading": Column(random.uniform(1e-3, 5e-3, rows)),
        "load.density": Column(random.uniform(900, 1400, rows), random.uniform(1, 5, rows), "normal"),
        "air.temperature": Column(random.uniform(293, 296, rows)),
        "air.pressure": Column(random.uniform(96_000, 100_000, rows)),
        "air.humidity": Column(random.uniform(0.35, 0.55, rows)),
    }
    setup = parse_setup(OPTIONS, require=())

    def ours() -> None:
        RowSolver(setup).solve(columns, {}, rows)

    def theirs() -> None:
        for i in range(few):
            t = ufloat(columns["air.temperature"].values[i], 0.1)
            p = ufloat(columns["air.pressure"].values[i], 30.0)
            h = ufloat(columns["air.humidity"].values[i], 0.02)
            x, e = ufloat(5e-4, 5e-5), ufloat(0.0, 1.0)
            now = density(t, p, h, x, e)
            then = density(t - ufloat(0, 0.1), p - ufloat(0, 10.0), h, x, e)
            adjusted = density(t.n + ufloat(0, 1.15), p.n + ufloat(0, 577.0), h, x, e)
            s = ufloat(columns["load.density"].values[i], 3.0)
            k = (1 - adjusted / 8000) * (1 + ufloat(0, 1.15e-6))
            bands = ufloat(0, 2e-8) + ufloat(0, 1.15e-8) + ufloat(0, 1.15e-8)
            r = columns["reading"].values[i] + bands
            m = (k * r + (now - then) * 0.012 / ufloat(2500.0, 25.0)) / (1 - now / s)
            assert m.std_dev > 0

    one, two = best_of_both(ours, theirs, 3)
    detail = f"{one / rows * 1e6:.3g} µs against {two / few * 1e6:.3g} µs a row"
    return Outcome("mass and u a row / the uncertainties library", (one / rows) / (two / few), 1 / 200, detail)
