"""What somebody reads off the picture alone: what has no data looks so, units are named, a picture is not live."""

from dataclasses import replace

import pytest
from PySide6.QtCore import QPointF, QRectF
from pytestqt.qtbot import QtBot

from airfield_board.clock import time_from_us
from airfield_board.configuration.model import Quantity
from airfield_board.limits.states import State
from airfield_board.session.board_state import BoardState, LimitLine, Message, Mode, OperationLine, Weight
from airfield_board.units import m_from_ft
from airfield_board.window.board_view import BoardView, PageName
from airfield_board.window.palette import LIGHT
from airfield_board.window.picture import void_after
from airfield_board.window.row_layout import Density
from tests.window import states
from tests.window.painting import Placed, shown_view, texts_of

# A menu bar on top of a window of 1440 by 900 leaves the view so much at least; from memory, styles differ.
UNDER_A_MENU_PX = (1440, 876)


def with_lines(state: BoardState, *, lines: dict[str, dict[str, object]]) -> BoardState:
    """Return a board on which the shown limits of some aircraft are changed, by the aircraft's name."""
    rows: list[OperationLine] = []
    for row in state.operations:
        line: LimitLine | None = row.shown
        if line is not None and row.aircraft_name in lines:
            line = replace(line, **lines[row.aircraft_name])  # type: ignore[arg-type]  # names of the line
            row = replace(row, state=line.state, shown=line, limits=(line,))
        rows.append(row)
    return replace(state, operations=tuple(rows))


def without_data(state: BoardState, *names: str) -> BoardState:
    """Return a board on which some aircraft have lost their data to a suspect reading."""
    lost: dict[str, dict[str, object]] = {}
    for row in state.operations:
        if row.aircraft_name in names and row.shown is not None:
            lost[row.aircraft_name] = {
                "state": State.NO_DATA,
                "was": row.state,
                "was_at": states.local(13.1),
                "reason": "suspect reading",
                "margin": None,
                "hold_above_c": None,
                "greatest_weight": None,
            }
    return with_lines(state, lines=lost)


def metric(state: BoardState, *, limits_too: bool) -> BoardState:
    """Return the board of a metric airfield, with its limits in feet or in metres."""
    state = replace(state, airfield=replace(state.airfield, altitude_unit="m", altimeter_unit="hpa"))
    if not limits_too:
        return state
    rows = []
    for row in state.operations:
        line = row.shown
        if line is not None and line.unit == "ft" and line.limit is not None and line.margin is not None:
            line = replace(
                line,
                unit="m",
                limit=m_from_ft(line.limit),
                margin=m_from_ft(line.margin),
                near_band=150.0,
                clearing=None,
            )
            row = replace(row, shown=line, limits=(line,))
        rows.append(row)
    return replace(state, operations=tuple(rows))


def placed_of(view: BoardView, part: str) -> list[Placed]:
    """Return the texts of a part."""
    return [one for one in texts_of(view) if one.part == part]


def words_of(view: BoardView, part: str) -> list[str]:
    """Return the words of a part."""
    return [one.text.text for one in placed_of(view, part)]


def row_words(view: BoardView, name: str) -> list[Placed]:
    """Return the texts that stand beside an aircraft's name."""
    rows = placed_of(view, "RowPanel")
    named = next(one for one in rows if one.text.full.startswith(name))
    return [one for one in rows if abs(one.ink.center().y() - named.ink.center().y()) < 12]


def test_a_picture_does_not_call_itself_live(qtbot: QtBot) -> None:
    state = states.board(15)
    view, _image = shown_view(state)
    qtbot.addWidget(view)
    assert "LIVE" in words_of(view, "Header")
    view.set_picture(void_after(state, state.assessed_at, trusted=True))
    shown_view(state, view=view)
    assert "LIVE" not in words_of(view, "Header")
    assert "PICTURE" in words_of(view, "Header")


