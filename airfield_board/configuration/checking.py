"""Validating settings files on demand."""

from collections.abc import Iterable
from dataclasses import dataclass
from difflib import get_close_matches
from pathlib import Path

from airfield_board.configuration.file_reading import in_order, read_settings_file
from airfield_board.configuration.fleet import load_fleet
from airfield_board.configuration.instrument_steps import warnings_of
from airfield_board.configuration.profile import load_airfield
from airfield_board.configuration.yaml_nodes import Mapping
from airfield_board.configuration.yaml_reader import read_document
from airfield_board.errors import Fault, FileFaults


@dataclass(frozen=True, slots=True, kw_only=True)
class Findings:
    """What checking files found.

    Attributes
    ----------
    lines
        A line a finding, faults first in each file, and a line for each file that is valid.
    faults
        How many faults.
    unreadable
        Whether a file could not even be read.
    """

    lines: tuple[str, ...]
    faults: int
    unreadable: bool


def check_files(paths: Iterable[Path]) -> Findings:
    """Check profiles, each with the fleet that it names, and fleets.

    Parameters
    ----------
    paths
        The files; what each is, its top-level keys tell.
    """
    lines: list[str] = []
    faults: dict[str, Fault] = {}
    unreadable = False
    for path in paths:
        try:
            document = read_document(read_settings_file(path), str(path))
        except FileFaults as error:
            unreadable = True
            lines += [str(fault) for fault in error.faults]
            continue
        try:
            lines += _checked(path, document.root if isinstance(document.root, Mapping) else None)
        except FileFaults as error:
            # A fleet that was given beside the profile that names it is told of once.
            fresh = [fault for fault in in_order(error.faults) if str(fault) not in faults]
            faults |= {str(fault): fault for fault in fresh}
            lines += [str(fault) for fault in fresh]
    return Findings(lines=tuple(lines), faults=len(faults), unreadable=unreadable)


def _checked(path: Path, root: Mapping | None) -> list[str]:
    if root is not None and _looks_like_a_fleet(root):
        fleet = load_fleet(path, acceptance="simple")
        operations = sum(len(aircraft.operations) for aircraft in fleet.aircraft)
        return [f"{path}: valid fleet, {len(fleet.aircraft)} aircraft, {operations} operations"]
    profile, fleet = load_airfield(path)
    warnings = [f"{warning} (warning)" for warning in warnings_of(profile, fleet)]
    return [*warnings, f"{path}: valid profile of {profile.name}, with its fleet {fleet.path.name}"]


def _looks_like_a_fleet(root: Mapping) -> bool:
    """Tell a fleet by its top-level keys, misspelt or not, from a profile."""
    found = {"fleet": 0, "profile": 0}
    for entry in root.entries:
        near = get_close_matches(entry.key, _TOP_KEYS, n=1)
        if near:
            found[_TOP_KEYS[near[0]]] += 1
    return found["fleet"] > found["profile"]


_TOP_KEYS = {
    "aircraft": "fleet",
    "defaults": "fleet",
    "airfield": "profile",
    "observations": "profile",
    "density_altitude": "profile",
    "acceptance": "profile",
    "fleet": "profile",
    "history": "profile",
}
