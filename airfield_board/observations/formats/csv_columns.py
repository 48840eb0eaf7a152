"""CSV rows of the ordinary kind, many at a time: arrays over the file's bytes instead of a loop over its lines.

Only what is beyond doubt is taken here. Every other row is left to the careful reader, which decides alike: a row read
here has the same values there (a test walks both).
"""

from collections.abc import Mapping
from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from airfield_board.observations.formats.values import FIRST_YEAR, LAST_YEAR, LATEST_OFFSET_MIN
from airfield_board.units import DAY_US, HOUR_US, MINUTE_US, SECOND_US

Bytes = NDArray[np.uint8]
Places = NDArray[np.int64]
Mask = NDArray[np.bool_]

PADDING = 32
"""Bytes that must be readable behind the last row."""

_ROWS_AT_ONCE = 16_384
_NEWLINE, _RETURN, _NUL, _QUOTE, _COMMA, _SPACE = b'\n\r\0", '
_PLUS, _MINUS, _POINT, _ZERO = b"+-.0"
_MOST_SPACES = 3

_YEARS = np.arange(FIRST_YEAR, LAST_YEAR + 1)
_LEAP = (_YEARS % 4 == 0) & ((_YEARS % 100 != 0) | (_YEARS % 400 == 0))
_DAY_OF_YEAR_START = (np.datetime64("1900-01-01") + np.cumsum(np.append(0, 365 + _LEAP[:-1]))).astype(np.int64)
_MONTH_DAYS = np.array([[0, 31, 28, 31, 30, 31, 30, 31, 31, 30, 31, 30, 31]] * 2)
_MONTH_DAYS[1, 2] = 29
_DAY_OF_MONTH_START = np.cumsum(_MONTH_DAYS, axis=1) - _MONTH_DAYS

_TO_MINUTES = (0, 1, 2, 3, 5, 6, 8, 9, 11, 12, 14, 15)
_SECONDS = (17, 18)

_SHORT = 8
_LONG = 24
_POWERS_OF_TEN = 10.0 ** np.arange(_SHORT + 1)


@dataclass(frozen=True, slots=True, kw_only=True)
class CsvLayout:
    """Where a header puts what.

    Attributes
    ----------
    width
        Number of columns.
    time
        Index of the time's column.
    needed, optional
        Column indices of the values that a row must have, and of those it may leave empty.
    """

    width: int
    time: int
    needed: tuple[int, ...]
    optional: tuple[int, ...]


@dataclass(frozen=True, slots=True, kw_only=True)
class OrdinaryRows:
    """What could be read at once.

    Attributes
    ----------
    taken
        True for the rows that were, shape (n,); the rest of the arrays holds nothing of use for the others.
    time_us, local
        As in `Columns`.
    values
        By column index, in the unit of the column; NaN where an optional value is empty.
    """

    taken: Mask
    time_us: NDArray[np.int64]
    local: Mask
    values: Mapping[int, NDArray[np.float64]]


def line_ends(text: Bytes) -> Places:
    """Return where the line feeds of a text stand, shape (n,)."""
    step = 1 << 22
    found = [np.flatnonzero(text[at : at + step] == _NEWLINE) + at for at in range(0, len(text), step)]
    return np.concatenate(found) if found else np.empty(0, np.int64)


def without_returns(text: Bytes, start: Places, end: Places) -> Places:
    """Return the ends of lines without the carriage returns before their line feeds."""
    end = end.copy()
    rows = np.flatnonzero(end > start)
    while rows.size:
        rows = rows[text[end[rows] - 1] == _RETURN]
        end[rows] -= 1
        rows = rows[end[rows] > start[rows]]
    return end


