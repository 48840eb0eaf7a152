"""A recorder that answers what it is told to, for tests of the window around it."""

import threading
from collections.abc import Sequence
from datetime import datetime

from airfield_board.session.board_state import BoardState, SettingChange


class FakeRecorder:
    """Answers each request with the same board, keeps what it was asked and on which thread.

    Attributes
    ----------
    state
        The answer.
    failures
        Raised by the next polls, one each.
    refusal
        Raised by `type_in` while it is set.
    closing_failure
        Raised by `close`.
    gate
        While it is not set, a poll hangs.
    """

    def __init__(self, state: BoardState) -> None:
        self.state = state
        self.failures: list[Exception] = []
        self.refusal: Exception | None = None
        self.closing_failure: Exception | None = None
        self.gate = threading.Event()
        self.gate.set()
        self.calls: list[tuple[object, ...]] = []
        self.threads: set[int] = set()
        self.closed = False

    def open(self) -> "FakeRecorder":
        self.threads.add(threading.get_ident())
        return self

    def poll(self) -> BoardState:
        self._note("poll")
        self.gate.wait()
        if self.failures:
            raise self.failures.pop(0)
        return self.state

    def acknowledge(self, numbers: Sequence[int], initials: str) -> BoardState:
        return self._note("acknowledge", tuple(numbers), initials)

    def withdraw_acknowledgement(self, numbers: Sequence[int], initials: str) -> BoardState:
        return self._note("withdraw_acknowledgement", tuple(numbers), initials)

    def type_in(
        self,
        *,
        time: datetime,
        altimeter_hpa: float,
        temperature_c: float,
        dewpoint_c: float | None,
        initials: str,
    ) -> BoardState:
        self._note("type_in", time, round(altimeter_hpa, 2), temperature_c, dewpoint_c, initials)
        if self.refusal is not None:
            raise self.refusal
        return self.state

    def accept_settings(self, name: str, *, seen: Sequence[SettingChange] | None = None) -> BoardState:
        return self._note("accept_settings", name, seen)

    def close(self) -> None:
        self.threads.add(threading.get_ident())
        self.closed = True
        if self.closing_failure is not None:
            raise self.closing_failure

    def _note(self, *call: object) -> BoardState:
        self.calls.append(call)
        self.threads.add(threading.get_ident())
        return self.state
