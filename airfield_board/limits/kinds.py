"""What each kind of limit is compared with: one class a kind, one entry in `KINDS`."""

from collections.abc import Mapping
from dataclasses import dataclass
from typing import Protocol

import numpy as np
from numpy.typing import NDArray

from airfield_board.configuration.model import Quantity, Unit
from airfield_board.observations.conditions import (
    ConditionsTable,
    StandardUncertainties,
    density_altitude_at_temperature,
    hold_temperature_for_density_altitude,
    hold_temperature_for_isa_deviation,
    hold_temperature_for_temperature,
)
from airfield_board.units import c_difference_from_f, c_from_f, f_difference_from_c, f_from_c, ft_from_m, m_from_ft

Array = NDArray[np.float64]


@dataclass(frozen=True, slots=True, kw_only=True)
class Air:
    """The present air, all of which but the temperature stays as it is when a hold temperature is asked for.

    Attributes
    ----------
    dewpoint_c
        The one that counts; None: humidity does not.
    guard
        With guarded acceptance the standard uncertainties of the readings, else None.
    """

    altimeter_hpa: float
    elevation_m: float
    dewpoint_c: float | None
    guard: StandardUncertainties | None = None


class Kind(Protocol):
    """A kind of limit."""

    def values(self, conditions: ConditionsTable, unit: Unit) -> tuple[Array, Array]:
        """Value and expanded uncertainty in the limit's unit, each of shape (n,)."""

    def hold_temperature_c(self, limits: Array, unit: Unit, air: Air) -> Array:
        """Temperatures above which limits would be exceeded, shape (n,); NaN where temperature does not matter."""


def axis_ft(hold_temperature_c: Array, air: Air) -> Array:
    """Return the density altitudes at which limits are reached in the present air, from their hold temperatures."""
    return density_altitude_at_temperature(hold_temperature_c, air.altimeter_hpa, air.elevation_m, air.dewpoint_c)


def _altitudes(value_ft: Array, uncertainty_ft: Array, unit: Unit) -> tuple[Array, Array]:
    if unit == "m":
        return m_from_ft(value_ft), m_from_ft(uncertainty_ft)
    return value_ft, uncertainty_ft


class DensityAltitudeKind:
    """A greatest density altitude."""

    def values(self, conditions: ConditionsTable, unit: Unit) -> tuple[Array, Array]:
        """Value and expanded uncertainty [ft or m], each of shape (n,)."""
        return _altitudes(conditions.density_altitude_ft, conditions.uncertainty_ft, unit)

    def hold_temperature_c(self, limits: Array, unit: Unit, air: Air) -> Array:
        """Temperatures above which limits would be exceeded [°C], shape (n,)."""
        limits_ft = ft_from_m(limits) if unit == "m" else limits
        return hold_temperature_for_density_altitude(
            limits_ft, air.altimeter_hpa, air.elevation_m, air.dewpoint_c, air.guard
        )


class PressureAltitudeKind:
    """A greatest pressure altitude; temperature does not matter to it."""

    def values(self, conditions: ConditionsTable, unit: Unit) -> tuple[Array, Array]:
        """Value and expanded uncertainty [ft or m], each of shape (n,)."""
        return _altitudes(conditions.pressure_altitude_ft, conditions.pressure_altitude_uncertainty_ft, unit)

    def hold_temperature_c(self, limits: Array, unit: Unit, air: Air) -> Array:
        """Return NaN, shape (n,)."""
        del unit, air
        return np.full(len(limits), np.nan)


class TemperatureKind:
    """A greatest outside air temperature."""

    def values(self, conditions: ConditionsTable, unit: Unit) -> tuple[Array, Array]:
        """Value and expanded uncertainty [°C or °F], each of shape (n,)."""
        if unit == "f":
            return f_from_c(conditions.temperature_c), f_difference_from_c(conditions.temperature_uncertainty_c)
        return conditions.temperature_c, conditions.temperature_uncertainty_c

    def hold_temperature_c(self, limits: Array, unit: Unit, air: Air) -> Array:
        """Temperatures above which limits would be exceeded [°C], shape (n,)."""
        return hold_temperature_for_temperature(c_from_f(limits) if unit == "f" else limits, air.guard)


class IsaDeviationKind:
    """A greatest deviation from the standard temperature at the pressure altitude."""

    def values(self, conditions: ConditionsTable, unit: Unit) -> tuple[Array, Array]:
        """Value and expanded uncertainty [°C, or °F as a difference], each of shape (n,)."""
        if unit == "f":
            return (
                f_difference_from_c(conditions.isa_deviation_c),
                f_difference_from_c(conditions.isa_deviation_uncertainty_c),
            )
        return conditions.isa_deviation_c, conditions.isa_deviation_uncertainty_c

    def hold_temperature_c(self, limits: Array, unit: Unit, air: Air) -> Array:
        """Temperatures above which limits would be exceeded [°C], shape (n,)."""
        limits_c = c_difference_from_f(limits) if unit == "f" else limits
        return hold_temperature_for_isa_deviation(limits_c, air.altimeter_hpa, air.elevation_m, air.guard)


KINDS: Mapping[Quantity, Kind] = {
    Quantity.DENSITY_ALTITUDE: DensityAltitudeKind(),
    Quantity.PRESSURE_ALTITUDE: PressureAltitudeKind(),
    Quantity.TEMPERATURE: TemperatureKind(),
    Quantity.ISA_DEVIATION: IsaDeviationKind(),
}
