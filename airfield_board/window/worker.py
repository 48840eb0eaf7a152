"""The thread that owns the recorder, and the timer that asks it.

The thread is a plain daemon thread: a recorder that hangs on a dead network share can so never keep the program from
ending, and Qt has no thread object to complain about.
"""

import logging
import queue
import threading
import time
from collections.abc import Callable, Sequence
from dataclasses import dataclass, field
from datetime import datetime
from typing import Protocol, TypeVar

from PySide6.QtCore import QObject, Qt, QTimer, Signal

from airfield_board.errors import UserError
from airfield_board.session.board_state import BoardState, SettingChange

_logger = logging.getLogger(__name__)
_LEAST_WATCHDOG_S = 10.0
_WATCHDOG_POLLS = 3.0
_UNTIL_FIRST_POLL_S = 5.0
_THREAD_NAME = "recorder"
_POLL_WORDS = "read the source"
_OPEN_WORDS = "open the board"
_CHANGED_MEANWHILE = "What you saw has changed meanwhile; nothing was done. Look again."
_Made = TypeVar("_Made")


class BoardRecorder(Protocol):
    """What the window asks of a recorder; every call is made on the recorder's own thread."""

    def poll(self) -> BoardState:
        """Read the source once and judge what is new."""

    def acknowledge(self, numbers: Sequence[int], initials: str) -> BoardState:
        """Record that somebody has seen status changes."""

    def withdraw_acknowledgement(self, numbers: Sequence[int], initials: str) -> BoardState:
        """Record that an acknowledgement was a mistake."""

    def type_in(
        self,
        *,
        time: datetime,
        altimeter_hpa: float,
        temperature_c: float,
        dewpoint_c: float | None,
        initials: str,
    ) -> BoardState:
        """Judge and record an observation entered by hand."""

    def accept_settings(self, name: str, *, seen: Sequence[SettingChange] | None = None) -> BoardState:
        """Put the waiting settings in force, if they are those that the person saw."""

    def close(self) -> None:
        """Record the stop and close the history."""


@dataclass(frozen=True, slots=True, kw_only=True, eq=False)
class Request:
    """Something the recorder is to do; each is its own, told apart by identity.

    Attributes
    ----------
    what
        In plain words, for messages: "acknowledge".
    run
        Called with the recorder, on its thread.
    still_seen
        Asked of the recorder's newest board just before ``run``: whether it is still what the person saw who asked.
    polls
        Whether it only reads the source.
    """

    what: str
    run: Callable[[BoardRecorder], BoardState] = field(repr=False)
    still_seen: Callable[[BoardState], bool] = field(default=lambda _: True, repr=False)
    polls: bool = False


@dataclass(frozen=True, slots=True, kw_only=True)
class Answer:
    """How a request ended.

    Attributes
    ----------
    state
        The board after it; None where it failed.
    problem
        Why it failed, for the user; empty where it did not.
    opened
        False where the recorder could not even be opened: nothing more will come.
    """

    request: Request
    state: BoardState | None
    problem: str = ""
    opened: bool = True


