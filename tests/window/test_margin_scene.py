"""Margin lines: limit less density altitude, each part in the colour of its own state."""

from dataclasses import replace
from datetime import timedelta

import numpy as np
import pytest

from airfield_board.clock import us_from_time
from airfield_board.configuration.model import Quantity
from airfield_board.limits.states import State
from airfield_board.session.board_state import OperationLine, Span
from airfield_board.units import m_from_ft
from airfield_board.window.axes import TimeAxis
from airfield_board.window.day_scene import Stretch, stretches_of
from airfield_board.window.margin_plot import state_points
from airfield_board.window.margin_scene import first_choice, line_of, lowest_margin, margin_range, plottable
from tests.window import states

AXIS = TimeAxis(start=states.local(6.0), end=states.local(21.0), left_px=0.0, right_px=600.0)


def row_with(limit_ft: float, **changes: object) -> OperationLine:
    """Return an invented operation with a limit on the density altitude, without holds."""
    row = next(row for row in states.board(15).operations if row.aircraft_name == "Motor glider")
    assert row.shown is not None
    line = replace(row.shown, limit=limit_ft, spans=(), **changes)  # type: ignore[arg-type]  # names of the line
    return replace(row, shown=line, limits=(line,))


def stretch(*values_ft: float) -> Stretch:
    """Return a curve with a point an hour from 06:00 and an uncertainty of 60 ft."""
    value = np.array(values_ft, dtype=np.float64)
    seconds = np.arange(len(value), dtype=np.float64) * 3600.0
    return Stretch(seconds=seconds, value=value, low=value - 60.0, high=value + 60.0)


def test_a_margin_is_limit_less_density_altitude() -> None:
    line = line_of(row_with(6450.0), [stretch(5000.0, 6000.0, 6500.0)], AXIS, 6500.0)
    assert line.stretches[0].margin_ft.tolist() == [1450.0, 450.0, -50.0]
    assert line.now_ft == -50.0


def test_guarded_margins_are_of_the_compared_value() -> None:
    line = line_of(row_with(6450.0, guarded=True), [stretch(5000.0)], AXIS, 5060.0)
    assert line.stretches[0].margin_ft.tolist() == [1390.0]
    assert line.now_ft == 1390.0


def test_a_limit_in_metres_is_drawn_in_feet() -> None:
    row = row_with(m_from_ft(6450.0), unit="m", near_band=m_from_ft(500.0))
    line = line_of(row, [stretch(5000.0, 6000.0)], AXIS, None)
    assert line.stretches[0].margin_ft.tolist() == pytest.approx([1450.0, 450.0])
    assert line.stretches[0].state.tolist() == [State.GO.severity, State.NEAR.severity]
    assert line.now_ft is None


def test_a_part_on_hold_is_on_hold_whatever_its_margin() -> None:
    hold = Span(state=State.HOLD, start=states.local(8.0), end=states.local(10.0))
    row = row_with(6450.0)
    assert row.shown is not None
    row = replace(row, shown=replace(row.shown, spans=(hold,)))
    line = line_of(row, [stretch(5000.0, 6000.0, 6500.0, 6400.0, 6300.0, 5500.0)], AXIS, None)
    assert line.stretches[0].state.tolist() == [
        State.GO.severity,
        State.NEAR.severity,
        State.HOLD.severity,
        State.HOLD.severity,
        State.NEAR.severity,
        State.GO.severity,
    ]


def test_a_lasting_hold_reaches_the_end() -> None:
    hold = Span(state=State.REDUCED, start=states.local(7.0), end=None)
    row = row_with(6450.0)
    assert row.shown is not None
    row = replace(row, shown=replace(row.shown, spans=(hold,)))
    line = line_of(row, [stretch(5000.0, 6500.0, 6600.0)], AXIS, None)
    assert line.stretches[0].state.tolist() == [0, State.REDUCED.severity, State.REDUCED.severity]


