"""The quality checks once more, small and slow, one row at a time, from their table.

Written from the text to be compared with the engine. Rows must come in order of time, no two of one time.
"""

import math
from dataclasses import dataclass, replace

from airfield_board.configuration.model import Humidity
from tests.limits.record import Kind
from tests.session.station import Sent

MINUTE = 60_000_000
THREE_HOURS = 180 * MINUTE
EQUAL = 0.000001


def over(value: float, limit: float) -> bool:
    """A difference under 0.000001 counts as equal."""
    return value - limit >= EQUAL


@dataclass(frozen=True, slots=True, kw_only=True)
class Found:
    """What the checks say of a row."""

    kind: Kind
    confirmed: bool = False
    dewpoint_used_c: float = math.nan


class ReferenceChecks:
    """The checks of one station through time."""

    def __init__(self, elevation_m: float, humidity: Humidity, now_us: int) -> None:
        self.elevation_m = elevation_m
        self.humidity = humidity
        self.now_us = now_us
        self.valid: list[Sent] = []
        self.waiting: Sent | None = None
        self.same_since_us = 0
        self.same_last_us = 0

    def check(self, row: Sent) -> Found:
        if row.fault or math.isnan(row.altimeter_hpa) or math.isnan(row.temperature_c):
            return self.rejected(row)
        if over(850, row.altimeter_hpa) or over(row.altimeter_hpa, 1085):
            return self.rejected(row)
        if over(-60, row.temperature_c) or over(row.temperature_c, 60):
            return self.rejected(row)
        if not math.isnan(row.dewpoint_c):
            too_moist = over(row.dewpoint_c - row.temperature_c, 1)
            if over(-80, row.dewpoint_c) or over(row.dewpoint_c, 35) or too_moist:
                return self.rejected(row)
        if not math.isnan(row.elevation_m) and over(abs(row.elevation_m - self.elevation_m), 30):
            return self.rejected(row)
        if row.time_us > self.now_us + 5 * MINUTE:
            return Found(kind="future")
        dewpoint_c = self.dewpoint_that_counts(row)
        if dewpoint_c is None:
            return self.rejected(row)
        if self.is_stuck(row):
            self.same_last_us = row.time_us
            return self.rejected(row)
        return replace(self.step_check(row), dewpoint_used_c=dewpoint_c)

    def rejected(self, row: Sent) -> Found:
        return Found(kind="future" if row.time_us > self.now_us + 5 * MINUTE else "rejected")

    def dewpoint_that_counts(self, row: Sent) -> float | None:
        """NaN where humidity does not count, None where the row is incomplete without one."""
        if self.humidity == "dry":
            return math.nan
        if not math.isnan(row.dewpoint_c):
            return row.dewpoint_c
        observed = [each for each in self.valid if not math.isnan(each.dewpoint_c)]
        if self.humidity == "auto" and not observed:
            return math.nan
        if observed and row.time_us - observed[-1].time_us <= THREE_HOURS:
            return min(observed[-1].dewpoint_c, row.temperature_c)
        day = [each.dewpoint_c for each in observed if row.time_us - each.time_us <= 24 * 60 * MINUTE]
        return min(max(day), row.temperature_c) if day else None

    def is_stuck(self, row: Sent) -> bool:
        return self.is_same(row) and row.time_us - self.same_since_us >= 12 * 60 * MINUTE

    def is_same(self, row: Sent) -> bool:
        """Whether the row goes on with the last valid values, without a gap of over 3 h."""
        if not self.valid:
            return False
        last = self.valid[-1]
        same = (row.temperature_c, row.altimeter_hpa) == (last.temperature_c, last.altimeter_hpa)
        return same and row.time_us - self.same_last_us <= THREE_HOURS

    def step_check(self, row: Sent) -> Found:
        if not self.valid or row.time_us - self.valid[-1].time_us > THREE_HOURS:
            return self.accepted(row, confirmed=False)
        observed = [each for each in self.valid if not math.isnan(each.dewpoint_c)]
        if not is_step(self.valid[-1], observed[-1] if observed else None, row):
            return self.accepted(row, confirmed=False)
        waiting = self.waiting
        if waiting is None:
            self.waiting = row
            return self.suspect(row)
        moist = waiting if not math.isnan(waiting.dewpoint_c) else observed[-1] if observed else None
        if is_step(waiting, moist, row):
            self.waiting = row
            return self.suspect(row)
        if row.time_us - waiting.time_us < MINUTE:
            return self.suspect(row)
        return self.accepted(row, confirmed=True)

    def suspect(self, row: Sent) -> Found:
        if self.is_same(row):
            self.same_last_us = row.time_us
        return Found(kind="suspect")

    def accepted(self, row: Sent, *, confirmed: bool) -> Found:
        if not self.is_same(row):
            self.same_since_us = row.time_us
        self.same_last_us = row.time_us
        self.valid.append(row)
        self.waiting = None
        return Found(kind="valid", confirmed=confirmed)


def is_step(earlier: Sent, moist: Sent | None, row: Sent) -> bool:
    """Over 3 hPa, 6 °C, or 8 °C in dew point, each times the root of the interval in units of 5 min, at least one."""

    def scale(since: Sent) -> float:
        return math.sqrt(max(row.time_us - since.time_us, 5 * MINUTE) / (5 * MINUTE))

    if over(abs(row.altimeter_hpa - earlier.altimeter_hpa), 3 * scale(earlier)):
        return True
    if over(abs(row.temperature_c - earlier.temperature_c), 6 * scale(earlier)):
        return True
    if moist is None or math.isnan(row.dewpoint_c) or row.time_us - moist.time_us > THREE_HOURS:
        return False
    return over(abs(row.dewpoint_c - moist.dewpoint_c), 8 * scale(moist))
