"""The air at the field, row by row, and the temperatures at which it would reach a limit.

Trade units at the edges here, SI inside. A dew point of NaN means that humidity does not count (`CheckedTable` says for
which rows); a row whose altimeter setting, temperature or elevation is NaN or absurd has NaN conditions, which compare
with no limit.
"""

from dataclasses import dataclass, fields
from typing import Final, Protocol

import numpy as np
from numpy.typing import NDArray

from airfield_board.atmosphere import altimetry, moist_air, standard, uncertainty
from airfield_board.atmosphere.altimetry import FieldAir
from airfield_board.units import (
    FOOT_M,
    HECTOPASCAL_PA,
    Number,
    c_from_k,
    ft_from_m,
    k_from_c,
    m_from_ft,
    pa_from_hpa,
)

FloatArray = NDArray[np.float64]

_CHUNK_ROWS: Final = 32768
"""Rows computed at a time: enough that calls do not count, few enough that the steps between stay in the cache."""
_VALUES: Final = (
    "station_pressure_hpa",
    "pressure_altitude_ft",
    "density_altitude_ft",
    "density_altitude_dry_ft",
    "density_ratio",
    "isa_deviation_c",
)
_UNCERTAINTIES: Final = (
    "uncertainty_ft",
    "pressure_altitude_uncertainty_ft",
    "temperature_uncertainty_c",
    "isa_deviation_uncertainty_c",
)
_MOST_STEPS: Final = 20
_SOLVED_C: Final = 1e-6
"""A step so short ends the search; what it leaves missing is far less still."""


class InstrumentFigures(Protocol):
    """What is stated of the instruments: resolutions, and accuracies (half-width, 95 %)."""

    @property
    def altimeter_resolution_hpa(self) -> float:
        """Of the altimeter setting."""

    @property
    def altimeter_accuracy_hpa(self) -> float:
        """Of the altimeter setting."""

    @property
    def temperature_resolution_c(self) -> float:
        """Of the temperature."""

    @property
    def temperature_accuracy_c(self) -> float:
        """Of the temperature."""

    @property
    def dewpoint_resolution_c(self) -> float:
        """Of the dew point."""

    @property
    def dewpoint_accuracy_c(self) -> float:
        """Of the dew point."""


@dataclass(frozen=True, slots=True, kw_only=True)
class ConditionsTable:
    """The air, a row an observation; all arrays have shape (n,), NaN where the row gives no value.

    Attributes
    ----------
    station_pressure_hpa
        Pressure at the field.
    pressure_altitude_ft
        Of the field.
    density_altitude_ft
        With humidity where a dew point counts, else dry.
    density_altitude_dry_ft
        Without humidity.
    density_ratio
        Density of the air, with humidity where a dew point counts, to that of the standard atmosphere at sea level.
    isa_deviation_c
        By how much the air is warmer than the standard atmosphere at its pressure altitude.
    temperature_c
        As observed: the array given.
    uncertainty_ft
        Of ``density_altitude_ft``; this and all below are expanded (k = 2).
    pressure_altitude_uncertainty_ft, temperature_uncertainty_c, isa_deviation_uncertainty_c
        Of the others; NaN, all four, where no instruments were given.
    """

    station_pressure_hpa: FloatArray
    pressure_altitude_ft: FloatArray
    density_altitude_ft: FloatArray
    density_altitude_dry_ft: FloatArray
    density_ratio: FloatArray
    isa_deviation_c: FloatArray
    temperature_c: FloatArray
    uncertainty_ft: FloatArray
    pressure_altitude_uncertainty_ft: FloatArray
    temperature_uncertainty_c: FloatArray
    isa_deviation_uncertainty_c: FloatArray

    def __len__(self) -> int:
        return len(self.temperature_c)

    def take(self, rows: NDArray[np.int64]) -> "ConditionsTable":
        """Return the rows of the given indices, in the order given."""
        return ConditionsTable(**{column.name: getattr(self, column.name)[rows] for column in fields(self)})


