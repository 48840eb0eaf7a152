"""Severity, worst first: hold, no data, reduced, near, go."""

import pytest

from airfield_board.limits.states import State, worst

WORST_FIRST = [State.HOLD, State.NO_DATA, State.REDUCED, State.NEAR, State.GO]


def test_severity_falls_from_hold_to_go() -> None:
    severities = [state.severity for state in WORST_FIRST]
    assert severities == sorted(severities, reverse=True)
    assert len(set(severities)) == len(WORST_FIRST)


@pytest.mark.parametrize("place", range(len(WORST_FIRST)))
def test_the_worst_counts_wherever_it_stands(place: int) -> None:
    rest = WORST_FIRST[place:]
    assert worst(rest) is WORST_FIRST[place]
    assert worst(reversed(rest)) is WORST_FIRST[place]


def test_nothing_at_all_is_no_data() -> None:
    assert worst([]) is State.NO_DATA


def test_states_are_written_as_files_have_them() -> None:
    assert [str(state) for state in WORST_FIRST] == ["hold", "no_data", "reduced", "near", "go"]
