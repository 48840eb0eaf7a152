"""Rows in, verdicts out: what the session adds to checks and rules, by hand.

At 4,120 ft and 1013.2 hPa the dry air has about 5,070 ft at 15 °C, 5,640 ft at 20 °C and 6,740 ft at 30 °C; the limit
is 6,000 ft, near band 500 ft, deadband 150 ft, off-delay 10 min.
"""

import json
from dataclasses import replace

import pytest

from airfield_board.configuration.model import Fleet, Quantity
from airfield_board.limits.in_force import LimitKey
from airfield_board.limits.rules import LimitChange
from airfield_board.limits.states import State
from airfield_board.observations.observation import Verdict
from airfield_board.session.judge import Judge
from tests.limits.record import by_weight, limit_of, minute_of, us_at
from tests.session.station import NAN, Sent, fleet_of, profile_of, table_of

FLEET = fleet_of(trainer=[limit_of(6000.0)])
PROFILE = profile_of(humidity="dry")
NOW_US = us_at(10_000)
KEY = LimitKey(aircraft="trainer", operation="Departure", quantity=Quantity.DENSITY_ALTITUDE)


def warm(minute: float, temperature_c: float) -> Sent:
    return Sent(minute=minute, temperature_c=temperature_c)


def broken(minute: float) -> Sent:
    return Sent(minute=minute, temperature_c=NAN)


def make(fleet: Fleet = FLEET) -> Judge:
    return Judge(PROFILE, fleet)


def brief(changes: tuple[LimitChange, ...]) -> list[tuple[float, str]]:
    return [(minute_of(change.time_us), str(change.state)) for change in changes]


def taken(*rows: Sent, now_us: int = NOW_US) -> list[tuple[float, str]]:
    return brief(make().advance(table_of(rows), now_us).changes)


def state_of(judge: Judge) -> State | None:
    return judge.limits[KEY].memory.state


class TestTime:
    def test_a_rejected_row_lets_time_pass(self) -> None:
        assert taken(warm(0, 15), broken(16)) == [(0, "go"), (15, "no_data")]
        assert taken(warm(0, 15), broken(15)) == [(0, "go")]

    def test_after_the_last_row_nothing_more_happens(self) -> None:
        assert taken(warm(0, 15)) == [(0, "go")]

    def test_a_time_in_the_future_does_not(self) -> None:
        assert taken(warm(0, 15), warm(40, 15), now_us=us_at(10)) == [(0, "go")]
        assert taken(warm(0, 15), broken(40), now_us=us_at(10)) == [(0, "go")]

    def test_up_to_five_minutes_ahead_is_no_future(self) -> None:
        assert taken(warm(0, 15), broken(16), now_us=us_at(11)) == [(0, "go"), (15, "no_data")]

    def test_the_clock_lets_time_pass_where_it_is_told_to(self) -> None:
        judge = make()
        told = []
        for minute in (0, 15, 16, 17):
            rows = [warm(0, 15)] if minute == 0 else []
            judged = judge.advance(table_of(rows), us_at(minute), pass_to_us=us_at(minute))
            told.append((minute, brief(judged.changes), judge.stale))
        assert told == [(0, [(0, "go")], False), (15, [], False), (16, [(15, "no_data")], True), (17, [], True)]

    def test_without_any_observation_nothing_becomes_stale(self) -> None:
        judge = make()
        assert judge.advance(table_of([broken(0)]), NOW_US, pass_to_us=NOW_US).changes == ()
        assert judge.stale_at_us is None
        with pytest.raises(ValueError, match="no current observation"):
            judge.current_conditions()

    def test_a_new_observation_ends_staleness(self) -> None:
        judge = make()
        judge.advance(table_of([warm(0, 15), broken(20)]), NOW_US)
        assert judge.stale
        assert brief(judge.advance(table_of([warm(21, 15)]), NOW_US).changes) == [(21, "go")]
        assert not judge.stale

    def test_a_suspect_row_between_does_not(self) -> None:
        judge = make()
        judge.advance(table_of([warm(0, 15), broken(20)]), NOW_US)
        assert judge.advance(table_of([warm(10, 40)]), NOW_US).changes == ()
        assert judge.stale
        assert judge.advance(table_of([]), NOW_US, pass_to_us=NOW_US).changes == ()


