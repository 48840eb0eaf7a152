"""What the rules take in, tell, and remember of one limit."""

from collections.abc import Mapping
from dataclasses import dataclass, fields

import numpy as np
from numpy.typing import NDArray

from airfield_board.configuration.model import Unit
from airfield_board.limits.in_force import LimitKey
from airfield_board.limits.states import State
from airfield_board.observations.conditions import ConditionsTable


@dataclass(frozen=True, slots=True, kw_only=True)
class JudgedRows:
    """The rows that the rules see, in order of time; all arrays have shape (n,).

    Attributes
    ----------
    time_us
        Times, rising or equal.
    valid
        True for valid rows, False for suspect ones.
    restart
        True where runs start anew.
    stale_at_us
        The moment of staleness that passes before the row, 0 where none does.
    conditions
        Of each row.
    """

    time_us: NDArray[np.int64]
    valid: NDArray[np.bool_]
    restart: NDArray[np.bool_]
    stale_at_us: NDArray[np.int64]
    conditions: ConditionsTable


@dataclass(frozen=True, slots=True, kw_only=True)
class LimitChange:
    """A change of one limit's state.

    Attributes
    ----------
    time_us
        Of the observation; for `no_data` by staleness the moment of it.
    was, state
        From and to; ``was`` None at first.
    value, limit
        The compared value and the limit it was compared with, in ``unit``; None in `no_data`.
    """

    key: LimitKey
    unit: Unit
    time_us: int
    was: State | None
    state: State
    value: float | None
    limit: float | None


@dataclass(frozen=True, slots=True, kw_only=True)
class Episode:
    """From entering hold to leaving it.

    Attributes
    ----------
    start_us, end_us
        ``end_us`` None while open.
    peak, worst_margin
        Greatest compared value, and least limit - value, at valid observations in it, in ``unit``.
    minutes, minutes_without_data
        Length, and NO DATA inside it [min]; of an open one up to the last valid observation.
    limit
        In force at the onset.
    """

    key: LimitKey
    unit: Unit
    start_us: int
    end_us: int | None
    peak: float
    worst_margin: float
    minutes: float
    minutes_without_data: float
    limit: float


@dataclass(slots=True, kw_only=True)
class LimitMemory:
    """What a limit remembers from one observation to the next; changed only by its judge.

    Attributes
    ----------
    state, since_us
        The present state and since when; None and 0 before the first valid observation.
    reason
        Of `no_data`.
    was, was_us
        The last state other than `no_data`, and the last valid observation under it.
    held
        In a hold, though the state may be `no_data` meanwhile.
    run_us
        Start of the unbroken run at or below limit - deadband; None without one.
    slow
        The hold needs at least 60 min.
    start_us, peak, worst_margin, gap_us, gap_from_us, onset_limit, unit
        Of the open episode; ``gap_from_us`` None outside NO DATA.
    last_us
        Newest valid observation judged.
    """

    state: State | None = None
    since_us: int = 0
    reason: str = ""
    was: State | None = None
    was_us: int = 0
    held: bool = False
    run_us: int | None = None
    slow: bool = False
    start_us: int = 0
    peak: float = 0.0
    worst_margin: float = 0.0
    gap_us: int = 0
    gap_from_us: int | None = None
    onset_limit: float = 0.0
    unit: Unit = "ft"
    last_us: int = 0

    def to_json(self) -> dict[str, object]:
        """Plain values that `from_json` turns back without loss."""
        return {name: getattr(self, name) for name in _REMEMBERED}

    @classmethod
    def from_json(cls, value: Mapping[str, object]) -> "LimitMemory":
        """Turn `to_json`'s values back.

        Raises
        ------
        KeyError, ValueError
            If they are not such values.
        """
        known = {name: value[name] for name in _REMEMBERED}
        for name in ("state", "was"):
            if known[name] is not None:
                known[name] = State(str(known[name]))
        return cls(**known)  # type: ignore[arg-type] # the values are those that to_json wrote


_REMEMBERED = tuple(field.name for field in fields(LimitMemory))
