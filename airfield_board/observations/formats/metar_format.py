"""METAR and SPECI reports (WMO FM 15): the four groups that a density altitude needs, and nothing else.

References
----------
WMO-No. 306, Manual on Codes, volume I.1, FM 15 and FM 16 (report head, temperature and dew point, pressure, trend);
FMH-1, Surface Weather Observations and Reports, chapter 12 (altimeter setting in inches, T group of the remarks).
"""

import re
from codecs import BOM_UTF8
from collections.abc import Iterator, Sequence
from dataclasses import dataclass
from datetime import UTC, date, datetime, timedelta
from itertools import pairwise

import numpy as np

from airfield_board.clock import time_from_us, us_from_time
from airfield_board.errors import shown
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
from airfield_board.units import DAY_US, EQUAL, hpa_from_inhg

AHEAD_OF_FILE = timedelta(hours=1)
"""A report may bear a time this much later than its file's and is still of this month: clocks differ, and reports are
stamped with the hour they are issued for."""

_MOST_APART_HPA = 1.5
_WHOLE_DEGREE_C = 1.0
_MONTH_APART_US = 15 * DAY_US

_HEAD = re.compile(r"\s*(?:(?:METAR|SPECI)\s+)?(?:COR\s+)?([A-Z][A-Z0-9]{3})\s+([0-9]{6}Z)(?![^\s])")
_NAMED_HEAD = re.compile(r"\s*(?:METAR|SPECI)\s+(?:COR\s+)?([A-Z][A-Z0-9]{3})(?![^\s])")
_BULLETIN_LINE = re.compile(r"\s*(?:METAR|SPECI|[A-Z]{4}[0-9]{2}\s+[A-Z]{4}\s+[0-9]{6}(?:\s+[A-Z]{3})?)\s*")
_END_OF_PIECE = re.compile(rb"[=\n]")

_TEMPERATURE = re.compile(r"(M?[0-9]{2}|//)/(M?[0-9]{2}|//)?")
_INCHES = re.compile(r"A([0-9]{4})")
_HECTOPASCALS = re.compile(r"Q([0-9]{4})")
_TENTHS = re.compile(r"T([01])([0-9]{3})(?:([01])([0-9]{3}))?")
_TREND = frozenset({"TEMPO", "BECMG", "INTER", "NOSIG"})


@dataclass(frozen=True, slots=True, kw_only=True)
class Report:
    """One report.

    Attributes
    ----------
    station
        Upper case; empty where the text is no report.
    day_time
        Day, hour and minute; None where there are none.
    row
        The values; its time is not settled yet.
    """

    station: str
    day_time: tuple[int, int, int] | None
    row: ReadRow


@dataclass(frozen=True, slots=True, kw_only=True)
class _Piece:
    """A stretch of text up to a line end or an equals sign."""

    text: str
    start: int
    end: int
    ended: bool


def looks_like_metar(head: bytes) -> bool:
    """Whether a text has a line that begins like a report."""
    text = head.decode("utf-8-sig", "replace").upper()
    return any(_HEAD.match(line) or _NAMED_HEAD.match(line) for line in text.split("\n"))


def read_metar(section: Section, rules: ReadingRules) -> ReadResult:
    """Read a file of reports, or the end of one.

    Raises
    ------
    FileFaults
        Where there are reports of several stations and the rules name none.
    """
    pieces, unfinished = _reports(section, rules)
    reports = [read_report(" ".join(piece.text for piece in group)) for group in pieces]
    wanted = rules.station.upper()
    stations = sorted({report.station for report in reports if report.station})
    if not wanted and len(stations) > 1:
        raise rules.fault(
            f"it has reports of several stations, {', '.join(stations)}: the profile must name one, as station"
        )
    times_us = times_of([report.day_time for report in reports], rules.file_time)
    collector = RowCollector()
    passed_over: dict[str, int] = {}
    for group, report, time_us in zip(pieces, reports, times_us, strict=True):
        if wanted and report.station not in ("", wanted):
            passed_over[report.station] = passed_over.get(report.station, 0) + 1
            continue
        collector.add(report.row._replace(time_us=time_us), group[0].start, group[-1].end)
    notes = (
        [f"reports of other stations than {wanted} passed over: {', '.join(sorted(passed_over))}"]
        if passed_over
        else []
    )
    if wanted and stations and wanted not in stations:
        notes.append(f"no report of {wanted} is in the file")
    return result_of(collector.columns(), section, rules, file_format="metar", notes=notes, unfinished=unfinished)


