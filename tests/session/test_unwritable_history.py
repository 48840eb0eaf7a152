"""A history that cannot be written for a while: the board goes on and says so, and nothing is lost afterwards."""

import sqlite3
from collections.abc import Iterator
from contextlib import closing, contextmanager
from pathlib import Path

import pytest

from airfield_board.history.errors import NotRecorded
from airfield_board.history.records import RecordKind, StoredRecord
from airfield_board.history.store import History
from airfield_board.limits.states import State
from airfield_board.session.board_state import BoardState, Weight
from airfield_board.session.recorder import Recorder
from airfield_board.session.verifying import verify_history
from tests.session.fields import PROFILE, Field, make_field, row_of

COOL_C, WARM_C, HOT_C = 15.0, 24.0, 30.0


@pytest.fixture
def field(tmp_path: Path) -> Field:
    return make_field(tmp_path, profile=PROFILE.replace("history.db", "kept/history.db"))


def _path(field: Field) -> Path:
    return field.folder / "kept" / "history.db"


def _records(field: Field, kind: RecordKind) -> list[StoredRecord]:
    history = History.open_read_only(_path(field))
    found = [record for record in history.records() if record.kind is kind]
    history.close()
    return found


def _verified(field: Field) -> None:
    findings = verify_history(_path(field), closing_hash=None, rejudge=True)
    assert findings.whole, findings.lines


def _alarms(state: BoardState) -> list[str]:
    return [message.text for message in state.messages if message.weight is Weight.ALARM]


@contextmanager
def _without_its_folder(field: Field) -> Iterator[None]:
    """A file stands where the folder of the history should be."""
    kept, away = _path(field).parent, field.folder / "away"
    if kept.exists():
        kept.rename(away)
    kept.write_text("in the way", encoding="utf-8")
    yield
    kept.unlink()
    if away.exists():
        away.rename(kept)


def test_a_history_that_could_not_be_opened_at_the_start_is_made_later_with_all_that_happened(field: Field) -> None:
    field.write(field.row(0, HOT_C))
    with _without_its_folder(field):
        recorder = field.open()
        state = recorder.poll()
        assert row_of(state, "trainer").state is State.HOLD
        assert not state.recording
        assert any("not being recorded" in text for text in _alarms(state))
        (change,) = [change for change in state.changes if change.label.startswith("Two-seat")]
        recorder.acknowledge([change.number], "RK")
        recorder.note("the disk was full", "board", "RK")
    state = recorder.poll()
    assert state.recording
    assert _alarms(state) == []
    (change,) = [change for change in state.changes if change.label.startswith("Two-seat")]
    assert (change.acknowledged_by, change.number > 0) == ("RK", True)
    recorder.close()
    _verified(field)
    assert len(_records(field, RecordKind.OBSERVATION)) == 1
    (note,) = _records(field, RecordKind.NOTE)
    assert note.body["recorded_late"] is True
    recorder = field.open()
    (kept,) = [each for each in recorder.poll().changes if each.number == change.number]
    assert kept.acknowledged_by == "RK"
    recorder.close()


def test_a_hold_in_a_history_that_opens_only_later_comes_back_with_it(field: Field) -> None:
    field.write(field.row(0, HOT_C))
    recorder = field.open()
    assert row_of(recorder.poll(), "trainer").state is State.HOLD
    recorder.close()
    # The file has begun anew meanwhile: it tells of no hold.
    field.write(field.row(5, WARM_C), field.row(6, WARM_C + 0.1))
    field.move_to(6)
    with _without_its_folder(field):
        recorder = field.open()
        assert row_of(recorder.poll(), "trainer").state is State.NEAR
        recorder.note("opened without its history", "board", "RK")
    state = recorder.poll()
    assert row_of(state, "trainer").state is State.HOLD
    assert state.recording
    recorder.close()
    _verified(field)
    times = [record.body["time"] for record in _records(field, RecordKind.OBSERVATION)]
    assert len(times) == len(set(times)) == 3
    (note,) = _records(field, RecordKind.NOTE)
    assert note.body["text"] == "opened without its history"


