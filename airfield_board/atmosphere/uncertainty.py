"""How far the instruments' uncertainty carries into what is computed from them: exact derivatives, no differences.

The law of propagation: the variance of a result is the sum over the independent inputs (altimeter setting, temperature,
dew point) of the squared product of derivative and standard uncertainty. An input that acts by several ways has one
derivative, the sum over the ways. The elevation counts as exact. All is SI; functions take floats (and return a float)
or arrays that broadcast; NaN gives NaN.

References
----------
JCGM 100:2008, Evaluation of measurement data - Guide to the expression of uncertainty in measurement (GUM): 4.3.7 (a
rectangular distribution of full width r has the standard deviation r/sqrt(12)), 5.1.2 (independent inputs), 6.2.1
(expanded uncertainty).
"""

from dataclasses import dataclass
from typing import Final, Generic

import numpy as np

from airfield_board.atmosphere import altimetry, moist_air, standard
from airfield_board.atmosphere.altimetry import FieldAir
from airfield_board.atmosphere.evaluation import FloatArray, evaluated, evaluated_together
from airfield_board.units import Number

COVERAGE_FACTOR: Final = 2.0
"""k of every expanded uncertainty."""


@dataclass(frozen=True, slots=True, kw_only=True)
class DensityAltitudeDerivatives(Generic[Number]):
    """Derivatives of density altitude by each of what it is computed from.

    Attributes
    ----------
    by_altimeter
        [m/Pa], below 0.
    by_temperature
        [m/K], above 0.
    by_dewpoint
        [m/K], above 0; 0 for dry air.
    """

    by_altimeter: Number
    by_temperature: Number
    by_dewpoint: Number


def standard_uncertainty(resolution: Number | float, accuracy: Number | float) -> Number:
    """Return the standard uncertainty of an instrument.

    Parameters
    ----------
    resolution
        Step between two readings; it counts as r/sqrt(12).
    accuracy
        Half-width of the interval that holds 95 % of the errors; half of it counts.

    Returns
    -------
    float or ndarray
        In the unit of the two.
    """
    return evaluated(_standard_uncertainty, resolution, accuracy)


def expanded(standard_uncertainties: Number) -> Number:
    """Return the expanded uncertainty (k = 2) of a standard one; so of a temperature, which is read as it stands."""
    return evaluated(_expanded, standard_uncertainties)


def density_altitude_derivatives(
    altimeter_pa: Number | float,
    elevation_m: Number | float,
    temperature_k: Number | float,
    dewpoint_k: Number | float | None = None,
) -> DensityAltitudeDerivatives[Number]:
    """Exact derivatives of density altitude by altimeter setting, temperature and dew point.

    Parameters
    ----------
    altimeter_pa
        Altimeter setting [Pa].
    elevation_m
        Field elevation [m].
    temperature_k
        Temperature [K].
    dewpoint_k
        Dew point over water [K]; None: dry air, NaN gives NaN.

    Returns
    -------
    DensityAltitudeDerivatives
        Of floats, or of arrays.
    """
    by_altimeter, by_temperature, by_dewpoint = evaluated_together(
        _density_altitude_derivatives, altimeter_pa, elevation_m, temperature_k, dewpoint_k
    )
    return DensityAltitudeDerivatives(by_altimeter=by_altimeter, by_temperature=by_temperature, by_dewpoint=by_dewpoint)


def density_altitude_uncertainty(
    altimeter_pa: Number | float,
    elevation_m: Number | float,
    temperature_k: Number | float,
    dewpoint_k: Number | float | None,
    altimeter_uncertainty_pa: Number | float,
    temperature_uncertainty_k: Number | float,
    dewpoint_uncertainty_k: Number | float = 0.0,
) -> Number:
    """Return the expanded uncertainty (k = 2) of density altitude.

    Parameters
    ----------
    altimeter_pa, elevation_m, temperature_k, dewpoint_k
        As for `density_altitude_derivatives`.
    altimeter_uncertainty_pa, temperature_uncertainty_k, dewpoint_uncertainty_k
        Standard uncertainties [Pa, K, K]; that of the dew point does not count for dry air.

    Returns
    -------
    float or ndarray
        [m].
    """
    return evaluated(
        _density_altitude_uncertainty,
        altimeter_pa,
        elevation_m,
        temperature_k,
        dewpoint_k,
        altimeter_uncertainty_pa,
        temperature_uncertainty_k,
        dewpoint_uncertainty_k,
    )


