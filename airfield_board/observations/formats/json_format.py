"""JSON: one object, an array of them, or one object a line."""

import json
import re
from codecs import BOM_UTF8
from collections.abc import Mapping

from airfield_board.errors import FileFaults
from airfield_board.observations.formats.keys import KEYS, TIME, faults_of_names, note_on_ignored, row_of, time_of
from airfield_board.observations.formats.reading import (
    ReadingRules,
    ReadResult,
    ReadRow,
    RowCollector,
    Section,
    joined,
    result_of,
)
from airfield_board.observations.observation import NO_TIME_US

_WHITE = re.compile(r"[ \t\r\n]*")


class _Number(str):
    """A number as it was written: JSON's own conversion would hide how."""

    __slots__ = ()


class _Pairs(list[tuple[str, object]]):
    """An object's keys and values, doubled keys and all."""

    __slots__ = ()


_OTHER_VALUES: Mapping[type, str] = {bool: "true or false", _Pairs: "an object", list: "an array"}

_DECODER = json.JSONDecoder(object_pairs_hook=_Pairs, parse_float=_Number, parse_int=_Number, parse_constant=_Number)


class _Objects:
    """Gathers what the objects of a file give."""

    def __init__(self) -> None:
        self.collector = RowCollector()
        self.ignored: dict[str, None] = {}
        self.objects = 0
        self.faults_of_names: list[str] = []
        self._known_names: dict[tuple[str, ...], str] = {}

    def add(self, value: object, start: int, end: int) -> None:
        """Take one value of the file."""
        if not isinstance(value, _Pairs):
            self.add_fault("the value is no JSON object", start, end)
            return
        self.objects += 1
        names = tuple(name for name, _ in value)
        faults = self._known_names.get(names)
        if faults is None:
            # Most files have one set of keys.
            faults = self._known_names[names] = joined(*faults_of_names(names))
            self.ignored.update(dict.fromkeys(name for name in names if name not in KEYS and name != TIME))
        if faults:
            self.faults_of_names.append(faults)
        self.collector.add(_row(value, faults), start, end)

    def add_fault(self, fault: str, start: int, end: int) -> None:
        """Take a stretch of the file that gives no values."""
        self.collector.add(ReadRow(fault=fault), start, end)

    def result(self, section: Section, rules: ReadingRules, *, unfinished: bool) -> ReadResult:
        """Return all that was gathered; an error where no object has usable keys."""
        if self.objects and len(self.faults_of_names) == self.objects:
            raise rules.fault(self.faults_of_names[0])
        return result_of(
            self.collector.columns(),
            section,
            rules,
            file_format="json",
            notes=[f"keys {note}" for note in note_on_ignored(self.ignored)],
            unfinished=unfinished,
        )


def read_json(section: Section, rules: ReadingRules) -> ReadResult:
    """Read a JSON file, or the end of one that has an object a line.

    Raises
    ------
    FileFaults
        Where an array or a lone object is broken or not complete, or every object has keys that cannot be used.
    """
    if is_array(section.head):
        return _read_array(section, rules)
    content = section.content
    first_line = content[len(_mark(content)) :].lstrip().partition(b"\n")[0]
    if not section.start and not isinstance(_value(first_line), _Pairs):
        whole = _value(content[len(_mark(content)) :])
        if isinstance(whole, _Pairs):
            objects = _Objects()
            objects.add(whole, len(_mark(content)), len(content.rstrip()))
            return objects.result(section, rules, unfinished=False)
    return _read_lines(section, rules)


def is_array(head: bytes) -> bool:
    """Whether a JSON file is one array, which can only be read as a whole."""
    return head[len(_mark(head)) :].lstrip()[:1] == b"["


def _mark(content: bytes) -> bytes:
    return BOM_UTF8 if content.startswith(BOM_UTF8) else b""


def _value(content: bytes) -> object:
    """Return the one value that a text is; None (which no file of observations means) where it is broken."""
    try:
        return _DECODER.decode(content.decode("utf-8"))
    except (ValueError, RecursionError):
        return None


def _read_lines(section: Section, rules: ReadingRules) -> ReadResult:
    objects = _Objects()
    unfinished = False
    lines = section.content.split(b"\n")
    end = -1
    for number, line in enumerate(lines, 1):
        start, end = end + 1, end + 1 + len(line)
        if not start and not section.start:
            start = len(_mark(line))
        text = section.content[start:end].rstrip()
        if not text:
            continue
        value = _value(text)
        if isinstance(value, _Pairs):
            objects.add(value, start, start + len(text))
        elif number == len(lines) and not rules.finished:
            unfinished = True
        else:
            objects.add_fault("the line is no complete JSON object", start, start + len(text))
    if not objects.objects and objects.collector.rows and not section.start:
        raise rules.fault(
            "the JSON is broken or not complete; expected one object, an array of objects, or one object a line"
        )
    return objects.result(section, rules, unfinished=unfinished)


def _read_array(section: Section, rules: ReadingRules) -> ReadResult:
    """Read an array value by value, so that each has its own place and text."""
    try:
        text = section.content.decode("utf-8")
    except UnicodeDecodeError as error:
        raise rules.fault("the JSON is not UTF-8 text") from error
    objects = _Objects()
    at = _after_white(text, text.index("[") + 1)
    offset, measured = 0, 0
    closed = text[at : at + 1] == "]"
    while not closed:
        try:
            value, end = _DECODER.raw_decode(text, at)
        except (ValueError, RecursionError) as error:
            raise _broken(text, at, rules) from error
        start_offset = offset + _byte_length(text[measured:at])
        offset, measured = start_offset + _byte_length(text[at:end]), end
        objects.add(value, start_offset, offset)
        at = _after_white(text, end)
        closed = text[at : at + 1] == "]"
        if not closed:
            if text[at : at + 1] != ",":
                raise _broken(text, at, rules)
            at = _after_white(text, at + 1)
    behind = _after_white(text, at + 1)
    if behind != len(text):
        raise _broken(text, behind, rules)
    return objects.result(section, rules, unfinished=False)


def _broken(text: str, at: int, rules: ReadingRules) -> FileFaults:
    line = text.count("\n", 0, at) + 1
    return rules.fault("the JSON array is broken or not complete in this line, or behind it", line)


def _after_white(text: str, at: int) -> int:
    match = _WHITE.match(text, at)
    return match.end() if match else at


def _byte_length(text: str) -> int:
    return len(text) if text.isascii() else len(text.encode())


def _row(pairs: _Pairs, fault_of_names: str) -> ReadRow:
    """Take one object's values; with keys that cannot be used, only its time."""
    values = dict(pairs)
    time = values.get(TIME)
    faults = [fault_of_names] if fault_of_names else []
    if not isinstance(time, str) or isinstance(time, _Number):
        if time is not None:
            faults.append("the time is no text")
        time = None
    if faults:
        time_us, local, unreadable = time_of(time.strip()) if time else (NO_TIME_US, False, "")
        return ReadRow(time_us=time_us, local=local, fault=joined(*faults, unreadable))
    texts = {}
    for name, value in values.items():
        if name in KEYS and value is not None:
            texts[name] = value.strip(" \t") if isinstance(value, str) else _OTHER_VALUES[type(value)]
    return row_of(time.strip() if time else None, texts)
