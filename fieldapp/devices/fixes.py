"""Fixes as they come: averaged over a window, with their age, and with jumps held back.

A receiver among rocks now and then reports a place far off. A fix farther from the running mean than its
accuracy and a vehicle's speed allow is held aside; when three in a row agree among themselves the tablet has
moved, and the mean starts again from them.

Ages come from the clock that never goes back, so setting the calendar does not make an old fix fresh.
"""

from __future__ import annotations

from dataclasses import dataclass, replace
from typing import TYPE_CHECKING

from analysis.errors import SettingError
from analysis.orient.position import AveragedPosition, average_fixes

if TYPE_CHECKING:
    from analysis.orient.position import Position
    from fieldapp.devices.ports import Fix


@dataclass(frozen=True, slots=True, kw_only=True)
class FixSettings:
    """How fixes are averaged and judged (common practice, no source).

    `window_s` is the time averaged over, `outcrop_m` the size of an outcrop, `stale_s` the age from which a position
    is flagged, `coarse_m` the accuracy from which it is flagged. A fix jumps where it is farther than `jump_m`, plus
    five times both accuracies, plus `speed_m_s` times the time since the last.
    """

    window_s: float = 30.0
    stale_s: float = 60.0
    coarse_m: float = 30.0
    outcrop_m: float = 20.0
    jump_m: float = 50.0
    speed_m_s: float = 40.0
    agree_to_move: int = 3

    def __post_init__(self) -> None:
        for name in ("window_s", "stale_s", "coarse_m", "outcrop_m", "jump_m", "speed_m_s", "agree_to_move"):
            if not getattr(self, name) > 0:
                raise SettingError(
                    f"{getattr(self, name)} is no {name}", where=name, expected="a number above zero"
                )


DEFAULT_FIX_SETTINGS = FixSettings()


@dataclass(frozen=True, slots=True)
class FixQuality:
    """The position as it stands: None while there is none; `warning` is '' where nothing is to be flagged.

    `text` is short, for the head of the page: "±4 m, 12 s".
    """

    averaged: AveragedPosition | None
    age_s: float | None
    stale: bool
    coarse: bool
    warning: str
    text: str

    @property
    def position(self) -> Position | None:
        """The averaged place."""
        return self.averaged.position if self.averaged else None


class FixBook:
    """Keeps the fixes of the window, and the best mean of the outcrop."""

    def __init__(self, settings: FixSettings = DEFAULT_FIX_SETTINGS) -> None:
        self._settings = settings
        self._window: list[Fix] = []
        self._aside: list[Fix] = []
        self._mean: AveragedPosition | None = None
        self._best: AveragedPosition | None = None
        self._jump_m: float | None = None

    def add(self, fix: Fix) -> bool:
        """Take a fix into the mean; False where it jumped and is held aside."""
        distance = self._jump(fix)
        if distance is None:
            self._aside.clear()
            self._jump_m = None
            self._take([*self._window, fix])
            return True
        self._jump_m = distance
        self._aside = [held for held in self._aside if not self._apart(held, fix)]
        self._aside.append(fix)
        if len(self._aside) < self._settings.agree_to_move:
            return False
        moved, self._aside, self._jump_m = self._aside, [], None
        self._best = None  # the best mean of a place that was left is none for this one
        self._take(moved)
        return True

    def average_over(self, window_s: float) -> None:
        """Average over so many seconds from the next fix on; raises SettingError."""
        if window_s != self._settings.window_s:
            self._settings = replace(self._settings, window_s=window_s)

    def begin_outcrop(self) -> None:
        """Forget the best mean, and average anew: the geologist walked to another outcrop."""
        self._best = None
        self._window = self._window[-1:]
        if self._window:
            self._take(self._window)

    def best(self) -> AveragedPosition | None:
        """Mean with the smallest accuracy since `begin_outcrop`, the place to store; None without a fix."""
        return self._best

    def quality(self, elapsed_s: float) -> FixQuality:
        """Judge the position at a moment of the clock that never goes back."""
        if self._mean is None:
            return FixQuality(
                None, None, stale=False, coarse=False, warning="no position yet", text="no position"
            )
        age = max(0.0, elapsed_s - self._window[-1].time_s)
        accuracy = self._mean.position.accuracy_m
        stale = age > self._settings.stale_s
        coarse = accuracy is None or accuracy > self._settings.coarse_m
        warnings = []
        if stale:
            warnings.append(f"the last fix is {_age(age)} old")
        if coarse:
            warnings.append("accuracy unknown" if accuracy is None else f"coarse: ±{accuracy:.0f} m")
        if self._jump_m is not None:
            warnings.append(f"a fix {_distance(self._jump_m)} off was left out")
        known = "±? m" if accuracy is None else f"±{max(1.0, accuracy):.0f} m"
        return FixQuality(self._mean, age, stale, coarse, "; ".join(warnings), f"{known}, {_age(age)}")

    def _take(self, fixes: list[Fix]) -> None:
        latest = fixes[-1].time_s
        self._window = [fix for fix in fixes if latest - fix.time_s <= self._settings.window_s]
        self._mean = average_fixes([fix.position for fix in self._window])
        # Somebody may walk on without a word: what was best elsewhere is not where we are.
        if (
            self._best is None
            or _radius(self._mean) <= _radius(self._best)
            or self._mean.position.distance_m(self._best.position) > self._reach(self._mean, self._best)
        ):
            self._best = self._mean

    def _reach(self, one: AveragedPosition, other: AveragedPosition) -> float:
        """How far apart two means of one outcrop may lie: three times both accuracies, and its size."""
        coarse = self._settings.coarse_m
        radii = (min(_radius(one), coarse), min(_radius(other), coarse))
        return 3.0 * sum(radii) + self._settings.outcrop_m

    def _jump(self, fix: Fix) -> float | None:
        """Distance of a fix that cannot be where the last ones were; None for one that can."""
        if self._mean is None:
            return None
        distance = self._mean.position.distance_m(fix.position)
        since = max(0.0, fix.time_s - self._window[-1].time_s)
        return distance if distance > self._allowed(self._mean.position, fix.position, since) else None

    def _apart(self, held: Fix, fix: Fix) -> bool:
        since = max(0.0, fix.time_s - held.time_s)
        distance = held.position.distance_m(fix.position)
        return distance > self._allowed(held.position, fix.position, since)

    def _allowed(self, one: Position, other: Position, since_s: float) -> float:
        # A fix that says nothing of its accuracy gets what counts as coarse.
        radii = sum(
            self._settings.coarse_m if place.accuracy_m is None else place.accuracy_m
            for place in (one, other)
        )
        return self._settings.jump_m + 5.0 * radii + self._settings.speed_m_s * since_s


def _radius(averaged: AveragedPosition) -> float:
    accuracy = averaged.position.accuracy_m
    return float("inf") if accuracy is None else accuracy


def _age(seconds: float) -> str:
    if seconds < 100:
        return f"{seconds:.0f} s"
    return f"{seconds / 60:.0f} min" if seconds < 5400 else f"{seconds / 3600:.0f} h"


def _distance(metres: float) -> str:
    return f"{metres:.0f} m" if metres < 1000 else f"{metres / 1000:.1f} km"
