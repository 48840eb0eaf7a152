from math import isnan

import numpy as np
import pytest

from airfield_board.errors import FileFaults
from airfield_board.observations.observation import NO_TIME_US
from tests.observations.file_rows import HEADER, read, us

INHG_HPA = 33.86388640341
"""One inch of mercury of 13595.1 kg/m3 under standard gravity (WMO-No. 8, part I, chapter 3)."""


def fault_of(row: str, header: str = HEADER) -> str:
    result = read(header + row + "\n")
    assert len(result.table) == 1
    return result.table.faults[0]


def file_fault(content: str | bytes, *, finished: bool = True) -> str:
    with pytest.raises(FileFaults) as caught:
        read(content, finished=finished)
    return str(caught.value)


def test_a_row_is_read_in_the_units_of_the_header() -> None:
    result = read(
        "time,altimeter_inhg,temperature_f,dewpoint_f,elevation_ft\n"
        "2026-07-14T17:23:00Z,29.92,86.0,50,4120\n"
        "2026-07-14T17:24:00Z,29.93,-40.0,-58,0\n"
    )
    table = result.table
    assert (result.format, result.notes, len(table), table.faults) == ("csv", (), 2, {})
    assert table.time_us.tolist() == [us("2026-07-14T17:23+00:00"), us("2026-07-14T17:24+00:00")]
    assert table.altimeter_hpa == pytest.approx([29.92 * INHG_HPA, 29.93 * INHG_HPA], abs=1e-9)
    assert table.temperature_c == pytest.approx([30.0, -40.0], abs=1e-12)
    assert table.dewpoint_c == pytest.approx([10.0, -50.0], abs=1e-12)
    assert table.elevation_m == pytest.approx([1255.776, 0.0], abs=1e-12)
    assert np.isnan(table.temperature_resolution_c).all()
    assert np.isnan(table.dewpoint_resolution_c).all()
    assert list(table.raw) == ["2026-07-14T17:23:00Z,29.92,86.0,50,4120", "2026-07-14T17:24:00Z,29.93,-40.0,-58,0"]


def test_columns_stand_in_any_order_and_metric() -> None:
    result = read("elevation_m,dewpoint_c,temperature_c,time,altimeter_hpa\n1256,10.5,30.25,2026-07-14T17:23Z,1013.2\n")
    table = result.table
    values = (table.altimeter_hpa[0], table.temperature_c[0], table.dewpoint_c[0], table.elevation_m[0])
    assert values == (1013.2, 30.25, 10.5, 1256.0)


def test_an_empty_dew_point_or_elevation_is_no_fault() -> None:
    header = "time,altimeter_hpa,temperature_c,dewpoint_c,elevation_m\n"
    table = read(header + "2026-07-14T17:23Z,1013.2,30.0,,\n2026-07-14T17:24Z,1013.2,30.0, , \n").table
    assert table.faults == {}
    assert np.isnan(table.dewpoint_c).all()
    assert np.isnan(table.elevation_m).all()


def test_a_file_without_a_dew_point_column_gives_none() -> None:
    table = read("time,altimeter_hpa,temperature_c\n2026-07-14T17:23Z,1013.2,30.0\n").table
    assert table.faults == {}
    assert isnan(table.dewpoint_c[0])
    assert isnan(table.elevation_m[0])


@pytest.mark.parametrize(
    ("row", "fault"),
    [
        ("2026-07-14T17:23Z,29.92,20.0", "too few fields: 3, where the header has 4"),
        ("2026-07-14T17:23Z,29.92,20.0,10.0,1", "too many fields: 5, where the header has 4"),
        ("2026-07-14T17:23Z,29.92,20.0,10.0,", "too many fields: 5, where the header has 4"),
        ("yesterday,29.92", "too few fields: 2, where the header has 4; the time 'yesterday' cannot be read; expected"),
        ("2026-07-14T17:23Z,,20.0,10.0", "no altimeter setting"),
        ("2026-07-14T17:23Z,29.92,,10.0", "no temperature"),
        ("2026-07-14T17:23Z, ,\t,10.0", "no altimeter setting; no temperature"),
        (",29.92,20.0,10.0", "no time"),
        ("2026-07-14T25:00Z,29.92,20.0,10.0", "the time '2026-07-14T25:00Z' cannot be read; expected one like"),
        ("2026-07-14T17:23Z,29.,20.0,10.0", "the altimeter setting '29.' is no plain decimal number"),
        ("2026-07-14T17:23Z,.5,20.0,10.0", "the altimeter setting '.5' is no plain decimal number"),
        ("2026-07-14T17:23Z,2_9.92,20.0,10.0", "the altimeter setting '2_9.92' is no plain decimal number"),
        ("2026-07-14T17:23Z,29.92,nan,10.0", "the temperature 'nan' is no plain decimal number"),
        ("2026-07-14T17:23Z,29.92,1e999,10.0", "the temperature '1e999' is no plain decimal number"),
        ("2026-07-14T17:23Z,29.92,２０.0,10.0", "the temperature '２０.0' is no plain decimal number"),
        ("2026-07-14T17:23Z,29.92,20.0,M05", "the dew point 'M05' is no plain decimal number"),
        ("2026-07-14T17:23Z,29.92,20.0,-", "the dew point '-' is no plain decimal number"),
        ("2026-07-14T17:23Z,29.92,20.0.0,null", "the temperature '20.0.0' is no plain decimal number; the dew point"),
        ("2026-07-14T17:23Z,29.92,2\0.0,10.0", "the row contains NUL bytes"),
        ("\0\0\0\0", "the row contains NUL bytes"),
        ("2026-07-14T17:23Z,29.92\r,20.0,10.0", "a carriage return stands in the middle of the row"),
        ('2026-07-14T17:23Z,29.92,"20.0,10.0', "quotes do not match, or a field is too long"),
        ('2026-07-14T17:23Z,29.92,"20.0"1,10.0', "quotes do not match, or a field is too long"),
        ('2026-07-14T17:23Z,29.92,2"0.0,10.0', "the temperature '2\"0.0' is no plain decimal number"),
        ("time,altimeter_inhg,temperature_c,dewpoint_c", "the header again"),
    ],
)
def test_a_row_that_cannot_be_used_says_why(row: str, fault: str) -> None:
    assert fault_of(row).startswith(fault)


