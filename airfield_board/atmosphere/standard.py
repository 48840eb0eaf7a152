"""The standard atmosphere from -5 km to 20 km geopotential altitude, and its inverses.

Two layers: the troposphere, in which temperature falls steadily, and above 11 km the tropopause layer of one
temperature. All is SI: altitudes in metres of geopotential, pressure in pascals, temperature in kelvin, density in
kg/m3. Functions take floats (and return a float) or arrays that broadcast; NaN gives NaN, and what lies outside
`LOWEST_ALTITUDE_M` to `HIGHEST_ALTITUDE_M` gives NaN.

References
----------
ISO 2533:1975, Standard Atmosphere, clause 2; ICAO Doc 7488, Manual of the ICAO Standard Atmosphere; U.S. Standard
Atmosphere 1976. All three define the same atmosphere up to 20 km and beyond.
"""

from typing import Final

import numpy as np

from airfield_board.atmosphere.evaluation import FloatArray, evaluated, within
from airfield_board.units import STANDARD_GRAVITY_M_S2, Number

GAS_CONSTANT_J_KG_K: Final = 287.05287
"""Specific gas constant of dry air, ISO 2533 table 1."""
SEA_LEVEL_TEMPERATURE_K: Final = 288.15
"""ISO 2533 table 1."""
SEA_LEVEL_PRESSURE_PA: Final = 101325.0
"""ISO 2533 table 1."""
LAPSE_RATE_K_M: Final = 0.0065
"""Fall of temperature with altitude in the troposphere, ISO 2533 table 4."""
TROPOPAUSE_ALTITUDE_M: Final = 11000.0
"""ISO 2533 table 4."""
LOWEST_ALTITUDE_M: Final = -5000.0
"""Lower end of the tables of ICAO Doc 7488."""
HIGHEST_ALTITUDE_M: Final = 20000.0
"""Upper end of the layer of constant temperature, ISO 2533 table 4."""

SEA_LEVEL_DENSITY_KG_M3: Final = SEA_LEVEL_PRESSURE_PA / (GAS_CONSTANT_J_KG_K * SEA_LEVEL_TEMPERATURE_K)
TROPOPAUSE_TEMPERATURE_K: Final = SEA_LEVEL_TEMPERATURE_K - LAPSE_RATE_K_M * TROPOPAUSE_ALTITUDE_M

_TEMPERATURE_BY_PRESSURE: Final = GAS_CONSTANT_J_KG_K * LAPSE_RATE_K_M / STANDARD_GRAVITY_M_S2
"""n in T/T0 = (p/p0)**n."""
_TEMPERATURE_BY_DENSITY: Final = _TEMPERATURE_BY_PRESSURE / (1.0 - _TEMPERATURE_BY_PRESSURE)
"""k in T/T0 = (rho/rho0)**k."""
_TEMPERATURE_HEIGHT_M: Final = SEA_LEVEL_TEMPERATURE_K / LAPSE_RATE_K_M
_TROPOPAUSE_SCALE_HEIGHT_M: Final = GAS_CONSTANT_J_KG_K * TROPOPAUSE_TEMPERATURE_K / STANDARD_GRAVITY_M_S2
_TROPOPAUSE_PRESSURE_PA: Final = SEA_LEVEL_PRESSURE_PA * float(
    (TROPOPAUSE_TEMPERATURE_K / SEA_LEVEL_TEMPERATURE_K) ** (1.0 / _TEMPERATURE_BY_PRESSURE)
)
_TROPOPAUSE_DENSITY_KG_M3: Final = _TROPOPAUSE_PRESSURE_PA / (GAS_CONSTANT_J_KG_K * TROPOPAUSE_TEMPERATURE_K)
_ROUNDING_M: Final = 1e-6
"""Lets the round trip of an altitude at either end of the range come back."""


def temperature_at(altitude_m: Number) -> Number:
    """Temperature of the standard atmosphere.

    Parameters
    ----------
    altitude_m
        Geopotential altitude [m], -5,000 to 20,000.

    Returns
    -------
    float or ndarray
        Temperature [K].
    """
    return evaluated(_temperature_at, altitude_m)


def pressure_at(altitude_m: Number) -> Number:
    """Pressure of the standard atmosphere.

    Parameters
    ----------
    altitude_m
        Geopotential altitude [m], -5,000 to 20,000.

    Returns
    -------
    float or ndarray
        Pressure [Pa].
    """
    return evaluated(_pressure_at, altitude_m)


def density_at(altitude_m: Number) -> Number:
    """Density of the standard atmosphere.

    Parameters
    ----------
    altitude_m
        Geopotential altitude [m], -5,000 to 20,000.

    Returns
    -------
    float or ndarray
        Density [kg/m3].
    """
    return evaluated(_density_at, altitude_m)


def altitude_from_pressure(pressure_pa: Number) -> Number:
    """Altitude at which the standard atmosphere has a pressure: what an altimeter set to 1013.25 hPa reads.

    Parameters
    ----------
    pressure_pa
        Pressure [Pa], about 5,475 to 177,700.

    Returns
    -------
    float or ndarray
        Geopotential altitude [m].
    """
    return evaluated(_altitude_from_pressure, pressure_pa)


def altitude_from_density(density_kg_m3: Number) -> Number:
    """Altitude at which the standard atmosphere has a density.

    Parameters
    ----------
    density_kg_m3
        Density [kg/m3], about 0.0880 to 1.930.

    Returns
    -------
    float or ndarray
        Geopotential altitude [m].
    """
    return evaluated(_altitude_from_density, density_kg_m3)


