"""A file handed over, opened and saved by a real spreadsheet, is the same readings; see spreadsheet/README.md."""

from __future__ import annotations

from typing import TYPE_CHECKING

import pytest

from analysis.errors import CsvError
from analysis.files.csvfile import read_readings
from analysis.files.join import join
from tests.analysis.files.spreadsheet.invented import NOTES, readings
from tests.analysis.files.spreadsheet.record import HERE, MARK, ORIGINAL, WAYS, save_again

if TYPE_CHECKING:
    from pathlib import Path

REFUSED = {"one-column", "utf-16"}
UNREADABLE_ROWS = {"windows-1252"}
WITHOUT_TABS = {"through-ods", "reordered"}  # both through an .ods file, in which version 7.4 loses tabs
SAME = sorted(WAYS.keys() - REFUSED - UNREADABLE_ROWS - WITHOUT_TABS)
LIVE = ["default", "dates-found", "german", "through-xlsx", "reordered"]


@pytest.fixture(scope="module")
def handed_over():
    return frozenset(readings())


@pytest.fixture(scope="module")
def profiles(tmp_path_factory):
    return tmp_path_factory.mktemp("profiles")


def recorded(name: str) -> Path:
    return HERE / f"{name}.csv"


def assert_only_tabs_were_lost(path, handed_over):
    """The note with tabs, and no other reading, has become another content of its revision."""
    found, faults = read_readings(path)
    assert faults == ()
    lost = [reading for reading in handed_over if "\t" in reading.note]
    assert len(lost) == 1
    assert handed_over - set(found) == set(lost)
    (conflict,) = join(handed_over, found).conflicts
    assert {reading.note for reading in conflict.contents} == {lost[0].note, "'tab before andinside"}


def test_each_way_is_recorded_and_no_other():
    """The folder holds the file handed over and one for each way, each written by the spreadsheet's hand."""
    files = {path.name for path in HERE.glob("*.csv")}
    assert files == {"handed-over.csv", *(f"{name}.csv" for name in WAYS)}
    original = ORIGINAL.read_bytes()
    assert all(recorded(name).read_bytes() != original for name in WAYS)


def test_the_file_handed_over_holds_all_that_hurts(handed_over):
    """What the app wrote is what was in the notebook, and the notebook holds every awkward note."""
    found, faults = read_readings(ORIGINAL)
    assert (frozenset(found), faults) == (handed_over, ())
    assert len(found) == len(handed_over)
    assert {reading.note for reading in handed_over} >= set(NOTES)
    assert {reading.revision for reading in handed_over} == {1, 2, 3}
    assert any(reading.struck_out for reading in handed_over)


def test_the_recorded_files_show_the_habits():
    """Each habit that the recorded files stand for can be seen in one of them."""
    german = recorded("german").read_text(encoding="utf-8")
    assert german.startswith("reading_id;revision;")
    assert ";-1,05;" in german
    assert ";-3,200001;" in german
    assert ";WAHR;" in recorded("german-dates-found").read_text(encoding="utf-8")
    assert ";VRAI;" in recorded("french-dates-found").read_text(encoding="utf-8")
    marked = recorded("german-marked").read_bytes()
    assert marked.startswith(MARK)
    assert marked.count(b"\r\n") == marked.count(b"\n")
    assert recorded("tabs").read_bytes().startswith(b"reading_id\trevision\t")
    assert b',"-1.05",' in recorded("numbers-as-text").read_bytes()
    assert b',"-1.0500",' in recorded("all-quoted").read_bytes()
    names = recorded("reordered").read_text(encoding="utf-8").splitlines()[0].split(",")
    assert (names[0], names[-2:]) == ("", ["reading_id", "seen"])


@pytest.mark.parametrize("name", SAME)
def test_nothing_is_changed_and_nothing_added(name, handed_over):
    """Every revision comes back equal in all of its content, once, and no row is refused."""
    found, faults = read_readings(recorded(name))
    assert faults == ()
    assert len(found) == len(handed_over)
    assert frozenset(found) == handed_over
    joined = join(handed_over, found)
    assert len(joined) == len(handed_over)
    assert joined.conflicts == ()


@pytest.mark.parametrize("name", sorted(WITHOUT_TABS))
def test_tabs_that_the_spreadsheet_lost_are_a_conflict(name, handed_over):
    """Where it dropped the tabs of a note both contents are kept and listed, and all else is the same."""
    assert_only_tabs_were_lost(recorded(name), handed_over)


def test_rows_in_another_encoding_are_named_one_by_one(handed_over):
    """Of a file in Windows-1252 the rows of plain letters are the same, and each other one is one fault."""
    found, faults = read_readings(recorded("windows-1252"))
    assert frozenset(found) == {reading for reading in handed_over if "".join(_texts(reading)).isascii()}
    assert 0 < len(found) < len(handed_over)
    assert len(found) + len(faults) == len(handed_over)
    assert len({fault.line for fault in faults}) == len(faults)
    assert all(fault.found.startswith("byte 0x") for fault in faults)
    assert all("UTF-8" in fault.mend for fault in faults)


def _texts(reading):
    return [text for name, text in reading.cells().items() if not name.startswith("warnings")]


@pytest.mark.parametrize(
    ("name", "message"), [("utf-16", "UTF-16.*save it as CSV, UTF-8"), ("one-column", "first column.*comma")]
)
def test_a_file_that_cannot_be_told_is_refused_whole(name, message):
    """UTF-16, and rows pressed into one column each, are refused with what to do, and no row is taken."""
    with pytest.raises(CsvError, match=message):
        read_readings(recorded(name))


def test_a_row_pressed_into_one_cell_is_taken_apart(read):
    """Where no cell holds a semicolon only rows with quotes are pressed into one cell; whole ones are read."""
    table = read(
        "feature,trend_deg,plunge_deg,note\nhinge,1,2,x\n"
        '"hinge,1,2,""a, """"b"""""""\n"hinge,1"\n"hinge,1,2,""open"\nlines""\nhinge,3,4,y\n'
    )
    assert [reading.note for reading in table] == ["x", 'a, "b"', "y"]
    assert [fault.line for fault in table.faults] == [4, 5, 6]
    assert "quote left open" in table.faults[1].found


@pytest.mark.parametrize("name", LIVE)
def test_the_spreadsheet_of_this_machine(live_spreadsheet, name, profiles, tmp_path, handed_over):
    """What is recorded holds for the version here: nothing changed, nothing added (tabs may be lost in .ods)."""
    assert live_spreadsheet
    path = tmp_path / "saved.csv"
    save_again(ORIGINAL, path, WAYS[name], profiles)
    found, faults = read_readings(path)
    assert faults == ()
    if name in WITHOUT_TABS and frozenset(found) != handed_over:
        assert_only_tabs_were_lost(path, handed_over)
    else:
        assert frozenset(found) == handed_over
        assert len(found) == len(handed_over)
