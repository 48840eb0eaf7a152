"""The window's board around midnight, on the nights of the clock change, on 29 February."""

from datetime import UTC, datetime, timedelta
from pathlib import Path

import pytest
from pytestqt.qtbot import QtBot

from airfield_board.clock import iso_utc
from airfield_board.limits.states import State
from airfield_board.session.board_state import BoardState
from airfield_board.window.board_page import AXIS_PX, BoardPage
from airfield_board.window.board_view import BoardView
from airfield_board.window.picture import image_of
from airfield_board.window.reading import Cause
from tests.session.fields import Field, make_field, row_of
from tests.window.painting import overlaps, texts_of

MINUTE = timedelta(minutes=1)
COOL_C, WARM_C, HOT_C = 21.6, 25.0, 27.5
"""Dry air of some 5,800, 6,200 and 6,490 ft at the field, against limits of 6,350 and 6,550 ft."""


class Night:
    """A field, its recorder, and a view that shows its boards."""

    def __init__(self, folder: Path, first: datetime) -> None:
        self.field: Field = make_field(folder)
        self.field.write()
        self.field.clock.move_to(first)
        self.recorder = self.field.open()
        self.view = BoardView()
        self.view.resize(1440, 900)
        self.state: BoardState | None = None

    @property
    def board(self) -> BoardPage:
        return self.view.board

    def send(self, when: datetime, temperature_c: float) -> BoardState:
        self.field.append(f"{iso_utc(when)},1013.25,{temperature_c}\n")
        return self.poll(when)

    def poll(self, when: datetime) -> BoardState:
        self.field.clock.move_to(when)
        self.state = self.recorder.poll()
        self.show(when)
        return self.state

    def show(self, when: datetime) -> None:
        """Show the newest board at a time, as the window does once a second."""
        assert self.state is not None
        self.view.show_state(self.state, when)
        self.view.ensure_plot()
        image_of(self.view)

    def texts(self, part: str) -> list[str]:
        return [each.text.text for each in texts_of(self.view) if each.part == part]

    def hours(self) -> list[tuple[str, float]]:
        """Return the named hours under the plot with their places, from the left."""
        bottom = max(each.ink.top() for each in texts_of(self.view) if each.part == "BoardPage")
        named = [
            (each.text.text, each.ink.center().x())
            for each in texts_of(self.view)
            if each.part == "BoardPage" and each.ink.top() > bottom - 4
        ]
        return sorted(named, key=lambda one: one[1])


def range_of(night: Night) -> tuple[float, float]:
    axis = night.board.rows.axis
    assert axis is not None
    return axis.low_ft, axis.high_ft


MIDNIGHT = datetime(2026, 7, 15, 7, tzinfo=UTC)  # 00:00 in Los Angeles, daylight saving time


def test_at_midnight_the_axis_turns_over_and_the_hold_stays(qtbot: QtBot, tmp_path: Path) -> None:
    night = Night(tmp_path, MIDNIGHT - 12 * MINUTE)
    qtbot.addWidget(night.view)
    night.send(MIDNIGHT - 12 * MINUTE, WARM_C)
    night.send(MIDNIGHT - 6 * MINUTE, HOT_C)
    night.send(MIDNIGHT - MINUTE, HOT_C)
    assert [text for text, _ in night.hours()][-1] == "00:00"
    assert "now 23:59" in night.texts("BoardPage")

    night.show(MIDNIGHT + timedelta(seconds=1))  # the board of before midnight, until the next poll
    assert night.view.view is not None
    assert night.view.view.reading.cause is Cause.NONE
    assert next(text for text, _ in night.hours()) == "00:00"
    assert "now 00:00" in night.texts("BoardPage")
    assert "HOLD" in night.texts("RowPanel")

    night.poll(MIDNIGHT + timedelta(seconds=5))
    assert next(text for text, _ in night.hours()) == "00:00"
    assert row_of(night.poll(MIDNIGHT + timedelta(seconds=6)), "trainer").state is State.HOLD
    assert "HOLD" in night.texts("RowPanel")
    assert overlaps(texts_of(night.view)) == []


def test_the_altitudes_of_yesterday_do_not_stretch_todays_axis(qtbot: QtBot, tmp_path: Path) -> None:
    night = Night(tmp_path, MIDNIGHT - 45 * MINUTE)
    qtbot.addWidget(night.view)
    for number, temperature_c in enumerate((27.0, 32.5, 38.0, 43.5, 38.0, 32.5, 27.0, 25.0)):
        night.send(MIDNIGHT - (45 - 6 * number) * MINUTE, temperature_c)
    high_before = range_of(night)[1]
    night.show(MIDNIGHT + timedelta(seconds=1))
    night.poll(MIDNIGHT + timedelta(seconds=5))
    night.send(MIDNIGHT + MINUTE, 25.0)
    assert high_before > 8_000  # 43.5 °C are some 8,150 ft
    assert range_of(night)[1] <= 8_000  # 25 °C are some 6,200 ft; the axis shows 2,000 ft at least