def pressure_scale_height(altitude_m: Number) -> Number:
    """Pressure scale height -dH/d(ln p) of the standard atmosphere.

    Parameters
    ----------
    altitude_m
        Geopotential altitude [m], -5,000 to 20,000.

    Returns
    -------
    float or ndarray
        Scale height [m], above 0.
    """
    return evaluated(_pressure_scale_height, altitude_m)


def density_scale_height(altitude_m: Number) -> Number:
    """Density scale height -dH/d(ln rho) of the standard atmosphere.

    Parameters
    ----------
    altitude_m
        Geopotential altitude [m], -5,000 to 20,000; at the tropopause, where the slope breaks, that of the upper layer.

    Returns
    -------
    float or ndarray
        Scale height [m], above 0.
    """
    return evaluated(_density_scale_height, altitude_m)


def lapse_rate_at(altitude_m: Number) -> Number:
    """Fall of temperature with altitude, -dT/dH, of the standard atmosphere.

    Parameters
    ----------
    altitude_m
        Geopotential altitude [m], -5,000 to 20,000; at the tropopause that of the upper layer.

    Returns
    -------
    float or ndarray
        Lapse rate [K/m].
    """
    return evaluated(_lapse_rate_at, altitude_m)


def within_range(altitude_m: Number) -> Number:
    """Keep altitudes at which the standard atmosphere is defined here; all else becomes NaN.

    Parameters
    ----------
    altitude_m
        Geopotential altitude [m].

    Returns
    -------
    float or ndarray
        The same, or NaN.
    """
    return evaluated(_within_range, altitude_m)


def _within_range(altitude_m: FloatArray) -> FloatArray:
    return within(altitude_m, LOWEST_ALTITUDE_M - _ROUNDING_M, HIGHEST_ALTITUDE_M + _ROUNDING_M)


def _power(base: FloatArray, exponent: float) -> FloatArray:
    # exp(k ln x) instead of x**k: numpy computes it about twice as fast, and so close to 1, where these bases lie, no
    # digit that counts is lost. It is written over the base, which is a step of the caller's: a million rows take as
    # long as the memory they pass through.
    np.log(base, out=base)
    base *= exponent
    return np.exp(base, out=base)


def _temperature_at(altitude_m: FloatArray) -> FloatArray:
    temperature_k = np.minimum(_within_range(altitude_m), TROPOPAUSE_ALTITUDE_M)
    temperature_k *= -LAPSE_RATE_K_M
    temperature_k += SEA_LEVEL_TEMPERATURE_K
    return temperature_k


def _pressure_at(altitude_m: FloatArray) -> FloatArray:
    altitude_m = _within_range(altitude_m)
    temperature_ratio = altitude_m * (-1.0 / _TEMPERATURE_HEIGHT_M)
    temperature_ratio += 1.0
    pressure_pa = _power(temperature_ratio, 1.0 / _TEMPERATURE_BY_PRESSURE)
    pressure_pa *= SEA_LEVEL_PRESSURE_PA
    above = altitude_m > TROPOPAUSE_ALTITUDE_M
    if above.any():
        falling = np.exp((TROPOPAUSE_ALTITUDE_M - altitude_m) / _TROPOPAUSE_SCALE_HEIGHT_M)
        pressure_pa = np.where(above, _TROPOPAUSE_PRESSURE_PA * falling, pressure_pa)
    return pressure_pa


def _density_at(altitude_m: FloatArray) -> FloatArray:
    return _pressure_at(altitude_m) / (GAS_CONSTANT_J_KG_K * _temperature_at(altitude_m))


def _altitude_from_pressure(pressure_pa: FloatArray) -> FloatArray:
    return _inverse(pressure_pa, SEA_LEVEL_PRESSURE_PA, _TROPOPAUSE_PRESSURE_PA, _TEMPERATURE_BY_PRESSURE)


def _altitude_from_density(density_kg_m3: FloatArray) -> FloatArray:
    return _inverse(density_kg_m3, SEA_LEVEL_DENSITY_KG_M3, _TROPOPAUSE_DENSITY_KG_M3, _TEMPERATURE_BY_DENSITY)


def _inverse(value: FloatArray, at_sea_level: float, at_tropopause: float, exponent: float) -> FloatArray:
    altitude_m = _power(value * (1.0 / at_sea_level), exponent)
    altitude_m *= -_TEMPERATURE_HEIGHT_M
    altitude_m += _TEMPERATURE_HEIGHT_M
    above = value < at_tropopause
    if above.any():
        # At the tropopause and above pressure and density fall alike, since temperature does not change.
        higher_m = TROPOPAUSE_ALTITUDE_M - _TROPOPAUSE_SCALE_HEIGHT_M * np.log(value / at_tropopause)
        altitude_m = np.where(above, higher_m, altitude_m)
    return _within_range(altitude_m)


def _pressure_scale_height(altitude_m: FloatArray) -> FloatArray:
    return _temperature_at(altitude_m) * (GAS_CONSTANT_J_KG_K / STANDARD_GRAVITY_M_S2)


def _density_scale_height(altitude_m: FloatArray) -> FloatArray:
    stretch = np.where(altitude_m < TROPOPAUSE_ALTITUDE_M, 1.0 / (1.0 - _TEMPERATURE_BY_PRESSURE), 1.0)
    return stretch * _pressure_scale_height(altitude_m)


def _lapse_rate_at(altitude_m: FloatArray) -> FloatArray:
    altitude_m = _within_range(altitude_m)
    rate_k_m = np.where(altitude_m < TROPOPAUSE_ALTITUDE_M, LAPSE_RATE_K_M, 0.0)
    return np.where(np.isnan(altitude_m), np.nan, rate_k_m)
