"""The first start, used as a person would: by keyboard, waiting for what is visible."""

import errno
import os
from collections.abc import Iterator
from dataclasses import replace
from datetime import UTC, datetime
from pathlib import Path

import pytest
from PySide6.QtCore import QByteArray, Qt, QTimeZone
from PySide6.QtGui import QColor, QGuiApplication
from PySide6.QtTest import QTest
from PySide6.QtWidgets import QApplication, QFileDialog, QLabel, QLineEdit, QPushButton
from pytestqt.qtbot import QtBot

from airfield_board.clock import SteppedClock
from airfield_board.configuration.profile import load_airfield
from airfield_board.resources import bundled_folder
from airfield_board.window import set_up_window
from airfield_board.window.airfield_opener import AirfieldOpener
from airfield_board.window.board_view import SMALLEST_PX
from airfield_board.window.empty_board import EmptyBoard, KnownAirfield
from airfield_board.window.next_window import AirfieldNext, DemoNext
from airfield_board.window.palette import DARK, LIGHT
from airfield_board.window.set_up_card import STEPS
from airfield_board.window.set_up_window import SetUpWindow
from airfield_board.window.theme import SchemeChoice
from tests.window.painting import lead_of_red_or_green, pixels

pytestmark = pytest.mark.qt_log_ignore("This plugin does not support (propagateSizeHints|raise)")

CAUTION = "Limits of the air only: not runway, wind, load or surface. HOLD: do not begin."  # contract, section 6
NOW = datetime(2026, 7, 16, 20, 14, tzinfo=UTC)
ROWS = (
    "time,altimeter_inhg,temperature_c,dewpoint_c\n"
    "2026-07-16T13:05:00,29.99,30.1,6.2\n"
    "2026-07-16T13:10:00,29.99,30.4,6.0\n"
)
TYPED = {
    "name": "Cinder Mesa",
    "elevation": "4120",
    "time_zone": "America/Los_Angeles",
    "aircraft": "Two-seat trainer",
    "limit": "6350",
}


class SetUp:
    """The window of the first start, and how a test uses it."""

    def __init__(self, qtbot: QtBot, folder: Path, note: str = "") -> None:
        self.qtbot = qtbot
        self.documents = folder / "documents"
        self.observations = folder / "o.csv"
        self.observations.write_text(ROWS, encoding="utf-8")
        self.clock = SteppedClock(NOW)
        self.window = SetUpWindow(self.clock, choice=SchemeChoice.LIGHT, documents=self.documents, note=note)
        qtbot.addWidget(self.window)
        self.card = self.window.card
        self.window.show()
        self.window.start()
        self.window.activateWindow()
        qtbot.waitUntil(self.window.isActiveWindow)

    def answer(self, **texts: str) -> None:
        for name, text in texts.items():
            self.card.fields[name].set_text(text)

    def answer_all(self) -> None:
        self.answer(observation_file=str(self.observations), **TYPED)

    def said(self, name: str) -> str:
        return self.card.fields[name].said.text()

    def preview(self) -> str:
        return self.card.preview.toPlainText()

    def ready(self) -> None:
        """Wait until the files can be written."""
        self.card.show_step(2)
        self.qtbot.waitUntil(self.card.action.isEnabled)

    def type(self, text: str) -> None:
        focused = QApplication.focusWidget()
        assert focused is not None
        QTest.keyClicks(focused, text)

    def press(self, key: Qt.Key, modifier: Qt.KeyboardModifier = Qt.KeyboardModifier.NoModifier) -> None:
        focused = QApplication.focusWidget()
        assert focused is not None
        QTest.keyClick(focused, key, modifier)


@pytest.fixture(autouse=True)
def machine_zone(monkeypatch: pytest.MonkeyPatch) -> None:
    monkeypatch.setattr(set_up_window, "_machine_zone", lambda: "")


@pytest.fixture
def set_up(qtbot: QtBot, tmp_path: Path) -> Iterator[SetUp]:
    made = SetUp(qtbot, tmp_path)
    yield made
    made.window.close()


def test_it_begins_with_the_name_of_an_airfield_that_is_not_there_yet(set_up: SetUp) -> None:
    assert set_up.card.fields["name"].editor.hasFocus()
    assert set_up.window.isVisible()
    assert "There is no airfield yet" in set_up.card.note.text()
    painted = painted_texts(set_up)
    assert {"No airfield yet", "20:14", "UTC", "06:00"} <= painted
    assert CAUTION in painted
    assert "local" not in painted


