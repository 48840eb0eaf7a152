"""The window that trusts nothing by itself: a recorder that does not answer, a sleep, a clock set wrong."""

from collections.abc import Iterator
from contextlib import contextmanager
from datetime import datetime, timedelta

import pytest
from PySide6.QtWidgets import QLabel
from pytestqt.qtbot import QtBot

from airfield_board.errors import UserError
from airfield_board.window.main_window import Feed
from airfield_board.window.picture import image_of
from airfield_board.window.reading import Cause
from airfield_board.window.worker import Worker
from tests.window.painting import texts_of
from tests.window.states import board
from tests.window.test_main_window import Desk

# The offscreen platform says so of what it cannot do; it means nothing for a real screen.
pytestmark = pytest.mark.qt_log_ignore("This plugin does not support (propagateSizeHints|raise)")

STATE_WORDS = {"GO", "NEAR LIMIT", "REDUCED", "HOLD", "NO DATA"}


POLL_S = 60.0
"""Longer than any of these tests; the window then trusts nothing after 3 min without an answer."""


class WatchedDesk(Desk):
    """A desk whose recorder is asked once a minute, beside what the window asks by itself."""

    def _feed(self) -> Feed:
        worker = Worker(self.recorders[-1].open, poll_s=POLL_S, monotonic=lambda: self.time_s)
        return Feed(clock=self.clock, worker=worker)


@pytest.fixture
def desk(qtbot: QtBot) -> Iterator[Desk]:
    made = WatchedDesk(qtbot, board())
    yield made
    made.window.close()


@contextmanager
def silence(desk: Desk) -> Iterator[None]:
    """Let no poll be answered for a while."""
    desk.recorder.gate.clear()
    try:
        yield
    finally:
        desk.recorder.gate.set()


def row_words(desk: Desk) -> set[str]:
    """Return the state words that stand in the rows as painted."""
    image_of(desk.window.view)
    return {each.text.text for each in texts_of(desk.window.view) if each.part == "RowPanel"} & STATE_WORDS


def strip_says(desk: Desk) -> list[str]:
    image_of(desk.window.view)
    return [each.text.text for each in texts_of(desk.window.view) if each.part == "ObservationStrip"]


def move(desk: Desk, by: timedelta) -> datetime:
    """Move the clock, and let the window's own clock tick."""
    desk.clock.move_to(desk.clock.now() + by)
    desk.window.tick()
    return desk.clock.now()


def test_a_recorder_that_never_answers_leaves_no_data_on_the_screen(desk: Desk) -> None:
    with silence(desk):
        desk.window.show()
        desk.window.start()
        desk.qtbot.waitUntil(lambda: ("poll",) in desk.recorder.calls)
        for _ in range(5):
            desk.time_s += desk.window.worker.watchdog_s
            move(desk, timedelta(seconds=20))
            assert not desk.window.view.isVisible()
            said = [label.text() for label in desk.window.findChildren(QLabel) if label.isVisible()]
            assert any("NO DATA" in text for text in said)


def test_a_recorder_that_stops_answering_takes_every_state_off_the_screen(desk: Desk) -> None:
    desk.open()
    assert {"GO", "HOLD"} <= row_words(desk)
    with silence(desk):
        desk.window.poll()
        desk.time_s += desk.window.worker.watchdog_s + 0.1
        move(desk, timedelta(seconds=1))
        assert row_words(desk) == {"NO DATA"}
        assert "NO DATA" in strip_says(desk)
    desk.qtbot.waitUntil(lambda: desk.cause() is Cause.NONE)
    assert {"GO", "HOLD"} <= row_words(desk)


def test_a_recorder_that_only_fails_is_no_answer(desk: Desk) -> None:
    desk.open()
    desk.recorder.failures = [UserError("the disk is full")]
    desk.window.poll()
    desk.qtbot.waitUntil(lambda: desk.window.notice.label.text() == "the disk is full")
    desk.time_s += desk.window.worker.watchdog_s + 0.1
    move(desk, timedelta(seconds=1))
    assert row_words(desk) == {"NO DATA"}


def test_after_a_sleep_nothing_counts_until_the_recorder_has_answered(desk: Desk) -> None:
    desk.open()
    polls = desk.recorder.calls.count(("poll",))
    with silence(desk):
        # Asleep for 4 min: the reading is not stale yet, and the monotonic clock may have stood meanwhile.
        now = move(desk, timedelta(minutes=4))
        desk.qtbot.waitUntil(lambda: desk.recorder.calls.count(("poll",)) == polls + 1)
        assert desk.cause() is Cause.NO_ANSWER
        assert row_words(desk) == {"NO DATA"}
        desk.recorder.state = board(hour=13.0 + 24 / 60)
    desk.qtbot.waitUntil(lambda: desk.window.state is desk.recorder.state)
    assert abs(now - desk.recorder.state.assessed_at) < timedelta(seconds=10)
    assert desk.cause() is Cause.NONE
    assert {"GO", "HOLD"} <= row_words(desk)


def test_after_a_night_asleep_a_stale_reading_stays_no_data_though_the_recorder_answers(desk: Desk) -> None:
    desk.open()
    polls = desk.recorder.calls.count(("poll",))
    move(desk, timedelta(hours=9))
    desk.qtbot.waitUntil(lambda: desk.recorder.calls.count(("poll",)) == polls + 1)
    desk.window.tick()
    assert desk.cause() is Cause.STALE
    assert row_words(desk) == {"NO DATA"}


@pytest.mark.parametrize("by", [timedelta(hours=-1), timedelta(hours=1), timedelta(minutes=-4), timedelta(days=-400)])
def test_a_clock_that_is_set_is_followed_at_once_and_nothing_counts_meanwhile(desk: Desk, by: timedelta) -> None:
    desk.open()
    polls = desk.recorder.calls.count(("poll",))
    with silence(desk):
        move(desk, by)
        desk.qtbot.waitUntil(lambda: desk.recorder.calls.count(("poll",)) == polls + 1)
        assert desk.cause() is not Cause.NONE
        assert row_words(desk) == {"NO DATA"}
        move(desk, -by)
        assert desk.cause() is Cause.NONE
