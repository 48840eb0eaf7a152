"""The quality checks: which rows are valid, which suspect, which rejected, and which dew point counts.

`check` takes a table at a time and a `QualityMemory` from one table to the next, so that a record gives the same
whether it comes in one piece or row by row. `airfield_board.observations.quality_judgement` defines the checks.
"""

import numpy as np

from airfield_board.observations.observation import (
    NO_TIME_US,
    CheckedTable,
    DewpointUse,
    ObservationTable,
    Verdict,
)
from airfield_board.observations.quality_judgement import Judgement, QualityRules, Row, judge, judge_late
from airfield_board.observations.quality_memory import Dewpoint, Past, QualityMemory
from airfield_board.observations.quality_stretches import Stretches

__all__ = ["QualityMemory", "QualityRules", "check"]

_SHORT = 8
"""Fewer rows than this are sooner judged one by one than looked through for a stretch."""


def check(
    table: ObservationTable, memory: QualityMemory, rules: QualityRules, now_us: int
) -> tuple[CheckedTable, QualityMemory]:
    """Check rows in order of time.

    Parameters
    ----------
    table
        Rows as read, in any order.
    memory
        What the checks before this one left; ``QualityMemory()`` for the first.
    rules
        The profile's part.
    now_us
        The clock, UTC microseconds since 1970: rows more than 5 min after it are rejected.

    Returns
    -------
    CheckedTable
        The same rows sorted by time, with what the checks say. A valid row of the time of the newest row that
        ``memory`` knows is a correction of it, and wins over it.
    QualityMemory
        For the next table.
    """
    checking = _Checking(_in_order_of_time(table), rules, now_us)
    times_us = checking.rows.time_us
    timed = int(times_us.searchsorted(NO_TIME_US, side="right"))
    current = max(timed, int(times_us.searchsorted(memory.newest_us)))
    for row in range(timed):
        checking.put(row, judge_late(memory.past, checking.row(row), rules, now_us))
    memory = checking.judge_late_rows(timed, current, memory)
    memory = checking.judge_rows(current, memory)
    return checking.result(), memory


class _Checking:
    """One table while it is being checked."""

    def __init__(self, rows: ObservationTable, rules: QualityRules, now_us: int) -> None:
        count = len(rows)
        self.rows = rows
        self._rules = rules
        self._now_us = now_us
        self._verdict = np.full(count, int(Verdict.VALID), dtype=np.int8)
        self._reason: dict[int, str] = {}
        self._restart = np.zeros(count, dtype=np.bool_)
        self._late = np.zeros(count, dtype=np.bool_)
        self._used_c = np.full(count, np.nan)
        self._use = np.full(count, int(DewpointUse.DRY), dtype=np.int8)

    def row(self, index: int) -> Row:
        rows = self.rows
        return Row(
            int(rows.time_us[index]),
            float(rows.altimeter_hpa[index]),
            float(rows.temperature_c[index]),
            float(rows.dewpoint_c[index]),
            float(rows.elevation_m[index]),
            rows.faults.get(index, ""),
        )

    def put(self, index: int, judgement: Judgement) -> None:
        self._verdict[index] = judgement.verdict
        if judgement.reason:
            self._reason[index] = judgement.reason
        self._restart[index] = judgement.restart
        self._used_c[index], self._use[index] = judgement.humidity

    def judge_late_rows(self, first: int, end: int, memory: QualityMemory) -> QualityMemory:
        """Judge the rows that are older than the newest one judged, those of one time together."""
        self._late[first:end] = True
        times_us = self.rows.time_us
        while first < end:
            after = first + 1
            while after < end and times_us[after] == times_us[first]:
                after += 1
            valid = [index for index in range(first, after) if self._is_valid_late(index, memory.past)]
            for index in valid[:-1]:
                self._supersede(index)
            observed = [index for index in valid if not np.isnan(self.rows.dewpoint_c[index])]
            if observed:
                late = Dewpoint(int(times_us[first]), float(self.rows.dewpoint_c[observed[-1]]))
                memory = QualityMemory(
                    newest_us=memory.newest_us,
                    before=memory.before.with_late_dewpoint(late),
                    past=memory.past.with_late_dewpoint(late),
                )
            first = after
        return memory

    def judge_rows(self, first: int, memory: QualityMemory) -> QualityMemory:
        """Judge the rows from one on, none older than the newest one judged, and whole stretches where they allow."""
        count = len(self.rows)
        times_us = self.rows.time_us
        stretches = Stretches(self.rows, first, self._rules, self._now_us) if count - first >= _SHORT else None
        winner, follows_valid = -1, False
        while first < count:
            if stretches is not None and follows_valid:
                # The last of a stretch is judged by itself: a correction of its time needs what was known before it.
                last = stretches.end(first, memory.past) - 1
                if last - first >= _SHORT:
                    memory = self._take(stretches, first, last, memory.past)
                    first = last
            judgement, memory = judge(memory, self.row(first), self._rules, self._now_us)
            self.put(first, judgement)
            follows_valid = judgement.verdict is Verdict.VALID
            if follows_valid:
                if winner >= 0 and times_us[winner] == times_us[first]:
                    self._supersede(winner)
                winner = first
            first += 1
        return memory

    def result(self) -> CheckedTable:
        return CheckedTable(
            rows=self.rows,
            verdict=self._verdict,
            reason=self._reason,
            restart=self._restart,
            late=self._late,
            dewpoint_used_c=self._used_c,
            dewpoint_use=self._use,
        )

    def _take(self, stretches: Stretches, first: int, end: int, past: Past) -> QualityMemory:
        self._used_c[first:end], self._use[first:end], past = stretches.take(first, end, past)
        return QualityMemory(newest_us=int(self.rows.time_us[end - 1]), before=past, past=past)

    def _is_valid_late(self, index: int, past: Past) -> bool:
        judgement = judge_late(past, self.row(index), self._rules, self._now_us)
        self.put(index, judgement)
        return judgement.verdict is Verdict.VALID

    def _supersede(self, index: int) -> None:
        self._verdict[index] = Verdict.SUPERSEDED
        self._reason[index] = "corrected by a later row of the same time"
        self._restart[index] = False


def _in_order_of_time(table: ObservationTable) -> ObservationTable:
    """Return the rows sorted by time, those of one time by their place in the source."""
    times_us, places = table.time_us, table.position
    rising = times_us[1:] > times_us[:-1]
    if bool((rising | ((times_us[1:] == times_us[:-1]) & (places[1:] >= places[:-1]))).all()):
        return table
    return table.take(np.lexsort((places, times_us)))
