"""A recorder killed at any moment, or out of disk: what it reported as recorded is there, and the chain holds."""

import re
import subprocess
import sys
from pathlib import Path

import pytest

from airfield_board.history.lock import holder_of
from airfield_board.history.records import RecordKind
from airfield_board.history.store import History
from airfield_board.history.verify import verify
from tests.history.examples import START, folder_state

CLONE = Path(__file__).parents[2]
ROUNDS = 15


def writer_command(task: str, path: Path) -> list[str]:
    return [sys.executable, "-m", "tests.history.writer", task, str(path)]


def test_whatever_was_reported_survives_a_kill(tmp_path: Path) -> None:
    path = tmp_path / "history.db"
    for round_number in range(ROUNDS):
        with subprocess.Popen(  # noqa: S603 - this test's own program
            writer_command("endless", path), cwd=CLONE, stdout=subprocess.PIPE, text=True
        ) as writer:
            assert writer.stdout is not None
            reported = [int(writer.stdout.readline()) for _ in range(1 + 3 * round_number)]
            assert holder_of(path) is not None
            writer.kill()
            reported += [int(line) for line in writer.stdout.read().split()]
        assert holder_of(path) is None
        before = folder_state(tmp_path)
        found = verify(path)
        assert folder_state(tmp_path) == before
        assert found.ok, found.faults
        # At most one append had been committed without having been reported.
        assert reported[-1] <= found.records <= reported[-1] + 3
        history = History.open_read_only(path)
        memory = history.resume()
        assert RecordKind.MESSAGE not in {entry.kind for entry in history.records(kinds={RecordKind.MESSAGE})}
        history.close()
        if found.records == reported[-1]:
            assert memory is None if len(reported) == 1 and round_number == 0 else memory is not None
    history = History.open(path, now=START, program_version="0.1.0")
    starts = list(history.records(kinds={RecordKind.START}))
    history.close()
    assert len(starts) == ROUNDS + 1
    assert verify(path).ok


@pytest.mark.skipif(sys.platform == "win32", reason="the limit on a file's size is POSIX")
def test_a_disk_that_fills_up_is_said_and_loses_nothing(tmp_path: Path) -> None:
    path = tmp_path / "history.db"
    done = subprocess.run(  # noqa: S603 - this test's own program
        writer_command("full", path), cwd=CLONE, capture_output=True, text=True, check=True
    )
    lines = done.stdout.splitlines()
    assert len(lines) == 5
    for line in lines[:3]:
        assert re.search("not recorded: .*(disk is full|disk could not be read or written|too large)", line), line
    full, again = (re.fullmatch(r"recorded (\d+) counted (\d+)", line) for line in lines[3:])
    assert full is not None
    assert again is not None
    assert full[1] == full[2]
    assert int(full[1]) > 5
    assert again[1] == again[2] == str(int(full[1]) + 1)
    found = verify(path)
    assert found.ok, found.faults
    assert found.records == int(again[1]) + 1
