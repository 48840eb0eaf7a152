"""The hash chain: each record's hash covers the record and the hash of the one before it.

What it proves: from one hash that somebody kept elsewhere, every record up to it is as it was written, none dropped,
added or moved. What it does not: a whole chain made anew, and a tail cut off, are only seen against a hash or a count
kept outside the file (the second place, a printed closing hash).
"""

from dataclasses import dataclass
from hashlib import sha256

GENESIS = bytes(32)
"""Stands for the hash before the first record."""


@dataclass(frozen=True, slots=True, kw_only=True)
class Head:
    """Where the chain ends: how many records, and the hash of the last."""

    records: int
    hash: bytes


EMPTY = Head(records=0, hash=GENESIS)


def link(previous: bytes, seq: int, at_us: int, kind: bytes, text: bytes) -> bytes:
    """Return a record's hash: SHA-256 of the previous hash, ``seq at_us kind``, a line feed and the body's text.

    Parameters
    ----------
    previous
        Hash of the record before, 32 bytes; `GENESIS` for the first.
    at_us
        UTC microseconds since 1970.
    kind, text
        UTF-8.
    """
    return sha256(b"%b%d %d %b\n%b" % (previous, seq, at_us, kind, text)).digest()


def bind(head_hash: bytes, text: bytes) -> bytes:
    """Return the hash that ties the recorder's memory to the record it was taken at."""
    return sha256(head_hash + text).digest()
