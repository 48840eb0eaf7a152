"""Numbers and words as the screen has them. Rounding never flatters: what is near a limit looks no farther from it.

All texts are plain; minus signs are U+2212, thousands have commas.
"""

import math
from datetime import date, datetime, timedelta
from decimal import ROUND_CEILING, ROUND_FLOOR, ROUND_HALF_EVEN, Decimal
from zoneinfo import ZoneInfo

from airfield_board.configuration.model import Quantity, Unit
from airfield_board.limits.states import State
from airfield_board.session.board_state import (
    BoardState,
    CurrentObservation,
    Freshness,
    LimitLine,
    OperationLine,
)
from airfield_board.units import EQUAL, f_difference_from_c, f_from_c, ft_from_m, inhg_from_hpa, m_from_ft
from airfield_board.units import UNIT_WORDS as UNIT_WORDS
from airfield_board.window.reading import Cause

MINUS = "\N{MINUS SIGN}"
DASH = "\N{EM DASH}"
CAUTION = "Limits of the air only: not runway, wind, load or surface. HOLD: do not begin."
UNIVERSAL = ZoneInfo("UTC")
_EQUAL = Decimal(str(EQUAL))
STEP: dict[str, Decimal] = {"ft": Decimal(10), "m": Decimal(5), "c": Decimal("0.1"), "f": Decimal("0.1")}
"""Steps of rounding on screens; those of metres and degrees are about as fine as 10 ft."""
WEIGHT_STEP: dict[str, Decimal] = {"lb": Decimal(10), "kg": Decimal(5), "": Decimal(10)}
STEADY_FT_PER_H = 50.0

STATE_WORDS: dict[State, str] = {
    State.GO: "GO",
    State.NEAR: "NEAR LIMIT",
    State.REDUCED: "REDUCED",
    State.HOLD: "HOLD",
    State.NO_DATA: "NO DATA",
}
_DAYS = ("Mon", "Tue", "Wed", "Thu", "Fri", "Sat", "Sun")
_MONTHS = ("Jan", "Feb", "Mar", "Apr", "May", "Jun", "Jul", "Aug", "Sep", "Oct", "Nov", "Dec")


def _steps(value: float, step: Decimal, rounding: str) -> Decimal:
    return (Decimal(value) / step).to_integral_value(rounding=rounding) * step


def rounded_up(value: float, step: Decimal) -> Decimal:
    """Round toward plus infinity to whole steps; what lies under `EQUAL` above a step counts as the step."""
    nearest = _steps(value, step, ROUND_HALF_EVEN)
    return nearest if abs(Decimal(value) - nearest) < _EQUAL else _steps(value, step, ROUND_CEILING)


def rounded_down(value: float, step: Decimal) -> Decimal:
    """Round toward minus infinity to whole steps; what lies under `EQUAL` below a step counts as the step."""
    nearest = _steps(value, step, ROUND_HALF_EVEN)
    return nearest if abs(Decimal(value) - nearest) < _EQUAL else _steps(value, step, ROUND_FLOOR)


def number(value: Decimal | float, decimals: int = 0, *, sign: bool = False) -> str:
    """Write a number with commas, a true minus, and with ``sign`` a plus; zero has neither."""
    text = f"{abs(value):,.{decimals}f}"
    if not any(figure in "123456789" for figure in text):
        return text
    return (MINUS if value < 0 else "+" if sign else "") + text


def altitude(value_ft: float, unit: str = "ft") -> str:
    """Density or pressure altitude, rounded up: ``6,830``."""
    return number(rounded_up(value_ft if unit == "ft" else m_from_ft(value_ft), STEP[unit]))


def elevation(value_m: float, unit: str) -> str:
    """Elevation of the field, nearest whole: ``4,120 ft``."""
    return f"{number(ft_from_m(value_m) if unit == 'ft' else value_m)} {unit}"


def uncertainty(value_ft: float, unit: str = "ft") -> str:
    """Write the expanded uncertainty, rounded up: ``±60``."""
    return "±" + altitude(value_ft, unit)


def margin(value: float, unit: Unit) -> str:
    """Margin, rounded down, always signed: ``+120``, ``−480``, ``+11.6``."""
    return number(rounded_down(value, STEP[unit]), 0 if unit in ("ft", "m") else 1, sign=True)


def rate(value_ft_per_h: float, unit: str = "ft") -> str:
    """Rate of the density altitude, rounded toward rising: ``+220``."""
    value = value_ft_per_h if unit == "ft" else m_from_ft(value_ft_per_h)
    return number(rounded_up(value, STEP[unit]), sign=True)


