"""The folder that a command writes pictures into, and the names of the files in it."""

from __future__ import annotations

import re
from typing import TYPE_CHECKING, Final

from analysis.errors import SettingError

if TYPE_CHECKING:
    from pathlib import Path

_LONGEST: Final = 60


def make_folder(folder: Path) -> None:
    """Make a folder that pictures go into, or leave it as it is; SettingError where that cannot be."""
    try:
        folder.mkdir(parents=True, exist_ok=True)
    except OSError as error:
        raise SettingError(
            f"the folder cannot be made: {error.strerror or error}",
            where=str(folder),
            expected="a place that can be written to",
        ) from error


def file_names(folds: list[str]) -> list[str]:
    """Give each fold a name that a file can have, no two the same, however they are written."""
    names: list[str] = []
    for fold in folds:
        plain = re.sub(r"\W+", "-", fold.lower()).strip("-")[:_LONGEST] or "unnamed-fold"
        name, number = plain, 1
        while name in names:
            number += 1
            name = f"{plain}-{number}"
        names.append(name)
    return names
