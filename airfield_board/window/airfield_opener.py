"""Asking for a profile and reading it, away from the window's thread, before anything else is given up for it."""

from pathlib import Path

from PySide6.QtCore import QObject, Signal
from PySide6.QtWidgets import QFileDialog, QWidget

from airfield_board.configuration.profile import load_airfield
from airfield_board.window.background import Background, Outcome
from airfield_board.window.next_window import AirfieldNext


class AirfieldOpener(QObject):
    """Opens another airfield's profile.

    Signals
    -------
    opened(object)
        An `AirfieldNext`: the profile and its fleet are valid.
    refused(object)
        Why they are not, a str.

    Parameters
    ----------
    window
        Above which the question stands.
    """

    opened = Signal(object)
    refused = Signal(object)

    def __init__(self, window: QWidget) -> None:
        super().__init__(window)
        self._window = window
        self._background = Background("profile", self)
        self._background.ended.connect(self._take)

    def ask(self) -> None:
        """Ask for a profile."""
        dialog = QFileDialog(self._window, "Open an airfield's profile", str(Path.home()))
        dialog.setFileMode(QFileDialog.FileMode.ExistingFile)
        dialog.setNameFilters(["Airfield profiles (*.yaml *.yml)", "All files (*)"])
        dialog.fileSelected.connect(lambda name: self.open(Path(name)))
        dialog.finished.connect(dialog.deleteLater)
        dialog.open()

    def open(self, path: Path) -> None:
        """Read a profile and its fleet."""
        self._background.do(lambda: AirfieldNext(profile_path=path, airfield=load_airfield(path)))

    def _take(self, outcome: Outcome) -> None:
        if isinstance(outcome.made, AirfieldNext):
            self.opened.emit(outcome.made)
        else:
            self.refused.emit(outcome.problem)
