"""Local times around clock changes, as the IANA time zone database has them.

Los Angeles goes from 02:00 to 03:00 on 2026-03-08 (10:00 UTC) and from 02:00 back to 01:00 on 2026-11-01 (09:00 UTC);
Lord Howe Island moves by half an hour.
"""

from zoneinfo import ZoneInfo

import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st

from airfield_board.clock import time_from_us
from airfield_board.observations.formats.local_time import utc_from_local
from airfield_board.observations.observation import NO_TIME_US
from tests.observations.file_rows import HEADER, read, us

ZONE = "America/Los_Angeles"


def utc_times(*times: str, zone: str = ZONE) -> list[str]:
    """What local times (or times with Z) of one file become, as hour and minute of UTC."""
    result = read(HEADER + "".join(f"{time},29.92,20.0,10.0\n" for time in times), time_zone=zone)
    return [
        f"{time_from_us(time):%H:%M}" if time != NO_TIME_US else result.table.faults[row]
        for row, time in enumerate(result.table.time_us.tolist())
    ]


def november(*times: str) -> list[str]:
    return utc_times(*(f"2026-11-01T{time}" for time in times))


def test_a_time_that_the_clock_change_skips_is_rejected() -> None:
    skipped = "the clock change skips this local time: no clock ever showed it"
    march = utc_times("2026-03-08T01:59:59", "2026-03-08T02:00", "2026-03-08T02:59:59", "2026-03-08T03:00")
    assert march == ["09:59", skipped, skipped, "10:00"]


def test_a_skipped_time_is_said_beside_what_else_is_wrong() -> None:
    result = read(HEADER + "2026-03-08T02:30,29.92,x,\n", time_zone=ZONE)
    assert result.table.faults[0].startswith("the temperature 'x' is no plain decimal number; the clock change skips")


def test_doubled_times_are_of_the_second_pass_once_the_clock_ran_back() -> None:
    assert november("00:30", "01:00", "01:30", "01:00", "01:30", "02:00") == [
        *("07:30", "08:00", "08:30", "09:00", "09:30", "10:00"),
    ]


def test_doubled_times_alone_are_of_the_first_pass() -> None:
    assert november("01:10", "01:20") == ["08:10", "08:20"]


def test_the_place_behind_a_later_time_tells_the_second_pass() -> None:
    assert november("01:50", "02:05", "01:58") == ["08:50", "10:05", "09:58"]


def test_the_place_before_the_hour_tells_the_first_pass() -> None:
    assert november("01:30", "01:10", "00:59", "01:30") == ["08:30", "09:10", "07:59", "08:30"]


def test_a_time_with_an_offset_tells_the_pass_too() -> None:
    assert november("01:50", "09:10:00Z", "01:58") == ["08:50", "09:10", "09:58"]
    assert november("01:10", "08:20:00Z", "01:30") == ["08:10", "08:20", "08:30"]


def test_one_doubled_time_twice_is_a_correction_in_a_file_of_short_steps() -> None:
    assert november("01:10", "01:20", "01:20", "01:30") == ["08:10", "08:20", "08:20", "08:30"]


def test_one_doubled_time_twice_is_both_passes_in_a_file_of_hourly_steps() -> None:
    assert november("00:53", "01:53", "01:53", "02:53") == ["07:53", "08:53", "09:53", "10:53"]


def test_one_doubled_time_twice_at_the_very_beginning_is_a_correction() -> None:
    assert november("01:53", "01:53", "02:53") == ["08:53", "08:53", "10:53"]


def test_a_file_that_runs_newest_first_is_looked_at_from_its_end() -> None:
    assert november("02:00", "01:30", "01:00", "01:30", "01:00", "00:30") == [
        *("10:00", "09:30", "09:00", "08:30", "08:00", "07:30"),
    ]


def test_rows_without_a_time_between_do_not_matter() -> None:
    times = november("01:30", "9x", "01:10")
    assert (times[0], times[2]) == ("08:30", "09:10")


def test_half_an_hour_of_change() -> None:
    # Lord Howe Island: 02:00 (+11) back to 01:30 (+10:30) on 2026-04-05.
    times = [f"2026-04-05T{time}" for time in ("01:29", "01:45", "01:35", "02:00")]
    assert utc_times(*times, zone="Australia/Lord_Howe") == ["14:29", "14:45", "15:05", "15:30"]


def test_a_zone_that_never_changes() -> None:
    assert utc_times("2026-11-01T01:30", "2026-11-01T01:10", zone="Etc/GMT+8") == ["09:30", "09:10"]


def test_a_whole_year_of_rows_in_wall_time_is_unbroken() -> None:
    true_us = np.arange(us("2026-01-01T08:00+00:00"), us("2027-01-01T08:00+00:00"), 600_000_000)
    zone = ZoneInfo(ZONE)
    wall_us = np.array(
        [us(time_from_us(time).astimezone(zone).strftime("%Y-%m-%dT%H:%M:%SZ")) for time in true_us.tolist()]
    )
    result = utc_from_local(wall_us, np.ones(len(wall_us), np.bool_), zone)
    assert np.array_equal(result.time_us, true_us)
    assert not result.skipped.any()
    assert not result.begins_doubled


@pytest.mark.parametrize(("times", "doubled"), [(("01:10", "01:20"), True), (("00:59", "01:10"), False)])
def test_a_file_that_begins_in_the_doubled_hour_says_so(times: tuple[str, ...], doubled: bool) -> None:
    text = HEADER + "".join(f"2026-11-01T{time},29.92,20.0,10.0\n" for time in times)
    assert read(text, time_zone=ZONE).begins_doubled is doubled


@given(
    st.sampled_from([ZONE, "Europe/Berlin", "Australia/Lord_Howe", "Africa/Casablanca", "America/St_Johns", "UTC"]),
    st.lists(st.integers(us("1990-01-01T00:00+00:00"), us("2037-12-31T00:00+00:00")), min_size=1, max_size=6),
)
def test_every_local_time_becomes_a_moment_at_which_the_clock_showed_it(name: str, walls: list[int]) -> None:
    zone = ZoneInfo(name)
    result = utc_from_local(np.array(walls), np.ones(len(walls), np.bool_), zone)
    for wall_us, time_us, skipped in zip(walls, result.time_us.tolist(), result.skipped.tolist(), strict=True):
        wall = time_from_us(wall_us).replace(tzinfo=zone)
        exists = wall.astimezone(ZoneInfo("UTC")).astimezone(zone).replace(tzinfo=None) == wall.replace(tzinfo=None)
        assert skipped is not exists
        if exists:
            shown = time_from_us(time_us).astimezone(zone)
            assert shown.replace(tzinfo=None) == wall.replace(tzinfo=None)
