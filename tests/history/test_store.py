"""Recording: all or nothing, in the order given, and going on after a failure."""

import math
import os
import sqlite3
from collections.abc import Sequence
from contextlib import closing
from datetime import datetime
from pathlib import Path

import pytest

from airfield_board.errors import UserError
from airfield_board.history.chain import Head
from airfield_board.history.diagnosis import Damage
from airfield_board.history.errors import HistoryDamaged, HistoryLocked, NotAHistory, NotRecorded
from airfield_board.history.head_file import head_path, read_heads, write_heads
from airfield_board.history.records import Record, RecordKind
from airfield_board.history.store import History
from airfield_board.history.verify import verify
from tests.history.examples import (
    MINUTE,
    START,
    change,
    contents,
    folder_state,
    make_example,
    observation,
    one_of_each,
    open_new,
    record,
    tampering,
)

NOTE = record(RecordKind.NOTE, 1, about="day", text="wet sensor", initials="QX")


def test_a_new_history_begins_with_the_start(tmp_path: Path) -> None:
    history = open_new(tmp_path)
    (start,) = history.records()
    history.close()
    assert (start.seq, start.kind, start.at) == (1, RecordKind.START, START)
    assert start.body["program_version"] == "0.1.0"
    assert start.body["sqlite_version"] == sqlite3.sqlite_version
    assert start.body["journal_mode"] == "wal"
    assert start.body["pid"] == os.getpid()


def test_records_come_back_in_order_after_opening_again(tmp_path: Path) -> None:
    history = open_new(tmp_path)
    assert history.append(one_of_each()) == tuple(range(2, 18))
    history.close()
    again = History.open(tmp_path / "history.db", now=START + MINUTE, program_version="0.1.1")
    found = list(again.records())
    again.close(now=START + 2 * MINUTE)
    assert [entry.kind for entry in found] == [
        RecordKind.START,
        *(entry.kind for entry in one_of_each()),
        RecordKind.START,
    ]
    assert [entry.at for entry in found[1:17]] == [entry.at for entry in one_of_each()]
    assert found[3].body == one_of_each()[2].body
    assert found[10].body == one_of_each()[9].body
    assert found[-1].body["program_version"] == "0.1.1"
    with closing(sqlite3.connect(tmp_path / "history.db")) as connection:
        assert contents(connection, "journal")[-1][2] == "stop"


def test_what_was_appended_is_seen_by_others_at_once(tmp_path: Path) -> None:
    history = open_new(tmp_path)
    history.append([NOTE])
    reader = History.open_read_only(tmp_path / "history.db")
    assert reader.count == 2
    history.append([observation(0), NOTE])
    assert reader.count == history.count == 4
    assert reader.head_hash == history.head_hash
    reader.close()
    history.close()


def test_commits_are_made_durable(tmp_path: Path) -> None:
    history = open_new(tmp_path)
    # 2 is FULL: https://www.sqlite.org/pragma.html#pragma_synchronous
    assert history._rows("PRAGMA synchronous") == [(2,)]
    assert history._rows("PRAGMA recursive_triggers") == [(1,)]
    history.close()


def test_one_bad_record_of_several_leaves_none(tmp_path: Path) -> None:
    history = open_new(tmp_path)
    bad = [
        record(RecordKind.NOTE, 1, about="day"),
        record(RecordKind.MESSAGE, 1, value=math.nan),
        observation(1, verdict="fine"),
        observation(1, time=2**70),
        Record(kind="rumour", at=START, body={}),  # type: ignore[arg-type]  # the point of the test
        Record(kind=RecordKind.NOTE, at=datetime(2026, 7, 16), body={"text": ""}),  # noqa: DTZ001 - the point
    ]
    for entry in bad:
        with pytest.raises((ValueError, TypeError)):
            history.append([NOTE, entry])
        assert history.count == 1
    assert history.append([NOTE]) == (2,)
    history.close()
    assert verify(tmp_path / "history.db").ok


def test_nothing_to_append_is_no_record(tmp_path: Path) -> None:
    history = open_new(tmp_path)
    assert history.append([]) == ()
    assert history.append([], resume={"x": 1}) == ()
    assert history.resume() == (1, {"x": 1})
    history.close()
    assert verify(tmp_path / "history.db").ok


def test_a_full_disk_is_said_and_recording_goes_on_when_there_is_room(tmp_path: Path) -> None:
    history = open_new(tmp_path)
    (pages,) = history._rows("PRAGMA page_count")[0]
    history._rows(f"PRAGMA max_page_count = {pages}")
    with pytest.raises(NotRecorded, match="the disk is full"):
        history.append([NOTE, record(RecordKind.NOTE, 2, text="x" * 100_000)], resume={"x": 1})
    assert history.count == 1
    assert history.resume() is None
    history._rows("PRAGMA max_page_count = 100000")
    assert history.append([NOTE], resume={"x": 2}) == (2,)
    assert history.resume() == (2, {"x": 2})
    history.close()
    assert verify(tmp_path / "history.db").ok


