import math
from dataclasses import fields, replace

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st
from numpy.typing import NDArray

from airfield_board.atmosphere import uncertainty
from airfield_board.configuration.model import Instruments
from airfield_board.observations import conditions
from airfield_board.observations.conditions import (
    ConditionsTable,
    StandardUncertainties,
    conditions_of,
    density_altitude_at_temperature,
    hold_temperature_for_density_altitude,
    hold_temperature_for_isa_deviation,
    hold_temperature_for_temperature,
    standard_uncertainties,
)
from airfield_board.units import hpa_from_inhg, m_from_ft
from tests.atmosphere import reference

INSTRUMENTS = Instruments(
    altimeter_resolution_hpa=hpa_from_inhg(0.01),
    altimeter_accuracy_hpa=hpa_from_inhg(0.02),
    temperature_resolution_c=0.1,
    temperature_accuracy_c=0.5,
    dewpoint_resolution_c=0.1,
    dewpoint_accuracy_c=1.0,
)
ELEVATION_M = m_from_ft(4120.0)
NAN = math.nan


def table_of(
    *rows: tuple[float, float, float],
    elevation_m: float | NDArray[np.float64] = ELEVATION_M,
    resolutions_c: tuple[float, float] = (NAN, NAN),
    instruments: Instruments | None = INSTRUMENTS,
) -> ConditionsTable:
    """Return the conditions of rows of altimeter setting [hPa], temperature [°C], dew point [°C]."""
    columns = np.array(rows, dtype=np.float64).reshape(-1, 3)
    count = len(columns)
    return conditions_of(
        columns[:, 0],
        columns[:, 1],
        columns[:, 2],
        np.full(count, resolutions_c[0]),
        np.full(count, resolutions_c[1]),
        elevation_m,
        instruments,
    )


def test_a_warm_day_by_the_definition_in_long_decimals() -> None:
    table = table_of((1016.3, 31.0, 4.0))
    pressure_pa = reference.station_pressure_pa(101630.0, ELEVATION_M)
    moist_ft = float(reference.density_altitude_m(pressure_pa, 304.15, 277.15)) / 0.3048
    dry_ft = float(reference.density_altitude_m(pressure_pa, 304.15, None)) / 0.3048
    assert table.station_pressure_hpa[0] == pytest.approx(float(pressure_pa) / 100, abs=1e-8)
    assert table.density_altitude_ft[0] == pytest.approx(moist_ft, abs=1e-6)
    assert table.density_altitude_dry_ft[0] == pytest.approx(dry_ft, abs=1e-6)
    assert moist_ft > dry_ft
    # By hand: 1016.3 hPa belong to -83.2 ft, so the pressure altitude is 4,036.8 ft (1,230.42 m); the standard
    # atmosphere has 15 - 0.0065 x 1230.42 = 7.0023 °C there.
    assert table.pressure_altitude_ft[0] == pytest.approx(4036.8, abs=0.1)
    assert table.isa_deviation_c[0] == pytest.approx(23.998, abs=0.001)
    assert table.temperature_c[0] == 31.0
    assert len(table) == 1


def test_rows_of_iso_2533_are_the_standard_atmosphere() -> None:
    # ISO 2533, 4,000 ft: 875.105 hPa, 1.08791 kg/m3; 15 - 1.9812 x 4 = 7.0752 °C.
    table = table_of((1013.25, 7.0752, NAN), elevation_m=m_from_ft(4000.0))
    assert table.station_pressure_hpa[0] == pytest.approx(875.105, abs=0.003)
    assert table.density_ratio[0] == pytest.approx(1.08791 / 1.22500, abs=1e-5)
    assert table.density_altitude_ft[0] == pytest.approx(4000.0, abs=1e-6)
    assert table.pressure_altitude_ft[0] == pytest.approx(4000.0, abs=1e-6)
    assert table.isa_deviation_c[0] == pytest.approx(0.0, abs=1e-9)


def test_density_ratio_is_that_of_the_density_altitude_shown() -> None:
    moist = table_of((1010.0, 33.0, 22.0))
    dry = table_of((1010.0, 33.0, NAN))
    theta = 1.0 - 0.0065 * 0.3048 * moist.density_altitude_ft[0] / 288.15
    exponent = 9.80665 / (287.05287 * 0.0065) - 1.0
    assert moist.density_ratio[0] == pytest.approx(theta**exponent, rel=1e-9)
    assert moist.density_ratio[0] < dry.density_ratio[0]


