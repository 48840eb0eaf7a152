"""How large a state's word must be to be read across a room. No Qt.

A text's size is the angle that its capitals fill in the eye of whoever reads it, in minutes of arc (arcmin).
"""

import math
from dataclasses import dataclass

WORD_ARCMIN = 20.0
"""What a state's word should fill: 20 arcmin for critical text, never under 16 (design's findings)."""
CAP_HEIGHT_EM = 0.727
"""Height of the bundled typeface's capitals: 2048 of 2816 units, as its font files say, cut to three places."""
MM_PER_INCH = 25.4
DIAGONAL_RANGE_IN = (7.0, 300.0)
DISTANCE_RANGE_M = (0.5, 50.0)


@dataclass(frozen=True, slots=True, kw_only=True)
class WallSetup:
    """The screen on the wall, and from how far it is read.

    Attributes
    ----------
    diagonal_in
        Of the lit area, in inches, as screens are sold.
    distance_m
        To the farthest reader.

    Raises
    ------
    ValueError
        Where a value is outside `DIAGONAL_RANGE_IN` or `DISTANCE_RANGE_M`, or is no number.
    """

    diagonal_in: float
    distance_m: float

    def __post_init__(self) -> None:
        for value, (least, most), what in (
            (self.diagonal_in, DIAGONAL_RANGE_IN, "diagonal, in"),
            (self.distance_m, DISTANCE_RANGE_M, "distance, m"),
        ):
            if not least <= value <= most:
                raise ValueError(f"{what}: {value:g} is not from {least:g} to {most:g}")


DEFAULT_SETUP = WallSetup(diagonal_in=43.0, distance_m=3.0)
"""A common screen in a common room; taken until somebody says otherwise. Common practice, no source."""


def pixel_mm(diagonal_in: float, screen_px: tuple[int, int]) -> float:
    """Return the side of a square pixel [mm] of a screen with so many pixels across and down."""
    return diagonal_in * MM_PER_INCH / math.hypot(*screen_px)


def cap_height_mm(distance_m: float, arcmin: float = WORD_ARCMIN) -> float:
    """Return the height [mm] that fills an angle at a distance: h = 2 d tan(angle / 2)."""
    return 2.0 * distance_m * 1000.0 * math.tan(math.radians(arcmin / 60.0) / 2.0)


def word_px(setup: WallSetup, screen_px: tuple[int, int], arcmin: float = WORD_ARCMIN) -> int:
    """Return the least type size [px, whole] whose capitals fill the angle or more."""
    cap_px = cap_height_mm(setup.distance_m, arcmin) / pixel_mm(setup.diagonal_in, screen_px)
    return math.ceil(cap_px / CAP_HEIGHT_EM - 1e-9)


def arcmin_of(size_px: float, setup: WallSetup, screen_px: tuple[int, int]) -> float:
    """Return the angle [arcmin] that the capitals of a type size fill at the setup's distance."""
    cap_mm = size_px * CAP_HEIGHT_EM * pixel_mm(setup.diagonal_in, screen_px)
    return math.degrees(2.0 * math.atan2(cap_mm / 2.0, setup.distance_m * 1000.0)) * 60.0


def reading_distance_m(size_px: float, setup: WallSetup, screen_px: tuple[int, int]) -> float:
    """Return the distance [m] up to which the capitals of a type size fill `WORD_ARCMIN`."""
    cap_mm = size_px * CAP_HEIGHT_EM * pixel_mm(setup.diagonal_in, screen_px)
    return cap_mm / 2.0 / math.tan(math.radians(WORD_ARCMIN / 60.0) / 2.0) / 1000.0
