from dataclasses import replace
from datetime import date

import pytest

from airfield_board.configuration.model import Fleet, Limit, Profile
from airfield_board.configuration.reload import compare_and_merge
from airfield_board.configuration.setting_changes import SettingChange, TightenedChange
from tests.configuration.examples import FLEET, PROFILE, SHORT_PROFILE, fleet_of, read_fleet, read_profile

Pair = tuple[Profile, Fleet]


def pair(profile: str = PROFILE, fleet: str = FLEET) -> Pair:
    read = read_profile(profile)
    return read, read_fleet(fleet, acceptance=read.acceptance)


def changed(text: str, *changes: tuple[str, str]) -> str:
    for old, new in changes:
        assert text.count(old) == 1, old
        text = text.replace(old, new)
    return text


def waiting(where: str, in_force: str, to_come: str) -> SettingChange:
    return SettingChange(where=where, in_force=in_force, waiting=to_come)


def tightened(where: str, was: str, now: str) -> TightenedChange:
    return TightenedChange(where=where, was=was, now=now)


def limits_by_row(fleet: Fleet) -> dict[str, list[Limit]]:
    return {
        f"{aircraft.id}/{operation.name}": list(operation.limits)
        for aircraft in fleet.aircraft
        for operation in aircraft.operations
    }


def test_unchanged_files_change_nothing() -> None:
    merge = compare_and_merge(pair(), pair())

    assert merge.effective == pair()
    assert (merge.waiting, merge.tightened) == ((), ())


def test_what_is_neither_looser_nor_tighter_acts_without_a_word() -> None:
    read = pair(
        changed(
            PROFILE,
            ("Cinder Mesa ", "Cinder Plateau "),
            ("observations.csv", "other.csv"),
            ("ZZCM", "ZZCN"),
            ("note: sensor at", "note: new sensor at"),
            ("poll_s: 5", "poll_s: 2"),
            ("41.2", "41.3"),
        ),
        changed(
            FLEET,
            ("Two-seat trainer", "Trainer"),
            ("Flying school", "School"),
            ("Operations manual 4.2", "Operations manual 4.3"),
            ("basis: operator policy", "basis: local order"),
            ("Local order 7", "Local order 8"),
            ("phase: local", "phase: arrival"),
        ),
    )

    merge = compare_and_merge(pair(), read)

    assert merge.effective == read
    assert (merge.waiting, merge.tightened) == ((), ())


@pytest.mark.parametrize(
    ("change", "where", "loose", "tight"),
    [
        (("elevation_ft: 4120", "elevation_ft: 4000"), "elevation", "4,000 ft", "4,120 ft"),
        (("density_altitude: auto", "density_altitude: dry"), "density altitude", "dry", "auto"),
        (("stale_after_min: 15", "stale_after_min: 20"), "age at which observations are stale", "20 min", "15 min"),
        (("expected_every_min: 5", "expected_every_min: 7.5"), "time between observations", "7.5 min", "5 min"),
        (
            ("altimeter_resolution_inhg: 0.01", "altimeter_resolution_hpa: 0.1"),
            "altimeter resolution",
            "0.1 hPa",
            "0.338639 hPa",
        ),
        (
            ("altimeter_accuracy_inhg: 0.02", "altimeter_accuracy_hpa: 0.5"),
            "altimeter accuracy",
            "0.5 hPa",
            "0.677278 hPa",
        ),
        (
            ("temperature_resolution_c: 0.1", "temperature_resolution_c: 0.01"),
            "temperature resolution",
            "0.01 °C",
            "0.1 °C",
        ),
        (("temperature_accuracy_c: 0.5", "temperature_accuracy_c: 0.3"), "temperature accuracy", "0.3 °C", "0.5 °C"),
        (("dewpoint_resolution_c: 0.1", "dewpoint_resolution_c: 0"), "dew point resolution", "0 °C", "0.1 °C"),
        (("dewpoint_accuracy_c: 1.0", "dewpoint_accuracy_c: 0.8"), "dew point accuracy", "0.8 °C", "1 °C"),
    ],
)
def test_a_setting_of_the_profile_waits_one_way_and_acts_the_other(
    change: tuple[str, str], where: str, loose: str, tight: str
) -> None:
    looser, tighter = pair(changed(PROFILE, change)), pair()

    merge = compare_and_merge(tighter, looser)
    assert merge.waiting == (waiting(where, tight, loose),)
    assert merge.tightened == ()
    profile, fleet = merge.effective
    assert fleet == looser[1]
    assert (profile.text, profile.sha256) == (looser[0].text, looser[0].sha256)
    assert profile == replace(
        tighter[0], text=profile.text, sha256=profile.sha256, altimeter_unit=looser[0].altimeter_unit
    )

    back = compare_and_merge(looser, tighter)
    assert back.effective == tighter
    assert back.waiting == ()
    assert back.tightened == (tightened(where, loose, tight),)


