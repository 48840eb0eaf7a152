"""True airspeed and shaft power in thin air, by hand-made cases."""

import math

import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st

from airfield_board.atmosphere.air_cost import shaft_power_ratio, true_airspeed_ratio


@pytest.mark.parametrize(("density_ratio", "expected"), [(1.0, 1.0), (0.64, 1.25), (0.25, 2.0), (1.5625, 0.8)])
def test_true_airspeed_grows_with_the_root_of_thinness(density_ratio: float, expected: float) -> None:
    # Squares of whole numbers: 1/sqrt(0.64) = 1/0.8, 1/sqrt(0.25) = 2, 1/sqrt(1.5625) = 1/1.25.
    assert true_airspeed_ratio(density_ratio) == pytest.approx(expected, rel=1e-14)


def test_true_airspeed_at_ten_thousand_feet_of_the_standard_atmosphere() -> None:
    # ISO 2533, 10,000 ft: 0.904637 kg/m3; sea level 1.225; sqrt(1.225 / 0.904637) = 1.163673, whose square is 1.354135.
    assert true_airspeed_ratio(0.904637 / 1.225) == pytest.approx(1.163673, abs=1e-6)


@pytest.mark.parametrize(
    ("density_ratio", "expected"),
    [
        # Gagg and Farrar (1934): sigma - (1 - sigma) / 7.55, by hand.
        (1.0, 1.0),
        (0.815, 0.790497),
        (0.738479, 0.703841),
        (0.5, 0.433775),
        (1.1, 1.113245),
    ],
)
def test_shaft_power_by_gagg_and_farrar(density_ratio: float, expected: float) -> None:
    assert shaft_power_ratio(density_ratio) == pytest.approx(expected, abs=1e-6)
    # The same in the rounded form in which the formula is mostly quoted, to its last digit.
    assert shaft_power_ratio(density_ratio) == pytest.approx(1.132 * density_ratio - 0.132, abs=5e-4)


def test_an_engine_never_takes_power_from_nowhere() -> None:
    # (1 + 1/7.55) sigma = 1/7.55 at sigma = 1/8.55 = 0.11696.
    assert shaft_power_ratio(0.116) == 0.0
    assert shaft_power_ratio(0.01) == 0.0
    assert shaft_power_ratio(0.118) > 0.0


@pytest.mark.parametrize("absurd", [math.nan, 0.0, -0.2, math.inf])
def test_what_no_density_can_be_gives_no_number(absurd: float) -> None:
    assert math.isnan(true_airspeed_ratio(absurd))
    assert math.isnan(shaft_power_ratio(absurd))


def test_arrays_give_arrays() -> None:
    ratios = np.array([1.0, 0.64, np.nan])
    np.testing.assert_allclose(true_airspeed_ratio(ratios), [1.0, 1.25, np.nan])
    np.testing.assert_allclose(shaft_power_ratio(ratios), [1.0, 0.64 - 0.36 / 7.55, np.nan])


@given(st.floats(0.12, 1.4), st.floats(0.001, 0.2))
def test_thinner_air_never_gives_more_power_nor_less_speed(density_ratio: float, thinner: float) -> None:
    below = density_ratio / (1.0 + thinner)
    assert shaft_power_ratio(below) <= shaft_power_ratio(density_ratio)
    assert true_airspeed_ratio(below) > true_airspeed_ratio(density_ratio)
