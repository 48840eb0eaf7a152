"""What is recorded: kinds, records, and the text in which a record's body is kept.

The text is JSON: sorted keys, no spaces, floats as Python's ``repr`` writes them, so that they read back exactly. An
observation is by far the most frequent record; its text is a list by position, half as long as an object:

``[time, pos, format, verdict, altimeter_hpa, temperature_c, dewpoint_c, da_ft, u_ft, use, raw]``, null where missing,
and where there is more to keep an object behind it. ``read`` is kept only where it is not the record's own time.
"""

import json
from collections.abc import Mapping, Sequence
from dataclasses import dataclass
from datetime import datetime
from enum import StrEnum
from typing import TypeAlias

Json: TypeAlias = "bool | int | float | str | Sequence[Json] | Mapping[str, Json] | None"


class RecordKind(StrEnum):
    """What a record tells."""

    START = "start"
    STOP = "stop"
    CONFIGURATION = "configuration"
    OBSERVATION = "observation"
    CHANGE = "change"
    EPISODE = "episode"
    ACKNOWLEDGEMENT = "acknowledgement"
    ACKNOWLEDGEMENT_WITHDRAWN = "acknowledgement_withdrawn"
    NOTE = "note"
    SETTINGS_ACCEPTED = "settings_accepted"
    MESSAGE = "message"
    CLOCK = "clock"


@dataclass(frozen=True, slots=True, kw_only=True)
class Record:
    """Something to be recorded.

    Attributes
    ----------
    at
        The recorder's time, aware.
    body
        What is told, as JSON would hold it; extra keys are kept.
    """

    kind: RecordKind
    at: datetime
    body: Mapping[str, Json]


@dataclass(frozen=True, slots=True, kw_only=True)
class StoredRecord:
    """A record as the history holds it.

    Attributes
    ----------
    seq
        Its number, from 1, without gaps.
    hash
        SHA-256 over it and the hash of the record before (32 bytes).
    """

    seq: int
    kind: RecordKind
    at: datetime
    body: Mapping[str, Json]
    hash: bytes


def json_text(value: Json) -> str:
    """Return a JSON value as text in the one form that is kept.

    Raises
    ------
    ValueError
        For NaN and infinities: missing is null.
    TypeError
        For what JSON does not know.
    """
    text = json.dumps(value, ensure_ascii=False, allow_nan=False, sort_keys=True, separators=(",", ":"))
    try:
        text.encode()
    except UnicodeEncodeError:
        # Half of a surrogate pair, from bytes that were no text: escaped it can be kept as it is.
        text = json.dumps(value, ensure_ascii=True, allow_nan=False, sort_keys=True, separators=(",", ":"))
    return text


_HEAD_KEYS = ("time", "pos", "format", "verdict")
_VALUE_KEYS = ("altimeter_hpa", "temperature_c", "dewpoint_c")
_TAIL_KEYS = ("da_ft", "u_ft", "use", "raw")
_BY_POSITION = frozenset((*_HEAD_KEYS, *_TAIL_KEYS, "values"))
_KEYS = (*_HEAD_KEYS, *_VALUE_KEYS, *_TAIL_KEYS)
_PLACES = len(_KEYS)


def text_from_body(kind: RecordKind, at_us: int, body: Mapping[str, Json]) -> str:
    """Return the text in which a body is kept.

    Parameters
    ----------
    at_us
        The record's time.

    Raises
    ------
    ValueError, TypeError
        Where the body is no JSON object.
    """
    if kind is not RecordKind.OBSERVATION:
        return json_text(body)
    values = body.get("values") or {}
    if not isinstance(values, Mapping):
        raise TypeError("the values of an observation are an object")
    packed: list[Json] = [body.get(key) for key in _HEAD_KEYS]
    packed += [values.get(key) for key in _VALUE_KEYS]
    packed += [body.get(key) for key in _TAIL_KEYS]
    more: dict[str, Json] = {
        key: value
        for key, value in body.items()
        if key not in _BY_POSITION
        and value is not None
        and value is not False
        and not (key == "read" and value == at_us)
    }
    more_values = {key: value for key, value in values.items() if key not in _VALUE_KEYS and value is not None}
    if more_values:
        more["values"] = more_values
    if more:
        packed.append(more)
    return json_text(packed)


def body_from_text(kind: RecordKind, at_us: int, text: str | bytes) -> dict[str, Json]:
    """Return the body of which `text_from_body` made the text.

    An observation comes back with ``read`` and ``values`` always there, and without keys that were null or false.

    Raises
    ------
    ValueError
        Where the text is not of that form.
    """
    # Given bytes, json would guess at the encoding first, which takes as long as half of the reading.
    found = json.loads(text.decode() if isinstance(text, bytes) else text)
    if kind is not RecordKind.OBSERVATION:
        if not isinstance(found, dict):
            raise ValueError("the record's text is no JSON object")
        return found
    more = found[_PLACES] if isinstance(found, list) and len(found) == _PLACES + 1 else {}
    more_values = more.get("values", {}) if isinstance(more, dict) else None
    if not isinstance(found, list) or len(found) - _PLACES not in {0, 1} or not isinstance(more_values, dict):
        raise ValueError("the record's text is no observation")
    body: dict[str, Json] = {"read": at_us}
    values: dict[str, Json] = {}
    for key, value in zip(_KEYS, found, strict=False):  # what lies behind the list comes below
        if value is not None:
            (values if key in _VALUE_KEYS else body)[key] = value
    body.update(more)
    values.update(more_values)
    body["values"] = values
    return body
