"""The board for a picture: from the file and the history, of which nothing is changed."""

from datetime import timedelta
from pathlib import Path

import pytest

from airfield_board.errors import FileFaults
from airfield_board.limits.states import State
from airfield_board.session.board_state import Mode
from airfield_board.session.snapshot import snapshot_state
from tests.session.fields import FLEET, Field, make_field, row_of

COOL_C, WARM_C, HOT_C = 15.0, 24.0, 30.0


@pytest.fixture
def field(tmp_path: Path) -> Field:
    return make_field(tmp_path)


def _recorded(field: Field) -> None:
    """Ten minutes of a recorder: near the limit, then on hold, which somebody acknowledges."""
    field.write(field.row(0, WARM_C))
    recorder = field.open()
    recorder.poll()
    field.append(field.row(5, 28.0))
    field.move_to(5)
    state = recorder.poll()
    recorder.acknowledge([change.number for change in state.changes if change.open], "RK")
    recorder.type_in(time=field.at(6), altimeter_hpa=1013.25, temperature_c=27.5, dewpoint_c=None, initials="MS")
    recorder.close()


def _contents(field: Field) -> dict[str, bytes]:
    return {path.name: path.read_bytes() for path in field.folder.iterdir()}


def test_without_a_history_the_file_alone_tells(field: Field) -> None:
    field.write(field.row(0, WARM_C), field.row(5, 28.0))
    before = _contents(field)
    state, notes = snapshot_state(field.profile, None, field.at(6))
    assert row_of(state, "trainer").state is State.HOLD
    assert (state.mode, notes) == (Mode.LIVE, ())
    past, _ = snapshot_state(field.profile, field.at(4), field.at(6))
    assert row_of(past, "trainer").state is State.NEAR
    assert past.mode is Mode.PAST
    assert _contents(field) == before


def test_a_hold_of_the_history_is_shown_though_the_file_has_begun_anew(field: Field) -> None:
    _recorded(field)
    field.write(field.row(9, WARM_C))
    before = _contents(field)
    state, notes = snapshot_state(field.profile, None, field.at(10))
    trainer = row_of(state, "trainer")
    assert trainer.state is State.HOLD
    assert trainer.shown is not None
    assert trainer.shown.since == field.at(5)
    assert notes == ()
    assert {change.acknowledged_by for change in state.changes if change.needs_acknowledgement} == {"RK"}
    assert len(state.curve.time_us) == 4
    assert _contents(field) == before


def test_a_typed_in_reading_of_the_history_is_shown_with_its_initials(field: Field) -> None:
    _recorded(field)
    state, _ = snapshot_state(field.profile, None, field.at(7))
    assert state.observation is not None
    assert (state.observation.time, state.observation.initials) == (field.at(6), "MS")


def test_a_past_moment_knows_nothing_of_what_came_later(field: Field) -> None:
    _recorded(field)
    field.observations.unlink()
    state, notes = snapshot_state(field.profile, field.at(4), field.at(600))
    assert row_of(state, "trainer").state is State.NEAR
    assert all(change.time <= field.at(4) for change in state.changes)
    assert any("observations.csv" in note for note in notes)
    later, _ = snapshot_state(field.profile, field.at(6), field.at(600))
    assert row_of(later, "trainer").state is State.HOLD
    assert [change.state for change in later.changes] == [State.HOLD]
    stale, _ = snapshot_state(field.profile, field.at(22), field.at(600))
    assert {row.state for row in stale.operations} == {State.NO_DATA}


def test_rows_of_the_file_that_the_history_does_not_have_join_those_it_has(field: Field) -> None:
    _recorded(field)
    field.append("rubbish\n", field.row(8, 27.0))
    state, _ = snapshot_state(field.profile, field.at(9), field.at(600))
    assert state.observation is not None
    assert state.observation.time == field.at(8)
    assert list(state.curve.time_us) == [int(field.at(minutes).timestamp() * 1_000_000) for minutes in (0, 5, 6, 8)]


def test_a_limit_that_waits_for_acceptance_is_not_used(field: Field) -> None:
    _recorded(field)
    field.fleet.write_text(FLEET.replace("6350", "9000"), encoding="utf-8")
    state, _ = snapshot_state(field.profile, None, field.at(7))
    shown = row_of(state, "trainer").shown
    assert shown is not None
    assert (shown.limit, shown.state) == (6350, State.HOLD)


def test_a_limit_tightened_since_acts(field: Field) -> None:
    field.write(field.row(0, WARM_C))
    recorder = field.open()
    assert row_of(recorder.poll(), "trainer").state is State.NEAR
    recorder.close()
    field.fleet.write_text(FLEET.replace("6350", "5000"), encoding="utf-8")
    state, _ = snapshot_state(field.profile, None, field.at(1))
    assert row_of(state, "trainer").state is State.HOLD


def test_a_history_that_cannot_be_read_is_said_and_the_file_tells(field: Field) -> None:
    field.write(field.row(0, HOT_C))
    field.history.write_bytes(b"no history at all" * 100)
    state, notes = snapshot_state(field.profile, None, field.at(1))
    assert row_of(state, "trainer").state is State.HOLD
    (note,) = notes
    assert note.startswith("without the history: ")


def test_a_reading_that_has_grown_too_old_is_no_data(field: Field) -> None:
    _recorded(field)
    state, _ = snapshot_state(field.profile, None, field.at(0) + timedelta(days=2))
    assert {row.state for row in state.operations} == {State.NO_DATA}


def test_settings_with_faults_are_an_error(field: Field) -> None:
    field.fleet.write_text("schema: 1\naircraft: 7\n", encoding="utf-8")
    with pytest.raises(FileFaults):
        snapshot_state(field.profile, None, field.at(0))


def test_a_past_moment_is_judged_by_the_limits_in_force_then(field: Field) -> None:
    field.write(field.row(0, WARM_C))
    recorder = field.open()
    recorder.poll()
    field.append(field.row(5, 28.0))
    field.move_to(5)
    recorder.poll()
    field.fleet.write_text(FLEET.replace("6350", "9000"), encoding="utf-8")
    field.move_to(6)
    recorder.poll()
    recorder.accept_settings("R. Keel")
    field.move_to(7)
    recorder.close()
    assert _trainer_at(field, 5.5) == (6350, State.HOLD)
    assert _trainer_at(field, 6.5)[0] == 9000
    assert _trainer_at(field, 8)[0] == 9000
    field.fleet.write_text(FLEET.replace("6350", "5000"), encoding="utf-8")
    assert _trainer_at(field, 8) == (5000, State.HOLD)


def _trainer_at(field: Field, minutes: float) -> tuple[float | None, State]:
    shown = row_of(snapshot_state(field.profile, field.at(minutes), field.at(600))[0], "trainer").shown
    assert shown is not None
    return shown.limit, shown.state


def test_a_past_moment_before_any_settings_of_the_history_goes_by_the_files(field: Field) -> None:
    _recorded(field)
    field.write(field.row(-60, HOT_C))
    state, _ = snapshot_state(field.profile, field.at(-59), field.at(600))
    assert row_of(state, "trainer").state is State.HOLD
