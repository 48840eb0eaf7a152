"""The list from which the operations of the Margin page are chosen."""

from dataclasses import dataclass

from PySide6.QtCore import QPointF, QRectF, Qt, Signal
from PySide6.QtGui import QColor, QKeyEvent, QMouseEvent, QPainter, QPen, QPolygonF, QWheelEvent
from PySide6.QtWidgets import QWidget

from airfield_board.limits.states import State
from airfield_board.window.canvas import Canvas
from airfield_board.window.fonts import MEDIUM, REGULAR, SEMIBOLD
from airfield_board.window.lettering import Lettering, baseline_for_middle
from airfield_board.window.marks import mark_colour, paint_mark

_PITCH_PX = 27.0
_SMALLEST_PITCH_PX = 21.0
_TOP_PX = 8.0


@dataclass(frozen=True, slots=True, kw_only=True)
class Choice:
    """An operation that can be chosen; ``note`` says why its margin cannot be drawn, empty where it can."""

    key: str
    state: State
    text: str
    margin: str
    note: str
    chosen: bool


class OperationPicker(Canvas):
    """Operations with a box to tick, in two columns; scrolls where they do not all fit.

    Signals
    -------
    toggled(str)
        The key of the operation whose box was pressed.
    """

    toggled = Signal(str)

    def __init__(self, parent: QWidget | None = None) -> None:
        super().__init__(parent)
        self._choices: tuple[Choice, ...] = ()
        self._first_line = 0
        self._focused = 0
        self._interactive = True
        self._boxes: list[tuple[QRectF, Choice]] = []
        self.setFocusPolicy(Qt.FocusPolicy.StrongFocus)
        self.setAccessibleName("Operations shown")

    def set_interactive(self, interactive: bool) -> None:
        """Say nothing of scrolling in a picture, where nobody can."""
        self._interactive = interactive
        self.update()

    def show_choices(self, choices: tuple[Choice, ...]) -> None:
        """Show other operations."""
        if choices != self._choices:
            self._choices = choices
            self._focused = min(self._focused, max(len(choices) - 1, 0))
            self._scroll_to(self._first_line)
            chosen = ", ".join(choice.text for choice in choices if choice.chosen)
            self.setAccessibleDescription(f"shown: {chosen}")
            self.update()

    def _lines(self) -> int:
        return (len(self._choices) + 1) // 2

    def _grid(self) -> tuple[float, int, int]:
        """Height of a line, how many fit, and how many stay hidden."""
        room = self.height() - _TOP_PX
        lines = max(self._lines(), 1)
        pitch = min(max(room / lines, _SMALLEST_PITCH_PX), _PITCH_PX)
        fitting = max(int((room + 0.01) // pitch), 1)
        if fitting < lines:
            fitting = max(int((room - 20) // pitch), int(room >= pitch))
        return pitch, fitting, max(lines - fitting, 0)

    def _scroll_to(self, line: int) -> None:
        self._first_line = min(max(line, 0), self._grid()[2])
        self.update()

    def paint(self, painter: QPainter, letters: Lettering) -> None:
        """Paint all of it."""
        colours = self.colours
        painter.fillRect(self.rect(), QColor(colours.card))
        pitch, fitting, hidden = self._grid()
        if self.hasFocus() and not self._choices:
            self.paint_focus(painter)
        self._boxes = []
        lines = self._lines()
        half = self.width() / 2
        shown = 0
        for column in range(2):
            for line in range(self._first_line, min(self._first_line + fitting, lines)):
                place = column * lines + line
                if place >= len(self._choices):
                    continue
                top = _TOP_PX + (line - self._first_line) * pitch
                width = half - 20 if column == 0 else half - 8
                cell = QRectF(column * half, top, width, pitch)
                self._boxes.append((cell, self._choices[place]))
                self._paint_choice(painter, letters, cell, place)
                shown += 1
        if hidden and _TOP_PX + fitting * pitch <= self.height() - 18:
            rest = len(self._choices) - shown
            text = f"{rest} more: scroll, or find by name" if self._interactive else f"{rest} more are not listed"
            letters.text((0, self.height() - 6), text, colours.soft_ink, 12)

    def _paint_choice(self, painter: QPainter, letters: Lettering, cell: QRectF, place: int) -> None:
        colours, choice = self.colours, self._choices[place]
        middle = cell.center().y()
        box = QRectF(cell.left() + 1, middle - 8, 16, 16)
        painter.save()
        painter.setRenderHint(QPainter.RenderHint.Antialiasing)
        usable = not choice.note
        painter.setPen(QPen(QColor(colours.accent if choice.chosen else colours.line), 1.4))
        painter.setBrush(QColor(colours.accent) if choice.chosen else Qt.BrushStyle.NoBrush)
        if usable:
            painter.drawRoundedRect(box.adjusted(0.5, 0.5, -0.5, -0.5), 3, 3)
        if choice.chosen:
            painter.setPen(QPen(QColor(colours.on_accent), 2))
            tick = [QPointF(4, 8.2), QPointF(7, 11.2), QPointF(12.2, 5)]
            painter.drawPolyline(QPolygonF([box.topLeft() + point for point in tick]))
        if self.hasFocus() and self._focused == place:
            painter.setBrush(Qt.BrushStyle.NoBrush)
            painter.setPen(QPen(QColor(colours.accent), 2))
            painter.drawRoundedRect(cell.adjusted(-3, 1, 3, -1), 4, 4)
        painter.restore()
        mark = QRectF(cell.left() + 27, middle - 6.5, 13, 13)
        paint_mark(painter, choice.state, mark, mark_colour(choice.state, colours), colours.card)
        baseline = baseline_for_middle(middle, 13)
        right = choice.note or choice.margin
        weight = SEMIBOLD if choice.chosen else MEDIUM
        end = letters.text(
            (cell.right(), baseline),
            right,
            colours.soft_ink if choice.note else colours.ink,
            13,
            REGULAR if choice.note else weight,
            side="right",
        )
        room = end - 10 - (cell.left() + 50)
        ink = colours.ink if choice.chosen else colours.soft_ink
        letters.text((cell.left() + 50, baseline), choice.text, ink, 13, weight, room_px=room)

    def mousePressEvent(self, event: QMouseEvent) -> None:
        """Tick or clear the box under the pointer."""
        where = QPointF(event.position())
        for cell, choice in self._boxes:
            if cell.contains(where):
                self._focused = self._choices.index(choice)
                self._toggle()

    def wheelEvent(self, event: QWheelEvent) -> None:
        """Scroll a line."""
        self._scroll_to(self._first_line - (1 if event.angleDelta().y() > 0 else -1))

    def keyPressEvent(self, event: QKeyEvent) -> None:
        """Arrows move, Space and Enter tick or clear."""
        step = {
            Qt.Key.Key_Up.value: -1,
            Qt.Key.Key_Down.value: 1,
            Qt.Key.Key_Left.value: -self._lines(),
            Qt.Key.Key_Right.value: self._lines(),
        }.get(event.key(), 0)
        if step and 0 <= self._focused + step < len(self._choices):
            self._focused += step
            line = self._focused % max(self._lines(), 1)
            fitting = self._grid()[1]
            if line < self._first_line or line >= self._first_line + fitting:
                self._scroll_to(line if line < self._first_line else line - fitting + 1)
            self.update()
        elif event.key() in (Qt.Key.Key_Space, Qt.Key.Key_Return, Qt.Key.Key_Enter):
            self._toggle()
        else:
            super().keyPressEvent(event)

    def _toggle(self) -> None:
        self.update()
        if self._focused < len(self._choices) and not self._choices[self._focused].note:
            self.toggled.emit(self._choices[self._focused].key)
