"""Window tests: the real app in a real window, with a notebook of its own for each test."""

# ruff: noqa: PLC0415 - importing Kivy opens a window, so it is imported inside fixtures and functions.

from __future__ import annotations

import os
import sys
from pathlib import Path

import pytest

sys.path.insert(0, str(Path(__file__).parent))  # driving, mossgarth and geometry stand beside the tests

os.environ.setdefault("KIVY_NO_ARGS", "1")
os.environ.setdefault("KIVY_NO_FILELOG", "1")
os.environ.setdefault("KIVY_LOG_MODE", "PYTHON")  # Kivy leaves stderr and the root logger alone


@pytest.fixture
def clock():
    """A clock of the test's own."""
    from mossgarth import TestClock

    return TestClock()


@pytest.fixture
def open_app(tmp_path, clock):
    """Open the app, on a notebook in use unless `first_time`; every app opened is closed again."""
    from driving import Driver
    from kivy.config import Config

    Config.set("graphics", "maxfps", "0")  # frames follow one another at once
    opened = []

    def opener(size=(600, 960), *, first_time=False, name="notebook.db", **values):
        path = tmp_path / name
        if not first_time and not path.exists():
            _make_notebook(path, clock)
        driver = Driver(path, size=size, clock=clock, **values)
        opened.append(driver)
        return driver

    yield opener
    for driver in opened:
        driver.stop()


@pytest.fixture
def driver(open_app):
    """The app in a portrait tablet's window, on an empty notebook in use."""
    return open_app()


def _make_notebook(path, clock):
    from fieldapp.dispatch import at_once
    from fieldapp.outcrop import open_page

    page = open_page(path, clock=clock, dispatch=at_once)
    page.choose_fold("Mossgarth")
    page.choose_outcrop("MG-14")
    page.close()
