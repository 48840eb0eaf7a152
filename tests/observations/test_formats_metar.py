from datetime import UTC, datetime, timedelta
from math import isnan

import pytest
from hypothesis import given
from hypothesis import strategies as st
from metar.Metar import Metar

from airfield_board.clock import time_from_us
from airfield_board.errors import FileFaults
from airfield_board.observations.formats.metar_format import read_report, times_of
from airfield_board.observations.observation import NO_TIME_US
from tests.observations.file_rows import read, us

INHG_HPA = 33.86388640341
"""One inch of mercury of 13595.1 kg/m3 under standard gravity (WMO-No. 8, part I, chapter 3)."""

REPORT = "METAR ZZCM 141753Z 27010KT 10SM FEW080 30/10 A3005 RMK AO2 SLP120 T03040098"


def fault_of(report: str) -> str:
    table = read(report + "\n").table
    assert len(table) == 1
    return table.faults[0]


def test_a_report_gives_time_pressure_and_temperatures_in_tenths() -> None:
    result = read(REPORT + "\n")
    table = result.table
    assert (result.format, result.notes, len(table), table.faults) == ("metar", (), 1, {})
    assert table.time_us[0] == us("2026-07-14T17:53+00:00")
    assert table.altimeter_hpa[0] == pytest.approx(30.05 * INHG_HPA, abs=1e-9)
    assert (table.temperature_c[0], table.dewpoint_c[0]) == (30.4, 9.8)
    assert isnan(table.temperature_resolution_c[0])
    assert isnan(table.dewpoint_resolution_c[0])
    assert isnan(table.elevation_m[0])
    assert (table.raw[0], table.position[0]) == (REPORT, 0)


def test_a_report_without_tenths_counts_as_whole_degrees() -> None:
    table = read("SPECI ZZCM 141753Z AUTO 27010KT 9999 M05/M12 Q1013 NOSIG").table
    assert (table.altimeter_hpa[0], table.temperature_c[0], table.dewpoint_c[0]) == (1013.0, -5.0, -12.0)
    assert (table.temperature_resolution_c[0], table.dewpoint_resolution_c[0]) == (1.0, 1.0)


@pytest.mark.parametrize(
    "head",
    ["METAR ZZCM 141753Z", "ZZCM 141753Z", "METAR COR ZZCM 141753Z", "COR ZZCM 141753Z", "METAR ZZCM 141753Z COR"],
)
def test_the_head_may_be_short_or_corrected_and_in_lower_case(head: str) -> None:
    for text in (f"{head} 30/10 Q1013", f"  {head}   30/10\tQ1013 ".lower()):
        table = read(text).table
        assert (table.faults, table.temperature_c[0]) == ({}, 30.0)


@pytest.mark.parametrize(
    ("group", "temperature_c", "dewpoint_c"),
    [("M00/M01", 0.0, -1.0), ("30/", 30.0, None), ("30///", 30.0, None), ("07/M07", 7.0, -7.0)],
)
def test_temperature_groups(group: str, temperature_c: float, dewpoint_c: float | None) -> None:
    table = read(f"ZZCM 141753Z {group} Q1013").table
    assert table.faults == {}
    assert table.temperature_c[0] == temperature_c
    assert isnan(table.dewpoint_c[0]) if dewpoint_c is None else table.dewpoint_c[0] == dewpoint_c


