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
from airfield_board.window import formatting
from airfield_board.window.axes import AltitudeAxis
from airfield_board.window.canvas import Canvas
from airfield_board.window.fonts import BOLD, MEDIUM, REGULAR, SEMIBOLD
from airfield_board.window.lettering import Lettering, baseline_for_middle, width_of
from airfield_board.window.marks import mark_colour, paint_mark
from airfield_board.window.row_layout import (
    FOLDED_PITCH_PX,
    PITCH_SMALLEST_PX,
    Density,
    RowBox,
    RowPlan,
    choose_pitch,
    plan_rows,
    rows_that_fit,
)
from airfield_board.window.row_words import FOLDED, RowWords, folded, wish_of

GUTTER_PX = 58
RIGHT_PX = 12
HOLD_COLUMN_FROM_PX = 1320
"""Window width below which the column of hold temperatures goes."""
PLOT_MIDDLE_PX = 90
UNFOLDED_ROWS = 40
"""So many rows are always listed one by one; of more, some are counted in one line where they get too low to read."""
ROWS_TOP_PX = 32
ROWS_BOTTOM_PX = 7


@dataclass(frozen=True, slots=True, kw_only=True)
class Columns:
    """Where the columns begin or end, from the left of the rows.

    Attributes
    ----------
    limit_right, hold_right
        None where the column is left out.
    """

    block_px: float
    name: float
    limit_right: float | None
    margin_right: float
    change: float
    change_right: float
    hold_right: float | None

    @property
    def width(self) -> float:
        """Width of all columns."""
        return self.hold_right + RIGHT_PX if self.hold_right is not None else self.change_right + RIGHT_PX


def columns_for(density: Density, window_px: int) -> Columns:
    """Choose the columns for a height of the rows and a width of the window."""
    with_hold = window_px >= HOLD_COLUMN_FROM_PX
    if density is Density.COMFORTABLE:
        return Columns(
            block_px=144,
            name=158,
            limit_right=None,
            margin_right=406,
            change=424,
            change_right=640,
            hold_right=698 if with_hold else None,
        )
    block_px = 116 if density is Density.STANDARD else 100
    return Columns(
        block_px=block_px,
        name=block_px + 12,
        limit_right=420,
        margin_right=486,
        change=501,
        change_right=716,
        hold_right=756 if with_hold else None,
    )


@dataclass(frozen=True, slots=True, kw_only=True)
class Headings:
    """Headings of the columns whose unit or content changes."""

    margin: str
    last: str


