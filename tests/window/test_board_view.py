"""What the view shows and asks: its signals, its keys, its frame, and that painting loses no references."""

import sys
from dataclasses import replace
from datetime import timedelta
from pathlib import Path

import pytest
from PySide6.QtCore import QPointF, Qt
from PySide6.QtTest import QTest
from PySide6.QtWidgets import QWidget
from pytestqt.qtbot import QtBot

from airfield_board.limits.states import State
from airfield_board.session.board_state import BoardState, Message, Mode, Weight
from airfield_board.window.board_view import BoardView, PageName
from airfield_board.window.frame_overlay import BAND_PX
from airfield_board.window.palette import DARK, LIGHT
from airfield_board.window.picture import image_of, paint_page, save_page, void_after
from airfield_board.window.reading import Frame
from tests.window import states
from tests.window.painting import Placed, pixels, shown_view, texts_of


def shown(qtbot: QtBot, state: BoardState, size_px: tuple[int, int] = (1440, 900)) -> BoardView:
    """Return a view on the screen."""
    view, _image = shown_view(state, size_px=size_px)
    qtbot.addWidget(view)
    view.show()
    qtbot.waitExposed(view)
    image_of(view)
    return view


def frame_of(view: BoardView) -> Frame | None:
    """Return what frames the view now."""
    return view.overlay.frame


def find(view: BoardView, text: str, part: str = "") -> Placed:
    """Return the first text painted so."""
    return next(one for one in texts_of(view) if one.text.text == text and part in one.part)


def click(view: BoardView, widget: QWidget, placed: Placed) -> None:
    """Press the mouse on a text."""
    at = widget.mapFrom(view, placed.ink.center().toPoint())
    QTest.mouseClick(widget, Qt.MouseButton.LeftButton, Qt.KeyboardModifier.NoModifier, at)


def words(view: BoardView, part: str = "") -> list[str]:
    """Return all texts painted by a part."""
    return [one.text.text for one in texts_of(view) if part in one.part]


def test_the_strip_shows_the_air_and_its_source(qtbot: QtBot) -> None:
    view = shown(qtbot, states.board())
    strip = words(view, "ObservationStrip")
    for text in ("6,830", "±60", "4,050", "+23.4", "+220", "rising", "30.00", "30.4", "6.0", "10", "Fresh"):
        assert text in strip
    assert "observations.csv · north end sensor" in strip
    assert "stale at 60" in strip


def test_the_strip_says_that_a_reading_was_typed_in(qtbot: QtBot) -> None:
    state = states.board()
    assert state.observation is not None
    view = shown(qtbot, replace(state, observation=replace(state.observation, initials="MS")))
    assert "TYPED IN by MS · north end sensor" in words(view, "ObservationStrip")
    assert "TYPED IN" in words(view, "Header")
    assert "LIVE" not in words(view, "Header")


def test_the_strip_says_where_a_dew_point_comes_from(qtbot: QtBot) -> None:
    view = shown(qtbot, states.board(dewpoint=False))
    assert "Dew point, carried" in words(view, "ObservationStrip")


def test_guarded_acceptance_shows_the_value_compared(qtbot: QtBot) -> None:
    # 6,826 + 58 = 6,884, rounded up to 6,890.
    view = shown(qtbot, replace(states.board(), guarded=True))
    assert "guarded: 6,890 ft is compared" in words(view, "ObservationStrip")


def test_a_reading_that_goes_stale_takes_all_away_without_a_new_state(qtbot: QtBot) -> None:
    state = states.board()
    view = shown(qtbot, state)
    assert "GO" in words(view, "RowPanel")
    assert state.observation is not None
    view.show_state(state, state.observation.time + timedelta(minutes=60, seconds=1))
    image_of(view)
    rows = words(view, "RowPanel")
    assert rows.count("NO DATA") == 15
    assert not {"GO", "HOLD", "NEAR LIMIT", "REDUCED"} & set(rows)
    strip = words(view, "ObservationStrip")
    assert "NO DATA" in strip
    assert "6,830" not in strip
    assert "last known 6,830 ft at 13:10" in strip
    assert "Stale at 60" in strip
    assert "No current observation" in words(view, "NoDataCard")
    view.show_state(state, state.assessed_at)
    image_of(view)
    assert "GO" in words(view, "RowPanel")
    assert not view.board.card.isVisible()


def test_a_stopped_recorder_is_not_called_fresh(qtbot: QtBot) -> None:
    state = states.board()
    view = shown(qtbot, state)
    view.set_watchdog(timedelta(seconds=10))
    view.show_state(state, state.assessed_at + timedelta(seconds=11))
    image_of(view)
    assert "Stopped" in words(view, "ObservationStrip")
    assert "Fresh" not in words(view, "ObservationStrip")
    assert "The board has stopped" in words(view, "NoDataCard")


