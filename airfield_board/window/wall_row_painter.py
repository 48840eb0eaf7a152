"""One row of the wall: its state, what it is, how much margin it has, what comes next."""

import math
from collections.abc import Sequence
from dataclasses import dataclass, field

from PySide6.QtCore import QRectF, Qt
from PySide6.QtGui import QColor, QPainter

from airfield_board.limits.states import State
from airfield_board.window import formatting
from airfield_board.window.fonts import BOLD, REGULAR, SEMIBOLD
from airfield_board.window.lettering import Lettering, baseline_for_middle, width_of
from airfield_board.window.marks import paint_mark
from airfield_board.window.palette import Palette
from airfield_board.window.row_painter import block_border, block_look
from airfield_board.window.wall_columns import WORD_BASE_PX, WallColumn
from airfield_board.window.wall_layout import WallBox, WallPlan
from airfield_board.window.wall_words import WallWords

_NAME_PX, _OPERATION_PX = 30, 22
_MARGIN_PX, _SHORT_MARGIN_PX = 44, 32
_CHANGE_PX, _QUIET_PX, _ONLY_QUIET_PX = 32, 22, 26
_ROW_PX = 54
"""Height of a row for which these sizes are drawn; in a lower one they are smaller."""
_ASCENT_EM, _DESCENT_EM = 0.765, 0.215
"""How far the letters of the bundled typeface reach over and under the baseline, measured; accents reach farther."""
_SHRINK = 0.69
"""Least share of its size to which a text is made smaller before it is cut."""
_NAME_SHRINK = 0.8
_CHANGE_SHARE = 0.66
"""Most of the lower line that the next change takes where it stands beside the operation."""


def fitting_px(text: str, size_px: int, weight: int, room_px: float, share: float = _SHRINK) -> int:
    """Return the largest size, down to a share of the given one, at which a text fits."""
    least = max(int(size_px * share), 1)
    return next((size for size in range(size_px, least, -1) if width_of(text, size, weight) <= room_px), least)


