"""The recorder around midnight, on the nights of the clock change, on 29 February, and with a clock set wrong.

At 4,120 ft and 1013.25 hPa the dry air has some 5,800 ft at 21.6 °C, 6,200 ft at 25 °C, and 6,490 ft at 27.5 °C; one is
at most 5.9 °C from the next, so that no reading is suspect. Clock changes of Los Angeles: 2026-03-08 and 2026-11-01, at
02:00 local (US Code, title 15, section 260a; IANA time zone database).
"""

import os
from datetime import UTC, datetime, timedelta
from pathlib import Path

import pytest

from airfield_board.clock import iso_utc, time_from_us
from airfield_board.history.records import RecordKind
from airfield_board.history.store import History
from airfield_board.limits.states import State
from airfield_board.session.board_state import BoardState, Freshness, LimitLine
from airfield_board.session.recorder import Recorder
from airfield_board.session.verifying import verify_history
from tests.session.fields import HEADER, PROFILE, Field, make_field, row_of

COOL_C, WARM_C, HOT_C = 21.6, 25.0, 27.5
FIVE_MIN = timedelta(minutes=5)

DATED = """\
schema: 1
aircraft:
  - id: until
    name: Lowered up to the day
    operations:
      - {{name: Departure, max_density_altitude_ft: 7000}}
      - {{name: Departure, max_density_altitude_ft: 5700, valid_until: {day}}}
  - id: since
    name: Lowered from the day on
    operations:
      - {{name: Departure, max_density_altitude_ft: 7000}}
      - {{name: Departure, max_density_altitude_ft: 5700, valid_from: {day}}}
  - id: only
    name: Lowered on the day
    operations:
      - {{name: Departure, max_density_altitude_ft: 7000}}
      - {{name: Departure, max_density_altitude_ft: 5700, valid_from: {day}, valid_until: {day}}}
"""


class Station:
    """A station whose logger writes a row at a time, and the recorder that reads it."""

    def __init__(self, field: Field) -> None:
        self.field = field
        field.write()
        self.recorder: Recorder | None = None

    def poll(self, when: datetime) -> BoardState:
        self.field.clock.move_to(when)
        self.recorder = self.recorder or self.field.open()
        return self.recorder.poll()

    def send(self, when: datetime, temperature_c: float) -> BoardState:
        self.field.append(f"{iso_utc(when)},1013.25,{temperature_c}\n")
        return self.poll(when)

    def close(self) -> None:
        assert self.recorder is not None
        self.recorder.close()
        findings = verify_history(self.field.history, closing_hash=None, rejudge=True)
        assert findings.whole, findings.lines


@pytest.fixture
def station(tmp_path: Path) -> Station:
    return Station(make_field(tmp_path))


def shown(state: BoardState, aircraft: str) -> LimitLine:
    line = row_of(state, aircraft).shown
    assert line is not None
    return line


def states(state: BoardState) -> dict[str, State]:
    return {row.aircraft_id: row.state for row in state.operations}


def curve_times(state: BoardState) -> list[datetime]:
    return [time_from_us(int(time_us)) for time_us in state.curve.time_us]


MIDNIGHT = datetime(2026, 7, 15, 7, tzinfo=UTC)  # 00:00 in Los Angeles, daylight saving time


def test_at_midnight_the_day_turns_over_and_a_hold_goes_on(station: Station) -> None:
    before = MIDNIGHT - timedelta(minutes=14)
    station.send(before - FIVE_MIN, WARM_C)
    state = station.send(before, HOT_C)
    station.field.append("2026-07-15T06:50:00Z,1013.25,x\n")
    (held,) = state.changes
    recorder = station.recorder
    assert recorder is not None
    recorder.acknowledge([held.number], "MS")
    state = station.send(MIDNIGHT - timedelta(minutes=1), HOT_C)
    assert curve_times(state)[0] == before - FIVE_MIN
    assert len(state.unused) == 1
    assert [change.acknowledged_by for change in state.changes] == ["MS"]
    yesterday = shown(state, "trainer")
    assert [span.start for span in yesterday.spans] == [before]

    state = station.poll(MIDNIGHT + timedelta(seconds=5))
    assert state.curve.day_start_us == int(MIDNIGHT.timestamp() * 1e6)
    assert curve_times(state) == []
    assert state.unused == ()
    assert state.changes == ()
    today = shown(state, "trainer")
    assert today.state is State.HOLD
    assert today.since == before
    assert [(span.start, span.end) for span in today.spans] == [(MIDNIGHT, None)]

    state = station.send(MIDNIGHT + FIVE_MIN, COOL_C)
    assert curve_times(state) == [MIDNIGHT + FIVE_MIN]
    assert states(state)["trainer"] is State.HOLD, "the off-delay runs over midnight as at any time"
    assert state.conditions is not None
    assert state.conditions.peak_time == MIDNIGHT + FIVE_MIN, "yesterday's peak is not today's"
    state = station.send(MIDNIGHT + 3 * FIVE_MIN, COOL_C)
    assert states(state)["trainer"] is State.GO
    assert [(span.start, span.end) for span in shown(state, "trainer").spans] == [(MIDNIGHT, MIDNIGHT + 3 * FIVE_MIN)]
    station.close()


