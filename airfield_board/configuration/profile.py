"""Reading an airfield profile, and with it its fleet."""

from collections.abc import Iterator
from pathlib import Path

from airfield_board.configuration.file_models import ObservationsSection, ProfileFile
from airfield_board.configuration.file_reading import (
    given_twice,
    in_order,
    number_under,
    read_settings_file,
    section_under,
    text_and_hash,
    text_under,
)
from airfield_board.configuration.fleet import fleet_from_text, load_fleet
from airfield_board.configuration.model import Fleet, Instruments, ObservationSettings, Profile
from airfield_board.configuration.validation import validate
from airfield_board.configuration.yaml_nodes import Document, Mapping
from airfield_board.configuration.yaml_reader import read_document
from airfield_board.errors import Fault, FileFaults
from airfield_board.units import hpa_from_inhg, m_from_ft

_ALTIMETER_RESOLUTION_INHG = 0.01
_ALTIMETER_ACCURACY_INHG = 0.02
_EXPECTED_EVERY_MIN = 5.0
_STALE_AFTER_MIN = 15.0


def load_profile(path: Path) -> Profile:
    """Read an airfield profile; the fleet it names is not looked at.

    Parameters
    ----------
    path
        The file.

    Raises
    ------
    FileFaults
        With all that is wrong in it.
    """
    return profile_from_text(read_settings_file(path), path)


def profile_from_text(content: str | bytes, path: Path) -> Profile:
    """Read an airfield profile from its text.

    Parameters
    ----------
    content
        Text or bytes of the file.
    path
        Where it stands or stood: paths in it are relative to its folder, and faults bear its name.

    Raises
    ------
    FileFaults
        With all that is wrong in it.
    """
    profile, faults, _ = _read(content, path)
    if profile is None:
        raise FileFaults(faults)
    return profile


def load_airfield(profile_path: Path) -> tuple[Profile, Fleet]:
    """Read an airfield profile and the fleet it names.

    Parameters
    ----------
    profile_path
        The profile.

    Raises
    ------
    FileFaults
        With all that is wrong in the profile and, as far as it can be found, in the fleet.
    """
    profile, faults, document = _read(read_settings_file(profile_path), profile_path)
    if profile is not None:
        try:
            content = read_settings_file(profile.fleet_path)
        except FileFaults as unreadable:
            line = document.find(("fleet",))[1]
            raise FileFaults(
                document.fault(line, f"fleet: {fault.file}: {fault.message}") for fault in unreadable.faults
            ) from unreadable
        return profile, fleet_from_text(content, profile.fleet_path, acceptance=profile.acceptance)
    written = text_under(document.root, "fleet") if document.root is not None else None
    if written is None or "://" in written:
        raise FileFaults(faults)
    try:
        load_fleet(profile_path.parent / written, acceptance="simple")
    except FileFaults as more:
        raise FileFaults((*faults, *more.faults)) from more
    raise FileFaults(faults)


def _read(content: str | bytes, path: Path) -> tuple[Profile | None, tuple[Fault, ...], Document]:
    document = read_document(content, str(path))
    keys, faults = validate(ProfileFile, document)
    faults = in_order((*document.faults, *faults, *_faults_between_keys(document)))
    if keys is None or faults:
        return None, faults, document
    return _profile(keys, content, path), (), document


def _faults_between_keys(document: Document) -> Iterator[Fault]:
    root = document.root
    if root is None:
        return
    airfield = section_under(root, "airfield")
    if airfield is not None:
        yield from _airfield_faults(document, airfield)
    observations = section_under(root, "observations")
    if observations is not None:
        yield from _observations_faults(document, observations)


def _airfield_faults(document: Document, airfield: Mapping) -> Iterator[Fault]:
    yield from given_twice(document, airfield, ("elevation_ft", "elevation_m"))
    if not any(entry.key.startswith("elev") for entry in airfield.entries):
        line = document.find(("airfield",))[1]
        yield document.fault(line, "the elevation is missing; expected: elevation_ft or elevation_m")
    for key, other in (("latitude", "longitude"), ("longitude", "latitude")):
        entry = airfield.entry(key)
        if entry is not None and airfield.entry(other) is None:
            yield document.fault(entry.line, f"{key} stands without {other}; expected: both or neither")


