"""Whether the device is set dark, and what it lays over the window; a fake Android stands in."""

from __future__ import annotations

import sys
import types

import pytest

from fieldapp.devices.insets import NO_INSETS, Insets, read_insets
from fieldapp.devices.night import is_night

# android.content.res.Configuration, as its reference page gives them (from memory): the mask, and its three values.
MASK, UNDEFINED, NO, YES = 0x30, 0x00, 0x10, 0x20
PORTRAIT_PHONE = 0x01  # UI_MODE_TYPE_NORMAL: what else stands in uiMode


@pytest.fixture
def android(monkeypatch):
    """A device whose uiMode a test sets; its window has a bar above and one below."""
    told = types.SimpleNamespace(uiMode=PORTRAIT_PHONE | NO)

    class Activity:
        def __getattr__(self, name):
            inset = types.SimpleNamespace(left=0, top=60, right=0, bottom=40)
            answers = {"getConfiguration": told, "getInsets": inset}
            return lambda *_values: answers.get(name, self)

    classes = {
        "android.content.res.Configuration": types.SimpleNamespace(
            UI_MODE_NIGHT_MASK=MASK, UI_MODE_NIGHT_NO=NO, UI_MODE_NIGHT_YES=YES
        ),
        "android.os.Build$VERSION": types.SimpleNamespace(SDK_INT=35),
        "android.view.WindowInsets$Type": types.SimpleNamespace(
            systemBars=lambda: 1, displayCutout=lambda: 2
        ),
    }
    told.classes = classes
    monkeypatch.setitem(sys.modules, "android", types.SimpleNamespace(mActivity=Activity()))
    monkeypatch.setitem(sys.modules, "jnius", types.SimpleNamespace(autoclass=classes.__getitem__))
    monkeypatch.setenv("ANDROID_ARGUMENT", "app")
    return told


@pytest.mark.parametrize(("kind", "night"), [(YES, True), (NO, False), (UNDEFINED, None)])
def test_android_says_whether_it_is_dark(android, kind, night):
    """The part of uiMode that is about the night is read, whatever else stands in it; unknown is no answer."""
    android.uiMode = PORTRAIT_PHONE | kind
    assert is_night() is night


def test_a_bridge_that_fails_is_no_answer(android):
    """An error of the bridge to Java leaves the page light and clear of nothing."""
    android.classes.clear()
    assert is_night() is None
    assert read_insets() == NO_INSETS


def test_a_desk_is_not_asked():
    """Elsewhere than on Android nothing is asked and nothing is said."""
    assert is_night() is None
    assert read_insets() == NO_INSETS


@pytest.mark.parametrize(("api", "insets"), [(34, NO_INSETS), (35, Insets(0, 60, 0, 40))])
def test_bars_are_kept_clear_of_from_android_15_on(android, api, insets):
    """Before Android 15 (API 35) the system keeps the window clear by itself."""
    android.classes["android.os.Build$VERSION"].SDK_INT = api
    assert read_insets() == insets
