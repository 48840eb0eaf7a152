"""A changed profile against the one in force."""

from collections.abc import Callable
from dataclasses import fields, replace

from airfield_board.configuration.model import Humidity, Instruments, ObservationSettings, Profile
from airfield_board.configuration.setting_changes import ChangeNotes
from airfield_board.configuration.setting_texts import number_text
from airfield_board.units import UNIT_WORDS, ft_from_m

_HUMIDITY_RANK: dict[Humidity, int] = {"dry": 0, "auto": 1, "moist": 2}
"""Humid air is thinner, so what counts more of it never gives a lower density altitude."""


def merge_profiles(old: Profile, new: Profile, notes: ChangeNotes) -> Profile:
    """Return the profile that holds.

    Parameters
    ----------
    old, new
        In force, and as read.
    notes
        Takes down what waits and what acts.

    Returns
    -------
    Profile
        The new one, with the old values where the new ones are looser. A change of a time zone is neither looser nor
        tighter, but a wrong one makes old readings look fresh or the wrong day's limits count, so it waits too. All
        else acts as it is read.
    """
    elevation_m = notes.number(
        "elevation", old.elevation_m, new.elevation_m, text=_elevation_text(new), tighter="greater"
    )
    humidity_waits = notes.word(
        "density altitude",
        old.density_altitude,
        new.density_altitude,
        is_looser=_HUMIDITY_RANK[new.density_altitude] < _HUMIDITY_RANK[old.density_altitude],
    )
    acceptance_waits = notes.word("acceptance", old.acceptance, new.acceptance, is_looser=new.acceptance == "simple")
    zone_waits = notes.word("time zone of the airfield", old.time_zone, new.time_zone, is_looser=True)
    return replace(
        new,
        elevation_m=elevation_m,
        density_altitude=old.density_altitude if humidity_waits else new.density_altitude,
        acceptance=old.acceptance if acceptance_waits else new.acceptance,
        time_zone=old.time_zone if zone_waits else new.time_zone,
        observations=_merge_observations(old.observations, new.observations, notes),
    )


def _elevation_text(profile: Profile) -> Callable[[float], str]:
    def text(elevation_m: float) -> str:
        if profile.elevation_unit == "m":
            return f"{number_text(elevation_m)} m"
        return f"{number_text(ft_from_m(elevation_m))} ft"

    return text


def _minutes_text(time_min: float) -> str:
    return f"{number_text(time_min)} min"


def _merge_observations(old: ObservationSettings, new: ObservationSettings, notes: ChangeNotes) -> ObservationSettings:
    expected_every_min = notes.number(
        "time between observations", old.expected_every_min, new.expected_every_min, text=_minutes_text, tighter="less"
    )
    stale_after_min = notes.number(
        "age at which observations are stale",
        old.stale_after_min,
        new.stale_after_min,
        text=_minutes_text,
        tighter="less",
    )
    source = new
    if new.time_zone != old.time_zone:
        # The file and the zone its times are in belong together: the new file in the old zone, or the other way
        # round, could take an old reading for a fresh one.
        source = old
        notes.waits("observations", _source_text(old), _source_text(new))
    return replace(
        new,
        file=source.file,
        file_as_written=source.file_as_written,
        station=source.station,
        time_zone=source.time_zone,
        expected_every_min=expected_every_min,
        stale_after_min=stale_after_min,
        instruments=_merge_instruments(old.instruments, new.instruments, notes),
    )


def _source_text(observations: ObservationSettings) -> str:
    station = f", station {observations.station}" if observations.station else ""
    return f"{observations.file_as_written}{station}, times in {observations.time_zone}"


def _merge_instruments(old: Instruments, new: Instruments, notes: ChangeNotes) -> Instruments:
    merged: dict[str, float] = {}
    for field in fields(Instruments):
        words, unit = field.name.rsplit("_", 1)

        def text(value: float, unit: str = unit) -> str:
            return f"{number_text(value)} {UNIT_WORDS[unit]}"

        merged[field.name] = notes.number(
            words.replace("_", " ").replace("dewpoint", "dew point"),
            getattr(old, field.name),
            getattr(new, field.name),
            text=text,
            tighter="greater",
        )
    return Instruments(**merged)
