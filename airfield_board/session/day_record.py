"""What the recorder keeps of the last day and a half for the screens: the curve, the spans, the rows not used."""

from collections.abc import Collection, Iterable, Sequence
from datetime import datetime

import numpy as np
from numpy.typing import NDArray

from airfield_board.clock import time_from_us
from airfield_board.limits.in_force import LimitKey
from airfield_board.limits.rules import LimitChange
from airfield_board.limits.states import State
from airfield_board.observations.observation import NO_TIME_US, CheckedTable, Verdict
from airfield_board.session.board_state import DayCurve, Span
from airfield_board.units import HOUR_US

KEPT_US = 36 * HOUR_US
_RATE_OVER_US = HOUR_US
_UNUSED_KEPT = 500
_DRAWN = (State.HOLD, State.REDUCED)


class DayRecord:
    """Valid observations, changes of state and unused rows of the last 36 hours."""

    def __init__(self) -> None:
        self._time_us: NDArray[np.int64] = np.empty(0, dtype=np.int64)
        self._density_altitude_ft = np.empty(0)
        self._uncertainty_ft = np.empty(0)
        self._changes: dict[LimitKey, list[tuple[int, State]]] = {}
        self._unused: list[tuple[int | None, int, str]] = []

    def add_values(
        self,
        time_us: NDArray[np.int64],
        density_altitude_ft: NDArray[np.float64],
        uncertainty_ft: NDArray[np.float64],
    ) -> None:
        """Add valid observations; of two with one time the one added later counts."""
        times = np.concatenate([time_us[::-1], self._time_us])
        values = np.concatenate([density_altitude_ft[::-1], self._density_altitude_ft])
        uncertainties = np.concatenate([uncertainty_ft[::-1], self._uncertainty_ft])
        self._time_us, first = np.unique(times, return_index=True)
        self._density_altitude_ft = values[first]
        self._uncertainty_ft = uncertainties[first]

    def add_rows(
        self, checked: CheckedTable, density_altitude_ft: NDArray[np.float64], u_ft: NDArray[np.float64], read_us: int
    ) -> None:
        """Add checked rows read at a time: the valid ones to the curve, the others to the list of unused ones."""
        valid = np.flatnonzero(checked.verdict == Verdict.VALID)
        if len(valid):
            self.add_values(checked.rows.time_us[valid], density_altitude_ft[valid], u_ft[valid])
        for row in np.flatnonzero(checked.verdict != Verdict.VALID)[-_UNUSED_KEPT:]:
            time_us = int(checked.rows.time_us[row])
            self.add_unused(None if time_us == NO_TIME_US else time_us, read_us, checked.reason.get(int(row), ""))

    def add_unused(self, time_us: int | None, read_us: int, reason: str) -> None:
        """Add one row that was not used."""
        self._unused.append((time_us, read_us, reason))
        del self._unused[:-_UNUSED_KEPT]

    def add_changes(self, changes: Iterable[LimitChange]) -> None:
        """Add changes of limits, in order of time."""
        for change in changes:
            self.add_state(change.key, change.time_us, change.state, change.was)

    def add_state(self, key: LimitKey, time_us: int, state: State, was: State | None) -> None:
        """Add a limit's state from a time on; one that had none before begins anew, and what was drawn of it goes."""
        if was is None:
            self._changes.pop(key, None)
        self._changes.setdefault(key, []).append((time_us, state))

    def keep_only(self, keys: Collection[LimitKey]) -> None:
        """Let go of what is drawn of limits that are gone: one of the same name that comes later begins anew."""
        self._changes = {key: changes for key, changes in self._changes.items() if key in keys}

    def forget_before(self, when_us: int) -> None:
        """Let go of what is older, but for the last state before.

        Of a time that no observation has reached nothing is known yet: a clock set forward by mistake makes nothing
        old, so that the day is whole when it is set right.
        """
        if len(self._time_us):
            when_us = min(when_us, int(self._time_us[-1]) - KEPT_US)
        keep = self._time_us >= when_us
        if not keep.all():
            self._time_us = self._time_us[keep]
            self._density_altitude_ft = self._density_altitude_ft[keep]
            self._uncertainty_ft = self._uncertainty_ft[keep]
        for changes in self._changes.values():
            while len(changes) > 1 and changes[1][0] < when_us:
                del changes[0]

    def curve(self, day_start_us: int, day_end_us: int, unbroken_us: int) -> DayCurve:
        """Return the observations of a local day; those further apart than ``unbroken_us`` do not hang together."""
        first, last = np.searchsorted(self._time_us, [day_start_us, day_end_us])
        curve = DayCurve(
            time_us=self._time_us[first:last].copy(),
            density_altitude_ft=self._density_altitude_ft[first:last].copy(),
            uncertainty_ft=self._uncertainty_ft[first:last].copy(),
            day_start_us=day_start_us,
            day_end_us=day_end_us,
            unbroken_us=unbroken_us,
        )
        for column in (curve.time_us, curve.density_altitude_ft, curve.uncertainty_ft):
            column.flags.writeable = False
        return curve

    def rate_ft_per_h(self, at_us: int) -> float | None:
        """Slope of the least-squares line through the last hour's density altitudes; None with fewer than two."""
        first, last = np.searchsorted(self._time_us, [at_us - _RATE_OVER_US, at_us + 1])
        if last - first < 2:
            return None
        hours = (self._time_us[first:last] - at_us) / HOUR_US
        hours -= hours.mean()
        values = self._density_altitude_ft[first:last]
        return float((hours * (values - values.mean())).sum() / (hours * hours).sum())

    def spans(self, key: LimitKey, day_start_us: int, day_end_us: int) -> tuple[Span, ...]:
        """Return a limit's stretches of HOLD and REDUCED in a local day."""
        spans: list[Span] = []
        changes: Sequence[tuple[int, State]] = self._changes.get(key, ())
        for place, (start_us, state) in enumerate(changes):
            end_us = changes[place + 1][0] if place + 1 < len(changes) else None
            over = end_us is not None and end_us <= day_start_us
            if state not in _DRAWN or over or start_us >= day_end_us:
                continue
            end = None if end_us is None else time_from_us(min(end_us, day_end_us))
            spans.append(Span(state=state, start=time_from_us(max(start_us, day_start_us)), end=end))
        return tuple(spans)

    def unused(self, day_start_us: int) -> tuple[tuple[datetime | None, str], ...]:
        """Return the rows of a day that were not used, those read last first; without a time the day they were read."""
        found = [
            (None if time_us is None else time_from_us(time_us), reason)
            for time_us, read_us, reason in self._unused
            if (read_us if time_us is None else time_us) >= day_start_us
        ]
        return tuple(reversed(found))
