"""Whole stretches at once give exactly what row by row gives, however the rows are cut into tables."""

import itertools
import json
import math
from collections.abc import Iterator

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from airfield_board.observations.observation import DewpointUse, Verdict
from airfield_board.observations.quality import QualityMemory
from airfield_board.observations.quality_stretches import Stretches
from tests.observations.quality_rows import NAN, R, Setting, every, hours, run, us, uses

HUMIDITIES: list[Setting] = ["auto", "moist", "dry"]

TEMPERATURES = [20.0, 20.1, 20.1, 20.2, 25.0, 32.0, 60.0, 60.5, NAN]
ALTIMETERS = [1013.0, 1013.0, 1013.1, 1015.0, 1019.0, 900.0, 849.0, NAN]
DEWPOINTS = [10.0, 10.1, 12.0, 15.0, 19.0, 2.0, -5.0, -81.0, 34.0, NAN, NAN, NAN]
STEPS_MIN = [1.0, 1.0, 5.0, 5.0, 10.0, 30.0, 60.0, 120.0, 180.0, 181.0, 400.0]


@st.composite
def records(draw: st.DrawFn, steps_min: list[float]) -> list[R]:
    """Ordinary stretches of some length with all that is out of the ordinary between them."""
    rows: list[R] = []
    minute = 0.0
    for _ in range(draw(st.integers(1, 6))):
        step_min = draw(st.sampled_from(steps_min))
        every_nth_with_dewpoint, frozen = draw(st.sampled_from([1, 4, 99])), draw(st.booleans())
        for k in range(draw(st.integers(0, 30))):
            dew = NAN if (k + 1) % every_nth_with_dewpoint else 10.0 + 0.1 * (k % 3)
            minute += step_min
            rows.append(R(minute, 1013.0, 20.0 if frozen else 20.0 + 0.1 * (k % 4), dew))
        for _ in range(draw(st.integers(0, 4))):
            minute += draw(st.sampled_from(steps_min))
            rows.append(
                R(
                    minute,
                    draw(st.sampled_from(ALTIMETERS)),
                    draw(st.sampled_from(TEMPERATURES)),
                    draw(st.sampled_from(DEWPOINTS)),
                    draw(st.sampled_from([NAN, NAN, NAN, 1200.0, 1300.0])),
                    draw(st.sampled_from(["", "", "", "", "too many fields"])),
                )
            )
    return rows


def said(rows: list[R], cuts: list[int], humidity: Setting, now_min: float) -> tuple[list[object], QualityMemory]:
    """Return all that the checks say of rows cut into tables, the memory going through JSON between them."""
    memory = QualityMemory()
    words: list[object] = []
    edges = [0, *cuts, len(rows)]
    for first, end in itertools.pairwise(edges):
        memory = QualityMemory.from_json(json.loads(json.dumps(memory.to_json(), allow_nan=False)))
        checked, memory = run(rows[first:end], humidity, memory, now_min)
        words += [
            (
                int(checked.verdict[k]),
                checked.reason.get(k, ""),
                bool(checked.restart[k]),
                bool(checked.late[k]),
                uses(checked)[k],
            )
            for k in range(len(checked))
        ]
    return words, memory


@settings(max_examples=60, deadline=None)
@given(
    rows=records(STEPS_MIN), humidity=st.sampled_from(HUMIDITIES), before_end_min=st.sampled_from([-9.0, 0.0, 700.0])
)
def test_at_once_is_row_by_row(rows: list[R], humidity: Setting, before_end_min: float) -> None:
    now_min = (rows[-1].minute or 0.0) - before_end_min if rows else 0.0
    by_row = said(rows, list(range(1, len(rows))), humidity, now_min)
    assert said(rows, [], humidity, now_min) == by_row


@settings(max_examples=50, deadline=None)
@given(rows=records([0.0, *STEPS_MIN]), humidity=st.sampled_from(HUMIDITIES), data=st.data())
def test_cut_anywhere_even_within_one_time(rows: list[R], humidity: Setting, data: st.DataObject) -> None:
    cuts = sorted(data.draw(st.lists(st.integers(0, len(rows)), max_size=6)))
    at_once, memory = said(rows, [], humidity, 1e8)
    in_parts, memory_of_parts = said(rows, cuts, humidity, 1e8)
    assert memory_of_parts == memory
    for whole, part in zip(at_once, in_parts, strict=True):
        # A table that has been answered for cannot say that a later one corrects it.
        if whole != part:
            assert isinstance(whole, tuple)
            assert isinstance(part, tuple)
            assert (whole[0], part[0]) == (Verdict.SUPERSEDED, Verdict.VALID)
            assert whole[4] == part[4]


@settings(max_examples=25, deadline=None)
@given(rows=records(STEPS_MIN), humidity=st.sampled_from(HUMIDITIES), data=st.data())
def test_the_order_in_the_table_does_not_matter(rows: list[R], humidity: Setting, data: st.DataObject) -> None:
    shuffled = data.draw(st.permutations(rows))
    assert said(shuffled, [], humidity, 1e8) == said(rows, [], humidity, 1e8)


