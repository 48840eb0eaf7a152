"""Which rows of a re-read file are new, and that the last of one time always counts."""

from collections.abc import Iterable
from pathlib import Path

import numpy as np
import pytest

from airfield_board.history.records import RecordKind
from airfield_board.history.store import History
from airfield_board.limits.states import State
from airfield_board.observations.observation import NO_TIME_US, ObservationTable
from airfield_board.session.intake import Intake
from tests.session.fields import make_field, row_of


def _table(*rows: tuple[int, str]) -> ObservationTable:
    unknown = np.full(len(rows), np.nan)
    return ObservationTable(
        time_us=np.array([time_us for time_us, _ in rows], dtype=np.int64),
        altimeter_hpa=unknown,
        temperature_c=unknown,
        dewpoint_c=unknown,
        elevation_m=unknown,
        temperature_resolution_c=unknown,
        dewpoint_resolution_c=unknown,
        position=np.arange(len(rows), dtype=np.int64),
        raw=[text for _, text in rows],
    )


def _nothing(from_us: int, until_us: int) -> Iterable[tuple[int, str]]:
    del from_us, until_us
    return ()


def _taken(intake: Intake, *rows: tuple[int, str]) -> list[str]:
    table = intake.new_rows(_table(*rows))
    return [table.raw[row] for row in range(len(table))]


def test_a_row_is_new_once() -> None:
    intake = Intake(_nothing)
    assert _taken(intake, (1, "a"), (2, "b")) == ["a", "b"]
    assert _taken(intake, (1, "a"), (2, "b"), (3, "c")) == ["c"]
    assert _taken(intake, (1, "a"), (2, "b"), (3, "c")) == []


def test_the_last_row_of_a_time_counts_even_where_its_text_has_been_seen() -> None:
    intake = Intake(_nothing)
    assert _taken(intake, (1, "hot"), (1, "cool"), (1, "hot")) == ["hot", "cool", "hot"]
    assert _taken(intake, (1, "hot"), (1, "cool"), (1, "hot")) == []
    assert _taken(intake, (1, "hot"), (1, "cool")) == ["cool"]
    assert _taken(intake, (1, "hot")) == ["hot"]


def test_one_text_at_two_times_is_two_rows() -> None:
    assert _taken(Intake(_nothing), (1, "same"), (2, "same")) == ["same", "same"]


def test_of_a_file_that_was_only_appended_to_the_rows_behind_are_looked_at() -> None:
    intake = Intake(_nothing)
    assert _taken(intake, (1, "a"), (2, "b")) == ["a", "b"]
    table = _table((1, "a"), (2, "b"), (2, "c"), (3, "d"))
    fresh = intake.new_rows(table, new_from=2)
    assert [fresh.raw[row] for row in range(len(fresh))] == ["c", "d"]
    assert _taken(intake, (1, "a"), (2, "b"), (2, "c"), (3, "d")) == []
    assert _taken(intake, (1, "a"), (2, "b")) == ["b"], "the correction is gone from the file"


def test_rows_without_a_time_are_known_by_their_text() -> None:
    intake = Intake(_nothing)
    assert _taken(intake, (NO_TIME_US, "rubbish"), (5, "a")) == ["rubbish", "a"]
    assert _taken(intake, (NO_TIME_US, "rubbish"), (NO_TIME_US, "more"), (5, "a")) == ["more"]


def test_what_was_recorded_before_is_recalled_for_as_far_back_as_the_file_goes() -> None:
    asked: list[tuple[int, int]] = []

    def recall(from_us: int, until_us: int) -> Iterable[tuple[int, str]]:
        asked.append((from_us, until_us))
        recorded = [(10, "x"), (10, "y"), (20, "z")]
        return [row for row in recorded if from_us <= row[0] < until_us]

    intake = Intake(recall)
    assert _taken(intake, (20, "z"), (30, "new")) == ["new"]
    assert _taken(intake, (10, "x"), (10, "y"), (20, "z"), (30, "new")) == []
    assert [from_us for from_us, _ in asked] == [20, 10]
    assert _taken(intake, (10, "x"), (20, "z"), (30, "new")) == ["x"], "the file no longer has the correction"


