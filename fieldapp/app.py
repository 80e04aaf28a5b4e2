"""The app: wires presenter, devices and leaves together, and decides nothing itself.

`open_app` is the one way in. Nothing here or below imports pandas or matplotlib; a hand-over does when it is made.
"""

# ruff: noqa: E402, PLC0415 - Kivy is configured before its window is imported; what the first frame does not need
# is imported when it is used.

from __future__ import annotations

import gc
import os
from dataclasses import replace
from datetime import UTC, datetime
from pathlib import Path
from typing import TYPE_CHECKING, Any

os.environ.setdefault("KIVY_NO_ARGS", "1")  # the command line is ours

from kivy.config import Config

Config.set("graphics", "multisamples", "0")  # our lines and keys have soft edges of their own
Config.set("input", "mouse", "mouse,disable_multitouch")  # a right click leaves no red dot
Config.set("kivy", "exit_on_escape", "0")  # Esc clears the entry

from fieldapp.look.fonts import register

register()

from kivy.app import App
from kivy.clock import Clock, mainthread
from kivy.core.window import Window
from kivy.metrics import Metrics
from kivy.properties import BooleanProperty, ObjectProperty

from analysis.errors import HingewiseError
from fieldapp.devices.insets import NO_INSETS, Insets, read_insets
from fieldapp.devices.night import is_night
from fieldapp.leaves.keyboard import Keyboard
from fieldapp.leaves.log import LogLeaf
from fieldapp.leaves.outline import Outline
from fieldapp.look.form import Form
from fieldapp.look.theme import DARK, LIGHT
from fieldapp.mishaps import MishapLog, watch
from fieldapp.outcrop import open_page
from fieldapp.settings import Appearance
from fieldapp.states import EVERYTHING, Change

if TYPE_CHECKING:
    from collections.abc import Callable
    from concurrent.futures import ThreadPoolExecutor

    from kivy.clock import ClockEvent
    from kivy.uix.widget import Widget

    from fieldapp.attending import Attendant
    from fieldapp.devices.clock import Clock as DeviceClock
    from fieldapp.devices.ports import Devices
    from fieldapp.leaves.parts import Sheet
    from fieldapp.outcrop import OutcropPage
    from fieldapp.states import Signal

NAME = "Hingewise"


def now_utc() -> datetime:
    """The time, aware, UTC."""
    return datetime.now(UTC)


