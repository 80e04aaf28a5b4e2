"""Set Hingewise up and test it, all of it: ``python3 buildspec/test.py``.

Runs the linter, the formatter's check, the type checker and the tests, and ends with a count of the tests.
The window tests run on a display of their own, so that nothing pops up on the desktop.

Further arguments go to pytest: ``python3 buildspec/test.py tests/analysis/orient -k strike``. ``--bench`` as
the first argument runs the benchmarks instead; they write figures and never fail a build.
"""

from __future__ import annotations

import contextlib
import os
import subprocess
import sys
import tempfile
import time
import xml.etree.ElementTree as ET
from pathlib import Path
from typing import TYPE_CHECKING, NamedTuple

import setup_env
from setup_env import SetupError, say

if TYPE_CHECKING:
    from collections.abc import Mapping, Sequence

MOST_WORKERS = 4
NOTHING_COLLECTED = 5
"""pytest's exit code when it ran no test."""


class Count(NamedTuple):
    """Tests by outcome."""

    passed: int = 0
    failed: int = 0
    skipped: int = 0

    @property
    def ran(self) -> int:
        """Tests that ran to an outcome of their own."""
        return self.passed + self.failed

    def plus(self, other: Count) -> Count:
        """Both counts together."""
        return Count(self.passed + other.passed, self.failed + other.failed, self.skipped + other.skipped)

    def line(self) -> str:
        """Return the count as the last line of the run."""
        text = f"{self.passed} passed, {self.failed} failed"
        return f"{text}, {self.skipped} skipped" if self.skipped else text


def read_count(report: Path) -> Count:
    """Count the outcomes in one of pytest's JUnit reports; nothing where there is no report."""
    if not report.exists():
        return Count()
    total = Count()
    # Written by our own pytest a moment ago: there is no hostile XML to guard against.
    for suite in ET.parse(report).getroot().iter("testsuite"):  # noqa: S314
        tests, failures, errors, skipped = (
            int(suite.get(name, "0")) for name in ("tests", "failures", "errors", "skipped")
        )
        failed = failures + errors
        total = total.plus(Count(max(tests - failed - skipped, 0), failed, skipped))
    return total


def names_a_path(arguments: Sequence[str]) -> bool:
    """Whether any of pytest's arguments names a test file or folder."""
    return any(
        not argument.startswith("-") and (setup_env.ROOT / argument.split("::")[0]).exists()
        for argument in arguments
    )


def pytest_arguments(marker: str, report: Path, extra: Sequence[str], workers: int = 0) -> list[str]:
    """Arguments of one call of pytest; what the user gave comes last, so that it prevails."""
    arguments = ["-m", "pytest", "-ra", "-m", marker, f"--junitxml={report}"]
    if workers > 1:
        arguments += ["-n", str(workers), "--dist", "loadfile"]
    return [*arguments, *extra]


def has_window_tests() -> bool:
    """Whether there are window tests that must run."""
    return any((setup_env.ROOT / "tests" / "window").rglob("test_*.py"))


