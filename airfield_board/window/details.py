"""All that is known of a row, put into words: each of its limits, and what the air costs an aircraft."""

import math
from collections.abc import Callable, Iterator, Sequence
from dataclasses import dataclass

from airfield_board.configuration.model import Quantity
from airfield_board.limits.states import State, worst
from airfield_board.session.board_state import LimitLine, OperationLine
from airfield_board.window import formatting
from airfield_board.window.reading import View

_NOT_KNOWN = "not known"
_NOT_GIVEN = "not given"


@dataclass(frozen=True, slots=True, kw_only=True)
class DetailLine:
    """One fact: what it is, what it amounts to, and where it comes from (empty where that is plain)."""

    label: str
    text: str
    source: str = ""


@dataclass(frozen=True, slots=True, kw_only=True)
class DetailSection:
    """Facts that belong together."""

    heading: str
    lines: tuple[DetailLine, ...]


@dataclass(frozen=True, slots=True, kw_only=True)
class Details:
    """All of one row, or of several that the board counts in one line.

    Attributes
    ----------
    title
        Which operation; of several how many.
    under
        The group, and the basis of what is shown: DEMO, NOT RECORDING ...; may be empty.
    state, next_change
        As the row has them.
    """

    title: str
    under: str
    state: State
    next_change: str
    sections: tuple[DetailSection, ...]

    @property
    def plain(self) -> str:
        """All of it as lines of text."""
        lines = [self.title, self.under, f"{formatting.STATE_WORDS[self.state]} {self.next_change}".strip()]
        for section in self.sections:
            lines += ["", section.heading]
            for line in section.lines:
                lines.append(f"{line.label}: {line.text}{f' ({line.source})' if line.source else ''}")
        return "\n".join(line for line in lines if line or line == "")


def details_of(rows: Sequence[OperationLine], view: View) -> Details:
    """Put rows into words.

    Parameters
    ----------
    rows
        At least one, as the view has them: in NO DATA where the reading is not trusted.
    """
    frames = [frame.value for frame in view.frames]
    if len(rows) == 1:
        (row,) = rows
        loud, quiet = formatting.next_change(row.shown, view.now, view.zone)
        title, under = formatting.full_name(row), [row.group, *frames]
        change = ", ".join(part for part in (loud, quiet) if part)
        sections = [_limit_section(line, view) for line in row.limits]
        if not row.limits:
            sections = [DetailSection(heading="Limits", lines=(DetailLine(label="Limit", text="none in force today"),))]
    else:
        title, under, change = f"{len(rows)} operations", frames, "no room on the board to list them"
        sections = [_limit_section(line, view, formatting.full_name(row)) for row in rows for line in row.limits]
    return Details(
        title=title,
        under=" · ".join(part for part in under if part),
        state=worst(row.state for row in rows),
        next_change=change,
        sections=(*sections, _air_section(view)),
    )


def _limit_section(line: LimitLine, view: View, whose: str = "") -> DetailSection:
    quantity = line.quantity.value
    heading = f"{whose}: {quantity}" if whose else quantity[0].upper() + quantity[1:]
    return DetailSection(heading=heading, lines=tuple(_limit_lines(line, view)))


def _limit_lines(line: LimitLine, view: View) -> Iterator[DetailLine]:
    unit = line.unit
    yield DetailLine(label="State", text=_state_words(line, view))
    yield DetailLine(label="Limit", text=_limit_words(line), source=_limit_source(line))
    if line.state is not State.NO_DATA:
        value = formatting.value(line.value, unit) if line.value is not None else _NOT_KNOWN
        yield DetailLine(label="Value", text=f"{value}{', uncertainty included' if line.guarded else ''}")
        yield DetailLine(label="Margin", text=formatting.margin_cell(line, ""))
        yield DetailLine(label="Hold above", text=_hold_above(line, view))
        if line.full_weight is not None:
            yield DetailLine(label="Greatest weight", text=_weight_words(line))
    if line.state is not State.GO:
        yield DetailLine(label="What clears it", text=_clearing_words(line, view))
    if line.gone_by is not None and line.state is not State.NO_DATA:
        gone = f"{formatting.clock(line.gone_by, view.zone)}, at the present rate of the density altitude"
        yield DetailLine(label="May be gone by", text=gone)
    yield DetailLine(label="Near band", text=formatting.band(line.near_band, line.unit))
    yield DetailLine(
        label="To clear a hold",
        text=f"{formatting.band(line.deadband, line.unit)} below the limit,"
        f" for {formatting.minutes(line.off_delay_min)} min",
    )
    yield DetailLine(
        label="Acceptance",
        text="guarded: value + uncertainty is compared" if line.guarded else "simple: the value itself is compared",
    )
    yield DetailLine(label="In force", text=formatting.days_in_force(line.valid_from, line.valid_until))
    if line.notice:
        yield DetailLine(label="Notice", text=line.notice)


