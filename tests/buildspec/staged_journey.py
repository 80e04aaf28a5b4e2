# ruff: noqa: PLC0415, T201, ICN001 - what is imported is what the staged tree brings, and the answer is printed
"""Run in a fresh environment, in the staged tree: starts the app as a device does and does a day's work by touch.

``python staged_journey.py STAGED`` with the private folder of the app in ANDROID_PRIVATE. Python may run with -OO,
which drops every assert, so what must hold is said with `must`. Prints one line of JSON about what was done.
"""

from __future__ import annotations

import csv
import json
import sys
from collections import deque
from pathlib import Path

READINGS = 60
FRAMES_TO_WAIT = 600


def must(condition: object, text: str) -> None:
    """End the run where something is not as it must be."""
    if not condition:
        raise SystemExit(f"the journey broke off: {text}")


class Journey:
    """Steps, one a frame; each `yield` lets the app run a frame."""

    def __init__(self, app_of) -> None:
        from kivy.base import EventLoop
        from kivy.input.motionevent import MotionEvent
        from kivy.input.provider import MotionEventProvider

        class Finger(MotionEvent):
            def __init__(self, *args, **kwargs) -> None:
                super().__init__(*args, is_touch=True, type_id="touch", **kwargs)
                self.profile = ["pos"]

            def depack(self, args) -> None:
                self.sx, self.sy = args
                super().depack(args)

        class Fingers(MotionEventProvider):
            def update(self, dispatch_fn) -> None:
                while self.waiting:
                    dispatch_fn(*self.waiting.popleft())

        self.app_of, self.finger, self.count, self.told = app_of, Finger, 0, {}
        self.fingers = Fingers("fingers", None)
        self.fingers.waiting = deque()
        EventLoop.add_input_provider(self.fingers)

    def press(self, widget):
        """Touch the middle of a widget and lift the finger."""
        from kivy.core.window import Window

        must(widget.get_root_window() is not None, f"{widget} is not on the screen")
        x, y = widget.to_window(*widget.center)
        self.count += 1
        finger = self.finger("fingers", self.count, (x / Window.width, y / Window.height))
        self.fingers.waiting.append(("begin", finger))
        yield
        self.fingers.waiting.append(("end", finger))
        yield
        yield

    def key(self, text):
        """Find the key with these words."""
        from kivy.uix.behaviors import ButtonBehavior

        outline = self.app_of().outline
        found = [
            widget
            for widget in (outline.sheet or outline).walk()
            if isinstance(widget, ButtonBehavior)
            and getattr(widget, "text", "") == text
            and widget.opacity > 0
        ]
        must(len(found) == 1, f"{len(found)} keys say {text!r}")
        return found[0]

    def steps(self):
        """Read the safety notes, log a fold until there is a verdict, look at every leaf, hand over."""
        from mossgarth import fold

        app = self.app_of()
        for _ in range(FRAMES_TO_WAIT):
            if app.outline.sheet is not None:
                break
            yield
        must(app.outline.sheet is not None, "no safety notes on first start")
        yield from self.press(self.key("I will. Start reading"))
        strip, log, page = app.outline.ids.strip, app.outline.leaf("Log"), app.page
        for typed in fold(READINGS, transection_deg=14.0, scatter_deg=2.0, outcrops=1):
            if page.entry.feature is not typed.feature:
                yield from self.press(log.feature_keys[typed.feature])
            for digit in typed.azimuth + typed.inclination:
                yield from self.press(log.pad.keys[digit])
            if page.entry.quadrant_offered and typed.quadrant:
                grid = log.grid_small if log.form.grid_beside else log.grid_large
                yield from self.press(grid.keys[typed.quadrant])
            yield from self.press(log.side.keys["keep"])
            if strip.sign != "open ring":
                break
        self.told["sign"], self.told["kept"] = strip.sign, len(page.standing)
        for name in ("Check", "Fault", "Hand over"):
            yield from self.press(self.key(name))
            yield
        path = app.outline.leaf("Hand over").write()
        must(path is not None, f"no file was written: {page.message}")
        with Path(path).open(encoding="utf-8", newline="") as file:
            self.told["rows"] = sum(1 for _ in csv.DictReader(file))
        preview = page.preview_take_in(path)
        must(preview is not None, f"the file cannot be read again: {page.message}")
        self.told["known"] = preview.known
        self.told["mishaps"] = app.mishaps.text()
        app.stop()


def main(staged: Path) -> None:
    """Start main.py as the device does, with the journey on the clock."""
    sys.path[:0] = [str(staged), str(Path(__file__).resolve().parents[1] / "window")]
    import main as started  # the staged main.py

    must(Path(started.__file__).parent == staged, f"{started.__file__} is not the staged main.py")
    from kivy.clock import Clock

    from fieldapp import app as module

    must(staged in Path(module.__file__).parents, f"{module.__file__} is not staged")
    journey = Journey(module.HingewiseApp.get_running_app)
    steps = None

    def step(_dt: float) -> bool | None:
        nonlocal steps
        if module.HingewiseApp.get_running_app() is None:
            return None
        steps = steps or journey.steps()
        return None if next(steps, "over") is None else False

    Clock.schedule_interval(step, 0)
    started.main()
    import numpy
    import pandas

    private = started.notebook_path().parent.parent
    files = sorted(path.relative_to(private).as_posix() for path in private.rglob("*") if path.is_file())
    versions = {"numpy": numpy.__version__, "pandas": pandas.__version__, "python": sys.version.split()[0]}
    print(json.dumps({**journey.told, **versions, "files": files}))


if __name__ == "__main__":
    main(Path(sys.argv[1]).resolve())
