"""Random records that hover around the thresholds: the engine against the small reference, whole against in parts."""

from collections.abc import Iterator, Sequence
from dataclasses import replace
from datetime import date
from itertools import pairwise

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from airfield_board.configuration.model import Limit, PressureAltitudeTable, Quantity, WeightTable
from airfield_board.limits.rules import Episode, LimitChange
from airfield_board.limits.states import State
from airfield_board.units import MINUTE_US
from tests.limits.record import ZONE, Desk, Kind, Row, by_weight, limit_of
from tests.limits.reference import Exceeded, Reference, Told, difference_in_unit, exceeds, limit_at, plain, rule_at

TONIGHT = date(2026, 7, 14)
"""The local day of the records' first 16 hours."""
TOMORROW = date(2026, 7, 15)

TOW = {1950.0: 7400.0, 2200.0: 6950.0, 2450.0: 6550.0}


def temperature(value: float | PressureAltitudeTable, *, off_delay_min: float = 10.0) -> Limit:
    base = limit_of(45, quantity=Quantity.TEMPERATURE, unit="c", near_band=3, deadband=0.5, off_delay_min=off_delay_min)
    return replace(base, value=value)


HOT = PressureAltitudeTable(altitudes_ft=(2000, 4000, 6000), limits=(45, 41, 35))
METRES = replace(limit_of(1800, unit="m"), near_band=152.4, deadband=45.72)
FAHRENHEIT = limit_of(108, quantity=Quantity.TEMPERATURE, unit="f", near_band=5.4, deadband=0.9)
WEIGHTS_C = WeightTable(weight_unit="kg", weights=(900.0, 1000.0), limits=(44.0, 40.0))

# Where several entries count together they have the same bands, so that it does not matter whose count.
SCENARIOS: dict[str, list[Limit]] = {
    "a number": [limit_of()],
    "no delay": [limit_of(off_delay_min=0)],
    "no deadband": [limit_of(deadband=0)],
    "no near band": [limit_of(near_band=0)],
    "no bands, no delay": [limit_of(deadband=0, near_band=0, off_delay_min=0)],
    "long delay": [limit_of(off_delay_min=90)],
    "deadband wider than near band": [limit_of(near_band=100, deadband=150)],
    "by weight": [by_weight(TOW)],
    "by weight, no delay": [by_weight(TOW, off_delay_min=0)],
    "by weight, no bands": [by_weight(TOW, near_band=0, deadband=0)],
    "by weight, limits closer than bands": [by_weight({1950: 6600, 2450: 6550})],
    "by weight and a number": [by_weight(TOW), limit_of(7000)],
    "temperature by weight": [temperature(45), replace(temperature(45), value=WEIGHTS_C)],
    "guarded": [limit_of(guarded=True)],
    "metres": [METRES],
    "Fahrenheit": [FAHRENHEIT],
    "ISA deviation": [replace(FAHRENHEIT, value=36.0, quantity=Quantity.ISA_DEVIATION)],
    "pressure altitude": [limit_of(4500, quantity=Quantity.PRESSURE_ALTITUDE)],
    "lower from midnight": [limit_of(), replace(limit_of(6100), valid_from=TOMORROW)],
    "lower until midnight": [limit_of(), replace(limit_of(6100), valid_until=TONIGHT)],
    "another unit from midnight": [limit_of(), replace(METRES, valid_from=TOMORROW)],
    "no limit after midnight": [replace(limit_of(), valid_until=TONIGHT)],
    "no limit before midnight": [replace(limit_of(), valid_from=TOMORROW)],
    "by weight until midnight": [replace(by_weight(TOW), valid_until=TONIGHT), limit_of(7000)],
    "by pressure altitude": [temperature(HOT)],
    "by pressure altitude, no delay": [temperature(HOT, off_delay_min=0)],
    "by pressure altitude and a number": [temperature(HOT), temperature(42)],
}

GAPS_MIN = (1.0, 5.0, 5.0, 9.999, 10.0, 14.9, 15.0, 15.001, 16.0, 60.0, 179.999, 180.0, 180.001, 400.0)
KINDS: tuple[Kind, ...] = ("valid",) * 12 + ("suspect",) * 3 + ("rejected", "future")
HEIGHTS_FT = (1999.0, 2000.0, 3000.0, 4000.0, 4000.0, 4500.0, 6000.0, 6001.0)
OFFSETS = (0.0, 0.0, -0.1, 0.1, -2e-6, 2e-6, 5e-7, -5e-7)
STALE_AFTER_MIN = (15.0, 70.0, 600.0)
UNCERTAINTY = 80.0
STAYS = 8
"""Of 16 choices of a level so many leave it as it was, so that runs can grow long."""

