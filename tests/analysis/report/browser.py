"""A real browser, driven over a pipe with nothing but the standard library.

Speaks the protocol of the Chromium family's developer tools: messages in JSON, each ended by a NUL byte, on the
file descriptors 3 and 4 of the browser. One browser serves all tests of a session; each page is a tab of its own.
"""

from __future__ import annotations

import base64
import fcntl
import json
import os
import select
import shutil
import subprocess
import sys
import time
from typing import TYPE_CHECKING, Any, NamedTuple

if TYPE_CHECKING:
    from pathlib import Path

NAMES = ("chromium", "chromium-browser", "google-chrome", "google-chrome-stable", "chrome", "microsoft-edge")
PATIENCE_S = 120.0
"""How long an answer may take before the browser counts as hung, seconds: a busy machine is slow."""
FLAGS = (
    "--headless", "--no-sandbox", "--disable-gpu", "--disable-quic", "--no-first-run", "--disable-extensions",
    "--disable-background-networking", "--disable-component-update", "--disable-sync", "--disable-dev-shm-usage",
    "--no-default-browser-check", "--hide-scrollbars", "--remote-debugging-pipe",
)  # fmt: skip


class NoBrowserError(Exception):
    """There is no browser here: the tests that need one fail, they are not skipped."""


class Look(NamedTuple):
    """How a page is looked at: the window's size in CSS pixels, and the look that the reader prefers."""

    width: int = 1280
    height: int = 900
    scheme: str = "light"
    media: str = "screen"


def find_browser() -> str:
    """Path of a browser; NoBrowserError says what to install."""
    for name in NAMES:
        found = shutil.which(name)
        if found:
            return found
    raise NoBrowserError(
        f"none of {', '.join(NAMES)} is installed. On Debian and its relatives: apt-get install chromium"
    )


SCREEN = Look()


class Browser:
    """A browser that runs until it is closed."""

    def __init__(self, folder: Path) -> None:
        ours_read, theirs_write = os.pipe()
        theirs_read, ours_write = os.pipe()
        command = [find_browser(), *FLAGS, f"--user-data-dir={folder}", "about:blank"]
        # The browser wants its pipe on the descriptors 3 and 4: a small program moves them there.
        ends = [fcntl.fcntl(end, fcntl.F_DUPFD, 10) for end in (theirs_read, theirs_write)]
        mover = f"import os, sys; os.dup2({ends[0]}, 3); os.dup2({ends[1]}, 4); os.execv(sys.argv[1], sys.argv[1:])"
        moved = [sys.executable, "-c", mover, *command]
        with (folder / "browser.log").open("wb") as log:
            self.process = subprocess.Popen(
                moved,
                pass_fds=ends,
                stdin=subprocess.DEVNULL,
                stdout=log,
                stderr=log,
            )
        for end in (theirs_read, theirs_write, *ends):
            os.close(end)
        self._read, self._write = ours_read, ours_write
        self._rest = b""
        self._number = 0
        self.events: list[dict[str, Any]] = []

    def close(self) -> None:
        """End the browser."""
        try:
            self.call("Browser.close")
            self.process.wait(10.0)
        except (OSError, RuntimeError, subprocess.TimeoutExpired):
            self.process.kill()
            self.process.wait()
        os.close(self._read)
        os.close(self._write)

    def call(self, method: str, session: str = "", **params: Any) -> dict[str, Any]:
        """Ask for something and wait for the answer; events that come meanwhile are kept."""
        self._number += 1
        number = self._number
        message: dict[str, Any] = {"id": number, "method": method, "params": params}
        if session:
            message["sessionId"] = session
        os.write(self._write, json.dumps(message).encode() + b"\0")
        while True:
            answer = self._next()
            if answer.get("id") == number:
                if "error" in answer:
                    raise RuntimeError(f"{method}: {answer['error']}")
                return answer["result"]
            self.events.append(answer)

    def wait_for(self, method: str, session: str) -> None:
        """Wait until an event of a tab has come."""
        while not any(e.get("method") == method and e.get("sessionId") == session for e in self.events):
            self.events.append(self._next())

    def _next(self) -> dict[str, Any]:
        until = time.monotonic() + PATIENCE_S
        while b"\0" not in self._rest:
            ready, _, _ = select.select([self._read], [], [], max(until - time.monotonic(), 0.0))
            part = os.read(self._read, 1 << 20) if ready else b""
            if not part:
                raise RuntimeError("the browser gave no answer")
            self._rest += part
        message, _, self._rest = self._rest.partition(b"\0")
        return json.loads(message)

    def open(self, path: Path, look: Look = SCREEN) -> Tab:
        """Open a file in a new tab and wait until it is loaded."""
        target = self.call("Target.createTarget", url="about:blank")["targetId"]
        session = self.call("Target.attachToTarget", targetId=target, flatten=True)["sessionId"]
        for domain in ("Page", "Network", "Runtime", "Log"):
            self.call(f"{domain}.enable", session)
        tab = Tab(self, session, target)
        tab.look(look)
        self.call("Page.navigate", session, url=path.resolve().as_uri())
        self.wait_for("Page.loadEventFired", session)
        return tab