@settings(max_examples=60, deadline=None)
@given(rows=records([0.0, *STEPS_MIN]), humidity=st.sampled_from(HUMIDITIES))
def test_what_is_valid_is_in_range_and_has_what_it_needs(rows: list[R], humidity: Setting) -> None:
    checked, _ = run(rows, humidity)
    valid = checked.verdict == Verdict.VALID
    table = checked.rows
    assert ((table.altimeter_hpa[valid] >= 850.0) & (table.altimeter_hpa[valid] <= 1085.0)).all()
    assert ((table.temperature_c[valid] >= -60.0) & (table.temperature_c[valid] <= 60.0)).all()
    assert not (table.dewpoint_c[valid] > table.temperature_c[valid] + 1.0).any()
    assert not (np.abs(table.elevation_m[valid] - 1200.0) > 30.0).any()
    assert all(checked.reason[int(k)] for k in np.flatnonzero(~valid))
    if humidity == "moist":
        assert not np.isnan(checked.dewpoint_used_c[valid]).any()


@pytest.fixture
def taken(monkeypatch: pytest.MonkeyPatch) -> Iterator[list[int]]:
    """Count the rows that stretches take, so that these tests do not pass for want of any."""
    counts: list[int] = []
    take = Stretches.take

    def counting(self: Stretches, first: int, end: int, *rest: object) -> object:
        counts.append(end - first)
        return take(self, first, end, *rest)  # type: ignore[arg-type] # passed on as it came

    monkeypatch.setattr(Stretches, "take", counting)
    yield counts


def test_a_long_ordinary_record_is_one_stretch(taken: list[int]) -> None:
    checked, _ = run(every(1, 5000))
    assert taken == [4998]
    assert (checked.verdict == Verdict.VALID).all()


@pytest.mark.parametrize("humidity", ["auto", "dry"])
def test_so_is_one_without_any_dew_point(taken: list[int], humidity: Setting) -> None:
    run(every(1, 5000, like=R(0, dew=NAN)), humidity)
    assert taken == [4998]


def test_so_is_one_with_gaps_in_the_dew_point(taken: list[int]) -> None:
    rows = [row if k % 50 == 0 else row._replace(dew=NAN) for k, row in enumerate(every(1, 5000))]
    checked, _ = run(rows)
    assert taken == [4998]
    assert (checked.verdict == Verdict.VALID).all()


