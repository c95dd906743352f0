"""The density of moist air, and its water vapour.

Arguments are floats or arrays that broadcast, in SI units: temperatures in kelvin, pressures in pascal,
relative humidity and mole fractions as numbers from 0 to 1. Nothing is checked here: the ``outside_...``
masks say where a formula leaves the range that its source claims.

CIPM-2007 is Picard, Davis, Gläser, Fujii, Metrologia 45 (2008) 149-155; (A1.1) and so on are its equations.
"""

from __future__ import annotations

from typing import TypeAlias

import numpy as np
from numpy.typing import ArrayLike, NDArray

from envcorr.constants import ZERO_CELSIUS
from envcorr.errors import NotComputedError
from envcorr.estimate import Value
from envcorr.memory import keep_freed_memory

__all__ = [
    "compressibility",
    "density_cipm",
    "density_cipm_column",
    "density_cipm_slopes",
    "density_coolprop",
    "density_oiml",
    "dew_point_from_vapour_fraction",
    "enhancement_factor",
    "humidity_from_vapour_fraction",
    "outside_cipm_range",
    "outside_oiml_range",
    "saturation_vapour_pressure",
    "vapour_density",
    "vapour_fraction_from_dew_point",
    "vapour_fraction_from_humidity",
    "vapour_fraction_from_wet_bulb",
    "vapour_fraction_slopes",
]

_T0 = ZERO_CELSIUS.value

Mask: TypeAlias = NDArray[np.bool_]

# CIPM-2007, equations (1) to (3): molar gas constant (CODATA 2002), molar masses of dry air and of water
_R = 8.314472  # J/(mol K)
_MOLAR_MASS_DRY = 28.96546e-3  # kg/mol, at a CO2 fraction of 0.0004
_MOLAR_MASS_CO2_SLOPE = 12.011e-3  # kg/mol: CO2 takes the place of O2, so what is added is carbon
_CO2_REFERENCE = 0.0004
_MOLAR_MASS_WATER = 18.01528e-3  # kg/mol

# equation (A1.4)
_A0, _A1, _A2 = 1.58123e-6, -2.9331e-8, 1.1043e-10  # K/Pa, 1/Pa, 1/(K Pa)
_B0, _B1 = 5.707e-6, -2.051e-8  # K/Pa, 1/Pa
_C0, _C1 = 1.9898e-4, -2.376e-6  # K/Pa, 1/Pa
_D0, _E0 = 1.83e-11, -0.765e-8  # K²/Pa²

_A, _B, _C, _D = 1.2378847e-5, -1.9121316e-2, 33.93711047, -6.3431645e3  # 1/K², 1/K, 1, K; CIPM-2007 (A1.1)

_F0, _F_P, _F_T = 1.00062, 3.14e-8, 5.6e-7  # 1, 1/Pa, 1/K²; CIPM-2007 (A1.2)


def saturation_vapour_pressure(t_kelvin: Value) -> Value:
    """Return the saturation pressure of water vapour over liquid water [Pa] at ``t_kelvin`` [K].

    CIPM-2007 (A1.1). From 15 to 27 °C it lies within 6e-5 of IAPWS-95 (compared with CoolProp).
    """
    return np.exp(t_kelvin * (_A * t_kelvin + _B) + _C + _D / t_kelvin)  # (A1.1)


def enhancement_factor(temperature: Value, pressure: Value) -> Value:
    """Return the factor by which air at ``pressure`` [Pa] raises the vapour pressure; CIPM-2007 (A1.2)."""
    t = temperature - _T0
    return _F0 + _F_P * pressure + _F_T * t * t  # (A1.2)


def vapour_fraction_from_humidity(temperature: Value, pressure: Value, humidity: Value) -> Value:
    """Return the mole fraction of water vapour from the relative humidity (0..1); CIPM-2007 (A1.3)."""
    return humidity * vapour_fraction_from_dew_point(pressure, temperature)


def vapour_fraction_from_dew_point(pressure: Value, dew_point: Value) -> Value:
    """Return the mole fraction of water vapour from the dew point [K]; CIPM-2007 (A1.3)."""
    return enhancement_factor(dew_point, pressure) * saturation_vapour_pressure(dew_point) / pressure


def vapour_fraction_from_wet_bulb(temperature: Value, pressure: Value, wet_bulb: Value) -> Value:
    """Return the mole fraction of water vapour from an aspirated wet bulb [K] covered with liquid water.

    Psychrometric equation of WMO-No. 8, part I, annex 4.B (from memory), with the saturation pressure and the
    enhancement factor of CIPM-2007. Negative where the wet bulb lies lower than in perfectly dry air.
    """
    depression = temperature - wet_bulb
    coefficient = 6.53e-4 * (1 + 9.44e-4 * (wet_bulb - _T0))  # 1/K
    return vapour_fraction_from_dew_point(pressure, wet_bulb) - coefficient * depression


