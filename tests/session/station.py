"""An invented field made in memory, and tables of rows for its judge."""

from collections.abc import Sequence
from dataclasses import dataclass, replace
from datetime import date
from pathlib import Path

import numpy as np

from airfield_board.configuration.model import (
    Aircraft,
    Fleet,
    Humidity,
    Instruments,
    Limit,
    ObservationSettings,
    Operation,
    PressureAltitudeTable,
    Profile,
    Quantity,
)
from airfield_board.observations.observation import ObservationTable
from tests.limits.record import ZONE, by_weight, limit_of, us_at

NAN = float("nan")
ELEVATION_M = 1255.776
"""4,120 ft."""


@dataclass(frozen=True, slots=True, kw_only=True)
class Sent:
    """A row as the station sends it."""

    minute: float
    temperature_c: float = 20.0
    altimeter_hpa: float = 1013.2
    dewpoint_c: float = NAN
    elevation_m: float = NAN
    fault: str = ""

    @property
    def time_us(self) -> int:
        return us_at(self.minute)


def table_of(rows: Sequence[Sent]) -> ObservationTable:
    def column(values: list[float]) -> np.ndarray:
        return np.array(values, dtype=np.float64)

    unstated = np.full(len(rows), np.nan)
    return ObservationTable(
        time_us=np.array([row.time_us for row in rows], dtype=np.int64),
        altimeter_hpa=column([row.altimeter_hpa for row in rows]),
        temperature_c=column([row.temperature_c for row in rows]),
        dewpoint_c=column([row.dewpoint_c for row in rows]),
        elevation_m=column([row.elevation_m for row in rows]),
        temperature_resolution_c=unstated,
        dewpoint_resolution_c=unstated,
        position=np.arange(len(rows), dtype=np.int64),
        raw=[f"row {place}" for place in range(len(rows))],
        faults={place: row.fault for place, row in enumerate(rows) if row.fault},
    )


def profile_of(
    *, stale_after_min: float = 15.0, humidity: Humidity = "auto", elevation_m: float = ELEVATION_M
) -> Profile:
    """A profile with the program's own instruments (0.01 inHg are 0.3386 hPa)."""
    return Profile(
        path=Path("profile.yaml"),
        text="",
        sha256="",
        name="Thistle Bench",
        elevation_m=elevation_m,
        elevation_unit="ft",
        latitude=None,
        longitude=None,
        time_zone=str(ZONE),
        altimeter_unit="inhg",
        temperature_unit="c",
        observations=ObservationSettings(
            file=Path("observations.csv"),
            file_as_written="observations.csv",
            station="",
            note="",
            time_zone=str(ZONE),
            poll_s=5.0,
            expected_every_min=5.0,
            stale_after_min=stale_after_min,
            instruments=Instruments(
                altimeter_resolution_hpa=0.3386389,
                altimeter_accuracy_hpa=0.6772777,
                temperature_resolution_c=0.1,
                temperature_accuracy_c=0.5,
                dewpoint_resolution_c=0.1,
                dewpoint_accuracy_c=1.0,
            ),
        ),
        density_altitude=humidity,
        acceptance="simple",
        fleet_path=Path("fleet.yaml"),
        history=None,
    )


def fleet_of(**limits: Sequence[Limit]) -> Fleet:
    """A fleet of aircraft with one operation each."""
    aircraft = tuple(
        Aircraft(
            id=name,
            name=name,
            group="",
            operations=(Operation(name="Departure", phase="departure", limits=tuple(each)),),
        )
        for name, each in limits.items()
    )
    return Fleet(path=Path("fleet.yaml"), text="", sha256="", aircraft=aircraft)


HOT = PressureAltitudeTable(altitudes_ft=(3800.0, 4100.0, 4400.0), limits=(26.0, 24.0, 20.0))

# At 4,120 ft and 1013.2 hPa the dry air has about 6,000 ft at 23 °C, and 118 ft more with every degree.
FLEET = fleet_of(
    number=[limit_of(6000.0)],
    no_delay=[limit_of(6000.0, off_delay_min=0, near_band=200, deadband=50)],
    tow=[by_weight({1950: 6400, 2450: 5900}, near_band=150, deadband=60)],
    guarded=[limit_of(6150.0, guarded=True, near_band=100)],
    metres=[limit_of(1850.0, unit="m", near_band=50, deadband=20)],
    hot=[limit_of(24.0, quantity=Quantity.TEMPERATURE, unit="c", near_band=3, deadband=0.5, off_delay_min=30)],
    table=[replace(limit_of(quantity=Quantity.TEMPERATURE, unit="c", near_band=2, deadband=0.5), value=HOT)],
    warm=[limit_of(30.0, quantity=Quantity.ISA_DEVIATION, unit="f", near_band=5.4, deadband=0.9)],
    high=[limit_of(4130.0, quantity=Quantity.PRESSURE_ALTITUDE, near_band=30, deadband=10)],
    summer=[
        limit_of(6200.0, near_band=200, deadband=60),
        replace(limit_of(5900.0, near_band=200, deadband=60), valid_from=date(2026, 7, 15)),
    ],
    today=[replace(limit_of(6000.0), valid_until=date(2026, 7, 14))],
)