def test_what_a_row_without_data_was_stands_in_grey(qtbot: QtBot) -> None:
    state = without_data(states.board(15), "Piston helicopter", "Six-seat utility")
    for size_px in ((1440, 900), (1200, 700)):
        view, _image = shown_view(state, size_px=size_px)
        qtbot.addWidget(view)
        before = [one.text for one in placed_of(view, "RowPanel") if one.text.text.startswith("was ")]
        assert {text.text for text in before} == {"was NEAR LIMIT at 13:06", "was GO at 13:06"}
        assert {text.colour for text in before} == {LIGHT.soft_ink}


def test_a_row_without_data_stays_on_its_side_of_the_level(qtbot: QtBot) -> None:
    # Invented: limits of 7,300 and 6,760 ft, the air at 6,830 ft.
    view, _image = shown_view(without_data(states.board(15), "Piston helicopter", "Tow plane, two-seater"))
    qtbot.addWidget(view)
    level = next(one for one in placed_of(view, "RowPanel") if one.text.text.startswith("DA now"))
    above = next(one for one in placed_of(view, "RowPanel") if one.text.text == "Piston helicopter")
    below = next(one for one in placed_of(view, "RowPanel") if one.text.text == "Tow plane, two-seater")
    assert above.ink.bottom() < level.ink.top()
    assert below.ink.top() > level.ink.bottom()


def test_the_heading_says_what_stands_under_it(qtbot: QtBot) -> None:
    for page in PageName:
        view, _image = shown_view(states.board(15), page=page)
        qtbot.addWidget(view)
        assert "Since, or next change" in words_of(view, "RowPanel")
        view, _image = shown_view(states.stale_board(15), page=page)
        qtbot.addWidget(view)
        assert "State before" in words_of(view, "RowPanel")


def test_the_margin_page_draws_no_margin_for_a_row_without_data(qtbot: QtBot) -> None:
    state = states.board(15)
    lost = without_data(state, "Piston helicopter")
    view, _image = shown_view(lost, page=PageName.MARGIN)
    qtbot.addWidget(view)
    key = next(row.key for row in state.operations if row.aircraft_name == "Piston helicopter")
    assert key in view.margin.keys
    leaders = {row.key: row.axis_ft for row in view.margin.rows.words}
    assert leaders.pop(key) is None
    assert all(axis_ft is not None for axis_ft in leaders.values())
    assert [one.text.text for one in row_words(view, "Piston helicopter")][:1] == ["NO DATA"]


@pytest.mark.parametrize("limits_too", [False, True])
def test_the_margin_page_names_the_unit_of_its_axis(qtbot: QtBot, *, limits_too: bool) -> None:
    view, _image = shown_view(metric(states.board(15), limits_too=limits_too), page=PageName.MARGIN)
    qtbot.addWidget(view)
    unit = "m" if limits_too else "ft"
    page = placed_of(view, "MarginPage")
    assert f"Margin to own limit, {unit}" in {one.text.text for one in page}
    assert f"near limit, to {150 if limits_too else 500} {unit}" in words_of(view, "MarginPlot")
    assert f"Margin, {unit}" in words_of(view, "RowPanel")
    zero = next(one for one in page if one.text.text == "0")
    mark = next(one for one in page if one.text.text == ("+300" if limits_too else "+1,000"))
    drawn = view.margin.rows.axis
    assert drawn is not None
    # 300 m are 984.25 ft.
    expected_px = drawn.px(0.0) - drawn.px(984.25 if limits_too else 1000.0)
    assert zero.ink.center().y() - mark.ink.center().y() == pytest.approx(expected_px, abs=1.5)
    assert not any(word.endswith(" ft") for word in words_of(view, "RowPanel") if word.startswith(("+", "−")))


def test_a_limit_on_another_quantity_is_named_in_rows_of_one_line_too(qtbot: QtBot) -> None:
    changed: dict[str, dict[str, object]] = {
        "Six-seat utility": {"quantity": Quantity.PRESSURE_ALTITUDE, "limit": 5000.0, "axis_ft": None}
    }
    view, _image = shown_view(with_lines(states.board(24), lines=changed))
    qtbot.addWidget(view)
    assert "PA 5,000" in {one.text.text for one in row_words(view, "Six-seat utility")}