def vapour_density(temperature: Value, pressure: Value, vapour_fraction: Value) -> Value:
    """Return the mass of water vapour in a volume of air [kg/m³], an ideal gas: xv p Mv/(R T)."""
    return vapour_fraction * pressure * _MOLAR_MASS_WATER / (_R * temperature)


def humidity_from_vapour_fraction(temperature: Value, pressure: Value, vapour_fraction: Value) -> Value:
    """Return the relative humidity (0..1) from the mole fraction of water vapour; CIPM-2007 (A1.3)."""
    return vapour_fraction / vapour_fraction_from_dew_point(pressure, temperature)


def dew_point_from_vapour_fraction(pressure: Value, vapour_fraction: Value) -> Value:
    """Return the dew point [K], over liquid water, of air with the given mole fraction of water vapour.

    CIPM-2007 (A1.3) solved by Newton's method. Not a number where there is no vapour at all.
    """
    vapour = np.where(np.asarray(vapour_fraction) > 0, vapour_fraction, np.nan)
    # start within 1 K of the answer: inverse of the Magnus formula, WMO-No. 8, annex 4.B (from memory)
    magnus = np.log(vapour * pressure / 611.2)
    dew_point: Value = _T0 + 243.12 * magnus / (17.62 - magnus)
    for _ in range(4):  # each step squares the relative departure
        slope = 2 * _A * dew_point + _B - _D / dew_point**2  # d ln psv / dT of (A1.1)
        excess = vapour_fraction_from_dew_point(pressure, dew_point) / vapour
        dew_point = dew_point - np.log(excess) / slope
    return dew_point


def compressibility(temperature: Value, pressure: Value, vapour_fraction: Value) -> Value:
    """Return the compressibility factor Z of moist air (a number); CIPM-2007 (A1.4)."""
    return _compressibility(temperature - _T0, pressure / temperature, vapour_fraction)


def _compressibility(t: Value, q: Value, x: Value) -> Value:
    """Return Z from t [°C], q = p/T [Pa/K] and the mole fraction of water vapour x."""
    dry = _A0 + t * (_A2 * t + _A1)
    moist = _B0 + _B1 * t + x * (_C0 + _C1 * t)
    return 1 - q * (dry + x * moist - q * (_D0 + _E0 * x * x))  # (A1.4)


def density_cipm(temperature: Value, pressure: Value, vapour_fraction: Value, co2: Value) -> Value:
    """Return the density of moist air [kg/m³] from [K], [Pa] and the mole fractions of water vapour and CO2.

    CIPM-2007, equations (1) to (3); the formula itself has a relative standard uncertainty of 22e-6
    (:data:`envcorr.constants.CIPM_RELATIVE_U`) from 600 to 1100 hPa and 15 to 27 °C.
    """
    dry = (_MOLAR_MASS_DRY + _MOLAR_MASS_CO2_SLOPE * (co2 - _CO2_REFERENCE)) / _R  # (2), as M/R in kg K/J
    water = _MOLAR_MASS_WATER / _R
    q = pressure / temperature
    z = _compressibility(temperature - _T0, q, vapour_fraction)
    return q * (dry - vapour_fraction * (dry - water)) / z  # (1): p Ma/(Z R T) (1 - xv (1 - Mv/Ma))


def density_cipm_slopes(temperature: Value, pressure: Value, vapour_fraction: Value, co2: Value) -> tuple[Value, ...]:
    """Return the partial derivatives of :func:`density_cipm` in its four arguments, in order."""
    dry = (_MOLAR_MASS_DRY + _MOLAR_MASS_CO2_SLOPE * (co2 - _CO2_REFERENCE)) / _R
    excess = dry - _MOLAR_MASS_WATER / _R
    t, q, x = temperature - _T0, pressure / temperature, vapour_fraction
    cross = _C0 + _C1 * t
    real = _A0 + t * (_A2 * t + _A1) + x * (_B0 + _B1 * t + x * cross)
    square = _D0 + _E0 * x * x
    z = 1 - q * (real - q * square)
    by_q = 2 * q * square - real
    by_t = -q * (_A1 + 2 * _A2 * t + x * (_B1 + _C1 * x))
    by_x = -q * (_B0 + _B1 * t + 2 * x * (cross - q * _E0))
    moist, per = dry - x * excess, 1 / z
    by_pressure = moist * per * (1 - q * by_q * per) / temperature
    return (
        -q * by_pressure - q * moist * by_t * per * per,
        by_pressure,
        -q * per * (excess + moist * by_x * per),
        q * per * (1 - x) * (_MOLAR_MASS_CO2_SLOPE / _R),
    )