def field_air_uncertainties(
    air: FieldAir,
    altimeter_uncertainty_pa: float,
    temperature_uncertainty_k: FloatArray,
    dewpoint_uncertainty_k: FloatArray,
) -> tuple[FloatArray, FloatArray, FloatArray]:
    """Return the expanded uncertainties (k = 2) of air whose values are known already.

    Parameters
    ----------
    air
        The air.
    altimeter_uncertainty_pa, temperature_uncertainty_k, dewpoint_uncertainty_k
        Standard uncertainties [Pa, K, K].

    Returns
    -------
    density_altitude, pressure_altitude, isa_deviation
        [m, m, K]: the first and the last as `density_altitude_uncertainty` and `isa_deviation_uncertainty` give
        them for the same air; the elevation, being exact, adds nothing to the second.
    """
    with np.errstate(all="ignore"):
        by_altimeter_m = _pressure_altitude_by_altimeter(air.altimeter_pa, air.pressure_altitude_m - air.elevation_m)
        derivatives = _derivatives_of(air, by_altimeter_m)
        return (
            _combined(*derivatives, altimeter_uncertainty_pa, temperature_uncertainty_k, dewpoint_uncertainty_k),
            COVERAGE_FACTOR * np.abs(by_altimeter_m * altimeter_uncertainty_pa),
            _of_isa_deviation(
                air.pressure_altitude_m, by_altimeter_m, altimeter_uncertainty_pa, temperature_uncertainty_k
            ),
        )


def isa_deviation_uncertainty(
    altimeter_pa: Number | float,
    elevation_m: Number | float,
    altimeter_uncertainty_pa: Number | float,
    temperature_uncertainty_k: Number | float,
) -> Number:
    """Return the expanded uncertainty (k = 2) of ISA deviation.

    The altimeter setting adds to it by way of the pressure altitude.

    Parameters
    ----------
    altimeter_pa
        Altimeter setting [Pa].
    elevation_m
        Field elevation [m].
    altimeter_uncertainty_pa, temperature_uncertainty_k
        Standard uncertainties [Pa, K].

    Returns
    -------
    float or ndarray
        [K].
    """
    return evaluated(
        _isa_deviation_uncertainty, altimeter_pa, elevation_m, altimeter_uncertainty_pa, temperature_uncertainty_k
    )


def _standard_uncertainty(resolution: FloatArray, accuracy: FloatArray) -> FloatArray:
    return np.sqrt(resolution * resolution / 12.0 + accuracy * accuracy / 4.0)


def _expanded(standard_uncertainties: FloatArray) -> FloatArray:
    return COVERAGE_FACTOR * np.abs(standard_uncertainties)


def _pressure_altitude_by_altimeter(altimeter_pa: FloatArray, altitude_of_setting_m: FloatArray) -> FloatArray:
    return -standard.pressure_scale_height(altitude_of_setting_m) / altimeter_pa


def _air(
    altimeter_pa: FloatArray, elevation_m: FloatArray, temperature_k: FloatArray, dewpoint_k: FloatArray | None
) -> FieldAir:
    pressure_altitude_m = altimetry.pressure_altitude(altimeter_pa, elevation_m)
    pressure_pa = standard.pressure_at(pressure_altitude_m)
    return FieldAir(
        altimeter_pa=altimeter_pa,
        elevation_m=elevation_m,
        temperature_k=temperature_k,
        dewpoint_k=temperature_k if dewpoint_k is None else dewpoint_k,
        pressure_altitude_m=pressure_altitude_m,
        pressure_pa=pressure_pa,
        moist_to_dry=(
            np.ones_like(pressure_pa) if dewpoint_k is None else moist_air.moist_to_dry_density(pressure_pa, dewpoint_k)
        ),
        density_altitude_m=altimetry.density_altitude(pressure_pa, temperature_k, dewpoint_k),
    )


