import json
from math import isnan

import pytest
from hypothesis import given
from hypothesis import strategies as st

from airfield_board.errors import FileFaults
from airfield_board.observations.observation import NO_TIME_US
from tests.observations.file_rows import read, us

ROW = '{"time": "2026-07-14T17:23:00Z", "altimeter_hpa": 1013.2, "temperature_c": 30.5, "dewpoint_c": 10.25}'
LATER = ROW.replace("17:23", "17:24").replace("30.5", "31")


def fault_of(row: str) -> str:
    """The fault of a row that stands behind a good one, on a line of its own."""
    result = read(ROW + "\n" + row + "\n")
    assert len(result.table) == 2
    assert list(result.table.faults) == [1]
    return result.table.faults[1]


def file_fault(content: str | bytes, *, finished: bool = True) -> str:
    with pytest.raises(FileFaults) as caught:
        read(content, finished=finished)
    return str(caught.value)


@pytest.mark.parametrize(
    "text",
    [
        f"{ROW}\n{LATER}\n",
        f"{ROW}\r\n\r\n{LATER}",
        f"\n[{ROW},{LATER}]\n",
        f"[\n  {ROW},\n  {LATER}\n]",
        f"\ufeff{ROW}\n{LATER}\n",
        f"\ufeff[{ROW} , {LATER} ]",
    ],
    ids=["lines", "crlf", "array", "array over lines", "marked lines", "marked array"],
)
def test_lines_and_arrays_are_read(text: str) -> None:
    result = read(text)
    table = result.table
    assert (result.format, result.notes, table.faults) == ("json", (), {})
    assert table.time_us.tolist() == [us("2026-07-14T17:23+00:00"), us("2026-07-14T17:24+00:00")]
    assert table.altimeter_hpa.tolist() == [1013.2, 1013.2]
    assert table.temperature_c.tolist() == [30.5, 31.0]
    assert table.dewpoint_c.tolist() == [10.25, 10.25]
    assert list(table.raw) == [ROW, LATER]
    content = text.encode()
    assert table.position.tolist() == [content.index(raw.encode()) for raw in table.raw]


@pytest.mark.parametrize("indent", [None, 2])
@pytest.mark.parametrize("mark", ["", "\ufeff"])
@pytest.mark.parametrize("finished", [True, False])
def test_a_lone_object_is_read(indent: int | None, mark: str, finished: bool) -> None:
    text = mark + json.dumps(json.loads(ROW), indent=indent)
    result = read(text, finished=finished)
    assert (len(result.table), result.table.faults, result.unfinished) == (1, {}, False)
    assert result.table.temperature_c[0] == 30.5
    assert result.table.raw[0] == text.removeprefix("\ufeff")


def test_an_array_in_other_scripts_keeps_places() -> None:
    first = ROW.replace("}", ', "remark": "Böe, 風"}')
    result = read(f"[{first}, {LATER}]")
    assert list(result.table.raw) == [first, LATER]
    assert result.notes == ("keys not known and ignored: 'remark'",)


def test_an_empty_array_has_no_rows() -> None:
    assert len(read("[ ]").table) == 0


def test_numbers_may_be_texts_and_units_may_differ_by_row() -> None:
    table = read(
        '{"time": " 2026-07-14T17:23Z ", "altimeter_inhg": "29.92", "temperature_f": " 86 ", "elevation_ft": 1000}\n'
        '{"time": "2026-07-14T17:24Z", "altimeter_hpa": 1013, "temperature_c": -0, "elevation_m": 0.5}\n'
    ).table
    assert table.faults == {}
    assert table.altimeter_hpa.tolist() == pytest.approx([29.92 * 33.86388640341, 1013.0], abs=1e-9)
    assert table.temperature_c.tolist() == pytest.approx([30.0, 0.0])
    assert table.elevation_m.tolist() == pytest.approx([304.8, 0.5])


@pytest.mark.parametrize("none", ["null", '""', '" "'])
def test_an_empty_dew_point_is_no_fault(none: str) -> None:
    table = read(ROW.replace("10.25", none)).table
    assert table.faults == {}
    assert isnan(table.dewpoint_c[0])


@pytest.mark.parametrize(
    ("written", "fault"),
    [
        ("NaN", "the temperature 'NaN' is no plain decimal number"),
        ("-Infinity", "the temperature '-Infinity' is no plain decimal number"),
        ("1e999", "the temperature '1e999' is no plain decimal number"),
        ("3.05e1", "the temperature '3.05e1' is no plain decimal number"),
        ("9" * 5000, "the temperature '99999"),
        ('"30."', "the temperature '30.' is no plain decimal number"),
        ("true", "the temperature 'true or false' is no plain decimal number"),
        ("[30]", "the temperature 'an array' is no plain decimal number"),
        ('{"value": 30}', "the temperature 'an object' is no plain decimal number"),
        ("null", "no temperature"),
        ('""', "no temperature"),
        ("30,", "the line is no complete JSON object"),
        ("30.", "the line is no complete JSON object"),
        ("030", "the line is no complete JSON object"),
        ('30, "temperature_c": 20', "temperature_c is given twice"),
        ('30, "time": "2026-07-14T18:00Z"', "time is given twice"),
        (
            '30, "temperature_f": 86',
            "the temperature is given twice in different units: temperature_c and temperature_f",
        ),
        ('30, "dewpiont_c": 5', "'dewpiont_c' is not a known name; did you mean dewpoint_c?"),
        ("[" * 100_000, "the line is no complete JSON object"),
        ('{"a":' * 100_000, "the line is no complete JSON object"),
    ],
)
def test_a_value_that_cannot_be_used_says_why(written: str, fault: str) -> None:
    assert fault_of(ROW.replace("30.5", written)).startswith(fault)


