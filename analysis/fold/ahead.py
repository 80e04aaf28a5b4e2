"""The interval that is expected as readings are added: the dotted continuation of the funnel."""

from __future__ import annotations

from dataclasses import dataclass
from typing import TYPE_CHECKING

import numpy as np

from analysis.fold.forecast import split
from analysis.orient.features import Feature
from analysis.stats.watching import watched_multiplier

if TYPE_CHECKING:
    from analysis.fold.records import FoldCheck


@dataclass(frozen=True, slots=True)
class AheadPoint:
    """Where the watched interval is expected after so many readings of the fold, degrees."""

    after: int
    low_deg: float
    high_deg: float


def interval_ahead(check: FoldCheck, points: int = 12) -> tuple[AheadPoint, ...]:
    """The interval expected as readings are added at the present scatter, out to where it should settle.

    Readings are split over the two streams as the forecast splits them; the transection is taken to stay
    where it is. Empty where the check holds no forecast.
    """
    numbers, more, settings = check.numbers, check.more_readings, check.settings
    if numbers is None or more is None or more.total < 1:
        return ()
    counts = check.readings
    streams = (
        float(max(1, counts.bedding + counts.hinge)),
        float(max(1, counts.cleavage + counts.intersection)),
    )
    parts = (numbers.hinge_variance, numbers.cleavage_variance)
    now = parts[0] + parts[1]
    if not now > 0.0:
        return ()
    steps = np.unique(np.round(np.linspace(0.0, float(more.total), points)))
    first, second = split(steps, streams, parts)
    later = parts[0] * streams[0] / (streams[0] + first) + parts[1] * streams[1] / (streams[1] + second)
    freedom = numbers.freedom * (1.0 + steps / sum(streams))
    multiplier = watched_multiplier(numbers.information * now / later, freedom, settings.confidence)
    half = multiplier * np.sqrt(numbers.variance * later / now)
    start = sum(counts.of(feature) for feature in Feature)
    return tuple(
        AheadPoint(start + int(step), numbers.delta_deg - float(h), numbers.delta_deg + float(h))
        for step, h in zip(steps, half, strict=True)
        if np.isfinite(h)
    )