@pytest.mark.parametrize(
    ("groups", "temperature_c", "dewpoint_c", "resolutions"),
    [
        ("M00/M01 A2992 RMK T10041009", -0.4, -0.9, (None, None)),
        ("30/10 A2992 RMK T0304", 30.4, 10.0, (None, 1.0)),
        ("30/ A2992 RMK T03040098", 30.4, None, (None, 1.0)),
        ("30/10 A2992 RMK TSNO T1", 30.0, 10.0, (1.0, 1.0)),
        ("30/10 A2992 T03040098", 30.0, 10.0, (1.0, 1.0)),
        ("30/10 A2992 RMK TEMPO T03040098", 30.0, 10.0, (1.0, 1.0)),
    ],
)
def test_tenths_refine_what_is_there(
    groups: str, temperature_c: float, dewpoint_c: float | None, resolutions: tuple[float | None, float | None]
) -> None:
    table = read(f"ZZCM 141753Z {groups}").table
    assert table.faults == {}
    assert table.temperature_c[0] == temperature_c
    assert isnan(table.dewpoint_c[0]) if dewpoint_c is None else table.dewpoint_c[0] == dewpoint_c
    for resolution, expected in zip(
        (table.temperature_resolution_c[0], table.dewpoint_resolution_c[0]), resolutions, strict=True
    ):
        assert isnan(resolution) if expected is None else resolution == expected


@pytest.mark.parametrize(
    ("report", "fault"),
    [
        ("METAR ZZCM NIL", "NIL: the station made no report; no readable day and time"),
        ("METAR ZZCM 141753Z NIL", "NIL: the station made no report; no temperature; no altimeter setting"),
        ("METAR ZZCM 1417Z 30/10 Q1013", "no readable day and time (as in 141753Z)"),
        ("METAR ZZCM 321753Z 30/10 Q1013", "no readable day and time (as in 141753Z)"),
        ("METAR ZZCM 001753Z 30/10 Q1013", "no readable day and time (as in 141753Z)"),
        ("METAR ZZCM 142453Z 30/10 Q1013", "no readable day and time (as in 141753Z)"),
        ("METAR ZZCM 141760Z 30/10 Q1013", "no readable day and time (as in 141753Z)"),
        ("METAR ZZCM 141753Z Q1013", "no temperature"),
        ("METAR ZZCM 141753Z ///// Q1013", "no temperature"),
        ("METAR ZZCM 141753Z ///10 Q1013", "no temperature"),
        ("METAR ZZCM 141753Z 3/10 Q1013", "no temperature"),
        ("METAR ZZCM 141753Z M5/10 Q1013", "no temperature"),
        ("METAR ZZCM 141753Z ///// Q1013 RMK T03040098", "no temperature"),
        ("METAR ZZCM 141753Z 30/10 31/10 Q1013", "more than one group of temperature and dew point: 30/10 31/10"),
        ("METAR ZZCM 141753Z 30/10", "no altimeter setting"),
        ("METAR ZZCM 141753Z 30/10 Q////", "no altimeter setting"),
        ("METAR ZZCM 141753Z 30/10 999", "no altimeter setting"),
        ("METAR ZZCM 141753Z 30/10 1013", "no altimeter setting"),
        ("METAR ZZCM 141753Z 30/10 A299", "no altimeter setting"),
        ("METAR ZZCM 141753Z 30/10 Q101", "no altimeter setting"),
        ("METAR ZZCM 141753Z 30/10 Q1013\0", "the report contains NUL bytes; no altimeter setting"),
        ("METAR ZZCM 141753Z 30/10 A2992 A2993", "more than one altimeter setting"),
        ("METAR ZZCM 141753Z 30/10 Q1013 Q1014", "more than one altimeter setting"),
        ("METAR ZZCM 141753Z 30/10 A2992 Q1015", "A2992 and Q1015 are over 1.5 hPa apart"),
        ("METAR ZZCM 141753Z 30/10 A2992 Q1011", "A2992 and Q1011 are over 1.5 hPa apart"),
        ("METAR ZZCM 141753Z 30/10 A2992 RMK T02890098", "T02890098 does not fit the temperature and dew point"),
        ("METAR ZZCM 141753Z 30/10 A2992 RMK T03041098", "T03041098 does not fit the temperature and dew point"),
        ("METAR ZZCM 141753Z 30/10 A2992 RMK T03040098 T03030098", "more than one T group: T03040098 T03030098"),
        ("METAR ZZCM 141753Z TEMPO 30/10 Q1013", "no temperature; no altimeter setting"),
        ("METAR ZZCM 141753Z 30/10 BECMG Q1013", "no altimeter setting"),
        ("METAR ZZCM 141753Z RMK 30/10 Q1013", "no temperature; no altimeter setting"),
    ],
)
def test_a_report_that_cannot_be_used_says_why(report: str, fault: str) -> None:
    assert fault_of(report).startswith(fault)


