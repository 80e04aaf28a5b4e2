"""What to do when a callback raises: write it to a local log, say so on the page, carry on.

Every kept reading is committed before the screen says so, so that a mishap on the screen loses nothing.
"""

from __future__ import annotations

import traceback
from typing import TYPE_CHECKING

if TYPE_CHECKING:
    from collections.abc import Callable
    from datetime import datetime
    from pathlib import Path

MOST_BYTES = 256_000  # the log starts anew beyond this; the old one is kept once
SAID = "Something went wrong on the screen. Your readings are safe. Hand over can attach the log of it."


class MishapLog:
    """A text file with one entry a mishap; writing to it never raises."""

    def __init__(self, path: Path, clock: Callable[[], datetime]) -> None:
        self.path = path
        self._clock = clock

    def write(self, error: BaseException) -> bool:
        """Add an error with its trace; False where the log cannot be written."""
        text = "".join(traceback.format_exception(error))
        try:
            if self.path.exists() and self.path.stat().st_size > MOST_BYTES:
                self.path.replace(self.path.with_suffix(".old.log"))
            with self.path.open("a", encoding="utf-8") as file:
                file.write(f"{self._clock().isoformat()}\n{text}\n")
        except OSError:
            return False
        return True

    def text(self) -> str:
        """What the log says; empty where there is none."""
        try:
            return self.path.read_text(encoding="utf-8")
        except OSError:
            return ""


def watch(log: MishapLog, tell: Callable[[str], None]) -> None:
    """Have every exception in a Kivy callback logged and told, and the app go on."""
    from kivy.base import ExceptionHandler, ExceptionManager  # noqa: PLC0415 - the log itself needs no Kivy
    from kivy.logger import Logger  # noqa: PLC0415

    class Careful(ExceptionHandler):
        def handle_exception(self, error: BaseException) -> int:
            if not isinstance(error, Exception):
                return ExceptionManager.RAISE
            log.write(error)
            Logger.error("Hingewise: %s", error)
            try:
                tell(SAID)
            except Exception as second:  # noqa: BLE001 - telling must not raise in its turn
                log.write(second)
            return ExceptionManager.PASS

    for handler in list(ExceptionManager.handlers):
        if type(handler).__name__ == "Careful":
            ExceptionManager.remove_handler(handler)
    ExceptionManager.add_handler(Careful())
