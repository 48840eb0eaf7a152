"""Invented boards for the window's tests: no real field, person, aircraft or product."""

from dataclasses import replace
from datetime import UTC, datetime, timedelta

import numpy as np

from airfield_board.clock import us_from_time
from airfield_board.configuration.model import Instruments, Quantity, Unit
from airfield_board.limits.states import State, worst
from airfield_board.observations.observation import DewpointUse
from airfield_board.session.board_state import (
    AircraftLine,
    AirfieldLine,
    BoardState,
    Clearing,
    Conditions,
    CurrentObservation,
    DayCurve,
    Freshness,
    LimitLine,
    Mode,
    OperationLine,
    Span,
    StatusChange,
)

LOCAL_MIDNIGHT = datetime(2026, 7, 16, 7, 0, tzinfo=UTC)  # 00:00 in Los Angeles, daylight saving time
DEADBAND_FT = 150.0
NEAR_FT = 500.0

# The day of the board: local hours and density altitudes in feet, invented.
DAY_SHAPE = (
    (0.0, 5230.0),
    (6.0, 5020.0),
    (7.0, 5090.0),
    (8.0, 5330.0),
    (9.0, 5560.0),
    (10.0, 5860.0),
    (11.0, 6200.0),
    (12.0, 6540.0),
    (13.0, 6790.0),
    (13.17, 6826.0),
    (14.0, 7010.0),
    (15.0, 7190.0),
    (15.83, 7272.0),
    (17.0, 7080.0),
    (18.0, 6640.0),
    (19.0, 6253.0),
    (20.0, 5960.0),
    (24.0, 5500.0),
)

FOURTEEN = (
    ("Turboprop single", "Departure", 9800.0),
    ("Turbine helicopter", "Hook load", 8750.0),
    ("Electric trainer", "Departure", 42.0),
    ("Six-seat utility", "Departure", 7900.0),
    ("Four-seat tourer, 2 up", "Departure", 7600.0),
    ("Piston helicopter", "Departure", 7300.0),
    ("Single-seat aerobatic", "Practice", 7150.0),
    ("Tow plane, single-seater", "Aerotow", 6950.0),
    ("Tow plane, two-seater", "Aerotow", 6760.0),
    ("Four-seat tourer, 4 up", "Departure", 6650.0),
    ("Motor glider", "Self-launch", 6450.0),
    ("Two-seat trainer", "Departure", 6350.0),
    ("Ultralight two-seat", "Departure", 5750.0),
    ("Two-seat trainer", "Solo circuits", 5600.0),
    ("Gyroplane", "Departure", None),
)

_MORE_NAMES = (
    ("Jump plane, turbine", "Full load"),
    ("Turboprop twin", "Departure"),
    ("Survey single", "Camera fit"),
    ("Cabin twin", "Departure"),
    ("Light twin", "Departure"),
    ("Four-seat retractable, 2 up", "Departure"),
    ("Tailwheel utility, 2 up", "Departure"),
    ("Spray plane, half hopper", "Departure"),
    ("Jump plane, piston, half load", "Departure"),
    ("Four-seat diesel, 3 up", "Departure"),
    ("Two-seat aerobatic", "Practice"),
    ("Four-seat tourer, 3 up", "Departure"),
    ("Six-seat utility, 6 up", "Departure"),
    ("Cabin twin", "One-engine limit"),
    ("Four-seat retractable, 4 up", "Departure"),
    ("Tailwheel utility, loaded", "Departure"),
    ("Jump plane, piston", "Full load"),
    ("Piston helicopter", "Full load, external hoist"),
    ("Light twin", "One-engine limit"),
    ("Spray plane, full hopper", "Departure"),
    ("Electric trainer", "Circuits"),
    ("Self-launch glider", "Self-launch"),
    ("Flex-wing trike", "Departure"),
    ("Powered parachute", "Departure"),
    ("Turbine helicopter, with a name that is much too long, hook load", "Departure"),
)


