"""One recorder at a time."""

import sys
from contextlib import ExitStack
from pathlib import Path

import pytest

from airfield_board.history.errors import HistoryLocked
from airfield_board.history.lock import RecorderLock, holder_of, lock_path
from tests.history.examples import START


def test_the_lock_is_held_until_released(tmp_path: Path) -> None:
    path = tmp_path / "history.db"
    assert holder_of(path) is None
    assert not lock_path(path).exists()
    lock = RecorderLock.take(path, now=START)
    holder = holder_of(path)
    assert holder is not None
    assert holder.since == "2026-07-16T12:00:00Z"
    assert str(holder).startswith(f"the program running on {holder.host} (process {holder.pid}) since 2026")
    with pytest.raises(HistoryLocked, match="since 2026-07-16T12:00:00Z records into this history"):
        RecorderLock.take(path, now=START)
    lock.release()
    assert holder_of(path) is None
    RecorderLock.take(path, now=START).release()


@pytest.mark.parametrize("text", ["", "{}", "[]", '{"host": "a", "pid": "x", "since": ""}', "\xff"])
def test_a_holder_that_does_not_say_who_is_another_program(tmp_path: Path, text: str) -> None:
    path = tmp_path / "history.db"
    with ExitStack() as stack:
        stack.callback(RecorderLock.take(path, now=START).release)
        lock_path(path).write_text(text, encoding="latin-1")
        with pytest.raises(HistoryLocked, match="another program records into this history"):
            RecorderLock.take(path, now=START)


def test_looking_makes_no_file(tmp_path: Path) -> None:
    assert holder_of(tmp_path / "history.db") is None
    assert list(tmp_path.iterdir()) == []


@pytest.mark.skipif(sys.platform == "win32", reason="a locked byte is looked for otherwise there")
def test_a_reader_that_only_looks_does_not_keep_a_recorder_out(tmp_path: Path, monkeypatch: pytest.MonkeyPatch) -> None:
    path = tmp_path / "history.db"
    looking = RecorderLock.take(path, now=START)
    # The look ends while the recorder waits for its next attempt.
    monkeypatch.setattr("airfield_board.history.lock.time.sleep", lambda _pause_s: looking.release())
    RecorderLock.take(path, now=START).release()
