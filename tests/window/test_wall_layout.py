"""Rows on the wall: each one listed or counted once, none on another, HOLD never folded, the word as large as asked."""

from collections.abc import Sequence
from itertools import pairwise

import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from airfield_board.window.axes import AltitudeAxis
from airfield_board.window.wall_columns import Arrangement, WallRoom
from airfield_board.window.wall_layout import (
    ROW_SMALLEST_EM,
    WallItem,
    WallPlan,
    plan_wall,
)

# The card of a screen of 1920 by 1080 pixels, and the type that 43 inches at 3 m ask for (test_wall_size).
ROOM = WallRoom(width_px=1872.0, height_px=800.0, scale=1.0, needed_px=49)
AXIS = AltitudeAxis(low_ft=4500.0, high_ft=9500.0, top_px=58.0, bottom_px=760.0)
AIR_FT = 6830.0


def row(kind: str, place_ft: float | None) -> WallItem:
    return WallItem(
        place_ft=place_ft, below=kind in ("hold", "reduced"), fold_rank=0 if kind == "go" else None, kind=kind
    )


def rows(go: int, near: int, hold: int, foot: int = 0) -> list[WallItem]:
    """Return so many rows in the order of the board."""
    return [
        *(row("go", 9900.0 - index * 40.0) for index in range(go)),
        *(row("near", 7300.0 - index * 10.0) for index in range(near)),
        *(row("hold", 6800.0 - index * 30.0) for index in range(hold)),
        *(row("no_data", None) for _ in range(foot)),
    ]


def folded(plan: WallPlan) -> list[int]:
    return [index for box in plan.boxes if len(box.rows) > 1 for index in box.rows]


def check(plan: WallPlan, items: Sequence[WallItem], room: WallRoom) -> None:
    """What holds of every plan."""
    assert sorted(index for box in plan.boxes for index in box.rows) == list(range(len(items)))
    for column in range(len(plan.columns)):
        edges = sorted(
            (box.middle_px - box.height_px / 2, box.middle_px + box.height_px / 2)
            for box in plan.boxes
            if box.column == column
        )
        assert all(after[0] >= before[1] - 1e-6 for before, after in pairwise(edges))
        assert not edges or (edges[0][0] >= -1e-6 and edges[-1][1] <= room.height_px + 1e-6)
    for place in plan.columns:
        assert 0 <= place.left < place.name < place.name_right < place.margin_right <= place.right <= room.width_px
    for one, other in pairwise(plan.columns):
        assert one.right < other.left
    assert all(box.height_px >= ROW_SMALLEST_EM * plan.word_px - 1e-6 for box in plan.boxes)


def test_fourteen_rows_stand_beside_the_plot_at_54_px() -> None:
    """Source: the design's page on the wall view."""
    items = rows(5, 3, 6)
    plan = plan_wall(items, ROOM, AXIS, AIR_FT)
    check(plan, items, ROOM)
    assert plan.arrangement is Arrangement.BESIDE_PLOT
    assert plan.word_px == 49
    assert plan.pitch_px >= 54.0
    assert len(plan.boxes) == 14


def test_rows_that_do_not_fit_are_go_rows_folded_into_one_line_the_farthest_first() -> None:
    items = rows(17, 3, 8, foot=1)
    plan = plan_wall(items, ROOM, AXIS, AIR_FT)
    check(plan, items, ROOM)
    assert plan.arrangement is Arrangement.BESIDE_PLOT
    assert plan.word_px == 49
    gone = folded(plan)
    assert gone == list(range(len(gone)))
    assert len(gone) > 1
    assert all(items[index].kind == "go" for index in gone)


def test_still_too_many_stand_in_two_columns_without_a_plot() -> None:
    items = rows(10, 6, 12, foot=1)
    plan = plan_wall(items, ROOM, AXIS, AIR_FT)
    check(plan, items, ROOM)
    assert plan.arrangement is Arrangement.TWO_COLUMNS
    assert plan.plot_left is None
    assert plan.word_px == 49
    assert folded(plan) == []


def test_in_two_columns_go_rows_are_folded_too() -> None:
    items = rows(32, 8, 18, foot=2)
    plan = plan_wall(items, ROOM, AXIS, AIR_FT)
    check(plan, items, ROOM)
    assert plan.arrangement is Arrangement.TWO_COLUMNS
    assert plan.word_px == 49
    assert {items[index].kind for index in folded(plan)} == {"go"}


def test_the_columns_are_read_one_after_the_other() -> None:
    items = rows(10, 6, 12, foot=1)
    plan = plan_wall(items, ROOM, AXIS, AIR_FT)
    order = [box.rows[0] for box in sorted(plan.boxes, key=lambda box: (box.column, box.middle_px))]
    assert order == list(range(29))


