"""The window's own clock decides what may be shown."""

from dataclasses import replace
from datetime import timedelta

import pytest

from airfield_board.configuration.model import Quantity
from airfield_board.limits.states import State
from airfield_board.session.board_state import Freshness, Mode, SettingChange
from airfield_board.window.reading import Cause, Frame, reckon, view_of
from tests.window import states

WAITING = (SettingChange(where="Two-seat trainer · Departure", in_force="6,350 ft", waiting="6,500 ft"),)


@pytest.mark.parametrize(
    ("age_min", "freshness", "cause"),
    [
        (0.0, Freshness.FRESH, Cause.NONE),
        (20.0, Freshness.FRESH, Cause.NONE),
        (20.001, Freshness.AGEING, Cause.NONE),
        (60.0, Freshness.AGEING, Cause.NONE),
        (60.001, Freshness.STALE, Cause.STALE),
        (6000.0, Freshness.STALE, Cause.STALE),
    ],
)
def test_age_follows_the_clock_and_not_the_state(age_min: float, freshness: Freshness, cause: Cause) -> None:
    state = states.board(15, age_min=0.0)
    assert state.observation is not None
    reading = reckon(state, state.observation.time + timedelta(minutes=age_min), None)
    assert (reading.freshness, reading.cause) == (freshness, cause)


def test_a_stale_state_is_never_taken_for_fresh() -> None:
    state = states.stale_board()
    assert state.observation is not None
    assert reckon(state, state.observation.time, None).cause is Cause.STALE


def test_no_observation_is_missing() -> None:
    state = states.empty_board()
    reading = reckon(state, state.assessed_at, None)
    assert (reading.freshness, reading.cause, reading.age) == (Freshness.MISSING, Cause.MISSING, None)


def test_an_observation_without_conditions_is_not_trusted() -> None:
    state = replace(states.board(), conditions=None)
    assert reckon(state, state.assessed_at, None).cause is Cause.NOT_CALCULATED


@pytest.mark.parametrize(("late_s", "trusted"), [(0, True), (10, True), (10.1, False), (-10, True), (-11, False)])
def test_a_recorder_that_does_not_answer_is_not_trusted(late_s: float, trusted: bool) -> None:
    state = states.board()
    reading = reckon(state, state.assessed_at + timedelta(seconds=late_s), timedelta(seconds=10))
    assert reading.trusted is trusted


@pytest.mark.parametrize(("ahead_min", "trusted"), [(5.0, True), (5.01, False)])
def test_an_observation_of_the_future_is_not_trusted(ahead_min: float, trusted: bool) -> None:
    state = states.board(15, age_min=0.0)
    assert state.observation is not None
    reading = reckon(state, state.observation.time - timedelta(minutes=ahead_min), None)
    assert reading.trusted is trusted
    assert reading.age == timedelta(0)


def test_untrusted_rows_are_all_without_data_and_say_what_they_were() -> None:
    state = states.board()
    assert state.observation is not None
    view = view_of(state, state.assessed_at + timedelta(hours=2), None)
    for row, before in zip(view.rows, state.operations, strict=True):
        assert row.state is State.NO_DATA
        assert row.shown is not None
        assert (row.shown.margin, row.shown.hold_above_c, row.shown.gone_by) == (None, None, None)
        if before.state is not State.NO_DATA:
            assert (row.shown.was, row.shown.was_at) == (before.state, state.observation.time)


def test_trusted_rows_are_those_of_the_state() -> None:
    state = states.board()
    assert view_of(state, state.assessed_at, None).rows == state.operations


def test_frames_come_in_their_order() -> None:
    state = replace(states.board(), mode=Mode.DEMO, recording=False, waiting=WAITING)
    late = state.assessed_at + timedelta(hours=2)
    assert view_of(state, late, None).frames == (
        Frame.NO_DATA,
        Frame.NOT_RECORDING,
        Frame.DEMO,
        Frame.SETTINGS_WAITING,
    )
    assert view_of(replace(state, recording=True), state.assessed_at, None).frames[0] is Frame.DEMO


