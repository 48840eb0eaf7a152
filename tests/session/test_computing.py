"""The air of a file's rows as CSV."""

import csv
import io
from datetime import UTC, datetime
from pathlib import Path

import pytest

from airfield_board.clock import us_from_time
from airfield_board.errors import UserError
from airfield_board.session.computing import compute, write_csv
from airfield_board.session.whole_files import read_file

NOW_US = us_from_time(datetime(2026, 7, 15, tzinfo=UTC))


def _computed(tmp_path: Path, text: str, elevation_m: float | None) -> list[dict[str, str]]:
    path = tmp_path / "observations.csv"
    path.write_text(text, encoding="utf-8")
    out = io.StringIO()
    told: list[int] = []
    read = read_file(path, time_zone="UTC", station="", finished=True)
    write_csv(compute(read, elevation_m, NOW_US), out, told.append)
    rows = list(csv.DictReader(io.StringIO(out.getvalue())))
    assert told == [len(rows)]
    return rows


def test_the_standard_day_at_sea_level_and_rows_that_fail_keep_their_places(tmp_path: Path) -> None:
    rows = _computed(
        tmp_path,
        "time,altimeter_hpa,temperature_c,wind\n"
        "2026-07-14T18:05:00Z,1013.25,15.0,NW\n"
        "2026-07-14T18:00:00Z,1013.25,99.0,N\n"
        "soon,1013.25,15.0,\n",
        0.0,
    )
    # ISO 2533: 1013.25 hPa, 15 °C and a density ratio of 1 at 0 m.
    assert float(rows[0]["station_pressure_hpa"]) == pytest.approx(1013.25, abs=1e-4)
    assert float(rows[0]["density_altitude_ft"]) == pytest.approx(0, abs=0.01)
    assert float(rows[0]["density_ratio"]) == pytest.approx(1, abs=1e-6)
    assert (rows[0]["quality"], rows[0]["wind"], rows[0]["dewpoint_c"]) == ("valid", "NW", "")
    assert rows[1]["quality"].startswith("rejected: range: ")
    assert (rows[1]["wind"], rows[1]["density_altitude_ft"]) == ("N", "")
    assert rows[2]["quality"].startswith("rejected: incomplete: ")
    assert rows[2]["time"] == ""


def test_each_row_s_own_elevation_counts_where_none_is_given(tmp_path: Path) -> None:
    text = "time,altimeter_hpa,temperature_c,elevation_ft\n2026-07-14T18:00:00.5Z,1013.25,10,{}\n"
    rows = _computed(tmp_path, text.format("4120") + "2026-07-14T18:05:00Z,1013.25,10,\n", None)
    assert rows[0]["time"].startswith("2026-07-14T18:00:00.5")
    assert float(rows[0]["pressure_altitude_ft"]) == pytest.approx(4120, abs=0.01)
    assert rows[1]["quality"].startswith("rejected: no elevation")
    with pytest.raises(UserError, match="--elevation-ft"):
        _computed(tmp_path, text.format(""), None)


def test_a_file_that_is_none_is_said(tmp_path: Path) -> None:
    for path, words in ((tmp_path, "this is not a file"), (tmp_path / "nothing.csv", "there is no such file")):
        with pytest.raises(UserError, match=words):
            read_file(path, time_zone="UTC", station="", finished=True)


def test_a_file_that_cannot_be_read_is_said(tmp_path: Path, monkeypatch: pytest.MonkeyPatch) -> None:
    def refused(_path: Path) -> bytes:
        raise PermissionError(13, "Permission denied")

    path = tmp_path / "observations.csv"
    path.write_text("", encoding="utf-8")
    monkeypatch.setattr(Path, "read_bytes", refused)
    with pytest.raises(UserError, match="Permission denied"):
        read_file(path, time_zone="UTC", station="", finished=True)
