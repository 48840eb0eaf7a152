"""The recorder: from the file to the board, and what it writes down."""

import json
from pathlib import Path

import pytest

from airfield_board.configuration.profile import load_airfield
from airfield_board.errors import FileFaults, UserError
from airfield_board.history.records import RecordKind
from airfield_board.history.store import History
from airfield_board.limits.states import State
from airfield_board.session.board_state import Freshness, Weight
from airfield_board.session.recording import place_of_history
from airfield_board.session.rejudge import judge_anew
from airfield_board.session.verifying import verify_history
from tests.session.fields import FLEET, PROFILE, Field, make_field, row_of

COOL_C, WARM_C, HOT_C = 15.0, 24.0, 30.0


@pytest.fixture
def field(tmp_path: Path) -> Field:
    return make_field(tmp_path)


def test_without_a_file_every_row_is_without_data_and_the_reason_is_said(field: Field) -> None:
    recorder = field.open()
    state = recorder.poll()
    assert {row.state for row in state.operations} == {State.NO_DATA}
    assert state.conditions is None
    assert state.observation is None
    assert any("observations.csv" in message.text for message in state.messages)
    recorder.close()


def test_a_cool_reading_lets_go_and_a_hot_one_holds_at_once(field: Field) -> None:
    field.write(field.row(0, COOL_C))
    recorder = field.open()
    state = recorder.poll()
    assert row_of(state, "trainer").state is State.GO
    field.append(field.row(5, COOL_C + 5), field.row(10, COOL_C + 10), field.row(15, HOT_C))
    field.move_to(15)
    state = recorder.poll()
    trainer = row_of(state, "trainer")
    assert trainer.state is State.HOLD
    assert trainer.shown is not None
    assert trainer.shown.since == field.at(15)
    assert trainer.shown.margin is not None
    assert trainer.shown.margin < 0
    assert trainer.shown.clearing is not None
    assert trainer.shown.clearing.needs == 6200
    (change,) = [change for change in state.changes if change.state is State.HOLD]
    assert change.open
    assert change.label == "Two-seat trainer · Departure"
    recorder.close()


def test_a_reading_that_grows_too_old_takes_every_state(field: Field) -> None:
    field.write(field.row(0, COOL_C))
    recorder = field.open()
    recorder.poll()
    field.move_to(15)
    assert row_of(recorder.poll(), "trainer").state is State.GO
    field.move_to(15.02)
    state = recorder.poll()
    assert {row.state for row in state.operations} == {State.NO_DATA}
    assert state.conditions is None
    assert state.observation is not None
    assert state.observation.freshness is Freshness.STALE
    shown = row_of(state, "trainer").shown
    assert shown is not None
    assert (shown.was, shown.was_at, shown.since) == (State.GO, field.at(0), field.at(15))
    (change,) = state.changes[:1]
    assert (change.label, change.state, change.time) == ("All 2 operations", State.NO_DATA, field.at(15))
    recorder.close()


def test_freshness_ages_after_two_expected_intervals(field: Field) -> None:
    field.write(field.row(0, COOL_C))
    recorder = field.open()
    found = []
    for minutes in (10, 10.1):
        field.move_to(minutes)
        observation = recorder.poll().observation
        assert observation is not None
        found.append(observation.freshness)
    assert found == [Freshness.FRESH, Freshness.AGEING]
    recorder.close()


def test_a_clock_set_back_behind_the_reading_shows_no_data(field: Field) -> None:
    field.write(field.row(0, COOL_C))
    recorder = field.open()
    recorder.poll()
    field.move_to(-6)
    assert {row.state for row in recorder.poll().operations} == {State.NO_DATA}
    recorder.close()


def test_states_and_holds_are_restored_at_start(field: Field) -> None:
    field.write(field.row(0, HOT_C))
    recorder = field.open()
    recorder.poll()
    field.append(field.row(5, COOL_C + 10))
    field.move_to(5)
    before = recorder.poll()
    recorder.close()
    recorder = field.open()
    after = recorder.poll()
    assert row_of(after, "trainer") == row_of(before, "trainer")
    assert row_of(after, "trainer").state is State.HOLD
    assert after.changes == before.changes
    assert list(after.curve.time_us) == list(before.curve.time_us)
    recorder.close()


def test_a_killed_recorder_is_carried_on_without_recording_a_row_twice(field: Field) -> None:
    field.write(field.row(0, HOT_C))
    recorder = field.open()
    recorder.poll()
    history = recorder._recording.history
    assert history is not None
    history.close()  # no stop is recorded, as after a kill
    recorder = field.open()
    recorder.poll()
    recorder.close()
    kept = History.open_read_only(field.history)
    kinds = [record.kind for record in kept.records()]
    kept.close()
    assert kinds.count(RecordKind.OBSERVATION) == 1
    assert kinds.count(RecordKind.START) == 2
    assert kinds.count(RecordKind.STOP) == 1


