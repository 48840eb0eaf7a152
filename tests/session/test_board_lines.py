"""The board's lines and its JSON: numbers beside each limit, the order of the rows, what is not known."""

import json
from pathlib import Path

import pytest

from airfield_board.configuration.profile import load_airfield
from airfield_board.limits.states import State
from airfield_board.session.board_json import board_json
from airfield_board.session.board_state import BoardState, LimitLine, Mode
from airfield_board.session.whole_files import assess, read_for
from tests.session.fields import PROFILE, Field, make_field

FLEET = """\
schema: 1
aircraft:
  - id: glider
    name: Glider
    operations:
      - name: Winch
        max_pressure_altitude_ft: 4300
      - name: Pressure in metres
        max_pressure_altitude_m: 1310
      - name: Later only
        max_temperature_c: 1
        valid_from: 2027-01-01
  - id: tow
    name: Tow plane
    group: Towing
    operations:
      - name: Aerotow
        max_density_altitude_ft:
          by_weight_lb: {1950: 7400, 2450: 6550}
        max_temperature_c: 45
      - name: Guarded
        max_density_altitude_ft: 6400
        acceptance: guarded
        notice: Local order 7
        valid_until: 2026-09-30
        basis: local order
      - name: Table
        max_temperature_c: {by_pressure_altitude_ft: {5000: 40, 8000: 30}}
      - name: Deviation
        max_isa_deviation_c: 40
"""

_SUMMER = """\
        valid_from: 2026-06-01
        valid_until: 2026-09-30"""


@pytest.fixture
def field(tmp_path: Path) -> Field:
    return make_field(tmp_path, fleet=FLEET)


def _board(field: Field, minutes: float) -> BoardState:
    profile, fleet = load_airfield(field.profile)
    table = read_for(profile, field.observations, finished=True).table
    return assess(profile, fleet, table, field.at(minutes), Mode.LIVE)


def _limits(state: BoardState) -> dict[tuple[str, str], LimitLine]:
    return {(row.name, limit.quantity.value): limit for row in state.operations for limit in row.limits}


def test_what_each_limit_shows_in_warm_air(field: Field) -> None:
    field.write(field.row(0, 26.0), field.row(5, 28.0))
    limits = _limits(_board(field, 6))
    aerotow = limits["Aerotow", "density altitude"]
    assert aerotow.state is State.NEAR
    assert (aerotow.limit, aerotow.full_weight, aerotow.weight_unit) == (6550, 2450, "lb")
    assert aerotow.value is not None
    assert aerotow.margin == 6550 - aerotow.value
    winch = limits["Winch", "pressure altitude"]
    # At 1013.25 hPa the pressure altitude is the elevation.
    assert winch.value == pytest.approx(4120, abs=0.01)
    assert (winch.hold_temperature_c, winch.axis_ft) == (None, None)
    assert winch.place_ft == pytest.approx(aerotow.value + 180, abs=0.1)
    metres = limits["Pressure in metres", "pressure altitude"]
    # 1,310 m are 4,297.9 ft.
    assert metres.place_ft == pytest.approx(aerotow.value + 177.9, abs=0.1)
    guarded = limits["Guarded", "density altitude"]
    assert guarded.guarded
    assert guarded.value is not None
    assert guarded.value > aerotow.value + 50
    assert (guarded.notice, guarded.valid_until, guarded.basis) == ("Local order 7", "2026-09-30", "local order")
    assert limits["Aerotow", "temperature"].hold_temperature_c == 45
    # 28 °C at a pressure altitude of 4,120 ft, where the standard atmosphere has 15 - 1.98 x 4.12 = 6.84 °C.
    assert limits["Deviation", "ISA deviation"].value == pytest.approx(21.16, abs=0.01)


def test_a_value_outside_its_table_and_a_limit_not_in_force(field: Field) -> None:
    field.write(field.row(0, 20.0))
    state = _board(field, 1)
    table = _limits(state)["Table", "temperature"]
    assert (table.state, table.value, table.margin, table.reason) == (State.NO_DATA, None, None, "outside its table")
    (later,) = (row for row in state.operations if row.name == "Later only")
    assert (later.limits, later.shown, later.state) == ((), None, State.NO_DATA)


