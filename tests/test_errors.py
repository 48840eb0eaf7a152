import errno
import os

import pytest

from airfield_board.errors import reason_of, shown


@pytest.mark.parametrize(
    ("text", "expected"),
    [
        ("plain", "'plain'"),
        ("two words", "'two words'"),
        ("a\nb\x1b\u202e\ud800", "'a<U+000A>b<U+001B><U+202E><U+D800>'"),
        ("x" * 60, f"'{'x' * 60}'"),
        ("x" * 61, f"'{'x' * 60}…'"),
        ("", "''"),
    ],
)
def test_a_text_from_a_file_is_safe_to_print(text: str, expected: str) -> None:
    assert shown(text) == expected


def test_the_system_s_reason_stands_alone() -> None:
    assert reason_of(OSError(errno.ENOSPC, os.strerror(errno.ENOSPC), "board.png")) == os.strerror(errno.ENOSPC)
    assert reason_of(OSError("no more room")) == "no more room"
