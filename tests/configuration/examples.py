"""Invented profiles and fleets, and how tests read them."""

from pathlib import Path

import pytest

from airfield_board.configuration.fleet import fleet_from_text
from airfield_board.configuration.model import Acceptance, Fleet, Limit, Profile
from airfield_board.configuration.profile import profile_from_text
from airfield_board.errors import FileFaults

PROFILE_PATH = Path("settings/profile.yaml")
FLEET_PATH = Path("settings/fleet.yaml")

PROFILE = """\
# yaml-language-server: $schema=profile.schema.json
schema: 1
airfield:
  name: Cinder Mesa           # invented
  elevation_ft: 4120
  latitude: 41.2
  longitude: -116.9
  time_zone: America/Los_Angeles
observations:
  file: observations.csv
  station: ZZCM
  note: sensor at the north end, 1.2 nm from the runway
  time_zone: Etc/GMT+8
  poll_s: 5
  expected_every_min: 5
  stale_after_min: 15
  altimeter_resolution_inhg: 0.01
  altimeter_accuracy_inhg: 0.02
  temperature_resolution_c: 0.1
  temperature_accuracy_c: 0.5
  dewpoint_resolution_c: 0.1
  dewpoint_accuracy_c: 1.0
density_altitude: auto
acceptance: simple
fleet: fleet.yaml
history: history.db
"""

SHORT_PROFILE = """\
schema: 1
airfield: {name: Cinder Mesa, elevation_m: 1256, time_zone: America/Los_Angeles}
observations: {file: observations.csv}
fleet: fleet.yaml
"""

FLEET = """\
# yaml-language-server: $schema=fleet.schema.json
schema: 1
defaults: {near_band_ft: 500, deadband_ft: 150, off_delay_min: 10}
aircraft:
  - id: trainer-2
    name: Two-seat trainer
    group: Flying school
    operations:
      - name: Departure
        max_density_altitude_ft: 6350
        basis: operator policy
        source: Operations manual 4.2
      - name: Solo circuits
        phase: local
        max_density_altitude_ft: 5600
        valid_from: 2026-06-01
        valid_until: 2026-09-30
        notice: Local order 7
  - id: tow-plane
    name: Tow plane
    operations:
      - name: Aerotow
        max_density_altitude_ft:
          by_weight_lb: {1950: 7400, 2200: 6950, 2450: 6550}
        max_temperature_c: 45
"""


def read_profile(text: str | bytes = PROFILE) -> Profile:
    """Read a profile that stands at `PROFILE_PATH`."""
    return profile_from_text(text, PROFILE_PATH)


def read_fleet(text: str | bytes = FLEET, *, acceptance: Acceptance = "simple") -> Fleet:
    """Read a fleet that stands at `FLEET_PATH`."""
    return fleet_from_text(text, FLEET_PATH, acceptance=acceptance)


def profile_faults(text: str | bytes) -> list[str]:
    """Return the faults of a profile that has some, as ``line: message``."""
    with pytest.raises(FileFaults) as caught:
        read_profile(text)
    assert {fault.file for fault in caught.value.faults} == {str(PROFILE_PATH)}
    return [f"{fault.line}: {fault.message}" for fault in caught.value.faults]


def fleet_faults(text: str | bytes) -> list[str]:
    """Return the faults of a fleet that has some, as ``line: message``."""
    with pytest.raises(FileFaults) as caught:
        read_fleet(text)
    assert {fault.file for fault in caught.value.faults} == {str(FLEET_PATH)}
    return [f"{fault.line}: {fault.message}" for fault in caught.value.faults]


def fleet_of(*operations: str, defaults: str = "{}") -> str:
    """Return a fleet of one aircraft, each operation given as the inside of ``{}``; the first stands in line 6."""
    lines = [f"      - {{{operation}}}" for operation in operations]
    head = ["schema: 1", f"defaults: {defaults}", "aircraft:", "  - id: glider", "    operations:"]
    return "\n".join([*head, *lines, ""])


def limits_of(*operations: str, defaults: str = "{}", acceptance: Acceptance = "simple") -> tuple[Limit, ...]:
    """Return all limits of a fleet of one aircraft, in the order of the file."""
    fleet = read_fleet(fleet_of(*operations, defaults=defaults), acceptance=acceptance)
    return tuple(limit for operation in fleet.aircraft[0].operations for limit in operation.limits)
