"""The header: whose board, what it is fed with, the pages, the time."""

from collections.abc import Sequence

from PySide6.QtCore import QPointF, QRectF, Qt, Signal
from PySide6.QtGui import QColor, QKeyEvent, QMouseEvent, QPainter, QPen
from PySide6.QtWidgets import QWidget

from airfield_board.session.board_state import Mode
from airfield_board.window import formatting
from airfield_board.window.canvas import Canvas
from airfield_board.window.fonts import BOLD, MEDIUM, SEMIBOLD
from airfield_board.window.lettering import Lettering, width_of
from airfield_board.window.reading import View

HEIGHT_PX = 48
_MIDDLE = 31.0
_DATE_FROM_PX = 1000
"""In a narrower header the date goes: the clock stays."""


class Header(Canvas):
    """Name, mode, pages and clock.

    Signals
    -------
    page_asked(int)
        A page was chosen, by its place from 0.
    """

    page_asked = Signal(int)

    def __init__(self, pages: Sequence[str], parent: QWidget | None = None) -> None:
        super().__init__(parent)
        self._pages = tuple(pages)
        self._page = 0
        self._view: View | None = None
        self._shown: object = None
        self._tabs: list[QRectF] = []
        self._live_word = "LIVE"
        self.setFocusPolicy(Qt.FocusPolicy.TabFocus)
        self.setAccessibleName("Airfield, pages and time")

    def show_view(self, view: View) -> None:
        """Show another state or time."""
        shown = (view.state.airfield, view.frames, view.live, view.state.observation, view.now.replace(microsecond=0))
        self._view = view
        if shown != self._shown:
            self._shown = shown
            chips = ", ".join(frame.value for frame in view.frames) or (self._live_word if view.live else "not live")
            self.setAccessibleDescription(f"{view.state.airfield.name}, {chips}")
            self.update()

    def set_picture(self) -> None:
        """Make this a picture's header: it was live when it was painted, and is no more when somebody looks at it."""
        self._live_word = "PICTURE"
        self.update()

    def set_page(self, page: int) -> None:
        """Underline another page's name."""
        self._page = page
        self.update()

    def paint(self, painter: QPainter, letters: Lettering) -> None:
        """Paint all of it."""
        colours = self.colours
        painter.fillRect(self.rect(), QColor(colours.header))
        painter.fillRect(QRectF(0, self.height() - 1, self.width(), 1), QColor(colours.hairline))
        self._tabs = []
        view = self._view
        if view is None:
            return
        clock_left = self._paint_clock(letters, view)
        left = self._paint_place(painter, letters, view, clock_left)
        self._paint_tabs(painter, letters, left, clock_left)

    def _paint_place(self, painter: QPainter, letters: Lettering, view: View, clock_left: float) -> float:
        colours = self.colours
        airfield = view.state.airfield
        left = 16.0
        frames = view.frames
        if frames:
            left = self._chip(painter, letters, left, frames[0].value, loud=True) + 14
        others = [frame.value for frame in frames[1:]]
        observation = view.state.observation
        if view.live:
            others = [self._live_word]
        elif observation is not None and observation.initials:
            others.append("TYPED IN")
        tabs = sum(width_of(page, 15, SEMIBOLD) + 30 for page in self._pages)
        chips = sum(width_of(word, 12, BOLD) + 30 for word in others)
        free = clock_left - left - tabs - chips - 40
        notes = [formatting.elevation(airfield.elevation_m, airfield.altitude_unit)]
        if view.state.mode is Mode.DEMO:
            notes.insert(0, "invented field")
        # In a narrow window the notes go, the last first, before the name is cut.
        while notes and free - _notes_width(notes) < width_of(airfield.name, 22, SEMIBOLD):
            notes.pop()
        room = max(free - _notes_width(notes), 60.0)
        left = letters.text((left, _MIDDLE), airfield.name, colours.on_header, 22, SEMIBOLD, room_px=room)
        for note in reversed(notes):
            left = letters.text((left + 11, _MIDDLE), note, colours.soft_on_header, 13)
        for word in others:
            left = self._chip(painter, letters, left + 12, word, loud=False)
        return left

    def _chip(self, painter: QPainter, letters: Lettering, left: float, word: str, *, loud: bool) -> float:
        colours = self.colours
        size, weight, height = (17, BOLD, 30.0) if loud else (12, BOLD, 21.0)
        box = QRectF(left, (HEIGHT_PX - height) / 2, width_of(word, size, weight) + (22 if loud else 16), height)
        painter.save()
        painter.setRenderHint(QPainter.RenderHint.Antialiasing)
        if loud:
            painter.setPen(Qt.PenStyle.NoPen)
            painter.setBrush(QColor(colours.on_header))
            painter.drawRoundedRect(box, 3, 3)
        else:
            painter.setPen(QPen(QColor(colours.soft_on_header), 1))
            painter.drawRoundedRect(box.adjusted(0.5, 0.5, -0.5, -0.5), 4, 4)
        painter.restore()
        ink = colours.header if loud else colours.on_header
        baseline = box.center().y() + size * 0.727 / 2
        letters.text((box.center().x(), baseline), word, ink, size, weight, side="centre")
        return box.right()

    def _paint_tabs(self, painter: QPainter, letters: Lettering, left: float, clock_left: float) -> None:
        colours = self.colours
        wanted = max(left + 34, min(336.0, clock_left - sum(width_of(page, 15, SEMIBOLD) + 30 for page in self._pages)))
        for index, page in enumerate(self._pages):
            width = width_of(page, 15, SEMIBOLD)
            box = QRectF(wanted - 10, 4, width + 20, self.height() - 8)
            self._tabs.append(box)
            chosen = index == self._page
            ink = colours.on_header if chosen else colours.soft_on_header
            letters.text((wanted, _MIDDLE - 1), page, ink, 15, SEMIBOLD if chosen else MEDIUM)
            if chosen:
                underline = colours.on_header if self._inverse() else colours.accent
                painter.fillRect(QRectF(wanted - 2, self.height() - 3, width + 4, 3), QColor(underline))
                if self.hasFocus():
                    painter.setPen(QPen(QColor(underline), 2))
                    painter.drawRoundedRect(box, 4, 4)
            wanted += width + 30

    def _paint_clock(self, letters: Lettering, view: View) -> float:
        colours = self.colours
        local, universal = view.now.astimezone(view.zone), view.now.astimezone(formatting.UNIVERSAL)
        right = float(self.width() - 16)
        right = letters.text((right, _MIDDLE), "UTC", colours.soft_on_header, 13, side="right") - 6
        right = letters.text((right, _MIDDLE), f"{universal:%H:%M}", colours.on_header, 22, side="right") - 26
        right = letters.text((right, _MIDDLE), "local", colours.soft_on_header, 13, MEDIUM, side="right") - 6
        right = letters.text((right, _MIDDLE), f":{local:%S}", colours.soft_on_header, 15, MEDIUM, side="right") - 1
        right = letters.text((right, _MIDDLE), f"{local:%H:%M}", colours.on_header, 24, SEMIBOLD, side="right") - 20
        if self.width() < _DATE_FROM_PX:
            return right
        date = formatting.weekday(view.now, view.zone)
        return letters.text((right, _MIDDLE), date, colours.soft_on_header, 13, MEDIUM, side="right")

    def _inverse(self) -> bool:
        return self.colours.header != self.colours.card

    def mousePressEvent(self, event: QMouseEvent) -> None:
        """Choose the page under the pointer."""
        where = QPointF(event.position())
        for index, box in enumerate(self._tabs):
            if box.contains(where):
                self.page_asked.emit(index)

    def keyPressEvent(self, event: QKeyEvent) -> None:
        """Left and right choose the neighbouring page."""
        step = {Qt.Key.Key_Left.value: -1, Qt.Key.Key_Right.value: 1}.get(event.key(), 0)
        if step and 0 <= self._page + step < len(self._pages):
            self.page_asked.emit(self._page + step)
        else:
            super().keyPressEvent(event)


def _notes_width(notes: Sequence[str]) -> float:
    return sum(width_of(note, 13) + 12 for note in notes)
