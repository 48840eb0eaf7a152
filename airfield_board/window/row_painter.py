"""One row of the board: its state, what it is, how much margin it has, what comes next."""

from dataclasses import dataclass

from PySide6.QtCore import QRectF, Qt
from PySide6.QtGui import QColor, QPainter, QPen

from airfield_board.limits.states import State
from airfield_board.window import formatting
from airfield_board.window.fonts import BOLD, MEDIUM, REGULAR, SEMIBOLD
from airfield_board.window.lettering import Lettering, baseline_for_middle, width_of
from airfield_board.window.marks import paint_mark
from airfield_board.window.palette import Palette
from airfield_board.window.row_layout import Density, RowBox, RowPlan
from airfield_board.window.row_words import RowWords

GUTTER_PX = 58
RIGHT_PX = 12
PLOT_SMALLEST_PX = 96
"""Least width of a plot beside the rows."""
EASY_FROM_PX = 33
"""Rows of two lines lower than this have a smaller second line."""
HOLD_COLUMN_FROM_PX = 1320
"""Window width below which the column of hold temperatures goes."""
LIMIT_COLUMN_FROM_PX = 1080
"""Window width below which the column of limits goes, where a row has only one line."""


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
            margin_right=424,
            change=441,
            change_right=656,
            hold_right=708 if with_hold else None,
        )
    block_px = 116 if density is Density.STANDARD else 100
    if window_px < LIMIT_COLUMN_FROM_PX:
        return Columns(
            block_px=block_px,
            name=block_px + 12,
            limit_right=None,
            margin_right=414,
            change=429,
            change_right=659,
            hold_right=None,
        )
    return Columns(
        block_px=block_px,
        name=block_px + 12,
        limit_right=436,
        margin_right=502,
        change=517,
        change_right=755,
        hold_right=800 if with_hold else None,
    )


@dataclass(frozen=True, slots=True, kw_only=True)
class Lines:
    """The lines within a row of two: their distance, and the size of the lower one."""

    step_px: float
    lower_size_px: int


def lines_for(pitch_px: float) -> Lines:
    """Choose the lines for a height of the rows: nearer to each other than to those of the next row."""
    if pitch_px < EASY_FROM_PX:
        return Lines(step_px=14.8, lower_size_px=12)
    return Lines(step_px=min(max(pitch_px * 0.45, 15.3), 16.0), lower_size_px=13)


