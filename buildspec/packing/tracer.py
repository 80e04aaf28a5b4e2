"""A plugin of pytest that writes down what the app imports and which of its files it opens while it runs.

It stands between every import statement and the machinery of importing, so that a module loaded long before is
seen again each time the app asks for it. Load it with ``-p packing.tracer``; the report goes to the file that
the variable HINGEWISE_TRACE names.
"""

from __future__ import annotations

import builtins
import json
import os
import sys
from importlib.util import resolve_name
from pathlib import Path
from typing import TYPE_CHECKING

from packing.imports import TRACE_VARIABLE
from packing.spec import ROOT
from packing.staging import PACKAGES

if TYPE_CHECKING:
    from collections.abc import Mapping, Sequence

CODE = {".py", ".pyc"}


class Tracer:
    """Imports by the app's own modules, each with who asked for it, and files of the app that were opened."""

    def __init__(self) -> None:
        self.imports: dict[str, set[str]] = {}
        self.files: set[str] = set()
        self._import = builtins.__import__
        self._tops = tuple(f"{ROOT / package}{os.sep}" for package in PACKAGES)

    def start(self) -> None:
        """Begin; it cannot be ended, since Python keeps an audit hook for as long as it runs."""
        builtins.__import__ = self._imported
        sys.addaudithook(self._audited)

    def _imported(
        self,
        name: str,
        globals: Mapping[str, object] | None = None,  # noqa: A002 - Python passes these by these names
        locals: Mapping[str, object] | None = None,  # noqa: A002
        fromlist: Sequence[str] | None = (),
        level: int = 0,
    ) -> object:
        module = self._import(name, globals, locals, fromlist, level)
        scope, wanted = globals or {}, fromlist or ()
        importer = str(scope.get("__name__", ""))
        if importer.partition(".")[0] in PACKAGES:
            full = resolve_name("." * level + name, str(scope.get("__package__"))) if level else name
            found = {full} | {f"{full}.{part}" for part in wanted if f"{full}.{part}" in sys.modules}
            for each in found:
                self.imports.setdefault(each, set()).add(importer)
        return module

    def _audited(self, event: str, values: tuple[object, ...]) -> None:
        if event == "open" and isinstance(values[0], str) and values[0].startswith(self._tops):
            path = Path(values[0])
            if path.suffix not in CODE and "__pycache__" not in path.parts and path.is_file():
                self.files.add(path.relative_to(ROOT).as_posix())

    def report(self) -> str:
        """What was seen, as JSON."""
        imports = {name: sorted(importers) for name, importers in sorted(self.imports.items())}
        return json.dumps({"imports": imports, "files": sorted(self.files)}, indent=1)


TRACER = Tracer()
if TRACE_VARIABLE in os.environ:
    TRACER.start()


def pytest_sessionfinish() -> None:
    """Write the report."""
    if TRACE_VARIABLE in os.environ:
        Path(os.environ[TRACE_VARIABLE]).write_text(TRACER.report(), encoding="utf-8")