class TestCorrections:
    def test_the_later_of_two_with_one_time_wins(self) -> None:
        judged = make().advance(table_of([warm(0, 30), warm(0, 26)]), NOW_US)
        assert judged.checked.verdict.tolist() == [Verdict.SUPERSEDED, Verdict.VALID]
        assert brief(judged.changes) == [(0, "hold")]
        low = make().advance(table_of([warm(0, 30), warm(0, 15)]), NOW_US)
        assert brief(low.changes) == [(0, "go")]

    def test_one_that_comes_later_is_judged_too(self) -> None:
        judge = make()
        judge.advance(table_of([warm(0, 15)]), NOW_US)
        assert brief(judge.advance(table_of([warm(0, 30)]), NOW_US).changes) == [(0, "hold")]

    def test_an_older_row_changes_no_state(self) -> None:
        judge = make()
        judge.advance(table_of([warm(0, 15), warm(10, 16)]), NOW_US)
        judged = judge.advance(table_of([warm(5, 30)]), NOW_US)
        assert judged.changes == ()
        assert judge.current is not None
        assert minute_of(judge.current.time_us) == 10

    def test_one_that_comes_after_staleness_does_not_bring_an_old_state_back(self) -> None:
        judge = make()
        judge.advance(table_of([warm(0, 15), broken(20)]), NOW_US)
        judge.advance(
            table_of([warm(0, 16), warm(20, 16.5)]), us_at(0.5)
        )  # the second is in the future: no time passes
        assert state_of(judge) is State.GO
        judge.advance(table_of([]), us_at(20), pass_to_us=us_at(20))
        assert state_of(judge) is State.NO_DATA

    def test_nor_where_a_suspect_row_comes_with_it(self) -> None:
        judge = make()
        judge.advance(table_of([warm(0, 15), broken(20)]), NOW_US)
        judge.advance(table_of([warm(0, 16), warm(21, 1)]), NOW_US, pass_to_us=us_at(21))
        assert judge.stale
        assert state_of(judge) is State.NO_DATA

    def test_time_without_data_never_counts_backwards(self) -> None:
        judge = make()
        judge.advance(table_of([warm(0, 30), broken(20)]), NOW_US)
        judge.advance(table_of([warm(0, 29), warm(25, 29)]), NOW_US)
        (episode,) = judge.open_episodes()
        assert (episode.minutes, episode.minutes_without_data) == (25, 10)


class TestAnswers:
    def test_changes_come_in_order_of_time_then_of_the_fleet(self) -> None:
        fleet = fleet_of(b=[limit_of(6000.0)], a=[limit_of(7000.0)])
        changes = make(fleet).advance(table_of([warm(0, 15), warm(60, 30)]), NOW_US).changes
        told = [(minute_of(change.time_us), change.key.aircraft, str(change.state)) for change in changes]
        assert told == [
            (0, "b", "go"),
            (0, "a", "go"),
            (15, "b", "no_data"),
            (15, "a", "no_data"),
            (60, "b", "hold"),
            (60, "a", "near"),
        ]

    def test_a_rejected_row_has_no_air(self) -> None:
        judged = make().advance(table_of([warm(0, 15), warm(5, 70)]), NOW_US)
        assert judged.conditions.density_altitude_ft[0] == pytest.approx(5070, abs=10)
        assert str(judged.conditions.density_altitude_ft[1]) == "nan"

    def test_who_typed_the_current_row_is_kept(self) -> None:
        judge = make()
        judge.advance(replace(table_of([warm(0, 15)]), initials="QX"), NOW_US)
        assert judge.current is not None
        assert judge.current.initials == "QX"


class TestMemory:
    def test_it_goes_through_json(self) -> None:
        judge = make()
        judge.advance(table_of([warm(0, 30), warm(5, 25), warm(10, 50), broken(30)]), NOW_US)
        again = Judge(PROFILE, FLEET, json.loads(json.dumps(judge.to_json())))
        assert again.to_json() == judge.to_json()
        rows = [warm(40, 25), warm(50, 25)]
        assert again.advance(table_of(rows), NOW_US).changes == judge.advance(table_of(rows), NOW_US).changes

    def test_before_the_first_row_too(self) -> None:
        again = Judge(PROFILE, FLEET, json.loads(json.dumps(make().to_json())))
        assert again.current is None
        assert brief(again.advance(table_of([warm(0, 15)]), NOW_US).changes) == [(0, "go")]

    @pytest.mark.parametrize("part", ["quality", "current", "suspects", "stale", "limits"])
    def test_one_with_a_part_missing_is_refused(self, part: str) -> None:
        memory = make().to_json()
        del memory[part]
        with pytest.raises(KeyError, match=part):
            Judge(PROFILE, FLEET, memory)

    @pytest.mark.parametrize("part", ["quality", "current", "suspects", "limits"])
    def test_one_with_a_part_of_the_wrong_kind_is_refused(self, part: str) -> None:
        with pytest.raises(ValueError, match="not a"):
            Judge(PROFILE, FLEET, {**make().to_json(), part: "nonsense"})

    def test_a_limit_unknown_to_it_begins_afresh(self) -> None:
        judge = make()
        judge.advance(table_of([warm(0, 30)]), NOW_US)
        again = Judge(PROFILE, fleet_of(other=[limit_of(6000.0)]), judge.to_json())
        assert brief(again.advance(table_of([warm(5, 25)]), NOW_US).changes) == [(5, "hold")]
        assert again.open_episodes()[0].minutes == 0


