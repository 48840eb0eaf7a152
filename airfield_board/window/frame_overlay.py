"""The band around the whole view: what kind of picture this is, on any crop of it."""

from PySide6.QtCore import QPointF, QRectF, Qt
from PySide6.QtGui import QColor, QPainter, QPolygonF
from PySide6.QtWidgets import QWidget

from airfield_board.window.canvas import Canvas
from airfield_board.window.fonts import BOLD
from airfield_board.window.lettering import Lettering, width_of
from airfield_board.window.palette import Band, Palette
from airfield_board.window.reading import Frame, View

BAND_PX = 22
_EVERY_PX = 160.0
_EVERY_BARRICADE_PX = 360.0
_STRIPE_PX = 22.0


class FrameOverlay(Canvas):
    """Paints the band on four sides; lets the mouse through."""

    def __init__(self, parent: QWidget | None = None) -> None:
        super().__init__(parent)
        self._frame: Frame | None = None
        self.setAttribute(Qt.WidgetAttribute.WA_TransparentForMouseEvents)
        self.setFocusPolicy(Qt.FocusPolicy.NoFocus)

    @property
    def frame(self) -> Frame | None:
        """What frames the view."""
        return self._frame

    def show_view(self, view: View) -> None:
        """Take the first of the view's frames."""
        frame = view.frames[0] if view.frames else None
        if frame is not self._frame:
            self._frame = frame
            self.setVisible(frame is not None)
            self.setAccessibleName(frame.value if frame else "")
            self.update()

    def paint(self, painter: QPainter, letters: Lettering) -> None:
        """Paint the band and its words."""
        frame = self._frame
        if frame is None:
            return
        band = band_of(frame, self.colours)
        width, height = float(self.width()), float(self.height())
        sides = [
            QRectF(0, 0, width, BAND_PX),
            QRectF(0, height - BAND_PX, width, BAND_PX),
            QRectF(0, BAND_PX, BAND_PX, height - 2 * BAND_PX),
            QRectF(width - BAND_PX, BAND_PX, BAND_PX, height - 2 * BAND_PX),
        ]
        barricade = frame is Frame.NO_DATA
        for side in sides:
            painter.fillRect(side, QColor(band.ground))
            if barricade:
                _stripes(painter, side, band.ink)
        every = _EVERY_BARRICADE_PX if barricade else _EVERY_PX
        every = max(every, width_of(frame.value, 12, BOLD) + 60)
        for side in sides[:2]:
            _words_along(painter, letters, side, frame.value, band, every)
        for side, turn in zip(sides[2:], (-90.0, 90.0), strict=True):
            painter.save()
            painter.translate(side.center())
            painter.rotate(turn)
            lying = QRectF(-side.height() / 2, -BAND_PX / 2, side.height(), BAND_PX)
            upright = Lettering(painter, [])
            _words_along(painter, upright, lying, frame.value, band, every)
            painter.restore()


def band_of(frame: Frame, colours: Palette) -> Band:
    """Return a frame's colours."""
    return {
        Frame.NO_DATA: colours.no_data_band,
        Frame.NOT_RECORDING: colours.not_recording_band,
        Frame.TRAINING: colours.training_band,
        Frame.DEMO: colours.demo_band,
        Frame.PAST_DAY: colours.notice_band,
        Frame.SETTINGS_WAITING: colours.notice_band,
    }[frame]


def _stripes(painter: QPainter, side: QRectF, colour: str) -> None:
    painter.save()
    painter.setClipRect(side)
    painter.setRenderHint(QPainter.RenderHint.Antialiasing)
    painter.setPen(Qt.PenStyle.NoPen)
    painter.setBrush(QColor(colour))
    half = _STRIPE_PX / 2
    rise = min(side.height(), side.width()) if side.width() > side.height() else side.height()
    reach = rise if side.width() > side.height() else side.width()
    long = max(side.width(), side.height())
    place = -2 * _STRIPE_PX - reach
    while place < long + 2 * _STRIPE_PX:
        if side.width() > side.height():
            corners = [
                QPointF(side.left() + place, side.bottom()),
                QPointF(side.left() + place + half, side.bottom()),
                QPointF(side.left() + place + half + reach, side.top()),
                QPointF(side.left() + place + reach, side.top()),
            ]
        else:
            corners = [
                QPointF(side.left(), side.top() + place + reach),
                QPointF(side.left(), side.top() + place + reach + half),
                QPointF(side.right(), side.top() + place + half),
                QPointF(side.right(), side.top() + place),
            ]
        painter.drawPolygon(QPolygonF(corners))
        place += _STRIPE_PX
    painter.restore()


def _words_along(painter: QPainter, letters: Lettering, side: QRectF, word: str, band: Band, every: float) -> None:
    count = max(int(side.width() // every), 1)
    spacing = side.width() / count
    width = width_of(word, 12, BOLD)
    for index in range(count):
        middle = side.left() + spacing * (index + 0.5)
        painter.fillRect(QRectF(middle - width / 2 - 9, side.top(), width + 18, side.height()), QColor(band.ground))
        baseline = side.center().y() + 12 * 0.727 / 2
        letters.text((middle, baseline), word, band.ink, 12, BOLD, side="centre")
