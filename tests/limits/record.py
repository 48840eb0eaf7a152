"""Short records written by hand: a row is a minute and a value, taken as the checks and the session hand rows on."""

import json
from collections.abc import Iterable, Sequence
from dataclasses import dataclass, replace
from datetime import UTC, datetime
from typing import Literal
from zoneinfo import ZoneInfo

import numpy as np

from airfield_board.clock import us_from_time
from airfield_board.configuration.model import Aircraft, Limit, Operation, Quantity, Unit, WeightTable
from airfield_board.limits.in_force import Schedule, schedules_of
from airfield_board.limits.rules import JudgedRows, LimitJudge, LimitMemory
from airfield_board.limits.states import State
from airfield_board.observations.conditions import ConditionsTable
from airfield_board.units import MINUTE_US

ZONE = ZoneInfo("America/Los_Angeles")
START_US = us_from_time(datetime(2026, 7, 14, 15, 0, tzinfo=UTC))
"""Minute 0 of the records: 08:00 local."""

Kind = Literal["valid", "suspect", "rejected", "future"]


@dataclass(frozen=True, slots=True, kw_only=True)
class Row:
    """One observation after the checks; ``value`` is of the quantity under test, in the kind's own unit (ft, °C)."""

    minute: float
    value: float = float("nan")
    kind: Kind = "valid"
    confirmed: bool = False
    pressure_altitude_ft: float = 4000.0
    uncertainty: float = 0.0

    @property
    def time_us(self) -> int:
        return us_at(self.minute)


def us_at(minute: float) -> int:
    return START_US + round(minute * MINUTE_US)


def minute_of(time_us: int) -> float:
    return (time_us - START_US) / MINUTE_US


def valid(minute: float, value: float, *, pressure_altitude_ft: float = 4000.0, uncertainty: float = 0.0) -> Row:
    return Row(minute=minute, value=value, pressure_altitude_ft=pressure_altitude_ft, uncertainty=uncertainty)


def confirmed(minute: float, value: float) -> Row:
    """A valid row that confirms a step."""
    return Row(minute=minute, value=value, confirmed=True)


def suspect(minute: float, value: float, *, pressure_altitude_ft: float = 4000.0) -> Row:
    return Row(minute=minute, value=value, kind="suspect", pressure_altitude_ft=pressure_altitude_ft)


def rejected(minute: float) -> Row:
    return Row(minute=minute, kind="rejected")


def every(step_min: float, first: float, last: float, value: float) -> list[Row]:
    """Valid rows of one value from one minute to another, both included."""
    count = round((last - first) / step_min) + 1
    return [valid(first + place * step_min, value) for place in range(count)]


def limit_of(
    value: float = 6350.0,
    *,
    quantity: Quantity = Quantity.DENSITY_ALTITUDE,
    unit: Unit = "ft",
    near_band: float = 500.0,
    deadband: float = 150.0,
    off_delay_min: float = 10.0,
    guarded: bool = False,
) -> Limit:
    """An invented limit, with the program's own bands."""
    return Limit(
        quantity=quantity,
        unit=unit,
        value=value,
        near_band=near_band,
        deadband=deadband,
        off_delay_min=off_delay_min,
        guarded=guarded,
    )


def by_weight(
    points: dict[float, float],
    unit: Literal["lb", "kg"] = "lb",
    *,
    near_band: float = 500.0,
    deadband: float = 150.0,
    off_delay_min: float = 10.0,
) -> Limit:
    """A density-altitude limit by weight."""
    table = WeightTable(weight_unit=unit, weights=tuple(points), limits=tuple(points.values()))
    return replace(limit_of(near_band=near_band, deadband=deadband, off_delay_min=off_delay_min), value=table)


def schedule_of(*entries: Limit, zone: ZoneInfo = ZONE) -> Schedule:
    """The schedule of entries of one quantity."""
    operation = Operation(name="Departure", phase="departure", limits=entries)
    aircraft = Aircraft(id="trainer-2", name="Two-seat trainer", group="Flying school", operations=(operation,))
    (schedule,) = schedules_of(aircraft, operation, zone)
    return schedule