def painted_texts(set_up: SetUp) -> set[str]:
    set_up.window.tick()
    board = set_up.window.board
    board.grab()
    return {text.text for part in (board, board.day) for text in part.painted}


def test_the_whole_set_up_goes_by_keyboard_alone(set_up: SetUp) -> None:
    set_up.type("Cinder Mesa")
    set_up.press(Qt.Key.Key_Tab)
    set_up.type("4120")
    set_up.press(Qt.Key.Key_Tab)  # the unit
    set_up.press(Qt.Key.Key_Tab)
    set_up.card.fields["time_zone"].editor.setFocus()
    set_up.answer(time_zone="America/Los_Angeles")  # a completion's list would take the keys
    set_up.press(Qt.Key.Key_N, Qt.KeyboardModifier.AltModifier)
    set_up.qtbot.waitUntil(lambda: set_up.card.step == 1)
    set_up.type(str(set_up.observations))
    set_up.qtbot.waitUntil(lambda: "2 rows read" in set_up.preview())
    set_up.press(Qt.Key.Key_Return)
    assert set_up.card.step == 2
    set_up.type("Two-seat trainer")
    set_up.press(Qt.Key.Key_Tab)
    set_up.press(Qt.Key.Key_Tab)
    set_up.type("6350")
    set_up.qtbot.waitUntil(set_up.card.action.isEnabled)
    set_up.press(Qt.Key.Key_Return)
    set_up.qtbot.waitUntil(lambda: not set_up.window.isVisible())
    upcoming = set_up.window.next_window
    assert isinstance(upcoming, AirfieldNext)
    folder = set_up.documents / "Airfield Board" / "cinder-mesa"
    assert upcoming.profile_path == folder / "profile.yaml"
    profile, fleet = load_airfield(upcoming.profile_path)
    assert (profile.name, profile.time_zone) == ("Cinder Mesa", "America/Los_Angeles")
    assert profile.observations.file == set_up.observations
    assert fleet.aircraft[0].name == "Two-seat trainer"
    assert upcoming.airfield == (profile, fleet)
    assert set_up.observations.read_text(encoding="utf-8") == ROWS


def test_every_question_and_button_is_reached_by_tab(set_up: SetUp) -> None:
    for step, names in enumerate(STEPS.values()):
        set_up.card.show_step(step)
        reached = set()
        for _ in range(30):
            focused = QApplication.focusWidget()
            assert focused is not None
            reached.add(focused)
            set_up.press(Qt.Key.Key_Tab)
        for name in names:
            field = set_up.card.fields[name]
            assert field.editor in reached
            assert field.beside is None or field.beside in reached
        assert {set_up.card.demo, set_up.card.open_profile, *set_up.card.step_buttons} <= reached
        assert set_up.card.preview not in reached or step == 1


@pytest.mark.parametrize("choice", [SchemeChoice.LIGHT, SchemeChoice.DARK])
def test_wherever_tab_goes_the_eye_can_see_that_it_is_there(set_up: SetUp, choice: SchemeChoice) -> None:
    set_up.window.choose_scheme(choice)
    unseen = []
    for step in range(3):
        set_up.card.show_step(step)
        for _ in range(16):
            without = pixels(set_up.window.grab().toImage())
            set_up.press(Qt.Key.Key_Tab)
            part = QApplication.focusWidget()
            assert part is not None
            with_it = pixels(set_up.window.grab().toImage())
            corner = part.mapTo(set_up.window, part.rect().topLeft())
            here = slice(corner.y(), corner.y() + part.height()), slice(corner.x(), corner.x() + part.width())
            differing = int((abs(with_it[here] - without[here]).max(axis=2) > 20).sum())
            if differing < 60:
                text = part.text() if isinstance(part, QPushButton) else part.accessibleName()
                unseen.append((step, text or type(part).__name__, differing))
    assert unseen == []