def test_without_a_dew_point_the_value_is_the_dry_one() -> None:
    table = table_of((1016.3, 31.0, NAN), (1016.3, 31.0, 4.0))
    assert table.density_altitude_ft[0] == table.density_altitude_dry_ft[0]
    assert table.density_altitude_dry_ft[0] == table.density_altitude_dry_ft[1]
    assert table.density_altitude_ft[1] > table.density_altitude_dry_ft[1]


@pytest.mark.parametrize("absurd_c", [math.inf, -math.inf, -300.0, 250.0])
def test_an_absurd_dew_point_never_passes_for_dry_air(absurd_c: float) -> None:
    table = table_of((1016.3, 31.0, absurd_c))
    assert math.isnan(table.density_altitude_ft[0])
    assert math.isnan(table.density_ratio[0])
    assert math.isnan(table.uncertainty_ft[0])
    assert math.isfinite(table.density_altitude_dry_ft[0])


@pytest.mark.parametrize(
    "row", [(NAN, 31.0, 4.0), (0.0, 31.0, 4.0), (1016.3, NAN, 4.0), (1016.3, -280.0, NAN), (1016.3, math.inf, NAN)]
)
def test_missing_or_absurd_readings_give_no_density_altitude(row: tuple[float, float, float]) -> None:
    table = table_of(row, (1016.3, 31.0, 4.0))
    assert math.isnan(table.density_altitude_ft[0])
    assert math.isnan(table.density_altitude_dry_ft[0])
    assert math.isnan(table.isa_deviation_c[0])
    assert math.isnan(table.uncertainty_ft[0])
    # The good row beside it is untouched.
    alone = table_of((1016.3, 31.0, 4.0))
    assert table.density_altitude_ft[1] == alone.density_altitude_ft[0]
    assert table.uncertainty_ft[1] == pytest.approx(alone.uncertainty_ft[0], rel=1e-14)


def test_an_unknown_elevation_gives_nothing() -> None:
    table = table_of((1016.3, 31.0, 4.0), elevation_m=NAN)
    assert math.isnan(table.station_pressure_hpa[0])
    assert math.isnan(table.pressure_altitude_ft[0])
    assert math.isnan(table.density_altitude_ft[0])


def test_no_rows_at_all() -> None:
    table = table_of()
    assert len(table) == 0
    assert all(getattr(table, field.name).shape == (0,) for field in fields(table))


def test_each_row_may_have_its_own_elevation() -> None:
    both = table_of((1016.3, 31.0, 4.0), (1016.3, 31.0, 4.0), elevation_m=np.array([ELEVATION_M, m_from_ft(-200.0)]))
    low = table_of((1016.3, 31.0, 4.0), elevation_m=m_from_ft(-200.0))
    assert both.density_altitude_ft[1] == low.density_altitude_ft[0]
    assert both.density_altitude_ft[0] > both.density_altitude_ft[1]


@pytest.mark.parametrize("chunk_rows", [1, 7, 100])
def test_many_rows_give_what_each_gives_alone(chunk_rows: int, monkeypatch: pytest.MonkeyPatch) -> None:
    rng = np.random.default_rng(7)
    rows = [
        (float(a), float(t), float(d))
        for a, t, d in zip(rng.uniform(980, 1040, 40), rng.uniform(-40, 45, 40), rng.uniform(-45, 20, 40), strict=True)
    ]
    rows[3] = (NAN, 20.0, 5.0)
    rows[11] = (1000.0, 20.0, NAN)
    rows[12] = (1000.0, -50.0, NAN)
    monkeypatch.setattr(conditions, "_CHUNK_ROWS", chunk_rows)
    together = table_of(*rows)
    for number, row in enumerate(rows):
        alone = table_of(row)
        for field in fields(alone):
            found, expected = getattr(together, field.name)[number], getattr(alone, field.name)[0]
            assert found == pytest.approx(expected, rel=1e-12, nan_ok=True), (field.name, row)


