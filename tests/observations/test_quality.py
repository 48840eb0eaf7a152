"""The checks of one row, sentence by sentence; all cases and numbers made by hand from the rules' text."""

import math

import numpy as np
import pytest

from airfield_board.observations.observation import DewpointUse
from airfield_board.observations.quality import QualityMemory
from tests.observations.quality_rows import NAN, R, every, hours, judged, run, us, verdicts

INF = math.inf


def first_reason(row: R, now_min: float = 1e8) -> str:
    checked, memory = run([row], now_min=now_min)
    assert verdicts(checked) == "r"
    assert memory == QualityMemory()
    assert checked.dewpoint_use[0] == DewpointUse.DRY
    assert np.isnan(checked.dewpoint_used_c[0])
    return checked.reason[0]


class TestIncomplete:
    def test_no_altimeter_setting(self) -> None:
        assert first_reason(R(0, qnh=NAN)) == "incomplete: no altimeter setting"

    def test_no_temperature(self) -> None:
        assert first_reason(R(0, temp=NAN)) == "incomplete: no temperature"

    def test_no_time(self) -> None:
        assert first_reason(R(None)) == "incomplete: no time that can be read"

    def test_the_reader_s_own_words_are_kept(self) -> None:
        assert first_reason(R(0, fault="temperature '2_0' is no plain number")) == (
            "incomplete: temperature '2_0' is no plain number"
        )

    def test_an_empty_dew_point_is_no_fault_by_itself(self) -> None:
        assert judged([R(0, dew=NAN)]) == "v"

    def test_comes_before_range(self) -> None:
        assert first_reason(R(0, qnh=2000.0, temp=NAN)).startswith("incomplete")

    def test_rows_without_a_time_come_first_and_are_not_late(self) -> None:
        _, memory = run([R(0)])
        checked, _ = run([R(5), R(None), R(6)], memory=memory)
        assert verdicts(checked) == "rvv"
        assert not checked.late.any()
        assert checked.rows.raw[0] == repr(R(None))


class TestRange:
    @pytest.mark.parametrize(
        "row",
        [
            R(0, qnh=850.0),
            R(0, qnh=1085.0),
            R(0, temp=-60.0, dew=-61.0),
            R(0, temp=60.0),
            R(0, temp=-60.0, dew=-80.0),
            R(0, temp=40.0, dew=35.0),
            R(0, temp=20.0, dew=21.0),
            # 19.1 + 1 is 20.1, whatever the binary fractions say.
            R(0, temp=19.1, dew=20.1),
            R(0, qnh=850.0 - 9e-7),
        ],
    )
    def test_the_bounds_are_inside(self, row: R) -> None:
        assert judged([row]) == "v"

    @pytest.mark.parametrize(
        ("row", "words"),
        [
            (R(0, qnh=849.9), "altimeter setting 849.9 hPa"),
            (R(0, qnh=1085.1), "altimeter setting 1085.1 hPa"),
            (R(0, qnh=850.0 - 2e-6), "altimeter setting"),
            (R(0, qnh=INF), "altimeter setting"),
            (R(0, temp=-60.1, dew=-70.0), "temperature -60.1"),
            (R(0, temp=60.1), "temperature 60.1"),
            (R(0, temp=-INF), "temperature"),
            (R(0, dew=-80.1), "dew point -80.1"),
            (R(0, temp=40.0, dew=35.1), "dew point 35.1"),
            (R(0, temp=20.0, dew=21.1), "over 1 °C above the temperature 20.0"),
        ],
    )
    def test_beyond_them_is_outside(self, row: R, words: str) -> None:
        reason = first_reason(row)
        assert reason.startswith("range: ")
        assert words in reason

    def test_comes_before_elevation(self) -> None:
        assert first_reason(R(0, qnh=2000.0, elevation=0.0)).startswith("range")


