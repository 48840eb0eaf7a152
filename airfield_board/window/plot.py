"""The day plot: the curve of the density altitude, the limits as shelves in it, the holds of the day."""

from collections.abc import Callable

import numpy as np
import pyqtgraph as pg
from numpy.typing import NDArray
from PySide6.QtCore import QPointF, QRectF, Qt
from PySide6.QtGui import QBrush, QColor, QPainter, QPainterPath, QPen, QResizeEvent
from PySide6.QtWidgets import QFrame, QGraphicsItem, QGraphicsPathItem, QStyleOptionGraphicsItem, QWidget

from airfield_board.limits.states import State
from airfield_board.window.day_scene import DayScene, Shelf, Stretch, stretches_of
from airfield_board.window.fonts import REGULAR, SEMIBOLD
from airfield_board.window.lettering import Lettering, PaintedText, width_of
from airfield_board.window.marks import mark_colour
from airfield_board.window.palette import LIGHT, Palette

SPAN_PX = 6.0
_HATCH_PX = 9.0


class PixelPlot(pg.GraphicsView):  # type: ignore[misc]  # pyqtgraph has no types
    """A view box that fills the widget to the pixel, with a layer of own painting under its curves and one over them.

    Attributes
    ----------
    box
        The view box.
    painted
        The texts of the last pass, in this widget's pixels.
    """

    def __init__(self, parent: QWidget | None = None) -> None:
        super().__init__(parent, background=None)
        self.setFrameShape(QFrame.Shape.NoFrame)
        self.setFocusPolicy(Qt.FocusPolicy.NoFocus)
        self.viewport().setFocusPolicy(Qt.FocusPolicy.NoFocus)
        self.setHorizontalScrollBarPolicy(Qt.ScrollBarPolicy.ScrollBarAlwaysOff)
        self.setVerticalScrollBarPolicy(Qt.ScrollBarPolicy.ScrollBarAlwaysOff)
        self.setAttribute(Qt.WidgetAttribute.WA_TransparentForMouseEvents)
        self.painted: list[PaintedText] = []
        self.box = pg.ViewBox(enableMouse=False, enableMenu=False, defaultPadding=0.0)
        self.setCentralItem(self.box)
        self._under = _Layer(self, self.box, z=-5.0, paints=self.paint_under)
        self._over = _Layer(self, self.box, z=20.0, paints=self.paint_over)

    def set_ranges(self, length_s: float, low: float, high: float) -> None:
        """Give the view box its axes."""
        self.box.setRange(xRange=(0.0, length_s), yRange=(low, high), padding=0.0, disableAutoRange=True)

    def repaint_layers(self) -> None:
        """Paint both layers again."""
        self._under.update()
        self._over.update()

    def resizeEvent(self, event: QResizeEvent | None) -> None:
        """Let the layers grow with the widget."""
        super().resizeEvent(event)
        # pyqtgraph calls this once from its own constructor, before there are layers.
        for layer in (getattr(self, "_under", None), getattr(self, "_over", None)):
            if layer is not None:
                layer.resize()

    def paint_under(self, painter: QPainter) -> None:
        """Paint what lies under the curves."""

    def paint_over(self, painter: QPainter) -> None:
        """Paint what lies over the curves."""


