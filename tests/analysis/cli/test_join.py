"""hingewise join: nothing lost, clashes listed, and the same as taking the files into a notebook."""

from __future__ import annotations

import itertools
import tempfile
from datetime import UTC, datetime, timedelta
from pathlib import Path

import pytest
from hypothesis import HealthCheck, given, settings
from hypothesis import strategies as st

from analysis.files.csvfile import read_readings, write_readings
from analysis.files.join import join
from analysis.files.reading import Reading
from fieldapp.handing import HandOver
from fieldapp.notebook import open_notebook
from fieldapp.notebook.store import standing_of
from fieldapp.settings import PlaneNotation

NOON = datetime(2026, 5, 1, 12, tzinfo=UTC)


def bed(reading_id="a", **fields):
    return Reading(
        **{"reading_id": reading_id, "feature": "bedding", "strike_deg": 45, "dip_deg": 30} | fields
    )


SMALL = st.builds(
    bed,
    st.sampled_from(["a", "b", "c"]),
    revision=st.integers(1, 3),
    dip_deg=st.sampled_from([30, 31]),
    struck_out=st.booleans(),
    revised_at=st.sampled_from([None, NOON]),
    fold=st.sampled_from(["", "=F"]),
    other=st.sampled_from([{}, {"x": "1"}]),
)
FILES = st.lists(st.lists(SMALL, max_size=5), min_size=1, max_size=3)


def notebook_after(paths, folder):
    """Take files into a new notebook one after another, as the app does; its revisions and what stands."""
    ticks = itertools.count()

    def clock():
        return NOON + timedelta(seconds=next(ticks))

    notebook = open_notebook(folder / "field.notebook", clock).notebook
    try:
        hand_over = HandOver(notebook, clock)
        for path in paths:
            assert hand_over.take_in(hand_over.preview(path, next(iter(PlaneNotation)))) is not None
        revisions = notebook.revisions()
        return set(revisions), set(standing_of(revisions).values())
    finally:
        notebook.close()


@settings(suppress_health_check=[HealthCheck.function_scoped_fixture], max_examples=50)
@given(FILES, st.randoms(use_true_random=False))
def test_joining_files_is_taking_them_into_the_notebook(run, files, random):
    """The joined file holds what a notebook holds after taking in the same files, in whatever order."""
    with tempfile.TemporaryDirectory() as name:
        folder = Path(name)
        paths = [folder / f"{number}.csv" for number in range(len(files))]
        for path, readings in zip(paths, files, strict=True):
            write_readings(path, readings)
        result = run("join", *paths, "-o", folder / "all.csv", "--conflicts", folder / "clashes.csv")
        joined = join(*files)
        assert result.exit_code == (1 if joined.conflicts else 0), result.output
        written = read_readings(folder / "all.csv")[0]
        random.shuffle(paths)
        revisions, standing = notebook_after(paths, folder)
        assert set(written) == revisions
        assert len(written) == len(revisions)
        assert {reading for reading in standing if not reading.struck_out} == set(joined.standing)
        clashes = [content for conflict in joined.conflicts for content in conflict.contents]
        assert read_readings(folder / "clashes.csv")[0] == clashes
        again = run("join", folder / "all.csv", *paths, "-o", folder / "again.csv")
        assert again.exit_code == result.exit_code
        assert (folder / "again.csv").read_bytes() == (folder / "all.csv").read_bytes()


def test_conflicts_are_listed_and_the_exit_code_is_1(run, tmp_path):
    """Each clash is named with the columns that differ; both contents are in the joined file."""
    early = bed().revised(at=NOON, dip_deg=31.0)
    late = bed().revised(at=NOON.replace(hour=13), dip_deg=32.0, note="at the wall")
    write_readings(tmp_path / "a.csv", [bed(), early])
    write_readings(tmp_path / "b.csv", [bed(), late])
    result = run("join", tmp_path / "a.csv", tmp_path / "b.csv", "-o", tmp_path / "all.csv")
    assert result.exit_code == 1
    assert "conflict: a, revision 2: 2 contents differ in revised_at, dip_deg, note" in result.stderr
    assert "1 reading standing, in 3 revisions" in result.stdout
    assert read_readings(tmp_path / "all.csv")[0] == [bed(), early, late]