def test_a_change_nobody_acknowledged_still_waits_after_midnight(station: Station) -> None:
    station.send(MIDNIGHT - 3 * FIVE_MIN, WARM_C)
    (held,) = station.send(MIDNIGHT - 2 * FIVE_MIN, HOT_C).changes
    state = station.send(MIDNIGHT + FIVE_MIN, HOT_C)
    assert [change.number for change in state.changes if change.open] == [held.number]


def test_one_episode_runs_over_midnight(station: Station) -> None:
    station.send(MIDNIGHT - 2 * FIVE_MIN, HOT_C)
    for minutes in (5, 10, 15, 20):
        station.send(MIDNIGHT + timedelta(minutes=minutes), COOL_C)
    station.close()
    history = History.open_read_only(station.field.history)
    episodes = [record.body for record in history.records(kinds=(RecordKind.EPISODE,))]
    history.close()
    assert [episode["minutes"] for episode in episodes if episode["aircraft"] == "trainer"] == [25.0]


@pytest.mark.parametrize(
    ("day", "first", "hours"),
    [
        ("2026-03-08", datetime(2026, 3, 8, 8, tzinfo=UTC), 23),
        ("2026-11-01", datetime(2026, 11, 1, 7, tzinfo=UTC), 25),
        ("2028-02-29", datetime(2028, 2, 29, 8, tzinfo=UTC), 24),
    ],
)
def test_a_dated_limit_counts_for_all_of_its_local_day(tmp_path: Path, day: str, first: datetime, hours: int) -> None:
    station = Station(make_field(tmp_path, fleet=DATED.format(day=day)))
    end = first + timedelta(hours=hours)
    minute = timedelta(minutes=1)
    before = {"until": State.HOLD, "since": State.GO, "only": State.GO}
    during = {"until": State.HOLD, "since": State.HOLD, "only": State.HOLD}
    assert states(station.send(first - minute, WARM_C)) == before
    state = station.send(first, WARM_C)
    assert states(state) == during
    assert state.curve.day_end_us - state.curve.day_start_us == hours * 3_600_000_000
    assert time_from_us(state.curve.day_start_us) == first
    for hour in range(2, hours, 2):  # not silent for over 3 h, and not the same to the last digit for 12 h
        station.send(first + timedelta(hours=hour), WARM_C + hour / 100)
    assert states(station.send(end - minute, WARM_C)) == during
    # 7,000 ft less the deadband of 150 ft is kept from the first moment of the next day, for the off-delay of 10 min.
    for minutes in (0, 5):
        after = states(station.send(end + timedelta(minutes=minutes), WARM_C))
        assert (after["until"], after["only"], after["since"]) == (State.HOLD, State.HOLD, State.HOLD)
    after = states(station.send(end + timedelta(minutes=10), WARM_C))
    assert (after["until"], after["only"], after["since"]) == (State.GO, State.GO, State.HOLD)
    station.close()


def local_rows(station: Station, *rows: tuple[str, float]) -> None:
    text = "".join(f"{local},1013.25,{temperature_c}\n" for local, temperature_c in rows)
    station.field.observations.write_text(f"{HEADER}\n{text}", encoding="utf-8")


def test_the_doubled_hour_of_the_autumn_night_is_two_hours_of_the_day(station: Station) -> None:
    passes = [f"2026-11-01T01:{minute:02}:00" for minute in range(0, 60, 5)]
    rows = [("2026-11-01T00:55:00", WARM_C)]
    first = datetime(2026, 11, 1, 8, tzinfo=UTC)
    for number, local in enumerate([*passes, *passes]):
        rows.append((local, WARM_C + number / 100))
        local_rows(station, *rows)
        state = station.poll(first + number * FIVE_MIN)
        assert state.observation is not None
        assert state.observation.time == first + number * FIVE_MIN
        assert state.observation.freshness is Freshness.FRESH
    assert len(curve_times(state)) == 25
    assert state.unused == ()
    station.close()


def test_an_off_delay_runs_in_true_time_over_the_doubled_hour(station: Station) -> None:
    rows = [("2026-11-01T01:50:00", HOT_C), ("2026-11-01T01:55:00", COOL_C)]
    local_rows(station, *rows)
    assert states(station.poll(datetime(2026, 11, 1, 8, 56, tzinfo=UTC)))["trainer"] is State.HOLD
    for local, minute, expected in (("01:00", 1, State.HOLD), ("01:04", 4, State.HOLD), ("01:05", 5, State.GO)):
        rows.append((f"2026-11-01T{local}:00", COOL_C))
        local_rows(station, *rows)
        assert states(station.poll(datetime(2026, 11, 1, 9, minute, tzinfo=UTC)))["trainer"] is expected
    station.close()