class DayPlot(PixelPlot):
    """Paints a `DayScene`; its view box has the axes of the scene, to the pixel."""

    def __init__(self, parent: QWidget | None = None) -> None:
        super().__init__(parent)
        self.setAccessibleName("Density altitude over the day")
        self._scale = 1.0
        self._colours = LIGHT
        self._scene_shown: DayScene | None = None
        self._chosen = ""
        self._parts: list[_CurveItems] = []
        self._stretches: list[Stretch] = []

    def show_scene(self, scene: DayScene, colours: Palette, chosen: str) -> None:
        """Show another scene, other colours, or another chosen row."""
        fresh = scene is not self._scene_shown or colours is not self._colours
        if not fresh and chosen == self._chosen:
            return
        self._scene_shown, self._colours, self._chosen = scene, colours, chosen
        if fresh:
            self.setBackground(QColor(colours.card))
            length_s = (scene.time.end - scene.time.start).total_seconds()
            self.set_ranges(length_s, scene.altitude.low_ft, scene.altitude.high_ft)
            self._stretches = stretches_of(scene.curve, scene.time)
            self._fill_curves()
        self.repaint_layers()

    def set_scale(self, scale: float) -> None:
        """Draw lines and marks in another size than on a desk."""
        if scale != self._scale:
            self._scale = scale
            self._fill_curves()
            self.repaint_layers()

    def _fill_curves(self) -> None:
        """Give each stretch its items, which are kept and filled anew."""
        while len(self._parts) < len(self._stretches):
            self._parts.append(_CurveItems(self.box))
        for part in self._parts[len(self._stretches) :]:
            part.clear()
        for part, stretch in zip(self._parts, self._stretches, strict=False):
            part.fill(stretch, self._colours, 2.2 * self._scale * self.devicePixelRatioF())

    def paint_under(self, painter: QPainter) -> None:
        """Paint water, hours, limits and holds."""
        scene, colours = self._scene_shown, self._colours
        if scene is None:
            return
        width, height = float(self.width()), float(self.height())
        painter.setRenderHint(QPainter.RenderHint.Antialiasing)
        self._paint_water(painter, scene)
        painter.setRenderHint(QPainter.RenderHint.Antialiasing, on=False)
        for mark in scene.hours:
            if mark.named:
                painter.fillRect(QRectF(round(scene.time.px(mark.when)), 0, 1, height), QColor(colours.hairline))
        for shelf in scene.shelves:
            if scene.altitude.holds(shelf.axis_ft):
                y = round(scene.altitude.px(shelf.axis_ft)) + 0.5
                painter.setPen(QPen(QColor(colours.line), 1))
                painter.drawLine(QPointF(0, y), QPointF(width, y))
        painter.setRenderHint(QPainter.RenderHint.Antialiasing)
        for shelf in sorted(scene.shelves, key=lambda shelf: shelf.state.severity):
            self._paint_spans(painter, scene, shelf)

    def _paint_water(self, painter: QPainter, scene: DayScene) -> None:
        painter.setPen(Qt.PenStyle.NoPen)
        painter.setBrush(QColor(self._colours.water))
        altitude, time = scene.altitude, scene.time
        px_per_s = (time.right_px - time.left_px) / (time.end - time.start).total_seconds()
        for part in self._stretches:
            x = part.seconds * px_per_s
            y = [altitude.px(value) for value in part.value.tolist()]
            painter.drawPath(
                _polygon(np.concatenate((x, x[[-1, 0]])), np.concatenate((y, [altitude.bottom_px, altitude.bottom_px])))
            )

    def _paint_spans(self, painter: QPainter, scene: DayScene, shelf: Shelf) -> None:
        colours = self._colours
        y = scene.altitude.px(shelf.axis_ft)
        until = scene.observed or scene.now
        thick = SPAN_PX * self._scale
        for span in shelf.spans:
            left, right = scene.time.px(span.start), scene.time.px(span.end or until)
            bar = QRectF(left, y - thick / 2, max(right - left, 2.0), thick)
            colour = QColor(mark_colour(span.state, colours))
            if span.state is State.HOLD:
                painter.fillRect(bar, colour)
            else:
                painter.setPen(QPen(colour, 1.6))
                painter.setBrush(QColor(colours.reduced_block))
                painter.drawRect(bar.adjusted(0.8, 0.8, -0.8, -0.8))

    def paint_over(self, painter: QPainter) -> None:
        """Paint the level, now, the gap, and what is pointed at."""
        scene, colours = self._scene_shown, self._colours
        self.painted = []
        if scene is None:
            return
        painter.setRenderHint(QPainter.RenderHint.Antialiasing)
        if scene.gap and scene.observed is not None:
            left, right = scene.time.px(scene.observed), scene.time.px(scene.now)
            paint_gap(painter, QRectF(left, 0, max(right - left, 1.0), self.height()), colours)
        self._paint_carets(painter, scene)
        chosen = next((shelf for shelf in scene.shelves if shelf.key == self._chosen), None)
        if chosen is not None:
            y = scene.altitude.px(chosen.axis_ft)
            painter.setPen(QPen(QColor(colours.ink), 2))
            painter.drawLine(QPointF(0, y), QPointF(self.width(), y))
            self._paint_spans(painter, scene, chosen)
        now = scene.time.px(scene.now)
        width = 1.5 * self._scale
        painter.fillRect(QRectF(round(now) - width / 2, 0, width, self.height()), QColor(colours.ink))
        if scene.level_ft is not None and scene.observed is not None:
            at = QPointF(scene.time.px(scene.observed), scene.altitude.px(scene.level_ft))
            painter.setPen(QPen(QColor(colours.accent), 1.6 * self._scale))
            painter.drawLine(at, QPointF(self.width(), at.y()))
            if scene.time.holds(scene.observed):
                painter.setPen(QPen(QColor(colours.card), 2))
                painter.setBrush(QColor(colours.accent))
                painter.drawEllipse(at, 6.5 * self._scale, 6.5 * self._scale)
        if chosen is not None:
            self._paint_callout(painter, scene, chosen)

    def _paint_carets(self, painter: QPainter, scene: DayScene) -> None:
        painter.setBrush(Qt.BrushStyle.NoBrush)
        size = self._scale
        painter.setPen(QPen(QColor(self._colours.line), 1.4 * size))
        x = self.width() - 1.0
        beyond = {
            shelf.axis_ft > scene.altitude.high_ft for shelf in scene.shelves if not scene.altitude.holds(shelf.axis_ft)
        }
        for above in beyond:
            y, dip = (1.0, 7.0 * size) if above else (self.height() - 1.0, -7.0 * size)
            path = QPainterPath(QPointF(x - 18 * size, y + dip))
            path.lineTo(x - 12 * size, y)
            path.lineTo(x - 6 * size, y + dip)
            path.moveTo(x - 12 * size, y)
            path.lineTo(x, y)
            painter.drawPath(path)

    def _paint_callout(self, painter: QPainter, scene: DayScene, shelf: Shelf) -> None:
        colours = self._colours
        first, second = shelf.callout
        room = self.width() - 32.0
        width = min(max(width_of(first, 14, SEMIBOLD), width_of(second, 13)), room) + 24
        height = 48.0 if second else 28.0
        y = scene.altitude.px(shelf.axis_ft)
        top = y - height - 14 if y - height - 14 > 2 else y + 14
        left = min(max(scene.time.px(scene.now) - width / 2, 4.0), self.width() - width - 4)
        box = QRectF(left, top, width, height)
        painter.setPen(QPen(QColor(colours.accent), 1.5))
        painter.setBrush(QColor(colours.card))
        painter.drawRoundedRect(box, 5, 5)
        letters = Lettering(painter, self.painted)
        letters.text((left + 12, top + 19), first, colours.ink, 14, SEMIBOLD, room_px=room)
        letters.text((left + 12, top + 38), second, colours.soft_ink, 13, REGULAR, room_px=room)


