"""Whether the device itself is set to its dark look. Android says so; other systems are not asked."""

from __future__ import annotations

from fieldapp.devices.choose import system_name


def is_night() -> bool | None:
    """Whether the system shows apps dark; None where it is not asked, or does not say.

    Android: `Configuration.uiMode`, the part under UI_MODE_NIGHT_MASK.
    """
    if system_name() != "android":
        return None
    try:
        from android import mActivity  # noqa: PLC0415 (exists on Android only)
        from jnius import autoclass  # noqa: PLC0415 (as above)

        kinds = autoclass("android.content.res.Configuration")
        told = mActivity.getResources().getConfiguration().uiMode & kinds.UI_MODE_NIGHT_MASK
        return {kinds.UI_MODE_NIGHT_YES: True, kinds.UI_MODE_NIGHT_NO: False}.get(told)
    except Exception:  # noqa: BLE001 (the bridge to Java raises classes of its own; a light page can be read)
        return None
