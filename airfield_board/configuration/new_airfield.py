"""A new airfield from a few answers: its profile and fleet as YAML that a person can read and edit.

The answers are checked by composing the files and reading them as any others are read, so that what is refused here is
what would be refused there.
"""

import json
import re
import unicodedata
from collections.abc import Iterable, Mapping
from dataclasses import dataclass
from pathlib import Path
from typing import Literal, NamedTuple

from airfield_board.configuration.fleet import fleet_from_text
from airfield_board.configuration.model import Profile
from airfield_board.configuration.profile import profile_from_text
from airfield_board.errors import FileFaults, shown
from airfield_board.units import m_from_ft

PROFILE_NAME, FLEET_NAME = "profile.yaml", "fleet.yaml"
PROFILE_SCHEMA_NAME, FLEET_SCHEMA_NAME = "profile.schema.json", "fleet.schema.json"
FILE_NAMES = (PROFILE_NAME, FLEET_NAME, PROFILE_SCHEMA_NAME, FLEET_SCHEMA_NAME)

REQUIRED = (
    "name",
    "elevation",
    "time_zone",
    "observation_file",
    "expected_every_min",
    "stale_after_min",
    "aircraft",
    "operation",
    "limit",
)
"""Answers without which there is no airfield."""

_NUMBERS = ("elevation", "expected_every_min", "stale_after_min", "limit")
_PLAIN_NUMBER = re.compile(r"-?(0|[1-9][0-9]{0,7})(\.[0-9]{1,6})?", re.ASCII)
_PLAIN_TEXT = re.compile(r"[A-Za-z][A-Za-z0-9_./+-]*( [A-Za-z0-9_./+-]+)*", re.ASCII)
# Words that readers of YAML 1.1 or 1.2 take for something else than text.
_NO_TEXT = frozenset({"null", "true", "false", "yes", "no", "on", "off", "y", "n"})
_LONGEST_ID = 64
_COMMENT_COLUMN = 40
_MINUS = "\N{MINUS SIGN}"


@dataclass(frozen=True, slots=True, kw_only=True)
class Answers:
    """What a person answered, as typed; empty where nothing was said.

    Attributes
    ----------
    observation_file
        A path: absolute, or relative to the folder of the new files.
    station
        METAR only.
    row_time_zone
        Of the file's times without an offset; empty: the airfield's.
    aircraft, operation, limit, basis, source
        The first aircraft, its operation, and the operation's greatest density altitude.
    """

    name: str = ""
    elevation: str = ""
    elevation_unit: Literal["ft", "m"] = "ft"
    time_zone: str = ""
    observation_file: str = ""
    station: str = ""
    row_time_zone: str = ""
    expected_every_min: str = "5"
    stale_after_min: str = "15"
    aircraft: str = ""
    operation: str = "Departure"
    limit: str = ""
    limit_unit: Literal["ft", "m"] = "ft"
    basis: str = "flight manual"
    source: str = ""


@dataclass(frozen=True, slots=True, kw_only=True)
class Draft:
    """The files that the answers make.

    Attributes
    ----------
    folder
        Where they are to stand.
    problems
        By the name of the answer: what is wrong with it, in plain words; empty where the files are valid.
    profile_text, fleet_text
        The files' text.
    profile
        The profile as it would be read; None where something is wrong with it.
    """

    folder: Path
    problems: Mapping[str, str]
    profile_text: str
    fleet_text: str
    profile: Profile | None


class _Line(NamedTuple):
    """A line of a file, and the answer that stands in it."""

    text: str
    answer: str = ""


