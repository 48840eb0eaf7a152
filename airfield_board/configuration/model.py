"""Profile and fleet as the rest of the program sees them: read, checked, in one unit each, frozen."""

from dataclasses import dataclass
from datetime import date
from enum import StrEnum
from pathlib import Path
from typing import Literal


class Quantity(StrEnum):
    """What a limit is the greatest value of."""

    DENSITY_ALTITUDE = "density altitude"
    PRESSURE_ALTITUDE = "pressure altitude"
    TEMPERATURE = "temperature"
    ISA_DEVIATION = "ISA deviation"


Unit = Literal["ft", "m", "c", "f"]
Humidity = Literal["auto", "moist", "dry"]
Acceptance = Literal["simple", "guarded"]
Phase = Literal["departure", "arrival", "local"]
Basis = Literal["flight manual", "operator policy", "local order"]


@dataclass(frozen=True, slots=True, kw_only=True)
class WeightTable:
    """Limit by weight: at least two points, weights rising, limits falling, linear between, never beyond.

    Attributes
    ----------
    weight_unit
        Of the weights.
    weights
        Rising.
    limits
        In the unit of the limit.
    """

    weight_unit: Literal["lb", "kg"]
    weights: tuple[float, ...]
    limits: tuple[float, ...]


@dataclass(frozen=True, slots=True, kw_only=True)
class PressureAltitudeTable:
    """Temperature limit by pressure altitude: at least two points, altitudes rising, linear between, never beyond."""

    altitudes_ft: tuple[float, ...]
    limits: tuple[float, ...]


@dataclass(frozen=True, slots=True, kw_only=True)
class Limit:
    """One greatest value of one quantity, with the bands that belong to it.

    Attributes
    ----------
    quantity, unit
        What is limited, and the unit of the limit, the bands and the margin.
    value
        A number, or a table.
    near_band, deadband
        In ``unit`` (a band in °F is a difference).
    off_delay_min
        Least time at or below limit - deadband before a hold ends [min].
    guarded
        True: value + expanded uncertainty is compared.
    basis, source, notice
        What the limit rests on and where it stands; empty where the file is silent.
    valid_from, valid_until
        Local days on which the entry is in force, both included; None: open.
    """

    quantity: Quantity
    unit: Unit
    value: float | WeightTable | PressureAltitudeTable
    near_band: float
    deadband: float
    off_delay_min: float
    guarded: bool
    basis: str = ""
    source: str = ""
    notice: str = ""
    valid_from: date | None = None
    valid_until: date | None = None

    def in_force_on(self, day: date) -> bool:
        """Whether the entry counts on a local day."""
        return (self.valid_from is None or self.valid_from <= day) and (
            self.valid_until is None or day <= self.valid_until
        )


@dataclass(frozen=True, slots=True, kw_only=True)
class Operation:
    """What an aircraft does: a row of the board.

    Attributes
    ----------
    limits
        Of all the entries of this name, in the order of the file; several may be of one quantity: on each local day
        the lowest of those in force counts.
    """

    name: str
    phase: Phase
    limits: tuple[Limit, ...]


@dataclass(frozen=True, slots=True, kw_only=True)
class Aircraft:
    """A type, or one airframe."""

    id: str
    name: str
    group: str
    operations: tuple[Operation, ...]


@dataclass(frozen=True, slots=True, kw_only=True)
class Fleet:
    """All the aircraft of a fleet file.

    Attributes
    ----------
    path
        The file.
    text
        Its full text as read.
    sha256
        Of the file's bytes, hexadecimal.
    """

    path: Path
    text: str
    sha256: str
    aircraft: tuple[Aircraft, ...]


@dataclass(frozen=True, slots=True, kw_only=True)
class Instruments:
    """Resolutions and accuracies (half-width, 95 %) of the instruments."""

    altimeter_resolution_hpa: float
    altimeter_accuracy_hpa: float
    temperature_resolution_c: float
    temperature_accuracy_c: float
    dewpoint_resolution_c: float
    dewpoint_accuracy_c: float


@dataclass(frozen=True, slots=True, kw_only=True)
class ObservationSettings:
    """Where observations come from and how often.

    Attributes
    ----------
    file
        Absolute path of the observation file.
    file_as_written
        As the profile has it, for screens.
    station
        METAR station kept; empty: none named.
    time_zone
        Of times without an offset: an IANA name, the airfield's where the profile gives no other.
    """

    file: Path
    file_as_written: str
    station: str
    note: str
    time_zone: str
    poll_s: float
    expected_every_min: float
    stale_after_min: float
    instruments: Instruments


@dataclass(frozen=True, slots=True, kw_only=True)
class Profile:
    """An airfield profile.

    Attributes
    ----------
    elevation_m
        As the altimeter setting is defined with it: neither geometric nor geopotential is converted.
    elevation_unit
        The unit the file used, for screens.
    altimeter_unit, temperature_unit
        Units of the screens.
    history
        Path of the history file; None: the user's data folder.
    """

    path: Path
    text: str
    sha256: str
    name: str
    elevation_m: float
    elevation_unit: Literal["ft", "m"]
    latitude: float | None
    longitude: float | None
    time_zone: str
    altimeter_unit: Literal["inhg", "hpa"]
    temperature_unit: Literal["c", "f"]
    observations: ObservationSettings
    density_altitude: Humidity
    acceptance: Acceptance
    fleet_path: Path
    history: Path | None