def read_ordinary(text: Bytes, start: Places, end: Places, layout: CsvLayout) -> OrdinaryRows:
    """Read the rows that are of the ordinary kind.

    Parameters
    ----------
    text
        The file's bytes and `PADDING` bytes more.
    start, end
        Where each row's text begins and ends in them, shape (n,), rising, without line ends.
    layout
        Where the header puts what.
    """
    count = len(start)
    result = OrdinaryRows(
        taken=np.zeros(count, np.bool_),
        time_us=np.zeros(count, np.int64),
        local=np.zeros(count, np.bool_),
        values={column: np.full(count, np.nan) for column in (*layout.needed, *layout.optional)},
    )
    for first in range(0, count, _ROWS_AT_ONCE):
        rows = slice(first, min(first + _ROWS_AT_ONCE, count))
        _read_block(text, start[rows], end[rows], layout, rows, result)
    return result


def _read_block(text: Bytes, start: Places, end: Places, layout: CsvLayout, rows: slice, result: OrdinaryRows) -> None:
    low = int(start[0])
    piece = text[low : int(end[-1])]
    edges, even = _edges(piece, low, start, end, layout.width)
    begin, stop = edges[:, :-1] + 1, edges[:, 1:].copy()
    if (piece == _QUOTE).any():
        even &= _unquote(text, piece, low, start, begin, stop)
    time_us, local, taken = _times(text, *_trimmed(text, begin[:, layout.time], stop[:, layout.time]))
    taken &= even
    for column in (*layout.needed, *layout.optional):
        first, last = _trimmed(text, begin[:, column], stop[:, column])
        value, readable = _numbers(text, first, last)
        if column in layout.optional:
            empty = first == last
            value[empty] = np.nan
            readable |= empty
        taken &= readable
        result.values[column][rows] = value
    result.time_us[rows] = time_us
    result.local[rows] = local
    result.taken[rows] = taken


def _edges(piece: Bytes, low: int, start: Places, end: Places, width: int) -> tuple[Places, Mask]:
    """Return the places of the separators around each field, shape (n, width + 1), and which rows are even.

    Not even is a row with too many or too few fields, or with a byte that no row should have; it counts as one long
    field, with fields of a length below 0 behind it, which nothing reads.
    """
    commas = np.flatnonzero(piece == _COMMA) + low
    before = np.searchsorted(commas, start)
    even = np.searchsorted(commas, end) - before == width - 1
    odd = np.flatnonzero((piece == _RETURN) | (piece == _NUL)) + low
    at = np.searchsorted(start, odd, side="right") - 1
    even[at[odd < end[at]]] = False
    edges = np.empty((len(start), width + 1), np.int64)
    edges[:, 0] = start - 1
    edges[:, -1] = end
    if even.all():
        edges[:, 1:-1] = commas.reshape(len(start), width - 1)
    else:
        regular = np.flatnonzero(even)
        edges[regular, 1:-1] = commas[before[regular, None] + np.arange(width - 1)]
        uneven = np.flatnonzero(~even)
        edges[uneven, 1:] = end[uneven, None]
    return edges, even


def _unquote(text: Bytes, piece: Bytes, low: int, start: Places, begin: Places, stop: Places) -> Mask:
    """Take the quotes off fields that are quoted plainly; return which rows have no other quotes."""
    quotes = np.flatnonzero(piece == _QUOTE) + low
    quoted = (stop - begin >= 2) & (text[begin] == _QUOTE) & (text[stop - 1] == _QUOTE)
    begin += quoted
    stop -= quoted
    bounds = np.append(start, low + len(piece) + 1)
    in_row = np.diff(np.searchsorted(quotes, bounds))
    return np.asarray(in_row == 2 * np.count_nonzero(quoted, axis=1))


def _trimmed(text: Bytes, begin: Places, stop: Places) -> tuple[Places, Places]:
    """Return fields without a few spaces on either side."""
    for _ in range(_MOST_SPACES):
        spaces = (begin < stop) & (text[begin] == _SPACE)
        if not spaces.any():
            break
        begin = begin + spaces
    for _ in range(_MOST_SPACES):
        spaces = (begin < stop) & (text[stop - 1] == _SPACE)
        if not spaces.any():
            break
        stop = stop - spaces
    return begin, stop


