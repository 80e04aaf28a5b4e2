"""Files of readings, in and out: what is written is read again, bad rows are named, good ones kept."""

from __future__ import annotations

import csv
import io
import os
from datetime import UTC, datetime

import numpy as np
import pytest
from hypothesis import assume, given, settings
from hypothesis import strategies as st

from analysis.errors import CsvError
from analysis.files import csvfile
from analysis.files.columns import NAMES
from analysis.files.csvfile import csv_text, read_readings, read_table, write_readings
from analysis.files.reading import Reading, content_id
from analysis.files.records import RecordFile

PLANES = "feature,strike_deg,dip_deg\n"


def text_of(readings):
    return "".join(csv_text(readings))


def bed(reading_id="a", **fields):
    return Reading(
        **{"reading_id": reading_id, "feature": "bedding", "strike_deg": 45, "dip_deg": 30} | fields
    )


@given(data=st.data())
def test_round_trip(any_reading, read, data):
    """Any readings written and read back are equal to themselves, in the same order."""
    given_readings = data.draw(st.lists(any_reading(), max_size=5))
    table = read(text_of(given_readings))
    assert not table.faults
    assert table.readings() == given_readings


@given(data=st.data())
def test_round_trip_through_a_spreadsheet(any_reading, read, data):
    """Nothing changes when a spreadsheet adds its mark, its separator, its comma, quotes and its own order."""
    given_readings = data.draw(st.lists(any_reading(), min_size=1, max_size=4))
    rows = list(csv.reader(io.StringIO(text_of(given_readings), newline="")))
    header = rows[0]
    order = data.draw(st.permutations(range(len(header))))
    delimiter = data.draw(st.sampled_from([",", ";", "\t"]))
    decimal_comma = delimiter == ";" and data.draw(st.booleans())
    numbers = {place for place, name in enumerate(header) if name.endswith(("_deg", "_m")) and name in NAMES}

    def habit(row, place):
        cell = row[place]
        if row is not header and place in numbers:
            return cell.replace(".", ",") if decimal_comma else cell.removesuffix("00")
        return f" {cell} " if row is header and data.draw(st.booleans()) else cell

    out = io.StringIO(newline="")
    quoting = data.draw(st.sampled_from([csv.QUOTE_MINIMAL, csv.QUOTE_ALL]))
    # A last name that ends in a semicolon without quotes is refused: it cannot be told from a file whose rows a
    # spreadsheet took for one cell each. Our own writer puts it in quotes.
    assume(delimiter != "," or quoting == csv.QUOTE_ALL or not header[order[-1]].rstrip().endswith(";"))
    ending = data.draw(st.sampled_from(["\n", "\r\n"]))
    # The csv module of some Pythons does not quote the line end of another system, which no spreadsheet does.
    writer = csv.writer(out, delimiter=delimiter, quoting=quoting, lineterminator="\r\n")
    writer.writerows([habit(row, place) for place in order] for row in rows)
    written = out.getvalue()
    if ending == "\n" and "\n" not in "".join(map("".join, rows)):
        written = written.replace("\r\n", "\n")
    mark = b"\xef\xbb\xbf" if data.draw(st.booleans()) else b""
    table = read(mark + written.encode())
    assert not table.faults
    assert table.readings() == given_readings


def test_header_is_that_of_the_design(read):
    """Every column is written, in the order of the columns, and then those that are not ours."""
    text = text_of([bed(other={"sample": "7", "=cmd": "x"})])
    assert text.splitlines()[0] == ",".join(NAMES) + ",'=cmd,sample"
    assert read(text).other_names == ("=cmd", "sample")


@pytest.mark.parametrize("name", [";", "sample;", "a;b"])
def test_a_column_named_with_semicolons_is_written_and_read(read, name):
    """A name that ends in a semicolon comes back from our own file, although it stands last."""
    reading = bed(other={name: "7"})
    assert read(text_of([reading])).readings() == [reading]


