"""What a person types in as an observation: read from the fields, with what is wrong said in plain words.

It only helps to type right. What counts is what the recorder's checks say of it, the same as of a row of the file.
"""

import re
from dataclasses import dataclass
from datetime import UTC, datetime, timedelta
from typing import Literal
from zoneinfo import ZoneInfo

from airfield_board.observations.formats.values import plain_number
from airfield_board.observations.quality_judgement import (
    DEWPOINT_EXCESS_C,
    HIGHEST_ALTIMETER_HPA,
    HIGHEST_DEWPOINT_C,
    HIGHEST_TEMPERATURE_C,
    LOWEST_ALTIMETER_HPA,
    LOWEST_DEWPOINT_C,
    LOWEST_TEMPERATURE_C,
)
from airfield_board.session.board_state import AirfieldLine
from airfield_board.units import c_from_f, hpa_from_inhg
from airfield_board.window import formatting
from airfield_board.window.reading import FUTURE_TOLERANCE

_TIME_FORM = "%Y-%m-%d %H:%M"
_PRESSURES = ("hpa", "inhg")
_INITIALS = re.compile(r"[^\W_][\w .'-]{0,19}")


@dataclass(frozen=True, slots=True, kw_only=True)
class TypedObservation:
    """An observation as typed in, in the recorder's units."""

    time: datetime
    altimeter_hpa: float
    temperature_c: float
    dewpoint_c: float | None
    initials: str


@dataclass(frozen=True, slots=True, kw_only=True)
class Entry:
    """What the fields hold, read.

    Attributes
    ----------
    observation
        None while something is wrong or missing.
    problems
        What is wrong, a sentence each, in the order of the fields.
    reading
        How the fields are understood: UTC, age, hectopascals, degrees Celsius; empty while something is wrong.
    """

    observation: TypedObservation | None
    problems: tuple[str, ...]
    reading: str = ""


@dataclass(frozen=True, slots=True, kw_only=True)
class Fields:
    """The texts of the fields, as they stand."""

    time: str
    altimeter: str
    temperature: str
    dewpoint: str
    initials: str


def local_text(when: datetime, zone: ZoneInfo) -> str:
    """Write a time as the field has it: local, to the minute."""
    return f"{when.astimezone(zone):{_TIME_FORM}}"


def read_entry(fields: Fields, airfield: AirfieldLine, opened: datetime, now: datetime) -> Entry:
    """Read the fields.

    Parameters
    ----------
    airfield
        Its time zone and units.
    opened
        When the form was opened: the time meant while the time's field still says so.
    now
        Aware.
    """
    problems: list[str] = []
    zone = ZoneInfo(airfield.time_zone)
    time = _read_time(fields.time, zone, opened, now, problems)
    altimeter_hpa = _read_number("altimeter setting", fields.altimeter, airfield.altimeter_unit, problems)
    temperature_c = _read_number("temperature", fields.temperature, airfield.temperature_unit, problems)
    dewpoint_c = None
    if fields.dewpoint.strip():
        dewpoint_c = _read_number("dew point", fields.dewpoint, airfield.temperature_unit, problems)
    problems += _out_of_range(altimeter_hpa, temperature_c, dewpoint_c)
    initials = read_name(fields.initials)
    if not initials:
        problems.append("Your initials are missing.")
    if problems or time is None or altimeter_hpa is None or temperature_c is None:
        return Entry(observation=None, problems=tuple(problems))
    typed = TypedObservation(
        time=time, altimeter_hpa=altimeter_hpa, temperature_c=temperature_c, dewpoint_c=dewpoint_c, initials=initials
    )
    return Entry(observation=typed, problems=(), reading=_reading(typed, zone, now))


def read_name(text: str) -> str:
    """Return initials or a name, with single spaces; empty where it is none."""
    name = " ".join(text.split())
    return name if _INITIALS.fullmatch(name) else ""


def _read_number(what: str, text: str, unit: Literal["inhg", "hpa", "c", "f"], problems: list[str]) -> float | None:
    plain = text.strip().replace(formatting.MINUS, "-")
    words = formatting.UNIT_WORDS[unit]
    if not plain:
        problems.append(f"The {what} is missing ({words}).")
        return None
    value = plain_number(plain)
    if value is None:
        problems.append(f"The {what} must be a plain number in {words}, with a point before decimals: not “{text}”.")
        return None
    if unit == "inhg":
        return hpa_from_inhg(value)
    return c_from_f(value) if unit == "f" else value


def _out_of_range(altimeter_hpa: float | None, temperature_c: float | None, dewpoint_c: float | None) -> list[str]:
    problems = []
    for what, value, lowest, highest, unit in (
        ("altimeter setting", altimeter_hpa, LOWEST_ALTIMETER_HPA, HIGHEST_ALTIMETER_HPA, "hPa"),
        ("temperature", temperature_c, LOWEST_TEMPERATURE_C, HIGHEST_TEMPERATURE_C, "°C"),
        ("dew point", dewpoint_c, LOWEST_DEWPOINT_C, HIGHEST_DEWPOINT_C, "°C"),
    ):
        if value is not None and not lowest <= value <= highest:
            given, low, high = (formatting.number(each, 1) for each in (value, lowest, highest))
            problems.append(f"The {what}, {given} {unit}, is not between {low} and {high} {unit}.")
    if temperature_c is not None and dewpoint_c is not None and dewpoint_c > temperature_c + DEWPOINT_EXCESS_C:
        problems.append("The dew point is above the temperature.")
    return problems


def _read_time(text: str, zone: ZoneInfo, opened: datetime, now: datetime, problems: list[str]) -> datetime | None:
    """Read the local time.

    Of a time that the clock change makes double the earlier is taken: an observation never looks fresher than it is.
    """
    minute = opened.astimezone(UTC).replace(second=0, microsecond=0)
    if text.strip() == local_text(opened, zone):
        return minute
    try:
        local = datetime.strptime(text.strip(), _TIME_FORM).replace(tzinfo=zone)
        when = local.astimezone(UTC)
    except (ValueError, OverflowError):
        problems.append(f"The time must be local, like {local_text(opened, zone)}.")
        return None
    if when.astimezone(zone).replace(tzinfo=None) != local.replace(tzinfo=None):
        problems.append("The clock change skips this local time.")
        return None
    if when - now > FUTURE_TOLERANCE:
        problems.append("The time lies in the future.")
        return None
    return when


def _reading(typed: TypedObservation, zone: ZoneInfo, now: datetime) -> str:
    number, words = formatting.age(max(now - typed.time, timedelta(0)))
    both_units = (
        f"{formatting.altimeter(typed.altimeter_hpa, unit)} {formatting.UNIT_WORDS[unit]}" for unit in _PRESSURES
    )
    parts = [
        f"{formatting.stamp(typed.time, zone)}, {number} {words}",
        ", ".join(both_units),
        f"{formatting.temperature(typed.temperature_c, 'c')} °C",
        "no dew point" if typed.dewpoint_c is None else f"dew point {formatting.temperature(typed.dewpoint_c, 'c')} °C",
    ]
    return "; ".join(parts)
