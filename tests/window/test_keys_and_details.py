"""The window by keyboard: the sheet of keys, the details of a row, finding an operation."""

from collections.abc import Iterator
from dataclasses import replace
from datetime import timedelta

import pytest
from PySide6.QtCore import QPoint, Qt
from PySide6.QtTest import QTest
from PySide6.QtWidgets import QApplication, QLabel, QMenu
from pytestqt.qtbot import QtBot

from airfield_board.limits.states import State
from airfield_board.session.board_state import BoardState
from airfield_board.window.board_view import PageName
from airfield_board.window.details import Details
from airfield_board.window.details_dialog import GONE
from airfield_board.window.keys_dialog import PLACES, KeysDialog
from airfield_board.window.menus import KEYS
from airfield_board.window.row_panel import RowPanel
from airfield_board.window.row_words import FOLDED
from tests.window.states import board, stale_board
from tests.window.test_main_window import Desk, press

# The offscreen platform says so of what it cannot do; it means nothing for a real screen.
pytestmark = pytest.mark.qt_log_ignore("This plugin does not support (propagateSizeHints|raise)")


@pytest.fixture
def desk(qtbot: QtBot) -> Iterator[Desk]:
    made = Desk(qtbot, board())
    made.open()
    yield made
    made.window.close()


def details(desk: Desk) -> Details:
    desk.qtbot.waitUntil(desk.window.details.isVisible)
    shown = desk.window.details.details
    assert shown is not None
    return shown


def seen(desk: Desk) -> list[str]:
    return [label.text() for label in desk.window.details.findChildren(QLabel) if label.isVisible()]


def rows_of(desk: Desk) -> RowPanel:
    return desk.window.view.board.rows


def to_row(desk: Desk, name: str) -> None:
    """Go to a row by keys, as a person would."""
    rows = rows_of(desk)
    desk.window.activateWindow()
    rows.setFocus(Qt.FocusReason.TabFocusReason)
    desk.qtbot.waitUntil(rows.hasFocus)
    QTest.keyClick(rows, Qt.Key.Key_Home)
    for words, _box in rows.placed_rows:
        if words.key == rows.chosen and words.name == name:
            return
        QTest.keyClick(rows, Qt.Key.Key_Down)
    raise AssertionError(name)


