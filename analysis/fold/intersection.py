"""Bedding-cleavage intersections: lines computed from planes read together, their mean, and limb against limb."""

from __future__ import annotations

from typing import TYPE_CHECKING, Final

import numpy as np

from analysis.errors import AttitudeError
from analysis.fold.records import LimbLine
from analysis.orient.attitudes import Line
from analysis.orient.vectors import cross, lower_hemisphere
from analysis.stats.axes import eigen
from analysis.stats.moments import COUNT, WIDTH, moments, tensor

if TYPE_CHECKING:
    from collections.abc import Sequence

    import numpy.typing as npt

    from analysis.fold.limbs import Limbs
    from analysis.orient.vectors import Floats

# Below this angle between bedding and cleavage, about 6 degrees, their intersection is lost in the scatter.
_SINE_AT_LEAST: Final = 0.1


def computed_lines(
    cells: Floats,
    owner: npt.NDArray[np.int64],
    side: npt.NDArray[np.int64],
    cleavage: Floats,
    scatter_rad: Sequence[float],
) -> Floats:
    """Moments, (lines, 24), of the lines in which bedding and cleavage meet, outcrop by outcrop and limb by limb.

    One line is computed from the mean bedding pole of a limb and the mean cleavage pole at an outcrop where
    both were read. Its variance, summed over both directions across it, is (vb/nb + vc/nc)/sin^2 of the angle
    between the planes; for equal scatter this is the sum of the two variances of METHOD sec. 3. Its weight is
    that of a measured line of usual scatter over it.

    Parameters
    ----------
    cells, owner, side
        Moments (cells, 24) of bedding, the outcrop's index of each and its side of the fold, 0 or 1.
    cleavage
        Moments (outcrops, 24) of cleavage poles.
    scatter_rad
        Standard deviations of one bedding pole, one cleavage pole and one measured line.

    """
    cleaved_here = cleavage[owner, COUNT] > 0.5
    if not cleaved_here.any():
        return np.zeros((0, WIDTH))
    beds, places = _summed(cells[cleaved_here], (owner * 2 + side)[cleaved_here])
    outcrops = places // 2
    first = np.diff(outcrops, prepend=-1) > 0  # they ascend, so each comes once or twice running
    cleaved, at = cleavage[outcrops[first]], np.cumsum(first) - 1
    poles = eigen(tensor(np.concatenate([beds, cleaved])))[1][..., 0]
    lines = cross(poles[: len(beds)], poles[len(beds) :][at])
    sine = np.linalg.norm(lines, axis=-1)
    clear = sine >= _SINE_AT_LEAST
    bed_variance = scatter_rad[0] ** 2 / beds[clear, COUNT]
    cleavage_variance = scatter_rad[1] ** 2 / cleaved[at[clear], COUNT]
    weight = 2.0 * scatter_rad[2] ** 2 * sine[clear] ** 2 / (bed_variance + cleavage_variance)
    return moments(lines[clear] / sine[clear, np.newaxis], weight)


def _summed(rows: Floats, keys: npt.NDArray[np.int64]) -> tuple[Floats, npt.NDArray[np.int64]]:
    """Sums, shape (keys held, W), of rows (N, W) by key (N,), and those keys, ascending; N is at least 1."""
    order = np.argsort(keys, kind="stable")
    ordered = keys[order]
    starts = np.flatnonzero(np.concatenate([[True], ordered[1:] != ordered[:-1]]))
    return np.add.reduceat(rows[order], starts), ordered[starts]


def limb_lines(
    limbs: Limbs,
    cleavage_pole: Floats,
    measured: Floats,
    outcrop_side: npt.NDArray[np.int64],
) -> tuple[LimbLine, ...]:
    """Compare limb with limb: in a transected fold the intersection plunges differently on either (Johnson 1991).

    Parameters
    ----------
    limbs, cleavage_pole
        Both limbs and the mean cleavage pole, shape (3,).
    measured
        Moments (outcrops, 24) of measured intersection lines.
    outcrop_side
        (outcrops,), 0 or 1 where an outcrop's bedding lies on one side of the fold, else -1.

    """
    result = []
    for k, limb in enumerate(limbs.both):
        crossed = cross(limb.plane.pole, cleavage_pole)
        try:
            line = Line.from_vector(crossed)
        except AttitudeError:  # a limb parallel to the cleavage has no line of intersection with it
            continue
        rows = measured[outcrop_side == k].sum(axis=0)
        mean = Line.from_vector(lower_hemisphere(eigen(tensor(rows))[1][:, 0])) if rows[COUNT] > 0.5 else None
        result.append(LimbLine(limb.name, line, mean, round(float(rows[COUNT]))))
    return tuple(result)


def side_of_outcrops(
    cells: Floats, owner: npt.NDArray[np.int64], side: npt.NDArray[np.int64], outcrops: int
) -> npt.NDArray[np.int64]:
    """Tell the side of the fold, 0 or 1, that nearly all bedding of an outcrop lies on, else -1: (outcrops,)."""
    counts = np.bincount(owner * 2 + side, weights=cells[:, COUNT], minlength=2 * outcrops).reshape(-1, 2)
    total = counts.sum(axis=1)
    share = counts.max(axis=1) / np.maximum(total, 1.0)
    return np.where((total > 0.5) & (share >= 0.8), counts.argmax(axis=1), -1)
