"""What the tests of the devices share: a clock that stands still, simulated sensors, and a plyer of our own."""

# The stand-ins have the functions of the ports and of plyer, which say what they do.
# ruff: noqa: D102, D106

from __future__ import annotations

import sys
import types
from datetime import UTC, datetime, timedelta

import numpy as np
import pytest
from scipy.spatial.transform import Rotation

from analysis.orient.attitude import STANDARD_GRAVITY
from analysis.orient.attitudes import Plane
from fieldapp.devices.ports import PortState, Sample, Status

START = datetime(2026, 5, 14, 9, 0, tzinfo=UTC)


class StandingClock:
    """A clock that moves when told to; its calendar can be set."""

    def __init__(self):
        self.seconds = 1000.0
        self.calendar = START

    def elapsed_s(self):
        return self.seconds

    def now(self):
        return self.calendar

    def go(self, seconds):
        self.seconds += seconds
        self.calendar += timedelta(seconds=seconds)


class ScriptedAttitude:
    """An attitude port that gives the samples put into it, and counts how often it is switched."""

    def __init__(self):
        self.state = Status(PortState.OFF)
        self.waiting = []
        self.switched = []
        self.start_to = Status(PortState.ON)

    def status(self):
        return self.state

    def start(self):
        self.switched.append("on")
        self.state = self.start_to

    def stop(self):
        self.switched.append("off")
        if self.state.is_usable:
            self.state = Status(PortState.OFF)

    def read(self):
        given, self.waiting = tuple(self.waiting), []
        return given


class CountedWake:
    """A wake port that keeps whether the screen is held awake."""

    def __init__(self):
        self.held = False

    def status(self):
        return Status(PortState.ON if self.held else PortState.OFF)

    def hold(self):
        self.held = True

    def release(self):
        self.held = False


class Simulator:
    """Sensors of a tablet on a plane or with an axis along a line, in a field given, with noise and spikes."""

    def __init__(self, rotation, *, strength=50.0, inclination=66.0, noise=(0.05, 1.0), spikes=0.0, seed=1):
        self.rotation = np.asarray(rotation)
        self.field = strength * np.array(
            [np.cos(np.radians(inclination)), 0.0, np.sin(np.radians(inclination))]
        )
        self.noise, self.spikes, self.rng = noise, spikes, np.random.default_rng(seed)

    @classmethod
    def on_plane(cls, strike, dip, *, over=False, **kwargs):
        """Lie with the back on a plane; `over` with the screen on it."""
        pole = Plane(strike, dip).pole * (1.0 if over else -1.0)
        frame, _ = Rotation.align_vectors([pole], [[0.0, 0.0, 1.0]])
        return cls((frame * Rotation.from_euler("z", 33.0, degrees=True)).as_matrix(), **kwargs)

    @classmethod
    def along(cls, vector, edge, **kwargs):
        """Lie with a device axis along a line."""
        frame, _ = Rotation.align_vectors([vector], [edge])
        return cls(frame.as_matrix(), **kwargs)

    def sample(self, time_s, push=(0.0, 0.0, 0.0)):
        """One sample; `push` is an acceleration of the hand, world frame, m/s²."""
        up = np.array([0.0, 0.0, -STANDARD_GRAVITY]) + push
        force = self.rotation.T @ up + self.rng.normal(0.0, self.noise[0], 3)
        field = self.rotation.T @ self.field + self.rng.normal(0.0, self.noise[1], 3)
        if self.rng.random() < self.spikes:
            force = force + self.rng.normal(0.0, 3.0, 3)
            field = field + self.rng.normal(0.0, 30.0, 3)
        return Sample(time_s, tuple(map(float, force)), tuple(map(float, field)))


@pytest.fixture
def clock():
    return StandingClock()


@pytest.fixture
def wake():
    return CountedWake()


@pytest.fixture
def port():
    return ScriptedAttitude()


@pytest.fixture
def simulator():
    """The class of simulated sensors."""
    return Simulator


class FakeSensor:
    """plyer's accelerometer or compass: polled, with None until there is a value."""

    def __init__(self, name, *, broken=None):
        self.name, self.broken = name, broken
        self.enabled = False
        self.value = (None, None, None)
        self.calls = []

    def enable(self):
        self.calls.append("enable")
        if self.broken is not None:
            raise self.broken
        self.enabled = True

    def disable(self):
        self.calls.append("disable")
        self.enabled = False

    @property
    def acceleration(self):
        return self.value if self.enabled else (None, None, None)

    field = acceleration


class FakeGps:
    """plyer's gps: keeps the callbacks, and does what the test says."""

    def __init__(self):
        self.calls, self.error = [], None
        self.on_location = self.on_status = None

    def configure(self, on_location, on_status=None):
        self.on_location, self.on_status = on_location, on_status

    def start(self, **kwargs):
        self.calls.append(("start", kwargs))
        if self.error is not None:
            raise self.error

    def stop(self):
        self.calls.append(("stop", {}))


@pytest.fixture
def plyer(monkeypatch):
    """A plyer of our own in place of the library."""
    module = types.ModuleType("plyer")
    module.accelerometer, module.compass, module.gps = FakeSensor("a"), FakeSensor("m"), FakeGps()
    monkeypatch.setitem(sys.modules, "plyer", module)
    return module


class FakePermissions(types.ModuleType):
    """android.permissions: keeps the question until the test answers it."""

    class Permission:
        ACCESS_FINE_LOCATION = "fine"
        ACCESS_COARSE_LOCATION = "coarse"

    def __init__(self):
        super().__init__("android.permissions")
        self.granted = False
        self.questions = []

    def check_permission(self, _permission):
        return self.granted

    def request_permissions(self, wanted, callback):
        self.questions.append((wanted, callback))

    def answer(self, granted):
        wanted, callback = self.questions[-1]
        callback(wanted if granted else [], granted)


@pytest.fixture
def permissions(monkeypatch):
    """Android's permissions, asked and answered by the test."""
    module = FakePermissions()
    monkeypatch.setitem(sys.modules, "android", types.ModuleType("android"))
    monkeypatch.setitem(sys.modules, "android.permissions", module)
    return module


@pytest.fixture(params=["ANDROID_ARGUMENT", "KIVY_BUILD"])
def field_build(request, monkeypatch):
    """Make this process look like one on Android or iOS."""
    monkeypatch.setenv(request.param, "ios")
    return "android" if request.param == "ANDROID_ARGUMENT" else "ios"
