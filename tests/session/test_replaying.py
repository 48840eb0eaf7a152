"""A replay gives the same with a history as without, however its rows are parted, and the history proves it."""

import random
from collections.abc import Sequence
from datetime import timedelta
from pathlib import Path

import pytest

from airfield_board.configuration.profile import load_airfield
from airfield_board.errors import UserError
from airfield_board.history.records import RecordKind
from airfield_board.history.store import History
from airfield_board.limits.states import State
from airfield_board.observations.observation import Verdict
from airfield_board.session.board_json import change_json, episode_json
from airfield_board.session.replaying import Replay, replay
from airfield_board.session.verifying import verify_history
from airfield_board.session.whole_files import read_for
from tests.session.fields import Field, make_field

END_MIN = 100_000


@pytest.fixture
def field(tmp_path: Path) -> Field:
    return make_field(tmp_path)


def _replayed(field: Field, *, history_path: Path | None = None, told: list[int] | None = None) -> Replay:
    profile, fleet = load_airfield(field.profile)
    read = read_for(profile, field.observations, finished=True)
    return replay(
        profile,
        fleet,
        read,
        field.at(END_MIN),
        history_path=history_path,
        progress=None if told is None else told.append,
    )


def _a_day(field: Field, seed: int) -> Sequence[str]:
    chance = random.Random(seed)
    rows, minutes, temperature_c = [], 0.0, 22.0
    for _ in range(150):
        minutes += chance.choice([0, 1, 5, 5, 5, 20, 200])
        temperature_c = min(max(temperature_c + chance.choice([-2, -1, 0, 0.1, 1, 2, 9, -9]), 10), 35)
        rows.append(field.row(minutes, round(temperature_c, 1)))
        if chance.random() < 0.05:
            rows.append("rubbish\n")
    rows[10:14] = reversed(rows[10:14])
    return rows


@pytest.mark.parametrize("seed", range(4))
def test_with_and_without_a_history_and_in_whatever_parts_it_is_the_same(
    field: Field, seed: int, monkeypatch: pytest.MonkeyPatch
) -> None:
    field.write(*_a_day(field, seed))
    told: list[int] = []
    whole = _replayed(field, told=told)
    assert told == [whole.rows]
    assert len(whole.changes) > 10
    monkeypatch.setattr("airfield_board.session.replaying._RECORDED_BATCH_ROWS", 7)
    told = []
    parted = _replayed(field, history_path=field.history, told=told)
    assert parted == whole
    assert told == sorted(told)
    assert len(told) > 10
    assert told[-1] == whole.rows
    findings = verify_history(field.history, closing_hash=None, rejudge=True)
    assert findings.whole, findings.lines
    history = History.open_read_only(field.history)
    kinds = [record.kind for record in history.records()]
    history.close()
    assert kinds.count(RecordKind.OBSERVATION) == whole.rows
    assert kinds.count(RecordKind.STOP) == 1


def test_changes_and_episodes_are_those_of_the_rules(field: Field) -> None:
    # By hand: off hold at the first reading 10 min after the first one at or below 6,350 - 150 ft, some 25 °C.
    temperatures_c = (20.0, 24.0, 28.0, 24.0, 23.0, 22.9)
    field.write(*(field.row(5 * place, value) for place, value in enumerate(temperatures_c)))
    found = _replayed(field)
    trainer = [change_json(change) for change in found.changes if change.key.aircraft == "trainer"]
    assert [(change["time"], change["from"], change["to"]) for change in trainer] == [
        ("2026-07-14T18:00:00Z", None, "go"),
        ("2026-07-14T18:05:00Z", "go", "near"),
        ("2026-07-14T18:10:00Z", "near", "hold"),
        ("2026-07-14T18:25:00Z", "hold", "near"),
    ]
    (episode,) = [episode_json(episode) for episode in found.episodes if episode.key.aircraft == "trainer"]
    assert (episode["start"], episode["end"]) == ("2026-07-14T18:10:00Z", "2026-07-14T18:25:00Z")
    assert (episode["minutes"], episode["minutes_without_data"]) == (15, 0)
    assert found.summary() == {
        "kind": "summary",
        "rows": 6,
        "valid": 6,
        "suspect": 0,
        "rejected": 0,
        "superseded": 0,
    }


def test_after_the_last_row_nothing_more_happens_and_an_open_episode_has_no_end(field: Field) -> None:
    field.write(field.row(0, 30.0), field.row(5, 31.0))
    for found in (_replayed(field), _replayed(field, history_path=field.history)):
        assert {change.state for change in found.changes} == {State.HOLD, State.REDUCED}
        (episode,) = [episode_json(episode) for episode in found.episodes]
        assert (episode["end"], episode["minutes"]) == (None, 5)
    assert verify_history(field.history, closing_hash=None, rejudge=True).whole


def test_rows_in_the_future_are_rejected_and_no_time_passes_with_them(field: Field) -> None:
    field.write(field.row(0, 20.0), field.row(END_MIN + 6, 20.0), field.row(END_MIN + 60, 20.0))
    for found in (_replayed(field), _replayed(field, history_path=field.history)):
        assert found.counts[Verdict.REJECTED] == 2
        assert {change.state for change in found.changes} == {State.GO}
    assert verify_history(field.history, closing_hash=None, rejudge=True).whole


def test_a_file_without_a_row_or_without_a_time_gives_nothing(field: Field) -> None:
    field.write()
    assert _replayed(field, history_path=field.history).rows == 0
    field.write("rubbish\n", "more,rubbish,here\n")
    other = field.folder / "other.db"
    found = _replayed(field, history_path=other)
    assert (found.rows, found.changes) == (2, ())
    assert verify_history(other, closing_hash=None, rejudge=True).whole


def test_a_history_that_cannot_be_made_is_said(field: Field) -> None:
    field.write(field.row(0, 20.0))
    with pytest.raises(UserError, match="the folder"):
        _replayed(field, history_path=field.folder / "nowhere" / "history.db")


def test_the_recorder_goes_on_where_a_replay_ended(field: Field) -> None:
    field.write(field.row(0, 24.0), field.row(5, 30.0))
    _replayed(field, history_path=field.history)
    field.clock.move_to(field.at(6) + timedelta(seconds=1))
    recorder = field.open()
    state = recorder.poll()
    recorder.close()
    assert {row.state for row in state.operations} == {State.HOLD, State.REDUCED}
    findings = verify_history(field.history, closing_hash=None, rejudge=True)
    assert findings.whole, findings.lines
    history = History.open_read_only(field.history)
    assert sum(record.kind is RecordKind.OBSERVATION for record in history.records()) == 2
    history.close()
