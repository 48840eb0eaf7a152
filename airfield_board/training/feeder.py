"""An invented day's weather, written to a file as a logger at the field would."""

import os
from dataclasses import dataclass
from datetime import date, datetime, timedelta
from pathlib import Path
from zoneinfo import ZoneInfo

import numpy as np
from numpy.typing import NDArray

from airfield_board.clock import start_of_local_day

_MINUTES_A_DAY = 24 * 60
_SMOOTHING_MIN = 91
_HEADER = "time,altimeter_inhg,temperature_c,dewpoint_c\n"


@dataclass(frozen=True, slots=True, kw_only=True)
class DayShape:
    """How the weather goes through a day, by knots; between them it goes smoothly.

    Attributes
    ----------
    hours
        Of the knots, local, rising from 0 to 24.
    temperature_c, dewpoint_c, altimeter_inhg
        At each knot.
    temperature_noise_c
        Greatest departure of a temperature from the smooth curve.
    absurd_rows
        Local minute of the day and temperature [°C] of rows that no thermometer should give: the board must not use
        them, and says so.
    """

    hours: tuple[float, ...]
    temperature_c: tuple[float, ...]
    dewpoint_c: tuple[float, ...]
    altimeter_inhg: tuple[float, ...]
    temperature_noise_c: float
    absurd_rows: tuple[tuple[int, float], ...] = ()


WARM_DAY = DayShape(
    hours=(0, 3, 5.5, 6.5, 8, 10, 12, 14, 15, 16, 17, 18.5, 20, 21, 22.5, 24),
    temperature_c=(18.2, 15.2, 13.6, 14.2, 17.6, 23.2, 28.2, 31.9, 33.3, 34.1, 32.9, 28.9, 24.0, 21.6, 19.6, 18.2),
    dewpoint_c=(6.5, 6.6, 6.8, 7.2, 7.6, 7.4, 6.8, 6.0, 5.6, 5.4, 5.4, 5.8, 6.4, 6.8, 6.8, 6.6),
    altimeter_inhg=(
        30.01, 30.01, 30.01, 30.02, 30.02, 30.02, 30.01, 29.99, 29.98, 29.97, 29.97, 29.97, 29.98, 29.99, 30.0, 30.0,
    ),
    temperature_noise_c=0.25,
    absurd_rows=((11 * 60 + 32, 87.0),),
)  # fmt: skip
"""An invented warm day: at a field of 4,120 ft the density altitude goes from about 5,000 ft at 06:00 to about 7,200 ft
at 16:00, and is at about 5,900 ft by 21:00."""


@dataclass(frozen=True, slots=True, kw_only=True)
class Row:
    """One row of the file.

    Attributes
    ----------
    time
        Aware, in the field's local time.
    """

    time: datetime
    altimeter_inhg: float
    temperature_c: float
    dewpoint_c: float

    def text(self) -> str:
        """Return the row as it stands in the file, with its line end."""
        values = f"{self.altimeter_inhg:.2f},{self.temperature_c:.1f},{self.dewpoint_c:.1f}"
        return f"{self.time.isoformat()},{values}\n"


def rows_of_day(shape: DayShape, day: date, zone: ZoneInfo, *, every_min: int, seed: int) -> tuple[Row, ...]:
    """Return a day's rows, in order of time.

    Parameters
    ----------
    shape
        The weather.
    day, zone
        The field's calendar day and time zone.
    every_min
        Minutes between rows.
    seed
        Of the noise; the same seed gives the same rows on every machine.
    """
    start = start_of_local_day(day, zone)
    temperature_c = _through_day(shape.hours, shape.temperature_c)
    dewpoint_c = _through_day(shape.hours, shape.dewpoint_c)
    altimeter_inhg = _through_day(shape.hours, shape.altimeter_inhg)
    noise_c = shape.temperature_noise_c * _noise(seed)
    minutes = range(0, _MINUTES_A_DAY, every_min)
    rows = [
        Row(
            time=(start + timedelta(minutes=minute)).astimezone(zone),
            altimeter_inhg=round(float(altimeter_inhg[minute]), 2),
            temperature_c=round(float(temperature_c[minute] + noise_c[minute]), 1),
            dewpoint_c=round(float(dewpoint_c[minute]), 1),
        )
        for minute in minutes
    ]
    rows += [
        Row(
            time=(start + timedelta(minutes=minute)).astimezone(zone),
            altimeter_inhg=round(float(altimeter_inhg[minute]), 2),
            temperature_c=absurd_c,
            dewpoint_c=round(float(dewpoint_c[minute]), 1),
        )
        for minute, absurd_c in shape.absurd_rows
    ]
    return tuple(sorted(rows, key=lambda row: row.time))


class Feeder:
    """Writes rows to a file as their time comes, each write whole, and never touches what stands there.

    Parameters
    ----------
    path
        The observation file; made with its header if it is not there.
    rows
        In order of time.
    """

    def __init__(self, path: Path, rows: tuple[Row, ...]) -> None:
        self._path = path
        self._rows = rows
        self._written = 0

    def write_until(self, now: datetime) -> int:
        """Append the rows whose time has come.

        Parameters
        ----------
        now
            Aware; rows up to it, it included, are written.

        Returns
        -------
        int
            How many rows were written.
        """
        due = self._written
        while due < len(self._rows) and self._rows[due].time <= now:
            due += 1
        new = self._rows[self._written : due]
        text = "".join(row.text() for row in new)
        if not self._path.exists():
            text = _HEADER + text
        if text:
            with self._path.open("ab") as file:
                file.write(text.encode())
                file.flush()
                os.fsync(file.fileno())
        self._written = due
        return len(new)


def _through_day(hours: tuple[float, ...], values: tuple[float, ...]) -> NDArray[np.float64]:
    """Value at each minute of the day: straight between the knots, then a running mean, so that corners go."""
    margin = _SMOOTHING_MIN // 2
    minutes = np.arange(-margin, _MINUTES_A_DAY + margin)
    straight = np.interp(minutes / 60.0, hours, values, period=24.0)
    return np.convolve(straight, np.full(_SMOOTHING_MIN, 1.0 / _SMOOTHING_MIN), mode="valid")


def _noise(seed: int) -> NDArray[np.float64]:
    """Slow noise between -1 and 1 at each minute.

    Taken from the bit generator itself, whose stream is promised to stay the same from release to release (numpy's
    compatibility policy, NEP 19), unlike that of the distributions built on it.
    """
    window_min = 15
    raw = np.random.PCG64(seed).random_raw(_MINUTES_A_DAY + window_min - 1)
    white = (np.asarray(raw, dtype=np.uint64) >> np.uint64(11)).astype(np.float64) * 2.0**-52 - 1.0
    slow = np.convolve(white, np.full(window_min, 1.0 / window_min), mode="valid")
    return np.asarray(slow / np.max(np.abs(slow)), dtype=np.float64)