def test_what_was_recorded_judged_anew_is_the_same(field: Field) -> None:
    field.write(field.row(0, COOL_C))
    recorder = field.open()
    recorder.poll()
    for minutes, temperature_c in ((5, 20.0), (10, 25.0), (15, HOT_C), (20, 26.0), (25, 22.0), (36, 21.0), (41, 40.0)):
        field.append(field.row(minutes, temperature_c))
        field.move_to(minutes)
        recorder.poll()
    field.append("rubbish\n", field.row(42, 41.0), field.row(30, 20.0))
    field.move_to(50)
    recorder.poll()
    field.move_to(80)
    recorder.poll()
    recorder.type_in(time=field.at(79), altimeter_hpa=1013.0, temperature_c=38.0, dewpoint_c=None, initials="RK")
    recorder.close()
    history = History.open_read_only(field.history)
    anew = judge_anew(history.records())
    history.close()
    assert anew.differences == ()
    assert anew.observations == 12
    assert anew.changes > 6
    findings = verify_history(field.history, closing_hash=None, rejudge=True)
    assert findings.whole, findings.lines


def test_a_changed_judgement_is_found_when_judged_anew(field: Field) -> None:
    field.write(field.row(0, HOT_C))
    recorder = field.open()
    recorder.poll()
    recorder.close()
    history = History.open_read_only(field.history)
    records = list(history.records())
    history.close()
    without = [record for record in records if record.kind is not RecordKind.CHANGE]
    assert any("a change is missing" in difference.text for difference in judge_anew(without).differences)


def test_acknowledging_is_recorded_and_can_be_withdrawn(field: Field) -> None:
    field.write(field.row(0, HOT_C))
    recorder = field.open()
    (change, *_) = (each for each in recorder.poll().changes if each.open)
    state = recorder.acknowledge([change.number], "RK")
    (now,) = (each for each in state.changes if each.number == change.number)
    assert (now.acknowledged_by, now.acknowledged_at, now.open) == ("RK", field.at(0), False)
    recorder.close()
    recorder = field.open()
    (kept,) = (each for each in recorder.poll().changes if each.number == change.number)
    assert kept.acknowledged_by == "RK"
    state = recorder.withdraw_acknowledgement([change.number], "RK")
    assert any(each.number == change.number and each.open for each in state.changes)
    recorder.close()


def test_a_typed_in_reading_counts_bears_its_initials_and_gives_way_to_a_newer_row(field: Field) -> None:
    recorder = field.open()
    state = recorder.type_in(
        time=field.at(0), altimeter_hpa=1013.25, temperature_c=HOT_C, dewpoint_c=None, initials="MS"
    )
    assert state.observation is not None
    assert state.observation.initials == "MS"
    assert row_of(state, "trainer").state is State.HOLD
    field.write(field.row(4, HOT_C + 1))
    field.move_to(5)
    state = recorder.poll()
    assert state.observation is not None
    assert (state.observation.initials, state.observation.time) == ("", field.at(4))
    recorder.close()


def test_a_typed_in_reading_that_fails_the_checks_is_refused_with_the_reason_and_recorded(field: Field) -> None:
    recorder = field.open()
    with pytest.raises(UserError, match="altimeter"):
        recorder.type_in(time=field.at(0), altimeter_hpa=700.0, temperature_c=20.0, dewpoint_c=None, initials="MS")
    state = recorder.poll()
    assert {row.state for row in state.operations} == {State.NO_DATA}
    assert state.unused
    recorder.close()


def test_a_tightened_limit_acts_at_once_and_a_loosened_one_waits_for_a_name(field: Field) -> None:
    field.write(field.row(0, WARM_C))
    recorder = field.open()
    assert row_of(recorder.poll(), "trainer").state is not State.HOLD
    field.fleet.write_text(FLEET.replace("6350", "5000"), encoding="utf-8")
    field.move_to(1)
    state = recorder.poll()
    trainer = row_of(state, "trainer")
    assert trainer.state is State.HOLD
    assert trainer.shown is not None
    assert trainer.shown.since == field.at(1)
    field.fleet.write_text(FLEET.replace("6350", "9000"), encoding="utf-8")
    field.move_to(2)
    state = recorder.poll()
    assert state.waiting
    shown = row_of(state, "trainer").shown
    assert shown is not None
    assert shown.limit == 5000
    state = recorder.accept_settings("R. Keel")
    shown = row_of(state, "trainer").shown
    assert shown is not None
    assert shown.limit == 9000
    assert shown.state is State.HOLD, "a hold ends by the rules only"
    assert not state.waiting
    recorder.close()
    assert verify_history(field.history, closing_hash=None, rejudge=True).whole
    history = History.open_read_only(field.history)
    _, tighter, looser = (
        record.body for record in history.records(kinds=(RecordKind.CONFIGURATION,)) if record.body["kind"] == "fleet"
    )
    (accepted,) = history.records(kinds=(RecordKind.SETTINGS_ACCEPTED,))
    history.close()
    (change,) = json.loads(json.dumps(tighter["tightened"]))
    assert (change["was"], change["now"]) == ("6,350 ft", "5,000 ft")
    (waiting,) = json.loads(json.dumps(looser["waiting"]))
    assert (waiting["in_force"], waiting["waiting"]) == ("5,000 ft", "9,000 ft")
    assert accepted.body["name"] == "R. Keel"


