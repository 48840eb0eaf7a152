"""Water vapour in air: vapour pressure, virtual temperature, density.

All is SI: pressure in pascals, temperature and dew point in kelvin, density in kg/m3. Functions take floats (and return
a float) or arrays that broadcast; NaN gives NaN. Air is taken as an ideal gas, as the standard atmosphere takes it.
Against the real-gas equation CIPM-2007 that makes density altitude 4 to 23 ft higher, never lower, between 0 and 50 °C
and 600 to 1060 hPa.

References
----------
D. Sonntag, Important new values of the physical constants of 1986, vapour pressure formulations based on the ITS-90,
and psychrometer formulae, Z. Meteorol. 40 (1990) 340-344. WMO-No. 8, Guide to Instruments and Methods of Observation,
volume I, chapter 4, annex 4.B (enhancement factor, saturation over water also below 0 °C).
"""

from typing import Final

import numpy as np

from airfield_board.atmosphere.evaluation import FloatArray, evaluated, evaluated_together, positive, within
from airfield_board.atmosphere.standard import GAS_CONSTANT_J_KG_K
from airfield_board.units import HECTOPASCAL_PA, Number

MOLAR_MASS_RATIO: Final = 18.01528 / 28.9644
"""Of water (CODATA/IUPAC) to dry air (ISO 2533)."""
LOWEST_DEWPOINT_K: Final = 173.15
HIGHEST_DEWPOINT_K: Final = 373.15
"""Range of Sonntag's formula, -100 to 100 °C."""

# Sonntag (1990), over water, for the pressure in hPa.
_INVERSE: Final = -6096.9385
_CONSTANT: Final = 16.635794
_LINEAR: Final = -2.711193e-2
_SQUARE: Final = 1.673952e-5
_LOGARITHM: Final = 2.433502
# WMO-No. 8, annex 4.B, for the pressure in hPa.
_ENHANCEMENT: Final = 1.0016
_ENHANCEMENT_RISE: Final = 3.15e-6
_ENHANCEMENT_LOSS: Final = 0.074


def density(
    pressure_pa: Number | float, temperature_k: Number | float, dewpoint_k: Number | float | None = None
) -> Number:
    """Density of air.

    Parameters
    ----------
    pressure_pa
        Pressure [Pa].
    temperature_k
        Temperature [K].
    dewpoint_k
        Dew point over water [K]; None: dry air. NaN is no dew point and gives NaN: it never passes for dry air.

    Returns
    -------
    float or ndarray
        Density [kg/m3].
    """
    return evaluated(_density, pressure_pa, temperature_k, dewpoint_k)


def moist_to_dry_density(pressure_pa: Number | float, dewpoint_k: Number | float) -> Number:
    """Ratio of the density of moist air to that of dry air of the same pressure and temperature.

    Parameters
    ----------
    pressure_pa
        Pressure [Pa].
    dewpoint_k
        Dew point over water [K], 173.15 to 373.15, else NaN.

    Returns
    -------
    float or ndarray
        At most 1; NaN where the vapour alone would exceed the pressure.
    """
    return evaluated(_moist_to_dry_density, pressure_pa, dewpoint_k)


def moist_to_dry_slopes(
    pressure_pa: Number | float, dewpoint_k: Number | float, ratio: Number | float | None = None
) -> tuple[Number, Number]:
    """Exact derivatives of the logarithm of `moist_to_dry_density`.

    Parameters
    ----------
    pressure_pa, dewpoint_k
        As there.
    ratio
        What it gives, where that is known already; a ratio of 1, dry air, has the slopes 0.

    Returns
    -------
    by_pressure
        [1/Pa], not below 0.
    by_dewpoint
        [1/K], not above 0.
    """
    by_pressure, by_dewpoint = evaluated_together(_moist_to_dry_slopes, pressure_pa, dewpoint_k, ratio)
    return by_pressure, by_dewpoint


def _pure_vapour_pressure(temperature_k: FloatArray) -> FloatArray:
    """Saturation vapour pressure without air [hPa]; steps are written over one another, as in `standard`."""
    temperature_k = within(temperature_k, LOWEST_DEWPOINT_K, HIGHEST_DEWPOINT_K)
    exponent = temperature_k * _SQUARE
    exponent += _LINEAR
    exponent *= temperature_k
    exponent += _CONSTANT
    term = _INVERSE / temperature_k
    exponent += term
    np.log(temperature_k, out=term)
    term *= _LOGARITHM
    exponent += term
    return np.exp(exponent, out=exponent)


def _enhancement_factor(pressure_hpa: FloatArray) -> FloatArray:
    return _ENHANCEMENT + _ENHANCEMENT_RISE * pressure_hpa - _ENHANCEMENT_LOSS / pressure_hpa


def _density(pressure_pa: FloatArray, temperature_k: FloatArray, dewpoint_k: FloatArray | None) -> FloatArray:
    dry = positive(pressure_pa) / (GAS_CONSTANT_J_KG_K * positive(temperature_k))
    return dry if dewpoint_k is None else dry * _moist_to_dry_density(pressure_pa, dewpoint_k)


def _moist_to_dry_density(pressure_pa: FloatArray, dewpoint_k: FloatArray) -> FloatArray:
    # f(p) / p as a polynomial of 1/p saves divisions.
    by_pressure = HECTOPASCAL_PA / positive(pressure_pa)
    share = by_pressure * -_ENHANCEMENT_LOSS
    share += _ENHANCEMENT
    share *= by_pressure
    share += _ENHANCEMENT_RISE
    share = within(share * _pure_vapour_pressure(dewpoint_k), 0.0, 1.0)
    return 1.0 - (1.0 - MOLAR_MASS_RATIO) * share


def _moist_to_dry_slopes(
    pressure_pa: FloatArray, dewpoint_k: FloatArray, ratio: FloatArray | None
) -> tuple[FloatArray, FloatArray]:
    if ratio is None:
        ratio = _moist_to_dry_density(pressure_pa, dewpoint_k)
    lost = 1.0 / ratio
    lost -= 1.0
    by_dewpoint = 1.0 / dewpoint_k
    vapour_rise = by_dewpoint * -_INVERSE
    vapour_rise += _LOGARITHM
    vapour_rise *= by_dewpoint
    vapour_rise += _LINEAR
    vapour_rise += (2.0 * _SQUARE) * dewpoint_k
    # The vapour's share f(p) e / p depends on the pressure twice: by the division and by the enhancement factor f. With
    # f = a + b p - c / p that makes -(a - 2 c / p) / (f p) of it for each pascal more.
    by_pressure_hpa = HECTOPASCAL_PA / pressure_pa
    falling = _ENHANCEMENT - (2.0 * _ENHANCEMENT_LOSS) * by_pressure_hpa
    falling /= _enhancement_factor(pressure_pa * (1.0 / HECTOPASCAL_PA))
    falling *= by_pressure_hpa
    falling *= lost * (1.0 / HECTOPASCAL_PA)
    return falling, -lost * vapour_rise