class TestElevation:
    @pytest.mark.parametrize("elevation_m", [1170.0, 1200.0, 1230.0, NAN])
    def test_up_to_30_m_apart_or_not_given(self, elevation_m: float) -> None:
        assert judged([R(0, elevation=elevation_m)]) == "v"

    @pytest.mark.parametrize("elevation_m", [1169.9, 1230.1, INF])
    def test_over_30_m_apart(self, elevation_m: float) -> None:
        assert first_reason(R(0, elevation=elevation_m)).startswith("elevation: ")

    def test_a_foot_s_rounding_decides_nothing(self) -> None:
        checked, _ = run([R(0, elevation=(4000.0 + 30.0 / 0.3048) * 0.3048)], elevation_m=4000.0 * 0.3048)
        assert verdicts(checked) == "v"

    def test_nothing_to_compare_with(self) -> None:
        assert verdicts(run([R(0, elevation=0.0)], elevation_m=NAN)[0]) == "v"

    def test_comes_before_time(self) -> None:
        assert first_reason(R(10, elevation=0.0), now_min=0).startswith("elevation")


class TestTime:
    def test_five_minutes_ahead_are_accepted(self) -> None:
        assert verdicts(run([R(5)], now_min=0)[0]) == "v"

    def test_more_is_rejected(self) -> None:
        assert first_reason(R(5 + 1 / 60), now_min=0) == "time: 5 min in the future by the clock"
        assert first_reason(R(90.5), now_min=0) == "time: 90.5 min in the future by the clock"

    def test_a_row_of_the_future_changes_nothing_for_those_after_it(self) -> None:
        checked, memory = run([R(0), R(10, qnh=900.0)], now_min=0)
        assert verdicts(checked) == "vr"
        assert memory == run([R(0)])[1]

    def test_comes_before_the_missing_dew_point(self) -> None:
        checked, _ = run([R(10, dew=NAN)], humidity="moist", now_min=0)
        assert checked.reason[0].startswith("time")


class TestStuck:
    """Hourly rows of one temperature and altimeter setting."""

    def frozen(self, count: int, start_h: float = 0.0) -> list[R]:
        return [R(hours(start_h + k)) for k in range(count)]

    def test_twelve_hours_are_stuck_and_stay_so(self) -> None:
        checked, memory = run(self.frozen(16))
        assert verdicts(checked) == "v" * 12 + "r" * 4
        assert checked.reason[12] == "stuck: temperature and altimeter setting the same to the last digit for 12 h"
        assert checked.reason[15].endswith("for 15 h")
        assert memory.newest_us == us(hours(11))

    def test_a_microsecond_less_is_not(self) -> None:
        assert judged([*self.frozen(12), R(hours(12) - 1e-6 / 60)]) == "v" * 13

    def test_warned_from_six_hours_on(self) -> None:
        checked, _ = run(self.frozen(9))
        assert verdicts(checked) == "v" * 9
        assert sorted(checked.reason) == [6, 7, 8]
        assert "the same to the last digit for 6 h" in checked.reason[6]

    @pytest.mark.parametrize("other", [R(0, temp=20.1), R(0, qnh=1013.1), R(0, temp=20.0 + 1e-12)])
    def test_another_valid_value_between_starts_anew(self, other: R) -> None:
        rows = self.frozen(30)
        rows[6] = other._replace(minute=hours(6))
        checked, _ = run(rows)
        assert verdicts(checked) == "v" * 19 + "r" * 11

    def test_another_dew_point_does_not(self) -> None:
        rows = [row._replace(dew=10.0 + 0.1 * k) for k, row in enumerate(self.frozen(13))]
        assert judged(rows) == "v" * 12 + "r"

    @pytest.mark.parametrize("between", [R(0, qnh=1300.0), R(0, temp=NAN), R(0, temp=45.0)])
    def test_a_rejected_or_suspect_value_between_does_not(self, between: R) -> None:
        rows = self.frozen(13)
        rows[6] = between._replace(minute=hours(6))
        checked, _ = run(rows)
        assert verdicts(checked)[5:8] in {"vrv", "vsv"}
        assert verdicts(checked)[12] == "r"

    def test_a_gap_of_three_hours_does_not_but_a_longer_one_does(self) -> None:
        assert judged([*self.frozen(10), *self.frozen(4, 12)]) == "v" * 10 + "r" * 4
        gap_h = 3 + 1 / 3600
        assert judged([*self.frozen(10), *self.frozen(13, 9 + gap_h)]) == "v" * 22 + "r"

    def test_rejected_stuck_rows_count_against_a_gap(self) -> None:
        # The last valid one is at 11 h; the stuck one at 13 h leaves a gap of 2 h only.
        rows = [*self.frozen(12), R(hours(13)), R(hours(15)), R(hours(18)), R(hours(21.1))]
        assert judged(rows) == "v" * 12 + "rrrv"

    def test_suspect_rows_of_the_same_values_count_against_a_gap(self) -> None:
        # Suspect for the dew point alone: the sensor still gives the same temperature and altimeter setting.
        rows = [*self.frozen(10), R(hours(9) + 5, dew=-60.0), R(hours(12) + 2, dew=-60.0 + 71.0)]
        assert judged(rows) == "v" * 10 + "sr"

    def test_after_it_another_value_is_valid_and_a_new_beginning(self) -> None:
        checked, _ = run([*self.frozen(16), R(hours(16), temp=31.0)])
        assert verdicts(checked)[-1] == "v"
        assert checked.restart.tolist() == [False] * 16 + [True]

    def test_a_change_within_three_hours_of_the_last_valid_one_is_still_compared(self) -> None:
        rows = [*self.frozen(13), R(hours(12) + 5, temp=50.0)]
        assert judged(rows) == "v" * 12 + "rs"

    def test_it_comes_before_the_step(self) -> None:
        rows = [*self.frozen(12), R(hours(12), dew=-79.0)]
        assert judged(rows) == "v" * 12 + "r"


