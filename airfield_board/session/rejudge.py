"""Judging a history anew: every logged observation through the present rules, against what was logged."""

from collections.abc import Callable, Iterable, Mapping
from dataclasses import dataclass
from math import isclose
from pathlib import Path

from airfield_board.clock import iso_utc, time_from_us, us_from_time
from airfield_board.configuration.fleet import fleet_from_text
from airfield_board.configuration.profile import profile_from_text
from airfield_board.errors import FileFaults
from airfield_board.history.records import Json, RecordKind, StoredRecord
from airfield_board.limits.rules import Episode, LimitChange
from airfield_board.observations.observation import Verdict
from airfield_board.session.judge import Judge
from airfield_board.session.records import (
    change_body,
    empty_table,
    episode_body,
    judged_together,
    table_from_records,
)
from airfield_board.session.settings import Airfield, Settings
from airfield_board.session.status import CURRENT, PAST
from airfield_board.units import EQUAL

_MOST_DIFFERENCES = 100


@dataclass(frozen=True, slots=True, kw_only=True)
class Difference:
    """Something that the present rules give otherwise than the history has it.

    Attributes
    ----------
    seq
        Of the record; of a missing one that of the record it should stand before.
    text
        In plain words.
    """

    seq: int
    text: str


@dataclass(frozen=True, slots=True, kw_only=True)
class JudgedAnew:
    """What judging a history anew gave.

    Attributes
    ----------
    judge, settings
        As they stand at its end; None where it holds no valid settings.
    observations, changes
        How many were compared.
    differences
        The first hundred.
    """

    judge: Judge | None
    settings: Settings | None
    observations: int
    changes: int
    differences: tuple[Difference, ...]


class SettingsReader:
    """Follows the versions of the settings in a history's records.

    Parameters
    ----------
    known
        A version that has been read already: where the history has the same texts they are not read again.
    """

    def __init__(self, known: Airfield | None = None) -> None:
        self.settings: Settings | None = None
        self._profile: StoredRecord | None = None
        self._known = known

    def take(self, record: StoredRecord) -> bool:
        """Take a record; return whether it has changed what is in force.

        Raises
        ------
        FileFaults
            Where the recorded text is not valid for this version of the program.
        """
        if record.kind is RecordKind.SETTINGS_ACCEPTED:
            if self.settings is not None:
                self.settings.accept()
            return self.settings is not None
        if record.kind is not RecordKind.CONFIGURATION:
            return False
        if record.body["kind"] == "profile":
            self._profile = record
            return False
        if self._profile is None:
            return False
        airfield = self._airfield(self._profile, record)
        if self.settings is None:
            self.settings = Settings(airfield)
        else:
            self.settings.take(airfield, record.at)
        return True

    def _airfield(self, profile_record: StoredRecord, fleet_record: StoredRecord) -> Airfield:
        hashes = (profile_record.body["sha256"], fleet_record.body["sha256"])
        if self._known is not None and hashes == tuple(each.sha256 for each in self._known):
            return self._known
        profile = profile_from_text(str(profile_record.body["text"]), Path(str(profile_record.body["name"])))
        fleet = fleet_from_text(
            str(fleet_record.body["text"]), Path(str(fleet_record.body["name"])), acceptance=profile.acceptance
        )
        return profile, fleet


