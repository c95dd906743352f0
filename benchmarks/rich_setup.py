"""A set-up with twenty uncertain quantities, for measuring (an invented scene)."""

from __future__ import annotations

from envcorr.intake.setup_file import parse_setup
from envcorr.setup import Setup

__all__ = ["rich_setup"]


def rich_setup() -> Setup:
    """Return an open glass dish with a polymer in an air-conditioned room, a barometer and a hygrometer at hand."""
    return parse_setup(
        {
            "target": {"resolution": "0.1 mg"},
            "air": {
                "temperature": {"low": "21 °C", "high": "23 °C"},
                "pressure": {"low": "950 hPa", "high": "970 hPa"},
                "humidity": {"value": "42 %", "u": "5 %"},
            },
            "sensors": {
                "temperature": {"u": "0.1 K"},
                "pressure": {"u": "0.5 hPa"},
                "humidity": {"u": "2 %"},
            },
            "cycle": {"temperature_change": "0.2 K", "pressure_change": "0.2 hPa"},
            "container": {"mass": "50 g", "density": {"value": "2500 kg/m³", "u": "30 kg/m³"}},
            "load": {"mass": "5 g", "density": {"value": "1050 kg/m³", "u": "5 kg/m³"}},
            "balance": {
                "repeatability": "20 µg",
                "scale_interval": "10 µg",
                "scatter_on": "30 µg",
                "scatter_off": "20 µg",
                "nonlinearity": "20 µg",
                "eccentric_loading": "20 µg",
                "adjusting_weight_error": "2 ppm",
            },
        }
    )
