"""The staged tree alone, with nothing installed but the spec's requirements, is an app that works."""

from __future__ import annotations

import json
import subprocess
import sys
from pathlib import Path

import pytest
import setup_env
from packing.spec import Spec
from packing.staging import stage

BUILT_FOR_ANDROID = {"python3", "hostpython3", "sqlite3", "pyjnius", "android"}
"""Requirements that are Python itself or a way into Android: a desktop has the first and cannot have the others."""


@pytest.fixture(scope="module")
def fresh(tmp_path_factory):
    """A fresh environment: the spec's requirements at its versions, as desktop builds, and not one thing more."""
    folder = tmp_path_factory.mktemp("fresh") / "venv"
    subprocess.run([sys.executable, "-m", "venv", str(folder)], check=True)
    python = setup_env.venv_program(folder, "python")
    pins = [f"{pin.name}=={pin.release}" for pin in Spec().pins() if pin.name not in BUILT_FOR_ANDROID]
    pip = [str(python), "-m", "pip", "--disable-pip-version-check", "install", "--quiet"]
    subprocess.run([*pip, "--no-deps", "--only-binary=:all:", *pins], check=True, capture_output=True)
    return python


@pytest.fixture(scope="module")
def tree(tmp_path_factory, fresh):
    """The staged tree as python-for-android packs it: compiled without docstrings and asserts, no sources."""
    folder = stage(tmp_path_factory.mktemp("tree") / "staged").folder
    subprocess.run([str(fresh), "-OO", "-m", "compileall", "-q", "-b", str(folder)], check=True)
    for path in folder.rglob("*.py"):
        path.unlink()
    return folder


def test_the_staged_app_logs_a_fold_gives_its_verdict_and_writes_a_csv(fresh, tree, tmp_path):
    """Started by main.py on a new device, touches alone lead to a verdict and to a file with every reading."""
    private = tmp_path / "files"
    private.mkdir()
    with setup_env.virtual_display() as display:
        environment = setup_env.kivy_environment(tmp_path / "kivy", display)
        environment |= {"ANDROID_PRIVATE": str(private), "PYTHONDONTWRITEBYTECODE": "1"}
        environment.pop("PYTHONPATH", None)
        done = subprocess.run(
            [str(fresh), "-OO", str(Path(__file__).with_name("staged_journey.py")), str(tree)],
            cwd=tree,
            env=environment,
            stdin=subprocess.DEVNULL,
            capture_output=True,
            text=True,
            timeout=180,
            check=False,
        )
    assert done.returncode == 0, done.stderr[-3000:]
    told = json.loads(done.stdout.splitlines()[-1])
    assert told["sign"] == "crossed bars leaning clockwise"
    assert told["kept"] >= 12, "no verdict may come before 6 readings in each stream"
    assert told["rows"] == told["known"] == told["kept"]
    assert told["mishaps"] == ""
    pins = {pin.name: pin.release for pin in Spec().pins()}
    assert (told["numpy"], told["pandas"]) == (pins["numpy"], pins["pandas"])
    assert any(name.startswith("notebook/hand-over/readings-") for name in told["files"])
    assert all(name.startswith("notebook/") for name in told["files"])
    assert [path.name for path in private.iterdir()] == ["notebook"]