def test_a_correction_back_to_an_earlier_text_is_judged(tmp_path: Path) -> None:
    field = make_field(tmp_path)
    hot, cool = field.row(0, 35.0), field.row(0, 25.0)
    field.write(hot)
    recorder = field.open()
    assert row_of(recorder.poll(), "trainer").state is State.HOLD
    field.append(cool)
    recorder.poll()
    field.append(hot)
    state = recorder.poll()
    assert state.observation is not None
    assert state.observation.temperature_c == 35.0
    recorder.close()
    recorder = field.open()
    state = recorder.poll()
    assert state.observation is not None
    assert state.observation.temperature_c == 35.0
    recorder.close()


def test_of_very_many_rows_only_those_that_still_stand_in_the_file_are_kept(monkeypatch: pytest.MonkeyPatch) -> None:
    monkeypatch.setattr("airfield_board.session.intake._MOST_KNOWN", 5)
    intake = Intake(_nothing)
    first = [(minute, f"row {minute}") for minute in range(4)]
    assert _taken(intake, *first) == ["row 0", "row 1", "row 2", "row 3"]
    following = [(minute, f"row {minute}") for minute in range(2, 7)]
    assert _taken(intake, *following) == ["row 4", "row 5", "row 6"]
    assert _taken(intake, *following) == []
    assert _taken(intake, (0, "row 0"), *following) == ["row 0"]


def _minutes(first: int, last: int) -> list[tuple[int, str]]:
    return [(minute, f"row {minute}") for minute in range(first, last)]


def test_rows_older_than_what_is_read_are_forgotten_and_recalled_where_the_file_is_read_further_back(
    monkeypatch: pytest.MonkeyPatch,
) -> None:
    monkeypatch.setattr("airfield_board.session.intake._SLACK", 0)
    recorded: list[tuple[int, str]] = []
    asked: list[tuple[int, int]] = []

    def recall(from_us: int, until_us: int) -> Iterable[tuple[int, str]]:
        asked.append((from_us, until_us))
        return [row for row in recorded if from_us <= row[0] < until_us]

    intake = Intake(recall)
    for end in range(1, 200):
        part = _minutes(max(end - 10, 0), end)
        recorded += [(end - 1, text) for text in _taken(intake, *part)]
        intake.forget_recorded()
    assert recorded == _minutes(0, 199), "each row is given out once"
    assert len(asked) == 1, "nothing is recalled while the file only grows"
    assert _taken(intake, *_minutes(0, 199)) == []
    first_us, until_us = asked[-1]
    assert first_us == 0
    assert 170 <= until_us <= 189, "what is remembered goes back little further than what is read"


def test_a_correction_forgotten_meanwhile_still_counts_when_the_file_is_read_further_back(
    monkeypatch: pytest.MonkeyPatch,
) -> None:
    monkeypatch.setattr("airfield_board.session.intake._SLACK", 0)
    recorded = [(1, "hot"), (1, "cool")]
    intake = Intake(lambda from_us, until_us: [row for row in recorded if from_us <= row[0] < until_us])
    assert _taken(intake, *recorded) == []
    recorded += [(minute, text) for minute, text in _minutes(5, 30) if _taken(intake, (minute, text))]
    intake.forget_recorded()
    assert _taken(intake, (1, "hot"), (1, "cool"), *_minutes(5, 30)) == []
    assert _taken(intake, (1, "hot"), *_minutes(5, 30)) == ["hot"]


def test_rows_that_could_not_be_recorded_are_not_forgotten(tmp_path: Path, monkeypatch: pytest.MonkeyPatch) -> None:
    monkeypatch.setattr("airfield_board.session.intake._SLACK", 0)
    field = make_field(tmp_path)
    field.history.mkdir()
    rows = [field.row(minute, 20.0 + minute / 10) for minute in range(15)]
    field.write(rows[0])
    recorder = field.open()
    for minute, row in enumerate(rows[1:], 1):
        field.write(row)  # a file that holds only its newest row
        field.move_to(minute)
        state = recorder.poll()
        assert not state.recording
    field.write(*rows)
    recorder.poll()
    field.history.rmdir()
    state = recorder.poll()
    assert state.recording
    recorder.close()
    history = History.open_read_only(field.history)
    times = [record.body["time"] for record in history.records(kinds=(RecordKind.OBSERVATION,))]
    history.close()
    assert len(times) == len(set(times)) == len(rows)
