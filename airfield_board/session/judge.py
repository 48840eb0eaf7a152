"""Rows in, verdicts out: quality, conditions and rules as one step, for every use of the program alike."""

from collections.abc import Mapping, Sequence
from dataclasses import asdict, dataclass, fields
from zoneinfo import ZoneInfo

import numpy as np
from numpy.typing import NDArray

from airfield_board.configuration.model import Fleet, Profile, Quantity
from airfield_board.limits.in_force import LimitKey, fleet_schedules
from airfield_board.limits.rules import Episode, JudgedRows, LimitChange, LimitJudge, LimitMemory
from airfield_board.observations.conditions import ConditionsTable, conditions_of
from airfield_board.observations.observation import CheckedTable, DewpointUse, ObservationTable, Verdict
from airfield_board.observations.quality import QualityMemory, QualityRules, check
from airfield_board.observations.quality_judgement import FUTURE_US
from airfield_board.units import MINUTE_US


@dataclass(frozen=True, slots=True, kw_only=True)
class CurrentRow:
    """The newest valid observation.

    Attributes
    ----------
    dewpoint_c
        As observed, NaN where the row has none.
    dewpoint_used_c
        As it counts, NaN where humidity does not.
    temperature_resolution_c, dewpoint_resolution_c
        Those the row implies; NaN where the profile's count.
    initials
        Of the person who typed it in; empty for the file's.
    """

    time_us: int
    altimeter_hpa: float
    temperature_c: float
    dewpoint_c: float
    dewpoint_used_c: float
    dewpoint_use: DewpointUse
    temperature_resolution_c: float
    dewpoint_resolution_c: float
    initials: str


@dataclass(frozen=True, slots=True, kw_only=True)
class Judged:
    """What came of one step.

    Attributes
    ----------
    checked
        The rows in order of time with their verdicts.
    conditions
        Of each of them, shape (n,); NaN for rejected rows.
    changes
        In order of time, those of one time in the order of the fleet.
    ended
        Episodes that ended, likewise.
    """

    checked: CheckedTable
    conditions: ConditionsTable
    changes: tuple[LimitChange, ...]
    ended: tuple[Episode, ...]