Choice = tuple[int, int, int, int, int, int]
"""Gap, kind, level, offset, height, and whether a step is confirmed, each as a place in its list."""

CHOICES = st.tuples(
    st.integers(0, len(GAPS_MIN) - 1),
    st.integers(0, len(KINDS) - 1),
    st.integers(0, 15),
    st.integers(0, len(OFFSETS) - 1),
    st.integers(0, len(HEIGHTS_FT) - 1),
    st.integers(0, 15),
)


def levels(entry: Limit, height_ft: float) -> list[float]:
    """Values at which something can change, one far below and one far above them; in ft or °C."""
    native = "ft" if entry.unit in ("ft", "m") else "c"
    row = Row(minute=0, pressure_altitude_ft=height_ft)
    heavy = limit_at(entry, row, native, lightest=False)
    light = limit_at(entry, row, native, lightest=True)
    if heavy is None or light is None:
        return [20.0, 50.0]
    guard = UNCERTAINTY if entry.guarded else 0.0
    near = difference_in_unit(entry.near_band, entry.unit, native)
    dead = difference_in_unit(entry.deadband, entry.unit, native)
    found = {heavy - near - dead, heavy - near, heavy - dead, heavy, light - dead, light}
    return sorted(level - guard for level in found | {heavy - 4 * near - 10, light + 10})


