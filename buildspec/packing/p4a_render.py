"""Run as a program: let buildozer and python-for-android themselves make of a spec all that needs no Android SDK.

``python p4a_render.py SPEC STAGED WORK`` - buildozer copies the staged tree and says what it would tell
python-for-android; python-for-android's own program parses that, its build.py renders the manifest and packs the
private archive in a folder laid out as its distribution, and its hooks run in their order. What is missing is
what an SDK compiles. Prints one line of JSON: the folder of the distribution and the version of the app.
"""

from __future__ import annotations

import contextlib
import importlib.util
import json
import os
import shutil
import sys
from pathlib import Path

import pythonforandroid
from buildozer import Buildozer
from pythonforandroid.toolchain import ToolchainCL

BOOTSTRAPS = Path(pythonforandroid.__file__).parent / "bootstraps"
LAYERS = ("common", "_sdl_common", "sdl2")
"""Folders that python-for-android lays over one another for the bootstrap sdl2."""


class Asked(Exception):  # noqa: N818 - a way out, no error
    """What buildozer would start python-for-android with."""

    def __init__(self, arguments: list[str]) -> None:
        super().__init__(arguments)
        self.arguments = arguments


class Toolchain(ToolchainCL):
    """python-for-android's program, stopped where it would begin to compile."""

    def apk(self, args: object) -> None:
        """Keep the parsed arguments instead of building."""
        self.args = args


def ask_buildozer(spec: Path) -> tuple[list[str], Buildozer]:
    """Let buildozer copy the tree; give the arguments that it would start python-for-android with."""
    builder = Buildozer(spec.name, "android")
    builder.build_application()
    target = builder.target
    made = Path(target.get_dist_dir(builder.config.get("app", "package.name")))
    made.mkdir(parents=True)
    # As python-for-android leaves it, for the API that buildozer hands it in the environment.
    (made / "project.properties").write_text(f"target=android-{target.android_api}", encoding="utf-8")

    def asked(command: list[str], **_: object) -> None:
        raise Asked([*command, *target.extra_p4a_args])

    target._p4a = asked  # noqa: SLF001 - the one place where buildozer would start the other
    target.build_mode = "debug"
    try:
        target.build_package()
    except Asked as way_out:
        return way_out.arguments, builder
    raise RuntimeError("buildozer did not ask for a package")


def lay_distribution(folder: Path, builder: Buildozer) -> None:
    """Lay out what python-for-android would have built, without the compiled parts."""
    made_by_buildozer = Path(builder.target.get_dist_dir(builder.config.get("app", "package.name")))
    for layer in LAYERS:
        shutil.copytree(BOOTSTRAPS / layer / "build", folder, dirs_exist_ok=True)
    shutil.copytree(made_by_buildozer, folder, dirs_exist_ok=True)
    archs = builder.config.getlist("app", "android.archs")
    api = int(builder.config.get("app", "android.minapi"))
    told = {"bootstrap": "sdl2", "archs": archs, "ndk_api": api, "hostpython": sys.executable}
    (folder / "dist_info.json").write_text(json.dumps(told), encoding="utf-8")
    sdk = folder / "no-sdk"
    (sdk / "build-tools" / f"{builder.config.get('app', 'android.api')}.0.0").mkdir(parents=True)
    (folder / "local.properties").write_text(f"sdk.dir={sdk}", encoding="utf-8")
    for arch in archs:
        (folder / f"_python_bundle__{arch}").mkdir()
        (folder / "libs" / arch).mkdir(parents=True, exist_ok=True)


def render(arguments: list[str], folder: Path) -> None:
    """Do what python-for-android does between parsing its arguments and calling gradle."""
    sys.argv = ["p4a", *arguments]
    toolchain = Toolchain()
    toolchain._fix_args(toolchain.args)  # noqa: SLF001 - its own next step
    os.chdir(folder)
    toolchain.hook("before_apk_build")
    module = importlib.util.spec_from_file_location("build", folder / "build.py")
    assert module is not None and module.loader is not None  # noqa: S101, PT018 - for the type checker
    build = importlib.util.module_from_spec(module)
    module.loader.exec_module(build)
    # Compiling each file in a process of its own takes a minute and changes nothing of what is looked at.
    build.parse_args_and_make_package([*toolchain.args.unknown_args, "--no-byte-compile-python"])
    toolchain.hook("after_apk_build")
    toolchain.hook("before_apk_assemble")


def main(spec: Path, staged: Path, work: Path) -> None:
    """Render everything below `work`, which must not exist."""
    work.mkdir(parents=True)
    os.environ.update(
        HOME=str(work / "home"),  # buildozer and python-for-android keep folders there
        APP_SOURCE_DIR=str(staged),
        BUILDOZER_BUILD_DIR=str(work / "buildozer"),
        BUILDOZER_BIN_DIR=str(work / "bin"),
    )
    (work / "home").mkdir()
    os.chdir(spec.parent)
    with contextlib.redirect_stdout(sys.stderr):
        arguments, builder = ask_buildozer(spec)
        lay_distribution(work / "dist", builder)
        version = builder.get_version()
        render(arguments, work / "dist")
    print(json.dumps({"dist": str(work / "dist"), "version": version}))


if __name__ == "__main__":
    main(*(Path(argument).resolve() for argument in sys.argv[1:4]))