def test_in_the_smallest_window_the_field_that_is_come_to_is_in_view(set_up: SetUp) -> None:
    set_up.window.resize(*SMALLEST_PX)
    for step, names in enumerate(STEPS.values()):
        set_up.card.show_step(step)
        room = set_up.card.pages.currentWidget()
        assert room is not None
        for name in names:
            editor = set_up.card.fields[name].editor
            while QApplication.focusWidget() is not editor:
                set_up.press(Qt.Key.Key_Tab)
            place = editor.mapTo(room, editor.rect().center())
            assert room.rect().contains(place), name


def test_of_many_faults_the_first_are_said(qtbot: QtBot, tmp_path: Path) -> None:
    made = SetUp(qtbot, tmp_path, note="\n".join(f"profile.yaml:{line}: wrong" for line in range(1, 60)))
    assert made.card.note.text().splitlines()[0] == "profile.yaml:1: wrong"
    assert made.card.note.text().splitlines()[-1] == "… and more."
    assert len(made.card.note.text().splitlines()) == 5
    made.window.close()


def test_what_is_wrong_is_said_beside_the_field_as_it_is_typed(set_up: SetUp) -> None:
    assert set_up.said("name") == "as the board shows it"
    set_up.card.fields["elevation"].editor.setFocus()
    set_up.type("4,120")
    assert "no plain decimal number" in set_up.said("elevation")
    assert "no plain decimal number" in set_up.card.fields["elevation"].editor.accessibleDescription()
    assert set_up.said("name") == "as the board shows it"
    set_up.answer(time_zone="Europe/Viena")
    assert "did you mean Europe/Vienna?" in set_up.said("time_zone")
    set_up.answer(elevation="4120", time_zone="Europe/Vienna")
    assert set_up.said("elevation") == "= 1,256 m"
    assert set_up.said("time_zone") == "there it is Thu 16 Jul, 22:14 now"


def test_going_on_says_what_is_still_missing_and_the_files_cannot_be_written(set_up: SetUp) -> None:
    set_up.card.go_on()
    set_up.card.show_step(0)
    assert set_up.said("name") == "This is still missing."
    assert "Airfield's name" in set_up.card.missing.text()
    assert set_up.card.step_buttons[0].text() == "&1  Airfield · 3 to do"
    set_up.card.show_step(2)
    assert not set_up.card.action.isEnabled()
    set_up.press(Qt.Key.Key_Return)
    assert not set_up.documents.exists()
    set_up.answer_all()
    set_up.ready()
    assert set_up.card.missing.text() == "Nothing is missing."
    assert [each.text().split("· ")[1] for each in set_up.card.step_buttons] == ["done"] * 3


def test_the_board_behind_fills_with_what_is_known(set_up: SetUp) -> None:
    set_up.answer(name="Cinder Mesa", elevation="4120", time_zone="America/Los_Angeles")
    assert {"Cinder Mesa", "4,120 ft", "13:14", "local"} <= painted_texts(set_up)
    set_up.clock.move_to(NOW.replace(minute=15))
    assert "13:15" in painted_texts(set_up)
    set_up.card.elevation_unit.setCurrentText("m")
    set_up.answer(elevation="1256")
    assert "1,256 m" in painted_texts(set_up)
    assert set_up.said("elevation") == "= 4,121 ft"


def test_the_preview_says_what_was_understood_and_follows_the_file(set_up: SetUp) -> None:
    assert "stands here" in set_up.preview()
    set_up.answer_all()
    assert set_up.preview() == "Looking at the file …"
    set_up.qtbot.waitUntil(lambda: "CSV with a header, 2 rows read" in set_up.preview())
    for words in ("13:10 (20:10 UTC), 4 min old", "29.99 inHg", "temperature 30.4 °C", "dew point 6.0 °C"):
        assert words in set_up.preview()
    with set_up.observations.open("a", encoding="utf-8") as file:
        file.write("2026-07-16T13:12:00,29.99,88.0,6.0\n")
    set_up.qtbot.waitUntil(lambda: "1 row would not be used" in set_up.preview(), timeout=20_000)
    assert "13:12 (20:12 UTC): range" in set_up.preview()


def test_what_was_understood_of_one_file_never_stands_beside_another(set_up: SetUp, tmp_path: Path) -> None:
    set_up.answer_all()
    set_up.qtbot.waitUntil(lambda: "2 rows read" in set_up.preview())
    set_up.answer(observation_file=str(tmp_path / "none.csv"))
    assert set_up.preview() == "Looking at the file …"
    set_up.qtbot.waitUntil(lambda: "none.csv does not exist" in set_up.preview())
    set_up.answer(time_zone="nowhere")
    assert "stands here" in set_up.preview()