class HingewiseApp(App):
    """The running app. Leaves read `theme`, `form` and `page`."""

    theme = ObjectProperty(LIGHT, rebind=True)
    form = ObjectProperty(Form(800.0, 1280.0), rebind=True)
    has_sensors = BooleanProperty(False)

    def __init__(
        self,
        notebook_path: Path,
        *,
        demo: bool = False,
        waits: bool = False,
        devices: Devices | None = None,
        device_clock: DeviceClock | None = None,
        clock: Callable[[], datetime] = now_utc,
        **kwargs: object,
    ) -> None:
        super().__init__(**kwargs)
        self.title = NAME
        self.notebook_path = Path(notebook_path)
        self.demo = demo
        self.waits = waits
        self.devices = devices
        self.device_clock = device_clock
        self.attendant: Attendant | None = None
        self.clock_utc = clock
        self.mishaps = MishapLog(self.notebook_path.parent / "mishaps.log", clock)
        self.outline: Outline | None = None
        self._first_time = False
        self.page: OutcropPage | None = None
        self._keyboard: Keyboard | None = None
        self._home_path = self.notebook_path
        self._executor: ThreadPoolExecutor | None = None
        self._seconds: ClockEvent | None = None
        self._stop_listening: list[Callable[[], None]] = []
        self._stands = False  # whether the first frame was drawn
        self._held: list[Callable[[], None]] = []
        self._insets = NO_INSETS
        self.read_insets: Callable[[], Insets] = read_insets
        self.is_night: Callable[[], bool | None] = is_night

    # Coming and going

    def build(self) -> Widget:
        """Open the notebook and make the page, or with `waits` say on the screen why it cannot be opened."""
        watch(self.mishaps, self._tell_mishap)
        self._first_time = not self.notebook_path.exists()
        Window.bind(size=self._window_changed)
        Metrics.bind(density=self._window_changed, fontscale=self._window_changed)
        try:
            self._open(self.notebook_path, demo=self.demo)
        except HingewiseError as error:
            if not self.waits:
                raise
            return self._make_shut(str(error))
        return self._make_page()

    def _make_shut(self, reason: str) -> Widget:
        from fieldapp.leaves.shut import ShutNotebook

        self._choose_theme()
        self.form = self._form_now()
        return ShutNotebook(reason=reason)

    def try_again(self) -> None:
        """Open the notebook that could not be opened; the page takes the place of the words that said why."""
        if self.page is not None:
            return  # a touch on what scrolls may arrive twice
        try:
            self._open(self.notebook_path, demo=self.demo)
        except HingewiseError as error:
            self.root.reason = str(error)
            return
        Window.remove_widget(self.root)
        self.root = self._make_page()
        Window.add_widget(self.root)

    def _make_page(self) -> Widget:
        """Make the page with the Log leaf; other leaves are made when first shown."""
        self._choose_theme()
        self.form = self._form_now()
        self.outline = Outline(self._make_leaf)
        self.outline.form = self.form
        self._keyboard = Keyboard(self)
        Window.softinput_mode = "below_target"  # the field that is typed into stays in sight
        Window.bind(on_key_down=self._keyboard.key_down, on_memorywarning=self.on_memory_low)
        self.outline.refresh(EVERYTHING)
        Window.bind(on_flip=self._first_frame_drawn)
        self._held.append(self.outline.complete)
        if self._first_time and not self.demo:
            self._held.append(lambda: self.open_sheet("safety"))
        self._held.append(self._start_devices)
        return self.outline

    def _first_frame_drawn(self, *_: object) -> None:
        """The page can be used: now what could wait, so that it came up as fast as it can."""
        Window.unbind(on_flip=self._first_frame_drawn)
        Clock.schedule_once(self._do_the_rest, 0)

    def _do_the_rest(self, _dt: float) -> None:
        self._stands = True
        self._fit_to_bars()
        held, self._held = self._held, []
        for call in held:
            call()

    def on_pause(self) -> bool:
        """Leave the screen: everything kept is committed already; the draft is saved, the sensors stop."""
        if self.page is not None:
            self.page.flush()
        self._stop_devices()
        return True

    def on_resume(self) -> None:
        """Come back: textures may be gone with the GL context, and are then made anew."""
        from kivy.graphics.context import get_context

        from fieldapp.drawing.paint import PAINTS

        if PAINTS.were_lost():
            get_context().reload()
        if self.page is None:
            self.try_again()  # whoever left to make room expects it
            return
        self._start_devices()
        self._choose_theme()  # the device may have been set dark meanwhile
        self._fit_to_bars()
        self.outline.refresh(EVERYTHING)

    def on_memory_low(self, *_: object) -> None:
        """The system runs short of memory and may end the app: store what is stored later otherwise, and give back."""
        if self.page is not None:
            self.page.flush()
        gc.collect()

    def go_back(self) -> bool:
        """Do what the back key asks: close what lies over the page, or return to the Log leaf.

        False where there is nothing to go back from; the system then takes the app from the screen. The entry
        stays as it is in every case.
        """
        if self.outline.sheet is not None:
            if self.outline.sheet.closable:
                self.outline.sheet.close()
            return True
        if "Log" not in self.outline.names_shown:
            self.outline.show("Log")
            return True
        return False

    def on_stop(self) -> None:
        """Close the notebook."""
        self._stop_devices()
        Window.unbind(size=self._window_changed, on_memorywarning=self.on_memory_low)
        if self._keyboard is not None:
            Window.unbind(on_key_down=self._keyboard.key_down)
        Metrics.unbind(density=self._window_changed, fontscale=self._window_changed)
        self._close()

    def _open(self, path: Path, *, demo: bool) -> None:
        from concurrent.futures import ThreadPoolExecutor

        from fieldapp.dispatch import ThreadDispatch

        executor = ThreadPoolExecutor(max_workers=1, thread_name_prefix="forecast")
        elsewhere = ThreadDispatch(executor, mainthread(lambda call: call()))

        def dispatch(*work: Any) -> None:  # noqa: ANN401 - a work, its end and its failure, as ThreadDispatch takes them
            if self._stands:
                elsewhere(*work)
            else:
                self._held.append(lambda: elsewhere(*work))

        try:
            if demo:
                from fieldapp.notebook.demo import make_demo

                make_demo(path, self.clock_utc)
            page = open_page(path, clock=self.clock_utc, dispatch=dispatch, demo=demo)
        except BaseException:
            executor.shutdown(wait=False, cancel_futures=True)
            raise
        self._close()
        self._executor, self.page = executor, page
        self.notebook_path, self.demo = path, demo
        self._stop_listening = [page.listen(self._changed), page.on_signal(self._signalled)]

    def _close(self) -> None:
        for stop in self._stop_listening:
            stop()
        self._stop_listening = []
        if self.page is not None:
            self.page.close()
        if self._executor is not None:
            self._executor.shutdown(wait=False, cancel_futures=True)

    def change_notebook(self, path: Path, *, demo: bool) -> None:
        """Open another notebook: the demo, or the geologist's own again. Where it cannot be, this one stays open."""
        try:
            self._open(path, demo=demo)
        except HingewiseError as error:
            self._tell_mishap(str(error))
            return
        self._stop_devices()
        self._choose_theme()
        self.outline.refresh(EVERYTHING)
        self._start_devices()

    def open_demo(self) -> None:
        """Open the invented notebook; it is a file of its own and cannot mix with real readings."""
        self.change_notebook(demo_path_beside(self._home_path), demo=True)

    def leave_demo(self) -> None:
        """Go back to the geologist's own notebook, or to a new one where the app was opened on the demo."""
        own = self._home_path
        self.change_notebook(own.with_name("notebook.db") if own == self.notebook_path else own, demo=False)

    # Wiring

    def _changed(self, change: Change) -> None:
        if change & Change.SETTINGS:
            self._choose_theme()
        if self.outline is not None:
            self.outline.refresh(change)

    def _signalled(self, signal: Signal) -> None:
        if self.attendant is not None:
            self.attendant.signalled(signal)

    def _start_devices(self) -> None:
        from fieldapp.attending import Attendant
        from fieldapp.devices.choose import choose_devices
        from fieldapp.devices.clock import SystemClock

        self._stop_devices()  # a device may call the app back that never went away
        if self.devices is None:
            self.devices = choose_devices(Window)
        self.attendant = Attendant(
            self.devices, self.page, self.device_clock or SystemClock(), self._tell_mishap
        )
        self.attendant.start()
        self.has_sensors = self.attendant.has_sensors
        self._listen_each_second()
        self.explain_position()

    def _listen_each_second(self) -> None:
        if self._seconds is None and self.attendant.wants_seconds:
            self._seconds = Clock.schedule_interval(self._second, 1.0)

    def explain_position(self) -> None:
        """Say once what the position is wanted for, before the device asks for it, and over no other sheet."""
        wants = self.attendant is not None and self.attendant.wants_leave
        if wants and not self.page.settings.position_explained and self.outline.sheet is None:
            self.open_sheet("position")

    @property
    def wants_leave(self) -> bool:
        """Whether the device's position could be used and has not been allowed."""
        return self.attendant is not None and self.attendant.wants_leave

    def answer_position(self, *, use: bool) -> None:
        """Take the answer: let the device ask for its permission, or leave the position to be typed."""
        self.close_sheets()
        if not self.wants_leave:
            return  # a touch on a sheet that scrolls may arrive twice
        self.page.change_settings(replace(self.page.settings, position_explained=True))
        if use and self.attendant is not None:
            self.attendant.use_position()
            self._listen_each_second()

    def _second(self, _dt: float) -> None:
        self.attendant.second()

    def _stop_devices(self) -> None:
        if self._seconds is not None:
            self._seconds.cancel()
            self._seconds = None
        if self.attendant is not None:
            self.attendant.stop()
            self.attendant = None

    def measure(self) -> None:
        """Read an attitude with the sensors into the draft."""
        self.open_sheet("measure")

    def _choose_theme(self) -> None:
        chosen = Appearance.SYSTEM if self.page is None else self.page.settings.appearance
        dark = bool(self.is_night()) if chosen is Appearance.SYSTEM else chosen is Appearance.DARK
        self.theme = DARK if dark else LIGHT
        # The ground of the page is what the window is cleared with: a rectangle over all of it would cost a fifth
        # of a frame.
        Window.clearcolor = self.theme.paper

    def _form_now(self) -> Form:
        density = Metrics.density
        width, height = self._insets.inside(*Window.size)
        bars = 0 if self.outline is None else self.outline.bars
        return Form(width / density, height / density, Metrics.fontscale, bars)

    def _window_changed(self, *_: object) -> None:
        self._fit_to_bars()
        self.fit()

    def _fit_to_bars(self) -> None:
        """Keep the page clear of the bars and the notch that the system lays over the window."""
        if self.outline is None:
            return
        self._insets = self.read_insets() if self._stands else self._insets
        self.outline.size_hint = (None, None)
        self.outline.size = self._insets.inside(*Window.size)
        self.outline.pos = (self._insets.left_px, self._insets.bottom_px)
        self.fit()

    def fit(self) -> None:
        """Fit the page to the window and to what else stands on it."""
        form = self._form_now()
        if form == self.form:
            return
        self.form = form
        if self.outline is not None:
            self.outline.form = form

    def _make_leaf(self, name: str) -> Widget:
        if name == "Log":
            return LogLeaf()
        if name == "Check":
            from fieldapp.leaves.check import CheckLeaf

            return CheckLeaf()
        if name == "Fault":
            from fieldapp.leaves.fault import FaultLeaf

            return FaultLeaf()
        from fieldapp.leaves.handover import HandOverLeaf

        return HandOverLeaf()

    def open_sheet(self, name: str, **values: object) -> Sheet:
        """Lay the sheet of this name, as in `sheets.SHEETS`, over the page."""
        from fieldapp.leaves.sheets import make_sheet

        return make_sheet(name, **values).open(self.outline)

    def close_sheets(self) -> None:
        """Take every sheet away."""
        while self.outline.sheet is not None:
            self.outline.sheet.close()

    def mend(self, reading_id: str) -> None:
        """Load a past reading into the entry and show the Log leaf."""
        self.page.mend(reading_id)
        self.page.name_nothing()
        if "Log" not in self.outline.names_shown:
            self.outline.show("Log")

    def share(self, path: Path) -> None:
        """Hand a file to the device's own sharing, on a phone or tablet; elsewhere the file stands where it is."""
        from fieldapp.devices.passing import share_file

        words = share_file(path)
        if words:
            self._tell_mishap(words)

    def choose_file(self, folder: Path, chosen: Callable[[Path], None]) -> bool:
        """Let the device's own chooser bring a file into `folder`; False where the app looks round by itself."""
        from fieldapp.devices.passing import can_choose, choose_file

        if not can_choose():
            return False

        def done(path: Path | None, words: str) -> None:
            if path is not None:
                chosen(path)
            elif words:
                self._tell_mishap(words)

        choose_file(folder, mainthread(done))
        return True

    @property
    def outline_trouble(self) -> str:
        """What went wrong inside the app, until it is closed."""
        return "" if self.outline is None else self.outline.trouble

    def _tell_mishap(self, text: str) -> None:
        if self.outline is not None:
            self.outline.tell_trouble(text)


def demo_path_beside(notebook_path: Path) -> Path:
    """Where the invented notebook lies: beside the real one, under a name of its own."""
    return notebook_path.with_name("demo-mossgarth.db")


def open_app(notebook_path: str | os.PathLike[str], *, demo: bool = False, waits: bool = False) -> None:
    """Open the app on a notebook and return when its window is closed.

    With `demo` the file is the invented notebook, made there unless it exists, and the page says so. A notebook that
    cannot be opened raises a NotebookError; with `waits`, for a device where nobody would see it, the screen says why
    and has a key that tries again.
    """
    HingewiseApp(Path(notebook_path), demo=demo, waits=waits).run()


__all__ = ["HingewiseApp", "demo_path_beside", "open_app"]
