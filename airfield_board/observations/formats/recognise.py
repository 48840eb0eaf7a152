"""Which format a file is in, and reading it."""

import csv
from codecs import BOM_UTF8, BOM_UTF16_BE, BOM_UTF16_LE
from collections.abc import Callable, Mapping

from airfield_board.observations.formats.csv_format import read_csv
from airfield_board.observations.formats.json_format import read_json
from airfield_board.observations.formats.keys import KEYS, TIME, misspelt
from airfield_board.observations.formats.metar_format import looks_like_metar, read_metar
from airfield_board.observations.formats.reading import Format, ReadingRules, ReadResult, Section, split_csv

READERS: Mapping[Format, Callable[[Section, ReadingRules], ReadResult]] = {
    "csv": read_csv,
    "json": read_json,
    "metar": read_metar,
}
"""A new format: its module, its line here, and what it is recognised by in `recognise`."""

HEAD_BYTES = 65_536
"""How much of the beginning of a file tells its format."""

_UTF_16_MARKS = (BOM_UTF16_LE, BOM_UTF16_BE)
_FIRST_SIGNS = 4
_SEPARATORS = ",;\t"


def read_table(content: bytes, rules: ReadingRules) -> ReadResult:
    """Read a whole file of observations.

    A row that cannot be used never raises: it is a row of the table, and `ObservationTable.faults` says why.

    Parameters
    ----------
    content
        All the bytes of the file.
    rules
        What the file itself does not say.

    Raises
    ------
    FileFaults
        Where the file as a whole cannot be used, in plain words.
    """
    return read_section(Section(content=content, start=0, head=content), rules)


def read_section(section: Section, rules: ReadingRules) -> ReadResult:
    """Read a file of observations, or the end of one.

    Raises
    ------
    FileFaults
        Where the file as a whole cannot be used, in plain words.
    """
    return READERS[recognise(section.head, rules)](section, rules)


def recognise(head: bytes, rules: ReadingRules) -> Format:
    """Tell the format from the beginning of a file.

    Raises
    ------
    FileFaults
        Where it is none of the formats.
    """
    head = head[:HEAD_BYTES]
    if head.startswith(_UTF_16_MARKS):
        raise rules.fault("it is UTF-16 text; expected UTF-8, so save it as UTF-8")
    text = head.removeprefix(BOM_UTF8).lstrip()
    if not text:
        raise rules.fault("it is empty")
    first_line = text.partition(b"\n")[0].rstrip()
    if b"\0" in text[:_FIRST_SIGNS]:
        raise rules.fault("it begins with NUL bytes, so it is no plain text (or UTF-16); expected UTF-8 text")
    if b"\r" in first_line:
        raise rules.fault("its lines end with a carriage return alone; expected LF or CR LF line ends")
    if text[:1] in (b"{", b"["):
        return "json"
    line = first_line.decode("utf-8", "replace")
    if looks_like_metar(first_line):
        return "metar"
    if _is_header(line):
        return "csv"
    if looks_like_metar(text):
        return "metar"
    if any(sign in line for sign in _SEPARATORS):
        return "csv"
    raise rules.fault(
        "it is none of the formats known: expected CSV with a header that has a column time, JSON objects, "
        "or METAR reports",
        1,
    )


def _is_header(line: str) -> bool:
    """Whether a line names at least one column that belongs in a header."""
    try:
        names = [name.strip() for name in split_csv(line)]
    except csv.Error:
        return False
    return any(name == TIME or name in KEYS or misspelt(name) for name in names)
