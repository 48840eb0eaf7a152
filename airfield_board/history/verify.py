"""Proves a history whole and unaltered, or names the first record that does not fit.

Goes through the journal from the first record to the last: numbers without gaps, each hash over the record and the one
before, every row of the typed tables as the record says. Then the end against the second place, the recorder's memory
against its record, and the file's own structure. The file is only read.
"""

import sqlite3
from collections.abc import Callable
from contextlib import closing, suppress
from dataclasses import dataclass
from pathlib import Path
from typing import Any

from airfield_board.errors import UserError
from airfield_board.history.chain import EMPTY, GENESIS, Head, bind, link
from airfield_board.history.connection import Reading, connect_reader
from airfield_board.history.diagnosis import JOURNAL_SELECT, Damage, HistoryFault, JournalRow, diagnose
from airfield_board.history.errors import SQL_ERRORS, HistoryDamaged, NotAHistory, plain_reason
from airfield_board.history.head_file import head_path, read_heads
from airfield_board.history.records import RecordKind, body_from_text
from airfield_board.history.schema import TYPED, expected_objects, objects_of, version_of

Progress = Callable[[int, int], None]

_PROGRESS_STEP = 10_000
_ATTEMPTS = 20
_HASH_DIGITS = 64


@dataclass(frozen=True, slots=True, kw_only=True)
class Verification:
    """What a verification found.

    Attributes
    ----------
    records
        How many records fit, from the first on.
    head_hash
        Hash of the last of them, hexadecimal: the closing hash; empty where there is none.
    faults
        What is wrong; the first record that does not fit comes first.
    notes
        What the verification could not prove, or should be known.
    closing_record
        Number of the record that the given closing hash is of; None where none was given or it was not found.
    """

    records: int
    head_hash: str
    faults: tuple[HistoryFault, ...]
    notes: tuple[str, ...]
    closing_record: int | None

    @property
    def ok(self) -> bool:
        """Whether the history is whole and unaltered, as far as can be proved."""
        return not self.faults


class _Broken(Exception):
    """Carries the first fault out of the scan."""

    def __init__(self, fault: HistoryFault) -> None:
        super().__init__(fault.message)
        self.fault = fault


class _TypedRows:
    """The rows of one typed table, taken in step with the journal."""

    def __init__(self, connection: sqlite3.Connection, name: str, select: str) -> None:
        self._name = name
        self._cursor = connection.execute(select)
        self._next: tuple[Any, ...] | None = self._cursor.fetchone()

    def check(self, seq: int, expected: tuple[tuple[Any, ...], ...]) -> None:
        """Compare the rows of one record with what the record says."""
        for row in expected:
            found = self._next
            if found == row:
                self._next = self._cursor.fetchone()
                continue
            if found is None or found[0] > seq:
                raise _Broken(self._fault(seq, f"record {seq} is missing from"))
            if found[0] < seq:
                raise _Broken(self._fault(found[0], f"record {found[0]} has no place in"))
            raise _Broken(self._fault(seq, f"record {seq} was changed in"))

    def check_end(self) -> None:
        """See that no row is left."""
        if self._next is not None:
            raise _Broken(self._fault(self._next[0], f"record {self._next[0]} has no place in"))

    def _fault(self, seq: int, what: str) -> HistoryFault:
        return HistoryFault(
            seq=seq, damage=Damage.TABLE, message=f"{what} the table {self._name}, which disagrees with the journal"
        )


