from __future__ import annotations

import os
import subprocess
import sys
from dataclasses import replace
from datetime import timedelta
from pathlib import Path

import pytest

from analysis.files.csvfile import read_readings, write_readings
from analysis.orient.features import Feature
from fieldapp.states import Change, MessageKind, Offer
from fieldapp.wording import backup_text

BEDDING, CLEAVAGE, LINE, _ = Feature
ROOT = Path(__file__).parents[2]


@pytest.fixture
def two(page_at, tmp_path):
    """Two tablets."""
    return page_at(tmp_path / "a" / "field.notebook"), page_at(tmp_path / "b" / "field.notebook")


def revisions(page):
    return set(page._notebook.revisions())


def test_a_hand_over_carries_what_is_new_and_everything_when_asked(page, kept, tmp_path):
    """Since last time or all: the file holds exactly these revisions, struck-out ones as such."""
    first = kept(page, BEDDING, "045/30")
    assert page.hand_over.since_last == 1
    assert page.write_hand_over(tmp_path / "1.csv")
    assert page.hand_over.since_last == 0
    assert page.hand_over.last_hand_over is not None
    page.strike_out(first)
    kept(page, LINE, "050/10")
    assert page.write_hand_over(tmp_path / "2.csv")
    assert page.write_hand_over(tmp_path / "all.csv", everything=True)
    one, two, every = (set(read_readings(tmp_path / f"{n}.csv")[0]) for n in ("1", "2", "all"))
    assert (len(one), len(two)) == (1, 2)
    assert every == one | two == revisions(page)


def test_a_hand_over_that_cannot_be_written_is_said_and_stays_due(page, kept, tmp_path):
    """A folder that is not there: plain words, and the readings are still due."""
    kept(page, BEDDING, "045/30")
    assert not page.write_hand_over(tmp_path / "nowhere" / "1.csv")
    assert page.message.kind is MessageKind.TROUBLE
    assert page.hand_over.since_last == 1


def test_a_preview_tells_and_writes_nothing(two, kept, tmp_path):
    """Adds, changes and clashes are listed before anything is written."""
    mine, theirs = two
    shared = kept(mine, BEDDING, "045/30")
    clashing = kept(mine, BEDDING, "050/30")
    mine.write_hand_over(tmp_path / "mine.csv")
    theirs.take_in(theirs.preview_take_in(tmp_path / "mine.csv"))
    for page, keys in ((mine, "1"), (theirs, "2")):
        page.choose_fold(page._all[shared].fold)
        page.mend(clashing)
        page.back()
        page.digit(int(keys))
        assert page.keep()
    theirs.mend(shared)
    theirs.back()
    theirs.digit(5)
    theirs.keep()
    added = kept(theirs, CLEAVAGE, "040/80")
    theirs.write_hand_over(tmp_path / "theirs.csv", everything=True)
    before = revisions(mine)
    preview = mine.preview_take_in(tmp_path / "theirs.csv")
    assert [r.reading_id for r in preview.adds] == [added]
    assert [r.reading_id for r in preview.changes] == [shared]
    assert [r.reading_id for r in preview.clashes] == [clashing]
    assert preview.changes[0].text == "045/35 SE"
    assert preview.known == 2
    assert preview.problems == ()
    assert revisions(mine) == before


def test_taking_in_is_undone_as_a_whole(two, kept, tmp_path):
    """After undoing, readings, strip and lists are as before; the file can be taken in again."""
    mine, theirs = two
    kept(mine, BEDDING, "045/30")
    for _ in range(3):
        kept(theirs, CLEAVAGE, "040/80")
        kept(theirs, BEDDING, "045/30")
    theirs.write_hand_over(tmp_path / "theirs.csv")
    before = (revisions(mine), mine.strip, mine.standing)
    assert mine.take_in(mine.preview_take_in(tmp_path / "theirs.csv"))
    assert mine.message.offer is Offer.UNDO
    assert mine.tabs[1].in_fold == 3
    assert mine.hand_over.last_take_in == "6 readings from theirs.csv"
    assert mine.accept_offer()
    assert (revisions(mine), mine.strip, mine.standing) == before
    assert mine.hand_over.last_take_in == ""
    preview = mine.preview_take_in(tmp_path / "theirs.csv")
    assert len(preview.adds) == 6
    assert mine.take_in(preview)
    assert mine.undo_take_in()
    assert not mine.undo_take_in()