class Worker(QObject):
    """Asks a recorder on a thread of its own, again and again, and passes on what it answers.

    Signals
    -------
    state_came(object)
        A `BoardState`, the newest; on the window's thread.
    ended(object)
        An `Answer`, for each request and each poll, good or bad; after ``state_came``.

    Parameters
    ----------
    open_recorder
        Called once, on the recorder's thread.
    before_poll
        Called on the recorder's thread before each poll: the demo's feeder.
    poll_s
        Real seconds from an answer to the next poll; None: as the board's state says.
    monotonic
        A clock that only runs forward, in seconds.
    """

    state_came = Signal(object)
    ended = Signal(object)
    _answered = Signal(object)

    def __init__(
        self,
        open_recorder: Callable[[], BoardRecorder],
        *,
        before_poll: Callable[[], object] | None = None,
        poll_s: float | None = None,
        monotonic: Callable[[], float] = time.monotonic,
        parent: QObject | None = None,
    ) -> None:
        super().__init__(parent)
        self._open_recorder = open_recorder
        self._before_poll = before_poll
        self._fixed_poll_s = poll_s
        self._poll_s = _UNTIL_FIRST_POLL_S if poll_s is None else poll_s
        self._monotonic = monotonic
        self._last_state_s = monotonic()
        self._poll_under_way: Request | None = None
        self._closing = False
        self._requests: queue.SimpleQueue[Request | None] = queue.SimpleQueue()
        self._timer = QTimer(self)
        self._timer.setSingleShot(True)
        self._timer.timeout.connect(self.poll)
        self._answered.connect(self._take, Qt.ConnectionType.QueuedConnection)
        self._thread = threading.Thread(target=self._serve, name=_THREAD_NAME, daemon=True)

    @property
    def watchdog_s(self) -> float:
        """Longest real time without a board after which the window trusts nothing [s]."""
        return max(_WATCHDOG_POLLS * self._poll_s, _LEAST_WATCHDOG_S)

    def is_silent(self) -> bool:
        """Return whether no board has come for longer than the watchdog allows."""
        return self._monotonic() - self._last_state_s > self.watchdog_s

    def start(self) -> None:
        """Open the recorder and read the source for the first time."""
        self._last_state_s = self._monotonic()
        self._thread.start()
        self.poll()

    def poll(self) -> None:
        """Ask for a poll now, unless one is under way."""
        if self._closing or self._poll_under_way is not None:
            return
        self._timer.stop()
        self._poll_under_way = Request(what=_POLL_WORDS, run=self._fed_poll, polls=True)
        self._requests.put(self._poll_under_way)

    def ask(self, request: Request) -> None:
        """Hand a request to the recorder; its end comes with ``ended``."""
        if not self._closing:
            self._requests.put(request)

    def close(self, wait_s: float) -> bool:
        """Let the recorder finish what was asked and close.

        Parameters
        ----------
        wait_s
            How long to wait for it.

        Returns
        -------
        bool
            Whether the recorder has closed; False where it hangs: then it ends with the program.
        """
        if not self._closing:
            self._closing = True
            self._timer.stop()
            self._requests.put(None)
        if self._thread.is_alive():
            self._thread.join(wait_s)
        return not self._thread.is_alive()

    def _take(self, answer: Answer) -> None:
        if self._closing:
            return
        polled = answer.request is self._poll_under_way
        if polled:
            self._poll_under_way = None
        if answer.state is not None:
            self._last_state_s = self._monotonic()
            if self._fixed_poll_s is None:
                self._poll_s = answer.state.poll_s
        if polled and answer.opened:
            self._timer.start(round(self._poll_s * 1000))
        if answer.state is not None:
            self.state_came.emit(answer.state)
        self.ended.emit(answer)

    # What follows runs on the recorder's thread.

    def _fed_poll(self, recorder: BoardRecorder) -> BoardState:
        if self._before_poll is not None:
            self._before_poll()
        return recorder.poll()

    def _serve(self) -> None:
        recorder = self._opened()
        if recorder is None:
            return
        newest: BoardState | None = None
        try:
            while (request := self._requests.get()) is not None:
                answer = _answer(recorder, request, newest)
                newest = answer.state or newest
                self._tell(answer)
        finally:
            try:
                recorder.close()
            except UserError:
                _logger.exception("The history could not be closed in order")

    def _opened(self) -> BoardRecorder | None:
        recorder, problem = _tried(_OPEN_WORDS, self._open_recorder)
        if recorder is None:
            first = self._requests.get() or Request(what=_OPEN_WORDS, run=self._fed_poll, polls=True)
            self._tell(Answer(request=first, state=None, problem=problem, opened=False))
        return recorder

    def _tell(self, answer: Answer) -> None:
        try:
            self._answered.emit(answer)
        except RuntimeError:
            _logger.info("The window was gone before the recorder answered")


def _answer(recorder: BoardRecorder, request: Request, newest: BoardState | None) -> Answer:
    if newest is not None and not request.still_seen(newest):
        return Answer(request=request, state=None, problem=_CHANGED_MEANWHILE)
    state, problem = _tried(request.what, lambda: request.run(recorder))
    return Answer(request=request, state=state, problem=problem)


def _tried(what: str, run: Callable[[], _Made]) -> tuple[_Made | None, str]:
    """Return what was made, or None and why not.

    Nothing gets past: whatever went wrong, the next poll must still be asked for, and what is shown until then goes
    stale by itself.
    """
    try:
        return run(), ""
    except UserError as error:
        return None, str(error)
    except Exception as error:
        _logger.exception("Unexpected failure: %s", what)
        return None, f"An unexpected fault kept the program from this: {what} ({type(error).__name__}: {error})"
