"""What the source makes of a file as it stands, at one look or at several."""

import errno
import json
import os
from datetime import UTC, datetime, timedelta
from pathlib import Path
from typing import BinaryIO

import pytest

from airfield_board.clock import EPOCH
from airfield_board.observations.source import FIRST_BLOCK_BYTES, FileSource, SourceReading, SourceRules, open_file
from tests.observations.file_rows import HEADER, invented_rows, us

NOW = datetime(2026, 7, 14, 18, 0, tzinfo=UTC)
ROW = "2026-07-14T17:{:02d}:00Z,29.92,20.0,10.0\n"


def source(path: Path, **options: object) -> FileSource:
    return FileSource(path, SourceRules(time_zone="UTC"), settling_s=0.0, patience_s=60.0, **options)  # type: ignore[arg-type]


def look(path: Path, **options: object) -> SourceReading:
    return source(path, **options).read(NOW)


@pytest.fixture
def path(tmp_path: Path) -> Path:
    return tmp_path / "observations.csv"


def temperatures(reading: SourceReading) -> list[float]:
    assert reading.table is not None
    return [float(value) for value in reading.table.temperature_c]


# -- what is no file of observations


def test_a_missing_file_is_said(path: Path) -> None:
    assert look(path) == SourceReading(messages=("observations.csv does not exist (yet)",))
    assert look(path / "below").messages == ("below does not exist (yet)",)


def test_the_file_is_called_what_the_profile_calls_it(path: Path) -> None:
    named = FileSource(path, SourceRules(time_zone="UTC", name="logs/obs.csv"), settling_s=0.0, patience_s=60.0)
    assert named.read(NOW).messages == ("logs/obs.csv does not exist (yet)",)
    path.write_text("hello\n")
    assert named.read(NOW).messages[0].startswith("logs/obs.csv:1: it is none of the formats known")


def test_a_folder_is_said(tmp_path: Path) -> None:
    (tmp_path / "obs").mkdir()
    assert look(tmp_path / "obs").messages == ("obs is a folder; expected a file",)


@pytest.mark.skipif(not hasattr(os, "mkfifo"), reason="no named pipes on this system")
def test_a_pipe_is_said_without_opening_it(path: Path) -> None:
    os.mkfifo(path)
    assert look(path).messages == ("observations.csv is a pipe or a device; expected a file",)


@pytest.mark.skipif(not hasattr(os, "mkfifo"), reason="no named pipes on this system")
def test_a_pipe_that_takes_the_file_s_place_is_said(path: Path, tmp_path: Path) -> None:
    path.write_text(HEADER)
    os.mkfifo(tmp_path / "pipe")

    def opens_the_pipe(_: Path) -> BinaryIO:
        return os.fdopen(os.open(tmp_path / "pipe", os.O_RDONLY | os.O_NONBLOCK), "rb", buffering=0)

    reading = look(path, opener=opens_the_pipe)
    assert reading.messages == ("observations.csv is a pipe or a device; expected a file",)


@pytest.mark.parametrize(
    ("error", "message"),
    [
        (
            PermissionError(errno.EACCES, "Permission denied"),
            "may not be read: this program's user has no permission to",
        ),
        (FileNotFoundError(errno.ENOENT, "No such file"), "does not exist (yet)"),
        (OSError(errno.EIO, "Input/output error"), "cannot be read: Input/output error"),
        (OSError("the share is gone"), "cannot be read: the share is gone"),
    ],
)
def test_a_file_that_does_not_open_is_said(path: Path, error: OSError, message: str) -> None:
    path.write_text(HEADER)

    def fails(_: Path) -> BinaryIO:
        raise error

    assert look(path, opener=fails).messages == (f"observations.csv {message}",)


def test_a_name_that_no_file_can_have_is_said(tmp_path: Path) -> None:
    assert look(tmp_path / "a\0b").messages == ("a\0b has a name that no file can have",)


def test_a_fault_of_the_program_itself_is_not_hidden(path: Path) -> None:
    path.write_text(HEADER)

    def fails(_: Path) -> BinaryIO:
        raise ZeroDivisionError

    broken = source(path, opener=fails)
    with pytest.raises(ZeroDivisionError):
        broken.read(NOW)


