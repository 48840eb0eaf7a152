"""CSV with a header."""

import csv
from dataclasses import dataclass, fields

import numpy as np
from numpy.typing import NDArray

from airfield_board.errors import shown
from airfield_board.observations.formats.csv_columns import (
    PADDING,
    CsvLayout,
    OrdinaryRows,
    line_ends,
    read_ordinary,
    without_returns,
)
from airfield_board.observations.formats.keys import (
    KEYS,
    NEEDED,
    QUANTITIES,
    TIME,
    WORDS,
    Quantity,
    faults_of_names,
    names_of,
    note_on_ignored,
    row_of,
    time_of,
)
from airfield_board.observations.formats.reading import (
    Columns,
    ReadingRules,
    ReadResult,
    ReadRow,
    Section,
    joined,
    result_of,
    split_csv,
)
from airfield_board.observations.observation import NO_TIME_US

_BLANK = b" \t\r"


@dataclass(frozen=True, slots=True, kw_only=True)
class CsvHeader:
    """A usable header.

    Attributes
    ----------
    names
        All the column names, in order.
    layout
        Where the known ones are.
    notes
        Which are ignored.
    text_end
        Offset in the file of the byte behind the header's line.
    line
        The header's line, without its end.
    """

    names: tuple[str, ...]
    layout: CsvLayout
    notes: tuple[str, ...]
    text_end: int
    line: bytes


def read_csv(section: Section, rules: ReadingRules) -> ReadResult:
    """Read a CSV file, or the end of one.

    Raises
    ------
    FileFaults
        Where the header is not usable, or another header follows in the middle.
    """
    header = read_header(section.head, rules)
    first = max(header.text_end - section.start, 0)
    content = section.content
    last = len(content)
    unfinished = False
    if not rules.finished:
        last = max(content.rfind(b"\n") + 1, first)
        unfinished = bool(content[last:].strip())
    start, end, text = _lines(content, first, last)
    ordinary = read_ordinary(text, start, end, header.layout)
    columns = _careful(_columns(ordinary, start, end, header), content, header, ordinary, section, rules)
    return result_of(
        columns,
        section,
        rules,
        file_format="csv",
        notes=header.notes,
        header=header.names,
        unfinished=unfinished,
    )


def read_header(head: bytes, rules: ReadingRules) -> CsvHeader:
    """Read the header, which is the first line that is not empty.

    Raises
    ------
    FileFaults
        Where a column is missing, doubled, misspelt or given in two units, or the line is not complete yet.
    """
    at = 0
    number = 0
    while True:
        number += 1
        stop = head.find(b"\n", at)
        line = head[at : stop if stop >= 0 else len(head)].rstrip(_BLANK)
        if line.strip(_BLANK) or stop < 0:
            break
        at = stop + 1
    if stop < 0 and not rules.finished:
        raise rules.fault("the header, its first line, is not complete yet", number)
    try:
        names = tuple(name.strip() for name in split_csv(line.decode("utf-8-sig", "replace")))
    except csv.Error as error:
        raise rules.fault("the header has quotes that do not match", number) from error
    faults = _faults_of_header(names)
    if faults:
        raise rules.fault("; ".join(faults), number)
    places: dict[Quantity, int] = {KEYS[name].quantity: place for place, name in enumerate(names) if name in KEYS}
    return CsvHeader(
        names=names,
        layout=CsvLayout(
            width=len(names),
            time=names.index(TIME),
            needed=tuple(places[quantity] for quantity in NEEDED),
            optional=tuple(
                places[quantity] for quantity in QUANTITIES if quantity in places and quantity not in NEEDED
            ),
        ),
        notes=tuple(f"columns {note}" for note in note_on_ignored(names)),
        text_end=stop + 1 if stop >= 0 else len(head),
        line=line,
    )


def _faults_of_header(names: tuple[str, ...]) -> list[str]:
    faults = faults_of_names(names)
    given = {KEYS[name].quantity for name in names if name in KEYS}
    if TIME not in names:
        faults.append("the header has no column time")
    faults += [
        f"the header has no column for the {WORDS[quantity]}: expected {names_of(quantity)}"
        for quantity in NEEDED
        if quantity not in given
    ]
    if faults and len(names) == 1 and (";" in names[0] or "\t" in names[0]):
        return ["the columns are not separated by commas; expected a header like time,altimeter_inhg,temperature_c"]
    return faults


