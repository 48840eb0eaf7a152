"""A history is proved whole, or the first record that does not fit is named with what happened to it."""

import hashlib
import shutil
import sqlite3
from collections.abc import Callable
from contextlib import closing
from pathlib import Path

import pytest

from airfield_board.errors import UserError
from airfield_board.history.chain import Head
from airfield_board.history.connection import Reading
from airfield_board.history.diagnosis import Damage, HistoryFault
from airfield_board.history.errors import NotAHistory
from airfield_board.history.head_file import head_path, read_heads
from airfield_board.history.records import RecordKind
from airfield_board.history.store import History
from airfield_board.history.verify import verify
from tests.history.examples import (
    START,
    as_if_killed,
    folder_state,
    make_example,
    observation,
    open_new,
    record,
    tampering,
)


@pytest.fixture
def example(tmp_path: Path) -> Path:
    return make_example(tmp_path)


def hash_of(path: Path, seq: int) -> str:
    with closing(sqlite3.connect(path)) as connection:
        return str(connection.execute("SELECT hex(hash) FROM journal WHERE seq = ?", (seq,)).fetchone()[0])


def first_fault(path: Path) -> HistoryFault:
    found = verify(path)
    assert not found.ok
    return found.faults[0]


def test_an_untouched_history_is_whole(example: Path) -> None:
    found = verify(example)
    assert found.ok
    assert (found.records, found.faults, found.notes) == (17, (), ())
    assert found.head_hash == hash_of(example, 17).lower()
    assert found.closing_record is None


def test_verifying_makes_and_changes_no_file(tmp_path: Path) -> None:
    closed = make_example(tmp_path / "closed")
    history = History.open(make_example(tmp_path / "live"), now=START, program_version="0.1.0")
    history.append([observation(5)])
    killed = as_if_killed(history, tmp_path / "killed")
    with_shm = as_if_killed(history, tmp_path / "with_shm", with_shm=True)
    for path, records in ((closed, 17), (killed, 19), (with_shm, 19)):
        before = folder_state(path.parent)
        found = verify(path)
        assert (found.ok, found.records) == (True, records)
        assert folder_state(path.parent) == before
    live = history.path
    before = folder_state(live.parent)
    assert (verify(live).ok, verify(live).records) == (True, 19)
    after = folder_state(live.parent)
    assert after.keys() == before.keys()
    assert [name for name in before if before[name] != after[name]] in ([], ["history.db-shm"])
    history.close()


def test_records_of_a_killed_recorder_count(tmp_path: Path) -> None:
    history = open_new(tmp_path)
    history.append([observation(minute) for minute in range(50)])
    path = as_if_killed(history, tmp_path / "killed")
    history.close()
    assert verify(path).records == 51
    reader = History.open_read_only(path)
    assert reader.count == 51
    reader.close()


def test_a_lost_write_ahead_file_is_a_lost_end(tmp_path: Path) -> None:
    make_example(tmp_path)
    history = open_new(tmp_path)
    history.append([observation(5)])
    path = as_if_killed(history, tmp_path / "killed")
    history.close()
    path.with_name("history.db-wal").unlink()
    fault = first_fault(path)
    assert (fault.seq, fault.damage) == (18, Damage.CUT)
    assert fault.message == "the end was cut off: the history has 17 records, history.db.head says 19"


EDITS = [
    ("UPDATE journal SET body = replace(body, '31.0', '11.0') WHERE seq = 4", 4),
    ("UPDATE journal SET at_us = at_us + 1 WHERE seq = 9", 9),
    ("UPDATE journal SET kind = 'clock' WHERE seq = 14", 14),
    ("UPDATE journal SET hash = zeroblob(32) WHERE seq = 1", 1),
    ("UPDATE journal SET body = body || ' ' WHERE seq = 17", 17),
    ("UPDATE journal SET body = CAST(x'5bff5d' AS TEXT) WHERE seq = 12", 12),
]


@pytest.mark.parametrize(("statement", "seq"), EDITS)
def test_a_changed_record_is_named(example: Path, statement: str, seq: int) -> None:
    with tampering(example) as connection:
        connection.execute(statement)
    fault = first_fault(example)
    assert (fault.seq, fault.damage) == (seq, Damage.CHANGED)
    assert f"record {seq} was changed" in fault.message
    assert str(fault) == fault.message


