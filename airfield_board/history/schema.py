"""The tables: the journal, which is the record itself, and typed tables filled from it, by which records are found.

Journal and typed tables are written in one transaction and only ever added to. Whatever a typed table says is in the
journal's text too; `verify` compares the two. Sizes: some 250 bytes an observation, 0.7 GB for five years of minutes.
"""

import sqlite3
from collections.abc import Callable, Mapping, Sequence
from dataclasses import dataclass
from functools import cache
from types import MappingProxyType
from typing import TypeAlias

from airfield_board.history.errors import NotAHistory
from airfield_board.history.records import Json, RecordKind, json_text
from airfield_board.observations.observation import Verdict

APPLICATION_ID = 0x41424831
"""Marks the file as a history (the letters ABH1)."""

SqlValue: TypeAlias = "int | float | str | None"
Row: TypeAlias = tuple[SqlValue, ...]


def _append_only(table: str) -> tuple[str, ...]:
    return (
        f"CREATE TRIGGER {table}_keeps_rows BEFORE DELETE ON {table} "
        "BEGIN SELECT RAISE(ABORT, 'the history is only added to'); END",
        f"CREATE TRIGGER {table}_keeps_values BEFORE UPDATE ON {table} "
        "BEGIN SELECT RAISE(ABORT, 'the history is only added to'); END",
    )


def _not_replaced(table: str) -> str:
    # REPLACE deletes without the delete trigger in a connection that has recursive triggers off.
    place = "seq = NEW.seq AND change_seq = NEW.change_seq" if table == "acknowledgement" else "seq = NEW.seq"
    return (
        f"CREATE TRIGGER {table}_keeps_place BEFORE INSERT ON {table} WHEN EXISTS (SELECT 1 FROM {table} "  # noqa: S608
        f"WHERE {place}) BEGIN SELECT RAISE(ABORT, 'the history is only added to'); END"
    )


_FIRST: tuple[str, ...] = (
    "CREATE TABLE journal (seq INTEGER PRIMARY KEY, at_us INTEGER NOT NULL, kind TEXT NOT NULL, body TEXT NOT NULL, "
    "hash BLOB NOT NULL) STRICT",
    "CREATE INDEX journal_kind ON journal (kind, seq) WHERE kind <> 'observation'",
    "CREATE TRIGGER journal_keeps_order BEFORE INSERT ON journal "
    "WHEN NEW.seq IS NOT (SELECT coalesce(max(seq), 0) + 1 FROM journal) "
    "BEGIN SELECT RAISE(ABORT, 'the history is only added to, one number after the other'); END",
    *_append_only("journal"),
    # time_us is NULL where the row's time could not be read.
    "CREATE TABLE observation (seq INTEGER PRIMARY KEY, time_us INTEGER, verdict INTEGER NOT NULL, "
    "late INTEGER NOT NULL, density_altitude_ft REAL, uncertainty_ft REAL) STRICT",
    "CREATE INDEX observation_time ON observation (time_us)",
    _not_replaced("observation"),
    *_append_only("observation"),
    "CREATE TABLE change (seq INTEGER PRIMARY KEY, time_us INTEGER NOT NULL, scope TEXT NOT NULL, aircraft TEXT, "
    "operation TEXT, quantity TEXT, from_state TEXT, to_state TEXT NOT NULL) STRICT",
    "CREATE INDEX change_time ON change (time_us)",
    "CREATE INDEX change_to_acknowledge ON change (scope, seq) WHERE to_state IN ('hold', 'no_data')",
    _not_replaced("change"),
    *_append_only("change"),
    "CREATE TABLE acknowledgement (seq INTEGER NOT NULL, change_seq INTEGER NOT NULL, at_us INTEGER NOT NULL, "
    "initials TEXT NOT NULL, withdrawn INTEGER NOT NULL, PRIMARY KEY (seq, change_seq)) STRICT, WITHOUT ROWID",
    "CREATE INDEX acknowledgement_change ON acknowledgement (change_seq, seq)",
    _not_replaced("acknowledgement"),
    *_append_only("acknowledgement"),
    "CREATE TABLE note (seq INTEGER PRIMARY KEY, at_us INTEGER NOT NULL, about TEXT NOT NULL, initials TEXT NOT NULL, "
    "text TEXT NOT NULL) STRICT",
    "CREATE INDEX note_time ON note (at_us)",
    _not_replaced("note"),
    *_append_only("note"),
    "CREATE TABLE configuration (seq INTEGER PRIMARY KEY, at_us INTEGER NOT NULL, kind TEXT NOT NULL, "
    "name TEXT NOT NULL, sha256 TEXT NOT NULL) STRICT",
    "CREATE INDEX configuration_kind ON configuration (kind, seq)",
    _not_replaced("configuration"),
    *_append_only("configuration"),
    "CREATE TABLE episode (seq INTEGER PRIMARY KEY, start_us INTEGER NOT NULL, end_us INTEGER, "
    "aircraft TEXT NOT NULL, operation TEXT NOT NULL, quantity TEXT NOT NULL) STRICT",
    "CREATE INDEX episode_start ON episode (start_us)",
    _not_replaced("episode"),
    *_append_only("episode"),
    # No record: the recorder's memory, from which it goes on without judging the journal anew.
    "CREATE TABLE resume (only_row INTEGER PRIMARY KEY CHECK (only_row = 1), seq INTEGER NOT NULL, "
    "value TEXT NOT NULL, hash BLOB NOT NULL) STRICT",
)

