"""What the window shows: one frozen value, made by the recorder, read by the pages, the table and the JSON alike.

Numbers are unrounded and end in their unit; times are aware UTC. Missing is None.
"""

from collections.abc import Iterable
from dataclasses import dataclass
from datetime import datetime
from enum import StrEnum
from typing import Literal

import numpy as np
from numpy.typing import NDArray

from airfield_board.configuration.model import Instruments, Quantity, Unit
from airfield_board.configuration.setting_changes import SettingChange as SettingChange
from airfield_board.limits.states import State
from airfield_board.observations.observation import DewpointUse


class Mode(StrEnum):
    """What the board is fed with."""

    LIVE = "live"
    DEMO = "demo"
    TRAINING = "training"
    PAST = "past"


class Freshness(StrEnum):
    """How far the newest valid observation can be trusted to be of now."""

    FRESH = "fresh"
    AGEING = "ageing"
    STALE = "stale"
    MISSING = "missing"


@dataclass(frozen=True, slots=True, kw_only=True)
class AirfieldLine:
    """Whose board it is.

    Attributes
    ----------
    time_zone
        IANA name; local times are reckoned with it on the screen.
    altimeter_unit, temperature_unit, altitude_unit
        What the screens show.
    """

    name: str
    elevation_m: float
    time_zone: str
    altimeter_unit: Literal["inhg", "hpa"] = "inhg"
    temperature_unit: Literal["c", "f"] = "c"
    altitude_unit: Literal["ft", "m"] = "ft"


@dataclass(frozen=True, slots=True, kw_only=True)
class CurrentObservation:
    """The newest valid observation, whatever its age.

    Attributes
    ----------
    dewpoint_c
        As observed; None where the row has none.
    dewpoint_used_c, dewpoint_use
        What counted for humidity, and where it came from.
    source, note
        The file's name as the profile has it, or the station; what the profile says about it.
    initials
        Of the person who typed it in; empty for the file's.
    """

    time: datetime
    age_min: float
    freshness: Freshness
    altimeter_setting_hpa: float
    temperature_c: float
    dewpoint_c: float | None
    dewpoint_used_c: float | None
    dewpoint_use: DewpointUse
    source: str
    note: str
    initials: str


@dataclass(frozen=True, slots=True, kw_only=True)
class Conditions:
    """The air, from the current observation.

    Attributes
    ----------
    uncertainty_ft
        Expanded (k = 2), of the density altitude.
    rate_ft_per_h
        Of the density altitude over the last valid observations; None with fewer than two within an hour.
    peak_ft, peak_time
        Highest density altitude of the local day so far.
    true_airspeed_ratio
        True airspeed over the indicated one, by the density alone.
    shaft_power_ratio
        Of a normally aspirated engine, over its power in the standard atmosphere at sea level.
    """

    station_pressure_hpa: float
    pressure_altitude_ft: float
    density_altitude_ft: float
    density_altitude_dry_ft: float
    uncertainty_ft: float
    isa_deviation_c: float
    density_ratio: float
    rate_ft_per_h: float | None
    peak_ft: float
    peak_time: datetime
    true_airspeed_ratio: float
    shaft_power_ratio: float


@dataclass(frozen=True, slots=True, kw_only=True)
class Span:
    """A stretch of time a limit spent in HOLD or REDUCED, of the day shown; ``end`` None while it lasts."""

    state: State
    start: datetime
    end: datetime | None


@dataclass(frozen=True, slots=True, kw_only=True)
class Clearing:
    """What ends a hold.

    Attributes
    ----------
    needs
        The value to be at or below, in the limit's unit.
    for_min
        How long.
    since
        Start of the present unbroken run at or below it; None where there is none.
    earliest
        When the rules would end the hold if the run went on; None without a run.
    """

    needs: float
    for_min: float
    since: datetime | None
    earliest: datetime | None


@dataclass(frozen=True, slots=True, kw_only=True)
class LimitLine:
    """One limit of one operation, judged.

    Attributes
    ----------
    state
        As the board shows it.
    limit, margin
        At the greatest weight, in HOLD at the least; None where there is nothing to compare.
    value
        The compared value (with guarded acceptance value + uncertainty), in ``unit``.
    since
        Since when ``state``; None before the first valid observation.
    was, was_at
        In NO DATA: the last state before it, and the observation that gave it.
    reason
        In NO DATA: why, in a few words ("outside its table", "no observation", "suspect reading").
    hold_temperature_c
        Above it ``limit`` would be exceeded at the current altimeter setting and dew point; None for a limit on
        pressure altitude, and in NO DATA.
    hold_above_c
        The same for the screens: in REDUCED of the limit at the least weight, since that one ends in HOLD.
    greatest_weight_lb, greatest_weight
        Greatest weight that may depart now, of a limit by weight: in pounds, and in ``weight_unit``.
    full_weight
        The greatest weight of its table, in ``weight_unit``.
    axis_ft
        Density altitude at which the limit is reached now; None where it has no place on the axis.
    place_ft
        Density altitude by which the row finds its place among the others: ``axis_ft``, or for a limit on pressure
        altitude the present one and the margin; None: at the foot.
    gone_by
        When the present rate will have used up the margin, where that is before the reading goes stale.
    eases_at
        In NEAR LIMIT and REDUCED: the value at or below which the next better state comes, in ``unit``.
    deadband, off_delay_min
        That a hold of this limit clears by: in ``unit``, and [min].
    spans
        Of the day shown.
    basis, source, notice, valid_from, valid_until
        As in the fleet file; the days as ISO days, empty where open.
    """

    quantity: Quantity
    unit: Unit
    state: State
    limit: float | None
    value: float | None
    margin: float | None
    since: datetime | None
    was: State | None = None
    was_at: datetime | None = None
    reason: str = ""
    near_band: float = 0.0
    hold_temperature_c: float | None = None
    hold_above_c: float | None = None
    greatest_weight_lb: float | None = None
    greatest_weight: float | None = None
    full_weight: float | None = None
    weight_unit: Literal["lb", "kg", ""] = ""
    axis_ft: float | None = None
    place_ft: float | None = None
    gone_by: datetime | None = None
    clearing: Clearing | None = None
    eases_at: float | None = None
    deadband: float = 0.0
    off_delay_min: float = 0.0
    spans: tuple[Span, ...] = ()
    guarded: bool = False
    basis: str = ""
    source: str = ""
    notice: str = ""
    valid_from: str = ""
    valid_until: str = ""


