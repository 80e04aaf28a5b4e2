"""How fast the page is: Keep to the updated strip and net, a net of 2,000 readings, idling, starting, memory.

    python tests/bench/bench_page.py [ROUNDS]

Needs a display (Xvfb with software GL is what the limits are for). Starting and memory are measured against an
empty Kivy window, pairwise and in turn, each in a fresh process. It prints medians and never fails. Time on the
clock counts until the last thread of software GL has drawn; where other work takes the cores, the time of a core
that the process used tells more.
Limits named beside the figures: from Keep to the screen 50 ms at 500 readings, a redraw 33 ms at 2,000, idle 2% of
a core, first frame 2 times and memory 1.5 times that of the empty window.
"""

# ruff: noqa: T201, PLC0415 - it prints its figures; each child imports only what it measures.

from __future__ import annotations

import json
import os
import statistics
import subprocess
import sys
import tempfile
import time
from pathlib import Path

HERE = Path(__file__).resolve().parent
ROOT = HERE.parent.parent
SIZE = (1280, 800)
ROUNDS = 5
IDLE_S = 8.0

os.environ.setdefault("KIVY_NO_ARGS", "1")
os.environ.setdefault("KIVY_NO_FILELOG", "1")
os.environ.setdefault("KIVY_LOG_MODE", "PYTHON")
sys.path[:0] = [str(ROOT), str(ROOT / "tests" / "window")]


def memory_mb() -> float:
    """Resident memory of this process."""
    text = Path("/proc/self/status").read_text(encoding="utf-8")
    return int(text.split("VmRSS:")[1].split()[0]) / 1024.0


def configure(fps: str) -> None:
    """Set the window up as the app does."""
    from kivy.config import Config

    Config.set("graphics", "width", str(SIZE[0]))
    Config.set("graphics", "height", str(SIZE[1]))
    Config.set("graphics", "maxfps", fps)


def report_first_frame(app: object, idle_s: float) -> None:
    """Print when the first frame stood, the memory then, and the share of a core used while idle; then stop."""
    from kivy.clock import Clock
    from kivy.core.window import Window

    seen: dict[str, float] = {}

    def flipped(*_: object) -> None:
        if seen:
            return
        seen.update(first_frame=time.time())
        Clock.schedule_once(settled, 2.0)

    def settled(_dt: float) -> None:
        seen.update(memory_mb=memory_mb(), wall=time.perf_counter(), busy=time.process_time())
        Clock.schedule_once(ended, idle_s)

    def ended(_dt: float) -> None:
        wall, busy = time.perf_counter() - seen.pop("wall"), time.process_time() - seen.pop("busy")
        print(json.dumps({**seen, "idle_share": busy / wall}), flush=True)
        app.stop()

    Window.bind(on_flip=flipped)


def child_empty(idle_s: float) -> None:
    """An empty Kivy window with one label."""
    configure("60")
    from kivy.app import App
    from kivy.uix.label import Label

    class Empty(App):
        def build(self) -> Label:
            report_first_frame(self, idle_s)
            return Label(text="empty")

    Empty().run()


def child_app(path: Path, idle_s: float) -> None:
    """The app on a notebook in use."""
    configure("60")
    from fieldapp.app import HingewiseApp

    class Timed(HingewiseApp):
        def build(self) -> object:
            root = super().build()
            report_first_frame(self, idle_s)
            return root

    Timed(path).run()
    heavy = sorted(name for name in ("pandas", "matplotlib", "scipy") if name in sys.modules)
    print(json.dumps({"heavy": heavy}), flush=True)


def make_notebook(path: Path, count: int) -> None:
    """Write a notebook with so many readings, in a process of its own, so that nothing is left of it here."""
    subprocess.run(
        [sys.executable, __file__, "--make", str(path), str(count)], check=True, stdout=subprocess.DEVNULL
    )


def child_make(path: Path, count: int) -> None:
    """Fill a notebook through the presenter."""
    from mossgarth import TestClock, fold, type_into

    from fieldapp.dispatch import at_once
    from fieldapp.outcrop import open_page

    clock = TestClock()
    page = open_page(path, clock=clock, dispatch=at_once)
    page.choose_fold("Mossgarth")
    type_into(page, fold(count, outcrops=4), clock)
    page.close()


