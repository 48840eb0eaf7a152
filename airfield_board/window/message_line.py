"""A line for what the user should know: a file that cannot be read, settings that were refused, a doubtful sensor."""

from PySide6.QtCore import QRectF, Qt, Signal
from PySide6.QtGui import QColor, QKeyEvent, QMouseEvent, QPainter, QPen
from PySide6.QtWidgets import QWidget

from airfield_board.session.board_state import Message, Weight, loudest_first
from airfield_board.window.canvas import CARD_RADIUS_PX, Canvas
from airfield_board.window.fonts import MEDIUM, SEMIBOLD
from airfield_board.window.lettering import Lettering, baseline_for_middle
from airfield_board.window.reading import View

HEIGHT_PX = 28


class MessageLine(Canvas):
    """Shows the loudest message and says how many more there are; notes alone are not shown.

    Signals
    -------
    messages_asked()
        The line was pressed: all messages are wanted.
    """

    messages_asked = Signal()

    def __init__(self, parent: QWidget | None = None) -> None:
        super().__init__(parent)
        self._messages: tuple[Message, ...] = ()
        self.setFocusPolicy(Qt.FocusPolicy.TabFocus)
        self.setCursor(Qt.CursorShape.PointingHandCursor)
        self.setAccessibleName("Message")
        self.hide()

    def show_view(self, view: View) -> None:
        """Show another state's messages."""
        messages = loud_messages(view.state.messages)
        if messages != self._messages:
            self._messages = messages
            self.setVisible(bool(messages))
            self.setAccessibleDescription("; ".join(message.text for message in messages))
            self.setToolTip("")
            self.update()

    def paint(self, painter: QPainter, letters: Lettering) -> None:
        """Paint all of it."""
        if not self._messages:
            return
        colours, first = self.colours, self._messages[0]
        alarm = first.weight is Weight.ALARM
        ground, ink = (colours.ink, colours.card) if alarm else (colours.card, colours.ink)
        painter.save()
        painter.setRenderHint(QPainter.RenderHint.Antialiasing)
        focus = self.hasFocus()
        painter.setPen(QPen(QColor(colours.accent if focus else colours.line), 2 if focus else 1))
        painter.setBrush(QColor(ground))
        painter.drawRoundedRect(QRectF(self.rect()).adjusted(1, 1, -1, -1), CARD_RADIUS_PX, CARD_RADIUS_PX)
        painter.restore()
        baseline = baseline_for_middle(self.height() / 2, 13)
        rest = len(self._messages) - 1
        more = f"and {rest} more" if rest else "details"
        right = letters.text((self.width() - 16, baseline), more, ink, 13, MEDIUM, side="right")
        word = first.topic.capitalize()
        left = letters.text((16, baseline), word, ink, 13, SEMIBOLD) + 12
        room = right - 16 - left
        letters.text((left, baseline), first.text, ink, 13, MEDIUM, room_px=room)

    def mousePressEvent(self, event: QMouseEvent) -> None:
        """Ask for all messages."""
        self.messages_asked.emit()

    def keyPressEvent(self, event: QKeyEvent) -> None:
        """Enter and Space ask for all messages."""
        if event.key() in (Qt.Key.Key_Return, Qt.Key.Key_Enter, Qt.Key.Key_Space):
            self.messages_asked.emit()
        else:
            super().keyPressEvent(event)


def loud_messages(messages: tuple[Message, ...]) -> tuple[Message, ...]:
    """Return the warnings and alarms, the loudest first."""
    return loudest_first(message for message in messages if message.weight is not Weight.NOTE)