def rehash(connection: sqlite3.Connection, first: int, last: int) -> None:
    """Make the hashes of some records anew, as a forger who knows the recipe would."""
    previous = connection.execute("SELECT hash FROM journal WHERE seq = ?", (first - 1,)).fetchone()[0]
    for seq in range(first, last + 1):
        at_us, kind, body = connection.execute("SELECT at_us, kind, body FROM journal WHERE seq = ?", (seq,)).fetchone()
        previous = hashlib.sha256(previous + f"{seq} {at_us} {kind}\n{body}".encode()).digest()
        connection.execute("UPDATE journal SET hash = ? WHERE seq = ?", (previous, seq))


def test_a_changed_record_with_its_hash_made_anew_breaks_the_next_link(example: Path) -> None:
    with tampering(example) as connection:
        connection.execute("UPDATE journal SET body = replace(body, 'late', 'fine') WHERE seq = 14")
        rehash(connection, 14, 14)
    fault = first_fault(example)
    assert (fault.seq, fault.damage) == (15, Damage.CHANGED)
    assert "or record 14 was changed and its hash made anew" in fault.message


def test_a_whole_chain_made_anew_shows_against_the_second_place(example: Path) -> None:
    closing_hash = hash_of(example, 16)
    with tampering(example) as connection:
        connection.execute("UPDATE journal SET body = replace(body, 'late', 'fine') WHERE seq = 14")
        rehash(connection, 14, 17)
        connection.execute("DELETE FROM resume")
    found = verify(example)
    assert [fault.damage for fault in found.faults] == [Damage.REWRITTEN]
    head_path(example).unlink()
    without = verify(example)
    assert without.ok
    assert without.notes == ("there is no history.db.head: a tail cut off would not be seen",)
    against = verify(example, closing_hash)
    assert [fault.damage for fault in against.faults] == [Damage.CLOSING_HASH]


def delete(connection: sqlite3.Connection, first: int, last: int) -> None:
    for table in ("journal", "observation", "change", "acknowledgement", "note", "configuration", "episode"):
        connection.execute(f"DELETE FROM {table} WHERE seq BETWEEN ? AND ?", (first, last))  # noqa: S608


def renumber(connection: sqlite3.Connection, first: int, shift: int) -> None:
    for table in ("journal", "observation", "change", "acknowledgement", "note", "configuration", "episode"):
        numbers = [seq for (seq,) in connection.execute(f"SELECT DISTINCT seq FROM {table} WHERE seq >= ?", (first,))]  # noqa: S608
        for seq in sorted(numbers, reverse=shift > 0):
            connection.execute(f"UPDATE {table} SET seq = ? WHERE seq = ?", (seq + shift, seq))  # noqa: S608


@pytest.mark.parametrize(
    ("first", "last", "words"),
    [(1, 1, "record 1 dropped: it is missing"), (5, 5, "record 5"), (5, 8, "records 5 to 8 dropped: they are missing")],
)
def test_dropped_records_are_named(example: Path, first: int, last: int, words: str) -> None:
    with tampering(example) as connection:
        delete(connection, first, last)
    fault = first_fault(example)
    assert (fault.seq, fault.damage) == (first, Damage.DROPPED)
    assert words in fault.message


@pytest.mark.parametrize(("first", "last"), [(5, 5), (5, 8), (1, 2)])
def test_dropped_records_are_named_where_the_rest_was_numbered_anew(example: Path, first: int, last: int) -> None:
    with tampering(example) as connection:
        delete(connection, first, last)
        renumber(connection, last + 1, first - last - 1)
    fault = first_fault(example)
    assert (fault.seq, fault.damage) == (first, Damage.DROPPED)
    assert "numbered anew" in fault.message


def test_the_last_but_one_dropped_and_the_last_numbered_anew_is_a_misfit(example: Path) -> None:
    with tampering(example) as connection:
        delete(connection, 16, 16)
        renumber(connection, 17, -1)
    fault = first_fault(example)
    assert fault.seq == 16


@pytest.mark.parametrize("how_many", [1, 3])
def test_added_records_are_named(example: Path, how_many: int) -> None:
    with tampering(example) as connection:
        renumber(connection, 6, how_many)
        for seq in range(6, 6 + how_many):
            connection.execute("INSERT INTO journal VALUES (?, 0, 'message', '{}', zeroblob(32))", (seq,))
    fault = first_fault(example)
    assert (fault.seq, fault.damage) == (6, Damage.ADDED)
    assert ("record 6 added" if how_many == 1 else "records 6 to 8 added") in fault.message


