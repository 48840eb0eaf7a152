"""Five years of one-minute observations stay below 1 GB."""

from pathlib import Path

from tests.history.examples import observation, open_new

RAW = "2026-07-16T{:06d}Z,30.01,31.0,4.0,12,270,18"
FIVE_YEARS = 5 * 525_960
"""Minutes, of 365.25 days."""


def test_five_years_of_minutes_stay_below_a_gigabyte(tmp_path: Path) -> None:
    history = open_new(tmp_path)
    step = 10_000
    sizes = []
    for _ in range(2):
        history.append(
            [observation(minute, raw=f"2026-07-16T{minute:06d}Z,30.01,31.0,4.0,12,270,18") for minute in range(step)]
        )
        history._rows("PRAGMA wal_checkpoint(TRUNCATE)")
        sizes.append((tmp_path / "history.db").stat().st_size)
    history.close()
    bytes_each = (sizes[1] - sizes[0]) / step
    assert bytes_each * FIVE_YEARS < 850e6
