"""Whether python-for-android, at the release pinned, can give every requirement of the spec.

python-for-android is asked itself: its recipes, its resolution of what they need, and its table of what is known
to be broken ship in its package. What has no recipe must be pure Python, which its wheel says.
"""

from __future__ import annotations

import contextlib
import importlib.metadata
import io
import os
import subprocess
import sys
import tempfile
import zipfile
from dataclasses import dataclass, field
from email.parser import Parser
from pathlib import Path
from typing import TYPE_CHECKING

from packaging.requirements import Requirement
from packaging.specifiers import SpecifierSet
from packaging.utils import canonicalize_name
from packaging.version import Version

from packing.spec import Finding

if TYPE_CHECKING:
    from collections.abc import Callable
    from email.message import Message

    from packing.spec import Pin, Spec

CHECK = "requirements"
DEVICE_TAG = "android_24_arm"
"""Of wheels for a device, as python-for-android asks for them; those for any platform fit it too."""

BY_THE_SYSTEM = {"hostpython3"}
"""Recipes that leave nothing on the device to import."""


@dataclass(frozen=True, slots=True)
class Wheel:
    """What a wheel says of itself."""

    name: str
    version: str
    pure: bool
    requires_python: str
    requires: tuple[str, ...]
    packages: frozenset[str]


@dataclass
class Resolved:
    """What would be installed on the device."""

    python: str
    recipes: dict[str, str] = field(default_factory=dict)
    """Version by name of each recipe that is built, those that recipes need among them."""
    wheels: dict[str, Wheel] = field(default_factory=dict)
    packages: dict[str, str] = field(default_factory=dict)
    """The requirement that brings each importable top-level name."""
    findings: list[Finding] = field(default_factory=list)
    notes: list[str] = field(default_factory=list)

    def find(self, text: str) -> None:
        """Note what is wrong."""
        self.findings.append(Finding(CHECK, text))


def wheel_of_installed(pin: Pin) -> Wheel | None:
    """Give what the wheel of this version said that is installed here; None where it is not."""
    try:
        found = importlib.metadata.distribution(pin.name)
    except importlib.metadata.PackageNotFoundError:
        return None
    names = {(file.parts[0], len(file.parts)) for file in found.files or ()}
    wheel = as_wheel(found.metadata, found.read_text("WHEEL") or "", names)
    return wheel if wheel.version == pin.release else None


def wheel_of(pin: Pin, python: str) -> Wheel | None:
    """Give the wheel of this very version that a device with this Python would get; None for none.

    A pure one that is installed here is taken as it is. Otherwise pip is asked for what fits the device, which is
    how python-for-android asks: a package with compiled parts for this machine may have a pure wheel as well.
    """
    installed = wheel_of_installed(pin)
    if installed is not None and installed.pure:
        return installed
    with tempfile.TemporaryDirectory(prefix="hingewise-wheel-") as folder:
        command = [
            sys.executable,
            "-m",
            "pip",
            "--disable-pip-version-check",
            "download",
            "--quiet",
            "--no-deps",
        ]
        command += ["--only-binary=:all:", "--platform", DEVICE_TAG, "--python-version", python]
        command += ["--dest", folder, f"{pin.name}=={pin.release}"]
        done = subprocess.run(command, capture_output=True, text=True, check=False)
        files = list(Path(folder).glob("*.whl"))
        if done.returncode != 0 or len(files) != 1:
            return None
        with zipfile.ZipFile(files[0]) as archive:
            inside = archive.namelist()
            info = next(name.partition("/")[0] for name in inside if name.endswith(".dist-info/WHEEL"))
            names = {(name.split("/")[0], name.count("/") + 1) for name in inside}
            metadata = Parser().parsestr(archive.read(f"{info}/METADATA").decode("utf-8"))
            return as_wheel(metadata, archive.read(f"{info}/WHEEL").decode("utf-8"), names)


def as_wheel(metadata: Message, wheel_file: str, names: set[tuple[str, int]]) -> Wheel:
    """Put together what a wheel says; `names` are the first parts of its paths and how many parts each path has."""
    tags = Parser().parsestr(wheel_file)
    return Wheel(
        name=metadata["Name"],
        version=metadata["Version"],
        pure=all(tag.endswith("-none-any") for tag in tags.get_all("Tag") or [""]),
        requires_python=metadata.get("Requires-Python", ""),
        requires=tuple(metadata.get_all("Requires-Dist") or ()),
        packages=frozenset(
            first if parts > 1 else first.removesuffix(".py")
            for first, parts in names
            if (parts > 1 and "." not in first) or (parts == 1 and first.endswith(".py"))
        ),
    )


def check_release(spec: Spec) -> list[Finding]:
    """Whether the python-for-android installed here is the one that the spec builds with."""
    here = importlib.metadata.version("python-for-android")
    if spec.p4a_release == here:
        return []
    return [
        Finding(
            CHECK,
            f"p4a.branch is {spec.text('p4a.branch')!r}, but its release {here} is what is checked against",
        )
    ]


def resolve(spec: Spec, look: Callable[[Pin, str], Wheel | None] | None = None) -> Resolved:
    """Resolve the spec's requirements as python-for-android does; `look` gives the wheel of a pin."""
    with contextlib.redirect_stdout(io.StringIO()), contextlib.redirect_stderr(io.StringIO()):
        return _resolve(spec, look or wheel_of)


