"""Which window is to open once the present one has closed; known without Qt."""

from dataclasses import dataclass
from pathlib import Path
from typing import TypeAlias

from airfield_board.session.settings import Airfield


@dataclass(frozen=True, slots=True, kw_only=True)
class AirfieldNext:
    """A board on an airfield, with its profile and fleet as read."""

    profile_path: Path
    airfield: Airfield


@dataclass(frozen=True, slots=True, kw_only=True)
class DemoNext:
    """The demo."""


@dataclass(frozen=True, slots=True, kw_only=True)
class SetUpNext:
    """The set-up of a new airfield.

    Attributes
    ----------
    note
        What stands above it; empty: that it is the beginning.
    """

    note: str = ""


NextWindow: TypeAlias = AirfieldNext | DemoNext | SetUpNext
