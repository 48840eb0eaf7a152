"""The foot of the wall view: what changed and waits for acknowledgement, the source, messages."""

from PySide6.QtCore import QRectF
from PySide6.QtGui import QColor, QPainter
from PySide6.QtWidgets import QWidget

from airfield_board.session.board_state import StatusChange, Weight
from airfield_board.window import formatting
from airfield_board.window.canvas import CARD_RADIUS_PX, Canvas
from airfield_board.window.fonts import BOLD, MEDIUM, REGULAR, SEMIBOLD
from airfield_board.window.lettering import Lettering, baseline_for_middle, width_of
from airfield_board.window.marks import mark_colour, paint_mark
from airfield_board.window.message_line import loud_messages
from airfield_board.window.reading import View

HEIGHT_PX = 50.0
MESSAGE_PX = 44.0
"""At a scale of one, as all lengths here: a screen of 1920 by 1080 pixels."""
_SIDE_PX = 26.0
_SOURCE_SHARE = 0.28


class WallFoot(Canvas):
    """How many status changes wait, the newest of them, and where the reading comes from."""

    def __init__(self, parent: QWidget | None = None) -> None:
        super().__init__(parent)
        self._scale = 1.0
        self._view: View | None = None
        self._shown: object = None
        self.setAccessibleName("Status changes")

    def set_scale(self, scale: float) -> None:
        """Take the scale of all lengths."""
        if scale != self._scale:
            self._scale = scale
            self.update()

    def show_view(self, view: View) -> None:
        """Show another state or time."""
        shown = (view.state.changes, view.state.observation, view.now.astimezone(view.zone).date())
        self._view = view
        if shown != self._shown:
            self._shown = shown
            waiting = sum(change.open for change in view.state.changes)
            self.setAccessibleDescription(formatting.count_open(waiting))
            self.update()

    def paint(self, painter: QPainter, letters: Lettering) -> None:
        """Paint all of it."""
        self.paint_card(painter)
        view, colours, size = self._view, self.colours, self._scale
        if view is None:
            return
        changes = view.state.changes
        waiting = sum(change.open for change in changes)
        words = self._px(26)
        baseline = baseline_for_middle(self.height() / 2, words)
        ink, weight = (colours.ink, SEMIBOLD) if waiting else (colours.soft_ink, REGULAR)
        count = formatting.count_open(waiting) if changes else "no status changes today"
        left = letters.text((_SIDE_PX * size, baseline), count, ink, words, weight) + 32 * size
        right = self._paint_source(letters, view) - 24 * size
        # What waits comes first: it must not be pushed out by what does not.
        for place, change in enumerate(sorted(changes, key=lambda change: not change.open)):
            if place and self._width(change, view) > right - left:
                break
            left = self._paint_change(painter, letters, change, view, (left, right)) + 34 * size

    def _px(self, drawn_px: float) -> int:
        return max(round(drawn_px * self._scale), 1)

    def _paint_source(self, letters: Lettering, view: View) -> float:
        """Paint the source and return where it begins."""
        observation, small = view.state.observation, self._px(22)
        source = formatting.source_line(observation) or "no observation yet"
        typed = observation is not None and bool(observation.initials)
        ink, weight = (self.colours.ink, SEMIBOLD) if typed else (self.colours.soft_ink, REGULAR)
        at = (self.width() - _SIDE_PX * self._scale, baseline_for_middle(self.height() / 2, small))
        room = self.width() * _SOURCE_SHARE
        return letters.text(at, source, ink, small, weight, side="right", room_px=room)

    def _width(self, change: StatusChange, view: View) -> float:
        words, since = self._px(26), formatting.time_near(change.time, view.now, view.zone)
        texts = width_of(formatting.STATE_WORDS[change.state], words, BOLD) + width_of(f"since {since}", words)
        label = width_of(change.label, words, MEDIUM if change.open else REGULAR)
        return 20 * self._scale + self._px(25) + texts + label + 36 * self._scale

    def _paint_change(
        self,
        painter: QPainter,
        letters: Lettering,
        change: StatusChange,
        view: View,
        sides: tuple[float, float],
    ) -> float:
        colours, size, (left, right) = self.colours, self._scale, sides
        words = self._px(26)
        baseline, middle = baseline_for_middle(self.height() / 2, words), self.height() / 2
        if change.open:
            painter.fillRect(QRectF(left, 9 * size, 6 * size, self.height() - 18 * size), QColor(colours.accent))
        side = self._px(25)
        mark = QRectF(left + 20 * size, middle - side / 2, side, side)
        paint_mark(painter, change.state, mark, mark_colour(change.state, colours), colours.card)
        ink = colours.ink if change.open else colours.soft_ink
        word = formatting.STATE_WORDS[change.state]
        place = letters.text((mark.right() + 12 * size, baseline), word, ink, words, BOLD) + 12 * size
        since = f"since {formatting.time_near(change.time, view.now, view.zone)}"
        taken = width_of(since, words) + 12 * size
        weight = MEDIUM if change.open else REGULAR
        room = right - place - taken
        place = letters.text((place, baseline), change.label, ink, words, weight, room_px=room) + 12 * size
        return letters.text((place, baseline), since, colours.soft_ink, words)


class WallMessage(Canvas):
    """The loudest message; hidden where there is none."""

    def __init__(self, parent: QWidget | None = None) -> None:
        super().__init__(parent)
        self._scale = 1.0
        self._view: View | None = None
        self._shown: object = None
        self.setAccessibleName("Message")
        self.hide()

    def set_scale(self, scale: float) -> None:
        """Take the scale of all lengths."""
        if scale != self._scale:
            self._scale = scale
            self.update()

    def show_view(self, view: View) -> None:
        """Show another state's messages."""
        self._view = view
        if view.state.messages != self._shown:
            self._shown = view.state.messages
            loud = loud_messages(view.state.messages)
            self.setVisible(bool(loud))
            self.setAccessibleDescription("; ".join(message.text for message in loud))
            self.update()

    def paint(self, painter: QPainter, letters: Lettering) -> None:
        """Paint all of it."""
        loud = loud_messages(self._view.state.messages) if self._view is not None else ()
        if not loud:
            return
        colours, size, first = self.colours, self._scale, loud[0]
        ground, ink = (colours.ink, colours.card) if first.weight is Weight.ALARM else (colours.card, colours.ink)
        painter.save()
        painter.setRenderHint(QPainter.RenderHint.Antialiasing)
        painter.setPen(QColor(colours.line))
        painter.setBrush(QColor(ground))
        painter.drawRoundedRect(QRectF(self.rect()).adjusted(0.5, 0.5, -0.5, -0.5), CARD_RADIUS_PX, CARD_RADIUS_PX)
        painter.restore()
        words = max(round(24 * size), 1)
        baseline, side = baseline_for_middle(self.height() / 2, words), _SIDE_PX * size
        right = self.width() - side
        if len(loud) > 1:
            right = letters.text((right, baseline), f"and {len(loud) - 1} more", ink, words, side="right") - side
        left = letters.text((side, baseline), first.topic.capitalize(), ink, words, SEMIBOLD) + 16 * size
        letters.text((left, baseline), first.text, ink, words, MEDIUM, room_px=right - left)
