"""What the plane of fold-fault angle against transection shows, and how lines are cut to its frame. No Kivy."""

from __future__ import annotations

from dataclasses import dataclass
from typing import TYPE_CHECKING

import numpy as np
import numpy.typing as npt

if TYPE_CHECKING:
    from fieldapp.drawing.placing import Box

Floats = npt.NDArray[np.float64]

# Each kind of curve has a dash of its own: lengths in dp of dash and gap in turn, none for a whole line.
DASHES: dict[str, tuple[float, ...]] = {
    "rotation": (),
    "partitioned": (9.0, 5.0),
    "transpression": (9.0, 4.0, 2.0, 4.0),
    "late": (2.0, 4.0),
}
WIDTHS_DP = {"rotation": 3.0, "partitioned": 2.4, "transpression": 1.8, "late": 2.0}


@dataclass(frozen=True, slots=True, eq=False)
class CurveLine:
    """One curve: its kind, the words beside it, in short where there is little room, and places (n, 2) in degrees."""

    kind: str
    label: str
    short: str
    points: Floats


@dataclass(frozen=True, slots=True, kw_only=True, eq=False)
class FaultScene:
    """The picture: x is the fold-fault angle, y the transection (clockwise positive), degrees.

    Without a datum an upright line stands at `angle_deg`. `confidence` is that of the ellipse; `way` says to
    which side of the fault x counts. `zone_width_km` gives the displacements along the upper edge; without it
    shear strains stand there.
    """

    curves: tuple[CurveLine, ...]
    angle_deg: float
    datum: Floats | None
    ellipse: Floats | None
    x_range_deg: tuple[float, float]
    y_range_deg: tuple[float, float]
    way: str
    confidence: float = 0.95
    zone_width_km: float | None = None


def cut_line(points: Floats, box: Box) -> list[Floats]:
    """The parts of a line through points (n, 2) that lie in a box, ends on its edges."""
    if len(points) < 2:
        return []
    starts, steps = points[:-1], np.diff(points, axis=0)
    # Each step enters and leaves the box at these shares of its length (Liang & Barsky 1984, from memory).
    enter, leave = np.zeros(len(starts)), np.ones(len(starts))
    for axis, low, high in ((0, box[0], box[2]), (1, box[1], box[3])):
        step = steps[:, axis]
        level = np.abs(step) < 1e-12
        safe = np.where(level, 1.0, step)
        first, last = (low - starts[:, axis]) / safe, (high - starts[:, axis]) / safe
        inside = (starts[:, axis] >= low) & (starts[:, axis] <= high)
        first, last = np.minimum(first, last), np.maximum(first, last)
        enter = np.maximum(enter, np.where(level, np.where(inside, -np.inf, np.inf), first))
        leave = np.minimum(leave, np.where(level, np.inf, last))
    kept = np.flatnonzero(enter < leave)
    if not len(kept):
        return []
    begin, end = (starts[kept] + share[kept, np.newaxis] * steps[kept] for share in (enter, leave))
    # A step goes on from the one before where that ran out inside the box.
    breaks = np.flatnonzero((np.diff(kept) > 1) | (leave[kept[:-1]] < 1.0) | (enter[kept[1:]] > 0.0)) + 1
    return [
        np.concatenate([first[:1], last])
        for first, last in zip(np.split(begin, breaks), np.split(end, breaks), strict=True)
    ]


def cut_area(points: Floats, box: Box) -> Floats:
    """The part of a convex area with corners (n, 2) that lies in a box; (0, 2) where none does."""
    for axis, edge, side in ((0, box[0], 1.0), (1, box[1], 1.0), (0, box[2], -1.0), (1, box[3], -1.0)):
        if not len(points):
            break
        # One edge after the other cuts off what lies beyond it (Sutherland & Hodgman 1974, from memory).
        depth = side * (points[:, axis] - edge)
        following, beyond = np.roll(points, -1, axis=0), np.roll(depth, -1)
        kept = []
        for k in range(len(points)):
            if depth[k] >= 0.0:
                kept.append(points[k])
            if (depth[k] >= 0.0) != (beyond[k] >= 0.0):
                kept.append(points[k] + depth[k] / (depth[k] - beyond[k]) * (following[k] - points[k]))
        points = np.array(kept).reshape(-1, 2)
    return points


def spaced(points: Floats, step: float) -> Floats:
    """Places (m, 2) along a line, one each `step` and the last one."""
    if len(points) < 2:
        return points
    along = np.concatenate([[0.0], np.cumsum(np.hypot(*np.diff(points, axis=0).T))])
    at = np.append(np.arange(0.0, along[-1], step), along[-1])
    return np.stack([np.interp(at, along, points[:, axis]) for axis in (0, 1)], axis=1)


def lonely(own: Floats, others: Floats, most: int = 16) -> Floats:
    """The half of a curve's places that lies farthest from the others, at most so many: words there are not misread."""
    thin = own[:: max(len(own) // (2 * most), 1)]
    if not len(others):
        return thin[:most]
    apart = np.min(np.hypot(*(thin[:, np.newaxis] - others).T), axis=0)
    return thin[apart >= np.quantile(apart, 0.5)][:most]
