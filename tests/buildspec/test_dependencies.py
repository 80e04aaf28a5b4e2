"""What the code imports is asked for in pyproject.toml, and what is asked for is pinned."""

from __future__ import annotations

import ast
import re
import sys
import tomllib
from importlib.metadata import packages_distributions
from pathlib import Path

import pytest
from packaging.requirements import Requirement
from packaging.utils import canonicalize_name

ROOT = Path(__file__).resolve().parents[2]
TABLE = tomllib.loads((ROOT / "pyproject.toml").read_text(encoding="utf-8"))
PROJECT = TABLE["project"]
EXTRAS = PROJECT["optional-dependencies"]
CONSTRAINTS = (ROOT / "buildspec" / "constraints.txt").read_text(encoding="utf-8")
PIN = re.compile(r"[a-z0-9]+(?:-[a-z0-9]+)*==[A-Za-z0-9.+!]+")

ON_ANDROID = {"android", "jnius"}
"""What the Android build itself brings."""


def asked_for(*groups):
    """Return the names of the distributions in lists of requirements."""
    return {canonicalize_name(Requirement(line).name) for group in groups for line in group}


def imported_by(folder, files="**/*.py"):
    """Return the top-level names that a folder's files import from outside the project and the library."""
    names = set()
    # Tests may bring helpers of their own along: modules beside them are no dependencies.
    own = {path.stem for folder in (folder, "buildspec") for path in (ROOT / folder).rglob("*.py")}
    own |= {"analysis", "fieldapp", "buildspec", "packing", "tests"}
    for path in (ROOT / folder).glob(files):
        for node in ast.walk(ast.parse(path.read_text(encoding="utf-8"))):
            if isinstance(node, ast.Import):
                names |= {alias.name.partition(".")[0] for alias in node.names}
            elif isinstance(node, ast.ImportFrom) and node.module and not node.level:
                names.add(node.module.partition(".")[0])
    return names - set(sys.stdlib_module_names) - own


def undeclared(names, declared):
    """Return those import names that no declared distribution brings."""
    brought_by = packages_distributions()
    return sorted(
        name
        for name in names
        if not {canonicalize_name(found) for found in brought_by.get(name, [name])} & declared
    )


@pytest.mark.parametrize(
    ("folder", "files", "groups"),
    [
        ("analysis", "**/*.py", [PROJECT["dependencies"], EXTRAS["desk"]]),
        ("fieldapp", "**/*.py", [PROJECT["dependencies"]]),
        ("tests", "**/*.py", [PROJECT["dependencies"], *EXTRAS.values()]),
        ("buildspec", "[!p]*.py", []),
        ("buildspec", "pack.py", []),
        ("buildspec", "pictures.py", [PROJECT["dependencies"], *EXTRAS.values()]),
        ("buildspec", "*/*.py", [EXTRAS["test"]]),
    ],
)
def test_every_import_is_asked_for(folder, files, groups):
    """A fresh environment holds all that the code imports, and the commands of buildspec run on a bare Python."""
    assert undeclared(imported_by(folder, files) - ON_ANDROID, asked_for(*groups)) == []


def test_an_import_that_is_not_asked_for_is_found():
    """The checker of imports knows a distribution by what it brings, and finds what none brings."""
    assert undeclared({"numpy", "packaging"}, {"numpy"}) == ["packaging"]
    assert undeclared({"_pytest"}, {"pytest"}) == []
    assert undeclared({"no_such_library"}, {"numpy"}) == ["no_such_library"]


def constraint_faults(text):
    """Return the lines of a constraints file that are no plain pin of one release."""
    lines = [line.strip() for line in text.splitlines()]
    return [line for line in lines if line and not line.startswith("#") and not PIN.fullmatch(line)]


def test_constraints_are_plain_pins():
    """constraints.txt pins exact releases and carries no address, no option and no hash."""
    assert len(CONSTRAINTS.splitlines()) > 20
    assert constraint_faults(CONSTRAINTS) == []


@pytest.mark.parametrize(
    "line",
    ["numpy>=2", "a @ https://example.com/a.whl", "-i https://example.com", "numpy==2.0 --hash=sha256:0"],
)
def test_a_line_that_is_no_pin_is_found(line):
    """The checker of constraints finds what is no exact release."""
    assert constraint_faults(f"numpy==2.0.1\n{line}\n") == [line]


def test_constraints_cover_and_satisfy_every_dependency():
    """What pyproject.toml asks for, extras and build tools too, is pinned to a release that it accepts."""
    asked = [*TABLE["build-system"]["requires"], *PROJECT["dependencies"]]
    for extra in EXTRAS.values():
        asked += extra
    pins = dict(line.split("==") for line in CONSTRAINTS.splitlines() if "==" in line)
    faults = []
    for requirement in map(Requirement, asked):
        version = pins.get(canonicalize_name(requirement.name))
        if version is None or not requirement.specifier.contains(version, prereleases=True):
            faults.append(f"{requirement} is pinned to {version}")
    assert faults == []
