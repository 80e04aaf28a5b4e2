"""Joining: nothing lost, in any order, however often."""

from __future__ import annotations

from hypothesis import given, settings
from hypothesis import strategies as st

from analysis.files.csvfile import csv_text
from analysis.files.join import join
from analysis.files.reading import Reading
from analysis.files.table import ReadingTable

IDS = st.sampled_from(["a", "b", "c"])


def bed(reading_id="a", **fields):
    return Reading(
        **{"reading_id": reading_id, "feature": "bedding", "strike_deg": 45, "dip_deg": 30} | fields
    )


# Few values, so that the same id, revision and content are drawn often: equal readings, edits and conflicts.
SMALL = st.builds(
    bed,
    IDS,
    revision=st.integers(1, 2),
    dip_deg=st.sampled_from([30, 31, 32]),
    struck_out=st.booleans(),
    other=st.sampled_from([{}, {"x": "1"}]),
)
NOTEBOOK = st.lists(SMALL, max_size=8)


@settings(max_examples=1000)  # three thousand notebooks
@given(NOTEBOOK, NOTEBOOK, NOTEBOOK)
def test_the_order_of_joining_does_not_matter(one, two, three):
    """Joining is commutative, associative and idempotent, conflicts and what stands included."""
    whole = join(one, two, three)
    assert join(three, one, two) == whole
    assert join(join(one, two), three) == whole
    assert join(one, join(two, three)) == whole
    assert join(join(one, one, two), join(two, three), one) == whole
    assert join(whole) == join(whole, whole) == join(whole, one) == whole
    assert join(whole, reversed(one)).standing == whole.standing


@given(NOTEBOOK, NOTEBOOK)
def test_nothing_is_lost_and_nothing_added(one, two):
    """The join holds every content of both sides once, and a conflict for each key with several."""
    whole = join(one, two)
    assert set(whole) == set(one) | set(two)
    assert len(whole) == len(set(whole))
    contents = {}
    for reading in whole:
        contents.setdefault((reading.reading_id, reading.revision), set()).add(reading)
    clashes = {key: found for key, found in contents.items() if len(found) > 1}
    assert {(c.reading_id, c.revision): set(c.contents) for c in whole.conflicts} == clashes
    for reading in whole.standing:
        assert reading.revision == max(r.revision for r in whole if r.reading_id == reading.reading_id)
        assert not reading.struck_out


@given(st.data())
def test_joining_files_is_joining_readings(any_reading, read, data):
    """Files written, passed round and joined give the same as joining what was written, conflicts included."""
    one, two = (data.draw(st.lists(any_reading(IDS), max_size=4)) for _ in range(2))
    tables = [read("".join(csv_text(part))) for part in (one, two)]
    whole = join(*tables)
    assert whole == join(one, two)
    handed_over = read("".join(csv_text(whole)))
    assert join(handed_over) == whole
    assert join(handed_over, ReadingTable.from_readings(one)) == whole


def test_joining_nothing():
    """No readings join to no readings."""
    assert (len(join()), join([]).conflicts, join([], []).standing) == (0, (), ())


def test_the_last_edit_stands_in_a_conflict(noon):
    """Of two edits to one revision the later stands, on every tablet; both are listed."""
    early = bed().revised(at=noon, note="from the north")
    late = bed().revised(at=noon.replace(hour=13), note="at the wall")
    whole = join([bed(), late], [bed(), early])
    assert whole.readings == (bed(), early, late)
    assert whole.standing == (late,)
    assert [conflict.contents for conflict in whole.conflicts] == [(early, late)]


def test_striking_out_travels(noon):
    """A reading struck out on one tablet is struck out after joining, and stays in the file."""
    whole = join([bed()], [bed().struck(at=noon)])
    assert whole.standing == ()
    assert len(whole) == 2
