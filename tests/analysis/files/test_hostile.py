"""Files that are none, or mean harm: a clear error or a named row, within bounded memory and time."""

from __future__ import annotations

import gzip
import io
import random
import tracemalloc
import zipfile

import pytest
from hypothesis import example, given
from hypothesis import strategies as st

from analysis.errors import CsvError, HingewiseError
from analysis.files.csvfile import csv_text, read_table

PLANES = "feature,strike_deg,dip_deg,note\n"
GOOD = "bedding,45,30,\n"


class Endless(io.RawIOBase):
    """A stream that repeats a piece of bytes for ever, and counts what was taken."""

    def __init__(self, start, piece):
        self.start, self.piece, self.taken = start, piece, 0

    def readable(self):
        """It can be read."""
        return True

    def readinto(self, buffer):
        """Fill the buffer."""
        if self.taken == 0:
            part = self.start[: len(buffer)]
        else:
            part = (self.piece * (len(buffer) // len(self.piece) + 1))[: len(buffer)]
        buffer[: len(part)] = part
        self.taken += len(part)
        return len(part)


def zipped():
    out = io.BytesIO()
    with zipfile.ZipFile(out, "w", zipfile.ZIP_DEFLATED) as archive:
        archive.writestr("readings.csv", b"0" * 10_000_000)
    return out.getvalue()


@pytest.mark.parametrize(
    ("content", "message"),
    [
        (b"", "the file is empty"),
        (b" \r\n\n", "the file is empty"),
        (b"\xef\xbb\xbf", "the file is empty"),
        (zipped(), "zip archive or a spreadsheet workbook"),
        (gzip.compress(b"x" * 1000, mtime=0), "compressed file"),
        ((PLANES + GOOD).encode("utf-16"), "UTF-16"),
        ((PLANES + GOOD).encode("utf-16-le"), "no text"),
        (b"SQLite format 3\0" + bytes(1000), "database"),
        (b"%PDF-1.7\n", "PDF"),
        (bytes(1000), "no text"),
        (
            random.Random(1).randbytes(10_000),  # noqa: S311 - rubbish, no secret
            "no text|UTF-8",
        ),
        ("feature,strike_deg,dip_deg,Höhe\n".encode("latin-1") + GOOD.encode(), "0xf6.*UTF-8"),
        (b"x,y\n1,2\n", "names 'x', 'y'.*expected a column named feature"),
        (b"Feature,Strike_deg,dip_deg\n", "Is 'feature' meant"),
        (b"feature,strike_deg\n", "dip_deg"),
        (b"feature,dip_deg,trend_deg\n", "trend_deg and plunge_deg"),
        (b"feature,strike_deg,dip_deg,dip_deg\n", "dip_deg stands there twice"),
        (b"feature,strike_deg,dip_deg," + b",".join(b"c%d" % n for n in range(100_000)), "100003 columns"),
        (b"feature,strike_deg,dip_deg," + b"x" * 300, "no name"),
        (b"hello world, this is a letter.\nIt has two lines.\n", "a column named feature"),
    ],
)
def test_what_is_no_file_of_readings_is_named(read, content, message):
    """The error says what the file is and what to do; nothing else is raised."""
    with pytest.raises(CsvError, match=message) as caught:
        read(content)
    assert caught.value.mend or caught.value.expected
    assert len(str(caught.value)) < 1000


def test_missing_files_and_folders(tmp_path):
    """A path that cannot be read is named, with the reason, also one that no system allows."""
    for path in (tmp_path / "none.csv", tmp_path, "a\0b", "x" * 5000):
        with pytest.raises(CsvError, match="cannot be read"):
            read_table(path)


def test_a_path_is_only_a_name(tmp_path):
    """A name that looks like an address or a compressed file is opened as the plain file it is."""
    for name in ("readings.csv.gz", "http:x.csv", "readings.zip"):
        path = tmp_path / name
        path.write_text(PLANES + GOOD)
        assert len(read_table(path)) == 1


@pytest.mark.parametrize(
    ("row", "found"),
    [
        (b"bedding,1,2,a\0b", "'"),
        (b"bedding,1\0,2,", "1"),
        (b"bedding,1,2,M\xfcller", "0xfc"),
        (b'bedding,1,2,"open', "out of place"),
        (b'bedding,1,2,"a"b', "out of place"),
        (b"bedding,1,2,a\rb", "out of place"),
        (b"bedding,1,2,a,b", "5 cells"),
        (b"bedding,1,2," + b"," * 100_000 + b"x", "cells"),
        (b"bedding,1,2," + b"x" * 40_000, "xxx"),
        (b"bedding,1,2," + b"x" * 1_000_000, "field"),
        (b"bedding," + b"9" * 10_000 + b",2,", "999"),
        (b"bedding,1e999,2,", "1e999"),
        (b"bedding,1_0,2,", "1_0"),
        (b"bedding,0x10,2,", "0x10"),
        ("bedding,\N{ARABIC-INDIC DIGIT FIVE},2,".encode(), "'"),
        (b"bedding,--1,2,", "--1"),
        (b"bedding,=1+1,2,", "=1+1"),
        (b"bedding,1,2;3,", "2;3"),
    ],
)
@pytest.mark.parametrize("ending", [b"\n", b"\r\n"])
def test_a_spoilt_row_spoils_no_other(read, row, found, ending):
    """A row that cannot be read is named with its line, and the rows round it are read."""
    good = GOOD.strip().encode()
    table = read(ending.join([PLANES.strip().encode(), good, row, good, b'cleavage,3,4,"x, y"', b""]))
    assert [fault.line for fault in table.faults] == [3]
    assert found in table.faults[0].found
    assert len(table.faults[0].found) < 200
    assert [reading.feature for reading in table] == ["bedding", "bedding", "cleavage"]
    assert table.readings()[2].note == "x, y"
    assert [table.place(place)[1] for place in range(3)] == [2, 4, 5]


def test_quotes_in_the_middle_of_a_cell_are_text(read):
    """Seconds and inches written with a quote are read as they stand."""
    table = read(PLANES + 'bedding,1,2,30\'15"\nbedding,1,2,5" pipe\n')
    assert [reading.note for reading in table] == ["30'15\"", '5" pipe']


def test_an_open_quote_before_others(read):
    """A quote left open is named by its line, whatever comes after it."""
    table = read(PLANES + GOOD + 'bedding,1,2,"open\n' + GOOD * 3 + 'bedding,1,2,"closed"\n' + GOOD)
    assert [fault.line for fault in table.faults] == [3]
    assert [table.place(row)[1] for row in range(len(table))] == [2, 4, 5, 6, 7, 8]


@pytest.mark.parametrize("frame", [("", ""), ('"', '"'), ('"', "")])
def test_a_cell_of_ten_megabytes(read, frame):
    """A cell as long as a file is named by its line, quoted or not, and memory stays bounded."""
    row = b"bedding,1,2," + frame[0].encode() + b"x" * 10_000_000 + frame[1].encode() + b"\n"
    content = (PLANES + GOOD).encode() + row + GOOD.encode()
    tracemalloc.start()
    try:
        named = str(read(content).faults[0])
    except CsvError as error:
        named = str(error)  # a line that does not fit into a few blocks ends the reading
    peak = tracemalloc.get_traced_memory()[1]
    tracemalloc.stop()
    assert "stream, line 3" in named
    assert len(named) < 1000
    assert peak < 200_000_000


@pytest.mark.parametrize(
    ("start", "piece"),
    [
        (b"", b"x"),
        (b"", b"feature,strike_deg,dip_deg,"),
        (PLANES.encode(), b"x"),
        (PLANES.encode() + b'bedding,1,2,"', b"y" * 97),
        (PLANES.encode(), b","),
        (PLANES.encode(), b'"'),
        (PLANES.encode(), b"rubbish\n"),
        (PLANES.encode() + GOOD.encode(), b"rubbish,1,2,\n"),
        (PLANES.encode() + GOOD.encode(), b'"x\n'),
        (PLANES.encode() + GOOD.encode(), b'a"b","\n'),
    ],
)
def test_an_endless_stream_is_given_up(monkeypatch, start, piece):
    """Rubbish without end is given up after little of it, whatever it is."""
    monkeypatch.setattr("analysis.files.records.BLOCK_BYTES", 100_000)
    stream = Endless(start or piece, piece)
    with pytest.raises(CsvError):
        read_table(stream)
    assert stream.taken < 20_000_000


def test_many_faults_are_counted_and_few_kept(read):
    """A file with thousands of bad rows lists the first thousand faults and counts the rest."""
    table = read(PLANES + GOOD + "bedding,1,99,\n" * 5000)
    assert (len(table), len(table.faults), table.faulty_rows) == (1, 1000, 5000)


PIECES = [
    *(piece.encode() for piece in ['"', ",", ";", "\t", "\n", "\r", "\x00", "'", "=", "-", "é", "\ufeff"]),
    *b"bedding hinge 45 1,5 nan 1e9 yes feature strike_deg dip_deg reading_id revision recorded_at".split(),
    *(b" ", b"\xff", b"x" * 50, b"2026-05-01T09:30:00Z", PLANES.encode(), GOOD.encode()),
]


@given(
    st.lists(st.sampled_from(PIECES) | st.binary(max_size=4), max_size=30).map(b"".join),
    st.booleans(),
    st.sampled_from([1, 5, 50, 10_000]),
)
@example(b'"', True, 1)
@example(b"\r", True, 1)
@example(b"bedding,1,1,\r", True, 1)
@example(b'\r,1"\n', True, 10_000)
def test_any_bytes_are_read_or_refused(read, content, with_header, block):
    """Any bytes give readings and faults, or a CsvError; what was read can be written and read again."""
    with pytest.MonkeyPatch.context() as patched:
        patched.setattr("analysis.files.records.BLOCK_BYTES", block)
        try:
            table = read((PLANES.encode() if with_header else b"") + content)
            readings = table.readings()
        except HingewiseError as error:
            assert isinstance(error, CsvError)  # noqa: PT017 - nothing else may be raised
            return
    assert table.standing.shape == (len(readings),)
    again = read("".join(csv_text(table)))
    assert again.readings() == readings
    assert not again.faults


@pytest.mark.parametrize("cell", [b"\r", b"a\r"])
def test_a_stray_line_end_before_a_separator_spoils_its_own_row_only(read, cell):
    """A carriage return ends a cell in a row with a quote out of place; found by the coverage-guided fuzzer."""
    table = read(PLANES.encode() + cell + b',1"\n' + GOOD.encode())
    assert (len(table), table.faulty_rows) == (1, 1)
    assert "out of place" in table.faults[0].found


@pytest.mark.parametrize("kept", ["\x12", "strike reversed\x07", "\x01 a"])
def test_names_of_warnings_hold_no_control_character(read, kept):
    """A control character among the warnings kept spoils its own row only; found by the coverage-guided fuzzer."""
    table = read(f"feature,strike_deg,dip_deg,warnings_kept\nbedding,45,30,{kept}\nbedding,45,30,steep\n")
    assert [reading.warnings_kept for reading in table.readings()] == [("steep",)]
    assert [fault.column for fault in table.faults] == ["warnings_kept"]


@pytest.mark.parametrize("digits", ["3" + "5" * 34, "18446744073709551615", "9223372036854775808"])
@pytest.mark.parametrize("column", ["samples", "revision", "altitude_m", "strike_deg"])
def test_a_whole_number_of_any_length_spoils_its_own_row_only(read, column, digits):
    """A column of whole numbers beyond 64 bits is refused row by row; found by the coverage-guided fuzzer."""
    names = ["feature", "strike_deg", "dip_deg", "samples", "revision", "altitude_m"]
    cells = {
        "feature": "bedding",
        "strike_deg": "45",
        "dip_deg": "30",
        "samples": "7",
        "revision": "1",
        "altitude_m": "3",
    }
    bad = ",".join(digits if name == column else cells[name] for name in names)
    table = read(f"{','.join(names)}\n{bad}\n".encode())
    assert len(table) == 0
    assert [fault.column for fault in table.faults] == [column]
