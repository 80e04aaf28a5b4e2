"""Positions from a device: the permission and its answers, fixes and their faults, the system's switches."""

import threading

import pytest

from fieldapp.devices.plyer_position import MOST_WAITING, PlyerPosition
from fieldapp.devices.ports import PortState

FIX = {"lat": 56.1, "lon": -4.2, "altitude": 310.0, "accuracy": 4.5, "speed": 0.0, "bearing": 0.0}


@pytest.fixture
def android(plyer, permissions, clock):
    """A port on Android, whose permission is not given yet."""
    assert plyer
    assert permissions
    return PlyerPosition("android", clock)


def starts(plyer):
    return [call for call, _ in plyer.gps.calls if call == "start"]


def test_the_permission_is_asked_at_use_and_not_before(android, permissions, plyer):
    """Making the port asks nothing; starting asks for the precise position, and begins once it is allowed."""
    assert permissions.questions == []
    android.start()
    android.start()
    assert [wanted for wanted, _ in permissions.questions] == [["fine", "coarse"]]
    assert android.status().state is PortState.ASKING
    assert starts(plyer) == []
    permissions.answer([True, True])
    assert android.status().state is PortState.ON
    assert plyer.gps.calls == [("start", {"minTime": 1000, "minDistance": 0})]


def test_a_permission_given_before_is_not_asked_again(android, permissions):
    """Where the position is allowed already the receiver begins at once."""
    permissions.granted = True
    android.start()
    assert permissions.questions == []
    assert android.status().state is PortState.ON


def test_whether_the_system_will_ask_is_known_before(android, permissions, clock):
    """The page can explain itself before the question: it is told that there will be one, and asks nothing by it."""
    assert android.will_ask()
    permissions.granted = True
    assert not android.will_ask()
    assert permissions.questions == []
    assert not PlyerPosition("ios", clock).will_ask()


@pytest.mark.parametrize(
    ("answer", "state"), [([False, False], PortState.DENIED), ([], PortState.UNANSWERED)]
)
def test_a_refusal_says_so_and_leaves_typing_open(android, permissions, plyer, answer, state):
    """Denied or interrupted: a message that says what to do, no receiver, and a second try is possible."""
    android.start()
    permissions.answer(answer)
    assert android.status().state is state
    assert "type the position" in android.status().message
    assert not android.status().is_usable
    assert starts(plyer) == []
    assert android.read() == ()
    android.start()
    permissions.answer([True, True])
    assert android.status().state is PortState.ON


def test_only_an_approximate_position_is_told(android, permissions, plyer):
    """With the coarse permission alone the message says so, whether or not the receiver begins."""
    android.start()
    permissions.answer([False, True])
    assert android.status().state is PortState.ON
    assert "approximate" in android.status().message
    android.stop()
    plyer.gps.error = RuntimeError("SecurityException")
    android.start()
    permissions.answer([False, True])
    assert android.status().state is PortState.FAILED
    assert "approximate" in android.status().message


def test_an_answer_after_stop_begins_nothing(android, permissions, plyer):
    """Leaving the page while the question is open leaves the receiver off."""
    android.start()
    android.stop()
    permissions.answer([True, True])
    assert android.status().state is PortState.OFF
    assert plyer.gps.calls == []


@pytest.mark.parametrize(
    ("error", "state"),
    [(NotImplementedError(), PortState.MISSING), (RuntimeError("no service"), PortState.FAILED)],
)
def test_a_device_without_a_receiver_says_so(android, permissions, plyer, error, state):
    """A missing receiver and one that does not start are told, with typing as the way on."""
    permissions.granted = True
    plyer.gps.error = error
    android.start()
    assert android.status().state is state
    assert "type" in android.status().message


def test_without_the_permission_part_of_the_system_it_fails_in_words(plyer, clock):
    """Where Android's permissions cannot be asked the port fails with a message."""
    assert plyer
    port = PlyerPosition("android", clock)
    port.start()
    assert port.status().state is PortState.FAILED
    assert "type" in port.status().message


