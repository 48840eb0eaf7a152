"""Contrast of all that is read, computed after WCAG 2.2 (relative luminance and contrast ratio, success criteria
1.4.3 and 1.4.11: text 4.5, large text and graphics 3).
"""

from dataclasses import fields

import pytest

from airfield_board.window.palette import (
    DARK,
    GREY_DARK,
    GREY_LIGHT,
    LIGHT,
    Band,
    Palette,
    Scheme,
    palette_for,
)

PALETTES = {"light": LIGHT, "dark": DARK, "grey light": GREY_LIGHT, "grey dark": GREY_DARK}
TEXT = (
    ("ink", "card"),
    ("ink", "cell"),
    ("ink", "water"),
    ("ink", "page"),
    ("soft_ink", "card"),
    ("soft_ink", "page"),
    ("soft_ink", "water"),
    ("soft_ink", "cell"),
    ("on_accent", "accent"),
    ("on_hold", "hold_block"),
    ("on_near", "near_block"),
    ("on_reduced", "reduced_block"),
    ("go", "card"),
    ("no_data", "card"),
    ("on_header", "header"),
    ("soft_on_header", "header"),
    ("ink", "tint_hold"),
    ("ink", "tint_near"),
)
GRAPHICS = (
    ("line", "card"),
    ("line", "water"),
    ("accent", "card"),
    ("accent", "water"),
    ("hold_block", "card"),
    ("hold_block", "water"),
    ("hold_line", "card"),
    ("hold_line", "water"),
    ("near_line", "card"),
    ("near_line", "water"),
    ("near_line", "tint_near"),
    ("hold_line", "tint_hold"),
)


def channels(colour: str) -> tuple[int, int, int]:
    """Return red, green and blue of ``#RRGGBB``."""
    return int(colour[1:3], 16), int(colour[3:5], 16), int(colour[5:7], 16)


def luminance(colour: str) -> float:
    """Return the relative luminance as WCAG 2.2 defines it."""
    linear = []
    for channel in channels(colour):
        share = channel / 255
        linear.append(share / 12.92 if share <= 0.04045 else ((share + 0.055) / 1.055) ** 2.4)
    return 0.2126 * linear[0] + 0.7152 * linear[1] + 0.0722 * linear[2]


def contrast(one: str, other: str) -> float:
    """Return the contrast ratio as WCAG 2.2 defines it."""
    high, low = sorted((luminance(one), luminance(other)), reverse=True)
    return (high + 0.05) / (low + 0.05)


def colours_of(palette: Palette) -> dict[str, str]:
    """Return all colours of a palette by name, those of its frames too."""
    found = {}
    for field in fields(palette):
        value = getattr(palette, field.name)
        if isinstance(value, Band):
            found[f"{field.name} ground"], found[f"{field.name} ink"] = value.ground, value.ink
        else:
            found[field.name] = value
    return found


def test_contrast_of_black_on_white_is_21() -> None:
    # WCAG 2.2, definition of contrast ratio: "range from 1 to 21".
    assert contrast("#000000", "#FFFFFF") == pytest.approx(21.0)
    assert contrast("#777777", "#777777") == pytest.approx(1.0)


@pytest.mark.parametrize("name", PALETTES)
@pytest.mark.parametrize("pair", TEXT, ids=" on ".join)
def test_text_can_be_read(name: str, pair: tuple[str, str]) -> None:
    colours = colours_of(PALETTES[name])
    assert contrast(colours[pair[0]], colours[pair[1]]) >= 4.5


@pytest.mark.parametrize("name", PALETTES)
@pytest.mark.parametrize("pair", GRAPHICS, ids=" on ".join)
def test_lines_and_marks_can_be_seen(name: str, pair: tuple[str, str]) -> None:
    colours = colours_of(PALETTES[name])
    assert contrast(colours[pair[0]], colours[pair[1]]) >= 3.0


@pytest.mark.parametrize("name", PALETTES)
@pytest.mark.parametrize("band", ["no_data_band", "not_recording_band", "training_band", "demo_band", "notice_band"])
def test_words_on_frames_can_be_read(name: str, band: str) -> None:
    colours = colours_of(PALETTES[name])
    assert contrast(colours[f"{band} ground"], colours[f"{band} ink"]) >= 4.5
    assert contrast(colours[f"{band} ground"], colours["page"]) >= 3.0


@pytest.mark.parametrize("palette", [GREY_LIGHT, GREY_DARK], ids=["light", "dark"])
def test_grey_schemes_have_no_red_amber_or_green(palette: Palette) -> None:
    for name, colour in colours_of(palette).items():
        if name.startswith("training_band"):
            continue
        red, green, blue = channels(colour)
        assert red - max(green, blue) <= 3, name
        assert green - max(red, blue) <= 3, name


@pytest.mark.parametrize("palette", [LIGHT, DARK], ids=["light", "dark"])
def test_the_demo_frame_is_not_red_amber_green_or_violet(palette: Palette) -> None:
    red, green, blue = channels(palette.demo_band.ground)
    assert blue > green > red


def test_red_stands_for_hold_only() -> None:
    for palette in (LIGHT, DARK):
        for name, colour in colours_of(palette).items():
            red, green, blue = channels(colour)
            is_red = red - max(green, blue) > 60 and green < red * 0.62
            assert not is_red or "hold" in name, name


def test_a_scheme_has_its_own_grey() -> None:
    assert palette_for(Scheme.LIGHT, grey=False) is LIGHT
    assert palette_for(Scheme.LIGHT, grey=True) is GREY_LIGHT
    assert palette_for(Scheme.DARK, grey=False) is DARK
    assert palette_for(Scheme.DARK, grey=True) is GREY_DARK
