"""Rounding never flatters, and the words are those agreed."""

from dataclasses import replace
from datetime import UTC, datetime, timedelta
from zoneinfo import ZoneInfo

import pytest
from hypothesis import assume, given
from hypothesis import strategies as st

from airfield_board.configuration.model import Quantity, Unit
from airfield_board.limits.states import State
from airfield_board.session.board_state import Clearing, LimitLine
from airfield_board.window import formatting
from airfield_board.window.reading import Cause, view_of
from airfield_board.window.row_words import tip_of
from tests.window import states

LOS_ANGELES = ZoneInfo("America/Los_Angeles")
NOON = datetime(2026, 7, 16, 19, 0, tzinfo=UTC)
EQUAL = 1e-6
feet = st.floats(-3000.0, 30000.0)


def number_of(text: str) -> float:
    """Read a number as the screen has it."""
    return float(text.replace("\N{MINUS SIGN}", "-").replace(",", "").replace("+", "").replace("±", ""))


@given(feet)
def test_density_altitude_never_looks_lower(value_ft: float) -> None:
    shown = number_of(formatting.altitude(value_ft))
    assert value_ft - EQUAL <= shown < value_ft + 10


@given(feet, st.sampled_from(["ft", "m", "c", "f"]))
def test_margin_never_looks_larger(value: float, unit: Unit) -> None:
    step = {"ft": 10.0, "m": 5.0, "c": 0.1, "f": 0.1}[unit]
    shown = number_of(formatting.margin(value, unit))
    assert value - step - EQUAL < shown <= value + EQUAL


@given(st.integers(-100, 3000), feet)
def test_margin_and_density_altitude_add_up_to_a_whole_limit(tens: int, value_ft: float) -> None:
    limit_ft = tens * 10.0
    beyond_step = abs(value_ft - round(value_ft, -1))
    # On the very edge of what counts as equal the binary rounding of the difference decides; both errors are safe.
    assume(not 0.5e-6 < beyond_step < 2e-6)
    margin = number_of(formatting.margin(limit_ft - value_ft, "ft"))
    assert margin == pytest.approx(limit_ft - number_of(formatting.altitude(value_ft)))


@given(st.floats(0.0, 2000.0))
def test_uncertainty_never_looks_smaller(value_ft: float) -> None:
    assert number_of(formatting.uncertainty(value_ft)) >= value_ft - EQUAL


@given(st.floats(-60.0, 120.0))
def test_hold_temperature_never_looks_higher(value_c: float) -> None:
    assert number_of(formatting.hold_temperature(value_c, "c")) <= value_c + EQUAL


@given(st.floats(0.0, 20000.0), st.sampled_from(["lb", "kg"]))
def test_greatest_weight_never_looks_heavier(value: float, unit: str) -> None:
    assert number_of(formatting.weight(value, unit).split()[0]) <= value + EQUAL


@given(feet, st.sampled_from(["ft", "m", "c", "f"]))
def test_a_limit_or_clearing_value_never_looks_higher(value: float, unit: Unit) -> None:
    assert number_of(formatting.value_of_limit(value, unit).split()[0]) <= value + EQUAL


@pytest.mark.parametrize(
    ("value_ft", "shown"),
    [
        (6821.6, "6,830"),
        (6820.0, "6,820"),
        (6820.0000005, "6,820"),
        (6820.00001, "6,830"),
        (-471.6, "−470"),
        (0.0, "0"),
        (-5.0, "0"),
        (10000.1, "10,010"),
    ],
)
def test_density_altitude_by_hand(value_ft: float, shown: str) -> None:
    assert formatting.altitude(value_ft) == shown


@pytest.mark.parametrize(
    ("value", "unit", "shown"),
    [
        (-471.6, "ft", "−480"),
        (129.9, "ft", "+120"),
        (120.0, "ft", "+120"),
        (0.0, "ft", "0"),
        (-0.0000005, "ft", "0"),
        (-0.1, "ft", "−10"),
        (9.9, "ft", "0"),
        (1070.0, "ft", "+1,070"),
        (42.0 - 30.3, "c", "+11.7"),
        (-0.05, "c", "−0.1"),
        (-0.01, "f", "−0.1"),
    ],
)
def test_margin_by_hand(value: float, unit: Unit, shown: str) -> None:
    assert formatting.margin(value, unit) == shown


def test_rates_and_their_words() -> None:
    assert formatting.rate(216.0) == "+220"
    assert formatting.rate(-444.0) == "−440"
    assert [formatting.rate_word(rate) for rate in (216.0, -444.0, 20.0)] == ["rising", "falling", "steady"]


