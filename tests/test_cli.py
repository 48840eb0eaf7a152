"""The commands, as scripts use them: output, exit codes, words."""

import csv
import io
import json
from pathlib import Path

import pytest

from airfield_board.cli import DONE, NO, WRONG_USE, main
from tests.session.fields import FLEET, PROFILE, Field, make_field

AT = "2026-07-14T18:10:00Z"


@pytest.fixture
def field(tmp_path: Path) -> Field:
    field = make_field(tmp_path)
    field.write(field.row(0, 15.0), field.row(5, 20.0), field.row(10, 26.0))
    return field


def _json_lines(text: str) -> list[dict[str, object]]:
    return [json.loads(line) for line in text.splitlines()]


def test_assess_gives_the_keys_that_scripts_rely_on(field: Field, capsys: pytest.CaptureFixture[str]) -> None:
    assert main(["assess", "--airfield", str(field.profile), "--at", AT, "--json"]) == DONE
    board = json.loads(capsys.readouterr().out)
    assert {"airfield", "assessed_at", "observation", "conditions", "aircraft"} <= board.keys()
    assert board["assessed_at"] == AT
    assert board["observation"] | {"dewpoint_c": None} == board["observation"]
    assert (board["observation"]["freshness"], board["observation"]["age_min"]) == ("fresh", 0.0)
    assert board["observation"]["altimeter_setting_hpa"] == 1013.25
    assert {
        "station_pressure_hpa",
        "pressure_altitude_ft",
        "density_altitude_ft",
        "density_altitude_dry_ft",
        "uncertainty_ft",
        "isa_deviation_c",
        "density_ratio",
        "rate_ft_per_h",
    } <= board["conditions"].keys()
    (trainer,) = (aircraft for aircraft in board["aircraft"] if aircraft["id"] == "trainer")
    (limit,) = trainer["operations"][0]["limits"]
    assert {
        "quantity",
        "state",
        "limit",
        "unit",
        "margin",
        "since",
        "hold_temperature_c",
        "greatest_weight_lb",
        "outlook",
    } <= limit.keys()
    assert limit["quantity"] == "density altitude"
    assert limit["margin"] == pytest.approx(6350 - board["conditions"]["density_altitude_ft"])
    assert limit["outlook"].keys() == {"hold_probability", "hold_at", "hold_window", "clear_at", "clear_window"}


def test_the_hold_temperature_of_assess_is_where_the_limit_is_reached(
    field: Field, capsys: pytest.CaptureFixture[str]
) -> None:
    main(["assess", "--airfield", str(field.profile), "--at", AT, "--json"])
    trainer = json.loads(capsys.readouterr().out)["aircraft"][0]
    hold_c = trainer["operations"][0]["limits"][0]["hold_temperature_c"]
    field.write(field.row(10, hold_c - 0.001))
    main(["assess", "--airfield", str(field.profile), "--at", AT, "--json"])
    assert json.loads(capsys.readouterr().out)["aircraft"][0]["state"] == "near"
    field.write(field.row(10, hold_c + 0.001))
    main(["assess", "--airfield", str(field.profile), "--at", AT, "--json"])
    assert json.loads(capsys.readouterr().out)["aircraft"][0]["state"] == "hold"


def test_assess_does_not_know_later_rows(field: Field, capsys: pytest.CaptureFixture[str]) -> None:
    field.append(field.row(11, 26.0))
    main(["assess", "--airfield", str(field.profile), "--at", AT, "--json"])
    assert json.loads(capsys.readouterr().out)["observation"]["time"] == AT


def test_assess_of_a_stale_record_gives_no_conditions_and_no_data(
    field: Field, capsys: pytest.CaptureFixture[str]
) -> None:
    assert main(["assess", "--airfield", str(field.profile), "--at", "2026-07-14T18:26:00Z", "--json"]) == DONE
    board = json.loads(capsys.readouterr().out)
    assert board["conditions"] is None
    assert board["observation"]["freshness"] == "stale"
    assert {aircraft["state"] for aircraft in board["aircraft"]} == {"no_data"}


