"""The head of the wall view: the air, what it was measured from and how old that is, and the time."""

from collections.abc import Sequence
from dataclasses import dataclass
from datetime import datetime

from PySide6.QtCore import QRectF, Qt
from PySide6.QtGui import QColor, QPainter, QPen
from PySide6.QtWidgets import QWidget

from airfield_board.limits.states import State
from airfield_board.session.board_state import Freshness
from airfield_board.window import formatting
from airfield_board.window.canvas import Canvas
from airfield_board.window.fonts import BOLD, MEDIUM, REGULAR, SEMIBOLD
from airfield_board.window.lettering import Lettering, width_of
from airfield_board.window.marks import paint_mark
from airfield_board.window.reading import View
from airfield_board.window.strip import Cell, StripContent, content_of
from airfield_board.window.wall_row_painter import fitting_px

HEIGHT_PX = 176.0
"""At a scale of one, as all lengths here: a screen of 1920 by 1080 pixels."""
_SIDE_PX = 32.0
_LOUD_PX = 138
_VALUE_SIZES = ((44, 24), (40, 22), (36, 20), (32, 18), (28, 16))
_GROUP_GAP_PX = 40.0
_AGE_PX = 204.0
_CLOCK_PX = 62
_UPPER_LABEL, _UPPER_VALUE, _LOWER_LABEL, _LOWER_VALUE = 34.0, 74.0, 112.0, 152.0


@dataclass(frozen=True, slots=True, kw_only=True)
class _Pair:
    """Two values, one over the other."""

    upper: Cell
    lower: Cell