def test_a_record_before_the_first_was_added(example: Path) -> None:
    with tampering(example) as connection:
        connection.execute("INSERT INTO journal VALUES (0, 0, 'message', '{}', zeroblob(32))")
    fault = first_fault(example)
    assert (fault.seq, fault.damage) == (0, Damage.ADDED)


def test_a_well_made_record_added_at_the_end_shows_against_the_second_place(example: Path) -> None:
    with tampering(example) as connection:
        connection.execute("INSERT INTO journal VALUES (18, 0, 'message', '{}', zeroblob(32))")
        rehash(connection, 18, 18)
    fault = first_fault(example)
    assert (fault.seq, fault.damage) == (18, Damage.ADDED)
    assert "added at the end" in fault.message


def swap(connection: sqlite3.Connection, one: int, other: int) -> None:
    for old, new in ((one, -1), (other, one), (-1, other)):
        connection.execute("UPDATE journal SET seq = ? WHERE seq = ?", (new, old))


def move_to_end(connection: sqlite3.Connection, seq: int, free: int) -> None:
    connection.execute("UPDATE journal SET seq = ? WHERE seq = ?", (free, seq))


def rotate(connection: sqlite3.Connection, seq: int, to: int) -> None:
    connection.execute("UPDATE journal SET seq = -1 WHERE seq = ?", (seq,))
    for shifted in range(seq + 1, to + 1):
        connection.execute("UPDATE journal SET seq = ? WHERE seq = ?", (shifted - 1, shifted))
    connection.execute("UPDATE journal SET seq = ? WHERE seq = -1", (to,))


def rotate_back(connection: sqlite3.Connection, seq: int, to: int) -> None:
    connection.execute("UPDATE journal SET seq = -1 WHERE seq = ?", (to,))
    for shifted in range(to - 1, seq - 1, -1):
        connection.execute("UPDATE journal SET seq = ? WHERE seq = ?", (shifted + 1, shifted))
    connection.execute("UPDATE journal SET seq = ? WHERE seq = -1", (seq,))


def swap_contents(connection: sqlite3.Connection, one: int, other: int) -> None:
    rows = {
        seq: connection.execute("SELECT at_us, kind, body FROM journal WHERE seq = ?", (seq,)).fetchone()
        for seq in (one, other)
    }
    for seq, source in ((one, other), (other, one)):
        connection.execute("UPDATE journal SET at_us = ?, kind = ?, body = ? WHERE seq = ?", (*rows[source], seq))


@pytest.mark.parametrize(
    ("spoil", "one", "other"),
    [
        (swap, 5, 6),
        (swap, 4, 9),
        (swap, 16, 17),
        (swap_contents, 4, 5),
        (swap_contents, 2, 15),
        (move_to_end, 5, 18),
        (rotate, 5, 9),
        (rotate_back, 5, 9),
    ],
)
def test_reordered_records_are_named(
    example: Path, spoil: Callable[[sqlite3.Connection, int, int], None], one: int, other: int
) -> None:
    with tampering(example) as connection:
        spoil(connection, one, other)
    fault = first_fault(example)
    assert (fault.seq, fault.damage) == (one, Damage.REORDERED)
    assert "reordered" in fault.message


@pytest.mark.parametrize("cut", [1, 5, 16, 17])
def test_a_tail_cut_off_is_seen(example: Path, cut: int) -> None:
    with tampering(example) as connection:
        delete(connection, 18 - cut, 17)
        connection.execute("DELETE FROM resume")
    found = verify(example)
    assert [(fault.seq, fault.damage) for fault in found.faults] == [(18 - cut, Damage.CUT)]
    assert found.records == 17 - cut
    assert len(found.head_hash) == (0 if cut == 17 else 64)


TYPED_EDITS = [
    ("UPDATE observation SET density_altitude_ft = 5000 WHERE seq = 4", 4, "record 4 was changed in the table obs"),
    ("UPDATE observation SET verdict = 1 WHERE seq = 5", 5, "record 5 was changed in the table observation"),
    ("UPDATE observation SET time_us = 0 WHERE seq = 8", 8, "record 8 was changed in the table observation"),
    ("DELETE FROM observation WHERE seq = 7", 7, "record 7 is missing from the table observation"),
    ("DELETE FROM observation WHERE seq = 16", 16, "record 16 is missing from the table observation"),
    ("INSERT INTO observation VALUES (6, 0, 0, 0, 1, 1)", 6, "record 6 has no place in the table observation"),
    ("INSERT INTO observation VALUES (99, 0, 0, 0, 1, 1)", 99, "record 99 has no place in the table observation"),
    ("UPDATE change SET to_state = 'go'", 6, "record 6 was changed in the table change"),
    ("UPDATE acknowledgement SET initials = 'ZY' WHERE seq = 9", 9, "changed in the table acknowledgement"),
    ("UPDATE acknowledgement SET change_seq = 5 WHERE seq = 10", 10, "changed in the table acknowledgement"),
    ("INSERT INTO acknowledgement VALUES (9, 7, 0, 'QX', 0)", 9, "record 9 has no place in the table acknowledgement"),
    ("UPDATE note SET text = 'dry'", 11, "changed in the table note"),
    ("UPDATE configuration SET sha256 = ''", 2, "changed in the table configuration"),
    ("DELETE FROM episode", 12, "missing from the table episode"),
]