@pytest.mark.parametrize("items", [rows(4, 3, 5), rows(10, 6, 12, foot=1), rows(2, 0, 25, foot=2)], ids=len)
def test_the_level_cuts_the_list(items: list[WallItem]) -> None:
    plan = plan_wall(items, ROOM, AXIS, AIR_FT)
    assert plan.level is not None
    for box in plan.boxes:
        item = items[box.rows[0]]
        if item.place_ft is not None:
            assert ((box.column, box.middle_px) > plan.level) == item.below
    tinted = [
        box
        for box in plan.boxes
        if any(water.column == box.column and water.top_px <= box.middle_px <= water.bottom_px for water in plan.water)
    ]
    assert sorted(index for box in tinted for index in box.rows) == [
        index for index, item in enumerate(items) if item.below
    ]


def test_holds_beyond_all_room_make_the_words_smaller_and_are_all_listed() -> None:
    items = rows(0, 0, 60)
    plan = plan_wall(items, ROOM, AXIS, AIR_FT)
    check(plan, items, ROOM)
    assert folded(plan) == []
    assert plan.arrangement is Arrangement.TWO_COLUMNS
    # 60 rows of 1.02 em in two columns of 800 px, a level in one of them.
    assert 24 <= plan.word_px <= 26


def test_hundreds_of_holds_are_counted_rather_than_left_out() -> None:
    items = rows(100, 40, 400, foot=3)
    plan = plan_wall(items, ROOM, AXIS, AIR_FT)
    check(plan, items, ROOM)
    assert [items[box.rows[0]].kind for box in plan.boxes] == ["go", "near", "hold", "no_data"]


def test_few_rows_are_no_larger_than_drawn_and_no_smaller_than_needed() -> None:
    near = WallRoom(width_px=1872.0, height_px=800.0, scale=1.0, needed_px=16)
    assert plan_wall(rows(3, 1, 4), near, AXIS, AIR_FT).word_px == 49
    many = rows(10, 5, 10)
    plan = plan_wall(many, near, AXIS, AIR_FT)
    check(plan, many, near)
    assert plan.arrangement is Arrangement.BESIDE_PLOT
    assert folded(plan) == []
    assert 16 <= plan.word_px < 49


def test_far_away_the_plot_gives_way_to_the_words() -> None:
    far = WallRoom(width_px=1872.0, height_px=800.0, scale=1.0, needed_px=97)
    items = rows(6, 2, 3)
    plan = plan_wall(items, far, AXIS, AIR_FT)
    check(plan, items, far)
    assert plan.arrangement is Arrangement.ONE_COLUMN
    assert plan.word_px == 97
    # Without a plot there is no height to hang on: the rows stand close, from the top.
    assert plan.boxes[0].middle_px < 97.0
    heights = [box.middle_px for box in plan.boxes]
    assert all(after - before <= plan.pitch_px + 97.0 for before, after in pairwise(heights))


def test_no_rows_and_no_level() -> None:
    plan = plan_wall([], ROOM, AXIS, None)
    check(plan, [], ROOM)
    assert plan.level is None
    assert plan.water == ()


def test_a_level_without_rows_still_stands_there() -> None:
    plan = plan_wall([], ROOM, AXIS, AIR_FT)
    assert plan.level is not None


@settings(max_examples=60, deadline=None)
@given(
    go=st.integers(0, 70),
    near=st.integers(0, 20),
    hold=st.integers(0, 70),
    foot=st.integers(0, 5),
    needed=st.integers(8, 160),
    size=st.sampled_from([(1872.0, 800.0, 1.0), (3744.0, 1600.0, 2.0), (1170.0, 520.0, 0.625), (1040.0, 1500.0, 0.56)]),
    known=st.booleans(),
)
def test_whatever_comes_every_row_is_listed_or_counted_once(
    go: int, near: int, hold: int, foot: int, needed: int, size: tuple[float, float, float], known: bool
) -> None:
    items = rows(go, near, hold, foot)
    room = WallRoom(width_px=size[0], height_px=size[1], scale=size[2], needed_px=needed)
    axis = AltitudeAxis(low_ft=4500.0, high_ft=9500.0, top_px=58.0 * size[2], bottom_px=size[1] - 40.0 * size[2])
    plan = plan_wall(items, room, axis, AIR_FT if known else None)
    check(plan, items, room)
    kinds = {items[index].kind for index in folded(plan)}
    if hold + near + foot <= 60 and size[1] >= 800.0:
        assert kinds <= {"go"}