def test_assess_without_an_observation_file_says_so_and_lets_nobody_go(
    field: Field, capsys: pytest.CaptureFixture[str]
) -> None:
    field.observations.unlink()
    assert main(["assess", "--airfield", str(field.profile), "--json"]) == WRONG_USE
    said = capsys.readouterr()
    board = json.loads(said.out)
    assert board["observation"]["freshness"] == "missing"
    assert {aircraft["state"] for aircraft in board["aircraft"]} == {"no_data"}
    assert "observations.csv" in said.err


def test_the_table_of_assess_says_who_decides(field: Field, capsys: pytest.CaptureFixture[str]) -> None:
    assert main(["assess", "--airfield", str(field.profile), "--at", AT]) == DONE
    table = capsys.readouterr().out
    assert "NEAR LIMIT  Two-seat trainer · Departure" in table
    assert "flight manual" in table
    assert "HOLD: do not begin." in table


def test_replay_gives_changes_episodes_and_a_summary(field: Field, capsys: pytest.CaptureFixture[str]) -> None:
    field.append(field.row(15, 27.0), field.row(20, 26.0), field.row(25, 24.0), field.row(35, 24.0), "rubbish\n")
    assert main(["replay", str(field.observations), "--airfield", str(field.profile), "--json"]) == DONE
    lines = _json_lines(capsys.readouterr().out)
    kinds = [line["kind"] for line in lines]
    assert kinds == sorted(kinds, key=lambda kind: ["change", "episode", "summary"].index(str(kind)))
    trainer = [line for line in lines if line["kind"] == "change" and line["aircraft"] == "trainer"]
    assert [(line["from"], line["to"], line["time"]) for line in trainer] == [
        (None, "go", "2026-07-14T18:00:00Z"),
        ("go", "near", "2026-07-14T18:10:00Z"),
        ("near", "hold", "2026-07-14T18:15:00Z"),
        ("hold", "near", "2026-07-14T18:35:00Z"),
    ]
    (episode,) = (line for line in lines if line["kind"] == "episode")
    assert episode["start"] == "2026-07-14T18:15:00Z"
    assert episode["end"] == "2026-07-14T18:35:00Z"
    assert (episode["minutes"], episode["minutes_without_data"], episode["unit"]) == (20.0, 0.0, "ft")
    assert lines[-1] == {"kind": "summary", "rows": 8, "valid": 7, "suspect": 0, "rejected": 1, "superseded": 0}


def test_a_replay_into_a_history_is_proved_and_judged_anew(field: Field, capsys: pytest.CaptureFixture[str]) -> None:
    field.append(field.row(15, 27.0), field.row(20, 26.0), field.row(90, 24.0), "rubbish\n")
    history = field.folder / "replayed.db"
    arguments = ["replay", str(field.observations), "--airfield", str(field.profile)]
    assert main([*arguments, "--history", str(history)]) == DONE
    assert main([*arguments, "--history", str(history)]) == WRONG_USE
    capsys.readouterr()
    assert main(["verify", str(history), "--rejudge"]) == DONE
    said = capsys.readouterr().out
    assert "whole and unaltered" in said
    assert "7 observations" in said
    assert main(["verify", str(history), "--closing-hash", "0" * 64]) == NO
    assert main(["verify", str(field.profile)]) == WRONG_USE


def test_replay_says_why_rows_were_not_used(field: Field, capsys: pytest.CaptureFixture[str]) -> None:
    field.append(field.row(15, 61.0), "rubbish\n", field.row(20, 40.0), field.row(10, 25.9))
    assert main(["replay", str(field.observations), "--airfield", str(field.profile), "--json"]) == DONE
    said = capsys.readouterr()
    lines = said.err.splitlines()
    assert len(lines) == 4
    for words in (
        "row of no readable time: rejected: incomplete",
        "row of 2026-07-14T18:10:00Z: superseded: corrected by a later row",
        "row of 2026-07-14T18:15:00Z: rejected: range: temperature 61.0 °C",
        "row of 2026-07-14T18:20:00Z: suspect: step: temperature",
    ):
        assert any(words in line for line in lines)
    assert _json_lines(said.out)[-1]["rows"] == 7
    field.append(*(field.row(25 + minutes, 61.0) for minutes in range(30)))
    assert main(["replay", str(field.observations), "--airfield", str(field.profile), "--json"]) == DONE
    lines = capsys.readouterr().err.splitlines()
    assert len(lines) == 21
    assert "14 more rows not used" in lines[-1]


