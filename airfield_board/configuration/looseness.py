"""Whether limits are looser than others, and what holds while looser ones wait."""

from collections.abc import Callable, Iterable, Iterator, Sequence
from dataclasses import dataclass, replace
from datetime import date, timedelta
from enum import StrEnum

import numpy as np

from airfield_board.configuration.differences import base_unit, difference_in_unit, limit_in_unit
from airfield_board.configuration.model import Limit, PressureAltitudeTable, Unit, WeightTable
from airfield_board.units import EQUAL, kg_from_lb

_SOME_DAY = date(2000, 1, 1)
_DAY = timedelta(days=1)

_Span = tuple[date | None, date | None]
_Points = tuple[tuple[float, ...], tuple[float, ...]]


class Aspect(StrEnum):
    """What of a limit can be looser by itself."""

    LIMIT = "limit"
    NEAR_BAND = "near band"
    DEADBAND = "deadband"
    OFF_DELAY = "off-delay"
    ACCEPTANCE = "acceptance"


@dataclass(frozen=True, slots=True, kw_only=True)
class LimitMerge:
    """What holds of the limits of one quantity of one operation.

    Attributes
    ----------
    effective
        Nowhere looser than the ones in force, and as tight as the ones read wherever those are tighter.
    loosened, tightened
        What the ones read loosen, which waits, and what they tighten, which acts.
    """

    effective: tuple[Limit, ...]
    loosened: frozenset[Aspect]
    tightened: frozenset[Aspect]


def nowhere_above(limit: Limit, other: Limit, *, by: float = -EQUAL) -> bool:
    """Whether a limit is at or below another of its quantity, whatever the weight or the pressure altitude.

    Parameters
    ----------
    limit, other
        Their dates do not matter.
    by
        How far below it must be, in the unit of ``other``.

    Returns
    -------
    bool
        False also where the two cannot be compared: a table that reaches to weights or altitudes that the other one
        does not speak of allows something new.
    """
    match limit.value, other.value:
        case WeightTable() as table, WeightTable() as other_table:
            return _weights_nowhere_above(
                _in_kg_and_unit(limit, table, other.unit), _in_kg_and_unit(other, other_table, other.unit), by
            )
        case PressureAltitudeTable() as table, PressureAltitudeTable() as other_table:
            points = (table.altitudes_ft, _limits_in_unit(limit, table.limits, other.unit))
            others = (other_table.altitudes_ft, other_table.limits)
            same_ends = all(abs(points[0][end] - others[0][end]) < EQUAL for end in (0, -1))
            return same_ends and _lines_nowhere_above(points, others, by)
        case WeightTable() as table, float() as number:
            return max(_limits_in_unit(limit, table.limits, other.unit)) <= number - by
        case float() as value, float() as number:
            return limit_in_unit(value, limit.quantity, limit.unit, other.unit) <= number - by
        case _:
            return False


def _limits_in_unit(limit: Limit, limits: Sequence[float], unit: Unit) -> tuple[float, ...]:
    return tuple(limit_in_unit(value, limit.quantity, limit.unit, unit) for value in limits)


def _in_kg_and_unit(limit: Limit, table: WeightTable, unit: Unit) -> _Points:
    weights_kg = tuple(kg_from_lb(weight) if table.weight_unit == "lb" else weight for weight in table.weights)
    return weights_kg, _limits_in_unit(limit, table.limits, unit)


def _weights_nowhere_above(points: _Points, others: _Points, by: float) -> bool:
    """Compare tables by weight.

    The limit at a table's own greatest weight decides between GO and REDUCED, that at its own least weight between
    REDUCED and HOLD; so both ends count beside the lines between.
    """
    (weights, limits), (other_weights, other_limits) = points, others
    within = weights[0] >= other_weights[0] - EQUAL and weights[-1] <= other_weights[-1] + EQUAL
    ends_below = limits[-1] <= other_limits[-1] - by and limits[0] <= other_limits[0] - by
    return within and ends_below and _lines_nowhere_above(points, others, by)


def _lines_nowhere_above(points: _Points, others: _Points, by: float) -> bool:
    """Compare at the corners of both lines, as far as the first one reaches."""
    places = [*points[0], *(place for place in others[0] if points[0][0] <= place <= points[0][-1])]
    line, other_line = np.interp(places, *points), np.interp(places, *others)
    return bool(np.all(line <= other_line - by))


def merge_limits(in_force: Sequence[Limit], read: Sequence[Limit], *, today: date | None) -> LimitMerge:
    """Put together what holds of the limits of one quantity of one operation.

    Parameters
    ----------
    in_force, read
        Entries of the quantity before and after the file has changed; one of them may be empty.
    today
        The airfield's local day: what was in force on earlier days only can loosen nothing. None: all days count.

    Returns
    -------
    LimitMerge
        Day by day: where the limits read are nowhere above those in force, they hold; else both together, of which
        the rules take the lowest. Of bands and off-delays the greater holds, and guarded before simple acceptance.
    """
    spans = tuple(_spans((*in_force, *read)))
    merged: list[tuple[_Span, LimitMerge]] = []
    loosened: set[Aspect] = set()
    tightened: set[Aspect] = set()
    for span in spans:
        new = _undated(read, span)
        is_over = today is not None and span[1] is not None and span[1] < today
        day = _merge_day(new if is_over else _undated(in_force, span), new)
        merged.append((span, day))
        loosened |= day.loosened
        tightened |= day.tightened
    return LimitMerge(
        effective=tuple(_joined(merged)) if loosened else tuple(read),
        loosened=frozenset(loosened),
        tightened=frozenset(tightened),
    )


