"""What a screen reader is told when rows come to HOLD or NO DATA."""

from collections.abc import Iterator
from dataclasses import replace
from datetime import timedelta

import pytest
from PySide6.QtGui import QAccessible
from PySide6.QtWidgets import QApplication, QWidget
from pytestqt.qtbot import QtBot

from airfield_board.limits.states import State
from airfield_board.session.board_state import BoardState, OperationLine
from airfield_board.window.announcer import Announcer, announcement
from airfield_board.window.reading import view_of
from tests.window import states


@pytest.fixture(autouse=True)
def listening(qapp: QApplication) -> Iterator[None]:
    """A screen reader is there."""
    before = QAccessible.isActive()
    QAccessible.setActive(True)
    yield
    QAccessible.setActive(before)


def in_state(row: OperationLine, state: State) -> OperationLine:
    assert row.shown is not None
    shown = replace(row.shown, state=state)
    return replace(row, state=state, shown=shown, limits=(shown,))


def changed(state: BoardState, to: State, *names: str) -> BoardState:
    return replace(
        state, operations=tuple(in_state(row, to) if row.aircraft_name in names else row for row in state.operations)
    )


def before(state: BoardState) -> dict[str, State]:
    return {row.key: row.state for row in state.operations}


def test_rows_that_come_to_hold_are_named() -> None:
    state = states.board()
    after = changed(state, State.HOLD, "Six-seat utility", "Electric trainer")
    assert announcement(before(state), after.operations) == (
        "HOLD: Electric trainer · Departure, Six-seat utility · Departure."
    )


def test_what_was_so_before_and_what_got_better_is_not_said() -> None:
    state = states.board()
    assert State.HOLD in before(state).values()
    assert announcement(before(state), state.operations) == ""
    assert announcement(before(state), changed(state, State.GO, "Motor glider").operations) == ""
    assert announcement(before(state), changed(state, State.NEAR, "Six-seat utility").operations) == ""


def test_hold_is_said_before_no_data() -> None:
    state = states.board()
    after = changed(changed(state, State.NO_DATA, "Turboprop single"), State.HOLD, "Six-seat utility")
    assert announcement(before(state), after.operations) == (
        "HOLD: Six-seat utility · Departure. NO DATA: Turboprop single · Departure."
    )


def test_many_rows_are_counted() -> None:
    state = states.board()
    names = [row.aircraft_name for row in state.operations if row.state is State.GO]
    assert len(names) == 5
    many = changed(states.board(24), State.HOLD, *(row.aircraft_name for row in states.board(24).operations[:7]))
    assert announcement(before(states.board(24)), many.operations) == "HOLD: 7 operations."
    everything = [in_state(row, State.HOLD) for row in state.operations]
    good = dict.fromkeys(before(state), State.GO)
    assert announcement(good, everything) == "HOLD: all 15 operations."
    assert announcement({everything[0].key: State.GO}, everything[:1]) == "HOLD: Turboprop single · Departure."


def test_a_row_that_was_not_there_counts_as_changed() -> None:
    state = states.board()
    rest = {key: value for key, value in before(state).items() if "motor-glider" not in key}
    assert announcement(rest, state.operations) == "HOLD: Motor glider · Self-launch."


def test_the_first_view_is_silent_and_each_change_is_said_once(qtbot: QtBot) -> None:
    speaker = QWidget()
    qtbot.addWidget(speaker)
    announcer = Announcer(speaker)
    said: list[str] = []
    announcer.announced.connect(said.append)
    state = states.board()
    announcer.show_view(view_of(state, state.assessed_at, None))
    assert said == []
    after = changed(state, State.HOLD, "Six-seat utility")
    for _ in range(3):
        announcer.show_view(view_of(after, after.assessed_at, None))
    assert said == ["HOLD: Six-seat utility · Departure."]


def test_no_data_that_the_window_finds_by_itself_is_said_too(qtbot: QtBot) -> None:
    speaker = QWidget()
    qtbot.addWidget(speaker)
    announcer = Announcer(speaker)
    said: list[str] = []
    announcer.announced.connect(said.append)
    state = states.board()
    announcer.show_view(view_of(state, state.assessed_at, None))
    announcer.show_view(view_of(state, state.assessed_at + timedelta(minutes=51), None))
    # One row had no data before; the other 14 went with the reading.
    assert said == ["NO DATA: 14 operations."]


def test_another_airfield_begins_anew(qtbot: QtBot) -> None:
    speaker = QWidget()
    qtbot.addWidget(speaker)
    announcer = Announcer(speaker)
    said: list[str] = []
    announcer.announced.connect(said.append)
    state = states.board()
    announcer.show_view(view_of(state, state.assessed_at, None))
    other = changed(state, State.HOLD, "Six-seat utility")
    elsewhere = replace(other, airfield=replace(state.airfield, name="Thistle Bench"))
    announcer.show_view(view_of(elsewhere, elsewhere.assessed_at, None))
    assert said == []