def test_the_hour_that_the_spring_night_skips_is_rejected_and_the_rest_of_the_night_counts(station: Station) -> None:
    rows = [("2026-03-08T01:55:00", HOT_C), ("2026-03-08T02:30:00", COOL_C), ("2026-03-08T03:00:00", HOT_C)]
    local_rows(station, *rows)
    state = station.poll(datetime(2026, 3, 8, 10, 1, tzinfo=UTC))
    assert curve_times(state) == [datetime(2026, 3, 8, 9, 55, tzinfo=UTC), datetime(2026, 3, 8, 10, tzinfo=UTC)]
    assert len(state.unused) == 1
    assert states(state)["trainer"] is State.HOLD
    station.close()


def test_reports_of_a_leap_day_are_of_that_day(tmp_path: Path) -> None:
    profile = PROFILE.replace("observations.csv", "reports.txt")
    field = make_field(tmp_path, profile=profile)
    reports = field.folder / "reports.txt"
    reports.write_text("METAR ZZTB 282355Z 00000KT 10SM CLR 21/10 Q1013=\n", encoding="utf-8")
    report_time = datetime(2028, 2, 28, 23, 56, tzinfo=UTC)
    _written_at(reports, report_time)
    field.clock.move_to(report_time)
    recorder = field.open()
    assert recorder.poll().observation is not None
    for group, when in (
        ("290005Z", datetime(2028, 2, 29, 0, 5, tzinfo=UTC)),
        ("292355Z", datetime(2028, 2, 29, 23, 55, tzinfo=UTC)),
        ("010005Z", datetime(2028, 3, 1, 0, 5, tzinfo=UTC)),
    ):
        with reports.open("a", encoding="utf-8") as file:
            file.write(f"METAR ZZTB {group} 00000KT 10SM CLR 21/10 Q1013=\n")
        _written_at(reports, when + timedelta(minutes=1))
        field.clock.move_to(when + timedelta(minutes=1))
        state = recorder.poll()
        assert state.observation is not None
        assert state.observation.time == when
        assert states(state)["trainer"] is State.GO
    recorder.close()


def _written_at(path: Path, when: datetime) -> None:
    os.utime(path, (when.timestamp(), when.timestamp()))


NOON = datetime(2026, 7, 14, 19, tzinfo=UTC)


def test_a_clock_set_back_shows_no_data_until_it_has_caught_up_and_records_nothing_twice(station: Station) -> None:
    station.send(NOON - FIVE_MIN, WARM_C)
    station.send(NOON, HOT_C)
    state = station.poll(NOON - timedelta(hours=1))
    assert set(states(state).values()) == {State.NO_DATA}
    assert state.conditions is None
    # The logger keeps the true time: its next row is in the future by the clock.
    station.field.append(f"{iso_utc(NOON + FIVE_MIN)},1013.25,{COOL_C}\n")
    state = station.poll(NOON - timedelta(minutes=55))
    assert set(states(state).values()) == {State.NO_DATA}
    assert any("future" in reason for _, reason in state.unused)
    state = station.send(NOON + 2 * FIVE_MIN, HOT_C)
    assert states(state)["trainer"] is State.HOLD
    assert shown(state, "trainer").since == NOON
    station.close()
    history = History.open_read_only(station.field.history)
    valid = [
        record.body["time"]
        for record in history.records(kinds=(RecordKind.OBSERVATION,))
        if record.body["verdict"] == "valid"
    ]
    history.close()
    assert len(valid) == len(set(valid)) == 3


def test_a_clock_set_forward_by_days_and_right_again_leaves_the_day_whole(station: Station) -> None:
    station.send(NOON - 2 * FIVE_MIN, WARM_C)
    (held,) = station.send(NOON - FIVE_MIN, HOT_C).changes
    assert station.recorder is not None
    station.recorder.acknowledge([held.number], "MS")
    before = station.send(NOON, HOT_C)
    state = station.poll(NOON + timedelta(days=10))
    assert set(states(state).values()) == {State.NO_DATA}
    assert curve_times(state) == []
    state = station.send(NOON + FIVE_MIN, HOT_C)
    assert states(state)["trainer"] is State.HOLD
    assert shown(state, "trainer").since is not None
    assert curve_times(state) == [*curve_times(before), NOON + FIVE_MIN]
    assert held.number in {change.number for change in state.changes}
    station.close()


def test_after_a_night_asleep_nobody_goes_until_an_observation_has_come(station: Station) -> None:
    station.send(NOON - FIVE_MIN, HOT_C)
    station.send(NOON, HOT_C)
    morning = NOON + timedelta(hours=20)
    state = station.poll(morning)
    assert set(states(state).values()) == {State.NO_DATA}
    line = shown(state, "trainer")
    assert (line.was, line.since) == (State.HOLD, NOON + timedelta(minutes=15))
    state = station.send(morning + timedelta(minutes=1), COOL_C)
    assert states(state)["trainer"] is State.HOLD, "NO DATA never clears a hold"
    # After more than 3 h without a valid observation the hold needs at least 60 min, from this observation on.
    for minutes in range(6, 61, 5):
        assert states(station.send(morning + timedelta(minutes=minutes), COOL_C))["trainer"] is State.HOLD
    assert states(station.send(morning + timedelta(minutes=61), COOL_C))["trainer"] is State.GO
    station.close()
