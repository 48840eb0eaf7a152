"""The sheet of keys: which key does what, and where."""

from collections.abc import Sequence
from typing import TypeAlias

from PySide6.QtCore import Qt
from PySide6.QtGui import QPalette
from PySide6.QtWidgets import QDialog, QDialogButtonBox, QFrame, QGridLayout, QScrollArea, QVBoxLayout, QWidget

from airfield_board.window.dialogs import plain_label
from airfield_board.window.fonts import SEMIBOLD, font

Keys: TypeAlias = Sequence[tuple[str, str]]
"""Each key, and what it does, in words."""

PLACES: tuple[tuple[str, Keys], ...] = (
    (
        "Where the keyboard is",
        (
            ("Tab, Shift+Tab", "the next part of the window, the one before"),
            ("Alt", "the menus, with the underlined letter"),
            ("Esc", "close what was opened"),
        ),
    ),
    (
        "In the rows",
        (
            ("Up, Down, Home, End", "the row above, below, the first, the last"),
            ("Enter", "keep the row, and show its details"),
            ("Esc", "let go of the row"),
        ),
    ),
    ("In the header", (("Left, Right", "the page before, the next page"),)),
    (
        "In the status changes",
        (("Left, Right", "the change before, the next one"), ("Enter", "acknowledge it")),
    ),
    (
        "In the Margin page's list",
        (("Arrow keys", "move"), ("Space, Enter", "show the operation, or show it no more")),
    ),
    (
        "In its search field",
        (("Enter, Down", "go to the list"), ("Esc", "clear the field")),
    ),
)
"""What works only where the keyboard is."""
_SIZE_PX = (700, 720)
_KEY_PX = 176


class KeysDialog(QDialog):
    """Shows the keys that work anywhere, and those of each part of the window.

    Parameters
    ----------
    anywhere
        Those of the menus.
    """

    def __init__(self, anywhere: Keys, parent: QWidget | None = None) -> None:
        super().__init__(parent)
        self.setWindowTitle("Keys")
        self.setAttribute(Qt.WidgetAttribute.WA_DeleteOnClose)
        self.resize(*_SIZE_PX)
        self.groups: tuple[tuple[str, Keys], ...] = (("Anywhere", anywhere), *PLACES)
        sheet = QWidget()
        column = QVBoxLayout(sheet)
        column.setContentsMargins(4, 4, 4, 4)
        column.setSpacing(10)
        for heading, keys in self.groups:
            column.addWidget(_group(heading, keys))
        column.addStretch(1)
        self.area = QScrollArea()
        self.area.setWidgetResizable(True)
        self.area.setHorizontalScrollBarPolicy(Qt.ScrollBarPolicy.ScrollBarAlwaysOff)
        self.area.setWidget(sheet)
        self.area.setAccessibleName("Keys")
        self.area.setAccessibleDescription(self.text())
        buttons = QDialogButtonBox()
        buttons.addButton("Close", QDialogButtonBox.ButtonRole.RejectRole)
        buttons.rejected.connect(self.reject)
        body = QVBoxLayout(self)
        body.setContentsMargins(20, 16, 20, 16)
        body.addWidget(self.area, 1)
        body.addWidget(buttons)
        self.area.setFocus()

    def text(self) -> str:
        """All of it as lines of text."""
        return "\n".join(
            line for heading, keys in self.groups for line in (heading, *(f"{key}: {does}" for key, does in keys))
        )


def _group(heading: str, keys: Keys) -> QFrame:
    card = QFrame()
    card.setAutoFillBackground(True)
    card.setBackgroundRole(QPalette.ColorRole.Base)
    grid = QGridLayout(card)
    grid.setContentsMargins(14, 12, 14, 12)
    grid.setHorizontalSpacing(14)
    grid.setVerticalSpacing(5)
    grid.setColumnMinimumWidth(0, _KEY_PX)
    grid.setColumnStretch(1, 1)
    title = plain_label(heading)
    title.setFont(font(15, SEMIBOLD))
    grid.addWidget(title, 0, 0, 1, 2)
    for place, (key, does) in enumerate(keys, start=1):
        name, words = plain_label(key), plain_label(does)
        name.setWordWrap(False)
        name.setFont(font(14, SEMIBOLD))
        words.setAccessibleName(f"{key}: {does}")
        grid.addWidget(name, place, 0)
        grid.addWidget(words, place, 1)
    return card