@pytest.mark.parametrize(
    ("row", "fault"),
    [
        ("5", "the line is no complete JSON object"),
        ("null", "the line is no complete JSON object"),
        (f"{ROW},", "the line is no complete JSON object"),
        (f"{ROW}{LATER}", "the line is no complete JSON object"),
        (ROW.replace("30.5", "30.5\0"), "the line is no complete JSON object"),
        ("{}", "no time; no altimeter setting; no temperature"),
        (ROW.replace('"2026-07-14T17:23:00Z"', "1784049780"), "the time is no text"),
        (ROW.replace('"2026-07-14T17:23:00Z"', "null"), "no time"),
        (ROW.replace("2026-07-14T17:23:00Z", "noon"), "the time 'noon' cannot be read"),
        (ROW.replace("altimeter_hpa", "qnh"), "no altimeter setting"),
    ],
)
def test_a_line_that_cannot_be_used_says_why(row: str, fault: str) -> None:
    assert fault_of(row).startswith(fault)


def test_a_row_with_keys_that_cannot_be_used_keeps_its_time() -> None:
    table = read(f"{ROW}\n" + LATER.replace("dewpoint_c", "dew_c") + "\n").table
    assert table.time_us[1] == us("2026-07-14T17:24+00:00")
    assert isnan(table.temperature_c[1])
    table = read(f"{ROW}\n" + '{"dew_c": 5}' + "\n").table
    assert table.time_us[1] == NO_TIME_US


def test_keys_that_no_object_can_be_read_by_are_an_error_of_the_file() -> None:
    text = f"{ROW}\n{LATER}\n".replace("dewpoint_c", "dewpont_c")
    assert file_fault(text) == "observations.txt: 'dewpont_c' is not a known name; did you mean dewpoint_c?"
    assert "given twice in different units" in file_fault(f"[{ROW.replace('dewpoint_c', 'temperature_f')}]")


def test_text_that_is_not_utf_8_is_a_fault_of_its_row_or_of_the_array() -> None:
    bad = ROW.encode().replace(b"}", b', "remark": "B\xf6e"}')
    assert list(read(bad + b"\n" + ROW.encode()).table.faults) == [0]
    assert "the JSON is not UTF-8 text" in file_fault(b"[" + bad + b"]")


def test_values_of_an_array_that_are_no_objects_are_faulty_rows() -> None:
    table = read(f"[5, {ROW}, null, [], true]").table
    assert table.faults == dict.fromkeys((0, 2, 3, 4), "the value is no JSON object")
    assert table.raw[0] == "5"


@pytest.mark.parametrize(
    ("text", "line"),
    [
        (f"[{ROW},\n{LATER}", 2),
        (f"[{ROW},\n{LATER},]", 2),
        (f"[{ROW}\n{LATER}]", 2),
        (f"[{ROW},\n{LATER[:50]}", 2),
        (f"[{ROW}]\n{LATER}", 2),
        (f"[{ROW}]\n]", 2),
        ("[", 1),
        ("[" * 100_000, 1),
    ],
)
def test_a_broken_array_is_an_error_with_its_line(text: str, line: int) -> None:
    # The value that cannot be read begins in that line, or the text that does not belong there.
    assert file_fault(text).startswith(f"observations.txt:{line}: the JSON array is broken or not complete")


@pytest.mark.parametrize("text", ["{", "{\n", '{"time"', "{]\n{]\n", json.dumps(json.loads(ROW), indent=1)[:-5]])
def test_json_without_one_readable_object_is_an_error(text: str) -> None:
    assert "the JSON is broken or not complete; expected one object, an array of objects" in file_fault(text)


def test_an_unterminated_last_line_is_left_while_the_file_grows_unless_it_is_an_object() -> None:
    part = LATER[:60]
    growing = read(f"{ROW}\n{part}", finished=False)
    assert (len(growing.table), growing.unfinished) == (1, True)
    finished = read(f"{ROW}\n{part}")
    assert (len(finished.table), finished.unfinished, list(finished.table.faults)) == (2, False, [1])
    whole = read(f"{ROW}\n{LATER}", finished=False)
    assert (len(whole.table), whole.unfinished) == (2, False)
    assert read(part, finished=False).unfinished


def test_a_broken_first_line_does_not_keep_the_others_from_being_read() -> None:
    table = read(f"{ROW[:40]}\n{LATER}\n").table
    assert list(table.faults) == [0]
    assert table.temperature_c[1] == 31.0


json_values = st.recursive(
    st.none() | st.booleans() | st.floats() | st.integers() | st.text(max_size=5),
    lambda inner: (
        st.lists(inner, max_size=3)
        | st.dictionaries(st.sampled_from(["time", "temperature_c", "altimeter_hpa", "x"]) | st.text(max_size=3), inner)
    ),
    max_leaves=8,
)


@given(st.lists(json_values, max_size=4), st.booleans())
def test_whatever_stands_in_the_objects_nothing_but_plain_faults_come(values: list[object], lines: bool) -> None:
    texts = [json.dumps(value) for value in values]
    text = f"{ROW}\n" + "\n".join(texts) if lines else f"[{','.join([ROW, *texts])}]"
    table = read(text).table
    assert len(table) == 1 + len(texts)
    assert 0 not in table.faults
    for row in range(1, len(table)):
        assert row in table.faults or not (isnan(table.altimeter_hpa[row]) or isnan(table.temperature_c[row]))
