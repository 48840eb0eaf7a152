"""How large everything is shown: kept from one start to the next, and told to Qt before it begins.

Qt enlarges text, marks, rows and dialogs alike, so that nothing is cut that is not cut in a smaller window; the layouts
leave columns out where there is less room. It takes the factor only when it begins.
"""

from collections.abc import MutableMapping
from pathlib import Path

from PySide6.QtCore import QSettings, QSize

TEXT_SIZES_PERCENT = (100, 125, 150, 175, 200)
FACTOR_VARIABLE = "QT_SCALE_FACTOR"
_KEY = "text_size_percent"


class TextSize:
    """The text size in use, and the one for the next start.

    Parameters
    ----------
    place
        The file in which it is kept.
    environment
        Of the process; a factor that the user has set there stays, and the text size comes on top of it.

    Attributes
    ----------
    percent
        In use since `begin`.
    """

    def __init__(self, place: Path, environment: MutableMapping[str, str]) -> None:
        self._settings = QSettings(str(place), QSettings.Format.IniFormat)
        self._environment = environment
        self._before = environment.get(FACTOR_VARIABLE)
        self.percent = TEXT_SIZES_PERCENT[0]

    def kept(self) -> int:
        """Return the size for the next start; the plain one where none is kept, or none of those to choose from."""
        kept = self._settings.value(_KEY)
        return next((each for each in TEXT_SIZES_PERCENT if str(each) == kept), TEXT_SIZES_PERCENT[0])

    def keep(self, percent: int) -> bool:
        """Keep a size for the next start; return whether it could be written down."""
        self._settings.setValue(_KEY, str(percent))
        self._settings.sync()
        return self._settings.status() is QSettings.Status.NoError

    def begin(self) -> None:
        """Tell Qt, which must not have begun."""
        self.percent = self.kept()
        if self.percent != TEXT_SIZES_PERCENT[0]:
            self._environment[FACTOR_VARIABLE] = str(_number(self._before) * self.percent / 100)

    def end(self) -> None:
        """Leave the environment as it was found, for a process that is started from it."""
        if self._before is None:
            self._environment.pop(FACTOR_VARIABLE, None)
        else:
            self._environment[FACTOR_VARIABLE] = self._before

    def fits(self, percent: int, screen: QSize, smallest: QSize) -> bool:
        """Return whether the smallest window fits on a screen at a size.

        Parameters
        ----------
        screen
            At the size in use.
        smallest
            At any size: it is given in the units that grow with it.
        """
        room = screen * (self.percent / percent)
        return smallest.width() <= room.width() and smallest.height() <= room.height()


def _number(text: str | None) -> float:
    try:
        factor = float(text or "")
    except ValueError:
        return 1.0
    return factor if 0.1 <= factor <= 10.0 else 1.0
