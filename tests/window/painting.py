"""What was painted: the texts of a whole view with their places, and its pixels."""

from dataclasses import dataclass
from datetime import datetime

import numpy as np
from numpy.typing import NDArray
from PySide6.QtCore import QPoint, QRectF
from PySide6.QtGui import QImage
from PySide6.QtWidgets import QWidget

from airfield_board.session.board_state import BoardState
from airfield_board.window.board_view import BoardView, PageName
from airfield_board.window.canvas import Canvas
from airfield_board.window.lettering import PaintedText
from airfield_board.window.picture import image_of
from airfield_board.window.plot import PixelPlot


@dataclass(frozen=True)
class Placed:
    """A text, the part that painted it, and where its ink lies in the view."""

    part: str
    text: PaintedText
    ink: QRectF
    room: QRectF


def shown_view(
    state: BoardState,
    *,
    size_px: tuple[int, int] = (1440, 900),
    scheme: str = "light",
    page: PageName = PageName.BOARD,
    now: datetime | None = None,
    view: BoardView | None = None,
) -> tuple[BoardView, QImage]:
    """Paint a view of a state, and return it with its picture."""
    view = view or BoardView()
    view.resize(*size_px)
    view.set_scheme(scheme)
    view.set_page(page)
    view.show_state(state, now or state.assessed_at)
    view.ensure_plot()
    return view, image_of(view)


def texts_of(view: QWidget) -> list[Placed]:
    """Return all texts of the last painting that can be seen, in the view's pixels."""
    parts: list[QWidget] = [view, *view.findChildren(QWidget)]
    placed = []
    for part in parts:
        if not isinstance(part, Canvas | PixelPlot) or not (part is view or part.isVisibleTo(view)):
            continue
        origin = part.mapTo(view, QPoint(0, 0))
        room = QRectF(origin.x(), origin.y(), part.width(), part.height())
        for text in part.painted:
            ink = QRectF(text.left + origin.x(), text.top + origin.y(), text.width, text.height)
            placed.append(Placed(part=type(part).__name__, text=text, ink=ink, room=room))
    return placed


def overlaps(placed: list[Placed]) -> list[tuple[str, str]]:
    """Return the pairs of texts whose ink meets."""
    found = []
    by_top = sorted(placed, key=lambda one: one.ink.top())
    for index, one in enumerate(by_top):
        for other in by_top[index + 1 :]:
            if other.ink.top() > one.ink.bottom():
                break
            common = one.ink.intersected(other.ink)
            if common.width() > 0.5 and common.height() > 0.5:
                found.append((f"{one.part}: {one.text.text}", f"{other.part}: {other.text.text}"))
    return found


def faults(placed: list[Placed]) -> list[str]:
    """Say what is wrong with the texts of a picture."""
    found = [f"overlap: {one} / {other}" for one, other in overlaps(placed)]
    for one in placed:
        text = one.text
        if not text.text:
            found.append(f"nothing left of: {text.full}")
        if not one.room.adjusted(-0.6, -0.6, 0.6, 0.6).contains(one.ink):
            found.append(f"{one.part} cuts: {text.text}")
        if text.left < text.room_left - 2.5 or text.left + text.width > text.room_right + 2.5:
            found.append(f"out of its column: {text.text}")
    return found


def pixels(image: QImage) -> NDArray[np.int16]:
    """Return an image's red, green and blue, shape (height, width, 3)."""
    rgb = image.convertToFormat(QImage.Format.Format_RGB888)
    rows = np.frombuffer(rgb.constBits(), dtype=np.uint8).reshape(rgb.height(), rgb.bytesPerLine())
    return rows[:, : rgb.width() * 3].reshape(rgb.height(), rgb.width(), 3).astype(np.int16)


def lead_of_red_or_green(image: QImage) -> int:
    """Return by how much red or green leads the other two colours, at most, in any pixel."""
    red, green, blue = np.moveaxis(pixels(image), 2, 0)
    return int(max((red - np.maximum(green, blue)).max(), (green - np.maximum(red, blue)).max()))
