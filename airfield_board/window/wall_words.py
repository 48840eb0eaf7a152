"""What the rows of the wall say, and which of them may be counted in one line where there are too many. No Qt."""

from collections.abc import Sequence
from dataclasses import dataclass

from airfield_board.limits.states import State
from airfield_board.session.board_state import OperationLine
from airfield_board.window import formatting
from airfield_board.window.reading import View
from airfield_board.window.wall_layout import WallItem


@dataclass(frozen=True, slots=True, kw_only=True)
class WallWords:
    """The texts of a row.

    Attributes
    ----------
    operation
        With the day until which a temporary limit is in force.
    loud, quiet
        What is known of its next change; each may be empty.
    """

    state: State
    name: str
    operation: str
    margin: str
    loud: str
    quiet: str

    @property
    def spoken(self) -> str:
        """The row as a screen reader says it."""
        parts = (
            formatting.STATE_WORDS[self.state],
            " · ".join(part for part in (self.name, self.operation) if part),
            f"margin {self.margin}" if self.margin else "",
            self.loud,
            self.quiet,
        )
        return ", ".join(part for part in parts if part)


def words_of(row: OperationLine, view: View) -> WallWords:
    """Put a row into words."""
    loud, quiet = formatting.next_change(row.shown, view.now, view.zone)
    short = formatting.temporary_short(row.shown)
    return WallWords(
        state=row.state,
        name=row.aircraft_name,
        operation=f"{row.name}, {short}" if short else row.name,
        margin=formatting.margin_cell(row.shown, view.state.airfield.altitude_unit),
        loud=loud,
        quiet=quiet,
    )


def counted(rows: Sequence[WallWords]) -> WallWords:
    """Put rows of one state that are not listed into words: ``22 more GO``."""
    state = rows[0].state
    return WallWords(
        state=state,
        name=f"{len(rows)} more {formatting.STATE_WORDS[state]}",
        operation="",
        margin="",
        loud="",
        quiet="no room to list them",
    )


def item_of(row: OperationLine, view: View) -> WallItem:
    """Say where a row would stand, and whether it may be folded.

    With data: GO rows, but for one whose margin may be gone before the reading is stale. Without: rows that were GO
    first, then those that were near or reduced. A row that is or was on HOLD is never folded.
    """
    line = row.shown
    below = row.state in (State.HOLD, State.REDUCED)
    rank: int | None = None
    conditions = view.state.conditions if view.trusted else None
    if row.state is State.NO_DATA and conditions is not None and line is not None and line.place_ft is not None:
        # One without data stays on the side of the level on which its limit lies.
        below = line.place_ft < conditions.density_altitude_ft
    if view.trusted:
        if row.state is State.GO and (line is None or line.gone_by is None):
            rank = 0
    else:
        was = line.was if line is not None else None
        rank = {None: 0, State.NO_DATA: 0, State.GO: 0, State.NEAR: 1, State.REDUCED: 1}.get(was)
    return WallItem(
        place_ft=line.place_ft if line is not None else None,
        below=below,
        fold_rank=rank,
        kind=row.state.value,
    )
