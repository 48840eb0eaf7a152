"""Light or dark: what the user chose, what the system says, and Qt's own widgets in the program's colours."""

from enum import StrEnum

from PySide6.QtCore import Qt
from PySide6.QtGui import QColor, QGuiApplication, QPalette
from PySide6.QtWidgets import QApplication

from airfield_board.window.fonts import font
from airfield_board.window.palette import Palette, Scheme, palette_for

_WORDS_PX = 14


class SchemeChoice(StrEnum):
    """What a user may choose."""

    LIGHT = "light"
    DARK = "dark"
    SYSTEM = "system"


def scheme_of(choice: SchemeChoice) -> Scheme:
    """Return the scheme to show; where the system does not say, the light one."""
    if choice is SchemeChoice.SYSTEM:
        dark = QGuiApplication.styleHints().colorScheme() is Qt.ColorScheme.Dark
        return Scheme.DARK if dark else Scheme.LIGHT
    return Scheme(choice.value)


def apply_scheme(scheme: Scheme) -> None:
    """Give menus, dialogs and buttons the scheme's colours and the program's typeface."""
    QApplication.setFont(font(_WORDS_PX))
    QApplication.setPalette(_qt_palette(palette_for(scheme, grey=False)))


def _qt_palette(colours: Palette) -> QPalette:
    palette = QPalette()
    for role, colour in (
        (QPalette.ColorRole.Window, colours.page),
        (QPalette.ColorRole.WindowText, colours.ink),
        (QPalette.ColorRole.Base, colours.card),
        (QPalette.ColorRole.AlternateBase, colours.cell),
        (QPalette.ColorRole.Text, colours.ink),
        (QPalette.ColorRole.PlaceholderText, colours.soft_ink),
        (QPalette.ColorRole.Button, colours.cell),
        (QPalette.ColorRole.ButtonText, colours.ink),
        (QPalette.ColorRole.ToolTipBase, colours.card),
        (QPalette.ColorRole.ToolTipText, colours.ink),
        (QPalette.ColorRole.Highlight, colours.accent),
        (QPalette.ColorRole.HighlightedText, colours.on_accent),
        (QPalette.ColorRole.Link, colours.accent),
        (QPalette.ColorRole.Mid, colours.line),
    ):
        palette.setColor(role, QColor(colour))
    for role in (QPalette.ColorRole.WindowText, QPalette.ColorRole.Text, QPalette.ColorRole.ButtonText):
        palette.setColor(QPalette.ColorGroup.Disabled, role, QColor(colours.line))
    return palette
