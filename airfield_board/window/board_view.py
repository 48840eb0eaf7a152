"""The whole view: header, strip, the pages, the status changes, the caution, and the frame around it all."""

from dataclasses import replace
from datetime import datetime, timedelta
from enum import IntEnum
from itertools import pairwise

from PySide6.QtCore import Signal
from PySide6.QtGui import QColor, QPainter, QResizeEvent
from PySide6.QtWidgets import QStackedWidget, QWidget

from airfield_board.session.board_state import BoardState
from airfield_board.window import changes_strip, formatting, header, message_line, strip
from airfield_board.window.board_page import BoardPage, density_of, room_wanted
from airfield_board.window.canvas import Canvas
from airfield_board.window.changes_strip import ChangesStrip
from airfield_board.window.fonts import MEDIUM, SEMIBOLD
from airfield_board.window.frame_overlay import BAND_PX, FrameOverlay, band_of
from airfield_board.window.header import Header
from airfield_board.window.lettering import Lettering
from airfield_board.window.margin_page import MarginPage
from airfield_board.window.message_line import MessageLine, loud_messages
from airfield_board.window.palette import Palette, Scheme, palette_for
from airfield_board.window.reading import Frame, View, view_of
from airfield_board.window.row_layout import Density
from airfield_board.window.strip import ObservationStrip

SMALLEST_PX = (960, 460)
_MARGIN_PX = 16
_GAP_PX = 8
_CAUTION_PX = 27
_QUIET_FRAMES = (Frame.SETTINGS_WAITING,)
"""Frames that leave the header as it is."""


class PageName(IntEnum):
    """The pages by their place."""

    BOARD = 0
    MARGIN = 1


PAGE_TITLES = ("Board", "Margin")


