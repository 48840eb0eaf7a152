"""The board and a replay as text, for the terminal. No Qt."""

from collections.abc import Sequence
from zoneinfo import ZoneInfo

from airfield_board import ADVISES as ADVISES
from airfield_board.clock import time_from_us
from airfield_board.configuration.model import Fleet, Profile
from airfield_board.limits.rules import Episode, LimitChange
from airfield_board.limits.states import State
from airfield_board.observations.observation import Verdict
from airfield_board.session.board_state import BoardState, OperationLine
from airfield_board.session.replaying import Replay
from airfield_board.session.status import labels_of
from airfield_board.window import formatting

_UNUSED_SHOWN = 5


def text_board(state: BoardState) -> str:
    """Return the board as a table, with where the reading comes from and the caution."""
    zone = ZoneInfo(state.airfield.time_zone)
    lines = [
        f"{state.airfield.name}, {formatting.elevation(state.airfield.elevation_m, state.airfield.altitude_unit)}"
        f" - {formatting.stamp(state.assessed_at, zone)}",
        *_reading(state, zone),
        "",
        *_table(
            ("State", "Operation", "Limit", "Margin", "Hold above °C", ""),
            [_row(row, state, zone) for row in state.operations],
        ),
    ]
    if state.unused:
        lines += ["", "Rows not used today:"]
        for when, reason in state.unused[:_UNUSED_SHOWN]:
            lines.append(f"  {'no time' if when is None else formatting.clock(when, zone)}  {reason}")
        if len(state.unused) > _UNUSED_SHOWN:
            lines.append(f"  and {len(state.unused) - _UNUSED_SHOWN} more")
    return "\n".join([*lines, "", formatting.CAUTION, ADVISES, ""])


def _reading(state: BoardState, zone: ZoneInfo) -> list[str]:
    observation, air = state.observation, state.conditions
    if observation is None:
        return ["NO DATA: no observation that passes the checks."]
    number, words = formatting.age(state.assessed_at - observation.time)
    read = (
        f"Observed {formatting.time_near(observation.time, state.assessed_at, zone)}, {number} {words}, "
        f"{formatting.freshness_word(observation.freshness).lower()} "
        f"({formatting.source_line(observation)})"
    )
    if air is None:
        return [f"NO DATA: {read}"]
    unit = state.airfield.altitude_unit
    return [
        f"Density altitude {formatting.altitude(air.density_altitude_ft, unit)} {unit} "
        f"{formatting.uncertainty(air.uncertainty_ft, unit)}, "
        f"pressure altitude {formatting.altitude(air.pressure_altitude_ft, unit)} {unit}, "
        f"ISA deviation {formatting.deviation(air.isa_deviation_c, 'c')} °C",
        read,
    ]


def _row(row: OperationLine, state: BoardState, zone: ZoneInfo) -> tuple[str, ...]:
    shown = row.shown
    loud, quiet = formatting.next_change(shown, state.assessed_at, zone)
    hold_above = (
        "" if shown is None or shown.hold_above_c is None else formatting.hold_temperature(shown.hold_above_c, "c")
    )
    return (
        formatting.STATE_WORDS[row.state],
        formatting.full_name(row),
        formatting.limit_phrase(shown),
        formatting.margin_cell(shown, ""),
        hold_above,
        " - ".join(part for part in (loud, quiet) if part),
    )


def _table(head: Sequence[str], rows: Sequence[Sequence[str]]) -> list[str]:
    widths = [max(len(line[place]) for line in (head, *rows)) for place in range(len(head))]
    return [
        "  ".join(cell.ljust(width) for cell, width in zip(line, widths, strict=True)).rstrip()
        for line in (head, *rows)
    ]


def text_replay(outcome: Replay, profile: Profile, fleet: Fleet) -> str:
    """Return a replay as text: changes, episodes, the count of rows; times local."""
    zone = ZoneInfo(profile.time_zone)
    labels = labels_of(fleet)
    lines = [_change(change, labels, zone) for change in outcome.changes]
    if outcome.episodes:
        lines += ["", "Times on hold:"]
        lines += [_episode(episode, labels, zone) for episode in outcome.episodes]
    counted = ", ".join(f"{outcome.counts[verdict]:,} {verdict.name.lower()}" for verdict in Verdict)
    return "\n".join([*lines, "", f"{outcome.rows:,} rows: {counted}.", ADVISES, ""])


def _change(change: LimitChange, labels: dict[tuple[str, str], str], zone: ZoneInfo) -> str:
    was = "" if change.was is None else f"{formatting.STATE_WORDS[change.was]} to "
    value = ""
    if change.value is not None and change.state is not State.NO_DATA:
        value = f", {change.key.quantity} {formatting.value(change.value, change.unit)}"
    label = labels[change.key.aircraft, change.key.operation]
    when = formatting.stamp(time_from_us(change.time_us), zone)
    return f"{when}  {label}: {was}{formatting.STATE_WORDS[change.state]}{value}"


def _episode(episode: Episode, labels: dict[tuple[str, str], str], zone: ZoneInfo) -> str:
    end = "still on hold" if episode.end_us is None else formatting.stamp(time_from_us(episode.end_us), zone)
    label = labels[episode.key.aircraft, episode.key.operation]
    return (
        f"{label}: {formatting.stamp(time_from_us(episode.start_us), zone)} - {end}, "
        f"{formatting.minutes(episode.minutes)} min, peak {formatting.value(episode.peak, episode.unit)}, "
        f"worst margin {formatting.margin(episode.worst_margin, episode.unit)}"
    )
