"""Generated readings, and a way to read bytes as a file."""

from __future__ import annotations

import io
from datetime import UTC, datetime, timedelta, timezone

import pytest
from hypothesis import strategies as st

from analysis.files.columns import NAMES, QUADRANTS
from analysis.files.csvfile import read_table
from analysis.files.reading import Reading, quadrant_fits

# Everything a file can hold, with the characters that hurt drawn often.
NASTY = st.sampled_from(
    ["=1+1", "'", "''=", '"', ",", ";", "\t", "\r", "\n", "\r\n", "+", "-", "@", " ", "é", "ß", "007", "1/2"]
)
ANY_TEXT = st.text(st.characters(exclude_categories=["Cs"], exclude_characters="\0"), max_size=12)
TEXT = st.lists(NASTY | ANY_TEXT, max_size=4).map("".join)
NAME = st.lists(
    st.sampled_from(["=", "'", '"', ",", ";", "+", "-", "@", " ", "é", "007", "1E5", "Sep"])
    | st.text(st.characters(exclude_categories=["Cs", "Cc", "Zl", "Zp"]), max_size=8),
    max_size=4,
).map(lambda parts: "".join(parts)[:60])
TIMES = st.none() | st.datetimes(
    datetime(1900, 1, 1),  # noqa: DTZ001 - the strategy adds the offset
    datetime(2199, 1, 1),  # noqa: DTZ001
    timezones=st.integers(-12 * 60, 14 * 60).map(lambda minutes: timezone(timedelta(minutes=minutes))),
)
YES_NO = st.booleans()


def _number(low, high):
    return st.none() | st.floats(low, high, allow_nan=False)


@st.composite
def readings(draw, reading_id=None):
    """Draw any reading that can be."""
    feature = draw(st.sampled_from(["bedding", "cleavage", "intersection", "hinge"]))
    azimuth = draw(st.sampled_from([0.0, 90.0, 180.0, 359.99999, 360.0]) | st.floats(0, 360))
    inclination = draw(st.sampled_from([0.0, 90.0]) | st.floats(0, 90))
    fields = {}
    warnings_kept = tuple(draw(st.lists(st.sampled_from(["flat-plane", "outlier", "=x"]), max_size=2)))
    if feature in ("bedding", "cleavage"):
        fields |= {"strike_deg": azimuth, "dip_deg": inclination, "overturned": draw(YES_NO)}
        fitting = [word for word in QUADRANTS if warnings_kept or quadrant_fits(round(azimuth, 4), word)]
        fields["dip_quadrant"] = draw(st.sampled_from(["", *fitting]))
    else:
        fields |= {"trend_deg": azimuth, "plunge_deg": inclination}
    if draw(YES_NO):
        fields |= {"latitude_deg": draw(st.floats(-90, 90)), "longitude_deg": draw(st.floats(-180, 180))}
    # Names of ours are no other columns, and "column 7" is what a column without name is called.
    other_names = NAME.map(str.strip).filter(
        lambda name: name and name not in (*NAMES, "dip_direction_deg") and not name.startswith("column")
    )
    return Reading(
        reading_id=draw(NAME.filter(str.strip)) if reading_id is None else draw(reading_id),
        feature=feature,
        revision=draw(st.integers(1, 3) | st.integers(1, 1_000_000)),
        struck_out=draw(YES_NO),
        recorded_at=draw(TIMES),
        revised_at=draw(TIMES),
        observer=draw(NAME),
        device=draw(NAME),
        fold=draw(NAME),
        outcrop=draw(NAME),
        as_entered=draw(TEXT),
        north_reference=draw(st.sampled_from(["true", "magnetic", "grid"])),
        correction_deg=draw(_number(-180, 180)),
        correction_model=draw(NAME),
        instrument=draw(st.sampled_from(["", "compass", "tablet", "other"])),
        scatter_deg=draw(_number(0, 90)),
        samples=draw(st.none() | st.integers(1, 10**9)),
        warnings_kept=warnings_kept,
        altitude_m=draw(_number(-12_000, 10_000)),
        accuracy_m=draw(_number(0, 10_000_000)),
        position_source=draw(NAME),
        note=draw(TEXT),
        other=draw(st.dictionaries(other_names, TEXT, max_size=2)),
        **fields,
    )


@pytest.fixture(scope="session")
def any_reading():
    """The strategy for readings."""
    return readings


@pytest.fixture(scope="session")
def read():
    """Read bytes or text as a file of readings."""

    def read_bytes(content, **options):
        data = content.encode() if isinstance(content, str) else content
        return read_table(io.BytesIO(data), **options)

    return read_bytes


@pytest.fixture(scope="session")
def noon():
    """A moment."""
    return datetime(2026, 5, 1, 12, 0, tzinfo=UTC)
