"""The strip at the foot: what changed lately, newest first, and what somebody must still acknowledge."""

from PySide6.QtCore import QPointF, QRectF, Qt, Signal
from PySide6.QtGui import QColor, QFocusEvent, QKeyEvent, QMouseEvent, QPainter, QPen
from PySide6.QtWidgets import QWidget

from airfield_board.session.board_state import StatusChange
from airfield_board.window import formatting
from airfield_board.window.canvas import Canvas
from airfield_board.window.fonts import BOLD, REGULAR, SEMIBOLD
from airfield_board.window.lettering import Lettering, cut_to
from airfield_board.window.marks import mark_colour, paint_mark
from airfield_board.window.reading import View

HEIGHT_PX = 56
COMPACT_HEIGHT_PX = 34
_PADDING_PX = 20.0
_ITEM_PX = 250.0
_COMPACT_ITEM_PX = 320.0


class ChangesStrip(Canvas):
    """The latest status changes and the button that acknowledges.

    Signals
    -------
    acknowledge_asked(object)
        The numbers of the changes to acknowledge, a tuple; from the button or Enter on a change.
    """

    acknowledge_asked = Signal(object)

    def __init__(self, parent: QWidget | None = None) -> None:
        super().__init__(parent)
        self._view: View | None = None
        self._shown: object = None
        self._focused: int | None = None
        self._items: list[tuple[QRectF, StatusChange]] = []
        self._button = QRectF()
        self._interactive = True
        self.setFocusPolicy(Qt.FocusPolicy.StrongFocus)
        self.setAccessibleName("Status changes")

    def set_interactive(self, interactive: bool) -> None:
        """Leave the button out of a picture, which nobody can press."""
        self._interactive = interactive
        self.update()

    def show_view(self, view: View) -> None:
        """Show another state or time."""
        shown = (view.state.changes, view.now.astimezone(view.zone).date())
        self._view = view
        if shown != self._shown:
            self._shown = shown
            if self._focused is not None and self._focused not in {change.number for change in view.state.changes}:
                self._focused = None
            waiting = formatting.count_open(len(self.open_changes()))
            newest = view.state.changes[0] if view.state.changes else None
            said = f"{formatting.STATE_WORDS[newest.state]}, {newest.label}" if newest else "none today"
            self.setAccessibleDescription(f"{waiting}; newest: {said}")
            self.update()

    def open_changes(self) -> tuple[StatusChange, ...]:
        """Return the changes that wait for acknowledgement, newest first."""
        return tuple(change for change in self._view.state.changes if change.open) if self._view is not None else ()

    def focused_change(self) -> StatusChange | None:
        """Return the waiting change that was chosen, or else the newest that waits; None where none does."""
        waiting = self.open_changes()
        chosen = [change for change in waiting if change.number == self._focused]
        return next(iter((*chosen, *waiting)), None)

    def paint(self, painter: QPainter, letters: Lettering) -> None:
        """Paint all of it."""
        self.paint_card(painter)
        view, colours = self._view, self.colours
        self._items = []
        if view is None:
            return
        if self.hasFocus() and self._focused is None:
            self.paint_focus(painter)
        compact = self.height() < HEIGHT_PX
        waiting = len(self.open_changes())
        count = formatting.count_open(waiting)
        upper, lower = self._baselines()
        left = letters.text((_PADDING_PX, upper), "Status changes", colours.ink, 15 if not compact else 13, SEMIBOLD)
        weight, ink = (SEMIBOLD, colours.ink) if waiting else (REGULAR, colours.soft_ink)
        if compact:
            left = letters.text((left + 10, upper), count, ink, 12, weight)
        else:
            left = max(left, letters.text((_PADDING_PX, lower), count, ink, 13, weight))
        left = max(left + 22, 190.0)
        right = self._paint_button(painter, letters, waiting) if self._interactive else self.width() - _PADDING_PX
        if not view.state.changes:
            letters.text((left, self.height() / 2 + 5), "none today", colours.soft_ink, 13)
            return
        fitting = max(int((right - 12 - left) // (_COMPACT_ITEM_PX if compact else _ITEM_PX)), 1)
        width = min((right - 12 - left) / fitting, 400.0 if compact else 330.0)
        # What waits comes first: it must not be pushed out by what does not.
        shown = sorted(view.state.changes, key=lambda change: not change.open)[:fitting]
        for index, change in enumerate(shown):
            box = QRectF(
                left + index * width, 6 if not compact else 3, width - 8, self.height() - (12 if not compact else 6)
            )
            previous = shown[index - 1] if index else None
            if previous is not None and not change.open and not previous.open:
                painter.fillRect(QRectF(round(box.left()) - 8, 12, 1, self.height() - 24), QColor(colours.hairline))
            self._items.append((box, change))
            self._paint_item(painter, letters, box, change, view)

    def _baselines(self) -> tuple[float, float]:
        return (24.0, 44.0) if self.height() >= HEIGHT_PX else (self.height() / 2 + 5, self.height() / 2 + 5)

    def _paint_item(self, painter: QPainter, letters: Lettering, box: QRectF, change: StatusChange, view: View) -> None:
        colours = self.colours
        if change.open:
            painter.fillRect(box, QColor(colours.cell))
            painter.fillRect(QRectF(box.left(), box.top(), 5, box.height()), QColor(colours.accent))
        if self.hasFocus() and self._focused == change.number:
            painter.setPen(QPen(QColor(colours.accent), 2))
            painter.drawRect(box.adjusted(1, 1, -1, -1))
        upper, lower = self._baselines()
        compact = self.height() < HEIGHT_PX
        ground = colours.cell if change.open else colours.card
        ink = colours.ink if change.open else colours.soft_ink
        mark = QRectF(box.left() + 15, upper - 11, 13, 13)
        paint_mark(painter, change.state, mark, mark_colour(change.state, colours), ground)
        word = formatting.STATE_WORDS[change.state]
        size = 12 if compact else 14
        left = letters.text((box.left() + 37, upper), word, colours.ink, size, SEMIBOLD)
        time = formatting.time_near(change.time, view.now, view.zone)
        if change.acknowledged_by:
            time += f", {cut_to(change.acknowledged_by, 40, 13)}"
        weight = BOLD if change.open else REGULAR
        right = letters.text((box.right() - 10, upper), time, ink, 12 if compact else 14, weight, side="right")
        if compact:
            letters.text((left + 8, upper), change.label, ink, 12, weight, room_px=max(right - left - 16, 0))
        else:
            room = box.width() - 25
            letters.text(
                (box.left() + 15, lower), change.label, ink, 13, SEMIBOLD if change.open else REGULAR, room_px=room
            )

    def _paint_button(self, painter: QPainter, letters: Lettering, waiting: int) -> float:
        colours = self.colours
        height = min(36.0, self.height() - 8.0)
        width = 156.0
        box = QRectF(self.width() - 14 - width, (self.height() - height) / 2, width, height)
        self._button = box
        painter.save()
        painter.setRenderHint(QPainter.RenderHint.Antialiasing)
        if waiting:
            painter.setPen(Qt.PenStyle.NoPen)
            painter.setBrush(QColor(colours.accent))
            ink = colours.on_accent
        else:
            painter.setPen(QPen(QColor(colours.line), 1))
            ink = colours.soft_ink
        painter.drawRoundedRect(box.adjusted(0.5, 0.5, -0.5, -0.5), 5, 5)
        key = QRectF(box.right() - 30, box.center().y() - 9, 17, 18)
        painter.setBrush(Qt.BrushStyle.NoBrush)
        painter.setPen(QPen(QColor(ink), 1))
        painter.drawRoundedRect(key.adjusted(0.5, 0.5, -0.5, -0.5), 3, 3)
        painter.restore()
        baseline = box.center().y() + 15 * 0.727 / 2
        letters.text((box.left() + 19, baseline), "Acknowledge", ink, 15, SEMIBOLD)
        letters.text((key.center().x(), key.center().y() + 4), "A", ink, 11, SEMIBOLD, side="centre")
        return box.left()

    def mousePressEvent(self, event: QMouseEvent) -> None:
        """Choose a change, or acknowledge with the button."""
        where = QPointF(event.position())
        if self._interactive and self._button.contains(where):
            self._acknowledge()
            return
        for box, change in self._items:
            if box.contains(where):
                self._focused = change.number
                self.update()

    def keyPressEvent(self, event: QKeyEvent) -> None:
        """Left and right move among the changes, Enter acknowledges."""
        numbers = [change.number for _box, change in self._items]
        step = {Qt.Key.Key_Left.value: -1, Qt.Key.Key_Right.value: 1}.get(event.key(), 0)
        if step and numbers:
            place = numbers.index(self._focused) + step if self._focused in numbers else 0
            self._focused = numbers[min(max(place, 0), len(numbers) - 1)]
            self.update()
        elif event.key() in (Qt.Key.Key_Return, Qt.Key.Key_Enter):
            self._acknowledge()
        elif event.key() == Qt.Key.Key_Escape and self._focused is not None:
            self._focused = None
            self.update()
        else:
            super().keyPressEvent(event)

    def _acknowledge(self) -> None:
        change = self.focused_change()
        if change is not None:
            self.acknowledge_asked.emit((change.number,))

    def focusInEvent(self, event: QFocusEvent) -> None:
        """Show the focus ring."""
        self.update()
        super().focusInEvent(event)

    def focusOutEvent(self, event: QFocusEvent) -> None:
        """Take the focus ring away."""
        self.update()
        super().focusOutEvent(event)
