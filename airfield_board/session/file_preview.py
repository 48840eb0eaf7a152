"""What an observation file would mean to a board, before there is one: read and checked as a board reads and checks."""

from dataclasses import dataclass
from datetime import datetime
from pathlib import Path

import numpy as np
from numpy.typing import NDArray

from airfield_board.clock import time_from_us, us_from_time
from airfield_board.observations.conditions import conditions_of
from airfield_board.observations.formats.reading import Format
from airfield_board.observations.observation import NO_TIME_US, CheckedTable, Verdict
from airfield_board.observations.quality import QualityMemory, QualityRules, check
from airfield_board.observations.source import FileSource, SourceReading, SourceRules
from airfield_board.units import MINUTE_US

_MOST_REASONS = 3


@dataclass(frozen=True, slots=True, kw_only=True)
class PreviewQuestion:
    """What is to be looked at, and how.

    Attributes
    ----------
    time_zone
        Of times without an offset; a valid name.
    station
        METAR station whose reports are kept; empty: none named.
    elevation_m
        Of the field; None while it is not known.
    """

    file: Path
    time_zone: str
    station: str
    elevation_m: float | None


@dataclass(frozen=True, slots=True, kw_only=True)
class NewestRow:
    """The newest row that a board would use.

    Attributes
    ----------
    density_altitude_ft
        None while the field's elevation is not known.
    """

    time: datetime
    altimeter_hpa: float
    temperature_c: float
    dewpoint_c: float | None
    density_altitude_ft: float | None


@dataclass(frozen=True, slots=True, kw_only=True)
class FilePreview:
    """What one look at the file gave.

    Attributes
    ----------
    file
        The path that was looked at.
    format
        None where the file could not be read.
    rows
        How many were read.
    since
        Time of the earliest of them; older ones may stand before it in the file. None where none has a time.
    newest
        None where no row can be used.
    every_min
        Usual time from one row to the next, the median [min]; None with fewer than three rows.
    unused_count, unused
        How many rows would not be used; time and reason of the newest of them.
    messages, notes
        What is wrong or worth knowing, each a plain sentence; what would be noted of the file once.
    """

    file: Path
    format: Format | None = None
    rows: int = 0
    since: datetime | None = None
    newest: NewestRow | None = None
    every_min: float | None = None
    unused_count: int = 0
    unused: tuple[tuple[datetime | None, str], ...] = ()
    messages: tuple[str, ...] = ()
    notes: tuple[str, ...] = ()


class FilePreviewer:
    """Looks at observation files again and again; one that is asked about again is not read anew where it stands still.

    Belongs to one thread.
    """

    def __init__(self) -> None:
        self._asked: tuple[Path, str, str] | None = None
        self._source: FileSource | None = None

    def look(self, question: PreviewQuestion, now: datetime) -> FilePreview:
        """Look at a file; at most a moment, whatever its disk does.

        Parameters
        ----------
        now
            Aware.
        """
        asked = (question.file, question.time_zone, question.station)
        if self._source is None or asked != self._asked:
            self._asked = asked
            self._source = FileSource(
                question.file, SourceRules(time_zone=question.time_zone, station=question.station)
            )
        return preview_of(self._source.read(now), question, now)


def preview_of(reading: SourceReading, question: PreviewQuestion, now: datetime) -> FilePreview:
    """Return what a reading of the file would mean to a board."""
    table = reading.table
    if table is None:
        return FilePreview(file=question.file, messages=reading.messages, notes=reading.notes)
    elevation_m = np.nan if question.elevation_m is None else question.elevation_m
    rules = QualityRules(elevation_m=elevation_m, humidity="auto")
    checked, _ = check(table, QualityMemory(), rules, us_from_time(now))
    valid = np.flatnonzero(checked.verdict == Verdict.VALID)
    unused = np.flatnonzero((checked.verdict == Verdict.REJECTED) | (checked.verdict == Verdict.SUSPECT))
    return FilePreview(
        file=question.file,
        format=reading.format,
        rows=len(table),
        since=_earliest(checked.rows.time_us),
        newest=_newest(checked, int(valid[-1]), question.elevation_m) if len(valid) else None,
        every_min=_usual_interval_min(checked.rows.time_us),
        unused_count=len(unused),
        unused=tuple(
            (_time(int(checked.rows.time_us[row])), checked.reason.get(int(row), "it does not pass the checks"))
            for row in unused[::-1][:_MOST_REASONS]
        ),
        messages=reading.messages,
        notes=reading.notes,
    )


def _newest(checked: CheckedTable, row: int, elevation_m: float | None) -> NewestRow:
    rows, one = checked.rows, slice(row, row + 1)
    density_altitude_ft = None
    if elevation_m is not None:
        air = conditions_of(
            rows.altimeter_hpa[one],
            rows.temperature_c[one],
            checked.dewpoint_used_c[one],
            rows.temperature_resolution_c[one],
            rows.dewpoint_resolution_c[one],
            elevation_m,
            None,
        )
        value_ft = float(air.density_altitude_ft[0])
        density_altitude_ft = value_ft if np.isfinite(value_ft) else None
    dewpoint_c = float(rows.dewpoint_c[row])
    return NewestRow(
        time=time_from_us(int(rows.time_us[row])),
        altimeter_hpa=float(rows.altimeter_hpa[row]),
        temperature_c=float(rows.temperature_c[row]),
        dewpoint_c=dewpoint_c if np.isfinite(dewpoint_c) else None,
        density_altitude_ft=density_altitude_ft,
    )


def _earliest(time_us: NDArray[np.int64]) -> datetime | None:
    times_us = time_us[time_us != NO_TIME_US]
    return time_from_us(int(times_us[0])) if len(times_us) else None


def _usual_interval_min(time_us: NDArray[np.int64]) -> float | None:
    times_us = np.unique(time_us[time_us != NO_TIME_US])
    if len(times_us) < 3:
        return None
    return float(np.median(np.diff(times_us))) / MINUTE_US


def _time(time_us: int) -> datetime | None:
    return None if time_us == NO_TIME_US else time_from_us(time_us)