def test_a_locked_database_is_said_and_recording_goes_on_afterwards(tmp_path: Path) -> None:
    history = open_new(tmp_path)
    with closing(sqlite3.connect(tmp_path / "history.db", isolation_level=None)) as other:
        other.execute("BEGIN IMMEDIATE")
        with pytest.raises(NotRecorded, match="another program holds it locked"):
            history.append([NOTE])
        other.execute("ROLLBACK")
    assert history.append([NOTE]) == (2,)
    history.close()


def test_a_read_only_database_is_said(tmp_path: Path) -> None:
    history = open_new(tmp_path)
    history._rows("PRAGMA query_only = ON")
    with pytest.raises(NotRecorded, match="read-only"):
        history.append([NOTE])
    history._rows("PRAGMA query_only = OFF")
    assert history.append([NOTE]) == (2,)
    history.close()


def test_without_the_second_place_nothing_is_recorded(tmp_path: Path, monkeypatch: pytest.MonkeyPatch) -> None:
    history = open_new(tmp_path)

    def full(path: Path, heads: Sequence[Head], *, durable: bool) -> None:
        raise OSError(28, "No space left on device")

    with monkeypatch.context() as patch:
        patch.setattr("airfield_board.history.store.write_heads", full)
        with pytest.raises(NotRecorded, match="No space left"):
            history.append([NOTE])
    assert history.count == 1
    assert history.append([NOTE]) == (2,)
    history.close()
    assert verify(tmp_path / "history.db").ok


def test_a_start_that_cannot_be_recorded_leaves_the_lock_free(tmp_path: Path) -> None:
    (tmp_path / "history.db.head.new").mkdir()
    with pytest.raises(NotRecorded, match=r"history\.db"):
        open_new(tmp_path)
    (tmp_path / "history.db.head.new").rmdir()
    history = open_new(tmp_path)
    assert history.count == 1
    history.close()


@pytest.mark.parametrize("step", ["announced", "committed"])
def test_ended_between_announcement_and_confirmation_nothing_looks_cut_off(
    tmp_path: Path, monkeypatch: pytest.MonkeyPatch, step: str
) -> None:
    history = open_new(tmp_path)
    history.append([NOTE])
    real = write_heads

    def ending(path: Path, heads: tuple[Head, ...], *, durable: bool) -> None:
        announcing = len(heads) == 2
        if announcing:
            real(path, heads, durable=durable)
        if announcing == (step == "announced"):
            raise KeyboardInterrupt

    with monkeypatch.context() as patch:
        patch.setattr("airfield_board.history.store.write_heads", ending)
        with pytest.raises(KeyboardInterrupt):
            history.append([NOTE])
    history.close()
    heads = read_heads(tmp_path / "history.db")
    assert heads is not None
    assert [head.records for head in heads] == [2, 3]
    found = verify(tmp_path / "history.db")
    assert (found.ok, found.records) == (True, 2 if step == "announced" else 3)
    again = History.open(tmp_path / "history.db", now=START, program_version="0.1.0")
    kinds = [entry.kind for entry in again.records()]
    again.close()
    assert RecordKind.MESSAGE not in kinds
    assert verify(tmp_path / "history.db").ok


def test_a_confirmation_that_cannot_be_written_does_not_unrecord(
    tmp_path: Path, monkeypatch: pytest.MonkeyPatch
) -> None:
    history = open_new(tmp_path)
    real = write_heads

    def only_announcing(path: Path, heads: tuple[Head, ...], *, durable: bool) -> None:
        if len(heads) == 1:
            raise OSError(28, "No space left on device")
        real(path, heads, durable=durable)

    monkeypatch.setattr("airfield_board.history.store.write_heads", only_announcing)
    assert history.append([NOTE]) == (2,)
    assert history.append([NOTE]) == (3,)
    history.close()
    assert verify(tmp_path / "history.db").ok


def test_another_programs_row_stops_recording_until_opened_again(tmp_path: Path) -> None:
    history = open_new(tmp_path)
    with closing(sqlite3.connect(tmp_path / "history.db", isolation_level=None)) as other:
        other.execute("INSERT INTO journal VALUES (2, 0, 'note', '{}', x'00')")
    with pytest.raises(NotRecorded, match="another program has changed the history"):
        history.append([NOTE])
    history.close()
    again = History.open(tmp_path / "history.db", now=START, program_version="0.1.0")
    assert again.append([NOTE]) == (5,)
    again.close()
    assert not verify(tmp_path / "history.db").ok


