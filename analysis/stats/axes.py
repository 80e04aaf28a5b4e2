"""Principal axes and how well they are known, from moments alone.

One estimator serves hinge, cleavage pole and mean intersection: the eigenvector of the largest eigenvalue of

    M = sum over streams of  w_f T_f

where T_f is a stream's orientation tensor and w_f its weight: +1/variance for axes that lie along the one
sought, -1/variance for axes at right angles to it. Bedding poles lie at right angles to the hinge and hinge
lines along it; cleavage poles lie along the cleavage pole and intersection lines at right angles to it.

Everything broadcasts: a leading shape (...) stands for any number of folds or moments in time.
"""

from __future__ import annotations

import math
from typing import TYPE_CHECKING, Final, NamedTuple

import numpy as np

from analysis.stats.moments import COUNT, fourth, product_pairs, tensor
from analysis.stats.quantiles import f2_quantile

if TYPE_CHECKING:
    from collections.abc import Sequence

    from analysis.orient.vectors import Floats

# Where a stream has fewer than four degrees of freedom its scatter is helped out by pseudo-readings of a
# usual one. Common practice, no source: 5 to 6 degrees for a compass on natural surfaces.
USUAL_SCATTER_DEG: Final = 5.5
_HELPED_BELOW: Final = 4.0
# A compass is read to whole degrees. Rounding alone scatters by 1/sqrt(12) degree, so readings that agree to the
# digit are not known any better than that.
ROUNDING_DEG: Final = 12.0**-0.5
_USUAL_VARIANCE: Final = math.radians(USUAL_SCATTER_DEG) ** 2
_ROUNDING_VARIANCE: Final = math.radians(ROUNDING_DEG) ** 2
# Eigenvalues closer than this share of all that was summed are one value: the axis is undetermined.
_SAME_EIGENVALUE: Final = 1e-12


class Stream(NamedTuple):
    """Readings that bear on one axis.

    Attributes
    ----------
    rows
        Moments, (..., outcrops, 24).
    along
        Whether its axes lie along the axis sought; else they lie at right angles to it.
    scatter_rad
        Standard deviation of one axis in one direction, radians, where it is known beforehand; None where the
        readings tell it.

    """

    rows: Floats
    along: bool
    scatter_rad: float | None = None


class AxisFit(NamedTuple):
    """A principal axis with its covariance.

    Attributes
    ----------
    vector
        (..., 3), the axis sought.
    across
        (..., 3, 2), the two directions at right angles to it, as columns; the less certain one first.
    covariance
        (..., 2, 2), of the axis' components along `across`, radians squared, whatever the distribution of the
        readings; infinite where the axis is undetermined. E/(n - 1) of Tyler (1981) and Prentice (1984).
    even_covariance
        (..., 2, 2), the same if all readings of a stream scatter alike and evenly about the fit: steadier
        while readings are few.
    influence
        (..., outcrops, 2), what each outcrop pulls the axis by along `across`, radians; their sum is zero.
    eigenvalues
        (..., 3), of M, descending: the axis' own first.
    scatter_rad
        (..., streams), standard deviation of one reading about the fit, in one direction; streams as given,
        without those that hold no reading.
    readings
        (...), number of readings.
    freedom
        (...), degrees of freedom of the scatter: one residual for a reading at right angles to the axis, two
        for a reading along it, less two.

    """

    vector: Floats
    across: Floats
    covariance: Floats
    even_covariance: Floats
    influence: Floats
    eigenvalues: Floats
    scatter_rad: Floats
    readings: Floats
    freedom: Floats

    @property
    def less_certain_se_rad(self) -> Floats:
        """Standard error, (...), of the axis in the direction in which it is known less well, radians."""
        return np.sqrt(np.maximum(self.covariance[..., 0, 0], self.even_covariance[..., 0, 0]))

    @property
    def ellipse_freedom(self) -> Floats:
        """Degrees of freedom, (...), of the confidence ellipse; there is none where they are not above zero."""
        return np.asarray(np.minimum(self.readings - 2.0, self.freedom - 1.0))


