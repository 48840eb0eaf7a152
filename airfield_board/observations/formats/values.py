"""Numbers and times as text, taken strictly."""

import re
from datetime import date

from airfield_board.units import DAY_US, HOUR_US, MINUTE_US, SECOND_US

FIRST_YEAR = 1900
LAST_YEAR = 2199
LATEST_OFFSET_MIN = 14 * 60
"""Greatest difference from UTC that is believed: the greatest in use (IANA time zone database; from memory)."""

_LONGEST_NUMBER = 40
_PLAIN_NUMBER = re.compile(r"[+-]?[0-9]+(?:\.[0-9]+)?")
_EPOCH_DAY = date(1970, 1, 1).toordinal()

_FRACTION = r"(?:[.,](?P<fraction>[0-9]+))?"
_EXTENDED = re.compile(
    r"(?P<year>[0-9]{4})-(?P<month>[0-9]{2})-(?P<day>[0-9]{2})[Tt ]"
    rf"(?P<hour>[0-9]{{2}}):(?P<minute>[0-9]{{2}})(?::(?P<second>[0-9]{{2}}){_FRACTION})? ?"
    r"(?P<zone>[Zz]|(?P<sign>[+-])(?P<zone_hour>[0-9]{2})(?::?(?P<zone_minute>[0-9]{2}))?)?"
)
_BASIC = re.compile(
    r"(?P<year>[0-9]{4})(?P<month>[0-9]{2})(?P<day>[0-9]{2})[Tt]"
    rf"(?P<hour>[0-9]{{2}})(?P<minute>[0-9]{{2}})(?:(?P<second>[0-9]{{2}}){_FRACTION})?"
    r"(?P<zone>[Zz]|(?P<sign>[+-])(?P<zone_hour>[0-9]{2})(?::?(?P<zone_minute>[0-9]{2}))?)?"
)


def plain_number(text: str) -> float | None:
    """Return the value of a plain decimal number, None for anything else.

    Plain is: a sign or none, digits, and perhaps a point with digits on both sides of it. So ``29.``, ``.5``, ``1e3``,
    ``2_9``, ``nan`` and digits of other scripts are not: half a number or a misread one must not pass for a value.
    """
    if len(text) > _LONGEST_NUMBER or not _PLAIN_NUMBER.fullmatch(text):
        return None
    return float(text)


def iso_time(text: str) -> tuple[int, bool] | None:
    """Read a date and time of ISO 8601.

    Taken are the extended and the basic form, to the minute or finer, with ``T`` or a space between, with ``Z``, an
    offset or neither; ``24:00`` is the end of the day. What is finer than a microsecond is cut off.

    Returns
    -------
    tuple of int and bool, or None
        Microseconds since 1970 of UTC and False; or, without an offset, of the wall clock and True. None where the
        text is no such time, is a time that does not exist, is outside the years 1900 to 2199, or has an offset of
        more than 14 h.
    """
    match = _EXTENDED.fullmatch(text) or _BASIC.fullmatch(text)
    if match is None:
        return None
    year, month, day, hour, minute = (int(match[part]) for part in ("year", "month", "day", "hour", "minute"))
    second = int(match["second"] or 0)
    microsecond = int((match["fraction"] or "0")[:6].ljust(6, "0"))
    if not FIRST_YEAR <= year <= LAST_YEAR or minute > 59 or second > 59:
        return None
    if hour > 24 or (hour == 24 and (minute or second or microsecond)):
        return None
    try:
        days = date(year, month, day).toordinal() - _EPOCH_DAY
    except ValueError:
        return None
    time_us = days * DAY_US + hour * HOUR_US + minute * MINUTE_US + second * SECOND_US + microsecond
    if match["zone"] is None:
        return time_us, True
    if match["sign"] is None:
        return time_us, False
    zone_minute = int(match["zone_minute"] or 0)
    offset_min = int(match["zone_hour"]) * 60 + zone_minute
    if zone_minute > 59 or offset_min > LATEST_OFFSET_MIN:
        return None
    return time_us - (offset_min if match["sign"] == "+" else -offset_min) * MINUTE_US, False