def _spans(limits: Iterable[Limit]) -> Iterator[_Span]:
    """Split all time where entries come into force or go out of it."""
    first_days = {limit.valid_from for limit in limits} | {
        limit.valid_until + _DAY for limit in limits if limit.valid_until is not None and limit.valid_until < date.max
    }
    start: date | None = None
    for day in sorted(day for day in first_days if day is not None and day > date.min):
        yield start, day - _DAY
        start = day
    yield start, None


def _undated(limits: Iterable[Limit], span: _Span) -> tuple[Limit, ...]:
    """Return the entries in force in a span, without their dates, each once."""
    day = next((end for end in span if end is not None), _SOME_DAY)
    alike = (replace(limit, valid_from=None, valid_until=None) for limit in limits if limit.in_force_on(day))
    return tuple(dict.fromkeys(alike))


def _joined(merged: Sequence[tuple[_Span, LimitMerge]]) -> Iterator[Limit]:
    """Give entries their dates again, one where it goes on from span to span.

    Of old and new limits that hold together, those that are the lowest on none of their days go: else every change
    would leave some more behind.
    """
    needed = [
        limit
        for _, merge in merged
        for limit in (ruling(merge.effective) if Aspect.LIMIT in merge.loosened else merge.effective)
    ]
    for limit in dict.fromkeys(needed):
        run: _Span | None = None
        for span, merge in merged:
            if limit in merge.effective:
                run = (span[0] if run is None else run[0], span[1])
            elif run is not None:
                yield replace(limit, valid_from=run[0], valid_until=run[1])
                run = None
        if run is not None:
            yield replace(limit, valid_from=run[0], valid_until=run[1])


def _merge_day(old: tuple[Limit, ...], new: tuple[Limit, ...]) -> LimitMerge:
    """Merge what is in force on days that are all alike."""
    loosened: set[Aspect] = set()
    tightened: set[Aspect] = set()
    kept = new
    if not _nowhere_looser(new, old):
        loosened.add(Aspect.LIMIT)
        lowest = ruling((*new, *old))
        kept = (*new, *(limit for limit in old if limit in lowest))
    if not _nowhere_looser(old, new):
        tightened.add(Aspect.LIMIT)
    if old and new:
        for aspect, read_band, with_band in _BANDS:
            before, after = _ruling_band(old, read_band), _ruling_band(new, read_band)
            if after < before - EQUAL:
                loosened.add(aspect)
            elif after > before + EQUAL:
                tightened.add(aspect)
            if Aspect.LIMIT in loosened or aspect in loosened:
                least = max(before, after)
                kept = tuple(with_band(limit, max(read_band(limit), least)) for limit in kept)
    was_guarded, is_guarded = (any(limit.guarded for limit in limits) for limits in (old, new))
    if old and new and was_guarded != is_guarded:
        (loosened if was_guarded else tightened).add(Aspect.ACCEPTANCE)
    if loosened and (was_guarded or is_guarded):
        # One guarded entry makes all of its days guarded, also where it is not the one that stays.
        kept = tuple(replace(limit, guarded=True) for limit in kept)
    return LimitMerge(
        effective=tuple(dict.fromkeys(kept)), loosened=frozenset(loosened), tightened=frozenset(tightened)
    )


def _nowhere_looser(new: Sequence[Limit], old: Sequence[Limit]) -> bool:
    """Whether the lowest of the new limits is never above the lowest of the old ones."""
    return all(any(nowhere_above(limit, each) for limit in new) for each in old)


def ruling(limits: Sequence[Limit]) -> tuple[Limit, ...]:
    """Return the entries that can be the lowest somewhere, of entries in force on the same days."""
    return tuple(each for each in limits if not any(nowhere_above(limit, each, by=2 * EQUAL) for limit in limits))


# Bands are compared in feet and degrees Celsius, so that a change of unit alone is no change.
def _in_base_unit(band: float, unit: Unit) -> float:
    return difference_in_unit(band, unit, base_unit(unit))


def _from_base_unit(band: float, unit: Unit) -> float:
    return difference_in_unit(band, base_unit(unit), unit)


def _near_band(limit: Limit) -> float:
    return _in_base_unit(limit.near_band, limit.unit)


def _with_near_band(limit: Limit, band: float) -> Limit:
    return replace(limit, near_band=_raised(limit.near_band, _from_base_unit(band, limit.unit)))


def _deadband(limit: Limit) -> float:
    return _in_base_unit(limit.deadband, limit.unit)


def _with_deadband(limit: Limit, band: float) -> Limit:
    return replace(limit, deadband=_raised(limit.deadband, _from_base_unit(band, limit.unit)))


def _off_delay(limit: Limit) -> float:
    return limit.off_delay_min


def _with_off_delay(limit: Limit, delay_min: float) -> Limit:
    return replace(limit, off_delay_min=delay_min)


def _raised(band: float, least: float) -> float:
    """Return the greater, but the band itself where the two differ by no more than rounding."""
    return least if least > band + EQUAL else band


def _ruling_band(limits: Sequence[Limit], read_band: Callable[[Limit], float]) -> float:
    return max(read_band(limit) for limit in ruling(limits))


_BANDS: tuple[tuple[Aspect, Callable[[Limit], float], Callable[[Limit, float], Limit]], ...] = (
    (Aspect.NEAR_BAND, _near_band, _with_near_band),
    (Aspect.DEADBAND, _deadband, _with_deadband),
    (Aspect.OFF_DELAY, _off_delay, _with_off_delay),
)
