"""The rules, sentence by sentence; the numbers are made by hand.

The limit is 6,350 ft unless a test says otherwise, near band 500 ft, deadband 150 ft, off-delay 10 min: GO down from
5,850 ft, from NEAR LIMIT back to GO at 5,700 ft, off hold at 6,200 ft.
"""

import json

import pytest

from airfield_board.limits.rules import LimitMemory
from airfield_board.limits.states import State
from tests.limits.record import (
    Desk,
    by_weight,
    changes_of,
    confirmed,
    every,
    limit_of,
    minute_of,
    rejected,
    suspect,
    us_at,
    valid,
)

LIMIT = limit_of()
SLIGHT = 5e-7
"""Under 0.000001, so it counts as equal."""
ENOUGH = 2e-6
"""Over 0.000001, so it counts."""


class TestPlainComparison:
    @pytest.mark.parametrize(
        ("value", "state"),
        [
            (5000.0, "go"),
            (5850.0 - ENOUGH, "go"),
            (5850.0, "go"),  # below the limit by the near band: at least
            (5850.0 + SLIGHT, "go"),
            (5850.0 + ENOUGH, "near"),
            (6349.0, "near"),
            (6350.0, "near"),  # not beyond it
            (6350.0 + SLIGHT, "near"),
            (6350.0 + ENOUGH, "hold"),  # strictly greater
            (7000.0, "hold"),
        ],
    )
    def test_with_no_earlier_state(self, value: float, state: str) -> None:
        assert changes_of(LIMIT, valid(0, value)) == [(0, state)]

    def test_the_first_change_comes_from_nothing(self) -> None:
        desk = Desk(LIMIT).take([valid(0, 6000)])
        (change,) = desk.judge.take_changes()
        assert change.was is None
        assert (change.value, change.limit, change.unit) == (6000.0, 6350.0, "ft")

    def test_without_a_near_band_the_limit_itself_is_go(self) -> None:
        limit = limit_of(near_band=0, deadband=0)
        assert changes_of(limit, valid(0, 6350)) == [(0, "go")]
        assert changes_of(limit, valid(0, 6350 + ENOUGH)) == [(0, "hold")]

    def test_before_the_first_valid_observation_there_is_no_state(self) -> None:
        assert changes_of(LIMIT, suspect(0, 9000), rejected(5), suspect(30, 9000)) == []

    def test_a_value_that_is_not_known_is_no_data(self) -> None:
        assert changes_of(LIMIT, valid(0, float("nan"))) == [(0, "no_data")]
        assert changes_of(LIMIT, valid(0, 5000), valid(5, float("nan"))) == [(0, "go"), (5, "no_data")]


class TestOntoHold:
    def test_at_the_first_observation_beyond_the_limit(self) -> None:
        assert changes_of(LIMIT, valid(0, 5000), valid(5, 6350), valid(10, 6351)) == [
            (0, "go"),
            (5, "near"),
            (10, "hold"),
        ]

    def test_one_observation_is_enough(self) -> None:
        rows = [valid(0, 5000), valid(5, 7000), valid(10, 5000)]
        assert changes_of(LIMIT, rows) == [(0, "go"), (5, "hold")]

    def test_the_change_bears_value_and_limit(self) -> None:
        (change,) = Desk(LIMIT).take([valid(0, 6400)]).judge.take_changes()
        assert (change.value, change.limit) == (6400.0, 6350.0)


