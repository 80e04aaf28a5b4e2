"""The sides of the ports: the same functions on each, the right side on each machine, and no sensor on a desk."""

import ast
import dataclasses
import inspect
import os
import subprocess
import sys
import typing
from pathlib import Path

import pytest

import fieldapp
from fieldapp.devices import plyer_position, plyer_side, ports, replay, unavailable
from fieldapp.devices.choose import choose_devices, is_field_build, system_name
from fieldapp.devices.ports import Buzz, Devices, PortState

ROOT = Path(fieldapp.__file__).parent
SIDES = {
    "position": (plyer_position.PlyerPosition, unavailable.UnavailablePosition, replay.ReplayPosition),
    "attitude": (plyer_side.PlyerAttitude, unavailable.UnavailableAttitude, replay.ReplayAttitude),
    "vibration": (plyer_side.PlyerVibration, unavailable.UnavailableVibration, replay.ReplayVibration),
    "speech": (plyer_side.PlyerSpeech, unavailable.UnavailableSpeech, replay.ReplaySpeech),
    "wake": (plyer_side.WindowWake, unavailable.UnavailableWake, replay.ReplayWake),
    "battery": (plyer_side.PlyerBattery, unavailable.UnavailableBattery, replay.ReplayBattery),
}
PROTOCOLS = typing.get_type_hints(Devices, vars(ports))


def functions(side):
    """Public functions of a side with their parameters."""
    found = inspect.getmembers(side, inspect.isfunction)
    return {name: tuple(inspect.signature(f).parameters) for name, f in found if not name.startswith("_")}


def test_every_port_has_three_sides():
    """The bundle of devices names exactly the ports whose sides are held together here."""
    assert {field.name for field in dataclasses.fields(Devices)} == set(SIDES)


@pytest.mark.parametrize("name", SIDES)
def test_the_sides_of_a_port_have_the_same_functions(name):
    """Device, unavailable and replay side have the port's functions, with the same parameters, and no others."""
    wanted = functions(PROTOCOLS[name])
    assert wanted
    for side in SIDES[name]:
        assert functions(side) == wanted, side


# The choice ----


def test_a_desktop_gets_sides_that_say_they_are_not_there():
    """On a desktop every port is unavailable, with words, gives nothing, and takes every call."""
    assert system_name() == "desktop"
    devices = choose_devices()
    for field in dataclasses.fields(devices):
        status = getattr(devices, field.name).status()
        assert status.state is PortState.UNAVAILABLE
        assert not status.is_usable
        assert "machine" in status.message
    for port in (devices.position, devices.attitude):
        port.start()
        assert port.read() == ()
        assert port.status().state is PortState.UNAVAILABLE
        port.stop()
    devices.vibration.buzz(Buzz.KEPT)
    devices.speech.say("kept")
    devices.wake.hold()
    devices.wake.release()
    assert devices.battery.level() is None


def test_the_hand_entry_path_is_named():
    """Where position or attitude are unavailable the message says to type."""
    devices = choose_devices()
    assert "type" in devices.position.status().message
    assert "type" in devices.attitude.status().message


def test_a_desktop_never_loads_plyer():
    """Choosing and using the desktop's ports loads neither plyer nor the replay side."""
    script = """
import sys
from fieldapp.devices import choose, measuring, fixes, battery
from fieldapp.devices.clock import SystemClock
from analysis.orient.attitude import Laid
devices = choose.choose_devices()
session = measuring.Measuring(devices.attitude, SystemClock(), devices.wake)
print(session.start(Laid.ON_PLANE).state)
found = {'plyer', 'kivy', 'jnius', 'fieldapp.devices.replay', 'fieldapp.devices.plyer_side'} & set(sys.modules)
print(sorted(found))
"""
    done = subprocess.run(
        [sys.executable, "-c", script], capture_output=True, text=True, check=True, cwd=ROOT.parent
    )
    assert done.stdout.splitlines() == ["no sensors", "[]"]


@pytest.mark.parametrize("mark", [{"ANDROID_ARGUMENT": "x"}, {"KIVY_BUILD": "ios"}])
def test_a_field_device_loads_plyer_at_use_only(mark):
    """On Android and iOS choosing the ports loads plyer's side of them, but not plyer, and not the replay side."""
    script = """
import sys
from fieldapp.devices.choose import choose_devices
choose_devices(object())
found = {'plyer', 'kivy', 'jnius', 'fieldapp.devices.replay', 'fieldapp.devices.plyer_side'} & set(sys.modules)
print(sorted(found))
"""
    done = subprocess.run(
        [sys.executable, "-c", script],
        capture_output=True,
        text=True,
        check=True,
        cwd=ROOT.parent,
        env={**os.environ, **mark},
    )
    assert done.stdout.strip() == "['fieldapp.devices.plyer_side']"


def test_a_field_device_gets_plyers_sides(field_build):
    """On Android and iOS the sides are the device's own."""
    assert is_field_build()
    assert system_name() == field_build
    window = type("Window", (), {"allow_screensaver": True})()
    devices = choose_devices(window)
    for name, (device_side, _, _) in SIDES.items():
        assert type(getattr(devices, name)) is device_side


def test_without_a_window_the_screen_is_left_alone(field_build):
    """Where no window is given keeping awake is unavailable, and all else is there."""
    assert field_build
    assert choose_devices().wake.status().state is PortState.UNAVAILABLE


# Replay ----


def test_no_replay_side_can_be_made_in_a_field_build(field_build, tmp_path):
    """On Android and iOS every replay side refuses to be made, one by one and together."""
    assert field_build
    clock = choose_devices()  # anything: the refusal comes first
    with pytest.raises(replay.ReplayError, match="not played on a field device"):
        replay.replay_devices(tmp_path)
    for make in (
        lambda: replay.ReplayAttitude(tmp_path / "attitude.csv", clock),
        lambda: replay.ReplayPosition(tmp_path / "position.csv", clock),
        replay.ReplayVibration,
        replay.ReplaySpeech,
        replay.ReplayWake,
        replay.ReplayBattery,
    ):
        with pytest.raises(replay.ReplayError):
            make()


def test_nothing_in_the_app_leads_to_the_replay_side_but_the_demo():
    """No module of fieldapp imports the replay side, except a demo's own module."""
    importing = []
    for path in ROOT.rglob("*.py"):
        tree = ast.parse(path.read_text(encoding="utf-8"))
        names = set()
        for node in ast.walk(tree):
            if isinstance(node, ast.Import):
                names |= {alias.name for alias in node.names}
            elif isinstance(node, ast.ImportFrom) and node.module:
                names |= {node.module} | {f"{node.module}.{alias.name}" for alias in node.names}
        if "fieldapp.devices.replay" in names:
            importing.append(path.relative_to(ROOT).as_posix())
    assert [name for name in importing if not name.startswith("demo")] == []
