"""Air buoyancy: what a balance shows of a mass, and what a density or a volume is in air.

Densities in kg/m³, masses in kg, volumes in m³; floats or arrays that broadcast. rho0 = 1.2 kg/m³ and
rho_c = 8000 kg/m³ are the conventional values of OIML D 28:2004.
"""

from __future__ import annotations

from envcorr.constants import CONVENTIONAL_AIR_DENSITY, CONVENTIONAL_WEIGHT_DENSITY
from envcorr.estimate import Value

__all__ = [
    "adjustment_factor",
    "comparison_correction",
    "conventional_mass",
    "density_from_uncorrected",
    "displaced_volume_of_foam",
    "mass_from_conventional",
    "open_share_of_gas",
]

_RHO_0 = CONVENTIONAL_AIR_DENSITY.value
_RHO_C = CONVENTIONAL_WEIGHT_DENSITY.value
_CONVENTION = 1 - _RHO_0 / _RHO_C  # what the reference weight retains in the reference air


def adjustment_factor(adjusting_weight_density: Value, air_density_at_adjustment: Value) -> Value:
    """Return K: a body in air reads R = m (1 - rho_air/rho)/K on a balance that was adjusted so.

    The adjusting weight counts with its conventional mass, so its mass is that times
    (1 - rho0/8000)/(1 - rho0/rho_c), and the balance shows the conventional mass where the weight's pull is
    m (1 - rho_adj/rho_c): OIML D 28:2004, clause 5, and R 111-1:2004, C.5. A weight of 8000 kg/m³ in air of
    1.2 kg/m³ gives K = 0.99985.
    """
    weight = adjusting_weight_density
    return _CONVENTION / (1 - _RHO_0 / weight) * (1 - air_density_at_adjustment / weight)


def conventional_mass(mass: Value, volume: Value) -> Value:
    """Return the conventional mass [kg] from mass [kg] and volume [m³]; OIML D 28:2004, clause 5."""
    return (mass - _RHO_0 * volume) / _CONVENTION


def mass_from_conventional(conventional_mass: Value, volume: Value) -> Value:
    """Return the mass [kg] from conventional mass [kg] and volume [m³]; OIML D 28:2004, clause 5."""
    return conventional_mass * _CONVENTION + _RHO_0 * volume


def comparison_correction(air_density: Value, test_density: Value, reference_density: Value) -> Value:
    """Return C, the relative buoyancy correction of a comparison of two weights by conventional mass.

    m_ct = m_cr (1 + C) + indicated difference, C = (rho_a - rho0)(1/rho_t - 1/rho_r): OIML R 111-1:2004,
    (10.2.1-1).
    """
    return (air_density - _RHO_0) * (1 / test_density - 1 / reference_density)


def displaced_volume_of_foam(
    mass: Value, envelope_density: Value, open_cell_fraction: Value, solid_density: Value
) -> Value:
    """Return the volume of air [m³] that a foam displaces: its envelope less the gas in its open cells.

    ``open_cell_fraction`` is the open share of the gas volume (0..1); see :func:`open_share_of_gas`. With no
    open cell the result is mass/envelope density, with all of them open mass/solid density.
    """
    envelope = mass / envelope_density
    gas = envelope - mass / solid_density
    return envelope - open_cell_fraction * gas


def open_share_of_gas(open_volume_share: Value, envelope_density: Value, solid_density: Value) -> Value:
    """Return the open share of the gas volume from the open share of the geometric volume (both 0..1).

    ISO 4590 states the open cells in percent of the geometric volume (from memory), of which the gas is
    1 - envelope density/solid density.
    """
    return open_volume_share / (1 - envelope_density / solid_density)


def density_from_uncorrected(apparent_density: Value, air_density: Value, adjustment_factor: Value) -> Value:
    """Return the density [kg/m³] of a body from its reading in air over its volume: rho = K rho' + rho_air.

    From K R = m - rho_air V with rho' = R/V.
    """
    return adjustment_factor * apparent_density + air_density
