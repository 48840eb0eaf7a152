"""The board for a screen on the wall: nothing to press, and words as large as the farthest reader needs."""

from collections.abc import Callable
from datetime import datetime, timedelta

from PySide6.QtCore import QRectF, Qt
from PySide6.QtGui import QColor, QPainter, QPen, QResizeEvent
from PySide6.QtWidgets import QWidget

from airfield_board.session.board_state import BoardState, Mode
from airfield_board.window import formatting, wall_foot, wall_header
from airfield_board.window.board_view import colours_of
from airfield_board.window.canvas import Canvas
from airfield_board.window.fonts import BOLD, MEDIUM, SEMIBOLD
from airfield_board.window.frame_overlay import FrameOverlay
from airfield_board.window.lettering import Lettering, baseline_for_middle, width_of
from airfield_board.window.message_line import loud_messages
from airfield_board.window.palette import Scheme
from airfield_board.window.reading import View, view_of
from airfield_board.window.wall_foot import WallFoot, WallMessage
from airfield_board.window.wall_header import WallHeader
from airfield_board.window.wall_rows import WallRows
from airfield_board.window.wall_size import (
    DEFAULT_SETUP,
    WORD_ARCMIN,
    WallSetup,
    arcmin_of,
    reading_distance_m,
    word_px,
)

DRAWN_FOR_PX = (1920, 1080)
_BAND_PX = 32.0
_BAND_WORD_PX = 24
_SIDE_PX = 24.0
_GAP_PX = 8.0
_CAUTION_PX = 38.0