def test_compute_keeps_every_row_in_its_place(field: Field, capsys: pytest.CaptureFixture[str]) -> None:
    field.observations.write_text(
        "time,altimeter_inhg,temperature_f,dewpoint_c,remark\n"
        "2026-07-14T18:05:00Z,30.00,66.2,4.0,second in time\n"
        "2026-07-14T18:00:00Z,29.92,59.0,,first in time\n"
        "2026-07-14T18:10:00Z,29.9x,59.0,,broken\n",
        encoding="utf-8",
    )
    assert main(["compute", str(field.observations), "--elevation-ft", "4120"]) == DONE
    rows = list(csv.DictReader(io.StringIO(capsys.readouterr().out)))
    assert [row["remark"] for row in rows] == ["second in time", "first in time", "broken"]
    assert [row["quality"].partition(":")[0] for row in rows] == ["valid", "valid", "rejected"]
    assert rows[2]["density_altitude_ft"] == ""
    assert "29.9x" in rows[2]["quality"]
    assert rows[0]["time"] == "2026-07-14T18:05:00Z"
    assert float(rows[0]["temperature_c"]) == pytest.approx(19.0)
    assert float(rows[0]["density_altitude_ft"]) > float(rows[0]["density_altitude_dry_ft"])
    assert rows[1]["density_altitude_ft"] == rows[1]["density_altitude_dry_ft"]


def test_compute_needs_an_elevation(field: Field, capsys: pytest.CaptureFixture[str]) -> None:
    assert main(["compute", str(field.observations)]) == WRONG_USE
    assert "--elevation-ft" in capsys.readouterr().err
    assert main(["compute", str(field.observations), "--elevation-ft", "90000"]) == WRONG_USE


def test_compute_gives_the_elevation_in_feet_and_says_where_it_can_be_none(
    field: Field, capsys: pytest.CaptureFixture[str]
) -> None:
    field.observations.write_text(
        "time,altimeter_hpa,temperature_c,elevation_m\n"
        "2026-07-14T18:00:00Z,1013.25,15.0,304.8\n"
        "2026-07-14T18:05:00Z,1013.25,15.0,99999\n"
        "2026-07-14T18:10:00Z,1013.25,15.0,\n",
        encoding="utf-8",
    )
    assert main(["compute", str(field.observations)]) == DONE
    rows = list(csv.DictReader(io.StringIO(capsys.readouterr().out)))
    assert float(rows[0]["elevation_ft"]) == pytest.approx(1000.0)
    assert rows[0]["elevation_m"] == "304.8"
    assert float(rows[0]["pressure_altitude_ft"]) == pytest.approx(1000.0, abs=0.01)
    assert [row["quality"].partition(":")[0] for row in rows] == ["valid", "rejected", "rejected"]
    assert "no elevation of an airfield" in rows[1]["quality"]
    assert [row["density_altitude_ft"] for row in rows[1:]] == ["", ""]


@pytest.mark.skipif(not Path("/dev/full").exists(), reason="no device that is always full")
def test_an_output_that_takes_nothing_is_said(field: Field, monkeypatch: pytest.MonkeyPatch) -> None:
    said = io.StringIO()
    monkeypatch.setattr("sys.stderr", said)
    for arguments in (["schema", "fleet"], ["compute", str(field.observations), "--elevation-ft", "4120"]):
        with Path("/dev/full").open("w", encoding="utf-8") as full, monkeypatch.context() as patched:
            patched.setattr("sys.stdout", full)
            assert main(arguments) == WRONG_USE
    assert said.getvalue().count("The output cannot be written: ") == 2
    monkeypatch.setattr("sys.stdout", None)
    assert main(["schema", "fleet"]) == WRONG_USE


