"""The rules once more, small and slow: one limit, one row at a time, in the words in which they were laid down.

Written from the text to be compared with the engine. It knows nothing of arrays, memories or stretches.
"""

from collections.abc import Iterable
from dataclasses import dataclass
from datetime import UTC, datetime, timedelta
from itertools import pairwise
from zoneinfo import ZoneInfo

from airfield_board.configuration.model import Limit, PressureAltitudeTable, Quantity, WeightTable
from tests.limits.record import ZONE, Row

MINUTE = 60_000_000
EQUAL = 0.000001
EPOCH = datetime(1970, 1, 1, tzinfo=UTC)


@dataclass(frozen=True, slots=True, kw_only=True)
class Told:
    """A change of state."""

    time_us: int
    was: str | None
    state: str
    value: float | None


@dataclass(frozen=True, slots=True, kw_only=True)
class Exceeded:
    """An episode."""

    start_us: int
    end_us: int | None
    peak: float
    worst_margin: float
    minutes: float
    minutes_without_data: float


@dataclass(frozen=True, slots=True, kw_only=True)
class Rule:
    """What counts at one row, in the unit of the entry that is the lowest."""

    unit: str
    value: float
    greatest_weight: float
    least_weight: float
    near_band: float
    deadband: float
    off_delay_us: int
    left_a_table: bool


def exceeds(value: float, limit: float) -> bool:
    """Strictly greater; a difference under 0.000001 counts as equal."""
    return value - limit >= EQUAL


