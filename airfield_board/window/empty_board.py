"""The board as it is drawn before there is an airfield: axes and clock, no rows."""

from dataclasses import dataclass
from datetime import datetime
from zoneinfo import ZoneInfo

from PySide6.QtCore import QRectF
from PySide6.QtGui import QColor, QPainter, QResizeEvent
from PySide6.QtWidgets import QWidget

from airfield_board.clock import local_day_bounds, us_from_time
from airfield_board.configuration.defaults import default_instruments
from airfield_board.session.board_state import AirfieldLine, BoardState, Mode
from airfield_board.session.day_record import DayRecord
from airfield_board.window import formatting, header
from airfield_board.window.axes import AltitudeAxis, TimeAxis, altitude_marks, board_range, day_bounds, hour_marks
from airfield_board.window.board_page import AXIS_PX, PLOT_TOP_PX, TIME_AXIS_PX
from airfield_board.window.canvas import Canvas
from airfield_board.window.day_axis import paint_hours, paint_now
from airfield_board.window.fonts import MEDIUM, SEMIBOLD
from airfield_board.window.lettering import Lettering, baseline_for_middle, width_of
from airfield_board.window.palette import Palette
from airfield_board.window.reading import View, view_of

_MARGIN_PX = 16
_CAUTION_PX = 27
_UNNAMED = "No airfield yet"
_EVERY_H = 3
_GAP_PX = 8
_RIGHT_PX = 24


@dataclass(frozen=True, slots=True, kw_only=True)
class KnownAirfield:
    """What is known of an airfield while it is being set up.

    Attributes
    ----------
    name, time_zone
        Empty while not known.
    elevation_m
        None while not known.
    """

    name: str
    elevation_m: float | None
    altitude_unit: str
    time_zone: str


class EmptyBoard(Canvas):
    """Clock, axes and caution; nothing is judged, so nothing is shown as if it were.

    Attributes
    ----------
    day
        The axes.
    """

    def __init__(self, parent: QWidget | None = None) -> None:
        super().__init__(parent)
        self._view: View | None = None
        self._known = KnownAirfield(name="", elevation_m=None, altitude_unit="ft", time_zone="")
        self.day = EmptyDay(self)
        self.setAccessibleName("The board, still empty")

    def show_airfield(self, known: KnownAirfield, now: datetime) -> None:
        """Show what is known, at a time."""
        now = now.replace(microsecond=0)
        if self._view is None or known != self._known or now != self._view.now:
            self._known = known
            self._view = view_of(_state(known, now), now, None)
            self.day.show_view(self._view)
            self.update()

    def set_colours(self, colours: Palette) -> None:
        """Take other colours, in all parts."""
        super().set_colours(colours)
        self.day.set_colours(colours)

    def resizeEvent(self, event: QResizeEvent) -> None:
        """Place the axes anew."""
        super().resizeEvent(event)
        top = header.HEIGHT_PX + _GAP_PX
        self.day.setGeometry(_MARGIN_PX, top, self.width() - 2 * _MARGIN_PX, self.height() - top - _CAUTION_PX)

    def paint(self, painter: QPainter, letters: Lettering) -> None:
        """Paint all of it but the axes."""
        colours = self.colours
        painter.fillRect(self.rect(), QColor(colours.page))
        at = (self.width() / 2, self.height() - 9.0)
        letters.text(at, formatting.CAUTION, colours.soft_ink, 13, MEDIUM, side="centre")
        if self._view is not None:
            self._paint_header(painter, letters, self._view)

    def _paint_header(self, painter: QPainter, letters: Lettering, view: View) -> None:
        colours, known = self.colours, self._known
        painter.fillRect(QRectF(0, 0, self.width(), header.HEIGHT_PX), QColor(colours.header))
        painter.fillRect(QRectF(0, header.HEIGHT_PX - 1, self.width(), 1), QColor(colours.hairline))
        right = float(self.width() - _MARGIN_PX)
        baseline = 31.0
        right = letters.text((right, baseline), "UTC", colours.soft_on_header, 13, side="right") - 6
        universal = formatting.clock(view.now, formatting.UNIVERSAL)
        right = letters.text((right, baseline), universal, colours.on_header, 22, side="right") - 26
        if known.time_zone:
            local = view.now.astimezone(view.zone)
            right = letters.text((right, baseline), "local", colours.soft_on_header, 13, MEDIUM, side="right") - 6
            right = letters.text((right, baseline), f":{local:%S}", colours.soft_on_header, 15, side="right") - 1
            right = letters.text((right, baseline), f"{local:%H:%M}", colours.on_header, 24, SEMIBOLD, side="right")
            right -= 20
        room = max(right - 180, 60.0)
        left = letters.text((16, baseline), known.name or _UNNAMED, colours.on_header, 22, SEMIBOLD, room_px=room)
        if known.elevation_m is not None:
            elevation = formatting.elevation(known.elevation_m, known.altitude_unit)
            letters.text((left + 10, baseline), elevation, colours.soft_on_header, 13)


