"""What a look at an observation file gave, in words, for the person who sets an airfield up."""

from datetime import datetime, timedelta
from zoneinfo import ZoneInfo

from airfield_board.session.file_preview import FilePreview, NewestRow
from airfield_board.window import formatting

_FORMATS = {"csv": "CSV with a header", "json": "JSON", "metar": "METAR reports"}


def preview_lines(
    preview: FilePreview, zone: ZoneInfo, stale_after_min: float | None, now: datetime
) -> tuple[str, ...]:
    """Say what was understood of a file: its format, its rows, the newest one with its age, and what is wrong.

    Parameters
    ----------
    zone
        The airfield's.
    stale_after_min
        The age above which an observation would not be trusted; None while it is not known.
    now
        Aware.
    """
    if preview.format is None:
        return (*preview.messages, *preview.notes)
    lines = [_rows_line(preview, zone)]
    newest = preview.newest
    if newest is None:
        lines.append("No row can be used: the board would show NO DATA.")
    else:
        lines += _newest_lines(newest, zone, stale_after_min, now)
    if preview.every_min is not None:
        lines.append(f"A row usually comes every {formatting.minutes(round(preview.every_min, 1))} min.")
        if stale_after_min is not None and preview.every_min >= stale_after_min:
            lines.append(
                f"At {formatting.minutes(stale_after_min)} min each would be stale before the next one comes: NO DATA."
            )
    lines += _unused_lines(preview, zone)
    return (*lines, *preview.messages, *preview.notes)


def _rows_line(preview: FilePreview, zone: ZoneInfo) -> str:
    rows = "1 row" if preview.rows == 1 else f"{formatting.number(preview.rows)} rows"
    since = "" if preview.since is None else f", from {formatting.stamp(preview.since, zone)} on"
    return f"{_FORMATS[preview.format or 'csv']}, {rows} read{since}."


def _newest_lines(newest: NewestRow, zone: ZoneInfo, stale_after_min: float | None, now: datetime) -> list[str]:
    age = max(now - newest.time, timedelta(0))
    number, words = formatting.age(age)
    pressures = " = ".join(
        f"{formatting.altimeter(newest.altimeter_hpa, unit)} {formatting.UNIT_WORDS[unit]}" for unit in ("inhg", "hpa")
    )
    dewpoint = "no dew point"
    if newest.dewpoint_c is not None:
        dewpoint = f"dew point {formatting.temperature(newest.dewpoint_c, 'c')} °C"
    temperature = f"temperature {formatting.temperature(newest.temperature_c, 'c')} °C"
    lines = [
        f"Newest row that can be used: {formatting.stamp(newest.time, zone)}, {number} {words}.",
        f"Altimeter setting {pressures}, {temperature}, {dewpoint}.",
    ]
    if newest.density_altitude_ft is not None:
        altitude = formatting.altitude(newest.density_altitude_ft)
        lines.append(f"At this field's elevation: density altitude {altitude} ft.")
    if stale_after_min is not None and age > timedelta(minutes=stale_after_min):
        lines.append(f"It is older than {formatting.minutes(stale_after_min)} min: the board would show NO DATA now.")
    return lines


def _unused_lines(preview: FilePreview, zone: ZoneInfo) -> list[str]:
    count = preview.unused_count
    if not count:
        return []
    lines = ["1 row would not be used:" if count == 1 else f"{formatting.number(count)} rows would not be used:"]
    for when, reason in preview.unused:
        lines.append(f"  {'no time' if when is None else formatting.stamp(when, zone)}: {reason}")
    if count > len(preview.unused):
        lines.append("  and older ones.")
    return lines
