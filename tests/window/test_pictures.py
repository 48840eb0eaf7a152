"""No text is cut or on another, at any number of rows, size and look; a board without data has no colour left."""

from collections.abc import Callable
from dataclasses import replace
from datetime import timedelta

import pytest
from pytestqt.qtbot import QtBot

from airfield_board.limits.states import State
from airfield_board.session.board_state import BoardState, Message, Mode, SettingChange, Weight
from airfield_board.window import formatting
from airfield_board.window.board_view import BoardView, PageName
from airfield_board.window.formatting import STATE_WORDS
from tests.window import states
from tests.window.painting import faults, lead_of_red_or_green, shown_view, texts_of

SIZES = [(1200, 760), (1440, 900), (1920, 1080)]
COUNTS = [8, 14, 24, 40]
KINDS: dict[str, tuple[Callable[[int], BoardState], str]] = {
    "light": (states.board, "light"),
    "dark": (states.board, "dark"),
    "stale": (states.stale_board, "light"),
    "stale dark": (states.stale_board, "dark"),
    "evening": (states.evening_board, "light"),
    "nothing yet": (states.empty_board, "light"),
}


@pytest.mark.parametrize("size_px", SIZES, ids=str)
@pytest.mark.parametrize("count", COUNTS)
@pytest.mark.parametrize("kind", KINDS)
def test_no_text_of_the_board_is_cut_or_on_another(
    qtbot: QtBot, kind: str, count: int, size_px: tuple[int, int]
) -> None:
    make, scheme = KINDS[kind]
    view, _image = shown_view(make(count), size_px=size_px, scheme=scheme)
    qtbot.addWidget(view)
    placed = texts_of(view)
    assert faults(placed) == []
    words = [one for one in placed if one.part == "RowPanel" and one.text.text in STATE_WORDS.values()]
    assert len(words) == count


@pytest.mark.parametrize("size_px", SIZES, ids=str)
@pytest.mark.parametrize("count", COUNTS)
@pytest.mark.parametrize("kind", ["light", "dark", "stale", "nothing yet"])
def test_no_text_of_the_margin_page_is_cut_or_on_another(
    qtbot: QtBot, kind: str, count: int, size_px: tuple[int, int]
) -> None:
    make, scheme = KINDS[kind]
    view, _image = shown_view(make(count), size_px=size_px, scheme=scheme, page=PageName.MARGIN)
    qtbot.addWidget(view)
    assert faults(texts_of(view)) == []


def _framed() -> dict[str, BoardState]:
    plain = states.board(15)
    waiting = (SettingChange(where="Two-seat trainer · Departure", in_force="6,350 ft", waiting="6,500 ft"),)
    alarm = Message(topic="settings", weight=Weight.ALARM, text="fleet.yaml:12: " + "a limit is expected here " * 12)
    observation = plain.observation
    assert observation is not None
    return {
        "demo": replace(plain, mode=Mode.DEMO),
        "training": replace(plain, mode=Mode.TRAINING),
        "past": replace(plain, mode=Mode.PAST),
        "not recording": replace(plain, recording=False, not_recording="disk full", waiting=waiting),
        "waiting": replace(plain, waiting=waiting),
        "message": replace(plain, messages=(alarm, alarm)),
        "typed in": replace(plain, observation=replace(observation, initials="MS", note="x " * 80)),
        "guarded": replace(plain, guarded=True),
        "metric": replace(
            plain,
            airfield=replace(plain.airfield, altitude_unit="m", altimeter_unit="hpa", temperature_unit="f"),
        ),
        "long name": replace(plain, airfield=replace(plain.airfield, name="A field with a very long name " * 5)),
        "carried": states.board(15, dewpoint=False),
        "no rows": replace(plain, operations=(), aircraft=(), changes=()),
        "morning": states.board(15, 6.3),
        "night": states.board(15, 23.9),
    }


@pytest.mark.parametrize("size_px", SIZES, ids=str)
@pytest.mark.parametrize("kind", _framed())
def test_no_text_is_cut_in_other_modes(qtbot: QtBot, kind: str, size_px: tuple[int, int]) -> None:
    view, _image = shown_view(_framed()[kind], size_px=size_px)
    qtbot.addWidget(view)
    assert faults(texts_of(view)) == []


