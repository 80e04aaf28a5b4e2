"""Principal axes and how well they are known, from moments alone.

One estimator serves hinge, cleavage pole and mean intersection: the eigenvector of the largest eigenvalue of

    M = sum over streams of  w_f T_f

where T_f is a stream's orientation tensor and w_f its weight: +1/variance for axes that lie along the one
sought, -1/variance for axes at right angles to it. Bedding poles lie at right angles to the hinge and hinge
lines along it; cleavage poles lie along the cleavage pole and intersection lines at right angles to it.

Everything broadcasts: a leading shape (...) stands for any number of folds or moments in time. Several axes may be
fitted to the same readings at once, each with its own view of what a stream is to it.
"""

from __future__ import annotations

import math
from typing import TYPE_CHECKING, Final, NamedTuple

import numpy as np

from analysis.stats.moments import COUNT, FOURTH, TENSOR, WIDTH, fourth_of, product_pairs, tensor_of
from analysis.stats.quantiles import f2_quantile

if TYPE_CHECKING:
    import numpy.typing as npt

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
_EVEN: Final = np.eye(2)


# What a stream of readings is to an axis: its own axes lie along it, or at right angles to it, or say nothing of it.
ALONG: Final = 1.0
ACROSS: Final = -1.0
UNUSED: Final = 0.0


class KnownAxis(NamedTuple):
    """An axis known beforehand, which goes into fits as one more stream, of one reading, read at no outcrop.

    Attributes
    ----------
    row
        Its moments, (24,).
    roles
        (fits,), what it is to each axis sought: ALONG, ACROSS or UNUSED.
    scatter_rad
        How well it is known: standard deviation in one direction, radians.

    """

    row: Floats
    roles: Floats
    scatter_rad: float


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
        (..., streams), standard deviation of one reading about the fit, in one direction; streams as given, an
        axis known beforehand last; nan where a stream holds nothing that bears on the axis.
    outcrop_readings
        (..., outcrops), number of readings that bear on the axis.
    readings
        (...), number of all readings that do, with an axis known beforehand.
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
    outcrop_readings: Floats
    readings: Floats
    freedom: Floats

    def of(self, which: int | slice) -> AxisFit:
        """Take one of several fits, or some of them: along the first axis of the leading shape."""
        return AxisFit(*(field[which] for field in self))

    @property
    def readings_across(self) -> Floats:
        """Number, (...), of readings at right angles to the axis, such as the poles of a girdle."""
        # A reading along the axis shows two residuals, one across it shows one.
        return np.asarray(2.0 * self.readings - self.freedom - 2.0)

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


class _Held:
    """Streams summed over outcrops, (..., streams, 24), as fits with these roles, (fits, ..., streams), hold them."""

    def __init__(self, role: Floats, totals: Floats, known_variance: float | None) -> None:
        self._role, self._known_variance = role, known_variance
        self._along = role == ALONG
        self.counts, self.tensors = totals[..., COUNT], totals[..., TENSOR]
        self.used = np.where(role == UNUSED, 0.0, self.counts)
        self.residuals = self.used * (1.0 + self._along)
        # The last stream, where an axis is known beforehand.
        self.is_known = np.arange(role.shape[-1]) == (-1 if known_variance is None else role.shape[-1] - 1)

    def weights(self) -> Floats:
        """Weights in M: +-1/variance of each stream about its own axis, or +-1 where no other stream helps."""
        sign = np.where(self.used > 0.0, self._role, 0.0)
        alone = np.count_nonzero(sign, axis=-1) <= 1
        if alone.all():
            return sign
        own: Floats = np.asarray(np.linalg.eigvalsh(tensor_of(self.tensors)), dtype=float)
        squares = own[..., 0] + np.where(self._along, own[..., 1], 0.0)
        return np.where(alone[..., np.newaxis], sign, sign / self._known_or(squares, self.residuals - 2.0))

    def variances(self, along_axis: Floats, freedom: Floats) -> Floats:
        """Variance of one reading about the fits, which share their degrees of freedom among the streams."""
        squares = np.where(self._along, self.tensors[..., :3].sum(axis=-1) - along_axis, along_axis)
        share = np.maximum(freedom, 0.0) / np.maximum(freedom + 2.0, 1.0)
        return self._known_or(squares, self.residuals * share[..., np.newaxis])

    def even_meat(self, weight: Floats, along_axis: Floats, across: Floats) -> Floats:
        """Middle of the sandwich, (fits, ..., 2, 2), if readings scatter evenly; `weight` is w^2 times variance."""
        of_poles = tensor_of(_mixed(np.where(self._along, 0.0, weight), self.tensors))
        of_lines = np.where(self._along, weight * along_axis, 0.0).sum(axis=-1)
        even = across.swapaxes(-1, -2) @ of_poles @ across + of_lines[..., np.newaxis, np.newaxis] * _EVEN
        return np.asarray(even)

    def _known_or(self, squares: Floats, freedom: Floats) -> Floats:
        variance = _variance(squares, freedom)
        return (
            variance
            if self._known_variance is None
            else np.where(self.is_known, self._known_variance, variance)
        )