def test_each_colour_has_its_own_points_and_they_meet() -> None:
    line = line_of(row_with(6450.0), [stretch(5000.0, 5500.0, 6000.0, 6100.0, 5500.0, 5400.0)], AXIS, None)
    x, y = state_points(line, (State.GO,))
    # The segment into 08:00 is NEAR, and that into 10:00 is GO again: it begins at the NEAR point before it.
    assert np.isnan(y[2])
    assert y[np.isfinite(y)].tolist() == [1450.0, 950.0, 350.0, 950.0, 1050.0]
    near_x, near_y = state_points(line, (State.NEAR,))
    assert near_y[np.isfinite(near_y)].tolist() == [950.0, 450.0, 350.0]
    assert near_x[np.isfinite(near_y)].tolist() == [3600.0, 7200.0, 10800.0]
    assert len(x) == len(y)


def test_two_runs_of_a_colour_with_one_point_between_are_not_joined() -> None:
    line = line_of(row_with(6450.0), [stretch(5000.0, 6000.0, 5000.0)], AXIS, None)
    _x, y = state_points(line, (State.GO,))
    runs = np.split(y, np.flatnonzero(np.isnan(y)))
    drawn = [run[np.isfinite(run)].tolist() for run in runs]
    assert [run for run in drawn if len(run) > 1] == [[450.0, 1450.0]]


def test_only_density_altitudes_with_a_limit_are_drawn() -> None:
    assert plottable(row_with(6450.0))
    assert not plottable(row_with(6450.0, quantity=Quantity.PRESSURE_ALTITUDE))
    row = row_with(6450.0)
    assert row.shown is not None
    assert not plottable(replace(row, shown=replace(row.shown, limit=None)))
    assert not plottable(replace(row, shown=None))
    empty = line_of(replace(row, shown=None), [stretch(5000.0)], AXIS, 5000.0)
    assert (empty.stretches, empty.now_ft) == ((), None)


def test_the_axis_holds_zero_the_near_band_and_all_lines() -> None:
    line = line_of(row_with(6450.0), [stretch(5000.0, 7900.0)], AXIS, 7900.0)
    low, high = margin_range([line], 500.0)
    assert (low, high) == (-1500.0, 1500.0)
    assert margin_range([], 500.0) == (-500.0, 1000.0)


def test_first_choice_keeps_the_order_of_the_board() -> None:
    state = states.board(40)
    chosen = first_choice(state.operations, state.curve)
    order = [row.key for row in state.operations]
    assert len(chosen) == 6
    assert list(chosen) == sorted(chosen, key=order.index)


def test_the_curve_starts_where_the_axis_does() -> None:
    state = states.board(15)
    parts = stretches_of(state.curve, AXIS)
    first_us = us_from_time(AXIS.start) + parts[0].seconds[0] * 1e6
    assert first_us >= us_from_time(AXIS.start)
    assert parts[0].seconds[0] < timedelta(minutes=6).total_seconds()


def test_the_lowest_margin_of_the_day_is_of_the_compared_value_in_the_limits_unit() -> None:
    curve = states.board(15).curve
    # Invented: the highest density altitude comes before the highest compared value.
    curve = replace(
        curve,
        time_us=np.array([us_from_time(states.local(hour)) for hour in (12.0, 13.0)], dtype=np.int64),
        density_altitude_ft=np.array([6500.0, 6480.0]),
        uncertainty_ft=np.array([50.0, 100.0]),
    )
    assert lowest_margin(row_with(6450.0), curve) == (-50.0, states.local(12.0))
    assert lowest_margin(row_with(6450.0, guarded=True), curve) == (-130.0, states.local(13.0))
    found = lowest_margin(row_with(m_from_ft(6450.0), unit="m"), curve)
    assert found is not None
    assert found[0] == pytest.approx(-15.24)  # 50 ft of 0.3048 m
    assert lowest_margin(row_with(31.0, unit="c", quantity=Quantity.TEMPERATURE), curve) is None
    assert lowest_margin(row_with(6450.0), states.empty_board().curve) is None
