from collections.abc import Iterator
from datetime import UTC, datetime
from pathlib import Path
from zoneinfo import ZoneInfo

import pytest

from airfield_board.clock import SteppedClock
from airfield_board.limits.states import State
from airfield_board.resources import bundled_folder
from airfield_board.session.board_state import BoardState, Mode
from airfield_board.training.demo import DEMO_SPEED, DemoDay, demo_hours, running_clock, stepped_day

ZONE = ZoneInfo("America/Los_Angeles")


@pytest.fixture(scope="module")
def played(tmp_path_factory: pytest.TempPathFactory) -> list[BoardState]:
    return list(stepped_day(tmp_path_factory.mktemp("demo")))


def states_of(boards: list[BoardState], key: str) -> set[State]:
    return {row.state for board in boards for row in board.operations if row.key == key}


def at(boards: list[BoardState], hour: int, minute: int = 0) -> BoardState:
    when = datetime(2026, 7, 16, hour, minute, tzinfo=ZONE)
    return next(board for board in boards if board.assessed_at == when)


def test_the_day_goes_from_half_past_five_to_half_past_nine_in_about_three_minutes() -> None:
    first, last = demo_hours()
    assert first == datetime(2026, 7, 16, 12, 30, tzinfo=UTC)
    assert last == datetime(2026, 7, 17, 4, 30, tzinfo=UTC)
    assert (last - first).total_seconds() / DEMO_SPEED == pytest.approx(180)


def test_the_windows_clock_begins_with_the_day_and_ends_with_it() -> None:
    first, last = demo_hours()
    assert first <= running_clock().now() <= last


def test_it_is_never_live_and_all_is_recorded(played: list[BoardState]) -> None:
    assert len(played) == 193
    assert {board.mode for board in played} == {Mode.DEMO}
    assert all(board.recording for board in played)


def test_from_the_first_poll_on_there_is_a_fresh_reading(played: list[BoardState]) -> None:
    assert all(board.conditions is not None for board in played)


def test_the_air_is_as_the_day_was_meant(played: list[BoardState]) -> None:
    altitude_ft = {board.assessed_at: board.conditions.density_altitude_ft for board in played if board.conditions}
    assert altitude_ft[at(played, 6).assessed_at] == pytest.approx(5000, abs=100)
    assert max(altitude_ft.values()) == pytest.approx(7200, abs=50)
    assert altitude_ft[at(played, 21).assessed_at] == pytest.approx(5900, abs=100)


@pytest.mark.parametrize(
    ("key", "states"),
    [
        ("six-seat/Departure", {State.GO}),
        ("tourer-2-up/Departure", {State.GO, State.NEAR}),
        ("aerobatic/Practice", {State.GO, State.NEAR, State.HOLD}),
        ("trainer-2/Departure", {State.GO, State.NEAR, State.HOLD}),
        ("tow-plane-2/Aerotow", {State.GO, State.NEAR, State.REDUCED}),
        ("gyroplane/Departure", {State.NO_DATA}),
        ("survey-drone/Survey", {State.GO}),
    ],
)
def test_the_day_shows_every_state(played: list[BoardState], key: str, states: set[State]) -> None:
    assert states_of(played, key) == states


def test_the_local_order_is_in_force_and_goes_onto_hold_first(played: list[BoardState]) -> None:
    row = next(row for row in at(played, 9).operations if row.key == "trainer-2/Solo circuits")
    assert row.state is State.HOLD
    assert row.shown is not None
    assert row.shown.notice == "Local order 7"
    holding = [row.key for row in at(played, 9).operations if row.state is State.HOLD]
    assert holding == ["trainer-2/Solo circuits"]


def test_the_absurd_reading_is_not_used_and_says_why(played: list[BoardState]) -> None:
    reasons = [reason for _when, reason in played[-1].unused]
    assert len(reasons) == 1
    assert "87.0" in reasons[0]
    assert at(played, 11, 35).conditions is not None


def test_holds_clear_again_in_the_evening(played: list[BoardState]) -> None:
    last = {row.key: row.state for row in played[-1].operations}
    assert last["trainer-2/Departure"] in {State.NEAR, State.GO}
    assert last["trainer-2/Solo circuits"] is State.HOLD


@pytest.fixture
def day(tmp_path: Path) -> Iterator[DemoDay]:
    yield DemoDay(tmp_path, SteppedClock(demo_hours()[0]))


def test_a_playing_works_on_copies_in_its_own_folder(day: DemoDay, tmp_path: Path) -> None:
    before = {path: path.stat().st_mtime_ns for path in bundled_folder("demo_data").iterdir()}
    recorder = day.open_recorder()
    recorder.poll()
    recorder.close()
    assert {path: path.stat().st_mtime_ns for path in bundled_folder("demo_data").iterdir()} == before
    assert {"profile.yaml", "fleet.yaml", "observations.csv", "history.db"} <= {
        each.name for each in tmp_path.iterdir()
    }
    assert day.profile_path.parent == tmp_path


def test_the_file_is_fed_up_to_the_clocks_time_only(day: DemoDay, tmp_path: Path) -> None:
    assert day.feed() == 67  # every five minutes from 00:00 to 05:30
    assert day.feed() == 0
    assert (tmp_path / "observations.csv").read_text().splitlines()[-1].startswith("2026-07-16T05:30:00-07:00,")