def conditions_of_rows(rows: Sequence[Row], quantity: Quantity) -> ConditionsTable:
    """Conditions in which only the quantity under test and the pressure altitude are known."""
    value = np.array([row.value for row in rows], dtype=np.float64)
    uncertainty = np.array([row.uncertainty for row in rows], dtype=np.float64)
    height_ft = np.array([row.pressure_altitude_ft for row in rows], dtype=np.float64)
    unknown = np.full(len(rows), np.nan)

    def known(*quantities: Quantity) -> np.ndarray:
        return value if quantity in quantities else unknown

    def sure(*quantities: Quantity) -> np.ndarray:
        return uncertainty if quantity in quantities else unknown

    return ConditionsTable(
        station_pressure_hpa=unknown,
        pressure_altitude_ft=value if quantity is Quantity.PRESSURE_ALTITUDE else height_ft,
        density_altitude_ft=known(Quantity.DENSITY_ALTITUDE),
        density_altitude_dry_ft=unknown,
        density_ratio=unknown,
        isa_deviation_c=known(Quantity.ISA_DEVIATION),
        temperature_c=known(Quantity.TEMPERATURE),
        uncertainty_ft=sure(Quantity.DENSITY_ALTITUDE),
        pressure_altitude_uncertainty_ft=sure(Quantity.PRESSURE_ALTITUDE),
        temperature_uncertainty_c=sure(Quantity.TEMPERATURE),
        isa_deviation_uncertainty_c=sure(Quantity.ISA_DEVIATION),
    )


class Desk:
    """Hands rows to one limit as the session does: restarts and moments of staleness reckoned row by row.

    Parameters
    ----------
    entries
        All of one quantity.
    stale_after_min
        As in a profile.
    """

    def __init__(self, *entries: Limit, stale_after_min: float = 15.0, zone: ZoneInfo = ZONE) -> None:
        self.judge = LimitJudge(schedule_of(*entries, zone=zone))
        self._quantity = entries[0].quantity
        self._stale_after_us = round(stale_after_min * MINUTE_US)
        self._last_valid_us: int | None = None
        self._stale = False

    def take(self, rows: Iterable[Row]) -> "Desk":
        """Take rows, and let time pass with each, used or not, but for times in the future."""
        chosen: list[Row] = []
        restart: list[bool] = []
        stale_at_us: list[int] = []
        passed_us = 0
        for row in rows:
            if row.kind == "future":
                continue
            passed_us = max(passed_us, row.time_us)
            if row.kind == "rejected":
                continue
            moment_us = self._moment_until(row.time_us)
            last_us = self._last_valid_us
            chosen.append(row)
            stale_at_us.append(moment_us or 0)
            gap = last_us is not None and row.time_us - last_us > 180 * MINUTE_US
            restart.append(row.kind == "valid" and (row.confirmed or gap))
            if row.kind == "valid":
                self._last_valid_us = row.time_us
                self._stale = False
        self.judge.judge(
            JudgedRows(
                time_us=np.array([row.time_us for row in chosen], dtype=np.int64),
                valid=np.array([row.kind == "valid" for row in chosen], dtype=np.bool_),
                restart=np.array(restart, dtype=np.bool_),
                stale_at_us=np.array(stale_at_us, dtype=np.int64),
                conditions=conditions_of_rows(chosen, self._quantity),
            )
        )
        after_us = self._moment_until(passed_us)
        if after_us is not None:
            self.judge.go_stale(after_us)
        return self

    def pass_to(self, minute: float) -> "Desk":
        """Let time pass with no row."""
        moment_us = self._moment_until(us_at(minute))
        if moment_us is not None:
            self.judge.go_stale(moment_us)
        return self

    def _moment_until(self, time_us: int) -> int | None:
        """The moment of staleness, where it lies before a time and was not told yet."""
        if self._last_valid_us is None or self._stale or time_us <= self._last_valid_us + self._stale_after_us:
            return None
        self._stale = True
        return self._last_valid_us + self._stale_after_us

    def reload(self) -> None:
        """Go on with the memory as a file keeps it."""
        text = json.dumps(self.judge.memory.to_json())
        self.judge = LimitJudge(self.judge.schedule, LimitMemory.from_json(json.loads(text)))

    @property
    def state(self) -> State | None:
        return self.judge.memory.state

    def changes(self) -> list[tuple[float, str]]:
        """Minute and new state of each change since last asked."""
        return [(minute_of(change.time_us), str(change.state)) for change in self.judge.take_changes()]


def changes_of(limit: Limit, *rows: Row | list[Row], stale_after_min: float = 15.0) -> list[tuple[float, str]]:
    """Minute and new state of each change that a record makes."""
    flat = [row for part in rows for row in (part if isinstance(part, list) else [part])]
    whole = Desk(limit, stale_after_min=stale_after_min).take(flat).changes()
    one_by_one = Desk(limit, stale_after_min=stale_after_min)
    for row in flat:
        one_by_one.take([row])
    assert one_by_one.changes() == whole
    return whole