class TestChangedSettings:
    def held(self) -> Judge:
        judge = make()
        judge.advance(table_of([warm(0, 30)]), NOW_US)
        return judge

    def test_a_tightened_limit_acts_at_once(self) -> None:
        judge = make()
        judge.advance(table_of([warm(0, 20)]), NOW_US)
        changes, ended = judge.change_settings(PROFILE, fleet_of(trainer=[limit_of(5500.0)]), us_at(3))
        assert brief(changes) == [(3, "hold")]
        assert ended == ()

    def test_a_new_limit_has_its_state_at_once(self) -> None:
        judge = make()
        judge.advance(table_of([warm(0, 20)]), NOW_US)
        fleet = fleet_of(trainer=[limit_of(6000.0)], tow=[by_weight({1950: 7400, 2450: 5600})])
        changes, _ = judge.change_settings(PROFILE, fleet, us_at(3))
        assert [(change.key.aircraft, str(change.state)) for change in changes] == [("tow", "reduced")]

    def test_a_suspect_reading_counts_for_it_too(self) -> None:
        judge = make()
        # 27 °C, about 6,410 ft, is a step of 7 °C: suspect, beyond 6,000 ft, within 7,000 ft.
        judge.advance(table_of([warm(0, 20), warm(5, 27)]), NOW_US)
        fleet = fleet_of(trainer=[limit_of(6000.0)], new=[limit_of(6000.0)], high=[limit_of(7000.0)])
        again = Judge(PROFILE, FLEET, json.loads(json.dumps(judge.to_json())))
        for each in (judge, again):
            each.change_settings(PROFILE, fleet, us_at(6))
            states = [str(limit.memory.state) for limit in each.limits.values()]
            assert states == ["no_data", "no_data", "go"]

    def test_only_until_the_next_valid_one(self) -> None:
        judge = make()
        judge.advance(table_of([warm(0, 20), warm(5, 27), warm(10, 20)]), NOW_US)
        judge.change_settings(PROFILE, fleet_of(new=[limit_of(6000.0)]), us_at(11))
        assert [limit.memory.state for limit in judge.limits.values()] == [State.NEAR]

    def test_a_loosened_limit_ends_no_hold(self) -> None:
        judge = self.held()
        assert judge.change_settings(PROFILE, fleet_of(trainer=[limit_of(9000.0)]), us_at(3)) == ((), ())
        assert state_of(judge) is State.HOLD

    def test_a_limit_that_is_gone_ends_its_episode(self) -> None:
        changes, ended = self.held().change_settings(PROFILE, fleet_of(other=[limit_of(9000.0)]), us_at(3))
        assert [(change.key.aircraft, str(change.state)) for change in changes] == [("other", "go")]
        assert [(each.key, each.end_us) for each in ended] == [(KEY, us_at(3))]

    def test_a_shorter_staleness_acts_at_once(self) -> None:
        judge = make()
        judge.advance(table_of([warm(0, 15)]), us_at(9), pass_to_us=us_at(9))
        changes, _ = judge.change_settings(profile_of(humidity="dry", stale_after_min=6), FLEET, us_at(9))
        assert brief(changes) == [(9, "no_data")]
        assert judge.stale

    def test_a_longer_one_brings_no_old_state_back(self) -> None:
        judge = make()
        judge.advance(table_of([warm(0, 15)]), us_at(20), pass_to_us=us_at(20))
        changes, _ = judge.change_settings(profile_of(humidity="dry", stale_after_min=60), FLEET, us_at(21))
        assert changes == ()
        assert state_of(judge) is State.NO_DATA

    def test_staleness_that_came_before_the_change_is_told_by_its_moment(self) -> None:
        judge = make()
        judge.advance(table_of([warm(0, 15)]), us_at(9), pass_to_us=us_at(9))
        changes, _ = judge.change_settings(PROFILE, FLEET, us_at(20))
        assert brief(changes) == [(15, "no_data")]

    def test_before_the_first_observation_nothing_changes(self) -> None:
        assert make().change_settings(PROFILE, fleet_of(other=[limit_of(5000.0)]), us_at(3)) == ((), ())

    def test_the_present_elevation_counts(self) -> None:
        judge = make()
        judge.advance(table_of([warm(0, 20)]), NOW_US)
        higher = profile_of(humidity="dry", elevation_m=1400.0)  # 473 ft more
        changes, _ = judge.change_settings(higher, FLEET, us_at(3))
        assert brief(changes) == [(3, "hold")]
