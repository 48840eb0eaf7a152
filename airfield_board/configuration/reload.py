"""A changed profile or fleet: what it tightens acts at once, what it loosens waits for acceptance."""

from dataclasses import dataclass
from datetime import date

from airfield_board.configuration.fleet_merge import merge_fleets
from airfield_board.configuration.model import Fleet, Profile
from airfield_board.configuration.profile_merge import merge_profiles
from airfield_board.configuration.setting_changes import ChangeNotes, SettingChange, TightenedChange


@dataclass(frozen=True, slots=True, kw_only=True)
class Merge:
    """What holds after a change of the files.

    Attributes
    ----------
    effective
        Profile and fleet in force from now on: those read, with the old values wherever the read ones are looser.
        Path, text and hash are of the files read.
    waiting
        What waits for acceptance; empty: ``effective`` is what was read. Accepting means putting the pair read in
        force as it stands.
    tightened
        What acts at once because it is tighter.
    """

    effective: tuple[Profile, Fleet]
    waiting: tuple[SettingChange, ...]
    tightened: tuple[TightenedChange, ...]


def compare_and_merge(
    in_force: tuple[Profile, Fleet], read: tuple[Profile, Fleet], *, today: date | None = None
) -> Merge:
    """Compare the settings in force with the files as they were read.

    Parameters
    ----------
    in_force
        Profile and fleet that hold now, which may be the outcome of an earlier merge.
    read
        Profile and fleet as the files have them.
    today
        The airfield's local day: a temporary limit that has run out loosens nothing when it goes. None: all days
        count alike.

    Returns
    -------
    Merge
        Merging the outcome once more with the same files changes nothing.
    """
    notes = ChangeNotes()
    profile = merge_profiles(in_force[0], read[0], notes)
    fleet = merge_fleets(
        in_force[1],
        read[1],
        notes,
        acceptance_told=in_force[0].acceptance != read[0].acceptance,
        guarded_waits=profile.acceptance != read[0].acceptance,
        today=today,
    )
    return Merge(
        effective=(profile, fleet) if notes.waiting else read,
        waiting=tuple(notes.waiting),
        tightened=tuple(notes.tightened),
    )