def test_a_faulty_row_stands_between_good_ones() -> None:
    good = "2026-07-14T17:2{}Z,29.92,20.0,10.0\n"
    table = read(HEADER + good.format(1) + "2026-07-14T17:22Z,x,21.0,11.0\n" + good.format(3)).table
    assert list(table.faults) == [1]
    assert isnan(table.altimeter_hpa[1])
    assert table.temperature_c.tolist() == [20.0, 21.0, 20.0]
    assert table.time_us[1] == us("2026-07-14T17:22+00:00")


def test_a_row_of_the_wrong_length_keeps_a_time_that_stands_first() -> None:
    table = read(HEADER + "2026-07-14T17:23Z,29.92\n").table
    assert table.time_us[0] == us("2026-07-14T17:23+00:00")
    table = read("altimeter_hpa,time,temperature_c\n1013,2026-07-14T17:23Z\n").table
    assert table.time_us[0] == NO_TIME_US


def test_quoted_fields_are_taken() -> None:
    header = 'time,altimeter_hpa,"temperature_c",dewpoint_c,remark\n'
    table = read(
        header
        + '"2026-07-14T17:23Z","1013.2","20.5","","plain"\n'
        + '"2026-07-14T17:24Z",1013.2, "20.5" ,"","a, b"\n'.replace('" ,', '",')
        + '2026-07-14T17:25Z,1013.2,20.5,"","said ""hot"""\n'
    ).table
    assert table.faults == {}
    assert table.temperature_c.tolist() == [20.5, 20.5, 20.5]


def test_spaces_around_fields_do_not_matter() -> None:
    table = read(HEADER.replace(",", " , ") + " 2026-07-14T17:23Z ,     29.92     , 20.5\t, 10.5\n").table
    assert table.faults == {}
    assert (table.temperature_c[0], table.dewpoint_c[0]) == (20.5, 10.5)


@pytest.mark.parametrize("line_end", ["\n", "\r\n", "\r\r\n"])
@pytest.mark.parametrize("mark", ["", "\ufeff"])
def test_line_ends_blank_lines_and_a_byte_order_mark_do_not_matter(line_end: str, mark: str) -> None:
    lines = ["", HEADER.strip(), "", "2026-07-14T17:23Z,29.92,20.5,10.5", "  ", "2026-07-14T17:24Z,29.92,20.6,", "", ""]
    text = mark + line_end.join(lines if not mark else lines[1:])
    result = read(text)
    assert result.table.faults == {}
    assert result.table.temperature_c.tolist() == [20.5, 20.6]
    assert list(result.table.raw) == ["2026-07-14T17:23Z,29.92,20.5,10.5", "2026-07-14T17:24Z,29.92,20.6,"]
    places = [text.encode().index(raw.encode()) for raw in result.table.raw]
    assert result.table.position.tolist() == places


def test_an_unterminated_last_row_is_taken_from_a_finished_file_only() -> None:
    text = HEADER + "2026-07-14T17:23Z,29.92,20.5,10.5\n2026-07-14T17:24Z,29.92,20.6,1"
    finished, growing = read(text), read(text, finished=False)
    assert (len(finished.table), finished.unfinished) == (2, False)
    assert (len(growing.table), growing.unfinished) == (1, True)
    assert not read(text[: text.rindex("\n") + 1], finished=False).unfinished
    assert not read(text[: text.rindex("\n") + 1] + " ", finished=False).unfinished


def test_a_header_alone_gives_no_rows() -> None:
    assert len(read(HEADER).table) == 0
    assert len(read(HEADER.strip()).table) == 0
    assert len(read(HEADER, finished=False).table) == 0
    assert "the header, its first line, is not complete yet" in file_fault(HEADER.strip(), finished=False)


