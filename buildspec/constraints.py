"""Write constraints.txt anew from the newest releases that go together.

``python3.11 buildspec/constraints.py`` makes a fresh environment with every extra in a temporary folder and
writes down what stands in it. Run it with the oldest Python that the project supports, so that what is pinned
can be installed on the newer ones as well.
"""

from __future__ import annotations

import re
import subprocess
import sys
import tempfile
from pathlib import Path

import setup_env

HEADER = """\
# The exact versions that Hingewise is tested with. Written by buildspec/constraints.py; do not edit by hand.
# Packages that only Windows or macOS needs are not listed, and pip takes their newest fitting release there.
"""
PINNED = re.compile(r"(?P<name>[A-Za-z0-9._-]+)==(?P<version>[^\s;@]+)")
INSTALLERS = {"pip", "setuptools", "wheel"}
"""What a new environment may bring by itself; the project asks for none of them."""


def as_constraints(frozen: str) -> str:
    """Turn the output of ``pip freeze`` into the text of constraints.txt: pinned releases only, sorted."""
    pins = {}
    for line in frozen.splitlines():
        pinned = PINNED.fullmatch(line.strip())
        if pinned:
            pins[re.sub(r"[-_.]+", "-", pinned["name"]).lower()] = pinned["version"]
    lines = [f"{name}=={pins[name]}\n" for name in sorted(pins) if name not in INSTALLERS]
    return HEADER + "".join(lines)


def main() -> int:
    """Resolve everything anew and write the file."""
    setup_env.require_python()
    if sys.version_info[:2] != setup_env.OLDEST_PYTHON:
        wanted = ".".join(map(str, setup_env.OLDEST_PYTHON))
        sys.exit(f"Use Python {wanted}, the oldest supported: what is pinned must install on all of them.")
    with tempfile.TemporaryDirectory(prefix="hingewise-constraints-") as name:
        folder = Path(name) / "venv"
        setup_env.make_environment(folder)
        pip = [str(setup_env.venv_program(folder, "python")), "-m", "pip", "--disable-pip-version-check"]
        requirements = [
            *setup_env.build_requirements(),
            f"{setup_env.ROOT}[{','.join(setup_env.all_extras())}]",
        ]
        subprocess.run([*pip, "install", "--quiet", *requirements], check=True)
        frozen = subprocess.run([*pip, "freeze"], check=True, capture_output=True, text=True).stdout
    setup_env.CONSTRAINTS.write_text(as_constraints(frozen), encoding="utf-8")
    print(f"{setup_env.CONSTRAINTS.relative_to(setup_env.ROOT)} written.")
    return 0


if __name__ == "__main__":
    sys.exit(main())
