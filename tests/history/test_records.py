"""The text a body is kept in: exact, short, and read back as it was."""

import json
import math

import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from airfield_board.history.records import Json, Record, RecordKind, body_from_text, json_text, text_from_body
from tests.history.examples import observation, one_of_each

AT_US = 1_784_203_203_000_000


def through(kind: RecordKind, body: dict[str, Json], at_us: int = AT_US) -> dict[str, Json]:
    return body_from_text(kind, at_us, text_from_body(kind, at_us, body))


def test_an_observation_is_kept_as_a_list_by_position() -> None:
    text = text_from_body(
        RecordKind.OBSERVATION,
        AT_US,
        {
            "time": 5,
            "read": AT_US,
            "raw": "a,b",
            "pos": 7,
            "format": "csv",
            "values": {"altimeter_hpa": 1013.25, "temperature_c": -0.5},
            "verdict": "valid",
            "use": 3,
            "da_ft": 10.0,
            "u_ft": 2.5,
            "late": True,
        },
    )
    assert text == '[5,7,"csv","valid",1013.25,-0.5,null,10.0,2.5,3,"a,b",{"late":true}]'


def test_a_plain_observation_has_nothing_behind_the_list() -> None:
    entry = observation(0)
    at_us = entry.body["read"]
    assert isinstance(at_us, int)
    assert len(json.loads(text_from_body(RecordKind.OBSERVATION, at_us, entry.body))) == 11
    assert through(RecordKind.OBSERVATION, dict(entry.body), at_us) == entry.body


def test_all_keys_of_an_observation_come_back() -> None:
    body: dict[str, Json] = {
        "time": 1,
        "read": 2,
        "raw": "METAR ZZCM 161155Z ...",
        "pos": 3,
        "format": "metar",
        "initials": "QX",
        "values": {
            "altimeter_hpa": 1013.25,
            "temperature_c": 31.0,
            "dewpoint_c": 4.0,
            "elevation_m": 1255.776,
            "temperature_resolution_c": 1.0,
            "dewpoint_resolution_c": 1.0,
        },
        "fault": "no",
        "verdict": "suspect",
        "late": True,
        "reason": "a step",
        "restart": True,
        "dewpoint_used_c": 3.0,
        "use": 1,
        "da_ft": 6821.634958203123,
        "u_ft": 58.0,
        "something_new": {"nested": [1, 2.5, None]},
    }
    assert through(RecordKind.OBSERVATION, body) == body


def test_nothing_missing_takes_room_and_nothing_missing_comes_back() -> None:
    body: dict[str, Json] = {
        "time": None,
        "raw": "x",
        "verdict": "rejected",
        "late": False,
        "values": {"dewpoint_c": None},
    }
    assert through(RecordKind.OBSERVATION, body) == {"read": AT_US, "raw": "x", "verdict": "rejected", "values": {}}


def test_zero_is_not_missing() -> None:
    body: dict[str, Json] = {"time": 0, "read": 0, "raw": "", "verdict": "valid", "use": 0, "da_ft": 0.0, "values": {}}
    assert through(RecordKind.OBSERVATION, body) == body


def test_other_kinds_are_objects_with_sorted_keys() -> None:
    assert text_from_body(RecordKind.NOTE, AT_US, {"text": "é\n", "about": "day"}) == '{"about":"day","text":"é\\n"}'


@pytest.mark.parametrize("entry", one_of_each(), ids=lambda entry: str(entry.kind))
def test_text_is_the_same_however_often_it_is_made(entry: Record) -> None:
    once = text_from_body(entry.kind, AT_US, entry.body)
    assert text_from_body(entry.kind, AT_US, body_from_text(entry.kind, AT_US, once)) == once


def test_a_line_that_was_no_text_is_kept_all_the_same() -> None:
    raw = b"2026-07-16T12:00Z,\xff30.01".decode(errors="surrogateescape")
    text = text_from_body(RecordKind.OBSERVATION, AT_US, {"raw": raw})
    assert text.encode()
    assert body_from_text(RecordKind.OBSERVATION, AT_US, text)["raw"] == raw


@pytest.mark.parametrize("value", [math.nan, math.inf, -math.inf])
def test_missing_is_never_not_a_number(value: float) -> None:
    with pytest.raises(ValueError, match="JSON"):
        json_text({"da_ft": value})


def test_what_json_does_not_know_is_refused() -> None:
    with pytest.raises(TypeError):
        json_text({"x": object()})  # type: ignore[dict-item]  # the point of the test
    with pytest.raises(TypeError, match="values"):
        text_from_body(RecordKind.OBSERVATION, AT_US, {"values": 3})


@pytest.mark.parametrize(
    ("kind", "text"),
    [
        (RecordKind.NOTE, "[1]"),
        (RecordKind.NOTE, "{"),
        (RecordKind.OBSERVATION, '{"raw":"x"}'),
        (RecordKind.OBSERVATION, "[1,2,3]"),
        (RecordKind.OBSERVATION, "[1,1,1,1,1,1,1,1,1,1,1,[]]"),
        (RecordKind.OBSERVATION, '[1,1,1,1,1,1,1,1,1,1,1,{"values":1}]'),
        (RecordKind.OBSERVATION, "[1,1,1,1,1,1,1,1,1,1,1,{},{}]"),
    ],
)
def test_text_of_another_form_is_refused(kind: RecordKind, text: str) -> None:
    with pytest.raises(ValueError, match=r"JSON object|no observation|Expecting"):
        body_from_text(kind, AT_US, text)


json_values = st.recursive(
    st.none()
    | st.booleans()
    | st.integers(-(2**60), 2**60)
    | st.floats(allow_nan=False, allow_infinity=False)
    | st.text(),
    lambda inner: st.lists(inner, max_size=3) | st.dictionaries(st.text(), inner, max_size=3),
    max_leaves=8,
)


@settings(max_examples=60, deadline=None)
@given(st.dictionaries(st.text(), json_values, max_size=5))
def test_any_body_reads_back_exactly(body: dict[str, Json]) -> None:
    assert through(RecordKind.MESSAGE, body) == body


@settings(max_examples=60, deadline=None)
@given(
    st.fixed_dictionaries(
        {"raw": st.text(), "verdict": st.just("valid"), "read": st.integers(0, 2**60)},
        optional={
            "da_ft": st.floats(allow_nan=False, allow_infinity=False),
            "time": st.integers(-(2**60), 2**60),
            "late": st.just(True),
            "extra": st.text(),
        },
    ),
    st.dictionaries(
        st.sampled_from(["altimeter_hpa", "temperature_c", "elevation_m"]),
        st.floats(allow_nan=False, allow_infinity=False),
    ),
)
def test_any_observation_reads_back_exactly(body: dict[str, Json], values: dict[str, Json]) -> None:
    whole: dict[str, Json] = {**body, "values": values}
    assert through(RecordKind.OBSERVATION, whole) == whole
