"""The rules of the house, proven on the files themselves. DEVELOPERS.md says them in words.

Each rule is a checker that returns the faults it finds; each checker is also shown a bad sample, so that none
of them can pass by finding nothing ever.
"""

from __future__ import annotations

import ast
import json
import re
import subprocess
import sys
from pathlib import Path
from typing import NamedTuple

import pytest

ROOT = Path(__file__).resolve().parent.parent

TOP_LEVEL = {
    "pyproject.toml", "README.md", "DEVELOPERS.md", "fieldapp", "analysis", "tests", "buildspec",
    "LICENSE", "CHANGELOG.md", ".gitignore", ".ci",
}  # fmt: skip

LONGEST_FILE = 500
"""Lines; a file is read in one sitting."""


class Room(NamedTuple):
    """What a room of analysis may import beside the standard library, `analysis.errors` and itself."""

    rooms: set[str]
    libraries: set[str]
    when_used: set[str] | frozenset[str] = frozenset()  # only where importing the room does not load it


FIELD_ROOMS = {"orient", "stats", "fold", "strain"}
"""What runs on a tablet while somebody waits."""
EVERY_ROOM = FIELD_ROOMS | {"files", "report"}
ROOMS = {
    "": Room(set(), set()),
    "errors": Room(set(), set()),
    "orient": Room(set(), {"numpy", "pygeomag", "pygeodesy"}),
    "stats": Room({"orient"}, {"numpy"}),
    "fold": Room({"orient", "stats"}, {"numpy"}),
    "strain": Room({"orient", "stats", "fold"}, {"numpy"}),
    "files": Room({"orient"}, {"numpy", "pandas"}, {"geopandas", "pyogrio", "pyarrow"}),
    "survey": Room(FIELD_ROOMS | {"files"}, {"numpy", "pandas"}, {"dask", "distributed", "pyarrow"}),
    "report": Room(EVERY_ROOM, {"numpy", "pandas"}, {"matplotlib", "jinja2", "fpdf"}),
    "demo": Room({"orient", "stats", "files"}, {"numpy"}),
    "cli": Room(EVERY_ROOM | {"survey", "demo"}, {"numpy", "pandas", "click"}),
}

TOO_HEAVY = {"kivy", "plyer", "fieldapp", "pandas", "matplotlib", "scipy"}
"""What the computation on a tablet must not load."""
NETWORK = {"socket", "ssl", "http", "urllib.request", "ftplib", "smtplib", "requests", "urllib3", "aiohttp"}
WITH_WIDGETS = {"app", "mishaps", "leaves", "drawing", "look", "__main__"}
"""The rooms of fieldapp that may import Kivy."""

CLOCK_MODULES = {"time", "sched", "timeit"}
CLOCK_CALLS = {"now", "utcnow", "today", "uuid1", "uuid6", "uuid7", "getctime", "getmtime"}

# Written in pieces, or this file would find itself.
MACHINE_PATH = re.compile(r"(?<![\w.~$}-])/(?:work|root|home|tmp|Users)/|[A-Z]:\\\\?Users")
REGISTRY_HOST = re.compile("|".join(f"{host}\\.org" for host in ("pypi", "pythonhosted", "debian", "npmjs")))


class Import(NamedTuple):
    """One import statement's target, by its full name."""

    module: str
    line: int
    deferred: bool
    """Stands inside a function or for type checking only, so that importing the file does not load it."""

    @property
    def library(self) -> str:
        """The top-level package."""
        return self.module.partition(".")[0]


# Finding ----


def tracked_files() -> list[str]:
    """Paths of the project's own files, relative to its root, with slashes."""
    if (ROOT / ".git").exists():
        answer = subprocess.run(
            ["git", "ls-files", "-z"], cwd=ROOT, capture_output=True, text=True, check=True
        ).stdout
        return [name for name in answer.split("\0") if name and (ROOT / name).exists()]
    # An unpacked archive: all that .gitignore does not name.
    ignored = {line.strip("/ ") for line in (ROOT / ".gitignore").read_text().splitlines()}
    found = (path.relative_to(ROOT) for path in ROOT.rglob("*") if path.is_file())
    return [
        path.as_posix()
        for path in found
        if not any(part in ignored or f"*{Path(part).suffix}" in ignored for part in path.parts)
    ]


