"""What thin air costs an aircraft: true airspeed for the same indicated, and shaft power of an engine without a blower.

Both follow from the density ratio alone: the density of the air over that of the standard atmosphere at sea level.
"""

from typing import Final

import numpy as np

from airfield_board.atmosphere.evaluation import FloatArray, evaluated, positive
from airfield_board.units import Number

FRICTION_DIVISOR: Final = 7.55
"""Gagg and Farrar (1934): the constant of P/P0 = (1 + 1/7.55) sigma - 1/7.55."""


def true_airspeed_ratio(density_ratio: Number) -> Number:
    """Return how many times the indicated airspeed the true airspeed is.

    Equal dynamic pressure, rho V^2 / 2, at two densities: V / V0 = 1 / sqrt(sigma). Errors of the instrument and of
    its static source, and the compressibility of the air, are left out.

    Parameters
    ----------
    density_ratio
        Density over that of the standard atmosphere at sea level [1], above 0; float or array of shape (n,).

    Returns
    -------
    float or ndarray
        Ratio [1], shape (n,); NaN where the density ratio is NaN or not above 0.

    References
    ----------
    The definition of equivalent airspeed; sea-level density 1.225 kg/m3 of ISO 2533.
    """
    return evaluated(_true_airspeed_ratio, density_ratio)


def _true_airspeed_ratio(density_ratio: FloatArray) -> FloatArray:
    return 1.0 / np.sqrt(positive(density_ratio))


def shaft_power_ratio(density_ratio: Number) -> Number:
    """Return the shaft power of a normally aspirated engine over that in the standard atmosphere at sea level.

    At full throttle and the same speed of the engine: P / P0 = (1 + 1/7.55) sigma - 1/7.55, that is
    1.132 sigma - 0.132. What the engine loses to its own friction does not shrink with the density.

    Parameters
    ----------
    density_ratio
        Density over that of the standard atmosphere at sea level [1], above 0; float or array of shape (n,).

    Returns
    -------
    float or ndarray
        Ratio [1], shape (n,); 0 below a density ratio of about 0.117, where the formula would become negative; above
        1 in air denser than the standard's at sea level; NaN where the density ratio is NaN or not above 0.

    References
    ----------
    Gagg, R. F., and Farrar, E. V., Altitude Performance of Aircraft Engines Equipped with Gear-Driven Superchargers,
    SAE Transactions, 1934.
    """
    return evaluated(_shaft_power_ratio, density_ratio)


def _shaft_power_ratio(density_ratio: FloatArray) -> FloatArray:
    sigma = positive(density_ratio)
    return np.maximum((1.0 + 1.0 / FRICTION_DIVISOR) * sigma - 1.0 / FRICTION_DIVISOR, 0.0)