@pytest.mark.parametrize(
    ("content", "message"),
    [
        (b"", "observations.csv: it is empty"),
        (b"\n\n", "observations.csv: it is empty"),
        (HEADER.encode("utf-16"), "observations.csv: it is UTF-16 text; expected UTF-8, so save it as UTF-8"),
        (HEADER.encode("utf-16-le"), "observations.csv: it begins with NUL bytes, so it is no plain text (or UTF-16)"),
        (b"\0" * 4096, "observations.csv: it begins with NUL bytes, so it is no plain text (or UTF-16)"),
        (
            (HEADER + ROW.format(1)).replace("\n", "\r").encode(),
            "observations.csv: its lines end with a carriage return",
        ),
        (HEADER[:20].encode(), "observations.csv:1: the header, its first line, is not complete yet"),
        (b"time,temprature_c\n", "observations.csv:1: 'temprature_c' is not a known name; did you mean temperature_c?"),
        (b"[" + b" " * 100, "observations.csv:1: the JSON array is broken or not complete"),
        (HEADER.encode(), "observations.csv has no rows yet"),
    ],
)
def test_content_that_gives_no_rows_is_said(path: Path, content: bytes, message: str) -> None:
    path.write_bytes(content)
    reading = look(path)
    assert reading.messages[0].startswith(message)
    assert reading.size == len(content)


def test_an_unknown_time_zone_is_said(path: Path) -> None:
    path.write_text(HEADER + ROW.format(1))
    reading = FileSource(path, SourceRules(time_zone="No/Where"), settling_s=0.0, patience_s=60.0).read(NOW)
    assert reading.messages == ("there is no time zone 'No/Where'; expected an IANA name",)


# -- what is one


@pytest.mark.parametrize("line_end", ["\n", "\r\n"])
@pytest.mark.parametrize("mark", ["", "\ufeff"])
def test_a_good_file_is_read(path: Path, line_end: str, mark: str) -> None:
    content = (mark + HEADER + ROW.format(1) + ROW.format(2)).replace("\n", line_end).encode()
    path.write_bytes(content)
    os.utime(path, (1_784_000_000, 1_784_000_000))
    reading = look(path)
    assert (reading.fresh, reading.messages, reading.notes, reading.format) == (True, (), (), "csv")
    assert reading.size == len(content)
    assert reading.file_time == EPOCH + timedelta(seconds=1_784_000_000)
    assert reading.unanswered_s is None
    assert temperatures(reading) == [20.0, 20.0]
    assert reading.table is not None
    assert reading.table.position.tolist() == [content.index(b"2026-07-14T17:01"), content.index(b"2026-07-14T17:02")]


def test_notes_come_with_the_rows(path: Path) -> None:
    path.write_text("time,altimeter_hpa,temperature_c,gust_kt\n")
    assert look(path).notes == ("columns not known and ignored: 'gust_kt'",)


def test_a_nul_byte_in_a_row_is_a_fault_of_that_row_only(path: Path) -> None:
    path.write_text(HEADER + ROW.format(1) + ROW.format(2).replace("20.0", "2\0.0") + ROW.format(3))
    reading = look(path)
    assert reading.table is not None
    assert reading.table.faults == {1: "the row contains NUL bytes"}
    assert len(reading.table) == 3


def test_rows_before_a_tail_of_nul_bytes_are_read(path: Path) -> None:
    path.write_text(HEADER + ROW.format(1) + "\0" * 2000)
    reading = look(path)
    assert temperatures(reading) == [20.0]
    assert reading.messages == ("observations.csv: the last row is not complete yet; it is left until it is",)


@pytest.mark.parametrize("text", ['{"time": "2026-07-14T17:23Z", "altimeter_hpa": 1013, "temperature_c": 20}', "[]"])
def test_json_needs_no_line_end(path: Path, text: str) -> None:
    path.write_text(text)
    reading = look(path)
    assert reading.format == "json"
    assert reading.table is not None
    assert reading.table.faults == {}


def test_reports_take_their_month_from_the_file_s_time(path: Path) -> None:
    path.write_text("ZZCM 302353Z 20/10 Q1013\nZZXX 302353Z 20/10 Q1013\n")
    when = us("2026-07-01T00:05+00:00") * 1000
    os.utime(path, ns=(when, when))
    reading = FileSource(path, SourceRules(time_zone="UTC", station="ZZCM"), settling_s=0.0, patience_s=60.0).read(NOW)
    assert reading.table is not None
    assert reading.table.time_us.tolist() == [us("2026-06-30T23:53+00:00")]
    assert reading.notes == ("reports of other stations than ZZCM passed over: ZZXX",)


