import math
from collections.abc import Callable

import numpy as np
import pytest

from airfield_board.atmosphere import altimetry, standard, uncertainty

CASES = [
    # altimeter setting [Pa], elevation [m], temperature [K], dew point [K] or None
    (101630.0, 1255.8, 304.15, 277.15),
    (101630.0, 1255.8, 304.15, None),
    (98000.0, -120.0, 308.15, 303.15),
    (104000.0, 4400.0, 268.15, 263.15),
    (96000.0, 3000.0, 318.15, 291.15),
]


def density_altitude(altimeter_pa: float, elevation_m: float, temperature_k: float, dewpoint_k: float | None) -> float:
    pressure_pa = altimetry.station_pressure(altimeter_pa, elevation_m)
    return altimetry.density_altitude(pressure_pa, temperature_k, dewpoint_k)


def slope(function: Callable[[float], float], at: float, step: float) -> float:
    """Return the derivative by a central difference of fourth order."""
    near = function(at + step) - function(at - step)
    far = function(at + 2 * step) - function(at - 2 * step)
    return (8 * near - far) / (12 * step)


def test_standard_uncertainty_by_hand() -> None:
    # GUM 4.3.7: a resolution of 1 is a rectangle of standard deviation 0.288675; half of an accuracy of 0.5 is 0.25.
    assert uncertainty.standard_uncertainty(1.0, 0.0) == pytest.approx(0.2886751, abs=1e-7)
    assert uncertainty.standard_uncertainty(0.0, 0.5) == pytest.approx(0.25, abs=1e-15)
    assert uncertainty.standard_uncertainty(1.0, 0.5) == pytest.approx(math.sqrt(1 / 12 + 1 / 16), rel=1e-15)
    assert math.isnan(uncertainty.standard_uncertainty(math.nan, 0.5))
    assert uncertainty.standard_uncertainty(np.array([0.1, 1.0]), 0.5).shape == (2,)


def test_expanded_uncertainty_is_twice_the_standard_one() -> None:
    assert uncertainty.expanded(0.25) == 0.5
    np.testing.assert_array_equal(uncertainty.expanded(np.array([0.1, 0.2])), [0.2, 0.4])


@pytest.mark.parametrize(("altimeter_pa", "elevation_m", "temperature_k", "dewpoint_k"), CASES)
def test_derivatives_of_density_altitude_are_exact(
    altimeter_pa: float, elevation_m: float, temperature_k: float, dewpoint_k: float | None
) -> None:
    found = uncertainty.density_altitude_derivatives(altimeter_pa, elevation_m, temperature_k, dewpoint_k)
    by_altimeter = slope(lambda x: density_altitude(x, elevation_m, temperature_k, dewpoint_k), altimeter_pa, 50.0)
    by_temperature = slope(lambda x: density_altitude(altimeter_pa, elevation_m, x, dewpoint_k), temperature_k, 0.05)
    assert found.by_altimeter == pytest.approx(by_altimeter, rel=1e-8)
    assert found.by_temperature == pytest.approx(by_temperature, rel=1e-8)
    if dewpoint_k is None:
        assert found.by_dewpoint == 0.0
    else:
        by_dewpoint = slope(lambda x: density_altitude(altimeter_pa, elevation_m, temperature_k, x), dewpoint_k, 0.05)
        assert found.by_dewpoint == pytest.approx(by_dewpoint, rel=1e-7)


def test_derivatives_are_exact_in_the_upper_layer_too() -> None:
    # A pressure altitude of some 12 km and a density altitude above the tropopause: no field, but the formulas hold.
    found = uncertainty.density_altitude_derivatives(101325.0, 12000.0, 230.0)
    assert density_altitude(101325.0, 12000.0, 230.0, None) > 11000.0
    by_altimeter = slope(lambda x: density_altitude(x, 12000.0, 230.0, None), 101325.0, 50.0)
    by_temperature = slope(lambda x: density_altitude(101325.0, 12000.0, x, None), 230.0, 0.05)
    assert found.by_altimeter == pytest.approx(by_altimeter, rel=1e-8)
    assert found.by_temperature == pytest.approx(by_temperature, rel=1e-8)


