import re

import pytest

from airfield_board.configuration.instrument_steps import warnings_of
from tests.configuration.examples import FLEET, FLEET_PATH, SHORT_PROFILE, fleet_of, read_fleet, read_profile


def warnings(observations: str, *operations: str, profile_end: str = "") -> list[tuple[int, str, float, float]]:
    """Return line, reading, effect and deadband of each warning."""
    profile = read_profile(SHORT_PROFILE.replace("observations.csv", f"a.csv{observations}") + profile_end)
    found = []
    for fault in warnings_of(profile, read_fleet(fleet_of(*operations))):
        assert fault.file == str(FLEET_PATH)
        match = re.match(
            r"one step of the (.*?) moves the value by about ([0-9.]+) \S+, more than the deadband of ([0-9.]+) ",
            fault.message,
        )
        assert match is not None, fault.message
        found.append((fault.line, match[1], float(match[2]), float(match[3])))
    return found


def test_the_defaults_of_the_program_and_of_the_instruments_go_together() -> None:
    assert warnings("", "name: A, max_density_altitude_ft: 6000, max_pressure_altitude_ft: 6000") == []
    assert warnings("", "name: A, max_temperature_c: 40, max_isa_deviation_c: 30") == []


def test_a_temperature_step_above_the_deadband_is_warned_of() -> None:
    assert warnings(", temperature_resolution_c: 1", "name: A, max_temperature_c: 40") == [
        (6, "temperature (1 °C)", 1.0, 0.5)
    ]


def test_a_step_as_large_as_the_deadband_is_not_warned_of() -> None:
    assert warnings(", temperature_resolution_c: 0.5", "name: A, max_temperature_c: 40") == []


def test_a_deadband_in_fahrenheit_is_compared_as_a_difference() -> None:
    assert warnings(", temperature_resolution_c: 1", "name: A, max_temperature_f: 100, deadband_f: 1.8") == []
    assert warnings(", temperature_resolution_c: 1", "name: A, max_temperature_f: 100, deadband_f: 1.7") == [
        (6, "temperature (1 °C)", 1.8, 1.7)
    ]


# From ISO 2533 at sea level, by differences of its closed forms, T0 288.15 K, p0 1013.25 hPa, h = 145442 ft (1 - x^n):
# 1 °C changes the density altitude by 118.6 ft, 1 hPa by 33.7 ft; 1 hPa changes the pressure altitude by 27.3 ft.
@pytest.mark.parametrize(
    ("observations", "operation", "expected_ft"),
    [
        (", temperature_resolution_c: 1", "max_density_altitude_ft: 6000, deadband_ft: 110", 118.6),
        (", altimeter_resolution_hpa: 1", "max_density_altitude_ft: 6000, deadband_ft: 30", 33.7),
        (", altimeter_resolution_hpa: 1", "max_pressure_altitude_ft: 6000, deadband_ft: 20", 27.3),
    ],
)
def test_a_step_is_converted_to_an_altitude_at_standard_conditions(
    observations: str, operation: str, expected_ft: float
) -> None:
    ((line, _, effect_ft, _),) = warnings(observations, f"name: A, {operation}", profile_end="density_altitude: dry\n")

    assert line == 6
    assert effect_ft == pytest.approx(expected_ft, abs=1)


def test_a_deadband_in_metres_is_compared_in_metres() -> None:
    observations = ", altimeter_resolution_hpa: 1"

    assert warnings(observations, "name: A, max_pressure_altitude_m: 2000, deadband_m: 9") == []
    assert [found[2] for found in warnings(observations, "name: A, max_pressure_altitude_m: 2000, deadband_m: 8")] == [
        pytest.approx(8.35, abs=0.05)  # 27.3 ft and a little
    ]


def test_the_dew_point_matters_unless_humidity_does_not_count() -> None:
    coarse, operation = ", dewpoint_resolution_c: 5", "name: A, max_density_altitude_ft: 6000, deadband_ft: 100"

    assert [found[1] for found in warnings(coarse, operation)] == ["dew point (5 °C)"]
    assert warnings(coarse, operation, profile_end="density_altitude: dry\n") == []


def test_a_station_means_steps_of_one_degree() -> None:
    assert warnings(", station: ZZCM", "name: A, max_temperature_c: 40") == [
        (6, "temperature (1 °C in reports without tenths)", 1.0, 0.5)
    ]
    assert warnings(", station: ZZCM, temperature_resolution_c: 2", "name: A, max_temperature_c: 40") == [
        (6, "temperature (2 °C in reports without tenths)", 2.0, 0.5)
    ]


def test_an_isa_deviation_moves_with_temperature_and_a_little_with_pressure() -> None:
    # 1 hPa is 27.3 ft of pressure altitude, and the standard atmosphere cools by 1.98 °C in 1,000 ft: 0.054 °C.
    ((_, reading, effect_c, _),) = warnings(", altimeter_resolution_hpa: 10", "name: A, max_isa_deviation_c: 30")

    assert reading == "altimeter setting (10 hPa)"
    assert effect_c == pytest.approx(0.54, abs=0.01)


def test_operations_with_one_deadband_share_a_warning_at_the_line_of_the_first() -> None:
    coarse = read_profile(SHORT_PROFILE.replace("observations.csv", "a.csv, temperature_resolution_c: 1"))
    text = FLEET + (
        "      - name: Winch\n"
        "        max_temperature_c: 40\n"
        "        deadband_c: 2\n"
        "      - name: Bungee\n"
        "        max_temperature_c: 40\n"
        "      - name: Bungee\n"
        "        max_temperature_c: 39\n"
        "        valid_from: 2026-06-01\n"
    )

    assert [str(fault) for fault in warnings_of(coarse, read_fleet(text))] == [
        f"{FLEET_PATH}:25: one step of the temperature (1 °C) moves the value by about 1 °C, more than the deadband of "
        "0.5 °C of Tow plane, Aerotow and 1 more; a wider deadband keeps a hold from ending on one step"
    ]