def test_another_time_zone_of_the_files_times_is_looked_at_anew(set_up: SetUp) -> None:
    set_up.answer_all()
    set_up.answer(row_time_zone="Etc/GMT+8")
    set_up.qtbot.waitUntil(lambda: "No row can be used" in set_up.preview())  # 13:10 there is 21:10 UTC: in the future
    set_up.answer(row_time_zone="")
    set_up.qtbot.waitUntil(lambda: "4 min old" in set_up.preview())


def test_a_file_that_comes_later_does_not_keep_the_airfield_from_being_made(set_up: SetUp) -> None:
    set_up.answer_all()
    set_up.answer(observation_file="later.csv")
    assert set_up.said("observation_file").startswith("in full: ")
    set_up.ready()
    set_up.card.go_on()
    set_up.qtbot.waitUntil(lambda: not set_up.window.isVisible())
    upcoming = set_up.window.next_window
    assert isinstance(upcoming, AirfieldNext)
    assert upcoming.airfield[0].observations.file == upcoming.profile_path.parent / "later.csv"


def test_a_folder_where_an_airfield_stands_is_refused_beside_its_field(set_up: SetUp) -> None:
    set_up.answer_all()
    taken = set_up.documents / "Airfield Board" / "cinder-mesa"
    taken.mkdir(parents=True)
    (taken / "profile.yaml").write_text("mine", encoding="utf-8")
    set_up.qtbot.waitUntil(lambda: "profile.yaml" in set_up.said("folder") and "already" in set_up.said("folder"))
    set_up.card.show_step(2)
    assert not set_up.card.action.isEnabled()
    set_up.answer(folder=str(set_up.documents / "other"))
    set_up.ready()
    assert (taken / "profile.yaml").read_text(encoding="utf-8") == "mine"


def test_a_folder_that_was_typed_no_longer_follows_the_name(set_up: SetUp, tmp_path: Path) -> None:
    folder = set_up.card.fields["folder"]
    set_up.answer(name="Cinder Mesa")
    assert folder.text == str(set_up.documents / "Airfield Board" / "cinder-mesa")
    set_up.card.show_step(2)
    assert isinstance(folder.editor, QLineEdit)
    folder.editor.setFocus()
    folder.editor.selectAll()
    set_up.type(str(tmp_path / "mine"))
    set_up.answer(name="Other")
    assert folder.text == str(tmp_path / "mine")


def test_files_that_cannot_be_written_are_told_and_the_answers_stay(
    set_up: SetUp, monkeypatch: pytest.MonkeyPatch
) -> None:
    def full(_descriptor: int) -> None:
        raise OSError(errno.ENOSPC, "No space left on device")

    set_up.answer_all()
    set_up.ready()
    monkeypatch.setattr(os, "fsync", full)
    set_up.card.go_on()
    set_up.qtbot.waitUntil(lambda: "No space left on device" in set_up.card.note.text())
    assert set_up.window.isVisible()
    assert set_up.card.fields["name"].text == "Cinder Mesa"
    monkeypatch.undo()
    set_up.card.go_on()
    set_up.qtbot.waitUntil(lambda: not set_up.window.isVisible())
    assert isinstance(set_up.window.next_window, AirfieldNext)


def test_while_the_files_are_being_written_there_is_no_second_order(set_up: SetUp) -> None:
    set_up.answer_all()
    set_up.ready()
    set_up.card.set_writing(writing=True)
    assert not set_up.card.action.isEnabled()
    assert set_up.card.missing.text() == "Writing the files …"
    orders: list[bool] = []
    set_up.card.write_asked.connect(lambda: orders.append(True))
    set_up.card.go_on()
    assert orders == []


def test_the_fourth_button_leads_to_the_demo(set_up: SetUp) -> None:
    set_up.press(Qt.Key.Key_D, Qt.KeyboardModifier.AltModifier)
    set_up.qtbot.waitUntil(lambda: not set_up.window.isVisible())
    assert set_up.window.next_window == DemoNext()


