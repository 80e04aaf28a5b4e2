"""Drawn signs: lines in a square from -1 to 1, x right and y up. No Kivy import.

The font has no pencil and no backspace, and the verdict signs are our own; all are drawn as lines, so they are
sharp at any size and take the colour of the words beside them.
"""

from __future__ import annotations

import math
from dataclasses import dataclass

Line = tuple[tuple[float, float], ...]


@dataclass(frozen=True, slots=True)
class Stroke:
    """One line of a sign; `width` is a share of half the sign's size."""

    points: Line
    width: float = 0.17
    closed: bool = False


def _arc(start_deg: float, stop_deg: float, radius: float = 0.85, *, x: float = 0.0, y: float = 0.0) -> Line:
    count = max(int(abs(stop_deg - start_deg) / 6), 2)
    turns = [math.radians(start_deg + (stop_deg - start_deg) * i / count) for i in range(count + 1)]
    return tuple((x + radius * math.cos(turn), y + radius * math.sin(turn)) for turn in turns)


def _bar(lean_deg: float, half: float, *, x: float = 0.0) -> Line:
    """A bar through the middle, leaning clockwise from upright by this angle."""
    east, north = half * math.sin(math.radians(lean_deg)), half * math.cos(math.radians(lean_deg))
    return ((x - east, -north), (x + east, north))


LEAN_DEG = 32.0
RING = Stroke(_arc(0, 354), 0.2, closed=True)

ICONS: dict[str, tuple[Stroke, ...]] = {
    # The verdict: hinge (the thin upright bar) and cleavage (the heavy one).
    "two parallel bars": (Stroke(_bar(0, 0.9, x=-0.36), 0.26), Stroke(_bar(0, 0.9, x=0.36), 0.26)),
    "crossed bars leaning clockwise": (Stroke(_bar(0, 0.95), 0.14), Stroke(_bar(LEAN_DEG, 1.0), 0.3)),
    "crossed bars leaning anticlockwise": (Stroke(_bar(0, 0.95), 0.14), Stroke(_bar(-LEAN_DEG, 1.0), 0.3)),
    "crossed bars": (Stroke(_bar(LEAN_DEG, 0.95), 0.22), Stroke(_bar(-LEAN_DEG, 0.95), 0.22)),
    "open ring": (Stroke(_arc(60, -240), 0.2),),
    "ring with a bar": (RING, Stroke(((-0.6, -0.6), (0.6, 0.6)), 0.2)),
    # Keys
    "backspace": (
        Stroke(((-0.95, 0), (-0.4, 0.62), (0.95, 0.62), (0.95, -0.62), (-0.4, -0.62)), 0.12, closed=True),
        Stroke(((-0.12, 0.28), (0.5, -0.28)), 0.12),
        Stroke(((-0.12, -0.28), (0.5, 0.28)), 0.12),
    ),
    "mend": (
        Stroke(((-0.85, -0.85), (-0.7, -0.3), (0.45, 0.85), (0.85, 0.45), (-0.3, -0.7)), 0.16, closed=True),
        Stroke(((0.2, 0.6), (0.6, 0.2)), 0.16),
    ),
    "strike out": (RING, Stroke(((-0.45, 0.0), (0.45, 0.0)), 0.22)),
    "put back": (
        Stroke(_arc(140, -120, 0.72), 0.18),
        Stroke(((-0.95, 0.75), (-0.58, 0.42), (-0.12, 0.62)), 0.18),
    ),
    "fine": (Stroke(((-0.8, 0.0), (-0.25, -0.6), (0.85, 0.7)), 0.22),),
    "asks": (
        Stroke(((0.0, 0.9), (0.95, -0.75), (-0.95, -0.75)), 0.17, closed=True),
        Stroke(((0.0, 0.4), (0.0, -0.2)), 0.2),
        Stroke(((0.0, -0.38), (0.0, -0.56)), 0.2),
    ),
    "close": (Stroke(((-0.7, -0.7), (0.7, 0.7)), 0.18), Stroke(((-0.7, 0.7), (0.7, -0.7)), 0.18)),
    "settings": (
        Stroke(((-0.9, 0.55), (0.9, 0.55)), 0.14),
        Stroke(((-0.9, 0.0), (0.9, 0.0)), 0.14),
        Stroke(((-0.9, -0.55), (0.9, -0.55)), 0.14),
        Stroke(((-0.35, 0.32), (-0.35, 0.78)), 0.26),
        Stroke(((0.45, -0.23), (0.45, 0.23)), 0.26),
        Stroke(((-0.1, -0.78), (-0.1, -0.32)), 0.26),
    ),
    "list": tuple(Stroke(((-0.8, y), (0.8, y)), 0.18) for y in (0.55, 0.0, -0.55)),
    "undo": (
        Stroke((*_arc(-90, 90, 0.5, x=0.3, y=0.0), (-0.75, 0.5)), 0.18),
        Stroke(((-0.35, 0.9), (-0.8, 0.5), (-0.35, 0.1)), 0.18),
        Stroke(((0.3, -0.5), (-0.4, -0.5)), 0.18),
    ),
}
