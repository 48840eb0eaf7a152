"""From the judge's memory to what a page shows; nothing is decided here."""

from collections.abc import Callable, Sequence
from dataclasses import dataclass
from datetime import datetime, timedelta
from zoneinfo import ZoneInfo

import numpy as np

from airfield_board.clock import local_day, start_of_local_day, time_from_us, us_from_time
from airfield_board.configuration.model import Aircraft, Operation, Quantity
from airfield_board.limits.in_force import LimitKey, Standing, weight_in_lb
from airfield_board.limits.kinds import KINDS, Air, axis_ft
from airfield_board.limits.rules import LimitJudge, compared
from airfield_board.limits.states import State, worst
from airfield_board.observations.conditions import (
    ConditionsTable,
    StandardUncertainties,
    standard_uncertainties,
)
from airfield_board.observations.quality_judgement import FUTURE_US
from airfield_board.session.board_state import (
    AircraftLine,
    AirfieldLine,
    BoardState,
    Clearing,
    Conditions,
    CurrentObservation,
    Freshness,
    LimitLine,
    Mode,
    OperationLine,
    Span,
)
from airfield_board.session.day_record import DayRecord
from airfield_board.session.judge import CurrentRow, Judge
from airfield_board.units import HOUR_US, MINUTE_US, ft_from_m

_AGEING_INTERVALS = 2.0
_SECTIONS = {State.GO: 0, State.NEAR: 0, State.REDUCED: 1, State.HOLD: 1, State.NO_DATA: 2}


@dataclass(frozen=True, slots=True, kw_only=True)
class _Air:
    """The current observation's air, and whether it can be trusted now."""

    row: CurrentRow
    conditions: ConditionsTable
    trusted: bool
    rate_ft_per_h: float | None
    stale_at_us: int
    elevation_m: float
    uncertainties: StandardUncertainties

    def of(self, standing: Standing) -> Air:
        """Return what a hold temperature of a limit is reckoned with."""
        return Air(
            altimeter_hpa=self.row.altimeter_hpa,
            elevation_m=self.elevation_m,
            dewpoint_c=_known(self.row.dewpoint_used_c),
            guard=self.uncertainties if standing.guarded else None,
        )


def board_state(judge: Judge, record: DayRecord, mode: Mode, now: datetime) -> BoardState:
    """Make the board of a moment.

    Parameters
    ----------
    judge
        With time passed up to ``now``.
    record
        The day's curve and changes.
    now
        The recorder's time.

    Returns
    -------
    BoardState
        Without messages, status changes, settings and recording, which the recorder adds.
    """
    profile = judge.profile
    zone = ZoneInfo(profile.time_zone)
    today = local_day(now, zone)
    day_start_us = us_from_time(start_of_local_day(today, zone))
    day_end_us = us_from_time(start_of_local_day(today + timedelta(days=1), zone))
    air = _air(judge, record, now)
    curve = record.curve(day_start_us, day_end_us)

    def spans(key: LimitKey) -> tuple[Span, ...]:
        return record.spans(key, day_start_us, day_end_us)

    aircraft = tuple(_aircraft_line(each, judge, air, now, spans) for each in judge.fleet.aircraft)
    rows = [operation for each in aircraft for operation in each.operations]
    return BoardState(
        mode=mode,
        airfield=AirfieldLine(
            name=profile.name,
            elevation_m=profile.elevation_m,
            time_zone=profile.time_zone,
            altimeter_unit=profile.altimeter_unit,
            temperature_unit=profile.temperature_unit,
            altitude_unit=profile.elevation_unit,
        ),
        instruments=profile.observations.instruments,
        guarded=profile.acceptance == "guarded",
        assessed_at=now,
        observation=None if air is None else _observation(judge, air, now),
        conditions=None
        if air is None or not air.trusted
        else _conditions(air, curve.time_us, curve.density_altitude_ft),
        stale_after_min=profile.observations.stale_after_min,
        ageing_after_min=_AGEING_INTERVALS * profile.observations.expected_every_min,
        aircraft=aircraft,
        operations=tuple(_in_board_order(rows, air)),
        curve=curve,
        unused=record.unused(day_start_us),
    )


def _air(judge: Judge, record: DayRecord, now: datetime) -> _Air | None:
    row, stale_at_us = judge.current, judge.stale_at_us
    if row is None or stale_at_us is None:
        return None
    return _Air(
        row=row,
        conditions=judge.current_conditions(),
        # A clock that stands before the newest observation knows nothing of its age.
        trusted=not judge.stale and row.time_us - FUTURE_US <= us_from_time(now) <= stale_at_us,
        rate_ft_per_h=record.rate_ft_per_h(row.time_us),
        stale_at_us=stale_at_us,
        elevation_m=judge.profile.elevation_m,
        uncertainties=standard_uncertainties(
            judge.profile.observations.instruments, row.temperature_resolution_c, row.dewpoint_resolution_c
        ),
    )


