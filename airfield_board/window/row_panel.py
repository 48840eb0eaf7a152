"""The rows of the board, and the leaders that tie each to its limit on the plot."""

from collections.abc import Sequence
from dataclasses import dataclass

from PySide6.QtCore import QEvent, QPointF, QRectF, Qt, Signal
from PySide6.QtGui import (
    QColor,
    QEnterEvent,
    QFocusEvent,
    QKeyEvent,
    QMouseEvent,
    QPainter,
    QPen,
    QPolygonF,
    QResizeEvent,
)
from PySide6.QtWidgets import QToolTip, QWidget

from airfield_board.limits.states import State
from airfield_board.window.axes import AltitudeAxis
from airfield_board.window.canvas import Canvas
from airfield_board.window.fonts import MEDIUM, SEMIBOLD
from airfield_board.window.lettering import Lettering, baseline_for_middle, width_of
from airfield_board.window.marks import mark_colour
from airfield_board.window.row_layout import (
    FOLDED_PITCH_PX,
    FOLDED_SMALLEST_PX,
    Density,
    RowBox,
    RowPlan,
    choose_pitch,
    plan_rows,
    rows_that_fit,
)
from airfield_board.window.row_painter import GUTTER_PX, HOLD_COLUMN_FROM_PX, Columns, RowPainter, columns_for
from airfield_board.window.row_words import FOLDED, RowWords, folded, is_folded, wish_of

EMPTY_WORDS_PX = 90
UNFOLDED_ROWS = 40
"""So many rows are always listed one by one; of more, some are counted in one line where they get too low to read."""
_LOUD = (State.NEAR, State.REDUCED, State.HOLD)
UNFOLDED_PITCH_PX = 10.5
"""Lower than this, the letters of one row touch those of the next."""
ROWS_TOP_PX = 32
ROWS_BOTTOM_PX = 7


@dataclass(frozen=True, slots=True, kw_only=True)
class Headings:
    """Headings of the columns whose unit or content changes."""

    margin: str
    change: str
    last: str


