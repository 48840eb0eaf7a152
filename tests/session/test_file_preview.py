import os
from dataclasses import replace
from datetime import UTC, datetime, timedelta
from pathlib import Path

import pytest

from airfield_board.session.file_preview import FilePreview, FilePreviewer, PreviewQuestion

NOW = datetime(2026, 7, 16, 20, 14, tzinfo=UTC)
HEADER = "time,altimeter_inhg,temperature_c,dewpoint_c\n"


@pytest.fixture
def question(tmp_path: Path) -> PreviewQuestion:
    return PreviewQuestion(file=tmp_path / "o.csv", time_zone="America/Los_Angeles", station="", elevation_m=None)


def look(question: PreviewQuestion, text: str, now: datetime = NOW) -> FilePreview:
    question.file.write_text(text, encoding="utf-8")
    os.utime(question.file, (now.timestamp(), now.timestamp()))
    return FilePreviewer().look(question, now)


def test_a_csv_is_understood_as_a_board_would(question: PreviewQuestion) -> None:
    rows = "2026-07-16T13:00:00,29.99,30.0,6.0\n2026-07-16T13:05:00,29.99,30.1,\n2026-07-16T13:10:00,30.00,30.2,6.2\n"
    preview = look(question, HEADER + rows)
    assert (preview.format, preview.rows, preview.every_min) == ("csv", 3, 5.0)
    newest = preview.newest
    assert newest is not None
    assert newest.time == datetime(2026, 7, 16, 20, 10, tzinfo=UTC)  # Pacific daylight time is UTC-7
    assert newest.altimeter_hpa == pytest.approx(1015.92, abs=0.01)  # 30.00 inHg of 33.86388640341 hPa
    assert (newest.temperature_c, newest.dewpoint_c, newest.density_altitude_ft) == (30.2, 6.2, None)
    assert (preview.unused_count, preview.unused) == (0, ())
    assert preview.since == datetime(2026, 7, 16, 20, 0, tzinfo=UTC)


def test_a_row_without_a_dew_point_has_none(question: PreviewQuestion) -> None:
    newest = look(question, HEADER + "2026-07-16T13:10:00,30.00,30.2,\n").newest
    assert newest is not None
    assert newest.dewpoint_c is None


def test_with_the_elevation_comes_the_density_altitude(question: PreviewQuestion) -> None:
    # ISO 2533 at 4000 ft: standard pressure there is what an altimeter set to 1013.25 shows, and the standard
    # temperature 288.15 - 0.0065 * 1219.2 K = 7.0752 °C; so the density altitude is the elevation.
    at_4000_ft = replace(question, elevation_m=1219.2)
    text = "time,altimeter_hpa,temperature_c\n2026-07-16T20:10:00Z,1013.25,7.0752\n"
    newest = look(at_4000_ft, text).newest
    assert newest is not None
    assert newest.density_altitude_ft == pytest.approx(4000, abs=0.5)


def test_rows_that_fail_a_check_are_told_newest_first_and_are_not_the_newest_that_can_be_used(
    question: PreviewQuestion,
) -> None:
    rows = (
        "2026-07-16T12:50:00,29.99,30.0,6.0\n2026-07-16T12:55:00,29.99,87.0,6.0\nnoon,29.99,30.1,6.0\n"
        "2026-07-16T13:00:00,29.99,30.1,6.0\n2026-07-16T13:05:00,,30.1,6.0\n2026-07-16T13:10:00,29.99,50.0,6.0\n"
        "2026-07-16T23:00:00,29.99,30.1,6.0\n"
    )
    preview = look(question, HEADER + rows)
    assert preview.newest is not None
    assert preview.newest.time == datetime(2026, 7, 16, 20, 0, tzinfo=UTC)
    assert preview.unused_count == 5
    assert [when for when, _ in preview.unused] == [
        datetime(2026, 7, 17, 6, 0, tzinfo=UTC),
        datetime(2026, 7, 16, 20, 10, tzinfo=UTC),
        datetime(2026, 7, 16, 20, 5, tzinfo=UTC),
    ]
    assert "future" in preview.unused[0][1]
    assert "step" in preview.unused[1][1]


