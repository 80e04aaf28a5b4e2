"""Whether there is a display to open a window on. Imports the standard library alone: setting up asks too."""

from __future__ import annotations

import os
import re
import sys
from pathlib import Path
from typing import TYPE_CHECKING

if TYPE_CHECKING:
    from collections.abc import Mapping

X_SOCKETS = Path(
    "/", "tmp", ".X11-unix"
)  # where X servers listen on every system, whatever its temporary folder
BOUND = Path("/proc/net/unix")  # sockets that are listened on, also those without a file


def has_display(environment: Mapping[str, str] = os.environ, platform: str = sys.platform) -> bool:
    """Whether a window can be opened here.

    On Linux a variable may name a server that is gone. The window would then be drawn nowhere, and never end.
    """
    if not platform.startswith("linux"):
        return True
    return _x_is_there(environment.get("DISPLAY", "")) or _wayland_is_there(environment)


def _x_is_there(display: str) -> bool:
    local = re.fullmatch(r"(?:unix)?:(\d+)(?:\.\d+)?", display)
    if local is None:
        return bool(display)  # on another machine: nothing is known before it is tried
    socket = X_SOCKETS / f"X{local[1]}"
    return socket.exists() or _is_bound(str(socket))


def _wayland_is_there(environment: Mapping[str, str]) -> bool:
    name = environment.get("WAYLAND_DISPLAY", "")
    return bool(name) and (Path(environment.get("XDG_RUNTIME_DIR", "/")) / name).exists()


def _is_bound(socket: str) -> bool:
    try:
        lines = BOUND.read_text(encoding="utf-8", errors="replace").splitlines()
    except OSError:
        return False
    return any(line.rpartition(" ")[2].lstrip("@") == socket for line in lines)