def test_values_that_stay_for_hours_do_not_break_it(taken: list[int]) -> None:
    rows = [row._replace(temp=20.0 + 0.1 * (k // 300 % 2)) for k, row in enumerate(every(1, 5000))]
    run(rows)
    assert taken == [4998]


def test_one_rejected_row_breaks_it_in_two(taken: list[int]) -> None:
    rows = every(1, 1000)
    rows[500] = rows[500]._replace(temp=99.0)
    checked, _ = run(rows)
    assert taken == [498, 497]
    assert np.flatnonzero(checked.verdict).tolist() == [500]


def test_a_fault_before_the_first_dew_point_is_found(taken: list[int]) -> None:
    rows = every(1, 200, like=R(0, dew=NAN))
    rows[60] = rows[60]._replace(temp=99.0)
    rows[120] = rows[120]._replace(dew=10.0)
    checked, _ = run(rows)
    assert np.flatnonzero(checked.verdict).tolist() == [60]
    assert [use.name for use, _ in uses(checked)] == ["DRY"] * 120 + ["OBSERVED"] + ["CARRIED"] * 79
    assert len(taken) == 3


def test_a_fault_within_hours_of_one_value_is_found(taken: list[int]) -> None:
    rows = [*every(5, 20), *(R(100 + 5 * k, temp=21.0) for k in range(100))]
    rows[60] = rows[60]._replace(elevation=0.0)
    rows[80] = rows[80]._replace(elevation=0.0)
    checked, _ = run(rows)
    assert np.flatnonzero(checked.verdict).tolist() == [60, 80]
    assert sorted(checked.reason) == sorted([60, 80, *range(20 + int(hours(6) / 5), 120)])
    assert len(taken) == 3


def test_a_value_that_changes_with_the_first_row_of_a_stretch_counts_from_it(taken: list[int]) -> None:
    rows = [*every(5, 20), R(100, temp=99.0), R(105, temp=20.0), *(R(110 + 5 * k, temp=20.3) for k in range(150))]
    checked, _ = run(rows)
    assert taken[1] > 50
    assert min(k for k in checked.reason if k > 20) == 22 + int(hours(6) / 5)
    assert np.flatnonzero(checked.verdict).tolist() == [20, *range(22 + int(hours(12) / 5), 172)]


def test_dew_points_of_exactly_24_hours_ago_are_kept() -> None:
    rows = [row._replace(dew=18.0 - 0.1 * k) for k, row in enumerate(every(60, 80, like=R(0, temp=25.0)))]
    at_once = said(rows, [], "auto", 1e8)
    assert at_once == said(rows, list(range(1, 80)), "auto", 1e8)
    # The last row's before it was judged, which stood at the end of a stretch.
    assert [entry.time_us for entry in at_once[1].before.highest_dewpoints] == [us(hours(k)) for k in range(54, 79)]


def test_faults_are_found_after_rows_without_a_time_and_late_ones(taken: list[int]) -> None:
    _, memory = run([R(0)])
    rows = [R(None), R(None, fault="no time"), R(-5), *every(1, 100, 5)]
    rows[60] = rows[60]._replace(fault="too few fields")
    checked, _ = run(rows, memory=memory)
    assert np.flatnonzero(checked.verdict).tolist() == [0, 1, 60]
    assert checked.reason[60] == "incomplete: too few fields"
    assert len(taken) == 2


def test_a_short_table_is_judged_row_by_row(taken: list[int]) -> None:
    run(every(1, 7))
    assert taken == []


def test_the_first_dew_point_of_a_stretch_is_compared_with_the_last_observed_one(taken: list[int]) -> None:
    # The dew points of the rows 100 to 104 lie in rejected rows: 21.0 is near them but a step from 10.0.
    rows = every(1, 300, like=R(0, temp=30.0))
    for k in range(100, 105):
        rows[k] = rows[k]._replace(qnh=500.0, dew=19.0)
    for k in range(105, 120):
        rows[k] = rows[k]._replace(dew=NAN)
    rows[105] = rows[105]._replace(dew=NAN)
    rows[120] = rows[120]._replace(dew=26.5)
    checked, _ = run(rows)
    # 21 min after the last observed one: 8 times 2.05 = 16.4.
    assert checked.verdict[120] == Verdict.SUSPECT
    assert len(taken) >= 2


def test_a_dew_point_is_carried_into_a_stretch_for_three_hours_only(taken: list[int]) -> None:
    rows = every(1, 400)
    for k in range(100, 400):
        rows[k] = rows[k]._replace(dew=NAN)
    rows[200] = rows[200]._replace(qnh=500.0, dew=9.9)
    checked, _ = run(rows)
    carried = [k for k, (use, _) in enumerate(uses(checked)) if use.name == "CARRIED"]
    # Observed at 99 min last: carried until 279 min, the rejected row's dew point or not.
    assert carried == [k for k in range(100, 280) if k != 200]
    assert max(taken) > 50


def test_a_year_of_minutes_has_every_row_right(taken: list[int]) -> None:
    """An invented year with a fault of each kind, placed by hand."""
    count = 525_600
    minute = np.arange(count)
    temperatures = np.round(15.0 + 9.0 * np.sin(2.0 * math.pi * minute / 1440.0), 1)
    rows = [R(float(k), 1013.0, float(temperatures[k]), 4.0) for k in range(0, count, 20)]
    rows[1000] = rows[1000]._replace(temp=99.0)
    rows[2000] = rows[2000]._replace(qnh=1030.0)
    rows[3000] = rows[3000]._replace(elevation=0.0)
    rows[4000] = rows[4000]._replace(fault="too few fields")
    checked, _ = run(rows)
    assert {int(k): checked.reason[int(k)].split(":")[0] for k in np.flatnonzero(checked.verdict)} == {
        1000: "range",
        2000: "step",
        3000: "elevation",
        4000: "incomplete",
    }
    assert sum(taken) > 0.99 * len(rows)


def test_hours_of_one_value_are_found_after_a_stretch(taken: list[int]) -> None:
    rows = [*every(5, 200), *(R(1000 + 5 * k, temp=21.0) for k in range(200))]
    checked, _ = run(rows)
    first = 200 + int(hours(12) / 5)
    assert (checked.verdict[:first] == Verdict.VALID).all()
    assert (checked.verdict[first:] == Verdict.REJECTED).all()
    assert min(checked.reason) == 200 + int(hours(6) / 5)
    assert max(taken) > 150


def test_in_dry_the_first_dew_point_may_lie_within_a_stretch(taken: list[int]) -> None:
    rows = every(1, 100)
    rows[:50] = [row._replace(dew=NAN) for row in rows[:50]]
    at_once = said(rows, [], "dry", 1e8)
    assert taken == [98]
    assert at_once == said(rows, list(range(1, 100)), "dry", 1e8)
    assert at_once[1].past.first_dewpoint_us == us(50)


def test_a_late_dew_point_alone_is_assumed_all_along() -> None:
    _, memory = run([R(0, dew=NAN), R(20, dew=NAN)])
    _, memory = run([R(10, dew=9.0)], memory=memory)
    checked, _ = run(every(5, 40, 25, R(0, dew=NAN)), memory=memory)
    assert set(uses(checked)) == {(DewpointUse.ASSUMED, 9.0)}
