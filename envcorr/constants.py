"""Constants: one entry each, with value, standard uncertainty, unit and source."""

from __future__ import annotations

from dataclasses import dataclass

__all__ = [
    "AIR_BREAKDOWN_FIELD",
    "CIPM_RELATIVE_U",
    "CONVENTIONAL_AIR_DENSITY",
    "CONVENTIONAL_WEIGHT_DENSITY",
    "COOLPROP_AIR_RELATIVE_U",
    "DRY_AIR_GAS_CONSTANT",
    "EARTH_TIDE",
    "LOCAL_GRAVITY_U",
    "OIML_AIR_RELATIVE_DEPARTURE",
    "STANDARD_GRAVITY",
    "STANDARD_PRESSURE",
    "STEFAN_BOLTZMANN",
    "VACUUM_PERMEABILITY",
    "VACUUM_PERMITTIVITY",
    "ZERO_CELSIUS",
    "Constant",
]


@dataclass(frozen=True, slots=True)
class Constant:
    """A physical constant or a reference value: ``value`` and ``u`` in ``unit``, and where they come from."""

    value: float
    unit: str
    source: str
    u: float = 0.0

    def __float__(self) -> float:
        return self.value


ZERO_CELSIUS = Constant(273.15, "K", "0 °C; SI brochure, 9th edition, 2.3.1 (exact)")
STANDARD_GRAVITY = Constant(9.80665, "m/s²", "3rd CGPM (1901), declaration 2 (exact)")
VACUUM_PERMITTIVITY = Constant(8.8541878128e-12, "F/m", "CODATA 2018", 1.3e-21)
VACUUM_PERMEABILITY = Constant(1.25663706212e-6, "N/A²", "CODATA 2018", 1.9e-16)
STEFAN_BOLTZMANN = Constant(5.670374419e-8, "W/(m² K⁴)", "SI brochure, 9th edition (exact, rounded)")
STANDARD_PRESSURE = Constant(101325.0, "Pa", "standard atmosphere, 10th CGPM (1954), resolution 4 (exact)")

CONVENTIONAL_AIR_DENSITY = Constant(1.2, "kg/m³", "OIML D 28:2004, clause 5 (exact by convention)")
CONVENTIONAL_WEIGHT_DENSITY = Constant(8000.0, "kg/m³", "OIML D 28:2004, clause 5 (exact by convention)")

CIPM_RELATIVE_U = Constant(22e-6, "1", "the CIPM-2007 formula itself; Picard et al., Metrologia 45 (2008) 149, table 2")
OIML_AIR_RELATIVE_DEPARTURE = Constant(
    3e-4, "1", "largest departure of OIML R 111-1 (E.3-1) from CIPM-2007 in its range (computed: 2.9e-4)"
)
COOLPROP_AIR_RELATIVE_U = Constant(2e-4, "1", "CoolProp's humid air outside the range of CIPM-2007 (judgement)")

AIR_BREAKDOWN_FIELD = Constant(
    3e6, "V/m", "breakdown of air between plane electrodes 1 cm and more apart (handbook value, from memory)"
)
EARTH_TIDE = Constant(
    0.25e-6, "1", "largest change of gravity by moon and sun, peak to peak 2.5 µm/s² (Torge, Gravimetry, from memory)"
)
LOCAL_GRAVITY_U = Constant(3e-4, "m/s²", "local departure from normal gravity, where not measured (judgement)")
DRY_AIR_GAS_CONSTANT = Constant(287.05287, "J/(kg K)", "ISO 2533:1975, table 1")
