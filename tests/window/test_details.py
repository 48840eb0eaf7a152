"""The details of a row, in words."""

from dataclasses import replace
from datetime import timedelta

import pytest

from airfield_board.configuration.model import Quantity
from airfield_board.limits.states import State
from airfield_board.session.board_state import BoardState, Clearing, LimitLine, Mode, OperationLine
from airfield_board.window.details import Details, details_of
from airfield_board.window.reading import view_of
from tests.window import states


def row_named(state: BoardState, name: str, operation: str = "") -> OperationLine:
    return next(row for row in state.operations if row.aircraft_name == name and row.name.startswith(operation))


def with_row(state: BoardState, row: OperationLine) -> BoardState:
    return replace(state, operations=tuple(row if each.key == row.key else each for each in state.operations))


def with_limits(state: BoardState, row: OperationLine, *limits: LimitLine) -> BoardState:
    return with_row(state, replace(row, limits=limits, shown=limits[0], state=limits[0].state))


def details(state: BoardState, row: OperationLine, *, later: timedelta = timedelta(0)) -> Details:
    view = view_of(state, state.assessed_at + later, None)
    return details_of([each for each in view.rows if each.key == row.key], view)


def lines(shown: Details, section: int = 0) -> dict[str, str]:
    return {line.label: line.text for line in shown.sections[section].lines}


def sources(shown: Details, section: int = 0) -> dict[str, str]:
    return {line.label: line.source for line in shown.sections[section].lines}


def test_a_hold_says_since_when_what_clears_it_and_what_it_rests_on() -> None:
    state = states.board()
    row = row_named(state, "Motor glider")
    shown = details(state, row)
    assert (shown.title, shown.state) == ("Motor glider · Self-launch", State.HOLD)
    assert shown.next_change == "clears at or below 6,300 ft, for 10 min"
    assert shown.sections[0].heading == "Density altitude"
    # Limit 6,450 ft, air 6,826 ft, deadband 150 ft, off-delay 10 min; the invented air first beyond it at 11:50.
    assert lines(shown) == {
        "State": "HOLD since 11:50",
        "Limit": "6,450 ft",
        "Value": "6,830 ft",
        "Margin": "−380 ft",
        "Hold above": "26.8 °C, at the present altimeter setting and dew point",
        "What clears it": "at or below 6,300 ft for 10 min; not so yet",
        "Near band": "500 ft",
        "To clear a hold": "150 ft below the limit, for 10 min",
        "Acceptance": "simple: the value itself is compared",
        "In force": "every day",
    }
    assert sources(shown)["Limit"] == "basis: operator policy; source: Operations manual 4.2"


def test_what_the_air_costs_is_said_with_the_source_of_each_number() -> None:
    state = states.board()
    shown = details(state, row_named(state, "Motor glider"))
    assert shown.sections[-1].heading == "What the air costs now"
    air = lines(shown, -1)
    # The invented board: 6,826 ft ± 58, sigma 0.815, 1.108, 0.7905; a cost is rounded up, what is left rounded down.
    assert air == {
        "Density altitude": "6,830 ±60 ft",
        "Density ratio": "0.815",
        "True airspeed": "1.108 × indicated",
        "Shaft power": "79 % of that at sea level",
        "Observed": "13:10",
    }
    said = sources(shown, -1)
    assert all(said.values())
    assert "Gagg and Farrar (1934)" in said["Shaft power"]
    assert "normally aspirated" in said["Shaft power"]
    assert "1/√(density ratio)" in said["True airspeed"]
    assert "ISO 2533" in said["Density ratio"]
    assert said["Observed"] == "observations.csv · north end sensor"


