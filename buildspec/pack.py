"""Stage the app for a device, and check what would go onto it: ``python3 buildspec/pack.py``.

Without arguments it copies what the app needs into out/tablet and says how many bytes that is; buildozer packs that
folder. With ``--check`` it then looks at everything that can be known without an Android SDK, and fails with a
reason for each thing that is wrong:

- name and version agree with pyproject.toml;
- every requirement has a recipe in the pinned python-for-android, at the version pinned, or a pure-Python wheel
  that fits the recipe's Python; nothing that they need is missing;
- every module that the app imports on a device, by its text and by a run of the window tests under a tracer, is
  staged or comes with a requirement, and every file that it opens is staged;
- the manifest that python-for-android renders asks for no INTERNET and no storage, can be installed on devices
  that lack sensors, keeps the notebook in the backup, and lets files be shared;
- the size, roughly.

The check sets up the project's own environment, as ``buildspec/test.py`` does, and runs in it; the tracer runs on a
display of its own where there is Xvfb.
"""

from __future__ import annotations

import argparse
import contextlib
import importlib.util
import subprocess
import sys
import tempfile
from pathlib import Path

import setup_env
from packing.spec import ROOT, SPEC, Finding, Spec, check_identity, project_table
from packing.staging import Staged, stage

STAGED = ROOT / "out" / "tablet"


def check(spec: Spec, staged: Staged, work: Path, trace: Path | None) -> tuple[list[Finding], list[str]]:
    """Run every check; give the findings and what else is worth saying. `trace` is a report of the tracer."""
    from packing import imports, manifest, requirements, sizes  # noqa: PLC0415 - staging needs none of what they load

    project = project_table()
    resolved = requirements.resolve(spec)
    findings = [
        *check_identity(spec, project),
        *requirements.check_release(spec),
        *resolved.findings,
        *requirements.check_project_bounds(resolved, project),
        *imports.check_statements(staged, resolved),
    ]
    if trace is not None:
        findings += imports.check_trace(trace, staged, resolved)
    notes = [*resolved.notes, f"Python {resolved.python} by python-for-android {spec.p4a_release}"]
    rendered = manifest.render(spec, staged, work / "render")
    if isinstance(rendered, Finding):
        return [*findings, rendered], notes
    findings += manifest.check_manifest(rendered, spec, project)
    findings += manifest.check_archive(rendered, staged)
    guess = sizes.estimate(spec, staged, rendered, resolved)
    return [*findings, *sizes.check_sizes(guess)], [*notes, *guess.lines()]


def run_trace(work: Path) -> tuple[Path | None, list[Finding]]:
    """Run the journeys on a display of their own; give the report, or why there is none."""
    from packing import imports  # noqa: PLC0415 - as in check

    report = work / "trace.json"
    with contextlib.ExitStack() as stack:
        display = ""
        if sys.platform.startswith("linux"):
            display = stack.enter_context(setup_env.virtual_display())
        findings = imports.trace(setup_env.kivy_environment(work / "kivy", display), report)
    return (None if findings else report), findings


def main(arguments: list[str]) -> int:
    """Stage, check when asked to, and say what was found."""
    parser = argparse.ArgumentParser(
        description="Stage the app for a device; with --check look at everything first."
    )
    parser.add_argument("--check", action="store_true", help="check what would go onto a device")
    parser.add_argument("--spec", type=Path, default=SPEC, help="another buildozer.spec")
    parser.add_argument(
        "--no-trace", action="store_true", help="check without running the app under the tracer"
    )
    asked = parser.parse_args(arguments)
    if asked.check and importlib.util.find_spec("pythonforandroid") is None:
        setup_env.require_python()
        python = setup_env.ensure_environment(setup_env.all_extras())
        return subprocess.run([python, __file__, *arguments], check=False).returncode
    staged = stage(STAGED)
    print(f"{len(staged.sizes)} files, {staged.total} bytes in {STAGED.relative_to(ROOT)}.")
    if not asked.check:
        return 0
    with tempfile.TemporaryDirectory(prefix="hingewise-pack-") as name:
        work = Path(name)
        trace, findings = (None, []) if asked.no_trace else run_trace(work)
        more, notes = check(Spec(asked.spec), staged, work, trace)
    findings += more
    for note in notes:
        print(f"- {note}")
    for finding in findings:
        print(f"WRONG {finding}")
    print(f"{len(findings)} findings." if findings else "Nothing is wrong that can be seen without a device.")
    return 1 if findings else 0


if __name__ == "__main__":
    sys.exit(main(sys.argv[1:]))
