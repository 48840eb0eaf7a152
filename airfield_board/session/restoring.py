"""Going on where the last recorder stopped: settings, states, holds, the day's curve, what waits."""

from collections.abc import Callable, Iterable, Mapping, Sequence
from dataclasses import dataclass
from datetime import datetime
from zoneinfo import ZoneInfo

import numpy as np

from airfield_board.clock import local_day_bounds, us_from_time
from airfield_board.configuration.model import Quantity
from airfield_board.errors import FileFaults
from airfield_board.history.records import RecordKind, StoredRecord
from airfield_board.history.store import History
from airfield_board.limits.in_force import LimitKey
from airfield_board.limits.states import State
from airfield_board.observations.observation import NO_TIME_US, Verdict
from airfield_board.session.day_record import KEPT_US, DayRecord
from airfield_board.session.intake import END_US
from airfield_board.session.judge import Judge
from airfield_board.session.records import TYPED_IN
from airfield_board.session.rejudge import SettingsReader, judge_anew
from airfield_board.session.settings import Airfield, Settings
from airfield_board.session.status import CURRENT, PAST, STATUS_KEPT_US, RowChange, StatusLog
from airfield_board.units import DAY_US

_LONGEST_READ_BACK_US = 31 * DAY_US
_UNUSED = (Verdict.SUSPECT, Verdict.REJECTED, Verdict.SUPERSEDED)


@dataclass(frozen=True, slots=True, kw_only=True)
class Start:
    """What a recorder begins with.

    Attributes
    ----------
    recall
        For an `Intake`.
    read_back_to_us
        How far back the observation file is to be read at first.
    doubt
        What is odd about the history, in plain words; empty where nothing is.
    """

    judge: Judge
    day: DayRecord
    status: StatusLog
    recall: Callable[[int, int], Iterable[tuple[int, str]]]
    read_back_to_us: int
    doubt: str


def settings_from_history(
    history: History | None, known: Airfield | None = None, until: datetime | None = None
) -> Settings | None:
    """Return the settings as the last recorder left them, or as of a time; None where the history cannot tell.

    Parameters
    ----------
    known
        The files as they were read just now, if they were.
    until
        The time; None: the end.
    """
    if history is None:
        return None
    reader = SettingsReader(known)
    versions = tuple(
        record
        for record in history.records(kinds=(RecordKind.CONFIGURATION, RecordKind.SETTINGS_ACCEPTED))
        if until is None or record.at <= until
    )
    try:
        for record in _since_settled(versions):
            reader.take(record)
    except FileFaults:
        # Texts of an older version of the program, which no longer count as valid, tell nothing.
        return None
    return reader.settings


def _since_settled(versions: Sequence[StoredRecord]) -> Sequence[StoredRecord]:
    """Leave out the versions before the last one that came in force as it stands, or was accepted as it stood."""
    newest = [0, 0]
    start: Sequence[StoredRecord] = ()
    rest = 0
    for place, record in enumerate(versions):
        if record.kind is RecordKind.CONFIGURATION:
            newest[record.body["kind"] == "fleet"] = place
        whole = record.body.get("kind") == "fleet" and record.body.get("settled") is True
        if whole or record.kind is RecordKind.SETTINGS_ACCEPTED:
            start, rest = [versions[each] for each in newest], place + 1
    return [*start, *versions[rest:]]


def settings_at_start(kept: Settings | None, airfield: Airfield, now: datetime) -> tuple[Settings, bool]:
    """Go on with what was in force: what a file has loosened since waits, as if the program had run.

    Returns
    -------
    tuple
        The settings, and whether the files are a version that the history does not know yet.
    """
    if kept is None:
        return Settings(airfield), True
    if _hashes(kept.read) != _hashes(airfield):
        kept.take(airfield, now)
        return kept, True
    # The same texts; their paths may have moved with them.
    return (kept if kept.waiting else Settings(airfield)), False


def _hashes(airfield: Airfield) -> tuple[str, str]:
    return airfield[0].sha256, airfield[1].sha256


def restored(history: History | None, in_force: Airfield, now: datetime) -> Start:
    """Return what a recorder begins with.

    Parameters
    ----------
    history
        None: nothing is known.
    in_force
        The settings in force.

    Raises
    ------
    UserError
        Where the history cannot be read.
    """
    now_us = us_from_time(now)
    day = DayRecord()
    if history is None:
        return Start(
            judge=Judge(*in_force),
            day=day,
            status=StatusLog(),
            recall=_nothing,
            read_back_to_us=now_us - KEPT_US,
            doubt="",
        )
    judge = _judge(history, in_force)
    _fill_day(day, history, judge, now_us)
    read_back_to_us = now_us - KEPT_US
    newest = history.newest(RecordKind.OBSERVATION)
    if newest is not None and isinstance(recorded_us := newest.body.get("time"), int):
        read_back_to_us = max(now_us - _LONGEST_READ_BACK_US, min(recorded_us, read_back_to_us))
    return Start(
        judge=judge,
        day=day,
        status=status_from_history(history, ZoneInfo(in_force[0].time_zone), now),
        recall=_recall_from(history),
        read_back_to_us=read_back_to_us,
        doubt=_doubt(history),
    )


