"""Invented rows for the tests of the quality checks: times in minutes after a start, everything in trade units."""

import math
from collections.abc import Sequence
from typing import Literal, NamedTuple

import numpy as np

from airfield_board.observations.observation import (
    NO_TIME_US,
    CheckedTable,
    DewpointUse,
    ObservationTable,
    Verdict,
)
from airfield_board.observations.quality import QualityMemory, QualityRules, check
from airfield_board.units import HOUR_US, MINUTE_US

START_US = 1_780_000_000_000_000
ELEVATION_M = 1200.0
FAR_FUTURE_MIN = 100_000_000.0

Setting = Literal["auto", "moist", "dry"]


class R(NamedTuple):
    """A row; ``minute`` None: a time that cannot be read."""

    minute: float | None
    qnh: float = 1013.0
    temp: float = 20.0
    dew: float = 10.0
    elevation: float = math.nan
    fault: str = ""


NAN = math.nan


def us(minute: float) -> int:
    return START_US + round(minute * MINUTE_US)


def table(rows: Sequence[R]) -> ObservationTable:
    return ObservationTable(
        time_us=np.array([NO_TIME_US if row.minute is None else us(row.minute) for row in rows], dtype=np.int64),
        altimeter_hpa=np.array([row.qnh for row in rows], dtype=np.float64),
        temperature_c=np.array([row.temp for row in rows], dtype=np.float64),
        dewpoint_c=np.array([row.dew for row in rows], dtype=np.float64),
        elevation_m=np.array([row.elevation for row in rows], dtype=np.float64),
        temperature_resolution_c=np.full(len(rows), NAN),
        dewpoint_resolution_c=np.full(len(rows), NAN),
        position=np.arange(len(rows), dtype=np.int64),
        raw=[repr(row) for row in rows],
        faults={index: row.fault for index, row in enumerate(rows) if row.fault},
    )


def run(
    rows: Sequence[R],
    humidity: Setting = "auto",
    memory: QualityMemory | None = None,
    now_min: float = FAR_FUTURE_MIN,
    elevation_m: float = ELEVATION_M,
) -> tuple[CheckedTable, QualityMemory]:
    rules = QualityRules(elevation_m=elevation_m, humidity=humidity)
    return check(table(rows), QualityMemory() if memory is None else memory, rules, us(now_min))


def verdicts(checked: CheckedTable) -> str:
    """Return a letter a row: v(alid), s(uspect), r(ejected), c(orrected by another)."""
    return "".join("vsrc"[verdict] for verdict in checked.verdict)


def judged(rows: Sequence[R], humidity: Setting = "auto", memory: QualityMemory | None = None) -> str:
    return verdicts(run(rows, humidity, memory)[0])


def uses(checked: CheckedTable) -> list[tuple[DewpointUse, float | None]]:
    """Return where the dew point of each row comes from, and its value or None."""
    return [
        (DewpointUse(int(use)), None if math.isnan(used) else float(used))
        for use, used in zip(checked.dewpoint_use, checked.dewpoint_used_c, strict=True)
    ]


def every(step_min: float, count: int, start_min: float = 0.0, like: R = R(0.0)) -> list[R]:  # noqa: B008 (frozen)
    """Return rows at a fixed interval, temperatures alternating by a tenth so that none looks stuck."""
    return [like._replace(minute=start_min + k * step_min, temp=like.temp + 0.1 * (k % 2)) for k in range(count)]


def hours(count: float) -> float:
    return count * HOUR_US / MINUTE_US


def is_valid(checked: CheckedTable) -> bool:
    return bool((checked.verdict == Verdict.VALID).all())
