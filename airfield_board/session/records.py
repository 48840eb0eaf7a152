"""What the recorder writes down, as bodies of records, and rows read back from them."""

from collections.abc import Iterable, Iterator, Mapping, Sequence
from dataclasses import asdict
from datetime import datetime

import numpy as np

from airfield_board.clock import iso_utc, us_from_time
from airfield_board.configuration.model import Fleet, Profile
from airfield_board.configuration.setting_changes import SettingChange, TightenedChange
from airfield_board.history.records import Json, Record, RecordKind, StoredRecord
from airfield_board.limits.rules import Episode, LimitChange
from airfield_board.observations.observation import NO_TIME_US, CheckedTable, DewpointUse, ObservationTable, Verdict
from airfield_board.session.judge import Judged

TYPED_IN = "typed"
"""The format of a row that a person typed in."""

VALUES = (
    "altimeter_hpa",
    "temperature_c",
    "dewpoint_c",
    "elevation_m",
    "temperature_resolution_c",
    "dewpoint_resolution_c",
)


def _number(value: float) -> float | None:
    return None if np.isnan(value) else float(value)


def observation_records(judged: Judged, form: str, at: datetime, *, step: int = 0) -> list[Record]:
    """Return the records of checked rows, used and unused, in order of time.

    Parameters
    ----------
    form
        The format they were read in, or `TYPED_IN`.
    at
        When they were read.
    step
        Tells apart rows of several steps at one time of the clock.
    """
    checked = judged.checked
    read_us = us_from_time(at)
    bodies = [_observation_body(checked, judged, row, form, read_us) for row in range(len(checked))]
    if step:
        bodies = [{**body, "step": step} for body in bodies]
    return [Record(kind=RecordKind.OBSERVATION, at=at, body=body) for body in bodies]


def _observation_body(checked: CheckedTable, judged: Judged, row: int, form: str, read_us: int) -> dict[str, Json]:
    rows = checked.rows
    verdict = Verdict(int(checked.verdict[row]))
    time_us = int(rows.time_us[row])
    body: dict[str, Json] = {
        "time": None if time_us == NO_TIME_US else time_us,
        "read": read_us,
        "raw": rows.raw[row],
        "pos": int(rows.position[row]),
        "format": form,
        "values": {name: _number(getattr(rows, name)[row]) for name in VALUES},
        "verdict": verdict.name.lower(),
        "late": bool(checked.late[row]) or None,
        "initials": rows.initials or None,
        "fault": rows.faults.get(row),
        "reason": checked.reason.get(row),
        "restart": bool(checked.restart[row]) or None,
    }
    if verdict is not Verdict.REJECTED:
        body["use"] = int(checked.dewpoint_use[row])
        body["da_ft"] = _number(float(judged.conditions.density_altitude_ft[row]))
        body["u_ft"] = _number(float(judged.conditions.uncertainty_ft[row]))
        if checked.dewpoint_use[row] in (DewpointUse.CARRIED, DewpointUse.ASSUMED):
            body["dewpoint_used_c"] = _number(float(checked.dewpoint_used_c[row]))
    return body


def change_body(change: LimitChange) -> dict[str, Json]:
    """Return the body of a limit's change."""
    return {
        "scope": "limit",
        "time": change.time_us,
        "aircraft": change.key.aircraft,
        "operation": change.key.operation,
        "quantity": change.key.quantity.value,
        "unit": change.unit,
        "from": None if change.was is None else change.was.value,
        "to": change.state.value,
        "value": change.value,
        "limit": change.limit,
    }


def episode_body(episode: Episode) -> dict[str, Json]:
    """Return the body of an episode that has ended."""
    return {
        "aircraft": episode.key.aircraft,
        "operation": episode.key.operation,
        "quantity": episode.key.quantity.value,
        "unit": episode.unit,
        "start": episode.start_us,
        "end": episode.end_us,
        "peak": episode.peak,
        "worst_margin": episode.worst_margin,
        "minutes": episode.minutes,
        "minutes_without_data": episode.minutes_without_data,
        "limit": episode.limit,
    }


def change_records(changes: Iterable[LimitChange], ended: Iterable[Episode], at: datetime) -> list[Record]:
    """Return the records of changes of limits, and of episodes that ended."""
    return [
        *(Record(kind=RecordKind.CHANGE, at=at, body=change_body(change)) for change in changes),
        *(Record(kind=RecordKind.EPISODE, at=at, body=episode_body(episode)) for episode in ended),
    ]


