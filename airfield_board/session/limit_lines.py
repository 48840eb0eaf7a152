"""All the limits of a fleet as the board shows them, from the judge's memory; nothing is decided here."""

from collections.abc import Callable, Iterable
from dataclasses import dataclass
from datetime import datetime
from typing import Any, NamedTuple, TypeAlias

import numpy as np

from airfield_board.clock import time_from_us
from airfield_board.configuration.differences import difference_in_unit
from airfield_board.configuration.model import Aircraft, Operation, Quantity, Unit
from airfield_board.limits.comparison import compared, full_limit
from airfield_board.limits.in_force import LimitKey, Standing, weight_in_lb
from airfield_board.limits.kinds import KINDS, Air, axis_ft
from airfield_board.limits.rules import LimitJudge
from airfield_board.limits.states import State
from airfield_board.observations.conditions import ConditionsTable, StandardUncertainties
from airfield_board.session.board_state import Clearing, LimitLine, Span
from airfield_board.session.judge import CurrentRow, Judge
from airfield_board.units import HOUR_US, MINUTE_US


@dataclass(frozen=True, slots=True, kw_only=True)
class TrustedAir:
    """The current observation's air, and whether it can be trusted now."""

    row: CurrentRow
    conditions: ConditionsTable
    trusted: bool
    rate_ft_per_h: float | None
    stale_at_us: int
    elevation_m: float
    uncertainties: StandardUncertainties


class _Group(NamedTuple):
    """Limits whose hold temperatures are reckoned together."""

    quantity: Quantity
    unit: Unit
    guarded: bool


class _Place(NamedTuple):
    """Where a limit is reached in the present air; None where temperature does not matter."""

    hold_temperature_c: float | None
    axis_ft: float | None


class _Now(NamedTuple):
    """A limit's numbers in the present air: the limits at the greatest and the least weight, the compared value."""

    full: float
    light: float
    value: float


_NOWHERE = _Place(None, None)
_Line: TypeAlias = dict[str, Any]
"""The fields of a `LimitLine` while it is put together: one object made at the end costs a tenth of several."""


def known(value: float) -> float | None:
    """Return a number, or None for one that is not known."""
    return value if np.isfinite(value) else None


class LimitLines:
    """Makes the lines of all limits, with everything that can be reckoned for many at once.

    Parameters
    ----------
    judge
        With time passed up to now.
    air
        None before the first valid observation.
    now_us
        The recorder's time.
    spans
        A limit's stretches of HOLD and REDUCED in the day shown.
    """

    def __init__(
        self, judge: Judge, air: TrustedAir | None, now_us: int, spans: Callable[[LimitKey], tuple[Span, ...]]
    ) -> None:
        self._judge = judge
        self._air = air
        self._now_us = now_us
        self._suspects = judge.suspect_conditions()
        self._spans = spans
        self._standings = {
            key: standing for key, limit in judge.limits.items() if (standing := limit.schedule.at(now_us)) is not None
        }
        self._now: dict[LimitKey, _Now] = {}
        self._places: dict[tuple[_Group, float], _Place] = {}
        if air is not None:
            self._now = {
                key: found
                for key, standing in self._standings.items()
                if (found := _numbers_now(standing, air.conditions)) is not None
            }
            self._places = _places(self._wanted(), air)

    def _wanted(self) -> Iterable[tuple[_Group, float]]:
        for key, now in self._now.items():
            group = _group(self._standings[key])
            yield group, now.full
            yield group, now.light

    def of(self, aircraft: Aircraft, operation: Operation) -> tuple[LimitLine, ...]:
        """Return the lines of the limits in force of an operation, in the order of the fleet file."""
        keys = dict.fromkeys(
            LimitKey(aircraft=aircraft.id, operation=operation.name, quantity=limit.quantity)
            for limit in operation.limits
        )
        return tuple(self._line(key) for key in keys if key in self._standings)

    def _line(self, key: LimitKey) -> LimitLine:
        limit, standing = self._judge.limits[key], self._standings[key]
        air, now = self._air, self._now.get(key)
        if air is not None and air.trusted:
            limit = limit.as_of(self._now_us, air.conditions, self._suspects)
        line = _unjudged(limit, standing, self._spans(key))
        if air is not None and now is not None:
            place = self._place(standing, now.full)
            line |= {"limit": now.full, "axis_ft": place.axis_ft, "place_ft": place.axis_ft}
            if not air.trusted:
                line["reason"] = "no current observation"
            elif limit.memory.state not in (None, State.NO_DATA):
                line |= self._judged(limit, standing, air, now)
        return LimitLine(**line)

    def _place(self, standing: Standing, limit: float) -> _Place:
        return self._places.get((_group(standing), limit), _NOWHERE)

    def _judged(self, limit: LimitJudge, standing: Standing, air: TrustedAir, now: _Now) -> _Line:
        held = limit.memory.state is State.HOLD
        shown = now.light if held else now.full
        place = self._place(standing, shown)
        above = self._place(standing, now.light) if limit.memory.state is State.REDUCED else place
        line: _Line = {
            "state": limit.memory.state,
            "limit": shown,
            "value": now.value,
            "margin": shown - now.value,
            "reason": "",
            "was": None,
            "was_at": None,
            "axis_ft": place.axis_ft,
            "place_ft": _place_ft(standing, air, place, shown - now.value),
            "hold_temperature_c": place.hold_temperature_c,
            "hold_above_c": above.hold_temperature_c,
            "gone_by": _gone_by(standing, air, now.full - now.value),
        }
        if held:
            line["clearing"] = _clearing(limit, standing, shown)
        else:
            line["eases_at"] = _eases_at(limit.memory.state, standing, now.full)
        if not held and (weight := standing.greatest_weight(now.value)) is not None:
            line["greatest_weight"], line["full_weight"], line["weight_unit"] = weight
            line["greatest_weight_lb"] = weight_in_lb(weight[0], weight[2])
        return line


