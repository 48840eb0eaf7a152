from collections.abc import Iterator
from dataclasses import replace
from datetime import timedelta
from pathlib import Path

import pytest
from PySide6.QtCore import Qt
from PySide6.QtGui import QGuiApplication
from PySide6.QtTest import QTest
from PySide6.QtWidgets import QFileDialog, QMessageBox, QWidget
from pytestqt.qtbot import QtBot

from airfield_board.clock import SteppedClock
from airfield_board.errors import UserError
from airfield_board.resources import bundled_folder
from airfield_board.session.board_state import BoardState, Message, Mode, SettingChange, Weight
from airfield_board.window.dialogs import AcknowledgeDialog, MessagesDialog, TypeInDialog, WaitingSettingsDialog
from airfield_board.window.main_window import Feed, MainWindow
from airfield_board.window.next_window import AirfieldNext, DemoNext
from airfield_board.window.palette import DARK
from airfield_board.window.reading import Cause
from airfield_board.window.theme import SchemeChoice
from airfield_board.window.worker import Request, Worker
from tests.window.recorders import FakeRecorder
from tests.window.states import board

# The offscreen platform says so of what it cannot do; it means nothing for a real screen.
pytestmark = pytest.mark.qt_log_ignore("This plugin does not support (propagateSizeHints|raise)")

SLOW_S = 3600.0
WAITING = (SettingChange(where="Two-seat trainer · Departure", in_force="6,350 ft", waiting="6,900 ft"),)


class Desk:
    """A window on a recorder that answers what the test says, and a clock that stands."""

    def __init__(self, qtbot: QtBot, state: BoardState) -> None:
        self.qtbot = qtbot
        self.recorder = FakeRecorder(state)
        self.recorders = [self.recorder]
        self.clock = SteppedClock(state.assessed_at)
        self.time_s = 0.0
        self.window = MainWindow(self._feed, choice=SchemeChoice.LIGHT, replayable=True)
        qtbot.addWidget(self.window)

    def _feed(self) -> Feed:
        worker = Worker(self.recorders[-1].open, poll_s=SLOW_S, monotonic=lambda: self.time_s)
        return Feed(clock=self.clock, worker=worker)

    def open(self) -> None:
        self.window.show()
        self.window.start()
        self.qtbot.waitUntil(lambda: self.window.state is not None)

    def show(self, state: BoardState) -> None:
        """Let the recorder answer another board at the next poll, and wait for it."""
        self.recorder.state = state
        self.window.poll()
        self.qtbot.waitUntil(lambda: self.window.state is state)

    def cause(self) -> Cause:
        view = self.window.view.view
        assert view is not None
        return view.reading.cause

    def dialog(self, kind: type[QWidget]) -> QWidget:
        self.qtbot.waitUntil(lambda: any(each.isVisible() for each in self.window.findChildren(kind)))
        return next(each for each in self.window.findChildren(kind) if each.isVisible())

    def asked(self, *call: object) -> None:
        self.qtbot.waitUntil(lambda: call in self.recorder.calls)


@pytest.fixture
def desk(qtbot: QtBot) -> Iterator[Desk]:
    made = Desk(qtbot, board())
    made.open()
    yield made
    made.recorder.gate.set()
    made.window.close()
    assert all(recorder.closed for recorder in made.recorders)


def open_numbers(state: BoardState) -> tuple[int, ...]:
    return tuple(change.number for change in state.changes if change.open)


def press(desk: Desk, key: Qt.Key, modifier: Qt.KeyboardModifier = Qt.KeyboardModifier.NoModifier) -> None:
    desk.window.activateWindow()
    desk.qtbot.waitUntil(desk.window.isActiveWindow)
    QTest.keyClick(desk.window, key, modifier)


def test_before_the_first_answer_it_says_no_data(qtbot: QtBot) -> None:
    made = Desk(qtbot, board())
    made.recorder.gate.clear()
    made.window.show()
    made.window.start()
    assert not made.window.view.isVisible()
    assert any("NO DATA" in label for label in labels(made.window))
    made.recorder.gate.set()
    qtbot.waitUntil(made.window.view.isVisible)
    made.window.close()


def labels(widget: QWidget) -> list[str]:
    from PySide6.QtWidgets import QLabel

    return [label.text() for label in widget.findChildren(QLabel) if label.isVisible()]


