"""The kinds of values that settings files hold: what each may be, for checks and JSON Schema alike.

The ranges are common sense with room to spare, no source: they are there to catch slips such as a digit too many, which
would put a limit out of reach for good.
"""

import re
import unicodedata
from datetime import date
from typing import Annotated, Any
from zoneinfo import ZoneInfo, ZoneInfoNotFoundError, available_timezones

from pydantic import AfterValidator, BaseModel, ConfigDict, Field, WithJsonSchema

from airfield_board.configuration.wording import suggestion
from airfield_board.errors import shown

_INVISIBLE = {"Cc", "Cf", "Cs", "Zl", "Zp"}


class FileSection(BaseModel):
    """Keys that belong together: no others are taken, and no value is turned into another type."""

    model_config = ConfigDict(extra="forbid", strict=True, frozen=True, allow_inf_nan=False)


def _visible(text: str) -> str:
    unwanted = next((character for character in text if unicodedata.category(character) in _INVISIBLE), None)
    if unwanted is not None:
        raise ValueError(f"an invisible character (U+{ord(unwanted):04X}) stands in {shown(text)}; take it out")
    return text


def _name(text: str) -> str:
    if not text.strip():
        raise ValueError("it is empty; a name is expected")
    if text != text.strip():
        raise ValueError(f"{shown(text)} begins or ends with a blank; take it away")
    return _visible(text)


def _remark(text: str) -> str:
    """Fold the lines of a longer text into one, as screens show it."""
    return _visible(" ".join(text.split()))


def _matches(pattern: str, expected: str) -> AfterValidator:
    compiled = re.compile(pattern, re.ASCII)

    def check(text: str) -> str:
        if compiled.search(text) is None or text.endswith("\n"):
            raise ValueError(f"{shown(text)} is not possible here; expected: {expected}")
        return text

    return AfterValidator(check)


def _time_zone(name: str) -> str:
    try:
        ZoneInfo(name)
    except (ZoneInfoNotFoundError, ValueError, OSError) as error:
        near = suggestion(name, available_timezones())
        hint = f"; did you mean {near}?" if near else ""
        raise ValueError(
            f"{shown(name)} is no time zone that this machine knows{hint} "
            "(expected: a name such as Europe/Vienna or Etc/GMT+8)"
        ) from error
    return name


def _day(text: str) -> str:
    try:
        date.fromisoformat(text if re.fullmatch(_DAY_PATTERN, text, re.ASCII) else "")
    except ValueError as error:
        raise ValueError(f"{shown(text)} is no day; expected: year-month-day, such as 2026-06-01") from error
    return text


_STATION_PATTERN = "^[A-Z0-9]{4}$"
_ID_PATTERN = "^[A-Za-z0-9][A-Za-z0-9._-]{0,63}$"
_DAY_PATTERN = "^[0-9]{4}-[0-9]{2}-[0-9]{2}$"
_WEIGHT_PATTERN = r"^(0|[1-9][0-9]*)(\.[0-9]+)?$"
_ALTITUDE_PATTERN = r"^-?(0|[1-9][0-9]*)(\.[0-9]+)?$"


def _schema_number(number: int) -> int:
    if number != 1:
        raise ValueError(f"this program reads files of schema 1, not {number}")
    return number


def _local_path(text: str) -> str:
    if "://" in text:
        raise ValueError("a web address or database URL stands here; expected: the path of a file")
    return _name(text)


def _history_place(text: str) -> str:
    scheme, separator, place = text.partition("://")
    if not separator:
        return _name(text)
    # What stands after the scheme may hold a password, so no message repeats it.
    if scheme.casefold() != "sqlite":
        raise ValueError(f"a history at {shown(scheme + '://')} is not supported yet; expected: the path of a file")
    if not place.startswith("/") or place in ("/", "/:memory:") or "?" in place:
        raise ValueError("expected: the path of a file, or sqlite:/// and a path, without anything after it")
    return _name(text)