def test_a_profile_that_is_there_already_is_opened_instead(set_up: SetUp, tmp_path: Path) -> None:
    for name in ("profile.yaml", "fleet.yaml"):
        (tmp_path / name).write_bytes((bundled_folder("demo_data") / name).read_bytes())
    set_up.card.open_profile.click()
    dialog = visible_dialog(set_up)
    dialog.fileSelected.emit(str(tmp_path / "profile.yaml"))
    set_up.qtbot.waitUntil(lambda: not set_up.window.isVisible())
    upcoming = set_up.window.next_window
    assert isinstance(upcoming, AirfieldNext)
    assert upcoming.airfield[0].name == "Cinder Mesa"


def visible_dialog(set_up: SetUp) -> QFileDialog:
    set_up.qtbot.waitUntil(lambda: any(each.isVisible() for each in set_up.window.findChildren(QFileDialog)))
    return next(each for each in set_up.window.findChildren(QFileDialog) if each.isVisible())


def test_a_profile_that_is_not_valid_is_refused_with_its_faults(set_up: SetUp, tmp_path: Path) -> None:
    (tmp_path / "profile.yaml").write_text("schema: 1\n<b>: x\n", encoding="utf-8")
    set_up.window.opener.open(tmp_path / "profile.yaml")
    set_up.qtbot.waitUntil(lambda: "profile.yaml:2" in set_up.card.note.text())
    assert "<b>" in set_up.card.note.text()
    assert set_up.card.note.textFormat() is Qt.TextFormat.PlainText
    assert set_up.window.isVisible()


def test_file_and_folder_can_be_chosen_from_a_list(set_up: SetUp, tmp_path: Path) -> None:
    for name, chosen in (("observation_file", set_up.observations), ("folder", tmp_path / "mine")):
        beside = set_up.card.fields[name].beside
        assert beside is not None
        set_up.card.show_step(1 if name == "observation_file" else 2)
        QTest.mouseClick(beside, Qt.MouseButton.LeftButton)
        dialog = visible_dialog(set_up)
        dialog.fileSelected.emit(str(chosen))
        dialog.reject()
        assert set_up.card.fields[name].text == str(chosen)
        set_up.qtbot.waitUntil(lambda: not set_up.window.findChildren(QFileDialog))
    set_up.answer(name="Other")
    assert set_up.card.fields["folder"].text == str(tmp_path / "mine")


def test_basis_that_is_not_said_is_left_out(set_up: SetUp) -> None:
    assert set_up.card.answers().basis == "flight manual"
    set_up.answer(basis="not said")
    assert set_up.card.answers().basis == ""


def test_back_and_the_numbers_lead_to_the_other_steps(set_up: SetUp) -> None:
    set_up.press(Qt.Key.Key_3, Qt.KeyboardModifier.AltModifier)
    set_up.qtbot.waitUntil(lambda: set_up.card.step == 2)
    assert set_up.card.fields["aircraft"].editor.hasFocus()
    set_up.press(Qt.Key.Key_B, Qt.KeyboardModifier.AltModifier)
    set_up.qtbot.waitUntil(lambda: set_up.card.step == 1)
    set_up.card.back.setFocus()
    set_up.press(Qt.Key.Key_Return)
    assert set_up.card.step == 0
    assert not set_up.card.back.isEnabled()


def test_a_fault_of_the_window_is_told_and_the_answers_stay(set_up: SetUp) -> None:
    set_up.answer(name="Cinder Mesa")
    set_up.window.show_fault("ZeroDivisionError: on purpose")
    assert "ZeroDivisionError" in set_up.card.note.text()
    assert set_up.card.fields["name"].text == "Cinder Mesa"


@pytest.mark.parametrize("size", [SMALLEST_PX, (1200, 760), (1440, 900)])
@pytest.mark.parametrize("step", range(3))
def test_no_text_of_the_card_is_cut(qtbot: QtBot, tmp_path: Path, size: tuple[int, int], step: int) -> None:
    set_up = SetUp(qtbot, tmp_path, note="The airfield that was open last cannot be opened.\n" + "a long reason " * 30)
    set_up.window.resize(*size)
    for field in set_up.card.fields.values():
        field.touched = True
    set_up.answer(elevation="4,120", time_zone="America/Los_Angelos", station="nothing", stale_after_min="1")
    set_up.answer(row_time_zone="America/Los_Angelos", expected_every_min="one", limit="six thousand", operation="")
    set_up.card.show_step(step)
    QApplication.processEvents()
    assert (set_up.window.width(), set_up.window.height()) == size
    visible = [label for label in set_up.card.findChildren(QLabel) if label.isVisible()]
    assert len(visible) > 2 * len(list(STEPS.values())[step])
    assert [label.text() for label in visible if label.heightForWidth(label.width()) > label.height()] == []
    assert set_up.window.board.rect().contains(set_up.card.geometry())
    set_up.window.close()


