"""What the wall view shows, and when it stops trusting what it was given."""

from dataclasses import replace
from datetime import timedelta

import pytest
from PySide6.QtCore import QPointF
from pytestqt.qtbot import QtBot

from airfield_board.limits.states import State
from airfield_board.session.board_state import BoardState, Message, Mode, SettingChange, Weight
from airfield_board.window.palette import DARK, LIGHT
from airfield_board.window.picture import image_of
from airfield_board.window.reading import Frame
from airfield_board.window.wall_size import WallSetup
from airfield_board.window.wall_view import WallView
from tests.window import states
from tests.window.painting import lead_of_red_or_green, pixels
from tests.window.wall_boards import FULL_HD, many, shown_wall, words


def wall(qtbot: QtBot, state: BoardState, **how: object) -> WallView:
    view, _image = shown_wall(state, **how)  # type: ignore[arg-type]  # passed on as they are
    qtbot.addWidget(view)
    return view


def frame_of(view: WallView) -> Frame | None:
    """Return what frames the view now."""
    return view.overlay.frame


def test_the_air_its_age_the_field_and_the_time_are_shown(qtbot: QtBot) -> None:
    view = wall(qtbot, states.board(14))
    head = words(view, "WallHeader")
    for text in ("6,830", "±60", "+220", "30.4", "6.0", "30.00", "+23.4", "Observed 13:10", "10", "min old", "Fresh"):
        assert text in head
    for text in ("stale at 60", "Cinder Mesa", "13:20", ":00", "20:20", "UTC", "ft at 13:10"):
        assert text in head
    assert "observations.csv · north end sensor" in words(view, "WallFoot")
    assert "LIVE" in words(view)


def test_the_caution_stands_on_every_wall(qtbot: QtBot) -> None:
    # Contract, section 6.
    caution = "Limits of the air only: not runway, wind, load or surface. HOLD: do not begin."
    for make in (states.board, states.stale_board, states.empty_board):
        for count in (8, 60):
            assert caution in words(wall(qtbot, many(count, make)))


def test_rows_say_what_the_board_says(qtbot: QtBot) -> None:
    rows = words(wall(qtbot, states.board(14)), "WallRows")
    for text in ("Motor glider", "Self-launch", "−380", "clears at or below 6,300 ft", "for 10 min"):
        assert text in rows
    for text in ("to 2,410 lb", "greatest weight 2,450 lb", "+11.6 °C", "outside its table", "DA now 6,830 ft"):
        assert text in rows
    assert "margin may be gone by 13:34" in rows
    assert not [text for text in rows if "expected" in text]


def test_the_greatest_weight_of_a_reduced_row_stands_in_two_columns_too(qtbot: QtBot) -> None:
    rows = words(wall(qtbot, many(60)), "WallRows")
    assert rows.count("REDUCED") >= 1
    assert rows.count("to 2,410 lb") == rows.count("REDUCED")


def test_a_go_row_whose_margin_may_be_gone_is_listed(qtbot: QtBot) -> None:
    state = many(60)
    first = state.operations[0]
    assert first.shown is not None
    assert first.state is State.GO
    soon = replace(first.shown, gone_by=state.assessed_at + timedelta(minutes=12))
    marked = replace(first, aircraft_name="Watched type", shown=soon)
    assert "Watched type" not in words(wall(qtbot, state), "WallRows")
    rows = words(wall(qtbot, replace(state, operations=(marked, *state.operations[1:]))), "WallRows")
    assert "Watched type" in rows
    assert any(text.endswith(" more GO") for text in rows)


def test_the_level_leaves_the_curve_and_cuts_the_rows(qtbot: QtBot) -> None:
    """The plot puts the air where the level's leader begins, within a pixel; rows on HOLD are tinted."""
    view = wall(qtbot, states.board(14))
    plan, plot = view.rows.plan, view.rows.plot
    assert plan is not None
    assert plan.level is not None
    assert plot is not None
    y = plot.box.mapFromView(QPointF(0.0, 6826.0)).y() + plot.y()
    image = pixels(image_of(view))
    accent = (0x1A, 0x4F, 0xA0)
    x = view.rows.x() + plot.x() + plot.width() - 4
    column = image[:, x].tolist()
    found = [row for row, colour in enumerate(column) if tuple(colour) == accent]
    assert any(abs(row + 0.5 - (y + view.rows.y())) <= 2.0 for row in found)
    water = (0xE3, 0xEC, 0xF7)
    for box in plan.boxes:
        row = states.board(14).operations[box.rows[0]]
        ground = tuple(image[int(view.rows.y() + box.middle_px - box.height_px / 2 + 1), view.rows.x() + 1860].tolist())
        assert (ground == water) == (row.state in (State.HOLD, State.REDUCED))


