"""The inverse: which convergence, shear and onset of cleavage would give the pair that was seen.

One pair cannot fix three unknowns. What comes back is therefore a region, not a best value: the misfit of
every cell of a grid, and the outline of those that the readings do not rule out.
"""

from __future__ import annotations

from dataclasses import dataclass
from typing import TYPE_CHECKING

import numpy as np
import numpy.typing as npt

from analysis.stats.quantiles import f2_quantile
from analysis.strain import shear
from analysis.strain.misfit import Metric, misfit_to_segments
from analysis.strain.observed import Fault, FoldPair, fold_fault_angle_deg, pair_covariance

if TYPE_CHECKING:
    from analysis.orient.vectors import Floats

_LEAST_ANGLE_DEG = 1.5  # the shear axis ends where rotation has brought the hinge this near to the fault
_LEAST_GAMMA = 0.02


@dataclass(frozen=True, slots=True, kw_only=True, eq=False)
class Region:
    """Misfits on a grid of convergence angle, shear strain and onset.

    Attributes
    ----------
    convergence_deg
        (a,), 0 (simple shear) upwards.
    gamma
        (g,), shear strain along the fault, t cos(convergence); evenly spaced in its logarithm.
    onset
        (o,), share of the strain that had passed when cleavage began to record.
    away
        (a, g, o, 2), from the pair to what each grid point predicts, in standard errors along two directions at right
        angles in the metric of the pair's covariance.
    limit
        Misfit on the outline of the region of this confidence.
    confidence
        The confidence, as 0.95.

    """

    convergence_deg: Floats
    gamma: Floats
    onset: Floats
    away: Floats
    limit: float
    confidence: float

    @property
    def misfit(self) -> Floats:
        """Squared Mahalanobis distance, (a, g, o), of the pair from what each grid point predicts."""
        return np.asarray(np.sum(self.away * self.away, axis=-1))

    @property
    def inside(self) -> npt.NDArray[np.bool_]:
        """Which grid points, (a, g, o), the readings do not rule out."""
        return self.misfit <= self.limit

    def map(self) -> Floats:
        """Misfit, (a, g), over convergence and shear at the onset that fits best, on the grid or between."""
        return _least_along(self.away)

    def onset_map(self) -> Floats:
        """Misfit, (g, o), over shear and onset at the convergence that fits best, on the grid or between."""
        return _least_along(np.moveaxis(self.away, 0, 2))

    def outline(self) -> Floats:
        """Outline on `map` as line pieces, (n, 2, 2): ends by (convergence_deg, gamma); maybe none."""
        pieces = contour_pieces(self.convergence_deg, np.log(self.gamma), self.map(), self.limit)
        pieces[..., 1] = np.exp(pieces[..., 1])
        return pieces

    def onset_outline(self) -> Floats:
        """Outline on `onset_map` as line pieces, (n, 2, 2): ends by (gamma, onset)."""
        pieces = contour_pieces(np.log(self.gamma), self.onset, self.onset_map(), self.limit)
        pieces[..., 0] = np.exp(pieces[..., 0])
        return pieces


