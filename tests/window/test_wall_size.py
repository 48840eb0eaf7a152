"""The size of a state's word follows from the screen and the distance."""

import math

import pytest

from airfield_board.window.wall_size import (
    DIAGONAL_RANGE_IN,
    DISTANCE_RANGE_M,
    WallSetup,
    arcmin_of,
    cap_height_mm,
    pixel_mm,
    reading_distance_m,
    word_px,
)

FULL_HD, UHD = (1920, 1080), (3840, 2160)


def test_the_worked_example() -> None:
    """A 43-inch screen of 1920 by 1080 pixels at 3 m; source: the design's page on the wall view."""
    setup = WallSetup(diagonal_in=43.0, distance_m=3.0)
    assert pixel_mm(43.0, FULL_HD) == pytest.approx(0.496, abs=0.0005)
    assert cap_height_mm(3.0) == pytest.approx(17.5, abs=0.05)
    assert cap_height_mm(3.0) / pixel_mm(43.0, FULL_HD) == pytest.approx(35.2, abs=0.05)
    assert word_px(setup, FULL_HD) == 49
    assert arcmin_of(49, setup, FULL_HD) == pytest.approx(20.2, abs=0.05)


def test_the_same_type_at_four_metres_is_too_small() -> None:
    """49 px fall to 15 arcmin at 4 m; source: the design's page on the wall view."""
    assert arcmin_of(49, WallSetup(diagonal_in=43.0, distance_m=4.0), FULL_HD) == pytest.approx(15.2, abs=0.05)


@pytest.mark.parametrize("screen_px", [FULL_HD, UHD, (1080, 1920), (1366, 768)])
@pytest.mark.parametrize("distance_m", [0.5, 3.0, 12.0])
@pytest.mark.parametrize("diagonal_in", [13.0, 43.0, 98.0])
def test_the_type_is_the_least_whole_size_that_fills_twenty_arcmin(
    diagonal_in: float, distance_m: float, screen_px: tuple[int, int]
) -> None:
    setup = WallSetup(diagonal_in=diagonal_in, distance_m=distance_m)
    size = word_px(setup, screen_px)
    assert arcmin_of(size, setup, screen_px) >= 20.0 - 1e-6
    assert arcmin_of(size - 1, setup, screen_px) < 20.0


def test_the_distance_at_which_a_type_is_read_is_the_one_it_was_chosen_for() -> None:
    setup = WallSetup(diagonal_in=43.0, distance_m=3.0)
    exact_px = cap_height_mm(3.0) / pixel_mm(43.0, FULL_HD) / 0.727
    assert reading_distance_m(exact_px, setup, FULL_HD) == pytest.approx(3.0)
    assert reading_distance_m(exact_px / 2, setup, FULL_HD) == pytest.approx(1.5)


def test_twice_the_pixels_need_twice_the_type() -> None:
    setup = WallSetup(diagonal_in=43.0, distance_m=3.0)
    assert word_px(setup, UHD) in (97, 98)


@pytest.mark.parametrize("wrong", [0.0, -3.0, math.nan, math.inf, 1e9])
def test_what_is_no_screen_or_no_distance_is_refused(wrong: float) -> None:
    with pytest.raises(ValueError, match="diagonal"):
        WallSetup(diagonal_in=wrong, distance_m=3.0)
    with pytest.raises(ValueError, match="distance"):
        WallSetup(diagonal_in=43.0, distance_m=wrong)


def test_the_ends_of_the_ranges_are_taken() -> None:
    for diagonal_in in DIAGONAL_RANGE_IN:
        for distance_m in DISTANCE_RANGE_M:
            assert word_px(WallSetup(diagonal_in=diagonal_in, distance_m=distance_m), FULL_HD) > 0
