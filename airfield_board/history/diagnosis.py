"""What happened to a chain that does not hold: changed, dropped, added or reordered, told from the hashes left."""

import sqlite3
from collections.abc import Iterator
from dataclasses import dataclass
from enum import StrEnum

from airfield_board.history.chain import link


class Damage(StrEnum):
    """What is wrong with a history."""

    CHANGED = "changed"
    DROPPED = "dropped"
    ADDED = "added"
    REORDERED = "reordered"
    TABLE = "table"
    CUT = "cut"
    REWRITTEN = "rewritten"
    CLOSING_HASH = "closing hash"
    MEMORY = "memory"
    SECOND_PLACE = "second place"
    SCHEMA = "schema"
    UNREADABLE = "unreadable"


@dataclass(frozen=True, slots=True, kw_only=True)
class HistoryFault:
    """One thing wrong with a history.

    Attributes
    ----------
    seq
        Number of the first record that does not fit; None where it is of no single record.
    message
        What it is, in plain words.
    """

    seq: int | None
    damage: Damage
    message: str

    def __str__(self) -> str:
        """Return the message."""
        return self.message


@dataclass(frozen=True, slots=True, kw_only=True)
class JournalRow:
    """A row of the journal as it stands in the file, texts as bytes."""

    seq: int
    at_us: int
    kind: bytes
    text: bytes
    hash: bytes

    def fits(self, previous: bytes, seq: int) -> bool:
        """Whether the row with its own hash belongs behind ``previous`` as number ``seq``."""
        return link(previous, seq, self.at_us, self.kind, self.text) == self.hash


JOURNAL_SELECT = "SELECT seq, at_us, CAST(kind AS BLOB), CAST(body AS BLOB), hash FROM journal "

_MOST_DROPPED = 10_000


def _rows(connection: sqlite3.Connection, from_seq: int) -> Iterator[JournalRow]:
    for seq, at_us, kind, text, link_hash in connection.execute(
        JOURNAL_SELECT + "WHERE seq >= ? ORDER BY seq", (from_seq,)
    ):
        yield JournalRow(seq=seq, at_us=at_us, kind=kind, text=text, hash=link_hash)


def _span(first: int, last: int) -> str:
    return f"record {first}" if first == last else f"records {first} to {last}"


def diagnose(connection: sqlite3.Connection, previous: bytes, expected: int, row: JournalRow) -> HistoryFault:
    """Tell what happened where a row does not fit.

    Parameters
    ----------
    previous
        Hash of the last record that fits.
    expected
        The number due.
    row
        The first row that does not fit: of another number, or of another hash.
    """
    if row.seq < expected:
        return HistoryFault(
            seq=row.seq, damage=Damage.ADDED, message=f"record {row.seq} was added: records count from {expected}"
        )
    belongs = next((other for other in _rows(connection, row.seq) if other.fits(previous, expected)), None)
    if row.seq > expected:
        if belongs is not None:
            return HistoryFault(
                seq=expected,
                damage=Damage.REORDERED,
                message=f"records were reordered: record {expected} stands in the place of record {belongs.seq}",
            )
        return HistoryFault(
            seq=expected,
            damage=Damage.DROPPED,
            message=f"{_span(expected, row.seq - 1)} dropped: {'it is' if row.seq == expected + 1 else 'they are'} "
            "missing from the history",
        )
    if belongs is not None:
        return _moved(connection, expected, row, belongs)
    exchanged = next(
        (
            other
            for other in _rows(connection, expected + 1)
            if link(previous, expected, other.at_us, other.kind, other.text) == row.hash
        ),
        None,
    )
    if exchanged is not None:
        return HistoryFault(
            seq=expected,
            damage=Damage.REORDERED,
            message=f"records were reordered: what record {expected} said stands in record {exchanged.seq}",
        )
    return _changed(connection, expected, row)


def _moved(connection: sqlite3.Connection, expected: int, row: JournalRow, belongs: JournalRow) -> HistoryFault:
    # Whether the row in the way is a record of this history shows where it fits behind another one.
    elsewhere = row.fits(belongs.hash, expected + 1) or any(
        row.fits(other.hash, other.seq) or row.fits(other.hash, other.seq + 1)
        for other in _rows(connection, expected + 1)
    )
    if elsewhere:
        return HistoryFault(
            seq=expected,
            damage=Damage.REORDERED,
            message=f"records were reordered: record {expected} stands in the place of record {belongs.seq}",
        )
    return HistoryFault(
        seq=expected,
        damage=Damage.ADDED,
        message=f"{_span(expected, belongs.seq - 1)} added: the record that belongs there stands in the place of "
        f"record {belongs.seq}",
    )


def _changed(connection: sqlite3.Connection, expected: int, row: JournalRow) -> HistoryFault:
    following = next(_rows(connection, expected + 1), None)
    if following is not None and following.seq == expected + 1 and not following.fits(row.hash, expected + 1):
        for dropped in range(1, _MOST_DROPPED):
            if following.fits(row.hash, expected + 1 + dropped):
                return HistoryFault(
                    seq=expected,
                    damage=Damage.DROPPED,
                    message=f"{_span(expected, expected + dropped - 1)} dropped, and those behind numbered anew",
                )
    message = f"record {expected} was changed: it does not fit its hash"
    if expected > 1:
        message += f" (or record {expected - 1} was changed and its hash made anew)"
    return HistoryFault(seq=expected, damage=Damage.CHANGED, message=message)
