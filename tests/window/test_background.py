import logging
import threading

import pytest
from pytestqt.qtbot import QtBot

from airfield_board.errors import UserError
from airfield_board.window.background import Background, Outcome


class Listener:
    """A background with what came of it, and on which thread."""

    def __init__(self) -> None:
        self.background = Background("test")
        self.came: list[Outcome] = []
        self.threads: set[int] = set()
        self.background.ended.connect(self._take)

    def _take(self, outcome: Outcome) -> None:
        self.came.append(outcome)
        self.threads.add(threading.get_ident())


def test_work_is_done_on_another_thread_and_comes_back_on_this_one(qtbot: QtBot) -> None:
    listener = Listener()
    gate = threading.Event()
    listener.background.do(lambda: gate.wait() and threading.get_ident())
    busy = [listener.background.busy]
    gate.set()
    qtbot.waitUntil(lambda: bool(listener.came))
    assert [*busy, listener.background.busy] == [True, False]
    (outcome,) = listener.came
    assert outcome.made != threading.get_ident()
    assert listener.threads == {threading.get_ident()}


def test_what_a_user_got_wrong_comes_back_in_words(qtbot: QtBot) -> None:
    def fail() -> object:
        raise UserError("There is no such file.")

    listener = Listener()
    listener.background.do(fail)
    qtbot.waitUntil(lambda: bool(listener.came))
    assert listener.came == [Outcome(made=None, problem="There is no such file.")]


def test_an_unexpected_fault_comes_back_too_and_is_logged(qtbot: QtBot, caplog: pytest.LogCaptureFixture) -> None:
    def fail() -> object:
        raise ZeroDivisionError("on purpose")

    listener = Listener()
    with caplog.at_level(logging.ERROR):
        listener.background.do(fail)
        qtbot.waitUntil(lambda: bool(listener.came))
    assert "ZeroDivisionError: on purpose" in listener.came[0].problem
    assert "Unexpected failure: test" in caplog.text


def test_of_two_pieces_of_work_only_the_later_is_waited_for(qtbot: QtBot) -> None:
    gate = threading.Event()
    listener = Listener()
    listener.background.do(lambda: gate.wait() and "earlier")
    listener.background.do(lambda: "later")
    qtbot.waitUntil(lambda: bool(listener.came))
    gate.set()
    done = Listener()
    done.background.do(lambda: "after both")
    qtbot.waitUntil(lambda: bool(done.came))
    assert [outcome.made for outcome in listener.came] == ["later"]