def test_without_a_plot_there_is_none(qtbot: QtBot) -> None:
    view = wall(qtbot, states.board(14))
    assert view.rows.plot is not None
    assert view.rows.plot.isVisibleTo(view)
    shown_wall(many(60), view=view)
    assert not view.rows.plot.isVisibleTo(view)
    shown_wall(states.board(14), view=view)
    assert view.rows.plot.isVisibleTo(view)


def test_a_reading_that_goes_stale_takes_all_away_without_a_new_state(qtbot: QtBot) -> None:
    state = states.board(14)
    view = wall(qtbot, state)
    assert state.observation is not None
    at = state.observation.time + timedelta(minutes=60, seconds=1)
    _view, image = shown_wall(state, view=view, now=at)
    rows = words(view, "WallRows")
    assert rows.count("NO DATA") == 14
    assert not {"GO", "HOLD", "NEAR LIMIT", "REDUCED"} & set(rows)
    assert not any(text.startswith("DA now") for text in rows)
    head = words(view, "WallHeader")
    for text in ("NO DATA", "No current observation", "Last 13:10, stale at 60 min", "last known 6,830 ft at 13:10"):
        assert text in head
    assert "Stale at 60" in head
    assert "6,830" not in head
    assert "LIVE" not in words(view)
    assert frame_of(view) is Frame.NO_DATA
    assert "NO DATA" in words(view, "FrameOverlay")
    assert lead_of_red_or_green(image) <= 3
    shown_wall(state, view=view)
    assert "GO" in words(view, "WallRows")


def test_a_hung_recorder_is_no_data(qtbot: QtBot) -> None:
    state = states.board(14)
    view = wall(qtbot, state)
    view.set_watchdog(timedelta(seconds=10))
    shown_wall(state, view=view, now=state.assessed_at + timedelta(seconds=10))
    assert "GO" in words(view, "WallRows")
    shown_wall(state, view=view, now=state.assessed_at + timedelta(seconds=11))
    assert words(view, "WallRows").count("NO DATA") == 14
    assert "The board has stopped" in words(view, "WallHeader")
    assert "Stopped" in words(view, "WallHeader")


def test_the_frame_takes_the_precedence_and_the_others_are_named(qtbot: QtBot) -> None:
    waiting = (SettingChange(where="Two-seat trainer · Departure", in_force="6,350 ft", waiting="6,500 ft"),)
    state = replace(states.board(14, mode=Mode.DEMO), waiting=waiting)
    view = wall(qtbot, state)
    assert frame_of(view) is Frame.DEMO
    assert words(view, "FrameOverlay").count("DEMO") >= 10
    assert {"SETTINGS WAITING", "INVENTED FIELD"} <= set(words(view))
    shown_wall(replace(state, recording=False), view=view)
    assert frame_of(view) is Frame.NOT_RECORDING
    assert "DEMO" in words(view, "WallView")
    shown_wall(states.board(14), view=view)
    assert frame_of(view) is None
    assert not view.overlay.isVisibleTo(view)


@pytest.mark.parametrize("mode", [Mode.DEMO, Mode.TRAINING, Mode.PAST])
def test_a_framed_view_has_its_band_on_all_four_sides(qtbot: QtBot, mode: Mode) -> None:
    plain = pixels(shown_wall(states.board(14))[1])
    view, image = shown_wall(states.board(14, mode=mode))
    qtbot.addWidget(view)
    framed = pixels(image)
    band = {Mode.DEMO: (0x0A, 0x54, 0x70), Mode.TRAINING: (0x5A, 0x2A, 0x91), Mode.PAST: (0x4A, 0x58, 0x66)}[mode]
    for x, y in ((3, 540), (1916, 540), (100, 3), (100, 1076)):
        assert tuple(framed[y, x].tolist()) == band
        assert tuple(plain[y, x].tolist()) != band


def test_typed_in_is_said(qtbot: QtBot) -> None:
    state = states.board(14)
    assert state.observation is not None
    view = wall(qtbot, replace(state, observation=replace(state.observation, initials="MS")))
    assert "TYPED IN" in words(view)
    assert "LIVE" not in words(view)
    assert "TYPED IN by MS · north end sensor" in words(view, "WallFoot")


