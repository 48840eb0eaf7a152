"""How much of a core the window takes while nothing happens: a poll every 5 s, a day's curve on the board.

``python -m tests.benchmarks.bench_idle [--seconds N] [--offscreen]``

The program runs as a process of its own on a virtual display, or on none at all; a minute is measured, so that the
turn of a minute is in it.
"""

import argparse
import os
import subprocess
import sys
import tempfile
from contextlib import nullcontext
from datetime import UTC, datetime, timedelta
from pathlib import Path

from tests.benchmarks.bench_start import virtual_display
from tests.benchmarks.invented import OPERATIONS, write_field, write_record

GOAL = 0.02
"""Most of one core."""

_DAY_MIN = 1440

_IDLE = """
import sys, time
from pathlib import Path
from PySide6.QtCore import QTimer
from airfield_board.window import application, main_window

settle_s, measure_s = 8, float(sys.argv[2])
start = main_window.MainWindow.start
began = []

def start_and_measure(self):
    start(self)
    def begin():
        assert self.state is not None, "no board came"
        began.extend((time.perf_counter(), time.process_time()))
    def end():
        print((time.process_time() - began[1]) / (time.perf_counter() - began[0]))
        self.close()
    QTimer.singleShot(settle_s * 1000, begin)
    QTimer.singleShot(int((settle_s + measure_s) * 1000), end)

main_window.MainWindow.start = start_and_measure
sys.exit(application.run_window(Path(sys.argv[1])))
"""


def share_of_core(profile: Path, seconds: float, environment: dict[str, str]) -> float:
    """Run the window, and return its processor seconds to a second on the wall."""
    told = subprocess.run(  # noqa: S603
        [sys.executable, "-c", _IDLE, str(profile), str(seconds)],
        check=True,
        env={**os.environ, **environment},
        timeout=seconds + 60,
        stdout=subprocess.PIPE,
        text=True,
    )
    return float(told.stdout)


def main() -> int:
    """Print the share of a core; return 0 where the goal is met, else 1."""
    parser = argparse.ArgumentParser(description=__doc__)
    parser.add_argument("--seconds", type=float, default=60.0)
    parser.add_argument("--offscreen", action="store_true")
    wanted = parser.parse_args()
    with tempfile.TemporaryDirectory() as name, nullcontext("") if wanted.offscreen else virtual_display() as display:
        folder = Path(name)
        profile = write_field(folder)
        now = datetime.now(UTC).replace(second=0, microsecond=0)
        write_record(folder / "observations.csv", _DAY_MIN, now - timedelta(minutes=_DAY_MIN - 1))
        screen = {"DISPLAY": display, "QT_QPA_PLATFORM": "xcb"} if display else {"QT_QPA_PLATFORM": "offscreen"}
        share = share_of_core(profile, wanted.seconds, screen)
    print(f"idle, {OPERATIONS} operations, a poll every 5 s: {share:.2%} of a core")
    print(f"goal, under {GOAL:.0%}: {'met' if share < GOAL else 'not met'}")
    return 0 if share < GOAL else 1


if __name__ == "__main__":
    raise SystemExit(main())
