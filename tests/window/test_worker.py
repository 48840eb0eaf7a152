import logging
import threading
from collections.abc import Callable
from dataclasses import replace

import pytest
from pytestqt.qtbot import QtBot

from airfield_board.errors import UserError
from airfield_board.session.board_state import BoardState
from airfield_board.window.worker import Answer, BoardRecorder, Request, Worker
from tests.window.recorders import FakeRecorder
from tests.window.states import board

FAST_S = 0.001
SLOW_S = 3600.0


class Listener:
    """Keeps what a worker says."""

    def __init__(self, worker: Worker) -> None:
        self.states: list[BoardState] = []
        self.answers: list[Answer] = []
        self.threads: set[int] = set()
        worker.state_came.connect(self._take_state)
        worker.ended.connect(self._take_answer)

    def _take_state(self, state: BoardState) -> None:
        self.states.append(state)
        self.threads.add(threading.get_ident())

    def _take_answer(self, answer: Answer) -> None:
        self.answers.append(answer)
        self.threads.add(threading.get_ident())


@pytest.fixture
def recorder() -> FakeRecorder:
    return FakeRecorder(board())


def started(
    recorder: FakeRecorder, *, poll_s: float | None = SLOW_S, monotonic: Callable[[], float] | None = None
) -> tuple[Worker, Listener]:
    if monotonic is None:
        worker = Worker(recorder.open, poll_s=poll_s)
    else:
        worker = Worker(recorder.open, poll_s=poll_s, monotonic=monotonic)
    listener = Listener(worker)
    worker.start()
    return worker, listener


def test_the_first_poll_comes_at_once_and_carries_the_board(qtbot: QtBot, recorder: FakeRecorder) -> None:
    worker, heard = started(recorder)
    qtbot.waitUntil(lambda: len(heard.answers) == 1)
    assert heard.states == [recorder.state]
    assert heard.answers[0].state is recorder.state
    assert heard.answers[0].problem == ""
    assert worker.close(5.0)


def test_it_polls_again_when_the_answer_has_come(qtbot: QtBot, recorder: FakeRecorder) -> None:
    worker, heard = started(recorder, poll_s=FAST_S)
    qtbot.waitUntil(lambda: len(heard.states) >= 4)
    assert worker.close(5.0)


def test_the_boards_own_poll_interval_counts_where_none_is_fixed(qtbot: QtBot, recorder: FakeRecorder) -> None:
    recorder.state = replace(recorder.state, poll_s=FAST_S)
    worker, heard = started(recorder, poll_s=None)
    qtbot.waitUntil(lambda: len(heard.states) >= 3)
    assert worker.watchdog_s == 10.0
    recorder.state = replace(recorder.state, poll_s=60.0)
    qtbot.waitUntil(lambda: worker.watchdog_s == 180.0)
    assert worker.close(5.0)


def test_it_polls_on_after_a_failure_of_any_kind(
    qtbot: QtBot, recorder: FakeRecorder, caplog: pytest.LogCaptureFixture
) -> None:
    recorder.failures = [UserError("the disk is full"), ZeroDivisionError("division by zero")]
    with caplog.at_level(logging.CRITICAL):
        worker, heard = started(recorder, poll_s=FAST_S)
        qtbot.waitUntil(lambda: len(heard.states) >= 1)
    assert heard.answers[0].problem == "the disk is full"
    assert "ZeroDivisionError" in heard.answers[1].problem
    assert heard.answers[2].state is recorder.state
    assert worker.close(5.0)


def test_the_recorder_lives_on_one_thread_from_opening_to_closing_and_answers_come_on_the_windows(
    qtbot: QtBot, recorder: FakeRecorder
) -> None:
    worker, heard = started(recorder, poll_s=FAST_S)
    worker.ask(Request(what="acknowledge", run=lambda each: each.acknowledge((1,), "MS")))
    qtbot.waitUntil(lambda: len(heard.states) >= 3 and ("acknowledge", (1,), "MS") in recorder.calls)
    assert worker.close(5.0)
    assert recorder.closed
    assert len(recorder.threads) == 1
    assert recorder.threads.isdisjoint({threading.get_ident()})
    assert heard.threads == {threading.get_ident()}


def test_only_one_poll_is_under_way_at_a_time(qtbot: QtBot, recorder: FakeRecorder) -> None:
    recorder.gate.clear()
    worker, heard = started(recorder)
    for _ in range(5):
        worker.poll()
    recorder.gate.set()
    qtbot.waitUntil(lambda: len(heard.answers) == 1)
    worker.poll()
    qtbot.waitUntil(lambda: len(heard.answers) == 2)
    assert worker.close(5.0)
    assert [call[0] for call in recorder.calls] == ["poll", "poll"]