class TestOffHold:
    def test_at_the_first_observation_at_or_after_the_delay(self) -> None:
        rows = [valid(0, 6400), valid(5, 6200), valid(10, 6100), valid(15, 6150)]
        assert changes_of(LIMIT, rows) == [(0, "hold"), (15, "near")]

    def test_exactly_the_delay_is_enough_and_less_is_not(self) -> None:
        assert changes_of(LIMIT, valid(0, 6400), valid(5, 6200), valid(14.99, 6200)) == [(0, "hold")]
        assert changes_of(LIMIT, valid(0, 6400), valid(5, 6200), valid(15, 6200)) == [(0, "hold"), (15, "near")]

    def test_it_is_the_first_observation_after_the_delay_not_the_moment(self) -> None:
        rows = [valid(0, 6400), valid(5, 6200), valid(14, 6200), valid(17, 6200)]
        assert changes_of(LIMIT, rows) == [(0, "hold"), (17, "near")]

    def test_the_run_begins_at_or_below_limit_less_deadband(self) -> None:
        over = [valid(0, 6400), *every(5, 5, 60, 6200 + ENOUGH)]
        assert changes_of(LIMIT, over) == [(0, "hold")]
        equal = [valid(0, 6400), *every(5, 5, 60, 6200 + SLIGHT)]
        assert changes_of(LIMIT, equal) == [(0, "hold"), (15, "near")]

    def test_below_the_limit_but_in_the_deadband_is_still_hold(self) -> None:
        assert changes_of(LIMIT, valid(0, 6400), every(5, 5, 300, 6300)) == [(0, "hold")]

    def test_a_valid_observation_above_limit_less_deadband_ends_the_run(self) -> None:
        rows = [valid(0, 6400), valid(5, 6200), valid(10, 6201), valid(15, 6200), valid(20, 6200), valid(25, 6200)]
        assert changes_of(LIMIT, rows) == [(0, "hold"), (25, "near")]

    def test_a_suspect_observation_above_limit_less_deadband_ends_the_run(self) -> None:
        rows = [valid(0, 6400), valid(5, 6200), suspect(10, 6300), valid(15, 6200), valid(20, 6200), valid(25, 6200)]
        assert changes_of(LIMIT, rows) == [(0, "hold"), (25, "near")]

    def test_a_suspect_observation_at_limit_less_deadband_does_not(self) -> None:
        rows = [valid(0, 6400), valid(5, 6200), suspect(10, 6200), valid(15, 6200)]
        assert changes_of(LIMIT, rows) == [(0, "hold"), (15, "near")]

    def test_a_suspect_observation_neither_begins_nor_completes_a_run(self) -> None:
        rows = [valid(0, 6400), suspect(5, 6000), valid(10, 6000), suspect(20, 6000), valid(21, 6000)]
        assert changes_of(LIMIT, rows) == [(0, "hold"), (21, "near")]

    def test_a_suspect_observation_without_a_value_cannot_be_known_to_be_clear(self) -> None:
        rows = [valid(0, 6400), valid(5, 6200), suspect(10, float("nan")), valid(15, 6200), valid(25, 6200)]
        assert changes_of(LIMIT, rows) == [(0, "hold"), (25, "near")]

    def test_rejected_observations_do_not_end_the_run(self) -> None:
        rows = [valid(0, 6400), valid(5, 6200), rejected(10), valid(15, 6200)]
        assert changes_of(LIMIT, rows) == [(0, "hold"), (15, "near")]

    def test_without_a_delay_the_first_clear_observation_ends_it(self) -> None:
        limit = limit_of(off_delay_min=0)
        assert changes_of(limit, valid(0, 6400), valid(5, 6201), valid(6, 6200)) == [(0, "hold"), (6, "near")]

    def test_without_a_deadband_the_limit_itself_is_clear(self) -> None:
        limit = limit_of(deadband=0, off_delay_min=0)
        assert changes_of(limit, valid(0, 6400), valid(5, 6350)) == [(0, "hold"), (5, "near")]
        assert changes_of(limit, valid(0, 6400), valid(5, 6350 + ENOUGH)) == [(0, "hold")]

    @pytest.mark.parametrize(("value", "state"), [(5850.0, "go"), (5851.0, "near"), (6200.0, "near")])
    def test_once_cleared_the_state_is_the_plain_comparison(self, value: float, state: str) -> None:
        rows = [valid(0, 6400), valid(5, 6200), valid(10, 6200), valid(15, value)]
        assert changes_of(LIMIT, rows) == [(0, "hold"), (15, state)]

    def test_two_corrections_at_one_time_are_judged_one_after_the_other(self) -> None:
        desk = Desk(LIMIT).take([valid(0, 5000)]).take([valid(0, 6400)])
        assert desk.changes() == [(0, "go"), (0, "hold")]

    def test_when_the_present_run_would_end_the_hold(self) -> None:
        desk = Desk(LIMIT).take([valid(0, 6400)])
        standing = desk.judge.schedule.at(us_at(0))
        assert standing is not None
        assert desk.judge.earliest_end_us(standing) is None
        desk.take([valid(5, 6200), valid(8, 6200)])
        assert desk.judge.earliest_end_us(standing) == us_at(15)
        assert desk.judge.needed_delay_us(standing) == us_at(10) - us_at(0)
        desk.take([valid(15, 6200)])
        assert desk.judge.earliest_end_us(standing) is None


