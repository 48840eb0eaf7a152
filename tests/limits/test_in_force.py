"""Which entries count when, and as which numbers."""

from dataclasses import replace
from datetime import date, datetime, timedelta
from pathlib import Path
from zoneinfo import ZoneInfo

import numpy as np
import pytest

from airfield_board.clock import us_from_time
from airfield_board.configuration.model import (
    Aircraft,
    Fleet,
    Limit,
    Operation,
    PressureAltitudeTable,
    Quantity,
    WeightTable,
)
from airfield_board.limits.in_force import Standing, fleet_schedules, schedules_of, standing_of, weight_in_lb
from tests.limits.record import ZONE, Desk, Row, by_weight, changes_of, limit_of, schedule_of, suspect, valid


def between(first: str | None, last: str | None, limit: Limit) -> Limit:
    return replace(
        limit,
        valid_from=None if first is None else date.fromisoformat(first),
        valid_until=None if last is None else date.fromisoformat(last),
    )


def local_us(text: str, *, fold: int = 0, zone: ZoneInfo = ZONE) -> int:
    return us_from_time(datetime.fromisoformat(text).replace(tzinfo=zone, fold=fold))


def limits_at(*entries: Limit, moments: list[str], zone: ZoneInfo = ZONE) -> list[float | None]:
    schedule = schedule_of(*entries, zone=zone)
    standings = [schedule.at(local_us(moment, zone=zone)) for moment in moments]
    return [None if standing is None else standing.fixed for standing in standings]