class TestStep:
    @pytest.mark.parametrize(
        ("change", "verdict"),
        [
            (R(0, qnh=1016.0), "v"),
            (R(0, qnh=1010.0), "v"),
            (R(0, qnh=1016.1), "s"),
            (R(0, qnh=1009.9), "s"),
            (R(0, temp=26.0), "v"),
            (R(0, temp=14.0), "v"),
            (R(0, temp=26.1), "s"),
            (R(0, temp=13.9), "s"),
            (R(0, dew=18.0), "v"),
            (R(0, dew=2.0), "v"),
            (R(0, dew=18.1), "s"),
            (R(0, dew=1.9), "s"),
        ],
    )
    @pytest.mark.parametrize("minutes", [0.5, 1.0, 5.0])
    def test_exactly_the_limit_is_no_step_and_the_interval_counts_as_five_minutes_at_least(
        self, change: R, verdict: str, minutes: float
    ) -> None:
        assert judged([R(0), change._replace(minute=minutes)]) == f"v{verdict}"

    @pytest.mark.parametrize(
        ("minutes", "factor"),
        # Square roots worked by hand: 20/5 = 4, 45/5 = 9, 180/5 = 36.
        [(20.0, 2.0), (45.0, 3.0), (180.0, 6.0)],
    )
    def test_the_limit_grows_with_the_square_root_of_the_interval(self, minutes: float, factor: float) -> None:
        assert judged([R(0), R(minutes, qnh=1013.0 + 3.0 * factor)]) == "vv"
        assert judged([R(0), R(minutes, qnh=1013.1 + 3.0 * factor)]) == "vs"
        assert judged([R(0), R(minutes, temp=20.0 + 6.0 * factor)]) == "vv"
        assert judged([R(0), R(minutes, temp=20.1 + 6.0 * factor)]) == "vs"
        assert judged([R(0), R(minutes, temp=20.0, dew=10.0 - 8.0 * factor)]) == "vv"
        assert judged([R(0), R(minutes, temp=20.0, dew=9.9 - 8.0 * factor)]) == "vs"

    def test_binary_fractions_decide_nothing(self) -> None:
        # As floats 1013.3 - 1010.3 is a little over, 1016.1 - 1013.1 exactly or a little under 3.
        assert judged([R(0, qnh=1010.3), R(5, qnh=1013.3)]) == "vv"
        assert judged([R(0, qnh=1010.3), R(5, qnh=1013.3 + 2e-6)]) == "vs"

    def test_the_reason_says_what_stepped(self) -> None:
        assert run([R(0), R(5, qnh=1009.0)])[0].reason[1] == "step: altimeter setting -4.0 hPa in 5 min"
        assert run([R(0), R(5, temp=28.0)])[0].reason[1] == "step: temperature +8.0 °C in 5 min"
        assert run([R(0), R(5, dew=-1.0)])[0].reason[1] == "step: dew point -11.0 °C in 5 min"

    def test_nothing_is_compared_with_what_is_over_three_hours_older(self) -> None:
        checked, _ = run([R(0), R(hours(3) + 0.1, qnh=900.0, temp=50.0, dew=-40.0)])
        assert verdicts(checked) == "vv"
        assert checked.restart.tolist() == [False, True]

    def test_the_first_observation_ever_is_valid_and_no_new_beginning(self) -> None:
        checked, _ = run([R(0)])
        assert verdicts(checked) == "v"
        assert checked.restart.tolist() == [False]

    def test_exactly_three_hours_without_is_no_new_beginning(self) -> None:
        assert run([R(0), R(hours(3))])[0].restart.tolist() == [False, False]

    def test_rejected_and_suspect_ones_are_not_compared_with(self) -> None:
        # The spike at 5 is suspect; the row at 10 is compared with that at 0.
        assert judged([R(0), R(5, temp=30.0), R(10, temp=20.2)]) == "vsv"
        assert judged([R(0), R(5, temp=26.0, qnh=1300.0), R(10, temp=31.0)]) == "vrs"

    def test_a_new_beginning_counts_from_the_last_valid_one_whatever_came_between(self) -> None:
        checked, _ = run([R(0), R(100, temp=59.0), R(190, temp=NAN), R(190.5)])
        assert verdicts(checked) == "vsrv"
        assert checked.restart.tolist() == [False, False, False, True]

    def test_a_dew_point_is_compared_with_the_last_observed_one(self) -> None:
        rows = [R(0, dew=10.0), R(5, dew=NAN), R(10, dew=NAN), R(20, dew=-6.1)]
        assert judged(rows) == "vvvs"
        # 20 min: 8 times 2.
        assert judged([*rows[:3], R(20, dew=-6.0)]) == "vvvv"

    def test_a_dew_point_over_three_hours_old_is_not_compared_with(self) -> None:
        rows = [R(0, dew=10.0), *every(60, 3, 60, R(0, dew=NAN))]
        assert judged([*rows, R(185, dew=-70.0)]) == "vvvvv"
        assert judged([*rows[:3], R(180, dew=-70.0)]) == "vvvs"

    def test_a_suspect_dew_point_is_not_observed(self) -> None:
        checked, _ = run([R(0), R(5, dew=19.0, temp=22.0), R(10, dew=NAN)])
        assert verdicts(checked) == "vsv"
        assert (checked.dewpoint_use[2], checked.dewpoint_used_c[2]) == (DewpointUse.CARRIED, 10.0)

    def test_it_is_judged_in_dry_too(self) -> None:
        assert judged([R(0), R(5, dew=1.9)], "dry") == "vs"


