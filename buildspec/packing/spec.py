"""Reading buildozer.spec, and what a check has to say."""

from __future__ import annotations

import configparser
import re
import tomllib
from dataclasses import dataclass
from pathlib import Path

HERE = Path(__file__).resolve().parent.parent
ROOT = HERE.parent
SPEC = HERE / "buildozer.spec"
P4A_TAG = re.compile(r"v(\d{4})\.(\d{2})\.(\d{2})")


@dataclass(frozen=True, slots=True)
class Finding:
    """What is wrong, by the check that found it."""

    check: str
    text: str

    def __str__(self) -> str:
        return f"{self.check}: {self.text}"


@dataclass(frozen=True, slots=True)
class Pin:
    """One entry of the spec's requirements: a name, and the version asked for ('' for none)."""

    name: str
    version: str

    @property
    def release(self) -> str:
        """The version as the package itself says it: a tag of a repository has a v before it."""
        return self.version.removeprefix("v")


class Spec:
    """A buildozer.spec as buildozer reads it: names are case-sensitive, values are not interpolated."""

    def __init__(self, path: Path = SPEC) -> None:
        self.path = Path(path)
        self._parser = configparser.RawConfigParser()
        self._parser.optionxform = str  # type: ignore[assignment,method-assign]
        self._parser.read_string(self.path.read_text(encoding="utf-8"))

    def text(self, name: str, section: str = "app") -> str:
        """Give the value of an entry; '' where it has none."""
        return self._parser.get(section, name, fallback="").strip()

    def items(self, name: str) -> list[str]:
        """Give the values of an entry that is a list."""
        return [item.strip() for item in self.text(name).split(",") if item.strip()]

    def pins(self) -> list[Pin]:
        """Give the requirements."""
        parts = (item.partition("==") for item in self.items("requirements"))
        return [Pin(name.strip(), version.strip()) for name, _, version in parts]

    @property
    def folder(self) -> Path:
        """The folder that buildozer is run in, which paths in the spec start from."""
        return self.path.parent

    @property
    def p4a_release(self) -> str:
        """The release of python-for-android as the package index names it; '' where no tag is named."""
        found = P4A_TAG.fullmatch(self.text("p4a.branch"))
        return ".".join(str(int(part)) for part in found.groups()) if found else ""


def project_table() -> dict[str, object]:
    """Give the table [project] of pyproject.toml."""
    return tomllib.loads((ROOT / "pyproject.toml").read_text(encoding="utf-8"))["project"]


def check_identity(spec: Spec, project: dict[str, object]) -> list[Finding]:
    """Compare the name and the version of the package with those of pyproject.toml."""
    findings = []
    if spec.text("package.name") != project["name"]:
        findings.append(
            f"package.name is {spec.text('package.name')!r}, pyproject.toml says {project['name']!r}"
        )
    if spec.text("title").lower() != project["name"]:
        findings.append(f"title is {spec.text('title')!r}, pyproject.toml says {project['name']!r}")
    if spec.text("version"):
        findings.append("version is written down; it must be read from pyproject.toml by version.regex")
    else:
        source = spec.folder / spec.text("version.filename")
        read = (
            re.search(spec.text("version.regex") or "$^", source.read_text("utf-8"))
            if source.is_file()
            else None
        )
        if source.resolve() != ROOT / "pyproject.toml" or read is None or read.group(1) != project["version"]:
            found = read.group(1) if read else "nothing"
            findings.append(f"version.regex finds {found!r}, pyproject.toml says {project['version']!r}")
    return [Finding("identity", text) for text in findings]
