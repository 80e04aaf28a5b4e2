"""Parquet in a survey: the same rules as CSV, and the figures of check."""

from __future__ import annotations

from datetime import UTC, datetime

import numpy as np
import pyarrow as pa
import pytest
from hypothesis import HealthCheck, given, settings
from hypothesis import strategies as st
from pyarrow import parquet

from analysis.errors import CsvError
from analysis.files.columns import BY_NAME, NAMES, Kind
from analysis.files.csvfile import write_readings
from analysis.files.reading import Reading
from analysis.survey.archive import find_archive, tables_of
from analysis.survey.run import survey
from tests.analysis.survey.conftest import NOON, assert_same_figures, plain_rows


def columns_of(readings):
    """Columns as a database would write them: numbers, times and flags as such, nothing as null."""
    columns = {}
    for name in NAMES:
        values = [getattr(reading, name) for reading in readings]
        kind = BY_NAME[name].kind
        if kind is Kind.WORDS:
            values = [" ".join(words) for words in values]
        if kind in (Kind.NAME, Kind.TEXT, Kind.WORD, Kind.WORDS):
            columns[name] = pa.array([str(value) if value else None for value in values], pa.string())
        elif kind is Kind.TIME:
            columns[name] = pa.array(values, pa.timestamp("us", "UTC"))
        elif kind is Kind.YES_NO:
            columns[name] = pa.array(values, pa.bool_())
        else:
            columns[name] = pa.array(values, pa.float64() if kind is Kind.NUMBER else pa.int64())
    return columns


def write(path, readings, **options):
    parquet.write_table(pa.table(columns_of(readings)), path, **options)
    return path


def read_back(path):
    return [
        reading
        for part in find_archive([path]).parts
        for table in tables_of(part)
        for reading in table.readings()
    ]


def test_parquet_gives_the_figures_of_csv(readings, tmp_path):
    """The same readings in Parquet and in CSV, mixed and with a revision across them, give what check gives."""
    edited = readings[3].revised(at=NOON, dip_deg=9.0)
    write(tmp_path / "a.parquet", readings[:70], row_group_size=16)
    write_readings(tmp_path / "b.csv", [*readings[70:], edited])
    write_readings(tmp_path / "whole.csv", [*readings, edited])
    found = survey([tmp_path / "a.parquet", tmp_path / "b.csv"])
    assert found.readings == len(readings)
    assert_same_figures(found, plain_rows(tmp_path / "whole.csv"))


def test_every_field_comes_through(tmp_path):
    """Texts that a spreadsheet would run, quotes, line ends, times, flags and numbers are read as they were."""
    odd = Reading(
        reading_id="=1", feature="bedding", strike_deg=359.9999, dip_deg=0.0, note="'=x, \"q\"\nnext\r\n ü",
        recorded_at=datetime(2026, 5, 1, 9, 30, 15, 123000, UTC), struck_out=True, overturned=True, samples=12,
        fold="+a", outcrop="'-b", as_entered="\t@c", warnings_kept=("outlier", "flat-plane"), latitude_deg=-0.0000001,
        longitude_deg=180.0, altitude_m=-3.5, revision=7,
    )  # fmt: skip
    line = Reading(reading_id="b", feature="hinge", trend_deg=0.0, plunge_deg=90.0)
    assert read_back(write(tmp_path / "odd.parquet", [odd, line])) == [odd, line]


@settings(suppress_health_check=[HealthCheck.function_scoped_fixture], max_examples=40)
@given(
    st.lists(
        st.tuples(
            st.sampled_from(["=x", "'", "''=y", ' "q" ', "a,b", "c\r\nd", "", "-", "é"]),
            st.floats(0, 360),
            st.floats(0, 90),
        ),
        max_size=5,
    )
)
def test_round_trip(tmp_path, rows):
    """What stands in a Parquet file is read as the same readings."""
    given_readings = [
        Reading(reading_id=f"r{k}", feature="cleavage", strike_deg=strike, dip_deg=dip, note=note)
        for k, (note, strike, dip) in enumerate(rows)
    ]
    assert read_back(write(tmp_path / "some.parquet", given_readings)) == given_readings


