"""The page's leaves: one .kv file beside one .py each. They show the presenter's state and pass touches on."""

from __future__ import annotations

from pathlib import Path

KV_FOLDER = Path(__file__).parent
_loaded: set[str] = set()


def load_kv(name: str) -> None:
    """Load the .kv file of this name once, when its leaf is first needed."""
    from kivy.lang import Builder  # noqa: PLC0415 - this package must be importable without Kivy

    if name not in _loaded:
        _loaded.add(name)
        Builder.load_file(str(KV_FOLDER / f"{name}.kv"))