def record_of(entries: Sequence[Limit], choices: Sequence[Choice]) -> list[Row]:
    """Turn choices into rows that hover around the thresholds of the entries."""
    rows: list[Row] = []
    minute = 900.0 - 5.0  # an hour before local midnight
    place = 0
    for gap, kind, level, offset, height, step in choices:
        minute += GAPS_MIN[gap]
        if level >= STAYS:
            place = level
        height_ft = HEIGHTS_FT[height]
        heights = levels(entries[place % len(entries)], height_ft)
        rows.append(
            Row(
                minute=minute,
                value=heights[place // len(entries) % len(heights)] + OFFSETS[offset],
                kind=KINDS[kind],
                confirmed=step == 0,
                pressure_altitude_ft=height_ft,
                uncertainty=UNCERTAINTY,
            )
        )
    return rows


def drawn(seed: int, count: int) -> list[Choice]:
    generator = np.random.default_rng(seed)
    columns = [generator.integers(0, high, count).tolist() for high in (len(GAPS_MIN), len(KINDS), 16, 8, 8, 40)]
    # Mostly ordinary intervals, else nearly every hold would be passed over by a gap.
    ordinary = generator.random(count) < 0.8
    columns[0] = [gap % 4 if usual else gap for gap, usual in zip(columns[0], ordinary, strict=True)]
    return [
        (gap, kind, level, offset, height, step)
        for gap, kind, level, offset, height, step in zip(*columns, strict=True)
    ]


each_scenario = pytest.mark.parametrize("entries", SCENARIOS.values(), ids=SCENARIOS)


def told(change: LimitChange) -> tuple[int, str | None, str, object]:
    value = None if change.value is None else pytest.approx(change.value, abs=1e-7)
    return change.time_us, change.was, str(change.state), value


def told_by_reference(change: Told) -> tuple[int, str | None, str, object]:
    return change.time_us, change.was, change.state, change.value


def measured(episode: Episode | Exceeded | None) -> tuple[object, ...] | None:
    if episode is None:
        return None
    numbers = (episode.peak, episode.worst_margin, episode.minutes, episode.minutes_without_data)
    return episode.start_us, episode.end_us, *(round(number, 6) + 0.0 for number in numbers)


def compare_with_reference(entries: list[Limit], rows: list[Row], stale_after_min: float) -> None:
    reference = Reference(entries, stale_after_min)
    for row in rows:
        reference.take(row)
    judge = Desk(*entries, stale_after_min=stale_after_min).take(rows).judge
    assert [told(change) for change in judge.take_changes()] == [told_by_reference(each) for each in reference.told]
    assert [measured(episode) for episode in judge.take_ended()] == [measured(each) for each in reference.ended]
    assert measured(judge.open_episode()) == measured(reference.open_episode())


@each_scenario
@settings(max_examples=25, deadline=None)
@given(choices=st.lists(CHOICES, max_size=60), stale=st.sampled_from(STALE_AFTER_MIN))
def test_the_engine_says_what_the_reference_says(entries: list[Limit], choices: list[Choice], stale: float) -> None:
    compare_with_reference(entries, record_of(entries, choices), stale)


@each_scenario
@pytest.mark.parametrize("stale_after_min", STALE_AFTER_MIN)
def test_so_it_does_on_long_records(entries: list[Limit], stale_after_min: float) -> None:
    compare_with_reference(entries, record_of(entries, drawn(round(stale_after_min), 1500)), stale_after_min)


def test_the_long_records_hold_what_they_should() -> None:
    """A comparison of records in which nothing happens would prove nothing."""
    entries = SCENARIOS["by weight"]
    judge = Desk(*entries, stale_after_min=70).take(record_of(entries, drawn(70, 1500))).judge
    changes = {(change.was, change.state) for change in judge.take_changes()}
    states = set(State)
    missing = {(was, state) for was in states for state in states if was is not state} - changes
    assert missing == set()
    assert sum(1 for episode in judge.take_ended() if episode.minutes_without_data > 0) > 5


def in_blocks(rows: list[Row], cuts: list[int]) -> Iterator[list[Row]]:
    edges = [0, *sorted(min(cut, len(rows)) for cut in cuts), len(rows)]
    for first, last in pairwise(edges):
        yield rows[first:last]


@each_scenario
@settings(max_examples=25, deadline=None)
@given(
    choices=st.lists(CHOICES, max_size=60),
    cuts=st.lists(st.integers(0, 60), max_size=6),
    stale=st.sampled_from(STALE_AFTER_MIN),
)
def test_whole_row_by_row_and_in_blocks_are_the_same(
    entries: list[Limit], choices: list[Choice], cuts: list[int], stale: float
) -> None:
    rows = record_of(entries, choices)
    whole = Desk(*entries, stale_after_min=stale).take(rows)
    expected = (whole.judge.take_changes(), whole.judge.take_ended(), whole.judge.open_episode())
    for parts in (list(in_blocks(rows, cuts)), [[row] for row in rows]):
        desk = Desk(*entries, stale_after_min=stale)
        changes: list[LimitChange] = []
        ended: list[Episode] = []
        for part in parts:
            desk.take(part)
            changes += desk.judge.take_changes()
            ended += desk.judge.take_ended()
            desk.reload()
        assert (changes, ended, desk.judge.open_episode()) == expected
        assert desk.judge.memory == whole.judge.memory


@each_scenario
@settings(max_examples=25, deadline=None)
@given(choices=st.lists(CHOICES, max_size=60), stale=st.sampled_from(STALE_AFTER_MIN))
def test_what_can_never_be(entries: list[Limit], choices: list[Choice], stale: float) -> None:
    desk = Desk(*entries, stale_after_min=stale)
    newest_us = None
    for row in record_of(entries, choices):
        desk.take([row])
        changes = desk.judge.take_changes()
        if row.kind != "valid":
            # Only a valid observation gives a state that lets anyone go.
            assert all(change.state is State.NO_DATA for change in changes)
        else:
            newest_us = row.time_us
            rule = rule_at(entries, row, ZONE)
            state = desk.state
            if rule is None:
                assert state is None
            else:
                assert state is not None
                assert state.severity >= State(plain(rule)).severity or state is State.HOLD
        old = newest_us is None or (row.kind != "future" and row.time_us - newest_us > stale * MINUTE_US)
        if old:
            assert desk.state in (None, State.NO_DATA)


@each_scenario
@settings(max_examples=25, deadline=None)
@given(choices=st.lists(CHOICES, min_size=20, max_size=60), stale=st.sampled_from(STALE_AFTER_MIN))
def test_a_hold_never_ends_before_its_time(entries: list[Limit], choices: list[Choice], stale: float) -> None:
    rows = [row for row in record_of(entries, choices) if row.kind != "future"]
    for episode in Desk(*entries, stale_after_min=stale).take(rows).judge.take_ended():
        end_us = episode.end_us
        assert end_us is not None
        (last,) = [row for row in rows if row.time_us == end_us and row.kind == "valid"]
        rule = rule_at(entries, last, ZONE)
        if rule is None:
            continue
        delay_us = rule.off_delay_us
        inside = [row for row in rows if episode.start_us < row.time_us <= end_us and row.kind == "valid"]
        before = [
            max(each.time_us for each in rows if each.kind == "valid" and each.time_us < row.time_us) for row in inside
        ]
        gaps_us = [row.time_us - earlier_us for row, earlier_us in zip(inside, before, strict=True)]
        if any(row.confirmed for row in inside) or max(gaps_us) > 180 * MINUTE_US:
            delay_us = max(delay_us, 60 * MINUTE_US)
        # Some valid row at least the delay before the end, from which on every one that was used is clear.
        run = [row for row in rows if row.time_us <= end_us and row.kind in ("valid", "suspect")]
        while run and is_clear(entries, run[-1]):
            first = run.pop()
            if first.kind == "valid" and end_us - first.time_us >= delay_us:
                break
        else:
            pytest.fail("the hold ended too early")


def is_clear(entries: list[Limit], row: Row) -> bool:
    rule = rule_at(entries, row, ZONE)
    return rule is not None and not rule.left_a_table and not exceeds(rule.value, rule.least_weight - rule.deadband)