@dataclass(frozen=True, slots=True, kw_only=True)
class StandardUncertainties:
    """Standard uncertainties of one observation's readings."""

    altimeter_hpa: float
    temperature_c: float
    dewpoint_c: float


def standard_uncertainties(
    instruments: InstrumentFigures,
    temperature_resolution_c: float = np.nan,
    dewpoint_resolution_c: float = np.nan,
) -> StandardUncertainties:
    """Return the standard uncertainties of one observation.

    Parameters
    ----------
    instruments
        What the profile states.
    temperature_resolution_c, dewpoint_resolution_c
        What the row itself implies; NaN: the instruments' counts.
    """
    altimeter_hpa, temperature_c, dewpoint_c = _uncertainties(
        instruments, np.array([temperature_resolution_c]), np.array([dewpoint_resolution_c])
    )
    return StandardUncertainties(
        altimeter_hpa=altimeter_hpa, temperature_c=float(temperature_c[0]), dewpoint_c=float(dewpoint_c[0])
    )


def conditions_of(
    altimeter_hpa: FloatArray,
    temperature_c: FloatArray,
    dewpoint_used_c: FloatArray,
    temperature_resolution_c: FloatArray,
    dewpoint_resolution_c: FloatArray,
    elevation_m: float | FloatArray,
    instruments: InstrumentFigures | None,
) -> ConditionsTable:
    """Compute the air of each row.

    Parameters
    ----------
    altimeter_hpa, temperature_c
        Of shape (n,), n from 0.
    dewpoint_used_c
        The dew point that counts, shape (n,); NaN: humidity does not count.
    temperature_resolution_c, dewpoint_resolution_c
        What the rows themselves imply, shape (n,); NaN: the instruments' counts.
    elevation_m
        Of the field, one for all or one a row, as it stands.
    instruments
        What is stated of them; None: the uncertainties are not wanted and stay NaN.

    Returns
    -------
    ConditionsTable
        NaN where a value cannot be computed.
    """
    rows = len(altimeter_hpa)
    columns = {name: np.empty(rows) for name in _VALUES}
    # Columns that nobody asked for take no memory.
    unknown = np.broadcast_to(np.array(np.nan), (rows,))
    columns |= {name: unknown if instruments is None else np.empty(rows) for name in _UNCERTAINTIES}
    elevations_m = np.broadcast_to(np.asarray(elevation_m, dtype=np.float64), (rows,))
    for start in range(0, rows, _CHUNK_ROWS):
        part = slice(start, start + _CHUNK_ROWS)
        out = {name: column[part] for name, column in columns.items()}
        altimeter_pa = pa_from_hpa(altimeter_hpa[part])
        temperature_k = k_from_c(temperature_c[part])
        dewpoint_k = k_from_c(dewpoint_used_c[part])
        air = _fill_values(out, altimeter_pa, elevations_m[part], temperature_k, dewpoint_k)
        if instruments is not None:
            readings = _uncertainties(instruments, temperature_resolution_c[part], dewpoint_resolution_c[part])
            _fill_uncertainties(out, air, readings)
    return ConditionsTable(temperature_c=temperature_c, **columns)


