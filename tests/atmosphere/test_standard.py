import math

import ambiance
import numpy as np
import pytest
from fluids.atmosphere import ATMOSPHERE_1976
from hypothesis import given, settings
from hypothesis import strategies as st

from airfield_board.atmosphere import standard
from airfield_board.units import m_from_ft

# ISO 2533:1975, tables by geopotential altitude in feet: ft, hPa, kg/m3.
ISO_2533_FEET = [
    (-1000, 1050.41, 1.26125),
    (0, 1013.25, 1.22500),
    (2000, 942.129, 1.15490),
    (4000, 875.105, 1.08791),
    (6000, 811.996, 1.02393),
    (8000, 752.624, 0.962870),
    (10000, 696.816, 0.904637),
    (12000, 644.408, 0.849137),
    (14000, 595.239, 0.796281),
    (16000, 549.152, 0.745979),
]
# ICAO Doc 7488 and U.S. Standard Atmosphere 1976 (the same there), by geopotential altitude in metres, from memory:
# m, K, hPa, kg/m3.
DOC_7488_METRES = [
    (-5000, 320.650, 1776.87, 1.93047),
    (0, 288.150, 1013.25, 1.22500),
    (1000, 281.650, 898.746, 1.11164),
    (2000, 275.150, 794.952, 1.00649),
    (3000, 268.650, 701.085, 0.909122),
    (5000, 255.650, 540.199, 0.736116),
    (10000, 223.150, 264.363, 0.412707),
    (11000, 216.650, 226.320, 0.363918),
    (15000, 216.650, 120.445, 0.193673),
    (20000, 216.650, 54.7487, 0.0880345),
]


@pytest.mark.parametrize(("altitude_ft", "pressure_hpa", "density_kg_m3"), ISO_2533_FEET)
def test_rows_of_iso_2533_in_feet(altitude_ft: int, pressure_hpa: float, density_kg_m3: float) -> None:
    altitude_m = m_from_ft(float(altitude_ft))
    # Six figures are printed.
    assert standard.pressure_at(altitude_m) == pytest.approx(pressure_hpa * 100, rel=6e-6)
    assert standard.density_at(altitude_m) == pytest.approx(density_kg_m3, rel=6e-6)


@pytest.mark.parametrize(("altitude_m", "temperature_k", "pressure_hpa", "density_kg_m3"), DOC_7488_METRES)
def test_rows_of_doc_7488_and_us_1976_from_below_the_sea_to_20_km(
    altitude_m: int, temperature_k: float, pressure_hpa: float, density_kg_m3: float
) -> None:
    assert standard.temperature_at(float(altitude_m)) == pytest.approx(temperature_k, abs=1e-9)
    assert standard.pressure_at(float(altitude_m)) == pytest.approx(pressure_hpa * 100, rel=6e-6)
    assert standard.density_at(float(altitude_m)) == pytest.approx(density_kg_m3, rel=6e-6)


@pytest.mark.parametrize(("altitude_m", "temperature_k", "pressure_hpa", "density_kg_m3"), DOC_7488_METRES)
def test_inverses_find_the_altitudes_of_published_rows(
    altitude_m: int, temperature_k: float, pressure_hpa: float, density_kg_m3: float
) -> None:
    del temperature_k
    if altitude_m in (-5000, 20000):
        # The printed figure may lie a hair outside the range.
        pressure_hpa, density_kg_m3 = (1776.80, 1.93040) if altitude_m == -5000 else (54.7500, 0.0880360)
    # The printed figure is good to 6e-6, and no scale height is above 11.6 km.
    assert standard.altitude_from_pressure(pressure_hpa * 100) == pytest.approx(altitude_m, abs=0.5)
    assert standard.altitude_from_density(density_kg_m3) == pytest.approx(altitude_m, abs=0.5)


def test_agrees_with_the_library_ambiance() -> None:
    altitudes_m = np.linspace(-4900.0, 19900.0, 497)
    # It takes geometric heights, and its pressures at the bottom of each layer are rounded to six figures.
    other = ambiance.Atmosphere(ambiance.Atmosphere.geop2geom_height(altitudes_m))
    np.testing.assert_allclose(standard.temperature_at(altitudes_m), other.temperature, rtol=1e-9)
    np.testing.assert_allclose(standard.pressure_at(altitudes_m), other.pressure, rtol=3e-6)
    np.testing.assert_allclose(standard.density_at(altitudes_m), other.density, rtol=3e-6)
    np.testing.assert_allclose(
        standard.pressure_scale_height(altitudes_m), other.pressure_scale_height * other.grav_accel / 9.80665, rtol=1e-8
    )


def test_agrees_with_the_library_fluids() -> None:
    earth_m = 6356766.0  # radius of U.S. Standard Atmosphere 1976, between geometric and geopotential height
    for altitude_m in (0.0, 500.0, 2500.0, 5000.0, 10900.0, 11100.0, 15000.0, 19900.0):
        other = ATMOSPHERE_1976(earth_m * altitude_m / (earth_m - altitude_m))
        assert standard.temperature_at(altitude_m) == pytest.approx(other.T, rel=1e-6)
        assert standard.pressure_at(altitude_m) == pytest.approx(other.P, rel=1e-5)
        assert standard.density_at(altitude_m) == pytest.approx(other.rho, rel=1e-5)


