"""What run.py and test.py share: the virtual environment, the system's packages and a display for windows.

Standard library only, so that it runs on a bare machine. Nothing is installed twice: the environment carries
a stamp of what it was made from, and the system is asked for a package only when what it brings is missing.
"""

from __future__ import annotations

import contextlib
import ctypes
import hashlib
import importlib.util
import json
import os
import select
import shutil
import subprocess
import sys
import tempfile
from pathlib import Path
from typing import TYPE_CHECKING, NamedTuple

if TYPE_CHECKING:
    from collections.abc import Iterator, Sequence

ROOT = Path(__file__).resolve().parent.parent
sys.path.insert(0, str(ROOT))
from fieldapp.display import has_display  # noqa: E402, F401 - there before anything is installed; run and test ask it

OLDEST_PYTHON = (3, 11)
VENV = ROOT / ".venv"
CONSTRAINTS = ROOT / "buildspec" / "constraints.txt"
STAMP = "hingewise-stamp.json"
TEST_EXTRA = "test"
XVFB_START_S = 30.0
"""How long Xvfb may take to name its display before we give up, in seconds."""


class SetupError(Exception):
    """The machine lacks something that the commands cannot put right by themselves."""


class SystemPackage(NamedTuple):
    """Something the system must bring, and the Debian package that brings it."""

    debian: str
    what: str
    library: str = ""
    program: str = ""
    others: tuple[str, ...] = ()
    """Programs that do as well."""

    def is_present(self) -> bool:
        """Whether the library loads or a program is found, whatever package manager put it there."""
        if self.program:
            return any(shutil.which(name) is not None for name in (self.program, *self.others))
        try:
            ctypes.CDLL(self.library)
        except OSError:
            return False
        return True


# Found by trying: on a Debian with nothing but Python, Kivy's wheel (which brings its own SDL2) opens and
# draws a window under Xvfb with these and what they depend on, and logs no missing library.
WINDOW_PACKAGES = (
    SystemPackage("libgl1", "OpenGL, to draw in a window", library="libGL.so.1"),
    SystemPackage("libmtdev1", "touch screens", library="libmtdev.so.1"),
)
DISPLAY_PACKAGES = (SystemPackage("xvfb", "a display for the window tests", program="Xvfb"),)
# The names that tests/analysis/report/browser.py looks for; a test compares the two.
BROWSER_PACKAGES = (
    SystemPackage(
        "chromium",
        "a browser for the tests of the report",
        program="chromium",
        others=("chromium-browser", "google-chrome", "google-chrome-stable", "chrome", "microsoft-edge"),
    ),
)


def require_python() -> None:
    """Leave with one clear line where Python is too old."""
    if sys.version_info < OLDEST_PYTHON:
        wanted = ".".join(map(str, OLDEST_PYTHON))
        found = ".".join(map(str, sys.version_info[:3]))
        sys.exit(f"Hingewise needs Python {wanted} or newer; this is {found} ({sys.executable}).")


def say(text: str) -> None:
    """Print a line at once, so that it stands in order with what child processes print."""
    print(text, flush=True)


# The system's packages ----


def can_use_apt() -> bool:
    """Whether this is a Debian-like machine on which we may install packages."""
    return shutil.which("apt-get") is not None and hasattr(os, "geteuid") and os.geteuid() == 0


def run_quietly(command: Sequence[str]) -> subprocess.CompletedProcess[str]:
    """Run a command in the project's root with no input, keeping what it prints."""
    return subprocess.run(
        command,
        cwd=ROOT,
        env={**os.environ, "DEBIAN_FRONTEND": "noninteractive"},
        stdin=subprocess.DEVNULL,
        stdout=subprocess.PIPE,
        stderr=subprocess.STDOUT,
        text=True,
        check=False,
    )


def apt_install(names: Sequence[str]) -> None:
    """Install Debian packages by name, after fetching the lists of packages, which may be stale or absent."""
    say(f"Installing from the system's packages: {' '.join(names)}")
    # A failure is let pass: a source may be down and not needed. If it was, installing says so.
    run_quietly(["apt-get", "update", "-qq"])
    command = ["apt-get", "install", "-y", "-qq", "--no-install-recommends", *names]
    done = run_quietly(command)
    if done.returncode:
        raise SetupError(f"{done.stdout.strip()}\n'{' '.join(command)}' failed.")