def test_taking_the_same_file_in_twice_adds_nothing(two, kept, tmp_path):
    """A file that is known already is said to be known."""
    mine, theirs = two
    kept(theirs, BEDDING, "045/30")
    theirs.write_hand_over(tmp_path / "theirs.csv")
    mine.take_in(mine.preview_take_in(tmp_path / "theirs.csv"))
    again = mine.preview_take_in(tmp_path / "theirs.csv")
    assert (again.adds, again.changes, again.clashes, again.known) == ((), (), (), 1)


def test_files_passed_round_make_all_tablets_equal(two, kept, tmp_path):
    """Each takes the other's in: both then hold the same revisions and the same readings stand."""
    for page, text in zip(two, ("045/30", "050/40"), strict=True):
        page.strike_out(kept(page, BEDDING, text))
        kept(page, BEDDING, text)
    for number, page in enumerate(two):
        page.write_hand_over(tmp_path / f"{number}.csv", everything=True)
    for number, page in enumerate(two):
        assert page.take_in(page.preview_take_in(tmp_path / f"{1 - number}.csv"))
    assert revisions(two[0]) == revisions(two[1])
    assert {r.reading_id: r for r in two[0].standing} == {r.reading_id: r for r in two[1].standing}


def test_bad_rows_are_listed_and_the_good_ones_offered(page, tmp_path):
    """A row that cannot be read is named with its line; the others can be taken in."""
    path = tmp_path / "b.csv"
    path.write_text("feature,strike_deg,dip_deg\nbedding,45,30\nbedding,45,300\n")
    preview = page.preview_take_in(path)
    assert len(preview.adds) == 1
    assert len(preview.problems) == 1
    assert "line 3" in preview.problems[0]
    assert page.take_in(preview)
    assert page._notebook.count() == 1


def test_all_bad_rows_are_counted(page, tmp_path):
    """However many rows cannot be read, the preview says how many, and names the first of them."""
    path = tmp_path / "b.csv"
    path.write_text("feature,strike_deg,dip_deg\nbedding,45,30\n" + "bedding,45,300\n" * 2400)
    preview = page.preview_take_in(path)
    assert preview.unread == 2400
    assert 0 < len(preview.problems) < 2400


def test_a_file_that_is_no_csv_of_readings_is_said(page, tmp_path):
    """Anything else is refused in words and nothing is written."""
    path = tmp_path / "picture.csv"
    path.write_bytes(b"\x89PNG\r\n" + bytes(100))
    assert page.preview_take_in(path) is None
    assert page.message.kind is MessageKind.TROUBLE
    assert page.preview_take_in(tmp_path / "nothing.csv") is None


def test_a_preview_of_another_file_is_not_taken_in(page, tmp_path, make_reading):
    """Only what was looked at last can be taken in."""
    for name in ("a", "b"):
        write_readings(tmp_path / f"{name}.csv", [make_reading()])
    first = page.preview_take_in(tmp_path / "a.csv")
    page.preview_take_in(tmp_path / "b.csv")
    assert not page.take_in(first)
    assert page._notebook.count() == 0


def test_restoring_a_backup_and_adding_it_back(page, kept):
    """The page shows the notebook of the backup; what was there before is a backup of its own."""
    kept(page, BEDDING, "045/30")
    page.back_up()
    backup = page.hand_over.backups[0]
    kept(page, BEDDING, "050/30")
    page.change_settings(replace(page.settings, margin_deg=3.0))
    assert page.restore(backup)
    assert [r.text for r in page.standing] == ["045/30 SE"]
    saved = next(b for b in page.hand_over.backups if b.kept_before)
    assert page.add_backup(saved)
    assert [r.text for r in page.standing] == ["050/30 SE", "045/30 SE"]
    assert page.accept_offer()
    assert [r.text for r in page.standing] == ["045/30 SE"]
    assert page.add_backup(saved)
    assert page.add_backup(saved)
    assert page.message.text.startswith("0 revisions added")
    assert page.message.offer is Offer.NONE
    assert page.undo()
    assert [r.text for r in page.standing] == ["045/30 SE"]