def rate_word(value_ft_per_h: float) -> str:
    """Say where the density altitude goes."""
    if abs(value_ft_per_h) < STEADY_FT_PER_H:
        return "steady"
    return "rising" if value_ft_per_h > 0 else "falling"


def altimeter(value_hpa: float, unit: str) -> str:
    """Altimeter setting: ``30.00`` inHg, ``1016.3`` hPa."""
    return f"{inhg_from_hpa(value_hpa):.2f}" if unit == "inhg" else f"{value_hpa:.1f}"


def temperature(value_c: float, unit: str) -> str:
    """Temperature to the nearest tenth."""
    return number(value_c if unit == "c" else f_from_c(value_c), 1)


def deviation(value_c: float, unit: str) -> str:
    """Return a temperature difference to the nearest tenth, signed."""
    return number(value_c if unit == "c" else f_difference_from_c(value_c), 1, sign=True)


def hold_temperature(value_c: float, unit: str) -> str:
    """Temperature above which the limit would be exceeded, rounded down to a tenth."""
    return number(rounded_down(value_c if unit == "c" else f_from_c(value_c), STEP["c"]), 1)


def value_of_limit(value: float, unit: Unit) -> str:
    """Limit, or a value to be at or below: rounded down to a whole foot, or to a tenth of a degree if not whole."""
    if unit in ("ft", "m"):
        return f"{number(rounded_down(value, Decimal(1)))} {unit}"
    tenths = rounded_down(value, STEP[unit])
    return f"{number(tenths, 0 if tenths == tenths.to_integral_value() else 1)} {UNIT_WORDS[unit]}"


def value(reading: float, unit: Unit) -> str:
    """Write a compared value with its unit, rounded up: ``6,830 ft``, ``31.4 °C``."""
    return f"{number(rounded_up(reading, STEP[unit]), 0 if unit in ('ft', 'm') else 1)} {UNIT_WORDS[unit]}"


def weight(value: float, unit: str) -> str:
    """Weight that may depart, rounded down: ``2,410 lb``."""
    return f"{number(rounded_down(value, WEIGHT_STEP[unit]))} {unit}".rstrip()


def clock(when: datetime, zone: ZoneInfo) -> str:
    """Local time of day: ``13:20``."""
    return f"{when.astimezone(zone):%H:%M}"


def clock_up(when: datetime, zone: ZoneInfo) -> str:
    """Local time of day, a begun minute counted full: for the earliest time at which something may end."""
    return clock(when + timedelta(seconds=59, microseconds=999_999), zone)


def day(when: date) -> str:
    """Day and month: ``30 Sep``."""
    return f"{when.day} {_MONTHS[when.month - 1]}"


def weekday(when: datetime, zone: ZoneInfo) -> str:
    """Weekday, day and month: ``Thu 16 Jul``."""
    local = when.astimezone(zone)
    return f"{_DAYS[local.weekday()]} {day(local.date())}"


def time_near(when: datetime, now: datetime, zone: ZoneInfo) -> str:
    """Time of day, with the date where it is not that of now: ``13:34``, ``15 Jul 18:40``."""
    local = when.astimezone(zone)
    same_day = local.date() == now.astimezone(zone).date()
    return f"{local:%H:%M}" if same_day else f"{day(local.date())} {local:%H:%M}"


def observed_label(observation: CurrentObservation | None, now: datetime, zone: ZoneInfo) -> str:
    """Say when the reading is of, in the strip's narrow cell: ``Observed 13:34``, ``15 Jul 18:40``."""
    if observation is None:
        return "Observed"
    when = time_near(observation.time, now, zone)
    return f"Observed {when}" if when == clock(observation.time, zone) else when


def stamp(when: datetime, zone: ZoneInfo) -> str:
    """Full local and universal time, for pictures: ``Thu 16 Jul 2026, 13:20 (20:20 UTC)``."""
    local = when.astimezone(zone)
    return f"{weekday(when, zone)} {local.year}, {local:%H:%M} ({clock(when, UNIVERSAL)} UTC)"


