"""What can be asked of a history."""

import json
import sqlite3
from collections.abc import Collection, Iterator
from dataclasses import dataclass
from datetime import datetime
from pathlib import Path
from typing import Any

import numpy as np
from numpy.typing import NDArray

from airfield_board.clock import time_from_us
from airfield_board.history.chain import EMPTY, Head, bind
from airfield_board.history.connection import plain_errors
from airfield_board.history.errors import HistoryDamaged
from airfield_board.history.records import Json, RecordKind, StoredRecord, body_from_text, json_text
from airfield_board.history.schema import SqlValue
from airfield_board.observations.observation import Verdict

_BATCH = 2_000
_RECENT_UNTIMED = 1_000
_HARMLESS = (
    RecordKind.START,
    RecordKind.STOP,
    RecordKind.ACKNOWLEDGEMENT,
    RecordKind.ACKNOWLEDGEMENT_WITHDRAWN,
    RecordKind.NOTE,
    RecordKind.MESSAGE,
)
"""Records that may follow the recorder's memory without making it out of date: they judge nothing."""


@dataclass(frozen=True, slots=True, kw_only=True, eq=False)
class ObservationColumns:
    """Recorded observations, in order of time and then of arrival; arrays of shape (n,).

    Attributes
    ----------
    seq
        Record numbers.
    time_us
        UTC microseconds.
    verdict
        A `Verdict` each. A correction that came later is a row of its own: the last valid one of a time counts.
    late
        True for a row older than the newest one judged before it.
    density_altitude_ft, uncertainty_ft
        NaN where the row was not used.
    """

    seq: NDArray[np.int64]
    time_us: NDArray[np.int64]
    verdict: NDArray[np.int8]
    late: NDArray[np.bool_]
    density_altitude_ft: NDArray[np.float64]
    uncertainty_ft: NDArray[np.float64]

    def __len__(self) -> int:
        return len(self.time_us)


@dataclass(frozen=True, slots=True, kw_only=True)
class Acknowledgement:
    """Who acknowledged a change, and when."""

    seq: int
    at: datetime
    initials: str