@pytest.mark.parametrize(("statement", "seq", "words"), TYPED_EDITS)
def test_a_typed_table_that_disagrees_is_named(example: Path, statement: str, seq: int, words: str) -> None:
    with tampering(example) as connection:
        connection.execute(statement)
    fault = first_fault(example)
    assert (fault.seq, fault.damage) == (seq, Damage.TABLE)
    assert words in fault.message


@pytest.mark.parametrize(
    ("statement", "words"),
    [
        ("DROP TRIGGER journal_keeps_rows", "journal_keeps_rows of the database's structure is missing"),
        ("CREATE TABLE mine (x)", "mine of the database's structure is not of this program"),
        ("DROP INDEX observation_time", "observation_time of the database's structure is missing"),
    ],
)
def test_a_changed_structure_is_named(example: Path, statement: str, words: str) -> None:
    with closing(sqlite3.connect(example)) as connection:
        connection.execute(statement)
        connection.commit()
    found = verify(example)
    assert [fault.damage for fault in found.faults] == [Damage.SCHEMA]
    assert words in found.faults[0].message


def test_a_trigger_made_toothless_is_named(example: Path) -> None:
    with closing(sqlite3.connect(example)) as connection:
        connection.execute("DROP TRIGGER journal_keeps_rows")
        connection.execute("CREATE TRIGGER journal_keeps_rows BEFORE DELETE ON journal BEGIN SELECT 1; END")
        connection.commit()
    assert "journal_keeps_rows of the database's structure is changed" in first_fault(example).message


def test_an_index_that_hides_rows_is_seen(example: Path) -> None:
    with closing(sqlite3.connect(example, isolation_level=None)) as connection:
        (sql,) = connection.execute("SELECT sql FROM sqlite_schema WHERE name = 'observation_time'").fetchone()
        connection.execute("PRAGMA writable_schema = ON")
        connection.execute("UPDATE sqlite_schema SET sql = ? WHERE name = 'observation_time'", (sql + " WHERE 0",))
    with closing(sqlite3.connect(example, isolation_level=None)) as connection:
        connection.execute("REINDEX observation_time")
        connection.execute("PRAGMA writable_schema = ON")
        connection.execute("UPDATE sqlite_schema SET sql = ? WHERE name = 'observation_time'", (sql,))
    fault = first_fault(example)
    assert fault.damage is Damage.UNREADABLE
    assert "observation_time" in fault.message


@pytest.mark.parametrize(
    "statement",
    [
        "UPDATE resume SET value = replace(value, '1', '2')",
        "UPDATE resume SET hash = zeroblob(32)",
        "UPDATE resume SET seq = 16",
        "UPDATE resume SET seq = 999",
    ],
)
def test_a_memory_that_does_not_fit_is_named(example: Path, statement: str) -> None:
    with closing(sqlite3.connect(example)) as connection:
        connection.execute(statement)
        connection.commit()
    found = verify(example)
    assert [fault.damage for fault in found.faults] == [Damage.MEMORY]


def test_an_earlier_closing_hash_is_good_to_its_record(example: Path) -> None:
    for seq in (1, 9, 17):
        written = hash_of(example, seq)
        assert verify(example, written.upper()).closing_record == seq
        assert verify(example, f" {written[:32].lower()} {written[32:].lower()}\n").ok


def test_a_closing_hash_of_no_record_is_a_fault(example: Path) -> None:
    found = verify(example, "0" * 64)
    assert [fault.damage for fault in found.faults] == [Damage.CLOSING_HASH]
    assert found.records == 17


def test_a_closing_hash_behind_the_first_fault_does_not_count(example: Path) -> None:
    written = hash_of(example, 12)
    with tampering(example) as connection:
        connection.execute("UPDATE journal SET body = replace(body, '31.0', '11.0') WHERE seq = 4")
    found = verify(example, written)
    assert [fault.damage for fault in found.faults] == [Damage.CHANGED, Damage.CLOSING_HASH]
    assert found.closing_record is None


