"""The strip under the header: the air now, what it was measured from, and how old that is."""

import math
from dataclasses import dataclass
from datetime import timedelta

from PySide6.QtCore import QPointF, QRectF, Qt
from PySide6.QtGui import QColor, QPainter, QPen, QPolygonF
from PySide6.QtWidgets import QWidget

from airfield_board.clock import time_from_us
from airfield_board.limits.states import State
from airfield_board.observations.observation import DewpointUse
from airfield_board.session.board_state import Freshness
from airfield_board.window import formatting
from airfield_board.window.canvas import Canvas
from airfield_board.window.fonts import BOLD, MEDIUM, REGULAR, SEMIBOLD
from airfield_board.window.lettering import Lettering, width_of
from airfield_board.window.marks import paint_mark
from airfield_board.window.reading import Cause, View

HEIGHT_PX = 96
COMPACT_HEIGHT_PX = 76
_PADDING_PX = 20.0
_AGE_PX = 126.0
_GAP_SMALLEST_PX = 13.0
_GAP_LARGEST_PX = 52.0
_DEWPOINT_LABEL = {
    DewpointUse.OBSERVED: "Dew point",
    DewpointUse.CARRIED: "Dew point, carried",
    DewpointUse.ASSUMED: "Dew point, assumed",
    DewpointUse.DRY: "Dew point, not used",
}


@dataclass(frozen=True, slots=True, kw_only=True)
class Cell:
    """A labelled value.

    Attributes
    ----------
    pattern
        A value as wide as the widest to be expected, so that the cells keep their places.
    below
        A line under it; ``arrow`` puts an arrow before it: 1 up, −1 down, 0 level, None no arrow.
    """

    label: str
    value: str
    unit: str
    pattern: str
    below: str = ""
    arrow: int | None = None


@dataclass(frozen=True, slots=True, kw_only=True)
class StripContent:
    """All the words of the strip."""

    density_altitude: str
    unit: str
    uncertainty: str
    compared: str
    last_known: str
    cells: tuple[tuple[Cell, ...], ...]
    source: str
    typed_in: bool
    observed: str
    age: tuple[str, str]
    age_share: float
    ageing_share: float
    freshness: Freshness
    trust: str
    stale_at: str


@dataclass(frozen=True, slots=True, kw_only=True)
class _Sizes:
    loud_px: int
    value_px: int
    label_px: int


_SIZES = (
    _Sizes(loud_px=62, value_px=24, label_px=13),
    _Sizes(loud_px=56, value_px=22, label_px=13),
    _Sizes(loud_px=50, value_px=20, label_px=12),
    _Sizes(loud_px=44, value_px=18, label_px=11),
)


