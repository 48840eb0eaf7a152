"""The rules: what one limit says at each observation.

The definition is scalar: `LimitJudge` takes one row after the other. Arrays serve only to skip rows at which nothing
can happen: valid ones in the range of values in which the present state stays as it is, up to the end of a running
off-delay.
"""

from collections.abc import Mapping, Sequence
from dataclasses import asdict, dataclass, fields

import numpy as np
from numpy.typing import NDArray

from airfield_board.configuration.differences import difference_in_unit, limit_in_unit
from airfield_board.configuration.model import Unit
from airfield_board.limits.in_force import EQUAL, LimitKey, Schedule, Standing
from airfield_board.limits.kinds import KINDS
from airfield_board.limits.states import State
from airfield_board.observations.conditions import ConditionsTable
from airfield_board.units import HOUR_US, MINUTE_US

RESTART_OFF_DELAY_US = HOUR_US
"""Least off-delay of a hold that a confirmed step or a gap of over 3 h has passed over."""

_FEW_ROWS = 8
"""Below this many rows looking ahead with arrays costs more than it saves."""


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
        return asdict(self)

    @classmethod
    def from_json(cls, value: Mapping[str, object]) -> "LimitMemory":
        """Turn `to_json`'s values back.

        Raises
        ------
        KeyError, ValueError
            If they are not such values.
        """
        known = {field.name: value[field.name] for field in fields(cls)}
        for name in ("state", "was"):
            if known[name] is not None:
                known[name] = State(str(known[name]))
        return cls(**known)  # type: ignore[arg-type] # the values are those that to_json wrote


@dataclass(frozen=True, slots=True, kw_only=True)
class _Reading:
    """One row as one limit sees it.

    ``over`` is value - limit at the greatest weight; NaN where there is nothing to compare.
    """

    time_us: int
    valid: bool
    restart: bool
    value: float
    over: float
    outside: bool


