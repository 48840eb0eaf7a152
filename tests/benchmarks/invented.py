"""An invented field with many operations, and invented records, for the benchmarks."""

from datetime import UTC, datetime, timedelta
from pathlib import Path

import numpy as np

OPERATIONS = 40

PROFILE = """\
schema: 1
airfield: {name: Benchmark Flat, elevation_ft: 4120, time_zone: America/Los_Angeles}
observations: {file: observations.csv, expected_every_min: 1, stale_after_min: 5}
fleet: fleet.yaml
history: history.db
"""


def write_field(folder: Path) -> Path:
    """Write a profile and a fleet of `OPERATIONS` operations; return the profile's path."""
    lines = ["schema: 1", "aircraft:"]
    for number in range(OPERATIONS):
        limit_ft = 3000 + 150 * number
        lines += [
            f"  - id: type-{number}",
            f"    name: Invented type {number}",
            f"    operations: [{{name: Departure, max_density_altitude_ft: {limit_ft}}}]",
        ]
    (folder / "fleet.yaml").write_text("\n".join(lines) + "\n", encoding="utf-8")
    profile = folder / "profile.yaml"
    profile.write_text(PROFILE, encoding="utf-8")
    return profile


def write_record(path: Path, rows: int, start: datetime = datetime(2025, 1, 1, tzinfo=UTC)) -> None:
    """Write one-minute rows with the run of days and seasons, and a sensor's noise."""
    rng = np.random.default_rng(20250101)
    minute = np.arange(rows)
    day = minute / 1440.0
    temperature_c = (
        12.0
        + 11.0 * np.sin(2 * np.pi * (day - 110) / 365.0)
        + 8.0 * np.sin(2 * np.pi * (day - 0.68))
        + rng.normal(0.0, 0.06, rows)
    )
    altimeter_hpa = 1015.0 + 6.0 * np.sin(2 * np.pi * day / 6.0) + rng.normal(0.0, 0.02, rows)
    dewpoint_c = np.minimum(3.0 + 3.0 * np.sin(2 * np.pi * day / 9.0), temperature_c - 1.0)
    with path.open("w", encoding="utf-8") as file:
        file.write("time,altimeter_hpa,temperature_c,dewpoint_c\n")
        for row in range(rows):
            when = start + timedelta(minutes=row)
            file.write(
                f"{when:%Y-%m-%dT%H:%M:%SZ},{altimeter_hpa[row]:.1f},{temperature_c[row]:.1f},{dewpoint_c[row]:.1f}\n"
            )
