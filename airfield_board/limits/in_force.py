"""Which limits of an operation count on which local day, and as which numbers."""

from bisect import bisect_right
from collections.abc import Sequence
from dataclasses import dataclass
from datetime import date, timedelta
from typing import Literal, TypeAlias
from zoneinfo import ZoneInfo

import numpy as np
from numpy.typing import NDArray

from airfield_board.clock import start_of_local_day, us_from_time
from airfield_board.configuration.differences import difference_in_unit, limit_in_unit
from airfield_board.configuration.model import (
    Aircraft,
    Fleet,
    Limit,
    Operation,
    PressureAltitudeTable,
    Quantity,
    Unit,
    WeightTable,
)
from airfield_board.units import EQUAL, MINUTE_US, lb_from_kg

WeightUnit: TypeAlias = Literal["lb", "kg"]


@dataclass(frozen=True, slots=True, kw_only=True, order=True)
class LimitKey:
    """Names one limit of the fleet: all entries of one quantity of one operation."""

    aircraft: str
    operation: str
    quantity: Quantity


@dataclass(frozen=True, slots=True, kw_only=True)
class Standing:
    """The entries of one limit that count together, as numbers; the lowest rules.

    Attributes
    ----------
    unit
        That of the governing entry; all numbers here are in it.
    fixed
        Lowest limit at the greatest weight among numbers and tables by weight; None where there are only tables by
        pressure altitude.
    light_gain
        How much higher the limit at the least weight is, 0 where weight does not matter; of several tables the weight
        is the least that all of them have.
    tables
        Tables of temperature by pressure altitude, limits in ``unit``.
    weights
        Tables by weight, limits in ``unit``.
    near_band, deadband, off_delay_us
        The greatest among the entries that can be the lowest.
    guarded
        Whether value + uncertainty is compared.
    governing
        The entry whose limit is the lowest at the greatest weight.
    """

    quantity: Quantity
    unit: Unit
    fixed: float | None
    light_gain: float
    tables: tuple[PressureAltitudeTable, ...]
    weights: tuple[WeightTable, ...]
    near_band: float
    deadband: float
    off_delay_us: int
    guarded: bool
    governing: Limit

    def limit_at(self, pressure_altitude_ft: NDArray[np.float64]) -> tuple[NDArray[np.float64], NDArray[np.bool_]]:
        """Return the limit at the greatest weight, and where a table has no value.

        Parameters
        ----------
        pressure_altitude_ft
            Shape (n,).

        Returns
        -------
        tuple
            The lowest limit known, shape (n,), NaN where none is; and True where any table is left.
        """
        count = len(pressure_altitude_ft)
        limit = np.full(count, np.inf if self.fixed is None else self.fixed)
        outside = np.zeros(count, dtype=np.bool_)
        for table in self.tables:
            value = np.interp(pressure_altitude_ft, table.altitudes_ft, table.limits)
            left = (table.altitudes_ft[0] - pressure_altitude_ft >= EQUAL) | (
                pressure_altitude_ft - table.altitudes_ft[-1] >= EQUAL
            )
            outside |= left | np.isnan(pressure_altitude_ft)
            limit = np.minimum(limit, np.where(left, np.inf, value))
        limit[~np.isfinite(limit)] = np.nan
        return limit, outside

    def greatest_weight(self, value: float) -> tuple[float, float, WeightUnit] | None:
        """Return the greatest weight at which a value is within the limit.

        Parameters
        ----------
        value
            The compared value, in the limit's unit.

        Returns
        -------
        tuple or None
            Weight, the greatest weight of its table, and their unit; None for a limit without weights, or where no
            weight will do.
        """
        found: tuple[float, float, WeightUnit] | None = None
        for table in self.weights:
            if value - table.limits[0] >= EQUAL:
                return None
            # Limits fall as weight rises: np.interp wants rising abscissae, so both are turned round.
            weight = float(np.interp(value, table.limits[::-1], table.weights[::-1]))
            if found is None or weight_in_lb(weight, table.weight_unit) < weight_in_lb(found[0], found[2]):
                found = (weight, table.weights[-1], table.weight_unit)
        return found


def weight_in_lb(weight: float, unit: str) -> float:
    """Return a weight in pounds."""
    return lb_from_kg(weight) if unit == "kg" else weight


def _converted(entry: Limit, unit: Unit) -> Limit:
    """Return the entry in another unit of its quantity."""
    if entry.unit == unit:
        return entry

    def turned(limits: Sequence[float]) -> tuple[float, ...]:
        return tuple(limit_in_unit(limit, entry.quantity, entry.unit, unit) for limit in limits)

    value: float | WeightTable | PressureAltitudeTable
    match entry.value:
        case WeightTable() as table:
            value = WeightTable(weight_unit=table.weight_unit, weights=table.weights, limits=turned(table.limits))
        case PressureAltitudeTable() as table:
            value = PressureAltitudeTable(altitudes_ft=table.altitudes_ft, limits=turned(table.limits))
        case number:
            value = limit_in_unit(number, entry.quantity, entry.unit, unit)
    return Limit(
        quantity=entry.quantity,
        unit=unit,
        value=value,
        near_band=difference_in_unit(entry.near_band, entry.unit, unit),
        deadband=difference_in_unit(entry.deadband, entry.unit, unit),
        off_delay_min=entry.off_delay_min,
        guarded=entry.guarded,
        basis=entry.basis,
        source=entry.source,
        notice=entry.notice,
        valid_from=entry.valid_from,
        valid_until=entry.valid_until,
    )


