"""The reading record: what it takes, what it refuses, and how it is revised."""

from __future__ import annotations

import copy
import pickle
import subprocess
import sys
import uuid
from datetime import UTC, datetime, timedelta, timezone

import numpy as np
import pytest

from analysis.errors import ReadingError
from analysis.files.columns import NAMES
from analysis.files.reading import Other, Reading, content_id, imported_reading
from analysis.orient import vectors
from analysis.orient.features import Feature


def bed(**fields):
    return Reading(**{"reading_id": "a", "feature": "bedding", "strike_deg": 45, "dip_deg": 30} | fields)


def line(**fields):
    return Reading(**{"reading_id": "a", "feature": "hinge", "trend_deg": 45, "plunge_deg": 30} | fields)


def test_fields_are_the_columns():
    """A reading has one attribute a column, with the same name and in the same order but for the two needed."""
    fields = tuple(name for name in Reading.__dataclass_fields__ if name != "other")
    assert set(fields) == set(NAMES)


@pytest.mark.parametrize("strike", [0, 90, 180, 270, 360])
@pytest.mark.parametrize("dip", [0, 45, 90])
def test_vector_of_plane_is_its_pole(strike, dip):
    """The vector of a plane is its downward pole, at right angles to strike and dip line."""
    reading = bed(strike_deg=strike, dip_deg=dip)
    assert reading.vector == pytest.approx(vectors.pole_vector(strike, dip), abs=1e-12)
    assert reading.vector @ vectors.line_vector(strike, 0) == pytest.approx(0, abs=1e-12)
    assert reading.vector @ vectors.line_vector(strike + 90, dip) == pytest.approx(0, abs=1e-12)


def test_vector_of_line():
    """The vector of a line points along it."""
    assert line(trend_deg=90, plunge_deg=0).vector == pytest.approx([0, 1, 0], abs=1e-12)
    assert line(trend_deg=0, plunge_deg=90).vector == pytest.approx([0, 0, 1], abs=1e-12)


def test_north_is_written_one_way():
    """360 degrees becomes 0, also when only rounding brings it there, and no zero is negative."""
    assert bed(strike_deg=360).strike_deg == 0
    assert bed(strike_deg=359.99996).strike_deg == 0
    assert str(line(trend_deg=-0.0).trend_deg) == "0.0"


def test_dip_direction_follows_strike():
    """The dip direction is strike + 90, and a line has none."""
    assert bed(strike_deg=300).dip_direction_deg == 30
    assert line().dip_direction_deg is None


def test_numbers_keep_the_decimals_written():
    """Numbers are kept to the decimals that a file holds."""
    reading = bed(strike_deg=12.345678, latitude_deg=54.123456789, longitude_deg=0, altitude_m=1.005)
    assert (reading.strike_deg, reading.latitude_deg) == (12.3457, 54.1234568)
    assert bed(strike_deg=np.float64(12), samples=np.int64(7)).samples == 7


def test_times_become_utc():
    """A time with any offset is kept in UTC to the millisecond."""
    at = datetime(2026, 5, 1, 10, 30, 0, 123_999, tzinfo=timezone(timedelta(hours=1)))
    assert bed(recorded_at=at).recorded_at == datetime(2026, 5, 1, 9, 30, 0, 123_000, tzinfo=UTC)


