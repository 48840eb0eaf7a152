"""Colours: one frozen value a scheme; nothing else in the window names a colour.

Red stands for HOLD only, amber for NEAR LIMIT and REDUCED only; the grey schemes have neither, and no green.
"""

from dataclasses import dataclass, replace
from enum import StrEnum


class Scheme(StrEnum):
    """The two looks a user can choose."""

    LIGHT = "light"
    DARK = "dark"


@dataclass(frozen=True, slots=True, kw_only=True)
class Band:
    """A frame's colours: the ground, and the word on it."""

    ground: str
    ink: str


@dataclass(frozen=True, slots=True, kw_only=True)
class Palette:
    """All colours of one scheme, each as ``#RRGGBB``.

    Attributes
    ----------
    page, card, cell
        Behind the cards, of the cards, and of an unlit cell or a tinted item.
    ink, soft_ink, line, hairline
        Text, secondary text, lines and outlines (3:1 or better on the card), and separators that carry nothing.
    water
        Under the observed curve, and beside the rows below the level.
    accent, on_accent
        Curve, level, focus and action; words on it.
    hold_block, on_hold, hold_line
        The HOLD block, its word, and HOLD's leaders and spans.
    near_block, on_near, near_line
        The NEAR LIMIT block, its word, and its border, leaders and lines.
    reduced_block, on_reduced
        The REDUCED block, which has NEAR LIMIT's border, and its word.
    go, no_data
        The words GO and NO DATA.
    header, on_header, soft_on_header
        The header's ground, words and secondary words.
    hatch_hold, tint_hold, tint_near
        On the Margin page: hatching and ground of the HOLD side, ground of the near band.
    no_data_band, not_recording_band, training_band, demo_band, notice_band
        Frames; ``notice_band`` is that of a past day and of settings that wait.
    """

    page: str
    card: str
    cell: str
    ink: str
    soft_ink: str
    line: str
    hairline: str
    water: str
    accent: str
    on_accent: str
    hold_block: str
    on_hold: str
    hold_line: str
    near_block: str
    on_near: str
    near_line: str
    reduced_block: str
    on_reduced: str
    go: str
    no_data: str
    header: str
    on_header: str
    soft_on_header: str
    hatch_hold: str
    tint_hold: str
    tint_near: str
    no_data_band: Band
    not_recording_band: Band
    training_band: Band
    demo_band: Band
    notice_band: Band


LIGHT = Palette(
    page="#E9EDF1",
    card="#FFFFFF",
    cell="#E6EBF0",
    ink="#13202C",
    soft_ink="#3F4D5A",
    line="#73818E",
    hairline="#D5DCE3",
    water="#E3ECF7",
    accent="#1A4FA0",
    on_accent="#FFFFFF",
    hold_block="#A50F1F",
    on_hold="#FFFFFF",
    hold_line="#B01425",
    near_block="#FFC233",
    on_near="#1F1600",
    near_line="#B97400",
    reduced_block="#FFF6E0",
    on_reduced="#1F1600",
    go="#0B5648",
    no_data="#3F4D5A",
    header="#FFFFFF",
    on_header="#13202C",
    soft_on_header="#3F4D5A",
    hatch_hold="#EBC9CD",
    tint_hold="#FBEAEC",
    tint_near="#FFF6DF",
    no_data_band=Band(ground="#13202C", ink="#FFFFFF"),
    not_recording_band=Band(ground="#13202C", ink="#FFFFFF"),
    training_band=Band(ground="#5A2A91", ink="#FFFFFF"),
    demo_band=Band(ground="#0A5470", ink="#FFFFFF"),
    notice_band=Band(ground="#4A5866", ink="#FFFFFF"),
)

DARK = Palette(
    page="#0B1117",
    card="#141C24",
    cell="#202B36",
    ink="#EAF0F5",
    soft_ink="#B4C0CB",
    line="#778695",
    hairline="#2A3541",
    water="#1A2C42",
    accent="#8FBCFF",
    on_accent="#0B1117",
    hold_block="#FF6B61",
    on_hold="#1A0203",
    hold_line="#FF6B61",
    near_block="#FFC233",
    on_near="#1F1600",
    near_line="#FFC233",
    reduced_block="#2B2414",
    on_reduced="#EAF0F5",
    go="#79C7B2",
    no_data="#B4C0CB",
    header="#141C24",
    on_header="#EAF0F5",
    soft_on_header="#B4C0CB",
    hatch_hold="#54292C",
    tint_hold="#2B1D22",
    tint_near="#2A2618",
    no_data_band=Band(ground="#EAF0F5", ink="#0B1117"),
    not_recording_band=Band(ground="#EAF0F5", ink="#0B1117"),
    training_band=Band(ground="#C7A5FF", ink="#1B0B33"),
    demo_band=Band(ground="#7FD3EC", ink="#06222C"),
    notice_band=Band(ground="#9FADBA", ink="#0B1117"),
)

GREY_LIGHT = replace(
    LIGHT,
    water="#E3E6E9",
    accent="#13202C",
    hold_block="#3F4D5A",
    hold_line="#3F4D5A",
    near_block="#FFFFFF",
    on_near="#13202C",
    near_line="#3F4D5A",
    reduced_block="#FFFFFF",
    on_reduced="#13202C",
    go="#3F4D5A",
    header="#13202C",
    on_header="#FFFFFF",
    soft_on_header="#D5DCE3",
    hatch_hold="#CDD4DB",
    tint_hold="#EEF1F4",
    tint_near="#F6F8FA",
    demo_band=Band(ground="#13202C", ink="#FFFFFF"),
)

GREY_DARK = replace(
    DARK,
    water="#222A32",
    accent="#EAF0F5",
    hold_block="#B4C0CB",
    on_hold="#0B1117",
    hold_line="#B4C0CB",
    near_block="#141C24",
    on_near="#EAF0F5",
    near_line="#B4C0CB",
    reduced_block="#141C24",
    go="#B4C0CB",
    header="#EAF0F5",
    on_header="#0B1117",
    soft_on_header="#2A3541",
    hatch_hold="#35414D",
    tint_hold="#1B242D",
    tint_near="#182028",
    demo_band=Band(ground="#EAF0F5", ink="#0B1117"),
)


def palette_for(scheme: Scheme, *, grey: bool) -> Palette:
    """Return the colours of a scheme, or its grey ones."""
    if scheme is Scheme.DARK:
        return GREY_DARK if grey else DARK
    return GREY_LIGHT if grey else LIGHT
