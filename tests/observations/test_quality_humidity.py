"""Which dew point counts: carried, assumed, dry."""

import math

import numpy as np
import pytest

from airfield_board.observations.observation import DewpointUse, Verdict
from tests.observations.quality_rows import NAN, R, every, hours, is_valid, judged, run, uses, verdicts

OBSERVED, CARRIED, ASSUMED, DRY = DewpointUse.OBSERVED, DewpointUse.CARRIED, DewpointUse.ASSUMED, DewpointUse.DRY


def test_an_observed_dew_point_counts_as_it_is_even_a_little_above_the_temperature() -> None:
    checked, _ = run([R(0, temp=20.0, dew=20.8)], "moist")
    assert uses(checked) == [(OBSERVED, 20.8)]


@pytest.mark.parametrize("humidity", ["moist", "auto"])
def test_the_last_observed_one_of_at_most_three_hours_before_is_carried(humidity: str) -> None:
    rows = [R(0, dew=12.0), R(10, dew=9.0), R(60, temp=21.0, dew=NAN), R(190, temp=22.0, dew=NAN)]
    checked, _ = run(rows, "moist" if humidity == "moist" else "auto")
    assert is_valid(checked)
    assert uses(checked)[2:] == [(CARRIED, 9.0), (CARRIED, 9.0)]


def test_beyond_three_hours_the_highest_of_24_hours_is_assumed() -> None:
    rows = [R(0, dew=12.0), R(10, dew=9.0), R(100, dew=NAN), R(190.1, temp=22.0, dew=NAN)]
    assert uses(run(rows, "moist")[0])[3] == (ASSUMED, 12.0)


def test_what_is_over_24_hours_old_is_not_assumed() -> None:
    quiet = every(60, 23, 60, R(0, dew=NAN))
    rows = [R(0, dew=12.0), R(10, dew=9.0), *quiet]
    assert uses(run([*rows, R(hours(24), dew=NAN)], "moist")[0])[-1] == (ASSUMED, 12.0)
    assert uses(run([*rows, R(hours(24) + 1, dew=NAN)], "moist")[0])[-1] == (ASSUMED, 9.0)
    assert uses(run([*rows, R(hours(24) + 10, dew=NAN)], "moist")[0])[-1] == (ASSUMED, 9.0)
    checked, _ = run([*rows, R(hours(24) + 10.1, dew=NAN)], "moist")
    assert verdicts(checked)[-1] == "r"
    assert checked.reason[len(checked) - 1].startswith("no dew point: ")


def test_neither_is_above_the_observation_s_own_temperature() -> None:
    rows = [R(0, temp=20.0, dew=18.0), R(60, temp=15.0, dew=NAN), R(190, temp=11.0, dew=NAN)]
    assert uses(run(rows, "moist")[0]) == [(OBSERVED, 18.0), (CARRIED, 15.0), (ASSUMED, 11.0)]


def test_a_carried_one_is_not_capped_for_good() -> None:
    rows = [R(0, temp=20.0, dew=18.0), R(60, temp=15.0, dew=NAN), R(120, temp=19.0, dew=NAN)]
    assert uses(run(rows, "moist")[0])[2] == (CARRIED, 18.0)


def test_moist_without_any_dew_point_is_incomplete() -> None:
    checked, memory = run([R(0, dew=NAN)], "moist")
    assert verdicts(checked) == "r"
    assert uses(checked) == [(DRY, None)]
    assert memory.past.last_valid is None


def test_auto_is_dry_until_the_first_valid_one_with_a_dew_point() -> None:
    rows = [R(0, dew=NAN), R(5, dew=NAN), R(10, dew=8.0), R(15, dew=NAN)]
    assert uses(run(rows)[0]) == [(DRY, None), (DRY, None), (OBSERVED, 8.0), (CARRIED, 8.0)]


def test_auto_stays_moist_however_long_the_sensor_is_silent() -> None:
    rows = [R(0, dew=8.0), *every(120, 12, 120, R(0, dew=NAN)), *every(120, 200, hours(26), R(0, dew=NAN))]
    checked, _ = run(rows)
    assert verdicts(checked) == "v" * 13 + "r" * 200
    assert {use for use, _ in uses(checked)[1:13]} == {CARRIED, ASSUMED}


def test_a_dew_point_in_a_rejected_or_suspect_row_is_none_of_the_record() -> None:
    rows = [R(0, dew=NAN), R(5, temp=30.0, dew=8.0), R(6, qnh=500.0, dew=8.0), R(10, dew=NAN)]
    checked, _ = run(rows)
    assert verdicts(checked) == "vsrv"
    assert uses(checked)[3] == (DRY, None)


def test_a_suspect_row_s_own_dew_point_counts_for_itself() -> None:
    assert uses(run([R(0, dew=NAN), R(5, temp=30.0, dew=8.0)])[0])[1] == (OBSERVED, 8.0)
    assert uses(run([R(0, dew=7.0), R(5, temp=30.0, dew=NAN)])[0])[1] == (CARRIED, 7.0)


def test_in_dry_humidity_never_counts() -> None:
    checked, _ = run([R(0, dew=8.0), *every(120, 20, 120, R(0, dew=NAN))], "dry")
    assert is_valid(checked)
    assert set(uses(checked)) == {(DRY, None)}


def test_the_record_may_have_begun_in_an_earlier_table() -> None:
    _, memory = run([R(0, dew=8.0)])
    checked, memory = run([R(5, dew=NAN)], memory=memory)
    assert uses(checked) == [(CARRIED, 8.0)]
    checked, memory = run(every(5, 60, 10, R(0, dew=NAN)), memory=memory)
    assert uses(checked)[0] == (CARRIED, 8.0)
    assert uses(checked)[34] == (CARRIED, 8.0)
    assert uses(checked)[35] == (ASSUMED, 8.0)


def test_the_missing_dew_point_is_said_before_stuck() -> None:
    rows = [R(hours(k), dew=NAN) for k in range(13)]
    assert judged(rows) == "v" * 12 + "r"
    checked, _ = run(rows, "moist")
    assert all(reason.startswith("no dew point") for reason in checked.reason.values())


def test_the_highest_of_24_hours_is_right_over_a_long_record() -> None:
    """Against the plain definition, on an invented record with a sensor that falls silent for 4 h at a time."""
    rows = []
    for k in range(1500):
        silent = k % 97 > 70
        dew = 8.0 + 5.0 * math.sin(k / 37.0) + 2.0 * math.sin(k / 5.0)
        rows.append(R(k * 10.0, temp=25.0 + 0.1 * (k % 3), dew=NAN if silent else round(dew, 1)))
    checked, _ = run(rows)
    assert is_valid(checked)
    assumed = 0
    for index, (use, used) in enumerate(uses(checked)):
        if use != ASSUMED:
            continue
        assumed += 1
        day = [row.dew for row in rows[max(0, index - 144) : index] if not math.isnan(row.dew)]
        assert used == max(day)
    assert assumed > 50


@pytest.mark.parametrize("humidity", ["moist", "auto"])
def test_used_dew_points_are_numbers_wherever_humidity_counts(humidity: str) -> None:
    rows = [row if k % 3 else row._replace(dew=NAN) for k, row in enumerate(every(30, 60, like=R(0, dew=5.0)), start=1)]
    checked, _ = run(rows, "moist" if humidity == "moist" else "auto")
    counts = (checked.dewpoint_use != DRY) & (checked.verdict == Verdict.VALID)
    assert counts.all()
    assert not np.isnan(checked.dewpoint_used_c[counts]).any()