class BoardView(Canvas):
    """Shows one `BoardState` at one time.

    Call `show_state` with each new state, and with the last one and the clock's time once a second.

    Signals
    -------
    page_asked(int)
        A page was chosen in the header; answer with `set_page`.
    selected(str)
        Key of the row pointed at; empty for none.
    acknowledge_asked(object)
        Numbers of the changes to acknowledge, a tuple.
    poll_asked(), type_in_asked()
        From the card that stands where there is no current observation.
    details_asked(object)
        Keys of the operations whose details are wanted, a tuple.
    messages_asked()
        The line of the loudest message was pressed.
    """

    page_asked = Signal(int)
    selected = Signal(str)
    acknowledge_asked = Signal(object)
    poll_asked = Signal()
    type_in_asked = Signal()
    details_asked = Signal(object)
    messages_asked = Signal()

    def __init__(self, parent: QWidget | None = None, *, watchdog: timedelta | None = None) -> None:
        """Make an empty view.

        Parameters
        ----------
        watchdog
            Longest time between a state and now; beyond it the view shows NO DATA by itself. None: never.
        """
        super().__init__(parent)
        self.setMinimumSize(*SMALLEST_PX)
        self._scheme = Scheme.LIGHT
        self._watchdog = watchdog
        self._view: View | None = None
        self._void_after: datetime | None = None
        self._as_of = False
        self.header = Header(PAGE_TITLES, self)
        self.strip = ObservationStrip(self)
        self.message = MessageLine(self)
        self.pages = QStackedWidget(self)
        self.board = BoardPage()
        self.margin = MarginPage()
        self.changes = ChangesStrip(self)
        self.overlay = FrameOverlay(self)
        self.pages.addWidget(self.board)
        self.pages.addWidget(self.margin)
        self.header.page_asked.connect(self.page_asked)
        self.board.selected.connect(self.selected)
        self.margin.selected.connect(self.selected)
        self.changes.acknowledge_asked.connect(self.acknowledge_asked)
        self.message.messages_asked.connect(self.messages_asked)
        for page in (self.board, self.margin):
            page.poll_asked.connect(self.poll_asked)
            page.type_in_asked.connect(self.type_in_asked)
            page.rows.details_asked.connect(self.details_asked)
        self._order_parts()
        self._recolour()

    @property
    def view(self) -> View | None:
        """What is shown; None before the first state."""
        return self._view

    def show_state(self, state: BoardState, now: datetime) -> None:
        """Show a state at a time; ``now`` may be later than the state, and age and staleness follow it."""
        before = self._view
        self._view = view = view_of(state, now, self._watchdog)
        if before is None or before.frames != view.frames or before.trusted != view.trusted:
            self._recolour()
        if before is None or _outline(before) != _outline(view):
            self._arrange()
        self.header.show_view(view)
        self.strip.show_view(view)
        self.message.show_view(view)
        self.changes.show_view(view)
        self.overlay.show_view(view)
        self._show_page()

    def set_watchdog(self, watchdog: timedelta | None) -> None:
        """Set the longest time between a state and now."""
        self._watchdog = watchdog

    def set_scheme(self, scheme: str) -> None:
        """Take the look ``light`` or ``dark``."""
        self._scheme = Scheme(scheme)
        self._recolour()

    def set_page(self, page: int) -> None:
        """Show another page, by its place."""
        self.pages.setCurrentIndex(page)
        self.header.set_page(page)
        self._show_page()

    def set_picture(self, void_after: datetime | None) -> None:
        """Make this a picture: no buttons, and the times from which and until which it holds.

        Parameters
        ----------
        void_after
            None where it shows NO DATA and so holds for nothing.
        """
        self._as_of, self._void_after = True, void_after
        self.changes.set_interactive(False)
        for page in (self.board, self.margin):
            page.card.set_interactive(False)
        self.margin.search.hide()
        self.margin.picker.set_interactive(False)
        self.header.set_picture()
        self.update()

    def ask_details(self) -> bool:
        """Ask for the details of the row pointed at on the page that is seen; return whether there is one."""
        page = self.pages.currentWidget()
        return isinstance(page, BoardPage | MarginPage) and page.rows.ask_details()

    def ensure_plot(self) -> None:
        """Make the plot of the page that is seen now, rather than after the first painting."""
        (self.board, self.margin)[self.pages.currentIndex()].ensure_plot()

    def _order_parts(self) -> None:
        """Let Tab go through the parts as they stand, from top to bottom."""
        board, margin = self.board, self.margin
        parts = (
            self.header,
            self.message,
            *(board.card, board.rows),
            *(margin.card, margin.rows, margin.search, margin.picker),
            self.changes,
        )
        for before, after in pairwise(parts):
            QWidget.setTabOrder(before, after)

    def _show_page(self) -> None:
        """Give the view to the page that is seen; the other one gets it when it is."""
        if self._view is not None:
            (self.board, self.margin)[self.pages.currentIndex()].show_view(self._view)

    def _recolour(self) -> None:
        colours = colours_of(self._scheme, self._view)
        self.set_colours(colours)
        for part in (self.header, self.strip, self.message, self.board, self.margin, self.changes, self.overlay):
            part.set_colours(colours)

    def _arrange(self) -> None:
        inset = BAND_PX if self._view is not None and self._view.frames else 0
        width, height = self.width() - 2 * inset, self.height() - 2 * inset
        left, top = inset + _MARGIN_PX, inset
        inner = width - 2 * _MARGIN_PX
        self.header.setGeometry(inset, top, width, header.HEIGHT_PX)
        top += header.HEIGHT_PX + _GAP_PX
        compact = self._compact(height)
        strip_px = strip.COMPACT_HEIGHT_PX if compact else strip.HEIGHT_PX
        changes_px = changes_strip.COMPACT_HEIGHT_PX if compact else changes_strip.HEIGHT_PX
        self.strip.setGeometry(left, top, inner, strip_px)
        top += strip_px + _GAP_PX
        if self._view is not None and loud_messages(self._view.state.messages):
            self.message.setGeometry(left, top - 2, inner, message_line.HEIGHT_PX)
            top += message_line.HEIGHT_PX + _GAP_PX - 4
        bottom = inset + height - _CAUTION_PX - changes_px
        self.changes.setGeometry(left, bottom, inner, changes_px)
        self.pages.setGeometry(left, top, inner, bottom - _GAP_PX - top)
        self.overlay.setGeometry(0, 0, self.width(), self.height())
        self.overlay.raise_()
        self.update()

    def _compact(self, height_px: int) -> bool:
        """Whether the rows need the height of strip and changes: to be listed at all, or to keep two lines each."""
        if self._view is None:
            return False
        rows = len(self._view.state.operations)
        taken = header.HEIGHT_PX + strip.HEIGHT_PX + changes_strip.HEIGHT_PX + _CAUTION_PX + 3 * _GAP_PX
        if loud_messages(self._view.state.messages):
            taken += message_line.HEIGHT_PX + _GAP_PX - 4
        page_px = height_px - taken
        gained_px = (
            strip.HEIGHT_PX - strip.COMPACT_HEIGHT_PX + changes_strip.HEIGHT_PX - changes_strip.COMPACT_HEIGHT_PX
        )
        tight, roomy = (density_of(self._view, px) for px in (page_px, page_px + gained_px))
        return rows * 14 > page_px - 54 or (tight is not roomy and roomy is Density.COMFORTABLE)

    def resizeEvent(self, event: QResizeEvent) -> None:
        """Place all parts anew."""
        super().resizeEvent(event)
        self._arrange()

    def paint(self, painter: QPainter, letters: Lettering) -> None:
        """Paint the page's ground and the caution."""
        colours = self.colours
        painter.fillRect(self.rect(), QColor(colours.page))
        view = self._view
        inset = BAND_PX if view is not None and view.frames else 0
        baseline = self.height() - inset - 9
        at = (self.width() / 2, baseline)
        letters.text(at, formatting.CAUTION, colours.soft_ink, 13, MEDIUM, side="centre")
        if self._as_of and view is not None:
            stamp = formatting.stamp(view.now, view.zone)
            letters.text((inset + _MARGIN_PX, baseline), f"as of {stamp}", colours.ink, 13, SEMIBOLD)
            until = self._void_after
            void = f"void after {formatting.short_stamp(until, view.zone)}" if until is not None else "void: NO DATA"
            right = self.width() - inset - _MARGIN_PX
            letters.text((right, baseline), void, colours.ink, 13, SEMIBOLD, side="right")


def _outline(view: View) -> tuple[object, ...]:
    """All that the places of the parts depend on."""
    return bool(view.frames), room_wanted(view), bool(loud_messages(view.state.messages))


def colours_of(scheme: Scheme, view: View | None) -> Palette:
    """Return the colours of a view: grey without trust, and with the frame's header where there is a loud frame."""
    colours = palette_for(scheme, grey=view is not None and not view.trusted)
    if view is None or not view.frames or view.frames[0] in _QUIET_FRAMES:
        return colours
    band = band_of(view.frames[0], colours)
    return replace(colours, header=band.ground, on_header=band.ink, soft_on_header=band.ink)
