"""Tables: the same values as the records, which rows count, and the order of time."""

from __future__ import annotations

import io
from datetime import UTC, datetime

import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st

from analysis.files.csvfile import csv_text, read_table
from analysis.files.join import join
from analysis.files.reading import Reading
from analysis.files.table import FEATURE_ORDER, ReadingTable


def bed(reading_id="a", **fields):
    return Reading(
        **{"reading_id": reading_id, "feature": "bedding", "strike_deg": 45, "dip_deg": 30} | fields
    )


@given(data=st.data())
def test_columns_agree_with_the_records(any_reading, read, data):
    """Vectors, features, folds, outcrops and times of a table are those of its records."""
    readings = data.draw(st.lists(any_reading(), max_size=6))
    for table in (ReadingTable.from_readings(readings), read("".join(csv_text(readings)))):
        assert table.readings() == readings
        assert list(table) == readings
        assert len(table) == len(readings)
        vectors = np.array([reading.vector for reading in readings]).reshape(-1, 3)
        assert table.vectors == pytest.approx(vectors, abs=1e-12)
        assert [FEATURE_ORDER[place] for place in table.feature] == [r.feature for r in readings]
        assert [table.fold[row] for row in range(len(table))] == [r.fold for r in readings]
        assert [table.outcrop[row] for row in range(len(table))] == [r.outcrop for r in readings]
        backwards = table.take(np.arange(len(table))[::-1])
        assert backwards.readings() == readings[::-1]
        assert backwards.vectors == pytest.approx(vectors[::-1], abs=1e-12)


@given(data=st.data())
def test_standing_rows_are_the_standing_readings_of_a_join(any_reading, read, data):
    """The rows of a table that count are those that a join of the same readings lets stand."""
    few = st.sampled_from(["a", "b"])
    readings = data.draw(st.lists(any_reading(few), max_size=6))
    readings += data.draw(st.lists(st.sampled_from(readings), max_size=3)) if readings else []
    joined = join(readings)
    for table in (ReadingTable.from_readings(readings), read("".join(csv_text(readings)))):
        standing = table.readings(np.flatnonzero(table.standing))
        assert sorted(standing, key=lambda r: r.reading_id) == list(joined.standing)
        assert table.conflicts == joined.conflicts
        assert {r for name in table.folds() for r in table.of_fold(name)} == set(standing)


def test_revisions_and_strikings(noon):
    """The highest revision counts, in its own fold, and a struck-out reading does not."""
    first = bed("a", fold="A")
    moved = first.revised(at=noon, fold="B")
    struck = bed("b", fold="A").struck(at=noon)
    table = ReadingTable.from_readings([moved, first, bed("b", fold="A"), struck, bed("c", fold="C")])
    assert table.standing.tolist() == [True, False, False, False, True]
    assert table.folds() == ("B", "C")
    assert table.of_fold("B").readings() == [moved]
    assert len(table.of_fold("A")) == 0
    # A part of the table knows what stands in the whole.
    assert table.take([1]).standing.tolist() == [False]


def test_conflicts_within_a_file(noon):
    """Two contents under one id and revision are both kept; the one edited last counts; both are named."""
    early = bed("a").revised(at=noon.replace(hour=9), dip_deg=31)
    late = bed("a").revised(at=noon, dip_deg=32)
    table = ReadingTable.from_readings([late, bed("a"), early, late])
    assert table.standing.tolist() == [True, False, False, False]
    (conflict,) = table.conflicts
    assert conflict.contents == (early, late)
    assert conflict.differing == ("revised_at", "dip_deg")
    assert str(conflict) == "a, revision 2: 2 contents differ in revised_at, dip_deg"


def test_recorded_order():
    """Rows come in the order of time, rows without time after the row before them, equal times as they stand."""

    def at(hour):
        return datetime(2026, 5, 1, hour, tzinfo=UTC)

    hours = [None, 9, 7, None, 8, 8]
    readings = [bed(str(n), recorded_at=None if h is None else at(h)) for n, h in enumerate(hours)]
    ordered = ReadingTable.from_readings(readings).in_recorded_order()
    assert [r.reading_id for r in ordered] == ["0", "2", "3", "4", "5", "1"]
    untimed = ReadingTable.from_readings([bed("b"), bed("a")]).in_recorded_order()
    assert [r.reading_id for r in untimed] == ["b", "a"]


def test_tables_do_not_change():
    """Arrays of a table cannot be written to."""
    table = ReadingTable.from_readings([bed("a"), bed("b")])
    for array in (table.vectors, table.column("strike_deg"), table.reading_id, table.column("samples")):
        with pytest.raises(ValueError, match="read-only"):
            array[0] = array[1]
    with pytest.raises(KeyError):
        table.column("colour")


def test_files_with_different_columns_make_one_table():
    """A column that one file lacks is empty in its rows, whichever file comes first."""
    one = b"feature,strike_deg,dip_deg,fold,sample,revision\nbedding,1,2,A,s,3\n"
    two = b"feature;trend_deg;plunge_deg;note;recorded_at\nhinge;3;4;n;2026-05-01T09:30:00+01:00\n"
    for order in ((one, two), (two, one), (one, two, one)):
        table = read_table(*map(io.BytesIO, order))
        by_feature = {reading.feature: reading for reading in table}
        bedding, hinge = by_feature["bedding"], by_feature["hinge"]
        assert (bedding.fold, bedding.revision, dict(bedding.other), bedding.note) == (
            "A",
            3,
            {"sample": "s"},
            "",
        )
        assert (hinge.fold, hinge.revision, dict(hinge.other), hinge.note) == ("", 1, {}, "n")
        assert hinge.recorded_at == datetime(2026, 5, 1, 8, 30, tzinfo=UTC)
        assert table.files == ("stream",) * len(order)


def test_numerals_in_names_stay_apart():
    """Outcrops 7, 07 and 7.0 are three outcrops, and folds 1 and TRUE two folds."""
    rows = "".join(
        f"bedding,1,2,{outcrop},{fold}\n" for outcrop, fold in [("7", "1"), ("07", "TRUE"), ("7.0", "1")]
    )
    table = read_table(io.BytesIO(("feature,strike_deg,dip_deg,outcrop,fold\n" + rows).encode()))
    assert table.outcrop.names == ("7", "07", "7.0")
    assert table.folds() == ("1", "TRUE")
    only = read_table(
        io.BytesIO(b"feature,strike_deg,dip_deg,outcrop,note\nbedding,1,2,007,1e3\nbedding,1,2,7,2\n")
    )
    assert [(r.outcrop, r.note) for r in only] == [("007", "1e3"), ("7", "2")]
    assert only.outcrop.names == ("007", "7")
