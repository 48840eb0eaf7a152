"""The Margin page."""

from PySide6.QtCore import Signal
from PySide6.QtGui import QPainter
from PySide6.QtWidgets import QWidget

from airfield_board.window.canvas import Canvas
from airfield_board.window.lettering import Lettering
from airfield_board.window.no_data_card import NoDataCard
from airfield_board.window.reading import View


class MarginPage(Canvas):
    """Margins over the day."""

    selected = Signal(str)
    poll_asked = Signal()
    type_in_asked = Signal()

    def __init__(self, parent: QWidget | None = None) -> None:
        super().__init__(parent)
        self.card = NoDataCard(self)

    def show_view(self, view: View) -> None:
        """Show another state or time."""

    def ensure_plot(self) -> None:
        """Make the plot now."""

    def paint(self, painter: QPainter, letters: Lettering) -> None:
        """Paint all of it."""
        self.paint_card(painter)
