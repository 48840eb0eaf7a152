from dataclasses import replace
from datetime import UTC, datetime, timedelta
from pathlib import Path
from zoneinfo import ZoneInfo

from airfield_board.session.file_preview import FilePreview, NewestRow
from airfield_board.window.preview_words import preview_lines

ZONE = ZoneInfo("America/Los_Angeles")
NOW = datetime(2026, 7, 16, 20, 14, tzinfo=UTC)
NEWEST = NewestRow(
    time=datetime(2026, 7, 16, 20, 10, tzinfo=UTC),
    altimeter_hpa=1015.9166,
    temperature_c=30.2,
    dewpoint_c=6.2,
    density_altitude_ft=6821.0,
)
PREVIEW = FilePreview(
    file=Path("o.csv"),
    format="csv",
    rows=1289,
    since=datetime(2026, 7, 12, 7, 0, tzinfo=UTC),
    newest=NEWEST,
    every_min=5.0,
)


def said(preview: FilePreview, stale_after_min: float | None = 15.0, now: datetime = NOW) -> str:
    return "\n".join(preview_lines(preview, ZONE, stale_after_min, now))


def test_format_rows_and_the_newest_row_with_values_and_age() -> None:
    assert said(PREVIEW).splitlines() == [
        "CSV with a header, 1,289 rows read, from Sun 12 Jul 2026, 00:00 (07:00 UTC) on.",
        "Newest row that can be used: Thu 16 Jul 2026, 13:10 (20:10 UTC), 4 min old.",
        "Altimeter setting 30.00 inHg = 1015.9 hPa, temperature 30.2 °C, dew point 6.2 °C.",
        "At this field's elevation: density altitude 6,830 ft.",
        "A row usually comes every 5 min.",
    ]


def test_what_is_not_known_is_not_said() -> None:
    bare = replace(PREVIEW, rows=1, every_min=None, newest=replace(NEWEST, dewpoint_c=None, density_altitude_ft=None))
    text = said(bare, None, NOW + timedelta(days=9))
    assert "1 row read" in text
    assert "no dew point" in text
    for word in ("elevation", "usually", "NO DATA"):
        assert word not in text


def test_a_newest_row_that_is_stale_is_said_to_be() -> None:
    assert "older than 15 min: the board would show NO DATA now" in said(
        PREVIEW, now=NEWEST.time + timedelta(minutes=16)
    )
    assert "NO DATA" not in said(PREVIEW, now=NEWEST.time + timedelta(minutes=15))


def test_rows_that_come_more_seldom_than_they_go_stale_are_said_to() -> None:
    text = said(replace(PREVIEW, every_min=60.0))
    assert "every 60 min" in text
    assert "At 15 min each would be stale before the next one comes: NO DATA." in text
    assert "stale before" not in said(replace(PREVIEW, every_min=60.0), 75.0)


def test_without_a_row_that_can_be_used_the_board_would_show_no_data() -> None:
    assert "No row can be used: the board would show NO DATA." in said(replace(PREVIEW, newest=None))


def test_rows_that_would_not_be_used_are_told_with_their_reasons() -> None:
    unused = ((NOW, "range: temperature 87.0 °C"), (None, "its time cannot be read"))
    text = said(replace(PREVIEW, unused_count=7, unused=unused))
    assert "7 rows would not be used:" in text
    assert "13:14 (20:14 UTC): range: temperature 87.0 °C" in text
    assert "no time: its time cannot be read" in text
    assert text.endswith("and older ones.")
    one = said(replace(PREVIEW, unused_count=1, unused=unused[:1]))
    assert "1 row would not be used:" in one
    assert "older ones" not in one


def test_what_is_wrong_with_the_file_is_said_in_its_own_words() -> None:
    broken = FilePreview(file=Path("o.csv"), messages=("o.csv does not exist (yet)",))
    assert said(broken) == "o.csv does not exist (yet)"
    noted = replace(PREVIEW, messages=("its last row is not complete",), notes=("columns ignored: wind",))
    assert said(noted).splitlines()[-2:] == ["its last row is not complete", "columns ignored: wind"]


def test_other_formats_have_their_words() -> None:
    assert said(replace(PREVIEW, format="metar")).startswith("METAR reports, ")
    assert said(replace(PREVIEW, format="json")).startswith("JSON, ")
