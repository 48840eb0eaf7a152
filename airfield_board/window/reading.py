"""Whether what the recorder said may still be shown.

The window reckons age by itself, so that a recorder that hangs looks stale and not fresh.
"""

import math
from dataclasses import dataclass, replace
from datetime import datetime, timedelta
from enum import Enum
from typing import Literal
from zoneinfo import ZoneInfo

from airfield_board.limits.states import State
from airfield_board.observations.quality_judgement import FUTURE_US
from airfield_board.session.board_state import (
    BoardState,
    Conditions,
    CurrentObservation,
    Freshness,
    LimitLine,
    Mode,
    OperationLine,
)

FUTURE_TOLERANCE = timedelta(microseconds=FUTURE_US)
"""An observation may be so far ahead of the clock."""


class Cause(Enum):
    """Why the whole board shows NO DATA; `NONE` where it does not."""

    NONE = "none"
    MISSING = "missing"
    STALE = "stale"
    NO_ANSWER = "no answer"
    CLOCK = "clock"
    NOT_CALCULATED = "not calculated"


@dataclass(frozen=True, slots=True, kw_only=True)
class Reading:
    """The newest valid observation, judged by the window's clock.

    Attributes
    ----------
    age
        None where there is no observation; never negative.
    cause
        Anything but `Cause.NONE` puts the whole view into NO DATA.
    """

    freshness: Freshness
    age: timedelta | None
    cause: Cause

    @property
    def trusted(self) -> bool:
        """Whether states may be shown as the recorder gave them."""
        return self.cause is Cause.NONE


def reckon(state: BoardState, now: datetime, watchdog: timedelta | None) -> Reading:
    """Judge a board by the clock.

    Parameters
    ----------
    now
        The window's clock; it may be later than the state.
    watchdog
        Longest time between the state and now; None where there is no recorder that could hang (a picture).
    """
    observation = state.observation
    if observation is None:
        return Reading(freshness=Freshness.MISSING, age=None, cause=Cause.MISSING)
    ahead = observation.time - now
    age = max(-ahead, timedelta(0))
    if ahead > FUTURE_TOLERANCE:
        return Reading(freshness=Freshness.STALE, age=age, cause=Cause.CLOCK)
    if age > timedelta(minutes=state.stale_after_min) or observation.freshness in (
        Freshness.STALE,
        Freshness.MISSING,
    ):
        return Reading(freshness=Freshness.STALE, age=age, cause=Cause.STALE)
    freshness = Freshness.AGEING if age > timedelta(minutes=state.ageing_after_min) else Freshness.FRESH
    if watchdog is not None and abs(now - state.assessed_at) > watchdog:
        return Reading(freshness=freshness, age=age, cause=Cause.NO_ANSWER)
    if state.conditions is None or not _finite(state.conditions):
        return Reading(freshness=freshness, age=age, cause=Cause.NOT_CALCULATED)
    return Reading(freshness=freshness, age=age, cause=Cause.NONE)


def _finite(conditions: Conditions) -> bool:
    """Whether all that is shown of the air is a number; what is not was not calculated."""
    values = (
        conditions.density_altitude_ft,
        conditions.uncertainty_ft,
        conditions.pressure_altitude_ft,
        conditions.isa_deviation_c,
        conditions.peak_ft,
    )
    return all(math.isfinite(value) for value in values)


class Frame(Enum):
    """What frames the whole view; the earlier ones come first, and only one is shown."""

    NO_DATA = "NO DATA"
    NOT_RECORDING = "NOT RECORDING"
    TRAINING = "TRAINING"
    DEMO = "DEMO"
    PAST_DAY = "PAST DAY"
    SETTINGS_WAITING = "SETTINGS WAITING"


