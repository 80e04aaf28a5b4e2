"""Surveys: the figures of check, whatever the files, the parts and the workers; rows that do not count."""

from __future__ import annotations

import io
import os
import threading
from dataclasses import replace

import pandas as pd
import pytest
from hypothesis import HealthCheck, given, settings
from hypothesis import strategies as st

from analysis.errors import CsvError, SettingError
from analysis.files.csvfile import csv_text, read_table
from analysis.files.join import join
from analysis.files.reading import Reading
from analysis.survey.archive import find_archive
from analysis.survey.run import survey
from analysis.survey.squares import Grid
from tests.analysis.survey.conftest import NOON, assert_same_figures, invent, plain_rows


def test_the_figures_are_those_of_check(readings, written):
    """Three folds spread over four files in any order give what check gives on all of them at once."""
    paths = written(readings[::4], readings[1::4], readings[3::4], readings[2::4])
    found = survey([paths[0].parent])
    assert (found.readings, found.rows_read) == (len(readings), len(readings))
    assert (found.faulty_rows, found.conflicts, found.unplaced) == (0, (), 0)
    assert_same_figures(found, plain_rows(*paths))
    assert {name: len(rows) for name, rows in found.means.items()} == {
        "mean hinge": 3,
        "mean cleavage": 3,
        "mean intersection": 3,
    }


@pytest.mark.parametrize("by", [None, Grid(1.0), Grid(0.3, moving=True)])
def test_workers_change_no_figure(readings, written, by):
    """One, two and four workers give the same figures bit for bit, by fold, square and window."""
    written(*(readings[start::7] for start in range(7)))
    folder = written()[0].parent if written() else written(readings[:0])[0].parent
    found = [survey([folder], grid=by, workers=workers) for workers in (1, 2, 4)]
    assert found[0].verdicts
    assert found[0] == found[1] == found[2]


def test_revisions_in_other_files_count_once(readings, written):
    """An edit and a striking out handed over later replace the reading, as they do when files are read together."""
    edited = readings[0].revised(at=NOON, dip_deg=12.0)
    again = edited.revised(at=NOON, dip_deg=14.0)
    moved = readings[30].revised(at=NOON, fold="Mossgarth 2")
    struck = readings[5].struck(at=NOON)
    back = readings[6].struck(at=NOON).revised(at=NOON, struck_out=False)
    paths = written(readings, [edited, struck, readings[6].struck(at=NOON)], [again, moved, back])
    found = survey(paths)
    assert found.readings == len(readings) - 1
    assert_same_figures(found, plain_rows(*paths))


def test_copies_count_once(readings, written):
    """A file that is there twice, and one that repeats part of another, add nothing."""
    paths = written(readings, readings, readings[10:40])
    found = survey(paths)
    assert found.readings == len(readings)
    assert_same_figures(found, plain_rows(*paths))
    assert found.conflicts == ()


def test_a_conflict_is_told_and_the_last_edit_stands(readings, written):
    """Two contents under one revision: both are named, and the figures are those of check."""
    early = readings[0].revised(at=NOON, dip_deg=20.0)
    late = readings[0].revised(at=NOON.replace(hour=15), dip_deg=80.0)
    paths = written([*readings, late], [early, late])
    found = survey(paths)
    assert [conflict.contents for conflict in found.conflicts] == [(early, late)]
    assert found.conflicts == join(read_table(*paths)).conflicts
    assert_same_figures(found, plain_rows(*paths))


SMALL = st.builds(
    lambda name, **fields: Reading(reading_id=name, feature="bedding", strike_deg=45, **fields),
    st.sampled_from("abcd"),
    revision=st.integers(1, 2),
    dip_deg=st.sampled_from([30, 31, 32]),
    struck_out=st.booleans(),
    fold=st.sampled_from(["", "A", "B"]),
    revised_at=st.sampled_from([None, NOON]),
)


