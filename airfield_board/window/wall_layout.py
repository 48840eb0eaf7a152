"""How the rows stand on the wall: beside the plot, and where they are too many, folded or in two columns.

The size of the state's word is given by the viewing distance; all else gives way to it. Pixels only; no Qt.
"""

from collections.abc import Iterator, Sequence
from dataclasses import dataclass
from enum import Enum

from airfield_board.window.axes import AltitudeAxis
from airfield_board.window.row_layout import LEVEL_WEIGHT, settle

WORD_BASE_PX = 49
"""The state's word on the screen for which the lengths below are drawn: 1920 by 1080 pixels."""
WORD_FLOOR_PX = 10
"""Below it nothing is read even from near; rows that still do not fit are counted by their state."""
ROW_SMALLEST_EM = 1.02
ROW_LARGEST_EM = 1.36
BLOCK_EM = 7.84
LEVEL_EM = 0.61
FOOT_GAP_EM = 0.12

_PAD_PX = 4.0
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
class WallItem:
    """What a row asks of the layout.

    Attributes
    ----------
    place_ft
        Where its limit lies; None: at the foot.
    below
        Whether it stands below the level of the air.
    fold_rank
        The lowest are folded first; None: never.
    kind
        Rows of one kind can be counted in one line.
    """

    place_ft: float | None
    below: bool
    fold_rank: int | None
    kind: str


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
class WallBox:
    """A line as placed.

    Attributes
    ----------
    rows
        The rows it stands for, by their index; more than one are counted.
    """

    rows: tuple[int, ...]
    column: int
    middle_px: float
    height_px: float


@dataclass(frozen=True, slots=True, kw_only=True)
class Water:
    """What is tinted in a column: from the level to the end of the rows below it."""

    column: int
    top_px: float
    bottom_px: float


@dataclass(frozen=True, slots=True, kw_only=True)
class WallPlan:
    """All rows placed.

    Attributes
    ----------
    word_px
        Size of the state's word.
    text_scale
        Of the other texts of the rows.
    level
        Column and middle of the level; None without one.
    plot_left, plot_right
        None where there is no plot.
    """

    arrangement: Arrangement
    word_px: int
    text_scale: float
    pitch_px: float
    columns: tuple[WallColumn, ...]
    boxes: tuple[WallBox, ...]
    level: tuple[int, float] | None
    water: tuple[Water, ...]
    plot_left: float | None
    plot_right: float | None


_Line = tuple[int, ...]
_Slot = _Line | None
"""A line of rows, or None: the level."""


def plan_wall(items: Sequence[WallItem], room: WallRoom, axis: AltitudeAxis, level_ft: float | None) -> WallPlan:
    """Place all rows.

    The word is as large as needed, or larger up to its drawn size where all rows are listed beside the plot all the
    same. Rows that do not fit: first those that may be are folded, then the plot gives way to a second column, and
    only then the word gets smaller.

    Parameters
    ----------
    items
        In the order of the board.
    axis
        Altitude to the card's pixels.
    level_ft
        The air's density altitude; None where it is not known.
    """
    for word_px in range(round(WORD_BASE_PX * room.scale), room.needed_px, -1):
        frame = _beside_plot(room, word_px)
        plan = _filled(frame, items, room, axis, level_ft, fold=False) if frame is not None else None
        if plan is not None:
            return plan
    for word_px in range(max(room.needed_px, WORD_FLOOR_PX), WORD_FLOOR_PX - 1, -1):
        for frame in _frames(room, word_px):
            for fold in (False, True):
                plan = _filled(frame, items, room, axis, level_ft, fold=fold)
                if plan is not None:
                    return plan
    return _counted(items, room, axis, level_ft)