@pytest.mark.parametrize("text", ["", "12", "g" * 64, "0" * 63, "0" * 66])
def test_what_is_no_closing_hash_is_said(example: Path, text: str) -> None:
    with pytest.raises(UserError, match="64 hexadecimal digits"):
        verify(example, text)


@pytest.mark.parametrize("text", [b"", b"[]\n", b"[1]\n", b'{"records": 17}', b"\xff\xfe"])
def test_a_spoiled_second_place_is_a_fault(example: Path, text: bytes) -> None:
    head_path(example).write_bytes(text)
    found = verify(example)
    assert [fault.damage for fault in found.faults] == [Damage.SECOND_PLACE]
    assert found.records == 17


def test_a_well_hashed_record_that_makes_no_sense_is_named(example: Path) -> None:
    with tampering(example) as connection:
        connection.execute("UPDATE journal SET kind = 'rumour' WHERE seq = 14")
        connection.execute("UPDATE journal SET body = '[1]' WHERE seq = 16")
        rehash(connection, 14, 17)
    assert "record 14 is not of this program's making" in first_fault(example).message
    with tampering(example) as connection:
        connection.execute("UPDATE journal SET kind = 'message' WHERE seq = 14")
        rehash(connection, 14, 17)
    assert "record 16 is not of this program's making" in first_fault(example).message


def test_what_is_no_history_is_said_unless_a_second_place_shows_it_was_one(tmp_path: Path, example: Path) -> None:
    with pytest.raises(UserError, match="no history here"):
        verify(tmp_path / "none.db")
    other = tmp_path / "other.txt"
    other.write_text("not a database at all, just a text\n" * 30)
    with pytest.raises(NotAHistory):
        verify(other)
    example.write_bytes(b"\0" * 5000)
    found = verify(example)
    assert [fault.damage for fault in found.faults] == [Damage.UNREADABLE]
    assert (found.records, found.head_hash) == (0, "")


def test_a_truncated_file_is_unreadable(example: Path) -> None:
    raw = example.read_bytes()
    for pages in (1, 5, len(raw) // 4096 - 1):
        example.write_bytes(raw[: 4096 * pages])
        found = verify(example)
        assert not found.ok
        assert found.faults[0].message


def test_progress_is_told(tmp_path: Path) -> None:
    history = open_new(tmp_path)
    history.append([record(RecordKind.NOTE, text="x") for _ in range(10_500)])
    history.close()
    told: list[tuple[int, int]] = []
    verify(tmp_path / "history.db", progress=lambda done, total: told.append((done, total)))
    assert told == [(10_000, 10_501), (10_501, 10_501)]


def test_a_recorder_that_starts_meanwhile_does_not_make_a_false_fault(
    example: Path, monkeypatch: pytest.MonkeyPatch
) -> None:
    opened: list[History] = []
    real = Reading.disturbed

    def start_once(reading: Reading) -> bool:
        if not opened:
            opened.append(History.open(example, now=START, program_version="0.1.0"))
        return real(reading)

    monkeypatch.setattr(Reading, "disturbed", start_once)
    found = verify(example)
    opened[0].close()
    assert (found.ok, found.records) == (True, 18)


def test_a_recorder_that_writes_meanwhile_does_not_make_a_false_fault(
    tmp_path: Path, monkeypatch: pytest.MonkeyPatch
) -> None:
    history = open_new(tmp_path)
    left = [3]

    def busy(path: Path) -> tuple[Head, ...] | None:
        heads = read_heads(path)
        if left[0]:
            left[0] -= 1
            history.append([observation(left[0])])
        return heads

    monkeypatch.setattr("airfield_board.history.verify.read_heads", busy)
    found = verify(tmp_path / "history.db")
    assert (found.ok, found.records) == (True, 4)
    left[0] = 10_000
    never_still = verify(tmp_path / "history.db")
    assert never_still.ok
    assert never_still.notes == ("the recorder never paused: the end was not compared with history.db.head",)
    history.close()


def test_a_copy_of_the_files_verifies_anywhere(example: Path, tmp_path: Path) -> None:
    (tmp_path / "elsewhere").mkdir()
    copy = tmp_path / "elsewhere" / "renamed #1 ?.db"
    shutil.copyfile(example, copy)
    shutil.copyfile(head_path(example), head_path(copy))
    assert verify(copy).ok
