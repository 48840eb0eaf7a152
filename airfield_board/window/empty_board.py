"""The board as it is drawn before there is an airfield: axes and clock, no rows."""

from dataclasses import dataclass
from datetime import datetime, timedelta
from zoneinfo import ZoneInfo

import numpy as np
from PySide6.QtCore import QRectF
from PySide6.QtGui import QColor, QPainter
from PySide6.QtWidgets import QWidget

from airfield_board.clock import local_day, start_of_local_day, us_from_time
from airfield_board.configuration.defaults import default_instruments
from airfield_board.session.board_state import AirfieldLine, BoardState, DayCurve, Mode
from airfield_board.window import formatting, header
from airfield_board.window.axes import AltitudeAxis, TimeAxis, board_range, day_bounds, hour_marks
from airfield_board.window.board_page import AXIS_PX, PLOT_TOP_PX, TIME_AXIS_PX, altitude_marks
from airfield_board.window.canvas import CARD_RADIUS_PX, Canvas
from airfield_board.window.day_axis import paint_hours, paint_now
from airfield_board.window.fonts import MEDIUM, SEMIBOLD
from airfield_board.window.lettering import Lettering, width_of
from airfield_board.window.reading import View, view_of

_MARGIN_PX = 16
_CAUTION_PX = 27
_UNNAMED = "No airfield yet"
_EVERY_H = 3


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
    """Axes, clock and caution; nothing is judged, so nothing is shown as if it were."""

    def __init__(self, parent: QWidget | None = None) -> None:
        super().__init__(parent)
        self._known = KnownAirfield(name="", elevation_m=None, altitude_unit="ft", time_zone="")
        self._now: datetime | None = None
        self.setAccessibleName("The board, still empty")

    def show_airfield(self, known: KnownAirfield, now: datetime) -> None:
        """Show what is known, at a time."""
        if known != self._known or self._now is None or now.replace(microsecond=0) != self._now:
            self._known, self._now = known, now.replace(microsecond=0)
            self.update()

    def paint(self, painter: QPainter, letters: Lettering) -> None:
        """Paint all of it."""
        colours = self.colours
        painter.fillRect(self.rect(), QColor(colours.page))
        if self._now is None:
            return
        view = view_of(_state(self._known, self._now), self._now, None)
        self._paint_header(painter, letters, view)
        top = header.HEIGHT_PX + 8.0
        card = QRectF(_MARGIN_PX, top, self.width() - 2 * _MARGIN_PX, self.height() - top - _CAUTION_PX)
        painter.save()
        painter.setPen(QColor(0, 0, 0, 0))
        painter.setBrush(QColor(colours.card))
        painter.drawRoundedRect(card, CARD_RADIUS_PX, CARD_RADIUS_PX)
        painter.restore()
        self._paint_axes(painter, letters, view, card)
        at = (self.width() / 2, self.height() - 9.0)
        letters.text(at, formatting.CAUTION, colours.soft_ink, 13, MEDIUM, side="centre")

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

    def _paint_axes(self, painter: QPainter, letters: Lettering, view: View, card: QRectF) -> None:
        colours = self.colours
        painter.save()
        painter.translate(card.topLeft())
        letters_here = Lettering(painter, [])
        bottom, width = card.height() - TIME_AXIS_PX, card.width() - AXIS_PX - 24
        low_ft, high_ft = board_range(view.state)
        altitudes = AltitudeAxis(low_ft=low_ft, high_ft=high_ft, top_px=PLOT_TOP_PX, bottom_px=bottom)
        start, end = day_bounds(view.state, view.now, view.zone)
        times = TimeAxis(start=start, end=end, left_px=0.0, right_px=width)
        title = f"Density altitude, {view.state.airfield.altitude_unit}"
        letters_here.text((14, 23), title, colours.soft_ink, 13, MEDIUM)
        painter.fillRect(QRectF(AXIS_PX, bottom, width, 1), QColor(colours.line))
        if self._known.elevation_m is not None:
            for altitude_ft, text in altitude_marks(altitudes, view.state.airfield.altitude_unit):
                y = altitudes.px(altitude_ft)
                painter.fillRect(QRectF(AXIS_PX - 6, round(y), 6, 1), QColor(colours.line))
                letters_here.text((AXIS_PX - 10, y + 4.7), text, colours.soft_ink, 13, side="right")
        if self._known.time_zone:
            hours = hour_marks(start, end, view.zone, _EVERY_H)
            for mark in hours:
                if mark.named:
                    x = AXIS_PX + times.px(mark.when)
                    painter.fillRect(QRectF(round(x), PLOT_TOP_PX, 1, bottom - PLOT_TOP_PX), QColor(colours.hairline))
            paint_hours(painter, letters_here, colours, times, hours, view, (AXIS_PX, bottom, card.width()))
            free_left = 14 + width_of(title, 13, MEDIUM) + 12
            paint_now(painter, letters_here, colours, times, view, (AXIS_PX, PLOT_TOP_PX, free_left, card.width() - 12))
        painter.restore()


def _state(known: KnownAirfield, now: datetime) -> BoardState:
    """Return a board without rows and without an observation: what the axes are reckoned from."""
    airfield = AirfieldLine(
        name=known.name,
        elevation_m=known.elevation_m or 0.0,
        time_zone=known.time_zone or "UTC",
        altitude_unit="m" if known.altitude_unit == "m" else "ft",
    )
    zone = ZoneInfo(airfield.time_zone)
    day = local_day(now, zone)
    nothing = np.array([], dtype=np.float64)
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
        curve=DayCurve(
            time_us=np.array([], dtype=np.int64),
            density_altitude_ft=nothing,
            uncertainty_ft=nothing,
            day_start_us=us_from_time(start_of_local_day(day, zone)),
            day_end_us=us_from_time(start_of_local_day(day + timedelta(days=1), zone)),
        ),
    )
