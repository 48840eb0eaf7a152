"""The card that stands in the plot when there is no current observation: why, and the two ways out of it."""

from PySide6.QtCore import QPointF, QRectF, QSize, Qt, Signal
from PySide6.QtGui import QColor, QKeyEvent, QMouseEvent, QPainter, QPen
from PySide6.QtWidgets import QWidget

from airfield_board.window import formatting
from airfield_board.window.canvas import Canvas
from airfield_board.window.fonts import SEMIBOLD
from airfield_board.window.lettering import Lettering, baseline_for_middle, width_of
from airfield_board.window.reading import View

_WIDTH_PX = 212
_BUTTONS = ("Poll now", "Type it in")


class NoDataCard(Canvas):
    """Says why the board shows NO DATA.

    Signals
    -------
    poll_asked(), type_in_asked()
        A button was pressed.
    """

    poll_asked = Signal()
    type_in_asked = Signal()

    def __init__(self, parent: QWidget | None = None) -> None:
        super().__init__(parent)
        self._lines: tuple[str, ...] = ()
        self._interactive = True
        self._boxes: list[QRectF] = []
        self._focused = 0
        self.setFocusPolicy(Qt.FocusPolicy.StrongFocus)
        self.setAccessibleName("No current observation")
        self.hide()

    def set_interactive(self, interactive: bool) -> None:
        """Leave the buttons out of a picture, which nobody can press."""
        self._interactive = interactive

    def show_view(self, view: View) -> None:
        """Appear where the view is not to be trusted."""
        lines = formatting.no_data_lines(view.reading.cause, view.state, view.now, view.zone)
        if lines != self._lines:
            self._lines = lines
            self.setAccessibleDescription(". ".join(lines))
            self.update()
        self.setVisible(bool(lines))

    def sizeHint(self) -> QSize:
        """Room for the lines and the buttons."""
        widest = max((width_of(line, 13) for line in self._lines[1:]), default=0.0)
        title = width_of(self._lines[0], 15, SEMIBOLD) if self._lines else 0.0
        width = max(_WIDTH_PX, int(max(widest, title)) + 32)
        return QSize(width, 24 + 20 * len(self._lines) + (46 if self._interactive else 0))

    def covers(self, right: float, middle: float) -> bool:
        """Whether a line of text that ends at a place of the page would lie under the card."""
        box = self.geometry()
        return not self.isHidden() and box.left() < right and box.top() - 8 < middle < box.bottom() + 8

    def paint(self, painter: QPainter, letters: Lettering) -> None:
        """Paint all of it."""
        colours = self.colours
        painter.setRenderHint(QPainter.RenderHint.Antialiasing)
        painter.setPen(QPen(QColor(colours.ink), 1.6))
        painter.setBrush(QColor(colours.card))
        painter.drawRoundedRect(QRectF(self.rect()).adjusted(1, 1, -1, -1), 6, 6)
        baseline = 29.0
        for index, line in enumerate(self._lines):
            title = index == 0
            ink, size, weight = (colours.ink, 15, SEMIBOLD) if title else (colours.soft_ink, 13, 400)
            letters.text((16, baseline), line, ink, size, weight, room_px=self.width() - 28)
            baseline += 20 if index else 22
        self._boxes = []
        if self._interactive:
            self._paint_buttons(painter, letters)

    def _paint_buttons(self, painter: QPainter, letters: Lettering) -> None:
        colours = self.colours
        left = 16.0
        for index, word in enumerate(_BUTTONS):
            box = QRectF(left, self.height() - 46, width_of(word, 14, SEMIBOLD) + 24, 32)
            self._boxes.append(box)
            filled = index == 0
            painter.setPen(QPen(QColor(colours.ink if filled else colours.line), 1.2))
            painter.setBrush(QColor(colours.ink if filled else colours.card))
            painter.drawRoundedRect(box.adjusted(0.5, 0.5, -0.5, -0.5), 4, 4)
            ink = colours.card if filled else colours.ink
            at = (box.center().x(), baseline_for_middle(box.center().y(), 14))
            letters.text(at, word, ink, 14, SEMIBOLD, side="centre")
            if self.hasFocus() and self._focused == index:
                painter.setBrush(Qt.BrushStyle.NoBrush)
                painter.setPen(QPen(QColor(colours.accent), 2))
                painter.drawRoundedRect(box.adjusted(-3, -3, 3, 3), 6, 6)
            left = box.right() + 10

    def _press(self, index: int) -> None:
        (self.poll_asked, self.type_in_asked)[index].emit()

    def mousePressEvent(self, event: QMouseEvent) -> None:
        """Press the button under the pointer."""
        where = QPointF(event.position())
        for index, box in enumerate(self._boxes):
            if box.contains(where):
                self._press(index)

    def keyPressEvent(self, event: QKeyEvent) -> None:
        """Left and right change the button, Enter and Space press it."""
        key = event.key()
        if key in (Qt.Key.Key_Left, Qt.Key.Key_Right):
            self._focused = 0 if key == Qt.Key.Key_Left else 1
            self.update()
        elif key in (Qt.Key.Key_Return, Qt.Key.Key_Enter, Qt.Key.Key_Space) and self._interactive:
            self._press(self._focused)
        else:
            super().keyPressEvent(event)