def child_keep(count: int, times: int) -> None:
    """From Keep to the screen, and one redraw, with so many readings in the fold."""
    configure("0")
    from driving import Driver
    from kivy.graphics.opengl import GL_RGBA, GL_UNSIGNED_BYTE, glReadPixels
    from mossgarth import TestClock, fold

    with tempfile.TemporaryDirectory() as folder:
        path = Path(folder) / "notebook.db"
        make_notebook(path, count)
        driver = Driver(path, size=SIZE, clock=TestClock())
        page, window = driver.app.page, driver.window
        net = driver.app.outline.leaf("Check").net
        driver.frames(60)

        def until_drawn() -> None:
            while True:
                driver.frames(1)
                if not window.canvas.needs_redraw:
                    drawn_whole()
                    return

        def drawn_whole() -> None:
            # Software GL draws on other threads after the call has come back; reading a pixel waits for it.
            glReadPixels(0, 0, 1, 1, GL_RGBA, GL_UNSIGNED_BYTE)

        keeps, redraws, alone = [], [], []
        keeps_busy, redraws_busy = [], []
        for typed in fold(times, seed=3):
            page.choose_feature(typed.feature)
            for digit in typed.azimuth + typed.inclination:
                page.digit(int(digit))
            if typed.quadrant:
                page.choose_quadrant(typed.quadrant)
            driver.frames(10)
            drawn_whole()
            before, busy, drawn = time.perf_counter(), time.process_time(), net.redraws
            assert page.keep()
            until_drawn()
            assert net.redraws > drawn
            keeps.append((time.perf_counter() - before) * 1000.0)
            keeps_busy.append((time.process_time() - busy) * 1000.0)
            driver.frames(10)
            drawn_whole()
            before, busy = time.perf_counter(), time.process_time()
            net.redraw()
            alone.append((time.perf_counter() - before) * 1000.0)
            until_drawn()
            redraws.append((time.perf_counter() - before) * 1000.0)
            redraws_busy.append((time.process_time() - busy) * 1000.0)
        print(
            json.dumps(
                {
                    "readings": len(net._keys),
                    "keep_ms": statistics.median(keeps),
                    "keep_best_ms": min(keeps),
                    "keep_worst_ms": max(keeps),
                    "keep_cpu_ms": statistics.median(keeps_busy),
                    "redraw_and_frame_ms": statistics.median(redraws),
                    "redraw_and_frame_best_ms": min(redraws),
                    "redraw_and_frame_cpu_ms": statistics.median(redraws_busy),
                    "net_alone_ms": statistics.median(alone),
                }
            )
        )
        driver.stop()


def run_child(*arguments: str) -> dict[str, object]:
    """Run one measurement in a fresh process; its first frame is told from before the process began."""
    began = time.time()
    done = subprocess.run([sys.executable, __file__, *arguments], capture_output=True, text=True, check=False)
    told: dict[str, object] = {}
    for line in done.stdout.splitlines():
        if line.startswith("{"):
            told |= json.loads(line)
    if not told:
        print(done.stderr[-2000:], file=sys.stderr)
    if "first_frame" in told:
        told["first_frame_s"] = float(told.pop("first_frame")) - began
    return told


def main(rounds: int) -> None:
    """Measure everything and print it."""
    load = os.getloadavg()[0]
    print(
        f"{os.cpu_count()} cores, load {load:.1f} before the start; other work on the machine makes all of it slower"
    )
    with tempfile.TemporaryDirectory() as folder:
        path = Path(folder) / "notebook.db"
        make_notebook(path, 40)
        pairs = [(run_child("--empty", "0.5"), run_child("--app", str(path), "0.5")) for _ in range(rounds)]
        idle = [run_child("--empty", str(IDLE_S)), run_child("--app", str(path), str(IDLE_S))]
    for name, unit, limit in (("first_frame_s", "s", 2.0), ("memory_mb", "MB", 1.5)):
        empty, app = (statistics.median(float(pair[i][name]) for pair in pairs) for i in (0, 1))
        ratio = statistics.median(float(pair[1][name]) / float(pair[0][name]) for pair in pairs)
        print(f"{name}: empty {empty:.2f} {unit}, app {app:.2f} {unit}, ratio {ratio:.2f} (limit {limit})")
    print(f"libraries that must not be loaded: {pairs[0][1]['heavy'] or 'none'}")
    shares = [float(one["idle_share"]) for one in idle]
    print(f"idle: {shares[1]:.1%} of a core (limit 2%), an empty window {shares[0]:.1%}")
    keep = run_child("--keep", "500", "12")
    print(
        f"Keep to strip and net on the screen at {keep['readings']} readings: {keep['keep_ms']:.1f} ms, "
        f"best {keep['keep_best_ms']:.1f}, worst {keep['keep_worst_ms']:.1f} ms (limit 50); "
        f"{keep['keep_cpu_ms']:.1f} ms of a core, all threads"
    )
    many = run_child("--keep", "2000", "6")
    print(
        f"net of {many['readings']}: {many['net_alone_ms']:.1f} ms to build, {many['redraw_and_frame_ms']:.1f} ms "
        f"with the frame of the whole window, best {many['redraw_and_frame_best_ms']:.1f} (limit 33); "
        f"{many['redraw_and_frame_cpu_ms']:.1f} ms of a core, all threads; Keep {many['keep_ms']:.1f} ms"
    )


if __name__ == "__main__":
    match sys.argv[1:]:
        case ["--empty", idle_s]:
            child_empty(float(idle_s))
        case ["--app", path, idle_s]:
            child_app(Path(path), float(idle_s))
        case ["--make", path, count]:
            child_make(Path(path), int(count))
        case ["--keep", count, times]:
            child_keep(int(count), int(times))
        case other:
            main(int(other[0]) if other else ROUNDS)
