"""The book of fixes: means, ages, jumps, and a calendar that is set back."""

from datetime import UTC, datetime, timedelta

import pytest
from hypothesis import given
from hypothesis import strategies as st

from analysis.errors import SettingError
from analysis.orient.position import Position
from fieldapp.devices.battery import BatteryWatch
from fieldapp.devices.clock import SystemClock, clock_fault
from fieldapp.devices.fixes import FixBook, FixSettings
from fieldapp.devices.ports import BatteryLevel, Fix

AT = datetime(2026, 5, 14, 9, tzinfo=UTC)
METRE = 1.0 / 111_195.0  # degrees of latitude on the sphere used


def fix(seconds, north_m=0.0, accuracy_m=5.0, at=None):
    """A fix so many metres north of the outcrop."""
    place = Position(56.0 + north_m * METRE, -4.0, 300.0, accuracy_m, "gps")
    return Fix(seconds, at or AT + timedelta(seconds=seconds), place)


def test_an_empty_book_says_so():
    """Without a fix there is no position, no age and no best."""
    quality = FixBook().quality(5.0)
    assert quality.position is None
    assert quality.age_s is None
    assert quality.text == "no position"
    assert FixBook().best() is None


def test_fixes_are_averaged_over_the_window():
    """Fixes of the last 30 s count, older ones no longer; accuracy, age and spread are shown."""
    book = FixBook()
    for seconds, north in [(0, 8.0), (20, 0.0), (40, 4.0)]:
        assert book.add(fix(seconds, north))
    quality = book.quality(52.0)
    assert quality.averaged.fixes == 2
    assert quality.averaged.spread_m == pytest.approx(2.0, abs=0.01)
    assert quality.position.latitude_deg == pytest.approx(56.0 + 2.0 * METRE)
    assert quality.text == "±5 m, 12 s"
    assert quality.warning == ""
    assert not quality.stale
    assert not quality.coarse


@pytest.mark.parametrize(
    ("age", "text", "stale"),
    [(0, "0 s", False), (60, "60 s", False), (61, "61 s", True), (600, "10 min", True), (7200, "2 h", True)],
)
def test_an_old_fix_is_flagged(age, text, stale):
    """From a minute on the position is stale, and its age is told in words."""
    book = FixBook()
    book.add(fix(0))
    quality = book.quality(age)
    assert quality.stale is stale
    assert quality.text == f"±5 m, {text}"
    assert (f"last fix is {text} old" in quality.warning) is stale


@pytest.mark.parametrize(("accuracy", "words"), [(31.0, "coarse: ±31 m"), (None, "accuracy unknown")])
def test_a_coarse_fix_is_flagged(accuracy, words):
    """A fix coarser than 30 m, and one of unknown accuracy, are flagged."""
    book = FixBook()
    book.add(fix(0, accuracy_m=accuracy))
    assert book.quality(1.0).coarse
    assert book.quality(1.0).warning == words


def test_a_jump_of_five_kilometres_is_left_out():
    """One fix 5 km off does not move the position, and the page says that it was left out."""
    book = FixBook()
    for seconds in range(10):
        book.add(fix(seconds))
    before = book.quality(9.5).position
    assert not book.add(fix(10, 5000.0))
    quality = book.quality(10.5)
    assert quality.position == before
    assert quality.warning == "a fix 5.0 km off was left out"
    assert book.best().position.latitude_deg == pytest.approx(56.0)
    assert book.add(fix(11))
    assert book.quality(11.5).warning == ""
    assert book.quality(11.5).position.latitude_deg == pytest.approx(56.0)


def test_jumps_here_and_there_never_become_the_position():
    """Fixes far off that do not agree among themselves stay aside however many come."""
    book = FixBook()
    book.add(fix(0))
    for seconds, north in enumerate([5000.0, -7000.0, 9000.0, -11000.0, 5000.0, 20000.0], start=1):
        assert not book.add(fix(seconds, north))
    assert book.quality(7.0).position.latitude_deg == pytest.approx(56.0)


def test_three_fixes_that_agree_move_the_position():
    """Where the tablet really is elsewhere the third fix there is believed, and the old mean is gone."""
    book = FixBook()
    book.add(fix(0))
    taken = [book.add(fix(seconds, 5000.0 + seconds)) for seconds in (1, 2, 3)]
    assert taken == [False, False, True]
    quality = book.quality(3.0)
    assert quality.averaged.fixes == 3
    assert quality.position.latitude_deg == pytest.approx(56.0 + 5002.0 * METRE)
    assert quality.warning == ""
    assert book.best().position == quality.position


