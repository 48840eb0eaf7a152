"""The reader of many rows at once takes the ordinary rows, and gives what the careful reader gives row by row."""

from datetime import UTC, datetime

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from airfield_board.observations.formats.csv_columns import PADDING, line_ends, read_ordinary
from airfield_board.observations.formats.csv_format import read_header, read_line
from airfield_board.observations.observation import NO_TIME_US
from tests.observations.file_rows import HEADER, invented_rows, read, rules

HEAD = "elevation_ft,time,remark,altimeter_inhg,temperature_f,dewpoint_c\n"

plain_numbers = st.one_of(
    st.integers(-99999, 99999).map(str),
    st.floats(-1100, 1100).map(lambda value: f"{value:.2f}"),
    st.floats(-100, 100).map(lambda value: f"{value:+.1f}"),
    st.floats(-100, 100).map(lambda value: f"{value:.6f}"),
    st.floats(-100, 100).map(lambda value: f"{value:.17f}"),
    st.floats(-100, 100).map(repr),
    st.from_regex(r"[+-]?[0-9]{1,26}(\.[0-9]{1,26})?", fullmatch=True),
)
odd_numbers = st.one_of(
    st.sampled_from(
        ["", " ", "29.", ".5", "-", "+", "--1", "1e3", "nan", "29..9", "2.9.2", "29,9", "/1", "1/", ".", "-."]
    ),
    st.sampled_from(["12345678.", ".12345678", "1234567.8", "123456789.", ".123456789", "1.2345678.9", "0x123456789"]),
    st.sampled_from(
        ['"29.92"', '""', '"29.92', '2"9', '" 29.92 "', '"29.92" ', "\t5\t", "     5     ", "5\0", "5\r", "٢", "−5"]
    ),
    st.text("0123456789.+-eE _/:;\"' \t", max_size=12),
)
moments = st.datetimes(datetime(1890, 1, 1), datetime(2210, 1, 1))  # noqa: DTZ001 - becomes text of many forms
times = st.one_of(
    moments.map(lambda when: when.strftime("%Y-%m-%dT%H:%M:%SZ")),
    moments.map(lambda when: when.strftime("%Y-%m-%d %H:%M:%S")),
    moments.map(lambda when: when.strftime("%Y-%m-%dT%H:%MZ")),
    moments.map(lambda when: when.strftime("%Y-%m-%dT%H:%M")),
    moments.map(lambda when: when.strftime("%Y-%m-%dT%H:%M:%S.%fZ")),
    st.tuples(moments, st.from_regex(r"[+-][0-2][0-9]:[0-7][0-9]", fullmatch=True)).map(
        lambda pair: pair[0].strftime("%Y-%m-%dT%H:%M:%S") + pair[1]
    ),
    st.tuples(moments, st.from_regex(r"[+-][0-2][0-9]:[0-7][0-9]", fullmatch=True)).map(
        lambda pair: pair[0].strftime("%Y-%m-%dT%H:%M") + pair[1]
    ),
    st.from_regex(r"20[0-9]{2}-[01][0-9]-[0-3][0-9][T t][0-2][0-9]:[0-6][0-9](:[0-6][0-9])?[Zz]?", fullmatch=True),
    st.sampled_from(
        ["", "x", '"2026-07-14T17:23:00Z"', "2026-02-29T00:00:00Z", "2024-02-29T00:00:00Z", " 2026-07-14T17:23Z "]
    ),
    st.text("0123456789-:TZ+ ", min_size=15, max_size=26),
)
remarks = st.one_of(st.just(""), st.just("calm"), st.text(max_size=6), st.sampled_from(['"a,b"', '"', '""""', "a,b"]))
ordinary_lines = st.tuples(plain_numbers, times, remarks, plain_numbers, plain_numbers, plain_numbers).map(",".join)
odd_lines = st.one_of(
    st.tuples(odd_numbers, times, remarks, odd_numbers, plain_numbers, odd_numbers).map(",".join),
    st.sampled_from(["", "  ", ",,,,,", ",,,,,,", HEAD.strip(), "\r", '"']),
    st.text(max_size=20),
)


def careful(text: str) -> list[tuple[object, ...]]:
    """What the careful reader gives for each line of a file."""
    head = read_header(text.encode(), rules())
    found: list[tuple[object, ...]] = []
    for line in text.encode().split(b"\n")[1:]:
        bare = line.rstrip(b"\r")
        if bare.strip(b" \t\r"):
            row = read_line(bare, head)
            assert row is not None
            found.append(
                (row.time_us, row.altimeter_hpa, row.temperature_c, row.dewpoint_c, row.elevation_m, row.fault, bare)
            )
    return found


