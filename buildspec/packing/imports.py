"""Whether everything that the app imports and opens would be on a device.

Two looks, since each misses something. The files of the staged tree are read: every import statement in them, so
that those that only a device runs are seen too. And the app is run: the window tests' journeys go under
`packing.tracer`, which writes down what the app's own modules really imported and which of its files were opened.
"""

from __future__ import annotations

import contextlib
import importlib
import importlib.util
import json
import os
import subprocess
import sys
from pathlib import Path
from typing import TYPE_CHECKING

from packaging.utils import canonicalize_name

from packing.spec import HERE, ROOT, Finding
from packing.staging import PACKAGES, file_of, imports_of, module_name

if TYPE_CHECKING:
    from collections.abc import Collection

    from packing.requirements import Resolved
    from packing.staging import Staged

CHECK = "imports"
JOURNEYS = ("tests/window/test_journeys.py",)
PYTEST_OPTIONS = ("-p", "no:cacheprovider", "-m", "window")
TRACE_VARIABLE = "HINGEWISE_TRACE"

NOT_ON_ANDROID = {
    "tkinter",
    "turtle",
    "turtledemo",
    "idlelib",
    "ensurepip",
    "test",
    "curses",
    "readline",
    "venv",
}
"""Parts of the standard library that python-for-android leaves out or Android cannot have."""
ON_THE_DEVICE = {"sys", "builtins", "__future__"} | (sys.stdlib_module_names - NOT_ON_ANDROID)


def source_of(module: str, staged: Collection[str], packages: Collection[str]) -> bool:
    """Whether a module would be found on the device: staged, from a requirement or of the standard library."""
    top = module.partition(".")[0]
    if top in PACKAGES:
        return module in staged
    return top in packages or top in ON_THE_DEVICE


def is_in_wheel(dotted: str) -> bool:
    """Whether a pure-Python package that is installed here has such a module, or such a name in a module."""
    module, _, name = dotted.rpartition(".")
    if not module:
        return True
    with contextlib.suppress(ModuleNotFoundError):
        if importlib.util.find_spec(dotted) is not None:
            return True
    try:
        return hasattr(importlib.import_module(module), name)
    except ModuleNotFoundError:
        return False


def check_statements(staged: Staged, resolved: Resolved) -> list[Finding]:
    """Read every import statement of the staged tree; one inside a function counts like any other."""
    modules, findings = staged.modules(), []
    for name in sorted(staged.sizes):
        if not name.endswith(".py"):
            continue
        for imported, line in imports_of(staged.folder / name, module_name(Path(name))):
            # "from a.b import c" gives a.b.c too: a name in a module, unless the project has such a module.
            is_name = imported.partition(".")[0] in PACKAGES and file_of(imported) is None
            if not is_name and not source_of(imported, modules, resolved.packages):
                text = f"{name} line {line} imports {imported}, which would not be there"
                findings.append(Finding(CHECK, text))
            brought_by = resolved.packages.get(imported.partition(".")[0], "")
            if canonicalize_name(brought_by) in resolved.wheels and not is_in_wheel(imported):
                text = f"{name} line {line} imports {imported}; {brought_by} has no such thing"
                findings.append(Finding(CHECK, text))
    return findings


def trace(environment: dict[str, str], report: Path) -> list[Finding]:
    """Run the journeys under the tracer; the report is written to `report`."""
    python_path = os.pathsep.join([str(HERE), *filter(None, [environment.get("PYTHONPATH")])])
    done = subprocess.run(
        [
            sys.executable,
            "-m",
            "pytest",
            "-q",
            "-p",
            "packing.tracer",
            "-p",
            "no:cacheprovider",
            "-m",
            "window",
            *JOURNEYS,
        ],
        cwd=ROOT,
        env={**environment, "PYTHONPATH": python_path, TRACE_VARIABLE: str(report)},
        capture_output=True,
        text=True,
        check=False,
    )
    if done.returncode != 0 or not report.exists():
        return [
            Finding(CHECK, f"the journeys did not run through:\n{done.stdout[-2000:]}{done.stderr[-1000:]}")
        ]
    return []


def check_trace(report: Path, staged: Staged, resolved: Resolved) -> list[Finding]:
    """Compare what the app imported and opened while it ran with what would be on the device."""
    told = json.loads(report.read_text(encoding="utf-8"))
    modules, findings = staged.modules(), []
    if not told["imports"] or not told["files"]:
        findings.append(Finding(CHECK, "the trace is empty: the journeys did not open the app"))
    for imported, importers in sorted(told["imports"].items()):
        if not source_of(imported, modules, resolved.packages):
            findings.append(
                Finding(
                    CHECK, f"{', '.join(importers)} imported {imported} while running; it would not be there"
                )
            )
    findings += [
        Finding(CHECK, f"the app opened {name} while running; it is not staged")
        for name in sorted(told["files"])
        if name not in staged.sizes
    ]
    return findings
