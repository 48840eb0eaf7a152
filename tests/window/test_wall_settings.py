"""What is remembered of the wall's screen; a lost or broken file is no error."""

from pathlib import Path

import pytest

from airfield_board.errors import UserError
from airfield_board.window.wall_settings import read_setup, usual_place, write_setup
from airfield_board.window.wall_size import WallSetup

SETUP = WallSetup(diagonal_in=55.0, distance_m=4.5)


def test_what_is_written_is_read_again_and_leaves_no_draft(tmp_path: Path) -> None:
    path = tmp_path / "new folder" / "wall.json"
    write_setup(path, WallSetup(diagonal_in=32.0, distance_m=2.0))
    write_setup(path, SETUP)
    assert read_setup(path) == SETUP
    assert [each.name for each in path.parent.iterdir()] == ["wall.json"]


def test_a_file_that_is_not_there_is_no_error(tmp_path: Path) -> None:
    assert read_setup(tmp_path / "wall.json") is None
    assert read_setup(tmp_path) is None


@pytest.mark.parametrize(
    "content",
    [
        b"",
        b"\xff\xfe\x00",
        b"[]",
        b"3",
        b'"diagonal_in"',
        b"{}",
        b'{"diagonal_in": 43}',
        b'{"diagonal_in": "43", "distance_m": 3}',
        b'{"diagonal_in": true, "distance_m": 3}',
        b'{"diagonal_in": null, "distance_m": 3}',
        b'{"diagonal_in": 43, "distance_m": NaN}',
        b'{"diagonal_in": 43, "distance_m": 0}',
        b'{"diagonal_in": 43, "distance_m": 1e999}',
        b'{"diagonal_in": 43, "distance_m": 3',
        b"[" * 4000,
        b'{"diagonal_in": 1' + b"0" * 400 + b', "distance_m": 3}',
    ],
)
def test_a_broken_file_is_as_good_as_none(tmp_path: Path, content: bytes) -> None:
    path = tmp_path / "wall.json"
    path.write_bytes(content)
    assert read_setup(path) is None


def test_whole_numbers_are_taken_as_well(tmp_path: Path) -> None:
    path = tmp_path / "wall.json"
    path.write_text('{"distance_m": 3, "diagonal_in": 43, "more": "is passed over"}', encoding="utf-8")
    assert read_setup(path) == WallSetup(diagonal_in=43.0, distance_m=3.0)


def test_a_place_that_cannot_be_written_is_said(tmp_path: Path) -> None:
    (tmp_path / "file").write_text("in the way", encoding="utf-8")
    with pytest.raises(UserError, match="cannot be remembered"):
        write_setup(tmp_path / "file" / "wall.json", SETUP)
    folder = tmp_path / "wall.json"
    folder.mkdir()
    (folder / "in it").write_text("", encoding="utf-8")
    with pytest.raises(UserError, match="cannot be remembered"):
        write_setup(folder, SETUP)
    assert sorted(each.name for each in tmp_path.iterdir()) == ["file", "wall.json"]


def test_the_usual_place_is_in_the_users_own_folder() -> None:
    assert usual_place().is_absolute()
    assert "airfield-board" in str(usual_place())
