"""Connections to a history: one that records, and readers that make and change no file."""

import shutil
import sqlite3
import tempfile
from collections.abc import Iterator
from contextlib import contextmanager
from dataclasses import dataclass
from pathlib import Path

from airfield_board.errors import UserError
from airfield_board.history.errors import SQL_ERRORS, NotAHistory, unusable
from airfield_board.history.lock import holder_of
from airfield_board.history.schema import MIGRATIONS, migrate, version_of


@contextmanager
def plain_errors(path: Path) -> Iterator[None]:
    """Turn errors of SQLite and of the system into ones that the user understands."""
    try:
        yield
    except NotAHistory as error:
        raise NotAHistory(f"{path}: {error}") from error
    except (*SQL_ERRORS, OSError) as error:
        raise unusable(path, error) from error


def connect_recorder(path: Path, *, create: bool, busy_s: float) -> sqlite3.Connection:
    """Open a history to record into it, made or brought to the newest schema where needed.

    Parameters
    ----------
    path
        Absolute.
    busy_s
        How long to wait for another program that holds the database locked.

    Raises
    ------
    UserError
        Where the file is no history, of a newer program, locked, read-only or damaged.
    """
    with plain_errors(path):
        connection = sqlite3.connect(
            f"{path.as_uri()}?mode={'rwc' if create else 'rw'}", uri=True, isolation_level=None, timeout=busy_s
        )
        try:
            version_of(connection)  # before the first change: the file may be somebody else's
            connection.execute("PRAGMA trusted_schema = OFF")
            connection.execute("PRAGMA recursive_triggers = ON")
            connection.execute("PRAGMA journal_mode = WAL")
            # NORMAL loses the last commits at a power failure; what was reported as recorded must stay.
            connection.execute("PRAGMA synchronous = FULL")
            connection.execute("PRAGMA fullfsync = ON")
            migrate(connection)
        except BaseException:
            connection.close()
            raise
    return connection


@dataclass(frozen=True, slots=True, kw_only=True)
class Reading:
    """A connection that only reads, and what belongs to it.

    Attributes
    ----------
    live
        Whether somebody records into the history meanwhile.
    stamp
        What the files looked like when it was opened; empty where live.
    folder
        Of the copy that is read instead, where there is one.
    """

    path: Path
    connection: sqlite3.Connection
    live: bool
    stamp: tuple[tuple[int, int], ...]
    folder: tempfile.TemporaryDirectory[str] | None

    def disturbed(self) -> bool:
        """Whether somebody has begun to record since: what was read then is not to be relied on."""
        return bool(self.stamp) and self.folder is None and _stamp(self.path) != self.stamp

    def close(self) -> None:
        """Close the connection; a copy goes."""
        self.connection.close()
        if self.folder is not None:
            self.folder.cleanup()


def wal_path(path: Path) -> Path:
    """Return the path of the file in which SQLite keeps what is not yet in the database file."""
    return path.with_name(path.name + "-wal")


def _stamp(path: Path) -> tuple[tuple[int, int], ...]:
    stamps = []
    for file in (path, wal_path(path)):
        try:
            found = file.stat()
            stamps.append((found.st_size, found.st_mtime_ns))
        except FileNotFoundError:
            stamps.append((-1, 0))
    return tuple(stamps)


def _copy(path: Path) -> tuple[tempfile.TemporaryDirectory[str], Path]:
    folder = tempfile.TemporaryDirectory(prefix="airfield-board-")
    copy = Path(folder.name) / path.name
    try:
        shutil.copyfile(path, copy)
        shutil.copyfile(wal_path(path), wal_path(copy))
    except OSError:
        folder.cleanup()
        raise
    return folder, copy


def _check_readable(connection: sqlite3.Connection) -> None:
    version = version_of(connection)
    if version == 0:
        raise NotAHistory("an empty file, no history")
    if version < len(MIGRATIONS):
        raise NotAHistory("written by an older version of this program; start the board with it once")


def connect_reader(path: Path) -> Reading:
    """Open a history to read it; no file is made or changed, not even where the recorder was killed.

    While somebody records, SQLite's shared reading is used. A history at rest is opened as unchanging. One whose
    recorder was killed still has its last records in the write-ahead file: reading them would write, so a copy is read.

    Parameters
    ----------
    path
        Absolute.

    Raises
    ------
    UserError
        As `connect_recorder`; also for a schema older than this program's.
    """
    if not path.is_file():
        raise UserError(f"{path}: there is no history here")
    folder: tempfile.TemporaryDirectory[str] | None = None
    with plain_errors(path):
        live = holder_of(path) is not None
        stamp = () if live else _stamp(path)
        if live:
            address = f"{path.as_uri()}?mode=ro"
        elif stamp[1][0] > 0:
            folder, copy = _copy(path)
            address = f"{copy.as_uri()}?mode=rw"
        else:
            address = f"{path.as_uri()}?immutable=1"
        try:
            connection = sqlite3.connect(address, uri=True, isolation_level=None)
            try:
                connection.execute("PRAGMA trusted_schema = OFF")
                connection.execute("PRAGMA query_only = ON")
                _check_readable(connection)
            except BaseException:
                connection.close()
                raise
        except BaseException:
            if folder is not None:
                folder.cleanup()
            raise
    return Reading(path=path, connection=connection, live=live, stamp=stamp, folder=folder)