class TestNoDataInAHold:
    def test_it_shows_no_data_and_hold_again_at_the_next_valid_observation(self) -> None:
        rows = [valid(0, 6400), valid(20, 6400)]
        assert changes_of(LIMIT, rows) == [(0, "hold"), (15, "no_data"), (20, "hold")]

    def test_it_never_clears_a_hold_however_low_the_next_value(self) -> None:
        rows = [valid(0, 6400), valid(60, 3000)]
        assert changes_of(LIMIT, rows) == [(0, "hold"), (15, "no_data"), (60, "hold")]

    def test_not_even_without_a_delay(self) -> None:
        rows = [valid(0, 6400), valid(60, 3000), valid(61, 3000)]
        expected = [(0, "hold"), (15, "no_data"), (60, "hold"), (61, "go")]
        assert changes_of(limit_of(off_delay_min=0), rows) == expected

    def test_it_ends_the_run_and_the_first_observation_after_it_may_begin_one(self) -> None:
        rows = [valid(0, 6400), valid(1, 6000), valid(17, 6000), valid(26, 6000), valid(27, 6000)]
        assert changes_of(LIMIT, rows) == [(0, "hold"), (16, "no_data"), (17, "hold"), (27, "near")]

    def test_the_first_observation_after_it_begins_none_where_it_is_above(self) -> None:
        rows = [valid(0, 6400), valid(17, 6300), valid(27, 6000), valid(36, 6000), valid(37, 6000)]
        assert changes_of(LIMIT, rows) == [(0, "hold"), (15, "no_data"), (17, "hold"), (37, "near")]

    def test_a_suspect_observation_does_not_bring_the_hold_back(self) -> None:
        rows = [valid(0, 6400), suspect(20, 6400), valid(22, 6400)]
        assert changes_of(LIMIT, rows) == [(0, "hold"), (15, "no_data"), (22, "hold")]

    def test_rejected_observations_do_not_keep_it_fresh(self) -> None:
        rows = [valid(0, 6400), rejected(5), rejected(10), rejected(16)]
        assert changes_of(LIMIT, rows) == [(0, "hold"), (15, "no_data")]


