from datetime import date

import pytest

from airfield_board.configuration.looseness import Aspect, merge_limits, nowhere_above
from airfield_board.configuration.model import Limit
from tests.configuration.examples import limits_of


def limit(value: str, key: str = "max_density_altitude_ft", **more: object) -> Limit:
    rest = "".join(f", {name}: {text}" for name, text in more.items())
    (made,) = limits_of(f"name: A, {key}: {value}{rest}")
    return made


TABLE = "{by_weight_lb: {1950: 7400, 2200: 6950, 2450: 6550}}"
BY_ALTITUDE = "{by_pressure_altitude_ft: {0: 45, 4000: 38, 8000: 40}}"


class TestNowhereAbove:
    @pytest.mark.parametrize(
        ("value", "other", "expected"),
        [
            ("6000", "6000", True),
            ("5999", "6000", True),
            ("6000.1", "6000", False),
            (TABLE, TABLE, True),
            # A point on the line between two others changes nothing.
            ("{by_weight_lb: {1950: 7400, 2075: 7175, 2200: 6950, 2450: 6550}}", TABLE, True),
            (TABLE, "{by_weight_lb: {1950: 7400, 2075: 7175, 2200: 6950, 2450: 6550}}", True),
            ("{by_weight_lb: {1950: 7400, 2075: 7176, 2200: 6950, 2450: 6550}}", TABLE, False),
            ("{by_weight_lb: {1950: 7400, 2450: 6550}}", TABLE, False),  # 6,975 at 2,200
            (TABLE, "{by_weight_lb: {1950: 7400, 2450: 6550}}", True),
            # Further up or down in weight is something new.
            ("{by_weight_lb: {1950: 7400, 2200: 6950, 2450: 6550, 2500: 6500}}", TABLE, False),
            ("{by_weight_lb: {1900: 7500, 1950: 7400, 2200: 6950, 2450: 6550}}", TABLE, False),
            # A table that ends sooner has a higher limit at its greatest weight, unless that is lowered.
            ("{by_weight_lb: {1950: 7400, 2200: 6950}}", TABLE, False),
            ("{by_weight_lb: {1950: 7400, 2200: 6550}}", TABLE, True),
            ("{by_weight_lb: {2200: 6950, 2450: 6550}}", TABLE, True),
            # A number says nothing about weight; a table below the number does not loosen it.
            ("6000", TABLE, False),
            (TABLE, "7400", True),
            (TABLE, "7399", False),
        ],
    )
    def test_altitudes(self, value: str, other: str, *, expected: bool) -> None:
        assert nowhere_above(limit(value), limit(other)) is expected

    @pytest.mark.parametrize(
        ("value", "other", "expected"),
        [
            (BY_ALTITUDE, BY_ALTITUDE, True),
            ("{by_pressure_altitude_ft: {0: 45, 4000: 37, 8000: 40}}", BY_ALTITUDE, True),
            ("{by_pressure_altitude_ft: {0: 45, 8000: 40}}", BY_ALTITUDE, False),  # 42.5 at 4,000
            ("{by_pressure_altitude_ft: {0: 30, 9000: 30}}", BY_ALTITUDE, False),
            ("{by_pressure_altitude_ft: {1000: 30, 8000: 30}}", BY_ALTITUDE, False),
            ("30", BY_ALTITUDE, False),
            (BY_ALTITUDE, "45", False),
            (BY_ALTITUDE, "{by_weight_lb: {1950: 50, 2200: 49}}", False),
        ],
    )
    def test_temperatures(self, value: str, other: str, *, expected: bool) -> None:
        assert nowhere_above(limit(value, "max_temperature_c"), limit(other, "max_temperature_c")) is expected

    def test_units_do_not_matter(self) -> None:
        # 6,000 ft are 1828.8 m, 40 °C are 104 °F, 1,000 lb are 453.59237 kg.
        assert nowhere_above(limit("1828.8", "max_density_altitude_m"), limit("6000"))
        assert nowhere_above(limit("6000"), limit("1828.8", "max_density_altitude_m"))
        assert not nowhere_above(limit("1829", "max_density_altitude_m"), limit("6000"))
        assert nowhere_above(limit("104", "max_temperature_f"), limit("40", "max_temperature_c"))
        assert not nowhere_above(limit("104.1", "max_temperature_f"), limit("40", "max_temperature_c"))
        in_lb = limit("{by_weight_lb: {1000: 7000, 2000: 6000}}")
        in_kg = limit("{by_weight_kg: {453.59237: 7000, 907.18474: 6000}}")
        assert nowhere_above(in_lb, in_kg)
        assert nowhere_above(in_kg, in_lb)


