"""Where words go on a figure so that they cover neither data nor other words.

Every label has candidate places on rings round its anchors. Each is scored by what it would cover and by how
far off it lies; the cheapest wins, and is in the way of the labels that follow. Lengths are pixels.
"""

from __future__ import annotations

from dataclasses import dataclass, field
from typing import TYPE_CHECKING, Final, NamedTuple

import numpy as np

if TYPE_CHECKING:
    import numpy.typing as npt

    from analysis.orient.vectors import Floats

_DIRECTIONS: Final = 24
_RINGS: Final = (1.0, 1.5, 2.2, 3.2, 4.5, 6.5, 9.0, 13.0, 18.0, 25.0)
_FORBIDDEN: Final = 1e6  # leaving the bounds, covering words
_LEADER_FROM: Final = 1.6  # gaps; nearer words need no line to their anchor
_LEADER_SAMPLES: Final = 12
_PAD: Final = 2.0  # between words and marks
_WORD_SPACE: Final = (11.0, 3.0)  # between words and words, across and up: two labels must not read as one
_SLAB: Final = 400_000  # pairs of candidate and point looked at together
_MOST_ANCHORS: Final = 40


class Box(NamedTuple):
    """A box by its edges, pixels."""

    left: float
    bottom: float
    right: float
    top: float

    @property
    def centre(self) -> tuple[float, float]:
        """Its middle."""
        return (self.left + self.right) / 2.0, (self.bottom + self.top) / 2.0

    def nearest(self, x: float, y: float) -> tuple[float, float]:
        """The point of the box that lies nearest to a point."""
        return min(max(x, self.left), self.right), min(max(y, self.bottom), self.top)


class Place(NamedTuple):
    """Where a label goes: its box, the anchor it belongs to, and whether it needs a line to it."""

    box: Box
    anchor: tuple[float, float]
    leader: bool


