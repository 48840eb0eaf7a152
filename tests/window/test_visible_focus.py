"""Wherever the keyboard can go, the eye can see that it is there."""

from dataclasses import replace

import numpy as np
import pytest
from PySide6.QtCore import Qt
from PySide6.QtWidgets import QApplication, QWidget
from pytestqt.qtbot import QtBot

from airfield_board.session.board_state import BoardState, Message, Weight
from airfield_board.window.board_view import BoardView, PageName
from airfield_board.window.picture import image_of
from tests.window import states
from tests.window.painting import pixels, shown_view

MESSAGE = Message(topic="source", weight=Weight.WARNING, text="observations.csv cannot be read.")


def reached(view: BoardView) -> list[QWidget]:
    """Return the parts that Tab reaches, in order."""
    first = view.header
    parts: list[QWidget] = [first]
    part = first.nextInFocusChain()
    while part is not None and part is not first:
        by_tab = bool(part.focusPolicy().value & Qt.FocusPolicy.TabFocus.value)
        if by_tab and part.isVisibleTo(view) and part.isEnabled() and view.isAncestorOf(part):
            parts.append(part)
        part = part.nextInFocusChain()
    return parts


@pytest.mark.parametrize("page", list(PageName))
@pytest.mark.parametrize("scheme", ["light", "dark"])
@pytest.mark.parametrize(
    "state",
    [
        replace(states.board(), messages=(MESSAGE,)),
        replace(states.board(), changes=()),
        states.stale_board(),
        replace(states.board(), operations=()),
    ],
    ids=["day", "no changes", "stale", "no operations"],
)
def test_every_part_that_tab_reaches_shows_it(qtbot: QtBot, page: PageName, scheme: str, state: BoardState) -> None:
    view, _image = shown_view(state)
    qtbot.addWidget(view)
    view.set_scheme(scheme)
    view.set_page(page)
    view.show()
    qtbot.waitActive(view)
    image_of(view)
    parts = reached(view)
    names = [part.accessibleName() for part in parts]
    assert all(names)
    assert names[0] == "Airfield, pages and time"
    assert "Operations" in names
    assert names[-1] == "Status changes"
    unseen = []
    for part in parts:
        focused = QApplication.focusWidget()
        if focused is not None:
            focused.clearFocus()
        image_of(view)
        without = pixels(image_of(view)).astype(int)
        part.setFocus(Qt.FocusReason.TabFocusReason)
        qtbot.waitUntil(part.hasFocus)
        image_of(view)
        with_it = pixels(image_of(view)).astype(int)
        differing = int((np.abs(with_it - without).max(axis=2) > 40).sum())
        # A ring of 2 px around something of 20 by 20 has some 160 pixels.
        if differing < 100:
            unseen.append((part.accessibleName(), differing))
    assert unseen == []
