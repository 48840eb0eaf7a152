"""How large a history grows, and how fast it is written, proved and opened.

``python -m tests.benchmarks.bench_history [--days N]``
"""

import argparse
import random
import tempfile
import time
from datetime import UTC, datetime, timedelta
from pathlib import Path

from airfield_board.clock import iso_utc, us_from_time
from airfield_board.history.records import Json, Record, RecordKind
from airfield_board.history.store import History
from airfield_board.history.verify import verify

_START = datetime(2026, 1, 1, tzinfo=UTC)
_DAY_MIN = 1_440


def _observations(first_min: int, until_min: int, dice: random.Random) -> list[Record]:
    records = []
    for minute in range(first_min, until_min):
        when = _START + timedelta(minutes=minute)
        altimeter_inhg = round(29.5 + dice.random(), 2)
        temperature_c = round(dice.uniform(-5.0, 35.0), 1)
        dewpoint_c = round(temperature_c - dice.uniform(0.0, 20.0), 1)
        body: dict[str, Json] = {
            "time": us_from_time(when),
            "raw": f"{iso_utc(when)},{altimeter_inhg:.2f},{temperature_c},{dewpoint_c}",
            "pos": minute * 37,
            "format": "csv",
            "values": {
                "altimeter_hpa": altimeter_inhg * 33.86388640341,
                "temperature_c": temperature_c,
                "dewpoint_c": dewpoint_c,
            },
            "verdict": "valid",
            "use": 0,
            "da_ft": dice.uniform(2_000.0, 8_000.0),
            "u_ft": dice.uniform(50.0, 60.0),
        }
        records.append(Record(kind=RecordKind.OBSERVATION, at=when + timedelta(seconds=3), body=body))
    return records


def _single_commits(history: History, dice: random.Random, first_min: int) -> float:
    began_s = time.perf_counter()
    for minute in range(first_min, first_min + 100):
        history.append(_observations(minute, minute + 1, dice), resume={"runs": [0.5] * 500})
    return (time.perf_counter() - began_s) / 100


def main() -> None:
    """Print the figures."""
    parser = argparse.ArgumentParser(description=__doc__)
    parser.add_argument("--days", type=int, default=365)
    days = parser.parse_args().days
    dice = random.Random(1)
    with tempfile.TemporaryDirectory() as folder:
        path = Path(folder) / "history.db"
        history = History.open(path, now=_START, program_version="0")
        began_s = time.perf_counter()
        for day in range(days):
            history.append(_observations(day * _DAY_MIN, (day + 1) * _DAY_MIN, dice))
        written_s = time.perf_counter() - began_s
        commit_s = _single_commits(history, dice, days * _DAY_MIN)
        history.close(now=_START)
        count = days * _DAY_MIN + 100
        bytes_each = path.stat().st_size / count
        began_s = time.perf_counter()
        found = verify(path)
        verified_s = time.perf_counter() - began_s
        began_s = time.perf_counter()
        reader = History.open_read_only(path)
        from_us = us_from_time(_START + timedelta(days=days - 1))
        day_rows = len(reader.observations_between(from_us, from_us + _DAY_MIN * 60_000_000))
        opened_s = time.perf_counter() - began_s
        reader.close()
    print(f"{count} observations: {bytes_each:.0f} bytes each, {bytes_each * 525_960 / 1e6:.0f} MB a year")
    print(f"written in daily batches {count / written_s:.0f} a second; one by one {commit_s * 1e3:.1f} ms each")
    print(f"verified ({'whole' if found.ok else 'NOT WHOLE'}) {found.records / verified_s:.0f} records a second")
    print(f"a day of {day_rows} observations opened in {opened_s * 1e3:.0f} ms")


if __name__ == "__main__":
    main()
