import math

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from airfield_board.atmosphere import altimetry, standard
from airfield_board.units import ft_from_m, hpa_from_inhg, m_from_ft
from tests.atmosphere import reference

ELEVATIONS_FT = (-400.0, 0.0, 1500.0, 4120.0, 9000.0, 14500.0)
SETTINGS_INHG = (28.00, 29.10, 29.92, 30.40, 31.20)
TEMPERATURES_C = (-50.0, -20.0, 0.0, 15.0, 31.0, 55.0)
SPREADS_C = (None, 0.0, 3.0, 20.0)


def test_mercury_barometer_and_the_standard_setting() -> None:
    # 29.92126 inHg are the standard 1013.25 hPa (760 mm of mercury): field elevation is then the pressure altitude.
    standard_pa = 100 * hpa_from_inhg(760 / 25.4)
    assert standard_pa == pytest.approx(101325.0, rel=1e-6)
    assert altimetry.pressure_altitude(101325.0, 1255.8) == pytest.approx(1255.8, abs=1e-9)
    assert altimetry.pressure_altitude(standard_pa, 1255.8) == pytest.approx(1255.8, abs=0.01)


def test_station_pressure_at_the_standard_setting_is_the_row_of_iso_2533() -> None:
    # ISO 2533, 6,000 ft geopotential: 811.996 hPa. The elevation is taken as it stands, not as geometric height.
    assert altimetry.station_pressure(101325.0, m_from_ft(6000.0)) == pytest.approx(81199.6, abs=0.3)


def test_pressure_altitude_is_elevation_and_that_of_the_setting() -> None:
    # ISO 2533: 942.129 hPa belong to 2,000 ft, so this setting puts 2,000 ft on every elevation.
    for elevation_ft in (-400.0, 0.0, 5000.0, 14500.0):
        found_m = altimetry.pressure_altitude(94212.9, m_from_ft(elevation_ft))
        assert ft_from_m(found_m) == pytest.approx(elevation_ft + 2000.0, abs=0.02)


def test_station_pressure_agrees_with_the_formula_of_the_weather_service() -> None:
    # U.S. National Weather Service, station pressure from altimeter setting [inHg, ft], from memory; its constants are
    # rounded: p = (A**0.1903 - 1.313e-5 h)**5.255.
    for setting_inhg in SETTINGS_INHG:
        for elevation_ft in ELEVATIONS_FT:
            other_inhg = (setting_inhg**0.1903 - 1.313e-5 * elevation_ft) ** 5.255
            found_pa = altimetry.station_pressure(100 * hpa_from_inhg(setting_inhg), m_from_ft(elevation_ft))
            assert found_pa / 3386.388640341 == pytest.approx(other_inhg, abs=0.01)


@pytest.mark.parametrize(
    ("pressure_altitude_ft", "temperature_c", "chart_ft"),
    [
        # On a standard day density altitude is pressure altitude (ISO 2533, temperature column).
        (0.0, 15.0, 0.0),
        (5000.0, 15.0 - 1.9812 * 5, 5000.0),
        (10000.0, 15.0 - 1.9812 * 10, 10000.0),
    ],
)
def test_density_altitude_on_a_standard_day(pressure_altitude_ft: float, temperature_c: float, chart_ft: float) -> None:
    pressure_pa = standard.pressure_at(m_from_ft(pressure_altitude_ft))
    found_ft = ft_from_m(altimetry.density_altitude(pressure_pa, temperature_c + 273.15))
    assert found_ft == pytest.approx(chart_ft, abs=1e-6)


def test_density_altitude_of_a_published_density() -> None:
    # ISO 2533: 0.962870 kg/m3 belong to 8,000 ft. By the gas law such air has 85000/(287.05287 x 0.96287) K at 850 hPa.
    found_m = altimetry.density_altitude(85000.0, 85000.0 / (287.05287 * 0.962870))
    assert ft_from_m(found_m) == pytest.approx(8000.0, abs=0.2)


def test_dry_and_moist_values_are_exact_over_the_whole_working_range() -> None:
    # The reference is the same definition in 40-digit decimals; wanted are 0.01 hPa, 0.1 ft dry, 0.5 ft moist.
    compared = 0
    for elevation_ft in ELEVATIONS_FT:
        for setting_inhg in SETTINGS_INHG:
            elevation_m, setting_pa = m_from_ft(elevation_ft), 100 * hpa_from_inhg(setting_inhg)
            exact_pa = reference.station_pressure_pa(setting_pa, elevation_m)
            pressure_pa = altimetry.station_pressure(setting_pa, elevation_m)
            assert pressure_pa == pytest.approx(float(exact_pa), abs=1e-6)
            for temperature_c in TEMPERATURES_C:
                for spread_c in SPREADS_C:
                    temperature_k = temperature_c + 273.15
                    dewpoint_k = None if spread_c is None else min(temperature_k - spread_c, 308.15)
                    exact_m = float(reference.density_altitude_m(exact_pa, temperature_k, dewpoint_k))
                    found_m = altimetry.density_altitude(pressure_pa, temperature_k, dewpoint_k)
                    assert ft_from_m(found_m) == pytest.approx(ft_from_m(exact_m), abs=1e-6)
                    compared += 1
    assert compared == 720


