"""The source and those who write its file: append, rewrite in place, replace by rename, truncate, stop in mid-row."""

import io
import os
import threading
from collections.abc import Callable
from datetime import UTC, datetime
from pathlib import Path
from typing import BinaryIO

import pytest

from airfield_board.observations.source import FileSource, Opener, SourceReading, SourceRules, open_file
from tests.observations.file_rows import HEADER

NOW = datetime(2026, 7, 14, 18, 0, tzinfo=UTC)
UNFINISHED = "observations.csv: the last row is not complete yet; it is left until it is"


def row(minute: int, temperature_c: float = 20.0) -> str:
    return f"2026-07-14T17:{minute:02d}:00Z,29.92,{temperature_c:.1f},10.0\n"


class Watched:
    """A file, and the source that looks at it."""

    def __init__(self, path: Path, opener: Opener = open_file) -> None:
        self.path = path
        self.source = FileSource(path, SourceRules(time_zone="UTC"), settling_s=0.0, patience_s=60.0, opener=opener)

    def append(self, text: str) -> None:
        with self.path.open("a", newline="") as file:
            file.write(text)

    def replace(self, text: str) -> None:
        other = self.path.with_suffix(".new")
        other.write_text(text)
        other.replace(self.path)

    def look(self) -> SourceReading:
        return self.source.read(NOW)

    def rows(self) -> list[str]:
        reading = self.look()
        assert reading.table is not None
        return [text + "\n" for text in reading.table.raw]


@pytest.fixture
def watched(tmp_path: Path) -> Watched:
    path = tmp_path / "observations.csv"
    path.write_text(HEADER + row(1))
    return Watched(path)


def test_a_file_that_stays_as_it_is_is_not_read_anew(watched: Watched) -> None:
    first, second = watched.look(), watched.look()
    assert (first.fresh, second.fresh) == (True, False)
    assert second.table is first.table
    assert second.messages == first.messages
    assert second.file_time == first.file_time


def _second_looks(watched: Watched, monkeypatch: pytest.MonkeyPatch) -> list[int]:
    """Return a list that grows with each second look."""
    looks: list[int] = []

    def look_again(file: BinaryIO, before: os.stat_result, start: int, content: bytes) -> bool:
        del file, before, content
        looks.append(start)
        return True

    monkeypatch.setattr(watched.source, "_holds_still", look_again)
    return looks


def test_rows_put_behind_need_no_second_look(watched: Watched, monkeypatch: pytest.MonkeyPatch) -> None:
    watched.look()
    looks = _second_looks(watched, monkeypatch)
    before = watched.path.stat().st_size
    watched.append(row(2))
    reading = watched.look()
    assert reading.table is not None
    assert list(reading.table.raw) == [row(1).rstrip(), row(2).rstrip()]
    assert reading.new_from == before == reading.table.position[1]
    assert not looks


@pytest.mark.parametrize("how", ["replaced", "rewritten", "begun anew"])
def test_whatever_else_was_done_to_the_file_needs_one(
    watched: Watched, monkeypatch: pytest.MonkeyPatch, how: str
) -> None:
    watched.look()
    looks = _second_looks(watched, monkeypatch)
    if how == "replaced":
        watched.replace(HEADER + row(1) + row(2))
    elif how == "rewritten":
        watched.path.write_text(HEADER + row(1, 25.0) + row(2))
    else:
        watched.path.write_text(HEADER)
    reading = watched.look()
    assert reading.fresh
    assert reading.new_from == 0
    assert looks


def test_rows_from_further_back_are_read_when_they_are_asked_for(tmp_path: Path) -> None:
    path = tmp_path / "observations.csv"
    lines = [
        f"2026-07-{day:02d}T{hour:02d}:{minute:02d}Z,29.92,20.0,10.0\n"
        for day in range(1, 15)
        for hour in range(24)
        for minute in range(60)
    ]
    path.write_text(HEADER + "".join(lines))
    watched = Watched(path)
    near = watched.source.read(NOW, datetime(2026, 7, 14, 12, tzinfo=UTC))
    assert not watched.source.read(NOW, datetime(2026, 7, 14, 13, tzinfo=UTC)).fresh
    far = watched.source.read(NOW, datetime(2026, 7, 2, tzinfo=UTC))
    assert near.table is not None
    assert far.table is not None
    assert (far.fresh, len(far.table) > len(near.table)) == (True, True)
    # All of the file was needed, so that nothing further back can be missing.
    assert not watched.source.read(NOW, datetime(2026, 5, 1, tzinfo=UTC)).fresh


def test_appended_rows_are_seen(watched: Watched) -> None:
    watched.look()
    for minute in range(2, 8):
        watched.append(row(minute))
        assert watched.rows() == [row(earlier) for earlier in range(1, minute + 1)]


