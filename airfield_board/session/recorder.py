"""The recorder: one poll, start to finish, and everything else a person can ask of it."""

import re
from collections.abc import Sequence
from dataclasses import replace
from datetime import datetime
from pathlib import Path
from zoneinfo import ZoneInfo

import numpy as np
import platformdirs

from airfield_board import __version__
from airfield_board.clock import Clock, local_day_bounds, time_from_us, us_from_time
from airfield_board.configuration.model import Profile
from airfield_board.configuration.profile import load_airfield
from airfield_board.errors import UserError
from airfield_board.history.errors import HistoryLocked
from airfield_board.history.lock import holder_of
from airfield_board.history.records import Json, Record, RecordKind
from airfield_board.history.store import History
from airfield_board.limits.rules import Episode, LimitChange
from airfield_board.observations.observation import ObservationTable, Verdict
from airfield_board.observations.source import FileSource, SourceReading, SourceRules
from airfield_board.session.board import board_state
from airfield_board.session.board_state import BoardState, Message, Mode, SettingChange, Weight
from airfield_board.session.day_record import KEPT_US, DayRecord
from airfield_board.session.intake import Intake
from airfield_board.session.judge import Judge, Judged
from airfield_board.session.recording import Recording, late, place_of_history
from airfield_board.session.records import (
    TYPED_IN,
    change_records,
    configuration_records,
    empty_table,
    observation_records,
    observation_steps,
    typed_row,
)
from airfield_board.session.restoring import restored, settings_at_start, settings_from_history
from airfield_board.session.settings import Airfield, SettingsFiles
from airfield_board.session.status import RowStates, StatusLog
from airfield_board.units import HOUR_US

_OVERLAP_US = 3 * HOUR_US
_NUMBERS = re.compile(r"\d+")


