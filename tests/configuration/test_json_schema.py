import json
from collections.abc import Callable
from datetime import date
from typing import Any

import pytest
import yaml
from jsonschema import Draft7Validator, Draft202012Validator
from jsonschema.protocols import Validator

from airfield_board.configuration.json_schema import fleet_schema, profile_schema
from airfield_board.configuration.yaml_reader import read_document
from airfield_board.errors import FileFaults
from tests.configuration.examples import FLEET, PROFILE, SHORT_PROFILE, fleet_of, read_fleet, read_profile

VALIDATORS = [Draft7Validator, Draft202012Validator]


def plain(text: str) -> Any:  # noqa: ANN401 - any value of JSON
    document = read_document(text, "file.yaml")
    assert document.root is not None
    return json.loads(json.dumps(document.root.plain()))


@pytest.mark.parametrize("make_schema", [profile_schema, fleet_schema])
@pytest.mark.parametrize("validator", VALIDATORS)
def test_the_schema_is_itself_valid_in_both_drafts(
    validator: type[Validator], make_schema: Callable[[], dict[str, Any]]
) -> None:
    validator.check_schema(make_schema())
    assert make_schema()["$schema"] == "https://json-schema.org/draft/2020-12/schema"
    assert json.loads(json.dumps(make_schema())) == make_schema()


@pytest.mark.parametrize("make_schema", [profile_schema, fleet_schema])
def test_every_key_is_described_or_refers_to_a_section_that_is(make_schema: Callable[[], dict[str, Any]]) -> None:
    schema = make_schema()
    sections = [schema, *schema["$defs"].values()]

    assert all("description" in section for section in sections)
    for section in sections:
        for key, value in section["properties"].items():
            assert "description" in value or "$ref" in value, key
            assert "default" not in value or value["default"] is not None, key


@pytest.mark.parametrize("make_schema", [profile_schema, fleet_schema])
def test_nothing_stands_in_it_that_draft_7_does_not_know(make_schema: Callable[[], dict[str, Any]]) -> None:
    text = json.dumps(make_schema())

    for newer in ("prefixItems", "dependentRequired", "dependentSchemas", "unevaluated", "$dynamicRef", "minContains"):
        assert newer not in text


VALID_FLEETS = [
    FLEET,
    fleet_of("name: Winch, max_temperature_c: {by_pressure_altitude_ft: {-500: 45, 8000: 40}}"),
    fleet_of("name: Winch, max_isa_deviation_c: {by_weight_kg: {550.5: 35, 600: 30}}"),
]


@pytest.mark.parametrize("validator", VALIDATORS)
def test_valid_files_pass(validator: type[Validator]) -> None:
    for text in (PROFILE, SHORT_PROFILE):
        read_profile(text)
        assert validator(profile_schema()).is_valid(plain(text))
    for text in VALID_FLEETS:
        read_fleet(text)
        assert validator(fleet_schema()).is_valid(plain(text))


@pytest.mark.parametrize("validator", VALIDATORS)
def test_a_yaml_1_1_reader_may_have_made_keys_numbers_and_days_dates(validator: type[Validator]) -> None:
    by_another_reader = yaml.safe_load(FLEET)
    assert by_another_reader["aircraft"][0]["operations"][1]["valid_from"] == date(2026, 6, 1)

    assert validator(fleet_schema()).is_valid(by_another_reader)


