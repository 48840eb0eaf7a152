"""The rows of the board for screen readers: a list with an item for each row.

The panel paints its rows itself, so there is no widget for each that could speak for it.
"""

from functools import partial
from typing import TypeVar, cast

from PySide6.QtCore import QObject, QRect
from PySide6.QtGui import QAccessible, QAccessibleEvent, QAccessibleInterface, QWindow
from PySide6.QtWidgets import QAccessibleWidget
from shiboken6 import isValid

from airfield_board.window.row_panel import RowPanel
from airfield_board.window.row_words import RowWords

_T = TypeVar("_T")


class RowItem(QAccessibleInterface):
    """A place in the list: what stands there now has a name, a value and a state.

    Parameters
    ----------
    panel
        Whose row it is.
    place
        From the top, from 0.
    """

    def __init__(self, panel: RowPanel, place: int) -> None:
        super().__init__()
        self._panel = panel
        self._place = place

    def isValid(self) -> bool:
        """Whether there is a row in this place."""
        return isValid(self._panel) and self._place < len(self._panel.placed_rows)

    def object(self) -> QObject:
        """Return nothing: a row has no object of its own."""
        return _nothing(QObject)

    def window(self) -> QWindow:
        """Return the window of the panel."""
        return self._panel.window().windowHandle() if self.isValid() else _nothing(QWindow)

    def parent(self) -> QAccessibleInterface:
        """Return the list."""
        return (
            QAccessible.queryAccessibleInterface(self._panel)
            if isValid(self._panel)
            else _nothing(QAccessibleInterface)
        )

    def child(self, index: int, /) -> QAccessibleInterface:
        """Return nothing: a row has no parts."""
        return _nothing(QAccessibleInterface)

    def childCount(self) -> int:
        """Return that a row has no parts."""
        return 0

    def childAt(self, x: int, y: int, /) -> QAccessibleInterface:
        """Return nothing: a row has no parts."""
        return _nothing(QAccessibleInterface)

    def indexOfChild(self, child: QAccessibleInterface, /) -> int:
        """Return that a row has no parts."""
        return -1

    def text(self, t: QAccessible.Text, /) -> str:
        """Say the row: its name with its state, the margin as its value, all of it as its description."""
        words = self._words()
        if words is None:
            return ""
        return {
            QAccessible.Text.Name: words.spoken_name,
            QAccessible.Text.Value: words.spoken_value,
            QAccessible.Text.Description: words.spoken_rest,
        }.get(t, "")

    def setText(self, t: QAccessible.Text, text: str, /) -> None:
        """Take no text: a row says what the board says."""

    def rect(self) -> QRect:
        """Return where the row is on the screen."""
        if not self.isValid():
            return QRect()
        box = self._panel.placed_rows[self._place][1]
        corner = self._panel.mapToGlobal(self._panel.rect().topLeft())
        return QRect(corner.x(), corner.y() + round(box.top_px), self._panel.width(), round(box.height_px))

    def role(self) -> QAccessible.Role:
        """Return that it is an item of a list."""
        return QAccessible.Role.ListItem

    def state(self) -> QAccessible.State:
        """Return whether it is pointed at, and whether it is seen."""
        state = QAccessible.State()
        words = self._words()
        if words is None:
            state.invalid = 1
            return state
        chosen = words.key == self._panel.chosen
        state.focusable = 1
        state.selectable = 1
        state.readOnly = 1
        state.selected = int(chosen)
        state.focused = int(chosen and self._panel.hasFocus())
        state.invisible = int(not self._panel.isVisible())
        return state

    def _words(self) -> RowWords | None:
        return self._panel.placed_rows[self._place][0] if self.isValid() else None


class RowList(QAccessibleWidget):
    """The panel as a list of its rows."""

    def __init__(self, panel: RowPanel) -> None:
        super().__init__(panel, QAccessible.Role.List, panel.accessibleName())
        self._panel = panel
        self._items: list[RowItem] = []
        panel.destroyed.connect(partial(_forget, self._items))

    def childCount(self) -> int:
        """Return how many rows there are."""
        return len(self._panel.placed_rows) if isValid(self._panel) else 0

    def child(self, index: int, /) -> QAccessibleInterface:
        """Return a row by its place from the top."""
        if not 0 <= index < self.childCount():
            return _nothing(QAccessibleInterface)
        while len(self._items) <= index:
            item = RowItem(self._panel, len(self._items))
            QAccessible.registerAccessibleInterface(item)
            self._items.append(item)
        return self._items[index]

    def indexOfChild(self, child: QAccessibleInterface, /) -> int:
        """Return the place of a row; -1 for anything else."""
        return next((place for place, item in enumerate(self._items) if item is child), -1)

    def childAt(self, x: int, y: int, /) -> QAccessibleInterface:
        """Return the row at a point of the screen."""
        for place in range(self.childCount()):
            item = self.child(place)
            if item.rect().contains(x, y):
                return item
        return _nothing(QAccessibleInterface)

    def focusChild(self) -> QAccessibleInterface:
        """Return the row that the keyboard is at."""
        for place in range(self.childCount()):
            item = self.child(place)
            if item.state().focused:
                return item
        return _nothing(QAccessibleInterface)


def _forget(items: list[RowItem]) -> None:
    """Take rows of a panel that is no more out of Qt's register, before the memory behind them goes."""
    for item in items:
        QAccessible.deleteAccessibleInterface(QAccessible.uniqueId(item))
    items.clear()


def install_row_access() -> None:
    """Let screen readers find the rows; called once, before there is a window."""
    QAccessible.installFactory(_access_of)


def follow_focus(panel: RowPanel) -> None:
    """Tell screen readers of the row that the keyboard has come to, now and from now on."""

    def tell(key: str) -> None:
        if not key or not panel.hasFocus() or not QAccessible.isActive():
            return
        listed = QAccessible.queryAccessibleInterface(panel)
        item = listed.focusChild() if listed is not None else None
        if item is not None:
            QAccessible.updateAccessibility(QAccessibleEvent(item, QAccessible.Event.Focus))

    panel.selected.connect(tell)


def _access_of(kind: str, made_for: object) -> QAccessibleInterface | None:
    del kind
    return RowList(made_for) if isinstance(made_for, RowPanel) else None


def _nothing(kind: type[_T]) -> _T:
    """Return what Qt takes for a null pointer; its stubs for Python do not know that it may be one."""
    return cast(_T, None)