def local(hour: float) -> datetime:
    """Return a local time of the invented day in UTC."""
    return LOCAL_MIDNIGHT + timedelta(hours=hour)


def density_altitude_ft(hour: float) -> float:
    """Return the invented day's density altitude."""
    hours, values = zip(*DAY_SHAPE, strict=True)
    wave = 14.0 * np.sin(hour * 9.0) if 0.5 < (hour % 1.0) < 0.99 else 0.0
    return float(np.interp(hour, hours, values)) + float(wave)


def fleet(count: int) -> list[tuple[str, str, float | None]]:
    """Return so many invented operations with their limits, highest first."""
    if count <= len(FOURTEEN):
        return [*FOURTEEN[: count - 1], FOURTEEN[-1]]
    rows: list[tuple[str, str, float | None]] = list(FOURTEEN[:-1])
    extra = count - len(FOURTEEN)
    rows += [
        (name, operation, 10400.0 - round(index * 5200.0 / max(extra - 1, 1) / 50) * 50)
        for index, (name, operation) in enumerate(_MORE_NAMES[:extra])
    ]
    rows.sort(key=lambda row: -(8050.0 if row[2] == 42.0 else row[2] or 0.0))
    return [*rows, FOURTEEN[-1]]


def _limit_line(
    limit: float | None, air_ft: float, hour: float, *, since: datetime, weighted: bool, temporary: bool
) -> LimitLine:
    if limit is None:
        return LimitLine(
            quantity=Quantity.TEMPERATURE,
            unit="c",
            state=State.NO_DATA,
            limit=None,
            value=None,
            margin=None,
            since=since,
            reason="outside its table",
        )
    if limit == 42.0:
        return LimitLine(
            quantity=Quantity.TEMPERATURE,
            unit="c",
            state=State.GO,
            limit=42.0,
            value=30.4,
            margin=42.0 - 30.4,
            since=local(6.0),
            near_band=3.0,
            deadband=0.5,
            off_delay_min=10.0,
            hold_temperature_c=42.0,
            hold_above_c=42.0,
            axis_ft=8050.0,
            place_ft=8050.0,
        )
    spans, held = _spans(limit, hour)
    margin = limit - air_ft
    state = State.HOLD if held else State.NEAR if margin < NEAR_FT else State.GO
    clearing = None
    if held and weighted:
        state = State.REDUCED
    elif held:
        below = margin >= DEADBAND_FT
        clearing = Clearing(
            needs=limit - DEADBAND_FT,
            for_min=10.0,
            since=local(hour - 0.05) if below else None,
            earliest=local(hour - 0.05) + timedelta(minutes=10) if below else None,
        )
    rising = 12.0 < hour < 15.0
    unit: Unit = "ft"
    return LimitLine(
        quantity=Quantity.DENSITY_ALTITUDE,
        unit=unit,
        state=state,
        limit=limit,
        value=air_ft,
        margin=margin,
        since=spans[-1].start if held else local(6.0) if state is State.GO else local(hour - 0.5),
        near_band=NEAR_FT,
        hold_temperature_c=30.4 + margin / 105.0,
        hold_above_c=30.4 + margin / 105.0,
        greatest_weight=2414.0 if weighted else None,
        greatest_weight_lb=2414.0 if weighted else None,
        full_weight=2450.0 if weighted else None,
        weight_unit="lb" if weighted else "",
        axis_ft=limit,
        place_ft=limit,
        gone_by=local(hour + 0.4) if state is State.NEAR and rising and margin < 150 else None,
        clearing=clearing,
        eases_at=limit - DEADBAND_FT
        if state is State.REDUCED
        else limit - NEAR_FT - DEADBAND_FT
        if state is State.NEAR
        else None,
        deadband=DEADBAND_FT,
        off_delay_min=10.0,
        spans=tuple(
            Span(state=State.REDUCED if weighted else State.HOLD, start=span.start, end=span.end) for span in spans
        ),
        basis="operator policy",
        source="Operations manual 4.2",
        notice="Local order 7" if temporary else "",
        valid_until="2026-09-30" if temporary else "",
    )


