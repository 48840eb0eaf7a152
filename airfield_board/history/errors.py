"""Why a history cannot be opened or written, in plain words."""

import sqlite3

from airfield_board.errors import UserError, reason_of


class NotAHistory(UserError):
    """The file is something else, or of a program newer than this one."""


class HistoryLocked(UserError):
    """Another program records into the history."""


class HistoryDamaged(UserError):
    """The file cannot be read as it should."""


class NotRecorded(UserError):
    """Nothing of what was to be recorded is in the history; a later attempt may succeed."""


SQL_ERRORS = (sqlite3.Error, UnicodeDecodeError)
"""What a statement can raise: of a damaged schema even SQLite's message may be no text."""

_PLAIN_REASONS = {
    sqlite3.SQLITE_BUSY: "another program holds it locked",
    sqlite3.SQLITE_LOCKED: "another program holds it locked",
    sqlite3.SQLITE_PERM: "this user may not use it",
    sqlite3.SQLITE_AUTH: "this user may not use it",
    sqlite3.SQLITE_READONLY: "the file or its folder is read-only",
    sqlite3.SQLITE_FULL: "the disk is full",
    sqlite3.SQLITE_IOERR: "the disk could not be read or written (it may be full, failing or gone)",
    sqlite3.SQLITE_CANTOPEN: "the file could not be opened or made",
    sqlite3.SQLITE_NOMEM: "the machine is out of memory",
    sqlite3.SQLITE_CORRUPT: "the file is damaged",
    sqlite3.SQLITE_NOTADB: "the file is damaged or no history at all",
    sqlite3.SQLITE_CONSTRAINT: "a recorded row stands where the new one belongs",
}


def primary_code(error: sqlite3.Error) -> int | None:
    """Return SQLite's primary result code; None for an error of the Python module itself."""
    code: int | None = getattr(error, "sqlite_errorcode", None)
    return None if code is None else code & 0xFF


def plain_reason(error: Exception) -> str:
    """Say in plain words what went wrong, with the system's own words behind it."""
    if isinstance(error, UnicodeDecodeError):
        return "the file is damaged"
    if isinstance(error, OSError):
        return reason_of(error)
    code = primary_code(error) if isinstance(error, sqlite3.Error) else None
    plain = None if code is None else _PLAIN_REASONS.get(code)
    return f"{plain} ({error})" if plain else str(error)


def unusable(path: object, error: Exception) -> UserError:
    """Return the error that tells the user why a history cannot be opened or read."""
    text = f"{path}: {plain_reason(error)}"
    if isinstance(error, UnicodeDecodeError):
        return HistoryDamaged(text)
    if isinstance(error, sqlite3.Error):
        if primary_code(error) == sqlite3.SQLITE_NOTADB:
            return NotAHistory(f"{path}: not a history of this program, or damaged beyond reading ({error})")
        if primary_code(error) in {sqlite3.SQLITE_BUSY, sqlite3.SQLITE_LOCKED}:
            return HistoryLocked(text)
        if primary_code(error) in {sqlite3.SQLITE_CORRUPT, None}:
            return HistoryDamaged(text)
    return UserError(text)
