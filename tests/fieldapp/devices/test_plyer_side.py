"""The device side against a plyer of our own: sensors, vibration, speech, keep-awake and battery."""

# The stand-ins have the functions of plyer, which says what they do.
# ruff: noqa: D101, D102

import sys
import threading
import types

import pytest

from fieldapp.devices.plyer_side import PlyerAttitude, PlyerBattery, PlyerSpeech, PlyerVibration, WindowWake
from fieldapp.devices.ports import BUZZ_SECONDS, Buzz, PortState

FLAT, FIELD = (0.1, 0.2, 9.8), (3.0, 20.0, -44.0)


def test_sensors_are_on_between_start_and_stop(plyer, clock):
    """Both sensors are switched on by start and off by stop, once each."""
    port = PlyerAttitude("android", clock)
    assert plyer.accelerometer.calls == []
    port.start()
    port.start()
    assert port.status().state is PortState.ON
    port.stop()
    port.stop()
    assert port.status().state is PortState.OFF
    assert plyer.accelerometer.calls == plyer.compass.calls == ["enable", "disable"]
    assert port.read() == ()


def test_a_value_read_twice_is_one_sample(plyer, clock):
    """Polling faster than the sensors gives each pair of values once, when both are new."""
    port = PlyerAttitude("android", clock)
    port.start()
    assert port.read() == ()  # nothing yet
    plyer.accelerometer.value = FLAT
    assert port.read() == ()  # one sensor only
    plyer.compass.value = FIELD
    (sample,) = port.read()
    assert (sample.time_s, sample.specific_force, sample.magnetic_field) == (1000.0, FLAT, FIELD)
    assert port.read() == ()
    plyer.accelerometer.value = (0.1, 0.2, 9.81)
    assert port.read() == ()
    plyer.compass.value = (3.0, 20.1, -44.0)
    assert len(port.read()) == 1
    # After a pause the sensors may still hold what they held.
    port.stop()
    port.start()
    assert len(port.read()) == 1


def test_ios_is_turned_into_the_common_frame(plyer, clock):
    """IOS's acceleration in g, down at rest, comes out as specific force up; its field as it is."""
    port = PlyerAttitude("ios", clock)
    port.start()
    plyer.accelerometer.value, plyer.compass.value = (0.0, 0.0, -1.0), FIELD
    (sample,) = port.read()
    assert sample.specific_force == pytest.approx((0.0, 0.0, 9.80665))
    assert sample.magnetic_field == FIELD


def test_an_uncalibrated_compass_gives_no_sample(plyer, clock):
    """A field of exactly zero, as iOS gives before calibration, is no sample."""
    port = PlyerAttitude("ios", clock)
    port.start()
    plyer.accelerometer.value, plyer.compass.value = (0.0, 0.0, -1.0), (0.0, 0.0, 0.0)
    assert port.read() == ()


@pytest.mark.parametrize("name", ["accelerometer", "compass"])
@pytest.mark.parametrize("error", [NotImplementedError(), RuntimeError("JVM exception occurred")])
def test_a_missing_sensor_is_named_and_the_other_switched_off(plyer, clock, name, error):
    """Where one sensor cannot be switched on both stay off, and the message names it and says to type."""
    getattr(plyer, name).broken = error
    port = PlyerAttitude("android", clock)
    port.start()
    assert port.status().state is PortState.MISSING
    assert name in port.status().message
    assert "type the reading" in port.status().message
    assert not plyer.accelerometer.enabled
    assert not plyer.compass.enabled
    assert port.read() == ()


def test_a_sensor_that_android_does_not_have_is_missing(plyer, clock):
    """A listener without a sensor, as plyer leaves it on a device that has none, is a missing sensor."""
    plyer.compass.listenerm = types.SimpleNamespace(sensor=None)
    port = PlyerAttitude("android", clock)
    port.start()
    assert port.status().state is PortState.MISSING
    assert "compass" in port.status().message
    assert not plyer.compass.enabled


def test_a_sensor_that_breaks_while_read_fails_in_words(plyer, clock, monkeypatch):
    """An error of the system while reading switches the sensors off and is told."""
    port = PlyerAttitude("android", clock)
    port.start()
    monkeypatch.setattr(
        type(plyer.compass), "field", property(lambda _: (_ for _ in ()).throw(OSError("gone"))), raising=True
    )
    assert port.read() == ()
    assert port.status().state is PortState.FAILED
    assert "gone" in port.status().message
    assert not plyer.accelerometer.enabled