class WallHeader(Canvas):
    """Density altitude, its companions, the age of the reading, the airfield and the clock."""

    def __init__(self, parent: QWidget | None = None) -> None:
        super().__init__(parent)
        self._scale = 1.0
        self._view: View | None = None
        self._content: StripContent | None = None
        self._shown: tuple[object, datetime] | None = None
        self.setAccessibleName("Observation and time")

    def set_scale(self, scale: float) -> None:
        """Take the scale of all lengths."""
        if scale != self._scale:
            self._scale = scale
            self.update()

    def show_view(self, view: View) -> None:
        """Show another state or time."""
        content = content_of(view)
        shown = ((content, view.reading.cause, view.state.airfield), view.now.replace(microsecond=0))
        self._view, self._content = view, content
        if shown != self._shown:
            self._shown = shown
            loud = f"Density altitude {content.density_altitude} {content.unit}" if view.trusted else "NO DATA"
            self.setAccessibleDescription(f"{view.state.airfield.name}, {loud}, {' '.join(content.age)}")
            self.update()

    def paint(self, painter: QPainter, letters: Lettering) -> None:
        """Paint all of it."""
        painter.fillRect(self.rect(), QColor(self.colours.header))
        view, content = self._view, self._content
        if view is None or content is None:
            return
        clock_left = self._paint_clock(letters, view)
        age_left = clock_left - (_GROUP_GAP_PX + _AGE_PX) * self._scale
        self._paint_age(painter, letters, age_left, content)
        self._separator(painter, age_left - _GROUP_GAP_PX / 2 * self._scale)
        right = age_left - _GROUP_GAP_PX * self._scale
        if view.trusted:
            left = self._paint_air(letters, content)
            self._paint_values(painter, letters, content, left, right)
        else:
            left = self._paint_no_data(painter, letters)
            self._paint_cause(letters, view, content, left + _GROUP_GAP_PX * self._scale, right)

    def _px(self, drawn_px: float) -> int:
        return max(round(drawn_px * self._scale), 1)

    def _separator(self, painter: QPainter, x: float) -> None:
        inset = 20 * self._scale
        line = QRectF(round(x), inset, max(round(self._scale), 1), self.height() - 2 * inset)
        painter.fillRect(line, QColor(self.colours.soft_on_header if self._inverse() else self.colours.hairline))

    def _inverse(self) -> bool:
        return self.colours.header != self.colours.card

    def _paint_air(self, letters: Lettering, content: StripContent) -> float:
        colours, size = self.colours, self._scale
        left, baseline = _SIDE_PX * size, 147 * size
        letters.text((left, _UPPER_LABEL * size), "Density altitude", colours.soft_on_header, self._px(24), MEDIUM)
        at = (left - 5 * size, baseline)
        start = letters.text(at, content.density_altitude, colours.on_header, self._px(_LOUD_PX), SEMIBOLD) + 16 * size
        right = letters.text((start, baseline), content.unit, colours.soft_on_header, self._px(44))
        right = letters.text(
            (right + 16 * size, baseline), content.uncertainty, colours.on_header, self._px(44), SEMIBOLD
        )
        if content.compared:
            head, _colon, rest = content.compared.partition(": ")
            for text, y in ((f"{head}:", 78.0), (rest, 106.0)):
                end = letters.text((start, y * size), text, colours.on_header, self._px(22), SEMIBOLD)
                right = max(right, end)
        return right

    def _paint_no_data(self, painter: QPainter, letters: Lettering) -> float:
        """Paint the words in the place of the number, with the mark of a state without data."""
        colours, size = self.colours, self._scale
        left, middle, word = _SIDE_PX * size, self.height() / 2, self._px(84)
        width = width_of("NO DATA", word, BOLD) + 142 * size
        box = QRectF(left, middle - 58 * size, width, 116 * size)
        painter.save()
        painter.setRenderHint(QPainter.RenderHint.Antialiasing)
        painter.setPen(QPen(QColor(colours.soft_on_header), 3 * size, Qt.PenStyle.DashLine))
        painter.drawRoundedRect(box, 8 * size, 8 * size)
        painter.restore()
        mark = QRectF(box.left() + 26 * size, middle - 34 * size, 68 * size, 68 * size)
        paint_mark(painter, State.NO_DATA, mark, colours.on_header, colours.header)
        at = (mark.right() + 22 * size, middle + 0.727 * word / 2)
        letters.text(at, "NO DATA", colours.on_header, word, BOLD)
        return box.right()

    def _paint_cause(self, letters: Lettering, view: View, content: StripContent, left: float, right: float) -> None:
        """Say why there is no data, and what was known last."""
        colours, room = self.colours, right - left
        lines = formatting.no_data_lines(view.reading.cause, view.state, view.now, view.zone)
        said = [*lines[:2], content.last_known]
        drawn = ((44, SEMIBOLD, 62.0), (30, REGULAR, 108.0), (26, REGULAR, 148.0))
        for text, (size, weight, baseline) in zip(said, drawn, strict=False):
            fitted = fitting_px(text, self._px(size), weight, room, 0.5)
            ink = colours.on_header if weight == SEMIBOLD else colours.soft_on_header
            letters.text((left, baseline * self._scale), text, ink, fitted, weight, room_px=room)

    def _paint_values(
        self, painter: QPainter, letters: Lettering, content: StripContent, left: float, right: float
    ) -> None:
        """Paint as many pairs of values as there is room for, in the largest sizes at which they fit."""
        pairs = _pairs(content)
        gap = _GROUP_GAP_PX * self._scale
        while pairs:
            for drawn in _VALUE_SIZES:
                sizes = self._px(drawn[0]), self._px(drawn[1])
                widths = [max(_width(pair.upper, sizes), _width(pair.lower, sizes)) for pair in pairs]
                spare = right - left - sum(widths) - gap * len(pairs)
                if spare >= 0:
                    self._paint_pairs(painter, letters, pairs, widths, (left, gap + spare / (len(pairs) + 1)), sizes)
                    return
            pairs = pairs[:-1]

    def _paint_pairs(
        self,
        painter: QPainter,
        letters: Lettering,
        pairs: Sequence[_Pair],
        widths: Sequence[float],
        place: tuple[float, float],
        sizes: tuple[int, int],
    ) -> None:
        left, gap = place
        for pair, width in zip(pairs, widths, strict=True):
            self._separator(painter, left + gap / 2)
            left += gap
            for cell, label, value in (
                (pair.upper, _UPPER_LABEL, _UPPER_VALUE),
                (pair.lower, _LOWER_LABEL, _LOWER_VALUE),
            ):
                self._paint_cell(letters, left, cell, (label * self._scale, value * self._scale), sizes)
            left += width

    def _paint_cell(
        self, letters: Lettering, left: float, cell: Cell, baselines: tuple[float, float], sizes: tuple[int, int]
    ) -> None:
        colours = self.colours
        label, value = baselines
        letters.text((left, label), cell.label, colours.soft_on_header, sizes[1], MEDIUM)
        end = letters.text((left, value), cell.value, colours.on_header, sizes[0], SEMIBOLD)
        if cell.unit:
            letters.text((end + sizes[1] / 3, value), cell.unit, colours.soft_on_header, sizes[1], MEDIUM)

    def _paint_age(self, painter: QPainter, letters: Lettering, left: float, content: StripContent) -> None:
        colours, size, width = self.colours, self._scale, _AGE_PX * self._scale
        ageing = content.freshness is Freshness.AGEING
        ground, ink, soft = colours.header, colours.on_header, colours.soft_on_header
        if ageing:
            ground, ink, soft = ink, ground, ground
            painter.save()
            painter.setRenderHint(QPainter.RenderHint.Antialiasing)
            painter.setPen(Qt.PenStyle.NoPen)
            painter.setBrush(QColor(ground))
            box = QRectF(left - 14 * size, 6 * size, width + 28 * size, self.height() - 12 * size)
            painter.drawRoundedRect(box, 8 * size, 8 * size)
            painter.restore()
        label = fitting_px(content.observed, self._px(24), MEDIUM, width)
        letters.text((left, _UPPER_LABEL * size), content.observed, soft, label, MEDIUM, room_px=width)
        words = content.age[1]
        value = self._px(44)
        unit_room = width - width_of(content.age[0], value, SEMIBOLD) - 10 * size
        right = letters.text((left, 80 * size), content.age[0], ink, value, SEMIBOLD)
        if words:
            unit = fitting_px(words, self._px(24), MEDIUM, unit_room, 0.6)
            letters.text((right + 10 * size, 80 * size), words, soft, unit, MEDIUM, room_px=unit_room)
        self._paint_bar(painter, QRectF(left, 98 * size, width, 14 * size), content, (ink, soft))
        stale = content.freshness is Freshness.STALE
        word = content.stale_at.capitalize() if stale else content.trust
        small = self._px(20)
        beside = 0.0 if stale else width_of(content.stale_at, small) + 12 * size
        fitted = fitting_px(word, self._px(26), SEMIBOLD, width - beside, 0.6)
        baseline = 148 * size
        letters.text((left, baseline), word, ink, fitted, SEMIBOLD, room_px=width - beside)
        if not stale:
            letters.text((left + width, baseline), content.stale_at, soft, small, side="right")

    def _paint_bar(self, painter: QPainter, box: QRectF, content: StripContent, inks: tuple[str, str]) -> None:
        ink, soft = inks
        inverse = self._inverse() or content.freshness is Freshness.AGEING
        size = self._scale
        painter.save()
        painter.setRenderHint(QPainter.RenderHint.Antialiasing)
        painter.setPen(QPen(QColor(soft if inverse else self.colours.line), 1.5 * size))
        painter.drawRoundedRect(box, box.height() / 2, box.height() / 2)
        painter.setPen(Qt.PenStyle.NoPen)
        painter.setBrush(QColor(ink if inverse else self.colours.accent))
        inner = box.adjusted(4 * size, 4 * size, -4 * size, -4 * size)
        filled = QRectF(inner.left(), inner.top(), inner.width() * content.age_share, inner.height())
        painter.drawRoundedRect(filled, inner.height() / 2, inner.height() / 2)
        painter.restore()
        notch = inner.left() + inner.width() * content.ageing_share
        mark = QRectF(round(notch), box.top() - 5 * size, max(round(2 * size), 1), box.height() + 10 * size)
        painter.fillRect(mark, QColor(soft if inverse else self.colours.line))

    def _paint_clock(self, letters: Lettering, view: View) -> float:
        """Paint airfield, local and universal time, and return where they begin."""
        colours, size = self.colours, self._scale
        local, universal = view.now.astimezone(view.zone), view.now.astimezone(formatting.UNIVERSAL)
        right = self.width() - _SIDE_PX * size
        clock, seconds = self._px(_CLOCK_PX), self._px(36)
        width = width_of("88:88", clock, SEMIBOLD) + width_of(":88", seconds, MEDIUM)
        room = width + 30 * size
        name = view.state.airfield.name
        name_px = fitting_px(name, self._px(30), SEMIBOLD, room)
        letters.text((right, 38 * size), name, colours.on_header, name_px, SEMIBOLD, side="right", room_px=room)
        place = letters.text((right, 102 * size), f":{local:%S}", colours.soft_on_header, seconds, MEDIUM, side="right")
        letters.text((place, 102 * size), f"{local:%H:%M}", colours.on_header, clock, SEMIBOLD, side="right")
        place = letters.text(
            (right, 152 * size), f"{universal:%H:%M}", colours.soft_on_header, self._px(38), side="right"
        )
        letters.text((place - 10 * size, 152 * size), "UTC", colours.soft_on_header, self._px(24), side="right")
        return right - room


def _pairs(content: StripContent) -> list[_Pair]:
    """Return the values that the wall has room for, those that go first at the end."""
    (rate, peak), (_pressure_altitude, deviation), (altimeter, temperature, dewpoint) = content.cells
    return [
        _Pair(upper=_with_below(rate), lower=_with_below(peak)),
        _Pair(upper=temperature, lower=dewpoint),
        _Pair(upper=altimeter, lower=deviation),
    ]


def _with_below(cell: Cell) -> Cell:
    """Put what stands under a value behind it, where it says more than the value: ``ft at 15:50``."""
    below = "" if cell.arrow is not None else cell.below.partition(",")[0]
    unit = " ".join(part for part in (cell.unit, below) if part)
    return Cell(label=cell.label, value=cell.value, unit=unit, pattern=cell.pattern)


def _width(cell: Cell, sizes: tuple[int, int]) -> float:
    value = max(width_of(cell.value, sizes[0], SEMIBOLD), width_of(cell.pattern, sizes[0], SEMIBOLD))
    if cell.unit:
        value += sizes[1] / 3 + width_of(cell.unit, sizes[1], MEDIUM)
    return max(value, width_of(cell.label, sizes[1], MEDIUM))