def test_rows_beyond_one_chunk_are_all_filled() -> None:
    count = 2 * conditions._CHUNK_ROWS + 3
    quiet = np.full(count, NAN)
    table = conditions_of(
        np.full(count, 1016.3), np.full(count, 31.0), np.full(count, 4.0), quiet, quiet, ELEVATION_M, INSTRUMENTS
    )
    alone = table_of((1016.3, 31.0, 4.0))
    for field in fields(alone):
        np.testing.assert_allclose(getattr(table, field.name), getattr(alone, field.name)[0], rtol=1e-12)


def test_uncertainties_by_hand() -> None:
    table = table_of((1013.25, 30.0, NAN), elevation_m=0.0)
    # Temperature: 2 sqrt(0.1²/12 + 0.25²) = 0.503322 °C.
    assert table.temperature_uncertainty_c[0] == pytest.approx(0.503322, abs=1e-6)
    # Altimeter setting: sqrt(0.01²/12 + 0.01²) = 0.010408 inHg = 35.247 Pa; at sea level one pascal is
    # 287.05287 x 288.15 / (9.80665 x 101325) = 0.083243 m, so 2 x 35.247 x 0.083243 m = 19.253 ft.
    assert table.pressure_altitude_uncertainty_ft[0] == pytest.approx(19.253, abs=0.002)
    # ISA deviation: with 0.0065 K/m x 19.253 ft = 0.038144 K, sqrt(0.503322² + 0.038144²) = 0.504765 °C.
    assert table.isa_deviation_uncertainty_c[0] == pytest.approx(0.504765, abs=2e-6)


def test_uncertainty_of_density_altitude_is_the_law_of_propagation() -> None:
    row = (1016.3, 31.0, 4.0)
    table = table_of(row)
    slopes = uncertainty.density_altitude_derivatives(101630.0, ELEVATION_M, 304.15, 277.15)
    parts_m = (
        slopes.by_altimeter * 100 * math.sqrt(INSTRUMENTS.altimeter_resolution_hpa**2 / 12 + hpa_from_inhg(0.01) ** 2),
        slopes.by_temperature * math.sqrt(0.01 / 12 + 0.25**2),
        slopes.by_dewpoint * math.sqrt(0.01 / 12 + 0.5**2),
    )
    assert table.uncertainty_ft[0] == pytest.approx(2 * math.hypot(*parts_m) / 0.3048, rel=1e-12)


def test_the_coarser_resolution_of_a_row_counts_for_that_row() -> None:
    # A report without tenths counts as 1 °C: 2 sqrt(1/12 + 0.25²) = 0.763763 °C.
    coarse = table_of((1016.3, 31.0, 4.0), resolutions_c=(1.0, 1.0))
    fine = table_of((1016.3, 31.0, 4.0))
    assert coarse.temperature_uncertainty_c[0] == pytest.approx(0.763763, abs=1e-6)
    assert coarse.uncertainty_ft[0] > fine.uncertainty_ft[0]
    only_temperature = table_of((1016.3, 31.0, 4.0), resolutions_c=(1.0, NAN))
    assert fine.uncertainty_ft[0] < only_temperature.uncertainty_ft[0] < coarse.uncertainty_ft[0]


def test_dry_rows_leave_the_dew_point_out_of_the_uncertainty() -> None:
    vague = replace(INSTRUMENTS, dewpoint_accuracy_c=20.0)
    row = (1016.3, 31.0, NAN)
    assert table_of(row, instruments=vague).uncertainty_ft[0] == table_of(row).uncertainty_ft[0]
    moist = (1016.3, 31.0, 10.0)
    assert table_of(moist, instruments=vague).uncertainty_ft[0] > table_of(moist).uncertainty_ft[0]


def test_without_instruments_the_uncertainties_are_unknown() -> None:
    table = table_of((1016.3, 31.0, 4.0), instruments=None)
    assert table.density_altitude_ft[0] == table_of((1016.3, 31.0, 4.0)).density_altitude_ft[0]
    for name in (
        "uncertainty_ft",
        "pressure_altitude_uncertainty_ft",
        "temperature_uncertainty_c",
        "isa_deviation_uncertainty_c",
    ):
        assert np.isnan(getattr(table, name)).all()