class _Scan:
    """One walk through the journal."""

    def __init__(self, connection: sqlite3.Connection, closing_hash: bytes | None, progress: Progress | None) -> None:
        self._connection = connection
        self._closing_hash = closing_hash
        self._progress = progress
        self.head = EMPTY
        self.closing_record: int | None = None
        self.hash_at: dict[int, bytes] = {0: GENESIS}
        self.faults: list[HistoryFault] = []
        self.notes: list[str] = []

    def walk(self, keep: frozenset[int]) -> None:
        """Go from the first record to the last or to the first that does not fit.

        Parameters
        ----------
        keep
            Numbers of the records whose hashes are wanted afterwards.
        """
        try:
            self._walk(keep)
        except _Broken as broken:
            self.faults.append(broken.fault)
        except (*SQL_ERRORS, TypeError) as error:
            # TypeError: a column whose type was changed in the file.
            reason = plain_reason(error)
            self.faults.append(
                HistoryFault(
                    seq=self.head.records + 1,
                    damage=Damage.UNREADABLE,
                    message=f"record {self.head.records + 1} cannot be read: {reason}",
                )
            )

    def _walk(self, keep: frozenset[int]) -> None:
        connection = self._connection
        typed = {table.name: _TypedRows(connection, table.name, table.select) for table in TYPED.values()}
        (total,) = connection.execute("SELECT max(seq) FROM journal").fetchone()
        previous, seq = GENESIS, 0
        for found_seq, at_us, kind_text, text, link_hash in connection.execute(JOURNAL_SELECT + "ORDER BY seq"):
            if found_seq != seq + 1 or link(previous, found_seq, at_us, kind_text, text) != link_hash:
                row = JournalRow(seq=found_seq, at_us=at_us, kind=kind_text, text=text, hash=link_hash)
                raise _Broken(diagnose(connection, previous, seq + 1, row))
            self._check_record(found_seq, at_us, kind_text, text, typed)
            previous, seq = link_hash, found_seq
            self.head = Head(records=seq, hash=previous)
            if seq in keep:
                self.hash_at[seq] = previous
            if previous == self._closing_hash:
                self.closing_record = seq
            if self._progress is not None and seq % _PROGRESS_STEP == 0:
                self._progress(seq, total)
        for rows in typed.values():
            rows.check_end()
        if self._progress is not None and seq:
            self._progress(seq, seq)

    def _check_record(self, seq: int, at_us: int, kind_text: bytes, text: bytes, typed: dict[str, _TypedRows]) -> None:
        try:
            kind = RecordKind(kind_text.decode())
            body = body_from_text(kind, at_us, text)
            table = TYPED.get(kind)
            rows = () if table is None else table.rows(seq, at_us, body)
        except (ValueError, RecursionError) as error:
            raise _Broken(
                HistoryFault(
                    seq=seq, damage=Damage.CHANGED, message=f"record {seq} is not of this program's making: {error}"
                )
            ) from error
        if table is not None:
            typed[table.name].check(seq, rows)
        if kind is RecordKind.MESSAGE and body.get("topic") == "history":
            message = f"record {seq}: at a start of the recorder, {body.get('text')}"
            if "expected" in body:
                self.faults.append(HistoryFault(seq=seq, damage=Damage.CUT, message=message))
            else:
                self.notes.append(message)


def closing_hash_from_text(text: str) -> bytes:
    """Read a closing hash as somebody typed it.

    Raises
    ------
    UserError
        Where it is not 64 hexadecimal digits.
    """
    digits = "".join(text.split()).lower()
    if len(digits) != _HASH_DIGITS or any(digit not in "0123456789abcdef" for digit in digits):
        raise UserError(f"{text}: a closing hash is {_HASH_DIGITS} hexadecimal digits")
    return bytes.fromhex(digits)


def verify(path: Path, closing_hash: str | None = None, progress: Progress | None = None) -> Verification:
    """Prove a history whole and unaltered.

    Parameters
    ----------
    path
        The history's file; its second place, where there is one, lies beside it.
    closing_hash
        A hash noted earlier: it must be that of one of the records.
    progress
        Called now and then with the records done and all there are.

    Returns
    -------
    Verification
        Also where the file is damaged.

    Raises
    ------
    UserError
        Where there is no such file, it is no history, or the closing hash is none.
    """
    wanted = None if closing_hash is None else closing_hash_from_text(closing_hash)
    path = path.resolve()
    for _ in range(_ATTEMPTS - 1):
        found, disturbed = _verify_once(path, wanted, progress)
        # A recorder that started meanwhile may have moved what was read: then it is read again, with it running.
        if not disturbed:
            return found
    return _verify_once(path, wanted, progress)[0]


def _verify_once(path: Path, wanted: bytes | None, progress: Progress | None) -> tuple[Verification, bool]:
    try:
        reading = connect_reader(path)
    except (NotAHistory, HistoryDamaged) as error:
        if not head_path(path).is_file():
            raise
        fault = HistoryFault(seq=None, damage=Damage.UNREADABLE, message=str(error))
        return Verification(records=0, head_hash="", faults=(fault,), notes=(), closing_record=None), False
    with closing(reading):
        verification = _verify_reading(reading, wanted, progress)
        return verification, reading.disturbed()