def draft_of(answers: Answers, folder: Path) -> Draft:
    """Compose the files of a new airfield and check them.

    Parameters
    ----------
    answers
        As typed.
    folder
        Where the files are to stand.
    """
    said = {name: str(getattr(answers, name)).strip() for name in Answers.__slots__}
    for name in _NUMBERS:
        said[name] = said[name].replace(_MINUS, "-")
    problems = {name: "This is still missing." for name in REQUIRED if not said[name]}
    for name in _NUMBERS:
        if said[name] and not _PLAIN_NUMBER.fullmatch(said[name]):
            problems[name] = f"{shown(said[name])} is no plain decimal number; expected: digits as in 4120, -3 or 7.5"
    if not {"expected_every_min", "stale_after_min"} & problems.keys() and (
        float(said["stale_after_min"]) <= float(said["expected_every_min"])
    ):
        problems["stale_after_min"] = (
            "This must be longer than the time from one observation to the next, or each would count as stale."
        )
    if observation_path(answers, folder) in {folder.absolute() / name for name in FILE_NAMES}:
        problems["observation_file"] = "This is one of the files that will be written here; observations are only read."
    profile_lines = _profile_lines(said, file_as_written(said["observation_file"], folder))
    fleet_lines = _fleet_lines(said)
    profile_text, fleet_text = _joined(profile_lines), _joined(fleet_lines)
    profile = None
    try:
        profile = profile_from_text(profile_text, folder / PROFILE_NAME)
    except FileFaults as found:
        problems = _by_answer(found, profile_lines) | problems
    try:
        fleet_from_text(fleet_text, folder / FLEET_NAME, acceptance="simple")
    except FileFaults as found:
        problems = _by_answer(found, fleet_lines) | problems
    return Draft(
        folder=folder,
        problems=problems,
        profile_text=profile_text,
        fleet_text=fleet_text,
        profile=profile,
    )


def elevation_of(answers: Answers) -> float | None:
    """Return the elevation [m] where the answer is a number; whether it can be one, `draft_of` says."""
    text = answers.elevation.strip().replace(_MINUS, "-")
    if not _PLAIN_NUMBER.fullmatch(text):
        return None
    return m_from_ft(float(text)) if answers.elevation_unit == "ft" else float(text)


def file_as_written(text: str, folder: Path) -> str:
    """Return the observation file's path as the profile has it: relative where the file lies in the profile's folder.

    Parameters
    ----------
    text
        As answered.
    folder
        The profile's.
    """
    path = _expanded(text)
    if not text or not path.is_absolute():
        return text
    return (path.relative_to(folder) if path.is_relative_to(folder) else path).as_posix()


def observation_path(answers: Answers, folder: Path) -> Path | None:
    """Return where the observation file lies; None where nothing is said of it."""
    text = answers.observation_file.strip()
    return (folder / _expanded(text)).absolute() if text else None


def _expanded(text: str) -> Path:
    try:
        return Path(text).expanduser()
    except RuntimeError:  # a user that this machine does not know
        return Path(text)


def plain_id(name: str) -> str:
    """Return an aircraft's id made of its name: ``Two-seat trainer`` is ``two-seat-trainer``."""
    folded = unicodedata.normalize("NFKD", name).encode("ascii", "ignore").decode().lower()
    return re.sub(r"[^a-z0-9]+", "-", folded).strip("-")[:_LONGEST_ID].strip("-") or "aircraft-1"


def _joined(lines: Iterable[_Line]) -> str:
    return "".join(f"{line.text}\n" for line in lines)


def _by_answer(found: FileFaults, lines: list[_Line]) -> dict[str, str]:
    """Return what is wrong by the answer that stands in the line; the first of each."""
    problems: dict[str, str] = {}
    for fault in found.faults:
        answer = lines[fault.line - 1].answer if 0 < fault.line <= len(lines) else ""
        key, colon, rest = fault.message.partition(": ")
        # The key's name says nothing beside the field that it belongs to.
        problems.setdefault(answer, rest if colon and " " not in key else fault.message)
    return problems


def _text(value: str) -> str:
    """Write a text so that every reader of YAML takes it for one: plain where that is safe, else in double quotes."""
    if _PLAIN_TEXT.fullmatch(value) and value.lower() not in _NO_TEXT:
        return value
    return json.dumps(value, ensure_ascii=False)


def _number(value: str) -> str:
    return value if _PLAIN_NUMBER.fullmatch(value) else _text(value)


def _with_comment(text: str, comment: str) -> str:
    return f"{text:<{_COMMENT_COLUMN}}  # {comment}"