def test_standard_uncertainties_of_one_observation() -> None:
    own = standard_uncertainties(INSTRUMENTS)
    assert own.temperature_c == pytest.approx(math.sqrt(0.01 / 12 + 0.25**2), rel=1e-14)
    assert own.dewpoint_c == pytest.approx(math.sqrt(0.01 / 12 + 0.5**2), rel=1e-14)
    assert own.altimeter_hpa == pytest.approx(hpa_from_inhg(math.sqrt(1e-4 / 12 + 1e-4)), rel=1e-12)
    coarse = standard_uncertainties(INSTRUMENTS, temperature_resolution_c=1.0, dewpoint_resolution_c=1.0)
    assert coarse.temperature_c == pytest.approx(math.sqrt(1 / 12 + 0.25**2), rel=1e-14)
    assert coarse.dewpoint_c == pytest.approx(math.sqrt(1 / 12 + 0.5**2), rel=1e-14)
    assert type(coarse.temperature_c) is float


@given(
    limit_ft=st.floats(2000.0, 12000.0),
    altimeter_hpa=st.floats(960.0, 1045.0),
    elevation_ft=st.floats(-300.0, 9000.0),
    dewpoint_c=st.none() | st.floats(-40.0, 28.0),
)
@settings(max_examples=60)
def test_at_the_hold_temperature_the_density_altitude_is_the_limit(
    limit_ft: float, altimeter_hpa: float, elevation_ft: float, dewpoint_c: float | None
) -> None:
    elevation_m = m_from_ft(elevation_ft)
    hold_c = hold_temperature_for_density_altitude(limit_ft, altimeter_hpa, elevation_m, dewpoint_c)
    reached_ft = density_altitude_at_temperature(hold_c, altimeter_hpa, elevation_m, dewpoint_c)
    assert reached_ft == pytest.approx(limit_ft, abs=1e-6)
    warmer_ft = density_altitude_at_temperature(hold_c + 1e-3, altimeter_hpa, elevation_m, dewpoint_c)
    assert warmer_ft > limit_ft


@given(
    limit_ft=st.floats(4500.0, 12000.0),
    altimeter_hpa=st.floats(980.0, 1040.0),
    dewpoint_c=st.none() | st.floats(-40.0, 28.0),
    accuracy_c=st.floats(0.0, 5.0),
)
@settings(max_examples=40)
def test_guarded_the_value_and_its_uncertainty_reach_the_limit(
    limit_ft: float, altimeter_hpa: float, dewpoint_c: float | None, accuracy_c: float
) -> None:
    instruments = replace(INSTRUMENTS, temperature_accuracy_c=accuracy_c)
    readings = standard_uncertainties(instruments)
    hold_c = hold_temperature_for_density_altitude(limit_ft, altimeter_hpa, ELEVATION_M, dewpoint_c, readings)
    dew_c = NAN if dewpoint_c is None else dewpoint_c
    table = table_of((altimeter_hpa, hold_c, dew_c), instruments=instruments)
    assert table.density_altitude_ft[0] + table.uncertainty_ft[0] == pytest.approx(limit_ft, abs=1e-5)
    assert hold_c < hold_temperature_for_density_altitude(limit_ft, altimeter_hpa, ELEVATION_M, dewpoint_c)


def test_hold_temperatures_of_several_limits_at_once() -> None:
    limits_ft = np.array([5600.0, 6350.0, 9000.0])
    for readings in (None, standard_uncertainties(INSTRUMENTS)):
        together = hold_temperature_for_density_altitude(limits_ft, 1016.3, ELEVATION_M, 4.0, readings)
        alone = [
            hold_temperature_for_density_altitude(float(limit_ft), 1016.3, ELEVATION_M, 4.0, readings)
            for limit_ft in limits_ft
        ]
        np.testing.assert_allclose(together, alone, atol=1e-7)
        assert all(type(hold_c) is float for hold_c in alone)


