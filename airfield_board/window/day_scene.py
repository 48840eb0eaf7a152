"""What the day plot shows, in a form that any painter can take; no pyqtgraph here, so that the rows need not wait."""

from dataclasses import dataclass
from datetime import datetime

import numpy as np
from numpy.typing import NDArray

from airfield_board.clock import us_from_time
from airfield_board.limits.states import State
from airfield_board.session.board_state import DayCurve, Span
from airfield_board.window.axes import AltitudeAxis, HourMark, TimeAxis


@dataclass(frozen=True, slots=True, kw_only=True)
class Shelf:
    """A row's limit as it lies on the plot."""

    key: str
    axis_ft: float
    state: State
    spans: tuple[Span, ...]
    callout: tuple[str, str]


@dataclass(frozen=True, slots=True, kw_only=True)
class DayScene:
    """The day plot.

    Attributes
    ----------
    level_ft
        The air's density altitude now; None where it is not known.
    observed
        Time of the newest observation; None before the first.
    gap
        Whether what lies between the newest observation and now is struck out as unknown.
    """

    altitude: AltitudeAxis
    time: TimeAxis
    hours: tuple[HourMark, ...]
    curve: DayCurve
    shelves: tuple[Shelf, ...]
    level_ft: float | None
    observed: datetime | None
    now: datetime
    gap: bool


@dataclass(frozen=True, slots=True, kw_only=True)
class Stretch:
    """An unbroken part of a curve, thinned to what the pixels can show; arrays of shape (n,).

    Attributes
    ----------
    seconds
        Since the start of the time axis.
    value, low, high
        In the unit of the curve; ``low`` and ``high`` with the uncertainty.
    """

    seconds: NDArray[np.float64]
    value: NDArray[np.float64]
    low: NDArray[np.float64]
    high: NDArray[np.float64]


def stretches_of(curve: DayCurve, axis: TimeAxis) -> list[Stretch]:
    """Return the unbroken parts of a curve that lie on a time axis, each thinned to its pixels.

    Of the points that share a pixel column the first, the lowest, the highest and the last stay, so that no peak is
    lost and the line costs the same at any number of observations.
    """
    usable = np.isfinite(curve.density_altitude_ft) & np.isfinite(curve.uncertainty_ft)
    usable &= (curve.time_us >= us_from_time(axis.start)) & (curve.time_us <= us_from_time(axis.end))
    time_us = curve.time_us[usable]
    if not len(time_us):
        return []
    value, spread = curve.density_altitude_ft[usable], curve.uncertainty_ft[usable]
    seconds = (time_us - us_from_time(axis.start)) / 1e6
    breaks = np.flatnonzero(np.diff(time_us) > curve.unbroken_us) + 1
    px_per_s = (axis.right_px - axis.left_px) / (axis.end - axis.start).total_seconds()
    parts = []
    for piece in np.split(np.arange(len(seconds)), breaks):
        kept = piece[_kept(seconds[piece] * px_per_s, value[piece])]
        parts.append(
            Stretch(
                seconds=seconds[kept],
                value=value[kept],
                low=value[kept] - spread[kept],
                high=value[kept] + spread[kept],
            )
        )
    return parts


def _kept(px: NDArray[np.float64], value: NDArray[np.float64]) -> NDArray[np.int64]:
    column = np.floor(px)
    starts = np.flatnonzero(np.concatenate(([True], np.diff(column) != 0)))
    if len(starts) * 2 >= len(px):
        return np.arange(len(px))
    ends = np.concatenate((starts[1:], [len(px)]))
    kept = {0, len(px) - 1}
    for start, end in zip(starts.tolist(), ends.tolist(), strict=True):
        piece = value[start:end]
        kept.update((start, start + int(piece.argmin()), start + int(piece.argmax()), end - 1))
    return np.array(sorted(kept), dtype=np.int64)
