"""Ids of readings: UUID version 7 (RFC 9562, section 5.7), so that ids sort by the time they were made.

Python 3.11 has no function for them. The 12 bits after the version hold a counter (section 6.2, method 1),
so that ids made within one millisecond, or while the clock is set back, still rise.
"""

from __future__ import annotations

import os
from typing import TYPE_CHECKING
from uuid import UUID

if TYPE_CHECKING:
    from collections.abc import Callable
    from datetime import datetime

_COUNTER_BITS = 12
_FIRST_COUNTS = 0x3FF  # a random start leaves at least three quarters of the counter to count with


class ReadingIds:
    """Makes ids that rise from one to the next; `clock` gives aware times, `random_bytes` is for tests."""

    def __init__(
        self, clock: Callable[[], datetime], random_bytes: Callable[[int], bytes] = os.urandom
    ) -> None:
        self._clock = clock
        self._random_bytes = random_bytes
        self._millisecond = -1
        self._counter = 0

    def __call__(self) -> str:
        """Give the next id, as text with hyphens."""
        now = int(self._clock().timestamp() * 1000)
        if now > self._millisecond:
            self._millisecond = now
            self._counter = int.from_bytes(self._random_bytes(2)) & _FIRST_COUNTS
        else:
            self._counter += 1
            if self._counter >> _COUNTER_BITS:
                self._millisecond += 1
                self._counter = 0
        tail = int.from_bytes(self._random_bytes(8)) & ((1 << 62) - 1)
        value = (self._millisecond & ((1 << 48) - 1)) << 80
        value |= 0x7 << 76 | self._counter << 64 | 0b10 << 62 | tail
        return str(UUID(int=value))
