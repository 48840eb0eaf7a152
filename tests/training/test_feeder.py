from datetime import UTC, date, datetime, timedelta
from itertools import pairwise
from pathlib import Path
from zoneinfo import ZoneInfo

import numpy as np
import pytest

from airfield_board.atmosphere.altimetry import density_altitude, station_pressure
from airfield_board.resources import bundled_folder
from airfield_board.training.feeder import WARM_DAY, DayShape, Feeder, Row, rows_of_day
from airfield_board.units import ft_from_m, hpa_from_inhg, k_from_c, m_from_ft, pa_from_hpa

ZONE = ZoneInfo("America/Los_Angeles")
DAY = date(2026, 7, 16)
ELEVATION_FT = 4120.0


def rows(seed: int = 4120) -> tuple[Row, ...]:
    return rows_of_day(WARM_DAY, DAY, ZONE, every_min=5, seed=seed)


def sensible(all_rows: tuple[Row, ...]) -> list[Row]:
    return [row for row in all_rows if row.temperature_c < 60]


def density_altitudes_ft(some_rows: list[Row]) -> "np.typing.NDArray[np.float64]":
    altimeter_pa = pa_from_hpa(hpa_from_inhg(np.array([row.altimeter_inhg for row in some_rows])))
    temperature_k = k_from_c(np.array([row.temperature_c for row in some_rows]))
    dewpoint_k = k_from_c(np.array([row.dewpoint_c for row in some_rows]))
    pressure_pa = station_pressure(altimeter_pa, m_from_ft(ELEVATION_FT))
    return ft_from_m(density_altitude(pressure_pa, temperature_k, dewpoint_k))


def test_the_warm_day_rises_to_its_peak_in_the_afternoon_and_falls_by_the_evening() -> None:
    day = sensible(rows())
    altitude_ft = density_altitudes_ft(day)
    by_time = {row.time.strftime("%H:%M"): value for row, value in zip(day, altitude_ft, strict=True)}
    peak = day[int(np.argmax(altitude_ft))].time
    assert by_time["06:00"] == pytest.approx(5000, abs=100)
    assert altitude_ft.max() == pytest.approx(7200, abs=50)
    assert peak.hour in (15, 16)
    assert by_time["21:00"] == pytest.approx(5900, abs=100)


def test_rows_come_every_five_minutes_of_the_local_day_in_order_of_time() -> None:
    day = sensible(rows())
    assert day[0].time == datetime(2026, 7, 16, tzinfo=ZONE)
    assert {later.time - row.time for row, later in pairwise(day)} == {timedelta(minutes=5)}
    assert len(day) == 288
    everything = rows()
    assert [row.time for row in everything] == sorted(row.time for row in everything)


def test_one_row_is_absurd_so_that_the_demo_shows_a_reading_that_is_not_used() -> None:
    assert [row.temperature_c for row in rows() if row.temperature_c >= 60] == [87.0]


def test_the_same_seed_gives_the_same_rows_and_another_seed_others() -> None:
    assert rows(seed=1) == rows(seed=1)
    assert rows(seed=1) != rows(seed=2)


def test_no_row_looks_like_a_step_to_the_quality_checks() -> None:
    day = sensible(rows())
    for row, later in pairwise(day):
        assert abs(later.temperature_c - row.temperature_c) < 2.0
        assert abs(later.altimeter_inhg - row.altimeter_inhg) <= 0.02
        assert later.dewpoint_c < later.temperature_c


def test_a_flat_shape_without_noise_stays_flat() -> None:
    flat = DayShape(
        hours=(0, 12),
        temperature_c=(20.0, 20.0),
        dewpoint_c=(5.0, 5.0),
        altimeter_inhg=(29.92, 29.92),
        temperature_noise_c=0.0,
    )
    made = rows_of_day(flat, DAY, ZONE, every_min=60, seed=1)
    assert {(row.temperature_c, row.dewpoint_c, row.altimeter_inhg) for row in made} == {(20.0, 5.0, 29.92)}


def test_the_feeder_writes_only_rows_whose_time_has_come_and_never_touches_earlier_ones(tmp_path: Path) -> None:
    path = tmp_path / "observations.csv"
    feeder = Feeder(path, rows())
    noon = datetime(2026, 7, 16, 12, 0, tzinfo=ZONE)
    assert feeder.write_until(noon) == 146  # 145 of every five minutes, 00:00 and 12:00 included, and the absurd one
    before = path.read_bytes()
    assert feeder.write_until(noon) == 0
    assert path.read_bytes() == before
    assert feeder.write_until(noon + timedelta(minutes=9)) == 1
    after = path.read_bytes()
    assert after.startswith(before)
    assert after[len(before) :].startswith(b"2026-07-16T12:05:00-07:00,")
    assert after.endswith(b"\n")


def test_before_the_first_row_there_is_a_file_with_only_its_header(tmp_path: Path) -> None:
    path = tmp_path / "observations.csv"
    assert Feeder(path, rows()).write_until(datetime(2026, 7, 1, tzinfo=UTC)) == 0
    assert path.read_text() == "time,altimeter_inhg,temperature_c,dewpoint_c\n"


def test_the_demo_data_hold_the_day_as_the_feeder_writes_it(tmp_path: Path) -> None:
    path = tmp_path / "observations.csv"
    day = rows()
    Feeder(path, day).write_until(day[-1].time)
    assert path.read_text() == (bundled_folder("demo_data") / "observations.csv").read_text()
