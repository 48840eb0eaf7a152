"""Using a whole observation file at once: reading it, and the board at a time."""

from datetime import UTC, datetime
from pathlib import Path

import numpy as np

from airfield_board.clock import us_from_time
from airfield_board.configuration.model import Fleet, Profile
from airfield_board.errors import UserError, reason_of
from airfield_board.observations.formats.reading import ReadingRules, ReadResult
from airfield_board.observations.formats.recognise import read_table
from airfield_board.observations.observation import ObservationTable
from airfield_board.session.board import board_state
from airfield_board.session.board_state import BoardState, Mode
from airfield_board.session.day_record import DayRecord
from airfield_board.session.judge import Judge


def read_file(path: Path, *, time_zone: str, station: str, finished: bool) -> ReadResult:
    """Read a whole observation file.

    Parameters
    ----------
    time_zone
        Of times without an offset.
    station
        METAR station whose reports are kept; empty: the file must hold one only.
    finished
        Whether a last row without a line end is taken.

    Raises
    ------
    UserError
        Where it cannot be read, or is no observation file.
    """
    try:
        if not path.is_file():
            raise UserError(f"{path}: {'this is not a file' if path.exists() else 'there is no such file'}")
        content = path.read_bytes()
        changed = datetime.fromtimestamp(path.stat().st_mtime, tz=UTC)
    except OSError as error:
        raise UserError(f"{path}: {reason_of(error)}") from error
    rules = ReadingRules(time_zone=time_zone, file_time=changed, finished=finished, station=station, name=str(path))
    return read_table(content, rules)


def read_for(profile: Profile, path: Path, *, finished: bool) -> ReadResult:
    """Read a whole observation file as a profile says. Raises as `read_file`."""
    settings = profile.observations
    return read_file(path, time_zone=settings.time_zone, station=settings.station, finished=finished)


def assess(profile: Profile, fleet: Fleet, table: ObservationTable, at: datetime, mode: Mode) -> BoardState:
    """Return the board at a time, from a file's rows alone.

    Parameters
    ----------
    table
        The file's rows.
    at
        The time the board is of: rows of a later time are not known yet.
    mode
        What the board is said to be.
    """
    at_us = us_from_time(at)
    table = table.take(np.flatnonzero(table.time_us <= at_us))
    judge, day = Judge(profile, fleet), DayRecord()
    judged = judge.advance(table, at_us, pass_to_us=at_us)
    day.add_rows(judged.checked, judged.conditions.density_altitude_ft, judged.conditions.uncertainty_ft, at_us)
    day.add_changes(judged.changes)
    return board_state(judge, day, mode, at)