def test_backups_are_told_newest_first_with_what_they_hold(page, clock, kept):
    """The page lists each backup with its hour and its readings, and says afterwards which one it went back to."""
    for hour in (8, 17):
        kept(page, BEDDING, "045/30")
        page.back_up()
        newest = page.hand_over.backups[0].path
        at = clock.now.replace(hour=hour, minute=5, second=0)
        os.utime(newest, (at.timestamp(), at.timestamp()))
        clock.later(days=1)
    page._tell(Change.HAND_OVER)
    late, early = page.hand_over.backups
    assert late.made_at - early.made_at == timedelta(days=1, hours=9)
    assert [page.readings_in_backup(b) for b in (late, early)] == [2, 1]
    assert page.restore(early)
    said = early.made_at.astimezone().strftime("%d %b %Y, %H:%M")
    assert page.message.text == f"The notebook is as in the backup of {said}."
    first = page.hand_over.backups[0]
    assert first.kept_before
    assert page.readings_in_backup(first) == 2


def test_a_backup_copied_to_another_day_tells_no_hour(page, kept):
    """The words are the day that its name says, whatever the clock of this device."""
    kept(page, BEDDING, "045/30")
    backup = page.hand_over.backups[0]
    os.utime(backup.path, (0, 0))
    page._tell(Change.HAND_OVER)
    assert backup_text(page.hand_over.backups[0]) == "01 May 2026"


def test_nothing_heavy_is_loaded_until_a_hand_over(tmp_path):
    """Opening the page, entering readings and checking load no Kivy and no pandas; handing over loads pandas."""
    code = f"""
import sys
from datetime import datetime, UTC
from pathlib import Path
from fieldapp.dispatch import at_once
from fieldapp.outcrop import open_page
page = open_page(Path({str(tmp_path)!r}) / "n.notebook", clock=lambda: datetime.now(UTC), dispatch=at_once)
for digit in "04530":
    page.digit(int(digit))
page.choose_quadrant("SE")
assert page.keep()
page.strip, page.net, page.funnel, page.plan, page.hand_over
heavy = {{"kivy", "pandas", "matplotlib", "scipy", "plyer", "pyogrio"}}
assert not heavy & set(sys.modules), heavy & set(sys.modules)
assert page.write_hand_over(Path({str(tmp_path)!r}) / "x.csv")
assert "pandas" in sys.modules
"""
    done = subprocess.run(
        [sys.executable, "-c", code],
        capture_output=True,
        text=True,
        check=False,
        env={**os.environ, "PYTHONPATH": str(ROOT)},
        timeout=60,
    )
    assert done.returncode == 0, done.stderr


def test_what_a_colleague_read_last_does_not_move_this_tablet(page, page_at, kept, tmp_path):
    """After readings from another outcrop were taken in, the page opens again where it stood."""
    theirs = page_at(tmp_path / "theirs.notebook")
    theirs.choose_fold("Another")
    theirs.choose_outcrop("AN-7")
    kept(theirs, BEDDING, "200/40")
    assert theirs.write_hand_over(tmp_path / "theirs.csv")
    kept(page, BEDDING, "100/30")
    before = (page.place.fold, page.place.outcrop)
    assert page.take_in(page.preview_take_in(tmp_path / "theirs.csv"))
    again = page_at(page.hand_over.notebook_path)
    assert (again.place.fold, again.place.outcrop) == before


def test_a_backup_brings_back_where_the_page_stood(page, page_at, kept):
    """Restored, the page stands where the backup says, now and after it is opened again."""
    page.choose_outcrop("MG-3")
    kept(page, BEDDING, "100/30")
    page.back_up()
    page.choose_outcrop("MG-9")
    assert page.restore(page.hand_over.backups[0])
    assert page.place.outcrop == "MG-3"
    assert page_at(page.hand_over.notebook_path).place.outcrop == "MG-3"


def test_a_mend_whose_reading_is_taken_back_becomes_a_new_reading(page, page_at, kept, tmp_path):
    """Digits typed over a colleague's reading outlive the undoing of its take-in, also over a restart."""
    theirs = page_at(tmp_path / "theirs.notebook")
    kept(theirs, BEDDING, "200/40")
    assert theirs.write_hand_over(tmp_path / "theirs.csv")
    assert page.take_in(page.preview_take_in(tmp_path / "theirs.csv"))
    page.mend(page.recent[0].reading_id)
    page.back()
    page.digit(5)
    assert page.undo_take_in()
    again = page_at(page.hand_over.notebook_path)
    for one in (page, again):
        assert (one.entry.azimuth_text, one.entry.inclination_text, one.entry.mending) == ("200", "45", "")