class TestRestart:
    """Confirmed steps and gaps of over 3 h: runs start anew, holds in force before need at least 60 min."""

    def test_after_a_confirmed_step_a_hold_needs_an_hour(self) -> None:
        rows = [valid(0, 6400), confirmed(5, 6000), *every(5, 10, 70, 6000)]
        assert changes_of(LIMIT, rows) == [(0, "hold"), (65, "near")]

    def test_the_run_starts_anew_with_the_confirming_observation(self) -> None:
        rows = [valid(0, 6400), valid(5, 6000), confirmed(12, 6000), *every(10, 22, 82, 6000)]
        assert changes_of(LIMIT, rows) == [(0, "hold"), (72, "near")]

    def test_a_confirming_observation_above_begins_no_run(self) -> None:
        rows = [valid(0, 6400), confirmed(5, 6300), *every(10, 15, 85, 6000)]
        assert changes_of(LIMIT, rows) == [(0, "hold"), (75, "near")]

    def test_it_needs_the_hour_even_where_the_run_is_broken_in_between(self) -> None:
        rows = [valid(0, 6400), confirmed(5, 6000), valid(15, 6300), *every(10, 25, 95, 6000)]
        assert changes_of(LIMIT, rows) == [(0, "hold"), (85, "near")]

    def test_a_longer_off_delay_stays(self) -> None:
        limit = limit_of(off_delay_min=90)
        rows = [valid(0, 6400), confirmed(10, 6000), *every(10, 20, 120, 6000)]
        assert changes_of(limit, rows) == [(0, "hold"), (100, "near")]

    def test_a_hold_that_begins_with_the_step_needs_no_hour(self) -> None:
        rows = [valid(0, 5000), confirmed(5, 6400), valid(10, 6000), valid(20, 6000)]
        assert changes_of(LIMIT, rows) == [(0, "go"), (5, "hold"), (20, "near")]

    def test_the_next_hold_needs_no_hour(self) -> None:
        rows = [valid(0, 6400), confirmed(5, 6000), *every(5, 10, 65, 6000), valid(70, 6400), *every(5, 75, 85, 6000)]
        assert changes_of(LIMIT, rows) == [(0, "hold"), (65, "near"), (70, "hold"), (85, "near")]

    def test_after_more_than_three_hours_without_a_valid_observation_a_hold_needs_an_hour(self) -> None:
        rows = [valid(0, 6400), *every(10, 181, 251, 6000)]
        assert changes_of(LIMIT, rows) == [(0, "hold"), (15, "no_data"), (181, "hold"), (241, "near")]

    def test_three_hours_exactly_are_not_more(self) -> None:
        rows = [valid(0, 6400), *every(10, 180, 200, 6000)]
        assert changes_of(LIMIT, rows) == [(0, "hold"), (15, "no_data"), (180, "hold"), (190, "near")]

    def test_suspect_and_rejected_observations_do_not_shorten_the_gap(self) -> None:
        rows = [valid(0, 6400), suspect(90, 6400), rejected(170), *every(10, 185, 255, 6000)]
        assert changes_of(LIMIT, rows) == [(0, "hold"), (15, "no_data"), (185, "hold"), (245, "near")]

    def test_runs_start_anew_also_where_nothing_is_stale(self) -> None:
        rows = [valid(0, 6400), valid(5, 6000), *every(60, 200, 320, 6000)]
        assert changes_of(LIMIT, rows, stale_after_min=600) == [(0, "hold"), (260, "near")]

    def test_outside_a_hold_a_gap_leaves_the_plain_comparison(self) -> None:
        assert changes_of(LIMIT, valid(0, 5800), valid(300, 6000)) == [(0, "go"), (15, "no_data"), (300, "near")]

    def test_outside_a_hold_a_confirmed_step_changes_nothing_else(self) -> None:
        assert changes_of(LIMIT, valid(0, 6000), confirmed(5, 5800)) == [(0, "near")]


class TestNearToGo:
    def test_at_limit_less_near_band_less_deadband(self) -> None:
        assert changes_of(LIMIT, valid(0, 6000), valid(5, 5700)) == [(0, "near"), (5, "go")]
        assert changes_of(LIMIT, valid(0, 6000), valid(5, 5700 + SLIGHT)) == [(0, "near"), (5, "go")]

    @pytest.mark.parametrize("value", [5700 + ENOUGH, 5800.0, 5850.0])
    def test_not_above_it(self, value: float) -> None:
        assert changes_of(LIMIT, valid(0, 6000), every(5, 5, 50, value)) == [(0, "near")]

    def test_go_lasts_up_to_the_near_band(self) -> None:
        assert changes_of(LIMIT, valid(0, 5700), valid(5, 5850), valid(10, 5851)) == [(0, "go"), (10, "near")]

    def test_after_no_data_outside_a_hold_it_is_the_plain_comparison(self) -> None:
        rows = [valid(0, 6000), valid(20, 5800)]
        assert changes_of(LIMIT, rows) == [(0, "near"), (15, "no_data"), (20, "go")]

    def test_after_a_hold_that_has_cleared_it_is_the_plain_comparison(self) -> None:
        rows = [valid(0, 6400), valid(5, 6000), valid(15, 5800)]
        assert changes_of(LIMIT, rows) == [(0, "hold"), (15, "go")]