@pytest.mark.parametrize("seconds", [-1_000_000_000, 8_000_000_000])
def test_an_absurd_file_time_makes_old_reports_not_new_ones(path: Path, seconds: int) -> None:
    path.write_text("ZZCM 302353Z 20/10 Q1013\n")
    os.utime(path, (seconds, seconds))
    if path.stat().st_mtime != seconds:
        pytest.skip("this disk does not keep such times")
    reading = look(path)
    assert reading.file_time == EPOCH
    assert reading.table is not None
    assert reading.table.time_us.tolist() == [us("1969-12-30T23:53+00:00")]


# -- only the end is read


class Reads:
    """Opens files and keeps account of how much was read of them."""

    def __init__(self) -> None:
        self.total = 0

    def __call__(self, path: Path) -> BinaryIO:
        file = open_file(path)
        outer = self

        class Counted:
            def __enter__(self) -> "Counted":
                return self

            def __exit__(self, *_: object) -> None:
                file.close()

            def fileno(self) -> int:
                return file.fileno()

            def seek(self, place: int) -> int:
                return file.seek(place)

            def read(self, count: int) -> bytes:
                # A disk may answer with less than was asked for.
                part = file.read(min(count, 50_000))
                outer.total += len(part)
                return part

        return Counted()  # type: ignore[return-value]


def minutes_of_rows(count: int) -> list[str]:
    """One-minute rows that end at `NOW`."""
    return invented_rows(count, start=NOW - timedelta(minutes=count - 1))


def test_of_a_long_file_only_the_end_is_read(path: Path) -> None:
    rows = minutes_of_rows(100_000)
    path.write_text(HEADER + "".join(rows))
    reads = Reads()
    reading = source(path, opener=reads).read(NOW, NOW - timedelta(hours=3))
    assert reading.table is not None
    assert reading.messages == ()
    assert reads.total < 3 * FIRST_BLOCK_BYTES
    count = len(reading.table)
    assert 1000 < count < 2000
    assert list(reading.table.raw) == [row.strip() for row in rows[-count:]]
    content = path.read_bytes()
    assert [content[place : place + 20] for place in reading.table.position.tolist()[:3]] == [
        row[:20].encode() for row in rows[-count : -count + 3]
    ]


def test_the_end_is_read_as_far_back_as_is_asked_for(path: Path) -> None:
    path.write_text(HEADER + "".join(minutes_of_rows(20_000)))
    reading = source(path, reach_us=100 * 3_600_000_000).read(NOW)
    assert reading.table is not None
    assert 6000 < len(reading.table) < 20_000
    since = NOW - timedelta(hours=100)
    assert reading.table.time_us[0] <= us(since.isoformat())


def test_a_file_that_does_not_reach_back_so_far_is_read_whole(path: Path) -> None:
    path.write_text(HEADER + "".join(minutes_of_rows(5_000)))
    reading = source(path).read(NOW, NOW - timedelta(days=30))
    assert reading.table is not None
    assert (len(reading.table), reading.messages) == (5_000, ())


def test_a_limit_to_how_much_is_read_is_said(path: Path) -> None:
    path.write_text(HEADER + "".join(minutes_of_rows(60_000)))
    reading = source(path, most_bytes=1024 * 1024).read(NOW, NOW - timedelta(days=30))
    assert reading.table is not None
    assert reading.messages == (
        "observations.csv has 2 MiB; only the last 1 MiB were read, and rows before them are not seen",
    )
    assert 20_000 < len(reading.table) < 40_000
    assert source(path, most_bytes=1024 * 1024).read(NOW, NOW - timedelta(days=1)).messages == ()


def test_one_absurd_old_row_does_not_end_the_reading_back(path: Path) -> None:
    rows = minutes_of_rows(5_000)
    path.write_text(HEADER + "".join(rows))
    size = path.stat().st_size
    content = path.read_bytes()
    first_of_block = content.index(b"\n", size - FIRST_BLOCK_BYTES) + 1
    path.write_bytes(content[:first_of_block] + b"1970" + content[first_of_block + 4 :])
    reading = source(path).read(NOW, NOW - timedelta(hours=48))
    assert reading.table is not None
    assert len(reading.table) > 48 * 60