def _verify_reading(reading: Reading, wanted: bytes | None, progress: Progress | None) -> Verification:
    connection = reading.connection
    heads, head_fault = _heads_at_snapshot(reading)
    memory_seq = _memory_seq(connection)
    scan = _Scan(connection, wanted, progress)
    scan.walk(frozenset({memory_seq, *(head.records for head in heads or ())}))
    notes = scan.notes
    unbroken = not any(fault.damage is not Damage.CUT for fault in scan.faults)
    faults = list(scan.faults)
    if unbroken:
        faults += _structure_faults(connection)
        faults += _memory_faults(connection, scan)
    faults += head_fault
    if heads is None:
        notes.append(f"there is no {head_path(reading.path).name}: a tail cut off would not be seen")
    elif not heads and not head_fault:
        notes.append(f"the recorder never paused: the end was not compared with {head_path(reading.path).name}")
    elif heads and unbroken:
        faults += _end_faults(scan, heads, head_path(reading.path).name)
    if wanted is not None and scan.closing_record is None:
        faults.append(
            HistoryFault(
                seq=None,
                damage=Damage.CLOSING_HASH,
                message="the closing hash is of none of the "
                f"{scan.head.records} records that fit: the history was cut off before it, or made anew",
            )
        )
    return Verification(
        records=scan.head.records,
        head_hash=scan.head.hash.hex() if scan.head.records else "",
        faults=tuple(faults),
        notes=tuple(notes),
        closing_record=scan.closing_record,
    )


def _heads_at_snapshot(reading: Reading) -> tuple[tuple[Head, ...] | None, list[HistoryFault]]:
    """Fix what is read of the database, and return the second place as it stood at that moment.

    An empty tuple where it cannot be compared: with the fault, or because the recorder never paused.
    """
    for attempt in range(_ATTEMPTS):
        last = attempt == _ATTEMPTS - 1
        try:
            before = read_heads(reading.path)
            _fix_snapshot(reading.connection)
            if before == read_heads(reading.path):
                return before, []
        except (ValueError, OSError) as error:
            # It may have been read while it was being written.
            if last:
                _fix_snapshot(reading.connection)
                message = f"{head_path(reading.path).name} cannot be used: {error}"
                return (), [HistoryFault(seq=None, damage=Damage.SECOND_PLACE, message=message)]
        if not last and reading.connection.in_transaction:
            reading.connection.execute("ROLLBACK")
    return (), []


def _fix_snapshot(connection: sqlite3.Connection) -> None:
    # The snapshot is that of the first reading; where the file is damaged the walk says so.
    with suppress(*SQL_ERRORS):
        connection.execute("BEGIN")
        connection.execute("SELECT count(*) FROM resume").fetchone()


def _end_faults(scan: _Scan, heads: tuple[Head, ...], name: str) -> list[HistoryFault]:
    if scan.head in heads:
        return []
    expected, found = heads[0], scan.head
    if found.records < expected.records:
        return [
            HistoryFault(
                seq=found.records + 1,
                damage=Damage.CUT,
                message=f"the end was cut off: the history has {found.records} records, {name} says {expected.records}",
            )
        ]
    if scan.hash_at.get(expected.records) != expected.hash:
        return [
            HistoryFault(
                seq=None,
                damage=Damage.REWRITTEN,
                message=f"the records were made anew: record {expected.records} has another hash than {name} says",
            )
        ]
    return [
        HistoryFault(
            seq=expected.records + 1,
            damage=Damage.ADDED,
            message=f"records were added at the end: the history has {found.records}, {name} says {expected.records}",
        )
    ]


def _memory_seq(connection: sqlite3.Connection) -> int:
    try:
        found = connection.execute("SELECT seq FROM resume").fetchone()
    except SQL_ERRORS:
        return 0
    return 0 if found is None else int(found[0])


def _memory_faults(connection: sqlite3.Connection, scan: _Scan) -> list[HistoryFault]:
    try:
        for seq, text, tie in connection.execute("SELECT seq, CAST(value AS BLOB), hash FROM resume"):
            taken_at = scan.hash_at.get(seq)
            if taken_at is None or bind(taken_at, text) != tie:
                message = f"the recorder's memory does not fit record {seq}; the next start judges anew without it"
                return [HistoryFault(seq=None, damage=Damage.MEMORY, message=message)]
    except (*SQL_ERRORS, TypeError) as error:
        message = f"the recorder's memory cannot be read: {plain_reason(error)}"
        return [HistoryFault(seq=None, damage=Damage.MEMORY, message=message)]
    return []


def _structure_faults(connection: sqlite3.Connection) -> list[HistoryFault]:
    try:
        expected, found = expected_objects(version_of(connection)), objects_of(connection)
        for name in sorted(expected.keys() | found.keys()):
            if expected.get(name) != found.get(name):
                what = "missing" if name not in found else "not of this program" if name not in expected else "changed"
                message = f"the part {name} of the database's structure is {what}"
                return [HistoryFault(seq=None, damage=Damage.SCHEMA, message=message)]
        (answer,) = connection.execute("PRAGMA integrity_check(1)").fetchone()
    except SQL_ERRORS as error:
        answer = plain_reason(error)
    if answer == "ok":
        return []
    message = f"the database file is damaged, though every record fits: {answer}"
    return [HistoryFault(seq=None, damage=Damage.UNREADABLE, message=message)]
