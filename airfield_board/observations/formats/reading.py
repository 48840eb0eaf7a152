"""What every format is given and gives back, and how rows become a table."""

import csv
from collections.abc import Iterator, Mapping, Sequence
from dataclasses import dataclass, field
from datetime import datetime
from typing import Literal, NamedTuple
from zoneinfo import ZoneInfo, ZoneInfoNotFoundError

import numpy as np
from numpy.typing import NDArray

from airfield_board.errors import Fault, FileFaults, UserError, shown
from airfield_board.observations.formats.local_time import utc_from_local
from airfield_board.observations.observation import NO_TIME_US, ObservationTable

Format = Literal["csv", "json", "metar"]


@dataclass(frozen=True, slots=True, kw_only=True)
class ReadingRules:
    """What a reader must know that the file itself does not say.

    Attributes
    ----------
    time_zone
        IANA name of the zone of times without an offset.
    file_time
        When the file was last written, aware; the month of METAR reports comes from it.
    finished
        True: nobody writes the file any more, so a last row without a line end is taken. False: it is left.
    station
        METAR station whose reports are kept; empty: the file must hold one station only.
    name
        The file's name as the user would type it, for messages.
    """

    time_zone: str
    file_time: datetime
    finished: bool
    station: str = ""
    name: str = "the observation file"

    def zone(self) -> ZoneInfo:
        """Return the zone of times without an offset.

        Raises
        ------
        UserError
            Where there is no zone of that name.
        """
        try:
            return ZoneInfo(self.time_zone)
        except (ZoneInfoNotFoundError, ValueError, OSError) as error:
            raise UserError(f"there is no time zone {shown(self.time_zone)}; expected an IANA name") from error

    def fault(self, message: str, line: int = 0) -> FileFaults:
        """Return the error that says what makes the file as a whole unusable."""
        return FileFaults([Fault(file=self.name, line=line, message=message)])


@dataclass(frozen=True, slots=True, kw_only=True)
class Section:
    """A stretch of a file's bytes.

    Attributes
    ----------
    content
        The bytes.
    start
        Offset of the first of them in the file; above 0 where only the end of a file was read. It is then the
        first byte of a line.
    head
        The beginning of the file (its first line at least); the same as ``content`` where all was read.
    """

    content: bytes
    start: int
    head: bytes


class ReadRow(NamedTuple):
    """One row as the careful readers give it; NaN where there is no value, ``fault`` empty where nothing is wrong."""

    time_us: int = NO_TIME_US
    local: bool = False
    altimeter_hpa: float = np.nan
    temperature_c: float = np.nan
    dewpoint_c: float = np.nan
    elevation_m: float = np.nan
    temperature_resolution_c: float = np.nan
    dewpoint_resolution_c: float = np.nan
    fault: str = ""


@dataclass(frozen=True, slots=True, kw_only=True)
class Columns:
    """Rows of a file while they are read, one array a quantity; all of shape (n,).

    Attributes
    ----------
    time_us
        UTC microseconds since 1970, or, where ``local``, microseconds of the wall clock; `NO_TIME_US` where unreadable.
    local
        True where the time has no offset.
    start, end
        The row's bytes in the section read.
    faults
        By row index.
    """

    time_us: NDArray[np.int64]
    local: NDArray[np.bool_]
    altimeter_hpa: NDArray[np.float64]
    temperature_c: NDArray[np.float64]
    dewpoint_c: NDArray[np.float64]
    elevation_m: NDArray[np.float64]
    temperature_resolution_c: NDArray[np.float64]
    dewpoint_resolution_c: NDArray[np.float64]
    start: NDArray[np.int64]
    end: NDArray[np.int64]
    faults: dict[int, str]


@dataclass(frozen=True, slots=True, kw_only=True)
class ReadResult:
    """A file, or the end of one, as read.

    Attributes
    ----------
    table
        The rows; ``position`` is the byte offset of the row in the file.
    format
        What the content was recognised as.
    notes
        What is worth a line in the log, once a file: columns ignored, stations passed over.
    header
        A CSV's own column names, in order; empty for other formats.
    unfinished
        True where a last row was left because it was not complete.
    begins_doubled
        True where the first time read is a local time that the clock change makes double, so that only what stands
        before in the file could tell which of the two it is.
    section
        What was read.
    """

    table: ObservationTable
    format: Format
    notes: tuple[str, ...]
    header: tuple[str, ...]
    unfinished: bool
    begins_doubled: bool
    section: Section

    def fields(self, row: int) -> tuple[str, ...]:
        """Return a CSV row's own fields as they stood in the file, without quotes.

        As many as the row has, which may differ from the header where the row is faulty; a row whose quotes do not
        match is one field.
        """
        text = self.table.raw[row]
        if '"' not in text:
            return tuple(text.split(","))
        try:
            return tuple(split_csv(text))
        except csv.Error:
            return (text,)


