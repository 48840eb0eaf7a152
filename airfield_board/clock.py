"""Now, and the airfield's local time.

Inside the program a time is an aware UTC ``datetime`` where there is one of it, and a whole number of microseconds
since 1970-01-01T00:00Z (``*_us``) where there are many.
"""

import time as _time
from datetime import UTC, date, datetime, timedelta
from typing import Protocol
from zoneinfo import ZoneInfo

EPOCH = datetime(1970, 1, 1, tzinfo=UTC)
_MICROSECOND = timedelta(microseconds=1)


class Clock(Protocol):
    """Something that knows what time it is."""

    def now(self) -> datetime:
        """Return the present time, aware, in UTC."""


class SystemClock:
    """The machine's own clock."""

    def now(self) -> datetime:
        """Return the machine's time in UTC."""
        return datetime.now(UTC)


class SteppedClock:
    """A clock that stands until it is told to move.

    Parameters
    ----------
    start
        Aware time at which it stands first.
    """

    def __init__(self, start: datetime) -> None:
        self._now = start.astimezone(UTC)

    def now(self) -> datetime:
        """Return the time at which the clock stands."""
        return self._now

    def move_to(self, when: datetime) -> None:
        """Set the clock to an aware time, forward or back."""
        self._now = when.astimezone(UTC)


class RunningClock:
    """A clock that starts at a given time and runs faster or slower than the real one, up to an end.

    Parameters
    ----------
    start, end
        Aware times; the clock stands still once it has reached ``end``.
    speed
        Seconds of this clock to one real second, above 0.
    """

    def __init__(self, start: datetime, end: datetime, speed: float) -> None:
        self._start = start.astimezone(UTC)
        self._end = end.astimezone(UTC)
        self._speed = speed
        self._began_s = _time.monotonic()

    def now(self) -> datetime:
        """Return the clock's time, at most its end."""
        passed = timedelta(seconds=(_time.monotonic() - self._began_s) * self._speed)
        return min(self._start + passed, self._end)


def us_from_time(when: datetime) -> int:
    """Microseconds since 1970 of an aware time."""
    return (when - EPOCH) // _MICROSECOND


def time_from_us(when_us: int) -> datetime:
    """Return the aware UTC time of microseconds since 1970."""
    return EPOCH + timedelta(microseconds=int(when_us))


def iso_utc(when: datetime) -> str:
    """ISO 8601 with ``Z``, to the second, or as finely as the time is given."""
    return when.astimezone(UTC).isoformat().replace("+00:00", "Z")


def local_day(when: datetime, zone: ZoneInfo) -> date:
    """Return the airfield's calendar day of an aware time."""
    return when.astimezone(zone).date()


def local_day_bounds(when: datetime, zone: ZoneInfo) -> tuple[datetime, datetime]:
    """Return the first moment of the local day of an aware time, and that of the next day, in UTC."""
    day = local_day(when, zone)
    return start_of_local_day(day, zone), start_of_local_day(day + timedelta(days=1), zone)


def start_of_local_day(day: date, zone: ZoneInfo) -> datetime:
    """First moment of a local calendar day, in UTC.

    Found by looking, so that a midnight which a clock change skips or doubles gives the day's true first moment.
    """
    guess = datetime(day.year, day.month, day.day, tzinfo=zone).astimezone(UTC) - timedelta(hours=3)
    step = timedelta(hours=1)
    while (guess + step).astimezone(zone).date() < day:
        guess += step
    low, high = guess, guess + step
    while high - low > timedelta(seconds=1):
        middle = low + (high - low) / 2
        if middle.astimezone(zone).date() < day:
            low = middle
        else:
            high = middle
    return high.replace(microsecond=0)
