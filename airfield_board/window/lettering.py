"""Text on a painter: plain text only, placed by its baseline, cut by one rule, and remembered where it fell."""

from dataclasses import dataclass, field
from functools import lru_cache
from typing import Literal

from PySide6.QtCore import QPointF
from PySide6.QtGui import QColor, QFont, QFontMetricsF, QPainter

from airfield_board.window.fonts import REGULAR, font

Side = Literal["left", "right", "centre"]
_TAIL_SHARE = 0.7
"""Most of the room that a kept tail may take."""


@dataclass(frozen=True, slots=True, kw_only=True)
class PaintedText:
    """A text as it was painted.

    Attributes
    ----------
    text, full
        What stands there, and what it was before it was cut.
    left, top, width, height
        Of its ink, in the widget's pixels.
    room_left, room_right
        What it must stay between.
    colour
        Of its ink, ``#RRGGBB``.
    """

    text: str
    full: str
    left: float
    top: float
    width: float
    height: float
    room_left: float
    room_right: float
    colour: str


@lru_cache(maxsize=4096)
def _ink(text: str, size_px: int, weight: int) -> tuple[float, float, float, float, float]:
    metrics = QFontMetricsF(font(size_px, weight))
    box = metrics.tightBoundingRect(text)
    return metrics.horizontalAdvance(text), box.left(), box.top(), box.width(), box.height()


def width_of(text: str, size_px: int, weight: int = REGULAR) -> float:
    """Width that a text takes, in pixels."""
    return _ink(text, size_px, weight)[0]


def cut_to(text: str, room_px: float, size_px: int, weight: int = REGULAR) -> str:
    """Shorten a text to a width, keeping the part that tells variants apart: the cut comes before the last comma.

    ``Turbine helicopter, hook load`` becomes ``Turbine helicop…, hook load``; what follows a raised point stays as
    well, so ``Light twin, 4 up · Departure`` becomes ``Light t…, 4 up · Departure``. Where such a tail would take most
    of the room, or there is none, the end is cut. In a room too narrow for anything, nothing remains.
    """
    if width_of(text, size_px, weight) <= room_px:
        return text
    for mark in (" · ", ", "):
        head, found, tail = text.rpartition(mark)
        kept_px = width_of(found + tail, size_px, weight)
        if found and kept_px <= room_px * _TAIL_SHARE:
            start = cut_to(head, room_px - kept_px, size_px, weight)
            if start:
                return start + found + tail
    for length in range(len(text) - 1, 0, -1):
        shorter = text[:length].rstrip(" ,·") + "…"
        if width_of(shorter, size_px, weight) <= room_px:
            return shorter
    return ""


def baseline_for_middle(middle_px: float, size_px: int) -> float:
    """Return the baseline that centres capitals and figures of a size on a line (cap height 0.727 em)."""
    return middle_px + 0.727 * size_px / 2


@dataclass(slots=True)
class Lettering:
    """Paints text and keeps the list of what was painted.

    Parameters
    ----------
    painter
        Active; its pen and font are changed.
    painted
        Filled with each text, in order.
    """

    painter: QPainter
    painted: list[PaintedText] = field(default_factory=list)

    def text(
        self,
        at: tuple[float, float],
        text: str,
        colour: str,
        size_px: int,
        weight: int = REGULAR,
        *,
        side: Side = "left",
        room_px: float | None = None,
    ) -> float:
        """Paint a text and return the x at which it ends (for ``right``, at which it begins).

        Parameters
        ----------
        at
            x of the given side, and y of the baseline.
        text
            Plain text; line ends become spaces.
        colour
            ``#RRGGBB``.
        side
            Which part of the text stands at x.
        room_px
            Greatest width; longer text is cut.
        """
        x, baseline = at
        full = " ".join(text.split())
        shown = full if room_px is None else cut_to(full, room_px, size_px, weight)
        advance, ink_left, ink_top, ink_width, ink_height = _ink(shown, size_px, weight)
        left = x if side == "left" else x - advance if side == "right" else x - advance / 2
        room = advance if room_px is None else room_px
        room_left = left if side == "left" else x - room if side == "right" else x - room / 2
        self._draw(left, baseline, shown, colour, font(size_px, weight))
        if full:
            self.painted.append(
                PaintedText(
                    text=shown,
                    full=full,
                    left=left + ink_left,
                    top=baseline + ink_top,
                    width=ink_width,
                    height=ink_height,
                    room_left=room_left,
                    room_right=room_left + room,
                    colour=colour,
                )
            )
        return left if side == "right" else left + advance

    def _draw(self, left: float, baseline: float, text: str, colour: str, face: QFont) -> None:
        self.painter.setFont(face)
        self.painter.setPen(QColor(colour))
        self.painter.drawText(QPointF(left, baseline), text)
