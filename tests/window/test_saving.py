"""At a desk: the CSV is written into any folder, under any name, and over no file."""

# ruff: noqa: PLC0415 - importing Kivy opens a window, so it is imported inside functions.

from __future__ import annotations

import pytest
from mossgarth import fold, type_into


@pytest.fixture
def at_a_desk(driver, clock, tmp_path, monkeypatch):
    """The Hand over leaf with nine readings to write, and a home of our own."""
    home = tmp_path / "home"
    (home / "campaign").mkdir(parents=True)
    (home / ".hidden").mkdir()
    monkeypatch.setenv("HOME", str(home))
    type_into(driver.app.page, fold(9, outcrops=1), clock)
    driver.app.outline.show("Hand over")
    driver.frames(5)
    leaf = driver.app.outline.leaf("Hand over")
    driver.press(leaf.ids.elsewhere)
    driver.frames(3)
    return driver, home


def test_a_folder_and_a_name_are_chosen(at_a_desk):
    """From home into a folder by touch; a name without its ending gets it; the next time begins in that folder."""
    driver, home = at_a_desk
    sheet = driver.app.outline.sheet
    assert sheet.fields.folder == str(home)
    driver.tap("campaign/")
    driver.frames(3)
    sheet.fields.ids.name.text = "monday"
    driver.tap("Write the new ones here")
    driver.frames(3)
    assert driver.app.outline.sheet is None
    written = home / "campaign" / "monday.csv"
    assert len(written.read_text(encoding="utf-8").splitlines()) == 10
    assert driver.app.page.message.text == "9 revisions written to monday.csv."
    driver.press(driver.app.outline.leaf("Hand over").ids.elsewhere)
    driver.frames(3)
    assert driver.app.outline.sheet.fields.folder == str(home / "campaign")
    driver.tap("Up one folder")
    driver.frames(3)
    assert driver.app.outline.sheet.fields.folder == str(home)
    assert not any(key.text == ".hidden/" for key in driver.app.outline.sheet.fields.ids.folders.children)
    driver.tap("Write everything here")
    driver.frames(3)
    assert len(next(home.glob("readings-*.csv")).read_text(encoding="utf-8").splitlines()) == 10


def test_no_file_is_written_over_and_trouble_is_told_on_the_sheet(at_a_desk):
    """A name that is taken, one that is none, and a folder that cannot be written: said, and nothing is lost."""
    driver, home = at_a_desk
    sheet = driver.app.outline.sheet
    (home / "monday.csv").write_text("mine", encoding="utf-8")
    for name, said in (
        ("monday.csv", "There is a file of that name"),
        ("  ", "Give the file a name"),
        ("../tuesday", "Give the file a name"),
        ("x" * 300, "cannot"),
    ):
        sheet.fields.ids.name.text = name
        driver.tap("Write the new ones here")
        driver.frames(3)
        assert driver.app.outline.sheet is sheet
        assert said in sheet.fields.fault
    assert (home / "monday.csv").read_text(encoding="utf-8") == "mine"
    assert driver.app.page.hand_over.since_last == 9


def test_a_tablet_writes_into_its_own_folder_only(driver, monkeypatch):
    """Where the system keeps files apart there is no such key."""
    from fieldapp.leaves.handover import HandOverLeaf

    monkeypatch.setattr("fieldapp.leaves.handover.at_a_desk", lambda: False)
    leaf = HandOverLeaf(form=driver.app.form)
    assert leaf.ids.elsewhere.disabled
    assert leaf.ids.elsewhere.height == 0