def _derivatives_of(air: FieldAir, by_altimeter_m: FloatArray) -> tuple[FloatArray, FloatArray, FloatArray]:
    by_pressure, by_dewpoint = moist_air.moist_to_dry_slopes(air.pressure_pa, air.dewpoint_k, air.moist_to_dry)
    # The pressure acts a second time: the same vapour is a smaller share of air under more pressure.
    log_density_by_log_pressure = 1.0 + air.pressure_pa * by_pressure
    scale_height_m = standard.density_scale_height(air.density_altitude_m)
    # d(ln p) = -dH / scale height at the field, where dH is what the setting adds to the pressure altitude.
    stretch = scale_height_m / standard.pressure_scale_height(air.pressure_altitude_m)
    return (
        stretch * log_density_by_log_pressure * by_altimeter_m,
        scale_height_m / air.temperature_k,
        -scale_height_m * by_dewpoint,
    )


def _density_altitude_derivatives(
    altimeter_pa: FloatArray, elevation_m: FloatArray, temperature_k: FloatArray, dewpoint_k: FloatArray | None
) -> tuple[FloatArray, FloatArray, FloatArray]:
    by_altimeter_m = _pressure_altitude_by_altimeter(altimeter_pa, standard.altitude_from_pressure(altimeter_pa))
    return _derivatives_of(_air(altimeter_pa, elevation_m, temperature_k, dewpoint_k), by_altimeter_m)


def _density_altitude_uncertainty(
    altimeter_pa: FloatArray,
    elevation_m: FloatArray,
    temperature_k: FloatArray,
    dewpoint_k: FloatArray | None,
    altimeter_uncertainty_pa: FloatArray,
    temperature_uncertainty_k: FloatArray,
    dewpoint_uncertainty_k: FloatArray,
) -> FloatArray:
    derivatives = _density_altitude_derivatives(altimeter_pa, elevation_m, temperature_k, dewpoint_k)
    return _combined(*derivatives, altimeter_uncertainty_pa, temperature_uncertainty_k, dewpoint_uncertainty_k)


def _combined(
    by_altimeter: FloatArray,
    by_temperature: FloatArray,
    by_dewpoint: FloatArray,
    altimeter_uncertainty_pa: FloatArray | float,
    temperature_uncertainty_k: FloatArray,
    dewpoint_uncertainty_k: FloatArray,
) -> FloatArray:
    variance = (by_altimeter * altimeter_uncertainty_pa) ** 2
    variance = variance + (by_temperature * temperature_uncertainty_k) ** 2
    variance = variance + (by_dewpoint * dewpoint_uncertainty_k) ** 2
    return COVERAGE_FACTOR * np.sqrt(variance)


def _isa_deviation_uncertainty(
    altimeter_pa: FloatArray,
    elevation_m: FloatArray,
    altimeter_uncertainty_pa: FloatArray,
    temperature_uncertainty_k: FloatArray,
) -> FloatArray:
    by_altimeter_m = _pressure_altitude_by_altimeter(altimeter_pa, standard.altitude_from_pressure(altimeter_pa))
    pressure_altitude_m = altimetry.pressure_altitude(altimeter_pa, elevation_m)
    return _of_isa_deviation(pressure_altitude_m, by_altimeter_m, altimeter_uncertainty_pa, temperature_uncertainty_k)


def _of_isa_deviation(
    pressure_altitude_m: FloatArray,
    by_altimeter_m: FloatArray,
    altimeter_uncertainty_pa: FloatArray | float,
    temperature_uncertainty_k: FloatArray,
) -> FloatArray:
    by_altimeter_k = standard.lapse_rate_at(pressure_altitude_m) * by_altimeter_m
    variance = (by_altimeter_k * altimeter_uncertainty_pa) ** 2 + temperature_uncertainty_k**2
    return COVERAGE_FACTOR * np.sqrt(variance)
