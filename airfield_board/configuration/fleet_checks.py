"""What several keys of a fleet file must have in common."""

from collections.abc import Iterator
from dataclasses import dataclass, field
from itertools import pairwise

from airfield_board.configuration.fields import HEAVIEST, PRESSURE_ALTITUDES_FT
from airfield_board.configuration.file_reading import given_twice, number_under, section_under, text_under
from airfield_board.configuration.model import Quantity, Unit
from airfield_board.configuration.wording import listed
from airfield_board.configuration.yaml_nodes import Document, Entry, Mapping, Scalar, Sequence, plain_number
from airfield_board.errors import Fault, shown

LIMIT_KEYS: dict[str, tuple[Quantity, Unit]] = {
    "max_density_altitude_ft": (Quantity.DENSITY_ALTITUDE, "ft"),
    "max_density_altitude_m": (Quantity.DENSITY_ALTITUDE, "m"),
    "max_pressure_altitude_ft": (Quantity.PRESSURE_ALTITUDE, "ft"),
    "max_pressure_altitude_m": (Quantity.PRESSURE_ALTITUDE, "m"),
    "max_temperature_c": (Quantity.TEMPERATURE, "c"),
    "max_temperature_f": (Quantity.TEMPERATURE, "f"),
    "max_isa_deviation_c": (Quantity.ISA_DEVIATION, "c"),
}
"""Quantity and unit of each key that is a limit."""

BAND_GROUPS = (
    ("near_band_ft", "near_band_m"),
    ("near_band_c", "near_band_f"),
    ("deadband_ft", "deadband_m"),
    ("deadband_c", "deadband_f"),
)
"""Keys of one band each."""
LIMIT_GROUPS = tuple(
    tuple(key for key, (quantity, _) in LIMIT_KEYS.items() if quantity is wanted) for wanted in Quantity
)
"""Keys of one quantity each."""
BY_WEIGHT_KEYS = ("by_weight_lb", "by_weight_kg")
"""Keys of tables by weight."""
_BY_PRESSURE_ALTITUDE = "by_pressure_altitude_ft"


def faults_between_keys(document: Document) -> Iterator[Fault]:
    """Every fault that shows only where keys are seen together; values that are wrong by themselves are passed over."""
    if document.root is None:
        return
    defaults = section_under(document.root, "defaults")
    if defaults is not None:
        yield from given_twice(document, defaults, *BAND_GROUPS)
    first_lines: dict[str, int] = {}
    for aircraft in _sections(document.root, "aircraft"):
        entry, identifier = aircraft.entry("id"), text_under(aircraft, "id")
        if entry is not None and identifier is not None:
            if identifier in first_lines:
                yield document.fault(
                    entry.line,
                    f"id {shown(identifier)} is that of the aircraft in line {first_lines[identifier]} too; "
                    "expected: an id of its own",
                )
            first_lines.setdefault(identifier, entry.line)
        alike: dict[str, _Alike] = {}
        for operation in _sections(aircraft, "operations"):
            yield from _operation_faults(document, operation)
            yield from _faults_among_entries(document, operation, alike)


def _sections(parent: Mapping, key: str) -> Iterator[Mapping]:
    entry = parent.entry(key)
    if entry is not None and isinstance(entry.node, Sequence):
        yield from (item for item in entry.node.items if isinstance(item, Mapping))


@dataclass(slots=True, kw_only=True)
class _Alike:
    """What was seen of the entries of one operation."""

    name: str
    line: int
    phase: str = ""
    phase_line: int = 0
    undated_line: int = 0
    other_spellings: set[str] = field(default_factory=set)


def _faults_among_entries(document: Document, operation: Mapping, alike: dict[str, _Alike]) -> Iterator[Fault]:
    name_entry, name = operation.entry("name"), text_under(operation, "name")
    if name_entry is None or name is None:
        return
    seen = alike.setdefault(" ".join(name.casefold().split()), _Alike(name=name, line=name_entry.line))
    if name != seen.name and name not in seen.other_spellings:
        seen.other_spellings.add(name)
        yield document.fault(
            name_entry.line,
            f"the operation {shown(name)} is spelt {shown(seen.name)} in line {seen.line}; "
            "expected: one spelling, so that the lowest limit of both counts",
        )
    phase_entry, phase = operation.entry("phase"), text_under(operation, "phase")
    if phase_entry is not None and phase is not None:
        if seen.phase and phase != seen.phase:
            yield document.fault(
                phase_entry.line,
                f"phase {shown(phase)} differs from {shown(seen.phase)} in line {seen.phase_line}; "
                "expected: one phase for all entries of an operation",
            )
        seen.phase, seen.phase_line = seen.phase or phase, seen.phase_line or phase_entry.line
    if operation.entry("valid_from") is None and operation.entry("valid_until") is None:
        if seen.undated_line:
            yield document.fault(
                name_entry.line,
                f"the operation {shown(name)} stands without dates in line {seen.undated_line} already; "
                "expected: valid_from or valid_until in all entries but one",
            )
        seen.undated_line = seen.undated_line or name_entry.line