def ensure_system(packages: Sequence[SystemPackage]) -> list[SystemPackage]:
    """Install those packages that are missing where we may; return those still missing.

    Only Linux is asked: elsewhere Kivy's wheels bring all they need.
    """
    if not sys.platform.startswith("linux"):
        return []
    missing = [package for package in packages if not package.is_present()]
    if missing and can_use_apt():
        apt_install([package.debian for package in missing])
        missing = []
    return missing


def describe_missing(missing: Sequence[SystemPackage]) -> str:
    """Say what is missing and how to get it, for machines where we may not install it ourselves."""
    things = ", ".join(f"{package.library or package.program} ({package.what})" for package in missing)
    names = " ".join(package.debian for package in missing)
    return (
        f"Missing on this machine: {things}.\n"
        f"On Debian and its relatives: sudo apt-get install {names}\n"
        f"On others: the packages that bring these files."
    )


# The virtual environment ----


def venv_program(folder: Path, name: str) -> Path:
    """Path of a program inside the environment, such as ``python`` or ``hingewise``."""
    if os.name == "nt":
        return folder / "Scripts" / f"{name}.exe"
    return folder / "bin" / name


def project_table() -> dict[str, object]:
    """Return pyproject.toml as a dictionary."""
    import tomllib  # noqa: PLC0415  (absent from a Python too old, which must still get require_python's message)

    with (ROOT / "pyproject.toml").open("rb") as file:
        return tomllib.load(file)


def all_extras() -> list[str]:
    """Names of the project's optional sets of dependencies."""
    project = project_table()["project"]
    assert isinstance(project, dict)  # noqa: S101  (for the type checker)
    return sorted(project.get("optional-dependencies", {}))


def run_extras() -> list[str]:
    """Return the extras that the app and the command use: all but the tests' own."""
    return [extra for extra in all_extras() if extra != TEST_EXTRA]


def build_requirements() -> list[str]:
    """Return what building the project needs, so that the constraints hold for it too."""
    build = project_table()["build-system"]
    assert isinstance(build, dict)  # noqa: S101  (for the type checker)
    return [*build["requires"], "editables"]


def fingerprint() -> str:
    """Digest of what decides the environment's content: pyproject.toml, the constraints and this Python."""
    digest = hashlib.sha256()
    for part in (
        (ROOT / "pyproject.toml").read_bytes(),
        CONSTRAINTS.read_bytes(),
        repr((sys.version_info[:3], sys.platform, str(ROOT))).encode(),
    ):
        digest.update(hashlib.sha256(part).digest())
    return digest.hexdigest()


def read_stamp(folder: Path) -> tuple[str, set[str]]:
    """Fingerprint and extras of the environment as it was last made; empty where there is no good stamp."""
    try:
        stamp = json.loads((folder / STAMP).read_text(encoding="utf-8"))
        return str(stamp["fingerprint"]), set(stamp["extras"])
    except (OSError, ValueError, KeyError, TypeError):
        return "", set()


def write_stamp(folder: Path, made_from: str, extras: set[str]) -> None:
    """Note what the environment was made from."""
    text = json.dumps({"fingerprint": made_from, "extras": sorted(extras)})
    (folder / STAMP).write_text(text, encoding="utf-8")


def environment_works(folder: Path) -> bool:
    """Whether the environment's Python starts, is of this very version, and has pip."""
    try:
        answer = subprocess.run(
            [venv_program(folder, "python"), "-c", "import sys, pip; print(sys.version_info[:3])"],
            capture_output=True,
            text=True,
            check=False,
        )
    except OSError:
        return False
    return answer.stdout.strip() == str(tuple(sys.version_info[:3]))


