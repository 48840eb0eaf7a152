"""Where the columns of the wall stand, for a size of the state's word: beside the plot, alone, or two. No Qt."""

from collections.abc import Iterator
from dataclasses import dataclass
from enum import Enum

WORD_BASE_PX = 49
"""The state's word on the screen for which the lengths below are drawn: 1920 by 1080 pixels."""
BLOCK_EM = 7.84
PAD_PX = 4.0
_SIDE_PX = 14.0
_AXIS_PX = 96.0
_GUTTER_PX = 76.0
_RIGHT_PX = 14.0
_NAME_GAP_PX = 18.0
_NAME_PX = 340.0
_MARGIN_PX = 160.0
_CHANGE_GAP_PX = 24.0
_CHANGE_PX = 380.0
_TEXTS_PX = _NAME_GAP_PX + _NAME_PX + _MARGIN_PX + _CHANGE_GAP_PX + _CHANGE_PX + _RIGHT_PX
_SHORT_TEXTS_PX = 500.0
_PLOT_LEAST_PX = 280.0
_PLOT_WANTED_PX = 380.0
_COLUMN_GAP_PX = 24.0
_TEXT_LEAST = {"beside": 0.85, "apart": 0.62}
"""Least size of the other texts, as shares of their drawn size."""
_TEXT_RATIO, _TEXT_RATIO_SMALL = 0.55, 0.8
"""Least size of the other texts beside the state's word, as shares of what is drawn; the second where the word is
smaller than it should be, since then it must not be bought with names that nobody can read."""


class Arrangement(Enum):
    """What stands in the card."""

    BESIDE_PLOT = "beside the plot"
    ONE_COLUMN = "one column"
    TWO_COLUMNS = "two columns"


@dataclass(frozen=True, slots=True, kw_only=True)
class WallRoom:
    """What there is room for.

    Attributes
    ----------
    width_px, height_px
        Of the card.
    scale
        Of the lengths drawn for 1920 by 1080 pixels.
    needed_px
        Size of the state's word that the distance asks for.
    """

    width_px: float
    height_px: float
    scale: float
    needed_px: int


@dataclass(frozen=True, slots=True, kw_only=True)
class WallColumn:
    """Where a column of rows and its parts begin and end.

    Attributes
    ----------
    change, change_right
        None where the next change stands under the name.
    """

    left: float
    block_px: float
    name: float
    name_right: float
    margin_right: float
    change: float | None
    change_right: float | None
    right: float


@dataclass(frozen=True, slots=True, kw_only=True)
class WallFrame:
    """An arrangement at a size of the word, before its rows."""

    arrangement: Arrangement
    word_px: int
    text_scale: float
    columns: tuple[WallColumn, ...]
    plot_left: float | None = None
    plot_right: float | None = None


def frames(room: WallRoom, word_px: int) -> Iterator[WallFrame]:
    """Return the arrangements that there is room for at a size of the word, those that are tried first at the start."""
    beside = beside_plot(room, word_px)
    for frame in (beside, _one_column(room, word_px) if beside is None else None, _two_columns(room, word_px)):
        if frame is not None:
            yield frame


def _text_scale(free_px: float, drawn_px: float, room: WallRoom, word_px: int, least: str) -> float | None:
    """Return the size of the other texts in the room they have; None where they would get too small in it."""
    most = word_px / WORD_BASE_PX
    ratio = _TEXT_RATIO if word_px >= room.needed_px else _TEXT_RATIO_SMALL
    floor = min(max(_TEXT_LEAST[least] * room.scale, ratio * most), most)
    scale = min(free_px / drawn_px, most)
    return scale if scale >= floor - 1e-9 else None


def beside_plot(room: WallRoom, word_px: int) -> WallFrame | None:
    """Return one column beside the plot; None where there is no room for both."""
    block = BLOCK_EM * word_px
    plot_left = _AXIS_PX * room.scale
    rest = room.width_px - plot_left - _GUTTER_PX * room.scale - block
    scale = _text_scale(rest - _PLOT_LEAST_PX * room.scale, _TEXTS_PX, room, word_px, "beside")
    if scale is None:
        return None
    least = min(scale, _TEXT_LEAST["beside"] * room.scale)
    scale = max(min(scale, (rest - _PLOT_WANTED_PX * room.scale) / _TEXTS_PX), least)
    left = room.width_px - block - _TEXTS_PX * scale
    column = _wide_column(left, room.width_px, block, scale)
    plot_right = left - _GUTTER_PX * room.scale
    return WallFrame(
        arrangement=Arrangement.BESIDE_PLOT,
        word_px=word_px,
        text_scale=scale,
        columns=(column,),
        plot_left=plot_left,
        plot_right=plot_right,
    )


def _one_column(room: WallRoom, word_px: int) -> WallFrame | None:
    left, block = _SIDE_PX * room.scale, BLOCK_EM * word_px
    scale = _text_scale(room.width_px - left - block, _TEXTS_PX, room, word_px, "apart")
    if scale is None:
        return None
    column = _wide_column(left, room.width_px, block, scale)
    return WallFrame(arrangement=Arrangement.ONE_COLUMN, word_px=word_px, text_scale=scale, columns=(column,))


def _two_columns(room: WallRoom, word_px: int) -> WallFrame | None:
    pad, block = _SIDE_PX * room.scale, BLOCK_EM * word_px
    width = (room.width_px - 2 * pad - _COLUMN_GAP_PX * room.scale) / 2
    scale = _text_scale(width - block, _SHORT_TEXTS_PX, room, word_px, "apart")
    if scale is None:
        return None
    columns = []
    for left in (pad, room.width_px - pad - width):
        right = left + width - _RIGHT_PX / 2 * scale
        name = left + block + _NAME_GAP_PX * scale
        columns.append(
            WallColumn(
                left=left,
                block_px=block,
                name=name,
                name_right=right - _MARGIN_PX * scale,
                margin_right=right,
                change=None,
                change_right=None,
                right=left + width,
            )
        )
    return WallFrame(arrangement=Arrangement.TWO_COLUMNS, word_px=word_px, text_scale=scale, columns=tuple(columns))


def _wide_column(left: float, right: float, block_px: float, scale: float) -> WallColumn:
    """Place the parts of a column that has room for the next change; what is left over widens its texts."""
    over = max(right - left - block_px - _TEXTS_PX * scale, 0.0)
    name = left + block_px + _NAME_GAP_PX * scale
    name_right = name + _NAME_PX * scale + over * 0.4
    margin_right = name_right + _MARGIN_PX * scale + over * 0.1
    return WallColumn(
        left=left,
        block_px=block_px,
        name=name,
        name_right=name_right,
        margin_right=margin_right,
        change=margin_right + _CHANGE_GAP_PX * scale,
        change_right=right - _RIGHT_PX * scale,
        right=right,
    )