@dataclass(frozen=True, slots=True, kw_only=True)
class View:
    """What every part of the window is given to show.

    Attributes
    ----------
    now
        The window's clock.
    reading
        The window's judgement of the newest observation.
    zone
        The airfield's.
    """

    state: BoardState
    now: datetime
    reading: Reading
    zone: ZoneInfo

    @property
    def trusted(self) -> bool:
        """Whether states may be shown as the recorder gave them."""
        return self.reading.trusted

    @property
    def frames(self) -> tuple[Frame, ...]:
        """All that would frame the view, the one that does first."""
        state = self.state
        modes = {Mode.TRAINING: Frame.TRAINING, Mode.DEMO: Frame.DEMO, Mode.PAST: Frame.PAST_DAY}
        wanted = {
            Frame.NO_DATA: not self.trusted,
            Frame.NOT_RECORDING: not state.recording,
            Frame.SETTINGS_WAITING: bool(state.waiting),
        }
        return tuple(frame for frame in Frame if wanted.get(frame, modes.get(state.mode) is frame))

    @property
    def column_unit(self) -> Literal["ft", "m"]:
        """Unit of the columns of limits and margins: the airfield's, unless all limits are in the other."""
        own = self.state.airfield.altitude_unit
        other: Literal["ft", "m"] = "m" if own == "ft" else "ft"
        used = {row.shown.unit for row in self.state.operations if row.shown is not None}
        return other if other in used and own not in used else own

    @property
    def live(self) -> bool:
        """Whether all is live, trusted, recorded, and from the file."""
        observation = self.state.observation
        return not self.frames and self.state.mode is Mode.LIVE and observation is not None and not observation.initials

    @property
    def rows(self) -> tuple[OperationLine, ...]:
        """The rows as they may be shown: where the reading is not trusted, all in NO DATA with what they were."""
        if self.trusted:
            return tuple(_with_margin(row) for row in self.state.operations)
        return tuple(self._without_data(row) for row in self.state.operations)

    def _without_data(self, row: OperationLine) -> OperationLine:
        return replace(
            row,
            state=State.NO_DATA,
            limits=tuple(self._blank(line) for line in row.limits),
            shown=self._blank(row.shown) if row.shown is not None else None,
        )

    def _blank(self, line: LimitLine) -> LimitLine:
        """Return a limit in NO DATA with what it was; one that the recorder left so keeps what the recorder said."""
        observation = self.state.observation
        was, was_at, since = line.was, line.was_at, line.since
        if line.state is not State.NO_DATA and observation is not None:
            was, was_at, since = line.state, observation.time, self._lost_at(observation)
        return replace(
            line,
            state=State.NO_DATA,
            value=None,
            margin=None,
            since=since,
            was=was,
            was_at=was_at,
            hold_temperature_c=None,
            hold_above_c=None,
            greatest_weight=None,
            greatest_weight_lb=None,
            gone_by=None,
            clearing=None,
            eases_at=None,
        )

    def _lost_at(self, observation: CurrentObservation) -> datetime | None:
        """Since when the reading is not trusted; None where that is not known."""
        if self.reading.cause is not Cause.STALE:
            return None
        return observation.time + timedelta(minutes=self.state.stale_after_min)


def _with_margin(row: OperationLine) -> OperationLine:
    """Return the row, or its NO DATA where it, or one of its limits, says more than it has a margin for."""
    shown = None if row.shown is None else _measured(row.shown)
    limits = tuple(_measured(line) for line in row.limits)
    if row.state in (State.HOLD, State.NO_DATA):
        return replace(row, shown=shown, limits=limits)
    lost = [line for line in (shown, *limits) if line is None or line.state is State.NO_DATA]
    return replace(row, state=State.NO_DATA, shown=lost[0], limits=limits) if lost else row


def _measured(line: LimitLine) -> LimitLine:
    """Return the limit, or its NO DATA where it has a state and no margin to show for it."""
    if line.state in (State.HOLD, State.NO_DATA) or (line.margin is not None and math.isfinite(line.margin)):
        return line
    return replace(line, state=State.NO_DATA, margin=None, reason="nothing to compare")


def view_of(state: BoardState, now: datetime, watchdog: timedelta | None) -> View:
    """Put together what the window shows of a board at a time."""
    return View(state=state, now=now, reading=reckon(state, now, watchdog), zone=ZoneInfo(state.airfield.time_zone))