def fitting_region(
    pair: FoldPair,
    fault: Fault,
    *,
    confidence: float = 0.95,
    cells: tuple[int, int, int] = (44, 64, 24),
) -> Region | None:
    """Find the convergence, shear and onset that fit the pair; None while it has no transection.

    `cells` are the sizes of the grid: convergence 0 to 86 degrees, shear up to what the hinge's lowest likely
    angle allows, onset 0 to 1. The region is that of the ellipse of the pair: F(2, df).
    """
    covariance = pair_covariance(pair, fault)
    if pair.transection_deg is None or not np.all(np.isfinite(covariance)):
        return None
    angle, sign = fold_fault_angle_deg(pair, fault)
    lowest = max(angle - 3.0 * float(np.sqrt(covariance[0, 0])), _LEAST_ANGLE_DEG)
    greatest = max(1.2 * float(shear.gamma_of_angle(lowest)), 1.0)
    convergence = np.linspace(0.0, 86.0, cells[0])
    gamma = np.geomspace(_LEAST_GAMMA, greatest, cells[1])
    onset = np.linspace(0.0, 1.0, cells[2])
    along = np.cos(np.radians(convergence))[:, np.newaxis, np.newaxis]
    predicted = shear.transpression(
        convergence[:, np.newaxis, np.newaxis], gamma[np.newaxis, :, np.newaxis] / along, onset
    )
    hinge = np.broadcast_to(predicted.hinge_deg, predicted.transection_deg.shape)
    places = np.stack([hinge, predicted.transection_deg], axis=-1)
    datum = np.array([angle, sign * pair.transection_deg])
    limit = (
        2.0 * float(f2_quantile(confidence, pair.df))
        if np.isfinite(pair.df)
        else -2.0 * np.log1p(-confidence)
    )
    return Region(
        convergence_deg=convergence,
        gamma=gamma,
        onset=onset,
        away=(places - datum) @ Metric.of(covariance).whitener.T,
        limit=float(limit),
        confidence=confidence,
    )


def _least_along(away: Floats) -> Floats:
    """Least misfit, (m, n), along the curves (m, n, points, 2) that grid points lie on.

    What is predicted changes from point to point by more than errors allow where shear is strong: the nearest place
    of a curve may lie anywhere between two of them.
    """
    misfit, _ = misfit_to_segments(away[..., :-1, :], np.diff(away, axis=-2))
    return np.asarray(misfit.min(axis=-1))


# The edges of a cell, and which of them a contour joins for each pattern of corners below the level. Corners
# and edges run round the cell: corner 0 at (i, j), 1 at (i+1, j), 2 at (i+1, j+1), 3 at (i, j+1); edge e
# joins corner e to the next. Patterns 5 and 10, the saddles, take two pieces.
_CORNERS = ((0, 0), (1, 0), (1, 1), (0, 1))
_PIECES = (
    (), ((3, 0),), ((0, 1),), ((3, 1),), ((1, 2),), ((3, 0), (1, 2)), ((0, 2),), ((3, 2),),
    ((2, 3),), ((2, 0),), ((0, 1), (2, 3)), ((2, 1),), ((1, 3),), ((1, 0),), ((0, 3),), (),
)  # fmt: skip


def contour_pieces(x: npt.ArrayLike, y: npt.ArrayLike, z: npt.ArrayLike, level: float) -> Floats:
    """Contour of a gridded value as line pieces, by marching squares with straight interpolation.

    Parameters
    ----------
    x, y
        (n,) and (m,), the grid's coordinates.
    z
        (n, m), the value at each grid point; finite.
    level
        The contour's value. Where the area below it meets the grid's edge the contour is open.

    Returns
    -------
    (pieces, 2, 2)
        The two ends of each piece, by (x, y).

    """
    xs, ys, values = np.asarray(x, dtype=float), np.asarray(y, dtype=float), np.asarray(z, dtype=float)
    n, m = values.shape
    i, j = np.meshgrid(np.arange(n - 1), np.arange(m - 1), indexing="ij")
    corner_places = np.stack(
        [np.stack([xs[i + di], ys[j + dj]], axis=-1) for di, dj in _CORNERS], axis=2
    )  # (n-1, m-1, 4, 2)
    corner_values = np.stack([values[i + di, j + dj] for di, dj in _CORNERS], axis=2)
    below = corner_values <= level
    pattern = below @ np.array([1, 2, 4, 8])
    following = np.roll(corner_values, -1, axis=2)
    step = following - corner_values
    share = np.where(step == 0.0, 0.5, (level - corner_values) / np.where(step == 0.0, 1.0, step))[
        ..., np.newaxis
    ]
    crossings = corner_places + np.clip(share, 0.0, 1.0) * (
        np.roll(corner_places, -1, axis=2) - corner_places
    )
    found = [
        np.stack([crossings[pattern == kind][:, first], crossings[pattern == kind][:, second]], axis=1)
        for kind, joins in enumerate(_PIECES)
        for first, second in joins
    ]
    return np.concatenate(found, axis=0)
