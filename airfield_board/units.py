"""Trade units and SI: each factor once, with its source.

All functions take and return floats or numpy arrays of any shape, and keep NaN.

References
----------
International foot 0.3048 m and pound 0.45359237 kg: exact by the international yard and pound agreement of 1959; degree
Celsius 1.8 degrees Fahrenheit: by definition (NIST SP 811, appendix B). Inch of mercury: 25.4 mm of mercury of
13595.1 kg/m3 under standard gravity 9.80665 m/s2 (WMO-No. 8, part I, chapter 3).
"""

from collections.abc import Mapping
from typing import TypeVar

import numpy as np
from numpy.typing import NDArray

FOOT_M = 0.3048
POUND_KG = 0.45359237
STANDARD_GRAVITY_M_S2 = 9.80665
INCH_OF_MERCURY_PA = 0.0254 * 13595.1 * STANDARD_GRAVITY_M_S2
HECTOPASCAL_PA = 100.0
ZERO_CELSIUS_K = 273.15
SECOND_US = 1_000_000
MINUTE_US = 60 * SECOND_US
HOUR_US = 60 * MINUTE_US
DAY_US = 24 * HOUR_US

EQUAL = 1e-6
"""A difference under this counts as none, in whatever unit a decision is made: so that the binary rounding of a
decimal fraction decides nothing."""

UNIT_WORDS: Mapping[str, str] = {"ft": "ft", "m": "m", "c": "°C", "f": "°F", "hpa": "hPa", "inhg": "inHg"}
"""How a unit is written, by its name in keys and columns."""

Number = TypeVar("Number", float, NDArray[np.float64])


def m_from_ft(value_ft: Number) -> Number:
    """Metres from feet."""
    return value_ft * FOOT_M


def ft_from_m(value_m: Number) -> Number:
    """Feet from metres."""
    return value_m / FOOT_M


def pa_from_hpa(value_hpa: Number) -> Number:
    """Pascals from hectopascals."""
    return value_hpa * HECTOPASCAL_PA


def hpa_from_inhg(value_inhg: Number) -> Number:
    """Hectopascals from inches of mercury."""
    return value_inhg * INCH_OF_MERCURY_PA / HECTOPASCAL_PA


def inhg_from_hpa(value_hpa: Number) -> Number:
    """Inches of mercury from hectopascals."""
    return value_hpa * HECTOPASCAL_PA / INCH_OF_MERCURY_PA


def k_from_c(value_c: Number) -> Number:
    """Kelvin from degrees Celsius."""
    return value_c + ZERO_CELSIUS_K


def c_from_k(value_k: Number) -> Number:
    """Degrees Celsius from kelvin."""
    return value_k - ZERO_CELSIUS_K


def c_from_f(value_f: Number) -> Number:
    """Degrees Celsius from degrees Fahrenheit."""
    return c_difference_from_f(value_f - 32.0)


def f_from_c(value_c: Number) -> Number:
    """Degrees Fahrenheit from degrees Celsius."""
    return f_difference_from_c(value_c) + 32.0


def c_difference_from_f(difference_f: Number) -> Number:
    """Degrees Celsius from degrees Fahrenheit, of a difference."""
    return difference_f / 1.8


def f_difference_from_c(difference_c: Number) -> Number:
    """Degrees Fahrenheit from degrees Celsius, of a difference."""
    return difference_c * 1.8


def kg_from_lb(value_lb: Number) -> Number:
    """Kilograms from pounds."""
    return value_lb * POUND_KG


def lb_from_kg(value_kg: Number) -> Number:
    """Pounds from kilograms."""
    return value_kg / POUND_KG
