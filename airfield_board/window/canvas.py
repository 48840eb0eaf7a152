"""What all painted parts of the window share: their colours, and the list of the texts they painted."""

from abc import abstractmethod

from PySide6.QtCore import QRectF, Qt
from PySide6.QtGui import QColor, QPainter, QPaintEvent, QPen
from PySide6.QtWidgets import QWidget

from airfield_board.window.lettering import Lettering, PaintedText
from airfield_board.window.palette import LIGHT, Palette

CARD_RADIUS_PX = 6.0


class Canvas(QWidget):
    """A widget that paints itself in one pass.

    Attributes
    ----------
    colours
        Set by `set_colours`.
    painted
        The texts of the last pass, in this widget's pixels.
    """

    def __init__(self, parent: QWidget | None = None) -> None:
        super().__init__(parent)
        self.colours: Palette = LIGHT
        self.painted: list[PaintedText] = []

    def set_colours(self, colours: Palette) -> None:
        """Take other colours."""
        if colours is not self.colours:
            self.colours = colours
            self.update()

    def paintEvent(self, event: QPaintEvent) -> None:
        """Paint, remembering the texts."""
        painter = QPainter(self)
        self.painted = []
        try:
            painter.setRenderHint(QPainter.RenderHint.TextAntialiasing)
            self.paint(painter, Lettering(painter, self.painted))
        finally:
            # A painter left active by an error would take the whole process with it.
            painter.end()

    @abstractmethod
    def paint(self, painter: QPainter, letters: Lettering) -> None:
        """Paint all of it."""

    def paint_card(self, painter: QPainter) -> None:
        """Fill the widget with a card's ground."""
        painter.save()
        painter.setRenderHint(QPainter.RenderHint.Antialiasing)
        painter.setPen(QColor(0, 0, 0, 0))
        painter.setBrush(QColor(self.colours.card))
        painter.drawRoundedRect(QRectF(self.rect()), CARD_RADIUS_PX, CARD_RADIUS_PX)
        painter.restore()

    def paint_focus(self, painter: QPainter) -> None:
        """Ring the whole widget: the keyboard is here, and at nothing smaller in it."""
        painter.save()
        painter.setRenderHint(QPainter.RenderHint.Antialiasing)
        painter.setPen(QPen(QColor(self.colours.accent), 2))
        painter.setBrush(Qt.BrushStyle.NoBrush)
        painter.drawRoundedRect(QRectF(self.rect()).adjusted(1, 1, -1, -1), CARD_RADIUS_PX, CARD_RADIUS_PX)
        painter.restore()