class TestLocalDays:
    def test_both_dates_are_included(self) -> None:
        entry = between("2026-06-01", "2026-09-30", limit_of(5600))
        moments = ["2026-05-31T23:59:59.999999", "2026-06-01T00:00", "2026-09-30T23:59:59.999999", "2026-10-01T00:00"]
        assert limits_at(entry, moments=moments) == [None, 5600.0, 5600.0, None]

    def test_one_day(self) -> None:
        entry = between("2026-06-01", "2026-06-01", limit_of(5600))
        moments = ["2026-05-31T23:59", "2026-06-01T00:00", "2026-06-01T23:59", "2026-06-02T00:00"]
        assert limits_at(entry, moments=moments) == [None, 5600.0, 5600.0, None]

    def test_open_at_one_end(self) -> None:
        moments = ["2026-05-31T23:59", "2026-06-01T00:00"]
        assert limits_at(between("2026-06-01", None, limit_of(5600)), moments=moments) == [None, 5600.0]
        assert limits_at(between(None, "2026-05-31", limit_of(5600)), moments=moments) == [5600.0, None]

    def test_without_dates_it_is_always_in_force(self) -> None:
        assert limits_at(limit_of(5600), moments=["1971-01-01T00:00", "2199-12-31T23:59"]) == [5600.0, 5600.0]

    @pytest.mark.parametrize(
        ("day", "hours"),
        [("2026-03-08", 23), ("2026-11-01", 25)],  # the clock changes of the United States in 2026
    )
    def test_the_day_of_a_clock_change(self, day: str, hours: int) -> None:
        schedule = schedule_of(between(day, day, limit_of(5600)))
        first, after = schedule.edges_us
        assert after - first == hours * 3_600_000_000
        assert schedule.at(first - 1) is None
        assert schedule.at(first) is not None
        assert schedule.at(after - 1) is not None
        assert schedule.at(after) is None

    def test_the_hour_that_comes_twice_belongs_to_the_day_both_times(self) -> None:
        schedule = schedule_of(between("2026-11-01", "2026-11-01", limit_of(5600)))
        assert schedule.at(local_us("2026-11-01T01:30", fold=0)) is not None
        assert schedule.at(local_us("2026-11-01T01:30", fold=1)) is not None

    def test_where_the_clock_change_skips_midnight(self) -> None:
        # Santiago went from 23:59:59 on 5 September 2026 to 01:00 on the 6th (tz database).
        zone = ZoneInfo("America/Santiago")
        entry = between("2026-09-06", None, limit_of(5600))
        assert limits_at(entry, moments=["2026-09-05T23:59", "2026-09-06T01:00"], zone=zone) == [None, 5600.0]

    @pytest.mark.parametrize("open_end", [date.max, date.max - timedelta(days=1)])
    def test_the_end_of_the_calendar_is_never_reached(self, open_end: date) -> None:
        entry = replace(limit_of(5600), valid_until=open_end)
        assert limits_at(entry, moments=["2026-06-01T00:00", "2199-12-31T00:00"]) == [5600.0, 5600.0]

    def test_the_beginning_of_the_calendar_is_long_past(self) -> None:
        entry = replace(limit_of(5600), valid_from=date.min)
        assert limits_at(entry, moments=["2026-06-01T00:00"]) == [5600.0]

    def test_a_limit_that_changes_at_midnight_is_judged_at_the_next_observation(self) -> None:
        # Minute 960 is local midnight.
        low = between("2026-07-15", None, limit_of(6000))
        desk = Desk(limit_of(6350), low, stale_after_min=60)
        desk.take([valid(955, 6100), valid(959, 6100), valid(960, 6100), valid(965, 6100)])
        assert desk.changes() == [(955, "near"), (960, "hold")]

    def test_a_day_without_a_limit_has_no_state_and_the_next_begins_anew(self) -> None:
        today = between(None, "2026-07-14", limit_of(6350))
        later = between("2026-07-16", None, limit_of(6350))
        desk = Desk(today, later, stale_after_min=60)
        desk.take([valid(955, 6000)])
        desk.take([suspect(965, 9000), valid(970, 5000), valid(975, 9000), valid(980, 5000)])
        assert desk.state is None
        desk.take([valid(2395, 9000), valid(2400, 5800)])  # minute 2400 is midnight again
        assert [(change.was, str(change.state)) for change in desk.judge.take_changes()] == [
            (None, "near"),
            (None, "go"),
        ]

    def test_no_data_before_midnight_counts_although_the_next_row_comes_on_a_day_without_a_limit(self) -> None:
        today = between(None, "2026-07-14", limit_of(6350))
        rows: list[Row] = [valid(900, 6400), valid(970, 6400)]
        desk = Desk(today).take(rows)
        assert desk.changes() == [(900, "hold"), (915, "no_data")]
        (episode,) = desk.judge.take_ended()
        assert (episode.minutes, episode.minutes_without_data) == (70, 55)

    def test_time_that_passes_on_a_day_without_a_limit_gives_no_state(self) -> None:
        later = between("2026-07-16", None, limit_of(6350))
        desk = Desk(later).take([valid(0, 6000)]).pass_to(60)
        assert (desk.state, desk.changes()) == (None, [])

    def test_a_suspect_row_alone_ends_nothing_on_a_day_without_a_limit(self) -> None:
        today = between(None, "2026-07-14", limit_of(6350))
        desk = Desk(today, stale_after_min=60).take([valid(955, 6400), suspect(965, 3000)])
        assert desk.judge.take_ended() == []
        assert desk.judge.open_episode() is not None


