"""Order of time, corrections of one time, and rows that come late."""

from dataclasses import replace

import numpy as np

from airfield_board.observations.observation import DewpointUse
from airfield_board.observations.quality import QualityMemory, QualityRules, check
from tests.observations.quality_rows import NAN, R, every, hours, run, table, us, uses, verdicts

CORRECTED = "corrected by a later row of the same time"
OBSERVED, CARRIED, ASSUMED, DRY = DewpointUse.OBSERVED, DewpointUse.CARRIED, DewpointUse.ASSUMED, DewpointUse.DRY


class TestOrder:
    def test_rows_are_taken_in_order_of_time(self) -> None:
        rows = [R(10, temp=20.2), R(5, temp=20.1), R(0)]
        checked, memory = run(rows)
        assert [checked.rows.raw[k] for k in range(3)] == [repr(row) for row in reversed(rows)]
        assert memory == run(list(reversed(rows)))[1]
        assert verdicts(checked) == "vvv"

    def test_rows_already_in_order_are_not_copied(self) -> None:
        checked, _ = run([R(0), R(5)])
        assert checked.rows.raw == [repr(R(0)), repr(R(5))]

    def test_faults_follow_their_rows(self) -> None:
        checked, _ = run([R(10), R(5, fault="too many fields"), R(None, fault="no time")])
        assert verdicts(checked) == "rrv"
        assert checked.reason == {0: "incomplete: no time", 1: "incomplete: too many fields"}

    def test_rows_of_one_time_keep_the_order_of_the_file(self) -> None:
        checked, _ = run([R(10, temp=20.1), R(5), R(10, temp=20.2), R(10, temp=20.3)])
        assert checked.rows.temperature_c.tolist() == [20.0, 20.1, 20.2, 20.3]

    def test_that_order_is_the_place_in_the_source(self) -> None:
        rows = replace(table([R(0), R(0, temp=20.1), R(0, temp=20.2)]), position=np.array([20, 30, 10]))
        checked, _ = check(rows, QualityMemory(), QualityRules(elevation_m=NAN, humidity="auto"), us(0))
        assert checked.rows.temperature_c.tolist() == [20.2, 20.0, 20.1]
        assert verdicts(checked) == "ccv"

    def test_an_empty_table(self) -> None:
        _, memory = run([R(0)])
        checked, after = run([], memory=memory)
        assert len(checked) == 0
        assert after == memory


