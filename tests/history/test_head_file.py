"""The second place: replaced in one step, and read only as it was written."""

import json
from pathlib import Path

import pytest

from airfield_board.history.chain import EMPTY, Head
from airfield_board.history.head_file import head_path, read_heads, write_heads

HEADS = (Head(records=4, hash=bytes(range(32))), Head(records=7, hash=bytes(range(1, 33))))


@pytest.mark.parametrize("heads", [HEADS, HEADS[:1], (EMPTY,)])
def test_what_was_written_is_read(tmp_path: Path, heads: tuple[Head, ...]) -> None:
    path = tmp_path / "history.db"
    assert read_heads(path) is None
    write_heads(path, heads, durable=True)
    assert read_heads(path) == heads
    write_heads(path, HEADS[1:], durable=False)
    assert read_heads(path) == HEADS[1:]
    assert [file.name for file in tmp_path.iterdir()] == ["history.db.head"]


def test_anybody_can_read_the_count_and_the_hash(tmp_path: Path) -> None:
    write_heads(tmp_path / "history.db", HEADS[:1], durable=True)
    assert json.loads((tmp_path / "history.db.head").read_text()) == [
        {"hash": "000102030405060708090a0b0c0d0e0f101112131415161718191a1b1c1d1e1f", "records": 4}
    ]


def test_what_cannot_be_replaced_still_stands(tmp_path: Path) -> None:
    path = tmp_path / "history.db"
    # Of another length, so that it is not written over in its place.
    head_path(path).write_text("somebody's own", encoding="utf-8")
    (tmp_path / "history.db.head.new").mkdir()
    with pytest.raises(OSError, match="."):  # noqa: RUF043 - any of the system's
        write_heads(path, HEADS[:1], durable=True)
    assert head_path(path).read_text(encoding="utf-8") == "somebody's own"
    (tmp_path / "history.db.head.new").rmdir()
    write_heads(path, HEADS[:1], durable=True)
    assert read_heads(path) == HEADS[:1]


def test_it_is_one_sector_written_over_in_its_place(tmp_path: Path) -> None:
    path = tmp_path / "history.db"
    write_heads(path, (EMPTY, *HEADS[:1]), durable=True)
    first = head_path(path).stat()
    most = Head(records=2**62, hash=bytes([255] * 32))
    write_heads(path, (most, most), durable=True)
    then = head_path(path).stat()
    assert (first.st_size, then.st_size) == (512, 512)
    assert then.st_ino == first.st_ino
    assert read_heads(path) == (most, most)


@pytest.mark.parametrize("name", ["fdatasync", "fsync"])
def test_an_announcement_is_on_the_disk_before_it_counts(
    tmp_path: Path, monkeypatch: pytest.MonkeyPatch, name: str
) -> None:
    path = tmp_path / "history.db"
    write_heads(path, HEADS, durable=True)
    if name == "fsync":
        monkeypatch.delattr("airfield_board.history.head_file.os.fdatasync", raising=False)

    def failing(_handle: int) -> None:
        raise OSError(5, "Input/output error")

    monkeypatch.setattr(f"airfield_board.history.head_file.os.{name}", failing, raising=False)
    with pytest.raises(OSError, match="Input/output error"):
        write_heads(path, HEADS[:1], durable=True)
    write_heads(path, HEADS[1:], durable=False)
    assert read_heads(path) == HEADS[1:]


def test_a_half_written_replacement_is_removed(tmp_path: Path, monkeypatch: pytest.MonkeyPatch) -> None:
    path = tmp_path / "history.db"

    def full(_handle: int) -> None:
        raise OSError(28, "No space left on device")

    monkeypatch.setattr("airfield_board.history.head_file.os.fsync", full)
    with pytest.raises(OSError, match="No space left"):
        write_heads(path, HEADS, durable=True)
    assert list(tmp_path.iterdir()) == []


@pytest.mark.parametrize(
    "text", ["", "[]\n", "{}", "7", '[{"hash": "00", "records": "x"}]', '[{"hash": 5, "records": 1}]', "[[[[", "null"]
)
def test_another_text_is_refused(tmp_path: Path, text: str) -> None:
    path = tmp_path / "history.db"
    head_path(path).write_text(text)
    with pytest.raises(ValueError, match="second place"):
        read_heads(path)


def test_the_same_said_otherwise_was_not_written_by_the_program(tmp_path: Path) -> None:
    path = tmp_path / "history.db"
    write_heads(path, HEADS, durable=True)
    head_path(path).write_text(head_path(path).read_text().replace(" ", ""))
    with pytest.raises(ValueError, match="not as the program wrote it"):
        read_heads(path)
