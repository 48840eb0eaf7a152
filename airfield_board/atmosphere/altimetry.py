"""What an altimeter setting, an elevation and a temperature say of the air at the field.

All is SI: pressures in pascals, temperatures in kelvin, altitudes and elevations in metres. Functions take floats (and
return a float) or arrays that broadcast; NaN gives NaN, and so does an altitude outside the -5,000 to 20,000 m of the
standard atmosphere.

The field's elevation is used as it stands, without a change from geometric to geopotential height: the altimeter
setting is defined with the elevation as it stands, so a conversion would put an error in where there is none.
"""

from dataclasses import dataclass

from airfield_board.atmosphere import moist_air, standard
from airfield_board.atmosphere.evaluation import FloatArray, evaluated, positive
from airfield_board.units import Number


@dataclass(frozen=True, slots=True, kw_only=True)
class FieldAir:
    """The air at the field with the steps that values and their uncertainties share; arrays that broadcast, SI.

    Attributes
    ----------
    altimeter_pa, elevation_m, temperature_k
        As read.
    dewpoint_k
        Dew point over water; it does not count where ``moist_to_dry`` is 1, but must be above 0 there too.
    pressure_altitude_m, pressure_pa
        Of the field.
    moist_to_dry
        Ratio of the density to that of dry air; 1 where the air counts as dry.
    density_altitude_m
        With humidity where it counts.
    """

    altimeter_pa: FloatArray
    elevation_m: FloatArray
    temperature_k: FloatArray
    dewpoint_k: FloatArray
    pressure_altitude_m: FloatArray
    pressure_pa: FloatArray
    moist_to_dry: FloatArray
    density_altitude_m: FloatArray


def pressure_altitude(altimeter_pa: Number | float, elevation_m: Number | float) -> Number:
    """Pressure altitude of the field: its elevation and the pressure altitude of the altimeter setting.

    Parameters
    ----------
    altimeter_pa
        Altimeter setting [Pa].
    elevation_m
        Field elevation [m].

    Returns
    -------
    float or ndarray
        Pressure altitude [m].
    """
    return evaluated(_pressure_altitude, altimeter_pa, elevation_m)


def station_pressure(altimeter_pa: Number | float, elevation_m: Number | float) -> Number:
    """Pressure at which an altimeter set to the altimeter setting reads the field's elevation.

    Parameters
    ----------
    altimeter_pa
        Altimeter setting [Pa].
    elevation_m
        Field elevation [m].

    Returns
    -------
    float or ndarray
        Station pressure [Pa].
    """
    return evaluated(_station_pressure, altimeter_pa, elevation_m)


def density_altitude(
    pressure_pa: Number | float, temperature_k: Number | float, dewpoint_k: Number | float | None = None
) -> Number:
    """Altitude at which the standard atmosphere has the density of the air.

    Parameters
    ----------
    pressure_pa
        Station pressure [Pa].
    temperature_k
        Temperature [K].
    dewpoint_k
        Dew point over water [K]; None: dry air. NaN is no dew point and gives NaN: it never passes for dry air.

    Returns
    -------
    float or ndarray
        Density altitude [m].
    """
    return evaluated(_density_altitude, pressure_pa, temperature_k, dewpoint_k)


def isa_deviation(pressure_altitude_m: Number | float, temperature_k: Number | float) -> Number:
    """By how much the air is warmer than the standard atmosphere at its pressure altitude.

    Parameters
    ----------
    pressure_altitude_m
        Pressure altitude [m].
    temperature_k
        Temperature [K].

    Returns
    -------
    float or ndarray
        ISA deviation [K].
    """
    return evaluated(_isa_deviation, pressure_altitude_m, temperature_k)


def temperature_for_density_altitude(
    density_altitude_m: Number | float, pressure_pa: Number | float, dewpoint_k: Number | float | None = None
) -> Number:
    """Temperature at which the air reaches a density altitude, pressure and dew point staying as they are.

    Parameters
    ----------
    density_altitude_m
        Density altitude to be reached [m].
    pressure_pa
        Station pressure [Pa].
    dewpoint_k
        Dew point over water [K]; None: dry air, NaN gives NaN.

    Returns
    -------
    float or ndarray
        Temperature [K]; it may lie below the dew point, where such air could not be.
    """
    return evaluated(_temperature_for_density_altitude, density_altitude_m, pressure_pa, dewpoint_k)


def _pressure_altitude(altimeter_pa: FloatArray, elevation_m: FloatArray) -> FloatArray:
    return standard.within_range(elevation_m + standard.altitude_from_pressure(altimeter_pa))


def _station_pressure(altimeter_pa: FloatArray, elevation_m: FloatArray) -> FloatArray:
    return standard.pressure_at(_pressure_altitude(altimeter_pa, elevation_m))


def _density_altitude(pressure_pa: FloatArray, temperature_k: FloatArray, dewpoint_k: FloatArray | None) -> FloatArray:
    return standard.altitude_from_density(moist_air.density(pressure_pa, temperature_k, dewpoint_k))


def _isa_deviation(pressure_altitude_m: FloatArray, temperature_k: FloatArray) -> FloatArray:
    return positive(temperature_k) - standard.temperature_at(pressure_altitude_m)


def _temperature_for_density_altitude(
    density_altitude_m: FloatArray, pressure_pa: FloatArray, dewpoint_k: FloatArray | None
) -> FloatArray:
    virtual_k = positive(pressure_pa) / (standard.GAS_CONSTANT_J_KG_K * standard.density_at(density_altitude_m))
    return virtual_k if dewpoint_k is None else virtual_k * moist_air.moist_to_dry_density(pressure_pa, dewpoint_k)
