"""The running check of one fold: sums kept up to date reading by reading, the verdict and the funnel.

Rebuilt from the notebook when a fold is opened, updated after each reading; the check itself takes time that
does not grow with the number of readings. What does grow (the history of the funnel) or takes long (the
forecast) is computed by plain functions here, which the presenter hands to a worker together with copies,
and whose values it takes back only if they are still about the same readings.
"""

from __future__ import annotations

import itertools
from dataclasses import dataclass
from typing import TYPE_CHECKING

import numpy as np

from analysis.fold.check import check_fold
from analysis.fold.settings import CheckSettings
from analysis.orient.features import Feature
from analysis.stats.sums import RunningSums
from fieldapp.checking import Neighbour
from fieldapp.states import FunnelPoint, NetPoints

if TYPE_CHECKING:
    from collections.abc import Iterable, Sequence

    from analysis.files.reading import Reading
    from analysis.fold.records import FoldCheck
    from analysis.orient.vectors import Floats
    from fieldapp.settings import Settings

LONGEST_HISTORY = 200  # points of the funnel that are computed anew; of more readings every few get one
TRAIL = 12

Entry = tuple[Feature, str, "Floats"]  # feature, outcrop, vector


def check_settings(settings: Settings) -> CheckSettings:
    """The settings that the check needs."""
    return CheckSettings(
        margin_deg=settings.margin_deg,
        confidence=settings.confidence,
        forecast_limit=settings.forecast_limit,
    )


@dataclass(frozen=True, slots=True)
class History:
    """A funnel computed anew: its points, and the epoch of the readings that it is about."""

    epoch: int
    points: tuple[FunnelPoint, ...]