@pytest.mark.parametrize(("loose", "tight"), [("dry", "auto"), ("dry", "moist"), ("auto", "moist")])
def test_what_counts_less_humidity_is_looser(loose: str, tight: str) -> None:
    looser = pair(changed(PROFILE, ("density_altitude: auto", f"density_altitude: {loose}")))
    tighter = pair(changed(PROFILE, ("density_altitude: auto", f"density_altitude: {tight}")))

    assert compare_and_merge(tighter, looser).effective[0].density_altitude == tight
    assert compare_and_merge(looser, tighter).effective[0].density_altitude == tight


def test_an_elevation_in_another_unit_is_no_change() -> None:
    read = pair(changed(PROFILE, ("elevation_ft: 4120", "elevation_m: 1255.776")))

    merge = compare_and_merge(pair(), read)

    assert merge.effective == read
    assert (merge.waiting, merge.tightened) == ((), ())


def test_an_elevation_is_told_in_the_unit_of_the_new_profile() -> None:
    read = pair(changed(PROFILE, ("elevation_ft: 4120", "elevation_m: 1250")))

    assert compare_and_merge(pair(), read).waiting == (waiting("elevation", "1,255.776 m", "1,250 m"),)


def test_a_time_zone_waits_and_the_source_with_its_own() -> None:
    in_force = pair()
    read = pair(
        changed(
            PROFILE,
            ("America/Los_Angeles", "America/Denver"),
            ("Etc/GMT+8", "Etc/GMT+7"),
            ("observations.csv", "other.csv"),
            ("ZZCM", "ZZCN"),
            ("poll_s: 5", "poll_s: 2"),
        )
    )

    merge = compare_and_merge(in_force, read)

    assert merge.waiting == (
        waiting("time zone of the airfield", "America/Los_Angeles", "America/Denver"),
        waiting(
            "observations",
            "observations.csv, station ZZCM, times in Etc/GMT+8",
            "other.csv, station ZZCN, times in Etc/GMT+7",
        ),
    )
    profile = merge.effective[0]
    assert profile.time_zone == "America/Los_Angeles"
    assert profile.observations == replace(in_force[0].observations, poll_s=2)


def test_a_source_without_a_station_is_told_without() -> None:
    read = pair(changed(SHORT_PROFILE, ("America/Los_Angeles", "America/Denver")))

    assert (
        waiting(
            "observations",
            "observations.csv, times in America/Los_Angeles",
            "observations.csv, times in America/Denver",
        )
        in compare_and_merge(pair(SHORT_PROFILE), read).waiting
    )


def test_guarded_acceptance_is_told_once_for_the_whole_fleet() -> None:
    guarded = pair(changed(PROFILE, ("acceptance: simple", "acceptance: guarded")))

    merge = compare_and_merge(pair(), guarded)
    assert merge.effective == guarded
    assert merge.waiting == ()
    assert merge.tightened == (tightened("acceptance", "simple", "guarded"),)

    back = compare_and_merge(guarded, pair())
    assert back.waiting == (waiting("acceptance", "guarded", "simple"),)
    assert back.tightened == ()
    assert back.effective[0].acceptance == "guarded"
    assert back.effective[1].aircraft == guarded[1].aircraft


def test_a_new_limit_is_guarded_while_simple_acceptance_waits() -> None:
    guarded = pair(changed(PROFILE, ("acceptance: simple", "acceptance: guarded")))
    new_limit = changed(FLEET, ("basis: operator policy", "max_temperature_c: 44"))
    new_rows = (
        "      - name: Winch\n        max_temperature_c: 43\n"
        "  - id: glider\n    operations:\n      - name: Bungee\n        max_temperature_c: 42\n"
    )

    merge = compare_and_merge(guarded, pair(fleet=new_limit + new_rows))

    rows = limits_by_row(merge.effective[1])
    assert set(rows) == {
        "trainer-2/Departure",
        "trainer-2/Solo circuits",
        "tow-plane/Aerotow",
        "tow-plane/Winch",
        "glider/Bungee",
    }
    assert all(limit.guarded for limits in rows.values() for limit in limits)
    assert merge.tightened == (
        tightened("Two-seat trainer, Departure: temperature, limit", "none", "44 °C"),
        tightened("Tow plane, Winch", "none", "added"),
        tightened("glider", "none", "added"),
    )


