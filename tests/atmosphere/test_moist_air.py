import math

import CoolProp.CoolProp as Fluids
import numpy as np
import pytest
from CoolProp.HumidAirProp import HAPropsSI

from airfield_board.atmosphere import moist_air, standard
from airfield_board.units import ft_from_m
from tests.atmosphere.reference import cipm_2007_density_kg_m3

# f(1000 hPa) by hand from WMO-No. 8, annex 4.B: 1.0016 + 0.00315 - 0.000074.
ENHANCEMENT_AT_1000_HPA = 1.004676


def vapour_pressure(dewpoint_k: float, pressure_pa: float) -> float:
    """The vapour's pressure that the ratio of densities speaks of: ratio = 1 - (1 - 18.01528/28.9644) e / p."""
    return pressure_pa * (1 - moist_air.moist_to_dry_density(pressure_pa, dewpoint_k)) / (1 - 18.01528 / 28.9644)


@pytest.mark.parametrize(
    ("temperature_c", "vapour_hpa"),
    [
        # Sonntag (1990), over water, from memory of its table at the ice point and the triple point.
        (0.0, 6.11213),
        (0.01, 6.11657),
    ],
)
def test_vapour_pressure_at_fixed_points_by_sonntag(temperature_c: float, vapour_hpa: float) -> None:
    found_pa = vapour_pressure(temperature_c + 273.15, 100000.0)
    assert found_pa / 100 == pytest.approx(vapour_hpa * ENHANCEMENT_AT_1000_HPA, rel=2e-6)


@pytest.mark.parametrize("temperature_k", [273.16, 280.0, 290.0, 300.0, 308.15, 330.0, 370.0])
def test_vapour_pressure_agrees_with_water_in_coolprop(temperature_k: float) -> None:
    # CoolProp: IAPWS-95, an equation of state of water alone; so the enhancement by the air is taken off here.
    found_pa = vapour_pressure(temperature_k, 100000.0) / ENHANCEMENT_AT_1000_HPA
    assert found_pa == pytest.approx(Fluids.PropsSI("P", "T", temperature_k, "Q", 0, "Water"), rel=1e-4)


def test_vapour_pressure_stays_over_water_below_freezing() -> None:
    # WMO-No. 8, annex 4.B, its own formula over water: 6.112 exp(17.62 t / (243.12 + t)) hPa.
    for temperature_c in (-10.0, -25.0, -40.0):
        other_hpa = 6.112 * math.exp(17.62 * temperature_c / (243.12 + temperature_c)) * ENHANCEMENT_AT_1000_HPA
        found_hpa = vapour_pressure(temperature_c + 273.15, 100000.0) / 100
        assert found_hpa == pytest.approx(other_hpa, rel=5e-3)


def test_moist_air_has_the_density_of_dry_air_at_its_virtual_temperature() -> None:
    # By hand: at 20 °C pure water has 23.3925 hPa (CoolProp: 23.3932), f(1000 hPa) = 1.004676, so e = 23.5019 hPa;
    # 1 - 18.01528/28.9644 = 0.378020; 300 K / (1 - 0.378020 x 23.5019 / 1000) = 302.6891 K.
    assert moist_air.density(100000.0, 300.0, 293.15) == pytest.approx(moist_air.density(100000.0, 302.6891), rel=1e-6)


def test_density_of_dry_air_is_the_gas_law() -> None:
    # By hand: 100000 / (287.05287 x 300) = 100000 / 86115.861.
    assert moist_air.density(100000.0, 300.0) == pytest.approx(1.161226, abs=1e-6)
    assert moist_air.density(100000.0, 300.0, None) == moist_air.density(100000.0, 300.0)


def test_moist_air_is_dry_air_times_the_ratio_of_densities() -> None:
    ratio = moist_air.moist_to_dry_density(90000.0, 290.0)
    moist = moist_air.density(90000.0, 300.0, 290.0)
    assert moist == pytest.approx(ratio * moist_air.density(90000.0, 300.0), rel=1e-14)


REAL_GAS_CASES = [
    (pressure_pa, temperature_k, temperature_k - spread_k)
    for pressure_pa in (60000.0, 75000.0, 90000.0, 101325.0, 106000.0)
    for temperature_k in (273.15, 288.15, 303.15, 313.15, 323.15)
    for spread_k in (0.0, 8.0, 30.0)
    if 263.15 <= temperature_k - spread_k <= 308.15
]


@pytest.mark.parametrize(("pressure_pa", "temperature_k", "dewpoint_k"), REAL_GAS_CASES)
def test_ideal_gas_reads_a_little_higher_than_cipm_2007_and_never_lower(
    pressure_pa: float, temperature_k: float, dewpoint_k: float
) -> None:
    ideal = moist_air.density(pressure_pa, temperature_k, dewpoint_k)
    real = cipm_2007_density_kg_m3(pressure_pa, temperature_k, dewpoint_k)
    higher_ft = ft_from_m(standard.altitude_from_density(ideal) - standard.altitude_from_density(real))
    # The real-gas difference, stated in the module's docstring.
    assert 4.0 < higher_ft < 23.0


