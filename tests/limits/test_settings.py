"""Limits that change while the program runs: what is tightened acts at once, a hold ends only at an observation."""

from dataclasses import replace
from datetime import date

import pytest

from airfield_board.configuration.model import Limit, Quantity
from airfield_board.limits.rules import LimitJudge
from airfield_board.limits.states import State
from tests.limits.record import (
    Desk,
    Row,
    by_weight,
    conditions_of_rows,
    limit_of,
    minute_of,
    rejected,
    schedule_of,
    suspect,
    us_at,
    valid,
)
from tests.limits.test_in_force import at_height, temperature_by_height


def changed(desk: Desk, limit: Limit, minute: float, newest: Row) -> list[tuple[float, str]]:
    """Put another limit in force at a minute, with the newest valid row as the air; the changes that follow at once."""
    desk.changes()
    desk.judge = LimitJudge(schedule_of(limit), desk.judge.memory)
    desk.judge.re_judge(us_at(minute), conditions_of_rows([newest], limit.quantity))
    return desk.changes()


@pytest.mark.parametrize(
    ("limit", "state"),
    [
        (limit_of(5900), "hold"),
        (limit_of(6100), "near"),
        (limit_of(6350, near_band=600), "near"),
        (by_weight({1950: 7000, 2450: 5900}), "reduced"),
    ],
)
def test_what_is_tightened_acts_at_once(limit: Limit, state: str) -> None:
    desk = Desk(limit_of(6600)).take([valid(0, 6000)])
    assert changed(desk, limit, 2, valid(0, 6000)) == [(2, state)]


def test_a_new_limit_has_a_state_at_once() -> None:
    assert changed(Desk(limit_of()), limit_of(6600), 2, valid(0, 6000)) == [(2, "go")]


def test_what_does_not_change_the_state_is_no_change() -> None:
    desk = Desk(limit_of(6350)).take([valid(0, 6000)])
    assert changed(desk, limit_of(6300), 2, valid(0, 6000)) == []


def test_an_episode_that_begins_so_begins_with_the_change() -> None:
    desk = Desk(limit_of(6350)).take([valid(0, 6000)])
    changed(desk, limit_of(5900), 2, valid(0, 6000))
    episode = desk.judge.open_episode()
    assert episode is not None
    assert (minute_of(episode.start_us), episode.minutes, episode.peak) == (2, 0, 6000.0)


def test_a_loosened_limit_ends_no_hold_before_an_observation() -> None:
    desk = Desk(limit_of(6350)).take([valid(0, 6400)])
    assert changed(desk, limit_of(7000), 2, valid(0, 6400)) == []
    assert desk.take([valid(5, 6400), valid(14, 6400), valid(15, 6400)]).changes() == [(15, "go")]


def test_a_tightened_limit_ends_a_run() -> None:
    desk = Desk(limit_of(6350)).take([valid(0, 6400), valid(5, 6100)])
    assert changed(desk, limit_of(6200), 6, valid(5, 6100)) == []
    assert desk.take([valid(15, 6100), valid(16, 6050), valid(26, 6050)]).changes() == [(26, "near")]


def test_one_that_leaves_the_run_clear_does_not_end_it() -> None:
    desk = Desk(limit_of(6350)).take([valid(0, 6400), valid(5, 6000)])
    assert changed(desk, limit_of(6200), 6, valid(5, 6000)) == []
    assert desk.take([valid(15, 6000)]).changes() == [(15, "near")]


def test_a_tightened_limit_counts_in_the_worst_margin() -> None:
    desk = Desk(limit_of(6350)).take([valid(0, 6400)])
    changed(desk, limit_of(6000), 2, valid(0, 6400))
    episode = desk.judge.open_episode()
    assert episode is not None
    assert (episode.worst_margin, episode.limit) == (-400.0, 6350.0)


def test_a_suspect_reading_keeps_its_no_data() -> None:
    desk = Desk(limit_of(6350)).take([valid(0, 5000), suspect(5, 9000)])
    assert changed(desk, limit_of(6200), 6, valid(0, 5000)) == []
    assert desk.state is State.NO_DATA


def test_a_table_that_now_reaches_ends_no_data_outside_it() -> None:
    row = at_height(0, 20, 1900)
    desk = Desk(temperature_by_height({2000: 45, 6000: 35})).take([row])
    assert changed(desk, temperature_by_height({1000: 45, 6000: 35}), 2, row) == [(2, "go")]


def test_a_table_that_no_longer_reaches_is_no_data() -> None:
    row = at_height(0, 20, 2100)
    desk = Desk(temperature_by_height({2000: 45, 6000: 35})).take([row])
    assert changed(desk, temperature_by_height({3000: 45, 6000: 35}), 2, row) == [(2, "no_data")]


def test_in_a_hold_it_ends_the_run() -> None:
    rows = [at_height(0, 46, 2100), at_height(5, 20, 2100)]
    desk = Desk(temperature_by_height({2000: 45, 6000: 35})).take(rows)
    changed(desk, temperature_by_height({3000: 45, 6000: 35}), 6, rows[-1])
    assert desk.judge.memory.run_us is None


def test_no_limit_today_changes_nothing_before_the_next_observation() -> None:
    desk = Desk(limit_of(6350)).take([valid(0, 6400)])
    gone = replace(limit_of(6350), valid_until=date(2026, 7, 13))
    assert changed(desk, gone, 2, valid(0, 6400)) == []
    assert desk.state is State.HOLD
    desk.take([valid(5, 6400)])
    assert desk.state is None


def test_a_limit_that_is_gone_ends_its_episode() -> None:
    desk = Desk(limit_of(6350)).take([valid(0, 6400), valid(5, 6500)])
    desk.judge.retire(us_at(7))
    (episode,) = desk.judge.take_ended()
    assert episode.end_us == us_at(7)
    assert (episode.minutes, episode.peak) == (7, 6500.0)
    assert desk.judge.open_episode() is None


def test_its_no_data_up_to_then_counts() -> None:
    desk = Desk(limit_of(6350)).take([valid(0, 6400), rejected(20)])
    desk.judge.retire(us_at(25))
    (episode,) = desk.judge.take_ended()
    assert (episode.minutes, episode.minutes_without_data) == (25, 10)


def test_without_a_hold_there_is_none_to_end() -> None:
    desk = Desk(limit_of(6350)).take([valid(0, 6000)])
    desk.judge.retire(us_at(7))
    assert desk.judge.take_ended() == []


def test_in_another_unit_the_open_episode_goes_over() -> None:
    desk = Desk(limit_of(6350)).take([valid(0, 6400)])
    changed(desk, limit_of(1900, unit="m", near_band=150, deadband=50), 2, valid(0, 6400))
    episode = desk.judge.open_episode()
    assert episode is not None
    assert episode.key.quantity is Quantity.DENSITY_ALTITUDE
    assert episode.unit == "m"
    assert episode.peak == pytest.approx(6400 * 0.3048)
