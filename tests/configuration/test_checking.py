"""Checking settings files on demand."""

from pathlib import Path

import pytest

from airfield_board.configuration.checking import check_files
from airfield_board.configuration.defaults import default_instruments, is_elevation_ft
from airfield_board.units import hpa_from_inhg
from tests.session.fields import FLEET, PROFILE, Field, make_field


@pytest.fixture
def field(tmp_path: Path) -> Field:
    return make_field(tmp_path)


def test_valid_files_are_said_to_be_valid(field: Field) -> None:
    found = check_files([field.profile, field.fleet])
    assert (found.faults, found.unreadable) == (0, False)
    assert [line.partition(": ")[2] for line in found.lines] == [
        "valid profile of Thistle Bench, with its fleet fleet.yaml",
        "valid fleet, 2 aircraft, 2 operations",
    ]


def test_a_profile_tells_of_its_fleets_faults_and_a_fleet_given_beside_it_not_again(field: Field) -> None:
    field.fleet.write_text(FLEET.replace("6350", "much"), encoding="utf-8")
    alone, together = check_files([field.profile]), check_files([field.profile, field.fleet])
    assert alone.faults == together.faults == 1
    assert alone.lines == together.lines


def test_a_fleet_is_known_by_its_keys_even_misspelt(field: Field) -> None:
    field.fleet.write_text(FLEET.replace("aircraft:", "aircrafts:"), encoding="utf-8")
    lines = check_files([field.fleet]).lines
    assert any(line.startswith(f"{field.fleet}:2: ") and "aircraft" in line for line in lines)
    field.profile.write_text(PROFILE.replace("airfield:", "airfeld:"), encoding="utf-8")
    assert any("airfield" in line for line in check_files([field.profile]).lines)


@pytest.mark.parametrize("text", ["", "- a list\n", "one: two\n"])
def test_a_file_that_is_neither_is_a_fault(field: Field, text: str) -> None:
    field.profile.write_text(text, encoding="utf-8")
    assert check_files([field.profile]).faults >= 1


def test_a_missing_file_is_unreadable(field: Field) -> None:
    found = check_files([field.folder / "none.yaml", field.fleet])
    assert found.unreadable
    assert "none.yaml" in found.lines[0]
    assert "valid fleet" in found.lines[1]


def test_a_step_of_an_instrument_larger_than_a_deadband_is_a_warning(field: Field) -> None:
    field.profile.write_text(
        PROFILE.replace("  expected_every_min: 5\n", "  expected_every_min: 5\n  temperature_resolution_c: 2\n"),
        encoding="utf-8",
    )
    found = check_files([field.profile])
    assert found.faults == 0
    assert any(line.endswith("(warning)") for line in found.lines)


def test_the_defaults_are_those_of_the_profile() -> None:
    instruments = default_instruments()
    assert instruments.altimeter_resolution_hpa == pytest.approx(hpa_from_inhg(0.01))
    assert instruments.altimeter_accuracy_hpa == pytest.approx(hpa_from_inhg(0.02))
    assert (instruments.temperature_resolution_c, instruments.temperature_accuracy_c) == (0.1, 0.5)
    assert (instruments.dewpoint_resolution_c, instruments.dewpoint_accuracy_c) == (0.1, 1.0)


@pytest.mark.parametrize(
    ("elevation_ft", "good"), [(0, True), (-1400, True), (20000, True), (-1401, False), (20001, False)]
)
def test_elevations_of_airfields(elevation_ft: float, *, good: bool) -> None:
    assert is_elevation_ft(elevation_ft) is good