def test_the_board_is_shown_with_the_airfields_name(desk: Desk) -> None:
    assert desk.window.view.isVisible()
    assert desk.window.windowTitle() == "Cinder Mesa · Airfield Board"
    assert desk.cause() is Cause.NONE


def test_the_age_goes_on_without_the_recorder_until_the_reading_is_stale(desk: Desk) -> None:
    state = desk.window.state
    assert state is not None
    assert state.observation is not None
    desk.window.view.set_watchdog(timedelta(days=1))
    stale_at = state.observation.time + timedelta(minutes=state.stale_after_min)
    desk.clock.move_to(stale_at)
    desk.window.tick()
    assert desk.cause() is not Cause.STALE
    desk.clock.move_to(stale_at + timedelta(seconds=1))
    desk.window.tick()
    assert desk.cause() is Cause.STALE


def test_a_recorder_that_hangs_shows_as_no_data_though_the_wall_clock_stands(desk: Desk) -> None:
    desk.recorder.gate.clear()
    desk.window.poll()
    desk.time_s = desk.window.worker.watchdog_s
    desk.window.tick()
    assert desk.cause() is Cause.NONE
    desk.time_s += 0.1
    desk.window.tick()
    assert desk.cause() is Cause.NO_ANSWER
    desk.recorder.gate.set()
    desk.qtbot.waitUntil(lambda: desk.cause() is Cause.NONE)


def test_when_the_clock_jumps_as_after_sleep_the_source_is_read_at_once(desk: Desk) -> None:
    before = len(desk.recorder.calls)
    desk.clock.move_to(desk.clock.now() + timedelta(seconds=10))
    desk.window.tick()
    assert len(desk.recorder.calls) == before
    desk.clock.move_to(desk.clock.now() + timedelta(minutes=10))
    desk.window.tick()
    desk.qtbot.waitUntil(lambda: len(desk.recorder.calls) == before + 1)


def test_every_key_has_its_action_and_works_where_the_menu_is_hidden(desk: Desk) -> None:
    keys = {action.shortcut().toString() for action in desk.window.actions()}
    assert {"1", "2", "A", "Shift+A", "P", "E", "F11", "Ctrl+O"} <= keys


def test_another_profile_is_asked_for_and_the_board_goes_on_until_it_is_known_to_be_valid(
    desk: Desk, tmp_path: Path
) -> None:
    press(desk, Qt.Key.Key_O, Qt.KeyboardModifier.ControlModifier)
    dialog = desk.dialog(QFileDialog)
    assert isinstance(dialog, QFileDialog)
    dialog.fileSelected.emit(str(tmp_path / "none.yaml"))
    dialog.reject()
    desk.qtbot.waitUntil(desk.window.notice.isVisible)
    assert "this board goes on" in desk.window.notice.label.text()
    assert "none.yaml" in desk.window.notice.label.text()
    shown = [(desk.window.isVisible(), desk.window.next_window)]
    assert shown == [(True, None)]
    for name in ("profile.yaml", "fleet.yaml"):
        (tmp_path / name).write_bytes((bundled_folder("demo_data") / name).read_bytes())
    desk.window.others.opener.open(tmp_path / "profile.yaml")
    desk.qtbot.waitUntil(lambda: not desk.window.isVisible())
    upcoming = desk.window.next_window
    assert isinstance(upcoming, AirfieldNext)
    assert upcoming.profile_path == tmp_path / "profile.yaml"
    assert desk.recorder.closed


def test_a_new_airfield_is_set_up_beside_the_board_which_goes_on(desk: Desk) -> None:
    desk.window.others.set_up_another(desk.window.choice)
    set_up = desk.window.others.set_up
    assert set_up is not None
    assert "The board goes on" in set_up.card.note.text()
    polls = desk.recorder.calls.count(("poll",))
    desk.window.poll()
    desk.qtbot.waitUntil(lambda: desk.recorder.calls.count(("poll",)) == polls + 1)
    desk.window.others.set_up_another(desk.window.choice)
    assert desk.window.others.set_up is set_up
    desk.window.choose_scheme(SchemeChoice.DARK)
    assert set_up.board.colours is DARK
    set_up.close()
    seen = [desk.window.others.set_up, desk.window.next_window]
    assert (seen, desk.window.isVisible()) == ([None, None], True)


