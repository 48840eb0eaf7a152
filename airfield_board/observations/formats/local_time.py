"""Local times of whole columns to UTC, with the hours that a clock change skips or makes double."""

from dataclasses import dataclass
from datetime import UTC
from itertools import pairwise
from zoneinfo import ZoneInfo

import numpy as np
from numpy.typing import NDArray

from airfield_board.clock import time_from_us, us_from_time
from airfield_board.observations.observation import NO_TIME_US
from airfield_board.units import DAY_US, HOUR_US, SECOND_US

_PROBE_US = 6 * HOUR_US


@dataclass(frozen=True, slots=True, kw_only=True)
class LocalTimes:
    """Local times taken to UTC.

    Attributes
    ----------
    time_us
        UTC microseconds since 1970, or `NO_TIME_US`, shape (n,).
    skipped
        True for a local time that no clock ever showed; its ``time_us`` is `NO_TIME_US`.
    begins_doubled
        True where the first time there is, is a double one.
    """

    time_us: NDArray[np.int64]
    skipped: NDArray[np.bool_]
    begins_doubled: bool


def utc_from_local(time_us: NDArray[np.int64], local: NDArray[np.bool_], zone: ZoneInfo) -> LocalTimes:
    """Take wall-clock times to UTC.

    A time that the clock change makes double is taken by its place in the file: it is of the first pass until the
    times run back, and of the second from there on. A file in falling order of time is looked at from its end.

    Parameters
    ----------
    time_us
        Microseconds since 1970, of UTC, or of the wall clock where ``local``; `NO_TIME_US` where there is no time.
    local
        Which of them are of the wall clock.
    zone
        The clock's zone.
    """
    rows = np.flatnonzero(local & (time_us != NO_TIME_US))
    skipped = np.zeros(len(time_us), np.bool_)
    if not rows.size:
        return LocalTimes(time_us=time_us, skipped=skipped, begins_doubled=False)
    wall_us = time_us[rows]
    start_us, offset_us = _offsets(wall_us, zone)
    # The wall shows a stretch between two clock changes from its start to the start of the next, by its own offset.
    first = np.searchsorted(start_us[1:] + offset_us[:-1], wall_us, side="right")
    last = np.searchsorted(start_us[1:] + offset_us[1:], wall_us, side="right")
    result_us = time_us.copy()
    result_us[rows] = np.where(first <= last, wall_us - offset_us[first], NO_TIME_US)
    skipped[rows] = first > last
    double = np.flatnonzero(first < last)
    begins_doubled = False
    if double.size:
        timed = np.flatnonzero(result_us != NO_TIME_US)
        begins_doubled = bool(timed[0] == rows[double[0]])
        _settle_double(
            result_us,
            rows[double],
            timed,
            change_us=start_us[last[double]],
            run_back_us=(offset_us[first] - offset_us[last])[double],
        )
    return LocalTimes(time_us=result_us, skipped=skipped, begins_doubled=begins_doubled)


def _settle_double(
    time_us: NDArray[np.int64],
    double: NDArray[np.int64],
    timed: NDArray[np.int64],
    *,
    change_us: NDArray[np.int64],
    run_back_us: NDArray[np.int64],
) -> None:
    """Move the double times of the second pass, which come as those of the first, by what the clock ran back."""
    steps_us = np.diff(time_us[timed])
    # The clock change itself is one step back.
    falling = np.count_nonzero(steps_us < 0) > np.count_nonzero(steps_us > 0) + 1
    if falling:
        timed, double, change_us, run_back_us = timed[::-1], double[::-1], change_us[::-1], run_back_us[::-1]
    place = np.empty(len(time_us), np.int64)
    place[timed] = np.arange(len(timed))
    for row, change, run_back in zip(double.tolist(), change_us.tolist(), run_back_us.tolist(), strict=True):
        at = int(place[row])
        if at == 0:
            continue
        before = int(time_us[timed[at - 1]])
        ran_back = before > int(time_us[row])
        if before == int(time_us[row]):
            # Rows as far apart as the clock ran back show the change as one time twice; closer ones correct a row.
            ran_back = at > 1 and before - int(time_us[timed[at - 2]]) >= run_back
        if before >= change or ran_back:
            time_us[row] += run_back


def _offsets(wall_us: NDArray[np.int64], zone: ZoneInfo) -> tuple[NDArray[np.int64], NDArray[np.int64]]:
    """Return when stretches of one offset start, in UTC, and the offsets [us], around the given times."""
    days = np.unique(wall_us // DAY_US)
    probes = np.unique((days[:, None] * DAY_US + np.arange(-DAY_US, 2 * DAY_US + 1, _PROBE_US)).ravel()).tolist()
    found = [_offset_us(probe, zone) for probe in probes]
    starts = [probes[0]]
    offsets = [found[0]]
    for (before, after), (offset_before, offset_after) in zip(pairwise(probes), pairwise(found), strict=True):
        if offset_before != offset_after:
            # Between far probes there are no rows, so any place between them does.
            starts.append(_change_us(before, after, zone) if after - before == _PROBE_US else after)
            offsets.append(offset_after)
    return np.array(starts, np.int64), np.array(offsets, np.int64)


def _change_us(before_us: int, after_us: int, zone: ZoneInfo) -> int:
    """Find the clock change between two moments, to the second."""
    offset = _offset_us(before_us, zone)
    while after_us - before_us > SECOND_US:
        middle = before_us + (after_us - before_us) // (2 * SECOND_US) * SECOND_US
        if _offset_us(middle, zone) == offset:
            before_us = middle
        else:
            after_us = middle
    return after_us


def _offset_us(when_us: int, zone: ZoneInfo) -> int:
    wall = time_from_us(when_us).astimezone(zone)
    return us_from_time(wall.replace(tzinfo=UTC)) - when_us