def test_humidity_raises_density_altitude() -> None:
    dry = altimetry.density_altitude(87000.0, 304.15)
    dryish = altimetry.density_altitude(87000.0, 304.15, 273.15)
    moist = altimetry.density_altitude(87000.0, 304.15, 295.15)
    assert dry < dryish < moist


def test_isa_deviation_by_hand() -> None:
    # At 2,000 m the standard atmosphere has 15 - 13 = 2 °C; above the tropopause -56.5 °C.
    assert altimetry.isa_deviation(2000.0, 300.15) == pytest.approx(25.0, abs=1e-9)
    assert altimetry.isa_deviation(12000.0, 216.65) == pytest.approx(0.0, abs=1e-9)


@given(
    elevation_ft=st.floats(-400.0, 14500.0),
    setting_inhg=st.floats(28.0, 31.2),
    temperature_c=st.floats(-50.0, 55.0),
    spread_c=st.none() | st.floats(0.0, 30.0),
)
@settings(max_examples=150)
def test_temperature_for_density_altitude_is_the_inverse(
    elevation_ft: float, setting_inhg: float, temperature_c: float, spread_c: float | None
) -> None:
    temperature_k = temperature_c + 273.15
    dewpoint_k = None if spread_c is None else temperature_k - spread_c
    pressure_pa = altimetry.station_pressure(100 * hpa_from_inhg(setting_inhg), m_from_ft(elevation_ft))
    altitude_m = altimetry.density_altitude(pressure_pa, temperature_k, dewpoint_k)
    back_k = altimetry.temperature_for_density_altitude(altitude_m, pressure_pa, dewpoint_k)
    assert back_k == pytest.approx(temperature_k, abs=1e-8)


def test_temperature_for_density_altitude_in_the_upper_layer() -> None:
    back_k = altimetry.temperature_for_density_altitude(12500.0, 30000.0)
    assert altimetry.density_altitude(30000.0, back_k) == pytest.approx(12500.0, abs=1e-6)


@given(elevation_m=st.floats(-400.0, 4500.0), setting_pa=st.floats(94000.0, 106000.0))
@settings(max_examples=100)
def test_an_altimeter_set_to_the_setting_reads_the_elevation(elevation_m: float, setting_pa: float) -> None:
    # An altimeter reads the pressure altitude of the pressure less that of its setting.
    pressure_pa = altimetry.station_pressure(setting_pa, elevation_m)
    read_m = standard.altitude_from_pressure(pressure_pa) - standard.altitude_from_pressure(setting_pa)
    assert read_m == pytest.approx(elevation_m, abs=1e-6)


@pytest.mark.parametrize("bad", [math.nan, math.inf, 0.0, -1.0])
def test_impossible_inputs_give_nan(bad: float) -> None:
    assert math.isnan(altimetry.station_pressure(bad, 100.0))
    assert math.isnan(altimetry.pressure_altitude(bad, 100.0))
    assert math.isnan(altimetry.density_altitude(bad, 300.0))
    assert math.isnan(altimetry.density_altitude(90000.0, bad))
    assert math.isnan(altimetry.density_altitude(90000.0, bad, 280.0))
    assert math.isnan(altimetry.isa_deviation(100.0, bad))
    assert math.isnan(altimetry.temperature_for_density_altitude(1000.0, bad))


def test_elevations_and_altitudes_outside_the_standard_atmosphere_give_nan() -> None:
    assert math.isnan(altimetry.station_pressure(101325.0, math.nan))
    assert math.isnan(altimetry.station_pressure(101325.0, 25000.0))
    assert math.isnan(altimetry.pressure_altitude(101325.0, -6000.0))
    assert math.isnan(altimetry.density_altitude(120000.0, 150.0))
    assert math.isnan(altimetry.isa_deviation(math.nan, 300.0))
    assert math.isnan(altimetry.temperature_for_density_altitude(25000.0, 90000.0))


def test_a_missing_dew_point_in_an_array_never_passes_for_dry_air() -> None:
    dewpoints_k = np.array([280.0, math.nan, 290.0])
    altitudes_m = altimetry.density_altitude(90000.0, np.full(3, 300.0), dewpoints_k)
    np.testing.assert_array_equal(np.isnan(altitudes_m), [False, True, False])
    back_k = altimetry.temperature_for_density_altitude(1000.0, 90000.0, dewpoints_k)
    np.testing.assert_array_equal(np.isnan(back_k), [False, True, False])


def test_floats_and_arrays_broadcast() -> None:
    settings_pa = np.array([[99000.0], [101325.0]])
    elevations_m = np.array([0.0, 1000.0, 2000.0])
    together = altimetry.station_pressure(settings_pa, elevations_m)
    assert together.shape == (2, 3)
    assert together[1, 2] == altimetry.station_pressure(101325.0, 2000.0)
    assert type(altimetry.station_pressure(101325.0, 2000.0)) is float
    assert altimetry.pressure_altitude(101325.0, elevations_m).shape == (3,)
    assert altimetry.isa_deviation(elevations_m, 300.0).shape == (3,)
    assert altimetry.density_altitude(np.zeros(0), np.zeros(0), np.zeros(0)).shape == (0,)
