"""What the system lays over the window: bars, and the notch of a camera.

From Android 15 on a window reaches under them, and the app keeps clear by itself; before, the system did. iOS has
its safe area, which is not read yet.
"""

from __future__ import annotations

from dataclasses import dataclass

from fieldapp.devices.choose import system_name

EDGE_TO_EDGE_API = 35  # Android 15: windows of apps aimed at it or above reach under the bars


@dataclass(frozen=True, slots=True)
class Insets:
    """Pixels taken from each side of the window."""

    left_px: int = 0
    top_px: int = 0
    right_px: int = 0
    bottom_px: int = 0

    def inside(self, width_px: float, height_px: float) -> tuple[float, float]:
        """Width and height that are left of a window; never below one pixel."""
        width = width_px - self.left_px - self.right_px
        return max(width, 1), max(height_px - self.top_px - self.bottom_px, 1)


NO_INSETS = Insets()


def read_insets() -> Insets:
    """Ask the system; nothing is taken where it does not say."""
    if system_name() != "android":
        return NO_INSETS
    try:
        from android import mActivity  # noqa: PLC0415 (exists on Android only)
        from jnius import autoclass  # noqa: PLC0415 (as above)

        if autoclass("android.os.Build$VERSION").SDK_INT < EDGE_TO_EDGE_API:
            return NO_INSETS
        kinds = autoclass("android.view.WindowInsets$Type")
        wanted = kinds.systemBars() | kinds.displayCutout()
        told = mActivity.getWindow().getDecorView().getRootWindowInsets().getInsets(wanted)
        return Insets(int(told.left), int(told.top), int(told.right), int(told.bottom))
    except Exception:  # noqa: BLE001 (the bridge to Java raises classes of its own; a page under a bar still works)
        return NO_INSETS