@dataclass(slots=True, kw_only=True)
class WallRowPainter:
    """Paints rows with a painter, in the columns of a plan."""

    painter: QPainter
    letters: Lettering
    colours: Palette
    plan: WallPlan
    words: Sequence[WallWords]
    _name_px: int = field(init=False)
    _upper_px: int = field(init=False)
    _operation_px: int = field(init=False)
    _margin_px: int = field(init=False)

    def __post_init__(self) -> None:
        # One size for all names: the eye reads down the column.
        self._name_px = self._px(_NAME_PX)
        for box, row in zip(self.plan.boxes, self.words, strict=True):
            column = self.plan.columns[box.column]
            room = self._name_room(column, row)
            self._name_px = fitting_px(row.name, self._name_px, SEMIBOLD, room, 0.0)
        self._name_px = max(self._name_px, int(self._px(_NAME_PX) * _NAME_SHRINK), 1)
        short = self.plan.columns[0].change is None
        self._margin_px = self._px(_SHORT_MARGIN_PX if short else _MARGIN_PX)
        upper = max(self._name_px, self._margin_px) if short else self._name_px
        self._upper_px, self._operation_px = self._pair(upper, self._px(_OPERATION_PX))
        self._name_px = min(self._name_px, self._upper_px)
        if short:
            self._margin_px = min(self._margin_px, self._upper_px)

    def paint_row(self, box: WallBox, row: WallWords) -> None:
        """Paint a row in its place."""
        column = self.plan.columns[box.column]
        self._paint_block(box, row, column)
        if len(box.rows) > 1:
            self._paint_counted(box, row, column)
        elif column.change is None:
            self._paint_short(box, row, column)
        else:
            self._paint_wide(box, row, column)

    def _px(self, drawn_px: int) -> int:
        lower = min(self.plan.pitch_px / (_ROW_PX * self.plan.word_px / WORD_BASE_PX), 1.0)
        return max(round(drawn_px * self.plan.text_scale * lower * math.sqrt(lower)), 1)

    def _pair(self, upper_px: int, lower_px: int) -> tuple[int, int]:
        """Return the sizes of two lines of a row, the larger one made smaller where both are too high for it."""
        while _reach(upper_px) + _reach(lower_px) > self.plan.pitch_px and upper_px > 1:
            if upper_px >= lower_px:
                upper_px -= 1
            else:
                lower_px -= 1
        return upper_px, lower_px

    def _name_room(self, column: WallColumn, row: WallWords) -> float:
        size = self._px(_MARGIN_PX if column.change is not None else _SHORT_MARGIN_PX)
        taken = width_of(row.margin, size, SEMIBOLD) + 14 * self.plan.text_scale
        return column.margin_right - taken - column.name

    def _lines(self, box: WallBox, upper_px: int, lower_px: int) -> tuple[float, float]:
        """Return the baselines of two lines, so that neither touches the other nor the rows beside."""
        height = _reach(upper_px) + _reach(lower_px)
        slack = max(box.height_px - height, 0.0)
        between = min(slack / 4, box.height_px * 0.1)
        # The eye centres the capitals; what hangs below them counts only where there is no room to spare.
        lowered = min(_descent(lower_px) / 2, (slack - between) / 2)
        first = box.middle_px - (height + between) / 2 + lowered + _ascent(upper_px)
        return first, first + _descent(upper_px) + between + _ascent(lower_px)

    def _paint_block(self, box: WallBox, row: WallWords, column: WallColumn) -> None:
        em = self.plan.word_px
        size = em / WORD_BASE_PX
        height = min(box.height_px - 4 * size, 1.1 * em)
        block = QRectF(column.left, box.middle_px - height / 2, column.block_px, height)
        fill, ink, border, dashed = block_look(row.state, self.colours)
        stroke = (3.0 if row.state is State.REDUCED else 2.0) * size
        self.painter.save()
        self.painter.setRenderHint(QPainter.RenderHint.Antialiasing)
        self.painter.setPen(Qt.PenStyle.NoPen if border is None else block_border(border, stroke, dashed=dashed))
        self.painter.setBrush(Qt.BrushStyle.NoBrush if fill is None else QColor(fill))
        if fill is not None or border is not None:
            inner = block.adjusted(stroke / 2, stroke / 2, -stroke / 2, -stroke / 2)
            self.painter.drawRoundedRect(inner, 6 * size, 6 * size)
        self.painter.restore()
        side = round(em * 0.8)
        mark = QRectF(block.left() + 0.49 * em, box.middle_px - side / 2, side, side)
        mark_ink = self.colours.near_line if row.state is State.REDUCED else ink
        paint_mark(self.painter, row.state, mark, mark_ink, fill or self.colours.card)
        at = (mark.right() + 0.5 * em, baseline_for_middle(box.middle_px, em))
        room = block.right() - 0.1 * em - at[0]
        self.letters.text(at, formatting.STATE_WORDS[row.state], ink, em, BOLD, room_px=room)

    def _paint_counted(self, box: WallBox, row: WallWords, column: WallColumn) -> None:
        size, quiet = self._pair(self._px(_NAME_PX), self._px(_OPERATION_PX))
        first, second = self._lines(box, size, quiet)
        room = (column.change_right or column.right) - column.name
        self.letters.text((column.name, first), row.name, self.colours.ink, size, SEMIBOLD, room_px=room)
        self.letters.text((column.name, second), row.quiet, self.colours.soft_ink, quiet, room_px=room)

    def _paint_name(self, box: WallBox, row: WallWords, column: WallColumn, operation_room: float) -> None:
        first, second = self._lines(box, self._upper_px, self._operation_px)
        at, room = (column.name, first), self._name_room(column, row)
        self.letters.text(at, row.name, self.colours.ink, self._name_px, SEMIBOLD, room_px=room)
        size = fitting_px(row.operation, self._operation_px, REGULAR, operation_room, _NAME_SHRINK)
        self.letters.text((column.name, second), row.operation, self.colours.soft_ink, size, room_px=operation_room)

    def _paint_margin(self, baseline: float, row: WallWords, column: WallColumn) -> None:
        dashes = row.margin == formatting.DASH
        ink, weight = (self.colours.soft_ink, REGULAR) if dashes else (self.colours.ink, SEMIBOLD)
        self.letters.text((column.margin_right, baseline), row.margin, ink, self._margin_px, weight, side="right")

    def _paint_wide(self, box: WallBox, row: WallWords, column: WallColumn) -> None:
        self._paint_name(box, row, column, self._name_room(column, row))
        self._paint_margin(baseline_for_middle(box.middle_px, self._margin_px), row, column)
        left, right = column.change or column.margin_right, column.change_right or column.right
        room, soft = right - left, self.colours.soft_ink
        ink = soft if row.state is State.NO_DATA else self.colours.ink
        if row.loud and row.quiet:
            loud = fitting_px(row.loud, self._px(_CHANGE_PX), SEMIBOLD, room)
            quiet = fitting_px(row.quiet, self._px(_QUIET_PX), REGULAR, room)
            loud, quiet = self._pair(loud, quiet)
            first, second = self._lines(box, loud, quiet)
            self.letters.text((left, first), row.loud, ink, loud, SEMIBOLD, room_px=room)
            self.letters.text((left, second), row.quiet, soft, quiet, room_px=room)
            return
        text, weight, drawn = (row.loud, SEMIBOLD, _CHANGE_PX) if row.loud else (row.quiet, REGULAR, _ONLY_QUIET_PX)
        if text:
            size = fitting_px(text, self._px(drawn), weight, room)
            at = (left, baseline_for_middle(box.middle_px, size))
            self.letters.text(at, text, ink if row.loud else soft, size, weight, room_px=room)

    def _paint_short(self, box: WallBox, row: WallWords, column: WallColumn) -> None:
        """Paint the row where its next change stands on the line of its operation."""
        gap = 14 * self.plan.text_scale
        whole = column.margin_right - column.name
        text, weight = (row.loud, SEMIBOLD) if row.loud else (row.quiet, REGULAR)
        room = whole * _CHANGE_SHARE
        size = fitting_px(text, self._operation_px, weight, room, _NAME_SHRINK)
        taken = min(width_of(text, size, weight), room) + gap if text else 0.0
        self._paint_name(box, row, column, whole - taken)
        first, second = self._lines(box, self._upper_px, self._operation_px)
        self._paint_margin(first, row, column)
        if text:
            ink = self.colours.ink if row.loud and row.state is not State.NO_DATA else self.colours.soft_ink
            at = (column.margin_right, second)
            self.letters.text(at, text, ink, size, weight, side="right", room_px=room)


def _ascent(size_px: int) -> int:
    return math.ceil(_ASCENT_EM * size_px)


def _descent(size_px: int) -> int:
    return math.ceil(_DESCENT_EM * size_px)


def _reach(size_px: int) -> int:
    """Height of a line with all that hangs below it, in whole pixels."""
    return _ascent(size_px) + _descent(size_px)
