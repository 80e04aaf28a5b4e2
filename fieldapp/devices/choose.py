"""Which side of the ports this machine gets. There is no way from here to the replay side."""

from __future__ import annotations

import os
import sys
from typing import TYPE_CHECKING

from fieldapp.devices.clock import SystemClock
from fieldapp.devices.unavailable import unavailable_devices

if TYPE_CHECKING:
    from fieldapp.devices.clock import Clock
    from fieldapp.devices.ports import Devices


def system_name() -> str:
    """Give "android", "ios" or "desktop"; by the marks that python-for-android and kivy-ios leave."""
    if hasattr(sys, "getandroidapilevel") or sys.platform == "android" or "ANDROID_ARGUMENT" in os.environ:
        return "android"
    if sys.platform == "ios" or os.environ.get("KIVY_BUILD") == "ios":
        return "ios"
    return "desktop"


def is_field_build() -> bool:
    """Whether this runs on a phone or tablet, where readings are real."""
    return system_name() != "desktop"


def choose_devices(window: object | None = None, clock: Clock | None = None) -> Devices:
    """Give the ports of this machine: plyer's on Android and iOS, unavailable ones elsewhere.

    `window` is the app's window, whose `allow_screensaver` keeps the screen awake; without it the screen is
    left alone.
    """
    system = system_name()
    if system == "desktop":
        return unavailable_devices()
    from fieldapp.devices.plyer_side import plyer_devices  # noqa: PLC0415 (never loaded on a desktop)

    return plyer_devices(system, clock or SystemClock(), window)