def test_the_board_is_left_once_the_set_up_has_something_to_go_to(desk: Desk) -> None:
    desk.window.others.set_up_another(desk.window.choice)
    set_up = desk.window.others.set_up
    assert set_up is not None
    set_up.card.demo.click()
    desk.qtbot.waitUntil(lambda: not desk.window.isVisible())
    assert desk.window.next_window == DemoNext()
    assert desk.recorder.closed


def test_the_set_up_does_not_outlive_the_board(desk: Desk) -> None:
    desk.window.others.set_up_another(desk.window.choice)
    set_up = desk.window.others.set_up
    assert set_up is not None
    desk.window.close()
    assert not set_up.isVisible()


def test_closing_the_window_leads_nowhere(desk: Desk) -> None:
    desk.window.close()
    assert desk.window.next_window is None
    assert desk.window.choice is SchemeChoice.LIGHT


def test_keys_one_and_two_change_the_page(desk: Desk) -> None:
    press(desk, Qt.Key.Key_2)
    assert desk.window.view.pages.currentIndex() == 1
    press(desk, Qt.Key.Key_1)
    assert desk.window.view.pages.currentIndex() == 0


def test_p_reads_the_source_now(desk: Desk) -> None:
    before = desk.recorder.calls.count(("poll",))
    press(desk, Qt.Key.Key_P)
    desk.qtbot.waitUntil(lambda: desk.recorder.calls.count(("poll",)) == before + 1)


def test_a_asks_who_has_seen_the_newest_change_and_records_it(desk: Desk) -> None:
    assert desk.window.state is not None
    newest = open_numbers(desk.window.state)[:1]
    press(desk, Qt.Key.Key_A)
    dialog = desk.dialog(AcknowledgeDialog)
    assert isinstance(dialog, AcknowledgeDialog)
    assert not dialog.action.isEnabled()
    dialog.initials.setText("MS")
    dialog.action.click()
    desk.asked("acknowledge", newest, "MS")


def with_open_changes(state: BoardState, count: int) -> BoardState:
    first = next(change for change in state.changes if change.open)
    return replace(
        state, changes=tuple(replace(first, number=first.number + index) for index in reversed(range(count)))
    )


def test_shift_a_acknowledges_all_that_wait_and_the_initials_are_remembered(desk: Desk) -> None:
    state = with_open_changes(board(), 3)
    desk.show(state)
    for time_round in range(2):
        press(desk, Qt.Key.Key_A, Qt.KeyboardModifier.ShiftModifier)
        dialog = desk.dialog(AcknowledgeDialog)
        assert isinstance(dialog, AcknowledgeDialog)
        if time_round == 0:
            dialog.initials.setText("MS")
        assert dialog.initials.text() == "MS"
        dialog.action.click()
        desk.qtbot.waitUntil(lambda: not desk.window.findChildren(AcknowledgeDialog))
    assert desk.recorder.calls.count(("acknowledge", open_numbers(state), "MS")) == 2


def test_an_acknowledgement_can_be_undone_for_a_while(desk: Desk) -> None:
    assert desk.window.state is not None
    numbers = open_numbers(desk.window.state)[:1]
    desk.window.acknowledge()
    dialog = desk.dialog(AcknowledgeDialog)
    assert isinstance(dialog, AcknowledgeDialog)
    dialog.initials.setText("MS")
    dialog.action.click()
    desk.qtbot.waitUntil(desk.window.notice.isVisible)
    assert "acknowledged by MS" in desk.window.notice.label.text()
    desk.window.notice.action.click()
    desk.asked("withdraw_acknowledgement", numbers, "MS")
    assert not desk.window.notice.isVisible()


def test_where_nothing_waits_there_is_nothing_to_acknowledge(desk: Desk) -> None:
    desk.show(replace(board(), changes=()))
    press(desk, Qt.Key.Key_A)
    desk.window.acknowledge_all()
    assert desk.window.findChildren(AcknowledgeDialog) == []


def test_the_strips_button_acknowledges_the_changes_it_names(desk: Desk) -> None:
    state = with_open_changes(board(), 2)
    desk.show(state)
    oldest = open_numbers(state)[-1:]
    desk.window.view.acknowledge_asked.emit(oldest)
    dialog = desk.dialog(AcknowledgeDialog)
    assert isinstance(dialog, AcknowledgeDialog)
    assert dialog.numbers == oldest


