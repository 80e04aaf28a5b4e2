"""The report as a PDF: whole pages, the same words as the page."""

from __future__ import annotations

import sys

import pytest

from analysis.errors import HingewiseError
from analysis.fold.check import check_fold
from analysis.fold.words import figure_line
from analysis.report.blocks import (
    Column,
    Facts,
    Points,
    Report,
    Row,
    Section,
    Table,
    Typed,
    Verdict,
    Words,
    cut,
)
from analysis.report.paper import render_paper
from analysis.report.sheet import verdict_sign
from analysis.stats.sums import RunningSums
from tests.analysis.report.conftest import FAULT, HOSTILE_NOTE, NOTE, write_report
from tests.analysis.report.pdf_pages import cut_off, shapes, texts

LEAST_MARGIN_MM = 8.0
"""The foot stands lower than the text; closer to the edge many printers cannot print."""


@pytest.fixture(scope="session")
def pages(paper_path):
    """Text of each page."""
    return texts(paper_path)


def test_nothing_is_cut_off_and_the_figures_are_there(paper_path):
    """Every line and letter lies within the page's margins, and the drawings are drawn."""
    assert cut_off(paper_path, LEAST_MARGIN_MM) == []
    assert max(shapes(paper_path)) > 100


def test_pages_are_counted_and_named(pages):
    """Each page says which it is of how many."""
    for number, text in enumerate(pages, start=1):
        assert f"{number} of {len(pages)}" in text


def test_no_heading_of_a_table_is_torn_within_a_word(pages):
    """Columns are wide enough for the longest word above them."""
    whole = " ".join(pages)
    for heading in (
        "Verdict Transection Interval B C L H Outcrops",
        "Explanation Predicted transection Shear strain",
    ):
        assert heading in whole


def test_it_says_what_the_page_says(pages):
    """Verdicts, struck-out readings, warnings kept, hostile notes, cautions, method and command are all there."""
    whole = " ".join(pages)
    for text in (
        "Transected: cleavage", "struck out", "kept against", NOTE, "no slope or excavation design",
        "Treagus & Treagus 1992", "Method in short", "Schuirmann 1987", "hingewise report mossgarth.csv -o report.pdf",
        "SHA-256", "fpdf2", "Before any explanation",
    ):  # fmt: skip
        assert text in whole, text
    assert HOSTILE_NOTE.replace(" ", "") in whole.replace(" ", "").replace("\ufffe", "")


def test_the_same_readings_give_the_same_file(paper_path, tmp_path):
    """Made again, the bytes are the same: no date, no chance."""
    assert write_report(tmp_path, ".pdf", *FAULT).read_bytes() == paper_path.read_bytes()


def test_letter_paper_is_letter_paper(tmp_path):
    """With --paper letter the pages are 8.5 by 11 inches, and still nothing is cut off."""
    import pypdfium2  # noqa: PLC0415 - as in pdf_pages

    path = write_report(tmp_path, ".pdf", "--paper", "letter", "--fold", "Mossgarth Edge fold")
    with pypdfium2.PdfDocument(path) as pdf:
        assert pdf[0].get_size() == pytest.approx((612.0, 792.0))
    assert cut_off(path, LEAST_MARGIN_MM) == []


def report_of(*blocks):
    """A report of one section."""
    return Report("Mossgarth", (), (Section("one", "One", blocks),))


def test_a_long_table_has_its_heads_on_every_page():
    """Rows run on over pages, none is lost, and each page repeats the heads."""
    rows = tuple(Row((str(number), "words " * (number % 30))) for number in range(1, 400))
    columns = (Column("Number", 1), Column("Remark", 3))
    made = render_paper(report_of(Table("Rows", columns, rows)))
    found = texts(made)
    assert len(found) > 5
    assert all("Number Remark" in text for text in found)
    assert cut_off(made, LEAST_MARGIN_MM) == []
    seen = " ".join(found)
    assert all(f" {row.cells[0]} words" in seen for row in rows if row.cells[1])


def test_words_of_any_length_and_script_are_set():
    """A word longer than a line is broken, signs that the letters lack are shown as such, markup means nothing."""
    long = "x" * 500
    blocks = (
        Words(f"{long} **bold** --- <b>"),
        Points((long, "縞 \U0001f9ed"), title=long, boxed=True),
        Facts(((long, long),)),
        Typed(long),
        Table(long, (Column(long, 1), Column("b", 1)), (Row((long, "\u0627\u0644"), struck=True),)),
    )
    made = render_paper(report_of(*blocks))
    whole = " ".join(texts(made))
    assert cut_off(made, LEAST_MARGIN_MM) == []
    assert "**bold** --- <b>" in whole
    assert "stands for a sign that the letters of this file lack" in whole


def test_a_verdict_has_its_sign(fold):
    """The sign is drawn beside the sentence."""
    check = fold().check
    empty = check_fold(RunningSums())
    sign = tuple(verdict_sign(check))
    drawn = shapes(render_paper(report_of(Verdict(sign, "Transected", figure_line(empty)))))
    bare = shapes(render_paper(report_of(Verdict((), "Transected", figure_line(empty)))))
    assert drawn[0] == bare[0] + len(sign)


def test_without_its_library_the_error_says_what_to_install(monkeypatch):
    """Where the PDF library is missing one line names it and the command that brings it."""
    monkeypatch.setitem(sys.modules, "fpdf", None)
    with pytest.raises(HingewiseError, match=r"fpdf2 is not installed\. .*pip install 'hingewise\[desk\]'"):
        render_paper(report_of())


def test_what_is_cut_says_so():
    """A text of bounded length is left alone, a longer one says how long it was."""
    assert cut("a  b\nc") == "a b c"
    assert cut("x" * 400) == "x" * 400
    assert cut("x" * 401) == f"{'x' * 400} … (401 characters, whole in the file)"
