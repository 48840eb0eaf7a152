from datetime import UTC, date, datetime, timedelta, timezone
from zoneinfo import ZoneInfo

import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from airfield_board import clock

NOON = datetime(2026, 7, 14, 12, 0, tzinfo=UTC)


def test_the_system_clock_is_aware_and_in_utc() -> None:
    before = datetime.now(UTC)
    now = clock.SystemClock().now()
    assert now.tzinfo is UTC
    assert before <= now <= datetime.now(UTC)


def test_the_stepped_clock_stands_until_it_is_moved() -> None:
    stepped = clock.SteppedClock(NOON.astimezone(timezone(timedelta(hours=-8))))
    assert stepped.now() == NOON
    assert stepped.now().tzinfo is UTC
    stepped.move_to(NOON + timedelta(minutes=5))
    assert stepped.now() == NOON + timedelta(minutes=5)
    stepped.move_to(NOON - timedelta(days=1))
    assert stepped.now() == NOON - timedelta(days=1)


def test_the_running_clock_runs_at_its_speed_up_to_its_end(monkeypatch: pytest.MonkeyPatch) -> None:
    monotonic_s = 1000.0
    monkeypatch.setattr("airfield_board.clock._time.monotonic", lambda: monotonic_s)
    running = clock.RunningClock(NOON, NOON + timedelta(hours=1), speed=60.0)
    assert running.now() == NOON
    monotonic_s = 1010.0
    assert running.now() == NOON + timedelta(minutes=10)
    monotonic_s = 1059.0
    assert running.now() == NOON + timedelta(minutes=59)
    monotonic_s = 5000.0
    assert running.now() == NOON + timedelta(hours=1)


def test_microseconds_since_1970() -> None:
    assert clock.us_from_time(datetime(1970, 1, 1, tzinfo=UTC)) == 0
    # 20,648 days lie between 1970-01-01 and 2026-07-14; and half a day.
    assert clock.us_from_time(NOON) == (20_648 * 86_400 + 43_200) * 1_000_000
    assert clock.us_from_time(NOON.astimezone(ZoneInfo("America/Los_Angeles"))) == clock.us_from_time(NOON)
    assert clock.us_from_time(datetime(1969, 12, 31, 23, 59, 59, 999_999, tzinfo=UTC)) == -1


@given(when_us=st.integers(-(10**15), 4 * 10**15))
def test_times_and_microseconds_are_inverse(when_us: int) -> None:
    when = clock.time_from_us(when_us)
    assert when.tzinfo is UTC
    assert clock.us_from_time(when) == when_us


def test_iso_times_end_in_z() -> None:
    assert clock.iso_utc(NOON) == "2026-07-14T12:00:00Z"
    assert clock.iso_utc(NOON.astimezone(ZoneInfo("Asia/Kolkata"))) == "2026-07-14T12:00:00Z"
    assert clock.iso_utc(NOON + timedelta(milliseconds=1)) == "2026-07-14T12:00:00.001000Z"


def test_the_local_day_is_the_airfields() -> None:
    late = datetime(2026, 7, 15, 2, 0, tzinfo=UTC)
    assert clock.local_day(late, ZoneInfo("America/Los_Angeles")) == date(2026, 7, 14)
    assert clock.local_day(late, ZoneInfo("Pacific/Auckland")) == date(2026, 7, 15)


@pytest.mark.parametrize(
    ("zone", "day", "start"),
    [
        # Offsets and changes as in the IANA time zone database.
        ("America/Los_Angeles", date(2026, 7, 14), "2026-07-14T07:00:00Z"),
        ("America/Los_Angeles", date(2026, 3, 8), "2026-03-08T08:00:00Z"),  # change at 02:00: midnight is not touched
        ("America/Los_Angeles", date(2026, 3, 9), "2026-03-09T07:00:00Z"),
        ("Etc/GMT+8", date(2026, 7, 14), "2026-07-14T08:00:00Z"),
        ("Asia/Kathmandu", date(2026, 7, 14), "2026-07-13T18:15:00Z"),  # +05:45
        ("Africa/Cairo", date(2024, 4, 26), "2024-04-25T22:00:00Z"),  # midnight skipped: the day starts at 01:00
        ("America/Havana", date(2024, 11, 3), "2024-11-03T04:00:00Z"),  # 00:00 to 01:00 twice: the first of them
        ("America/Sao_Paulo", date(2018, 2, 18), "2018-02-18T03:00:00Z"),  # 23:00 to 24:00 of the day before twice
        ("America/St_Johns", date(2010, 11, 7), "2010-11-07T02:30:00Z"),  # set back at 00:01: the day starts twice
        ("America/Toronto", date(1919, 3, 31), "1919-03-31T04:30:00Z"),  # 23:30 became 00:30: midnight amid the gap
        ("Pacific/Apia", date(2011, 12, 31), "2011-12-30T10:00:00Z"),  # 30 December was left out there
    ],
)
def test_start_of_the_local_day(zone: str, day: date, start: str) -> None:
    assert clock.iso_utc(clock.start_of_local_day(day, ZoneInfo(zone))) == start


def test_a_local_day_ends_where_the_next_begins() -> None:
    # Clocks set forward in Los Angeles on 8 March 2026 (IANA time zone database): a day of 23 hours.
    start, end = clock.local_day_bounds(datetime(2026, 3, 8, 20, 0, tzinfo=UTC), ZoneInfo("America/Los_Angeles"))
    assert (clock.iso_utc(start), clock.iso_utc(end)) == ("2026-03-08T08:00:00Z", "2026-03-09T07:00:00Z")


@given(
    day=st.dates(date(1990, 1, 1), date(2035, 12, 31)),
    zone=st.sampled_from(
        ["America/Los_Angeles", "Europe/Berlin", "Australia/Lord_Howe", "Africa/Cairo", "Asia/Tehran", "UTC"]
    ),
)
@settings(max_examples=100)
def test_the_start_is_the_first_moment_that_bears_the_date(day: date, zone: str) -> None:
    there = ZoneInfo(zone)
    start = clock.start_of_local_day(day, there)
    assert clock.local_day(start, there) == day
    assert clock.local_day(start - timedelta(microseconds=1), there) < day