def test_nothing_is_shortened_at_the_usual_size(qtbot: QtBot) -> None:
    view, _image = shown_view(states.board(15))
    qtbot.addWidget(view)
    assert [one.text.text for one in texts_of(view) if one.text.text != one.text.full] == []


def test_callout_of_a_pinned_row_is_whole(qtbot: QtBot) -> None:
    state = states.board(15)
    view, _image = shown_view(state, size_px=(1200, 760))
    qtbot.addWidget(view)
    for row in state.operations[:-1]:
        view.board.rows.choose(row.key)
        shown_view(state, size_px=(1200, 760), view=view)
        placed = texts_of(view)
        assert faults(placed) == []
        callout = [one.text for one in placed if one.part == "DayPlot"]
        assert callout[0].full == f"{formatting.full_name(row)}, {formatting.limit_phrase(row.shown)}"


def test_more_rows_than_fit_are_counted_by_their_state(qtbot: QtBot) -> None:
    state = states.board(40)
    twice = tuple(
        replace(row, aircraft_id=f"{row.aircraft_id}-{copy}") for row in state.operations for copy in ("a", "b", "c")
    )
    view, _image = shown_view(replace(state, operations=twice), size_px=(1200, 760))
    qtbot.addWidget(view)
    placed = texts_of(view)
    assert faults(placed) == []
    words = [one.text.text for one in placed if one.part == "RowPanel"]
    for kind in State:
        listed = words.count(STATE_WORDS[kind])
        more = [word for word in words if word.endswith(f" more {STATE_WORDS[kind]}")]
        folded = sum(int(word.split()[0]) - 1 for word in more)
        assert listed + folded == sum(row.state is kind for row in twice)
    # All that is on hold is listed one by one, even where cautions must be counted.
    assert words.count(STATE_WORDS[State.HOLD]) == sum(row.state is State.HOLD for row in twice)


def test_go_rows_are_folded_before_cautions_and_no_data_before_those(qtbot: QtBot) -> None:
    state = states.board(40)
    twice = tuple(replace(row, aircraft_id=f"{row.aircraft_id}-{copy}") for row in state.operations for copy in "ab")
    view, _image = shown_view(replace(state, operations=twice), size_px=(1200, 760))
    qtbot.addWidget(view)
    words = [one.text.text for one in texts_of(view) if one.part == "RowPanel"]
    assert [word for word in words if " more " in word] == [f"{sum(row.state is State.GO for row in twice)} more GO"]
    for kind in (State.NEAR, State.REDUCED, State.HOLD, State.NO_DATA):
        assert words.count(STATE_WORDS[kind]) == sum(row.state is kind for row in twice)


@pytest.mark.parametrize("scheme", ["light", "dark"])
@pytest.mark.parametrize("page", list(PageName))
@pytest.mark.parametrize("make", [states.stale_board, states.empty_board])
def test_without_data_nothing_is_green_amber_or_red(
    qtbot: QtBot, make: Callable[[int], BoardState], page: PageName, scheme: str
) -> None:
    view, image = shown_view(make(15), scheme=scheme, page=page)
    qtbot.addWidget(view)
    assert lead_of_red_or_green(image) <= 3


@pytest.mark.parametrize("scheme", ["light", "dark"])
def test_a_hung_recorder_leaves_no_colour(qtbot: QtBot, scheme: str) -> None:
    state = states.board(15)
    view = BoardView(watchdog=timedelta(seconds=10))
    qtbot.addWidget(view)
    _view, image = shown_view(state, scheme=scheme, view=view)
    assert lead_of_red_or_green(image) > 100
    _view, image = shown_view(state, scheme=scheme, view=view, now=state.assessed_at + timedelta(seconds=11))
    assert lead_of_red_or_green(image) <= 3
    words = {one.text.text for one in texts_of(view) if one.part == "RowPanel"}
    assert not words & {"GO", "NEAR LIMIT", "REDUCED", "HOLD"}


def test_the_caution_stands_on_every_picture(qtbot: QtBot) -> None:
    for make in (states.board, states.stale_board, states.empty_board):
        for page in PageName:
            view, _image = shown_view(make(15), page=page)
            qtbot.addWidget(view)
            # What every board bears.
            caution = "Limits of the air only: not runway, wind, load or surface. HOLD: do not begin."
            assert caution in {one.text.text for one in texts_of(view)}