def test_beyond_the_limit_at_the_greatest_weight_the_lighter_one_is_shown(field: Field) -> None:
    field.write(field.row(0, 33.0))
    aerotow = _limits(_board(field, 1))["Aerotow", "density altitude"]
    assert aerotow.state is State.REDUCED
    assert aerotow.value is not None
    # By hand on the line from 1,950 lb, 7,400 ft to 2,450 lb, 6,550 ft.
    weight = 1950 + (7400 - aerotow.value) * 500 / 850
    assert aerotow.greatest_weight == pytest.approx(weight, abs=0.01)
    assert aerotow.greatest_weight_lb == aerotow.greatest_weight
    assert aerotow.hold_above_c is not None
    assert aerotow.hold_temperature_c is not None
    assert aerotow.hold_above_c > 33 > aerotow.hold_temperature_c


def test_in_hold_the_limit_is_that_of_the_least_weight_and_the_clearing_is_told(field: Field) -> None:
    field.write(field.row(0, 40.0), field.row(5, 37.0), field.row(10, 33.0))
    aerotow = _limits(_board(field, 11))["Aerotow", "density altitude"]
    assert aerotow.state is State.HOLD
    assert aerotow.limit == 7400
    assert aerotow.clearing is not None
    assert (aerotow.clearing.needs, aerotow.clearing.for_min) == (7250, 10)
    assert (aerotow.clearing.since, aerotow.clearing.earliest) == (field.at(10), field.at(20))


def test_when_a_margin_is_used_up_at_the_present_rate_is_told_before_the_reading_goes_stale(field: Field) -> None:
    field.write(field.row(0, 22.0), field.row(5, 23.5), field.row(10, 25.0))
    guarded = _limits(_board(field, 10))["Guarded", "density altitude"]
    conditions = _board(field, 10).conditions
    assert conditions is not None
    assert conditions.rate_ft_per_h is not None
    assert conditions.rate_ft_per_h > 0
    assert guarded.margin is not None
    minutes = guarded.margin / conditions.rate_ft_per_h * 60
    assert minutes < 15
    assert guarded.gone_by is not None
    assert (guarded.gone_by - field.at(10)).total_seconds() == pytest.approx(60 * minutes, abs=0.001)
    assert _limits(_board(field, 10))["Aerotow", "temperature"].gone_by is None
    field.write(field.row(0, 25.0), field.row(5, 24.0))
    assert _limits(_board(field, 5))["Guarded", "density altitude"].gone_by is None
    field.write(field.row(0, 22.0), field.row(5, 22.01))
    assert _limits(_board(field, 5))["Guarded", "density altitude"].gone_by is None
    field.write(field.row(0, 35.0), field.row(5, 36.0))
    assert _limits(_board(field, 5))["Guarded", "density altitude"].gone_by is None


def test_what_the_air_costs_is_reckoned_from_its_density(field: Field) -> None:
    field.write(field.row(0, 28.0))
    conditions = _board(field, 1).conditions
    assert conditions is not None
    # ISO 2533 has 875.105 hPa at 4,000 ft; 120 ft more, at 1.087 kg/m3, take 3.90 hPa off. Dry air of 871.21 hPa and
    # 301.15 K: 87121 / (287.05287 x 301.15) = 1.00781 kg/m3, 0.8227 of 1.225.
    assert conditions.density_ratio == pytest.approx(0.8227, abs=1e-4)
    # 1 / sqrt(0.8227) = 1.1025; Gagg and Farrar (1934): 0.8227 - 0.1773 / 7.55 = 0.7992.
    assert conditions.true_airspeed_ratio == pytest.approx(1.1025, abs=1e-4)
    assert conditions.shaft_power_ratio == pytest.approx(0.7992, abs=1e-4)


