"""The names that CSV columns and JSON keys may have, and a row's values by them."""

import difflib
import re
from collections.abc import Iterable, Mapping
from typing import Literal, NamedTuple, Protocol

import numpy as np

from airfield_board.errors import shown
from airfield_board.observations.formats.reading import ReadRow, joined
from airfield_board.observations.formats.values import iso_time, plain_number
from airfield_board.observations.observation import NO_TIME_US
from airfield_board.units import Number, c_from_f, hpa_from_inhg, m_from_ft

Quantity = Literal["altimeter", "temperature", "dewpoint", "elevation"]

QUANTITIES: tuple[Quantity, ...] = ("altimeter", "temperature", "dewpoint", "elevation")
NEEDED: tuple[Quantity, ...] = ("altimeter", "temperature")
WORDS: Mapping[Quantity, str] = {
    "altimeter": "altimeter setting",
    "temperature": "temperature",
    "dewpoint": "dew point",
    "elevation": "elevation",
}


class Conversion(Protocol):
    """Takes one value, or an array of them, from one unit to another."""

    def __call__(self, value: Number, /) -> Number:
        """Return the value in the other unit."""


class Key(NamedTuple):
    """What a known name stands for.

    Attributes
    ----------
    quantity
        The quantity.
    convert
        From the name's unit to the unit of the table.
    """

    quantity: Quantity
    convert: Conversion


def _same(value: Number) -> Number:
    return value


TIME = "time"
KEYS: Mapping[str, Key] = {
    "altimeter_inhg": Key("altimeter", hpa_from_inhg),
    "altimeter_hpa": Key("altimeter", _same),
    "temperature_c": Key("temperature", _same),
    "temperature_f": Key("temperature", c_from_f),
    "dewpoint_c": Key("dewpoint", _same),
    "dewpoint_f": Key("dewpoint", c_from_f),
    "elevation_ft": Key("elevation", m_from_ft),
    "elevation_m": Key("elevation", _same),
}

_RESERVED = re.compile(r"[\W_]*(dew|temp|alt|elev)")
_TYPING_ERROR = 0.85
"""Likeness (`difflib`) from which a name counts as a known one with a letter wrong; common sense, no source."""
_MOST_NAMED = 20


def names_of(quantity: Quantity) -> str:
    """Return the names that a quantity may have, as a list in words."""
    return " or ".join(name for name, key in KEYS.items() if key.quantity == quantity)


def misspelt(name: str) -> str:
    """Say what is wrong with an unknown name that must not be ignored; empty where it may be.

    Not ignored is what begins like a quantity, and, so that a misspelt dew point does not pass for none, what differs
    from a known name by a letter or two.
    """
    folded = name.casefold().strip()
    near = [
        known
        for known in difflib.get_close_matches(folded, KEYS, n=1, cutoff=_TYPING_ERROR)
        if abs(len(known) - len(folded)) <= 1
    ]
    begins = _RESERVED.match(folded)
    if begins:
        quantity = next(each for each in QUANTITIES if each.startswith(begins[1]))
    elif near:
        quantity = KEYS[near[0]].quantity
    else:
        return ""
    same_unit = f"{quantity}_{folded.rpartition('_')[2]}"
    return f"{shown(name)} is not a known name; did you mean {same_unit if same_unit in KEYS else names_of(quantity)}?"


def faults_of_names(names: Iterable[str]) -> list[str]:
    """Say what is wrong with the names of one header or one object, so that no value can be taken by them."""
    faults = []
    first_of: dict[Quantity, str] = {}
    seen: set[str] = set()
    for name in names:
        if name in KEYS or name == TIME:
            if name in seen:
                faults.append(f"{name} is given twice")
                continue
            seen.add(name)
        if name in KEYS:
            quantity = KEYS[name].quantity
            if quantity in first_of:
                faults.append(
                    f"the {WORDS[quantity]} is given twice in different units: {first_of[quantity]} and {name}"
                )
            first_of.setdefault(quantity, name)
        elif name != TIME and (fault := misspelt(name)):
            faults.append(fault)
    return faults


def note_on_ignored(names: Iterable[str]) -> tuple[str, ...]:
    """Name, once, the columns or keys that are not known and were ignored."""
    ignored = list(dict.fromkeys(name for name in names if name not in KEYS and name != TIME))
    if not ignored:
        return ()
    listed = ", ".join(shown(name) if name else "one without a name" for name in ignored[:_MOST_NAMED])
    more = f" and {len(ignored) - _MOST_NAMED} more" if len(ignored) > _MOST_NAMED else ""
    return (f"not known and ignored: {listed}{more}",)


def time_of(text: str | None) -> tuple[int, bool, str]:
    """Read a row's time: microseconds, whether they are of the wall clock, and what is wrong (empty: nothing)."""
    if not text:
        return NO_TIME_US, False, "no time"
    read = iso_time(text)
    if read is None:
        return NO_TIME_US, False, f"the time {shown(text)} cannot be read; expected one like 2026-07-14T17:23:00Z"
    return *read, ""


def row_of(time: str | None, texts: Mapping[str, str]) -> ReadRow:
    """Take one row's values from its texts.

    Parameters
    ----------
    time
        The row's time as written, without spaces around it; None or empty where there is none.
    texts
        The other known names and their texts, without spaces around them; empty where there is no value.
    """
    time_us, local, fault = time_of(time)
    faults = [fault]
    values: dict[Quantity, float] = dict.fromkeys(QUANTITIES, np.nan)
    given: set[Quantity] = set()
    for name, text in texts.items():
        key = KEYS[name]
        if not text:
            continue
        given.add(key.quantity)
        value = plain_number(text)
        if value is None:
            faults.append(f"the {WORDS[key.quantity]} {shown(text)} is no plain decimal number")
        else:
            values[key.quantity] = key.convert(value)
    faults += [f"no {WORDS[quantity]}" for quantity in NEEDED if quantity not in given]
    return ReadRow(
        time_us=time_us,
        local=local,
        altimeter_hpa=values["altimeter"],
        temperature_c=values["temperature"],
        dewpoint_c=values["dewpoint"],
        elevation_m=values["elevation"],
        fault=joined(*faults),
    )
