"""The states of a limit, an operation and an aircraft."""

from collections.abc import Iterable
from enum import StrEnum


class State(StrEnum):
    """What the board says, as files and JSON have it."""

    GO = "go"
    NEAR = "near"
    REDUCED = "reduced"
    HOLD = "hold"
    NO_DATA = "no_data"

    @property
    def severity(self) -> int:
        """Greater is worse: hold, no data, reduced, near, go."""
        return _SEVERITY[self]


_SEVERITY = {State.GO: 0, State.NEAR: 1, State.REDUCED: 2, State.NO_DATA: 3, State.HOLD: 4}


def worst(states: Iterable[State]) -> State:
    """Return the worst of the states; of none at all, NO DATA."""
    return max(states, key=lambda state: state.severity, default=State.NO_DATA)
