"""Whatever stands in a file, it is read or refused in words; and whatever changes, nothing gets looser by itself."""

from datetime import date, timedelta

import numpy as np
from hypothesis import given, settings
from hypothesis import strategies as st

from airfield_board.configuration.looseness import merge_limits
from airfield_board.configuration.model import Limit, Quantity, WeightTable
from airfield_board.errors import FileFaults
from tests.configuration.examples import FLEET, PROFILE, read_fleet, read_profile

_SCRAPS = st.sampled_from(
    [
        *(
            "\t",
            "  ",
            "\n",
            "- ",
            ": ",
            "&a ",
            "*a",
            "!!str ",
            "{",
            "}",
            "[",
            "]",
            "<<: ",
            "? ",
            "|",
            ">",
            "'",
            '"',
            "#",
        ),
        *(
            "%",
            "\0",
            "\x85",
            "no",
            "null",
            "017",
            "12:30",
            "1e400",
            "-",
            ".inf",
            "9" * 50,
            "\ufeff",
            "\ud800",
            "\u202e",
        ),
        *('"\\ud800"', '"\\UFFFFFFFF"', "---\n", "...\n", "schema: 1\n", "id", "name", "2026-02-30", "é", "+8"),
        *("max_temperature_c: {by_pressure_altitude_ft: {0: 1, 1: 2}}", "by_weight_kg: {1: 2, 2: 1}"),
    ]
)


def is_read_or_refused(text: str | bytes) -> None:
    for read in (read_profile, read_fleet):
        try:
            read(text)
        except FileFaults as refused:
            assert refused.faults
            # It can be written to any terminal, a fault a line.
            assert str(refused).encode().decode()
            assert len(str(refused).splitlines()) == len(refused.faults)


@given(st.text() | st.binary() | st.lists(_SCRAPS, max_size=12).map("".join))
@settings(max_examples=100, deadline=None)
def test_anything_is_read_or_refused(text: str | bytes) -> None:
    is_read_or_refused(text)


@given(st.sampled_from([PROFILE, FLEET]), st.data())
@settings(max_examples=200, deadline=None)
def test_anything_written_into_a_valid_file_is_read_or_refused(text: str, data: st.DataObject) -> None:
    for _ in range(data.draw(st.integers(1, 3))):
        start = data.draw(st.integers(0, len(text)))
        length = data.draw(st.integers(0, 12))
        text = text[:start] + data.draw(_SCRAPS | st.text(max_size=5)) + text[start + length :]
    is_read_or_refused(text)


_FIRST_DAY = date(2026, 1, 1)
_WEIGHTS = (1000.0, 1500.0, 2000.0)


@st.composite
def _values(draw: st.DrawFn) -> float | WeightTable:
    if draw(st.booleans()):
        return draw(st.sampled_from([5000.0, 5500.0, 6000.0, 6500.0]))
    falls = draw(st.tuples(*[st.sampled_from([100.0, 500.0])] * 3))
    start = draw(st.sampled_from([5500.0, 6000.0, 7000.0]))
    limits = tuple(start - sum(falls[: index + 1]) for index in range(3))
    return WeightTable(weight_unit="lb", weights=_WEIGHTS, limits=limits)


@st.composite
def _limits(draw: st.DrawFn) -> Limit:
    first, last = sorted(draw(st.tuples(st.integers(0, 6), st.integers(0, 6))))
    return Limit(
        quantity=Quantity.DENSITY_ALTITUDE,
        unit="ft",
        value=draw(_values()),
        near_band=draw(st.sampled_from([300.0, 500.0])),
        deadband=draw(st.sampled_from([100.0, 150.0])),
        off_delay_min=draw(st.sampled_from([5.0, 10.0])),
        guarded=draw(st.booleans()),
        valid_from=draw(st.sampled_from([None, _FIRST_DAY + timedelta(days=first)])),
        valid_until=draw(st.sampled_from([None, _FIRST_DAY + timedelta(days=last)])),
    )


def limit_at(limit: Limit, weight_lb: float) -> float:
    match limit.value:
        case WeightTable() as table:
            return float(np.interp(weight_lb, table.weights, table.limits))
        case float() as number:
            return number
        case _:
            raise AssertionError(limit)


def lowest_at(limits: tuple[Limit, ...], day: date) -> tuple[float, ...]:
    """Return the lowest limit by weight, in steps of 250 lb; infinite where there is none."""
    in_force = [limit for limit in limits if limit.in_force_on(day)]
    weights = np.arange(_WEIGHTS[0], _WEIGHTS[-1] + 1, 250)
    return tuple(min((limit_at(limit, weight) for limit in in_force), default=np.inf) for weight in weights)


_ENTRIES = st.lists(_limits(), min_size=1, max_size=3).map(tuple)
_DAYS = [_FIRST_DAY + timedelta(days=offset) for offset in range(-1, 9)]


@given(_ENTRIES, _ENTRIES)
@settings(max_examples=100, deadline=None)
def test_what_holds_is_on_every_day_and_weight_the_lower_of_old_and_new(
    old: tuple[Limit, ...], new: tuple[Limit, ...]
) -> None:
    merge = merge_limits(old, new, today=None)

    for day in _DAYS:
        lower = np.minimum(lowest_at(old, day), lowest_at(new, day))
        np.testing.assert_allclose(lowest_at(merge.effective, day), lower, atol=1e-5)
        was_guarded, is_guarded = (
            any(limit.guarded for limit in limits if limit.in_force_on(day)) for limits in (old, new)
        )
        assert any(limit.guarded for limit in merge.effective if limit.in_force_on(day)) == (was_guarded or is_guarded)


@given(_ENTRIES, _ENTRIES)
@settings(max_examples=100, deadline=None)
def test_merging_once_more_changes_nothing(old: tuple[Limit, ...], new: tuple[Limit, ...]) -> None:
    first = merge_limits(old, new, today=None)

    again = merge_limits(first.effective, new, today=None)

    assert set(again.effective) == set(first.effective)
    assert again.tightened == frozenset()
    assert again.loosened == first.loosened


def lowest_entry(limits: tuple[Limit, ...], day: date) -> Limit | None:
    in_force = [limit for limit in limits if limit.in_force_on(day)]
    return min(in_force, key=lambda limit: limit_at(limit, _WEIGHTS[-1]), default=None)


@given(st.lists(_ENTRIES, min_size=2, max_size=4))
@settings(max_examples=100, deadline=None)
def test_a_chain_of_changes_never_loosens_limit_or_bands(versions: list[tuple[Limit, ...]]) -> None:
    numbers = [tuple(limit for limit in version if isinstance(limit.value, float)) for version in versions]
    in_force = numbers[0]
    for version in numbers[1:]:
        before, in_force = in_force, merge_limits(in_force, version, today=None).effective
        for day in _DAYS:
            old, new = lowest_entry(before, day), lowest_entry(in_force, day)
            if old is not None:
                assert new is not None
                assert limit_at(new, 0) <= limit_at(old, 0)
                rulers = [
                    limit for limit in in_force if limit.in_force_on(day) and limit_at(limit, 0) == limit_at(new, 0)
                ]
                assert max(limit.near_band for limit in rulers) >= old.near_band
                assert max(limit.deadband for limit in rulers) >= old.deadband
                assert max(limit.off_delay_min for limit in rulers) >= old.off_delay_min