def test_numbers_have_fixed_decimals():
    """Numbers, times and flags are written one way only."""
    row = dict(
        zip(
            *csv.reader(
                text_of(
                    [
                        bed(
                            latitude_deg=54.5,
                            longitude_deg=-2,
                            altitude_m=300,
                            recorded_at=datetime(2026, 5, 1, 9, 30, tzinfo=UTC),
                            samples=7,
                        )
                    ]
                ).splitlines()
            ),
            strict=True,
        )
    )
    assert row["strike_deg"] == "45.0000"
    assert row["latitude_deg"] == "54.5000000"
    assert row["altitude_m"] == "300.00"
    assert row["recorded_at"] == "2026-05-01T09:30:00.000Z"
    assert (row["samples"], row["struck_out"], row["scatter_deg"]) == ("7", "no", "")


@pytest.mark.parametrize(
    ("text", "cell"),
    [
        ("=1+1", "'=1+1"),
        ("+1", "'+1"),
        ("-1", "'-1"),
        ("@x", "'@x"),
        ("\tx", '"\'\tx"'),
        ("\nx", '"\'\nx"'),
        ("'=1", "''=1"),
        ("''+", "'''+"),
        ("'tis wet", "'tis wet"),
        ("'", "'"),
        ("a=1", "a=1"),
    ],
)
def test_formulas_are_guarded(read, text, cell):
    """Text that a spreadsheet would run gets an apostrophe, and comes back without it."""
    written = text_of([bed(note=text)])
    assert written.endswith(f",{cell}\n")
    assert read(written).readings()[0].note == text


def test_an_own_apostrophe_of_a_spreadsheet_stays(read):
    """An apostrophe before other text belongs to the text."""
    table = read("feature,strike_deg,dip_deg,note\nbedding,1,2,'tis\nbedding,1,2,'=x\n")
    assert [reading.note for reading in table] == ["'tis", "=x"]


def test_dip_direction_in_place_of_strike(read):
    """A dip direction gives the strike, alone or beside one that fits."""
    table = read(
        "feature,strike_deg,dip_direction_deg,dip_deg\n"
        "bedding,,135,30\nbedding,45,135,30\nbedding,45,,30\nbedding,,0,30\nbedding,45,315,30\n"
    )
    assert [reading.strike_deg for reading in table] == [45, 45, 45, 270]
    assert [(fault.line, fault.column) for fault in table.faults] == [(6, "dip_direction_deg")]
    alone = read("dip_direction_deg;dip_deg;feature\n45,5;30;bedding\n90;30;bedding\n;3;bedding\n")
    assert [reading.strike_deg for reading in alone] == [315.5, 0]
    assert [fault.line for fault in alone.faults] == [4]


def test_a_bad_row_is_named_and_the_good_ones_read(read):
    """A fault tells file, line, column, what was found and what was expected."""
    table = read(
        "feature,strike_deg,dip_deg,trend_deg,plunge_deg,recorded_at,revision,struck_out\n"
        "bedding,45,30,,,,,\n"
        "bedding,45,95,,,,,\n"
        "joint,45,30,,,,,\n"
        "hinge,45,30,,,,,\n"
        "hinge,,,45,30,2026-05-01,,\n"
        "hinge,,,nan,inf,,,\n"
        "hinge,,,45,30,,1.5,perhaps\n"
        "bedding,N45E,30,,,,,\n"
        "bedding,1,30,,,,,,,9\n"
        "cleavage,45,30,,,,,\n"
    )
    assert [reading.feature for reading in table] == ["bedding", "cleavage"]
    found = [(fault.file, fault.line, fault.column, fault.found) for fault in table.faults]
    assert found == [
        ("stream", 3, "dip_deg", "'95'"),
        ("stream", 4, "feature", "'joint'"),
        ("stream", 5, "trend_deg", "'': hinge needs trend_deg and plunge_deg"),
        ("stream", 6, "recorded_at", "'2026-05-01'"),
        ("stream", 7, "trend_deg", "'nan'"),
        ("stream", 7, "plunge_deg", "'inf'"),
        ("stream", 8, "revision", "'1.5'"),
        ("stream", 8, "struck_out", "'perhaps'"),
        ("stream", 9, "strike_deg", "'N45E'"),
        ("stream", 10, "", "10 cells"),
    ]
    assert all(fault.expected for fault in table.faults)
    assert table.faulty_rows == 8
    assert "line 3, column dip_deg: found '95'; expected a number from 0 to 90" in str(table.faults[0])


def test_strict_refuses_the_file_whole(read):
    """With strict the first bad rows are named in the error."""
    with pytest.raises(CsvError, match="line 2, column dip_deg: found '95'"):
        read(PLANES + "bedding,45,95\nbedding,45,30\n", strict=True)
    assert len(read(PLANES + "bedding,45,30\n", strict=True)) == 1