class LimitJudge:
    """Judges one limit through time.

    Parameters
    ----------
    schedule
        What counts when.
    memory
        As left by an earlier judge of the same limit; a fresh one if None.
    """

    def __init__(self, schedule: Schedule, memory: LimitMemory | None = None) -> None:
        self.schedule = schedule
        self.memory = memory or LimitMemory()
        self._changes: list[LimitChange] = []
        self._ended: list[Episode] = []

    # -- many rows

    def judge(self, rows: JudgedRows) -> None:
        """Take rows in order of time."""
        starts = [0]
        if self.schedule.edges_us:
            edges = np.searchsorted(rows.time_us, np.asarray(self.schedule.edges_us, dtype=np.int64), side="left")
            starts += edges.tolist()
        stops = [*starts[1:], len(rows.time_us)]
        for standing, start, stop in zip(self.schedule.standings, starts, stops, strict=True):
            if start < stop:
                self._judge_segment(standing, rows, start, stop)

    def _judge_segment(self, standing: Standing | None, rows: JudgedRows, start: int, stop: int) -> None:
        if standing is None:
            self._judge_unlimited(rows, start, stop)
            return
        value, over, outside = compared(standing, rows.conditions, start, stop)
        time_us = rows.time_us[start:stop]
        special = ~rows.valid[start:stop] | rows.restart[start:stop] | (rows.stale_at_us[start:stop] != 0) | outside
        looked_at = _crossings(standing, over, special)
        over_there, special_there = over[looked_at].tolist(), special[looked_at].tolist()
        ahead: list[int] = looked_at.tolist()
        index, place, memory = 0, 0, self.memory
        while index < stop - start:
            self._take(standing, rows, value, over, outside, start, index)
            following = index + 1
            # What a special row began, the next row may end, so that one is always taken too.
            if not special[index] and memory.state is not State.NO_DATA:
                low, high = _stays(standing, memory)
                due = self._due(standing, time_us, following)
                while place < len(ahead) and (
                    ahead[place] <= index
                    or (ahead[place] < due and not special_there[place] and low <= over_there[place] < high)
                ):
                    place += 1
                following = min(due, ahead[place]) if place < len(ahead) else due
                if following > index + 1:
                    self._follow(standing, value, over, index + 1, following)
                    memory.last_us = int(time_us[following - 1])
            index = following

    def _due(self, standing: Standing, time_us: NDArray[np.int64], following: int) -> int:
        """Return the row at which a running off-delay is over, not before ``following``; none: the number of rows."""
        if self.memory.run_us is None:
            return len(time_us)
        end_us = self.memory.run_us + self._delay_us(standing)
        return max(following, int(np.searchsorted(time_us, end_us, side="left")))

    def _take(
        self,
        standing: Standing,
        rows: JudgedRows,
        value: NDArray[np.float64],
        over: NDArray[np.float64],
        outside: NDArray[np.bool_],
        start: int,
        index: int,
    ) -> None:
        row = start + index
        stale_at_us = int(rows.stale_at_us[row])
        if stale_at_us:
            self.go_stale(stale_at_us)
        self._step(
            standing,
            _Reading(
                time_us=int(rows.time_us[row]),
                valid=bool(rows.valid[row]),
                restart=bool(rows.restart[row]),
                value=float(value[index]),
                over=float(over[index]),
                outside=bool(outside[index]),
            ),
        )

    def _follow(
        self, standing: Standing, value: NDArray[np.float64], over: NDArray[np.float64], first: int, stop: int
    ) -> None:
        """Keep the peak of an open episode through rows that were skipped, all of them valid."""
        if self.memory.held and first < stop:
            self._keep_peak(float(value[first:stop].max()), standing.light_gain - float(over[first:stop].max()))

    def _judge_unlimited(self, rows: JudgedRows, start: int, stop: int) -> None:
        """No entry is in force: a hold of the day before ends with the first valid observation, then no state."""
        for row in range(start, stop):
            if self.memory.state is None:
                break
            if rows.stale_at_us[row]:
                self.go_stale(int(rows.stale_at_us[row]))
            if rows.valid[row]:
                if self.memory.held:
                    self._end_episode(int(rows.time_us[row]))
                self.memory = LimitMemory()
        valid_us = rows.time_us[start:stop][rows.valid[start:stop]]
        if len(valid_us):
            self.memory.last_us = int(valid_us[-1])

    # -- one row

    def go_stale(self, moment_us: int) -> None:
        """Lose the state: the newest valid observation has become too old at this moment."""
        if self.memory.state is not None:
            self._lose("no current observation", moment_us)

    def doubt(self, moment_us: int, reason: str) -> None:
        """Something other than the age of the reading took the ground from under the state."""
        if self.memory.state is not None:
            self._lose(reason, moment_us)

    def _lose(self, reason: str, moment_us: int) -> None:
        memory = self.memory
        memory.run_us = None
        if memory.state is not State.NO_DATA:
            memory.was, memory.was_us = memory.state, memory.last_us
            self._change(State.NO_DATA, moment_us, None, None)
        memory.reason = reason
        if memory.held and memory.gap_from_us is None:
            memory.gap_from_us = moment_us

    def _step(self, standing: Standing, row: _Reading) -> None:
        if not row.valid:
            self._suspect(standing, row)
            return
        if row.restart:
            self.memory.run_us = None
            self.memory.slow = self.memory.held
        if self.memory.held:
            self._valid_in_hold(standing, row)
        else:
            self._valid(standing, row)
        self.memory.last_us = row.time_us

    def _suspect(self, standing: Standing, row: _Reading) -> None:
        memory = self.memory
        if memory.held:
            # What cannot be compared cannot be known to be clear.
            if row.outside or row.over >= _clear_over(standing):
                memory.run_us = None
            return
        if memory.state is None:
            return
        plain = _plain(standing, row)
        if plain in (State.HOLD, State.REDUCED) and memory.state.severity < plain.severity:
            self._lose("suspect reading beyond the limit", row.time_us)

    def _valid(self, standing: Standing, row: _Reading) -> None:
        plain = _plain(standing, row)
        if plain is State.NO_DATA:
            if self.memory.state is None:
                self._change(State.NO_DATA, row.time_us, None, None)
                self.memory.reason = "outside its table"
            else:
                self._lose("outside its table", row.time_us)
            return
        if plain is State.HOLD:
            self._enter_hold(standing, row)
            return
        self._settle(_lingering(standing, self.memory.state, plain, row.over), standing, row)

    def _valid_in_hold(self, standing: Standing, row: _Reading) -> None:
        memory = self.memory
        self._keep_unit(standing)
        if row.outside and not row.over >= standing.light_gain + EQUAL:
            self._lose("outside its table", row.time_us)
            return
        resumed = memory.state is State.NO_DATA
        if memory.gap_from_us is not None:
            # A correction of the newest valid row has a time before the staleness that was told meanwhile.
            memory.gap_us += max(0, row.time_us - memory.gap_from_us)
            memory.gap_from_us = None
        self._keep_peak(row.value, standing.light_gain - row.over)
        if row.over >= _clear_over(standing):
            memory.run_us = None
        elif memory.run_us is None:
            memory.run_us = row.time_us
        over_long_enough = memory.run_us is not None and row.time_us >= memory.run_us + self._delay_us(standing)
        if over_long_enough and not resumed:
            self._end_episode(row.time_us)
            self._settle(_plain(standing, row), standing, row)
        else:
            self._settle(State.HOLD, standing, row)

    def re_judge(self, when_us: int, conditions: ConditionsTable, suspects: Sequence[ConditionsTable] = ()) -> None:
        """Take changed limits at once, with the air of the newest valid observation.

        What they tighten acts; a hold ends only by the rules, at an observation.

        Parameters
        ----------
        when_us
            The moment of the change of settings.
        conditions
            One row.
        suspects
            The air of the suspect observations since, one row each.
        """
        standing = self.schedule.at(when_us)
        if standing is None:
            return
        row = _single(standing, conditions, when_us)
        memory = self.memory
        last_us = memory.last_us
        if memory.held:
            if row.outside or row.over >= _clear_over(standing):
                memory.run_us = None
            if not row.outside:
                self._keep_unit(standing)
                self._keep_peak(row.value, standing.light_gain - row.over)
        elif memory.state is not State.NO_DATA or memory.reason == "outside its table":
            self._valid(standing, row)
        memory.last_us = last_us
        for doubtful in suspects:
            self._suspect(standing, _single(standing, doubtful, when_us))

    def retire(self, when_us: int) -> None:
        """End the open episode: the limit is gone from the settings."""
        if self.memory.held:
            self._end_episode(when_us)

    # -- what follows

    def _delay_us(self, standing: Standing) -> int:
        return max(standing.off_delay_us, RESTART_OFF_DELAY_US) if self.memory.slow else standing.off_delay_us

    def _enter_hold(self, standing: Standing, row: _Reading) -> None:
        memory = self.memory
        memory.held = True
        memory.slow = False
        memory.run_us = None
        memory.start_us = row.time_us
        memory.peak = row.value
        memory.worst_margin = standing.light_gain - row.over
        memory.gap_us = 0
        memory.gap_from_us = None
        memory.onset_limit = _limit_shown(standing, State.HOLD, row)
        memory.unit = standing.unit
        self._settle(State.HOLD, standing, row)

    def _keep_unit(self, standing: Standing) -> None:
        """Carry the open episode over into the unit of a limit that has come into force since."""
        memory = self.memory
        if memory.unit != standing.unit:
            memory.peak = limit_in_unit(memory.peak, standing.quantity, memory.unit, standing.unit)
            memory.onset_limit = limit_in_unit(memory.onset_limit, standing.quantity, memory.unit, standing.unit)
            memory.worst_margin = difference_in_unit(memory.worst_margin, memory.unit, standing.unit)
            memory.unit = standing.unit

    def _keep_peak(self, value: float, margin: float) -> None:
        self.memory.peak = max(self.memory.peak, value)
        self.memory.worst_margin = min(self.memory.worst_margin, margin)

    def _end_episode(self, end_us: int) -> None:
        memory = self.memory
        self._ended.append(self._episode(end_us, end_us))
        memory.held = False
        memory.slow = False
        memory.run_us = None
        memory.gap_from_us = None

    def _episode(self, end_us: int | None, until_us: int) -> Episode:
        memory = self.memory
        gap_us = memory.gap_us
        if memory.gap_from_us is not None:
            gap_us += max(0, until_us - memory.gap_from_us)
        return Episode(
            key=self.schedule.key,
            unit=memory.unit,
            start_us=memory.start_us,
            end_us=end_us,
            peak=memory.peak,
            worst_margin=memory.worst_margin,
            minutes=(until_us - memory.start_us) / MINUTE_US,
            minutes_without_data=gap_us / MINUTE_US,
            limit=memory.onset_limit,
        )

    def _settle(self, state: State, standing: Standing, row: _Reading) -> None:
        if state is not self.memory.state:
            self._change(state, row.time_us, row.value, _limit_shown(standing, state, row))
        self.memory.reason = ""

    def _change(self, state: State, time_us: int, value: float | None, limit: float | None) -> None:
        standing = self.schedule.at(time_us)
        self._changes.append(
            LimitChange(
                key=self.schedule.key,
                unit=standing.unit if standing is not None else self.memory.unit,
                time_us=time_us,
                was=self.memory.state,
                state=state,
                value=value,
                limit=limit,
            )
        )
        self.memory.state = state
        self.memory.since_us = time_us

    # -- answers

    def take_changes(self) -> list[LimitChange]:
        """Return the changes since the last call, in order of time."""
        changes, self._changes = self._changes, []
        return changes

    def take_ended(self) -> list[Episode]:
        """Return the episodes that ended since the last call, in order of time."""
        ended, self._ended = self._ended, []
        return ended

    def open_episode(self) -> Episode | None:
        """Return the episode that is still open, up to the newest valid observation."""
        if not self.memory.held:
            return None
        return self._episode(None, max(self.memory.last_us, self.memory.start_us))

    def earliest_end_us(self, standing: Standing) -> int | None:
        """When the rules would end the hold if the present run went on; None without a run."""
        if not self.memory.held or self.memory.run_us is None:
            return None
        return self.memory.run_us + self._delay_us(standing)

    def needed_delay_us(self, standing: Standing) -> int:
        """How long the present hold needs at or below its clearing value."""
        return self._delay_us(standing)


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


