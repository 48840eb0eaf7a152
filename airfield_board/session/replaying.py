"""Recorded observations through checks, rules and episodes, as if live."""

from collections.abc import Callable, Iterator
from dataclasses import dataclass
from datetime import datetime
from itertools import islice
from pathlib import Path

import numpy as np
from numpy.typing import NDArray

from airfield_board import __version__
from airfield_board.clock import time_from_us, us_from_time
from airfield_board.configuration.model import Fleet, Profile
from airfield_board.history.records import Json, Record, RecordKind
from airfield_board.history.store import History
from airfield_board.limits.rules import Episode, LimitChange
from airfield_board.observations.formats.reading import ReadResult
from airfield_board.observations.observation import NO_TIME_US, CheckedTable, ObservationTable, Verdict
from airfield_board.observations.quality_judgement import FUTURE_US
from airfield_board.session.judge import Judge, Judged
from airfield_board.session.records import change_records, configuration_records, observation_records
from airfield_board.session.status import RowStates

_RECORDED_BATCH_ROWS = 5_000
_UNRECORDED_BATCH_ROWS = 250_000
_UNUSED_TOLD = 20


@dataclass(frozen=True, slots=True, kw_only=True)
class Replay:
    """What a replay gave.

    Attributes
    ----------
    changes
        In order of time.
    episodes
        In order of their start, the open ones too.
    rows
        How many were read.
    counts
        Rows by verdict.
    unused
        The first rows that were not used, in order of time: when, as far as it can be read, and why not.
    """

    changes: tuple[LimitChange, ...]
    episodes: tuple[Episode, ...]
    rows: int
    counts: dict[Verdict, int]
    unused: tuple[tuple[datetime | None, str], ...] = ()

    def summary(self) -> dict[str, Json]:
        """Return the last line of a replay."""
        return {
            "kind": "summary",
            "rows": self.rows,
            **{verdict.name.lower(): self.counts[verdict] for verdict in Verdict},
        }


def replay(
    profile: Profile,
    fleet: Fleet,
    read: ReadResult,
    now: datetime,
    *,
    history_path: Path | None = None,
    progress: Callable[[int], None] | None = None,
) -> Replay:
    """Run recorded observations through checks, rules and episodes.

    Time passes with the rows; after the last one nothing more happens.

    Parameters
    ----------
    now
        The clock: rows of more than 5 min after it are rejected.
    history_path
        Of a history that does not exist yet, to record it all in; None: nothing is recorded.
    progress
        Told how many rows are done.

    Raises
    ------
    UserError
        Where the history cannot be made or written.
    """
    judge = Judge(profile, fleet)
    if history_path is None:
        steps = list(_judged(judge, read.table, now, progress))
    else:
        steps = list(_recorded(judge, read, now, history_path, progress))
    place = {key: index for index, key in enumerate(judge.limits)}
    episodes = [episode for step in steps for episode in step.ended] + list(judge.open_episodes())
    episodes.sort(key=lambda episode: (episode.start_us, place[episode.key]))
    return Replay(
        changes=tuple(change for step in steps for change in step.changes),
        episodes=tuple(episodes),
        rows=len(read.table),
        counts={verdict: sum(int((step.checked.verdict == verdict).sum()) for step in steps) for verdict in Verdict},
        unused=tuple(islice((row for step in steps for row in _unused(step.checked)), _UNUSED_TOLD)),
    )


def _unused(checked: CheckedTable) -> Iterator[tuple[datetime | None, str]]:
    for row in np.flatnonzero(checked.verdict != Verdict.VALID).tolist():
        time_us = int(checked.rows.time_us[row])
        when = None if time_us == NO_TIME_US else time_from_us(time_us)
        yield when, f"{Verdict(int(checked.verdict[row])).name.lower()}: {checked.reason.get(row, '')}"


def _judged(
    judge: Judge, table: ObservationTable, now: datetime, progress: Callable[[int], None] | None
) -> Iterator[Judged]:
    order = _order(table)
    for start, stop in _batches(table.time_us[order], _UNRECORDED_BATCH_ROWS):
        yield judge.advance(table.take(order[start:stop]), us_from_time(now))
        if progress is not None:
            progress(stop)


def _order(table: ObservationTable) -> NDArray[np.int64]:
    order: NDArray[np.int64] = np.argsort(table.time_us, kind="stable")
    return order


def _recorded(
    judge: Judge, read: ReadResult, now: datetime, path: Path, progress: Callable[[int], None] | None
) -> Iterator[Judged]:
    """Judge in batches, each recorded as if it had been read when its last row was new."""
    table = read.table
    order = _order(table)
    first_us = int(table.time_us[table.time_us > 0].min(initial=us_from_time(now)))
    begun = min(now, time_from_us(first_us))
    history = History.open(path, now=begun, program_version=__version__)
    closed_at = begun
    try:
        rows = RowStates(judge)
        source: dict[str, Json] = {"topic": "replay", "text": "recorded by a replay of past observations"}
        message = Record(kind=RecordKind.MESSAGE, at=begun, body=source)
        history.append([message, *configuration_records(judge.profile, judge.fleet, begun)])
        for start, stop in _batches(table.time_us[order], _RECORDED_BATCH_ROWS):
            batch = table.take(order[start:stop])
            judged, closed_at = _batch_step(judge, batch, now, closed_at)
            records = observation_records(judged, read.format, closed_at)
            records += change_records(judged.changes, judged.ended, closed_at)
            followed = rows.follow(judged.changes, judge.fleet)
            records += [Record(kind=RecordKind.CHANGE, at=closed_at, body=change.body()) for change in followed]
            history.append(records, resume=judge.to_json())  # type: ignore[arg-type] # plain values only
            if progress is not None:
                progress(stop)
            yield judged
    finally:
        history.close(now=closed_at)


def _batches(time_us: NDArray[np.int64], rows: int) -> Iterator[tuple[int, int]]:
    """Yield stretches of rows in order of time, none of which parts two rows of one time."""
    start = 0
    while start < len(time_us):
        stop = min(start + rows, len(time_us))
        stop = int(np.searchsorted(time_us, time_us[stop - 1], side="right"))
        yield start, stop
        start = stop


def _batch_step(judge: Judge, batch: ObservationTable, now: datetime, before: datetime) -> tuple[Judged, datetime]:
    # No time passes with rows of times in the future.
    last_us = int(batch.time_us[batch.time_us <= us_from_time(now) + FUTURE_US].max(initial=NO_TIME_US))
    at = before if last_us <= us_from_time(before) else min(now, time_from_us(last_us))
    at_us = us_from_time(at)
    return judge.advance(batch, at_us, pass_to_us=at_us), at
