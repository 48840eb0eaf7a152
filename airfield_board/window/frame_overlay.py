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
_WORD_PX = 12
_EVERY_PX = 160.0
_EVERY_BARRICADE_PX = 360.0
_STRIPE_PX = 22.0


class FrameOverlay(Canvas):
    """Paints the band on four sides; lets the mouse through."""

    def __init__(self, parent: QWidget | None = None) -> None:
        super().__init__(parent)
        self._frame: Frame | None = None
        self._band_px, self._word_px = float(BAND_PX), _WORD_PX
        self.setAttribute(Qt.WidgetAttribute.WA_TransparentForMouseEvents)
        self.setFocusPolicy(Qt.FocusPolicy.NoFocus)

    @property
    def frame(self) -> Frame | None:
        """What frames the view."""
        return self._frame

    def set_band(self, band_px: float, word_px: int) -> None:
        """Paint the band in another width than on a desk, with words of another size."""
        if (band_px, word_px) != (self._band_px, self._word_px):
            self._band_px, self._word_px = band_px, word_px
            self.update()

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
        width, height, broad = float(self.width()), float(self.height()), self._band_px
        sides = [
            QRectF(0, 0, width, broad),
            QRectF(0, height - broad, width, broad),
            QRectF(0, broad, broad, height - 2 * broad),
            QRectF(width - broad, broad, broad, height - 2 * broad),
        ]
        barricade = frame is Frame.NO_DATA
        for side in sides:
            painter.fillRect(side, QColor(band.ground))
            if barricade:
                _stripes(painter, side, band.ink)
        every = (_EVERY_BARRICADE_PX if barricade else _EVERY_PX) * broad / BAND_PX
        size = self._word_px
        every = max(every, width_of(frame.value, size, BOLD) + 60 * broad / BAND_PX)
        for side in sides[:2]:
            _words_along(painter, letters, side, (frame.value, size), band, every)
        for side, turn in zip(sides[2:], (-90.0, 90.0), strict=True):
            painter.save()
            painter.translate(side.center())
            painter.rotate(turn)
            lying = QRectF(-side.height() / 2, -broad / 2, side.height(), broad)
            upright = Lettering(painter, [])
            _words_along(painter, upright, lying, (frame.value, size), band, every)
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


def _words_along(
    painter: QPainter, letters: Lettering, side: QRectF, said: tuple[str, int], band: Band, every: float
) -> None:
    word, size = said
    count = max(int(side.width() // every), 1)
    spacing = side.width() / count
    width = width_of(word, size, BOLD)
    for index in range(count):
        middle = side.left() + spacing * (index + 0.5)
        painter.fillRect(QRectF(middle - width / 2 - 9, side.top(), width + 18, side.height()), QColor(band.ground))
        baseline = side.center().y() + size * 0.727 / 2
        letters.text((middle, baseline), word, band.ink, size, BOLD, side="centre")
