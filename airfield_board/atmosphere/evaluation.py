"""One way in and out of the formulas: floats give a float, arrays give an array, and nothing warns."""

from collections.abc import Callable
from typing import cast

import numpy as np
from numpy.typing import NDArray

from airfield_board.units import Number

FloatArray = NDArray[np.float64]


def evaluated(formula: Callable[..., FloatArray], *values: Number | float | None) -> Number:
    """Apply a formula to floats or arrays that broadcast.

    Parameters
    ----------
    formula
        Takes one float64 array a value (None stays None), of any shapes that broadcast, and returns one.
    values
        Its arguments.

    Returns
    -------
    float or ndarray
        A float where no value has a dimension. NaN where the formula is not defined: numpy's own warnings of it are
        switched off, since an undefined result is an answer here ("no data") and not an accident.
    """
    arrays = [None if value is None else np.asarray(value, dtype=np.float64) for value in values]
    with np.errstate(all="ignore"):
        result = formula(*arrays)
    return cast(Number, float(result) if np.ndim(result) == 0 else result)


def positive(values: FloatArray) -> FloatArray:
    """Keep what a pressure or an absolute temperature can be; all else becomes NaN."""
    possible = (values > 0.0) & (values < np.inf)
    return values if possible.all() else np.where(possible, values, np.nan)
