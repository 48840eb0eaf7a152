"""Status changes: what changed on the board's rows, and who has acknowledged it."""

from collections.abc import Iterable, Sequence
from dataclasses import dataclass, replace
from datetime import datetime, timedelta
from itertools import groupby
from typing import TypeAlias

from airfield_board.clock import time_from_us
from airfield_board.configuration.model import Fleet, Quantity
from airfield_board.history.records import Json
from airfield_board.limits.rules import LimitChange
from airfield_board.limits.states import State, worst
from airfield_board.session.board_state import StatusChange
from airfield_board.session.judge import Judge
from airfield_board.units import DAY_US

RowKey: TypeAlias = tuple[str, str]
"""Aircraft and operation."""

CURRENT, PAST = "operation", "past"
"""Scopes of a change of a row: one that somebody may have to acknowledge, and one that later rows had overtaken."""

STATUS_KEPT_US = DAY_US
"""How much longer changes are kept than they are shown: the clock, or the airfield's time zone, may be set back."""

_ASKING = (State.HOLD, State.NO_DATA)


@dataclass(frozen=True, slots=True, kw_only=True)
class RowChange:
    """A change of what a row, or all of them, shows.

    Attributes
    ----------
    row
        None where all rows that had a state changed alike.
    """

    time_us: int
    row: RowKey | None
    label: str
    was: State | None
    state: State
    scope: str

    def body(self) -> dict[str, Json]:
        """Return the body of its record."""
        body: dict[str, Json] = {"scope": self.scope, "time": self.time_us, "to": self.state, "label": self.label}
        if self.was is not None:
            body["from"] = self.was
        if self.row is not None:
            body["aircraft"], body["operation"] = self.row
        return body


class RowStates:
    """Follows what each row shows, from the changes of its limits.

    Parameters
    ----------
    judge
        Whose limits' states are the start.
    """

    def __init__(self, judge: Judge) -> None:
        self._limits: dict[RowKey, dict[Quantity, State]] = {}
        self._shown: dict[RowKey, State] = {}
        self.follow_all(judge)

    def follow_all(self, judge: Judge) -> None:
        """Take the limits' states as they are."""
        self._limits = {}
        for key, limit in judge.limits.items():
            states = self._limits.setdefault((key.aircraft, key.operation), {})
            if limit.memory.state is not None:
                states[key.quantity] = limit.memory.state
        self._shown = {row: worst(states.values()) for row, states in self._limits.items() if states}

    def follow(self, changes: Sequence[LimitChange], fleet: Fleet) -> list[RowChange]:
        """Take changes of limits, in order of time, and return the changes of rows that follow.

        Where one row changes several times, only the last change is of scope `CURRENT`.
        """
        labels = labels_of(fleet)
        found: list[RowChange] = []
        for time_us, together in groupby(changes, key=lambda change: change.time_us):
            found += self._follow_moment(time_us, list(together), labels)
        newest: set[RowKey] = set()
        everything = False
        for place in reversed(range(len(found))):
            change = found[place]
            if everything or change.row in newest:
                found[place] = replace(change, scope=PAST)
            if change.row is None:
                everything = True
            else:
                newest.add(change.row)
        return found

    def _follow_moment(
        self, time_us: int, changes: Iterable[LimitChange], labels: dict[RowKey, str]
    ) -> list[RowChange]:
        rows: dict[RowKey, None] = {}
        for change in changes:
            row = (change.key.aircraft, change.key.operation)
            self._limits.setdefault(row, {})[change.key.quantity] = change.state
            rows[row] = None
        found = []
        before = len(self._shown)
        for row in rows:
            was, state = self._shown.get(row), worst(self._limits[row].values())
            self._shown[row] = state
            if was is not state and not (was is None and state in (State.GO, State.NEAR, State.REDUCED)):
                label = labels.get(row, " · ".join(row))
                found.append(RowChange(time_us=time_us, row=row, label=label, was=was, state=state, scope=CURRENT))
        lost = [change for change in found if change.state is State.NO_DATA]
        if len(lost) > 1 and len(lost) == len(found) == before:
            label = f"All {len(lost)} operations"
            return [RowChange(time_us=time_us, row=None, label=label, was=None, state=State.NO_DATA, scope=CURRENT)]
        return found


def labels_of(fleet: Fleet) -> dict[RowKey, str]:
    """Return what each row is called in a list: "Tow plane · Aerotow"."""
    return {
        (aircraft.id, operation.name): f"{aircraft.name} · {operation.name}"
        for aircraft in fleet.aircraft
        for operation in aircraft.operations
    }


class StatusLog:
    """The status changes of the day and those that still wait for acknowledgement."""

    def __init__(self) -> None:
        self._changes: dict[int, StatusChange] = {}

    def add(self, number: int, change: RowChange) -> None:
        """Add a change under its record's number."""
        self._changes[number] = StatusChange(
            number=number,
            time=time_from_us(change.time_us),
            state=change.state,
            was=change.was,
            label=change.label,
            needs_acknowledgement=change.scope == CURRENT and change.state in _ASKING,
        )

    def acknowledge(self, numbers: Iterable[int], initials: str, at: datetime) -> tuple[int, ...]:
        """Mark changes as acknowledged; return those that were waiting for it."""
        waiting = tuple(number for number in numbers if number in self._changes and self._changes[number].open)
        for number in waiting:
            self._changes[number] = replace(self._changes[number], acknowledged_by=initials, acknowledged_at=at)
        return waiting

    def withdraw(self, numbers: Iterable[int]) -> tuple[int, ...]:
        """Mark changes as not acknowledged; return those that were."""
        known = tuple(number for number in numbers if number in self._changes and self._changes[number].acknowledged_by)
        for number in known:
            self._changes[number] = replace(self._changes[number], acknowledged_by="", acknowledged_at=None)
        return known

    def renumber(self, numbers: dict[int, int]) -> None:
        """Give changes that were not recorded at first the numbers of their records."""
        for old, new in numbers.items():
            change = self._changes.pop(old, None)
            if change is not None:
                self._changes[new] = replace(change, number=new)

    def forget_before(self, when: datetime) -> None:
        """Let go of changes long before that wait for nobody."""
        since = when - timedelta(microseconds=STATUS_KEPT_US)
        self._changes = {
            number: change for number, change in self._changes.items() if change.open or change.time >= since
        }

    def newest_first(self, since: datetime) -> tuple[StatusChange, ...]:
        """Return the changes since a time, and all that still wait."""
        shown = [change for change in self._changes.values() if change.open or change.time >= since]
        return tuple(sorted(shown, key=lambda change: (change.time, change.number), reverse=True))