def vapour_fraction_slopes(temperature: Value, pressure: Value, humidity: Value) -> tuple[Value, ...]:
    """Return the partial derivatives of :func:`vapour_fraction_from_humidity` in its three arguments, in order."""
    saturation = saturation_vapour_pressure(temperature)
    factor = enhancement_factor(temperature, pressure)
    saturated = factor * saturation / pressure
    by_temperature = saturated * (2 * _A * temperature + _B - _D / temperature**2)
    by_temperature = by_temperature + 2 * _F_T * (temperature - _T0) * saturation / pressure
    return humidity * by_temperature, humidity * (_F_P * saturation - saturated) / pressure, saturated


def density_cipm_column(
    temperature: ArrayLike, pressure: ArrayLike, humidity: ArrayLike, co2: ArrayLike, *, block: int = 2**16
) -> NDArray[np.float64]:
    """Return :func:`density_cipm` [kg/m³] of long columns, from the relative humidity.

    Each argument is a number or a column of one common length. Only ``block`` rows are in work at a time, so
    that the intermediate arrays stay in the cache: many times faster than in one piece, and hardly more
    memory than the result takes.
    """
    keep_freed_memory()
    columns = [np.asarray(column, dtype=np.float64) for column in (temperature, pressure, humidity, co2)]
    (rows,) = np.broadcast_shapes((1,), *(column.shape for column in columns))
    result = np.empty(rows)
    for start in range(0, rows, block):
        part = slice(start, start + block)
        t, p, h, x = (column[part] if column.size > 1 else column for column in columns)
        result[part] = density_cipm(t, p, vapour_fraction_from_humidity(t, p, h), x)
    return result


def density_oiml(temperature: Value, pressure: Value, humidity: Value) -> Value:
    """Return the density of moist air [kg/m³] by the approximation of OIML R 111-1:2004 (E.3-1).

    In its range (900 to 1100 hPa, 10 to 30 °C, below 80 %) it departs from CIPM-2007 by up to 2.9e-4, in
    ordinary laboratory air by less than 1e-4 (:data:`envcorr.constants.OIML_AIR_RELATIVE_DEPARTURE`).
    """
    p, h, t = pressure / 100, humidity * 100, temperature - _T0  # hPa, %, °C
    return (0.34848 * p - 0.009 * h * np.exp(0.061 * t)) / temperature  # (E.3-1)


def density_coolprop(
    temperature: Value,
    pressure: Value,
    *,
    humidity: Value | None = None,
    dew_point: Value | None = None,
    wet_bulb: Value | None = None,
) -> Value:
    """Return the density of moist air [kg/m³] from CoolProp's humid air, given one measure of humidity.

    Real-gas virial equations after Herrmann, Kretzschmar and Gatley, HVAC&R Research 15 (2009) 961, from 130
    to 623 K and up to 10 MPa; the wet bulb is the thermodynamic one. CO2 is not an input. In a laboratory it
    lies 3.8e-5 above CIPM-2007 (molar mass, second virial coefficient). 10 µs a value, 1 ms from a wet bulb.

    Raises NotComputedError where CoolProp has no answer.
    """
    from CoolProp.CoolProp import HAPropsSI

    given = {"R": humidity, "D": dew_point, "B": wet_bulb}
    ((key, moisture),) = ((key, value) for key, value in given.items() if value is not None)
    state = np.broadcast(temperature, pressure, moisture)
    try:
        values = [1 / HAPropsSI("Vha", "T", t, "P", p, key, w) for t, p, w in state]
    except ValueError as error:
        raise NotComputedError(
            f"CoolProp's humid air has no density for such air: {error}. "
            "Check the temperature, the pressure and the humidity."
        ) from error
    return np.asarray(values).reshape(state.shape) if state.shape else float(values[0])


def outside_cipm_range(temperature: Value, pressure: Value) -> Mask:
    """Return where CIPM-2007 claims no uncertainty: outside 600 to 1100 hPa, 15 to 27 °C (its section 3)."""
    return _outside(pressure, 6e4, 1.1e5) | _outside(temperature, _T0 + 15, _T0 + 27)


def outside_oiml_range(temperature: Value, pressure: Value, humidity: Value) -> Mask:
    """Return where (E.3-1) is not claimed: outside 900 to 1100 hPa, 10 to 30 °C, 0 to 80 % (R 111-1, E.3)."""
    too_moist = _outside(humidity, 0.0, 0.8)
    return too_moist | _outside(pressure, 9e4, 1.1e5) | _outside(temperature, _T0 + 10, _T0 + 30)


def _outside(value: Value, low: float, high: float) -> Mask:
    margin = 1e-12 * high  # a bound converted from another unit is still inside
    return np.asarray((value < low - margin) | (value > high + margin))
