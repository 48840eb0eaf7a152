"""The board for a picture: from the file and, where there is one, the history, which is only read."""

from dataclasses import replace
from datetime import datetime, timedelta
from pathlib import Path
from zoneinfo import ZoneInfo

import numpy as np
import platformdirs

from airfield_board.clock import local_day_bounds, us_from_time
from airfield_board.configuration.model import Profile
from airfield_board.configuration.profile import load_airfield
from airfield_board.errors import UserError
from airfield_board.history.store import History
from airfield_board.observations.observation import ObservationTable
from airfield_board.session.board import board_state
from airfield_board.session.board_state import BoardState, Mode
from airfield_board.session.intake import Intake
from airfield_board.session.recording import place_of_history
from airfield_board.session.records import empty_table, table_from_records
from airfield_board.session.restoring import (
    restored,
    settings_at_start,
    settings_from_history,
    status_from_history,
)
from airfield_board.session.settings import Airfield
from airfield_board.session.status import StatusLog
from airfield_board.session.whole_files import assess, read_for

_PAST_READ_BACK = timedelta(days=10)


def snapshot_state(profile_path: Path, at: datetime | None, now: datetime) -> tuple[BoardState, tuple[str, ...]]:
    """Return the board for a picture.

    Parameters
    ----------
    at
        A time; None: now.
    now
        The present time.

    Returns
    -------
    tuple
        The board, and what is worth saying about its sources.

    Raises
    ------
    UserError
        Where profile or fleet are not valid.
    """
    airfield = load_airfield(profile_path)
    notes: list[str] = []
    table = _rows_of_file(airfield[0], notes)
    history = _history(airfield[0], notes)
    try:
        if at is not None:
            return _past(airfield, table, history, at), tuple(notes)
        return _present(airfield, table, history, now), tuple(notes)
    finally:
        if history is not None:
            history.close()


def _rows_of_file(profile: Profile, notes: list[str]) -> ObservationTable:
    try:
        read = read_for(profile, profile.observations.file, finished=False)
    except UserError as error:
        notes.append(str(error))
        return empty_table()
    notes += read.notes
    return read.table


def _history(profile: Profile, notes: list[str]) -> History | None:
    path = place_of_history(profile, Path(platformdirs.user_data_dir("airfield-board")))
    if not path.exists():
        return None
    try:
        return History.open_read_only(path)
    except UserError as error:
        notes.append(f"without the history: {error}")
        return None


def _present(airfield: Airfield, table: ObservationTable, history: History | None, now: datetime) -> BoardState:
    kept = settings_from_history(history, airfield)
    start = restored(history, airfield if kept is None else kept.in_force, now)
    in_force = settings_at_start(kept, airfield, now)[0].in_force
    now_us = us_from_time(now)
    changes, _ = start.judge.change_settings(*in_force, now_us)
    start.day.add_changes(changes)
    judged = start.judge.advance(Intake(start.recall).new_rows(table), now_us, pass_to_us=now_us)
    air = judged.conditions
    start.day.add_rows(judged.checked, air.density_altitude_ft, air.uncertainty_ft, now_us)
    start.day.add_changes(judged.changes)
    return _with_changes(board_state(start.judge, start.day, Mode.LIVE, now), start.status, in_force[0], now)


def _past(airfield: Airfield, table: ObservationTable, history: History | None, at: datetime) -> BoardState:
    if history is None:
        return assess(*airfield, table, at, Mode.PAST)
    airfield = _in_force(airfield, history, at)
    at_us = us_from_time(at)
    records = history.observation_records(us_from_time(at - _PAST_READ_BACK), at_us + 1)
    recorded = table_from_records(records)
    known = frozenset(recorded.raw)
    fresh = [row for row in range(len(table)) if table.raw[row] not in known]
    together = _joined(recorded, table.take(np.array(fresh, dtype=np.int64)))
    state = assess(*airfield, together, at, Mode.PAST)
    status = status_from_history(history, ZoneInfo(airfield[0].time_zone), at)
    return _with_changes(state, status, airfield[0], at)


def _in_force(airfield: Airfield, history: History, at: datetime) -> Airfield:
    """Return the settings that were in force at a time."""
    kept = settings_from_history(history, airfield, at)
    if kept is None:
        return airfield
    if any(record.at >= at for record in history.records(from_seq=history.count)):
        return kept.in_force
    # No recorder ran then: as if one had been started, which what has been tightened since binds.
    return settings_at_start(kept, airfield, at)[0].in_force


def _joined(one: ObservationTable, other: ObservationTable) -> ObservationTable:
    """Put two tables one behind the other."""

    def column(name: str) -> np.ndarray[tuple[int], np.dtype[np.float64]]:
        return np.concatenate([getattr(one, name), getattr(other, name)])

    return ObservationTable(
        time_us=np.concatenate([one.time_us, other.time_us]),
        altimeter_hpa=column("altimeter_hpa"),
        temperature_c=column("temperature_c"),
        dewpoint_c=column("dewpoint_c"),
        elevation_m=column("elevation_m"),
        temperature_resolution_c=column("temperature_resolution_c"),
        dewpoint_resolution_c=column("dewpoint_resolution_c"),
        position=np.arange(len(one) + len(other), dtype=np.int64),
        raw=[*one.raw, *other.raw],
        faults={**one.faults, **{row + len(one): text for row, text in other.faults.items()}},
    )


def _with_changes(state: BoardState, status: StatusLog, profile: Profile, when: datetime) -> BoardState:
    zone = ZoneInfo(profile.time_zone)
    day_start = local_day_bounds(when, zone)[0]
    changes = tuple(change for change in status.newest_first(day_start) if change.time <= when)
    return replace(state, changes=changes)
