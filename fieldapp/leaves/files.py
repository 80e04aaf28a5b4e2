"""Folders and names of files, as leaves list them."""

from __future__ import annotations

import os
from typing import TYPE_CHECKING

from fieldapp.leaves import load_kv
from fieldapp.leaves.parts import Key

if TYPE_CHECKING:
    from pathlib import Path


class FileKey(Key):
    """A folder or a file in a list."""


def entries_of(folder: Path) -> list[Path]:
    """What lies in a folder, by name; nothing for one that cannot be looked into."""
    try:
        return sorted(folder.iterdir(), key=lambda path: path.name.lower())
    except OSError:
        return []


def folders_in(folder: Path) -> list[Path]:
    """The folders in a folder but the hidden ones."""
    return [path for path in entries_of(folder) if path.is_dir() and not path.name.startswith(".")]


def free_name(path: Path) -> Path:
    """The name of a file, numbered where a file of that name is there: two hand-overs may fall in one second."""
    free, number = path, 1
    while os.path.lexists(free):
        number += 1
        free = path.with_name(f"{path.stem}-{number}{path.suffix}")
    return free


load_kv("files")
