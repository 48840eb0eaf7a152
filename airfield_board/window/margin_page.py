"""The Margin page: how far up to eight operations are from their own limits, over the day."""

from dataclasses import replace
from datetime import datetime, timedelta
from typing import TYPE_CHECKING

from PySide6.QtCore import QRectF, QSize, Qt, QTimer, Signal
from PySide6.QtGui import QColor, QKeyEvent, QPainter, QResizeEvent, QShowEvent
from PySide6.QtWidgets import QLineEdit, QWidget

from airfield_board.limits.states import State
from airfield_board.session.board_state import BoardState, OperationLine
from airfield_board.window import formatting
from airfield_board.window.axes import AltitudeAxis, TimeAxis, altitude_marks, day_bounds, hour_marks
from airfield_board.window.canvas import Canvas
from airfield_board.window.day_axis import NOW_PX, paint_hours, paint_now
from airfield_board.window.day_scene import stretches_of
from airfield_board.window.fonts import MEDIUM, SEMIBOLD, font
from airfield_board.window.lettering import Lettering, baseline_for_middle, width_of
from airfield_board.window.margin_scene import (
    CHOSEN_AT_MOST,
    MarginScene,
    first_choice,
    line_of,
    lowest_margin,
    margin_range,
    near_band_ft,
    plottable,
)
from airfield_board.window.no_data_card import NoDataCard
from airfield_board.window.operation_picker import Choice, OperationPicker
from airfield_board.window.palette import Palette
from airfield_board.window.reading import Cause, View
from airfield_board.window.row_layout import PITCH_SMALLEST_PX, STANDARD_FROM_PX, Density
from airfield_board.window.row_painter import GUTTER_PX, PLOT_SMALLEST_PX, columns_for
from airfield_board.window.row_panel import Headings, RowPanel
from airfield_board.window.row_words import RowWords, tip_of, words_of

if TYPE_CHECKING:
    from airfield_board.window.margin_plot import MarginPlot

AXIS_PX = 66
PLOT_TOP_PX = 44
TIME_AXIS_PX = 30
_PICKER_TITLE_PX = 48
_MARGINS_PX = 32
_PICKER_PX = 140
_PICKER_SMALLEST_PX = 74
_ROW_PX = 44
_ROW_SMALLEST_PX = 37