BROKEN_PROFILES = {
    "unknown key": SHORT_PROFILE + "histroy: a.db\n",
    "missing key": SHORT_PROFILE.replace("fleet: fleet.yaml\n", ""),
    "other schema": SHORT_PROFILE.replace("schema: 1", "schema: 2"),
    "no elevation": SHORT_PROFILE.replace("elevation_m: 1256, ", ""),
    "two elevations": SHORT_PROFILE.replace("elevation_m: 1256", "elevation_m: 1256, elevation_ft: 4120"),
    "text for a number": SHORT_PROFILE.replace("1256", "017"),
    "out of range": SHORT_PROFILE.replace("1256", "12560"),
    "latitude alone": SHORT_PROFILE.replace("elevation_m: 1256", "elevation_m: 1256, latitude: 41"),
    "twice in two units": SHORT_PROFILE.replace(
        "observations.csv", "a.csv, altimeter_resolution_hpa: 1, altimeter_resolution_inhg: 0.01"
    ),
    "small station": SHORT_PROFILE.replace("observations.csv", "a.csv, station: zzcm"),
    "number for a text": SHORT_PROFILE.replace("Cinder Mesa", "12"),
    "empty name": SHORT_PROFILE.replace("Cinder Mesa", "''"),
    "blank at the end": SHORT_PROFILE.replace("Cinder Mesa", "'Mesa '"),
    "not among the words": SHORT_PROFILE + "acceptance: yes\n",
    "no minutes": SHORT_PROFILE.replace("observations.csv", "a.csv, stale_after_min: 0"),
}
BROKEN_FLEETS = {
    "unknown key": fleet_of("name: Winch, max_temperature_c: 40, basys: local order"),
    "no limit": fleet_of("name: Winch"),
    "twice in two units": fleet_of("name: Winch, max_temperature_c: 40, max_temperature_f: 104"),
    "bands twice": fleet_of("name: Winch, max_temperature_c: 40", defaults="{near_band_ft: 1, near_band_m: 1}"),
    "own bands twice": fleet_of("name: Winch, max_temperature_c: 40, deadband_c: 1, deadband_f: 1"),
    "one point": fleet_of("name: Winch, max_temperature_c: {by_weight_lb: {1950: 40}}"),
    "two tables": fleet_of(
        "name: Winch, max_temperature_c: {by_weight_lb: {1: 40, 2: 39}, by_weight_kg: {1: 40, 2: 39}}"
    ),
    "no table": fleet_of("name: Winch, max_temperature_c: {}"),
    "weight that is none": fleet_of("name: Winch, max_temperature_c: {by_weight_lb: {heavy: 40, 2: 39}}"),
    "altitude by altitude": fleet_of("name: Winch, max_density_altitude_ft: {by_pressure_altitude_ft: {1: 40, 2: 39}}"),
    "day that is none": fleet_of("name: Winch, max_temperature_c: 40, valid_from: June"),
    "number for a day": fleet_of("name: Winch, max_temperature_c: 40, valid_from: 20260601"),
    "list for a limit": fleet_of("name: Winch, max_temperature_c: [40]"),
    "out of range": fleet_of("name: Winch, max_density_altitude_ft: 63500"),
    "basis not among the words": fleet_of("name: Winch, max_temperature_c: 40, basis: hearsay"),
    "no aircraft": "schema: 1\naircraft: []\n",
    "no operations": "schema: 1\naircraft: [{id: a, operations: []}]\n",
    "bad id": "schema: 1\naircraft: [{id: a b, operations: [{name: Winch, max_temperature_c: 40}]}]\n",
}


@pytest.mark.parametrize("validator", VALIDATORS)
@pytest.mark.parametrize("what", BROKEN_PROFILES)
def test_what_the_program_refuses_in_a_profile_the_schema_refuses_too(what: str, validator: type[Validator]) -> None:
    text = BROKEN_PROFILES[what]

    with pytest.raises(FileFaults):
        read_profile(text)
    assert not validator(profile_schema()).is_valid(plain(text))


@pytest.mark.parametrize("validator", VALIDATORS)
@pytest.mark.parametrize("what", BROKEN_FLEETS)
def test_what_the_program_refuses_in_a_fleet_the_schema_refuses_too(what: str, validator: type[Validator]) -> None:
    text = BROKEN_FLEETS[what]

    with pytest.raises(FileFaults):
        read_fleet(text)
    assert not validator(fleet_schema()).is_valid(plain(text))