def test_a_half_written_row_is_left_until_it_is_complete(watched: Watched) -> None:
    watched.look()
    new = row(2, 35.0)
    for place in range(1, len(new)):
        watched.append(new[place - 1])
        reading = watched.look()
        assert reading.table is not None
        assert list(reading.table.raw) == [row(1).strip()]
        assert reading.messages == (UNFINISHED,)
    watched.append("\n")
    assert watched.rows() == [row(1), row(2, 35.0)]
    assert watched.look().messages == ()


def test_a_row_rewritten_in_place_is_seen(watched: Watched) -> None:
    watched.look()
    with watched.path.open("r+b") as file:
        file.seek(len(HEADER))
        file.write(row(1, 35.0).encode())
    assert watched.rows() == [row(1, 35.0)]


def test_a_change_that_keeps_size_and_time_is_seen(watched: Watched) -> None:
    before = watched.path.stat()
    watched.look()
    with watched.path.open("r+b") as file:
        file.seek(len(HEADER))
        file.write(row(1, 35.0).encode())
    os.utime(watched.path, ns=(before.st_atime_ns, before.st_mtime_ns))
    after = watched.path.stat()
    assert (after.st_size, after.st_mtime_ns, after.st_ino) == (before.st_size, before.st_mtime_ns, before.st_ino)
    reading = watched.look()
    assert reading.fresh
    assert reading.table is not None
    assert reading.table.temperature_c.tolist() == [35.0]


def test_a_replacement_by_rename_is_seen(watched: Watched) -> None:
    watched.look()
    for minute in range(2, 6):
        watched.replace(HEADER + row(minute, 20.0 + minute))
        assert watched.rows() == [row(minute, 20.0 + minute)]
        assert watched.look().messages == ()


def test_a_file_that_was_cut_is_read_and_said(watched: Watched) -> None:
    watched.append(row(2) + row(3))
    watched.look()
    with watched.path.open("r+b") as file:
        file.truncate(len(HEADER + row(1)))
    reading = watched.look()
    assert reading.table is not None
    assert len(reading.table) == 1
    assert reading.messages == (
        "observations.csv was cut or rewritten: its newest row was of 2026-07-14T17:03:00Z, "
        "now it is of 2026-07-14T17:01:00Z",
    )
    assert watched.look().messages == ()


def test_a_file_that_lost_all_its_rows_is_said(watched: Watched) -> None:
    watched.look()
    watched.path.write_text(HEADER)
    assert watched.look().messages == (
        "observations.csv has no rows yet",
        "observations.csv was cut or rewritten: its newest row was of 2026-07-14T17:01:00Z, now there is none",
    )


def test_a_file_cut_to_nothing_and_filled_again(watched: Watched) -> None:
    watched.look()
    watched.path.write_bytes(b"")
    emptied = watched.look()
    assert (emptied.table, emptied.messages) == (None, ("observations.csv: it is empty",))
    assert watched.look() == emptied
    watched.path.write_text(HEADER + row(1) + row(2))
    assert watched.rows() == [row(1), row(2)]


def test_a_file_that_goes_and_comes_back(watched: Watched) -> None:
    watched.look()
    text = watched.path.read_text()
    watched.path.unlink()
    assert watched.look().messages == ("observations.csv does not exist (yet)",)
    watched.path.write_text(text + row(2))
    assert watched.rows() == [row(1), row(2)]


class WriterBetweenReads:
    """Opens the file, and lets a writer have a go at it after each first read of it, a number of times."""

    def __init__(self, write: Callable[[Path], object], times: int) -> None:
        self.write = write
        self.times = times

    def __call__(self, path: Path) -> BinaryIO:
        file = open_file(path)
        writer = self

        class Meddled:
            def __init__(self) -> None:
                self.reads = 0

            def __enter__(self) -> "Meddled":
                return self

            def __exit__(self, *_: object) -> None:
                file.close()

            def fileno(self) -> int:
                return file.fileno()

            def seek(self, place: int) -> int:
                return file.seek(place)

            def read(self, count: int) -> bytes:
                part = file.read(count)
                self.reads += 1
                if self.reads == 1 and writer.times:
                    writer.times -= 1
                    writer.write(path)
                return part

        return Meddled()  # type: ignore[return-value]


def append(path: Path) -> None:
    with path.open("a") as file:
        file.write(row(2))


def rewrite(path: Path) -> None:
    """Change the temperature in place, where size and time do not show it."""
    before = path.stat()
    with path.open("r+b") as file:
        file.seek(len(HEADER) + 27)
        digit = file.read(1)
        file.seek(len(HEADER) + 27)
        file.write(b"1" if digit != b"1" else b"3")
    os.utime(path, ns=(before.st_atime_ns, before.st_mtime_ns))