def _pieces(section: Section) -> Iterator[_Piece]:
    """Cut a text at line ends and equals signs; the last piece, which may be empty, has neither."""
    content = section.content
    at = len(BOM_UTF8) if not section.start and content.startswith(BOM_UTF8) else 0
    for mark in _END_OF_PIECE.finditer(content, at):
        yield _piece(content, at, mark.start(), ended=mark[0] == b"=")
        at = mark.end()
    yield _piece(content, at, len(content), ended=False)


def _piece(content: bytes, start: int, end: int, *, ended: bool) -> _Piece:
    found = content[start:end]
    bare = found.strip()
    start += found.find(bare)
    return _Piece(text=bare.decode("utf-8", "replace").upper(), start=start, end=start + len(bare), ended=ended)


def _reports(section: Section, rules: ReadingRules) -> tuple[list[list[_Piece]], bool]:
    """Put pieces together to reports; and say whether a last one was left because it is not complete.

    A line is a report; but where an equals sign ends a report before the next one begins, its lines belong together.
    Text that belongs to no report stands for itself, and will be said to be none.
    """
    groups: list[list[_Piece]] = []
    pending: list[_Piece] = []
    last_ended = False
    begun = not section.start
    *pieces, rest = _pieces(section)
    unfinished = bool(rest.text) and not rules.finished
    if not unfinished:
        pieces.append(rest)
    for piece in pieces:
        if _HEAD.match(piece.text) or _NAMED_HEAD.match(piece.text):
            groups += _one_by_one(pending)
            last_ended = last_ended and not pending
            pending = [piece]
            begun = True
        elif pending:
            pending.append(piece)
        elif begun:
            groups += _one_by_one([piece])
        if piece.ended and pending:
            groups.append([part for part in pending if part.text])
            pending, last_ended = [], True
    if pending and last_ended and not rules.finished:
        return groups, True
    return groups + _one_by_one(pending), unfinished


def _one_by_one(pieces: Sequence[_Piece]) -> list[list[_Piece]]:
    """Return each piece for itself, without blank lines and the headings of bulletins."""
    return [[piece] for piece in pieces if piece.text and not _BULLETIN_LINE.fullmatch(piece.text)]


def read_report(text: str) -> Report:
    """Read one report, in upper case, without the equals sign at its end."""
    head = _HEAD.match(text)
    named = head or _NAMED_HEAD.match(text)
    if not named:
        return Report(station="", day_time=None, row=ReadRow(fault=f"no METAR or SPECI report: {shown(text)}"))
    body, _, remarks = (f" {' '.join(text[named.end() :].split())} ").partition(" RMK ")
    groups = _before_trend(body)
    faults = ["the report contains NUL bytes"] if "\0" in text else []
    if "NIL" in groups:
        faults.append("NIL: the station made no report")
    day_time = _day_time(head[2]) if head else None
    if day_time is None:
        faults.append("no readable day and time (as in 141753Z)")
    temperature_c, dewpoint_c, fault = _temperatures(groups)
    faults.append(fault)
    altimeter_hpa, fault = _altimeter(groups)
    faults.append(fault)
    tenths, fault = _tenths(_before_trend(remarks), temperature_c, dewpoint_c)
    faults.append(fault)
    row = ReadRow(
        altimeter_hpa=altimeter_hpa,
        temperature_c=temperature_c if np.isnan(tenths[0]) else tenths[0],
        dewpoint_c=dewpoint_c if np.isnan(tenths[1]) else tenths[1],
        temperature_resolution_c=_WHOLE_DEGREE_C if np.isnan(tenths[0]) else np.nan,
        dewpoint_resolution_c=_WHOLE_DEGREE_C if np.isnan(tenths[1]) else np.nan,
        fault=joined(*faults),
    )
    return Report(station=named[1], day_time=day_time, row=row)


def _before_trend(text: str) -> list[str]:
    groups = text.split()
    for place, group in enumerate(groups):
        if group in _TREND:
            return groups[:place]
    return groups


def _day_time(text: str) -> tuple[int, int, int] | None:
    day, hour, minute = int(text[:2]), int(text[2:4]), int(text[4:6])
    return (day, hour, minute) if 1 <= day <= 31 and hour <= 23 and minute <= 59 else None


