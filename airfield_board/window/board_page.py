"""The Board page: the day plot, its axes, and the rows that hang on it."""

from dataclasses import dataclass
from datetime import datetime, timedelta
from typing import TYPE_CHECKING

from PySide6.QtCore import QRectF, QSize, QTimer, Signal
from PySide6.QtGui import QColor, QPainter, QResizeEvent, QShowEvent
from PySide6.QtWidgets import QWidget

from airfield_board.session.board_state import BoardState, Freshness, OperationLine
from airfield_board.window import formatting
from airfield_board.window.axes import AltitudeAxis, TimeAxis, altitude_marks, board_range, day_bounds, hour_marks
from airfield_board.window.canvas import Canvas
from airfield_board.window.day_axis import NOW_PX, paint_hours, paint_now
from airfield_board.window.day_scene import DayScene, Shelf
from airfield_board.window.fonts import MEDIUM
from airfield_board.window.lettering import Lettering, baseline_for_middle, width_of
from airfield_board.window.no_data_card import NoDataCard
from airfield_board.window.palette import Palette
from airfield_board.window.reading import Cause, View
from airfield_board.window.row_layout import Density, choose_pitch
from airfield_board.window.row_painter import GUTTER_PX, PLOT_SMALLEST_PX
from airfield_board.window.row_panel import ROWS_BOTTOM_PX, ROWS_TOP_PX, Headings, RowPanel
from airfield_board.window.row_words import tip_of, words_of

if TYPE_CHECKING:
    from airfield_board.window.plot import DayPlot

AXIS_PX = 58
PLOT_TOP_PX = 44
TIME_AXIS_PX = 30
_HOUR_ROOM_PX = 56.0
_MARGINS_PX = 32
"""What the window is wider than the page."""


