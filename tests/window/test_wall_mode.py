"""The wall view in the window: its keys, its dialog, what is remembered, and that no old board is shown on it."""

from collections.abc import Iterator
from dataclasses import replace
from datetime import timedelta
from pathlib import Path

import pytest
from PySide6.QtCore import Qt
from PySide6.QtTest import QTest
from PySide6.QtWidgets import QLabel, QWidget
from pytestqt.qtbot import QtBot

from airfield_board.clock import SteppedClock
from airfield_board.session.board_state import BoardState, Mode
from airfield_board.window.main_window import Feed, MainWindow
from airfield_board.window.picture import image_of
from airfield_board.window.theme import SchemeChoice
from airfield_board.window.wall_dialog import WallDialog
from airfield_board.window.wall_settings import read_setup, write_setup
from airfield_board.window.wall_size import WallSetup, word_px
from airfield_board.window.worker import Worker
from tests.window.recorders import FakeRecorder
from tests.window.states import board
from tests.window.wall_boards import words

# The offscreen platform says so of what it cannot do; it means nothing for a real screen.
pytestmark = pytest.mark.qt_log_ignore("This plugin does not support (propagateSizeHints|raise)")

SLOW_S = 3600.0
KNOWN = WallSetup(diagonal_in=55.0, distance_m=2.0)


class Room:
    """A window on a recorder that answers what the test says, a clock that stands, and a file of its own."""

    def __init__(self, qtbot: QtBot, wall_file: Path) -> None:
        self.qtbot = qtbot
        self.wall_file = wall_file
        self.recorder = FakeRecorder(board(14))
        self.clock = SteppedClock(board(14).assessed_at)
        self.window = MainWindow(self._feed, choice=SchemeChoice.LIGHT, replayable=True, wall_file=wall_file)
        qtbot.addWidget(self.window)

    def _feed(self) -> Feed:
        return Feed(clock=self.clock, worker=Worker(self.recorder.open, poll_s=SLOW_S, monotonic=lambda: 0.0))

    def open(self) -> None:
        self.window.show()
        self.window.start()
        self.qtbot.waitUntil(lambda: self.window.state is not None)

    def press(self, key: Qt.Key, modifier: Qt.KeyboardModifier = Qt.KeyboardModifier.NoModifier) -> None:
        self.window.activateWindow()
        self.qtbot.waitUntil(self.window.isActiveWindow)
        QTest.keyClick(self.window, key, modifier)

    def show(self, state: BoardState) -> None:
        self.recorder.state = state

        def arrived() -> bool:
            self.window.poll()  # again and again: one that is under way may still bring the board before
            return self.window.state is state

        self.qtbot.waitUntil(arrived)

    def dialog(self) -> WallDialog:
        self.qtbot.waitUntil(lambda: any(each.isVisible() for each in self.window.findChildren(WallDialog)))
        return next(each for each in self.window.findChildren(WallDialog) if each.isVisible())

    @property
    def wall(self) -> QWidget:
        return self.window.wall.view

    def painted(self) -> list[str]:
        image_of(self.wall)
        return words(self.window.wall.view, "WallRows")


@pytest.fixture
def room(qtbot: QtBot, tmp_path: Path) -> Iterator[Room]:
    write_setup(tmp_path / "wall.json", KNOWN)
    made = Room(qtbot, tmp_path / "wall.json")
    made.open()
    yield made
    made.window.close()
    assert made.recorder.closed


def test_f11_shows_the_wall_view_on_the_whole_screen_and_the_pages_again(room: Room) -> None:
    room.press(Qt.Key.Key_F11)
    room.qtbot.waitUntil(room.wall.isVisible)
    assert room.window.isFullScreen()
    assert not room.window.menuBar().isVisible()
    assert not room.window.view.isVisible()
    assert "HOLD" in room.painted()
    room.press(Qt.Key.Key_F11)
    room.qtbot.waitUntil(room.window.view.isVisible)
    assert not room.window.isFullScreen()
    assert room.window.menuBar().isVisible()
    assert not room.wall.isVisible()


def test_escape_and_the_keys_of_the_pages_leave_it(room: Room) -> None:
    room.window.wall.enter()
    room.press(Qt.Key.Key_Escape)
    room.qtbot.waitUntil(room.window.view.isVisible)
    room.window.wall.enter()
    room.press(Qt.Key.Key_2)
    room.qtbot.waitUntil(room.window.view.margin.isVisible)
    assert not room.window.isFullScreen()


def test_details_do_not_stand_before_the_wall(room: Room) -> None:
    room.window.view.board.rows.choose(board(14).operations[0].key)
    room.window.show_details()
    room.qtbot.waitUntil(room.window.details.isVisible)
    room.window.wall.enter()
    assert not room.window.details.isVisible()


def test_a_window_that_filled_its_screen_does_so_again(room: Room) -> None:
    room.window.showMaximized()
    room.window.wall.enter()
    assert room.window.isFullScreen()
    room.window.wall.leave()
    assert room.window.isMaximized()
    room.window.wall.leave()
    assert room.window.isMaximized()


