"""The ways from a running board to another airfield; the board goes on until the other one is known to be valid."""

from pathlib import Path

import platformdirs
from PySide6.QtCore import QObject, Signal
from PySide6.QtWidgets import QWidget

from airfield_board.clock import SystemClock
from airfield_board.window.airfield_opener import AirfieldOpener
from airfield_board.window.set_up_window import SetUpWindow
from airfield_board.window.theme import SchemeChoice

_ANOTHER = "Three short steps make another airfield. The board goes on beside this window until its files are written."


class OtherAirfields(QObject):
    """Opens another airfield's profile, or sets a new one up in a window beside the board.

    Signals
    -------
    going_to(object)
        A `NextWindow`: the board is to be left for it.
    refused(object)
        Why a profile was not opened, a str.

    Parameters
    ----------
    window
        The board's.
    """

    going_to = Signal(object)
    refused = Signal(object)

    def __init__(self, window: QWidget) -> None:
        super().__init__(window)
        self.opener = AirfieldOpener(window)
        self.opener.opened.connect(self.going_to)
        self.opener.refused.connect(self.refused)
        self._set_up: SetUpWindow | None = None

    @property
    def set_up(self) -> SetUpWindow | None:
        """The window of the set-up; None where it is not open."""
        return self._set_up if self._set_up is not None and self._set_up.isVisible() else None

    def open_another(self) -> None:
        """Ask for another airfield's profile."""
        self.opener.ask()

    def set_up_another(self, choice: SchemeChoice) -> None:
        """Open the set-up, in the board's look, or bring it to the front."""
        window = self.set_up
        if window is None:
            documents = Path(platformdirs.user_documents_dir())
            window = self._set_up = SetUpWindow(SystemClock(), choice=choice, documents=documents, note=_ANOTHER)
            window.going_to.connect(self.going_to)
            window.show()
            window.start()
        window.raise_()
        window.activateWindow()

    def set_scheme(self, choice: SchemeChoice) -> None:
        """Take another look where the set-up is open."""
        if self._set_up is not None:
            self._set_up.choose_scheme(choice)

    def close(self) -> None:
        """Close the set-up: it does not outlive the board."""
        if self._set_up is not None:
            self._set_up.close()
