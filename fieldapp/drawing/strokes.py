"""Lines as triangles with soft edges: points in, vertices and indices out. No Kivy import.

The canvas draws one mesh for all lines of one colour. Each vertex is x, y, s, t; s runs from `SOFT` (the clear
outer edge) to `SOLID`, so that a texture of two texels, clear and solid, gives an edge one pixel soft at any
density without multisampling.
"""

from __future__ import annotations

from dataclasses import dataclass
from typing import TYPE_CHECKING

import numpy as np
import numpy.typing as npt

if TYPE_CHECKING:
    from collections.abc import Iterable, Sequence

Floats = npt.NDArray[np.float64]

SOFT, SOLID = 0.25, 0.75  # the centres of the two texels
MITRE_LIMIT = 2.5  # a sharp corner is cut off at this many half widths
MOST_VERTICES = 65_000  # a mesh is indexed with 16 bits (OpenGL ES 2)
FEWEST_POINTS = 2


@dataclass(frozen=True, slots=True)
class Triangles:
    """A mesh: vertices (n, 4) of x, y, s, t and indices (m,), three to a triangle."""

    vertices: npt.NDArray[np.float32]
    indices: npt.NDArray[np.uint16]

    def __bool__(self) -> bool:
        return len(self.indices) > 0


NOTHING = Triangles(np.zeros((0, 4), np.float32), np.zeros(0, np.uint16))


def joined(parts: Iterable[Triangles]) -> Triangles:
    """Put meshes of one colour into one."""
    kept = [part for part in parts if part]
    if not kept:
        return NOTHING
    starts = np.cumsum([0, *(len(part.vertices) for part in kept[:-1])])
    return Triangles(
        np.concatenate([part.vertices for part in kept]),
        np.concatenate([part.indices + np.uint16(start) for part, start in zip(kept, starts, strict=True)]),
    )


def _normals(points: Floats, *, closed: bool) -> Floats:
    """Offset directions at the points, longer at corners so that the line keeps its width."""
    steps = np.roll(points, -1, axis=0) - points if closed else np.diff(points, axis=0)
    lengths = np.maximum(np.hypot(steps[:, 0], steps[:, 1]), 1e-12)[:, np.newaxis]
    across = np.stack([-steps[:, 1], steps[:, 0]], axis=1) / lengths
    if closed:
        before, after = np.roll(across, 1, axis=0), across
    else:
        before, after = np.concatenate([across[:1], across]), np.concatenate([across, across[-1:]])
    middle = before + after
    length = np.hypot(middle[:, 0], middle[:, 1])[:, np.newaxis]
    middle = np.where(length > 1e-6, middle / np.maximum(length, 1e-12), after)
    lean = np.sum(middle * after, axis=1, keepdims=True)
    return np.asarray(middle / np.maximum(lean, 1.0 / MITRE_LIMIT))


def line(points: npt.ArrayLike, width: float, *, closed: bool = False, soft: float = 1.0) -> Triangles:
    """Draw a line of this width through points (n, 2), all in pixels; fewer than two points draw nothing."""
    places = np.asarray(points, dtype=float).reshape(-1, 2)
    if len(places) < FEWEST_POINTS:
        return NOTHING
    count = len(places)
    normals = _normals(places, closed=closed)
    outer, inner = (width + soft) / 2.0, max((width - soft) / 2.0, 0.0)
    offsets = np.array([outer, inner, -inner, -outer])
    place = places[:, np.newaxis, :] + normals[:, np.newaxis, :] * offsets[:, np.newaxis]
    vertices = np.empty((count, 4, 4), np.float32)
    vertices[:, :, :2] = place
    vertices[:, :, 2] = (SOFT, SOLID, SOLID, SOFT)
    vertices[:, :, 3] = 0.5
    here = np.arange(count if closed else count - 1)
    there = (here + 1) % count
    # For each step three strips of two triangles: soft edge, middle, soft edge.
    ends = np.stack([here, here, there, there, here, there], axis=1) * 4
    corners = ends[:, np.newaxis, :] + np.array([0, 1, 0, 0, 1, 1]) + np.arange(3)[:, np.newaxis]
    return Triangles(vertices.reshape(-1, 4), corners.astype(np.uint16).ravel())