class BoardPage(Canvas):
    """Plot and rows on one altitude axis.

    Signals
    -------
    selected(str)
        The key of the row pointed at; empty for none.
    poll_asked(), type_in_asked()
        From the card that stands there when there is no current observation.
    """

    selected = Signal(str)
    poll_asked = Signal()
    type_in_asked = Signal()

    def __init__(self, parent: QWidget | None = None) -> None:
        super().__init__(parent)
        self.rows = RowPanel(self)
        self.card = NoDataCard(self)
        self._view: View | None = None
        self._starter = QTimer(self)
        self._starter.setSingleShot(True)
        self._starter.timeout.connect(self.ensure_plot)
        self._shown: tuple[BoardState, datetime, Cause, QSize] | None = None
        self._scene: DayScene | None = None
        self._plot: DayPlot | None = None
        self._range: tuple[int, str, tuple[float, float]] | None = None
        self.rows.selected.connect(self._on_selected)
        self.card.poll_asked.connect(self.poll_asked)
        self.card.type_in_asked.connect(self.type_in_asked)

    @property
    def plot(self) -> "DayPlot | None":
        """The plot; None before the first picture stands."""
        return self._plot

    @property
    def scene(self) -> DayScene | None:
        """What the plot shows; None before the first state."""
        return self._scene

    def set_colours(self, colours: Palette) -> None:
        """Take other colours, in all parts."""
        super().set_colours(colours)
        self.rows.set_colours(colours)
        self.card.set_colours(colours)
        self._show_plot()

    def show_view(self, view: View) -> None:
        """Show another state or time; nothing here changes within a minute but by the state or its reading."""
        shown = (view.state, view.now.replace(second=0, microsecond=0), view.reading.cause, self.size())
        self._view = view
        if self._shown is not None and self._shown[0] is view.state and self._shown[1:] == shown[1:]:
            return
        self._shown = shown
        words = [words_of(row, view) for row in view.rows]
        conditions = view.state.conditions if view.trusted else None
        level_ft = conditions.density_altitude_ft if conditions is not None else None
        level = (level_ft, level_label(view, level_ft)) if level_ft is not None else None
        degrees = formatting.UNIT_WORDS[view.state.airfield.temperature_unit]
        change = formatting.change_heading(trusted=view.trusted)
        headings = Headings(margin=f"Margin, {view.column_unit}", change=change, last=f"Hold above {degrees}")
        tips = [tip_of(row, view) for row in view.rows]
        self.rows.show_rows(words, tips, headings, level=level)
        self.card.show_view(view)
        self._arrange()

    def ensure_plot(self) -> None:
        """Make the plot now, rather than after the first painting: its import takes longer than all the rest."""
        if self._plot is None:
            from airfield_board.window.plot import DayPlot

            self._plot = DayPlot(self)
            self._plot.lower()
            self._place_plot()
            self._show_plot()
            self._plot.show()

    def showEvent(self, event: QShowEvent) -> None:
        """Ask for the plot once the first picture stands."""
        super().showEvent(event)
        self._starter.start(0)

    def resizeEvent(self, event: QResizeEvent) -> None:
        """Place all parts anew."""
        super().resizeEvent(event)
        if self._view is not None:
            self.show_view(self._view)

    def _arrange(self) -> None:
        """Give plot and rows their places and their common axes, and make the scene."""
        view = self._view
        if view is None:
            return
        columns = self.rows.choose_columns(self.height(), self.width() + _MARGINS_PX)
        rows_width = int(GUTTER_PX + columns.width)
        plot_width = max(self.width() - AXIS_PX - rows_width, PLOT_SMALLEST_PX)
        self.rows.setGeometry(AXIS_PX + plot_width, 0, self.width() - AXIS_PX - plot_width, self.height())
        low_ft, high_ft = self._altitude_range(view)
        bottom = float(self.height() - TIME_AXIS_PX)
        self.rows.set_axis(AltitudeAxis(low_ft=low_ft, high_ft=high_ft, top_px=PLOT_TOP_PX, bottom_px=bottom))
        altitude = AltitudeAxis(low_ft=low_ft, high_ft=high_ft, top_px=0.0, bottom_px=bottom - PLOT_TOP_PX)
        scene = scene_of(view, altitude, float(plot_width), _HOUR_ROOM_PX)
        if scene != self._scene:
            self._scene = scene
            self._place_plot()
            self._show_plot()
            self.update()
        self._place_card(plot_width)

    def _altitude_range(self, view: View) -> tuple[float, float]:
        """Return the ends of the altitude axis: within a day they only move apart, so that the picture stays still."""
        # The state's day, not the clock's: what the last board before midnight shows is no part of the new day.
        day = view.state.curve.day_start_us
        low_ft, high_ft = board_range(view.state)
        if self._range is not None and self._range[:2] == (day, view.state.airfield.name):
            low_ft, high_ft = min(low_ft, self._range[2][0]), max(high_ft, self._range[2][1])
        self._range = (day, view.state.airfield.name, (low_ft, high_ft))
        return low_ft, high_ft

    def _place_plot(self) -> None:
        if self._plot is not None and self._scene is not None:
            width = int(self._scene.time.right_px)
            height = int(self._scene.altitude.bottom_px)
            self._plot.setGeometry(AXIS_PX, PLOT_TOP_PX, width, height)

    def _show_plot(self) -> None:
        if self._plot is not None and self._scene is not None:
            self._plot.show_scene(self._scene, self.colours, self.rows.chosen)

    def _place_card(self, plot_width: int) -> None:
        size = self.card.sizeHint()
        now_px = self._scene.time.px(self._scene.now) if self._scene is not None else 0.0
        # Else in the upper left: there the curve is not, for the morning is the coolest of the day.
        right_of_now = now_px + size.width() + 16 <= plot_width
        left = AXIS_PX + (plot_width - size.width() - 8 if right_of_now else 12)
        # A narrow plot is covered, and the leaders beside it; the rows never are.
        left = max(min(left, self.rows.x() + GUTTER_PX - 8 - size.width()), 4)
        top = self.height() - TIME_AXIS_PX - size.height() - 12 if right_of_now else PLOT_TOP_PX + 12
        self.card.setGeometry(left, top, size.width(), size.height())
        self.card.raise_()

    def _on_selected(self, key: str) -> None:
        self._show_plot()
        self.selected.emit(key)

    def paint(self, painter: QPainter, letters: Lettering) -> None:
        """Paint the card and the axes; plot and rows paint themselves."""
        self.paint_card(painter)
        view, scene = self._view, self._scene
        if view is None or scene is None:
            return
        unit = view.state.airfield.altitude_unit
        free_right = self.rows.x() + GUTTER_PX - 12.0
        title = f"Density altitude, {unit}"
        if 14 + width_of(title, 13, MEDIUM) + 12 + NOW_PX > free_right:
            title = f"DA, {unit}"
        letters.text((14, 23), title, self.colours.soft_ink, 13, MEDIUM)
        self._paint_altitudes(painter, letters, scene, unit)
        bottom = PLOT_TOP_PX + scene.altitude.bottom_px
        right = self.rows.x() + 24.0
        paint_hours(painter, letters, self.colours, scene.time, scene.hours, view, (AXIS_PX, bottom, right))
        free_left = 14 + width_of(title, 13, MEDIUM) + 12
        paint_now(painter, letters, self.colours, scene.time, view, (AXIS_PX, PLOT_TOP_PX, free_left, free_right))

    def _paint_altitudes(self, painter: QPainter, letters: Lettering, scene: DayScene, unit: str) -> None:
        axis, colours = scene.altitude, self.colours
        painter.fillRect(QRectF(AXIS_PX, PLOT_TOP_PX + axis.bottom_px, scene.time.right_px, 1), QColor(colours.line))
        for altitude_ft, text in altitude_marks(axis, unit):
            y = PLOT_TOP_PX + axis.px(altitude_ft)
            if self.card.covers(AXIS_PX - 10, y):
                continue
            painter.fillRect(QRectF(AXIS_PX - 6, round(y), 6, 1), QColor(colours.line))
            at = (AXIS_PX - 10, baseline_for_middle(y, 13))
            letters.text(at, text, colours.soft_ink, 13, side="right")