@pytest.mark.parametrize(
    ("since_min", "earliest_min", "expected"),
    [
        (None, None, "at or below 6,300 ft for 10 min; not so yet"),
        (-4.0, 6.0, "at or below 6,300 ft for 10 min; so since 13:16, back 13:26 at the earliest"),
        (-10.0, 0.0, "at or below 6,300 ft for 10 min; so since 13:10, may clear at the next reading"),
    ],
)
def test_what_clears_a_hold_goes_on_with_its_run(
    since_min: float | None, earliest_min: float | None, expected: str
) -> None:
    state = states.board()
    row = row_named(state, "Motor glider")
    assert row.shown is not None
    now = state.assessed_at
    clearing = Clearing(
        needs=6300.0,
        for_min=10.0,
        since=None if since_min is None else now + timedelta(minutes=since_min),
        earliest=None if earliest_min is None else now + timedelta(minutes=earliest_min),
    )
    state = with_limits(state, row, replace(row.shown, clearing=clearing))
    assert lines(details(state, row))["What clears it"] == expected


def test_near_and_reduced_say_at_which_value_they_ease_and_go_says_nothing_of_it() -> None:
    state = states.board()
    # 6,950 - 500 - 150; the limit at the greatest weight 6,760 - 150.
    near = lines(details(state, row_named(state, "Tow plane, single-seater")))
    assert near["What clears it"] == "GO at or below 6,300 ft"
    reduced = lines(details(state, row_named(state, "Tow plane, two-seater")))
    assert reduced["What clears it"] == "NEAR LIMIT at or below 6,610 ft"
    assert reduced["Greatest weight"] == "2,410 lb may depart now"
    assert reduced["Limit"] == "6,760 ft, at the greatest weight, 2,450 lb"
    well = lines(details(state, row_named(state, "Six-seat utility")))
    assert "What clears it" not in well
    assert well["State"] == "GO since 06:00"


def test_a_hold_by_weight_lets_no_weight_go() -> None:
    state = states.board()
    row = row_named(state, "Motor glider")
    assert row.shown is not None
    state = with_limits(state, row, replace(row.shown, full_weight=2450.0, weight_unit="lb"))
    shown = lines(details(state, row))
    assert shown["Greatest weight"] == "none may depart"
    assert shown["Limit"] == "6,450 ft, at the least weight of its table"


def test_all_limits_of_the_operation_are_there_each_with_its_own_state() -> None:
    state = states.board()
    row, other = row_named(state, "Motor glider"), row_named(state, "Electric trainer")
    assert row.shown is not None
    assert other.shown is not None
    pressure = replace(
        other.shown, quantity=Quantity.PRESSURE_ALTITUDE, unit="ft", limit=5000.0, value=4047.2, margin=952.8
    )
    deviation = replace(other.shown, quantity=Quantity.ISA_DEVIATION, guarded=True, deadband=0.5)
    state = with_limits(state, row, row.shown, other.shown, pressure, deviation)
    shown = details(state, row)
    assert [section.heading for section in shown.sections] == [
        "Density altitude",
        "Temperature",
        "Pressure altitude",
        "ISA deviation",
        "What the air costs now",
    ]
    temperature = lines(shown, 1)
    assert (temperature["State"], temperature["Limit"], temperature["Margin"]) == (
        "GO since 06:00",
        "42 °C",
        "+11.6 °C",
    )
    assert (temperature["Near band"], temperature["To clear a hold"]) == (
        "3 °C",
        "0.5 °C below the limit, for 10 min",
    )
    assert sources(shown, 1)["Limit"] == "basis: not given; source: not given"
    assert lines(shown, 2)["Hold above"] == "temperature does not matter to it"
    guarded = lines(shown, 3)
    assert guarded["Acceptance"] == "guarded: value + uncertainty is compared"
    assert guarded["Value"] == "30.4 °C, uncertainty included"


def test_dates_and_notice_of_a_temporary_limit() -> None:
    state = states.board()
    row = row_named(state, "Two-seat trainer", "Solo")
    shown = lines(details(state, row))
    assert (shown["In force"], shown["Notice"]) == ("until 30 Sep 2026", "Local order 7")
    assert row.shown is not None
    both = with_limits(state, row, replace(row.shown, valid_from="2026-06-01"))
    assert lines(details(both, row))["In force"] == "1 Jun 2026 to 30 Sep 2026"
    first = with_limits(state, row, replace(row.shown, valid_from="2026-06-01", valid_until=""))
    assert lines(details(first, row))["In force"] == "from 1 Jun 2026"


