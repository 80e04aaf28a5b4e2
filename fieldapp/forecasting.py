"""The forecast, computed by a worker and taken only while it is about the readings as they stand.

At most one is under way. What is asked for meanwhile waits, and only the last of it is ever computed, so
that fast entry never queues up forecasts of folds that no longer exist.
"""

from __future__ import annotations

from dataclasses import dataclass
from typing import TYPE_CHECKING

from analysis.fold import ahead
from analysis.fold.decision import add_forecast
from analysis.orient.features import Feature
from fieldapp.states import ForecastPoint, FunnelState

if TYPE_CHECKING:
    from collections.abc import Callable

    from analysis.fold.records import FoldCheck
    from fieldapp.dispatch import Dispatch
    from fieldapp.states import FunnelPoint

AHEAD_POINTS = 12


@dataclass(frozen=True, slots=True)
class Forecast:
    """A check with its forecast, the version of the readings it is about, and the interval expected ahead."""

    version: int
    check: FoldCheck
    ahead: tuple[ForecastPoint, ...]


def forecast_of(check: FoldCheck, version: int) -> Forecast:
    """Compute the forecast of a check; runs on any thread."""
    told = add_forecast(check)
    return Forecast(version, told, interval_ahead(told))


def interval_ahead(check: FoldCheck) -> tuple[ForecastPoint, ...]:
    """The interval expected as readings are added at the present scatter, out to where it should settle."""
    return tuple(
        ForecastPoint(point.after, point.low_deg, point.high_deg)
        for point in ahead.interval_ahead(check, AHEAD_POINTS)
    )


class Forecaster:
    """Keeps one forecast under way and the newest that came; `came` is called with each that is taken."""

    def __init__(self, dispatch: Dispatch, came: Callable[[Forecast], None]) -> None:
        self._dispatch = dispatch
        self._came = came
        self._under_way = False
        self._waiting: tuple[FoldCheck, int] | None = None
        self._newest: Forecast | None = None

    def seek(self, check: FoldCheck, version: int) -> None:
        """Ask for the forecast of a check."""
        self._waiting = (check, version)
        if not self._under_way:
            self._start()

    def stop(self) -> None:
        """Ask for no more: the page is closed, and what is under way comes back to nobody."""
        self._waiting = None
        self._came = lambda _forecast: None

    def _start(self) -> None:
        if self._waiting is None:
            return
        check, version = self._waiting
        self._waiting = None
        self._under_way = True
        self._dispatch(lambda: forecast_of(check, version), self._done, self._failed)

    def _done(self, forecast: Forecast) -> None:
        self._under_way = False
        if self._waiting is None:
            self._newest = forecast
            self._came(forecast)
        else:
            self._start()

    def _failed(self, error: Exception) -> None:
        self._under_way = False
        self._start()
        raise error  # to the log of mishaps; the check stands without its forecast

    def funnel(self, points: tuple[FunnelPoint, ...], margin_deg: float, version: int) -> FunnelState:
        """The funnel with its dotted continuation, where the forecast is about these readings."""
        newest = self._newest
        if newest is None or newest.version != version or newest.check.more_readings is None:
            return FunnelState(points, margin_deg)
        now = sum(newest.check.readings.of(feature) for feature in Feature)
        return FunnelState(points, margin_deg, newest.ahead, now + newest.check.more_readings.total)