def python_files(package: str) -> list[Path]:
    """Every Python file of a package as it stands on disk."""
    return sorted((ROOT / package).rglob("*.py"))


def dotted_name(path: Path) -> str:
    """Name under which a file of the project is imported."""
    parts = path.relative_to(ROOT).with_suffix("").parts
    return ".".join(parts[:-1] if parts[-1] == "__init__" else parts)


def room_of(path: Path, package: str) -> str:
    """Room that a file belongs to: the folder or module right under its package."""
    first = path.relative_to(ROOT / package).parts[0]
    return first.removesuffix(".py").replace("__init__", "")


def imports_in(source: str, package: str) -> list[Import]:
    """Every import in a source text, lazy and type-checking ones too, with relative ones resolved."""
    found = []

    def visit(node: ast.AST, *, inside: bool) -> None:
        if isinstance(node, ast.Import):
            found.extend(Import(alias.name, node.lineno, inside) for alias in node.names)
        elif isinstance(node, ast.ImportFrom):
            base = package.split(".")[: len(package.split(".")) - node.level + 1] if node.level else []
            module = ".".join([*base, *([node.module] if node.module else [])])
            # "from analysis import stats" reaches into the room stats.
            names = [f"{module}.{alias.name}" for alias in node.names] if "." not in module else [module]
            own = module.partition(".")[0] in {"analysis", "fieldapp"}
            found.extend(Import(name if own else module, node.lineno, inside) for name in names)
        elif (
            isinstance(node, ast.Call)
            and getattr(node.func, "attr", getattr(node.func, "id", "")) in {"import_module", "__import__"}
            and node.args
            and isinstance(node.args[0], ast.Constant)
        ):
            found.append(Import(str(node.args[0].value), node.lineno, inside))
        # What stands under "if TYPE_CHECKING" is loaded no more than what stands in a function not called.
        type_checking = isinstance(node, ast.If) and getattr(node.test, "id", "") == "TYPE_CHECKING"
        function = isinstance(node, ast.FunctionDef | ast.AsyncFunctionDef | ast.Lambda)
        deeper = inside or function or type_checking
        for child in ast.iter_child_nodes(node):
            visit(child, inside=deeper)

    visit(ast.parse(source), inside=False)
    return found


# Checking ----


def room_faults(room: str, imports: list[Import]) -> list[str]:
    """Imports of a file of analysis that its room does not allow."""
    rules = ROOMS[room]
    faults = []
    for found in imports:
        if found.library == "analysis":
            target = [*found.module.split("."), ""][1]
            allowed = target in {room, "errors", "__version__"} | rules.rooms
        elif found.module in NETWORK or found.library in NETWORK:
            allowed = False
        else:
            allowed = (
                found.library in sys.stdlib_module_names
                or found.library in rules.libraries
                or (found.deferred and found.library in rules.when_used)
            )
        if not allowed:
            faults.append(f"line {found.line}: {room or 'analysis'} may not import {found.module} here")
    return faults


def clock_faults(source: str) -> list[str]:
    """Places where a source text looks at a clock."""
    faults = [
        f"line {found.line}: imports {found.module}"
        for found in imports_in(source, "analysis")
        if found.library in CLOCK_MODULES
    ]
    for node in ast.walk(ast.parse(source)):
        if isinstance(node, ast.Attribute) and node.attr in CLOCK_CALLS:
            faults.append(f"line {node.lineno}: .{node.attr}")
        if isinstance(node, ast.ImportFrom):
            faults += [f"line {node.lineno}: {name.name}" for name in node.names if name.name in CLOCK_CALLS]
        if (
            isinstance(node, ast.Call)
            and getattr(node.func, "attr", getattr(node.func, "id", "")) in {"datetime64", "Timestamp"}
            and any(isinstance(arg, ast.Constant) and arg.value in {"now", "today"} for arg in node.args)
        ):
            faults.append(f"line {node.lineno}: a time stamp of now")
    return faults


def address_faults(text: str) -> list[str]:
    """Paths of somebody's machine and hosts of package registries in a text."""
    return [found.group() for pattern in (MACHINE_PATH, REGISTRY_HOST) for found in pattern.finditer(text)]