def test_at_which_value_a_limit_near_or_reduced_becomes_better(field: Field) -> None:
    field.write(field.row(0, 28.0))
    near = _limits(_board(field, 1))["Aerotow", "density altitude"]
    # The program's own bands: near 500 ft, deadband 150 ft, off-delay 10 min.
    assert (near.state, near.eases_at) == (State.NEAR, 6550 - 500 - 150)
    assert (near.near_band, near.deadband, near.off_delay_min) == (500, 150, 10)
    field.write(field.row(0, 33.0))
    reduced = _limits(_board(field, 1))["Aerotow", "density altitude"]
    assert (reduced.state, reduced.eases_at) == (State.REDUCED, 6550 - 150)
    field.write(field.row(0, 40.0))
    held = _limits(_board(field, 1))["Aerotow", "density altitude"]
    assert (held.state, held.eases_at, held.greatest_weight) == (State.HOLD, None, None)
    field.write(field.row(0, 10.0))
    well = _limits(_board(field, 1))["Aerotow", "density altitude"]
    assert (well.state, well.eases_at, well.greatest_weight) == (State.GO, None, 2450)


def test_the_days_of_a_limit_are_those_of_the_entry_that_rules(tmp_path: Path) -> None:
    field = make_field(tmp_path, fleet=FLEET.replace("        valid_until: 2026-09-30", _SUMMER))
    field.write(field.row(0, 10.0))
    guarded = _limits(_board(field, 1))["Guarded", "density altitude"]
    assert (guarded.valid_from, guarded.valid_until) == ("2026-06-01", "2026-09-30")
    aerotow = _limits(_board(field, 1))["Aerotow", "density altitude"]
    assert (aerotow.valid_from, aerotow.valid_until) == ("", "")


def test_rows_stand_by_the_density_altitude_at_which_they_end_and_those_without_at_the_foot(field: Field) -> None:
    field.write(field.row(0, 33.0))
    rows = _board(field, 1).operations
    for side in ((State.HOLD, State.REDUCED), (State.GO, State.NEAR)):
        places = [row.shown.place_ft for row in rows if row.state in side and row.shown is not None]
        known = [place for place in places if place is not None]
        assert known == sorted(known, reverse=True), side
        assert len(known) == len(places) > 0
    assert rows[-1].name in ("Table", "Later only")


def test_without_an_observation_the_json_has_no_value_and_every_state_is_no_data(field: Field) -> None:
    field.write()
    told = board_json(_board(field, 0))
    assert json.loads(json.dumps(told, allow_nan=False)) == told
    assert told["conditions"] is None
    observation, aircraft = told["observation"], told["aircraft"]
    assert isinstance(observation, dict)
    assert observation["freshness"] == "missing"
    assert {value for key, value in observation.items() if key != "freshness"} == {None}
    assert isinstance(aircraft, list)
    assert {each["state"] for each in aircraft} == {"no_data"}


def test_the_json_has_the_keys_that_scripts_rely_on(field: Field) -> None:
    field.profile.write_text(PROFILE.replace("dry", "auto"), encoding="utf-8")
    field.write(field.row(0, 40.0))
    told = json.loads(json.dumps(board_json(_board(field, 2)), allow_nan=False))
    assert told["airfield"] == "Thistle Bench"
    assert told["assessed_at"] == "2026-07-14T18:02:00Z"
    observation = told["observation"]
    assert (observation["time"], observation["age_min"], observation["freshness"]) == (
        "2026-07-14T18:00:00Z",
        2.0,
        "fresh",
    )
    assert (observation["altimeter_setting_hpa"], observation["temperature_c"]) == (1013.25, 40.0)
    assert observation["dewpoint_c"] is None
    assert told["conditions"].keys() >= {
        "station_pressure_hpa",
        "pressure_altitude_ft",
        "density_altitude_ft",
        "density_altitude_dry_ft",
        "uncertainty_ft",
        "isa_deviation_c",
        "density_ratio",
        "rate_ft_per_h",
    }
    (tow,) = (each for each in told["aircraft"] if each["id"] == "tow")
    assert tow["state"] == "hold"
    limit = tow["operations"][0]["limits"][0]
    assert (limit["quantity"], limit["state"], limit["unit"], limit["limit"]) == (
        "density altitude",
        "hold",
        "ft",
        7400,
    )
    assert limit["since"] == "2026-07-14T18:00:00Z"
    assert limit["clearing"] == {"needs": 7250.0, "for_min": 10.0, "since": None, "earliest": None}
    assert limit["outlook"].keys() == {"hold_probability", "hold_at", "hold_window", "clear_at", "clear_window"}
