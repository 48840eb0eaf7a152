"""The chain can be followed with nothing but SQL and SHA-256."""

import hashlib
import sqlite3
from contextlib import closing
from pathlib import Path

from airfield_board.history.chain import EMPTY, GENESIS, link
from tests.history.examples import make_example


def test_a_link_covers_every_part_and_the_one_before() -> None:
    # Written out by hand from the sentence in `link`'s docstring.
    expected = hashlib.sha256(bytes(32) + b'1 1784203200000000 note\n{"text":"x"}').digest()
    assert link(GENESIS, 1, 1_784_203_200_000_000, b"note", b'{"text":"x"}') == expected
    others = {
        link(expected, 1, 1_784_203_200_000_000, b"note", b'{"text":"x"}'),
        link(GENESIS, 2, 1_784_203_200_000_000, b"note", b'{"text":"x"}'),
        link(GENESIS, 1, 1_784_203_200_000_001, b"note", b'{"text":"x"}'),
        link(GENESIS, 1, 1_784_203_200_000_000, b"stop", b'{"text":"x"}'),
        link(GENESIS, 1, 1_784_203_200_000_000, b"note", b'{"text":"y"}'),
    }
    assert len(others) == 5
    assert expected not in others


def test_the_published_digest_of_the_hash_is_used() -> None:
    # SHA-256 of "abc": FIPS 180-4, example of the secure hash standard (NIST CSRC example values).
    assert hashlib.sha256(b"abc").hexdigest().startswith("ba7816bf8f01cfea414140de5dae2223")


def test_a_history_is_followed_from_outside(tmp_path: Path) -> None:
    path = make_example(tmp_path)
    with closing(sqlite3.connect(path)) as connection:
        rows = connection.execute("SELECT seq, at_us, kind, body, hash FROM journal ORDER BY seq").fetchall()
    before = bytes(32)
    for number, (seq, at_us, kind, body, stored) in enumerate(rows, start=1):
        assert seq == number
        before = hashlib.sha256(before + f"{seq} {at_us} {kind}\n{body}".encode()).digest()
        assert before == stored
    assert len(rows) == 17


def test_the_head_of_nothing_is_the_genesis() -> None:
    assert (EMPTY.records, EMPTY.hash) == (0, bytes(32))