def test_line_numbers_count_the_lines_in_notes(read):
    """Line ends inside quotes count, so that a fault is named by the line an editor shows."""
    for ending in ("\n", "\r\n", "\r"):
        text = (
            'feature,strike_deg,dip_deg,note\nbedding,1,2,"one\ntwo\n\nfour"\nbedding,1,99,\n\nbedding,1,2,"a\nb"\n'
            "bedding,x,2,\n"
        ).replace("\n", ending)
        table = read(text)
        assert [fault.line for fault in table.faults] == [6, 10]
        assert [table.place(row) for row in range(len(table))] == [("stream", 2), ("stream", 8)]
        assert table.readings()[0].note == "one\ntwo\n\nfour"


@pytest.mark.parametrize("block", [1, 7, 64, 1000])
def test_blocks_of_any_size_give_the_same(read, monkeypatch, block):
    """How the file is cut into blocks changes nothing, neither readings nor faults."""
    rows = [f'bedding,{n % 360},{n % 91},"note {n}\n, ""q"" "' for n in range(60)]
    rows[7], rows[20] = "bedding,400,1,", 'bedding,1,1,5" pipe'
    rows[33], rows[41] = 'bedding,1,1,"a" b', "bedding,1,1,x,y"
    text = "feature,strike_deg,dip_deg,note\r\n" + "\r\n".join(rows)
    whole = read(text)
    monkeypatch.setattr("analysis.files.records.BLOCK_BYTES", block)
    parts = read(text)
    assert parts.readings() == whole.readings()
    assert parts.faults == whole.faults
    assert [fault.line for fault in whole.faults] == [16, 66, 81]
    assert len(whole) == 57


def test_other_separators_and_habits(read):
    """Semicolons with decimal commas, tabs, a mark, a separator line, spaces and capitals are read."""
    expected = [("bedding", 45.5, 30.25), ("cleavage", 10.0, 20.0)]
    for text in (
        "\ufefffeature;strike_deg;dip_deg\nbedding;45,5;30,25\ncleavage;10;20\n",
        "sep=;\r\nfeature;strike_deg;dip_deg\r\nbedding;45,5;30.25\r\ncleavage;10,0;20\r\n",
        "feature\tstrike_deg\tdip_deg\nbedding\t45.5\t30.25\ncleavage\t10\t20",
        'feature,strike_deg,dip_deg\nbedding,"45,5","30,25"\ncleavage,"10","20"\n',
        ' "feature" , strike_deg,dip_deg \nbedding,45.5,30.25\ncleavage,10,20\n'.replace(
            ' "feature" ', "feature "
        ),
        "dip_deg,feature,strike_deg,,\n30.25, Bedding , 45.5 ,,\n 20,CLEAVAGE,10.0,,\n,,,,\n,,,,\n\n",
        "dip_deg,feature,strike_deg,note\n30.25,bedding,4.55e1\n20,cleavage,+10,\n",
    ):
        table = read(text)
        assert not table.faults
        assert [(r.feature, r.strike_deg, r.dip_deg) for r in table] == expected
        assert all(reading.other == {} for reading in table)


def test_a_comma_that_could_part_thousands_is_refused(read):
    """In a file parted by commas, 1,234 m may be one or a thousand metres; with semicolons it is decimals."""
    assert read('feature,strike_deg,dip_deg,altitude_m\nbedding,1,2,"1,234"\n').faulty_rows == 1
    assert read("feature;strike_deg;dip_deg;altitude_m\nbedding;1;2;1,234\n").readings()[0].altitude_m == 1.23


def test_words_that_pandas_takes_for_nothing_stay_words(read):
    """A fold named NA or nan keeps its name."""
    names = ["NA", "nan", "None", "null", "TRUE", "1", "", "#N/A"]
    table = read("feature,strike_deg,dip_deg,fold,note\n" + "".join(f"bedding,1,2,{n},{n}\n" for n in names))
    assert [reading.fold for reading in table] == names
    assert [reading.note for reading in table] == names


