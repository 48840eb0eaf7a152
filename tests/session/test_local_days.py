"""The board between local midnight and the first observation of the day: limits of dated entries."""

from datetime import UTC, datetime
from pathlib import Path

from airfield_board.configuration.profile import load_airfield
from airfield_board.limits.states import State
from airfield_board.session.board_state import BoardState, Mode
from airfield_board.session.whole_files import assess, read_for
from tests.session.fields import Field, make_field, row_of

# At 4,120 ft and 1013.25 hPa the dry air has 5,000 ft at about 14.7 °C, 6,350 ft at about 26.3 °C: at 26 °C it is
# beyond 6,000 ft and 5,900 ft, within 7,000 ft by more than the near band.
ROWS = [(50, 26.0), (55, 26.0)]

FLEET = """\
schema: 1
aircraft:
  - id: lowered
    name: Lowered from the 15th
    operations:
      - {name: Departure, max_density_altitude_ft: 7000}
      - {name: Departure, max_density_altitude_ft: 6000, valid_from: 2026-07-15}
  - id: raised
    name: Raised from the 15th
    operations:
      - {name: Departure, max_density_altitude_ft: 7000}
      - {name: Departure, max_density_altitude_ft: 5900, valid_until: 2026-07-14}
  - id: nearer
    name: Near the limit of the 15th
    operations:
      - {name: Departure, max_density_altitude_ft: 7000}
      - {name: Departure, max_density_altitude_ft: 6500, valid_from: 2026-07-15}
  - id: newly
    name: Limited from the 15th only
    operations:
      - {name: Departure, max_density_altitude_ft: 7000, valid_from: 2026-07-15}
  - id: ended
    name: Limited up to the 14th only
    operations:
      - {name: Departure, max_density_altitude_ft: 5900, valid_until: 2026-07-14}
"""
PROFILE = """\
schema: 1
airfield: {name: Thistle Bench, elevation_ft: 4120, time_zone: Etc/GMT}
observations: {file: observations.csv, expected_every_min: 5, stale_after_min: 15}
density_altitude: dry
fleet: fleet.yaml
"""


def _field(folder: Path, *more: tuple[int, float]) -> Field:
    field = make_field(folder, profile=PROFILE, fleet=FLEET)
    rows = [f"2026-07-14T23:{minute}:00Z,1013.25,{temperature_c}\n" for minute, temperature_c in (*ROWS, *more)]
    field.write(*rows)
    return field


def _board(field: Field, day: int, hour: int, minute: int) -> BoardState:
    profile, fleet = load_airfield(field.profile)
    table = read_for(profile, field.observations, finished=True).table
    return assess(profile, fleet, table, datetime(2026, 7, day, hour, minute, tzinfo=UTC), Mode.PAST)


def _states(board: BoardState) -> dict[str, State]:
    return {row.aircraft_id: row.state for row in board.operations}


def test_nobody_goes_by_the_limit_of_the_day_before(tmp_path: Path) -> None:
    field = _field(tmp_path)
    before = _states(_board(field, 14, 23, 59))
    assert (before["lowered"], before["nearer"]) == (State.GO, State.GO)
    board = _board(field, 15, 0, 3)
    after = _states(board)
    assert (after["lowered"], after["nearer"]) == (State.HOLD, State.NEAR)
    shown = row_of(board, "lowered").shown
    assert shown is not None
    assert shown.limit == 6000.0
    assert shown.margin is not None
    assert shown.margin < 0
    assert shown.since == datetime(2026, 7, 15, tzinfo=UTC)


def test_a_limit_raised_at_midnight_waits_for_an_observation(tmp_path: Path) -> None:
    board = _board(_field(tmp_path), 15, 0, 3)
    assert row_of(board, "raised").state is State.HOLD
    shown = row_of(board, "raised").shown
    assert shown is not None
    assert shown.since == datetime(2026, 7, 14, 23, 50, tzinfo=UTC)


def test_a_limit_that_begins_or_ends_at_midnight_lets_nobody_go(tmp_path: Path) -> None:
    after = _states(_board(_field(tmp_path), 15, 0, 3))
    assert (after["newly"], after["ended"]) == (State.NO_DATA, State.NO_DATA)


def test_a_suspect_reading_counts_against_the_limit_of_the_new_day(tmp_path: Path) -> None:
    # 14 °C, some 4,900 ft, is within every limit of both days; the step of 12 °C to 26 °C in 1 min is suspect, beyond
    # 6,000 ft, not beyond 7,000 ft.
    field = make_field(tmp_path, profile=PROFILE, fleet=FLEET)
    field.write("2026-07-14T23:57:00Z,1013.25,14\n", "2026-07-14T23:58:00Z,1013.25,26\n")
    assert _states(_board(field, 14, 23, 59))["lowered"] is State.GO
    assert _states(_board(field, 15, 0, 3))["lowered"] is State.NO_DATA


def test_stale_stays_no_data_over_midnight(tmp_path: Path) -> None:
    after = _states(_board(_field(tmp_path), 15, 0, 11))
    assert set(after.values()) == {State.NO_DATA}
