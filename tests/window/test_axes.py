"""The axes hold what must be seen, and the hours are those of the airfield, on days of a clock change too."""

from collections.abc import Sequence
from dataclasses import replace
from datetime import UTC, date, datetime, timedelta
from itertools import pairwise
from zoneinfo import ZoneInfo

import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st

from airfield_board.clock import start_of_local_day, us_from_time
from airfield_board.limits.states import State
from airfield_board.session.board_state import BoardState, Span
from airfield_board.window.axes import AltitudeAxis, TimeAxis, altitude_range, board_range, day_bounds, hour_marks
from airfield_board.window.day_scene import stretches_of
from tests.window import states

BERLIN = ZoneInfo("Europe/Berlin")
feet = st.floats(-2000.0, 20000.0, allow_subnormal=False)


@given(st.lists(feet, max_size=30), st.lists(feet, min_size=1, max_size=5), st.lists(feet, max_size=5))
def test_the_air_is_always_on_the_axis(limits: list[float], air: list[float], held: list[float]) -> None:
    low, high = altitude_range(limits, air, held)
    assert low <= min(air)
    assert max(air) <= high
    assert low % 500 == 0
    assert high % 500 == 0
    assert high - low >= 2000


def test_outlying_limits_do_not_stretch_the_axis() -> None:
    limits = [6000.0 + 100 * step for step in range(20)] + [29000.0]
    low, high = altitude_range(limits, [5000.0, 7000.0], [])
    assert (low, high) == (4500.0, 8000.0)


def test_a_limit_that_was_on_hold_is_shown() -> None:
    assert altitude_range([7000.0] * 20, [6600.0, 7100.0], [5200.0])[0] == 5000.0
    assert altitude_range([7000.0] * 20, [6600.0, 7100.0], [-2000.0])[0] == 6500.0


def test_without_anything_the_axis_rises_from_the_field() -> None:
    assert altitude_range([], [], [], field_ft=4120.0) == (4000.0, 8000.0)
    low, high = board_range(replace(states.empty_board(), operations=()))
    assert low <= 4120.0 < high


@given(feet, st.floats(-5000.0, 25000.0))
def test_altitudes_run_evenly_and_end_at_the_edges(one: float, other: float) -> None:
    axis = AltitudeAxis(low_ft=4500.0, high_ft=9000.0, top_px=44.0, bottom_px=620.0)
    assert 44.0 <= axis.px(one) <= 620.0
    if axis.holds(one) and axis.holds(other):
        assert axis.px(one) - axis.px(other) == pytest.approx((other - one) * 576.0 / 4500.0, abs=1e-6)


def board_at(zone: str, day: date, hour: float, spans: Sequence[Span] = ()) -> tuple[BoardState, datetime, ZoneInfo]:
    """Return a board in a zone, at so many true hours after the day began, with spans of its first row."""
    place = ZoneInfo(zone)
    start = start_of_local_day(day, place)
    now = start + timedelta(hours=hour)
    state = states.board(8)
    first = state.operations[0]
    assert first.shown is not None
    rows = tuple(
        replace(row, shown=replace(row.shown, spans=tuple(spans) if row is first else ()))
        for row in state.operations
        if row.shown is not None
    )
    curve = replace(
        state.curve,
        time_us=np.array([us_from_time(now)], dtype=np.int64),
        density_altitude_ft=np.array([6000.0]),
        uncertainty_ft=np.array([60.0]),
    )
    return replace(state, operations=rows, curve=curve, assessed_at=now), now, place


@pytest.mark.parametrize(("hour", "first", "last"), [(13.3, "06:00", "21:00"), (22.5, "06:00", "23:00")])
def test_the_day_runs_from_six_to_nine_and_holds_now(hour: float, first: str, last: str) -> None:
    state, now, zone = board_at("America/Los_Angeles", date(2026, 7, 16), hour)
    start, end = day_bounds(state, now, zone)
    assert f"{start.astimezone(zone):%H:%M}" == first
    assert f"{end.astimezone(zone):%H:%M}" == last


@given(st.floats(0.0, 23.99))
def test_now_is_always_on_the_axis(hour: float) -> None:
    state, now, zone = board_at("Europe/Berlin", date(2026, 7, 16), hour)
    start, end = day_bounds(state, now, zone)
    assert start <= now <= end
    assert start >= start_of_local_day(date(2026, 7, 16), zone)