class Reference:
    """One limit through time."""

    def __init__(self, entries: Iterable[Limit], stale_after_min: float, zone: ZoneInfo = ZONE) -> None:
        self.entries = list(entries)
        self.zone = zone
        self.stale_after_us = round(stale_after_min * MINUTE)
        self.told: list[Told] = []
        self.ended: list[Exceeded] = []
        self.state: str | None = None
        self.last_valid_us: int | None = None
        self.stale = False
        self.held = False
        self.needs_an_hour = False
        self.run_from_us: int | None = None
        self.unit = ""
        self.start_us = 0
        self.peak = 0.0
        self.worst_margin = 0.0
        self.gaps: list[tuple[int, int]] = []
        self.gap_from_us: int | None = None

    def take(self, row: Row) -> None:
        if row.kind == "future":
            return
        self.let_time_pass(row.time_us)
        if row.kind == "rejected":
            return
        rule = rule_at(self.entries, row, self.zone)
        if row.kind == "suspect":
            if rule is not None:
                self.suspect(rule, row)
            return
        if rule is None:
            # No limit today: nothing to hold for, and no state.
            if self.held:
                self.leave_hold(row.time_us)
            self.state = None
        else:
            self.valid(rule, row)
        self.last_valid_us = row.time_us
        self.stale = False

    def let_time_pass(self, to_us: int) -> None:
        if self.last_valid_us is None or self.stale:
            return
        moment_us = self.last_valid_us + self.stale_after_us
        if to_us > moment_us:
            self.stale = True
            if self.state is not None:
                self.no_data(moment_us)

    def suspect(self, rule: Rule, row: Row) -> None:
        if self.held:
            # "A valid or suspect observation above limit - deadband ends the run."
            if rule.left_a_table or exceeds(rule.value, rule.least_weight - rule.deadband):
                self.run_from_us = None
            return
        would_be = plain(rule)
        if would_be == "hold" and self.state in ("go", "near", "reduced"):
            self.no_data(row.time_us)
        if would_be == "reduced" and self.state in ("go", "near"):
            self.no_data(row.time_us)

    def valid(self, rule: Rule, row: Row) -> None:
        long_gap = self.last_valid_us is not None and row.time_us - self.last_valid_us > 180 * MINUTE
        if row.confirmed or long_gap:
            self.run_from_us = None
            self.needs_an_hour = self.held
        self.change_unit(rule)
        would_be = plain(rule)
        if would_be == "no_data":
            self.no_data(row.time_us)
        elif self.held:
            self.valid_in_hold(rule, row)
        elif would_be == "hold":
            self.held = True
            self.needs_an_hour = False
            self.run_from_us = None
            self.unit = rule.unit
            self.start_us = row.time_us
            self.peak, self.worst_margin = rule.value, rule.least_weight - rule.value
            self.gaps, self.gap_from_us = [], None
            self.show("hold", row.time_us, rule.value)
        else:
            self.show(self.improved(rule, would_be), row.time_us, rule.value)

    def valid_in_hold(self, rule: Rule, row: Row) -> None:
        self.peak = max(self.peak, rule.value)
        self.worst_margin = min(self.worst_margin, rule.least_weight - rule.value)
        if exceeds(rule.value, rule.least_weight - rule.deadband):
            self.run_from_us = None
        elif self.run_from_us is None:
            self.run_from_us = row.time_us
        delay_us = rule.off_delay_us
        if self.needs_an_hour:
            delay_us = max(delay_us, 60 * MINUTE)
        after_no_data = self.state == "no_data"
        if after_no_data:
            assert self.gap_from_us is not None
            self.gaps.append((self.gap_from_us, row.time_us))
            self.gap_from_us = None
        long_enough = self.run_from_us is not None and row.time_us >= self.run_from_us + delay_us
        if long_enough and not after_no_data:
            self.leave_hold(row.time_us)
            self.show(plain(rule), row.time_us, rule.value)
        else:
            self.show("hold", row.time_us, rule.value)

    def improved(self, rule: Rule, would_be: str) -> str:
        """Worse at once, better only by a deadband."""
        limit, value = rule.greatest_weight, rule.value
        by_weight = rule.least_weight > limit
        state = self.state
        if state == "reduced" and by_weight and exceeds(value, limit - rule.deadband):
            return "reduced"
        if state in ("near", "reduced") and would_be == "go" and exceeds(value, limit - rule.near_band - rule.deadband):
            return "near"
        return would_be

    def no_data(self, time_us: int) -> None:
        self.run_from_us = None
        if self.held and self.gap_from_us is None:
            self.gap_from_us = time_us
        self.show("no_data", time_us, None)

    def leave_hold(self, time_us: int) -> None:
        self.ended.append(self.episode(time_us, time_us))
        self.held = False
        self.needs_an_hour = False
        self.run_from_us = None

    def change_unit(self, rule: Rule) -> None:
        if self.held and self.unit != rule.unit:
            self.peak = in_unit(self.peak, self.unit, rule.unit)
            self.worst_margin = difference_in_unit(self.worst_margin, self.unit, rule.unit)
            self.unit = rule.unit

    def show(self, state: str, time_us: int, value: float | None) -> None:
        if state != self.state:
            self.told.append(Told(time_us=time_us, was=self.state, state=state, value=value))
            self.state = state

    def open_episode(self) -> Exceeded | None:
        if not self.held:
            return None
        assert self.last_valid_us is not None
        return self.episode(None, self.last_valid_us)

    def episode(self, end_us: int | None, until_us: int) -> Exceeded:
        gaps = list(self.gaps)
        if self.gap_from_us is not None and self.gap_from_us < until_us:
            gaps.append((self.gap_from_us, until_us))
        return Exceeded(
            start_us=self.start_us,
            end_us=end_us,
            peak=self.peak,
            worst_margin=self.worst_margin,
            minutes=(until_us - self.start_us) / MINUTE,
            minutes_without_data=sum(after - before for before, after in gaps) / MINUTE,
        )


def plain(rule: Rule) -> str:
    """The plain comparison."""
    if exceeds(rule.value, rule.least_weight):
        return "hold"
    if rule.left_a_table:
        return "no_data"
    if exceeds(rule.value, rule.greatest_weight):
        return "reduced"
    if exceeds(rule.value, rule.greatest_weight - rule.near_band):
        return "near"
    return "go"