class Recorder:
    """Takes what the observation file says through checks and rules, records it, and answers with the board.

    Belongs to the thread that opened it. Use `open`.

    Parameters
    ----------
    airfield
        Profile and fleet as read.
    clock
        The time it goes by.
    mode
        What the board is fed with.
    recording
        Where what happens is written down.
    watch_settings
        Whether changed settings files are read while it runs.
    """

    def __init__(
        self, airfield: Airfield, *, clock: Clock, mode: Mode, recording: Recording, watch_settings: bool
    ) -> None:
        self._clock = clock
        self._mode = mode
        self._recording = recording
        self._files = SettingsFiles(airfield) if watch_settings else None
        self._refused = ""
        self._warnings: list[tuple[int, str]] = []
        self._source_says: tuple[str, ...] = ()
        self._heard: set[str] = set()
        self._begin(airfield, clock.now())

    def _begin(self, airfield: Airfield, now: datetime) -> None:
        """Go on where the history ends."""
        history = self._recording.history
        self._settings_since = now
        kept = settings_from_history(history, airfield)
        start = restored(history, airfield if kept is None else kept.in_force, now)
        self._settings, new_version = settings_at_start(kept, airfield, now)
        self._judge: Judge = start.judge
        self._day: DayRecord = start.day
        self._status: StatusLog = start.status
        self._intake = Intake(start.recall)
        self._read_back_to_us = start.read_back_to_us
        self._doubt = start.doubt
        self._rows = RowStates(self._judge)
        self._step_us, self._step = 0, 0
        self._source = _source(self._settings.in_force[0])
        # The settings may have changed while no recorder ran: what they tighten must act before the first poll.
        changes, ended = self._judge.change_settings(*self._settings.in_force, us_from_time(now))
        self._write(self._version_records(now) if new_version else [], changes, ended, now)

    def _begin_again(self, now: datetime) -> None:
        """Go on where a history ends that could not be opened before; it knows of holds that nothing else tells of.

        What was taken meanwhile is taken anew, as if it had come now. States and their acknowledgements of that time
        fall away: they were judged without knowing what came before.
        """
        kept_back = self._recording.take_kept_back()
        self._begin(self._settings.read, now)
        for rows, form in observation_steps(kept_back):
            self._take(rows if form == TYPED_IN else self._intake.new_rows(rows), form, now)
        told = [late(record) for record in kept_back if record.kind in (RecordKind.NOTE, RecordKind.MESSAGE)]
        if told:
            self._write(told, (), (), now)

    @classmethod
    def open(
        cls,
        profile_path: Path,
        *,
        clock: Clock,
        mode: Mode,
        history_path: Path | None = None,
        loaded: Airfield | None = None,
        watch_settings: bool = True,
    ) -> "Recorder":
        """Open an airfield's profile, its fleet and its history.

        A history that cannot be opened does not keep the board from judging: it then says that nothing is recorded.

        Parameters
        ----------
        history_path
            Of the history, instead of the profile's.
        loaded
            Profile and fleet, where they have been read a moment ago.

        Raises
        ------
        FileFaults
            Where profile or fleet are not valid.
        """
        airfield = loaded or load_airfield(profile_path)
        path = history_path or place_of_history(airfield[0], Path(platformdirs.user_data_dir("airfield-board")))

        def open_history() -> History:
            try:
                path.parent.mkdir(parents=True, exist_ok=True)
            except OSError as error:
                raise UserError(f"{path.parent}: {error.strerror}") from error
            return History.open(path, now=clock.now(), program_version=__version__)

        try:
            recording = Recording(open_history(), "", open_history)
        except HistoryLocked as error:
            # Locked by a recorder: this one only watches. Locked by anything else: it is tried again.
            recording = Recording(None, str(error), None if holder_of(path) is not None else open_history)
        except UserError as error:
            recording = Recording(None, str(error), open_history)
        return cls(airfield, clock=clock, mode=mode, recording=recording, watch_settings=watch_settings)

    # -- what a person or a timer asks

    def poll(self) -> BoardState:
        """Look at the settings and the observation file once, judge and record what is new."""
        now = self._clock.now()
        self._look_for_history(now)
        self._look_at_settings(now)
        reading = self._source.read(now, time_from_us(self._read_back_to_us))
        self._hear(reading, now)
        rows = empty_table()
        if reading.table is not None and reading.fresh:
            rows = self._intake.new_rows(reading.table, reading.new_from)
        self._take(rows, reading.format or "", now)
        return self._state(now)

    def _hear(self, reading: SourceReading, now: datetime) -> None:
        """Keep what the source says for the screen; record what it says for the first time."""
        said = (*reading.messages, *reading.notes)
        kinds = {_NUMBERS.sub("#", text) for text in said}
        for text in said:
            if _NUMBERS.sub("#", text) not in self._heard:
                body: dict[str, Json] = {"topic": "source", "text": text}
                self._write([Record(kind=RecordKind.MESSAGE, at=now, body=body)], (), (), now)
        self._heard = kinds
        self._source_says = reading.messages

    def type_in(
        self,
        *,
        time: datetime,
        altimeter_hpa: float,
        temperature_c: float,
        dewpoint_c: float | None,
        initials: str,
    ) -> BoardState:
        """Take an observation typed in by a person; it passes the same checks as a row of the file.

        Raises
        ------
        UserError
            With the reason, where the checks do not let it be used; it is recorded all the same.
        """
        now = self._clock.now()
        rows = typed_row(time, altimeter_hpa, temperature_c, dewpoint_c, initials)
        judged = self._take(rows, TYPED_IN, now)
        if judged.checked.verdict[0] != Verdict.VALID:
            raise UserError(f"Not used: {judged.checked.reason.get(0, 'it does not pass the checks')}.")
        if judged.checked.late[0]:
            raise UserError("Not the current observation: a newer one is there already. It fills the day.")
        return self._state(now)

    def acknowledge(self, numbers: Sequence[int], initials: str) -> BoardState:
        """Record that a person has seen status changes."""
        now = self._clock.now()
        waiting = self._status.acknowledge(numbers, initials, now)
        if waiting:
            self._write_about(RecordKind.ACKNOWLEDGEMENT, waiting, initials, now)
        return self._state(now)

    def withdraw_acknowledgement(self, numbers: Sequence[int], initials: str) -> BoardState:
        """Record that an acknowledgement was a mistake; both stay in the history."""
        now = self._clock.now()
        known = self._status.withdraw(numbers)
        if known:
            self._write_about(RecordKind.ACKNOWLEDGEMENT_WITHDRAWN, known, initials, now)
        return self._state(now)

    def accept_settings(self, name: str, *, seen: Sequence[SettingChange] | None = None) -> BoardState:
        """Put the waiting settings in force, in the name of a person.

        Parameters
        ----------
        seen
            What the person saw waiting; None: it is not known.

        Raises
        ------
        UserError
            Where something else waits by now: the files have changed since the person looked.
        """
        now = self._clock.now()
        if seen is not None and tuple(seen) != self._settings.waiting:
            raise UserError("Nothing was accepted: the files have changed since. Look at what waits now.")
        if self._settings.waiting:
            waiting: list[Json] = [
                {"where": each.where, "in_force": each.in_force, "waiting": each.waiting}
                for each in self._settings.waiting
            ]
            body: dict[str, Json] = {"name": name, "accepted": waiting}
            self._settings.accept()
            self._put_in_force([Record(kind=RecordKind.SETTINGS_ACCEPTED, at=now, body=body)], now)
        return self._state(now)

    def note(self, text: str, about: str, initials: str) -> BoardState:
        """Record a note."""
        now = self._clock.now()
        body: dict[str, Json] = {"text": text, "about": about, "initials": initials}
        self._write([Record(kind=RecordKind.NOTE, at=now, body=body)], (), (), now)
        return self._state(now)

    def close(self) -> None:
        """Record the stop and close the history.

        Raises
        ------
        NotRecorded
            Where something could not be recorded.
        """
        now = self._clock.now()
        self._look_for_history(now)
        if self._recording.kept_back:
            self._write([], (), (), now)
        self._recording.close(now)

    def _look_for_history(self, now: datetime) -> None:
        if self._recording.opens() and self._recording.knows_more():
            self._begin_again(now)

    # -- settings

    def _look_at_settings(self, now: datetime) -> None:
        if self._files is None:
            return
        reading = self._files.look()
        if reading.refused != self._refused:
            self._refused = reading.refused
            if reading.refused:
                body: dict[str, Json] = {"topic": "settings", "text": reading.refused}
                self._write([Record(kind=RecordKind.MESSAGE, at=now, body=body)], (), (), now)
        if reading.airfield is not None:
            self._settings.take(reading.airfield, now)
            self._put_in_force(self._version_records(now), now)

    def _version_records(self, now: datetime) -> list[Record]:
        settings = self._settings
        return configuration_records(*settings.read, now, waiting=settings.waiting, tightened=settings.tightened)

    def _put_in_force(self, records: list[Record], now: datetime) -> None:
        before = self._judge.profile.observations
        changes, ended = self._judge.change_settings(*self._settings.in_force, us_from_time(now))
        self._settings_since = now
        after = self._settings.in_force[0].observations
        if (before.file, before.station, before.time_zone) != (after.file, after.station, after.time_zone):
            self._source = _source(self._settings.in_force[0])
        self._day.keep_only(self._judge.limits)
        self._write(records, changes, ended, now)
        self._rows.follow_all(self._judge)

    # -- rows

    def _take(self, rows: ObservationTable, form: str, now: datetime) -> Judged:
        now_us = us_from_time(now)
        was_stale = self._judge.stale
        judged = self._judge.advance(rows, now_us, pass_to_us=now_us)
        checked = judged.checked
        air = judged.conditions
        self._day.add_rows(checked, air.density_altitude_ft, air.uncertainty_ft, now_us)
        valid = np.flatnonzero(checked.verdict == Verdict.VALID)
        self._warnings += [
            (int(checked.rows.time_us[row]), checked.reason[int(row)]) for row in valid if int(row) in checked.reason
        ]
        if len(valid):
            newest_us = int(checked.rows.time_us[valid].max())
            self._read_back_to_us = max(self._read_back_to_us, newest_us - _OVERLAP_US)
        if len(rows):
            # The clock may stand, or have been set back to, where rows were taken before: those were judged apart.
            self._step = self._step + 1 if now_us == self._step_us else 0
            self._step_us = now_us
        records = observation_records(judged, form, now, step=self._step)
        if self._judge.stale and not was_stale and not judged.changes:
            # No change tells that the reading has become stale, and the clock may be set back before one does.
            records.append(Record(kind=RecordKind.CLOCK, at=now, body={"stale": True}))
        self._write(records, judged.changes, judged.ended, now)
        if self._recording.history is not None and not self._recording.kept_back:
            self._intake.forget_recorded()
        return judged

    # -- records

    def _write(
        self, records: Sequence[Record], changes: Sequence[LimitChange], ended: Sequence[Episode], now: datetime
    ) -> None:
        """Record, in the order in which it came about, and follow the rows' states."""
        row_changes = self._rows.follow(changes, self._judge.fleet)
        self._day.add_changes(changes)
        own = [*records, *change_records(changes, ended, now)]
        of_rows = [Record(kind=RecordKind.CHANGE, at=now, body=change.body()) for change in row_changes]
        if not own and not of_rows and not self._recording.kept_back:
            return
        numbers, moved = self._recording.write([*own, *of_rows], self._memory())
        self._status.renumber(moved)
        for number, change in zip(numbers[len(own) :], row_changes, strict=True):
            self._status.add(number, change)

    def _write_about(self, kind: RecordKind, numbers: Sequence[int], initials: str, now: datetime) -> None:
        self._write([Record(kind=kind, at=now, body={"changes": list(numbers), "initials": initials})], (), (), now)

    def _memory(self) -> dict[str, Json]:
        return self._judge.to_json()  # type: ignore[return-value] # plain values only

    # -- the board

    def _state(self, now: datetime) -> BoardState:
        profile = self._settings.in_force[0]
        day_start, _ = local_day_bounds(now, ZoneInfo(profile.time_zone))
        self._day.forget_before(us_from_time(now) - KEPT_US)
        current = self._judge.current
        # A clock set forward by mistake makes nothing old.
        self._status.forget_before(day_start if current is None else min(day_start, time_from_us(current.time_us)))
        self._warnings = [warning for warning in self._warnings if warning[0] >= us_from_time(day_start)]
        not_recording = self._recording.problem
        return replace(
            board_state(self._judge, self._day, self._mode, now),
            changes=self._status.newest_first(day_start),
            messages=self._messages(),
            waiting=self._settings.waiting,
            settings_refused=self._refused,
            settings_since=self._settings_since,
            recording=not not_recording,
            not_recording=not_recording,
            poll_s=profile.observations.poll_s,
        )

    def _messages(self) -> tuple[Message, ...]:
        found = [Message(topic="source", weight=Weight.WARNING, text=text) for text in self._source_says]
        if self._recording.problem:
            kept = f" {self._recording.kept_back} records are kept in memory." if self._recording.kept_back else ""
            found.append(
                Message(
                    topic="recording",
                    weight=Weight.ALARM,
                    text=f"What happens is not being recorded: {self._recording.problem}.{kept}",
                )
            )
        if self._doubt:
            found.append(Message(topic="recording", weight=Weight.WARNING, text=self._doubt))
        if self._refused:
            found.append(
                Message(
                    topic="settings",
                    weight=Weight.ALARM,
                    text=f"A changed file is not valid; the last valid one stays in force.\n{self._refused}",
                )
            )
        for time_us, text in self._warnings[-1:]:
            found.append(
                Message(topic="observation", weight=Weight.WARNING, text=text, time=time_from_us(time_us)),
            )
        return tuple(found)


def _source(profile: Profile) -> FileSource:
    settings = profile.observations
    rules = SourceRules(time_zone=settings.time_zone, station=settings.station, name=settings.file_as_written)
    return FileSource(settings.file, rules)