def _mixed(weight: Floats, parts: Floats) -> Floats:
    """Sum over streams, (fits, ..., W), of weight (fits, ..., streams) times parts (..., streams, W)."""
    return (weight[..., np.newaxis, :] @ parts)[..., 0, :]


def _reach(values: Floats, size: Floats) -> Floats:
    """One over the distance, (..., 2), of the first eigenvalue from the others; infinite where they are one value."""
    gaps = values[..., :1] - values[..., 1:]
    apart = gaps > _SAME_EIGENVALUE * size[..., np.newaxis]
    return np.where(apart, 1.0 / np.where(apart, gaps, 1.0), np.inf)


def fit_axes(rows: Floats, roles: npt.ArrayLike, known: KnownAxis | None = None) -> AxisFit:
    """Fit axes of largest eigenvalue of M, several at once to the same readings; see the module's docstring.

    The covariance of an eigenvector u_c is sum w^2 (u_j.x)(u_k.x)(u_c.x)^2 / [(m_c - m_j)(m_c - m_k)], m the
    eigenvalues of M (Tyler 1981; Prentice 1984; Fisher, Lewis & Embleton 1987 ch. 6, from memory), here with
    n/(n - 1). With readings in several streams each is weighted by the scatter about its own axis.

    Parameters
    ----------
    rows
        Moments, (..., outcrops, streams, 24).
    roles
        (fits, streams), what each stream is to each axis sought: ALONG, ACROSS or UNUSED.
    known
        An axis known beforehand, if there is one.

    Returns
    -------
    The fits, their leading shape (fits, ...).

    """
    role, totals = np.asarray(roles, dtype=float), rows.sum(axis=-3)
    measured, known_variance = role.shape[-1], None
    if known is not None:
        role = np.concatenate([role, np.reshape(known.roles, (-1, 1))], axis=-1)
        row = np.broadcast_to(known.row, (*totals.shape[:-2], 1, WIDTH))
        totals, known_variance = np.concatenate([totals, row], axis=-2), known.scatter_rad**2
    role = role.reshape(len(role), *(1,) * (totals.ndim - 2), -1)
    held = _Held(role, totals, known_variance)

    weight = held.weights()
    values, vectors = eigen(tensor_of(_mixed(weight, held.tensors)))
    axis, across = vectors[..., 0], vectors[..., 1:]
    pairs = product_pairs(vectors.swapaxes(-1, -2), axis[..., np.newaxis, :])
    along, pairs = pairs[..., 0, :], pairs[..., 1:, :]
    reach = _reach(values, (np.abs(weight) * held.counts).sum(axis=-1))

    freedom = held.residuals.sum(axis=-1) - 2.0
    along_axis = (held.tensors @ along[..., np.newaxis])[..., 0]
    variance = held.variances(along_axis, freedom)
    squared = weight * weight
    even_meat = held.even_meat(squared * variance, along_axis, across)
    meat = pairs @ fourth_of(_mixed(squared[..., :measured], totals[..., :measured, FOURTH]))
    meat = meat @ pairs.swapaxes(-1, -2)
    if known is not None:
        # It has shown no residual; its error is what it was said to be.
        meat += held.even_meat(squared * variance * held.is_known, along_axis, across)

    # What streams pull by, at each outcrop, in one product: (outcrops, streams * 6) times (streams * 6, 2).
    pulls = weight[..., :measured, np.newaxis, np.newaxis] * pairs.swapaxes(-1, -2)[..., np.newaxis, :, :]
    pulls = pulls.reshape(*pulls.shape[:-3], -1, 2)
    by_outcrop = rows[..., TENSOR].reshape(*rows.shape[:-2], -1) @ pulls
    bears = (role[..., :measured] != UNUSED).astype(float)[..., np.newaxis]

    count = held.used.sum(axis=-1)
    determined = np.isfinite(reach) & (count > 1.0)[..., np.newaxis]
    both = determined[..., :, np.newaxis] & determined[..., np.newaxis, :]
    reach = np.where(determined, reach, 0.0)
    bend = reach[..., :, np.newaxis] * reach[..., np.newaxis, :]
    unbiased = (count / np.maximum(count - 1.0, 1.0))[..., np.newaxis, np.newaxis]
    return AxisFit(
        vector=axis,
        across=across,
        covariance=np.where(both, unbiased * meat * bend, np.inf),
        even_covariance=np.where(both, even_meat * bend, np.inf),
        influence=by_outcrop * reach[..., np.newaxis, :],
        eigenvalues=values,
        scatter_rad=np.sqrt(np.where(held.used > 0.0, variance, np.nan)),
        outcrop_readings=(rows[..., COUNT] @ bears)[..., 0],
        readings=count,
        freedom=freedom,
    )


def fit_axis(rows: Floats, role: float) -> AxisFit:
    """Fit one axis to one stream: moments (..., outcrops, 24) of axes that lie ALONG it or ACROSS it."""
    return fit_axes(rows[..., np.newaxis, :], [[role]]).of(0)


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