TABLE = by_weight({1950: 7400, 2200: 6950, 2450: 6550})
"""An invented tow plane: 6,550 ft at the greatest weight, 7,400 ft at the least."""


class TestLimitByWeight:
    @pytest.mark.parametrize(
        ("value", "state"),
        [
            (6050.0, "go"),
            (6051.0, "near"),
            (6550.0 + SLIGHT, "near"),
            (6550.0 + ENOUGH, "reduced"),
            (7400.0 + SLIGHT, "reduced"),
            (7400.0 + ENOUGH, "hold"),
        ],
    )
    def test_plain_comparison(self, value: float, state: str) -> None:
        assert changes_of(TABLE, valid(0, value)) == [(0, state)]

    def test_reduced_to_near_at_the_limit_at_the_greatest_weight_less_deadband(self) -> None:
        assert changes_of(TABLE, valid(0, 6600), valid(5, 6400)) == [(0, "reduced"), (5, "near")]
        assert changes_of(TABLE, valid(0, 6600), every(5, 5, 60, 6400 + ENOUGH)) == [(0, "reduced")]
        assert changes_of(TABLE, valid(0, 6600), valid(5, 6400 + SLIGHT)) == [(0, "reduced"), (5, "near")]

    def test_straight_from_reduced_to_go_as_from_near(self) -> None:
        assert changes_of(TABLE, valid(0, 6600), valid(5, 5900)) == [(0, "reduced"), (5, "go")]
        assert changes_of(TABLE, valid(0, 6600), valid(5, 5900 + ENOUGH)) == [(0, "reduced"), (5, "near")]

    def test_worse_at_once(self) -> None:
        rows = [valid(0, 6000), valid(5, 6500), valid(10, 6551), valid(15, 7401)]
        assert changes_of(TABLE, rows) == [(0, "go"), (5, "near"), (10, "reduced"), (15, "hold")]

    def test_a_hold_clears_at_the_limit_at_the_least_weight_less_deadband(self) -> None:
        rows = [valid(0, 7500), valid(5, 7250), valid(15, 7250)]
        assert changes_of(TABLE, rows) == [(0, "hold"), (15, "reduced")]
        assert changes_of(TABLE, valid(0, 7500), every(5, 5, 60, 7250 + ENOUGH)) == [(0, "hold")]

    @pytest.mark.parametrize(("value", "state"), [(6551.0, "reduced"), (6550.0, "near"), (6000.0, "go")])
    def test_once_cleared_the_state_is_the_plain_comparison(self, value: float, state: str) -> None:
        rows = [valid(0, 7500), valid(5, 7000), valid(15, value)]
        assert changes_of(TABLE, rows) == [(0, "hold"), (15, state)]

    def test_limit_is_that_at_the_greatest_weight_but_in_hold_that_at_the_least(self) -> None:
        desk = Desk(TABLE).take([valid(0, 6600), valid(5, 7401), valid(10, 7000), valid(20, 6000)])
        limits = [(str(change.state), change.limit) for change in desk.judge.take_changes()]
        assert limits == [("reduced", 6550.0), ("hold", 7400.0), ("go", 6550.0)]

    def test_small_near_band_from_reduced(self) -> None:
        # Near band 50, deadband 150: GO only at 6,350, though the plain comparison says GO at 6,500.
        table = by_weight({1950: 7400, 2450: 6550}, near_band=50)
        rows = [valid(0, 6600), valid(5, 6450), valid(10, 6400), valid(15, 6351), valid(20, 6350)]
        assert changes_of(table, rows) == [(0, "reduced"), (10, "near"), (20, "go")]


