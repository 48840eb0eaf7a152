"""The wall view in tests: painted for a screen, and boards of more rows than the other pages are tested with."""

from collections.abc import Callable
from dataclasses import replace
from datetime import datetime

from PySide6.QtGui import QImage

from airfield_board.session.board_state import BoardState, OperationLine
from airfield_board.window.picture import image_of
from airfield_board.window.wall_size import WallSetup
from airfield_board.window.wall_view import WallView
from tests.window import states
from tests.window.painting import texts_of

FULL_HD, UHD = (1920, 1080), (3840, 2160)
SETUP = WallSetup(diagonal_in=43.0, distance_m=3.0)


def many(count: int, make: Callable[[int], BoardState] = states.board) -> BoardState:
    """Return a board of any number of rows: beyond 40, some stand there a second time as other aircraft."""
    if count <= 40:
        return make(count)
    state = make(40)
    copies = [replace(row, aircraft_id=f"{row.aircraft_id}-b") for row in state.operations[: count - 40]]
    return replace(state, operations=tuple(sorted((*state.operations, *copies), key=_place)))


def _place(row: OperationLine) -> float:
    return -row.shown.place_ft if row.shown is not None and row.shown.place_ft is not None else 0.0


def shown_wall(
    state: BoardState,
    *,
    screen_px: tuple[int, int] = FULL_HD,
    scheme: str = "light",
    setup: WallSetup = SETUP,
    now: datetime | None = None,
    view: WallView | None = None,
) -> tuple[WallView, QImage]:
    """Paint the wall view of a state on a whole screen, and return it with its picture."""
    view = view or WallView(lambda: screen_px)
    view.resize(*screen_px)
    view.set_scheme(scheme)
    view.set_setup(setup)
    view.show_state(state, now or state.assessed_at)
    view.ensure_plot()
    return view, image_of(view)


def words(view: WallView, part: str = "") -> list[str]:
    """Return all texts painted by a part."""
    return [one.text.text for one in texts_of(view) if part in one.part]