def test_truth_values_are_no_numbers(read):
    """TRUE in a column of numbers is a fault, alone or among numbers."""
    assert read(PLANES + "bedding,TRUE,true\n").faulty_rows == 1
    assert [r.dip_deg for r in read(PLANES + "bedding,1,1\nbedding,TRUE,1\nbedding,0,0\n")] == [1, 0]


def test_unknown_columns_are_kept_and_written_back(read):
    """Columns that are not ours come back, with doubled and missing names made distinct."""
    table = read("feature,strike_deg,dip_deg,sample,,sample,empty\nbedding,1,2,x,y,=z,\n")
    assert dict(table.readings()[0].other) == {"sample": "x", "column 5": "y", "sample (2)": "=z"}
    assert table.other_names == ("sample", "column 5", "sample (2)", "empty")
    again = read(text_of(table))
    assert again.other_names == table.other_names
    assert again.readings() == table.readings()


def test_missing_ids_come_from_the_content(read):
    """Rows without id get one from their content, equal rows of one file different ones, twice the same."""
    text = PLANES + "bedding,45,30\nbedding,45,30\ncleavage,45,30\nbedding,45.00,30\n"
    first, second = read(text), read(text.replace(",", ";"))
    assert list(first.reading_id) == list(second.reading_id)
    assert len(set(first.reading_id)) == 4
    assert first.readings()[0].reading_id == content_id(first.reading(0).cells())
    assert first.readings()[3].reading_id == content_id(first.reading(0).cells(), 3)
    assert first.standing.all()
    # The ids stay with the rows when rows are taken, or the file is written.
    assert list(first.take([3, 0]).reading_id) == [first.reading_id[3], first.reading_id[0]]
    assert list(read(text_of(first)).reading_id) == list(first.reading_id)


def test_importing_twice_adds_nothing():
    """Two files with the same rows without ids have each reading once; different files are added."""
    one, two = (
        PLANES + rows for rows in ("bedding,45,30\nbedding,45,30\n", "bedding,45,30\nbedding,46,30\n")
    )
    table = read_table(*(io.BytesIO(text.encode()) for text in (one, two, one)))
    assert len(table) == 6
    assert int(table.standing.sum()) == 3


@pytest.mark.parametrize(
    "text", ["feature,strike_deg,dip_deg", PLANES, PLANES + "\n\n", PLANES + ",,\r\n", "\ufeff" + PLANES]
)
def test_a_header_alone_is_a_file_without_readings(read, text):
    """A file with only its header is read as no readings, and every column of it is empty."""
    table = read(text)
    assert len(table) == 0
    assert not table.faults
    assert table.vectors.shape == (0, 3)
    assert table.folds() == ()
    assert table.readings() == []
    assert table.standing.shape == table.feature.shape == table.recorded_at.shape == (0,)
    assert text_of(table) == ",".join(NAMES) + "\n"
    assert len(table.in_recorded_order()) == 0


def test_no_readings_make_a_file(tmp_path):
    """Writing nothing gives a file with a header."""
    write_readings(tmp_path / "none.csv", [])
    assert read_readings(tmp_path / "none.csv") == ([], ())


def test_the_last_line_may_lack_its_end_but_not_its_cells(read):
    """A file cut off in the middle of its last row is found out."""
    assert len(read(PLANES + "bedding,45,30")) == 1
    table = read(PLANES + "bedding,45,30\nbedding,45")
    assert len(table) == 1
    assert "cut off" in str(table.faults[0])


def test_rows_may_end_early(read):
    """Spreadsheets leave out empty cells at the end of a row; all rows of a block may be short."""
    text = "feature,strike_deg,dip_deg,note,revision\nbedding,45,30\ncleavage,1,2,x\n"
    assert [(r.note, r.revision) for r in read(text)] == [("", 1), ("x", 1)]
    assert len(read(text + "bedding,1,2,y,2\n")) == 3
    assert [fault.line for fault in read("feature,strike_deg,dip_deg\nbedding\n\n7\n").faults] == [2, 4]


