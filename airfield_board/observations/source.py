"""The observation file, which others write while it is read.

Nothing that the file or its disk does stops the program: every trouble is a plain sentence in `SourceReading`.
"""

import hashlib
import stat
import threading
import time
from collections.abc import Callable
from concurrent.futures import Future, wait
from dataclasses import dataclass, field, replace
from datetime import UTC, datetime
from os import fstat, stat_result
from pathlib import Path
from typing import BinaryIO

import numpy as np

from airfield_board.clock import EPOCH, iso_utc, time_from_us, us_from_time
from airfield_board.errors import UserError
from airfield_board.observations.formats.json_format import is_array
from airfield_board.observations.formats.reading import Format, ReadingRules, ReadResult, Section
from airfield_board.observations.formats.recognise import HEAD_BYTES, read_section, recognise
from airfield_board.observations.observation import NO_TIME_US, ObservationTable
from airfield_board.units import HOUR_US

FIRST_BLOCK_BYTES = 65_536
MOST_BYTES = 64 * 1024 * 1024
_GROWTH = 4
_MEBIBYTE = 1024 * 1024

DEFAULT_REACH_US = 36 * HOUR_US
_PATIENCE_S = 1.5
_ATTEMPTS = 4
_SETTLING_S = 0.02
_OLDEST_ROWS_ASKED = 5
_LATEST_FILE_TIME_US = us_from_time(datetime(2200, 1, 1, tzinfo=UTC))

Opener = Callable[[Path], BinaryIO]


@dataclass(frozen=True, slots=True, kw_only=True)
class SourceRules:
    """What the profile says about the file.

    Attributes
    ----------
    time_zone
        IANA name of the zone of times without an offset.
    station
        METAR station whose reports are kept; empty: the file must hold one station only.
    name
        The file's name as the profile has it, for messages; empty: the path's last part.
    """

    time_zone: str
    station: str = ""
    name: str = ""


@dataclass(frozen=True, slots=True, kw_only=True)
class SourceReading:
    """What one look at the file gave.

    Attributes
    ----------
    table
        The rows at the end of the file, as far back as was asked for at least; None where the file could not be read
        or was being written. ``position`` is the row's byte offset in the file.
    fresh
        True where the rows were read anew; False where the file is as it was at the last look (``table`` is then the
        one given before), or where there is no table.
    messages
        What is wrong or worth knowing now, each a plain sentence.
    notes
        What is worth a line in the log, once a file: columns ignored, stations passed over.
    new_from
        Where whole rows were put behind what stood at the last look, and nothing else was changed: the byte offset
        from which the rows are new. Else 0.
    format
        What the file was recognised as; None where there is no table.
    file_time
        When the file was last written, UTC; None where that is not known.
    size
        In bytes; None where that is not known.
    unanswered_s
        For how long the file's disk has not answered; None where it has.
    """

    table: ObservationTable | None = None
    fresh: bool = False
    messages: tuple[str, ...] = ()
    notes: tuple[str, ...] = ()
    new_from: int = 0
    format: Format | None = None
    file_time: datetime | None = None
    size: int | None = None
    unanswered_s: float | None = None


@dataclass(frozen=True, slots=True, kw_only=True)
class _Imprint:
    """By what a file is known to be as it was: a change that keeps size and time shows in the digest of its end."""

    size: int
    modified_ns: int
    inode: int
    device: int
    end_digest: bytes


@dataclass(frozen=True, slots=True, kw_only=True)
class _Look:
    """One look at the file.

    Attributes
    ----------
    reading
        What it gave.
    imprint
        By what to know the file again; None where it must be read anew.
    since_us
        The reading lacks no row from here on.
    settled
        False where the next moment may show more: the file is being written, by the looks of it.
    """

    reading: SourceReading
    imprint: _Imprint | None = None
    since_us: int = 0
    settled: bool = True


@dataclass(slots=True)
class _Call:
    """A look that runs in a thread of its own, so that a disk that does not answer holds up nobody else."""

    asked_at: datetime
    answer: Future[_Look] = field(default_factory=Future)


def open_file(path: Path) -> BinaryIO:
    """Open a file for reading, without a buffer that could hold old bytes."""
    return path.open("rb", buffering=0)