class RowPanel(Canvas):
    """All the rows in order, the level of the air among them, and the leaders in the gutter.

    Signals
    -------
    selected(str)
        The key of the row under the pointer or the keyboard; empty where there is none.
    """

    selected = Signal(str)

    def __init__(self, parent: QWidget | None = None) -> None:
        super().__init__(parent)
        self._words: tuple[RowWords, ...] = ()
        self._tips: dict[str, str] = {}
        self._axis: AltitudeAxis | None = None
        self._level: tuple[float, str] | None = None
        self._headings = Headings(margin="", last="")
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
    def plan(self) -> RowPlan | None:
        """The rows as placed; None before anything was shown."""
        return self._plan

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
            with_foot=any(row.axis_ft is None for row in words),
        )
        columns = columns_for(pitch.density, window_px)
        if columns != self._columns:
            self._columns = columns
            self.update()
        return columns

    def _fitting(self, bottom_px: float) -> tuple[RowWords, ...]:
        with_foot = any(row.axis_ft is None for row in self._all)
        room_px = bottom_px - ROWS_TOP_PX
        smallest_px = PITCH_SMALLEST_PX if len(self._all) <= UNFOLDED_ROWS else FOLDED_PITCH_PX
        most = rows_that_fit(room_px, smallest_px, with_level=self._level is not None, with_foot=with_foot)
        return folded(self._all, most)

    def choose(self, key: str) -> None:
        """Pin a row, as Enter does."""
        self._choose(key, pin=True)

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
        wishes = [wish_of(row, axis.px(row.axis_ft) if row.axis_ft is not None else None) for row in self._words]
        level_px = axis.px(self._level[0]) if self._level is not None else None
        self._plan = plan_rows(wishes, level_px, ROWS_TOP_PX, bottom_px)
        self.update()

    def resizeEvent(self, event: QResizeEvent) -> None:
        """Place the rows anew."""
        super().resizeEvent(event)
        self.arrange()

    def paint(self, painter: QPainter, letters: Lettering) -> None:
        """Paint all of it."""
        self._paint_headings(letters)
        plan, axis = self._plan, self._axis
        if plan is None or axis is None:
            return
        self._paint_water(painter, plan)
        self._paint_leaders(painter, plan, axis)
        if not self._words:
            at = (GUTTER_PX + self._columns.name, PLOT_MIDDLE_PX)
            letters.text(at, self._empty_words, self.colours.soft_ink, 15, MEDIUM)
        for box in plan.boxes:
            self._paint_row(painter, letters, box, plan)
        if plan.level_px is not None:
            self._paint_level(painter, letters, plan, axis)

    def _paint_headings(self, letters: Lettering) -> None:
        columns, left, ink = self._columns, float(GUTTER_PX), self.colours.soft_ink
        small = 13
        letters.text((left, 23), "State", ink, small, MEDIUM)
        dense = columns.limit_right is not None
        letters.text((left + columns.name, 23), "Operation" if dense else "Operation and limit", ink, small, MEDIUM)
        if columns.limit_right is not None:
            letters.text((left + columns.limit_right, 23), "Limit", ink, small, MEDIUM, side="right")
        letters.text((left + columns.margin_right, 23), self._headings.margin, ink, small, MEDIUM, side="right")
        letters.text((left + columns.change, 23), "Next change", ink, small, MEDIUM)
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
            if row.axis_ft is None or row.key.startswith(FOLDED):
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

    def _paint_row(self, painter: QPainter, letters: Lettering, box: RowBox, plan: RowPlan) -> None:
        row = self._words[box.index]
        if row.key == self._chosen:
            self._paint_ring(painter, box)
        if plan.pitch.density is Density.COMFORTABLE:
            self._paint_block(painter, letters, box, row, size_px=17, height_px=min(box.height_px - 6, 29.0))
            self._paint_comfortable(letters, box, row)
            return
        pitch = plan.pitch.px
        if plan.pitch.density is Density.STANDARD:
            size, height = 14, min(pitch - 4, 26.0)
        elif pitch >= 15:
            size, height = 12, pitch - 1.5
        else:
            size, height = (11 if pitch >= 13 else 10), pitch - 1
        self._paint_block(painter, letters, box, row, size_px=size, height_px=height)
        text_px = 13 if plan.pitch.density is Density.STANDARD else size
        self._paint_one_line(letters, box, row, text_px)

    def _paint_ring(self, painter: QPainter, box: RowBox) -> None:
        painter.save()
        painter.setRenderHint(QPainter.RenderHint.Antialiasing)
        painter.setPen(QPen(QColor(self.colours.accent), 2))
        ring = QRectF(GUTTER_PX - 5, box.top_px + 0.5, self.width() - GUTTER_PX + 1, box.height_px - 1)
        painter.drawRoundedRect(ring, 5, 5)
        painter.restore()

    def _paint_block(
        self, painter: QPainter, letters: Lettering, box: RowBox, row: RowWords, *, size_px: int, height_px: float
    ) -> None:
        colours, width = self.colours, self._columns.block_px
        block = QRectF(GUTTER_PX, box.middle_px - height_px / 2, width, height_px)
        fill, ink, border, dashed = {
            State.HOLD: (colours.hold_block, colours.on_hold, None, False),
            State.NEAR: (colours.near_block, colours.on_near, colours.near_line, False),
            State.REDUCED: (colours.reduced_block, colours.on_reduced, colours.near_line, False),
            State.GO: (None, colours.go, None, False),
            State.NO_DATA: (None, colours.no_data, colours.line, True),
        }[row.state]
        painter.save()
        painter.setRenderHint(QPainter.RenderHint.Antialiasing)
        stroke = 2.0 if row.state is State.REDUCED and height_px > 20 else 1.2
        painter.setPen(Qt.PenStyle.NoPen if border is None else _border(border, stroke, dashed=dashed))
        painter.setBrush(Qt.BrushStyle.NoBrush if fill is None else QColor(fill))
        radius = 4.0 if height_px > 20 else 2.5
        if fill is not None or border is not None:
            painter.drawRoundedRect(block.adjusted(stroke / 2, stroke / 2, -stroke / 2, -stroke / 2), radius, radius)
        painter.restore()
        side = max(round(size_px * 0.86), 9)
        side = min(side, int(height_px - 2))
        pad = 9.0 if height_px > 20 else 6.0
        mark_ink = colours.near_line if row.state is State.REDUCED else ink
        mark = QRectF(block.left() + pad, box.middle_px - side / 2, side, side)
        paint_mark(painter, row.state, mark, mark_ink, fill or colours.card)
        word_left = mark.right() + (8 if size_px > 14 else 6)
        word = formatting.STATE_WORDS[row.state]
        letters.text((word_left, baseline_for_middle(box.middle_px, size_px)), word, ink, size_px, BOLD)

    def _paint_comfortable(self, letters: Lettering, box: RowBox, row: RowWords) -> None:
        colours, columns, left = self.colours, self._columns, float(GUTTER_PX)
        lines = 3 if row.temporary else 2
        step = min(16.0, box.height_px / lines)
        first = box.middle_px - step * (lines - 1) / 2
        name, margin_px = left + columns.name, 20 if row.margin[-1:].isdigit() else 17
        margin_left = left + columns.margin_right - width_of(row.margin, margin_px, SEMIBOLD)
        room = margin_left - name - 8
        letters.text((name, baseline_for_middle(first, 15)), row.name, colours.ink, 15, SEMIBOLD, room_px=room)
        second = baseline_for_middle(first + step, 13)
        letters.text((name, second), row.details, colours.soft_ink, 13, room_px=room)
        if row.temporary:
            letters.text(
                (name, baseline_for_middle(first + 2 * step, 13)), row.temporary, colours.soft_ink, 13, room_px=room
            )
        dashes = row.margin == formatting.DASH
        letters.text(
            (left + columns.margin_right, baseline_for_middle(box.middle_px, margin_px)),
            row.margin,
            colours.soft_ink if dashes else colours.ink,
            margin_px,
            REGULAR if dashes else SEMIBOLD,
            side="right",
        )
        self._paint_change_in_two(letters, box, row)
        self._paint_last(letters, box, row, 14)

    def _paint_change_in_two(self, letters: Lettering, box: RowBox, row: RowWords) -> None:
        colours, columns, left = self.colours, self._columns, float(GUTTER_PX)
        change, room = left + columns.change, columns.change_right - columns.change
        if row.loud and row.quiet:
            upper, lower = box.middle_px - 8, box.middle_px + 8
            letters.text((change, baseline_for_middle(upper, 14)), row.loud, colours.ink, 14, MEDIUM, room_px=room)
            letters.text((change, baseline_for_middle(lower, 13)), row.quiet, colours.soft_ink, 13, room_px=room)
            return
        text, ink, weight = (row.loud, colours.ink, MEDIUM) if row.loud else (row.quiet, colours.soft_ink, REGULAR)
        if row.state is State.NO_DATA:
            ink, weight = colours.soft_ink, MEDIUM
        if text:
            letters.text((change, baseline_for_middle(box.middle_px, 14)), text, ink, 14, weight, room_px=room)

    def _paint_one_line(self, letters: Lettering, box: RowBox, row: RowWords, size_px: int) -> None:
        colours, columns, left = self.colours, self._columns, float(GUTTER_PX)
        baseline = baseline_for_middle(box.middle_px, size_px)
        name, limit_right = left + columns.name, left + (columns.limit_right or columns.margin_right)
        limit_left = limit_right - width_of(row.limit, size_px) - 10
        letters.text((name, baseline), row.one_line, colours.ink, size_px, MEDIUM, room_px=limit_left - name)
        letters.text((limit_right, baseline), row.limit, colours.soft_ink, size_px, side="right")
        letters.text((left + columns.margin_right, baseline), row.margin, colours.ink, size_px, SEMIBOLD, side="right")
        change, room = left + columns.change, columns.change_right - columns.change
        if row.loud:
            muted = row.state is State.NO_DATA
            ink = colours.soft_ink if muted else colours.ink
            end = letters.text((change, baseline), row.loud, ink, size_px, MEDIUM, room_px=room) - change
            rest = room - end - 8
            if row.quiet and width_of(row.quiet, size_px) <= rest:
                letters.text((change + end + 8, baseline), row.quiet, colours.soft_ink, size_px)
        elif row.quiet:
            letters.text((change, baseline), row.quiet, colours.soft_ink, size_px, room_px=room)
        self._paint_last(letters, box, row, size_px)

    def _paint_last(self, letters: Lettering, box: RowBox, row: RowWords, size_px: int) -> None:
        if self._columns.hold_right is None:
            return
        ink = self.colours.soft_ink if row.last == formatting.DASH else self.colours.ink
        right = GUTTER_PX + self._columns.hold_right
        middle = box.middle_px - (8 if row.last_below else 0)
        letters.text((right, baseline_for_middle(middle, size_px)), row.last, ink, size_px, MEDIUM, side="right")
        if row.last_below:
            baseline = baseline_for_middle(box.middle_px + 8, 13)
            letters.text((right, baseline), row.last_below, self.colours.soft_ink, 13, side="right")

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

    def enterEvent(self, event: QEnterEvent) -> None:
        """Keep what is pinned."""
        super().enterEvent(event)

    def leaveEvent(self, event: QEvent) -> None:
        """Point at nothing, unless a row is pinned or the keyboard is here."""
        if not self._pinned and not self.hasFocus():
            self._choose("", pin=False)
        super().leaveEvent(event)

    def keyPressEvent(self, event: QKeyEvent) -> None:
        """Up and Down move, Home and End go to the ends, Enter pins, Esc clears."""
        order = [self._words[box.index].key for box in self._plan.boxes] if self._plan is not None else []
        key = event.key()
        if key == Qt.Key.Key_Escape and self._chosen:
            self._choose("", pin=False)
        elif key in (Qt.Key.Key_Return, Qt.Key.Key_Enter) and self._chosen:
            self._pinned = True
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

    def focusOutEvent(self, event: QFocusEvent) -> None:
        """Point at nothing once the keyboard has gone, unless a row is pinned."""
        if not self._pinned and not self.underMouse():
            self._choose("", pin=False)
        super().focusOutEvent(event)


def _border(colour: str, stroke: float, *, dashed: bool) -> QPen:
    pen = QPen(QColor(colour), stroke)
    if dashed:
        pen.setDashPattern([3.0, 2.2])
    return pen


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