class _Anew:
    """One pass through a history."""

    def __init__(self) -> None:
        self.reader = SettingsReader()
        self.judge: Judge | None = None
        self.observations = 0
        self.changes = 0
        self.differences: list[Difference] = []
        self._batch: list[StoredRecord] = []
        self._due_changes: list[LimitChange] = []
        self._due_episodes: list[Episode] = []

    def take(self, record: StoredRecord) -> None:
        """Take the next record."""
        if record.kind is RecordKind.OBSERVATION:
            if self._batch and not judged_together(self._batch[-1], record):
                self._judge_batch()
            self._batch.append(record)
            return
        self._judge_batch()
        if record.kind is RecordKind.CHANGE and record.body.get("scope", "limit") not in (CURRENT, PAST):
            self._compare_change(record)
        elif record.kind is RecordKind.EPISODE:
            self._compare_episode(record)
        else:
            self._settle(record.seq)
            if record.kind is RecordKind.CLOCK:
                self._pass_time_to(record)
            self._take_settings(record)

    def finish(self, seq: int) -> None:
        """Take the end of the history."""
        self._judge_batch()
        self._settle(seq + 1)

    def _take_settings(self, record: StoredRecord) -> None:
        try:
            changed = self.reader.take(record)
        except FileFaults as faults:
            self._differ(record.seq, f"the recorded settings are not valid any more: {faults.faults[0]}")
            return
        settings = self.reader.settings
        if not changed or settings is None:
            return
        if self.judge is None:
            self.judge = Judge(*settings.in_force)
            return
        changes, ended = self.judge.change_settings(*settings.in_force, us_from_time(record.at))
        self._due_changes += changes
        self._due_episodes += ended

    def _judge_batch(self) -> None:
        batch, self._batch = self._batch, []
        if not batch:
            return
        self._settle(batch[0].seq)
        if self.judge is None:
            self._differ(batch[0].seq, "an observation stands before any settings")
            return
        now_us = us_from_time(batch[0].at)
        judged = self.judge.advance(table_from_records(batch), now_us, pass_to_us=now_us)
        self._due_changes += judged.changes
        self._due_episodes += judged.ended
        self.observations += len(batch)
        for place, record in enumerate(batch):
            verdict = Verdict(int(judged.checked.verdict[place])).name.lower()
            if verdict != record.body["verdict"]:
                self._differ(record.seq, f"the observation was {record.body['verdict']}, judged anew it is {verdict}")

    def _pass_time_to(self, record: StoredRecord) -> None:
        if self.judge is not None:
            now_us = us_from_time(record.at)
            judged = self.judge.advance(empty_table(), now_us, pass_to_us=now_us)
            self._due_changes += judged.changes
            self._due_episodes += judged.ended

    def _compare_change(self, record: StoredRecord) -> None:
        self.changes += 1
        if not self._due_changes:
            self._pass_time_to(record)
        if not self._due_changes:
            self._differ(record.seq, f"a change that does not come about anew: {_words(record.body)}")
            return
        anew = change_body(self._due_changes.pop(0))
        if not _alike(record.body, anew):
            self._differ(record.seq, f"recorded is {_words(record.body)}; judged anew it is {_words(anew)}")

    def _compare_episode(self, record: StoredRecord) -> None:
        if not self._due_episodes:
            self._differ(record.seq, "an episode that does not come about anew")
            return
        anew = episode_body(self._due_episodes.pop(0))
        if not _alike(record.body, anew):
            self._differ(record.seq, "an episode that is another when judged anew")

    def _settle(self, seq: int) -> None:
        """Nothing may be due any more where other records begin."""
        for change in self._due_changes:
            self._differ(seq, f"a change is missing: {_words(change_body(change))}")
        for _ in self._due_episodes:
            self._differ(seq, "an episode is missing")
        self._due_changes, self._due_episodes = [], []

    def _differ(self, seq: int, text: str) -> None:
        if len(self.differences) < _MOST_DIFFERENCES:
            self.differences.append(Difference(seq=seq, text=text))


def _alike(recorded: Mapping[str, Json], anew: Mapping[str, Json]) -> bool:
    """Whether a record says what came about anew; another machine may round the last digit of a number otherwise."""
    for key, value in anew.items():
        before = recorded.get(key)
        if isinstance(value, float) and isinstance(before, float):
            if not isclose(value, before, rel_tol=1e-9, abs_tol=EQUAL):
                return False
        elif before != value:
            return False
    return True


def _words(body: Mapping[str, Json]) -> str:
    when_us = body.get("time")
    when = "?" if not isinstance(when_us, int) else iso_utc(time_from_us(when_us))
    return (
        f"{body.get('aircraft')} {body.get('operation')} ({body.get('quantity')}) "
        f"from {body.get('from')} to {body.get('to')} at {when}"
    )


def judge_anew(records: Iterable[StoredRecord], progress: Callable[[int], None] | None = None) -> JudgedAnew:
    """Judge a history anew and compare.

    Parameters
    ----------
    records
        All of them, in order.
    progress
        Told now and then how many records are done.
    """
    anew = _Anew()
    seq = 0
    for record in records:
        anew.take(record)
        seq = record.seq
        if progress is not None and seq % 5_000 == 0:
            progress(seq)
    anew.finish(seq)
    return JudgedAnew(
        judge=anew.judge,
        settings=anew.reader.settings,
        observations=anew.observations,
        changes=anew.changes,
        differences=tuple(anew.differences),
    )
