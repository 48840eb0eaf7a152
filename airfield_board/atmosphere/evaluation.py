"""One way in and out of the formulas: floats give a float, arrays give an array, and nothing warns."""

from collections.abc import Callable
from typing import Any, Final, cast

import numpy as np
from numpy.typing import NDArray

from airfield_board.units import Number

FloatArray = NDArray[np.float64]

_SMALLEST_POSITIVE: Final = float(np.nextafter(0.0, 1.0))
_GREATEST_FINITE: Final = float(np.finfo(np.float64).max)


def evaluated(formula: Callable[..., FloatArray], *values: Number | float | None) -> Number:
    """Apply a formula to floats or arrays that broadcast.

    Parameters
    ----------
    formula
        Takes one float64 array a value (None stays None), of at least one dimension and of shapes that broadcast, and
        returns one; it must not write into what it takes.
    values
        Its arguments.

    Returns
    -------
    float or ndarray
        A float where no value has a dimension. NaN where the formula is not defined: numpy's own warnings of it are
        switched off, since an undefined result is an answer here ("no data") and not an accident.
    """
    (result,) = evaluated_together(lambda *arrays: (formula(*arrays),), *values)
    return result


def evaluated_together(
    formula: Callable[..., tuple[FloatArray, ...]], *values: Number | float | None
) -> tuple[Number, ...]:
    """Apply a formula with several results that share their steps; all else as `evaluated`."""
    arrays = [None if value is None else np.asarray(value, dtype=np.float64) for value in values]
    of_floats = all(array is None or array.ndim == 0 for array in arrays)
    with np.errstate(all="ignore"):
        results = formula(*(None if array is None else np.atleast_1d(array) for array in arrays))
    plain: tuple[Any, ...] = tuple(result.item() for result in results) if of_floats else results
    return cast(tuple[Number, ...], plain)


def within(values: FloatArray, lowest: float, highest: float) -> FloatArray:
    """Keep values from lowest to highest, both included; all else becomes NaN."""
    # Two passes that make no array tell whether all is well, as it nearly always is; NaN tells that it is not.
    if values.size == 0 or (values.min() >= lowest and values.max() <= highest):
        return values
    return np.where((values >= lowest) & (values <= highest), values, np.nan)


def positive(values: FloatArray) -> FloatArray:
    """Keep what a pressure or an absolute temperature can be; all else becomes NaN."""
    return within(values, _SMALLEST_POSITIVE, _GREATEST_FINITE)