def _lines(content: bytes, first: int, last: int) -> tuple[NDArray[np.int64], NDArray[np.int64], NDArray[np.uint8]]:
    """Return where the lines that are not empty begin and end, and the bytes with padding behind them."""
    text = np.empty(last + PADDING, np.uint8)
    text[:last] = np.frombuffer(content, np.uint8, last)
    text[last:] = ord("\n")
    ends = line_ends(text[first:last]) + first
    if last > first and text[last - 1] != ord("\n"):
        ends = np.append(ends, last)
    start = np.empty_like(ends)
    start[:1] = first
    start[1:] = ends[:-1] + 1
    if b"\r" in content:
        ends = without_returns(text, start, ends)
    filled = ends > start
    return start[filled], ends[filled], text


def _columns(rows: OrdinaryRows, start: NDArray[np.int64], end: NDArray[np.int64], header: CsvHeader) -> Columns:
    """Return the ordinary rows in the table's units."""
    nothing = np.full(len(start), np.nan)
    values = dict.fromkeys(QUANTITIES, nothing)
    for place, value in rows.values.items():
        key = KEYS[header.names[place]]
        values[key.quantity] = key.convert(value)
    return Columns(
        time_us=rows.time_us,
        local=rows.local,
        altimeter_hpa=values["altimeter"],
        temperature_c=values["temperature"],
        dewpoint_c=values["dewpoint"].copy(),
        elevation_m=values["elevation"].copy(),
        temperature_resolution_c=nothing,
        dewpoint_resolution_c=nothing,
        start=start,
        end=end,
        faults={},
    )


def _careful(
    columns: Columns,
    content: bytes,
    header: CsvHeader,
    ordinary: OrdinaryRows,
    section: Section,
    rules: ReadingRules,
) -> Columns:
    """Read one by one the rows that are not of the ordinary kind, and drop the blank ones."""
    kept = np.ones(len(columns.start), np.bool_)
    for row in np.flatnonzero(~ordinary.taken).tolist():
        line = content[columns.start[row] : columns.end[row]]
        if not line.strip(_BLANK):
            kept[row] = False
            continue
        read = read_line(line, header)
        if read is None:
            number = content.count(b"\n", 0, int(columns.start[row])) + 1 if not section.start else 0
            raise rules.fault(
                f"another header stands in the middle of the file: {shown(line.decode('utf-8', 'replace'))}", number
            )
        columns.time_us[row] = read.time_us
        columns.local[row] = read.local
        columns.altimeter_hpa[row] = read.altimeter_hpa
        columns.temperature_c[row] = read.temperature_c
        columns.dewpoint_c[row] = read.dewpoint_c
        columns.elevation_m[row] = read.elevation_m
        if read.fault:
            columns.faults[row] = read.fault
    if kept.all():
        return columns
    place = np.cumsum(kept) - 1
    arrays = {part.name: getattr(columns, part.name)[kept] for part in fields(Columns) if part.name != "faults"}
    return Columns(**arrays, faults={int(place[row]): fault for row, fault in columns.faults.items()})


def read_line(line: bytes, header: CsvHeader) -> ReadRow | None:
    """Read one line that is not blank, without its end; None where it is a header other than the file's."""
    text = line.decode("utf-8", "replace")
    if "\0" in text:
        return ReadRow(fault="the row contains NUL bytes")
    if "\r" in text:
        return ReadRow(fault="a carriage return stands in the middle of the row")
    try:
        items = [item.strip(" \t") for item in split_csv(text)]
    except csv.Error:
        return ReadRow(fault="quotes do not match, or a field is too long")
    if TIME in items and not KEYS.keys().isdisjoint(items):
        return ReadRow(fault="the header again") if tuple(items) == header.names else None
    layout = header.layout
    if len(items) != layout.width:
        amount = "many" if len(items) > layout.width else "few"
        fault = f"too {amount} fields: {len(items)}, where the header has {layout.width}"
        # What stands before a missing or surplus field is sure of its column only at the beginning of the row.
        time_us, local, unreadable = time_of(items[0]) if layout.time == 0 else (NO_TIME_US, False, "")
        return ReadRow(time_us=time_us, local=local, fault=joined(fault, unreadable))
    texts = {header.names[place]: items[place] for place in (*layout.needed, *layout.optional)}
    return row_of(items[layout.time], texts)