# CoolProp takes a dew point below the triple point for a frost point.
@pytest.mark.parametrize(
    ("pressure_pa", "temperature_k", "dewpoint_k"), [case for case in REAL_GAS_CASES if case[2] >= 273.16]
)
def test_ideal_gas_reads_a_little_higher_than_humid_air_in_coolprop(
    pressure_pa: float, temperature_k: float, dewpoint_k: float
) -> None:
    # CoolProp's humid air (ASHRAE RP-1485) is a real gas too; its mixture volume is per kilogram of humid air.
    real = 1.0 / HAPropsSI("Vha", "P", pressure_pa, "T", temperature_k, "Tdp", dewpoint_k)
    ideal = moist_air.density(pressure_pa, temperature_k, dewpoint_k)
    higher_ft = ft_from_m(standard.altitude_from_density(ideal) - standard.altitude_from_density(real))
    assert 4.0 < higher_ft < 23.0


@pytest.mark.parametrize(("pressure_pa", "dewpoint_k"), [(60000.0, 270.0), (87000.0, 290.0), (105000.0, 305.0)])
def test_slopes_of_the_density_ratio_are_the_derivatives(pressure_pa: float, dewpoint_k: float) -> None:
    by_pressure, by_dewpoint = moist_air.moist_to_dry_slopes(pressure_pa, dewpoint_k)

    def log_ratio(pressure: float, dewpoint: float) -> float:
        return math.log(moist_air.moist_to_dry_density(pressure, dewpoint))

    step_pa, step_k = 10.0, 1e-3
    pressure_slope = (
        log_ratio(pressure_pa + step_pa, dewpoint_k) - log_ratio(pressure_pa - step_pa, dewpoint_k)
    ) / 20.0
    dewpoint_slope = (log_ratio(pressure_pa, dewpoint_k + step_k) - log_ratio(pressure_pa, dewpoint_k - step_k)) / 2e-3
    assert by_pressure == pytest.approx(pressure_slope, rel=1e-5)
    assert by_dewpoint == pytest.approx(dewpoint_slope, rel=1e-6)
    assert by_pressure > 0 > by_dewpoint


def test_a_missing_dew_point_never_passes_for_dry_air() -> None:
    assert math.isnan(moist_air.density(90000.0, 300.0, math.nan))
    np.testing.assert_array_equal(
        np.isnan(moist_air.density(np.full(3, 90000.0), 300.0, np.array([290.0, math.nan, 280.0]))),
        [False, True, False],
    )


@pytest.mark.parametrize("dewpoint_k", [math.nan, math.inf, -5.0, 0.0, 173.0, 373.3])
def test_a_dew_point_outside_the_range_of_the_formula_gives_nan(dewpoint_k: float) -> None:
    assert math.isnan(moist_air.moist_to_dry_density(90000.0, dewpoint_k))
    assert math.isnan(moist_air.density(90000.0, 300.0, dewpoint_k))
    assert all(math.isnan(slope) for slope in moist_air.moist_to_dry_slopes(90000.0, dewpoint_k))


@pytest.mark.parametrize("impossible", [math.nan, math.inf, 0.0, -300.0])
def test_an_impossible_pressure_or_temperature_gives_nan(impossible: float) -> None:
    assert math.isnan(moist_air.density(impossible, 300.0))
    assert math.isnan(moist_air.density(90000.0, impossible))
    assert math.isnan(moist_air.density(impossible, impossible))
    assert math.isnan(moist_air.density(impossible, 300.0, 290.0))
    assert math.isnan(moist_air.moist_to_dry_density(impossible, 290.0))


def test_more_vapour_than_air_gives_nan() -> None:
    # At 90 °C the vapour alone has some 701 hPa.
    assert math.isnan(moist_air.moist_to_dry_density(60000.0, 363.15))
    assert moist_air.moist_to_dry_density(90000.0, 363.15) < 0.75


def test_floats_and_arrays_broadcast() -> None:
    pressures_pa = np.array([[80000.0], [90000.0]])
    dewpoints_k = np.array([280.0, 285.0, 290.0])
    together = moist_air.density(pressures_pa, 300.0, dewpoints_k)
    assert together.shape == (2, 3)
    assert together[1, 2] == moist_air.density(90000.0, 300.0, 290.0)
    assert type(moist_air.density(90000.0, 300.0, 290.0)) is float
    assert type(moist_air.moist_to_dry_density(90000.0, 290.0)) is float
    assert moist_air.moist_to_dry_density(90000.0, dewpoints_k).shape == (3,)
