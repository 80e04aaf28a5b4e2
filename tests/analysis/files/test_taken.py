"""Text that a spreadsheet takes for a number, a date or a truth value comes back as it was written."""

from __future__ import annotations

import csv
import io

import pytest

from analysis.files.csvfile import csv_text
from analysis.files.reading import Reading
from analysis.files.taken import taken_for_another

# Seen to change in the spreadsheet of the folder spreadsheet, in one language or another; those marked (m) are
# what others do, from memory.
CHANGED = [
    *("007", "1.10", "1.50", "1,000", "1'000", "1\N{NO-BREAK SPACE}000", "12.", ".5", "1E5", "1e-3", "1 E 5"),
    *(
        "12345678901234567890",
        " 007 ",
        "(5)",
        "5,-",
        "12%",
        "5 %",
        "$5",
        "€5",
        "1 1/2",
        "TRUE",
        "true",
        "wahr",
    ),
    *("1/2", "3.5.", "5.5.2026", "2026-5-1", "May 5", "May 5, 2026", "Sep-7", "12:30", "10:30 AM"),
    *("3-4", "2026-05-01", "5 May", "3. März", "123456789012"),  # (m)
]
UNCHANGED = [
    *(
        "",
        "0",
        "7",
        "12345678901",
        "plain",
        "MG-12",
        "Outcrop-7",
        "2 m above",
        "12 beds",
        "30 E",
        "045/30 SE",
    ),
    *("strike/dip 045/30 SE", "May", "Marble 5", "1E", "nan", "yes", "30°", "2026-05-01T09:30:00.000Z"),
    "01952e6b-f2a7-7269-8651-0c5ca6a3a450",
]


def hinge(**fields):
    return Reading(**{"reading_id": "a", "feature": "hinge", "trend_deg": 0, "plunge_deg": 0, **fields})


@pytest.mark.parametrize("text", CHANGED)
def test_text_that_would_be_changed_is_guarded_and_comes_back(read, text):
    """A note, a name, an id and another column's name and cell get an apostrophe, and are read without it."""
    name = text.strip()
    reading = hinge(reading_id=name, outcrop=name, note=text, as_entered=text, other={name: text})
    written = "".join(csv_text([reading]))
    (row,) = csv.DictReader(io.StringIO(written))
    assert row["note"] == row["as_entered"] == row[f"'{name}"] == f"'{text}"
    assert row["outcrop"] == row["reading_id"] == f"'{name}"
    assert read(written).readings() == [reading]


@pytest.mark.parametrize("text", CHANGED)
def test_text_with_apostrophes_of_its_own_comes_back(read, text):
    """Text that already begins with apostrophes keeps as many."""
    readings = [hinge(note="'" * marks + text, reading_id=str(marks)) for marks in (1, 2, 3)]
    assert read("".join(csv_text(readings))).readings() == readings


@pytest.mark.parametrize("text", UNCHANGED)
def test_text_that_stays_as_it_is_gets_no_apostrophe(text):
    """Plain numbers, names with digits and words are written as they are."""
    assert not taken_for_another(text)
    assert "".join(csv_text([hinge(note=text)])).endswith(f",{text}\n")


def test_what_our_own_columns_hold_gets_no_apostrophe(noon):
    """Numbers, times, true north and yes or no stand there bare, for other programs to read."""
    reading = hinge(recorded_at=noon, latitude_deg=-1, longitude_deg=-3.5, correction_deg=-1.5, samples=3)
    assert reading.north_reference == "true"
    assert "'" not in "".join(csv_text([reading]))


@pytest.mark.parametrize("text", ["9" * 31_999 + "x", "1e1" * 10_000 + "x", "May " * 8000, " " * 32_000])
def test_long_text_is_no_number(text):
    """Text made to be looked at again from each of its places is judged in one go."""
    # Time that grows with the square of the length, or worse, would be seen as a test that does not end.
    assert not taken_for_another(text)


@pytest.mark.parametrize("word", ["TRUE", "True", "WAHR", "VRAI", "VERDADERO", "ИСТИНА", "DOĞRU", "ΣΩΣΤΌ"])
def test_true_north_is_known_in_the_language_of_the_spreadsheet(read, word):
    """The word true is a truth value to a spreadsheet, and comes back in capitals and another language."""
    table = read(f"feature;trend_deg;plunge_deg;north_reference\nhinge;1;2;{word}\nhinge;1;2;magnetic\n")
    assert not table.faults
    assert [reading.north_reference for reading in table] == ["true", "magnetic"]


def test_false_is_no_north(read):
    """The other truth value is refused, for no north is meant by it."""
    (fault,) = read("feature,trend_deg,plunge_deg,north_reference\nhinge,1,2,FALSCH\n").faults
    assert fault.column == "north_reference"


@pytest.mark.parametrize("ending", ["\n", "\r\n"])
@pytest.mark.parametrize("inside", ["\n", "\r\n", "\r"])
def test_line_ends_in_a_cell_are_one_and_the_same(read, ending, inside):
    """A note of two lines is the same note whichever line ends a program wrote."""
    rows = ["feature,trend_deg,plunge_deg,note,more", f'hinge,1,2,"a{inside}b","c{inside}d"', "hinge,1,2,x,y"]
    first, second = read(ending.join([*rows, ""]))
    assert (first.note, first.other["more"], second.note) == ("a\nb", "c\nd", "x")
    assert hinge(note=f"a{inside}b", other={"m": f"c{inside}d"}) == hinge(note="a\nb", other={"m": "c\nd"})