def touch(path: Path) -> None:
    """Change the time alone, as a writer does that is at work in a part that was not read."""
    stamp = path.stat().st_mtime_ns + 1_000_000_000
    os.utime(path, ns=(stamp, stamp))


def cut(path: Path) -> None:
    os.truncate(path, len(HEADER) + 10)


@pytest.fixture
def path(tmp_path: Path) -> Path:
    path = tmp_path / "observations.csv"
    path.write_text(HEADER + row(1))
    return path


def test_a_file_that_grows_while_it_is_read_is_read_as_it_was(path: Path) -> None:
    watched = Watched(path, WriterBetweenReads(append, 2))
    assert watched.rows() == [row(1)]
    assert watched.rows() == [row(1), row(2)]
    assert watched.rows() == [row(1), row(2), row(2)]


@pytest.mark.parametrize(("write", "temperature_c"), [(rewrite, 30.0), (touch, 20.0)])
def test_a_file_that_changes_while_it_is_read_is_read_again_at_once(
    path: Path, write: Callable[[Path], object], temperature_c: float
) -> None:
    assert Watched(path, WriterBetweenReads(write, 2)).rows() == [row(1, temperature_c)]


@pytest.mark.parametrize("write", [rewrite, touch])
def test_a_file_that_changes_all_the_time_is_left_to_the_next_poll(path: Path, write: Callable[[Path], object]) -> None:
    watched = Watched(path, WriterBetweenReads(write, 4))
    reading = watched.look()
    assert (reading.table, reading.fresh) == (None, False)
    assert reading.messages == ("observations.csv is being written; it is read at the next poll",)
    assert watched.look().fresh


def test_a_file_that_is_cut_while_it_is_read_is_read_again_at_once(path: Path) -> None:
    reading = Watched(path, WriterBetweenReads(cut, 1)).look()
    assert reading.table is not None
    assert len(reading.table) == 0
    assert reading.messages == (UNFINISHED, "observations.csv has no rows yet")


def test_a_file_that_is_shorter_than_its_disk_says_is_not_taken(path: Path) -> None:
    path.write_text(HEADER + row(1) + row(2))
    whole = len(HEADER + row(1))

    class Short(io.FileIO):
        def read(self, size: int | None = -1, /) -> bytes:
            wanted = whole if size is None or size < 0 else size
            return super().read(max(min(wanted, whole - self.tell()), 0))

    def opens_short(path: Path) -> BinaryIO:
        return Short(path)

    reading = Watched(path, opens_short).look()
    assert reading.table is None
    assert reading.messages == ("observations.csv is being written; it is read at the next poll",)


def test_an_unchanged_file_that_changes_at_that_moment_is_read_anew(path: Path) -> None:
    writer = WriterBetweenReads(append, 0)
    watched = Watched(path, writer)
    watched.look()
    writer.times = 1
    assert watched.look().fresh
    assert watched.rows() == [row(1), row(2)]


@pytest.mark.parametrize("way", ["append", "in place", "emptied and written", "rename"])
def test_no_row_is_ever_misread_while_a_writer_is_at_work(watched: Watched, way: str) -> None:
    """Every row that is written has its minute in all its values, so that a mixed one would show.

    The writer that rewrites in place does so in one go: between two goes nobody could tell.
    """
    count = 300

    def text(number: int) -> str:
        minute = number % 60
        hour = number // 60
        return f"2026-07-14T{hour:02d}:{minute:02d}:00Z,29.{minute:02d},{minute}.0,{minute - 1}.5\n"

    def write(number: int) -> None:
        rows = HEADER + "".join(text(each) for each in range(number, number + 20))
        if way == "append":
            half = len(text(number)) // 2
            watched.append(text(number)[:half])
            watched.append(text(number)[half:])
        elif way == "in place":
            with watched.path.open("r+b", buffering=0) as file:
                file.write(rows.encode())
                file.truncate()
        elif way == "emptied and written":
            with watched.path.open("wb", buffering=0) as file:
                file.write(rows[: len(rows) // 3].encode())
                file.write(rows[len(rows) // 3 :].encode())
        else:
            watched.replace(rows)

    watched.path.write_text(HEADER + "".join(text(each) for each in range(20)))

    def work() -> None:
        for number in range(20, 20 + count):
            write(number)

    writer = threading.Thread(target=work)
    writer.start()
    written = {text(number).strip() for number in range(count + 60)}
    looks = 0
    while writer.is_alive() or looks == 0:
        reading = watched.look()
        if reading.table is not None:
            looks += 1
            assert set(reading.table.raw) <= written
            assert not reading.table.faults
    writer.join()
    assert watched.rows()[-1].strip() in written
