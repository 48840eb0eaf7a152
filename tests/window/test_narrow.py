"""Windows with little room, as a large text size leaves them: fewer columns, nothing cut, nothing over another."""

from collections.abc import Callable
from dataclasses import replace

import pytest
from pytestqt.qtbot import QtBot

from airfield_board.session.board_state import BoardState, Message, Mode, Weight
from airfield_board.window import formatting
from airfield_board.window.board_view import SMALLEST_PX, BoardView, PageName
from tests.window.painting import overlaps, shown_view, texts_of
from tests.window.states import board, empty_board, evening_board, stale_board

WARNING = Message(topic="source", weight=Weight.WARNING, text="observations.csv: the last row is not complete yet")
STATES: dict[str, Callable[[], BoardState]] = {
    "fifteen": board,
    "forty": lambda: replace(board(40), mode=Mode.DEMO),
    "guarded": lambda: replace(board(24), guarded=True, messages=(WARNING,)),
    "stale": stale_board,
    "empty": empty_board,
    "evening": evening_board,
    "framed": lambda: replace(board(), mode=Mode.DEMO, recording=False, not_recording="full", messages=(WARNING,)),
}
# The smallest window; a screen of 1920x1080 less its edges at 200 %; others between it and the plain size.
SIZES = [SMALLEST_PX, (960, 500), (1000, 640), (1100, 600), (1200, 700)]


@pytest.mark.parametrize("size_px", SIZES, ids=str)
@pytest.mark.parametrize("page", list(PageName))
@pytest.mark.parametrize("name", STATES)
def test_nothing_is_cut_and_nothing_lies_over_anything_else(
    qtbot: QtBot, name: str, page: PageName, size_px: tuple[int, int]
) -> None:
    view, _image = shown_view(STATES[name](), size_px=size_px, page=page)
    qtbot.addWidget(view)
    placed = texts_of(view)
    assert overlaps(placed) == []
    for each in placed:
        assert each.room.adjusted(-1, -1, 1, 1).contains(each.ink), f"{each.part}: {each.text.text}"
    # Long names and messages are cut by design, and told in full by a tooltip and the list of messages.
    names = {row.aircraft_name for row in view.view.rows} if view.view is not None else set()
    cut = [each.text.full for each in placed if each.text.text != each.text.full]
    assert [text for text in cut if " · " not in text and text not in names and text != WARNING.text] == []
    assert formatting.CAUTION in {each.text.text for each in placed}


def headings(view: BoardView) -> set[str]:
    return {each.text.text for each in texts_of(view) if each.part == "RowPanel"}


@pytest.mark.parametrize(
    ("width_px", "gone"), [(1440, set()), (1300, {"Hold above °C"}), (1000, {"Hold above °C", "Limit"})]
)
def test_columns_go_one_after_the_other_and_state_name_and_margin_never(
    qtbot: QtBot, width_px: int, gone: set[str]
) -> None:
    view, _image = shown_view(board(24), size_px=(width_px, 700))
    qtbot.addWidget(view)
    columns = {"State", "Operation", "Margin, ft", "Since, or next change", "Limit", "Hold above °C"}
    assert headings(view) & columns == columns - gone


@pytest.mark.parametrize("state", [board(), replace(board(), mode=Mode.DEMO)], ids=["plain", "framed"])
def test_what_was_measured_stays_in_the_narrowest_strip(qtbot: QtBot, state: BoardState) -> None:
    view, _image = shown_view(state, size_px=SMALLEST_PX)
    qtbot.addWidget(view)
    labels = {each.text.text for each in texts_of(view) if each.part == "ObservationStrip"}
    assert {"Density altitude", "Altimeter", "Temperature", "Dew point", "6,830", "±60", "Fresh"} <= labels
    assert not {"Pressure altitude", "ISA deviation"} & labels


@pytest.mark.parametrize("page", list(PageName))
def test_the_card_that_says_why_there_is_no_data_covers_no_row(qtbot: QtBot, page: PageName) -> None:
    view, _image = shown_view(stale_board(), size_px=SMALLEST_PX, page=page)
    qtbot.addWidget(view)
    part = view.board if page is PageName.BOARD else view.margin
    words = [each for each in texts_of(view) if each.part == "RowPanel" and each.text.text == "NO DATA"]
    assert words
    right = part.card.mapTo(view, part.card.rect().topRight()).x()
    assert all(right < each.ink.left() for each in words)


def test_a_window_cannot_be_made_smaller_than_its_layouts_hold(qtbot: QtBot) -> None:
    view = BoardView()
    qtbot.addWidget(view)
    view.resize(10, 10)
    assert (view.width(), view.height()) == SMALLEST_PX