def test_groups_behind_the_trend_do_not_count() -> None:
    table = read("ZZCM 141753Z 30/10 Q1013 TEMPO 20/05 Q1020 RMK T03040098").table
    assert (table.faults, table.altimeter_hpa[0], table.temperature_c[0]) == ({}, 1013.0, 30.4)


def test_inches_count_where_both_pressures_agree() -> None:
    # A2992 is 1013.207 hPa.
    for both in ("A2992 Q1013", "Q1013 A2992", "A2992 Q1014", "A2992 Q1012", "A2992 A2992"):
        table = read(f"ZZCM 141753Z 30/10 {both}").table
        assert table.faults == {}
        assert table.altimeter_hpa[0] == pytest.approx(29.92 * INHG_HPA, abs=1e-9)


def test_a_high_pressure_in_inches_is_taken() -> None:
    assert read("ZZCM 141753Z M30/M35 A3115").table.altimeter_hpa[0] == pytest.approx(31.15 * INHG_HPA, abs=1e-9)


# -- reports in a file


def temperatures(text: str, *, finished: bool = True) -> list[float | None]:
    """The temperature of each row; None for a faulty row."""
    table = read(text, finished=finished).table
    return [None if row in table.faults else float(table.temperature_c[row]) for row in range(len(table))]


def test_a_report_is_a_line() -> None:
    text = "METAR ZZCM 141653Z 29/10 Q1013\n\nMETAR ZZCM 141753Z 30/10 Q1013\r\n"
    result = read(text)
    assert temperatures(text) == [29.0, 30.0]
    assert result.table.raw[1] == "METAR ZZCM 141753Z 30/10 Q1013"


def test_a_report_may_run_over_lines_where_an_equals_sign_ends_it() -> None:
    text = "METAR ZZCM 141653Z 27010KT\n  29/10\n\n Q1013=\nMETAR ZZCM 141753Z 30/10\nQ1013 RMK\nT03040098\n=\n"
    assert temperatures(text) == [29.0, 30.4]
    assert read(text).table.raw[0] == "METAR ZZCM 141653Z 27010KT\n  29/10\n\n Q1013"


def test_several_reports_may_stand_on_a_line() -> None:
    assert temperatures("ZZCM 141653Z 29/10 Q1013= ZZCM 141753Z 30/10 Q1013=") == [29.0, 30.0]


def test_text_that_is_no_report_is_a_faulty_row() -> None:
    text = "ZZCM 141653Z 29/10 Q1013\nRMK T02940098\nZZCM 141753Z 30/10 Q1013=\nhello\n"
    assert temperatures(text) == [29.0, None, 30.0, None]
    assert read(text).table.faults[1] == "no METAR or SPECI report: 'RMK T02940098'"
    assert read(text).table.time_us[1] == NO_TIME_US


def test_headings_of_bulletins_are_passed_over() -> None:
    first = "SAZZ31 ZZCM 141700\nMETAR\nZZCM 141653Z 29/10 Q1013=\n"
    second = "SPZZ31 ZZCM 141730 CCA\nSPECI ZZCM 141730Z 30/10 Q1013=\n"
    assert temperatures(first + second) == [29.0, 30.0]


@pytest.mark.parametrize("mark", ["", "\ufeff"])
def test_a_byte_order_mark_does_not_matter(mark: str) -> None:
    result = read(f"{mark}ZZCM 141653Z 29/10 Q1013\n")
    assert result.table.temperature_c[0] == 29.0
    assert result.table.position[0] == len(mark.encode())


