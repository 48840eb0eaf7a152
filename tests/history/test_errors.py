"""Errors of the database and of the system in words for the person at the desk."""

import sqlite3

import pytest

from airfield_board.errors import UserError
from airfield_board.history.errors import HistoryDamaged, HistoryLocked, NotAHistory, plain_reason, unusable


def sqlite_error(code: int) -> sqlite3.Error:
    error = sqlite3.OperationalError("as SQLite says it")
    error.sqlite_errorcode = code
    return error


# Extended codes carry the primary one in their low byte: https://www.sqlite.org/rescode.html
@pytest.mark.parametrize(
    ("code", "words"),
    [
        (sqlite3.SQLITE_FULL, "the disk is full"),
        (sqlite3.SQLITE_BUSY, "another program holds it locked"),
        (sqlite3.SQLITE_IOERR_WRITE, "the disk could not be read or written"),
        (sqlite3.SQLITE_READONLY_DBMOVED, "the file or its folder is read-only"),
        (sqlite3.SQLITE_CORRUPT_INDEX, "the file is damaged"),
        (sqlite3.SQLITE_CANTOPEN, "the file could not be opened or made"),
    ],
)
def test_a_code_becomes_words_with_the_systems_own_behind(code: int, words: str) -> None:
    assert plain_reason(sqlite_error(code)).startswith(words)
    assert plain_reason(sqlite_error(code)).endswith("(as SQLite says it)")


def test_what_has_no_words_of_its_own_keeps_the_systems() -> None:
    assert plain_reason(sqlite_error(sqlite3.SQLITE_ERROR)) == "as SQLite says it"
    assert plain_reason(sqlite3.ProgrammingError("closed")) == "closed"
    assert plain_reason(OSError(28, "No space left on device")) == "No space left on device"
    assert plain_reason(OSError("odd")) == "odd"
    assert plain_reason(UnicodeDecodeError("utf-8", b"\xff", 0, 1, "bad")) == "the file is damaged"


@pytest.mark.parametrize(
    ("error", "kind"),
    [
        (sqlite_error(sqlite3.SQLITE_NOTADB), NotAHistory),
        (sqlite_error(sqlite3.SQLITE_BUSY_RECOVERY), HistoryLocked),
        (sqlite_error(sqlite3.SQLITE_CORRUPT), HistoryDamaged),
        (UnicodeDecodeError("utf-8", b"\xff", 0, 1, "bad"), HistoryDamaged),
        (sqlite_error(sqlite3.SQLITE_IOERR), UserError),
        (OSError(13, "Permission denied"), UserError),
    ],
)
def test_each_is_an_error_of_its_kind_that_names_the_file(error: Exception, kind: type[UserError]) -> None:
    found = unusable("history.db", error)
    assert type(found) is kind
    assert str(found).startswith("history.db: ")
