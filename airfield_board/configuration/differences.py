"""Limits and bands in another unit of their quantity."""

from airfield_board.configuration.model import Quantity, Unit
from airfield_board.units import FOOT_M, c_from_f, f_from_c

# A degree Celsius is 1.8 degrees Fahrenheit by definition (NIST SP 811, appendix B).
_FACTORS: dict[tuple[Unit, Unit], float] = {
    ("ft", "m"): FOOT_M,
    ("m", "ft"): 1.0 / FOOT_M,
    ("c", "f"): 1.8,
    ("f", "c"): 1.0 / 1.8,
}


def difference_in_unit(difference: float, unit: Unit, wanted: Unit) -> float:
    """Return a band, a margin or an ISA deviation in another unit of its quantity."""
    return difference if unit == wanted else difference * _FACTORS[unit, wanted]


def limit_in_unit(limit: float, quantity: Quantity, unit: Unit, wanted: Unit) -> float:
    """Return a limit in another unit of its quantity."""
    if unit == wanted or quantity is not Quantity.TEMPERATURE:
        return difference_in_unit(limit, unit, wanted)
    return f_from_c(limit) if wanted == "f" else c_from_f(limit)