def test_one_loosened_limit_does_not_hold_up_a_tightened_one() -> None:
    read = pair(
        fleet=changed(FLEET, ("6350", "6500"), ("5600", "5500"), ("max_temperature_c: 45", "max_temperature_c: 44"))
    )

    merge = compare_and_merge(pair(), read)

    rows = limits_by_row(merge.effective[1])
    assert [limit.value for limit in rows["trainer-2/Departure"]] == [6350]
    assert [limit.value for limit in rows["trainer-2/Solo circuits"]] == [5500]
    assert [limit.value for limit in rows["tow-plane/Aerotow"]][1] == 44
    assert merge.waiting == (waiting("Two-seat trainer, Departure: density altitude, limit", "6,350 ft", "6,500 ft"),)
    assert merge.tightened == (
        tightened(
            "Two-seat trainer, Solo circuits: density altitude, limit",
            "5,600 ft from 2026-06-01 until 2026-09-30",
            "5,500 ft from 2026-06-01 until 2026-09-30",
        ),
        tightened("Tow plane, Aerotow: temperature, limit", "45 °C", "44 °C"),
    )


def test_a_loosened_table_is_told_point_by_point() -> None:
    by_altitude = "name: Winch, max_temperature_c: {by_pressure_altitude_ft: {0: 45, 8000: 38.5}}"
    looser = by_altitude.replace("38.5", "39")

    merge = compare_and_merge(pair(fleet=fleet_of(by_altitude)), pair(fleet=fleet_of(looser)))

    assert merge.waiting == (
        waiting(
            "glider, Winch: temperature, limit",
            "45 °C at pressure altitude 0 ft, 38.5 °C at pressure altitude 8,000 ft",
            "45 °C at pressure altitude 0 ft, 39 °C at pressure altitude 8,000 ft",
        ),
    )
    assert compare_and_merge(pair(), pair(fleet=changed(FLEET, ("6550", "6600")))).waiting == (
        waiting(
            "Tow plane, Aerotow: density altitude, limit",
            "7,400 ft at 1,950 lb, 6,950 ft at 2,200 lb, 6,550 ft at 2,450 lb",
            "7,400 ft at 1,950 lb, 6,950 ft at 2,200 lb, 6,600 ft at 2,450 lb",
        ),
    )


def test_smaller_defaults_wait_for_every_limit_that_follows_them() -> None:
    read = pair(
        fleet=changed(
            FLEET,
            (
                "{near_band_ft: 500, deadband_ft: 150, off_delay_min: 10}",
                "{near_band_ft: 400, deadband_ft: 100, off_delay_min: 5, deadband_f: 0.5}",
            ),
        )
    )

    merge = compare_and_merge(pair(), read)

    assert len(merge.waiting) == 3 * 3 + 2
    assert waiting("Tow plane, Aerotow: density altitude, near band", "500 ft", "400 ft") in merge.waiting
    assert waiting("Tow plane, Aerotow: density altitude, deadband", "150 ft", "100 ft") in merge.waiting
    assert waiting("Tow plane, Aerotow: density altitude, off-delay", "10 min", "5 min") in merge.waiting
    assert waiting("Tow plane, Aerotow: temperature, deadband", "0.5 °C", "0.277778 °C") in merge.waiting
    assert merge.effective[1].aircraft == pair()[1].aircraft


def test_acceptance_of_one_operation_is_told_for_itself() -> None:
    guarded = pair(fleet=changed(FLEET, ("basis: operator policy", "acceptance: guarded")))

    assert compare_and_merge(guarded, pair()).waiting == (
        waiting("Two-seat trainer, Departure: density altitude, acceptance", "guarded", "simple"),
    )
    assert compare_and_merge(pair(), guarded).tightened == (
        tightened("Two-seat trainer, Departure: density altitude, acceptance", "simple", "guarded"),
    )


def test_bands_that_differ_by_season_are_told_with_their_dates() -> None:
    before = fleet_of(
        "name: Winch, max_temperature_c: 40, near_band_c: 4",
        "name: Winch, max_temperature_c: 38, near_band_c: 5, valid_from: 2026-06-01",
    )
    after = before.replace("near_band_c: 5", "near_band_c: 3")

    assert compare_and_merge(pair(fleet=before), pair(fleet=after)).waiting == (
        waiting("glider, Winch: temperature, near band", "4 °C; 5 °C from 2026-06-01", "4 °C; 3 °C from 2026-06-01"),
    )