def _observations_faults(document: Document, observations: Mapping) -> Iterator[Fault]:
    yield from given_twice(
        document,
        observations,
        ("altimeter_resolution_inhg", "altimeter_resolution_hpa"),
        ("altimeter_accuracy_inhg", "altimeter_accuracy_hpa"),
    )
    expected_entry, stale_entry = observations.entry("expected_every_min"), observations.entry("stale_after_min")
    expected = _EXPECTED_EVERY_MIN if expected_entry is None else number_under(observations, "expected_every_min")
    stale = _STALE_AFTER_MIN if stale_entry is None else number_under(observations, "stale_after_min")
    entry = stale_entry or expected_entry
    if entry is None or expected is None or stale is None or stale > expected:
        return
    said = [
        f"{key} ({value:g}{'' if given else ', where nothing is said'})"
        for key, value, given in (
            ("stale_after_min", stale, stale_entry is not None),
            ("expected_every_min", expected, expected_entry is not None),
        )
    ]
    yield document.fault(
        entry.line,
        f"{said[0]} is not above {said[1]}; expected: a longer time, or every reading would count as stale",
    )


def _profile(keys: ProfileFile, content: str | bytes, path: Path) -> Profile:
    text, sha256 = text_and_hash(content)
    airfield, observations = keys.airfield, keys.observations
    elevation_m = airfield.elevation_m
    if airfield.elevation_ft is not None:
        elevation_m = m_from_ft(airfield.elevation_ft)
    assert elevation_m is not None  # noqa: S101 - one of the two is there, or there was a fault
    in_hpa = observations.altimeter_resolution_hpa is not None or observations.altimeter_accuracy_hpa is not None
    return Profile(
        path=path,
        text=text,
        sha256=sha256,
        name=airfield.name,
        elevation_m=elevation_m,
        elevation_unit="m" if airfield.elevation_ft is None else "ft",
        latitude=airfield.latitude,
        longitude=airfield.longitude,
        time_zone=airfield.time_zone,
        altimeter_unit="hpa" if in_hpa else "inhg",
        temperature_unit="c",
        observations=ObservationSettings(
            file=(path.parent / observations.file).absolute(),
            file_as_written=observations.file,
            station=observations.station or "",
            note=observations.note or "",
            time_zone=observations.time_zone or airfield.time_zone,
            poll_s=observations.poll_s,
            expected_every_min=observations.expected_every_min,
            stale_after_min=observations.stale_after_min,
            instruments=instruments_of(observations),
        ),
        density_altitude=keys.density_altitude,
        acceptance=keys.acceptance,
        fleet_path=path.parent / keys.fleet,
        history=None if keys.history is None else _history_path(keys.history, path),
    )


def instruments_of(observations: ObservationsSection) -> Instruments:
    """Return the instruments as a profile states them, with the defaults where it does not."""
    return Instruments(
        altimeter_resolution_hpa=_in_hpa(
            observations.altimeter_resolution_hpa, observations.altimeter_resolution_inhg, _ALTIMETER_RESOLUTION_INHG
        ),
        altimeter_accuracy_hpa=_in_hpa(
            observations.altimeter_accuracy_hpa, observations.altimeter_accuracy_inhg, _ALTIMETER_ACCURACY_INHG
        ),
        temperature_resolution_c=observations.temperature_resolution_c,
        temperature_accuracy_c=observations.temperature_accuracy_c,
        dewpoint_resolution_c=observations.dewpoint_resolution_c,
        dewpoint_accuracy_c=observations.dewpoint_accuracy_c,
    )


def _in_hpa(value_hpa: float | None, value_inhg: float | None, otherwise_inhg: float) -> float:
    if value_hpa is not None:
        return value_hpa
    return hpa_from_inhg(otherwise_inhg if value_inhg is None else value_inhg)


def _history_path(written: str, path: Path) -> Path:
    scheme, separator, place = written.partition("://")
    # sqlite:///name is relative, sqlite:////folder/name is not: one stroke belongs to the URL.
    return (path.parent / (place.removeprefix("/") if separator else scheme)).absolute()