SchemaNumber = Annotated[int, AfterValidator(_schema_number), Field(json_schema_extra={"const": 1})]
Name = Annotated[
    str,
    Field(max_length=120, json_schema_extra={"pattern": r"^[^\s\u0000-\u001f](.*[^\s\u0000-\u001f])?$"}),
    AfterValidator(_name),
]
Remark = Annotated[str, Field(max_length=1000), AfterValidator(_remark)]
FilePath = Annotated[str, Field(max_length=1000, json_schema_extra={"minLength": 1}), AfterValidator(_local_path)]
HistoryPlace = Annotated[
    str, AfterValidator(_history_place), Field(max_length=1000, json_schema_extra={"minLength": 1})
]
TimeZone = Annotated[str, AfterValidator(_time_zone), Field(json_schema_extra={"minLength": 1})]
Station = Annotated[
    str,
    _matches(_STATION_PATTERN, "four capital letters or digits, such as ZZCM"),
    Field(json_schema_extra={"pattern": _STATION_PATTERN}),
]
Identifier = Annotated[
    str,
    _matches(_ID_PATTERN, "letters, digits, '-', '_' and '.', at most 64, a letter or digit first"),
    Field(json_schema_extra={"pattern": _ID_PATTERN}),
]
# Without a type, so that days pass which a YAML 1.1 reader has already made into dates: its users can check files too.
Day = Annotated[
    str,
    AfterValidator(_day),
    WithJsonSchema(
        {"pattern": _DAY_PATTERN, "not": {"type": ["number", "boolean", "array", "object", "null"]}}, mode="validation"
    ),
]

Latitude = Annotated[float, Field(ge=-90, le=90)]
Longitude = Annotated[float, Field(ge=-180, le=180)]
LOWEST_ELEVATION_FT, HIGHEST_ELEVATION_FT = -1400.0, 20000.0
ElevationFt = Annotated[float, Field(ge=LOWEST_ELEVATION_FT, le=HIGHEST_ELEVATION_FT)]
ElevationM = Annotated[float, Field(ge=-426.72, le=6096)]
PollSeconds = Annotated[float, Field(ge=0.5, le=3600)]
PeriodMin = Annotated[float, Field(gt=0, le=1440)]
OffDelayMin = Annotated[float, Field(ge=0, le=1440)]

AltimeterStepInhg = Annotated[float, Field(ge=0, le=1)]
AltimeterStepHpa = Annotated[float, Field(ge=0, le=33.9)]
TemperatureStepC = Annotated[float, Field(ge=0, le=10)]

BandFt = Annotated[float, Field(ge=0, le=20000)]
BandM = Annotated[float, Field(ge=0, le=6096)]
BandC = Annotated[float, Field(ge=0, le=50)]
BandF = Annotated[float, Field(ge=0, le=90)]

AltitudeLimitFt = Annotated[float, Field(ge=-5000, le=30000)]
AltitudeLimitM = Annotated[float, Field(ge=-1524, le=9144)]
TemperatureLimitC = Annotated[float, Field(ge=-60, le=60)]
TemperatureLimitF = Annotated[float, Field(ge=-76, le=140)]
DeviationLimitC = Annotated[float, Field(ge=-85, le=85)]

HEAVIEST = {"by_weight_lb": 2_000_000.0, "by_weight_kg": 907_184.0}
"""Greatest weight of a table, by its key; the two are about equal."""

PRESSURE_ALTITUDES_FT = (-5000.0, 30000.0)
"""Least and greatest pressure altitude of a table [ft]."""


def _keys_like(pattern: str) -> Any:  # noqa: ANN401 - pydantic's field information has no public type
    """Describe a table in JSON Schema by `propertyNames`, which also copes with readers that give numbers as keys."""
    return Field(min_length=2, json_schema_extra={"propertyNames": {"pattern": pattern}})


BY_WEIGHT = _keys_like(_WEIGHT_PATTERN)
BY_PRESSURE_ALTITUDE = _keys_like(_ALTITUDE_PATTERN)