@pytest.mark.parametrize("choice", [SchemeChoice.LIGHT, SchemeChoice.DARK])
def test_nothing_is_red_amber_or_green_even_where_something_is_wrong(set_up: SetUp, choice: SchemeChoice) -> None:
    set_up.window.choose_scheme(choice)
    set_up.answer(name="Cinder Mesa", elevation="4,120", time_zone="America/Los_Angelos")
    set_up.card.action.setFocus()  # a text cursor is the ground's colour turned round
    QApplication.processEvents()
    image = set_up.window.grab().toImage()
    assert lead_of_red_or_green(image) <= 3
    ground = QColor((LIGHT if choice is SchemeChoice.LIGHT else DARK).page)
    assert tuple(pixels(image)[400, 4]) == (ground.red(), ground.green(), ground.blue())


def test_a_change_of_the_systems_look_is_followed_only_where_that_was_chosen(set_up: SetUp) -> None:
    set_up.window.choose_scheme(SchemeChoice.DARK)
    QGuiApplication.styleHints().colorSchemeChanged.emit(Qt.ColorScheme.Light)
    assert set_up.window.board.colours is DARK
    set_up.window.choose_scheme(SchemeChoice.SYSTEM)
    set_up.window.board.set_colours(DARK)
    QGuiApplication.styleHints().colorSchemeChanged.emit(Qt.ColorScheme.Light)
    set_up.qtbot.waitUntil(lambda: set_up.window.board.colours is LIGHT)


def test_the_machines_zone_is_proposed_where_it_names_a_place(
    qtbot: QtBot, tmp_path: Path, monkeypatch: pytest.MonkeyPatch
) -> None:
    monkeypatch.setattr(set_up_window, "_machine_zone", lambda: "Europe/Vienna")
    made = SetUp(qtbot, tmp_path)
    assert made.card.fields["time_zone"].text == "Europe/Vienna"
    made.window.close()


@pytest.mark.parametrize(
    ("name", "proposed"),
    [(b"Europe/Vienna", "Europe/Vienna"), (b"UTC", ""), (b"Etc/UTC", ""), (b"No/Such", ""), (b"", "")],
)
def test_a_machine_that_only_keeps_universal_time_proposes_nothing(
    name: bytes, proposed: str, monkeypatch: pytest.MonkeyPatch
) -> None:
    monkeypatch.undo()
    monkeypatch.setattr(QTimeZone, "systemTimeZoneId", lambda: QByteArray(name))
    assert set_up_window._machine_zone() == proposed


def test_an_empty_board_shows_what_it_is_given_as_it_comes(qtbot: QtBot) -> None:
    board = EmptyBoard()
    qtbot.addWidget(board)
    board.resize(1440, 900)
    board.grab()
    assert {text.text for text in board.painted} == {CAUTION}
    assert board.day.painted == []
    known = KnownAirfield(name="", elevation_m=None, altitude_unit="ft", time_zone="")
    board.show_airfield(known, NOW)
    board.grab()
    assert "No airfield yet" in {text.text for text in board.painted}
    board.show_airfield(replace(known, name="Cinder Mesa"), NOW)
    board.grab()
    assert "Cinder Mesa" in {text.text for text in board.painted}


def test_what_an_opener_is_asked_for_again_counts(qtbot: QtBot, set_up: SetUp, tmp_path: Path) -> None:
    opener = AirfieldOpener(set_up.window)
    why: list[str] = []
    opener.refused.connect(why.append)
    opener.open(tmp_path / "first.yaml")
    opener.open(tmp_path / "second.yaml")
    qtbot.waitUntil(lambda: bool(why))
    assert len(why) == 1
    assert "second.yaml" in why[0]