class TestLowestCounts:
    def test_of_two_numbers_the_lower_with_its_bands(self) -> None:
        year = limit_of(6350, near_band=500, deadband=150, off_delay_min=10)
        summer = between("2026-06-01", "2026-09-30", limit_of(5600, near_band=400, deadband=100, off_delay_min=20))
        schedule = schedule_of(year, summer)
        spring, june = schedule.at(local_us("2026-05-31T12:00")), schedule.at(local_us("2026-06-01T12:00"))
        assert spring is not None
        assert june is not None
        assert (spring.fixed, spring.near_band, spring.deadband, spring.off_delay_us) == (6350, 500, 150, 600_000_000)
        assert (june.fixed, june.near_band, june.deadband, june.off_delay_us) == (5600, 400, 100, 1_200_000_000)
        assert june.governing is summer

    def test_whatever_their_order(self) -> None:
        assert standing_of([limit_of(6350), limit_of(5600)]).fixed == 5600
        assert standing_of([limit_of(5600), limit_of(6350)]).fixed == 5600

    def test_of_equal_limits_the_widest_bands(self) -> None:
        first = limit_of(5600, near_band=500, deadband=100, off_delay_min=10)
        second = limit_of(5600, near_band=400, deadband=150, off_delay_min=20)
        both = standing_of([first, second])
        assert (both.near_band, both.deadband, both.off_delay_us) == (500, 150, 1_200_000_000)

    def test_in_different_units_the_lower_one_gives_the_unit(self) -> None:
        feet, metres = limit_of(6350), limit_of(1800, unit="m", near_band=150, deadband=50)  # 1,800 m are 5,905.5 ft
        standing = standing_of([feet, metres])
        assert (standing.unit, standing.fixed, standing.near_band) == ("m", 1800, 150)
        assert standing_of([limit_of(5900), metres]).unit == "ft"

    def test_guarded_where_any_of_them_is(self) -> None:
        assert standing_of([limit_of(6350, guarded=True), limit_of(5600)]).guarded
        assert not standing_of([limit_of(6350), limit_of(5600)]).guarded

    def test_quantity_by_quantity(self) -> None:
        hot = limit_of(45, quantity=Quantity.TEMPERATURE, unit="c", near_band=3, deadband=0.5)
        order = between("2026-07-01", None, limit_of(5600))
        operation = Operation(name="Aerotow", phase="departure", limits=(limit_of(6350), hot, order))
        aircraft = Aircraft(id="tow-plane", name="Tow plane", group="", operations=(operation,))
        first, second = schedules_of(aircraft, operation, ZONE)
        july = local_us("2026-07-14T12:00")
        assert (first.key.quantity, second.key.quantity) == (Quantity.DENSITY_ALTITUDE, Quantity.TEMPERATURE)
        density, temperature = first.at(july), second.at(july)
        assert density is not None
        assert temperature is not None
        assert (density.fixed, temperature.fixed) == (5600, 45)

    def test_all_of_a_fleet_in_the_order_of_the_file(self) -> None:
        operations = (
            Operation(name="Departure", phase="departure", limits=(limit_of(6350),)),
            Operation(name="Arrival", phase="arrival", limits=(limit_of(6900),)),
        )
        craft = tuple(Aircraft(id=name, name=name, group="", operations=operations) for name in ("b", "a"))
        fleet = Fleet(path=Path("fleet.yaml"), text="", sha256="", aircraft=craft)
        keys = [(schedule.key.aircraft, schedule.key.operation) for schedule in fleet_schedules(fleet, ZONE)]
        assert keys == [("b", "Departure"), ("b", "Arrival"), ("a", "Departure"), ("a", "Arrival")]


TOW = by_weight({1950: 7400, 2200: 6950, 2450: 6550})


