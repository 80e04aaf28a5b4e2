"""hingewise report: what is refused, what is left out and said, and the options that choose."""

from __future__ import annotations

import hashlib
import os
import re
import sys

import pytest

from tests.analysis.cli.conftest import HEADER


@pytest.mark.parametrize(
    ("arguments", "said"),
    [
        ((), "Missing"),
        (("two.csv",), "--output"),
        (("two.csv", "-o", "report.txt"), "expected a name ending in .html, .htm, .pdf"),
        (("two.csv", "-o", "report"), "report ends in no format"),
        (("two.csv", "-o", "nowhere/report.html"), "lies in no folder"),
        (("two.csv", "-o", "report.html", "--fault-strike", "400"), "fault strike"),
        (("two.csv", "-o", "report.html", "--zone-width-km", "2"), "--fault-strike"),
        (("two.csv", "-o", "report.html", "--sense", "left"), "--sense"),
        (("two.csv", "-o", "report.html", "--fold", "Nowhere"), "'Nowhere'"),
        (("missing.csv", "-o", "report.html"), "missing.csv"),
        (("two.csv", "-o", "report.html", "--title", " "), "--title: the title is empty"),
    ],
)
def test_errors_are_one_line_and_nothing_is_written(run, two_folds, monkeypatch, arguments, said):
    """Whatever is wrong is named in one line, with exit code 2, and no report appears."""
    monkeypatch.chdir(two_folds.parent)
    before = sorted(two_folds.parent.iterdir())
    result = run("report", *arguments)
    assert result.exit_code == 2
    (line,) = [text for text in result.stderr.splitlines() if text.startswith("hingewise: ")]
    assert said in line
    assert "Traceback" not in result.stderr
    assert sorted(two_folds.parent.iterdir()) == before


def test_a_pipe_is_refused_since_its_content_is_gone_when_the_checksum_is_taken(run, two_folds):
    """What the SHA-256 of the report would be taken of is gone from a pipe; the command says so."""
    pipe = two_folds.parent / "pipe.csv"
    os.mkfifo(pipe)
    result = run("report", two_folds, pipe, "-o", two_folds.parent / "report.html")
    assert result.exit_code == 2
    assert "pipe.csv: this is no file that stays" in result.stderr
    assert not (two_folds.parent / "report.html").exists()


def test_nothing_is_said_of_progress_where_nobody_watches(run, two_folds):
    """Away from a terminal the error stream of a report is empty when all is well."""
    assert run("report", two_folds, "-o", two_folds.parent / "report.html").stderr == ""


def made(run, path, *arguments):
    """Make a page of files and return its text."""
    output = path / "report.html"
    result = run("report", *arguments, "-o", output)
    assert result.exit_code == 0, result.output
    assert str(output) in result.stdout
    return output.read_text(encoding="utf-8")


def test_options_choose_the_fold_and_are_named_in_the_command(run, two_folds):
    """Only the fold asked for is reported; the command on the page names what was chosen and no default."""
    text = made(run, two_folds.parent, two_folds, "--fold", "Low fold", "--margin", "4", "--title", "T & U")
    assert "<title>T &amp; U</title>" in text
    assert re.findall(r"<h2[^>]*>([^<]*fold[^<]*)</h2>", text) == ["Low fold"]
    (command,) = re.findall(r"<code>([^<]*)</code>", text)
    assert command == (
        "hingewise report two.csv -o report.html --title &#39;T &amp; U&#39; --fold &#39;Low fold&#39; --margin 4"
    )


def test_files_are_named_by_what_is_in_them(run, two_folds):
    """Each file stands with the SHA-256 of its content and its readings used, without the folder it lies in."""
    text = made(run, two_folds.parent, two_folds)
    assert hashlib.sha256(two_folds.read_bytes()).hexdigest() in text
    assert str(two_folds.parent) not in text


def test_files_of_one_name_keep_their_folders(run, two_folds):
    """Where two files share a name both stand with their paths, so that they can be told apart."""
    other = two_folds.parent / "other" / "two.csv"
    other.parent.mkdir()
    other.write_text(HEADER + "Third fold,A,bedding,10,20,,\n", encoding="utf-8")
    text = made(run, two_folds.parent, two_folds, other)
    assert f">{two_folds}<" in text
    assert f">{other}<" in text


def test_rows_left_out_and_clashes_stand_in_the_report(run, tmp_path):
    """A row that could not be read is named with its line, and two contents of one reading are named as a clash."""
    path = tmp_path / "bad.csv"
    header = "reading_id," + HEADER
    path.write_text(
        header + "a,F,A,bedding,10,20,,\na,F,A,bedding,11,20,,\nb,F,A,bedding,10,95,,\n", encoding="utf-8"
    )
    text = made(run, tmp_path, path)
    assert "1 row could not be read" in text
    assert "line 4, column dip_deg" in text
    assert "a, revision 1: 2 contents differ in strike_deg" in text


def test_a_file_without_readings_gives_a_report_that_says_so(run, tmp_path):
    """Nothing read is no error, and the page says that nothing stands."""
    path = tmp_path / "none.csv"
    path.write_text(HEADER, encoding="utf-8")
    assert "No readings stand in these files." in made(run, tmp_path, path)


def test_a_fold_whose_every_reading_is_struck_out_is_named(run, tmp_path):
    """What was struck out is not lost from the report even where nothing of its fold stands."""
    path = tmp_path / "struck.csv"
    path.write_text(
        "reading_id,revision,struck_out,"
        + HEADER
        + "a,1,no,F,A,bedding,10,20,,\na,2,yes,F,A,bedding,10,20,,\nb,1,no,G,A,bedding,10,20,,\n",
        encoding="utf-8",
    )
    text = made(run, tmp_path, path)
    assert "F: 1 reading, all struck out" in text


def test_scarce_readings_still_make_a_report(run, tmp_path):
    """One reading, a steep hinge line, or level beds: each fold has its section and no figure of a transection."""
    path = tmp_path / "scarce.csv"
    rows = "One,A,bedding,10,20,,\nSteep,A,hinge,,,10,90\nSteep,A,cleavage,360,90,,\nLevel,A,bedding,0,0,,\n"
    path.write_text(HEADER + rows, encoding="utf-8")
    text = made(run, tmp_path, path, "--fault-strike", "0")
    assert re.findall(r"<h3[^>]*>(One|Steep|Level)</h3>", text) == ["One", "Steep", "Level"]
    assert text.count("not known yet") >= 6


@pytest.mark.parametrize("missing", ["jinja2", "matplotlib"])
def test_without_its_libraries_the_command_says_what_to_install(run, two_folds, monkeypatch, missing):
    """Where a library of the desk is missing the error is one line that names it and how to get it."""
    monkeypatch.setitem(sys.modules, missing, None)
    result = run("report", two_folds, "-o", two_folds.parent / "report.html")
    assert result.exit_code == 2
    line = result.stderr.splitlines()[-1]
    assert f"{missing} is not installed" in line
    assert "pip install 'hingewise[desk]'" in line