class RowPanel(Canvas):
    """All the rows in order, the level of the air among them, and the leaders in the gutter.

    Signals
    -------
    selected(str)
        The key of the row under the pointer or the keyboard; empty where there is none.
    details_asked(object)
        Keys of the operations behind a row that was opened with Enter or a double click, a tuple.
    """

    selected = Signal(str)
    details_asked = Signal(object)

    def __init__(self, parent: QWidget | None = None) -> None:
        super().__init__(parent)
        self._words: tuple[RowWords, ...] = ()
        self._tips: dict[str, str] = {}
        self._axis: AltitudeAxis | None = None
        self._level: tuple[float, str] | None = None
        self._headings = Headings(margin="", change="", last="")
        self._columns = columns_for(Density.COMFORTABLE, HOLD_COLUMN_FROM_PX)
        self._plan: RowPlan | None = None
        self._all: tuple[RowWords, ...] = ()
        self._room_bottom_px: float | None = None
        self._empty_words = "No operations yet: the fleet file names none"
        self._chosen = ""
        self._pinned = False
        self.setMouseTracking(True)
        self.setFocusPolicy(Qt.FocusPolicy.StrongFocus)
        self.setAccessibleName("Operations")

    @property
    def chosen(self) -> str:
        """Key of the row that is pointed at."""
        return self._chosen

    @property
    def axis(self) -> AltitudeAxis | None:
        """The plot's altitude axis, in this widget's pixels; None before it was given."""
        return self._axis

    @property
    def words(self) -> tuple[RowWords, ...]:
        """The lines as listed, some of which may stand for several rows."""
        return self._words

    @property
    def plan(self) -> RowPlan | None:
        """The rows as placed; None before anything was shown."""
        return self._plan

    @property
    def placed_rows(self) -> list[tuple[RowWords, RowBox]]:
        """The rows as they stand, from top to bottom."""
        return [(self._words[box.index], box) for box in self._plan.boxes] if self._plan is not None else []

    def show_rows(
        self,
        words: Sequence[RowWords],
        tips: Sequence[str],
        headings: Headings,
        *,
        level: tuple[float, str] | None,
    ) -> None:
        """Show other rows.

        Parameters
        ----------
        tips
            A text for each row that says all of it; plain text.
        level
            The air's density altitude and its label; None where it is not known.
        """
        self._tips = {row.key: tip for row, tip in zip(words, tips, strict=True)}
        fresh = (tuple(words), level, headings)
        if fresh == (self._all, self._level, self._headings):
            return
        self._all, self._level, self._headings = fresh
        self.setAccessibleDescription("; ".join(row.spoken for row in self._all))
        if self._chosen and self._chosen not in {row.key for row in self._all}:
            self._choose("", pin=False)
        self.arrange()

    def choose_columns(self, height_px: float, window_px: int) -> Columns:
        """Choose the columns for the rows shown.

        Parameters
        ----------
        height_px
            Height that the rows will have from this widget's top.
        window_px
            Width of the window, by which columns are left out.
        """
        words = self._fitting(height_px - ROWS_BOTTOM_PX)
        pitch = choose_pitch(
            height_px - ROWS_BOTTOM_PX - ROWS_TOP_PX,
            len(words),
            with_level=self._level is not None,
            extra_lines=sum(row.extra_lines for row in words),
            with_foot=any(row.place_ft is None for row in words),
        )
        columns = columns_for(pitch.density, window_px)
        if columns != self._columns:
            self._columns = columns
            self.update()
        return columns

    def _fitting(self, bottom_px: float) -> tuple[RowWords, ...]:
        with_foot = any(row.place_ft is None for row in self._all)
        room_px = bottom_px - ROWS_TOP_PX
        words = self._all
        with_level = self._level is not None
        most = rows_that_fit(room_px, UNFOLDED_PITCH_PX, with_level=with_level, with_foot=with_foot)
        if len(words) <= min(UNFOLDED_ROWS, most):
            return words
        for pitch_px in (FOLDED_PITCH_PX, FOLDED_SMALLEST_PX):
            words = folded(self._all, rows_that_fit(room_px, pitch_px, with_level=with_level, with_foot=with_foot))
            if not any(is_folded(row, _LOUD) for row in words):
                break
        return words

    def choose(self, key: str) -> None:
        """Pin a row, as Enter does."""
        self._choose(key, pin=True)

    def ask_details(self) -> bool:
        """Ask for the details of the row that is pointed at; return whether there is one."""
        keys = self._keys_behind(self._chosen)
        if keys:
            self.details_asked.emit(keys)
        return bool(keys)

    def _keys_behind(self, key: str) -> tuple[str, ...]:
        """Return the operations that a row stands for: itself, or those that are counted in its line."""
        if not key.startswith(FOLDED):
            return (key,) if key else ()
        listed = {row.key for row in self._words}
        state = key.removeprefix(FOLDED)
        return tuple(row.key for row in self._all if row.state.value == state and row.key not in listed)

    def set_empty_words(self, words: str) -> None:
        """Say what stands there when there are no rows."""
        self._empty_words = words

    def set_axis(self, axis: AltitudeAxis, room_bottom_px: float | None = None) -> None:
        """Take the plot's altitude axis, in this widget's pixels.

        Parameters
        ----------
        room_bottom_px
            Where the room for rows ends; None: at the widget's foot.
        """
        if (axis, room_bottom_px) != (self._axis, self._room_bottom_px):
            self._axis, self._room_bottom_px = axis, room_bottom_px
            self.arrange()

    def arrange(self) -> None:
        """Place the rows anew."""
        axis = self._axis
        if axis is None:
            return
        bottom_px = self.height() - ROWS_BOTTOM_PX if self._room_bottom_px is None else self._room_bottom_px
        self._words = self._fitting(bottom_px)
        level_px = axis.px(self._level[0]) if self._level is not None else None
        wishes = [
            wish_of(row, axis.px(row.place_ft) if row.place_ft is not None else None, level_px) for row in self._words
        ]
        self._plan = plan_rows(wishes, level_px, ROWS_TOP_PX, bottom_px)
        self.update()

    def resizeEvent(self, event: QResizeEvent) -> None:
        """Place the rows anew."""
        super().resizeEvent(event)
        self.arrange()

    def paint(self, painter: QPainter, letters: Lettering) -> None:
        """Paint all of it."""
        self._paint_headings(letters)
        if self.hasFocus() and not self._chosen:
            self.paint_focus(painter)
        plan, axis = self._plan, self._axis
        if plan is None or axis is None:
            return
        self._paint_water(painter, plan)
        self._paint_leaders(painter, plan, axis)
        if not self._words:
            beside_level = plan.level_px is not None and abs(plan.level_px - EMPTY_WORDS_PX) < 30
            at = (GUTTER_PX + self._columns.name, EMPTY_WORDS_PX + (60 if beside_level else 0))
            letters.text(at, self._empty_words, self.colours.soft_ink, 15, MEDIUM)
        rows = RowPainter(painter=painter, letters=letters, colours=self.colours, columns=self._columns)
        for box in plan.boxes:
            row = self._words[box.index]
            if row.key == self._chosen:
                self._paint_ring(painter, box)
            rows.paint_row(box, row, plan)
        if plan.level_px is not None:
            self._paint_level(painter, letters, plan, axis)

    def _paint_headings(self, letters: Lettering) -> None:
        columns, left, ink = self._columns, float(GUTTER_PX), self.colours.soft_ink
        small = 13
        letters.text((left, 23), "State", ink, small, MEDIUM)
        one_line = self._plan is not None and self._plan.pitch.density is not Density.COMFORTABLE
        letters.text((left + columns.name, 23), "Operation" if one_line else "Operation and limit", ink, small, MEDIUM)
        if columns.limit_right is not None:
            letters.text((left + columns.limit_right, 23), "Limit", ink, small, MEDIUM, side="right")
        letters.text((left + columns.margin_right, 23), self._headings.margin, ink, small, MEDIUM, side="right")
        letters.text((left + columns.change, 23), self._headings.change, ink, small, MEDIUM)
        if columns.hold_right is not None:
            letters.text((left + columns.hold_right, 23), self._headings.last, ink, small, MEDIUM, side="right")

    def _paint_water(self, painter: QPainter, plan: RowPlan) -> None:
        if plan.level_px is None:
            return
        tinted = QRectF(
            GUTTER_PX - 6, plan.level_px, self.width() - GUTTER_PX + 6, plan.water_bottom_px - plan.level_px
        )
        painter.fillRect(tinted, QColor(self.colours.water))

    def _paint_leaders(self, painter: QPainter, plan: RowPlan, axis: AltitudeAxis) -> None:
        painter.save()
        painter.setRenderHint(QPainter.RenderHint.Antialiasing)
        quiet_first = sorted(plan.boxes, key=lambda box: self._words[box.index].state.severity)
        for box in quiet_first:
            row = self._words[box.index]
            if row.axis_ft is None:
                continue
            loud = row.state in (State.HOLD, State.NEAR, State.REDUCED)
            colour = mark_colour(row.state, self.colours) if loud else self.colours.line
            if row.key == self._chosen:
                colour, width = self.colours.accent, 2.0
            else:
                width = 1.3 if loud else 1.0
            painter.setPen(QPen(QColor(colour), width))
            _leader(painter, axis.px(row.axis_ft), box.middle_px)
        painter.restore()

    def _paint_level(self, painter: QPainter, letters: Lettering, plan: RowPlan, axis: AltitudeAxis) -> None:
        if plan.level_px is None or self._level is None:
            return
        level_ft, words = self._level
        colours, level_px = self.colours, plan.level_px
        painter.save()
        painter.setRenderHint(QPainter.RenderHint.Antialiasing)
        painter.setPen(QPen(QColor(colours.accent), 1.6))
        _leader(painter, axis.px(level_ft), level_px)
        painter.drawLine(QPointF(GUTTER_PX - 10, level_px), QPointF(self.width(), level_px))
        dense = plan.pitch.density is Density.DENSE
        size, height = (12, 14.0) if dense else (14, 22.0)
        if plan.pitch.density is Density.STANDARD:
            size, height = 13, 19.0
        width = width_of(words, size, SEMIBOLD) + 16
        label = QRectF(GUTTER_PX, level_px - height / 2, width, height)
        painter.setPen(Qt.PenStyle.NoPen)
        painter.setBrush(QColor(colours.accent))
        painter.drawRoundedRect(label, 3, 3)
        painter.restore()
        letters.text(
            (label.left() + 8, baseline_for_middle(level_px, size)),
            words,
            colours.on_accent,
            size,
            SEMIBOLD,
        )

    def _paint_ring(self, painter: QPainter, box: RowBox) -> None:
        painter.save()
        painter.setRenderHint(QPainter.RenderHint.Antialiasing)
        painter.setPen(QPen(QColor(self.colours.accent), 2))
        ring = QRectF(GUTTER_PX - 5, box.top_px + 0.5, self.width() - GUTTER_PX + 1, box.height_px - 1)
        painter.drawRoundedRect(ring, 5, 5)
        painter.restore()

    def _choose(self, key: str, *, pin: bool) -> None:
        self._pinned = pin and bool(key)
        if key != self._chosen:
            self._chosen = key
            self.selected.emit(key)
            self.update()

    def _row_at(self, y: float) -> int | None:
        if self._plan is None:
            return None
        return next((box.index for box in self._plan.boxes if box.top_px <= y < box.bottom_px), None)

    def mouseMoveEvent(self, event: QMouseEvent) -> None:
        """Point at the row under the pointer, unless one is pinned."""
        index = self._row_at(event.position().y())
        tip = self._tips.get(self._words[index].key, "") if index is not None else ""
        QToolTip.showText(event.globalPosition().toPoint(), tip, self)
        if not self._pinned:
            self._choose(self._words[index].key if index is not None else "", pin=False)

    def mousePressEvent(self, event: QMouseEvent) -> None:
        """Pin the row under the pointer."""
        index = self._row_at(event.position().y())
        self._choose(self._words[index].key if index is not None else "", pin=True)

    def mouseDoubleClickEvent(self, event: QMouseEvent) -> None:
        """Pin the row under the pointer, and ask for its details."""
        self.mousePressEvent(event)
        self.ask_details()

    def enterEvent(self, event: QEnterEvent) -> None:
        """Keep what is pinned."""
        super().enterEvent(event)

    def leaveEvent(self, event: QEvent) -> None:
        """Point at nothing, unless a row is pinned or the keyboard is here."""
        if not self._pinned and not self.hasFocus():
            self._choose("", pin=False)
        super().leaveEvent(event)

    def keyPressEvent(self, event: QKeyEvent) -> None:
        """Up and Down move, Home and End go to the ends, Enter pins and asks for details, Esc clears."""
        order = [row.key for row, _box in self.placed_rows]
        key = event.key()
        if key == Qt.Key.Key_Escape and self._chosen:
            self._choose("", pin=False)
        elif key in (Qt.Key.Key_Return, Qt.Key.Key_Enter) and self._chosen:
            self._pinned = True
            self.ask_details()
        elif order and key in (Qt.Key.Key_Up, Qt.Key.Key_Down, Qt.Key.Key_Home, Qt.Key.Key_End):
            place = order.index(self._chosen) if self._chosen in order else -1
            wanted = {
                Qt.Key.Key_Up.value: max(place - 1, 0),
                Qt.Key.Key_Down.value: min(place + 1, len(order) - 1),
                Qt.Key.Key_Home.value: 0,
                Qt.Key.Key_End.value: len(order) - 1,
            }[key]
            self._choose(order[wanted], pin=False)
        else:
            super().keyPressEvent(event)

    def focusInEvent(self, event: QFocusEvent) -> None:
        """Point at the first row where the keyboard comes here, so that the eye finds it."""
        by_key = event.reason() in (Qt.FocusReason.TabFocusReason, Qt.FocusReason.BacktabFocusReason)
        if by_key and not self._chosen and self.placed_rows:
            self._choose(self.placed_rows[0][0].key, pin=False)
        self.update()
        super().focusInEvent(event)

    def focusOutEvent(self, event: QFocusEvent) -> None:
        """Point at nothing once the keyboard has gone, unless a row is pinned."""
        if not self._pinned and not self.underMouse():
            self._choose("", pin=False)
        self.update()
        super().focusOutEvent(event)


def _leader(painter: QPainter, from_px: float, to_px: float) -> None:
    painter.drawPolyline(
        QPolygonF(
            [
                QPointF(0, from_px),
                QPointF(8, from_px),
                QPointF(GUTTER_PX - 14, to_px),
                QPointF(GUTTER_PX - 5, to_px),
            ]
        )
    )
