"""Readings far off the fit: named, never dropped.

The fit is repeated without the readings named so far, and scatter is measured by the median, so that a few bad
readings cannot hide themselves by pulling the fit or by widening the scatter.
"""

from __future__ import annotations

import math
from statistics import NormalDist
from typing import TYPE_CHECKING, Final, NamedTuple

import numpy as np

from analysis.fold.transection import FoldAxis, fit_fold
from analysis.orient.features import Feature
from analysis.stats.moments import WIDTH, row_of_tensor
from analysis.stats.sums import FEATURES

if TYPE_CHECKING:
    from collections.abc import Mapping

    import numpy.typing as npt

    from analysis.orient.vectors import Floats

_FEWEST: Final = 8
_ROUNDS: Final = 5
_LEAST_SCATTER_DEG: Final = 1.0  # readings are rounded to whole degrees
_FALSE_ALARMS: Final = 0.05  # per feature and fold, over all its readings
_AT_LEAST: Final = 3.5  # scatters of a plane or line off its plane, however few readings there are


class Outlier(NamedTuple):
    """One reading far off: its feature, its place among that feature's readings, and how far, degrees."""

    feature: Feature
    place: int
    off_deg: float
    allowed_deg: float


def find_outliers(readings: Mapping[Feature, Floats]) -> tuple[Outlier, ...]:
    """Name the readings that lie further off the fit than scatter explains.

    `readings` are the axes (n, 3) by feature. Bedding is measured from the girdle, cleavage poles from their
    mean, intersection lines from the cleavage plane and hinge lines from the hinge. The limit is the distance
    that one fold in twenty would pass once by chance, for normal scatter.
    """
    kept = {feature: np.ones(len(readings.get(feature, ())), dtype=bool) for feature in Feature}
    result: list[Outlier] = []
    for _ in range(_ROUNDS):
        found = _far_off(readings, kept)
        after = {feature: np.ones_like(mask) for feature, mask in kept.items()}
        for outlier in found:
            after[outlier.feature][outlier.place] = False
        result = found
        if all(np.array_equal(after[feature], kept[feature]) for feature in Feature):
            break
        kept = after
    return tuple(sorted(result, key=lambda o: (tuple(Feature).index(o.feature), o.place)))


def _far_off(
    readings: Mapping[Feature, Floats], kept: Mapping[Feature, npt.NDArray[np.bool_]]
) -> list[Outlier]:
    axes = {feature: _chosen(readings[feature], kept[feature]) for feature in FEATURES if feature in readings}
    count = {feature: len(axes.get(feature, ())) for feature in FEATURES}
    # An axis is fitted to tensors; the fourth moments, which give its error, are not asked for here.
    rows = np.zeros((1, len(FEATURES), WIDTH))
    for code, feature in enumerate(FEATURES):
        if count[feature]:
            rows[0, code] = row_of_tensor(count[feature], axes[feature].T @ axes[feature])
    cleavage = FoldAxis.CLEAVAGE if count[Feature.CLEAVAGE] else FoldAxis.STEEP
    hinge, pole = fit_fold(rows, (FoldAxis.HINGE, cleavage)).vector
    result: list[Outlier] = []
    if count[Feature.BEDDING] >= 2 or count[Feature.HINGE]:
        result += _beyond(readings, kept, Feature.BEDDING, hinge, off_axis=False)
        result += _beyond(readings, kept, Feature.HINGE, hinge, off_axis=True)
    if count[Feature.CLEAVAGE] or count[Feature.INTERSECTION]:
        result += _beyond(readings, kept, Feature.CLEAVAGE, pole, off_axis=True)
        result += _beyond(readings, kept, Feature.INTERSECTION, pole, off_axis=False)
    return result


def _beyond(
    readings: Mapping[Feature, Floats],
    kept: Mapping[Feature, npt.NDArray[np.bool_]],
    feature: Feature,
    axis: Floats,
    *,
    off_axis: bool,
) -> list[Outlier]:
    axes = readings.get(feature, np.zeros((0, 3)))
    n = len(axes)
    if n < _FEWEST:
        return []
    along = np.minimum(np.abs(axes @ axis), 1.0)
    off = np.degrees(np.arccos(along) if off_axis else np.arcsin(along))
    # The median of a normal residual is 0.6745 and that of the length of two of them 1.1774 standard deviations.
    scatter = max(_median(_chosen(off, kept[feature])) / (1.1774 if off_axis else 0.6745), _LEAST_SCATTER_DEG)
    by_chance = (
        math.sqrt(2.0 * math.log(n / _FALSE_ALARMS))
        if off_axis
        else -NormalDist().inv_cdf(0.5 * _FALSE_ALARMS / n)
    )
    allowed = max(by_chance, _AT_LEAST) * scatter
    return [Outlier(feature, int(k), float(off[k]), allowed) for k in np.flatnonzero(off > allowed)]


def _chosen(values: Floats, mask: npt.NDArray[np.bool_]) -> Floats:
    return values if mask.all() else values[mask]


def _median(values: Floats) -> float:
    """Median of one finite value or more; numpy's takes six times as long, for it looks for others."""
    middle = len(values) // 2
    parted = np.partition(values, middle)
    upper = float(parted[middle])
    return upper if len(values) % 2 else (float(parted[:middle].max()) + upper) / 2.0
