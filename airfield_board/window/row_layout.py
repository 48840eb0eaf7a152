"""Where the rows of the board stand: near the level of their limit, in order, none on another.

Pixels only; no Qt.
"""

from collections.abc import Sequence
from dataclasses import dataclass
from enum import Enum
from itertools import pairwise

LEVEL_WEIGHT = 40.0
"""The level of the air counts as much as so many rows, so that it stays level where the rows permit."""


class Density(Enum):
    """How much a row can carry."""

    COMFORTABLE = "comfortable"
    STANDARD = "standard"
    DENSE = "dense"


COMFORTABLE_FROM_PX = 30
STANDARD_FROM_PX = 22
PITCH_LARGEST_PX = 42
PITCH_SMALLEST_PX = 10
FOLDED_PITCH_PX = 12
FOLDED_SMALLEST_PX = 11
EASED_PX = 36
EXTRA_LINE_PX = 15.0
LEVEL_PX = {Density.COMFORTABLE: 28.0, Density.STANDARD: 24.0, Density.DENSE: 15.0}
FOOT_GAP_PX = {Density.COMFORTABLE: 6.0, Density.STANDARD: 6.0, Density.DENSE: 4.0}


@dataclass(frozen=True, slots=True, kw_only=True)
class Pitch:
    """Height of a row of the plain kind, and what it can carry."""

    px: float
    density: Density


def choose_pitch(space_px: float, rows: int, *, with_level: bool, extra_lines: int, with_foot: bool) -> Pitch:
    """Choose the height of a row so that all rows fit.

    Parameters
    ----------
    space_px
        Height for all rows and the level.
    rows
        How many.
    with_level
        Whether the level takes its place among them.
    extra_lines
        How many third lines the rows would have together, if there is room for them.
    with_foot
        Whether some rows stand apart at the foot.

    Returns
    -------
    Pitch
        Never below `PITCH_SMALLEST_PX`: more rows than fit at that height must be folded.
    """
    count = max(rows, 1)

    def pitch_px(density: Density) -> float:
        taken_px = (LEVEL_PX[density] if with_level else 0.0) + (FOOT_GAP_PX[density] if with_foot else 0.0)
        if density is Density.COMFORTABLE:
            taken_px += extra_lines * EXTRA_LINE_PX
        return (space_px - taken_px) / count

    comfortable_px = pitch_px(Density.COMFORTABLE)
    if comfortable_px >= COMFORTABLE_FROM_PX:
        return Pitch(px=min(comfortable_px, PITCH_LARGEST_PX), density=Density.COMFORTABLE)
    standard_px = pitch_px(Density.STANDARD)
    if standard_px >= STANDARD_FROM_PX:
        return Pitch(px=min(standard_px, COMFORTABLE_FROM_PX), density=Density.STANDARD)
    dense_px = pitch_px(Density.DENSE)
    return Pitch(px=max(min(dense_px, STANDARD_FROM_PX), PITCH_SMALLEST_PX), density=Density.DENSE)