def test_only_one_records_and_the_second_reads(tmp_path: Path) -> None:
    history = open_new(tmp_path)
    with pytest.raises(HistoryLocked, match=rf"process {os.getpid()}\) since 2026-07-16T12:00:00Z"):
        open_new(tmp_path)
    reader = History.open_read_only(tmp_path / "history.db")
    assert reader.read_only
    assert not history.read_only
    with pytest.raises(NotRecorded, match="read-only"):
        reader.append([NOTE])
    reader.close(now=START)
    history.close()
    again = open_new(tmp_path)
    assert again.count == 2
    again.close()


def test_closed_twice_is_closed_and_records_nothing(tmp_path: Path) -> None:
    history = open_new(tmp_path)
    history.close(now=START)
    history.close(now=START)
    with pytest.raises(NotRecorded, match="closed"):
        history.append([NOTE])
    with pytest.raises(UserError):
        assert history.count
    assert verify(tmp_path / "history.db").records == 2


def test_a_stop_that_cannot_be_recorded_still_closes(tmp_path: Path) -> None:
    history = open_new(tmp_path)
    history._rows("PRAGMA query_only = ON")
    with pytest.raises(NotRecorded):
        history.close(now=START)
    open_new(tmp_path).close()


@pytest.mark.parametrize("opening", ["record", "read"])
def test_what_is_no_history_is_refused_and_left_as_it_is(tmp_path: Path, opening: str) -> None:
    text = tmp_path / "text.db"
    text.write_text("fleet: of somebody else\n" * 50)
    other = tmp_path / "other.db"
    with closing(sqlite3.connect(other)) as connection:
        connection.execute("CREATE TABLE mine (x)")
        connection.commit()
    newer = make_example(tmp_path / "newer")
    with closing(sqlite3.connect(newer)) as connection:
        connection.execute("PRAGMA user_version = 99")
        connection.execute("PRAGMA wal_checkpoint(TRUNCATE)")
    for path, words in ((text, "not a history"), (other, "not a history"), (newer, "newer version")):
        before = path.read_bytes()
        with pytest.raises(NotAHistory, match=words) as refused:
            open_either(path, opening)
        assert str(path) in str(refused.value)
        assert path.read_bytes() == before


def open_either(path: Path, opening: str) -> History:
    if opening == "read":
        return History.open_read_only(path)
    return History.open(path, now=START, program_version="0.1.0", create=False)


@pytest.mark.parametrize("opening", ["record", "read"])
def test_a_missing_file_is_said_and_not_made(tmp_path: Path, opening: str) -> None:
    with pytest.raises(UserError, match="no history here"):
        open_either(tmp_path / "none.db", opening)
    assert list(tmp_path.iterdir()) == []


def test_a_missing_folder_is_said(tmp_path: Path) -> None:
    with pytest.raises(UserError, match="does not exist"):
        open_new(tmp_path / "none")
    (tmp_path / "history.db").mkdir()
    with pytest.raises(UserError, match="a folder"):
        open_new(tmp_path)


def test_a_folder_in_which_nothing_can_be_made_is_said(tmp_path: Path) -> None:
    (tmp_path / "history.db.lock").mkdir()
    with pytest.raises(UserError, match="cannot record here"):
        open_new(tmp_path)


def test_an_empty_file_is_no_history_to_read_but_one_to_begin(tmp_path: Path) -> None:
    (tmp_path / "history.db").touch()
    with pytest.raises(NotAHistory, match="empty"):
        History.open_read_only(tmp_path / "history.db")
    history = open_new(tmp_path)
    assert history.count == 1
    history.close()


def test_a_damaged_file_is_said_and_the_lock_is_free_again(tmp_path: Path) -> None:
    path = make_example(tmp_path)
    raw = bytearray(path.read_bytes())
    raw[4096:] = b"\xa5" * (len(raw) - 4096)
    path.write_bytes(raw)
    for _ in range(2):
        with pytest.raises((HistoryDamaged, NotRecorded), match="damaged"):
            History.open(path, now=START, program_version="0.1.0")


def test_a_damaged_record_is_said_when_read(tmp_path: Path) -> None:
    path = make_example(tmp_path)
    with tampering(path) as connection:
        connection.execute("UPDATE journal SET kind = 'rumour' WHERE seq = 3")
        connection.execute("UPDATE journal SET body = '{' WHERE seq = 5")
    history = History.open_read_only(path)
    for seq in (3, 5):
        with pytest.raises(HistoryDamaged, match=f"record {seq} cannot be read"):
            list(history.records(seq, seq))
    history.close()


