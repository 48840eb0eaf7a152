"""Says aloud, through a screen reader, what has come to HOLD or NO DATA."""

from collections.abc import Mapping, Sequence

from PySide6.QtCore import QObject, Signal
from PySide6.QtGui import QAccessible, QAccessibleAnnouncementEvent
from PySide6.QtWidgets import QWidget

from airfield_board.limits.states import State
from airfield_board.session.board_state import OperationLine
from airfield_board.window import formatting
from airfield_board.window.reading import View

_SAID = (State.HOLD, State.NO_DATA)
_NAMED_AT_MOST = 6
"""Of more rows that changed alike, only how many they are is said."""


class Announcer(QObject):
    """Follows the rows as they are shown, the window's own NO DATA included.

    Signals
    -------
    announced(str)
        What was said.

    Parameters
    ----------
    speaker
        The widget in whose name it is said.
    """

    announced = Signal(str)

    def __init__(self, speaker: QWidget) -> None:
        super().__init__(speaker)
        self._speaker = speaker
        self._airfield = ""
        self._states: dict[str, State] | None = None

    def show_view(self, view: View) -> None:
        """Take another view, and say what came to HOLD or NO DATA since the one before; of the first view nothing."""
        rows = view.rows
        before = self._states if view.state.airfield.name == self._airfield else None
        self._airfield = view.state.airfield.name
        self._states = {row.key: row.state for row in rows}
        if before is None or before == self._states:
            return
        words = announcement(before, rows)
        if not words:
            return
        if QAccessible.isActive():
            event = QAccessibleAnnouncementEvent(self._speaker, words)
            event.setPoliteness(QAccessible.AnnouncementPoliteness.Assertive)
            QAccessible.updateAccessibility(event)
        self.announced.emit(words)


def announcement(before: Mapping[str, State], rows: Sequence[OperationLine]) -> str:
    """Put into words which rows have come to HOLD or NO DATA; empty where none has.

    Parameters
    ----------
    before
        The states of the rows, by key; a row that was not there counts as one that has changed.
    rows
        As they are now.
    """
    sentences = []
    for state in _SAID:
        changed = [row for row in rows if row.state is state and before.get(row.key) is not state]
        if not changed:
            continue
        if len(changed) == len(rows) > 1:
            names = f"all {len(rows)} operations"
        elif len(changed) > _NAMED_AT_MOST:
            names = f"{len(changed)} operations"
        else:
            names = ", ".join(formatting.full_name(row) for row in changed)
        sentences.append(f"{formatting.STATE_WORDS[state]}: {names}.")
    return " ".join(sentences)
