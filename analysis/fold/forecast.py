"""How many more readings, and which: from futures simulated at the current scatter.

The true transection is taken as normal about the estimate with its variance now; information then grows with
the readings, split over the two streams so that the variance falls fastest, and the watched decision is taken
at every step of every future. The futures come from one fixed table of normal numbers, so the same readings
always give the same forecast.
"""

from __future__ import annotations

from functools import lru_cache
from typing import TYPE_CHECKING, Final, NamedTuple

import numpy as np

from analysis.fold.watch import HINGE_PART_AT_MOST_DEG
from analysis.stats.watching import equivalence_multiplier, watched_multiplier

if TYPE_CHECKING:
    import numpy.typing as npt

    from analysis.fold.records import WatchNumbers
    from analysis.fold.settings import CheckSettings
    from analysis.orient.vectors import Floats

_FUTURES: Final = 300
_STEPS: Final = 64
_MIDDLE: Final = (0.2, 0.8)
_HORIZON: Final = 8  # futures run to this many times the limit, so that a median near the limit is a median


class Settling(NamedTuple):
    """Further readings until settled: median and the middle 60 per cent; infinite where futures do not settle."""

    median: float
    low: float
    high: float


@lru_cache(maxsize=1)
def _normals() -> tuple[Floats, Floats]:
    drawn = np.random.default_rng(1970).standard_normal((_FUTURES // 2, _STEPS + 1))
    both = np.concatenate([drawn, -drawn])
    return both[:, :1], both[:, 1:]


@lru_cache(maxsize=16)
def _steps(limit: int) -> npt.NDArray[np.float64]:
    return np.unique(np.round(np.geomspace(1.0, _HORIZON * limit, _STEPS)))


def split(
    readings: npt.ArrayLike, counts: tuple[float, float], variances: tuple[float, float]
) -> tuple[Floats, Floats]:
    """Split so many further readings (...) over two streams so that the sum of variances falls fastest.

    `counts` are the streams' readings now and `variances` their parts of the variance now.
    """
    more = np.asarray(readings, dtype=float)
    ease = [np.sqrt(n * v) for n, v in zip(counts, variances, strict=True)]
    total = sum(counts) + more
    share = ease[0] / (ease[0] + ease[1]) if ease[0] + ease[1] > 0.0 else 0.5
    first = np.clip(total * share - counts[0], 0.0, more)
    return first, more - first


def settle(
    numbers: WatchNumbers,
    counts: tuple[float, float],
    missing: tuple[float, float],
    settings: CheckSettings,
) -> Settling:
    """Forecast the further readings until the verdict settles.

    `counts` are the readings of the two streams now, `missing` those each still needs for its first look.
    """
    must = missing[0] + missing[1]
    steps = _steps(settings.forecast_limit)
    counts = (max(counts[0], 1.0), max(counts[1], 1.0))
    parts = (numbers.hinge_variance, numbers.cleavage_variance)
    now = parts[0] + parts[1]
    first, second = split(steps, counts, parts)
    hinge_later = parts[0] * counts[0] / (counts[0] + first)
    later = hinge_later + parts[1] * counts[1] / (counts[1] + second)
    # Where outcrops give the variance, further readings are taken to come from further outcrops.
    variance = numbers.variance * later / now
    freedom = numbers.freedom * (1.0 + steps / sum(counts))
    information = numbers.information * now / later
    half = watched_multiplier(information, freedom, settings.confidence) * np.sqrt(variance)
    narrow = equivalence_multiplier(
        variance, information, freedom, settings.margin_deg, 1.0 - settings.confidence
    ) * np.sqrt(variance)

    start, moves = _normals()
    precision = 1.0 / np.concatenate([[numbers.variance], variance])
    gained = np.maximum(np.diff(precision), 0.0)
    truth = numbers.delta_deg + np.sqrt(numbers.variance) * start
    scores = numbers.delta_deg * precision[0] + np.cumsum(
        truth * gained + np.sqrt(gained) * moves[:, : len(steps)], axis=1
    )
    size = np.abs(scores / precision[1:])
    may = (steps >= must) & (hinge_later <= HINGE_PART_AT_MOST_DEG**2)
    settled = ((size > half) | (size + narrow < settings.margin_deg)) & may
    when = np.where(settled.any(axis=1), steps[settled.argmax(axis=1)], np.inf)
    low, median, high = np.quantile(when, [_MIDDLE[0], 0.5, _MIDDLE[1]], method="inverted_cdf")
    return Settling(float(median), float(low), float(high))
