"""What the quality checks say of one row, given the rows before it: this is the definition.

The checks are those of the observations' rules, after WMO-No. 8, in their order: incomplete, range, elevation, time,
no dew point, stuck, step.
"""

import math
from dataclasses import dataclass, replace
from typing import Literal, NamedTuple

from airfield_board.observations.observation import NO_TIME_US, DewpointUse, Verdict
from airfield_board.observations.quality_memory import LONGEST_GAP_US, Dewpoint, Past, QualityMemory, Reading
from airfield_board.units import EQUAL, HOUR_US, MINUTE_US

LOWEST_ALTIMETER_HPA, HIGHEST_ALTIMETER_HPA = 850.0, 1085.0
LOWEST_TEMPERATURE_C, HIGHEST_TEMPERATURE_C = -60.0, 60.0
LOWEST_DEWPOINT_C, HIGHEST_DEWPOINT_C = -80.0, 35.0
DEWPOINT_EXCESS_C = 1.0
ELEVATION_DIFFERENCE_M = 30.0
FUTURE_US = 5 * MINUTE_US
STUCK_US = 12 * HOUR_US
STUCK_WARNING_US = 6 * HOUR_US
ALTIMETER_STEP_HPA = 3.0
TEMPERATURE_STEP_C = 6.0
DEWPOINT_STEP_C = 8.0
STEP_INTERVAL_US = 5 * MINUTE_US
CONFIRMATION_US = MINUTE_US

_NO_DEWPOINT = "no dew point: none in this row and none observed in the 24 h before"
_SAME_FOR = "temperature and altimeter setting the same to the last digit for"


@dataclass(frozen=True, slots=True, kw_only=True)
class QualityRules:
    """What the checks depend on beside the rows.

    Attributes
    ----------
    elevation_m
        The profile's elevation; NaN where there is none to compare a row's with.
    humidity
        The profile's ``density_altitude``.
    """

    elevation_m: float
    humidity: Literal["auto", "moist", "dry"]


class Row(NamedTuple):
    """One row as read; NaN where it does not give the value, ``fault`` empty where it can be used as it stands."""

    time_us: int
    altimeter_hpa: float
    temperature_c: float
    dewpoint_c: float
    elevation_m: float
    fault: str

    def reading(self) -> Reading:
        """Return the values that the checks compare."""
        dewpoint_c = None if math.isnan(self.dewpoint_c) else self.dewpoint_c
        return Reading(self.time_us, self.altimeter_hpa, self.temperature_c, dewpoint_c)


class Humidity(NamedTuple):
    """The dew point that counts for a row, NaN where humidity does not, and where it comes from."""

    dewpoint_c: float
    use: DewpointUse


_NO_HUMIDITY = Humidity(math.nan, DewpointUse.DRY)


class Judgement(NamedTuple):
    """What the checks say of one row."""

    verdict: Verdict
    reason: str = ""
    restart: bool = False
    humidity: Humidity = _NO_HUMIDITY


