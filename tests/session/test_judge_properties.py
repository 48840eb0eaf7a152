"""Whole records through checks, air and rules: against the small references, and whole against in parts."""

import json
import random
from collections import Counter
from collections.abc import Iterator, Sequence
from dataclasses import replace
from itertools import pairwise

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from airfield_board.configuration.model import Humidity, Quantity
from airfield_board.limits.rules import Episode, LimitChange
from airfield_board.limits.states import State
from airfield_board.observations.conditions import conditions_of
from airfield_board.observations.observation import Verdict
from airfield_board.session.judge import Judge
from airfield_board.units import MINUTE_US
from tests.limits.record import Row, us_at
from tests.limits.reference import Exceeded, Reference, Told
from tests.session.reference_checks import Found, ReferenceChecks
from tests.session.station import ELEVATION_M, FLEET, NAN, Sent, profile_of, table_of

HUMIDITIES: tuple[Humidity, ...] = ("auto", "moist", "dry")
GAPS_MIN = (0.5, 1.0, 5.0, 5.0, 5.0, 10.0, 15.0, 16.0, 60.0, 179.0, 180.0, 181.0, 800.0)
FAR_MINUTE = 10_000_000.0
"""A clock by which no row is in the future."""

Choice = tuple[int, int, int, int, int, int]
"""Gap, change of temperature, of altimeter setting, jump, dew point, oddity."""

CHOICES = st.tuples(
    st.integers(0, len(GAPS_MIN) - 1),
    st.integers(-8, 8),
    st.integers(-3, 3),
    st.integers(0, 15),
    st.integers(0, 9),
    st.integers(0, 30),
)
RECORDS = st.lists(CHOICES, max_size=50)


def record_of(choices: Sequence[Choice]) -> list[Sent]:
    """Turn choices into a record that wanders about the limits of the fleet, with jumps and odd rows."""
    rows: list[Sent] = []
    minute, temperature_c, altimeter_hpa, dewpoint_c = 600.0, 23.0, 1013.2, 10.0
    for gap, warmer, higher, jump, moisture, odd in choices:
        minute += GAPS_MIN[gap]
        pull = 0.25 * (23.0 - temperature_c) if abs(temperature_c - 23.0) > 4 else 0.0
        temperature_c = round(temperature_c + 0.4 * warmer + pull, 1)
        altimeter_hpa = round(min(max(altimeter_hpa + 0.4 * higher, 1010.0), 1017.0), 1)
        if jump == 0:
            temperature_c = 31.0 if temperature_c < 23.0 else 15.0
        dewpoint_c = min(round(dewpoint_c + 0.5 * (moisture - 3), 1), temperature_c)
        if jump == 1:
            dewpoint_c = min(dewpoint_c - 10.0 if dewpoint_c > 5.0 else dewpoint_c + 10.0, temperature_c)
        row = Sent(
            minute=minute,
            temperature_c=temperature_c + (9.0 if jump == 2 else 0.0),
            altimeter_hpa=altimeter_hpa - (5.0 if jump == 3 else 0.0),
            dewpoint_c=dewpoint_c if moisture < 7 else NAN,
        )
        rows.append(spoilt(row, odd))
    return rows


def spoilt(row: Sent, how: int) -> Sent:
    match how:
        case 0:
            return replace(row, altimeter_hpa=NAN)
        case 1:
            return replace(row, temperature_c=NAN)
        case 2:
            return replace(row, temperature_c=61.0)
        case 3:
            return replace(row, elevation_m=ELEVATION_M + 31.0)
        case 4:
            return replace(row, fault="a value that is no plain decimal number")
        case 5:
            return replace(row, dewpoint_c=row.temperature_c + 1.5)
        case _:
            return row


def drawn(seed: int, count: int) -> list[Sent]:
    """A long record: mostly ordinary intervals, and a sensor that sticks for a while."""
    generator = np.random.default_rng(seed)
    columns = [generator.integers(low, high, count).tolist() for low, high in ((0, 13), (-8, 9), (-3, 4), (0, 40))]
    columns += [generator.integers(0, 10, count).tolist(), generator.integers(0, 60, count).tolist()]
    ordinary = generator.random(count) < 0.9
    columns[0] = [1 + gap % 4 if usual else gap for gap, usual in zip(columns[0], ordinary, strict=True)]
    rows = record_of([tuple(choice) for choice in zip(*columns, strict=True)])
    stuck_from = count // 2
    stuck = rows[stuck_from]
    for place in range(stuck_from, stuck_from + 120):
        rows[place] = replace(
            rows[place], temperature_c=stuck.temperature_c, altimeter_hpa=stuck.altimeter_hpa, dewpoint_c=NAN
        )
    return rows