def make_environment(folder: Path) -> None:
    """Make an empty environment, clearing away one that does not work."""
    if importlib.util.find_spec("ensurepip") is None:
        name = f"python{sys.version_info[0]}.{sys.version_info[1]}-venv"
        if not (can_use_apt() and sys.executable.startswith("/usr/bin/")):
            raise SetupError(
                f"This Python ({sys.executable}) cannot make virtual environments.\n"
                f"On Debian and its relatives: sudo apt-get install {name}"
            )
        apt_install([name])
    say(f"Making the virtual environment {folder.name}")
    # A process of its own: this one may have started before ensurepip was there.
    command = [sys.executable, "-m", "venv", "--clear", str(folder)]
    if subprocess.run(command, stdin=subprocess.DEVNULL, check=False).returncode:
        raise SetupError(f"'{' '.join(command)}' failed.")


def pip_install(folder: Path, arguments: Sequence[str]) -> None:
    """Run the environment's pip under the constraints; what it prints matters only where it fails."""
    command = [
        str(venv_program(folder, "python")), "-m", "pip", "install",
        "--quiet", "--no-input", "--disable-pip-version-check", "--no-warn-script-location",
        "-c", str(CONSTRAINTS), *arguments,
    ]  # fmt: skip
    done = run_quietly(command)
    if done.returncode:
        raise SetupError(
            f"{done.stdout.strip()}\npip could not install what Hingewise needs (its message stands above).\n"
            "The usual cause is a package without a ready-made wheel for this Python: Kivy 2.3.1 has them "
            "for Python 3.11 to 3.13."
        )


def ensure_environment(extras: Sequence[str]) -> Path:
    """Make the environment hold the project with these extras, if it does not yet; return its Python."""
    made_from, present = read_stamp(VENV)
    wanted = set(extras)
    now = fingerprint()
    works = environment_works(VENV)
    if works and made_from == now and wanted <= present:
        return venv_program(VENV, "python")
    if not works:
        make_environment(VENV)
        present = set()
    wanted |= present & set(all_extras())
    (VENV / STAMP).unlink(missing_ok=True)
    say("Installing what Hingewise needs into it (the first time takes a few minutes)")
    pip_install(VENV, build_requirements())
    pip_install(VENV, ["--no-build-isolation", "--editable", f".[{','.join(sorted(wanted))}]"])
    write_stamp(VENV, now, wanted)
    return venv_program(VENV, "python")


# The display ----


@contextlib.contextmanager
def virtual_display() -> Iterator[str]:
    """Run Xvfb on a free display number, which it finds itself, and give its name; end it afterwards."""
    read_end, write_end = os.pipe()
    # Large enough for a tablet at density 2; 96 dots to the inch, as on a plain desktop.
    command = ["Xvfb", "-displayfd", str(write_end), "-screen", "0", "2560x2560x24", "-dpi", "96"]
    command += ["-nolisten", "tcp", "-noreset"]
    with tempfile.TemporaryFile("w+", encoding="utf-8", errors="replace") as log:
        server = subprocess.Popen(
            command, pass_fds=(write_end,), stdin=subprocess.DEVNULL, stdout=log, stderr=log
        )
        os.close(write_end)
        try:
            ready, _, _ = select.select([read_end], [], [], XVFB_START_S)
            number = os.read(read_end, 16).decode().strip() if ready else ""
            if not number:
                server.kill()
                server.wait()
                log.seek(0)
                raise SetupError(f"Xvfb did not start. It said:\n{log.read().strip() or '(nothing)'}")
            yield f":{number}"
        finally:
            os.close(read_end)
            server.terminate()
            server.wait()


def kivy_environment(kivy_home: Path, display: str = "") -> dict[str, str]:
    """Environment variables for a quiet Kivy that touches nothing of the user's, on the display named."""
    environment = {
        **os.environ,
        "KIVY_NO_ARGS": "1",
        "KIVY_NO_CONSOLELOG": "1",
        "KIVY_NO_FILELOG": "1",
        "KIVY_HOME": str(kivy_home),
        "MPLBACKEND": "Agg",
    }
    if display:
        environment |= {"DISPLAY": display, "SDL_VIDEODRIVER": "x11", "LIBGL_ALWAYS_SOFTWARE": "1"}
        environment.pop("WAYLAND_DISPLAY", None)
    return environment