def test_a_request_ends_with_its_own_answer(qtbot: QtBot, recorder: FakeRecorder) -> None:
    worker, heard = started(recorder)
    qtbot.waitUntil(lambda: len(heard.answers) == 1)
    request = Request(what="acknowledge", run=lambda each: each.acknowledge((7,), "MS"))
    worker.ask(request)
    qtbot.waitUntil(lambda: len(heard.answers) == 2)
    assert heard.answers[1].request is request
    assert recorder.calls[-1] == ("acknowledge", (7,), "MS")
    assert worker.close(5.0)


def test_what_a_person_asked_for_is_not_done_when_what_they_saw_has_changed(
    qtbot: QtBot, recorder: FakeRecorder
) -> None:
    worker, heard = started(recorder)
    qtbot.waitUntil(lambda: len(heard.answers) == 1)
    worker.ask(
        Request(
            what="accept", run=lambda each: each.accept_settings("M. Sole"), still_seen=lambda newest: newest is None
        )
    )
    qtbot.waitUntil(lambda: len(heard.answers) == 2)
    assert "changed" in heard.answers[1].problem
    assert "accept_settings" not in {call[0] for call in recorder.calls}
    assert worker.close(5.0)


def test_a_recorder_that_does_not_open_says_why_and_nothing_more_comes(qtbot: QtBot) -> None:
    def refuse() -> BoardRecorder:
        raise UserError("profile.yaml: no such file")

    worker = Worker(refuse, poll_s=FAST_S)
    heard = Listener(worker)
    worker.start()
    qtbot.waitUntil(lambda: len(heard.answers) == 1)
    assert heard.answers[0].problem == "profile.yaml: no such file"
    assert not heard.answers[0].opened
    assert heard.states == []
    assert worker.close(5.0)


def test_the_feeder_writes_before_each_poll_on_the_recorders_thread(qtbot: QtBot, recorder: FakeRecorder) -> None:
    written: list[int] = []
    worker = Worker(recorder.open, poll_s=FAST_S, before_poll=lambda: written.append(threading.get_ident()))
    heard = Listener(worker)
    worker.start()
    qtbot.waitUntil(lambda: len(heard.states) >= 2)
    assert worker.close(5.0)
    assert set(written) == recorder.threads
    assert len(written) == len([call for call in recorder.calls if call[0] == "poll"])


def test_a_recorder_that_hangs_is_silent_once_the_watchdogs_time_is_over(qtbot: QtBot, recorder: FakeRecorder) -> None:
    time_s = [100.0]
    worker, heard = started(recorder, poll_s=4.0, monotonic=lambda: time_s[0])
    qtbot.waitUntil(lambda: len(heard.answers) == 1)
    assert worker.watchdog_s == 12.0
    recorder.gate.clear()
    worker.poll()
    time_s[0] = 112.0
    assert not worker.is_silent()
    time_s[0] = 112.1
    assert worker.is_silent()
    recorder.gate.set()
    qtbot.waitUntil(lambda: len(heard.answers) == 2)
    assert not worker.is_silent()
    assert worker.close(5.0)


def test_polls_that_fail_do_not_count_as_a_sign_of_life(qtbot: QtBot, recorder: FakeRecorder) -> None:
    time_s = [0.0]
    worker, heard = started(recorder, monotonic=lambda: time_s[0], poll_s=1.0)
    qtbot.waitUntil(lambda: len(heard.answers) == 1)
    recorder.failures = [UserError("no")]
    time_s[0] = 10.5
    worker.poll()
    qtbot.waitUntil(lambda: len(heard.answers) == 2)
    assert worker.is_silent()
    assert worker.close(5.0)


def test_closing_does_not_wait_for_a_recorder_that_hangs(qtbot: QtBot, recorder: FakeRecorder) -> None:
    worker, heard = started(recorder)
    qtbot.waitUntil(lambda: len(heard.answers) == 1)
    recorder.gate.clear()
    worker.poll()
    assert not worker.close(0.0)
    recorder.gate.set()
    assert worker.close(5.0)
    assert recorder.closed


def test_what_was_asked_before_closing_is_still_done_and_nothing_after(qtbot: QtBot, recorder: FakeRecorder) -> None:
    worker, heard = started(recorder)
    qtbot.waitUntil(lambda: len(heard.answers) == 1)
    worker.ask(Request(what="acknowledge", run=lambda each: each.acknowledge((1,), "MS")))
    assert worker.close(5.0)
    worker.ask(Request(what="acknowledge", run=lambda each: each.acknowledge((2,), "MS")))
    worker.poll()
    assert recorder.calls[-1] == ("acknowledge", (1,), "MS")
    assert len([call for call in recorder.calls if call[0] == "poll"]) == 1


def test_a_history_that_cannot_be_closed_in_order_still_ends_the_thread(
    qtbot: QtBot, recorder: FakeRecorder, caplog: pytest.LogCaptureFixture
) -> None:
    recorder.closing_failure = UserError("the disk is full")
    worker, heard = started(recorder)
    qtbot.waitUntil(lambda: len(heard.answers) == 1)
    assert worker.close(5.0)
    assert "could not be closed in order" in caplog.text