def _place_ft(standing: Standing, air: TrustedAir, place: _Place, margin: float) -> float | None:
    if place.axis_ft is not None or standing.quantity is not Quantity.PRESSURE_ALTITUDE:
        return place.axis_ft
    return float(air.conditions.density_altitude_ft[0]) + difference_in_unit(margin, standing.unit, "ft")


def _group(standing: Standing) -> _Group:
    return _Group(standing.quantity, standing.unit, standing.guarded)


def _numbers_now(standing: Standing, conditions: ConditionsTable) -> _Now | None:
    """Return a limit's numbers; None where there is nothing to compare."""
    value, over, _ = (float(column[0]) for column in compared(standing, conditions, 0, 1))
    if np.isnan(over):
        return None
    full = full_limit(standing, value, over)
    return _Now(full, full + standing.light_gain, value)


def _places(wanted: Iterable[tuple[_Group, float]], air: TrustedAir) -> dict[tuple[_Group, float], _Place]:
    by_group: dict[_Group, dict[float, None]] = {}
    for group, limit in wanted:
        by_group.setdefault(group, {})[limit] = None
    found: dict[tuple[_Group, float], _Place] = {}
    for group, limits in by_group.items():
        present = Air(
            altimeter_hpa=air.row.altimeter_hpa,
            elevation_m=air.elevation_m,
            dewpoint_c=known(air.row.dewpoint_used_c),
            guard=air.uncertainties if group.guarded else None,
        )
        temperatures_c = KINDS[group.quantity].hold_temperature_c(np.array(list(limits)), group.unit, present)
        axes_ft = axis_ft(temperatures_c, present)
        for limit, temperature_c, altitude_ft in zip(limits, temperatures_c.tolist(), axes_ft.tolist(), strict=True):
            found[group, limit] = _Place(known(temperature_c), known(altitude_ft))
    return found


def _unjudged(limit: LimitJudge, standing: Standing, spans: tuple[Span, ...]) -> _Line:
    """Return the line of a limit without data: what is known of it all the same."""
    memory, entry = limit.memory, standing.governing
    lost = memory.state is State.NO_DATA
    return {
        "quantity": standing.quantity,
        "unit": standing.unit,
        "state": State.NO_DATA,
        "limit": standing.fixed,
        "value": None,
        "margin": None,
        "since": None if memory.state is None else time_from_us(memory.since_us),
        "was": memory.was if lost else memory.state,
        "was_at": _time_or_none(memory.was_us if lost else memory.last_us),
        "reason": memory.reason or "no observation yet",
        "near_band": standing.near_band,
        "spans": spans,
        "guarded": standing.guarded,
        "basis": entry.basis,
        "source": entry.source,
        "notice": entry.notice,
        "deadband": standing.deadband,
        "off_delay_min": standing.off_delay_us / MINUTE_US,
        "valid_from": "" if entry.valid_from is None else entry.valid_from.isoformat(),
        "valid_until": "" if entry.valid_until is None else entry.valid_until.isoformat(),
        "full_weight": standing.weights[0].weights[-1] if standing.weights else None,
        "weight_unit": standing.weights[0].weight_unit if standing.weights else "",
    }


def _time_or_none(when_us: int) -> datetime | None:
    return time_from_us(when_us) if when_us else None


def _clearing(limit: LimitJudge, standing: Standing, shown: float) -> Clearing:
    earliest_us = limit.earliest_end_us(standing)
    run_us = limit.memory.run_us
    return Clearing(
        needs=shown - standing.deadband,
        for_min=limit.needed_delay_us(standing) / MINUTE_US,
        since=None if run_us is None else time_from_us(run_us),
        earliest=None if earliest_us is None else time_from_us(earliest_us),
    )


def _eases_at(state: State | None, standing: Standing, full: float) -> float | None:
    """Return the value at or below which a limit outside a hold becomes better."""
    if state is State.REDUCED:
        return full - standing.deadband
    return full - standing.near_band - standing.deadband if state is State.NEAR else None


def _gone_by(standing: Standing, air: TrustedAir, margin: float) -> datetime | None:
    """When the present rate will have used up the margin, where that is before the reading goes stale."""
    if standing.quantity is not Quantity.DENSITY_ALTITUDE or air.rate_ft_per_h is None or air.rate_ft_per_h <= 0:
        return None
    margin_ft = difference_in_unit(margin, standing.unit, "ft")
    if margin_ft < 0:
        return None
    at_us = air.row.time_us + margin_ft / air.rate_ft_per_h * HOUR_US
    return time_from_us(round(at_us)) if at_us < air.stale_at_us else None
