"""What a value is against a limit, its bands and the state before; nothing is remembered here."""

from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from airfield_board.limits.in_force import Standing
from airfield_board.limits.kinds import KINDS
from airfield_board.limits.states import State
from airfield_board.observations.conditions import ConditionsTable
from airfield_board.units import EQUAL

_FEW_ROWS = 8
"""Below this many rows looking ahead with arrays costs more than it saves."""


@dataclass(frozen=True, slots=True, kw_only=True)
class Reading:
    """One row as one limit sees it.

    ``over`` is value - limit at the greatest weight; NaN where there is nothing to compare.
    """

    time_us: int
    valid: bool
    restart: bool
    value: float
    over: float
    outside: bool


def compared(
    standing: Standing, conditions: ConditionsTable, start: int, stop: int
) -> tuple[NDArray[np.float64], NDArray[np.float64], NDArray[np.bool_]]:
    """Return compared values, what they are over the limit at the greatest weight, and where nothing can be compared.

    Returns
    -------
    tuple
        Three arrays of shape (stop - start,), the first two in the standing's unit.
    """
    value, uncertainty = KINDS[standing.quantity].values(conditions, standing.unit)
    value = value[start:stop]
    if standing.guarded:
        value = value + uncertainty[start:stop]
    if standing.tables:
        limit, outside = standing.limit_at(conditions.pressure_altitude_ft[start:stop])
        over = value - limit
    else:
        over = value - standing.fixed  # type: ignore[operator] # without tables there is a fixed limit
        outside = np.zeros(len(value), dtype=np.bool_)
    return value, over, outside | np.isnan(over)


def single(standing: Standing, conditions: ConditionsTable, when_us: int) -> Reading:
    """Return the one row of some conditions as a reading of a moment."""
    value, over, outside = compared(standing, conditions, 0, 1)
    return Reading(
        time_us=when_us,
        valid=True,
        restart=False,
        value=float(value[0]),
        over=float(over[0]),
        outside=bool(outside[0]),
    )


def full_limit(standing: Standing, value: float, over: float) -> float:
    """Return the limit at the greatest weight that a value was compared with, and is ``over`` by."""
    return value - over if standing.tables or standing.fixed is None else standing.fixed


def limit_shown(standing: Standing, state: State, row: Reading) -> float:
    """Return the limit at the greatest weight, in HOLD at the least."""
    limit = full_limit(standing, row.value, row.over)
    return limit + standing.light_gain if state is State.HOLD else limit


def crossings(standing: Standing, over: NDArray[np.float64], special: NDArray[np.bool_]) -> NDArray[np.int64]:
    """Return the special rows, and those on another side of any threshold than the row before."""
    if len(over) < _FEW_ROWS:
        return np.arange(len(over))
    gain, near, dead = standing.light_gain, standing.near_band, standing.deadband
    # Each threshold is the least value of ``over`` beyond it; `stays` gives ranges between two of them.
    thresholds = {gain + EQUAL, clear_over(standing), EQUAL, EQUAL - dead, EQUAL - near, EQUAL - near - dead}
    side = np.zeros(len(over), dtype=np.int8)
    for threshold in thresholds:
        side += over >= threshold
    crossing = special.copy()
    crossing[0] = True
    crossing[1:] |= side[1:] != side[:-1]
    return np.flatnonzero(crossing)


def stays(standing: Standing, state: State | None, *, running: bool) -> tuple[float, float]:
    """Return the range of ``over``, its end excluded, in which a valid row leaves the state as it is.

    In a hold that is: leaves the run as it is, ``running`` or not.
    """
    near, dead = standing.near_band, standing.deadband
    match state:
        case State.HOLD if not running:
            return clear_over(standing), np.inf
        case State.HOLD:
            return -np.inf, clear_over(standing)
        case State.REDUCED:
            return EQUAL - dead, standing.light_gain + EQUAL
        case State.NEAR:
            return EQUAL - near - dead, EQUAL
        case _:
            return -np.inf, EQUAL - near


def clear_over(standing: Standing) -> float:
    """Return the least ``over`` that is above limit - deadband, for a hold."""
    return standing.light_gain - standing.deadband + EQUAL


def plain(standing: Standing, row: Reading) -> State:
    """Return the plain comparison."""
    if row.over >= standing.light_gain + EQUAL:
        return State.HOLD
    if row.outside:
        return State.NO_DATA
    if row.over >= EQUAL:
        return State.REDUCED
    if row.over >= EQUAL - standing.near_band:
        return State.NEAR
    return State.GO


def lingering(standing: Standing, was: State | None, would_be: State, over: float) -> State:
    """Return the state outside a hold, given the one before: better by a deadband, worse at once."""
    if was is State.REDUCED and standing.light_gain > 0.0 and over >= EQUAL - standing.deadband:
        return State.REDUCED
    if (
        was in (State.REDUCED, State.NEAR)
        and would_be is State.GO
        and over >= EQUAL - standing.near_band - standing.deadband
    ):
        return State.NEAR
    return would_be
