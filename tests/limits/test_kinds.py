"""What each kind of limit is compared with, in the unit of its key."""

import numpy as np
import pytest

from airfield_board.configuration.differences import difference_in_unit, limit_in_unit
from airfield_board.configuration.model import Quantity, Unit
from airfield_board.limits.kinds import KINDS, Air, axis_ft
from airfield_board.observations.conditions import ConditionsTable, conditions_of
from airfield_board.observations.conditions import density_altitude_at_temperature as density_altitude_at
from tests.limits.record import changes_of, limit_of, valid

CONDITIONS = ConditionsTable(
    station_pressure_hpa=np.array([873.5]),
    pressure_altitude_ft=np.array([4000.0]),
    density_altitude_ft=np.array([7000.0]),
    density_altitude_dry_ft=np.array([6900.0]),
    density_ratio=np.array([0.81]),
    isa_deviation_c=np.array([20.0]),
    temperature_c=np.array([30.0]),
    uncertainty_ft=np.array([60.0]),
    pressure_altitude_uncertainty_ft=np.array([18.0]),
    temperature_uncertainty_c=np.array([0.5]),
    isa_deviation_uncertainty_c=np.array([0.6]),
)

# The foot is 0.3048 m exactly (NIST SP 811); 30 °C are 86 °F; a difference of 20 °C is one of 36 °F.
EXPECTED: list[tuple[Quantity, Unit, float, float]] = [
    (Quantity.DENSITY_ALTITUDE, "ft", 7000.0, 60.0),
    (Quantity.DENSITY_ALTITUDE, "m", 2133.6, 18.288),
    (Quantity.PRESSURE_ALTITUDE, "ft", 4000.0, 18.0),
    (Quantity.PRESSURE_ALTITUDE, "m", 1219.2, 5.4864),
    (Quantity.TEMPERATURE, "c", 30.0, 0.5),
    (Quantity.TEMPERATURE, "f", 86.0, 0.9),
    (Quantity.ISA_DEVIATION, "c", 20.0, 0.6),
    (Quantity.ISA_DEVIATION, "f", 36.0, 1.08),
]


def test_every_quantity_has_its_kind() -> None:
    assert set(KINDS) == set(Quantity)


@pytest.mark.parametrize(("quantity", "unit", "value", "uncertainty"), EXPECTED)
def test_values(quantity: Quantity, unit: Unit, value: float, uncertainty: float) -> None:
    values, uncertainties = KINDS[quantity].values(CONDITIONS, unit)
    assert values == pytest.approx([value])
    assert uncertainties == pytest.approx([uncertainty])


@pytest.mark.parametrize(
    ("limit", "quantity", "unit", "wanted", "expected"),
    [
        (1000.0, Quantity.DENSITY_ALTITUDE, "ft", "m", 304.8),
        (304.8, Quantity.PRESSURE_ALTITUDE, "m", "ft", 1000.0),
        (45.0, Quantity.TEMPERATURE, "c", "f", 113.0),
        (113.0, Quantity.TEMPERATURE, "f", "c", 45.0),
        (-40.0, Quantity.TEMPERATURE, "f", "f", -40.0),
        (20.0, Quantity.ISA_DEVIATION, "c", "f", 36.0),
        (36.0, Quantity.ISA_DEVIATION, "f", "c", 20.0),
    ],
)
def test_a_limit_in_another_unit(limit: float, quantity: Quantity, unit: Unit, wanted: Unit, expected: float) -> None:
    assert limit_in_unit(limit, quantity, unit, wanted) == pytest.approx(expected)


@pytest.mark.parametrize(
    ("band", "unit", "wanted", "expected"),
    [
        (500.0, "ft", "m", 152.4),
        (152.4, "m", "ft", 500.0),
        (3.0, "c", "f", 5.4),
        (5.4, "f", "c", 3.0),
        (3, "c", "c", 3),
    ],
)
def test_a_band_in_another_unit_is_a_difference(band: float, unit: Unit, wanted: Unit, expected: float) -> None:
    assert difference_in_unit(band, unit, wanted) == pytest.approx(expected)


