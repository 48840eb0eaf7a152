from dataclasses import replace
from pathlib import Path
from typing import Any
from zoneinfo import ZoneInfo

import pytest
import yaml
from hypothesis import given, settings
from hypothesis import strategies as st

from airfield_board.configuration.fleet import fleet_from_text
from airfield_board.configuration.model import Quantity
from airfield_board.configuration.new_airfield import (
    REQUIRED,
    Answers,
    draft_of,
    elevation_of,
    file_as_written,
    observation_path,
    plain_id,
)

FOLDER = Path("/fields/cinder-mesa")
ANSWERS = Answers(
    name="Cinder Mesa",
    elevation="4120",
    time_zone="America/Los_Angeles",
    observation_file="observations.csv",
    aircraft="Two-seat trainer",
    limit="6350",
)


def with_answer(name: str, text: str) -> Answers:
    """Return the answers with another one."""
    said: dict[str, Any] = {name: text}
    return replace(ANSWERS, **said)


def problem(answers: Answers, name: str) -> str:
    return draft_of(answers, FOLDER).problems.get(name, "")


def test_a_few_answers_make_a_profile_and_a_fleet_without_fault() -> None:
    draft = draft_of(ANSWERS, FOLDER)
    assert draft.problems == {}
    profile = draft.profile
    assert profile is not None
    assert profile.name == "Cinder Mesa"
    assert profile.elevation_m == pytest.approx(4120 * 0.3048)  # the international foot
    assert (profile.time_zone, profile.elevation_unit) == ("America/Los_Angeles", "ft")
    assert profile.observations.file == FOLDER / "observations.csv"
    assert (profile.observations.expected_every_min, profile.observations.stale_after_min) == (5, 15)
    assert profile.fleet_path == FOLDER / "fleet.yaml"
    (aircraft,) = fleet_from_text(draft.fleet_text, profile.fleet_path, acceptance=profile.acceptance).aircraft
    assert (aircraft.id, aircraft.name) == ("two-seat-trainer", "Two-seat trainer")
    (operation,) = aircraft.operations
    assert (operation.name, operation.phase) == ("Departure", "departure")
    (limit,) = operation.limits
    assert (limit.quantity, limit.unit, limit.value) == (Quantity.DENSITY_ALTITUDE, "ft", 6350.0)
    assert limit.basis == "flight manual"
    # Contract, section 3: the program's own bands.
    assert (limit.near_band, limit.deadband, limit.off_delay_min) == (500.0, 150.0, 10.0)


def test_all_other_answers_reach_the_files_too() -> None:
    answers = replace(
        ANSWERS,
        elevation="1256",
        elevation_unit="m",
        station="ZZCM",
        row_time_zone="Etc/GMT+8",
        expected_every_min="60",
        stale_after_min="75.5",
        operation="Aerotow",
        limit="1900",
        limit_unit="m",
        basis="local order",
        source="Order 7: § 3 # draft",
    )
    draft = draft_of(answers, FOLDER)
    assert draft.problems == {}
    profile = draft.profile
    assert profile is not None
    assert (profile.elevation_m, profile.elevation_unit) == (1256, "m")
    observations = profile.observations
    assert (observations.station, observations.time_zone) == ("ZZCM", "Etc/GMT+8")
    assert (observations.expected_every_min, observations.stale_after_min) == (60, 75.5)
    (limit,) = fleet_from_text(draft.fleet_text, FOLDER, acceptance="simple").aircraft[0].operations[0].limits
    assert (limit.value, limit.unit, limit.basis, limit.source) == (1900, "m", "local order", "Order 7: § 3 # draft")


def test_what_is_not_said_of_the_limit_is_left_out() -> None:
    text = draft_of(replace(ANSWERS, basis="", source=" "), FOLDER).fleet_text
    assert "basis" not in text
    assert "source" not in text


def test_every_line_of_the_files_is_one_that_a_person_can_read() -> None:
    draft = draft_of(ANSWERS, FOLDER)
    for text, schema in ((draft.profile_text, "profile"), (draft.fleet_text, "fleet")):
        lines = text.splitlines()
        assert lines[0] == f"# yaml-language-server: $schema={schema}.schema.json"
        assert max(map(len, lines)) <= 120
        assert any(line.startswith(f"#   airfield-board check {schema}.yaml") for line in lines)
        assert all(line == line.rstrip() for line in lines)
    for key in ("elevation_ft: 4120", "stale_after_min: 15", "density_altitude: auto", "acceptance: simple"):
        assert key in draft.profile_text


@pytest.mark.parametrize("name", REQUIRED)
@pytest.mark.parametrize("empty", ["", "  "])
def test_an_answer_that_is_needed_and_missing_is_said_of_that_answer_alone(name: str, empty: str) -> None:
    draft = draft_of(with_answer(name, empty), FOLDER)
    assert draft.problems == {name: "This is still missing."}


@pytest.mark.parametrize("number", ["4,120", "4120ft", "1e3", ".5", "5.", "nan", "017", "٣٠", "4 120", "+5", "0x10"])
@pytest.mark.parametrize("name", ["elevation", "limit", "expected_every_min", "stale_after_min"])
def test_what_is_no_plain_decimal_number_is_refused_and_quoted(name: str, number: str) -> None:
    draft = draft_of(with_answer(name, number), FOLDER)
    assert list(draft.problems) == [name]
    assert "no plain decimal number" in draft.problems[name]
    assert number in draft.problems[name]


def test_a_true_minus_sign_is_a_minus() -> None:
    draft = draft_of(replace(ANSWERS, elevation="\N{MINUS SIGN}210"), FOLDER)
    assert draft.problems == {}
    assert "elevation_ft: -210" in draft.profile_text
    assert elevation_of(replace(ANSWERS, elevation="\N{MINUS SIGN}210")) == pytest.approx(-210 * 0.3048)


