"""How the rows stand on the wall: beside the plot, and where they are too many, folded or in two columns.

The size of the state's word is given by the viewing distance; all else gives way to it. Pixels only; no Qt.
"""

from collections.abc import Sequence
from dataclasses import dataclass

from airfield_board.window.axes import AltitudeAxis
from airfield_board.window.row_layout import LEVEL_WEIGHT, settle
from airfield_board.window.wall_columns import (
    PAD_PX,
    WORD_BASE_PX,
    Arrangement,
    WallColumn,
    WallFrame,
    WallRoom,
    beside_plot,
    frames,
)

WORD_FLOOR_PX = 10
"""Below it nothing is read even from near; rows that still do not fit are counted by their state."""
ROW_SMALLEST_EM = 1.02
ROW_LARGEST_EM = 1.36
LEVEL_EM = 0.61
FOOT_GAP_EM = 0.12


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
        frame = beside_plot(room, word_px)
        plan = _filled(frame, items, room, axis, level_ft, fold=False) if frame is not None else None
        if plan is not None:
            return plan
    for word_px in range(max(room.needed_px, WORD_FLOOR_PX), WORD_FLOOR_PX - 1, -1):
        for frame in frames(room, word_px):
            for fold in (False, True):
                plan = _filled(frame, items, room, axis, level_ft, fold=fold)
                if plan is not None:
                    return plan
    return _counted(items, room, axis, level_ft)


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
    frame: WallFrame,
    items: Sequence[WallItem],
    room: WallRoom,
    axis: AltitudeAxis,
    level_ft: float | None,
    *,
    fold: bool,
) -> WallPlan | None:
    """Fill an arrangement with the rows; None where they do not fit."""
    most = int((room.height_px - 2 * PAD_PX * room.scale) // (ROW_SMALLEST_EM * frame.word_px)) * len(frame.columns)
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
    frame: WallFrame,
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
    frame: WallFrame,
    items: Sequence[WallItem],
    lines: Sequence[_Line],
    room: WallRoom,
    axis: AltitudeAxis,
    level_ft: float | None,
) -> WallPlan | None:
    """Place the lines beside the plot, each as near to the height of its limit as the others permit."""
    above, below, foot = _parts(items, lines, level_ft)
    top, bottom = PAD_PX * room.scale, room.height_px - PAD_PX * room.scale
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
    frame: WallFrame, items: Sequence[WallItem], lines: Sequence[_Line], room: WallRoom, level_ft: float | None
) -> WallPlan | None:
    """Place the lines one under the other, and where there are two columns, on in the second."""
    above, below, foot = _parts(items, lines, level_ft)
    level_slot: list[_Slot] = [None] if level_ft is not None else []
    slots: list[_Slot] = [*above, *level_slot, *below, *foot]
    top, bottom = PAD_PX * room.scale, room.height_px - PAD_PX * room.scale
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
    frame: WallFrame,
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
        for frame in frames(room, word_px):
            if len(frame.columns) == 1:
                plan = _placed(frame, items, lines, room, axis, level_ft)
                if plan is not None:
                    return plan
    raise ValueError(f"no room for a board in {room.width_px:g} by {room.height_px:g} pixels")