def age(value: timedelta) -> tuple[str, str]:
    """Age as a number and its words, begun minutes not counted: ``("10", "min old")``, ``("3 h 12", "min old")``."""
    minutes = int(value.total_seconds() // 60)
    if minutes < 120:
        return number(minutes), "min old"
    if minutes < 48 * 60:
        return f"{minutes // 60} h {minutes % 60:02d}", "min old"
    return number(minutes // 1440), "days old"


def minutes(value_min: float) -> str:
    """Minutes, whole where they are: ``60``, ``7.5``."""
    return f"{value_min:.0f}" if value_min == int(value_min) else f"{value_min:.1f}"


def freshness_word(freshness: Freshness) -> str:
    """Say how far the reading can be trusted."""
    return {
        Freshness.FRESH: "Fresh",
        Freshness.AGEING: "Ageing",
        Freshness.STALE: "Stale",
        Freshness.MISSING: "Missing",
    }[freshness]


def trust_word(freshness: Freshness, cause: Cause) -> str:
    """Say how far the reading can be trusted; one that is young but of no use is not called fresh."""
    return {
        Cause.NO_ANSWER: "Stopped",
        Cause.CLOCK: "Clock wrong",
        Cause.NOT_CALCULATED: "Not usable",
    }.get(cause, freshness_word(freshness))


def source_line(observation: CurrentObservation | None) -> str:
    """Say where the reading comes from: the file or station and its note, or that it was typed in and by whom."""
    if observation is None:
        return ""
    first = f"TYPED IN by {observation.initials}" if observation.initials else observation.source
    return " · ".join(part for part in (first, observation.note) if part)


def limit_phrase(line: LimitLine | None) -> str:
    """Say what the row's limit is: ``limit 6,350 ft``; other quantities are named."""
    if line is None:
        return "no limit in force"
    if line.limit is None:
        return line.quantity.value
    return f"limit {_named(line, line.limit)}{', guarded' if line.guarded else ''}"


def _named(line: LimitLine, value: float) -> str:
    """Write a limit or a value to be at or below, with the quantity where the unit alone would mislead."""
    text = value_of_limit(value, line.unit)
    if line.quantity is Quantity.PRESSURE_ALTITUDE:
        return f"PA {text}"
    if line.quantity is Quantity.ISA_DEVIATION:
        return f"ISA {'+' if value >= 0 else ''}{text}"
    return text


def limit_cell(line: LimitLine | None, column_unit: str = "ft") -> str:
    """Limit as it stands in its own column, with any unit but the column's: ``6,350``, ``PA 5,000``, ``42 °C``."""
    if line is None or line.limit is None:
        return DASH
    return _named(line, line.limit).removesuffix(f" {column_unit}")


def margin_cell(line: LimitLine | None, column_unit: str = "ft") -> str:
    """Margin as it stands in its column, with any unit but the column's: ``+120``, ``+11.6 °C``."""
    if line is None or line.margin is None or not math.isfinite(line.margin):
        return DASH
    return f"{margin(line.margin, line.unit)} {UNIT_WORDS[line.unit]}".removesuffix(f" {column_unit}")


def temporary_short(line: LimitLine | None) -> str:
    """Until when a temporary limit is in force, for rows of one line: ``to 30 Sep``."""
    return f"to {day(date.fromisoformat(line.valid_until))}" if line is not None and line.valid_until else ""


def temporary_phrase(line: LimitLine | None) -> str:
    """Until when a temporary limit is in force and what ordered it: ``until 30 Sep, Local order 7``."""
    if line is None:
        return ""
    until = f"until {day(date.fromisoformat(line.valid_until))}" if line.valid_until else ""
    return ", ".join(part for part in (until, line.notice) if part)


def full_name(row: OperationLine) -> str:
    """Aircraft and operation in one line: ``Tow plane · Aerotow``."""
    return f"{row.aircraft_name} · {row.name}"


def was_phrase(state: State | None, when: datetime | None, now: datetime, zone: ZoneInfo) -> str:
    """Say what a row without data was: ``was HOLD at 13:34``."""
    if state is None or when is None:
        return ""
    return f"was {STATE_WORDS[state]} at {time_near(when, now, zone)}"


def next_change(line: LimitLine | None, now: datetime, zone: ZoneInfo) -> tuple[str, str]:
    """Say what is known of a row's next change, as a loud and a quiet part; each may be empty."""
    if line is None:
        return "", "no limit in force"
    if line.state is State.NO_DATA:
        was = was_phrase(line.was, line.was_at, now, zone)
        return ("", line.reason or "nothing to compare") if not was else (was, line.reason)
    if line.state is State.HOLD:
        return _clearing(line, now, zone)
    if line.state is State.REDUCED:
        lighter = f"to {weight(line.greatest_weight, line.weight_unit)}" if line.greatest_weight is not None else ""
        full = f"greatest weight {weight(line.full_weight, line.weight_unit)}" if line.full_weight is not None else ""
        return lighter, full
    if line.gone_by is not None:
        words = "margin may be gone by" if line.gone_by > now else "may be gone since"
        return f"{words} {clock(line.gone_by, zone)}", ""
    return "", f"since {time_near(line.since, now, zone)}" if line.since is not None else ""


def _clearing(line: LimitLine, now: datetime, zone: ZoneInfo) -> tuple[str, str]:
    clearing = line.clearing
    if clearing is None:
        return "", f"since {time_near(line.since, now, zone)}" if line.since is not None else ""
    needs = _named(line, clearing.needs)
    if clearing.since is None or clearing.earliest is None:
        return f"clears at or below {needs}", f"for {minutes(clearing.for_min)} min"
    if clearing.earliest <= now:
        back = "may clear at the next reading"
    else:
        back = f"back {clock_up(clearing.earliest, zone)} at the earliest"
    return back, f"below {needs} since {time_near(clearing.since, now, zone)}"


def count_open(count: int) -> str:
    """How many status changes wait."""
    return f"{count} not acknowledged" if count else "all acknowledged"


def callout(row: OperationLine, now: datetime, zone: ZoneInfo) -> tuple[str, str]:
    """Name a row's limit on the plot, and say what is known of its next change."""
    loud, quiet = next_change(row.shown, now, zone)
    known = " ".join(part for part in (loud, quiet) if part) or STATE_WORDS[row.state]
    return f"{full_name(row)}, {limit_phrase(row.shown)}", known


def no_data_lines(cause: Cause, state: BoardState, now: datetime, zone: ZoneInfo) -> tuple[str, ...]:
    """Say why the whole board shows NO DATA: a title and a line or two; nothing where it does not."""
    observation = state.observation
    when = time_near(observation.time, now, zone) if observation is not None else ""
    return {
        Cause.NONE: (),
        Cause.MISSING: ("No observation yet", "Nothing usable has been read"),
        Cause.STALE: ("No current observation", f"Last {when}, stale at {minutes(state.stale_after_min)} min"),
        Cause.NO_ANSWER: (
            "The board has stopped",
            f"Nothing was judged since {time_near(state.assessed_at, now, zone)}",
        ),
        Cause.CLOCK: ("The clock is wrong", f"It is behind the last observation, {when}"),
        Cause.NOT_CALCULATED: ("Nothing to trust", f"The reading of {when} cannot be used"),
    }[cause]


def change_heading(*, trusted: bool) -> str:
    """Heading of the column that says since when a row is as it is or what comes next; without data, what it was."""
    return "Since, or next change" if trusted else "State before"


def level_label(value_ft: float, when: datetime | None, unit: str, zone: ZoneInfo) -> str:
    """Name the level of the air: that of now, or with ``when`` that of a reading that has begun to age."""
    at = f"at {clock(when, zone)}" if when is not None else "now"
    return f"DA {at} {altitude(value_ft, unit)} {unit}"


def short_stamp(when: datetime, zone: ZoneInfo) -> str:
    """Local and universal time of day, for pictures: ``13:35 (20:35 UTC)``."""
    return f"{clock(when, zone)} ({clock(when, UNIVERSAL)} UTC)"


def band(width: float, unit: Unit) -> str:
    """Width of a band, rounded up: ``500 ft``, ``0.5 °C``."""
    if unit in ("ft", "m"):
        return f"{number(rounded_up(width, Decimal(1)))} {unit}"
    tenths = rounded_up(width, STEP[unit])
    return f"{number(tenths, 0 if tenths == tenths.to_integral_value() else 1)} {UNIT_WORDS[unit]}"


def density_ratio(value: float) -> str:
    """Density over the standard's at sea level, rounded down: ``0.815``."""
    return number(rounded_down(value, Decimal("0.001")), 3)


def airspeed_ratio(value: float) -> str:
    """Write the true airspeed over the indicated, rounded up: ``1.108``."""
    return number(rounded_up(value, Decimal("0.001")), 3)


def power_share(value: float) -> str:
    """Shaft power over that at sea level, rounded down to a whole hundredth: ``79 %``."""
    return f"{number(rounded_down(value * 100, Decimal(1)))} %"


def days_in_force(first: str, last: str) -> str:
    """Say on which days a limit counts, both included: ``1 Jun 2026 to 30 Sep 2026``; from ISO days, empty if open."""
    since = _full_day(first) if first else ""
    until = _full_day(last) if last else ""
    if since and until:
        return f"{since} to {until}"
    return f"from {since}" if since else f"until {until}" if until else "every day"


def _full_day(iso_day: str) -> str:
    when = date.fromisoformat(iso_day)
    return f"{day(when)} {when.year}"