class TestCorrection:
    def test_the_later_in_the_file_wins(self) -> None:
        checked, memory = run([R(0), R(5, temp=21.0), R(5, temp=22.0), R(10)])
        assert verdicts(checked) == "vcvv"
        assert checked.reason == {1: CORRECTED}
        _, memory = run([R(0), R(5, temp=21.0), R(5, temp=22.0)])
        assert memory.past.last_valid == (us(5), 1013.0, 22.0, 10.0)

    def test_the_last_of_many_wins(self) -> None:
        assert verdicts(run([R(0, temp=20.0 + k) for k in range(12)])[0]) == "c" * 11 + "v"

    def test_one_that_fails_the_checks_corrects_nothing(self) -> None:
        checked, memory = run([R(0), R(5, temp=21.0), R(5, temp=99.0), R(5, temp=40.0)])
        assert verdicts(checked) == "vvrs"
        assert memory.past.last_valid == (us(5), 1013.0, 21.0, 10.0)
        assert memory.past.suspect == (us(5), 1013.0, 40.0, 10.0)

    def test_a_suspect_one_is_corrected_by_a_valid_one(self) -> None:
        checked, memory = run([R(0), R(5, temp=35.0), R(5, temp=21.0)])
        assert verdicts(checked) == "vsv"
        assert memory.past.suspect is None

    def test_each_is_compared_with_what_was_before_that_time(self) -> None:
        # 25 would be a step from 14.5; from 20 it is none.
        checked, _ = run([R(0), R(5, temp=14.5), R(5, temp=25.0)])
        assert verdicts(checked) == "vcv"

    def test_one_that_confirms_a_step_is_a_new_beginning(self) -> None:
        checked, _ = run([R(0), R(5, temp=35.0), R(10, temp=35.0), R(10, temp=35.5)])
        assert verdicts(checked) == "vscv"
        assert checked.restart.tolist() == [False, False, False, True]

    def test_so_is_one_after_a_gap(self) -> None:
        checked, _ = run([R(0), R(hours(4)), R(hours(4), temp=30.0)])
        assert verdicts(checked) == "vcv"
        assert checked.restart.tolist() == [False, False, True]

    def test_suspect_ones_of_one_time_do_not_confirm_each_other(self) -> None:
        checked, memory = run([R(0), R(5, temp=35.0), R(5, temp=36.0), R(5, temp=50.0)])
        assert verdicts(checked) == "vsss"
        assert memory.past.suspect == (us(5), 1013.0, 50.0, 10.0)
        assert run([R(0), R(5, temp=35.0), R(5, temp=36.0)])[1].past.suspect == (us(5), 1013.0, 35.0, 10.0)

    def test_a_suspect_one_after_the_valid_one_can_be_confirmed(self) -> None:
        checked, _ = run([R(0), R(5, temp=20.5), R(5, temp=35.0), R(6, temp=35.0)])
        assert verdicts(checked) == "vvsv"
        assert checked.restart[3]

    def test_it_may_come_in_a_later_table(self) -> None:
        rows = [R(0), R(5, temp=14.5), R(5, temp=25.0), R(5, temp=40.0), R(5, temp=24.0), R(6, temp=24.2)]
        whole, at_once = run(rows)
        assert verdicts(whole) == "vccsvv"
        memory = QualityMemory()
        said = ""
        for row in rows:
            checked, memory = run([row], memory=memory)
            assert not checked.late.any()
            said += verdicts(checked)
        assert said == "vvvsvv"
        assert memory == at_once

    def test_one_of_the_time_of_a_suspect_row_in_a_later_table(self) -> None:
        _, memory = run([R(0), R(5, temp=35.0)])
        checked, memory = run([R(5, temp=20.5)], memory=memory)
        assert verdicts(checked) == "v"
        assert not checked.late.any()
        assert memory == run([R(0), R(5, temp=20.5)])[1]

    def test_its_own_dew_point_replaces_the_other(self) -> None:
        rows = [R(0, dew=8.0), R(5, dew=12.0), R(5, dew=7.0), R(10, dew=NAN)]
        assert uses(run(rows)[0])[3] == (CARRIED, 7.0)
        rows = [R(0, dew=8.0), R(5, dew=12.0), R(5, dew=7.0), R(200, dew=NAN)]
        assert uses(run(rows)[0])[3] == (ASSUMED, 8.0)

    def test_without_one_it_makes_nothing_drier(self) -> None:
        rows = [R(0, dew=8.0), R(5, dew=12.0), R(5, temp=21.0, dew=NAN), R(10, dew=NAN)]
        assert uses(run(rows)[0])[2:] == [(CARRIED, 12.0), (CARRIED, 12.0)]
        first = [R(0, dew=12.0), R(0, temp=21.0, dew=NAN)]
        assert uses(run(first)[0]) == [(OBSERVED, 12.0), (CARRIED, 12.0)]
        assert verdicts(run(first, "moist")[0]) == "cv"

    def test_a_correction_leaves_the_count_of_stuck_rows_running(self) -> None:
        frozen = [R(hours(k)) for k in range(15)]
        _, memory = run(frozen)
        # The newest one judged is at 11 h, stuck rows came until 14 h; a correction of 11 h with the same values.
        checked, memory = run([R(hours(11))], memory=memory)
        assert verdicts(checked) == "v"
        assert verdicts(run([R(hours(17))], memory=memory)[0]) == "r"
        assert verdicts(run([R(hours(17) + 0.1)], memory=memory)[0]) == "v"

    def test_a_correction_to_other_values_ends_it(self) -> None:
        _, memory = run([R(hours(k)) for k in range(15)])
        checked, memory = run([R(hours(11), temp=20.5)], memory=memory)
        assert verdicts(checked) == "v"
        assert verdicts(run([R(hours(13))], memory=memory)[0]) == "v"


