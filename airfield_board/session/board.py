"""From the judge's memory to what a page shows; nothing is decided here."""

from collections.abc import Sequence
from datetime import datetime
from zoneinfo import ZoneInfo

import numpy as np

from airfield_board.atmosphere.air_cost import shaft_power_ratio, true_airspeed_ratio
from airfield_board.clock import local_day_bounds, time_from_us, us_from_time
from airfield_board.configuration.model import Aircraft, Operation
from airfield_board.limits.in_force import LimitKey
from airfield_board.limits.states import State, worst
from airfield_board.observations.conditions import standard_uncertainties
from airfield_board.observations.quality_judgement import FUTURE_US
from airfield_board.session.board_state import (
    AircraftLine,
    AirfieldLine,
    BoardState,
    Conditions,
    CurrentObservation,
    Freshness,
    LimitLine,
    Mode,
    OperationLine,
    Span,
)
from airfield_board.session.day_record import DayRecord
from airfield_board.session.judge import Judge
from airfield_board.session.limit_lines import LimitLines, TrustedAir, known
from airfield_board.units import MINUTE_US

_AGEING_INTERVALS = 2.0
_ABOVE, _BELOW, _FOOT = range(3)


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
    day_start_us, day_end_us = (us_from_time(bound) for bound in local_day_bounds(now, zone))
    air = _air(judge, record, now)
    stale_after_us = round(profile.observations.stale_after_min * MINUTE_US)
    curve = record.curve(day_start_us, day_end_us, stale_after_us)

    def spans(key: LimitKey) -> tuple[Span, ...]:
        return record.spans(key, day_start_us, day_end_us)

    lines = LimitLines(judge, air, us_from_time(now), spans)
    aircraft = tuple(_aircraft_line(each, lines) for each in judge.fleet.aircraft)
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
        operations=tuple(_in_board_order(rows)),
        curve=curve,
        unused=record.unused(day_start_us),
    )


def _air(judge: Judge, record: DayRecord, now: datetime) -> TrustedAir | None:
    row, stale_at_us = judge.current, judge.stale_at_us
    if row is None or stale_at_us is None:
        return None
    return TrustedAir(
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


def _observation(judge: Judge, air: TrustedAir, now: datetime) -> CurrentObservation:
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
        dewpoint_c=known(row.dewpoint_c),
        dewpoint_used_c=known(row.dewpoint_used_c),
        dewpoint_use=row.dewpoint_use,
        source=source,
        note=settings.note,
        initials=row.initials,
    )


def _conditions(air: TrustedAir, time_us: np.ndarray, density_altitude_ft: np.ndarray) -> Conditions:
    now = air.conditions
    here_ft, density_ratio = float(now.density_altitude_ft[0]), float(now.density_ratio[0])
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
        density_ratio=density_ratio,
        rate_ft_per_h=air.rate_ft_per_h,
        peak_ft=peak_ft,
        peak_time=time_from_us(peak_us),
        true_airspeed_ratio=true_airspeed_ratio(density_ratio),
        shaft_power_ratio=shaft_power_ratio(density_ratio),
    )


def _aircraft_line(aircraft: Aircraft, lines: LimitLines) -> AircraftLine:
    operations = tuple(_operation_line(aircraft, operation, lines) for operation in aircraft.operations)
    return AircraftLine(
        id=aircraft.id,
        name=aircraft.name,
        group=aircraft.group,
        state=worst(operation.state for operation in operations),
        operations=operations,
    )


def _operation_line(aircraft: Aircraft, operation: Operation, lines: LimitLines) -> OperationLine:
    limits = lines.of(aircraft, operation)
    return OperationLine(
        aircraft_id=aircraft.id,
        aircraft_name=aircraft.name,
        group=aircraft.group,
        name=operation.name,
        state=worst(limit.state for limit in limits),
        limits=limits,
        shown=min(limits, key=_shown_first, default=None),
    )


def _shown_first(line: LimitLine) -> tuple[int, float]:
    temperature = line.hold_temperature_c
    return -line.state.severity, np.inf if temperature is None else temperature


def _in_board_order(rows: Sequence[OperationLine]) -> list[OperationLine]:
    """Return the rows as they stand on the board.

    Above the level those that may go, and those of which that is not known, by the density altitude at which it ends,
    the highest first; below the level those that may not, likewise; at the foot those that have no such altitude.
    """

    def place(row: OperationLine) -> tuple[int, float]:
        if row.shown is None or row.shown.place_ft is None:
            return _FOOT, 0.0
        return _BELOW if row.state in (State.HOLD, State.REDUCED) else _ABOVE, -row.shown.place_ft

    return sorted(rows, key=place)