class RawRows(Sequence[str]):
    """The rows' own text, cut out of the file's bytes only when asked for.

    Parameters
    ----------
    content
        The bytes read.
    start, end
        Where each row begins and ends in them, shape (n,).
    """

    def __init__(self, content: bytes, start: NDArray[np.int64], end: NDArray[np.int64]) -> None:
        self._content = content
        self._start = start
        self._end = end

    def __len__(self) -> int:
        return len(self._start)

    def __getitem__(self, index: int) -> str:  # type: ignore[override]
        return self._content[self._start[index] : self._end[index]].decode("utf-8", "replace")


@dataclass(slots=True, kw_only=True)
class RowCollector:
    """Gathers rows one by one, for the formats that are read so."""

    rows: list[ReadRow] = field(default_factory=list)
    start: list[int] = field(default_factory=list)
    end: list[int] = field(default_factory=list)

    def add(self, row: ReadRow, start: int, end: int) -> None:
        """Take a row that lies at ``start`` to ``end`` in the section read."""
        self.rows.append(row)
        self.start.append(start)
        self.end.append(end)

    def columns(self) -> Columns:
        """Return all rows as arrays."""
        columns: Iterator[tuple[object, ...]] = iter(zip(*self.rows, strict=True)) if self.rows else iter(((),) * 9)
        return Columns(
            time_us=np.array(next(columns), np.int64),
            local=np.array(next(columns), np.bool_),
            altimeter_hpa=np.array(next(columns), np.float64),
            temperature_c=np.array(next(columns), np.float64),
            dewpoint_c=np.array(next(columns), np.float64),
            elevation_m=np.array(next(columns), np.float64),
            temperature_resolution_c=np.array(next(columns), np.float64),
            dewpoint_resolution_c=np.array(next(columns), np.float64),
            start=np.array(self.start, np.int64),
            end=np.array(self.end, np.int64),
            faults={index: row.fault for index, row in enumerate(self.rows) if row.fault},
        )


def result_of(
    columns: Columns,
    section: Section,
    rules: ReadingRules,
    *,
    file_format: Format,
    notes: Sequence[str] = (),
    header: Sequence[str] = (),
    unfinished: bool = False,
) -> ReadResult:
    """Turn local times into UTC and rows into a table."""
    local = utc_from_local(columns.time_us, columns.local, rules.zone())
    faults = columns.faults
    for row in np.flatnonzero(local.skipped):
        text = "the clock change skips this local time: no clock ever showed it"
        faults[int(row)] = joined(faults.get(int(row), ""), text)
    table = ObservationTable(
        time_us=local.time_us,
        altimeter_hpa=columns.altimeter_hpa,
        temperature_c=columns.temperature_c,
        dewpoint_c=columns.dewpoint_c,
        elevation_m=columns.elevation_m,
        temperature_resolution_c=columns.temperature_resolution_c,
        dewpoint_resolution_c=columns.dewpoint_resolution_c,
        position=columns.start + section.start,
        raw=RawRows(section.content, columns.start, columns.end),
        faults=ordered(faults),
    )
    return ReadResult(
        table=table,
        format=file_format,
        notes=tuple(notes),
        header=tuple(header),
        unfinished=unfinished,
        begins_doubled=local.begins_doubled,
        section=section,
    )


def ordered(faults: Mapping[int, str]) -> dict[int, str]:
    """Return faults in the order of the rows."""
    return {row: faults[row] for row in sorted(faults)}


def joined(*faults: str) -> str:
    """Join what is wrong with one row into one sentence."""
    return "; ".join(fault for fault in faults if fault)


def split_csv(text: str) -> list[str]:
    """Split one line of CSV into fields.

    Raises
    ------
    csv.Error
        Where quotes do not match on the line.
    """
    return next(csv.reader([text], strict=True, skipinitialspace=True))
