"""The ways in which a block of rows may be read: all give the same readings and the same faults."""

from __future__ import annotations

import io

import numpy as np
import pandas as pd
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from analysis.files import arrowed, blocks, frames
from analysis.files.columns import BY_NAME, Kind
from analysis.files.csvfile import csv_text, read_table
from analysis.files.header import parse_header

NUMBERS = [
    "", "0", "45", "30", "89.99995", "360", "90", "091", "-0", "+10", "1e1", ".5", "5.", "1,5", "-1", "nan", "inf",
    "-inf", "Infinity", "NA", "null", "1e999", "1e-999", " 45", "45 ", "\t7", "0x10", "1_0", "TRUE", "--1", "1e+1",
    "\N{ARABIC-INDIC DIGIT ONE}", "9" * 40, "1,234", "\u221245", "1d1", "1.5.2", "0b1", "1 0",
]  # fmt: skip
TIMES = [
    "", "2026-05-01T09:30:00Z", "2026-05-01T09:30:00.123Z", "2026-05-01T09:30:00.123456Z", "2026-05-01 09:30:00+01:00",
    "2026-05-01T09:30:00+0130", "2026-05-01T09:30Z", "2026-05-01T09Z", "2026-05-01", "2026-05-01T09:30:00", "nan",
    "NaT", "0000-01-01T00:00:00Z", "0001-01-01T00:00:00+01:00", "9999-12-31T23:59:59.999Z", "20260501T093000Z",
    "2026-02-30T09:30:00Z", "2026-05-01T24:00:00Z", "2026-05-01T09:30:60Z", " 2026-05-01T09:30:00Z",
    "2026-W18-5T09:30Z", "2026-05-01T09:30:00-00:00", "1600-01-01T00:00:00Z", "2026-05-01t09:30:00z",
    "2026-05-01T09:30:00.5Z", "2026-05-01T09:30:00,5Z", "now", "Today",
]  # fmt: skip
WORDS = [
    "",
    "bedding",
    "Cleavage",
    " hinge",
    "intersection",
    "joint",
    "yes",
    "no",
    "TRUE",
    "1",
    "0",
    "N",
    "se",
    "true",
]
NAMES = [
    "",
    "007",
    "7",
    "7.0",
    "NA",
    "'=1",
    "'",
    "'tis",
    " x ",
    "é",
    "e\u0301",
    "TRUE",
    "a b",
    "x" * 201,
    "nan",
    '5"',
    "\x12",
    "a\x12b",
]
SEPARATORS = st.sampled_from([",", ";", "\t"])
HEADERS = [
    "feature,strike_deg,dip_deg",
    "reading_id,revision,struck_out,recorded_at,fold,feature,strike_deg,dip_deg,note,samples,warnings_kept,extra",
    "feature,dip_direction_deg,strike_deg,dip_deg,trend_deg,plunge_deg,dip_quadrant,overturned,altitude_m",
]


def cells_of(name):
    """Cells that a column may hold, good ones as often as odd ones."""
    column = BY_NAME.get(name)
    kind = Kind.NUMBER if name == "dip_direction_deg" else Kind.TEXT if column is None else column.kind
    if kind in (Kind.NUMBER, Kind.WHOLE):
        return st.sampled_from(["45", "12.5", "7"]) | st.sampled_from(NUMBERS)
    if kind is Kind.TIME:
        return st.just(TIMES[1]) | st.sampled_from(TIMES)
    if name == "feature":
        return st.just("bedding") | st.sampled_from(WORDS)
    return st.sampled_from(WORDS if kind in (Kind.YES_NO, Kind.WORD) else NAMES)


