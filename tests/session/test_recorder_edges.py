"""The recorder where something is odd: a clock set back, another file, a sensor that stands still."""

from collections import Counter
from pathlib import Path

import pytest

from airfield_board.errors import UserError
from airfield_board.history.records import RecordKind
from airfield_board.history.store import History
from airfield_board.limits.states import State
from airfield_board.session.board_state import Mode
from airfield_board.session.recorder import Recorder
from airfield_board.session.verifying import verify_history
from tests.session.fields import FLEET, PROFILE, Field, make_field, row_of

COOL_C, WARM_C, HOT_C = 15.0, 24.0, 30.0


@pytest.fixture
def field(tmp_path: Path) -> Field:
    return make_field(tmp_path)


def _kinds(field: Field) -> Counter[RecordKind]:
    history = History.open_read_only(field.history)
    found = Counter(record.kind for record in history.records())
    history.close()
    return found


def _verified(field: Field) -> None:
    findings = verify_history(field.history, closing_hash=None, rejudge=True)
    assert findings.whole, findings.lines


def test_a_reading_that_went_stale_without_a_change_stays_so_when_judged_anew_after_a_clock_set_back(
    tmp_path: Path,
) -> None:
    table = """\
schema: 1
aircraft:
  - id: trainer
    name: Two-seat trainer
    operations:
      - name: Departure
        max_temperature_c: {by_pressure_altitude_ft: {5000: 40, 8000: 30}}
"""
    field = make_field(tmp_path, fleet=table)
    field.write(field.row(0, COOL_C))
    recorder = field.open()
    assert row_of(recorder.poll(), "trainer").state is State.NO_DATA, "outside its table"
    field.move_to(16)
    recorder.poll()
    assert _kinds(field)[RecordKind.CLOCK] == 1
    field.move_to(5)
    field.fleet.write_text(table.replace("5000: 40", "3000: 40"), encoding="utf-8")
    recorder.poll()
    state = recorder.accept_settings("R. Keel")
    recorder.close()
    _verified(field)
    recorder = field.open()
    assert recorder.poll().operations == state.operations
    recorder.close()


def test_another_observation_file_is_read_from_the_next_poll_on(field: Field) -> None:
    field.write(field.row(0, COOL_C))
    recorder = field.open()
    recorder.poll()
    (field.folder / "other.csv").write_text("time,altimeter_hpa,temperature_c\n" + field.row(4, 20.0), encoding="utf-8")
    field.profile.write_text(PROFILE.replace("observations.csv", "other.csv"), encoding="utf-8")
    field.move_to(5)
    state = recorder.poll()
    assert state.observation is not None
    assert state.observation.time == field.at(4)
    recorder.close()
    _verified(field)


def test_with_nothing_waiting_or_known_nothing_is_recorded(field: Field) -> None:
    field.write(field.row(0, HOT_C))
    recorder = field.open()
    recorder.poll()
    before = _kinds(field)
    recorder.accept_settings("R. Keel")
    recorder.acknowledge([4711], "RK")
    recorder.withdraw_acknowledgement([4711], "RK")
    assert _kinds(field) == before
    recorder.close()


def test_settings_that_are_not_watched_stay_as_they_were_read(field: Field) -> None:
    field.write(field.row(0, WARM_C))
    recorder = Recorder.open(field.profile, clock=field.clock, mode=Mode.DEMO, watch_settings=False)
    field.fleet.write_text(FLEET.replace("6350", "5000"), encoding="utf-8")
    assert row_of(recorder.poll(), "trainer").state is State.NEAR
    recorder.close()


def test_a_typed_in_reading_older_than_the_newest_fills_the_day_only(field: Field) -> None:
    field.write(field.row(0, HOT_C))
    recorder = field.open()
    recorder.poll()
    with pytest.raises(UserError, match="a newer one is there already"):
        recorder.type_in(time=field.at(-5), altimeter_hpa=1013.25, temperature_c=COOL_C, dewpoint_c=4.0, initials="MS")
    state = recorder.poll()
    assert row_of(state, "trainer").state is State.HOLD
    assert len(state.curve.time_us) == 2
    recorder.close()
    _verified(field)


def test_a_sensor_that_stands_still_is_warned_of_that_day(field: Field) -> None:
    field.write(*(field.row(30 * place, COOL_C) for place in range(-13, 1)))
    recorder = field.open()
    (warning,) = (message for message in recorder.poll().messages if message.topic == "observation")
    assert "is the sensor stuck?" in warning.text
    assert warning.time == field.at(0)
    field.move_to(24 * 60)
    assert [message for message in recorder.poll().messages if message.topic == "observation"] == []
    recorder.close()


def test_what_is_odd_about_the_history_is_said_while_the_recorder_runs(field: Field) -> None:
    field.write(field.row(0, COOL_C))
    field.open().close()
    field.history.with_name("history.db.head").unlink()
    recorder = field.open()
    (message,) = (message for message in recorder.poll().messages if message.topic == "recording")
    assert "was missing" in message.text
    recorder.close()


def test_what_the_source_says_is_recorded_when_it_begins_not_at_each_poll(field: Field) -> None:
    recorder = field.open()
    for minutes in range(3):
        field.move_to(minutes)
        assert any("does not exist" in message.text for message in recorder.poll().messages)
    assert _kinds(field)[RecordKind.MESSAGE] == 1
    recorder.close()


def test_rows_that_went_and_came_back_are_recorded_once(field: Field) -> None:
    rows = [field.row(minutes, 20.0 + minutes / 10) for minutes in range(3)]
    field.write(*rows)
    field.move_to(3)
    recorder = field.open()
    recorder.poll()
    field.write(rows[2])
    recorder.poll()
    field.write(*rows)
    recorder.poll()
    recorder.close()
    assert _kinds(field)[RecordKind.OBSERVATION] == 3
    _verified(field)


def test_what_nobody_has_seen_is_not_accepted(field: Field) -> None:
    field.write(field.row(0, WARM_C))
    recorder = field.open()
    recorder.poll()
    field.fleet.write_text(FLEET.replace("6350", "6400"), encoding="utf-8")
    seen = recorder.poll().waiting
    field.fleet.write_text(FLEET.replace("6350", "9000"), encoding="utf-8")
    now = recorder.poll().waiting
    with pytest.raises(UserError, match="Nothing was accepted"):
        recorder.accept_settings("R. Keel", seen=seen)
    assert recorder.poll().waiting == now
    assert not recorder.accept_settings("R. Keel", seen=now).waiting
    recorder.close()
    _verified(field)