def test_a_hold_before_six_is_shown() -> None:
    day = start_of_local_day(date(2026, 7, 16), BERLIN)
    span = Span(state=State.HOLD, start=day + timedelta(hours=3, minutes=20), end=day + timedelta(hours=4))
    state, now, zone = board_at("Europe/Berlin", date(2026, 7, 16), 13.0, [span])
    start, _end = day_bounds(state, now, zone)
    assert start == day + timedelta(hours=3)
    since_yesterday = Span(state=State.HOLD, start=day - timedelta(hours=5), end=None)
    state, now, zone = board_at("Europe/Berlin", date(2026, 7, 16), 13.0, [since_yesterday])
    assert day_bounds(state, now, zone)[0] == day


@pytest.mark.parametrize(
    ("day", "length_h"),
    # Central European time: clocks go forward on the last Sunday of March, back on the last of October (EU 2000/84/EC).
    [(date(2026, 3, 29), 23), (date(2026, 7, 16), 24), (date(2026, 10, 25), 25)],
)
def test_a_day_is_as_long_as_it_was(day: date, length_h: int) -> None:
    start = start_of_local_day(day, BERLIN)
    end = start_of_local_day(day + timedelta(days=1), BERLIN)
    assert end - start == timedelta(hours=length_h)
    marks = hour_marks(start, end, BERLIN, 3)
    assert len(marks) == length_h + 1
    assert all(after.when - before.when == timedelta(hours=1) for before, after in pairwise(marks))
    named = [mark.local_hour for mark in marks if mark.named]
    assert named == [0, 3, 6, 9, 12, 15, 18, 21, 0]
    axis = TimeAxis(start=start, end=end, left_px=0.0, right_px=100.0 * length_h)
    assert [axis.px(mark.when) for mark in marks] == pytest.approx([100.0 * hour for hour in range(length_h + 1)])


def test_hours_of_a_zone_with_an_odd_offset_are_its_own() -> None:
    kathmandu = ZoneInfo("Asia/Kathmandu")  # UTC+5:45
    start = start_of_local_day(date(2026, 7, 16), kathmandu)
    marks = hour_marks(start, start + timedelta(hours=24), kathmandu, 6)
    assert [mark.local_hour for mark in marks if mark.named] == [0, 6, 12, 18, 0]
    assert all(mark.when.astimezone(kathmandu).minute == 0 for mark in marks)


def axis_of_day(right_px: float = 500.0) -> TimeAxis:
    """Return the axis of a whole day."""
    start = datetime(2026, 7, 16, tzinfo=UTC)
    return TimeAxis(start=start, end=start + timedelta(days=1), left_px=0.0, right_px=right_px)


def test_thinning_keeps_ends_and_peaks() -> None:
    axis = axis_of_day()
    count = 20_000
    times = us_from_time(axis.start) + np.arange(count, dtype=np.int64) * 4_000_000
    values = 6000.0 + np.sin(np.arange(count) / 700.0) * 500.0
    values[7777] = 9000.0
    values[12345] = 3000.0
    curve = replace(
        states.board(8).curve, time_us=times, density_altitude_ft=values, uncertainty_ft=np.full(count, 60.0)
    )
    (part,) = stretches_of(curve, axis)
    assert len(part.value) <= 4 * 501
    assert part.value.max() == 9000.0
    assert part.value.min() == 3000.0
    assert (part.value[0], part.value[-1]) == (values[0], values[-1])
    assert (np.diff(part.seconds) > 0).all()


def test_a_time_without_data_breaks_the_curve() -> None:
    axis = axis_of_day()
    hours = np.array([1.0, 2.0, 3.0, 4.1, 5.0])
    curve = replace(
        states.board(8).curve,
        time_us=us_from_time(axis.start) + (hours * 3.6e9).astype(np.int64),
        density_altitude_ft=np.array([5000.0, 5100.0, 5200.0, 5300.0, np.nan]),
        uncertainty_ft=np.full(5, 60.0),
    )
    parts = stretches_of(curve, axis)
    assert [part.value.tolist() for part in parts] == [[5000.0, 5100.0, 5200.0], [5300.0]]


def test_no_curve_gives_no_stretch() -> None:
    assert stretches_of(states.empty_board().curve, axis_of_day()) == []
