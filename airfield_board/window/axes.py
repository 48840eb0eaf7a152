"""The axes that plot and rows share: altitude in whole steps, time in the airfield's hours. Pixels only; no Qt."""

import math
from collections.abc import Sequence
from dataclasses import dataclass
from datetime import datetime, timedelta
from zoneinfo import ZoneInfo

import numpy as np

from airfield_board.clock import local_day_bounds, time_from_us
from airfield_board.session.board_state import BoardState
from airfield_board.units import ft_from_m
from airfield_board.window import formatting

STEP_FT = 500.0
TICK_ROOM_PX = 24.0
REACH_FT = 2000.0
"""How far the axis follows a limit that has been on hold today, beyond what it would show anyway."""
_HOUR = timedelta(hours=1)
_QUARTER = timedelta(minutes=15)


@dataclass(frozen=True, slots=True, kw_only=True)
class AltitudeAxis:
    """Altitude to pixels: ``high_ft`` lies at ``top_px``, ``low_ft`` at ``bottom_px``."""

    low_ft: float
    high_ft: float
    top_px: float
    bottom_px: float

    def px(self, altitude_ft: float) -> float:
        """Return the pixel of an altitude; beyond the axis it is at the edge."""
        share = (self.high_ft - altitude_ft) / (self.high_ft - self.low_ft)
        return self.top_px + min(max(share, 0.0), 1.0) * (self.bottom_px - self.top_px)

    def holds(self, altitude_ft: float) -> bool:
        """Whether an altitude lies on the axis."""
        return self.low_ft <= altitude_ft <= self.high_ft


@dataclass(frozen=True, slots=True, kw_only=True)
class TimeAxis:
    """True time to pixels, so that a day with a clock change is as long as it was."""

    start: datetime
    end: datetime
    left_px: float
    right_px: float

    def px(self, when: datetime) -> float:
        """Return the pixel of a time; beyond the axis it is at the edge."""
        share = (when - self.start) / (self.end - self.start)
        return self.left_px + min(max(share, 0.0), 1.0) * (self.right_px - self.left_px)

    def holds(self, when: datetime) -> bool:
        """Whether a time lies on the axis."""
        return self.start <= when <= self.end


@dataclass(frozen=True, slots=True, kw_only=True)
class HourMark:
    """A full local hour on the time axis, and whether it is one of those that are named."""

    when: datetime
    local_hour: int
    named: bool


def altitude_range(
    limits_ft: Sequence[float],
    air_ft: Sequence[float],
    held_ft: Sequence[float],
    field_ft: float = 0.0,
    step_ft: float = STEP_FT,
) -> tuple[float, float]:
    """Return the ends of the altitude axis, whole steps.

    Parameters
    ----------
    limits_ft
        Of the rows: the middle 80 % of them is shown, the rest hang at the edges.
    air_ft
        What the air reached today, uncertainty included: always shown.
    held_ft
        Limits that were on hold today: shown where they are within `REACH_FT` of the rest.
    field_ft
        The field's elevation, from which the axis rises where there is nothing else.
    """
    wanted = [value for value in air_ft if math.isfinite(value)]
    if limits_ft:
        wanted += [float(part) for part in np.percentile(np.asarray(limits_ft), [10.0, 90.0])]
    if not wanted:
        bottom = math.floor(field_ft / step_ft) * step_ft
        return bottom, bottom + 8 * step_ft
    low, high = min(wanted), max(wanted)
    low = min([low, *(held for held in held_ft if held >= low - REACH_FT)])
    high = max([high, *(held for held in held_ft if held <= high + REACH_FT)])
    bottom, top = math.floor(low / step_ft) * step_ft, math.ceil(high / step_ft) * step_ft
    if bottom == low:
        bottom -= step_ft
    while top - bottom < 4 * step_ft:
        top += step_ft
    return bottom, top