def test_e_opens_the_form_and_what_is_typed_in_reaches_the_recorder(desk: Desk) -> None:
    press(desk, Qt.Key.Key_E)
    dialog = desk.dialog(TypeInDialog)
    assert isinstance(dialog, TypeInDialog)
    assert not dialog.action.isEnabled()
    dialog.altimeter.setText("29.92")
    dialog.temperature.setText("30.4")
    dialog.initials.setText("MS")
    assert dialog.action.isEnabled()
    dialog.action.click()
    when = desk.clock.now().replace(second=0, microsecond=0)
    desk.asked("type_in", when, 1013.21, 30.4, None, "MS")
    desk.qtbot.waitUntil(lambda: not desk.window.findChildren(TypeInDialog))


def test_what_the_checks_refuse_stays_in_the_form_with_the_reason_and_the_board_is_read_again(desk: Desk) -> None:
    desk.recorder.refusal = UserError("Not used: step.")
    desk.window.type_in()
    dialog = desk.dialog(TypeInDialog)
    assert isinstance(dialog, TypeInDialog)
    for field, text in ((dialog.altimeter, "29.92"), (dialog.temperature, "12.0"), (dialog.initials, "MS")):
        field.setText(text)
    polls = desk.recorder.calls.count(("poll",))
    dialog.action.click()
    desk.qtbot.waitUntil(lambda: dialog.said.text() == "Not used: step.")
    assert dialog.isVisible()
    assert dialog.action.isEnabled()
    desk.qtbot.waitUntil(lambda: desk.recorder.calls.count(("poll",)) == polls + 1)
    desk.window.tick()
    assert dialog.said.text() == "Not used: step."
    dialog.temperature.setText("12.1")
    assert "12.1 °C" in dialog.said.text()


def test_waiting_settings_are_announced_and_put_in_force_by_name(desk: Desk) -> None:
    desk.show(replace(board(), waiting=WAITING))
    assert "1 loosened setting waiting" in desk.window.notice.label.text()
    desk.window.notice.action.click()
    dialog = desk.dialog(WaitingSettingsDialog)
    assert isinstance(dialog, WaitingSettingsDialog)
    assert not dialog.action.isEnabled()
    dialog.name.setText("M. Sole")
    dialog.action.click()
    desk.asked("accept_settings", "M. Sole", WAITING)


def test_settings_are_not_accepted_where_others_wait_by_now(desk: Desk) -> None:
    desk.show(replace(board(), waiting=WAITING))
    desk.window.show_waiting_settings()
    dialog = desk.dialog(WaitingSettingsDialog)
    assert isinstance(dialog, WaitingSettingsDialog)
    desk.show(replace(board(), waiting=(*WAITING, *WAITING)))
    dialog.name.setText("M. Sole")
    dialog.action.click()
    desk.qtbot.waitUntil(lambda: "changed meanwhile" in desk.window.notice.label.text())
    assert "accept_settings" not in {call[0] for call in desk.recorder.calls}


def test_messages_and_unused_rows_are_listed_as_plain_text_and_go_on_with_the_board(desk: Desk) -> None:
    state = board()
    message = Message(topic="source", weight=Weight.WARNING, text="<b>observations.csv</b> cannot be read.")
    listed = replace(
        state, messages=(message,), unused=((state.assessed_at, "range: temperature 87.0 °C"), (None, "no time"))
    )
    desk.show(listed)
    desk.window.show_messages()
    dialog = desk.dialog(MessagesDialog)
    assert isinstance(dialog, MessagesDialog)
    assert "<b>observations.csv</b> cannot be read." in dialog.messages.toPlainText()
    assert dialog.rows.rowCount() == 2
    reason = dialog.rows.item(0, 1)
    assert reason is not None
    assert reason.text() == "range: temperature 87.0 °C"
    desk.show(
        replace(
            listed,
            messages=(Message(topic="settings", weight=Weight.ALARM, text="fleet.yaml:3: no"),),
            unused=(),
            recording=False,
            not_recording="disk full",
        )
    )
    assert dialog.rows.rowCount() == 0
    assert "fleet.yaml:3: no" in dialog.messages.toPlainText()
    assert "NOT RECORDING: disk full" in dialog.messages.toPlainText()


def test_a_poll_that_fails_is_told_once_and_the_board_stays(desk: Desk) -> None:
    state = desk.window.state
    for _ in range(2):
        desk.recorder.failures = [UserError("the disk is full")]
        desk.window.poll()
        desk.qtbot.waitUntil(lambda: not desk.recorder.failures)
        desk.qtbot.waitUntil(lambda: desk.window.notice.label.text() == "the disk is full")
    assert desk.window.state is state
    desk.window.notice.dismiss()
    assert not desk.window.notice.isVisible()