def test_a_last_report_is_left_until_its_line_or_its_equals_sign_is_there() -> None:
    first = "ZZCM 141653Z 29/10 Q1013\n"
    growing = read(first + "ZZCM 141753Z 30/10 Q1013", finished=False)
    assert (growing.table.temperature_c.tolist(), growing.unfinished) == ([29.0], True)
    assert temperatures(first + "ZZCM 141753Z 30/10 Q1013") == [29.0, 30.0]
    assert temperatures(first + "ZZCM 141753Z 30/10 Q1013=", finished=False) == [29.0, 30.0]


def test_a_last_report_is_left_where_the_one_before_ended_with_an_equals_sign() -> None:
    text = "ZZCM 141653Z 29/10 Q1013=\nZZCM 141753Z 30/10 Q1013\n"
    growing = read(text, finished=False)
    assert (growing.table.temperature_c.tolist(), growing.unfinished) == ([29.0], True)
    assert temperatures(text) == [29.0, 30.0]
    assert temperatures(text + "RMK T03040098=\n", finished=False) == [29.0, 30.4]
    # A line report between shows that this file does not end all of them so.
    assert temperatures(text + "ZZCM 141853Z 31/10 Q1013\n", finished=False) == [29.0, 30.0, 31.0]


# -- stations


SEVERAL = "ZZCM 141653Z 29/10 Q1013\nZZXA 141653Z 15/10 Q1013\nZZCM 141753Z 30/10 Q1013\nZZXB 141753Z 16/10 Q1013\n"


def test_reports_of_several_stations_without_one_named_are_an_error() -> None:
    with pytest.raises(FileFaults, match="reports of several stations, ZZCM, ZZXA, ZZXB: the profile must name one"):
        read(SEVERAL)


def test_reports_of_other_stations_are_passed_over_and_named_once() -> None:
    result = read(SEVERAL + "hello\n", station="zzcm")
    assert result.table.temperature_c.tolist()[:2] == [29.0, 30.0]
    assert list(result.table.faults) == [2]
    assert result.notes == ("reports of other stations than ZZCM passed over: ZZXA, ZZXB",)


def test_a_file_without_the_station_says_so() -> None:
    result = read(SEVERAL, station="ZZZZ")
    assert len(result.table) == 0
    assert result.notes[1] == "no report of ZZZZ is in the file"


# -- the month


def moments(day_times: list[tuple[int, int, int] | None], file_time: str) -> list[str]:
    times = times_of(day_times, datetime.fromisoformat(file_time))
    return ["" if time == NO_TIME_US else f"{time_from_us(time):%Y-%m-%d %H:%M}" for time in times]


@pytest.mark.parametrize(
    ("day_time", "file_time", "expected"),
    [
        ((14, 17, 53), "2026-07-14T17:55Z", "2026-07-14 17:53"),
        ((15, 0, 30), "2026-07-14T17:55Z", "2026-06-15 00:30"),
        ((31, 23, 53), "2026-08-01T00:02Z", "2026-07-31 23:53"),
        ((31, 23, 53), "2026-07-01T00:02Z", "2026-05-31 23:53"),
        ((31, 23, 53), "2026-01-01T00:02Z", "2025-12-31 23:53"),
        ((29, 12, 0), "2027-03-01T00:00Z", "2027-01-29 12:00"),
        ((29, 12, 0), "2028-03-01T00:00Z", "2028-02-29 12:00"),
        ((30, 12, 0), "2028-03-01T00:00Z", "2028-01-30 12:00"),
        # Stamped a little later than the file: the hour it is issued for, or clocks that differ.
        ((14, 18, 55), "2026-07-14T17:55Z", "2026-07-14 18:55"),
        ((14, 18, 56), "2026-07-14T17:55Z", "2026-06-14 18:56"),
        ((1, 0, 0), "2026-07-31T23:57Z", "2026-08-01 00:00"),
        ((14, 17, 53), "2026-07-14T10:55-07:00", "2026-07-14 17:53"),
    ],
)
def test_the_month_is_the_nearest_in_the_past_of_the_file(
    day_time: tuple[int, int, int], file_time: str, expected: str
) -> None:
    assert moments([day_time], file_time) == [expected]


