"""The window's menus and keys."""

from collections.abc import Callable
from functools import partial
from typing import TYPE_CHECKING

from PySide6.QtCore import QSize
from PySide6.QtGui import QAction, QActionGroup, QKeySequence
from PySide6.QtWidgets import QMenu

from airfield_board.session.board_state import BoardState
from airfield_board.window.board_view import SMALLEST_PX
from airfield_board.window.text_size import TEXT_SIZES_PERCENT, TextSize
from airfield_board.window.theme import SchemeChoice

if TYPE_CHECKING:
    from airfield_board.window.main_window import MainWindow

KEYS = (
    ("1, 2", "Board page, Margin page"),
    ("D", "details of the row that is pointed at"),
    ("/", "find an operation on the Margin page"),
    ("A", "acknowledge the focused status change, or the newest"),
    ("Shift+A", "acknowledge all"),
    ("P", "read the source now"),
    ("E", "type in an observation"),
    ("M", "messages, and the rows that were not used"),
    ("F11", "wall view, on the whole screen, and back"),
    ("Shift+F11", "the wall view's screen and viewing distance"),
    ("Ctrl+O", "open another airfield's profile"),
    ("F1, ?", "this sheet"),
)
"""Which key does what, in words."""


class Menus:
    """What the menus of a window hold; every entry works by its key too, where the menu is hidden.

    Parameters
    ----------
    window
        Whose menu bar it fills.
    choice
        The look that is ticked first.
    replayable
        Whether there is a demo to play again.
    text_size
        The one to choose; None: none is offered.
    """

    def __init__(
        self, window: "MainWindow", choice: SchemeChoice, *, replayable: bool, text_size: TextSize | None
    ) -> None:
        self._window = window
        bar = window.menuBar()
        airfield = bar.addMenu("Air&field")
        self._add(airfield, "&Open another profile …", window.others.open_another, "Ctrl+O")
        self._add(airfield, "&Set up a new one …", lambda: window.others.set_up_another(window.choice))
        observation = bar.addMenu("&Observation")
        self._add(observation, "&Read the source now", window.poll, "P")
        self._add(observation, "&Type one in …", window.type_in, "E")
        self._add(observation, "&Messages and unused rows …", window.show_messages, "M")
        changes = bar.addMenu("&Changes")
        self._acknowledge = self._add(changes, "&Acknowledge …", window.acknowledge, "A")
        self._acknowledge_all = self._add(changes, "Acknowledge a&ll …", window.acknowledge_all, "Shift+A")
        settings = bar.addMenu("&Settings")
        self._waiting = self._add(settings, "&Waiting …", window.show_waiting_settings)
        view = bar.addMenu("&View")
        self._fill_view(view, choice)
        if text_size is not None:
            self._fill_text_sizes(view.addMenu("&Text size"), text_size)
        if replayable:
            self._add(bar.addMenu("&Demo"), "&Play the day again", window.play_again)
        about = bar.addMenu("&Help")
        self._add(about, "&Keys …", window.show_keys, "F1", "?")
        self._add(about, "&About", window.show_about)

    def refresh(self, state: BoardState) -> None:
        """Offer what there is to do on a newer board."""
        waiting = any(change.open for change in state.changes)
        self._acknowledge.setEnabled(waiting)
        self._acknowledge_all.setEnabled(waiting)
        self._waiting.setEnabled(bool(state.waiting))
        self._waiting.setText(f"&Waiting ({len(state.waiting)}) …" if state.waiting else "&Waiting …")

    def _fill_view(self, menu: QMenu, choice: SchemeChoice) -> None:
        window = self._window
        self._add(menu, "&Board", partial(window.show_page, 0), "1")
        self._add(menu, "&Margin", partial(window.show_page, 1), "2")
        self._add(menu, "D&etails of the row …", window.show_details, "D")
        self._add(menu, "F&ind an operation", window.find_operation, "/")
        menu.addSeparator()
        group = QActionGroup(window)
        for each, words in (
            (SchemeChoice.LIGHT, "&Light"),
            (SchemeChoice.DARK, "&Dark"),
            (SchemeChoice.SYSTEM, "&As the system"),
        ):
            action = self._add(menu, words, partial(window.choose_scheme, each))
            action.setCheckable(True)
            action.setChecked(each is choice)
            group.addAction(action)
        menu.addSeparator()
        self._add(menu, "&Wall view", window.wall.toggle, "F11")
        self._add(menu, "Wall view: &screen and distance …", window.wall.ask, "Shift+F11")

    def _fill_text_sizes(self, menu: QMenu, text_size: TextSize) -> None:
        window = self._window
        group = QActionGroup(window)
        screen = window.screen().availableSize()
        for percent in TEXT_SIZES_PERCENT:
            action = self._add(menu, f"{percent} %", partial(window.choose_text_size, percent))
            action.setCheckable(True)
            action.setChecked(percent == text_size.kept())
            # One that the screen has no room for is not offered; a smaller one always is.
            action.setEnabled(percent <= text_size.percent or text_size.fits(percent, screen, QSize(*SMALLEST_PX)))
            group.addAction(action)

    def _add(self, menu: QMenu, words: str, act: Callable[[], object], *keys: str) -> QAction:
        action = QAction(words, self._window)
        action.setShortcuts([QKeySequence(key) for key in keys])
        action.triggered.connect(lambda: act())
        menu.addAction(action)
        self._window.addAction(action)
        return action
