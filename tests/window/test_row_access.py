"""Rows for screen readers: a list with items that have names, values, states and places."""

import gc
from collections.abc import Iterator
from dataclasses import replace

import pytest
from PySide6.QtCore import QEvent, QPoint, Qt
from PySide6.QtGui import QAccessible, QAccessibleInterface
from PySide6.QtTest import QTest
from PySide6.QtWidgets import QApplication
from pytestqt.qtbot import QtBot

from airfield_board.session.board_state import BoardState
from airfield_board.window.board_view import BoardView
from airfield_board.window.picture import image_of
from airfield_board.window.row_access import follow_focus, install_row_access
from airfield_board.window.row_panel import RowPanel
from tests.window import states
from tests.window.painting import shown_view

TEXT = QAccessible.Text


@pytest.fixture(scope="module", autouse=True)
def access(qapp: QApplication) -> Iterator[None]:
    """Screen readers are there; the factory is installed once, as the program does."""
    install_row_access()
    before = QAccessible.isActive()
    QAccessible.setActive(True)
    yield
    QAccessible.setActive(before)


def view_on_screen(qtbot: QtBot, state: BoardState) -> BoardView:
    view, _image = shown_view(state)
    qtbot.addWidget(view)
    view.show()
    qtbot.waitExposed(view)
    image_of(view)
    return view


def list_of(panel: RowPanel) -> QAccessibleInterface:
    found = QAccessible.queryAccessibleInterface(panel)
    assert found is not None
    return found


def items_of(panel: RowPanel) -> list[QAccessibleInterface]:
    rows = list_of(panel)
    return [rows.child(place) for place in range(rows.childCount())]


def test_the_rows_are_a_list_with_an_item_for_each_in_the_order_they_stand(qtbot: QtBot) -> None:
    state = states.board()
    view = view_on_screen(qtbot, state)
    rows = list_of(view.board.rows)
    assert rows.role() == QAccessible.Role.List
    assert rows.text(TEXT.Name) == "Operations"
    items = items_of(view.board.rows)
    assert len(items) == 15
    assert {item.role() for item in items} == {QAccessible.Role.ListItem}
    assert [rows.indexOfChild(item) for item in items] == list(range(15))
    names = [item.text(TEXT.Name) for item in items]
    # Highest limit first; the invented air is at 6,830 ft; without a place at the foot.
    assert names[0] == "GO, Turboprop single · Departure"
    assert "HOLD, Motor glider · Self-launch" in names
    assert "REDUCED, Tow plane, two-seater · Aerotow" in names
    assert names[-1] == "NO DATA, Gyroplane · Departure"


def test_an_item_has_its_margin_as_value_and_the_rest_as_description(qtbot: QtBot) -> None:
    view = view_on_screen(qtbot, states.board())
    item = next(one for one in items_of(view.board.rows) if "Motor glider" in one.text(TEXT.Name))
    # Limit 6,450 ft, air 6,826 ft; it clears at 6,450 - 150.
    assert item.text(TEXT.Value) == "margin −380"
    assert item.text(TEXT.Description) == (
        "margin −380, clears at or below 6,300 ft, for 10 min, Self-launch · limit 6,450 ft"
    )
    assert item.text(TEXT.Help) == ""
    item.setText(TEXT.Name, "GO")
    assert item.text(TEXT.Name) == "HOLD, Motor glider · Self-launch"


def test_an_item_says_what_stands_there_now(qtbot: QtBot) -> None:
    state = states.board()
    view = view_on_screen(qtbot, state)
    items = items_of(view.board.rows)
    stale = states.stale_board()
    view.show_state(stale, stale.assessed_at)
    image_of(view)
    assert {item.text(TEXT.Name).split(",")[0] for item in items} == {"NO DATA"}
    assert {item.text(TEXT.Value) for item in items} == {"margin —"}


