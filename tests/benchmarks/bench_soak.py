"""Whether memory stays flat over 30 simulated days: a row, a poll and a painted board every minute.

``python -m tests.benchmarks.bench_soak [--days N]``

The file grows as a logger's does, everything is recorded, nobody acknowledges anything, and the clock is stepped. The
resident size at the end of the second day is compared with that at the end of the last; before the second day's end
caches of fixed size (of fonts, texts, database pages) are still being filled.
"""

import argparse
import gc
import os
import tempfile
import time
from datetime import UTC, datetime, timedelta
from pathlib import Path

from airfield_board.clock import SteppedClock
from airfield_board.session.board_state import Mode
from airfield_board.session.recorder import Recorder
from tests.benchmarks.invented import OPERATIONS, write_field, write_record

START = datetime(2025, 7, 1, tzinfo=UTC)
SIZE_PX = (1440, 900)
SETTLED_DAY = 2
GOAL = 1.05
"""Most that the resident size may have grown by, from the second day to the last."""

_DAY_MIN = 1440


def resident_bytes() -> int:
    """Return the resident size of this process, as Linux tells it."""
    pages = int(Path("/proc/self/statm").read_text(encoding="ascii").split()[1])
    return pages * os.sysconf("SC_PAGE_SIZE")


def measure(folder: Path, days: int) -> dict[int, int]:
    """Run the days, and return the resident size at the end of each, by its number from 1."""
    os.environ["QT_QPA_PLATFORM"] = "offscreen"
    from airfield_board.window.board_view import BoardView
    from airfield_board.window.picture import offscreen_application

    application = offscreen_application()
    profile = write_field(folder)
    whole = folder / "whole.csv"
    write_record(whole, days * _DAY_MIN, START)
    view = BoardView()
    view.resize(*SIZE_PX)
    view.show()
    clock = SteppedClock(START)
    recorder: Recorder | None = None
    sizes: dict[int, int] = {}
    with whole.open(encoding="utf-8") as rows, (folder / "observations.csv").open("w", encoding="utf-8") as logger:
        logger.write(rows.readline())
        for minute, row in enumerate(rows):
            logger.write(row)
            logger.flush()
            clock.move_to(START + timedelta(minutes=minute, seconds=10))
            recorder = recorder or Recorder.open(profile, clock=clock, mode=Mode.LIVE)
            view.show_state(recorder.poll(), clock.now())
            view.ensure_plot()
            view.header.painted = []
            application.processEvents()
            if not view.header.painted:
                raise SystemExit(f"nothing was painted in minute {minute}")
            if (minute + 1) % _DAY_MIN == 0:
                gc.collect()
                day = (minute + 1) // _DAY_MIN
                sizes[day] = resident_bytes()
                print(
                    f"day {day:3}   {sizes[day] / 1e6:7.1f} MB   {time.process_time():7.0f} s of processor", flush=True
                )
    if recorder is not None:
        recorder.close()
    view.close()
    return sizes


def main() -> int:
    """Print the resident sizes and their ratio; return 0 where the goal is met, else 1."""
    parser = argparse.ArgumentParser(description=__doc__)
    parser.add_argument("--days", type=int, default=30)
    days = parser.parse_args().days
    if days <= SETTLED_DAY:
        parser.error(f"expected more than {SETTLED_DAY} days")
    with tempfile.TemporaryDirectory() as name:
        sizes = measure(Path(name), days)
    ratio = sizes[days] / sizes[SETTLED_DAY]
    print(f"{OPERATIONS} operations, a row a minute: day {SETTLED_DAY} {sizes[SETTLED_DAY] / 1e6:.1f} MB, ", end="")
    print(f"day {days} {sizes[days] / 1e6:.1f} MB, {ratio:.3f} x")
    print(f"goal, at most {GOAL:g} x: {'met' if ratio <= GOAL else 'not met'}")
    return 0 if ratio <= GOAL else 1


if __name__ == "__main__":
    raise SystemExit(main())