def test_altimeter_settings_in_both_units() -> None:
    # 29.92 inHg is 1013.2 hPa: ICAO Doc 7488, standard atmosphere, 760 mm of mercury.
    assert formatting.altimeter(1013.25, "inhg") == "29.92"
    assert formatting.altimeter(1013.25, "hpa") == "1013.2"


def test_temperatures_in_both_units() -> None:
    assert formatting.temperature(30.4, "c") == "30.4"
    assert formatting.temperature(100.0, "f") == "212.0"
    assert formatting.temperature(-40.0, "f") == "−40.0"
    assert formatting.deviation(10.0, "f") == "+18.0"


def test_times_are_local_and_carry_the_date_when_it_is_another_day() -> None:
    assert formatting.clock(NOON, LOS_ANGELES) == "12:00"
    assert formatting.time_near(NOON, NOON, LOS_ANGELES) == "12:00"
    assert formatting.time_near(NOON - timedelta(hours=13), NOON, LOS_ANGELES) == "15 Jul 23:00"
    assert formatting.stamp(NOON, LOS_ANGELES) == "Thu 16 Jul 2026, 12:00 (19:00 UTC)"


def test_the_earliest_end_counts_a_begun_minute() -> None:
    assert formatting.clock_up(NOON, LOS_ANGELES) == "12:00"
    assert formatting.clock_up(NOON + timedelta(microseconds=1), LOS_ANGELES) == "12:01"
    assert formatting.clock_up(NOON + timedelta(seconds=60), LOS_ANGELES) == "12:01"


@pytest.mark.parametrize(
    ("minutes", "words"),
    [(0, ("0", "min old")), (76, ("76", "min old")), (192, ("3 h 12", "min old")), (4321, ("3", "days old"))],
)
def test_ages(minutes: float, words: tuple[str, str]) -> None:
    assert formatting.age(timedelta(minutes=minutes)) == words


def limit_line(**changes: object) -> LimitLine:
    """Return an invented limit in HOLD, with changes."""
    line = LimitLine(
        quantity=Quantity.DENSITY_ALTITUDE,
        unit="ft",
        state=State.HOLD,
        limit=6350.0,
        value=6821.6,
        margin=-471.6,
        since=NOON - timedelta(hours=2),
        clearing=Clearing(needs=6200.0, for_min=10.0, since=None, earliest=None),
    )
    return replace(line, **changes)  # type: ignore[arg-type]  # the names are checked by replace


def test_a_hold_says_what_clears_it() -> None:
    assert formatting.next_change(limit_line(), NOON, LOS_ANGELES) == ("clears at or below 6,200 ft", "for 10 min")


def test_a_hold_with_a_run_says_when_it_ends_at_the_earliest() -> None:
    run = Clearing(needs=6200.0, for_min=10.0, since=NOON - timedelta(minutes=4), earliest=NOON + timedelta(minutes=6))
    words = formatting.next_change(limit_line(clearing=run), NOON, LOS_ANGELES)
    assert words == ("back 12:06 at the earliest", "below 6,200 ft since 11:56")


def test_a_run_that_is_long_enough_waits_for_a_reading() -> None:
    run = Clearing(needs=6200.0, for_min=10.0, since=NOON - timedelta(minutes=11), earliest=NOON - timedelta(minutes=1))
    loud, _quiet = formatting.next_change(limit_line(clearing=run), NOON, LOS_ANGELES)
    assert loud == "may clear at the next reading"


def test_reduced_says_the_greatest_weight() -> None:
    line = limit_line(state=State.REDUCED, greatest_weight=2414.9, full_weight=2450.0, weight_unit="lb")
    assert formatting.next_change(line, NOON, LOS_ANGELES) == ("to 2,410 lb", "greatest weight 2,450 lb")


def test_a_margin_that_will_be_gone_says_so() -> None:
    line = limit_line(state=State.NEAR, clearing=None, gone_by=NOON + timedelta(minutes=14))
    assert formatting.next_change(line, NOON, LOS_ANGELES)[0] == "margin may be gone by 12:14"
    later = NOON + timedelta(minutes=20)
    assert formatting.next_change(line, later, LOS_ANGELES)[0] == "may be gone since 12:14"


def test_no_data_says_what_it_was_or_why() -> None:
    gone = limit_line(state=State.NO_DATA, clearing=None, was=State.HOLD, was_at=NOON - timedelta(minutes=26))
    assert formatting.next_change(gone, NOON, LOS_ANGELES)[0] == "was HOLD at 11:34"
    outside = limit_line(state=State.NO_DATA, clearing=None, reason="outside its table")
    assert formatting.next_change(outside, NOON, LOS_ANGELES) == ("", "outside its table")