def test_what_was_typed_in_while_the_history_could_not_be_opened_counts_afterwards(field: Field) -> None:
    field.write(field.row(0, COOL_C))
    field.open().close()
    with _without_its_folder(field):
        recorder = field.open()
        recorder.poll()
        field.move_to(10)
        recorder.type_in(time=field.at(10), altimeter_hpa=1013.25, temperature_c=20.0, dewpoint_c=None, initials="RK")
        # The file is gone, so that nothing but the recorder's memory tells of its row.
        field.observations.unlink()
    state = recorder.poll()
    assert state.observation is not None
    assert (state.observation.time, state.observation.initials) == (field.at(10), "RK")
    assert list(state.curve.density_altitude_ft.round(-3)) == [5000, 6000]
    recorder.close()
    _verified(field)
    formats = [record.body["format"] for record in _records(field, RecordKind.OBSERVATION)]
    assert formats == ["csv", "typed"]


def test_what_still_waits_at_the_end_is_recorded_then(field: Field) -> None:
    field.write(field.row(0, HOT_C))
    recorder = field.open()
    with _without_its_folder(field):
        state = recorder.poll()
        assert not state.recording
        assert row_of(state, "trainer").state is State.HOLD
    recorder.close()
    _verified(field)
    assert len(_records(field, RecordKind.OBSERVATION)) == 1
    assert len(_records(field, RecordKind.STOP)) == 1


def test_what_cannot_be_recorded_even_at_the_end_is_said(field: Field) -> None:
    field.write(field.row(0, HOT_C))
    recorder = field.open()
    with _without_its_folder(field):
        recorder.poll()
        with pytest.raises(NotRecorded):
            recorder.close()
    _verified(field)


def test_a_history_without_its_folder_from_start_to_end_is_said_at_the_end(field: Field) -> None:
    with _without_its_folder(field):
        recorder = field.open()
        recorder.poll()
        with pytest.raises(NotRecorded, match="records could not be recorded"):
            recorder.close()


def test_a_history_that_was_replaced_under_the_recorder_is_not_taken_for_its_own(field: Field) -> None:
    field.write(field.row(0, COOL_C))
    recorder = field.open()
    recorder.poll()
    path = _path(field)
    path.rename(path.with_name("aside.db"))
    path.write_bytes(b"")
    field.append(field.row(5, COOL_C + 5))
    field.move_to(5)
    state = recorder.poll()
    assert not state.recording
    assert any("taken away" in text for text in _alarms(state))
    assert path.read_bytes() == b""
    path.with_name("aside.db").replace(path)
    assert recorder.poll().recording
    recorder.close()
    _verified(field)
    assert len(_records(field, RecordKind.OBSERVATION)) == 2


def test_while_another_program_locks_the_history_nothing_is_lost(field: Field) -> None:
    field.write(field.row(0, COOL_C))
    recorder = field.open()
    recorder.poll()
    with closing(sqlite3.connect(_path(field), isolation_level=None)) as other:
        other.execute("BEGIN IMMEDIATE")
        _patience_of(recorder, 1)
        for minutes in (5, 10):
            field.append(field.row(minutes, COOL_C + minutes))
            field.move_to(minutes)
            state = recorder.poll()
        assert not state.recording
        (alarm,) = _alarms(state)
        assert "records are kept in memory" in alarm
    assert recorder.poll().recording
    recorder.close()
    _verified(field)
    assert len(_records(field, RecordKind.OBSERVATION)) == 3


def _patience_of(recorder: Recorder, busy_ms: int) -> None:
    history = recorder._recording.history
    assert history is not None
    history._connection.execute(f"PRAGMA busy_timeout = {busy_ms}")


def test_a_second_recorder_only_watches(field: Field) -> None:
    field.write(field.row(0, HOT_C))
    recorder = field.open()
    recorder.poll()
    watching = field.open()
    state = watching.poll()
    assert row_of(state, "trainer").state is State.HOLD
    assert not state.recording
    assert any("records into this history" in text for text in _alarms(state))
    watching.close()
    recorder.close()
    _verified(field)
    assert len(_records(field, RecordKind.OBSERVATION)) == 1
