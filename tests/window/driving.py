"""Drives the real app in a real window: touches go in through an input provider, frames are run one by one."""

# ruff: noqa: PLC0415 - importing Kivy opens a window, so it is imported inside fixtures and functions.

from __future__ import annotations

import time
from collections import deque
from typing import TYPE_CHECKING

if TYPE_CHECKING:
    from collections.abc import Callable
    from pathlib import Path


class Driver:
    """The running app, one frame at a time."""

    def __init__(
        self, path: Path, *, size: tuple[int, int] = (800, 1280), demo: bool = False, **app_values: object
    ) -> None:
        from kivy.base import EventLoop, runTouchApp
        from kivy.core.window import Window
        from kivy.input.motionevent import MotionEvent
        from kivy.input.provider import MotionEventProvider
        from kivy.lang.parser import global_idmap

        from fieldapp.app import HingewiseApp

        class Finger(MotionEvent):
            def __init__(self, *args: object, **kwargs: object) -> None:
                super().__init__(*args, is_touch=True, type_id="touch", **kwargs)
                self.profile = ["pos"]

            def depack(self, args: object) -> None:
                self.sx, self.sy = args
                super().depack(args)

        class Fingers(MotionEventProvider):
            def __init__(self) -> None:
                super().__init__("fingers", None)
                self.waiting: deque[tuple[str, MotionEvent]] = deque()

            def update(self, dispatch_fn: Callable[..., None]) -> None:
                while self.waiting:
                    kind, finger = self.waiting.popleft()
                    dispatch_fn(kind, finger)

        self._loop, self.window, self._finger = EventLoop, Window, Finger
        self._count = 0
        self.expects_mishap = False
        self.app = None
        self.resize(*size)
        self.provider = Fingers()
        EventLoop.add_input_provider(self.provider)
        self.app = HingewiseApp(path, demo=demo, **app_values)
        # The name `app` in .kv files holds on to the app that was running when it was last used, which may be
        # the one of the test before, used once more while its widgets were taken away.
        object.__setattr__(global_idmap["app"], "_obj", None)
        self.app._run_prepare()
        if EventLoop.status != "started":
            runTouchApp(embedded=True)
        self.frames(4)

    def resize(self, width: int, height: int) -> None:
        """Give the window another size, as turning the tablet does."""
        self.window.size = (width, height)
        for _ in range(50):
            self.window.mainloop()
            if tuple(self.window.size) == (width, height):
                break
            time.sleep(0.01)
        assert tuple(self.window.size) == (width, height), self.window.size
        if self._loop.status == "started":
            self.frames(3)

    def frames(self, count: int = 2) -> None:
        """Run so many frames, with whatever the window system sends."""
        from kivy.base import ExceptionManager

        for _ in range(count):
            try:
                self._loop.idle()
                self.window.mainloop()
            except Exception as error:  # as Kivy's own loop does
                if ExceptionManager.handle_exception(error) == ExceptionManager.RAISE:
                    raise
            if self.app is not None and not self.expects_mishap:
                assert self.app.mishaps.text() == "", self.app.mishaps.text()

    def wait(self, condition: Callable[[], object], seconds: float = 5.0) -> None:
        """Run frames until a condition holds; fails after so many seconds."""
        until = time.monotonic() + seconds
        while not condition():
            assert time.monotonic() < until, "the condition did not come about"
            self.frames(1)

    # Touch

    def finger_at(self, x: float, y: float) -> object:
        """A new finger at a place in pixels."""
        self._count += 1
        width, height = self.window.size
        return self._finger("fingers", self._count, (float(x) / width, float(y) / height))

    def touch(self, x: float, y: float) -> None:
        """Touch a place in pixels and lift the finger."""
        finger = self.finger_at(x, y)
        self.provider.waiting.append(("begin", finger))
        self.frames(1)
        self.provider.waiting.append(("end", finger))
        self.frames(2)

    def tap(self, text: str, inside: object = None) -> None:
        """Touch the key with these words."""
        self.press(self.key(text, inside))

    def key(self, text: str, inside: object = None) -> object:
        """Find the one key on the screen with these words."""
        from kivy.uix.behaviors import ButtonBehavior

        top = inside or self.app.outline.sheet or self.app.outline
        found = [
            widget
            for widget in top.walk()
            if isinstance(widget, ButtonBehavior)
            and getattr(widget, "text", None) == text
            and widget.opacity > 0
        ]
        assert len(found) == 1, f"{len(found)} keys say {text!r}"
        return found[0]

    def type_key(self, name: str) -> None:
        """Press a key of a keyboard, as the window reports it."""
        from kivy.core.window import Keyboard

        self.window.dispatch("on_key_down", Keyboard.keycodes[name], 0, None, [])
        self.frames(2)

    def press(self, widget: object) -> None:
        """Touch the middle of a widget."""
        assert widget.get_root_window() is not None, f"{widget} is not on the screen"
        x, y = widget.to_window(*widget.center)
        width, height = self.window.size
        assert 0 <= x < width, f"{widget} lies outside the window"
        assert 0 <= y < height, f"{widget} lies outside the window"
        self.touch(x, y)

    def stop(self) -> None:
        """Close the app and leave the window for the next one."""
        self.app.dispatch("on_stop")
        self.window.remove_widget(self.app.root)
        for child in list(self.window.children):
            self.window.remove_widget(child)
        self._loop.remove_input_provider(self.provider)