def test_files_without_conflict_join_quietly(run, tmp_path):
    """Without clashes the exit code is 0, nothing is on the error stream, and the file of clashes is empty."""
    write_readings(tmp_path / "a.csv", [bed()])
    write_readings(tmp_path / "b.csv", [bed("b"), bed().struck(at=NOON)])
    result = run("join", tmp_path / "a.csv", tmp_path / "b.csv", "-o", tmp_path / "a.csv",
                 "--conflicts", tmp_path / "clashes.csv")  # fmt: skip
    assert (result.exit_code, result.stderr) == (0, "")
    assert read_readings(tmp_path / "a.csv")[0] == [bed(), bed().struck(at=NOON), bed("b")]
    assert read_readings(tmp_path / "clashes.csv")[0] == []


def test_rows_without_id_join_once(run, tmp_path):
    """A spreadsheet without ids joined with its own join adds nothing; equal rows of one file stay two readings."""
    path = tmp_path / "bare.csv"
    path.write_text("feature,strike_deg,dip_deg\nbedding,45,30\nbedding,45,30\n", encoding="utf-8")
    assert run("join", path, "-o", tmp_path / "one.csv").exit_code == 0
    assert run("join", path, tmp_path / "one.csv", path, "-o", tmp_path / "two.csv").exit_code == 0
    one, two = (read_readings(tmp_path / f"{name}.csv")[0] for name in ("one", "two"))
    assert len(one) == 2
    assert one == two


def test_bad_rows_are_told_and_strict_refuses_them(run, tmp_path):
    """A row that is no reading is named; with --strict nothing is written."""
    path = tmp_path / "bad.csv"
    path.write_text("feature,strike_deg,dip_deg\nbedding,45,30\nbedding,45,99\n", encoding="utf-8")
    result = run("join", path, "-o", tmp_path / "all.csv")
    assert "line 3, column dip_deg" in result.stderr
    assert len(read_readings(tmp_path / "all.csv")[0]) == 1
    result = run("join", path, "-o", tmp_path / "strict.csv", "--strict")
    assert result.exit_code == 2
    assert not (tmp_path / "strict.csv").exists()


def test_rows_that_were_left_out_are_not_written_over(run, tmp_path):
    """A file with a bad row is not its own output: the row would be gone; joined elsewhere it stays as it was."""
    path, linked = tmp_path / "bad.csv", tmp_path / "linked.csv"
    path.write_text("feature,strike_deg,dip_deg\nbedding,45,30\nbedding,45,99\n", encoding="utf-8")
    linked.hardlink_to(path)
    before = path.read_bytes()
    for output in (path, linked, tmp_path / "." / "bad.csv"):
        result = run("join", path, "-o", output)
        assert result.exit_code == 2
        assert "would be written over" in result.stderr.splitlines()[-1]
    assert path.read_bytes() == before


@pytest.mark.parametrize("clashes", ["all.csv", "a.csv"])
def test_clashes_are_written_over_nothing_else(run, tmp_path, clashes):
    """The file of clashes is neither the joined file, there already or not, nor one of those joined."""
    write_readings(tmp_path / "a.csv", [bed()])
    before = (tmp_path / "a.csv").read_bytes()
    result = run("join", tmp_path / "a.csv", "-o", tmp_path / "all.csv", "--conflicts", tmp_path / clashes)
    assert result.exit_code == 2
    assert "--conflicts" in result.stderr
    assert (tmp_path / "a.csv").read_bytes() == before
    assert not (tmp_path / "all.csv").exists()


@pytest.mark.parametrize("arguments", [(), ("missing.csv", "-o", "all.csv"), ("missing.csv",)])
def test_what_cannot_be_joined_is_refused(run, tmp_path, monkeypatch, arguments):
    """No files, no output and a file that is not there end with exit code 2 and write nothing."""
    monkeypatch.chdir(tmp_path)
    assert run("join", *arguments).exit_code == 2
    assert list(tmp_path.iterdir()) == []