def _spans(limit: float, hour: float) -> tuple[list[Span], bool]:
    spans: list[Span] = []
    started: datetime | None = None
    for tick in range(int(hour * 12) + 1):
        air_ft = density_altitude_ft(tick / 12)
        if started is None and air_ft > limit:
            started = local(tick / 12)
        elif started is not None and air_ft <= limit - DEADBAND_FT - 40:
            spans.append(Span(state=State.HOLD, start=started, end=local(tick / 12)))
            started = None
    if started is not None:
        spans.append(Span(state=State.HOLD, start=started, end=None))
    return spans, started is not None


def board(
    count: int = 15,
    hour: float = 13.0 + 20 / 60,
    *,
    age_min: float = 10.0,
    mode: Mode = Mode.LIVE,
    dewpoint: bool = True,
) -> BoardState:
    """Return a board of the invented day at a local hour, with its newest reading so old."""
    now = local(hour)
    seen = hour - age_min / 60
    air_ft = density_altitude_ft(seen)
    ticks = np.arange(0.0, seen + 1e-9, 1 / 12)
    if ticks[-1] < seen - 1e-9:
        ticks = np.append(ticks, seen)
    curve = DayCurve(
        time_us=np.array([us_from_time(local(float(tick))) for tick in ticks], dtype=np.int64),
        density_altitude_ft=np.array([density_altitude_ft(float(tick)) for tick in ticks]),
        uncertainty_ft=np.full(len(ticks), 58.0),
        day_start_us=us_from_time(local(0.0)),
        day_end_us=us_from_time(local(24.0)),
        unbroken_us=3_600_000_000,
    )
    peak = int(np.argmax(curve.density_altitude_ft))
    rows = [
        _row(name, operation, limit, air_ft, seen, index) for index, (name, operation, limit) in enumerate(fleet(count))
    ]
    observation = CurrentObservation(
        time=local(seen),
        age_min=age_min,
        freshness=Freshness.FRESH,
        altimeter_setting_hpa=1015.9,
        temperature_c=30.4,
        dewpoint_c=6.0 if dewpoint else None,
        dewpoint_used_c=6.0,
        dewpoint_use=DewpointUse.OBSERVED if dewpoint else DewpointUse.CARRIED,
        source="observations.csv",
        note="north end sensor",
        initials="",
    )
    conditions = Conditions(
        station_pressure_hpa=873.5,
        pressure_altitude_ft=4047.2,
        density_altitude_ft=air_ft,
        density_altitude_dry_ft=air_ft - 130.0,
        uncertainty_ft=58.0,
        isa_deviation_c=23.4,
        density_ratio=0.815,
        rate_ft_per_h=216.0 if hour < 15.5 else -444.0,
        peak_ft=float(curve.density_altitude_ft[peak]),
        peak_time=local(float(ticks[peak])),
        true_airspeed_ratio=1.108,
        shaft_power_ratio=0.7905,
    )
    return BoardState(
        mode=mode,
        airfield=AirfieldLine(name="Cinder Mesa", elevation_m=4120 * 0.3048, time_zone="America/Los_Angeles"),
        instruments=Instruments(
            altimeter_resolution_hpa=0.34,
            altimeter_accuracy_hpa=0.68,
            temperature_resolution_c=0.1,
            temperature_accuracy_c=0.5,
            dewpoint_resolution_c=0.1,
            dewpoint_accuracy_c=1.0,
        ),
        guarded=False,
        assessed_at=now,
        observation=observation,
        conditions=conditions,
        stale_after_min=60.0,
        ageing_after_min=20.0,
        aircraft=_aircraft(rows),
        operations=tuple(rows),
        curve=curve,
        changes=changes(now),
        settings_since=local(5.0),
    )


