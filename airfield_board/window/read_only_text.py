"""Lines to be read, copied and scrolled by keyboard, with a ring where the keyboard is."""

from PySide6.QtCore import QSize
from PySide6.QtGui import QPainter, QPaintEvent, QPalette, QPen
from PySide6.QtWidgets import QPlainTextEdit

_RING_PX = 2


class ReadOnlyText(QPlainTextEdit):
    """Plain text that nobody changes.

    Parameters
    ----------
    name
        For screen readers.
    least_px
        Its least height; it takes more where there is room.
    """

    def __init__(self, name: str, *, least_px: int) -> None:
        super().__init__()
        self._least_px = least_px
        self.setMinimumHeight(least_px)
        self.setReadOnly(True)
        self.setTabChangesFocus(True)
        self.setAccessibleName(name)

    def sizeHint(self) -> QSize:
        """Ask for no more than the least height."""
        return QSize(super().sizeHint().width(), self._least_px)

    def paintEvent(self, event: QPaintEvent) -> None:
        """Paint the text, and the ring."""
        super().paintEvent(event)
        if not self.hasFocus():
            return
        painter = QPainter(self.viewport())
        try:
            painter.setPen(QPen(self.palette().color(QPalette.ColorRole.Highlight), _RING_PX))
            painter.drawRect(self.viewport().rect().adjusted(1, 1, -1, -1))
        finally:
            painter.end()
