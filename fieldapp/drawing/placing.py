"""Where words go on a picture so that they neither collide nor leave it. No Kivy import."""

from __future__ import annotations

from typing import TYPE_CHECKING

import numpy as np

if TYPE_CHECKING:
    from collections.abc import Sequence

    import numpy.typing as npt

Box = tuple[float, float, float, float]  # left, bottom, right, top

# The eight sides of a point, as the share of the words' size that lies left of and below the anchor; right first.
SIDES = ((0, 0.5), (1, 0.5), (0.5, 0), (0.5, 1), (0, 0), (1, 0), (0, 1), (1, 1))
WORDS_COST, OUTSIDE_COST = 60.0, 400.0


def overlap(first: Box, second: Box) -> float:
    """Area two boxes share."""
    wide = min(first[2], second[2]) - max(first[0], second[0])
    high = min(first[3], second[3]) - max(first[1], second[1])
    return max(wide, 0.0) * max(high, 0.0)


def place_beside(
    anchor: Sequence[float],
    size: Sequence[float],
    *,
    gap: float,
    taken: Sequence[Box],
    points: npt.NDArray[np.float64],
    bounds: Box,
) -> Box:
    """Find the box of words of this size beside an anchor that covers least.

    `taken` are boxes of other words and `points` (n, 2) the readings drawn; words are never put over other
    words or outside the bounds while another side is free.
    """
    best: Box = (anchor[0], anchor[1], anchor[0] + size[0], anchor[1] + size[1])
    least = np.inf
    for ring in (1.0, 2.2, 3.6):
        for order, (left_share, low_share) in enumerate(SIDES):
            push_x = (0.5 - left_share) * 2.0 * gap * ring
            push_y = (0.5 - low_share) * 2.0 * gap * ring
            left = anchor[0] - left_share * size[0] + push_x
            low = anchor[1] - low_share * size[1] + push_y
            box = (left, low, left + size[0], low + size[1])
            area = size[0] * size[1]
            cost = 0.05 * order + 1.5 * (ring - 1.0)
            cost += sum(WORDS_COST * overlap(box, other) / area for other in taken)
            cost += OUTSIDE_COST * (1.0 - overlap(box, bounds) / area)
            if len(points):
                inside = np.all((points > box[:2]) & (points < box[2:]), axis=1)
                cost += min(float(inside.sum()), 20.0)
            if cost < least:
                best, least = box, cost
    return best


def nice_step(span: float, most: int) -> float:
    """A step of 1, 2 or 5 times a power of ten that cuts a span into at most `most` parts."""
    rough = max(span, 1e-9) / max(most, 1)
    power = 10.0 ** np.floor(np.log10(rough))
    for factor in (1.0, 2.0, 5.0, 10.0):
        if factor * power >= rough * (1.0 - 1e-9):
            return float(factor * power)
    return float(10.0 * power)
