"""Make pictures of every leaf of the page: ``python3 buildspec/pictures.py [FOLDER]``, by default out/pictures.

The pictures show the invented Mossgarth folds on a tablet, upright and on its side, on two phones, at dusk, and
with larger type. Each screen is a process of its own, because Kivy reads density and font scale once.
"""

# ruff: noqa: PLC0415 - Kivy is imported in the process of one screen only.

from __future__ import annotations

import contextlib
import os
import subprocess
import sys
import tempfile
from dataclasses import dataclass, replace
from pathlib import Path
from typing import TYPE_CHECKING

import setup_env

if TYPE_CHECKING:
    from kivy.uix.widget import Widget

NUMBERS = "04530"  # what is being typed on the pictures of the Log leaf


@dataclass(frozen=True)
class Screen:
    """A screen: its name, size in dp, font scale and look."""

    name: str
    width: int
    height: int
    font_scale: float = 1.0
    look: str = "light"


SCREENS = (
    Screen("tablet-portrait", 800, 1280),
    Screen("tablet-landscape", 1280, 800),
    Screen("small-tablet-landscape", 960, 600),
    Screen("small-phone", 360, 640),
    Screen("phone", 412, 915),
    Screen("phone-landscape", 740, 360),
    Screen("phone-dark", 412, 915, look="dark"),
    Screen("tablet-landscape-dark", 1280, 800, look="dark"),
    Screen("small-phone-larger-type", 360, 640, font_scale=1.3),
    Screen("tablet-portrait-larger-type", 800, 1280, font_scale=1.3),
)


def take(screen: Screen, folder: Path) -> None:  # noqa: PLR0915 - one walk through all leaves
    """Open the demo on one screen and save a picture of each leaf; runs in the process of that screen."""
    sys.path.insert(0, str(setup_env.ROOT))
    os.environ["KIVY_NO_ARGS"] = "1"  # the arguments are ours
    from kivy.config import Config

    Config.set("graphics", "width", str(screen.width))
    Config.set("graphics", "height", str(screen.height))
    Config.set("graphics", "maxfps", "0")

    from kivy.base import EventLoop, runTouchApp
    from kivy.core.image import Image
    from kivy.core.window import Window
    from kivy.graphics.opengl import GL_RGBA, GL_UNSIGNED_BYTE, glReadPixels
    from kivy.graphics.texture import Texture
    from kivy.uix.scrollview import ScrollView

    from fieldapp.app import HingewiseApp, demo_path_beside
    from fieldapp.settings import Appearance

    with tempfile.TemporaryDirectory() as home:
        app = HingewiseApp(demo_path_beside(Path(home) / "notebook.db"), demo=True)
        app._run_prepare()  # noqa: SLF001 - Kivy's own way to run an app frame by frame
        runTouchApp(embedded=True)

        def frames(count: int = 12) -> None:
            for _ in range(count):
                EventLoop.idle()
                Window.mainloop()

        def save(name: str) -> None:
            frames()
            Window.dispatch("on_draw")
            width, height = Window.size
            pixels = glReadPixels(0, 0, width, height, GL_RGBA, GL_UNSIGNED_BYTE)
            texture = Texture.create(size=(width, height), colorfmt="rgba")
            texture.blit_buffer(bytes(pixels), colorfmt="rgba", bufferfmt="ubyte")
            Image(texture).save(str(folder / f"{screen.name}-{name}.png"), flipped=True)
            print(folder / f"{screen.name}-{name}.png")

        def scroll_down(leaf: Widget) -> None:
            for widget in leaf.walk():
                if isinstance(widget, ScrollView):
                    widget.scroll_y = 0.0

        outline, page = app.outline, app.page
        page.change_settings(replace(page.settings, appearance=Appearance(screen.look)))
        page.dismiss_message()
        frames(60)
        for digit in NUMBERS:
            page.digit(int(digit))
        save("log-typed")
        page.choose_quadrant("NW")
        save("log-check-asks")
        page.clear()
        outline.show("Check")
        save("check")
        scroll_down(outline.leaf("Check"))
        save("check-below")
        page.name_reading(page.standing[3].reading_id)
        save("check-reading-named")
        page.name_nothing()
        outline.leaf("Check").show_picture("plan")
        save("check-plan")
        outline.show("Fault")
        save("fault")
        outline.show("Hand over")
        save("hand-over")
        outline.leaf("Hand over").show_backups()
        save("sheet-backups")
        next(iter(outline.sheet.keys.values())).dispatch("on_release")
        save("sheet-backups-one-chosen")
        app.close_sheets()
        outline.show("Log")
        for sheet in ("settings", "place", "readings", "safety"):
            app.open_sheet(sheet)
            save(f"sheet-{sheet}")
            app.close_sheets()
        app.dispatch("on_stop")


def main(arguments: list[str]) -> int:
    """Take the pictures of every screen, one process each."""
    if arguments[:1] == ["--screen"]:
        take(next(screen for screen in SCREENS if screen.name == arguments[1]), Path(arguments[2]))
        return 0
    setup_env.require_python()
    folder = Path(arguments[0] if arguments else "out/pictures").resolve()
    folder.mkdir(parents=True, exist_ok=True)
    with contextlib.ExitStack() as stack:
        try:
            missing = setup_env.ensure_system(setup_env.WINDOW_PACKAGES + setup_env.DISPLAY_PACKAGES)
            if missing:
                setup_env.say(setup_env.describe_missing(missing))
            python = setup_env.ensure_environment(setup_env.run_extras())
            display = stack.enter_context(setup_env.virtual_display())
        except setup_env.SetupError as error:
            print(error, file=sys.stderr)
            return 2
        kivy_home = Path(stack.enter_context(tempfile.TemporaryDirectory(prefix="hingewise-pictures-")))
        for screen in SCREENS:
            environment = setup_env.kivy_environment(kivy_home, display)
            environment |= {"KIVY_METRICS_DENSITY": "1", "KIVY_METRICS_FONTSCALE": str(screen.font_scale)}
            environment |= {"KIVY_LOG_MODE": "PYTHON", "KIVY_CLIPBOARD": "dummy"}
            command = [str(python), os.fspath(Path(__file__).resolve()), "--screen", screen.name, str(folder)]
            done = subprocess.run(command, cwd=setup_env.ROOT, env=environment, check=False)
            if done.returncode:
                return done.returncode
    return 0


if __name__ == "__main__":
    sys.exit(main(sys.argv[1:]))