def configuration_records(
    profile: Profile,
    fleet: Fleet,
    at: datetime,
    *,
    waiting: Sequence[SettingChange] = (),
    tightened: Sequence[TightenedChange] = (),
) -> list[Record]:
    """Return the records of a version of the settings: full text and hash, and with the fleet's what it changed.

    Parameters
    ----------
    waiting
        What it loosens, which waits for acceptance. With none it is in force as it stands, so that nobody needs the
        versions before it to know what is in force.
    tightened
        What it tightened at once.
    """
    changed: dict[str, Json] = {
        "waiting": [asdict(change) for change in waiting],
        "tightened": [asdict(change) for change in tightened],
    }
    return [
        Record(
            kind=RecordKind.CONFIGURATION,
            at=at,
            body={
                "kind": kind,
                "name": str(path),
                "sha256": sha256,
                "text": text,
                "settled": not waiting,
                **(changed if kind == "fleet" else {}),
            },
        )
        for kind, path, sha256, text in (
            ("profile", profile.path, profile.sha256, profile.text),
            ("fleet", fleet.path, fleet.sha256, fleet.text),
        )
    ]


def table_from_records(records: Sequence[Record | StoredRecord]) -> ObservationTable:
    """Return recorded observations as rows not yet checked, in the order in which they were recorded.

    All must have been judged in one step, and typed in by one person, or by nobody.
    """
    bodies = [record.body for record in records]
    values = [_mapping(body["values"]) for body in bodies]

    def column(name: str) -> np.ndarray[tuple[int], np.dtype[np.float64]]:
        return np.array([np.nan if value.get(name) is None else value[name] for value in values], dtype=np.float64)

    return ObservationTable(
        time_us=np.array([NO_TIME_US if body.get("time") is None else body["time"] for body in bodies], dtype=np.int64),
        altimeter_hpa=column("altimeter_hpa"),
        temperature_c=column("temperature_c"),
        dewpoint_c=column("dewpoint_c"),
        elevation_m=column("elevation_m"),
        temperature_resolution_c=column("temperature_resolution_c"),
        dewpoint_resolution_c=column("dewpoint_resolution_c"),
        position=np.array([body.get("pos", 0) for body in bodies], dtype=np.int64),
        raw=[str(body["raw"]) for body in bodies],
        faults={row: str(body["fault"]) for row, body in enumerate(bodies) if body.get("fault")},
        initials=str(bodies[0].get("initials") or "") if bodies else "",
    )


def judged_together(one: Record | StoredRecord, other: Record | StoredRecord) -> bool:
    """Whether two observations that were recorded one after the other were judged in one step."""
    same = all(one.body.get(key) == other.body.get(key) for key in ("read", "step"))
    return same and (one.body.get("format") == TYPED_IN) == (other.body.get("format") == TYPED_IN)


def observation_steps(records: Iterable[Record]) -> Iterator[tuple[ObservationTable, str]]:
    """Yield the observations of some records, rows of one step together, with their format."""
    step: list[Record] = []
    for record in records:
        if record.kind is not RecordKind.OBSERVATION:
            continue
        if step and not judged_together(step[-1], record):
            yield table_from_records(step), str(step[0].body["format"])
            step = []
        step.append(record)
    if step:
        yield table_from_records(step), str(step[0].body["format"])


def _mapping(value: Json) -> Mapping[str, Json]:
    return value if isinstance(value, Mapping) else {}


def empty_table() -> ObservationTable:
    """Return no rows at all."""
    return table_from_records(())


def typed_row(
    time: datetime, altimeter_hpa: float, temperature_c: float, dewpoint_c: float | None, initials: str
) -> ObservationTable:
    """Return an observation that a person typed in as a row."""
    dewpoint = "no dew point" if dewpoint_c is None else f"dew point {dewpoint_c!r} C"
    unknown = np.array([np.nan])
    return ObservationTable(
        time_us=np.array([us_from_time(time)], dtype=np.int64),
        altimeter_hpa=np.array([altimeter_hpa]),
        temperature_c=np.array([temperature_c]),
        dewpoint_c=np.array([np.nan if dewpoint_c is None else dewpoint_c]),
        elevation_m=unknown,
        temperature_resolution_c=unknown,
        dewpoint_resolution_c=unknown,
        position=np.array([0], dtype=np.int64),
        raw=[
            f"{iso_utc(time)} altimeter {altimeter_hpa!r} hPa, temperature {temperature_c!r} C, {dewpoint}, {initials}"
        ],
        initials=initials,
    )