def _windows(text: Bytes, begin: Places, size: int) -> Bytes:
    """Return the ``size`` bytes from each place on, shape (n, size)."""
    overlapping = np.ndarray((len(text) - size + 1,), f"V{size}", text, strides=(1,))
    return overlapping[begin].view(np.uint8).reshape(-1, size)


def _times(text: Bytes, begin: Places, stop: Places) -> tuple[NDArray[np.int64], Mask, Mask]:
    """Read times of the form ``2026-07-14T17:23[:00][Z|+00:00]``: microseconds, local, readable."""
    lengths = stop - begin
    time_us = np.zeros(len(begin), np.int64)
    local = np.zeros(len(begin), np.bool_)
    readable = np.zeros(len(begin), np.bool_)
    for length, has_seconds, zone in (
        (20, True, 1),
        (19, True, 0),
        (25, True, 6),
        (17, False, 1),
        (16, False, 0),
        (22, False, 6),
    ):
        at = np.flatnonzero(lengths == length)
        if at.size:
            signs = _windows(text, begin[at], length)
            time_us[at], readable[at] = _wall_times(signs, has_seconds=has_seconds)
            local[at] = zone == 0
            if zone == 1:
                readable[at] &= signs[:, -1] == ord("Z")
            elif zone:
                offset_us, good = _zone_offsets(signs[:, -6:])
                time_us[at] -= offset_us
                readable[at] &= good
    return time_us, local, readable


def _wall_times(signs: Bytes, *, has_seconds: bool) -> tuple[NDArray[np.int64], Mask]:
    digits = signs - np.uint8(_ZERO)
    good = (digits[:, _TO_MINUTES] <= 9).all(axis=1)
    good &= (signs[:, 4] == ord("-")) & (signs[:, 7] == ord("-")) & (signs[:, 13] == ord(":"))
    good &= (signs[:, 10] == ord("T")) | (signs[:, 10] == _SPACE)
    year = _two(digits, 0).astype(np.int64) * 100 + _two(digits, 2) - FIRST_YEAR
    month, day = _two(digits, 5), _two(digits, 8)
    hour, minute = _two(digits, 11), _two(digits, 14)
    good &= (year >= 0) & (year < len(_YEARS)) & (month >= 1) & (month <= 12) & (hour <= 23) & (minute <= 59)
    year[~good] = 0
    month[~good] = 1
    leap = _LEAP[year].astype(np.intp)
    good &= (day >= 1) & (day <= _MONTH_DAYS[leap, month])
    days = _DAY_OF_YEAR_START[year] + _DAY_OF_MONTH_START[leap, month] + day - 1
    time_us = days * DAY_US + hour.astype(np.int64) * HOUR_US + minute.astype(np.int64) * MINUTE_US
    if has_seconds:
        second = _two(digits, 17)
        good &= (digits[:, _SECONDS] <= 9).all(axis=1) & (signs[:, 16] == ord(":")) & (second <= 59)
        time_us += second.astype(np.int64) * SECOND_US
    return time_us, good


def _zone_offsets(signs: Bytes) -> tuple[NDArray[np.int64], Mask]:
    """Read offsets of the form ``+00:00``."""
    digits = signs - np.uint8(_ZERO)
    good = (digits[:, (1, 2, 4, 5)] <= 9).all(axis=1) & (signs[:, 3] == ord(":"))
    good &= (signs[:, 0] == _PLUS) | (signs[:, 0] == _MINUS)
    minute = _two(digits, 4)
    offset_min = _two(digits, 1).astype(np.int64) * 60 + minute
    good &= (minute <= 59) & (offset_min <= LATEST_OFFSET_MIN)
    return np.where(signs[:, 0] == _MINUS, -offset_min, offset_min) * MINUTE_US, good


def _two(digits: Bytes, column: int) -> Bytes:
    return digits[:, column] * np.uint8(10) + digits[:, column + 1]


