"""Reading a fleet: aircraft, their operations and limits."""

from collections.abc import Iterator, Sequence
from datetime import date
from pathlib import Path
from typing import Literal

from airfield_board.configuration.differences import difference_in_unit
from airfield_board.configuration.file_models import (
    AircraftSection,
    BandsSection,
    FleetFile,
    OperationSection,
    TemperatureTableC,
    TemperatureTableF,
    WeightTableKeys,
)
from airfield_board.configuration.file_reading import in_order, read_settings_file, text_and_hash
from airfield_board.configuration.fleet_checks import LIMIT_KEYS, faults_between_keys
from airfield_board.configuration.model import (
    Acceptance,
    Aircraft,
    Fleet,
    Limit,
    Operation,
    Phase,
    PressureAltitudeTable,
    Unit,
    WeightTable,
)
from airfield_board.configuration.validation import validate
from airfield_board.configuration.yaml_nodes import Document, Mapping
from airfield_board.configuration.yaml_reader import read_document
from airfield_board.errors import FileFaults

_Band = Literal["near_band", "deadband"]

_DEFAULT_BANDS: dict[tuple[_Band, Unit], float] = {
    ("near_band", "ft"): 500.0,
    ("deadband", "ft"): 150.0,
    ("near_band", "c"): 3.0,
    ("deadband", "c"): 0.5,
}
_DEFAULT_OFF_DELAY_MIN = 10.0
_UNITS_ALIKE: dict[Unit, tuple[Unit, Unit]] = {"ft": ("ft", "m"), "m": ("ft", "m"), "c": ("c", "f"), "f": ("c", "f")}


def load_fleet(path: Path, *, acceptance: Acceptance) -> Fleet:
    """Read a fleet.

    Parameters
    ----------
    path
        The file.
    acceptance
        The profile's: that of operations that do not give their own.

    Raises
    ------
    FileFaults
        With all that is wrong in it.
    """
    return fleet_from_text(read_settings_file(path), path, acceptance=acceptance)


def fleet_from_text(content: str | bytes, path: Path, *, acceptance: Acceptance) -> Fleet:
    """Read a fleet from its text.

    Parameters
    ----------
    content
        Text or bytes of the file.
    path
        Where it stands or stood; faults bear its name.
    acceptance
        The profile's: that of operations that do not give their own.

    Raises
    ------
    FileFaults
        With all that is wrong in it.
    """
    document = read_document(content, str(path))
    keys, faults = validate(FleetFile, document)
    faults = in_order((*document.faults, *faults, *faults_between_keys(document)))
    if keys is None or faults:
        raise FileFaults(faults)
    text, sha256 = text_and_hash(content)
    builder = _Builder(keys, document, acceptance)
    return Fleet(path=path, text=text, sha256=sha256, aircraft=builder.aircraft())


class _Builder:
    """Makes aircraft of the keys of a fleet file without fault."""

    def __init__(self, keys: FleetFile, document: Document, acceptance: Acceptance) -> None:
        self._keys = keys
        self._document = document
        self._acceptance = acceptance

    def aircraft(self) -> tuple[Aircraft, ...]:
        """Return all of them, in the order of the file."""
        return tuple(
            Aircraft(
                id=section.id,
                name=section.name or section.id,
                group=section.group or "",
                operations=tuple(self._operations(section, index)),
            )
            for index, section in enumerate(self._keys.aircraft)
        )

    def _operations(self, aircraft: AircraftSection, aircraft_index: int) -> Iterator[Operation]:
        entries: dict[str, list[tuple[OperationSection, Mapping]]] = {}
        for index, section in enumerate(aircraft.operations):
            node, _ = self._document.find(("aircraft", aircraft_index, "operations", index))
            assert isinstance(node, Mapping)  # noqa: S101 - the section was made of it
            entries.setdefault(section.name, []).append((section, node))
        for name, alike in entries.items():
            yield Operation(
                name=name,
                phase=_phase([section for section, _ in alike]),
                limits=tuple(limit for section, node in alike for limit in self._limits(section, node)),
            )

    def _limits(self, section: OperationSection, node: Mapping) -> Iterator[Limit]:
        places = [place for place in (section, self._keys.defaults) if place is not None]
        for entry in node.entries:
            if entry.key not in LIMIT_KEYS:
                continue
            quantity, unit = LIMIT_KEYS[entry.key]
            yield Limit(
                quantity=quantity,
                unit=unit,
                value=_value(getattr(section, entry.key)),
                near_band=_band("near_band", unit, places),
                deadband=_band("deadband", unit, places),
                off_delay_min=_off_delay_min(places),
                guarded=(section.acceptance or self._acceptance) == "guarded",
                basis=section.basis or "",
                source=section.source or "",
                notice=section.notice or "",
                valid_from=None if section.valid_from is None else date.fromisoformat(section.valid_from),
                valid_until=None if section.valid_until is None else date.fromisoformat(section.valid_until),
            )


def _phase(sections: Sequence[OperationSection]) -> Phase:
    """Return the phase that the entries of an operation give; entries that say nothing follow those that do."""
    return next((section.phase for section in sections if section.phase is not None), "departure")


def _value(
    written: float | WeightTableKeys[float] | TemperatureTableC | TemperatureTableF,
) -> float | WeightTable | PressureAltitudeTable:
    if isinstance(written, int | float):
        return float(written)
    if isinstance(written, TemperatureTableC | TemperatureTableF) and written.by_pressure_altitude_ft is not None:
        altitudes_ft, limits = _columns(written.by_pressure_altitude_ft)
        return PressureAltitudeTable(altitudes_ft=altitudes_ft, limits=limits)
    if written.by_weight_lb is not None:
        weights, limits = _columns(written.by_weight_lb)
        return WeightTable(weight_unit="lb", weights=weights, limits=limits)
    weights, limits = _columns(written.by_weight_kg or {})
    return WeightTable(weight_unit="kg", weights=weights, limits=limits)


def _columns(points: dict[str, float]) -> tuple[tuple[float, ...], tuple[float, ...]]:
    rows = sorted((float(key), float(limit)) for key, limit in points.items())
    return tuple(key for key, _ in rows), tuple(limit for _, limit in rows)


def _band(band: _Band, unit: Unit, places: Sequence[BandsSection]) -> float:
    """Return a band in the limit's unit: the operation's own, else the file's, else the program's."""
    alike = _UNITS_ALIKE[unit]
    for place in places:
        for written_unit in alike:
            value: float | None = getattr(place, f"{band}_{written_unit}")
            if value is not None:
                return difference_in_unit(value, written_unit, unit)
    return difference_in_unit(_DEFAULT_BANDS[band, alike[0]], alike[0], unit)


def _off_delay_min(places: Sequence[BandsSection]) -> float:
    return next((place.off_delay_min for place in places if place.off_delay_min is not None), _DEFAULT_OFF_DELAY_MIN)