def _row(name: str, operation: str, limit: float | None, air_ft: float, hour: float, index: int) -> OperationLine:
    line = _limit_line(
        limit,
        air_ft,
        hour,
        since=local(6.0),
        weighted=name == "Tow plane, two-seater",
        temporary=operation == "Solo circuits",
    )
    return OperationLine(
        aircraft_id=f"{name.lower().replace(' ', '-').replace(',', '')}-{index}",
        aircraft_name=name,
        group="",
        name=operation,
        state=line.state,
        limits=(line,),
        shown=line,
    )


def _aircraft(rows: list[OperationLine]) -> tuple[AircraftLine, ...]:
    return tuple(
        AircraftLine(
            id=row.aircraft_id,
            name=row.aircraft_name,
            group=row.group,
            state=worst([row.state]),
            operations=(row,),
        )
        for row in rows
    )


def changes(now: datetime) -> tuple[StatusChange, ...]:
    """Return invented status changes, newest first; one of them is open."""
    steps = (
        (20, State.NEAR, State.GO, "Piston helicopter · Departure", ""),
        (30, State.REDUCED, State.NEAR, "Tow plane, two-seater · Aerotow", ""),
        (60, State.HOLD, State.NEAR, "Four-seat tourer, 4 up · Departure", ""),
        (90, State.HOLD, State.NEAR, "Motor glider · Self-launch", "MS"),
        (105, State.HOLD, State.NEAR, "Two-seat trainer · Departure", "MS"),
    )
    return tuple(
        StatusChange(
            number=90 - index,
            time=now - timedelta(minutes=minutes),
            state=state,
            was=was,
            label=label,
            needs_acknowledgement=state is State.HOLD,
            acknowledged_by=by,
            acknowledged_at=now - timedelta(minutes=minutes - 1) if by else None,
        )
        for index, (minutes, state, was, label, by) in enumerate(steps)
    )


def stale_board(count: int = 15) -> BoardState:
    """Return a board as the recorder gives it once the reading is stale: all NO DATA, with what was."""
    fresh = board(count, 14.0 + 50 / 60, age_min=76.0)
    assert fresh.observation is not None
    seen = fresh.observation.time
    rows = []
    for row in fresh.operations:
        assert row.shown is not None
        line = replace(
            row.shown,
            state=State.NO_DATA,
            value=None,
            margin=None,
            was=None if row.state is State.NO_DATA else row.state,
            was_at=None if row.state is State.NO_DATA else seen,
            since=seen + timedelta(minutes=60),
            hold_temperature_c=None,
            hold_above_c=None,
            greatest_weight=None,
            greatest_weight_lb=None,
            clearing=None,
            gone_by=None,
        )
        rows.append(replace(row, state=State.NO_DATA, shown=line, limits=(line,)))
    gone = StatusChange(
        number=95,
        time=seen + timedelta(minutes=60),
        state=State.NO_DATA,
        was=None,
        label=f"All {count} operations",
        needs_acknowledgement=True,
    )
    return replace(
        fresh,
        observation=replace(fresh.observation, freshness=Freshness.STALE),
        conditions=None,
        operations=tuple(rows),
        aircraft=_aircraft(rows),
        changes=(gone, *(replace(change, acknowledged_by="RK") for change in fresh.changes)),
    )


def empty_board(count: int = 15) -> BoardState:
    """Return a board before the first observation."""
    later = stale_board(count)
    rows = []
    for row in later.operations:
        assert row.shown is not None
        line = replace(row.shown, was=None, was_at=None, since=None, spans=(), reason="no observation")
        rows.append(replace(row, shown=line, limits=(line,)))
    curve = replace(
        later.curve,
        time_us=np.array([], dtype=np.int64),
        density_altitude_ft=np.array([], dtype=np.float64),
        uncertainty_ft=np.array([], dtype=np.float64),
    )
    return replace(later, observation=None, curve=curve, operations=tuple(rows), aircraft=_aircraft(rows), changes=())


def evening_board(count: int = 15) -> BoardState:
    """Return a board of the evening, with holds that are below their limit and not yet cleared."""
    return board(count, 19.0 + 10 / 60)
