"""What the Margin page's plot shows: for each chosen operation its limit less the density altitude, over the day."""

from collections.abc import Sequence
from dataclasses import dataclass
from datetime import datetime
from typing import Literal

import numpy as np
from numpy.typing import NDArray

from airfield_board.clock import time_from_us, us_from_time
from airfield_board.configuration.differences import difference_in_unit, limit_in_unit
from airfield_board.configuration.model import Quantity
from airfield_board.limits.states import State
from airfield_board.session.board_state import DayCurve, LimitLine, OperationLine
from airfield_board.window.axes import STEP_FT, AltitudeAxis, HourMark, TimeAxis
from airfield_board.window.day_scene import Stretch

CHOSEN_AT_MOST = 8
CHOSEN_FIRST = 6


@dataclass(frozen=True, slots=True, kw_only=True)
class MarginStretch:
    """An unbroken part of a margin line; arrays of shape (n,).

    Attributes
    ----------
    seconds
        Since the start of the time axis.
    margin_ft
        Limit less density altitude.
    state
        `State.GO`, ``NEAR``, ``REDUCED`` or ``HOLD`` at each point, as its severity.
    """

    seconds: NDArray[np.float64]
    margin_ft: NDArray[np.float64]
    state: NDArray[np.int8]


@dataclass(frozen=True, slots=True, kw_only=True)
class MarginLine:
    """One operation's margin over the day, and now; ``now_ft`` None without trustworthy data."""

    key: str
    state: State
    stretches: tuple[MarginStretch, ...]
    now_ft: float | None


@dataclass(frozen=True, slots=True, kw_only=True)
class MarginScene:
    """The plot of the Margin page.

    Attributes
    ----------
    near_ft
        None where the chosen operations have different near bands.
    unit
        In which its margins are written, ``ft`` or ``m``.
    """

    margin: AltitudeAxis
    time: TimeAxis
    hours: tuple[HourMark, ...]
    lines: tuple[MarginLine, ...]
    near_ft: float | None
    observed: datetime | None
    now: datetime
    gap: bool
    unit: Literal["ft", "m"]


def plottable(row: OperationLine) -> bool:
    """Whether a row's margin can be drawn against the density altitude of the day."""
    line = row.shown
    return line is not None and line.quantity is Quantity.DENSITY_ALTITUDE and line.limit is not None


def limit_ft(line: LimitLine) -> float | None:
    """Return the limit in feet; None where it is no altitude or not known."""
    if line.limit is None or line.unit not in ("ft", "m"):
        return None
    return limit_in_unit(line.limit, line.quantity, line.unit, "ft")


def near_band_ft(line: LimitLine) -> float:
    """Return the near band in feet."""
    return difference_in_unit(line.near_band, line.unit, "ft")


def line_of(row: OperationLine, stretches: Sequence[Stretch], axis: TimeAxis, now_ft: float | None) -> MarginLine:
    """Return a row's margin line.

    Parameters
    ----------
    stretches
        The day's curve, thinned.
    now_ft
        The compared density altitude now; None without trustworthy data.
    """
    line = row.shown
    limit = limit_ft(line) if line is not None else None
    if line is None or limit is None:
        return MarginLine(key=row.key, state=row.state, stretches=(), now_ft=None)
    parts = []
    for stretch in stretches:
        margin_ft = limit - (stretch.high if line.guarded else stretch.value)
        state = np.where(margin_ft < near_band_ft(line), State.NEAR.severity, State.GO.severity).astype(np.int8)
        for span in line.spans:
            start_s = (us_from_time(span.start) - us_from_time(axis.start)) / 1e6
            end_s = (us_from_time(span.end) - us_from_time(axis.start)) / 1e6 if span.end is not None else np.inf
            state[(stretch.seconds >= start_s - 1e-6) & (stretch.seconds < end_s)] = span.state.severity
        parts.append(MarginStretch(seconds=stretch.seconds, margin_ft=margin_ft, state=state))
    return MarginLine(
        key=row.key,
        state=row.state,
        stretches=tuple(parts),
        now_ft=limit - now_ft if now_ft is not None else None,
    )


def lowest_margin(row: OperationLine, curve: DayCurve) -> tuple[float, datetime] | None:
    """Return a row's lowest margin of the day, in the limit's unit, and when; None where it cannot be told."""
    line = row.shown
    limit = limit_ft(line) if line is not None and plottable(row) else None
    if line is None or limit is None:
        return None
    compared_ft = curve.density_altitude_ft + (curve.uncertainty_ft if line.guarded else 0.0)
    if not np.isfinite(compared_ft).any():
        return None
    worst = int(np.nanargmax(compared_ft))
    margin_ft = limit - float(compared_ft[worst])
    return difference_in_unit(margin_ft, "ft", line.unit), time_from_us(int(curve.time_us[worst]))


def margin_range(lines: Sequence[MarginLine], near_ft: float) -> tuple[float, float]:
    """Return the ends of the margin axis, whole steps: zero, the near band and all lines are on it."""
    values = [0.0, near_ft]
    for line in lines:
        values += [float(part.margin_ft.min()) for part in line.stretches]
        values += [float(part.margin_ft.max()) for part in line.stretches]
        values += [line.now_ft] if line.now_ft is not None else []
    low, high = min(values), max(values)
    bottom = np.floor(low / STEP_FT) * STEP_FT
    top = np.ceil(high / STEP_FT) * STEP_FT
    if low - bottom < STEP_FT * 0.1:
        bottom -= STEP_FT
    return float(min(bottom, -STEP_FT)), float(max(top, 2 * STEP_FT))


def first_choice(rows: Sequence[OperationLine], curve: DayCurve) -> tuple[str, ...]:
    """Return the operations shown until somebody chooses: those nearest to the air last known, in the board's order."""
    drawable = [row for row in rows if plottable(row)]
    last_ft = float(curve.density_altitude_ft[-1]) if len(curve.time_us) else 0.0

    def distance_ft(row: OperationLine) -> float:
        limit = limit_ft(row.shown) if row.shown is not None else None
        return abs(limit - last_ft) if limit is not None else np.inf

    nearest = {row.key for row in sorted(drawable, key=distance_ft)[:CHOSEN_FIRST]}
    return tuple(row.key for row in drawable if row.key in nearest)
