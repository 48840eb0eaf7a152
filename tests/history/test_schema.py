"""Tables only ever grow; versions move forward in one step or not at all."""

import sqlite3
from collections.abc import Iterator
from contextlib import closing
from pathlib import Path

import pytest

from airfield_board.history.errors import NotAHistory
from airfield_board.history.records import Json, RecordKind
from airfield_board.history.schema import MIGRATIONS, TYPED, expected_objects, migrate, objects_of, version_of
from tests.history.examples import contents, make_example

TABLES = ("journal", "observation", "change", "acknowledgement", "note", "configuration", "episode")


@pytest.fixture
def example(tmp_path: Path) -> Iterator[sqlite3.Connection]:
    """A plain connection of another program: recursive triggers are off."""
    path = make_example(tmp_path)
    with closing(sqlite3.connect(path, isolation_level=None)) as connection:
        yield connection


@pytest.mark.parametrize("table", TABLES)
@pytest.mark.parametrize(
    "statement",
    [
        "UPDATE {table} SET seq = seq",
        "UPDATE OR REPLACE {table} SET seq = 1",
        "DELETE FROM {table}",
        "REPLACE INTO {table} SELECT * FROM {table} LIMIT 1",
        "INSERT OR REPLACE INTO {table} SELECT * FROM {table}",
    ],
)
def test_no_row_is_changed_removed_or_replaced(example: sqlite3.Connection, table: str, statement: str) -> None:
    before = contents(example, table)
    assert before
    with pytest.raises(sqlite3.IntegrityError, match="only added to"):
        example.execute(statement.format(table=table))
    assert contents(example, table) == before


@pytest.mark.parametrize("seq", [0, 17, 19, None])
def test_a_record_has_the_next_number_or_none(example: sqlite3.Connection, seq: int | None) -> None:
    with pytest.raises(sqlite3.IntegrityError, match="one number after the other"):
        example.execute("INSERT INTO journal VALUES (?, 0, 'note', '{}', x'00')", (seq,))
    example.execute("INSERT INTO journal VALUES (18, 0, 'note', '{}', x'00')")


def test_every_table_but_the_memory_is_guarded(example: sqlite3.Connection) -> None:
    tables = {name for (name,) in example.execute("SELECT name FROM sqlite_schema WHERE type = 'table'")}
    assert tables == {*TABLES, "resume"}


def test_a_new_database_is_at_the_newest_version() -> None:
    with closing(sqlite3.connect(":memory:", isolation_level=None)) as connection:
        assert version_of(connection) == 0
        migrate(connection)
        assert version_of(connection) == len(MIGRATIONS)
        assert objects_of(connection) == expected_objects(len(MIGRATIONS))
        migrate(connection)
        assert version_of(connection) == len(MIGRATIONS)


def test_an_older_history_takes_only_the_steps_it_lacks(example: sqlite3.Connection) -> None:
    before = example.execute("SELECT * FROM journal").fetchall()
    version = len(MIGRATIONS)
    migrate(example, (*MIGRATIONS, ("CREATE TABLE later (x)", "INSERT INTO later VALUES (5)")))
    assert example.execute("SELECT x FROM later").fetchall() == [(5,)]
    assert example.execute("PRAGMA user_version").fetchone() == (version + 1,)
    assert example.execute("SELECT * FROM journal").fetchall() == before


def test_a_step_that_fails_leaves_nothing_behind(example: sqlite3.Connection) -> None:
    before = objects_of(example)
    with pytest.raises(sqlite3.OperationalError):
        migrate(example, (*MIGRATIONS, ("CREATE TABLE later (x)", "CREATE TABLE journal (x)")))
    assert objects_of(example) == before
    assert version_of(example) == len(MIGRATIONS)
    assert not example.in_transaction


def test_a_newer_history_is_refused(example: sqlite3.Connection) -> None:
    example.execute(f"PRAGMA user_version = {len(MIGRATIONS) + 1}")
    with pytest.raises(NotAHistory, match="newer version of this program"):
        version_of(example)


@pytest.mark.parametrize("statement", ["CREATE TABLE mine (x)", "PRAGMA user_version = 1", "PRAGMA application_id = 7"])
def test_somebody_elses_database_is_refused(statement: str) -> None:
    with closing(sqlite3.connect(":memory:", isolation_level=None)) as connection:
        connection.execute(statement)
        with pytest.raises(NotAHistory, match="not a history"):
            migrate(connection)


@pytest.mark.parametrize(
    ("kind", "body", "key"),
    [
        (RecordKind.OBSERVATION, {"verdict": "good", "raw": ""}, "verdict"),
        (RecordKind.OBSERVATION, {"raw": ""}, "verdict"),
        (RecordKind.OBSERVATION, {"verdict": "valid"}, "raw"),
        (RecordKind.OBSERVATION, {"verdict": "valid", "raw": "", "time": 1.5}, "time"),
        (RecordKind.OBSERVATION, {"verdict": "valid", "raw": "", "time": 2**63}, "time"),
        (RecordKind.OBSERVATION, {"verdict": "valid", "raw": "", "da_ft": "7"}, "da_ft"),
        (RecordKind.OBSERVATION, {"verdict": "valid", "raw": "", "u_ft": True}, "u_ft"),
        (RecordKind.CHANGE, {"time": 1}, "to"),
        (RecordKind.CHANGE, {"to": "hold"}, "time"),
        (RecordKind.ACKNOWLEDGEMENT, {"initials": "QX"}, "changes"),
        (RecordKind.ACKNOWLEDGEMENT_WITHDRAWN, {"changes": [True]}, "changes"),
        (RecordKind.NOTE, {}, "text"),
        (RecordKind.CONFIGURATION, {"kind": "fleet", "sha256": ""}, "text"),
        (RecordKind.EPISODE, {"start": 1, "aircraft": "a", "operation": "b"}, "quantity"),
    ],
)
def test_a_body_without_what_its_table_needs_is_refused(kind: RecordKind, body: dict[str, Json], key: str) -> None:
    with pytest.raises(ValueError, match=key):
        TYPED[kind].rows(1, 0, body)


def test_rows_say_what_the_body_says() -> None:
    assert TYPED[RecordKind.OBSERVATION].rows(
        4, 9, {"verdict": "superseded", "raw": "", "time": 7, "late": True, "da_ft": 5, "u_ft": 0.5}
    ) == ((4, 7, 3, 1, 5.0, 0.5),)
    assert TYPED[RecordKind.CHANGE].rows(4, 9, {"time": 7, "from": None, "to": "go"}) == (
        (4, 7, "limit", None, None, None, None, "go"),
    )
    assert TYPED[RecordKind.ACKNOWLEDGEMENT].rows(4, 9, {"changes": [3, 2, 3], "initials": "QX"}) == (
        (4, 2, 9, "QX", 0),
        (4, 3, 9, "QX", 0),
    )
    assert TYPED[RecordKind.ACKNOWLEDGEMENT_WITHDRAWN].rows(4, 9, {"changes": (3,)}) == ((4, 3, 9, "", 1),)
    assert TYPED[RecordKind.NOTE].rows(4, 9, {"text": "wet\udcff", "about": {"seq": 3}}) == (
        (4, 9, '{"seq":3}', "", "wet?"),
    )
    assert TYPED[RecordKind.NOTE].rows(4, 9, {"text": "wet"}) == ((4, 9, "", "", "wet"),)