def test_fixes_wait_until_they_are_read(android, permissions, plyer, clock):
    """Fixes carry the clock's times and are given once, oldest first; stop switches the receiver off."""
    permissions.granted = True
    android.start()
    plyer.gps.on_location(**FIX)
    clock.go(1.0)
    plyer.gps.on_location(**{**FIX, "lat": 56.2})
    first, second = android.read()
    assert (first.time_s, second.time_s) == (1000.0, 1001.0)
    assert first.at.tzinfo is not None
    place = first.position
    assert (place.latitude_deg, place.longitude_deg, place.altitude_m, place.accuracy_m) == (
        56.1,
        -4.2,
        310.0,
        4.5,
    )
    assert place.source == "gps"
    assert second.position.latitude_deg == 56.2
    assert android.read() == ()
    android.stop()
    assert plyer.gps.calls[-1][0] == "stop"
    assert android.status().state is PortState.OFF
    plyer.gps.on_location(**FIX)
    assert android.read() == ()


@pytest.mark.parametrize("accuracy", [0.0, -1.0, None, float("nan")])
def test_an_accuracy_of_nothing_is_unknown(android, permissions, plyer, accuracy):
    """Zero, negative and missing accuracies, by which systems say that they do not know, become None."""
    permissions.granted = True
    android.start()
    plyer.gps.on_location(**{**FIX, "accuracy": accuracy})
    assert android.read()[0].position.accuracy_m is None


@pytest.mark.parametrize("told", [{"lat": 95.0}, {"lat": float("nan")}, {"lon": None}, {"lon": "far"}])
def test_a_fix_that_is_no_place_is_left_out(android, permissions, plyer, told):
    """A fix off the Earth or without coordinates is dropped, and the receiver goes on."""
    permissions.granted = True
    android.start()
    plyer.gps.on_location(**{**FIX, **told})
    plyer.gps.on_location(speed=1.0)
    plyer.gps.on_location(**FIX)
    assert len(android.read()) == 1


def test_fixes_that_nobody_reads_do_not_pile_up(android, permissions, plyer):
    """Only the latest fixes are kept while nobody reads."""
    permissions.granted = True
    android.start()
    for i in range(MOST_WAITING + 50):
        plyer.gps.on_location(**{**FIX, "altitude": float(i)})
    fixes = android.read()
    assert len(fixes) == MOST_WAITING
    assert fixes[-1].position.altitude_m == MOST_WAITING + 49


def test_location_switched_off_and_on_is_told(android, permissions, plyer):
    """Android's switch for the receiver changes the state; the network's does not."""
    permissions.granted = True
    android.start()
    plyer.gps.on_status("provider-disabled", "network")
    assert android.status().state is PortState.ON
    plyer.gps.on_status("provider-disabled", "gps")
    assert android.status().state is PortState.SWITCHED_OFF
    assert "switch it on" in android.status().message
    plyer.gps.on_status("provider-enabled", "gps")
    assert android.status().state is PortState.ON
    plyer.gps.on_status("provider-disabled", "gps")
    plyer.gps.on_location(**FIX)
    assert android.status().state is PortState.ON
    plyer.gps.on_status("provider-disabled", "gps")
    android.stop()
    assert plyer.gps.calls[-1][0] == "stop"


def test_ios_asks_by_itself_and_tells_the_answer(plyer, clock):
    """On iOS starting begins at once; a denial that comes later is told, and allowed again it goes on."""
    port = PlyerPosition("ios", clock)
    port.start()
    assert starts(plyer) == ["start"]
    plyer.gps.on_status("provider-disabled", "standard-ios-provider: denied")
    assert port.status().state is PortState.DENIED
    assert "type the position" in port.status().message
    plyer.gps.on_status("provider-enabled", "standard-ios-provider: authorizedWhenInUse")
    assert port.status().state is PortState.ON
    port.stop()
    assert plyer.gps.calls[-1][0] == "stop"


def test_fixes_from_another_thread_are_not_lost(android, permissions, plyer):
    """Fixes that the system delivers from threads of its own all arrive, each once."""
    permissions.granted = True
    android.start()
    threads = [
        threading.Thread(target=lambda: [plyer.gps.on_location(**FIX) for _ in range(100)]) for _ in range(4)
    ]
    for thread in threads:
        thread.start()
    seen = 0
    while any(thread.is_alive() for thread in threads):
        seen += len(android.read())
    for thread in threads:
        thread.join()
    assert seen + len(android.read()) == 400
