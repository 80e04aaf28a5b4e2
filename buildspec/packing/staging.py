"""The staged tree: what goes onto a device, and nothing else.

The app is copied whole but for what only a desk uses. Of `analysis` only what the app can reach is copied: the
modules that the app's own files import, those that these import, and so on, inside functions too.
"""

from __future__ import annotations

import ast
import shutil
from dataclasses import dataclass
from pathlib import Path

from packing.spec import HERE, ROOT

PACKAGES = ("fieldapp", "analysis")
STARTS = ("fieldapp.app",)
"""What main.py imports; everything else is reached from here."""

DESK_ONLY = {
    "fieldapp.command": "the command `hingewise`: click and the desk's commands",
    "fieldapp.devices.replay": "samples from a file, for tests; a device has no way to it",
}
"""Modules of the app that stay at the desk, and why."""

DATA_SUFFIXES = {".kv", ".otf", ".txt", ".md"}
"""Files of the app beside its code: layouts, the font with its licence, the help."""


@dataclass(frozen=True, slots=True)
class Staged:
    """What was copied: paths relative to the tree, and their bytes."""

    folder: Path
    sizes: dict[str, int]

    @property
    def total(self) -> int:
        """Bytes of the whole tree."""
        return sum(self.sizes.values())

    def modules(self) -> set[str]:
        """Names of the staged modules and packages."""
        return {module_name(Path(name)) for name in self.sizes if name.endswith(".py")}


def module_name(path: Path) -> str:
    """Give the name under which a file, relative to the tree, is imported."""
    parts = path.with_suffix("").parts
    return ".".join(parts[:-1] if parts[-1] == "__init__" else parts)


def file_of(module: str, root: Path = ROOT) -> Path | None:
    """Give the file of one of the project's modules; None for what is no module of it."""
    base = root.joinpath(*module.split("."))
    for path in (base.with_suffix(".py"), base / "__init__.py"):
        if path.is_file():
            return path
    return None


def imports_of(path: Path, module: str) -> list[tuple[str, int]]:
    """Give every module that a file imports, with its line: inside functions too, for type checking not.

    "from a import b" gives a and a.b, since b may be a module; whoever asks drops what is none.
    """
    package = module if path.name == "__init__.py" else module.rpartition(".")[0]
    found: list[tuple[str, int]] = []

    def visit(node: ast.AST) -> None:
        if isinstance(node, ast.Import):
            found.extend((alias.name, node.lineno) for alias in node.names)
        elif isinstance(node, ast.ImportFrom):
            above = package.split(".")
            base = above[: len(above) - node.level + 1] if node.level else []
            name = ".".join([*base, *([node.module] if node.module else [])])
            found.append((name, node.lineno))
            found.extend((f"{name}.{alias.name}", node.lineno) for alias in node.names if name)
        for child in ast.iter_child_nodes(node):
            visit(child)

    def visit_all(nodes: list[ast.stmt]) -> None:
        for node in nodes:
            if isinstance(node, ast.If) and getattr(node.test, "id", "") == "TYPE_CHECKING":
                visit_all(node.orelse)
            else:
                visit(node)

    visit_all(ast.parse(path.read_text(encoding="utf-8")).body)
    return found


def reached(root: Path = ROOT) -> set[str]:
    """Give every module of the project that the app can reach on a device."""
    waiting, seen = list(STARTS), set()
    while waiting:
        module = waiting.pop()
        path = file_of(module, root)
        if module in seen or module in DESK_ONLY or path is None:
            continue
        seen.add(module)
        parent = module.rpartition(".")[0]
        waiting += [parent] if parent else []
        waiting += [name for name, _ in imports_of(path, module) if name.split(".")[0] in PACKAGES]
    return seen


def wanted_files(root: Path = ROOT) -> list[Path]:
    """Give the files to stage, relative to the project: the modules reached and the app's data."""
    modules = {path.relative_to(root) for module in reached(root) if (path := file_of(module, root))}
    data = {
        path.relative_to(root)
        for path in (root / "fieldapp").rglob("*")
        if path.is_file() and path.suffix in DATA_SUFFIXES
    }
    return sorted(modules | data)


def stage(folder: Path, root: Path = ROOT) -> Staged:
    """Make the tree anew in `folder`."""
    if folder.exists():
        if not (folder / "main.py").is_file() and any(folder.iterdir()):
            raise FileExistsError(f"{folder} holds something else than a staged tree; give another folder")
        shutil.rmtree(folder)
    sizes = {}
    for relative, source in [
        (Path("main.py"), HERE / "main.py"),
        (Path("LICENSE.txt"), root / "LICENSE"),
        *((path, root / path) for path in wanted_files(root)),
    ]:
        target = folder / relative
        target.parent.mkdir(parents=True, exist_ok=True)
        shutil.copyfile(source, target)
        sizes[relative.as_posix()] = target.stat().st_size
    return Staged(folder, sizes)


def staged_at(folder: Path) -> Staged:
    """Look at a tree that was staged before."""
    files = sorted(path for path in folder.rglob("*") if path.is_file() and "__pycache__" not in path.parts)
    return Staged(folder, {path.relative_to(folder).as_posix(): path.stat().st_size for path in files})