def at_once(text: str) -> list[tuple[object, ...]]:
    table = read(text).table
    return [
        (
            *(int(table.time_us[row]), float(table.altimeter_hpa[row]), float(table.temperature_c[row])),
            *(float(table.dewpoint_c[row]), float(table.elevation_m[row]), table.faults.get(row, "")),
            text.encode()[table.position[row] : table.position[row] + len(table.raw[row].encode())],
        )
        for row in range(len(table))
    ]


def assert_alike(text: str) -> None:
    for fast, slow in zip(at_once(text), careful(text), strict=True):
        assert repr(fast) == repr(slow)


@settings(max_examples=150)
@given(st.lists(ordinary_lines, max_size=6))
def test_ordinary_rows_are_read_alike(lines: list[str]) -> None:
    assert_alike(HEAD + "\n".join(lines))


@settings(max_examples=200)
@given(st.lists(st.one_of(ordinary_lines, odd_lines), max_size=6), st.sampled_from(["\n", "\r\n"]))
def test_odd_rows_are_read_alike(lines: list[str], line_end: str) -> None:
    assert_alike(HEAD + line_end.join(line.replace("\n", " ") for line in lines) + line_end)


@settings(max_examples=200)
@given(st.lists(st.tuples(st.booleans(), plain_numbers), min_size=1, max_size=12))
def test_a_number_has_the_same_bits_as_from_float(numbers: list[tuple[bool, str]]) -> None:
    mark = {True: '"', False: ""}
    lines = [f"2026-07-14T17:23:00Z,{mark[quoted]}{text}{mark[quoted]},20" for quoted, text in numbers]
    table = read("time,altimeter_hpa,temperature_c\n" + "\n".join(lines)).table
    for row, (_, text) in enumerate(numbers):
        if row not in table.faults:
            assert float(table.altimeter_hpa[row]).hex() == float(text).hex()


@pytest.mark.parametrize(
    "change",
    [
        lambda row: row,
        lambda row: row.replace("Z,", ","),
        lambda row: row.replace("Z,", "+00:00,"),
        lambda row: row.replace(":00Z,", "Z,"),
        lambda row: row.replace("T", " "),
        lambda row: row.replace("\n", "\r\n"),
        lambda row: row.replace(",", ", "),
        lambda row: '"' + row.replace(",", '","').replace("\n", '"\n'),
        lambda row: row.replace("\n", "1234567890\n"),
        lambda row: row[: row.rindex(",") + 1] + "\n",
    ],
    ids=["plain", "local", "offset", "minutes", "space", "crlf", "spaced", "quoted", "long", "no dew point"],
)
def test_rows_as_loggers_write_them_are_all_read_at_once(change: object) -> None:
    assert callable(change)
    lines = [change(row) for row in invented_rows(500, start=datetime(2026, 2, 28, 20, tzinfo=UTC))]
    content = (HEADER + "".join(lines)).encode()
    text = np.frombuffer(content + b"\n" * PADDING, np.uint8)
    ends = line_ends(text[: len(content)])
    starts = np.append(0, ends[:-1] + 1)
    if b"\r" in content:
        ends = ends - np.append(0, np.ones(500, np.int64))
    layout = read_header(content, rules()).layout
    assert read_ordinary(text, starts[1:], ends[1:], layout).taken.all()
    assert_alike(content.decode())


def test_many_blocks_of_rows_are_put_together_in_order() -> None:
    lines = invented_rows(40_000, start=datetime(2026, 1, 1, tzinfo=UTC))
    lines[20_000] = "odd\n"
    table = read(HEADER + "".join(lines)).table
    assert list(table.faults) == [20_000]
    assert table.time_us[20_000] == NO_TIME_US
    others = np.delete(table.time_us, 20_000)
    assert others[0] == np.datetime64("2026-01-01", "us").astype(np.int64)
    assert np.array_equal(np.unique(np.diff(others)), [60_000_000, 120_000_000])
    assert table.temperature_c[[0, 39_999]].tolist() == [float(lines[row].split(",")[2]) for row in (0, 39_999)]


def test_a_file_of_one_column_less_than_a_comma_is_no_trouble() -> None:
    assert len(read(HEADER + "\n\n").table) == 0