def test_an_ageing_reading_is_said(qtbot: QtBot) -> None:
    view = wall(qtbot, states.board(14, age_min=45.0))
    assert "Ageing" in words(view, "WallHeader")
    level = [text for text in words(view, "WallRows") if text.startswith("DA ") and text.endswith(" ft")]
    assert level == ["DA at 12:35 6,690 ft"]


@pytest.mark.parametrize("count", [14, 40])
def test_a_row_without_data_stays_on_its_side_of_the_level(qtbot: QtBot, count: int) -> None:
    state = states.board(count)
    rows = []
    for row in state.operations:
        if row.aircraft_name in ("Motor glider", "Single-seat aerobatic"):
            assert row.shown is not None
            blank = replace(row.shown, state=State.NO_DATA, margin=None, reason="suspect reading")
            rows.append(replace(row, state=State.NO_DATA, shown=blank))
        else:
            rows.append(row)
    view = wall(qtbot, replace(state, operations=tuple(rows)))
    plan = view.rows.plan
    assert plan is not None
    assert plan.level is not None
    # Of the invented limits, 6,450 ft lies under the air's 6,830 ft, and 7,150 ft over it.
    sides = {
        rows[box.rows[0]].aircraft_name: (box.column, box.middle_px) > plan.level
        for box in plan.boxes
        if len(box.rows) == 1
    }
    assert sides["Motor glider"]
    assert not sides["Single-seat aerobatic"]


def test_guarded_acceptance_shows_the_value_compared(qtbot: QtBot) -> None:
    # 6,826 + 58 = 6,884, rounded up to 6,890.
    head = words(wall(qtbot, replace(states.board(14), guarded=True)), "WallHeader")
    assert "guarded:" in head
    assert "6,890 ft is compared" in head


def test_changes_that_wait_come_first(qtbot: QtBot) -> None:
    foot = words(wall(qtbot, states.board(14)), "WallFoot")
    assert foot[0] == "1 not acknowledged"
    assert "Four-seat tourer, 4 up · Departure" in foot
    assert "since 12:20" in foot
    assert "no status changes today" in words(wall(qtbot, replace(states.board(14), changes=())), "WallFoot")


def test_the_loudest_message_is_shown_as_plain_text(qtbot: QtBot) -> None:
    warning = Message(topic="observation", weight=Weight.WARNING, text="The temperature has not changed for 6 h")
    alarm = Message(topic="settings", weight=Weight.ALARM, text="<b>fleet.yaml:12</b>: a limit is expected")
    view = wall(qtbot, replace(states.board(14), messages=(warning, alarm)))
    assert words(view, "WallMessage") == ["and 1 more", "Settings", "<b>fleet.yaml:12</b>: a limit is expected"]
    shown_wall(states.board(14), view=view)
    assert words(view, "WallMessage") == []


def test_light_and_dark(qtbot: QtBot) -> None:
    view, image = shown_wall(states.board(14))
    qtbot.addWidget(view)
    assert tuple(pixels(image)[1078, 2].tolist()) == (0xE9, 0xED, 0xF1)
    assert view.rows.colours == LIGHT
    _view, image = shown_wall(states.board(14), view=view, scheme="dark")
    assert tuple(pixels(image)[1078, 2].tolist()) == (0x0B, 0x11, 0x17)
    assert view.rows.colours == DARK


def test_another_distance_changes_the_words_at_once(qtbot: QtBot) -> None:
    view = wall(qtbot, states.board(8))
    plan = view.rows.plan
    assert plan is not None
    assert plan.word_px == 49
    view.set_setup(WallSetup(diagonal_in=43.0, distance_m=4.0))
    farther = view.rows.plan
    assert farther is not None
    assert farther.word_px == 65  # 2 x 4000 mm x tan 10' / 0.4958 mm / 0.727 = 64.6


def test_the_plot_comes_after_the_first_picture(qtbot: QtBot) -> None:
    view = WallView(lambda: FULL_HD)
    qtbot.addWidget(view)
    view.show_state(states.board(14), states.board(14).assessed_at)
    assert view.rows.plot is None
    view.show()
    qtbot.waitUntil(lambda: view.rows.plot is not None)


def test_parts_have_names_for_screen_readers(qtbot: QtBot) -> None:
    view = wall(qtbot, states.board(14))
    assert "HOLD, Motor glider · Self-launch, margin −380" in view.rows.accessibleDescription()
    assert "Cinder Mesa, Density altitude 6,830 ft, 10 min old" in view.header.accessibleDescription()
    for part in (view.header, view.message, view.rows, view.foot):
        assert part.accessibleName()
    stale = wall(qtbot, states.stale_board(14))
    assert "NO DATA" in stale.header.accessibleDescription()
