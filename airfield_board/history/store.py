"""The history: opened by one recorder at a time, added to in whole transactions, read by anybody."""

import os
import platform
import sqlite3
from collections.abc import Mapping, Sequence
from contextlib import suppress
from datetime import datetime
from pathlib import Path

from airfield_board.clock import us_from_time
from airfield_board.errors import UserError
from airfield_board.history.chain import EMPTY, Head, bind, link
from airfield_board.history.connection import Reading, connect_reader, connect_recorder, plain_errors
from airfield_board.history.errors import SQL_ERRORS, NotRecorded, plain_reason
from airfield_board.history.head_file import head_path, read_heads, write_heads
from airfield_board.history.lock import RecorderLock
from airfield_board.history.queries import HistoryQueries
from airfield_board.history.records import Json, Record, RecordKind, json_text, text_from_body
from airfield_board.history.schema import MIGRATIONS, TYPED, Row

_BUSY_S = 2.0
_JOURNAL_INSERT = "INSERT INTO journal VALUES (?, ?, ?, ?, ?)"
_RESUME_INSERT = (
    "INSERT INTO resume VALUES (1, ?, ?, ?) "
    "ON CONFLICT (only_row) DO UPDATE SET seq = excluded.seq, value = excluded.value, hash = excluded.hash"
)


