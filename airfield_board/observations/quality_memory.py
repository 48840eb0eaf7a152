"""What the quality checks remember from one row to the next, and from one poll to the next."""

from collections.abc import Mapping, Sequence
from dataclasses import dataclass, replace
from typing import NamedTuple

from airfield_board.observations.observation import NO_TIME_US
from airfield_board.units import DAY_US, HOUR_US

LONGEST_GAP_US = 3 * HOUR_US
"""Beyond it a reading is not compared with, a dew point not carried, a count of same values starts anew."""


class Reading(NamedTuple):
    """The values of one observation; ``dewpoint_c`` None where it has none."""

    time_us: int
    altimeter_hpa: float
    temperature_c: float
    dewpoint_c: float | None


class Dewpoint(NamedTuple):
    """A dew point and when it was observed."""

    time_us: int
    dewpoint_c: float


@dataclass(frozen=True, slots=True, kw_only=True)
class Past:
    """All that the checks need to know of the rows before one.

    Attributes
    ----------
    last_valid
        The last valid observation; None before the first.
    same_since_us, same_last_us
        First and last time of the unbroken row of readings with the temperature and altimeter setting of
        ``last_valid``, those rejected as stuck included.
    suspect
        The suspect reading that a following one may confirm; None where none waits.
    last_dewpoint
        The last one observed in a valid observation; late rows do not count here.
    first_dewpoint_us
        Time of the first valid observation of the record with a dew point; None before it.
    highest_dewpoints
        Of the observed dew points of the last 24 h those that no later one reaches: times rise, values fall.
    """

    last_valid: Reading | None = None
    same_since_us: int = NO_TIME_US
    same_last_us: int = NO_TIME_US
    suspect: Reading | None = None
    last_dewpoint: Dewpoint | None = None
    first_dewpoint_us: int | None = None
    highest_dewpoints: tuple[Dewpoint, ...] = ()

    def has_values_of(self, altimeter_hpa: float, temperature_c: float) -> bool:
        """Whether the last valid observation has exactly these values."""
        last = self.last_valid
        return last is not None and last.altimeter_hpa == altimeter_hpa and last.temperature_c == temperature_c

    def same_start_us(self, reading: Reading) -> int:
        """Since when temperature and altimeter setting are those of a reading; its own time where they are new."""
        same = self.has_values_of(reading.altimeter_hpa, reading.temperature_c)
        if same and reading.time_us - self.same_last_us <= LONGEST_GAP_US:
            return self.same_since_us
        return reading.time_us

    def with_same_at(self, reading: Reading) -> "Past":
        """Return the past lengthened by a reading that is not valid, where it has the last valid one's values."""
        if not self.has_values_of(reading.altimeter_hpa, reading.temperature_c):
            return self
        return replace(
            self,
            same_since_us=self.same_start_us(reading),
            same_last_us=max(self.same_last_us, reading.time_us),
        )

    def with_valid(self, reading: Reading) -> "Past":
        """Return the past lengthened by a valid observation, not older than any in it."""
        last_dewpoint, first_us = self.last_dewpoint, self.first_dewpoint_us
        highest = _since(self.highest_dewpoints, reading.time_us - DAY_US)
        if reading.dewpoint_c is not None:
            last_dewpoint = Dewpoint(reading.time_us, reading.dewpoint_c)
            first_us = reading.time_us if first_us is None else first_us
            keep = len(highest)
            while keep and highest[keep - 1].dewpoint_c <= reading.dewpoint_c:
                keep -= 1
            highest = (*highest[:keep], last_dewpoint)
        return Past(
            last_valid=reading,
            same_since_us=self.same_start_us(reading),
            same_last_us=reading.time_us,
            suspect=None,
            last_dewpoint=last_dewpoint,
            first_dewpoint_us=first_us,
            highest_dewpoints=highest,
        )

    def with_late_dewpoint(self, late: Dewpoint) -> "Past":
        """Return the past with the dew point of a late row: it may raise what is carried or assumed, never lower it.

        One over 24 h older than the last valid observation can do neither.
        """
        first_us = late.time_us if self.first_dewpoint_us is None else min(self.first_dewpoint_us, late.time_us)
        known = replace(self, first_dewpoint_us=first_us) if first_us != self.first_dewpoint_us else self
        if self.last_valid is not None and self.last_valid.time_us - late.time_us > DAY_US:
            return known
        if any(
            entry.time_us >= late.time_us and entry.dewpoint_c >= late.dewpoint_c for entry in self.highest_dewpoints
        ):
            return known
        before = (entry for entry in self.highest_dewpoints if entry.dewpoint_c > late.dewpoint_c)
        after = (entry for entry in self.highest_dewpoints if entry.time_us > late.time_us)
        return replace(known, highest_dewpoints=(*before, late, *after))

    def with_dewpoints_of(self, other: "Past") -> "Past":
        """Return this past with another's record of dew points."""
        return replace(
            self,
            last_dewpoint=other.last_dewpoint,
            first_dewpoint_us=other.first_dewpoint_us,
            highest_dewpoints=other.highest_dewpoints,
        )

    def carried_c(self, time_us: int) -> float | None:
        """Dew point to carry to a time: the last observed one of at most 3 h before; None where there is none.

        A late row's dew point between the two counts where it is higher: it was not compared with its neighbours, so
        it must not make the air look denser.
        """
        last = self.last_dewpoint
        if last is None or not 0 <= time_us - last.time_us <= LONGEST_GAP_US:
            return None
        return max([last.dewpoint_c, *(e.dewpoint_c for e in self.highest_dewpoints if e.time_us > last.time_us)])

    def highest_c(self, time_us: int) -> float | None:
        """Highest dew point of the 24 h before a time; None where there is none."""
        recent = _since(self.highest_dewpoints, time_us - DAY_US)
        return recent[0].dewpoint_c if recent else None


