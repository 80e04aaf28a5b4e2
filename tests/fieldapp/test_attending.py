"""The attendant: what a receiver hears reaches the readings, and a calendar that cannot be right is told."""

from __future__ import annotations

from dataclasses import replace
from datetime import timedelta

import pytest

from analysis.orient.features import Feature
from analysis.orient.position import Position
from fieldapp.attending import Attendant
from fieldapp.devices.ports import Fix, PortState, Status
from fieldapp.devices.unavailable import unavailable_devices
from fieldapp.settings import NorthMode

METRE = 1.0 / 111_195.0  # degrees of latitude on the sphere used
BEDDING = Feature.BEDDING


class Receiver:
    """A position port that gives the fixes put into it."""

    def __init__(self):
        self.waiting = []

    def status(self):
        """Say that it runs."""
        return Status(PortState.ON)

    def will_ask(self):
        """Tell that its permission was given long ago."""
        return False

    def start(self):
        """Nothing to switch on."""

    def stop(self):
        """Nothing to switch off."""

    def read(self):
        """Give what came."""
        given, self.waiting = tuple(self.waiting), []
        return given


class Times:
    """The page's clock, and seconds that never go back."""

    def __init__(self, clock):
        self._clock, self._start = clock, clock.now

    def elapsed_s(self):
        """Seconds since the test began."""
        return (self._clock.now - self._start).total_seconds()

    def now(self):
        """The calendar."""
        return self._clock.now


@pytest.fixture
def attended(page, clock):
    """A page with a receiver: give a fix (metres north, accuracy) and let a second pass."""
    page.change_settings(replace(page.settings, north=NorthMode.TRUE))
    port, times, told = Receiver(), Times(clock), []
    attendant = Attendant(replace(unavailable_devices(), position=port), page, times, told.append)
    attendant.start()

    def hear(north_m, accuracy_m):
        place = Position(48.0 + north_m * METRE, -28.0, accuracy_m=accuracy_m, source="gps")
        clock.later(seconds=5)
        port.waiting.append(Fix(times.elapsed_s(), times.now(), place))
        attendant.second()

    return hear, attendant, told


def test_a_reading_gets_the_best_fix_of_its_outcrop(page, kept, attended):
    """A good fix is kept for the outcrop while later ones are worse, and not taken along to the next."""
    hear, attendant, _ = attended
    hear(0.0, 3.0)
    for _ in range(8):
        hear(10.0, 25.0)
    first = page._all[kept(page, BEDDING, "045/30")]
    assert (first.latitude_deg, first.accuracy_m) == (48.0, 3.0)
    page.next_outcrop()
    second = page._all[kept(page, BEDDING, "045/30")]
    assert second.accuracy_m == pytest.approx(25.0)
    attendant.second()
    hear(12.0, 20.0)
    assert page._all[kept(page, BEDDING, "045/30")].latitude_deg == pytest.approx(
        48.0 + 11.0 * METRE, abs=2 * METRE
    )


def test_walking_on_without_a_word_leaves_the_best_fix_behind(page, kept, attended):
    """Readings are never placed at an outcrop that was left, however good its fix was."""
    hear, _, _ = attended
    hear(0.0, 2.0)
    for step in range(1, 20):
        hear(15.0 * step, 8.0)
    reading = page._all[kept(page, BEDDING, "045/30")]
    assert reading.latitude_deg == pytest.approx(48.0 + 250.0 * METRE, abs=50.0 * METRE)


def test_the_place_says_how_its_position_came_about(page, attended):
    """The number of fixes and their spread stand beside accuracy and age, and a longer mean takes more of them."""
    hear, _, _ = attended
    hear(0.0, 5.0)
    assert page.place.position_detail == ""
    hear(4.0, 5.0)
    assert page.place.position_detail == "mean of 2 fixes, spread 2 m"
    page.change_settings(replace(page.settings, average_s=10.0))
    for _ in range(6):
        hear(4.0, 5.0)
    # They come every 5 s, and the page's clock moves on at each look of its own.
    assert page.place.position_detail in ("mean of 2 fixes, spread 0 m", "mean of 3 fixes, spread 0 m")
    page.change_settings(replace(page.settings, average_s=120.0))
    for _ in range(6):
        hear(4.0, 5.0)
    assert int(page.place.position_detail.split()[2]) >= 8


def test_a_calendar_before_the_last_reading_is_told_at_once(page, clock, kept):
    """A clock set back by a year is told when the page comes up; an hour's difference is nothing."""
    kept(page, BEDDING, "045/30")
    for back, said in ((timedelta(hours=1), False), (timedelta(days=365), True)):
        clock.now -= back
        told = []
        Attendant(unavailable_devices(), page, Times(clock), told.append).start()
        assert any("set the clock" in words for words in told) is said