class RunningFold:
    """Standing and struck-out readings of one fold with their sums.

    `epoch` changes whenever the past does (striking out, mending, another setting), `version` with every change:
    values computed elsewhere belong to one of them. No two folds ever share a number, so that what comes late, when
    the page has gone to another fold, is known to be about the one before.
    """

    _numbers = itertools.count(1)

    def __init__(self, fold: str, settings: CheckSettings, readings: Iterable[Reading] = ()) -> None:
        self.fold = fold
        self.settings = settings
        self.version = self.epoch = next(self._numbers)
        self.readings: dict[str, Reading] = {}
        self._neighbours: dict[str, Neighbour] = {}
        self.sums = RunningSums()
        self._by_outcrop: dict[str, RunningSums] = {}
        self._rebuilt: tuple[FunnelPoint, ...] = ()
        self._since: list[FunnelPoint] = []
        self._check: FoldCheck | None = None
        self._outcrop_check: tuple[int, str, FoldCheck] | None = None  # version, outcrop
        self._in_order: tuple[Neighbour, ...] | None = None
        self._fill(readings)

    def _fill(self, readings: Iterable[Reading]) -> None:
        """Count in many readings at once, by outcrop and feature."""
        together: dict[tuple[str, Feature], list[Neighbour]] = {}
        for reading in readings:
            self.readings[reading.reading_id] = reading
            if not reading.struck_out:
                neighbour = _neighbour(reading)
                self._neighbours[reading.reading_id] = neighbour
                together.setdefault((reading.outcrop, reading.feature), []).append(neighbour)
        for (outcrop, feature), some in together.items():
            vectors = np.stack([n.vector for n in some])
            self.sums.add(feature, outcrop, vectors)
            self._by_outcrop.setdefault(outcrop, RunningSums()).add(feature, outcrop, vectors)

    # -- changing ------------------------------------------------------------------------------------------

    def put(self, reading: Reading) -> None:
        """Take in a new reading, or a new revision of one; a reading of another fold leaves this one."""
        old = self.readings.get(reading.reading_id)
        if old is not None:
            self._count_out(old)
        if reading.fold == self.fold:
            self.readings[reading.reading_id] = reading
            self._count_in(reading)
        else:
            self.readings.pop(reading.reading_id, None)
        self.version = next(self._numbers)
        self._check = self._in_order = None
        if old is not None:
            self.epoch = next(self._numbers)
        self._end_funnel_here()

    def use(self, settings: CheckSettings) -> None:
        """Check with other settings from now on."""
        if settings != self.settings:
            self.settings = settings
            self.version = next(self._numbers)
            self._check = None
            self.epoch = next(self._numbers)
            self._end_funnel_here()

    def _end_funnel_here(self) -> None:
        """Let the last point be the check as it stands, however much of the past is still being computed anew."""
        count = self.standing_count
        self._rebuilt = tuple(point for point in self._rebuilt if point.readings < count)
        self._since = [point for point in self._since if point.readings < count]
        if count:
            self._since.append(_point(self.check, count))

    def _count_in(self, reading: Reading) -> None:
        if reading.struck_out:
            return
        counted = _neighbour(reading)
        self._neighbours[reading.reading_id] = counted
        self.sums.add(reading.feature, reading.outcrop, counted.vector)
        self._by_outcrop.setdefault(reading.outcrop, RunningSums()).add(
            reading.feature, reading.outcrop, counted.vector
        )

    def _count_out(self, reading: Reading) -> None:
        counted = self._neighbours.pop(reading.reading_id, None)
        if counted is not None:
            self.sums.remove(counted.feature, counted.outcrop, counted.vector)
            self._by_outcrop[counted.outcrop].remove(counted.feature, counted.outcrop, counted.vector)

    # -- asking --------------------------------------------------------------------------------------------

    @property
    def standing_count(self) -> int:
        """Number of readings that stand."""
        return len(self._neighbours)

    @property
    def neighbours(self) -> tuple[Neighbour, ...]:
        """Standing readings in the order kept."""
        if self._in_order is None:
            counted = self._neighbours
            self._in_order = tuple(counted[key] for key in self.readings if key in counted)
        return self._in_order

    @property
    def check(self) -> FoldCheck:
        """The check of the fold as it stands."""
        if self._check is None:
            self._check = check_fold(self.sums, self.settings, fold=self.fold, forecast=False)
        return self._check

    def take_forecast(self, check: FoldCheck, version: int) -> bool:
        """Take the check with its forecast, unless a reading has changed since; tell whether it was taken."""
        if version != self.version:
            return False
        self._check = check
        return True

    def check_of_outcrop(self, outcrop: str) -> FoldCheck:
        """The check of one outcrop's readings alone; asked again for the same readings it is not reckoned again."""
        known = self._outcrop_check
        if known is None or known[:2] != (self.version, outcrop):
            check = check_fold(self.sums_of_outcrop(outcrop), self.settings, fold=self.fold, forecast=False)
            known = self._outcrop_check = (self.version, outcrop, check)
        return known[2]

    def sums_of_outcrop(self, outcrop: str) -> RunningSums:
        """Running sums of one outcrop."""
        return self._by_outcrop.get(outcrop, RunningSums())

    def net_points(self) -> dict[Feature, NetPoints]:
        """Standing readings by feature, as the net draws them."""
        found = {}
        for feature in Feature:
            of_feature = [n for n in self.neighbours if n.feature is feature]
            found[feature] = NetPoints(
                tuple(n.reading_id for n in of_feature),
                np.stack([n.vector for n in of_feature]) if of_feature else np.zeros((0, 3)),
                tuple(n.outcrop for n in of_feature),
            )
        return found

    # -- the funnel ----------------------------------------------------------------------------------------

    @property
    def funnel(self) -> tuple[FunnelPoint, ...]:
        """The check as it stood after each reading, oldest first."""
        return (*self._rebuilt, *self._since)

    @property
    def trail(self) -> Floats:
        """The last mean intersections, shape (k, 3), oldest first."""
        means = [p.intersection for p in self.funnel[-4 * TRAIL :] if p.intersection is not None]
        return np.stack(means[-TRAIL:]) if means else np.zeros((0, 3))

    def entries(self) -> list[Entry]:
        """Standing readings in the order kept, as a worker needs them."""
        return [(n.feature, n.outcrop, n.vector) for n in self.neighbours]

    def take_history(self, history: History) -> bool:
        """Take a funnel computed elsewhere, unless the past has changed since; tell whether it was taken."""
        if history.epoch != self.epoch:
            return False
        last = history.points[-1].readings if history.points else 0
        self._rebuilt = history.points
        self._since = [point for point in self._since if point.readings > last]
        return True


def _neighbour(reading: Reading) -> Neighbour:
    return Neighbour(reading.reading_id, reading.feature, reading.outcrop, reading.vector, reading)


def history_of(entries: Sequence[Entry], settings: CheckSettings, epoch: int) -> History:
    """Compute the funnel of readings in their order; runs on any thread.

    Up to LONGEST_HISTORY readings get a point each, of more every few; the last reading always has one.
    """
    step = max(1, -(-len(entries) // LONGEST_HISTORY))
    sums, points = RunningSums(), []
    for number, (feature, outcrop, vector) in enumerate(entries, start=1):
        sums.add(feature, outcrop, vector)
        if (len(entries) - number) % step == 0:
            points.append(_point(check_fold(sums, settings, forecast=False), number))
    return History(epoch, tuple(points))


def _point(check: FoldCheck, readings: int) -> FunnelPoint:
    low, high = check.interval_deg if check.interval_deg is not None else (None, None)
    mean = None if check.intersection is None else check.intersection.axis.vector
    return FunnelPoint(readings, check.transection_deg, low, high, str(check.verdict), mean)
