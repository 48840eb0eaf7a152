"""Which profile was open last: a small file in the user's configuration folder.

It is a convenience. Where it is missing, damaged or cannot be written, the program goes on without it.
"""

import json
import logging
import os
import tempfile
from pathlib import Path

import platformdirs

_logger = logging.getLogger(__name__)
_FILE_NAME = "last-profile.json"
_LARGEST_BYTES = 65_536


def configuration_folder() -> Path:
    """Return the user's configuration folder of this program; it need not exist."""
    return Path(platformdirs.user_config_dir("airfield-board"))


class LastProfile:
    """Remembers the profile that was opened last.

    Parameters
    ----------
    folder
        Where the file is kept.
    """

    def __init__(self, folder: Path) -> None:
        self._file = folder / _FILE_NAME

    def read(self) -> Path | None:
        """Return the profile's path; None where none is remembered. Whether it is still there is not looked at."""
        try:
            with self._file.open("rb") as file:
                content = file.read(_LARGEST_BYTES + 1)
            kept = json.loads(content.decode("utf-8"))
        except (OSError, ValueError, RecursionError):
            return None
        written = kept.get("profile") if isinstance(kept, dict) else None
        if not isinstance(written, str) or "\0" in written or not Path(written).is_absolute():
            return None
        return Path(written)

    def remember(self, profile: Path) -> bool:
        """Remember a profile in the place of the one before.

        Returns
        -------
        bool
            Whether it could be kept.
        """
        content = json.dumps({"profile": str(profile.absolute())}, indent=2) + "\n"
        try:
            self._file.parent.mkdir(parents=True, exist_ok=True)
            descriptor, name = tempfile.mkstemp(dir=self._file.parent, prefix=f".{_FILE_NAME}-")
            try:
                with os.fdopen(descriptor, "w", encoding="ascii") as file:
                    file.write(content)
                Path(name).replace(self._file)
            except OSError:
                Path(name).unlink(missing_ok=True)
                raise
        except OSError as error:
            _logger.warning("The profile opened last is not remembered: %s", error)
            return False
        return True
