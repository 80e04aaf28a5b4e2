"""What Android and iOS start: the app on the device's own notebook. No command line, no demo, no click."""

from __future__ import annotations

import os
import sys
from pathlib import Path

NOTEBOOK = Path("notebook", "notebook.db")
"""In a folder of its own: the backup rules name that folder, and an update of the app leaves it alone."""


def notebook_path() -> Path:
    """Where the notebook lies: in the app's private files on Android, among its documents on iOS."""
    private = os.environ.get("ANDROID_PRIVATE")  # set by python-for-android before Python starts
    if private:
        return Path(private) / NOTEBOOK
    if sys.platform == "ios" or os.environ.get("KIVY_BUILD") == "ios":
        return Path.home() / "Documents" / NOTEBOOK
    raise SystemExit("main.py is what Android and iOS start; at a desk use the command hingewise")


def main() -> None:
    """Open the app."""
    from fieldapp.app import open_app  # noqa: PLC0415 - importing it opens the window

    open_app(notebook_path(), waits=True)


if __name__ == "__main__":
    main()
