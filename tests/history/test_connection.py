"""Readers leave nothing behind, whatever goes wrong."""

import shutil
import sqlite3
import tempfile
from contextlib import closing
from pathlib import Path

import pytest

from airfield_board.errors import UserError
from airfield_board.history.connection import connect_reader, wal_path
from airfield_board.history.errors import NotAHistory
from airfield_board.history.schema import MIGRATIONS
from airfield_board.history.store import History
from tests.history.examples import as_if_killed, folder_state, make_example, observation, open_new


@pytest.fixture
def killed(tmp_path: Path) -> Path:
    history = open_new(tmp_path)
    history.append([observation(0)])
    path = as_if_killed(history, tmp_path / "killed")
    history.close()
    return path


@pytest.fixture
def copies(tmp_path: Path, monkeypatch: pytest.MonkeyPatch) -> Path:
    """The folder in which copies are made."""
    folder = tmp_path / "copies"
    folder.mkdir()
    monkeypatch.setattr(tempfile, "tempdir", str(folder))
    return folder


def test_the_copy_of_a_killed_recorders_history_goes_with_the_reader(killed: Path, copies: Path) -> None:
    reading = connect_reader(killed)
    assert len(list(copies.iterdir())) == 1
    assert not reading.live
    assert not reading.disturbed()
    reading.close()
    assert list(copies.iterdir()) == []


def test_a_copy_for_which_there_is_no_room_is_said(killed: Path, copies: Path, monkeypatch: pytest.MonkeyPatch) -> None:
    def full(_source: Path, _target: Path) -> None:
        raise OSError(28, "No space left on device")

    monkeypatch.setattr(shutil, "copyfile", full)
    with pytest.raises(UserError, match="No space left"):
        connect_reader(killed)
    assert list(copies.iterdir()) == []


def test_a_copy_that_is_no_history_goes_too(killed: Path, copies: Path) -> None:
    for file in (killed, wal_path(killed)):
        file.write_bytes(b"no database " * 1_000)
    with pytest.raises(NotAHistory):
        connect_reader(killed)
    assert list(copies.iterdir()) == []


def test_an_older_history_is_not_brought_forward_by_a_reader(tmp_path: Path, monkeypatch: pytest.MonkeyPatch) -> None:
    path = make_example(tmp_path)
    before = folder_state(tmp_path)
    monkeypatch.setattr("airfield_board.history.connection.MIGRATIONS", (*MIGRATIONS, ("CREATE TABLE later (x)",)))
    with pytest.raises(NotAHistory, match="older version of this program"):
        History.open_read_only(path)
    assert folder_state(tmp_path) == before


def test_a_history_at_rest_that_changes_while_read_is_disturbed(tmp_path: Path) -> None:
    path = make_example(tmp_path)
    reading = connect_reader(path)
    assert not reading.disturbed()
    history = open_new(tmp_path)
    assert reading.disturbed()
    history.close()
    reading.close()


def test_a_reader_cannot_write(tmp_path: Path) -> None:
    path = make_example(tmp_path)
    with closing(connect_reader(path)) as reading, pytest.raises(sqlite3.OperationalError, match="readonly"):
        reading.connection.execute("DELETE FROM resume")