class WallView(Canvas):
    """Shows one `BoardState` at one time, for the setup of a screen on the wall.

    Call `show_state` with each new state, and with the last one and the clock's time once a second.

    Parameters
    ----------
    screen_px
        Asks how many of this widget's pixels the whole screen has, across and down.
    watchdog
        Longest time between a state and now; beyond it the view shows NO DATA by itself. None: never.
    """

    def __init__(
        self,
        screen_px: Callable[[], tuple[int, int]],
        parent: QWidget | None = None,
        *,
        watchdog: timedelta | None = None,
    ) -> None:
        super().__init__(parent)
        self._screen_px = screen_px
        self._watchdog = watchdog
        self._scheme = Scheme.LIGHT
        self._setup = DEFAULT_SETUP
        self._view: View | None = None
        self._scale = 1.0
        self.header = WallHeader(self)
        self.message = WallMessage(self)
        self.rows = WallRows(self)
        self.foot = WallFoot(self)
        self.overlay = FrameOverlay(self)
        self.overlay.hide()
        self.setCursor(Qt.CursorShape.BlankCursor)
        self._recolour()

    @property
    def view(self) -> View | None:
        """What is shown; None before the first state."""
        return self._view

    @property
    def word_arcmin(self) -> float | None:
        """Angle that the state's word fills for the farthest reader; None before anything was shown."""
        plan = self.rows.plan
        return arcmin_of(plan.word_px, self._setup, self._screen_px()) if plan is not None else None

    def set_setup(self, setup: WallSetup) -> None:
        """Take another screen or distance."""
        self._setup = setup
        self._arrange()

    def set_watchdog(self, watchdog: timedelta | None) -> None:
        """Set the longest time between a state and now."""
        self._watchdog = watchdog

    def set_scheme(self, scheme: str) -> None:
        """Take the look ``light`` or ``dark``."""
        self._scheme = Scheme(scheme)
        self._recolour()

    def show_state(self, state: BoardState, now: datetime) -> None:
        """Show a state at a time; ``now`` may be later than the state, and age and staleness follow it."""
        before, self._view = self._view, view_of(state, now, self._watchdog)
        view, noted = self._view, self._note()
        if before is None or before.frames != view.frames or before.trusted != view.trusted:
            self._recolour()
        if before is None or _outline(before) != _outline(view):
            self._arrange()
        self.header.show_view(view)
        self.message.show_view(view)
        self.rows.show_view(view)
        self.foot.show_view(view)
        self.overlay.show_view(view)
        if before is None or _chips(before) != _chips(view) or noted != self._note():
            self.update()

    def ensure_plot(self) -> None:
        """Make the plot now, rather than after the first painting."""
        self.rows.ensure_plot()

    def resizeEvent(self, event: QResizeEvent) -> None:
        """Place all parts anew."""
        super().resizeEvent(event)
        self._arrange()

    def _recolour(self) -> None:
        colours = colours_of(self._scheme, self._view)
        self.set_colours(colours)
        for part in (self.header, self.message, self.rows, self.foot, self.overlay):
            part.set_colours(colours)

    def _inset(self) -> int:
        return round(_BAND_PX * self._scale) if self._view is not None and self._view.frames else 0

    def _arrange(self) -> None:
        self._scale = size = min(self.width() / DRAWN_FOR_PX[0], self.height() / DRAWN_FOR_PX[1])
        for part in (self.header, self.message, self.foot):
            part.set_scale(size)
        self.overlay.set_band(round(_BAND_PX * size), max(round(_BAND_WORD_PX * size), 1))
        inset, side, gap = self._inset(), round(_SIDE_PX * size), round(_GAP_PX * size)
        width, bottom = self.width() - 2 * inset, self.height() - inset - round(_CAUTION_PX * size)
        header_px, foot_px = round(wall_header.HEIGHT_PX * size), round(wall_foot.HEIGHT_PX * size)
        self.header.setGeometry(inset, inset, width, header_px)
        top, left, inner = inset + header_px + gap, inset + side, width - 2 * side
        if self._view is not None and loud_messages(self._view.state.messages):
            message_px = round(wall_foot.MESSAGE_PX * size)
            self.message.setGeometry(left, top, inner, message_px)
            top += message_px + gap
        self.foot.setGeometry(left, bottom - foot_px, inner, foot_px)
        self.rows.setGeometry(left, top, inner, max(bottom - foot_px - gap - top, 1))
        self.rows.set_size(size, word_px(self._setup, self._screen_px()))
        self.overlay.setGeometry(0, 0, self.width(), self.height())
        self.overlay.raise_()
        self.update()

    def paint(self, painter: QPainter, letters: Lettering) -> None:
        """Paint the page's ground, and in the last line the caution between what the board is fed with and a note."""
        colours, size = self.colours, self._scale
        painter.fillRect(self.rect(), QColor(colours.page))
        inset, words = self._inset(), max(round(25 * size), 1)
        middle = self.height() - inset - _CAUTION_PX * size / 2
        width = width_of(formatting.CAUTION, words, MEDIUM)
        at = (self.width() / 2, baseline_for_middle(middle, words))
        letters.text(at, formatting.CAUTION, colours.soft_ink, words, MEDIUM, side="centre")
        edge = inset + _SIDE_PX * size
        room = (self.width() - width) / 2 - edge - 20 * size
        if self._view is not None:
            self._paint_chips(painter, letters, self._view, (edge, middle, room))
        note = self._note()
        small = max(round(20 * size), 1)
        if note:
            right = (self.width() - edge, baseline_for_middle(middle, small))
            letters.text(right, note, colours.ink, small, SEMIBOLD, side="right", room_px=room)

    def _note(self) -> str:
        """Say where the state's words are smaller than they should be for the distance that was given."""
        plan, screen_px = self.rows.plan, self._screen_px()
        if plan is None or (self.word_arcmin or 0.0) >= WORD_ARCMIN - 0.05:
            return ""
        near_m = reading_distance_m(plan.word_px, self._setup, screen_px)
        return f"Words too small for {self._setup.distance_m:g} m: read from {int(near_m * 10) / 10:g} m"

    def _paint_chips(
        self, painter: QPainter, letters: Lettering, view: View, place: tuple[float, float, float]
    ) -> None:
        """Paint what the board is fed with, in the largest size at which it fits."""
        left, middle, room = place
        size, chips = self._scale, _chips(view)
        gap, pad = 10 * size, 9 * size
        words = max(round(20 * size), 1)
        while words > 1 and sum(width_of(chip, words, BOLD) + 2 * pad + gap for chip in chips) - gap > room:
            words -= 1
        colours, height = self.colours, 30 * size
        for chip in chips:
            box = QRectF(left, middle - height / 2, width_of(chip, words, BOLD) + 2 * pad, height)
            painter.save()
            painter.setRenderHint(QPainter.RenderHint.Antialiasing)
            painter.setPen(QPen(QColor(colours.soft_ink), 1.5 * size))
            painter.drawRoundedRect(box, 5 * size, 5 * size)
            painter.restore()
            at = (box.left() + pad, baseline_for_middle(middle, words))
            letters.text(at, chip, colours.ink, words, BOLD)
            left = box.right() + gap


def _chips(view: View) -> tuple[str, ...]:
    """Return what stands in words beside the frame: the other frames, LIVE, TYPED IN, an invented field."""
    observation = view.state.observation
    chips = [frame.value for frame in view.frames[1:]]
    if view.live:
        chips.append("LIVE")
    elif observation is not None and observation.initials:
        chips.append("TYPED IN")
    if view.state.mode is Mode.DEMO:
        chips.append("INVENTED FIELD")
    return tuple(chips)


def _outline(view: View) -> tuple[object, ...]:
    """All that the places of the parts depend on."""
    return bool(view.frames), bool(loud_messages(view.state.messages))