class TestByWeight:
    def test_limits_at_greatest_and_least_weight(self) -> None:
        standing = standing_of([TOW])
        assert (standing.fixed, standing.light_gain) == (6550, 850)

    @pytest.mark.parametrize(
        ("value", "weight"),
        [
            (6000.0, 2450.0),  # never beyond the table
            (6550.0, 2450.0),
            (6750.0, 2325.0),  # half-way between 6,950 and 6,550
            (6950.0, 2200.0),
            (7175.0, 2075.0),
            (7400.0, 1950.0),
            (7400.0 + 5e-7, 1950.0),
        ],
    )
    def test_the_greatest_weight_is_linear_between_the_points(self, value: float, weight: float) -> None:
        found = standing_of([TOW]).greatest_weight(value)
        assert found is not None
        assert found[0] == pytest.approx(weight)
        assert found[1:] == (2450.0, "lb")

    def test_beyond_the_limit_at_the_least_weight_there_is_none(self) -> None:
        assert standing_of([TOW]).greatest_weight(7400.0 + 2e-6) is None

    def test_a_limit_without_weights_has_none(self) -> None:
        assert standing_of([limit_of(6350)]).greatest_weight(5000) is None

    def test_a_number_beside_it_counts_where_it_is_lower(self) -> None:
        # 7,000 ft at all weights: the lower limit of the two is 7,000 at the least weight and 6,550 at the greatest.
        both = standing_of([TOW, limit_of(7000)])
        assert (both.fixed, both.light_gain) == (6550, 450)
        below = standing_of([TOW, limit_of(6000)])
        assert (below.fixed, below.light_gain) == (6000, 0)

    def test_where_both_can_rule_the_wider_bands_count(self) -> None:
        # In HOLD the number's limit is the one to clear, so its deadband and delay must not be lost.
        both = standing_of([TOW, limit_of(7000, deadband=300, near_band=100, off_delay_min=30)])
        assert (both.deadband, both.near_band, both.off_delay_us) == (300, 500, 1_800_000_000)

    def test_two_tables_pointwise(self) -> None:
        # At 1,950 lb the order says 7,000, at 2,450 lb it says 6,800: lower at the light end, higher at the heavy one.
        order = by_weight({1950: 7000, 2450: 6800})
        both = standing_of([TOW, order])
        assert (both.fixed, both.light_gain) == (6550, 450)
        found = both.greatest_weight(6900)
        assert found is not None
        # The order allows 2,200 lb (half-way from 7,000 to 6,800), the flight manual 2,231.25 lb.
        assert found[0] == pytest.approx(2200.0)

    def test_two_tables_are_compared_at_weights_that_both_have(self) -> None:
        # At 2,100 lb, the least that both have, the tow plane's own table gives 7,130 ft: 250 lb of 7,400 - 6,950
        # over 1,950 to 2,200 lb are 1.8 ft/lb, 150 lb are 270 ft.
        order = by_weight({2100: 7300, 2450: 6700})
        both = standing_of([TOW, order])
        assert both.fixed is not None
        assert both.fixed + both.light_gain == pytest.approx(7130)
        assert standing_of([order, TOW]).light_gain == pytest.approx(580)

    def test_weights_in_kilograms(self) -> None:
        # The pound is 0.45359237 kg exactly (NIST SP 811).
        assert weight_in_lb(45.359237, "kg") == pytest.approx(100.0)
        assert weight_in_lb(100.0, "lb") == 100.0
        kilograms = by_weight({900: 7400, 1000: 7000}, "kg")  # 1,984.2 to 2,204.6 lb
        both = standing_of([TOW, kilograms])
        found = both.greatest_weight(7100)
        assert found is not None
        # Kilograms: 975 kg = 2,149.5 lb; pounds: 1,950 + 250 * 300/450 = 2,116.7 lb, which is less.
        assert found[0] == pytest.approx(1950 + 250 * 300 / 450)
        assert found[1:] == (2450.0, "lb")
        alone = standing_of([kilograms]).greatest_weight(7100)
        assert alone is not None
        assert alone[0] == pytest.approx(975.0)
        assert alone[1:] == (1000.0, "kg")

    def test_in_another_unit_the_limits_are_converted(self) -> None:
        table = WeightTable(weight_unit="lb", weights=(1950, 2450), limits=(2250, 2000))
        metres = replace(limit_of(unit="m", near_band=150, deadband=50), value=table)
        both = standing_of([metres, limit_of(6000)])  # 2,000 m are 6,561.7 ft
        assert (both.unit, both.fixed, both.light_gain) == ("ft", 6000, 0)
        assert both.weights[0].limits == pytest.approx((7381.889764, 6561.679790))

    def test_once_its_table_is_no_longer_in_force_reduced_is_only_near(self) -> None:
        # Minute 960 is local midnight: from then on one number holds at every weight.
        tow = between(None, "2026-07-14", TOW)
        desk = Desk(tow, between("2026-07-15", None, limit_of(6700)), stale_after_min=60)
        desk.take([valid(955, 6600), valid(960, 6600), valid(965, 6600)])
        assert desk.changes() == [(955, "reduced"), (960, "near")]


