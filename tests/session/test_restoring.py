"""Going on after a stop: the board is the one from before, whatever the clock and the file have been through."""

from pathlib import Path

import pytest

from airfield_board.configuration.profile import load_airfield
from airfield_board.configuration.setting_changes import SettingChange
from airfield_board.history.records import Record, RecordKind
from airfield_board.history.store import History
from airfield_board.limits.states import State
from airfield_board.session.board_state import BoardState
from airfield_board.session.recorder import Recorder
from airfield_board.session.records import configuration_records
from airfield_board.session.restoring import settings_from_history
from airfield_board.session.verifying import verify_history
from tests.session.fields import FLEET, PROFILE, Field, make_field, row_of

LOOSER = SettingChange(where="trainer, Departure", in_force="6,350 ft", waiting="7,000 ft")
COOL_C, WARM_C, HOT_C = 15.0, 24.0, 30.0


@pytest.fixture
def field(tmp_path: Path) -> Field:
    return make_field(tmp_path)


def _reopened(field: Field, recorder: Recorder) -> tuple[BoardState, BoardState]:
    before = recorder.poll()
    recorder.close()
    recorder = field.open()
    after = recorder.poll()
    recorder.close()
    findings = verify_history(field.history, closing_hash=None, rejudge=True)
    assert findings.whole, findings.lines
    return before, after


def test_steps_at_one_time_of_the_clock_are_judged_anew_as_the_steps_that_they_were(field: Field) -> None:
    field.write(field.row(0, 20.0))
    recorder = field.open()
    recorder.poll()
    field.append(field.row(0, 21.0))
    recorder.poll()
    field.write(field.row(0, 20.0))
    recorder.poll()
    recorder.type_in(time=field.at(1), altimeter_hpa=1013.25, temperature_c=22.0, dewpoint_c=None, initials="RK")
    field.append(field.row(1, 24.0))
    recorder.poll()
    before, after = _reopened(field, recorder)
    assert before.operations == after.operations


def test_rows_not_used_come_back_in_the_order_in_which_they_were_read(field: Field) -> None:
    field.write(field.row(0, COOL_C), field.row(700, COOL_C), "rubbish\n", field.row(-3, 99.0))
    recorder = field.open()
    recorder.poll()
    field.append("more rubbish\n", field.row(-5, 98.0))
    recorder.poll()
    before, after = _reopened(field, recorder)
    assert len(before.unused) == 5
    assert after.unused == before.unused


def test_a_row_without_a_time_is_shown_on_the_day_on_which_it_was_read(field: Field) -> None:
    field.write(field.row(0, COOL_C), "rubbish\n")
    recorder = field.open()
    assert [time for time, _ in recorder.poll().unused] == [None]
    field.move_to(24 * 60)
    before, after = _reopened(field, recorder)
    assert before.unused == after.unused == ()


def test_what_is_recorded_of_a_later_time_than_the_clock_s_comes_back(field: Field) -> None:
    field.write(field.row(0, COOL_C))
    recorder = field.open()
    recorder.poll()
    field.append(field.row(30, 27.0))
    field.move_to(30)
    recorder.poll()
    field.move_to(0)
    before, after = _reopened(field, recorder)
    assert [change.state for change in before.changes].count(State.HOLD) == 1
    assert after.changes == before.changes
    assert list(after.curve.time_us) == list(before.curve.time_us)
    assert len(after.curve.time_us) == 2
    assert after.operations == before.operations


def test_states_told_with_a_clock_set_back_come_back_in_the_order_in_which_they_came_about(field: Field) -> None:
    field.write(field.row(0, HOT_C))
    recorder = field.open()
    recorder.poll()
    field.move_to(-20)
    recorder.poll()
    # Acts at the time of the clock, which is before that of the reading.
    field.fleet.write_text(FLEET.replace("7400, 2450: 6550", "7000, 2450: 5000"), encoding="utf-8")
    recorder.poll()
    field.fleet.write_text(FLEET.replace("1950: 7400, 2450: 6550", "1950: 5000, 2450: 4000"), encoding="utf-8")
    recorder.poll()
    before, after = _reopened(field, recorder)
    assert after.operations == before.operations


def test_a_hold_of_days_is_drawn_from_the_start_of_the_day_though_it_began_long_before(tmp_path: Path) -> None:
    field = make_field(tmp_path, profile=PROFILE.replace("stale_after_min: 15", "stale_after_min: 90"))
    field.write()
    recorder = field.open()
    for hours in range(41):
        field.append(field.row(60 * hours, HOT_C + hours % 2))
        field.move_to(60 * hours)
        recorder.poll()
    field.move_to(60 * 42)
    before, after = _reopened(field, recorder)
    shown = row_of(before, "trainer").shown
    assert shown is not None
    # The local day began 37 h after the first reading.
    assert [(span.state, span.start, span.end) for span in shown.spans] == [
        (State.HOLD, field.at(60 * 37), field.at(60 * 41 + 30))
    ]
    assert after.operations == before.operations