def test_a_margin_that_may_be_gone_soon_is_told() -> None:
    state = states.board()
    row = row_named(state, "Tow plane, single-seater")
    # The invented line is used up 0.4 h after the reading of 13:10.
    assert lines(details(state, row))["May be gone by"] == ("13:34, at the present rate of the density altitude")


def test_a_reading_that_went_stale_leaves_no_number_that_could_be_taken_for_now() -> None:
    state = states.board()
    row = row_named(state, "Motor glider")
    shown = details(state, row, later=timedelta(minutes=55))
    assert shown.state is State.NO_DATA
    # Observed at 13:10, stale after 60 min.
    assert lines(shown)["State"] == "NO DATA since 14:10, was HOLD at 13:10, no current observation"
    assert lines(shown)["What clears it"] == (
        "a valid observation that can be compared; its hold goes on then, NO DATA never ends one"
    )
    assert not {"Value", "Margin", "Hold above", "Greatest weight", "May be gone by"} & set(lines(shown))
    assert lines(shown, -1) == {"Air": "not known, No current observation, Last 13:10, stale at 60 min"}
    assert "NO DATA" in shown.under


def test_before_the_first_observation_nothing_is_known() -> None:
    state = states.empty_board()
    shown = details(state, row_named(state, "Motor glider"))
    assert lines(shown)["State"] == "NO DATA, no observation"
    assert lines(shown, -1)["Air"].startswith("not known, No observation yet")


def test_numbers_that_are_no_numbers_are_not_known() -> None:
    state = states.board()
    assert state.conditions is not None
    row = row_named(state, "Motor glider")
    assert row.shown is not None
    broken = replace(
        state, conditions=replace(state.conditions, true_airspeed_ratio=float("nan"), shaft_power_ratio=float("nan"))
    )
    air = lines(details(broken, row), -1)
    assert (air["True airspeed"], air["Shaft power"]) == ("not known", "not known")
    lacking = with_limits(state, row, replace(row.shown, clearing=None, hold_above_c=None, value=None, limit=None))
    said = lines(details(lacking, row))
    assert {said[label] for label in ("What clears it", "Hold above", "Value", "Limit")} == {"not known"}


def test_an_operation_without_a_limit_says_so() -> None:
    state = states.board()
    row = replace(row_named(state, "Motor glider"), limits=(), shown=None, state=State.NO_DATA)
    shown = details(with_row(state, row), row)
    assert (shown.state, lines(shown)) == (State.NO_DATA, {"Limit": "none in force today"})


def test_group_and_frames_stand_beside_the_name() -> None:
    state = replace(states.board(mode=Mode.DEMO), recording=False)
    row = replace(row_named(state, "Motor glider"), group="Gliding")
    assert details(with_row(state, row), row).under == "Gliding · NOT RECORDING · DEMO"


def test_several_rows_are_told_one_after_the_other_under_the_worst_state() -> None:
    state = states.board()
    view = view_of(state, state.assessed_at, None)
    shown = details_of([row for row in view.rows if row.aircraft_name == "Two-seat trainer"], view)
    assert (shown.title, shown.state) == ("2 operations", State.HOLD)
    assert [section.heading for section in shown.sections] == [
        "Two-seat trainer · Departure: density altitude",
        "Two-seat trainer · Solo circuits: density altitude",
        "What the air costs now",
    ]


def test_the_plain_text_has_all_of_it() -> None:
    state = states.board()
    shown = details(state, row_named(state, "Motor glider"))
    for section in shown.sections:
        assert section.heading in shown.plain
        for line in section.lines:
            assert f"{line.label}: {line.text}" in shown.plain
            assert line.source in shown.plain
    assert "HOLD clears at or below 6,300 ft" in shown.plain