def _numbers(text: Bytes, begin: Places, stop: Places) -> tuple[NDArray[np.float64], Mask]:
    """Read plain decimal numbers, each rounded as ``float`` would: values and which are readable."""
    sign = text[begin]
    negative = (sign == _MINUS) & (begin < stop)
    begin = begin + (negative | ((sign == _PLUS) & (begin < stop)))
    length = stop - begin
    readable = (length >= 1) & (length <= _SHORT)
    value, plain = _short_numbers(text, begin, np.where(readable, length, 1))
    readable &= plain
    at = np.flatnonzero((length > _SHORT) & (length <= _LONG))
    if at.size:
        value[at], readable[at] = _long_numbers(text, begin[at], length[at])
    np.negative(value, out=value, where=negative)
    return value, readable


def _repeated(byte: int) -> np.uint64:
    return np.uint64(int.from_bytes(bytes([byte]) * 8, "little"))


_ZEROS, _POINTS, _HIGH_BITS, _ONES = (_repeated(byte) for byte in (_ZERO, _POINT, 0x80, 0x01))
_ABOVE_NINE = _repeated(0x80 - 10)
_LOWEST_BYTES = np.uint64(0x000000FF000000FF)
_SHIFTS = np.array([8 * (_SHORT - length) for length in range(_SHORT + 1)], np.uint64) % np.uint64(64)
_FILLS = np.array(
    [int.from_bytes(bytes([_ZERO]) * (_SHORT - length), "little") for length in range(_SHORT + 1)], np.uint64
)
_PAIRS = np.uint64(100 + (1_000_000 << 32))
_QUADS = np.uint64(1 + (10_000 << 32))


def _short_numbers(text: Bytes, begin: Places, length: Places) -> tuple[NDArray[np.float64], Mask]:
    """Read unsigned numbers of 1 to 8 signs, eight bytes of each in one integer.

    The mantissa is below 2^53 and the power of ten exact, so that their quotient is the nearest double.
    """
    # The first sign lies lowest; moved so that the last lies highest, with zeros in front.
    eight = _windows(text, begin, _SHORT).view("<u8").ravel().astype(np.uint64, copy=False)
    signs = (eight << _SHIFTS[length]) | _FILLS[length]
    # The high bit of the first byte that is a point, moved to the byte's lowest bit; 0 where there is none.
    other = signs ^ _POINTS
    flags = (other - _ONES) & ~other & _HIGH_BITS
    point = (flags & (~flags + 1)) >> 7
    # Without the point, what stands before it moves up by a byte, and a zero moves in.
    before = np.where(point > 0, point - 1, 0)
    behind = ~(before | (point * 0xFF))
    without = np.where(point > 0, ((signs & before) << 8) | (signs & behind) | _ZERO, signs)
    digits = without ^ _ZEROS
    plain = ((digits + _ABOVE_NINE) | digits) & _HIGH_BITS == 0
    # Neighbours to pairs, pairs to fours and fours to eight, by multiplications that do it for all at once.
    pairs = digits * 10 + (digits >> 8)
    mantissa = ((pairs & _LOWEST_BYTES) * _PAIRS + ((pairs >> 16) & _LOWEST_BYTES) * _QUADS) >> 32
    exponent = np.frexp(point.astype(np.float64))[1]
    decimals = np.where(point > 0, _SHORT - 1 - (exponent - 1) // 8, 0)
    plain &= (point == 0) | ((decimals >= 1) & (decimals <= length - 2))
    return mantissa.astype(np.float64) / _POWERS_OF_TEN[decimals], plain


def _long_numbers(text: Bytes, begin: Places, length: Places) -> tuple[NDArray[np.float64], Mask]:
    """Read unsigned numbers of up to 24 signs with the library's own conversion, once they are known to be plain."""
    signs = np.where(np.arange(_LONG) < length[:, None], _windows(text, begin, _LONG), np.uint8(0))
    points = signs == _POINT
    digits = signs - np.uint8(_ZERO) <= 9
    last = np.arange(len(signs)), length - 1
    plain = ((digits | points).sum(axis=1) == length) & (points.sum(axis=1) <= 1) & digits[:, 0] & digits[last]
    signs[~plain] = 0
    signs[~plain, 0] = _ZERO
    return signs.view(f"S{_LONG}").ravel().astype(np.float64), plain