def _single(standing: Standing, conditions: ConditionsTable, when_us: int) -> _Reading:
    """Return the one row of some conditions as a reading of a moment."""
    value, over, outside = compared(standing, conditions, 0, 1)
    return _Reading(
        time_us=when_us,
        valid=True,
        restart=False,
        value=float(value[0]),
        over=float(over[0]),
        outside=bool(outside[0]),
    )


def _limit_shown(standing: Standing, state: State, row: _Reading) -> float:
    """Return the limit at the greatest weight, in HOLD at the least."""
    limit = row.value - row.over if standing.tables or standing.fixed is None else standing.fixed
    return limit + standing.light_gain if state is State.HOLD else limit


def _crossings(standing: Standing, over: NDArray[np.float64], special: NDArray[np.bool_]) -> NDArray[np.int64]:
    """Return the special rows, and those on another side of any threshold than the row before."""
    if len(over) < _FEW_ROWS:
        return np.arange(len(over))
    gain, near, dead = standing.light_gain, standing.near_band, standing.deadband
    # Each threshold is the least value of ``over`` beyond it; `_stays` gives ranges between two of them.
    thresholds = {gain + EQUAL, _clear_over(standing), EQUAL, EQUAL - dead, EQUAL - near, EQUAL - near - dead}
    side = np.zeros(len(over), dtype=np.int8)
    for threshold in thresholds:
        side += over >= threshold
    crossing = special.copy()
    crossing[0] = True
    crossing[1:] |= side[1:] != side[:-1]
    return np.flatnonzero(crossing)


