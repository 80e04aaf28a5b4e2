"""Replay: traces written and read, played in time, with their troubles."""

import pytest

from fieldapp.devices import replay
from fieldapp.devices.ports import BatteryLevel, Buzz, PortState


def write(path, text):
    path.write_text(text, encoding="utf-8")
    return path


def test_a_trace_written_is_a_trace_played(tmp_path, clock, simulator):
    """Samples written to a file come back at their times, and not before."""
    sensors = simulator.on_plane(45, 30)
    samples = [sensors.sample(0.1 * i) for i in range(20)]
    replay.write_attitude_trace(tmp_path / "attitude.csv", samples)
    port = replay.replay_devices(tmp_path, clock).attitude
    assert port.read() == ()
    port.start()
    clock.go(0.95)
    first = port.read()
    assert len(first) == 10
    assert port.read() == ()
    clock.go(10.0)
    rest = port.read()
    assert len(rest) == 10
    for sample, played in zip(samples, first + rest, strict=True):
        assert played.time_s == pytest.approx(1000.0 + sample.time_s)
        assert played.specific_force == pytest.approx(sample.specific_force, abs=1e-4)
        assert played.magnetic_field == pytest.approx(sample.magnetic_field, abs=1e-4)
    port.stop()
    assert port.status().state is PortState.OFF
    port.start()
    clock.go(0.05)
    assert len(port.read()) == 1


def test_a_folder_without_traces_is_a_device_without_sensors(tmp_path, clock):
    """A missing trace is a missing part, and says to type."""
    devices = replay.replay_devices(tmp_path, clock)
    for port in (devices.attitude, devices.position):
        port.start()
        assert port.status().state is PortState.MISSING
        assert "type" in port.status().message
        assert port.read() == ()
        port.stop()


def test_positions_and_their_troubles_are_played(tmp_path, clock):
    """Fixes come at their times; an event changes the state of the port."""
    header = ",".join(replay.POSITION_COLUMNS)
    write(tmp_path / "position.csv", f"{header}\n1,56.1,-4.2,300,5,\n2,56.1,-4.2,,,\n3,,,,,denied\n")
    port = replay.replay_devices(tmp_path, clock).position
    port.start()
    clock.go(2.5)
    first, second = port.read()
    assert (first.position.altitude_m, first.position.accuracy_m, first.position.source) == (
        300.0,
        5.0,
        "replay",
    )
    assert second.position.accuracy_m is None
    assert port.status().state is PortState.ON
    clock.go(1.0)
    assert port.read() == ()
    assert port.status().state is PortState.DENIED
    assert "type the position" in port.status().message
    port.stop()
    assert port.read() == ()


@pytest.mark.parametrize(
    ("name", "text"),
    [
        ("attitude.csv", "time_s,x\n1,2\n"),
        ("attitude.csv", ",".join(replay.ATTITUDE_COLUMNS) + "\n1,2,3\n"),
        ("position.csv", ",".join(replay.POSITION_COLUMNS) + "\n1,91,0,,,\n"),
        ("position.csv", ",".join(replay.POSITION_COLUMNS) + "\n1,,,,,lost\n"),
    ],
)
def test_a_bad_trace_is_refused_by_name(tmp_path, clock, name, text):
    """A trace with other columns, holes, impossible places or unknown events raises ReplayError."""
    write(tmp_path / name, text)
    with pytest.raises(replay.ReplayError, match=name):
        replay.replay_devices(tmp_path, clock)


def test_the_manners_are_kept_for_looking_at(tmp_path, clock):
    """Vibration, speech, keeping awake and battery remember what was asked of them."""
    devices = replay.replay_devices(tmp_path, clock)
    devices.vibration.buzz(Buzz.KEPT)
    devices.speech.say("axial planar")
    devices.wake.hold()
    assert devices.vibration.felt == [Buzz.KEPT]
    assert devices.speech.heard == ["axial planar"]
    assert devices.wake.status().state is PortState.ON
    devices.wake.release()
    assert devices.wake.status().state is PortState.OFF
    assert devices.battery.level() is None
    devices.battery.told = BatteryLevel(15.0, charging=False)
    assert devices.battery.level().percent == 15.0