def _operation_faults(document: Document, operation: Mapping) -> Iterator[Fault]:
    yield from given_twice(document, operation, *BAND_GROUPS, *LIMIT_GROUPS)
    # A misspelt limit is reported as such; that it is missing as well says nothing more.
    if not any(entry.key.casefold().startswith("max") for entry in operation.entries):
        yield document.fault(
            operation.line, f"the operation has no limit; expected: at least one of {listed(LIMIT_KEYS)}"
        )
    first, last = text_under(operation, "valid_from"), text_under(operation, "valid_until")
    last_entry = operation.entry("valid_until")
    # Days as texts of one length are in the order of time; others have a fault of their own.
    if first is not None and last is not None and last_entry is not None and len(first) == len(last) and last < first:
        yield document.fault(
            last_entry.line, f"valid_until {shown(last)} is before valid_from {shown(first)}; expected: not before it"
        )
    for entry in operation.entries:
        if entry.key in LIMIT_KEYS and isinstance(entry.node, Mapping):
            yield from _table_faults(document, entry, entry.node)


def _table_faults(document: Document, limit: Entry, table: Mapping) -> Iterator[Fault]:
    kinds = [entry for entry in table.entries if entry.key in (*BY_WEIGHT_KEYS, _BY_PRESSURE_ALTITUDE)]
    if not table.entries:
        yield document.fault(limit.line, f"{limit.key} has neither a number nor a table; expected: one of them")
    yield from given_twice(document, table, BY_WEIGHT_KEYS)
    by_altitude = next((entry for entry in kinds if entry.key == _BY_PRESSURE_ALTITUDE), None)
    if by_altitude is not None and len(kinds) > 1:
        yield document.fault(by_altitude.line, f"{limit.key} has two tables; expected: one of them")
    for entry in kinds:
        if isinstance(entry.node, Mapping):
            yield from _point_faults(document, entry, entry.node)


def _point_faults(document: Document, table: Entry, points: Mapping) -> Iterator[Fault]:
    by_weight = table.key in BY_WEIGHT_KEYS
    what = "weight" if by_weight else "pressure altitude"
    least, greatest = (0.0, HEAVIEST[table.key]) if by_weight else PRESSURE_ALTITUDES_FT
    places: dict[float, Entry] = {}
    for point in points.entries:
        place = plain_number(point.key)
        if place is None:
            yield document.fault(
                point.line, f"{table.key}: {shown(point.key)} is no {what}; expected: a plain decimal number"
            )
        elif place > greatest or place < least or (by_weight and place == 0):
            lower = "more than 0" if by_weight else f"at least {least:.0f}"
            yield document.fault(
                point.line,
                f"{table.key}: the {what} {shown(point.key)} is out of range; "
                f"expected: {lower} and at most {greatest:.0f}",
            )
        elif place in places:
            yield document.fault(
                point.line,
                f"{table.key}: the {what} {shown(point.key)} is given twice; it stands in line "
                f"{places[place].line} already",
            )
        else:
            places[place] = point
    if by_weight:
        yield from _rising_limits(document, table, [places[place] for place in sorted(places)], points)


def _rising_limits(document: Document, table: Entry, ordered: list[Entry], points: Mapping) -> Iterator[Fault]:
    for lighter, heavier in pairwise(ordered):
        light, heavy = number_under(points, lighter.key), number_under(points, heavier.key)
        if light is None or heavy is None or heavy < light:
            continue
        assert isinstance(heavier.node, Scalar)  # noqa: S101 - it holds a number
        yield document.fault(
            heavier.line,
            f"{table.key}: the limit {heavier.node.text} at {heavier.key} is not below the limit at {lighter.key}; "
            "expected: limits that fall as weight rises",
        )
