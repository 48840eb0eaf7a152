"""What stands in the window where there is no board to show: NO DATA, and why."""

from collections.abc import Callable

from PySide6.QtCore import Qt
from PySide6.QtWidgets import QPushButton, QVBoxLayout, QWidget

from airfield_board.window.dialogs import plain_label
from airfield_board.window.fonts import BOLD, font

_WORD_PX = 48


class NoBoardPage(QWidget):
    """Says NO DATA and why, with at most one thing to do about it.

    Parameters
    ----------
    why
        Plain.
    action, act
        What its button says and does; without, there is none.
    """

    def __init__(self, why: str, *, action: str = "", act: Callable[[], object] | None = None) -> None:
        super().__init__()
        word = plain_label("NO DATA")
        word.setFont(font(_WORD_PX, BOLD))
        self.why = plain_label(why)
        self.button = QPushButton(action)
        self.button.setVisible(act is not None)
        if act is not None:
            self.button.clicked.connect(lambda: act())
        column = QVBoxLayout(self)
        column.addStretch(1)
        for widget in (word, self.why):
            widget.setAlignment(Qt.AlignmentFlag.AlignCenter)
            column.addWidget(widget)
        column.addWidget(self.button, 0, Qt.AlignmentFlag.AlignCenter)
        column.addStretch(1)

    def say(self, why: str) -> None:
        """Say another reason."""
        self.why.setText(why)