@pytest.mark.parametrize("size_px", [(1200, 760), (1440, 900), (1920, 1080)], ids=str)
@pytest.mark.parametrize("hour", [9.0, 14.0 + 50 / 60, 20.0])
def test_the_card_leaves_the_curve_to_be_seen(qtbot: QtBot, size_px: tuple[int, int], hour: float) -> None:
    state = states.board(15, hour, age_min=76.0)
    view, _image = shown_view(state, size_px=size_px)
    qtbot.addWidget(view)
    page = view.board
    assert page.card.isVisibleTo(view)
    scene = page.scene
    assert scene is not None
    assert page.plot is not None
    left, top = page.plot.x(), page.plot.y()
    card = QRectF(page.card.geometry())
    for time_us, value_ft in zip(state.curve.time_us.tolist(), state.curve.density_altitude_ft.tolist(), strict=True):
        when = time_from_us(time_us)
        if scene.time.holds(when):
            point = QPointF(left + scene.time.px(when), top + scene.altitude.px(value_ft))
            assert not card.contains(point)


def test_the_demos_rows_keep_two_lines_and_their_names_under_a_menu(qtbot: QtBot) -> None:
    for hour in (6.3, 13.0 + 20 / 60, 19.0 + 10 / 60):
        state = replace(states.board(16, hour), mode=Mode.DEMO)
        view, _image = shown_view(state, size_px=UNDER_A_MENU_PX)
        qtbot.addWidget(view)
        plan = view.board.rows.plan
        assert plan is not None
        assert plan.pitch.density is Density.COMFORTABLE
        rows = placed_of(view, "RowPanel")
        assert [one.text.full for one in rows if one.text.text != one.text.full] == []


def test_a_message_does_not_take_the_second_lines_away(qtbot: QtBot) -> None:
    said = Message(topic="source", weight=Weight.WARNING, text="observations.csv cannot be read.")
    state = replace(states.board(16), mode=Mode.DEMO)
    view, _image = shown_view(state, size_px=UNDER_A_MENU_PX)
    qtbot.addWidget(view)
    roomy_px = view.strip.height()
    shown_view(replace(state, messages=(said,)), size_px=UNDER_A_MENU_PX, view=view)
    plan = view.board.rows.plan
    assert plan is not None
    assert plan.pitch.density is Density.COMFORTABLE
    assert view.strip.height() < roomy_px


def test_the_level_of_an_ageing_reading_is_not_called_that_of_now(qtbot: QtBot) -> None:
    view, _image = shown_view(states.board(15, age_min=34.0))
    qtbot.addWidget(view)
    words = words_of(view, "RowPanel")
    assert "DA at 12:46 6,750 ft" in words
    assert not any(word.startswith("DA now") for word in words)


def test_the_words_of_an_empty_list_are_not_struck_through_by_the_level(qtbot: QtBot) -> None:
    state = replace(states.board(15), operations=(), aircraft=())
    view, _image = shown_view(state)
    qtbot.addWidget(view)
    said = next(one for one in placed_of(view, "RowPanel") if one.text.text.startswith("No operations yet"))
    plan = view.board.rows.plan
    assert plan is not None
    assert plan.level_px is not None
    level_px = view.board.rows.mapTo(view, QPointF(0, plan.level_px)).y()
    assert not said.ink.top() - 2 < level_px < said.ink.bottom() + 2


@pytest.mark.parametrize("size_px", [(1200, 760), (1440, 900), (1920, 1080)], ids=str)
def test_the_names_of_the_margins_sides_keep_off_the_lines(qtbot: QtBot, size_px: tuple[int, int]) -> None:
    for hour in (6.3, 11.0, 13.0 + 20 / 60, 15.0, 18.0, 20.5, 23.5):
        state = states.board(15, hour)
        view, _image = shown_view(state, size_px=size_px, page=PageName.MARGIN)
        qtbot.addWidget(view)
        assert state.observation is not None
        now_px = next(one for one in placed_of(view, "MarginPage") if one.text.text.startswith("now ")).ink.center().x()
        names = [one for one in placed_of(view, "MarginPlot") if one.text.text.startswith(("near limit", "HOLD side"))]
        assert len(names) == 2
        for name in names:
            assert name.ink.left() > now_px + 10 or name.ink.right() < now_px - 14