def test_other_types_are_read_too(tmp_path):
    """Dictionary codes, single floats, NaN for nothing, large strings and unknown columns are read."""
    table = pa.table(
        {
            "feature": pa.array(["bedding", "intersection"]).dictionary_encode(),
            "strike_deg": pa.array(np.array([45.5, np.nan], dtype=np.float32)),
            "dip_deg": pa.array([30, None], pa.int16()),
            "trend_deg": pa.array([np.nan, 12.25]),
            "plunge_deg": pa.array([None, 3.0]),
            "note": pa.array(["=a", None], pa.large_string()),
            "lithology": pa.array(["slate", "'-grit"]),
        }
    )
    parquet.write_table(table, tmp_path / "t.parquet")
    bed, line = read_back(tmp_path / "t.parquet")
    assert (bed.strike_deg, bed.dip_deg, bed.note, dict(bed.other)) == (
        45.5,
        30.0,
        "=a",
        {"lithology": "slate"},
    )
    assert (line.trend_deg, line.plunge_deg, dict(line.other)) == (12.25, 3.0, {"lithology": "'-grit"})


def test_bad_rows_are_named_by_their_place(readings, tmp_path):
    """A dip of 99 in the second row group is left out, and named by the line that it would have in CSV."""
    columns = columns_of(readings[:24])
    dips = columns["dip_deg"].to_pylist()
    dips[20] = 99.0
    columns["dip_deg"] = pa.array(dips)
    parquet.write_table(pa.table(columns), tmp_path / "a.parquet", row_group_size=10)
    found = survey([tmp_path])
    assert (found.readings, found.faulty_rows) == (23, 1)
    assert (found.faults[0].line, found.faults[0].column) == (22, "dip_deg")


def test_rows_without_id_in_parquet(readings, tmp_path):
    """Without ids each row counts in one file; in two files a copy of a row counts once."""
    twice = [*readings[:10], readings[0]]
    columns = columns_of(twice)
    for name in ("reading_id", "revision"):
        del columns[name]
    for name in ("a", "b"):
        parquet.write_table(pa.table(columns), tmp_path / f"{name}.parquet", row_group_size=4)
    assert survey([tmp_path / "a.parquet"]).readings == 11
    assert survey([tmp_path]).readings == 11
    some = columns_of(twice)
    some["reading_id"] = pa.array([None, *some["reading_id"].to_pylist()[1:]])
    parquet.write_table(pa.table(some), tmp_path / "c.parquet", row_group_size=4)
    assert survey([tmp_path / "c.parquet"]).readings == 11


def test_large_files_are_cut_into_parts(readings, tmp_path, monkeypatch):
    """Row groups are read part by part, and the figures are those of check."""
    monkeypatch.setattr("analysis.survey.parquet._ROWS_IN_PART", 30)
    monkeypatch.setattr("analysis.survey.parquet._ROWS_IN_TEXT", 7)
    write(tmp_path / "a.parquet", readings, row_group_size=20)
    write_readings(tmp_path / "whole.csv", readings)
    parts = find_archive([tmp_path / "a.parquet"]).parts
    assert [(part.row_groups, part.first_row) for part in parts[:2]] == [((0, 1), 0), ((2, 3), 40)]
    assert_same_figures(survey([tmp_path / "a.parquet"]), plain_rows(tmp_path / "whole.csv"))


def test_files_that_are_no_parquet_of_readings(tmp_path):
    """Something else under the name, missing columns and columns of lists are refused with the file's name."""
    path = tmp_path / "a.parquet"
    path.write_bytes(b"PAR1 and no more")
    with pytest.raises(CsvError, match=r"a\.parquet"):
        survey([path])
    parquet.write_table(pa.table({"x": [1]}), path)
    with pytest.raises(CsvError, match="feature"):
        survey([path])
    parquet.write_table(
        pa.table({"feature": ["bedding"], "strike_deg": [1], "dip_deg": [2], "note": [[1]]}), path
    )
    with pytest.raises(CsvError, match="note"):
        survey([path])
    parquet.write_table(pa.table({"feature": pa.array([], pa.string()), "strike_deg": pa.array([], pa.float64()),
                                  "dip_deg": pa.array([], pa.float64())}), path)  # fmt: skip
    assert survey([path]).readings == 0
