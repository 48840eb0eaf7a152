"""The window around the board: its menus and keys, its clock, its watchdog, and what it asks the recorder for."""

import logging
from collections.abc import Callable, Sequence
from dataclasses import dataclass
from datetime import datetime, timedelta
from pathlib import Path
from zoneinfo import ZoneInfo

from PySide6.QtCore import QSize, Qt, QTimer, Signal
from PySide6.QtGui import QCloseEvent, QGuiApplication
from PySide6.QtWidgets import QMainWindow, QMessageBox, QStackedWidget, QVBoxLayout, QWidget

from airfield_board.clock import Clock
from airfield_board.session.board_state import BoardState, Mode, StatusChange
from airfield_board.window import formatting
from airfield_board.window.announcer import Announcer
from airfield_board.window.board_view import BoardView, PageName
from airfield_board.window.details_dialog import DetailsDialog
from airfield_board.window.dialogs import (
    AcknowledgeDialog,
    MessagesDialog,
    TypeInDialog,
    WaitingSettingsDialog,
)
from airfield_board.window.entry import TypedObservation
from airfield_board.window.keys_dialog import KeysDialog
from airfield_board.window.menus import KEYS, Menus
from airfield_board.window.next_window import NextWindow
from airfield_board.window.no_board_page import NoBoardPage
from airfield_board.window.notice_bar import NoticeBar
from airfield_board.window.other_airfields import OtherAirfields
from airfield_board.window.row_access import follow_focus
from airfield_board.window.text_board import ADVISES
from airfield_board.window.text_size import TextSize
from airfield_board.window.theme import SchemeChoice, apply_scheme, scheme_of
from airfield_board.window.wall_mode import WallMode
from airfield_board.window.wall_settings import usual_place
from airfield_board.window.worker import Answer, Request, Worker

_logger = logging.getLogger(__name__)
_FIRST_PX = QSize(1600, 1000)
_SCREEN_EDGE_PX = QSize(40, 80)
_TICK_MS = 1000
_FAST_TICK_MS = 250
_RESUME_AFTER_S = 30.0
_UNDO_FOR_S = 10.0
_CLOSE_WAIT_S = 5.0
_TRUST_NOTHING = timedelta(seconds=-1)


@dataclass(frozen=True, slots=True, kw_only=True)
class Feed:
    """What a window lives on.

    Attributes
    ----------
    clock
        What time it is on the board.
    worker
        Not yet started.
    speed
        Seconds of the clock to one real second.
    """

    clock: Clock
    worker: Worker
    speed: float = 1.0


