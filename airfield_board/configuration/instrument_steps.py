"""What is allowed and yet worth a warning: a deadband that one step of an instrument jumps over."""

from collections.abc import Iterator
from dataclasses import dataclass, field

from airfield_board.configuration.differences import base_unit, difference_in_unit
from airfield_board.configuration.fleet_checks import LIMIT_KEYS
from airfield_board.configuration.model import Fleet, Limit, Profile, Quantity, Unit
from airfield_board.configuration.yaml_nodes import Mapping
from airfield_board.configuration.yaml_reader import read_document
from airfield_board.errors import Fault
from airfield_board.units import UNIT_WORDS

# Derivatives of the standard atmosphere (ISO 2533: T0 288.15 K, L 0.0065 K/m, g0/(R L) = 5.25588, p0 1013.25 hPa) at
# sea level, rounded up. Density altitude goes with density to the power 1/4.25588: (T0/L) / 4.25588 / T0 = 118.6 ft/K,
# (T0/L) / 4.25588 / p0 = 33.7 ft/hPa. Pressure altitude: (T0/L) / 5.25588 / p0 = 27.3 ft/hPa. A degree of dew point at
# 25 °C is 1.9 hPa of vapour, so 0.21 K of virtual temperature. Elsewhere they differ by a tenth or two, which does not
# matter to a warning.
_DENSITY_ALTITUDE_FT_PER_C = 119.0
_DENSITY_ALTITUDE_FT_PER_HPA = 34.0
_DENSITY_ALTITUDE_FT_PER_DEWPOINT_C = 25.0
_PRESSURE_ALTITUDE_FT_PER_HPA = 27.4
_STANDARD_TEMPERATURE_C_PER_FT = 0.0019812

_METAR_STEP_C = 1.0


@dataclass(frozen=True, slots=True, kw_only=True)
class _Step:
    """One step of one reading, in the unit of what it moves (ft or °C)."""

    reading: str
    effect: float


@dataclass(slots=True, kw_only=True)
class _Group:
    """Limits of one quantity with one deadband."""

    line: int
    labels: list[str] = field(default_factory=list)


def warnings_of(profile: Profile, fleet: Fleet) -> tuple[Fault, ...]:
    """Say where one step of an instrument's resolution is more than a deadband.

    Parameters
    ----------
    profile
        With the resolutions. Where it names a METAR station, temperatures count in steps of 1 °C, as reports without
        tenths give them.
    fleet
        As read from its file.

    Returns
    -------
    tuple
        One warning for each quantity, deadband and reading, at the line of the first operation it is about.
    """
    groups: dict[tuple[Quantity, Unit, float], _Group] = {}
    for label, line, limit in _limits_with_lines(fleet):
        group = groups.setdefault((limit.quantity, limit.unit, limit.deadband), _Group(line=line))
        if label not in group.labels:
            group.labels.append(label)
    warnings: list[Fault] = []
    for (quantity, unit, deadband), group in groups.items():
        for step in _steps(profile, quantity):
            effect = difference_in_unit(step.effect, base_unit(unit), unit)
            if effect > deadband:
                message = _message(step.reading, effect, deadband, UNIT_WORDS[unit], group.labels)
                warnings.append(Fault(file=str(fleet.path), line=group.line, message=message))
    return tuple(sorted(warnings))


def _message(reading: str, effect: float, deadband: float, unit: str, labels: list[str]) -> str:
    more = f" and {len(labels) - 1} more" if len(labels) > 1 else ""
    return (
        f"one step of the {reading} moves the value by about {effect:.3g} {unit}, more than the deadband of "
        f"{deadband:.3g} {unit} of {labels[0]}{more}; a wider deadband keeps a hold from ending on one step"
    )


def _steps(profile: Profile, quantity: Quantity) -> Iterator[_Step]:
    instruments = profile.observations.instruments
    temperature_c, dewpoint_c = instruments.temperature_resolution_c, instruments.dewpoint_resolution_c
    altimeter_hpa = instruments.altimeter_resolution_hpa
    in_reports = ""
    if profile.observations.station:
        temperature_c, dewpoint_c = max(temperature_c, _METAR_STEP_C), max(dewpoint_c, _METAR_STEP_C)
        in_reports = " in reports without tenths"
    temperature = f"temperature ({temperature_c:g} °C{in_reports})"
    altimeter = f"altimeter setting ({altimeter_hpa:.3g} hPa)"
    if quantity is Quantity.DENSITY_ALTITUDE:
        yield _Step(reading=temperature, effect=temperature_c * _DENSITY_ALTITUDE_FT_PER_C)
        yield _Step(reading=altimeter, effect=altimeter_hpa * _DENSITY_ALTITUDE_FT_PER_HPA)
        if profile.density_altitude != "dry":
            yield _Step(
                reading=f"dew point ({dewpoint_c:g} °C{in_reports})",
                effect=dewpoint_c * _DENSITY_ALTITUDE_FT_PER_DEWPOINT_C,
            )
    elif quantity is Quantity.PRESSURE_ALTITUDE:
        yield _Step(reading=altimeter, effect=altimeter_hpa * _PRESSURE_ALTITUDE_FT_PER_HPA)
    else:
        yield _Step(reading=temperature, effect=temperature_c)
    if quantity is Quantity.ISA_DEVIATION:
        by_altitude = _PRESSURE_ALTITUDE_FT_PER_HPA * _STANDARD_TEMPERATURE_C_PER_FT
        yield _Step(reading=altimeter, effect=altimeter_hpa * by_altitude)


def _limits_with_lines(fleet: Fleet) -> Iterator[tuple[str, int, Limit]]:
    """Every limit with a label and the line of its key; they stand in the text in the order they were read in."""
    document = read_document(fleet.text, str(fleet.path))
    for index, aircraft in enumerate(fleet.aircraft):
        limits = {operation.name: iter(operation.limits) for operation in aircraft.operations}
        place = 0
        while isinstance(node := document.find(("aircraft", index, "operations", place))[0], Mapping):
            place += 1
            name = next(str(entry.node.plain()) for entry in node.entries if entry.key == "name")
            for entry in node.entries:
                if entry.key in LIMIT_KEYS:
                    yield f"{aircraft.name}, {name}", entry.line, next(limits[name])
