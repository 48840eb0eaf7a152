"""The text size: kept for the next start, told to Qt before it begins, chosen in the menu."""

import os
import subprocess
import sys
from collections.abc import Iterator
from pathlib import Path

import pytest
from PySide6.QtCore import QSize
from PySide6.QtGui import QAction
from pytestqt.qtbot import QtBot

from airfield_board.clock import SteppedClock
from airfield_board.window import application
from airfield_board.window.board_view import SMALLEST_PX
from airfield_board.window.main_window import Feed, MainWindow
from airfield_board.window.text_size import FACTOR_VARIABLE, TEXT_SIZES_PERCENT, TextSize
from airfield_board.window.theme import SchemeChoice
from airfield_board.window.worker import Worker
from tests.interpreter import run_python
from tests.window.recorders import FakeRecorder
from tests.window.states import board

pytestmark = pytest.mark.qt_log_ignore("This plugin does not support (propagateSizeHints|raise)")

linux_only = pytest.mark.skipif(not sys.platform.startswith("linux"), reason="elsewhere no variable moves the settings")

SMALLEST = QSize(*SMALLEST_PX)

WINDOW_THAT_TELLS_ITS_SIZE = """
import sys
from airfield_board.cli import main
from airfield_board.window import application, main_window, preflight

application.find_screens = lambda _: (preflight.Screen(platform="offscreen"),)
begin = main_window.MainWindow.start

def start(self):
    begin(self)
    def tell(_state):
        picture = self.view.grab()
        print(self.devicePixelRatioF(), picture.width() / self.view.width())
        self.close()
    self.worker.state_came.connect(tell)

main_window.MainWindow.start = start
sys.exit(main(["--demo"]))
"""

WINDOW_THAT_STARTS_AGAIN = """
import os, sys
from airfield_board.cli import main
from airfield_board.window import application, main_window, preflight

application.find_screens = lambda _: (preflight.Screen(platform="offscreen"),)
begin = main_window.MainWindow.start

def start(self):
    begin(self)
    def once_larger(_state):
        print(self.devicePixelRatioF(), os.environ.get("QT_SCALE_FACTOR"), flush=True)
        if self.devicePixelRatioF() == 1.0:
            self.choose_text_size(175)
            self.notice.action.click()
        else:
            self.close()
    self.worker.state_came.connect(once_larger)

main_window.MainWindow.start = start
sys.exit(main(["--demo"]))
"""


def test_a_size_is_kept_for_the_next_start_and_told_to_qt(tmp_path: Path) -> None:
    environment: dict[str, str] = {}
    first = TextSize(tmp_path / "window.ini", environment)
    first.begin()
    assert (first.percent, environment) == (100, {})
    assert first.keep(150)
    assert (first.percent, first.kept()) == (100, 150), "not before the next start"
    second = TextSize(tmp_path / "window.ini", environment)
    second.begin()
    assert (second.percent, environment) == (150, {FACTOR_VARIABLE: "1.5"})
    second.end()
    assert environment == {}


def test_a_factor_of_the_users_own_stays_under_it(tmp_path: Path) -> None:
    environment = {FACTOR_VARIABLE: "1.25"}
    size = TextSize(tmp_path / "window.ini", environment)
    size.keep(200)
    size.begin()
    assert environment == {FACTOR_VARIABLE: "2.5"}
    size.end()
    assert environment == {FACTOR_VARIABLE: "1.25"}


@pytest.mark.parametrize("kept", ["text_size_percent=900", "text_size_percent=", "text_size_percent=15O", "\0\0", "[x"])
def test_what_no_menu_offers_counts_as_the_plain_size(tmp_path: Path, kept: str) -> None:
    place = tmp_path / "window.ini"
    place.write_text(f"[General]\n{kept}\n", encoding="utf-8")
    environment = {FACTOR_VARIABLE: "not a number"}
    size = TextSize(place, environment)
    size.begin()
    assert size.percent == 100
    assert environment == {FACTOR_VARIABLE: "not a number"}


@pytest.mark.parametrize(
    ("screen", "percent", "fits"),
    [
        (QSize(1920, 1000), 200, True),
        (QSize(1440, 860), 150, True),
        (QSize(1440, 860), 175, False),
        (QSize(1280, 680), 125, True),
        (QSize(1280, 680), 150, False),
    ],
)
def test_a_size_fits_where_the_smallest_window_does(tmp_path: Path, screen: QSize, percent: int, fits: bool) -> None:
    size = TextSize(tmp_path / "window.ini", {})
    assert size.fits(percent, screen, SMALLEST) is fits
    size.keep(125)
    size.begin()
    assert size.fits(percent, screen / 1.25, SMALLEST) is fits, "the screen is told in the units that have grown"