MIGRATIONS: tuple[tuple[str, ...], ...] = (_FIRST,)
"""Step n leads from version n to n + 1; a step, once released, is never changed."""


def version_of(connection: sqlite3.Connection) -> int:
    """Return the schema version of a database: 0 for an empty one.

    Raises
    ------
    NotAHistory
        Where the database belongs to something else, or to a newer program.
    """
    (application_id,) = connection.execute("PRAGMA application_id").fetchone()
    (version,) = connection.execute("PRAGMA user_version").fetchone()
    (objects,) = connection.execute("SELECT count(*) FROM sqlite_schema").fetchone()
    if not objects and application_id in {0, APPLICATION_ID} and version == 0:
        return 0
    if application_id != APPLICATION_ID or version < 1:
        raise NotAHistory("a database, but not a history of this program")
    if version > len(MIGRATIONS):
        raise NotAHistory(
            f"written by a newer version of this program (schema {version}; this one knows {len(MIGRATIONS)})"
        )
    return int(version)


def migrate(connection: sqlite3.Connection, migrations: Sequence[tuple[str, ...]] = MIGRATIONS) -> None:
    """Bring a database to the newest schema, in one transaction: all of it, or nothing.

    Parameters
    ----------
    connection
        In autocommit mode.
    migrations
        The steps from version 0 on.

    Raises
    ------
    NotAHistory
        As `version_of`.
    sqlite3.Error
        Where a step fails; the database is then as before.
    """
    if version_of(connection) == len(migrations):
        return
    connection.execute("BEGIN IMMEDIATE")
    try:
        for number, statements in enumerate(migrations[version_of(connection) :], start=version_of(connection) + 1):
            for statement in statements:
                connection.execute(statement)
            connection.execute(f"PRAGMA user_version = {number}")
        connection.execute(f"PRAGMA application_id = {APPLICATION_ID}")
        connection.execute("COMMIT")
    finally:
        if connection.in_transaction:
            connection.execute("ROLLBACK")


def objects_of(connection: sqlite3.Connection) -> dict[str, str]:
    """Return the definition of every table, index and trigger by its name, without SQLite's own."""
    found = connection.execute("SELECT name, sql FROM sqlite_schema WHERE name NOT LIKE 'sqlite\\_%' ESCAPE '\\'")
    return {str(name): str(sql) for name, sql in found}


@cache
def expected_objects(version: int) -> Mapping[str, str]:
    """Return what `objects_of` gives for an untouched history of a schema version."""
    connection = sqlite3.connect(":memory:", isolation_level=None)
    try:
        migrate(connection, MIGRATIONS[:version])
        return MappingProxyType(objects_of(connection))
    finally:
        connection.close()


@dataclass(frozen=True, slots=True, kw_only=True)
class TypedTable:
    """A table filled from the records of some kinds.

    Attributes
    ----------
    name
        The table's.
    insert, select
        Its statements: all columns, the record's number first; rows in order of number.
    rows
        From a record's number, time [us] and body: its rows. Raises ValueError where the body lacks what it needs.
    """

    name: str
    insert: str
    select: str
    rows: Callable[[int, int, Mapping[str, Json]], tuple[Row, ...]]


_INTEGERS = 2**63


def _whole(body: Mapping[str, Json], key: str) -> int:
    value = body.get(key)
    if not isinstance(value, int) or isinstance(value, bool) or not -_INTEGERS <= value < _INTEGERS:
        raise ValueError(f"{key} must be a whole number of 64 bits, not {value!r}")
    return value


def _whole_or_none(body: Mapping[str, Json], key: str) -> int | None:
    return None if body.get(key) is None else _whole(body, key)


def _number_or_none(body: Mapping[str, Json], key: str) -> float | None:
    value = body.get(key)
    if value is None:
        return None
    if not isinstance(value, int | float) or isinstance(value, bool):
        raise ValueError(f"{key} must be a number, not {value!r}")  # noqa: TRY004 - one error for any bad body
    return float(value)


def _text(body: Mapping[str, Json], key: str, otherwise: str | None = None) -> str:
    value = body.get(key, otherwise)
    if not isinstance(value, str):
        raise ValueError(f"{key} must be a text, not {value!r}")  # noqa: TRY004 - one error for any bad body
    # The journal keeps half of a surrogate pair escaped; a column cannot hold one.
    return value.encode(errors="replace").decode()


def _text_or_none(body: Mapping[str, Json], key: str) -> str | None:
    return None if body.get(key) is None else _text(body, key)


_VERDICTS = {verdict.name.lower(): int(verdict) for verdict in Verdict}


