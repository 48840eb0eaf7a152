"""The wall view in the main window: entering and leaving it, and the numbers that are remembered for it."""

import math
from collections.abc import Callable
from datetime import datetime, timedelta
from pathlib import Path

from PySide6.QtCore import Qt
from PySide6.QtGui import QKeySequence, QShortcut
from PySide6.QtWidgets import QMainWindow

from airfield_board.errors import UserError
from airfield_board.session.board_state import BoardState
from airfield_board.window.notice_bar import NoticeBar
from airfield_board.window.palette import Scheme
from airfield_board.window.wall_dialog import WallDialog
from airfield_board.window.wall_settings import read_setup, write_setup
from airfield_board.window.wall_size import DEFAULT_SETUP, WORD_ARCMIN, WallSetup, arcmin_of, cap_height_mm, word_px
from airfield_board.window.wall_view import WallView


class WallMode:
    """Whether a window shows its board as on the wall.

    Parameters
    ----------
    window
        Becomes full screen with it; its menu bar hides.
    notice
        Where a file that cannot be written is told.
    path
        Where the numbers are remembered.
    changed
        Called after it was entered or left: another view is to be shown.
    """

    def __init__(self, window: QMainWindow, notice: NoticeBar, path: Path, changed: Callable[[], object]) -> None:
        self._window = window
        self._notice = notice
        self._path = path
        self._changed = changed
        self._dialog: WallDialog | None = None
        self._setup: WallSetup | None = None
        self.view = WallView(self._screen_px)
        self.on = False
        self._escape = QShortcut(QKeySequence(Qt.Key.Key_Escape), window)
        self._escape.setEnabled(False)
        self._escape.activated.connect(self.leave)

    @property
    def setup(self) -> WallSetup:
        """The numbers in use."""
        return self._setup or DEFAULT_SETUP

    def enter(self) -> None:
        """Show the wall view on the whole screen; where its numbers are not known, offer to ask for them."""
        if self.on:
            return
        self.on = True
        self._escape.setEnabled(True)
        self._setup = self._setup or read_setup(self._path)
        self.view.set_setup(self.setup)
        self._window.menuBar().hide()
        self._window.setWindowState(self._window.windowState() | Qt.WindowState.WindowFullScreen)
        self._changed()
        if self._setup is None:
            assumed = DEFAULT_SETUP
            self._notice.say(
                f"The wall view takes the screen for {assumed.diagonal_in:g} in, read from {assumed.distance_m:g} m.",
                action="Set both …",
                act=self.ask,
            )

    def leave(self) -> None:
        """Show the pages again, in the window as it was."""
        if not self.on:
            return
        self.on = False
        self._escape.setEnabled(False)
        self._window.menuBar().show()
        self._window.setWindowState(self._window.windowState() & ~Qt.WindowState.WindowFullScreen)
        self._changed()

    def toggle(self) -> None:
        """Enter or leave."""
        if self.on:
            self.leave()
        else:
            self.enter()

    def ask(self) -> None:
        """Ask for the screen's diagonal and the distance."""
        if self._dialog is not None:
            return
        self._setup = self._setup or read_setup(self._path)
        self._dialog = WallDialog(self.setup, self._tell, self._window)
        self._dialog.chosen.connect(self._take)
        self._dialog.finished.connect(self._closed)
        self._dialog.open()

    def show_state(self, state: BoardState, now: datetime, watchdog: timedelta) -> None:
        """Show a state at a time, where the wall view is on."""
        if self.on:
            self.view.set_watchdog(watchdog)
            self.view.show_state(state, now)

    def set_scheme(self, scheme: Scheme) -> None:
        """Take another look."""
        self.view.set_scheme(scheme)

    def _screen_px(self) -> tuple[int, int]:
        size = self._window.screen().size()
        return size.width(), size.height()

    def _take(self, setup: WallSetup) -> None:
        self._setup = setup
        self.view.set_setup(setup)
        try:
            write_setup(self._path, setup)
        except UserError as error:
            self._notice.say(str(error))

    def _closed(self) -> None:
        self._dialog = None

    def _tell(self, setup: WallSetup) -> str:
        screen_px = self._screen_px()
        size = word_px(setup, screen_px)
        arcmin = math.floor(arcmin_of(size, setup, screen_px) * 10) / 10
        mm = cap_height_mm(setup.distance_m)
        return (
            f"To be read at {setup.distance_m:g} m a state's word needs capitals {mm:.1f} mm high "
            f"({WORD_ARCMIN:g} arcmin). "
            f"On this screen of {screen_px[0]} by {screen_px[1]} pixels that is type of {size} px, {arcmin:.1f} arcmin."
        )