def rows_beside_plot(room: WallRoom) -> int:
    """Return how many rows can be listed one by one beside the plot, the level among them; 0 without a plot."""
    word_px = max(room.needed_px, WORD_FLOOR_PX)
    if _beside_plot(room, word_px) is None:
        return 0
    free_px = room.height_px - 2 * _PAD_PX * room.scale - LEVEL_EM * word_px
    return max(int(free_px // (ROW_SMALLEST_EM * word_px)), 0)


@dataclass(frozen=True, slots=True, kw_only=True)
class _Frame:
    """An arrangement at a size of the word, before its rows."""

    arrangement: Arrangement
    word_px: int
    text_scale: float
    columns: tuple[WallColumn, ...]
    plot_left: float | None = None
    plot_right: float | None = None


def _frames(room: WallRoom, word_px: int) -> Iterator[_Frame]:
    beside = _beside_plot(room, word_px)
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


def _beside_plot(room: WallRoom, word_px: int) -> _Frame | None:
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
    return _Frame(
        arrangement=Arrangement.BESIDE_PLOT,
        word_px=word_px,
        text_scale=scale,
        columns=(column,),
        plot_left=plot_left,
        plot_right=plot_right,
    )


def _one_column(room: WallRoom, word_px: int) -> _Frame | None:
    left, block = _SIDE_PX * room.scale, BLOCK_EM * word_px
    scale = _text_scale(room.width_px - left - block, _TEXTS_PX, room, word_px, "apart")
    if scale is None:
        return None
    column = _wide_column(left, room.width_px, block, scale)
    return _Frame(arrangement=Arrangement.ONE_COLUMN, word_px=word_px, text_scale=scale, columns=(column,))


def _two_columns(room: WallRoom, word_px: int) -> _Frame | None:
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
    return _Frame(arrangement=Arrangement.TWO_COLUMNS, word_px=word_px, text_scale=scale, columns=tuple(columns))


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


def _folded(items: Sequence[WallItem], most: int) -> list[_Line] | None:
    """Return the lines, with those that may be folded in one of them where there are too many; None if that fails."""
    surplus = len(items) - most
    if surplus <= 0:
        return [(index,) for index in range(len(items))]
    ranks = {index: item.fold_rank for index, item in enumerate(items)}
    foldable = sorted((rank, index) for index, rank in ranks.items() if rank is not None)
    if len(foldable) < surplus + 1:
        return None
    gone = sorted(index for _rank, index in foldable[: surplus + 1])
    taken = set(gone)
    return [
        tuple(gone) if index == gone[0] else (index,)
        for index in range(len(items))
        if index not in taken or index == gone[0]
    ]


def _filled(
    frame: _Frame,
    items: Sequence[WallItem],
    room: WallRoom,
    axis: AltitudeAxis,
    level_ft: float | None,
    *,
    fold: bool,
) -> WallPlan | None:
    """Fill an arrangement with the rows; None where they do not fit."""
    most = int((room.height_px - 2 * _PAD_PX * room.scale) // (ROW_SMALLEST_EM * frame.word_px)) * len(frame.columns)
    if len(items) > most and not fold:
        return None
    lines = _folded(items, most)
    while lines is not None:
        plan = _placed(frame, items, lines, room, axis, level_ft)
        if plan is not None or not fold or not lines:
            return plan
        # Level and foot take some of the height as well.
        lines = _folded(items, len(lines) - 1)
    return None


def _placed(
    frame: _Frame,
    items: Sequence[WallItem],
    lines: Sequence[_Line],
    room: WallRoom,
    axis: AltitudeAxis,
    level_ft: float | None,
) -> WallPlan | None:
    """Give the lines their places; None where they do not fit."""
    if frame.arrangement is Arrangement.BESIDE_PLOT:
        return _hung(frame, items, lines, room, axis, level_ft)
    return _stacked(frame, items, lines, room, level_ft)


def _parts(
    items: Sequence[WallItem], lines: Sequence[_Line], level_ft: float | None
) -> tuple[list[_Line], list[_Line], list[_Line]]:
    """Return the lines above the level, those below it, and those at the foot."""
    above: list[_Line] = []
    below: list[_Line] = []
    foot: list[_Line] = []
    for line in lines:
        first = items[line[0]]
        under = level_ft is not None and first.below
        (foot if first.place_ft is None else below if under else above).append(line)
    return above, below, foot


def _hung(
    frame: _Frame,
    items: Sequence[WallItem],
    lines: Sequence[_Line],
    room: WallRoom,
    axis: AltitudeAxis,
    level_ft: float | None,
) -> WallPlan | None:
    """Place the lines beside the plot, each as near to the height of its limit as the others permit."""
    above, below, foot = _parts(items, lines, level_ft)
    top, bottom = _PAD_PX * room.scale, room.height_px - _PAD_PX * room.scale
    level_px = LEVEL_EM * frame.word_px
    gap_px = FOOT_GAP_EM * frame.word_px if foot and (above or below) else 0.0
    pitch = _pitch(bottom - top - gap_px - (level_px if level_ft is not None else 0.0), len(lines), frame.word_px)
    if pitch is None:
        return None
    foot_top = bottom - pitch * len(foot)
    boxes = [
        WallBox(rows=line, column=0, middle_px=foot_top + pitch * (place + 0.5), height_px=pitch)
        for place, line in enumerate(foot)
    ]
    slots: list[_Slot] = [*above, *([None] if level_ft is not None else []), *below]
    targets = [level_ft if slot is None else items[slot[0]].place_ft for slot in slots]
    middles = settle(
        [axis.px(target) if target is not None else top for target in targets],
        [level_px if slot is None else pitch for slot in slots],
        [LEVEL_WEIGHT if slot is None else 1.0 for slot in slots],
        top,
        foot_top - gap_px,
    )
    level = None
    placed = []
    for slot, middle in zip(slots, middles, strict=True):
        if slot is None:
            level = (0, middle)
        else:
            placed.append(WallBox(rows=slot, column=0, middle_px=middle, height_px=pitch))
    water = (Water(column=0, top_px=level[1], bottom_px=max(foot_top - gap_px, level[1])),) if level else ()
    return _plan(frame, pitch, (*placed, *boxes), level, water)


def _stacked(
    frame: _Frame, items: Sequence[WallItem], lines: Sequence[_Line], room: WallRoom, level_ft: float | None
) -> WallPlan | None:
    """Place the lines one under the other, and where there are two columns, on in the second."""
    above, below, foot = _parts(items, lines, level_ft)
    level_slot: list[_Slot] = [None] if level_ft is not None else []
    slots: list[_Slot] = [*above, *level_slot, *below, *foot]
    top, bottom = _PAD_PX * room.scale, room.height_px - _PAD_PX * room.scale
    level_px = LEVEL_EM * frame.word_px
    best: tuple[float, int] | None = None
    # The first column is filled first, as it is read; a single one takes all.
    cuts = range(len(slots), -1, -1) if len(frame.columns) > 1 else (len(slots),)
    for cut in cuts:
        if 0 < cut < len(slots) and slots[cut - 1] is None:
            continue  # the level would stand alone at the foot of the first column, away from what lies below it
        levels = (None in slots[:cut], None in slots[cut:])
        rows = (cut - levels[0], len(slots) - cut - levels[1])
        pitches = [
            _pitch(bottom - top - level_px * with_level, count, frame.word_px)
            for with_level, count in zip(levels, rows, strict=True)
        ]
        usable = [pitch for pitch in pitches if pitch is not None]
        if len(usable) == 2 and (best is None or min(usable) > best[0] + 1e-9):
            best = (min(usable), cut)
    if best is None:
        return None
    pitch, cut = best
    boxes: list[WallBox] = []
    level: tuple[int, float] | None = None
    water: list[Water] = []
    feet = set(foot)
    for column, part in enumerate((slots[:cut], slots[cut:])):
        edge = water_top = top
        water_bottom = top
        for slot in part:
            if slot is None:
                level = (column, edge + level_px / 2)
                water_top = water_bottom = level[1]
                edge += level_px
                continue
            boxes.append(WallBox(rows=slot, column=column, middle_px=edge + pitch / 2, height_px=pitch))
            edge += pitch
            if level is not None and slot not in feet:
                water_bottom = edge
        if level is not None and water_bottom > water_top:
            water.append(Water(column=column, top_px=water_top, bottom_px=water_bottom))
    return _plan(frame, pitch, tuple(boxes), level, tuple(water))


def _pitch(space_px: float, rows: int, word_px: int) -> float | None:
    """Return the height of a row; None where it would be too low for its word."""
    pitch = min(space_px / max(rows, 1), ROW_LARGEST_EM * word_px)
    return pitch if pitch >= ROW_SMALLEST_EM * word_px else None


def _plan(
    frame: _Frame,
    pitch_px: float,
    boxes: tuple[WallBox, ...],
    level: tuple[int, float] | None,
    water: tuple[Water, ...],
) -> WallPlan:
    return WallPlan(
        arrangement=frame.arrangement,
        word_px=frame.word_px,
        text_scale=frame.text_scale,
        pitch_px=pitch_px,
        columns=frame.columns,
        boxes=boxes,
        level=level,
        water=water,
        plot_left=frame.plot_left,
        plot_right=frame.plot_right,
    )


def _counted(items: Sequence[WallItem], room: WallRoom, axis: AltitudeAxis, level_ft: float | None) -> WallPlan:
    """Count all rows by their kind, a line each: hundreds of rows that nobody could read as a list."""
    kinds: dict[tuple[str, bool], list[int]] = {}
    for index, item in enumerate(items):
        kinds.setdefault((item.kind, item.place_ft is None), []).append(index)
    lines = [tuple(rows) for rows in kinds.values()]
    for word_px in range(room.needed_px, 0, -1):
        for frame in _frames(room, word_px):
            if len(frame.columns) == 1:
                plan = _placed(frame, items, lines, room, axis, level_ft)
                if plan is not None:
                    return plan
    raise ValueError(f"no room for a board in {room.width_px:g} by {room.height_px:g} pixels")
