"""Limits and bands in another unit of their quantity."""

from collections.abc import Callable, Mapping

from airfield_board.configuration.model import Quantity, Unit
from airfield_board.units import c_difference_from_f, c_from_f, f_difference_from_c, f_from_c, ft_from_m, m_from_ft

_CONVERSIONS: Mapping[tuple[Unit, Unit], Callable[[float], float]] = {
    ("ft", "m"): m_from_ft,
    ("m", "ft"): ft_from_m,
    ("c", "f"): f_difference_from_c,
    ("f", "c"): c_difference_from_f,
}


def base_unit(unit: Unit) -> Unit:
    """Return the unit in which limits of different units are compared: feet, or degrees Celsius."""
    return "ft" if unit in ("ft", "m") else "c"


def difference_in_unit(difference: float, unit: Unit, wanted: Unit) -> float:
    """Return a band, a margin or an ISA deviation in another unit of its quantity."""
    return difference if unit == wanted else _CONVERSIONS[unit, wanted](difference)


def limit_in_unit(limit: float, quantity: Quantity, unit: Unit, wanted: Unit) -> float:
    """Return a limit in another unit of its quantity."""
    if unit == wanted or quantity is not Quantity.TEMPERATURE:
        return difference_in_unit(limit, unit, wanted)
    return f_from_c(limit) if wanted == "f" else c_from_f(limit)