class MarginPage(Canvas):
    """Margins over the day, the rows they belong to, and the list to choose from.

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
        self.picker = OperationPicker(self)
        self.search = QLineEdit(self)
        self._view: View | None = None
        self._starter = QTimer(self)
        self._starter.setSingleShot(True)
        self._starter.timeout.connect(self.ensure_plot)
        self._shown: tuple[BoardState, datetime, Cause, QSize] | None = None
        self._keys: tuple[str, ...] | None = None
        self._rows_height = 0
        self._scene: MarginScene | None = None
        self._plot: MarginPlot | None = None
        self.search.setPlaceholderText("Find an operation")
        self.search.setAccessibleName("Find an operation")
        self.search.setFont(font(13))
        self.search.textChanged.connect(self._on_find)
        self.picker.toggled.connect(self.toggle)
        self.rows.selected.connect(self._on_selected)
        self.card.poll_asked.connect(self.poll_asked)
        self.card.type_in_asked.connect(self.type_in_asked)
        self.rows.lower()
        self.rows.set_empty_words("None chosen")
        self._style_find()

    @property
    def keys(self) -> tuple[str, ...]:
        """Keys of the operations shown."""
        if self._keys is not None or self._view is None:
            return self._keys or ()
        return first_choice(self._view.state.operations, self._view.state.curve)

    def set_colours(self, colours: Palette) -> None:
        """Take other colours, in all parts."""
        super().set_colours(colours)
        for part in (self.rows, self.card, self.picker):
            part.set_colours(colours)
        self._style_find()
        self._show_plot()

    def toggle(self, key: str) -> None:
        """Show an operation, or show it no more; more than eight are not taken."""
        keys = self.keys
        if key in keys:
            self._keys = tuple(other for other in keys if other != key)
        elif len(keys) < CHOSEN_AT_MOST:
            self._keys = (*keys, key)
        if self._view is not None:
            self._show(self._view)

    def show_view(self, view: View) -> None:
        """Show another state or time; nothing here changes within a minute but by the state or its reading."""
        shown = (view.state, view.now.replace(second=0, microsecond=0), view.reading.cause, self.size())
        self._view = view
        if self._shown is not None and self._shown[0] is view.state and self._shown[1:] == shown[1:]:
            return
        self._shown = shown
        self._show(view)

    def _show(self, view: View) -> None:
        if self._keys is None and view.trusted:
            # Fixed at the first trustworthy state, so that the page does not change under the eyes.
            self._keys = first_choice(view.state.operations, view.state.curve) or None
        keys = self.keys
        chosen = [row for row in view.rows if row.key in keys]
        self._arrange(view, chosen)
        words = [self._words_of(row, view) for row in chosen]
        change = formatting.change_heading(trusted=view.trusted)
        headings = Headings(margin=f"Margin, {view.column_unit}", change=change, last="Lowest today")
        tips = [tip_of(row, view) for row in chosen]
        self.rows.show_rows(words, tips, headings, level=None)
        self.rows.choose_columns(self._rows_height, self.width() + _MARGINS_PX)
        self._show_choices(view)
        self.card.show_view(view)
        self._place_card()

    def _words_of(self, row: OperationLine, view: View) -> RowWords:
        """Put a row into words, with the lowest margin of the day in the last column."""
        words = words_of(row, view)
        lowest = lowest_margin(row, view.state.curve) if view.trusted else None
        last, below = formatting.DASH, ""
        if lowest is not None and row.shown is not None:
            last = formatting.margin_cell(replace(row.shown, margin=lowest[0]), view.column_unit)
            below = f"at {formatting.clock(lowest[1], view.zone)}"
        scene = self._scene
        place_ft = None
        if scene is not None:
            place_ft = next((drawn.now_ft for drawn in scene.lines if drawn.key == row.key), None)
        axis_ft = place_ft if row.state is not State.NO_DATA else None
        return replace(words, last=last, last_below=below, axis_ft=axis_ft, place_ft=place_ft, temporary="")

    def _show_choices(self, view: View) -> None:
        keys, needle = self.keys, self.search.text().strip().casefold()
        choices = []
        for row in view.rows:
            text = formatting.full_name(row)
            if needle and needle not in text.casefold():
                continue
            margin = formatting.margin_cell(row.shown, view.column_unit)
            drawable = plottable(row)
            reason = row.shown.reason if row.shown is not None else "no limit in force"
            note = "" if drawable else reason or margin
            chosen = row.key in keys and drawable
            choices.append(
                Choice(
                    key=row.key,
                    state=row.state,
                    text=text,
                    margin=margin,
                    note=note,
                    chosen=chosen,
                )
            )
        self.picker.show_choices(tuple(choices))

    def _arrange(self, view: View, chosen: list[OperationLine]) -> None:
        """Give all parts their places and their common axes, and make the scene."""
        count = max(len(chosen), 1)
        space = self.height() - 32 - _PICKER_TITLE_PX - _PICKER_PX
        row_px = min(max(space // count, _ROW_SMALLEST_PX), _ROW_PX)
        density = Density.COMFORTABLE
        if row_px * count > space + _PICKER_PX - _PICKER_SMALLEST_PX:
            # So low a page has rows of one line, and the list of operations scrolls.
            density = Density.STANDARD
            row_px = min(max((space + _PICKER_PX - _PICKER_SMALLEST_PX) // count, PITCH_SMALLEST_PX), STANDARD_FROM_PX)
        rows_height = 32 + row_px * count + 16
        columns = columns_for(density, self.width() + _MARGINS_PX)
        rows_width = int(GUTTER_PX + columns.width)
        plot_width = max(self.width() - AXIS_PX - rows_width, PLOT_SMALLEST_PX)
        right_width = self.width() - AXIS_PX - plot_width
        self.rows.setGeometry(AXIS_PX + plot_width, 0, right_width, self.height())
        left = AXIS_PX + plot_width + GUTTER_PX
        self.search.setGeometry(self.width() - 16 - 196, rows_height + 12, 196, 26)
        top = rows_height + _PICKER_TITLE_PX
        self.picker.setGeometry(left, top, self.width() - left - 16, self.height() - top - 8)
        bottom = float(self.height() - TIME_AXIS_PX)
        start, end = day_bounds(view.state, view.now, view.zone)
        time = TimeAxis(start=start, end=end, left_px=0.0, right_px=float(plot_width))
        stretches = stretches_of(view.state.curve, time)
        conditions = view.state.conditions if view.trusted else None
        lines = []
        for row in chosen:
            now_ft = None
            if conditions is not None and row.shown is not None:
                spread_ft = conditions.uncertainty_ft if row.shown.guarded else 0.0
                now_ft = conditions.density_altitude_ft + spread_ft
            lines.append(line_of(row, stretches, time, now_ft))
        bands = {near_band_ft(row.shown) for row in chosen if row.shown is not None}
        near_ft = bands.pop() if len(bands) == 1 else None
        low, high = margin_range(lines, near_ft or 0.0)
        per_hour_px = plot_width / ((end - start) / timedelta(hours=1))
        every_h = next((step for step in (3, 6) if step * per_hour_px >= 56), 12)
        axis = AltitudeAxis(low_ft=low, high_ft=high, top_px=PLOT_TOP_PX, bottom_px=bottom)
        self._rows_height = rows_height
        self.rows.set_axis(axis, rows_height - 8.0)
        scene = MarginScene(
            margin=replace(axis, top_px=0.0, bottom_px=bottom - PLOT_TOP_PX),
            time=time,
            hours=tuple(hour_marks(start, end, view.zone, every_h)),
            lines=tuple(lines),
            near_ft=near_ft,
            observed=view.state.observation.time if view.state.observation is not None else None,
            now=view.now.replace(second=0, microsecond=0),
            gap=not view.trusted,
            unit=view.column_unit,
        )
        self._scene = scene
        if self._plot is not None:
            self._plot.setGeometry(AXIS_PX, PLOT_TOP_PX, plot_width, int(bottom - PLOT_TOP_PX))
        self._show_plot()
        self.update()

    def ensure_plot(self) -> None:
        """Make the plot now, rather than after the first painting."""
        if self._plot is None:
            from airfield_board.window.margin_plot import MarginPlot

            self._plot = MarginPlot(self)
            self._plot.lower()
            if self._view is not None:
                self._show(self._view)
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

    def _show_plot(self) -> None:
        if self._plot is not None and self._scene is not None:
            self._plot.show_scene(self._scene, self.colours, self.rows.chosen)

    def _place_card(self) -> None:
        size = self.card.sizeHint()
        left = max(self.rows.x() - size.width() - 12, AXIS_PX + 8)
        # A narrow plot is covered, and the leaders beside it; the rows never are.
        left = max(min(left, self.rows.x() + GUTTER_PX - 8 - size.width()), 4)
        self.card.setGeometry(left, PLOT_TOP_PX + 8, size.width(), size.height())
        self.card.raise_()

    def _style_find(self) -> None:
        colours = self.colours
        self.search.setStyleSheet(
            f"QLineEdit {{ background: {colours.card}; color: {colours.ink}; border: 1px solid {colours.line};"
            f" border-radius: 4px; padding: 1px 7px; }} QLineEdit:focus {{ border: 2px solid {colours.accent}; }}"
        )

    def _on_find(self, _text: str) -> None:
        if self._view is not None:
            self._show_choices(self._view)

    def start_search(self) -> None:
        """Put the keyboard into the search field."""
        self.search.setFocus(Qt.FocusReason.ShortcutFocusReason)
        self.search.selectAll()

    def keyPressEvent(self, event: QKeyEvent) -> None:
        """From the search field Esc clears it, Enter and Down go to the list."""
        if self.search.hasFocus() and event.key() == Qt.Key.Key_Escape:
            self.search.clear()
        elif self.search.hasFocus() and event.key() in (Qt.Key.Key_Return, Qt.Key.Key_Enter, Qt.Key.Key_Down):
            self.picker.setFocus(Qt.FocusReason.TabFocusReason)
        else:
            super().keyPressEvent(event)

    def _on_selected(self, key: str) -> None:
        self._show_plot()
        self.selected.emit(key)

    def paint(self, painter: QPainter, letters: Lettering) -> None:
        """Paint the card and the axes; plot, rows and list paint themselves."""
        self.paint_card(painter)
        view, scene, colours = self._view, self._scene, self.colours
        if view is None or scene is None:
            return
        title = f"Margin to own limit, {scene.unit}"
        if 14 + width_of(title, 13, MEDIUM) + 12 + NOW_PX > self.rows.x() + 46.0:
            title = f"Margin, {scene.unit}"
        letters.text((14, 23), title, colours.soft_ink, 13, MEDIUM)
        axis = scene.margin
        for value_ft, text in altitude_marks(axis, scene.unit, sign=True):
            y = PLOT_TOP_PX + axis.px(value_ft)
            if self.card.covers(AXIS_PX - 10, y):
                continue
            painter.fillRect(QRectF(AXIS_PX - 6, round(y), 6, 1), QColor(colours.line))
            weight = SEMIBOLD if value_ft == 0 else 400
            ink = colours.ink if value_ft == 0 else colours.soft_ink
            letters.text((AXIS_PX - 10, baseline_for_middle(y, 13)), text, ink, 13, weight, side="right")
        bottom = PLOT_TOP_PX + axis.bottom_px
        painter.fillRect(QRectF(AXIS_PX, bottom, scene.time.right_px, 1), QColor(colours.line))
        right = self.rows.x() + 24.0
        paint_hours(painter, letters, colours, scene.time, scene.hours, view, (AXIS_PX, bottom, right))
        free_left = 14 + width_of(title, 13, MEDIUM) + 12
        paint_now(painter, letters, colours, scene.time, view, (AXIS_PX, PLOT_TOP_PX, free_left, self.rows.x() + 46.0))
        self._paint_picker_title(painter, letters)

    def _paint_picker_title(self, painter: QPainter, letters: Lettering) -> None:
        colours, view = self.colours, self._view
        if view is None:
            return
        left, top = float(self.picker.x()), float(self._rows_height)
        painter.fillRect(QRectF(left, top, self.width() - left - 16, 1), QColor(colours.hairline))
        baseline = top + 30
        end = letters.text((left, baseline), "Operations shown", colours.ink, 15, SEMIBOLD)
        count = f"{len(self.keys)} of {len(view.state.operations)}, at most {CHOSEN_AT_MOST}"
        letters.text((end + 16, baseline), count, colours.soft_ink, 13)