@pytest.mark.parametrize(
    ("midnight", "length_h", "named"),
    [
        # Los Angeles: clocks go forward on 2026-03-08, back on 2026-11-01, at 02:00 local (US Code 15, section 260a).
        (datetime(2026, 3, 8, 8, tzinfo=UTC), 23, {"00:00": 0, "03:00": 2, "06:00": 5}),
        (datetime(2026, 11, 1, 7, tzinfo=UTC), 25, {"00:00": 0, "03:00": 4, "06:00": 7}),
        (datetime(2028, 2, 29, 8, tzinfo=UTC), 24, {"00:00": 0, "03:00": 3, "06:00": 6}),
    ],
)
def test_the_axis_of_an_odd_day_is_as_long_as_the_day(
    qtbot: QtBot, tmp_path: Path, midnight: datetime, length_h: int, named: dict[str, int]
) -> None:
    night = Night(tmp_path, midnight - 6 * MINUTE)
    qtbot.addWidget(night.view)
    night.send(midnight - 6 * MINUTE, HOT_C)  # a hold from before midnight keeps the axis from leaving the night out
    state = night.send(midnight + MINUTE, HOT_C)
    hours = dict(night.hours())
    start, end = hours["00:00"], night.board.rows.x()
    assert state.curve.day_end_us - state.curve.day_start_us == length_h * 3_600_000_000
    # From midnight to 21:00 local, whatever the clock did in between.
    shown_h = length_h - 3
    per_hour_px = (end - AXIS_PX) / shown_h
    for text, after_h in named.items():
        assert hours[text] - start == pytest.approx(after_h * per_hour_px, abs=1.5)
    assert len(hours) == len(night.hours()), "no hour is named twice"


def test_in_the_doubled_hour_now_moves_on_though_the_clock_repeats(qtbot: QtBot, tmp_path: Path) -> None:
    first = datetime(2026, 11, 1, 8, 30, tzinfo=UTC)  # 01:30 in Los Angeles, daylight saving time
    night = Night(tmp_path, first - 10 * MINUTE)
    qtbot.addWidget(night.view)
    places = []
    for hours in (0, 1):  # 01:30 in daylight saving time, and 01:30 in standard time
        when = first + timedelta(hours=hours)
        night.send(when - MINUTE, WARM_C + hours / 10)
        night.show(when)
        assert "now 01:30" in night.texts("BoardPage")
        assert night.board.plot is not None
        scene = night.board._scene
        assert scene is not None
        places.append(scene.time.px(scene.now) / scene.time.px(scene.time.end))
        header = " ".join(night.texts("Header"))
        assert ("08:30" if hours == 0 else "09:30") in header, "UTC beside the local time tells the two apart"
    assert places[1] > places[0]


def test_what_waits_for_acknowledgement_stays_over_midnight(qtbot: QtBot, tmp_path: Path) -> None:
    night = Night(tmp_path, MIDNIGHT - 12 * MINUTE)
    qtbot.addWidget(night.view)
    night.send(MIDNIGHT - 12 * MINUTE, WARM_C)
    state = night.send(MIDNIGHT - 6 * MINUTE, HOT_C)
    (held,) = state.changes
    assert any(held.label in text for text in night.texts("ChangesStrip"))
    night.poll(MIDNIGHT + timedelta(seconds=5))
    assert any(held.label in text for text in night.texts("ChangesStrip"))
    state = night.recorder.acknowledge([held.number], "MS")
    night.view.show_state(state, MIDNIGHT + timedelta(seconds=6))
    image_of(night.view)
    assert not any(held.label in text for text in night.texts("ChangesStrip"))


def test_a_board_of_before_midnight_goes_stale_at_its_time(qtbot: QtBot, tmp_path: Path) -> None:
    night = Night(tmp_path, MIDNIGHT - 12 * MINUTE)
    qtbot.addWidget(night.view)
    state = night.send(MIDNIGHT - 5 * MINUTE, COOL_C)
    assert row_of(state, "trainer").state is State.GO
    night.show(MIDNIGHT + 10 * MINUTE)
    assert "GO" in night.texts("RowPanel")
    night.show(MIDNIGHT + 10 * MINUTE + timedelta(seconds=1))
    assert "GO" not in night.texts("RowPanel")
    assert "NO DATA" in night.texts("RowPanel")