def test_a_history_that_lost_its_end_says_so_for_ever(tmp_path: Path) -> None:
    path = make_example(tmp_path)
    with tampering(path) as connection:
        for table in ("journal", "observation"):
            connection.execute(f"DELETE FROM {table} WHERE seq >= 16")  # noqa: S608 - the names stand here
    history = History.open(path, now=START, program_version="0.1.0")
    message, start = history.records(16)
    history.close()
    assert (message.kind, start.kind) == (RecordKind.MESSAGE, RecordKind.START)
    assert message.body["text"] == (
        "the history had 15 records, but history.db.head says 17: records were cut off, added or changed while "
        "no recorder ran"
    )
    found = verify(path)
    # The memory was taken at the old record 17.
    assert [fault.damage for fault in found.faults] == [Damage.CUT, Damage.MEMORY]
    assert found.faults[0].seq == 16
    assert "the history had 15 records" in found.faults[0].message


@pytest.mark.parametrize("spoiled", [None, b"[]\n", b'[{"records": 17}]\n', b"\xff", b"[[[["])
def test_a_second_place_that_was_lost_or_spoiled_is_recorded(tmp_path: Path, spoiled: bytes | None) -> None:
    path = make_example(tmp_path)
    if spoiled is None:
        head_path(path).unlink()
    else:
        head_path(path).write_bytes(spoiled)
    history = History.open(path, now=START, program_version="0.1.0")
    message, _ = history.records(18)
    history.close()
    assert message.body["topic"] == "history"
    assert "history.db.head" in str(message.body["text"])
    found = verify(path)
    assert found.ok
    assert len(found.notes) == 1
    assert "record 18" in found.notes[0]


def test_opening_to_read_makes_and_changes_no_file(tmp_path: Path) -> None:
    path = make_example(tmp_path)
    before = folder_state(tmp_path)
    history = History.open_read_only(path)
    assert len(list(history.records())) == 17
    assert history.resume() is not None
    history.close()
    assert folder_state(tmp_path) == before


def test_the_order_of_arrival_counts_not_the_clock(tmp_path: Path) -> None:
    history = open_new(tmp_path)
    history.append([record(RecordKind.NOTE, 30, text="later"), record(RecordKind.NOTE, 10, text="earlier")])
    assert [entry.body["text"] for entry in history.records(2)] == ["later", "earlier"]
    history.close()
    assert verify(tmp_path / "history.db").ok


def test_the_memory_comes_back_with_the_record_it_was_taken_at(tmp_path: Path) -> None:
    history = open_new(tmp_path)
    assert history.resume() is None
    memory = {"run": [0.1 + 0.2, None, True], "name": "é"}
    history.append([observation(0), change(0, "hold")], resume=memory)
    assert history.resume() == (3, memory)
    # Notes, acknowledgements, starts and stops judge nothing.
    history.append([NOTE, record(RecordKind.ACKNOWLEDGEMENT, 1, changes=[3], initials="QX")])
    history.close(now=START)
    again = open_new(tmp_path)
    assert again.resume() == (3, memory)
    again.append([observation(1)], resume={"newer": 1})
    assert again.resume() == (8, {"newer": 1})
    again.append([observation(2)])
    assert again.resume() is None
    again.close()


@pytest.mark.parametrize(
    "entry",
    [
        entry
        for entry in one_of_each()
        if entry.kind
        in {
            RecordKind.OBSERVATION,
            RecordKind.CHANGE,
            RecordKind.CONFIGURATION,
            RecordKind.SETTINGS_ACCEPTED,
            RecordKind.EPISODE,
            RecordKind.CLOCK,
        }
    ],
    ids=lambda entry: str(entry.kind),
)
def test_the_memory_is_forgotten_once_something_judged_came_after_it(tmp_path: Path, entry: Record) -> None:
    history = open_new(tmp_path)
    history.append([NOTE], resume={"x": 1})
    history.append([entry])
    assert history.resume() is None
    history.close()


@pytest.mark.parametrize(
    "statement",
    [
        "UPDATE resume SET value = '{\"x\":2}'",
        "UPDATE resume SET value = CAST(x'ff' AS TEXT)",
        "UPDATE resume SET hash = zeroblob(32)",
        "UPDATE resume SET seq = 1",
        "UPDATE resume SET seq = 0",
        "UPDATE resume SET seq = 99",
        "DELETE FROM resume",
    ],
)
def test_a_memory_that_does_not_fit_its_record_is_not_used(tmp_path: Path, statement: str) -> None:
    history = open_new(tmp_path)
    history.append([NOTE], resume={"x": 1})
    history._rows(statement)
    assert history.resume() is None
    history.close()