class _Layer(pg.GraphicsObject):  # type: ignore[misc]  # pyqtgraph has no types
    """Paints in the plot's own pixels, under or over the curves."""

    def __init__(self, plot: QWidget, box: QGraphicsItem, z: float, paints: Callable[[QPainter], None]) -> None:
        super().__init__()
        self._plot = plot
        self._paints = paints
        self.setParentItem(box)
        self.setZValue(z)

    def resize(self) -> None:
        """Say that the bounds are others now."""
        self.prepareGeometryChange()
        self.update()

    def boundingRect(self) -> QRectF:
        """All of the plot."""
        return QRectF(0, 0, self._plot.width(), self._plot.height())

    def paint(self, painter: QPainter, option: QStyleOptionGraphicsItem, widget: QWidget | None = None) -> None:
        """Let the plot paint."""
        painter.save()
        try:
            self._paints(painter)
        finally:
            painter.restore()


class _CurveItems:
    """Uncertainty and curve of one stretch of the day."""

    def __init__(self, box: pg.ViewBox) -> None:
        self._band = QGraphicsPathItem()
        self._curve = pg.PlotCurveItem(antialias=True)
        self._band.setPen(QPen(Qt.PenStyle.NoPen))
        for item in (self._band, self._curve):
            box.addItem(item, ignoreBounds=True)

    def fill(self, stretch: Stretch, colours: Palette, width_px: float) -> None:
        """Take other points and colours, and a width in the screen's own pixels."""
        self._band.setPath(
            _polygon(
                np.concatenate((stretch.seconds, stretch.seconds[::-1])),
                np.concatenate((stretch.high, stretch.low[::-1])),
            )
        )
        self._band.setBrush(_clear(colours.accent, 62))
        self._curve.setData(x=stretch.seconds, y=stretch.value, pen=pg.mkPen(QColor(colours.accent), width=width_px))

    def clear(self) -> None:
        """Show nothing."""
        self._band.setPath(QPainterPath())
        self._curve.setData(x=np.empty(0), y=np.empty(0))


def _polygon(x: NDArray[np.float64], y: NDArray[np.float64]) -> QPainterPath:
    path: QPainterPath = pg.arrayToQPath(x, y)
    path.closeSubpath()
    return path


def paint_gap(painter: QPainter, gap: QRectF, colours: Palette) -> None:
    """Strike out the time of which nothing is known."""
    painter.save()
    painter.setClipRect(gap)
    painter.fillRect(gap, _clear(colours.card, 150))
    painter.setPen(QPen(QColor(colours.line), 1.3))
    x = gap.left() - gap.height()
    while x < gap.right():
        painter.drawLine(QPointF(x, gap.bottom()), QPointF(x + gap.height(), gap.top()))
        x += _HATCH_PX
    painter.restore()
    painter.fillRect(QRectF(gap.left(), 0, 1, gap.height()), QColor(colours.line))


def _clear(colour: str, alpha: int) -> QBrush:
    shade = QColor(colour)
    shade.setAlpha(alpha)
    return QBrush(shade)
