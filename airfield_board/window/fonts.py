"""The bundled typeface, and the one way to make a font of it: a size in whole pixels and a weight."""

from functools import cache

from PySide6.QtGui import QFont, QFontDatabase

from airfield_board.resources import bundled_folder

FAMILIES = ("Inter", "Noto Sans", "DejaVu Sans")
REGULAR, MEDIUM, SEMIBOLD, BOLD = 400, 500, 600, 700


@cache
def load_fonts() -> int:
    """Make the bundled font files known to the application, once; needs a running QGuiApplication.

    Returns
    -------
    int
        How many files were taken; with 0 the fallback families serve.
    """
    try:
        files = sorted((bundled_folder("assets") / "fonts").glob("*.otf"))
    except FileNotFoundError:
        return 0
    return sum(QFontDatabase.addApplicationFont(str(file)) >= 0 for file in files)


@cache
def font(size_px: int, weight: int = REGULAR) -> QFont:
    """Return the typeface in a size and weight, with figures of one width."""
    load_fonts()
    made = QFont(list(FAMILIES))
    made.setPixelSize(size_px)
    made.setWeight(QFont.Weight(weight))
    # Coloured fringes of subpixel smoothing would put red and green into the grey palette.
    made.setStyleStrategy(QFont.StyleStrategy.PreferAntialias | QFont.StyleStrategy.NoSubpixelAntialias)
    made.setHintingPreference(QFont.HintingPreference.PreferNoHinting)
    made.setFeature(QFont.Tag("tnum"), 1)
    return made
