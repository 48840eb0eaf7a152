"""The board as JSON, and the lines of a replay: the words that scripts rely on."""

from collections.abc import Mapping
from datetime import datetime

from airfield_board import ADVISES
from airfield_board.clock import iso_utc, time_from_us
from airfield_board.history.records import Json
from airfield_board.limits.rules import Episode, LimitChange
from airfield_board.limits.states import State
from airfield_board.session.board_state import (
    AircraftLine,
    BoardState,
    Clearing,
    Conditions,
    CurrentObservation,
    LimitLine,
    OperationLine,
)

# Kept until the outlook is there: a script that reads these keys finds "not known", never a guess.
_NO_OUTLOOK: Mapping[str, Json] = {
    "hold_probability": None,
    "hold_at": None,
    "hold_window": None,
    "clear_at": None,
    "clear_window": None,
}


def board_json(state: BoardState) -> dict[str, Json]:
    """Return the board as plain values; numbers unrounded, times in UTC, null where there is nothing to say."""
    return {
        "airfield": state.airfield.name,
        "assessed_at": iso_utc(state.assessed_at),
        "observation": _observation(state.observation),
        "conditions": None if state.conditions is None else _conditions(state.conditions),
        "aircraft": [_aircraft(aircraft) for aircraft in state.aircraft],
        "advice": ADVISES,
    }


def _when(time: datetime | None) -> str | None:
    return None if time is None else iso_utc(time)


def _observation(observation: CurrentObservation | None) -> dict[str, Json]:
    if observation is None:
        return {
            "time": None,
            "age_min": None,
            "freshness": "missing",
            "altimeter_setting_hpa": None,
            "temperature_c": None,
            "dewpoint_c": None,
        }
    return {
        "time": iso_utc(observation.time),
        "age_min": observation.age_min,
        "freshness": observation.freshness.value,
        "altimeter_setting_hpa": observation.altimeter_setting_hpa,
        "temperature_c": observation.temperature_c,
        "dewpoint_c": observation.dewpoint_c,
        "dewpoint_used_c": observation.dewpoint_used_c,
        "humidity": observation.dewpoint_use.name.lower(),
        "initials": observation.initials,
    }


def _conditions(conditions: Conditions) -> dict[str, Json]:
    return {
        "station_pressure_hpa": conditions.station_pressure_hpa,
        "pressure_altitude_ft": conditions.pressure_altitude_ft,
        "density_altitude_ft": conditions.density_altitude_ft,
        "density_altitude_dry_ft": conditions.density_altitude_dry_ft,
        "uncertainty_ft": conditions.uncertainty_ft,
        "isa_deviation_c": conditions.isa_deviation_c,
        "density_ratio": conditions.density_ratio,
        "rate_ft_per_h": conditions.rate_ft_per_h,
    }


def _aircraft(aircraft: AircraftLine) -> dict[str, Json]:
    return {
        "id": aircraft.id,
        "name": aircraft.name,
        "state": aircraft.state.value,
        "operations": [_operation(operation) for operation in aircraft.operations],
    }


def _operation(operation: OperationLine) -> dict[str, Json]:
    return {
        "name": operation.name,
        "state": operation.state.value,
        "shown": None if operation.shown is None else operation.shown.quantity.value,
        "limits": [_limit(limit) for limit in operation.limits],
    }


def _limit(limit: LimitLine) -> dict[str, Json]:
    return {
        "quantity": limit.quantity.value,
        "state": limit.state.value,
        "limit": limit.limit,
        "unit": limit.unit,
        "margin": limit.margin,
        "value": limit.value,
        "since": _when(limit.since),
        "hold_temperature_c": limit.hold_temperature_c,
        "greatest_weight_lb": limit.greatest_weight_lb,
        "reason": limit.reason or None,
        "was": None if limit.was is None else limit.was.value,
        "clearing": None if limit.clearing is None else _clearing(limit.clearing),
        "outlook": _NO_OUTLOOK,
    }


def _clearing(clearing: Clearing) -> dict[str, Json]:
    return {
        "needs": clearing.needs,
        "for_min": clearing.for_min,
        "since": _when(clearing.since),
        "earliest": _when(clearing.earliest),
    }


def change_json(change: LimitChange) -> dict[str, Json]:
    """Return a line of a replay: a change of a limit's state."""
    return {
        "kind": "change",
        "time": iso_utc(time_from_us(change.time_us)),
        "aircraft": change.key.aircraft,
        "operation": change.key.operation,
        "quantity": change.key.quantity.value,
        "unit": change.unit,
        "from": None if change.was is None else change.was.value,
        "to": change.state.value,
        "value": None if change.state is State.NO_DATA else change.value,
    }


def episode_json(episode: Episode) -> dict[str, Json]:
    """Return a line of a replay: an exceedance episode."""
    return {
        "kind": "episode",
        "aircraft": episode.key.aircraft,
        "operation": episode.key.operation,
        "quantity": episode.key.quantity.value,
        "unit": episode.unit,
        "start": iso_utc(time_from_us(episode.start_us)),
        "end": None if episode.end_us is None else iso_utc(time_from_us(episode.end_us)),
        "peak": episode.peak,
        "worst_margin": episode.worst_margin,
        "minutes": episode.minutes,
        "minutes_without_data": episode.minutes_without_data,
    }
