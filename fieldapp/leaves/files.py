"""Folders and names of files, as leaves list them."""

from __future__ import annotations

import os
from typing import TYPE_CHECKING

from fieldapp.leaves import load_kv
from fieldapp.leaves.parts import Key

if TYPE_CHECKING:
    from collections.abc import Callable
    from pathlib import Path

    from kivy.uix.boxlayout import BoxLayout


class FileKey(Key):
    """A folder or a file in a list."""


def list_folder(
    box: BoxLayout, folder: Path, chosen: Callable[[Path], None], suffixes: tuple[str, ...] = ()
) -> None:
    """Fill a box with keys: the folder above, those in it but the hidden ones, and files with one of the endings."""
    try:
        entries = sorted(folder.iterdir(), key=lambda path: path.name.lower())
    except OSError:
        entries = []
    folders = [path for path in entries if path.is_dir() and not path.name.startswith(".")]
    files = [path for path in entries if path.suffix.lower() in suffixes]
    box.clear_widgets()
    for label, path in (
        ("Up one folder", folder.parent),
        *((f"{path.name}/", path) for path in folders),
        *((path.name, path) for path in files),
    ):
        key = FileKey(text=label)
        key.bind(on_release=lambda _key, path=path: chosen(path))
        box.add_widget(key)


def free_name(path: Path) -> Path:
    """The name of a file, numbered where a file of that name is there: two hand-overs may fall in one second."""
    free, number = path, 1
    while os.path.lexists(free):
        number += 1
        free = path.with_name(f"{path.stem}-{number}{path.suffix}")
    return free


load_kv("files")