ENTRIES = {
    (aircraft.id, quantity): [limit for limit in operation.limits if limit.quantity is quantity]
    for aircraft in FLEET.aircraft
    for operation in aircraft.operations
    for quantity in dict.fromkeys(limit.quantity for limit in operation.limits)
}


def by_reference(
    rows: Sequence[Sent], humidity: Humidity, stale_after_min: float, now_us: int
) -> tuple[list[Found], dict[tuple[str, Quantity], Reference]]:
    """Take a record through the references, row by row."""
    checks = ReferenceChecks(ELEVATION_M, humidity, now_us)
    limits = {key: Reference(entries, stale_after_min) for key, entries in ENTRIES.items()}
    found = [checks.check(row) for row in sorted(rows, key=lambda row: row.minute)]
    for row, result in zip(sorted(rows, key=lambda row: row.minute), found, strict=True):
        seen = air_of(row, result)
        for (_, quantity), limit in limits.items():
            limit.take(seen[quantity])
    return found, limits


def air_of(row: Sent, found: Found) -> dict[Quantity, Row]:
    """The row as the limits on each quantity see it."""
    if found.kind not in ("valid", "suspect"):
        return dict.fromkeys(Quantity, Row(minute=row.minute, kind=found.kind))
    air = conditions_of(
        altimeter_hpa=np.array([row.altimeter_hpa]),
        temperature_c=np.array([row.temperature_c]),
        dewpoint_used_c=np.array([found.dewpoint_used_c]),
        temperature_resolution_c=np.array([NAN]),
        dewpoint_resolution_c=np.array([NAN]),
        elevation_m=ELEVATION_M,
        instruments=profile_of().observations.instruments,
    )
    values = {
        Quantity.DENSITY_ALTITUDE: (air.density_altitude_ft, air.uncertainty_ft),
        Quantity.PRESSURE_ALTITUDE: (air.pressure_altitude_ft, air.pressure_altitude_uncertainty_ft),
        Quantity.TEMPERATURE: (air.temperature_c, air.temperature_uncertainty_c),
        Quantity.ISA_DEVIATION: (air.isa_deviation_c, air.isa_deviation_uncertainty_c),
    }
    return {
        quantity: Row(
            minute=row.minute,
            value=float(value[0]),
            uncertainty=float(uncertainty[0]),
            pressure_altitude_ft=float(air.pressure_altitude_ft[0]),
            kind=found.kind,
            confirmed=found.confirmed,
        )
        for quantity, (value, uncertainty) in values.items()
    }


def told(change: LimitChange | Told) -> tuple[object, ...]:
    return change.time_us, change.was, str(change.state), None if change.value is None else round(change.value, 5)


def measured(episode: Episode | Exceeded) -> tuple[object, ...]:
    numbers = (episode.peak, episode.worst_margin, episode.minutes, episode.minutes_without_data)
    return episode.start_us, episode.end_us, *(round(number, 5) + 0.0 for number in numbers)


KINDS = {Verdict.VALID: "valid", Verdict.SUSPECT: "suspect", Verdict.REJECTED: "rejected"}


def compare_with_references(rows: list[Sent], humidity: Humidity, stale_after_min: float, now_us: int) -> Counter[str]:
    found, limits = by_reference(rows, humidity, stale_after_min, now_us)
    judge = Judge(profile_of(stale_after_min=stale_after_min, humidity=humidity), FLEET)
    judged = judge.advance(table_of(rows), now_us)
    kinds = ["rejected" if each.kind == "future" else each.kind for each in found]
    assert [KINDS[Verdict(int(verdict))] for verdict in judged.checked.verdict] == kinds
    open_now = {(each.key.aircraft, each.key.quantity): each for each in judge.open_episodes()}
    for key, reference in limits.items():
        changes = [told(each) for each in judged.changes if (each.key.aircraft, each.key.quantity) == key]
        assert changes == [told(each) for each in reference.told], key
        ended = [measured(each) for each in judged.ended if (each.key.aircraft, each.key.quantity) == key]
        assert ended == [measured(each) for each in reference.ended], key
        still_open = reference.open_episode()
        assert (key in open_now) == (still_open is not None)
        if still_open is not None:
            assert measured(open_now[key]) == measured(still_open), key
    return Counter(kinds)