def test_the_altimeter_setting_acts_twice_on_moist_density_altitude() -> None:
    # More pressure is more air and a smaller share of the same vapour: both lower the density altitude.
    moist = uncertainty.density_altitude_derivatives(101000.0, 500.0, 308.15, 303.15)
    dry = uncertainty.density_altitude_derivatives(101000.0, 500.0, 308.15)
    assert moist.by_altimeter < dry.by_altimeter * 1.01


def pressure_altitude_uncertainty(altimeter_pa: float, elevation_m: float, u_altimeter_pa: float) -> float:
    one = np.ones(1)
    air = uncertainty._air(altimeter_pa * one, elevation_m * one, 300.0 * one, None)
    return float(uncertainty.field_air_uncertainties(air, u_altimeter_pa, 0.2 * one, 0.5 * one)[1][0])


@pytest.mark.parametrize(("altimeter_pa", "elevation_m"), [(101325.0, 0.0), (98000.0, 4000.0), (105000.0, -300.0)])
def test_uncertainty_of_pressure_altitude_is_exact(altimeter_pa: float, elevation_m: float) -> None:
    by_altimeter = slope(lambda x: altimetry.pressure_altitude(x, elevation_m), altimeter_pa, 50.0)
    found_m = pressure_altitude_uncertainty(altimeter_pa, elevation_m, 34.0)
    assert found_m == pytest.approx(2 * 34.0 * abs(by_altimeter), rel=1e-8)


def test_uncertainty_of_isa_deviation_counts_the_setting_by_way_of_pressure_altitude() -> None:
    def deviation(altimeter_pa: float) -> float:
        return altimetry.isa_deviation(altimetry.pressure_altitude(altimeter_pa, 1200.0), 300.0)

    by_altimeter = slope(deviation, 101000.0, 50.0)
    found_k = uncertainty.isa_deviation_uncertainty(101000.0, 1200.0, 300.0, 0.25)
    assert found_k == pytest.approx(2 * math.hypot(by_altimeter * 300.0, 0.25), rel=1e-8)
    assert found_k > 0.5
    # Above the tropopause the standard temperature is the same at every altitude.
    assert uncertainty.isa_deviation_uncertainty(101000.0, 12000.0, 300.0, 0.25) == pytest.approx(0.5, rel=1e-12)


def test_rounding_of_temperature_alone_as_commonly_reckoned() -> None:
    # Own measurement: rounding to whole °C alone makes 61 to 65 ft, some 105 to 110 ft a kelvin, on warm days.
    rounding_k = uncertainty.standard_uncertainty(1.0, 0.0)
    for elevation_m in (0.0, 1255.8, 2000.0):
        found_m = uncertainty.density_altitude_uncertainty(101325.0, elevation_m, 306.15, None, 0.0, rounding_k)
        assert 60.0 < found_m / 0.3048 < 66.0


