"""Position and sensors reach the page: recorded traces stand in for the device."""

# ruff: noqa: PLC0415 - importing Kivy opens a window, so it is imported inside fixtures and functions.

from __future__ import annotations

import math

import pytest

# A tablet lying still on a plane that dips 30 degrees east, its top to the north: specific force (up) and a field of
# 20 microtesla north and 45 down, in the device's frame (x right, y to the top, z out of the screen).
TILT = math.radians(30.0)
FORCE = (-9.81 * math.sin(TILT), 0.0, 9.81 * math.cos(TILT))
FIELD = (45.0 * math.sin(TILT), 20.0, -45.0 * math.cos(TILT))


@pytest.fixture
def traced(open_app, tmp_path):
    """The app with a recorded position and recorded sensors."""
    from fieldapp.devices.ports import Sample
    from fieldapp.devices.replay import replay_devices, write_attitude_trace

    folder = tmp_path / "traces"
    folder.mkdir()
    write_attitude_trace(folder / "attitude.csv", [Sample(0.02 * i, FORCE, FIELD) for i in range(3000)])
    rows = "".join(f"{second}.0,54.2,-2.6,120,4.0,\n" for second in range(30))
    header = "time_s,latitude_deg,longitude_deg,altitude_m,accuracy_m,event\n"
    (folder / "position.csv").write_text(header + rows, encoding="utf-8")
    return open_app(devices=replay_devices(folder))


def test_the_position_and_its_quality_stand_beside_the_outcrop(traced):
    """The accuracy of the receiver's position is shown in the row of the place."""
    log = traced.app.outline.leaf("Log")
    traced.wait(lambda: "±4 m" in log.place_row.position, 6.0)


def test_a_plane_is_measured_and_put_into_the_entry(traced):
    """Measure fills the entry once the tablet was held still; the page says so until a digit is typed over it."""
    log, page = traced.app.outline.leaf("Log"), traced.app.page
    traced.press(log.side.keys["measure"])
    assert "on the plane" in traced.app.outline.sheet.fields.how
    traced.wait(lambda: traced.app.outline.sheet is None, 8.0)
    assert page.entry.azimuth_text[:3] in ("000", "360", "359")
    assert page.entry.inclination_text[:2] == "30"
    assert page.entry.instrument == "tablet"
    assert log.readout.remark == "measured"
    traced.press(log.pad.keys["1"])
    assert log.readout.remark == ""


def test_without_sensors_there_is_no_measure_key(driver):
    """On a machine without sensors the page shows no key that could not work."""
    log = driver.app.outline.leaf("Log")
    assert not driver.app.has_sensors
    assert log.side.keys["measure"].get_root_window() is None
    assert log.side.keys["note"].get_root_window() is not None
