"""A disk or network share that does not answer holds nobody up."""

import threading
from collections.abc import Iterator
from datetime import UTC, datetime, timedelta
from pathlib import Path
from typing import BinaryIO

import pytest

from airfield_board.observations.source import FileSource, SourceRules, open_file
from tests.observations.file_rows import HEADER

NOW = datetime(2026, 7, 14, 18, 0, tzinfo=UTC)
ROW = "2026-07-14T17:01:00Z,29.92,20.0,10.0\n"


class Share:
    """Opens files as a network share does: not before it answers."""

    def __init__(self) -> None:
        self.answers = threading.Event()
        self.asked = 0

    def __call__(self, path: Path) -> BinaryIO:
        self.asked += 1
        self.answers.wait()
        return open_file(path)


def threads() -> list[threading.Thread]:
    return [thread for thread in threading.enumerate() if thread.name == "observation file"]


@pytest.fixture
def share() -> Iterator[Share]:
    made = Share()
    yield made
    made.answers.set()
    for thread in threads():
        thread.join()


@pytest.fixture
def path(tmp_path: Path) -> Path:
    path = tmp_path / "observations.csv"
    path.write_text(HEADER + ROW)
    return path


def hanging(path: Path, share: Share, patience_s: float = 0.0) -> FileSource:
    return FileSource(path, SourceRules(time_zone="UTC"), opener=share, patience_s=patience_s, settling_s=0.0)


def test_it_is_said_for_how_long_there_was_no_answer(path: Path, share: Share) -> None:
    source = hanging(path, share)
    reading = source.read(NOW)
    assert (reading.table, reading.fresh, reading.unanswered_s) == (None, False, 0.0)
    assert reading.messages == ("observations.csv has not answered yet; it is read as soon as it does",)
    reading = source.read(NOW + timedelta(seconds=12))
    assert reading.messages == ("observations.csv has not answered for 12 s; it is read as soon as it does",)
    assert reading.unanswered_s == 12.0


def test_a_clock_that_is_set_back_does_not_make_it_absurd(path: Path, share: Share) -> None:
    source = hanging(path, share)
    source.read(NOW)
    assert source.read(NOW - timedelta(hours=1)).unanswered_s == 0.0


def test_no_second_read_is_begun_meanwhile(path: Path, share: Share) -> None:
    source = hanging(path, share)
    source.read(NOW)
    (thread,) = threads()
    for seconds in range(1, 50):
        source.read(NOW + timedelta(seconds=seconds))
        assert threads() == [thread]
    assert thread.daemon
    share.answers.set()
    thread.join()
    assert share.asked == 1


def test_the_late_answer_is_taken_at_the_next_poll(path: Path, share: Share) -> None:
    source = hanging(path, share)
    source.read(NOW)
    (thread,) = threads()
    share.answers.set()
    thread.join()
    reading = source.read(NOW + timedelta(seconds=5))
    assert reading.fresh
    assert reading.table is not None
    assert reading.unanswered_s is None
    assert reading.messages == ()


def test_after_the_late_answer_the_file_is_read_anew(path: Path, share: Share) -> None:
    source = hanging(path, share, patience_s=60.0)
    share.answers.set()
    assert source.read(NOW).fresh
    path.write_text(HEADER + ROW + ROW.replace("17:01", "17:02"))
    reading = source.read(NOW + timedelta(seconds=5))
    assert reading.table is not None
    assert len(reading.table) == 2
    assert share.asked == 2