@dataclass(frozen=True, slots=True, kw_only=True)
class OperationLine:
    """A row of the board.

    Attributes
    ----------
    limits
        Of the day, in the order of the fleet file; empty where no limit is in force.
    shown
        The limit that the row shows: the worst, of equal ones that with the lowest hold temperature; None if none.
    """

    aircraft_id: str
    aircraft_name: str
    group: str
    name: str
    state: State
    limits: tuple[LimitLine, ...]
    shown: LimitLine | None

    @property
    def key(self) -> str:
        """Stable name of the row."""
        return f"{self.aircraft_id}/{self.name}"


@dataclass(frozen=True, slots=True, kw_only=True)
class AircraftLine:
    """An aircraft, the worst of its operations, and its operations in the order of the fleet file."""

    id: str
    name: str
    group: str
    state: State
    operations: tuple[OperationLine, ...]


@dataclass(frozen=True, slots=True, kw_only=True)
class StatusChange:
    """A change of an operation's shown state.

    Attributes
    ----------
    number
        Of the record in the history; names the change when it is acknowledged.
    label
        What it is about: "Tow plane · Aerotow", or "All 15 operations".
    needs_acknowledgement
        A change to HOLD or NO DATA.
    acknowledged_by, acknowledged_at
        Initials and time; empty and None while nobody has.
    """

    number: int
    time: datetime
    state: State
    was: State | None
    label: str
    needs_acknowledgement: bool
    acknowledged_by: str = ""
    acknowledged_at: datetime | None = None

    @property
    def open(self) -> bool:
        """Whether somebody must still acknowledge it."""
        return self.needs_acknowledgement and not self.acknowledged_by


@dataclass(frozen=True, slots=True, kw_only=True, eq=False)
class DayCurve:
    """The local day's valid observations, for the plot; arrays of shape (n,), read-only.

    Two are equal only if they are the same one: arrays have no single answer to whether they are equal.

    Attributes
    ----------
    time_us
        UTC microseconds.
    density_altitude_ft, uncertainty_ft
        Of each.
    day_start_us, day_end_us
        First moment of the local day and of the next.
    unbroken_us
        Longest time between two observations that hang together; over it there was no data in between.
    """

    time_us: NDArray[np.int64]
    density_altitude_ft: NDArray[np.float64]
    uncertainty_ft: NDArray[np.float64]
    day_start_us: int
    day_end_us: int
    unbroken_us: int


class Weight(StrEnum):
    """How loud a message is; the louder ones come later."""

    NOTE = "note"
    WARNING = "warning"
    ALARM = "alarm"


@dataclass(frozen=True, slots=True, kw_only=True)
class Message:
    """Something the user should know, in plain words.

    Attributes
    ----------
    topic
        ``source``, ``settings``, ``recording``, ``rows``, ``observation``.
    text
        One sentence or a few lines; plain text.
    """

    topic: Literal["source", "settings", "recording", "rows", "observation"]
    weight: Weight
    text: str
    time: datetime | None = None


def loudest_first(messages: Iterable[Message]) -> tuple[Message, ...]:
    """Return messages in the order of their weights, alarms first."""
    return tuple(sorted(messages, key=lambda message: list(Weight).index(message.weight), reverse=True))


@dataclass(frozen=True, slots=True, kw_only=True)
class BoardState:
    """All that a page shows.

    Attributes
    ----------
    assessed_at
        The recorder's time when it was made.
    observation
        None before the first valid one.
    conditions
        None where there is no trustworthy observation: then every state is NO DATA.
    stale_after_min, ageing_after_min
        Ages at which the reading becomes stale, and ageing.
    operations
        All the rows, in the order of the board: by ``axis_ft`` of the shown limit, highest first; those without a
        place on the axis at the foot.
    changes
        Newest first; those of this local day and all that still wait for acknowledgement.
    unused
        Newest first: time and reason of the day's rows that were not used.
    waiting
        Loosened settings that wait for acceptance by name.
    settings_refused
        The faults of a changed file that is not in force; empty otherwise.
    settings_since
        When the settings in force were taken.
    recording
        Whether the history takes what happens; ``not_recording`` says why not.
    poll_s
        How often the source is to be read [s], as the profile in force has it.
    """

    mode: Mode
    airfield: AirfieldLine
    instruments: Instruments
    guarded: bool
    assessed_at: datetime
    observation: CurrentObservation | None
    conditions: Conditions | None
    stale_after_min: float
    ageing_after_min: float
    aircraft: tuple[AircraftLine, ...]
    operations: tuple[OperationLine, ...]
    curve: DayCurve
    changes: tuple[StatusChange, ...] = ()
    messages: tuple[Message, ...] = ()
    unused: tuple[tuple[datetime | None, str], ...] = ()
    waiting: tuple[SettingChange, ...] = ()
    settings_refused: str = ""
    settings_since: datetime | None = None
    recording: bool = True
    not_recording: str = ""
    poll_s: float = 5.0