def board_range(state: BoardState) -> tuple[float, float]:
    """Return the ends of the altitude axis of a board, in feet."""
    shown = [row.shown for row in state.operations if row.shown is not None and row.shown.axis_ft is not None]
    curve = state.curve
    usable = np.isfinite(curve.density_altitude_ft) & np.isfinite(curve.uncertainty_ft)
    air_ft: list[float] = []
    if usable.any():
        value, spread = curve.density_altitude_ft[usable], curve.uncertainty_ft[usable]
        air_ft += [float((value - spread).min()), float((value + spread).max())]
    if state.conditions is not None:
        air_ft.append(state.conditions.density_altitude_ft)
    held_ft = [line.axis_ft for line in shown if line.axis_ft is not None and line.spans]
    limits_ft = [line.axis_ft for line in shown if line.axis_ft is not None]
    return altitude_range(limits_ft, air_ft, held_ft, ft_from_m(state.airfield.elevation_m))


def altitude_marks(axis: AltitudeAxis, unit: str, *, sign: bool = False) -> list[tuple[float, str]]:
    """Return the named altitudes of an axis, in feet, with their texts; as many as there is room for.

    Parameters
    ----------
    unit
        Of the texts, ``ft`` or ``m``.
    sign
        Whether they are differences, and have one.
    """
    to_ft = 1.0 if unit == "ft" else ft_from_m(1.0)
    low, high = axis.low_ft / to_ft, axis.high_ft / to_ft
    per_unit_px = (axis.bottom_px - axis.top_px) / (high - low)
    steps = (500.0, 1000.0, 2000.0, 5000.0) if unit == "ft" else (100.0, 200.0, 500.0, 1000.0, 2000.0)
    step = next((step for step in steps if step * per_unit_px >= TICK_ROOM_PX), steps[-1])
    marks = []
    value = math.ceil(low / step - 1e-9) * step
    while value <= high + 1e-6:
        marks.append((value * to_ft, formatting.number(value, sign=sign)))
        value += step
    return marks


def day_bounds(state: BoardState, now: datetime, zone: ZoneInfo) -> tuple[datetime, datetime]:
    """Return the ends of the time axis: 06:00 to 21:00 at least, always with now, and with every hold of the day.

    The early morning is left out where nothing was on hold in it.
    """
    first, last = local_day_bounds(now, zone)
    six = _local_hour(first, last, 6, zone)
    nine_in_the_evening = _local_hour(first, last, 21, zone)
    starts = [six, _full_hour(now - _HOUR, zone)]
    for row in state.operations:
        if row.shown is not None:
            starts += [_full_hour(span.start, zone) for span in row.shown.spans if span.end is None or span.end > first]
    start = max(min(starts), first)
    ends = [nine_in_the_evening, _full_hour(now, zone) + _HOUR]
    if len(state.curve.time_us):
        ends.append(time_from_us(int(state.curve.time_us[-1])))
    end = min(max(ends), last) if now < last else max(ends)
    return start, max(end, start + _HOUR)


def hour_marks(start: datetime, end: datetime, zone: ZoneInfo, every_h: int) -> list[HourMark]:
    """Return the full local hours of a time axis; every ``every_h``-th of the clock is named."""
    marks: list[HourMark] = []
    when = start
    while when <= end:
        local = when.astimezone(zone)
        if local.minute == 0:
            named = local.hour % every_h == 0 and not (marks and marks[-1].named and marks[-1].local_hour == local.hour)
            marks.append(HourMark(when=when, local_hour=local.hour, named=named))
        when += _QUARTER
    return marks


def _full_hour(when: datetime, zone: ZoneInfo) -> datetime:
    local = when.astimezone(zone)
    return when - timedelta(minutes=local.minute, seconds=local.second, microseconds=local.microsecond)


def _local_hour(first: datetime, last: datetime, hour: int, zone: ZoneInfo) -> datetime:
    """First moment of a day at which the local clock shows the hour or a later one."""
    when = first
    while when < last and when.astimezone(zone).hour < hour:
        when += _QUARTER
    return when
