"""The demo: an invented field that plays a warm day to the recorder, through a file like any other."""

import shutil
from collections.abc import Iterator
from datetime import date, datetime
from pathlib import Path
from zoneinfo import ZoneInfo

from airfield_board.clock import Clock, RunningClock, SteppedClock, time_from_us, us_from_time
from airfield_board.configuration.profile import load_profile
from airfield_board.resources import bundled_folder
from airfield_board.session.board_state import BoardState, Mode
from airfield_board.session.recorder import Recorder
from airfield_board.training.feeder import WARM_DAY, Feeder, rows_of_day
from airfield_board.units import MINUTE_US

DEMO_DAY = date(2026, 7, 16)
"""A fixed day, so that the demo's local order is in force whenever the demo is played."""

DEMO_SPEED = 320.0
"""Seconds of the demo's day to one real second: its 16 hours take three minutes."""

DEMO_POLL_S = 0.5
"""Real seconds between two polls of the demo: under three minutes of its day."""

_SEED = 4120
_FIRST_HOUR, _LAST_HOUR, _HALF = 5, 21, 30
_FILES = ("profile.yaml", "fleet.yaml", "profile.schema.json", "fleet.schema.json")


def demo_hours() -> tuple[datetime, datetime]:
    """Return when the demo's day begins and ends: 05:30 and 21:30 at its field."""
    zone = ZoneInfo(load_profile(bundled_folder("demo_data") / "profile.yaml").time_zone)
    first = datetime(DEMO_DAY.year, DEMO_DAY.month, DEMO_DAY.day, _FIRST_HOUR, _HALF, tzinfo=zone)
    return first, first.replace(hour=_LAST_HOUR)


def running_clock() -> RunningClock:
    """Return a clock that begins the demo's day now, and stands at its end."""
    first, last = demo_hours()
    return RunningClock(first, last, DEMO_SPEED)


class DemoDay:
    """One playing of the demo: its files, its feeder, its clock.

    Parameters
    ----------
    folder
        An empty folder for the files of this playing: profile, fleet, observations, history.
    clock
        The demo's time; a `RunningClock` for the window, a `SteppedClock` for the terminal.

    Attributes
    ----------
    clock
        As given.
    profile_path
        The playing's own copy of the demo's profile.
    """

    def __init__(self, folder: Path, clock: Clock) -> None:
        source = bundled_folder("demo_data")
        for name in _FILES:
            shutil.copyfile(source / name, folder / name)
        self.clock = clock
        self.profile_path = folder / "profile.yaml"
        self._history_path = folder / "history.db"
        profile = load_profile(self.profile_path)
        rows = rows_of_day(
            WARM_DAY,
            DEMO_DAY,
            ZoneInfo(profile.time_zone),
            every_min=round(profile.observations.expected_every_min),
            seed=_SEED,
        )
        self._feeder = Feeder(profile.observations.file, rows)

    def feed(self) -> int:
        """Write the rows whose time has come; return how many."""
        return self._feeder.write_until(self.clock.now())

    def open_recorder(self) -> Recorder:
        """Return a recorder of this playing, in its own history, never LIVE.

        Raises
        ------
        UserError
            Where the files or the history cannot be opened.
        """
        self.feed()
        return Recorder.open(self.profile_path, clock=self.clock, mode=Mode.DEMO, history_path=self._history_path)


def stepped_day(folder: Path, *, step_min: int = 5) -> Iterator[BoardState]:
    """Play the whole day step by step, through the same recorder, as fast as it goes.

    Parameters
    ----------
    folder
        An empty folder for the files of this playing.
    step_min
        Minutes from one poll to the next.

    Yields
    ------
    BoardState
        After each poll.
    """
    first, last = demo_hours()
    clock = SteppedClock(first)
    day = DemoDay(folder, clock)
    recorder = day.open_recorder()
    try:
        for when_us in range(us_from_time(first), us_from_time(last) + 1, step_min * MINUTE_US):
            clock.move_to(time_from_us(when_us))
            day.feed()
            yield recorder.poll()
    finally:
        recorder.close()
