"""The receiver and its book: what the page hears, second by second."""

from datetime import timedelta

import pytest

from analysis.orient.position import Position
from fieldapp.devices.ports import Fix, PortState, Status
from fieldapp.devices.receiver import Receiver
from fieldapp.devices.unavailable import UnavailablePosition


@pytest.fixture
def receiver(port, clock):
    # The scripted port gives whatever waits in it: here fixes.
    return Receiver(port, clock)


def fix(clock, latitude=56.0, accuracy=5.0):
    return Fix(clock.seconds, clock.now(), Position(latitude, -4.0, 300.0, accuracy, "gps"))


def test_the_page_gets_the_mean_with_its_age(receiver, port, clock):
    """A fix goes to the page with accuracy, source, and a date that is as old as the fix."""
    located = receiver.start()
    assert receiver.is_running
    assert (located.fix, located.message) == (None, "looking for the position")
    port.waiting.append(fix(clock))
    clock.go(12.0)
    located = receiver.tick()
    assert located.message == ""
    assert located.quality.text == "±5 m, 12 s"
    assert located.fix.at == clock.now() - timedelta(seconds=12.0)
    assert (located.fix.latitude_deg, located.fix.accuracy_m, located.fix.source) == (56.0, 5.0, "gps")
    receiver.stop()
    assert port.switched == ["on", "off"]
    assert not receiver.is_running


def test_a_calendar_set_back_makes_no_old_fix_fresh(receiver, port, clock):
    """After the calendar is set back by a year the page's fix is still as old as it is, and never of the future."""
    receiver.start()
    port.waiting.append(fix(clock))
    clock.go(100.0)
    clock.calendar -= timedelta(days=365)
    located = receiver.tick()
    assert (clock.now() - located.fix.at).total_seconds() == pytest.approx(100.0)
    assert located.quality.stale
    assert "old" in located.message


def test_a_jump_is_told_and_does_not_move_the_page(receiver, port, clock):
    """A fix 5 km off leaves the page's fix where it was, with a message."""
    receiver.start()
    port.waiting.append(fix(clock))
    receiver.tick()
    clock.go(1.0)
    port.waiting.append(fix(clock, latitude=56.045))
    located = receiver.tick()
    assert located.fix.latitude_deg == 56.0
    assert located.message == "a fix 5.0 km off was left out"


def test_no_fix_for_a_minute_says_what_to_do(receiver, clock):
    """A receiver that finds nothing says so after a minute, and that the position can be typed."""
    receiver.start()
    clock.go(61.0)
    assert "type the position" in receiver.tick().message


def test_the_ports_own_words_come_first(receiver, port):
    """Denied, missing or off: the page shows what the port says, and there is no fix."""
    port.start_to = Status(PortState.DENIED, "position not allowed: type the position")
    located = receiver.start()
    assert located.message == "position not allowed: type the position"
    assert located.fix is None


def test_a_desktop_has_no_position_and_says_so(clock):
    """On a desktop the receiver gives no fix, ever, and says to type."""
    receiver = Receiver(UnavailablePosition(), clock)
    located = receiver.start()
    assert located.fix is None
    assert "type the position" in located.message


def test_the_best_mean_of_the_outcrop_is_kept(receiver, port, clock):
    """The outcrop takes the best mean, and begins anew at the next outcrop."""
    receiver.start()
    assert receiver.best() is None
    port.waiting.append(fix(clock, accuracy=3.0))
    receiver.tick()
    clock.go(50.0)
    port.waiting.append(fix(clock, accuracy=20.0))
    assert receiver.tick().fix.accuracy_m == pytest.approx(20.0)
    assert receiver.best().accuracy_m == pytest.approx(3.0)
    receiver.begin_outcrop()
    assert receiver.best().accuracy_m == pytest.approx(20.0)
