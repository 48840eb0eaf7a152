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
    write_heads(path, HEADS, durable=True)
    (tmp_path / "history.db.head.new").mkdir()
    with pytest.raises(OSError, match="."):  # noqa: RUF043 - any of the system's
        write_heads(path, HEADS[:1], durable=True)
    assert read_heads(path) == HEADS


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