class Judge:
    """Takes observations through checks and rules, and remembers what the next ones need.

    Parameters
    ----------
    profile, fleet
        The settings in force.
    memory
        As `to_json` gave it, to go on where another judge stopped.

    Raises
    ------
    KeyError, ValueError
        If the memory is not one that `to_json` gave.
    """

    def __init__(self, profile: Profile, fleet: Fleet, memory: Mapping[str, object] | None = None) -> None:
        self._settings(profile, fleet)
        self._quality = QualityMemory()
        self.current: CurrentRow | None = None
        self._suspects: tuple[CurrentRow, ...] = ()
        """The suspect rows since the current one, which limits that change meanwhile are judged with too."""
        self.stale = False
        kept: dict[LimitKey, LimitMemory] = {}
        if memory is not None:
            self._quality = QualityMemory.from_json(_mapping(memory["quality"]))
            if memory["current"] is not None:
                self.current = _current_from_json(_mapping(memory["current"]))
            self._suspects = tuple(_current_from_json(_mapping(row)) for row in _items(memory["suspects"]))
            self.stale = bool(memory["stale"])
            for name, value in _mapping(memory["limits"]).items():
                kept[_key_from_text(name)] = LimitMemory.from_json(_mapping(value))
        self._make_limits(kept)

    def _settings(self, profile: Profile, fleet: Fleet) -> None:
        self.profile = profile
        self.fleet = fleet
        self._rules = QualityRules(elevation_m=profile.elevation_m, humidity=profile.density_altitude)
        self._stale_after_us = round(profile.observations.stale_after_min * MINUTE_US)

    def _make_limits(self, kept: Mapping[LimitKey, LimitMemory]) -> None:
        schedules = fleet_schedules(self.fleet, ZoneInfo(self.profile.time_zone))
        self.limits = {schedule.key: LimitJudge(schedule, kept.get(schedule.key)) for schedule in schedules}
        self._order = {key: place for place, key in enumerate(self.limits)}

    @property
    def stale_at_us(self) -> int | None:
        """The moment after which the current observation is stale; None without one."""
        return None if self.current is None else self.current.time_us + self._stale_after_us

    def advance(self, table: ObservationTable, now_us: int, *, pass_to_us: int | None = None) -> Judged:
        """Take rows, and let time pass.

        Parameters
        ----------
        table
            New rows, in any order; may be empty.
        now_us
            The clock: rows of more than 5 min after it are rejected.
        pass_to_us
            Time passes up to here after the last row; None: only with the rows.
        """
        checked, self._quality = check(table, self._quality, self._rules, now_us)
        conditions = self._conditions(checked)
        if len(checked):
            self._judge_rows(checked, conditions)
        self._pass_time(checked, now_us, pass_to_us)
        return self._answer(checked, conditions)

    def _conditions(self, checked: CheckedTable) -> ConditionsTable:
        rows = checked.rows
        unusable = checked.verdict == Verdict.REJECTED
        altimeter_hpa = np.where(unusable, np.nan, rows.altimeter_hpa)
        return conditions_of(
            altimeter_hpa=altimeter_hpa,
            temperature_c=rows.temperature_c,
            dewpoint_used_c=checked.dewpoint_used_c,
            temperature_resolution_c=rows.temperature_resolution_c,
            dewpoint_resolution_c=rows.dewpoint_resolution_c,
            elevation_m=self.profile.elevation_m,
            instruments=self.profile.observations.instruments,
        )

    def _judge_rows(self, checked: CheckedTable, conditions: ConditionsTable) -> None:
        verdict = checked.verdict
        counts = ~checked.late & ((verdict == Verdict.VALID) | (verdict == Verdict.SUSPECT))
        chosen: NDArray[np.int64] = np.flatnonzero(counts)
        if not len(chosen):
            return
        time_us = checked.rows.time_us[chosen]
        valid = verdict[chosen] == Verdict.VALID
        last_valid_us = self._last_valid(time_us, valid)
        rows = JudgedRows(
            time_us=time_us,
            valid=valid,
            restart=checked.restart[chosen],
            stale_at_us=self._stale_moments(time_us, valid, last_valid_us),
            conditions=conditions if len(chosen) == len(checked) else conditions.take(chosen),
        )
        for limit in self.limits.values():
            limit.judge(rows)
        places = np.flatnonzero(valid)
        if len(places):
            self.current = _current_row(checked, int(chosen[places[-1]]))
            self._suspects = ()
            self.stale = False
        following = chosen[places[-1] + 1 :] if len(places) else chosen
        self._suspects += tuple(_current_row(checked, int(row)) for row in following)
        moment_us = self.stale_at_us
        self.stale = self.stale or (moment_us is not None and int(time_us[-1]) > moment_us)

    def _last_valid(self, time_us: NDArray[np.int64], valid: NDArray[np.bool_]) -> NDArray[np.int64]:
        """Time of the newest valid row before each row, 0 where there is none."""
        before = np.empty_like(time_us)
        before[0] = 0 if self.current is None else self.current.time_us
        before[1:] = np.where(valid[:-1], time_us[:-1], 0)
        return np.maximum.accumulate(before)

    def _stale_moments(
        self, time_us: NDArray[np.int64], valid: NDArray[np.bool_], last_valid_us: NDArray[np.int64]
    ) -> NDArray[np.int64]:
        """Return the moment of staleness that passes before each row, 0 where none does: once after each valid row."""
        moment_us = last_valid_us + self._stale_after_us
        passed = (last_valid_us != 0) & (time_us > moment_us)
        # Counted, not told by the time: a correction has the time of the row that it corrects.
        valid_before: NDArray[np.int64] = np.cumsum(valid) - valid
        first = passed.copy()
        first[1:] &= ~(passed[:-1] & (valid_before[1:] == valid_before[:-1]))
        if self.stale:
            first &= valid_before > 0
        return np.where(first, moment_us, 0)

    def _pass_time(self, checked: CheckedTable, now_us: int, pass_to_us: int | None) -> None:
        """Let time pass with every row, used or not, but for times in the future; then up to the clock."""
        times_us = checked.rows.time_us
        reached_us = int(times_us[times_us <= now_us + FUTURE_US].max(initial=0))
        if pass_to_us is not None:
            reached_us = max(reached_us, pass_to_us)
        self._pass_time_to(reached_us)

    def _pass_time_to(self, when_us: int) -> None:
        moment_us = self.stale_at_us
        if moment_us is None or self.stale or when_us <= moment_us:
            return
        self.stale = True
        for limit in self.limits.values():
            limit.go_stale(moment_us)

    def _answer(self, checked: CheckedTable, conditions: ConditionsTable) -> Judged:
        changes = [change for limit in self.limits.values() for change in limit.take_changes()]
        ended = [episode for limit in self.limits.values() for episode in limit.take_ended()]
        changes.sort(key=lambda change: (change.time_us, self._order[change.key]))
        ended.sort(key=lambda episode: (episode.start_us, self._order[episode.key]))
        return Judged(checked=checked, conditions=conditions, changes=tuple(changes), ended=tuple(ended))

    def change_settings(
        self, profile: Profile, fleet: Fleet, when_us: int
    ) -> tuple[tuple[LimitChange, ...], tuple[Episode, ...]]:
        """Put other settings in force.

        What they tighten acts at once, by the air of the current observation; a hold ends only by the rules, at an
        observation, or with its limit.

        Parameters
        ----------
        when_us
            The recorder's time.

        Returns
        -------
        tuple
            The changes, and the episodes of limits that are gone.
        """
        before = self.limits
        self._pass_time_to(when_us)
        self._settings(profile, fleet)
        self._make_limits({key: limit.memory for key, limit in before.items()})
        for key, limit in before.items():
            if key not in self.limits:
                limit.retire(when_us)
        ended = tuple(episode for limit in before.values() for episode in limit.take_ended())
        self._act_at_once(when_us)
        # Time that passed up to now is told by the limits as they were.
        told = (*before.values(), *self.limits.values())
        return tuple(change for limit in told for change in limit.take_changes()), ended

    def _act_at_once(self, when_us: int) -> None:
        moment_us = self.stale_at_us
        if self.current is None or moment_us is None:
            return
        if not self.stale and when_us > moment_us:
            self.stale = True
            for limit in self.limits.values():
                limit.go_stale(when_us)
        if not self.stale:
            conditions, suspects = self.current_conditions(), self.suspect_conditions()
            for limit in self.limits.values():
                limit.re_judge(when_us, conditions, suspects)

    def current_conditions(self) -> ConditionsTable:
        """Return the air of the current observation, one row, by the profile's present elevation and instruments.

        Raises
        ------
        ValueError
            Without a current observation.
        """
        if self.current is None:
            raise ValueError("no current observation")
        return self._conditions_of_row(self.current)

    def suspect_conditions(self) -> list[ConditionsTable]:
        """Return the air of the suspect observations since the current one, one row each, likewise."""
        return [self._conditions_of_row(row) for row in self._suspects]

    def _conditions_of_row(self, row: CurrentRow) -> ConditionsTable:
        return conditions_of(
            altimeter_hpa=np.array([row.altimeter_hpa]),
            temperature_c=np.array([row.temperature_c]),
            dewpoint_used_c=np.array([row.dewpoint_used_c]),
            temperature_resolution_c=np.array([row.temperature_resolution_c]),
            dewpoint_resolution_c=np.array([row.dewpoint_resolution_c]),
            elevation_m=self.profile.elevation_m,
            instruments=self.profile.observations.instruments,
        )

    def open_episodes(self) -> tuple[Episode, ...]:
        """Return the episodes still open, each up to the newest valid observation."""
        found = (limit.open_episode() for limit in self.limits.values())
        return tuple(episode for episode in found if episode is not None)

    def to_json(self) -> dict[str, object]:
        """Plain values from which a new judge goes on as this one would."""
        return {
            "quality": self._quality.to_json(),
            "current": None if self.current is None else _current_to_json(self.current),
            "suspects": [_current_to_json(row) for row in self._suspects],
            "stale": self.stale,
            "limits": {_text_from_key(key): limit.memory.to_json() for key, limit in self.limits.items()},
        }


