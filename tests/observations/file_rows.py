"""Invented observation files, and reading them with fewer words."""

from datetime import UTC, datetime, timedelta

import numpy as np

from airfield_board.clock import us_from_time
from airfield_board.observations.formats.reading import ReadingRules, ReadResult
from airfield_board.observations.formats.recognise import read_table

HEADER = "time,altimeter_inhg,temperature_c,dewpoint_c\n"
FILE_TIME = datetime(2026, 7, 15, 12, 0, tzinfo=UTC)


def rules(
    *,
    time_zone: str = "UTC",
    file_time: datetime = FILE_TIME,
    finished: bool = True,
    station: str = "",
) -> ReadingRules:
    return ReadingRules(
        time_zone=time_zone, file_time=file_time, finished=finished, station=station, name="observations.txt"
    )


def read(
    content: str | bytes,
    *,
    time_zone: str = "UTC",
    file_time: datetime = FILE_TIME,
    finished: bool = True,
    station: str = "",
) -> ReadResult:
    given = rules(time_zone=time_zone, file_time=file_time, finished=finished, station=station)
    return read_table(content if isinstance(content, bytes) else content.encode(), given)


def us(text: str) -> int:
    return us_from_time(datetime.fromisoformat(text))


def invented_rows(count: int, *, start: datetime, step: timedelta = timedelta(minutes=1), seed: int = 1) -> list[str]:
    """Rows of an invented warm spell, as a logger would write them."""
    random = np.random.default_rng(seed)
    minutes = np.arange(count) * step.total_seconds() / 60
    temperature_c = 22 + 8 * np.sin(minutes / 229) + random.normal(0, 0.1, count)
    dewpoint_c = temperature_c - random.uniform(2, 14, count)
    altimeter_inhg = 29.9 + 0.2 * np.sin(minutes / 5000)
    return [
        f"{(start + number * step).astimezone(UTC):%Y-%m-%dT%H:%M:%SZ},"
        f"{altimeter_inhg[number]:.2f},{temperature_c[number]:.1f},{dewpoint_c[number]:.1f}\n"
        for number in range(count)
    ]