def test_items_of_rows_that_went_are_no_longer_valid(qtbot: QtBot) -> None:
    state = states.board()
    view = view_on_screen(qtbot, state)
    items = items_of(view.board.rows)
    fewer = replace(state, operations=state.operations[:3])
    view.show_state(fewer, fewer.assessed_at)
    assert list_of(view.board.rows).childCount() == 3
    assert [item.isValid() for item in items] == [True] * 3 + [False] * 12
    gone = items[-1]
    assert (gone.text(TEXT.Name), gone.rect().isEmpty(), bool(gone.state().invalid)) == ("", True, True)
    assert list_of(view.board.rows).child(3) is None


def test_the_row_that_the_keyboard_is_at_has_the_focus(qtbot: QtBot) -> None:
    view = view_on_screen(qtbot, states.board())
    panel = view.board.rows
    view.activateWindow()
    panel.setFocus(Qt.FocusReason.TabFocusReason)
    qtbot.waitUntil(panel.hasFocus)
    QTest.keyClick(panel, Qt.Key.Key_Home)
    QTest.keyClick(panel, Qt.Key.Key_Down)
    focused = list_of(panel).focusChild()
    assert focused is not None
    assert focused.text(TEXT.Name) == items_of(panel)[1].text(TEXT.Name)
    marks = [(bool(item.state().focused), bool(item.state().selected)) for item in items_of(panel)]
    assert marks == [(place == 1, place == 1) for place in range(15)]
    QTest.keyClick(panel, Qt.Key.Key_Escape)
    assert list_of(panel).focusChild() is None


def test_an_item_lies_where_its_row_is_painted(qtbot: QtBot) -> None:
    view = view_on_screen(qtbot, states.board())
    panel = view.board.rows
    rows = list_of(panel)
    for words, box in panel.placed_rows:
        at = panel.mapToGlobal(QPoint(panel.width() // 2, round(box.middle_px)))
        found = rows.childAt(at.x(), at.y())
        assert found is not None
        assert words.one_line in found.text(TEXT.Name)
    outside = panel.mapToGlobal(QPoint(10, 2))
    assert rows.childAt(outside.x(), outside.y()) is None


def test_an_item_is_a_leaf_that_knows_its_list(qtbot: QtBot) -> None:
    view = view_on_screen(qtbot, states.board())
    item = items_of(view.board.rows)[2]
    parent = item.parent()
    assert parent.role() == QAccessible.Role.List
    assert item.childCount() == 0
    assert item.child(0) is None
    assert item.childAt(0, 0) is None
    assert item.indexOfChild(parent) == -1
    assert item.object() is None
    assert item.window() is view.windowHandle()


def test_moving_by_key_tells_of_the_row_it_came_to(qtbot: QtBot) -> None:
    view = view_on_screen(qtbot, states.board())
    panel = view.board.rows
    follow_focus(panel)
    view.activateWindow()
    panel.setFocus(Qt.FocusReason.TabFocusReason)
    qtbot.waitUntil(panel.hasFocus)
    # What is told goes to the screen reader's bridge; here, that telling works with rows that come and go.
    for _ in range(20):
        QTest.keyClick(panel, Qt.Key.Key_Down)
    assert panel.chosen == panel.placed_rows[-1][0].key


def test_other_widgets_keep_their_own_access(qtbot: QtBot) -> None:
    view = view_on_screen(qtbot, states.board())
    strip = QAccessible.queryAccessibleInterface(view.strip)
    assert strip is not None
    assert strip.childCount() == 0
    assert strip.text(TEXT.Name) == view.strip.accessibleName()


def test_rows_of_windows_that_went_are_not_in_the_register_any_more(qtbot: QtBot) -> None:
    state = states.board(8)
    numbers: list[int] = []
    for _ in range(20):
        view, _image = shown_view(state)
        items = items_of(view.board.rows)
        numbers += [QAccessible.uniqueId(item) for item in items]
        assert [QAccessible.accessibleInterface(number) for number in numbers[-8:]] == items
        del items
        view.deleteLater()
        QApplication.sendPostedEvents(None, QEvent.Type.DeferredDelete.value)
        del view
        gc.collect()
        assert {QAccessible.accessibleInterface(number) for number in numbers} == {None}