@dataclass(frozen=True, slots=True, kw_only=True)
class RoomWanted:
    """All by which the height of the rows is chosen."""

    rows: int
    extra_lines: int
    with_level: bool
    with_foot: bool


def room_wanted(view: View) -> RoomWanted:
    """Return what the rows of a view ask of the page."""
    shown = [row.shown for row in view.state.operations]
    return RoomWanted(
        rows=len(shown),
        extra_lines=sum(bool(formatting.temporary_phrase(line)) for line in shown),
        with_level=view.trusted and view.state.conditions is not None,
        with_foot=any(line is None or line.place_ft is None for line in shown),
    )


def density_of(view: View, page_px: float) -> Density:
    """Return how much a row could carry on a page of a height."""
    wanted = room_wanted(view)
    return choose_pitch(
        page_px - ROWS_TOP_PX - ROWS_BOTTOM_PX,
        wanted.rows,
        with_level=wanted.with_level,
        extra_lines=wanted.extra_lines,
        with_foot=wanted.with_foot,
    ).density


def level_label(view: View, level_ft: float) -> str:
    """Name the level of the air; where the reading ages, with its time."""
    observation, unit = view.state.observation, view.state.airfield.altitude_unit
    ageing = observation is not None and view.reading.freshness is Freshness.AGEING
    when = observation.time if ageing and observation is not None else None
    return formatting.level_label(level_ft, when, unit, view.zone)


def scene_of(view: View, altitude: AltitudeAxis, width_px: float, hour_room_px: float) -> DayScene:
    """Return the day plot of a view.

    Parameters
    ----------
    altitude
        To the plot's own pixels.
    width_px
        Of the plot.
    hour_room_px
        What the name of an hour takes.
    """
    start, end = day_bounds(view.state, view.now, view.zone)
    per_hour_px = width_px / ((end - start) / timedelta(hours=1))
    every_h = next((step for step in (3, 6) if step * per_hour_px >= hour_room_px), 12)
    conditions = view.state.conditions if view.trusted else None
    observation = view.state.observation
    return DayScene(
        altitude=altitude,
        time=TimeAxis(start=start, end=end, left_px=0.0, right_px=width_px),
        hours=tuple(hour_marks(start, end, view.zone, every_h)),
        curve=view.state.curve,
        shelves=tuple(shelf for row in view.rows if (shelf := shelf_of(row, view)) is not None),
        level_ft=conditions.density_altitude_ft if conditions is not None else None,
        observed=observation.time if observation is not None else None,
        now=view.now.replace(second=0, microsecond=0),
        gap=not view.trusted,
    )


def shelf_of(row: OperationLine, view: View) -> Shelf | None:
    """Return a row's limit as it lies on the plot; None where it has no place on it."""
    line = row.shown
    if line is None or line.axis_ft is None:
        return None
    return Shelf(
        key=row.key,
        axis_ft=line.axis_ft,
        state=row.state,
        spans=line.spans,
        callout=formatting.callout(row, view.now, view.zone),
    )
