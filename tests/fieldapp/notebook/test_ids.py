from __future__ import annotations

from datetime import UTC, datetime, timedelta
from uuid import UUID

from hypothesis import given
from hypothesis import strategies as st

from fieldapp.notebook.ids import ReadingIds

NOW = datetime(2022, 2, 22, 19, 22, 22, tzinfo=UTC)


def test_the_time_stands_in_front():
    """The first 48 bits are the milliseconds of the time: RFC 9562, appendix A.6, for the same time."""
    made = UUID(ReadingIds(lambda: NOW)())
    assert made.int >> 80 == 0x017F22E279B0  # the example's unix_ts_ms
    assert made.version == 7
    assert made.variant == "specified in RFC 4122"


def test_random_bits_fill_the_rest():
    """With given random bytes the id is known whole: a counter that begins at random, then 62 random bits."""
    ids = ReadingIds(lambda: NOW, lambda count: b"\xff" * count)
    assert ids() == "017f22e2-79b0-73ff-bfff-ffffffffffff"
    assert ids() == "017f22e2-79b0-7400-bfff-ffffffffffff"


@given(st.lists(st.integers(-5, 5), min_size=1, max_size=50))
def test_ids_rise_whatever_the_clock_does(steps):
    """Ids sort in the order made, within a millisecond and when the clock is set back."""
    now = [NOW]
    ids = ReadingIds(lambda: now[0])
    made = []
    for step in steps:
        now[0] += timedelta(milliseconds=step)
        made += [ids(), ids()]
    assert made == sorted(made)
    assert len(set(made)) == len(made)


def test_more_ids_than_the_counter_holds_still_rise():
    """Ten thousand ids within one millisecond are all different and in order."""
    ids = ReadingIds(lambda: NOW)
    made = [ids() for _ in range(10_000)]
    assert made == sorted(set(made))