def test_a_line_longer_than_what_is_read_first_is_no_trouble(path: Path) -> None:
    path.write_text(HEADER + ROW.format(1) + "x" * 100_000 + "\n")
    reading = look(path)
    assert reading.table is not None
    assert list(reading.table.faults) == [1]


def test_a_long_file_that_runs_newest_first_is_read_whole(path: Path) -> None:
    rows = minutes_of_rows(5_000)
    path.write_text(HEADER + "".join(reversed(rows)))
    reading = source(path).read(NOW, NOW - timedelta(hours=3))
    assert reading.table is not None
    assert len(reading.table) == 5_000


def test_reading_does_not_begin_where_a_doubled_hour_cannot_be_told(path: Path) -> None:
    # Local times of Los Angeles, 01:00 to 02:00 twice, every second: the last block begins in the second pass.
    begin = datetime(2026, 11, 1, 0, 30, tzinfo=UTC)
    wall = [begin + timedelta(seconds=second) for second in range(90 * 60)]
    wall += [begin + timedelta(seconds=second) for second in range(30 * 60, 90 * 60)]
    path.write_text(HEADER + "".join(f"{when:%Y-%m-%dT%H:%M:%S},29.92,20.0,10.0\n" for when in wall))
    zoned = FileSource(path, SourceRules(time_zone="America/Los_Angeles"), settling_s=0.0, patience_s=60.0)
    end = datetime(2026, 11, 1, 10, 0, tzinfo=UTC)
    reading = zoned.read(end, end - timedelta(minutes=10))
    assert reading.table is not None
    assert len(reading.table) > 5000
    assert reading.table.time_us[-1] == us("2026-11-01T09:59:59+00:00")
    assert (reading.table.time_us[1:] - reading.table.time_us[:-1] == 1_000_000).all()


def test_the_end_of_a_file_of_objects_is_read(path: Path) -> None:
    rows = [
        json.dumps({"time": row[:20], "altimeter_hpa": 1013.0, "temperature_c": 20.0}) for row in minutes_of_rows(5_000)
    ]
    path.write_text("\n".join(rows) + "\n")
    reading = source(path).read(NOW, NOW - timedelta(hours=3))
    assert reading.table is not None
    assert reading.table.faults == {}
    assert list(reading.table.raw) == rows[-len(reading.table) :]
    assert len(reading.table) < 1500
    assert path.read_bytes()[reading.table.position[0] :].startswith(rows[-len(reading.table)].encode())


def test_the_end_of_a_file_of_reports_is_read_from_a_report_on(path: Path) -> None:
    reports = [
        f"METAR ZZCM {NOW - timedelta(hours=hours):%d%H%M}Z 27010KT\n    20/10 Q1013=\n"
        for hours in reversed(range(2000))
    ]
    path.write_text("".join(reports))
    stamp = us(NOW.isoformat()) * 1000
    # Lengthened in front, so that the last 64 KiB begin in the first line of a report and the first whole line is its
    # second.
    length = len(reports[0])
    into_report = (path.stat().st_size - FIRST_BLOCK_BYTES) % length
    path.write_text("X" * ((5 - into_report) % length) + "\n" + "".join(reports))
    os.utime(path, ns=(stamp, stamp))
    reading = source(path).read(NOW, NOW - timedelta(hours=24))
    assert reading.table is not None
    assert reading.table.faults == {}
    assert 1000 < len(reading.table) < 2000
    assert reading.table.time_us[-1] == us(NOW.isoformat())
    assert reading.table.time_us[0] == us((NOW - timedelta(hours=len(reading.table) - 1)).isoformat())


def test_an_array_is_read_whole_up_to_a_limit(path: Path) -> None:
    values = [{"time": row[:20], "altimeter_hpa": 1013.0, "temperature_c": 20.0} for row in minutes_of_rows(15_000)]
    path.write_text(json.dumps(values))
    reading = source(path).read(NOW, NOW - timedelta(hours=3))
    assert reading.table is not None
    assert len(reading.table) == 15_000
    limited = source(path, most_bytes=1024 * 1024).read(NOW)
    assert limited.table is None
    assert limited.messages == (
        "observations.csv: it is a JSON array of 1 MiB, which would have to be read as a whole; "
        "expected 1 MiB at most, or one object a line",
    )