def hold_temperature_for_density_altitude(
    limit_ft: Number,
    altimeter_hpa: float,
    elevation_m: float,
    dewpoint_c: float | None,
    uncertainties: StandardUncertainties | None = None,
) -> Number:
    """Return the temperature above which a density-altitude limit would be exceeded.

    Parameters
    ----------
    limit_ft
        The limit; a float, or an array of several.
    altimeter_hpa, elevation_m, dewpoint_c
        The present ones, which stay as they are; dew point None or NaN: humidity does not count.
    uncertainties
        With guarded acceptance those of the readings: the temperature is then that at which value + expanded
        uncertainty reaches the limit. None: simple acceptance.

    Returns
    -------
    float or ndarray
        [°C]; NaN where there is none. It may lie below the dew point, which air that cools so far would take with it.
    """
    dewpoint_k = _dewpoint_k(dewpoint_c)
    altimeter_pa = pa_from_hpa(altimeter_hpa)
    pressure_pa = altimetry.station_pressure(altimeter_pa, elevation_m)
    limit_m = m_from_ft(limit_ft)
    unguarded_k = altimetry.temperature_for_density_altitude(limit_m, pressure_pa, dewpoint_k)
    if uncertainties is None:
        return c_from_k(unguarded_k)
    temperature_k = unguarded_k
    # Newton's steps with one slope, that of the value alone: slope and uncertainty hardly change with temperature, so
    # each step leaves a few thousandths of what was missing before.
    slope_m_k = uncertainty.density_altitude_derivatives(
        altimeter_pa, elevation_m, unguarded_k, dewpoint_k
    ).by_temperature
    for _ in range(_MOST_STEPS):
        missing_m = (
            limit_m
            - altimetry.density_altitude(pressure_pa, temperature_k, dewpoint_k)
            - uncertainty.density_altitude_uncertainty(
                altimeter_pa,
                elevation_m,
                temperature_k,
                dewpoint_k,
                pa_from_hpa(uncertainties.altimeter_hpa),
                uncertainties.temperature_c,
                uncertainties.dewpoint_c,
            )
        )
        step_k = missing_m / slope_m_k
        temperature_k = temperature_k + step_k
        if not np.any(np.abs(step_k) > _SOLVED_C):
            return c_from_k(temperature_k)
    return c_from_k(temperature_k * np.nan)


def hold_temperature_for_isa_deviation(
    limit_c: Number,
    altimeter_hpa: float,
    elevation_m: float,
    uncertainties: StandardUncertainties | None = None,
) -> Number:
    """Return the temperature above which a limit of ISA deviation would be exceeded.

    Parameters
    ----------
    limit_c
        The limit; a float, or an array of several.
    altimeter_hpa, elevation_m
        The present ones.
    uncertainties
        As for `hold_temperature_for_density_altitude`.

    Returns
    -------
    float or ndarray
        [°C]; NaN where there is none.
    """
    altimeter_pa = pa_from_hpa(altimeter_hpa)
    standard_k = standard.temperature_at(altimetry.pressure_altitude(altimeter_pa, elevation_m))
    guard_c = 0.0
    if uncertainties is not None:
        guard_c = uncertainty.isa_deviation_uncertainty(
            altimeter_pa, elevation_m, pa_from_hpa(uncertainties.altimeter_hpa), uncertainties.temperature_c
        )
    return limit_c + (c_from_k(standard_k) - guard_c)


def hold_temperature_for_temperature(limit_c: Number, uncertainties: StandardUncertainties | None = None) -> Number:
    """Return the temperature above which a limit of temperature would be exceeded: itself, less the guard [°C]."""
    return limit_c if uncertainties is None else limit_c - uncertainty.expanded(uncertainties.temperature_c)


def density_altitude_at_temperature(
    temperature_c: Number, altimeter_hpa: float, elevation_m: float, dewpoint_c: float | None
) -> Number:
    """Return the density altitude that the present air would have at another temperature.

    Parameters
    ----------
    temperature_c
        The other temperature; a float, or an array of several.
    altimeter_hpa, elevation_m, dewpoint_c
        As for `hold_temperature_for_density_altitude`.

    Returns
    -------
    float or ndarray
        [ft]; NaN where there is none.
    """
    pressure_pa = altimetry.station_pressure(pa_from_hpa(altimeter_hpa), elevation_m)
    return ft_from_m(altimetry.density_altitude(pressure_pa, k_from_c(temperature_c), _dewpoint_k(dewpoint_c)))


def _dewpoint_k(dewpoint_c: float | None) -> float | None:
    return None if dewpoint_c is None or np.isnan(dewpoint_c) else k_from_c(dewpoint_c)