class Run:
    """One run of the steps: what failed, and the tests counted so far."""

    def __init__(self, python: Path, environment: Mapping[str, str], folder: Path) -> None:
        self.python = python
        self.environment = environment
        self.folder = folder
        self.failed_steps: list[str] = []
        self.count = Count()

    def step(self, name: str, arguments: Sequence[str], *, empty_code: int = 0) -> int:
        """Run one command of the environment's Python; say how long it took; return its exit code.

        `empty_code` is the exit code that says, and may say, that there was nothing to run.
        """
        say(f"\n== {name}")
        begun = time.monotonic()
        done = subprocess.run(
            [self.python, *arguments],
            cwd=setup_env.ROOT,
            env=dict(self.environment),
            stdin=subprocess.DEVNULL,
            check=False,
        )
        outcome = "done" if done.returncode in (0, empty_code) else "FAILED"
        say(f"-- {name}: {outcome} in {time.monotonic() - begun:.1f} s")
        return done.returncode

    def check(self, name: str, arguments: Sequence[str]) -> None:
        """Run a step that must succeed."""
        if self.step(name, arguments):
            self.failed_steps.append(name)

    def tests(
        self,
        name: str,
        marker: str,
        extra: Sequence[str],
        *,
        workers: int = 0,
        must_run: bool = True,
    ) -> None:
        """Run pytest once, add to the count, and note a failure, an empty run among them."""
        report = self.folder / f"{name.replace(' ', '-')}.xml"
        code = self.step(
            name,
            pytest_arguments(marker, report, extra, workers),
            empty_code=0 if must_run else NOTHING_COLLECTED,
        )
        count = read_count(report)
        self.count = self.count.plus(count)
        nothing_ran = code in (0, NOTHING_COLLECTED) and count.ran == 0
        if nothing_ran and must_run:
            say(f"{name}: there are such tests, but not one was run.")
        if (code != 0 and not nothing_ran) or (nothing_ran and must_run):
            self.failed_steps.append(name)


def display_for_tests(stack: contextlib.ExitStack, missing: Sequence[setup_env.SystemPackage]) -> str:
    """Start a display for the window tests; without Xvfb use the desktop's, and say so."""
    missing = [package for package in missing if package in setup_env.DISPLAY_PACKAGES]
    if sys.platform.startswith("linux") and not missing:
        return stack.enter_context(setup_env.virtual_display())
    if setup_env.has_display():
        say("No Xvfb here: the window tests use this desktop.")
        return ""
    raise SetupError(setup_env.describe_missing(missing))


def run_checks(run: Run, extra: Sequence[str]) -> None:
    """Run every step, whatever becomes of those before it."""
    run.check("ruff check", ["-m", "ruff", "check", "."])
    run.check("ruff format", ["-m", "ruff", "format", "--check", "."])
    run.check("mypy", ["-m", "mypy"])
    everything = not extra
    workers = min(os.cpu_count() or 1, MOST_WORKERS)
    paths = [] if names_a_path(extra) else ["tests"]
    marker = "not window and not bench"
    run.tests("tests", marker, [*paths, *extra], workers=workers, must_run=everything)
    if has_window_tests():
        paths = [] if names_a_path(extra) else ["tests/window"]
        run.tests("window tests", "window", [*paths, *extra], must_run=everything)
    if not everything and run.count.ran == 0:
        say("No test was run: the arguments chose none.")
        run.failed_steps.append("tests")


def main(arguments: list[str]) -> int:
    """Set up, run the steps, print what failed and the count; return 0 when all is well."""
    setup_env.require_python()
    benchmarks = arguments[:1] == ["--bench"]
    extra = arguments[1:] if benchmarks else arguments
    with contextlib.ExitStack() as stack:
        try:
            missing = setup_env.ensure_system(
                setup_env.WINDOW_PACKAGES + setup_env.DISPLAY_PACKAGES + setup_env.BROWSER_PACKAGES
            )
            if missing:
                say(setup_env.describe_missing(missing))
            python = setup_env.ensure_environment(setup_env.all_extras())
            display = display_for_tests(stack, missing) if has_window_tests() or benchmarks else ""
        except SetupError as error:
            print(error, file=sys.stderr)
            return 2
        folder = Path(stack.enter_context(tempfile.TemporaryDirectory(prefix="hingewise-test-")))
        environment = setup_env.kivy_environment(folder / "kivy", display)
        run = Run(python, environment, folder)
        if benchmarks:
            run.step("benchmarks", ["-m", "pytest", "-ra", "-s", "-m", "bench", "tests/bench", *extra])
            return 0
        run_checks(run, extra)
    say("")
    if run.failed_steps:
        say(f"Failed: {', '.join(run.failed_steps)}.")
    say(run.count.line())
    return 1 if run.failed_steps else 0


if __name__ == "__main__":
    sys.exit(main(sys.argv[1:]))