@pytest.mark.parametrize(("altimeter_pa", "elevation_m", "temperature_k", "dewpoint_k"), CASES)
def test_propagation_agrees_with_a_monte_carlo(
    altimeter_pa: float, elevation_m: float, temperature_k: float, dewpoint_k: float | None
) -> None:
    # JCGM 101: errors drawn as stated (a rectangle for the resolution, a normal with 2 sigma for the accuracy), passed
    # through the formulas. With 200,000 draws a standard deviation is good to 0.2 %.
    rng = np.random.default_rng(1976)
    draws = 200_000

    def readings(true: float, resolution: float, accuracy: float) -> "np.ndarray[tuple[int], np.dtype[np.float64]]":
        return true + rng.uniform(-resolution / 2, resolution / 2, draws) + rng.normal(0.0, accuracy / 2, draws)

    altimeters_pa = readings(altimeter_pa, 33.9, 67.7)
    temperatures_k = readings(temperature_k, 1.0, 0.5)
    dewpoints_k = None if dewpoint_k is None else readings(dewpoint_k, 1.0, 1.0)
    pressures_pa = altimetry.station_pressure(altimeters_pa, elevation_m)
    u_altimeter_pa = uncertainty.standard_uncertainty(33.9, 67.7)
    u_temperature_k = uncertainty.standard_uncertainty(1.0, 0.5)
    u_dewpoint_k = uncertainty.standard_uncertainty(1.0, 1.0)

    drawn_m = 2 * float(np.std(altimetry.density_altitude(pressures_pa, temperatures_k, dewpoints_k)))
    found_m = uncertainty.density_altitude_uncertainty(
        altimeter_pa, elevation_m, temperature_k, dewpoint_k, u_altimeter_pa, u_temperature_k, u_dewpoint_k
    )
    assert found_m == pytest.approx(drawn_m, rel=0.01)

    altitudes_m = altimetry.pressure_altitude(altimeters_pa, elevation_m)
    found_m = pressure_altitude_uncertainty(altimeter_pa, elevation_m, u_altimeter_pa)
    assert found_m == pytest.approx(2 * float(np.std(altitudes_m)), rel=0.01)

    drawn_k = 2 * float(np.std(altimetry.isa_deviation(altitudes_m, temperatures_k)))
    found_k = uncertainty.isa_deviation_uncertainty(altimeter_pa, elevation_m, u_altimeter_pa, u_temperature_k)
    assert found_k == pytest.approx(drawn_k, rel=0.01)


def test_the_dew_point_adds_nothing_to_dry_air() -> None:
    without = uncertainty.density_altitude_uncertainty(101325.0, 0.0, 300.0, None, 30.0, 0.3)
    assert uncertainty.density_altitude_uncertainty(101325.0, 0.0, 300.0, None, 30.0, 0.3, 5.0) == without
    moist = uncertainty.density_altitude_uncertainty(101325.0, 0.0, 300.0, 295.0, 30.0, 0.3, 1.0)
    assert moist > without


@pytest.mark.parametrize(
    ("altimeter_pa", "elevation_m", "temperature_k", "dewpoint_k"),
    [
        (math.nan, 0.0, 300.0, None),
        (0.0, 0.0, 300.0, None),
        (101325.0, math.nan, 300.0, 280.0),
        (101325.0, 30000.0, 300.0, 280.0),
        (101325.0, 0.0, 0.0, None),
        (101325.0, 0.0, 300.0, math.nan),
    ],
)
def test_where_there_is_no_value_there_is_no_uncertainty(
    altimeter_pa: float, elevation_m: float, temperature_k: float, dewpoint_k: float | None
) -> None:
    found = uncertainty.density_altitude_derivatives(altimeter_pa, elevation_m, temperature_k, dewpoint_k)
    assert math.isnan(found.by_altimeter)
    assert math.isnan(found.by_temperature)
    assert math.isnan(found.by_dewpoint)
    assert math.isnan(
        uncertainty.density_altitude_uncertainty(altimeter_pa, elevation_m, temperature_k, dewpoint_k, 30.0, 0.3, 0.5)
    )


def test_arrays_give_what_their_elements_give() -> None:
    altimeters_pa = np.array([99000.0, 101325.0, 103000.0])
    dewpoints_k = np.array([280.0, 285.0, math.nan])
    together = uncertainty.density_altitude_uncertainty(altimeters_pa, 100.0, 300.0, dewpoints_k, 30.0, 0.3, 0.5)
    alone = uncertainty.density_altitude_uncertainty(101325.0, 100.0, 300.0, 285.0, 30.0, 0.3, 0.5)
    assert together[1] == pytest.approx(alone, rel=1e-14)
    np.testing.assert_array_equal(np.isnan(together), [False, False, True])
    assert uncertainty.isa_deviation_uncertainty(altimeters_pa, 100.0, 30.0, 0.3).shape == (3,)
    assert standard.pressure_at(np.zeros(0)).shape == (0,)