def test_writing_is_atomic(tmp_path, monkeypatch):
    """A failure while writing leaves the old file and nothing else."""
    path = tmp_path / "readings.csv"
    write_readings(path, [bed()])
    before = path.read_bytes()
    flushed = []
    monkeypatch.setattr(os, "fsync", flushed.append)

    def torn(_table):
        yield 0, "half a f"
        raise OSError(28, "No space left on device")

    with monkeypatch.context() as patched:
        patched.setattr(csvfile, "_texts", torn)
        with pytest.raises(CsvError, match="No space left"):
            write_readings(path, [bed(), bed("b")])
    assert path.read_bytes() == before
    assert [entry.name for entry in tmp_path.iterdir()] == ["readings.csv"]
    write_readings(path, [bed(), bed("b")])
    assert len(flushed) == 2  # the file, then its folder
    assert len(read_table(path)) == 2


def test_writing_where_nothing_can_be_written(tmp_path):
    """A missing folder is named."""
    with pytest.raises(CsvError, match="cannot be written"):
        write_readings(tmp_path / "missing" / "x.csv", [bed()])


def test_a_link_stays_a_link(tmp_path):
    """Writing to a link replaces what it points to, with the permissions any new file gets."""
    real, link, plain = tmp_path / "real.csv", tmp_path / "link.csv", tmp_path / "plain"
    plain.write_text("")
    link.symlink_to(real)
    write_readings(link, [bed()])
    assert link.is_symlink()
    assert real.stat().st_mode == plain.stat().st_mode


def test_progress_is_told(tmp_path, monkeypatch):
    """Reading and writing tell the share done, rising to 1."""
    path = tmp_path / "readings.csv"
    monkeypatch.setattr("analysis.files.records.BLOCK_BYTES", 500)
    monkeypatch.setattr(csvfile, "_WRITE_ROWS", 10)
    written, seen = [], []
    write_readings(path, [bed(str(n)) for n in range(50)], progress=written.append)
    read_table(path, path, progress=seen.append)
    for shares in (written, seen):
        assert len(shares) > 4
        assert shares == sorted(shares)
        assert shares[-1] == 1
        assert 0 <= shares[0] < 0.5


def test_a_hundred_thousand_rows(tmp_path):
    """A file of 100,000 rows is read as written, every value of it."""
    draw = np.random.default_rng(3)
    strikes, dips = draw.integers(0, 360, 100_000), draw.integers(0, 91, 100_000)
    path = tmp_path / "many.csv"
    with path.open("w") as stream:
        stream.write("fold,feature,strike_deg,dip_deg,note\n")
        stream.writelines(
            f"F{n % 7},bedding,{s},{d},n{n}\n" for n, (s, d) in enumerate(zip(strikes, dips, strict=True))
        )
    table = read_table(path)
    assert not table.faults
    assert np.array_equal(table.column("strike_deg"), strikes)
    assert np.array_equal(table.column("dip_deg"), dips)
    assert table.folds() == tuple(f"F{n}" for n in range(7))
    assert len(table.of_fold("F3")) == 14_286
    assert table.place(99_999)[1] == 100_001


@settings(max_examples=200)
@given(
    st.lists(st.sampled_from(["a", '"', '""', ",", "\n", "\r\n", "é", ' "', 'x"y']), max_size=30).map(
        "".join
    ),
    st.sampled_from([1, 3, 1000]),
)
def test_records_are_those_of_the_csv_module(text, block):
    """Where quotes are in place, records, cells and lines are cut as the csv module cuts them."""
    data = ("feature,strike_deg,dip_deg\n" + text).encode()
    with pytest.MonkeyPatch.context() as patched:
        patched.setattr("analysis.files.records.BLOCK_BYTES", block)
        records = [
            (part.record(row).decode(), int(part.cells[row]), int(part.lines[row]), bool(part.malformed[row]))
            for part in RecordFile("x", io.BytesIO(data))
            for row in range(len(part))
        ]
    if any(malformed for *_, malformed in records):
        return
    reader = csv.reader(io.StringIO(text, newline=""))
    expected, line = [], 2
    for cells in reader:
        expected.append((cells or [""], line))
        line = reader.line_num + 2
    found = [(next(csv.reader([record]), []) or [""], line) for record, _, line, _ in records]
    assert found == expected
    assert [count for _, count, *_ in records] == [len(cells) for cells, _ in expected]


def test_negative_numbers_are_written_as_numbers():
    """A negative latitude or longitude carries no apostrophe, so that other programs read a number."""
    text = text_of([bed(latitude_deg=-47.5, longitude_deg=-31.25, note="-5 m below the fence")])
    assert ",-47.5000000,-31.2500000," in text
    assert ",'-5 m below the fence" in text