class FileSource:
    """Reads an observation file again and again.

    Parameters
    ----------
    path
        The file; it need not exist yet.
    rules
        What the profile says about it.
    reach_us
        How far back rows are wanted where `read` is not told [µs].
    opener
        Opens the file.
    patience_s
        How long `read` waits for the file's disk at most.
    settling_s
        For how long what was read must stand before it counts, and the pause before a file that did not is looked at
        again, within one look.
    most_bytes
        How much of the file's end is read at most.
    """

    def __init__(
        self,
        path: Path,
        rules: SourceRules,
        reach_us: int = DEFAULT_REACH_US,
        *,
        opener: Opener = open_file,
        patience_s: float = _PATIENCE_S,
        settling_s: float = _SETTLING_S,
        most_bytes: int = MOST_BYTES,
    ) -> None:
        self._path = path
        self._rules = rules if rules.name else replace(rules, name=path.name)
        self._reach_us = reach_us
        self._opener = opener
        self._patience_s = patience_s
        self._settling_s = settling_s
        self._most_bytes = most_bytes
        self._call: _Call | None = None
        self._last: _Look | None = None
        self._newest_us = NO_TIME_US

    def read(self, now: datetime, since: datetime | None = None) -> SourceReading:
        """Look at the file; at most a moment, whatever its disk does.

        Parameters
        ----------
        now
            The present time, aware.
        since
            Rows from here on are wanted; older ones may be given. None: as far back as the source was told.

        Returns
        -------
        SourceReading
            Never raises for what is wrong with the file.
        """
        since_us = us_from_time(now) - self._reach_us if since is None else us_from_time(since)
        call = self._call
        patience_s = 0.0
        if call is None:
            call = self._call = _Call(asked_at=now)
            patience_s = self._patience_s
            threading.Thread(
                target=self._answer, args=(call, since_us, self._last), name="observation file", daemon=True
            ).start()
        if not wait([call.answer], patience_s).done:
            waited_s = max((now - call.asked_at).total_seconds(), 0.0)
            for_how_long = f"for {waited_s:.0f} s" if waited_s >= 1 else "yet"
            return SourceReading(
                messages=(f"{self._rules.name} has not answered {for_how_long}; it is read as soon as it does",),
                unanswered_s=waited_s,
            )
        self._call = None
        return self._taken(call.answer.result())

    def _answer(self, call: _Call, since_us: int, last: _Look | None) -> None:
        try:
            call.answer.set_result(self._look(since_us, last))
        except Exception as error:  # noqa: BLE001 - raised again in the thread that asked
            call.answer.set_exception(error)

    def _taken(self, look: _Look) -> SourceReading:
        """Keep what the next look needs, and say where rows that were there are gone."""
        if look.imprint is not None:
            self._last = look
        reading = look.reading
        if reading.table is None or not reading.fresh:
            return reading
        newest_us = int(reading.table.time_us.max(initial=NO_TIME_US))
        before_us, self._newest_us = self._newest_us, newest_us
        if newest_us >= before_us:
            return reading
        now_is = "there is none" if newest_us == NO_TIME_US else f"it is of {iso_utc(time_from_us(newest_us))}"
        message = (
            f"{self._rules.name} was cut or rewritten: its newest row was of {iso_utc(time_from_us(before_us))}, "
            f"now {now_is}"
        )
        return replace(reading, messages=(*reading.messages, message))

    def _look(self, since_us: int, last: _Look | None) -> _Look:
        """Look until the file holds still, a few times at most."""
        look = self._attempt(since_us, last)
        for _ in range(_ATTEMPTS - 1):
            if look.settled:
                break
            time.sleep(self._settling_s)
            look = self._attempt(since_us, last)
        return look

    def _attempt(self, since_us: int, last: _Look | None) -> _Look:
        if "\0" in str(self._path):
            return self._trouble("has a name that no file can have")
        try:
            if problem := _not_a_file(self._path.stat()):
                return self._trouble(problem)
            with self._opener(self._path) as file:
                return self._read_open(file, since_us, last)
        except (FileNotFoundError, NotADirectoryError):
            # Some writers take the old file away before the new one has its name.
            return self._trouble("does not exist (yet)", settled=False)
        except PermissionError:
            return self._trouble("may not be read: this program's user has no permission to")
        except OSError as error:
            return self._trouble(f"cannot be read: {error.strerror or error}")

    def _read_open(self, file: BinaryIO, since_us: int, last: _Look | None) -> _Look:
        before = fstat(file.fileno())
        if problem := _not_a_file(before):
            return self._trouble(problem)
        size = before.st_size
        end = _read_at(file, max(size - FIRST_BLOCK_BYTES, 0), size)
        imprint = _Imprint(
            size=size,
            modified_ns=before.st_mtime_ns,
            inode=before.st_ino,
            device=before.st_dev,
            end_digest=hashlib.blake2b(end).digest(),
        )
        if (
            last is not None
            and imprint == last.imprint
            and since_us >= last.since_us
            and _same(before, fstat(file.fileno()))
        ):
            return replace(last, reading=replace(last.reading, fresh=False), settled=True)
        facts = SourceReading(file_time=_file_time(before), size=size)
        try:
            result, start, content = self._read_back(file, before, end, since_us)
        except UserError as error:
            reading = replace(facts, messages=tuple(str(error).splitlines()))
            return _Look(reading=reading, imprint=imprint, since_us=NO_TIME_US, settled=False)
        new_from = self._appended_from(file, before, last, result)
        if not new_from and not self._holds_still(file, before, start, content):
            return self._trouble("is being written; it is read at the next poll", settled=False)
        messages = []
        if result.unfinished:
            messages.append(f"{self._rules.name}: the last row is not complete yet; it is left until it is")
        if not len(result.table):
            messages.append(f"{self._rules.name} has no rows yet")
        if start and not _reaches(result, since_us):
            messages.append(
                f"{self._rules.name} has {size // _MEBIBYTE} MiB; only the last {self._most_bytes // _MEBIBYTE} MiB "
                "were read, and rows before them are not seen"
            )
        reading = replace(
            facts,
            table=result.table,
            fresh=True,
            messages=tuple(messages),
            notes=result.notes,
            new_from=new_from if last is not None and since_us >= last.since_us else 0,
            format=result.format,
        )
        reached_us = since_us if start else NO_TIME_US
        return _Look(reading=reading, imprint=imprint, since_us=reached_us, settled=not result.unfinished)

    def _read_back(
        self, file: BinaryIO, before: stat_result, end: bytes, since_us: int
    ) -> tuple[ReadResult, int, bytes]:
        """Read from the end of the file back as far as is needed: what was read, where it begins, and its bytes."""
        size = before.st_size
        head = end if size <= len(end) else _read_at(file, 0, HEAD_BYTES)
        rules = self._reading_rules(before)
        wanted = FIRST_BLOCK_BYTES
        if recognise(head, rules) == "json" and is_array(head):
            if size > self._most_bytes:
                raise rules.fault(
                    f"it is a JSON array of {size // _MEBIBYTE} MiB, which would have to be read as a whole; expected "
                    f"{self._most_bytes // _MEBIBYTE} MiB at most, or one object a line"
                )
            wanted = size
        while True:
            start = max(size - min(wanted, self._most_bytes), 0)
            content = end if size - start == len(end) else _read_at(file, start, size)
            if start:
                cut = content.find(b"\n") + 1 or len(content)
                content = content[cut:]
                start += cut
            result = read_section(Section(content=content, start=start, head=head), rules)
            if not start or wanted >= self._most_bytes or _reaches(result, since_us):
                return result, start, content
            wanted *= _GROWTH

    def _appended_from(self, file: BinaryIO, before: stat_result, last: _Look | None, result: ReadResult) -> int:
        """Return the offset behind which whole rows were put, where nothing else was done since the last look; else 0.

        An appending writer's unfinished row has no line end, so what is complete needs no second look.
        """
        if last is None or last.imprint is None or not last.settled or result.unfinished or result.format == "json":
            return 0
        known = last.imprint
        if (known.inode, known.device) != (before.st_ino, before.st_dev) or before.st_size <= known.size:
            return 0
        stood = _read_at(file, max(known.size - FIRST_BLOCK_BYTES, 0), known.size)
        as_it_was = hashlib.blake2b(stood).digest() == known.end_digest and _same(before, fstat(file.fileno()))
        return known.size if as_it_was else 0

    def _holds_still(self, file: BinaryIO, before: stat_result, start: int, content: bytes) -> bool:
        """Whether what was read still stands there a moment later; a file that only grew meanwhile holds still.

        A writer at work in the middle of a row cannot be told from one that has finished but by giving it that moment.
        """
        time.sleep(self._settling_s)
        size = before.st_size
        again = _read_at(file, start, size)
        after = fstat(file.fileno())
        grew = after.st_size > size
        return len(content) == size - start and again == content and (grew or _same(before, after))

    def _reading_rules(self, found: stat_result) -> ReadingRules:
        return ReadingRules(
            time_zone=self._rules.time_zone,
            file_time=_file_time(found),
            finished=False,
            station=self._rules.station,
            name=self._rules.name,
        )

    def _trouble(self, what: str, *, settled: bool = True) -> _Look:
        return _Look(reading=SourceReading(messages=(f"{self._rules.name} {what}",)), settled=settled)


