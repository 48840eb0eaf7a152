"""Profile and fleet while the program runs: what is in force, what waits, what was refused."""

from dataclasses import dataclass
from datetime import datetime
from pathlib import Path
from typing import TypeAlias
from zoneinfo import ZoneInfo

from airfield_board.clock import local_day
from airfield_board.configuration.model import Fleet, Profile
from airfield_board.configuration.profile import load_airfield
from airfield_board.configuration.reload import compare_and_merge
from airfield_board.configuration.setting_changes import SettingChange, TightenedChange
from airfield_board.configuration.yaml_reader import LARGEST_FILE_BYTES
from airfield_board.errors import FileFaults

Airfield: TypeAlias = tuple[Profile, Fleet]


class Settings:
    """What is in force, given the versions read one after the other and what was accepted.

    The same versions and acceptances in the same order always end with the same settings in force; so the history can
    be judged anew.

    Parameters
    ----------
    first
        The version that is in force at the start.
    """

    def __init__(self, first: Airfield) -> None:
        self.in_force = first
        self.read = first
        self.waiting: tuple[SettingChange, ...] = ()
        self.tightened: tuple[TightenedChange, ...] = ()

    def take(self, read: Airfield, at: datetime) -> None:
        """Take a new valid version: what it tightens acts at once, what it loosens waits.

        Parameters
        ----------
        at
            When it was read: a temporary limit that has run out by then loosens nothing when it goes.
        """
        merge = compare_and_merge(self.in_force, read, today=local_day(at, ZoneInfo(self.in_force[0].time_zone)))
        self.in_force = merge.effective
        self.read = read
        self.waiting = merge.waiting
        self.tightened = merge.tightened

    def accept(self) -> None:
        """Put the version read last in force as it stands."""
        self.in_force = self.read
        self.waiting = self.tightened = ()


@dataclass(frozen=True, slots=True, kw_only=True)
class SettingsReading:
    """What a look at the files gave.

    Attributes
    ----------
    airfield
        A new valid version; None where nothing has changed, or nothing valid is there.
    refused
        The faults of the files as they stand; empty where they are valid.
    """

    airfield: Airfield | None
    refused: str


class SettingsFiles:
    """Looks whether profile or fleet have changed on disk.

    Parameters
    ----------
    airfield
        As read first.
    """

    def __init__(self, airfield: Airfield) -> None:
        profile, fleet = airfield
        self._profile_path = profile.path
        self._seen = (profile.sha256, fleet.sha256)
        self._refused = ""
        self._contents = self._read(profile.fleet_path)
        self._fleet_path = profile.fleet_path

    def _read(self, fleet_path: Path) -> tuple[bytes | None, bytes | None]:
        return _content(self._profile_path), _content(fleet_path)

    def look(self) -> SettingsReading:
        """Read the files if their content has changed since the last look."""
        contents = self._read(self._fleet_path)
        # What was refused is looked at again: it may have been read while it was being written.
        if contents == self._contents and not self._refused:
            return SettingsReading(airfield=None, refused="")
        try:
            profile, fleet = load_airfield(self._profile_path)
        except FileFaults as faults:
            self._contents = contents
            self._refused = str(faults)
            return SettingsReading(airfield=None, refused=self._refused)
        self._refused = ""
        # What was compared before reading, never what stands there after: a change in between is seen at the next look.
        self._contents = contents if profile.fleet_path == self._fleet_path else (None, None)
        self._fleet_path = profile.fleet_path
        seen = (profile.sha256, fleet.sha256)
        if seen == self._seen:
            return SettingsReading(airfield=None, refused="")
        self._seen = seen
        return SettingsReading(airfield=(profile, fleet), refused="")


def _content(path: Path) -> bytes | None:
    """Return a settings file's bytes, as far as they are worth comparing; None where it cannot be read."""
    try:
        with path.open("rb") as file:
            return file.read(LARGEST_FILE_BYTES + 1)
    except OSError:
        return None