def test_the_frame_takes_the_precedence(qtbot: QtBot) -> None:
    state = states.board(mode=Mode.DEMO)
    view = shown(qtbot, state)
    assert frame_of(view) is Frame.DEMO
    assert "invented field" in words(view, "Header")
    assert words(view, "FrameOverlay").count("DEMO") >= 2 * (1440 // 160)
    view.show_state(replace(state, recording=False), state.assessed_at)
    assert frame_of(view) is Frame.NOT_RECORDING
    image_of(view)
    assert "DEMO" in words(view, "Header")
    view.show_state(state, state.assessed_at + timedelta(hours=3))
    assert frame_of(view) is Frame.NO_DATA
    view.show_state(replace(state, mode=Mode.LIVE), state.assessed_at)
    assert frame_of(view) is None
    image_of(view)
    assert "LIVE" in words(view, "Header")


@pytest.mark.parametrize("mode", [Mode.DEMO, Mode.TRAINING, Mode.PAST])
def test_a_framed_view_has_its_band_on_all_four_sides(qtbot: QtBot, mode: Mode) -> None:
    view = shown(qtbot, states.board(mode=mode))
    seen = pixels(image_of(view))
    plain = pixels(image_of(shown(qtbot, states.board())))
    corners = {tuple(seen[y, x].tolist()) for y in (2, -3) for x in (2, -3)}
    assert len(corners) == 1
    assert corners != {tuple(plain[2, 2].tolist())}
    assert view.header.x() == BAND_PX


def test_pages_are_asked_for_and_shown(qtbot: QtBot) -> None:
    view = shown(qtbot, states.board())
    asked: list[int] = []
    view.page_asked.connect(asked.append)
    click(view, view.header, find(view, "Margin", "Header"))
    assert asked == [PageName.MARGIN]
    QTest.keyClick(view.header, Qt.Key.Key_Right)
    assert asked == [PageName.MARGIN, PageName.MARGIN]
    view.set_page(PageName.MARGIN)
    image_of(view)
    assert "Operations shown" in words(view, "MarginPage")


def test_rows_are_pointed_at_by_mouse_and_keys(qtbot: QtBot) -> None:
    state = states.board()
    view = shown(qtbot, state)
    keys = [row.key for row in state.operations]
    asked: list[str] = []
    view.selected.connect(asked.append)
    click(view, view.board.rows, find(view, "Motor glider", "RowPanel"))
    assert asked[-1] == next(row.key for row in state.operations if row.aircraft_name == "Motor glider")
    rows = view.board.rows
    QTest.keyClick(rows, Qt.Key.Key_Escape)
    assert asked[-1] == ""
    for _ in range(2):
        QTest.keyClick(rows, Qt.Key.Key_Down)
    assert asked[-1] == keys[1]
    QTest.keyClick(rows, Qt.Key.Key_Up)
    assert asked[-1] == keys[0]
    QTest.keyClick(rows, Qt.Key.Key_End)
    assert asked[-1] == keys[-1]
    QTest.keyClick(rows, Qt.Key.Key_Home)
    QTest.keyClick(rows, Qt.Key.Key_Return)
    assert rows.chosen == keys[0]


def test_a_pinned_row_stays_when_the_pointer_moves_on(qtbot: QtBot) -> None:
    view = shown(qtbot, states.board())
    rows = view.board.rows
    click(view, rows, find(view, "Motor glider", "RowPanel"))
    pinned = rows.chosen
    other = find(view, "Six-seat utility", "RowPanel").ink.center().toPoint()
    QTest.mouseMove(rows, rows.mapFrom(view, other))
    assert rows.chosen == pinned


def test_the_button_acknowledges_the_newest_that_waits(qtbot: QtBot) -> None:
    view = shown(qtbot, states.board())
    asked: list[tuple[int, ...]] = []
    view.acknowledge_asked.connect(asked.append)
    click(view, view.changes, find(view, "Acknowledge"))
    # The invented changes are numbered 90, 89, 88 ...; the third is the open one.
    assert asked == [(88,)]
    assert [change.number for change in view.changes.open_changes()] == [88]


def test_enter_acknowledges_the_change_that_was_chosen(qtbot: QtBot) -> None:
    state = states.board()
    opened = tuple(replace(change, acknowledged_by="") for change in state.changes)
    view = shown(qtbot, replace(state, changes=opened))
    asked: list[tuple[int, ...]] = []
    view.acknowledge_asked.connect(asked.append)
    click(view, view.changes, find(view, "Motor glider · Self-launch", "ChangesStrip"))
    focused = view.changes.focused_change()
    assert focused is not None
    assert focused.label == "Motor glider · Self-launch"
    QTest.keyClick(view.changes, Qt.Key.Key_Return)
    assert asked == [(focused.number,)]
    QTest.keyClick(view.changes, Qt.Key.Key_Left)
    QTest.keyClick(view.changes, Qt.Key.Key_Return)
    assert asked[-1] == (focused.number + 1,)


def test_with_nothing_to_acknowledge_the_button_asks_nothing(qtbot: QtBot) -> None:
    state = states.board()
    view = shown(qtbot, replace(state, changes=tuple(replace(c, acknowledged_by="MS") for c in state.changes)))
    asked: list[object] = []
    view.acknowledge_asked.connect(asked.append)
    click(view, view.changes, find(view, "Acknowledge"))
    assert asked == []
    assert "all acknowledged" in words(view, "ChangesStrip")


@pytest.mark.parametrize("page", list(PageName))
def test_the_card_asks_to_poll_and_to_type_in(qtbot: QtBot, page: PageName) -> None:
    view = shown(qtbot, states.stale_board())
    view.set_page(page)
    image_of(view)
    asked: list[str] = []
    view.poll_asked.connect(lambda: asked.append("poll"))
    view.type_in_asked.connect(lambda: asked.append("type"))
    card = (view.board.card, view.margin.card)[page]
    click(view, card, find(view, "Poll now"))
    click(view, card, find(view, "Type it in"))
    QTest.keyClick(card, Qt.Key.Key_Right)
    QTest.keyClick(card, Qt.Key.Key_Return)
    assert asked == ["poll", "type", "type"]


def test_the_loudest_message_is_shown_and_asks_for_all(qtbot: QtBot) -> None:
    warning = Message(topic="observation", weight=Weight.WARNING, text="The temperature has not changed for 6 h")
    alarm = Message(topic="settings", weight=Weight.ALARM, text="<b>fleet.yaml:12</b>: a limit is expected")
    note = Message(topic="rows", weight=Weight.NOTE, text="a note")
    view = shown(qtbot, replace(states.board(), messages=(note, warning, alarm)))
    line = words(view, "MessageLine")
    assert "<b>fleet.yaml:12</b>: a limit is expected" in line
    assert "and 1 more" in line
    with qtbot.waitSignal(view.messages_asked, timeout=1000):
        QTest.mouseClick(view.message, Qt.MouseButton.LeftButton)
    view.show_state(states.board(), states.board().assessed_at)
    assert not view.message.isVisible()


def test_light_and_dark(qtbot: QtBot) -> None:
    view = shown(qtbot, states.board())
    assert tuple(pixels(image_of(view))[60, 5].tolist()) == (0xE9, 0xED, 0xF1)
    view.set_scheme("dark")
    assert view.board.rows.colours == DARK
    assert tuple(pixels(image_of(view))[60, 5].tolist()) == (0x0B, 0x11, 0x17)
    view.set_scheme("light")
    assert view.board.rows.colours == LIGHT


def test_plot_and_rows_share_one_axis(qtbot: QtBot) -> None:
    """The view box puts an altitude where the rows' leaders begin, within half a pixel."""
    view = shown(qtbot, states.board())
    plot, rows = view.board.plot, view.board.rows
    assert plot is not None
    assert rows.axis is not None
    for altitude_ft in (4500.0, 6350.0, 6826.0, 8999.0):
        y = plot.box.mapFromView(QPointF(0.0, altitude_ft)).y() + plot.y()
        assert y == pytest.approx(rows.axis.px(altitude_ft) + rows.y(), abs=0.5)


def test_the_plot_comes_after_the_first_picture(qtbot: QtBot) -> None:
    state = states.board()
    view = BoardView()
    qtbot.addWidget(view)
    view.show_state(state, state.assessed_at)
    assert view.board.plot is None
    view.show()
    qtbot.waitUntil(lambda: view.board.plot is not None)


def test_a_picture_bears_its_times_and_no_buttons(qtbot: QtBot) -> None:
    state = states.board()
    view, _image = shown_view(state)
    qtbot.addWidget(view)
    view.set_picture(void_after(state, state.assessed_at, trusted=True))
    image_of(view)
    seen = words(view)
    assert "as of Thu 16 Jul 2026, 13:20 (20:20 UTC)" in seen
    # Observed at 13:10, stale at 60 min.
    assert "void after 14:10 (21:10 UTC)" in seen
    assert "Acknowledge" not in seen


def test_a_picture_without_data_is_void(qtbot: QtBot) -> None:
    state = states.stale_board()
    assert void_after(state, state.assessed_at, trusted=False) is None
    view, _image = shown_view(state)
    qtbot.addWidget(view)
    view.set_picture(None)
    image_of(view)
    assert "void: NO DATA" in words(view)
    assert "Poll now" not in words(view)


@pytest.mark.parametrize("page", list(PageName))
def test_pictures_have_the_size_asked_for(qapp: object, page: PageName) -> None:
    state = states.board()
    image = paint_page(state, state.assessed_at, page=page, size_px=(1600, 1000), scheme="dark")
    assert (image.width(), image.height()) == (1600, 1000)


def test_a_picture_that_cannot_be_written_is_said(qapp: object, tmp_path: Path) -> None:
    state = states.board()
    with pytest.raises(OSError, match="cannot write the picture"):
        save_page(
            tmp_path / "no folder" / "board.png",
            state,
            state.assessed_at,
            page=PageName.BOARD,
            size_px=(1200, 760),
            scheme="light",
        )


def test_parts_have_names_for_screen_readers(qtbot: QtBot) -> None:
    view = shown(qtbot, states.board())
    rows = view.board.rows
    assert rows.accessibleName() == "Operations"
    assert "HOLD, Motor glider · Self-launch, margin −380" in rows.accessibleDescription()
    for part in (view.header, view.strip, view.changes, view.board.card, view.margin.picker):
        assert part.accessibleName()
    assert view.board.plot is not None
    assert view.board.plot.accessibleName()


def test_margin_page_shows_at_most_eight(qtbot: QtBot) -> None:
    state = states.board(24)
    view = shown(qtbot, state)
    view.set_page(PageName.MARGIN)
    first = view.margin.keys
    assert len(first) == 6
    others = [row.key for row in state.operations if row.key not in first and row.shown is not None]
    for key in others[:4]:
        view.margin.toggle(key)
    assert len(view.margin.keys) == 8
    view.margin.toggle(first[0])
    assert first[0] not in view.margin.keys
    assert len(view.margin.keys) == 7


def test_margin_page_starts_with_those_nearest_to_their_limit(qtbot: QtBot) -> None:
    state = states.board(15)
    view = shown(qtbot, state)
    view.set_page(PageName.MARGIN)
    # The air is at 6,825 ft: these six of the invented limits are nearest to it.
    chosen = [row.shown.limit for row in state.operations if row.key in view.margin.keys and row.shown is not None]
    assert chosen == [7300.0, 7150.0, 6950.0, 6760.0, 6650.0, 6450.0]


def test_the_search_narrows_the_list(qtbot: QtBot) -> None:
    view = shown(qtbot, states.board(24))
    view.set_page(PageName.MARGIN)
    view.margin.search.setText("  GLIDER ")
    image_of(view)
    listed = words(view, "OperationPicker")
    assert "Motor glider · Self-launch" in listed
    assert not [text for text in listed if "trainer" in text]


def test_ticking_a_box_shows_the_operation(qtbot: QtBot) -> None:
    state = states.board(15)
    view = shown(qtbot, state)
    view.set_page(PageName.MARGIN)
    image_of(view)
    click(view, view.margin.picker, find(view, "Six-seat utility · Departure", "OperationPicker"))
    image_of(view)
    assert "Six-seat utility" in words(view, "RowPanel")
    utility = next(row.key for row in state.operations if row.aircraft_name == "Six-seat utility")
    assert utility in view.margin.keys
    QTest.keyClick(view.margin.picker, Qt.Key.Key_Space)
    assert utility not in view.margin.keys


def test_painting_loses_no_references(qtbot: QtBot) -> None:
    """PySide6 6.12 on CPython 3.11 lost one at each void call and repaint, and aborted after some thousand."""
    state = states.board(8)
    view = shown(qtbot, state, (1200, 760))
    asked: list[int] = []
    view.header.page_asked.connect(asked.append)
    parts = (view.header, view.overlay, view.changes)
    for part in parts:
        part.repaint()
    singletons = (None, True, False)
    before = [sys.getrefcount(one) for one in singletons]
    for _ in range(1000):
        for part in parts:
            part.repaint()
        view.header.page_asked.emit(1)
    after = [sys.getrefcount(one) for one in singletons]
    assert len(asked) == 1000
    assert all(abs(now - then) < 500 for now, then in zip(after, before, strict=True))


def test_a_row_without_data_of_its_own_does_not_grey_the_board(qtbot: QtBot) -> None:
    view = shown(qtbot, states.board())
    assert frame_of(view) is None
    rows = words(view, "RowPanel")
    assert rows.count("NO DATA") == 1
    assert "outside its table" in rows
    assert State.NO_DATA in {row.state for row in states.board().operations}