def merged(old: list[Limit], new: list[Limit], today: date | None = None) -> tuple[list[Limit], set[str], set[str]]:
    merge = merge_limits(old, new, today=today)
    return list(merge.effective), set(merge.loosened), set(merge.tightened)


class TestMerge:
    def test_the_same_limits_change_nothing(self) -> None:
        both = [limit("6000"), limit(TABLE, valid_from="2026-06-01")]

        assert merged(both, both) == (both, set(), set())

    def test_a_lower_limit_acts(self) -> None:
        assert merged([limit("6000")], [limit("5900")]) == ([limit("5900")], set(), {Aspect.LIMIT})

    def test_a_higher_limit_waits(self) -> None:
        assert merged([limit("6000")], [limit("6100")]) == ([limit("6000")], {Aspect.LIMIT}, set())

    def test_a_limit_in_another_unit_is_no_change(self) -> None:
        new = [limit("1828.8", "max_density_altitude_m")]

        assert merged([limit("6000")], new) == (new, set(), set())

    def test_a_table_that_crosses_the_old_one_holds_together_with_it(self) -> None:
        old, new = limit(TABLE), limit("{by_weight_lb: {1950: 7000, 2450: 6700}}")

        effective, loosened, tightened = merged([old], [new])

        assert set(effective) == {old, new}
        assert (loosened, tightened) == ({Aspect.LIMIT}, {Aspect.LIMIT})

    @pytest.mark.parametrize(
        ("key", "less", "more", "aspect"),
        [
            ("near_band_ft", "400", "500", Aspect.NEAR_BAND),
            ("deadband_ft", "100", "150", Aspect.DEADBAND),
            ("off_delay_min", "5", "10", Aspect.OFF_DELAY),
            ("acceptance", "simple", "guarded", Aspect.ACCEPTANCE),
        ],
    )
    def test_a_smaller_band_waits_and_a_greater_one_acts(self, key: str, less: str, more: str, aspect: Aspect) -> None:
        small, great = limit("6000", **{key: less}), limit("6000", **{key: more})

        assert merged([great], [small]) == ([great], {aspect}, set())
        assert merged([small], [great]) == ([great], set(), {aspect})

    def test_a_band_in_another_unit_is_no_change(self) -> None:
        # 500 ft are 152.4 m.
        new = [limit("6000", near_band_m="152.4")]

        assert merged([limit("6000")], new) == (new, set(), set())

    def test_a_lower_limit_acts_while_its_smaller_bands_wait(self) -> None:
        old = limit("6000", near_band_ft=600, deadband_ft=100)
        new = limit("5900", near_band_ft=400, deadband_ft=200)

        assert merged([old], [new]) == (
            [limit("5900", near_band_ft=600, deadband_ft=200)],
            {Aspect.NEAR_BAND},
            {Aspect.LIMIT, Aspect.DEADBAND},
        )

    def test_a_higher_limit_waits_while_its_greater_bands_act(self) -> None:
        old = limit("6000", near_band_ft=600, deadband_ft=100)
        new = limit("6100", near_band_ft=700, deadband_ft=50)

        assert merged([old], [new]) == (
            [limit("6000", near_band_ft=700, deadband_ft=100)],
            {Aspect.LIMIT, Aspect.DEADBAND},
            {Aspect.NEAR_BAND},
        )

    def test_bands_of_another_unit_are_raised_in_their_own(self) -> None:
        old = limit("6000", near_band_ft=1000)
        new = limit("1500", "max_density_altitude_m", near_band_ft=500)

        (effective,), loosened, _ = merged([old], [new])

        assert (effective.value, effective.unit) == (1500, "m")
        assert effective.near_band == pytest.approx(304.8, abs=1e-9)
        assert loosened == {Aspect.NEAR_BAND}

    def test_a_temporary_limit_that_is_added_acts_on_its_days(self) -> None:
        new = [limit("6000"), limit("5500", valid_from="2026-06-01", valid_until="2026-06-30")]

        assert merged([limit("6000")], new) == (new, set(), {Aspect.LIMIT})

    def test_a_temporary_limit_that_is_taken_out_stays_on_its_days(self) -> None:
        dated = limit("5500", valid_from="2026-06-01", valid_until="2026-06-30")

        effective, loosened, _ = merged([limit("6000"), dated], [limit("6000")])

        assert set(effective) == {limit("6000"), dated}
        assert loosened == {Aspect.LIMIT}

    def test_dates_that_leave_days_looser_wait_for_these_days_alone(self) -> None:
        old = [limit("6000"), limit("5500", valid_from="2026-06-01", valid_until="2026-06-30")]
        new = [limit("6000"), limit("5500", valid_from="2026-06-10", valid_until="2026-07-10")]

        effective, loosened, tightened = merged(old, new)

        assert lowest(effective, "2026-05-31") == 6000
        assert lowest(effective, "2026-06-01") == 5500
        assert lowest(effective, "2026-06-15") == 5500
        assert lowest(effective, "2026-07-10") == 5500
        assert lowest(effective, "2026-07-11") == 6000
        assert (loosened, tightened) == ({Aspect.LIMIT}, {Aspect.LIMIT})

    def test_a_limit_that_becomes_temporary_stays_on_the_other_days(self) -> None:
        effective, loosened, _ = merged([limit("6000")], [limit("6000", valid_until="2026-06-30")])

        assert effective == [limit("6000")]
        assert loosened == {Aspect.LIMIT}

    def test_days_that_are_over_loosen_nothing(self) -> None:
        old = [limit("6000"), limit("5500", valid_from="2026-06-01", valid_until="2026-06-30")]
        new = [limit("6000")]

        assert merged(old, new, date(2026, 7, 1)) == (new, set(), set())
        assert merged(old, new, date(2026, 6, 30))[1] == {Aspect.LIMIT}

    def test_what_runs_out_before_today_is_cut_off_while_something_else_waits(self) -> None:
        old = [limit("6000"), limit("5500", valid_from="2026-06-01", valid_until="2026-06-30")]

        effective, loosened, _ = merged(old, [limit("6100")], date(2026, 7, 1))

        assert lowest(effective, "2026-07-01") == 6000
        assert loosened == {Aspect.LIMIT}

    def test_the_first_and_the_last_day_of_the_calendar_are_open_ends(self) -> None:
        old = [limit("6000", valid_from="0001-01-01", valid_until="9999-12-31")]

        assert merged(old, [limit("6000")]) == ([limit("6000")], set(), set())
        assert merged([limit("6000")], old) == (old, set(), set())

    def test_a_band_of_an_entry_that_is_never_the_lowest_does_not_matter(self) -> None:
        summer = limit("5500", valid_from="2026-06-01", near_band_ft=800)

        assert merged([limit("6000"), summer], [limit("5900"), summer]) == (
            [limit("5900"), summer],
            set(),
            {Aspect.LIMIT},
        )

    def test_a_smaller_band_waits_where_the_entry_becomes_the_lowest(self) -> None:
        summer = limit("5500", valid_from="2026-06-01", near_band_ft=800)

        effective, loosened, _ = merged([limit("6000"), summer], [limit("5450"), summer])

        in_summer = [each for each in effective if each.in_force_on(date(2026, 7, 1)) and each.value == 5450]
        in_spring = [each for each in effective if each.in_force_on(date(2026, 4, 1))]
        assert [each.near_band for each in in_summer] == [800]
        assert [each.near_band for each in in_spring] == [500]
        assert loosened == {Aspect.NEAR_BAND}

    def test_guarded_acceptance_of_one_entry_counts_for_the_day(self) -> None:
        old = [limit("6000"), limit("6500", valid_from="2026-06-01", acceptance="guarded")]
        new = [limit("6000"), limit("6500", valid_from="2026-06-01")]

        effective, loosened, _ = merged(old, new)

        assert all(each.guarded for each in effective if each.in_force_on(date(2026, 7, 1)))
        assert not any(each.guarded for each in effective if each.in_force_on(date(2026, 5, 1)))
        assert loosened == {Aspect.ACCEPTANCE}


def lowest(limits: list[Limit], day: str) -> float:
    values = [each.value for each in limits if each.in_force_on(date.fromisoformat(day))]
    numbers = [value for value in values if isinstance(value, float)]
    assert len(numbers) == len(values)
    return min(numbers)