class TestLate:
    def memory(self) -> QualityMemory:
        return run([R(0), R(5), R(10, temp=20.5)])[1]

    def test_it_fills_the_day_and_changes_no_state(self) -> None:
        memory = self.memory()
        checked, after = run([R(4, temp=45.0, dew=NAN), R(7, qnh=990.0, dew=NAN)], memory=memory)
        assert verdicts(checked) == "vv"
        assert checked.late.tolist() == [True, True]
        assert not checked.restart.any()
        assert after == memory

    def test_it_is_checked_for_what_it_is_by_itself(self) -> None:
        rows = [R(1, qnh=NAN), R(2, temp=70.0), R(3, elevation=0.0), R(4, fault="too few fields"), R(5, dew=30.0)]
        checked, after = run(rows, memory=self.memory())
        assert verdicts(checked) == "rrrrr"
        assert [checked.reason[k].split(":")[0] for k in range(5)] == [
            "incomplete",
            "range",
            "elevation",
            "incomplete",
            "range",
        ]
        assert checked.late.all()
        assert after == self.memory()

    def test_a_suspect_row_makes_later_older_ones_late_too_but_a_rejected_one_does_not(self) -> None:
        _, memory = run([R(0), R(10, temp=50.0)])
        assert run([R(9)], memory=memory)[0].late.tolist() == [True]
        _, memory = run([R(0), R(10, temp=99.0)])
        assert run([R(9)], memory=memory)[0].late.tolist() == [False]

    def test_rows_of_one_table_are_never_late_for_each_other(self) -> None:
        assert not run([R(10), R(0), R(5)])[0].late.any()

    def test_late_rows_and_new_ones_in_one_table(self) -> None:
        checked, memory = run([R(15), R(3, dew=NAN), R(20, temp=40.0)], memory=self.memory())
        assert verdicts(checked) == "vvs"
        assert checked.late.tolist() == [True, False, False]
        assert memory == run([R(15), R(20, temp=40.0)], memory=self.memory())[1]

    def test_of_two_late_ones_of_one_time_the_later_in_the_file_wins(self) -> None:
        rows = [R(4, temp=21.0), R(4, temp=99.0), R(4, temp=22.0), R(4, qnh=NAN)]
        checked, _ = run(rows, memory=self.memory())
        assert verdicts(checked) == "crvr"
        assert checked.reason[0] == CORRECTED

    def test_its_dew_point_may_raise_what_is_carried(self) -> None:
        _, memory = run([R(0, dew=8.0), R(20, dew=NAN)])
        _, raised = run([R(10, dew=14.0)], memory=memory)
        assert uses(run([R(25, dew=NAN)], memory=raised)[0]) == [(CARRIED, 14.0)]
        _, not_lowered = run([R(10, dew=2.0)], memory=memory)
        assert uses(run([R(25, dew=NAN)], memory=not_lowered)[0]) == [(CARRIED, 8.0)]

    def test_one_before_the_last_observed_dew_point_does_not_change_what_is_carried(self) -> None:
        _, memory = run([R(0, dew=8.0), R(20, dew=7.0)])
        _, after = run([R(10, dew=14.0)], memory=memory)
        assert uses(run([R(25, dew=NAN)], memory=after)[0]) == [(CARRIED, 7.0)]
        assert uses(run([R(201, dew=NAN)], memory=after)[0]) == [(ASSUMED, 14.0)]

    def test_it_is_not_what_a_dew_point_is_compared_with(self) -> None:
        _, memory = run([R(0, dew=8.0), R(20, dew=NAN)])
        _, after = run([R(10, dew=15.0)], memory=memory)
        # 8 to −2: 10 in 25 min is none; from 15 it would be 17 in 15 min.
        assert verdicts(run([R(25, dew=-2.0)], memory=after)[0]) == "v"

    def test_of_two_late_ones_of_one_time_the_corrected_dew_point_counts(self) -> None:
        _, memory = run([R(0, dew=8.0), R(20, dew=NAN)])
        _, after = run([R(10, dew=18.0), R(10, dew=12.0)], memory=memory)
        assert uses(run([R(25, dew=NAN)], memory=after)[0]) == [(CARRIED, 12.0)]
        _, after = run([R(10, dew=18.0), R(10, dew=NAN)], memory=memory)
        assert uses(run([R(25, dew=NAN)], memory=after)[0]) == [(CARRIED, 18.0)]

    def test_it_may_be_the_first_of_the_record(self) -> None:
        _, memory = run([R(0, dew=NAN), R(20, dew=NAN)])
        checked, memory = run([R(5, dew=NAN), R(10, dew=9.0), R(15, dew=NAN)], memory=memory)
        assert uses(checked) == [(DRY, None), (OBSERVED, 9.0), (ASSUMED, 9.0)]
        assert uses(run([R(25, dew=NAN)], memory=memory)[0]) == [(ASSUMED, 9.0)]
        # And one earlier still.
        _, memory = run([R(7, dew=9.0)], memory=memory)
        assert memory.past.first_dewpoint_us == us(7)

    def test_one_without_a_dew_point_uses_what_is_known_of_its_time(self) -> None:
        _, memory = run([R(0, dew=8.0), R(30, dew=12.0), R(60, dew=NAN)])
        checked, _ = run([R(45, dew=NAN)], memory=memory)
        assert uses(checked) == [(CARRIED, 12.0)]
        checked, _ = run([R(15, dew=NAN)], memory=memory)
        assert uses(checked) == [(ASSUMED, 12.0)]

    def test_before_the_first_dew_point_of_the_record_it_is_dry_or_incomplete(self) -> None:
        memory = run([R(10, dew=8.0)])[1]
        assert uses(run([R(5, dew=NAN)], memory=memory)[0]) == [(DRY, None)]
        checked, _ = run([R(5, dew=NAN)], "moist", memory=memory)
        assert verdicts(checked) == "r"
        assert checked.reason[0].startswith("no dew point")

    def test_one_over_24_hours_old_can_raise_nothing(self) -> None:
        _, memory = run([R(hours(30), dew=8.0)])
        _, after = run([R(hours(5), dew=20.0), R(hours(6) - 0.1, dew=19.0)], memory=memory)
        assert after.past.highest_dewpoints == memory.past.highest_dewpoints
        assert after.past.first_dewpoint_us == us(hours(5))
        _, after = run([R(hours(6), dew=19.5)], memory=memory)
        assert after.past.highest_dewpoints == ((us(hours(6)), 19.5), (us(hours(30)), 8.0))

    def test_a_correction_in_a_later_table_still_knows_a_late_dew_point(self) -> None:
        _, memory = run([R(0, dew=8.0), R(20, dew=NAN)])
        _, memory = run([R(10, dew=14.0)], memory=memory)
        assert uses(run([R(20, temp=20.5, dew=NAN)], memory=memory)[0]) == [(CARRIED, 14.0)]

    def test_many(self) -> None:
        _, memory = run(every(5, 100))
        checked, after = run(every(5, 90, 2), memory=memory)
        assert checked.late.all()
        assert (checked.verdict == 0).all()
        assert after.past.last_valid == memory.past.last_valid
