"""Exceedance episodes: from entering hold to leaving it."""

from dataclasses import replace
from datetime import date

import pytest

from airfield_board.configuration.model import Quantity
from airfield_board.limits.rules import Episode
from tests.limits.record import Desk, Row, by_weight, limit_of, minute_of, rejected, suspect, us_at, valid

LIMIT = limit_of()


def ended(*rows: Row, stale_after_min: float = 15.0) -> Episode:
    (episode,) = Desk(LIMIT, stale_after_min=stale_after_min).take(rows).judge.take_ended()
    return episode


def still_open(*rows: Row) -> Episode:
    episode = Desk(LIMIT).take(rows).judge.open_episode()
    assert episode is not None
    return episode


def span(episode: Episode) -> tuple[float, float | None]:
    return minute_of(episode.start_us), None if episode.end_us is None else minute_of(episode.end_us)


def test_from_entering_hold_to_leaving_it() -> None:
    episode = ended(valid(0, 6000), valid(3, 6400), valid(8, 6500), valid(14, 6100), valid(25, 6000), valid(30, 6000))
    assert span(episode) == (3, 25)
    assert (episode.minutes, episode.minutes_without_data) == (22, 0)
    assert (episode.peak, episode.worst_margin, episode.limit, episode.unit) == (6500.0, -150.0, 6350.0, "ft")


def test_it_names_its_limit() -> None:
    key = ended(valid(0, 6400), valid(5, 6000), valid(15, 6000)).key
    assert (key.aircraft, key.operation, key.quantity) == ("trainer-2", "Departure", Quantity.DENSITY_ALTITUDE)


def test_it_begins_and_peaks_with_one_observation() -> None:
    episode = ended(valid(0, 6400), valid(5, 6000), valid(15, 6000))
    assert span(episode) == (0, 15)
    assert (episode.peak, episode.worst_margin) == (6400.0, -50.0)


def test_without_a_hold_there_is_none() -> None:
    judge = Desk(LIMIT).take([valid(0, 5000), suspect(5, 9000), valid(10, 6350)]).judge
    assert judge.open_episode() is None
    assert judge.take_ended() == []


def test_a_suspect_value_is_no_peak() -> None:
    episode = ended(valid(0, 6400), suspect(5, 9000), valid(10, 6000), valid(20, 6000))
    assert (episode.peak, episode.worst_margin) == (6400.0, -50.0)


def test_two_holds_are_two_episodes() -> None:
    rows = [valid(0, 6400), valid(5, 6000), valid(15, 6000), valid(20, 6500), valid(25, 6000), valid(35, 6000)]
    judge = Desk(LIMIT).take(rows).judge
    assert [(span(episode), episode.peak) for episode in judge.take_ended()] == [((0, 15), 6400.0), ((20, 35), 6500.0)]


def test_an_open_one_lasts_up_to_the_last_valid_observation() -> None:
    episode = still_open(valid(0, 6400), valid(7, 6450), rejected(9), suspect(10, 6700))
    assert span(episode) == (0, None)
    assert (episode.minutes, episode.peak) == (7, 6450.0)


def test_no_data_inside_it_is_counted_from_the_moment_of_staleness_to_the_next_valid_observation() -> None:
    episode = ended(valid(0, 6400), suspect(40, 6400), valid(45, 6000), valid(55, 6000))
    assert span(episode) == (0, 55)
    assert (episode.minutes, episode.minutes_without_data) == (55, 30)


def test_two_gaps_add_up() -> None:
    episode = ended(valid(0, 6400), valid(20, 6400), valid(45, 6000), valid(55, 6000))
    assert episode.minutes_without_data == 5 + 10


def test_no_data_after_the_last_valid_observation_lies_outside_an_open_one() -> None:
    episode = still_open(valid(0, 6400), valid(5, 6400), rejected(90))
    assert (episode.minutes, episode.minutes_without_data) == (5, 0)


def test_a_gap_before_the_last_valid_observation_counts_in_an_open_one() -> None:
    episode = still_open(valid(0, 6400), valid(25, 6400), rejected(90))
    assert (episode.minutes, episode.minutes_without_data) == (25, 10)


def test_no_data_outside_a_table_counts_while_valid_observations_go_on() -> None:
    # Valid observations without anything to compare: the episode lasts up to the last of them, without data.
    episode = still_open(valid(0, 6400), valid(5, float("nan")), valid(12, float("nan")))
    assert (episode.minutes, episode.minutes_without_data) == (12, 7)


def test_no_data_outside_a_table_and_then_stale_is_counted_once() -> None:
    rows = [valid(0, 6400), valid(5, float("nan")), rejected(60), valid(70, 6000), valid(80, 6000)]
    assert ended(*rows).minutes_without_data == 65


def test_by_weight_margins_are_those_at_the_least_weight() -> None:
    desk = Desk(by_weight({1950: 7400, 2450: 6550})).take([valid(0, 6600), valid(5, 7500), valid(10, 7450)])
    episode = desk.judge.open_episode()
    assert episode is not None
    assert (episode.limit, episode.worst_margin, episode.peak) == (7400.0, -100.0, 7500.0)


def test_the_limit_is_that_in_force_at_the_onset() -> None:
    low = replace(limit_of(6000), valid_from=date(2026, 7, 15))
    # Minute 0 is 08:00 local; the next local day begins at minute 960.
    desk = Desk(LIMIT, low, stale_after_min=2000).take([valid(0, 6400), valid(970, 6450)])
    episode = desk.judge.open_episode()
    assert episode is not None
    assert (episode.limit, episode.worst_margin) == (6350.0, -450.0)


def test_a_hold_that_cannot_be_told_any_more_ends_with_the_first_observation_of_a_day_without_a_limit() -> None:
    until = replace(LIMIT, valid_until=date(2026, 7, 14))
    desk = Desk(until, stale_after_min=60).take([valid(930, 6400), suspect(965, 6400), valid(970, 6400)])
    (episode,) = desk.judge.take_ended()
    assert span(episode) == (930, 970)
    assert desk.state is None
    assert desk.judge.open_episode() is None


def test_it_goes_over_into_the_unit_of_a_limit_that_comes_into_force() -> None:
    metres = replace(
        limit_of(1800, unit="m", near_band=150, deadband=50, off_delay_min=10), valid_from=date(2026, 7, 15)
    )
    desk = Desk(LIMIT, metres, stale_after_min=2000).take([valid(950, 6400), valid(970, 6300)])
    episode = desk.judge.open_episode()
    assert episode is not None
    assert episode.unit == "m"
    assert episode.peak == pytest.approx(6400 * 0.3048)
    assert episode.limit == pytest.approx(6350 * 0.3048)
    assert episode.worst_margin == pytest.approx(1800 - 6300 * 0.3048)
    assert us_at(950) == episode.start_us