def _state_words(line: LimitLine, view: View) -> str:
    since = f" since {formatting.time_near(line.since, view.now, view.zone)}" if line.since is not None else ""
    parts = [f"{formatting.STATE_WORDS[line.state]}{since}"]
    if line.state is State.NO_DATA:
        parts.append(formatting.was_phrase(line.was, line.was_at, view.now, view.zone))
        parts.append(line.reason or "no current observation")
    return ", ".join(part for part in parts if part)


def _limit_words(line: LimitLine) -> str:
    if line.limit is None:
        return _NOT_KNOWN
    words = formatting.value_of_limit(line.limit, line.unit)
    if line.full_weight is None:
        return words
    if line.state is State.HOLD:
        return f"{words}, at the least weight of its table"
    return f"{words}, at the greatest weight, {formatting.weight(line.full_weight, line.weight_unit)}"


def _limit_source(line: LimitLine) -> str:
    return f"basis: {line.basis or _NOT_GIVEN}; source: {line.source or _NOT_GIVEN}"


def _hold_above(line: LimitLine, view: View) -> str:
    if line.quantity is Quantity.PRESSURE_ALTITUDE:
        return "temperature does not matter to it"
    above = line.hold_above_c
    if above is None or not math.isfinite(above):
        return _NOT_KNOWN
    unit = view.state.airfield.temperature_unit
    return (
        f"{formatting.hold_temperature(above, unit)} {formatting.UNIT_WORDS[unit]},"
        " at the present altimeter setting and dew point"
    )


def _weight_words(line: LimitLine) -> str:
    if line.state is State.HOLD or line.greatest_weight is None:
        return "none may depart"
    return f"{formatting.weight(line.greatest_weight, line.weight_unit)} may depart now"


def _clearing_words(line: LimitLine, view: View) -> str:
    if line.state is State.NO_DATA:
        held = "; its hold goes on then, NO DATA never ends one" if line.was is State.HOLD else ""
        return f"a valid observation that can be compared{held}"
    if line.eases_at is not None:
        better = "GO" if line.state is State.NEAR else "NEAR LIMIT"
        return f"{better} at or below {formatting.value_of_limit(line.eases_at, line.unit)}"
    clearing = line.clearing
    if clearing is None:
        return _NOT_KNOWN
    needs = formatting.value_of_limit(clearing.needs, line.unit)
    words = f"at or below {needs} for {formatting.minutes(clearing.for_min)} min"
    if clearing.since is None or clearing.earliest is None:
        return f"{words}; not so yet"
    since = formatting.time_near(clearing.since, view.now, view.zone)
    if clearing.earliest <= view.now:
        return f"{words}; so since {since}, may clear at the next reading"
    return f"{words}; so since {since}, back {formatting.clock_up(clearing.earliest, view.zone)} at the earliest"


def _finite(value: float, words: Callable[[float], str]) -> str:
    return words(value) if math.isfinite(value) else _NOT_KNOWN


def _air_section(view: View) -> DetailSection:
    return DetailSection(heading="What the air costs now", lines=tuple(_air_lines(view)))


def _air_lines(view: View) -> Iterator[DetailLine]:
    state = view.state
    conditions, observation = state.conditions, state.observation
    if not view.trusted or conditions is None or observation is None:
        why = formatting.no_data_lines(view.reading.cause, state, view.now, view.zone)
        yield DetailLine(label="Air", text=", ".join((_NOT_KNOWN, *why)))
        return
    unit = state.airfield.altitude_unit
    yield DetailLine(
        label="Density altitude",
        text=f"{formatting.altitude(conditions.density_altitude_ft, unit)}"
        f" {formatting.uncertainty(conditions.uncertainty_ft, unit)} {unit}",
        source="standard atmosphere of ICAO and ISO 2533; uncertainty k = 2, by the GUM",
    )
    yield DetailLine(
        label="Density ratio",
        text=_finite(conditions.density_ratio, formatting.density_ratio),
        source="density over 1.225 kg/m³, the standard's at sea level (ISO 2533)",
    )
    yield DetailLine(
        label="True airspeed",
        text=_finite(conditions.true_airspeed_ratio, lambda ratio: f"{formatting.airspeed_ratio(ratio)} × indicated"),
        source="1/√(density ratio): equal dynamic pressure; compressibility left out",
    )
    yield DetailLine(
        label="Shaft power",
        text=_finite(
            conditions.shaft_power_ratio, lambda share: f"{formatting.power_share(share)} of that at sea level"
        ),
        source="normally aspirated engine, full throttle: Gagg and Farrar (1934), 1.132 × density ratio − 0.132",
    )
    when = formatting.time_near(observation.time, view.now, view.zone)
    yield DetailLine(label="Observed", text=when, source=formatting.source_line(observation))
