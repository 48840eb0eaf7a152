"""What a row says, and how many lines that takes."""

import math
from collections.abc import Sequence
from dataclasses import dataclass
from html import escape

from airfield_board.limits.states import State
from airfield_board.session.board_state import OperationLine
from airfield_board.window import formatting
from airfield_board.window.reading import View
from airfield_board.window.row_layout import Wish

FOLDED = "folded:"
"""Begins the key of a line that stands for several rows."""


@dataclass(frozen=True, slots=True, kw_only=True)
class RowWords:
    """The texts of a row.

    Attributes
    ----------
    loud, quiet
        What is known of its next change.
    details
        Operation and limit, for a second line.
    one_line
        Aircraft and operation, for rows of one line.
    last, last_below
        What the last column has, and a line under it.
    axis_ft
        Where the row's leader begins; on the Margin page a margin. None: it has none.
    place_ft
        Where the row would stand, likewise; None: at the foot.
    """

    key: str
    state: State
    name: str
    details: str
    temporary: str
    one_line: str
    limit: str
    margin: str
    loud: str
    quiet: str
    last: str
    axis_ft: float | None
    place_ft: float | None
    last_below: str = ""

    @property
    def extra_lines(self) -> int:
        """Third lines that the row has in full."""
        return 1 if self.temporary else 0

    @property
    def spoken(self) -> str:
        """The row as a screen reader says it."""
        return ", ".join(part for part in (self.spoken_name, self.spoken_value, self.loud, self.quiet) if part)

    @property
    def spoken_name(self) -> str:
        """What the row is about, its state first: a reader that says names only must not leave the state out."""
        return f"{formatting.STATE_WORDS[self.state]}, {self.one_line}"

    @property
    def spoken_value(self) -> str:
        """How far the row is from its limit."""
        return f"margin {self.margin}" if self.margin else ""

    @property
    def spoken_rest(self) -> str:
        """All but the name, the margin first: where a reader knows no values, it is not lost."""
        parts = (self.spoken_value, self.loud, self.quiet, self.details, self.temporary)
        return ", ".join(part for part in parts if part)


def words_of(row: OperationLine, view: View) -> RowWords:
    """Put a row into words."""
    line = row.shown
    loud, quiet = formatting.next_change(line, view.now, view.zone)
    temporary = formatting.temporary_phrase(line)
    unit = view.state.airfield.temperature_unit
    above = line.hold_above_c if line is not None else None
    short = formatting.temporary_short(line)
    column_unit = view.column_unit
    return RowWords(
        key=row.key,
        state=row.state,
        name=row.aircraft_name,
        details=f"{row.name} · {formatting.limit_phrase(line)}",
        temporary=temporary,
        one_line=f"{row.aircraft_name} · {row.name}{f', {short}' if short else ''}",
        limit=formatting.limit_cell(line, column_unit),
        margin=formatting.margin_cell(line, column_unit),
        loud=loud,
        quiet=quiet,
        last=(
            formatting.hold_temperature(above, unit) if above is not None and math.isfinite(above) else formatting.DASH
        ),
        axis_ft=line.axis_ft if line is not None else None,
        place_ft=line.place_ft if line is not None else None,
    )


_FOLD_FIRST = (State.GO, State.NO_DATA, State.NEAR, State.REDUCED, State.HOLD)


def folded(words: Sequence[RowWords], most: int) -> tuple[RowWords, ...]:
    """Fold rows that do not fit into one line a state: ``22 more GO``.

    First the GO rows farthest from their limit, then those in NO DATA, then cautions; a HOLD only where the others
    do not suffice, those farthest beyond their limit. A row that is not shown is always counted, by its state.

    Parameters
    ----------
    most
        How many lines there is room for.
    """
    rows = list(words)
    for state in _FOLD_FIRST:
        surplus = len(rows) - most
        if surplus <= 0:
            break
        places = [place for place, row in enumerate(rows) if row.state is state]
        if len(places) < 2:
            continue
        taken = min(surplus + 1, len(places))
        gone = places[:taken] if state in (State.GO, State.NEAR) else places[-taken:]
        stand_in = _fold_line(state, [rows[place] for place in gone])
        at = gone[0]
        rows = [row for place, row in enumerate(rows) if place not in set(gone)]
        rows.insert(at, stand_in)
    return tuple(rows)


def _fold_line(state: State, rows: Sequence[RowWords]) -> RowWords:
    text = f"{len(rows)} more {formatting.STATE_WORDS[state]}"
    places = [row.place_ft for row in rows if row.place_ft is not None]
    return RowWords(
        key=f"{FOLDED}{state.value}",
        state=state,
        name=text,
        details="",
        temporary="",
        one_line=text,
        limit="",
        margin="",
        loud="",
        quiet="no room to list them",
        last="",
        axis_ft=None,
        place_ft=places[0] if len(places) == len(rows) else None,
    )


def is_folded(words: RowWords, states: Sequence[State]) -> bool:
    """Whether a line stands for several rows in one of these states."""
    return words.key.startswith(FOLDED) and words.state in states


def wish_of(words: RowWords, target_px: float | None, level_px: float | None) -> Wish:
    """Say where a row would stand; one without data stays on the side of the level on which its limit lies."""
    below = words.state in (State.HOLD, State.REDUCED)
    if words.state is State.NO_DATA and target_px is not None and level_px is not None:
        below = target_px > level_px
    return Wish(target_px=target_px, below=below, extra_lines=words.extra_lines)


def tip_of(row: OperationLine, view: View) -> str:
    """Say all of a row, for a tooltip: a line a limit; escaped, for a tooltip may be taken for rich text."""
    lines = [formatting.full_name(row) + (f" ({row.group})" if row.group else "")]
    known = " ".join(part for part in formatting.next_change(row.shown, view.now, view.zone) if part)
    lines.append(f"{formatting.STATE_WORDS[row.state]}{f', {known}' if known else ''}")
    if not view.trusted:
        return _rich(lines)
    for line in row.limits:
        parts = [f"{line.quantity.value}: {formatting.STATE_WORDS[line.state]}", formatting.limit_phrase(line)]
        if line.full_weight is not None:
            parts.append(f"greatest weight {formatting.weight(line.full_weight, line.weight_unit)}")
        parts += [formatting.temporary_phrase(line), line.reason, line.basis, line.source]
        lines.append(", ".join(part for part in parts if part))
    return _rich(lines)


def _rich(lines: Sequence[str]) -> str:
    return f"<qt>{'<br>'.join(escape(text) for text in lines)}</qt>"