def test_it_shows_the_newest_board_at_once_and_goes_on_with_it(room: Room) -> None:
    room.show(board(14))
    assert room.window.state is not None
    assert room.window.state.observation is not None
    stale = room.window.state.observation.time + timedelta(minutes=61)
    room.clock.move_to(stale)
    room.window.wall.enter()
    assert room.painted().count("NO DATA") == 14
    newer = replace(
        board(14),
        assessed_at=stale,
        observation=replace(room.window.state.observation, time=stale - timedelta(minutes=1)),
    )
    room.show(newer)
    assert room.painted().count("NO DATA") == 1


def test_a_hung_recorder_is_no_data_on_the_wall_too(room: Room) -> None:
    room.window.wall.enter()
    assert "GO" in room.painted()
    room.clock.move_to(board(14).assessed_at + timedelta(seconds=room.window.worker.watchdog_s + 1))
    room.window.tick()
    assert room.painted().count("NO DATA") == 14


def test_what_is_remembered_is_used(room: Room) -> None:
    room.window.wall.enter()
    assert room.window.wall.setup == KNOWN
    assert not room.window.notice.isVisible()


def test_where_nothing_is_remembered_it_says_what_it_takes_and_offers_to_ask(qtbot: QtBot, tmp_path: Path) -> None:
    made = Room(qtbot, tmp_path / "wall.json")
    made.open()
    made.press(Qt.Key.Key_F11)
    qtbot.waitUntil(made.window.notice.isVisible)
    assert made.wall.isVisible()
    assert "43 in, read from 3 m" in made.window.notice.label.text()
    made.window.notice.action.click()
    dialog = made.dialog()
    dialog.diagonal.setValue(32.0)
    dialog.distance.setValue(2.5)
    dialog.action.click()
    qtbot.waitUntil(lambda: made.window.wall.setup == WallSetup(diagonal_in=32.0, distance_m=2.5))
    assert read_setup(made.wall_file) == WallSetup(diagonal_in=32.0, distance_m=2.5)
    made.window.close()


def test_the_dialog_says_what_its_numbers_come_to(room: Room) -> None:
    room.press(Qt.Key.Key_F11, Qt.KeyboardModifier.ShiftModifier)
    dialog = room.dialog()
    assert dialog.setup() == KNOWN
    dialog.diagonal.setValue(43.0)
    dialog.distance.setValue(3.0)
    said = dialog.said.text()
    assert "17.5 mm" in said  # source: the design's page on the wall view
    screen = room.window.screen().size()
    needed = word_px(WallSetup(diagonal_in=43.0, distance_m=3.0), (screen.width(), screen.height()))
    assert f"type of {needed} px" in said
    assert dialog.diagonal.accessibleName()
    room.window.wall.ask()
    assert len(room.window.findChildren(WallDialog)) == 1
    dialog.reject()
    assert room.window.wall.setup == KNOWN
    assert read_setup(room.wall_file) == KNOWN


def test_numbers_that_cannot_be_remembered_are_used_all_the_same_and_that_is_said(room: Room) -> None:
    room.wall_file.unlink()
    room.wall_file.mkdir()
    (room.wall_file / "in the way").write_text("", encoding="utf-8")
    room.window.wall.ask()
    dialog = room.dialog()
    dialog.distance.setValue(5.0)
    dialog.action.click()
    room.qtbot.waitUntil(lambda: "cannot be remembered" in room.window.notice.label.text())
    assert room.window.wall.setup.distance_m == 5.0


def test_after_a_fault_of_the_window_the_wall_is_gone_until_it_is_asked_for(room: Room) -> None:
    room.window.wall.enter()
    room.window.show_fault("ValueError: no")
    assert not room.wall.isVisible()
    room.show(board(14))
    room.window.wall.leave()
    room.window.wall.enter()
    assert not room.wall.isVisible()
    assert any("NO DATA" in label.text() for label in room.window.findChildren(QLabel) if label.isVisible())
    room.window.fault_page.button.click()
    assert room.wall.isVisible()


def test_the_demo_played_again_stays_on_the_wall(room: Room) -> None:
    room.window.wall.enter()
    room.recorder.state = replace(board(14), mode=Mode.DEMO)
    room.window.play_again()
    assert not room.wall.isVisible()
    room.qtbot.waitUntil(room.wall.isVisible)


def test_entered_before_the_first_answer_it_says_no_data_then_shows_the_board(qtbot: QtBot, tmp_path: Path) -> None:
    write_setup(tmp_path / "wall.json", KNOWN)
    made = Room(qtbot, tmp_path / "wall.json")
    made.recorder.gate.clear()
    made.window.show()
    made.window.wall.enter()
    made.window.start()
    assert made.window.isFullScreen()
    assert not made.wall.isVisible()
    assert any("NO DATA" in label.text() for label in made.window.findChildren(QLabel) if label.isVisible())
    made.recorder.gate.set()
    qtbot.waitUntil(made.wall.isVisible)
    assert "GO" in made.painted()
    made.window.close()


def test_dark_colours_reach_the_wall(room: Room) -> None:
    room.window.wall.enter()
    room.window.choose_scheme(SchemeChoice.DARK)
    assert image_of(room.wall).pixelColor(2, room.wall.height() - 2).lightness() < 60
    room.window.choose_scheme(SchemeChoice.LIGHT)
    assert image_of(room.wall).pixelColor(2, room.wall.height() - 2).lightness() > 200
