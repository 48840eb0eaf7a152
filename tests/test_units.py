import math

import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st

from airfield_board import units


def test_mercury_barometer_arithmetic() -> None:
    # One inch is 25.4 mm; mercury at 0 °C has 13.5951 g/cm3 (WMO-No. 8, part I, chapter 3), standard gravity 9.80665.
    assert pytest.approx(0.0254 * 13595.1 * 9.80665, rel=1e-15) == units.INCH_OF_MERCURY_PA
    # 3386.388640341 Pa: the product worked out in decimals.
    assert pytest.approx(3386.388640341, abs=1e-9) == units.INCH_OF_MERCURY_PA
    # 760 mm of mercury are the standard atmosphere of 1013.25 hPa (to the seven digits of the conventional millimetre).
    assert units.hpa_from_inhg(760.0 / 25.4) == pytest.approx(1013.25, abs=2e-4)
    # Common practice, no source: 29.92 inHg and 1013 hPa are said in one breath.
    assert round(units.hpa_from_inhg(29.92)) == 1013


def test_exact_factors_of_nist_sp_811() -> None:
    assert units.m_from_ft(1.0) == 0.3048
    assert units.kg_from_lb(1.0) == 0.45359237
    assert units.ft_from_m(1000.0) == pytest.approx(3280.839895, abs=1e-6)
    assert units.lb_from_kg(1.0) == pytest.approx(2.20462262185, abs=1e-11)
    assert units.pa_from_hpa(1013.25) == 101325.0


@pytest.mark.parametrize(
    # Fixed pairs of the scales: freezing, boiling, where both scales meet.
    ("celsius", "fahrenheit", "kelvin"),
    [(0.0, 32.0, 273.15), (100.0, 212.0, 373.15), (-40.0, -40.0, 233.15), (15.0, 59.0, 288.15)],
)
def test_temperature_scales(celsius: float, fahrenheit: float, kelvin: float) -> None:
    assert units.f_from_c(celsius) == pytest.approx(fahrenheit, abs=1e-12)
    assert units.c_from_f(fahrenheit) == pytest.approx(celsius, abs=1e-12)
    assert units.k_from_c(celsius) == pytest.approx(kelvin, abs=1e-12)
    assert units.c_from_k(kelvin) == pytest.approx(celsius, abs=1e-12)


def test_a_difference_of_temperatures_has_no_zero_point() -> None:
    # A degree Celsius is 1.8 degrees Fahrenheit (NIST SP 811, appendix B).
    assert units.f_difference_from_c(10.0) == 18.0
    assert units.c_difference_from_f(9.0) == 5.0


@given(value=st.floats(-1e5, 1e5))
def test_each_conversion_and_its_inverse_return_the_value(value: float) -> None:
    assert units.ft_from_m(units.m_from_ft(value)) == pytest.approx(value, rel=1e-14, abs=1e-12)
    assert units.inhg_from_hpa(units.hpa_from_inhg(value)) == pytest.approx(value, rel=1e-14, abs=1e-12)
    assert units.c_from_k(units.k_from_c(value)) == pytest.approx(value, rel=1e-14, abs=1e-10)
    assert units.c_from_f(units.f_from_c(value)) == pytest.approx(value, rel=1e-14, abs=1e-10)
    assert units.lb_from_kg(units.kg_from_lb(value)) == pytest.approx(value, rel=1e-14, abs=1e-12)


def test_arrays_come_out_as_arrays_and_missing_stays_missing() -> None:
    values = np.array([0.0, 29.92, math.nan])
    for convert in (
        units.m_from_ft,
        units.ft_from_m,
        units.pa_from_hpa,
        units.hpa_from_inhg,
        units.inhg_from_hpa,
        units.k_from_c,
        units.c_from_k,
        units.c_from_f,
        units.f_from_c,
        units.c_difference_from_f,
        units.f_difference_from_c,
        units.kg_from_lb,
        units.lb_from_kg,
    ):
        converted = convert(values)
        assert converted.shape == (3,)
        assert converted[1] == convert(29.92)
        assert math.isnan(converted[2])
        assert math.isnan(convert(math.nan))