def _current_row(checked: CheckedTable, row: int) -> CurrentRow:
    rows = checked.rows
    return CurrentRow(
        time_us=int(rows.time_us[row]),
        altimeter_hpa=float(rows.altimeter_hpa[row]),
        temperature_c=float(rows.temperature_c[row]),
        dewpoint_c=float(rows.dewpoint_c[row]),
        dewpoint_used_c=float(checked.dewpoint_used_c[row]),
        dewpoint_use=DewpointUse(int(checked.dewpoint_use[row])),
        temperature_resolution_c=float(rows.temperature_resolution_c[row]),
        dewpoint_resolution_c=float(rows.dewpoint_resolution_c[row]),
        initials=rows.initials,
    )


def _mapping(value: object) -> Mapping[str, object]:
    if not isinstance(value, Mapping):
        raise ValueError("not a mapping")  # noqa: TRY004 # one kind of error for a memory that cannot be used
    return value


def _items(value: object) -> Sequence[object]:
    if not isinstance(value, list):
        raise ValueError("not a list")  # noqa: TRY004 # as above
    return value


def _text_from_key(key: LimitKey) -> str:
    return f"{key.aircraft}\t{key.quantity}\t{key.operation}"


def _key_from_text(text: str) -> LimitKey:
    aircraft, quantity, operation = text.split("\t", 2)
    return LimitKey(aircraft=aircraft, operation=operation, quantity=Quantity(quantity))


def _current_to_json(row: CurrentRow) -> dict[str, object]:
    return {name: None if value != value else value for name, value in asdict(row).items()}


def _current_from_json(value: Mapping[str, object]) -> CurrentRow:
    known: dict[str, object] = {}
    for field in fields(CurrentRow):
        stored = value[field.name]
        known[field.name] = float("nan") if stored is None else stored
    known["dewpoint_use"] = DewpointUse(int(str(known["dewpoint_use"])))
    return CurrentRow(**known)  # type: ignore[arg-type] # the values are those that were written
