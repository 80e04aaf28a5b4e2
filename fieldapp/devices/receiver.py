"""The receiver and its book together: what the page asks once a second while it wants a position."""

from __future__ import annotations

from dataclasses import dataclass
from datetime import timedelta
from typing import TYPE_CHECKING

from fieldapp.devices.fixes import FixBook, FixQuality
from fieldapp.devices.ports import PortState
from fieldapp.states import PositionFix

if TYPE_CHECKING:
    from analysis.orient.position import AveragedPosition
    from fieldapp.devices.clock import Clock
    from fieldapp.devices.ports import PositionPort

NO_FIX_AFTER_S = 60.0  # a receiver that starts cold under a clear sky needs about this long (from memory)


@dataclass(frozen=True, slots=True)
class Located:
    """The position at a moment: its quality, what to tell the user ('' for nothing), and the page's fix."""

    quality: FixQuality
    message: str
    fix: PositionFix | None


class Receiver:
    """Reads the position's port into a book of fixes; `tick` is called only while it runs."""

    def __init__(self, port: PositionPort, clock: Clock, book: FixBook | None = None) -> None:
        self._port = port
        self._clock = clock
        self._book = book or FixBook()
        self._started_s: float | None = None

    @property
    def is_running(self) -> bool:
        """Whether `tick` is to be called."""
        return self._started_s is not None

    def start(self) -> Located:
        """Ask for positions; where there are none the message says why."""
        self._port.start()
        self._started_s = self._clock.elapsed_s()
        return self.tick()

    def stop(self) -> None:
        """Switch the receiver off; the position stays, and ages."""
        self._port.stop()
        self._started_s = None

    def average_over(self, window_s: float) -> None:
        """Average over so many seconds from now on."""
        self._book.average_over(window_s)

    def begin_outcrop(self) -> None:
        """Average anew: the geologist walked to another outcrop."""
        self._book.begin_outcrop()

    def tick(self) -> Located:
        """Take the fixes that came, and judge the position."""
        for fix in self._port.read():
            self._book.add(fix)
        now = self._clock.elapsed_s()
        quality = self._book.quality(now)
        return Located(quality, self._message(quality, now), self._for_page(quality.averaged, quality.age_s))

    def best(self) -> PositionFix | None:
        """Best mean of the outcrop, for the page; None while there is none."""
        return self._for_page(self._book.best(), self._book.quality(self._clock.elapsed_s()).age_s)

    def _message(self, quality: FixQuality, now: float) -> str:
        status = self._port.status()
        if status.message:
            return status.message
        if quality.position is not None:
            return quality.warning
        if status.state is PortState.ON and self._started_s is not None:
            waited = now - self._started_s
            if waited > NO_FIX_AFTER_S:
                return f"no position after {waited:.0f} s: step into the open, or type the position"
            return "looking for the position"
        return ""

    def _for_page(self, averaged: AveragedPosition | None, age_s: float | None) -> PositionFix | None:
        if averaged is None or age_s is None:
            return None
        place = averaged.position
        # Dated by its age, not by the calendar it came under: a calendar set back makes no old fix fresh.
        return PositionFix(
            latitude_deg=place.latitude_deg,
            longitude_deg=place.longitude_deg,
            altitude_m=place.altitude_m,
            accuracy_m=place.accuracy_m,
            source=place.source,
            fixes=averaged.fixes,
            spread_m=averaged.spread_m,
            at=self._clock.now() - timedelta(seconds=age_s),
        )