def test_a_row_without_a_time_is_told_without_one(question: PreviewQuestion) -> None:
    preview = look(question, HEADER + "noon,29.99,30.1,6.0\n")
    assert preview.newest is None
    assert preview.unused_count == 1
    assert preview.unused[0][0] is None


def test_the_files_elevation_is_checked_against_the_answer(question: PreviewQuestion) -> None:
    text = "time,altimeter_hpa,temperature_c,elevation_m\n2026-07-16T20:10:00Z,1013.25,7.0,1256\n"
    assert look(replace(question, elevation_m=1256.0), text).newest is not None
    wrong = look(replace(question, elevation_m=4120.0), text)
    assert wrong.newest is None
    assert "elevation" in wrong.unused[0][1]


@pytest.mark.parametrize(
    ("text", "form"),
    [
        ('{"time": "2026-07-16T20:10:00Z", "altimeter_hpa": 1015.6, "temperature_c": 30.4}\n', "json"),
        ("METAR ZZCM 162010Z 24008KT 9999 FEW120 30/06 A2999 RMK AO2 T03040060=\n", "metar"),
    ],
)
def test_the_other_formats_are_recognised(question: PreviewQuestion, text: str, form: str) -> None:
    preview = look(question, text)
    assert (preview.format, preview.rows) == (form, 1)
    assert preview.newest is not None
    assert preview.newest.temperature_c == 30.4


def test_of_several_stations_one_must_be_named(question: PreviewQuestion) -> None:
    text = "METAR ZZCM 162010Z 24008KT 30/06 A2999=\nMETAR ZZQQ 162010Z 24008KT 20/06 A2999=\n"
    unnamed = look(question, text)
    assert unnamed.format is None
    assert any("ZZCM" in message and "ZZQQ" in message for message in unnamed.messages)
    newest = look(replace(question, station="ZZQQ"), text).newest
    assert newest is not None
    assert newest.temperature_c == 20


def test_a_file_that_is_not_there_or_is_none_of_the_formats_is_told(question: PreviewQuestion) -> None:
    gone = FilePreviewer().look(question, NOW)
    assert (gone.format, gone.newest) == (None, None)
    assert "does not exist" in gone.messages[0]
    assert "none of the formats" in look(question, "hello\n").messages[0]


def test_columns_that_are_passed_over_are_noted(question: PreviewQuestion) -> None:
    text = "time,altimeter_inhg,temperature_c,wind\n2026-07-16T13:10:00,30.00,30.2,7\n"
    assert any("wind" in note for note in look(question, text).notes)


def test_a_file_that_grows_is_seen_and_one_asked_for_instead_too(question: PreviewQuestion, tmp_path: Path) -> None:
    previewer = FilePreviewer()
    question.file.write_text(HEADER + "2026-07-16T13:05:00,29.99,30.1,6.0\n", encoding="utf-8")
    assert previewer.look(question, NOW).rows == 1
    with question.file.open("a", encoding="utf-8") as file:
        file.write("2026-07-16T13:10:00,29.99,30.2,6.0\n")
    assert previewer.look(question, NOW).rows == 2
    unchanged = previewer.look(question, NOW + timedelta(minutes=1))
    assert unchanged.rows == 2
    assert "does not exist" in previewer.look(replace(question, file=tmp_path / "other.csv"), NOW).messages[0]


def test_of_a_long_file_only_the_end_is_read_and_it_is_said_from_when_on(question: PreviewQuestion) -> None:
    start = NOW - timedelta(days=14)
    rows = (
        f"{start + timedelta(minutes=each):%Y-%m-%dT%H:%M}:00Z,29.99,30.{each % 10},6.0\n" for each in range(20_000)
    )
    preview = look(question, HEADER + "".join(rows))
    assert 36 * 60 <= preview.rows < 20_000
    assert preview.since is not None
    assert start < preview.since <= NOW - timedelta(hours=36)
    assert preview.every_min == 1.0
