"""How long one poll takes, with 40 operations and a new row each time, everything recorded durably.

For comparison, in the same run: one durable commit of one row by SQLite alone, on the same disk.
"""

import sqlite3
import statistics
import tempfile
import time
from datetime import UTC, datetime, timedelta
from pathlib import Path

from airfield_board.clock import SteppedClock, iso_utc
from airfield_board.session.board_state import Mode
from airfield_board.session.recorder import Recorder
from tests.benchmarks.invented import OPERATIONS, write_field, write_record

POLLS = 200
GOAL_S = 0.005


def main() -> int:
    """Print the medians and the ratio; return 0 where the goal is met, else 1."""
    with tempfile.TemporaryDirectory() as name:
        folder = Path(name)
        profile = write_field(folder)
        record = folder / "observations.csv"
        start = datetime(2025, 7, 1, tzinfo=UTC)
        write_record(record, 1440, start)
        clock = SteppedClock(start + timedelta(minutes=1439))
        recorder = Recorder.open(profile, clock=clock, mode=Mode.LIVE)
        recorder.poll()
        new_s, same_s, commit_s = [], [], []
        other = sqlite3.connect(folder / "other.db", isolation_level=None)
        other.execute("PRAGMA journal_mode=WAL")
        other.execute("PRAGMA synchronous=FULL")
        other.execute("CREATE TABLE line (text TEXT)")
        for number in range(POLLS):
            when = start + timedelta(minutes=1440 + number)
            with record.open("a", encoding="utf-8") as file:
                file.write(f"{iso_utc(when)},1015.{number % 10},{20 + number % 7 / 10},5.0\n")
            clock.move_to(when)
            began = time.perf_counter()
            recorder.poll()
            new_s.append(time.perf_counter() - began)
            began = time.perf_counter()
            recorder.poll()
            same_s.append(time.perf_counter() - began)
            began = time.perf_counter()
            other.execute("INSERT INTO line VALUES ('x')")
            commit_s.append(time.perf_counter() - began)
        recorder.close()
        other.close()
    commit, new, same = (statistics.median(each) for each in (commit_s, new_s, same_s))
    print(f"one durable commit alone     {commit * 1e3:7.2f} ms")
    print(f"poll, {OPERATIONS} operations, new row  {new * 1e3:7.2f} ms{new / commit:8.1f} x")
    print(f"poll, nothing new            {same * 1e3:7.2f} ms{same / commit:8.1f} x")
    met = new - commit <= GOAL_S
    print(f"goal, under {GOAL_S * 1e3:g} ms (without the commit): {'met' if met else 'not met'}")
    return 0 if met else 1


if __name__ == "__main__":
    raise SystemExit(main())
