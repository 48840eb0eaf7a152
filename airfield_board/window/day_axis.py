"""The time axis under a day plot and the mark of now above it."""

from collections.abc import Sequence

from PySide6.QtCore import QRectF, Qt
from PySide6.QtGui import QColor, QPainter

from airfield_board.window import formatting
from airfield_board.window.axes import HourMark, TimeAxis
from airfield_board.window.fonts import SEMIBOLD
from airfield_board.window.lettering import Lettering, width_of
from airfield_board.window.palette import Palette
from airfield_board.window.reading import View

NOW_PX = 92
"""Room for the label of now."""


def paint_hours(
    painter: QPainter,
    letters: Lettering,
    colours: Palette,
    axis: TimeAxis,
    hours: Sequence[HourMark],
    view: View,
    place: tuple[float, float, float],
) -> None:
    """Paint the hours under a plot.

    Parameters
    ----------
    place
        Left edge and lower edge of the plot, and the right edge that no name may pass.
    """
    plot_left, bottom, right = place
    free_from = 0.0
    for mark in hours:
        x = plot_left + axis.px(mark.when)
        painter.fillRect(QRectF(round(x), bottom, 1, 6 if mark.named else 4), QColor(colours.line))
        if not mark.named:
            continue
        text = formatting.clock(mark.when, view.zone)
        half = width_of(text, 13) / 2
        if x - half >= free_from and x + half <= right:
            letters.text((x, bottom + 22), text, colours.soft_ink, 13, side="centre")
            free_from = x + half + 8


def paint_now(
    painter: QPainter,
    letters: Lettering,
    colours: Palette,
    axis: TimeAxis,
    view: View,
    place: tuple[float, float, float, float],
) -> None:
    """Paint the label of now above a plot, and the line from it down to the plot.

    Parameters
    ----------
    place
        Left and upper edge of the plot, and the edges between which the label must stay.
    """
    plot_left, plot_top, free_left, free_right = place
    text = f"now {formatting.clock(view.now, view.zone)}"
    width = width_of(text, 14, SEMIBOLD) + 16
    x = plot_left + axis.px(view.now.replace(second=0, microsecond=0))
    left = min(max(x - width / 2, free_left), free_right - width)
    painter.save()
    painter.setRenderHint(QPainter.RenderHint.Antialiasing)
    painter.setPen(Qt.PenStyle.NoPen)
    painter.setBrush(QColor(colours.ink))
    painter.drawRoundedRect(QRectF(left, 8, width, 20), 3, 3)
    painter.restore()
    painter.fillRect(QRectF(round(x) - 0.75, 28, 1.5, plot_top - 28), QColor(colours.ink))
    letters.text((left + 8, 23), text, colours.card, 14, SEMIBOLD)
    if left - 10 - width_of("observed", 13) > free_left:
        letters.text((left - 10, 23), "observed", colours.soft_ink, 13, side="right")
