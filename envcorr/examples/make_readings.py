"""Makes readings.csv, an INVENTED table of 40 foam and filter readings; the same seed gives the same table.

The true masses are drawn, the readings follow from them by buoyancy with some noise; no real sample, room or balance
stands behind it. Run it by ``python -m envcorr.examples.make_readings``.
"""

from __future__ import annotations

import csv
from pathlib import Path

import numpy as np

from envcorr.constants import ZERO_CELSIUS
from envcorr.laws import air, buoyancy

__all__ = ["main", "rows"]


def rows() -> list[dict[str, str]]:
    """Return the rows of the table."""
    random = np.random.default_rng(20)
    found = []
    for number in range(1, 41):
        is_foam = number <= 20
        mass = random.uniform(0.8e-3, 2.5e-3) if is_foam else random.uniform(80e-6, 160e-6)
        density = random.uniform(25, 60) if is_foam else 2144.0
        temperature = ZERO_CELSIUS.value + random.uniform(20.5, 22.0)
        pressure, humidity = 1e2 * random.uniform(935, 955), random.uniform(0.38, 0.47)
        fraction = air.vapour_fraction_from_humidity(temperature, pressure, humidity)
        rho = air.density_cipm(temperature, pressure, fraction, 5e-4)
        factor = buoyancy.adjustment_factor(8000.0, rho)
        reading = mass * (1 - rho / density) / factor + random.normal(0, 10e-9)
        found.append(
            {
                "sample": f"{'foam' if is_foam else 'filter'} {number:02d}",
                "reading [g]": f"{reading * 1e3:.5f}",
                "load.density [kg/m³]": f"{density:.1f}",
                "load.density.u [kg/m³]": f"{0.015 * density:.2g}" if is_foam else "60",
                "load.density_kind": "envelope" if is_foam else "gas-displacement",
                "load.open_cell_fraction": "0" if is_foam else "",
                "air.temperature [°C]": f"{temperature - ZERO_CELSIUS.value:.2f}",
                "air.pressure [hPa]": f"{pressure / 100:.1f}",
                "air.humidity [%]": f"{humidity * 100:.1f}",
                "remark": "invented",
            }
        )
    return found


def main() -> None:
    """Write the table beside this script."""
    table = rows()
    with Path(__file__).with_name("readings.csv").open("w", encoding="utf-8", newline="") as file:
        writer = csv.DictWriter(file, list(table[0]), lineterminator="\n")
        writer.writeheader()
        writer.writerows(table)


if __name__ == "__main__":
    main()