@pytest.fixture
def window(qtbot: QtBot, tmp_path: Path) -> Iterator[MainWindow]:
    state = board()
    recorder = FakeRecorder(state)
    size = TextSize(tmp_path / "window.ini", {})
    size.begin()
    made = MainWindow(
        lambda: Feed(clock=SteppedClock(state.assessed_at), worker=Worker(recorder.open, poll_s=3600.0)),
        choice=SchemeChoice.LIGHT,
        text_size=size,
    )
    qtbot.addWidget(made)
    made.show()
    made.start()
    qtbot.waitUntil(lambda: made.state is not None)
    yield made
    made.close()


def sizes_of(window: MainWindow) -> dict[str, QAction]:
    return {action.text(): action for action in window.actions() if action.text().endswith(" %")}


def test_the_menu_offers_the_sizes_and_ticks_the_one_in_use(window: MainWindow) -> None:
    offered = sizes_of(window)
    assert list(offered) == [f"{percent} %" for percent in TEXT_SIZES_PERCENT]
    assert [text for text, action in offered.items() if action.isChecked()] == ["100 %"]
    screen = window.screen().availableSize()
    for percent, action in zip(TEXT_SIZES_PERCENT, offered.values(), strict=True):
        room = screen * (100 / percent)
        roomy = room.width() >= SMALLEST_PX[0] and room.height() >= SMALLEST_PX[1]
        assert action.isEnabled() is (percent == 100 or roomy), "the size in use is always there to go back to"


def test_a_chosen_size_is_kept_and_starting_again_is_offered(qtbot: QtBot, window: MainWindow, tmp_path: Path) -> None:
    window.choose_text_size(150)
    assert "Text at 150 % from the next start" in window.notice.label.text()
    assert TextSize(tmp_path / "window.ini", {}).kept() == 150
    assert not window.start_again
    window.notice.action.click()
    qtbot.waitUntil(lambda: not window.isVisible())
    assert window.start_again


def test_going_back_to_the_size_in_use_asks_for_nothing(window: MainWindow, tmp_path: Path) -> None:
    window.choose_text_size(150)
    window.choose_text_size(100)
    assert not window.notice.isVisible()
    assert TextSize(tmp_path / "window.ini", {}).kept() == 100


def test_a_size_that_cannot_be_written_down_is_said(window: MainWindow, monkeypatch: pytest.MonkeyPatch) -> None:
    monkeypatch.setattr(TextSize, "keep", lambda _self, _percent: False)
    window.choose_text_size(150)
    assert "could not be written down" in window.notice.label.text()


@linux_only
@pytest.mark.parametrize(("percent", "ratio"), [(100, "1.0 1.0"), (150, "1.5 1.5"), (200, "2.0 2.0")])
def test_the_whole_window_is_painted_at_the_size_that_was_kept(tmp_path: Path, percent: int, ratio: str) -> None:
    place = tmp_path / "airfield-board" / "window.ini"
    place.parent.mkdir()
    assert TextSize(place, {}).keep(percent)
    done = run_python(
        ["-c", WINDOW_THAT_TELLS_ITS_SIZE],
        environment={"XDG_CONFIG_HOME": str(tmp_path), FACTOR_VARIABLE: None},
        folder=str(tmp_path),
    )
    assert (done.returncode, done.stdout.strip()) == (0, ratio), done.stderr


@linux_only
def test_starting_again_shows_the_chosen_size(tmp_path: Path) -> None:
    done = run_python(
        ["-c", WINDOW_THAT_STARTS_AGAIN],
        environment={"XDG_CONFIG_HOME": str(tmp_path), FACTOR_VARIABLE: None},
        folder=str(tmp_path),
    )
    assert (done.returncode, done.stdout.split()) == (0, ["1.0", "None", "1.75", "1.75"]), done.stderr


def test_the_program_begins_anew_in_the_place_of_the_process_with_its_own_arguments(
    monkeypatch: pytest.MonkeyPatch,
) -> None:
    begun: list[tuple[str, list[str]]] = []
    monkeypatch.setattr(sys, "orig_argv", ["python", "/somewhere/airfield-board", "--demo"])
    monkeypatch.setattr(os, "execv", lambda path, command: begun.append((path, command)))
    monkeypatch.setattr(subprocess, "Popen", lambda command: begun.append(("", command)))
    assert application._again_or(3) == 3
    assert begun == []
    assert application._again_or(application._START_AGAIN) == application.DONE
    assert begun[0][1] == [sys.executable, "/somewhere/airfield-board", "--demo"]