def judge(memory: QualityMemory, row: Row, rules: QualityRules, now_us: int) -> tuple[Judgement, QualityMemory]:
    """Judge a row that is not older than the newest one judged.

    Parameters
    ----------
    memory
        Of the rows before. Where it has judged rows of the same time, this one is judged as their correction: against
        what was known before them.
    row
        The row.
    rules
        The profile's part.
    now_us
        The clock.

    Returns
    -------
    Judgement
        Of this row.
    QualityMemory
        With it; the same where the row changes nothing.
    """
    fault = _unusable(row, rules, now_us)
    if fault:
        return Judgement(Verdict.REJECTED, fault), memory
    reading = row.reading()
    corrects = row.time_us == memory.newest_us
    before = memory.before if corrects else memory.past
    past = before
    if corrects and reading.dewpoint_c is None:
        # A correction that leaves the dew point out must not make the air look drier than the row it corrects.
        past = before.with_dewpoints_of(memory.past)
    humidity = _humidity(past, reading, rules)
    if humidity is None:
        return Judgement(Verdict.REJECTED, _NO_DEWPOINT), memory
    same_us = row.time_us - past.same_start_us(reading)
    if same_us >= STUCK_US:
        reason = f"stuck: {_SAME_FOR} {same_us // HOUR_US} h"
        return Judgement(Verdict.REJECTED, reason), replace(memory, past=memory.past.with_same_at(reading))
    step = _step(past, reading)
    confirmed = bool(step) and _confirms(past, reading)
    if step and not confirmed:
        suspected = QualityMemory(newest_us=row.time_us, before=before, past=_with_suspect(memory.past, reading))
        return Judgement(Verdict.SUSPECT, f"step: {step}", humidity=humidity), suspected
    after = past.with_valid(reading)
    newer = memory.past
    if newer.same_last_us > row.time_us and newer.has_values_of(row.altimeter_hpa, row.temperature_c):
        # Newer rows of the same values were rejected as stuck already; they still count.
        after = replace(after, same_last_us=newer.same_last_us)
    warnings = []
    if confirmed:
        warnings.append(f"step confirmed: {step}")
    if same_us >= STUCK_WARNING_US:
        warnings.append(f"{_SAME_FOR} {same_us // HOUR_US} h: is the sensor stuck?")
    last = past.last_valid
    restart = confirmed or (last is not None and row.time_us - last.time_us > LONGEST_GAP_US)
    return (
        Judgement(Verdict.VALID, "; ".join(warnings), restart, humidity),
        QualityMemory(newest_us=row.time_us, before=before, past=after),
    )


def judge_late(past: Past, row: Row, rules: QualityRules, now_us: int) -> Judgement:
    """Judge a row older than the newest one judged: it fills the day and changes no state.

    So it is not compared with its neighbours in time, of which the memory knows no more.
    """
    fault = _unusable(row, rules, now_us)
    if fault:
        return Judgement(Verdict.REJECTED, fault)
    humidity = _humidity(past, row.reading(), rules)
    if humidity is None:
        return Judgement(Verdict.REJECTED, _NO_DEWPOINT)
    return Judgement(Verdict.VALID, humidity=humidity)


def _over(value: float, greatest: float) -> bool:
    return value - greatest >= EQUAL


def _outside(value: float, lowest: float, highest: float) -> bool:
    return _over(lowest, value) or _over(value, highest)


def _unusable(row: Row, rules: QualityRules, now_us: int) -> str:
    """Return why a row cannot be used, whatever came before it; empty where it can."""
    fault = _incomplete(row)
    if fault:
        return f"incomplete: {fault}"
    fault = _out_of_range(row)
    if fault:
        return f"range: {fault}"
    if _over(abs(row.elevation_m - rules.elevation_m), ELEVATION_DIFFERENCE_M):
        return (
            f"elevation: the row's {row.elevation_m:.1f} m is over {ELEVATION_DIFFERENCE_M:.0f} m "
            f"from the profile's {rules.elevation_m:.1f} m"
        )
    ahead_us = row.time_us - now_us
    if ahead_us > FUTURE_US:
        return f"time: {_minutes(ahead_us)} in the future by the clock"
    return ""


def _incomplete(row: Row) -> str:
    if row.fault:
        return row.fault
    if row.time_us == NO_TIME_US:
        return "no time that can be read"
    if math.isnan(row.altimeter_hpa):
        return "no altimeter setting"
    if math.isnan(row.temperature_c):
        return "no temperature"
    return ""


def _out_of_range(row: Row) -> str:
    if _outside(row.altimeter_hpa, LOWEST_ALTIMETER_HPA, HIGHEST_ALTIMETER_HPA):
        return (
            f"altimeter setting {row.altimeter_hpa:.1f} hPa is outside "
            f"{LOWEST_ALTIMETER_HPA:.0f} to {HIGHEST_ALTIMETER_HPA:.0f} hPa"
        )
    if _outside(row.temperature_c, LOWEST_TEMPERATURE_C, HIGHEST_TEMPERATURE_C):
        return (
            f"temperature {row.temperature_c:.1f} °C is outside "
            f"{LOWEST_TEMPERATURE_C:.0f} to {HIGHEST_TEMPERATURE_C:.0f} °C"
        )
    if _outside(row.dewpoint_c, LOWEST_DEWPOINT_C, HIGHEST_DEWPOINT_C):
        return f"dew point {row.dewpoint_c:.1f} °C is outside {LOWEST_DEWPOINT_C:.0f} to {HIGHEST_DEWPOINT_C:.0f} °C"
    if _over(row.dewpoint_c - row.temperature_c, DEWPOINT_EXCESS_C):
        return (
            f"dew point {row.dewpoint_c:.1f} °C is over {DEWPOINT_EXCESS_C:.0f} °C above "
            f"the temperature {row.temperature_c:.1f} °C"
        )
    return ""