def temperature_by_height(points: dict[float, float], *, unit: str = "c", **bands: float) -> Limit:
    table = PressureAltitudeTable(altitudes_ft=tuple(points), limits=tuple(points.values()))
    base = limit_of(
        quantity=Quantity.TEMPERATURE,
        unit="f" if unit == "f" else "c",
        near_band=bands.get("near_band", 3),
        deadband=bands.get("deadband", 0.5),
        off_delay_min=bands.get("off_delay_min", 10),
    )
    return replace(base, value=table)


HOT = temperature_by_height({2000: 45, 4000: 41, 6000: 35})


def at_height(minute: float, temperature_c: float, height_ft: float) -> Row:
    return valid(minute, temperature_c, pressure_altitude_ft=height_ft)


class TestByPressureAltitude:
    @pytest.mark.parametrize(
        ("height_ft", "limit_c"), [(2000, 45), (3000, 43), (4000, 41), (5000, 38), (5500, 36.5), (6000, 35)]
    )
    def test_linear_between_the_points(self, height_ft: float, limit_c: float) -> None:
        assert changes_of(HOT, at_height(0, limit_c, height_ft))[0][1] == "near"
        assert changes_of(HOT, at_height(0, limit_c + 0.001, height_ft))[0][1] == "hold"
        assert changes_of(HOT, at_height(0, limit_c - 3, height_ft))[0][1] == "go"

    @pytest.mark.parametrize("height_ft", [1999.0, 6001.0])
    def test_outside_the_table_is_no_data_at_any_temperature(self, height_ft: float) -> None:
        assert changes_of(HOT, at_height(0, -20, height_ft)) == [(0, "no_data")]
        assert changes_of(HOT, at_height(0, 59, height_ft)) == [(0, "no_data")]

    @pytest.mark.parametrize(
        ("height_ft", "state"), [(2000 - 5e-7, "go"), (6000 + 5e-7, "go"), (6000 + 2e-6, "no_data")]
    )
    def test_a_difference_under_a_millionth_is_not_outside(self, height_ft: float, state: str) -> None:
        assert changes_of(HOT, at_height(0, 20, height_ft)) == [(0, state)]

    def test_an_unknown_pressure_altitude_is_outside(self) -> None:
        assert changes_of(HOT, at_height(0, 20, float("nan"))) == [(0, "no_data")]

    def test_a_hold_that_leaves_the_table_is_no_data_and_comes_back_as_hold(self) -> None:
        rows = [at_height(0, 46, 2100), at_height(5, 20, 1900), at_height(10, 20, 2100)]
        rows += [at_height(19, 20, 2100), at_height(20, 20, 2100)]
        assert changes_of(HOT, rows) == [(0, "hold"), (5, "no_data"), (10, "hold"), (20, "go")]

    def test_leaving_the_table_ends_a_run(self) -> None:
        rows = [at_height(0, 46, 2100), at_height(5, 40, 2100), at_height(10, 40, 1900), at_height(12, 40, 2100)]
        rows += [at_height(16, 40, 2100), at_height(22, 40, 2100)]
        assert changes_of(HOT, rows) == [(0, "hold"), (10, "no_data"), (12, "hold"), (22, "go")]

    def test_back_in_the_table_outside_a_hold_it_is_the_plain_comparison(self) -> None:
        rows = [at_height(0, 43, 2000), at_height(5, 43, 1900), at_height(10, 41.9, 2000)]
        assert changes_of(HOT, rows) == [(0, "near"), (5, "no_data"), (10, "go")]

    def test_another_entry_that_is_exceeded_is_a_hold_all_the_same(self) -> None:
        number = limit_of(44, quantity=Quantity.TEMPERATURE, unit="c", near_band=3, deadband=0.5)
        desk = Desk(HOT, number).take([at_height(0, 44.1, 1900), at_height(5, 20, 1900), at_height(10, 20, 2100)])
        assert desk.changes() == [(0, "hold"), (5, "no_data"), (10, "hold")]

    def test_another_entry_that_is_not_exceeded_leaves_no_data(self) -> None:
        number = limit_of(44, quantity=Quantity.TEMPERATURE, unit="c", near_band=3, deadband=0.5)
        assert Desk(HOT, number).take([at_height(0, 20, 1900)]).changes() == [(0, "no_data")]
        assert Desk(number, HOT).take([at_height(0, 43.5, 1900)]).changes() == [(0, "no_data")]

    def test_the_lower_one_counts_at_each_height(self) -> None:
        number = limit_of(42, quantity=Quantity.TEMPERATURE, unit="c", near_band=3, deadband=0.5)
        for height_ft, limit_c in [(2000, 42.0), (3500, 42.0), (4000, 41.0), (6000, 35.0)]:
            assert Desk(HOT, number).take([at_height(0, limit_c, height_ft)]).changes() == [(0, "near")]
            assert Desk(HOT, number).take([at_height(0, limit_c + 0.001, height_ft)]).changes() == [(0, "hold")]

    def test_two_tables_the_lower_one_counts(self) -> None:
        other = temperature_by_height({3000: 44, 6000: 38})
        for height_ft, limit_c in [(3000, 43.0), (4000, 41.0), (5000, 38.0)]:
            assert Desk(HOT, other).take([at_height(0, limit_c + 0.001, height_ft)]).changes() == [(0, "hold")]
            assert Desk(HOT, other).take([at_height(0, limit_c - 0.001, height_ft)]).changes() == [(0, "near")]
        assert Desk(HOT, other).take([at_height(0, 20, 2500)]).changes() == [(0, "no_data")]

    def test_with_tables_the_widest_bands_count(self) -> None:
        number = limit_of(42, quantity=Quantity.TEMPERATURE, unit="c", near_band=5, deadband=0.1, off_delay_min=5)
        both = standing_of([HOT, number])
        assert (both.near_band, both.deadband, both.off_delay_us) == (5, 0.5, 600_000_000)

    def test_a_table_by_weight_beside_it_counts_at_its_greatest_weight(self) -> None:
        weights = WeightTable(weight_unit="lb", weights=(1950, 2450), limits=(44, 40))
        by_mass = replace(limit_of(quantity=Quantity.TEMPERATURE, unit="c", near_band=3, deadband=0.5), value=weights)
        assert Desk(HOT, by_mass).take([at_height(0, 40.001, 2000)]).changes() == [(0, "hold")]
        assert Desk(HOT, by_mass).take([at_height(0, 40, 2000)]).changes() == [(0, "near")]

    def test_in_fahrenheit(self) -> None:
        fahrenheit = temperature_by_height({2000: 113, 6000: 95}, unit="f", near_band=5.4, deadband=0.9)
        assert changes_of(fahrenheit, at_height(0, 39.99, 4000))[0][1] == "near"  # 104 °F = 40 °C half-way
        assert changes_of(fahrenheit, at_height(0, 40.01, 4000))[0][1] == "hold"
        both = standing_of([fahrenheit, limit_of(20, quantity=Quantity.TEMPERATURE, unit="c")])
        assert both.unit == "c"
        assert both.tables[0].limits == pytest.approx((45, 35))

    def test_only_tables_and_all_of_them_left(self) -> None:
        standing: Standing = standing_of([HOT])
        limit, outside = standing.limit_at(np.array([1000.0, 3000.0, 9000.0]))
        assert outside.tolist() == [True, False, True]
        assert limit == pytest.approx([np.nan, 43.0, np.nan], nan_ok=True)
