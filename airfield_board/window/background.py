"""Work that may take its time, such as looking at a disk, done away from the window's thread."""

import logging
import threading
from collections.abc import Callable
from dataclasses import dataclass

from PySide6.QtCore import QObject, Qt, Signal

from airfield_board.errors import UserError

_logger = logging.getLogger(__name__)


@dataclass(frozen=True, slots=True, kw_only=True)
class Outcome:
    """How a piece of work ended.

    Attributes
    ----------
    made
        What it returned; None where it failed.
    problem
        Why it failed, for the user; empty where it did not.
    """

    made: object
    problem: str = ""


class Background(QObject):
    """Does one piece of work at a time on a thread of its own.

    The thread is a daemon: work that hangs on a dead disk never keeps the program from ending.

    Signals
    -------
    ended(object)
        An `Outcome`, on the window's thread; what was asked for before and has been dropped does not come.

    Parameters
    ----------
    name
        Of its threads.
    """

    ended = Signal(object)
    _came = Signal(object)

    def __init__(self, name: str, parent: QObject | None = None) -> None:
        super().__init__(parent)
        self._name = name
        self._work: Callable[[], object] | None = None
        self._came.connect(self._take, Qt.ConnectionType.QueuedConnection)

    @property
    def busy(self) -> bool:
        """Whether work is under way."""
        return self._work is not None

    def do(self, work: Callable[[], object]) -> None:
        """Begin a piece of work; the end of any before it is no longer waited for."""
        self._work = work
        threading.Thread(target=self._run, args=(work,), name=self._name, daemon=True).start()

    def _take(self, came: tuple[Callable[[], object], Outcome]) -> None:
        work, outcome = came
        if work is self._work:
            self._work = None
            self.ended.emit(outcome)

    # What follows runs on the other thread.

    def _run(self, work: Callable[[], object]) -> None:
        try:
            outcome = Outcome(made=work())
        except UserError as error:
            outcome = Outcome(made=None, problem=str(error))
        except Exception as error:
            _logger.exception("Unexpected failure: %s", self._name)
            outcome = Outcome(made=None, problem=f"An unexpected fault: {type(error).__name__}: {error}")
        try:
            self._came.emit((work, outcome))
        except RuntimeError:
            _logger.info("The window was gone before the work ended")
