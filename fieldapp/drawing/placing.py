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
    spans = np.array([size[0], size[1]], dtype=float)
    rings = np.repeat((1.0, 2.2, 3.6), len(SIDES))[:, np.newaxis]
    shares = np.tile(SIDES, (3, 1))
    low = np.asarray(anchor) + (0.5 - shares) * 2.0 * gap * rings - shares * spans
    cost = np.tile(0.05 * np.arange(len(SIDES)), 3) + 1.5 * (rings[:, 0] - 1.0)
    cost += _covered(low, low + spans, taken=taken, points=points, bounds=bounds, most_points=20.0)
    x, y = (float(edge) for edge in low[np.argmin(cost)])
    return (x, y, x + float(spans[0]), y + float(spans[1]))


def place_along(
    anchors: npt.NDArray[np.float64],
    size: Sequence[float],
    *,
    gap: float,
    taken: Sequence[Box],
    points: npt.NDArray[np.float64],
    bounds: Box,
    rings: Sequence[float] = (1.0, 2.0, 3.5, 6.0, 10.0),
) -> tuple[Box, tuple[float, float]]:
    """Find the box of words of this size beside any of the anchors (n, 2) that covers least; and that anchor.

    As `place_beside`, for words that name a line and may stand anywhere along it.
    """
    shares, spans = np.array(SIDES), np.array([size[0], size[1]], dtype=float)
    away = (0.5 - shares) * 2.0 * gap
    least, best, owner = np.inf, np.zeros(2), 0
    for ring in rings:
        farness = 0.3 * (ring - 1.0)
        if farness >= least:  # nothing farther out can cost less
            break
        low = (anchors[:, np.newaxis, :] + ring * away - shares * spans).reshape(-1, 2)
        cost = farness + np.tile(0.02 * np.arange(len(SIDES)), len(anchors))
        cost += _covered(low, low + spans, taken=taken, points=points, bounds=bounds, apart=gap)
        number = int(np.argmin(cost))
        if cost[number] < least:
            least, best, owner = float(cost[number]), low[number], number // len(SIDES)
    x, y = (float(edge) for edge in best)
    anchor = (float(anchors[owner][0]), float(anchors[owner][1]))
    return (x, y, x + float(spans[0]), y + float(spans[1])), anchor


def _covered(
    low: npt.NDArray[np.float64],
    high: npt.NDArray[np.float64],
    *,
    taken: Sequence[Box],
    points: npt.NDArray[np.float64],
    bounds: Box,
    apart: float = 0.0,
    most_points: float = np.inf,
) -> npt.NDArray[np.float64]:
    """What boxes with these corners (n, 2) cost for the words and points they cover and for leaving the bounds."""
    area = np.prod(high[0] - low[0])
    cost = np.full(len(low), OUTSIDE_COST)
    for box, weight in [*((each, WORDS_COST) for each in taken), (bounds, -OUTSIDE_COST)]:
        # Words keep apart sideways, so that two labels in one line do not read as one.
        room = apart if weight > 0.0 else 0.0
        wide = np.minimum(high[:, 0] + room, box[2]) - np.maximum(low[:, 0] - room, box[0])
        tall = np.minimum(high[:, 1], box[3]) - np.maximum(low[:, 1], box[1])
        cost += weight * np.maximum(wide, 0.0) * np.maximum(tall, 0.0) / area
    if len(points):
        inside = np.ones((len(low), len(points)), dtype=bool)
        for axis in (0, 1):
            across, room = points[:, axis], 0.6 * apart * (axis == 0)
            inside &= across > low[:, axis, np.newaxis] - room
            inside &= across < high[:, axis, np.newaxis] + room
        cost += np.minimum(inside.sum(axis=1), most_points)
    return cost


def nice_step(span: float, most: int) -> float:
    """A step of 1, 2 or 5 times a power of ten that cuts a span into at most `most` parts."""
    rough = max(span, 1e-9) / max(most, 1)
    power = 10.0 ** np.floor(np.log10(rough))
    for factor in (1.0, 2.0, 5.0, 10.0):
        if factor * power >= rough * (1.0 - 1e-9):
            return float(factor * power)
    return float(10.0 * power)