def _since(dewpoints: tuple[Dewpoint, ...], time_us: int) -> tuple[Dewpoint, ...]:
    """Return those at or after a time."""
    old = 0
    while old < len(dewpoints) and dewpoints[old].time_us < time_us:
        old += 1
    return dewpoints[old:] if old else dewpoints


@dataclass(frozen=True, slots=True, kw_only=True)
class QualityMemory:
    """What the checks take from one table of rows to the next.

    Attributes
    ----------
    newest_us
        Time of the newest row judged valid or suspect; `NO_TIME_US` before the first.
    before
        The past without the rows of ``newest_us``: a correction of that time is judged against it.
    past
        The past with them.
    """

    newest_us: int = NO_TIME_US
    before: Past = Past()
    past: Past = Past()

    def to_json(self) -> dict[str, object]:
        """Return a JSON value from which `from_json` makes exactly this memory again."""
        return {"newest_us": self.newest_us, "before": _past_to_json(self.before), "past": _past_to_json(self.past)}

    @classmethod
    def from_json(cls, value: object) -> "QualityMemory":
        """Return the memory that `to_json` wrote.

        Raises
        ------
        ValueError
            Where the value is not of that form.
        """
        parts = _mapping(value, {"newest_us", "before", "past"})
        return cls(
            newest_us=_whole(parts["newest_us"]),
            before=_past_from_json(parts["before"]),
            past=_past_from_json(parts["past"]),
        )


_PAST_KEYS = {
    "last_valid",
    "same_since_us",
    "same_last_us",
    "suspect",
    "last_dewpoint",
    "first_dewpoint_us",
    "highest_dewpoints",
}


def _past_to_json(past: Past) -> dict[str, object]:
    return {
        "last_valid": None if past.last_valid is None else list(past.last_valid),
        "same_since_us": past.same_since_us,
        "same_last_us": past.same_last_us,
        "suspect": None if past.suspect is None else list(past.suspect),
        "last_dewpoint": None if past.last_dewpoint is None else list(past.last_dewpoint),
        "first_dewpoint_us": past.first_dewpoint_us,
        "highest_dewpoints": [list(entry) for entry in past.highest_dewpoints],
    }


def _past_from_json(value: object) -> Past:
    parts = _mapping(value, _PAST_KEYS)
    first_us = parts["first_dewpoint_us"]
    last_dewpoint = parts["last_dewpoint"]
    return Past(
        last_valid=_reading(parts["last_valid"]),
        same_since_us=_whole(parts["same_since_us"]),
        same_last_us=_whole(parts["same_last_us"]),
        suspect=_reading(parts["suspect"]),
        last_dewpoint=None if last_dewpoint is None else _dewpoint(last_dewpoint),
        first_dewpoint_us=None if first_us is None else _whole(first_us),
        highest_dewpoints=tuple(_dewpoint(entry) for entry in _items(parts["highest_dewpoints"])),
    )


def _reading(value: object) -> Reading | None:
    if value is None:
        return None
    time_us, altimeter_hpa, temperature_c, dewpoint_c = _items(value, 4)
    return Reading(
        _whole(time_us),
        _number(altimeter_hpa),
        _number(temperature_c),
        None if dewpoint_c is None else _number(dewpoint_c),
    )


def _dewpoint(value: object) -> Dewpoint:
    time_us, dewpoint_c = _items(value, 2)
    return Dewpoint(_whole(time_us), _number(dewpoint_c))


def _mapping(value: object, keys: set[str]) -> Mapping[str, object]:
    if not isinstance(value, dict) or set(value) != keys:
        raise _refusal(value, f"the keys {', '.join(sorted(keys))}")
    return value


def _items(value: object, count: int | None = None) -> Sequence[object]:
    if not isinstance(value, list | tuple) or (count is not None and len(value) != count):
        raise _refusal(value, "a list" if count is None else f"a list of {count}")
    return value


def _whole(value: object) -> int:
    if not isinstance(value, int) or isinstance(value, bool):
        raise _refusal(value, "a whole number")
    return value


def _number(value: object) -> float:
    if not isinstance(value, int | float) or isinstance(value, bool):
        raise _refusal(value, "a number")
    return float(value)


def _refusal(value: object, expected: str) -> ValueError:
    return ValueError(f"not a memory of the quality checks: {value!r} where {expected} is expected")