class History(HistoryQueries):
    """A history, open to record (`open`) or only to read (`open_read_only`).

    Belongs to the thread that opened it, from opening to closing.
    """

    def __init__(
        self, path: Path, connection: sqlite3.Connection, *, lock: RecorderLock | None, reading: Reading | None
    ) -> None:
        super().__init__(path, connection)
        self._lock = lock
        self._reading = reading
        self._known: tuple[Head, ...] = (EMPTY,)
        self._file = _identity(path)
        self._closed = False

    @classmethod
    def open(
        cls, path: Path, *, now: datetime, program_version: str, create: bool = True, busy_s: float = _BUSY_S
    ) -> "History":
        """Open a history to record into it, and record the start.

        Parameters
        ----------
        path
            Of the file; beside it lie its second place (``.head``) and its lock (``.lock``).
        now
            The recorder's time.
        create
            Whether a missing file is made; the folder must be there.
        busy_s
            How long to wait for a program that holds the database locked.

        Raises
        ------
        HistoryLocked
            Where another recorder has it; the message says whose.
        UserError
            Where it is no history, of a newer program, damaged, or cannot be written.
        """
        path = path.resolve()
        if not path.parent.is_dir():
            raise UserError(f"{path}: the folder {path.parent} does not exist")
        if path.is_dir():
            raise UserError(f"{path}: this is a folder, not a history")
        if not create and not path.is_file():
            raise UserError(f"{path}: there is no history here")
        lock = RecorderLock.take(path, now=now)
        try:
            connection = connect_recorder(path, create=create, busy_s=busy_s)
            try:
                history = cls(path, connection, lock=lock, reading=None)
                history._begin(now, program_version)
            except BaseException:
                connection.close()
                raise
        except BaseException:
            lock.release()
            raise
        return history

    @classmethod
    def open_read_only(cls, path: Path) -> "History":
        """Open a history only to read it, whether somebody records into it or not; no file is made or changed.

        Raises
        ------
        UserError
            Where there is none, or it is no history, of another version, or damaged.
        """
        path = path.resolve()
        reading = connect_reader(path)
        return cls(path, reading.connection, lock=None, reading=reading)

    @property
    def read_only(self) -> bool:
        """Whether nothing can be recorded through this object."""
        return self._lock is None

    def _begin(self, now: datetime, program_version: str) -> None:
        found = self.head()
        records = [] if (doubt := self._doubt(found)) is None else [Record(kind=RecordKind.MESSAGE, at=now, body=doubt)]
        (journal_mode,) = self._rows("PRAGMA journal_mode")[0]
        start: dict[str, Json] = {
            "program_version": program_version,
            "sqlite_version": sqlite3.sqlite_version,
            "python_version": platform.python_version(),
            "schema_version": len(MIGRATIONS),
            "journal_mode": journal_mode,
            "host": platform.node(),
            "pid": os.getpid(),
        }
        self._known = (found,)
        self.append([*records, Record(kind=RecordKind.START, at=now, body=start)])

    def _doubt(self, found: Head) -> dict[str, Json] | None:
        """Compare with the second place; what does not fit becomes a record, since the next commit overwrites it."""
        try:
            heads = read_heads(self._path)
        except (ValueError, OSError) as error:
            return {"topic": "history", "text": f"{head_path(self._path).name} cannot be used: {error}"}
        if heads is None:
            if found == EMPTY:
                return None
            return {"topic": "history", "text": f"{head_path(self._path).name} was missing"}
        if found in heads:
            return None
        expected = heads[0]
        return {
            "topic": "history",
            "text": f"the history had {found.records} records, but {head_path(self._path).name} says "
            f"{expected.records}: records were cut off, added or changed while no recorder ran",
            "expected": {"records": expected.records, "hash": expected.hash.hex()},
            "found": {"records": found.records, "hash": found.hash.hex()},
        }

    def append(self, records: Sequence[Record], *, resume: Json = None) -> tuple[int, ...]:
        """Record, in one transaction: all of it is on the disk when this returns, or none of it is recorded.

        Parameters
        ----------
        records
            In the order in which they happened.
        resume
            The recorder's memory after them, kept in the place of the one before; None leaves that as it is.

        Returns
        -------
        tuple of int
            The numbers of the records.

        Raises
        ------
        NotRecorded
            Where it could not be written, with the reason; a later call may succeed.
        ValueError, TypeError
            Where a record's kind is unknown or its body is not what its kind needs; nothing is recorded.
        """
        if self._lock is None:
            raise NotRecorded(f"{self._path}: opened read-only, nothing is recorded")
        if self._closed:
            raise NotRecorded(f"{self._path}: closed, nothing is recorded")
        if _identity(self._path) != self._file:
            # What is open has no name any more: it would go with the program.
            raise NotRecorded(f"{self._path}: not recorded: the file was taken away, or another put in its place")
        kinds = [RecordKind(record.kind) for record in records]
        times_us = [us_from_time(record.at) for record in records]
        texts = [
            text_from_body(kind, at_us, record.body)
            for kind, at_us, record in zip(kinds, times_us, records, strict=True)
        ]
        resume_text = None if resume is None else json_text(resume)
        try:
            return self._write(kinds, times_us, texts, [record.body for record in records], resume_text)
        except (*SQL_ERRORS, OSError) as error:
            raise NotRecorded(f"{self._path}: not recorded: {plain_reason(error)}") from error

    def _write(
        self,
        kinds: Sequence[RecordKind],
        times_us: Sequence[int],
        texts: Sequence[str],
        bodies: Sequence[Mapping[str, Json]],
        resume_text: str | None,
    ) -> tuple[int, ...]:
        connection = self._connection
        connection.execute("BEGIN IMMEDIATE")
        try:
            before = self._head_in_transaction()
            seq, previous = before.records, before.hash
            journal_rows = []
            typed_rows: dict[str, list[Row]] = {}
            for kind, at_us, text, body in zip(kinds, times_us, texts, bodies, strict=True):
                seq += 1
                previous = link(previous, seq, at_us, kind.encode(), text.encode())
                journal_rows.append((seq, at_us, kind.value, text, previous))
                if (table := TYPED.get(kind)) is not None:
                    typed_rows.setdefault(table.insert, []).extend(table.rows(seq, at_us, body))
            after = Head(records=seq, hash=previous)
            connection.executemany(_JOURNAL_INSERT, journal_rows)
            for insert, rows in typed_rows.items():
                connection.executemany(insert, rows)
            if resume_text is not None:
                connection.execute(_RESUME_INSERT, (seq, resume_text, bind(previous, resume_text.encode())))
            if after != before:
                write_heads(self._path, (before, after), durable=True)
            self._known = (before, after)
            connection.execute("COMMIT")
        finally:
            # Where SQLite has rolled back by itself, or cannot, there is nothing more to be done.
            with suppress(sqlite3.Error):
                if connection.in_transaction:
                    connection.execute("ROLLBACK")
        self._known = (after,)
        if after != before:
            # The records stand; the announcement allows this state too.
            with suppress(OSError):
                write_heads(self._path, (after,), durable=False)
        return tuple(range(before.records + 1, after.records + 1))

    def _head_in_transaction(self) -> Head:
        found = self._connection.execute("SELECT seq, hash FROM journal ORDER BY seq DESC LIMIT 1").fetchone()
        head = EMPTY if found is None else Head(records=found[0], hash=found[1])
        if head not in self._known:
            raise NotRecorded(f"{self._path}: another program has changed the history meanwhile; open it again")
        return head

    def close(self, *, now: datetime | None = None) -> None:
        """Close the history.

        Parameters
        ----------
        now
            The recorder's time, for the record of the stop; None: no stop is recorded.

        Raises
        ------
        NotRecorded
            Where the stop could not be recorded; the history is closed all the same.
        """
        if self._closed:
            return
        try:
            if now is not None and not self.read_only:
                self.append([Record(kind=RecordKind.STOP, at=now, body={})])
        finally:
            self._closed = True
            if self._reading is not None:
                self._reading.close()
            else:
                with plain_errors(self._path):
                    self._connection.close()
            if self._lock is not None:
                self._lock.release()


def _identity(path: Path) -> tuple[int, int] | None:
    """Return what tells a file from any other that has its name later; None where there is none."""
    try:
        found = path.stat()
    except OSError:
        return None
    return found.st_dev, found.st_ino