def test_a_sensor_that_cannot_be_switched_off_does_not_keep_the_other_on(plyer, clock, monkeypatch):
    """Trouble with one sensor at stop is told, and the other is switched off all the same."""
    port = PlyerAttitude("android", clock)
    port.start()
    monkeypatch.setattr(plyer.accelerometer, "disable", lambda: (_ for _ in ()).throw(OSError("busy")))
    port.stop()
    assert port.status().state is PortState.FAILED
    assert not plyer.compass.enabled


# Vibration ----


class FakeVibrator:
    def __init__(self, *, there=True, error=None):
        self.there, self.error, self.patterns = there, error, []

    def exists(self):
        return self.there

    def pattern(self, pattern, repeat):
        if self.error:
            raise self.error
        assert repeat == -1
        self.patterns.append(tuple(pattern))


def test_each_buzz_feels_different(plyer):
    """Each kind of vibration has its own pattern, beginning with a wait."""
    plyer.vibrator = FakeVibrator()
    port = PlyerVibration()
    for kind in Buzz:
        port.buzz(kind)
    assert plyer.vibrator.patterns == [BUZZ_SECONDS[kind] for kind in Buzz]
    assert len({len(pattern) for pattern in BUZZ_SECONDS.values()}) == len(Buzz)
    assert port.status().state is PortState.ON


@pytest.mark.parametrize(
    ("vibrator", "state"),
    [
        (FakeVibrator(there=False), PortState.MISSING),
        (FakeVibrator(error=NotImplementedError()), PortState.FAILED),
    ],
)
def test_a_device_that_does_not_vibrate_is_left_alone(plyer, vibrator, state):
    """A missing or refusing vibrator is noted once and never raises."""
    plyer.vibrator = vibrator
    port = PlyerVibration()
    port.buzz(Buzz.KEPT)
    port.buzz(Buzz.KEPT)
    assert port.status().state is state
    assert vibrator.patterns == []


# Speech ----


def test_speech_does_not_wait_and_the_newest_text_wins(plyer):
    """While one text is spoken the caller goes on; of those that wait only the newest is spoken."""
    begun, go_on, done = threading.Event(), threading.Event(), threading.Event()
    spoken = []

    def speak(message):
        spoken.append(message)
        if len(spoken) == 1:
            begun.set()
            assert go_on.wait(10)
        else:
            done.set()

    plyer.tts = types.SimpleNamespace(speak=speak)
    port = PlyerSpeech()
    port.say("one")
    assert begun.wait(10)
    port.say("two")
    port.say("three")
    port.say("")
    go_on.set()
    assert done.wait(10)
    assert spoken == ["one", "three"]


def test_a_device_that_cannot_speak_is_silent(plyer):
    """An error of the voice is noted, and nothing is raised."""
    tried = threading.Event()

    def speak(message):
        assert message
        tried.set()
        raise NotImplementedError

    plyer.tts = types.SimpleNamespace(speak=speak)
    port = PlyerSpeech()
    port.say("one")
    assert tried.wait(10)
    for thread in threading.enumerate():
        if thread.name == "speech":
            thread.join(10)
    assert port.status().state is PortState.FAILED
    tried.clear()
    port.say("two")
    assert not tried.is_set()


# Keep-awake and battery ----


@pytest.mark.parametrize("before", [True, False])
def test_the_screen_is_held_awake_and_given_back(before):
    """Holding twice and releasing twice leaves the window as it was before."""
    window = types.SimpleNamespace(allow_screensaver=before)
    port = WindowWake(window)
    port.release()
    assert window.allow_screensaver is before
    port.hold()
    port.hold()
    assert window.allow_screensaver is False
    assert port.status().state is PortState.ON
    port.release()
    port.release()
    assert window.allow_screensaver is before
    assert port.status().state is PortState.OFF


@pytest.mark.parametrize(
    ("told", "level"),
    [
        ({"percentage": 42.0, "isCharging": True}, (42.0, True)),
        ({"percentage": 0, "isCharging": None}, (0.0, None)),
        ({"percentage": -100.0, "isCharging": None}, None),
        ({"percentage": None, "isCharging": None}, None),
    ],
)
def test_the_battery_tells_its_charge_or_nothing(plyer, told, level):
    """A charge is 0 to 100; what the device does not know is None."""
    plyer.battery = types.SimpleNamespace(status=told)
    found = PlyerBattery().level()
    assert (found and (found.percent, found.charging)) == level


def test_a_device_that_does_not_tell_its_charge_fails_in_words(plyer):
    """An error of the system is told by the status, and the level is None."""
    assert "plyer" in sys.modules
    plyer.battery = types.SimpleNamespace()
    port = PlyerBattery()
    assert port.level() is None
    assert port.status().state is PortState.FAILED
