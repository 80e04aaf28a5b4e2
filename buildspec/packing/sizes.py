"""How large the package would be, about: for planning, and so that something large is noticed."""

from __future__ import annotations

import functools
import importlib.metadata
import zlib
from dataclasses import dataclass
from pathlib import Path
from typing import TYPE_CHECKING

from packing.spec import Finding

if TYPE_CHECKING:
    from packing.manifest import Rendered
    from packing.requirements import Resolved
    from packing.spec import Spec
    from packing.staging import Staged

CHECK = "size"
MOST_STAGED_bytes = 3_000_000  # the app is under 1 MB; three times that means that something came along
MOST_PACKAGE_bytes = 200_000_000  # what a store takes in one piece (from memory)

BASE_bytes = 22_000_000
"""Python, its library, SDL, OpenSSL and SQLite for one processor, packed: a guess from memory, not measured."""

NOT_COPIED = {"tests", "__pycache__"}
"""Folders of a requirement that python-for-android leaves out."""


@dataclass(frozen=True, slots=True)
class Estimate:
    """Bytes, packed where not said otherwise."""

    staged_bytes: int
    archive_bytes: int
    by_requirement: dict[str, int]
    """From the builds for this machine that are installed here, without what they bundle for the desk."""
    unknown: tuple[str, ...]
    processors: int

    @property
    def package_bytes(self) -> int:
        """The whole package, with every processor it is for."""
        return self.archive_bytes + self.processors * (BASE_bytes + sum(self.by_requirement.values()))

    def lines(self) -> list[str]:
        """Say it."""
        parts = ", ".join(
            f"{name} {size / 1e6:.1f}"
            for name, size in sorted(self.by_requirement.items(), key=lambda pair: -pair[1])
        )
        lines = [
            f"staged tree {self.staged_bytes / 1e3:.0f} kB, packed {self.archive_bytes / 1e3:.0f} kB",
            f"requirements for one processor, MB packed, from desktop builds: {parts}",
            f"package for {self.processors} processors about {self.package_bytes / 1e6:.0f} MB; Python and SDL a guess",
        ]
        if self.unknown:
            lines.append(f"not counted, since not installed here: {', '.join(self.unknown)}")
        return lines


@functools.cache
def packed_bytes(name: str) -> int | None:
    """Bytes that an installed distribution takes when packed; None where it is not installed."""
    try:
        files = importlib.metadata.files(name) or []
    except importlib.metadata.PackageNotFoundError:
        return None
    total = 0
    for file in files:
        path = Path(str(file.locate()))
        bundled = any(
            part.endswith(".libs") for part in file.parts
        )  # libraries a desktop wheel carries along
        if bundled or NOT_COPIED & set(file.parts[:-1]) or ".." in file.parts or not path.is_file():
            continue
        total += len(zlib.compress(path.read_bytes(), 6))
    return total


def estimate(spec: Spec, staged: Staged, rendered: Rendered, resolved: Resolved) -> Estimate:
    """Add up what is known."""
    names = sorted(
        {*resolved.wheels, *(name for name in ("kivy", "numpy", "pandas") if name in resolved.recipes)}
    )
    sizes = {name: packed_bytes(name) for name in names}
    return Estimate(
        staged_bytes=staged.total,
        archive_bytes=rendered.archive_bytes,
        by_requirement={name: size for name, size in sizes.items() if size is not None},
        unknown=tuple(name for name, size in sizes.items() if size is None),
        processors=len(spec.items("android.archs")),
    )


def check_sizes(guess: Estimate) -> list[Finding]:
    """Say what is too large."""
    findings = []
    if guess.staged_bytes > MOST_STAGED_bytes:
        findings.append(
            f"the staged tree has {guess.staged_bytes} bytes; more than {MOST_STAGED_bytes} is no app"
        )
    if guess.package_bytes > MOST_PACKAGE_bytes:
        findings.append(
            f"the package would have {guess.package_bytes} bytes; {MOST_PACKAGE_bytes} is the most"
        )
    return [Finding(CHECK, text) for text in findings]
