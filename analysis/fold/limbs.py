"""The two limbs of a fold, told apart from bedding kept by cells of attitude."""

from __future__ import annotations

import math
from dataclasses import dataclass
from typing import TYPE_CHECKING, Final

import numpy as np

from analysis.orient.attitudes import Plane
from analysis.orient.vectors import lower_hemisphere
from analysis.stats.axes import eigen
from analysis.stats.moments import COUNT, TENSOR, product_pairs, tensor

if TYPE_CHECKING:
    import numpy.typing as npt

    from analysis.orient.vectors import Floats

# Halves of a single cluster lie 2.65 of their standard deviations apart, halves of an even round 3.5 (computed
# here, for a normal and a uniform distribution): from about there on both sides of the fold have been read.
_TWO_LIMBS_FROM: Final = 3.2
_FLAT_BELOW_DEG: Final = 5.0
_OCTANTS: Final = ("N", "NE", "E", "SE", "S", "SW", "W", "NW")


@dataclass(frozen=True, slots=True)
class Limb:
    """One limb: its mean bedding plane, the number of readings, and their spread about the hinge, degrees.

    `name` tells it from the other limb: 'limb dipping NW', 'flat limb', or, where both dip the same way, 'steeper
    limb dipping NW'.
    """

    plane: Plane
    count: int
    spread_deg: float
    name: str


@dataclass(frozen=True, slots=True)
class Limbs:
    """Both limbs of a fold.

    `interlimb_deg` is 0 to 180 degrees, measured across the axial surface; the axial surface bisects it. Of
    the two bisecting planes the one nearer the cleavage is taken, or, without cleavage, the one that leaves
    both limbs right way up.
    """

    first: Limb
    second: Limb
    interlimb_deg: float
    axial_surface: Plane

    @property
    def both(self) -> tuple[Limb, Limb]:
        """The two limbs."""
        return self.first, self.second


def sides(cells: Floats, across: Floats) -> npt.NDArray[np.int64]:
    """Tell on which side of the fold, 0 or 1, each cell of bedding moments (cells, 24) lies.

    `across` (3, 2) are two directions at right angles to the hinge. Angles about the hinge are doubled, since
    poles are axes; the cloud of doubled angles is cut across its longest extent.
    """
    doubled = _about_hinge(cells, across)[:, :2]
    counts = cells[:, COUNT]
    away = doubled / counts[:, np.newaxis] - doubled.sum(axis=0) / counts.sum()
    _, vectors = np.linalg.eigh((away * counts[:, np.newaxis]).T @ away)
    return np.asarray(away @ vectors[:, 1] > 0.0, dtype=np.int64)


def find_limbs(
    cells: Floats, side: npt.NDArray[np.int64], across: Floats, cleavage: Floats | None
) -> Limbs | None:
    """Find both limbs, or None where only one side of the fold has been read.

    Parameters
    ----------
    cells, side, across
        Moments (cells, 24) of bedding, the side of each from `sides`, and (3, 2) the directions across the hinge.
    cleavage
        The cleavage pole, shape (3,), if known: it says which of the two bisecting planes is the axial surface.

    """
    if not (side.any() and not side.all()):
        return None
    sums = np.array([1 - side, side], dtype=float) @ cells
    about = _about_hinge(sums, across).tolist()
    counts = sums[:, COUNT].tolist()
    spread = [_spread_deg(*limb) for limb in about]
    turn = math.atan2(about[1][1], about[1][0]) - math.atan2(about[0][1], about[0][0])
    apart = 0.5 * math.degrees(abs((turn + math.pi) % (2.0 * math.pi) - math.pi))
    pooled = math.sqrt(sum(n * d * d for n, d in zip(counts, spread, strict=True)) / sum(counts))
    if apart < _TWO_LIMBS_FROM * pooled or apart < 1.0:
        return None
    poles = eigen(tensor(sums))[1][..., 0]
    planes = (Plane.from_pole(poles[0]), Plane.from_pole(poles[1]))
    first, second = (
        Limb(plane, round(count), width, name)
        for plane, count, width, name in zip(planes, counts, spread, _names(*planes), strict=True)
    )
    return Limbs(first, second, *_bisected(poles, cleavage))


def _names(first: Plane, second: Plane) -> tuple[str, str]:
    flat = [plane.dip_deg < _FLAT_BELOW_DEG for plane in (first, second)]
    ways = [_OCTANTS[round(plane.dip_direction_deg / 45.0) % 8] for plane in (first, second)]
    names = [f"limb dipping {way}" for way in ways]
    if any(flat) and not all(flat):  # the way in which a flat limb dips means nothing
        names[flat.index(True)] = "flat limb"
    elif ways[0] == ways[1]:
        steeper = int(second.dip_deg > first.dip_deg)
        names[steeper], names[1 - steeper] = f"steeper {names[0]}", f"gentler {names[0]}"
    return names[0], names[1]


def _bisected(poles: Floats, cleavage: Floats | None) -> tuple[float, Plane]:
    """Interlimb angle, degrees, and axial surface of two limbs with these poles, shape (2, 3)."""
    up = -lower_hemisphere(poles)
    between = math.degrees(math.acos(max(-1.0, min(1.0, float(up[0] @ up[1])))))
    upright, lying = up[0] - up[1], up[0] + up[1]
    if cleavage is not None:
        towards = [abs(float(axis @ cleavage)) / math.sqrt(float(axis @ axis)) for axis in (upright, lying)]
        if towards[1] > towards[0]:
            return between, Plane.from_pole(lying)
    return 180.0 - between, Plane.from_pole(upright)


def _about_hinge(rows: Floats, across: Floats) -> Floats:
    """Sums of (cos 2a, sin 2a, 1) r^2, shape (N, 3), over axes at angle a about the hinge and r off it.

    `rows` (N, 24) are moments, and `across` (3, 2) two directions at right angles to the hinge.
    """
    x_x, y_y, x_y = product_pairs(across.T[[0, 1, 0]], across.T[[0, 1, 1]])
    return np.asarray(rows[:, TENSOR] @ np.array([x_x - y_y, 2.0 * x_y, x_x + y_y]).T)


def _spread_deg(cosine: float, sine: float, squared: float) -> float:
    """Spread, degrees, about the hinge of axes with these sums of `_about_hinge` (circular standard deviation)."""
    gathered = min(max(math.hypot(cosine, sine) / max(squared, 1e-300), 1e-9), 1.0)
    return 0.5 * math.degrees(math.sqrt(-2.0 * math.log(gathered)))
