import json
import os
import re
import shlex
import shutil
from datetime import UTC, datetime
from pathlib import Path

import pytest

from airfield_board.cli import _parser
from airfield_board.clock import us_from_time
from airfield_board.configuration.profile import load_airfield
from airfield_board.session.whole_files import read_file
from airfield_board.window.preflight import COMMANDS_WITHOUT_SCREEN
from tests.interpreter import run_python

ROOT = Path(__file__).parent.parent
README = (ROOT / "README.md").read_text(encoding="utf-8")
DEVELOPERS = (ROOT / "DEVELOPERS.md").read_text(encoding="utf-8")
_READ_AT = datetime(2026, 7, 16, 20, 15, tzinfo=UTC)
NO_SCREEN = {"DISPLAY": None, "WAYLAND_DISPLAY": None, "QT_QPA_PLATFORM": None}


def blocks(language: str) -> list[str]:
    return re.findall(rf"^```{language}\n(.*?)^```", README, flags=re.MULTILINE | re.DOTALL)


def marked(what: str) -> str:
    found = re.findall(rf"<!-- {what} command, Debian -->\s*```sh\n([^\n]+)\n```", README)
    assert len(found) == 1
    return str(found[0])


def quoted_commands() -> list[str]:
    """Every line of the README that begins with the program's name."""
    lines = (line for block in blocks("sh") for line in block.splitlines())
    return [line for line in lines if line.startswith("airfield-board ")]


def on_demo_data() -> list[str]:
    return [line for line in quoted_commands() if "demo_data/" in line]


@pytest.mark.parametrize("line", quoted_commands())
def test_each_command_of_the_readme_is_one_that_the_program_takes(line: str) -> None:
    options = _parser().parse_args(shlex.split(line)[1:])
    assert callable(options.run)


def test_every_command_of_the_program_stands_in_the_readme() -> None:
    shown = run_python(["-m", "airfield_board", "--help"]).stdout
    commands = re.findall(r"^    (\w+) ", shown, flags=re.MULTILINE)
    assert set(COMMANDS_WITHOUT_SCREEN) == set(commands)
    quoted = {shlex.split(line)[1] for line in quoted_commands()}
    assert set(commands) <= quoted


@pytest.mark.parametrize("command", COMMANDS_WITHOUT_SCREEN)
def test_each_command_has_its_own_help(command: str) -> None:
    done = run_python(["-m", "airfield_board", command, "--help"])
    assert done.returncode == 0
    assert f"usage: airfield-board {command}" in done.stdout


@pytest.mark.parametrize("line", on_demo_data())
def test_each_command_on_the_demo_data_does_what_the_readme_says(line: str, tmp_path: Path) -> None:
    shutil.copytree(ROOT / "demo_data", tmp_path / "demo_data")
    done = run_python(["-m", "airfield_board", *shlex.split(line)[1:]], environment=NO_SCREEN, folder=str(tmp_path))
    assert "Traceback" not in done.stderr
    assert done.returncode == 0
    words = shlex.split(line)
    if "--out" in words:
        assert (tmp_path / words[words.index("--out") + 1]).stat().st_size > 0
    else:
        assert done.stdout != ""


def test_the_history_that_the_readme_proves_is_the_one_it_has_made(tmp_path: Path) -> None:
    shutil.copytree(ROOT / "demo_data", tmp_path / "demo_data")
    lines = [line for line in quoted_commands() if "history.db" in line]
    assert [shlex.split(line)[1] for line in lines] == ["replay", "verify", "verify"]
    for line in lines:
        done = run_python(["-m", "airfield_board", *shlex.split(line)[1:]], folder=str(tmp_path))
        assert done.returncode == 0, done.stderr
    assert "whole and unaltered" in done.stdout


@pytest.mark.parametrize("of", ["profile", "fleet"])
def test_the_schemas_beside_the_demo_data_are_those_the_program_prints(of: str) -> None:
    printed = json.loads(run_python(["-m", "airfield_board", "schema", of]).stdout)
    kept = json.loads((ROOT / "demo_data" / f"{of}.schema.json").read_text(encoding="utf-8"))
    assert printed == kept
    first = (ROOT / "demo_data" / f"{of}.yaml").read_text(encoding="utf-8").splitlines()[0]
    assert first == f"# yaml-language-server: $schema={of}.schema.json"


def test_the_first_paragraph_is_followed_by_the_two_commands_then_the_picture_then_the_caution() -> None:
    places = [
        README.index("Whoever runs the operations desk"),
        README.index("<!-- demo command, Debian -->"),
        README.index("<!-- test command, Debian -->"),
        README.index("](assets/board.png)"),
        README.index("flight manual, local orders and the licensed people on duty decide"),
        README.index("## "),
    ]
    assert places == sorted(places)


def test_the_demo_command_ends_with_the_demo_and_the_test_command_with_the_tests() -> None:
    assert marked("demo").endswith(".venv/bin/airfield-board --demo")
    assert marked("test").endswith("-m pytest")
    assert marked("demo").split("python3 -m venv")[0] == marked("test").split("python3 -m venv")[0]


def test_profile_and_fleet_of_the_readme_are_valid(tmp_path: Path) -> None:
    profile, fleet = blocks("yaml")
    (tmp_path / "profile.yaml").write_text(profile, encoding="utf-8")
    (tmp_path / "fleet.yaml").write_text(fleet, encoding="utf-8")
    read_profile, read_fleet = load_airfield(tmp_path / "profile.yaml")
    assert read_profile.name == "Cinder Mesa"
    assert [aircraft.id for aircraft in read_fleet.aircraft] == ["trainer-2", "tow-plane"]


@pytest.mark.parametrize(("language", "rows"), [("csv", 2), ("json", 1), ("text", 1)])
def test_the_observations_of_the_readme_can_be_read(language: str, rows: int, tmp_path: Path) -> None:
    (example,) = blocks(language)
    path = tmp_path / "observations.txt"
    path.write_text(example, encoding="utf-8")
    os.utime(path, (_READ_AT.timestamp(), _READ_AT.timestamp()))
    table = read_file(path, time_zone="America/Los_Angeles", station="", finished=True).table
    assert table.faults == {}
    assert len(table) == rows
    assert us_from_time(datetime(2026, 7, 16, 20, 10, tzinfo=UTC)) == table.time_us[-1]
    assert table.temperature_c[-1] == 30.4
    assert table.dewpoint_c[-1] == 6.0
    assert table.altimeter_hpa[-1] == pytest.approx(1015.6, abs=0.03)


def test_the_links_within_the_readme_lead_somewhere() -> None:
    headings = {
        re.sub(r"[^\w -]", "", heading.lower()).replace(" ", "-") for heading in re.findall(r"^#+ (.+)$", README, re.M)
    }
    links = set(re.findall(r"\]\(#([^)]+)\)", README))
    assert links
    assert links <= headings


def test_the_developers_guide_has_its_glossary_and_changelog() -> None:
    for heading in ("## Glossary", "## CHANGELOG", "## Where a new thing goes"):
        assert heading in DEVELOPERS
    for kind in ("A limit kind", "A format", "A page"):
        assert kind in DEVELOPERS