def test_another_request_that_fails_with_the_same_words_is_told_again(desk: Desk) -> None:
    desk.recorder.failures = [UserError("the disk is full")]
    desk.window.poll()
    desk.qtbot.waitUntil(desk.window.notice.isVisible)
    desk.window.notice.dismiss()
    desk.recorder.failures = [UserError("the disk is full")]
    desk.window.worker.ask(Request(what="try", run=lambda recorder: recorder.poll()))
    desk.qtbot.waitUntil(desk.window.notice.isVisible)
    assert desk.window.notice.label.text() == "the disk is full"


def test_after_a_fault_of_the_window_the_board_is_gone_until_it_is_asked_for(desk: Desk) -> None:
    desk.window.show_fault("ValueError: no")
    assert not desk.window.view.isVisible()
    assert any("NO DATA" in label for label in labels(desk.window))
    assert any("ValueError: no" in label for label in labels(desk.window))
    desk.show(board())
    assert not desk.window.view.isVisible()
    desk.window.fault_page.button.click()
    assert desk.window.view.isVisible()


def test_a_change_of_the_systems_look_is_followed_only_where_that_was_chosen(desk: Desk) -> None:
    desk.window.choose_scheme(SchemeChoice.DARK)
    QGuiApplication.styleHints().colorSchemeChanged.emit(Qt.ColorScheme.Light)
    desk.qtbot.waitUntil(lambda: desk.window.palette().window().color().lightness() < 60)
    desk.window.choose_scheme(SchemeChoice.SYSTEM)
    QGuiApplication.styleHints().colorSchemeChanged.emit(Qt.ColorScheme.Light)
    desk.qtbot.waitUntil(lambda: desk.window.palette().window().color().lightness() > 60)


def message_box(desk: Desk) -> str:
    box = desk.dialog(QMessageBox)
    assert isinstance(box, QMessageBox)
    assert box.textFormat() is Qt.TextFormat.PlainText
    text = box.text()
    box.accept()
    return text


def test_about_bears_the_cautions_and_says_that_the_demo_is_invented(desk: Desk) -> None:
    desk.window.show_about()
    text = message_box(desk)
    assert "flight manual, local orders and the licensed people on duty decide" in text
    assert "Limits of the air only: not runway, wind, load or surface. HOLD: do not begin." in text
    assert "invented" not in text
    desk.qtbot.waitUntil(lambda: not desk.window.findChildren(QMessageBox))
    desk.show(replace(board(), mode=Mode.DEMO))
    desk.window.show_about()
    assert "invented" in message_box(desk)


def test_dark_colours_reach_the_board_and_the_dialogs(desk: Desk) -> None:
    light = desk.window.palette().window().color().lightness()
    desk.window.choose_scheme(SchemeChoice.DARK)
    desk.qtbot.waitUntil(lambda: desk.window.palette().window().color().lightness() < 60 < light)
    desk.window.choose_scheme(SchemeChoice.SYSTEM)


def test_playing_again_closes_the_recorder_and_begins_with_a_new_one(desk: Desk) -> None:
    other = replace(board(8), mode=Mode.DEMO)
    desk.recorders.append(FakeRecorder(other))
    desk.window.play_again()
    assert desk.recorders[0].closed
    desk.qtbot.waitUntil(lambda: desk.window.state is other)
    assert desk.window.view.isVisible()


def test_a_recorder_that_cannot_be_opened_is_told_to_whoever_opened_the_window(qtbot: QtBot) -> None:
    def refuse() -> FakeRecorder:
        raise UserError("profile.yaml: no such file")

    state = board()
    window = MainWindow(
        lambda: Feed(clock=SteppedClock(state.assessed_at), worker=Worker(refuse, poll_s=SLOW_S)),
        choice=SchemeChoice.LIGHT,
    )
    qtbot.addWidget(window)
    told: list[object] = []
    window.opening_failed.connect(told.append)
    window.start()
    qtbot.waitUntil(lambda: told == ["profile.yaml: no such file"])
    window.close()


def test_closing_the_window_closes_the_recorder(qtbot: QtBot) -> None:
    made = Desk(qtbot, board())
    made.open()
    made.window.close()
    assert made.recorder.closed
