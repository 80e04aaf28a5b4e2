"""App, CSV, spreadsheet, app: taking in what a spreadsheet made of a file handed over."""

from __future__ import annotations

import pytest

from tests.analysis.files.spreadsheet.invented import hand_over, readings
from tests.analysis.files.spreadsheet.record import HERE, ORIGINAL, WAYS

REFUSED = {"one-column", "utf-16"}
IN_PART = {"windows-1252", "through-ods", "reordered"}  # see tests/analysis/files/test_spreadsheet.py


@pytest.fixture
def mossgarth(page):
    """A page on the notebook that the recorded files were handed over from."""
    page._notebook.keep_all(readings())
    return page


def test_the_app_hands_over_the_file_recorded(tmp_path):
    """The file that the spreadsheet opened is, byte for byte, what the app writes."""
    hand_over(tmp_path / "new.csv")
    assert (tmp_path / "new.csv").read_bytes() == ORIGINAL.read_bytes()


@pytest.mark.parametrize("name", sorted(WAYS.keys() - REFUSED - IN_PART))
def test_the_notebook_it_came_from_knows_it_all(mossgarth, name):
    """Nothing would be added, nothing changed, nothing clashes, and no row is refused."""
    preview = mossgarth.preview_take_in(HERE / f"{name}.csv")
    assert (preview.adds, preview.changes, preview.clashes, preview.problems) == ((), (), (), ())
    assert preview.known == len(readings())


@pytest.mark.parametrize("name", sorted(WAYS.keys() - REFUSED - IN_PART))
def test_an_empty_notebook_gets_what_was_handed_over(page, name):
    """Another tablet takes every revision in as it was, and once."""
    assert page.take_in(page.preview_take_in(HERE / f"{name}.csv"))
    assert page._notebook.count() == len(readings())
    assert set(page._notebook.revisions()) == set(readings())


@pytest.mark.parametrize("name", ["through-ods", "reordered"])
def test_a_note_that_lost_its_tabs_clashes(mossgarth, name):
    """What the spreadsheet lost for good is shown as a clash before anything is taken in, and nothing else."""
    preview = mossgarth.preview_take_in(HERE / f"{name}.csv")
    assert (preview.adds, preview.changes, preview.problems) == ((), (), ())
    assert len(preview.clashes) == 1
    assert preview.known == len(readings()) - 1


def test_rows_in_another_encoding_are_listed(mossgarth):
    """The rows that can be read are known, the others are problems, one a row."""
    preview = mossgarth.preview_take_in(HERE / "windows-1252.csv")
    assert (preview.adds, preview.changes, preview.clashes) == ((), (), ())
    assert preview.known > 0
    assert preview.known + len(preview.problems) == len(readings())


@pytest.mark.parametrize("name", sorted(REFUSED))
def test_a_file_that_is_refused_whole_leaves_the_notebook_alone(mossgarth, name):
    """The page says why, and there is nothing to take in."""
    assert mossgarth.preview_take_in(HERE / f"{name}.csv") is None
    assert mossgarth.message.text
    assert set(mossgarth._notebook.revisions()) == set(readings())