class TestSuspect:
    @pytest.mark.parametrize("value", [5000.0, 6000.0])
    def test_one_beyond_the_limit_makes_go_and_near_no_data_from_its_time(self, value: float) -> None:
        changes = changes_of(LIMIT, valid(0, value), suspect(5, 6351))
        assert changes[1:] == [(5, "no_data")]

    def test_until_the_next_valid_one(self) -> None:
        rows = [valid(0, 5000), suspect(5, 6351), suspect(7, 5000), rejected(8), valid(10, 5000)]
        assert changes_of(LIMIT, rows) == [(0, "go"), (5, "no_data"), (10, "go")]

    def test_then_the_state_is_the_plain_comparison(self) -> None:
        rows = [valid(0, 6000), suspect(5, 6351), valid(10, 5800)]
        assert changes_of(LIMIT, rows) == [(0, "near"), (5, "no_data"), (10, "go")]

    @pytest.mark.parametrize("value", [5000.0, 5851.0, 6350.0, 6350.0 + SLIGHT])
    def test_one_within_the_limit_changes_nothing(self, value: float) -> None:
        assert changes_of(LIMIT, valid(0, 5000), suspect(5, value), valid(10, 5000)) == [(0, "go")]

    def test_it_never_makes_a_hold(self) -> None:
        assert changes_of(LIMIT, valid(0, 5000), suspect(5, 9000)) == [(0, "go"), (5, "no_data")]

    def test_it_leaves_a_hold_alone(self) -> None:
        assert changes_of(LIMIT, valid(0, 6400), suspect(5, 9000), suspect(7, 3000)) == [(0, "hold")]

    def test_by_weight_one_that_would_be_reduced_takes_go_and_near(self) -> None:
        assert changes_of(TABLE, valid(0, 6000), suspect(5, 6551)) == [(0, "go"), (5, "no_data")]
        assert changes_of(TABLE, valid(0, 6500), suspect(5, 6551)) == [(0, "near"), (5, "no_data")]

    def test_by_weight_one_that_would_be_reduced_leaves_reduced(self) -> None:
        assert changes_of(TABLE, valid(0, 6600), suspect(5, 7400)) == [(0, "reduced")]

    def test_by_weight_one_that_would_be_hold_takes_reduced_too(self) -> None:
        assert changes_of(TABLE, valid(0, 6600), suspect(5, 7401)) == [(0, "reduced"), (5, "no_data")]

    def test_it_does_not_keep_the_observation_fresh(self) -> None:
        rows = [valid(0, 5000), suspect(10, 5000), suspect(16, 5000)]
        assert changes_of(LIMIT, rows) == [(0, "go"), (15, "no_data")]

    def test_one_that_would_only_be_unknown_changes_nothing(self) -> None:
        assert changes_of(LIMIT, valid(0, 5000), suspect(5, float("nan"))) == [(0, "go")]


