"""The wall's diagonal and distance, remembered in a small file of the user's; a lost or broken one is no error."""

import json
import os
import tempfile
from contextlib import suppress
from pathlib import Path

import platformdirs

from airfield_board.errors import UserError
from airfield_board.window.wall_size import WallSetup

_LARGEST_BYTES = 4096


def usual_place() -> Path:
    """Return where the user's file is."""
    return Path(platformdirs.user_config_dir("airfield-board")) / "wall.json"


def read_setup(path: Path) -> WallSetup | None:
    """Return what was remembered; None where there is no file, or none that can be used."""
    try:
        with path.open("rb") as file:
            content = json.loads(file.read(_LARGEST_BYTES))
        diagonal_in, distance_m = content["diagonal_in"], content["distance_m"]
        # Texts and truth values would pass for numbers.
        if not {type(diagonal_in), type(distance_m)} <= {int, float}:
            return None
        return WallSetup(diagonal_in=float(diagonal_in), distance_m=float(distance_m))
    except (OSError, ValueError, KeyError, TypeError, OverflowError, RecursionError):
        return None


def write_setup(path: Path, setup: WallSetup) -> None:
    """Remember a setup: written beside and moved into place, so that the file is never half written.

    Raises
    ------
    UserError
        Where it cannot be written.
    """
    text = json.dumps({"diagonal_in": setup.diagonal_in, "distance_m": setup.distance_m}) + "\n"
    draft: Path | None = None
    try:
        path.parent.mkdir(parents=True, exist_ok=True)
        with tempfile.NamedTemporaryFile(
            "w", encoding="utf-8", dir=path.parent, prefix=f"{path.name}.", delete=False
        ) as file:
            draft = Path(file.name)
            file.write(text)
            file.flush()
            os.fsync(file.fileno())
        draft.replace(path)
    except OSError as error:
        if draft is not None:
            with suppress(OSError):
                draft.unlink()
        raise UserError(
            f"{path}: screen and distance of the wall view cannot be remembered: {error.strerror or error}"
        ) from error