def test_the_best_mean_of_a_place_that_was_left_is_forgotten():
    """A better fix at the place before the move is not kept as the best of the new place."""
    book = FixBook()
    book.add(fix(0, accuracy_m=2.0))
    for seconds in (1, 2, 3):
        book.add(fix(seconds, 5000.0, accuracy_m=9.0))
    assert book.best().position.latitude_deg == pytest.approx(56.0 + 5000.0 * METRE)


def test_a_drive_between_fixes_is_no_jump():
    """After ten minutes without a fix, 5 km are what a car does."""
    book = FixBook()
    book.add(fix(0))
    assert book.add(fix(600, 5000.0))


def test_the_outcrop_takes_the_best_mean():
    """The mean with the smallest accuracy since the outcrop began is kept, even when later fixes are worse."""
    book = FixBook()
    for seconds, accuracy in [(0, 20.0), (40, 4.0), (80, 12.0)]:
        book.add(fix(seconds, accuracy_m=accuracy))
    assert book.best().position.accuracy_m == pytest.approx(4.0)
    book.begin_outcrop()
    assert book.best().position.accuracy_m == pytest.approx(12.0)


def test_a_calendar_set_back_by_a_year_makes_no_old_fix_fresh():
    """Ages come from the clock that never goes back: fixes dated a year earlier change no age and lose none."""
    book = FixBook()
    book.add(fix(0))
    book.add(fix(10, at=AT - timedelta(days=365)))
    quality = book.quality(90.0)
    assert quality.age_s == 80.0
    assert quality.averaged.fixes == 2
    assert quality.stale


@given(
    st.lists(
        st.tuples(st.floats(0, 100), st.floats(-9000, 9000), st.none() | st.floats(0, 3000)), max_size=30
    )
)
def test_any_fixes_keep_the_book_in_order(rows):
    """Whatever comes, the book gives a place among its fixes and a text, and never a negative age."""
    book, seconds = FixBook(), 0.0
    for step, north, accuracy in rows:
        seconds += step
        book.add(fix(seconds, north, accuracy))
        quality = book.quality(seconds - 1.0)
        assert quality.age_s == 0.0 or quality.age_s >= 0.0
        assert abs(quality.position.latitude_deg - 56.0) <= 9001 * METRE
        assert quality.text.startswith("±")
        assert book.best() is not None


@pytest.mark.parametrize(
    "name", ["window_s", "stale_s", "coarse_m", "outcrop_m", "jump_m", "speed_m_s", "agree_to_move"]
)
def test_settings_without_sense_are_refused(name):
    """Zero, negative and unknown limits raise SettingError."""
    for value in (0, -1, float("nan")):
        with pytest.raises(SettingError, match=name):
            FixSettings(**{name: value})


# The calendar ----


def test_a_clock_before_the_last_reading_is_told():
    """A clock set back by a year is named with both dates, and typing stays open."""
    fault = clock_fault(AT - timedelta(days=365), AT)
    assert "2025-05-14" in fault
    assert "2026-05-14" in fault
    assert "can still be typed" in fault


@pytest.mark.parametrize("latest", [None, AT, AT + timedelta(hours=20), AT - timedelta(days=400)])
def test_a_clock_that_goes_on_is_fine(latest):
    """No reading yet, the same day, some hours of difference and a long pause are no fault."""
    assert clock_fault(AT, latest) == ""


def test_the_machines_clock_runs_forward():
    """The system's clock goes forward, and its calendar is aware and in UTC."""
    clock = SystemClock()
    first = clock.elapsed_s()
    assert clock.elapsed_s() >= first
    assert clock.now().utcoffset() == timedelta(0)


# The battery ----


def test_the_battery_note_comes_once_at_fifteen_percent():
    """At 15% the note comes, once; charging or 21% arms it again; an unknown level is silent."""
    watch = BatteryWatch()
    levels = [
        (50, False),
        (16, False),
        (15, False),
        (14, False),
        (18, False),
        (15, None),
        (21, False),
        (15, False),
    ]
    said = [bool(watch.note(BatteryLevel(percent, charging))) for percent, charging in levels]
    assert said == [False, False, True, False, False, False, False, True]
    assert watch.note(None) == ""
    assert watch.note(BatteryLevel(5.0, charging=True)) == ""
    assert watch.note(BatteryLevel(5.0, charging=False)).startswith("battery 5%")