def test_unknown_columns_are_named_once() -> None:
    result = read("time,altimeter_hpa,temperature_c,wind_kt,,wind_kt\n2026-07-14T17:23Z,1013,20,5,,5\n")
    assert result.notes == ("columns not known and ignored: 'wind_kt', one without a name",)
    assert result.table.faults == {}
    many = ",".join(f"extra_{number}" for number in range(25))
    assert read(f"time,altimeter_hpa,temperature_c,{many}\n").notes[0].endswith("'extra_19' and 5 more")


@pytest.mark.parametrize(
    ("name", "suggestion"),
    [
        ("dewpont_c", "dewpoint_c"),
        ("dew_point_c", "dewpoint_c"),
        ("DewPoint_C", "dewpoint_c"),
        (" dewpoint", "dewpoint_c or dewpoint_f"),
        ("_dewpoint_f", "dewpoint_f"),
        ("depwoint_c", "dewpoint_c"),
        ("tempreature_c", "temperature_c"),
        ("temperature_k", "temperature_c or temperature_f"),
        ("altitude_m", "altimeter_inhg or altimeter_hpa"),
        ("elevation", "elevation_ft or elevation_m"),
    ],
)
def test_a_misspelt_quantity_is_an_error_with_a_suggestion(name: str, suggestion: str) -> None:
    expected = f"observations.txt:1: '{name.strip()}' is not a known name; did you mean {suggestion}?"
    assert file_fault(f"time,altimeter_hpa,temperature_c,{name}\n") == expected


@pytest.mark.parametrize("name", ["air_temperature_c", "setpoint_c", "station_pressure_hpa", "times", "wind_temp"])
def test_a_column_that_only_resembles_a_quantity_is_ignored(name: str) -> None:
    assert read(f"time,altimeter_hpa,temperature_c,{name}\n").notes == (f"columns not known and ignored: '{name}'",)


@pytest.mark.parametrize(
    ("header", "message"),
    [
        ("altimeter_hpa,temperature_c", "the header has no column time"),
        (
            "time,temperature_c",
            "the header has no column for the altimeter setting: expected altimeter_inhg or altimeter_hpa",
        ),
        ("time,altimeter_hpa", "the header has no column for the temperature: expected temperature_c or temperature_f"),
        (
            "time,altimeter_hpa,temperature_c,temperature_f",
            "the temperature is given twice in different units: temperature_c and temperature_f",
        ),
        ("time,altimeter_hpa,temperature_c,dewpoint_c,dewpoint_c", "dewpoint_c is given twice"),
        ("time,time,altimeter_hpa,temperature_c", "time is given twice"),
        ('time,altimeter_hpa,"temperature_c', "the header has quotes that do not match"),
        ("time;altimeter_hpa;temperature_c", "the columns are not separated by commas; expected a header like"),
        ("2026-07-14T17:23Z,29.92,20.0", "the header has no column time; the header has no column for the altimeter"),
    ],
)
def test_a_header_that_cannot_be_used_is_an_error_of_the_file(header: str, message: str) -> None:
    assert file_fault(header + "\n").startswith(f"observations.txt:1: {message}")


def test_a_different_header_in_the_middle_is_an_error_of_the_file() -> None:
    text = HEADER + "2026-07-14T17:23Z,29.92,20.0,10.0\n" + "time,altimeter_inhg,dewpoint_c,temperature_c\n"
    assert file_fault(text).startswith("observations.txt:3: another header stands in the middle of the file")


def test_the_line_of_an_error_counts_blank_lines() -> None:
    assert file_fault("\n\ntime,altimeter_hpa\n").startswith("observations.txt:3: ")


def test_a_csv_s_own_columns_can_be_had() -> None:
    result = read(
        "time,altimeter_hpa,temperature_c,remark\n"
        '2026-07-14T17:23Z,1013,20,"warm, dry"\n'
        "2026-07-14T17:24Z,1013,20,plain\n"
        '2026-07-14T17:25Z,1013,20,"open\n'
        "2026-07-14T17:26Z\n"
    )
    assert result.header == ("time", "altimeter_hpa", "temperature_c", "remark")
    assert result.fields(0) == ("2026-07-14T17:23Z", "1013", "20", "warm, dry")
    assert result.fields(1) == ("2026-07-14T17:24Z", "1013", "20", "plain")
    assert result.fields(2) == ('2026-07-14T17:25Z,1013,20,"open',)
    assert result.fields(3) == ("2026-07-14T17:26Z",)


def test_text_that_is_not_utf_8_harms_no_other_column() -> None:
    content = b"time,altimeter_hpa,temperature_c,remark\n2026-07-14T17:23Z,1013,20.5,B\xf6e\n"
    result = read(content)
    assert result.table.faults == {}
    assert result.table.temperature_c[0] == 20.5
    assert result.table.raw[0].endswith("B\ufffde")


def test_a_selection_of_rows_keeps_its_text() -> None:
    rows = [f"2026-07-14T17:2{number}Z,29.92,2{number}.0,x\n" for number in range(5)]
    part = read(HEADER + "".join(rows)).table.take(np.array([3, 1]))
    assert [part.raw[0], part.raw[1]] == [rows[3].strip(), rows[1].strip()]
    assert len(part.raw) == 2