@given(altitude_m=st.floats(-5000.0, 20000.0))
@settings(max_examples=200)
def test_round_trips_return_the_altitude(altitude_m: float) -> None:
    assert standard.altitude_from_pressure(standard.pressure_at(altitude_m)) == pytest.approx(altitude_m, abs=1e-6)
    assert standard.altitude_from_density(standard.density_at(altitude_m)) == pytest.approx(altitude_m, abs=1e-6)


@pytest.mark.parametrize("altitude_m", [-5000.0, 11000.0, 20000.0])
def test_round_trips_hold_at_the_ends_and_at_the_tropopause(altitude_m: float) -> None:
    assert standard.altitude_from_pressure(standard.pressure_at(altitude_m)) == pytest.approx(altitude_m, abs=1e-6)
    assert standard.altitude_from_density(standard.density_at(altitude_m)) == pytest.approx(altitude_m, abs=1e-6)


def test_both_layers_meet_at_the_tropopause() -> None:
    below, above = np.nextafter(11000.0, 0.0), np.nextafter(11000.0, 20000.0)
    assert standard.pressure_at(float(below)) == pytest.approx(standard.pressure_at(float(above)), rel=1e-12)
    assert standard.density_at(float(below)) == pytest.approx(standard.density_at(float(above)), rel=1e-12)


def test_an_array_across_the_tropopause_gives_what_its_elements_give() -> None:
    altitudes_m = np.array([[-4000.0, 0.0, 10999.0], [11000.0, 11001.0, 19000.0]])
    for formula in (
        standard.temperature_at,
        standard.pressure_at,
        standard.density_at,
        standard.pressure_scale_height,
        standard.density_scale_height,
        standard.lapse_rate_at,
    ):
        together = formula(altitudes_m)
        assert together.shape == (2, 3)
        alone = [formula(float(altitude_m)) for altitude_m in altitudes_m.ravel()]
        np.testing.assert_allclose(together.ravel(), alone, rtol=1e-12)


@pytest.mark.parametrize("altitude_m", [-3000.0, 0.0, 3000.0, 10500.0, 12000.0, 18000.0])
def test_scale_heights_and_lapse_rate_are_the_slopes(altitude_m: float) -> None:
    step_m = 1.0
    low, high = altitude_m - step_m, altitude_m + step_m
    by_pressure = -2 * step_m / math.log(standard.pressure_at(high) / standard.pressure_at(low))
    by_density = -2 * step_m / math.log(standard.density_at(high) / standard.density_at(low))
    fall = -(standard.temperature_at(high) - standard.temperature_at(low)) / (2 * step_m)
    assert standard.pressure_scale_height(altitude_m) == pytest.approx(by_pressure, rel=1e-6)
    assert standard.density_scale_height(altitude_m) == pytest.approx(by_density, rel=1e-6)
    assert standard.lapse_rate_at(altitude_m) == pytest.approx(fall, abs=1e-9)


@pytest.mark.parametrize("altitude_m", [math.nan, math.inf, -math.inf, -5001.0, 20001.0])
def test_an_altitude_outside_the_range_gives_nan(altitude_m: float) -> None:
    for formula in (
        standard.temperature_at,
        standard.pressure_at,
        standard.density_at,
        standard.pressure_scale_height,
        standard.density_scale_height,
        standard.lapse_rate_at,
        standard.within_range,
    ):
        assert math.isnan(formula(altitude_m))


@pytest.mark.parametrize("value", [math.nan, math.inf, 0.0, -1.0, -101325.0, 1e-300, 1e300])
def test_a_pressure_or_density_that_cannot_be_gives_nan(value: float) -> None:
    assert math.isnan(standard.altitude_from_pressure(value))
    assert math.isnan(standard.altitude_from_density(value))


def test_one_bad_value_spoils_only_itself() -> None:
    altitudes_m = np.array([0.0, math.nan, 12000.0, 30000.0])
    expected = [101325.0, math.nan, standard.pressure_at(12000.0), math.nan]
    np.testing.assert_allclose(standard.pressure_at(altitudes_m), expected, rtol=1e-12)
    pressures_pa = np.array([101325.0, math.nan, -5.0, standard.pressure_at(12000.0)])
    np.testing.assert_allclose(
        standard.altitude_from_pressure(pressures_pa), [0.0, math.nan, math.nan, 12000.0], rtol=1e-12, atol=1e-9
    )


def test_a_float_gives_a_float_and_arrays_keep_their_shape() -> None:
    assert type(standard.pressure_at(1000.0)) is float
    assert type(standard.altitude_from_density(np.float64(1.1))) is float
    assert type(standard.temperature_at(1000)) is float
    assert standard.pressure_at(np.array([1000.0])).shape == (1,)
    assert standard.pressure_at(np.zeros((0,))).shape == (0,)
    assert standard.altitude_from_pressure(np.full((2, 1), 9e4)).shape == (2, 1)


def test_arguments_are_left_as_they_were() -> None:
    values = np.array([90000.0, 101325.0, 20000.0])
    kept = values.copy()
    standard.altitude_from_pressure(values)
    standard.altitude_from_density(values / 1e5)
    standard.pressure_at(values / 10)
    standard.temperature_at(values / 10)
    np.testing.assert_array_equal(values, kept)
