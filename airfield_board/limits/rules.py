"""The rules: what one limit says at each observation.

The definition is scalar: `LimitJudge` takes one row after the other. Arrays serve only to skip rows at which nothing
can happen: valid ones in the range of values in which the present state stays as it is, up to the end of a running
off-delay.
"""

from collections.abc import Sequence
from dataclasses import replace

import numpy as np
from numpy.typing import NDArray

from airfield_board.configuration.differences import difference_in_unit, limit_in_unit
from airfield_board.limits.comparison import (
    Reading,
    clear_over,
    compared,
    crossings,
    limit_shown,
    lingering,
    plain,
    single,
    stays,
)
from airfield_board.limits.in_force import Schedule, Standing
from airfield_board.limits.memory import Episode, JudgedRows, LimitChange, LimitMemory
from airfield_board.limits.states import State
from airfield_board.observations.conditions import ConditionsTable
from airfield_board.units import EQUAL, HOUR_US, MINUTE_US

__all__ = ["Episode", "JudgedRows", "LimitChange", "LimitJudge", "LimitMemory"]

RESTART_OFF_DELAY_US = HOUR_US
"""Least off-delay of a hold that a confirmed step or a gap of over 3 h has passed over."""


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
        looked_at = crossings(standing, over, special)
        over_there, special_there = over[looked_at].tolist(), special[looked_at].tolist()
        ahead: list[int] = looked_at.tolist()
        index, place, memory = 0, 0, self.memory
        while index < stop - start:
            self._take(standing, rows, value, over, outside, start, index)
            following = index + 1
            # What a special row began, the next row may end, so that one is always taken too.
            if not special[index]:
                low, high = stays(standing, memory.state, running=memory.run_us is not None)
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
        end_us = self.memory.run_us + self.needed_delay_us(standing)
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
            Reading(
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

    def _lose(self, reason: str, moment_us: int) -> None:
        memory = self.memory
        memory.run_us = None
        if memory.state is not State.NO_DATA:
            memory.was, memory.was_us = memory.state, memory.last_us
            self._change(State.NO_DATA, moment_us, None, None)
        memory.reason = reason
        if memory.held and memory.gap_from_us is None:
            memory.gap_from_us = moment_us

    def _step(self, standing: Standing, row: Reading) -> None:
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

    def _suspect(self, standing: Standing, row: Reading) -> None:
        memory = self.memory
        if memory.held:
            # What cannot be compared cannot be known to be clear.
            if row.outside or row.over >= clear_over(standing):
                memory.run_us = None
            return
        if memory.state is None:
            return
        would_be = plain(standing, row)
        if would_be in (State.HOLD, State.REDUCED) and memory.state.severity < would_be.severity:
            self._lose("suspect reading beyond the limit", row.time_us)

    def _valid(self, standing: Standing, row: Reading) -> None:
        would_be = plain(standing, row)
        if would_be is State.NO_DATA:
            if self.memory.state is None:
                self._change(State.NO_DATA, row.time_us, None, None)
                self.memory.reason = "outside its table"
            else:
                self._lose("outside its table", row.time_us)
            return
        if would_be is State.HOLD:
            self._enter_hold(standing, row)
            return
        self._settle(lingering(standing, self.memory.state, would_be, row.over), standing, row)

    def _valid_in_hold(self, standing: Standing, row: Reading) -> None:
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
        if row.over >= clear_over(standing):
            memory.run_us = None
        elif memory.run_us is None:
            memory.run_us = row.time_us
        over_long_enough = memory.run_us is not None and row.time_us >= memory.run_us + self.needed_delay_us(standing)
        if over_long_enough and not resumed:
            self._end_episode(row.time_us)
            self._settle(plain(standing, row), standing, row)
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
        row = single(standing, conditions, when_us)
        memory = self.memory
        last_us = memory.last_us
        if memory.held:
            if row.outside or row.over >= clear_over(standing):
                memory.run_us = None
            if not row.outside:
                self._keep_unit(standing)
                self._keep_peak(row.value, standing.light_gain - row.over)
        elif memory.state is not State.NO_DATA or memory.reason == "outside its table":
            self._valid(standing, row)
        memory.last_us = last_us
        for doubtful in suspects:
            self._suspect(standing, single(standing, doubtful, when_us))

    def as_of(
        self, when_us: int, conditions: ConditionsTable, suspects: Sequence[ConditionsTable] = ()
    ) -> "LimitJudge":
        """Return this judge as it stands at a moment after its newest observation.

        Limits change with the local day, observations come when they come: where a stricter limit has come into force
        since the newest one, nobody may go by the limit of the day before. The judge itself waits for an observation.

        Parameters
        ----------
        conditions, suspects
            As in `re_judge`.

        Returns
        -------
        LimitJudge
            Itself, or a copy that has acted on what tightened.
        """
        edge_us = self.schedule.newest_edge_us(when_us)
        if self.memory.state is None or edge_us is None or edge_us <= self.memory.last_us:
            return self
        acted = LimitJudge(self.schedule, replace(self.memory))
        acted.re_judge(edge_us, conditions, suspects)
        known, then = self.memory.state, acted.memory.state
        return acted if then is not None and then.severity >= known.severity else self

    def retire(self, when_us: int) -> None:
        """End the open episode: the limit is gone from the settings."""
        if self.memory.held:
            self._end_episode(when_us)

    # -- what follows

    def needed_delay_us(self, standing: Standing) -> int:
        """How long the present hold needs at or below its clearing value."""
        return max(standing.off_delay_us, RESTART_OFF_DELAY_US) if self.memory.slow else standing.off_delay_us

    def _enter_hold(self, standing: Standing, row: Reading) -> None:
        memory = self.memory
        memory.held = True
        memory.slow = False
        memory.run_us = None
        memory.start_us = row.time_us
        memory.peak = row.value
        memory.worst_margin = standing.light_gain - row.over
        memory.gap_us = 0
        memory.gap_from_us = None
        memory.onset_limit = limit_shown(standing, State.HOLD, row)
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

    def _settle(self, state: State, standing: Standing, row: Reading) -> None:
        if state is not self.memory.state:
            self._change(state, row.time_us, row.value, limit_shown(standing, state, row))
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
        return self.memory.run_us + self.needed_delay_us(standing)
