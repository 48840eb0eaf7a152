import errno
import json
import os
import sys
import tempfile
from dataclasses import replace
from pathlib import Path

import pytest

from airfield_board.configuration import new_files
from airfield_board.configuration.checking import check_files
from airfield_board.configuration.json_schema import fleet_schema, profile_schema
from airfield_board.configuration.new_airfield import Draft, draft_of
from airfield_board.configuration.new_files import in_the_way, write_new_airfield
from airfield_board.errors import UserError
from tests.configuration.test_new_airfield import ANSWERS

NAMES = {"profile.yaml", "fleet.yaml", "profile.schema.json", "fleet.schema.json"}


@pytest.fixture
def draft(tmp_path: Path) -> Draft:
    return draft_of(ANSWERS, tmp_path / "new" / "cinder-mesa")


def names(folder: Path) -> set[str]:
    return {each.name for each in folder.iterdir()}


def test_the_files_are_written_and_are_valid_by_the_programs_own_check(draft: Draft) -> None:
    profile, fleet = write_new_airfield(draft)
    assert names(draft.folder) == NAMES
    assert (profile.path, profile.text) == (draft.folder / "profile.yaml", draft.profile_text)
    assert (fleet.path, fleet.text) == (draft.folder / "fleet.yaml", draft.fleet_text)
    findings = check_files([draft.folder / "profile.yaml", draft.folder / "fleet.yaml"])
    assert findings.faults == 0
    assert not any("(warning)" in line for line in findings.lines)


def test_the_schemas_beside_them_are_the_programs(draft: Draft) -> None:
    write_new_airfield(draft)
    for name, schema in (("profile", profile_schema()), ("fleet", fleet_schema())):
        assert json.loads((draft.folder / f"{name}.schema.json").read_text(encoding="utf-8")) == schema


@pytest.mark.parametrize("name", sorted(NAMES))
def test_nothing_is_ever_overwritten(draft: Draft, name: str) -> None:
    draft.folder.mkdir(parents=True)
    (draft.folder / name).write_text("mine", encoding="utf-8")
    assert name in in_the_way(draft.folder)
    with pytest.raises(UserError, match=name):
        write_new_airfield(draft)
    assert names(draft.folder) == {name}
    assert (draft.folder / name).read_text(encoding="utf-8") == "mine"


@pytest.mark.skipif(sys.platform == "win32", reason="links need a right of their own there")
def test_a_link_to_nowhere_is_in_the_way_too(draft: Draft) -> None:
    draft.folder.mkdir(parents=True)
    (draft.folder / "fleet.yaml").symlink_to(draft.folder / "gone")
    with pytest.raises(UserError, match=r"fleet\.yaml"):
        write_new_airfield(draft)
    assert names(draft.folder) == {"fleet.yaml"}


def test_schemas_that_are_the_programs_are_left_as_they_are(draft: Draft, tmp_path: Path) -> None:
    write_new_airfield(draft)
    (draft.folder / "profile.yaml").rename(tmp_path / "away.yaml")
    (draft.folder / "fleet.yaml").unlink()
    assert in_the_way(draft.folder) == ""
    write_new_airfield(draft)
    assert names(draft.folder) == NAMES


@pytest.mark.parametrize("links", [True, False])
def test_a_file_that_comes_in_between_is_not_overwritten_and_nothing_half_done_stays(
    draft: Draft, links: bool, monkeypatch: pytest.MonkeyPatch
) -> None:
    link = os.link

    def meddle(source: Path, target: Path) -> None:
        if target.name == "profile.yaml":
            target.write_text("mine", encoding="utf-8")
        if not links:
            raise PermissionError(errno.EPERM, "no hard links here")
        link(source, target)

    monkeypatch.setattr(os, "link", meddle)
    with pytest.raises(UserError, match=r"profile\.yaml was not written"):
        write_new_airfield(draft)
    assert names(draft.folder) == {"profile.yaml"}
    assert (draft.folder / "profile.yaml").read_text(encoding="utf-8") == "mine"


def test_without_hard_links_the_files_are_written_all_the_same(draft: Draft, monkeypatch: pytest.MonkeyPatch) -> None:
    def refuse(_source: Path, _target: Path) -> None:
        raise PermissionError(errno.EPERM, "no hard links here")

    monkeypatch.setattr(os, "link", refuse)
    assert write_new_airfield(draft)[0].text == draft.profile_text
    assert names(draft.folder) == NAMES


def test_a_full_disk_leaves_nothing_behind(draft: Draft, monkeypatch: pytest.MonkeyPatch) -> None:
    def full(_descriptor: int) -> None:
        raise OSError(errno.ENOSPC, "No space left on device")

    monkeypatch.setattr(os, "fsync", full)
    with pytest.raises(UserError, match="No space left on device"):
        write_new_airfield(draft)
    assert not draft.folder.exists()
    assert not draft.folder.parent.exists()


def test_a_disk_that_is_full_when_copying_leaves_nothing_behind(draft: Draft, monkeypatch: pytest.MonkeyPatch) -> None:
    def refuse(_source: Path, _target: Path) -> None:
        raise PermissionError(errno.EPERM, "no hard links here")

    def full(_path: Path, _content: bytes) -> int:
        raise OSError(errno.ENOSPC, "No space left on device")

    monkeypatch.setattr(os, "link", refuse)
    monkeypatch.setattr(Path, "write_bytes", full)
    with pytest.raises(UserError, match="No space left on device"):
        write_new_airfield(draft)
    assert not draft.folder.parent.exists()


def test_what_does_not_stand_on_the_disk_as_composed_is_not_moved_into_place(
    draft: Draft, monkeypatch: pytest.MonkeyPatch
) -> None:
    write = new_files._write

    def cut(path: Path, content: bytes) -> None:
        write(path, content[: len(content) // 2] if path.name == "profile.yaml" else content)

    monkeypatch.setattr(new_files, "_write", cut)
    with pytest.raises(UserError):
        write_new_airfield(draft)
    assert not draft.folder.exists()


def test_a_draft_with_problems_is_never_written(draft: Draft) -> None:
    with pytest.raises(ValueError, match="problems"):
        write_new_airfield(draft_of(replace(ANSWERS, limit=""), draft.folder))
    assert not draft.folder.parent.exists()


def test_a_folder_that_is_a_file_is_said(tmp_path: Path) -> None:
    (tmp_path / "file").write_text("mine", encoding="utf-8")
    for folder in (tmp_path / "file", tmp_path / "file" / "below"):
        assert "not a folder" in in_the_way(folder)
        with pytest.raises(UserError, match="not a folder"):
            write_new_airfield(draft_of(ANSWERS, folder))


def test_the_folder_must_be_given_in_full() -> None:
    assert "whole path" in in_the_way(Path("somewhere"))


def test_a_path_that_cannot_be_is_said(tmp_path: Path) -> None:
    assert "No folder" in in_the_way(tmp_path / "a\0b")


def test_a_folder_without_the_right_to_write_is_said(tmp_path: Path, monkeypatch: pytest.MonkeyPatch) -> None:
    monkeypatch.setattr(os, "access", lambda _path, _mode: False)
    assert "may not write" in in_the_way(tmp_path / "new")


def test_a_folder_that_cannot_be_made_is_said(draft: Draft, monkeypatch: pytest.MonkeyPatch) -> None:
    def refuse(**_options: object) -> str:
        raise PermissionError(errno.EACCES, "Permission denied")

    monkeypatch.setattr(tempfile, "mkdtemp", refuse)
    with pytest.raises(UserError, match="Permission denied"):
        write_new_airfield(draft)
    assert not draft.folder.parent.exists()