def _at_greatest_weight(entry: Limit) -> float:
    match entry.value:
        case WeightTable() | PressureAltitudeTable() as table:
            return min(table.limits)
        case number:
            return number


def _at_weight(entry: Limit, weight_lb: float) -> float:
    """Return the limit at a weight, at the end of a table that does not reach there."""
    match entry.value:
        case WeightTable() as table:
            weights_lb = [weight_in_lb(weight, table.weight_unit) for weight in table.weights]
            return float(np.interp(weight_lb, weights_lb, table.limits))
        case _:
            return _at_greatest_weight(entry)


def _at_least_weight(entries: Sequence[Limit]) -> list[float]:
    """Return the limit of each entry at the least weight that all tables by weight have."""
    tables = [entry.value for entry in entries if isinstance(entry.value, WeightTable)]
    least_lb = max((weight_in_lb(table.weights[0], table.weight_unit) for table in tables), default=0.0)
    return [_at_weight(entry, least_lb) for entry in entries]


def standing_of(entries: Sequence[Limit]) -> Standing:
    """Put together the entries of one quantity that count on one day.

    Parameters
    ----------
    entries
        At least one, all of one quantity.

    Returns
    -------
    Standing
        Which entry is the lowest can depend on the weight or the pressure altitude, and two can be equal: the bands
        are then the greatest among those that can be the lowest, so that none of them is cut short.
    """
    unit = entries[0].unit
    alike = [_converted(entry, unit) for entry in entries]
    governing = min(range(len(alike)), key=lambda index: _at_greatest_weight(alike[index]))
    unit = entries[governing].unit
    alike = [_converted(entry, unit) for entry in entries]
    entry = alike[governing]
    tables = tuple(each.value for each in alike if isinstance(each.value, PressureAltitudeTable))
    weights = tuple(each.value for each in alike if isinstance(each.value, WeightTable))
    constant = [each for each in alike if not isinstance(each.value, PressureAltitudeTable)]
    fixed = min((_at_greatest_weight(each) for each in constant), default=None)
    light_gain = 0.0
    can_rule = alike
    if fixed is not None and not tables:
        at_least_weight = _at_least_weight(constant)
        lightest = min(at_least_weight)
        light_gain = lightest - fixed
        can_rule = [
            each
            for each, light in zip(constant, at_least_weight, strict=True)
            if _at_greatest_weight(each) - fixed < EQUAL or light - lightest < EQUAL
        ]
    return Standing(
        quantity=entry.quantity,
        unit=unit,
        fixed=fixed,
        light_gain=light_gain,
        tables=tables,
        weights=weights,
        near_band=max(each.near_band for each in can_rule),
        deadband=max(each.deadband for each in can_rule),
        off_delay_us=round(max(each.off_delay_min for each in can_rule) * MINUTE_US),
        guarded=any(each.guarded for each in alike),
        governing=entries[governing],
    )


@dataclass(frozen=True, slots=True, kw_only=True)
class Schedule:
    """One limit through the days.

    Attributes
    ----------
    key
        Which limit.
    edges_us
        Moments at which the entries in force change, rising; shape (m,).
    standings
        m + 1 entries; None where no entry is in force.
    """

    key: LimitKey
    edges_us: tuple[int, ...]
    standings: tuple[Standing | None, ...]

    def at(self, when_us: int) -> Standing | None:
        """Return what counts at a moment."""
        return self.standings[bisect_right(self.edges_us, when_us)]

    def newest_edge_us(self, when_us: int) -> int | None:
        """Return since when it counts; None where it always has."""
        place = bisect_right(self.edges_us, when_us)
        return self.edges_us[place - 1] if place else None


def _schedule(key: LimitKey, entries: Sequence[Limit], zone: ZoneInfo) -> Schedule:
    days: set[date] = set()
    for entry in entries:
        # The first and the last day of the calendar stand for "open": there is no day before or after them.
        if entry.valid_from is not None and entry.valid_from > date.min:
            days.add(entry.valid_from)
        if entry.valid_until is not None and entry.valid_until < date.max:
            days.add(entry.valid_until + timedelta(days=1))
    ordered = sorted(days)
    edges = tuple(us_from_time(start_of_local_day(day, zone)) for day in ordered)
    samples = [ordered[0] - timedelta(days=1), *ordered] if ordered else [date.min]
    standings: list[Standing | None] = []
    for day in samples:
        counting = [entry for entry in entries if entry.in_force_on(day)]
        standings.append(standing_of(counting) if counting else None)
    return Schedule(key=key, edges_us=edges, standings=tuple(standings))


def schedules_of(aircraft: Aircraft, operation: Operation, zone: ZoneInfo) -> tuple[Schedule, ...]:
    """One schedule for each quantity that an operation has limits of, in the order of the file."""
    quantities = dict.fromkeys(limit.quantity for limit in operation.limits)
    return tuple(
        _schedule(
            LimitKey(aircraft=aircraft.id, operation=operation.name, quantity=quantity),
            [limit for limit in operation.limits if limit.quantity is quantity],
            zone,
        )
        for quantity in quantities
    )


def fleet_schedules(fleet: Fleet, zone: ZoneInfo) -> tuple[Schedule, ...]:
    """All the limits of a fleet, in the order of its file."""
    return tuple(
        schedule
        for aircraft in fleet.aircraft
        for operation in aircraft.operations
        for schedule in schedules_of(aircraft, operation, zone)
    )