def _observation(judge: Judge, air: _Air, now: datetime) -> CurrentObservation:
    settings = judge.profile.observations
    row = air.row
    age_min = (us_from_time(now) - row.time_us) / MINUTE_US
    freshness = Freshness.FRESH
    if age_min > _AGEING_INTERVALS * settings.expected_every_min:
        freshness = Freshness.AGEING
    if not air.trusted:
        freshness = Freshness.STALE
    source = f"{settings.station} in {settings.file_as_written}" if settings.station else settings.file_as_written
    return CurrentObservation(
        time=time_from_us(row.time_us),
        age_min=age_min,
        freshness=freshness,
        altimeter_setting_hpa=row.altimeter_hpa,
        temperature_c=row.temperature_c,
        dewpoint_c=_known(row.dewpoint_c),
        dewpoint_used_c=_known(row.dewpoint_used_c),
        dewpoint_use=row.dewpoint_use,
        source=source,
        note=settings.note,
        initials=row.initials,
    )


def _known(value: float) -> float | None:
    return None if np.isnan(value) else value


def _conditions(air: _Air, time_us: np.ndarray, density_altitude_ft: np.ndarray) -> Conditions:
    now = air.conditions
    here_ft = float(now.density_altitude_ft[0])
    peak_ft, peak_us = here_ft, air.row.time_us
    if len(density_altitude_ft) and float(density_altitude_ft.max()) > here_ft:
        top = int(density_altitude_ft.argmax())
        peak_ft, peak_us = float(density_altitude_ft[top]), int(time_us[top])
    return Conditions(
        station_pressure_hpa=float(now.station_pressure_hpa[0]),
        pressure_altitude_ft=float(now.pressure_altitude_ft[0]),
        density_altitude_ft=here_ft,
        density_altitude_dry_ft=float(now.density_altitude_dry_ft[0]),
        uncertainty_ft=float(now.uncertainty_ft[0]),
        isa_deviation_c=float(now.isa_deviation_c[0]),
        density_ratio=float(now.density_ratio[0]),
        rate_ft_per_h=air.rate_ft_per_h,
        peak_ft=peak_ft,
        peak_time=time_from_us(peak_us),
    )


def _aircraft_line(
    aircraft: Aircraft, judge: Judge, air: _Air | None, now: datetime, spans: Callable[[LimitKey], tuple[Span, ...]]
) -> AircraftLine:
    operations = tuple(_operation_line(aircraft, each, judge, air, now, spans) for each in aircraft.operations)
    return AircraftLine(
        id=aircraft.id,
        name=aircraft.name,
        group=aircraft.group,
        state=worst(operation.state for operation in operations),
        operations=operations,
    )


def _operation_line(
    aircraft: Aircraft,
    operation: Operation,
    judge: Judge,
    air: _Air | None,
    now: datetime,
    spans: Callable[[LimitKey], tuple[Span, ...]],
) -> OperationLine:
    lines: list[LimitLine] = []
    for quantity in dict.fromkeys(limit.quantity for limit in operation.limits):
        key = LimitKey(aircraft=aircraft.id, operation=operation.name, quantity=quantity)
        limit = judge.limits[key]
        standing = limit.schedule.at(us_from_time(now))
        if standing is not None:
            lines.append(_limit_line(limit, standing, air, spans(key)))
    return OperationLine(
        aircraft_id=aircraft.id,
        aircraft_name=aircraft.name,
        group=aircraft.group,
        name=operation.name,
        state=worst(line.state for line in lines),
        limits=tuple(lines),
        shown=min(lines, key=_shown_first, default=None),
    )


def _shown_first(line: LimitLine) -> tuple[int, float]:
    temperature = line.hold_temperature_c
    return -line.state.severity, np.inf if temperature is None else temperature


def _limit_line(limit: LimitJudge, standing: Standing, air: _Air | None, spans: tuple[Span, ...]) -> LimitLine:
    memory = limit.memory
    entry = standing.governing
    line = LimitLine(
        quantity=standing.quantity,
        unit=standing.unit,
        state=State.NO_DATA,
        limit=standing.fixed,
        value=None,
        margin=None,
        since=time_from_us(memory.since_us) if memory.state is not None else None,
        was=memory.was if memory.state is State.NO_DATA else memory.state,
        was_at=_was_at(limit),
        reason=memory.reason or "no observation yet",
        near_band=standing.near_band,
        spans=spans,
        guarded=standing.guarded,
        basis=entry.basis,
        source=entry.source,
        notice=entry.notice,
        valid_until="" if entry.valid_until is None else entry.valid_until.isoformat(),
        full_weight=standing.weights[0].weights[-1] if standing.weights else None,
        weight_unit=standing.weights[0].weight_unit if standing.weights else "",
    )
    if air is None:
        return line
    value, over = (float(column[0]) for column in compared(standing, air.conditions, 0, 1)[:2])
    known = _fields_of(line)
    if not np.isnan(over):
        known["limit"] = standing.fixed if not standing.tables and standing.fixed is not None else value - over
        known["axis_ft"] = axis_ft(KINDS[standing.quantity], value - over, standing.unit, air.of(standing))
    if not air.trusted or memory.state is None or memory.state is State.NO_DATA:
        if not air.trusted:
            known["reason"] = "no current observation"
        return LimitLine(**known)  # type: ignore[arg-type] # fields of a line, each by its name
    return LimitLine(**{**known, **_judged_fields(limit, standing, air, value, over)})  # type: ignore[arg-type]


