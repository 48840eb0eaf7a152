"""State marks: shape alone tells them apart.

HOLD a solid square cut by a bar; NEAR LIMIT a solid triangle under a ceiling bar; REDUCED a square half filled; GO an
open ring; NO DATA a hollow struck diamond.
"""

from PySide6.QtCore import QPointF, QRectF, Qt
from PySide6.QtGui import QBrush, QColor, QPainter, QPen, QPolygonF

from airfield_board.limits.states import State
from airfield_board.window.palette import Palette


def mark_colour(state: State, palette: Palette) -> str:
    """Colour of a state's mark, leader and line where it stands without a block."""
    return {
        State.HOLD: palette.hold_line,
        State.NEAR: palette.near_line,
        State.REDUCED: palette.near_line,
        State.GO: palette.go,
        State.NO_DATA: palette.no_data,
    }[state]


def paint_mark(painter: QPainter, state: State, box: QRectF, colour: str, ground: str) -> None:
    """Paint a state's mark.

    Parameters
    ----------
    box
        A square; the mark fills it.
    colour, ground
        Of the mark, and of what it stands on (the bar that cuts the square).
    """
    painter.save()
    painter.setRenderHint(QPainter.RenderHint.Antialiasing)
    painter.setPen(Qt.PenStyle.NoPen)
    painter.setBrush(QColor(colour))
    {
        State.HOLD: _hold,
        State.NEAR: _near,
        State.REDUCED: _reduced,
        State.GO: _go,
        State.NO_DATA: _no_data,
    }[state](painter, box, colour, ground)
    painter.restore()


def _hold(painter: QPainter, box: QRectF, colour: str, ground: str) -> None:
    side = box.width()
    painter.drawRoundedRect(box, side * 0.14, side * 0.14)
    bar = max(2.0, side * 0.2)
    painter.setBrush(QColor(ground))
    painter.drawRect(QRectF(box.left() + side * 0.2, box.center().y() - bar / 2, side * 0.6, bar))


def _near(painter: QPainter, box: QRectF, colour: str, ground: str) -> None:
    side = box.width()
    bar = max(1.5, side * 0.14)
    painter.drawRect(QRectF(box.left(), box.top() + side * 0.04, side, bar))
    painter.drawPolygon(
        QPolygonF(
            [
                QPointF(box.center().x(), box.top() + side * 0.3),
                QPointF(box.right(), box.bottom()),
                QPointF(box.left(), box.bottom()),
            ]
        )
    )


def _reduced(painter: QPainter, box: QRectF, colour: str, ground: str) -> None:
    side = box.width()
    stroke = max(1.5, side * 0.14)
    inner = box.adjusted(stroke / 2, stroke / 2, -stroke / 2, -stroke / 2)
    painter.drawRect(QRectF(box.left(), box.center().y(), side, side / 2))
    painter.setBrush(Qt.BrushStyle.NoBrush)
    painter.setPen(QPen(QColor(colour), stroke))
    painter.drawRoundedRect(inner, side * 0.08, side * 0.08)


def _go(painter: QPainter, box: QRectF, colour: str, ground: str) -> None:
    stroke = max(1.5, box.width() * 0.16)
    painter.setBrush(Qt.BrushStyle.NoBrush)
    painter.setPen(QPen(QColor(colour), stroke))
    inset = stroke / 2 + box.width() * 0.04
    painter.drawEllipse(box.adjusted(inset, inset, -inset, -inset))


def _no_data(painter: QPainter, box: QRectF, colour: str, ground: str) -> None:
    stroke = max(1.2, box.width() * 0.1)
    half = box.width() / 2 - stroke / 2
    centre = box.center()
    painter.setBrush(QBrush(Qt.BrushStyle.NoBrush))
    painter.setPen(QPen(QColor(colour), stroke, Qt.PenStyle.SolidLine, Qt.PenCapStyle.FlatCap))
    painter.drawPolygon(
        QPolygonF(
            [
                centre + QPointF(0, -half),
                centre + QPointF(half, 0),
                centre + QPointF(0, half),
                centre + QPointF(-half, 0),
            ]
        )
    )
    for shift in (-0.16, 0.16):
        reach = box.width() * 0.26
        middle = centre + QPointF(box.width() * shift * 0.7, box.width() * shift * 0.7)
        painter.drawLine(middle + QPointF(-reach, reach), middle + QPointF(reach, -reach))