def _profile_lines(said: Mapping[str, str], file: str) -> list[_Line]:
    station, row_zone = said["station"], said["row_time_zone"]

    def line(text: str, comment: str = "", answer: str = "") -> _Line:
        return _Line(_with_comment(text, comment) if comment else text, answer)

    return [
        line(f"# yaml-language-server: $schema={PROFILE_SCHEMA_NAME}"),
        line("# The airfield's profile. Change it in any text editor: a running board reads the change at once;"),
        line("# what it loosens waits there until somebody accepts it by name. To check the file:"),
        line(f"#   airfield-board check {PROFILE_NAME}"),
        line("schema: 1"),
        line("airfield:"),
        line(f"  name: {_text(said['name'])}", answer="name"),
        line(
            f"  elevation_{said['elevation_unit']}: {_number(said['elevation'])}",
            "of the field; _ft or _m",
            "elevation",
        ),
        line("  # latitude: 41.2", "degrees, north positive; with longitude"),
        line("  # longitude: -116.9", "degrees, east positive"),
        line(f"  time_zone: {_text(said['time_zone'])}", "a name of the IANA database", "time_zone"),
        line("observations:"),
        line(f"  file: {_text(file)}", "only ever read; relative to this file", "observation_file"),
        line(f"  station: {_text(station)}", "METAR only", "station")
        if station
        else line("  # station: ZZCM", "METAR only, where the file holds several"),
        line(f"  time_zone: {_text(row_zone)}", "of times without an offset", "row_time_zone")
        if row_zone
        else line("  # time_zone: Etc/GMT+8", "of times without an offset, if not as above"),
        line("  # note: sensor at the north end", "shown with the source"),
        line("  poll_s: 5", "seconds from one look at the file to the next"),
        line(
            f"  expected_every_min: {_number(said['expected_every_min'])}",
            "minutes from one observation to the next",
            "expected_every_min",
        ),
        line(
            f"  stale_after_min: {_number(said['stale_after_min'])}",
            "minutes; an older observation is NO DATA",
            "stale_after_min",
        ),
        line("  # What the instruments resolve, and how accurate they are (half-width, 95 %):"),
        line("  altimeter_resolution_inhg: 0.01", "or _hpa; the screens show the unit used here"),
        line("  altimeter_accuracy_inhg: 0.02"),
        line("  temperature_resolution_c: 0.1"),
        line("  temperature_accuracy_c: 0.5"),
        line("  dewpoint_resolution_c: 0.1"),
        line("  dewpoint_accuracy_c: 1.0"),
        line("density_altitude: auto", "humidity counts once there is a dew point; or moist, dry"),
        line("acceptance: simple", "or guarded: value + uncertainty is compared with a limit"),
        line(f"fleet: {FLEET_NAME}", "the aircraft and their limits"),
        line("# history: history.db", "left out: in the user's data folder"),
    ]


def _fleet_lines(said: Mapping[str, str]) -> list[_Line]:
    unit = said["limit_unit"]
    lines = [
        _Line(f"# yaml-language-server: $schema={FLEET_SCHEMA_NAME}"),
        _Line("# The aircraft and their limits. To add one, copy what stands under 'aircraft:' and change its id."),
        _Line("# Limits by weight, of other quantities and for some days only are shown in the program's README."),
        _Line("# To check the file:"),
        _Line(f"#   airfield-board check {FLEET_NAME}"),
        _Line("schema: 1"),
        _Line("# Within the near band of a limit is NEAR LIMIT; a hold ends after the off-delay at limit - deadband."),
        _Line("defaults: {near_band_ft: 500, deadband_ft: 150, off_delay_min: 10}"),
        _Line("aircraft:"),
        _Line(_with_comment(f"  - id: {_text(plain_id(said['aircraft']))}", "its name in the history; keep it")),
        _Line(f"    name: {_text(said['aircraft'])}", "aircraft"),
        _Line("    operations:"),
        _Line(f"      - name: {_text(said['operation'])}", "operation"),
        _Line(f"        max_density_altitude_{unit}: {_number(said['limit'])}", "limit"),
    ]
    if said["basis"]:
        basis = f"        basis: {_text(said['basis'])}"
        lines.append(_Line(_with_comment(basis, "flight manual, operator policy or local order"), "basis"))
    if said["source"]:
        lines.append(_Line(f"        source: {_text(said['source'])}", "source"))
    return lines
