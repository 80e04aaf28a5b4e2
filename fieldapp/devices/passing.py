"""Files that go out of the app and come into it, through what the device has for that.

On Android the share sheet takes a file out, and the system's own chooser brings one in; neither needs a permission.
Only files in the folder that buildspec/android/shared_files.xml names can be shared. On iOS the folder shows in the
Files app. At a desk a file stands where it is.
"""

from __future__ import annotations

import os
import re
import shutil
from typing import TYPE_CHECKING, Any

from fieldapp.devices.choose import system_name

if TYPE_CHECKING:
    from collections.abc import Callable
    from pathlib import Path

AUTHORITY = ".files"  # after the name of the package, as in buildspec/android/hook.py
ASKED = 1904  # tells our question apart from others when the system answers
TYPES = {".csv": "text/csv", ".log": "text/plain"}
NOT_SHARED = "the file is written, but the device did not offer to share it"
NOT_CHOSEN = "the device did not offer its files; copy the file into the folder of hand-overs"
NOT_READ = "that file could not be read"
IN_FILES = "The file is in this app's folder in the Files app."


def at_a_desk() -> bool:
    """Whether this is no phone or tablet: files may be written into any folder, and nothing shares them."""
    return system_name() not in ("android", "ios")


def share_file(path: Path) -> str:
    """Offer a file to other apps; give what is to be told of it, '' where the device shows that itself."""
    system = system_name()
    if system != "android":
        return IN_FILES if system == "ios" else ""
    try:
        from android import mActivity  # noqa: PLC0415 (exists on Android only)
        from jnius import autoclass, cast  # noqa: PLC0415 (as above)

        intents = autoclass("android.content.Intent")
        place = autoclass("androidx.core.content.FileProvider").getUriForFile(
            mActivity, mActivity.getPackageName() + AUTHORITY, autoclass("java.io.File")(str(path))
        )
        send = intents(intents.ACTION_SEND)
        send.setType(TYPES.get(path.suffix, "application/octet-stream"))
        send.putExtra(intents.EXTRA_STREAM, cast("android.os.Parcelable", place))
        send.addFlags(intents.FLAG_GRANT_READ_URI_PERMISSION)
        title = cast("java.lang.CharSequence", autoclass("java.lang.String")(path.name))
        mActivity.startActivity(intents.createChooser(send, title))
    except Exception:  # noqa: BLE001 (the bridge to Java raises classes of its own; the file is safe all the same)
        return NOT_SHARED
    return ""


def can_choose() -> bool:
    """Whether the system has a chooser of files of its own, because the app may not look round by itself."""
    return system_name() == "android"


def choose_file(folder: Path, done: Callable[[Path | None, str], None]) -> None:
    """Ask for a file; `done` gets a copy of it in `folder` and '', or None and what is to be told of it.

    `done` is called on a thread of the system's. A question that is closed without an answer gives None and ''.
    """
    try:
        from android import activity, mActivity  # noqa: PLC0415 (as above)
        from jnius import autoclass  # noqa: PLC0415 (as above)

        intents = autoclass("android.content.Intent")

        def answered(asked: int, _result: int, data: Any) -> None:  # noqa: ANN401 (an Intent of Java's, or None)
            if asked != ASKED:
                return
            activity.unbind(on_activity_result=answered)
            place = None if data is None else data.getData()
            if place is None:
                done(None, "")
                return
            try:
                copy = _copied(mActivity.getContentResolver(), place, folder)
            except Exception:  # noqa: BLE001 (as above)
                done(None, NOT_READ)
            else:
                done(copy, "")

        look = intents(intents.ACTION_OPEN_DOCUMENT)
        look.addCategory(intents.CATEGORY_OPENABLE)
        look.setType("*/*")  # file managers know a CSV under many types
        activity.bind(on_activity_result=answered)
        mActivity.startActivityForResult(look, ASKED)
    except Exception:  # noqa: BLE001 (as above)
        done(None, NOT_CHOSEN)


def _copied(resolver: Any, place: Any, folder: Path) -> Path:  # noqa: ANN401 (objects of Java's)
    """Copy what stands at a place of the system's into a folder of ours, under its name there."""
    name = "taken-in.csv"
    rows = resolver.query(place, None, None, None, None)
    if rows is not None:
        column = rows.getColumnIndex("_display_name")
        if rows.moveToFirst() and column >= 0:
            name = str(rows.getString(column))
        rows.close()
    folder.mkdir(parents=True, exist_ok=True)
    # A name from elsewhere may not lead out of the folder.
    copy = folder / (re.sub(r"[^\w. -]", "_", name).lstrip(".") or "taken-in.csv")
    with (
        os.fdopen(resolver.openFileDescriptor(place, "r").detachFd(), "rb") as source,
        copy.open("wb") as target,
    ):
        shutil.copyfileobj(source, target)
    return copy