def test_live_stands_only_where_all_is_live_and_from_the_file() -> None:
    state = states.board()
    assert state.observation is not None
    now = state.assessed_at
    assert view_of(state, now, None).live
    typed = replace(state, observation=replace(state.observation, initials="MS"))
    not_live = [
        typed,
        replace(state, mode=Mode.DEMO),
        replace(state, mode=Mode.PAST),
        replace(state, mode=Mode.TRAINING),
        replace(state, recording=False),
        replace(state, waiting=WAITING),
        states.stale_board(),
        states.empty_board(),
    ]
    assert not any(view_of(other, other.assessed_at, None).live for other in not_live)
    assert not view_of(state, now + timedelta(hours=2), None).live


@pytest.mark.parametrize("name", ["density_altitude_ft", "uncertainty_ft", "pressure_altitude_ft", "isa_deviation_c"])
@pytest.mark.parametrize("value", [float("nan"), float("inf")])
def test_conditions_that_are_no_numbers_are_not_trusted(name: str, value: float) -> None:
    state = states.board()
    assert state.conditions is not None
    broken = replace(state, conditions=replace(state.conditions, **{name: value}))  # type: ignore[arg-type]  # all floats
    assert reckon(broken, broken.assessed_at, None).cause is Cause.NOT_CALCULATED


@pytest.mark.parametrize("margin", [None, float("nan")])
def test_a_go_without_a_margin_is_shown_as_no_data(margin: float | None) -> None:
    state = states.board()
    first = state.operations[0]
    assert first.state is State.GO
    assert first.shown is not None
    broken = replace(first, shown=replace(first.shown, margin=margin))
    view = view_of(replace(state, operations=(broken, replace(first, shown=None))), state.assessed_at, None)
    assert [row.state for row in view.rows] == [State.NO_DATA, State.NO_DATA]


def test_a_hold_without_a_margin_stays_on_hold() -> None:
    state = states.board()
    held = next(row for row in state.operations if row.state is State.HOLD)
    assert held.shown is not None
    broken = replace(held, shown=replace(held.shown, margin=None))
    view = view_of(replace(state, operations=(broken,)), state.assessed_at, None)
    assert [row.state for row in view.rows] == [State.HOLD]


def test_a_go_with_a_second_limit_without_a_margin_is_shown_as_no_data() -> None:
    state = states.board()
    first = state.operations[0]
    assert first.shown is not None
    second = replace(first.shown, quantity=Quantity.TEMPERATURE, margin=None)
    view = view_of(replace(state, operations=(replace(first, limits=(first.shown, second)),)), state.assessed_at, None)
    (row,) = view.rows
    assert (row.state, [line.state for line in row.limits]) == (State.NO_DATA, [State.GO, State.NO_DATA])
    assert row.shown is not None
    assert (row.shown.quantity, row.shown.reason) == (Quantity.TEMPERATURE, "nothing to compare")


def test_without_a_trusted_reading_no_limit_of_a_row_keeps_its_state() -> None:
    state = states.board()
    held = next(row for row in state.operations if row.state is State.HOLD)
    assert held.shown is not None
    assert state.observation is not None
    well = replace(held.shown, quantity=Quantity.TEMPERATURE, state=State.GO)
    both = replace(state, operations=(replace(held, limits=(held.shown, well)),))
    stale_at = state.observation.time + timedelta(minutes=60)
    (row,) = view_of(both, stale_at + timedelta(minutes=3), None).rows
    assert [line.state for line in row.limits] == [State.NO_DATA, State.NO_DATA]
    assert [line.was for line in row.limits] == [State.HOLD, State.GO]
    # Stale after 60 min, as the invented profile has it.
    assert [line.since for line in row.limits] == [stale_at, stale_at]
    assert {(line.margin, line.value, line.clearing, line.hold_temperature_c) for line in row.limits} == {(None,) * 4}
    (row,) = view_of(both, state.assessed_at + timedelta(minutes=5), timedelta(seconds=30)).rows
    assert [(line.state, line.since) for line in row.limits] == [(State.NO_DATA, None)] * 2