class TestStale:
    def test_from_the_moment_it_became_so(self) -> None:
        assert changes_of(LIMIT, valid(0, 5000), rejected(40)) == [(0, "go"), (15, "no_data")]

    def test_older_than_not_as_old_as(self) -> None:
        assert changes_of(LIMIT, valid(0, 5000), rejected(15)) == [(0, "go")]
        assert changes_of(LIMIT, valid(0, 5000), valid(15, 5000)) == [(0, "go")]

    def test_every_state_becomes_no_data(self) -> None:
        rows = {"go": 5000, "near": 6500, "reduced": 6600, "hold": 7500}
        for state, value in rows.items():
            assert changes_of(TABLE, valid(0, value), rejected(16)) == [(0, state), (15, "no_data")]

    def test_after_the_last_row_nothing_more_happens(self) -> None:
        assert changes_of(LIMIT, valid(0, 5000)) == [(0, "go")]

    def test_it_is_told_once(self) -> None:
        desk = Desk(LIMIT).take([valid(0, 5000)]).pass_to(16).pass_to(17).take([rejected(18), suspect(20, 9000)])
        assert desk.changes() == [(0, "go"), (15, "no_data")]

    def test_time_passes_between_valid_rows_too(self) -> None:
        rows = [valid(0, 5000), valid(16, 5000), valid(40, 6400)]
        expected = [(0, "go"), (15, "no_data"), (16, "go"), (31, "no_data"), (40, "hold")]
        assert changes_of(LIMIT, rows) == expected

    def test_a_change_to_no_data_bears_no_value(self) -> None:
        desk = Desk(LIMIT).take([valid(0, 5000), rejected(40)])
        change = desk.judge.take_changes()[-1]
        assert (change.was, change.value, change.limit, change.unit) == (State.GO, None, None, "ft")

    def test_the_memory_says_what_it_was_and_why(self) -> None:
        memory = Desk(LIMIT).take([valid(0, 5000), valid(5, 6000), rejected(40)]).judge.memory
        assert (memory.was, minute_of(memory.was_us)) == (State.NEAR, 5)
        assert memory.reason


class TestGuardedAcceptance:
    """Value + expanded uncertainty is compared, and every value and margin is that one."""

    LIMIT = limit_of(guarded=True)

    @pytest.mark.parametrize(("value", "state"), [(5770.0, "go"), (5771.0, "near"), (6270.0, "near"), (6271.0, "hold")])
    def test_plain_comparison(self, value: float, state: str) -> None:
        assert changes_of(self.LIMIT, valid(0, value, uncertainty=80)) == [(0, state)]
        assert changes_of(LIMIT, valid(0, value, uncertainty=80))[0][1] != "hold"

    def test_off_hold(self) -> None:
        low = [valid(minute, 6120, uncertainty=80) for minute in (5, 15)]
        assert changes_of(self.LIMIT, valid(0, 6400), low) == [(0, "hold"), (15, "near")]
        high = [valid(minute, 6121, uncertainty=80) for minute in (5, 15)]
        assert changes_of(self.LIMIT, valid(0, 6400), high) == [(0, "hold")]

    def test_value_peak_and_worst_margin(self) -> None:
        desk = Desk(self.LIMIT).take([valid(0, 6300, uncertainty=80), valid(5, 6390, uncertainty=60)])
        (change,) = desk.judge.take_changes()
        episode = desk.judge.open_episode()
        assert episode is not None
        assert (change.value, episode.peak, episode.worst_margin) == (6380.0, 6450.0, -100.0)

    def test_an_uncertainty_that_is_not_known_is_no_data(self) -> None:
        assert changes_of(self.LIMIT, valid(0, 5000, uncertainty=float("nan"))) == [(0, "no_data")]


class TestMemory:
    def test_it_goes_through_json_without_loss(self) -> None:
        desk = Desk(LIMIT).take([valid(0, 6400.123456789), valid(5, 6100), rejected(40)])
        memory = desk.judge.memory
        assert LimitMemory.from_json(json.loads(json.dumps(memory.to_json()))) == memory

    def test_a_fresh_one_too(self) -> None:
        assert LimitMemory.from_json(json.loads(json.dumps(LimitMemory().to_json()))) == LimitMemory()

    def test_what_is_none_is_refused(self) -> None:
        with pytest.raises(KeyError):
            LimitMemory.from_json({})
        with pytest.raises(ValueError, match="green"):
            LimitMemory.from_json({**LimitMemory().to_json(), "state": "green"})

    def test_answers_are_given_once(self) -> None:
        desk = Desk(LIMIT).take([valid(0, 6400), valid(5, 6000), valid(15, 6000)])
        assert len(desk.judge.take_changes()) == 2
        assert len(desk.judge.take_ended()) == 1
        assert desk.judge.take_changes() == []
        assert desk.judge.take_ended() == []
