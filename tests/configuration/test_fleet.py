from datetime import date
from hashlib import sha256
from pathlib import Path

import pytest

from airfield_board.configuration.fleet import load_fleet
from airfield_board.configuration.model import (
    Aircraft,
    Fleet,
    Limit,
    Operation,
    PressureAltitudeTable,
    Quantity,
    WeightTable,
)
from airfield_board.errors import FileFaults
from tests.configuration.examples import FLEET, FLEET_PATH, fleet_of, limits_of, read_fleet


def altitude_limit(value: float | WeightTable) -> Limit:
    return Limit(
        quantity=Quantity.DENSITY_ALTITUDE,
        unit="ft",
        value=value,
        near_band=500,
        deadband=150,
        off_delay_min=10,
        guarded=False,
    )


def test_every_key_of_a_fleet_arrives() -> None:
    departure = Limit(
        quantity=Quantity.DENSITY_ALTITUDE,
        unit="ft",
        value=6350.0,
        near_band=500,
        deadband=150,
        off_delay_min=10,
        guarded=False,
        basis="operator policy",
        source="Operations manual 4.2",
    )
    circuits = Limit(
        quantity=Quantity.DENSITY_ALTITUDE,
        unit="ft",
        value=5600.0,
        near_band=500,
        deadband=150,
        off_delay_min=10,
        guarded=False,
        notice="Local order 7",
        valid_from=date(2026, 6, 1),
        valid_until=date(2026, 9, 30),
    )
    by_weight = WeightTable(weight_unit="lb", weights=(1950, 2200, 2450), limits=(7400, 6950, 6550))
    temperature = Limit(
        quantity=Quantity.TEMPERATURE,
        unit="c",
        value=45.0,
        near_band=3,
        deadband=0.5,
        off_delay_min=10,
        guarded=False,
    )
    assert read_fleet() == Fleet(
        path=FLEET_PATH,
        text=FLEET,
        sha256=sha256(FLEET.encode()).hexdigest(),
        aircraft=(
            Aircraft(
                id="trainer-2",
                name="Two-seat trainer",
                group="Flying school",
                operations=(
                    Operation(name="Departure", phase="departure", limits=(departure,)),
                    Operation(name="Solo circuits", phase="local", limits=(circuits,)),
                ),
            ),
            Aircraft(
                id="tow-plane",
                name="Tow plane",
                group="",
                operations=(
                    Operation(name="Aerotow", phase="departure", limits=(altitude_limit(by_weight), temperature)),
                ),
            ),
        ),
    )


def test_a_fleet_is_read_from_its_file(tmp_path: Path) -> None:
    path = tmp_path / "fleet.yaml"
    path.write_text(FLEET)

    fleet = load_fleet(path, acceptance="simple")

    assert fleet.aircraft == read_fleet().aircraft
    assert fleet.path == path


def test_a_missing_fleet_is_said_plainly(tmp_path: Path) -> None:
    with pytest.raises(FileFaults, match=r"fleet\.yaml: there is no such file$"):
        load_fleet(tmp_path / "fleet.yaml", acceptance="simple")


def test_an_aircraft_without_a_name_is_called_by_its_id() -> None:
    assert read_fleet(fleet_of("name: Winch, max_temperature_c: 40")).aircraft[0].name == "glider"


@pytest.mark.parametrize(
    ("key", "quantity", "unit"),
    [
        ("max_density_altitude_ft", "density altitude", "ft"),
        ("max_density_altitude_m", "density altitude", "m"),
        ("max_pressure_altitude_ft", "pressure altitude", "ft"),
        ("max_pressure_altitude_m", "pressure altitude", "m"),
        ("max_temperature_c", "temperature", "c"),
        ("max_temperature_f", "temperature", "f"),
        ("max_isa_deviation_c", "ISA deviation", "c"),
    ],
)
@pytest.mark.parametrize("value", ["38.5", "{by_weight_kg: {600: 38.5, 550.5: 40}}"])
def test_each_kind_of_limit_is_a_number_or_goes_by_weight(key: str, quantity: str, unit: str, value: str) -> None:
    (limit,) = limits_of(f"name: Winch, {key}: {value}")

    assert (limit.quantity, limit.unit) == (quantity, unit)
    if value == "38.5":
        assert limit.value == 38.5
    else:
        assert limit.value == WeightTable(weight_unit="kg", weights=(550.5, 600), limits=(40, 38.5))


@pytest.mark.parametrize("unit", ["c", "f"])
def test_a_temperature_limit_may_go_by_pressure_altitude(unit: str) -> None:
    (limit,) = limits_of(
        f"name: Winch, max_temperature_{unit}: {{by_pressure_altitude_ft: {{4000: 38, -500: 45, 8000: 40}}}}"
    )

    assert limit.value == PressureAltitudeTable(altitudes_ft=(-500, 4000, 8000), limits=(45, 38, 40))


