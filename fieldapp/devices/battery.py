"""A note when the battery runs low, once, so that readings are handed over in time."""

from __future__ import annotations

from typing import TYPE_CHECKING

if TYPE_CHECKING:
    from fieldapp.devices.ports import BatteryLevel

LOW_percent = 15.0
# Above this the note may come again: a level that wavers about 15% must not nag.
ARMED_AGAIN_percent = 20.0


class BatteryWatch:
    """Says once per discharge that the charge is at 15% or below."""

    def __init__(self) -> None:
        self._said = False

    def note(self, level: BatteryLevel | None) -> str:
        """Give the note for a level just read, or '' where there is none to give."""
        if level is None:
            return ""
        if level.charging or level.percent > ARMED_AGAIN_percent:
            self._said = False
            return ""
        if self._said or level.percent > LOW_percent:
            return ""
        self._said = True
        return f"battery {level.percent:.0f}%: every reading is kept already; hand over while you can"