class Tab:
    """An open page."""

    def __init__(self, browser: Browser, session: str, target: str) -> None:
        self.browser, self.session, self.target = browser, session, target

    def call(self, method: str, **params: Any) -> dict[str, Any]:
        """Ask something of this tab."""
        return self.browser.call(method, self.session, **params)

    def look(self, look: Look) -> None:
        """Look at the page in this way from now on."""
        self.call(
            "Emulation.setDeviceMetricsOverride",
            width=look.width, height=look.height, deviceScaleFactor=1, mobile=False,
        )  # fmt: skip
        features = [{"name": "prefers-color-scheme", "value": look.scheme}]
        self.call("Emulation.setEmulatedMedia", media=look.media, features=features)

    def value(self, expression: str) -> Any:
        """Reckon an expression in the page."""
        answer = self.call("Runtime.evaluate", expression=expression, returnByValue=True, awaitPromise=True)
        if "exceptionDetails" in answer:
            raise RuntimeError(answer["exceptionDetails"])
        return answer["result"].get("value")

    def events(self, method: str) -> list[dict[str, Any]]:
        """What of one kind has happened in this tab so far."""
        found = [e for e in self.browser.events if e.get("sessionId") == self.session]
        return [event["params"] for event in found if event.get("method") == method]

    def requests(self) -> list[str]:
        """Addresses that the page has asked for, its own among them."""
        return [event["request"]["url"] for event in self.events("Network.requestWillBeSent")]

    def complaints(self) -> list[str]:
        """Errors of scripts and everything that the browser has logged about the page."""
        thrown = [str(event["exceptionDetails"]) for event in self.events("Runtime.exceptionThrown")]
        logged = [str(event["entry"]["text"]) for event in self.events("Log.entryAdded")]
        said = [str(event["args"]) for event in self.events("Runtime.consoleAPICalled")]
        return thrown + logged + said

    def pdf(self, width_in: float = 8.27, height_in: float = 11.69) -> bytes:
        """Print the page."""
        self.call("Emulation.setEmulatedMedia", media="print")
        made = self.call(
            "Page.printToPDF",
            paperWidth=width_in,
            paperHeight=height_in,
            printBackground=True,
            preferCSSPageSize=False,
        )
        return base64.b64decode(made["data"])

    def picture(self, *, whole: bool = False) -> bytes:
        """A PNG of the window, or of the whole page."""
        made = self.call("Page.captureScreenshot", format="png", captureBeyondViewport=whole)
        return base64.b64decode(made["data"])

    def close(self) -> None:
        """Close the tab."""
        self.browser.call("Target.closeTarget", targetId=self.target)
