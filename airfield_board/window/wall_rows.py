"""The card of the wall view: the day plot, and the rows with the level of the air among them."""

from datetime import date, datetime
from typing import TYPE_CHECKING

from PySide6.QtCore import QPointF, QRectF, QSize, Qt, QTimer
from PySide6.QtGui import QColor, QPainter, QPen, QPolygonF, QResizeEvent, QShowEvent
from PySide6.QtWidgets import QWidget

from airfield_board.clock import local_day
from airfield_board.limits.states import State
from airfield_board.session.board_state import BoardState
from airfield_board.window import formatting
from airfield_board.window.axes import AltitudeAxis, altitude_marks, board_range
from airfield_board.window.board_page import level_label, scene_of
from airfield_board.window.canvas import Canvas
from airfield_board.window.day_scene import DayScene
from airfield_board.window.fonts import MEDIUM, SEMIBOLD
from airfield_board.window.lettering import Lettering, baseline_for_middle, width_of
from airfield_board.window.marks import mark_colour
from airfield_board.window.palette import Palette
from airfield_board.window.reading import Cause, View
from airfield_board.window.wall_columns import WallRoom
from airfield_board.window.wall_layout import WallPlan, plan_wall
from airfield_board.window.wall_row_painter import WallRowPainter
from airfield_board.window.wall_words import WallWords, counted, item_of, words_of

if TYPE_CHECKING:
    from airfield_board.window.plot import DayPlot

_PLOT_TOP_PX = 58.0
_TIME_AXIS_PX = 40.0
_LABEL_PX = 22
_NOW_PX = 24
_HOUR_ROOM_PX = 74.0
_PLOT_LINES = 1.7
"""Lines of the plot, as multiples of those on a desk."""


