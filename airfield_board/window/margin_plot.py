"""The plot of the Margin page."""

import numpy as np
import pyqtgraph as pg
from numpy.typing import NDArray
from PySide6.QtCore import QPointF, QRectF, Qt
from PySide6.QtGui import QColor, QPainter, QPen
from PySide6.QtWidgets import QWidget

from airfield_board.configuration.differences import difference_in_unit
from airfield_board.limits.states import State
from airfield_board.window.fonts import MEDIUM
from airfield_board.window.formatting import number
from airfield_board.window.lettering import Lettering, width_of
from airfield_board.window.margin_scene import MarginLine, MarginScene
from airfield_board.window.palette import LIGHT, Palette
from airfield_board.window.plot import PixelPlot, paint_gap

_HATCH_PX = 11.0
_NAMES_BESIDE_CARD_FROM_PX = 360
"""A narrower plot has no room for the sides' names beside the card that says why there is no data."""
_NAME_GAP_PX = 14.0
_GROUPS = ((State.GO,), (State.NEAR, State.REDUCED), (State.HOLD,))


class MarginPlot(PixelPlot):
    """Paints a `MarginScene`; its view box has the axes of the scene, to the pixel."""

    def __init__(self, parent: QWidget | None = None) -> None:
        super().__init__(parent)
        self.setAccessibleName("Margins over the day")
        self._colours = LIGHT
        self._scene_shown: MarginScene | None = None
        self._chosen = ""
        self._items: list[pg.PlotCurveItem] = []

    def show_scene(self, scene: MarginScene, colours: Palette, chosen: str) -> None:
        """Show another scene, other colours, or another chosen row."""
        if scene is self._scene_shown and colours is self._colours and chosen == self._chosen:
            return
        self._scene_shown, self._colours, self._chosen = scene, colours, chosen
        self.setBackground(QColor(colours.card))
        length_s = (scene.time.end - scene.time.start).total_seconds()
        self.set_ranges(length_s, scene.margin.low_ft, scene.margin.high_ft)
        self._fill()
        self.repaint_layers()

    def _fill(self) -> None:
        """Give each line three items, one a colour; items are kept and filled anew."""
        scene = self._scene_shown
        if scene is None:
            return
        used = 0
        for line in scene.lines:
            width = (3.0 if line.key == self._chosen else 2.0) * self.devicePixelRatioF()
            for group in _GROUPS:
                x, y = state_points(line, group)
                item = self._item(used)
                pen = pg.mkPen(QColor(self._line_colour(group[0])), width=width)
                item.setData(x=x, y=y, pen=pen, connect="finite")
                used += 1
        for item in self._items[used:]:
            item.setData(x=np.empty(0), y=np.empty(0))

    def _item(self, place: int) -> pg.PlotCurveItem:
        while len(self._items) <= place:
            item = pg.PlotCurveItem(antialias=True)
            self.box.addItem(item, ignoreBounds=True)
            self._items.append(item)
        return self._items[place]

    def _line_colour(self, state: State) -> str:
        colours = self._colours
        if state is State.HOLD:
            return colours.hold_line
        return colours.near_line if state in (State.NEAR, State.REDUCED) else colours.soft_ink

    def paint_under(self, painter: QPainter) -> None:
        """Paint the near band, the HOLD side, their names, and the hours: all under the lines, which nothing hides."""
        scene, colours = self._scene_shown, self._colours
        self.painted = []
        if scene is None:
            return
        width, height = float(self.width()), float(self.height())
        zero = scene.margin.px(0.0)
        if scene.near_ft is not None:
            top = scene.margin.px(scene.near_ft)
            painter.fillRect(QRectF(0, top, width, zero - top), QColor(colours.tint_near))
        side = QRectF(0, zero, width, height - zero)
        painter.fillRect(side, QColor(colours.tint_hold))
        painter.save()
        painter.setClipRect(side)
        painter.setRenderHint(QPainter.RenderHint.Antialiasing)
        painter.setPen(QPen(QColor(colours.hatch_hold), 1.2))
        x = -side.height()
        while x < width:
            painter.drawLine(QPointF(x, height), QPointF(x + side.height(), zero))
            x += _HATCH_PX
        painter.restore()
        for mark in scene.hours:
            if mark.named:
                painter.fillRect(QRectF(round(scene.time.px(mark.when)), 0, 1, height), QColor(colours.hairline))
        painter.fillRect(QRectF(0, round(zero) - 1, width, 2), QColor(colours.ink))
        self._paint_names(painter, scene, zero)

    def paint_over(self, painter: QPainter) -> None:
        """Paint the margins now, and now itself."""
        scene, colours = self._scene_shown, self._colours
        if scene is None:
            return
        painter.setRenderHint(QPainter.RenderHint.Antialiasing)
        if scene.gap and scene.observed is not None:
            left, right = scene.time.px(scene.observed), scene.time.px(scene.now)
            paint_gap(painter, QRectF(left, 0, max(right - left, 1.0), self.height()), colours)
        now = scene.time.px(scene.now)
        painter.fillRect(QRectF(round(now) - 0.75, 0, 1.5, self.height()), QColor(colours.ink))
        if scene.observed is not None:
            self._paint_now(painter, scene, scene.time.px(scene.observed))

    def _paint_names(self, painter: QPainter, scene: MarginScene, zero: float) -> None:
        letters = Lettering(painter, self.painted)
        if self.height() - zero > 26:
            names = ("HOLD side: limit exceeded", "HOLD side")
            self._name(painter, letters, self.height() - 12.0, names, self._colours.tint_hold)
        near = scene.near_ft
        if near is not None and zero - scene.margin.px(near) > 20:
            baseline = scene.margin.px(near) + 18.0
            upper = difference_in_unit(near, "ft", scene.unit)
            names = (f"near limit, to {number(upper)} {scene.unit}", "near limit")
            self._name(painter, letters, baseline, names, self._colours.tint_near)

    def _name(
        self, painter: QPainter, letters: Lettering, baseline: float, names: tuple[str, str], ground: str
    ) -> None:
        """Name a side where no lines end: ahead of now, late in the day at the left; else a shorter one."""
        scene = self._scene_shown
        if scene is None or (scene.gap and self.width() < _NAMES_BESIDE_CARD_FROM_PX):
            return
        now = scene.time.px(scene.now)
        last = scene.time.px(scene.observed) if scene.observed is not None else now
        for text in names:
            width = width_of(text, 13, MEDIUM)
            ahead, behind = self.width() - width - 12, 12.0
            if ahead - _NAME_GAP_PX > now or behind + width + _NAME_GAP_PX < last:
                left = ahead if ahead - _NAME_GAP_PX > now else behind
                painter.fillRect(QRectF(left - 4, baseline - 14, width + 8, 19), QColor(ground))
                letters.text((left, baseline), text, self._colours.ink, 13, MEDIUM)
                return

    def _paint_now(self, painter: QPainter, scene: MarginScene, x: float) -> None:
        colours = self._colours
        for line in scene.lines:
            if line.now_ft is None or line.state is State.NO_DATA:
                continue
            y = scene.margin.px(line.now_ft)
            colour = QColor(self._line_colour(line.state))
            tie = QPen(QColor(colours.line), 1.0)
            tie.setDashPattern([1.5, 4.0])
            painter.setPen(tie)
            painter.drawLine(QPointF(x + 7, y), QPointF(self.width(), y))
            painter.setPen(QPen(QColor(colours.card), 1.6))
            painter.setBrush(colour)
            radius = 6.5 if line.key == self._chosen else 5.0
            painter.drawEllipse(QPointF(x, y), radius, radius)
        painter.setBrush(Qt.BrushStyle.NoBrush)


def state_points(line: MarginLine, group: tuple[State, ...]) -> tuple[NDArray[np.float64], NDArray[np.float64]]:
    """Return the points of a line at which its state is of a group, with NaN between the runs."""
    wanted = [state.severity for state in group]
    xs: list[NDArray[np.float64]] = []
    ys: list[NDArray[np.float64]] = []
    gap = np.array([np.nan])
    for part in line.stretches:
        inside = np.isin(part.state, wanted)
        # A segment has the state of its end: what happened was known at the later observation.
        reached = inside.copy()
        reached[:-1] |= inside[1:]
        joined = np.where(reached, part.margin_ft, np.nan)
        # Two runs with a single point of another state between them would be joined through it.
        lone = np.flatnonzero(~inside[:-1] & inside[1:]) if len(inside) > 1 else np.empty(0, dtype=np.int64)
        before = lone[(lone > 0)]
        touching = before[inside[before - 1]] if len(before) else before
        x, y = part.seconds, joined
        if len(touching):
            x = np.insert(x, touching, part.seconds[touching])
            y = np.insert(y, touching, np.nan)
        xs += [x, gap]
        ys += [y, gap]
    if not xs:
        return np.empty(0), np.empty(0)
    return np.concatenate(xs), np.concatenate(ys)
