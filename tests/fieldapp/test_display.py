"""Whether a window can be opened: variables that name a server which is there, or is gone."""

from __future__ import annotations

import socket

import pytest

from fieldapp import display
from fieldapp.display import has_display


@pytest.fixture
def sockets(tmp_path, monkeypatch):
    """A folder in place of the one where X servers listen."""
    monkeypatch.setattr(display, "X_SOCKETS", tmp_path)
    return tmp_path


@pytest.mark.parametrize("name", [":7", ":7.0", "unix:7", "unix:7.1"])
def test_an_x_server_that_listens_is_a_display(sockets, name):
    """A display of this machine counts where its socket stands, and not where it does not."""
    assert not has_display({"DISPLAY": name}, "linux")
    with socket.socket(socket.AF_UNIX) as server:
        server.bind(str(sockets / "X7"))
        assert has_display({"DISPLAY": name}, "linux")


def test_a_server_without_a_file_is_found_among_the_sockets(sockets, tmp_path, monkeypatch):
    """Some servers listen under a name alone; another one's number does not count."""
    bound = tmp_path / "unix"
    bound.write_text(
        f"Num RefCount\n0000: 00000002 00000000 00010000 0001 01 23 @{sockets}/X17\n", encoding="utf-8"
    )
    monkeypatch.setattr(display, "BOUND", bound)
    assert has_display({"DISPLAY": ":17"}, "linux")
    assert not has_display({"DISPLAY": ":7"}, "linux")
    bound.unlink()
    assert not has_display({"DISPLAY": ":17"}, "linux")


@pytest.mark.usefixtures("sockets")
def test_what_is_known_without_looking():
    """No variable is no display; one of another machine is believed; other systems always have one."""
    assert not has_display({}, "linux")
    assert not has_display({"DISPLAY": ""}, "linux")
    assert has_display({"DISPLAY": "desk:0"}, "linux")
    assert has_display({}, "darwin")
    assert has_display({}, "win32")


@pytest.mark.usefixtures("sockets")
def test_a_wayland_display_is_a_socket_too(tmp_path):
    """It lies in the user's own folder, or where its name says outright."""
    there = {"WAYLAND_DISPLAY": "wayland-0", "XDG_RUNTIME_DIR": str(tmp_path)}
    assert not has_display(there, "linux")
    (tmp_path / "wayland-0").touch()
    assert has_display(there, "linux")
    assert has_display({"WAYLAND_DISPLAY": str(tmp_path / "wayland-0")}, "linux")
