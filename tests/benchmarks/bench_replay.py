"""How long a replay of a year of minutes takes, against reading the same file with numpy alone."""

import statistics
import tempfile
import time
from datetime import UTC, datetime
from pathlib import Path

import numpy as np

from airfield_board.configuration.profile import load_airfield
from airfield_board.session.replaying import replay
from airfield_board.session.whole_files import read_for
from tests.benchmarks.invented import OPERATIONS, write_field, write_record

ROWS = 525_600
REPEATS = 3
GOAL = 3.0


def main() -> int:
    """Print the medians and the ratio; return 0 where the goal is met, else 1."""
    with tempfile.TemporaryDirectory() as name:
        folder = Path(name)
        profile, fleet = load_airfield(write_field(folder))
        record = folder / "observations.csv"
        write_record(record, ROWS)
        floor_s, replay_s = [], []
        for _ in range(REPEATS):
            began = time.perf_counter()
            table = np.loadtxt(
                record, delimiter=",", skiprows=1, dtype=[("time", "U20"), ("a", float), ("t", float), ("d", float)]
            )
            np.array([text[:-1] for text in table["time"]], dtype="datetime64[s]")
            floor_s.append(time.perf_counter() - began)
            began = time.perf_counter()
            outcome = replay(profile, fleet, read_for(profile, record, finished=True), datetime.now(UTC))
            replay_s.append(time.perf_counter() - began)
        ratio = statistics.median(replay_s) / statistics.median(floor_s)
        print(f"read with numpy alone   {statistics.median(floor_s):6.2f} s")
        print(
            f"replay, {OPERATIONS} operations   {statistics.median(replay_s):6.2f} s{ratio:8.2f} x"
            f"   ({outcome.rows:,} rows, {len(outcome.changes):,} changes)"
        )
        print(f"goal, at most {GOAL:g} x: {'met' if ratio <= GOAL else 'not met'}")
        return 0 if ratio <= GOAL else 1


if __name__ == "__main__":
    raise SystemExit(main())