def test_no_dew_point_means_dry_here_too() -> None:
    dry_c = hold_temperature_for_density_altitude(6350.0, 1016.3, ELEVATION_M, None)
    assert hold_temperature_for_density_altitude(6350.0, 1016.3, ELEVATION_M, NAN) == dry_c
    assert hold_temperature_for_density_altitude(6350.0, 1016.3, ELEVATION_M, 4.0) < dry_c
    dry_ft = density_altitude_at_temperature(31.0, 1016.3, ELEVATION_M, None)
    assert density_altitude_at_temperature(31.0, 1016.3, ELEVATION_M, NAN) == dry_ft
    assert dry_ft == pytest.approx(table_of((1016.3, 31.0, NAN)).density_altitude_ft[0], abs=1e-9)


@pytest.mark.parametrize("readings", [None, standard_uncertainties(INSTRUMENTS)])
def test_where_there_is_no_hold_temperature_there_is_none(readings: StandardUncertainties | None) -> None:
    assert math.isnan(hold_temperature_for_density_altitude(70000.0, 1016.3, ELEVATION_M, 4.0, readings))
    assert math.isnan(hold_temperature_for_density_altitude(NAN, 1016.3, ELEVATION_M, 4.0, readings))
    assert math.isnan(hold_temperature_for_density_altitude(6350.0, NAN, ELEVATION_M, 4.0, readings))
    assert math.isnan(hold_temperature_for_density_altitude(6350.0, 1016.3, NAN, 4.0, readings))
    assert math.isnan(hold_temperature_for_isa_deviation(20.0, NAN, ELEVATION_M, readings))


def test_one_limit_out_of_reach_does_not_spoil_the_others() -> None:
    readings = standard_uncertainties(INSTRUMENTS)
    found_c = hold_temperature_for_density_altitude(np.array([70000.0, 6350.0]), 1016.3, ELEVATION_M, 4.0, readings)
    alone_c = hold_temperature_for_density_altitude(6350.0, 1016.3, ELEVATION_M, 4.0, readings)
    assert math.isnan(found_c[0])
    assert found_c[1] == pytest.approx(alone_c, abs=1e-8)


@pytest.mark.parametrize(("limit_ft", "temperature_c"), [(9000.0, 140.0), (20000.0, 75.0)])
def test_instruments_beyond_sense_give_no_hold_temperature(limit_ft: float, temperature_c: float) -> None:
    # With so wide a guard the steps leave the atmosphere, or settle too slowly; no answer is better than a wrong one.
    absurd = StandardUncertainties(altimeter_hpa=0.4, temperature_c=temperature_c, dewpoint_c=0.5)
    assert math.isnan(hold_temperature_for_density_altitude(limit_ft, 1016.3, ELEVATION_M, None, absurd))


def test_hold_temperature_of_an_isa_deviation() -> None:
    # At sea level under the standard setting the standard temperature is 15 °C.
    assert hold_temperature_for_isa_deviation(20.0, 1013.25, 0.0) == pytest.approx(35.0, abs=1e-9)
    readings = standard_uncertainties(INSTRUMENTS)
    guarded_c = hold_temperature_for_isa_deviation(20.0, 1010.0, ELEVATION_M, readings)
    table = table_of((1010.0, guarded_c, NAN))
    assert table.isa_deviation_c[0] + table.isa_deviation_uncertainty_c[0] == pytest.approx(20.0, abs=1e-9)
    assert hold_temperature_for_isa_deviation(np.array([10.0, 20.0]), 1013.25, 0.0) == pytest.approx([25.0, 35.0])


def test_hold_temperature_of_a_temperature() -> None:
    assert hold_temperature_for_temperature(45.0) == 45.0
    readings = standard_uncertainties(INSTRUMENTS)
    # 45 °C less the expanded uncertainty 0.503322 °C.
    assert hold_temperature_for_temperature(45.0, readings) == pytest.approx(44.496678, abs=1e-6)
    np.testing.assert_allclose(hold_temperature_for_temperature(np.array([40.0, 45.0])), [40.0, 45.0])


def test_rows_are_taken_in_the_order_given() -> None:
    three = table_of((1013.0, 20.0, 10.0), (1014.0, 25.0, 11.0), (1015.0, 30.0, 12.0))
    taken = three.take(np.array([2, 0]))
    for column in fields(ConditionsTable):
        whole, part = getattr(three, column.name), getattr(taken, column.name)
        assert part.tolist() == [whole[2], whole[0]]
