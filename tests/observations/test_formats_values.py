import pytest
from hypothesis import given
from hypothesis import strategies as st

from airfield_board.observations.formats.values import iso_time, plain_number
from tests.observations.file_rows import us


@pytest.mark.parametrize(
    ("text", "value"),
    [
        ("29.92", 29.92),
        ("0", 0.0),
        ("-5", -5.0),
        ("+5.50", 5.5),
        ("007", 7.0),
        ("1013", 1013.0),
        ("25.400000000000002", 25.400000000000002),
    ],
)
def test_a_plain_decimal_number_is_taken(text: str, value: float) -> None:
    assert plain_number(text) == value


@pytest.mark.parametrize(
    "text",
    [
        *(
            "",
            " ",
            "29.",
            ".5",
            "-.5",
            "2_9.92",
            "nan",
            "inf",
            "-Infinity",
            "1e999",
            "1e3",
            "0x1F",
            "--5",
            "+-5",
            "-",
            "+",
        ),
        *("29,92", "2 9", "29.9.2", "29.92\n", "٢٩", "２９", "−5", "29.92°", "M05", "1" * 41, "."),
    ],
)
def test_anything_else_is_no_number(text: str) -> None:
    assert plain_number(text) is None


@given(st.floats(-1e6, 1e6).map(lambda value: f"{value:.12f}"))
def test_a_number_has_the_value_that_float_gives(text: str) -> None:
    assert plain_number(text) == float(text)


@pytest.mark.parametrize(
    ("text", "utc"),
    [
        ("2026-07-14T17:23:00Z", "2026-07-14T17:23:00+00:00"),
        ("2026-07-14T17:23Z", "2026-07-14T17:23:00+00:00"),
        ("2026-07-14t17:23:05z", "2026-07-14T17:23:05+00:00"),
        ("2026-07-14 17:23:05.25Z", "2026-07-14T17:23:05.250000+00:00"),
        ("2026-07-14 17:23:05,1234567Z", "2026-07-14T17:23:05.123456+00:00"),
        ("2026-07-14T10:23:00-07:00", "2026-07-14T17:23:00+00:00"),
        ("2026-07-14T10:23:00 -0700", "2026-07-14T17:23:00+00:00"),
        ("2026-07-14T22:53+05:30", "2026-07-14T17:23:00+00:00"),
        ("2026-07-14T17:23-00:00", "2026-07-14T17:23:00+00:00"),
        ("20260714T172305Z", "2026-07-14T17:23:05+00:00"),
        ("20260714T1023-07", "2026-07-14T17:23:00+00:00"),
        ("2026-07-14T24:00Z", "2026-07-15T00:00:00+00:00"),
        ("2024-02-29T00:00Z", "2024-02-29T00:00:00+00:00"),
    ],
)
def test_an_iso_time_with_an_offset_is_taken_to_utc(text: str, utc: str) -> None:
    assert iso_time(text) == (us(utc), False)


def test_an_iso_time_without_an_offset_is_of_the_wall_clock() -> None:
    assert iso_time("2026-07-14T10:23:00") == (us("2026-07-14T10:23:00+00:00"), True)


@pytest.mark.parametrize(
    "text",
    [
        *("", "now", "2026-07-14", "2026-07-14T17", "17:23", "14.07.2026 17:23", "07/14/2026 17:23", "1784049780"),
        *("2026-02-29T00:00Z", "2026-13-01T00:00Z", "2026-00-01T00:00Z", "2026-07-00T00:00Z", "2026-07-14T25:00Z"),
        *("2026-07-14T24:01Z", "2026-07-14T24:00:01Z", "2026-07-14T24:00:00.5Z", "2026-07-14T17:60Z"),
        *("2026-07-14T17:23:60Z", "2026-07-14T17:23.5Z", "2026-07-14T17:23:00+15:00", "2026-07-14T17:23:00+01:60"),
        *(
            "2026-07-14T17:23:00−07:00",
            "2026-W29-2T17:23Z",
            "2026-07-14T17:23:00ZZ",
            "2026-07-1417:23",
            "20260714 1723Z",
        ),
        *("1899-12-31T00:00Z", "2200-01-01T00:00Z", "0001-01-01T00:00Z", "２026-07-14T17:23Z"),
    ],
)
def test_anything_else_is_no_time(text: str) -> None:
    assert iso_time(text) is None
