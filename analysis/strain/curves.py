"""What the Fault leaf and the figure draw: fold-fault angle against transection, as plain arrays.

Horizontal is the fold-fault angle in the frame of the fault, vertical the transection, clockwise positive
as in the verdict; on a dextral fault the curves of rotation therefore lie below the line of no transection.
"""

from __future__ import annotations

from dataclasses import dataclass
from typing import TYPE_CHECKING

import numpy as np

from analysis.stats.quantiles import f2_quantile
from analysis.strain import shear
from analysis.strain.misfit import rotation_curve
from analysis.strain.observed import fold_fault_angle_deg, pair_covariance

if TYPE_CHECKING:
    from collections.abc import Sequence

    from analysis.orient.vectors import Floats
    from analysis.strain.observed import Fault, FoldPair

_STRAINS = np.concatenate([[0.0], np.geomspace(0.02, 60.0, 95)])
_ELLIPSE_POINTS = 73


@dataclass(frozen=True, slots=True, kw_only=True, eq=False)
class FaultCurves:
    """Curves and data in the plane of fold-fault angle (x) against transection (y), degrees.

    Attributes
    ----------
    sign
        +1 where rotation predicts clockwise cleavage (sinistral), -1 where anticlockwise (dextral).
    rotation
        (n, 2), rotation in simple shear from 45 degrees towards the fault.
    partitioned
        (2, 2), the ends of the line of no transection.
    transpression
        For each convergence angle asked for: the angle, and its curve (n, 2).
    late
        For each onset asked for: the share of the shear that had passed when cleavage began, and its curve.
    datum
        (2,), the pair; None while there is no transection.
    ellipse
        (m, 2), closed, the pair's confidence ellipse; None without a datum or with an endless error.
    fold_fault_angle_deg
        Where a line stands for the fold-fault angle when there is no datum yet.
    x_range_deg, y_range_deg
        What a picture has to show to hold curves, datum and ellipse.

    """

    sign: int
    rotation: Floats
    partitioned: Floats
    transpression: tuple[tuple[float, Floats], ...]
    late: tuple[tuple[float, Floats], ...]
    datum: Floats | None
    ellipse: Floats | None
    fold_fault_angle_deg: float
    x_range_deg: tuple[float, float]
    y_range_deg: tuple[float, float]


def fault_curves(
    pair: FoldPair,
    fault: Fault,
    *,
    confidence: float = 0.95,
    convergence_deg: Sequence[float] = (20.0, 45.0),
    onset: Sequence[float] = (0.5, 0.75),
) -> FaultCurves:
    """Compute everything that is drawn for one pair: well below 5 ms, so once per change of an input."""
    angle, sign = fold_fault_angle_deg(pair, fault)
    mirror = np.array([1.0, float(sign)])
    datum = ellipse = None
    if pair.transection_deg is not None:
        datum = np.array([angle, pair.transection_deg])
        covariance = pair_covariance(pair, fault)
        if np.all(np.isfinite(covariance)):
            ellipse = datum + mirror * ellipse_deg(covariance, pair.df, confidence)
    transpression = tuple((each, mirror * _transpression(each)) for each in convergence_deg)
    late = tuple((each, mirror * _late(each)) for each in onset)
    x_range, y_range = _ranges(sign, angle, datum, ellipse)
    return FaultCurves(
        sign=sign,
        rotation=mirror * rotation_curve(),
        partitioned=np.array([[x_range[0], 0.0], [x_range[1], 0.0]]),
        transpression=transpression,
        late=late,
        datum=datum,
        ellipse=ellipse,
        fold_fault_angle_deg=angle,
        x_range_deg=x_range,
        y_range_deg=y_range,
    )


def ellipse_deg(covariance: Floats, df: float, confidence: float = 0.95) -> Floats:
    """Outline, (m, 2) degrees round (0, 0), of the confidence ellipse of a pair with this covariance.

    Squared radius 2 F(2, df) in standard errors: exact for a covariance known up to a scale with `df` degrees
    of freedom (Hotelling's ellipse for two values with one common variance estimate; from memory).
    """
    radius = -2.0 * np.log1p(-confidence) if np.isinf(df) else 2.0 * float(f2_quantile(confidence, df))
    values, axes = np.linalg.eigh(covariance)
    turn = np.linspace(0.0, 2.0 * np.pi, _ELLIPSE_POINTS)
    circle = np.stack([np.cos(turn), np.sin(turn)])
    return np.asarray((axes @ (np.sqrt(np.maximum(values, 0.0) * radius)[:, np.newaxis] * circle)).T)


def _transpression(convergence_deg: float) -> Floats:
    predicted = shear.transpression(convergence_deg, _STRAINS)
    return np.stack([predicted.hinge_deg, predicted.transection_deg], axis=-1)


def _late(onset: float) -> Floats:
    predicted = shear.simple_shear(_STRAINS, (1.0 - onset) * _STRAINS)
    return np.stack([predicted.hinge_deg, predicted.transection_deg], axis=-1)


def _ranges(
    sign: int, angle: float, datum: Floats | None, ellipse: Floats | None
) -> tuple[tuple[float, float], tuple[float, float]]:
    """Give at least 0 to 50, and 25 to the predicted side; wider where the data need it, in fives."""
    low, high = np.array([0.0, -5.0]), np.array([50.0, 25.0])
    if sign < 0:
        low[1], high[1] = -25.0, 5.0
    places = [np.array([[angle, 0.0]])] + [each for each in (ellipse, datum) if each is not None]
    for place in places:
        points = np.clip(place.reshape(-1, 2), [-90.0, -60.0], [120.0, 60.0])
        low, high = np.minimum(low, points.min(axis=0) - 1.0), np.maximum(high, points.max(axis=0) + 1.0)
    low, high = 5.0 * np.floor(low / 5.0), 5.0 * np.ceil(high / 5.0)
    return (float(low[0]), float(high[0])), (float(low[1]), float(high[1]))
