"""Nothing is cut off, too small or out of place, at every size, density and font scale, on every leaf and sheet."""

# ruff: noqa: PLC0415 - importing Kivy opens a window, so it is imported inside fixtures and functions.

from __future__ import annotations

import json
import os
import subprocess
import sys
from pathlib import Path

import pytest

HERE = Path(__file__).parent
# Width and height in dp, density, font scale.
SCREENS = [
    (360, 640, 1, 1.3),
    (360, 640, 2, 1.0),
    (360, 640, 3, 1.3),
    (412, 915, 1, 1.0),
    (640, 360, 1, 1.3),
    (800, 1280, 1, 1.3),
    (1280, 800, 1, 1.0),
    (960, 600, 1, 1.3),
]


@pytest.mark.parametrize(("width", "height", "density", "font_scale"), SCREENS)
def test_nothing_is_cut_off_or_out_of_place(width, height, density, font_scale):
    """Every label's texture fits its widget, every widget its place, and no words on a picture collide."""
    environment = os.environ | {
        "KIVY_METRICS_DENSITY": str(density),
        "KIVY_METRICS_FONTSCALE": str(font_scale),
    }
    done = subprocess.run(
        [sys.executable, str(HERE / "probe.py"), str(width), str(height)],
        env=environment,
        capture_output=True,
        text=True,
        timeout=240,
        check=False,
    )
    assert done.returncode == 0, done.stderr[-3000:]
    assert json.loads(done.stdout.splitlines()[-1]) == {}


def test_the_measuring_finds_what_is_cut_off(driver):
    """A label that is too small for its words is found, so that the test above can fail."""
    from geometry import faults
    from kivy.uix.label import Label

    label = Label(text="far too long for its widget", size_hint=(None, None), size=(30, 10), pos=(50, 50))
    driver.app.outline.add_widget(label)
    driver.frames(3)
    assert any("is cut off" in text for text in faults(driver.app.outline))