@dataclass(slots=True)
class Placer:
    """Places labels one after the other within bounds."""

    bounds: Box
    boxes: list[Box] = field(default_factory=list)
    _points: list[Floats] = field(default_factory=list)

    def block(self, points: npt.ArrayLike, radius: float, cost: float) -> None:
        """Say that marks of this radius lie at points (n, 2), and what covering one of them costs.

        Points in one and the same pixel square count once for each square, so that the work does not grow
        with the number of readings without end.
        """
        places = np.asarray(points, dtype=float).reshape(-1, 2)
        if len(places) > 500:
            places = np.unique(np.round(places / 4.0), axis=0) * 4.0
        extra = np.broadcast_to([radius, cost], (len(places), 2))
        self._points.append(np.concatenate([places, extra], axis=1))

    def take(self, box: Box) -> None:
        """Say that words stand in this box."""
        self.boxes.append(box)

    def place(
        self,
        anchors: npt.ArrayLike,
        size: tuple[float, float],
        *,
        gap: float,
        on_anchor: bool = False,
        own_mark: float = 0.0,
        take: bool = True,
    ) -> Place:
        """Find the place of a label of this size, (wide, high), beside one of the anchors, (n, 2), and take it.

        Without `take` the place is only found: what stands there is not words but marks, to be blocked.

        `gap` is the room between an anchor and its label; with `on_anchor` the middle of the anchor itself is
        tried too, and `own_mark` is what covering its own mark there would else cost.
        """
        spots = np.asarray(anchors, dtype=float).reshape(-1, 2)
        spots = spots[:: -(-len(spots) // _MOST_ANCHORS)]
        boxes, owner, ring = self._candidates(spots, size, gap, on_anchor=on_anchor)
        cost = 0.35 * (ring - 1.0) + 1e-3 * np.arange(len(boxes)) / len(boxes)
        cost += self._outside(boxes) + self._over_words(boxes) + self._over_points(boxes)
        cost -= np.where(ring == 0.0, own_mark, 0.0)
        cost += self._leader_costs(boxes, spots[owner], gap)
        best = int(np.argmin(cost))
        box = Box(*(float(edge) for edge in boxes[best]))
        anchor = (float(spots[owner[best], 0]), float(spots[owner[best], 1]))
        near = box.nearest(*anchor)
        leader = float(np.hypot(near[0] - anchor[0], near[1] - anchor[1])) > _LEADER_FROM * gap
        if take:
            self.take(box)
        if leader:
            share = np.linspace(0.0, 1.0, 20)[:, np.newaxis]
            self.block(np.array(anchor) * (1.0 - share) + np.array(near) * share, 1.0, 3.0)
        return Place(box, anchor, leader)

    @staticmethod
    def _candidates(
        spots: Floats, size: tuple[float, float], gap: float, *, on_anchor: bool
    ) -> tuple[Floats, npt.NDArray[np.int64], Floats]:
        """Boxes (m, 4), the anchor of each (m,) and its ring (m,)."""
        turn = 2.0 * np.pi * np.arange(_DIRECTIONS) / _DIRECTIONS
        ray = np.stack([np.cos(turn), np.sin(turn)], axis=-1)
        half = np.array(size) / 2.0
        # So far out that the box just clears a disc of the gap's radius, in each direction.
        reach = np.min(
            np.where(np.abs(ray) > 1e-9, (half + gap) / np.maximum(np.abs(ray), 1e-9), np.inf), axis=1
        )
        rings = np.array(_RINGS)
        out = reach[np.newaxis, :] + (rings[:, np.newaxis] - 1.0) * gap
        offsets = (out[..., np.newaxis] * ray).reshape(-1, 2)
        ring = np.repeat(rings, _DIRECTIONS)
        if on_anchor:
            offsets, ring = np.concatenate([[[0.0, 0.0]], offsets]), np.concatenate([[0.0], ring])
        centres = (spots[:, np.newaxis, :] + offsets).reshape(-1, 2)
        owner = np.repeat(np.arange(len(spots)), len(offsets))
        return np.concatenate([centres - half, centres + half], axis=1), owner, np.tile(ring, len(spots))

    def _outside(self, boxes: Floats) -> Floats:
        b = self.bounds
        out = (
            (boxes[:, 0] < b.left)
            | (boxes[:, 1] < b.bottom)
            | (boxes[:, 2] > b.right)
            | (boxes[:, 3] > b.top)
        )
        return np.where(out, _FORBIDDEN, 0.0)

    def _over_words(self, boxes: Floats) -> Floats:
        cost = np.zeros(len(boxes))
        for taken in self.boxes:
            across, up = _WORD_SPACE
            wide = np.minimum(boxes[:, 2], taken.right) - np.maximum(boxes[:, 0], taken.left) + across
            high = np.minimum(boxes[:, 3], taken.top) - np.maximum(boxes[:, 1], taken.bottom) + up
            shared = np.maximum(wide, 0.0) * np.maximum(high, 0.0)
            cost += np.where(shared > 0.0, _FORBIDDEN * (1.0 + shared), 0.0)
        return cost

    def _over_points(self, boxes: Floats) -> Floats:
        cost = np.zeros(len(boxes))
        points = np.concatenate(self._points) if self._points else np.zeros((0, 4))
        slab = max(_SLAB // max(len(boxes), 1), 1)
        for start in range(0, len(points), slab):
            x, y, radius, each = points[start : start + slab].T
            room = radius + _PAD
            covered = (
                (x > boxes[:, :1] - room)
                & (x < boxes[:, 2:3] + room)
                & (y > boxes[:, 1:2] - room)
                & (y < boxes[:, 3:] + room)
            )
            cost += covered @ each
        return cost

    def _leader_costs(self, boxes: Floats, anchors: Floats, gap: float) -> Floats:
        """What the lines from the boxes to their anchors would cross, where there is one."""
        near = np.clip(anchors, boxes[:, :2], boxes[:, 2:])
        away = np.linalg.norm(near - anchors, axis=1)
        share = np.linspace(0.0, 1.0, _LEADER_SAMPLES)[:, np.newaxis, np.newaxis]
        way = anchors * (1.0 - share) + near * share
        cost = np.zeros(len(boxes))
        for box in self.boxes:
            x, y = way[..., 0], way[..., 1]
            inside = (x > box.left) & (x < box.right) & (y > box.bottom) & (y < box.top)
            cost += 200.0 * inside.any(axis=0)
        return np.where(away > _LEADER_FROM * gap, cost + 1.0, 0.0)