def _observation_rows(seq: int, _at_us: int, body: Mapping[str, Json]) -> tuple[Row, ...]:
    verdict = _VERDICTS.get(_text(body, "verdict"))
    if verdict is None:
        raise ValueError(f"verdict must be one of {', '.join(_VERDICTS)}, not {body['verdict']!r}")
    _text(body, "raw")
    return (
        (
            seq,
            _whole_or_none(body, "time"),
            verdict,
            1 if body.get("late") else 0,
            _number_or_none(body, "da_ft"),
            _number_or_none(body, "u_ft"),
        ),
    )


def _change_rows(seq: int, _at_us: int, body: Mapping[str, Json]) -> tuple[Row, ...]:
    return (
        (
            seq,
            _whole(body, "time"),
            _text(body, "scope", "limit"),
            _text_or_none(body, "aircraft"),
            _text_or_none(body, "operation"),
            _text_or_none(body, "quantity"),
            _text_or_none(body, "from"),
            _text(body, "to"),
        ),
    )


def _acknowledgement_rows(seq: int, at_us: int, body: Mapping[str, Json], *, withdrawn: int = 0) -> tuple[Row, ...]:
    changes = body.get("changes")
    if not isinstance(changes, list | tuple) or any(type(change) is not int for change in changes):
        raise ValueError(f"changes must be a list of record numbers, not {changes!r}")
    initials = _text(body, "initials", "")
    return tuple((seq, change, at_us, initials, withdrawn) for change in sorted(set(changes)))


def _withdrawal_rows(seq: int, at_us: int, body: Mapping[str, Json]) -> tuple[Row, ...]:
    return _acknowledgement_rows(seq, at_us, body, withdrawn=1)


def _note_rows(seq: int, at_us: int, body: Mapping[str, Json]) -> tuple[Row, ...]:
    about = body.get("about", "")
    return (
        (
            seq,
            at_us,
            _text({"about": about if isinstance(about, str) else json_text(about)}, "about"),
            _text(body, "initials", ""),
            _text(body, "text"),
        ),
    )


def _configuration_rows(seq: int, at_us: int, body: Mapping[str, Json]) -> tuple[Row, ...]:
    _text(body, "text")
    return ((seq, at_us, _text(body, "kind"), _text(body, "name", ""), _text(body, "sha256")),)


def _episode_rows(seq: int, _at_us: int, body: Mapping[str, Json]) -> tuple[Row, ...]:
    return (
        (
            seq,
            _whole(body, "start"),
            _whole_or_none(body, "end"),
            _text(body, "aircraft"),
            _text(body, "operation"),
            _text(body, "quantity"),
        ),
    )


_ACKNOWLEDGEMENT_INSERT = "INSERT INTO acknowledgement VALUES (?, ?, ?, ?, ?)"
_ACKNOWLEDGEMENT_SELECT = (
    "SELECT seq, change_seq, at_us, initials, withdrawn FROM acknowledgement ORDER BY seq, change_seq"
)

TYPED: Mapping[RecordKind, TypedTable] = {
    RecordKind.OBSERVATION: TypedTable(
        name="observation",
        insert="INSERT INTO observation VALUES (?, ?, ?, ?, ?, ?)",
        select="SELECT seq, time_us, verdict, late, density_altitude_ft, uncertainty_ft FROM observation ORDER BY seq",
        rows=_observation_rows,
    ),
    RecordKind.CHANGE: TypedTable(
        name="change",
        insert="INSERT INTO change VALUES (?, ?, ?, ?, ?, ?, ?, ?)",
        select="SELECT seq, time_us, scope, aircraft, operation, quantity, from_state, to_state "
        "FROM change ORDER BY seq",
        rows=_change_rows,
    ),
    RecordKind.ACKNOWLEDGEMENT: TypedTable(
        name="acknowledgement",
        insert=_ACKNOWLEDGEMENT_INSERT,
        select=_ACKNOWLEDGEMENT_SELECT,
        rows=_acknowledgement_rows,
    ),
    RecordKind.ACKNOWLEDGEMENT_WITHDRAWN: TypedTable(
        name="acknowledgement",
        insert=_ACKNOWLEDGEMENT_INSERT,
        select=_ACKNOWLEDGEMENT_SELECT,
        rows=_withdrawal_rows,
    ),
    RecordKind.NOTE: TypedTable(
        name="note",
        insert="INSERT INTO note VALUES (?, ?, ?, ?, ?)",
        select="SELECT seq, at_us, about, initials, text FROM note ORDER BY seq",
        rows=_note_rows,
    ),
    RecordKind.CONFIGURATION: TypedTable(
        name="configuration",
        insert="INSERT INTO configuration VALUES (?, ?, ?, ?, ?)",
        select="SELECT seq, at_us, kind, name, sha256 FROM configuration ORDER BY seq",
        rows=_configuration_rows,
    ),
    RecordKind.EPISODE: TypedTable(
        name="episode",
        insert="INSERT INTO episode VALUES (?, ?, ?, ?, ?, ?)",
        select="SELECT seq, start_us, end_us, aircraft, operation, quantity FROM episode ORDER BY seq",
        rows=_episode_rows,
    ),
}
