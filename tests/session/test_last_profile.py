from pathlib import Path

import pytest

from airfield_board.session.last_profile import LastProfile, configuration_folder


def test_the_profile_opened_last_is_remembered_in_full(tmp_path: Path, monkeypatch: pytest.MonkeyPatch) -> None:
    monkeypatch.chdir(tmp_path)
    last = LastProfile(tmp_path / "not" / "yet")
    assert last.read() is None
    assert last.remember(Path("fields/profile.yaml"))
    assert last.read() == tmp_path / "fields" / "profile.yaml"
    assert last.remember(tmp_path / "Flügel 日本.yaml")
    assert LastProfile(tmp_path / "not" / "yet").read() == tmp_path / "Flügel 日本.yaml"
    assert [each.name for each in (tmp_path / "not" / "yet").iterdir()] == ["last-profile.json"]


@pytest.mark.parametrize(
    "content",
    [
        b"",
        b"\xff\xfe",
        b"profile.yaml",
        b"[]",
        b"{}",
        b'{"profile": 7}',
        b'{"profile": "relative.yaml"}',
        b'{"profile": "/a\\u0000b"}',
        b'{"profile": "/field/prof',
        b"[" * 60_000,
        b'{"profile": "/' + b"a" * 70_000 + b'"}',
    ],
)
def test_a_damaged_memory_is_none(tmp_path: Path, content: bytes) -> None:
    (tmp_path / "last-profile.json").write_bytes(content)
    assert LastProfile(tmp_path).read() is None


def test_a_memory_that_cannot_be_read_or_written_is_no_error(tmp_path: Path) -> None:
    (tmp_path / "file").write_text("mine", encoding="utf-8")
    last = LastProfile(tmp_path / "file")
    assert last.read() is None
    assert not last.remember(tmp_path / "profile.yaml")
    assert (tmp_path / "file").read_text(encoding="utf-8") == "mine"


def test_where_it_cannot_be_replaced_the_memory_before_stays(tmp_path: Path, monkeypatch: pytest.MonkeyPatch) -> None:
    last = LastProfile(tmp_path)
    assert last.remember(tmp_path / "first.yaml")

    def refuse(_self: Path, _target: Path) -> Path:
        raise OSError("no")

    monkeypatch.setattr(Path, "replace", refuse)
    assert not last.remember(tmp_path / "second.yaml")
    assert last.read() == tmp_path / "first.yaml"
    assert [each.name for each in tmp_path.iterdir()] == ["last-profile.json"]


def test_it_lies_in_the_users_configuration_folder() -> None:
    assert configuration_folder().is_absolute()
    assert "airfield-board" in configuration_folder().parts