@st.composite
def files(draw):
    """Draw a file: a column is odd throughout or hardly ever, rows are quoted, short, long or empty now and then."""
    names = draw(st.sampled_from(HEADERS)).split(",")
    separator = draw(SEPARATORS)
    ending = draw(st.sampled_from(["\n", "\r\n", "\r"]))
    columns = [
        cells_of(name) if draw(st.booleans()) else st.just({"feature": "bedding", "note": "x"}.get(name, "5"))
        for name in names
    ]
    quoted = draw(st.booleans())
    rows = []
    for _ in range(draw(st.integers(1, 6))):
        cells = [draw(column) for column in columns]
        if quoted or any(separator in cell for cell in cells):
            cells = ['"' + cell.replace('"', '""') + '"' for cell in cells]
        shape = draw(st.sampled_from(["even"] * 12 + ["short", "long", "empty", "blank"]))
        cells = {"short": cells[:-1], "long": [*cells, "x"], "empty": [], "blank": [""] * len(cells)}.get(
            shape, cells
        )
        rows.append(separator.join(cells))
    end = ending if draw(st.booleans()) else ""
    return (ending.join([separator.join(names), *rows]) + end).encode()


def refuse_all(columns, refused):
    """Send every row to the judge."""
    if "dip_direction_deg" in columns:
        direction = columns.pop("dip_direction_deg")
        columns.setdefault("strike_deg", np.zeros(len(direction)))
    refused[:] = True


def read(content, **options):
    table = read_table(io.BytesIO(content), **options)
    places = [table.place(row)[1] for row in range(len(table))]
    return table.readings(), places, table.faults, "".join(csv_text(table))


@settings(max_examples=300, deadline=None)
@given(files())
def test_all_ways_of_reading_agree(content):
    """Arrow, pandas and the judge of single rows agree in readings, lines and faults."""
    found = read(content)
    assert read(content, clean_parser=arrowed.parse_clean) == found
    with pytest.MonkeyPatch.context() as patched:
        patched.setattr(blocks, "check_together", refuse_all)
        assert read(content) == found


def test_arrow_parses_clean_blocks_only():
    """Arrow gives numbers, times and names of a clean block, and nothing of any other."""
    names = "feature,strike_deg,dip_deg,recorded_at,fold,note"
    header = parse_header("x", names.encode(), first_line=2, line_end=b"\n")
    columns = [BY_NAME[name] for name in header.names]
    clean = b"bedding,45,30.5,2026-05-01T09:30:00+01:00,007,x\nhinge,,90,,7,\n"
    feature, strike, dip, time, fold, note = arrowed.parse_clean(clean, 2, header, columns, ".")
    assert (feature.codes.tolist(), feature.texts) == ([0, 1], ["bedding", "hinge"])
    assert np.array_equal(strike, [45.0, np.nan], equal_nan=True)
    assert dip.tolist() == [30.5, 90.0]
    assert [str(each) for each in time] == ["2026-05-01T08:30:00.000", "NaT"]
    assert fold.texts == ["007", "7"]
    assert np.asarray(note, dtype=object).tolist() == ["x", ""]
    for odd in (b"N45E", b"nan", b'"1,5"', b"1,5"):
        assert arrowed.parse_clean(clean.replace(b"45", odd), 2, header, columns, ".") is None
    assert arrowed.parse_clean(clean.replace(b"+01:00", b""), 2, header, columns, ".") is None
    assert arrowed.parse_clean(clean, 3, header, columns, ".") is None


def test_a_long_row_is_found_where_a_short_one_makes_up_for_it():
    """As many cells as there should be in all the rows together do not hide that one has too many and one too few."""
    header = parse_header("x", b"feature,strike_deg,dip_deg", first_line=2, line_end=b"\n")
    reader = frames.FrameReader(header, [BY_NAME[name] for name in header.names])
    for rows in ("bedding,1,2\nbedding,1\nbedding,1,2,3\n", "bedding,1,2\nbedding,1,2,3\nbedding,1\n"):
        with pytest.raises(pd.errors.ParserError):
            reader.read(rows.encode(), 3)
        table = read_table(io.BytesIO(b"feature,strike_deg,dip_deg\n" + rows.encode()))
        assert len(table) == 1
        assert table.faulty_rows == 2
