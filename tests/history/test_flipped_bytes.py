"""A flipped byte is noticed, or it is outside any record: then all that can be read is as before."""

import sqlite3
from contextlib import closing
from pathlib import Path
from typing import Any

import pytest

from airfield_board.errors import UserError
from airfield_board.history.head_file import head_path
from airfield_board.history.store import History
from airfield_board.history.verify import verify
from tests.history.examples import as_if_killed, contents, make_example, observation, open_new

TABLES = ("journal", "observation", "change", "acknowledgement", "note", "configuration", "episode", "resume")
STEP = 61
"""A prime, so that the sample meets every place within the pages; a record is taken byte by byte."""


def everything(path: Path) -> dict[str, list[tuple[Any, ...]]]:
    with closing(sqlite3.connect(path)) as connection:
        return {table: contents(connection, table) for table in TABLES}


def is_noticed(path: Path) -> bool:
    try:
        return not verify(path).ok
    except UserError:
        return True


def flips(raw: bytes, places: range, path: Path) -> tuple[int, list[int]]:
    """Flip one byte after the other; return how many flips were noticed, and the places of those that were not."""
    noticed, quiet = 0, []
    for place in places:
        flipped = bytearray(raw)
        flipped[place] ^= 1 << place % 8 if place % 2 else 0xFF
        path.write_bytes(flipped)
        if is_noticed(path):
            noticed += 1
        else:
            quiet.append(place)
    return noticed, quiet


def one_record(raw: bytes) -> range:
    """The bytes of a record in the journal, from the start of its row to its hash."""
    start = raw.index(b"Gusts over") - 80
    return range(start, start + 220)


def test_flipped_bytes_of_the_database(tmp_path: Path) -> None:
    path = make_example(tmp_path)
    raw = path.read_bytes()
    before = everything(path)
    noticed, quiet = flips(raw, range(0, len(raw), STEP), path)
    assert noticed > 150
    assert quiet
    record = one_record(raw)
    noticed, quiet_in_record = flips(raw, record, path)
    # One byte of each row met is passed over: how its number is stored in the row, for SQLite goes by the key.
    assert noticed >= len(record) - 3
    for place in (*quiet, *quiet_in_record):
        flipped = bytearray(raw)
        flipped[place] ^= 1 << place % 8 if place % 2 else 0xFF
        path.write_bytes(flipped)
        assert everything(path) == before, place


def test_flipped_bytes_of_the_write_ahead_file(tmp_path: Path) -> None:
    history = open_new(tmp_path)
    history.append([observation(minute) for minute in range(3)], resume={"x": 1})
    path = as_if_killed(history, tmp_path / "killed")
    history.close()
    wal = path.with_name(path.name + "-wal")
    raw = wal.read_bytes()
    reader = History.open_read_only(path)
    before = list(reader.records())
    reader.close()
    unnoticed = 0
    for place in range(0, len(raw), 1_021):
        flipped = bytearray(raw)
        flipped[place] ^= 0x10
        wal.write_bytes(flipped)
        if not is_noticed(path):
            unnoticed += 1
            reader = History.open_read_only(path)
            assert list(reader.records()) == before, place
            reader.close()
    assert unnoticed < len(raw) // 1_021 // 2


@pytest.mark.parametrize("mask", [0x01, 0x20, 0xFF])
def test_every_flipped_byte_of_the_second_place_is_noticed(tmp_path: Path, mask: int) -> None:
    path = make_example(tmp_path)
    second = head_path(path)
    raw = second.read_bytes()
    for place in range(len(raw)):
        flipped = bytearray(raw)
        flipped[place] ^= mask
        second.write_bytes(flipped)
        assert not verify(path).ok, place