def _resolve(spec: Spec, look: Callable[[Pin, str], Wheel | None]) -> Resolved:
    from pythonforandroid.bootstrap import Bootstrap  # noqa: PLC0415 - loading it takes a second
    from pythonforandroid.build import Context  # noqa: PLC0415
    from pythonforandroid.graph import get_recipe_order_and_bootstrap  # noqa: PLC0415
    from pythonforandroid.recipe import Recipe  # noqa: PLC0415
    from pythonforandroid.util import BuildInterruptingException  # noqa: PLC0415

    # A variable of this kind would put another version into the recipes' mouths.
    for name in [name for name in os.environ if name.startswith("VERSION_")]:
        del os.environ[name]
    context = Context()
    context.local_recipes = None
    pins = {pin.name: pin for pin in spec.pins()}
    try:
        order, others, _ = get_recipe_order_and_bootstrap(
            context, set(pins), Bootstrap.get_bootstrap(spec.text("p4a.bootstrap"), context)
        )
    except BuildInterruptingException as error:
        resolved = Resolved("")
        resolved.find(f"python-for-android finds no way to build these together: {error}")
        return resolved
    recipes = {name: Recipe.get_recipe(name, context) for name in order}
    resolved = Resolved(recipes["python3"].version if "python3" in recipes else "")
    if not resolved.python:
        resolved.find("python3 is not among the requirements")
        return resolved
    wanted_by_recipes = set()
    for name, recipe in recipes.items():
        resolved.recipes[name] = recipe.version or ""
        _check_recipe(resolved, name, recipe.version or "", pins.get(name))
        wanted_by_recipes |= {canonicalize_name(need) for need in getattr(recipe, "python_depends", [])}
        if name not in BY_THE_SYSTEM:
            resolved.packages[getattr(recipe, "site_packages_name", None) or name] = name
        least = getattr(recipe, "min_ndk_api_support", 0)
        if int(spec.text("android.minapi") or 0) < least:
            resolved.find(f"{name} needs android.minapi {least} or more, not {spec.text('android.minapi')}")
    _check_broken(resolved)
    for name in others:
        if name in pins:
            _check_wheel(resolved, pins[name], look)
        else:
            resolved.find(f"{name} is needed by a recipe and must be pinned")
    _check_needs(resolved, wanted_by_recipes)
    return resolved


def _check_recipe(resolved: Resolved, name: str, version: str, pin: Pin | None) -> None:
    """A pin must ask for what the recipe builds; what is on the package index says whether this Python will do."""
    if pin is not None and pin.version != version:
        asked = f"=={pin.version}" if pin.version else " without a version"
        resolved.find(f"{name}{asked}, but its recipe builds {version or 'its own source'}")


def _check_broken(resolved: Resolved) -> None:
    try:
        from ci.constants import BROKEN_RECIPES_PYTHON3  # noqa: PLC0415 - ships beside python-for-android
    except ImportError:
        resolved.notes.append("this python-for-android does not say which recipes are broken")
        return
    # Named there because its own container lacks Java; it is built with every Kivy app.
    for name in sorted((set(resolved.recipes) & set(BROKEN_RECIPES_PYTHON3)) - {"pyjnius"}):
        resolved.find(f"{name} is on python-for-android's own list of broken recipes")


def _check_wheel(resolved: Resolved, pin: Pin, look: Callable[[Pin, str], Wheel | None]) -> None:
    if not pin.version:
        resolved.find(f"{pin.name} has no recipe and must be pinned to a version")
        return
    wheel = look(pin, resolved.python)
    if wheel is None:
        resolved.find(f"{pin.name}=={pin.version} has neither a recipe nor a wheel")
        return
    if not wheel.pure:
        resolved.find(f"{pin.name}=={pin.version} has no recipe, and its wheel is not pure Python")
        return
    if wheel.requires_python and Version(resolved.python) not in SpecifierSet(wheel.requires_python):
        resolved.find(
            f"{pin.name}=={pin.version} wants Python {wheel.requires_python}; the recipe's is {resolved.python}"
        )
    resolved.wheels[canonicalize_name(pin.name)] = wheel
    for package in wheel.packages:
        resolved.packages.setdefault(package, pin.name)


def _check_needs(resolved: Resolved, wanted_by_recipes: set[str]) -> None:
    """Whatever a wheel needs must be there too, in a version that it can live with."""
    have = {canonicalize_name(name): version for name, version in resolved.recipes.items()}
    have |= {name: wheel.version for name, wheel in resolved.wheels.items()}
    device = {
        "python_version": ".".join(resolved.python.split(".")[:2]),
        "sys_platform": "android",
        "extra": "",
    }
    for wheel in resolved.wheels.values():
        for line in wheel.requires:
            need = Requirement(line)
            name = canonicalize_name(need.name)
            if need.marker is not None and not need.marker.evaluate(device):
                continue
            if name not in have and name not in wanted_by_recipes:
                resolved.find(f"{wheel.name} needs {need}, which is not among the requirements")
            elif name in have and have[name] and not need.specifier.contains(have[name].removeprefix("v")):
                resolved.find(f"{wheel.name} needs {need}; {have[name]} is asked for")


def check_project_bounds(resolved: Resolved, project: dict[str, object]) -> list[Finding]:
    """Whether what would be built on the device satisfies the lower bounds that pyproject.toml declares."""
    have = {canonicalize_name(name): version for name, version in resolved.recipes.items()}
    have |= {name: wheel.version for name, wheel in resolved.wheels.items()}
    findings = []
    for line in project["dependencies"]:  # type: ignore[attr-defined]
        bound = Requirement(line)
        version = have.get(canonicalize_name(bound.name))
        if version and not bound.specifier.contains(version.removeprefix("v")):
            findings.append(
                Finding(CHECK, f"pyproject.toml asks for {bound}; the device would get {version}")
            )
    wanted = str(project["requires-python"])
    if resolved.python and Version(resolved.python) not in SpecifierSet(wanted):
        text = f"pyproject.toml asks for Python {wanted}; the recipe's is {resolved.python}"
        findings.append(Finding(CHECK, text))
    return findings