def test_a_limit_that_went_and_came_back_shows_no_stretch_of_the_time_between(field: Field) -> None:
    field.write(field.row(0, HOT_C))
    recorder = field.open()
    recorder.poll()
    field.fleet.write_text(FLEET.replace("id: trainer", "id: other"), encoding="utf-8")
    field.move_to(1)
    recorder.poll()
    recorder.accept_settings("R. Keel")
    field.fleet.write_text(FLEET, encoding="utf-8")
    field.move_to(9)
    recorder.poll()
    recorder.accept_settings("R. Keel")
    before, after = _reopened(field, recorder)
    shown = row_of(before, "trainer").shown
    assert shown is not None
    assert [(span.state, span.start, span.end) for span in shown.spans] == [(State.HOLD, field.at(9), None)]
    assert after.operations == before.operations


def _history_with(field: Field, *records: Record) -> History:
    history = History.open(field.history, now=field.at(0), program_version="1")
    history.append(records)
    return history


def _older_version(field: Field) -> list[Record]:
    """Settings that this version of the program does not take."""
    return [
        Record(
            kind=RecordKind.CONFIGURATION,
            at=field.at(0),
            body={"kind": kind, "name": f"{kind}.yaml", "sha256": "", "text": "schema: 0\n"},
        )
        for kind in ("profile", "fleet")
    ]


def test_settings_are_known_from_the_last_version_that_came_in_force_as_it_stood(field: Field) -> None:
    airfield = load_airfield(field.profile)
    accepted = Record(kind=RecordKind.SETTINGS_ACCEPTED, at=field.at(2), body={"name": "R. Keel", "accepted": []})
    settled = configuration_records(*airfield, field.at(1))
    history = _history_with(field, *_older_version(field), *settled)
    settings = settings_from_history(history)
    assert settings is not None
    assert settings.in_force[1].sha256 == airfield[1].sha256
    history.append(_older_version(field))
    assert settings_from_history(history) is None
    history.append([*configuration_records(*airfield, field.at(2), waiting=[LOOSER]), accepted])
    settings = settings_from_history(history)
    assert settings is not None
    assert not settings.waiting
    history.close()


def test_a_version_that_was_only_partly_in_force_needs_those_before_it(field: Field) -> None:
    first = load_airfield(field.profile)
    field.fleet.write_text(FLEET.replace("6350", "7000"), encoding="utf-8")
    looser = load_airfield(field.profile)
    history = _history_with(
        field,
        *configuration_records(*first, field.at(0)),
        *configuration_records(*looser, field.at(1), waiting=[LOOSER]),
    )
    settings = settings_from_history(history)
    history.close()
    assert settings is not None
    assert [change.in_force for change in settings.waiting] == ["6,350 ft"]
    assert settings.read[1].sha256 == looser[1].sha256


def test_nothing_is_drawn_of_a_limit_that_went_and_came_back_without_a_reading_since(field: Field) -> None:
    field.write(field.row(0, HOT_C))
    recorder = field.open()
    recorder.poll()
    field.fleet.write_text(FLEET.replace("id: trainer", "id: other"), encoding="utf-8")
    field.move_to(1)
    recorder.poll()
    recorder.accept_settings("R. Keel")
    field.fleet.write_text(FLEET, encoding="utf-8")
    field.move_to(20)
    recorder.poll()
    recorder.accept_settings("R. Keel")
    before, after = _reopened(field, recorder)
    shown = row_of(before, "trainer").shown
    assert shown is not None
    assert (shown.state, shown.spans) == (State.NO_DATA, ())
    assert after.operations == before.operations


def test_a_clock_set_back_over_midnight_shows_the_day_before_again(field: Field) -> None:
    field.write(field.row(0, HOT_C))
    recorder = field.open()
    changes = recorder.poll().changes
    recorder.acknowledge([change.number for change in changes], "RK")
    field.move_to(13 * 60 + 10)
    recorder.poll()
    recorder.close()
    recorder = field.open()
    assert [change.time for change in recorder.poll().changes] == [field.at(15)], "the local day began after 13 h"
    field.move_to(12 * 60)
    before, after = _reopened(field, recorder)
    assert len(before.changes) == len(changes) + 1
    assert after.changes == before.changes