def load_fresh(*names: str) -> tuple[list[str], set[str]]:
    """Import modules, and all that packages among them hold, in a new interpreter.

    Returns the modules imported and the top-level names that stand in `sys.modules` after it.
    """
    script = """
import importlib, json, pkgutil, sys
imported = []
for name in sys.argv[1:]:
    module = importlib.import_module(name)
    imported.append(name)
    if hasattr(module, "__path__"):
        for found in pkgutil.walk_packages(module.__path__, name + "."):
            importlib.import_module(found.name)
            imported.append(found.name)
print(json.dumps([imported, sorted({name.partition(".")[0] for name in sys.modules})]))
"""
    answer = subprocess.run(
        [sys.executable, "-c", script, *names], cwd=ROOT, capture_output=True, text=True, check=False
    )
    assert answer.returncode == 0, answer.stderr
    imported, loaded = json.loads(answer.stdout.splitlines()[-1])
    return imported, set(loaded)


# The top level and the files ----


def test_top_level_holds_exactly_what_the_house_says():
    """Nothing stands at the top level but what the plan names, and nothing of it is missing."""
    assert {name.partition("/")[0] for name in tracked_files()} == TOP_LEVEL
    assert {name for name in tracked_files() if name.startswith(".ci/")} == {".ci/run"}


def test_no_file_is_longer_than_one_sitting():
    """Every Python and kv file is shorter than the limit."""
    files = [name for name in tracked_files() if name.endswith((".py", ".kv"))]
    lengths = {name: len((ROOT / name).read_text(encoding="utf-8").splitlines()) for name in files}
    assert len(lengths) > 10
    assert {name: lines for name, lines in lengths.items() if lines >= LONGEST_FILE} == {}


def test_no_file_names_a_machine_or_a_registry():
    """No tracked text holds a path of somebody's machine or the host of a package registry."""
    faults = {}
    for name in tracked_files():
        try:
            text = (ROOT / name).read_text(encoding="utf-8")
        except UnicodeDecodeError:
            continue  # a picture or a font
        if found := address_faults(text):
            faults[name] = found
    assert faults == {}


@pytest.mark.parametrize(
    "text",
    [
        "see /" + "home/ann/notes",
        "open('/" + "tmp/x')",
        "C:" + "\\Users\\ann",
        "https://pypi" + ".org/simple",
    ],
)
def test_a_machine_or_registry_is_found(text):
    """The checker of addresses finds each kind of them."""
    assert len(address_faults(text)) == 1


@pytest.mark.parametrize(
    "text", ["analysis/work/x", "~/tmp/x", "$HOME/work/", "/usr/bin/python3", "field/home/"]
)
def test_an_ordinary_path_is_let_be(text):
    """The checker of addresses leaves relative and common paths alone."""
    assert address_faults(text) == []


@pytest.mark.parametrize("package", ["analysis", "fieldapp"])
def test_every_folder_of_code_is_a_package(package):
    """No folder with Python files lacks its __init__.py, so that walking and packing find them all."""
    folders = {path.parent for path in python_files(package)}
    assert folders
    assert [folder for folder in folders if not (folder / "__init__.py").exists()] == []


# What may import what ----


def test_every_room_of_analysis_has_its_rules():
    """Each file of analysis stands in a room that the table of rooms names."""
    assert {room_of(path, "analysis") for path in python_files("analysis")} <= set(ROOMS)


@pytest.mark.parametrize("path", python_files("analysis"), ids=dotted_name)
def test_analysis_imports_only_what_its_room_may(path):
    """A file of analysis imports only what its room allows, inside functions and for type checking too."""
    package = dotted_name(path if path.stem == "__init__" else path.parent)
    assert room_faults(room_of(path, "analysis"), imports_in(path.read_text(encoding="utf-8"), package)) == []