@pytest.mark.parametrize(
    ("fields", "where"),
    [
        ({"strike_deg": -1}, "strike_deg"),
        ({"strike_deg": 360.1}, "strike_deg"),
        ({"dip_deg": 90.5}, "dip_deg"),
        ({"dip_deg": float("nan")}, "dip_deg"),
        ({"dip_deg": float("inf")}, "dip_deg"),
        ({"dip_deg": "30"}, "dip_deg"),
        ({"dip_deg": True}, "dip_deg"),
        ({"dip_deg": None}, "dip_deg"),
        ({"dip_deg": 10**400}, "dip_deg"),
        ({"strike_deg": None}, "strike_deg"),
        ({"trend_deg": 3.0}, "trend_deg"),
        ({"plunge_deg": 0.0}, "plunge_deg"),
        ({"feature": "joint"}, "feature"),
        ({"feature": None}, "feature"),
        ({"reading_id": ""}, "reading_id"),
        ({"reading_id": "  "}, "reading_id"),
        ({"reading_id": "a\nb"}, "reading_id"),
        ({"reading_id": "x" * 201}, "reading_id"),
        ({"revision": 0}, "revision"),
        ({"revision": 1.5}, "revision"),
        ({"revision": None}, "revision"),
        ({"struck_out": "no"}, "struck_out"),
        ({"overturned": 1}, "overturned"),
        ({"recorded_at": datetime(2026, 5, 1)}, "recorded_at"),  # noqa: DTZ001 - that is the fault
        ({"recorded_at": "2026-05-01"}, "recorded_at"),
        ({"recorded_at": datetime(1, 1, 1, tzinfo=timezone(timedelta(hours=5)))}, "recorded_at"),
        ({"dip_quadrant": "NNE"}, "dip_quadrant"),
        ({"dip_quadrant": "NW"}, "dip_quadrant"),
        ({"north_reference": "south"}, "north_reference"),
        ({"instrument": "eye"}, "instrument"),
        ({"correction_deg": 181}, "correction_deg"),
        ({"scatter_deg": -0.1}, "scatter_deg"),
        ({"samples": 0}, "samples"),
        ({"warnings_kept": "outlier"}, "warnings_kept"),
        ({"warnings_kept": ("two words",)}, "warnings_kept"),
        ({"warnings_kept": ("",)}, "warnings_kept"),
        ({"latitude_deg": 54.0}, "longitude_deg"),
        ({"longitude_deg": 1.0}, "latitude_deg"),
        ({"latitude_deg": 91, "longitude_deg": 0}, "latitude_deg"),
        ({"latitude_deg": 0, "longitude_deg": 181}, "longitude_deg"),
        ({"accuracy_m": -1}, "accuracy_m"),
        ({"note": "a\0b"}, "note"),
        ({"note": "\ud800"}, "note"),
        ({"note": "x" * 32_001}, "note"),
        ({"note": None}, "note"),
        ({"fold": "a\tb"}, "fold"),
        ({"other": {"fold": "x"}}, "other"),
        ({"other": {"dip_direction_deg": "x"}}, "other"),
        ({"other": {" ": "x"}}, "other"),
        ({"other": [1]}, "other"),
    ],
)
def test_impossible_readings_are_refused(fields, where):
    """A field that cannot be is refused by name, and the error says what was expected."""
    with pytest.raises(ReadingError) as caught:
        bed(**fields)
    assert caught.value.where == where
    assert caught.value.expected or where == "feature"


@pytest.mark.parametrize(
    ("fields", "where"),
    [
        ({"strike_deg": 1.0}, "strike_deg"),
        ({"trend_deg": None}, "trend_deg"),
        ({"dip_quadrant": "N"}, "dip_quadrant"),
        ({"overturned": True}, "overturned"),
    ],
)
def test_lines_have_nothing_of_a_plane(fields, where):
    """A line with a part of a plane is refused."""
    with pytest.raises(ReadingError) as caught:
        line(**fields)
    assert caught.value.where == where


def test_reversed_strike_is_named_with_its_mend():
    """A quadrant opposite to the right-hand rule is refused, and the reversed strike offered."""
    with pytest.raises(ReadingError, match="strike 225"):
        bed(dip_quadrant="NW")
    assert bed(dip_quadrant="NW", warnings_kept=("right-hand-rule",)).dip_quadrant == "NW"
    assert bed(dip_deg=0, dip_quadrant="NW").dip_quadrant == "NW"
    for word in ("E", "SE", "S"):
        assert bed(dip_quadrant=word).dip_quadrant == word