def test_reports_across_the_end_of_a_month() -> None:
    times = moments([(30, 23, 53), None, (1, 0, 53), (1, 1, 53)], "2026-07-01T02:00Z")
    assert times == ["2026-06-30 23:53", "", "2026-07-01 00:53", "2026-07-01 01:53"]


@pytest.mark.parametrize("newest_first", [False, True])
def test_a_file_of_several_months_is_told_by_its_order(newest_first: bool) -> None:
    true = [datetime(2026, 4, 20, 12, 53, tzinfo=UTC) + timedelta(hours=6 * number) for number in range(350)]
    order = true[::-1] if newest_first else true
    expected = [f"{when:%Y-%m-%d %H:%M}" for when in order]
    assert moments([(when.day, when.hour, when.minute) for when in order], "2026-07-16T18:00Z") == expected


def test_a_late_report_does_not_move_those_before_it() -> None:
    times = moments([(10, 12, 0), (12, 12, 0), (3, 12, 0), (12, 13, 0)], "2026-07-12T13:05Z")
    assert times == ["2026-07-10 12:00", "2026-07-12 12:00", "2026-07-03 12:00", "2026-07-12 13:00"]


# -- against the library


def two_digits(value_c: int) -> str:
    return f"M{-value_c:02d}" if value_c < 0 else f"{value_c:02d}"


@given(
    st.integers(-50, 50),
    st.integers(0, 30),
    st.one_of(
        st.integers(2800, 3130).map(lambda value: f"A{value}"), st.integers(950, 1060).map(lambda v: f"Q{v:04d}")
    ),
    st.sampled_from(["27010KT 10SM FEW080", "AUTO 00000KT 9999", "VRB03KT 3/4SM R28L/2600FT BR OVC004"]),
    st.booleans(),
)
def test_well_formed_reports_read_as_the_metar_library_reads_them(
    temperature: int, spread: int, pressure: str, body: str, tenths: bool
) -> None:
    text = f"METAR ZZCM 141753Z {body} {two_digits(temperature)}/{two_digits(temperature - spread)} {pressure}"
    if tenths:
        digits = f"{int(temperature < 0)}{abs(temperature * 10):03d}"
        dew = f"{int(temperature - spread < 0)}{abs((temperature - spread) * 10):03d}"
        text += f" RMK AO2 T{digits}{dew}"
    theirs = Metar(text, month=7, year=2026)
    assert theirs.time
    assert theirs.temp
    assert theirs.dewpt
    assert theirs.press
    ours = read_report(text)
    assert ours.row.fault == ""
    assert ours.station == theirs.station_id
    assert ours.day_time == (theirs.time.day, theirs.time.hour, theirs.time.minute)
    assert ours.row.temperature_c == pytest.approx(theirs.temp.value("C"), abs=1e-9)
    assert ours.row.dewpoint_c == pytest.approx(theirs.dewpt.value("C"), abs=1e-9)
    # The library's inch of mercury is a little different from ours.
    assert ours.row.altimeter_hpa == pytest.approx(theirs.press.value("HPA"), abs=0.02)


@given(st.text("METARSPCIZ0123456789/AQM =\n\0RK", max_size=200))
def test_whatever_the_text_nothing_but_plain_faults_come(text: str) -> None:
    table = read("ZZCM 141653Z 29/10 Q1013\n" + text, station="ZZCM").table
    for row in range(len(table)):
        assert row in table.faults or not (isnan(table.altimeter_hpa[row]) or isnan(table.temperature_c[row]))
