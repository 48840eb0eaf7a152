"""Observations as read, many at a time: one array a quantity, one row an observation."""

from collections.abc import Mapping, Sequence
from dataclasses import dataclass, field
from enum import IntEnum

import numpy as np
from numpy.typing import NDArray

NO_TIME_US = int(np.iinfo(np.int64).min)
"""Stands in ``time_us`` for a time that could not be read."""


@dataclass(frozen=True, slots=True, kw_only=True)
class ObservationTable:
    """Rows as they were read, in the order of the file, not yet checked.

    All arrays have shape (n,).

    Attributes
    ----------
    time_us
        UTC microseconds since 1970, or `NO_TIME_US`.
    altimeter_hpa, temperature_c, dewpoint_c, elevation_m
        NaN where the row does not give the value (or gives one that is no plain decimal number: see ``faults``).
    temperature_resolution_c, dewpoint_resolution_c
        The resolution the row itself implies (METAR without tenths: 1); NaN where the profile's counts.
    position
        The row's place in its source, growing with the order in the file (a line number or a byte offset).
    raw
        The text of each row, as it stood in the file; n entries, made when asked for.
    faults
        For rows that cannot be used as they stand, by row index: what is wrong, in plain words (a missing altimeter
        setting or temperature, a value that is no plain decimal number, a time that cannot be read, too many fields).
    initials
        Of the person who typed the rows in; empty for rows of a file.
    """

    time_us: NDArray[np.int64]
    altimeter_hpa: NDArray[np.float64]
    temperature_c: NDArray[np.float64]
    dewpoint_c: NDArray[np.float64]
    elevation_m: NDArray[np.float64]
    temperature_resolution_c: NDArray[np.float64]
    dewpoint_resolution_c: NDArray[np.float64]
    position: NDArray[np.int64]
    raw: Sequence[str]
    faults: Mapping[int, str] = field(default_factory=dict)
    initials: str = ""

    def __len__(self) -> int:
        return len(self.time_us)

    def take(self, rows: NDArray[np.int64]) -> "ObservationTable":
        """Return the rows of the given indices, in the order given."""
        place = {int(row): new for new, row in enumerate(rows) if int(row) in self.faults} if self.faults else {}
        return ObservationTable(
            time_us=self.time_us[rows],
            altimeter_hpa=self.altimeter_hpa[rows],
            temperature_c=self.temperature_c[rows],
            dewpoint_c=self.dewpoint_c[rows],
            elevation_m=self.elevation_m[rows],
            temperature_resolution_c=self.temperature_resolution_c[rows],
            dewpoint_resolution_c=self.dewpoint_resolution_c[rows],
            position=self.position[rows],
            raw=RawSelection(self.raw, rows),
            faults={new: self.faults[row] for row, new in place.items()},
            initials=self.initials,
        )


class RawSelection(Sequence[str]):
    """The raw texts of some rows of a table, fetched only when asked for."""

    def __init__(self, raw: Sequence[str], rows: NDArray[np.int64]) -> None:
        self._raw = raw
        self._rows = rows

    def __len__(self) -> int:
        return len(self._rows)

    def __getitem__(self, index: int) -> str:  # type: ignore[override]
        return self._raw[int(self._rows[index])]


class Verdict(IntEnum):
    """What the quality checks say of a row."""

    VALID = 0
    SUSPECT = 1
    REJECTED = 2
    SUPERSEDED = 3
    """A valid row that a later one of the same time corrects."""


class DewpointUse(IntEnum):
    """Where the dew point that counts for a row comes from."""

    OBSERVED = 0
    CARRIED = 1
    ASSUMED = 2
    DRY = 3
    """Humidity does not count."""


@dataclass(frozen=True, slots=True, kw_only=True)
class CheckedTable:
    """Rows in order of time with what the checks say of each; all arrays have shape (n,).

    Attributes
    ----------
    rows
        The rows, sorted by time (rows without a time first), those of one time in the order of the file.
    verdict
        A `Verdict` a row, int8.
    reason
        By row index: why the row is not used, or what is worth a warning of one that is; plain words.
    restart
        True for a valid row that confirms a step, or is the first valid one after more than 3 h without.
    late
        True for a row older than the newest one judged before it: it fills the day and changes no state.
    dewpoint_used_c
        The dew point that counts; NaN where humidity does not.
    dewpoint_use
        A `DewpointUse` a row, int8.
    """

    rows: ObservationTable
    verdict: NDArray[np.int8]
    reason: Mapping[int, str]
    restart: NDArray[np.bool_]
    late: NDArray[np.bool_]
    dewpoint_used_c: NDArray[np.float64]
    dewpoint_use: NDArray[np.int8]

    def __len__(self) -> int:
        return len(self.rows)