@pytest.mark.parametrize(
    ("name", "text", "said"),
    [
        ("elevation", "41200", "at most 20000"),
        ("time_zone", "Europe/Viena", "did you mean Europe/Vienna?"),
        ("row_time_zone", "noon", "no time zone"),
        ("station", "zzcm", "four capital letters"),
        ("observation_file", "https://example.org/o.csv", "path of a file"),
        ("limit", "63500", "at most 30000"),
        ("stale_after_min", "5", "longer than the time from one observation to the next"),
        ("expected_every_min", "0", "more than 0"),
        ("stale_after_min", "2000", "at most 1440"),
        ("basis", "hearsay", "operator policy"),
        ("name", "x" * 121, "at most 120"),
        ("aircraft", "a\u200bb", "invisible"),
        ("source", "a\x07b", "invisible"),
        ("source", "a\x7fb", "control character"),
        ("observation_file", "fleet.yaml", "only read"),
        ("observation_file", f"{FOLDER}/profile.yaml", "only read"),
    ],
)
def test_what_the_files_would_not_take_is_said_beside_its_answer(name: str, text: str, said: str) -> None:
    draft = draft_of(with_answer(name, text), FOLDER)
    assert list(draft.problems) == [name]
    assert said in draft.problems[name]
    assert not draft.problems[name].startswith(("elevation_ft", "max_"))


def test_several_wrong_answers_are_all_said() -> None:
    found = draft_of(replace(ANSWERS, name="", elevation="high", limit="99999", station="z"), FOLDER).problems
    assert set(found) == {"name", "elevation", "limit", "station"}


TEXTS = (
    st.text(st.characters(categories=["L", "N", "P", "S", "Zs"]), min_size=1, max_size=30).map(str.strip).filter(bool)
)


@settings(max_examples=150, deadline=None)
@given(name=TEXTS, aircraft=TEXTS, operation=TEXTS, source=TEXTS)
def test_whatever_is_typed_stands_in_the_files_as_typed(name: str, aircraft: str, operation: str, source: str) -> None:
    answers = replace(ANSWERS, name=name, aircraft=aircraft, operation=operation, source=source)
    draft = draft_of(answers, FOLDER)
    assert draft.problems == {}
    by_another_reader = yaml.safe_load(draft.profile_text), yaml.safe_load(draft.fleet_text)
    assert by_another_reader[0]["airfield"]["name"] == name
    (aircraft_read,) = by_another_reader[1]["aircraft"]
    assert aircraft_read["name"] == aircraft
    assert aircraft_read["operations"][0]["name"] == operation
    assert draft.profile is not None
    assert draft.profile.name == name
    (read,) = fleet_from_text(draft.fleet_text, FOLDER, acceptance="simple").aircraft
    assert (read.name, read.operations[0].name) == (aircraft, operation)
    assert read.operations[0].limits[0].source == " ".join(source.split())


@pytest.mark.parametrize("word", ["no", "Yes", "null", "true", "12", "1e5", "-", "# x", "a: b", "'", '"', "{x}", "\\"])
def test_words_that_yaml_would_take_for_something_else_are_texts(word: str) -> None:
    draft = draft_of(replace(ANSWERS, name=word), FOLDER)
    assert draft.problems == {}
    assert yaml.safe_load(draft.profile_text)["airfield"]["name"] == word


@pytest.mark.parametrize(
    ("name", "made"),
    [
        ("Two-seat trainer", "two-seat-trainer"),
        ("  Flügel & Söhne 7 ", "flugel-sohne-7"),
        ("Як", "aircraft-1"),
        ("--", "aircraft-1"),
        ("x" * 80, "x" * 64),
    ],
)
def test_an_aircrafts_id_is_made_of_its_name(name: str, made: str) -> None:
    assert plain_id(name) == made
    assert draft_of(replace(ANSWERS, aircraft=name), FOLDER).problems == {}


def test_a_file_in_the_profiles_folder_is_written_relative_to_it_and_others_in_full(tmp_path: Path) -> None:
    assert file_as_written(str(tmp_path / "log" / "o.csv"), tmp_path) == "log/o.csv"
    assert file_as_written(str(tmp_path / "o.csv"), tmp_path / "field") == (tmp_path / "o.csv").as_posix()
    assert file_as_written("log/o.csv", tmp_path) == "log/o.csv"
    assert file_as_written("", tmp_path) == ""


def test_the_file_that_is_looked_at_is_the_one_that_the_profile_names(tmp_path: Path) -> None:
    for written in (
        "o.csv",
        "../o.csv",
        str(tmp_path / "o.csv"),
        str(tmp_path / "field" / "o.csv"),
        "~/o.csv",
        "~none/o",
    ):
        answers = replace(ANSWERS, observation_file=written)
        profile = draft_of(answers, tmp_path / "field").profile
        assert profile is not None
        assert profile.observations.file == observation_path(answers, tmp_path / "field")
    assert observation_path(Answers(), tmp_path) is None


def test_an_elevation_that_is_no_number_is_none() -> None:
    assert elevation_of(replace(ANSWERS, elevation="high")) is None
    assert elevation_of(Answers()) is None
    assert elevation_of(replace(ANSWERS, elevation="1256", elevation_unit="m")) == 1256


def test_the_zone_that_is_taken_is_one() -> None:
    profile = draft_of(ANSWERS, FOLDER).profile
    assert profile is not None
    assert ZoneInfo(profile.time_zone).key == "America/Los_Angeles"
    assert problem(ANSWERS, "time_zone") == ""