def rule_at(entries: list[Limit], row: Row, zone: ZoneInfo) -> Rule | None:
    """The lowest of the limits in force on the row's local day."""
    day = (EPOCH + timedelta(microseconds=row.time_us)).astimezone(zone).date()
    counting = [
        entry
        for entry in entries
        if (entry.valid_from is None or entry.valid_from <= day)
        and (entry.valid_until is None or day <= entry.valid_until)
    ]
    if not counting:
        return None
    lowest = min(counting, key=lambda entry: lowest_of(entry))
    unit = lowest.unit
    native = "ft" if unit in ("ft", "m") else "c"
    is_difference = lowest.quantity is Quantity.ISA_DEVIATION
    value = difference_in_unit(row.value, native, unit) if is_difference else in_unit(row.value, native, unit)
    if any(entry.guarded for entry in counting):
        value += difference_in_unit(row.uncertainty, native, unit)
    heavy = [limit_at(entry, row, unit, lightest=False) for entry in counting]
    light = [limit_at(entry, row, unit, lightest=True) for entry in counting]
    known_heavy = [limit for limit in heavy if limit is not None]
    known_light = [limit for limit in light if limit is not None]
    return Rule(
        unit=unit,
        value=value,
        greatest_weight=min(known_heavy, default=float("inf")),
        least_weight=min(known_light, default=float("inf")),
        near_band=max(difference_in_unit(entry.near_band, entry.unit, unit) for entry in counting),
        deadband=max(difference_in_unit(entry.deadband, entry.unit, unit) for entry in counting),
        off_delay_us=round(max(entry.off_delay_min for entry in counting) * MINUTE),
        left_a_table=None in heavy,
    )


def lowest_of(entry: Limit) -> float:
    """An entry's lowest limit, in feet or degrees Celsius."""
    limits = [entry.value] if isinstance(entry.value, int | float) else list(entry.value.limits)
    native = "ft" if entry.unit in ("ft", "m") else "c"
    if entry.quantity is Quantity.ISA_DEVIATION:
        return min(difference_in_unit(limit, entry.unit, native) for limit in limits)
    return min(in_unit(limit, entry.unit, native) for limit in limits)


def limit_at(entry: Limit, row: Row, unit: str, *, lightest: bool) -> float | None:
    """One entry's limit at the least or the greatest weight; None outside its table."""
    if isinstance(entry.value, WeightTable):
        limit = max(entry.value.limits) if lightest else min(entry.value.limits)
    elif isinstance(entry.value, PressureAltitudeTable):
        found = between(entry.value, row.pressure_altitude_ft)
        if found is None:
            return None
        limit = found
    else:
        limit = entry.value
    return (
        difference_in_unit(limit, entry.unit, unit)
        if entry.quantity is Quantity.ISA_DEVIATION
        else in_unit(limit, entry.unit, unit)
    )


def between(table: PressureAltitudeTable, height_ft: float) -> float | None:
    """Linear between the points, never beyond them."""
    points = list(zip(table.altitudes_ft, table.limits, strict=True))
    for (low_ft, low), (high_ft, high) in pairwise(points):
        if low_ft <= height_ft <= high_ft:
            return low + (high - low) * (height_ft - low_ft) / (high_ft - low_ft)
    return None


def in_unit(value: float, unit: str, wanted: str) -> float:
    if (unit, wanted) == ("c", "f"):
        return value * 9 / 5 + 32
    if (unit, wanted) == ("f", "c"):
        return (value - 32) * 5 / 9
    return difference_in_unit(value, unit, wanted)


def difference_in_unit(value: float, unit: str, wanted: str) -> float:
    if unit == wanted:
        return value
    return value * {"ft": 0.3048, "m": 1 / 0.3048, "c": 9 / 5, "f": 5 / 9}[unit]
