"""The set-up that both commands share."""

from __future__ import annotations

import importlib.util
import os
import subprocess
import sys
from pathlib import Path

import pytest

from tests.analysis.report.browser import NAMES as BROWSERS

BUILDSPEC = Path(__file__).resolve().parents[2] / "buildspec"


@pytest.fixture
def setup_env(tmp_path, monkeypatch):
    """Return a fresh copy of the module with its root in a temporary folder."""
    spec = importlib.util.spec_from_file_location("setup_env_tried", BUILDSPEC / "setup_env.py")
    module = importlib.util.module_from_spec(spec)
    spec.loader.exec_module(module)
    project = (
        '[build-system]\nrequires = ["builder"]\n[project.optional-dependencies]\ntest = []\ndesk = []\n'
    )
    (tmp_path / "pyproject.toml").write_text(project)
    (tmp_path / "constraints.txt").write_text("a==1\n")
    monkeypatch.setattr(module, "ROOT", tmp_path)
    monkeypatch.setattr(module, "VENV", tmp_path / ".venv")
    monkeypatch.setattr(module, "CONSTRAINTS", tmp_path / "constraints.txt")
    return module


@pytest.fixture
def calls(setup_env, monkeypatch):
    """Let the environment be made and pip be called on paper only; return what was asked for."""
    asked = []
    works = {"yes": False}

    def make_environment(folder):
        folder.mkdir()
        works["yes"] = True
        asked.append("make")

    monkeypatch.setattr(setup_env, "environment_works", lambda folder: works["yes"] and folder.exists())
    monkeypatch.setattr(setup_env, "make_environment", make_environment)
    monkeypatch.setattr(setup_env, "pip_install", lambda _folder, arguments: asked.append(arguments[-1]))
    return asked


def test_environment_is_made_once(setup_env, calls):
    """The second run with nothing changed makes and installs nothing."""
    setup_env.ensure_environment(["desk"])
    assert calls == ["make", "editables", ".[desk]"]
    setup_env.ensure_environment(["desk"])
    assert calls == ["make", "editables", ".[desk]"]


def test_changed_pins_install_again(setup_env, calls):
    """New constraints bring the environment up to date without making it anew."""
    setup_env.ensure_environment(["desk"])
    setup_env.CONSTRAINTS.write_text("a==2\n")
    setup_env.ensure_environment(["desk"])
    assert calls[3:] == ["editables", ".[desk]"]


def test_extras_add_up(setup_env, calls):
    """Asking for the tests' extra keeps the others, and the smaller set is satisfied by the larger."""
    setup_env.ensure_environment(["desk"])
    setup_env.ensure_environment(["test"])
    assert calls[3:] == ["editables", ".[desk,test]"]
    setup_env.ensure_environment(["desk"])
    assert calls[5:] == []


def test_failed_installation_is_tried_again(setup_env, calls, monkeypatch):
    """An installation that broke off leaves no stamp behind."""
    setup_env.ensure_environment(["desk"])
    setup_env.CONSTRAINTS.write_text("a==2\n")

    def fail(folder, arguments):
        raise setup_env.SetupError(f"{folder} {arguments}")

    with monkeypatch.context() as broken:
        broken.setattr(setup_env, "pip_install", fail)
        with pytest.raises(setup_env.SetupError):
            setup_env.ensure_environment(["desk"])
    setup_env.CONSTRAINTS.write_text("a==1\n")
    setup_env.ensure_environment(["desk"])
    assert calls[3:] == ["editables", ".[desk]"]


@pytest.mark.parametrize("text", ["", "[]", "{}", '{"fingerprint": "a"}', "\x00"])
def test_bad_stamp_counts_as_none(setup_env, tmp_path, text):
    """A stamp that cannot be read means that the environment is not up to date."""
    (tmp_path / setup_env.STAMP).write_text(text)
    assert setup_env.read_stamp(tmp_path) == ("", set())


def test_run_needs_all_but_the_tests(setup_env):
    """The app gets every extra but the tests' own."""
    assert setup_env.run_extras() == ["desk"]
    assert setup_env.all_extras() == ["desk", "test"]


def test_present_library_is_seen_and_absent_one_missed(setup_env):
    """A package is missing exactly when what it brings cannot be found."""
    package = setup_env.SystemPackage
    absent = package("nothing-1", "nothing", library="libnothing-of-this-name.so.1")
    no_program = package("nothing-2", "nothing", program="no-program-of-this-name")
    assert package("python3", "this", program=sys.executable).is_present()
    assert not absent.is_present()
    assert not no_program.is_present()


def test_a_program_that_does_as_well_is_seen(setup_env):
    """A package is there when any of the programs that do its work is found."""
    package = setup_env.SystemPackage(
        "nothing-2", "x", program="no-program-of-this-name", others=(sys.executable,)
    )
    assert package.is_present()


def test_the_browser_asked_for_is_one_that_the_tests_find(setup_env):
    """The set-up and the tests of the report know the same browsers."""
    (package,) = setup_env.BROWSER_PACKAGES
    assert (package.program, *package.others) == BROWSERS


def test_missing_packages_are_named_where_they_may_not_be_installed(setup_env, monkeypatch):
    """Somebody without the right to install is told the packages' names."""
    monkeypatch.setattr(sys, "platform", "linux")
    monkeypatch.setattr(setup_env, "can_use_apt", lambda: False)
    absent = setup_env.SystemPackage("libnothing1", "nothing at all", library="libnothing-of-this-name.so.1")
    missing = setup_env.ensure_system([absent])
    assert missing == [absent]
    assert "apt-get install libnothing1" in setup_env.describe_missing(missing)


def test_nothing_is_asked_of_the_system_when_all_is_there(setup_env, monkeypatch):
    """Where every package is present the package manager is not called."""
    monkeypatch.setattr(setup_env, "can_use_apt", lambda: True)
    monkeypatch.setattr(setup_env, "apt_install", lambda names: pytest.fail(f"asked for {names}"))
    assert setup_env.ensure_system([setup_env.SystemPackage("x", "x", program=sys.executable)]) == []


def test_broken_environment_is_seen(setup_env, tmp_path):
    """A folder without a Python that starts is no environment."""
    assert not setup_env.environment_works(tmp_path)
    assert not setup_env.environment_works(tmp_path / "absent")


def test_kivy_touches_nothing_of_the_users(setup_env, tmp_path, monkeypatch):
    """Kivy's files go where they are told, its arguments stay ours, and the desktop's display is not used."""
    monkeypatch.setenv("DISPLAY", ":0")
    monkeypatch.setenv("WAYLAND_DISPLAY", "wayland-0")
    environment = setup_env.kivy_environment(tmp_path, ":71")
    assert environment["KIVY_HOME"] == str(tmp_path)
    assert environment["KIVY_NO_ARGS"] == "1"
    assert environment["DISPLAY"] == ":71"
    assert "WAYLAND_DISPLAY" not in environment
    assert os.environ["DISPLAY"] == ":0"


def test_old_python_is_told_so():
    """A Python that is too old gets one line and no traceback."""
    script = "import sys; sys.version_info = (3, 10, 2); import setup_env; setup_env.require_python()"
    done = subprocess.run(
        [sys.executable, "-c", script], cwd=BUILDSPEC, capture_output=True, text=True, check=False
    )
    assert done.returncode == 1
    assert done.stderr.startswith("Hingewise needs Python 3.11 or newer; this is 3.10.2")
    assert len(done.stderr.splitlines()) == 1
