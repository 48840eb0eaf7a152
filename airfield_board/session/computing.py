"""The air of every row of a file, written as CSV; nothing is judged but the rows' own quality."""

import csv
import io
from collections.abc import Callable, Iterator, Sequence
from dataclasses import dataclass
from typing import TextIO

import numpy as np
from numpy.typing import NDArray

from airfield_board.configuration.defaults import are_elevations_ft, default_instruments
from airfield_board.errors import UserError
from airfield_board.observations.conditions import ConditionsTable, conditions_of
from airfield_board.observations.formats.reading import ReadResult
from airfield_board.observations.observation import NO_TIME_US, ObservationTable, Verdict
from airfield_board.observations.quality import QualityMemory, QualityRules, check
from airfield_board.units import ft_from_m

READ = ("time", "altimeter_hpa", "temperature_c", "dewpoint_c", "elevation_ft")
RESULTS = (
    "station_pressure_hpa",
    "pressure_altitude_ft",
    "density_altitude_ft",
    "density_altitude_dry_ft",
    "density_ratio",
    "isa_deviation_c",
    "uncertainty_ft",
    "quality",
)
_BATCH_ROWS = 50_000


@dataclass(frozen=True, slots=True, kw_only=True)
class Computed:
    """The air of every row, in the order of the file; arrays of shape (n,).

    Attributes
    ----------
    read
        The file.
    table
        Its rows in the order of the file.
    elevation_m
        The field's, else the row's own; NaN where a row gives none.
    conditions
        NaN in rows that fail a check.
    quality
        By row: "valid", or the verdict and why.
    """

    read: ReadResult
    table: ObservationTable
    elevation_m: NDArray[np.float64]
    conditions: ConditionsTable
    quality: list[str]


def compute(read: ReadResult, elevation_m: float | None, now_us: int) -> Computed:
    """Compute the air of every row.

    Parameters
    ----------
    read
        A file of observations.
    elevation_m
        Of the field; None: each row's own.
    now_us
        The clock.

    Raises
    ------
    UserError
        Where no elevation is given, neither here nor in any row.
    """
    table = read.table
    order: NDArray[np.int64] = np.argsort(table.time_us, kind="stable")
    rules = QualityRules(elevation_m=np.nan if elevation_m is None else elevation_m, humidity="dry")
    checked, _ = check(table, QualityMemory(), rules, now_us)
    place = np.empty(len(order), dtype=np.int64)
    place[order] = np.arange(len(order))
    verdict = checked.verdict[place]
    elevations_m = table.elevation_m if elevation_m is None else np.full(len(table), elevation_m)
    if elevation_m is None and len(table) and np.isnan(elevations_m).all():
        raise UserError("no row gives an elevation; say the field's with --elevation-ft")
    placed = are_elevations_ft(ft_from_m(elevations_m))
    usable = ((verdict == Verdict.VALID) | (verdict == Verdict.SUPERSEDED)) & placed
    conditions = conditions_of(
        altimeter_hpa=np.where(usable, table.altimeter_hpa, np.nan),
        temperature_c=table.temperature_c,
        dewpoint_used_c=table.dewpoint_c,
        temperature_resolution_c=table.temperature_resolution_c,
        dewpoint_resolution_c=table.dewpoint_resolution_c,
        elevation_m=elevations_m,
        instruments=default_instruments(),
    )
    quality = ["valid"] * len(table)
    for row in np.flatnonzero(verdict != Verdict.VALID).tolist():
        name = Verdict(int(verdict[row])).name.lower()
        quality[row] = f"{name}: {checked.reason.get(int(place[row]), '')}".rstrip(": ")
    for row in np.flatnonzero((verdict == Verdict.VALID) & ~usable).tolist():
        given_m = float(elevations_m[row])
        none = "no elevation" if np.isnan(given_m) else f"elevation: {given_m:.1f} m is no elevation of an airfield"
        quality[row] = f"rejected: {none}"
    return Computed(read=read, table=table, elevation_m=elevations_m, conditions=conditions, quality=quality)


def write_csv(computed: Computed, out: TextIO, progress: Callable[[int], None] | None = None) -> None:
    """Write what was read and what came of it, a row a line, in the order of the file.

    Parameters
    ----------
    out
        Opened with ``newline=""``.
    progress
        Told how many rows are written.
    """
    own = [(place, name) for place, name in enumerate(computed.read.header) if name and name not in (*READ, *RESULTS)]
    writer = csv.writer(out, lineterminator="\n")
    writer.writerow([*READ, *(name for _, name in own), *RESULTS])
    for start in range(0, len(computed.table), _BATCH_ROWS):
        stop = min(start + _BATCH_ROWS, len(computed.table))
        part = io.StringIO()
        csv.writer(part, lineterminator="\n").writerows(_lines(computed, own, start, stop))
        out.write(part.getvalue())
        if progress is not None:
            progress(stop)


def _lines(computed: Computed, own: Sequence[tuple[int, str]], start: int, stop: int) -> Iterator[tuple[str, ...]]:
    table, air, part = computed.table, computed.conditions, slice(start, stop)
    columns = [
        _times(table.time_us[part]),
        _column(table.altimeter_hpa[part], "%.4f"),
        _column(table.temperature_c[part], "%.4f"),
        _column(table.dewpoint_c[part], "%.4f"),
        _column(ft_from_m(computed.elevation_m[part]), "%.4f"),
    ]
    if own:
        fields = [computed.read.fields(row) for row in range(start, stop)]
        columns += [[line[place] if place < len(line) else "" for line in fields] for place, _ in own]
    columns += [
        _column(air.station_pressure_hpa[part], "%.5f"),
        _column(air.pressure_altitude_ft[part], "%.4f"),
        _column(air.density_altitude_ft[part], "%.4f"),
        _column(air.density_altitude_dry_ft[part], "%.4f"),
        _column(air.density_ratio[part], "%.8f"),
        _column(air.isa_deviation_c[part], "%.5f"),
        _column(air.uncertainty_ft[part], "%.4f"),
        computed.quality[part],
    ]
    return zip(*columns, strict=True)


def _column(values: NDArray[np.float64], form: str) -> list[str]:
    written = list(map(form.__mod__, values.tolist()))
    for row in np.flatnonzero(np.isnan(values)).tolist():
        written[row] = ""
    return written


def _times(time_us: NDArray[np.int64]) -> list[str]:
    known = np.where(time_us == NO_TIME_US, 0, time_us)
    whole = bool((known % 1_000_000 == 0).all())
    texts = np.datetime_as_string(known.astype("datetime64[us]"), unit="s" if whole else "us", timezone="UTC")
    written: list[str] = texts.tolist()
    for row in np.flatnonzero(time_us == NO_TIME_US).tolist():
        written[row] = ""
    return written
