"""What can be asked of a history, on days made by hand."""

from collections.abc import Iterator
from pathlib import Path

import numpy as np
import pytest

from airfield_board.errors import UserError
from airfield_board.history.records import RecordKind
from airfield_board.history.store import History
from airfield_board.observations.observation import Verdict
from tests.history.examples import (
    MINUTE,
    MINUTE_US,
    START,
    START_US,
    change,
    configuration,
    observation,
    open_new,
    record,
)


@pytest.fixture
def history(tmp_path: Path) -> Iterator[History]:
    opened = open_new(tmp_path)
    yield opened
    opened.close()


def test_observations_of_a_time_come_in_order_of_time_then_arrival(history: History) -> None:
    history.append(
        [
            observation(0),
            observation(2),
            observation(2, verdict="superseded", da_ft=1.5),
            observation(1, late=True),
            observation(3, verdict="rejected", da_ft=None, u_ft=None),
            observation(4),
            observation(9, time=None, verdict="rejected", da_ft=None, u_ft=None),
        ]
    )
    found = history.observations_between(START_US, START_US + 4 * MINUTE_US)
    assert len(found) == 5
    assert found.seq.tolist() == [2, 5, 3, 4, 6]
    assert ((found.time_us - START_US) // MINUTE_US).tolist() == [0, 1, 2, 2, 3]
    assert found.verdict.tolist() == [Verdict.VALID, Verdict.VALID, Verdict.VALID, Verdict.SUPERSEDED, Verdict.REJECTED]
    assert found.late.tolist() == [False, True, False, False, False]
    np.testing.assert_array_equal(
        found.density_altitude_ft, [6800.1, 6800.1 + 1 / 3, 6800.1 + 2 / 3, 1.5, np.nan], strict=True
    )
    assert np.isnan(found.uncertainty_ft).tolist() == [False, False, False, False, True]


def test_a_time_without_observations_gives_empty_arrays(history: History) -> None:
    found = history.observations_between(0, 1)
    assert len(found) == 0
    assert found.time_us.dtype == np.int64
    assert found.density_altitude_ft.dtype == np.float64


def test_records_of_observations_can_be_had_by_verdict(history: History) -> None:
    history.append([observation(0), observation(1, verdict="suspect", reason="a step"), observation(2)])
    everything = history.observation_records(START_US, START_US + 3 * MINUTE_US)
    assert [entry.seq for entry in everything] == [2, 3, 4]
    (suspect,) = history.observation_records(START_US, START_US + 3 * MINUTE_US, {Verdict.SUSPECT})
    assert suspect.body["reason"] == "a step"


def test_the_latest_rows_without_a_time_can_be_had(history: History) -> None:
    untimed = [observation(0, time=None, raw=f"line {number}", verdict="rejected") for number in range(1_002)]
    history.append([observation(0), *untimed, observation(1)])
    found = [record.body["raw"] for record in history.untimed_observation_records()]
    assert found == [f"line {number}" for number in range(1_001, 1, -1)]


def test_changes_of_a_time_by_scope(history: History) -> None:
    history.append(
        [change(2, "hold"), change(1, "near", scope=None), change(1, "near"), change(3, "go"), change(0, "go")]
    )
    until_us = START_US + 3 * MINUTE_US
    assert [entry.seq for entry in history.changes_between(START_US + MINUTE_US, until_us)] == [3, 4, 2]
    assert [entry.seq for entry in history.changes_between(START_US, until_us, scope="operation")] == [6, 4, 2]
    assert [entry.seq for entry in history.changes_between(START_US, until_us, scope="limit")] == [3]
    assert history.changes_between(START_US, until_us)[-1].body == change(2, "hold").body


def test_hold_and_no_data_stay_open_until_acknowledged(history: History) -> None:
    history.append(
        [
            change(0, "hold"),  # 2
            change(1, "no_data", aircraft=None, operation=None),  # 3
            change(2, "go"),
            change(3, "near"),
            change(4, "reduced"),
            change(5, "hold", scope=None),  # 7
        ]
    )
    assert [entry.seq for entry in history.open_changes()] == [2, 3]
    assert [entry.seq for entry in history.open_changes(scope="limit")] == [7]
    history.append([record(RecordKind.ACKNOWLEDGEMENT, 6, changes=[2, 3], initials="QX")])
    assert history.open_changes() == ()
    found = history.acknowledgements([2, 3, 7])
    assert sorted(found) == [2, 3]
    assert (found[2].seq, found[2].initials, found[2].at) == (8, "QX", START + 6 * MINUTE)
    history.append([record(RecordKind.ACKNOWLEDGEMENT_WITHDRAWN, 7, changes=[3], initials="QX")])
    assert [entry.seq for entry in history.open_changes()] == [3]
    assert sorted(history.acknowledgements([2, 3])) == [2]
    history.append([record(RecordKind.ACKNOWLEDGEMENT, 8, changes=[3], initials="ZY")])
    assert history.open_changes() == ()
    assert history.acknowledgements([3])[3].initials == "ZY"


def test_the_latest_configuration_of_each_kind(history: History) -> None:
    assert history.latest_configuration("fleet") is None
    history.append([configuration("profile", "a"), configuration("fleet", "b"), configuration("profile", "c: é\n", 1)])
    for kind, text in (("profile", "c: é\n"), ("fleet", "b")):
        found = history.latest_configuration(kind)
        assert found is not None
        assert found.body["text"] == text


def test_records_by_number_and_kind(history: History) -> None:
    history.append([observation(0), record(RecordKind.NOTE, text="a"), observation(1), record(RecordKind.STOP)])
    assert [entry.seq for entry in history.records()] == [1, 2, 3, 4, 5]
    assert [entry.seq for entry in history.records(2, 4)] == [2, 3, 4]
    assert [entry.seq for entry in history.records(kinds={RecordKind.OBSERVATION})] == [2, 4]
    assert [entry.seq for entry in history.records(kinds={RecordKind.NOTE, RecordKind.STOP})] == [3, 5]
    assert [entry.seq for entry in history.records(2, 4, {RecordKind.NOTE, RecordKind.STOP})] == [3]


def test_more_records_than_are_fetched_at_once(history: History) -> None:
    history.append([observation(minute % 600) for minute in range(4_500)])
    assert [entry.seq for entry in history.records()] == list(range(1, 4_502))


def test_the_newest_of_a_kind(history: History) -> None:
    assert history.newest(RecordKind.OBSERVATION) is None
    assert history.newest(RecordKind.STOP) is None
    history.append(
        [observation(0), observation(5), record(RecordKind.NOTE, text="a"), record(RecordKind.NOTE, text="b")]
    )
    observed, noted = history.newest(RecordKind.OBSERVATION), history.newest(RecordKind.NOTE)
    assert observed is not None
    assert noted is not None
    assert (observed.seq, noted.body["text"]) == (3, "b")


def test_a_day_is_found_by_index_and_not_by_looking_through_all(history: History) -> None:
    plans = [
        "SELECT * FROM observation WHERE time_us >= 0 AND time_us < 1 ORDER BY time_us, seq",
        "SELECT * FROM change WHERE time_us >= 0 AND time_us < 1 ORDER BY time_us, seq",
        "SELECT * FROM journal WHERE kind = 'start' AND kind <> 'observation' ORDER BY seq DESC LIMIT 1",
        "SELECT seq FROM observation WHERE time_us IS NULL ORDER BY seq DESC LIMIT 5",
    ]
    for plan in plans:
        steps = [row[3] for row in history._rows(f"EXPLAIN QUERY PLAN {plan}")]
        assert len(steps) == 1, steps
        assert steps[0].startswith("SEARCH"), steps


def test_a_file_that_breaks_while_read_is_said_in_plain_words(history: History) -> None:
    with pytest.raises(UserError, match=r"history\.db"):
        history._rows("SELECT * FROM nowhere")