@settings(suppress_health_check=[HealthCheck.function_scoped_fixture], max_examples=60)
@given(st.lists(st.lists(SMALL, max_size=6), min_size=1, max_size=3), st.booleans())
def test_any_revisions_copies_and_conflicts_count_as_in_a_table(written, files, by_id):
    """Whatever stands in the files, with ids or without, the survey counts the readings that a table counts."""
    paths = written(*files)
    if not by_id:
        for path in paths:
            frame = pd.read_csv(path, dtype=str, keep_default_na=False)
            frame.drop(columns=["reading_id", "revision"]).to_csv(path, index=False)
    table = read_table(*paths)
    found = survey(paths, workers=1)
    assert found.readings == int(table.standing.sum())
    assert found.conflicts == table.conflicts
    counts = {row["fold"] or "": row["readings"] for row in found.verdicts}
    assert counts == {name: len(table.of_fold(name)) for name in table.folds()}


def test_rows_without_id_among_others(readings, written):
    """Where some rows lack an id, equal ones of a file stay apart and copies in other files do not count again."""
    bare = [replace(reading, reading_id="-") for reading in readings[:6]]
    text = "".join(csv_text([*bare, *bare[:2], *readings[6:]])).replace("\n'-,", "\n,")
    path = written(readings)[0]
    path.write_text(text, encoding="utf-8")
    twice = path.with_name("again.csv")
    twice.write_text(text, encoding="utf-8")
    joined = path.with_name("joined.csv")
    joined.write_text("".join(csv_text(join(read_table(path)))), encoding="utf-8")
    for paths in ([path], [path, twice], [path, joined]):
        found = survey(paths)
        assert found.readings == len(readings) + 2
        assert_same_figures(found, plain_rows(*paths))


def test_outcrops_of_other_folds_stay_apart_in_a_square(readings, written):
    """A square that holds two folds counts outcrop 1 of each as two outcrops."""
    here = [replace(reading, latitude_deg=47.5, longitude_deg=-31.0) for reading in readings]
    found = survey(written(here), grid=Grid(5.0))
    (row,) = found.verdicts
    assert (row["outcrops"], row["readings"], row["with_position"]) == (12, len(here), len(here))
    assert (row["latitude_deg"], row["longitude_deg"]) == pytest.approx((47.5, -31.0), abs=0.1)


def test_squares_leave_out_what_has_no_position(readings, written):
    """By square only readings with a position are used, and the others are counted."""
    found = survey(written(readings), grid=Grid(0.2))
    unplaced = sum(reading.latitude_deg is None for reading in readings)
    assert unplaced > 0
    assert found.unplaced == unplaced
    assert found.readings == len(readings) - unplaced
    assert sum(row["readings"] for row in found.verdicts) == found.readings


def test_a_window_holds_the_readings_of_its_neighbours(readings, written):
    """Three folds a kilometre apart lie in one window, and the window of the middle one checks them together."""
    placed = [reading for reading in readings if reading.latitude_deg is not None]
    found = survey(written(readings), grid=Grid(1.2, moving=True))
    assert max(row["readings"] for row in found.verdicts) == len(placed)
    still = survey(written(readings), grid=Grid(1.2))
    assert max(row["readings"] for row in still.verdicts) < len(placed)


def test_bad_rows_are_left_out_and_named(readings, written):
    """A row that is no reading is counted and named with file and line; the others are used."""
    path = written(readings)[0]
    with path.open("a", encoding="utf-8") as stream:
        stream.write("x,1,no,,,,,F,1,bedding,45,99" + "," * 18 + "\n")
    found = survey([path])
    assert (found.readings, found.faulty_rows) == (len(readings), 1)
    assert found.faults[0].file == str(path)
    assert found.faults[0].line == len(readings) + 2


def test_many_pieces_of_one_file(written, monkeypatch):
    """A file of many pieces, read again for a revision in the last of them, gives the figures of check."""
    monkeypatch.setattr("analysis.files.records.BLOCK_BYTES", 4096)
    readings = invent(folds=4, seed=3, each=40)
    paths = written([*readings, readings[2].revised(at=NOON, dip_deg=5.0), readings[3].struck(at=NOON)])
    found = survey(paths)
    assert found.readings == len(readings) - 1
    assert_same_figures(found, plain_rows(*paths))


