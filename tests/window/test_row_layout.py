"""Rows stand in order, none on another, the level where it can; leaders never cross."""

from itertools import pairwise

import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from airfield_board.window.row_layout import (
    LEVEL_PX,
    PITCH_SMALLEST_PX,
    Density,
    Wish,
    choose_pitch,
    plan_rows,
    rows_that_fit,
    settle,
)

TOP_PX, BOTTOM_PX = 32.0, 640.0
targets = st.lists(st.floats(0.0, 700.0), min_size=1, max_size=40)


def cost(places: list[float], targets_px: list[float], weights: list[float]) -> float:
    """Weighted sum of squared distances."""
    return sum(weight * (a - b) ** 2 for a, b, weight in zip(places, targets_px, weights, strict=True))


@given(targets, st.floats(5.0, 15.0))
def test_boxes_keep_their_order_and_do_not_overlap(wanted: list[float], height_px: float) -> None:
    places = settle(wanted, [height_px] * len(wanted), [1.0] * len(wanted), TOP_PX, BOTTOM_PX)
    assert all(after - before >= height_px - 1e-6 for before, after in pairwise(places))
    assert places[0] >= TOP_PX + height_px / 2 - 1e-6
    assert places[-1] <= BOTTOM_PX - height_px / 2 + 1e-6


@given(targets)
def test_leaders_never_cross(wanted: list[float]) -> None:
    wanted.sort()
    places = settle(wanted, [14.0] * len(wanted), [1.0] * len(wanted), TOP_PX, BOTTOM_PX)
    # All leaders bend at the same x, so two cross only where targets and places are in different order.
    assert all(before <= after for before, after in pairwise(places))


@settings(max_examples=60)
@given(
    st.lists(st.tuples(st.floats(0.0, 300.0), st.sampled_from([1.0, 40.0])), min_size=2, max_size=6),
    st.lists(st.floats(0.0, 40.0), min_size=6, max_size=6),
    st.floats(50.0, 90.0),
)
def test_no_other_arrangement_is_nearer(wanted: list[tuple[float, float]], gaps: list[float], first_px: float) -> None:
    targets_px, weights = [target for target, _ in wanted], [weight for _, weight in wanted]
    height_px = 20.0
    places = settle(targets_px, [height_px] * len(wanted), weights, -1000.0, 1000.0)
    other = [first_px]
    for gap in gaps[: len(wanted) - 1]:
        other.append(other[-1] + height_px + gap)
    assert cost(places, targets_px, weights) <= cost(other, targets_px, weights) + 1e-6
    for share in (0.01, 0.1):
        nudged = [a + share * (b - a) for a, b in zip(places, other, strict=True)]
        assert cost(places, targets_px, weights) <= cost(nudged, targets_px, weights) + 1e-6


def test_by_hand_two_boxes_share_the_push() -> None:
    assert settle([100.0, 104.0], [20.0, 20.0], [1.0, 1.0], 0.0, 400.0) == [92.0, 112.0]


def test_by_hand_the_heavier_box_moves_less() -> None:
    places = settle([100.0, 100.0], [20.0, 20.0], [1.0, 3.0], 0.0, 400.0)
    assert places == pytest.approx([85.0, 105.0])


def test_by_hand_boxes_beyond_the_edge_are_brought_in() -> None:
    assert settle([-50.0, 500.0], [20.0, 20.0], [1.0, 1.0], 0.0, 400.0) == [10.0, 390.0]


wishes = st.lists(
    st.builds(
        Wish,
        target_px=st.one_of(st.none(), st.floats(44.0, 640.0)),
        below=st.booleans(),
        extra_lines=st.integers(0, 1),
    ),
    max_size=40,
)


@given(wishes, st.one_of(st.none(), st.floats(44.0, 640.0)))
def test_every_row_is_there_once_and_holds_stand_below_the_level(asked: list[Wish], level_px: float | None) -> None:
    plan = plan_rows(asked, level_px, TOP_PX, BOTTOM_PX)
    assert sorted(box.index for box in plan.boxes) == list(range(len(asked)))
    assert all(after.top_px >= before.bottom_px - 1e-6 for before, after in pairwise(plan.boxes))
    if plan.boxes:
        assert plan.boxes[0].top_px >= TOP_PX - 1e-6
        assert plan.boxes[-1].bottom_px <= BOTTOM_PX + 1e-6
    assert (plan.level_px is None) == (level_px is None)
    if plan.level_px is None:
        return
    half = LEVEL_PX[plan.pitch.density] / 2
    for box in plan.boxes:
        wish = asked[box.index]
        if wish.target_px is None or wish.below:
            assert box.top_px >= plan.level_px + half - 1e-6
        else:
            assert box.bottom_px <= plan.level_px - half + 1e-6
        if wish.target_px is None:
            assert box.top_px >= plan.water_bottom_px - 1e-6


@given(st.lists(st.floats(44.0, 640.0), max_size=40), st.floats(44.0, 640.0))
def test_no_leader_crosses_the_level_where_every_hold_lies_under_it(limits: list[float], level_px: float) -> None:
    limits.sort()
    asked = [Wish(target_px=target, below=target > level_px) for target in limits]
    plan = plan_rows(asked, level_px, TOP_PX, BOTTOM_PX)
    assert plan.level_px is not None
    ends = [(asked[box.index].target_px or 0.0, box.middle_px) for box in plan.boxes] + [(level_px, plan.level_px)]
    ends.sort(key=lambda end: end[1])
    assert all(before[0] <= after[0] for before, after in pairwise(ends))


def test_the_level_stays_where_it_is_when_there_is_room() -> None:
    asked = [Wish(target_px=target, below=target > 300.0) for target in (100.0, 150.0, 200.0, 400.0, 450.0, 500.0)]
    plan = plan_rows(asked, 300.0, TOP_PX, BOTTOM_PX)
    assert plan.level_px == 300.0


@pytest.mark.parametrize(
    ("rows", "density"),
    [(8, Density.COMFORTABLE), (15, Density.COMFORTABLE), (24, Density.STANDARD), (40, Density.DENSE)],
)
def test_rows_carry_what_their_height_permits(rows: int, density: Density) -> None:
    pitch = choose_pitch(612.0, rows, with_level=True, extra_lines=1, with_foot=True)
    assert pitch.density is density
    assert pitch.px * rows + LEVEL_PX[density] <= 612.0


def test_as_many_rows_as_fit_do_fit() -> None:
    for space_px in (300.0, 431.5, 612.0):
        rows = rows_that_fit(space_px, PITCH_SMALLEST_PX, with_level=True, with_foot=True)
        pitch = choose_pitch(space_px, rows, with_level=True, extra_lines=0, with_foot=True)
        assert pitch.px * rows + LEVEL_PX[Density.DENSE] + 4.0 <= space_px + 1e-6