def segments(starts: npt.ArrayLike, ends: npt.ArrayLike, width: float, *, soft: float = 1.0) -> Triangles:
    """Draw many straight lines of one width at once, from points (n, 2) to points (n, 2)."""
    first, last = (np.asarray(side, dtype=float).reshape(-1, 2) for side in (starts, ends))
    steps = last - first
    lengths = np.maximum(np.hypot(steps[:, 0], steps[:, 1]), 1e-12)[:, np.newaxis]
    across = np.stack([-steps[:, 1], steps[:, 0]], axis=1) / lengths
    outer, inner = (width + soft) / 2.0, max((width - soft) / 2.0, 0.0)
    offsets = np.array([outer, inner, -inner, -outer])[:, np.newaxis]
    vertices = np.empty((len(first), 2, 4, 4), np.float32)
    for end, places in enumerate((first, last)):
        vertices[:, end, :, :2] = places[:, np.newaxis, :] + across[:, np.newaxis, :] * offsets
    vertices[..., 2] = (SOFT, SOLID, SOLID, SOFT)
    vertices[..., 3] = 0.5
    one = np.array([[k, k + 1, k + 4, k + 4, k + 1, k + 5] for k in range(3)]).ravel()
    indices = np.arange(len(first))[:, np.newaxis] * 8 + one
    return Triangles(vertices.reshape(-1, 4), indices.astype(np.uint16).ravel())


def dashed(points: npt.ArrayLike, width: float, on: float, off: float, start: float = 0.0) -> Triangles:
    """Draw a dashed line, its first dash at `start`; each dash is straight, as short ones are on any curve."""
    places = np.asarray(points, dtype=float).reshape(-1, 2)
    if len(places) < FEWEST_POINTS:
        return NOTHING
    steps = np.diff(places, axis=0)
    along = np.concatenate([[0.0], np.cumsum(np.hypot(steps[:, 0], steps[:, 1]))])
    starts = np.arange(start, along[-1], on + off)
    ends = np.minimum(starts + on, along[-1])
    first, last = (
        np.stack([np.interp(at, along, places[:, axis]) for axis in (0, 1)], axis=1) for at in (starts, ends)
    )
    return segments(first, last, width)


def patterned(points: npt.ArrayLike, width: float, pattern: Sequence[float]) -> Triangles:
    """Draw a line of dashes and gaps of these lengths in turn; a whole line where the pattern is empty."""
    if not pattern:
        return line(points, width)
    starts, whole = np.cumsum([0.0, *pattern]), float(sum(pattern))
    return joined(
        dashed(points, width, on, whole - on, float(starts[2 * number]))
        for number, on in enumerate(pattern[::2])
    )


def polygon(points: npt.ArrayLike) -> Triangles:
    """Fill a polygon, points (n, 2), that its mean point can see wholly (every convex one), hard edges."""
    places = np.asarray(points, dtype=float).reshape(-1, 2)
    count = len(places)
    if count < 3:
        return NOTHING
    vertices = np.full((count + 1, 4), SOLID, np.float32)
    vertices[0, :2] = places.mean(axis=0)
    vertices[1:, :2] = places
    here = np.arange(count)
    fan = np.stack([np.zeros(count), here + 1, (here + 1) % count + 1], axis=1)
    return Triangles(vertices, fan.astype(np.uint16).ravel())


def between(upper: npt.ArrayLike, lower: npt.ArrayLike) -> Triangles:
    """Fill the strip between two lines with the same number of points (n, 2)."""
    high, low = (np.asarray(side, dtype=float).reshape(-1, 2) for side in (upper, lower))
    count = len(high)
    if count < FEWEST_POINTS:
        return NOTHING
    vertices = np.full((2 * count, 4), SOLID, np.float32)
    vertices[:count, :2], vertices[count:, :2] = high, low
    here = np.arange(count - 1)
    quads = np.stack([here, here + count, here + 1, here + 1, here + count, here + count + 1], axis=1)
    return Triangles(vertices, quads.astype(np.uint16).ravel())


def circle(centre: Sequence[float], radius: float, count: int = 128) -> Floats:
    """Points (count, 2) round a circle."""
    angle = np.linspace(0.0, 2.0 * np.pi, count, endpoint=False)
    return np.stack([centre[0] + radius * np.cos(angle), centre[1] + radius * np.sin(angle)], axis=1)