def _not_a_file(found: stat_result) -> str:
    """Say what something is that cannot be read like a file; empty for a file."""
    if stat.S_ISREG(found.st_mode):
        return ""
    return "is a folder; expected a file" if stat.S_ISDIR(found.st_mode) else "is a pipe or a device; expected a file"


def _read_at(file: BinaryIO, start: int, end: int) -> bytes:
    """Read a stretch of a file; less where the file has become shorter."""
    file.seek(start)
    parts = []
    missing = end - start
    while missing > 0 and (part := file.read(missing)):
        parts.append(part)
        missing -= len(part)
    return b"".join(parts)


def _same(before: stat_result, after: stat_result) -> bool:
    return (before.st_size, before.st_mtime_ns) == (after.st_size, after.st_mtime_ns)


def _file_time(found: stat_result) -> datetime:
    """Return when a file was last written; 1970 for a time that no disk of ours can have."""
    when_us = found.st_mtime_ns // 1000
    return time_from_us(when_us) if 0 <= when_us < _LATEST_FILE_TIME_US else EPOCH


def _reaches(result: ReadResult, since_us: int) -> bool:
    """Whether the rows at the end of a file reach back far enough.

    They do not where nothing tells which pass of a doubled hour they begin in, nor where the file runs newest-first.
    """
    times_us = result.table.time_us[result.table.time_us != NO_TIME_US]
    if not times_us.size or result.begins_doubled or times_us[0] > times_us[-1]:
        return False
    return bool(np.median(times_us[:_OLDEST_ROWS_ASKED]) <= since_us)