def test_a_limit_in_metres() -> None:
    # 2,000 m are 6,561.68 ft: 6,561 ft is within, 6,562 ft beyond; GO from 1,850 m = 6,069.55 ft down.
    limit = limit_of(2000, unit="m", near_band=150, deadband=50)
    assert changes_of(limit, valid(0, 6069), valid(5, 6070), valid(10, 6561), valid(15, 6562)) == [
        (0, "go"),
        (5, "near"),
        (15, "hold"),
    ]


def test_a_temperature_limit_in_fahrenheit_with_bands_as_differences() -> None:
    # 113 °F = 45 °C, near band 5.4 °F = 3 °C, deadband 0.9 °F = 0.5 °C.
    limit = limit_of(113, quantity=Quantity.TEMPERATURE, unit="f", near_band=5.4, deadband=0.9)
    rows = [valid(0, 42), valid(5, 42.1), valid(10, 45), valid(15, 45.1), valid(20, 44.6), valid(30, 44.4)]
    rows += [valid(39, 44.5), valid(40, 44.5), valid(45, 41.6), valid(50, 41.4)]
    assert changes_of(limit, rows) == [(0, "go"), (5, "near"), (15, "hold"), (40, "near"), (50, "go")]


def test_an_isa_deviation_limit() -> None:
    limit = limit_of(25, quantity=Quantity.ISA_DEVIATION, unit="c", near_band=3, deadband=0.5)
    assert changes_of(limit, valid(0, 22), valid(5, 25), valid(10, 25.1)) == [(0, "go"), (5, "near"), (10, "hold")]


def test_a_pressure_altitude_limit() -> None:
    limit = limit_of(4500, quantity=Quantity.PRESSURE_ALTITUDE)
    assert changes_of(limit, valid(0, 4000), valid(5, 4500), valid(10, 4501)) == [(0, "go"), (5, "near"), (10, "hold")]


AIR = Air(altimeter_hpa=1016.3, elevation_m=1255.8, dewpoint_c=4.0)


@pytest.mark.parametrize(
    ("quantity", "unit", "limit"),
    [
        (Quantity.DENSITY_ALTITUDE, "ft", 6350.0),
        (Quantity.DENSITY_ALTITUDE, "m", 1900.0),
        (Quantity.TEMPERATURE, "c", 31.5),
        (Quantity.TEMPERATURE, "f", 95.0),
        (Quantity.ISA_DEVIATION, "c", 17.0),
        (Quantity.ISA_DEVIATION, "f", 30.0),
    ],
)
def test_at_the_hold_temperature_the_value_is_the_limit(quantity: Quantity, unit: Unit, limit: float) -> None:
    temperature_c = KINDS[quantity].hold_temperature_c(np.array([limit]), unit, AIR)
    there = conditions_of(
        altimeter_hpa=np.array([AIR.altimeter_hpa]),
        temperature_c=temperature_c,
        dewpoint_used_c=np.array([4.0]),
        temperature_resolution_c=np.array([np.nan]),
        dewpoint_resolution_c=np.array([np.nan]),
        elevation_m=AIR.elevation_m,
        instruments=None,
    )
    values, _ = KINDS[quantity].values(there, unit)
    assert values == pytest.approx([limit], abs=0.01)
    assert axis_ft(temperature_c, AIR) == pytest.approx(there.density_altitude_ft, abs=0.01)


def test_temperature_does_not_matter_to_a_pressure_altitude_limit() -> None:
    kind = KINDS[Quantity.PRESSURE_ALTITUDE]
    temperatures_c = kind.hold_temperature_c(np.array([4500.0, 5000.0]), "ft", AIR)
    assert np.isnan(temperatures_c).tolist() == [True, True]
    assert np.isnan(axis_ft(temperatures_c, AIR)).tolist() == [True, True]


def test_a_limit_that_no_air_reaches_has_no_place_on_the_axis() -> None:
    assert np.isnan(density_altitude_at(-300.0, 1013.25, 0.0, None))
    assert np.isnan(axis_ft(KINDS[Quantity.TEMPERATURE].hold_temperature_c(np.array([-300.0]), "c", AIR), AIR)).all()
