"""Settings in a few plain words, to be shown side by side."""

from collections.abc import Iterable, Sequence

from airfield_board.configuration.looseness import Aspect, nowhere_above
from airfield_board.configuration.model import Limit, PressureAltitudeTable, WeightTable
from airfield_board.units import EQUAL, UNIT_WORDS

NONE = "none"
TAKEN_OUT = "taken out"


def number_text(number: float) -> str:
    """Return a number with thousands set apart and no more decimals than it has, six at most."""
    text = f"{number:,.6f}".rstrip("0").rstrip(".")
    return "0" if text == "-0" else text


def aspect_text(limits: Sequence[Limit], aspect: Aspect) -> str:
    """Return one aspect of the limits of one quantity.

    Parameters
    ----------
    limits
        All entries of the quantity; none: there is no limit.
    aspect
        What to tell of them.
    """
    if not limits:
        return NONE
    telling = [limit for limit in limits if not _overruled(limit, limits)]
    match aspect:
        case Aspect.LIMIT:
            return "; ".join(_once(_limit_text(limit) + _dates_text(limit) for limit in telling))
        case Aspect.NEAR_BAND:
            return _apart(telling, [f"{number_text(limit.near_band)} {UNIT_WORDS[limit.unit]}" for limit in telling])
        case Aspect.DEADBAND:
            return _apart(telling, [f"{number_text(limit.deadband)} {UNIT_WORDS[limit.unit]}" for limit in telling])
        case Aspect.OFF_DELAY:
            return _apart(telling, [f"{number_text(limit.off_delay_min)} min" for limit in telling])
    return _apart(telling, ["guarded" if limit.guarded else "simple" for limit in telling])


def _overruled(limit: Limit, limits: Sequence[Limit]) -> bool:
    """Whether another entry is below a limit on all of its days."""
    return any(
        nowhere_above(other, limit, by=2 * EQUAL) and _covers(other, limit) for other in limits if other is not limit
    )


def _covers(other: Limit, limit: Limit) -> bool:
    from_before = other.valid_from is None or (limit.valid_from is not None and other.valid_from <= limit.valid_from)
    until_after = other.valid_until is None or (
        limit.valid_until is not None and other.valid_until >= limit.valid_until
    )
    return from_before and until_after


def _once(texts: Iterable[str]) -> list[str]:
    return list(dict.fromkeys(texts))


def _apart(limits: Sequence[Limit], texts: Sequence[str]) -> str:
    """Return one text where all entries have it, else each with its dates."""
    if len(set(texts)) == 1:
        return texts[0]
    return "; ".join(_once(text + _dates_text(limit) for limit, text in zip(limits, texts, strict=True)))


def _limit_text(limit: Limit) -> str:
    unit = UNIT_WORDS[limit.unit]
    match limit.value:
        case WeightTable() as table:
            points = zip(table.limits, table.weights, strict=True)
            return ", ".join(f"{number_text(y)} {unit} at {number_text(x)} {table.weight_unit}" for y, x in points)
        case PressureAltitudeTable() as table:
            points = zip(table.limits, table.altitudes_ft, strict=True)
            return ", ".join(f"{number_text(y)} {unit} at pressure altitude {number_text(x)} ft" for y, x in points)
        case value:
            return f"{number_text(value)} {unit}"


def _dates_text(limit: Limit) -> str:
    first = "" if limit.valid_from is None else f" from {limit.valid_from.isoformat()}"
    last = "" if limit.valid_until is None else f" until {limit.valid_until.isoformat()}"
    return first + last