def _fill_values(
    out: dict[str, FloatArray],
    altimeter_pa: FloatArray,
    elevation_m: FloatArray,
    temperature_k: FloatArray,
    dewpoint_k: FloatArray,
) -> FieldAir:
    pressure_altitude_m = altimetry.pressure_altitude(altimeter_pa, elevation_m)
    pressure_pa = standard.pressure_at(pressure_altitude_m)
    dry = moist_air.density(pressure_pa, temperature_k)
    moist_to_dry = moist_air.moist_to_dry_density(pressure_pa, dewpoint_k)
    is_dry = np.isnan(dewpoint_k)
    if is_dry.any():
        # Only a dew point that is not there makes the air dry; one that is there but absurd leaves NaN.
        moist_to_dry = np.where(is_dry, 1.0, moist_to_dry)
        dewpoint_k = np.where(is_dry, temperature_k, dewpoint_k)
    density = dry * moist_to_dry
    density_altitude_m = standard.altitude_from_density(density)
    np.divide(pressure_pa, HECTOPASCAL_PA, out=out["station_pressure_hpa"])
    np.divide(pressure_altitude_m, FOOT_M, out=out["pressure_altitude_ft"])
    np.divide(standard.altitude_from_density(dry), FOOT_M, out=out["density_altitude_dry_ft"])
    np.divide(density_altitude_m, FOOT_M, out=out["density_altitude_ft"])
    np.divide(density, standard.SEA_LEVEL_DENSITY_KG_M3, out=out["density_ratio"])
    out["isa_deviation_c"][:] = altimetry.isa_deviation(pressure_altitude_m, temperature_k)
    return FieldAir(
        altimeter_pa=altimeter_pa,
        elevation_m=elevation_m,
        temperature_k=temperature_k,
        dewpoint_k=dewpoint_k,
        pressure_altitude_m=pressure_altitude_m,
        pressure_pa=pressure_pa,
        moist_to_dry=moist_to_dry,
        density_altitude_m=density_altitude_m,
    )


def _fill_uncertainties(
    out: dict[str, FloatArray], air: FieldAir, readings: tuple[float, FloatArray, FloatArray]
) -> None:
    altimeter_hpa, temperature_c, dewpoint_c = readings
    of_density_m, of_pressure_m, of_deviation_k = uncertainty.field_air_uncertainties(
        air, pa_from_hpa(altimeter_hpa), temperature_c, dewpoint_c
    )
    np.divide(of_density_m, FOOT_M, out=out["uncertainty_ft"])
    np.divide(of_pressure_m, FOOT_M, out=out["pressure_altitude_uncertainty_ft"])
    out["temperature_uncertainty_c"][:] = uncertainty.expanded(temperature_c)
    out["isa_deviation_uncertainty_c"][:] = of_deviation_k


def _uncertainties(
    instruments: InstrumentFigures, temperature_resolution_c: FloatArray, dewpoint_resolution_c: FloatArray
) -> tuple[float, FloatArray, FloatArray]:
    return (
        uncertainty.standard_uncertainty(instruments.altimeter_resolution_hpa, instruments.altimeter_accuracy_hpa),
        _uncertainty_of_rows(
            temperature_resolution_c, instruments.temperature_resolution_c, instruments.temperature_accuracy_c
        ),
        _uncertainty_of_rows(dewpoint_resolution_c, instruments.dewpoint_resolution_c, instruments.dewpoint_accuracy_c),
    )


def _uncertainty_of_rows(resolution_c: FloatArray, of_instrument_c: float, accuracy_c: float) -> FloatArray:
    not_given = np.isnan(resolution_c)
    if not_given.all():
        # One value for all the rows, as it is for every format but one.
        return np.array([uncertainty.standard_uncertainty(of_instrument_c, accuracy_c)])
    return uncertainty.standard_uncertainty(np.where(not_given, of_instrument_c, resolution_c), accuracy_c)