def eigen(symmetric: Floats) -> tuple[Floats, Floats]:
    """Eigenvalues (..., 3), descending, and eigenvectors (..., 3, 3) as columns, of symmetric (..., 3, 3)."""
    values, vectors = np.linalg.eigh(symmetric)
    return values[..., ::-1], vectors[..., ::-1]


def _variance(squares: Floats, freedom: Floats) -> Floats:
    """Variance of one residual from their sum of squares, helped out below four degrees of freedom.

    Never below what rounding to whole degrees alone makes.
    """
    own = np.maximum(freedom, 0.0)
    help_out = np.maximum(_HELPED_BELOW - own, 0.0)
    helped = (np.maximum(squares, 0.0) + help_out * _USUAL_VARIANCE) / (own + help_out)
    return np.asarray(np.maximum(helped, _ROUNDING_VARIANCE))


def _weight(stream: Stream, moment: Floats, count: Floats) -> Floats:
    """Weight in M of a stream that is fitted with others: +-1/variance about its own axis."""
    along = stream.along
    if stream.scatter_rad is not None:
        return np.full(count.shape, (1.0 if along else -1.0) / stream.scatter_rad**2)
    values: Floats = np.asarray(np.linalg.eigvalsh(moment), dtype=float)
    squares = values[..., 0] + values[..., 1] if along else values[..., 0]
    freedom = 2.0 * count - 2.0 if along else count - 2.0
    return (1.0 if along else -1.0) / _variance(squares, freedom)


def fit_axis(streams: Sequence[Stream]) -> AxisFit:
    """Fit the axis of largest eigenvalue of M; see the module's docstring.

    The covariance of an eigenvector u_c is sum w^2 (u_j.x)(u_k.x)(u_c.x)^2 / [(m_c - m_j)(m_c - m_k)], m the
    eigenvalues of M (Tyler 1981; Prentice 1984; Fisher, Lewis & Embleton 1987 ch. 6, from memory), here with
    n/(n - 1). With readings in several streams each is weighted by the scatter about its own axis; streams
    without any reading are left out.
    """
    streams = [stream for stream in streams if stream.rows[..., COUNT].any()] or list(streams[:1])
    totals = [stream.rows.sum(axis=-2) for stream in streams]
    tensors = [tensor(total) for total in totals]
    counts = [total[..., COUNT] for total in totals]
    if len(streams) > 1:
        weights = [_weight(stream, t, n) for stream, t, n in zip(streams, tensors, counts, strict=True)]
    else:
        weights = [
            np.full(n.shape, 1.0 if stream.along else -1.0) for n, stream in zip(counts, streams, strict=True)
        ]

    pulled = sum(w[..., np.newaxis, np.newaxis] * t for w, t in zip(weights, tensors, strict=True))
    values, vectors = eigen(np.asarray(pulled))
    axis, across = vectors[..., 0], vectors[..., 1:]
    gaps = values[..., :1] - values[..., 1:]
    size = np.asarray(sum(np.abs(w) * n for w, n in zip(weights, counts, strict=True)))
    apart = gaps > _SAME_EIGENVALUE * size[..., np.newaxis]
    reach = np.where(apart, 1.0 / np.where(apart, gaps, 1.0), np.inf)
    reach_squared = reach[..., :, np.newaxis] * reach[..., np.newaxis, :]

    residuals = [n * (2.0 if stream.along else 1.0) for n, stream in zip(counts, streams, strict=True)]
    all_residuals = np.asarray(sum(residuals))
    freedom = all_residuals - 2.0
    share = np.maximum(freedom, 0.0) / np.maximum(all_residuals, 1.0)
    parts = [
        _stream_part(stream, total, moment, weight, residual * share, axis, across)
        for stream, total, moment, weight, residual in zip(
            streams, totals, tensors, weights, residuals, strict=True
        )
    ]

    count = np.asarray(sum(counts))
    determined = (count > 1.0)[..., np.newaxis, np.newaxis] & np.isfinite(reach_squared)
    with np.errstate(invalid="ignore", divide="ignore"):
        unbiased = (count / (count - 1.0))[..., np.newaxis, np.newaxis]
        covariance = np.where(determined, unbiased * sum(part.meat for part in parts) * reach_squared, np.inf)
        even_covariance = np.where(determined, sum(part.even_meat for part in parts) * reach_squared, np.inf)
        finite_reach = np.where(np.isfinite(reach), reach, 0.0)
    return AxisFit(
        vector=axis,
        across=across,
        covariance=covariance,
        even_covariance=even_covariance,
        influence=np.asarray(sum(part.pull for part in parts)) * finite_reach[..., np.newaxis, :],
        eigenvalues=values,
        scatter_rad=np.stack([part.scatter_rad for part in parts], axis=-1),
        readings=count,
        freedom=freedom,
    )


