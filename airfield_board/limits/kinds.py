"""What each kind of limit is compared with: one class a kind, one entry in `KINDS`."""

from collections.abc import Mapping
from dataclasses import dataclass
from typing import Protocol

import numpy as np
from numpy.typing import NDArray

from airfield_board.configuration.model import Quantity, Unit
from airfield_board.observations.conditions import ConditionsTable
from airfield_board.units import FOOT_M, f_from_c, m_from_ft

Array = NDArray[np.float64]


class Kind(Protocol):
    """A kind of limit."""

    def values(self, conditions: ConditionsTable, unit: Unit) -> tuple[Array, Array]:
        """Value and expanded uncertainty in the limit's unit, each of shape (n,)."""


@dataclass(frozen=True, slots=True, kw_only=True)
class AltitudeKind:
    """A greatest density or pressure altitude.

    Attributes
    ----------
    value, uncertainty
        Names of the columns of the conditions, in feet.
    """

    value: str
    uncertainty: str

    def values(self, conditions: ConditionsTable, unit: Unit) -> tuple[Array, Array]:
        """Value and expanded uncertainty [ft or m], each of shape (n,)."""
        value_ft: Array = getattr(conditions, self.value)
        uncertainty_ft: Array = getattr(conditions, self.uncertainty)
        if unit == "m":
            return m_from_ft(value_ft), m_from_ft(uncertainty_ft)
        return value_ft, uncertainty_ft


class TemperatureKind:
    """A greatest outside air temperature."""

    def values(self, conditions: ConditionsTable, unit: Unit) -> tuple[Array, Array]:
        """Value and expanded uncertainty [°C or °F], each of shape (n,)."""
        if unit == "f":
            return f_from_c(conditions.temperature_c), conditions.temperature_uncertainty_c * 1.8
        return conditions.temperature_c, conditions.temperature_uncertainty_c


class IsaDeviationKind:
    """A greatest deviation from the standard temperature at the pressure altitude."""

    def values(self, conditions: ConditionsTable, unit: Unit) -> tuple[Array, Array]:
        """Value and expanded uncertainty [°C, or °F as a difference], each of shape (n,)."""
        scale = 1.8 if unit == "f" else 1.0
        return conditions.isa_deviation_c * scale, conditions.isa_deviation_uncertainty_c * scale


KINDS: Mapping[Quantity, Kind] = {
    Quantity.DENSITY_ALTITUDE: AltitudeKind(value="density_altitude_ft", uncertainty="uncertainty_ft"),
    Quantity.PRESSURE_ALTITUDE: AltitudeKind(
        value="pressure_altitude_ft", uncertainty="pressure_altitude_uncertainty_ft"
    ),
    Quantity.TEMPERATURE: TemperatureKind(),
    Quantity.ISA_DEVIATION: IsaDeviationKind(),
}


def limit_in_unit(limit: float, quantity: Quantity, unit: Unit, wanted: Unit) -> float:
    """Return a limit in another unit of its quantity."""
    if unit == wanted:
        return limit
    if quantity is Quantity.TEMPERATURE:
        return f_from_c(limit) if wanted == "f" else (limit - 32.0) / 1.8
    return band_in_unit(limit, unit, wanted)


def band_in_unit(band: float, unit: Unit, wanted: Unit) -> float:
    """Return a band, a difference, in another unit of its quantity."""
    if unit == wanted:
        return band
    factors: dict[tuple[Unit, Unit], float] = {
        ("ft", "m"): FOOT_M,
        ("m", "ft"): 1.0 / FOOT_M,
        ("c", "f"): 1.8,
        ("f", "c"): 1.0 / 1.8,
    }
    return band * factors[unit, wanted]