def test_compute_writes_to_a_file(field: Field) -> None:
    out = field.folder / "out.csv"
    assert main(["compute", str(field.observations), "--elevation-ft", "4120", "--out", str(out)]) == DONE
    assert len(out.read_text(encoding="utf-8").splitlines()) == 4
    assert main(["compute", str(field.observations), "--elevation-ft", "1", "--out", str(field.folder)]) == WRONG_USE


def test_check_finds_all_faults_of_all_files(field: Field, capsys: pytest.CaptureFixture[str]) -> None:
    assert main(["check", str(field.profile), str(field.fleet)]) == DONE
    field.fleet.write_text(
        FLEET.replace("max_density", "max_densty").replace("id: tow", "id: trainer"), encoding="utf-8"
    )
    field.profile.write_text(PROFILE.replace("4120", "tall"), encoding="utf-8")
    capsys.readouterr()
    assert main(["check", str(field.profile), str(field.fleet)]) == NO
    lines = capsys.readouterr().out.splitlines()
    assert any(line.startswith(f"{field.profile}:4: ") for line in lines)
    assert any(line.startswith(f"{field.fleet}:7: ") and "max_density_altitude_ft" in line for line in lines)
    assert len(lines) == len(set(lines))
    assert main(["check", str(field.folder / "none.yaml")]) == WRONG_USE


def test_observations_are_never_written_over(field: Field, capsys: pytest.CaptureFixture[str]) -> None:
    before = field.observations.read_bytes()
    other_name = field.folder / "link.csv"
    other_name.symlink_to(field.observations)
    for out in (field.observations, other_name):
        arguments = ["compute", str(field.observations), "--elevation-ft", "4120", "--out", str(out)]
        assert main(arguments) == WRONG_USE
        assert "never written to" in capsys.readouterr().err
    assert main(["compute", str(field.folder / "none.csv"), "--out", str(field.observations)]) == WRONG_USE
    assert "no such file" in capsys.readouterr().err
    assert main(["snapshot", "--airfield", str(field.profile), "--out", str(field.observations)]) == WRONG_USE
    assert "never written to" in capsys.readouterr().err
    assert main(["snapshot", "--airfield", str(field.profile), "--out", str(field.fleet)]) == WRONG_USE
    assert "no PNG picture" in capsys.readouterr().err
    assert field.observations.read_bytes() == before


def test_no_picture_takes_the_place_of_observations_that_are_yet_to_come(
    field: Field, capsys: pytest.CaptureFixture[str]
) -> None:
    snapshot = ["snapshot", "--airfield", str(field.profile), "--out", str(field.observations)]
    field.observations.write_bytes(b"")
    assert main(snapshot) == WRONG_USE
    assert field.observations.read_bytes() == b""
    field.observations.unlink()
    assert main(snapshot) == WRONG_USE
    assert not field.observations.exists()
    assert capsys.readouterr().err.count("never written to") == 2


def test_schemas_are_printed(capsys: pytest.CaptureFixture[str]) -> None:
    for name in ("profile", "fleet"):
        assert main(["schema", name]) == DONE
        assert json.loads(capsys.readouterr().out)["type"] == "object"


def test_wrong_use_ends_with_two(field: Field, capsys: pytest.CaptureFixture[str]) -> None:
    assert main([]) == WRONG_USE
    for arguments in (["assess"], ["frob"], ["assess", "--airfield", str(field.profile), "--at", "noon"]):
        with pytest.raises(SystemExit) as ended:
            main(arguments)
        assert ended.value.code == WRONG_USE
    assert main(["assess", "--airfield", str(field.folder / "none.yaml")]) == WRONG_USE
    assert "none.yaml" in capsys.readouterr().err


@pytest.mark.parametrize("command", ["assess", "compute", "replay", "check", "schema", "verify", "snapshot"])
def test_every_command_has_help(command: str, capsys: pytest.CaptureFixture[str]) -> None:
    with pytest.raises(SystemExit) as ended:
        main([command, "--help"])
    assert ended.value.code == DONE
    assert "flight manual" in capsys.readouterr().out.replace("\n", " ")
