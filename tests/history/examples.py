"""Invented records, and ways to spoil a history as no program should."""

import shutil
import sqlite3
from collections.abc import Iterator, Mapping
from contextlib import closing, contextmanager
from datetime import UTC, datetime, timedelta
from pathlib import Path
from typing import Any

from airfield_board.clock import us_from_time
from airfield_board.history.records import Json, Record, RecordKind
from airfield_board.history.store import History

START = datetime(2026, 7, 16, 12, 0, tzinfo=UTC)
START_US = us_from_time(START)
MINUTE = timedelta(minutes=1)
MINUTE_US = 60_000_000


def open_new(folder: Path, name: str = "history.db") -> History:
    return History.open(folder / name, now=START, program_version="0.1.0", busy_s=0.0)


def observation(minute: int, **more: Json) -> Record:
    """Row of a minute after START, read three seconds later."""
    at = START + minute * MINUTE + timedelta(seconds=3)
    time_us = START_US + minute * MINUTE_US
    body: dict[str, Json] = {
        "time": time_us,
        "read": us_from_time(at),
        "raw": f"2026-07-16T{12 + minute // 60:02d}:{minute % 60:02d}:00Z,30.01,31.{minute % 10},4.0",
        "pos": 40 * minute,
        "format": "csv",
        "values": {"altimeter_hpa": 1016.2553230956, "temperature_c": 31.0 + (minute % 10) / 10, "dewpoint_c": 4.0},
        "verdict": "valid",
        "use": 0,
        "da_ft": 6800.1 + minute / 3,
        "u_ft": 58.123456789012345,
    }
    return Record(kind=RecordKind.OBSERVATION, at=at, body={**body, **more})


def change(minute: int, to: str, *, scope: str | None = "operation", **more: Json) -> Record:
    body: dict[str, Json] = {
        "time": START_US + minute * MINUTE_US,
        "aircraft": "tow-plane",
        "operation": "Aerotow",
        "quantity": "density altitude",
        "unit": "ft",
        "from": "near",
        "to": to,
        "value": 6999.25,
        "limit": 6950.0,
    }
    if scope is not None:
        body["scope"] = scope
    return Record(kind=RecordKind.CHANGE, at=START + minute * MINUTE, body={**body, **more})


def record(kind: RecordKind, minute: int = 0, /, **body: Json) -> Record:
    return Record(kind=kind, at=START + minute * MINUTE, body=body)


def configuration(kind: str, text: str, minute: int = 0) -> Record:
    return record(RecordKind.CONFIGURATION, minute, kind=kind, name=f"{kind}.yaml", sha256="ab" * 32, text=text)


def one_of_each() -> tuple[Record, ...]:
    """A record of every kind but start; with the start before them they are records 2 to 17."""
    return (
        configuration("profile", "schema: 1\nairfield: {name: Cinder Mesa}\n"),
        configuration("fleet", "schema: 1\naircraft: []  # invented\n"),
        observation(0),
        observation(1),
        change(1, "hold"),
        observation(2, verdict="rejected", reason="temperature out of range", da_ft=None, u_ft=None),
        observation(3, time=None, verdict="rejected", fault="the time cannot be read", da_ft=None, u_ft=None),
        record(RecordKind.ACKNOWLEDGEMENT, 3, changes=[6], initials="QX"),
        record(RecordKind.ACKNOWLEDGEMENT_WITHDRAWN, 4, changes=[6], initials="QX"),
        record(RecordKind.NOTE, 5, about="day", text="Gusts over the north end – sensor wet", initials="QX"),
        record(
            RecordKind.EPISODE,
            6,
            start=START_US + MINUTE_US,
            end=None,
            aircraft="tow-plane",
            operation="Aerotow",
            quantity="density altitude",
            peak=6999.25,
        ),
        record(RecordKind.SETTINGS_ACCEPTED, 7, name="QX", where="fleet.yaml"),
        record(RecordKind.MESSAGE, 8, topic="source", text="the file is late"),
        record(RecordKind.CLOCK, 9, jumped_s=3600.0),
        observation(4),
        record(RecordKind.STOP, 10),
    )


def make_example(folder: Path) -> Path:
    """A closed history of 17 records, and the recorder's memory."""
    folder.mkdir(parents=True, exist_ok=True)
    history = open_new(folder)
    history.append(one_of_each(), resume={"newest_us": START_US, "run": [0.1, None]})
    history.close()
    return folder / "history.db"


@contextmanager
def tampering(path: Path) -> Iterator[sqlite3.Connection]:
    """Give a connection that may do anything to the rows, and put the triggers back afterwards."""
    with closing(sqlite3.connect(path, isolation_level=None)) as connection:
        triggers = connection.execute("SELECT name, sql FROM sqlite_schema WHERE type = 'trigger'").fetchall()
        for name, _ in triggers:
            connection.execute(f"DROP TRIGGER {name}")
        yield connection
        for _, sql in triggers:
            connection.execute(sql)
        connection.execute("PRAGMA wal_checkpoint(TRUNCATE)")


def as_if_killed(history: History, folder: Path, *, with_shm: bool = False) -> Path:
    """Copy the files of an open history as a killed recorder would leave them."""
    folder.mkdir()
    for ending in ("", "-wal", ".head", *(("-shm",) if with_shm else ())):
        source = history.path.with_name(history.path.name + ending)
        shutil.copyfile(source, folder / source.name)
    return folder / history.path.name


def folder_state(folder: Path) -> Mapping[str, tuple[bytes, int]]:
    """Names, contents and times of all that lies in a folder."""
    return {file.name: (file.read_bytes(), file.stat().st_mtime_ns) for file in sorted(folder.iterdir())}


def contents(connection: sqlite3.Connection, table: str) -> list[tuple[Any, ...]]:
    """All rows of a table, in its own order."""
    return connection.execute(f"SELECT * FROM {table}").fetchall()  # noqa: S608 - names come from the tests