class WallRows(Canvas):
    """Plot and rows, as `plan_wall` places them."""

    def __init__(self, parent: QWidget | None = None) -> None:
        super().__init__(parent)
        self._view: View | None = None
        self._scale = 1.0
        self._needed_px = 0
        self._words: tuple[WallWords, ...] = ()
        self._plan: WallPlan | None = None
        self._scene: DayScene | None = None
        self._plot: DayPlot | None = None
        self._shown: tuple[datetime, Cause, QSize, float, int] | None = None
        self._state_shown: BoardState | None = None
        self._range: tuple[date, str, tuple[float, float]] | None = None
        self._starter = QTimer(self)
        self._starter.setSingleShot(True)
        self._starter.timeout.connect(self.ensure_plot)
        self.setAccessibleName("Operations")

    @property
    def plan(self) -> WallPlan | None:
        """The rows as placed; None before anything was shown."""
        return self._plan

    @property
    def plot(self) -> "DayPlot | None":
        """The plot; None before the first picture stands."""
        return self._plot

    def set_size(self, scale: float, needed_px: int) -> None:
        """Take the scale of all lengths, and the size that the state's word must have."""
        if (scale, needed_px) != (self._scale, self._needed_px):
            self._scale, self._needed_px = scale, needed_px
            self._refresh()

    def set_colours(self, colours: Palette) -> None:
        """Take other colours, in all parts."""
        super().set_colours(colours)
        self._show_plot()

    def show_view(self, view: View) -> None:
        """Show another state or time; nothing here changes within a minute but by the state or its reading."""
        self._view = view
        shown = (
            view.now.replace(second=0, microsecond=0),
            view.reading.cause,
            self.size(),
            self._scale,
            self._needed_px,
        )
        if shown == self._shown and view.state is self._state_shown:
            return
        self._shown, self._state_shown = shown, view.state
        self._arrange(view)

    def ensure_plot(self) -> None:
        """Make the plot now, rather than after the first painting: its import takes longer than all the rest."""
        if self._plot is None:
            from airfield_board.window.plot import DayPlot

            self._plot = DayPlot(self)
            self._show_plot()

    def showEvent(self, event: QShowEvent) -> None:
        """Ask for the plot once the first picture stands."""
        super().showEvent(event)
        self._starter.start(0)

    def resizeEvent(self, event: QResizeEvent) -> None:
        """Place all parts anew."""
        super().resizeEvent(event)
        self._refresh()

    def _refresh(self) -> None:
        if self._view is not None:
            self.show_view(self._view)

    def _arrange(self, view: View) -> None:
        low_ft, high_ft = self._altitude_range(view)
        axis = AltitudeAxis(
            low_ft=low_ft,
            high_ft=high_ft,
            top_px=_PLOT_TOP_PX * self._scale,
            bottom_px=self.height() - _TIME_AXIS_PX * self._scale,
        )
        rows = view.rows
        room = WallRoom(
            width_px=float(self.width()),
            height_px=float(self.height()),
            scale=self._scale,
            needed_px=self._needed_px,
        )
        plan = plan_wall([item_of(row, view) for row in rows], room, axis, self._level_ft(view))
        listed = [words_of(row, view) for row in rows]
        words = tuple(
            listed[box.rows[0]] if len(box.rows) == 1 else counted([listed[index] for index in box.rows])
            for box in plan.boxes
        )
        if (plan, words) != (self._plan, self._words):
            self.setAccessibleDescription("; ".join(row.spoken for row in words))
        self._plan, self._words = plan, words
        self._scene = None
        if plan.plot_left is not None and plan.plot_right is not None:
            plot_axis = AltitudeAxis(
                low_ft=low_ft, high_ft=high_ft, top_px=0.0, bottom_px=float(int(axis.bottom_px - axis.top_px))
            )
            width_px = float(int(plan.plot_right - plan.plot_left))
            self._scene = scene_of(view, plot_axis, width_px, _HOUR_ROOM_PX * self._scale)
        self._show_plot()
        self.update()

    def _altitude_range(self, view: View) -> tuple[float, float]:
        """Return the ends of the altitude axis: within a day they only move apart, so that the picture stays still."""
        day = local_day(view.now, view.zone)
        low_ft, high_ft = board_range(view.state)
        if self._range is not None and self._range[:2] == (day, view.state.airfield.name):
            low_ft, high_ft = min(low_ft, self._range[2][0]), max(high_ft, self._range[2][1])
        self._range = (day, view.state.airfield.name, (low_ft, high_ft))
        return low_ft, high_ft

    def _level_ft(self, view: View) -> float | None:
        conditions = view.state.conditions if view.trusted else None
        return conditions.density_altitude_ft if conditions is not None else None

    def _show_plot(self) -> None:
        if self._plot is None:
            return
        scene, plan = self._scene, self._plan
        if scene is None or plan is None or plan.plot_left is None:
            self._plot.hide()
            return
        self._plot.set_scale(self._scale * _PLOT_LINES)
        self._plot.setGeometry(
            int(plan.plot_left),
            int(_PLOT_TOP_PX * self._scale),
            int(scene.time.right_px),
            int(scene.altitude.bottom_px),
        )
        self._plot.show_scene(scene, self.colours, "")
        self._plot.show()

    def paint(self, painter: QPainter, letters: Lettering) -> None:
        """Paint the card, the axes and the rows; the plot paints itself."""
        self.paint_card(painter)
        view, plan = self._view, self._plan
        if view is None or plan is None:
            return
        self._paint_water(painter, plan)
        if self._scene is not None and plan.plot_left is not None:
            self._paint_axes(painter, letters, view, self._scene, int(plan.plot_left), plan.columns[0].left)
            self._paint_leaders(painter, view, plan, self._scene)
        if not self._words:
            at = (plan.columns[0].left + 20 * self._scale, self.height() / 2)
            nothing = "No operations yet: the fleet file names none"
            letters.text(at, nothing, self.colours.soft_ink, round(30 * self._scale), MEDIUM)
        rows = WallRowPainter(painter=painter, letters=letters, colours=self.colours, plan=plan, words=self._words)
        for box, words in zip(plan.boxes, self._words, strict=True):
            rows.paint_row(box, words)
        if plan.level is not None:
            self._paint_level(painter, letters, view, plan)

    def _paint_water(self, painter: QPainter, plan: WallPlan) -> None:
        for water in plan.water:
            column = plan.columns[water.column]
            left, right = column.left - 8 * self._scale, column.right
            tinted = QRectF(left, water.top_px, right - left, water.bottom_px - water.top_px)
            painter.fillRect(tinted, QColor(self.colours.water))

    def _paint_leaders(self, painter: QPainter, view: View, plan: WallPlan, scene: DayScene) -> None:
        rows, top = view.rows, int(_PLOT_TOP_PX * self._scale)
        painter.save()
        painter.setRenderHint(QPainter.RenderHint.Antialiasing)
        for box in sorted(plan.boxes, key=lambda box: rows[box.rows[0]].state.severity):
            row = rows[box.rows[0]]
            if len(box.rows) > 1 or row.shown is None or row.shown.axis_ft is None:
                continue
            loud = row.state in (State.HOLD, State.NEAR, State.REDUCED)
            colour = mark_colour(row.state, self.colours) if loud else self.colours.line
            painter.setPen(QPen(QColor(colour), (2.4 if loud else 1.6) * self._scale))
            self._leader(painter, plan, top + scene.altitude.px(row.shown.axis_ft), box.middle_px)
        level_ft = self._level_ft(view)
        if plan.level is not None and level_ft is not None:
            painter.setPen(QPen(QColor(self.colours.accent), 2.6 * self._scale))
            self._leader(painter, plan, top + scene.altitude.px(level_ft), plan.level[1])
        painter.restore()

    def _leader(self, painter: QPainter, plan: WallPlan, from_px: float, to_px: float) -> None:
        scene = self._scene
        if scene is None or plan.plot_left is None:
            return
        start, end, size = int(plan.plot_left) + scene.time.right_px, plan.columns[0].left, self._scale
        painter.drawPolyline(
            QPolygonF(
                [
                    QPointF(start, from_px),
                    QPointF(start + 10 * size, from_px),
                    QPointF(end - 20 * size, to_px),
                    QPointF(end - 8 * size, to_px),
                ]
            )
        )

    def _paint_level(self, painter: QPainter, letters: Lettering, view: View, plan: WallPlan) -> None:
        level_ft = self._level_ft(view)
        if plan.level is None or level_ft is None:
            return
        colours, (place, middle) = self.colours, plan.level
        column = plan.columns[place]
        words = level_label(view, level_ft)
        size = max(round(plan.word_px * 0.49), 1)
        height = plan.word_px * 0.59
        painter.save()
        painter.setRenderHint(QPainter.RenderHint.Antialiasing)
        painter.setPen(QPen(QColor(colours.accent), max(plan.word_px * 0.055, 1.2)))
        painter.drawLine(QPointF(column.left - 8 * self._scale, middle), QPointF(column.right, middle))
        painter.setPen(Qt.PenStyle.NoPen)
        painter.setBrush(QColor(colours.accent))
        box = QRectF(column.left, middle - height / 2, width_of(words, size, SEMIBOLD) + size, height)
        painter.drawRoundedRect(box, height * 0.15, height * 0.15)
        painter.restore()
        at = (box.left() + size / 2, baseline_for_middle(middle, size))
        letters.text(at, words, colours.on_accent, size, SEMIBOLD)

    def _paint_axes(
        self, painter: QPainter, letters: Lettering, view: View, scene: DayScene, left: int, right: float
    ) -> None:
        colours, size = self.colours, self._scale
        top, label = int(_PLOT_TOP_PX * size), max(round(_LABEL_PX * size), 1)
        bottom = top + scene.altitude.bottom_px
        line = QColor(colours.line)
        painter.fillRect(QRectF(left, bottom, scene.time.right_px, max(round(size), 1)), line)
        unit = view.state.airfield.altitude_unit
        roomy = AltitudeAxis(
            low_ft=scene.altitude.low_ft,
            high_ft=scene.altitude.high_ft,
            top_px=0.0,
            bottom_px=scene.altitude.bottom_px / (2 * size),
        )
        for altitude_ft, text in altitude_marks(roomy, unit):
            y = top + scene.altitude.px(altitude_ft)
            painter.fillRect(QRectF(left - 8 * size, round(y), 8 * size, max(round(size), 1)), line)
            letters.text((left - 12 * size, baseline_for_middle(y, label)), text, colours.soft_ink, label, side="right")
        free_from = 0.0
        for mark in scene.hours:
            x = left + scene.time.px(mark.when)
            painter.fillRect(QRectF(round(x), bottom, max(round(size), 1), (8 if mark.named else 5) * size), line)
            text = formatting.clock(mark.when, view.zone)
            half = width_of(text, label) / 2
            if mark.named and x - half >= free_from and x + half <= right - 4 * size:
                letters.text((x, bottom + 30 * size), text, colours.soft_ink, label, side="centre")
                free_from = x + half + 12 * size
        self._paint_now(painter, letters, view, scene, (left, right))

    def _paint_now(
        self, painter: QPainter, letters: Lettering, view: View, scene: DayScene, sides: tuple[int, float]
    ) -> None:
        colours, size, (left, right) = self.colours, self._scale, sides
        label, now_px = max(round(_LABEL_PX * size), 1), max(round(_NOW_PX * size), 1)
        middle, top = 28 * size, _PLOT_TOP_PX * size
        title = f"DA, {view.state.airfield.altitude_unit}"
        at = (16 * size, baseline_for_middle(middle, label))
        free_left = letters.text(at, title, colours.soft_ink, label, MEDIUM)
        text = f"now {formatting.clock(view.now, view.zone)}"
        width = width_of(text, now_px, SEMIBOLD) + 20 * size
        x = left + scene.time.px(scene.now)
        box_left = min(max(x - width / 2, free_left + 16 * size), right - 24 * size - width)
        painter.save()
        painter.setRenderHint(QPainter.RenderHint.Antialiasing)
        painter.setPen(Qt.PenStyle.NoPen)
        painter.setBrush(QColor(colours.ink))
        painter.drawRoundedRect(QRectF(box_left, middle - 17 * size, width, 34 * size), 4 * size, 4 * size)
        painter.restore()
        thick = 1.5 * size * _PLOT_LINES
        painter.fillRect(QRectF(round(x) - thick / 2, middle, thick, top - middle), QColor(colours.ink))
        at = (box_left + 10 * size, baseline_for_middle(middle, now_px))
        letters.text(at, text, colours.card, now_px, SEMIBOLD)