class TestStepConfirmed:
    def test_a_second_one_like_the_suspect_one_confirms_it(self) -> None:
        checked, memory = run([R(0), R(5, temp=28.0), R(6, temp=28.4), R(11, temp=28.0)])
        assert verdicts(checked) == "vsvv"
        assert checked.restart.tolist() == [False, False, True, False]
        assert checked.reason[2].startswith("step confirmed: temperature +8.4 °C in 6 min")
        assert 3 not in checked.reason
        assert memory.past.suspect is None

    def test_one_that_is_no_step_from_the_last_valid_one_is_simply_valid(self) -> None:
        checked, _ = run([R(0), R(5, temp=28.0), R(10, temp=25.0)])
        assert verdicts(checked) == "vsv"
        assert not checked.restart.any()
        assert checked.reason == {1: "step: temperature +8.0 °C in 5 min"}

    def test_after_a_valid_one_a_suspect_one_is_forgotten(self) -> None:
        assert judged([R(0), R(5, temp=35.0), R(10, temp=20.0), R(15, temp=35.0), R(20, temp=35.0)]) == "vsvsv"

    def test_sooner_than_a_minute_is_itself_suspect_and_the_earlier_one_stays_the_one_compared_with(self) -> None:
        # 61 s after the first suspect one, but only 31 s after the second.
        rows = [R(0), R(5, temp=35.0), R(5.5, temp=35.0), R(6 + 1 / 60, temp=35.0)]
        assert judged(rows) == "vssv"
        # The second suspect one is 5 higher; the row that follows steps from the first (7 higher), not from it.
        assert judged([R(0), R(5, temp=35.0), R(5.5, temp=40.0), R(6.5, temp=42.0)]) == "vsss"

    def test_exactly_a_minute_later_is_late_enough(self) -> None:
        assert judged([R(0), R(5, temp=35.0), R(6, temp=35.0)]) == "vsv"
        assert judged([R(0), R(5, temp=35.0), R(5.99, temp=35.0)]) == "vss"

    def test_rejected_ones_between_do_not_matter(self) -> None:
        rows = [R(0), R(5, temp=35.0), R(5.5, temp=NAN), R(5.7, qnh=500.0), R(6, temp=35.0)]
        assert judged(rows) == "vsrrv"

    def test_one_that_steps_from_both_becomes_the_one_compared_with(self) -> None:
        assert judged([R(0), R(5, temp=35.0), R(10, temp=50.0), R(15, temp=50.0)]) == "vssv"
        assert judged([R(0), R(5, temp=35.0), R(10, temp=50.0), R(15, temp=35.0)]) == "vsss"

    def test_the_limit_grows_with_the_interval_from_the_suspect_one_too(self) -> None:
        # 20 min after the suspect one: 12 °C; from the last valid one 25 min: 6 times 2.236 = 13.4 °C.
        assert judged([R(0), R(5, temp=40.0), R(25, temp=52.0)]) == "vsv"
        assert judged([R(0), R(5, temp=40.0), R(25, temp=52.1)]) == "vss"

    def test_all_that_is_given_must_agree_with_the_suspect_one(self) -> None:
        assert judged([R(0), R(5, temp=35.0), R(10, temp=35.0, qnh=1017.0)]) == "vss"
        assert judged([R(0), R(5, temp=35.0), R(10, temp=35.0, dew=19.0)]) == "vss"

    def test_a_step_of_the_dew_point_alone_is_confirmed_alike(self) -> None:
        checked, memory = run([R(0), R(5, dew=-5.0), R(10, dew=-5.2)])
        assert verdicts(checked) == "vsv"
        assert checked.restart.tolist() == [False, False, True]
        assert memory.past.last_dewpoint == (us(10), -5.2)

    def test_a_suspect_one_without_a_dew_point_confirms_none(self) -> None:
        rows = [R(0, dew=10.0), R(5, temp=35.0, dew=NAN), R(10, temp=35.0, dew=-20.0), R(15, temp=35.0, dew=-20.0)]
        assert judged(rows) == "vssv"
        assert judged([*rows[:2], R(10, temp=35.0, dew=10.0)]) == "vsv"
        assert judged([*rows[:2], R(10, temp=35.0, dew=NAN)]) == "vsv"

    def test_over_three_hours_after_the_last_valid_one_nothing_needs_confirmation(self) -> None:
        checked, memory = run([R(0), R(170, temp=59.0), R(181, qnh=950.0)])
        assert verdicts(checked) == "vsv"
        assert checked.restart[2]
        assert memory.past.suspect is None

    def test_a_confirmed_step_that_has_not_changed_for_six_hours_says_both(self) -> None:
        rows = [R(hours(k)) for k in range(7)]
        checked, _ = run([*rows, R(hours(6) + 5, dew=-20.0), R(hours(6) + 10, dew=-20.0)])
        assert verdicts(checked)[-2:] == "sv"
        assert "step confirmed" in checked.reason[8]
        assert "for 6 h" in checked.reason[8]