def middle_of(rows: RowPanel, name: str) -> QPoint:
    box = next(box for words, box in rows.placed_rows if words.name == name)
    return QPoint(rows.width() // 2, round(box.middle_px))


# The details of a row.


def test_enter_on_a_row_pins_it_and_opens_its_details(desk: Desk) -> None:
    to_row(desk, "Motor glider")
    QTest.keyClick(rows_of(desk), Qt.Key.Key_Return)
    assert details(desk).title == "Motor glider · Self-launch"
    assert desk.window.details.windowTitle() == "Details: Motor glider · Self-launch"
    texts = seen(desk)
    assert {"Density altitude", "HOLD since 11:50", "6,450 ft", "−380 ft", "What the air costs now"} <= set(texts)
    assert "basis: operator policy; source: Operations manual 4.2" in texts
    assert "Limits of the air only: not runway, wind, load or surface. HOLD: do not begin." in texts
    assert rows_of(desk).chosen.startswith("motor-glider")


def test_a_double_click_opens_them_too(desk: Desk) -> None:
    rows = rows_of(desk)
    QTest.mouseDClick(
        rows, Qt.MouseButton.LeftButton, Qt.KeyboardModifier.NoModifier, middle_of(rows, "Six-seat utility")
    )
    assert details(desk).title == "Six-seat utility · Departure"


def test_d_opens_them_for_the_row_pointed_at_and_else_says_how_to_choose_one(desk: Desk) -> None:
    press(desk, Qt.Key.Key_D)
    assert not desk.window.details.isVisible()
    assert desk.window.notice.label.text().startswith("Choose a row first")
    to_row(desk, "Six-seat utility")
    press(desk, Qt.Key.Key_D)
    assert details(desk).title == "Six-seat utility · Departure"


def test_rows_of_the_margin_page_have_details_too(desk: Desk) -> None:
    press(desk, Qt.Key.Key_2)
    rows = desk.window.view.margin.rows
    desk.qtbot.waitUntil(lambda: bool(rows.placed_rows))
    QTest.mouseDClick(rows, Qt.MouseButton.LeftButton, Qt.KeyboardModifier.NoModifier, middle_of(rows, "Motor glider"))
    assert details(desk).title == "Motor glider · Self-launch"


def test_one_window_shows_another_row_when_asked_and_esc_closes_it(desk: Desk) -> None:
    for name in ("Motor glider", "Six-seat utility"):
        to_row(desk, name)
        QTest.keyClick(rows_of(desk), Qt.Key.Key_Return)
        assert details(desk).title.startswith(name)
    desk.qtbot.waitUntil(desk.window.details.area.hasFocus)
    QTest.keyClick(desk.window.details.area, Qt.Key.Key_Escape)
    assert not desk.window.details.isVisible()


def test_they_go_on_with_the_board_and_say_no_data_by_themselves(desk: Desk) -> None:
    to_row(desk, "Motor glider")
    QTest.keyClick(rows_of(desk), Qt.Key.Key_Return)
    assert details(desk).state is State.HOLD
    assert desk.window.state is not None
    assert desk.window.state.observation is not None
    desk.clock.move_to(desk.window.state.observation.time + timedelta(minutes=60, seconds=1))
    desk.window.tick()
    assert details(desk).state is State.NO_DATA
    lost = "NO DATA since 14:10, was HOLD at 13:10, no current observation"
    desk.qtbot.waitUntil(lambda: lost in seen(desk))
    assert not {"−380 ft", "6,830 ft", "1.108 × indicated"} & set(seen(desk))
    desk.clock.move_to(board().assessed_at)
    desk.show(stale_board())
    assert details(desk).state is State.NO_DATA


def test_words_that_change_keep_the_place_that_was_read(desk: Desk) -> None:
    to_row(desk, "Motor glider")
    QTest.keyClick(rows_of(desk), Qt.Key.Key_Return)
    details(desk)
    desk.window.details.resize(700, 320)
    bar = desk.window.details.area.verticalScrollBar()
    desk.qtbot.waitUntil(lambda: bar.maximum() > 60)
    bar.setValue(50)
    labels = desk.window.details.findChildren(QLabel)
    assert desk.window.state is not None
    state = desk.window.state
    rows = tuple(
        replace(row, limits=tuple(replace(line, margin=-410.0) for line in row.limits)) for row in state.operations
    )
    desk.show(replace(state, operations=rows))
    assert "−410 ft" in seen(desk)
    assert desk.window.details.findChildren(QLabel) == labels
    assert bar.value() == 50


def test_an_operation_that_went_is_said_to_be_gone(desk: Desk) -> None:
    to_row(desk, "Motor glider")
    QTest.keyClick(rows_of(desk), Qt.Key.Key_Return)
    details(desk)
    state = desk.window.state
    assert state is not None
    kept = tuple(row for row in state.operations if row.aircraft_name != "Motor glider")
    desk.show(replace(state, operations=kept))
    assert desk.window.details.details is None
    assert desk.window.details.head.accessibleName() == GONE
    assert "−380 ft" not in seen(desk)
    desk.show(state)
    assert details(desk).title == "Motor glider · Self-launch"


def test_after_a_fault_of_the_window_they_are_taken_away_with_the_board(desk: Desk) -> None:
    to_row(desk, "Motor glider")
    QTest.keyClick(rows_of(desk), Qt.Key.Key_Return)
    details(desk)
    desk.window.show_fault("ValueError: no")
    assert not desk.window.details.isVisible()
    press(desk, Qt.Key.Key_D)
    assert not desk.window.details.isVisible()


def test_text_from_files_is_plain(desk: Desk) -> None:
    state = desk.window.state
    assert state is not None
    rows = tuple(
        replace(
            row,
            aircraft_name=f"<b>{row.aircraft_name}</b>",
            limits=tuple(replace(line, source="<i>manual</i>", notice="<u>order</u>") for line in row.limits),
        )
        for row in state.operations
    )
    desk.show(replace(state, operations=rows))
    to_row(desk, "<b>Motor glider</b>")
    QTest.keyClick(rows_of(desk), Qt.Key.Key_Return)
    details(desk)
    texts = seen(desk)
    assert "basis: operator policy; source: <i>manual</i>" in texts
    assert "<u>order</u>" in texts
    formats = {label.textFormat() for label in desk.window.details.findChildren(QLabel)}
    assert formats == {Qt.TextFormat.PlainText}


def test_a_line_that_counts_several_rows_opens_all_of_them(desk: Desk) -> None:
    desk.window.resize(1200, 830)
    many = crowd(board(40))
    desk.show(many)
    rows = rows_of(desk)
    desk.qtbot.waitUntil(lambda: any(words.key.startswith(FOLDED) for words, _box in rows.placed_rows))
    folded = next(words for words, _box in rows.placed_rows if words.key.startswith(FOLDED))
    listed = {words.key for words, _box in rows.placed_rows}
    behind = [row for row in many.operations if row.state is folded.state and row.key not in listed]
    rows.choose(folded.key)
    assert rows.ask_details()
    shown = details(desk)
    assert folded.name == f"{len(behind)} more GO"
    assert shown.title == f"{len(behind)} operations"
    assert len(shown.sections) == len(behind) + 1


def crowd(state: BoardState) -> BoardState:
    """Return a board with so many rows that some are counted in one line."""
    more = tuple(
        replace(row, aircraft_id=f"{row.aircraft_id}-{number}") for number in range(3) for row in state.operations
    )
    return replace(state, operations=more)


def test_a_screen_reader_finds_each_fact_with_its_name(desk: Desk) -> None:
    to_row(desk, "Motor glider")
    QTest.keyClick(rows_of(desk), Qt.Key.Key_Return)
    shown = details(desk)
    names = {label.accessibleName() for label in desk.window.details.findChildren(QLabel)}
    assert {"Margin: −380 ft", "State: HOLD since 11:50", "Shaft power: 79 % of that at sea level"} <= names
    assert desk.window.details.area.accessibleName() == "Details of Motor glider · Self-launch"
    assert desk.window.details.area.accessibleDescription() == shown.plain
    assert desk.window.details.head.accessibleName().startswith("Motor glider · Self-launch, HOLD, clears at or below")


# Finding an operation.


def test_slash_goes_to_the_search_field_of_the_margin_page(desk: Desk) -> None:
    press(desk, Qt.Key.Key_Slash)
    margin = desk.window.view.margin
    assert desk.window.view.pages.currentIndex() == PageName.MARGIN
    desk.qtbot.waitUntil(margin.search.hasFocus)
    QTest.keyClicks(margin.search, "tow plane")
    assert margin.search.text() == "tow plane"
    QTest.keyClick(margin.search, Qt.Key.Key_Return)
    desk.qtbot.waitUntil(margin.picker.hasFocus)
    before = margin.keys
    QTest.keyClick(margin.picker, Qt.Key.Key_Space)
    assert set(before) ^ set(margin.keys) <= {
        row.key for row in board().operations if row.aircraft_name.startswith("Tow plane")
    }
    assert set(before) != set(margin.keys)
    press(desk, Qt.Key.Key_Slash)
    desk.qtbot.waitUntil(margin.search.hasFocus)
    assert margin.search.selectedText() == "tow plane"
    QTest.keyClick(margin.search, Qt.Key.Key_Escape)
    assert margin.search.text() == ""


def test_letters_typed_into_the_search_field_are_no_commands(desk: Desk) -> None:
    press(desk, Qt.Key.Key_Slash)
    search = desk.window.view.margin.search
    desk.qtbot.waitUntil(search.hasFocus)
    QTest.keyClicks(search, "dap1")
    assert search.text() == "dap1"
    assert desk.window.view.pages.currentIndex() == PageName.MARGIN
    assert not desk.window.details.isVisible()


# The sheet of keys.


@pytest.mark.parametrize("key", [Qt.Key.Key_F1, Qt.Key.Key_Question])
def test_the_sheet_of_keys_opens_and_names_them_all(desk: Desk, key: Qt.Key) -> None:
    press(desk, key)
    sheet = desk.dialog(KeysDialog)
    assert isinstance(sheet, KeysDialog)
    labels = [label.text() for label in sheet.findChildren(QLabel) if label.isVisibleTo(sheet)]
    for heading, keys in (("Anywhere", KEYS), *PLACES):
        assert heading in labels
        for name, does in keys:
            assert name in labels
            assert does in labels
            assert f"{name}: {does}" in sheet.text()
    assert sheet.area.accessibleDescription() == sheet.text()
    desk.qtbot.waitUntil(sheet.area.hasFocus)
    QTest.keyClick(sheet.area, Qt.Key.Key_Escape)
    desk.qtbot.waitUntil(lambda: not desk.window.findChildren(KeysDialog))


def test_every_key_of_the_menus_is_on_the_sheet_and_the_other_way_round(desk: Desk) -> None:
    of_menus = {key.toString() for action in desk.window.actions() for key in action.shortcuts()}
    on_the_sheet = {name for names, _does in KEYS for name in names.split(", ")}
    assert of_menus == on_the_sheet


def test_every_action_of_the_window_is_in_a_menu(desk: Desk) -> None:
    in_menus = {action for menu in desk.window.menuBar().findChildren(QMenu) for action in menu.actions()}
    assert set(desk.window.actions()) <= in_menus
    letters = [action.text() for action in desk.window.menuBar().actions()]
    assert all("&" in text for text in letters)
    assert len({text[text.index("&") + 1].lower() for text in letters}) == len(letters)


def test_letters_of_a_menu_are_each_used_once(desk: Desk) -> None:
    for menu in desk.window.menuBar().findChildren(QMenu):
        texts = [action.text() for action in menu.actions() if not action.isSeparator()]
        letters = [text[text.index("&") + 1].lower() for text in texts]
        assert len(set(letters)) == len(letters), texts


# What is said aloud.


def test_the_window_says_what_comes_to_hold_and_its_own_no_data(desk: Desk) -> None:
    said: list[str] = []
    desk.window.announcer.announced.connect(said.append)
    state = desk.window.state
    assert state is not None
    assert state.observation is not None
    desk.clock.move_to(state.observation.time + timedelta(minutes=60, seconds=1))
    desk.window.tick()
    assert said == ["NO DATA: 14 operations."]
    QApplication.processEvents()
    desk.window.tick()
    assert len(said) == 1