def content_of(view: View) -> StripContent:
    """Put the strip into words."""
    state, zone, now = view.state, view.zone, view.now
    airfield, observation, reading = state.airfield, state.observation, view.reading
    conditions = state.conditions if view.trusted else None
    unit, degrees = airfield.altitude_unit, formatting.UNIT_WORDS[airfield.temperature_unit]
    dash = formatting.DASH
    air = (
        Cell(label="Rate now", value=dash, unit="", pattern="+888"),
        Cell(label="Peak today", value=dash, unit="", pattern="8,888"),
    )
    derived = (
        Cell(label="Pressure altitude", value=dash, unit="", pattern="8,888"),
        Cell(label="ISA deviation", value=dash, unit="", pattern="+88.8"),
    )
    measured = (
        Cell(label="Altimeter", value=dash, unit="", pattern="88.88"),
        Cell(label="Temperature", value=dash, unit="", pattern="88.8"),
        Cell(label="Dew point", value=dash, unit="", pattern="88.8"),
    )
    density_altitude = spread = compared = last_known = ""
    if conditions is not None:
        density_altitude = formatting.altitude(conditions.density_altitude_ft, unit)
        spread = formatting.uncertainty(conditions.uncertainty_ft, unit)
        if state.guarded:
            value_ft = conditions.density_altitude_ft + conditions.uncertainty_ft
            compared = f"guarded: {formatting.altitude(value_ft, unit)} {unit} is compared"
        air = (_rate_cell(conditions.rate_ft_per_h, unit), _peak_cell(view))
        derived = (
            Cell(
                label="Pressure altitude",
                value=formatting.altitude(conditions.pressure_altitude_ft, unit),
                unit=unit,
                pattern="8,888",
            ),
            Cell(
                label="ISA deviation",
                value=formatting.deviation(conditions.isa_deviation_c, airfield.temperature_unit),
                unit=degrees,
                pattern="+88.8",
            ),
        )
    elif observation is not None:
        last_known = _last_known(view)
    if observation is not None and view.trusted:
        dewpoint = observation.dewpoint_c if observation.dewpoint_c is not None else observation.dewpoint_used_c
        measured = (
            Cell(
                label="Altimeter",
                value=formatting.altimeter(observation.altimeter_setting_hpa, airfield.altimeter_unit),
                unit=formatting.UNIT_WORDS[airfield.altimeter_unit],
                pattern="88.88" if airfield.altimeter_unit == "inhg" else "8888.8",
            ),
            Cell(
                label="Temperature",
                value=formatting.temperature(observation.temperature_c, airfield.temperature_unit),
                unit=degrees,
                pattern="88.8",
            ),
            Cell(
                label=_DEWPOINT_LABEL[observation.dewpoint_use],
                value=dash if dewpoint is None else formatting.temperature(dewpoint, airfield.temperature_unit),
                unit="" if dewpoint is None else degrees,
                pattern="88.8",
            ),
        )
    stale_after = timedelta(minutes=state.stale_after_min)
    age = reading.age
    return StripContent(
        density_altitude=density_altitude,
        unit=unit,
        uncertainty=spread,
        compared=compared,
        last_known=last_known,
        cells=(air, derived, measured),
        source=formatting.source_line(observation) or "no observation yet",
        typed_in=bool(observation is not None and observation.initials),
        observed=formatting.observed_label(observation, now, zone),
        age=formatting.age(age) if age is not None else (dash, ""),
        age_share=min(age / stale_after, 1.0) if age is not None else 0.0,
        ageing_share=state.ageing_after_min / state.stale_after_min,
        freshness=reading.freshness,
        trust=formatting.trust_word(reading.freshness, reading.cause),
        stale_at=f"stale at {formatting.minutes(state.stale_after_min)}",
    )


def _rate_cell(rate_ft_per_h: float | None, unit: str) -> Cell:
    if rate_ft_per_h is None or not math.isfinite(rate_ft_per_h):
        return Cell(label="Rate now", value=formatting.DASH, unit="", pattern="+888", below="too few readings")
    word = formatting.rate_word(rate_ft_per_h)
    return Cell(
        label="Rate now",
        value=formatting.rate(rate_ft_per_h, unit),
        unit=f"{unit}/h",
        pattern="+888",
        below=word,
        arrow={"rising": 1, "falling": -1}.get(word, 0),
    )


def _peak_cell(view: View) -> Cell:
    conditions, unit = view.state.conditions, view.state.airfield.altitude_unit
    if conditions is None:
        return Cell(label="Peak today", value=formatting.DASH, unit="", pattern="8,888")
    return Cell(
        label="Peak today",
        value=formatting.altitude(conditions.peak_ft, unit),
        unit=unit,
        pattern="8,888",
        below=f"at {formatting.clock(conditions.peak_time, view.zone)}, observed",
    )


def _last_known(view: View) -> str:
    curve, unit = view.state.curve, view.state.airfield.altitude_unit
    observation = view.state.observation
    if observation is None or not len(curve.time_us):
        return ""
    value = formatting.altitude(float(curve.density_altitude_ft[-1]), unit)
    when = formatting.time_near(time_from_us(int(curve.time_us[-1])), view.now, view.zone)
    return f"last known {value} {unit} at {when}"


