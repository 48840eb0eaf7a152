from datetime import UTC, datetime, timedelta

import pytest

from airfield_board.session.board_state import AirfieldLine
from airfield_board.window.entry import Entry, Fields, read_entry, read_name

FIELD = AirfieldLine(name="Cinder Mesa", elevation_m=1255.8, time_zone="America/Los_Angeles")
METRIC = AirfieldLine(
    name="Cinder Mesa", elevation_m=1255.8, time_zone="Europe/Vienna", altimeter_unit="hpa", temperature_unit="f"
)
NOW = datetime(2026, 7, 16, 20, 20, 42, tzinfo=UTC)


def read(
    time: str = "2026-07-16 13:20",
    altimeter: str = "30.00",
    temperature: str = "30.4",
    dewpoint: str = "6.0",
    initials: str = "MS",
    *,
    field: AirfieldLine = FIELD,
    now: datetime = NOW,
) -> Entry:
    fields = Fields(time=time, altimeter=altimeter, temperature=temperature, dewpoint=dewpoint, initials=initials)
    return read_entry(fields, field, now, now)


def test_a_complete_form_is_read_in_the_profiles_units() -> None:
    entry = read()
    assert entry.problems == ()
    assert entry.observation is not None
    assert entry.observation.time == datetime(2026, 7, 16, 20, 20, tzinfo=UTC)
    # One inHg is 33.86388640341 hPa: 25.4 mm of mercury of 13595.1 kg/m3 under standard gravity (WMO-No. 8, I.3).
    assert entry.observation.altimeter_hpa == pytest.approx(1015.916592)
    assert entry.observation.temperature_c == 30.4
    assert entry.observation.dewpoint_c == 6.0
    assert entry.observation.initials == "MS"


def test_how_it_is_understood_is_said_with_utc_age_and_both_pressures() -> None:
    reading = read(time="2026-07-16 13:05").reading
    for part in ("13:05 (20:05 UTC)", "15 min old", "1015.9 hPa", "30.00 inHg", "30.4 °C", "dew point 6.0 °C"):
        assert part in reading


def test_other_units_are_read_as_such() -> None:
    entry = read("2026-07-16 22:20", "1016.3", "86", "50", field=METRIC)
    assert entry.observation is not None
    assert entry.observation.altimeter_hpa == 1016.3
    assert entry.observation.temperature_c == pytest.approx(30.0)
    assert entry.observation.dewpoint_c == pytest.approx(10.0)


def test_the_dew_point_may_be_left_empty() -> None:
    entry = read(dewpoint=" ")
    assert entry.observation is not None
    assert entry.observation.dewpoint_c is None
    assert "no dew point" in entry.reading


def test_a_true_minus_sign_is_a_minus() -> None:
    entry = read(temperature="−5.5", dewpoint="-9")
    assert entry.observation is not None
    assert entry.observation.temperature_c == -5.5


def test_an_empty_form_says_all_that_is_missing() -> None:
    problems = " ".join(read("", "", "", "", "").problems)
    for word in ("time", "altimeter setting", "temperature", "initials"):
        assert word in problems


@pytest.mark.parametrize("value", ["29,92", "2_9.92", "nan", "1e3", "29.92 inHg", "29.", ".5", "0x1d", "٣٠"])
def test_what_is_no_plain_decimal_number_is_not_taken(value: str) -> None:
    entry = read(altimeter=value)
    assert entry.observation is None
    assert "plain number in inHg" in entry.problems[0]


def test_hectopascals_typed_as_inches_are_out_of_range() -> None:
    entry = read(altimeter="1016.3")
    assert entry.observation is None
    assert "not between 850.0 and 1,085.0 hPa" in entry.problems[0]


@pytest.mark.parametrize(("temperature", "dewpoint"), [("61", "5"), ("-60.1", ""), ("30", "31.1"), ("36", "35.5")])
def test_what_the_checks_would_reject_is_said_while_typing(temperature: str, dewpoint: str) -> None:
    assert read(temperature=temperature, dewpoint=dewpoint).observation is None


@pytest.mark.parametrize("time", ["13:20", "2026-07-16", "16.07.2026 13:20", "2026-02-30 10:00", "0001-01-01 00:00"])
def test_a_time_that_cannot_be_read_is_no_time(time: str) -> None:
    entry = read(time=time, field=METRIC if time.startswith("0001") else FIELD)
    assert entry.observation is None
    assert "local, like 2026-07-16" in entry.problems[0]


def test_five_minutes_ahead_is_let_through_and_more_is_not() -> None:
    exact = datetime(2026, 7, 16, 20, 20, tzinfo=UTC)
    assert read("2026-07-16 13:25", now=exact).observation is not None
    assert "future" in read("2026-07-16 13:26", now=exact).problems[0]


def test_a_time_that_the_clock_change_skips_does_not_exist() -> None:
    after = datetime(2026, 3, 8, 11, 0, tzinfo=UTC)
    assert "skips" in read("2026-03-08 02:30", now=after).problems[0]


def test_of_a_doubled_time_the_earlier_is_taken_so_that_nothing_looks_fresher_than_it_is() -> None:
    second_pass = datetime(2026, 11, 1, 9, 40, tzinfo=UTC)  # 01:40 standard time
    entry = read("2026-11-01 01:30", now=second_pass)
    assert entry.observation is not None
    assert entry.observation.time == datetime(2026, 11, 1, 8, 30, tzinfo=UTC)


def test_the_time_at_which_the_form_was_opened_is_exact_even_in_a_doubled_hour() -> None:
    second_pass = datetime(2026, 11, 1, 9, 40, 30, tzinfo=UTC)
    entry = read("2026-11-01 01:40", now=second_pass)
    assert entry.observation is not None
    assert entry.observation.time == second_pass - timedelta(seconds=30)


@pytest.mark.parametrize(
    ("text", "name"),
    [("MS", "MS"), ("  M.  Sole ", "M. Sole"), ("Ø", "Ø"), ("", ""), (" ", ""), ("-", ""), ("_", ""), ("a\x00b", "")],
)
def test_initials_are_letters_and_spaces_are_single(text: str, name: str) -> None:
    assert read_name(text) == name