class MainWindow(QMainWindow):
    """Shows one board, and keeps it going.

    Signals
    -------
    opening_failed(object)
        The recorder could not be opened; carries the message, a str.

    Attributes
    ----------
    next_window
        What is to be opened when this one has closed; None: nothing.

    Parameters
    ----------
    start_feed
        Makes the clock and the worker; called once, and again each time the demo is played again.
    choice
        Light, dark, or as the system.
    replayable
        Whether the feed can be started again: the demo.
    wall_file
        Where the wall view's numbers are remembered; None: in the user's folder.
    text_size
        How large everything is; None: there is nothing to choose.

    Attributes
    ----------
    start_again
        Whether the program is to begin anew once the window has closed.
    """

    opening_failed = Signal(object)

    def __init__(
        self,
        start_feed: Callable[[], Feed],
        *,
        choice: SchemeChoice,
        replayable: bool = False,
        wall_file: Path | None = None,
        text_size: TextSize | None = None,
    ) -> None:
        super().__init__()
        self.start_again = False
        self._text_size = text_size
        self._start_feed = start_feed
        self._feed = start_feed()
        self._state: BoardState | None = None
        self._initials = ""
        self._last_tick: datetime | None = None
        self._type_in: tuple[Request | None, TypeInDialog] | None = None
        self._messages: MessagesDialog | None = None
        self.details = DetailsDialog(self)
        self.announcer = Announcer(self)
        self._acknowledged: dict[Request, tuple[tuple[int, ...], str]] = {}
        self._poll_problem = ""
        self._waiting_shown: object = ()
        self.next_window: NextWindow | None = None

        self.setWindowTitle("Airfield Board")
        self.resize(_FIRST_PX.boundedTo(self.screen().availableSize() - _SCREEN_EDGE_PX))
        self.view = BoardView()
        self.notice = NoticeBar()
        self._nothing_yet = NoBoardPage("Nothing has been read yet. Reading …")
        self.fault_page = NoBoardPage("", action="Show the board again", act=self._show_again)
        self.wall = WallMode(self, self.notice, wall_file or usual_place(), self._wall_changed)
        self._stack = QStackedWidget()
        for page in (self._nothing_yet, self.view, self.wall.view, self.fault_page):
            self._stack.addWidget(page)
        middle = QWidget()
        column = QVBoxLayout(middle)
        column.setContentsMargins(0, 0, 0, 0)
        column.setSpacing(0)
        column.addWidget(self._stack, 1)
        column.addWidget(self.notice)
        self.setCentralWidget(middle)
        self.others = OtherAirfields(self)
        self.others.going_to.connect(self._leave_for)
        self.others.refused.connect(lambda why: self.notice.say(f"Not opened; this board goes on. {why}"))
        self._menus = Menus(self, choice, replayable=replayable, text_size=text_size)
        self.choose_scheme(choice)

        self.view.acknowledge_asked.connect(self._acknowledge_asked)
        self.view.page_asked.connect(self.show_page)
        self.view.poll_asked.connect(self.poll)
        self.view.type_in_asked.connect(self.type_in)
        self.view.messages_asked.connect(self.show_messages)
        self.view.details_asked.connect(self._open_details)
        for rows in (self.view.board.rows, self.view.margin.rows):
            follow_focus(rows)
        self._style_hints = QGuiApplication.styleHints()
        self._style_hints.colorSchemeChanged.connect(self._system_scheme_changed)
        self._ticker = QTimer(self)
        self._ticker.setTimerType(Qt.TimerType.PreciseTimer)
        self._ticker.timeout.connect(self.tick)

    @property
    def state(self) -> BoardState | None:
        """The newest board; None before the first."""
        return self._state

    @property
    def worker(self) -> Worker:
        """The worker in use."""
        return self._feed.worker

    def start(self) -> None:
        """Begin reading, and let the clock run."""
        self._listen()
        self._ticker.start(_TICK_MS if self._feed.speed == 1.0 else _FAST_TICK_MS)

    def play_again(self) -> None:
        """Close the recorder and begin anew with a fresh feed."""
        self._feed.worker.close(_CLOSE_WAIT_S)
        self._feed.worker.deleteLater()
        self._state = None
        self._last_tick = None
        self.details.close()
        self._stack.setCurrentWidget(self._nothing_yet)
        self.notice.dismiss()
        self._feed = self._start_feed()
        self._listen()

    def choose_scheme(self, choice: SchemeChoice) -> None:
        """Show light or dark colours, or those of the system and its changes."""
        self._choice = choice
        scheme = scheme_of(choice)
        self.view.set_scheme(scheme)
        self.wall.set_scheme(scheme)
        apply_scheme(scheme)
        self.others.set_scheme(choice)

    def _system_scheme_changed(self) -> None:
        if self._choice is SchemeChoice.SYSTEM:
            self.choose_scheme(self._choice)

    def tick(self) -> None:
        """Show the time and the age; trust nothing where the recorder has not answered for too long."""
        state = self._state
        now = self._feed.clock.now()
        last, self._last_tick = self._last_tick, now
        if last is not None and abs((now - last).total_seconds()) > _RESUME_AFTER_S * self._feed.speed:
            self.poll()  # the machine slept, or its clock was set
        if state is None:
            return
        worker = self._feed.worker
        limit = timedelta(seconds=worker.watchdog_s * self._feed.speed)
        watchdog = _TRUST_NOTHING if worker.is_silent() else limit
        self.view.set_watchdog(watchdog)
        self.view.show_state(state, now)
        if self.view.view is not None:
            self.announcer.show_view(self.view.view)
            self.details.show_view(self.view.view, self.view.colours)
        self.wall.show_state(state, now, watchdog)
        if self._type_in is not None:
            self._type_in[1].refresh()

    def show_fault(self, fault: str) -> None:
        """Take the board away after an unexpected fault of the window: what is on the screen may be out of date.

        Parameters
        ----------
        fault
            What went wrong, in a line.
        """
        self.fault_page.say(
            f"The window met an unexpected fault ({fault}). What the board showed may be out of date.\n"
            "Observations are still read and recorded."
        )
        self.details.close()
        self._stack.setCurrentWidget(self.fault_page)

    def _show_again(self) -> None:
        self._stack.setCurrentWidget(self._nothing_yet if self._state is None else self._board())
        self.tick()

    @property
    def choice(self) -> SchemeChoice:
        """Light, dark, or as the system."""
        return self._choice

    # What a person asks for.

    def poll(self) -> None:
        """Read the source now."""
        self._feed.worker.poll()

    def acknowledge(self) -> None:
        """Ask who has seen the focused status change, or the newest that waits."""
        if self._state is None:
            return
        waiting = [change for change in self._state.changes if change.open]
        focused = self.view.changes.focused_change()
        self._ask_who_saw([change for change in waiting if change == focused] or waiting[:1])

    def acknowledge_all(self) -> None:
        """Ask who has seen all that waits."""
        if self._state is not None:
            self._ask_who_saw([change for change in self._state.changes if change.open])

    def type_in(self) -> None:
        """Ask for an observation."""
        if self._state is None or self._type_in is not None:
            return
        dialog = TypeInDialog(self._state.airfield, self._initials, lambda: self._feed.clock.now(), self)
        self._type_in = (None, dialog)
        dialog.typed.connect(self._record_typed)
        dialog.finished.connect(self._type_in_closed)
        dialog.open()

    def show_waiting_settings(self) -> None:
        """Show the settings that wait, and ask who accepts them."""
        if self._state is None or not self._state.waiting:
            return
        waiting = self._state.waiting
        dialog = WaitingSettingsDialog(waiting, self._initials, self)

        def accept(name: str) -> None:
            self._initials = name
            self._feed.worker.ask(
                Request(
                    what="accept the settings",
                    run=lambda recorder: recorder.accept_settings(name, seen=waiting),
                    still_seen=lambda newest: newest.waiting == waiting,
                )
            )

        dialog.accepted_by.connect(accept)
        dialog.open()

    def show_messages(self) -> None:
        """List the messages and the rows not used; the list goes on with the board."""
        if self._state is None:
            return
        if self._messages is None:
            self._messages = MessagesDialog(self._state, self)
            self._messages.destroyed.connect(self._messages_closed)
        self._messages.show()
        self._messages.raise_()

    def show_details(self) -> None:
        """Show all of the row that is pointed at; its window goes on with the board."""
        if self.view.isVisible() and not self.view.ask_details():
            self.notice.say("Choose a row first, with Tab, Up and Down, or the pointer.", for_s=_UNDO_FOR_S)

    def _open_details(self, keys: tuple[str, ...]) -> None:
        if self.view.view is not None:
            self.details.open_for(keys, self.view.view, self.view.colours)

    def find_operation(self) -> None:
        """Show the Margin page and let an operation be found by its name."""
        self.show_page(PageName.MARGIN)
        self.view.margin.start_search()

    def show_keys(self) -> None:
        """Say which key does what."""
        KeysDialog(KEYS, self).open()

    def show_about(self) -> None:
        """Say what the program is, and what it is not."""
        invented = "\n\nThis is the demo: its field, aircraft and weather are invented." if self._in_demo() else ""
        self._tell(
            "About Airfield Board",
            "Airfield Board shows which types may depart at the present density altitude.\n\n"
            f"{ADVISES}\n\n{formatting.CAUTION}{invented}",
        )

    def _leave_for(self, upcoming: NextWindow) -> None:
        self.next_window = upcoming
        self.close()

    def choose_text_size(self, percent: int) -> None:
        """Keep a text size for the next start, and offer to start at once."""
        if self._text_size is None:
            return
        if not self._text_size.keep(percent):
            self.notice.say("The text size could not be written down; it stays as it is.")
        elif percent == self._text_size.percent:
            self.notice.dismiss()
        else:
            self.notice.say(
                f"Text at {percent} % from the next start.", action="Start again now", act=self._start_again
            )

    def _start_again(self) -> None:
        self.start_again = True
        self.close()

    def show_page(self, page: int) -> None:
        """Show a page, by its place from 0; the wall view ends with it."""
        self.wall.leave()
        self.view.set_page(page)

    # What the recorder answers.

    def _listen(self) -> None:
        worker = self._feed.worker
        worker.state_came.connect(self._take_state)
        worker.ended.connect(self._take_end)
        worker.start()

    def _take_state(self, state: BoardState) -> None:
        self._state = state
        self.setWindowTitle(f"{state.airfield.name} · Airfield Board")
        if self._stack.currentWidget() is self._nothing_yet:
            self._stack.setCurrentWidget(self._board())
        self.tick()
        if self._messages is not None:
            self._messages.show_state(state)
        self._menus.refresh(state)
        if state.waiting != self._waiting_shown:
            self._waiting_shown = state.waiting
            if state.waiting:
                self.notice.say(
                    f"{_count(len(state.waiting), 'loosened setting')} waiting; what is in force holds until accepted.",
                    action="Look at it",
                    act=self.show_waiting_settings,
                )

    def _take_end(self, answer: Answer) -> None:
        if not answer.opened:
            self.opening_failed.emit(answer.problem)
            return
        if self._type_in is not None and self._type_in[0] is answer.request:
            self._end_type_in(answer)
            return
        acknowledged = self._acknowledged.pop(answer.request, None)
        if answer.problem:
            if not answer.request.polls or answer.problem != self._poll_problem:
                self.notice.say(answer.problem)
            if answer.request.polls:
                self._poll_problem = answer.problem
            return
        if answer.request.polls:
            self._poll_problem = ""
        if acknowledged is not None:
            numbers, initials = acknowledged
            self.notice.say(
                f"{_count(len(numbers), 'status change')} acknowledged by {initials}.",
                action="Undo",
                act=lambda: self._withdraw(numbers, initials),
                for_s=_UNDO_FOR_S,
            )

    def _ask_who_saw(self, changes: Sequence[StatusChange]) -> None:
        if not changes or self._state is None:
            return
        dialog = AcknowledgeDialog(changes, ZoneInfo(self._state.airfield.time_zone), self._initials, self)

        def acknowledge(initials: str) -> None:
            self._initials = initials
            request = Request(what="acknowledge", run=lambda recorder: recorder.acknowledge(dialog.numbers, initials))
            self._acknowledged[request] = (dialog.numbers, initials)
            self._feed.worker.ask(request)

        dialog.acknowledged.connect(acknowledge)
        dialog.open()

    def _acknowledge_asked(self, numbers: tuple[int, ...]) -> None:
        if self._state is not None:
            self._ask_who_saw([change for change in self._state.changes if change.open and change.number in numbers])

    def _withdraw(self, numbers: tuple[int, ...], initials: str) -> None:
        self._feed.worker.ask(
            Request(
                what="withdraw the acknowledgement",
                run=lambda recorder: recorder.withdraw_acknowledgement(numbers, initials),
            )
        )

    def _record_typed(self, typed: TypedObservation) -> None:
        if self._type_in is None:
            return
        self._initials = typed.initials
        request = Request(
            what="record the typed-in observation",
            run=lambda recorder: recorder.type_in(
                time=typed.time,
                altimeter_hpa=typed.altimeter_hpa,
                temperature_c=typed.temperature_c,
                dewpoint_c=typed.dewpoint_c,
                initials=typed.initials,
            ),
        )
        self._type_in = (request, self._type_in[1])
        self._feed.worker.ask(request)

    def _end_type_in(self, answer: Answer) -> None:
        if self._type_in is None:
            return
        dialog = self._type_in[1]
        if answer.problem:
            self._type_in = (None, dialog)
            dialog.refuse(answer.problem)
            self.poll()  # what was not used may have changed the board all the same
        else:
            dialog.accept()

    def _type_in_closed(self) -> None:
        self._type_in = None

    def _messages_closed(self) -> None:
        self._messages = None

    # The window itself.

    def _board(self) -> QWidget:
        return self.wall.view if self.wall.on else self.view

    def _wall_changed(self) -> None:
        self.tick()  # before it is seen: what it showed last may be long past
        if self.wall.on:
            self.details.close()  # nothing may stand before the rows
        if self._stack.currentWidget() in (self.view, self.wall.view):
            self._stack.setCurrentWidget(self._board())

    def _in_demo(self) -> bool:
        return self._state is not None and self._state.mode is Mode.DEMO

    def _tell(self, title: str, text: str) -> None:
        box = QMessageBox(self)
        box.setAttribute(Qt.WidgetAttribute.WA_DeleteOnClose)
        box.setTextFormat(Qt.TextFormat.PlainText)
        box.setWindowTitle(title)
        box.setText(text)
        box.addButton("Close", QMessageBox.ButtonRole.AcceptRole)
        box.open()

    def closeEvent(self, event: QCloseEvent) -> None:
        """Let the recorder finish and close the history; one that hangs ends with the program."""
        self._ticker.stop()
        self.others.close()
        if not self._feed.worker.close(_CLOSE_WAIT_S):
            _logger.warning("The recorder did not close in %.0f s; its stop is not recorded", _CLOSE_WAIT_S)
        super().closeEvent(event)


def _count(number: int, what: str) -> str:
    return f"1 {what}" if number == 1 else f"{number} {what}s"