def _stays(standing: Standing, memory: LimitMemory) -> tuple[float, float]:
    """Return the range of ``over``, its end excluded, in which a valid row leaves the state as it is.

    In a hold that is: leaves the run as it is.
    """
    near, dead = standing.near_band, standing.deadband
    match memory.state:
        case State.HOLD if memory.run_us is None:
            return _clear_over(standing), np.inf
        case State.HOLD:
            return -np.inf, _clear_over(standing)
        case State.REDUCED:
            return EQUAL - dead, standing.light_gain + EQUAL
        case State.NEAR:
            return EQUAL - near - dead, EQUAL
        case _:
            return -np.inf, EQUAL - near


def _clear_over(standing: Standing) -> float:
    """Return the least ``over`` that is above limit - deadband, for a hold."""
    return standing.light_gain - standing.deadband + EQUAL


def _plain(standing: Standing, row: _Reading) -> State:
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


def _lingering(standing: Standing, was: State | None, plain: State, over: float) -> State:
    """Return the state outside a hold, given the one before: better by a deadband, worse at once."""
    if was is State.REDUCED and standing.light_gain > 0.0 and over >= EQUAL - standing.deadband:
        return State.REDUCED
    if (
        was in (State.REDUCED, State.NEAR)
        and plain is State.GO
        and over >= EQUAL - standing.near_band - standing.deadband
    ):
        return State.NEAR
    return plain