def test_limits_name_what_is_not_a_density_altitude() -> None:
    assert formatting.limit_phrase(limit_line()) == "limit 6,350 ft"
    temperature = limit_line(quantity=Quantity.TEMPERATURE, unit="c", limit=42.0)
    assert formatting.limit_phrase(temperature) == "limit 42 °C"
    pressure = limit_line(quantity=Quantity.PRESSURE_ALTITUDE, limit=5000.0)
    assert formatting.limit_phrase(pressure) == "limit PA 5,000 ft"
    deviation = limit_line(quantity=Quantity.ISA_DEVIATION, unit="c", limit=25.5)
    assert formatting.limit_phrase(deviation) == "limit ISA +25.5 °C"
    assert formatting.limit_cell(pressure) == "PA 5,000"
    assert formatting.limit_cell(deviation) == "ISA +25.5 °C"
    assert formatting.limit_cell(temperature) == "42 °C"
    assert formatting.limit_phrase(limit_line(guarded=True)) == "limit 6,350 ft, guarded"
    assert formatting.limit_phrase(None) == "no limit in force"


def test_cells_leave_out_the_unit_of_their_column_only() -> None:
    assert formatting.margin_cell(limit_line(), "ft") == "−480"
    assert formatting.margin_cell(limit_line(), "m") == "−480 ft"
    assert formatting.margin_cell(limit_line(unit="c", margin=11.6), "ft") == "+11.6 °C"
    assert formatting.margin_cell(limit_line(margin=None), "ft") == "—"
    assert formatting.margin_cell(limit_line(margin=float("nan")), "ft") == "—"


def test_a_temporary_limit_says_until_when_and_by_what() -> None:
    line = limit_line(valid_until="2026-09-30", notice="Local order 7")
    assert formatting.temporary_phrase(line) == "until 30 Sep, Local order 7"
    assert formatting.temporary_short(line) == "to 30 Sep"


def test_the_source_is_named_and_typed_in_readings_carry_initials() -> None:
    state = states.board()
    assert state.observation is not None
    assert formatting.source_line(state.observation) == "observations.csv · north end sensor"
    typed = replace(state.observation, initials="MS")
    assert formatting.source_line(typed) == "TYPED IN by MS · north end sensor"


@pytest.mark.parametrize("cause", list(Cause))
def test_every_cause_of_no_data_is_explained(cause: Cause) -> None:
    state = states.board()
    lines = formatting.no_data_lines(cause, state, state.assessed_at, LOS_ANGELES)
    assert bool(lines) == (cause is not Cause.NONE)
    assert all(line.strip() for line in lines)


def test_tips_escape_what_files_say() -> None:
    state = states.board()
    row = replace(state.operations[0], aircraft_name="<b>Bold & brave</b>")
    tip = tip_of(row, view_of(state, state.assessed_at, None))
    assert "&lt;b&gt;Bold &amp; brave&lt;/b&gt; · Departure" in tip
    assert "GO, since 06:00" in tip
    late = tip_of(row, view_of(state, state.assessed_at + timedelta(hours=2), None))
    assert "NO DATA" not in tip
    assert "limit" not in late


def test_the_strip_says_the_day_of_a_reading_that_is_not_of_today() -> None:
    observation = states.board().observation
    assert observation is not None
    zone = ZoneInfo("America/Los_Angeles")
    today = formatting.observed_label(observation, observation.time, zone)
    later = formatting.observed_label(observation, observation.time + timedelta(days=40), zone)
    assert today == f"Observed {formatting.clock(observation.time, zone)}"
    assert later == f"16 Jul {formatting.clock(observation.time, zone)}"
    assert formatting.observed_label(None, observation.time, zone) == "Observed"


def test_what_clears_a_hold_names_a_quantity_that_the_unit_alone_would_not_tell() -> None:
    def needs(value: float, **changes: object) -> str:
        clearing = Clearing(needs=value, for_min=10.0, since=None, earliest=None)
        return formatting.next_change(limit_line(clearing=clearing, **changes), NOON, LOS_ANGELES)[0]

    assert needs(3850.0, quantity=Quantity.PRESSURE_ALTITUDE) == "clears at or below PA 3,850 ft"
    assert needs(21.5, quantity=Quantity.ISA_DEVIATION, unit="c") == "clears at or below ISA +21.5 °C"
    assert needs(-2.0, quantity=Quantity.ISA_DEVIATION, unit="c") == "clears at or below ISA −2 °C"
    assert needs(31.5, quantity=Quantity.TEMPERATURE, unit="c") == "clears at or below 31.5 °C"


def test_the_level_of_an_ageing_reading_names_its_time() -> None:
    assert formatting.level_label(6826.0, None, "ft", LOS_ANGELES) == "DA now 6,830 ft"
    assert (
        formatting.level_label(6826.0, NOON, "ft", LOS_ANGELES)
        == f"DA at {formatting.clock(NOON, LOS_ANGELES)} 6,830 ft"
    )