def _was_at(limit: LimitJudge) -> datetime | None:
    memory = limit.memory
    at_us = memory.was_us if memory.state is State.NO_DATA else memory.last_us
    return time_from_us(at_us) if at_us else None


def _fields_of(line: LimitLine) -> dict[str, object]:
    return {name: getattr(line, name) for name in LimitLine.__slots__}


def _judged_fields(limit: LimitJudge, standing: Standing, air: _Air, value: float, over: float) -> dict[str, object]:
    memory = limit.memory
    state = memory.state
    held = state is State.HOLD
    full = value - over if standing.tables or standing.fixed is None else standing.fixed
    shown = full + standing.light_gain if held else full
    margin = shown - value
    weight = standing.greatest_weight(value) if not held else None
    found: dict[str, object] = {
        "state": state,
        "limit": shown,
        "value": value,
        "margin": margin,
        "reason": "",
        "was": None,
        "was_at": None,
        "axis_ft": axis_ft(KINDS[standing.quantity], shown, standing.unit, air.of(standing)),
        "hold_temperature_c": _hold_temperature_c(standing, air, shown),
        "hold_above_c": _hold_temperature_c(
            standing, air, full + standing.light_gain if state is State.REDUCED else shown
        ),
        "gone_by": _gone_by(standing, air, full - value),
    }
    if weight is not None:
        found["greatest_weight"], found["full_weight"], found["weight_unit"] = weight
        found["greatest_weight_lb"] = weight_in_lb(weight[0], weight[2])
    if held:
        earliest_us = limit.earliest_end_us(standing)
        found["clearing"] = Clearing(
            needs=shown - standing.deadband,
            for_min=limit.needed_delay_us(standing) / MINUTE_US,
            since=None if memory.run_us is None else time_from_us(memory.run_us),
            earliest=None if earliest_us is None else time_from_us(earliest_us),
        )
    return found


def _hold_temperature_c(standing: Standing, air: _Air, limit: float) -> float | None:
    """Temperature above which the compared value would exceed a limit, all else as observed."""
    temperature_c = KINDS[standing.quantity].hold_temperature_c(limit, standing.unit, air.of(standing))
    return None if temperature_c is None else _known(temperature_c)


def _gone_by(standing: Standing, air: _Air, margin: float) -> datetime | None:
    """When the present rate will have used up the margin, where that is before the reading goes stale."""
    if standing.quantity is not Quantity.DENSITY_ALTITUDE or air.rate_ft_per_h is None or air.rate_ft_per_h <= 0:
        return None
    margin_ft = margin if standing.unit == "ft" else ft_from_m(margin)
    if margin_ft < 0:
        return None
    at_us = air.row.time_us + margin_ft / air.rate_ft_per_h * HOUR_US
    return time_from_us(round(at_us)) if at_us < air.stale_at_us else None


def _in_board_order(rows: Sequence[OperationLine], air: _Air | None) -> list[OperationLine]:
    """Return the rows as they stand on the board.

    Above the level those that may go, by the density altitude at which that ends, the highest first; below it those
    that may not, likewise; at the foot those without data. With no data at all, by that altitude alone.
    """
    blank = all(row.state is State.NO_DATA for row in rows)

    def place(row: OperationLine) -> tuple[int, float]:
        section = 0
        if not blank:
            section = _SECTIONS[row.state]
        return section, -_axis_of(row, air)

    return sorted(rows, key=place)


def _axis_of(row: OperationLine, air: _Air | None) -> float:
    shown = row.shown
    if shown is None:
        return -np.inf
    if shown.axis_ft is not None:
        return shown.axis_ft
    if shown.quantity is Quantity.DENSITY_ALTITUDE and shown.limit is not None:
        return shown.limit if shown.unit == "ft" else ft_from_m(shown.limit)
    if air is None or shown.margin is None:
        return -np.inf
    # A limit of pressure altitude has no place on the axis; its margin gives it a place in the list.
    margin_ft = shown.margin if shown.unit == "ft" else ft_from_m(shown.margin)
    return float(air.conditions.density_altitude_ft[0]) + margin_ft