def _nothing(from_us: int, until_us: int) -> Iterable[tuple[int, str]]:
    del from_us, until_us
    return ()


def _recall_from(history: History) -> Callable[[int, int], Iterable[tuple[int, str]]]:
    def recall(from_us: int, until_us: int) -> Iterable[tuple[int, str]]:
        for record in (*history.observation_records(from_us, until_us), *history.untimed_observation_records()):
            if record.body["format"] != TYPED_IN:
                time_us = record.body.get("time")
                yield (time_us if isinstance(time_us, int) else NO_TIME_US), str(record.body["raw"])

    return recall


def _judge(history: History, in_force: Airfield) -> Judge:
    kept = history.resume()
    if kept is not None and isinstance(kept[1], Mapping):
        try:
            return Judge(*in_force, memory=kept[1])
        except (KeyError, ValueError, TypeError):
            # Of another version of the program, or damaged: the journal itself tells.
            pass
    anew = judge_anew(history.records()).judge
    if anew is None:
        return Judge(*in_force)
    return anew


def _fill_day(day: DayRecord, history: History, judge: Judge, now_us: int) -> None:
    # The clock may have been set back since: what is recorded of a later time of the day is part of it all the same.
    since_us, until_us = now_us - KEPT_US, END_US
    columns = history.observations_between(since_us, until_us)
    valid = np.flatnonzero(columns.verdict == Verdict.VALID)
    day.add_values(columns.time_us[valid], columns.density_altitude_ft[valid], columns.uncertainty_ft[valid])
    unused = (
        *history.observation_records(since_us, until_us, verdicts=_UNUSED),
        *history.untimed_observation_records(),
    )
    for record in sorted(unused, key=lambda record: record.seq):
        time_us = record.body.get("time")
        reason = str(record.body.get("reason", ""))
        day.add_unused(time_us if isinstance(time_us, int) else None, us_from_time(record.at), reason)
    seen: set[LimitKey] = set()
    # In the order in which they came about: after a clock set back that is not the order of their times.
    changes = history.changes_between(since_us, until_us, scope="limit")
    for record in sorted(changes, key=lambda record: record.seq):
        key = LimitKey(
            aircraft=str(record.body["aircraft"]),
            operation=str(record.body["operation"]),
            quantity=Quantity(str(record.body["quantity"])),
        )
        was = None if record.body.get("from") is None else State(str(record.body["from"]))
        if key not in seen and was is not None:
            day.add_state(key, since_us, was, None)
        seen.add(key)
        day.add_state(key, int(str(record.body["time"])), State(str(record.body["to"])), was)
    day.keep_only({key for key, limit in judge.limits.items() if limit.memory.state is not None})
    for key, limit in judge.limits.items():
        if key not in seen and limit.memory.state is not None:
            day.add_state(key, limit.memory.since_us, limit.memory.state, None)


def status_from_history(history: History, zone: ZoneInfo, now: datetime) -> StatusLog:
    """Return the status changes of the local day, and those that still wait for acknowledgement.

    Raises
    ------
    UserError
        Where the history cannot be read.
    """
    status = StatusLog()
    since_us = us_from_time(local_day_bounds(now, zone)[0]) - STATUS_KEPT_US
    waiting = history.open_changes(scope=CURRENT)
    lately = history.changes_between(since_us, END_US)
    records = {record.seq: record for record in (*waiting, *lately) if record.body.get("scope") in (CURRENT, PAST)}
    for number, record in records.items():
        status.add(number, _row_change(record))
    for number, found in history.acknowledgements(records).items():
        status.acknowledge((number,), found.initials, found.at)
    return status


def _row_change(record: StoredRecord) -> RowChange:
    body = record.body
    was = body.get("from")
    row = (str(body["aircraft"]), str(body["operation"])) if "aircraft" in body else None
    return RowChange(
        time_us=int(str(body["time"])),
        row=row,
        label=str(body.get("label", "")),
        was=None if was is None else State(str(was)),
        state=State(str(body["to"])),
        scope=str(body["scope"]),
    )


def _doubt(history: History) -> str:
    """Return what the history found odd about itself when it was opened."""
    message = history.newest(RecordKind.MESSAGE)
    start = history.newest(RecordKind.START)
    if message is None or start is None or message.body.get("topic") != "history" or message.seq != start.seq - 1:
        return ""
    return str(message.body.get("text", ""))