class TestTakenOut:
    def test_an_aircraft_taken_out_stays_in_force(self) -> None:
        read = pair(fleet=FLEET[: FLEET.index("  - id: tow-plane")])

        merge = compare_and_merge(pair(), read)

        assert merge.waiting == (waiting("Tow plane", "in force", "taken out"),)
        assert merge.effective[1].aircraft == pair()[1].aircraft

    def test_an_operation_taken_out_stays_in_force(self) -> None:
        start, end = FLEET.index("      - name: Departure"), FLEET.index("      - name: Solo")

        merge = compare_and_merge(pair(), pair(fleet=FLEET[:start] + FLEET[end:]))

        assert merge.waiting == (waiting("Two-seat trainer, Departure", "in force", "taken out"),)
        assert limits_by_row(merge.effective[1]) == limits_by_row(pair()[1])

    def test_an_operation_with_another_name_is_a_new_one_and_the_old_one_stays(self) -> None:
        merge = compare_and_merge(pair(), pair(fleet=changed(FLEET, ("name: Departure", "name: Take-off"))))

        assert merge.waiting == (waiting("Two-seat trainer, Departure", "in force", "taken out"),)
        assert merge.tightened == (tightened("Two-seat trainer, Take-off", "none", "added"),)
        assert len(limits_by_row(merge.effective[1])) == 4

    def test_a_quantity_taken_out_stays_in_force(self) -> None:
        merge = compare_and_merge(pair(), pair(fleet=changed(FLEET, ("        max_temperature_c: 45\n", ""))))

        assert merge.waiting == (waiting("Tow plane, Aerotow: temperature, limit", "45 °C", "taken out"),)
        assert merge.effective[1].aircraft == pair()[1].aircraft

    def test_what_has_run_out_may_go_without_acceptance(self) -> None:
        start, end = FLEET.index("      - name: Solo"), FLEET.index("  - id: tow-plane")
        read = pair(fleet=FLEET[:start] + FLEET[end:])

        assert compare_and_merge(pair(), read, today=date(2026, 9, 30)).waiting != ()
        assert compare_and_merge(pair(), read, today=date(2026, 10, 1)).effective == read

    def test_an_aircraft_whose_limits_have_all_run_out_may_go_without_acceptance(self) -> None:
        old = fleet_of("name: Winch, max_temperature_c: 40, valid_until: 2026-06-30")
        read = pair(fleet=FLEET)

        assert compare_and_merge(pair(fleet=old), read, today=date(2026, 7, 1)).effective == read
        assert compare_and_merge(pair(fleet=old), read).waiting == (waiting("glider", "in force", "taken out"),)

    def test_a_quantity_that_has_run_out_may_go_without_acceptance(self) -> None:
        still = "name: Winch, max_density_altitude_ft: 6000"
        old = fleet_of(still, "name: Winch, max_temperature_c: 40, valid_until: 2026-06-30")
        read = pair(fleet=fleet_of(still))

        assert compare_and_merge(pair(fleet=old), read, today=date(2026, 7, 1)).effective == read
        assert len(compare_and_merge(pair(fleet=old), read, today=date(2026, 6, 30)).waiting) == 1


def test_aircraft_of_one_name_are_told_apart_by_their_ids() -> None:
    twins = changed(FLEET, ("name: Tow plane", "name: Two-seat trainer"))

    merge = compare_and_merge(pair(fleet=twins), pair(fleet=changed(twins, ("6350", "6400"))))

    assert merge.waiting == (
        waiting("Two-seat trainer (trainer-2), Departure: density altitude, limit", "6,350 ft", "6,400 ft"),
    )


def test_several_changes_one_after_the_other_never_loosen() -> None:
    in_force = pair()
    for limit in ("6500", "6300", "6600", "6300.5"):
        in_force = compare_and_merge(in_force, pair(fleet=changed(FLEET, ("6350", limit)))).effective

    departure = limits_by_row(in_force[1])["trainer-2/Departure"]
    assert [limit.value for limit in departure] == [6300]
    last = compare_and_merge(in_force, pair(fleet=changed(FLEET, ("6350", "6600"))))
    assert last.waiting == (waiting("Two-seat trainer, Departure: density altitude, limit", "6,300 ft", "6,600 ft"),)


def test_a_file_put_back_takes_the_waiting_change_away() -> None:
    effective = compare_and_merge(pair(), pair(fleet=changed(FLEET, ("6350", "6500"), ("5600", "5700")))).effective

    back = compare_and_merge(effective, pair())

    assert back.effective == pair()
    assert (back.waiting, back.tightened) == ((), ())
