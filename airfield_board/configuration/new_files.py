"""Writing a new airfield's files: checked as they lie on the disk, moved into place, nothing overwritten."""

import json
import os
import shutil
import tempfile
from collections.abc import Callable
from pathlib import Path

from airfield_board.configuration.json_schema import JsonSchema, fleet_schema, profile_schema
from airfield_board.configuration.model import Fleet, Profile
from airfield_board.configuration.new_airfield import (
    FLEET_NAME,
    FLEET_SCHEMA_NAME,
    PROFILE_NAME,
    PROFILE_SCHEMA_NAME,
    Draft,
)
from airfield_board.configuration.profile import load_airfield
from airfield_board.errors import UserError

_WORK_PREFIX = ".airfield-board-"


def write_new_airfield(draft: Draft) -> tuple[Profile, Fleet]:
    """Write profile and fleet, with the schema files that editors look for, into the draft's folder.

    Parameters
    ----------
    draft
        Without a problem.

    Returns
    -------
    tuple
        Profile and fleet as read from where they now stand.

    Raises
    ------
    UserError
        Where a file of such a name is there already, or one cannot be written. Then nothing is left behind.
    """
    if draft.problems:
        raise ValueError("a draft with problems cannot be written")
    folder = draft.folder
    obstacle = in_the_way(folder)
    if obstacle:
        raise UserError(obstacle)
    made = _missing_folders(folder)
    try:
        folder.mkdir(parents=True, exist_ok=True)
        work = Path(tempfile.mkdtemp(prefix=_WORK_PREFIX, dir=folder))
    except OSError as error:
        _remove_folders(made)
        raise UserError(f"Nothing can be written to {folder}: {error.strerror or error}") from error
    put: list[Path] = []
    try:
        for name, content in _contents(draft).items():
            _write(work / name, content)
        load_airfield(work / PROFILE_NAME)  # as it lies on the disk, before anything stands in its place
        # The profile comes last: it is what makes the others an airfield.
        for name in (PROFILE_SCHEMA_NAME, FLEET_SCHEMA_NAME, FLEET_NAME, PROFILE_NAME):
            target = folder / name
            if name.endswith(".json") and _same_content(target, work / name):
                continue
            _put(work / name, target)
            put.append(target)
        return load_airfield(folder / PROFILE_NAME)
    except (OSError, UserError) as error:
        for target in put:
            target.unlink(missing_ok=True)
        shutil.rmtree(work, ignore_errors=True)
        _remove_folders(made)
        if isinstance(error, UserError):
            raise
        where = error.filename2 or error.filename or folder
        raise UserError(f"{where} was not written: {error.strerror or error}") from error
    finally:
        shutil.rmtree(work, ignore_errors=True)


def in_the_way(folder: Path) -> str:
    """Say why a new airfield's files cannot be put into a folder; empty where nothing is known to stand in the way.

    Parameters
    ----------
    folder
        It need not exist yet.
    """
    try:
        if "\0" in str(folder):
            return "No folder can have such a name."
        if not folder.is_absolute():
            return "Give the folder's whole path."
        nearest = folder
        while not os.path.lexists(nearest) and nearest != nearest.parent:
            nearest = nearest.parent
        if not nearest.is_dir():
            return f"{nearest} is not a folder."
        if not os.access(nearest, os.W_OK | os.X_OK):
            return f"This user may not write to {nearest}."
        for name, content in {PROFILE_NAME: None, FLEET_NAME: None, **_schemas()}.items():
            target = folder / name
            if os.path.lexists(target) and (content is None or target.read_bytes() != content):
                return f"There is a file {name} in this folder already. Nothing is overwritten: choose another folder."
    except OSError as error:
        return f"The folder cannot be looked at: {error.strerror or error}"
    return ""


def _contents(draft: Draft) -> dict[str, bytes]:
    return {
        PROFILE_NAME: draft.profile_text.encode("utf-8"),
        FLEET_NAME: draft.fleet_text.encode("utf-8"),
        **_schemas(),
    }


def _schemas() -> dict[str, bytes]:
    makers: dict[str, Callable[[], JsonSchema]] = {
        PROFILE_SCHEMA_NAME: profile_schema,
        FLEET_SCHEMA_NAME: fleet_schema,
    }
    return {
        name: (json.dumps(make(), ensure_ascii=False, allow_nan=False, indent=2) + "\n").encode()
        for name, make in makers.items()
    }


def _write(path: Path, content: bytes) -> None:
    with path.open("xb") as file:
        file.write(content)
        file.flush()
        os.fsync(file.fileno())


def _put(source: Path, target: Path) -> None:
    """Move a file to where none must stand; a rename would put it over one."""
    try:
        os.link(source, target)
    except FileExistsError:
        raise
    except OSError:
        # A file system without hard links.
        content = source.read_bytes()
        with target.open("xb"):
            pass
        try:
            target.write_bytes(content)
        except OSError:
            target.unlink(missing_ok=True)
            raise


def _same_content(one: Path, other: Path) -> bool:
    return one.is_file() and one.read_bytes() == other.read_bytes()


def _missing_folders(folder: Path) -> list[Path]:
    """Return the folders that are still to be made, the innermost first."""
    return [each for each in (folder, *folder.parents) if not os.path.lexists(each)]


def _remove_folders(folders: list[Path]) -> None:
    for folder in folders:
        try:
            folder.rmdir()
        except OSError:
            return