def test_an_archive_without_files_is_refused(tmp_path):
    """A folder without files of readings, and a file that is none, are named."""
    with pytest.raises(SettingError, match="no file of readings"):
        survey([tmp_path])
    (tmp_path / "words.csv").write_text("these are\nno readings\n", encoding="utf-8")
    with pytest.raises(CsvError, match=r"words\.csv"):
        survey([tmp_path])
    (tmp_path / "words.csv").write_text("feature,strike_deg,dip_deg\n", encoding="utf-8")
    found = survey([tmp_path])
    assert (found.verdicts, found.readings, found.rows_read) == ((), 0, 0)


def test_no_worker(readings, written):
    """No workers at all are refused in words."""
    paths = written(readings)
    with pytest.raises(SettingError, match="workers"):
        survey(paths, workers=0)


@pytest.mark.parametrize(
    "address",
    ["no address", "", "tcp://127.0.0.1:port", "tls://127.0.0.1:1", "ucx://127.0.0.1:1", "odd://there"],
)
def test_an_address_of_no_scheduler_is_refused_at_once(readings, written, address):
    """Whatever is wrong with the address is said in words, with nothing left behind that complains later."""
    started = threading.active_count()
    with pytest.raises(SettingError, match="no Dask scheduler"):
        survey(written(readings), scheduler=address)
    assert threading.active_count() == started


def test_progress_is_shown_where_it_is_asked_for(readings, written):
    """The bar goes to the stream given, with the name of each step."""
    stream = io.StringIO()
    survey(written(readings, readings[:3]), progress=stream)
    text = stream.getvalue()
    assert "reading" in text
    assert "comparing repeated rows" in text
    assert "checking" in text
    assert "100%" in text


def test_parts_follow_the_names_of_files(written, readings):
    """Files of a folder are taken in the order of their names, twice given once; drafts and others are let be."""
    paths = written(readings[:5], readings[5:], readings[:2])
    (paths[0].parent / ".1.csv.0123.part.csv").write_text("half of a fi", encoding="utf-8")
    (paths[0].parent / "notes.txt").write_text("no readings", encoding="utf-8")
    archive = find_archive([paths[0].parent, paths[1]])
    assert [part.path for part in archive.parts] == [str(path) for path in paths]
    assert archive.ids_matter


def test_a_cluster_finds_files_by_paths_from_here(readings, written, monkeypatch):
    """Files named from the folder one is in are found by workers that were started in another."""
    from distributed import Client, LocalCluster  # noqa: PLC0415 - slow to load, and only here

    (path,) = written(readings)
    monkeypatch.chdir(path.parent)
    with (
        LocalCluster(n_workers=1, threads_per_worker=1, dashboard_address=None, silence_logs=50) as cluster,
        Client(cluster.scheduler_address, set_as_default=False) as client,
    ):
        client.run(os.chdir, "/")
        found = survey([path.name], scheduler=cluster.scheduler_address)
    assert found == survey([path])


def test_a_cluster_gives_the_same(readings, written):
    """The workers of a Dask cluster, reached by its address, give the figures of threads bit for bit."""
    from distributed import LocalCluster  # noqa: PLC0415 - slow to load, and only here

    paths = written(readings[::2], readings[1::2], [readings[0].revised(at=NOON, dip_deg=20.0)])
    stream = io.StringIO()
    with LocalCluster(
        n_workers=2,
        threads_per_worker=1,
        processes=False,
        protocol="tcp",
        host="127.0.0.1",
        dashboard_address=None,
        silence_logs=50,
    ) as cluster:
        found = survey(paths, scheduler=cluster.scheduler_address, progress=stream)
    assert found == survey(paths, workers=2)
    assert "reading: 4 of 4 parts" in stream.getvalue()