def rows_that_fit(space_px: float, pitch_px: float, *, with_level: bool, with_foot: bool) -> int:
    """Return how many dense rows of a height fit."""
    taken_px = (LEVEL_PX[Density.DENSE] if with_level else 0.0) + (FOOT_GAP_PX[Density.DENSE] if with_foot else 0.0)
    return max(int((space_px - taken_px) // pitch_px), 1)


def settle(
    targets_px: Sequence[float],
    heights_px: Sequence[float],
    weights: Sequence[float],
    top_px: float,
    bottom_px: float,
) -> list[float]:
    """Place boxes one under the other, each as near to its target as the others permit.

    Weighted least squares under the order given: with the half heights of all boxes before it taken off, the places
    must not fall, which pooling adjacent violators solves exactly in one pass.

    Parameters
    ----------
    targets_px, heights_px, weights
        Of each box, from top to bottom: where its middle would best be, its height, how much it counts (above 0).
    top_px, bottom_px
        Between them all boxes stand; where they do not fit, they run over the bottom.

    Returns
    -------
    list of float
        The middles, growing by at least half the heights of neighbours.
    """
    if not targets_px:
        return []
    offsets = [0.0]
    for before, after in pairwise(heights_px):
        offsets.append(offsets[-1] + (before + after) / 2)
    pools: list[tuple[float, float, int]] = []
    for target, weight, offset in zip(targets_px, weights, offsets, strict=True):
        mean, total, count = target - offset, weight, 1
        while pools and pools[-1][0] > mean:
            earlier_mean, earlier_total, earlier_count = pools.pop()
            mean = (mean * total + earlier_mean * earlier_total) / (total + earlier_total)
            total += earlier_total
            count += earlier_count
        pools.append((mean, total, count))
    lowest = top_px + heights_px[0] / 2
    highest = max(bottom_px - heights_px[-1] / 2 - offsets[-1], lowest)
    flat = [min(max(mean, lowest), highest) for mean, _total, count in pools for _ in range(count)]
    return [place + offset for place, offset in zip(flat, offsets, strict=True)]


@dataclass(frozen=True, slots=True, kw_only=True)
class RowBox:
    """A row as placed: the index of the row, its middle and its height."""

    index: int
    middle_px: float
    height_px: float

    @property
    def top_px(self) -> float:
        """Upper edge."""
        return self.middle_px - self.height_px / 2

    @property
    def bottom_px(self) -> float:
        """Lower edge."""
        return self.middle_px + self.height_px / 2


@dataclass(frozen=True, slots=True, kw_only=True)
class Wish:
    """What a row asks of the layout.

    Attributes
    ----------
    target_px
        Where its limit lies on the plot; None for a row without a place on the axis.
    below
        Whether it stands below the level of the air: a row on HOLD or REDUCED, whatever its limit.
    extra_lines
        Third lines it would have.
    """

    target_px: float | None
    below: bool
    extra_lines: int = 0


@dataclass(frozen=True, slots=True, kw_only=True)
class RowPlan:
    """All rows placed.

    Attributes
    ----------
    boxes
        From top to bottom.
    level_px
        Middle of the level among the rows; None without one.
    water_top_px, water_bottom_px
        What is tinted: from the level to the end of the rows below it.
    """

    pitch: Pitch
    boxes: tuple[RowBox, ...]
    level_px: float | None
    water_bottom_px: float


def plan_rows(wishes: Sequence[Wish], level_target_px: float | None, top_px: float, bottom_px: float) -> RowPlan:
    """Place all rows: those above the level, the level, those below it, and at the foot those without a place.

    Parameters
    ----------
    wishes
        In the order of the board.
    level_target_px
        Where the air's density altitude lies on the plot; None where it is not known.
    top_px, bottom_px
        The room.
    """
    placed = [index for index, wish in enumerate(wishes) if wish.target_px is not None]
    foot = [index for index, wish in enumerate(wishes) if wish.target_px is None]
    with_level = level_target_px is not None
    pitch = choose_pitch(
        bottom_px - top_px,
        len(wishes),
        with_level=with_level,
        extra_lines=sum(wish.extra_lines for wish in wishes),
        with_foot=bool(foot) and bool(placed),
    )
    pitch = _eased(pitch, wishes, level_target_px, top_px)
    heights = [
        pitch.px + (wish.extra_lines * EXTRA_LINE_PX if pitch.density is Density.COMFORTABLE else 0.0)
        for wish in wishes
    ]
    foot_top_px = bottom_px - sum(heights[index] for index in foot)
    boxes = []
    edge_px = foot_top_px
    for index in foot:
        boxes.append(RowBox(index=index, middle_px=edge_px + heights[index] / 2, height_px=heights[index]))
        edge_px += heights[index]
    room_bottom_px = foot_top_px - (FOOT_GAP_PX[pitch.density] if foot and placed else 0.0)

    above = [index for index in placed if not (with_level and wishes[index].below)]
    below = [index for index in placed if with_level and wishes[index].below]
    order: list[int | None] = [*above, *([None] if with_level else []), *below]
    middles = settle(
        [(level_target_px if index is None else wishes[index].target_px) or 0.0 for index in order],
        [LEVEL_PX[pitch.density] if index is None else heights[index] for index in order],
        [LEVEL_WEIGHT if index is None else 1.0 for index in order],
        top_px,
        room_bottom_px,
    )
    level_px = None
    upper = []
    for place, middle_px in zip(order, middles, strict=True):
        if place is None:
            level_px = middle_px
        else:
            upper.append(RowBox(index=place, middle_px=middle_px, height_px=heights[place]))
    return RowPlan(
        pitch=pitch, boxes=(*upper, *boxes), level_px=level_px, water_bottom_px=max(room_bottom_px, level_px or 0.0)
    )


def _eased(pitch: Pitch, wishes: Sequence[Wish], level_target_px: float | None, top_px: float) -> Pitch:
    """Lower the rows a little where the level could then stand nearer to where the air is."""
    above = sum(wish.target_px is not None and not wish.below for wish in wishes)
    if level_target_px is None or not above or pitch.density is not Density.COMFORTABLE:
        return pitch
    wanted_px = (level_target_px - LEVEL_PX[pitch.density] / 2 - top_px) / above
    return Pitch(px=min(pitch.px, max(wanted_px, EASED_PX)), density=pitch.density)