class _Part(NamedTuple):
    """What one stream adds to the errors of a fit; `meat` is the middle of the sandwich."""

    scatter_rad: Floats
    meat: Floats
    even_meat: Floats
    pull: Floats


def _stream_part(
    stream: Stream,
    total: Floats,
    moment: Floats,
    weight: Floats,
    freedom: Floats,
    axis: Floats,
    across: Floats,
) -> _Part:
    turned = across.swapaxes(-1, -2)
    along_axis = np.einsum("...i,...ij,...j->...", axis, moment, axis)
    if stream.along:
        squares = np.trace(moment, axis1=-2, axis2=-1) - along_axis
        spread = along_axis[..., np.newaxis, np.newaxis] * np.eye(2)
    else:
        squares = along_axis
        spread = turned @ moment @ across
    squared = (weight * weight)[..., np.newaxis, np.newaxis]
    if stream.scatter_rad is not None:
        # What is known beforehand has shown no residual; its error is what it was said to be. It belongs to
        # no outcrop, so it pulls for none.
        scatter = np.full(squares.shape, stream.scatter_rad)
        even = squared * stream.scatter_rad**2 * spread
        return _Part(scatter, even, even, np.zeros((1, 2)))
    variance = _variance(squares, freedom)
    pairs = product_pairs(turned, axis[..., np.newaxis, :])
    by_outcrop = tensor(stream.rows) @ axis[..., np.newaxis, :, np.newaxis]
    return _Part(
        scatter_rad=np.sqrt(variance),
        meat=squared * (pairs @ fourth(total) @ pairs.swapaxes(-1, -2)),
        even_meat=squared * variance[..., np.newaxis, np.newaxis] * spread,
        pull=weight[..., np.newaxis, np.newaxis] * (turned[..., np.newaxis, :, :] @ by_outcrop)[..., 0],
    )


class Ellipse(NamedTuple):
    """Confidence ellipse of an axis: half-angles in degrees and the unit vectors (..., 3) they open along."""

    major_deg: Floats
    minor_deg: Floats
    major_axis: Floats
    minor_axis: Floats


def confidence_ellipse(fit: AxisFit, confidence: float = 0.95) -> Ellipse:
    """Confidence ellipse by the F form: (n-1) v' E^-1 v <= 2(n-1)/m F(2, m), m = n-2, or n-3 for a girdle.

    Half-angles are 90 degrees where the axis is undetermined or fewer readings bear on it than that needs.
    Fisher, Lewis & Embleton (1987) ch. 6, from memory; the F in place of chi-square holds small samples. A reading
    at right angles to the axis shows one residual only, so a girdle has one degree of freedom less. Measured for a
    nominal 95% (clusters of 5 degrees; limbs at 50 degrees, 4 degrees off): clusters 95% at 5 to 50 readings;
    girdles 92% at 5, 93% at 10 and 94% from 25 on.
    """
    freedom = fit.ellipse_freedom
    finite = np.isfinite(fit.covariance).all(axis=(-1, -2)) & (freedom > 0.0)
    covariance = np.where(finite[..., np.newaxis, np.newaxis], fit.covariance, np.eye(2))
    values, turns = np.linalg.eigh(covariance)
    safe = np.where(finite, freedom, 1.0)
    scale = 2.0 * np.where(finite, fit.readings - 1.0, 0.0) / safe * f2_quantile(confidence, safe)
    half = np.degrees(np.arctan(np.sqrt(np.maximum(values, 0.0) * scale[..., np.newaxis])))
    half = np.where(finite[..., np.newaxis], half, 90.0)
    directions = fit.across @ turns
    return Ellipse(half[..., 1], half[..., 0], directions[..., 1], directions[..., 0])
