"""The backups by touch: they are listed, say what they hold, and one is gone back to only after it was asked."""

# ruff: noqa: PLC0415 - importing Kivy opens a window, so it is imported inside fixtures and functions.

from __future__ import annotations

import os
from datetime import timedelta

import pytest
from mossgarth import START, fold, type_into


@pytest.fixture
def backed_up(driver, clock):
    """The app on the Hand over leaf; a backup of yesterday holds 6 readings, the notebook 9."""
    from fieldapp.notebook.backups import back_up

    page = driver.app.page
    readings = fold(9, outcrops=1)
    type_into(page, readings[:6], clock)
    backup = back_up(page.hand_over.notebook_path, (START - timedelta(days=1)).date())
    at = (START - timedelta(hours=20)).timestamp()
    os.utime(backup, (at, at))
    type_into(page, readings[6:], clock)
    driver.tap("Hand over", driver.app.outline.ids.leaf_keys)
    driver.frames(5)
    leaf = driver.app.outline.leaf("Hand over")
    press_below(driver, leaf.ids.go_back)
    return driver, backup


def press_below(driver, key):
    """Move a leaf or a sheet up until a key is in sight, and touch it."""
    from kivy.uix.scrollview import ScrollView

    scroll = next(widget for widget in key.walk_reverse() if isinstance(widget, ScrollView))
    scroll.scroll_to(key, animate=False)
    driver.frames(3)
    driver.press(key)
    driver.frames(3)


def test_the_notebook_goes_back_to_a_backup_by_touch(backed_up):
    """Chosen, a backup says what would happen; the second touch does it, and the page says so."""
    driver, backup = backed_up
    page, sheet = driver.app.page, driver.app.outline.sheet
    at = (START - timedelta(hours=20)).astimezone().strftime("%d %b %Y, %H:%M")
    key = sheet.keys[backup.name]
    assert key.text == f"{at}\n6 readings"
    press_below(driver, key)
    words = " ".join(getattr(widget, "text", "") for widget in sheet.walk())
    assert "It holds 6 readings. The notebook now holds 9." in words
    assert "is kept as a backup first" in words
    assert len(page.standing) == 9
    press_below(driver, sheet.go_back)
    assert driver.app.outline.sheet is None
    assert len(page.standing) == 6
    leaf = driver.app.outline.leaf("Hand over")
    assert leaf.kept == "6"
    assert driver.app.outline.notice.text == f"The notebook is as in the backup of {at}."
    assert driver.app.outline.notice.get_root_window() is not None


def test_what_was_there_before_is_added_again_by_touch(backed_up):
    """How the notebook was is in the list afterwards, and adding it brings the readings back."""
    driver, backup = backed_up
    page = driver.app.page
    press_below(driver, driver.app.outline.sheet.keys[backup.name])
    press_below(driver, driver.app.outline.sheet.go_back)
    leaf = driver.app.outline.leaf("Hand over")
    press_below(driver, leaf.ids.go_back)
    sheet = driver.app.outline.sheet
    before = next(key for key in sheet.keys.values() if key.text.endswith("before going back"))
    assert "9 readings" in before.text
    press_below(driver, before)
    press_below(driver, sheet.add)
    assert len(page.standing) == 9
    assert driver.app.outline.notice.text.startswith("3 revisions added from the backup of ")


def test_choosing_a_backup_alone_changes_nothing(backed_up):
    """The list can be looked at and left; neither choosing nor the same touch arriving twice goes back."""
    driver, backup = backed_up
    page, sheet = driver.app.page, driver.app.outline.sheet
    key = sheet.keys[backup.name]
    press_below(driver, key)
    sheet.go_back.last_touch = key.last_touch
    sheet.go_back.dispatch("on_release")
    assert driver.app.outline.sheet is sheet
    assert len(page.standing) == 9
    driver.tap("All backups")
    assert sheet.keys[backup.name].get_root_window() is not None
    sheet.close()
    driver.frames(2)
    assert len(page.standing) == 9


def test_a_backup_that_cannot_be_read_cannot_be_chosen(backed_up):
    """It stands in the list as what it is, and a touch on it does nothing."""
    driver, backup = backed_up
    driver.app.outline.sheet.close()
    backup.write_bytes(b"")
    at = (START - timedelta(hours=20)).timestamp()
    os.utime(backup, (at, at))
    press_below(driver, driver.app.outline.leaf("Hand over").ids.go_back)
    sheet = driver.app.outline.sheet
    key = sheet.keys[backup.name]
    assert key.text.endswith("cannot be read")
    driver.press(key)
    assert sheet.title == "Go back to a backup"


def test_without_a_backup_there_is_none_to_go_back_to(open_app):
    """On a notebook that was never backed up the key does nothing."""
    driver = open_app()
    driver.tap("Hand over", driver.app.outline.ids.leaf_keys)
    driver.frames(5)
    leaf = driver.app.outline.leaf("Hand over")
    assert leaf.backup == "never"
    press_below(driver, leaf.ids.go_back)
    assert driver.app.outline.sheet is None


def test_a_notebook_that_may_only_be_read_says_so_and_takes_no_touch(open_app, clock, tmp_path, monkeypatch):
    """Keys that write to the notebook are off and the leaf says why; the CSV can still be written."""
    from fieldapp.notebook import opening

    driver = open_app()
    type_into(driver.app.page, fold(6, outcrops=1), clock)
    driver.stop()
    monkeypatch.setattr(opening, "_connected", lambda path: (opening._for_reading(path), True))
    driver = open_app()
    driver.tap("Hand over", driver.app.outline.ids.leaf_keys)
    driver.frames(5)
    leaf = driver.app.outline.leaf("Hand over")
    words = " ".join(getattr(w, "text", "") for w in leaf.walk())
    assert "may only be read here" in words
    keys = [leaf.ids[name] for name in ("take_in", "back_up", "go_back")]
    assert [key.disabled for key in keys] == [True] * 3
    before = sorted(tmp_path.rglob("*"))
    for key in keys:
        press_below(driver, key)
    assert driver.app.outline.sheet is None
    assert leaf.folder is None
    assert sorted(tmp_path.rglob("*")) == before
    press_below(driver, leaf.ids.write)
    assert len(list(leaf.target_folder.glob("*.csv"))) == 1