@pytest.mark.parametrize(
    ("room", "line"),
    [
        ("orient", "import scipy"),
        ("orient", "from analysis.stats import sums"),
        ("orient", "from analysis import stats"),
        ("orient", "from ..stats import sums"),
        ("orient", "def f():\n    import pandas"),
        ("stats", "from analysis.fold.check import check_fold"),
        ("fold", "if TYPE_CHECKING:\n    from analysis.strain import shear"),
        ("strain", "import pandas as pd"),
        ("strain", "from analysis.files.reading import Reading"),
        ("files", "from analysis.fold import check"),
        ("files", "import geopandas"),
        ("report", "import matplotlib.pyplot as plt"),
        ("report", "import kivy"),
        ("cli", "import fieldapp"),
        ("cli", "importlib.import_module('fieldapp.app')"),
        ("errors", "import numpy"),
        ("files", "import urllib.request"),
    ],
)
def test_an_import_into_the_wrong_room_is_found(room, line):
    """The checker of rooms finds an import that a room may not make, however it is written."""
    assert len(room_faults(room, imports_in(line, f"analysis.{room}"))) == 1


@pytest.mark.parametrize(
    ("room", "line"),
    [
        (
            "orient",
            "import numpy.typing as npt\nfrom analysis.errors import AttitudeError\nfrom . import vectors",
        ),
        ("fold", "from analysis.stats.sums import RunningSums"),
        ("files", "def f():\n    import geopandas"),
        ("report", "def f():\n    from matplotlib import figure"),
        ("report", "if TYPE_CHECKING:\n    from matplotlib.figure import Figure"),
        ("cli", "import click\nfrom analysis.report import net"),
    ],
)
def test_an_import_into_the_right_room_is_let_be(room, line):
    """The checker of rooms leaves alone what a room may import."""
    assert room_faults(room, imports_in(line, f"analysis.{room}")) == []


@pytest.mark.parametrize("path", python_files("fieldapp"), ids=dotted_name)
def test_fieldapp_keeps_kivy_where_the_widgets_are_and_calls_no_network(path):
    """The presenter, the notebook and the devices import no Kivy; nothing in the app opens a connection."""
    package = dotted_name(path if path.stem == "__init__" else path.parent)
    imports = imports_in(path.read_text(encoding="utf-8"), package)
    forbidden = NETWORK if room_of(path, "fieldapp") in WITH_WIDGETS else NETWORK | {"kivy"}
    assert [found for found in imports if {found.module, found.library} & forbidden] == []


@pytest.mark.parametrize("path", python_files("analysis"), ids=dotted_name)
def test_analysis_looks_at_no_clock(path):
    """The computation gives the same answer whenever it is asked."""
    assert clock_faults(path.read_text(encoding="utf-8")) == []


@pytest.mark.parametrize(
    "line",
    [
        "import time",
        "from time import perf_counter",
        "datetime.now(tz=UTC)",
        "datetime.datetime.utcnow()",
        "date.today()",
        "np.datetime64('now')",
        "pd.Timestamp('today')",
        "uuid.uuid7()",
        "from uuid import uuid1",
    ],
)
def test_a_look_at_the_clock_is_found(line):
    """The checker of clocks finds each way of asking for the time."""
    assert clock_faults(line)


# What is loaded ----


def test_importing_analysis_loads_nothing_heavy():
    """`import analysis` alone brings neither a window nor a table library along."""
    imported, loaded = load_fresh("analysis.errors")
    assert imported == ["analysis.errors"]
    assert "analysis" in loaded
    assert loaded & TOO_HEAVY == set()


@pytest.mark.parametrize("room", sorted(FIELD_ROOMS))
def test_every_module_of_a_field_room_loads_nothing_heavy(room):
    """No module of a room that runs on a tablet loads a heavy library, directly or through others."""
    imported, loaded = load_fresh(f"analysis.{room}")
    assert set(imported) == {dotted_name(path) for path in python_files(f"analysis/{room}")}
    assert loaded & TOO_HEAVY == set()


def test_the_reading_loads_nothing_heavy():
    """The record that the notebook keeps can be had without the table library."""
    assert load_fresh("analysis.files.reading")[1] & TOO_HEAVY == set()


def test_the_presenter_and_the_notebook_load_no_kivy():
    """All of the app but its widgets can be had without a window library."""
    rooms = {path: room_of(path, "fieldapp") for path in python_files("fieldapp")}
    names = [dotted_name(path) for path, room in rooms.items() if room and room not in WITH_WIDGETS]
    assert load_fresh(*names)[1] & {"kivy", "matplotlib", "scipy"} == set()


def test_something_heavy_is_found():
    """The checker of what is loaded sees a library that a module brings along."""
    assert "pandas" in load_fresh("pandas.tseries.offsets")[1] & TOO_HEAVY