@settings(max_examples=60, deadline=None)
@given(
    choices=RECORDS,
    humidity=st.sampled_from(HUMIDITIES),
    stale=st.sampled_from((15.0, 70.0, 600.0)),
    clock=st.sampled_from((700.0, FAR_MINUTE)),
)
def test_the_judge_says_what_the_references_say(
    choices: list[Choice], humidity: Humidity, stale: float, clock: float
) -> None:
    compare_with_references(record_of(choices), humidity, stale, us_at(clock))


@pytest.mark.parametrize("humidity", HUMIDITIES)
@pytest.mark.parametrize("stale_after_min", [15.0, 70.0])
def test_so_it_does_on_long_records(humidity: Humidity, stale_after_min: float) -> None:
    kinds = compare_with_references(drawn(round(stale_after_min), 900), humidity, stale_after_min, us_at(FAR_MINUTE))
    # A record in which nothing happens would prove nothing.
    assert min(kinds["valid"], kinds["suspect"], kinds["rejected"]) > 30


def in_parts(rows: list[Sent], cuts: list[int]) -> Iterator[list[Sent]]:
    edges = [0, *sorted(min(cut, len(rows)) for cut in cuts), len(rows)]
    for first, last in pairwise(edges):
        yield rows[first:last]


@settings(max_examples=60, deadline=None)
@given(
    choices=RECORDS,
    cuts=st.lists(st.integers(0, 50), max_size=5),
    humidity=st.sampled_from(HUMIDITIES),
    stale=st.sampled_from((15.0, 70.0)),
)
def test_whole_row_by_row_and_in_blocks_are_the_same(
    choices: list[Choice], cuts: list[int], humidity: Humidity, stale: float
) -> None:
    rows = record_of(choices)
    profile = profile_of(stale_after_min=stale, humidity=humidity)
    now_us = us_at(FAR_MINUTE)
    whole = Judge(profile, FLEET)
    expected = whole.advance(table_of(rows), now_us)
    for parts in (list(in_parts(rows, cuts)), [[row] for row in rows]):
        judge = Judge(profile, FLEET)
        changes: list[LimitChange] = []
        ended: list[Episode] = []
        for part in parts:
            judged = judge.advance(table_of(part), now_us)
            changes += judged.changes
            ended += judged.ended
            judge = Judge(profile, FLEET, json.loads(json.dumps(judge.to_json())))
        # Of two limits that change at one moment either may be told first: by a suspect row, and by the row after it
        # with which the moment of staleness passes.
        assert sorted(changes, key=lambda each: (each.time_us, each.key)) == sorted(
            expected.changes, key=lambda each: (each.time_us, each.key)
        )
        assert sorted(ended, key=lambda each: (each.start_us, each.key)) == sorted(
            expected.ended, key=lambda each: (each.start_us, each.key)
        )
        assert judge.open_episodes() == whole.open_episodes()
        assert judge.to_json() == whole.to_json()


@settings(max_examples=40, deadline=None)
@given(choices=RECORDS, order=st.randoms(use_true_random=False))
def test_the_order_of_rows_in_the_file_does_not_matter(choices: list[Choice], order: random.Random) -> None:
    rows = record_of(choices)
    mixed = list(rows)
    order.shuffle(mixed)
    straight = Judge(profile_of(), FLEET)
    shuffled = Judge(profile_of(), FLEET)
    first = straight.advance(table_of(rows), us_at(FAR_MINUTE))
    second = shuffled.advance(table_of(mixed), us_at(FAR_MINUTE))
    assert (first.changes, first.ended) == (second.changes, second.ended)
    assert straight.to_json() == shuffled.to_json()


@settings(max_examples=60, deadline=None)
@given(choices=RECORDS, humidity=st.sampled_from(HUMIDITIES), ahead=st.sampled_from((0.0, 5.0, 20.0)))
def test_nothing_is_ever_go_without_a_fresh_valid_observation(
    choices: list[Choice], humidity: Humidity, ahead: float
) -> None:
    judge = Judge(profile_of(humidity=humidity), FLEET)
    for row in record_of(choices):
        now_us = us_at(row.minute + ahead)
        judged = judge.advance(table_of([row]), now_us, pass_to_us=now_us)
        valid = judged.checked.verdict[0] == Verdict.VALID
        for change in judged.changes:
            assert change.state is State.NO_DATA or (valid and change.time_us == row.time_us)
        states = {limit.memory.state for limit in judge.limits.values()}
        if judge.current is None:
            assert states == {None}
        elif now_us - judge.current.time_us > 15 * MINUTE_US:
            assert judge.stale
            assert states <= {None, State.NO_DATA}