@dataclass(slots=True, kw_only=True)
class RowPainter:
    """Paints rows with a painter, in the columns and colours given."""

    painter: QPainter
    letters: Lettering
    colours: Palette
    columns: Columns

    def paint_row(self, box: RowBox, row: RowWords, plan: RowPlan) -> None:
        """Paint a row in the place that the plan gives it."""
        if plan.pitch.density is Density.COMFORTABLE:
            self._paint_block(box, row, size_px=17, height_px=min(plan.pitch.px - 5, 29.0))
            self._paint_comfortable(box, row, lines_for(plan.pitch.px))
            return
        pitch = plan.pitch.px
        if plan.pitch.density is Density.STANDARD:
            size, height = 14, min(pitch - 4, 26.0)
        elif pitch >= 15:
            size, height = 12, pitch - 1.5
        else:
            size, height = (11 if pitch >= 13 else 10), pitch - 1
        self._paint_block(box, row, size_px=size, height_px=height)
        text_px = 13 if plan.pitch.density is Density.STANDARD else size
        self._paint_one_line(box, row, text_px)

    def _paint_block(self, box: RowBox, row: RowWords, *, size_px: int, height_px: float) -> None:
        colours, width = self.colours, self.columns.block_px
        block = QRectF(GUTTER_PX, box.middle_px - height_px / 2, width, height_px)
        fill, ink, border, dashed = block_look(row.state, colours)
        self.painter.save()
        self.painter.setRenderHint(QPainter.RenderHint.Antialiasing)
        stroke = 2.0 if row.state is State.REDUCED and height_px > 20 else 1.2
        self.painter.setPen(Qt.PenStyle.NoPen if border is None else block_border(border, stroke, dashed=dashed))
        self.painter.setBrush(Qt.BrushStyle.NoBrush if fill is None else QColor(fill))
        radius = 4.0 if height_px > 20 else 2.5
        if fill is not None or border is not None:
            self.painter.drawRoundedRect(
                block.adjusted(stroke / 2, stroke / 2, -stroke / 2, -stroke / 2), radius, radius
            )
        self.painter.restore()
        side = max(round(size_px * 0.86), 9)
        side = min(side, int(height_px - 2))
        pad = 9.0 if height_px > 20 else 6.0
        mark_ink = colours.near_line if row.state is State.REDUCED else ink
        mark = QRectF(block.left() + pad, box.middle_px - side / 2, side, side)
        paint_mark(self.painter, row.state, mark, mark_ink, fill or colours.card)
        word_left = mark.right() + (8 if size_px > 14 else 6)
        word = formatting.STATE_WORDS[row.state]
        self.letters.text((word_left, baseline_for_middle(box.middle_px, size_px)), word, ink, size_px, BOLD)

    def _paint_comfortable(self, box: RowBox, row: RowWords, lines: Lines) -> None:
        colours, columns, left = self.colours, self.columns, float(GUTTER_PX)
        step, small_px = lines.step_px, lines.lower_size_px
        first = box.middle_px - step * (2 if row.temporary else 1) / 2
        name, margin_px = left + columns.name, 20 if row.margin[-1:].isdigit() else 17
        margin_left = left + columns.margin_right - width_of(row.margin, margin_px, SEMIBOLD)
        room = margin_left - name - 8
        self.letters.text((name, baseline_for_middle(first, 15)), row.name, colours.ink, 15, SEMIBOLD, room_px=room)
        second = baseline_for_middle(first + step, small_px)
        self.letters.text((name, second), row.details, colours.soft_ink, small_px, room_px=room)
        if row.temporary:
            # The third line runs below the margin, so it has the margin's room as well.
            third, room = baseline_for_middle(first + 2 * step, small_px), columns.change - columns.name - 8
            self.letters.text((name, third), row.temporary, colours.soft_ink, small_px, room_px=room)
        dashes = row.margin == formatting.DASH
        self.letters.text(
            (left + columns.margin_right, baseline_for_middle(box.middle_px, margin_px)),
            row.margin,
            colours.soft_ink if dashes else colours.ink,
            margin_px,
            REGULAR if dashes else SEMIBOLD,
            side="right",
        )
        self._paint_change_in_two(box, row, lines)
        self._paint_last(box, row, 14)

    def _paint_change_in_two(self, box: RowBox, row: RowWords, lines: Lines) -> None:
        colours, columns, left = self.colours, self.columns, float(GUTTER_PX)
        change, room = left + columns.change, columns.change_right - columns.change
        if row.loud and row.quiet:
            upper, lower = box.middle_px - lines.step_px / 2, box.middle_px + lines.step_px / 2
            # What a row was before it had no data must not look like what it is.
            ink = colours.soft_ink if row.state is State.NO_DATA else colours.ink
            self.letters.text((change, baseline_for_middle(upper, 14)), row.loud, ink, 14, MEDIUM, room_px=room)
            small_px = lines.lower_size_px
            baseline = baseline_for_middle(lower, small_px)
            self.letters.text((change, baseline), row.quiet, colours.soft_ink, small_px, room_px=room)
            return
        text, ink, weight = (row.loud, colours.ink, MEDIUM) if row.loud else (row.quiet, colours.soft_ink, REGULAR)
        if row.state is State.NO_DATA:
            ink, weight = colours.soft_ink, MEDIUM
        if text:
            self.letters.text((change, baseline_for_middle(box.middle_px, 14)), text, ink, 14, weight, room_px=room)

    def _paint_one_line(self, box: RowBox, row: RowWords, size_px: int) -> None:
        colours, columns, left = self.colours, self.columns, float(GUTTER_PX)
        baseline = baseline_for_middle(box.middle_px, size_px)
        margin = (left + columns.margin_right, baseline)
        name_right = self.letters.text(margin, row.margin, colours.ink, size_px, SEMIBOLD, side="right") - 10
        if columns.limit_right is not None:
            limit = (left + columns.limit_right, baseline)
            name_right = self.letters.text(limit, row.limit, colours.soft_ink, size_px, side="right") - 10
        name = left + columns.name
        self.letters.text((name, baseline), row.one_line, colours.ink, size_px, MEDIUM, room_px=name_right - name)
        change, room = left + columns.change, columns.change_right - columns.change
        if row.loud:
            muted = row.state is State.NO_DATA
            ink = colours.soft_ink if muted else colours.ink
            end = self.letters.text((change, baseline), row.loud, ink, size_px, MEDIUM, room_px=room) - change
            rest = room - end - 8
            if row.quiet and width_of(row.quiet, size_px) <= rest:
                self.letters.text((change + end + 8, baseline), row.quiet, colours.soft_ink, size_px)
        elif row.quiet:
            self.letters.text((change, baseline), row.quiet, colours.soft_ink, size_px, room_px=room)
        self._paint_last(box, row, size_px)

    def _paint_last(self, box: RowBox, row: RowWords, size_px: int) -> None:
        if self.columns.hold_right is None:
            return
        ink = self.colours.soft_ink if row.last == formatting.DASH else self.colours.ink
        right = GUTTER_PX + self.columns.hold_right
        middle = box.middle_px - (8 if row.last_below else 0)
        self.letters.text((right, baseline_for_middle(middle, size_px)), row.last, ink, size_px, MEDIUM, side="right")
        if row.last_below:
            baseline = baseline_for_middle(box.middle_px + 8, 13)
            self.letters.text((right, baseline), row.last_below, self.colours.soft_ink, 13, side="right")


def block_look(state: State, colours: Palette) -> tuple[str | None, str, str | None, bool]:
    """Return a state's fill, ink, border, and whether the border is dashed."""
    return {
        State.HOLD: (colours.hold_block, colours.on_hold, None, False),
        State.NEAR: (colours.near_block, colours.on_near, colours.near_line, False),
        State.REDUCED: (colours.reduced_block, colours.on_reduced, colours.near_line, False),
        State.GO: (None, colours.go, None, False),
        State.NO_DATA: (None, colours.no_data, colours.line, True),
    }[state]


def block_border(colour: str, stroke: float, *, dashed: bool) -> QPen:
    """Return the pen of a block's border."""
    pen = QPen(QColor(colour), stroke)
    if dashed:
        pen.setDashPattern([3.0, 2.2])
    return pen
