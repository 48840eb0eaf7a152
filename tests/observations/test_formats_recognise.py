import pytest
from hypothesis import given
from hypothesis import strategies as st

from airfield_board.errors import FileFaults, UserError
from airfield_board.observations.formats.recognise import recognise
from tests.observations.file_rows import HEADER, read, rules


@pytest.mark.parametrize(
    ("text", "expected"),
    [
        (HEADER, "csv"),
        ("\ufeff" + HEADER, "csv"),
        ("\n\n" + HEADER, "csv"),
        ("temprature_c\n", "csv"),
        ("station,value\n", "csv"),
        ('"time,x\n', "csv"),
        ("{}", "json"),
        ("\ufeff \n[]", "json"),
        ("METAR ZZCM 141753Z 30/10 Q1013", "metar"),
        ("zzcm 141753z 30/10 q1013", "metar"),
        ("METAR ZZCM NIL=", "metar"),
        ("ALTX 141753Z 30/10 Q1013", "metar"),
        ("SAZZ31 ZZCM 141700\nMETAR\nZZCM 141753Z 30/10 Q1013=", "metar"),
    ],
)
def test_the_format_is_known_from_the_content(text: str, expected: str) -> None:
    assert recognise(text.encode(), rules()) == expected


@pytest.mark.parametrize(
    ("content", "message"),
    [
        (b"", "it is empty"),
        (b" \r\n\n", "it is empty"),
        (b"\xef\xbb\xbf", "it is empty"),
        (HEADER.encode("utf-16"), "it is UTF-16 text; expected UTF-8, so save it as UTF-8"),
        (b"\xfe\xff" + HEADER.encode("utf-16-be"), "it is UTF-16 text; expected UTF-8, so save it as UTF-8"),
        (HEADER.encode("utf-16-le"), "it begins with NUL bytes, so it is no plain text"),
        (b"\0" * 100, "it begins with NUL bytes, so it is no plain text"),
        (
            HEADER.encode().replace(b"\n", b"\r") + b"2026-07-14T17:23Z,29.92,20,10\r",
            "its lines end with a carriage return",
        ),
        (b"hello\n", "it is none of the formats known: expected CSV with a header that has a column time, JSON"),
        (b'"hello\n', "it is none of the formats known"),
        (b"\x89PNG\r\n\x1a\n", "it is none of the formats known"),
    ],
)
def test_what_is_no_observation_file_says_so(content: bytes, message: str) -> None:
    with pytest.raises(FileFaults) as caught:
        read(content)
    assert caught.value.faults[0].message.startswith(message)
    assert str(caught.value).startswith("observations.txt:")


@pytest.mark.parametrize("name", ["Nowhere/Noplace", "", "../etc/passwd", "a\0b"])
def test_a_time_zone_that_is_none_is_an_error(name: str) -> None:
    with pytest.raises(UserError, match="there is no time zone"):
        read(HEADER, time_zone=name)


@given(st.binary(max_size=200), st.booleans())
def test_whatever_the_bytes_there_is_a_table_or_a_plain_error(content: bytes, finished: bool) -> None:
    try:
        table = read(content, finished=finished).table
    except FileFaults as error:
        assert error.faults[0].message
    else:
        assert len(table.raw) == len(table) == len(table.faults)


@given(st.binary(max_size=60), st.integers(0, 80), st.booleans())
def test_bytes_thrown_into_a_good_file_never_raise_anything_else(junk: bytes, place: int, finished: bool) -> None:
    good = (HEADER + "2026-07-14T17:23:00Z,29.92,20.0,10.0\n").encode()
    try:
        table = read(good[:place] + junk + good[place:], finished=finished).table
    except FileFaults as error:
        assert error.faults[0].message
    else:
        assert all(fault for fault in table.faults.values())