class EmptyDay(Canvas):
    """Axes of a day and of altitude, with now on them."""

    def __init__(self, parent: QWidget | None = None) -> None:
        super().__init__(parent)
        self._view: View | None = None

    def show_view(self, view: View) -> None:
        """Show another day or time."""
        self._view = view
        self.update()

    def paint(self, painter: QPainter, letters: Lettering) -> None:
        """Paint all of it."""
        self.paint_card(painter)
        view = self._view
        if view is None:
            return
        colours, unit = self.colours, view.state.airfield.altitude_unit
        bottom, width = float(self.height() - TIME_AXIS_PX), float(self.width() - AXIS_PX - _RIGHT_PX)
        low_ft, high_ft = board_range(view.state)
        altitudes = AltitudeAxis(low_ft=low_ft, high_ft=high_ft, top_px=PLOT_TOP_PX, bottom_px=bottom)
        start, end = day_bounds(view.state, view.now, view.zone)
        times = TimeAxis(start=start, end=end, left_px=0.0, right_px=width)
        title = f"Density altitude, {unit}"
        letters.text((14, 23), title, colours.soft_ink, 13, MEDIUM)
        painter.fillRect(QRectF(AXIS_PX, bottom, width, 1), QColor(colours.line))
        for altitude_ft, text in altitude_marks(altitudes, unit):
            y = altitudes.px(altitude_ft)
            painter.fillRect(QRectF(AXIS_PX - 6, round(y), 6, 1), QColor(colours.line))
            at = (AXIS_PX - 10, baseline_for_middle(y, 13))
            letters.text(at, text, colours.soft_ink, 13, side="right")
        hours = hour_marks(start, end, view.zone, _EVERY_H)
        for mark in hours:
            if mark.named:
                x = AXIS_PX + times.px(mark.when)
                painter.fillRect(QRectF(round(x), PLOT_TOP_PX, 1, bottom - PLOT_TOP_PX), QColor(colours.hairline))
        paint_hours(painter, letters, colours, times, hours, view, (AXIS_PX, bottom, self.width()))
        place = (AXIS_PX, PLOT_TOP_PX, 14 + width_of(title, 13, MEDIUM) + 12, self.width() - 12.0)
        paint_now(painter, letters, colours, times, view, place)


def _state(known: KnownAirfield, now: datetime) -> BoardState:
    """Return a board without rows and without an observation: what the axes are reckoned from."""
    airfield = AirfieldLine(
        name=known.name,
        elevation_m=known.elevation_m or 0.0,
        time_zone=known.time_zone or "UTC",
        altitude_unit="m" if known.altitude_unit == "m" else "ft",
    )
    start, end = local_day_bounds(now, ZoneInfo(airfield.time_zone))
    return BoardState(
        mode=Mode.LIVE,
        airfield=airfield,
        instruments=default_instruments(),
        guarded=False,
        assessed_at=now,
        observation=None,
        conditions=None,
        stale_after_min=15.0,
        ageing_after_min=10.0,
        aircraft=(),
        operations=(),
        curve=DayRecord().curve(us_from_time(start), us_from_time(end), 0),
    )