def test_a_loosened_limit_still_waits_after_a_restart(field: Field) -> None:
    field.write(field.row(0, WARM_C))
    field.open().close()
    field.fleet.write_text(FLEET.replace("6350", "9000"), encoding="utf-8")
    recorder = field.open()
    state = recorder.poll()
    assert state.waiting
    shown = row_of(state, "trainer").shown
    assert shown is not None
    assert shown.limit == 6350
    recorder.close()
    recorder = field.open()
    assert recorder.poll().waiting
    recorder.accept_settings("R. Keel")
    recorder.close()
    recorder = field.open()
    assert not recorder.poll().waiting
    recorder.close()


def test_a_tightened_limit_acts_when_it_was_changed_while_no_recorder_ran(field: Field) -> None:
    field.write(field.row(0, WARM_C))
    recorder = field.open()
    recorder.poll()
    recorder.close()
    field.fleet.write_text(FLEET.replace("6350", "5000"), encoding="utf-8")
    field.move_to(2)
    recorder = field.open()
    assert row_of(recorder.poll(), "trainer").state is State.HOLD
    recorder.close()
    assert verify_history(field.history, closing_hash=None, rejudge=True).whole


def test_an_invalid_file_leaves_the_last_valid_one_in_force(field: Field) -> None:
    field.write(field.row(0, WARM_C))
    recorder = field.open()
    recorder.poll()
    field.fleet.write_text(FLEET.replace("max_density", "max_densty"), encoding="utf-8")
    state = recorder.poll()
    assert "max_densty" in state.settings_refused
    (message,) = (message for message in state.messages if message.topic == "settings")
    assert message.weight is Weight.ALARM
    assert "the last valid one stays in force" in message.text
    assert state.settings_refused in message.text
    assert row_of(state, "trainer").state is not State.NO_DATA
    field.fleet.write_text(FLEET, encoding="utf-8")
    assert recorder.poll().settings_refused == ""
    recorder.close()


def test_an_invalid_file_at_the_start_is_an_error_with_all_its_faults(field: Field) -> None:
    field.fleet.write_text(FLEET.replace("max_density", "max_densty"), encoding="utf-8")
    field.profile.write_text(PROFILE.replace("elevation_ft: 4120", "elevation_ft: tall"), encoding="utf-8")
    with pytest.raises(FileFaults) as faults:
        field.open()
    assert len(faults.value.faults) >= 3


def test_a_history_that_cannot_be_opened_does_not_keep_the_board_from_judging(field: Field) -> None:
    field.history.mkdir()
    field.write(field.row(0, HOT_C))
    recorder = field.open()
    state = recorder.poll()
    assert row_of(state, "trainer").state is State.HOLD
    assert not state.recording
    assert state.not_recording
    field.history.rmdir()
    (change,) = (each for each in state.changes if each.label.startswith("Two-seat"))
    recorder.acknowledge([change.number], "RK")
    state = recorder.poll()
    assert state.recording
    recorder.close()
    history = History.open_read_only(field.history)
    kinds = [record.kind for record in history.records()]
    history.close()
    assert RecordKind.OBSERVATION in kinds
    assert RecordKind.ACKNOWLEDGEMENT in kinds
    recorder = field.open()
    (kept,) = (each for each in recorder.poll().changes if each.label.startswith("Two-seat"))
    assert kept.acknowledged_by == "RK"
    recorder.close()


def test_a_second_recorder_judges_but_says_that_it_does_not_record(field: Field) -> None:
    field.write(field.row(0, HOT_C))
    first = field.open()
    first.poll()
    second = field.open()
    state = second.poll()
    assert row_of(state, "trainer").state is State.HOLD
    assert not state.recording
    first.close()
    second.poll()
    second.close()
    history = History.open_read_only(field.history)
    kinds = [record.kind for record in history.records()]
    history.close()
    assert kinds.count(RecordKind.OBSERVATION) == 1


def test_a_correction_of_the_newest_row_is_judged(field: Field) -> None:
    field.write(field.row(0, COOL_C))
    recorder = field.open()
    recorder.poll()
    field.append(field.row(0, COOL_C + 1))
    state = recorder.poll()
    assert state.observation is not None
    assert state.observation.temperature_c == COOL_C + 1
    recorder.close()


def test_notes_are_recorded(field: Field) -> None:
    recorder = field.open()
    recorder.note("Wind sock torn", "day", "RK")
    recorder.close()
    history = History.open_read_only(field.history)
    (note,) = history.records(kinds=(RecordKind.NOTE,))
    history.close()
    assert note.body == {"text": "Wind sock torn", "about": "day", "initials": "RK"}


def test_two_airfields_of_one_name_never_share_a_history(tmp_path: Path) -> None:
    places = set()
    for name in ("one", "two"):
        (tmp_path / name).mkdir()
        field = make_field(tmp_path / name, profile=PROFILE.replace("history: history.db\n", ""))
        profile, _ = load_airfield(field.profile)
        place = place_of_history(profile, tmp_path / "data")
        assert place.name.startswith("thistle-bench-")
        assert place == place_of_history(profile, tmp_path / "data")
        places.add(place)
    assert len(places) == 2
