"""Two clocks: one that only runs forward, for ages and durations, and the calendar, which may be wrong."""

from __future__ import annotations

import time
from datetime import UTC, datetime, timedelta
from typing import Protocol

# A tablet handed between time zones or synchronised late may be off by hours without harm to anything.
CLOCK_SLACK = timedelta(days=1)


class Clock(Protocol):
    """What tells time."""

    def elapsed_s(self) -> float:
        """Seconds since some start, never set back, and running on while the device sleeps."""

    def now(self) -> datetime:
        """Date and time, aware, UTC, as the device has them."""


class SystemClock:
    """The machine's clocks."""

    def elapsed_s(self) -> float:
        """Seconds since the machine started."""
        # The usual monotonic clock of Linux and Android stands still while the device sleeps; an old fix
        # would pass for a fresh one after it.
        kind = getattr(time, "CLOCK_BOOTTIME", getattr(time, "CLOCK_MONOTONIC", None))
        return time.monotonic() if kind is None else time.clock_gettime(kind)

    def now(self) -> datetime:
        """Date and time of the calendar, UTC."""
        return datetime.now(UTC)


def clock_fault(now: datetime, latest_kept: datetime | None) -> str:
    """Say what is wrong where the calendar stands before the latest reading kept; '' where nothing is.

    The declination and the order of readings both hang on the date. Both times are aware.
    """
    if latest_kept is None or now >= latest_kept - CLOCK_SLACK:
        return ""
    return (
        f"the tablet's clock says {now:%Y-%m-%d}, before the last reading of {latest_kept:%Y-%m-%d}: "
        "set the clock; readings can still be typed and kept"
    )