def _humidity(past: Past, reading: Reading, rules: QualityRules) -> Humidity | None:
    """Return the dew point that counts; None where the row is incomplete without one."""
    if rules.humidity == "dry":
        return _NO_HUMIDITY
    if reading.dewpoint_c is not None:
        return Humidity(reading.dewpoint_c, DewpointUse.OBSERVED)
    if past.first_dewpoint_us is None or reading.time_us < past.first_dewpoint_us:
        return _NO_HUMIDITY if rules.humidity == "auto" else None
    carried_c = past.carried_c(reading.time_us)
    if carried_c is not None:
        return Humidity(min(carried_c, reading.temperature_c), DewpointUse.CARRIED)
    highest_c = past.highest_c(reading.time_us)
    if highest_c is not None:
        return Humidity(min(highest_c, reading.temperature_c), DewpointUse.ASSUMED)
    return None


def _step(past: Past, reading: Reading) -> str:
    """Return the step from the last valid observation in words; empty where there is none or nothing to compare."""
    last = past.last_valid
    if last is None or reading.time_us - last.time_us > LONGEST_GAP_US:
        return ""
    return _step_from(last, past.last_dewpoint, reading)


def _confirms(past: Past, reading: Reading) -> bool:
    """Whether a reading that steps from the last valid one confirms the suspect one that waits."""
    suspect = past.suspect
    return (
        suspect is not None
        and reading.time_us - suspect.time_us >= CONFIRMATION_US
        and not _step_from_suspect(suspect, past, reading)
    )


def _with_suspect(past: Past, reading: Reading) -> Past:
    """Return the past with a suspect reading, which waits for confirmation unless an earlier one still does."""
    waiting = past.suspect
    if waiting is None or _step_from_suspect(waiting, past, reading):
        waiting = reading
    return replace(past.with_same_at(reading), suspect=waiting)


def _step_from_suspect(suspect: Reading, past: Past, reading: Reading) -> str:
    # A suspect reading without a dew point confirms none: a dew point is then compared with the last observed one.
    dewpoint = past.last_dewpoint
    if suspect.dewpoint_c is not None:
        dewpoint = Dewpoint(suspect.time_us, suspect.dewpoint_c)
    return _step_from(suspect, dewpoint, reading)


def _step_from(earlier: Reading, dewpoint: Dewpoint | None, reading: Reading) -> str:
    interval_us = reading.time_us - earlier.time_us
    if _steps(reading.altimeter_hpa - earlier.altimeter_hpa, ALTIMETER_STEP_HPA, interval_us):
        change = reading.altimeter_hpa - earlier.altimeter_hpa
        return f"altimeter setting {change:+.1f} hPa in {_minutes(interval_us)}"
    if _steps(reading.temperature_c - earlier.temperature_c, TEMPERATURE_STEP_C, interval_us):
        change = reading.temperature_c - earlier.temperature_c
        return f"temperature {change:+.1f} °C in {_minutes(interval_us)}"
    if dewpoint is None or reading.dewpoint_c is None:
        return ""
    interval_us = reading.time_us - dewpoint.time_us
    change = reading.dewpoint_c - dewpoint.dewpoint_c
    if interval_us <= LONGEST_GAP_US and _steps(change, DEWPOINT_STEP_C, interval_us):
        return f"dew point {change:+.1f} °C in {_minutes(interval_us)}"
    return ""


def _steps(change: float, limit: float, interval_us: int) -> bool:
    return _over(abs(change), limit * math.sqrt(max(interval_us, STEP_INTERVAL_US) / STEP_INTERVAL_US))


def _minutes(interval_us: int) -> str:
    return f"{interval_us / MINUTE_US:.1f}".removesuffix(".0") + " min"