def test_readings_do_not_change():
    """A reading is frozen, can be a key, and survives copying and pickling."""
    reading = bed(other={"b": "2", "a": "1", "empty": ""})
    with pytest.raises(AttributeError):
        reading.strike_deg = 1.0
    with pytest.raises(TypeError):
        reading.other["a"] = "3"
    assert dict(reading.other) == {"a": "1", "b": "2"}
    assert {copy.deepcopy(reading), pickle.loads(pickle.dumps(reading))} == {reading}  # noqa: S301 - our own
    assert Other({"x": ""}) == Other()


def test_names_lose_their_outer_spaces_and_texts_keep_them():
    """Spaces round a name mean nothing; a note is kept as it is; one accent is one name however typed."""
    reading = bed(fold=" A ", note=" a ", outcrop="e\N{COMBINING ACUTE ACCENT}")
    assert (reading.fold, reading.note, reading.outcrop) == ("A", " a ", "é")


def test_a_revision_follows(noon):
    """A revision counts up, takes the changes and the time, and leaves the first as it was."""
    first = bed(note="wet")
    second = first.revised(at=noon, dip_deg=31)
    assert (second.revision, second.dip_deg, second.revised_at, second.note) == (2, 31, noon, "wet")
    assert (first.revision, first.dip_deg) == (1, 30)
    third = second.struck(at=None)
    assert (third.revision, third.struck_out, third.revised_at) == (3, True, None)
    assert not third.revised(at=noon, struck_out=False).struck_out


@pytest.mark.parametrize(
    "changes",
    [{"reading_id": "b"}, {"revision": 9}, {"revised_at": None}, {"colour": "red"}, {"dip_deg": 91}],
)
def test_a_revision_cannot_change_what_follows_by_itself(noon, changes):
    """Identity, count and time of a revision, unknown fields and impossible values are refused."""
    with pytest.raises(ReadingError):
        bed().revised(at=noon, **changes)


def test_a_plane_may_be_revised_to_a_line(noon):
    """A feature taken for another is mended in one revision."""
    mended = bed().revised(
        at=noon, feature="intersection", strike_deg=None, dip_deg=None, trend_deg=45, plunge_deg=30
    )
    assert mended.feature is Feature.INTERSECTION


def test_content_makes_the_id():
    """The same content gives the same id; another content, or its second occurrence, another."""
    one = imported_reading(feature="bedding", strike_deg=45, dip_deg=30, note="x")
    assert one == imported_reading(feature="bedding", strike_deg=45.00001, dip_deg=30, note="x")
    assert one.reading_id == content_id(one.cells())
    # Made here by hand, and frozen: an id made once must come out of the same row for ever.
    content = "feature=bedding|strike_deg=45.0000|dip_deg=30.0000|north_reference=true|overturned=no|note=x|1"
    space = uuid.uuid5(uuid.NAMESPACE_OID, "hingewise/reading/content/1")
    by_hand = uuid.uuid5(space, content.replace("=", "\x1f").replace("|", "\x1e"))
    assert one.reading_id == str(by_hand) == "1c98ae8b-4916-5ffd-8572-eb01e2985d37"
    others = [
        imported_reading(feature="bedding", strike_deg=45, dip_deg=30, note="y"),
        imported_reading(feature="bedding", strike_deg=45, dip_deg=30, note="x", occurrence=2),
        imported_reading(feature="bedding", strike_deg=45, dip_deg=30, note="x", other={"a": "1"}),
    ]
    assert len({one.reading_id, *(reading.reading_id for reading in others)}) == 4
    struck = imported_reading(feature="bedding", strike_deg=45, dip_deg=30, note="x", struck_out=True)
    assert struck.reading_id == one.reading_id


def test_reading_loads_no_pandas():
    """The app's import of the record loads neither pandas nor kivy."""
    code = (
        "import sys, analysis.files.reading, analysis.files.cells, analysis.files.rows;"
        "print({'pandas', 'kivy'} & set(sys.modules))"
    )
    out = subprocess.run([sys.executable, "-c", code], capture_output=True, text=True, check=True)
    assert out.stdout.strip() == "set()"