class HistoryQueries:
    """Reads from one connection, on the thread that opened it.

    Every method raises `UserError` with plain words where the file cannot be read.
    """

    def __init__(self, path: Path, connection: sqlite3.Connection) -> None:
        self._path = path
        self._connection = connection

    @property
    def path(self) -> Path:
        """The history's file."""
        return self._path

    def _rows(self, sql: str, *values: SqlValue) -> list[tuple[Any, ...]]:
        with plain_errors(self._path):
            return self._connection.execute(sql, values).fetchall()

    def _stored(self, sql: str, *values: SqlValue) -> tuple[StoredRecord, ...]:
        return tuple(self._record(row) for row in self._rows(sql, *values))

    def _record(self, row: tuple[Any, ...]) -> StoredRecord:
        seq, at_us, kind_text, text, link_hash = row
        try:
            kind = RecordKind(kind_text)
            body = body_from_text(kind, at_us, text)
            at = time_from_us(at_us)
        except (ValueError, TypeError, OverflowError, RecursionError) as error:
            raise HistoryDamaged(f"{self._path}: record {seq} cannot be read: {error}") from error
        return StoredRecord(seq=seq, kind=kind, at=at, body=body, hash=link_hash)

    def head(self) -> Head:
        """Return the number of records and the hash of the last."""
        for seq, link_hash in self._rows("SELECT seq, hash FROM journal ORDER BY seq DESC LIMIT 1"):
            return Head(records=seq, hash=link_hash)
        return EMPTY

    @property
    def count(self) -> int:
        """How many records there are."""
        return self.head().records

    @property
    def head_hash(self) -> str:
        """The last record's hash, hexadecimal: the closing hash that reports print."""
        return self.head().hash.hex()

    def records(
        self, from_seq: int = 1, until_seq: int | None = None, kinds: Collection[RecordKind] | None = None
    ) -> Iterator[StoredRecord]:
        """Yield records in the order they were recorded.

        Parameters
        ----------
        from_seq
            The first number.
        until_seq
            The last number, included; None: to the end as it is when asked for.
        kinds
            Only these; None: all.
        """
        last = self.count if until_seq is None else until_seq
        if kinds is not None and RecordKind.OBSERVATION not in kinds:
            for row in self._rows(
                "SELECT seq, at_us, kind, body, hash FROM journal WHERE kind <> 'observation' "
                "AND kind IN (SELECT value FROM json_each(?)) AND seq BETWEEN ? AND ? ORDER BY seq",
                json_text([str(kind) for kind in kinds]),
                from_seq,
                last,
            ):
                yield self._record(row)
            return
        for first in range(from_seq, last + 1, _BATCH):
            for row in self._rows(
                "SELECT seq, at_us, kind, body, hash FROM journal WHERE seq BETWEEN ? AND ? ORDER BY seq",
                first,
                min(first + _BATCH - 1, last),
            ):
                if kinds is None or row[2] in kinds:
                    yield self._record(row)

    def newest(self, kind: RecordKind) -> StoredRecord | None:
        """Return the last record of a kind; None where there is none."""
        if kind is RecordKind.OBSERVATION:
            found = self._stored(
                "SELECT seq, at_us, kind, body, hash FROM journal WHERE seq = (SELECT max(seq) FROM observation)"
            )
        else:
            found = self._stored(
                "SELECT seq, at_us, kind, body, hash FROM journal WHERE kind = ? AND kind <> 'observation' "
                "ORDER BY seq DESC LIMIT 1",
                kind,
            )
        return found[0] if found else None

    def observations_between(self, from_us: int, until_us: int) -> ObservationColumns:
        """Return the observations with times in [from, until), used or not."""
        rows = self._rows(
            "SELECT seq, time_us, verdict, late, density_altitude_ft, uncertainty_ft FROM observation "
            "WHERE time_us >= ? AND time_us < ? ORDER BY time_us, seq",
            from_us,
            until_us,
        )
        columns = list(zip(*rows, strict=True)) if rows else [()] * 6
        return ObservationColumns(
            seq=np.array(columns[0], dtype=np.int64),
            time_us=np.array(columns[1], dtype=np.int64),
            verdict=np.array(columns[2], dtype=np.int8),
            late=np.array(columns[3], dtype=np.bool_),
            density_altitude_ft=np.array(columns[4], dtype=np.float64),
            uncertainty_ft=np.array(columns[5], dtype=np.float64),
        )

    def observation_records(
        self, from_us: int, until_us: int, verdicts: Collection[Verdict] | None = None
    ) -> tuple[StoredRecord, ...]:
        """Return the records of the observations with times in [from, until), in order of time and then of arrival.

        Parameters
        ----------
        verdicts
            Only those with one of these; None: all.
        """
        found = self._rows(
            "SELECT j.seq, j.at_us, j.kind, j.body, j.hash, o.verdict FROM observation o JOIN journal j USING (seq) "
            "WHERE o.time_us >= ? AND o.time_us < ? ORDER BY o.time_us, o.seq",
            from_us,
            until_us,
        )
        return tuple(self._record(row[:5]) for row in found if verdicts is None or row[5] in verdicts)

    def untimed_observation_records(self) -> tuple[StoredRecord, ...]:
        """Return the records of the last thousand observations whose time could not be read, the newest first."""
        return self._stored(
            "SELECT seq, at_us, kind, body, hash FROM journal WHERE seq IN "
            "(SELECT seq FROM observation WHERE time_us IS NULL ORDER BY seq DESC LIMIT ?) ORDER BY seq DESC",
            _RECENT_UNTIMED,
        )

    def changes_between(self, from_us: int, until_us: int, *, scope: str | None = None) -> tuple[StoredRecord, ...]:
        """Return the changes with times in [from, until), in order of time and then of arrival.

        Parameters
        ----------
        scope
            ``limit`` or ``operation``; None: both.
        """
        return self._stored(
            "SELECT j.seq, j.at_us, j.kind, j.body, j.hash FROM change c JOIN journal j USING (seq) "
            "WHERE c.time_us >= ? AND c.time_us < ? AND coalesce(c.scope = ?, 1) ORDER BY c.time_us, c.seq",
            from_us,
            until_us,
            scope,
        )

    def open_changes(self, *, scope: str = "operation") -> tuple[StoredRecord, ...]:
        """Return the changes to HOLD or NO DATA that nobody has acknowledged, in order of arrival.

        Parameters
        ----------
        scope
            Of the changes: ``operation`` for what a row shows, ``limit`` for a body that names no scope.
        """
        return self._stored(
            "SELECT j.seq, j.at_us, j.kind, j.body, j.hash FROM change c JOIN journal j USING (seq) "
            "WHERE c.to_state IN ('hold', 'no_data') AND c.scope = ? AND coalesce((SELECT a.withdrawn "
            "FROM acknowledgement a WHERE a.change_seq = c.seq ORDER BY a.seq DESC LIMIT 1), 1) = 1 ORDER BY c.seq",
            scope,
        )

    def acknowledgements(self, changes: Collection[int]) -> dict[int, Acknowledgement]:
        """Return the standing acknowledgement of each of the given changes that has one, by the change's number."""
        standing = {}
        for change in changes:
            for seq, at_us, initials, withdrawn in self._rows(
                "SELECT seq, at_us, initials, withdrawn FROM acknowledgement WHERE change_seq = ? "
                "ORDER BY seq DESC LIMIT 1",
                change,
            ):
                if not withdrawn:
                    standing[change] = Acknowledgement(
                        seq=seq,
                        at=time_from_us(at_us),
                        initials=str(initials),
                    )
        return standing

    def latest_configuration(self, kind: str) -> StoredRecord | None:
        """Return the last recorded configuration of a kind (``profile``, ``fleet``); None where there is none."""
        found = self._stored(
            "SELECT seq, at_us, kind, body, hash FROM journal WHERE seq = "
            "(SELECT max(seq) FROM configuration WHERE kind = ?)",
            kind,
        )
        return found[0] if found else None

    def resume(self) -> tuple[int, Json] | None:
        """Return the recorder's memory and the number of the last record at that time.

        None where there is none, where it does not fit the record it was taken at, or where records that judge
        something came after it: then the recorder judges the journal anew.
        """
        for seq, text, tie in self._rows("SELECT seq, CAST(value AS BLOB), hash FROM resume"):
            taken_at = self._rows("SELECT hash FROM journal WHERE seq = ?", seq)
            head_hash = taken_at[0][0] if taken_at else EMPTY.hash
            if (not taken_at and seq != 0) or bind(head_hash, text) != tie:
                return None
            if any(
                kind not in _HARMLESS for (kind,) in self._rows("SELECT DISTINCT kind FROM journal WHERE seq > ?", seq)
            ):
                return None
            return seq, json.loads(text)
        return None