# A foot is 0.3048 m (international foot, 1959); a difference of 1 °C is one of 1.8 °F (NIST SP 811, appendix B).
@pytest.mark.parametrize(
    ("operation", "defaults", "near_band", "deadband", "off_delay_min"),
    [
        ("max_density_altitude_ft: 6000", "{}", 500, 150, 10),
        ("max_pressure_altitude_m: 1800", "{}", 152.4, 45.72, 10),
        ("max_temperature_c: 40", "{}", 3, 0.5, 10),
        ("max_temperature_f: 100", "{}", 5.4, 0.9, 10),
        ("max_isa_deviation_c: 30", "{}", 3, 0.5, 10),
        ("max_density_altitude_ft: 6000", "{near_band_m: 304.8, deadband_ft: 90, off_delay_min: 20}", 1000, 90, 20),
        ("max_density_altitude_ft: 6000", "{near_band_c: 1, deadband_f: 9}", 500, 150, 10),
        ("max_temperature_c: 40", "{near_band_f: 9, deadband_c: 0.2, near_band_ft: 77}", 5, 0.2, 10),
        ("max_temperature_f: 100", "{near_band_f: 4, deadband_c: 1}", 4, 1.8, 10),
        (
            "max_density_altitude_m: 1800, near_band_ft: 1000, deadband_m: 0, off_delay_min: 0",
            "{near_band_m: 1, deadband_ft: 90, off_delay_min: 20}",
            304.8,
            0,
            0,
        ),
    ],
)
def test_bands_are_those_of_the_operation_the_defaults_or_the_program(
    operation: str, defaults: str, near_band: float, deadband: float, off_delay_min: float
) -> None:
    (limit,) = limits_of(f"name: Winch, {operation}", defaults=defaults)

    assert limit.near_band == pytest.approx(near_band, abs=1e-9)
    assert limit.deadband == pytest.approx(deadband, abs=1e-9)
    assert limit.off_delay_min == off_delay_min


def test_each_quantity_of_an_operation_has_its_own_bands() -> None:
    altitude, temperature = limits_of(
        "name: Winch, near_band_ft: 700, near_band_c: 2, max_density_altitude_ft: 6000, max_temperature_c: 40"
    )

    assert (altitude.near_band, temperature.near_band) == (700, 2)


def test_an_operation_may_have_its_own_acceptance() -> None:
    operations = (
        "name: Winch, max_temperature_c: 40",
        "name: Aerotow, max_temperature_c: 40, acceptance: guarded",
        "name: Bungee, max_temperature_c: 40, acceptance: simple",
    )

    assert [limit.guarded for limit in limits_of(*operations)] == [False, True, False]
    assert [limit.guarded for limit in limits_of(*operations, acceptance="guarded")] == [True, True, False]


def test_entries_of_one_name_are_one_operation() -> None:
    fleet = read_fleet(
        fleet_of(
            "name: Winch, max_temperature_c: 40, max_density_altitude_ft: 6000",
            "name: Aerotow, max_temperature_c: 39",
            "name: Winch, phase: local, max_density_altitude_ft: 5500, valid_from: 2026-06-01",
            "name: Winch, max_density_altitude_ft: 5000, valid_until: 2026-07-15",
        )
    )

    winch, aerotow = fleet.aircraft[0].operations
    assert [limit.value for limit in winch.limits] == [40, 6000, 5500, 5000]
    assert [(limit.valid_from, limit.valid_until) for limit in winch.limits[2:]] == [
        (date(2026, 6, 1), None),
        (None, date(2026, 7, 15)),
    ]
    assert (winch.phase, aerotow.phase) == ("local", "departure")


def test_limits_stand_in_the_order_of_the_file() -> None:
    limits = limits_of("name: Winch, max_temperature_c: 40, max_isa_deviation_c: 30, max_density_altitude_ft: 6000")

    assert [limit.quantity for limit in limits] == ["temperature", "ISA deviation", "density altitude"]


def test_a_single_day_is_a_valid_span() -> None:
    (limit,) = limits_of("name: Winch, max_temperature_c: 40, valid_from: 2026-06-01, valid_until: 2026-06-01")

    assert limit.in_force_on(date(2026, 6, 1))
    assert not limit.in_force_on(date(2026, 5, 31))
    assert not limit.in_force_on(date(2026, 6, 2))


def test_dated_entries_of_one_name_may_overlap() -> None:
    text = fleet_of(
        "name: Winch, max_temperature_c: 40, valid_from: 2026-06-01, valid_until: 2026-06-30",
        "name: Winch, max_temperature_c: 38, valid_from: 2026-06-15, valid_until: 2026-07-15",
    )

    assert len(read_fleet(text).aircraft[0].operations) == 1