class ObservationStrip(Canvas):
    """Density altitude, what follows from it, what was observed, where and when."""

    def __init__(self, parent: QWidget | None = None) -> None:
        super().__init__(parent)
        self._content: StripContent | None = None
        self._cause = Cause.NONE
        self.setAccessibleName("Observation")

    def show_view(self, view: View) -> None:
        """Show another state or time."""
        content = content_of(view)
        if content != self._content:
            self._content = content
            self._cause = view.reading.cause
            loud = f"Density altitude {content.density_altitude} {content.unit}" if view.trusted else "NO DATA"
            self.setAccessibleDescription(f"{loud}, {' '.join(content.age)}, {content.source}")
            self.update()

    def paint(self, painter: QPainter, letters: Lettering) -> None:
        """Paint all of it."""
        self.paint_card(painter)
        content = self._content
        if content is None:
            return
        sizes, gap, groups = self._fit(content)
        left = _PADDING_PX
        self._paint_loud(painter, letters, left, content, sizes)
        left += self._loud_width(content, sizes)
        start = left
        for group in groups:
            left += gap
            self._separator(painter, left)
            left += min(gap, _PADDING_PX)
            start = left
            for cell in group:
                self._paint_cell(painter, letters, left, cell, sizes)
                left += _cell_width(cell, sizes) + gap
            left -= gap
        age_left = self.width() - _PADDING_PX - _AGE_PX
        self._separator(painter, age_left - 18)
        self._paint_source(letters, start, age_left - 30, content, sizes)
        self._paint_age(painter, letters, age_left, content)

    def _fit(self, content: StripContent) -> tuple[_Sizes, float, tuple[tuple[Cell, ...], ...]]:
        """Choose the largest sizes at which all cells fit, the gap between them, and which of them there is room for.

        In a narrow window what is derived goes first, then rate and peak; what was measured stays.
        """
        room = self.width() - 2 * _PADDING_PX - _AGE_PX - 18
        air, derived, measured = content.cells
        for groups in ((air, derived, measured), (air, measured), (measured,)):
            cells = [cell for group in groups for cell in group]
            for sizes in _SIZES:
                natural = self._loud_width(content, sizes) + sum(_cell_width(cell, sizes) for cell in cells)
                gaps = len(cells) + len(groups) + 1
                gap = (room - natural) / gaps
                if gap >= _GAP_SMALLEST_PX:
                    return sizes, min(gap, _GAP_LARGEST_PX), groups
        return _SIZES[-1], _GAP_SMALLEST_PX, (measured,)

    def _rows(self) -> tuple[float, float, float]:
        """Baselines of label, value and the line below."""
        compact = self.height() < HEIGHT_PX
        return (18.0, 44.0, 66.0) if compact else (22.0, 56.0, 79.0)

    def _loud_width(self, content: StripContent, sizes: _Sizes) -> float:
        label = width_of("last known 88,888 ft at 88:88", sizes.label_px)
        value = width_of("8,888", sizes.loud_px, SEMIBOLD)
        if len(content.density_altitude) > 5:
            value = width_of(content.density_altitude, sizes.loud_px, SEMIBOLD)
        unit = width_of(content.unit + " ±88", sizes.value_px - 2) + 24
        return max(label, value + unit)

    def _separator(self, painter: QPainter, x: float) -> None:
        painter.fillRect(QRectF(round(x), 14, 1, self.height() - 28), QColor(self.colours.hairline))

    def _paint_loud(
        self, painter: QPainter, letters: Lettering, left: float, content: StripContent, sizes: _Sizes
    ) -> None:
        colours = self.colours
        label, _value, below = self._rows()
        letters.text((left, label), "Density altitude", colours.soft_ink, sizes.label_px, MEDIUM)
        if not content.density_altitude:
            box = QRectF(left, label + 9, 176, min(37.0, self.height() - 50.0))
            painter.save()
            painter.setRenderHint(QPainter.RenderHint.Antialiasing)
            painter.setPen(QPen(QColor(colours.soft_ink), 1.4, Qt.PenStyle.DashLine))
            painter.drawRoundedRect(box.adjusted(0.5, 0.5, -0.5, -0.5), 4, 4)
            painter.restore()
            side = min(22.0, box.height() - 8)
            mark = QRectF(box.left() + 10, box.center().y() - side / 2, side, side)
            paint_mark(painter, State.NO_DATA, mark, colours.no_data, colours.card)
            size = 24 if box.height() > 30 else 20
            middle = box.center().y() + size * 0.727 / 2
            letters.text((box.left() + 42, middle), "NO DATA", colours.ink, size, BOLD)
            if content.last_known and box.bottom() + 6 < below:
                letters.text((left, below + 4), content.last_known, colours.soft_ink, sizes.label_px)
            return
        loud_px = min(sizes.loud_px, int((self.height() - label - 12) / 0.727 * 0.88))
        baseline = self.height() - (18.0 if self.height() >= HEIGHT_PX else 12.0)
        if content.compared:
            loud_px, baseline = min(loud_px, 42 if self.height() >= HEIGHT_PX else 34), below - 17
            letters.text((left, below + 4), content.compared, colours.ink, sizes.label_px, SEMIBOLD)
        right = letters.text((left - 3, baseline), content.density_altitude, colours.ink, loud_px, SEMIBOLD)
        size = sizes.value_px - 2
        right = letters.text((right + 10, baseline), content.unit, colours.soft_ink, size)
        letters.text((right + 12, baseline), content.uncertainty, colours.soft_ink, size, MEDIUM)

    def _paint_cell(self, painter: QPainter, letters: Lettering, left: float, cell: Cell, sizes: _Sizes) -> None:
        colours = self.colours
        label, value, below = self._rows()
        letters.text((left, label), cell.label, colours.soft_ink, sizes.label_px, MEDIUM)
        right = letters.text((left, value), cell.value, colours.ink, sizes.value_px, SEMIBOLD)
        if cell.unit:
            letters.text((right + 6, value), cell.unit, colours.soft_ink, sizes.label_px, MEDIUM)
        if cell.below:
            start = left
            if cell.arrow is not None:
                _arrow(painter, QPointF(left + 12, below - 5), cell.arrow, colours.soft_ink)
                start = left + 28
            letters.text((start, below), cell.below, colours.soft_ink, sizes.label_px)

    def _paint_source(
        self, letters: Lettering, left: float, right: float, content: StripContent, sizes: _Sizes
    ) -> None:
        colours = self.colours
        ink, weight = (colours.ink, SEMIBOLD) if content.typed_in else (colours.soft_ink, REGULAR)
        below = self._rows()[2]
        letters.text((left, below), content.source, ink, sizes.label_px, weight, room_px=right - left)

    def _paint_age(self, painter: QPainter, letters: Lettering, left: float, content: StripContent) -> None:
        colours = self.colours
        inverse = content.freshness is Freshness.AGEING
        ink, soft = (colours.card, colours.card) if inverse else (colours.ink, colours.soft_ink)
        if inverse:
            painter.save()
            painter.setRenderHint(QPainter.RenderHint.Antialiasing)
            painter.setPen(Qt.PenStyle.NoPen)
            painter.setBrush(QColor(colours.ink))
            painter.drawRoundedRect(QRectF(left - 9, 3, _AGE_PX + 18, self.height() - 6), 5, 5)
            painter.restore()
        compact = self.height() < HEIGHT_PX
        label, value, bar, below = (17.0, 39.0, 46.0, 66.0) if compact else (22.0, 54.0, 66.0, 88.0)
        letters.text((left, label), content.observed, soft, 13, MEDIUM, room_px=_AGE_PX)
        right = letters.text((left, value), content.age[0], ink, 20 if compact else 24, SEMIBOLD)
        if content.age[1]:
            letters.text((right + 6, value), content.age[1], soft, 13, MEDIUM, room_px=left + _AGE_PX - right - 6)
        painter.save()
        painter.setRenderHint(QPainter.RenderHint.Antialiasing)
        trough = QRectF(left + 0.5, bar + 0.5, _AGE_PX - 1, 6)
        painter.setPen(QPen(QColor(soft if inverse else colours.line), 1))
        painter.drawRoundedRect(trough, 3, 3)
        painter.setPen(Qt.PenStyle.NoPen)
        painter.setBrush(QColor(ink if inverse else colours.accent))
        painter.drawRoundedRect(QRectF(left + 2, bar + 2, max((_AGE_PX - 4) * content.age_share, 0.0), 3), 1.5, 1.5)
        painter.restore()
        notch = left + 2 + (_AGE_PX - 4) * content.ageing_share
        painter.fillRect(QRectF(round(notch), bar - 4, 1, 14), QColor(soft if inverse else colours.line))
        if content.freshness is Freshness.STALE:
            letters.text((left, below), content.stale_at.capitalize(), ink, 13, BOLD, room_px=_AGE_PX)
        else:
            letters.text((left, below), content.trust, ink, 13, SEMIBOLD)
            letters.text((left + _AGE_PX, below), content.stale_at, soft, 13, side="right")


def _cell_width(cell: Cell, sizes: _Sizes) -> float:
    value = max(width_of(cell.value, sizes.value_px, SEMIBOLD), width_of(cell.pattern, sizes.value_px, SEMIBOLD))
    if cell.unit:
        value += 6 + width_of(cell.unit, sizes.label_px, MEDIUM)
    below = width_of(cell.below, sizes.label_px) + (28 if cell.arrow is not None else 0)
    return max(value, below, width_of(cell.label, sizes.label_px, MEDIUM))


def _arrow(painter: QPainter, middle: QPointF, direction: int, colour: str) -> None:
    painter.save()
    painter.setRenderHint(QPainter.RenderHint.Antialiasing)
    painter.translate(middle)
    painter.rotate(-42.0 * direction)
    painter.setPen(QPen(QColor(colour), 1.8))
    painter.drawLine(QPointF(-9, 0), QPointF(7, 0))
    painter.drawPolyline(QPolygonF([QPointF(1.5, -5), QPointF(7.5, 0), QPointF(1.5, 5)]))
    painter.restore()