def _temperatures(groups: Sequence[str]) -> tuple[float, float, str]:
    """Read the group of temperature and dew point, in whole degrees: both, and what is wrong."""
    found = {group: match for group in groups if (match := _TEMPERATURE.fullmatch(group))}
    if len(found) > 1:
        return np.nan, np.nan, f"more than one group of temperature and dew point: {' '.join(found)}"
    for match in found.values():
        temperature_c, dewpoint_c = _whole_degrees(match[1]), _whole_degrees(match[2])
        return temperature_c, dewpoint_c, "no temperature" if np.isnan(temperature_c) else ""
    return np.nan, np.nan, "no temperature"


def _whole_degrees(text: str | None) -> float:
    if not text or text == "//":
        return np.nan
    return -float(text[1:]) if text.startswith("M") else float(text)


def _altimeter(groups: Sequence[str]) -> tuple[float, str]:
    """Read the altimeter setting, in inches where both are given: the setting, and what is wrong."""
    inches = {match[1] for group in groups if (match := _INCHES.fullmatch(group))}
    hectopascals = {match[1] for group in groups if (match := _HECTOPASCALS.fullmatch(group))}
    if len(inches) > 1 or len(hectopascals) > 1:
        return np.nan, "more than one altimeter setting"
    by_inches = [hpa_from_inhg(int(digits) / 100) for digits in inches]
    by_hectopascals = [float(digits) for digits in hectopascals]
    both = by_inches + by_hectopascals
    if not both:
        return np.nan, "no altimeter setting"
    if len(both) == 2 and abs(both[0] - both[1]) >= _MOST_APART_HPA + EQUAL:
        return np.nan, f"A{inches.pop()} and Q{hectopascals.pop()} are over {_MOST_APART_HPA} hPa apart"
    return both[0], ""


def _tenths(remarks: Sequence[str], temperature_c: float, dewpoint_c: float) -> tuple[tuple[float, float], str]:
    """Read the T group: temperature and dew point (NaN where it does not give them), and what is wrong.

    It refines what the report has in whole degrees. One that says something else is a misread report.
    """
    found = {group: match for group in remarks if (match := _TENTHS.fullmatch(group))}
    if len(found) > 1:
        return (np.nan, np.nan), f"more than one T group: {' '.join(found)}"
    for group, match in found.items():
        finer_c = _in_tenths(match[1], match[2]), _in_tenths(match[3], match[4])
        if any(
            abs(fine - whole) >= _WHOLE_DEGREE_C + EQUAL
            for fine, whole in zip(finer_c, (temperature_c, dewpoint_c), strict=True)
        ):
            return (np.nan, np.nan), f"{group} does not fit the temperature and dew point in whole degrees"
        return (
            finer_c[0] if not np.isnan(temperature_c) else np.nan,
            finer_c[1] if not np.isnan(dewpoint_c) else np.nan,
        ), ""
    return (np.nan, np.nan), ""


def _in_tenths(sign: str | None, digits: str | None) -> float:
    if sign is None or digits is None:
        return np.nan
    return (-int(digits) if sign == "1" else int(digits)) / 10


def times_of(day_times: Sequence[tuple[int, int, int] | None], file_time: datetime) -> list[int]:
    """Find month and year of reports that say only the day.

    Each is the nearest in the past of the file's time. Where the reports reach further back than a month, the order of
    the file tells: a report that would be half a month later than the one that follows it in time is of a month before.

    Returns
    -------
    list of int
        UTC microseconds since 1970; `NO_TIME_US` for None.
    """
    latest = file_time.astimezone(UTC) + AHEAD_OF_FILE
    times_us = [_newest_us(day_time, latest) if day_time else NO_TIME_US for day_time in day_times]
    timed = [place for place, time_us in enumerate(times_us) if time_us != NO_TIME_US]
    steps_us = [times_us[after] - times_us[before] for before, after in pairwise(timed)]
    if sum(step > 0 for step in steps_us) >= sum(step < 0 for step in steps_us):
        timed.reverse()
    for follows, place in pairwise(timed):
        day_time = day_times[place]
        if day_time and times_us[place] - times_us[follows] > _MONTH_APART_US:
            times_us[place] = _newest_us(day_time, time_from_us(times_us[follows] + _MONTH_APART_US))
    return times_us


def _newest_us(day_time: tuple[int, int, int], latest: datetime) -> int:
    """Return the newest moment of a day, hour and minute that is not after another, whatever its month."""
    day, hour, minute = day_time
    month = date(latest.year, latest.month, 1)
    while True:
        days = (month + timedelta(days=31)).replace(day=1) - month
        if day <= days.days:
            when = datetime(month.year, month.month, day, hour, minute, tzinfo=UTC)
            if when <= latest:
                return us_from_time(when)
        month = (month - timedelta(days=1)).replace(day=1)
